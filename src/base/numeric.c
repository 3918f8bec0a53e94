/* Monotone cubic and two linear equations.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/numeric.h"

#include <float.h>

static double secant(const double *x, const double *y, size_t left) {
    return (y[left + 1] - y[left]) / (x[left + 1] - x[left]);
}

/* Three-point difference at an inner point; 0 at a peak or a flat, where a monotone curve must be level. */
static double inner_tangent(const double *x, const double *y, size_t k) {
    const double before = secant(x, y, k - 1);
    const double after = secant(x, y, k);
    if (!((before > 0.0 && after > 0.0) || (before < 0.0 && after < 0.0))) {
        return 0.0;
    }
    const double width_before = x[k] - x[k - 1];
    const double width_after = x[k + 1] - x[k];
    return (width_after * before + width_before * after) / (width_before + width_after);
}

/* One-sided three-point difference at an end, from the secant next to it and the one after; 0 when it would point
 * against the curve. */
static double end_tangent(double width, double next_width, double slope, double next_slope) {
    const double tangent = ((2.0 * width + next_width) * slope - width * next_slope) / (width + next_width);
    return (tangent > 0.0) == (slope > 0.0) && slope != 0.0 ? tangent : 0.0;
}

/* Draw the pair of tangents of one interval back to a length of 3 secants: within that circle the cubic is monotone. */
static void limit_tangents(double slope, double *left, double *right) {
    if (slope == 0.0) {
        *left = 0.0;
        *right = 0.0;
        return;
    }
    const double length = hypot(*left / slope, *right / slope);
    if (length > 3.0) {
        *left *= 3.0 / length;
        *right *= 3.0 / length;
    }
}

void plw_monotone_cubic_tangents(size_t n, const double *x, const double *y, double *tangent) {
    if (n < 2) {
        if (n == 1) {
            tangent[0] = 0.0;
        }
        return;
    }
    if (n == 2) {
        tangent[0] = tangent[1] = secant(x, y, 0);
        return;
    }
    tangent[0] = end_tangent(x[1] - x[0], x[2] - x[1], secant(x, y, 0), secant(x, y, 1));
    tangent[n - 1] = end_tangent(x[n - 1] - x[n - 2], x[n - 2] - x[n - 3], secant(x, y, n - 2), secant(x, y, n - 3));
    for (size_t k = 1; k + 1 < n; k++) {
        tangent[k] = inner_tangent(x, y, k);
    }
    for (size_t k = 0; k + 1 < n; k++) {
        limit_tangents(secant(x, y, k), &tangent[k], &tangent[k + 1]);
    }
}

void plw_cubic_between(double x_left, double y_left, double tangent_left, double x_right, double y_right,
                       double tangent_right, double at, double *value, double *slope) {
    const double width = x_right - x_left;
    const double t = (at - x_left) / width;
    const double rise = (y_right - y_left) / width;
    /* Newton's form, so that a straight line comes out as exactly that. */
    const double quadratic = 3.0 * rise - 2.0 * tangent_left - tangent_right;
    const double cubic = tangent_left + tangent_right - 2.0 * rise;
    if (value != NULL) {
        *value = y_left + width * t * (tangent_left + t * (quadratic + t * cubic));
    }
    if (slope != NULL) {
        *slope = tangent_left + t * (2.0 * quadratic + 3.0 * t * cubic);
    }
}

static void straight_on(double x, double y, double tangent, double at, double *value, double *slope) {
    if (value != NULL) {
        *value = y + tangent * (at - x);
    }
    if (slope != NULL) {
        *slope = tangent;
    }
}

void plw_monotone_cubic_at(size_t n, const double *x, const double *y, const double *tangent, double at, double *value,
                           double *slope) {
    if (n < 2 || at <= x[0]) {
        straight_on(x[0], y[0], tangent[0], at, value, slope);
        return;
    }
    if (at >= x[n - 1]) {
        straight_on(x[n - 1], y[n - 1], tangent[n - 1], at, value, slope);
        return;
    }
    size_t left = 0;
    size_t right = n - 1;
    while (right - left > 1) {
        const size_t middle = left + (right - left) / 2;
        if (x[middle] <= at) {
            left = middle;
        } else {
            right = middle;
        }
    }
    plw_cubic_between(x[left], y[left], tangent[left], x[right], y[right], tangent[right], at, value, slope);
}

bool plw_solve_2x2(const double matrix[2][2], const double right[2], double solution[2]) {
    double a[2][2];
    double b[2];
    for (int row = 0; row < 2; row++) {
        /* Scaling keeps the products from under- or overflowing, and makes the test below one of direction only. */
        const double scale = fmax(fabs(matrix[row][0]), fabs(matrix[row][1]));
        if (!(scale > 0.0 && isfinite(scale))) {
            return false;
        }
        a[row][0] = matrix[row][0] / scale;
        a[row][1] = matrix[row][1] / scale;
        b[row] = right[row] / scale;
    }
    const double main_product = a[0][0] * a[1][1];
    const double other_product = a[0][1] * a[1][0];
    const double determinant = main_product - other_product;
    /* Each product carries half a unit of rounding: below a few of them the determinant is noise (NaN fails too). */
    if (!(fabs(determinant) > 8.0 * DBL_EPSILON * (fabs(main_product) + fabs(other_product)))) {
        return false;
    }
    const double first = (b[0] * a[1][1] - a[0][1] * b[1]) / determinant;
    const double second = (a[0][0] * b[1] - b[0] * a[1][0]) / determinant;
    if (!(isfinite(first) && isfinite(second))) {
        return false;
    }
    solution[0] = first;
    solution[1] = second;
    return true;
}
