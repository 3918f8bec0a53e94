/* A folder of its own for a test: made, filled, removed.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_FOLDER_H
#define TESTS_FOLDER_H

#include <dirent.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "near.h"

enum { FOLDER_PATH_SIZE = 512 };

typedef struct {
    char path[FOLDER_PATH_SIZE / 2];
} test_folder;

static inline void folder_make(test_folder *folder) {
    const char *above = getenv("TMPDIR");
    snprintf(folder->path, sizeof folder->path, "%s/platewright-XXXXXX", above == NULL ? "/tmp" : above);
    assert_non_null(mkdtemp(folder->path));
}

/* The path of a name in the folder.  Ret: buffer */
static inline char *folder_path(const test_folder *folder, const char *name, char buffer[FOLDER_PATH_SIZE]) {
    snprintf(buffer, FOLDER_PATH_SIZE, "%s/%s", folder->path, name);
    return buffer;
}

static inline void folder_write(const test_folder *folder, const char *name, const char *text) {
    char path[FOLDER_PATH_SIZE];
    FILE *file = fopen(folder_path(folder, name, path), "wb");
    assert_non_null(file);
    assert_true(fputs(text, file) >= 0);
    assert_int_equal(fclose(file), 0);
}

/* The whole of a file, to be freed.  Out: *size when not NULL */
static inline char *file_text(const char *path, size_t *size) {
    FILE *file = fopen(path, "rb");
    assert_non_null(file);
    assert_int_equal(fseek(file, 0, SEEK_END), 0);
    const long length = ftell(file);
    assert_true(length >= 0);
    rewind(file);
    char *text = malloc((size_t)length + 1);
    assert_non_null(text);
    assert_int_equal(fread(text, 1, (size_t)length, file), (size_t)length);
    text[length] = '\0';
    fclose(file);
    if (size != NULL) {
        *size = (size_t)length;
    }
    return text;
}

static inline size_t folder_count(const test_folder *folder) {
    size_t count = 0;
    DIR *stream = opendir(folder->path);
    assert_non_null(stream);
    for (const struct dirent *item = readdir(stream); item != NULL; item = readdir(stream)) {
        count += item->d_name[0] == '.' ? 0 : 1;
    }
    closedir(stream);
    return count;
}

static inline void folder_remove(const test_folder *folder) {
    DIR *stream = opendir(folder->path);
    assert_non_null(stream);
    for (const struct dirent *item = readdir(stream); item != NULL; item = readdir(stream)) {
        char path[FOLDER_PATH_SIZE];
        folder_path(folder, item->d_name, path);
        if (strcmp(item->d_name, ".") != 0 && strcmp(item->d_name, "..") != 0 && unlink(path) != 0) {
            (void)rmdir(path);
        }
    }
    closedir(stream);
    assert_int_equal(rmdir(folder->path), 0);
}

#endif
