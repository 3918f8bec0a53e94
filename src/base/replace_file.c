/* A file written whole or not at all: to a temporary name, then renamed.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/replace_file.h"

#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

enum { TRIES = 100 };

/* Make a new file beside path.  Out: temporary, a buffer of `room` bytes, its name.  Ret: descriptor or -1 with errno.
 */
static int open_beside(const char *path, char *temporary, size_t room) {
    for (int i = 0; i < TRIES; i++) {
        snprintf(temporary, room, "%s.%ld-%d.new", path, (long)getpid(), i);
        const int file = open(temporary, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
        if (file >= 0 || errno != EEXIST) {
            return file;
        }
    }
    return -1;
}

/* Ret: 0, or -1 with errno. */
static int write_all(int file, const char *text, size_t size) {
    while (size > 0) {
        const ssize_t written = write(file, text, size);
        if (written < 0 && errno != EINTR) {
            return -1;
        }
        if (written > 0) {
            text += written;
            size -= (size_t)written;
        }
    }
    return 0;
}

plw_status plw_replace_file(const char *path, const char *text, size_t size, plw_error *error) {
    const size_t room = strlen(path) + 48;
    char *temporary = malloc(room);
    if (temporary == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", path);
    }
    const int file = open_beside(path, temporary, room);
    int reason = file < 0 ? errno : 0;
    if (file >= 0) {
        if (write_all(file, text, size) != 0) {
            reason = errno;
        }
        if (close(file) != 0 && reason == 0) { /* a full disk over the network may show only here */
            reason = errno;
        }
        if (reason == 0 && rename(temporary, path) != 0) {
            reason = errno;
        }
        if (reason != 0) {
            (void)unlink(temporary);
        }
    }
    free(temporary);
    return reason == 0 ? PLW_OK : plw_fail(error, PLW_E_FILE, "%s: cannot be written: %s", path, strerror(reason));
}
