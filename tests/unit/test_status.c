/* Status codes and error texts: every code has a text, places and lines are added, nothing overflows.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "near.h"
#include "platewright/status.h"

static void every_status_has_a_text_of_its_own(void **state) {
    (void)state;
    for (int one = 0; one < PLW_STATUS_COUNT; one++) {
        const char *text = plw_status_text((plw_status)one);
        assert_non_null(text);
        assert_true(strlen(text) > 3);
        for (int other = 0; other < one; other++) {
            assert_string_not_equal(text, plw_status_text((plw_status)other));
        }
    }
    assert_string_equal(plw_status_text(PLW_STATUS_COUNT), "unknown status");
    assert_string_equal(plw_status_text((plw_status)-1), "unknown status");
    assert_string_equal(plw_status_text((plw_status)12345), "unknown status");
}

static void an_error_is_recorded_and_passed_up(void **state) {
    (void)state;
    plw_error error = {PLW_OK, ""};
    assert_int_equal(plw_fail(&error, PLW_E_DATA, "%s has no %s", "EL84", "ratings"), PLW_E_DATA);
    assert_int_equal(error.status, PLW_E_DATA);
    assert_string_equal(error.text, "EL84 has no ratings");
    assert_int_equal(plw_fail_at(&error, PLW_E_USAGE, "%s:%d", "EL84.xml", 12), PLW_E_DATA);
    assert_int_equal(error.status, PLW_E_DATA);
    assert_string_equal(error.text, "EL84.xml:12: EL84 has no ratings");
    plw_error_add(&error, "nearest: %s", "6BQ5");
    assert_string_equal(error.text, "EL84.xml:12: EL84 has no ratings\nnearest: 6BQ5");
    assert_int_equal(error.status, PLW_E_DATA);
    /* A later error takes the place of an earlier one. */
    assert_int_equal(plw_fail(&error, PLW_E_FILE, "no such file"), PLW_E_FILE);
    assert_string_equal(error.text, "no such file");
}

static void the_first_line_may_be_an_added_one(void **state) {
    (void)state;
    plw_error error = {PLW_OK, ""};
    plw_error_add(&error, "plate at %.1f V", 258.4);
    assert_string_equal(error.text, "plate at 258.4 V");
}

static void nowhere_to_record_is_allowed(void **state) {
    (void)state;
    assert_int_equal(plw_fail(NULL, PLW_E_NO_POINT, "lost"), PLW_E_NO_POINT);
    assert_int_equal(plw_fail_at(NULL, PLW_E_NO_CONVERGENCE, "lost"), PLW_E_NO_CONVERGENCE);
    plw_error_add(NULL, "lost");
}

/* A text that does not fit is cut; what follows the buffer in the guard below stays as it was. */
static void long_texts_are_cut(void **state) {
    (void)state;
    static char longest[PLW_ERROR_TEXT_SIZE + 100];
    memset(longest, 'x', sizeof longest - 1);
    struct {
        plw_error error;
        char guard[16];
    } held = {{PLW_OK, ""}, "untouched"};
    assert_int_equal(plw_fail(&held.error, PLW_E_DATA, "%s", longest), PLW_E_DATA);
    assert_int_equal(strlen(held.error.text), PLW_ERROR_TEXT_SIZE - 1);
    plw_error_add(&held.error, "no room for this");
    assert_int_equal(strlen(held.error.text), PLW_ERROR_TEXT_SIZE - 1);
    assert_int_equal(plw_fail_at(&held.error, PLW_E_USAGE, "EL84.xml:12"), PLW_E_DATA);
    assert_int_equal(strlen(held.error.text), PLW_ERROR_TEXT_SIZE - 1);
    assert_memory_equal(held.error.text, "EL84.xml:12: xxx", 16);
    assert_int_equal(plw_fail_at(&held.error, PLW_E_USAGE, "%s", longest), PLW_E_DATA);
    assert_int_equal(strlen(held.error.text), PLW_ERROR_TEXT_SIZE - 1);
    /* The last places of the buffer, one after the other. */
    for (size_t length = PLW_ERROR_TEXT_SIZE - 4; length < PLW_ERROR_TEXT_SIZE; length++) {
        plw_fail(&held.error, PLW_E_DATA, "%.*s", (int)length, longest);
        plw_error_add(&held.error, "yz");
        assert_true(strlen(held.error.text) < PLW_ERROR_TEXT_SIZE);
        plw_fail(&held.error, PLW_E_DATA, "yz");
        plw_fail_at(&held.error, PLW_E_DATA, "%.*s", (int)length, longest);
        assert_true(strlen(held.error.text) < PLW_ERROR_TEXT_SIZE);
    }
    assert_string_equal(held.guard, "untouched");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_status_has_a_text_of_its_own),
        cmocka_unit_test(an_error_is_recorded_and_passed_up),
        cmocka_unit_test(the_first_line_may_be_an_added_one),
        cmocka_unit_test(nowhere_to_record_is_allowed),
        cmocka_unit_test(long_texts_are_cut),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
