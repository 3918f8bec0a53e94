/* A plate supply as it is described: settled into the line that a stage sees.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/plate_supply.h"

#include <math.h>

/* The line reaches this far beyond the heaviest reading. */
#define BEYOND_READINGS 1.5

plw_plate_supply plw_plate_supply_of(const plw_supply *line) {
    return (plw_plate_supply){.line = *line};
}

static double heaviest_amps(const plw_plate_supply *supply) {
    double most = 0;
    for (size_t i = 0; i < supply->readings; i++) {
        const plw_bench_reading *reading = &supply->reading[i];
        most = fmax(most, reading->ohms > 0 ? reading->volts / reading->ohms : reading->amps);
    }
    return most;
}

plw_status plw_plate_supply_settle(plw_plate_supply *supply, double most_amps, plw_error *error) {
    if (!supply->has_parts) {
        return PLW_OK;
    }
    plw_plate_supply made = *supply;
    plw_status status = PLW_OK;
    if (made.readings > 0) {
        const plw_reading_errors errors = plw_reading_errors_usual();
        status = plw_source_from_readings(&made.parts, made.reading, made.readings, &errors, &made.estimate, error);
        if (status == PLW_OK) {
            made.parts = made.estimate.supply;
            made.estimated = true;
            made.has_winding = true;
        }
    }
    if (status == PLW_OK && made.has_winding) {
        status =
            plw_rectifier_line(&made.parts, fmax(most_amps, BEYOND_READINGS * heaviest_amps(&made)), &made.line, error);
    }
    if (status == PLW_OK) {
        *supply = made;
    }
    return status;
}

plw_supply plw_supply_at_mains(const plw_supply *supply, double mains_percent) {
    const double factor = mains_percent / 100;
    plw_supply at = *supply;
    at.volts *= factor;
    for (size_t i = 0; i < at.points; i++) {
        at.point[i].volts *= factor;
        at.point[i].amps *= factor;
    }
    return at;
}

plw_status plw_supply_implied(const plw_supply *supply, double volts, double ohms, plw_supply *implied,
                              plw_error *error) {
    if (!(isfinite(volts) && volts > 0 && isfinite(ohms) && ohms > 0)) {
        return plw_fail(error, PLW_E_USAGE, "dummy load: %g V into %g ohm; both must be above zero", volts, ohms);
    }
    double model_volts;
    double slope;
    plw_supply_at(supply, volts / ohms, &model_volts, &slope);
    if (!(model_volts > 0)) {
        return plw_fail(error, PLW_E_USAGE, "dummy load: %.4g V into %.4g ohm is more current than the supply gives",
                        volts, ohms);
    }
    const double factor = volts / model_volts;
    plw_supply made = *supply;
    made.volts *= factor;
    made.source_ohms *= factor;
    for (size_t i = 0; i < made.points; i++) {
        made.point[i].volts *= factor;
        made.tangent_ohms[i] *= factor;
    }
    *implied = made;
    return PLW_OK;
}
