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
 * Accepts a decimal number (with a decimal point in every locale) with an optional SI prefix (p n u µ m k K, for ohms
 * and hertz also M G, for ohms also "meg") and an optional unit, with or without a space; and, for ohms, farads and
 * henries, the letter code in which the multiplier stands for the decimal point (4k7, R47, 470R, 4M7, 4L7 for
 * milliohms; 4n7). Prefixes tell case: m is milli, M is mega; k and K are both kilo.  Units do so only where they must:
 * s and S. A plain number and a percentage take no prefix.
 * In:   text (not NULL) in UTF-8, the unit expected
 * Out:  *value in the base unit, the double nearest to what is written; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE with a text that says what is wrong and gives an example of what would be right: empty, not
 *       a number, a leftover character, another unit, a comma, M where only milli can be meant, infinite, not a number
 *       (NaN), out of double's range, longer than 127 bytes
 * Source: IEC 60062:2016, clause on the letter and digit code for resistance and capacitance values; for inductance the
 *       same letters by common practice, no source. */
PLW_API plw_status plw_quantity_parse(const char *text, plw_unit unit, double *value, plw_error *error) PLW_MUST_USE;

/* Write a quantity with an SI prefix and `digits` significant digits: 45 mA, 4.7 kΩ, 12.9 V, 0.6 W, 0.22 µF.
 * Resistance, capacitance and inductance are nominal values of parts and drop zeros at the end (5 kΩ); the others keep
 * them (12.0 V).  The decimal point is a point in every locale.
 * In:   value any; NaN, infinities and an unknown unit give "-"; digits 1..9, else the nearer of the two
 * Out:  buffer, terminated unless size is 0, cut between two characters if too small
 * Ret:  buffer */
PLW_API char *plw_quantity_format(double value, plw_unit unit, int digits, char *buffer, size_t size);

/* Write a resistance in the IEC 60062 letter code: 270R, 4K7, 1M0, R47.  Two significant digits at least, as many as
 * are needed to be exact up to four (a fifth is rounded).
 * In:   ohms 1e-4 to below 1e12, else "-"
 * Out:  buffer, as for plw_quantity_format()
 * Ret:  buffer */
PLW_API char *plw_resistor_code(double ohms, char *buffer, size_t size);

/* The nearest names to a misspelt one, best first (Damerau-Levenshtein distance, case and punctuation ignored; names
 * equally near in the order given).
 * In:   names[count]; most > 0
 * Out:  found[0..n-1], indices into names
 * Ret:  n <= most: how many lie near enough to be offered: distance at most 2 or a third of the length of the wanted
 *       name, whichever is more, and less than the letters of either
 * Source: F. J. Damerau, "A technique for computer detection and correction of spelling errors", Comm. ACM 7, 1964. */
PLW_API size_t plw_nearest_names(const char *wanted, const char *const *names, size_t count, size_t *found,
                                 size_t most);

#ifdef __cplusplus
}
#endif
#endif
