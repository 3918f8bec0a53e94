/* The files that a command reads and writes: none may be another, each must find its folder.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/files.h"

#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#include "platewright/text_file.h"

typedef struct {
    const char *path;   /* NULL: not there */
    const char *option; /* that writes it; NULL: it is read */
    const char *role;   /* what it is to another option */
} one_file;

static const char *last_part(const char *path) {
    const char *slash = strrchr(path, '/');
    return slash == NULL ? path : slash + 1;
}

/* Out: *status of the folder that a file lies in.  Ret: false: not there, or no memory */
static bool find_folder(const char *path, struct stat *status) {
    const size_t length = (size_t)(last_part(path) - path);
    char *folder = length == 0 ? strdup(".") : strndup(path, length);
    const bool found = folder != NULL && stat(folder, status) == 0;
    free(folder);
    return found;
}

static bool is_one(const struct stat *a, const struct stat *b) {
    return a->st_dev == b->st_dev && a->st_ino == b->st_ino;
}

/* By whatever name or link.  Files that are not there yet are the same by folder and name. */
static bool is_same_file(const char *a, const char *b) {
    struct stat of_a = {0};
    struct stat of_b = {0};
    const bool is_a = stat(a, &of_a) == 0;
    const bool is_b = stat(b, &of_b) == 0;
    if (is_a && is_b) {
        return S_ISREG(of_a.st_mode) && is_one(&of_a, &of_b);
    }
    return is_a == is_b && strcmp(last_part(a), last_part(b)) == 0 && find_folder(a, &of_a) && find_folder(b, &of_b) &&
           is_one(&of_a, &of_b);
}

static plw_status compare(const one_file *files, size_t count, plw_error *error) {
    for (size_t i = 1; i < count; i++) {
        for (size_t k = 0; k < i; k++) {
            if (files[i].path != NULL && files[k].path != NULL && is_same_file(files[i].path, files[k].path)) {
                return plw_fail(error, PLW_E_USAGE, "--%s: %.200s is %s; give another name", files[i].option,
                                files[i].path, files[k].role);
            }
        }
    }
    return PLW_OK;
}

/* A "-" stands for the screen or the keyboard. */
static const char *named(const char *path, const char *otherwise) {
    return path != NULL && strcmp(path, "-") == 0 ? otherwise : path;
}

plw_status cli_files_check(const cli_arguments *arguments, const cli_drawing *drawing, plw_error *error) {
    const char *output = named(cli_argument(arguments, "output"), NULL);
    const one_file files[] = {
        {named(arguments->positional, "/dev/stdin"), NULL, "the stage file that is read"},
        {cli_argument(arguments, "save"), "save", "where --save puts the stage"},
        {drawing == NULL ? NULL : drawing->script, "output", "the gnuplot script of the drawing"},
        {drawing == NULL ? output : drawing->drawing, "output", "the result"},
    };
    const size_t count = sizeof files / sizeof files[0];
    plw_status status = compare(files, count, error);
    for (size_t i = 1; i < count && status == PLW_OK; i++) {
        if (files[i].path != NULL) {
            status = plw_text_may_write(files[i].path, error);
        }
    }
    return status;
}
