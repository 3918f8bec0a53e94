/* Candidate: the shipped law itself (src/tube/law.c), its expectations found as those of the other candidates.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "candidate.h"

enum { CAPTURE = 7, CONTACT, COUNT };

static const char *const names[COUNT] = {"mu",   "exponent", "kg1",     "kp",           "penetration",
                                         "knee", "division", "capture", "contact-volts"};
static const double most[COUNT] = {[CAPTURE] = 0.5};

static const plw_expectation weak[COUNT] = {{10.0, 1.0}, {1.5, 0.08}, {1000.0, 3.0}, {5.0, 0.6}, {0.03, 1.0},
                                            {1.0, 1.0},  {10.0, 1.0}, {0.35, 1.0},   {0.5, 0.5}};

const candidate candidate_law = {
    .name = "moving-knee",
    .kind = PLW_LAW_PENTODE,
    .count = COUNT,
    .names = names,
    .signed_index = CONTACT,
    .most = most,
    .currents = NULL,
    .weak = weak,
};
