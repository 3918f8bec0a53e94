/* Hum at the speaker from the ripple of the plate supply.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_HUM_H
#define PLATEWRIGHT_HUM_H

#include "platewright/stage.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef struct {
    double ripple_rms_volts;          /* at the supply end of the primary */
    double speaker_share;             /* of it across the speaker, through the turns; see plw_hum_share() */
    double speaker_rms_volts;         /* NaN where the ratio is not known */
    double decibels_below_full_power; /* of the hum's power below that of full drive */
} plw_hum;

/* The part of a small ripple on the supply that stands across the load (the speaker seen through the transformer), at
 * mid-band, grid quiet; signed: positive when the load's voltage follows the supply.
 * The plate's and, unless it has a supply of its own or is held by a capacitor, the screen's currents follow the ripple
 * by the derivatives of the law at rest; an unbypassed cathode takes part.  The bypass of the cathode and of the screen
 * counts as a short at the ripple's frequency.
 * In:   a stage, and its point of rest
 * Ret:  a pure number; NaN without a solution
 * Source: Kirchhoff's laws, linear about the point of rest; for a triode RL / (RL + rp). */
PLW_API double plw_hum_share(const plw_stage *stage, const plw_quiescent *quiescent);

/* Hum of a ripple.
 * In:   ripple_rms_volts >= 0; signal: at full drive
 * Ret:  PLW_OK; PLW_E_USAGE; PLW_E_NO_CONVERGENCE: the share has no solution */
PLW_API plw_status plw_hum_of(const plw_stage *stage, const plw_quiescent *quiescent, const plw_signal *signal,
                              double ripple_rms_volts, plw_hum *hum, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
