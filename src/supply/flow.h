/* Exact flow of a linear network over steps that halve again and again.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef SUPPLY_FLOW_H
#define SUPPLY_FLOW_H

#include <stddef.h>

/* Reservoir and four sections with chokes: nine states; their integral, two constant inputs, three of a polynomial. */
enum { PLW_FLOW_WIDTH = 15, PLW_FLOW_LEVELS = 16 };

/* exp(M h) - 1 for h = step[level], step[level] = step[0] / 2^level.  (Less one, so that a short step keeps its
 * digits.) */
typedef struct {
    size_t width;
    double step[PLW_FLOW_LEVELS];
    double change[PLW_FLOW_LEVELS][PLW_FLOW_WIDTH][PLW_FLOW_WIDTH];
} plw_flow;

/* In:   matrix[width][width] within PLW_FLOW_WIDTH; step > 0, the longest
 * Source: scaling and squaring of the exponential: C. Moler and C. Van Loan, "Nineteen dubious ways to compute the
 *         exponential of a matrix", SIAM Review 20, 1978 (from memory). */
void plw_flow_make(plw_flow *flow, double matrix[PLW_FLOW_WIDTH][PLW_FLOW_WIDTH], size_t width, double step);

#endif
