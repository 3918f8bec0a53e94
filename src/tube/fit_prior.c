/* Expectations of a law's coefficients before a row is seen, and starts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/fit_prior.h"

#include <math.h>

enum { MU, EXPONENT, KG1, KP };
enum { TRIODE_CONTACT = 5, PENTODE_CAPTURE = 7, PENTODE_CONTACT = 8 };
#define CAPTURE_MOST 0.5 /* as the law has it */

static size_t contact_index(plw_law_kind kind) {
    return kind == PLW_LAW_TRIODE ? TRIODE_CONTACT : PENTODE_CONTACT;
}

void plw_law_coordinates(const plw_law *law, double coordinates[PLW_LAW_COEFFICIENTS_MOST]) {
    for (size_t index = 0; index < plw_law_coefficient_count(law->kind); index++) {
        const double value = law->coefficient[index];
        coordinates[index] = index == contact_index(law->kind) ? value : log(value);
    }
    coordinates[KP] -= coordinates[MU];
}

plw_law plw_law_at_coordinates(plw_law_kind kind, const double coordinates[PLW_LAW_COEFFICIENTS_MOST]) {
    plw_law law = {.kind = kind};
    for (size_t index = 0; index < plw_law_coefficient_count(kind); index++) {
        law.coefficient[index] = index == contact_index(kind) ? coordinates[index] : exp(coordinates[index]);
    }
    law.coefficient[KP] *= law.coefficient[MU];
    if (kind == PLW_LAW_PENTODE && law.coefficient[PENTODE_CAPTURE] > CAPTURE_MOST) {
        law.coefficient[PENTODE_CAPTURE] = CAPTURE_MOST;
    }
    return law;
}

double plw_coordinate_error_relative(const plw_law *law, size_t index, double coordinate_error) {
    if (index == contact_index(law->kind)) {
        const double volts = fabs(law->coefficient[index]);
        return volts > 0.0 ? coordinate_error / volts : (double)NAN;
    }
    return coordinate_error;
}

typedef struct {
    double expected, deviation; /* value (of kp: kp/mu); standard deviation of its coordinate */
} expectation;

/* Centres and spreads over the catalogue's own fits, rounded; mu and the perveance of a type are left open.  The
 * contact potential of a filament tube takes up half the filament's volts as well. */
static const expectation filament_triode[] = {{8.0, 1.5}, {1.5, 0.03},  {2000.0, 4.0},
                                              {8.0, 0.6}, {300.0, 0.5}, {0.0, 2.0}};
static const expectation heater_triode[] = {{20.0, 1.5}, {1.5, 0.03},  {1500.0, 4.0},
                                            {6.5, 0.6},  {300.0, 0.5}, {0.6, 0.3}};
static const expectation beam[] = {{10.0, 1.0}, {1.5, 0.02}, {1000.0, 3.0}, {4.7, 0.35}, {0.045, 0.5},
                                   {0.85, 0.4}, {16.0, 0.6}, {0.35, 0.4},   {0.65, 0.2}};
static const expectation pentode[] = {{10.0, 1.0}, {1.5, 0.02}, {1000.0, 3.0}, {4.7, 0.35}, {0.025, 0.9},
                                      {1.3, 0.4},  {6.5, 0.5},  {0.37, 0.4},   {0.65, 0.2}};

static const expectation *expectations_for(const plw_tube *tube) {
    switch (tube->kind) {
    case PLW_KIND_BEAM:
        return beam;
    case PLW_KIND_PENTODE:
        return pentode;
    case PLW_KIND_TRIODE:
    case PLW_KIND_RECTIFIER:
        break;
    }
    return tube->directly_heated ? filament_triode : heater_triode;
}

plw_prior plw_prior_for(const plw_observations *observations) {
    const expectation *table = expectations_for(observations->tube);
    const plw_law_kind kind = observations->screened ? PLW_LAW_PENTODE : PLW_LAW_TRIODE;
    plw_prior prior = {{0}, {0}};
    for (size_t index = 0; index < plw_law_coefficient_count(kind); index++) {
        prior.expected[index] = index == contact_index(kind) ? table[index].expected : log(table[index].expected);
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
