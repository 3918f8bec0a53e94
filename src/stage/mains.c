/* The stage with the mains low and high.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/mains.h"

#include "platewright/plate_supply.h"

static plw_mains_corner solve_corner(const plw_stage *stage, double mains_percent) {
    plw_mains_corner corner = {.mains_percent = mains_percent};
    plw_stage at = *stage;
    at.supply = plw_supply_at_mains(&stage->supply, mains_percent);
    at.screen_supply_volts *= mains_percent / 100.0; /* NaN stays */
    at.fixed_bias_volts *= mains_percent / 100.0;
    corner.solved = plw_quiescent_solve(&at, &corner.quiescent, NULL) == PLW_OK;
    if (corner.solved) {
        corner.within_ratings = plw_limits_check(&at, &corner.quiescent, NULL, corner.ratings, &corner.ratings_count);
    }
    return corner;
}

plw_status plw_mains_solve(const plw_stage *stage, plw_mains *mains, plw_error *error) {
    const plw_status status = plw_stage_validate(stage, true, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_mains made = {.low = solve_corner(stage, PLW_MAINS_LOW_PERCENT),
                      .high = solve_corner(stage, PLW_MAINS_HIGH_PERCENT)};
    made.system = plw_tube_ratings(stage->tube, stage->variant, stage->connection)->system;
    made.counted = made.system == PLW_SYSTEM_DESIGN_MAXIMUM || made.system == PLW_SYSTEM_ABSOLUTE;
    const bool broken =
        (made.low.solved && !made.low.within_ratings) || (made.high.solved && !made.high.within_ratings);
    made.within_ratings = !made.counted || !broken;
    *mains = made;
    return PLW_OK;
}
