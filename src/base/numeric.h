/* Numeric aids: softplus, monotone cubic, two linear equations.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef BASE_NUMERIC_H
#define BASE_NUMERIC_H

#include <math.h>
#include <stdbool.h>
#include <stddef.h>

/* ln(1 + e^x).  The exponential is only ever taken of a negative number, so nothing overflows; log1p keeps the digits
 * where e^x is small against 1.
 * In:   any; an infinity or NaN goes through as the limit has it
 * Ret:  >= 0, to a few units in the last place */
static inline double plw_softplus(double x) {
    return x > 0.0 ? x + log1p(exp(-x)) : log1p(exp(x));
}

/* The derivative of plw_softplus(): 1 / (1 + e^-x), between 0 and 1, without overflow. */
static inline double plw_logistic(double x) {
    if (x >= 0.0) {
        return 1.0 / (1.0 + exp(-x));
    }
    const double small = exp(x);
    return small / (1.0 + small);
}

/* Tangents of the monotone cubic through points: where the points rise (fall) the curve rises (falls), and it never
 * swings past a point.
 * In:   x[n] strictly ascending, y[n], all finite; n >= 1
 * Out:  tangent[n], in units of y over x (one point alone: 0)
 * Source: F. N. Fritsch and R. E. Carlson, "Monotone piecewise cubic interpolation", SIAM J. Numer. Anal. 17(2), 1980,
 *         p. 238-246: three-point differences, then the pair of each interval drawn back into the circle of radius 3.
 */
void plw_monotone_cubic_tangents(size_t n, const double *x, const double *y, double *tangent);

/* The cubic between two points that has given tangents there (Hermite's form).
 * In:   x_left < x_right; at between them
 * Out:  *value, *slope; either may be NULL */
void plw_cubic_between(double x_left, double y_left, double tangent_left, double x_right, double y_right,
                       double tangent_right, double at, double *value, double *slope);

/* The monotone cubic at a place; beyond the end points its tangent there goes on as a straight line.
 * In:   x[n], y[n], tangent[n] as for plw_monotone_cubic_tangents(); at any finite value
 * Out:  *value, *slope; either may be NULL */
void plw_monotone_cubic_at(size_t n, const double *x, const double *y, const double *tangent, double at, double *value,
                           double *slope);

/* Solve matrix * solution = right by Cramer's rule, the rows scaled first.
 * In:   any numbers; declare the matrix const, since C17 does not add const through two dimensions
 * Out:  solution[2]; not written on failure
 * Ret:  false when the determinant is lost in rounding, or something is not finite */
bool plw_solve_2x2(const double matrix[2][2], const double right[2], double solution[2]);

#endif
