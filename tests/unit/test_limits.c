/* Every rating against the stage: names, shares, limits at rest and driven, the triode connection.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/limits.h"

#include <string.h>

#include "near.h"
#include "unit/stages.h"

static test_tube tube;

static void rate(plw_ratings *r) {
    r->plate_volts = 315.0;
    r->screen_volts = 285.0;
    r->plate_watts = 12.0;
    r->screen_watts = 2.0;
    r->screen_watts_full_drive = 3.2;
    r->total_watts = 13.5;
    r->cathode_amps = 65e-3;
    r->heater_cathode_volts = 90.0;
}

/* Figures of no circuit, so that each check can be told from the others. */
static const plw_quiescent rest = {.plate_volts = 252.0,
                                   .screen_volts = 240.0,
                                   .cathode_volts = 12.6,
                                   .plate_watts = 11.1,
                                   .screen_watts = 1.1,
                                   .cathode_amps = 49e-3};
static const plw_signal driven = {.plate_watts = 8.4, .screen_watts = 2.6, .cathode_amps = 53e-3};

static plw_stage begin(plw_law law) {
    make_tube(&tube, law);
    rate(&tube.ratings[0]);
    return simple_stage(&tube, 265.0, 5000.0, 250.0, UNKNOWN);
}

static const plw_rating_check *find(const plw_rating_check *checks, size_t count, const char *name, plw_when when) {
    for (size_t index = 0; index < count; index++) {
        if (strcmp(checks[index].name, name) == 0 && checks[index].when == when) {
            return &checks[index];
        }
    }
    return NULL;
}

static void expect(const plw_rating_check *checks, size_t count, const char *name, plw_when when, double value,
                   double limit, plw_unit unit) {
    const plw_rating_check *check = find(checks, count, name, when);
    if (check == NULL) {
        fail_msg("no check of %s", name);
        return;
    }
    assert_near(check->value, value, 1e-12, name);
    assert_near(check->limit, limit, 0.0, name);
    assert_near_relative(check->share_percent, 100.0 * value / limit, 1e-12, name);
    assert_int_equal(check->unit, unit);
    assert_true(check->ok == (value <= limit));
}

static void a_pentode_is_checked_at_rest_and_driven(void **state) {
    (void)state;
    const plw_stage stage = begin(pentode_law(TEST_BEAM_SMALL));
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count;
    assert_true(plw_limits_check(&stage, &rest, &driven, checks, &count));
    assert_int_equal(count, 11);
    expect(checks, count, "plate voltage", PLW_AT_IDLE, 252.0, 315.0, PLW_UNIT_VOLT);
    expect(checks, count, "screen voltage", PLW_AT_IDLE, 240.0, 285.0, PLW_UNIT_VOLT);
    expect(checks, count, "plate dissipation", PLW_AT_IDLE, 11.1, 12.0, PLW_UNIT_WATT);
    expect(checks, count, "screen dissipation", PLW_AT_IDLE, 1.1, 2.0, PLW_UNIT_WATT);
    expect(checks, count, "total dissipation", PLW_AT_IDLE, 12.2, 13.5, PLW_UNIT_WATT);
    expect(checks, count, "cathode current", PLW_AT_IDLE, 49e-3, 65e-3, PLW_UNIT_AMPERE);
    expect(checks, count, "heater to cathode", PLW_AT_IDLE, 12.6, 90.0, PLW_UNIT_VOLT);
    expect(checks, count, "plate dissipation", PLW_AT_FULL_DRIVE, 8.4, 12.0, PLW_UNIT_WATT);
    expect(checks, count, "screen dissipation", PLW_AT_FULL_DRIVE, 2.6, 3.2, PLW_UNIT_WATT);
    expect(checks, count, "total dissipation", PLW_AT_FULL_DRIVE, 11.0, 13.5, PLW_UNIT_WATT);
    expect(checks, count, "cathode current", PLW_AT_FULL_DRIVE, 53e-3, 65e-3, PLW_UNIT_AMPERE);
    assert_true(plw_limits_check(&stage, &rest, NULL, checks, &count));
    assert_int_equal(count, 7);
    assert_null(find(checks, count, "plate dissipation", PLW_AT_FULL_DRIVE));
}

/* Without a limit of its own for full drive, the screen's single limit holds there too. */
static void the_screens_single_limit_holds_driven(void **state) {
    (void)state;
    const plw_stage stage = begin(pentode_law(TEST_BEAM_SMALL));
    tube.ratings[0].screen_watts_full_drive = UNKNOWN;
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count;
    assert_false(plw_limits_check(&stage, &rest, &driven, checks, &count)); /* 2.6 W of 2 W */
    expect(checks, count, "screen dissipation", PLW_AT_FULL_DRIVE, 2.6, 2.0, PLW_UNIT_WATT);
}

static void each_rating_alone_condemns_the_stage(void **state) {
    (void)state;
    const plw_stage stage = begin(pentode_law(TEST_BEAM_SMALL));
    plw_ratings *r = &tube.ratings[0];
    double *limits[] = {&r->plate_volts, &r->screen_volts, &r->plate_watts,          &r->screen_watts,
                        &r->total_watts, &r->cathode_amps, &r->heater_cathode_volts, &r->screen_watts_full_drive};
    for (size_t index = 0; index < sizeof limits / sizeof limits[0]; index++) {
        const double kept = *limits[index];
        plw_rating_check checks[PLW_RATING_CHECKS_MOST];
        size_t count;
        *limits[index] = 1e-3;
        assert_false(plw_limits_check(&stage, &rest, &driven, checks, &count));
        size_t broken = 0;
        for (size_t check = 0; check < count; check++) {
            broken += !checks[check].ok;
            assert_true(checks[check].ok == (checks[check].share_percent <= 100.0));
        }
        assert_true(broken == 1 || broken == 2); /* at rest, driven, or both */
        *limits[index] = UNKNOWN;
        assert_true(plw_limits_check(&stage, &rest, &driven, checks, &count) ||
                    limits[index] == &r->screen_watts_full_drive);
        *limits[index] = kept;
    }
}

/* "12.0 W of 12.0 W" is kept; what three digits tell apart is not. */
static void what_print_cannot_tell_apart_is_kept(void **state) {
    (void)state;
    const plw_stage stage = begin(pentode_law(TEST_BEAM_SMALL));
    const double kept = tube.ratings[0].plate_watts;
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count;
    tube.ratings[0].plate_watts = rest.plate_watts / 1.0004;
    assert_true(plw_limits_check(&stage, &rest, NULL, checks, &count));
    tube.ratings[0].plate_watts = rest.plate_watts / 1.0006;
    assert_false(plw_limits_check(&stage, &rest, NULL, checks, &count));
    tube.ratings[0].plate_watts = kept;
}

static void what_the_maker_does_not_print_is_not_checked(void **state) {
    (void)state;
    const plw_stage stage = begin(pentode_law(TEST_BEAM_SMALL));
    tube.ratings[0] = no_ratings(tube.service);
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count = 99;
    assert_true(plw_limits_check(&stage, &rest, &driven, checks, &count));
    assert_int_equal(count, 0);
}

static void a_triode_has_no_screen_checks(void **state) {
    (void)state;
    const plw_stage stage = begin(koren_triode(KOREN_2A3));
    plw_quiescent q = rest;
    q.screen_volts = q.screen_watts = UNKNOWN;
    plw_signal s = driven;
    s.screen_watts = UNKNOWN;
    tube.ratings[0].total_watts = UNKNOWN;
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count;
    assert_true(plw_limits_check(&stage, &q, &s, checks, &count));
    for (size_t index = 0; index < count; index++) {
        assert_null(strstr(checks[index].name, "screen"));
    }
    expect(checks, count, "plate dissipation", PLW_AT_IDLE, 11.1, 12.0, PLW_UNIT_WATT);
}

/* Where the maker rates the triode connection, plate and screen count together against its plate rating. */
static void a_rated_triode_connection_counts_both(void **state) {
    (void)state;
    plw_stage stage = begin(pentode_law(TEST_BEAM_SMALL));
    rate(&tube.ratings[1]);
    tube.ratings[1].connection = PLW_CONNECTION_TRIODE;
    tube.ratings[1].plate_watts = 12.1;
    tube.tube.ratings_count = 2;
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count;
    assert_true(plw_limits_check(&stage, &rest, &driven, checks, &count)); /* as a pentode: the first set */
    stage.connection = PLW_CONNECTION_TRIODE;
    assert_false(plw_limits_check(&stage, &rest, &driven, checks, &count)); /* 11.1 + 1.1 W of 12.1 W */
    expect(checks, count, "plate and screen dissipation", PLW_AT_IDLE, 12.2, 12.1, PLW_UNIT_WATT);
    expect(checks, count, "plate and screen dissipation", PLW_AT_FULL_DRIVE, 11.0, 12.1, PLW_UNIT_WATT);
    assert_null(find(checks, count, "plate dissipation", PLW_AT_IDLE));
    assert_null(find(checks, count, "screen dissipation", PLW_AT_IDLE));
    /* Without such a set, plate and screen keep their own limits. */
    tube.tube.ratings_count = 1;
    assert_true(plw_limits_check(&stage, &rest, &driven, checks, &count));
    expect(checks, count, "plate dissipation", PLW_AT_IDLE, 11.1, 12.0, PLW_UNIT_WATT);
    expect(checks, count, "screen dissipation", PLW_AT_IDLE, 1.1, 2.0, PLW_UNIT_WATT);
}

static void a_filament_has_no_heater_to_cathode_voltage(void **state) {
    (void)state;
    const plw_stage stage = begin(koren_triode(KOREN_2A3));
    tube.tube.directly_heated = true;
    tube.ratings[0].heater_cathode_volts = 1e-3;
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count;
    assert_true(plw_limits_check(&stage, &rest, NULL, checks, &count));
    assert_null(find(checks, count, "heater to cathode", PLW_AT_IDLE));
}

/* In a string fed from the mains nobody knows how far the heater stands from the cathode: no check rather than a good
 * one. */
static void a_heater_string_is_not_judged(void **state) {
    (void)state;
    plw_stage stage = begin(koren_triode(KOREN_2A3));
    tube.ratings[0].heater_cathode_volts = 90.0;
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count;
    (void)plw_limits_check(&stage, &rest, NULL, checks, &count);
    assert_non_null(find(checks, count, "heater to cathode", PLW_AT_IDLE));
    stage.transformerless = true;
    (void)plw_limits_check(&stage, &rest, NULL, checks, &count);
    assert_null(find(checks, count, "heater to cathode", PLW_AT_IDLE));
}

static void a_variant_has_its_own_ratings(void **state) {
    (void)state;
    plw_stage stage = begin(pentode_law(TEST_BEAM_SMALL));
    plw_ratings stronger = tube.ratings[0];
    stronger.plate_watts = 14.0;
    plw_variant variant = {.type = tube.type, .ratings = &stronger, .ratings_count = 1};
    tube.tube.variants = &variant;
    tube.tube.variants_count = 1;
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count;
    stage.variant = 0;
    (void)plw_limits_check(&stage, &rest, NULL, checks, &count);
    expect(checks, count, "plate dissipation", PLW_AT_IDLE, 11.1, 14.0, PLW_UNIT_WATT);
    stage.variant = -1;
    (void)plw_limits_check(&stage, &rest, NULL, checks, &count);
    expect(checks, count, "plate dissipation", PLW_AT_IDLE, 11.1, 12.0, PLW_UNIT_WATT);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_pentode_is_checked_at_rest_and_driven),
        cmocka_unit_test(the_screens_single_limit_holds_driven),
        cmocka_unit_test(each_rating_alone_condemns_the_stage),
        cmocka_unit_test(what_print_cannot_tell_apart_is_kept),
        cmocka_unit_test(what_the_maker_does_not_print_is_not_checked),
        cmocka_unit_test(a_triode_has_no_screen_checks),
        cmocka_unit_test(a_rated_triode_connection_counts_both),
        cmocka_unit_test(a_filament_has_no_heater_to_cathode_voltage),
        cmocka_unit_test(a_heater_string_is_not_judged),
        cmocka_unit_test(a_variant_has_its_own_ratings),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
