/* The answer in words, for the bench: the resistor first, then what a meter reads, then margins, then power.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "platewright/quantity.h"
#include "platewright/report.h"
#include "report/cautions.h"
#include "report/fields.h"
#include "report/layout.h"
#include "report/supply_report.h"
#include "report/text_buffer.h"
#include "report/verdict.h"

static const char *tube_name(const plw_stage *stage) {
    return stage->variant >= 0 ? stage->tube->variants[stage->variant].type : stage->tube->type;
}

static void title(FILE *out, const plw_answer *a) {
    const plw_stage *stage = a->stage;
    if (stage->parallel > 1) {
        fprintf(out, "%u x ", stage->parallel);
    }
    fprintf(out, "%s", tube_name(stage));
    if (stage->tube->kind != PLW_KIND_TRIODE) {
        fprintf(out, ", %s", plw_connection_name(stage->connection));
        if (stage->connection == PLW_CONNECTION_ULTRALINEAR) {
            fprintf(out, " at %.3g %%", 100.0 * stage->tap);
        }
    }
    fprintf(out, ", on %s, into %s\n\n", plw_cell_volts(a->option->quiescent.supply_volts).text,
            plw_cell_ohms(stage->load_ohms).text);
}

static void verdict_lines(FILE *out, const plw_answer *a) {
    char heading[80];
    char what[120];
    plw_verdict_words(a, heading, what);
    fprintf(out, "VERDICT           %s\n", heading);
    if (what[0] != '\0') {
        fprintf(out, "                  %s\n", what);
    }
}

static void aim_words(FILE *out, const plw_aim *aim) {
    if (aim->kind == PLW_AIM_DISSIPATION) {
        fprintf(out, "%.3g %% of the rated plate dissipation", aim->value);
    } else if (aim->kind == PLW_AIM_CURRENT) {
        fprintf(out, "a plate current of %s", plw_cell_amps(aim->value).text);
    } else {
        fputs("the most power within the ratings", out);
    }
}

static void bias_lines(FILE *out, const plw_answer *a) {
    const plw_stage *stage = a->stage;
    const plw_bias_option *o = a->option;
    if (!isfinite(o->ohms)) {
        fprintf(out, "FIXED BIAS        %s at the grid, to chassis\n", plw_cell_volts(stage->fixed_bias_volts).text);
        return;
    }
    char code[PLW_CELL_SIZE];
    fprintf(out, "CATHODE RESISTOR  %s (%s)", plw_cell_ohms(o->ohms).text,
            plw_resistor_code(o->ohms, code, sizeof code));
    if (a->choice != NULL) {
        fprintf(out, ", E%d", (int)a->series);
    }
    if (isfinite(o->rating_watts)) {
        fprintf(out, ", a %g W part", o->rating_watts);
    } else {
        fputs(", larger than any usual size", out);
    }
    fprintf(out, " (it turns %s into heat)\n", plw_cell_watts(o->watts).text);
    if (stage->parallel > 1) {
        fprintf(out, "                  %s\n",
                stage->resistor_each ? "one for each tube" : "one for all tubes together");
    }
    if (stage->unbypassed) {
        fputs("                  without a bypass capacitor\n", out);
    }
    if (a->choice != NULL) {
        fputs("                  aimed at ", out);
        aim_words(out, &a->choice->aim);
        if (a->aim_before_percent > 0.0) {
            fprintf(out, "\n                  (lowered from %.3g %%, for the mains 10 %% high)", a->aim_before_percent);
        }
        fprintf(out, "; exact %s\n", plw_cell_quantity(a->choice->exact_ohms, PLW_UNIT_OHM, 4).text);
        if (!a->choice->aim_reached) {
            plw_put_paragraph(out, "                  NOT REACHED: ", a->choice->obstacle);
        }
    }
}

enum { PINS_SIZE = 32 };

/* Is this pin the electrode wanted?  Of a triode-pentode the pentode's counts. */
static bool is_electrode(const char *pin, const char *electrode) {
    const size_t length = strlen(electrode);
    const char *rest = pin + length;
    return strncmp(pin, electrode, length) == 0 &&
           (*rest == '\0' || strncmp(rest, " and ", 5) == 0 || strcmp(rest, ", pentode") == 0);
}

/* The pins of an electrode, as "pin 3"; nothing where the base is not in the catalogue. */
static void pin_text(const plw_tube *tube, const char *electrode, char *text, size_t size) {
    text[0] = '\0';
    for (size_t index = 0; index < tube->pins_count; index++) {
        if (is_electrode(tube->pins[index].electrode, electrode)) {
            const size_t used = strlen(text);
            snprintf(text + used, size - used, "%s%d", used == 0 ? "pin " : ", ", tube->pins[index].number);
        }
    }
}

static void meter_line(FILE *out, const plw_answer *a, const char *name, const char *electrode, double rest,
                       double driven) {
    char pins[PINS_SIZE] = "";
    if (electrode != NULL) {
        pin_text(a->stage->tube, electrode, pins, sizeof pins);
    }
    fprintf(out, "  %-9s%-10s", name, pins);
    plw_put_right(out, plw_cell_volts(rest).text, 12);
    if (isfinite(driven)) {
        plw_put_right(out, plw_cell_volts(driven).text, 14);
    }
    fputc('\n', out);
}

/* What a meter reads with its black lead on the chassis: mean values, as a DC meter gives them. */
static void meter_lines(FILE *out, const plw_answer *a) {
    const plw_quiescent *q = &a->option->quiescent;
    const plw_signal *s = &a->option->signal;
    const double fixed = a->stage->fixed_bias_volts;
    const bool filament = a->stage->tube->directly_heated;
    fputs("\nA METER READS, to chassis       at rest   driven fully\n", out);
    meter_line(out, a, "supply", NULL, q->supply_volts, s->supply_volts);
    meter_line(out, a, "plate", "plate", q->plate_to_ground_volts, s->plate_to_ground_volts);
    if (isfinite(q->screen_to_ground_volts)) {
        meter_line(out, a, "screen", "screen", q->screen_to_ground_volts, s->screen_to_ground_volts);
    }
    meter_line(out, a, filament ? "filament" : "cathode", filament ? "filament" : "cathode", q->cathode_volts,
               s->cathode_volts);
    meter_line(out, a, "grid", "grid 1", isfinite(fixed) ? fixed : 0.0, (double)NAN);
}

static void tube_lines(FILE *out, const plw_answer *a) {
    const plw_quiescent *q = &a->option->quiescent;
    const char *each = a->stage->parallel > 1 ? " (each tube)" : "";
    fprintf(out, "\nTHE TUBE AT REST%s\n", each);
    fprintf(out, "  to its cathode     plate %s", plw_cell_volts(q->plate_volts).text);
    if (isfinite(q->screen_volts)) {
        fprintf(out, ", screen %s", plw_cell_volts(q->screen_volts).text);
    }
    fprintf(out, ", grid %s\n", plw_cell_volts(q->grid_volts).text);
    fprintf(out, "  current            plate %s", plw_cell_amps(q->plate_amps).text);
    if (isfinite(q->screen_volts)) {
        fprintf(out, ", screen %s, cathode %s", plw_cell_amps(q->screen_amps).text,
                plw_cell_amps(q->cathode_amps).text);
    }
    fprintf(out, "\n  small signal       gm %.3g mA/V, plate resistance %s, mu %.3g\n", 1e3 * q->gm_siemens,
            plw_cell_quantity(q->plate_resistance_ohms, PLW_UNIT_OHM, 2).text, q->mu);
}

static const plw_rating_check *partner(const plw_bias_option *o, const plw_rating_check *check) {
    for (size_t index = 0; index < o->ratings_count; index++) {
        if (o->ratings[index].when == PLW_AT_FULL_DRIVE && strcmp(o->ratings[index].name, check->name) == 0) {
            return &o->ratings[index];
        }
    }
    return NULL;
}

static void rating_cell(FILE *out, const plw_rating_check *check) {
    if (check == NULL) {
        plw_put_right(out, "", 20);
        return;
    }
    const plw_cell value =
        check->unit == PLW_UNIT_WATT ? plw_cell_watts(check->value) : plw_cell_quantity(check->value, check->unit, 3);
    plw_put_share(out, value.text, 10, check->share_percent, check->ok);
    fputs(check->ok ? "   " : " !!", out);
}

/* Every rating: at rest, at full drive, the limit. */
static void rating_lines(FILE *out, const plw_answer *a) {
    const plw_bias_option *o = a->option;
    const plw_ratings *ratings = plw_tube_ratings(a->stage->tube, a->stage->variant, a->stage->connection);
    fprintf(out, "\n%-33sat rest       at full drive      limit\n",
            a->stage->parallel > 1 ? "RATINGS, each tube" : "RATINGS");
    for (size_t index = 0; index < o->ratings_count; index++) {
        const plw_rating_check *check = &o->ratings[index];
        if (check->when != PLW_AT_IDLE) {
            continue;
        }
        const plw_rating_check *driven = partner(o, check);
        fprintf(out, "  %-28s", check->name);
        rating_cell(out, check);
        rating_cell(out, driven);
        const double limit = driven != NULL ? driven->limit : check->limit;
        plw_put_right(out, plw_cell_quantity(limit, check->unit, 3).text, 9);
        if (driven != NULL && driven->limit != check->limit) {
            fprintf(out, "\n    its limit at rest is %s", plw_cell_quantity(check->limit, check->unit, 3).text);
        }
        fputc('\n', out);
    }
    if (a->stage->transformerless) {
        fputs("  heater to cathode           not known: the string may stand at the mains peak\n", out);
    }
    char source[512];
    snprintf(source, sizeof source, "%s, %s", plw_rating_system_name(ratings->system), ratings->provenance.source);
    plw_put_paragraph(out, "  ", source);
}

/* What is known of the plate supply beyond its voltage; platewright supply says all. */
static void supply_lines(FILE *out, const plw_answer *a) {
    const plw_supply_answer *s = a->supply;
    if (s == NULL || !s->supply->has_winding) {
        return;
    }
    const bool bled = isfinite(s->bled_volts);
    fprintf(out, "\nPLATE SUPPLY      off load %s, at high mains %s; %s in the path\n",
            plw_cell_volts(bled ? s->bled_volts : s->off_load_volts).text,
            plw_cell_volts(bled ? s->bled_high_volts : s->off_load_high_volts).text,
            plw_cell_ohms(s->supply->parts.path_ohms).text);
    if (bled) {
        fprintf(out, "                  should the bleeder open: %s, at high mains %s\n",
                plw_cell_volts(s->off_load_volts).text, plw_cell_volts(s->off_load_high_volts).text);
    }
    if (isfinite(s->volts_error)) {
        fprintf(out, "                  loaded %s, +/- %s by the readings\n", plw_cell_volts(s->volts).text,
                plw_cell_quantity(s->volts_error, PLW_UNIT_VOLT, 2).text);
    }
    if (!s->supply->reservoir_assumed) {
        fprintf(out, "                  ripple %s peak to peak\n",
                plw_cell_quantity(s->state.node[s->state.nodes - 1].ripple_peak_to_peak_volts, PLW_UNIT_VOLT, 2).text);
    }
    if (a->hum != NULL) {
        fprintf(out, "                  hum %.0f dB below full power", a->hum->decibels_below_full_power);
        if (isfinite(a->hum->speaker_rms_volts)) {
            fprintf(out, ", %s at the speaker", plw_cell_quantity(a->hum->speaker_rms_volts, PLW_UNIT_VOLT, 2).text);
        }
        fputc('\n', out);
    }
    plw_put_supply_ratings(out, s);
}

/* Swing of the current that the load sees: in triode connection the screen's goes with the plate's. */
static void current_swing(const plw_answer *a, double *least, double *most) {
    const plw_signal *s = &a->option->signal;
    *least = s->plate_amps_least;
    *most = s->plate_amps_most;
    if (plw_stage_currents_together(a->stage)) {
        *least = HUGE_VAL;
        *most = 0.0;
        for (size_t index = 0; index < PLW_PATH_POINTS; index++) {
            const double amps = s->path_plate_amps[index] + s->path_screen_amps[index];
            *least = fmin(*least, amps);
            *most = fmax(*most, amps);
        }
    }
}

static void power_lines(FILE *out, const plw_answer *a) {
    const plw_signal *s = &a->option->signal;
    const plw_signal *clean = &a->option->clean;
    const double percent = plw_stage_clean_percent(a->stage);
    if (clean->drive_peak_volts < s->drive_peak_volts) {
        fprintf(out, "\nUP TO %2.0f %%         %s at the speaker, drive %s peak at the grid\n", percent,
                plw_cell_watts(clean->speaker_watts).text, plw_cell_volts(clean->drive_peak_volts).text);
        fputs("                  (the distortion up to which makers print power)\n", out);
    }
    fprintf(out, "\nFULL DRIVE        %s at the speaker", plw_cell_watts(s->speaker_watts).text);
    if (s->power_watts > 1.0005 * s->speaker_watts) {
        fprintf(out, ", %s at the plate", plw_cell_watts(s->power_watts).text);
    }
    fprintf(out, "\n                  distortion %.1f %% (2nd %.1f, 3rd %.1f, 4th %.1f, 5th %.1f)\n", s->thd_percent,
            fabs(s->harmonic_percent[2]), fabs(s->harmonic_percent[3]), fabs(s->harmonic_percent[4]),
            fabs(s->harmonic_percent[5]));
    fprintf(out, "                  drive %s peak at the grid", plw_cell_volts(s->drive_peak_volts).text);
    if (s->limit == PLW_DRIVE_GIVEN) {
        fputs(", as given\n", out);
    } else {
        fprintf(out, ", where %s begins\n", s->limit == PLW_DRIVE_GRID_CURRENT ? "grid current" : "cut-off");
    }
    if (a->stage->driver_ohms > 0.0) {
        fprintf(out, "                  from a driver of %s; grid current %s at the crest,\n",
                plw_cell_ohms(a->stage->driver_ohms).text, plw_cell_amps(s->grid_amps_most).text);
        fprintf(out, "                  %s on the average%s\n", plw_cell_amps(s->grid_amps).text,
                a->stage->parallel > 1 ? ", each tube" : "");
    }
    double least_amps;
    double most_amps;
    current_swing(a, &least_amps, &most_amps);
    fprintf(out, "                  plate to cathode swings %s to %s,%s%s to %s\n",
            plw_cell_volts(s->plate_volts_least).text, plw_cell_volts(s->plate_volts_most).text,
            a->stage->parallel > 1 ? "\n                  each tube's current " : " ", plw_cell_amps(least_amps).text,
            plw_cell_amps(most_amps).text);
}

/* The heat that is held against the rating of the plate: with the screen's where the maker rates both together. */
static double rated_watts(const plw_bias_option *o) {
    for (size_t index = 0; index < o->ratings_count; index++) {
        if (o->ratings[index].when == PLW_AT_IDLE && strcmp(o->ratings[index].name, PLW_NAME_PLATE_AND_SCREEN) == 0) {
            return o->ratings[index].value;
        }
    }
    return o->quiescent.plate_watts;
}

static void neighbour_lines(FILE *out, const plw_answer *a) {
    const plw_bias_choice *choice = a->choice;
    if (choice == NULL || choice->options < 2) {
        return;
    }
    fprintf(out, "\nA STEP EITHER WAY  cathode     plate  dissipation  up to %2.0f %%      full drive\n",
            plw_stage_clean_percent(a->stage));
    for (size_t index = 0; index < choice->options; index++) {
        const plw_bias_option *o = &choice->option[index];
        fputs(index == choice->chosen ? "  > " : "    ", out);
        plw_put_right(out, plw_cell_ohms(o->ohms).text, 9);
        plw_put_right(out, plw_cell_volts(o->quiescent.cathode_volts).text, 13);
        plw_put_right(out, plw_cell_amps(o->quiescent.plate_amps).text, 10);
        plw_put_right(out, plw_cell_watts(rated_watts(o)).text, 13);
        plw_put_right(out, plw_cell_watts(o->clean.speaker_watts).text, 11);
        plw_put_right(out, plw_cell_watts(o->signal.speaker_watts).text, 10);
        fprintf(out, " %4.1f %%%s\n", o->signal.thd_percent, plw_option_within(a, o) ? "" : " !!");
    }
    if (a->stage->parallel > 1) {
        fputs("  plate current and dissipation of each tube, power of all together\n", out);
    }
}

static void specimen_lines(FILE *out, const plw_answer *a) {
    const plw_specimen *s = a->specimen;
    if (s == NULL) {
        return;
    }
    fputs("\nTHIS TUBE, BY THE METER\n", out);
    const bool shared = a->stage->parallel > 1 && !a->stage->resistor_each;
    fprintf(out, "  current            cathode %s: %s%s", plw_cell_volts(s->cathode_volts).text,
            plw_cell_amps(s->cathode_amps).text, shared ? " each, if they share equally" : "");
    if (isfinite(s->screen_volts)) {
        fprintf(out, ";\n                     plate %s, screen %s (the model's share)",
                plw_cell_amps(s->plate_amps).text, plw_cell_amps(s->screen_amps).text);
    }
    fprintf(out, "\n  heat               plate %s", plw_cell_watts(s->plate_watts).text);
    if (isfinite(s->screen_watts)) {
        fprintf(out, ", screen %s", plw_cell_watts(s->screen_watts).text);
    }
    fprintf(out, ", at %s plate to cathode\n", plw_cell_volts(s->plate_volts).text);
    fprintf(out, "  of its type        %.0f %% %s than the model's tube draws there (%s)\n", fabs(s->off_percent),
            s->off_percent < 0.0 ? "less" : "more", plw_cell_amps(s->model_cathode_amps).text);
    if (isfinite(s->primary_ohms)) {
        fprintf(out, "  copper             %s between supply and plate\n", plw_cell_ohms(s->primary_ohms).text);
    }
    if (isfinite(s->screen_feed_ohms)) {
        fprintf(out, "  screen feed        %s, by the model's screen current\n",
                plw_cell_ohms(s->screen_feed_ohms).text);
    }
    if (s->doubt[0] != '\0') {
        plw_put_paragraph(out, "  DOUBTFUL           ", s->doubt);
    }
    if (!s->plate_read) {
        fprintf(out, "  not read           so taken from the model:%s plate\n", s->supply_read ? "" : " supply");
    } else if (!s->supply_read) {
        fprintf(out, "  not read           supply: taken as %s, by the plate's reading\n",
                plw_cell_volts(s->supply_volts).text);
    }
    if (s->off_percent > PLW_SPECIMEN_MOST_PERCENT || s->off_percent < PLW_SPECIMEN_LEAST_PERCENT) {
        return; /* a resistor for readings that are not believed would be no help */
    }
    if (s->resistor_found) {
        const plw_bias_option *o = &s->choice.option[s->choice.chosen];
        fprintf(out, "  its own resistor   %s, for ", plw_cell_ohms(o->ohms).text);
        aim_words(out, &s->choice.aim);
        if (s->aim_before_percent > 0.0) {
            fprintf(out, "\n                     (lowered from %.3g %%, for the mains 10 %% high)",
                    s->aim_before_percent);
        }
        if (!s->choice.aim_reached) {
            fputs("\n                     as near as another rating lets it", out);
        }
        fprintf(out, ";\n                     then cathode %s, plate %s, %s\n",
                plw_cell_volts(o->quiescent.cathode_volts).text, plw_cell_amps(o->quiescent.plate_amps).text,
                plw_cell_watts(o->quiescent.plate_watts).text);
    } else {
        plw_put_paragraph(out, "  no resistor suits this tube: ", s->resistor_obstacle);
    }
}

/* One line for all that was not described. */
static void ideal_line(FILE *out, const plw_answer *a) {
    const plw_stage *stage = a->stage;
    char text[256];
    snprintf(text, sizeof text, "Taken as ideal:%s%s%s%s.",
             stage->primary_ohms > 0.0 ? "" : " no copper in the transformer,",
             stage->supply.kind == PLW_SUPPLY_STIFF ? " a stiff supply," : "",
             isfinite(stage->cathode_resistor_ohms) && !stage->unbypassed ? " the cathode fully bypassed," : "",
             " a resistive speaker at mid-band");
    fputc('\n', out);
    plw_put_paragraph(out, "", text);
}

static const char *deviation_text(double value, plw_unit unit, plw_cell *c) {
    plw_quantity_format(value, unit, 2, c->text, sizeof c->text);
    return c->text;
}

/* How far the answer may be off, and by what. */
static void trust_lines(FILE *out, const plw_answer *a) {
    const plw_model *m = &a->stage->tube->model;
    const plw_uncertainty *u = a->uncertainty;
    char text[512];
    if (u != NULL) {
        plw_cell current;
        plw_cell heat;
        plw_cell power;
        plw_cell by_tubes;
        plw_cell by_model;
        plw_cell by_supply;
        const bool supply = u->plate_amps.supply > 0.0;
        const bool several = a->stage->parallel > 1;
        deviation_text(u->plate_amps.supply, PLW_UNIT_AMPERE, &by_supply);
        snprintf(text, sizeof text,
                 "How sure: %splate current +/- %s (tubes of one type %s, model %s%s%s), plate dissipation +/- %s, "
                 "power%s +/- %s: two in three amplifiers lie within; the %s counts most.",
                 several ? "each tube's " : "", deviation_text(u->plate_amps.all, PLW_UNIT_AMPERE, &current),
                 deviation_text(u->plate_amps.tubes, PLW_UNIT_AMPERE, &by_tubes),
                 deviation_text(u->plate_amps.model, PLW_UNIT_AMPERE, &by_model), supply ? ", supply " : "",
                 supply ? by_supply.text : "", deviation_text(u->plate_watts.all, PLW_UNIT_WATT, &heat),
                 several ? " of all together" : "", deviation_text(u->speaker_watts.all, PLW_UNIT_WATT, &power),
                 u->dominant == PLW_BY_TUBES ? "spread of tubes" : plw_deviation_cause_name(u->dominant));
        plw_put_paragraph(out, "", text);
    }
    if (isfinite(m->fit_error.plate_current_percent)) {
        int used = snprintf(text, sizeof text, "Model: within %.1f %% of the printed plate currents it was fitted to",
                            m->fit_error.plate_current_percent);
        if (isfinite(m->left_out_error.plate_current_percent)) {
            used += snprintf(text + used, sizeof text - (size_t)used, ", %.1f %% of those left out",
                             m->left_out_error.plate_current_percent);
        }
        snprintf(text + used, sizeof text - (size_t)used, " (medians).");
        plw_put_paragraph(out, "", text);
    }
}

static void caution_lines(FILE *out, const plw_answer *a) {
    char lines[PLW_CAUTIONS_MOST][PLW_CAUTION_SIZE];
    size_t own = 0;
    const size_t count = plw_report_cautions(a, lines, PLW_CAUTIONS_MOST, &own);
    for (size_t index = 0; index < count; index++) {
        if (index == 0 || index == own) {
            fputs(index < own ? "\nWARNINGS\n" : "\nCAUTIONS\n", out);
        }
        if (strncmp(lines[index], "The aim is not reached", 22) != 0) { /* told at the top */
            plw_put_paragraph(out, index < own ? "  ! " : "  - ", lines[index]);
        }
    }
}

plw_status plw_report_text(const plw_answer *answer, char **text, plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    FILE *out = buffer.file;
    title(out, answer);
    verdict_lines(out, answer);
    bias_lines(out, answer);
    specimen_lines(out, answer);
    meter_lines(out, answer);
    tube_lines(out, answer);
    rating_lines(out, answer);
    if (answer->mains != NULL) {
        plw_put_mains(out, answer);
    }
    supply_lines(out, answer);
    power_lines(out, answer);
    neighbour_lines(out, answer);
    ideal_line(out, answer);
    trust_lines(out, answer);
    caution_lines(out, answer);
    return plw_text_end(&buffer, PLW_OK, text, error);
}
