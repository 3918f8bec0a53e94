/* Self-bias: fixed points of a published triode set, and published bench and teaching cases.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "near.h"
#include "platewright/specimen.h"
#include "unit/stages.h"

/* Koren's coefficients are published; the fixed points were computed from them apart from this program, and are printed
 * to the digits given: the tolerance is half of the last. */
#define KOREN "N. Koren, Glass Audio 8(5), 1996, 2A3 set; fixed point by independent iteration"

static plw_quiescent rest_of(const plw_stage *stage) {
    plw_quiescent q;
    assert_int_equal(plw_quiescent_solve(stage, &q, NULL), PLW_OK);
    return q;
}

static void fixed_points_of_a_2a3_with_750_ohm(void **state) {
    (void)state;
    static const double want[][4] = {/* supply V, mA, cathode V, plate W */
                                     {265.0, 53.19, 39.89, 11.97},
                                     {295.0, 59.62, 44.71, 14.92},
                                     {324.5, 65.98, 49.48, 18.14}};
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_2A3));
    for (size_t row = 0; row < sizeof want / sizeof want[0]; row++) {
        const plw_stage stage = simple_stage(&tube, want[row][0], 2500.0, 750.0, UNKNOWN);
        const plw_quiescent q = rest_of(&stage);
        assert_near(1e3 * q.plate_amps, want[row][1], 0.005, KOREN);
        assert_near(q.cathode_volts, want[row][2], 0.005, KOREN);
        assert_near(q.plate_watts, want[row][3], 0.005, KOREN);
        assert_near(q.grid_volts, -q.cathode_volts, 1e-12, "the grid is returned to the chassis");
        assert_near(q.plate_volts, want[row][0] - q.cathode_volts, 1e-9, "no copper in this stage");
    }
}

/* +10 % mains: about 11 % more current, 21 to 22 % more heat (3/2 law with self-bias). */
static void ten_percent_mains_is_a_fifth_more_heat(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_2A3));
    const plw_stage nominal = simple_stage(&tube, 295.0, 2500.0, 750.0, UNKNOWN);
    const plw_stage high = simple_stage(&tube, 324.5, 2500.0, 750.0, UNKNOWN);
    assert_near(rest_of(&high).plate_watts / rest_of(&nominal).plate_watts, 1.215, 0.005,
                "18.14 W / 14.92 W of the fixed points");
}

/* A tube that draws `milliamps` at `plate_volts` and `grid_volts`: the published 2A3 set, scaled. */
static void tube_through(test_tube *tube, double plate_volts, double grid_volts, double milliamps) {
    make_tube(tube, koren_triode(KOREN_2A3));
    plw_law *law = &tube->tube.model.law;
    plw_law_scale(law, 1e-3 * milliamps / plw_law_plate_amps(law, plate_volts, 0.0, grid_volts));
}

/* 2A3, Receiving Tube Manual, RCA: 250 V, -45 V, 60 mA, 750 ohm; the product is 45.0 V and the heat 2.70 W. */
static void the_printed_resistor_holds_the_printed_point(void **state) {
    (void)state;
    test_tube tube;
    tube_through(&tube, 250.0, -45.0, 60.0);
    const plw_stage stage = simple_stage(&tube, 295.0, 2500.0, 750.0, UNKNOWN);
    const plw_quiescent q = rest_of(&stage);
    assert_near(q.plate_amps, 60e-3, 1e-8, "RCA Receiving Tube Manual, 2A3");
    assert_near(q.cathode_volts, 45.0, 1e-5, "RCA Receiving Tube Manual, 2A3");
    assert_near(q.cathode_resistor_watts, 2.70, 1e-5, "45.0 V x 60 mA");
}

/* RCA Receiving Tube Manual, Installation: the sum of the currents counts; beam tube 250 V, 45 + 4.5 mA, -12.5 V. */
static void the_screens_current_counts(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_law *law = &tube.tube.model.law;
    plw_currents c;
    plw_law_evaluate(law, 250.0, 250.0, -12.5, &c);
    plw_law_scale(law, 49.5e-3 / (c.plate_amps + c.screen_amps));
    const plw_stage stage = simple_stage(&tube, 262.5, 5000.0, 12.5 / 49.5e-3, UNKNOWN);
    const plw_quiescent q = rest_of(&stage);
    assert_near(q.cathode_amps, 49.5e-3, 1e-8, "RCA Receiving Tube Manual: 12.5 V / 49.5 mA = 252.5 ohm");
    assert_near(q.cathode_volts, 12.5, 1e-5, "RCA Receiving Tube Manual: 12.5 V / 49.5 mA = 252.5 ohm");
}

/* A pentode that draws `milliamps` of plate and screen together at equal plate and screen volts. */
static void pentode_through(test_tube *tube, double plate_volts, double grid_volts, double milliamps) {
    make_tube(tube, pentode_law(TEST_BEAM_SMALL));
    plw_law *law = &tube->tube.model.law;
    plw_currents c;
    plw_law_evaluate(law, plate_volts, plate_volts, grid_volts, &c);
    plw_law_scale(law, 1e-3 * milliamps / (c.plate_amps + c.screen_amps));
}

/* RCA's printed resistor of the 6L6 (170 ohm, 75 + 5.4 mA) and Philips' of the EL84 (135 ohm, 48 + 5.5 mA): plate and
 * screen current together make 13.67 V (printed -14 V) and 7.22 V (printed -7.3 V). */
static void both_currents_make_the_printed_bias(void **state) {
    (void)state;
    static const struct {
        double ohms, milliamps, cathode_volts;
        const char *source;
    } cases[] = {{170.0, 80.4, 13.67, "RCA Receiving Tube Manual, 6L6: 170 ohm x 80.4 mA"},
                 {135.0, 53.5, 7.22, "Philips data sheet EL84: 135 ohm x 53.5 mA"}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        const double cathode_volts = 1e-3 * cases[i].ohms * cases[i].milliamps;
        test_tube tube;
        pentode_through(&tube, 250.0, -cathode_volts, cases[i].milliamps);
        const plw_stage stage = simple_stage(&tube, 250.0 + cathode_volts, 5000.0, cases[i].ohms, UNKNOWN);
        const plw_quiescent q = rest_of(&stage);
        assert_near(q.cathode_volts, cases[i].cathode_volts, 0.005, cases[i].source);
        assert_near(1e3 * (q.plate_amps + q.screen_amps), cases[i].milliamps, 1e-5, cases[i].source);
        assert_true(q.screen_amps > 1e-3);
    }
}

/* A printed point of the 300B: 425 V, -93 V, 65 mA: 27.6 W ("28 W"), 1431 ohm. */
static void the_printed_point_wants_1431_ohm(void **state) {
    (void)state;
    static const char *const sheet = "WE data sheet 300B, quoted: 425 V, -93 V, 65 mA";
    test_tube tube;
    tube_through(&tube, 425.0, -93.0, 65.0);
    const plw_stage stage = simple_stage(&tube, 425.0 + 93.0, 3000.0, UNKNOWN, UNKNOWN);
    plw_bias_choice choice;
    assert_int_equal(plw_bias_choose(&stage, (plw_aim){PLW_AIM_CURRENT, 65e-3}, PLW_E192, &choice, NULL), PLW_OK);
    assert_near(choice.exact_ohms, 1431.0, 0.5, sheet);
    plw_stage built = stage;
    built.cathode_resistor_ohms = choice.exact_ohms;
    const plw_quiescent q = rest_of(&built);
    assert_near(q.plate_watts, 27.6, 0.05, sheet);
    assert_near(q.cathode_volts, 93.0, 1e-3, sheet);
}

/* Teaching case from a builders' forum: 250 V, 40 mA, 10 V wants 250 ohm. */
static void the_teaching_case_is_250_ohm(void **state) {
    (void)state;
    test_tube tube;
    tube_through(&tube, 250.0, -10.0, 40.0);
    const plw_stage stage = simple_stage(&tube, 260.0, 5000.0, UNKNOWN, UNKNOWN);
    plw_bias_choice choice;
    assert_int_equal(plw_bias_choose(&stage, (plw_aim){PLW_AIM_CURRENT, 40e-3}, PLW_E24, &choice, NULL), PLW_OK);
    assert_near(choice.exact_ohms, 250.0, 1e-3, "10 V / 40 mA");
}

/* A builder's bench case: two tubes share 220 ohm; 11.6 V across it, plate at 334 V: 52.7 mA, 322.4 V, 8.495 W each
 * (printed from the rounded current: 8.50 exactly). */
static void two_tubes_on_one_resistor(void **state) {
    (void)state;
    test_tube tube;
    tube_through(&tube, 322.4, -11.6, 26.0);
    plw_stage stage = simple_stage(&tube, 334.0, 5000.0, 220.0, UNKNOWN);
    stage.parallel = 2;
    const plw_meter_readings readings = {UNKNOWN, 334.0, UNKNOWN, 11.6};
    plw_specimen specimen;
    assert_int_equal(
        plw_specimen_measure(&stage, &readings, &(plw_aim){PLW_AIM_CURRENT, 30e-3}, PLW_E12, &specimen, NULL), PLW_OK);
    assert_near(2e3 * specimen.cathode_amps, 52.7, 0.05, "11.6 V / 220 ohm, printed 52.7 mA");
    assert_near(specimen.plate_volts, 322.4, 1e-9, "334 V - 11.6 V");
    assert_near(specimen.plate_watts, 8.495, 0.006, "printed 8.495 W, from 52.7 mA rounded");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(fixed_points_of_a_2a3_with_750_ohm),
        cmocka_unit_test(ten_percent_mains_is_a_fifth_more_heat),
        cmocka_unit_test(the_printed_resistor_holds_the_printed_point),
        cmocka_unit_test(the_screens_current_counts),
        cmocka_unit_test(both_currents_make_the_printed_bias),
        cmocka_unit_test(the_printed_point_wants_1431_ohm),
        cmocka_unit_test(the_teaching_case_is_250_ohm),
        cmocka_unit_test(two_tubes_on_one_resistor),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
