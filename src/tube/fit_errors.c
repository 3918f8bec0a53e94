/* Errors of a fitted law against the printed rows, and the region that the data cover.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>

#include "tube/fit_core.h"
#include "tube/fit_prior.h"

enum { ROWS_MOST = 200 };

typedef struct {
    double plate[ROWS_MOST], screen[ROWS_MOST], power[ROWS_MOST], distortion[ROWS_MOST];
    size_t plates, screens, powers, distortions;
} error_list;

static int ascending(const void *left, const void *right) {
    const double a = *(const double *)left;
    const double b = *(const double *)right;
    return (a > b) - (a < b);
}

static double median(double *values, size_t count) {
    if (count == 0) {
        return (double)NAN;
    }
    qsort(values, count, sizeof values[0], ascending);
    return count % 2 == 1 ? values[count / 2] : 0.5 * (values[count / 2 - 1] + values[count / 2]);
}

static void note(double predicted, double printed, double *list, size_t *count) {
    if (isfinite(predicted) && printed > 0.0 && *count < ROWS_MOST) {
        list[(*count)++] = 100.0 * fabs(predicted / printed - 1.0);
    }
}

static void note_row(const plw_law *law, const plw_row *row, error_list *list) {
    plw_prediction p;
    if (plw_predict_row(law, row, &p, NULL) != PLW_OK) {
        return;
    }
    note(p.plate_amps, row->plate_amps, list->plate, &list->plates);
    note(p.screen_amps, row->screen_amps, list->screen, &list->screens);
    if (row->undistorted) {
        return;
    }
    note(p.power_watts, row->power_watts, list->power, &list->powers);
    /* Where only the second harmonic is printed it stands for the distortion. */
    const bool total = isfinite(row->thd_percent);
    const double difference = total ? p.thd_percent - row->thd_percent : p.h2_percent - row->h2_percent;
    if (isfinite(difference) && list->distortions < ROWS_MOST) {
        list->distortion[list->distortions++] = fabs(difference);
    }
}

static void note_point(const plw_law *law, const plw_point *point, error_list *list) {
    plw_prediction p;
    if (plw_predict_point(law, point, &p, NULL) == PLW_OK) {
        note(p.plate_amps, point->plate_amps, list->plate, &list->plates);
        note(p.screen_amps, point->screen_amps, list->screen, &list->screens);
    }
}

static bool is_on_curve(const plw_point *point) {
    return point->kind == PLW_POINT_CURVE && plw_point_is_fitted(point);
}

/* Where no row is printed, the points of the curves stand for the rows; a median of two would tell nothing. */
static void note_curves(const plw_tube *tube, bool leave_out, const plw_law *law, error_list *fitted,
                        error_list *left_out) {
    enum { POINTS_LEAST = 3 };
    size_t count = 0;
    for (size_t index = 0; index < tube->points_count; index++) {
        count += is_on_curve(&tube->points[index]) ? 1U : 0U;
    }
    plw_observations all;
    plw_observations rest;
    plw_observations_collect(tube, SIZE_MAX, false, &all);
    for (size_t index = 0; index < tube->points_count && count >= POINTS_LEAST; index++) {
        if (!is_on_curve(&tube->points[index])) {
            continue;
        }
        note_point(law, &tube->points[index], fitted);
        plw_law without;
        double squares;
        plw_observations_without(&all, false, index, &rest);
        if (leave_out && left_out->plates < ROWS_MOST &&
            plw_fit_observations(&rest, law, &without, &squares, NULL) == PLW_OK) {
            note_point(&without, &tube->points[index], left_out);
        }
    }
}

static plw_model_errors medians(error_list *list) {
    return (plw_model_errors){
        .plate_current_percent = median(list->plate, list->plates),
        .screen_current_percent = median(list->screen, list->screens),
        .power_percent = median(list->power, list->powers),
        .distortion_points = median(list->distortion, list->distortions),
    };
}

static void widen(double value, double *least, double *most) {
    if (isfinite(value)) {
        *least = isnan(*least) || value < *least ? value : *least;
        *most = isnan(*most) || value > *most ? value : *most;
    }
}

/* The box around the fitted rows and points at rest, and the swings of the driven rows on their load lines. */
static plw_region region_of(const plw_tube *tube) {
    const double unknown = (double)NAN;
    plw_region region = {unknown, unknown, unknown, unknown, unknown, unknown};
    for (size_t index = 0; index < tube->rows_count; index++) {
        const plw_row *r = &tube->rows[index];
        if (plw_row_is_fitted(r)) {
            widen(r->plate_volts, &region.plate_volts_least, &region.plate_volts_most);
            widen(r->screen_volts, &region.screen_volts_least, &region.screen_volts_most);
            widen(r->plate_amps, &region.plate_amps_least, &region.plate_amps_most);
        }
    }
    for (size_t index = 0; index < tube->points_count; index++) {
        const plw_point *p = &tube->points[index];
        if (plw_point_is_fitted(p) && p->kind != PLW_POINT_INNER_MU) {
            widen(p->plate_volts, &region.plate_volts_least, &region.plate_volts_most);
            widen(p->screen_volts, &region.screen_volts_least, &region.screen_volts_most);
            widen(p->plate_amps, &region.plate_amps_least, &region.plate_amps_most);
        }
    }
    return region;
}

void plw_fit_errors(const plw_tube *tube, bool leave_out, plw_model *model) {
    error_list fitted = {.plates = 0};
    error_list left_out = {.plates = 0};
    model->rows_fitted = 0;
    model->points_fitted = 0;
    for (size_t index = 0; index < tube->points_count; index++) {
        model->points_fitted += plw_point_is_fitted(&tube->points[index]) ? 1 : 0;
    }
    for (size_t index = 0; index < tube->rows_count; index++) {
        if (!plw_row_is_fitted(&tube->rows[index])) {
            continue;
        }
        model->rows_fitted++;
        note_row(&model->law, &tube->rows[index], &fitted);
        plw_law without;
        if (leave_out && plw_fit_without(tube, index, false, &model->law, &without, NULL) == PLW_OK) {
            note_row(&without, &tube->rows[index], &left_out);
        }
    }
    if (model->rows_fitted == 0) {
        note_curves(tube, leave_out, &model->law, &fitted, &left_out);
    }
    model->fit_error = medians(&fitted);
    model->left_out_error = medians(&left_out);
    model->region = region_of(tube);
}
