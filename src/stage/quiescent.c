/* The point of rest.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "platewright/quantity.h"
#include "platewright/stage.h"
#include "stage/circuit.h"

#define LEAST_CATHODE_AMPS 1e-6
#define LEAST_SUPPLY_VOLTS 10.0

/* Starting currents: a usual output stage idles at most of its rated dissipation. */
static void guess(const plw_stage *stage, plw_instant *point) {
    double volts;
    double ohms;
    plw_supply_at(&stage->supply, stage->other_amps, &volts, &ohms);
    const plw_ratings *ratings = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    const double watts = ratings != NULL && isfinite(ratings->plate_watts) ? ratings->plate_watts : 10.0;
    point->amps[PLW_OF_PLATE] = 0.8 * watts / volts;
    point->amps[PLW_OF_SCREEN] = stage->tube->model.law.kind == PLW_LAW_PENTODE ? 0.1 * point->amps[PLW_OF_PLATE] : 0.0;
}

/* What the rest of the amplifier leaves of the supply, in V. */
static double supply_left(const plw_stage *stage) {
    double volts;
    double ohms;
    plw_supply_at(&stage->supply, stage->other_amps, &volts, &ohms);
    return volts;
}

/* The supply's readings must reach the point. */
static plw_status within_supply(const plw_stage *stage, double amps, plw_error *error) {
    double least;
    double most;
    plw_supply_range(&stage->supply, &least, &most);
    if (amps >= least && amps <= most) {
        return PLW_OK;
    }
    double volts;
    double ohms;
    plw_supply_at(&stage->supply, amps < least ? least : most, &volts, &ohms);
    char drawn[32];
    char reach[32];
    char load[32];
    char watts[32];
    plw_quantity_format(amps, PLW_UNIT_AMPERE, 3, drawn, sizeof drawn);
    plw_quantity_format(amps < least ? least : most, PLW_UNIT_AMPERE, 3, reach, sizeof reach);
    plw_quantity_format(volts / amps, PLW_UNIT_OHM, 2, load, sizeof load);
    plw_quantity_format(volts * amps, PLW_UNIT_WATT, 2, watts, sizeof watts);
    if (stage->supply.kind == PLW_SUPPLY_SOURCE) {
        return plw_fail(
            error, PLW_E_NO_POINT,
            "supply: the stage would draw %s, but behind its source resistance the supply gives %s at the most", drawn,
            reach);
    }
    if (stage->supply.kind == PLW_SUPPLY_RECTIFIER) {
        return plw_fail(error, PLW_E_NO_POINT,
                        "winding: the stage would draw %s, but the line of this supply ends at %s, where %s is left; a "
                        "stronger transformer or less current is wanted",
                        drawn, reach, plw_quantity_format(volts, PLW_UNIT_VOLT, 3, load, sizeof load));
    }
    return plw_fail(error, PLW_E_NO_POINT,
                    "reading: the stage draws %s, but the readings speak only %s %s; add a reading into about %s "
                    "(it must stand %s)",
                    drawn, amps < least ? "from" : "up to", reach, load, watts);
}

static void fill(const plw_circuit *circuit, const plw_instant *point, plw_quiescent *q) {
    const plw_stage *stage = circuit->stage;
    const double unknown = (double)NAN;
    const double *amps = point->amps;
    double source_ohms;
    q->supply_amps = plw_circuit_supply_amps(circuit, amps);
    plw_supply_at(&stage->supply, q->supply_amps, &q->supply_volts, &source_ohms);
    q->cathode_volts = plw_circuit_cathode_volts(circuit, amps);
    q->plate_volts = point->volts[PLW_AT_PLATE];
    q->screen_volts = circuit->has_screen ? point->volts[PLW_AT_SCREEN] : unknown;
    q->grid_volts = point->volts[PLW_AT_GRID];
    q->plate_to_ground_volts = q->plate_volts + q->cathode_volts;
    q->screen_to_ground_volts = q->screen_volts + q->cathode_volts;
    q->plate_amps = amps[PLW_OF_PLATE];
    q->screen_amps = amps[PLW_OF_SCREEN];
    q->cathode_amps = q->plate_amps + q->screen_amps;
    q->plate_watts = q->plate_volts * q->plate_amps;
    q->screen_watts = q->screen_volts * q->screen_amps;
    q->cathode_resistor_amps = unknown;
    q->cathode_resistor_watts = unknown;
    if (isfinite(stage->cathode_resistor_ohms)) {
        q->cathode_resistor_amps = q->cathode_amps * (stage->resistor_each ? 1.0 : circuit->tubes);
        q->cathode_resistor_watts = q->cathode_volts * q->cathode_resistor_amps;
    }
    q->screen_resistor_watts = stage->screen_resistor_ohms * q->screen_amps * q->screen_amps;
    q->residual_amps = fabs(q->plate_amps - point->law.plate_amps) + fabs(q->screen_amps - point->law.screen_amps);
    const plw_small_signal small = plw_small_signal_at(&point->law, circuit->tap);
    q->gm_siemens = small.gm_siemens;
    q->plate_resistance_ohms = small.plate_resistance_ohms;
    q->mu = small.mu;
}

plw_status plw_quiescent_solve(const plw_stage *stage, plw_quiescent *quiescent, plw_error *error) {
    plw_status status = plw_stage_validate(stage, true, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_circuit circuit;
    plw_circuit_prepare(stage, &circuit);
    plw_instant point;
    guess(stage, &point);
    status = plw_dynamic_rest(&stage->tube->model.law, &circuit.feed, &point);
    if (status != PLW_OK) {
        return plw_fail(error, status, "the point of rest was not found to the accuracy wanted");
    }
    plw_quiescent q;
    fill(&circuit, &point, &q);
    if (q.cathode_amps < LEAST_CATHODE_AMPS && !(supply_left(stage) >= LEAST_SUPPLY_VOLTS)) {
        return plw_fail(
            error, PLW_E_NO_POINT,
            "other-current: the rest of the amplifier alone pulls the supply down to %.3g V; less of it, or a "
            "stronger supply, is wanted",
            supply_left(stage));
    }
    if (q.cathode_amps < LEAST_CATHODE_AMPS) {
        return plw_fail(error, PLW_E_NO_POINT,
                        "bias: the tube is cut off at this bias (%.3g V at the grid) and draws no current; a smaller "
                        "bias or cathode resistor is wanted",
                        q.grid_volts);
    }
    status = within_supply(stage, q.supply_amps, error);
    if (status == PLW_OK) {
        *quiescent = q;
    }
    return status;
}
