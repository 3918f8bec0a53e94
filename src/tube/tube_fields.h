/* The numbers of a tube file: attribute, place in the structure, unit, range.  One table serves reader and writer.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_TUBE_FIELDS_H
#define TUBE_TUBE_FIELDS_H

#include <stddef.h>

#include "base/xml_file.h"
#include "platewright/quantity.h"
#include "platewright/tube.h"

/* The unit of a field and the prefix it is written with. */
typedef enum {
    PLW_FIELD_VOLTS,
    PLW_FIELD_MILLIAMPERES,
    PLW_FIELD_AMPERES,
    PLW_FIELD_OHMS, /* ohm, k or M by size */
    PLW_FIELD_WATTS,
    PLW_FIELD_MICROFARADS,
    PLW_FIELD_MICROMHOS,
    PLW_FIELD_PERCENT,
    PLW_FIELD_NUMBER
} plw_field_style;

typedef struct {
    const char *attribute; /* NULL ends a table */
    size_t offset;         /* of the double in the structure */
    plw_field_style style;
    double least, most; /* in the base unit */
} plw_tube_field;

extern const plw_tube_field plw_heater_fields[];         /* plw_tube */
extern const plw_tube_field plw_variant_heater_fields[]; /* plw_variant */
extern const plw_tube_field plw_ratings_fields[];
extern const plw_tube_field plw_row_fields[];
extern const plw_tube_field plw_point_fields[];
extern const plw_tube_field plw_model_errors_fields[];
extern const plw_tube_field plw_region_fields[];
extern const plw_tube_field plw_rectifier_limits_fields[]; /* plw_rectifier_data */
extern const plw_tube_field plw_rectifier_drop_fields[];   /* plw_rectifier_data */
extern const plw_tube_field plw_rectifier_row_fields[];

/* The value of a coefficient of a law and its relative error stand in arrays: fields without an offset. */
extern const plw_tube_field plw_coefficient_field, plw_coefficient_error_field;

/* Set every field of a structure to NaN: not known. */
void plw_fields_clear(const plw_tube_field *fields, void *structure);

/* The unit of a field. */
plw_unit plw_field_unit(const plw_tube_field *field);

/* Read the text of one field.
 * Ret:  PLW_OK; PLW_E_DATA with a text that names the attribute and says what would be right; *value untouched then */
plw_status plw_field_parse(const plw_tube_field *field, const char *text, double *value, plw_error *error) PLW_MUST_USE;

/* See that a value lies within the range of its field.
 * In:   name: what the field is called where the value was written; text: how the value was written
 * Ret:  PLW_OK; PLW_E_DATA with a text that shows name, text and range */
plw_status plw_field_check_range(const plw_tube_field *field, const char *name, const char *text, double value,
                                 plw_error *error) PLW_MUST_USE;

/* Write a value so that plw_field_parse() gives the very same double, in as few digits as will do.
 * Out:  buffer, of at least PLW_FIELD_TEXT_SIZE bytes */
enum { PLW_FIELD_TEXT_SIZE = 48 };
void plw_field_format(const plw_tube_field *field, double value, char *buffer);

/* What plate-dissipation says when the maker publishes none. */
#define PLW_NOT_PUBLISHED "not published"

/* A tube file read with a schema that is at hand, or from memory (`name` stands for the file in messages). */
plw_status plw_tube_read_with(const plw_xml_schema *schema, const char *path, plw_tube **tube,
                              plw_error *error) PLW_MUST_USE;
plw_status plw_tube_read_memory(const plw_xml_schema *schema, const char *name, const char *text, size_t size,
                                plw_tube **tube, plw_error *error) PLW_MUST_USE;

#endif
