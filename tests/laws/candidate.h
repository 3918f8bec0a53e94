/* A candidate for the law of pentodes and beam tubes, or of triodes, which is to stand in the shipped law's place when a
 * program is linked.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_LAWS_CANDIDATE_H
#define TESTS_LAWS_CANDIDATE_H

#include <stddef.h>

#include "tube/fit_prior.h"

/* A quantity with its derivatives by the plate, screen and grid volts. */
typedef struct {
    double value, by_plate, by_screen, by_grid;
} sloped;

sloped slope_constant(double value);
sloped slope_add(sloped a, sloped b);
sloped slope_scale(sloped a, double factor);
sloped slope_multiply(sloped a, sloped b);
sloped slope_divide(sloped a, sloped b);
/* a to a constant power; a.value > 0 */
sloped slope_power(sloped a, double exponent);
sloped slope_atan(sloped a);
sloped slope_exp(sloped a);

/* p = Vp^2/(Vp + 1 V): the plate volts (at least zero), but with slope zero at zero, as in the shipped law. */
sloped candidate_foot(sloped plate);

/* Space current 2 E1^x/kg1 with E1 = (u/kp) ln(1 + exp(kp (1/mu + Vg/sqrt(soft_squared + u^2)))), Koren's form.
 * In:   c: mu, exponent, kg1, kp; u > 0
 * Out:  *effective, if wanted: E1 */
sloped candidate_space_current(const double *c, sloped u, sloped grid, double soft_squared, sloped *effective);

typedef struct {
    const char *name;
    plw_law_kind kind;        /* tubes of the other kind keep the shipped law and its expectations */
    size_t count;             /* of coefficients; mu, exponent, kg1, kp first, and every current is as 1/kg1 */
    const char *const *names; /* of the coefficients */
    size_t signed_index;      /* the one that may have either sign, or PLW_LAW_COEFFICIENTS_MOST */
    const double *most;       /* the largest value of each, or NULL */
    /* Plate and screen current; NULL: the shipped law, as for every triode.  screen > 0 or plate > 0 */
    void (*currents)(const double *c, sloped plate, sloped screen, sloped grid, sloped *plate_amps,
                     sloped *screen_amps);
    const plw_expectation *weak; /* wide ones, for the first pass */
} candidate;

/* Each candidate's file defines this. */
extern const candidate candidate_law;

#endif
