/* Coordinates of a fit, what is expected of them before a row is seen, and starts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/fit_prior.h"

#include <math.h>

/* Every law begins with these. */
enum { MU, EXPONENT, KG1, KP };

void plw_law_coordinates(const plw_law *law, double coordinates[PLW_LAW_COEFFICIENTS_MOST]) {
    for (size_t index = 0; index < plw_law_coefficient_count(law->kind); index++) {
        const double value = law->coefficient[index];
        coordinates[index] = index == plw_law_signed_coefficient(law->kind) ? value : log(value);
    }
    coordinates[KP] -= coordinates[MU];
}

plw_law plw_law_at_coordinates(plw_law_kind kind, const double coordinates[PLW_LAW_COEFFICIENTS_MOST]) {
    const size_t signed_index = plw_law_signed_coefficient(kind);
    plw_law law = {.kind = kind};
    for (size_t index = 0; index < plw_law_coefficient_count(kind); index++) {
        law.coefficient[index] = index == signed_index ? coordinates[index] : exp(coordinates[index]);
        const double most = plw_law_coefficient_most(kind, index);
        if (law.coefficient[index] > most) {
            law.coefficient[index] = most;
        }
    }
    law.coefficient[KP] *= law.coefficient[MU];
    return law;
}

void plw_covariance_of_coefficients(size_t count, double *covariance) {
    for (size_t index = 0; index < count; index++) {
        covariance[KP * count + index] += covariance[MU * count + index];
    }
    for (size_t index = 0; index < count; index++) {
        covariance[index * count + KP] += covariance[index * count + MU];
    }
}

double plw_coordinate_error_relative(const plw_law *law, size_t index, double coordinate_error) {
    if (index == plw_law_signed_coefficient(law->kind)) {
        const double volts = fabs(law->coefficient[index]);
        return coordinate_error < volts ? coordinate_error / volts : (double)NAN; /* else not even its sign is known */
    }
    return coordinate_error;
}

plw_prior plw_prior_for(const plw_observations *observations) {
    const plw_expectation *table = plw_law_expectations(observations->tube);
    const plw_law_kind kind = observations->screened ? PLW_LAW_PENTODE : PLW_LAW_TRIODE;
    plw_prior prior = {{0}, {0}};
    for (size_t index = 0; index < plw_law_coefficient_count(kind); index++) {
        prior.expected[index] =
            index == plw_law_signed_coefficient(kind) ? table[index].expected : log(table[index].expected);
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
    static const double mu_factor[PLW_STARTS] = {1.0, 0.7, 1.0};
    static const double steepness_factor[PLW_STARTS] = {1.0, 1.0, 0.5};
    plw_law law = plw_law_at_coordinates(observations->screened ? PLW_LAW_PENTODE : PLW_LAW_TRIODE, prior->expected);
    const double steepness = law.coefficient[KP] / law.coefficient[MU] * steepness_factor[attempt % PLW_STARTS];
    law.coefficient[MU] = mu_from_rows(observations, law.coefficient[MU]) * mu_factor[attempt % PLW_STARTS];
    law.coefficient[KP] = steepness * law.coefficient[MU];
    return law;
}
