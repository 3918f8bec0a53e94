/* An answer's JSON, parsed, and its values by their paths.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef UNIT_REPORT_JSON_H
#define UNIT_REPORT_JSON_H

#include <jansson.h>

#include "unit/report_stage.h"

/* Nine digits are written. */
#define WRITTEN 1e-8

static inline char *json_of(const plw_answer *answer) {
    plw_error error = {0};
    char *text = NULL;
    if (plw_report_json(answer, &text, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return text;
}

static inline json_t *parsed(const plw_answer *answer) {
    char *text = json_of(answer);
    json_error_t fault;
    json_t *root = json_loads(text, JSON_REJECT_DUPLICATES, &fault);
    if (root == NULL) {
        fail_msg("%d: %s", fault.line, fault.text);
    }
    plw_text_free(text);
    return root;
}

/* A value by its path, "quiescent.total.plate_amps"; a name of digits is an index.  It must be there. */
static inline json_t *at(json_t *root, const char *path) {
    json_t *value = root;
    const char *from = path;
    while (*from != '\0') {
        char name[64];
        const size_t length = strcspn(from, ".");
        assert_true(length < sizeof name);
        memcpy(name, from, length);
        name[length] = '\0';
        value = json_is_array(value) ? json_array_get(value, (size_t)strtoul(name, NULL, 10))
                                     : json_object_get(value, name);
        if (value == NULL) {
            fail_msg("%s is missing (at %s)", path, name);
        }
        from += length + (from[length] == '.' ? 1 : 0);
    }
    return value;
}

static inline double number_at(json_t *root, const char *path) {
    json_t *value = at(root, path);
    if (!json_is_number(value)) {
        fail_msg("%s is not a number", path);
    }
    return json_number_value(value);
}

static inline void assert_null_at(json_t *root, const char *path) {
    if (!json_is_null(at(root, path))) {
        fail_msg("%s is not null", path);
    }
}

static inline void assert_text_at(json_t *root, const char *path, const char *wanted) {
    assert_true(json_is_string(at(root, path)));
    assert_string_equal(json_string_value(at(root, path)), wanted);
}

#endif
