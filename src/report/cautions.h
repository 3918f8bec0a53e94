/* What a builder must be warned of: this stage's own dangers, and those of every chassis.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_CAUTIONS_H
#define REPORT_CAUTIONS_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/report.h"

enum { PLW_CAUTION_SIZE = 512, PLW_CAUTIONS_MOST = 40 };

/* One sentence or two a line, UTF-8, without a line break; the stage's own first, then what holds for every stage of its kind.
 * In:   most: room in lines; PLW_CAUTIONS_MOST is always enough
 * Out:  *own, when not NULL: how many are this stage's own
 * Ret:  how many were written */
size_t plw_report_cautions(const plw_answer *answer, char (*lines)[PLW_CAUTION_SIZE], size_t most, size_t *own);

/* The same for a plate supply. */
size_t plw_supply_cautions(const plw_supply_finding *finding, char (*lines)[PLW_CAUTION_SIZE], size_t most,
                           size_t *own);

/* Lines being written. */
typedef struct {
    char (*lines)[PLW_CAUTION_SIZE];
    size_t most, count;
} plw_caution_list;

void plw_caution_say(plw_caution_list *list, const char *format, ...) PLW_PRINTF(2, 3);

/* What a set without a mains transformer wants. */
void plw_caution_live_chassis(plw_caution_list *list);

/* Those of every chassis. */
void plw_cautions_standing(plw_caution_list *list, bool live_chassis);

/* Of the plate supply: a rating of its parts exceeded, parts that were not told. */
void plw_cautions_of_supply(plw_caution_list *list, const plw_supply_answer *answer);

#endif
