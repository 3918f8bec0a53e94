/* Bench work on a plate supply: source resistance from readings, dummy load, bleeder, discharge.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_SUPPLY_BENCH_H
#define PLATEWRIGHT_SUPPLY_BENCH_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/preferred.h"
#include "platewright/rectifier.h"
#include "platewright/status.h"
#include "platewright/supply.h"

#ifdef __cplusplus
extern "C" {
#endif

/* ---- source resistance from readings ----------------------------------------------------------------------------- */

/* One DC reading at the output of the supply. */
typedef struct {
    double volts;
    double ohms; /* > 0: read across this resistor, and then amps is not looked at; 0: not a resistor */
    double amps; /* the current drawn; 0: off load */
} plw_bench_reading;

/* One standard error each, in percent of the reading. */
typedef struct {
    double dc_volts_percent;      /* of each DC reading */
    double winding_volts_percent; /* of the AC reading of the winding */
    double load_percent;          /* of a resistor's value or of a current */
} plw_reading_errors;

/* An ordinary meter, a measured resistor (common practice, no source).
 * Ret:  1 % each */
PLW_API plw_reading_errors plw_reading_errors_usual(void);

/* What the readings say of the supply. */
typedef struct {
    plw_rectifier supply;              /* the description with winding_rms_volts and path_ohms as estimated */
    double path_ohms, path_ohms_error; /* of the conducting path, copper and all else in series; a standard error */
    double winding_rms_volts, winding_rms_volts_error; /* the reading, as the DC readings correct it */
    double covariance[2][2];                           /* of winding_rms_volts and path_ohms */
    double worst_misfit;                               /* largest miss of a DC reading, in its own standard error */
    bool none_found; /* path_ohms is 0 because the readings want it negative, within their errors */
    size_t readings; /* DC readings used, off load and loaded */
} plw_source_estimate;

/* Find the resistance of the conducting path, and correct the winding's voltage, so that the rectifier's steady states
 * pass through the DC readings: least squares, each reading and the winding's weighed by its error.  A straight line
 * through the off-load reading would overstate the resistance several times, since near no load the voltage falls as
 * the current to the two-thirds.
 * In:   described: winding_rms_volts as read off load (0 or NaN: not read, and then a DC reading off load must stand
 *       for it), rectifier, reservoir, filter; path_ohms is not looked at.  readings[count], one loaded at least
 * Out:  *estimate; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE: none loaded, too many (PLW_READINGS_MOST), a value outside its domain, a loaded reading
 *       above the off-load peak, an off-load reading that does not belong to the winding, a reading that rises with
 *       current, readings that no source fits (beyond three standard errors), or only a negative one; and as
 *       plw_rectifier_steady() */
PLW_API plw_status plw_source_from_readings(const plw_rectifier *described, const plw_bench_reading *readings,
                                            size_t count, const plw_reading_errors *errors,
                                            plw_source_estimate *estimate, plw_error *error) PLW_MUST_USE;

/* Voltage at a current, and its standard error from those of the readings.
 * In:   amps >= 0
 * Out:  *volts, *volts_error
 * Ret:  PLW_OK; as plw_rectifier_steady() */
PLW_API plw_status plw_source_predict(const plw_source_estimate *estimate, double amps, double *volts,
                                      double *volts_error, plw_error *error) PLW_MUST_USE;

/* ---- dummy load -------------------------------------------------------------------------------------------------- */

typedef struct {
    double exact_ohms;     /* would draw just the current asked for */
    double ohms;           /* preferred value */
    double expected_volts; /* what the meter then reads across it */
    double amps;           /* what it then draws */
    double watts;
    double rating_watts; /* usual size with margin; NaN: none is large enough, use several */
    double seconds_on;   /* how long a part of rating_watts may stay on: infinity with a margin of 1 or more */
} plw_dummy_load;

/* The resistor that makes the supply see what a stage will draw.
 * In:   amps > 0; margin >= 1: rating over watts (2 is usual)
 * Out:  *load; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE; PLW_E_NO_POINT: the supply has no voltage left at that current */
PLW_API plw_status plw_dummy_load_for(const plw_supply *supply, double amps, plw_series series, double margin,
                                      plw_dummy_load *load, plw_error *error) PLW_MUST_USE;

/* The voltage and current at which a resistor and a supply meet.
 * In:   ohms > 0
 * Out:  *volts, *amps
 * Ret:  PLW_OK, PLW_E_USAGE */
PLW_API plw_status plw_supply_into(const plw_supply *supply, double ohms, double *volts, double *amps,
                                   plw_error *error) PLW_MUST_USE;

/* How long a wire-wound resistor may carry more than its rating: five times for five seconds, and in proportion to the
 * excess otherwise; infinity up to the rating.
 * In:   watts >= 0, rating_watts > 0
 * Ret:  s; NaN outside the domain
 * Source: the short-time overload that makers of wire-wound power resistors usually state; from memory, common
 * practice, no single source. */
PLW_API double plw_resistor_seconds(double watts, double rating_watts);

/* ---- bleeder and discharge --------------------------------------------------------------------------------------- */

/* The touch limit to which a supply is to fall: IEC 60204-1, 6.2.4 (60 V within 5 s of switching off, for machines). */
#define PLW_SAFE_VOLTS 60.0

typedef struct {
    double ohms;  /* preferred value */
    double amps;  /* at `volts` */
    double watts; /* at `volts` */
    double rating_watts;
    double seconds_to_60_volts; /* from `volts` */
} plw_bleeder;

/* Time for all capacitors to fall from one voltage to another through the bleeder after switching off, nothing else
 * drawing: the sum of each capacitor times the resistance it discharges through, which is an upper bound.
 * In:   from_volts > 0, to_volts > 0
 * Ret:  s; 0 when already there; infinity without a bleeder; NaN outside the domain
 * Source: exponential discharge; the sum bounds the slowest time constant of a ladder (W. C. Elmore, "The transient
 *         response of damped linear networks", J. Appl. Phys. 19, 1948; from memory). */
PLW_API double plw_discharge_seconds(const plw_rectifier *supply, double from_volts, double to_volts);

/* The bleeder across the output that brings the supply to 60 V within `seconds`.  A supply that never stands above 60 V
 * needs none: then ohms is infinite.
 * In:   volts > 0: highest voltage it can start from (off load, mains high); seconds > 0; margin >= 1: rating over
 *       watts
 * Out:  *bleeder; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE; PLW_E_NO_POINT: the resistors of the filter alone take longer */
PLW_API plw_status plw_bleeder_for(const plw_rectifier *supply, double volts, double seconds, plw_series series,
                                   double margin, plw_bleeder *bleeder, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
