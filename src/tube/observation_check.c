/* Sense of a table of observations.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/observation_check.h"

#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

#include "tube/fit_data.h"
#include "tube/tube_fields.h"

enum { FIGURES_LEAST = 3, AXES = 3 };

bool plw_tube_has_screen(const plw_tube *tube) {
    return tube->kind == PLW_KIND_PENTODE || tube->kind == PLW_KIND_BEAM;
}

#define SAY(why, ...) ((void)snprintf(why, PLW_OBSERVATION_WHY_SIZE, __VA_ARGS__))

/* ---- one line ---------------------------------------------------------------------------------------------------- */

/* Voltage and current of the screen where it has its own, and only there.  A screen given at the plate's volts in
 * triode connection says nothing new and is dropped. */
static void check_screen(const plw_tube *tube, plw_connection connection, double plate_volts, double *screen_volts,
                         double screen_amps, char *why) {
    if (connection != PLW_CONNECTION_TRIODE) {
        if (isnan(*screen_volts)) {
            SAY(why, "screen_volts: is missing; needed in pentode connection");
        }
        return;
    }
    if (plw_tube_has_screen(tube) && *screen_volts == plate_volts) {
        *screen_volts = (double)NAN;
    }
    if (isfinite(*screen_volts)) {
        SAY(why, "screen_volts: %s",
            plw_tube_has_screen(tube) ? "in triode connection the screen is at the plate; leave it empty"
                                      : "a triode has no screen; leave it empty");
    } else if (isfinite(screen_amps)) {
        SAY(why, "screen_ma: %s",
            plw_tube_has_screen(tube) ? "in triode connection plate_ma is plate and screen together; leave it empty"
                                      : "a triode has no screen; leave it empty");
    }
}

static bool same_numbers(const plw_tube_field *fields, const void *one, const void *other) {
    for (; fields->attribute != NULL; fields++) {
        double first = 0.0;
        double second = 0.0;
        memcpy(&first, (const char *)one + fields->offset, sizeof first);
        memcpy(&second, (const char *)other + fields->offset, sizeof second);
        if (first != second && !(isnan(first) && isnan(second))) {
            return false;
        }
    }
    return true;
}

static void say_repeated(char *why, size_t before) {
    SAY(why, "repeats line %zu in every number and would count double; delete one of them", before);
}

/* Operating points are biased negative; sheets of old leave the sign out.  Only curves go into the positive. */
static void say_positive(char *why, double grid_volts) {
    SAY(why, "grid_volts %g is positive: write %g", grid_volts, -grid_volts);
}

void plw_observation_check_row(plw_tube *tube, const plw_observation_lines *lines, size_t index, size_t first,
                               char why[PLW_OBSERVATION_WHY_SIZE]) {
    plw_row *r = &tube->rows[index];
    const bool output = isfinite(r->power_watts) || isfinite(r->thd_percent) || isfinite(r->h2_percent) ||
                        isfinite(r->h3_percent) || isfinite(r->plate_amps_full_drive) ||
                        isfinite(r->screen_amps_full_drive);
    check_screen(tube, r->connection, r->plate_volts, &r->screen_volts, r->screen_amps, why);
    if (isnan(r->plate_volts)) {
        SAY(why, "plate_volts: is missing");
    } else if (isnan(r->grid_volts) && isnan(r->cathode_resistor_ohms)) {
        SAY(why, "neither grid_volts nor cathode_resistor_ohms is given; one is needed");
    } else if (r->grid_volts > 0.0) {
        say_positive(why, r->grid_volts);
    } else if (isnan(r->plate_amps)) {
        SAY(why, "plate_ma: is missing; a row is worth nothing without its plate current at rest");
    } else if (output && (isnan(r->load_ohms) || isnan(r->drive_peak_volts))) {
        SAY(why, "power, distortion and currents at full drive need load_ohms and drive_peak_volts beside them");
    }
    for (size_t before = first; before < index && why[0] == '\0'; before++) {
        const plw_row *other = &tube->rows[before];
        if (other->connection == r->connection && same_numbers(plw_row_fields, r, other)) {
            say_repeated(why, lines->of_row[before]);
        }
    }
}

static void check_figures(const plw_tube *tube, const plw_point *p, char *why) {
    const bool constants = isfinite(p->gm_siemens) || isfinite(p->plate_resistance_ohms) || isfinite(p->mu);
    if (isnan(p->plate_volts)) {
        SAY(why, "plate_volts: is missing");
    } else if (isnan(p->grid_volts)) {
        SAY(why, "grid_volts: is missing");
    } else if (p->kind == PLW_POINT_CHARACTERISTICS && p->grid_volts > 0.0) {
        say_positive(why, p->grid_volts);
    } else if (p->kind == PLW_POINT_INNER_MU) {
        if (isnan(p->mu) || !plw_tube_has_screen(tube)) {
            SAY(why, "inner-mu: %s",
                isnan(p->mu) ? "mu is missing: that of screen to grid 1" : "a triode has no screen");
        }
    } else if (isnan(p->plate_amps)) {
        SAY(why, "plate_ma: is missing");
    } else if (constants && p->kind != PLW_POINT_CHARACTERISTICS) {
        SAY(why, "gm, plate resistance and mu belong to the kind characteristics, not to %s",
            plw_point_kind_name(p->kind));
    }
}

void plw_observation_check_point(plw_tube *tube, const plw_observation_lines *lines, size_t index, size_t first,
                                 char why[PLW_OBSERVATION_WHY_SIZE]) {
    plw_point *p = &tube->points[index];
    check_screen(tube, p->connection, p->plate_volts, &p->screen_volts, p->screen_amps, why);
    check_figures(tube, p, why);
    for (size_t before = first; before < index && why[0] == '\0'; before++) {
        const plw_point *other = &tube->points[before];
        if (other->connection == p->connection && other->kind == p->kind && same_numbers(plw_point_fields, p, other)) {
            say_repeated(why, lines->of_point[before]);
        }
    }
}

/* ---- all lines together ------------------------------------------------------------------------------------------ */

/* The voltages of an observation: plate, screen (at the plate when it has none of its own), grid. */
static void voltages(const plw_observations *all, const plw_observation *o, double volts[AXES]) {
    if (o->is_row) {
        const plw_row *r = &all->tube->rows[o->index];
        volts[0] = r->plate_volts;
        volts[1] = r->screen_volts;
        volts[2] = isfinite(r->grid_volts) ? r->grid_volts : -r->cathode_resistor_ohms * r->plate_amps;
    } else {
        const plw_point *p = &all->tube->points[o->index];
        volts[0] = p->plate_volts;
        volts[1] = p->screen_volts;
        volts[2] = p->grid_volts;
    }
    if (isnan(volts[1])) {
        volts[1] = volts[0];
    }
}

/* Largest distance from the straight line through the two observations farthest apart, over their distance; grid volts
 * count tenfold, as they are smaller about that much.  Ret: 0 when all are in one place */
static double breadth(const plw_observations *all) {
    double first[AXES];
    double along[AXES] = {0.0, 0.0, 0.0};
    double length = 0.0;
    voltages(all, &all->observation[0], first);
    for (size_t i = 1; i < all->count; i++) {
        double v[AXES];
        voltages(all, &all->observation[i], v);
        const double there[AXES] = {v[0] - first[0], v[1] - first[1], 10.0 * (v[2] - first[2])};
        const double distance = sqrt(there[0] * there[0] + there[1] * there[1] + there[2] * there[2]);
        if (distance > length) {
            length = distance;
            memcpy(along, there, sizeof along);
        }
    }
    double widest = 0.0;
    for (size_t i = 1; i < all->count && length > 0.0; i++) {
        double v[AXES];
        voltages(all, &all->observation[i], v);
        const double there[AXES] = {v[0] - first[0], v[1] - first[1], 10.0 * (v[2] - first[2])};
        const double shadow = (there[0] * along[0] + there[1] * along[1] + there[2] * along[2]) / length;
        const double square = there[0] * there[0] + there[1] * there[1] + there[2] * there[2] - shadow * shadow;
        widest = fmax(widest, sqrt(fmax(square, 0.0)) / length);
    }
    return widest;
}

/* Currents alone tell how the tube answers to plate and grid only when both were moved apart. */
static bool only_currents(const plw_observations *all) {
    for (size_t i = 0; i < all->count; i++) {
        if (all->observation[i].what != PLW_SEEN_PLATE_CURRENT && all->observation[i].what != PLW_SEEN_SCREEN_CURRENT) {
            return false;
        }
    }
    return true;
}

static size_t currents(const plw_observations *all) {
    size_t count = 0;
    for (size_t i = 0; i < all->count; i++) {
        count += all->observation[i].what == PLW_SEEN_PLATE_CURRENT ? 1U : 0U;
    }
    return count;
}

plw_status plw_observation_check_whole(const plw_tube *tube, plw_error *error) {
    plw_observations all;
    plw_observations_collect(tube, SIZE_MAX, false, &all);
    if (all.count < FIGURES_LEAST || currents(&all) == 0) {
        return plw_fail(error, PLW_E_DATA,
                        "%zu figure%s that can be fitted up to here; the least is one row with plate current, gm and "
                        "plate resistance, or three points of curves",
                        all.count, all.count == 1 ? "" : "s");
    }
    if (all.count >= PLW_RESIDUALS_MOST) {
        return plw_fail(error, PLW_E_DATA, "%d figures or more; thin the curves out", (int)PLW_RESIDUALS_MOST);
    }
    if (only_currents(&all) && !(breadth(&all) > 0.01)) {
        return plw_fail(error, PLW_E_DATA,
                        "all points lie on one line of voltages, which does not tell the grid's hold from the plate's; "
                        "add points at other plate volts and other grid volts, or gm and plate resistance");
    }
    return PLW_OK;
}
