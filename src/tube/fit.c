/* Fitting a tube's law to what is printed of it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/fit.h"

#include <gsl/gsl_blas.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_multifit_nlinear.h>
#include <math.h>
#include <stdint.h>
#include <string.h>

#include "tube/fit_data.h"
#include "tube/fit_prior.h"

enum { ITERATIONS_MOST = 120 };

typedef struct {
    const plw_observations *observations;
    const plw_prior *prior;
    plw_law_kind kind;
    size_t coefficients;
} problem;

static plw_law law_of(const problem *p, const gsl_vector *place) {
    double coordinates[PLW_LAW_COEFFICIENTS_MOST];
    for (size_t index = 0; index < p->coefficients; index++) {
        coordinates[index] = gsl_vector_get(place, index);
    }
    return plw_law_at_coordinates(p->kind, coordinates);
}

/* Residuals: the observations first, then what is known beforehand of each coefficient. */
static int residuals(const gsl_vector *place, void *context, gsl_vector *out) {
    const problem *p = context;
    const plw_law law = law_of(p, place);
    double predicted[PLW_RESIDUALS_MOST];
    plw_observations_predict(p->observations, &law, predicted);
    const size_t count = p->observations->count;
    for (size_t index = 0; index < count; index++) {
        gsl_vector_set(out, index, plw_observation_residual(&p->observations->observation[index], predicted[index]));
    }
    for (size_t index = 0; index < p->coefficients; index++) {
        const double expected = p->prior->expected[index];
        gsl_vector_set(out, count + index, (gsl_vector_get(place, index) - expected) / p->prior->deviation[index]);
    }
    return GSL_SUCCESS;
}

/* One run of Levenberg-Marquardt.
 * Out:  on success sum of squares, coefficients and (wanted) the standard errors of their coordinates */
static bool run(problem *p, gsl_multifit_nlinear_workspace *work, gsl_vector *start, double *sum_of_squares,
                plw_law *law, double *coordinate_error) {
    gsl_multifit_nlinear_fdf functions = {
        .f = residuals,
        .n = p->observations->count + p->coefficients,
        .p = p->coefficients,
        .params = p,
    };
    if (gsl_multifit_nlinear_init(start, &functions, work) != GSL_SUCCESS) {
        return false;
    }
    int info = 0;
    const int status = gsl_multifit_nlinear_driver(ITERATIONS_MOST, 1e-8, 1e-8, 0.0, NULL, NULL, &info, work);
    if (status != GSL_SUCCESS && status != GSL_EMAXITER && status != GSL_ENOPROG) {
        return false;
    }
    const gsl_vector *rest = gsl_multifit_nlinear_residual(work);
    gsl_blas_ddot(rest, rest, sum_of_squares);
    if (!isfinite(*sum_of_squares)) {
        return false;
    }
    *law = law_of(p, gsl_multifit_nlinear_position(work));
    if (coordinate_error != NULL) {
        gsl_matrix *covariance = gsl_matrix_alloc(p->coefficients, p->coefficients);
        if (covariance == NULL) {
            return false;
        }
        gsl_multifit_nlinear_covar(gsl_multifit_nlinear_jac(work), 0.0, covariance);
        for (size_t index = 0; index < p->coefficients; index++) {
            coordinate_error[index] = sqrt(gsl_matrix_get(covariance, index, index));
        }
        gsl_matrix_free(covariance);
    }
    return true;
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

/* Fit from the law near by, or from every start, and keep the best. */
static plw_status best_fit(problem *p, const plw_law *near, plw_law *law, double *coordinate_error,
                           double *sum_of_squares, plw_error *error) {
    gsl_multifit_nlinear_parameters parameters = gsl_multifit_nlinear_default_parameters();
    parameters.h_df = 1e-5; /* of a logarithm: larger than the solver's own noise, small against its curvature */
    const size_t n = p->observations->count + p->coefficients;
    gsl_multifit_nlinear_workspace *work =
        gsl_multifit_nlinear_alloc(gsl_multifit_nlinear_trust, &parameters, n, p->coefficients);
    gsl_vector *start = gsl_vector_alloc(p->coefficients);
    if (work == NULL || start == NULL) {
        gsl_multifit_nlinear_free(work);
        gsl_vector_free(start);
        return plw_fail(error, PLW_E_NO_MEMORY, "fit: out of memory");
    }
    bool found = false;
    const size_t starts = near != NULL ? 1 : PLW_STARTS;
    for (size_t attempt = 0; attempt < starts; attempt++) {
        plw_law trial = near != NULL ? *near : plw_prior_start(p->observations, p->prior, attempt);
        if (near == NULL) {
            scale_start(p, &trial);
        }
        double coordinates[PLW_LAW_COEFFICIENTS_MOST];
        plw_law_coordinates(&trial, coordinates);
        for (size_t index = 0; index < p->coefficients; index++) {
            gsl_vector_set(start, index, coordinates[index]);
        }
        double squares;
        double errors[PLW_LAW_COEFFICIENTS_MOST];
        if (run(p, work, start, &squares, &trial, coordinate_error != NULL ? errors : NULL) &&
            (!found || squares < *sum_of_squares)) {
            found = true;
            *law = trial;
            *sum_of_squares = squares;
            if (coordinate_error != NULL) {
                memcpy(coordinate_error, errors, sizeof errors);
            }
        }
    }
    gsl_multifit_nlinear_free(work);
    gsl_vector_free(start);
    return found ? PLW_OK : plw_fail(error, PLW_E_NO_CONVERGENCE, "fit: no start came to an end");
}

static plw_status fit_observations(const plw_observations *observations, const plw_law *near, plw_law *law,
                                   double *relative_error, double *sum_of_squares, plw_error *error) {
    const plw_prior prior = plw_prior_for(observations);
    const plw_law_kind kind = observations->screened ? PLW_LAW_PENTODE : PLW_LAW_TRIODE;
    problem p = {observations, &prior, kind, plw_law_coefficient_count(kind)};
    const plw_status status = best_fit(&p, near, law, relative_error, sum_of_squares, error);
    if (status == PLW_OK && relative_error != NULL) {
        for (size_t index = 0; index < p.coefficients; index++) {
            /* Where the rows hardly narrow what was expected beforehand, they do not determine the coefficient. */
            const bool determined = relative_error[index] <= 0.8 * prior.deviation[index];
            relative_error[index] =
                determined ? plw_coordinate_error_relative(law, index, relative_error[index]) : (double)NAN;
        }
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
    double squares;
    return fit_observations(&observations, near, law, NULL, &squares, error);
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
    const double unit = pow(10.0, floor(log10(fabs(value))) - digits + 1);
    return round(value / unit) * unit;
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
    memset(fit, 0, sizeof *fit);
    double squares;
    const plw_status status =
        fit_observations(&observations, NULL, &fit->model.law, fit->model.relative_error, &squares, error);
    if (status != PLW_OK) {
        return status;
    }
    for (size_t index = 0; index < plw_law_coefficient_count(fit->model.law.kind); index++) {
        fit->model.law.coefficient[index] = rounded(fit->model.law.coefficient[index], COEFFICIENT_DIGITS);
        fit->model.relative_error[index] = rounded(fit->model.relative_error[index], ERROR_DIGITS);
    }
    list_residuals(&observations, &fit->model.law, fit);
    plw_fit_errors(tube, leave_out, &fit->model);
    round_errors(&fit->model.fit_error);
    round_errors(&fit->model.left_out_error);
    return PLW_OK;
}
