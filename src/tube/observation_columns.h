/* The columns of a table of observations.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_OBSERVATION_COLUMNS_H
#define TUBE_OBSERVATION_COLUMNS_H

#include "base/csv_file.h"
#include "tube/tube_fields.h"

typedef enum {
    PLW_COLUMN_NUMBER,
    PLW_COLUMN_KIND,
    PLW_COLUMN_CONNECTION,
    PLW_COLUMN_CONFIDENCE,
    PLW_COLUMN_HOW,
    PLW_COLUMN_SOURCE,
    PLW_COLUMN_NOTE
} plw_column_use;

typedef struct {
    const char *name;
    plw_column_use use;
    const char *attribute; /* of the tube file, for a number */
    const char *suffix;    /* the unit that a number in the column has */
} plw_observation_column;

enum { PLW_OBSERVATION_FAULTS_MOST = 10 };

/* Note a fault: the first sets the error, the next ones add lines, beyond the most they are only counted.
 * In:   line: in the file, from 1 */
void plw_observation_fault(plw_error *error, size_t *faults, const char *name, size_t line, const char *format, ...)
    PLW_PRINTF(5, 6);

/* Match the heads of a table with columns.  Upper case, spaces and hyphens do not count.
 * Out:  column[csv->columns]; *faults counts what is noted in error */
void plw_observation_columns_match(const char *name, const plw_csv *csv, const plw_observation_column **column,
                                   size_t *faults, plw_error *error);

/* A number of a cell: plain, in the unit of its column; or with a unit of its own (45mA, 4k7).
 * In:   fields: of rows or points
 * Ret:  PLW_OK; PLW_E_DATA with a text that begins with the column: also when rows (points) have no such figure */
plw_status plw_observation_number(const plw_observation_column *column, const plw_tube_field *fields, const char *text,
                                  double *value, size_t *offset, plw_error *error) PLW_MUST_USE;

#endif
