/* The model's error and the spread of tubes, carried through the circuit.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/uncertainty.h"

#include <math.h>
#include <stdio.h>

#define MEDIAN_OF_NORMAL 0.6745  /* median of |x| over the standard deviation of x, for normal x */
#define LEAST_MODEL_ERROR 0.02   /* no fit to rounded tables is better than the rounding */
#define UNTRIED_MODEL_ERROR 0.05 /* with one row only, nothing could be left out to try the fit */
#define ROWLESS_MODEL_ERROR 0.10 /* with none, a point or two: as rows of tubes printed twice, left out at the worst */
#define DATA_RANGE_LEAST 0.7
#define DATA_RANGE_MOST 1.5

enum { PLATE_AMPS, PLATE_WATTS, CATHODE_VOLTS, SPEAKER_WATTS, FIGURES };

/* The figures with something one deviation above and one below. */
typedef struct {
    double above[FIGURES], below[FIGURES];
} pair;

static plw_status solve_figures(const plw_stage *stage, double figure[FIGURES], plw_error *error) {
    plw_quiescent q;
    plw_signal s;
    plw_status status = plw_quiescent_solve(stage, &q, error);
    if (status == PLW_OK) {
        status = plw_signal_solve(stage, &q, &s, error);
    }
    if (status == PLW_OK) {
        figure[PLATE_AMPS] = q.plate_amps;
        figure[PLATE_WATTS] = q.plate_watts;
        figure[CATHODE_VOLTS] = q.cathode_volts;
        figure[SPEAKER_WATTS] = s.speaker_watts;
    }
    return status;
}

static plw_status solve_with_tubes(const plw_stage *stage, pair *p, plw_error *error) {
    for (int side = 0; side < 2; side++) {
        plw_tube tube = *stage->tube;
        plw_law_scale(&tube.model.law, side == 0 ? 1.0 + PLW_TUBE_SPREAD : 1.0 - PLW_TUBE_SPREAD);
        plw_stage scaled = *stage;
        scaled.tube = &tube;
        const plw_status status = solve_figures(&scaled, side == 0 ? p->above : p->below, error);
        if (status != PLW_OK) {
            return status;
        }
    }
    return PLW_OK;
}

/* A supply given exactly makes no difference. */
static plw_status solve_with_supplies(const plw_stage *stage, double volts, pair *p, plw_error *error) {
    *p = (pair){{0}, {0}};
    for (int side = 0; side < 2 && volts > 0.0; side++) {
        plw_stage moved = *stage;
        moved.supply = plw_supply_moved(&stage->supply, side == 0 ? volts : -volts);
        const plw_status status = solve_figures(&moved, side == 0 ? p->above : p->below, error);
        if (status != PLW_OK) {
            return status;
        }
    }
    return PLW_OK;
}

/* Half the difference between one deviation above and below.  The model's error acts as a spread of tubes of its size;
 * of power it has one of its own besides. */
static plw_deviation deviation_of(int figure, const pair *tubes, const pair *supplies, double model, double own_model) {
    const double by_tubes = 0.5 * fabs(tubes->above[figure] - tubes->below[figure]);
    const double by_supply = 0.5 * fabs(supplies->above[figure] - supplies->below[figure]);
    const double by_model = hypot(by_tubes * model / PLW_TUBE_SPREAD, own_model);
    return (plw_deviation){by_model, by_tubes, by_supply, hypot(hypot(by_model, by_tubes), by_supply)};
}

const char *plw_deviation_cause_name(plw_deviation_cause cause) {
    return cause == PLW_BY_MODEL ? "model" : cause == PLW_BY_TUBES ? "tubes" : "supply";
}

static plw_deviation_cause dominant_cause(const plw_deviation *d) {
    if (d->supply > d->model && d->supply > d->tubes) {
        return PLW_BY_SUPPLY;
    }
    return d->model > d->tubes ? PLW_BY_MODEL : PLW_BY_TUBES;
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
static double model_part(const plw_model *model, double left_out_percent, double fit_percent) {
    if (isfinite(left_out_percent)) {
        return fmax(left_out_percent / MEDIAN_OF_NORMAL / 100.0, LEAST_MODEL_ERROR);
    }
    return fmax(isfinite(fit_percent) ? fit_percent / MEDIAN_OF_NORMAL / 100.0 : 0.0,
                model->rows_fitted > 0 ? UNTRIED_MODEL_ERROR : ROWLESS_MODEL_ERROR);
}

plw_status plw_uncertainty_estimate(const plw_stage *stage, const plw_quiescent *quiescent, const plw_signal *signal,
                                    double supply_volts_error, plw_uncertainty *uncertainty, plw_error *error) {
    const plw_model *m = &stage->tube->model;
    pair tubes;
    pair supplies;
    plw_status status = solve_with_tubes(stage, &tubes, error);
    if (status == PLW_OK) {
        status = solve_with_supplies(stage, supply_volts_error, &supplies, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    plw_uncertainty u = {.outside_data = false};
    compare_region(&m->region, quiescent, &u);
    double model = model_part(m, m->left_out_error.plate_current_percent, m->fit_error.plate_current_percent);
    double power = model_part(m, m->left_out_error.power_percent, m->fit_error.power_percent);
    if (u.outside_data) { /* common practice, no source: beyond the data the fit's own errors no longer hold */
        model *= 2.0;
        power *= 2.0;
    }
    u.model_percent = 100.0 * model;
    u.plate_amps = deviation_of(PLATE_AMPS, &tubes, &supplies, model, 0.0);
    u.plate_watts = deviation_of(PLATE_WATTS, &tubes, &supplies, model, 0.0);
    u.cathode_volts = deviation_of(CATHODE_VOLTS, &tubes, &supplies, model, 0.0);
    u.speaker_watts = deviation_of(SPEAKER_WATTS, &tubes, &supplies, model, power * signal->speaker_watts);
    u.dominant = dominant_cause(&u.plate_amps);
    *uncertainty = u;
    return PLW_OK;
}
