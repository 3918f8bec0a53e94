/* One tube on the bench: what meter readings say of it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/specimen.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "platewright/mains.h"
#include "stage/circuit.h"

/* Two meter readings in a row may differ from what they should by this. */
#define SCREEN_READING_VOLTS 5.0

static plw_status validate_readings(const plw_stage *stage, const plw_meter_readings *r, plw_error *error) {
    if (!isfinite(stage->cathode_resistor_ohms)) {
        return plw_fail(error, PLW_E_USAGE,
                        "measured: with fixed bias the cathode stands at the chassis and does not tell the current; "
                        "meter readings are understood of stages with a cathode resistor");
    }
    if (!isfinite(r->cathode_volts)) {
        return plw_fail(error, PLW_E_USAGE,
                        "measured: the cathode's voltage to chassis is needed, as in cathode=12.9V");
    }
    const struct {
        const char *name;
        double volts;
    } readings[] = {{"cathode", r->cathode_volts},
                    {"screen", r->screen_volts},
                    {"plate", r->plate_volts},
                    {"supply", r->supply_volts}};
    for (size_t index = 0; index < sizeof readings / sizeof readings[0]; index++) {
        if (!isnan(readings[index].volts) && !(readings[index].volts > 0.0 && readings[index].volts <= 5000.0)) {
            return index == 0 && readings[index].volts == 0.0
                       ? plw_fail(
                             error, PLW_E_USAGE,
                             "measured: 0 V at the cathode: no current flows, or the bypass capacitor or the resistor "
                             "is shorted; find out which before going on")
                       : plw_fail(error, PLW_E_USAGE,
                                  "measured: %s reads %.4g V; more than 0 and up to 5000 V is possible",
                                  readings[index].name, readings[index].volts);
        }
        if (index > 0 && readings[index].volts <= r->cathode_volts) {
            return plw_fail(error, PLW_E_USAGE, "measured: %s (%.4g V) is not above the cathode (%.4g V)",
                            readings[index].name, readings[index].volts, r->cathode_volts);
        }
    }
    /* A meter's two readings may differ by its own error. */
    if (r->plate_volts > 1.02 * r->supply_volts) {
        return plw_fail(error, PLW_E_USAGE,
                        "measured: the plate (%.4g V) reads above the supply that feeds it (%.4g V)", r->plate_volts,
                        r->supply_volts);
    }
    return PLW_OK;
}

/* What feeds the screen, before its resistor. */
static double screen_source_volts(const plw_stage *stage, const plw_circuit *circuit, const plw_specimen *s) {
    double volts = isfinite(stage->screen_supply_volts) ? stage->screen_supply_volts : s->supply_volts;
    const double through = s->plate_amps + circuit->tap * s->screen_amps;
    if (circuit->screen_on_primary && through > 0.0) {
        /* The copper up to the tap carries both currents, the rest the plate's alone. */
        volts += circuit->tap * (s->plate_to_ground_volts - s->supply_volts) * s->cathode_amps / through;
    }
    return volts;
}

/* Currents at a share of the screen assumed, and with them the voltages read or, where none was read, those that the
 * circuit leaves.
 * Ret:  the share that the law gives at those voltages */
static double currents_at_share(const plw_stage *stage, const plw_circuit *circuit, const plw_meter_readings *r,
                                double share, plw_specimen *s) {
    s->screen_amps = share * s->cathode_amps;
    s->plate_amps = s->cathode_amps - s->screen_amps;
    const double amps[PLW_FLOWS] = {s->plate_amps, s->screen_amps};
    double ohms;
    plw_supply_at(&stage->supply, plw_circuit_supply_amps(circuit, amps), &s->supply_volts, &ohms);
    const double through = s->plate_amps + circuit->tap * s->screen_amps;
    if (s->supply_read) {
        s->supply_volts = r->supply_volts;
    } else if (s->plate_read) { /* the plate's reading and the copper as told say more of it than its description */
        s->supply_volts = r->plate_volts + circuit->primary_ohms * through;
    }
    s->plate_to_ground_volts = s->plate_read ? r->plate_volts : s->supply_volts - circuit->primary_ohms * through;
    s->screen_to_ground_volts =
        s->screen_read ? r->screen_volts
                       : screen_source_volts(stage, circuit, s) - stage->screen_resistor_ohms * s->screen_amps;
    s->plate_volts = s->plate_to_ground_volts - s->cathode_volts;
    s->screen_volts = s->screen_to_ground_volts - s->cathode_volts;
    plw_currents c;
    plw_law_evaluate(&stage->tube->model.law, s->plate_volts, s->screen_volts, s->grid_volts, &c);
    s->model_cathode_amps = c.plate_amps + c.screen_amps;
    return s->model_cathode_amps > 0.0 ? c.screen_amps / s->model_cathode_amps : 0.0;
}

/* The tube's own currents by its share of the cathode current.  A larger share assumed leaves more volts at the plate
 * and less at the screen, so the law's share falls: halving finds where both agree. */
static void settle_currents(const plw_stage *stage, const plw_circuit *circuit, const plw_meter_readings *r,
                            plw_specimen *s) {
    double low = 0.0;
    double high = circuit->has_screen ? 1.0 : 0.0;
    for (int halving = 0; halving < 50 && high > low; halving++) {
        const double middle = 0.5 * (low + high);
        if (currents_at_share(stage, circuit, r, middle, s) > middle) {
            low = middle;
        } else {
            high = middle;
        }
    }
    (void)currents_at_share(stage, circuit, r, 0.5 * (low + high), s);
}

/* The stage as it is on the bench: supply, copper, screen feed and tube as read. */
static void measured_stage(const plw_stage *stage, const plw_circuit *circuit, plw_specimen *s) {
    s->tube = *stage->tube;
    plw_law_scale(&s->tube.model.law, s->cathode_amps / s->model_cathode_amps);
    s->stage = *stage;
    s->stage.tube = &s->tube;
    const double amps[PLW_FLOWS] = {s->plate_amps, s->screen_amps};
    double volts;
    double ohms;
    plw_supply_at(&stage->supply, plw_circuit_supply_amps(circuit, amps), &volts, &ohms);
    s->stage.supply = plw_supply_moved(&stage->supply, s->supply_volts - volts);
    s->screen_feed_ohms = (double)NAN;
    if (s->screen_read && s->screen_amps > 0.0) {
        const double fall = screen_source_volts(stage, circuit, s) - s->screen_to_ground_volts;
        s->screen_feed_ohms = s->stage.screen_resistor_ohms = fmax(fall / s->screen_amps, 0.0);
    }
    s->primary_ohms = (double)NAN;
    if (s->supply_read && s->plate_read) {
        const double through = s->plate_amps + (circuit->screen_on_primary ? circuit->tap * s->screen_amps : 0.0);
        s->primary_ohms = fmax((s->supply_volts - s->plate_to_ground_volts) / (circuit->tubes * through), 0.0);
        s->stage.primary_ohms = s->primary_ohms;
    }
}

/* Plate and screen cannot stand above what feeds them; without a reading of the supply, the one described counts. */
static plw_status compare_with_supply(const plw_stage *stage, const plw_meter_readings *r, plw_error *error) {
    const double supply = isfinite(r->supply_volts) ? r->supply_volts : plw_circuit_highest_supply_volts(stage);
    const double screen_supply = isfinite(stage->screen_supply_volts) ? stage->screen_supply_volts : supply;
    const bool plate = r->plate_volts > 1.05 * supply;
    if (plate || r->screen_volts > 1.05 * screen_supply) {
        return plw_fail(
            error, PLW_E_USAGE,
            "measured: the %s reads %.4g V, above the %.4g V that feed it; read the supply too, or mend its "
            "description",
            plate ? "plate" : "screen", plate ? r->plate_volts : r->screen_volts, plate ? supply : screen_supply);
    }
    return PLW_OK;
}

/* What can hardly be true of the readings, though nothing forbids it. */
static void doubt_readings(const plw_stage *told, double told_volts, plw_specimen *s) {
    s->doubt[0] = '\0';
    if (s->off_percent > PLW_SPECIMEN_MOST_PERCENT) {
        snprintf(
            s->doubt, sizeof s->doubt,
            "No spread of tubes explains this much current: look for a leaky coupling capacitor, another tube type, "
            "another cathode resistor than told, or a misread meter.");
    } else if (s->off_percent < PLW_SPECIMEN_LEAST_PERCENT) {
        snprintf(s->doubt, sizeof s->doubt,
                 "No spread of tubes explains this little current: look for a worn-out tube, a cold heater, a shorted "
                 "bypass capacitor, another cathode resistor than told, or a misread meter.");
    } else if (told->primary_ohms > 0.0 &&
               fabs(s->primary_ohms - told->primary_ohms) > 0.4 * told->primary_ohms + 50.0) {
        snprintf(s->doubt, sizeof s->doubt,
                 "Between supply and plate lie %.0f ohm, where the primary was told to have %.0f: read both again.",
                 s->primary_ohms, told->primary_ohms);
    } else if (s->supply_read && fabs(s->screen_feed_ohms - told->screen_resistor_ohms) >
                                     0.4 * told->screen_resistor_ohms + SCREEN_READING_VOLTS / s->screen_amps) {
        snprintf(s->doubt, sizeof s->doubt,
                 "By the model's screen current %.0f ohm lie in the screen's feed, where %.0f were told: what follows "
                 "takes it as read; look for a resistor or a leaky capacitor there, or read it again.",
                 s->screen_feed_ohms, told->screen_resistor_ohms);
    } else if (s->plate_read && !s->supply_read && fabs(s->supply_volts - told_volts) > 0.05 * told_volts) {
        snprintf(s->doubt, sizeof s->doubt,
                 "With %.4g V at the plate the supply gives %.0f V, where %.0f were told: what follows takes it as "
                 "read; read the supply too.",
                 s->plate_to_ground_volts, s->supply_volts, told_volts);
    }
}

plw_status plw_specimen_measure(const plw_stage *stage, const plw_meter_readings *readings, const plw_aim *aim,
                                plw_series series, plw_specimen *specimen, plw_error *error) {
    plw_status status = plw_stage_validate(stage, true, error);
    if (status == PLW_OK) {
        status = validate_readings(stage, readings, error);
    }
    if (status == PLW_OK) {
        status = compare_with_supply(stage, readings, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    plw_circuit circuit;
    plw_circuit_prepare(stage, &circuit);
    memset(specimen, 0, sizeof *specimen);
    plw_specimen *s = specimen;
    s->supply_read = isfinite(readings->supply_volts);
    s->plate_read = isfinite(readings->plate_volts);
    s->screen_read = isfinite(readings->screen_volts) && circuit.has_screen;
    s->cathode_volts = readings->cathode_volts;
    s->grid_volts = -s->cathode_volts;
    s->cathode_amps = s->cathode_volts / circuit.cathode_ohms;
    settle_currents(stage, &circuit, readings, s);
    if (!(s->plate_volts > 0.0)) {
        return plw_fail(error, PLW_E_USAGE,
                        "measured: cathode at %.4g V leaves no voltage across the tube; check the "
                        "resistor's value and the supply",
                        s->cathode_volts);
    }
    if (!circuit.has_screen) {
        s->screen_to_ground_volts = s->screen_volts = (double)NAN;
    }
    if (!(s->model_cathode_amps > 1e-9)) {
        return plw_fail(
            error, PLW_E_USAGE,
            "measured: at these voltages a tube of this type is cut off, yet the cathode reads %.4g V; check "
            "the type, the readings and for grid leakage",
            s->cathode_volts);
    }
    s->plate_watts = s->plate_volts * s->plate_amps;
    s->screen_watts = s->screen_volts * s->screen_amps;
    s->off_percent = 100.0 * (s->cathode_amps / s->model_cathode_amps - 1.0);
    measured_stage(stage, &circuit, s);
    const double amps[PLW_FLOWS] = {s->plate_amps, s->screen_amps};
    double told_volts;
    double ohms;
    plw_supply_at(&stage->supply, plw_circuit_supply_amps(&circuit, amps), &told_volts, &ohms);
    doubt_readings(stage, told_volts, s);
    plw_error unsolved = {0};
    s->as_built_solved = plw_bias_option_solve(&s->stage, (double)NAN, &s->as_built, &unsolved) == PLW_OK;
    plw_stage wanted = s->stage;
    wanted.cathode_resistor_ohms = (double)NAN;
    plw_error why = {0};
    const plw_status chosen =
        aim != NULL ? plw_bias_choose(&wanted, *aim, series, &s->choice, &why)
                    : plw_bias_choose_for_mains(&wanted, series, &s->choice, &s->aim_before_percent, &why);
    s->resistor_found = chosen == PLW_OK;
    if (!s->resistor_found) {
        snprintf(s->resistor_obstacle, sizeof s->resistor_obstacle, "%.250s", why.text);
    }
    return PLW_OK;
}

bool plw_specimen_keeps_ratings(const plw_specimen *specimen) {
    const plw_quiescent measured = {.plate_volts = specimen->plate_volts,
                                    .screen_volts = specimen->screen_volts,
                                    .cathode_volts = specimen->cathode_volts,
                                    .cathode_amps = specimen->cathode_amps,
                                    .plate_watts = specimen->plate_watts,
                                    .screen_watts = specimen->screen_watts};
    plw_rating_check checks[PLW_RATING_CHECKS_MOST];
    size_t count = 0;
    const bool kept = plw_limits_check(&specimen->stage, &measured, NULL, checks, &count);
    return kept && (!specimen->as_built_solved || specimen->as_built.within_ratings);
}
