/* Candidate: Koren's pentode with a finite plate resistance and a screen current that rises at low plate volts.
 *
 *   E1 = (Vs/kp) ln(1 + exp(kp (1/mu + Vg/Vs)))
 *   Ip = 2 E1^x/kg1 atan(Vp/kvb) (1 + lambda Vp)
 *   Is = E1^x/(kg1 r) (1 + alpha exp(-Vp/Vk))       r = kg2/kg1
 *
 * Plate and screen are not tied together: the cathode need not supply what both take.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "candidate.h"

enum { KVB = 4, LAMBDA, SCREEN_RATIO, ALPHA, SCREEN_VOLTS, COUNT };

static const char *const names[COUNT] = {"mu",     "exponent",     "kg1",   "kp",          "kvb",
                                         "lambda", "screen-ratio", "alpha", "screen-volts"};

static void currents(const double *c, sloped plate, sloped screen, sloped grid, sloped *plate_amps,
                     sloped *screen_amps) {
    if (screen.value <= 0.0) {
        return;
    }
    const sloped half = slope_scale(candidate_space_current(c, screen, grid, 0.0, NULL), 0.5);
    const sloped at = plate.value > 0.0 ? plate : slope_constant(0.0);
    const sloped knee = slope_atan(slope_scale(at, 1.0 / c[KVB]));
    const sloped rise = slope_add(slope_constant(1.0), slope_scale(at, c[LAMBDA]));
    *plate_amps = slope_scale(slope_multiply(slope_multiply(half, knee), rise), 2.0);
    const sloped fall = slope_scale(slope_exp(slope_scale(at, -1.0 / c[SCREEN_VOLTS])), c[ALPHA]);
    *screen_amps = slope_scale(slope_multiply(half, slope_add(slope_constant(1.0), fall)), 1.0 / c[SCREEN_RATIO]);
}

static const plw_expectation weak[COUNT] = {{10.0, 1.0}, {1.5, 0.08}, {1000.0, 3.0}, {5.0, 0.6}, {15.0, 1.0},
                                            {3e-4, 1.0}, {4.0, 1.0},  {2.0, 1.0},    {30.0, 1.0}};

const candidate candidate_law = {
    .name = "trial",
    .kind = PLW_LAW_PENTODE,
    .count = COUNT,
    .names = names,
    .signed_index = PLW_LAW_COEFFICIENTS_MOST,
    .currents = currents,
    .weak = weak,
};
