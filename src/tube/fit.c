/* Fitting a tube's law to what is printed of it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/fit.h"

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/least_squares.h"
#include "tube/fit_core.h"
#include "tube/fit_data.h"
#include "tube/fit_prior.h"

enum { ITERATIONS_MOST = 120 };

typedef struct {
    const plw_observations *observations;
    const plw_prior *prior;
    plw_law_kind kind;
    size_t coefficients;
} problem;

/* Residuals: the observations first, then what is known beforehand of each coefficient. */
static void residuals(const double *place, void *context, double *residual) {
    const problem *p = context;
    const plw_law law = plw_law_at_coordinates(p->kind, place);
    double predicted[PLW_RESIDUALS_MOST];
    plw_observations_predict(p->observations, &law, predicted);
    const size_t count = p->observations->count;
    for (size_t index = 0; index < count; index++) {
        residual[index] = plw_observation_residual(&p->observations->observation[index], predicted[index]);
    }
    for (size_t index = 0; index < p->coefficients; index++) {
        residual[count + index] = (place[index] - p->prior->expected[index]) / p->prior->deviation[index];
    }
}

/* Perveance of the start: the printed plate currents, met on average. */
static void scale_start(const problem *p, plw_law *start) {
    double predicted[PLW_RESIDUALS_MOST];
    plw_observations_predict(p->observations, start, predicted);
    double sum = 0.0;
    size_t count = 0;
    for (size_t index = 0; index < p->observations->count; index++) {
        const plw_observation *o = &p->observations->observation[index];
        if (o->what == PLW_SEEN_PLATE_CURRENT && o->by_ratio && o->floor == 0.0 && predicted[index] > 0.0) {
            sum += log(o->printed / predicted[index]);
            count++;
        }
    }
    if (count > 0) {
        plw_law_scale(start, exp(sum / (double)count));
    }
}

/* Fit from the law near by, or from every start, and keep the best.
 * Out:  *law, covariance[coefficients * coefficients] of its coordinates (may be NULL) */
static plw_status best_fit(problem *p, const plw_law *near, plw_law *law, double *covariance,
                           plw_least_squares_end *end, plw_error *error) {
    const plw_least_squares core = {
        .residuals = residuals,
        .context = p,
        .n = p->observations->count + p->coefficients,
        .p = p->coefficients,
        .difference_step = 1e-5, /* of a logarithm: larger than the solver's own noise, small against its curvature */
        .iterations_most = ITERATIONS_MOST,
        .tol_step = 1e-8,
        .tol_gradient = 1e-8,
    };
    const size_t count = near != NULL ? 1 : PLW_STARTS;
    double starts[PLW_STARTS * PLW_LAW_COEFFICIENTS_MOST];
    for (size_t attempt = 0; attempt < count; attempt++) {
        plw_law trial = near != NULL ? *near : plw_prior_start(p->observations, p->prior, attempt);
        if (near == NULL) {
            scale_start(p, &trial);
        }
        plw_law_coordinates(&trial, starts + attempt * p->coefficients);
    }
    double place[PLW_LAW_COEFFICIENTS_MOST];
    const plw_status status = plw_least_squares_solve(&core, starts, count, place, covariance, end, error);
    if (status == PLW_OK) {
        *law = plw_law_at_coordinates(p->kind, place);
    }
    return status;
}

/* By how much the errors are wider than the stated uncertainties of the figures make them: where the figures lie
 * farther off than those admit, by the root of chi squared per degree of freedom (Birge, 'The Calculation of Errors by
 * the Method of Least Squares', Physical Review 40, 1932, p. 207; from memory).  What is expected of each coefficient
 * beforehand counts as one more figure, so that as many degrees of freedom are left as there are observations. */
static double error_scale(const plw_least_squares_end *end, size_t observations) {
    return fmax(1.0, sqrt(end->sum_of_squares / (double)observations));
}

/* The fit with its covariance and standard errors. */
static plw_status fit_model(const plw_observations *observations, plw_fit *fit, plw_error *error) {
    plw_least_squares_end end;
    const plw_prior prior = plw_prior_for(observations);
    const plw_law_kind kind = observations->screened ? PLW_LAW_PENTODE : PLW_LAW_TRIODE;
    problem p = {observations, &prior, kind, plw_law_coefficient_count(kind)};
    plw_model *model = &fit->model;
    const plw_status status = best_fit(&p, NULL, &model->law, fit->covariance, &end, error);
    if (status != PLW_OK) {
        return status;
    }
    fit->error_scale = error_scale(&end, observations->count);
    fit->settled = end.settled != PLW_SETTLED_LATE && !end.singular;
    for (size_t index = 0; index < p.coefficients; index++) {
        const double deviation = sqrt(fit->covariance[index * p.coefficients + index]);
        /* Where the rows hardly narrow what was expected beforehand, they do not determine the coefficient. */
        const bool determined = deviation <= 0.8 * prior.deviation[index];
        model->relative_error[index] =
            determined ? plw_coordinate_error_relative(&model->law, index, fit->error_scale * deviation) : (double)NAN;
    }
    for (size_t index = 0; index < p.coefficients * p.coefficients; index++) {
        fit->covariance[index] *= fit->error_scale * fit->error_scale;
    }
    return PLW_OK;
}

plw_status plw_fit_observations(const plw_observations *observations, const plw_law *near, plw_law *law,
                                double *sum_of_squares, plw_error *error) {
    const plw_prior prior = plw_prior_for(observations);
    const plw_law_kind kind = observations->screened ? PLW_LAW_PENTODE : PLW_LAW_TRIODE;
    problem p = {observations, &prior, kind, plw_law_coefficient_count(kind)};
    plw_least_squares_end end;
    const plw_status status = best_fit(&p, near, law, NULL, &end, error);
    if (status == PLW_OK) {
        *sum_of_squares = end.sum_of_squares;
    }
    return status;
}

plw_status plw_fit_without(const plw_tube *tube, size_t row, bool without_triode_connection, const plw_law *near,
                           plw_law *law, plw_error *error) {
    plw_observations observations;
    plw_observations_collect(tube, row, without_triode_connection, &observations);
    bool has_current = false;
    for (size_t index = 0; index < observations.count; index++) {
        has_current = has_current || observations.observation[index].what == PLW_SEEN_PLATE_CURRENT;
    }
    if (!has_current) {
        return plw_fail(error, PLW_E_DATA, "%s: nothing is left to fit", tube->type);
    }
    double sum_of_squares;
    return plw_fit_observations(&observations, near, law, &sum_of_squares, error);
}

static void list_residuals(const plw_observations *observations, const plw_law *law, plw_fit *fit) {
    double predicted[PLW_RESIDUALS_MOST];
    plw_observations_predict(observations, law, predicted);
    fit->residuals = observations->count;
    fit->chi_squared = 0.0;
    for (size_t index = 0; index < observations->count; index++) {
        const plw_observation *o = &observations->observation[index];
        fit->residual[index] = (plw_residual){
            .quantity = plw_seen_name(o->what),
            .is_row = o->is_row,
            .index = o->index,
            .printed = o->printed,
            .predicted = predicted[index],
            .scaled = plw_observation_residual(o, predicted[index]),
        };
        fit->chi_squared += fit->residual[index].scaled * fit->residual[index].scaled;
    }
}

/* To `digits` significant digits: what a file needs, and stable against the last bits of a processor. */
static double rounded(double value, int digits) {
    if (!isfinite(value) || value == 0.0) {
        return value;
    }
    /* Powers of ten above one are exact: so the result is the double nearest to the decimal. */
    const int places = digits - 1 - (int)floor(log10(fabs(value)));
    const double power = pow(10.0, abs(places));
    return places >= 0 ? round(value * power) / power : round(value / power) * power;
}

enum { COEFFICIENT_DIGITS = 6, ERROR_DIGITS = 3 };

static void round_errors(plw_model_errors *e) {
    e->plate_current_percent = rounded(e->plate_current_percent, ERROR_DIGITS);
    e->screen_current_percent = rounded(e->screen_current_percent, ERROR_DIGITS);
    e->power_percent = rounded(e->power_percent, ERROR_DIGITS);
    e->distortion_points = rounded(e->distortion_points, ERROR_DIGITS);
}

plw_status plw_fit_tube(const plw_tube *tube, bool leave_out, plw_fit *fit, plw_error *error) {
    if (tube->kind == PLW_KIND_RECTIFIER) {
        return plw_fail(error, PLW_E_USAGE, "%s: a rectifier has no grid; its law is computed from its printed drop",
                        tube->type);
    }
    plw_observations observations;
    plw_observations_collect(tube, SIZE_MAX, false, &observations);
    if (observations.count < 3) {
        return plw_fail(error, PLW_E_DATA,
                        "%s: %zu figures that can be fitted; a row with plate current, gm and plate resistance is the "
                        "least",
                        tube->type, observations.count);
    }
    if (observations.count >= PLW_RESIDUALS_MOST) {
        return plw_fail(error, PLW_E_DATA, "%s: %d figures or more; thin the curves out", tube->type,
                        (int)PLW_RESIDUALS_MOST);
    }
    memset(fit, 0, sizeof *fit);
    const plw_status status = fit_model(&observations, fit, error);
    if (status != PLW_OK) {
        return status;
    }
    for (size_t index = 0; index < plw_law_coefficient_count(fit->model.law.kind); index++) {
        fit->model.law.coefficient[index] = rounded(fit->model.law.coefficient[index], COEFFICIENT_DIGITS);
        fit->model.relative_error[index] = rounded(fit->model.relative_error[index], ERROR_DIGITS);
    }
    list_residuals(&observations, &fit->model.law, fit);
    plw_fit_errors(tube, leave_out, &fit->model);
    plw_find_correlations(fit);
    plw_find_contradictions(&observations, fit);
    if (leave_out) {
        plw_find_outliers(&observations, fit);
    }
    round_errors(&fit->model.fit_error);
    round_errors(&fit->model.left_out_error);
    return PLW_OK;
}
