/* What a fit tells besides coefficients: correlations, outliers, uncertainty of what it predicts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "tube/fit_core.h"
#include "tube/fit_prior.h"

/* ---- correlations ------------------------------------------------------------------------------------------------ */

static int closest_first(const void *left, const void *right) {
    const double a = fabs(((const plw_fit_correlation *)left)->correlation);
    const double b = fabs(((const plw_fit_correlation *)right)->correlation);
    return (a < b) - (a > b);
}

void plw_find_correlations(plw_fit *fit) {
    const size_t count = plw_law_coefficient_count(fit->model.law.kind);
    double covariance[PLW_LAW_COEFFICIENTS_MOST * PLW_LAW_COEFFICIENTS_MOST];
    for (size_t index = 0; index < count * count; index++) {
        covariance[index] = fit->covariance[index];
    }
    plw_covariance_of_coefficients(count, covariance);
    fit->correlations = 0;
    for (size_t first = 0; first < count; first++) {
        for (size_t second = first + 1; second < count; second++) {
            const double scale = sqrt(covariance[first * count + first] * covariance[second * count + second]);
            const double correlation = covariance[first * count + second] / scale;
            const bool determined =
                isfinite(fit->model.relative_error[first]) && isfinite(fit->model.relative_error[second]);
            if (determined && fabs(correlation) >= PLW_FIT_CORRELATION_LEAST &&
                fit->correlations < PLW_FIT_CORRELATIONS_MOST) {
                fit->correlation[fit->correlations++] = (plw_fit_correlation){first, second, correlation};
            }
        }
    }
    qsort(fit->correlation, fit->correlations, sizeof fit->correlation[0], closest_first);
}

/* ---- outliers ---------------------------------------------------------------------------------------------------- */

/* Figures of a row or point that is hardly off itself are not tried without: the fit is not drawn by them. */
#define WORTH_TRYING 1.5

static bool same_line(const plw_observation *one, const plw_observation *other) {
    return one->is_row == other->is_row && one->index == other->index;
}

void plw_observations_without(const plw_observations *all, bool is_row, size_t index, plw_observations *rest) {
    rest->tube = all->tube;
    rest->screened = all->screened;
    rest->count = 0;
    for (size_t i = 0; i < all->count; i++) {
        const plw_observation *o = &all->observation[i];
        if (o->is_row != is_row || o->index != index) {
            rest->observation[rest->count++] = *o;
        }
    }
}

/* The figure of a line that a law makes farthest off.  Ret: its scaled residual, absolute */
static double farthest(const plw_observations *all, const double *predicted, const plw_observation *line,
                       plw_fit_outlier *found) {
    double most = 0.0;
    for (size_t index = 0; index < all->count; index++) {
        const plw_observation *o = &all->observation[index];
        const double scaled = plw_observation_residual(o, predicted[index]);
        if (same_line(o, line) && fabs(scaled) >= most) {
            most = fabs(scaled);
            *found = (plw_fit_outlier){o->is_row,        o->index, plw_seen_name(o->what), o->printed,
                                       predicted[index], scaled,   found->chi_squared_fall};
        }
    }
    return most;
}

static bool has_current(const plw_observations *all) {
    for (size_t index = 0; index < all->count; index++) {
        if (all->observation[index].what == PLW_SEEN_PLATE_CURRENT) {
            return true;
        }
    }
    return false;
}

/* Room for the sets of observations and what is predicted of them: too large for a stack. */
typedef struct {
    plw_observations left, rest;
    double predicted[PLW_RESIDUALS_MOST], without[PLW_RESIDUALS_MOST];
} bench;

/* Of the observations left, the line whose absence makes the sum of squares fall most, if it is an outlier. */
static bool grossest(bench *b, const plw_law *law, double sum_of_squares, plw_fit_outlier *worst) {
    bool found = false;
    plw_observations_predict(&b->left, law, b->predicted);
    for (size_t index = 0; index < b->left.count; index++) {
        const plw_observation *line = &b->left.observation[index];
        plw_fit_outlier trial = {.chi_squared_fall = 0.0};
        const bool seen = index > 0 && same_line(line, line - 1);
        if (seen || farthest(&b->left, b->predicted, line, &trial) < WORTH_TRYING) {
            continue;
        }
        plw_law without;
        double squares;
        plw_observations_without(&b->left, line->is_row, line->index, &b->rest);
        if (!has_current(&b->rest) || plw_fit_observations(&b->rest, law, &without, &squares, NULL) != PLW_OK) {
            continue;
        }
        plw_observations_predict(&b->left, &without, b->without);
        trial.chi_squared_fall = sum_of_squares - squares;
        const bool gross = farthest(&b->left, b->without, line, &trial) > PLW_FIT_OUTLIER_SCALED &&
                           trial.chi_squared_fall > PLW_FIT_OUTLIER_FALL;
        if (gross && (!found || trial.chi_squared_fall > worst->chi_squared_fall)) {
            *worst = trial;
            found = true;
        }
    }
    return found;
}

void plw_find_outliers(const plw_observations *observations, plw_fit *fit) {
    bench *b = malloc(sizeof *b);
    fit->outliers = 0;
    if (b == NULL) {
        return;
    }
    b->left = *observations;
    plw_law law = fit->model.law;
    double squares;
    /* The grossest is taken out before the next is looked for: it makes its neighbours look bad. */
    while (fit->outliers < PLW_FIT_OUTLIERS_MOST &&
           plw_fit_observations(&b->left, &law, &law, &squares, NULL) == PLW_OK &&
           grossest(b, &law, squares, &fit->outlier[fit->outliers])) {
        const plw_fit_outlier *o = &fit->outlier[fit->outliers++];
        plw_observations_without(&b->left, o->is_row, o->index, &b->rest);
        b->left = b->rest;
    }
    free(b);
}

/* ---- figures that cannot be right together ----------------------------------------------------------------------- */

bool plw_residual_is_gross(const plw_residual *residual) {
    return !(fabs(residual->scaled) <= PLW_FIT_GROSS_SCALED); /* nor what the law cannot make at all */
}

bool plw_fit_is_gross(const plw_fit *fit) {
    for (size_t i = 0; i < fit->residuals; i++) {
        if (plw_residual_is_gross(&fit->residual[i])) {
            return true;
        }
    }
    return false;
}

/* ---- uncertainty of what is predicted ---------------------------------------------------------------------------- */

enum { FIGURES = sizeof(plw_prediction) / sizeof(double) };

typedef union {
    plw_prediction named;
    double figure[FIGURES];
} prediction_figures;

/* Slope of each figure along one coordinate, by differences to both sides. */
static plw_status slope_along(const plw_law *law, const plw_row *row, size_t index, prediction_figures *slope,
                              plw_error *error) {
    const double step = 1e-3; /* of a coordinate: far above the solver's noise */
    prediction_figures sides[2];
    for (int side = 0; side < 2; side++) {
        double coordinates[PLW_LAW_COEFFICIENTS_MOST];
        plw_law_coordinates(law, coordinates);
        coordinates[index] += side == 0 ? -step : step;
        const plw_law moved = plw_law_at_coordinates(law->kind, coordinates);
        const plw_status status = plw_predict_row(&moved, row, &sides[side].named, error);
        if (status != PLW_OK) {
            return status;
        }
    }
    for (size_t figure = 0; figure < FIGURES; figure++) {
        slope->figure[figure] = (sides[1].figure[figure] - sides[0].figure[figure]) / (2.0 * step);
    }
    return PLW_OK;
}

plw_status plw_fit_predict_row(const plw_fit *fit, const plw_row *row, plw_prediction *prediction,
                               plw_prediction *deviation, plw_error *error) {
    const plw_law *law = &fit->model.law;
    const size_t count = plw_law_coefficient_count(law->kind);
    prediction_figures middle;
    prediction_figures spread;
    prediction_figures slope[PLW_LAW_COEFFICIENTS_MOST];
    plw_status status = plw_predict_row(law, row, &middle.named, error);
    for (size_t index = 0; index < count && status == PLW_OK; index++) {
        status = slope_along(law, row, index, &slope[index], error);
    }
    if (status != PLW_OK) {
        return status;
    }
    for (size_t figure = 0; figure < FIGURES; figure++) {
        double variance = 0.0;
        for (size_t one = 0; one < count; one++) {
            for (size_t other = 0; other < count; other++) {
                variance +=
                    slope[one].figure[figure] * fit->covariance[one * count + other] * slope[other].figure[figure];
            }
        }
        spread.figure[figure] = isnan(middle.figure[figure]) ? (double)NAN : sqrt(fmax(variance, 0.0));
    }
    *prediction = middle.named;
    *deviation = spread.named;
    return PLW_OK;
}
