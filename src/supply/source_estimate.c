/* Source resistance of a supply from readings, through the physics of its rectifier.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <string.h>

#include "base/numeric.h"
#include "platewright/supply_bench.h"

/* Beyond this many standard errors readings are held to contradict. */
#define CONTRADICTION 3.0
/* Difference steps: relative of the winding's voltage, and of a typical path resistance. */
#define WINDING_STEP 1e-4
#define OHMS_STEP 1e-3

enum { ROUNDS_MOST = 60, HALVINGS_MOST = 12 };

typedef struct {
    const plw_rectifier *described;
    const plw_bench_reading *readings;
    size_t count;
    plw_reading_errors errors;
    double winding_volts, winding_error; /* the prior: as read, and its standard error */
    double ohms_scale;
    double sigma[PLW_READINGS_MOST]; /* standard error of each reading, as found at the start */
} problem;

plw_reading_errors plw_reading_errors_usual(void) {
    return (plw_reading_errors){1, 1, 1};
}

static bool loaded(const plw_bench_reading *reading) {
    return reading->ohms > 0 || reading->amps > 0;
}

static double drawn_amps(const plw_bench_reading *reading) {
    return reading->ohms > 0 ? reading->volts / reading->ohms : reading->amps;
}

/* ---- what the model reads ---------------------------------------------------------------------------------------- */

static plw_status model(const problem *p, double winding_volts, double path_ohms, const plw_bench_reading *reading,
                        plw_rectifier_state *state, plw_error *error) {
    plw_rectifier supply = *p->described;
    supply.winding_rms_volts = winding_volts;
    supply.path_ohms = path_ohms;
    const plw_dc_load load = {reading->ohms > 0 ? 0 : reading->amps, reading->ohms};
    return plw_rectifier_steady(&supply, load, state, error);
}

/* Standard error of one reading: of its volts, and of its load through the slope of the supply. */
static double reading_error(const problem *p, const plw_bench_reading *reading, const plw_rectifier_state *state) {
    const double own = p->errors.dc_volts_percent / 100 * reading->volts;
    if (!loaded(reading)) {
        return own;
    }
    double by_load = state->source_ohms * state->load_amps * p->errors.load_percent / 100;
    if (reading->ohms > 0) {
        by_load *= reading->ohms / (reading->ohms + state->source_ohms);
    }
    return hypot(own, by_load);
}

/* Misses in standard errors, and their derivatives by winding volts and path ohms. */
typedef struct {
    double miss[PLW_READINGS_MOST], by_winding[PLW_READINGS_MOST], by_ohms[PLW_READINGS_MOST];
    double sum; /* of squares, with the prior of the winding */
} misses;

static plw_status compute_misses(const problem *p, double winding_volts, double path_ohms, bool with_derivatives,
                                 misses *out, plw_error *error) {
    const double off = p->winding_error > 0 ? (winding_volts - p->winding_volts) / p->winding_error : 0;
    out->sum = off * off;
    for (size_t i = 0; i < p->count; i++) {
        const plw_bench_reading *reading = &p->readings[i];
        plw_rectifier_state here = {0}, moved = {0};
        plw_status status = model(p, winding_volts, path_ohms, reading, &here, error);
        const double scale = 1 / p->sigma[i];
        out->miss[i] = (reading->volts - here.volts) * scale;
        out->sum += out->miss[i] * out->miss[i];
        if (status == PLW_OK && with_derivatives) {
            status = model(p, winding_volts * (1 + WINDING_STEP), path_ohms, reading, &moved, error);
            out->by_winding[i] = (moved.volts - here.volts) / (winding_volts * WINDING_STEP) * scale;
        }
        if (status == PLW_OK && with_derivatives) {
            const double step = p->ohms_scale * OHMS_STEP;
            status = model(p, winding_volts, path_ohms + step, reading, &moved, error);
            out->by_ohms[i] = (moved.volts - here.volts) / step * scale;
        }
        if (status != PLW_OK) {
            return status;
        }
    }
    return PLW_OK;
}

/* ---- least squares ----------------------------------------------------------------------------------------------- */

static void normal_equations(const problem *p, double winding_volts, const misses *m, double matrix[2][2],
                             double right[2]) {
    memset(matrix, 0, 4 * sizeof(double));
    memset(right, 0, 2 * sizeof(double));
    if (p->winding_error > 0) {
        matrix[0][0] = 1 / (p->winding_error * p->winding_error);
        right[0] = (p->winding_volts - winding_volts) * matrix[0][0];
    }
    for (size_t i = 0; i < p->count; i++) {
        matrix[0][0] += m->by_winding[i] * m->by_winding[i];
        matrix[0][1] += m->by_winding[i] * m->by_ohms[i];
        matrix[1][1] += m->by_ohms[i] * m->by_ohms[i];
        right[0] += m->by_winding[i] * m->miss[i];
        right[1] += m->by_ohms[i] * m->miss[i];
    }
    matrix[1][0] = matrix[0][1];
}

/* Gauss-Newton with halved steps; the path keeps 0 ohm or more. */
static plw_status least_squares(const problem *p, double *winding_volts, double *path_ohms, misses *m,
                                plw_error *error) {
    for (int round = 0; round < ROUNDS_MOST; round++) {
        plw_status status = compute_misses(p, *winding_volts, *path_ohms, true, m, error);
        if (status != PLW_OK) {
            return status;
        }
        double matrix[2][2], right[2], step[2];
        normal_equations(p, *winding_volts, m, matrix, right);
        const double held[2][2] = {{matrix[0][0], matrix[0][1]}, {matrix[1][0], matrix[1][1]}};
        if (!plw_solve_2x2(held, right, step) || *path_ohms + step[1] < 0) {
            /* At the bound, or with the path's part unknown: move the winding alone. */
            step[1] = -*path_ohms;
            step[0] = matrix[0][0] > 0 ? (right[0] - matrix[0][1] * step[1]) / matrix[0][0] : 0;
        }
        double share = 1;
        misses trial = {0};
        for (int halving = 0; halving < HALVINGS_MOST; halving++) {
            status = compute_misses(p, *winding_volts + share * step[0], fmax(0, *path_ohms + share * step[1]), false,
                                    &trial, error);
            if (status == PLW_OK && trial.sum <= m->sum * (1 + 1e-9) + 1e-12) {
                break;
            }
            share /= 2;
        }
        if (status != PLW_OK) {
            return status;
        }
        *winding_volts += share * step[0];
        *path_ohms = fmax(0, *path_ohms + share * step[1]);
        if (fabs(share * step[0]) < 1e-7 * *winding_volts && fabs(share * step[1]) < 1e-6 * (*path_ohms + 1)) {
            return compute_misses(p, *winding_volts, *path_ohms, true, m, error);
        }
    }
    return plw_fail(error, PLW_E_NO_CONVERGENCE, "readings: no source resistance was found that settles");
}

/* ---- checks before ------------------------------------------------------------------------------------------------
 */

static plw_status check_values(const plw_bench_reading *readings, size_t count, const plw_reading_errors *errors,
                               plw_error *error) {
    if (readings == NULL || count == 0 || count > PLW_READINGS_MOST) {
        return plw_fail(error, PLW_E_USAGE, "readings: %zu are given; 1 to %d are taken", count, PLW_READINGS_MOST);
    }
    if (!(errors->dc_volts_percent > 0 && errors->winding_volts_percent > 0 && errors->load_percent >= 0 &&
          isfinite(errors->dc_volts_percent + errors->winding_volts_percent + errors->load_percent))) {
        return plw_fail(error, PLW_E_USAGE, "reading errors: percentages above zero are wanted, as 1%%");
    }
    size_t under_load = 0;
    for (size_t i = 0; i < count; i++) {
        const plw_bench_reading *reading = &readings[i];
        if (!(isfinite(reading->volts) && reading->volts > 0)) {
            return plw_fail(error, PLW_E_USAGE, "reading %zu: %g V is not a positive voltage", i + 1, reading->volts);
        }
        if (!(isfinite(reading->ohms) && reading->ohms >= 0 && isfinite(reading->amps) && reading->amps >= 0)) {
            return plw_fail(error, PLW_E_USAGE, "reading %zu: its load is not a resistor or current of zero or more",
                            i + 1);
        }
        under_load += loaded(reading);
    }
    if (under_load == 0) {
        return plw_fail(error, PLW_E_USAGE,
                        "readings: none is loaded; read the output into a known resistor, as 258V@10k");
    }
    return PLW_OK;
}

/* The winding's volts, from the AC reading or else from the mean of the DC readings off load. */
static plw_status find_winding(problem *p, plw_error *error) {
    const plw_rectifier *d = p->described;
    double sum = 0;
    size_t off_load = 0;
    for (size_t i = 0; i < p->count; i++) {
        if (!loaded(&p->readings[i])) {
            sum += p->readings[i].volts;
            off_load++;
        }
    }
    if (d->winding_rms_volts > 0) {
        p->winding_volts = d->winding_rms_volts;
        p->winding_error = p->errors.winding_volts_percent / 100 * p->winding_volts;
        return PLW_OK;
    }
    if (off_load == 0) {
        return plw_fail(error, PLW_E_USAGE,
                        "winding: neither its AC volts nor the output was read off load; read one of them, as 215V");
    }
    const double drop = d->diode.kind == PLW_DIODE_SILICON ? d->diode.drop_volts : 0;
    p->winding_volts = (sum / (double)off_load + (d->connection == PLW_BRIDGE ? 2 : 1) * drop) / sqrt(2.0);
    p->winding_error = 0; /* no reading of its own: the DC readings off load say all */
    return PLW_OK;
}

static plw_status check_against_peak(const problem *p, plw_error *error) {
    plw_rectifier supply = *p->described;
    supply.winding_rms_volts = p->winding_volts;
    const double peak = plw_rectifier_peak_volts(&supply);
    const double allowed =
        CONTRADICTION * hypot(p->errors.dc_volts_percent, p->errors.winding_volts_percent) / 100 * peak;
    for (size_t i = 0; i < p->count; i++) {
        const plw_bench_reading *reading = &p->readings[i];
        if (loaded(reading) && reading->volts >= peak) {
            return plw_fail(
                error, PLW_E_USAGE,
                "reading %zu: %g V under load is above the off-load peak of %.4g V that a winding of %.4g V "
                "RMS gives; check which winding was read, and that both were read at one mains voltage",
                i + 1, reading->volts, peak, p->winding_volts);
        }
        if (!loaded(reading) && fabs(reading->volts - peak) > allowed) {
            return plw_fail(
                error, PLW_E_USAGE,
                "reading %zu: %g V off load does not belong to a winding of %.4g V RMS, which gives %.4g V; "
                "check which winding was read (each half when centre-tapped)",
                i + 1, reading->volts, p->winding_volts, peak);
        }
    }
    return PLW_OK;
}

static plw_status check_order(const problem *p, plw_error *error) {
    for (size_t i = 0; i < p->count; i++) {
        for (size_t k = 0; k < p->count; k++) {
            const plw_bench_reading *light = &p->readings[i], *heavy = &p->readings[k];
            const double allowed = CONTRADICTION * p->errors.dc_volts_percent / 100 * hypot(light->volts, heavy->volts);
            if (drawn_amps(heavy) > drawn_amps(light) && heavy->volts > light->volts + allowed) {
                return plw_fail(error, PLW_E_USAGE,
                                "readings: %g V at %.4g mA is above %g V at %.4g mA, which makes the source resistance "
                                "negative; check the order of the readings and that the mains held still",
                                heavy->volts, 1e3 * drawn_amps(heavy), light->volts, 1e3 * drawn_amps(light));
            }
        }
    }
    return PLW_OK;
}

/* ---- start ------------------------------------------------------------------------------------------------------- */

/* Path resistance that alone explains the heaviest reading: bisection on the falling output.  With it the standard
 * errors of the readings. */
static plw_status start_ohms(problem *p, double *path_ohms, plw_error *error) {
    const plw_bench_reading *heaviest = NULL;
    for (size_t i = 0; i < p->count; i++) {
        const plw_bench_reading *reading = &p->readings[i];
        if (loaded(reading) && (heaviest == NULL || drawn_amps(reading) > drawn_amps(heaviest))) {
            heaviest = reading;
        }
    }
    if (heaviest == NULL) {
        return plw_fail(error, PLW_E_USAGE, "readings: none is loaded");
    }
    p->ohms_scale = 0.01 * heaviest->volts / drawn_amps(heaviest);
    double low = 0, high = heaviest->volts / drawn_amps(heaviest);
    for (int i = 0; i < 24; i++) {
        plw_rectifier_state state;
        plw_error inner = {0};
        const double middle = (low + high) / 2;
        const plw_status status = model(p, p->winding_volts, middle, heaviest, &state, &inner);
        if (status != PLW_OK && status != PLW_E_NO_POINT) {
            return plw_fail(error, status, "%s", inner.text);
        }
        if (status == PLW_OK && state.volts > heaviest->volts) {
            low = middle;
        } else {
            high = middle;
        }
    }
    *path_ohms = low;
    plw_status status = PLW_OK;
    for (size_t i = 0; i < p->count && status == PLW_OK; i++) {
        plw_rectifier_state state;
        status = model(p, p->winding_volts, low, &p->readings[i], &state, error);
        if (status == PLW_OK) {
            p->sigma[i] = reading_error(p, &p->readings[i], &state);
        }
    }
    return status;
}

/* ---- result ------------------------------------------------------------------------------------------------------ */

static plw_status check_fit(const problem *p, const misses *m, double winding_volts, double path_ohms,
                            double *worst_misfit, plw_error *error) {
    size_t worst = 0;
    for (size_t i = 0; i < p->count; i++) {
        if (fabs(m->miss[i]) > fabs(m->miss[worst])) {
            worst = i;
        }
    }
    *worst_misfit = fabs(m->miss[worst]);
    const double moved = p->winding_error > 0 ? fabs(winding_volts - p->winding_volts) / p->winding_error : 0;
    if (fmax(*worst_misfit, moved) <= CONTRADICTION) {
        return PLW_OK;
    }
    if (path_ohms <= 0) {
        return plw_fail(
            error, PLW_E_USAGE,
            "reading %zu: %g V is more than the supply gives without any source resistance, which would have "
            "to be negative; check the reading and that of the winding",
            worst + 1, p->readings[worst].volts);
    }
    return plw_fail(
        error, PLW_E_USAGE,
        "readings: no source resistance fits them all; reading %zu, %g V, lies %.1f times its error from the "
        "best (%.4g V winding, %.4g ohm); check it and that the mains held still",
        worst + 1, p->readings[worst].volts, *worst_misfit, winding_volts, path_ohms);
}

/* Inverse of the normal matrix.  At the bound the path's error is still that of the readings. */
static void fill_covariance(const problem *p, const misses *m, plw_source_estimate *out) {
    double matrix[2][2], right[2];
    normal_equations(p, out->winding_rms_volts, m, matrix, right);
    const double determinant = matrix[0][0] * matrix[1][1] - matrix[0][1] * matrix[1][0];
    out->covariance[0][0] = matrix[1][1] / determinant;
    out->covariance[0][1] = out->covariance[1][0] = -matrix[0][1] / determinant;
    out->covariance[1][1] = matrix[0][0] / determinant;
    out->winding_rms_volts_error = sqrt(fmax(0, out->covariance[0][0]));
    out->path_ohms_error = sqrt(fmax(0, out->covariance[1][1]));
}

plw_status plw_source_from_readings(const plw_rectifier *described, const plw_bench_reading *readings, size_t count,
                                    const plw_reading_errors *errors, plw_source_estimate *estimate, plw_error *error) {
    problem p = {.described = described, .readings = readings, .count = count, .errors = *errors};
    plw_status status = check_values(readings, count, errors, error);
    if (status == PLW_OK) {
        status = find_winding(&p, error);
    }
    if (status == PLW_OK) {
        plw_rectifier probe = *described;
        probe.winding_rms_volts = p.winding_volts;
        probe.path_ohms = 0;
        status = plw_rectifier_validate(&probe, error);
    }
    if (status == PLW_OK) {
        status = check_against_peak(&p, error);
    }
    if (status == PLW_OK) {
        status = check_order(&p, error);
    }
    plw_source_estimate found = {.winding_rms_volts = p.winding_volts, .readings = count};
    misses m = {0};
    if (status == PLW_OK) {
        status = start_ohms(&p, &found.path_ohms, error);
    }
    if (status == PLW_OK) {
        status = least_squares(&p, &found.winding_rms_volts, &found.path_ohms, &m, error);
    }
    if (status == PLW_OK) {
        status = check_fit(&p, &m, found.winding_rms_volts, found.path_ohms, &found.worst_misfit, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    fill_covariance(&p, &m, &found);
    found.none_found = found.path_ohms <= 0;
    found.supply = *described;
    found.supply.winding_rms_volts = found.winding_rms_volts;
    found.supply.path_ohms = found.path_ohms;
    *estimate = found;
    return PLW_OK;
}

plw_status plw_source_predict(const plw_source_estimate *estimate, double amps, double *volts, double *volts_error,
                              plw_error *error) {
    const plw_dc_load load = {.amps = amps};
    plw_rectifier_state here, by_winding, by_ohms;
    plw_status status = plw_rectifier_steady(&estimate->supply, load, &here, error);
    plw_rectifier moved = estimate->supply;
    moved.winding_rms_volts *= 1 + WINDING_STEP;
    if (status == PLW_OK) {
        status = plw_rectifier_steady(&moved, load, &by_winding, error);
    }
    moved = estimate->supply;
    const double step = OHMS_STEP * (estimate->path_ohms + 10);
    moved.path_ohms += step;
    if (status == PLW_OK) {
        status = plw_rectifier_steady(&moved, load, &by_ohms, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    const double a = (by_winding.volts - here.volts) / (estimate->winding_rms_volts * WINDING_STEP);
    const double b = (by_ohms.volts - here.volts) / step;
    const double variance = a * a * estimate->covariance[0][0] + 2 * a * b * estimate->covariance[0][1] +
                            b * b * estimate->covariance[1][1];
    *volts = here.volts;
    *volts_error = sqrt(fmax(0, variance));
    return PLW_OK;
}
