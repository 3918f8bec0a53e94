/* Nonlinear least squares by GSL.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/least_squares.h"

#include <gsl/gsl_blas.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_multifit_nlinear.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Below this own share the rounding of numeric derivatives hides what a coordinate does apart from the others. */
#define OWN_SHARE_LEAST 1e-7

/* A residual where there is none: any place inside the domain is better, and its square does not overflow. */
#define OUTSIDE 1e100

typedef struct {
    const plw_least_squares *problem;
    double *place;    /* p, for the callback */
    double *residual; /* n */
} bridge;

/* GSL asks for residuals in vectors of any stride (a column of the derivatives), the callback writes plain arrays. */
static int evaluate(const gsl_vector *place, void *context, gsl_vector *out) {
    const bridge *b = context;
    for (size_t index = 0; index < b->problem->p; index++) {
        b->place[index] = gsl_vector_get(place, index);
    }
    b->problem->residuals(b->place, b->problem->context, b->residual);
    for (size_t index = 0; index < b->problem->n; index++) {
        gsl_vector_set(out, index, isfinite(b->residual[index]) ? b->residual[index] : OUTSIDE);
    }
    return GSL_SUCCESS;
}

static bool all_finite(const double *values, size_t count) {
    for (size_t index = 0; index < count; index++) {
        if (!isfinite(values[index])) {
            return false;
        }
    }
    return true;
}

/* Is there memory for what GSL will ask for?  Its own failure would end the program. */
static bool memory_is_there(size_t n, size_t p) {
    enum { MATRICES = 6, VECTORS = 24, SPARE = 4096 }; /* generous counts of what the solver and the covariance hold */
    const size_t numbers = MATRICES * (n * p + p * p) + VECTORS * (n + p) + SPARE;
    void *block = malloc(numbers * sizeof(double));
    const bool there = block != NULL;
    free(block);
    return there;
}

static bool matrix_is_finite(const gsl_matrix *matrix) {
    for (size_t row = 0; row < matrix->size1; row++) {
        for (size_t column = 0; column < matrix->size2; column++) {
            if (!isfinite(gsl_matrix_get(matrix, row, column))) {
                return false;
            }
        }
    }
    return true;
}

/* Covariance, and the least share of a coordinate's effect that the others cannot imitate: the standard error that it
 * would have alone over the one that it has (the root of 1/VIF, the variance inflation factor).
 * Ret:  the share; 0 when a coordinate has no effect of its own at all: its rows and columns are NaN */
static double find_covariance(const gsl_matrix *derivatives, double *covariance) {
    const size_t p = derivatives->size2;
    gsl_matrix_view view = gsl_matrix_view_array(covariance, p, p);
    (void)gsl_multifit_nlinear_covar(derivatives, 0.0, &view.matrix);
    double least = 1.0;
    for (size_t index = 0; index < p; index++) {
        const gsl_vector_const_view column = gsl_matrix_const_column(derivatives, index);
        const double alone = gsl_blas_dnrm2(&column.vector);
        const double variance = covariance[index * p + index];
        if (alone > 0.0 && variance > 0.0) {
            least = fmin(least, 1.0 / (alone * sqrt(variance)));
            continue;
        }
        least = 0.0;
        for (size_t other = 0; other < p; other++) {
            covariance[index * p + other] = (double)NAN;
            covariance[other * p + index] = (double)NAN;
        }
    }
    return least;
}

static plw_settled settled_how(int status, int info) {
    switch (status) {
    case GSL_EMAXITER:
        return info == GSL_ENOPROG ? PLW_SETTLED_STUCK : PLW_SETTLED_LATE;
    case GSL_ENOPROG:
        return PLW_SETTLED_STUCK;
    default:
        return info == 1 ? PLW_SETTLED_STEP : PLW_SETTLED_GRADIENT;
    }
}

/* One run from one start.
 * In:   start[p]
 * Out:  on success *end and covariance[p * p]; the place stands in `work` */
static bool run(bridge *b, gsl_multifit_nlinear_workspace *work, const double *start, double *covariance,
                plw_least_squares_end *end) {
    const plw_least_squares *problem = b->problem;
    gsl_multifit_nlinear_fdf functions = {.f = evaluate, .n = problem->n, .p = problem->p, .params = b};
    problem->residuals(start, problem->context, b->residual);
    const gsl_vector_const_view from = gsl_vector_const_view_array(start, problem->p);
    if (!all_finite(start, problem->p) || !all_finite(b->residual, problem->n) ||
        gsl_multifit_nlinear_init(&from.vector, &functions, work) != GSL_SUCCESS) {
        return false;
    }
    int info = 0;
    const int status = gsl_multifit_nlinear_driver(problem->iterations_most, problem->tol_step, problem->tol_gradient,
                                                   0.0, NULL, NULL, &info, work);
    if (status != GSL_SUCCESS && status != GSL_EMAXITER && status != GSL_ENOPROG) {
        return false;
    }
    const gsl_vector *rest = gsl_multifit_nlinear_residual(work);
    double squares = 0.0;
    gsl_blas_ddot(rest, rest, &squares);
    const gsl_matrix *derivatives = gsl_multifit_nlinear_jac(work);
    if (!isfinite(squares) || !matrix_is_finite(derivatives)) {
        return false;
    }
    end->sum_of_squares = squares;
    end->settled = settled_how(status, info);
    end->iterations = gsl_multifit_nlinear_niter(work);
    end->own_share_least = find_covariance(derivatives, covariance);
    end->singular = end->own_share_least < OWN_SHARE_LEAST;
    return true;
}

static void keep(const gsl_multifit_nlinear_workspace *work, size_t p, const double *found_covariance, double *place,
                 double *covariance) {
    const gsl_vector *position = gsl_multifit_nlinear_position(work);
    for (size_t index = 0; index < p; index++) {
        place[index] = gsl_vector_get(position, index);
    }
    if (covariance != NULL) {
        memcpy(covariance, found_covariance, p * p * sizeof *covariance);
    }
}

static plw_status check(const plw_least_squares *problem, size_t count, plw_error *error) {
    if (problem->p == 0 || problem->n < problem->p || count == 0) {
        return plw_fail(error, PLW_E_USAGE, "least squares: %zu residuals, %zu coordinates, %zu starts", problem->n,
                        problem->p, count);
    }
    if (!(problem->tol_step > 0.0) || !(problem->tol_gradient > 0.0) || !(problem->difference_step >= 0.0) ||
        problem->iterations_most == 0) {
        return plw_fail(error, PLW_E_USAGE, "least squares: tolerances and number of iterations must be above zero");
    }
    return PLW_OK;
}

/* From every start, with memory at hand: scratch holds p + n + p * p numbers. */
static plw_status search(const plw_least_squares *problem, const double *starts, size_t count, double *scratch,
                         double *place, double *covariance, plw_least_squares_end *end, plw_error *error) {
    gsl_multifit_nlinear_parameters parameters = gsl_multifit_nlinear_default_parameters();
    if (problem->difference_step > 0.0) {
        parameters.h_df = problem->difference_step;
    }
    parameters.fdtype = problem->central ? GSL_MULTIFIT_NLINEAR_CTRDIFF : GSL_MULTIFIT_NLINEAR_FWDIFF;
    if (problem->careful) {
        parameters.trs = gsl_multifit_nlinear_trs_lmaccel;
        parameters.scale = gsl_multifit_nlinear_scale_levenberg;
    }
    gsl_multifit_nlinear_workspace *work =
        gsl_multifit_nlinear_alloc(gsl_multifit_nlinear_trust, &parameters, problem->n, problem->p);
    if (work == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "least squares: out of memory");
    }
    bridge b = {problem, scratch, scratch + problem->p};
    double *found_covariance = scratch + problem->p + problem->n;
    bool found = false;
    for (size_t start = 0; start < count; start++) {
        plw_least_squares_end trial = {.start = start};
        if (run(&b, work, starts + start * problem->p, found_covariance, &trial) &&
            (!found || trial.sum_of_squares < end->sum_of_squares)) {
            found = true;
            *end = trial;
            keep(work, problem->p, found_covariance, place, covariance);
        }
    }
    gsl_multifit_nlinear_free(work);
    return found ? PLW_OK : plw_fail(error, PLW_E_NO_CONVERGENCE, "least squares: no start came to an end");
}

plw_status plw_least_squares_solve(const plw_least_squares *problem, const double *starts, size_t count, double *place,
                                   double *covariance, plw_least_squares_end *end, plw_error *error) {
    const plw_status status = check(problem, count, error);
    if (status != PLW_OK) {
        return status;
    }
    const size_t p = problem->p;
    double *scratch = malloc((p + problem->n + p * p) * sizeof *scratch);
    if (scratch == NULL || !memory_is_there(problem->n, p)) {
        free(scratch);
        return plw_fail(error, PLW_E_NO_MEMORY, "least squares: out of memory");
    }
    const plw_status result = search(problem, starts, count, scratch, place, covariance, end, error);
    free(scratch);
    return result;
}
