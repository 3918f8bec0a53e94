/* How far an answer may be off: tubes drawn at random lie where it says, feedback by the cathode narrows it, and what
 * counts most is named.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/uncertainty.h"

#include "unit/solved.h"
#include "unit/stages.h"

/* left_out in percent at which the law's error equals the spread of tubes: a median is 0.6745 standard deviations */
#define EVEN_PERCENT (100.0 * PLW_TUBE_SPREAD * 0.6745)

static plw_uncertainty estimate_on(const plw_stage *stage, double supply_volts_error) {
    const solved s = solve(stage);
    plw_uncertainty u;
    plw_error error = {0};
    if (plw_uncertainty_estimate(stage, &s.rest, &s.signal, supply_volts_error, &u, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return u;
}

static plw_uncertainty estimate(const plw_stage *stage) {
    return estimate_on(stage, 0.0);
}

/* The errors of the fit and the region of the data, as a tube file has them. */
static void trust(test_tube *tube, double left_out_current, double left_out_power) {
    tube->tube.model.fit_error = (plw_model_errors){1.3, 4.1, 2.7, 0.6};
    tube->tube.model.left_out_error = (plw_model_errors){left_out_current, 6.3, left_out_power, 0.9};
    tube->tube.model.rows_fitted = 3;
    tube->tube.model.region = (plw_region){180.0, 450.0, 180.0, 320.0, 0.02, 0.08};
}

/* A normal deviate as the sum of twelve even ones less six: mean 0, standard deviation 1. */
static double random_normal(random_source *r) {
    double sum = -6.0;
    for (int part = 0; part < 12; part++) {
        sum += random_part(r);
    }
    return sum;
}

static plw_stage beam_stage(test_tube *tube, bool cathode_bias) {
    make_tube(tube, pentode_law(TEST_BEAM_SMALL));
    trust(tube, 3.7, 5.3);
    return simple_stage(tube, 263.0, 5.1e3, cathode_bias ? 270.0 : UNKNOWN, cathode_bias ? UNKNOWN : -12.3);
}

/* ---- tubes drawn at random --------------------------------------------------------------------------------------- */

enum { DRAWN = 2000, FIGURES = 4 };

/* What the tubes of a type do, and what the law does where it is off by as much, both carried through the circuit. */
static void drawn_tubes_lie_where_it_says(void **state) {
    (void)state;
    test_tube bogey;
    for (int cathode_bias = 0; cathode_bias < 2; cathode_bias++) {
        const plw_stage stage = beam_stage(&bogey, cathode_bias != 0);
        const solved middle = solve(&stage);
        const plw_uncertainty u = estimate(&stage);
        const double deviation[FIGURES] = {u.plate_amps.all, u.plate_watts.all, u.cathode_volts.all,
                                           u.speaker_watts.tubes};
        const double model = u.model_percent / 100.0;
        double squares[FIGURES] = {0.0};
        int inside = 0;
        random_source r = {20251103};
        for (int number = 0; number < DRAWN; number++) {
            test_tube drawn = bogey;
            plw_stage other = stage;
            other.tube = &drawn.tube;
            const double factor = 1.0 + PLW_TUBE_SPREAD * random_normal(&r);
            plw_law_scale(&drawn.tube.model.law, factor);
            const solved by_tube = solve(&other);
            plw_law_scale(&drawn.tube.model.law, 1.0 + model * random_normal(&r));
            const solved by_both = solve(&other);
            const double off[FIGURES] = {by_both.rest.plate_amps - middle.rest.plate_amps,
                                         by_both.rest.plate_watts - middle.rest.plate_watts,
                                         by_both.rest.cathode_volts - middle.rest.cathode_volts,
                                         by_tube.signal.speaker_watts - middle.signal.speaker_watts};
            for (int figure = 0; figure < FIGURES; figure++) {
                squares[figure] += off[figure] * off[figure] / DRAWN;
            }
            inside += fabs(off[0]) <= deviation[0] ? 1 : 0;
        }
        for (int figure = 0; figure < FIGURES; figure++) {
            if (figure == 2 && cathode_bias == 0) {
                assert_near(deviation[figure], 0.0, 1e-12, "a fixed bias holds the cathode at the chassis");
                continue;
            }
            /* A standard deviation of 2000 draws is known to 1/sqrt(4000), 1.6 %, three of which are 5 %; as much again
             * for the bend of the circuit over two deviations either way. */
            assert_near_relative(sqrt(squares[figure]), deviation[figure], 0.10, "spread of drawn tubes");
        }
        /* 68.3 % of a normal spread, known to 1 % by 2000 draws. */
        assert_in_range(inside, (int)(0.65 * DRAWN), (int)(0.72 * DRAWN));
    }
}

/* ---- feedback ---------------------------------------------------------------------------------------------------- */

static void fixed_bias_passes_the_spread_on(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = beam_stage(&tube, false);
    const solved s = solve(&stage);
    const plw_uncertainty u = estimate(&stage);
    assert_near_relative(u.plate_amps.tubes, PLW_TUBE_SPREAD * s.rest.plate_amps, 1e-7,
                         "stiff supply, no copper: the current is in proportion to the tube");
    assert_near_relative(u.plate_amps.all, hypot(u.plate_amps.tubes, u.plate_amps.model), 1e-12, "by squares");
    assert_near_relative(u.plate_amps.model / u.plate_amps.tubes, u.model_percent / 100.0 / PLW_TUBE_SPREAD, 1e-12,
                         "the law's error acts as a spread of its size");
}

/* By how much the plate current follows the strength of the tube, a part in a thousand either way. */
static double slope_by_tube(const plw_stage *stage) {
    double amps[2];
    for (int side = 0; side < 2; side++) {
        plw_tube tube = *stage->tube;
        plw_law_scale(&tube.model.law, side == 0 ? 0.999 : 1.001);
        plw_stage other = *stage;
        other.tube = &tube;
        amps[side] = solve(&other).rest.plate_amps;
    }
    return (amps[1] - amps[0]) / 0.002;
}

/* dI = s I / (1 + Rk (gm + 1/rp)) for a triode on a stiff supply: the cathode follows the current. */
static void a_cathode_resistor_narrows_the_spread(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_300B));
    trust(&tube, 3.7, 5.3);
    const plw_stage resistor = simple_stage(&tube, 397.0, 3e3, 850.0, UNKNOWN);
    const solved s = solve(&resistor);
    const plw_uncertainty narrowed = estimate(&resistor);
    const double feedback = 1.0 + 850.0 * (s.rest.gm_siemens + 1.0 / s.rest.plate_resistance_ohms);
    assert_near_relative(slope_by_tube(&resistor), s.rest.plate_amps / feedback, 1e-5, "feedback");
    /* Half the difference of two solutions 14 % off either way, where the formula has the slope: of the third order,
     * a part of 0.14 squared. */
    const double bend = PLW_TUBE_SPREAD * PLW_TUBE_SPREAD;
    assert_near_relative(narrowed.plate_amps.tubes, PLW_TUBE_SPREAD * s.rest.plate_amps / feedback, bend, "feedback");
    assert_near_relative(narrowed.cathode_volts.tubes, 850.0 * narrowed.plate_amps.tubes, 1e-7, "Ohm's law");
    const plw_stage fixed = simple_stage(&tube, s.rest.plate_volts, 3e3, UNKNOWN, s.rest.grid_volts);
    const plw_uncertainty whole = estimate(&fixed);
    assert_near_relative(whole.plate_amps.tubes / narrowed.plate_amps.tubes, feedback, bend, "the same point of rest");
    assert_true(narrowed.plate_watts.all < whole.plate_watts.all);
}

/* ---- what counts most -------------------------------------------------------------------------------------------- */

static void the_larger_of_the_two_is_named(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = beam_stage(&tube, true);
    trust(&tube, 0.99 * EVEN_PERCENT, 5.3);
    const plw_uncertainty by_tubes = estimate(&stage);
    assert_int_equal(by_tubes.dominant, PLW_BY_TUBES);
    assert_near_relative(by_tubes.model_percent, 99.0 * PLW_TUBE_SPREAD, 1e-9, "median to standard deviation");
    trust(&tube, 1.01 * EVEN_PERCENT, 5.3);
    const plw_uncertainty by_model = estimate(&stage);
    assert_int_equal(by_model.dominant, PLW_BY_MODEL);
    assert_true(by_model.plate_amps.model > by_model.plate_amps.tubes);
    assert_near_relative(by_model.plate_amps.tubes, by_tubes.plate_amps.tubes, 1e-12, "the tubes are the same");
}

static void rows_left_out_count_before_rows_fitted(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = beam_stage(&tube, true);
    trust(&tube, 3.7, 5.3);
    const plw_uncertainty tried = estimate(&stage);
    assert_near_relative(tried.model_percent, 3.7 / 0.6745, 1e-9, "left-out error");
    trust(&tube, 0.2, 5.3); /* no printed table is as good as that */
    assert_near_relative(estimate(&stage).model_percent, 2.0, 1e-9, "rounding of the tables");
    trust(&tube, UNKNOWN, 5.3); /* a single row: nothing could be left out */
    assert_near_relative(estimate(&stage).model_percent, 5.0, 1e-9, "untried");
    tube.tube.model.fit_error.plate_current_percent = 7.1;
    assert_near_relative(estimate(&stage).model_percent, 7.1 / 0.6745, 1e-9, "a bad fit, untried");
    tube.tube.model.fit_error.plate_current_percent = UNKNOWN;
    assert_near_relative(estimate(&stage).model_percent, 5.0, 1e-9, "nothing known of the fit");
    tube.tube.model.rows_fitted = 0; /* a point or two */
    assert_near_relative(estimate(&stage).model_percent, 10.0, 1e-9, "no row at all");
}

/* The law's own error of power comes on top of what a stronger tube does to it. */
static void the_error_of_power_is_counted(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = beam_stage(&tube, true);
    const solved s = solve(&stage);
    trust(&tube, 3.7, 5.3);
    const plw_uncertainty u = estimate(&stage);
    trust(&tube, 3.7, 11.9);
    const plw_uncertainty worse = estimate(&stage);
    const double watts = s.signal.speaker_watts / 67.45;
    assert_near_relative(worse.speaker_watts.model * worse.speaker_watts.model -
                             u.speaker_watts.model * u.speaker_watts.model,
                         watts * watts * (11.9 * 11.9 - 5.3 * 5.3), 1e-6, "by squares");
}

/* Volts more or less of the supply, as two stages solved on them have it. */
static void the_error_of_the_supply_is_counted(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = beam_stage(&tube, true);
    const double volts = 4.3;
    plw_stage higher = stage;
    plw_stage lower = stage;
    higher.supply.volts += volts;
    lower.supply.volts -= volts;
    const solved above = solve(&higher);
    const solved below = solve(&lower);
    const plw_uncertainty exact = estimate(&stage);
    const plw_uncertainty u = estimate_on(&stage, volts);
    assert_near_relative(u.plate_amps.supply, 0.5 * (above.rest.plate_amps - below.rest.plate_amps), 1e-9, "solved");
    assert_near_relative(u.plate_watts.supply, 0.5 * (above.rest.plate_watts - below.rest.plate_watts), 1e-9, "solved");
    assert_near_relative(u.speaker_watts.supply, 0.5 * (above.signal.speaker_watts - below.signal.speaker_watts), 1e-9,
                         "solved");
    assert_near_relative(u.plate_amps.all, hypot(exact.plate_amps.all, u.plate_amps.supply), 1e-12, "by squares");
    assert_near(exact.plate_amps.supply, 0.0, 0.0, "a supply given exactly");
    assert_near(estimate_on(&stage, UNKNOWN).plate_amps.supply, 0.0, 0.0, "no readings");
    assert_int_equal(u.dominant, exact.dominant);
    assert_int_equal(estimate_on(&stage, 30.0 * volts).dominant, PLW_BY_SUPPLY);
    assert_string_equal(plw_deviation_cause_name(PLW_BY_MODEL), "model");
    assert_string_equal(plw_deviation_cause_name(PLW_BY_TUBES), "tubes");
    assert_string_equal(plw_deviation_cause_name(PLW_BY_SUPPLY), "supply");
}

/* A supply moved: every point of it by the same volts. */
static void a_moved_supply_keeps_its_slope(void **state) {
    (void)state;
    const plw_reading readings[] = {{303.0, 0.0}, {271.0, 0.0271}, {241.0, 0.0611}};
    plw_supply supplies[3];
    supplies[0] = stiff(283.0);
    assert_int_equal(plw_supply_source(303.0, 713.0, &supplies[1], NULL), PLW_OK);
    assert_int_equal(plw_supply_readings(readings, 3, &supplies[2], NULL), PLW_OK);
    for (int kind = 0; kind < 3; kind++) {
        const plw_supply moved = plw_supply_moved(&supplies[kind], -7.3);
        for (double amps = 0.0; amps < 0.08; amps += 0.0093) {
            double volts[2];
            double ohms[2];
            plw_supply_at(&supplies[kind], amps, &volts[0], &ohms[0]);
            plw_supply_at(&moved, amps, &volts[1], &ohms[1]);
            assert_near_relative(volts[1], volts[0] - 7.3, 1e-12, "moved");
            assert_near(ohms[1], ohms[0], 1e-9 * (1.0 + ohms[0]), "the same slope");
        }
    }
}

/* ---- beyond the data --------------------------------------------------------------------------------------------- */

static void voltages_beyond_the_data_are_told(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = beam_stage(&tube, true);
    const plw_uncertainty inside = estimate(&stage);
    assert_false(inside.outside_data);
    assert_string_equal(inside.outside, "");

    tube.tube.model.region = (plw_region){60.0, 97.0, 180.0, 320.0, 0.02, 0.08};
    const plw_uncertainty outside = estimate(&stage);
    assert_true(outside.outside_data);
    assert_non_null(strstr(outside.outside, "plate volts"));
    assert_non_null(strstr(outside.outside, "60 to 97 V"));
    assert_near_relative(outside.model_percent, 2.0 * inside.model_percent, 1e-12, "the law's error doubled");
    assert_near_relative(outside.plate_amps.tubes, inside.plate_amps.tubes, 1e-12, "tubes spread as before");

    tube.tube.model.region = (plw_region){180.0, 450.0, 391.0, 450.0, 0.02, 0.08};
    assert_non_null(strstr(estimate(&stage).outside, "screen volts"));
    tube.tube.model.region = (plw_region){UNKNOWN, UNKNOWN, UNKNOWN, UNKNOWN, UNKNOWN, UNKNOWN};
    assert_false(estimate(&stage).outside_data); /* nothing known of the region: nothing to lie outside of */
}

static void the_borders_are_those_promised(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = beam_stage(&tube, true);
    const double volts = solve(&stage).rest.plate_volts;
    const struct {
        double least, most;
        bool outside;
    } regions[] = {{volts / 0.701, 2.0 * volts, false},
                   {volts / 0.699, 2.0 * volts, true},
                   {0.5 * volts, volts / 1.499, false},
                   {0.5 * volts, volts / 1.501, true}};
    for (size_t index = 0; index < sizeof regions / sizeof regions[0]; index++) {
        tube.tube.model.region.plate_volts_least = regions[index].least;
        tube.tube.model.region.plate_volts_most = regions[index].most;
        assert_int_equal(estimate(&stage).outside_data, regions[index].outside);
    }
}

/* ---- no answer --------------------------------------------------------------------------------------------------- */

static void a_stage_without_a_point_is_refused(void **state) {
    (void)state;
    test_tube tube;
    plw_stage stage = beam_stage(&tube, true);
    const solved s = solve(&stage);
    stage.cathode_resistor_ohms = UNKNOWN;
    plw_uncertainty u = {.model_percent = 2.385};
    plw_error error = {0};
    assert_int_equal(plw_uncertainty_estimate(&stage, &s.rest, &s.signal, 0.0, &u, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "cathode-resistor"));
    assert_near(u.model_percent, 2.385, 0.0, "not written unless PLW_OK");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(drawn_tubes_lie_where_it_says),          cmocka_unit_test(fixed_bias_passes_the_spread_on),
        cmocka_unit_test(a_cathode_resistor_narrows_the_spread),  cmocka_unit_test(the_larger_of_the_two_is_named),
        cmocka_unit_test(rows_left_out_count_before_rows_fitted), cmocka_unit_test(the_error_of_power_is_counted),
        cmocka_unit_test(the_error_of_the_supply_is_counted),     cmocka_unit_test(a_moved_supply_keeps_its_slope),
        cmocka_unit_test(voltages_beyond_the_data_are_told),      cmocka_unit_test(the_borders_are_those_promised),
        cmocka_unit_test(a_stage_without_a_point_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
