/* What is expected of a law's coefficients before a row is seen, and where fits start.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_FIT_PRIOR_H
#define TUBE_FIT_PRIOR_H

#include "tube/fit_data.h"

/* Normal in the logarithm of each coefficient. */
typedef struct {
    double logarithm[PLW_LAW_COEFFICIENTS_MOST];
    double deviation[PLW_LAW_COEFFICIENTS_MOST];
} plw_prior;

plw_prior plw_prior_for(const plw_observations *observations);

enum { PLW_STARTS = 4 };

/* Coefficients of the start number `attempt`. */
plw_law plw_prior_start(const plw_observations *observations, const plw_prior *prior, size_t attempt);

/* Fill the errors of the fit, with each row left out if wanted, and the region that the data cover. */
void plw_fit_errors(const plw_tube *tube, bool leave_out, plw_model *model);

#endif
