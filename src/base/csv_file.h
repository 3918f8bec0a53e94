/* Tables of comma-separated values read into memory.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef BASE_CSV_FILE_H
#define BASE_CSV_FILE_H

#include <stddef.h>

#include "platewright/status.h"

enum { PLW_CSV_COLUMNS_MOST = 64 };

/* A table: the first line names the columns, each further one has a cell for each.  Cells are free of the spaces
 * around them; an empty cell is "".  Lines that are empty, or begin with #, are left out. */
typedef struct {
    size_t columns, lines;
    char **heads;       /* columns */
    size_t head_number; /* of the line with the heads, counted from 1 */
    char **cells;       /* lines * columns, line by line */
    size_t *numbers;    /* of each line in the file, counted from 1 */
    char *text;         /* what the others point into */
} plw_csv;

/* Read a table.  The separator is that of the first line: a tab if it has one, else a semicolon, else a comma.  Cells
 * may stand in double quotes, which are doubled inside (RFC 4180); UTF-8, with or without a byte order mark.
 * In:   name: stands for the file in messages; text[size]; lines_most: more than that is refused
 * Out:  *csv, to be freed with plw_csv_free(); not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_NO_MEMORY; PLW_E_DATA with `name:line: ...`: empty, not text, not UTF-8, a quote without its
 *       fellow, a line with more or fewer cells than columns, too many lines */
plw_status plw_csv_read_memory(const char *name, const char *text, size_t size, size_t lines_most, plw_csv *csv,
                               plw_error *error) PLW_MUST_USE;

/* The same from a file of at most `size_most` bytes.  Ret: also PLW_E_FILE */
plw_status plw_csv_read_file(const char *path, size_t size_most, size_t lines_most, plw_csv *csv,
                             plw_error *error) PLW_MUST_USE;

/* NULL inside is allowed: a table of zeros is freed as well. */
void plw_csv_free(plw_csv *csv);

#endif
