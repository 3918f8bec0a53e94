/* What a builder must be warned of: this stage's own dangers, and those of every chassis.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/cautions.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "platewright/bypass.h"
#include "platewright/preferred.h"
#include "report/fields.h"
#include "report/layout.h"
#include "report/text_buffer.h"

/* From here a rating is called near.  Mains 5 % high raise the dissipation by about 10 %: both volts and current rise.
 * Common practice, no source. */
#define NEAR_PERCENT 95.0

/* Misses of the law that a builder should know of, in percent and points: about twice what a well-documented tube has.
 */
#define LARGE_CURRENT_MISS 5.0
#define LARGE_SCREEN_MISS 20.0
#define LARGE_POWER_MISS 10.0
#define LARGE_DISTORTION_MISS 2.0

/* What capacitors must stand: the mains may be a tenth high.  Common practice, no source. */
#define HIGH_MAINS 1.1

/* Volts within these parts of the printed ones are not called extrapolated: the range for which the RCA receiving tube
 * manuals call their conversion to other voltages good (from memory). */
#define REGION_LEAST 0.7
#define REGION_MOST 1.5

/* A screen that runs at this share of its rating under drive is worth a word. */
#define SCREEN_NEAR 0.8

/* A line that is cut is cut before a character that does not fit whole. */
void plw_caution_say(plw_caution_list *l, const char *format, ...) {
    if (l->count >= l->most) {
        return;
    }
    char *line = l->lines[l->count++];
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(line, PLW_CAUTION_SIZE, format, arguments);
    va_end(arguments);
    line[plw_text_whole_length(line)] = '\0';
}

enum { TEXT_SIZE = 48 };

static const char *written(double value, plw_unit unit, char text[TEXT_SIZE]) {
    return plw_quantity_format(value, unit, 3, text, TEXT_SIZE);
}

static void of_ratings(plw_caution_list *l, const plw_answer *answer) {
    const plw_bias_option *option = answer->option;
    const plw_ratings *ratings =
        plw_tube_ratings(answer->stage->tube, answer->stage->variant, answer->stage->connection);
    /* Design-center ratings leave room for mains and tubes by themselves. */
    const bool room_left = ratings != NULL && ratings->system == PLW_SYSTEM_DESIGN_CENTER;
    for (size_t i = 0; i < option->ratings_count; i++) {
        const plw_rating_check *check = &option->ratings[i];
        char value[TEXT_SIZE];
        char limit[TEXT_SIZE];
        written(check->value, check->unit, value);
        written(check->limit, check->unit, limit);
        const char *when = check->when == PLW_AT_IDLE ? "idle" : "full drive";
        if (!check->ok) {
            plw_caution_say(l, "Rating exceeded at %s: %s is %s, the limit %s (%s). %s", when, check->name, value,
                            limit, plw_cell_share(check->share_percent, false).text,
                            check->when == PLW_AT_IDLE ? "Do not build it so."
                                                       : "Speech and music heat less than this steady tone.");
        } else if (check->share_percent >= NEAR_PERCENT && check->when == PLW_AT_IDLE && !room_left) {
            plw_caution_say(l, "At %s the %s is %s of a rated %s: nothing is left for high mains or a strong tube.",
                            when, check->name, value, limit);
        }
    }
}

/* Makers who rate a tube apart for fixed bias that is not adjusted to the very tube (300B) allow less of it. */
static void of_fixed_bias(plw_caution_list *l, const plw_answer *answer) {
    const plw_stage *stage = answer->stage;
    const plw_quiescent *rest = &answer->option->quiescent;
    for (size_t i = 0; isfinite(stage->fixed_bias_volts) && i < stage->tube->ratings_count; i++) {
        const plw_ratings *r = &stage->tube->ratings[i];
        const bool apart = r->service != NULL && strstr(r->service, "fixed bias") != NULL &&
                           rest->cathode_amps > r->cathode_amps && r->provenance.confidence != PLW_CONFIDENCE_LOW;
        if (apart && r != plw_tube_ratings(stage->tube, stage->variant, stage->connection)) {
            char value[TEXT_SIZE];
            char limit[TEXT_SIZE];
            plw_caution_say(l,
                            "It idles at %s of cathode current: with fixed bias that is not adjusted to the very tube "
                            "the maker allows %s (%s).",
                            written(rest->cathode_amps, PLW_UNIT_AMPERE, value),
                            written(r->cathode_amps, PLW_UNIT_AMPERE, limit), r->service);
        }
    }
}

/* Is the rating broken at nominal mains too, driven alike? */
static bool broken_anyhow(const plw_bias_option *option, const plw_rating_check *at_mains) {
    for (size_t i = 0; i < option->ratings_count; i++) {
        const plw_rating_check *check = &option->ratings[i];
        if (!check->ok && check->when == at_mains->when && strcmp(check->name, at_mains->name) == 0) {
            return true;
        }
    }
    return false;
}

static const char *mains_remedy(const plw_rating_check *check) {
    if (check->when == PLW_AT_FULL_DRIVE) {
        return "Speech and music heat less than this steady tone; a lower supply or a higher resistor may cure it.";
    }
    return check->unit == PLW_UNIT_VOLT ? "A lower supply cures it." : "A higher resistor or a lower aim cures it.";
}

/* Where the rating system leaves the mains to the builder, each rating broken there that is kept at nominal mains. */
static void of_mains(plw_caution_list *l, const plw_answer *answer) {
    const plw_mains *mains = answer->mains;
    if (mains == NULL || !mains->counted || !mains->high.solved) {
        return;
    }
    for (size_t i = 0; i < mains->high.ratings_count; i++) {
        const plw_rating_check *check = &mains->high.ratings[i];
        if (!check->ok && !broken_anyhow(answer->option, check)) {
            char value[TEXT_SIZE];
            char limit[TEXT_SIZE];
            plw_caution_say(l,
                            "With the mains 10 %% up the %s%s is %s, the limit %s (%s): a %s rating must hold there "
                            "too. %s",
                            check->name, check->when == PLW_AT_IDLE ? "" : " at full drive",
                            written(check->value, check->unit, value), written(check->limit, check->unit, limit),
                            plw_cell_share(check->share_percent, false).text, plw_rating_system_name(mains->system),
                            mains_remedy(check));
        }
    }
}

/* From this part of the drive on, what grid current takes off the crest is worth a word. */
#define CREST_PART 0.02

/* Grid current at a drive that was given. */
static void of_grid_current(plw_caution_list *l, const plw_stage *stage, const plw_signal *signal) {
    char drive[TEXT_SIZE];
    written(signal->drive_peak_volts, PLW_UNIT_VOLT, drive);
    const double fall_volts = stage->driver_ohms * stage->parallel * signal->grid_amps_most;
    if (stage->driver_ohms > 0.0 && fall_volts > CREST_PART * signal->drive_peak_volts) {
        char amps[TEXT_SIZE];
        char fall[TEXT_SIZE];
        plw_caution_say(
            l,
            "At the %s peak given %s grid draws up to %s, which takes %s off the crest: that clipping is reckoned "
            "with. What it charges a coupling capacitor to, and so the bias after loud passages, is not.",
            drive, stage->parallel > 1 ? "each" : "the", written(signal->grid_amps_most, PLW_UNIT_AMPERE, amps),
            written(fall_volts, PLW_UNIT_VOLT, fall));
    } else if (signal->grid_current && !(stage->driver_ohms > 0.0)) {
        plw_caution_say(
            l,
            "At the %s peak given the grid goes positive and draws current: the driver and the coupling capacitor, "
            "which are not part of this reckoning, will change what comes out. Tell it the driver's resistance.",
            drive);
    }
}

static void of_drive(plw_caution_list *l, const plw_answer *answer) {
    const plw_signal *signal = &answer->option->signal;
    char drive[TEXT_SIZE];
    if (!isfinite(signal->drive_peak_volts)) {
        return;
    }
    written(signal->drive_peak_volts, PLW_UNIT_VOLT, drive);
    if (signal->beyond_supply) {
        plw_caution_say(l, "At full drive the stage draws a current that the supply's readings do not reach: power and "
                           "distortion there are guessed. Take a reading into a heavier load.");
    }
    if (signal->limit == PLW_DRIVE_GRID_CURRENT && answer->stage->driver_ohms > 0.0) {
        char ohms[TEXT_SIZE];
        plw_caution_say(l, "Full drive is %s peak: beyond it grid current rounds off the crest behind the driver's %s.",
                        drive, written(answer->stage->driver_ohms, PLW_UNIT_OHM, ohms));
    } else if (signal->limit == PLW_DRIVE_GRID_CURRENT) {
        plw_caution_say(
            l, "Full drive is %s peak: beyond it the grid draws current, and a driver that cannot give it clips.",
            drive);
    } else if (signal->limit == PLW_DRIVE_CUT_OFF) {
        plw_caution_say(l, "Full drive is %s peak: beyond it the tube is cut off during part of the cycle.", drive);
    } else {
        of_grid_current(l, answer->stage, signal);
        if (signal->cut_off) {
            plw_caution_say(
                l, "At the %s peak given the tube is cut off during part of the cycle: this is no longer class A.",
                drive);
        }
    }
}

static void of_screen(plw_caution_list *l, const plw_answer *answer) {
    const plw_stage *stage = answer->stage;
    const plw_bias_option *option = answer->option;
    const plw_ratings *ratings = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    if (stage->tube->model.law.kind != PLW_LAW_PENTODE || plw_stage_is_triode(stage)) {
        return;
    }
    const double driven = option->signal.screen_watts;
    if (ratings != NULL) {
        const double limit =
            isfinite(ratings->screen_watts_full_drive) ? ratings->screen_watts_full_drive : ratings->screen_watts;
        if (driven > SCREEN_NEAR * limit && driven > option->quiescent.screen_watts) {
            char idle_text[TEXT_SIZE];
            char driven_text[TEXT_SIZE];
            plw_caution_say(
                l,
                "Screen dissipation rises from %s idle to %s at full drive: a %sresistor in the screen lead spares it.",
                written(option->quiescent.screen_watts, PLW_UNIT_WATT, idle_text),
                written(driven, PLW_UNIT_WATT, driven_text), stage->screen_resistor_ohms > 0.0 ? "larger " : "");
        }
    }
}

static void of_bias(plw_caution_list *l, const plw_answer *answer) {
    const plw_stage *stage = answer->stage;
    if (isfinite(stage->fixed_bias_volts)) {
        plw_caution_say(
            l, "With fixed bias nothing but the bias supply holds the current: let it come up first, watch the cathode "
               "current, and fuse the cathode.");
    } else if (stage->parallel > 1 && !stage->resistor_each) {
        plw_caution_say(
            l,
            "%u tubes share one cathode resistor: one of them may take more than its part and the common voltage "
            "will not show it. A resistor for each tells them apart.",
            stage->parallel);
    }
}

/* A law is good for somewhat more than the data it came from. */
static bool outside(double value, double least, double most) {
    return value < REGION_LEAST * least || value > REGION_MOST * most; /* false: bounds not known */
}

static void of_region(plw_caution_list *l, const plw_answer *answer) {
    const plw_stage *stage = answer->stage;
    const plw_quiescent *rest = &answer->option->quiescent;
    const plw_region *region = &stage->tube->model.region;
    const double amps = plw_stage_currents_together(stage) ? rest->cathode_amps : rest->plate_amps;
    const struct {
        const char *name;
        double value, least, most;
        plw_unit unit;
    } parts[] = {
        {"plate volts", rest->plate_volts, region->plate_volts_least, region->plate_volts_most, PLW_UNIT_VOLT},
        {"screen volts", rest->screen_volts, region->screen_volts_least, region->screen_volts_most, PLW_UNIT_VOLT},
        {"plate current", amps, region->plate_amps_least, region->plate_amps_most, PLW_UNIT_AMPERE},
    };
    char text[PLW_CAUTION_SIZE / 2] = "";
    for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) {
        if (outside(parts[i].value, parts[i].least, parts[i].most)) {
            char value[TEXT_SIZE];
            char least[TEXT_SIZE];
            char most[TEXT_SIZE];
            written(parts[i].least, parts[i].unit, least);
            written(parts[i].most, parts[i].unit, most);
            const bool one = strcmp(least, most) == 0;
            const size_t used = strlen(text);
            snprintf(text + used, sizeof text - used, "%s%s %s (printed: %s%s%s)", used > 0 ? ", " : "", parts[i].name,
                     written(parts[i].value, parts[i].unit, value), one ? "" : least, one ? "" : " to ", most);
        }
    }
    if (text[0] != '\0') {
        plw_caution_say(l, "Extrapolated beyond the printed data of the tube, at rest: %s.", text);
    }
}

/* The error of rows that were left out tells more than that of rows that were fitted. */
static double told(double left_out, double fitted) {
    return isfinite(left_out) ? left_out : fitted;
}

static void of_model(plw_caution_list *l, const plw_answer *answer) {
    const plw_stage *stage = answer->stage;
    const plw_model_errors *out = &stage->tube->model.left_out_error;
    const plw_model_errors *in = &stage->tube->model.fit_error;
    const char *type = plw_stage_tube_type(stage);
    const double current = told(out->plate_current_percent, in->plate_current_percent);
    const double screen = told(out->screen_current_percent, in->screen_current_percent);
    const double power = told(out->power_percent, in->power_percent);
    const double distortion = told(out->distortion_points, in->distortion_points);
    if (!isfinite(current)) {
        plw_caution_say(l, "No printed row tells how far the law of the %.60s may be off: trust the meter.", type);
    }
    if (current > LARGE_CURRENT_MISS) {
        plw_caution_say(l, "The law of the %.60s misses printed plate currents by %.1f %% (median): trim on the bench.",
                        type, current);
    }
    if (screen > LARGE_SCREEN_MISS && !plw_stage_is_triode(stage)) {
        plw_caution_say(l,
                        "The law of the %.60s misses printed screen currents by %.0f %% (median): measure the screen.",
                        type, screen);
    }
    if (power > LARGE_POWER_MISS || distortion > LARGE_DISTORTION_MISS) {
        plw_caution_say(
            l,
            "Power and distortion of the %.60s are known only roughly: printed figures are missed by %.0f %% and "
            "%.1f points (median).",
            type, power, distortion);
    }
    const plw_ratings *ratings = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    if (ratings != NULL && ratings->plate_watts_unpublished) {
        plw_caution_say(l, "The maker prints no plate dissipation for the %.60s: it is not checked.", type);
    }
}

static void of_voltages(plw_caution_list *l, const plw_answer *answer) {
    const plw_supply *supply = &answer->stage->supply;
    const plw_signal *signal = &answer->option->signal;
    char high[TEXT_SIZE];
    const double off_load_volts = answer->supply != NULL ? answer->supply->off_load_volts : supply->volts;
    if (supply->kind != PLW_SUPPLY_STIFF && isfinite(off_load_volts)) {
        char off_load[TEXT_SIZE];
        const bool bled = answer->supply != NULL && isfinite(answer->supply->bled_volts);
        plw_caution_say(
            l,
            "Rate capacitors and windings for the unloaded supply at high mains: %s off load, %s with the mains 10 %% "
            "up. %s",
            written(off_load_volts, PLW_UNIT_VOLT, off_load), written(HIGH_MAINS * off_load_volts, PLW_UNIT_VOLT, high),
            bled ? "With cold tubes it climbs there should the bleeder open."
                 : "With cold tubes it stands there at every switching on.");
    } else {
        plw_caution_say(
            l,
            "Rate capacitors and windings for the unloaded supply at high mains, which is not known here: it is well "
            "above the loaded voltage, and with cold tubes it stands there at every switching on.");
    }
    if (isfinite(signal->plate_to_ground_volts_most)) {
        plw_caution_say(l, "The plate swings to %s above the chassis at full drive: sockets and leads must stand it.",
                        written(signal->plate_to_ground_volts_most, PLW_UNIT_VOLT, high));
    }
}

void plw_cautions_standing(plw_caution_list *l, bool live_chassis) {
    plw_caution_say(
        l, "These voltages kill. Unplug, let the capacitors discharge through a resistor, and verify with a meter that "
           "each is below 60 V before touching anything.");
    plw_caution_say(
        l,
        "Do no work on a live chassis. Clip the meter on with the power off; where a live reading cannot be avoided, "
        "one hand only, insulated leads, and never alone.");
    plw_caution_say(l, live_chassis ? "Fuse the mains. Never earth this chassis: it may be live."
                                    : "Fuse the mains and earth the chassis.");
    plw_caution_say(l, "Local codes and the judgement of a licensed practitioner go before anything said here.");
}

/* The largest grid resistor by the tube's sheet, which is another with fixed bias.  The stray grid currents of tubes on
 * one resistor add up in it, so that each of them is left its part only. */
static void of_grid_resistor(plw_caution_list *l, const plw_stage *stage, const plw_ratings *ratings) {
    const bool fixed = isfinite(stage->fixed_bias_volts);
    const double ohms = fixed ? ratings->grid_ohms_fixed_bias : ratings->grid_ohms_cathode_bias;
    char most[TEXT_SIZE];
    char shared[TEXT_SIZE];
    if (!isfinite(ohms)) {
        return;
    }
    written(ohms, PLW_UNIT_OHM, most);
    if (stage->parallel > 1) {
        plw_caution_say(l, "Grid resistor: up to %s with %s bias for each tube (the sheet); one for all, up to %s.",
                        most, fixed ? "fixed" : "cathode", written(ohms / stage->parallel, PLW_UNIT_OHM, shared));
    } else {
        plw_caution_say(l, "Grid resistor: up to %s with %s bias (the sheet).", most, fixed ? "fixed" : "cathode");
    }
}

static void of_bypass(plw_caution_list *l, const plw_stage *stage, const plw_quiescent *rest) {
    char volts[TEXT_SIZE];
    char farads[TEXT_SIZE];
    const double least = plw_bypass_farads(stage, rest, PLW_BYPASS_HERTZ);
    plw_caution_say(l, "Rate the cathode bypass capacitor for twice the bias, %s at least.",
                    written(2.0 * rest->cathode_volts, PLW_UNIT_VOLT, volts));
    if (least > 0.0) {
        plw_caution_say(l, "%s across the cathode resistor%s, or more, keeps the loss at %.0f Hz below 3 dB.",
                        written(plw_preferred_at_least(least, PLW_E6), PLW_UNIT_FARAD, farads),
                        stage->parallel > 1 && stage->resistor_each ? " of each tube" : "", PLW_BYPASS_HERTZ);
    }
}

/* What holds for every stage of its kind, in this stage's figures. */
static void notes(plw_caution_list *l, const plw_answer *answer) {
    const plw_stage *stage = answer->stage;
    const plw_ratings *ratings = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    if (stage->tube->model.law.kind == PLW_LAW_PENTODE && !plw_stage_is_triode(stage)) {
        plw_caution_say(l, "Never drive the stage without its speaker or a dummy load: plate volts then swing far "
                           "above the supply and "
                           "the screen overheats.");
    }
    if (isfinite(stage->cathode_resistor_ohms) && !stage->unbypassed) {
        of_bypass(l, stage, &answer->option->quiescent);
    }
    if (ratings != NULL) {
        of_grid_resistor(l, stage, ratings);
    }
    if (ratings != NULL && ratings->provenance.how == PLW_HOW_MEMORY) {
        plw_caution_say(
            l,
            "The ratings of the %.60s were written down from memory of the maker's sheet: compare them with the sheet.",
            plw_stage_tube_type(stage));
    } else if (ratings != NULL && ratings->provenance.how == PLW_HOW_TOLD) {
        plw_caution_say(l, "The ratings of the %.60s were told without a source: compare them with the maker's sheet.",
                        plw_stage_tube_type(stage));
    }
}

size_t plw_report_cautions(const plw_answer *answer, char (*lines)[PLW_CAUTION_SIZE], size_t most, size_t *own) {
    plw_caution_list l = {lines, most, 0};
    if (answer->choice != NULL && !answer->choice->aim_reached && answer->choice->obstacle[0] != '\0') {
        plw_caution_say(&l, "The aim is not reached: %s", answer->choice->obstacle);
    }
    if (answer->supply != NULL) {
        plw_cautions_of_supply(&l, answer->supply);
    } else if (answer->stage->transformerless) {
        plw_caution_live_chassis(&l);
    }
    of_ratings(&l, answer);
    of_mains(&l, answer);
    of_fixed_bias(&l, answer);
    of_drive(&l, answer);
    of_screen(&l, answer);
    of_bias(&l, answer);
    of_region(&l, answer);
    of_model(&l, answer);
    if (own != NULL) {
        *own = l.count;
    }
    notes(&l, answer);
    of_voltages(&l, answer);
    plw_cautions_standing(&l, answer->stage->transformerless);
    return l.count;
}
