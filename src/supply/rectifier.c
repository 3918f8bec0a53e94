/* Plate supply from its parts: description checked, steady state, waveform, regulation line.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/rectifier.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "supply/measure.h"
#include "supply/steady.h"

#define PI 3.14159265358979323846

/* The line leaves off where the output is this share of its off-load voltage. */
#define LINE_SHARE_LEAST 0.25
/* A step of Newton's method this short against the fall from the peak leaves about its square: enough for a line. */
#define LINE_TOLERANCE 1e-3

/* ---- the description --------------------------------------------------------------------------------------------- */

static bool positive(double value) {
    return isfinite(value) && value > 0;
}

static bool not_negative(double value) {
    return isfinite(value) && value >= 0;
}

static plw_status check_diode(const plw_rectifier *supply, plw_error *error) {
    const plw_diode *diode = &supply->diode;
    if (diode->kind == PLW_DIODE_VACUUM) {
        if (!positive(diode->perveance)) {
            return plw_fail(
                error, PLW_E_USAGE,
                "rectifier: the perveance %g is not positive; take it from a published drop, as 50 V at 275 mA",
                diode->perveance);
        }
        return PLW_OK;
    }
    if (!not_negative(diode->drop_volts) || !not_negative(diode->slope_ohms)) {
        return plw_fail(error, PLW_E_USAGE,
                        "rectifier: a silicon diode has a drop and a slope of zero or more, not %g V, %g ohm",
                        diode->drop_volts, diode->slope_ohms);
    }
    const double series = supply->connection == PLW_BRIDGE ? 2 : 1;
    if (series * diode->drop_volts >= sqrt(2.0) * supply->winding_rms_volts) {
        return plw_fail(error, PLW_E_USAGE, "rectifier: the diodes drop %g V, all that the winding has",
                        series * diode->drop_volts);
    }
    return PLW_OK;
}

static plw_status check_sections(const plw_rectifier *supply, plw_error *error) {
    if (supply->sections > PLW_SECTIONS_MOST) {
        return plw_fail(error, PLW_E_USAGE, "filter: %zu sections are given, %d are the most that are taken",
                        supply->sections, PLW_SECTIONS_MOST);
    }
    for (size_t i = 0; i < supply->sections; i++) {
        const plw_filter_section *section = &supply->section[i];
        if (!not_negative(section->henries)) {
            return plw_fail(error, PLW_E_USAGE, "filter section %zu: %g H is no inductance; give it as 8H, or none",
                            i + 1, section->henries);
        }
        if (!(section->henries > 0 ? not_negative(section->ohms) : positive(section->ohms))) {
            return plw_fail(error, PLW_E_USAGE,
                            "filter section %zu: %g ohm is not a resistance above zero; give it as 470R", i + 1,
                            section->ohms);
        }
        if (!positive(section->farads)) {
            return plw_fail(error, PLW_E_USAGE, "filter section %zu: it needs a capacitor after it, as 47uF", i + 1);
        }
    }
    return PLW_OK;
}

static plw_status check_drawn(const plw_rectifier *supply, plw_error *error) {
    const size_t nodes = supply->sections + (supply->reservoir_farads > 0);
    for (size_t i = 0; i < PLW_NODES_MOST; i++) {
        if (!not_negative(supply->drawn_amps[i]) || (i >= nodes && supply->drawn_amps[i] > 0)) {
            return plw_fail(error, PLW_E_USAGE,
                            "current drawn at node %zu: %g A; it must be zero or more, at one of the %zu nodes", i,
                            supply->drawn_amps[i], nodes);
        }
    }
    if (!not_negative(supply->bleeder_ohms)) {
        return plw_fail(error, PLW_E_USAGE, "bleeder: %g ohm is not a resistance; give it as 220k",
                        supply->bleeder_ohms);
    }
    return PLW_OK;
}

plw_status plw_rectifier_validate(const plw_rectifier *supply, plw_error *error) {
    if (!positive(supply->winding_rms_volts)) {
        return plw_fail(error, PLW_E_USAGE,
                        "winding: %g V is not a positive voltage; give the RMS volts off load, as 230V",
                        supply->winding_rms_volts);
    }
    if (!not_negative(supply->path_ohms)) {
        return plw_fail(error, PLW_E_USAGE, "winding: its copper of %g ohm is negative or not a number",
                        supply->path_ohms);
    }
    if (!positive(supply->mains_hertz)) {
        return plw_fail(error, PLW_E_USAGE, "mains: %g Hz is not a positive frequency; give it as 50Hz",
                        supply->mains_hertz);
    }
    if (!not_negative(supply->reservoir_farads)) {
        return plw_fail(error, PLW_E_USAGE, "reservoir: %g F is not a capacitance; give it as 47uF",
                        supply->reservoir_farads);
    }
    if (supply->reservoir_farads <= 0 && (supply->sections == 0 || !(supply->section[0].henries > 0))) {
        return plw_fail(
            error, PLW_E_USAGE,
            "reservoir: without it the filter must begin with a choke; give a reservoir, as 47uF, or a choke");
    }
    plw_status status = check_diode(supply, error);
    if (status == PLW_OK) {
        status = check_sections(supply, error);
    }
    return status == PLW_OK ? check_drawn(supply, error) : status;
}

plw_rectifier plw_rectifier_at_mains(const plw_rectifier *supply, double mains_percent) {
    plw_rectifier at = *supply;
    at.winding_rms_volts *= mains_percent / 100;
    return at;
}

double plw_rectifier_peak_volts(const plw_rectifier *supply) {
    const plw_rectifier_law law = plw_rectifier_law_of(supply);
    return law.peak_volts - law.drop_volts;
}

/* ---- steady state ------------------------------------------------------------------------------------------------ */

static plw_status check_load(plw_dc_load load, plw_error *error) {
    if (!not_negative(load.amps)) {
        return plw_fail(error, PLW_E_USAGE, "load: %g A is not a current of zero or more; give it as 45mA", load.amps);
    }
    if (!not_negative(load.ohms)) {
        return plw_fail(error, PLW_E_USAGE, "load: %g ohm is not a resistance above zero; give it as 10k", load.ohms);
    }
    return PLW_OK;
}

static bool nothing_drawn(const plw_network *network, double load_amps) {
    return load_amps + network->drawn_amps + network->output_siemens <= 0;
}

/* With nothing drawn every capacitor stays at the peak. */
static void rest(const plw_engine *engine, plw_rectifier_instant *instants, size_t count, plw_rectifier_state *state) {
    const plw_network *network = &engine->network;
    const plw_rectifier_law *law = &network->law;
    const double volts = law->peak_volts - law->drop_volts;
    state->nodes = network->nodes;
    for (size_t k = 0; k < network->nodes; k++) {
        state->node[k].volts = volts;
        state->node[k].peak_volts = volts;
    }
    state->peak_inverse_volts = law->bridge ? volts + law->drop_volts / 2 : volts + law->peak_volts;
    state->source_ohms = (double)INFINITY;
    state->choke_least_amps = network->choke_input ? 0 : (double)NAN;
    for (size_t i = 0; i < count; i++) {
        const double angle = 2 * PI * (double)i / (double)count;
        memset(&instants[i], 0, sizeof instants[i]);
        instants[i].seconds = angle / network->omega;
        instants[i].emf_volts = law->peak_volts * sin(angle);
        for (size_t k = 0; k < network->nodes; k++) {
            instants[i].node_volts[k] = volts;
        }
    }
}

static plw_status solve(const plw_engine *engine, const plw_rectifier *supply, plw_dc_load load,
                        plw_rectifier_instant *instants, size_t count, plw_rectifier_state *state, plw_error *error) {
    plw_steady steady;
    plw_status status = plw_steady_guess(engine, supply, load.amps, &steady, error);
    if (status == PLW_OK) {
        status = plw_steady_solve(engine, load.amps, PLW_STEADY_TOLERANCE, &steady, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    if (!(steady.output_volts > 0)) {
        return plw_fail(error, PLW_E_NO_POINT, "supply: %.4g mA cannot be had; the output falls to nothing before that",
                        1e3 * load.amps);
    }
    plw_measure(engine, load.amps, steady.start, instants, count, state);
    double node_volts[PLW_NODES_MOST];
    plw_network_means(&engine->network, supply, load.amps, steady.output_volts, node_volts);
    for (size_t k = 0; k < state->nodes; k++) {
        state->node[k].volts = node_volts[k];
    }
    state->source_ohms = steady.output_ohms;
    state->iterations = steady.iterations;
    return PLW_OK;
}

plw_status plw_rectifier_waveform(const plw_rectifier *supply, plw_dc_load load, plw_rectifier_instant *instants,
                                  size_t count, plw_rectifier_state *state, plw_error *error) {
    plw_status status = plw_rectifier_validate(supply, error);
    if (status == PLW_OK) {
        status = check_load(load, error);
    }
    if (status == PLW_OK && instants != NULL && count < 2) {
        status = plw_fail(error, PLW_E_USAGE, "waveform: two instants are the least");
    }
    if (status != PLW_OK) {
        return status;
    }
    plw_engine *engine = malloc(sizeof *engine);
    if (engine == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "supply: out of memory");
    }
    plw_engine_make(engine, supply, load.ohms);
    plw_rectifier_state found;
    memset(&found, 0, sizeof found);
    if (nothing_drawn(&engine->network, load.amps)) {
        rest(engine, instants, instants != NULL ? count : 0, &found);
    } else {
        status = solve(engine, supply, load, instants, count, &found, error);
    }
    if (status == PLW_OK) {
        const plw_network *network = &engine->network;
        found.volts = found.node[found.nodes - 1].volts;
        found.load_amps = load.amps + (load.ohms > 0 ? found.volts / load.ohms : 0);
        found.rectified_amps = load.amps + network->drawn_amps + network->output_siemens * found.volts;
        found.diode_average_amps = found.rectified_amps / (network->law.half_wave ? 1 : 2);
        *state = found;
    }
    free(engine);
    return status;
}

plw_status plw_rectifier_steady(const plw_rectifier *supply, plw_dc_load load, plw_rectifier_state *state,
                                plw_error *error) {
    return plw_rectifier_waveform(supply, load, NULL, 0, state, error);
}

/* ---- regulation line --------------------------------------------------------------------------------------------- */

/* Near no load the voltage falls as the current to the 2/3, so points at equal steps of that are equal steps of
 * voltage. */
static double line_amps(double most_amps, size_t k) {
    const double share = (double)k / (PLW_LINE_POINTS - 1);
    return most_amps * share * sqrt(share);
}

/* The state at the next point from the parabola through the last three; the first ones from mean values. */
static plw_status next_guess(const plw_engine *engine, const plw_rectifier *supply, const plw_steady *last, size_t k,
                             double amps, plw_steady *steady, plw_error *error) {
    if (k < 4) {
        return plw_steady_guess(engine, supply, amps, steady, error);
    }
    for (size_t i = 0; i < engine->network.states; i++) {
        steady->start[i] = 3 * (last[0].start[i] - last[1].start[i]) + last[2].start[i];
    }
    return PLW_OK;
}

/* Out:  *reached: how many points hold */
static plw_status run_line(const plw_engine *engine, const plw_rectifier *supply, double most_amps, plw_supply *line,
                           size_t *reached, plw_error *error) {
    plw_steady last[3], now = {0};
    memset(last, 0, sizeof last);
    for (size_t k = 0; k < PLW_LINE_POINTS; k++) {
        const double amps = line_amps(most_amps, k);
        *reached = k;
        if (nothing_drawn(&engine->network, amps)) {
            now.output_volts = plw_rectifier_peak_volts(supply);
            now.output_ohms = (double)INFINITY;
        } else {
            plw_status status = next_guess(engine, supply, last, k, amps, &now, error);
            if (status == PLW_OK) {
                status = plw_steady_solve(engine, amps, LINE_TOLERANCE, &now, error);
            }
            if (status != PLW_OK) {
                return status;
            }
        }
        if (!(now.output_volts > 0 && (k == 0 || now.output_volts >= LINE_SHARE_LEAST * line->point[0].volts))) {
            return plw_fail(error, PLW_E_NO_POINT, "supply: at %.4g mA its output has fallen to a quarter", 1e3 * amps);
        }
        line->point[k] = (plw_reading){now.output_volts, amps};
        line->tangent_ohms[k] = now.output_ohms;
        last[2] = last[1];
        last[1] = last[0];
        last[0] = now;
    }
    *reached = PLW_LINE_POINTS;
    return PLW_OK;
}

/* Output by the first guess, in which the reservoir is boundless; 0 when the current cannot be had. */
static double guessed_volts(const plw_engine *engine, const plw_rectifier *supply, double amps) {
    plw_steady guess;
    if (nothing_drawn(&engine->network, amps)) {
        return plw_rectifier_peak_volts(supply);
    }
    return plw_steady_guess(engine, supply, amps, &guess, NULL) == PLW_OK ? guess.output_volts : 0;
}

/* Where the line will end, so that it need not be run twice. */
static double line_reach(const plw_engine *engine, const plw_rectifier *supply, double most_amps) {
    const double least_volts = LINE_SHARE_LEAST * guessed_volts(engine, supply, 0);
    if (guessed_volts(engine, supply, most_amps) >= least_volts) {
        return most_amps;
    }
    double low = 0, high = most_amps;
    while (high - low > 0.01 * high && high > most_amps / 200) {
        const double middle = (low + high) / 2;
        if (guessed_volts(engine, supply, middle) >= 1.1 * least_volts) {
            low = middle;
        } else {
            high = middle;
        }
    }
    return low > 0 ? low : high;
}

/* Bound each tangent by three times the flatter chord beside it: then every cubic falls throughout (F. N. Fritsch and
 * R. E. Carlson, "Monotone piecewise cubic interpolation", SIAM J. Numer. Anal. 17, 1980; from memory). */
static void bound_tangents(plw_supply *line) {
    for (size_t k = 0; k < line->points; k++) {
        for (size_t side = 0; side < 2; side++) {
            if ((side == 0 && k == 0) || (side == 1 && k + 1 == line->points)) {
                continue;
            }
            const plw_reading *left = &line->point[k - 1 + side], *right = left + 1;
            const double chord = (left->volts - right->volts) / (right->amps - left->amps);
            line->tangent_ohms[k] = fmax(0, fmin(line->tangent_ohms[k], 3 * chord));
        }
    }
}

plw_status plw_rectifier_line(const plw_rectifier *supply, double most_amps, plw_supply *line, plw_error *error) {
    plw_status status = plw_rectifier_validate(supply, error);
    if (status == PLW_OK && !positive(most_amps)) {
        status = plw_fail(error, PLW_E_USAGE, "regulation line: %g A is not a current above zero", most_amps);
    }
    if (status != PLW_OK) {
        return status;
    }
    plw_engine *engine = malloc(sizeof *engine);
    if (engine == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "supply: out of memory");
    }
    plw_engine_make(engine, supply, 0);
    plw_supply made;
    memset(&made, 0, sizeof made);
    made.kind = PLW_SUPPLY_RECTIFIER;
    made.source_ohms = (double)NAN;
    plw_error failed = {0};
    double reach = line_reach(engine, supply, most_amps);
    status = plw_fail(&failed, PLW_E_NO_POINT, "supply: not even a hundredth of %.4g mA can be had", 1e3 * most_amps);
    while (status != PLW_OK && reach >= most_amps / 100) {
        size_t reached = 0;
        status = run_line(engine, supply, reach, &made, &reached, &failed);
        /* Shorten to what held; from a single point nothing is learnt but that it is much too long. */
        reach = reached > 1 ? line_amps(reach, reached - 1) : reach / 30;
    }
    free(engine);
    if (status != PLW_OK) {
        return plw_fail(error, failed.status, "%s", failed.text);
    }
    made.points = PLW_LINE_POINTS;
    made.volts = made.point[0].volts;
    bound_tangents(&made);
    *line = made;
    return PLW_OK;
}
