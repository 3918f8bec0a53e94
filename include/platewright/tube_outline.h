/* A tube type of one's own in outline: what must be known of it besides what is measured or printed of its currents.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_TUBE_OUTLINE_H
#define PLATEWRIGHT_TUBE_OUTLINE_H

#include "platewright/status.h"
#include "platewright/tube.h"

#ifdef __cplusplus
extern "C" {
#endif

/* NaN, or NULL: not known.  Limits are V to the cathode and W. */
typedef struct {
    const char *type; /* needed */
    plw_tube_kind kind;
    const char *base;
    const char *pins;   /* "2=heater,3=plate,5=grid 1", in the words of the tube files */
    const char *source; /* where pins, heater and limits were read; NULL: told, "as given on the command line" */
    double heater_volts, heater_amps;
    bool directly_heated;
    double plate_volts, screen_volts; /* limits */
    double plate_watts, screen_watts; /* limits */
    const char *rating_system;        /* of the limits, as plw_rating_system_name() has it; NULL: stated */
} plw_tube_outline;

/* Make a tube of an outline: one set of ratings, no rows yet.
 * Out:  *tube, to be freed with plw_tube_free(); not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_NO_MEMORY; PLW_E_USAGE naming the entry: no type, a blank source, a rectifier, an unknown pin
 *       or rating system, a number out of range, limits of a screen for a triode */
PLW_API plw_status plw_tube_outline_make(const plw_tube_outline *outline, plw_tube **tube,
                                         plw_error *error) PLW_MUST_USE;

/* Is all there that a tube file must hold: heater and limits?
 * Ret:  PLW_OK; PLW_E_USAGE naming what is missing, as the member of plw_tube_outline is called with hyphens for
 *       underscores */
PLW_API plw_status plw_tube_outline_complete(const plw_tube_outline *outline, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
