/* The verdict on a stage.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/verdict.h"

#include <stdio.h>

#include "report/layout.h"
#include "report/supply_report.h"

/* Count the broken checks of a group, at rest or driven; the one passed by most is the first, if there is none yet. */
static void take_broken(plw_verdict *v, const char *where, const plw_rating_check *checks, size_t count,
                        plw_when when) {
    const plw_rating_check *worst = NULL;
    for (size_t index = 0; index < count; index++) {
        const plw_rating_check *check = &checks[index];
        if (!check->ok && check->when == when) {
            v->broken++;
            if (worst == NULL || check->share_percent > worst->share_percent) {
                worst = check;
            }
        }
    }
    if (v->first == NULL && worst != NULL) {
        v->first = worst;
        v->where = where;
    }
}

static void take_tube(plw_verdict *v, const char *where, const plw_rating_check *checks, size_t count) {
    take_broken(v, where, checks, count, PLW_AT_IDLE);
    take_broken(v, where, checks, count, PLW_AT_FULL_DRIVE);
}

static void take_supply(plw_verdict *v, const plw_supply_answer *supply) {
    for (size_t index = 0; index < supply->checks_count; index++) {
        if (!supply->checks[index].ok) {
            v->broken++;
            if (v->first == NULL && v->first_supply == NULL) {
                v->first_supply = &supply->checks[index];
            }
        }
    }
}

plw_verdict plw_verdict_of(const plw_answer *answer) {
    plw_verdict v = {.where = ""};
    const plw_mains *mains = answer->mains;
    take_tube(&v, "", answer->option->ratings, answer->option->ratings_count);
    if (mains != NULL && mains->counted && mains->high.solved) {
        take_tube(&v, "with the mains 10 % up, ", mains->high.ratings, mains->high.ratings_count);
    }
    if (mains != NULL && mains->counted && mains->low.solved) {
        take_tube(&v, "with the mains 10 % down, ", mains->low.ratings, mains->low.ratings_count);
    }
    if (answer->supply != NULL) {
        take_supply(&v, answer->supply);
    }
    return v;
}

static void within_words(const plw_answer *answer, char heading[80]) {
    const plw_mains *mains = answer->mains;
    snprintf(heading, 80, "within every rating, at rest and at full drive%s%s",
             mains != NULL && mains->counted && mains->high.solved ? ", mains 10 % up" : "",
             answer->choice != NULL && !answer->choice->aim_reached ? ";" : "");
}

static void supply_words(const plw_supply_check *check, char *what, size_t size) {
    char name[64];
    snprintf(what, size, check->at_least ? "%s %s, %s or more wanted" : "%s %s of %s",
             plw_supply_check_name(check, name, sizeof name), plw_cell_quantity(check->value, check->unit, 3).text,
             plw_cell_quantity(check->limit, check->unit, 3).text);
}

void plw_verdict_words(const plw_answer *answer, char heading[80], char what[120]) {
    const plw_verdict v = plw_verdict_of(answer);
    what[0] = '\0';
    if (v.broken == 0) {
        within_words(answer, heading);
        if (answer->choice != NULL && !answer->choice->aim_reached) {
            snprintf(what, 120, "the aim is not reached");
        }
        return;
    }
    char first[96];
    if (v.first != NULL) {
        snprintf(heading, 80, "OVER A RATING %s%s:", v.where,
                 v.first->when == PLW_AT_IDLE ? "at rest" : "at full drive");
        snprintf(first, sizeof first, "%s %s of %s", v.first->name,
                 plw_cell_quantity(v.first->value, v.first->unit, 3).text,
                 plw_cell_quantity(v.first->limit, v.first->unit, 3).text);
    } else {
        snprintf(heading, 80, "OVER A RATING of the supply:");
        supply_words(v.first_supply, first, sizeof first);
    }
    if (v.broken > 1) {
        snprintf(what, 120, "%.90s, and %u more", first, (unsigned)(v.broken - 1));
    } else {
        snprintf(what, 120, "%s", first);
    }
}

bool plw_option_within(const plw_answer *answer, const plw_bias_option *option) {
    const bool at_mains =
        option == answer->option && answer->mains != NULL ? answer->mains->within_ratings : option->within_at_mains;
    return option->within_ratings && at_mains && (answer->supply == NULL || answer->supply->within_ratings);
}
