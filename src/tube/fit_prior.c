/* Expectations of a law's coefficients before a row is seen, and starts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/fit_prior.h"

#include <math.h>

typedef struct {
    double expected, deviation; /* value; standard deviation of its logarithm */
} expectation;

/* Medians and spreads over the catalogue's own fits, rounded; the perveance and mu of a type are left open. */
static const expectation triode[] = {
    {8.0, 1.5},    /* mu */
    {1.42, 0.08},  /* exponent */
    {1500.0, 4.0}, /* kg1 */
    {60.0, 0.8},   /* kp */
    {300.0, 0.8},  /* kvb */
    {0.3, 0.7},    /* contact volts */
};
static const expectation pentode[] = {
    {10.0, 1.0},  /* mu */
    {1.40, 0.06}, /* exponent */
    {950.0, 3.0}, /* kg1 */
    {50.0, 0.6},  /* kp */
    {0.052, 0.6}, /* penetration */
    {1.5, 0.4},   /* knee */
    {2.28, 0.2},  /* knee sharpness */
    {10.0, 1.0},  /* division */
    {0.65, 0.4},  /* capture */
};

plw_prior plw_prior_for(const plw_observations *observations) {
    const expectation *table = observations->screened ? pentode : triode;
    const plw_law_kind kind = observations->screened ? PLW_LAW_PENTODE : PLW_LAW_TRIODE;
    plw_prior prior = {{0}, {0}};
    for (size_t index = 0; index < plw_law_coefficient_count(kind); index++) {
        prior.logarithm[index] = log(table[index].expected);
        prior.deviation[index] = table[index].deviation;
    }
    return prior;
}

/* mu from the printed bias: the usual output stage is biased to about 0.62 of the projected cut-off. */
static double mu_from_rows(const plw_observations *observations, double otherwise) {
    const plw_tube *tube = observations->tube;
    double mu = otherwise;
    for (size_t index = observations->count; index-- > 0;) {
        const plw_observation *o = &observations->observation[index];
        if (!o->is_row) {
            continue;
        }
        const plw_row *r = &tube->rows[o->index];
        const double control = observations->screened && isfinite(r->screen_volts) ? r->screen_volts : r->plate_volts;
        if (!observations->screened && isfinite(r->mu)) {
            mu = r->mu;
        } else if (r->grid_volts < 0.0) {
            mu = -0.62 * control / r->grid_volts;
        }
    }
    return mu;
}

plw_law plw_prior_start(const plw_observations *observations, const plw_prior *prior, size_t attempt) {
    static const double mu_factor[PLW_STARTS] = {1.0, 0.5, 2.0, 1.0};
    plw_law law = {.kind = observations->screened ? PLW_LAW_PENTODE : PLW_LAW_TRIODE};
    for (size_t index = 0; index < plw_law_coefficient_count(law.kind); index++) {
        law.coefficient[index] = exp(prior->logarithm[index]);
    }
    law.coefficient[0] = mu_from_rows(observations, law.coefficient[0]) * mu_factor[attempt % PLW_STARTS];
    if (attempt == 3) {
        law.coefficient[1] = 1.5;
    }
    return law;
}
