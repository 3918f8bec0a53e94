/* One cycle of the rectifier and its filter, with its derivative by the state at the start.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef SUPPLY_ENGINE_H
#define SUPPLY_ENGINE_H

#include "supply/flow.h"
#include "supply/network.h"

enum { PLW_STAGES = 3, PLW_ROWS_MOST = PLW_STATES_MOST + 1 };

/* What conducts.  Into a reservoir the first two with silicon, the first and last with a vacuum rectifier. */
typedef enum {
    PLW_MODE_NONE,   /* the network is left to itself */
    PLW_MODE_ONE,    /* silicon: one path */
    PLW_MODE_BOTH,   /* silicon, choke input: both paths, while the current passes from one to the other */
    PLW_MODE_CURVED, /* vacuum: one path or both */
    PLW_MODE_COUNT
} plw_mode;

/* Collocation over a step: the first state at the three stages from the state at the start and the stage inputs, and
 * the state at the end by the stage inputs. */
typedef struct {
    double row[PLW_STAGES][PLW_STATES_MOST + 2]; /* states, load, constant */
    double by_input[PLW_STAGES][PLW_STAGES];
    double end_by_input[PLW_ROWS_MOST][PLW_STAGES];
} plw_collocation;

typedef struct {
    plw_network network;
    plw_flow flow[PLW_MODE_COUNT]; /* PLW_MODE_CURVED: the network with the rectifier's input taken as zero */
    plw_collocation collocation[PLW_FLOW_LEVELS];
    double relaxation; /* the shortest time constant of the first state while conducting, rad */
} plw_engine;

void plw_engine_make(plw_engine *engine, const plw_rectifier *supply, double load_ohms);

/* A piece of the cycle within one mode: the states and their derivatives at both ends. */
typedef struct {
    plw_mode mode;
    double angle[2];
    double state[2][PLW_STATES_MOST], slope[2][PLW_STATES_MOST];
} plw_piece;

typedef void (*plw_piece_seen)(void *context, const plw_engine *engine, const plw_piece *piece);

/* State at the end of a cycle; row number `states` is the integral of the output voltage over the cycle.  Derivatives
 * by the states at the start and, in column number `states`, by the constant current drawn at the output. */
typedef struct {
    double end[PLW_ROWS_MOST];
    double by[PLW_ROWS_MOST][PLW_STATES_MOST + 1];
} plw_cycle;

/* Run one cycle from a state at the zero of the EMF.
 * In:   seen may be NULL; when given, short pieces are used and the derivatives are not computed */
void plw_engine_cycle(const plw_engine *engine, double load_amps, const double *start, plw_cycle *cycle,
                      plw_piece_seen seen, void *context);

/* EMF of the conducting path at an angle. */
double plw_engine_emf(const plw_engine *engine, double angle);

/* What the rectifier feeds into x[0] at a point: current into a reservoir, voltage at a choke. */
double plw_engine_input(const plw_engine *engine, plw_mode mode, double angle, const double *state);

#endif
