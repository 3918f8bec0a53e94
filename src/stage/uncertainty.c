/* The model's error and the spread of tubes, carried through the circuit.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/uncertainty.h"

#include <math.h>
#include <stdio.h>

#define MEDIAN_OF_NORMAL 0.6745  /* median of |x| over the standard deviation of x, for normal x */
#define LEAST_MODEL_ERROR 0.02   /* no fit to rounded tables is better than the rounding */
#define UNTRIED_MODEL_ERROR 0.05 /* with one row only, nothing could be left out to try the fit */
#define DATA_RANGE_LEAST 0.7
#define DATA_RANGE_MOST 1.5

typedef struct {
    double plate_amps, plate_watts, cathode_volts, speaker_watts;
} figures;

static plw_status solve_scaled(const plw_stage *stage, double factor, figures *f, plw_error *error) {
    plw_tube tube = *stage->tube;
    plw_law_scale(&tube.model.law, factor);
    plw_stage scaled = *stage;
    scaled.tube = &tube;
    plw_quiescent q;
    plw_signal s;
    plw_status status = plw_quiescent_solve(&scaled, &q, error);
    if (status == PLW_OK) {
        status = plw_signal_solve(&scaled, &q, &s, error);
    }
    if (status == PLW_OK) {
        *f = (figures){q.plate_amps, q.plate_watts, q.cathode_volts, s.speaker_watts};
    }
    return status;
}

static plw_deviation deviation(double strong, double weak, double model, double tubes, double own_model) {
    /* Half the difference between one spread above and below; the model's error acts in proportion. */
    const double by_tubes = 0.5 * fabs(strong - weak);
    const double by_model = hypot(by_tubes * model / tubes, own_model);
    return (plw_deviation){by_model, by_tubes, hypot(by_model, by_tubes)};
}

static bool beyond(double value, double least, double most) {
    return isfinite(value) && isfinite(least) && (value < DATA_RANGE_LEAST * least || value > DATA_RANGE_MOST * most);
}

static void compare_region(const plw_region *r, const plw_quiescent *q, plw_uncertainty *u) {
    const bool plate = beyond(q->plate_volts, r->plate_volts_least, r->plate_volts_most);
    const bool screen = beyond(q->screen_volts, r->screen_volts_least, r->screen_volts_most);
    u->outside_data = plate || screen;
    u->outside[0] = '\0';
    if (u->outside_data) {
        snprintf(u->outside, sizeof u->outside, "%s volts %.0f V, the data cover %.0f to %.0f V",
                 plate ? "plate" : "screen", plate ? q->plate_volts : q->screen_volts,
                 plate ? r->plate_volts_least : r->screen_volts_least,
                 plate ? r->plate_volts_most : r->screen_volts_most);
    }
}

/* One standard deviation, as part of one, of a median error in percent. */
static double model_part(double left_out_percent, double fit_percent) {
    if (isfinite(left_out_percent)) {
        return fmax(left_out_percent / MEDIAN_OF_NORMAL / 100.0, LEAST_MODEL_ERROR);
    }
    return fmax(isfinite(fit_percent) ? fit_percent / MEDIAN_OF_NORMAL / 100.0 : 0.0, UNTRIED_MODEL_ERROR);
}

plw_status plw_uncertainty_estimate(const plw_stage *stage, const plw_quiescent *quiescent, const plw_signal *signal,
                                    plw_uncertainty *uncertainty, plw_error *error) {
    const plw_model *m = &stage->tube->model;
    figures strong;
    figures weak;
    plw_status status = solve_scaled(stage, 1.0 + PLW_TUBE_SPREAD, &strong, error);
    if (status == PLW_OK) {
        status = solve_scaled(stage, 1.0 - PLW_TUBE_SPREAD, &weak, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    plw_uncertainty u = {.outside_data = false};
    compare_region(&m->region, quiescent, &u);
    double model = model_part(m->left_out_error.plate_current_percent, m->fit_error.plate_current_percent);
    double power = model_part(m->left_out_error.power_percent, m->fit_error.power_percent);
    if (u.outside_data) { /* common practice, no source: beyond the data the fit's own errors no longer hold */
        model *= 2.0;
        power *= 2.0;
    }
    const double tubes = PLW_TUBE_SPREAD;
    u.model_percent = 100.0 * model;
    u.plate_amps = deviation(strong.plate_amps, weak.plate_amps, model, tubes, 0.0);
    u.plate_watts = deviation(strong.plate_watts, weak.plate_watts, model, tubes, 0.0);
    u.cathode_volts = deviation(strong.cathode_volts, weak.cathode_volts, model, tubes, 0.0);
    u.speaker_watts = deviation(strong.speaker_watts, weak.speaker_watts, model, tubes, power * signal->speaker_watts);
    u.model_dominates = u.plate_amps.model > u.plate_amps.tubes;
    *uncertainty = u;
    return PLW_OK;
}
