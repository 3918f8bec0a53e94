/* A fit in words: coefficients, what the data leave open, what does not fit together, and every printed figure beside
 * the model's.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <string.h>

#include "platewright/tube_report.h"
#include "report/layout.h"
#include "report/text_buffer.h"
#include "report/tube_text.h"

enum { TEXT = 512, NAME = 112 };

/* The unit of a quantity, by the words in its name. */
static plw_unit unit_of(const char *quantity) {
    static const struct {
        const char *word;
        plw_unit unit;
    } words[] = {{"current", PLW_UNIT_AMPERE}, {"gm", PLW_UNIT_SIEMENS},         {"resistance", PLW_UNIT_OHM},
                 {"power", PLW_UNIT_WATT},     {"distortion", PLW_UNIT_PERCENT}, {"harmonic", PLW_UNIT_PERCENT}};
    for (size_t i = 0; i < sizeof words / sizeof words[0]; i++) {
        if (strstr(quantity, words[i].word) != NULL) {
            return words[i].unit;
        }
    }
    return PLW_UNIT_NONE;
}

/* The printed figures of a coefficient, for what it does in the law and which rows would show it. */
static const char *shown_by(const char *coefficient) {
    static const struct {
        const char *coefficient, *by;
    } table[] = {
        {"mu", "currents at several plate and grid volts, or mu, or gm and plate resistance"},
        {"exponent", "currents from small to large"},
        {"kg1", "a plate current"},
        {"kp", "currents near cut-off, or gm at a small current"},
        {"kvb", "currents at low plate volts and small bias"},
        {"penetration", "a plate resistance, or plate currents far apart in plate volts"},
        {"knee", "power and distortion at full drive, or currents below the knee"},
        {"division", "a screen current at rest"},
        {"capture", "a screen current at full drive, or screen currents below the knee"},
        {"foot-growth", "currents near cut-off at several plate volts"},
        {"contact-volts", "currents at several grid volts with the screen held"},
    };
    for (size_t i = 0; i < sizeof table / sizeof table[0]; i++) {
        if (strcmp(table[i].coefficient, coefficient) == 0) {
            return table[i].by;
        }
    }
    return "more rows";
}

/* "row 3 (250 V, grid -12.5 V)": the number counts as in the tube file. */
static const char *line_name(const plw_tube *tube, bool is_row, size_t index, char name[NAME]) {
    double plate = (double)NAN;
    double grid = (double)NAN;
    double ohms = (double)NAN;
    if (is_row) {
        plate = tube->rows[index].plate_volts;
        grid = tube->rows[index].grid_volts;
        ohms = tube->rows[index].cathode_resistor_ohms;
    } else {
        plate = tube->points[index].plate_volts;
        grid = tube->points[index].grid_volts;
    }
    const bool by_resistor = isnan(grid) && isfinite(ohms);
    snprintf(name, NAME, "%s %zu (%s, %s %s)", is_row ? "row" : "point", index + 1, plw_cell_volts(plate).text,
             by_resistor ? "cathode" : "grid", by_resistor ? plw_cell_ohms(ohms).text : plw_cell_volts(grid).text);
    return name;
}

static void put_undetermined(FILE *out, const plw_fit *fit) {
    const plw_law_kind kind = fit->model.law.kind;
    bool any = false;
    for (size_t i = 0; i < plw_law_coefficient_count(kind); i++) {
        if (isfinite(fit->model.relative_error[i]) || fit->model.law.coefficient[i] == 0.0) {
            continue;
        }
        char text[TEXT];
        const char *name = plw_law_coefficient_name(kind, i);
        fputs(any ? "" : "\nNot determined by these data; what is usual for such a tube stands in\n", out);
        snprintf(text, sizeof text, "%s: would show in %s", name, shown_by(name));
        plw_put_paragraph(out, "  ", text);
        any = true;
    }
}

static void put_correlations(FILE *out, const plw_fit *fit) {
    if (fit->correlations > 0) {
        fputs("\nHardly told apart by these data: one may be off if the other makes up for it\n", out);
    }
    for (size_t i = 0; i < fit->correlations; i++) {
        const plw_fit_correlation *c = &fit->correlation[i];
        fprintf(out, "  %s and %s (correlation ", plw_law_coefficient_name(fit->model.law.kind, c->first),
                plw_law_coefficient_name(fit->model.law.kind, c->second));
        plw_text_number(out, c->correlation, 3, "-");
        fputs(")\n", out);
    }
}

static plw_cell figure(const char *quantity, double value) {
    return plw_cell_quantity(value, unit_of(quantity), 3);
}

static void put_outliers(FILE *out, const plw_tube *tube, const plw_fit *fit) {
    if (fit->outliers > 0) {
        fputs("\nStands out from all the rest: look it up again, or leave it out\n", out);
    }
    for (size_t i = 0; i < fit->outliers; i++) {
        const plw_fit_outlier *o = &fit->outlier[i];
        char name[NAME];
        char text[TEXT];
        snprintf(text, sizeof text, "%s: %s %s; by the others %s, %.0f times its uncertainty away",
                 line_name(tube, o->is_row, o->index, name), o->quantity, figure(o->quantity, o->printed).text,
                 figure(o->quantity, o->predicted).text, fabs(o->scaled));
        plw_put_paragraph(out, "  ", text);
    }
}

static void put_contradictions(FILE *out, const plw_tube *tube, const plw_fit *fit) {
    if (fit->contradictions > 0) {
        fputs("\nCannot both be true\n", out);
    }
    for (size_t i = 0; i < fit->contradictions; i++) {
        const plw_fit_contradiction *c = &fit->contradiction[i];
        char first[NAME];
        char second[NAME];
        char text[TEXT];
        snprintf(text, sizeof text, "%s and %s: %s %s and %s%s", line_name(tube, c->is_row[0], c->index[0], first),
                 line_name(tube, c->is_row[1], c->index[1], second), c->quantity,
                 figure(c->quantity, c->printed[0]).text, figure(c->quantity, c->printed[1]).text,
                 c->same_conditions ? " under the same conditions" : ": less current, though no voltage is lower");
        plw_put_paragraph(out, "  ", text);
    }
}

/* Before anything else: what makes the coefficients below doubtful. */
static void put_warnings(FILE *out, const plw_tube *tube, const plw_fit *fit) {
    if (!plw_fit_is_gross(fit)) {
        return;
    }
    fputs("\nWARNINGS\n", out);
    char text[TEXT];
    for (size_t i = 0; i < fit->residuals; i++) {
        const plw_residual *r = &fit->residual[i];
        char name[NAME];
        if (!plw_residual_is_gross(r)) {
            continue;
        }
        snprintf(text, sizeof text,
                 "cannot be right together: %s %s of %s and the others, which make it %s, %.0f times "
                 "its uncertainty away",
                 line_name(tube, r->is_row, r->index, name), r->quantity, figure(r->quantity, r->printed).text,
                 figure(r->quantity, r->predicted).text, fabs(r->scaled));
        plw_put_paragraph(out, "  ! ", text);
    }
    snprintf(text, sizeof text,
             "the errors of the coefficients are %.1f times as wide as the uncertainties of the figures "
             "alone would make them; look the figures up again before you trust this model",
             fit->error_scale);
    plw_put_paragraph(out, "  ! ", text);
}

/* Less than gross, yet farther off than their uncertainties admit. */
static void put_scale(FILE *out, const plw_fit *fit) {
    if (fit->error_scale >= 1.05 && !plw_fit_is_gross(fit)) {
        char text[TEXT];
        snprintf(text, sizeof text,
                 "The figures scatter more than their uncertainties admit; the errors of the "
                 "coefficients are widened by %.1f for it.",
                 fit->error_scale);
        fputc('\n', out);
        plw_put_paragraph(out, "", text);
    }
}

static void put_residual(FILE *out, const plw_residual *residual) {
    fprintf(out, "  %-5s %3zu  %-30s", residual->is_row ? "row" : "point", residual->index + 1, residual->quantity);
    plw_put_right(out, figure(residual->quantity, residual->printed).text, 12);
    plw_put_right(out, figure(residual->quantity, residual->predicted).text, 12);
    fprintf(out, "%*s", isfinite(residual->scaled) && residual->scaled < 0.0 ? 5 : 6, "");
    plw_text_number(out, residual->scaled, 2, "-");
    fputc('\n', out);
}

static void put_not_used(FILE *out, const plw_tube *tube, bool is_row, size_t index, bool first) {
    char name[NAME];
    char text[TEXT];
    fputs(first ? "\n" : "", out);
    snprintf(text, sizeof text, "%s: low confidence, not used", line_name(tube, is_row, index, name));
    plw_put_paragraph(out, "", text);
}

/* Lines of the tube that the fit passes over because little is thought of them; a remark is none. */
static void put_left_aside(FILE *out, const plw_tube *tube) {
    bool first = true;
    for (size_t i = 0; i < tube->rows_count; i++) {
        if (tube->rows[i].provenance.confidence == PLW_CONFIDENCE_LOW) {
            put_not_used(out, tube, true, i, first);
            first = false;
        }
    }
    for (size_t i = 0; i < tube->points_count; i++) {
        const plw_point *point = &tube->points[i];
        if (point->provenance.confidence == PLW_CONFIDENCE_LOW && point->kind != PLW_POINT_REMARK) {
            put_not_used(out, tube, false, i, first);
            first = false;
        }
    }
}

plw_status plw_fit_text(const plw_tube *tube, const plw_fit *fit, char **text, plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    fprintf(buffer.file, "%s\n", tube->type);
    put_warnings(buffer.file, tube, fit);
    plw_put_model(buffer.file, tube);
    put_left_aside(buffer.file, tube);
    put_scale(buffer.file, fit);
    if (!fit->settled) {
        fputs("\nThe search did not settle: take these coefficients as a first guess\n", buffer.file);
    }
    put_undetermined(buffer.file, fit);
    put_correlations(buffer.file, fit);
    put_contradictions(buffer.file, tube, fit);
    put_outliers(buffer.file, tube, fit);
    fputs("\nEach figure given beside the model's; off by: in units of its own uncertainty\n", buffer.file);
    fprintf(buffer.file, "%55s%12s%12s\n", "given", "model", "off by");
    for (size_t i = 0; i < fit->residuals; i++) {
        put_residual(buffer.file, &fit->residual[i]);
    }
    return plw_text_end(&buffer, PLW_OK, text, error);
}
