/* The filter as a linear network: states, their flow without the rectifier, mean values.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "supply/network.h"

#include <math.h>
#include <string.h>

#define PI 3.14159265358979323846

/* One section after state `from`: returns the state of its capacitor. */
static size_t add_section(plw_network *network, const plw_filter_section *section, bool first_of_choke_input,
                          size_t from, size_t free_state) {
    const double omega = network->omega, per_farad = 1 / (omega * section->farads);
    if (section->henries <= 0) {
        const size_t node = free_state;
        const double siemens = 1 / section->ohms,
                     per_farad_before = 1 / (omega * network->node_farads[network->nodes - 1]);
        network->a[from][from] -= siemens * per_farad_before;
        network->a[from][node] += siemens * per_farad_before;
        network->a[node][from] += siemens * per_farad;
        network->a[node][node] -= siemens * per_farad;
        return node;
    }
    const size_t choke = free_state, node = free_state + 1;
    const double per_henry = 1 / (omega * section->henries);
    network->a[choke][choke] -= section->ohms * per_henry;
    network->a[choke][node] -= per_henry;
    network->a[node][choke] += per_farad;
    if (first_of_choke_input) {
        network->input = per_henry;
    } else {
        network->a[choke][from] += per_henry;
        network->a[from][choke] -= 1 / (omega * network->node_farads[network->nodes - 1]);
    }
    return node;
}

static void add_node(plw_network *network, size_t state, double farads) {
    network->node_state[network->nodes] = state;
    network->node_farads[network->nodes] = farads;
    network->nodes++;
}

void plw_network_make(plw_network *network, const plw_rectifier *supply, double load_ohms) {
    memset(network, 0, sizeof *network);
    network->law = plw_rectifier_law_of(supply);
    network->omega = 2 * PI * supply->mains_hertz;
    network->choke_input = supply->reservoir_farads <= 0;
    network->period = supply->connection == PLW_HALF_WAVE ? 2 * PI : PI;
    size_t last = 0, states = 0;
    if (!network->choke_input) {
        add_node(network, 0, supply->reservoir_farads);
        network->input = 1 / (network->omega * supply->reservoir_farads);
        states = 1;
    }
    for (size_t i = 0; i < supply->sections; i++) {
        last = add_section(network, &supply->section[i], network->choke_input && i == 0, last, states);
        states = last + 1;
        add_node(network, last, supply->section[i].farads);
        network->series_ohms += supply->section[i].ohms;
    }
    network->states = states;
    network->output = last;
    if (supply->bleeder_ohms > 0) {
        network->output_siemens += 1 / supply->bleeder_ohms;
    }
    if (load_ohms > 0) {
        network->output_siemens += 1 / load_ohms;
    }
    const double per_farad = 1 / (network->omega * network->node_farads[network->nodes - 1]);
    network->a[last][last] -= network->output_siemens * per_farad;
    network->load[last] = -per_farad;
    for (size_t i = 0; i < network->nodes; i++) {
        network->constant[network->node_state[i]] = -supply->drawn_amps[i] / (network->omega * network->node_farads[i]);
        network->drawn_amps += supply->drawn_amps[i];
    }
}

double plw_network_demand(const plw_network *network, const plw_rectifier *supply, double load_amps, double volts,
                          double state[PLW_STATES_MOST]) {
    /* Output volts from: volts - sum of ohms times the currents beyond = output. */
    double fall = 0, beyond[PLW_NODES_MOST + 1] = {0};
    const size_t first_section = network->choke_input ? 0 : 1; /* node i follows section i - first_section */
    for (size_t i = network->nodes; i-- > 0;) {
        beyond[i] = beyond[i + 1] + supply->drawn_amps[i] + (i + 1 == network->nodes ? load_amps : 0);
        if (i >= first_section) {
            fall += supply->section[i - first_section].ohms * beyond[i];
        }
    }
    const double output = (volts - fall) / (1 + network->series_ohms * network->output_siemens);
    const double shunt = network->output_siemens * output;
    double here = volts;
    for (size_t i = 0; i < network->nodes; i++) {
        const size_t at = network->node_state[i];
        if (i >= first_section) {
            const plw_filter_section *section = &supply->section[i - first_section];
            here -= section->ohms * (beyond[i] + shunt);
            if (section->henries > 0) {
                state[at - 1] = beyond[i] + shunt;
            }
        }
        state[at] = here;
    }
    return beyond[0] + shunt;
}

void plw_network_means(const plw_network *network, const plw_rectifier *supply, double load_amps, double output_volts,
                       double node_volts[PLW_NODES_MOST]) {
    const size_t first_section = network->choke_input ? 0 : 1;
    double volts = output_volts, beyond = load_amps + network->output_siemens * output_volts;
    for (size_t i = network->nodes; i-- > 0;) {
        node_volts[i] = volts;
        beyond += supply->drawn_amps[i];
        if (i >= first_section) {
            volts += supply->section[i - first_section].ohms * beyond;
        }
    }
}
