/* A gnuplot script drawn by gnuplot, without a shell.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/draw.h"

#include <errno.h>
#include <fcntl.h>
#include <spawn.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

extern char **environ;

enum { TAIL_SIZE = 32, PROGRAM_NOT_FOUND = 127 };

/* The last part of a path. */
static const char *last_part(const char *path) {
    const char *slash = strrchr(path, '/');
    return slash == NULL ? path : slash + 1;
}

/* Start gnuplot in the working folder and wait for it.  Ret: its exit status; -1: not started, with errno. */
static int run_gnuplot(char *script) {
    char program[] = "gnuplot";
    char defaults[] = "-d"; /* no settings of the user's own: the same drawing for everyone */
    char *const words[] = {program, defaults, script, NULL};
    posix_spawn_file_actions_t actions;
    if (posix_spawn_file_actions_init(&actions) != 0) {
        errno = ENOMEM;
        return -1;
    }
    pid_t child = 0;
    int reason = posix_spawn_file_actions_addopen(&actions, STDIN_FILENO, "/dev/null", O_RDONLY, 0);
    if (reason == 0) {
        reason = posix_spawn_file_actions_addopen(&actions, STDOUT_FILENO, "/dev/null", O_WRONLY, 0);
    }
    if (reason == 0) {
        reason = posix_spawnp(&child, program, &actions, NULL, words, environ);
    }
    (void)posix_spawn_file_actions_destroy(&actions);
    if (reason != 0) {
        errno = reason;
        return -1;
    }
    int status = 0;
    while (waitpid(child, &status, 0) < 0) {
        if (errno != EINTR) {
            return -1;
        }
    }
    return WIFEXITED(status) ? WEXITSTATUS(status) : 1;
}

/* A drawing cut short by a full disk lacks its ending. */
static bool is_whole(const char *path, plw_plot_format format) {
    static const char *const endings[] = {[PLW_PLOT_SVG] = "</svg>", [PLW_PLOT_PNG] = "IEND", [PLW_PLOT_PDF] = "%%EOF"};
    char tail[TAIL_SIZE + 1] = "";
    FILE *file = fopen(path, "rb");
    if (file == NULL) {
        return false;
    }
    size_t size = 0;
    if (fseek(file, -(long)TAIL_SIZE, SEEK_END) == 0) {
        size = fread(tail, 1, TAIL_SIZE, file);
    }
    (void)fclose(file);
    const size_t length = strlen(endings[format]);
    for (size_t i = 0; i + length <= size; i++) {
        if (memcmp(tail + i, endings[format], length) == 0) {
            return true;
        }
    }
    return false;
}

static plw_status judge(int result, int reason, const char *script_path, plw_error *error) {
    if (result == PROGRAM_NOT_FOUND || (result < 0 && (reason == ENOENT || reason == EACCES || reason == ENOTDIR))) {
        return plw_fail(error, PLW_E_PROGRAM,
                        "gnuplot: is not found; the script is written to %s: install gnuplot and run 'gnuplot %s'",
                        script_path, last_part(script_path));
    }
    if (result < 0) {
        return plw_fail(error, PLW_E_PROGRAM, "gnuplot: cannot be started: %s; the script is written to %s",
                        strerror(reason), script_path);
    }
    return plw_fail(error, PLW_E_PROGRAM,
                    "gnuplot: failed on %s (the script is written; no drawing is made, an older one is as it was)",
                    script_path);
}

/* In the temporary folder: draw, and move the drawing up beside the script. */
static plw_status draw_here(const char *script_path, const char *output, plw_plot_format format, plw_error *error) {
    const char *drawing = last_part(output);
    const size_t room = strlen(script_path) + strlen(drawing) + 8;
    char *above = malloc(room);
    if (above == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    snprintf(above, room, "../%s", last_part(script_path));
    const int result = run_gnuplot(above);
    const int reason = errno;
    plw_status status = PLW_OK;
    if (result != 0 || !is_whole(drawing, format)) {
        status = judge(result, reason, script_path, error);
    } else {
        snprintf(above, room, "../%s", drawing);
        if (rename(drawing, above) != 0) {
            status = plw_fail(error, PLW_E_FILE, "%s: cannot be written: %s", output, strerror(errno));
        }
    }
    free(above);
    (void)unlink(drawing);
    return status;
}

plw_status cli_draw(const char *script_path, const char *output, plw_plot_format format, plw_error *error) {
    const size_t length = (size_t)(last_part(output) - output);
    const size_t room = length + 32;
    char *folder = malloc(room);
    if (folder == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    snprintf(folder, room, "%.*s.platewright-XXXXXX", (int)length, output);
    const int home = open(".", O_RDONLY | O_CLOEXEC);
    plw_status status = PLW_OK;
    if (home < 0 || mkdtemp(folder) == NULL) {
        status = plw_fail(error, PLW_E_FILE, "%s: cannot be written: %s", output, strerror(errno));
    } else {
        if (chdir(folder) != 0) {
            status = plw_fail(error, PLW_E_FILE, "%s: cannot be entered: %s", folder, strerror(errno));
        } else {
            status = draw_here(script_path, output, format, error);
            if (fchdir(home) != 0 && status == PLW_OK) {
                status = plw_fail(error, PLW_E_FILE, "the folder the program was started in is gone");
            }
        }
        (void)rmdir(folder);
    }
    if (home >= 0) {
        (void)close(home);
    }
    free(folder);
    return status;
}
