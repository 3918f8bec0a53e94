/* What is expected of the shipped law's coefficients before a row is seen.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "tube/fit_prior.h"

enum { TRIODE_CONTACT = 5, PENTODE_CAPTURE = 7, PENTODE_CONTACT = 8 };
#define CAPTURE_MOST 0.5 /* as the law has it */

size_t plw_law_signed_coefficient(plw_law_kind kind) {
    return kind == PLW_LAW_TRIODE ? TRIODE_CONTACT : PENTODE_CONTACT;
}

double plw_law_coefficient_most(plw_law_kind kind, size_t index) {
    return kind == PLW_LAW_PENTODE && index == PENTODE_CAPTURE ? CAPTURE_MOST : (double)INFINITY;
}

/* Value (of kp: kp/mu) and standard deviation of its coordinate: centres and spreads over the catalogue's own fits,
 * rounded; mu and the perveance of a type are left open.  The contact potential of a filament tube takes up half the
 * filament's volts as well. */
static const plw_expectation filament_triode[] = {{8.0, 1.5}, {1.5, 0.03},  {2000.0, 4.0},
                                                  {8.0, 0.6}, {300.0, 0.5}, {0.0, 2.0}};
static const plw_expectation heater_triode[] = {{20.0, 1.5}, {1.5, 0.03},  {1500.0, 4.0},
                                                {6.5, 0.6},  {300.0, 0.5}, {0.6, 0.3}};
static const plw_expectation beam[] = {{10.0, 1.0}, {1.5, 0.02}, {1000.0, 3.0}, {4.7, 0.35}, {0.045, 0.5},
                                       {0.85, 0.4}, {16.0, 0.6}, {0.35, 0.4},   {0.65, 0.2}};
static const plw_expectation pentode[] = {{10.0, 1.0}, {1.5, 0.02}, {1000.0, 3.0}, {4.7, 0.35}, {0.025, 0.9},
                                          {1.3, 0.4},  {6.5, 0.5},  {0.37, 0.4},   {0.65, 0.2}};

const plw_expectation *plw_law_expectations(const plw_tube *tube) {
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
