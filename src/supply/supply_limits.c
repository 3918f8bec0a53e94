/* Every rating of a plate supply against what its parts have to stand.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/supply_limits.h"

#include <math.h>

#define PI 3.14159265358979323846
#define MAINS_HIGH_PERCENT 110.0

plw_supply_ratings plw_supply_ratings_unknown(void) {
    const double unknown = (double)NAN;
    plw_supply_ratings ratings = {.peak_inverse_volts = unknown,
                                  .diode_peak_amps = unknown,
                                  .output_amps = unknown,
                                  .plate_rms_volts = unknown,
                                  .least_path_ohms = unknown,
                                  .most_reservoir_farads = unknown,
                                  .surge_amps = unknown,
                                  .winding_rms_amps = unknown,
                                  .heater_amps = unknown,
                                  .heater_winding_amps = unknown,
                                  .mains_high_percent = unknown};
    for (size_t k = 0; k < PLW_NODES_MOST; k++) {
        ratings.capacitor_volts[k] = unknown;
        ratings.ripple_amps[k] = unknown;
    }
    return ratings;
}

plw_supply_ratings plw_supply_ratings_of(const plw_rectifier_data *rectifier) {
    plw_supply_ratings ratings = plw_supply_ratings_unknown();
    ratings.peak_inverse_volts = rectifier->peak_inverse_volts;
    ratings.diode_peak_amps = rectifier->peak_plate_amps;
    ratings.output_amps = rectifier->output_amps;
    ratings.plate_rms_volts = rectifier->plate_rms_volts;
    ratings.least_path_ohms = rectifier->least_supply_ohms;
    ratings.most_reservoir_farads = rectifier->most_reservoir_farads;
    return ratings;
}

plw_supply_ratings plw_supply_ratings_silicon(void) {
    plw_supply_ratings ratings = plw_supply_ratings_unknown();
    ratings.peak_inverse_volts = 1000;
    ratings.diode_peak_amps = 10;
    ratings.output_amps = 1;
    ratings.surge_amps = 30;
    return ratings;
}

typedef struct {
    plw_supply_check *checks;
    size_t count;
    bool all;
} list;

static void add(list *checks, plw_supply_check check) {
    if (isnan(check.limit) || isnan(check.value) || checks->count >= PLW_SUPPLY_CHECKS_MOST) {
        return;
    }
    check.ok = check.at_least ? check.value >= check.limit : check.value <= check.limit;
    check.share_percent = 100 * (check.at_least ? check.limit / check.value : check.value / check.limit);
    checks->all = checks->all && check.ok;
    checks->checks[checks->count++] = check;
}

static void most(list *checks, const char *name, double value, double limit, plw_unit unit, plw_supply_when when) {
    add(checks,
        (plw_supply_check){.name = name, .node = -1, .value = value, .limit = limit, .unit = unit, .when = when});
}

static void least(list *checks, const char *name, double value, double limit, plw_unit unit) {
    add(checks,
        (plw_supply_check){.name = name, .node = -1, .value = value, .limit = limit, .unit = unit, .at_least = true});
}

static void check_rectifier(const plw_rectifier *supply, const plw_rectifier_state *state,
                            const plw_supply_ratings *ratings, double high, list *checks) {
    const double peak = plw_rectifier_peak_volts(supply);
    const double emf = sqrt(2.0) * supply->winding_rms_volts;
    /* Off load: output plus EMF, but in a bridge the output alone. */
    const double inverse = supply->connection == PLW_BRIDGE ? peak : peak + emf;
    most(checks, "rectifier peak inverse", fmax(state->peak_inverse_volts, inverse * high), ratings->peak_inverse_volts,
         PLW_UNIT_VOLT, PLW_SUPPLY_OFF_LOAD_HIGH);
    most(checks, "rectifier peak current", state->diode_peak_amps, ratings->diode_peak_amps, PLW_UNIT_AMPERE,
         PLW_SUPPLY_AT_LOAD);
    most(checks, "rectifier output current", state->rectified_amps, ratings->output_amps, PLW_UNIT_AMPERE,
         PLW_SUPPLY_AT_LOAD);
    if (supply->diode.kind == PLW_DIODE_SILICON) {
        const double ohms = supply->path_ohms + (supply->connection == PLW_BRIDGE ? 2 : 1) * supply->diode.slope_ohms;
        most(checks, "rectifier surge at switching on", supply->reservoir_farads > 0 ? emf * high / ohms : (double)NAN,
             ratings->surge_amps, PLW_UNIT_AMPERE, PLW_SUPPLY_OFF_LOAD_HIGH);
        return;
    }
    if (supply->reservoir_farads <= 0) {
        return; /* the remaining ratings are those of capacitor input */
    }
    most(checks, "rectifier plate voltage, RMS", supply->winding_rms_volts, ratings->plate_rms_volts, PLW_UNIT_VOLT,
         PLW_SUPPLY_AT_LOAD);
    const double voltage_share =
        isnan(ratings->plate_rms_volts) ? 1 : fmin(1, supply->winding_rms_volts / ratings->plate_rms_volts);
    least(checks, "rectifier source resistance", supply->path_ohms, ratings->least_path_ohms * voltage_share,
          PLW_UNIT_OHM);
    most(checks, "rectifier reservoir", supply->reservoir_farads, ratings->most_reservoir_farads, PLW_UNIT_FARAD,
         PLW_SUPPLY_AT_LOAD);
}

static void check_capacitors(const plw_rectifier *supply, const plw_rectifier_state *state,
                             const plw_supply_ratings *ratings, double high, list *checks) {
    const double peak = plw_rectifier_peak_volts(supply) * high;
    for (size_t k = 0; k < state->nodes; k++) {
        add(checks, (plw_supply_check){.name = "capacitor voltage, cold tubes",
                                       .node = (int)k,
                                       .value = fmax(peak, state->node[k].peak_volts),
                                       .limit = ratings->capacitor_volts[k],
                                       .unit = PLW_UNIT_VOLT,
                                       .when = PLW_SUPPLY_OFF_LOAD_HIGH});
        add(checks, (plw_supply_check){.name = "capacitor ripple current",
                                       .node = (int)k,
                                       .value = state->node[k].capacitor_rms_amps,
                                       .limit = ratings->ripple_amps[k],
                                       .unit = PLW_UNIT_AMPERE,
                                       .when = PLW_SUPPLY_AT_LOAD});
    }
}

/* The inductance that would just keep the current flowing, from how far this choke's current swings: the swing goes as
 * 1 / L.  When it stops, from the formula for ideal parts. */
static void check_choke(const plw_rectifier *supply, const plw_rectifier_state *state, list *checks) {
    if (supply->reservoir_farads > 0 || !(state->rectified_amps > 0)) {
        return;
    }
    const double henries = supply->section[0].henries, mean = state->rectified_amps;
    double critical =
        plw_critical_henries(supply->mains_hertz, state->node[0].volts + mean * supply->section[0].ohms, mean);
    if (supply->connection == PLW_HALF_WAVE) {
        return; /* the current always stops: there is no critical inductance */
    }
    if (state->choke_least_amps > 0) {
        critical = henries * (mean - state->choke_least_amps) / mean;
    } else {
        critical = fmax(critical, henries * (1 + 1e-9));
    }
    least(checks, "choke inductance", henries, critical, PLW_UNIT_HENRY);
}

bool plw_supply_limits_check(const plw_rectifier *supply, const plw_rectifier_state *state,
                             const plw_supply_ratings *ratings, plw_supply_check checks[PLW_SUPPLY_CHECKS_MOST],
                             size_t *count) {
    list made = {checks, 0, true};
    const double percent = isnan(ratings->mains_high_percent) ? MAINS_HIGH_PERCENT : ratings->mains_high_percent;
    check_rectifier(supply, state, ratings, percent / 100, &made);
    check_capacitors(supply, state, ratings, percent / 100, &made);
    most(&made, "winding current, RMS", state->winding_rms_amps, ratings->winding_rms_amps, PLW_UNIT_AMPERE,
         PLW_SUPPLY_AT_LOAD);
    most(&made, "heater winding current", ratings->heater_amps, ratings->heater_winding_amps, PLW_UNIT_AMPERE,
         PLW_SUPPLY_AT_LOAD);
    check_choke(supply, state, &made);
    *count = made.count;
    return made.all;
}

double plw_critical_henries(double mains_hertz, double volts, double amps) {
    if (!(mains_hertz > 0 && volts > 0 && amps > 0 && isfinite(mains_hertz + volts + amps))) {
        return (double)NAN;
    }
    return volts / amps / (3 * 2 * PI * mains_hertz);
}
