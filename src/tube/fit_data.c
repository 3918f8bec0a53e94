/* Observations of a fit.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/fit_data.h"

#include <math.h>

#define UNKNOWN ((double)NAN)
#define FAR_OFF 20.0 /* standard deviations of an observation that the law cannot make at all */

/* Standard deviations by which printed figures are believed.  Ratios as parts of one, distortion in percentage points.
 * Makers' tables round to two or three digits, and editions differ by about this much (common practice, no source); of
 * values within that, those under which rows left out of a fit come back best over the whole catalogue
 * (tests/laws/README.md). */
#define PLATE_CURRENT_DEVIATION 0.013
#define SCREEN_CURRENT_DEVIATION 0.06
#define GM_DEVIATION 0.052
#define PLATE_RESISTANCE_DEVIATION_SCREENED 0.13
#define PLATE_RESISTANCE_DEVIATION_TRIODE 0.041
#define MU_DEVIATION 0.047
#define INNER_MU_DEVIATION 0.10
#define PLATE_CURRENT_DRIVEN_DEVIATION 0.04
#define SCREEN_CURRENT_DRIVEN_DEVIATION 0.18
#define POWER_DEVIATION 0.028
#define DISTORTION_DEVIATION_POINTS 0.5
#define SECOND_DEVIATION_POINTS 0.5
#define THIRD_DEVIATION_POINTS 1.0
#define CUT_OFF_DEVIATION 0.7
#define CUT_OFF_FLOOR_AMPS 1e-5
#define CURVE_DEVIATION 0.05         /* of the current */
#define CURVE_READING_DEVIATION 0.02 /* of the largest current on the curves: reading off a chart */
#define CURVE_LEAST_DEVIATION 0.002  /* the same where the uncertainty is stated: no meter is better over its range */

static const char *const names[PLW_SEEN_COUNT] = {"plate current",
                                                  "screen current",
                                                  "gm",
                                                  "plate resistance",
                                                  "mu",
                                                  "plate current at full drive",
                                                  "screen current at full drive",
                                                  "power",
                                                  "distortion",
                                                  "2nd harmonic",
                                                  "3rd harmonic"};

const char *plw_seen_name(plw_seen what) {
    return names[what];
}

double plw_prediction_figure(const plw_prediction *p, plw_seen what) {
    const double figures[PLW_SEEN_COUNT] = {p->plate_amps,
                                            p->screen_amps,
                                            p->gm_siemens,
                                            p->plate_resistance_ohms,
                                            p->mu,
                                            p->plate_amps_full_drive,
                                            p->screen_amps_full_drive,
                                            p->power_watts,
                                            p->thd_percent,
                                            p->h2_percent,
                                            p->h3_percent};
    return figures[what];
}

static void add(plw_observations *all, plw_observation o) {
    if (isfinite(o.printed) && all->count < PLW_RESIDUALS_MOST) {
        all->observation[all->count++] = o;
    }
}

static void add_ratio(plw_observations *all, bool is_row, size_t index, plw_seen what, double printed,
                      double deviation) {
    if (printed > 0.0) {
        add(all, (plw_observation){what, is_row, index, printed, true, deviation, 0.0});
    }
}

static void add_difference(plw_observations *all, bool is_row, size_t index, plw_seen what, double printed,
                           double deviation) {
    add(all, (plw_observation){what, is_row, index, printed, false, deviation, 0.0});
}

/* Small-signal constants.  Of a screened tube in its own connection mu is not printed as such. */
static void add_constants(plw_observations *all, bool is_row, size_t index, bool as_triode, double gm,
                          double resistance, double mu) {
    add_ratio(all, is_row, index, PLW_SEEN_GM, gm, GM_DEVIATION);
    add_ratio(all, is_row, index, PLW_SEEN_PLATE_RESISTANCE, resistance,
              as_triode ? PLATE_RESISTANCE_DEVIATION_TRIODE : PLATE_RESISTANCE_DEVIATION_SCREENED);
    if (as_triode) {
        add_ratio(all, is_row, index, PLW_SEEN_MU, mu, MU_DEVIATION);
    }
}

/* A line that states its uncertainty gives that of its plate current; its other figures are believed in proportion. */
static double weight_of(double uncertainty_percent) {
    return uncertainty_percent > 0.0 ? 0.01 * uncertainty_percent / PLATE_CURRENT_DEVIATION : 1.0;
}

static void weigh(plw_observations *all, size_t from, double factor) {
    for (size_t index = from; index < all->count; index++) {
        all->observation[index].deviation *= factor;
    }
}

static double curve_deviation(const plw_point *point, double largest_curve_amps) {
    if (point->uncertainty_percent > 0.0) {
        return 0.01 * point->uncertainty_percent * point->plate_amps + CURVE_LEAST_DEVIATION * largest_curve_amps;
    }
    return CURVE_DEVIATION * point->plate_amps + CURVE_READING_DEVIATION * largest_curve_amps;
}

static void add_row(plw_observations *all, size_t index) {
    const plw_row *r = &all->tube->rows[index];
    const bool as_triode = !all->screened || r->connection == PLW_CONNECTION_TRIODE;
    add_ratio(all, true, index, PLW_SEEN_PLATE_CURRENT, r->plate_amps, PLATE_CURRENT_DEVIATION);
    add_constants(all, true, index, as_triode, r->gm_siemens, r->plate_resistance_ohms, r->mu);
    if (!as_triode) {
        add_ratio(all, true, index, PLW_SEEN_SCREEN_CURRENT, r->screen_amps, SCREEN_CURRENT_DEVIATION);
    }
    if (isnan(r->drive_peak_volts) || isnan(r->load_ohms) || r->undistorted) {
        return;
    }
    add_ratio(all, true, index, PLW_SEEN_POWER, r->power_watts, POWER_DEVIATION);
    add_ratio(all, true, index, PLW_SEEN_PLATE_CURRENT_DRIVEN, r->plate_amps_full_drive,
              PLATE_CURRENT_DRIVEN_DEVIATION);
    if (!as_triode) {
        add_ratio(all, true, index, PLW_SEEN_SCREEN_CURRENT_DRIVEN, r->screen_amps_full_drive,
                  SCREEN_CURRENT_DRIVEN_DEVIATION);
    }
    add_difference(all, true, index, PLW_SEEN_DISTORTION, r->thd_percent, DISTORTION_DEVIATION_POINTS);
    add_difference(all, true, index, PLW_SEEN_SECOND, r->h2_percent, SECOND_DEVIATION_POINTS);
    add_difference(all, true, index, PLW_SEEN_THIRD, r->h3_percent, THIRD_DEVIATION_POINTS);
}

static void add_point(plw_observations *all, size_t index, double largest_curve_amps) {
    const plw_point *p = &all->tube->points[index];
    const bool as_triode = !all->screened || p->connection == PLW_CONNECTION_TRIODE;
    switch (p->kind) {
    case PLW_POINT_INNER_MU:
        if (all->screened && !as_triode) {
            add_ratio(all, false, index, PLW_SEEN_MU, p->mu, INNER_MU_DEVIATION);
        }
        break;
    case PLW_POINT_CUT_OFF:
        add(all, (plw_observation){PLW_SEEN_PLATE_CURRENT, false, index, p->plate_amps, true,
                                   p->uncertainty_percent > 0.0 ? 0.01 * p->uncertainty_percent : CUT_OFF_DEVIATION,
                                   CUT_OFF_FLOOR_AMPS});
        break;
    case PLW_POINT_CURVE:
        add_difference(all, false, index, PLW_SEEN_PLATE_CURRENT, p->plate_amps,
                       curve_deviation(p, largest_curve_amps));
        break;
    case PLW_POINT_CHARACTERISTICS:
        add_ratio(all, false, index, PLW_SEEN_PLATE_CURRENT, p->plate_amps, PLATE_CURRENT_DEVIATION);
        add_constants(all, false, index, as_triode, p->gm_siemens, p->plate_resistance_ohms, p->mu);
        if (!as_triode) {
            add_ratio(all, false, index, PLW_SEEN_SCREEN_CURRENT, p->screen_amps, SCREEN_CURRENT_DEVIATION);
        }
        break;
    case PLW_POINT_REMARK:
        break;
    }
}

void plw_observations_collect(const plw_tube *tube, size_t without_row, bool without_triode_connection,
                              plw_observations *all) {
    all->tube = tube;
    all->count = 0;
    all->screened = tube->kind == PLW_KIND_PENTODE || tube->kind == PLW_KIND_BEAM;
    double largest = 0.0;
    for (size_t index = 0; index < tube->points_count; index++) {
        const plw_point *p = &tube->points[index];
        if (p->kind == PLW_POINT_CURVE && p->plate_amps > largest) {
            largest = p->plate_amps;
        }
    }
    for (size_t index = 0; index < tube->rows_count; index++) {
        const plw_row *r = &tube->rows[index];
        const bool left_out = all->screened && without_triode_connection && r->connection == PLW_CONNECTION_TRIODE;
        if (index != without_row && plw_row_is_fitted(r) && !left_out) {
            const size_t from = all->count;
            add_row(all, index);
            weigh(all, from, weight_of(r->uncertainty_percent));
        }
    }
    for (size_t index = 0; index < tube->points_count; index++) {
        const plw_point *p = &tube->points[index];
        const bool left_out = all->screened && without_triode_connection && p->connection == PLW_CONNECTION_TRIODE;
        if (plw_point_is_fitted(p) && !left_out) {
            const size_t from = all->count;
            add_point(all, index, largest);
            if (p->kind == PLW_POINT_CHARACTERISTICS || p->kind == PLW_POINT_INNER_MU) {
                weigh(all, from, weight_of(p->uncertainty_percent));
            }
        }
    }
}

double plw_observation_residual(const plw_observation *o, double predicted) {
    if (!isfinite(predicted)) {
        return FAR_OFF;
    }
    if (!o->by_ratio) {
        return (predicted - o->printed) / o->deviation;
    }
    const double above = predicted + o->floor;
    return above > 0.0 ? log(above / (o->printed + o->floor)) / o->deviation : -FAR_OFF / o->deviation;
}

void plw_observations_predict(const plw_observations *all, const plw_law *law, double *predicted) {
    plw_prediction prediction = {0};
    bool valid = false;
    for (size_t index = 0; index < all->count; index++) {
        const plw_observation *o = &all->observation[index];
        const plw_observation *last = index > 0 ? &all->observation[index - 1] : NULL;
        if (last == NULL || last->is_row != o->is_row || last->index != o->index) {
            valid = (o->is_row ? plw_predict_row(law, &all->tube->rows[o->index], &prediction, NULL)
                               : plw_predict_point(law, &all->tube->points[o->index], &prediction, NULL)) == PLW_OK;
        }
        predicted[index] = valid ? plw_prediction_figure(&prediction, o->what) : UNKNOWN;
    }
}
