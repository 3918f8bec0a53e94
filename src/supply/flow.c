/* Exact flow of a linear network over steps that halve again and again.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "supply/flow.h"

#include <math.h>
#include <string.h>

typedef double square[PLW_FLOW_WIDTH][PLW_FLOW_WIDTH];

/* out = factor (left right) + 2 extra left, rows of zeros passed over: most rows belong to constant inputs. */
static void multiply(square left, square right, size_t width, double factor, double twice, square out) {
    for (size_t i = 0; i < width; i++) {
        double row[PLW_FLOW_WIDTH] = {0};
        for (size_t k = 0; k < width; k++) {
            const double weight = factor * left[i][k];
            if (weight != 0) {
                for (size_t j = 0; j < width; j++) {
                    row[j] += weight * right[k][j];
                }
            }
        }
        for (size_t j = 0; j < width; j++) {
            out[i][j] = row[j] + twice * left[i][j];
        }
    }
}

static double largest_row_sum(square matrix, size_t width) {
    double largest = 0;
    for (size_t i = 0; i < width; i++) {
        double sum = 0;
        for (size_t j = 0; j < width; j++) {
            sum += fabs(matrix[i][j]);
        }
        largest = fmax(largest, sum);
    }
    return largest;
}

/* exp(matrix) - 1 by its series, Horner's way.  The largest row sum is at most 1/8, so nine terms are enough. */
static void short_series(square matrix, size_t width, square out) {
    square inner;
    memcpy(inner, matrix, sizeof inner);
    for (int term = 9; term >= 2; term--) {
        square next;
        multiply(matrix, inner, width, 1.0 / term, 0, next);
        for (size_t i = 0; i < width; i++) {
            for (size_t j = 0; j < width; j++) {
                inner[i][j] = matrix[i][j] + next[i][j];
            }
        }
    }
    memcpy(out, inner, sizeof inner);
}

void plw_flow_make(plw_flow *flow, double matrix[PLW_FLOW_WIDTH][PLW_FLOW_WIDTH], size_t width, double step) {
    flow->width = width;
    for (int level = 0; level < PLW_FLOW_LEVELS; level++) {
        flow->step[level] = ldexp(step, -level);
    }
    const double shortest = flow->step[PLW_FLOW_LEVELS - 1];
    int squarings = 0;
    const double size = 8 * shortest * largest_row_sum(matrix, width);
    if (size > 1) {
        squarings = (int)ceil(log2(size));
    }
    const double scale = ldexp(shortest, -squarings);
    square power = {{0}};
    for (size_t i = 0; i < width; i++) {
        for (size_t j = 0; j < width; j++) {
            power[i][j] = scale * matrix[i][j];
        }
    }
    square now;
    short_series(power, width, now);
    for (int s = 0; s < squarings; s++) {
        /* (1 + E)^2 - 1 = E^2 + 2 E */
        square next;
        multiply(now, now, width, 1, 2, next);
        memcpy(now, next, sizeof now);
    }
    memcpy(flow->change[PLW_FLOW_LEVELS - 1], now, sizeof now);
    for (int level = PLW_FLOW_LEVELS - 2; level >= 0; level--) {
        multiply(flow->change[level + 1], flow->change[level + 1], width, 1, 2, flow->change[level]);
    }
}
