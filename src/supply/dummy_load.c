/* The dummy load: which resistor makes the supply see a stage's current, and what the meter then reads.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "platewright/supply_bench.h"

/* A wire-wound resistor: five times its rating for five seconds. */
#define OVERLOAD 5.0
#define OVERLOAD_SECONDS 5.0

double plw_resistor_seconds(double watts, double rating_watts) {
    if (!(watts >= 0 && rating_watts > 0 && isfinite(watts))) {
        return (double)NAN;
    }
    if (watts <= rating_watts) {
        return (double)INFINITY;
    }
    /* The heat beyond what it can give off goes into warming the part: a fixed store. */
    return OVERLOAD_SECONDS * (OVERLOAD - 1) * rating_watts / (watts - rating_watts);
}

plw_status plw_supply_into(const plw_supply *supply, double ohms, double *volts, double *amps, plw_error *error) {
    if (!(isfinite(ohms) && ohms > 0)) {
        return plw_fail(error, PLW_E_USAGE, "load: %g ohm is not a resistance above zero; give it as 10k", ohms);
    }
    double at_rest, slope;
    plw_supply_at(supply, 0, &at_rest, &slope);
    double low = 0, high = at_rest / ohms, current = high / 2, delivered = at_rest;
    for (int i = 0; i < 100; i++) {
        plw_supply_at(supply, current, &delivered, &slope);
        const double excess = delivered - current * ohms;
        if (excess > 0) {
            low = current;
        } else {
            high = current;
        }
        double next = current + excess / (ohms + slope);
        if (!(next >= low && next <= high)) {
            next = (low + high) / 2;
        }
        const double moved = fabs(next - current);
        current = next;
        if (moved <= 1e-14 * high) {
            break;
        }
    }
    *amps = current;
    *volts = current * ohms;
    return PLW_OK;
}

plw_status plw_dummy_load_for(const plw_supply *supply, double amps, plw_series series, double margin,
                              plw_dummy_load *load, plw_error *error) {
    if (!(isfinite(amps) && amps > 0)) {
        return plw_fail(error, PLW_E_USAGE, "dummy load: %g A is not a current above zero; give it as 45mA", amps);
    }
    if (!(isfinite(margin) && margin >= 1)) {
        return plw_fail(error, PLW_E_USAGE, "dummy load: a margin of %g would burn the resistor; 1 is the least",
                        margin);
    }
    double volts, slope;
    plw_supply_at(supply, amps, &volts, &slope);
    if (!(volts > 0)) {
        return plw_fail(error, PLW_E_NO_POINT, "dummy load: the supply has no voltage left at %.4g mA", 1e3 * amps);
    }
    plw_dummy_load made = {.exact_ohms = volts / amps};
    made.ohms = plw_preferred_nearest(made.exact_ohms, series);
    const plw_status status = plw_supply_into(supply, made.ohms, &made.expected_volts, &made.amps, error);
    if (status != PLW_OK) {
        return status;
    }
    made.watts = made.expected_volts * made.amps;
    made.rating_watts = plw_resistor_rating_watts(made.watts, margin);
    made.seconds_on = plw_resistor_seconds(made.watts, made.rating_watts);
    *load = made;
    return PLW_OK;
}
