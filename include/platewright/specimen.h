/* One tube on the bench: what meter readings say of it, beside the model's bogey tube.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_SPECIMEN_H
#define PLATEWRIGHT_SPECIMEN_H

#include "platewright/bias.h"

#ifdef __cplusplus
extern "C" {
#endif

/* Readings with the black lead on the chassis, in V; NaN: not taken.  The cathode must be there. */
typedef struct {
    double supply_volts, plate_volts, screen_volts, cathode_volts;
} plw_meter_readings;

typedef struct {
    /* From the readings alone; where a reading is missing, the model's figure stands in and the flag says so. */
    double supply_volts, plate_to_ground_volts, screen_to_ground_volts, cathode_volts;
    bool supply_read, plate_read, screen_read;
    double cathode_amps, plate_amps, screen_amps; /* per tube; the screen's share by the model's division */
    double plate_volts, screen_volts, grid_volts; /* to cathode */
    double plate_watts, screen_watts;
    double model_cathode_amps; /* the bogey tube at the same voltages */
    double off_percent;        /* this tube's cathode current against the bogey's */
    double primary_ohms;       /* from supply and plate readings; NaN when not both were taken */
    double screen_feed_ohms;   /* from the screen's reading and what feeds it, per tube; NaN when it was not taken */
    char doubt[320];           /* what can hardly be true of the readings; empty when nothing strikes */
    bool as_built_solved;
    plw_bias_option as_built; /* the stage as built with this very tube: rest, signal, ratings */
    plw_stage stage;          /* the stage with a model scaled to this tube; its tube is &tube */
    plw_tube tube;            /* shallow copy with the scaled law: do not free */
    bool resistor_found;
    plw_bias_choice choice;      /* the resistor that would suit this very tube */
    double aim_before_percent;   /* 0, or what the usual aim was before it was lowered for the mains high */
    char resistor_obstacle[256]; /* why none was found */
} plw_specimen;

/* Spread beyond which a tube is not believed: printed acceptance limits of power tubes are 25 to 30 % either way. */
#define PLW_SPECIMEN_MOST_PERCENT 60.0
#define PLW_SPECIMEN_LEAST_PERCENT (-50.0)

/* In:   a stage with a cathode resistor (with fixed bias the cathode does not tell the current), the readings; the aim of
 *       the resistor of its own, NULL: as plw_bias_choose_for_mains()
 * Out:  *specimen; its stage points into itself: do not copy it by value
 * Ret:  PLW_OK; PLW_E_USAGE: no cathode reading, fixed bias, readings that contradict each other (plate above supply,
 *       cathode above plate) */
PLW_API plw_status plw_specimen_measure(const plw_stage *stage, const plw_meter_readings *readings, const plw_aim *aim,
                                        plw_series series, plw_specimen *specimen, plw_error *error) PLW_MUST_USE;

/* Does this very tube keep its ratings: at rest as measured and, where it could be solved, in the stage as built, at
 * rest and driven?  The bogey tube of its type may do otherwise.
 * Ret:  true: all that are known */
PLW_API bool plw_specimen_keeps_ratings(const plw_specimen *specimen) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
