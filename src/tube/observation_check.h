/* Do the lines of a table of observations make sense, alone and together?
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_OBSERVATION_CHECK_H
#define TUBE_OBSERVATION_CHECK_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/tube.h"

/* The line in the file that each row and point stands on. */
typedef struct {
    size_t *of_row, *of_point;
} plw_observation_lines;

enum { PLW_OBSERVATION_WHY_SIZE = 240 };

bool plw_tube_has_screen(const plw_tube *tube);

/* The last row (point) of a tube, among those from `first` on.
 * Out:  why: what is wrong and what is needed; untouched when nothing is */
void plw_observation_check_row(plw_tube *tube, const plw_observation_lines *lines, size_t index, size_t first,
                               char why[PLW_OBSERVATION_WHY_SIZE]);
void plw_observation_check_point(plw_tube *tube, const plw_observation_lines *lines, size_t index, size_t first,
                                 char why[PLW_OBSERVATION_WHY_SIZE]);

/* Is it enough, and not too much, for a fit?
 * Ret:  PLW_OK; PLW_E_DATA */
plw_status plw_observation_check_whole(const plw_tube *tube, plw_error *error) PLW_MUST_USE;

#endif
