/* What the plate supply delivers at a current.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_SUPPLY_H
#define PLATEWRIGHT_SUPPLY_H

#include <stddef.h>

#include "platewright/status.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef enum {
    PLW_SUPPLY_STIFF,    /* the same voltage at every current */
    PLW_SUPPLY_SOURCE,   /* an off-load voltage behind a resistance */
    PLW_SUPPLY_READINGS, /* straight lines through readings taken on the bench */
    PLW_SUPPLY_RECTIFIER /* transformer, rectifier and filter */
} plw_supply_kind;

enum { PLW_READINGS_MOST = 16, PLW_LINE_POINTS_MOST = 64 };

/* One bench reading of the supply: volts off load, into a resistor, or at a current. */
typedef struct {
    double volts;
    double amps; /* 0: off load */
} plw_reading;

/* A supply ready to be asked.  Plain data: copy it freely. */
typedef struct {
    plw_supply_kind kind;
    double volts;       /* stiff: its voltage; source: off load; others: off load where known, else NaN */
    double source_ohms; /* source */
    /* Readings, or the regulation line of a rectifier: ascending in current.  Between two of them the supply is taken
     * as straight (readings) or as the monotone cubic through them (rectifier). */
    size_t points;
    plw_reading point[PLW_LINE_POINTS_MOST];
    double tangent_ohms[PLW_LINE_POINTS_MOST]; /* -dV/dI at each point; rectifier only */
} plw_supply;

/* A supply that holds its voltage.
 * In:   volts > 0: loaded
 * Out:  *supply; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE */
PLW_API plw_status plw_supply_stiff(double volts, plw_supply *supply, plw_error *error) PLW_MUST_USE;

/* A supply of an off-load voltage behind a resistance.
 * In:   off_load_volts > 0; ohms >= 0
 * Out:  *supply; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE */
PLW_API plw_status plw_supply_source(double off_load_volts, double ohms, plw_supply *supply,
                                     plw_error *error) PLW_MUST_USE;

/* A supply given by its readings, in any order.
 * In:   readings[count], count >= 1, volts > 0, amps >= 0
 * Out:  *supply; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE: two readings at one current that differ, a reading that rises with current, none loaded
 *       (one loaded reading is taken as stiff around it), too many */
PLW_API plw_status plw_supply_readings(const plw_reading *readings, size_t count, plw_supply *supply,
                                       plw_error *error) PLW_MUST_USE;

/* Voltage and slope at a current.
 * In:   amps, any finite value: beyond the range of plw_supply_range() the last straight line goes on
 * Out:  *volts; *ohms = -dV/dI >= 0 */
PLW_API void plw_supply_at(const plw_supply *supply, double amps, double *volts, double *ohms);

/* The currents for which the supply speaks.  Readings: from the least to 1.5 times the largest reading, and down to
 * two thirds of the least when there is no reading off load.  Source: 0 to the short-circuit current.  Stiff: 0 to
 * infinity. */
PLW_API void plw_supply_range(const plw_supply *supply, double *least_amps, double *most_amps);

/* The same supply, so many volts higher (or lower) at every current. */
PLW_API plw_supply plw_supply_moved(const plw_supply *supply, double volts);

#ifdef __cplusplus
}
#endif
#endif
