/* Mean values, ripple, RMS currents and waveforms of a steady state.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef SUPPLY_MEASURE_H
#define SUPPLY_MEASURE_H

#include "supply/steady.h"

/* Run the cycle once more and fill *state, but for load, rectified and average currents, source_ohms
 * and iterations.  Mean volts are as good as the cubics; plw_network_means() has them exact.
 * In:   instants[count], or NULL and 0 */
void plw_measure(const plw_engine *engine, double load_amps, const double *start, plw_rectifier_instant *instants,
                 size_t count, plw_rectifier_state *state);

#endif
