/* The state that a cycle brings back to itself.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef SUPPLY_STEADY_H
#define SUPPLY_STEADY_H

#include "supply/engine.h"

#define PLW_STEADY_TOLERANCE 1e-5

typedef struct {
    double start[PLW_STATES_MOST]; /* at the zero of the EMF */
    double output_volts;           /* mean */
    double output_ohms;            /* by how much it falls with the current drawn there */
    int iterations;
} plw_steady;

/* A first guess from the mean values, as though the reservoir were boundless.
 * Ret:  PLW_OK; PLW_E_NO_POINT when even so the current cannot be had */
plw_status plw_steady_guess(const plw_engine *engine, const plw_rectifier *supply, double load_amps, plw_steady *steady,
                            plw_error *error);

/* Newton's method on the period map from a guess.  It ends with the first step that is short; what is then left is of
 * the order of its square.
 * In:   tolerance: what is short, relative to the fall of the first node from the peak
 * Ret:  PLW_OK, PLW_E_NO_CONVERGENCE */
plw_status plw_steady_solve(const plw_engine *engine, double load_amps, double tolerance, plw_steady *steady,
                            plw_error *error);

#endif
