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

/* Columns of the derivatives as seen by the covariance: scaled to length 1, then each made perpendicular to those
 * before it (modified Gram-Schmidt, twice for rounding), so that derivatives = perpendicular * triangle * lengths. */
typedef struct {
    size_t n, p;
    double *perpendicular; /* p columns of n */
    double *triangle;      /* p * p, upper, by rows; a zero on the diagonal: those before it make the column up */
    double *length;        /* p */
} factors;

static double dot(const double *one, const double *other, size_t count) {
    double sum = 0.0;
    for (size_t index = 0; index < count; index++) {
        sum += one[index] * other[index];
    }
    return sum;
}

/* Take the parts along the earlier columns out of a column. */
static void make_perpendicular(factors *f, size_t column) {
    double *c = f->perpendicular + column * f->n;
    for (int pass = 0; pass < 2; pass++) {
        for (size_t before = 0; before < column; before++) {
            const double *b = f->perpendicular + before * f->n;
            const double along = dot(b, c, f->n);
            f->triangle[before * f->p + column] += along;
            for (size_t row = 0; row < f->n; row++) {
                c[row] -= along * b[row];
            }
        }
    }
    double left = sqrt(dot(c, c, f->n));
    left = left > OWN_SHARE_LEAST ? left : 0.0;
    f->triangle[column * f->p + column] = left;
    for (size_t row = 0; row < f->n; row++) {
        c[row] = left > 0.0 ? c[row] / left : 0.0;
    }
}

static void factorise(const gsl_matrix *derivatives, factors *f) {
    memset(f->triangle, 0, f->p * f->p * sizeof *f->triangle);
    for (size_t column = 0; column < f->p; column++) {
        double *c = f->perpendicular + column * f->n;
        for (size_t row = 0; row < f->n; row++) {
            c[row] = gsl_matrix_get(derivatives, row, column);
        }
        f->length[column] = sqrt(dot(c, c, f->n));
        for (size_t row = 0; row < f->n; row++) {
            c[row] = f->length[column] > 0.0 ? c[row] / f->length[column] : 0.0;
        }
        make_perpendicular(f, column);
    }
}

/* Solve triangle * x = unit vector `column` from below; where the diagonal is zero x is zero.
 * Out:  x[p] */
static void solve_triangle(const factors *f, const double *right, double *x) {
    for (size_t row = f->p; row-- > 0;) {
        double sum = right[row];
        for (size_t other = row + 1; other < f->p; other++) {
            sum -= f->triangle[row * f->p + other] * x[other];
        }
        const double diagonal = f->triangle[row * f->p + row];
        x[row] = diagonal > 0.0 ? sum / diagonal : 0.0;
    }
}

/* Mark the coordinates that a column without an effect of its own can be traded against. */
static void mark_undetermined(const factors *f, size_t column, double *covariance) {
    double right[PLW_LEAST_SQUARES_COORDINATES_MOST];
    double x[PLW_LEAST_SQUARES_COORDINATES_MOST];
    for (size_t row = 0; row < f->p; row++) {
        right[row] = row < column ? f->triangle[row * f->p + column] : 0.0;
    }
    solve_triangle(f, right, x);
    x[column] = 1.0;
    for (size_t index = 0; index < f->p; index++) {
        if (fabs(x[index]) < OWN_SHARE_LEAST) {
            continue;
        }
        for (size_t other = 0; other < f->p; other++) {
            covariance[index * f->p + other] = (double)NAN;
            covariance[other * f->p + index] = (double)NAN;
        }
    }
}

/* Covariance, and the least share of a coordinate's effect that the others cannot imitate: the standard error that it
 * would have alone over the one that it has (the root of 1/VIF, the variance inflation factor).
 * GSL's own function is not used: it does not survive a lack of memory.
 * Ret:  the share; 0 when a coordinate has no effect of its own at all: its rows and columns are NaN */
static double find_covariance(factors *f, const gsl_matrix *derivatives, double *covariance) {
    double inverse[PLW_LEAST_SQUARES_COORDINATES_MOST][PLW_LEAST_SQUARES_COORDINATES_MOST]; /* by columns */
    factorise(derivatives, f);
    for (size_t column = 0; column < f->p; column++) {
        double unit[PLW_LEAST_SQUARES_COORDINATES_MOST] = {0.0};
        unit[column] = f->triangle[column * f->p + column] > 0.0 ? 1.0 : 0.0;
        solve_triangle(f, unit, inverse[column]);
    }
    double least = 1.0;
    for (size_t one = 0; one < f->p; one++) {
        for (size_t other = 0; other < f->p; other++) {
            double sum = 0.0;
            for (size_t column = 0; column < f->p; column++) {
                sum += inverse[column][one] * inverse[column][other];
            }
            covariance[one * f->p + other] = sum / (f->length[one] * f->length[other]);
            least = one == other && sum > 0.0 ? fmin(least, 1.0 / sqrt(sum)) : least;
        }
    }
    for (size_t column = 0; column < f->p; column++) {
        if (f->triangle[column * f->p + column] == 0.0) {
            mark_undetermined(f, column, covariance);
            least = 0.0;
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
static bool run(bridge *b, gsl_multifit_nlinear_workspace *work, const double *start, factors *f, double *covariance,
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
    end->own_share_least = find_covariance(f, derivatives, covariance);
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
    if (problem->p == 0 || problem->p > PLW_LEAST_SQUARES_COORDINATES_MOST || problem->n < problem->p || count == 0) {
        return plw_fail(error, PLW_E_USAGE, "least squares: %zu residuals, %zu coordinates, %zu starts", problem->n,
                        problem->p, count);
    }
    if (!(problem->tol_step > 0.0) || !(problem->tol_gradient > 0.0) || !(problem->difference_step >= 0.0) ||
        problem->iterations_most == 0) {
        return plw_fail(error, PLW_E_USAGE, "least squares: tolerances and number of iterations must be above zero");
    }
    return PLW_OK;
}

static size_t scratch_size(size_t n, size_t p) {
    return n + 2 * p + 2 * p * p + n * p;
}

/* From every start, with memory at hand: scratch holds scratch_size() numbers. */
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
    const size_t n = problem->n;
    const size_t p = problem->p;
    bridge b = {.problem = problem};
    factors f = {.n = n, .p = p};
    b.place = scratch;
    b.residual = b.place + p;
    double *found_covariance = b.residual + n;
    f.triangle = found_covariance + p * p;
    f.length = f.triangle + p * p;
    f.perpendicular = f.length + p;
    bool found = false;
    for (size_t start = 0; start < count; start++) {
        plw_least_squares_end trial = {.start = start};
        if (run(&b, work, starts + start * p, &f, found_covariance, &trial) &&
            (!found || trial.sum_of_squares < end->sum_of_squares)) {
            found = true;
            *end = trial;
            keep(work, p, found_covariance, place, covariance);
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
    double *scratch = malloc(scratch_size(problem->n, p) * sizeof *scratch);
    if (scratch == NULL || !memory_is_there(problem->n, p)) {
        free(scratch);
        return plw_fail(error, PLW_E_NO_MEMORY, "least squares: out of memory");
    }
    const plw_status result = search(problem, starts, count, scratch, place, covariance, end, error);
    free(scratch);
    return result;
}
