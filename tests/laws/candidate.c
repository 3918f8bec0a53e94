/* The functions of the law for a candidate: grid current and tubes of the other kind as shipped.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "candidate.h"

#include <math.h>

#include "platewright/law.h"

/* The shipped law under other names. */
size_t shipped_coefficient_count(plw_law_kind kind);
const char *shipped_coefficient_name(plw_law_kind kind, size_t index);
const char *shipped_name(plw_law_kind kind);
plw_status shipped_validate(const plw_law *law, plw_error *error);
void shipped_evaluate(const plw_law *law, double plate_volts, double screen_volts, double grid_volts,
                      plw_currents *currents);
double shipped_plate_amps(const plw_law *law, double plate_volts, double screen_volts, double grid_volts);
double shipped_grid_volts_for(const plw_law *law, double plate_volts, double screen_volts, double cathode_amps);
void shipped_scale(plw_law *law, double factor);

#define plw_law_coefficient_count shipped_coefficient_count
#define plw_law_coefficient_name shipped_coefficient_name
#define plw_law_name shipped_name
#define plw_law_validate shipped_validate
#define plw_law_evaluate shipped_evaluate
#define plw_law_plate_amps shipped_plate_amps
#define plw_law_grid_volts_for shipped_grid_volts_for
#define plw_law_scale shipped_scale
#include "tube/law.c"
#undef plw_law_coefficient_count
#undef plw_law_coefficient_name
#undef plw_law_name
#undef plw_law_validate
#undef plw_law_evaluate
#undef plw_law_plate_amps
#undef plw_law_grid_volts_for
#undef plw_law_scale

/* ---- derivatives by the chain rule ------------------------------------------------------------------------------- */

sloped slope_constant(double value) {
    return (sloped){value, 0.0, 0.0, 0.0};
}

/* value, whose derivatives by a and b are given */
static sloped chain(double value, sloped a, double by_a, sloped b, double by_b) {
    return (sloped){value, by_a * a.by_plate + by_b * b.by_plate, by_a * a.by_screen + by_b * b.by_screen,
                    by_a * a.by_grid + by_b * b.by_grid};
}

sloped slope_add(sloped a, sloped b) {
    return chain(a.value + b.value, a, 1.0, b, 1.0);
}

sloped slope_scale(sloped a, double factor) {
    return chain(factor * a.value, a, factor, a, 0.0);
}

sloped slope_multiply(sloped a, sloped b) {
    return chain(a.value * b.value, a, b.value, b, a.value);
}

sloped slope_divide(sloped a, sloped b) {
    return chain(a.value / b.value, a, 1.0 / b.value, b, -a.value / (b.value * b.value));
}

sloped slope_power(sloped a, double exponent) {
    const double value = pow(a.value, exponent);
    return chain(value, a, exponent * value / a.value, a, 0.0);
}

sloped slope_atan(sloped a) {
    return chain(atan(a.value), a, 1.0 / (1.0 + a.value * a.value), a, 0.0);
}

sloped slope_exp(sloped a) {
    const double value = exp(a.value);
    return chain(value, a, value, a, 0.0);
}

sloped candidate_foot(sloped plate) {
    const double volts = plate.value > 0.0 ? plate.value : 0.0;
    const double foot = volts + FOOT_VOLTS;
    return chain(volts * volts / foot, plate, (volts * volts + 2.0 * FOOT_VOLTS * volts) / (foot * foot), plate, 0.0);
}

sloped candidate_space_current(const double *c, sloped u, sloped grid, double soft_squared, sloped *effective_out) {
    const effective e = effective_volts(c[MU], c[KP], soft_squared, u.value, grid.value);
    if (e.volts < LEAST_EFFECTIVE_VOLTS) {
        if (effective_out != NULL) {
            *effective_out = slope_constant(LEAST_EFFECTIVE_VOLTS);
        }
        return slope_constant(0.0);
    }
    const sloped volts = chain(e.volts, u, e.by_electrode, grid, e.by_grid);
    if (effective_out != NULL) {
        *effective_out = volts;
    }
    return slope_scale(slope_power(volts, c[EXPONENT]), 2.0 / c[KG1]);
}

/* ---- the functions of law.h -------------------------------------------------------------------------------------- */

size_t plw_law_coefficient_count(plw_law_kind kind) {
    return kind != candidate_law.kind ? shipped_coefficient_count(kind) : candidate_law.count;
}

const char *plw_law_coefficient_name(plw_law_kind kind, size_t index) {
    if (kind != candidate_law.kind) {
        return shipped_coefficient_name(kind, index);
    }
    return index < candidate_law.count ? candidate_law.names[index] : NULL;
}

const char *plw_law_name(plw_law_kind kind) {
    return kind != candidate_law.kind ? shipped_name(kind) : candidate_law.name;
}

plw_status plw_law_validate(const plw_law *law, plw_error *error) {
    if (law->kind != candidate_law.kind) {
        return shipped_validate(law, error);
    }
    for (size_t index = 0; index < candidate_law.count; index++) {
        const double value = law->coefficient[index];
        if (!isfinite(value) || (value <= 0.0 && index != candidate_law.signed_index)) {
            return plw_fail(error, PLW_E_DATA, "coefficient %s is %g", candidate_law.names[index], value);
        }
    }
    return PLW_OK;
}

void plw_law_evaluate(const plw_law *law, double plate_volts, double screen_volts, double grid_volts,
                      plw_currents *currents) {
    if (law->kind != candidate_law.kind || candidate_law.currents == NULL) {
        shipped_evaluate(law, plate_volts, screen_volts, grid_volts, currents);
        return;
    }
    *currents = (plw_currents){0};
    grid_current(law, limited(grid_volts), currents);
    if (plate_volts <= 0.0 && screen_volts <= 0.0) {
        return;
    }
    const sloped plate = {limited(plate_volts), 1.0, 0.0, 0.0};
    const sloped screen = {limited(screen_volts), 0.0, 1.0, 0.0};
    const sloped grid = {limited(grid_volts), 0.0, 0.0, 1.0};
    sloped plate_amps = slope_constant(0.0);
    sloped screen_amps = slope_constant(0.0);
    candidate_law.currents(law->coefficient, plate, screen, grid, &plate_amps, &screen_amps);
    currents->plate_amps = plate_amps.value;
    currents->plate_by_plate = plate_amps.by_plate;
    currents->plate_by_screen = plate_amps.by_screen;
    currents->plate_by_grid = plate_amps.by_grid;
    currents->screen_amps = screen_amps.value;
    currents->screen_by_plate = screen_amps.by_plate;
    currents->screen_by_screen = screen_amps.by_screen;
    currents->screen_by_grid = screen_amps.by_grid;
}

double plw_law_plate_amps(const plw_law *law, double plate_volts, double screen_volts, double grid_volts) {
    plw_currents currents;
    plw_law_evaluate(law, plate_volts, screen_volts, grid_volts, &currents);
    return currents.plate_amps;
}

double plw_law_grid_volts_for(const plw_law *law, double plate_volts, double screen_volts, double cathode_amps) {
    double below = -1000.0;
    double above = 100.0;
    plw_currents at;
    plw_law_evaluate(law, plate_volts, screen_volts, above, &at);
    if (!(at.plate_amps + at.screen_amps >= cathode_amps)) {
        return (double)NAN;
    }
    for (int step = 0; step < 60; step++) {
        const double middle = 0.5 * (below + above);
        plw_law_evaluate(law, plate_volts, screen_volts, middle, &at);
        if (at.plate_amps + at.screen_amps > cathode_amps) {
            above = middle;
        } else {
            below = middle;
        }
    }
    return 0.5 * (below + above);
}

void plw_law_scale(plw_law *law, double factor) {
    law->coefficient[KG1] /= factor;
}
