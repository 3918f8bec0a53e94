/* Nonlinear least squares: the only part that knows GSL's fitting.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef BASE_LEAST_SQUARES_H
#define BASE_LEAST_SQUARES_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/status.h"

enum { PLW_LEAST_SQUARES_COORDINATES_MOST = 16 };

/* Residuals at a place, each over its standard deviation.  What is known beforehand of a coordinate stands as one
 * more residual.  A residual that is not finite marks a place outside the domain: the search turns back.
 * In:   place[p]   Out: residual[n] */
typedef void (*plw_residual_function)(const double *place, void *context, double *residual);

typedef struct {
    plw_residual_function residuals;
    void *context;
    size_t n, p;            /* residuals, coordinates; n >= p >= 1, p <= PLW_LEAST_SQUARES_COORDINATES_MOST */
    double difference_step; /* of the numeric derivative, relative to the coordinate; 0: the square root of rounding */
    bool central;           /* differences to both sides: twice the work, far smaller error */
    bool careful; /* steps that follow the curvature, all coordinates scaled alike: slower, but from poor starts it
                     comes home where the plain way runs off to a plateau */
    size_t iterations_most;
    double tol_step, tol_gradient; /* relative; > 0 */
} plw_least_squares;

typedef enum {
    PLW_SETTLED_STEP,     /* the last step was within tol_step */
    PLW_SETTLED_GRADIENT, /* the gradient was within tol_gradient */
    PLW_SETTLED_STUCK,    /* no step makes the sum smaller: the bottom as far as rounding lets it be seen */
    PLW_SETTLED_LATE      /* iterations_most were used up: the place is the best seen, not the bottom */
} plw_settled;

typedef struct {
    double sum_of_squares;
    plw_settled settled;
    size_t start;           /* which start led here */
    size_t iterations;      /* from that start */
    double own_share_least; /* of the effects of the coordinates, the least share that the others cannot imitate */
    bool singular;          /* that share is within rounding: some direction of the coordinates is not determined */
} plw_least_squares_end;

/* Least sum of squares by Levenberg-Marquardt (GSL multifit_nlinear, trust region, QR) from each start in turn; the
 * least sum counts.
 * In:   starts[count * p], one after the other
 * Out:  place[p]; *end; covariance[p * p] of the place for residuals of standard deviation 1, or NULL; rows and columns
 *       of a coordinate that no residual depends on, or that others make up wholly, are NaN, and those of the others.
 *       Nothing is written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE: fewer residuals than coordinates, too many of them, no start, tolerances not above 0;
 *       PLW_E_NO_CONVERGENCE: no start lies inside the domain or came to an end; PLW_E_NO_MEMORY
 * Source of the careful way: M. K. Transtrum and J. P. Sethna, "Improvements to the Levenberg-Marquardt algorithm for
 *       nonlinear least-squares minimization", arXiv:1201.5885 (2012): geodesic acceleration.  Both ways are checked
 *       against certified problems in tests/published/test_nist_regression.c.
 * GSL calls its error handler, which ends the program unless the caller turned it off, for arguments out of range and
 * for lack of memory.  The arguments are checked here first; memory is tried for before GSL asks for it. */
plw_status plw_least_squares_solve(const plw_least_squares *problem, const double *starts, size_t count, double *place,
                                   double *covariance, plw_least_squares_end *end, plw_error *error) PLW_MUST_USE;

#endif
