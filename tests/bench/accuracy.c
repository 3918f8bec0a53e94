/* The law against every printed row of confidence high and medium: in the fit, with the row left out of the fit, and
 * triode-connected rows and characteristics predicted from pentode rows alone.  Run by `make accuracy`.
 *
 *   accuracy [--screened | --triodes] [--marks | --summary NAME | --coefficients NAME] [FOLDER]
 *
 * --screened      pentodes and beam tubes only; --triodes: triodes only
 * --marks         only the marks, and exit status 1 when one is not met: run by `make check`
 * --summary       for programs, with tabs between: NAME, basis, figure, then either "row", type, place, error (a point
 *                 has its place negative, -1 the first) or "total", median, 90 %, count
 * --coefficients  for programs: NAME, kind of tube (triodes with a filament apart), type, family (or type), coefficient, its place, value
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "platewright/catalogue.h"
#include "platewright/fit.h"
#include "published/known_misses.h"

enum { FIGURES = 8, VALUES_MOST = 400, WORST = 14, TEXT_MOST = 480 };

typedef enum { PLATE, POWER, DISTORTION, SCREEN, SCREEN_DRIVEN, GM, RESISTANCE, MU } figure;

static const char *const figure_names[FIGURES] = {"plate current, %",
                                                  "power at the printed drive, %",
                                                  "distortion, points",
                                                  "screen current idle, %",
                                                  "screen current at full drive, %",
                                                  "gm, %",
                                                  "plate resistance, %",
                                                  "mu as triode, %"};
/* The same in known_misses.h; NULL: not among its figures. */
static const char *const known_names[FIGURES] = {
    "plate current", "power", "distortion", "screen current", NULL, "gm", "plate resistance", NULL};
/* Wanted: median and 90 % in the fit, median and 90 % left out; 0: no mark set. */
static const double wanted[FIGURES][4] = {
    {1.2, 3.5, 2, 6}, {2, 8, 3, 10}, {0.3, 1.0, 0.4, 1.6}, {4, 15, 5, 25}, {15, 35, 20, 40}, {0}, {0}, {0}};

typedef struct {
    double value[FIGURES][VALUES_MOST];
    size_t count[FIGURES];
} table;

typedef enum { FITTED, LEFT_OUT, AS_TRIODE, SETS } basis;

static const char *const set_names[SETS] = {"fit", "left out", "as triode"};

typedef enum { WHOLE, MARKS, SUMMARY, COEFFICIENTS } output;

typedef struct {
    bool screened_only, triodes_only;
    output output;
    const char *name;
    const char *folder;
    table tables[SETS];
} comparison;

typedef struct {
    char text[TEXT_MOST];
    double weight;
} worst_row;

static worst_row worst[WORST];

static void keep_worst(const char *text, double weight) {
    for (size_t at = 0; at < WORST; at++) {
        if (weight > worst[at].weight) {
            memmove(&worst[at + 1], &worst[at], (WORST - at - 1) * sizeof worst[0]);
            snprintf(worst[at].text, sizeof worst[at].text, "%s", text);
            worst[at].weight = weight;
            return;
        }
    }
}

static int ascending(const void *left, const void *right) {
    const double a = *(const double *)left;
    const double b = *(const double *)right;
    return (a > b) - (a < b);
}

static double quantile(double *values, size_t count, double part) {
    if (count == 0) {
        return (double)NAN;
    }
    qsort(values, count, sizeof values[0], ascending);
    const double at = part * (double)(count - 1);
    const size_t below = (size_t)at;
    const size_t above = below + 1 < count ? below + 1 : below;
    return values[below] + (at - (double)below) * (values[above] - values[below]);
}

static double ratio_percent(double got, double printed) {
    return printed > 0.0 ? 100.0 * (got / printed - 1.0) : (double)NAN;
}

static void row_errors(const plw_row *row, const plw_prediction *p, double errors[FIGURES]) {
    errors[PLATE] = ratio_percent(p->plate_amps, row->plate_amps);
    errors[SCREEN] = ratio_percent(p->screen_amps, row->screen_amps);
    errors[GM] = ratio_percent(p->gm_siemens, row->gm_siemens);
    errors[RESISTANCE] = ratio_percent(p->plate_resistance_ohms, row->plate_resistance_ohms);
    errors[SCREEN_DRIVEN] = ratio_percent(p->screen_amps_full_drive, row->screen_amps_full_drive);
    errors[POWER] = ratio_percent(p->power_watts, row->power_watts);
    errors[MU] = ratio_percent(p->mu, row->mu);
    errors[DISTORTION] =
        isfinite(row->thd_percent) ? p->thd_percent - row->thd_percent : p->h2_percent - row->h2_percent;
    if (row->undistorted) {
        errors[POWER] = errors[DISTORTION] = (double)NAN;
    }
}

static void tally(table *t, const double errors[FIGURES]) {
    for (size_t f = 0; f < FIGURES; f++) {
        if (isfinite(errors[f]) && t->count[f] < VALUES_MOST) {
            t->value[f][t->count[f]++] = fabs(errors[f]);
        }
    }
}

/* What was compared, for print: a row, or a point where row is NULL. */
typedef struct {
    basis set;
    const plw_tube *tube;
    const plw_row *row;
    const plw_point *point;
} compared;

/* Why the figure misses, where that is known; else what the file notes of the row. */
static void describe_worst(const compared *c, figure f, double error) {
    char text[TEXT_MOST];
    const size_t index = (size_t)(c->row - c->tube->rows);
    const plw_known_miss *miss =
        known_names[f] != NULL ? plw_known_miss_of(c->tube->type, index, known_names[f]) : NULL;
    const char *note = c->row->provenance.note;
    snprintf(text, sizeof text, "%s %s %.0f V %.1f V, %s: %s %+.1f%s%s", c->tube->type,
             plw_connection_name(c->row->connection), c->row->plate_volts, c->row->grid_volts, set_names[c->set],
             figure_names[f], error,
             miss != NULL   ? " | reason: "
             : note != NULL ? " | noted of the row: "
                            : "",
             miss != NULL   ? miss->reason
             : note != NULL ? note
                            : "");
    keep_worst(text, fabs(error) / wanted[f][1]);
}

static void print_errors(const compared *c, const double errors[FIGURES]) {
    const plw_connection connection = c->row != NULL ? c->row->connection : c->point->connection;
    printf("%-9s %-8s %-7s %5.0f V %6.1f V", set_names[c->set], c->tube->type, plw_connection_name(connection),
           c->row != NULL ? c->row->plate_volts : c->point->plate_volts,
           c->row != NULL ? c->row->grid_volts : c->point->grid_volts);
    for (size_t f = 0; f < FIGURES; f++) {
        if (isfinite(errors[f])) {
            printf(" %+7.1f", errors[f]);
        } else {
            printf("       -");
        }
    }
    putchar('\n');
    for (size_t f = 0; c->row != NULL && c->set != LEFT_OUT && f < FIGURES; f++) {
        if (wanted[f][1] > 0.0 && isfinite(errors[f])) {
            describe_worst(c, (figure)f, errors[f]);
        }
    }
}

static void list_errors(const comparison *all, const compared *c, const double errors[FIGURES]) {
    for (size_t f = 0; f < FIGURES; f++) {
        if (isfinite(errors[f])) {
            printf("%s\t%s\t%s\trow\t%s\t%td\t%.3f\n", all->name, set_names[c->set], figure_names[f], c->tube->type,
                   c->row != NULL ? c->row - c->tube->rows : -1 - (c->point - c->tube->points), errors[f]);
        }
    }
}

static void note_errors(comparison *all, const compared *c, const double errors[FIGURES]) {
    tally(&all->tables[c->set], errors);
    if (all->output == WHOLE) {
        print_errors(c, errors);
    } else if (all->output == SUMMARY) {
        list_errors(all, c, errors);
    }
}

static void compare_row(comparison *all, basis set, const plw_tube *tube, const plw_law *law, const plw_row *row) {
    plw_prediction p;
    if (plw_predict_row(law, row, &p, NULL) == PLW_OK) {
        double errors[FIGURES];
        row_errors(row, &p, errors);
        note_errors(all, &(compared){set, tube, row, NULL}, errors);
    }
}

static void compare_point(comparison *all, const plw_tube *tube, const plw_law *law, const plw_point *point) {
    plw_prediction p;
    if (plw_predict_point(law, point, &p, NULL) == PLW_OK) {
        double errors[FIGURES];
        for (size_t f = 0; f < FIGURES; f++) {
            errors[f] = (double)NAN;
        }
        errors[PLATE] = ratio_percent(p.plate_amps, point->plate_amps);
        errors[GM] = ratio_percent(p.gm_siemens, point->gm_siemens);
        errors[RESISTANCE] = ratio_percent(p.plate_resistance_ohms, point->plate_resistance_ohms);
        errors[MU] = ratio_percent(p.mu, point->mu);
        note_errors(all, &(compared){AS_TRIODE, tube, NULL, point}, errors);
    }
}

/* Triode-connected rows and characteristics of a screened tube, none of which entered the fit. */
static void compare_as_triode(comparison *all, const plw_tube *tube) {
    plw_law law;
    if (tube->kind == PLW_KIND_TRIODE || plw_fit_without(tube, SIZE_MAX, true, NULL, &law, NULL) != PLW_OK) {
        return;
    }
    for (size_t index = 0; index < tube->rows_count; index++) {
        const plw_row *row = &tube->rows[index];
        if (plw_row_is_fitted(row) && row->connection == PLW_CONNECTION_TRIODE) {
            compare_row(all, AS_TRIODE, tube, &law, row);
        }
    }
    for (size_t index = 0; index < tube->points_count; index++) {
        const plw_point *point = &tube->points[index];
        if (plw_point_is_fitted(point) && point->kind == PLW_POINT_CHARACTERISTICS &&
            point->connection == PLW_CONNECTION_TRIODE) {
            compare_point(all, tube, &law, point);
        }
    }
}

static void print_coefficients(const comparison *all, const plw_tube *tube, const plw_law *law) {
    for (size_t index = 0; index < plw_law_coefficient_count(law->kind); index++) {
        printf("%s\t%s%s\t%s\t%s\t%s\t%zu\t%.6g\n", all->name,
               tube->kind == PLW_KIND_TRIODE && tube->directly_heated ? "filament " : "",
               plw_tube_kind_name(tube->kind), tube->type, tube->family != NULL ? tube->family : tube->type,
               plw_law_coefficient_name(law->kind, index), index, law->coefficient[index]);
    }
}

static void compare_tube(comparison *all, const plw_tube *tube) {
    static plw_fit fit;
    plw_error error = {0};
    if (plw_fit_tube(tube, false, &fit, &error) != PLW_OK) {
        fprintf(all->output == WHOLE ? stdout : stderr, "%-9s %-8s not fitted: %s\n", "", tube->type, error.text);
        return;
    }
    if (all->output == COEFFICIENTS) {
        print_coefficients(all, tube, &fit.model.law);
        return;
    }
    for (size_t index = 0; index < tube->rows_count; index++) {
        const plw_row *row = &tube->rows[index];
        plw_law law;
        if (!plw_row_is_fitted(row)) {
            continue;
        }
        compare_row(all, FITTED, tube, &fit.model.law, row);
        if (tube->rows_count > 1 && plw_fit_without(tube, index, false, &fit.model.law, &law, NULL) == PLW_OK) {
            compare_row(all, LEFT_OUT, tube, &law, row);
        }
    }
    compare_as_triode(all, tube);
}

static void print_table(const char *title, table *t, size_t wanted_at) {
    printf("\n%-32s %8s %8s %6s    wanted\n", title, "median", "90 %", "rows");
    for (size_t f = 0; f < FIGURES; f++) {
        printf("%-32s %8.2f %8.2f %6zu", figure_names[f], quantile(t->value[f], t->count[f], 0.5),
               quantile(t->value[f], t->count[f], 0.9), t->count[f]);
        if (wanted_at < 4 && wanted[f][wanted_at] > 0.0) {
            printf("    %g / %g", wanted[f][wanted_at], wanted[f][wanted_at + 1]);
        }
        putchar('\n');
    }
}

static void print_summary(comparison *all) {
    for (basis set = FITTED; set < SETS; set++) {
        table *t = &all->tables[set];
        for (size_t f = 0; f < FIGURES; f++) {
            if (t->count[f] > 0) {
                printf("%s\t%s\t%s\ttotal\t%.3f\t%.3f\t%zu\n", all->name, set_names[set], figure_names[f],
                       quantile(t->value[f], t->count[f], 0.5), quantile(t->value[f], t->count[f], 0.9), t->count[f]);
            }
        }
    }
}

static void print_whole(comparison *all) {
    print_table("in the fit", &all->tables[FITTED], 0);
    print_table("row not in the fit", &all->tables[LEFT_OUT], 2);
    print_table("as triode, from pentode rows", &all->tables[AS_TRIODE], 9);
    puts("\nfurthest from the marks, in the fit or as triode:");
    for (size_t at = 0; at < WORST && worst[at].weight > 0.0; at++) {
        printf("  %s\n", worst[at].text);
    }
}

/* Ret:  how many marks are not met */
static int print_marks(comparison *all) {
    int missed = 0;
    for (basis set = FITTED; set <= LEFT_OUT; set++) {
        table *t = &all->tables[set];
        const size_t at = set == FITTED ? 0 : 2;
        for (size_t f = 0; f < FIGURES; f++) {
            const double median = quantile(t->value[f], t->count[f], 0.5);
            const double nine_tenths = quantile(t->value[f], t->count[f], 0.9);
            if (wanted[f][at] > 0.0) {
                const bool met = median <= wanted[f][at] && nine_tenths <= wanted[f][at + 1];
                printf("%-9s %-32s %6.2f / %5.2f, at most %g / %g%s\n", set_names[set], figure_names[f], median,
                       nine_tenths, wanted[f][at], wanted[f][at + 1], met ? "" : "  NOT MET");
                missed += met ? 0 : 1;
            }
        }
    }
    return missed;
}

static bool read_words(int count, char **words, comparison *all) {
    all->folder = "tubedata";
    for (int at = 1; at < count; at++) {
        const bool named = at + 1 < count;
        if (strcmp(words[at], "--screened") == 0) {
            all->screened_only = true;
        } else if (strcmp(words[at], "--triodes") == 0) {
            all->triodes_only = true;
        } else if (strcmp(words[at], "--marks") == 0) {
            all->output = MARKS;
        } else if (named && (strcmp(words[at], "--summary") == 0 || strcmp(words[at], "--coefficients") == 0)) {
            all->output = words[at][2] == 's' ? SUMMARY : COEFFICIENTS;
            all->name = words[++at];
        } else if (words[at][0] != '-') {
            all->folder = words[at];
        } else {
            return false;
        }
    }
    return true;
}

int main(int count, char **words) {
    static comparison all;
    plw_catalogue *catalogue;
    const plw_tube *const *tubes;
    size_t tubes_count;
    plw_error error = {0};
    if (!read_words(count, words, &all)) {
        fputs("accuracy: [--screened | --triodes] [--marks | --summary NAME | --coefficients NAME] [FOLDER]\n", stderr);
        return 2;
    }
    if (plw_catalogue_open(&all.folder, 1, &catalogue, &error) != PLW_OK ||
        plw_catalogue_all(catalogue, &tubes, &tubes_count, &error) != PLW_OK) {
        fprintf(stderr, "accuracy: %s\n", error.text);
        return 2;
    }
    if (all.output == WHOLE) {
        printf("%-40s   plate   power distort  screen  driven      gm      rp      mu\n", "errors against print");
    }
    for (size_t index = 0; index < tubes_count; index++) {
        const plw_tube_kind kind = tubes[index]->kind;
        const bool left_aside = kind == PLW_KIND_TRIODE ? all.screened_only : all.triodes_only;
        if (kind != PLW_KIND_RECTIFIER && !left_aside) {
            compare_tube(&all, tubes[index]);
        }
    }
    if (all.output == WHOLE) {
        print_whole(&all);
    } else if (all.output == SUMMARY) {
        print_summary(&all);
    }
    const int missed = all.output == MARKS ? print_marks(&all) : 0;
    plw_catalogue_free(catalogue);
    return missed > 0 ? 1 : 0;
}
