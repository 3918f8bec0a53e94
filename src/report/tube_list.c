/* The catalogue as a list, and the types near to one with what would change.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "platewright/report.h"
#include "platewright/tube_report.h"
#include "report/layout.h"
#include "report/text_buffer.h"

enum { WORDS_SIZE = 1024, HEAD_SIZE = 256, NUMBER_SIZE = 32, NAMES_ROOM = 4 };

/* ---- the list ---------------------------------------------------------------------------------------------------- */

/* A plain number without needless zeros, "-" when it is not known. */
static void put_number(FILE *out, double value, int digits, int width) {
    char text[NUMBER_SIZE] = "-";
    if (isfinite(value)) {
        snprintf(text, sizeof text, "%.*g", digits, value);
        char *comma = strchr(text, ','); /* of some locales */
        if (comma != NULL) {
            *comma = '.';
        }
    }
    plw_put_right(out, text, width);
}

static void put_percent(FILE *out, double value) {
    put_number(out, isfinite(value) ? round(10.0 * value) / 10.0 : value, 6, 6);
}

/* Equivalents of a type, or whose curves a variant has: behind the line where they fit, else below it. */
static void put_names(FILE *out, plw_tube_entry entry) {
    const plw_tube *tube = entry.tube;
    char names[HEAD_SIZE] = "";
    if (entry.variant >= 0) {
        snprintf(names, sizeof names, "%.40s", tube->type);
    }
    for (size_t i = 0; entry.variant < 0 && i < tube->equivalents_count; i++) {
        const size_t used = strlen(names);
        snprintf(names + used, sizeof names - used, "%s%.40s", i == 0 ? "" : ", ", tube->equivalents[i]);
    }
    const char *mark = entry.variant >= 0 ? "as " : "= ";
    if (names[0] == '\0') {
        fputc('\n', out);
    } else if (strlen(mark) + strlen(names) <= NAMES_ROOM) {
        fprintf(out, "  %s%s\n", mark, names);
    } else {
        fprintf(out, "\n         %s%s\n", mark, names);
    }
}

static void put_line(FILE *out, plw_tube_entry entry) {
    const plw_tube *tube = entry.tube;
    const plw_ratings *ratings = plw_tube_entry_ratings(entry);
    const double unknown = (double)NAN;
    fprintf(out, "%-8s %-9s %-19s", plw_tube_entry_type(entry), plw_tube_kind_name(tube->kind),
            tube->base == NULL ? "-" : tube->base);
    put_number(out, ratings == NULL ? unknown : ratings->plate_watts, 4, 6);
    put_number(out, ratings == NULL ? unknown : ratings->screen_watts, 4, 7);
    put_number(out, plw_tube_entry_heater_volts(entry), 4, 5);
    put_number(out, plw_tube_entry_heater_amps(entry), 4, 6);
    put_percent(out, tube->has_model ? tube->model.fit_error.plate_current_percent : unknown);
    put_percent(out, tube->has_model ? tube->model.left_out_error.plate_current_percent : unknown);
    put_names(out, entry);
}

plw_status plw_tubes_text(const plw_tube_entry *entries, size_t count, char **text, plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    fputs("                                        plate screen     heater model  left\n"
          "type     kind      base                     W      W    V     A err % out %\n",
          buffer.file);
    for (size_t i = 0; i < count; i++) {
        put_line(buffer.file, entries[i]);
    }
    fputs("\nmodel err: median error of the model's plate current against the published rows;\n"
          "left out: the same for rows that the fit was not shown. '-': not known.\n"
          "'=': other names of the type; 'as': a variant with the curves of that type.\n",
          buffer.file);
    return plw_text_end(&buffer, PLW_OK, text, error);
}

/* ---- what would change ------------------------------------------------------------------------------------------- */

/* Changes smaller than these are not worth a word: 5 %, and for the softer figures 10 %. */
#define WORTH 1.05
#define WORTH_SOFT 1.10

typedef struct {
    char *text;
    size_t size;
} words;

static void say(const words *w, const char *format, ...) PLW_PRINTF(2, 3);
static void say(const words *w, const char *format, ...) {
    const size_t used = strlen(w->text);
    if (used + 1 >= w->size) {
        return;
    }
    snprintf(w->text + used, w->size - used, "%s", used == 0 ? "" : "; ");
    const size_t joined = strlen(w->text);
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(w->text + joined, w->size - joined, format, arguments);
    va_end(arguments);
}

static bool differs(double ratio, double worth) {
    return isfinite(ratio) && (ratio > worth || ratio < 1.0 / worth);
}

static void say_of_signal(const words *w, const plw_nearness *n) {
    if (differs(n->ratio[PLW_NEAR_BIAS], WORTH_SOFT)) {
        say(w, "biased at %s instead of %s", plw_cell_quantity(n->grid_volts, PLW_UNIT_VOLT, 3).text,
            plw_cell_quantity(n->wanted_grid_volts, PLW_UNIT_VOLT, 3).text);
    }
    if (differs(n->ratio[PLW_NEAR_DRIVE], WORTH_SOFT)) {
        say(w, "needs %.2g times the drive", n->ratio[PLW_NEAR_DRIVE]);
    }
    if (differs(n->ratio[PLW_NEAR_ZERO_BIAS], WORTH_SOFT)) {
        say(w, "can pass %.2g times the current at zero bias", n->ratio[PLW_NEAR_ZERO_BIAS]);
    }
    if (differs(n->ratio[PLW_NEAR_MU], WORTH_SOFT)) {
        say(w, "%.2g times the %s", n->ratio[PLW_NEAR_MU],
            isfinite(n->screen_volts) ? "amplification from grid to screen" : "amplification factor");
    }
}

static void say_of_ratings(const words *w, const plw_near_tube *near) {
    const plw_ratings *ratings = plw_tube_entry_ratings(near->entry);
    const plw_nearness *n = &near->nearness;
    if (ratings == NULL) {
        return;
    }
    if (differs(n->ratio[PLW_NEAR_PLATE_WATTS], WORTH)) {
        say(w, "plate rated %s, %.2g times as much", plw_cell_quantity(ratings->plate_watts, PLW_UNIT_WATT, 3).text,
            n->ratio[PLW_NEAR_PLATE_WATTS]);
    } else if (isnan(n->ratio[PLW_NEAR_PLATE_WATTS])) {
        say(w, "plate dissipation not known of both");
    }
    if (n->ratio[PLW_NEAR_PLATE_VOLTS] < 1.0 / WORTH) {
        say(w, "its plate stands only %s", plw_cell_quantity(ratings->plate_volts, PLW_UNIT_VOLT, 3).text);
    }
    if (n->ratio[PLW_NEAR_SCREEN_VOLTS] < 1.0 / WORTH) {
        say(w, "its screen stands only %s", plw_cell_quantity(ratings->screen_volts, PLW_UNIT_VOLT, 3).text);
    }
}

static void say_of_rectifier(const words *w, const plw_near_tube *near) {
    const plw_rectifier_data *data = &near->entry.tube->rectifier;
    const double *ratio = near->nearness.ratio;
    if (differs(ratio[PLW_NEAR_OUTPUT_AMPS], WORTH)) {
        say(w, "gives up to %s, %.2g times as much", plw_cell_quantity(data->output_amps, PLW_UNIT_AMPERE, 3).text,
            ratio[PLW_NEAR_OUTPUT_AMPS]);
    }
    if (differs(ratio[PLW_NEAR_INVERSE_VOLTS], WORTH)) {
        say(w, "stands %s in the inverse direction",
            plw_cell_quantity(data->peak_inverse_volts, PLW_UNIT_VOLT, 4).text);
    }
    if (differs(ratio[PLW_NEAR_DROP], WORTH_SOFT)) {
        say(w, "drops %.2g times as much at the same current", ratio[PLW_NEAR_DROP]);
    }
}

static void say_of_socket(const words *w, plw_tube_entry wanted, const plw_near_tube *near) {
    const plw_nearness *n = &near->nearness;
    const double amps = plw_tube_entry_heater_amps(near->entry);
    const char *heater = near->entry.tube->directly_heated ? "filament" : "heater";
    if (differs(n->ratio[PLW_NEAR_HEATER_VOLTS], WORTH)) {
        say(w, "%s %s %s", heater, plw_cell_quantity(plw_tube_entry_heater_volts(near->entry), PLW_UNIT_VOLT, 3).text,
            plw_cell_quantity(amps, PLW_UNIT_AMPERE, 3).text);
    } else if (differs(n->ratio[PLW_NEAR_HEATER_AMPS], WORTH)) {
        say(w, "%s takes %s instead of %s", heater, plw_cell_quantity(amps, PLW_UNIT_AMPERE, 3).text,
            plw_cell_quantity(plw_tube_entry_heater_amps(wanted), PLW_UNIT_AMPERE, 3).text);
    }
    if (near->entry.tube->directly_heated != wanted.tube->directly_heated) {
        say(w, "%s", near->entry.tube->directly_heated ? "directly heated" : "indirectly heated");
    }
    if (n->base == PLW_BASE_OTHER) {
        say(w, "another base (%s)", near->entry.tube->base == NULL ? "not known" : near->entry.tube->base);
    } else if (n->base == PLW_BASE_OTHER_PINS) {
        say(w, "the same base wired otherwise");
    } else if (n->base == PLW_BASE_PINS_UNKNOWN) {
        say(w, "the same base, its pins to be compared");
    }
}

const char *plw_nearness_words(plw_tube_entry wanted, const plw_near_tube *near, char *text, size_t size) {
    const words w = {text, size};
    text[0] = '\0';
    if (near->entry.tube->kind == PLW_KIND_RECTIFIER) {
        say_of_rectifier(&w, near);
    } else {
        say_of_signal(&w, &near->nearness);
        say_of_ratings(&w, near);
    }
    say_of_socket(&w, wanted, near);
    return text;
}

/* ---- types like one ---------------------------------------------------------------------------------------------- */

static void put_like_head(FILE *out, plw_tube_entry wanted, const plw_near_tube *near) {
    char head[HEAD_SIZE];
    const plw_nearness *n = &near->nearness;
    fprintf(out, "Like %s (%s, %s)\n", plw_tube_entry_type(wanted), plw_tube_kind_name(wanted.tube->kind),
            wanted.tube->base == NULL ? "base not known" : wanted.tube->base);
    if (isfinite(n->cathode_amps)) {
        char screen[64] = "";
        if (isfinite(n->screen_volts)) {
            snprintf(screen, sizeof screen, ", %s on the screen",
                     plw_cell_quantity(n->screen_volts, PLW_UNIT_VOLT, 3).text);
        }
        snprintf(head, sizeof head,
                 "compared by their laws at %s on the plate%s, %s from the cathode, where it is "
                 "biased at %s.",
                 plw_cell_quantity(n->plate_volts, PLW_UNIT_VOLT, 3).text, screen,
                 plw_cell_quantity(n->cathode_amps, PLW_UNIT_AMPERE, 3).text,
                 plw_cell_quantity(n->wanted_grid_volts, PLW_UNIT_VOLT, 3).text);
        plw_put_paragraph(out, "", head);
    }
    fputs("\n  away  type      what would change\n", out);
}

static void put_like_line(FILE *out, plw_tube_entry wanted, const plw_near_tube *near) {
    char mark[HEAD_SIZE];
    char text[WORDS_SIZE];
    plw_nearness_words(wanted, near, text, sizeof text);
    int distance = (int)lround(10.0 * near->nearness.distance);
    snprintf(mark, sizeof mark, "%4d.%d  %-9.40s ", distance / 10, distance % 10, plw_tube_entry_type(near->entry));
    plw_put_paragraph(out, mark, text[0] == '\0' ? "nothing, by what is known here" : text);
}

plw_status plw_tubes_names(const plw_tube_entry *entries, size_t count, char **text, plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    for (size_t i = 0; i < count; i++) {
        const plw_tube *tube = entries[i].tube;
        fprintf(buffer.file, "%s\n", plw_tube_entry_type(entries[i]));
        for (size_t k = 0; entries[i].variant < 0 && k < tube->equivalents_count; k++) {
            fprintf(buffer.file, "%s\n", tube->equivalents[k]);
        }
    }
    return plw_text_end(&buffer, PLW_OK, text, error);
}

plw_status plw_tubes_like_text(plw_tube_entry wanted, const plw_near_tube *near, size_t count, char **text,
                               plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    if (count == 0) {
        fprintf(buffer.file, "No type of the catalogue is near %s.\n", plw_tube_entry_type(wanted));
    } else {
        put_like_head(buffer.file, wanted, &near[0]);
    }
    for (size_t i = 0; i < count; i++) {
        put_like_line(buffer.file, wanted, &near[i]);
    }
    if (count > 0) {
        fputc('\n', buffer.file);
        plw_put_paragraph(buffer.file, "",
                          "away: 0 alike in all that is compared; 1 one figure off by as much as an amplifier commonly "
                          "bears; from 3 on no substitute. Bias, load and ratings are to be worked out anew with "
                          "platewright design.");
    }
    return plw_text_end(&buffer, PLW_OK, text, error);
}
