/* Source resistance from readings, dummy load, bleeder, wanted transformer, ratings: identities and every error.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "platewright/supply_bench.h"
#include "platewright/supply_limits.h"
#include "platewright/transformer.h"
#include "unit/supplies.h"

static plw_rectifier example(void) {
    plw_rectifier supply = usual_rectifier(238.5, 163);
    supply.diode = plw_diode_vacuum(20, 0.15);
    supply.sections = 1;
    supply.section[0] = (plw_filter_section){7.5, 190, 33e-6};
    return supply;
}

static double output(const plw_rectifier *supply, double amps, double ohms) {
    return steady_state(supply, amps, ohms).volts;
}

static plw_status estimate_of(const plw_rectifier *supply, const plw_bench_reading *readings, size_t count,
                              plw_source_estimate *estimate, plw_error *error) {
    const plw_reading_errors errors = plw_reading_errors_usual();
    return plw_source_from_readings(supply, readings, count, &errors, estimate, error);
}

/* ---- source resistance ------------------------------------------------------------------------------------------- */

/* Readings computed from a known resistance give it back, however many there are. */
static void known_resistance_comes_back(void **state) {
    (void)state;
    const plw_rectifier supply = example();
    const plw_bench_reading readings[] = {{output(&supply, 0, 10e3), 10e3, 0},
                                          {output(&supply, 0.0417, 0), 0, 0.0417},
                                          {output(&supply, 0, 0), 0, 0},
                                          {output(&supply, 0, 4700), 4700, 0}};
    double last_error = (double)INFINITY;
    for (size_t count = 1; count <= 4; count++) {
        plw_source_estimate got;
        plw_error error = {0};
        assert_int_equal(estimate_of(&supply, readings, count, &got, &error), PLW_OK);
        assert_near(got.path_ohms, 163, 0.02, "the resistance the readings were computed with");
        assert_near(got.winding_rms_volts, 238.5, 2e-3, "the winding they were computed with");
        assert_near(got.worst_misfit, 0, 1e-4, "readings without error");
        assert_false(got.none_found);
        assert_true(got.path_ohms_error > 0 && got.path_ohms_error <= last_error * 1.0001);
        last_error = got.path_ohms_error;
        double volts, volts_error;
        assert_int_equal(plw_source_predict(&got, 0.0333, &volts, &volts_error, &error), PLW_OK);
        assert_near(volts, output(&supply, 0.0333, 0), 0.01, "the supply itself");
        assert_true(volts_error > 0.5 && volts_error < 6);
    }
}

/* One reading of 1 % moved up by 1 %: the prediction there moves with it, and the stated error covers that. */
static void errors_carry_over(void **state) {
    (void)state;
    const plw_rectifier supply = example();
    const double volts = output(&supply, 0.0417, 0);
    const plw_bench_reading exact = {volts, 0, 0.0417}, high = {volts * 1.01, 0, 0.0417};
    plw_source_estimate one, other;
    plw_error error = {0};
    const plw_reading_errors errors = {1, 1e-3, 0}; /* the winding is known */
    assert_int_equal(plw_source_from_readings(&supply, &exact, 1, &errors, &one, &error), PLW_OK);
    assert_int_equal(plw_source_from_readings(&supply, &high, 1, &errors, &other, &error), PLW_OK);
    assert_near(one.path_ohms - other.path_ohms, one.path_ohms_error, 0.03 * one.path_ohms_error, "linear error");
    double predicted, predicted_error;
    assert_int_equal(plw_source_predict(&one, 0.0417, &predicted, &predicted_error, &error), PLW_OK);
    assert_near_relative(predicted_error, 0.01 * volts, 0.01, "at the reading itself its own error stands");
}

/* Nothing but DC readings: one off load stands for the winding. */
static void winding_not_read(void **state) {
    (void)state;
    plw_rectifier supply = example();
    const plw_bench_reading readings[] = {{output(&supply, 0, 0), 0, 0}, {output(&supply, 0, 6800), 6800, 0}};
    supply.winding_rms_volts = 0;
    plw_source_estimate got;
    plw_error error = {0};
    assert_int_equal(estimate_of(&supply, readings, 2, &got, &error), PLW_OK);
    assert_near(got.winding_rms_volts, 238.5, 1e-3, "peak over root two");
    assert_near(got.path_ohms, 163, 0.02, "the resistance the readings were computed with");
    supply.winding_rms_volts = (double)NAN;
    assert_int_equal(estimate_of(&supply, readings + 1, 1, &got, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "off load"));
}

/* A supply stiffer than its readings can tell: bound at zero, and said so. */
static void stiff_supply_is_bound_at_zero(void **state) {
    (void)state;
    plw_rectifier supply = example();
    supply.path_ohms = 0;
    const double volts = output(&supply, 0.02, 0);
    const plw_bench_reading readings[] = {{volts * 1.006, 0, 0.02}};
    plw_source_estimate got;
    plw_error error = {0};
    assert_int_equal(estimate_of(&supply, readings, 1, &got, &error), PLW_OK);
    assert_true(got.none_found);
    assert_near(got.path_ohms, 0, 0, "bound");
    assert_true(got.path_ohms_error > 10);
}

static void refuse_readings(const plw_bench_reading *readings, size_t count, const char *text) {
    const plw_rectifier supply = example();
    plw_source_estimate got;
    plw_error error = {0};
    assert_int_equal(estimate_of(&supply, readings, count, &got, &error), PLW_E_USAGE);
    if (strstr(error.text, text) == NULL) {
        fail_msg("'%s' does not say '%s'", error.text, text);
    }
}

static void contradictions_are_named(void **state) {
    (void)state;
    const plw_bench_reading above[] = {{344, 10e3, 0}};
    refuse_readings(above, 1, "above the off-load peak");
    const plw_bench_reading not_belonging[] = {{398, 0, 0}, {280, 10e3, 0}};
    refuse_readings(not_belonging, 2, "does not belong");
    const plw_bench_reading rising[] = {{270, 10e3, 0}, {300, 5e3, 0}};
    refuse_readings(rising, 2, "negative");
    const plw_bench_reading apart[] = {{290, 10e3, 0}, {285, 0, 0.035}, {190, 0, 0.04}};
    refuse_readings(apart, 3, "fits them all");
    const plw_bench_reading stiffer[] = {{336, 0, 0.09}};
    refuse_readings(stiffer, 1, "negative");
    const plw_bench_reading unloaded[] = {{335, 0, 0}};
    refuse_readings(unloaded, 1, "none is loaded");
    const plw_bench_reading no_volts[] = {{0, 10e3, 0}};
    refuse_readings(no_volts, 1, "positive voltage");
    const plw_bench_reading no_ohms[] = {{258, -10e3, 0}};
    refuse_readings(no_ohms, 1, "resistor or current");
    const plw_bench_reading no_amps[] = {{258, 0, (double)NAN}};
    refuse_readings(no_amps, 1, "resistor or current");
    refuse_readings(NULL, 3, "1 to");
    refuse_readings(above, 0, "1 to");
    refuse_readings(above, PLW_READINGS_MOST + 1, "1 to");
    plw_rectifier supply = example();
    plw_source_estimate got;
    plw_error error = {0};
    const plw_bench_reading good = {258, 10e3, 0};
    const plw_reading_errors none = {0, 1, 1};
    assert_int_equal(plw_source_from_readings(&supply, &good, 1, &none, &got, &error), PLW_E_USAGE);
    supply.mains_hertz = 0;
    assert_int_equal(estimate_of(&supply, &good, 1, &got, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "mains"));
}

/* ---- dummy load -------------------------------------------------------------------------------------------------- */

static void dummy_load_draws_what_it_should(void **state) {
    (void)state;
    plw_supply supply;
    plw_error error = {0};
    assert_int_equal(plw_supply_source(304.6, 1783, &supply, &error), PLW_OK);
    plw_dummy_load load;
    assert_int_equal(plw_dummy_load_for(&supply, 0.0453, PLW_E12, 2, &load, &error), PLW_OK);
    assert_near(load.exact_ohms, (304.6 - 1783 * 0.0453) / 0.0453, 1e-9, "Ohm's law");
    assert_near(load.ohms, 4700, 1e-9, "E12 about 4941 ohm");
    assert_near(load.expected_volts, 304.6 * 4700 / (4700 + 1783), 1e-9, "voltage divider");
    assert_near(load.amps, load.expected_volts / 4700, 1e-15, "Ohm's law");
    assert_near(load.watts, load.expected_volts * load.expected_volts / 4700, 1e-12, "Ohm's law");
    assert_true(load.rating_watts >= 2 * load.watts);
    assert_true(isinf(load.seconds_on));
    double volts, amps;
    assert_int_equal(plw_rectifier_line(&(plw_rectifier){.winding_rms_volts = 215,
                                                         .path_ohms = 410,
                                                         .mains_hertz = 50,
                                                         .diode = plw_diode_silicon(),
                                                         .reservoir_farads = 100e-6},
                                        0.07, &supply, &error),
                     PLW_OK);
    assert_int_equal(plw_supply_into(&supply, 10e3, &volts, &amps, &error), PLW_OK);
    double there, slope;
    plw_supply_at(&supply, amps, &there, &slope);
    assert_near(volts, there, 1e-9, "on the line");
    assert_near(volts, amps * 10e3, 1e-9, "and on the resistor's");
}

static void dummy_load_errors(void **state) {
    (void)state;
    plw_supply supply;
    plw_error error = {0};
    plw_dummy_load load;
    double volts, amps;
    assert_int_equal(plw_supply_source(304.6, 1783, &supply, &error), PLW_OK);
    assert_int_equal(plw_dummy_load_for(&supply, 0, PLW_E12, 2, &load, &error), PLW_E_USAGE);
    assert_int_equal(plw_dummy_load_for(&supply, 0.045, PLW_E12, 0.5, &load, &error), PLW_E_USAGE);
    assert_int_equal(plw_dummy_load_for(&supply, 0.2, PLW_E12, 2, &load, &error), PLW_E_NO_POINT);
    assert_int_equal(plw_supply_into(&supply, 0, &volts, &amps, &error), PLW_E_USAGE);
    assert_int_equal(plw_supply_into(&supply, (double)INFINITY, &volts, &amps, &error), PLW_E_USAGE);
}

static void overloaded_resistor(void **state) {
    (void)state;
    assert_near(plw_resistor_seconds(50, 10), 5, 1e-12, "five times for five seconds");
    assert_near(plw_resistor_seconds(30, 10), 10, 1e-12, "half the excess, twice the time");
    assert_true(isinf(plw_resistor_seconds(9.7, 10)));
    assert_true(isnan(plw_resistor_seconds(-1, 10)));
    assert_true(isnan(plw_resistor_seconds(1, 0)));
}

/* ---- bleeder ----------------------------------------------------------------------------------------------------- */

static void bleeder_brings_it_down(void **state) {
    (void)state;
    plw_rectifier supply = example();
    supply.sections = 0;
    supply.bleeder_ohms = 220e3;
    assert_near(plw_discharge_seconds(&supply, 400, 60), 19.6, 0.05, "47 uF, 220 kohm, 400 V: R C ln(V/60) = 19.6 s");
    assert_near(plw_discharge_seconds(&supply, 59, 60), 0, 0, "already there");
    assert_true(isnan(plw_discharge_seconds(&supply, -1, 60)));
    supply.bleeder_ohms = 0;
    assert_true(isinf(plw_discharge_seconds(&supply, 400, 60)));
    supply = example();
    plw_bleeder bleeder;
    plw_error error = {0};
    assert_int_equal(plw_bleeder_for(&supply, 371, 25, PLW_E12, 2, &bleeder, &error), PLW_OK);
    assert_true(bleeder.seconds_to_60_volts <= 25);
    assert_near(bleeder.watts, 371 * 371 / bleeder.ohms, 1e-12, "Ohm's law");
    assert_true(bleeder.rating_watts >= 2 * bleeder.watts);
    supply.bleeder_ohms = plw_preferred_step(bleeder.ohms, 1, PLW_E12);
    assert_true(plw_discharge_seconds(&supply, 371, 60) > 25);
    assert_int_equal(plw_bleeder_for(&supply, 371, 1e-3, PLW_E12, 2, &bleeder, &error), PLW_E_NO_POINT);
    assert_int_equal(plw_bleeder_for(&supply, 0, 25, PLW_E12, 2, &bleeder, &error), PLW_E_USAGE);
    assert_int_equal(plw_bleeder_for(&supply, 371, 0, PLW_E12, 2, &bleeder, &error), PLW_E_USAGE);
    assert_int_equal(plw_bleeder_for(&supply, 371, 25, PLW_E12, 0.9, &bleeder, &error), PLW_E_USAGE);
    assert_int_equal(plw_bleeder_for(&supply, 48, 25, PLW_E12, 2, &bleeder, &error), PLW_OK);
    assert_near(bleeder.seconds_to_60_volts, 0, 0, "below 60 V from the start");
    assert_true(isinf(bleeder.ohms));
}

/* ---- transformer ------------------------------------------------------------------------------------------------- */

static void transformer_gives_what_is_wanted(void **state) {
    (void)state;
    const plw_rectifier_connection connections[] = {PLW_FULL_WAVE, PLW_BRIDGE, PLW_HALF_WAVE};
    for (size_t i = 0; i < 3; i++) {
        plw_rectifier supply = example();
        supply.connection = connections[i];
        supply.diode = i == 0 ? supply.diode : plw_diode_silicon();
        plw_transformer got;
        plw_error error = {0};
        assert_int_equal(plw_transformer_for(&supply, 285, 0.0613, 12, &got, &error), PLW_OK);
        assert_near(output(&got.supply, 0.0613, 0), 285, 1e-4, "wanted");
        const double drop = got.off_load_rms_volts - got.rated_rms_volts;
        assert_near_relative(drop, 0.12 * got.rated_rms_volts, 1e-9, "definition of the regulation");
        assert_near_relative(got.path_ohms * got.rms_amps, drop, 1e-6, "drop of the RMS current in the copper");
        assert_near_relative(got.secondary_va, (i == 0 ? 2 : 1) * got.rated_rms_volts * got.rms_amps, 1e-12, "VA");
        assert_true(got.usual_below <= got.rated_rms_volts && got.usual_above > got.rated_rms_volts);
        assert_true(got.usual_rms_volts >= got.usual_below && got.usual_rms_volts <= got.usual_above);
        plw_rectifier usual = got.supply;
        usual.winding_rms_volts *= got.usual_rms_volts / got.rated_rms_volts;
        usual.path_ohms *= got.usual_rms_volts / got.rated_rms_volts;
        assert_near(output(&usual, 0.0613, 0), got.usual_volts, 1e-6, "the usual winding");
    }
}

static void transformer_errors(void **state) {
    (void)state;
    plw_rectifier supply = example();
    plw_transformer got;
    plw_error error = {0};
    assert_int_equal(plw_transformer_for(&supply, 0, 0.06, 12, &got, &error), PLW_E_USAGE);
    assert_int_equal(plw_transformer_for(&supply, 285, -0.06, 12, &got, &error), PLW_E_USAGE);
    assert_int_equal(plw_transformer_for(&supply, 285, 0.06, 0, &got, &error), PLW_E_USAGE);
    assert_int_equal(plw_transformer_for(&supply, 285, 0.06, 101, &got, &error), PLW_E_USAGE);
    supply.reservoir_farads = -1;
    assert_int_equal(plw_transformer_for(&supply, 285, 0.06, 12, &got, &error), PLW_E_USAGE);
    size_t count;
    const double *usual = plw_usual_secondaries(&count);
    for (size_t i = 1; i < count; i++) {
        assert_true(usual[i] > usual[i - 1]);
    }
}

/* ---- ratings ----------------------------------------------------------------------------------------------------- */

static const plw_supply_check *find(const plw_supply_check *checks, size_t count, const char *name, int node) {
    for (size_t i = 0; i < count; i++) {
        if (strcmp(checks[i].name, name) == 0 && checks[i].node == node) {
            return &checks[i];
        }
    }
    fail_msg("no check '%s' of node %d", name, node);
    return NULL;
}

static void ratings_are_compared(void **state) {
    (void)state;
    const plw_rectifier supply = example();
    const plw_rectifier_state steady = steady_state(&supply, 0.08, 0);
    plw_supply_ratings ratings = plw_supply_ratings_unknown();
    plw_supply_check checks[PLW_SUPPLY_CHECKS_MOST];
    size_t count;
    assert_true(plw_supply_limits_check(&supply, &steady, &ratings, checks, &count));
    assert_int_equal(count, 0);
    const plw_rectifier_data data = {.peak_inverse_volts = 1000,
                                     .peak_plate_amps = 0.45,
                                     .output_amps = 0.15,
                                     .plate_rms_volts = 350,
                                     .least_supply_ohms = 230,
                                     .most_reservoir_farads = 50e-6};
    ratings = plw_supply_ratings_of(&data);
    ratings.capacitor_volts[0] = 385;
    ratings.capacitor_volts[1] = 350;
    ratings.ripple_amps[0] = 0.3;
    ratings.winding_rms_amps = 0.1;
    ratings.heater_amps = 1.45;
    ratings.heater_winding_amps = 2;
    assert_false(plw_supply_limits_check(&supply, &steady, &ratings, checks, &count));
    const double peak = sqrt(2.0) * 238.5;
    const plw_supply_check *check = find(checks, count, "rectifier peak inverse", -1);
    assert_near(check->value, 2 * peak * 1.1, 1e-9, "twice the peak at 110 % mains");
    assert_true(check->ok && check->when == PLW_SUPPLY_OFF_LOAD_HIGH);
    check = find(checks, count, "capacitor voltage, cold tubes", 0);
    assert_near(check->value, 1.1 * peak, 1e-9, "peak at 110 % mains");
    assert_near(check->share_percent, 110 * peak / 385, 1e-9, "value over limit");
    assert_true(check->ok);
    assert_false(find(checks, count, "capacitor voltage, cold tubes", 1)->ok);
    check = find(checks, count, "rectifier source resistance", -1);
    assert_near(check->limit, 230 * 238.5 / 350, 1e-9, "in proportion to the winding");
    assert_true(check->ok && check->at_least);
    assert_true(find(checks, count, "rectifier reservoir", -1)->ok);
    assert_true(find(checks, count, "rectifier plate voltage, RMS", -1)->ok);
    assert_near(find(checks, count, "rectifier output current", -1)->value, 0.08, 1e-12, "all of it");
    assert_true(find(checks, count, "capacitor ripple current", 0)->ok);
    assert_true(find(checks, count, "heater winding current", -1)->ok);
    check = find(checks, count, "winding current, RMS", -1);
    assert_near(check->value, steady.winding_rms_amps, 0, "of the steady state");
}

static void silicon_ratings(void **state) {
    (void)state;
    plw_rectifier supply = example();
    supply.diode = plw_diode_silicon();
    supply.connection = PLW_BRIDGE;
    supply.path_ohms = 4;
    const plw_rectifier_state steady = steady_state(&supply, 0.08, 0);
    plw_supply_ratings ratings = plw_supply_ratings_silicon();
    plw_supply_check checks[PLW_SUPPLY_CHECKS_MOST];
    size_t count;
    assert_false(plw_supply_limits_check(&supply, &steady, &ratings, checks, &count));
    const plw_supply_check *check = find(checks, count, "rectifier surge at switching on", -1);
    assert_near(check->value, sqrt(2.0) * 238.5 * 1.1 / (4 + 0.46), 1e-9, "peak over the path, empty reservoir");
    assert_false(check->ok);
    check = find(checks, count, "rectifier peak inverse", -1);
    assert_near(check->value, (sqrt(2.0) * 238.5 - 1.4) * 1.1, 1e-9, "a bridge's diode stands the output");
    assert_true(check->ok);
}

static void choke_is_judged(void **state) {
    (void)state;
    plw_rectifier supply = example();
    supply.reservoir_farads = 0;
    const plw_supply_ratings ratings = plw_supply_ratings_unknown();
    const double amps[] = {0.08, 0.01};
    for (size_t i = 0; i < 2; i++) {
        const plw_rectifier_state steady = steady_state(&supply, amps[i], 0);
        plw_supply_check checks[PLW_SUPPLY_CHECKS_MOST];
        size_t count;
        assert_int_equal(plw_supply_limits_check(&supply, &steady, &ratings, checks, &count), i == 0);
        const plw_supply_check *check = find(checks, count, "choke inductance", -1);
        assert_int_equal(check->ok, i == 0);
        assert_int_equal(check->ok, steady.choke_least_amps > 0);
        const double formula =
            plw_critical_henries(50, steady.node[0].volts + amps[i] * supply.section[0].ohms, amps[i]);
        assert_near_relative(check->limit, formula, 0.25, "second harmonic alone; the fourth and on add some");
    }
    assert_near(plw_critical_henries(60, 300, 0.1), 3000 / (3 * 2 * 3.14159265358979 * 60), 1e-9, "R / (3 w)");
    assert_true(isnan(plw_critical_henries(0, 300, 0.1)));
    assert_true(isnan(plw_critical_henries(60, 300, 0)));
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(known_resistance_comes_back),
        cmocka_unit_test(errors_carry_over),
        cmocka_unit_test(winding_not_read),
        cmocka_unit_test(stiff_supply_is_bound_at_zero),
        cmocka_unit_test(contradictions_are_named),
        cmocka_unit_test(dummy_load_draws_what_it_should),
        cmocka_unit_test(dummy_load_errors),
        cmocka_unit_test(overloaded_resistor),
        cmocka_unit_test(bleeder_brings_it_down),
        cmocka_unit_test(transformer_gives_what_is_wanted),
        cmocka_unit_test(transformer_errors),
        cmocka_unit_test(ratings_are_compared),
        cmocka_unit_test(silicon_ratings),
        cmocka_unit_test(choke_is_judged),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
