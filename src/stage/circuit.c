/* The stage as a feed of one tube.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "stage/circuit.h"

#include <math.h>

double plw_circuit_supply_amps(const plw_circuit *circuit, const double average_amps[PLW_FLOWS]) {
    const bool own_screen_supply = isfinite(circuit->stage->screen_supply_volts);
    const double tube_amps = average_amps[PLW_OF_PLATE] + (own_screen_supply ? 0.0 : average_amps[PLW_OF_SCREEN]);
    return circuit->tubes * tube_amps + circuit->stage->other_amps;
}

double plw_circuit_cathode_volts(const plw_circuit *circuit, const double amps[PLW_FLOWS]) {
    return circuit->cathode_ohms * (amps[PLW_OF_PLATE] + amps[PLW_OF_SCREEN]);
}

double plw_circuit_highest_supply_volts(const plw_stage *stage) {
    double volts;
    double ohms;
    double least_amps;
    double most_amps;
    plw_supply_range(&stage->supply, &least_amps, &most_amps);
    plw_supply_at(&stage->supply, least_amps, &volts, &ohms);
    return volts;
}

/* What capacitors and the transformer keep steady, at given averages. */
static void average_volts(const void *context, const double average_amps[PLW_FLOWS], double volts[PLW_ELECTRODES],
                          double by_average[PLW_ELECTRODES][PLW_FLOWS]) {
    const plw_circuit *circuit = context;
    const plw_stage *stage = circuit->stage;
    const bool own_screen_supply = isfinite(stage->screen_supply_volts);
    double supply_volts;
    double source_ohms;
    plw_supply_at(&stage->supply, plw_circuit_supply_amps(circuit, average_amps), &supply_volts, &source_ohms);
    source_ohms *= circuit->tubes;
    const double source_by[PLW_FLOWS] = {source_ohms, own_screen_supply ? 0.0 : source_ohms};
    const double load_by[PLW_FLOWS] = {circuit->load_ohms, circuit->tap * circuit->load_ohms};
    const double cathode_ohms = stage->unbypassed ? 0.0 : circuit->cathode_ohms;
    const double screen_ohms = circuit->has_screen && stage->screen_bypassed ? stage->screen_resistor_ohms : 0.0;
    const double screen_source = own_screen_supply ? stage->screen_supply_volts : supply_volts;
    const double load_mean =
        load_by[PLW_OF_PLATE] * average_amps[PLW_OF_PLATE] + load_by[PLW_OF_SCREEN] * average_amps[PLW_OF_SCREEN];
    const double cathode_volts = cathode_ohms * (average_amps[PLW_OF_PLATE] + average_amps[PLW_OF_SCREEN]);

    volts[PLW_AT_PLATE] = supply_volts + load_mean - cathode_volts;
    volts[PLW_AT_SCREEN] =
        screen_source + circuit->tap * load_mean - screen_ohms * average_amps[PLW_OF_SCREEN] - cathode_volts;
    volts[PLW_AT_GRID] = (isfinite(stage->fixed_bias_volts) ? stage->fixed_bias_volts : 0.0) - cathode_volts;
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        by_average[PLW_AT_PLATE][flow] = load_by[flow] - source_by[flow] - cathode_ohms;
        by_average[PLW_AT_SCREEN][flow] = circuit->tap * load_by[flow] - (own_screen_supply ? 0.0 : source_by[flow]) -
                                          cathode_ohms - (flow == PLW_OF_SCREEN ? screen_ohms : 0.0);
        by_average[PLW_AT_GRID][flow] = -cathode_ohms;
    }
}

/* Resistances in which each current falls at once.  The primary's copper is spread over its turns: the part up to the
 * tap carries both currents, the rest the plate's alone; the speaker is seen by the ampere-turns of both. */
static void instantaneous_ohms(const plw_circuit *circuit, double ohms[PLW_ELECTRODES][PLW_FLOWS]) {
    const plw_stage *stage = circuit->stage;
    const double tap = circuit->tap;
    const double cathode = stage->unbypassed ? circuit->cathode_ohms : 0.0;
    const double screen = circuit->has_screen && !stage->screen_bypassed ? stage->screen_resistor_ohms : 0.0;
    const double both = circuit->primary_ohms + circuit->load_ohms;
    ohms[PLW_AT_PLATE][PLW_OF_PLATE] = both + cathode;
    ohms[PLW_AT_PLATE][PLW_OF_SCREEN] = tap * both + cathode;
    ohms[PLW_AT_SCREEN][PLW_OF_PLATE] = tap * both + cathode;
    ohms[PLW_AT_SCREEN][PLW_OF_SCREEN] =
        tap * circuit->primary_ohms + tap * tap * circuit->load_ohms + screen + cathode;
    ohms[PLW_AT_GRID][PLW_OF_PLATE] = cathode;
    ohms[PLW_AT_GRID][PLW_OF_SCREEN] = cathode;
}

void plw_circuit_prepare(const plw_stage *stage, plw_circuit *circuit) {
    const double tubes = (double)stage->parallel;
    const bool has_screen = stage->tube->model.law.kind == PLW_LAW_PENTODE;
    *circuit = (plw_circuit){.stage = stage, .has_screen = has_screen, .tubes = tubes};
    if (has_screen && stage->connection == PLW_CONNECTION_TRIODE) {
        circuit->tap = 1.0;
    } else if (has_screen && stage->connection == PLW_CONNECTION_ULTRALINEAR) {
        circuit->tap = stage->tap;
    }
    circuit->screen_on_primary = circuit->tap > 0.0;
    const double ratio = isfinite(stage->ratio) ? stage->ratio : 0.0;
    circuit->load_ohms = tubes * (stage->load_ohms + ratio * ratio * stage->secondary_ohms);
    circuit->primary_ohms = tubes * stage->primary_ohms;
    if (isfinite(stage->cathode_resistor_ohms)) {
        circuit->cathode_ohms = stage->cathode_resistor_ohms * (stage->resistor_each ? 1.0 : tubes);
    }
    instantaneous_ohms(circuit, circuit->feed.ohms);
    circuit->feed.average_volts = average_volts;
    circuit->feed.context = circuit;
    circuit->feed.tap = circuit->tap;
    circuit->feed.driver_ohms = tubes * stage->driver_ohms;
}
