/* The plate supply as described: its line, what it does at a current, other mains, what a reading implies.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "platewright/plate_supply.h"
#include "unit/supplies.h"

static plw_rectifier usual_parts(void) {
    plw_rectifier parts = usual_rectifier(231.4, 173.0);
    parts.sections = 1;
    parts.section[0] = (plw_filter_section){.henries = 7.9, .ohms = 181.0, .farads = 47e-6};
    return parts;
}

static plw_plate_supply of_parts(plw_rectifier parts) {
    plw_plate_supply supply = {.has_parts = true, .has_winding = true, .parts = parts};
    plw_error error = {0};
    if (plw_plate_supply_settle(&supply, 0.13, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return supply;
}

/* Another mains voltage by drawing out the line, and by solving the rectifier there. */
static void mains_move_the_line(void **state) {
    (void)state;
    const plw_rectifier parts = usual_parts();
    const plw_plate_supply supply = of_parts(parts);
    const double percents[] = {90.0, 110.0};
    for (int k = 0; k < 2; k++) {
        const plw_supply drawn = plw_supply_at_mains(&supply.line, percents[k]);
        const plw_rectifier there = plw_rectifier_at_mains(&parts, percents[k]);
        for (double amps = 0.011; amps < 0.09; amps += 0.017) {
            const plw_rectifier_state solved = steady_state(&there, amps, 0.0);
            double volts;
            double ohms;
            plw_supply_at(&drawn, amps, &volts, &ohms);
            /* Of the drop of 0.7 V a tenth is wrong, and the line is a cubic between points. */
            assert_near(volts, solved.volts, 0.1, "the rectifier solved at that mains voltage");
        }
    }
    plw_supply source;
    assert_int_equal(plw_supply_source(301.7, 1130.0, &source, NULL), PLW_OK);
    const plw_supply high = plw_supply_at_mains(&source, 110.0);
    double volts;
    double ohms;
    plw_supply_at(&high, 0.0371, &volts, &ohms);
    assert_near(volts, 1.1 * 301.7 - 1130.0 * 0.0371, 1e-9, "Ohm's law");
}

static void a_reading_implies_a_supply(void **state) {
    (void)state;
    const plw_plate_supply supply = of_parts(usual_parts());
    plw_supply implied;
    plw_error error = {0};
    assert_int_equal(plw_supply_implied(&supply.line, 243.1, 5600.0, &implied, &error), PLW_OK);
    double volts;
    double amps;
    assert_int_equal(plw_supply_into(&implied, 5600.0, &volts, &amps, &error), PLW_OK);
    assert_near(volts, 243.1, 1e-6, "the reading itself");
    double ohms;
    double before;
    double before_ohms;
    plw_supply_at(&implied, 0.0, &volts, &ohms);
    plw_supply_at(&supply.line, 0.0, &before, &before_ohms);
    assert_true(volts < before);
    assert_int_equal(plw_supply_implied(&supply.line, 0.0, 5600.0, &implied, &error), PLW_E_USAGE);
    assert_int_equal(plw_supply_implied(&supply.line, 243.1, -1.0, &implied, &error), PLW_E_USAGE);
    assert_int_equal(plw_supply_implied(&supply.line, 2431.0, 1.3, &implied, &error), PLW_E_USAGE);
}

/* The answer says what the parts of the library say. */
static void answer_of_parts(void **state) {
    (void)state;
    const plw_rectifier parts = usual_parts();
    const plw_plate_supply supply = of_parts(parts);
    plw_supply_question question = plw_supply_question_usual(0.0437);
    plw_supply_answer a;
    plw_error error = {0};
    question.ratings.capacitor_volts[0] = 350.0;
    assert_int_equal(plw_plate_supply_ask(&supply, &question, &a, &error), PLW_OK);
    const plw_rectifier_state solved = steady_state(&parts, 0.0437, 0.0);
    assert_near(a.volts, solved.volts, 1e-9, "the steady state");
    assert_near(a.source_ohms, solved.source_ohms, 1e-9, "the steady state");
    assert_true(isnan(a.volts_error));
    assert_near(a.off_load_volts, sqrt(2.0) * 231.4 - 0.7, 1e-9, "the peak less the drop");
    assert_near(a.off_load_high_volts, sqrt(2.0) * 231.4 * 1.1 - 0.7, 1e-9, "a tenth higher");
    assert_int_equal(a.line_points, PLW_ANSWER_LINE_POINTS);
    assert_near(a.line[PLW_ANSWER_LINE_POINTS - 1].amps, 2.0 * 0.0437, 1e-12, "twice the current");
    for (size_t i = 1; i < a.line_points; i++) {
        assert_true(a.line[i].volts < a.line[i - 1].volts);
        assert_true(a.line[i].ripple_volts_peak_to_peak > a.line[i - 1].ripple_volts_peak_to_peak);
    }
    assert_true(a.has_dummy && a.has_bleeder && !a.bleeder_fitted && !a.has_transformer);
    assert_true(a.bleeder.seconds_to_60_volts <= question.bleeder_seconds);
    assert_false(a.within_ratings); /* 359 V on 350 V */
    bool found = false;
    for (size_t i = 0; i < a.checks_count; i++) {
        found = found || (!a.checks[i].ok && strcmp(a.checks[i].name, "capacitor voltage, cold tubes") == 0);
    }
    assert_true(found);
}

/* A reservoir and copper that nobody told are no ground for figures. */
static void unknown_parts_stay_unknown(void **state) {
    (void)state;
    plw_rectifier parts = usual_parts();
    parts.sections = 0;
    parts.reservoir_farads = PLW_RESERVOIR_BOUNDLESS_FARADS;
    parts.path_ohms = 0.0;
    plw_plate_supply supply = {
        .has_parts = true, .has_winding = true, .reservoir_assumed = true, .copper_assumed = true, .parts = parts};
    plw_error error = {0};
    assert_int_equal(plw_plate_supply_settle(&supply, 0.13, &error), PLW_OK);
    const plw_supply_question question = plw_supply_question_usual(0.0437);
    plw_supply_answer a;
    assert_int_equal(plw_plate_supply_ask(&supply, &question, &a, &error), PLW_OK);
    assert_false(a.has_bleeder);
    assert_true(isnan(a.line[3].ripple_volts_peak_to_peak));
    assert_true(a.within_ratings); /* without copper the surge would be boundless: it is not judged */
}

static void a_fitted_bleeder_is_told(void **state) {
    (void)state;
    plw_rectifier parts = usual_parts();
    parts.bleeder_ohms = 180e3;
    const plw_plate_supply supply = of_parts(parts);
    const plw_supply_question question = plw_supply_question_usual(0.0437);
    plw_supply_answer a;
    assert_int_equal(plw_plate_supply_ask(&supply, &question, &a, NULL), PLW_OK);
    assert_true(a.has_bleeder && a.bleeder_fitted);
    assert_near_relative(a.bleeder.watts, a.bled_high_volts * a.bled_high_volts / 180e3, 1e-12, "V^2 / R");
    assert_near_relative(a.bleeder.seconds_to_60_volts, plw_discharge_seconds(&parts, a.bled_high_volts, 60.0), 1e-12,
                         "the discharge of these parts");
    assert_near_relative(a.bled_volts, a.line[0].volts, 1e-9, "nothing else drawn: where the line begins");
    assert_near(a.off_load_volts, sqrt(2.0) * 231.4 - 0.7, 1e-9, "the bleeder open: the peak less the drop");
}

/* Behind a choke input a bleeder that keeps the choke's current from stopping holds the output near the mean of the
 * rectified winding, 2 sqrt(2) / pi = 0.900 of its RMS volts, where without it the peak would stand there. */
static void a_bleeder_holds_a_choke_input_down(void **state) {
    (void)state;
    const plw_rectifier parts = {.connection = PLW_FULL_WAVE,
                                 .winding_rms_volts = 461.0,
                                 .path_ohms = 61.0,
                                 .mains_hertz = 50.0,
                                 .diode = plw_diode_silicon(),
                                 .sections = 1,
                                 .section = {{10.0, 110.0, 47e-6}},
                                 .bleeder_ohms = 9.1e3};
    const plw_plate_supply supply = of_parts(parts);
    const plw_supply_question question = plw_supply_question_usual(0.0437);
    plw_supply_answer a;
    assert_int_equal(plw_plate_supply_ask(&supply, &question, &a, NULL), PLW_OK);
    /* Ohm's law at the mean current; 0.3 %: the diodes' slope and the copper under ripple are left out of it */
    const double mean = 2.0 * sqrt(2.0) / acos(-1.0) * 461.0;
    const double divided = (mean - 0.7) * 9100.0 / (9100.0 + 61.0 + 110.0);
    const double divided_high = (1.1 * mean - 0.7) * 9100.0 / (9100.0 + 61.0 + 110.0);
    assert_near_relative(a.bled_volts, divided, 3e-3, "mean of the rectified winding");
    assert_near_relative(a.bled_high_volts, divided_high, 3e-3, "a tenth higher");
    assert_near_relative(a.bleeder.watts, divided_high * divided_high / 9100.0, 6e-3, "heat at high mains");
    assert_near(a.off_load_high_volts, sqrt(2.0) * 461.0 * 1.1 - 0.7, 1e-9, "should it open");
    plw_rectifier bare = parts;
    bare.bleeder_ohms = 0.0;
    const plw_plate_supply without = of_parts(bare);
    assert_int_equal(plw_plate_supply_ask(&without, &question, &a, NULL), PLW_OK);
    assert_true(isnan(a.bled_volts) && isnan(a.bled_high_volts));
}

static void readings_through_the_rectifier(void **state) {
    (void)state;
    plw_rectifier parts = usual_parts();
    const plw_rectifier_state solved = steady_state(&parts, 0.0281, 0.0);
    plw_error error = {0};
    plw_plate_supply supply = {.has_parts = true, .parts = parts, .readings = 1};
    supply.parts.path_ohms = 0.0;
    supply.reading[0] = (plw_bench_reading){solved.volts, 0.0, 0.0281};
    assert_int_equal(plw_plate_supply_settle(&supply, 0.13, &error), PLW_OK);
    assert_true(supply.estimated && supply.has_winding);
    assert_near(supply.parts.path_ohms, 173.0, 0.01, "the copper that the reading was made with");
    const plw_supply_question question = plw_supply_question_usual(0.0437);
    plw_supply_answer a;
    assert_int_equal(plw_plate_supply_ask(&supply, &question, &a, &error), PLW_OK);
    assert_true(a.volts_error > 0.5 && a.volts_error < 10.0);
    supply.reading[0].volts = 500.0;
    supply.parts.winding_rms_volts = 231.4;
    assert_int_equal(plw_plate_supply_settle(&supply, 0.13, &error), PLW_E_USAGE);
}

static void other_kinds(void **state) {
    (void)state;
    const plw_reading readings[] = {{303.0, 0.0}, {258.0, 0.0258}, {241.0, 0.0403}};
    plw_supply line;
    plw_supply_answer a;
    plw_error error = {0};
    assert_int_equal(plw_supply_readings(readings, 3, &line, &error), PLW_OK);
    const plw_plate_supply bench = plw_plate_supply_of(&line);
    plw_supply_question question = plw_supply_question_usual(0.033);
    assert_int_equal(plw_plate_supply_ask(&bench, &question, &a, &error), PLW_OK);
    const double share = (0.033 - 0.0258) / (0.0403 - 0.0258);
    assert_near(a.volts, 258.0 - share * 17.0, 1e-9, "between two readings");
    assert_near(a.volts_error, hypot((1.0 - share) * 2.58, share * 2.41), 1e-9, "1 % of each reading");
    assert_int_equal(a.line_points, 3);
    assert_near(a.off_load_high_volts, 1.1 * 303.0, 1e-9, "a tenth higher");
    question.amps = 0.4;
    assert_int_equal(plw_plate_supply_ask(&bench, &question, &a, &error), PLW_E_NO_POINT);
    question.amps = 0.0;
    assert_int_equal(plw_plate_supply_ask(&bench, &question, &a, &error), PLW_E_USAGE);
    assert_int_equal(plw_supply_readings(&readings[1], 1, &line, &error), PLW_OK);
    const plw_plate_supply single = plw_plate_supply_of(&line);
    question.amps = 0.0258;
    assert_int_equal(plw_plate_supply_ask(&single, &question, &a, &error), PLW_OK);
    assert_near(a.volts_error, 2.58, 1e-9, "1 % of the reading");
}

/* The transformer found gives the voltage that was wanted. */
static void a_transformer_is_found(void **state) {
    (void)state;
    plw_supply line;
    plw_supply_answer a;
    plw_error error = {0};
    assert_int_equal(plw_supply_stiff(281.3, &line, &error), PLW_OK);
    plw_plate_supply supply = plw_plate_supply_of(&line);
    supply.has_parts = true;
    supply.parts = usual_parts();
    plw_supply_question question = plw_supply_question_usual(0.0437);
    question.regulation_percent = 17.0;
    assert_int_equal(plw_plate_supply_ask(&supply, &question, &a, &error), PLW_OK);
    assert_true(a.has_transformer && !a.has_state && isnan(a.off_load_volts));
    assert_near(steady_state(&a.transformer.supply, 0.0437, 0.0).volts, 281.3, 1e-3, "the voltage wanted");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(mains_move_the_line),
        cmocka_unit_test(a_reading_implies_a_supply),
        cmocka_unit_test(answer_of_parts),
        cmocka_unit_test(unknown_parts_stay_unknown),
        cmocka_unit_test(a_fitted_bleeder_is_told),
        cmocka_unit_test(a_bleeder_holds_a_choke_input_down),
        cmocka_unit_test(readings_through_the_rectifier),
        cmocka_unit_test(other_kinds),
        cmocka_unit_test(a_transformer_is_found),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
