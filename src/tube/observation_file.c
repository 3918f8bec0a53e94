/* Observations of a tube from a CSV file.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/observation_file.h"

#include <math.h>
#include <stdbool.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "platewright/catalogue.h"
#include "tube/observation_check.h"
#include "tube/observation_columns.h"

enum { LINES_MOST = 1000, KIND_ROW = -1, KIND_EMPTY = -2, KIND_UNKNOWN = -3 };

/* The table being turned into rows and points, which gather behind those that the tube has. */
typedef struct {
    const char *name;
    const plw_csv *csv;
    const plw_observation_column *column[PLW_CSV_COLUMNS_MOST];
    plw_tube made; /* of the tube: its type and kind; rows and points are new arrays */
    size_t rows_before, points_before;
    plw_observation_lines lines;
    size_t faults;
    bool no_memory;
    plw_error *error;
} reading;

/* One line of it. */
typedef struct {
    size_t number;     /* in the file */
    char *const *cell; /* as many as columns */
    int kind;          /* KIND_ROW or a plw_point_kind */
    plw_connection connection;
    plw_provenance provenance;
} line;

static const char *last_part(const char *path) {
    const char *slash = strrchr(path, '/');
    return slash == NULL ? path : slash + 1;
}

/* The cell of a column that holds text.  Ret: "" when there is none */
static const char *text_of(const reading *r, const line *l, plw_column_use use) {
    for (size_t i = 0; i < r->csv->columns; i++) {
        if (r->column[i]->use == use) {
            return l->cell[i];
        }
    }
    return "";
}

static bool has_number(const reading *r, const line *l, const char *const *attributes) {
    for (size_t i = 0; i < r->csv->columns; i++) {
        for (const char *const *wanted = attributes; *wanted != NULL && r->column[i]->attribute != NULL; wanted++) {
            if (strcmp(r->column[i]->attribute, *wanted) == 0 && l->cell[i][0] != '\0') {
                return true;
            }
        }
    }
    return false;
}

/* ---- words ------------------------------------------------------------------------------------------------------- */

static int kind_of(const char *text) {
    if (text[0] == '\0') {
        return KIND_EMPTY;
    }
    if (strcmp(text, "row") == 0) {
        return KIND_ROW;
    }
    for (int kind = 0; kind < (int)PLW_POINT_REMARK; kind++) {
        if (strcmp(text, plw_point_kind_name((plw_point_kind)kind)) == 0) {
            return kind;
        }
    }
    return KIND_UNKNOWN;
}

static void read_kind(reading *r, line *l) {
    static const char *const of_rows[] = {"drive-peak",
                                          "load",
                                          "power",
                                          "thd",
                                          "h2",
                                          "h3",
                                          "cathode-resistor",
                                          "plate-current-full-drive",
                                          "screen-current-full-drive",
                                          NULL};
    static const char *const constants[] = {"gm", "plate-resistance", "mu", NULL};
    const char *text = text_of(r, l, PLW_COLUMN_KIND);
    l->kind = kind_of(text);
    if (l->kind == KIND_UNKNOWN) {
        plw_observation_fault(r->error, &r->faults, r->name, l->number,
                              "kind: '%.40s' is not known; row, curve, cut-off, characteristics or inner-mu", text);
    }
    if (l->kind == KIND_EMPTY || l->kind == KIND_UNKNOWN) {
        const int point = has_number(r, l, constants) ? (int)PLW_POINT_CHARACTERISTICS : (int)PLW_POINT_CURVE;
        l->kind = has_number(r, l, of_rows) ? KIND_ROW : point;
    }
}

static void read_connection(reading *r, line *l) {
    const char *text = text_of(r, l, PLW_COLUMN_CONNECTION);
    const bool screened = plw_tube_has_screen(&r->made);
    l->connection = screened ? PLW_CONNECTION_PENTODE : PLW_CONNECTION_TRIODE;
    if (text[0] == '\0') {
        return;
    }
    if (strcmp(text, "triode") == 0) {
        l->connection = PLW_CONNECTION_TRIODE;
    } else if (strcmp(text, "pentode") != 0) {
        plw_observation_fault(r->error, &r->faults, r->name, l->number,
                              "connection: '%.40s' is not known; pentode or triode", text);
    } else if (!screened) {
        plw_observation_fault(r->error, &r->faults, r->name, l->number, "connection: a triode has no screen");
    }
}

static char *copy(reading *r, const char *text) {
    char *made = strdup(text);
    r->no_memory = r->no_memory || made == NULL;
    return made;
}

static void read_provenance(reading *r, line *l) {
    const char *how = text_of(r, l, PLW_COLUMN_HOW);
    const char *confidence = text_of(r, l, PLW_COLUMN_CONFIDENCE);
    const char *source = text_of(r, l, PLW_COLUMN_SOURCE);
    const char *note = text_of(r, l, PLW_COLUMN_NOTE);
    l->provenance = (plw_provenance){.how = PLW_HOW_READ, .confidence = PLW_CONFIDENCE_HIGH};
    if (strcmp(how, plw_how_name(PLW_HOW_MEMORY)) == 0) {
        l->provenance.how = PLW_HOW_MEMORY;
    } else if (how[0] != '\0' && strcmp(how, plw_how_name(PLW_HOW_READ)) != 0) {
        plw_observation_fault(r->error, &r->faults, r->name, l->number, "how: '%.40s' is not known; read or memory",
                              how);
    }
    int level = (int)PLW_CONFIDENCE_LOW;
    while (level > 0 && strcmp(confidence, plw_confidence_name((plw_confidence)level)) != 0) {
        level--;
    }
    l->provenance.confidence = (plw_confidence)level;
    if (confidence[0] != '\0' && strcmp(confidence, plw_confidence_name((plw_confidence)level)) != 0) {
        plw_observation_fault(r->error, &r->faults, r->name, l->number,
                              "confidence: '%.40s' is not known; high, medium or low", confidence);
    }
    l->provenance.source = copy(r, source[0] == '\0' ? last_part(r->name) : source);
    l->provenance.note = note[0] == '\0' ? NULL : copy(r, note);
}

/* ---- numbers ----------------------------------------------------------------------------------------------------- */

static void read_numbers(reading *r, const line *l, const plw_tube_field *fields, void *structure) {
    plw_fields_clear(fields, structure);
    for (size_t i = 0; i < r->csv->columns; i++) {
        double value = 0.0;
        size_t offset = 0;
        plw_error reason = {.status = PLW_OK};
        if (r->column[i]->use != PLW_COLUMN_NUMBER || l->cell[i][0] == '\0') {
            continue;
        }
        if (plw_observation_number(r->column[i], fields, l->cell[i], &value, &offset, &reason) == PLW_OK) {
            memcpy((char *)structure + offset, &value, sizeof value);
        } else {
            plw_observation_fault(r->error, &r->faults, r->name, l->number, "%s", reason.text);
        }
    }
}

/* Turn a line into a row or point; then see whether it makes sense. */
static void read_line(reading *r, line *l) {
    const size_t faults_before = r->faults;
    char why[PLW_OBSERVATION_WHY_SIZE] = "";
    read_kind(r, l);
    read_connection(r, l);
    read_provenance(r, l);
    if (l->kind == KIND_ROW) {
        const size_t index = r->made.rows_count++;
        plw_row *row = &r->made.rows[index];
        read_numbers(r, l, plw_row_fields, row);
        row->connection = l->connection;
        row->provenance = l->provenance;
        r->lines.of_row[index] = l->number;
        if (r->faults == faults_before) {
            plw_observation_check_row(&r->made, &r->lines, index, r->rows_before, why);
        }
    } else {
        const size_t index = r->made.points_count++;
        plw_point *point = &r->made.points[index];
        read_numbers(r, l, plw_point_fields, point);
        point->kind = (plw_point_kind)l->kind;
        point->connection = l->connection;
        point->provenance = l->provenance;
        r->lines.of_point[index] = l->number;
        if (r->faults == faults_before) {
            plw_observation_check_point(&r->made, &r->lines, index, r->points_before, why);
        }
    }
    if (why[0] != '\0') {
        plw_observation_fault(r->error, &r->faults, r->name, l->number, "%s", why);
    }
}

/* ---- the whole --------------------------------------------------------------------------------------------------- */

static bool make_room(reading *r, const plw_tube *tube) {
    r->made = *tube;
    r->rows_before = tube->rows_count;
    r->points_before = tube->points_count;
    const size_t rows = tube->rows_count + r->csv->lines + 1;
    const size_t points = tube->points_count + r->csv->lines + 1;
    r->made.rows = calloc(rows, sizeof *r->made.rows);
    r->made.points = calloc(points, sizeof *r->made.points);
    r->lines.of_row = calloc(rows, sizeof *r->lines.of_row);
    r->lines.of_point = calloc(points, sizeof *r->lines.of_point);
    if (r->made.rows == NULL || r->made.points == NULL || r->lines.of_row == NULL || r->lines.of_point == NULL) {
        return false;
    }
    if (tube->rows_count > 0) {
        memcpy(r->made.rows, tube->rows, tube->rows_count * sizeof *tube->rows);
    }
    if (tube->points_count > 0) {
        memcpy(r->made.points, tube->points, tube->points_count * sizeof *tube->points);
    }
    return true;
}

/* Free what was made new; what the tube had before is its own. */
static void give_up(reading *r) {
    for (size_t i = r->rows_before; r->made.rows != NULL && i < r->made.rows_count; i++) {
        free(r->made.rows[i].provenance.source);
        free(r->made.rows[i].provenance.note);
    }
    for (size_t i = r->points_before; r->made.points != NULL && i < r->made.points_count; i++) {
        free(r->made.points[i].provenance.source);
        free(r->made.points[i].provenance.note);
    }
    free(r->made.rows);
    free(r->made.points);
}

static plw_status read_lines(reading *r) {
    plw_error whole = {.status = PLW_OK};
    for (size_t i = 0; i < r->csv->lines; i++) {
        line l = {.number = r->csv->numbers[i], .cell = r->csv->cells + i * r->csv->columns};
        read_line(r, &l);
    }
    if (r->no_memory) {
        return plw_fail(r->error, PLW_E_NO_MEMORY, "%s: out of memory", r->name);
    }
    if (r->faults > PLW_OBSERVATION_FAULTS_MOST) {
        plw_error_add(r->error, "%s: %zu faults in all", r->name, r->faults);
    }
    if (r->faults > 0) {
        return PLW_E_DATA;
    }
    const size_t last = r->csv->lines > 0 ? r->csv->numbers[r->csv->lines - 1] : r->csv->head_number;
    if (plw_observation_check_whole(&r->made, &whole) != PLW_OK) {
        return plw_fail(r->error, PLW_E_DATA, "%s:%zu: %s", r->name, last, whole.text);
    }
    return PLW_OK;
}

static plw_status take(const char *name, const plw_csv *csv, plw_tube *tube, plw_error *error) {
    reading r = {.name = name, .csv = csv, .error = error};
    plw_observation_columns_match(name, csv, r.column, &r.faults, error);
    if (r.faults > 0) {
        return PLW_E_DATA;
    }
    const plw_status status =
        make_room(&r, tube) ? read_lines(&r) : plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", name);
    if (status == PLW_OK) {
        free(tube->rows);
        free(tube->points);
        *tube = r.made;
    } else {
        give_up(&r);
    }
    free(r.lines.of_row);
    free(r.lines.of_point);
    return status;
}

plw_status plw_observation_file_read_memory(const char *name, const char *text, size_t size, plw_tube *tube,
                                            plw_error *error) {
    plw_csv csv;
    plw_status status = plw_csv_read_memory(name, text, size, LINES_MOST, &csv, error);
    if (status == PLW_OK) {
        status = take(name, &csv, tube, error);
        plw_csv_free(&csv);
    }
    return status;
}

plw_status plw_observation_file_read(const char *path, plw_tube *tube, plw_error *error) {
    plw_csv csv;
    plw_status status = plw_csv_read_file(path, (size_t)PLW_FILE_SIZE_MOST, LINES_MOST, &csv, error);
    if (status == PLW_OK) {
        status = take(path, &csv, tube, error);
        plw_csv_free(&csv);
    }
    return status;
}
