/* Rectifier supplies for tests, and their steady state, which must exist.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_UNIT_SUPPLIES_H
#define TESTS_UNIT_SUPPLIES_H

#include "near.h"
#include "platewright/rectifier.h"

/* Full-wave, silicon, 47 uF on mains of 50 Hz; no filter behind it yet. */
static inline plw_rectifier usual_rectifier(double winding_rms_volts, double path_ohms) {
    return (plw_rectifier){.connection = PLW_FULL_WAVE,
                           .winding_rms_volts = winding_rms_volts,
                           .path_ohms = path_ohms,
                           .mains_hertz = 50.0,
                           .diode = plw_diode_silicon(),
                           .reservoir_farads = 47e-6};
}

static inline plw_rectifier_state steady_state(const plw_rectifier *supply, double amps, double ohms) {
    plw_rectifier_state state;
    plw_error error = {0};
    if (plw_rectifier_steady(supply, (plw_dc_load){amps, ohms}, &state, &error) != PLW_OK) {
        fail_msg("%g V behind %g ohm into %g A and %g ohm: %s", supply->winding_rms_volts, supply->path_ohms, amps,
                 ohms, error.text);
    }
    return state;
}

#endif
