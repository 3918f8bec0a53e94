/* The catalogue in words: a list of tubes, and all that is known of one.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/tube_report.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "report/layout.h"
#include "report/text_buffer.h"
#include "report/tube_text.h"

enum { CELL = 40, LINE = 512, WIDTH = 80 };

/* A plain number, "-" when it is not known. */
static plw_cell number(double value, int decimals) {
    plw_cell c = {"-"};
    if (isfinite(value)) {
        snprintf(c.text, sizeof c.text, "%.*f", decimals, value);
        char *comma = strchr(c.text, ','); /* of some locales */
        if (comma != NULL) {
            *comma = '.';
        }
    }
    return c;
}

/* A number without needless zeros. */
static plw_cell short_number(double value) {
    plw_cell c = number(value, 2);
    size_t length = strlen(c.text);
    if (strchr(c.text, '.') != NULL) {
        while (c.text[length - 1] == '0') {
            c.text[--length] = '\0';
        }
        if (c.text[length - 1] == '.') {
            c.text[length - 1] = '\0';
        }
    }
    return c;
}

static void append(char *line, const char *text) {
    const size_t used = strlen(line);
    snprintf(line + used, LINE - used, "%s", text);
}

/* Words up to the width of the screen; further lines begin with `indent`. */
static void paragraph(FILE *out, const char *mark, const char *indent, const char *text) {
    plw_put_hanging(out, WIDTH, mark, indent, text);
}

/* ---- sources ----------------------------------------------------------------------------------------------------- */

/* The sources met so far, numbered in order. */
typedef struct {
    const plw_provenance *provenance;
} source;

typedef struct {
    source *seen;
    size_t count, room;
} source_list;

static bool same_source(const plw_provenance *one, const plw_provenance *other) {
    return strcmp(one->source, other->source) == 0 && one->how == other->how && one->confidence == other->confidence;
}

/* "[3]"; the list has room for all there can be. */
static plw_cell cite(source_list *sources, const plw_provenance *provenance) {
    plw_cell c = {""};
    size_t index = 0;
    if (provenance->source == NULL) {
        return c;
    }
    while (index < sources->count && !same_source(sources->seen[index].provenance, provenance)) {
        index++;
    }
    if (index == sources->count && sources->count < sources->room) {
        sources->seen[sources->count++].provenance = provenance;
    }
    snprintf(c.text, sizeof c.text, "[%zu]", index + 1);
    return c;
}

static const char *how_words(plw_how how) {
    if (how == PLW_HOW_TOLD) {
        return "told";
    }
    return how == PLW_HOW_READ ? "read there" : "from memory";
}

static void put_sources(FILE *out, const source_list *sources) {
    fputs("\nSources\n", out);
    for (size_t i = 0; i < sources->count; i++) {
        const plw_provenance *provenance = sources->seen[i].provenance;
        char mark[CELL];
        char line[LINE];
        snprintf(mark, sizeof mark, "  [%zu] ", i + 1);
        snprintf(line, sizeof line, "%s (%s, confidence %s)", provenance->source, how_words(provenance->how),
                 plw_confidence_name(provenance->confidence));
        paragraph(out, mark, "      ", line);
    }
}

/* ---- one tube ---------------------------------------------------------------------------------------------------- */

/* Equivalents, then variants. */
static void other_names(const plw_tube *tube, char line[LINE]) {
    line[0] = '\0';
    for (size_t i = 0; i < tube->equivalents_count + tube->variants_count; i++) {
        append(line, i == 0 ? "" : ", ");
        append(line,
               i < tube->equivalents_count ? tube->equivalents[i] : tube->variants[i - tube->equivalents_count].type);
    }
}

static void put_heading(FILE *out, const plw_tube *tube, source_list *sources) {
    char names[LINE];
    char line[LINE] = "";
    other_names(tube, names);
    fprintf(out, "%s: %s, %s base%s%s\n", tube->type, plw_tube_kind_name(tube->kind),
            tube->base == NULL ? "-" : tube->base, names[0] == '\0' ? "" : "; also ", names);
    fprintf(out, "  heater %s V, %s A%s %s\n", short_number(tube->heater_volts).text,
            short_number(tube->heater_amps).text, tube->directly_heated ? ", directly heated" : "",
            cite(sources, &tube->heater_provenance).text);
    if (tube->pins_count == 0) {
        return;
    }
    for (size_t i = 0; i < tube->pins_count; i++) {
        char pin[CELL];
        snprintf(pin, sizeof pin, "%s%d %.30s", i == 0 ? "pins " : ", ", tube->pins[i].number, tube->pins[i].electrode);
        append(line, pin);
    }
    append(line, " ");
    append(line, cite(sources, &tube->pins_provenance).text);
    paragraph(out, "  ", "    ", line);
}

/* Number and unit without a space, so that no line break parts them. */
static void add_limit(char line[LINE], const char *name, double value, plw_unit unit) {
    if (isfinite(value)) {
        plw_cell c = short_number(value);
        if (unit == PLW_UNIT_OHM) {
            plw_resistor_code(value, c.text, sizeof c.text);
        }
        append(line, line[0] == '\0' ? "" : ", ");
        append(line, name);
        append(line, " ");
        append(line, c.text);
        append(line, unit == PLW_UNIT_VOLT ? "V" : "");
        append(line, unit == PLW_UNIT_WATT ? "W" : "");
    }
}

static void put_ratings(FILE *out, const plw_ratings *ratings, source_list *sources) {
    char line[LINE] = "";
    fprintf(out, "  %s (%s) %s\n", ratings->service, plw_rating_system_name(ratings->system),
            cite(sources, &ratings->provenance).text);
    add_limit(line, "plate", ratings->plate_volts, PLW_UNIT_VOLT);
    add_limit(line, "plate", ratings->plate_watts, PLW_UNIT_WATT);
    append(line, ratings->plate_watts_unpublished ? ", plate dissipation not published" : "");
    add_limit(line, "screen", ratings->screen_volts, PLW_UNIT_VOLT);
    add_limit(line, "screen", ratings->screen_watts, PLW_UNIT_WATT);
    add_limit(line, "screen at full drive", ratings->screen_watts_full_drive, PLW_UNIT_WATT);
    add_limit(line, "plate and screen", ratings->total_watts, PLW_UNIT_WATT);
    if (isfinite(ratings->cathode_amps)) {
        append(line, line[0] == '\0' ? "cathode " : ", cathode ");
        append(line, short_number(1000.0 * ratings->cathode_amps).text);
        append(line, "mA");
    }
    add_limit(line, "grid resistor with cathode bias", ratings->grid_ohms_cathode_bias, PLW_UNIT_OHM);
    add_limit(line, "with fixed bias", ratings->grid_ohms_fixed_bias, PLW_UNIT_OHM);
    add_limit(line, "heater to cathode", ratings->heater_cathode_volts, PLW_UNIT_VOLT);
    paragraph(out, "    ", "    ", line);
    if (ratings->provenance.note != NULL) {
        paragraph(out, "    note: ", "    ", ratings->provenance.note);
    }
}

static void put_all_ratings(FILE *out, const plw_tube *tube, source_list *sources) {
    if (tube->ratings_count > 0) {
        fputs("\nRatings\n", out);
    }
    for (size_t i = 0; i < tube->ratings_count; i++) {
        put_ratings(out, &tube->ratings[i], sources);
    }
    for (size_t i = 0; i < tube->variants_count; i++) {
        fprintf(out, "\nRatings of the variant %s\n", tube->variants[i].type);
        for (size_t k = 0; k < tube->variants[i].ratings_count; k++) {
            put_ratings(out, &tube->variants[i].ratings[k], sources);
        }
    }
}

static void put_rectifier(FILE *out, const plw_tube *tube, source_list *sources) {
    const plw_rectifier_data *data = &tube->rectifier;
    char line[LINE] = "";
    fprintf(out, "\nLimits %s\n", cite(sources, &data->provenance).text);
    add_limit(line, "peak inverse", data->peak_inverse_volts, PLW_UNIT_VOLT);
    add_limit(line, "each plate RMS", data->plate_rms_volts, PLW_UNIT_VOLT);
    append(line, ", peak ");
    append(line, plw_cell_quantity(data->peak_plate_amps, PLW_UNIT_AMPERE, 3).text);
    append(line, " each plate, output ");
    append(line, plw_cell_quantity(data->output_amps, PLW_UNIT_AMPERE, 3).text);
    if (isfinite(data->most_reservoir_farads)) {
        append(line, ", reservoir up to ");
        append(line, plw_cell_quantity(data->most_reservoir_farads, PLW_UNIT_FARAD, 2).text);
    }
    add_limit(line, "in each plate's path at least", data->least_supply_ohms, PLW_UNIT_OHM);
    paragraph(out, "    ", "    ", line);
    if (isfinite(data->drop_volts)) {
        fprintf(out, "    drop %s V at %s %s\n", short_number(data->drop_volts).text,
                plw_cell_quantity(data->drop_amps, PLW_UNIT_AMPERE, 3).text,
                cite(sources, &data->drop_provenance).text);
    }
}

static void put_rows(FILE *out, const plw_tube *tube, source_list *sources) {
    if (tube->rows_count == 0) {
        return;
    }
    fputs("\nPublished rows\n"
          "              plate screen   grid cathode plate screen         power   thd\n"
          "  connection      V      V      V     ohm    mA     mA    load     W     %  from\n",
          out);
    for (size_t i = 0; i < tube->rows_count; i++) {
        const plw_row *row = &tube->rows[i];
        fprintf(out, "  %-11s", plw_connection_name(row->connection));
        plw_put_right(out, short_number(row->plate_volts).text, 6);
        plw_put_right(out, short_number(row->screen_volts).text, 7);
        plw_put_right(out, short_number(row->grid_volts).text, 7);
        plw_put_right(out, short_number(row->cathode_resistor_ohms).text, 8);
        plw_put_right(out, short_number(1000.0 * row->plate_amps).text, 6);
        plw_put_right(out, short_number(1000.0 * row->screen_amps).text, 7);
        plw_put_right(out, plw_cell_quantity(row->load_ohms, PLW_UNIT_OHM, 3).text, 8);
        plw_put_right(out, short_number(row->power_watts).text, 6);
        plw_put_right(out, short_number(row->thd_percent).text, 6);
        fprintf(out, "  %s\n", cite(sources, &row->provenance).text);
    }
}

/* What is known of the errors; a tube without a screen says nothing of screen current. */
static void put_errors(FILE *out, const char *name, const plw_model_errors *errors) {
    const struct {
        const char *figure, *unit;
        double value;
    } known[] = {{"plate", "%", errors->plate_current_percent},
                 {"screen", "%", errors->screen_current_percent},
                 {"power", "%", errors->power_percent},
                 {"distortion", "points", errors->distortion_points}};
    const char *between = "";
    fprintf(out, "  %-9s ", name);
    for (size_t i = 0; i < sizeof known / sizeof known[0]; i++) {
        if (isfinite(known[i].value)) {
            fprintf(out, "%s%s %s %s", between, known[i].figure, number(known[i].value, 1).text, known[i].unit);
            between = ", ";
        }
    }
    fprintf(out, "%s\n", between[0] == '\0' ? "-" : "");
}

void plw_put_model(FILE *out, const plw_tube *tube) {
    if (tube->kind == PLW_KIND_RECTIFIER) {
        return;
    }
    if (!tube->has_model) {
        fputs("\nModel: none fitted yet\n", out);
        return;
    }
    const plw_model *model = &tube->model;
    char line[LINE] = "";
    fprintf(out, "\nModel: %s, fitted to %zu row%s and %zu point%s; median errors\n", plw_law_name(model->law.kind),
            model->rows_fitted, model->rows_fitted == 1 ? "" : "s", model->points_fitted,
            model->points_fitted == 1 ? "" : "s");
    put_errors(out, "fitted", &model->fit_error);
    put_errors(out, "left out", &model->left_out_error);
    for (size_t i = 0; i < plw_law_coefficient_count(model->law.kind); i++) {
        char part[4 * CELL];
        const double error = 100.0 * model->relative_error[i];
        snprintf(part, sizeof part, "%s%s %s%s%s%s", i == 0 ? "" : ", ", plw_law_coefficient_name(model->law.kind, i),
                 plw_cell_quantity(model->law.coefficient[i], PLW_UNIT_NONE, 4).text, isfinite(error) ? " +/- " : "",
                 isfinite(error) ? number(error, 0).text : "", isfinite(error) ? " %" : "");
        append(line, part);
    }
    paragraph(out, "  ", "    ", line);
}

plw_status plw_tube_text(const plw_tube *tube, char **text, plw_error *error) {
    size_t room = 4 + tube->ratings_count + tube->rows_count + tube->points_count;
    for (size_t i = 0; i < tube->variants_count; i++) {
        room += tube->variants[i].ratings_count;
    }
    source *seen = calloc(room, sizeof *seen);
    source_list sources = {.seen = seen, .room = room};
    plw_text_buffer buffer;
    if (seen == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory for a report");
    }
    plw_status status = plw_text_begin(&buffer, error);
    if (status == PLW_OK) {
        put_heading(buffer.file, tube, &sources);
        if (tube->kind == PLW_KIND_RECTIFIER) {
            put_rectifier(buffer.file, tube, &sources);
        }
        put_all_ratings(buffer.file, tube, &sources);
        put_rows(buffer.file, tube, &sources);
        plw_put_model(buffer.file, tube);
        put_sources(buffer.file, &sources);
        status = plw_text_end(&buffer, PLW_OK, text, error);
    }
    free(seen);
    return status;
}
