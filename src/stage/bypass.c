/* The capacitor across the cathode resistor.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/bypass.h"

#include <math.h>

#include "stage/linear.h"

#define TWO_PI 6.28318530717958647693

double plw_bypass_farads(const plw_stage *stage, const plw_quiescent *quiescent, double hertz) {
    if (!isfinite(stage->cathode_resistor_ohms) || !(hertz > 0.0)) {
        return (double)NAN;
    }
    plw_stage bypassed = *stage;
    bypassed.unbypassed = false;
    plw_circuit circuit;
    plw_circuit_prepare(&bypassed, &circuit);
    /* A cathode that rises by a volt takes a volt off every electrode. */
    const double risen[PLW_ELECTRODES] = {[PLW_AT_PLATE] = -1.0, [PLW_AT_SCREEN] = -1.0, [PLW_AT_GRID] = -1.0};
    double amps[PLW_FLOWS];
    if (!plw_linear_currents(&circuit, quiescent, risen, amps)) {
        return (double)NAN;
    }
    const double cathode_siemens = -(amps[PLW_OF_PLATE] + amps[PLW_OF_SCREEN]);
    const double farads = (1.0 / circuit.cathode_ohms + cathode_siemens) / (TWO_PI * hertz);
    return stage->resistor_each ? farads : circuit.tubes * farads;
}
