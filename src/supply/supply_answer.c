/* What a plate supply does at a current: voltages, ripple, what its parts stand, what to do on the bench.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "platewright/plate_supply.h"
#include "platewright/preferred.h"
#include "platewright/quantity.h"

#define MAINS_HIGH_PERCENT 110.0
#define BLEEDER_SECONDS 30.0
#define DUMMY_MARGIN 2.0
#define BLEEDER_MARGIN 2.0

/* For a transformer that is to give a voltage of which no parts are told: common practice, no source. */
#define USUAL_RESERVOIR_FARADS 47e-6
#define USUAL_MAINS_HERTZ 50.0

/* The line is shown from no load to this many times the current asked about. */
#define LINE_BEYOND 2.0

plw_supply_question plw_supply_question_usual(double amps) {
    return (plw_supply_question){.amps = amps,
                                 .series = PLW_E24,
                                 .regulation_percent = (double)NAN,
                                 .ratings = plw_supply_ratings_unknown(),
                                 .bleeder_seconds = BLEEDER_SECONDS};
}

/* ---- voltages ---------------------------------------------------------------------------------------------------- */

/* One percent of a reading is the error of an ordinary meter; between two readings their errors mix as the line does.
 */
static double readings_error(const plw_supply *line, double amps) {
    const double part = plw_reading_errors_usual().dc_volts_percent / 100;
    size_t i = 0;
    while (i + 2 < line->points && line->point[i + 1].amps < amps) {
        i++;
    }
    if (line->points < 2) {
        return part * line->point[0].volts;
    }
    const plw_reading *left = &line->point[i], *right = left + 1;
    const double share = (amps - left->amps) / (right->amps - left->amps);
    return hypot((1 - share) * part * left->volts, share * part * right->volts);
}

/* Off load the fitted bleeder still draws: behind a choke input it may hold the output far below the peak. */
static plw_status fill_bled(const plw_rectifier *nominal, const plw_rectifier *high, plw_supply_answer *a,
                            plw_error *error) {
    if (!(nominal->bleeder_ohms > 0)) {
        return PLW_OK;
    }
    const plw_dc_load nothing = {.amps = 0};
    plw_rectifier_state state;
    plw_status status = plw_rectifier_steady(nominal, nothing, &state, error);
    if (status == PLW_OK) {
        a->bled_volts = state.volts;
        status = plw_rectifier_steady(high, nothing, &state, error);
    }
    if (status == PLW_OK) {
        a->bled_high_volts = state.volts;
    }
    return status;
}

static plw_status fill_off_load(const plw_plate_supply *supply, plw_supply_answer *a, plw_error *error) {
    a->bled_volts = a->bled_high_volts = (double)NAN;
    a->off_load_volts = supply->line.kind == PLW_SUPPLY_STIFF ? (double)NAN : supply->line.volts;
    if (supply->has_winding) {
        /* A bleeder that is part of the supply may fail or not be there yet: what capacitors must stand is the peak. */
        a->off_load_volts = plw_rectifier_peak_volts(&supply->parts);
        const plw_rectifier high = plw_rectifier_at_mains(&supply->parts, a->mains_high_percent);
        a->off_load_high_volts = plw_rectifier_peak_volts(&high);
        return fill_bled(&supply->parts, &high, a, error);
    }
    a->off_load_high_volts = a->mains_high_percent / 100 * a->off_load_volts;
    return PLW_OK;
}

/* What to do about a current that the readings do not reach: into which resistor to read again. */
static plw_status beyond_readings(const plw_plate_supply *supply, double amps, double most_amps, plw_error *error) {
    char ohms[32];
    double volts = 0;
    double slope = 0;
    plw_supply_at(&supply->line, most_amps, &volts, &slope);
    const double exact = fmax(volts - slope * (amps - most_amps), 0.2 * volts) / amps;
    return plw_fail(error, PLW_E_NO_POINT,
                    "current: %.4g mA is beyond the readings, which speak for no more than %.4g mA: read again into "
                    "about %s, or describe --winding and --rectifier",
                    1e3 * amps, 1e3 * most_amps,
                    plw_quantity_format(plw_preferred_nearest(exact, PLW_E12), PLW_UNIT_OHM, 2, ohms, sizeof ohms));
}

static plw_status fill_state(const plw_plate_supply *supply, plw_supply_answer *a, plw_error *error) {
    double least;
    double most;
    plw_supply_range(&supply->line, &least, &most);
    if (a->amps > most && supply->line.kind == PLW_SUPPLY_READINGS && !supply->has_winding) {
        return beyond_readings(supply, a->amps, most, error);
    }
    if (a->amps < least || a->amps > most) {
        return plw_fail(error, PLW_E_NO_POINT,
                        "current: %.4g mA lies outside the %.4g to %.4g mA for which this supply speaks", 1e3 * a->amps,
                        1e3 * least, 1e3 * most);
    }
    plw_supply_at(&supply->line, a->amps, &a->volts, &a->source_ohms);
    a->volts_error = supply->line.kind == PLW_SUPPLY_READINGS ? readings_error(&supply->line, a->amps) : (double)NAN;
    if (!supply->has_winding) {
        return PLW_OK;
    }
    const plw_dc_load load = {.amps = a->amps};
    plw_status status = plw_rectifier_steady(&supply->parts, load, &a->state, error);
    if (status == PLW_OK) {
        a->has_state = true;
        a->volts = a->state.volts;
        a->source_ohms = a->state.source_ohms;
    }
    if (status == PLW_OK && supply->estimated) {
        double volts;
        status = plw_source_predict(&supply->estimate, a->amps, &volts, &a->volts_error, error);
    }
    return status;
}

/* ---- line -------------------------------------------------------------------------------------------------------- */

static plw_status fill_line(const plw_plate_supply *supply, plw_supply_answer *a, plw_error *error) {
    const plw_supply *line = &supply->line;
    const double unknown = (double)NAN;
    a->line_points = 0;
    if (line->kind == PLW_SUPPLY_READINGS) {
        for (size_t i = 0; i < line->points; i++) {
            a->line[a->line_points++] = (plw_supply_point){line->point[i].amps, line->point[i].volts, unknown};
        }
        return PLW_OK;
    }
    double least;
    double most;
    plw_supply_range(line, &least, &most);
    most = fmin(most, LINE_BEYOND * a->amps);
    for (int i = 0; i < PLW_ANSWER_LINE_POINTS; i++) {
        plw_supply_point point = {most * i / (PLW_ANSWER_LINE_POINTS - 1), unknown, unknown};
        double ohms;
        plw_supply_at(line, point.amps, &point.volts, &ohms);
        if (supply->has_winding) {
            plw_rectifier_state state;
            const plw_dc_load load = {.amps = point.amps};
            const plw_status status = plw_rectifier_steady(&supply->parts, load, &state, error);
            if (status != PLW_OK) {
                return status;
            }
            point.volts = state.volts;
            point.ripple_volts_peak_to_peak =
                supply->reservoir_assumed ? unknown : state.node[state.nodes - 1].ripple_peak_to_peak_volts;
        }
        a->line[a->line_points++] = point;
    }
    return PLW_OK;
}

/* ---- bench and ratings ------------------------------------------------------------------------------------------- */

static void fill_bleeder(const plw_plate_supply *supply, const plw_supply_question *question, plw_supply_answer *a) {
    if (!supply->has_winding || supply->reservoir_assumed) {
        return;
    }
    const double ohms = supply->parts.bleeder_ohms;
    if (ohms > 0) {
        const double from = a->bled_high_volts;
        const double watts = from * from / ohms;
        a->bleeder = (plw_bleeder){.ohms = ohms,
                                   .amps = from / ohms,
                                   .watts = watts,
                                   .rating_watts = plw_resistor_rating_watts(watts, BLEEDER_MARGIN),
                                   .seconds_to_60_volts = plw_discharge_seconds(&supply->parts, from, PLW_SAFE_VOLTS)};
        a->has_bleeder = a->bleeder_fitted = true;
        return;
    }
    /* E12 by nature: nobody hunts for a finer value. */
    a->has_bleeder = plw_bleeder_for(&supply->parts, a->off_load_high_volts, question->bleeder_seconds, PLW_E12,
                                     BLEEDER_MARGIN, &a->bleeder, NULL) == PLW_OK;
}

static double told(double value, double fallback) {
    return isnan(value) ? fallback : value;
}

static plw_supply_ratings ratings_for(const plw_plate_supply *supply, const plw_supply_question *question) {
    const plw_supply_ratings own = supply->rectifier_tube != NULL
                                       ? plw_supply_ratings_of(&supply->rectifier_tube->rectifier)
                                       : plw_supply_ratings_silicon();
    plw_supply_ratings all = question->ratings;
    all.peak_inverse_volts = told(all.peak_inverse_volts, own.peak_inverse_volts);
    all.diode_peak_amps = told(all.diode_peak_amps, own.diode_peak_amps);
    all.output_amps = told(all.output_amps, own.output_amps);
    all.plate_rms_volts = told(all.plate_rms_volts, own.plate_rms_volts);
    /* Copper that is not known is no reason to condemn the surge or the source resistance. */
    const bool copper_known = !supply->copper_assumed && !(supply->estimated && supply->estimate.none_found);
    all.least_path_ohms = copper_known ? told(all.least_path_ohms, own.least_path_ohms) : (double)NAN;
    all.surge_amps = copper_known ? told(all.surge_amps, own.surge_amps) : (double)NAN;
    all.most_reservoir_farads =
        supply->reservoir_assumed ? (double)NAN : told(all.most_reservoir_farads, own.most_reservoir_farads);
    return all;
}

/* One rating more, kept or not. */
static void add_check(plw_supply_answer *a, const char *name, double value, double limit, plw_unit unit,
                      plw_supply_when when) {
    if (isnan(value) || isnan(limit) || a->checks_count >= PLW_SUPPLY_CHECKS_MOST) {
        return;
    }
    const bool ok = value <= limit;
    a->checks[a->checks_count++] = (plw_supply_check){.name = name,
                                                      .node = -1,
                                                      .value = value,
                                                      .limit = limit,
                                                      .unit = unit,
                                                      .share_percent = 100 * value / limit,
                                                      .ok = ok,
                                                      .when = when};
    a->within_ratings = a->within_ratings && ok;
}

static void fill_checks(const plw_plate_supply *supply, const plw_supply_question *question, plw_supply_answer *a) {
    a->within_ratings = true;
    if (a->has_state) {
        const plw_supply_ratings ratings = ratings_for(supply, question);
        a->within_ratings = plw_supply_limits_check(&supply->parts, &a->state, &ratings, a->checks, &a->checks_count);
        return;
    }
    /* What can be judged without the parts. */
    const plw_supply_ratings *ratings = &question->ratings;
    add_check(a, "capacitor voltage, cold tubes", a->off_load_high_volts, ratings->capacitor_volts[0], PLW_UNIT_VOLT,
              PLW_SUPPLY_OFF_LOAD_HIGH);
    add_check(a, "heater winding current", ratings->heater_amps, ratings->heater_winding_amps, PLW_UNIT_AMPERE,
              PLW_SUPPLY_AT_LOAD);
}

static plw_status fill_transformer(const plw_plate_supply *supply, const plw_supply_question *question,
                                   plw_supply_answer *a, plw_error *error) {
    if (isnan(question->regulation_percent)) {
        return PLW_OK;
    }
    plw_rectifier wanted = {
        .mains_hertz = USUAL_MAINS_HERTZ, .diode = plw_diode_silicon(), .reservoir_farads = USUAL_RESERVOIR_FARADS};
    if (supply->has_parts) {
        wanted = supply->parts;
        if (supply->reservoir_assumed) {
            wanted.reservoir_farads = USUAL_RESERVOIR_FARADS;
        }
    }
    const plw_status status =
        plw_transformer_for(&wanted, a->volts, a->amps, question->regulation_percent, &a->transformer, error);
    a->has_transformer = status == PLW_OK;
    return status;
}

plw_status plw_plate_supply_ask(const plw_plate_supply *supply, const plw_supply_question *question,
                                plw_supply_answer *answer, plw_error *error) {
    if (!(isfinite(question->amps) && question->amps > 0)) {
        return plw_fail(error, PLW_E_USAGE, "current: %g A is not a current above zero; give it as 45mA",
                        question->amps);
    }
    plw_supply_answer a = {.supply = supply, .amps = question->amps};
    a.mains_high_percent = told(question->ratings.mains_high_percent, MAINS_HIGH_PERCENT);
    plw_status status = fill_state(supply, &a, error);
    if (status == PLW_OK) {
        status = fill_off_load(supply, &a, error);
    }
    if (status == PLW_OK) {
        status = fill_line(supply, &a, error);
    }
    if (status == PLW_OK) {
        status = fill_transformer(supply, question, &a, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    a.has_dummy = plw_dummy_load_for(&supply->line, a.amps, question->series, DUMMY_MARGIN, &a.dummy, NULL) == PLW_OK;
    fill_bleeder(supply, question, &a);
    fill_checks(supply, question, &a);
    *answer = a;
    return PLW_OK;
}
