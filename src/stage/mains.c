/* The stage with the mains low and high.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/mains.h"

#include "platewright/plate_supply.h"

enum { AIM_ROUNDS = 4 };

/* A lowered aim is taken this much lower still, so that the rating is kept and not merely met. */
#define AIM_CLEARANCE 0.995

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

/* By how much the worst rating of heat or current is passed with the mains high, where the maker leaves them to the
 * builder; 1 or less: by nothing. */
static double over_at_high_mains(const plw_stage *stage, double ohms) {
    plw_stage trial = *stage;
    plw_mains mains;
    double worst = 0.0;
    trial.cathode_resistor_ohms = ohms;
    if (plw_mains_solve(&trial, &mains, NULL) != PLW_OK || !mains.counted || !mains.high.solved) {
        return 0.0;
    }
    for (size_t i = 0; i < mains.high.ratings_count; i++) {
        const plw_rating_check *check = &mains.high.ratings[i];
        if (check->unit != PLW_UNIT_VOLT && check->share_percent > 100.0 * worst) {
            worst = check->share_percent / 100.0;
        }
    }
    return worst;
}

plw_status plw_bias_choose_for_mains(const plw_stage *stage, plw_series series, plw_bias_choice *choice,
                                     double *before_percent, plw_error *error) {
    plw_aim aim = {.kind = PLW_AIM_DISSIPATION, .value = PLW_AIM_DEFAULT_PERCENT};
    const plw_status status = plw_bias_choose(stage, aim, series, choice, error);
    if (status != PLW_OK) {
        return status;
    }
    *before_percent = 0.0;
    for (int round = 0; round < AIM_ROUNDS; round++) {
        const double over = over_at_high_mains(stage, choice->option[choice->chosen].ohms);
        if (over <= 1.0) {
            break;
        }
        aim.value *= AIM_CLEARANCE / over;
        /* Where nothing is to be had at the lower aim, the last choice stands and its ratings tell. */
        if (plw_bias_choose(stage, aim, series, choice, NULL) != PLW_OK) {
            break;
        }
        *before_percent = PLW_AIM_DEFAULT_PERCENT;
    }
    return PLW_OK;
}
