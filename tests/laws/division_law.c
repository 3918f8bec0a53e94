/* Candidate: a space current divided between plate and screen as a power of the ratio of their volts, at all plate
 * volts alike (K. Spangenberg, Proc. IRE 28, May 1940, p. 226; C. M. Wallis, Proc. IRE 35, April 1947).
 *
 *   p = Vp^2/(Vp + 1 V)      u = Vs + d p
 *   Ik = 2 E1(u, Vg + Vc)^x/kg1      g = delta (p/Vs)^q
 *   Ip = Ik g/(1 + g)        Is = Ik/(1 + g)
 *
 * Space current and contact potential are those of the shipped law; q is free (Spangenberg: 1/2 over a wide range).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "candidate.h"

enum { PENETRATION = 4, DELTA, POWER, CONTACT, COUNT };

#define CONTROL_SOFT_VOLTS_SQUARED 50.0
#define LEAST_VOLTS 1e-6

static const char *const names[COUNT] = {"mu",          "exponent", "kg1",   "kp",
                                         "penetration", "delta",    "power", "contact-volts"};

static void currents(const double *c, sloped plate, sloped screen, sloped grid, sloped *plate_amps,
                     sloped *screen_amps) {
    const sloped p = candidate_foot(plate);
    const sloped u = slope_add(screen, slope_scale(p, c[PENETRATION]));
    if (u.value <= 0.0) {
        return;
    }
    const sloped space =
        candidate_space_current(c, u, slope_add(grid, slope_constant(c[CONTACT])), CONTROL_SOFT_VOLTS_SQUARED, NULL);
    if (p.value <= LEAST_VOLTS) {
        *screen_amps = space;
        return;
    }
    if (screen.value <= LEAST_VOLTS) {
        *plate_amps = space;
        return;
    }
    const sloped ratio = slope_scale(slope_power(slope_divide(p, screen), c[POWER]), c[DELTA]);
    *screen_amps = slope_divide(space, slope_add(slope_constant(1.0), ratio));
    *plate_amps = slope_multiply(*screen_amps, ratio);
}

static const plw_expectation weak[COUNT] = {{10.0, 1.0}, {1.5, 0.08}, {1000.0, 3.0}, {5.0, 0.6},
                                            {0.03, 1.0}, {8.0, 1.0},  {0.5, 1.0},    {0.5, 0.5}};

const candidate candidate_law = {
    .name = "division",
    .kind = PLW_LAW_PENTODE,
    .count = COUNT,
    .names = names,
    .signed_index = CONTACT,
    .currents = currents,
    .weak = weak,
};
