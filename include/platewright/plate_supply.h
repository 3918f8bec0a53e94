/* A plate supply as it is described, and what it does at a current: one answer for the bench.
 * A quantity that is not known is NaN.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_PLATE_SUPPLY_H
#define PLATEWRIGHT_PLATE_SUPPLY_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/supply.h"
#include "platewright/supply_bench.h"
#include "platewright/supply_limits.h"
#include "platewright/transformer.h"
#include "platewright/tube.h"

#ifdef __cplusplus
extern "C" {
#endif

/* A reservoir whose size is not told is taken as this large, so that there is no ripple. */
#define PLW_RESERVOIR_BOUNDLESS_FARADS 1.0

/* The supply as described.  Plain data: copy it freely; the tube is borrowed. */
typedef struct {
    plw_supply line; /* what a stage sees */
    /* The parts.  With a winding (or, estimated, an off-load reading) the line is theirs; without, they only say how
     * the voltage is to be made. */
    bool has_parts;
    bool has_winding;       /* winding_rms_volts and path_ohms of `parts` are known: the line is that of the parts */
    bool reservoir_assumed; /* none told: parts.reservoir_farads is boundless */
    bool transformerless;   /* fed straight from the mains, the heaters in a string: the chassis may be live */
    bool copper_assumed;    /* neither copper nor readings told: parts.path_ohms is 0 */
    plw_rectifier parts;
    const plw_tube *rectifier_tube; /* NULL: silicon */
    /* Readings on the bench, in the order told. */
    size_t readings;
    plw_bench_reading reading[PLW_READINGS_MOST];
    bool estimated; /* the source was found from the readings */
    plw_source_estimate estimate;
} plw_plate_supply;

/* A supply that is no more than a line.
 * Ret:  without parts or readings */
PLW_API plw_plate_supply plw_plate_supply_of(const plw_supply *line);

/* Find winding and source resistance from the readings, where there are parts and readings, and draw the line.
 * In:   supply: parts, winding (0: to be found from a reading off load), readings
 *       most_amps > 0: how far the line is to reach at least
 * Out:  line; estimate, has_winding
 * Ret:  PLW_OK, and as plw_source_from_readings() and plw_rectifier_line() */
PLW_API plw_status plw_plate_supply_settle(plw_plate_supply *supply, double most_amps, plw_error *error) PLW_MUST_USE;

/* The same supply at another mains voltage: of a network of resistances volts and amperes grow together, so the line is
 * drawn out from the origin.  Exact but for the drop of the diodes.
 * In:   mains_percent: of nominal, > 0 (90, 110)
 * Ret:  a copy, drawn out */
PLW_API plw_supply plw_supply_at_mains(const plw_supply *supply, double mains_percent);

/* The supply that gives `volts` into `ohms`: all its voltages in one proportion higher or lower.
 * In:   volts > 0, ohms > 0
 * Out:  *implied; not written unless PLW_OK
 * Ret:  PLW_OK, PLW_E_USAGE */
PLW_API plw_status plw_supply_implied(const plw_supply *supply, double volts, double ohms, plw_supply *implied,
                                      plw_error *error) PLW_MUST_USE;

/* What is asked of a supply. */
typedef struct {
    double amps; /* drawn by all that hangs on it, > 0 */
    plw_series series;
    double regulation_percent; /* of the transformer wanted; NaN: none is wanted */
    /* Of its parts.  Those of the rectifier may be unknown: they are filled in from its type. */
    plw_supply_ratings ratings;
    double bleeder_seconds; /* within which a bleeder is to bring it to 60 V */
} plw_supply_question;

/* The usual question at a current.
 * Ret:  E24, no transformer wanted, no rating known, 30 s (common practice, no source) */
PLW_API plw_supply_question plw_supply_question_usual(double amps);

enum { PLW_ANSWER_LINE_POINTS = 13 };

typedef struct {
    double amps, volts, ripple_volts_peak_to_peak;
} plw_supply_point;

/* What it does. */
typedef struct {
    const plw_plate_supply *supply;
    double amps, volts;
    double source_ohms; /* -dV/dI there */
    double volts_error; /* a standard error, from those of the readings; NaN without readings */
    double
        off_load_volts; /* nothing drawn, nominal mains; a fitted bleeder taken as open: what capacitors must stand */
    double off_load_high_volts;
    double bled_volts; /* off load with the fitted bleeder drawing, nominal mains; NaN without one */
    double bled_high_volts;
    double mains_high_percent;
    bool has_state; /* the steady state of the rectifier is known */
    plw_rectifier_state state;
    size_t line_points;
    plw_supply_point line[PLW_READINGS_MOST + PLW_ANSWER_LINE_POINTS];
    bool has_dummy;
    plw_dummy_load dummy;
    bool has_bleeder;    /* `bleeder` is filled in */
    bool bleeder_fitted; /* it is the one described, not one that is advised */
    plw_bleeder bleeder;
    size_t checks_count;
    plw_supply_check checks[PLW_SUPPLY_CHECKS_MOST];
    bool within_ratings;
    bool has_transformer;
    plw_transformer transformer; /* that gives `volts` */
} plw_supply_answer;

/* Ask.
 * In:   a settled supply
 * Out:  *answer; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE; PLW_E_NO_POINT: the supply does not give that current; as plw_rectifier_steady() */
PLW_API plw_status plw_plate_supply_ask(const plw_plate_supply *supply, const plw_supply_question *question,
                                        plw_supply_answer *answer, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
