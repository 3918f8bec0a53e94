/* One tube by its meter readings: stronger and weaker tubes recognised, the screen's share, refusals.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/mains.h"
#include "platewright/specimen.h"

#include <string.h>

#include "near.h"
#include "unit/stages.h"

static const plw_aim usual_aim = {PLW_AIM_DISSIPATION, 90.0};

static void make_rated(test_tube *tube, plw_law law) {
    make_tube(tube, law);
    tube->ratings[0].plate_watts = 12.0;
}

/* The readings that a meter would take of this stage. */
static plw_meter_readings readings_of(const plw_stage *stage, plw_quiescent *q) {
    plw_error error = {0};
    if (plw_quiescent_solve(stage, q, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return (plw_meter_readings){q->supply_volts, q->plate_to_ground_volts, q->screen_to_ground_volts, q->cathode_volts};
}

/* Measure, on the bogey tube's stage, what a tube `strength` times as strong reads in it. */
static plw_quiescent measure_strength(const plw_stage *bogey, double strength, plw_meter_readings *readings,
                                      plw_specimen *specimen) {
    test_tube strong;
    make_rated(&strong, bogey->tube->model.law);
    plw_law_scale(&strong.tube.model.law, strength);
    plw_stage bench = *bogey;
    bench.tube = &strong.tube;
    plw_quiescent q, model;
    *readings = readings_of(&bench, &q);
    assert_int_equal(plw_quiescent_solve(bogey, &model, NULL), PLW_OK);
    plw_error error = {0};
    if (plw_specimen_measure(bogey, readings, &usual_aim, PLW_E24, specimen, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return q;
}

static plw_stage pentode_stage(const test_tube *tube) {
    plw_stage stage = simple_stage(tube, 285.0, 5000.0, 270.0, UNKNOWN);
    stage.primary_ohms = 280.0;
    stage.screen_resistor_ohms = 470.0;
    return stage;
}

/* The division of the current between plate and screen does not depend on the tube's strength, so everything comes back
 * exactly: currents, heat, copper, and how far the tube is off. */
static void a_stronger_tube_is_told_exactly(void **state) {
    (void)state;
    static const double strengths[] = {0.71, 0.9, 1.0, 1.2, 1.385};
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    const plw_stage stage = pentode_stage(&tube);
    for (size_t index = 0; index < sizeof strengths / sizeof strengths[0]; index++) {
        plw_meter_readings readings;
        plw_specimen s;
        const plw_quiescent q = measure_strength(&stage, strengths[index], &readings, &s);
        const char *source = "the readings are those of the model times a strength";
        assert_near(s.off_percent, 100.0 * (strengths[index] - 1.0), 1e-5, source);
        assert_near_relative(s.cathode_amps, q.cathode_amps, 1e-8, source);
        assert_near_relative(s.plate_amps, q.plate_amps, 1e-7, source);
        assert_near_relative(s.screen_amps, q.screen_amps, 1e-6, source);
        assert_near_relative(s.plate_watts, q.plate_watts, 1e-7, source);
        assert_near_relative(s.screen_watts, q.screen_watts, 1e-6, source);
        assert_near_relative(s.primary_ohms, 280.0, 1e-6, source);
        assert_near(s.plate_volts, q.plate_volts, 1e-9, "plate reading less cathode reading");
        assert_near(s.grid_volts, -q.cathode_volts, 1e-9, "the grid is at the chassis");
        assert_true(s.supply_read && s.plate_read && s.screen_read);
        /* The stage that belongs to this tube rests where the meter says. */
        plw_quiescent again;
        assert_int_equal(plw_quiescent_solve(&s.stage, &again, NULL), PLW_OK);
        assert_near(again.cathode_volts, q.cathode_volts, 1e-5, source);
        assert_ptr_equal(s.stage.tube, &s.tube);
    }
}

/* The screen's current is in the cathode's and not in the plate's: 4 to 15 % of it in these tubes. */
static void the_screens_share_is_taken_off(void **state) {
    (void)state;
    for (int which = 0; which < TEST_PENTODES; which++) {
        test_tube tube;
        make_rated(&tube, pentode_law(which));
        const plw_stage stage = pentode_stage(&tube);
        plw_meter_readings readings;
        plw_specimen s;
        measure_strength(&stage, 1.1, &readings, &s);
        assert_near_relative(s.cathode_amps, readings.cathode_volts / 270.0, 1e-12, "Ohm's law");
        assert_near_relative(s.plate_amps + s.screen_amps, s.cathode_amps, 1e-12, "Kirchhoff");
        assert_true(s.screen_amps > 0.03 * s.cathode_amps && s.screen_amps < 0.2 * s.cathode_amps);
    }
    test_tube triode;
    make_rated(&triode, koren_triode(KOREN_2A3));
    const plw_stage stage = simple_stage(&triode, 297.0, 2500.0, 750.0, UNKNOWN);
    plw_meter_readings readings;
    plw_specimen s;
    measure_strength(&stage, 0.93, &readings, &s);
    assert_near(s.screen_amps, 0.0, 0.0, "a triode has no screen");
    assert_near(s.off_percent, -7.0, 1e-5, "strength 0.93");
    assert_true(isnan(s.screen_volts) && isnan(s.screen_to_ground_volts) && isnan(s.screen_watts));
}

static void connections_and_parallel_tubes_are_read_alike(void **state) {
    (void)state;
    random_source r = {20250219};
    int measured = 0;
    for (int trial = 0; trial < 400; trial++) {
        test_tube tube;
        plw_stage stage;
        random_stage(&r, &tube, &stage);
        if (isnan(stage.cathode_resistor_ohms)) {
            continue;
        }
        tube.ratings[0].plate_watts = 12.0;
        plw_meter_readings readings;
        plw_specimen s;
        const plw_quiescent q = measure_strength(&stage, 1.2, &readings, &s);
        assert_near(s.off_percent, 20.0, 1e-4, "strength 1.2");
        assert_near_relative(s.plate_amps, q.plate_amps, 1e-6, "one tube's current");
        assert_near(s.primary_ohms, stage.primary_ohms, 1e-4 + 1e-6 * stage.primary_ohms, "drop over current");
        /* The cathode alone tells as much where the circuit is as described. */
        const plw_meter_readings cathode_only = {UNKNOWN, UNKNOWN, UNKNOWN, readings.cathode_volts};
        assert_int_equal(plw_specimen_measure(&stage, &cathode_only, &usual_aim, PLW_E24, &s, NULL), PLW_OK);
        assert_near(s.off_percent, 20.0, 1e-3, "strength 1.2");
        measured++;
    }
    assert_true(measured > 200);
}

/* Readings that were not taken: the model's figures stand in, and the answer is still close. */
static void missing_readings_are_filled_in_and_flagged(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    const plw_stage stage = pentode_stage(&tube);
    plw_meter_readings readings;
    plw_specimen s;
    const plw_quiescent q = measure_strength(&stage, 1.2, &readings, &s);
    readings.supply_volts = readings.plate_volts = readings.screen_volts = UNKNOWN;
    assert_int_equal(plw_specimen_measure(&stage, &readings, &usual_aim, PLW_E24, &s, NULL), PLW_OK);
    assert_false(s.supply_read || s.plate_read || s.screen_read);
    assert_true(isnan(s.primary_ohms));
    assert_near(s.off_percent, 20.0, 1e-4, "on a stiff supply the rest follows from the cathode");
    assert_near(s.plate_to_ground_volts, q.plate_to_ground_volts, 1e-5, "the circuit at these currents");
    assert_near(s.screen_to_ground_volts, q.screen_to_ground_volts, 1e-5, "the circuit at these currents");
}

/* A supply that reads otherwise than described moves the stage's supply. */
static void the_supply_is_taken_as_read(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage = pentode_stage(&tube);
    stage.supply = stiff(301.0);
    plw_quiescent q;
    const plw_meter_readings readings = readings_of(&stage, &q);
    plw_stage described = stage;
    described.supply = stiff(285.0);
    plw_specimen s;
    assert_int_equal(plw_specimen_measure(&described, &readings, &usual_aim, PLW_E24, &s, NULL), PLW_OK);
    assert_near(s.off_percent, 0.0, 1e-4, "it is the bogey tube, on more volts");
    plw_quiescent again;
    assert_int_equal(plw_quiescent_solve(&s.stage, &again, NULL), PLW_OK);
    assert_near(again.supply_volts, 301.0, 1e-6, "as read");
}

/* A primary of more copper than described: as read, the stage follows. */
static void the_copper_is_taken_as_read(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage = pentode_stage(&tube);
    stage.parallel = 2;
    stage.cathode_resistor_ohms = 135.0;
    stage.primary_ohms = 238.5;
    plw_quiescent q, again;
    const plw_meter_readings readings = readings_of(&stage, &q);
    plw_stage described = stage;
    described.primary_ohms = 100.0;
    plw_specimen s;
    assert_int_equal(plw_specimen_measure(&described, &readings, &usual_aim, PLW_E24, &s, NULL), PLW_OK);
    assert_near(s.primary_ohms, 238.5, 1e-3, "drop over the current of both tubes");
    assert_int_equal(plw_quiescent_solve(&s.stage, &again, NULL), PLW_OK);
    assert_near(again.plate_to_ground_volts, readings.plate_volts, 1e-4, "as read");
}

/* A screen resistor that was not told: as read, the stage follows, and that is remarked. */
static void the_screens_feed_is_taken_as_read(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage = pentode_stage(&tube);
    stage.screen_resistor_ohms = 4700.0;
    plw_quiescent q, again;
    const plw_meter_readings readings = readings_of(&stage, &q);
    plw_stage described = stage;
    described.screen_resistor_ohms = 0.0;
    plw_specimen s;
    assert_int_equal(plw_specimen_measure(&described, &readings, &usual_aim, PLW_E24, &s, NULL), PLW_OK);
    assert_near_relative(s.screen_feed_ohms, 4700.0, 1e-6, "fall over the screen's current");
    assert_non_null(strstr(s.doubt, "screen's feed"));
    assert_int_equal(plw_quiescent_solve(&s.stage, &again, NULL), PLW_OK);
    assert_near(again.screen_to_ground_volts, readings.screen_volts, 1e-4, "as read");
    assert_near(again.cathode_volts, readings.cathode_volts, 1e-4, "as read");
    assert_int_equal(plw_specimen_measure(&stage, &readings, &usual_aim, PLW_E24, &s, NULL), PLW_OK);
    assert_string_equal(s.doubt, "");
}

/* The plate read and the supply not: the plate's reading and the copper as told make the supply. */
static void the_plates_reading_makes_the_supply(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage = pentode_stage(&tube);
    stage.supply = stiff(297.0);
    plw_quiescent q, again;
    plw_meter_readings readings = readings_of(&stage, &q);
    readings.supply_volts = readings.screen_volts = UNKNOWN;
    plw_stage described = stage;
    described.supply = stiff(279.0);
    plw_specimen s;
    assert_int_equal(plw_specimen_measure(&described, &readings, &usual_aim, PLW_E24, &s, NULL), PLW_OK);
    assert_false(s.supply_read);
    assert_near(s.supply_volts, 297.0, 1e-6, "plate and the fall across the copper");
    assert_near(s.off_percent, 0.0, 1e-4, "it is the bogey tube, on more volts");
    assert_non_null(strstr(s.doubt, "read the supply too")); /* 18 V of 279 are 6 % */
    assert_int_equal(plw_quiescent_solve(&s.stage, &again, NULL), PLW_OK);
    assert_near(again.plate_to_ground_volts, readings.plate_volts, 1e-4, "as read");
    assert_near_relative(again.plate_watts, s.plate_watts, 1e-6, "the heat by the meter is that of the stage");
}

/* Without an aim the tube's own resistor holds its ratings with the mains high, as the choice for a stage does. */
static void its_own_resistor_allows_for_the_mains(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    tube.ratings[0].system = PLW_SYSTEM_DESIGN_MAXIMUM;
    plw_stage stage = pentode_stage(&tube);
    plw_quiescent q;
    const plw_meter_readings readings = readings_of(&stage, &q);
    plw_specimen s, told;
    assert_int_equal(plw_specimen_measure(&stage, &readings, NULL, PLW_E24, &s, NULL), PLW_OK);
    assert_int_equal(plw_specimen_measure(&stage, &readings, &usual_aim, PLW_E24, &told, NULL), PLW_OK);
    assert_true(s.resistor_found && told.resistor_found);
    assert_near(s.aim_before_percent, PLW_AIM_DEFAULT_PERCENT, 0.0, "lowered");
    assert_near(told.aim_before_percent, 0.0, 0.0, "an aim that is told stays");
    assert_true(s.choice.option[s.choice.chosen].ohms > told.choice.option[told.choice.chosen].ohms);
    plw_mains mains;
    plw_stage trial = s.stage;
    trial.cathode_resistor_ohms = s.choice.option[s.choice.chosen].ohms;
    assert_int_equal(plw_mains_solve(&trial, &mains, NULL), PLW_OK);
    for (size_t i = 0; i < mains.high.ratings_count; i++) {
        assert_true(mains.high.ratings[i].ok || mains.high.ratings[i].unit == PLW_UNIT_VOLT ||
                    mains.high.ratings[i].when == PLW_AT_FULL_DRIVE);
    }
}

/* The resistor that suits this very tube: the aim met with the scaled law. */
static void the_resistor_found_suits_this_tube(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    const plw_stage stage = pentode_stage(&tube);
    plw_meter_readings readings;
    plw_specimen weak, strong;
    measure_strength(&stage, 0.9, &readings, &weak);
    measure_strength(&stage, 1.2, &readings, &strong);
    assert_true(weak.resistor_found && strong.resistor_found);
    assert_true(strong.choice.exact_ohms > weak.choice.exact_ohms);
    plw_stage suited = strong.stage;
    suited.tube = &strong.tube;
    suited.cathode_resistor_ohms = strong.choice.exact_ohms;
    plw_quiescent q;
    assert_int_equal(plw_quiescent_solve(&suited, &q, NULL), PLW_OK);
    assert_near_relative(q.plate_watts, 0.9 * 12.0, 1e-6, "the aim");
    tube.ratings[0].plate_watts = 120.0;
    const plw_meter_readings same = readings_of(&stage, &q);
    assert_int_equal(plw_specimen_measure(&stage, &same, &usual_aim, PLW_E24, &strong, NULL), PLW_OK);
    assert_false(strong.resistor_found);
    assert_non_null(strstr(strong.resistor_obstacle, "out of reach"));
}

/* The verdict is on the tube that was measured: of two in one stage the stronger passes a rating that the bogey keeps. */
static void the_tube_measured_is_the_one_judged(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    const plw_stage stage = pentode_stage(&tube);
    plw_meter_readings readings;
    static plw_specimen weak, strong;
    const plw_quiescent at_weak = measure_strength(&stage, 0.9, &readings, &weak);
    const plw_quiescent at_strong = measure_strength(&stage, 1.2, &readings, &strong);
    assert_true(at_weak.plate_watts < at_strong.plate_watts);
    tube.ratings[0].plate_watts = 1.023 * at_strong.plate_watts; /* above both */
    measure_strength(&stage, 0.9, &readings, &weak);
    measure_strength(&stage, 1.2, &readings, &strong);
    assert_true(plw_specimen_keeps_ratings(&weak) && plw_specimen_keeps_ratings(&strong));
    tube.ratings[0].plate_watts = 0.5 * (at_weak.plate_watts + at_strong.plate_watts);
    measure_strength(&stage, 0.9, &readings, &weak);
    measure_strength(&stage, 1.2, &readings, &strong);
    assert_true(plw_specimen_keeps_ratings(&weak));
    assert_false(plw_specimen_keeps_ratings(&strong));
    /* Measured at rest it is over, also where the stage as built could not be solved. */
    strong.as_built_solved = false;
    assert_false(plw_specimen_keeps_ratings(&strong));
    /* Kept at rest, but not driven. */
    weak.as_built.within_ratings = false;
    assert_false(plw_specimen_keeps_ratings(&weak));
    weak.as_built_solved = false;
    assert_true(plw_specimen_keeps_ratings(&weak));
}

/* Far outside what tubes of a type differ by, it is not the tube: said, not swallowed; within it nothing is said. */
static void readings_no_tube_explains_are_doubted(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage = pentode_stage(&tube);
    plw_meter_readings readings;
    plw_specimen s;
    measure_strength(&stage, 1.4, &readings, &s);
    assert_string_equal(s.doubt, "");
    assert_true(s.as_built_solved);
    assert_near_relative(s.as_built.quiescent.cathode_volts, readings.cathode_volts, 1e-6, "the stage as it was read");
    measure_strength(&stage, 1.8, &readings, &s);
    assert_non_null(strstr(s.doubt, "this much current"));
    measure_strength(&stage, 0.4, &readings, &s);
    assert_non_null(strstr(s.doubt, "this little current"));
    measure_strength(&stage, 1.0, &readings, &s);
    readings.plate_volts -= 20.0; /* 20 V more across the primary: several times the copper told */
    assert_int_equal(plw_specimen_measure(&stage, &readings, &usual_aim, PLW_E24, &s, NULL), PLW_OK);
    assert_non_null(strstr(s.doubt, "Between supply and plate"));
}

/* ---- refusals ---------------------------------------------------------------------------------------------------- */

static void readings_that_contradict_are_refused(void **state) {
    (void)state;
    test_tube tube;
    make_rated(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage = pentode_stage(&tube);
    plw_quiescent q;
    const plw_meter_readings good = readings_of(&stage, &q);
    const struct {
        double supply, plate, screen, cathode;
        const char *text;
    } wrong[] = {
        {good.supply_volts, good.plate_volts, good.screen_volts, UNKNOWN, "cathode"},
        {good.supply_volts, good.plate_volts, good.screen_volts, 0.0, "no current flows"},
        {UNKNOWN, 1.08 * good.supply_volts, UNKNOWN, good.cathode_volts, "that feed it"},
        {UNKNOWN, UNKNOWN, 1.08 * good.supply_volts, good.cathode_volts, "that feed it"},
        {good.supply_volts, good.plate_volts, good.screen_volts, -12.6, "cathode"},
        {good.supply_volts, good.plate_volts, good.screen_volts, 5001.0, "cathode"},
        {good.supply_volts, 1.05 * good.supply_volts, good.screen_volts, good.cathode_volts, "plate"},
        {good.supply_volts, 0.9 * good.cathode_volts, good.screen_volts, good.cathode_volts, "plate"},
        {good.supply_volts, good.plate_volts, 0.9 * good.cathode_volts, good.cathode_volts, "screen"},
        {0.9 * good.cathode_volts, UNKNOWN, UNKNOWN, good.cathode_volts, "supply"},
        {(double)INFINITY, UNKNOWN, UNKNOWN, good.cathode_volts, "supply"},
        {good.supply_volts, good.plate_volts, good.screen_volts, 79.0, "cut off"},
    };
    for (size_t index = 0; index < sizeof wrong / sizeof wrong[0]; index++) {
        const plw_meter_readings readings = {wrong[index].supply, wrong[index].plate, wrong[index].screen,
                                             wrong[index].cathode};
        plw_specimen s;
        plw_error error = {0};
        if (plw_specimen_measure(&stage, &readings, &usual_aim, PLW_E24, &s, &error) != PLW_E_USAGE) {
            fail_msg("readings %zu were accepted", index);
        }
        if (strstr(error.text, wrong[index].text) == NULL) {
            fail_msg("want \"%s\" in: %s", wrong[index].text, error.text);
        }
    }
    stage.fixed_bias_volts = -12.5;
    stage.cathode_resistor_ohms = UNKNOWN;
    plw_specimen s;
    plw_error error = {0};
    assert_int_equal(plw_specimen_measure(&stage, &good, &usual_aim, PLW_E24, &s, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "fixed bias"));
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_stronger_tube_is_told_exactly),
        cmocka_unit_test(the_screens_share_is_taken_off),
        cmocka_unit_test(connections_and_parallel_tubes_are_read_alike),
        cmocka_unit_test(missing_readings_are_filled_in_and_flagged),
        cmocka_unit_test(the_supply_is_taken_as_read),
        cmocka_unit_test(the_copper_is_taken_as_read),
        cmocka_unit_test(the_screens_feed_is_taken_as_read),
        cmocka_unit_test(the_plates_reading_makes_the_supply),
        cmocka_unit_test(its_own_resistor_allows_for_the_mains),
        cmocka_unit_test(the_resistor_found_suits_this_tube),
        cmocka_unit_test(the_tube_measured_is_the_one_judged),
        cmocka_unit_test(readings_no_tube_explains_are_doubted),
        cmocka_unit_test(readings_that_contradict_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
