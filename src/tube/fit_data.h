/* Observations of a fit: what is printed of a tube, each with its standard deviation.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_FIT_DATA_H
#define TUBE_FIT_DATA_H

#include "platewright/fit.h"

/* What an observation is of; the order is that of plw_prediction's figures. */
typedef enum {
    PLW_SEEN_PLATE_CURRENT,
    PLW_SEEN_SCREEN_CURRENT,
    PLW_SEEN_GM,
    PLW_SEEN_PLATE_RESISTANCE,
    PLW_SEEN_MU,
    PLW_SEEN_PLATE_CURRENT_DRIVEN,
    PLW_SEEN_SCREEN_CURRENT_DRIVEN,
    PLW_SEEN_POWER,
    PLW_SEEN_DISTORTION,
    PLW_SEEN_SECOND,
    PLW_SEEN_THIRD,
    PLW_SEEN_COUNT
} plw_seen;

typedef struct {
    plw_seen what;
    bool is_row;
    size_t index;
    double printed;
    bool by_ratio;    /* compared by the logarithm of the ratio; else by the difference */
    double deviation; /* one standard deviation, in that measure */
    double floor;     /* added to both sides of a ratio: what the foot of a curve is printed to */
} plw_observation;

typedef struct {
    const plw_tube *tube;
    bool screened; /* fitted with the pentode law */
    size_t count;
    plw_observation observation[PLW_RESIDUALS_MOST];
} plw_observations;

/* Collect what is fitted of a tube, without one row (SIZE_MAX: none) and, if wanted, without triode-connected data. */
void plw_observations_collect(const plw_tube *tube, size_t without_row, bool without_triode_connection,
                              plw_observations *all);

/* The figure of a prediction that an observation is of. */
double plw_prediction_figure(const plw_prediction *prediction, plw_seen what);

const char *plw_seen_name(plw_seen what);

/* Difference of predicted and printed over the standard deviation; a prediction that does not exist counts as far off.
 */
double plw_observation_residual(const plw_observation *o, double predicted);

/* Predict everything at a law.
 * Out:  predicted[all->count] */
void plw_observations_predict(const plw_observations *all, const plw_law *law, double *predicted);

#endif
