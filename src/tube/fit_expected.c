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

/* Value (of kp: kp/mu) and standard deviation of its coordinate; mu and the perveance of a type are left open.  Near the
 * centres and spreads over the catalogue's own fits, and of values near those the ones under which rows left out of a
 * fit come back best over the whole catalogue (tests/laws/README.md tells what that is worth).  They describe the law
 * as much as the tubes: some make up for what its form lacks.  The contact potential of a filament tube takes up half
 * the filament's volts as well. */
static const plw_expectation filament_triode[] = {{8.0, 1.5},   {1.61, 0.017}, {2000.0, 4.0}, {16.0, 1.2},
                                                  {210.0, 0.5}, {2.3, 0.8},    {0.6, 0.05}};
static const plw_expectation heater_triode[] = {{20.0, 1.5},  {1.55, 0.012}, {1500.0, 4.0}, {3.3, 0.34},
                                                {370.0, 0.5}, {0.85, 0.25},  {0.63, 0.05}};
static const plw_expectation beam[] = {{10.0, 1.0},  {1.53, 0.023}, {1000.0, 3.0}, {7.0, 0.8},  {0.067, 0.46},
                                       {0.85, 0.33}, {18.0, 0.38},  {0.39, 0.81},  {0.66, 0.24}};
static const plw_expectation pentode[] = {{10.0, 1.0}, {1.5, 0.013}, {1000.0, 3.0}, {3.8, 0.59}, {0.021, 1.2},
                                          {1.7, 0.35}, {7.5, 0.78},  {0.43, 0.41},  {0.67, 0.25}};

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
