/* What the reports of a stage and of its plate supply share.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_SUPPLY_REPORT_H
#define REPORT_SUPPLY_REPORT_H

#include "platewright/report.h"
#include "report/json_sink.h"

/* The object "supply". */
void plw_json_put_supply(const plw_json_sink *root, const plw_supply_answer *answer);

/* The ratings of its parts, appended to those of the tube. */
void plw_json_append_supply_ratings(json_t *ratings, const plw_supply_answer *answer, bool *failed);

/* The ratings of its parts as lines. */
void plw_put_supply_ratings(FILE *out, const plw_supply_answer *answer);

/* The group of lines for mains low and high.  In: the answer has mains. */
void plw_put_mains(FILE *out, const plw_answer *answer);

/* "capacitor 2 ripple current": what a check is of; cut if too small. */
const char *plw_supply_check_name(const plw_supply_check *check, char *buffer, size_t size);

#endif
