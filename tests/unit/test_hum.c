/* Hum: the linear answer against the circuit solved twice, and closed forms.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/hum.h"
#include "stage/circuit.h"
#include "unit/solved.h"
#include "unit/stages.h"

#define TWICE "the stage's equations solved with the supply moved up and down"

/* The circuit of one instant, with what capacitors hold taken from the point of rest and the supply moved by `ripple`:
 * Newton's method with difference quotients, apart from the library's solution.  Ret: volts across the load. */
typedef struct {
    const plw_stage *stage;
    const plw_quiescent *rest;
    double ripple;
} moved_supply;

/* What the law says less what is assumed, one tube. */
static void residual(const moved_supply *m, const double amps[2], double out[2]) {
    const plw_stage *s = m->stage;
    const plw_quiescent *rest = m->rest;
    const node_volts v = circuit_volts(s, amps[0], amps[1], rest->plate_amps, rest->screen_amps, 0.0);
    const bool screen_on_supply = !isfinite(s->screen_supply_volts);
    const bool held = s->screen_bypassed && screen_turns(s) <= 0.0;
    plw_currents c;
    plw_law_evaluate(&s->tube->model.law, v.plate + m->ripple - v.cathode,
                     v.screen + (screen_on_supply && !held ? m->ripple : 0.0) - v.cathode, v.grid - v.cathode, &c);
    out[0] = c.plate_amps - amps[0];
    out[1] = c.screen_amps - amps[1];
}

static double load_volts(const plw_stage *stage, const plw_quiescent *rest, double ripple) {
    const moved_supply m = {stage, rest, ripple};
    double amps[2] = {rest->plate_amps, rest->screen_amps};
    for (int round = 0; round < 12; round++) {
        double at[2];
        double by[2][2];
        residual(&m, amps, at);
        for (int k = 0; k < 2; k++) {
            const double step = 1e-7;
            double shifted[2] = {amps[0], amps[1]};
            double there[2];
            shifted[k] += step;
            residual(&m, shifted, there);
            by[0][k] = (there[0] - at[0]) / step;
            by[1][k] = (there[1] - at[1]) / step;
        }
        const double determinant = by[0][0] * by[1][1] - by[0][1] * by[1][0];
        amps[0] -= (at[0] * by[1][1] - at[1] * by[0][1]) / determinant;
        amps[1] -= (by[0][0] * at[1] - by[1][0] * at[0]) / determinant;
    }
    return stage->parallel * stage->load_ohms *
           (amps[0] - rest->plate_amps + screen_turns(stage) * (amps[1] - rest->screen_amps));
}

static void random_stages_agree(void **state) {
    (void)state;
    random_source r = {20261};
    int tried = 0;
    while (tried < 300) {
        test_tube tube;
        plw_stage stage;
        plw_quiescent rest;
        random_stage(&r, &tube, &stage);
        if (plw_quiescent_solve(&stage, &rest, NULL) != PLW_OK || rest.cathode_amps < 1e-3) {
            continue;
        }
        const double step = 1e-2;
        const double slope = (load_volts(&stage, &rest, step) - load_volts(&stage, &rest, -step)) / (2.0 * step);
        assert_near(plw_hum_share(&stage, &rest), slope, 2e-5, TWICE);
        tried++;
    }
}

/* A triode divides the ripple between load and plate resistance; an unbypassed cathode adds (mu + 1) times its
 * resistor to the plate resistance. */
static void triode_closed_forms(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_300B));
    plw_stage stage = simple_stage(&tube, 385.2, 3127.0, 873.0, UNKNOWN);
    plw_quiescent rest = at_rest(&stage);
    const double rp = rest.plate_resistance_ohms;
    assert_near(plw_hum_share(&stage, &rest), 3127.0 / (3127.0 + rp), 1e-9, "RL / (RL + rp)");
    stage.unbypassed = true;
    rest = at_rest(&stage);
    const double grown = rest.plate_resistance_ohms + (rest.mu + 1.0) * 873.0;
    assert_near(plw_hum_share(&stage, &rest), 3127.0 / (3127.0 + grown), 1e-9, "RL / (RL + rp + (mu + 1) Rk)");
}

/* A pentode with its screen quiet rejects far more than with the screen on the same ripple. */
static void screen_carries_the_hum(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_PENTODE_STEEP));
    plw_stage stage = simple_stage(&tube, 251.3, 5210.0, 143.0, UNKNOWN);
    plw_quiescent rest = at_rest(&stage);
    const double with_screen = plw_hum_share(&stage, &rest);
    stage.screen_supply_volts = 251.3;
    rest = at_rest(&stage);
    const double quiet = plw_hum_share(&stage, &rest);
    assert_near(quiet, 5210.0 / (5210.0 + rest.plate_resistance_ohms), 1e-9, "RL / (RL + rp)");
    assert_true(with_screen > 3.0 * quiet);
}

static void figures_of_the_hum(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_2A3));
    plw_stage stage = simple_stage(&tube, 305.7, 2513.0, 755.0, UNKNOWN);
    stage.ratio = sqrt(2513.0 / 7.9);
    stage.speaker_ohms = 7.9;
    const solved s = solve(&stage);
    plw_hum hum;
    plw_error error = {0};
    assert_int_equal(plw_hum_of(&stage, &s.rest, &s.signal, 0.137, &hum, &error), PLW_OK);
    const double volts = 0.137 * hum.speaker_share / stage.ratio;
    assert_near_relative(hum.speaker_rms_volts, volts, 1e-12, "through the turns");
    assert_near(hum.decibels_below_full_power, 10.0 * log10(s.signal.speaker_watts * 7.9 / (volts * volts)), 1e-9,
                "10 log of powers in the same speaker");
    assert_int_equal(plw_hum_of(&stage, &s.rest, &s.signal, -0.1, &hum, &error), PLW_E_USAGE);
    assert_int_equal(plw_hum_of(&stage, &s.rest, &s.signal, UNKNOWN, &hum, &error), PLW_E_USAGE);
    stage.ratio = UNKNOWN;
    assert_int_equal(plw_hum_of(&stage, &s.rest, &s.signal, 0.0, &hum, &error), PLW_OK);
    assert_true(isnan(hum.speaker_rms_volts) && isinf(hum.decibels_below_full_power));
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(random_stages_agree),
        cmocka_unit_test(triode_closed_forms),
        cmocka_unit_test(screen_carries_the_hum),
        cmocka_unit_test(figures_of_the_hum),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
