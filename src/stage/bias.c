/* The choice of the cathode resistor.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/bias.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "platewright/quantity.h"

#define LEAST_OHMS 1.0
#define LEAST_AIM_PERCENT 5.0 /* less is a slip: 0.9 for 90 % */
#define MOST_OHMS 1e6
#define SCAN_STEPS_PER_DECADE 12
#define STEPS_UP_MOST 240

plw_status plw_bias_option_solve(const plw_stage *stage, double ohms, plw_bias_option *option, plw_error *error) {
    plw_stage trial = *stage;
    if (isfinite(ohms)) {
        trial.cathode_resistor_ohms = ohms;
    }
    plw_bias_option o = {.ohms = ohms, .watts = (double)NAN, .rating_watts = (double)NAN};
    plw_status status = plw_quiescent_solve(&trial, &o.quiescent, error);
    if (status == PLW_OK) {
        status = plw_signal_solve(&trial, &o.quiescent, &o.signal, error);
    }
    if (status == PLW_OK) {
        status = plw_signal_within(&trial, &o.quiescent, &o.signal, plw_stage_clean_percent(&trial), &o.clean, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    if (isfinite(trial.cathode_resistor_ohms)) {
        o.ohms = trial.cathode_resistor_ohms;
        o.watts = o.quiescent.cathode_resistor_watts;
        o.rating_watts = plw_resistor_rating_watts(o.watts, PLW_RESISTOR_MARGIN);
    }
    o.within_at_mains = true;
    o.within_ratings = plw_limits_check(&trial, &o.quiescent, &o.signal, o.ratings, &o.ratings_count);
    *option = o;
    return PLW_OK;
}

/* ---- what a resistor gives of the quantity aimed at ---------------------------------------------------------------
 */

typedef struct {
    const plw_stage *stage;
    plw_aim aim;
    double target; /* in the quantity's own unit */
} search;

/* How the aim counts plate current and heat: as a triode, plate and screen together where the maker rates them so. */
static double aimed_quantity(const search *s, const plw_quiescent *q) {
    const plw_stage *stage = s->stage;
    const bool screened_triode = plw_stage_is_triode(stage) && stage->tube->kind != PLW_KIND_TRIODE;
    if (s->aim.kind == PLW_AIM_CURRENT) {
        return screened_triode ? q->cathode_amps : q->plate_amps;
    }
    const plw_ratings *r = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    const bool together = screened_triode && r->connection == PLW_CONNECTION_TRIODE;
    return q->plate_watts + (together ? q->screen_watts : 0.0);
}

static plw_status quantity_at(const search *s, double ohms, double *quantity, plw_error *error) {
    plw_stage trial = *s->stage;
    trial.cathode_resistor_ohms = ohms;
    plw_quiescent q;
    const plw_status status = plw_quiescent_solve(&trial, &q, error);
    if (status == PLW_OK) {
        *quantity = aimed_quantity(s, &q);
    }
    return status;
}

typedef struct {
    double ohms, quantity;
} reach;

/* From the highest resistance down to the first crossing of the target, then halving; a resistance at which the stage
 * has no point (cut off, or out of the readings' reach) is passed over.
 * Out: *ohms; when the target is never reached, *nearest: what the lowest resistance with a point comes to, and *last:
 *      why there is none below it */
static bool find_crossing(const search *s, double *ohms, reach *nearest, plw_error *last) {
    double above = (double)NAN; /* resistance with less than the target */
    *nearest = (reach){(double)NAN, (double)NAN};
    const int steps = 6 * SCAN_STEPS_PER_DECADE;
    for (int step = 0; step <= steps; step++) {
        const double trial = MOST_OHMS * pow(10.0, -(double)step / SCAN_STEPS_PER_DECADE);
        double quantity;
        plw_error why = {.status = PLW_OK};
        if (quantity_at(s, trial, &quantity, &why) != PLW_OK) {
            if (last->text[0] == '\0') {
                *last = why;
            }
            continue;
        }
        if (quantity < s->target) {
            above = trial;
            *nearest = (reach){trial, quantity};
            *last = (plw_error){.status = PLW_OK};
            continue;
        }
        double below = trial;
        double high = isfinite(above) ? above : trial * pow(10.0, 1.0 / SCAN_STEPS_PER_DECADE);
        for (int halving = 0; halving < 60 && high - below > 1e-9 * below; halving++) {
            const double middle = sqrt(below * high);
            if (quantity_at(s, middle, &quantity, NULL) == PLW_OK && quantity >= s->target) {
                below = middle;
            } else {
                high = middle;
            }
        }
        *ohms = below;
        return true;
    }
    return false;
}

/* ---- ratings that a resistor can cure -----------------------------------------------------------------------------
 */

static bool is_voltage(const plw_rating_check *check) {
    return check->unit == PLW_UNIT_VOLT;
}

/* The first check at rest that is not kept, or NULL; of heat and current alone, which a resistor cures, or of all. */
static const plw_rating_check *broken_at_rest(const plw_bias_option *option, bool curable_only) {
    for (size_t index = 0; index < option->ratings_count; index++) {
        const plw_rating_check *check = &option->ratings[index];
        if (!check->ok && check->when == PLW_AT_IDLE && !(curable_only && is_voltage(check))) {
            return check;
        }
    }
    return NULL;
}

static void describe(const plw_rating_check *check, char *text, size_t size) {
    char value[32];
    char limit[32];
    snprintf(text, size, "%s %s%s is over the %s allowed", check->name,
             plw_quantity_format(check->value, check->unit, 3, value, sizeof value),
             check->when == PLW_AT_FULL_DRIVE ? " at full drive" : "",
             plw_quantity_format(check->limit, check->unit, 3, limit, sizeof limit));
}

static const char *remedy(const plw_rating_check *check, const plw_stage *stage) {
    if (strcmp(check->name, "heater to cathode") == 0) {
        return "raise the heater winding to a voltage near the cathode's, or use fixed bias";
    }
    if (strcmp(check->name, "screen voltage") == 0 || strcmp(check->name, "screen dissipation") == 0) {
        return stage->connection == PLW_CONNECTION_PENTODE ? "feed the screen through a resistor or from a lower supply"
                                                           : "a lower supply voltage would help";
    }
    if (strcmp(check->name, "plate voltage") == 0) {
        return "a lower supply voltage or a tube rated higher would help";
    }
    if (strcmp(check->name, "cathode current") == 0) { /* the same watts on more volts take less current */
        return "a lower aim, a higher supply voltage, a higher load or a tube rated higher would help";
    }
    return "a higher resistor, a lower supply voltage or a tube rated higher would help";
}

/* Step the resistor up until the ratings of heat and current at rest are kept.
 * Out: *stepped: a step was taken; *first: the check that asked for the first */
static plw_status step_into_ratings(const plw_stage *stage, plw_series series, plw_bias_option *option, bool *stepped,
                                    plw_rating_check *first, plw_error *error) {
    plw_bias_option trial = *option;
    plw_rating_check last = {0};
    *stepped = false;
    for (int step = 0; step < STEPS_UP_MOST; step++) {
        const plw_rating_check *broken = broken_at_rest(&trial, true);
        if (broken == NULL) {
            *option = trial;
            return PLW_OK;
        }
        last = *broken;
        if (!*stepped) {
            *first = last;
            *stepped = true;
        }
        const double next = plw_preferred_step(trial.ohms, 1, series);
        plw_error ignored = {0};
        if (!(next <= MOST_OHMS) || plw_bias_option_solve(stage, next, &trial, &ignored) != PLW_OK) {
            break;
        }
    }
    char what[128];
    describe(&last, what, sizeof what);
    return plw_fail(error, PLW_E_NO_POINT, "cathode-resistor: none serves: even at %.4g ohm %s; %s", trial.ohms, what,
                    remedy(&last, stage));
}

/* Where only a rating at full drive is broken, a little more resistance may cure it: taken when it does, else left.
 * Out: *stepped, *first as above */
static void step_into_driven_ratings(const plw_stage *stage, plw_series series, plw_bias_option *option, bool *stepped,
                                     plw_rating_check *first) {
    plw_bias_option trial = *option;
    while (!trial.within_ratings) {
        plw_error ignored = {0};
        const double next = plw_preferred_step(trial.ohms, 1, series);
        if (!(next <= PLW_DRIVEN_RAISE_MOST * option->ohms) ||
            plw_bias_option_solve(stage, next, &trial, &ignored) != PLW_OK) {
            return;
        }
    }
    if (trial.within_ratings && !option->within_ratings) {
        for (size_t index = 0; index < option->ratings_count && !*stepped; index++) {
            if (!option->ratings[index].ok) {
                *first = option->ratings[index];
                *stepped = true;
            }
        }
        *option = trial;
    }
}

/* ---- neighbours ---------------------------------------------------------------------------------------------------
 */

static void add_neighbours(const plw_stage *stage, plw_series series, const plw_bias_option *chosen,
                           plw_bias_choice *choice) {
    choice->options = 0;
    for (int step = -PLW_NEIGHBOURS; step <= PLW_NEIGHBOURS; step++) {
        if (step == 0) {
            choice->chosen = choice->options;
            choice->option[choice->options++] = *chosen;
            continue;
        }
        plw_error ignored = {0};
        const double ohms = plw_preferred_step(chosen->ohms, step, series);
        if (ohms >= LEAST_OHMS && ohms <= MOST_OHMS &&
            plw_bias_option_solve(stage, ohms, &choice->option[choice->options], &ignored) == PLW_OK) {
            choice->options++;
        }
    }
}

/* ---- most power ---------------------------------------------------------------------------------------------------
 */

static double kept_power(const plw_stage *stage, double ohms, plw_bias_option *option) {
    plw_error ignored = {0};
    if (plw_bias_option_solve(stage, ohms, option, &ignored) != PLW_OK) {
        return -1.0;
    }
    return option->within_ratings ? option->clean.speaker_watts : -1.0;
}

static bool choose_most_power(const plw_stage *stage, plw_series series, plw_bias_choice *choice) {
    plw_bias_option best = {0};
    double best_watts = 0.0;
    double trial_ohms = plw_preferred_at_least(LEAST_OHMS, series);
    while (trial_ohms <= 1e5) {
        plw_bias_option option;
        const double watts = kept_power(stage, trial_ohms, &option);
        if (watts > best_watts) {
            best_watts = watts;
            best = option;
        }
        trial_ohms = plw_preferred_step(trial_ohms, 1, series);
    }
    if (!(best_watts > 0.0)) {
        return false;
    }
    /* The best resistance that need not be a preferred value lies between the neighbours. */
    double best_ohms = best.ohms;
    double step = plw_preferred_step(best.ohms, 1, series) / best.ohms;
    for (int pass = 0; pass < 2; pass++) {
        const double middle = best_ohms;
        for (int part = -31; part <= 31; part++) {
            plw_bias_option option;
            const double ohms = middle * pow(step, part / 32.0);
            const double watts = kept_power(stage, ohms, &option);
            if (watts > best_watts) {
                best_watts = watts;
                best_ohms = ohms;
            }
        }
        step = pow(step, 1.0 / 32.0);
    }
    choice->exact_ohms = best_ohms;
    choice->aim_reached = true;
    add_neighbours(stage, series, &best, choice);
    return true;
}

/* ---- the choice ---------------------------------------------------------------------------------------------------
 */

static plw_status validate_aim(const plw_stage *stage, plw_aim aim, plw_error *error) {
    const plw_status status = plw_stage_validate(stage, false, error);
    if (status != PLW_OK) {
        return status;
    }
    if (isfinite(stage->fixed_bias_volts)) {
        return plw_fail(error, PLW_E_USAGE,
                        "fixed-bias: there is no cathode resistor to choose; check the stage instead");
    }
    if (aim.kind == PLW_AIM_DISSIPATION && !(aim.value >= LEAST_AIM_PERCENT && aim.value <= 100.0)) {
        return plw_fail(error, PLW_E_USAGE,
                        "aim: %.4g %% of the rated dissipation; %g to 100 %% is possible, as in dissipation=90%%",
                        aim.value, LEAST_AIM_PERCENT);
    }
    if (aim.kind == PLW_AIM_CURRENT && !(aim.value > 0.0 && aim.value <= 5.0)) {
        return plw_fail(error, PLW_E_USAGE, "aim: a plate current of %.4g A; more than 0 and up to 5 A is possible",
                        aim.value);
    }
    const plw_ratings *r = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    if (aim.kind == PLW_AIM_DISSIPATION && !isfinite(r->plate_watts)) {
        return plw_fail(
            error, PLW_E_USAGE,
            "aim: the maker of %s prints no plate dissipation; aim at a current instead, as in current=20mA",
            stage->tube->type);
    }
    return PLW_OK;
}

/* No resistance reaches the target: say what stands in the way. */
static plw_status out_of_reach(const search *s, const reach *nearest, const plw_error *last, plw_error *error) {
    if (!isfinite(nearest->quantity)) {
        return plw_fail(error, PLW_E_NO_POINT, "cathode-resistor: none serves: %s",
                        last->text[0] != '\0' ? last->text : "the stage has no point of rest");
    }
    const plw_unit unit = s->aim.kind == PLW_AIM_CURRENT ? PLW_UNIT_AMPERE : PLW_UNIT_WATT;
    char most[32];
    char wanted[32];
    plw_quantity_format(nearest->quantity, unit, 3, most, sizeof most);
    plw_quantity_format(s->target, unit, 3, wanted, sizeof wanted);
    if (last->text[0] != '\0') {
        return plw_fail(error, PLW_E_NO_POINT,
                        "aim: out of reach: the tube comes to %s of the %s aimed at; beyond that, %s", most, wanted,
                        last->text);
    }
    return plw_fail(
        error, PLW_E_NO_POINT,
        "aim: out of reach: even at %.3g ohm the tube comes to %s of the %s aimed at; more supply or screen "
        "voltage, or a lower aim, would help",
        nearest->ohms, most, wanted);
}

/* Say which limit kept the choice from the aim, or stays broken whatever the resistor. */
static void note_obstacle(const plw_stage *stage, const plw_rating_check *stepped_for, plw_bias_choice *choice) {
    const plw_rating_check *broken = broken_at_rest(&choice->option[choice->chosen], false);
    const plw_rating_check *told = stepped_for != NULL ? stepped_for : broken;
    choice->aim_reached = told == NULL;
    if (told != NULL) {
        char what[128];
        describe(told, what, sizeof what);
        snprintf(choice->obstacle, sizeof choice->obstacle, "%s%s; %s",
                 stepped_for != NULL ? "at the aim the " : "whatever the resistor, the ", what, remedy(told, stage));
    }
}

plw_status plw_bias_choose(const plw_stage *stage, plw_aim aim, plw_series series, plw_bias_choice *choice,
                           plw_error *error) {
    plw_status status = validate_aim(stage, aim, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_bias_choice found = {.aim = aim};
    if (aim.kind == PLW_AIM_POWER) {
        if (choose_most_power(stage, series, &found)) {
            *choice = found;
            return PLW_OK;
        }
        /* No value keeps every rating driven: fall back on the usual dissipation, and say what is in the way. */
        aim = (plw_aim){PLW_AIM_DISSIPATION, PLW_AIM_DEFAULT_PERCENT};
        status = validate_aim(stage, aim, error);
        if (status != PLW_OK) {
            return status;
        }
    }
    search s = {.stage = stage, .aim = aim, .target = aim.value};
    if (aim.kind == PLW_AIM_DISSIPATION) {
        s.target *= plw_tube_ratings(stage->tube, stage->variant, stage->connection)->plate_watts / 100.0;
    }
    reach nearest;
    plw_error last = {0};
    if (!find_crossing(&s, &found.exact_ohms, &nearest, &last)) {
        return out_of_reach(&s, &nearest, &last, error);
    }
    plw_bias_option chosen;
    status = plw_bias_option_solve(stage, plw_preferred_nearest(found.exact_ohms, series), &chosen, error);
    if (status != PLW_OK) {
        return status;
    }
    bool stepped;
    plw_rating_check stepped_for;
    status = step_into_ratings(stage, series, &chosen, &stepped, &stepped_for, error);
    if (status != PLW_OK) {
        return status;
    }
    step_into_driven_ratings(stage, series, &chosen, &stepped, &stepped_for);
    /* One step up after rounding down over a rating is rounding, not an obstacle. */
    stepped = stepped && chosen.ohms > plw_preferred_at_least(found.exact_ohms, series);
    add_neighbours(stage, series, &chosen, &found);
    note_obstacle(stage, stepped ? &stepped_for : NULL, &found);
    if (found.aim.kind == PLW_AIM_POWER && found.aim_reached) {
        found.aim_reached = false;
        snprintf(found.obstacle, sizeof found.obstacle,
                 "no value keeps every rating at full drive; this is the choice for %.0f %% plate dissipation",
                 PLW_AIM_DEFAULT_PERCENT);
    }
    *choice = found;
    return PLW_OK;
}
