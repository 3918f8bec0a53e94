/* The verdict on a stage: the same in text, CSV and JSON, and as the exit status has it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_VERDICT_H
#define REPORT_VERDICT_H

#include "platewright/report.h"

/* What is broken and counts; the first is the nearest to the bench: the tube at rest, then driven, then with the mains
 * high and low, then the supply. */
typedef struct {
    size_t broken;                        /* 0: every rating is kept */
    const char *where;                    /* of the first: "", "with the mains 10 % up, " ... a constant */
    const plw_rating_check *first;        /* of the tube; NULL: of the supply */
    const plw_supply_check *first_supply; /* NULL: of the tube */
} plw_verdict;

plw_verdict plw_verdict_of(const plw_answer *answer);

/* The verdict in words: a heading, "OVER A RATING at rest:", and what it is, "plate dissipation 12.4 W of 12.0 W, and 2
 * more".
 * Out:  heading and what, what empty where there is nothing to add */
void plw_verdict_words(const plw_answer *answer, char heading[80], char what[120]);

/* Does an option keep every rating that counts, with the mains high and low and those of the supply too? */
bool plw_option_within(const plw_answer *answer, const plw_bias_option *option);

#endif
