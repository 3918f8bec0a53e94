/* The law against every printed row of confidence high and medium: in the fit, with the row left out of the fit, and
 * triode-connected rows predicted from pentode rows alone.  Run by `make accuracy`.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "platewright/catalogue.h"
#include "platewright/fit.h"

enum { FIGURES = 7, VALUES_MOST = 400, WORST = 14 };

typedef enum { PLATE, POWER, DISTORTION, SCREEN, SCREEN_DRIVEN, GM, RESISTANCE } figure;

static const char *const figure_names[FIGURES] = {
    "plate current, %",       "power at the printed drive, %",   "distortion, points",
    "screen current idle, %", "screen current at full drive, %", "gm, %",
    "plate resistance, %"};
/* Wanted: median and 90 % in the fit, median and 90 % left out; 0: no mark set. */
static const double wanted[FIGURES][4] = {
    {1.2, 3.5, 2, 6}, {2, 8, 3, 10}, {0.3, 1.0, 0.4, 1.6}, {4, 15, 5, 25}, {15, 35, 20, 40}, {0}, {0}};

typedef struct {
    double value[FIGURES][VALUES_MOST];
    size_t count[FIGURES];
} table;

typedef struct {
    char text[160];
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

static void print_row(const char *how, const plw_tube *tube, const plw_row *row, const double errors[FIGURES]) {
    char text[160];
    int used = snprintf(text, sizeof text, "%-9s %-8s %-7s %5.0f V %6.1f V", how, tube->type,
                        plw_connection_name(row->connection), row->plate_volts, row->grid_volts);
    for (size_t f = 0; f < FIGURES; f++) {
        used += isfinite(errors[f]) ? snprintf(text + used, sizeof text - (size_t)used, " %+7.1f", errors[f])
                                    : snprintf(text + used, sizeof text - (size_t)used, "       -");
    }
    puts(text);
    for (size_t f = 0; f < FIGURES; f++) {
        if (wanted[f][1] > 0.0 && isfinite(errors[f]) && strcmp(how, "left out") != 0) {
            char named[160];
            snprintf(named, sizeof named, "%s %s %.0f V %.1f V: %s %+.1f%s%s", tube->type,
                     plw_connection_name(row->connection), row->plate_volts, row->grid_volts, figure_names[f],
                     errors[f], row->provenance.note != NULL ? " | " : "",
                     row->provenance.note != NULL ? row->provenance.note : "");
            keep_worst(named, fabs(errors[f]) / wanted[f][1]);
        }
    }
}

static void compare_tube(const plw_tube *tube, table *fitted, table *left_out, table *triode) {
    static plw_fit fit;
    plw_error error = {0};
    if (plw_fit_tube(tube, false, &fit, &error) != PLW_OK) {
        printf("%-9s %-8s not fitted: %s\n", "", tube->type, error.text);
        return;
    }
    for (size_t index = 0; index < tube->rows_count; index++) {
        const plw_row *row = &tube->rows[index];
        plw_prediction p;
        plw_law law;
        double errors[FIGURES];
        if (!plw_row_is_fitted(row)) {
            continue;
        }
        if (plw_predict_row(&fit.model.law, row, &p, NULL) == PLW_OK) {
            row_errors(row, &p, errors);
            tally(fitted, errors);
            print_row("fit", tube, row, errors);
        }
        if (tube->rows_count > 1 && plw_fit_without(tube, index, false, &fit.model.law, &law, NULL) == PLW_OK &&
            plw_predict_row(&law, row, &p, NULL) == PLW_OK) {
            row_errors(row, &p, errors);
            tally(left_out, errors);
            print_row("left out", tube, row, errors);
        }
        if (tube->kind != PLW_KIND_TRIODE && row->connection == PLW_CONNECTION_TRIODE &&
            plw_fit_without(tube, SIZE_MAX, true, NULL, &law, NULL) == PLW_OK &&
            plw_predict_row(&law, row, &p, NULL) == PLW_OK) {
            row_errors(row, &p, errors);
            tally(triode, errors);
            print_row("as triode", tube, row, errors);
        }
    }
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

int main(int count, char **words) {
    const char *const folders[] = {count > 1 ? words[1] : "tubedata"};
    plw_catalogue *catalogue;
    const plw_tube *const *tubes;
    size_t tubes_count;
    plw_error error = {0};
    if (plw_catalogue_open(folders, 1, &catalogue, &error) != PLW_OK ||
        plw_catalogue_all(catalogue, &tubes, &tubes_count, &error) != PLW_OK) {
        fprintf(stderr, "accuracy: %s\n", error.text);
        return 2;
    }
    static table fitted;
    static table left_out;
    static table triode;
    printf("%-45s plate   power distort screen  driven      gm      rp\n", "errors against print");
    for (size_t index = 0; index < tubes_count; index++) {
        if (tubes[index]->kind != PLW_KIND_RECTIFIER) {
            compare_tube(tubes[index], &fitted, &left_out, &triode);
        }
    }
    print_table("in the fit", &fitted, 0);
    print_table("row not in the fit", &left_out, 2);
    print_table("as triode, from pentode rows", &triode, 9);
    puts("\nfurthest from the marks, in the fit or as triode:");
    for (size_t at = 0; at < WORST && worst[at].weight > 0.0; at++) {
        printf("  %s\n", worst[at].text);
    }
    plw_catalogue_free(catalogue);
    return 0;
}
