/* The bench case: a winding read off load, one loaded reading, and what the supply gives at the stage's current.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "near.h"
#include "platewright/supply_bench.h"

#define CASE "common practice, no source; by the closed form tan th - th = (pi/2) Rs/R, rounded"

/* A winding of 215 V RMS each half with silicon full-wave rectifiers is called 300 V by the 1.414 rule, and gives about
 * 258 V across 10 kOhm.  The conducting path is about 0.4 kOhm for a large reservoir (closed form: 418 ohm with ideal
 * diodes), where the straight line through the off-load peak claims 1.8 kOhm; at 45 mA it gives about 238 V, where the
 * straight line says 224 V. */
static void one_loaded_reading(void **state) {
    (void)state;
    const plw_rectifier described = {
        .winding_rms_volts = 215, .mains_hertz = 50, .diode = plw_diode_silicon(), .reservoir_farads = 220e-6};
    const plw_bench_reading reading = {258, 10e3, 0};
    const plw_reading_errors errors = plw_reading_errors_usual();
    plw_source_estimate got;
    plw_error error = {0};
    assert_int_equal(plw_source_from_readings(&described, &reading, 1, &errors, &got, &error), PLW_OK);
    assert_near(got.path_ohms, 400, 50, CASE);
    double volts, volts_error, line_volts, line_ohms;
    assert_int_equal(plw_source_predict(&got, 0.045, &volts, &volts_error, &error), PLW_OK);
    assert_near(volts, 238, 0.5, CASE);
    /* 1 % of the winding and 1 % of the reading: what they allow at 45 mA, by redoing the closed form with each moved.
     */
    assert_near(volts_error, 4.4, 0.5, "closed form with winding, reading and load moved by 1 % in turn");
    const plw_reading through_peak[] = {{sqrt(2.0) * 215, 0}, {258, 0.0258}};
    plw_supply straight;
    assert_int_equal(plw_supply_readings(through_peak, 2, &straight, &error), PLW_OK);
    plw_supply_at(&straight, 0.045, &line_volts, &line_ohms);
    assert_near(line_volts, 224, 0.5, CASE);
    assert_near(line_ohms, 1800, 50, CASE);
}

/* The same with ideal diodes and a boundless reservoir is the closed form itself. */
static void ideal_case_is_the_closed_form(void **state) {
    (void)state;
    const double pi = 3.14159265358979323846, peak = 215 * sqrt(2.0), th = acos(258 / peak);
    const double ohms = 10e3 * (tan(th) - th) * 2 / pi;
    const plw_rectifier described = {.winding_rms_volts = 215, .mains_hertz = 50, .reservoir_farads = 1};
    const plw_bench_reading reading = {258, 10e3, 0};
    const plw_reading_errors errors = plw_reading_errors_usual();
    plw_source_estimate got;
    plw_error error = {0};
    assert_int_equal(plw_source_from_readings(&described, &reading, 1, &errors, &got, &error), PLW_OK);
    assert_near(got.path_ohms, ohms, 0.02, "tan th - th = (pi/2) Rs/R");
}

/* Regulation of a 300 V RMS, 150 ohm source with a boundless reservoir: worked from Vdc = Vp cos th and
 * Idc = (2 Vp / (pi Rs)) (sin th - th cos th), printed to 0.1 V. */
static void two_thirds_law_table(void **state) {
    (void)state;
    const double rows[][2] = {{0, 424.3}, {0.02, 402.3}, {0.04, 389.5}, {0.06, 378.7}, {0.08, 369.2}, {0.1, 360.4}};
    const plw_rectifier supply = {.winding_rms_volts = 300, .path_ohms = 150, .mains_hertz = 50, .reservoir_farads = 1};
    plw_supply line;
    plw_error error = {0};
    assert_int_equal(plw_rectifier_line(&supply, 0.1, &line, &error), PLW_OK);
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        double volts, ohms;
        plw_supply_at(&line, rows[i][0], &volts, &ohms);
        assert_near(volts, rows[i][1], 0.06, "closed form, printed to 0.1 V");
    }
}

/* Dummy load for that supply at 45 mA: 238 V / 45 mA = 5.3 kOhm. */
static void dummy_load_of_the_case(void **state) {
    (void)state;
    const plw_rectifier supply = {.winding_rms_volts = 215,
                                  .path_ohms = 410,
                                  .mains_hertz = 50,
                                  .diode = plw_diode_silicon(),
                                  .reservoir_farads = 220e-6};
    plw_supply line;
    plw_dummy_load load;
    plw_error error = {0};
    assert_int_equal(plw_rectifier_line(&supply, 0.09, &line, &error), PLW_OK);
    assert_int_equal(plw_dummy_load_for(&line, 0.045, PLW_E24, 2, &load, &error), PLW_OK);
    assert_near(load.exact_ohms, 238 / 0.045, 15, CASE);
    assert_near(load.ohms, 5100, 1e-9, "IEC 60063, E24: 5.1 is nearer to 5.28 than 5.6 by ratio");
    plw_rectifier_state across;
    const plw_dc_load resistor = {.ohms = 5100};
    assert_int_equal(plw_rectifier_steady(&supply, resistor, &across, &error), PLW_OK);
    assert_near(load.expected_volts, across.volts, 0.02, "the steady state into the resistor itself");
    assert_near(load.rating_watts, 25, 0, "11.1 W with twice the margin");
}

/* Bleeder: 47 uF, 220 kOhm, 400 V to 60 V in 19.6 s, 0.727 W. */
static void bleeder_of_practice(void **state) {
    (void)state;
    const plw_rectifier supply = {.winding_rms_volts = 283, .mains_hertz = 50, .reservoir_farads = 47e-6};
    plw_bleeder bleeder;
    plw_error error = {0};
    assert_int_equal(plw_bleeder_for(&supply, 400, 20, PLW_E12, 2, &bleeder, &error), PLW_OK);
    assert_near(bleeder.ohms, 220e3, 1e-6, "R C ln(V/60), E12");
    assert_near(bleeder.seconds_to_60_volts, 19.6, 0.05, "R C ln(V/60)");
    assert_near(bleeder.watts, 0.727, 5e-4, "V^2 / R");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(one_loaded_reading),   cmocka_unit_test(ideal_case_is_the_closed_form),
        cmocka_unit_test(two_thirds_law_table), cmocka_unit_test(dummy_load_of_the_case),
        cmocka_unit_test(bleeder_of_practice),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
