/* How far an answer may be off: the model's error and the spread of tubes, carried through the circuit.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_UNCERTAINTY_H
#define PLATEWRIGHT_UNCERTAINTY_H

#include "platewright/stage.h"

#ifdef __cplusplus
extern "C" {
#endif

/* Spread of the plate current of new tubes of one type at given voltages, one standard deviation.
 * Makers of receiving tubes give acceptance limits of +-25 to 30 % (CES figures as quoted by practitioners; printed
 * limits of current production 33 to 59 mA about 45 mA); limits are taken as two standard deviations. */
#define PLW_TUBE_SPREAD 0.14

/* One standard deviation of a figure, in its own unit: by the model, by the tubes, by the supply, and all together. */
typedef struct {
    double model, tubes, supply, all;
} plw_deviation;

typedef enum { PLW_BY_MODEL, PLW_BY_TUBES, PLW_BY_SUPPLY } plw_deviation_cause;

/* Ret:  "model", "tubes", "supply" */
PLW_API const char *plw_deviation_cause_name(plw_deviation_cause cause);

typedef struct {
    plw_deviation plate_amps, plate_watts, cathode_volts, speaker_watts;
    double model_percent;         /* of plate current at given voltages: what the fit says of rows it has not seen */
    plw_deviation_cause dominant; /* of the plate current in the circuit */
    bool outside_data;            /* plate or screen volts lie beyond 0.7 to 1.5 times what the data cover */
    char outside[96];             /* what lies outside; empty when nothing does */
} plw_uncertainty;

/* Solve the stage again with a stronger and a weaker tube, and on a higher and a lower supply.
 * In:   a solved stage; supply_volts_error >= 0: one standard error of the supply's voltage at the stage's current, as
 *       its readings make it, in V; NaN or 0: taken as exact
 * Out:  *uncertainty
 * Ret:  PLW_OK, or what a solution failed with
 * Source of the range 0.7 to 1.5: the conversion-factor nomograph of the RCA receiving tube manuals, whose text calls
 * the conversion good within it (from memory). */
PLW_API plw_status plw_uncertainty_estimate(const plw_stage *stage, const plw_quiescent *quiescent,
                                            const plw_signal *signal, double supply_volts_error,
                                            plw_uncertainty *uncertainty, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
