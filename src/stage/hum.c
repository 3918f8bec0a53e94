/* Hum at the speaker from the ripple of the plate supply.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/hum.h"

#include <math.h>

#include "stage/linear.h"

double plw_hum_share(const plw_stage *stage, const plw_quiescent *quiescent) {
    plw_circuit circuit;
    plw_circuit_prepare(stage, &circuit);
    const bool screen_quiet =
        !circuit.has_screen || isfinite(stage->screen_supply_volts) || (stage->screen_bypassed && circuit.tap <= 0.0);
    const double on_supply[PLW_ELECTRODES] = {[PLW_AT_PLATE] = 1.0, [PLW_AT_SCREEN] = screen_quiet ? 0.0 : 1.0};
    double amps[PLW_FLOWS];
    if (!plw_linear_currents(&circuit, quiescent, on_supply, amps)) {
        return (double)NAN;
    }
    /* What the speaker sees through the turns, without the copper. */
    return circuit.tubes * stage->load_ohms * (amps[PLW_OF_PLATE] + circuit.tap * amps[PLW_OF_SCREEN]);
}

plw_status plw_hum_of(const plw_stage *stage, const plw_quiescent *quiescent, const plw_signal *signal,
                      double ripple_rms_volts, plw_hum *hum, plw_error *error) {
    if (!(isfinite(ripple_rms_volts) && ripple_rms_volts >= 0.0)) {
        return plw_fail(error, PLW_E_USAGE, "ripple: %g V is not a voltage of zero or more", ripple_rms_volts);
    }
    plw_hum made = {.ripple_rms_volts = ripple_rms_volts, .speaker_share = plw_hum_share(stage, quiescent)};
    if (!isfinite(made.speaker_share)) {
        return plw_fail(error, PLW_E_NO_CONVERGENCE, "ripple: what reaches the speaker has no solution");
    }
    const double load_volts = fabs(made.speaker_share) * ripple_rms_volts;
    made.speaker_rms_volts = load_volts / stage->ratio;
    const double watts = load_volts * load_volts / stage->load_ohms;
    made.decibels_below_full_power = watts > 0.0 ? 10.0 * log10(signal->speaker_watts / watts) : (double)INFINITY;
    *hum = made;
    return PLW_OK;
}
