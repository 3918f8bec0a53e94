/* Mains low and high, and what a voltage across the dummy load means.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/dummy_meaning.h"
#include "platewright/mains.h"
#include "platewright/plate_supply.h"
#include "unit/solved.h"
#include "unit/stages.h"

static void rate(test_tube *tube, plw_rating_system system) {
    tube->ratings[0].system = system;
    tube->ratings[0].plate_watts = 12.3;
    tube->ratings[0].plate_volts = 317.0;
    tube->ratings[0].cathode_amps = 0.067;
}

/* The corners are the stage itself on supplies a tenth lower and higher. */
static void corners_are_the_stage_there(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_PENTODE_STEEP));
    rate(&tube, PLW_SYSTEM_DESIGN_MAXIMUM);
    plw_stage stage = simple_stage(&tube, 251.3, 5210.0, 143.0, UNKNOWN);
    stage.screen_supply_volts = 213.7;
    plw_mains mains;
    assert_int_equal(plw_mains_solve(&stage, &mains, NULL), PLW_OK);
    const plw_mains_corner *corners[] = {&mains.low, &mains.high};
    for (int i = 0; i < 2; i++) {
        const double factor = i == 0 ? 0.9 : 1.1;
        plw_stage there = stage;
        there.supply = stiff(factor * 251.3);
        there.screen_supply_volts = factor * 213.7;
        plw_quiescent rest;
        assert_int_equal(plw_quiescent_solve(&there, &rest, NULL), PLW_OK);
        assert_true(corners[i]->solved);
        assert_near_relative(corners[i]->quiescent.plate_amps, rest.plate_amps, 1e-9, "the stage solved there");
        assert_near_relative(corners[i]->quiescent.screen_volts, rest.screen_volts, 1e-9, "the stage solved there");
        plw_signal signal;
        assert_int_equal(plw_signal_solve(&there, &rest, &signal, NULL), PLW_OK);
        assert_true(corners[i]->driven);
        assert_near_relative(corners[i]->signal.plate_watts, signal.plate_watts, 1e-9, "the stage driven there");
        assert_near_relative(corners[i]->signal.screen_watts, signal.screen_watts, 1e-9, "the stage driven there");
        size_t driven = 0;
        for (size_t k = 0; k < corners[i]->ratings_count; k++) {
            driven += corners[i]->ratings[k].when == PLW_AT_FULL_DRIVE;
        }
        assert_true(driven >= 2); /* plate dissipation and cathode current */
    }
    assert_true(mains.low.quiescent.plate_watts < mains.high.quiescent.plate_watts);
}

/* The same heat counts by the rating system. */
static void rating_systems_differ(void **state) {
    (void)state;
    const struct {
        plw_rating_system system;
        bool counted;
    } cases[] = {{PLW_SYSTEM_DESIGN_CENTER, false},
                 {PLW_SYSTEM_STATED, false},
                 {PLW_SYSTEM_DESIGN_MAXIMUM, true},
                 {PLW_SYSTEM_ABSOLUTE, true}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        test_tube tube;
        make_tube(&tube, pentode_law(TEST_PENTODE_STEEP));
        rate(&tube, cases[i].system);
        const plw_stage stage = simple_stage(&tube, 251.3, 5210.0, 143.0, UNKNOWN);
        const plw_quiescent rest = at_rest(&stage);
        tube.ratings[0].plate_watts = 1.05 * rest.plate_watts; /* kept at rest, broken a tenth higher */
        plw_mains mains;
        assert_int_equal(plw_mains_solve(&stage, &mains, NULL), PLW_OK);
        assert_true(mains.low.within_ratings && !mains.high.within_ratings);
        assert_int_equal(mains.counted, cases[i].counted);
        assert_int_equal(mains.within_ratings, !cases[i].counted);
    }
}

static void corners_that_are_not_there(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_PENTODE_STEEP));
    plw_stage stage = simple_stage(&tube, 251.3, 5210.0, 143.0, UNKNOWN);
    const plw_reading readings[] = {{271.4, 0.0}, {251.3, 0.0301}};
    plw_quiescent rest;
    plw_mains mains;
    assert_int_equal(plw_supply_readings(readings, 2, &stage.supply, NULL), PLW_OK);
    /* The readings reach to 1.5 times the heaviest: up to there at 45 mA. */
    if (plw_quiescent_solve(&stage, &rest, NULL) == PLW_OK) {
        assert_int_equal(plw_mains_solve(&stage, &mains, NULL), PLW_OK);
    }
    stage.cathode_resistor_ohms = 21.0; /* far beyond them */
    assert_int_equal(plw_quiescent_solve(&stage, &rest, NULL), PLW_E_NO_POINT);
    assert_int_equal(plw_mains_solve(&stage, &mains, NULL), PLW_OK);
    assert_false(mains.low.solved || mains.high.solved);
    assert_true(mains.within_ratings);
    stage.load_ohms = -3.7;
    assert_int_equal(plw_mains_solve(&stage, &mains, NULL), PLW_E_USAGE);
}

/* A stage whose heat goes as the mains: more than a tenth above at a tenth more. */
static void the_aim_is_lowered_for_the_mains(void **state) {
    (void)state;
    const plw_rating_system systems[] = {PLW_SYSTEM_DESIGN_CENTER, PLW_SYSTEM_DESIGN_MAXIMUM, PLW_SYSTEM_ABSOLUTE};
    const plw_aim usual = {PLW_AIM_DISSIPATION, PLW_AIM_DEFAULT_PERCENT};
    for (size_t i = 0; i < sizeof systems / sizeof systems[0]; i++) {
        test_tube tube;
        make_tube(&tube, pentode_law(TEST_PENTODE_STEEP));
        rate(&tube, systems[i]);
        plw_stage stage = simple_stage(&tube, 251.3, 5210.0, UNKNOWN, UNKNOWN);
        plw_bias_choice plain, choice;
        plw_mains mains;
        double before = -2.385;
        assert_int_equal(plw_bias_choose(&stage, usual, PLW_E96, &plain, NULL), PLW_OK);
        assert_int_equal(plw_bias_choose_for_mains(&stage, PLW_E96, &choice, &before, NULL), PLW_OK);
        stage.cathode_resistor_ohms = choice.option[choice.chosen].ohms;
        assert_int_equal(plw_mains_solve(&stage, &mains, NULL), PLW_OK);
        assert_true(mains.within_ratings);
        if (systems[i] == PLW_SYSTEM_DESIGN_CENTER) {
            assert_true(before == 0.0);
            assert_true(choice.aim.value == usual.value);
            assert_true(choice.exact_ohms == plain.exact_ohms);
            continue;
        }
        assert_true(before == usual.value);
        assert_true(choice.aim.value < usual.value);
        assert_true(choice.exact_ohms > plain.exact_ohms);
        /* Not lower than needed: the plate is near its rating, a tenth above nominal. */
        assert_true(mains.high.quiescent.plate_watts > 0.96 * 12.3);
        stage.cathode_resistor_ohms = plain.option[plain.chosen].ohms;
        assert_int_equal(plw_mains_solve(&stage, &mains, NULL), PLW_OK);
        assert_false(mains.high.within_ratings);
    }
}

/* A screen that only full drive at high mains overheats: worth a little more resistance where that cures it. */
static void the_aim_is_lowered_for_the_drive(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_PENTODE_STEEP));
    rate(&tube, PLW_SYSTEM_DESIGN_MAXIMUM);
    tube.ratings[0].cathode_amps = UNKNOWN;
    plw_stage stage = simple_stage(&tube, 251.3, 5210.0, UNKNOWN, UNKNOWN);
    plw_bias_choice plain, choice;
    plw_mains mains;
    double before;
    assert_int_equal(plw_bias_choose_for_mains(&stage, PLW_E96, &plain, &before, NULL), PLW_OK);
    stage.cathode_resistor_ohms = plain.option[plain.chosen].ohms;
    assert_int_equal(plw_mains_solve(&stage, &mains, NULL), PLW_OK);
    assert_true(mains.within_ratings);
    for (size_t i = 0; i < plain.options; i++) { /* every option is judged as the stage with it would be */
        plw_stage trial = stage;
        trial.cathode_resistor_ohms = plain.option[i].ohms;
        plw_mains there;
        assert_int_equal(plw_mains_solve(&trial, &there, NULL), PLW_OK);
        assert_int_equal(plain.option[i].within_at_mains, there.within_ratings);
    }
    const double watts = mains.high.signal.screen_watts;
    assert_true(watts > mains.high.quiescent.screen_watts);
    const struct {
        double part; /* of what the screen takes there */
        bool cured;
    } cases[] = {{1.01, true}, {0.99, true}, {0.5, false}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        tube.ratings[0].screen_watts = cases[i].part * watts;
        stage.cathode_resistor_ohms = UNKNOWN;
        assert_int_equal(plw_bias_choose_for_mains(&stage, PLW_E96, &choice, &before, NULL), PLW_OK);
        stage.cathode_resistor_ohms = choice.option[choice.chosen].ohms;
        assert_int_equal(plw_mains_solve(&stage, &mains, NULL), PLW_OK);
        assert_int_equal(mains.within_ratings, cases[i].cured);
        if (i == 0) {
            assert_true(choice.exact_ohms == plain.exact_ohms);
        } else if (cases[i].cured) {
            assert_true(choice.exact_ohms > plain.exact_ohms);
            assert_true(stage.cathode_resistor_ohms <=
                        PLW_DRIVEN_RAISE_MOST * plain.option[plain.chosen].ohms * (1.0 + 1e-9));
        }
    }
}

/* A voltage that is too high at high mains is no reason to starve the tube. */
static void voltages_do_not_lower_the_aim(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_PENTODE_STEEP));
    rate(&tube, PLW_SYSTEM_DESIGN_MAXIMUM);
    tube.ratings[0].plate_volts = 253.0;
    tube.ratings[0].cathode_amps = UNKNOWN;
    const plw_stage stage = simple_stage(&tube, 251.3, 5210.0, UNKNOWN, UNKNOWN);
    plw_bias_choice choice, wider;
    double before = -2.385;
    assert_int_equal(plw_bias_choose_for_mains(&stage, PLW_E24, &choice, &before, NULL), PLW_OK);
    tube.ratings[0].plate_volts = 1253.0;
    assert_int_equal(plw_bias_choose_for_mains(&stage, PLW_E24, &wider, &before, NULL), PLW_OK);
    assert_true(choice.aim.value == wider.aim.value);
    /* What cannot be chosen at all is told as by plw_bias_choose(). */
    plw_error error = {0};
    tube.ratings[0].plate_watts = 1230.0;
    assert_int_equal(plw_bias_choose_for_mains(&stage, PLW_E24, &choice, &before, &error), PLW_E_NO_POINT);
    assert_non_null(strstr(error.text, "out of reach"));
    tube.ratings[0].plate_watts = UNKNOWN;
    assert_int_equal(plw_bias_choose_for_mains(&stage, PLW_E24, &choice, &before, &error), PLW_E_USAGE);
}

/* The reading expected means the resistor chosen; higher readings mean higher resistors. */
static void readings_have_a_meaning(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_PENTODE_STEEP));
    rate(&tube, PLW_SYSTEM_DESIGN_CENTER);
    plw_stage stage = simple_stage(&tube, 0.0 + 251.3, 5210.0, UNKNOWN, UNKNOWN);
    const plw_aim aim = {PLW_AIM_DISSIPATION, 87.0};
    plw_bias_choice choice;
    plw_dummy_load dummy;
    plw_dummy_meaning meaning[PLW_DUMMY_MEANINGS];
    plw_error error = {0};
    assert_int_equal(plw_supply_source(283.9, 713.0, &stage.supply, &error), PLW_OK);
    assert_int_equal(plw_bias_choose(&stage, aim, PLW_E24, &choice, &error), PLW_OK);
    const plw_quiescent *rest = &choice.option[choice.chosen].quiescent;
    assert_int_equal(plw_dummy_load_for(&stage.supply, rest->supply_amps, PLW_E24, 2.0, &dummy, &error), PLW_OK);
    assert_int_equal(plw_dummy_meanings(&stage, &dummy, aim, PLW_E24, meaning, &error), PLW_OK);
    const plw_dummy_meaning *expected = &meaning[PLW_DUMMY_MEANINGS / 2];
    assert_near_relative(expected->read_volts, dummy.expected_volts, 1e-12, "the middle one is as expected");
    assert_near_relative(expected->loaded_volts, rest->supply_volts, 1e-9, "the same supply");
    assert_near(expected->ohms, choice.option[choice.chosen].ohms, 1e-9, "the same choice");
    for (int i = 1; i < PLW_DUMMY_MEANINGS; i++) {
        assert_true(meaning[i].read_volts > meaning[i - 1].read_volts);
        assert_true(meaning[i].loaded_volts > meaning[i - 1].loaded_volts);
        assert_true(meaning[i].ohms >= meaning[i - 1].ohms);
    }
    assert_true(meaning[PLW_DUMMY_MEANINGS - 1].ohms > meaning[0].ohms);
    stage.fixed_bias_volts = -7.3;
    assert_int_equal(plw_dummy_meanings(&stage, &dummy, aim, PLW_E24, meaning, &error), PLW_E_USAGE);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(corners_are_the_stage_there),      cmocka_unit_test(rating_systems_differ),
        cmocka_unit_test(corners_that_are_not_there),       cmocka_unit_test(the_aim_is_lowered_for_the_mains),
        cmocka_unit_test(the_aim_is_lowered_for_the_drive), cmocka_unit_test(voltages_do_not_lower_the_aim),
        cmocka_unit_test(readings_have_a_meaning),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
