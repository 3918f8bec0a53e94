/* An object of JSON being filled.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/json_sink.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "report/text_buffer.h"

void plw_json_put(const plw_json_sink *s, const char *name, json_t *value) {
    if (json_object_set_new(s->object, name, value) != 0) {
        *s->failed = true;
    }
}

void plw_json_append(json_t *array, json_t *value, bool *failed) {
    if (json_array_append_new(array, value) != 0) {
        *failed = true;
    }
}

json_t *plw_json_number(double value) {
    if (!isfinite(value)) {
        return json_null();
    }
    char text[64];
    snprintf(text, sizeof text, "%.*g", PLW_JSON_DIGITS, value);
    const double rounded = strtod(text, NULL);
    if (rounded == floor(rounded) && fabs(rounded) < 1e9) {
        return json_integer((json_int_t)rounded);
    }
    return json_real(rounded);
}

void plw_json_put_number(const plw_json_sink *s, const char *name, double value) {
    plw_json_put(s, name, plw_json_number(value));
}

plw_json_sink plw_json_object_in(const plw_json_sink *parent, const char *name) {
    json_t *object = json_object();
    if (json_object_set_new(parent->object, name, object) != 0) {
        *parent->failed = true;
        object = NULL;
    }
    return (plw_json_sink){object, parent->failed};
}

const char *plw_json_unit_name(plw_unit unit) {
    static const char *const names[PLW_UNIT_COUNT] = {"", "V", "A", "ohm", "W", "F", "H", "Hz", "s", "S", "%"};
    return unit < PLW_UNIT_COUNT ? names[unit] : "";
}

plw_status plw_json_text(json_t *object, bool failed, char **text, plw_error *error) {
    if (object == NULL || failed) {
        json_decref(object);
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory for a report, or a name in it is not UTF-8");
    }
    plw_text_buffer buffer;
    plw_status status = plw_text_begin(&buffer, error);
    if (status == PLW_OK) {
        if (json_dumpf(object, buffer.file, JSON_INDENT(2) | JSON_REAL_PRECISION(PLW_JSON_DIGITS)) != 0) {
            status = plw_fail(error, PLW_E_NO_MEMORY, "out of memory for a report");
        }
        fputc('\n', buffer.file);
        status = plw_text_end(&buffer, status, text, error);
    }
    json_decref(object);
    return status;
}
