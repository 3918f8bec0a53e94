/* The supply as a function of current: stiff, source, readings, regulation line.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/supply.h"

#include <string.h>

#include "near.h"

#define OHMS_LAW "Ohm's law"

static void stiff_holds_its_voltage(void **state) {
    (void)state;
    plw_supply supply;
    plw_error error = {0};
    assert_int_equal(plw_supply_stiff(284.7, &supply, &error), PLW_OK);
    const double amps[] = {-0.013, 0, 0.0445, 2.385};
    for (size_t i = 0; i < sizeof amps / sizeof amps[0]; i++) {
        double volts, ohms;
        plw_supply_at(&supply, amps[i], &volts, &ohms);
        assert_near(volts, 284.7, 0, "identity");
        assert_near(ohms, 0, 0, "identity");
    }
    double least, most;
    plw_supply_range(&supply, &least, &most);
    assert_near(least, 0, 0, "supply.h");
    assert_true(isinf(most) && most > 0);
}

static void source_drops_by_ohms_law(void **state) {
    (void)state;
    plw_supply supply;
    plw_error error = {0};
    assert_int_equal(plw_supply_source(304.6, 1783, &supply, &error), PLW_OK);
    double volts, ohms, least, most;
    plw_supply_at(&supply, 0.0453, &volts, &ohms);
    assert_near(volts, 304.6 - 1783 * 0.0453, 1e-12, OHMS_LAW);
    assert_near(ohms, 1783, 0, OHMS_LAW);
    plw_supply_range(&supply, &least, &most);
    assert_near(most, 304.6 / 1783, 1e-15, "short-circuit current");
    plw_supply_at(&supply, most, &volts, &ohms);
    assert_near(volts, 0, 1e-9, "short circuit");
    assert_int_equal(plw_supply_source(304.6, 0, &supply, &error), PLW_OK);
    plw_supply_range(&supply, &least, &most);
    assert_true(isinf(most));
}

static void readings_are_joined_by_straight_lines(void **state) {
    (void)state;
    const plw_reading readings[] = {{258, 0.0258}, {304, 0}, {241, 0.0431}, {258, 0.0258}};
    plw_supply supply;
    plw_error error = {0};
    assert_int_equal(plw_supply_readings(readings, 4, &supply, &error), PLW_OK);
    assert_int_equal(supply.points, 3);
    assert_near(supply.volts, 304, 0, "the reading off load");
    double volts, ohms;
    for (size_t i = 0; i < 3; i++) {
        plw_supply_at(&supply, readings[i].amps, &volts, &ohms);
        assert_near(volts, readings[i].volts, 1e-12, "through every reading");
    }
    plw_supply_at(&supply, 0.0129, &volts, &ohms);
    assert_near(volts, 281, 1e-12, "midway between two readings");
    assert_near(ohms, (304 - 258) / 0.0258, 1e-9, OHMS_LAW);
    plw_supply_at(&supply, 0.0531, &volts, &ohms);
    assert_near(ohms, (258 - 241) / (0.0431 - 0.0258), 1e-9, "the last line goes on");
    assert_near(volts, 241 - ohms * 0.01, 1e-9, "the last line goes on");
    plw_supply_at(&supply, -0.001, &volts, &ohms);
    assert_near(volts, 304 + 46 / 25.8, 1e-9, "the first line goes on");
    double least, most;
    plw_supply_range(&supply, &least, &most);
    assert_near(least, 0, 0, "read off load");
    assert_near(most, 1.5 * 0.0431, 1e-15, "supply.h");
}

static void one_loaded_reading_is_stiff_around_it(void **state) {
    (void)state;
    const plw_reading reading = {258, 0.0258};
    plw_supply supply;
    plw_error error = {0};
    assert_int_equal(plw_supply_readings(&reading, 1, &supply, &error), PLW_OK);
    assert_true(isnan(supply.volts));
    double volts, ohms, least, most;
    plw_supply_at(&supply, 0.0327, &volts, &ohms);
    assert_near(volts, 258, 0, "supply.h");
    assert_near(ohms, 0, 0, "supply.h");
    plw_supply_range(&supply, &least, &most);
    assert_near(least, 0.0172, 1e-15, "two thirds");
    assert_near(most, 0.0387, 1e-15, "one and a half");
}

/* Off load 304 V and 258 V into 10 kOhm: the straight line says 224 V at 45 mA (common practice, no source). */
static void straight_line_of_the_bench_case(void **state) {
    (void)state;
    const plw_reading readings[] = {{304.06, 0}, {258, 0.0258}};
    plw_supply supply;
    plw_error error = {0};
    assert_int_equal(plw_supply_readings(readings, 2, &supply, &error), PLW_OK);
    double volts, ohms;
    plw_supply_at(&supply, 0.045, &volts, &ohms);
    assert_near(volts, 224, 0.5, "common practice, no source; rounded to 1 V");
    assert_near(ohms, 1800, 20, "common practice, no source; rounded to 0.1 kOhm");
}

/* A made-up falling line: values and slopes of 300 - 400 (I/A)^(2/3). */
static void regulation_line_is_smooth_and_falling(void **state) {
    (void)state;
    plw_supply supply;
    memset(&supply, 0, sizeof supply);
    supply.kind = PLW_SUPPLY_RECTIFIER;
    supply.points = 6;
    for (size_t i = 0; i < supply.points; i++) {
        const double amps = 0.01 + 0.013 * (double)i;
        supply.point[i].amps = amps;
        supply.point[i].volts = 300 - 400 * pow(amps, 2.0 / 3);
        supply.tangent_ohms[i] = 400 * 2.0 / 3 * pow(amps, -1.0 / 3);
    }
    double last_volts = (double)INFINITY;
    for (int k = 0; k <= 400; k++) {
        const double amps = 0.0002 * k, step = 1e-7;
        double volts, ohms, after, before, unused;
        plw_supply_at(&supply, amps, &volts, &ohms);
        plw_supply_at(&supply, amps + step, &after, &unused);
        plw_supply_at(&supply, amps - step, &before, &unused);
        assert_near(ohms, (before - after) / (2 * step), 1e-3 * ohms, "derivative by differences");
        assert_true(volts < last_volts);
        last_volts = volts;
        if (amps >= 0.01 && amps <= 0.075) {
            assert_near(volts, 300 - 400 * pow(amps, 2.0 / 3), 0.03, "cubic of Hermite, error of fourth order");
        }
    }
    double least, most;
    plw_supply_range(&supply, &least, &most);
    assert_near(least, 0.01, 0, "first point");
    assert_near(most, 0.075, 1e-15, "last point");
}

static void bad_input_is_refused(void **state) {
    (void)state;
    plw_supply supply;
    memset(&supply, 0x5a, sizeof supply);
    const plw_supply before = supply;
    const double bad[] = {0, -285, (double)NAN, (double)INFINITY};
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) {
        plw_error error = {0};
        assert_int_equal(plw_supply_stiff(bad[i], &supply, &error), PLW_E_USAGE);
        assert_non_null(strstr(error.text, "285V"));
        assert_int_equal(plw_supply_source(bad[i], 230, &supply, &error), PLW_E_USAGE);
        if (i > 0) {
            assert_int_equal(plw_supply_source(285, bad[i], &supply, &error), PLW_E_USAGE);
            const plw_reading reading = {258, bad[i]};
            assert_int_equal(plw_supply_readings(&reading, 1, &supply, &error), PLW_E_USAGE);
        }
        const plw_reading reading = {bad[i], 0.0258};
        assert_int_equal(plw_supply_readings(&reading, 1, &supply, &error), PLW_E_USAGE);
    }
    assert_memory_equal(&supply, &before, sizeof supply);
}

static void contradictory_readings_are_refused(void **state) {
    (void)state;
    plw_supply supply;
    plw_error error = {0};
    const plw_reading differ[] = {{258, 0.0258}, {251, 0.0258}};
    assert_int_equal(plw_supply_readings(differ, 2, &supply, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "keep one"));
    const plw_reading rising[] = {{258, 0.0258}, {262, 0.0431}, {304, 0}};
    assert_int_equal(plw_supply_readings(rising, 3, &supply, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "negative"));
    const plw_reading unloaded[] = {{304, 0}};
    assert_int_equal(plw_supply_readings(unloaded, 1, &supply, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "off load"));
    assert_int_equal(plw_supply_readings(unloaded, 0, &supply, &error), PLW_E_USAGE);
    assert_int_equal(plw_supply_readings(NULL, 2, &supply, NULL), PLW_E_USAGE);
    plw_reading many[PLW_READINGS_MOST + 1];
    for (size_t i = 0; i <= PLW_READINGS_MOST; i++) {
        many[i] = (plw_reading){300 - (double)i, 0.002 * (double)i};
    }
    assert_int_equal(plw_supply_readings(many, PLW_READINGS_MOST + 1, &supply, &error), PLW_E_USAGE);
    assert_int_equal(plw_supply_readings(many, PLW_READINGS_MOST, &supply, &error), PLW_OK);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(stiff_holds_its_voltage),
        cmocka_unit_test(source_drops_by_ohms_law),
        cmocka_unit_test(readings_are_joined_by_straight_lines),
        cmocka_unit_test(one_loaded_reading_is_stiff_around_it),
        cmocka_unit_test(straight_line_of_the_bench_case),
        cmocka_unit_test(regulation_line_is_smooth_and_falling),
        cmocka_unit_test(bad_input_is_refused),
        cmocka_unit_test(contradictory_readings_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
