/* Every rating of the tube against the stage.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/limits.h"

#include <math.h>

/* "15.0 W of 15.0 W" is not over a rating: three digits, as printed, tell no less than this apart. */
#define TOLD_APART 5e-4

typedef struct {
    plw_rating_check *check;
    size_t count;
    bool kept;
} tally;

static void compare(tally *t, const char *name, double value, double limit, plw_unit unit, plw_when when) {
    if (!isfinite(value) || !isfinite(limit) || t->count >= PLW_RATING_CHECKS_MOST) {
        return;
    }
    const bool ok = value <= limit * (1.0 + TOLD_APART);
    t->check[t->count++] = (plw_rating_check){
        .name = name,
        .value = value,
        .limit = limit,
        .unit = unit,
        .share_percent = limit > 0.0 ? 100.0 * value / limit : (double)NAN,
        .ok = ok,
        .when = when,
    };
    t->kept = t->kept && ok;
}

/* Heat and current, alike at rest and driven. */
static void compare_load(tally *t, const plw_ratings *r, bool both_as_triode, double plate_watts, double screen_watts,
                         double cathode_amps, plw_when when) {
    const double screen = isfinite(screen_watts) ? screen_watts : 0.0;
    if (both_as_triode) {
        compare(t, PLW_NAME_PLATE_AND_SCREEN, plate_watts + screen, r->plate_watts, PLW_UNIT_WATT, when);
    } else {
        compare(t, "plate dissipation", plate_watts, r->plate_watts, PLW_UNIT_WATT, when);
        const bool driven_limit = when == PLW_AT_FULL_DRIVE && isfinite(r->screen_watts_full_drive);
        compare(t, "screen dissipation", screen_watts, driven_limit ? r->screen_watts_full_drive : r->screen_watts,
                PLW_UNIT_WATT, when);
        compare(t, "total dissipation", plate_watts + screen, r->total_watts, PLW_UNIT_WATT, when);
    }
    compare(t, "cathode current", cathode_amps, r->cathode_amps, PLW_UNIT_AMPERE, when);
}

bool plw_limits_check(const plw_stage *stage, const plw_quiescent *quiescent, const plw_signal *signal,
                      plw_rating_check checks[PLW_RATING_CHECKS_MOST], size_t *count) {
    const plw_ratings *r = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    tally t = {.check = checks, .kept = true};
    /* Where the maker rates the triode connection of a screened tube, plate and screen count together. */
    const bool both_as_triode = r->connection == PLW_CONNECTION_TRIODE && stage->tube->kind != PLW_KIND_TRIODE;
    compare(&t, "plate voltage", quiescent->plate_volts, r->plate_volts, PLW_UNIT_VOLT, PLW_AT_IDLE);
    compare(&t, "screen voltage", quiescent->screen_volts, r->screen_volts, PLW_UNIT_VOLT, PLW_AT_IDLE);
    compare_load(&t, r, both_as_triode, quiescent->plate_watts, quiescent->screen_watts, quiescent->cathode_amps,
                 PLW_AT_IDLE);
    if (!stage->tube->directly_heated && !stage->transformerless) {
        compare(&t, "heater to cathode", quiescent->cathode_volts, r->heater_cathode_volts, PLW_UNIT_VOLT, PLW_AT_IDLE);
    }
    if (signal != NULL) {
        compare_load(&t, r, both_as_triode, signal->plate_watts, signal->screen_watts, signal->cathode_amps,
                     PLW_AT_FULL_DRIVE);
    }
    *count = t.count;
    return t.kept;
}
