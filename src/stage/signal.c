/* The stage driven: a whole cycle, its harmonics, power and heat.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "platewright/stage.h"
#include "stage/circuit.h"

_Static_assert((int)PLW_PATH_POINTS == (int)PLW_CYCLE_INSTANTS, "a path holds every instant of the cycle");
_Static_assert((int)PLW_HARMONICS_MOST == (int)PLW_HARMONICS, "harmonics as the cycle gives them");

static void widen(double value, double *least, double *most) {
    *least = value < *least ? value : *least;
    *most = value > *most ? value : *most;
}

/* Extremes and the drawn path; heat of plate and screen as means over the cycle. */
static void walk_cycle(const plw_circuit *circuit, const plw_cycle *cycle, plw_signal *s) {
    s->plate_volts_least = s->plate_amps_least = HUGE_VAL;
    s->plate_volts_most = s->plate_amps_most = s->plate_to_ground_volts_most = -HUGE_VAL;
    s->screen_amps_most = s->grid_amps = s->grid_amps_most = 0.0;
    double plate_watts = 0.0;
    double screen_watts = 0.0;
    s->plate_to_ground_volts = s->screen_to_ground_volts = 0.0;
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        const plw_instant *at = &cycle->instant[index];
        const double weight = (index == 0 || index == PLW_CYCLE_STEPS ? 0.5 : 1.0) / PLW_CYCLE_STEPS;
        const double plate_volts = at->volts[PLW_AT_PLATE];
        plate_watts += weight * plate_volts * at->amps[PLW_OF_PLATE];
        screen_watts += weight * at->volts[PLW_AT_SCREEN] * at->amps[PLW_OF_SCREEN];
        widen(plate_volts, &s->plate_volts_least, &s->plate_volts_most);
        widen(at->amps[PLW_OF_PLATE], &s->plate_amps_least, &s->plate_amps_most);
        s->screen_amps_most = fmax(s->screen_amps_most, at->amps[PLW_OF_SCREEN]);
        plw_currents currents; /* the law's grid current asks for the grid's volts alone: the rest costs nothing */
        plw_law_evaluate(&circuit->stage->tube->model.law, 0.0, 0.0, at->volts[PLW_AT_GRID], &currents);
        s->grid_amps += weight * currents.grid_amps;
        s->grid_amps_most = fmax(s->grid_amps_most, currents.grid_amps);
        const double cathode_volts =
            plw_circuit_cathode_volts(circuit, circuit->stage->unbypassed ? at->amps : cycle->average_amps);
        s->plate_to_ground_volts_most = fmax(s->plate_to_ground_volts_most, plate_volts + cathode_volts);
        s->plate_to_ground_volts += weight * (plate_volts + cathode_volts);
        s->screen_to_ground_volts += weight * (at->volts[PLW_AT_SCREEN] + cathode_volts);
        s->path_plate_volts[index] = plate_volts;
        s->path_plate_amps[index] = at->amps[PLW_OF_PLATE];
        s->path_screen_amps[index] = at->amps[PLW_OF_SCREEN];
        s->path_grid_volts[index] = at->volts[PLW_AT_GRID];
    }
    s->plate_watts = plate_watts;
    s->screen_watts = circuit->has_screen ? screen_watts : (double)NAN;
    s->screen_to_ground_volts = circuit->has_screen ? s->screen_to_ground_volts : (double)NAN;
}

static void fill_harmonics(const plw_circuit *circuit, const plw_cycle *cycle, plw_signal *s) {
    const double *harmonic = cycle->harmonic_amps;
    const double peak = harmonic[1];
    for (int order = 0; order <= PLW_HARMONICS; order++) {
        s->harmonic_percent[order] = order < 2 || !(peak > 0.0) ? (double)NAN : 100.0 * harmonic[order] / peak;
    }
    s->thd_percent = plw_distortion_percent(harmonic);
    /* One tube's current in N times the resistance is one tube's share; all N give N times that. */
    const double square = 0.5 * peak * peak * circuit->tubes;
    s->power_watts = square * (circuit->load_ohms + circuit->primary_ohms);
    s->speaker_watts = square * circuit->tubes * circuit->stage->load_ohms;
    s->voltage_gain = cycle->drive_peak_volts > 0.0
                          ? peak * (circuit->load_ohms + circuit->primary_ohms) / cycle->drive_peak_volts
                          : (double)NAN;
}

static void fill_averages(const plw_circuit *circuit, const plw_cycle *cycle, plw_signal *s) {
    const plw_stage *stage = circuit->stage;
    const double *average = cycle->average_amps;
    const double supply_amps = plw_circuit_supply_amps(circuit, average);
    double ohms;
    double least_amps;
    double most_amps;
    plw_supply_at(&stage->supply, supply_amps, &s->supply_volts, &ohms);
    plw_supply_range(&stage->supply, &least_amps, &most_amps);
    s->cathode_volts = plw_circuit_cathode_volts(circuit, average);
    s->plate_amps = average[PLW_OF_PLATE];
    s->screen_amps = average[PLW_OF_SCREEN];
    s->cathode_amps = s->plate_amps + s->screen_amps;
    const double input = (s->supply_volts - s->cathode_volts) * s->plate_amps * circuit->tubes;
    s->efficiency_percent = input > 0.0 ? 100.0 * s->power_watts / input : (double)NAN;
    s->beyond_supply = supply_amps < least_amps || supply_amps > most_amps;
    if (s->beyond_supply) { /* the line was drawn on for the solution's sake, but nobody has read it there */
        s->supply_volts = s->plate_to_ground_volts = s->screen_to_ground_volts = (double)NAN;
    }
}

plw_status plw_signal_solve(const plw_stage *stage, const plw_quiescent *quiescent, plw_signal *signal,
                            plw_error *error) {
    if (!isnan(stage->drive_peak_volts) && !(stage->drive_peak_volts >= 0.0 && stage->drive_peak_volts <= 2000.0)) {
        return plw_fail(error, PLW_E_USAGE, "drive: a peak of %.4g V at the grid; 0 to 2000 V is possible",
                        stage->drive_peak_volts);
    }
    plw_circuit circuit;
    plw_circuit_prepare(stage, &circuit);
    plw_instant rest = {.amps = {quiescent->plate_amps, quiescent->screen_amps}};
    plw_status status = plw_dynamic_rest(&stage->tube->model.law, &circuit.feed, &rest);
    plw_cycle cycle;
    if (status == PLW_OK) {
        status = plw_dynamic_cycle(&stage->tube->model.law, &circuit.feed, &rest, stage->drive_peak_volts, &cycle);
    }
    if (status != PLW_OK) {
        return plw_fail(error, status, "the cycle was not solved to the accuracy wanted");
    }
    plw_signal s = {.drive_peak_volts = cycle.drive_peak_volts};
    s.limit = cycle.limit == PLW_LIMIT_GRID_CURRENT ? PLW_DRIVE_GRID_CURRENT
              : cycle.limit == PLW_LIMIT_CUT_OFF    ? PLW_DRIVE_CUT_OFF
                                                    : PLW_DRIVE_GIVEN;
    walk_cycle(&circuit, &cycle, &s);
    fill_harmonics(&circuit, &cycle, &s);
    fill_averages(&circuit, &cycle, &s);
    const plw_instant *trough = &cycle.instant[PLW_CYCLE_STEPS];
    const double trough_amps = trough->amps[PLW_OF_PLATE] + trough->amps[PLW_OF_SCREEN];
    s.grid_current = cycle.instant[0].volts[PLW_AT_GRID] > 1e-6;
    s.cut_off = trough_amps < PLW_CUT_OFF_FRACTION * quiescent->cathode_amps * (1.0 - 1e-6);
    *signal = s;
    return PLW_OK;
}

double plw_stage_clean_percent(const plw_stage *stage) {
    return plw_stage_is_triode(stage) ? PLW_CLEAN_PERCENT_TRIODE : PLW_CLEAN_PERCENT_SCREENED;
}

plw_status plw_signal_within(const plw_stage *stage, const plw_quiescent *quiescent, const plw_signal *full,
                             double thd_percent, plw_signal *signal, plw_error *error) {
    if (!(full->thd_percent > thd_percent)) {
        *signal = *full;
        return PLW_OK;
    }
    plw_stage driven = *stage;
    double within = 0.0;
    double beyond = full->drive_peak_volts;
    plw_signal best = *full;
    bool found = false;
    /* Distortion grows with drive; where it does not quite, the halving still ends at a place where it crosses. */
    for (int halving = 0; halving < 60 && (!found || beyond - within > 1e-4 * beyond); halving++) {
        driven.drive_peak_volts = 0.5 * (within + beyond);
        plw_signal trial = *full;
        const plw_status status = plw_signal_solve(&driven, quiescent, &trial, error);
        if (status != PLW_OK) {
            return status;
        }
        if (trial.thd_percent <= thd_percent) {
            within = driven.drive_peak_volts;
            best = trial;
            found = true;
        } else {
            beyond = driven.drive_peak_volts;
        }
    }
    *signal = best;
    return PLW_OK;
}
