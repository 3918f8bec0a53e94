/* A result written to a file, whole or not at all.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#define _XOPEN_SOURCE 700 /* NOLINT(bugprone-reserved-identifier): for realpath() */
#include "platewright/text_file.h"

#include <errno.h>
#include <fcntl.h>
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/replace_file.h"

static plw_status refuse(const char *path, int reason, plw_error *error) {
    const char *remedy = "";
    if (reason == ENOENT || reason == ENOTDIR) {
        remedy = "; make the folder first";
    } else if (reason == ENOSPC || reason == EDQUOT) {
        remedy = "; make room or choose another disk";
    } else if (reason == EACCES || reason == EROFS || reason == EPERM) {
        remedy = "; choose a place where you may write";
    }
    return plw_fail(error, PLW_E_FILE, "%s: cannot be written: %s%s", path, strerror(reason), remedy);
}

/* A device or a pipe has no temporary name. */
static plw_status write_straight(const char *path, const char *text, plw_error *error) {
    const int file = open(path, O_WRONLY | O_CLOEXEC | O_NOCTTY);
    int reason = file < 0 ? errno : 0;
    for (size_t left = strlen(text); left > 0 && reason == 0;) {
        const ssize_t written = write(file, text, left);
        if (written >= 0) {
            text += written;
            left -= (size_t)written;
        } else if (errno != EINTR) {
            reason = errno;
        }
    }
    if (file >= 0 && close(file) != 0 && reason == 0) {
        reason = errno;
    }
    return reason == 0 ? PLW_OK : refuse(path, reason, error);
}

/* Can a new file be put in its folder?  Ret: 0 or the reason. */
static int folder_fault(const char *path) {
    const char *slash = strrchr(path, '/');
    char *folder = NULL;
    if (slash == NULL) {
        folder = strdup(".");
    } else {
        folder = slash == path ? strdup("/") : strndup(path, (size_t)(slash - path));
    }
    struct stat status = {0};
    int reason = 0;
    if (folder == NULL || stat(folder, &status) != 0 || access(folder, W_OK | X_OK) != 0) {
        reason = errno;
    } else if (!S_ISDIR(status.st_mode)) {
        reason = ENOTDIR;
    }
    free(folder);
    return reason;
}

plw_status plw_text_may_write(const char *path, plw_error *error) {
    struct stat status = {0};
    const bool exists = stat(path, &status) == 0;
    if (exists && S_ISDIR(status.st_mode)) {
        return plw_fail(error, PLW_E_FILE, "%s: is a folder; name a file in it", path);
    }
    if (exists && access(path, W_OK) != 0) {
        return refuse(path, errno, error);
    }
    const int reason = exists ? 0 : folder_fault(path);
    return reason == 0 ? PLW_OK : refuse(path, reason, error);
}

plw_status plw_text_write(const char *path, const char *text, plw_error *error) {
    const plw_status possible = plw_text_may_write(path, error);
    if (possible != PLW_OK) {
        return possible;
    }
    struct stat status = {0};
    const bool exists = stat(path, &status) == 0;
    if (exists && !S_ISREG(status.st_mode)) {
        return write_straight(path, text, error);
    }
    struct stat link = {0};
    const bool is_link = lstat(path, &link) == 0 && S_ISLNK(link.st_mode);
    char *target = exists && is_link ? realpath(path, NULL) : NULL; /* a link stays a link */
    const plw_status written = plw_replace_file(target == NULL ? path : target, text, strlen(text), error);
    free(target);
    return written;
}
