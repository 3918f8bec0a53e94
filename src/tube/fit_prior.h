/* What is expected of a law's coefficients before a row is seen, and where fits start.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_FIT_PRIOR_H
#define TUBE_FIT_PRIOR_H

#include "tube/fit_data.h"

/* What a law says of its own coefficients, in their order.  Every law begins with mu, exponent, kg1 and kp.  These
 * three belong to the law: another law brings its own. */
typedef struct {
    double expected, deviation; /* value (of kp: kp/mu); standard deviation of its coordinate */
} plw_expectation;

const plw_expectation *plw_law_expectations(const plw_tube *tube);

/* The coefficient that may have either sign (the contact potential, in V), or PLW_LAW_COEFFICIENTS_MOST. */
size_t plw_law_signed_coefficient(plw_law_kind kind);

/* The largest value that the law admits; INFINITY: any. */
double plw_law_coefficient_most(plw_law_kind kind, size_t index);

/* The coordinates of a fit: the logarithm of each coefficient, but of kp the logarithm of kp/mu, which differs far less
 * from tube to tube, and the contact potential itself, in V. */
void plw_law_coordinates(const plw_law *law, double coordinates[PLW_LAW_COEFFICIENTS_MOST]);
plw_law plw_law_at_coordinates(plw_law_kind kind, const double coordinates[PLW_LAW_COEFFICIENTS_MOST]);

/* Standard error of a coordinate as a relative error of the coefficient. */
double plw_coordinate_error_relative(const plw_law *law, size_t index, double coordinate_error);

/* Turn a covariance of coordinates, count * count numbers, into that of the logarithms of the coefficients (of the
 * contact potential: itself). */
void plw_covariance_of_coefficients(size_t count, double *covariance);

/* Normal in each coordinate. */
typedef struct {
    double expected[PLW_LAW_COEFFICIENTS_MOST];
    double deviation[PLW_LAW_COEFFICIENTS_MOST];
} plw_prior;

plw_prior plw_prior_for(const plw_observations *observations);

enum { PLW_STARTS = 3 };

/* Coefficients of the start number `attempt`. */
plw_law plw_prior_start(const plw_observations *observations, const plw_prior *prior, size_t attempt);

/* Fill the errors of the fit, with each row left out if wanted, and the region that the data cover. */
void plw_fit_errors(const plw_tube *tube, bool leave_out, plw_model *model);

#endif
