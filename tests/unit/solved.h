/* A stage solved for a test, which fails where there is no solution.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_UNIT_SOLVED_H
#define TESTS_UNIT_SOLVED_H

#include "near.h"
#include "platewright/stage.h"

typedef struct {
    plw_quiescent rest;
    plw_signal signal;
} solved;

/* Which stage it was. */
static inline void fail_unsolved(const plw_stage *stage, const plw_error *error) {
    fail_msg("load %g ohm, cathode resistor %g ohm, fixed bias %g V, drive %g V: %s", stage->load_ohms,
             stage->cathode_resistor_ohms, stage->fixed_bias_volts, stage->drive_peak_volts, error->text);
}

static inline plw_quiescent at_rest(const plw_stage *stage) {
    plw_quiescent rest;
    plw_error error = {0};
    if (plw_quiescent_solve(stage, &rest, &error) != PLW_OK) {
        fail_unsolved(stage, &error);
    }
    return rest;
}

static inline solved solve(const plw_stage *stage) {
    solved s = {.rest = at_rest(stage)};
    plw_error error = {0};
    if (plw_signal_solve(stage, &s.rest, &s.signal, &error) != PLW_OK) {
        fail_unsolved(stage, &error);
    }
    return s;
}

#endif
