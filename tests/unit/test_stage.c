/* The description of a stage: defaults, load, domain; every refusal provoked.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "near.h"
#include "unit/stages.h"

static void an_ideal_stage_knows_nothing_and_loses_nothing(void **state) {
    (void)state;
    const plw_stage stage = plw_stage_ideal();
    assert_null(stage.tube);
    assert_int_equal(stage.variant, -1);
    assert_int_equal(stage.parallel, 1);
    const double unknown[] = {stage.load_ohms,        stage.ratio,
                              stage.speaker_ohms,     stage.cathode_resistor_ohms,
                              stage.fixed_bias_volts, stage.screen_supply_volts,
                              stage.drive_peak_volts};
    for (size_t index = 0; index < sizeof unknown / sizeof unknown[0]; index++) {
        assert_true(isnan(unknown[index]));
    }
    const double ideal[] = {stage.primary_ohms, stage.secondary_ohms, stage.other_amps, stage.screen_resistor_ohms,
                            stage.tap};
    for (size_t index = 0; index < sizeof ideal / sizeof ideal[0]; index++) {
        assert_near(ideal[index], 0.0, 0.0, "stage.h: ideal");
    }
    assert_false(stage.unbypassed || stage.resistor_each || stage.screen_bypassed);
}

/* ---- load -------------------------------------------------------------------------------------------------------- */

static plw_stage with_load(double load, double ratio, double speaker) {
    plw_stage stage = plw_stage_ideal();
    stage.load_ohms = load;
    stage.ratio = ratio;
    stage.speaker_ohms = speaker;
    return stage;
}

static void a_load_is_worked_out_from_what_is_known(void **state) {
    (void)state;
    /* 22 : 1 with 8 ohm reflects 3872 ohm; 28.571 : 1 with 4 ohm 3265.3 (builders' pages). */
    plw_stage stage = with_load(UNKNOWN, 22.0, 8.0);
    assert_int_equal(plw_stage_settle_load(&stage, NULL), PLW_OK);
    assert_near(stage.load_ohms, 3872.0, 1e-9, "n^2 Z");
    stage = with_load(3265.3, 28.571, UNKNOWN);
    assert_int_equal(plw_stage_settle_load(&stage, NULL), PLW_OK);
    assert_near(stage.speaker_ohms, 4.0, 1e-3, "Z / n^2");
    stage = with_load(5000.0, UNKNOWN, 8.0);
    assert_int_equal(plw_stage_settle_load(&stage, NULL), PLW_OK);
    assert_near(stage.ratio, 25.0, 1e-12, "sqrt(5000/8)");
    stage = with_load(4700.0, UNKNOWN, UNKNOWN);
    assert_int_equal(plw_stage_settle_load(&stage, NULL), PLW_OK);
    assert_true(isnan(stage.ratio) && isnan(stage.speaker_ohms));
    stage = with_load(3900.0, 22.0, 8.0); /* 0.7 % apart: rounded by the maker */
    assert_int_equal(plw_stage_settle_load(&stage, NULL), PLW_OK);
}

static void a_load_that_contradicts_or_is_missing_is_refused(void **state) {
    (void)state;
    plw_error error = {0};
    plw_stage stage = with_load(5000.0, 22.0, 8.0);
    assert_int_equal(plw_stage_settle_load(&stage, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "contradicts"));
    stage = with_load(3990.0, 22.0, 8.0); /* 3 % apart */
    assert_int_equal(plw_stage_settle_load(&stage, NULL), PLW_E_USAGE);
    static const double none[][3] = {{UNKNOWN, UNKNOWN, UNKNOWN}, {UNKNOWN, 22.0, UNKNOWN}, {UNKNOWN, UNKNOWN, 8.0}};
    for (size_t index = 0; index < 3; index++) {
        stage = with_load(none[index][0], none[index][1], none[index][2]);
        error = (plw_error){0};
        assert_int_equal(plw_stage_settle_load(&stage, &error), PLW_E_USAGE);
        assert_non_null(strstr(error.text, "load"));
    }
    stage = with_load(5000.0, UNKNOWN, UNKNOWN);
    stage.secondary_ohms = 0.5;
    error = (plw_error){0};
    assert_int_equal(plw_stage_settle_load(&stage, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "secondary-ohms"));
}

/* ---- domain ------------------------------------------------------------------------------------------------------ */

static test_tube triode, pentode;

static plw_stage good_stage(void) {
    plw_stage stage = simple_stage(&pentode, 285.0, 5000.0, 270.0, UNKNOWN);
    return stage;
}

static void refused(const plw_stage *stage, const char *name) {
    plw_error error = {0};
    if (plw_stage_validate(stage, true, &error) != PLW_E_USAGE) {
        fail_msg("accepted: %s", name);
    }
    if (strncmp(error.text, name, strlen(name)) != 0) {
        fail_msg("want the text to begin with %s: %s", name, error.text);
    }
    plw_quiescent q = {.plate_amps = 2.385};
    assert_int_equal(plw_quiescent_solve(stage, &q, NULL), PLW_E_USAGE);
    assert_near(q.plate_amps, 2.385, 0.0, "not written unless PLW_OK");
}

static void good_stages_are_accepted(void **state) {
    (void)state;
    plw_stage stage = good_stage();
    assert_int_equal(plw_stage_validate(&stage, true, NULL), PLW_OK);
    stage.cathode_resistor_ohms = UNKNOWN;
    assert_int_equal(plw_stage_validate(&stage, false, NULL), PLW_OK);
    stage.fixed_bias_volts = -12.5;
    assert_int_equal(plw_stage_validate(&stage, true, NULL), PLW_OK);
    random_source r = {20250217};
    for (int trial = 0; trial < 500; trial++) {
        test_tube tube;
        random_stage(&r, &tube, &stage);
        assert_int_equal(plw_stage_validate(&stage, true, NULL), PLW_OK);
    }
}

/* Each number of the stage at the bounds that stage.h names, and outside. */
static void numbers_outside_their_range_are_refused(void **state) {
    (void)state;
    plw_stage stage = good_stage();
    const struct {
        double *field;
        const char *name;
        double least, most; /* accepted */
        double wrong[3];
    } ranges[] = {
        {&stage.load_ohms, "load", 50.0, 1e6, {0.99, 1.01e6, UNKNOWN}},
        {&stage.primary_ohms, "primary-ohms", 0.0, 1e5, {-2.385, 1.01e5, UNKNOWN}},
        {&stage.secondary_ohms, "secondary-ohms", 0.0, 1e5, {-2.385, 1.01e5, UNKNOWN}},
        {&stage.cathode_resistor_ohms, "cathode-resistor", 0.1, 1e6, {0.09, 1.01e6, (double)INFINITY}},
        {&stage.screen_resistor_ohms, "screen-resistor", 0.0, 1e6, {-2.385, 1.01e6, UNKNOWN}},
        {&stage.other_amps, "other-current", 0.0, 10.0, {-2.385e-3, 10.1, UNKNOWN}},
        {&stage.screen_supply_volts, "screen-supply", 10.0, 5000.0, {9.9, 5001.0, -250.0}},
        {&stage.supply.volts, "supply", 10.0, 5000.0, {9.9, 5001.0, UNKNOWN}},
    };
    for (size_t index = 0; index < sizeof ranges / sizeof ranges[0]; index++) {
        const plw_stage before = stage;
        *ranges[index].field = ranges[index].least;
        assert_int_equal(plw_stage_validate(&stage, true, NULL), PLW_OK);
        *ranges[index].field = ranges[index].most;
        assert_int_equal(plw_stage_validate(&stage, true, NULL), PLW_OK);
        for (int wrong = 0; wrong < 3; wrong++) {
            *ranges[index].field = ranges[index].wrong[wrong];
            refused(&stage, ranges[index].name);
        }
        stage = before;
    }
}

static void contradicting_or_missing_bias_is_refused(void **state) {
    (void)state;
    plw_stage stage = good_stage();
    stage.fixed_bias_volts = -12.5;
    refused(&stage, "fixed-bias");
    stage.cathode_resistor_ohms = UNKNOWN;
    static const double wrong[] = {0.1, -2001.0, -(double)INFINITY};
    for (size_t index = 0; index < sizeof wrong / sizeof wrong[0]; index++) {
        stage.fixed_bias_volts = wrong[index];
        refused(&stage, "fixed-bias");
    }
    stage.fixed_bias_volts = -12.5;
    stage.unbypassed = true;
    refused(&stage, "fixed-bias");
    stage.unbypassed = false;
    stage.resistor_each = true;
    refused(&stage, "fixed-bias");
    stage = good_stage();
    stage.cathode_resistor_ohms = UNKNOWN;
    refused(&stage, "cathode-resistor");
}

static void screens_that_cannot_be_are_refused(void **state) {
    (void)state;
    plw_stage stage = good_stage();
    stage.tap = 0.43;
    refused(&stage, "tap");
    stage.connection = PLW_CONNECTION_ULTRALINEAR;
    assert_int_equal(plw_stage_validate(&stage, true, NULL), PLW_OK);
    static const double wrong[] = {0.0, 1.0, -0.43, 43.0, UNKNOWN};
    for (size_t index = 0; index < sizeof wrong / sizeof wrong[0]; index++) {
        stage.tap = wrong[index];
        refused(&stage, "tap");
    }
    stage.tap = 0.43;
    stage.screen_supply_volts = 250.0;
    refused(&stage, "screen-supply");
    stage.connection = PLW_CONNECTION_TRIODE;
    stage.tap = 0.0;
    refused(&stage, "screen-supply");
}

static void triodes_have_no_screen_options(void **state) {
    (void)state;
    plw_stage stage = good_stage();
    stage.tube = &triode.tube;
    assert_int_equal(plw_stage_validate(&stage, true, NULL), PLW_OK);
    stage.screen_resistor_ohms = 1000.0;
    refused(&stage, "connection");
    stage.screen_resistor_ohms = 0.0;
    stage.screen_supply_volts = 250.0;
    refused(&stage, "connection");
    stage.screen_supply_volts = UNKNOWN;
    stage.connection = PLW_CONNECTION_ULTRALINEAR;
    stage.tap = 0.43;
    refused(&stage, "connection");
}

static void tubes_and_their_number_are_checked(void **state) {
    (void)state;
    plw_stage stage = good_stage();
    stage.tube = NULL;
    refused(&stage, "tube");
    test_tube bare;
    make_tube(&bare, pentode_law(TEST_BEAM_SMALL));
    bare.tube.has_model = false;
    stage.tube = &bare.tube;
    refused(&stage, "tube");
    stage = good_stage();
    stage.variant = 0;
    refused(&stage, "tube");
    stage = good_stage();
    stage.parallel = 0;
    refused(&stage, "parallel");
    stage.parallel = PLW_PARALLEL_MOST + 1;
    refused(&stage, "parallel");
    stage.parallel = PLW_PARALLEL_MOST;
    assert_int_equal(plw_stage_validate(&stage, true, NULL), PLW_OK);
}

static void triode_by_nature_or_by_connection(void **state) {
    (void)state;
    plw_stage stage = good_stage();
    assert_false(plw_stage_is_triode(&stage));
    stage.connection = PLW_CONNECTION_ULTRALINEAR;
    assert_false(plw_stage_is_triode(&stage));
    stage.connection = PLW_CONNECTION_TRIODE;
    assert_true(plw_stage_is_triode(&stage));
    stage.tube = &triode.tube;
    stage.connection = PLW_CONNECTION_PENTODE;
    assert_true(plw_stage_is_triode(&stage));
}

static int make_tubes(void **state) {
    (void)state;
    make_tube(&triode, koren_triode(KOREN_2A3));
    make_tube(&pentode, pentode_law(TEST_BEAM_SMALL));
    return 0;
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(an_ideal_stage_knows_nothing_and_loses_nothing),
        cmocka_unit_test(a_load_is_worked_out_from_what_is_known),
        cmocka_unit_test(a_load_that_contradicts_or_is_missing_is_refused),
        cmocka_unit_test(good_stages_are_accepted),
        cmocka_unit_test(numbers_outside_their_range_are_refused),
        cmocka_unit_test(contradicting_or_missing_bias_is_refused),
        cmocka_unit_test(screens_that_cannot_be_are_refused),
        cmocka_unit_test(triodes_have_no_screen_options),
        cmocka_unit_test(tubes_and_their_number_are_checked),
        cmocka_unit_test(triode_by_nature_or_by_connection),
    };
    return cmocka_run_group_tests(tests, make_tubes, NULL);
}
