/* What a voltage across the dummy load means for the choice of the cathode resistor.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_DUMMY_MEANING_H
#define PLATEWRIGHT_DUMMY_MEANING_H

#include "platewright/bias.h"
#include "platewright/supply_bench.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef struct {
    double read_volts;
    double loaded_volts; /* of the supply that gives this reading, with the stage at rest; NaN: no stage stands on it */
    double ohms;         /* cathode resistor on that supply, of the same aim; NaN: none serves */
} plw_dummy_meaning;

enum { PLW_DUMMY_MEANINGS = 5 };

#define PLW_DUMMY_STEP_PERCENT 5.0

/* Readings at, and in steps of PLW_DUMMY_STEP_PERCENT below and above the one expected, ascending; each taken as a
 * supply all of whose voltages are higher or lower in one proportion, on which the resistor is chosen anew.
 * In:   a stage with cathode bias
 * Out:  meaning[PLW_DUMMY_MEANINGS]
 * Ret:  PLW_OK; PLW_E_USAGE: fixed bias, or a dummy load outside its domain */
PLW_API plw_status plw_dummy_meanings(const plw_stage *stage, const plw_dummy_load *dummy, plw_aim aim,
                                      plw_series series, plw_dummy_meaning meaning[PLW_DUMMY_MEANINGS],
                                      plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
