/* The bleeder: time for the supply to fall to a safe voltage.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "platewright/supply_bench.h"

/* Sum of each capacitor times the resistance between it and the bleeder; and the sum of the capacitors. */
static double series_seconds(const plw_rectifier *supply, double *farads) {
    double sum = 0, ohms = 0;
    *farads = 0;
    for (size_t i = supply->sections; i-- > 0;) {
        sum += supply->section[i].farads * ohms;
        *farads += supply->section[i].farads;
        ohms += supply->section[i].ohms;
    }
    sum += supply->reservoir_farads * ohms;
    *farads += supply->reservoir_farads;
    return sum;
}

double plw_discharge_seconds(const plw_rectifier *supply, double from_volts, double to_volts) {
    if (!(from_volts > 0 && to_volts > 0 && isfinite(from_volts) && isfinite(to_volts))) {
        return (double)NAN;
    }
    if (from_volts <= to_volts) {
        return 0;
    }
    if (!(supply->bleeder_ohms > 0)) {
        return (double)INFINITY;
    }
    double farads;
    const double series = series_seconds(supply, &farads);
    return (series + farads * supply->bleeder_ohms) * log(from_volts / to_volts);
}

plw_status plw_bleeder_for(const plw_rectifier *supply, double volts, double seconds, plw_series series, double margin,
                           plw_bleeder *bleeder, plw_error *error) {
    if (!(isfinite(volts) && volts > 0 && isfinite(seconds) && seconds > 0 && isfinite(margin) && margin >= 1)) {
        return plw_fail(
            error, PLW_E_USAGE,
            "bleeder: %g V, %g s, margin %g: positive voltage and time and a margin of 1 or more are wanted", volts,
            seconds, margin);
    }
    if (volts <= PLW_SAFE_VOLTS) {
        *bleeder = (plw_bleeder){.ohms = (double)INFINITY, .rating_watts = plw_resistor_rating_watts(0, margin)};
        return PLW_OK;
    }
    double farads;
    const double filter = series_seconds(supply, &farads);
    const double falls = log(volts / PLW_SAFE_VOLTS);
    const double ohms = (seconds / falls - filter) / farads;
    if (!(ohms > 0)) {
        return plw_fail(
            error, PLW_E_NO_POINT,
            "bleeder: the filter's own resistors take %.3g s to let it fall to %g V; allow more time, or put "
            "a bleeder across each capacitor",
            filter * falls, PLW_SAFE_VOLTS);
    }
    plw_rectifier with = *supply;
    plw_bleeder made = {.ohms = plw_preferred_at_most(ohms, series)};
    if (!(made.ohms > 0)) {
        return plw_fail(error, PLW_E_USAGE, "bleeder: %g ohm is outside the preferred values", ohms);
    }
    with.bleeder_ohms = made.ohms;
    made.amps = volts / made.ohms;
    made.watts = volts * made.amps;
    made.rating_watts = plw_resistor_rating_watts(made.watts, margin);
    made.seconds_to_60_volts = plw_discharge_seconds(&with, volts, PLW_SAFE_VOLTS);
    *bleeder = made;
    return PLW_OK;
}
