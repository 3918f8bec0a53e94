/* The rectifier engine: identities, scaling, balances, corners, every error.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/rectifier.h"

#include <string.h>

#include "unit/supplies.h"

#define PI 3.14159265358979323846

static plw_rectifier example(void) {
    plw_rectifier supply = usual_rectifier(238.5, 97);
    supply.sections = 2;
    supply.section[0] = (plw_filter_section){7.5, 190, 33e-6};
    supply.section[1] = (plw_filter_section){0, 680, 22e-6};
    return supply;
}

/* ---- identities -------------------------------------------------------------------------------------------------- */

static void charge_is_balanced(void **state) {
    (void)state;
    plw_rectifier supply = example();
    supply.bleeder_ohms = 220e3;
    supply.drawn_amps[0] = 0.0213;
    supply.drawn_amps[1] = 0.0041;
    for (int vacuum = 0; vacuum < 2; vacuum++) {
        supply.diode = vacuum ? plw_diode_vacuum(20, 0.15) : plw_diode_silicon();
        const plw_rectifier_state got = steady_state(&supply, 0.0187, 33e3);
        const char *source = "conservation of charge";
        const double output = 0.0187 + got.volts / 33e3 + got.volts / 220e3;
        assert_near(got.load_amps, 0.0187 + got.volts / 33e3, 1e-15, source);
        assert_near(got.rectified_amps, output + 0.0254, 1e-12, source);
        assert_near(got.node[1].volts - got.node[2].volts, 680 * output, 1e-9, source);
        assert_near(got.node[0].volts - got.node[1].volts, 190 * (output + 0.0041), 1e-9, source);
        assert_near(got.diode_average_amps, got.rectified_amps / 2, 1e-15, "two diodes in turn");
        assert_true(got.diode_peak_amps > got.diode_rms_amps && got.diode_rms_amps > got.diode_average_amps);
    }
}

/* EMF times current over a period = copper and diodes + what the DC side takes. */
static void energy_is_balanced(void **state) {
    (void)state;
    enum { COUNT = 40000 };
    static plw_rectifier_instant wave[COUNT];
    plw_rectifier supply = example();
    for (int vacuum = 0; vacuum < 2; vacuum++) {
        supply.diode = vacuum ? plw_diode_vacuum(20, 0.15) : plw_diode_silicon();
        plw_rectifier_state got;
        plw_error error = {0};
        const plw_dc_load load = {.amps = 0.0613};
        assert_int_equal(plw_rectifier_waveform(&supply, load, wave, COUNT, &got, &error), PLW_OK);
        double source_watts = 0, diode_watts = 0, mean_amps = 0, mean_volts = 0;
        for (size_t i = 0; i < COUNT; i++) {
            const double amps = wave[i].rectified_amps;
            source_watts += fabs(wave[i].emf_volts) * amps / COUNT;
            diode_watts += (vacuum ? pow(amps / supply.diode.perveance, 2.0 / 3) : 0.7 + 0.23 * amps) * amps / COUNT;
            mean_amps += amps / COUNT;
            mean_volts += wave[i].node_volts[2] / COUNT;
        }
        const char *source = "conservation of energy";
        assert_near_relative(mean_amps, got.rectified_amps, 2e-5, "sampled mean");
        assert_near_relative(mean_volts, got.volts, 1e-7, "sampled mean");
        /* The current of the choke ripples, so what node 0 gives differs a little from the mean volts times amps; the
         * difference is the product of the ripples, below 0.1 %. */
        const double copper_watts = 2 * got.winding_rms_amps * got.winding_rms_amps * supply.path_ohms;
        const double filter_watts = 0.0613 * 0.0613 * (190 + 680), load_watts = 0.0613 * got.volts;
        assert_near_relative(source_watts, copper_watts + diode_watts + filter_watts + load_watts, 1e-3, source);
    }
}

static void volts_scale_with_volts(void **state) {
    (void)state;
    plw_rectifier supply = example(), larger = example();
    supply.diode = (plw_diode){PLW_DIODE_SILICON, 0, 0.5, 0};
    larger.diode = supply.diode;
    larger.winding_rms_volts *= 1.437;
    const plw_rectifier at_mains = plw_rectifier_at_mains(&supply, 143.7);
    assert_near(at_mains.winding_rms_volts, larger.winding_rms_volts, 1e-10, "volts go with the mains");
    const plw_rectifier_state one = steady_state(&supply, 0.041, 0), other = steady_state(&larger, 0.041 * 1.437, 0);
    assert_near_relative(other.volts, 1.437 * one.volts, 1e-9, "linear between switchings");
    assert_near_relative(other.winding_rms_amps, 1.437 * one.winding_rms_amps, 1e-9, "linear between switchings");
    assert_near_relative(other.conduction_degrees, one.conduction_degrees, 1e-8, "linear between switchings");
}

/* With the 3/2 law voltages times F go with currents times F^1.5, impedances times F^-0.5. */
static void vacuum_scales_as_three_halves(void **state) {
    (void)state;
    const double f = 1.31, root = sqrt(f);
    plw_rectifier supply = example();
    supply.diode = plw_diode_vacuum(50, 0.275);
    plw_rectifier larger = supply;
    larger.winding_rms_volts *= f;
    larger.path_ohms /= root;
    larger.reservoir_farads *= root;
    for (size_t i = 0; i < 2; i++) {
        larger.section[i].ohms /= root;
        larger.section[i].henries /= root;
        larger.section[i].farads *= root;
    }
    const plw_rectifier_state one = steady_state(&supply, 0.05, 0), other = steady_state(&larger, 0.05 * f * root, 0);
    assert_near_relative(other.volts, f * one.volts, 1e-8, "three-halves-power scaling");
    assert_near_relative(other.diode_peak_amps, f * root * one.diode_peak_amps, 1e-6, "three-halves-power scaling");
    assert_near_relative(other.node[2].ripple_rms_volts, f * one.node[2].ripple_rms_volts, 1e-6,
                         "three-halves-power scaling");
}

static void bridge_is_full_wave_with_two_drops(void **state) {
    (void)state;
    plw_rectifier bridge = example(), halves = example();
    bridge.connection = PLW_BRIDGE;
    halves.diode.drop_volts *= 2;
    halves.diode.slope_ohms *= 2;
    const plw_rectifier_state one = steady_state(&bridge, 0.05, 0), other = steady_state(&halves, 0.05, 0);
    assert_near_relative(one.volts, other.volts, 1e-12, "the same path");
    assert_near_relative(one.winding_rms_amps, sqrt(2.0) * other.winding_rms_amps, 1e-12,
                         "one winding for both halves");
    assert_near_relative(one.diode_rms_amps, other.diode_rms_amps, 1e-12, "each diode every other half cycle");
    const double peak = sqrt(2.0) * 238.5;
    assert_true(other.peak_inverse_volts > 1.9 * peak && other.peak_inverse_volts < 2 * peak);
    assert_true(one.peak_inverse_volts < peak);
}

static void waveform_repeats_each_half(void **state) {
    (void)state;
    enum { COUNT = 360 };
    plw_rectifier_instant wave[COUNT];
    plw_rectifier supply = example();
    supply.connection = PLW_BRIDGE;
    plw_rectifier_state got;
    plw_error error = {0};
    const plw_dc_load load = {.amps = 0.05};
    assert_int_equal(plw_rectifier_waveform(&supply, load, wave, COUNT, &got, &error), PLW_OK);
    double highest = 0;
    for (size_t i = 0; i < COUNT; i++) {
        const plw_rectifier_instant *here = &wave[i], *half_on = &wave[(i + COUNT / 2) % COUNT];
        assert_near(here->seconds, 0.02 * (double)i / COUNT, 1e-15, "equal distances");
        assert_near(here->emf_volts, sqrt(2.0) * 238.5 * sin(2 * PI * (double)i / COUNT), 1e-9, "a sine");
        assert_near(here->winding_amps, -half_on->winding_amps, 1e-6, "half-wave symmetry");
        assert_near(here->rectified_amps, fabs(here->winding_amps), 1e-12, "bridge");
        for (size_t k = 0; k < got.nodes; k++) {
            assert_near(here->node_volts[k], half_on->node_volts[k], 1e-6, "half-wave symmetry");
            assert_true(here->node_volts[k] <= got.node[k].peak_volts + 1e-9);
        }
        highest = fmax(highest, here->rectified_amps);
    }
    assert_near_relative(highest, got.diode_peak_amps, 2e-3, "sampled each degree");
}

static void odd_counts_of_instants_are_filled(void **state) {
    (void)state;
    for (size_t count = 2; count < 12; count++) {
        plw_rectifier_instant wave[12];
        memset(wave, 0xff, sizeof wave);
        plw_rectifier_state got;
        plw_error error = {0};
        const plw_rectifier supply = example();
        const plw_dc_load load = {.amps = 0.05};
        assert_int_equal(plw_rectifier_waveform(&supply, load, wave, count, &got, &error), PLW_OK);
        for (size_t i = 0; i < count; i++) {
            assert_near(wave[i].seconds, 0.02 * (double)i / (double)count, 1e-12, "equal distances");
            assert_near(wave[i].node_volts[2], got.volts, got.node[2].ripple_peak_to_peak_volts, "about the mean");
        }
    }
}

/* ---- corners ----------------------------------------------------------------------------------------------------- */

static void unloaded_it_stands_at_the_peak(void **state) {
    (void)state;
    plw_rectifier supply = example();
    const double peak = sqrt(2.0) * 238.5;
    plw_rectifier_state got = steady_state(&supply, 0, 0);
    for (size_t k = 0; k < 3; k++) {
        assert_near(got.node[k].volts, peak - 0.7, 1e-9, "peak less the drop");
        assert_near(got.node[k].ripple_rms_volts, 0, 0, "nothing drawn");
    }
    assert_near(got.peak_inverse_volts, 2 * peak - 0.7, 1e-9, "twice the peak");
    assert_near(plw_rectifier_peak_volts(&supply), peak - 0.7, 1e-9, "peak less the drop");
    supply.diode = plw_diode_vacuum(50, 0.275);
    got = steady_state(&supply, 0, 0);
    assert_near(got.volts, peak, 1e-9, "a vacuum diode lets the last drop through");
    supply.reservoir_farads = 0;
    got = steady_state(&supply, 0, 0);
    assert_near(got.volts, peak, 1e-9, "a choke input without load also rises to the peak");
}

/* Near no load the drop goes as the current to the 2/3: V = Vp (1 - 0.5 (1.5 pi I Rs / Vp)^(2/3)), first term of the
 * closed form tan th - th for small angles; the next term is of relative order th^2. */
static void drop_near_no_load(void **state) {
    (void)state;
    const plw_rectifier supply = {.connection = PLW_FULL_WAVE,
                                  .winding_rms_volts = 300,
                                  .path_ohms = 150,
                                  .mains_hertz = 50,
                                  .reservoir_farads = 1e-3};
    const double peak = 300 * sqrt(2.0), amps[] = {2.385e-9, 1e-7, 1e-5, 1e-4};
    for (size_t i = 0; i < sizeof amps / sizeof amps[0]; i++) {
        const double lead = 0.5 * pow(1.5 * PI * amps[i] * 150 / peak, 2.0 / 3);
        const double drop = 1 - steady_state(&supply, amps[i], 0).volts / peak;
        assert_near_relative(drop, lead, 2 * lead + 1e-3, "small-angle limit of tan th - th");
    }
}

static void overload_is_refused(void **state) {
    (void)state;
    const plw_rectifier supply = example();
    plw_rectifier_state got;
    memset(&got, 0x5a, sizeof got);
    const plw_rectifier_state before = got;
    plw_error error = {0};
    const double amps[] = {0.31, 1.7, 40};
    for (size_t i = 0; i < sizeof amps / sizeof amps[0]; i++) {
        const plw_dc_load load = {.amps = amps[i]};
        assert_int_equal(plw_rectifier_steady(&supply, load, &got, &error), PLW_E_NO_POINT);
        assert_non_null(strstr(error.text, "cannot be had"));
        assert_memory_equal(&got, &before, sizeof got);
    }
    /* Into a heavy resistor there is always a point. */
    const plw_rectifier_state heavy = steady_state(&supply, 0, 12);
    assert_true(heavy.volts > 0 && heavy.volts < 10);
}

/* Above its critical current a choke holds the mean of the rectified sine, less the copper. */
static void choke_input_holds_the_mean(void **state) {
    (void)state;
    plw_rectifier supply = example();
    supply.reservoir_farads = 0;
    supply.diode = (plw_diode){PLW_DIODE_SILICON, 0, 0, 0};
    supply.path_ohms = 0.001;
    supply.sections = 1;
    supply.section[0] = (plw_filter_section){12, 130, 100e-6};
    const double peak = sqrt(2.0) * 238.5;
    const plw_rectifier_state got = steady_state(&supply, 0.083, 0);
    assert_near_relative(got.volts, 2 / PI * peak - 0.083 * 130, 1e-5, "mean of a rectified sine");
    assert_true(got.choke_least_amps > 0);
    /* Ripple of the choke: all harmonics, the second being 4/(3 pi) Ep / (2 w L). */
    const double second = 4 / (3 * PI) * peak / (2 * 2 * PI * 50 * 12);
    assert_near_relative(0.083 - got.choke_least_amps, second, 0.2, "second harmonic; the fourth and on add some");
    const plw_rectifier_state light = steady_state(&supply, 0.004, 0);
    assert_near(light.choke_least_amps, 0, 0, "below the critical current");
    assert_true(light.volts > got.volts + 40);
    supply = example();
    assert_true(isnan(steady_state(&supply, 0.05, 0).choke_least_amps));
}

static void ideal_parts_and_odd_values(void **state) {
    (void)state;
    plw_rectifier supply = example();
    supply.path_ohms = 0;
    supply.diode = (plw_diode){PLW_DIODE_SILICON, 0, 0, 0};
    plw_rectifier_state got = steady_state(&supply, 0.05, 0);
    assert_true(got.node[0].peak_volts <= sqrt(2.0) * 238.5 + 1e-9);
    assert_true(got.diode_peak_amps > 0.9 && isfinite(got.winding_rms_amps));
    supply.section[1].farads = 1e-9; /* a stiff corner */
    got = steady_state(&supply, 0.05, 0);
    assert_near(got.node[1].volts - got.node[2].volts, 680 * 0.05, 1e-7, "DC drop");
    supply = example();
    supply.reservoir_farads = 0.5; /* slow to settle: found at once all the same */
    got = steady_state(&supply, 0.05, 0);
    assert_true(got.iterations < 12);
}

/* ---- regulation line --------------------------------------------------------------------------------------------- */

static void line_passes_through_steady_states(void **state) {
    (void)state;
    for (int kind = 0; kind < 4; kind++) {
        plw_rectifier supply = example();
        supply.diode = kind % 2 ? plw_diode_vacuum(17, 0.225) : plw_diode_silicon();
        if (kind >= 2) {
            supply.reservoir_farads = 0;
        }
        plw_supply line;
        plw_error error = {0};
        assert_int_equal(plw_rectifier_line(&supply, 0.0955, &line, &error), PLW_OK);
        assert_int_equal(line.kind, PLW_SUPPLY_RECTIFIER);
        assert_int_equal(line.points, PLW_LINE_POINTS);
        assert_near(line.volts, plw_rectifier_peak_volts(&supply), 1e-9, "off load");
        for (size_t k = 1; k < line.points; k += 6) {
            const plw_rectifier_state got = steady_state(&supply, line.point[k].amps, 0);
            assert_near(line.point[k].volts, got.volts, 2e-5 * got.volts, "the steady state there");
            assert_true(line.point[k].volts < line.point[k - 1].volts);
        }
        const double amps[] = {0.0071, 0.0385, 0.0451, 0.0902};
        for (size_t i = 0; i < 4; i++) {
            double volts, ohms, after, before, unused;
            plw_supply_at(&line, amps[i], &volts, &ohms);
            const plw_rectifier_state got = steady_state(&supply, amps[i], 0);
            assert_near(volts, got.volts, 1e-3 * got.volts, "between the points");
            plw_supply_at(&line, amps[i] + 1e-6, &after, &unused);
            plw_supply_at(&line, amps[i] - 1e-6, &before, &unused);
            assert_near(ohms, (before - after) / 2e-6, 1e-3 * ohms, "derivative by differences");
        }
    }
}

static void source_resistance_is_the_slope(void **state) {
    (void)state;
    for (int vacuum = 0; vacuum < 2; vacuum++) {
        plw_rectifier supply = example();
        supply.diode = vacuum ? plw_diode_vacuum(17, 0.225) : plw_diode_silicon();
        supply.bleeder_ohms = 100e3;
        const double step = 1e-4;
        const plw_rectifier_state light = steady_state(&supply, 0.05 - step, 0),
                                  heavy = steady_state(&supply, 0.05 + step, 0);
        assert_near_relative(steady_state(&supply, 0.05, 0).source_ohms, (light.volts - heavy.volts) / (2 * step), 1e-4,
                             "derivative by differences");
    }
}

static void line_ends_where_the_supply_does(void **state) {
    (void)state;
    const plw_rectifier supply = example();
    plw_supply line;
    plw_error error = {0};
    assert_int_equal(plw_rectifier_line(&supply, 0.9, &line, &error), PLW_OK);
    assert_true(line.point[line.points - 1].amps < 0.25);
    assert_true(line.point[line.points - 1].volts >= 0.25 * line.volts);
    assert_true(line.point[line.points - 1].volts < 0.5 * line.volts);
    assert_int_equal(plw_rectifier_line(&supply, 900, &line, &error), PLW_E_NO_POINT);
    assert_int_equal(plw_rectifier_line(&supply, 0, &line, &error), PLW_E_USAGE);
    assert_int_equal(plw_rectifier_line(&supply, (double)NAN, &line, &error), PLW_E_USAGE);
}

/* ---- errors ------------------------------------------------------------------------------------------------------ */

static void refused(const plw_rectifier *supply, const char *place) {
    plw_error error = {0};
    assert_int_equal(plw_rectifier_validate(supply, &error), PLW_E_USAGE);
    if (strstr(error.text, place) == NULL) {
        fail_msg("'%s' does not name '%s'", error.text, place);
    }
    plw_rectifier_state got;
    plw_supply line;
    const plw_dc_load load = {.amps = 0.05};
    assert_int_equal(plw_rectifier_steady(supply, load, &got, NULL), PLW_E_USAGE);
    assert_int_equal(plw_rectifier_line(supply, 0.05, &line, NULL), PLW_E_USAGE);
}

static void descriptions_are_checked(void **state) {
    (void)state;
    const double bad[] = {-1, (double)NAN, (double)INFINITY};
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) {
        const struct {
            size_t at;
            const char *place;
        } numbers[] = {
            {offsetof(plw_rectifier, winding_rms_volts), "winding"},
            {offsetof(plw_rectifier, path_ohms), "winding"},
            {offsetof(plw_rectifier, mains_hertz), "mains"},
            {offsetof(plw_rectifier, reservoir_farads), "reservoir"},
            {offsetof(plw_rectifier, diode.drop_volts), "rectifier"},
            {offsetof(plw_rectifier, diode.slope_ohms), "rectifier"},
            {offsetof(plw_rectifier, section[0].henries), "section 1"},
            {offsetof(plw_rectifier, section[0].ohms), "section 1"},
            {offsetof(plw_rectifier, section[1].ohms), "section 2"},
            {offsetof(plw_rectifier, section[1].farads), "section 2"},
            {offsetof(plw_rectifier, bleeder_ohms), "bleeder"},
            {offsetof(plw_rectifier, drawn_amps[1]), "drawn"},
        };
        for (size_t k = 0; k < sizeof numbers / sizeof numbers[0]; k++) {
            plw_rectifier supply = example();
            memcpy((char *)&supply + numbers[k].at, &bad[i], sizeof bad[i]);
            refused(&supply, numbers[k].place);
        }
    }
}

static void impossible_circuits_are_refused(void **state) {
    (void)state;
    plw_rectifier supply = example();
    supply.sections = PLW_SECTIONS_MOST + 1;
    refused(&supply, "sections");
    supply = example();
    supply.reservoir_farads = 0;
    supply.section[0].henries = 0;
    refused(&supply, "begin with a choke");
    supply.sections = 0;
    refused(&supply, "begin with a choke");
    supply = example();
    supply.section[1].ohms = 0;
    refused(&supply, "section 2");
    supply = example();
    supply.winding_rms_volts = 0.4;
    refused(&supply, "all that the winding has");
    supply = example();
    supply.diode = plw_diode_vacuum(0, 0.1);
    refused(&supply, "perveance");
    supply = example();
    supply.drawn_amps[3] = 0.01;
    refused(&supply, "drawn");
    supply = example();
    plw_rectifier_state got;
    plw_rectifier_instant wave[1];
    plw_error error = {0};
    const plw_dc_load bad_amps = {.amps = -0.05}, bad_ohms = {.ohms = -10}, good = {.amps = 0.05};
    assert_int_equal(plw_rectifier_steady(&supply, bad_amps, &got, &error), PLW_E_USAGE);
    assert_int_equal(plw_rectifier_steady(&supply, bad_ohms, &got, &error), PLW_E_USAGE);
    assert_int_equal(plw_rectifier_waveform(&supply, good, wave, 1, &got, &error), PLW_E_USAGE);
}

static void parts_are_computed(void **state) {
    (void)state;
    assert_near(plw_path_ohms(38.5, 11.2, 230, 250), 38.5 + 11.2 * 250 * 250 / (230.0 * 230), 1e-12, "turns squared");
    assert_true(isnan(plw_path_ohms(-1, 11.2, 230, 250)));
    assert_true(isnan(plw_path_ohms(38.5, 11.2, 0, 250)));
    assert_true(isnan(plw_path_ohms(38.5, (double)NAN, 230, 250)));
    assert_near(plw_diode_vacuum(17, 0.225).perveance, 0.225 / pow(17, 1.5), 1e-12, "three-halves-power law");
    assert_true(isnan(plw_diode_vacuum(17, (double)INFINITY).perveance));
    const plw_diode silicon = plw_diode_silicon();
    assert_near(silicon.drop_volts + silicon.slope_ohms, 0.93, 1e-12, "1N4007 typical at 1 A, from memory");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(charge_is_balanced),
        cmocka_unit_test(energy_is_balanced),
        cmocka_unit_test(volts_scale_with_volts),
        cmocka_unit_test(vacuum_scales_as_three_halves),
        cmocka_unit_test(bridge_is_full_wave_with_two_drops),
        cmocka_unit_test(waveform_repeats_each_half),
        cmocka_unit_test(odd_counts_of_instants_are_filled),
        cmocka_unit_test(unloaded_it_stands_at_the_peak),
        cmocka_unit_test(drop_near_no_load),
        cmocka_unit_test(overload_is_refused),
        cmocka_unit_test(choke_input_holds_the_mean),
        cmocka_unit_test(ideal_parts_and_odd_values),
        cmocka_unit_test(line_passes_through_steady_states),
        cmocka_unit_test(source_resistance_is_the_slope),
        cmocka_unit_test(line_ends_where_the_supply_does),
        cmocka_unit_test(descriptions_are_checked),
        cmocka_unit_test(impossible_circuits_are_refused),
        cmocka_unit_test(parts_are_computed),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
