/* The filter as a linear network: states, their flow without the rectifier, mean values.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef SUPPLY_NETWORK_H
#define SUPPLY_NETWORK_H

#include "platewright/rectifier.h"
#include "supply/diode.h"

enum { PLW_STATES_MOST = 2 * PLW_SECTIONS_MOST + 1 };

/* States in order from the rectifier: reservoir volts (absent with choke input), then for each section the current of
 * its choke, if it is one, and the volts of its capacitor.  Angles in radian of the mains take the place of time:
 *     dx/dangle = a x + input[0] w + load I + constant
 * where w is the current into the reservoir, or with choke input the voltage at the first choke: either acts on x[0].
 */
typedef struct {
    plw_rectifier_law law;
    size_t states;
    bool choke_input;
    double omega;
    double a[PLW_STATES_MOST][PLW_STATES_MOST];
    double input;
    double load[PLW_STATES_MOST];     /* by the constant current drawn at the output */
    double constant[PLW_STATES_MOST]; /* by drawn_amps */
    size_t nodes;
    size_t node_state[PLW_NODES_MOST];
    double node_farads[PLW_NODES_MOST];
    size_t output;         /* state of the output node */
    double output_siemens; /* bleeder and load resistor */
    double period;         /* pi, or 2 pi when the two halves of a cycle differ */
    double series_ohms;    /* DC resistance from rectifier to output */
    double drawn_amps;     /* all of drawn_amps together */
} plw_network;

/* In: a valid description; load_ohms > 0 or 0 for none */
void plw_network_make(plw_network *network, const plw_rectifier *supply, double load_ohms);

/* DC drops with a first node (or, choke input, a rectifier output) at `volts`: the current wanted from the rectifier,
 * and the DC state. */
double plw_network_demand(const plw_network *network, const plw_rectifier *supply, double load_amps, double volts,
                          double state[PLW_STATES_MOST]);

/* Mean volts of every node from those of the output: exact, since capacitors carry no mean current and chokes no mean
 * voltage. */
void plw_network_means(const plw_network *network, const plw_rectifier *supply, double load_amps, double output_volts,
                       double node_volts[PLW_NODES_MOST]);

#endif
