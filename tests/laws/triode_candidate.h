/* A candidate for triodes: the shipped law with a foot that grows as the plate volts to a power held fast.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_LAWS_TRIODE_CANDIDATE_H
#define TESTS_LAWS_TRIODE_CANDIDATE_H

#include "candidate.h"

#define TRIODE_CANDIDATE(title, growth)                                                                                \
    enum { CONTACT = 5, COUNT = 7 };                                                                                   \
    static const char *const names[COUNT] = {"mu", "exponent", "kg1", "kp", "kvb", "contact-volts", "foot-growth"};    \
    static const plw_expectation weak[COUNT] = {{10.0, 1.5},  {1.5, 0.08}, {1500.0, 4.0}, {7.0, 1.0},                  \
                                                {300.0, 0.5}, {0.5, 0.5},  {growth, 0.02}};                            \
    const candidate candidate_law = {.name = (title),                                                                  \
                                     .kind = PLW_LAW_TRIODE,                                                           \
                                     .count = COUNT,                                                                   \
                                     .names = names,                                                                   \
                                     .signed_index = CONTACT,                                                          \
                                     .currents = NULL,                                                                 \
                                     .weak = weak}

#endif
