/* Preferred values of resistors and capacitors, and the wattages they are made in.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_PREFERRED_H
#define PLATEWRIGHT_PREFERRED_H

#include "platewright/status.h"

#ifdef __cplusplus
extern "C" {
#endif

/* The series of IEC 60063:2015; the enumerator's value is the number of steps in a decade. */
typedef enum { PLW_E6 = 6, PLW_E12 = 12, PLW_E24 = 24, PLW_E48 = 48, PLW_E96 = 96, PLW_E192 = 192 } plw_series;

/* Read a series name ("E24", any case).  Ret: PLW_OK or PLW_E_USAGE with the names that are known. */
PLW_API plw_status plw_series_parse(const char *text, plw_series *series, plw_error *error) PLW_MUST_USE;

/* The member of the series nearest to a value, by ratio.
 * In:   value 1e-12..1e12, series a member of the enumeration
 * Ret:  the preferred value; NaN outside the domain
 * Source: IEC 60063:2015, tables of the E series. */
PLW_API double plw_preferred_nearest(double value, plw_series series);

/* The least member >= value, and the greatest member <= value (a member itself up to 1e-9 relative counts as equal).
 * Ret:  as plw_preferred_nearest() */
PLW_API double plw_preferred_at_least(double value, plw_series series);
PLW_API double plw_preferred_at_most(double value, plw_series series);

/* The member `steps` places above (or, negative, below) a member.
 * In:   value any in the domain; it is first taken to the nearest member
 * Ret:  the preferred value; NaN when it or the value lies outside 1e-12..1e12 */
PLW_API double plw_preferred_step(double value, int steps, plw_series series);

/* Usual power rating for a resistor that dissipates `watts`: the least of 0.25, 0.5, 1, 2, 3, 5, 7, 10, 15, 20, 25, 50,
 * 100, 200 W that is at least `margin` times it.
 * In:   watts >= 0, margin >= 1
 * Ret:  W; NaN when even the largest is too small or the arguments are outside the domain
 * Source: common practice, no source (makers' usual sizes). */
PLW_API double plw_resistor_rating_watts(double watts, double margin);

#ifdef __cplusplus
}
#endif
#endif
