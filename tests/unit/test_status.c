/* Status codes and error texts: every code has a text, places and lines are added, nothing overflows.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdbool.h>
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

/* Whether the text ends with a whole letter; letters are of one to four bytes (UTF-8, RFC 3629). */
static bool ends_whole(const char *text) {
    for (size_t at = 0; text[at] != '\0';) {
        const unsigned char first = (unsigned char)text[at];
        const size_t letter = first < 0x80U ? 1 : first < 0xE0U ? 2 : first < 0xF0U ? 3 : 4;
        for (size_t part = 1; part < letter; part++) {
            if (((unsigned char)text[at + part] & 0xC0U) != 0x80U) {
                return false;
            }
        }
        at += letter;
    }
    return true;
}

static void no_letter_is_cut_in_two(void **state) {
    (void)state;
    const char *const letters[] = {"x", "\xC3\xA9", "\xE2\x84\xA6", "\xF0\x9D\x84\x9E"}; /* x, e acute, ohm, a clef */
    for (size_t kind = 0; kind < sizeof letters / sizeof letters[0]; kind++) {
        for (size_t ahead = 0; ahead < 4; ahead++) {
            char text[2 * PLW_ERROR_TEXT_SIZE] = "";
            plw_error error = {PLW_OK, ""};
            memset(text, 'a', ahead);
            for (size_t used = ahead; used + 8 < sizeof text; used = strlen(text)) {
                memcpy(text + used, letters[kind], strlen(letters[kind]) + 1);
            }
            plw_fail(&error, PLW_E_DATA, "%s", text);
            assert_true(ends_whole(error.text));
            assert_true(strlen(error.text) + 4 >= PLW_ERROR_TEXT_SIZE);
            plw_fail_at(&error, PLW_E_DATA, "%s", text);
            assert_true(ends_whole(error.text));
            plw_fail(&error, PLW_E_DATA, "at the bench");
            plw_error_add(&error, "%s", text);
            assert_true(ends_whole(error.text));
            /* A short text is left whole. */
            plw_fail(&error, PLW_E_DATA, "4.7 k%s", letters[kind]);
            assert_int_equal(strlen(error.text), 5 + strlen(letters[kind]));
        }
    }
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_status_has_a_text_of_its_own),
        cmocka_unit_test(an_error_is_recorded_and_passed_up),
        cmocka_unit_test(the_first_line_may_be_an_added_one),
        cmocka_unit_test(nowhere_to_record_is_allowed),
        cmocka_unit_test(long_texts_are_cut),
        cmocka_unit_test(no_letter_is_cut_in_two),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
