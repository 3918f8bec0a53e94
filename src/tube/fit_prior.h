/* What is expected of a law's coefficients before a row is seen, and where fits start.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_FIT_PRIOR_H
#define TUBE_FIT_PRIOR_H

#include "tube/fit_data.h"

/* The coordinates of a fit: the logarithm of each coefficient, but of kp the logarithm of kp/mu, which differs far less
 * from tube to tube, and the contact potential itself, in V. */
void plw_law_coordinates(const plw_law *law, double coordinates[PLW_LAW_COEFFICIENTS_MOST]);
plw_law plw_law_at_coordinates(plw_law_kind kind, const double coordinates[PLW_LAW_COEFFICIENTS_MOST]);

/* Standard error of a coordinate as a relative error of the coefficient. */
double plw_coordinate_error_relative(const plw_law *law, size_t index, double coordinate_error);

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
