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

static inline plw_quiescent at_rest(const plw_stage *stage) {
    plw_quiescent rest;
    plw_error error = {0};
    if (plw_quiescent_solve(stage, &rest, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return rest;
}

static inline solved solve(const plw_stage *stage) {
    solved s = {.rest = at_rest(stage)};
    plw_error error = {0};
    if (plw_signal_solve(stage, &s.rest, &s.signal, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return s;
}

#endif
