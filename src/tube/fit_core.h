/* Parts of a fit: observations fitted, and what the fit tells besides coefficients.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_FIT_CORE_H
#define TUBE_FIT_CORE_H

#include "tube/fit_data.h"

/* Fit a set of observations.
 * In:   near: a law to start from, or NULL: every start is tried
 * Out:  *law, *sum_of_squares: with what is expected of the coefficients beforehand */
plw_status plw_fit_observations(const plw_observations *observations, const plw_law *near, plw_law *law,
                                double *sum_of_squares, plw_error *error) PLW_MUST_USE;

/* The observations but for those of one row or point.
 * Out:  *rest */
void plw_observations_without(const plw_observations *all, bool is_row, size_t index, plw_observations *rest);

/* Determined coefficients that the data hardly tell apart, the closest first. */
void plw_find_correlations(plw_fit *fit);

/* Figures that cannot both be true. */
void plw_find_contradictions(const plw_observations *all, plw_fit *fit);

/* Rows and points that the others speak against, by fitting without each. */
void plw_find_outliers(const plw_observations *observations, plw_fit *fit);

#endif
