/* Candidate: the shipped law (src/tube/law.c), but with the knee at fixed plate volts instead of moving out with the
 * current.
 *
 *   f = (2/pi) atan((pi/2) p/Vk)       all else as shipped
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "candidate.h"

enum { PENETRATION = 4, KNEE_VOLTS, DIVISION, CAPTURE, CONTACT, COUNT };

#define CONTROL_SOFT_VOLTS_SQUARED 50.0
#define SCREEN_SOFT_VOLTS_SQUARED 25.0
#define HALF_DIVISION_EXPONENT 0.1
#define HALF_PI 1.57079632679489661923

static const char *const names[COUNT] = {"mu",         "exponent", "kg1",     "kp",           "penetration",
                                         "knee-volts", "division", "capture", "contact-volts"};
static const double most[COUNT] = {[CAPTURE] = 0.5};

static sloped softened_square(sloped volts) {
    return slope_add(slope_multiply(volts, volts), slope_constant(SCREEN_SOFT_VOLTS_SQUARED));
}

static void currents(const double *c, sloped plate, sloped screen, sloped grid, sloped *plate_amps,
                     sloped *screen_amps) {
    const sloped one = slope_constant(1.0);
    const sloped p = candidate_foot(plate);
    const sloped u = slope_add(screen, slope_scale(p, c[PENETRATION]));
    if (u.value <= 0.0) {
        return;
    }
    const sloped space =
        candidate_space_current(c, u, slope_add(grid, slope_constant(c[CONTACT])), CONTROL_SOFT_VOLTS_SQUARED, NULL);
    const sloped f = slope_scale(slope_atan(slope_scale(p, HALF_PI / c[KNEE_VOLTS])), 1.0 / HALF_PI);
    const sloped plate_square = softened_square(plate.value > 0.0 ? plate : slope_constant(0.0));
    const sloped positive_screen = screen.value > 0.0 ? screen : slope_constant(0.0);
    const sloped screen_square = softened_square(positive_screen);
    const sloped weight = slope_divide(slope_multiply(positive_screen, positive_screen), screen_square);
    const sloped ratio =
        slope_scale(slope_power(slope_divide(plate_square, screen_square), HALF_DIVISION_EXPONENT), c[DIVISION]);
    const sloped share = slope_divide(weight, slope_add(one, ratio));
    const sloped plate_share = slope_add(one, slope_scale(share, -1.0));
    const sloped untaken = slope_add(one, slope_scale(slope_multiply(f, f), -1.0));
    const sloped captured = slope_scale(slope_multiply(slope_multiply(weight, plate_share), untaken), c[CAPTURE]);
    *plate_amps = slope_multiply(slope_multiply(space, plate_share), f);
    *screen_amps = slope_multiply(space, slope_add(share, captured));
}

static const plw_expectation weak[COUNT] = {{10.0, 1.0}, {1.5, 0.08}, {1000.0, 3.0}, {5.0, 0.6}, {0.03, 1.0},
                                            {15.0, 1.0}, {10.0, 1.0}, {0.35, 1.0},   {0.5, 0.5}};

const candidate candidate_law = {
    .name = "fixed-knee",
    .kind = PLW_LAW_PENTODE,
    .count = COUNT,
    .names = names,
    .signed_index = CONTACT,
    .most = most,
    .currents = currents,
    .weak = weak,
};
