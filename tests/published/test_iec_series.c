/* Preferred values and the resistor code against the standards' own tables.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "near.h"
#include "platewright/preferred.h"
#include "platewright/quantity.h"

/* IEC 60063:2015, "Preferred number series for resistors and capacitors": the tables of E12 to E96 as reprinted, except
 * the last rows of E96 (from 681 on), which are from memory of the standard. */
static const int E12[12] = {10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82};
static const int E24[24] = {10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30,
                            33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91};
static const int E48[48] = {100, 105, 110, 115, 121, 127, 133, 140, 147, 154, 162, 169, 178, 187, 196, 205,
                            215, 226, 237, 249, 261, 274, 287, 301, 316, 332, 348, 365, 383, 402, 422, 442,
                            464, 487, 511, 536, 562, 590, 619, 649, 681, 715, 750, 787, 825, 866, 909, 953};
static const int E96[96] = {100, 102, 105, 107, 110, 113, 115, 118, 121, 124, 127, 130, 133, 137, 140, 143,
                            147, 150, 154, 158, 162, 165, 169, 174, 178, 182, 187, 191, 196, 200, 205, 210,
                            215, 221, 226, 232, 237, 243, 249, 255, 261, 267, 274, 280, 287, 294, 301, 309,
                            316, 324, 332, 340, 348, 357, 365, 374, 383, 392, 402, 412, 422, 432, 442, 453,
                            464, 475, 487, 499, 511, 523, 536, 549, 562, 576, 590, 604, 619, 634, 649, 665,
                            681, 698, 715, 732, 750, 768, 787, 806, 825, 845, 866, 887, 909, 931, 953, 976};

/* Walk up the series from the first member of a decade: each member must be the double nearest to the printed number.
 */
static void walk(plw_series series, const int *printed, double unit) {
    for (int i = 0; i < (int)series; i++) {
        const double want = printed[i] * unit;
        assert_near(plw_preferred_step(printed[0] * unit, i, series), want, 0.0, "IEC 60063:2015");
        assert_near(plw_preferred_nearest(want, series), want, 0.0, "IEC 60063:2015");
    }
    assert_near(plw_preferred_step(printed[0] * unit, (int)series, series), printed[0] * unit * 10.0, 0.0,
                "IEC 60063:2015");
}

static void series_are_those_of_the_standard(void **state) {
    (void)state;
    for (int decade = 0; decade < 6; decade++) {
        const double unit = pow(10.0, decade);
        walk(PLW_E12, E12, unit);
        walk(PLW_E24, E24, unit);
        walk(PLW_E48, E48, unit);
        walk(PLW_E96, E96, unit);
    }
}

/* IEC 60063:2015: E6 is every second member of E12. */
static void e6_is_every_second_of_e12(void **state) {
    (void)state;
    for (int i = 0; i < 12; i += 2) {
        assert_near(plw_preferred_step(100.0, i / 2, PLW_E6), 10.0 * E12[i], 0.0, "IEC 60063:2015");
    }
}

/* IEC 60063:2015: E96 is every second member of E192, whose members follow 10^(i/192) to three digits but for 920,
 * where the rule gives 919 (the exception from memory of the standard). */
static void e192_holds_e96_and_920(void **state) {
    (void)state;
    for (int i = 0; i < 96; i++) {
        assert_near(plw_preferred_step(100.0, 2 * i, PLW_E192), E96[i], 0.0, "IEC 60063:2015");
    }
    assert_near(plw_preferred_step(100.0, 185, PLW_E192), 920.0, 0.0, "IEC 60063:2015, from memory");
    assert_near(plw_preferred_step(100.0, 184, PLW_E192), 909.0, 0.0, "IEC 60063:2015, from memory");
    assert_near(plw_preferred_step(100.0, 1, PLW_E192), 101.0, 0.0, "IEC 60063:2015, from memory");
    assert_near(plw_preferred_step(100.0, 191, PLW_E192), 988.0, 0.0, "IEC 60063:2015, from memory");
}

/* IEC 60062:2016, table of examples of the letter and digit code, as reprinted; 15M0 with its trailing zero from
 * the same source's remark on tighter tolerances (read only). */
static void resistor_code_is_that_of_the_standard(void **state) {
    (void)state;
    static const struct {
        const char *code, *written;
        double ohms;
    } table[] = {
        {"R47", "R47", 0.47},       {"4R7", "4R7", 4.7},       {"470R", "470R", 470.0},
        {"4K7", "4K7", 4700.0},     {"47K", "47K", 47000.0},   {"47K3", "47K3", 47300.0},
        {"470K", "470K", 470000.0}, {"4M7", "4M7", 4700000.0}, {"15M0", "15M", 15000000.0},
    };
    for (size_t i = 0; i < sizeof table / sizeof table[0]; i++) {
        double ohms = 0.0;
        char code[16];
        plw_error error = {PLW_OK, ""};
        assert_int_equal(plw_quantity_parse(table[i].code, PLW_UNIT_OHM, &ohms, &error), PLW_OK);
        assert_near(ohms, table[i].ohms, 0.0, "IEC 60062:2016, examples");
        assert_string_equal(plw_resistor_code(table[i].ohms, code, sizeof code), table[i].written);
    }
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(series_are_those_of_the_standard),
        cmocka_unit_test(e6_is_every_second_of_e12),
        cmocka_unit_test(e192_holds_e96_and_920),
        cmocka_unit_test(resistor_code_is_that_of_the_standard),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
