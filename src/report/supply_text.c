/* The plate supply in words, for the bench: loaded volts first, then what the parts stand, the dummy load, the
 * procedure.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report/cautions.h"
#include "report/fields.h"
#include "report/layout.h"
#include "report/supply_report.h"
#include "report/text_buffer.h"

#define INDENT "                  "

/* ---- what it gives ----------------------------------------------------------------------------------------------- */

static void title(FILE *out, const plw_supply_finding *f) {
    const plw_supply_answer *a = f->supply;
    fprintf(out, "LOADED            %s at %s", plw_cell_volts(a->volts).text, plw_cell_amps(a->amps).text);
    if (isfinite(a->volts_error)) {
        fprintf(out, ", +/- %s by the readings (standard error)",
                plw_cell_quantity(a->volts_error, PLW_UNIT_VOLT, 2).text);
    }
    fputc('\n', out);
    if (f->stage != NULL) {
        const plw_stage *stage = f->stage;
        char text[256] = "drawn by ";
        size_t used = strlen(text);
        if (stage->parallel > 1) {
            used += (size_t)snprintf(text + used, sizeof text - used, "%u x ", stage->parallel);
        }
        used += (size_t)snprintf(text + used, sizeof text - used, "%.60s at rest", plw_stage_tube_type(stage));
        if (isfinite(stage->cathode_resistor_ohms)) {
            used += (size_t)snprintf(text + used, sizeof text - used, " with %s at the cathode%s",
                                     plw_cell_ohms(stage->cathode_resistor_ohms).text,
                                     f->choice != NULL ? " (chosen)" : "");
        }
        if (stage->other_amps > 0.0) {
            snprintf(text + used, sizeof text - used, ", and %s besides", plw_cell_amps(stage->other_amps).text);
        }
        plw_put_paragraph(out, INDENT, text);
    }
}

static void parts_line(FILE *out, const plw_supply_answer *a) {
    static const char *const connections[] = {"full-wave", "bridge", "half-wave"};
    const plw_rectifier *parts = &a->supply->parts;
    char text[512];
    int used = snprintf(text, sizeof text, "%s%s, %s, %s", plw_cell_volts(parts->winding_rms_volts).text,
                        parts->connection == PLW_FULL_WAVE ? " each half" : "", connections[parts->connection],
                        a->supply->rectifier_tube != NULL ? a->supply->rectifier_tube->type : "silicon");
    const char *first =
        a->supply->reservoir_assumed ? ", a reservoir so large that no ripple is left" : ", choke input";
    if (a->supply->reservoir_assumed || !(parts->reservoir_farads > 0)) {
        used += snprintf(text + used, sizeof text - (size_t)used, "%s", first);
    } else {
        used += snprintf(text + used, sizeof text - (size_t)used, ", reservoir %s",
                         plw_cell_quantity(parts->reservoir_farads, PLW_UNIT_FARAD, 3).text);
    }
    for (size_t i = 0; i < parts->sections; i++) {
        const plw_filter_section *section = &parts->section[i];
        const plw_cell series = section->henries > 0 ? plw_cell_quantity(section->henries, PLW_UNIT_HENRY, 3)
                                                     : plw_cell_ohms(section->ohms);
        used += snprintf(text + used, sizeof text - (size_t)used, ", %s and %s", series.text,
                         plw_cell_quantity(section->farads, PLW_UNIT_FARAD, 3).text);
    }
    snprintf(text + used, sizeof text - (size_t)used, ", %s mains",
             plw_cell_quantity(parts->mains_hertz, PLW_UNIT_HERTZ, 2).text);
    plw_put_paragraph(out, INDENT, text);
}

static void off_load_line(FILE *out, const plw_supply_answer *a) {
    if (!isfinite(a->off_load_volts)) {
        fputs("OFF LOAD          not known: read it before capacitors are bought\n", out);
        if (a->has_transformer) {
            const double peak = sqrt(2.0) * a->transformer.off_load_rms_volts;
            char text[128];
            snprintf(text, sizeof text, "the transformer below gives %s, %s at high mains", plw_cell_volts(peak).text,
                     plw_cell_volts(a->mains_high_percent / 100.0 * peak).text);
            plw_put_paragraph(out, INDENT, text);
        }
        return;
    }
    if (isfinite(a->bled_volts)) {
        char text[160];
        snprintf(text, sizeof text, "%s with the bleeder drawing, %s with the mains %.3g %% up",
                 plw_cell_volts(a->bled_volts).text, plw_cell_volts(a->bled_high_volts).text,
                 a->mains_high_percent - 100.0);
        plw_put_paragraph(out, "OFF LOAD          ", text);
        snprintf(text, sizeof text, "should it open: %s and %s, which capacitors must stand",
                 plw_cell_volts(a->off_load_volts).text, plw_cell_volts(a->off_load_high_volts).text);
        plw_put_paragraph(out, INDENT, text);
        return;
    }
    fprintf(out, "OFF LOAD          %s; %s with the mains %.3g %% up: capacitors must stand it\n",
            plw_cell_volts(a->off_load_volts).text, plw_cell_volts(a->off_load_high_volts).text,
            a->mains_high_percent - 100.0);
}

static void source_lines(FILE *out, const plw_supply_answer *a) {
    if (a->supply->estimated) {
        const plw_source_estimate *e = &a->supply->estimate;
        fprintf(out, "SOURCE            %s in the conducting path, +/- %s, from %zu reading%s\n",
                plw_cell_ohms(e->path_ohms).text, plw_cell_quantity(e->path_ohms_error, PLW_UNIT_OHM, 2).text,
                e->readings, e->readings == 1 ? "" : "s");
    } else if (a->supply->has_winding) {
        fprintf(out, "SOURCE            %s in the conducting path%s\n", plw_cell_ohms(a->supply->parts.path_ohms).text,
                a->supply->copper_assumed ? ": none is told" : ", as told");
    } else if (a->supply->line.kind == PLW_SUPPLY_READINGS && a->supply->line.points > 1) {
        fprintf(out, "SOURCE            %s between the readings about this current\n",
                plw_cell_ohms(a->source_ohms).text);
    } else {
        return;
    }
    fprintf(out, INDENT "each further milliampere costs %s\n", plw_cell_volts(1e-3 * a->source_ohms).text);
}

static void ripple_lines(FILE *out, const plw_supply_answer *a) {
    const plw_rectifier_state *s = &a->state;
    if (!a->has_state) {
        return;
    }
    if (a->supply->reservoir_assumed) {
        fputs("RIPPLE            not known: tell the reservoir, e.g. --reservoir 47uF\n", out);
    } else {
        const plw_rectifier_node *output = &s->node[s->nodes - 1];
        fprintf(out, "RIPPLE            %s peak to peak at the output (%s RMS)\n",
                plw_cell_quantity(output->ripple_peak_to_peak_volts, PLW_UNIT_VOLT, 2).text,
                plw_cell_quantity(output->ripple_rms_volts, PLW_UNIT_VOLT, 2).text);
        for (size_t i = 0; i < s->nodes; i++) {
            fprintf(out, INDENT "capacitor %zu: %s peak to peak, carries %s RMS\n", i + 1,
                    plw_cell_quantity(s->node[i].ripple_peak_to_peak_volts, PLW_UNIT_VOLT, 2).text,
                    plw_cell_amps(s->node[i].capacitor_rms_amps).text);
        }
    }
    const bool halves = a->supply->parts.connection == PLW_FULL_WAVE;
    fprintf(out, "WINDING           %s RMS%s, %.3g VA; each diode peaks at %s\n",
            plw_cell_amps(s->winding_rms_amps).text, halves ? " in each half" : "",
            s->winding_rms_amps * a->supply->parts.winding_rms_volts * (halves ? 2.0 : 1.0),
            plw_cell_amps(s->diode_peak_amps).text);
}

static void hum_line(FILE *out, const plw_supply_finding *f) {
    if (f->hum == NULL || !(f->hum->ripple_rms_volts > 0.0)) {
        return;
    }
    fputs("HUM               ", out);
    if (isfinite(f->hum->speaker_rms_volts)) {
        fprintf(out, "%s at the speaker, ", plw_cell_quantity(f->hum->speaker_rms_volts, PLW_UNIT_VOLT, 2).text);
    }
    fprintf(out, "%.0f dB below full power\n", f->hum->decibels_below_full_power);
}

/* ---- ratings ----------------------------------------------------------------------------------------------------- */

void plw_put_supply_ratings(FILE *out, const plw_supply_answer *a) {
    if (a->checks_count == 0) {
        return;
    }
    fputs("\nRATINGS OF THE SUPPLY                        value              limit\n", out);
    for (size_t i = 0; i < a->checks_count; i++) {
        const plw_supply_check *check = &a->checks[i];
        char name[64];
        fprintf(out, "  %-38s", plw_supply_check_name(check, name, sizeof name));
        const plw_cell value = plw_cell_quantity(check->value, check->unit, 3);
        if (check->at_least) { /* a share of the least would read upside down */
            plw_put_right(out, value.text, 10);
            fputs("       ", out);
        } else {
            plw_put_share(out, value.text, 10, check->share_percent, check->ok);
        }
        fputs(check->ok ? "   " : " !!", out);
        plw_put_right(out, plw_cell_quantity(check->limit, check->unit, 3).text, 9);
        fprintf(out, "%s%s\n", check->at_least ? " or more" : "",
                check->when == PLW_SUPPLY_OFF_LOAD_HIGH ? " (off load)" : "");
    }
    if (!a->has_state) {
        return;
    }
    fprintf(out, "  %s\n",
            a->supply->rectifier_tube != NULL ? a->supply->rectifier_tube->rectifier.provenance.source
                                              : "silicon: of the 1N4007 class, 1 A and 1000 V");
}

/* ---- dummy load -------------------------------------------------------------------------------------------------- */

static void meaning_lines(FILE *out, const plw_supply_finding *f) {
    if (f->meanings == 0) {
        return;
    }
    fputs("\n  THE METER READS    supply with the stage    cathode resistor\n", out);
    for (size_t i = 0; i < f->meanings; i++) {
        const plw_dummy_meaning *m = &f->meaning[i];
        fputs(i == f->meanings / 2 ? "  > " : "    ", out);
        plw_put_right(out, plw_cell_volts(m->read_volts).text, 13);
        plw_put_right(out, plw_cell_volts(m->loaded_volts).text, 21);
        if (isfinite(m->ohms)) {
            plw_put_right(out, plw_cell_ohms(m->ohms).text, 20);
            fputc('\n', out);
        } else {
            plw_put_right(out, "none serves", 20);
            fputc('\n', out);
        }
    }
}

static void seconds_words(const plw_dummy_load *d, char *text, size_t size) {
    if (isinf(d->seconds_on)) {
        snprintf(text, size, "it may stay on as long as air reaches it");
    } else if (isfinite(d->seconds_on)) {
        snprintf(text, size, "no longer than %.0f s at a time", d->seconds_on);
    } else {
        snprintf(text, size, "no usual size is large enough: share the heat among several");
    }
}

/* The largest usual part that is smaller than the heat, for who has no larger one.  Ret: W; NaN: none */
static double smaller_part(double watts) {
    double share = 0.9;
    double rating = watts;
    while (share > 0.2 && !(rating < watts)) {
        rating = plw_resistor_rating_watts(share * watts, 1.0);
        share *= 0.8;
    }
    return rating < watts ? rating : (double)NAN;
}

static void dummy_lines(FILE *out, const plw_supply_finding *f) {
    const plw_supply_answer *a = f->supply;
    if (!a->has_dummy) {
        return;
    }
    const plw_dummy_load *d = &a->dummy;
    char seconds[96];
    seconds_words(d, seconds, sizeof seconds);
    fprintf(out, "\nDUMMY LOAD        %s", plw_cell_ohms(d->ohms).text);
    if (isfinite(d->rating_watts)) {
        fprintf(out, ", a %g W part", d->rating_watts);
    }
    fprintf(out, " (it turns %s into heat);\n" INDENT "%s\n", plw_cell_watts(d->watts).text, seconds);
    const double small = smaller_part(d->watts);
    if (isfinite(small)) {
        fprintf(out, INDENT "a %g W part no longer than %.0f s at a time\n", small,
                floor(plw_resistor_seconds(d->watts, small)));
    }
    fprintf(out, INDENT "the meter should then read %s (exact would be %s)\n", plw_cell_volts(d->expected_volts).text,
            plw_cell_quantity(d->exact_ohms, PLW_UNIT_OHM, 3).text);
    meaning_lines(out, f);
}

/* What the meter must stand across the output. */
static double meter_volts(const plw_supply_answer *a) {
    if (isfinite(a->off_load_high_volts)) {
        return a->off_load_high_volts;
    }
    const double peak = a->has_transformer ? sqrt(2.0) * a->transformer.off_load_rms_volts : 0.0;
    return fmax(1.5 * a->volts, a->mains_high_percent / 100.0 * peak);
}

static void put_step(FILE *out, int *number, const char *text) {
    char mark[16];
    snprintf(mark, sizeof mark, "%3d. ", ++*number);
    plw_put_paragraph(out, mark, text);
}

/* The test on the bench, each step with what keeps it safe. */
static void bench_lines(FILE *out, const plw_supply_finding *f) {
    const plw_supply_answer *a = f->supply;
    if (!a->has_dummy) {
        return;
    }
    char step[512];
    int number = 0;
    const bool live = a->supply->transformerless;
    fputs("\nON THE BENCH\n", out);
    if (live) {
        put_step(
            out, &number,
            "Feed the set from an isolating transformer and from nothing else: without one its chassis may stand at "
            "the mains. Never earth the chassis, nor clip an earthed instrument to it.");
    }
    put_step(out, &number,
             "Unplug. Let the capacitors discharge and verify with the meter, at each of them, that less than 60 V is "
             "left.");
    put_step(out, &number,
             live
                 ? "Leave every tube in its socket: one that is pulled opens the heater string. Lift the lead by which "
                   "this supply feeds plates and screens, so that nothing but the dummy load draws."
                 : "Take out every tube that this supply feeds, so that nothing but the dummy load draws; a rectifier "
                   "tube stays.");
    snprintf(step, sizeof step,
             "Clip %s across the output of the supply, and the meter, set for at least %s DC, across it; black lead on "
             "%s. Keep both hands off while it is on.",
             plw_cell_ohms(a->dummy.ohms).text, plw_cell_volts(meter_volts(a)).text,
             live ? "the minus of the reservoir, which need not be the chassis" : "the chassis");
    put_step(out, &number, step);
    snprintf(step, sizeof step,
             "Plug in, wait until the reading stands still, and read; about %s is expected. The mains voltage belongs "
             "to the reading: write it down too. Unplug.",
             plw_cell_volts(a->dummy.expected_volts).text);
    put_step(out, &number, step);
    snprintf(step, sizeof step,
             "The dummy load empties the capacitors: watch the meter fall below 60 V before a clip is moved. Then tell "
             "the reading: --reading VOLTS@%s",
             plw_resistor_code(a->dummy.ohms, (char[PLW_CELL_SIZE]){0}, PLW_CELL_SIZE));
    put_step(out, &number, step);
}

/* ---- bleeder, transformer, heaters ------------------------------------------------------------------------------- */

static void bleeder_lines(FILE *out, const plw_supply_answer *a) {
    if (!a->has_bleeder || !isfinite(a->bleeder.ohms)) {
        return;
    }
    fprintf(out, "\nBLEEDER           %s%s", plw_cell_ohms(a->bleeder.ohms).text,
            a->bleeder_fitted ? ", as fitted" : " across the output");
    if (isfinite(a->bleeder.rating_watts)) {
        fprintf(out, ", a %g W part", a->bleeder.rating_watts);
    }
    const double from = a->bleeder_fitted ? a->bled_high_volts : a->off_load_high_volts;
    fprintf(out, " (%s at high mains);\n" INDENT "from %s it falls to 60 V in %.0f s, nothing else drawing\n",
            plw_cell_watts(a->bleeder.watts).text, plw_cell_volts(from).text, ceil(a->bleeder.seconds_to_60_volts));
    if (a->bleeder.seconds_to_60_volts > 5.0) {
        plw_put_paragraph(out, INDENT, "IEC 60204-1 wants 5 s of machines; wait, and verify with the meter");
    }
}

static void transformer_lines(FILE *out, const plw_supply_answer *a) {
    if (!a->has_transformer) {
        return;
    }
    const plw_transformer *t = &a->transformer;
    const bool halves = t->supply.connection == PLW_FULL_WAVE;
    const char *each = halves ? " each half" : "";
    fprintf(out, "\nTRANSFORMER       %s at %s RMS%s, %s RMS off load, %.3g VA\n",
            plw_cell_volts(t->rated_rms_volts).text, plw_cell_amps(t->rms_amps).text, each,
            plw_cell_volts(t->off_load_rms_volts).text, t->secondary_va);
    fprintf(out, INDENT "gives %s at %s, with %s in the conducting path\n", plw_cell_volts(t->volts).text,
            plw_cell_amps(a->amps).text, plw_cell_ohms(t->path_ohms).text);
    fprintf(out, INDENT "nearest usual winding: %s%s, which gives %s\n", plw_cell_volts(t->usual_rms_volts).text, each,
            plw_cell_volts(t->usual_volts).text);
    if (!a->supply->has_parts) {
        fputs(INDENT "for silicon, full-wave, 47 \xC2\xB5"
                     "F, 50 Hz: none was told\n",
              out);
    }
}

static void heater_lines(FILE *out, const plw_supply_finding *f) {
    const plw_tube *rectifier = f->supply->supply->rectifier_tube;
    if (f->stage == NULL && rectifier == NULL) {
        return;
    }
    fputs("\nHEATERS           ", out);
    if (f->stage != NULL) {
        const plw_tube *tube = f->stage->tube;
        const double amps = tube->heater_amps * (double)f->stage->parallel;
        fprintf(out, "%s: %s, %s", plw_stage_tube_type(f->stage), plw_cell_volts(tube->heater_volts).text,
                plw_cell_amps(amps).text);
    }
    if (rectifier != NULL) {
        fprintf(out, "%s%s: %s, %s", f->stage != NULL ? "; " : "", rectifier->type,
                plw_cell_volts(rectifier->heater_volts).text, plw_cell_amps(rectifier->heater_amps).text);
    }
    fputc('\n', out);
    if (f->supply->supply->transformerless) {
        plw_put_paragraph(out, INDENT,
                          "heater to cathode: not known: the string may stand at the mains peak, so the tube nearest "
                          "to it must bear that");
    }
}

static void caution_lines(FILE *out, const plw_supply_finding *f) {
    char lines[PLW_CAUTIONS_MOST][PLW_CAUTION_SIZE];
    size_t own = 0;
    const size_t count = plw_supply_cautions(f, lines, PLW_CAUTIONS_MOST, &own);
    for (size_t index = 0; index < count; index++) {
        if (index == 0 || index == own) {
            fputs(index < own ? "\nWARNINGS\n" : "\nCAUTIONS\n", out);
        }
        plw_put_paragraph(out, index < own ? "  ! " : "  - ", lines[index]);
    }
}

plw_status plw_report_supply_text(const plw_supply_finding *finding, char **text, plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    FILE *out = buffer.file;
    const plw_supply_answer *a = finding->supply;
    title(out, finding);
    if (a->supply->has_winding) {
        parts_line(out, a);
    }
    off_load_line(out, a);
    source_lines(out, a);
    ripple_lines(out, a);
    hum_line(out, finding);
    dummy_lines(out, finding);
    plw_put_supply_ratings(out, a);
    bleeder_lines(out, a);
    transformer_lines(out, a);
    heater_lines(out, finding);
    bench_lines(out, finding);
    caution_lines(out, finding);
    return plw_text_end(&buffer, PLW_OK, text, error);
}
