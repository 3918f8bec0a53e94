/* The cathode's capacitor: against the textbook triode, and against what the stage loses without one.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/bypass.h"

#include "near.h"
#include "unit/stages.h"

#define TURN (8.0 * atan(1.0))

/* Gain of a triode with an impedance Zk at its cathode: mu RL/(RL + rp + (mu + 1) Zk) (Radiotron Designer's Handbook,
 * 4th edition, 1953, chapter 7; from memory), relative to the same without. */
static double part_of_gain(const plw_quiescent *q, double load, double cathode_ohms, double farads, double hertz) {
    /* Zk = Rk/(1 + jx) with x = 2 pi f Rk C. */
    const double x = TURN * hertz * cathode_ohms * farads;
    const double k = 1.0 + (q->mu + 1.0) * cathode_ohms / (load + q->plate_resistance_ohms);
    return hypot(1.0, x) / hypot(k, x);
}

static void a_triode_loses_three_decibels_at_the_most(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_300B));
    const double resistors[] = {310.0, 880.0, 4700.0};
    for (size_t i = 0; i < sizeof resistors / sizeof resistors[0]; i++) {
        const plw_stage stage = simple_stage(&tube, 397.0, 3e3, resistors[i], UNKNOWN);
        plw_quiescent q;
        assert_int_equal(plw_quiescent_solve(&stage, &q, NULL), PLW_OK);
        const double farads = plw_bypass_farads(&stage, &q, PLW_BYPASS_HERTZ);
        const double part = part_of_gain(&q, 3e3, resistors[i], farads, PLW_BYPASS_HERTZ);
        assert_true(part > sqrt(0.5) && part < 0.95);
        /* k is the loss without a capacitor; at the corner the part of the gain is sqrt((1 + 1/k^2)/2). */
        const double k = 1.0 / part_of_gain(&q, 3e3, resistors[i], 0.0, PLW_BYPASS_HERTZ);
        assert_near_relative(part, sqrt(0.5 * (1.0 + 1.0 / (k * k))), 1e-9, "the corner");
        assert_near_relative(plw_bypass_farads(&stage, &q, 47.0), farads * PLW_BYPASS_HERTZ / 47.0, 1e-12, "as 1/f");
    }
}

static double small_watts(const plw_stage *stage) {
    plw_stage quiet = *stage;
    quiet.drive_peak_volts = 0.05;
    plw_quiescent q;
    plw_signal s;
    assert_int_equal(plw_quiescent_solve(&quiet, &q, NULL), PLW_OK);
    assert_int_equal(plw_signal_solve(&quiet, &q, &s, NULL), PLW_OK);
    return s.power_watts;
}

/* 2 pi f C Rk is the gain with the cathode held over that without: whatever the connection, and for tubes that share. */
static void the_capacitor_answers_to_the_loss_without_it(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_BEAM_SMALL));
    const plw_connection connections[] = {PLW_CONNECTION_PENTODE, PLW_CONNECTION_TRIODE, PLW_CONNECTION_ULTRALINEAR};
    for (size_t i = 0; i < 3; i++) {
        for (unsigned tubes = 1; tubes <= 2; tubes++) {
            for (int each = 0; each < (int)tubes; each++) {
                const double ohms = tubes == 1 || each == 1 ? 270.0 : 135.0;
                plw_stage stage = simple_stage(&tube, 271.0, 5.2e3 / tubes, ohms, UNKNOWN);
                stage.connection = connections[i];
                stage.tap = connections[i] == PLW_CONNECTION_ULTRALINEAR ? 0.43 : stage.tap;
                stage.screen_resistor_ohms = connections[i] == PLW_CONNECTION_PENTODE ? 1e3 : 0.0;
                stage.parallel = tubes;
                stage.resistor_each = each == 1;
                plw_quiescent q;
                assert_int_equal(plw_quiescent_solve(&stage, &q, NULL), PLW_OK);
                const double farads = plw_bypass_farads(&stage, &q, PLW_BYPASS_HERTZ);
                plw_stage bare = stage;
                bare.unbypassed = true;
                const double loss = sqrt(small_watts(&stage) / small_watts(&bare));
                /* A drive of 50 mV against 13 V of bias: the bend of the law is of the order of their ratio squared.  Where
                 * the screen does not go with the plate, plate and screen share the cathode's motion otherwise than the
                 * grid's, by a part of the screen's current in the resistance it sees. */
                const double tolerance = connections[i] == PLW_CONNECTION_TRIODE ? 1e-4 : 5e-3;
                assert_near_relative(TURN * PLW_BYPASS_HERTZ * farads * ohms, loss, tolerance,
                                     "gain held over gain not");
                assert_near_relative(plw_bypass_farads(&bare, &q, PLW_BYPASS_HERTZ), farads, 1e-12, "to be fitted");
            }
        }
    }
}

static void there_is_none_with_fixed_bias(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_BEAM_SMALL));
    const plw_stage stage = simple_stage(&tube, 263.0, 5.1e3, UNKNOWN, -12.3);
    plw_quiescent q;
    assert_int_equal(plw_quiescent_solve(&stage, &q, NULL), PLW_OK);
    assert_true(isnan(plw_bypass_farads(&stage, &q, PLW_BYPASS_HERTZ)));
    const plw_stage resistor = simple_stage(&tube, 263.0, 5.1e3, 270.0, UNKNOWN);
    assert_true(isnan(plw_bypass_farads(&resistor, &q, 0.0)));
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_triode_loses_three_decibels_at_the_most),
        cmocka_unit_test(the_capacitor_answers_to_the_loss_without_it),
        cmocka_unit_test(there_is_none_with_fixed_bias),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
