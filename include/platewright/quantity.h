/* Quantities as the trade writes them: 4k7, 470R, 0.22uF, 45 mA, 285V.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_QUANTITY_H
#define PLATEWRIGHT_QUANTITY_H

#include <stddef.h>

#include "platewright/status.h"

#ifdef __cplusplus
extern "C" {
#endif

/* The unit a place expects.  A number without a unit is in the base unit of its place. */
typedef enum {
    PLW_UNIT_NONE,    /* a plain number: turns ratio, count */
    PLW_UNIT_VOLT,    /* V */
    PLW_UNIT_AMPERE,  /* A */
    PLW_UNIT_OHM,     /* ohm: R, ohm, ohms, Ω, or the bare multiplier (4k7) */
    PLW_UNIT_WATT,    /* W */
    PLW_UNIT_FARAD,   /* F */
    PLW_UNIT_HENRY,   /* H */
    PLW_UNIT_HERTZ,   /* Hz */
    PLW_UNIT_SECOND,  /* s */
    PLW_UNIT_SIEMENS, /* S; also mA/V and umho */
    PLW_UNIT_PERCENT, /* written 90%; read as the number 90 */
    PLW_UNIT_COUNT
} plw_unit;

/* Read one quantity.
 * Accepts a decimal number with an optional SI prefix (p n u µ m k K M G; also "meg") and an optional unit, with or
 * without a space; and, for ohms, farads and henries, the IEC 60062 letter code in which the multiplier stands for the
 * decimal point (4k7, R47, 470R, 4M7, 4n7).
 * In:   text (not NULL), the unit expected
 * Out:  *value in the base unit; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE with a text that says what is wrong and gives an example of what would be right:
 *       empty, not a number, a leftover character, another unit, infinite, not a number (NaN), out of double's range
 * Source: IEC 60062:2016, clause on the letter and digit code for resistance and capacitance values. */
PLW_API plw_status plw_quantity_parse(const char *text, plw_unit unit, double *value, plw_error *error) PLW_MUST_USE;

/* Write a quantity with an SI prefix and `digits` significant digits: 45 mA, 4.7 kΩ, 12.9 V.
 * In:   value any; NaN and infinities give "-"; digits 1..9; buffer of size > 0
 * Out:  buffer, always terminated, cut if too small
 * Ret:  buffer */
PLW_API char *plw_quantity_format(double value, plw_unit unit, int digits, char *buffer, size_t size);

/* Write a resistance in the IEC 60062 letter code: 270R, 4K7, 1M0, R47.  Two significant digits at least, as many as
 * are needed to be exact up to four.
 * In:   ohms > 0 (else "-") */
PLW_API char *plw_resistor_code(double ohms, char *buffer, size_t size);

/* The nearest names to a misspelt one, best first (Damerau-Levenshtein distance, case and punctuation ignored).
 * In:   names[count]; most > 0
 * Out:  found[0..n-1], indices into names
 * Ret:  n <= most: how many lie near enough to be offered (distance at most 2, or a third of the length)
 * Source: F. J. Damerau, "A technique for computer detection and correction of spelling errors", Comm. ACM 7, 1964. */
PLW_API size_t plw_nearest_names(const char *wanted, const char *const *names, size_t count, size_t *found, size_t most);

#ifdef __cplusplus
}
#endif
#endif
