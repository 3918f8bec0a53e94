/* The columns of a table of observations.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/observation_columns.h"

#include <stdarg.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>

#include "platewright/quantity.h"

#define NUMBER(name, attribute, suffix)                                                                                \
    { name, PLW_COLUMN_NUMBER, attribute, suffix }
#define TEXT(name, use)                                                                                                \
    { name, use, NULL, NULL }

static const plw_observation_column columns[] = {
    NUMBER("plate_volts", "plate", ""),
    NUMBER("plate_ma", "plate-current", "mA"),
    NUMBER("plate_amps", "plate-current", ""),
    NUMBER("plate_ma_full_drive", "plate-current-full-drive", "mA"),
    NUMBER("plate_amps_full_drive", "plate-current-full-drive", ""),
    NUMBER("plate_resistance_ohms", "plate-resistance", ""),
    NUMBER("plate_resistance_kohms", "plate-resistance", "k"),
    NUMBER("screen_volts", "screen", ""),
    NUMBER("screen_ma", "screen-current", "mA"),
    NUMBER("screen_amps", "screen-current", ""),
    NUMBER("screen_ma_full_drive", "screen-current-full-drive", "mA"),
    NUMBER("screen_amps_full_drive", "screen-current-full-drive", ""),
    NUMBER("grid_volts", "grid", ""),
    NUMBER("cathode_resistor_ohms", "cathode-resistor", ""),
    NUMBER("drive_peak_volts", "drive-peak", ""),
    NUMBER("gm_umho", "gm", "umho"),
    NUMBER("gm_ma_per_volt", "gm", "mA/V"),
    NUMBER("mu", "mu", ""),
    NUMBER("load_ohms", "load", ""),
    NUMBER("load_kohms", "load", "k"),
    NUMBER("power_watts", "power", ""),
    NUMBER("power_mw", "power", "mW"),
    NUMBER("thd_percent", "thd", ""),
    NUMBER("second_percent", "h2", ""),
    NUMBER("third_percent", "h3", ""),
    NUMBER("uncertainty_percent", "uncertainty", ""),
    TEXT("kind", PLW_COLUMN_KIND),
    TEXT("connection", PLW_COLUMN_CONNECTION),
    TEXT("confidence", PLW_COLUMN_CONFIDENCE),
    TEXT("how", PLW_COLUMN_HOW),
    TEXT("source", PLW_COLUMN_SOURCE),
    TEXT("note", PLW_COLUMN_NOTE),
};

enum { COLUMNS = sizeof columns / sizeof columns[0], NAME_SIZE = 64, LIST_SIZE = 600, CELL_SIZE = 160 };

void plw_observation_fault(plw_error *error, size_t *faults, const char *name, size_t line, const char *format, ...) {
    char text[LIST_SIZE + 200];
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(text, sizeof text, format, arguments);
    va_end(arguments);
    if (++*faults > PLW_OBSERVATION_FAULTS_MOST) {
        return;
    }
    if (*faults == 1) {
        (void)plw_fail(error, PLW_E_DATA, "%s:%zu: %s", name, line, text);
    } else {
        plw_error_add(error, "%s:%zu: %s", name, line, text);
    }
}

/* Lower case, with an underscore for spaces and hyphens. */
static void spell(const char *head, char spelt[NAME_SIZE]) {
    size_t length = 0;
    for (; *head != '\0' && length + 1 < NAME_SIZE; head++) {
        const char c = *head;
        spelt[length++] = c >= 'A' && c <= 'Z' ? (char)(c - 'A' + 'a') : (char)(c == ' ' || c == '-' ? '_' : c);
    }
    spelt[length] = '\0';
}

static const plw_observation_column *find(const char *head) {
    char spelt[NAME_SIZE];
    spell(head, spelt);
    for (size_t i = 0; i < COLUMNS; i++) {
        if (strcmp(columns[i].name, spelt) == 0) {
            return &columns[i];
        }
    }
    return NULL;
}

static void append(char list[LIST_SIZE], const char *name) {
    const size_t length = strlen(list);
    snprintf(list + length, LIST_SIZE - length, "%s%s", length == 0 ? "" : ", ", name);
}

/* Columns of the same quantity in other units: those that share the beginning up to the last underscore, or the whole
 * of a name without one. */
static bool list_units(const char *spelt, char list[LIST_SIZE]) {
    const char *last = strrchr(spelt, '_');
    const size_t stem = last == NULL ? strlen(spelt) : (size_t)(last - spelt);
    for (size_t i = 0; i < COLUMNS && stem > 0; i++) {
        if (strncmp(columns[i].name, spelt, stem) == 0 && columns[i].name[stem] == '_' &&
            columns[i].use == PLW_COLUMN_NUMBER) {
            append(list, columns[i].name);
        }
    }
    return list[0] != '\0';
}

static void fault_unknown(const char *name, size_t line, const char *head, size_t *faults, plw_error *error) {
    char spelt[NAME_SIZE];
    spell(head, spelt);
    const char *names[COLUMNS];
    char list[LIST_SIZE] = "";
    for (size_t i = 0; i < COLUMNS; i++) {
        names[i] = columns[i].name;
    }
    size_t nearest = 0;
    if (list_units(spelt, list)) {
        plw_observation_fault(error, faults, name, line,
                              "column '%.40s': is not known; the unit stands in the name: %s", head, list);
    } else if (plw_nearest_names(spelt, names, COLUMNS, &nearest, 1) == 1) {
        plw_observation_fault(error, faults, name, line, "column '%.40s': is not known; %s is", head, names[nearest]);
    } else {
        for (size_t i = 0; i < COLUMNS; i++) {
            append(list, names[i]);
        }
        plw_observation_fault(error, faults, name, line, "column '%.40s': is not known; the columns are %s", head,
                              list);
    }
}

/* Do two columns say the same thing, if in other units? */
static bool same_use(const plw_observation_column *one, const plw_observation_column *other) {
    return one == other || (one->use == PLW_COLUMN_NUMBER && other->use == PLW_COLUMN_NUMBER &&
                            strcmp(one->attribute, other->attribute) == 0);
}

void plw_observation_columns_match(const char *name, const plw_csv *csv, const plw_observation_column **column,
                                   size_t *faults, plw_error *error) {
    for (size_t i = 0; i < csv->columns; i++) {
        column[i] = find(csv->heads[i]);
        if (column[i] == NULL) {
            fault_unknown(name, csv->head_number, csv->heads[i], faults, error);
        }
        for (size_t before = 0; before < i && column[i] != NULL; before++) {
            if (column[before] != NULL && same_use(column[before], column[i])) {
                plw_observation_fault(error, faults, name, csv->head_number, "column '%s': column %zu says the same",
                                      csv->heads[i], before + 1);
            }
        }
    }
}

static const plw_tube_field *field_of(const plw_observation_column *column, const plw_tube_field *fields) {
    while (fields->attribute != NULL && strcmp(fields->attribute, column->attribute) != 0) {
        fields++;
    }
    return fields->attribute == NULL ? NULL : fields;
}

plw_status plw_observation_number(const plw_observation_column *column, const plw_tube_field *fields, const char *text,
                                  double *value, size_t *offset, plw_error *error) {
    const plw_tube_field *field = field_of(column, fields);
    if (field == NULL) {
        return plw_fail(error, PLW_E_DATA, "%s: belongs to a row; leave it empty, or make the kind 'row'",
                        column->name);
    }
    double number = 0.0;
    char written[CELL_SIZE] = "";
    plw_error reason = {.status = PLW_OK};
    if (plw_quantity_parse(text, PLW_UNIT_NONE, &number, NULL) == PLW_OK) {
        /* The unit of the column goes behind the number before it is read: so it is the double nearest to what is
         * written, not one multiplication away from it. */
        snprintf(written, sizeof written, "%s%s", text, column->suffix);
    }
    if (plw_quantity_parse(written[0] == '\0' ? text : written, plw_field_unit(field), &number, &reason) != PLW_OK) {
        return plw_fail(error, PLW_E_DATA, "%s: %.400s", column->name, reason.text);
    }
    const bool current = strstr(column->attribute, "current") != NULL;
    if (current && number < 0.0) {
        return plw_fail(error, PLW_E_DATA, "%s: %.40s: a current into plate or screen is never negative", column->name,
                        text);
    }
    const plw_status status = plw_field_check_range(field, column->name, text, number, error);
    if (status == PLW_OK) {
        *value = number;
        *offset = field->offset;
    }
    return status;
}
