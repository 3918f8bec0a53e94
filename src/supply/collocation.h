/* Steps of the network while a vacuum rectifier conducts: the network exact, the current collocated.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef SUPPLY_COLLOCATION_H
#define SUPPLY_COLLOCATION_H

#include "supply/engine.h"

/* Inputs and their derivatives found at the stages of one step. */
typedef struct {
    double first_state[PLW_STAGES], input[PLW_STAGES], slope[PLW_STAGES];
    double inverse[PLW_STAGES][PLW_STAGES]; /* of 1 - by_input slope */
} plw_collocated;

/* Operators for every level of step, and the flow with the input zero.
 * In: matrix as for that flow (states, integral, load, constant); it is overwritten */
void plw_collocation_make(plw_collocation *collocation, plw_flow *flow, double matrix[PLW_FLOW_WIDTH][PLW_FLOW_WIDTH],
                          const plw_network *network, double step);

/* One step from `start` (states and integral) to `end`. */
void plw_collocate(const plw_engine *engine, int level, double angle, double load_amps, const double *start,
                   plw_collocated *found, double *end);

/* Add to `change` what the rectifier's input contributes to the change of the derivatives over the step. */
void plw_collocation_derivative(const plw_engine *engine, int level, const plw_collocated *found,
                                double by[PLW_ROWS_MOST][PLW_STATES_MOST + 1],
                                double change[PLW_ROWS_MOST][PLW_STATES_MOST + 1]);

#endif
