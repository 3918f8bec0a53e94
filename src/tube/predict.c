/* What a law says of a printed row or point.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "platewright/fit.h"
#include "tube/dynamic.h"

#define UNKNOWN ((double)NAN)

/* The circuit of a printed row: plate and screen at the printed voltages to the cathode at rest, the load without
 * copper, the bias fixed or made by the cathode resistor. */
typedef struct {
    double plate_volts, screen_volts, grid_volts;
    double load_ohms, tap;
    double cathode_ohms;    /* 0: fixed bias */
    double rest_amps;       /* cathode current whose fall across the resistor the printed voltages already leave out */
    bool bias_from_current; /* the grid volts are those of the resistor alone */
} row_circuit;

static void row_volts(const void *context, const double average_amps[PLW_FLOWS], double volts[PLW_ELECTRODES],
                      double by_average[PLW_ELECTRODES][PLW_FLOWS]) {
    const row_circuit *c = context;
    const double total = average_amps[PLW_OF_PLATE] + average_amps[PLW_OF_SCREEN];
    const double load_mean = c->load_ohms * (average_amps[PLW_OF_PLATE] + c->tap * average_amps[PLW_OF_SCREEN]);
    /* While the bias is being found (rest_amps unknown) plate and screen stay at their printed volts to the cathode. */
    const bool at_rest = isnan(c->rest_amps);
    const double shift = at_rest ? 0.0 : c->cathode_ohms * (total - c->rest_amps);
    const double shift_by = at_rest ? 0.0 : c->cathode_ohms;
    volts[PLW_AT_PLATE] = c->plate_volts + load_mean - shift;
    volts[PLW_AT_SCREEN] = c->screen_volts + c->tap * load_mean - shift;
    volts[PLW_AT_GRID] = c->bias_from_current ? -c->cathode_ohms * total : c->grid_volts - shift;
    const double grid_by = c->bias_from_current ? -c->cathode_ohms : -shift_by;
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        const double load_by = c->load_ohms * (flow == PLW_OF_PLATE ? 1.0 : c->tap);
        by_average[PLW_AT_PLATE][flow] = load_by - shift_by;
        by_average[PLW_AT_SCREEN][flow] = c->tap * load_by - shift_by;
        by_average[PLW_AT_GRID][flow] = grid_by;
    }
}

static plw_feed row_feed(const row_circuit *circuit) {
    const double load = circuit->load_ohms;
    const double tap = circuit->tap;
    return (plw_feed){
        .ohms = {{load, tap * load}, {tap * load, tap * tap * load}, {0.0, 0.0}},
        .average_volts = row_volts,
        .context = circuit,
        .tap = tap,
    };
}

static row_circuit row_conditions(const plw_law *law, const plw_row *row) {
    const bool triode_connected = law->kind == PLW_LAW_PENTODE && row->connection == PLW_CONNECTION_TRIODE;
    return (row_circuit){
        .plate_volts = row->plate_volts,
        .screen_volts = triode_connected || isnan(row->screen_volts) ? row->plate_volts : row->screen_volts,
        .grid_volts = row->grid_volts,
        .load_ohms = isfinite(row->load_ohms) ? row->load_ohms : 0.0,
        .tap = triode_connected ? 1.0 : 0.0,
        /* A row that prints both was taken at the grid volts: its full-drive currents agree with that alone. */
        .cathode_ohms = isnan(row->grid_volts) ? row->cathode_resistor_ohms : 0.0,
        .rest_amps = UNKNOWN,
        .bias_from_current = isnan(row->grid_volts),
    };
}

static void small_signal(const plw_currents *c, double tap, plw_prediction *p) {
    const plw_small_signal s = plw_small_signal_at(c, tap);
    p->gm_siemens = s.gm_siemens;
    p->plate_resistance_ohms = s.plate_resistance_ohms;
    p->mu = s.mu;
}

static void driven(const plw_cycle *cycle, const row_circuit *circuit, bool has_screen, plw_prediction *p) {
    const double *harmonic = cycle->harmonic_amps;
    const double peak = harmonic[1];
    p->power_watts = 0.5 * peak * peak * circuit->load_ohms;
    if (peak > 0.0) {
        p->thd_percent = plw_distortion_percent(harmonic);
        p->h2_percent = 100.0 * fabs(harmonic[2]) / peak;
        p->h3_percent = 100.0 * fabs(harmonic[3]) / peak;
    }
    p->plate_amps_full_drive = cycle->average_amps[PLW_OF_PLATE] + circuit->tap * cycle->average_amps[PLW_OF_SCREEN];
    p->screen_amps_full_drive = has_screen && circuit->tap == 0.0 ? cycle->average_amps[PLW_OF_SCREEN] : UNKNOWN;
}

static const plw_prediction nothing_known = {
    .grid_volts = UNKNOWN,
    .plate_amps = UNKNOWN,
    .screen_amps = UNKNOWN,
    .gm_siemens = UNKNOWN,
    .plate_resistance_ohms = UNKNOWN,
    .mu = UNKNOWN,
    .plate_amps_full_drive = UNKNOWN,
    .screen_amps_full_drive = UNKNOWN,
    .power_watts = UNKNOWN,
    .thd_percent = UNKNOWN,
    .h2_percent = UNKNOWN,
    .h3_percent = UNKNOWN,
};

plw_status plw_predict_row(const plw_law *law, const plw_row *row, plw_prediction *prediction, plw_error *error) {
    row_circuit circuit = row_conditions(law, row);
    if (!isfinite(circuit.plate_volts) || (circuit.bias_from_current && !(circuit.cathode_ohms > 0.0))) {
        return plw_fail(error, PLW_E_USAGE, "row: neither grid volts nor a cathode resistor is given");
    }
    plw_feed feed = row_feed(&circuit);
    plw_instant rest = {0};
    plw_status status = plw_dynamic_rest(law, &feed, &rest);
    if (status != PLW_OK) {
        return plw_fail(error, status, "row: its point of rest was not found");
    }
    plw_prediction p = nothing_known;
    const bool has_screen = law->kind == PLW_LAW_PENTODE;
    p.grid_volts = rest.volts[PLW_AT_GRID];
    p.plate_amps = rest.amps[PLW_OF_PLATE] + circuit.tap * rest.amps[PLW_OF_SCREEN];
    p.screen_amps = has_screen && circuit.tap == 0.0 ? rest.amps[PLW_OF_SCREEN] : UNKNOWN;
    small_signal(&rest.law, circuit.tap, &p);
    if (isfinite(row->drive_peak_volts) && circuit.load_ohms > 0.0) {
        circuit.rest_amps = rest.amps[PLW_OF_PLATE] + rest.amps[PLW_OF_SCREEN];
        circuit.grid_volts = p.grid_volts;
        circuit.bias_from_current = false;
        plw_cycle cycle;
        status = plw_dynamic_cycle(law, &feed, &rest, row->drive_peak_volts, &cycle);
        if (status != PLW_OK) {
            return plw_fail(error, status, "row: its cycle was not solved");
        }
        driven(&cycle, &circuit, has_screen, &p);
    }
    *prediction = p;
    return PLW_OK;
}

plw_status plw_predict_point(const plw_law *law, const plw_point *point, plw_prediction *prediction, plw_error *error) {
    if (!isfinite(point->plate_volts) || !isfinite(point->grid_volts)) {
        return plw_fail(error, PLW_E_USAGE, "point: plate and grid volts are needed");
    }
    const bool triode_connected = law->kind == PLW_LAW_PENTODE && point->connection == PLW_CONNECTION_TRIODE;
    const double tap = triode_connected ? 1.0 : 0.0;
    const double screen_volts =
        triode_connected || isnan(point->screen_volts) ? point->plate_volts : point->screen_volts;
    plw_currents c;
    plw_law_evaluate(law, point->plate_volts, screen_volts, point->grid_volts, &c);
    plw_prediction p = nothing_known;
    p.grid_volts = point->grid_volts;
    p.plate_amps = c.plate_amps + tap * c.screen_amps;
    p.screen_amps = law->kind == PLW_LAW_PENTODE && tap == 0.0 ? c.screen_amps : UNKNOWN;
    small_signal(&c, tap, &p);
    if (point->kind == PLW_POINT_INNER_MU) {
        p.mu = (c.plate_by_grid + c.screen_by_grid) / (c.plate_by_screen + c.screen_by_screen);
    }
    *prediction = p;
    return PLW_OK;
}

bool plw_row_is_fitted(const plw_row *row) {
    return row->provenance.confidence != PLW_CONFIDENCE_LOW && isfinite(row->plate_amps);
}

bool plw_point_is_fitted(const plw_point *point) {
    return point->provenance.confidence != PLW_CONFIDENCE_LOW && point->kind != PLW_POINT_REMARK &&
           point->plate_volts > 0.0 && isfinite(point->grid_volts) &&
           (isfinite(point->plate_amps) || (point->kind == PLW_POINT_INNER_MU && isfinite(point->mu)));
}
