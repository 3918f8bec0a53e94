/* An object of JSON being filled.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_JSON_SINK_H
#define REPORT_JSON_SINK_H

#include <jansson.h>
#include <stdbool.h>

#include "platewright/quantity.h"

/* More digits than any part or meter has, fewer than a double: the last bits of a solution are not part of it. */
enum { PLW_JSON_DIGITS = 9 };

/* jansson says "no memory" by NULL, which is noted once for all. */
typedef struct {
    json_t *object;
    bool *failed;
} plw_json_sink;

void plw_json_put(const plw_json_sink *s, const char *name, json_t *value);
void plw_json_append(json_t *array, json_t *value, bool *failed);

/* Null for what is not known; whole numbers without a decimal point. */
json_t *plw_json_number(double value);
void plw_json_put_number(const plw_json_sink *s, const char *name, double value);

/* An object within an object; when it can't be put there it is gone already, and what goes into it is lost too. */
plw_json_sink plw_json_object_in(const plw_json_sink *parent, const char *name);

/* "V", "ohm" ... */
const char *plw_json_unit_name(plw_unit unit);

/* The object as text.  In: object, which is given up; NULL or failed: no memory */
plw_status plw_json_text(json_t *object, bool failed, char **text, plw_error *error) PLW_MUST_USE;

#endif
