/* Stage descriptions for tests: read from a text, added to, written and read again.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_UNIT_DESCRIPTIONS_H
#define TESTS_UNIT_DESCRIPTIONS_H

#include <string.h>

#include "near.h"
#include "platewright/report.h"
#include "platewright/stage_file.h"

static inline plw_stage_description *described(const char *text) {
    plw_stage_description *description = NULL;
    plw_error error = {.status = PLW_OK};
    if (plw_stage_file_read_memory("stage.xml", text, strlen(text), &description, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return description;
}

static inline void say(plw_stage_description *description, const char *name, const char *text) {
    plw_error error = {.status = PLW_OK};
    if (plw_stage_describe(description, name, text, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
}

/* The text of a stage file read again; written once more it is the same. */
static inline plw_stage_description *read_again(const char *text) {
    plw_stage_description *copy = described(text);
    char *again = NULL;
    assert_int_equal(plw_stage_file_text(copy, &again, NULL), PLW_OK);
    assert_string_equal(text, again);
    plw_text_free(again);
    return copy;
}

#endif
