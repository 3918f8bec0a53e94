/* The capacitor across the cathode resistor.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_BYPASS_H
#define PLATEWRIGHT_BYPASS_H

#include "platewright/stage.h"

#ifdef __cplusplus
extern "C" {
#endif

/* The frequency down to which a usual stage is to keep its gain, in Hz.  Common practice, no source. */
#define PLW_BYPASS_HERTZ 20.0

/* The capacitance that keeps the loss of gain at a frequency to 3 dB at the most: 1/(2 pi f r) with r the cathode
 * resistor beside what the cathode itself presents, 1/gk, the load and the screen's feed taken part.
 * In:   a stage with a cathode resistor, and its point of rest; hertz > 0
 * Ret:  F, of the one capacitor where tubes share their resistor, else of each tube's; NaN with fixed bias or without a
 *       solution
 * Source: Radiotron Designer's Handbook, 4th edition (F. Langford-Smith, 1953), chapter 12, cathode bypassing; from
 * memory. */
PLW_API double plw_bypass_farads(const plw_stage *stage, const plw_quiescent *quiescent, double hertz);

#ifdef __cplusplus
}
#endif
#endif
