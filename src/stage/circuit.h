/* The stage as a feed of one tube: resistances and steady voltages, as the dynamic characteristic wants them.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef STAGE_CIRCUIT_H
#define STAGE_CIRCUIT_H

#include "platewright/stage.h"
#include "tube/dynamic.h"

/* All resistances are those that one tube's current sees: what N tubes share counts N times. */
typedef struct {
    const plw_stage *stage;
    bool has_screen;        /* the tube has one */
    bool screen_on_primary; /* triode connection or ultralinear */
    double tap;             /* 0 with the screen on the supply, 1 as a triode */
    double tubes;           /* N */
    double load_ohms;       /* the speaker and the secondary's copper */
    double primary_ohms;
    double cathode_ohms; /* 0 with fixed bias */
    plw_feed feed;
} plw_circuit;

/* In:   a valid stage with bias, which must outlive the circuit
 * Out:  *circuit; circuit->feed points into it: do not copy it */
void plw_circuit_prepare(const plw_stage *stage, plw_circuit *circuit);

/* Supply voltage, and current, all tubes together and the rest of the amplifier, at the averages of one tube. */
double plw_circuit_supply_amps(const plw_circuit *circuit, const double average_amps[PLW_FLOWS]);

/* The most that the supply is known to give: at the least current for which it speaks. */
double plw_circuit_highest_supply_volts(const plw_stage *stage);

/* Volts of the cathode to chassis. */
double plw_circuit_cathode_volts(const plw_circuit *circuit, const double amps[PLW_FLOWS]);

#endif
