/* Which mains transformer a supply needs.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/transformer.h"

#include <math.h>

enum { ROUNDS_MOST = 80 };

const double *plw_usual_secondaries(size_t *count) {
    static const double usual[] = {100, 110, 115, 120, 125, 130, 140, 150, 160, 170, 175, 180, 190, 200, 210, 220,
                                   225, 230, 240, 250, 260, 265, 270, 275, 280, 290, 300, 310, 320, 325, 330, 340,
                                   350, 360, 370, 375, 380, 390, 400, 410, 425, 450, 475, 500, 525, 550, 600};
    *count = sizeof usual / sizeof usual[0];
    return usual;
}

/* With a winding of given off-load volts: the copper that makes its drop at its own RMS current the regulation, found
 * by repeating, since the current hardly depends on the copper. */
static plw_status with_regulation(plw_rectifier *supply, double off_load_volts, double regulation, double amps,
                                  plw_rectifier_state *state, plw_error *error) {
    const plw_dc_load load = {.amps = amps};
    const double drop = off_load_volts * regulation / (1 + regulation);
    supply->winding_rms_volts = off_load_volts;
    supply->path_ohms = drop / (2 * amps);
    for (int round = 0; round < ROUNDS_MOST; round++) {
        plw_rectifier_state found;
        const plw_status status = plw_rectifier_steady(supply, load, &found, error);
        if (status != PLW_OK) {
            return status;
        }
        const double next = drop / found.winding_rms_amps, moved = fabs(next - supply->path_ohms);
        *state = found;
        if (moved <= 1e-9 * next) {
            return PLW_OK;
        }
        /* A stiffer path draws sharper pulses: half way damps the hunting. */
        supply->path_ohms += 0.7 * (next - supply->path_ohms);
    }
    return plw_fail(error, PLW_E_NO_CONVERGENCE, "transformer: the copper for %.3g %% regulation does not settle",
                    100 * regulation);
}

/* DC at the output with the usual winding: same regulation and rated current, so copper in proportion to its volts. */
static plw_status try_usual(const plw_transformer *exact, double amps, double *volts, plw_error *error) {
    plw_rectifier supply = exact->supply;
    const double ratio = exact->usual_rms_volts / exact->rated_rms_volts;
    const plw_dc_load load = {.amps = amps};
    plw_rectifier_state state;
    supply.winding_rms_volts *= ratio;
    supply.path_ohms *= ratio;
    const plw_status status = plw_rectifier_steady(&supply, load, &state, error);
    if (status == PLW_OK) {
        *volts = state.volts;
    }
    return status;
}

static void pick_usual(plw_transformer *made) {
    size_t count;
    const double *usual = plw_usual_secondaries(&count);
    made->usual_below = (double)NAN;
    made->usual_above = (double)NAN;
    made->usual_rms_volts = usual[0];
    for (size_t i = 0; i < count; i++) {
        if (usual[i] <= made->rated_rms_volts) {
            made->usual_below = usual[i];
        } else if (isnan(made->usual_above)) {
            made->usual_above = usual[i];
        }
        if (fabs(log(usual[i] / made->rated_rms_volts)) < fabs(log(made->usual_rms_volts / made->rated_rms_volts))) {
            made->usual_rms_volts = usual[i];
        }
    }
}

static plw_status check_wanted(const plw_rectifier *described, double volts, double amps, double regulation_percent,
                               plw_error *error) {
    if (!(isfinite(volts) && volts > 0 && isfinite(amps) && amps > 0)) {
        return plw_fail(error, PLW_E_USAGE, "transformer: %g V at %g A; both must be above zero", volts, amps);
    }
    if (!(regulation_percent > 0 && regulation_percent <= 100)) {
        return plw_fail(error, PLW_E_USAGE, "transformer: a regulation of %g %% is not above 0 and up to 100",
                        regulation_percent);
    }
    plw_rectifier probe = *described;
    probe.winding_rms_volts = volts;
    probe.path_ohms = 0;
    return plw_rectifier_validate(&probe, error);
}

typedef struct {
    double low, high;         /* winding volts that give too little and enough */
    double short_by, over_by; /* by how much, V DC */
} bracket;

/* One trial of a winding; a supply that cannot deliver the current gives nothing. */
static plw_status try_winding(plw_rectifier *supply, double winding_volts, double volts, double amps, double regulation,
                              plw_rectifier_state *state, bracket *around, double *miss, plw_error *error) {
    plw_error inner = {0};
    const plw_status status = with_regulation(supply, winding_volts, regulation, amps, state, &inner);
    if (status != PLW_OK && status != PLW_E_NO_POINT) {
        return plw_fail(error, status, "%s", inner.text);
    }
    *miss = status == PLW_OK ? state->volts - volts : -volts;
    if (*miss >= 0) {
        around->high = winding_volts;
        around->over_by = *miss;
    } else {
        around->low = winding_volts;
        around->short_by = -*miss;
    }
    return PLW_OK;
}

/* Narrow the winding's volts; the output is nearly straight in it, so false position is quick, and a bisection every
 * third time keeps it from sticking. */
static plw_status find_winding(plw_rectifier *supply, double volts, double amps, double regulation,
                               plw_rectifier_state *state, plw_error *error) {
    bracket around = {0, 0, 0, 0};
    double miss = 0, trial = volts;
    while (around.high <= 0) {
        if (trial > 100 * volts) {
            return plw_fail(error, PLW_E_NO_POINT, "transformer: no winding gives %g V at %g mA through this filter",
                            volts, 1e3 * amps);
        }
        const plw_status status = try_winding(supply, trial, volts, amps, regulation, state, &around, &miss, error);
        if (status != PLW_OK) {
            return status;
        }
        trial *= 1.4;
    }
    if (around.low <= 0) {
        around.low = around.high / 4;
        around.short_by = volts;
    }
    for (int round = 0; round < ROUNDS_MOST; round++) {
        trial = (around.low + around.high) / 2;
        if (round % 3 != 2) {
            trial = (around.low * around.over_by + around.high * around.short_by) / (around.over_by + around.short_by);
        }
        const plw_status status = try_winding(supply, trial, volts, amps, regulation, state, &around, &miss, error);
        if (status != PLW_OK || fabs(miss) <= 1e-7 * volts) {
            return status;
        }
    }
    return plw_fail(error, PLW_E_NO_CONVERGENCE, "transformer: no winding was found that gives %g V", volts);
}

plw_status plw_transformer_for(const plw_rectifier *described, double volts, double amps, double regulation_percent,
                               plw_transformer *transformer, plw_error *error) {
    plw_status status = check_wanted(described, volts, amps, regulation_percent, error);
    if (status != PLW_OK) {
        return status;
    }
    const double regulation = regulation_percent / 100;
    plw_transformer made = {.supply = *described};
    plw_rectifier_state state = {0};
    status = find_winding(&made.supply, volts, amps, regulation, &state, error);
    if (status != PLW_OK) {
        return status;
    }
    made.off_load_rms_volts = made.supply.winding_rms_volts;
    made.rated_rms_volts = made.off_load_rms_volts / (1 + regulation);
    made.rms_amps = state.winding_rms_amps;
    made.secondary_va = made.rated_rms_volts * made.rms_amps * (described->connection == PLW_FULL_WAVE ? 2 : 1);
    made.path_ohms = made.supply.path_ohms;
    made.volts = state.volts;
    pick_usual(&made);
    status = try_usual(&made, amps, &made.usual_volts, error);
    if (status == PLW_OK) {
        *transformer = made;
    }
    return status;
}
