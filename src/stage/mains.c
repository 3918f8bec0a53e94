/* The stage with the mains low and high.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/mains.h"

#include "platewright/plate_supply.h"

enum { AIM_ROUNDS = 4, DRIVEN_ROUNDS = 8 };

/* A lowered aim is taken this much lower still, so that the rating is kept and not merely met. */
#define AIM_CLEARANCE 0.995
#define DRIVEN_STEP 0.97 /* of the aim, each time, while a rating at full drive is broken with the mains high */

static plw_mains_corner solve_corner(const plw_stage *stage, double mains_percent, bool with_signal) {
    plw_mains_corner corner = {.mains_percent = mains_percent};
    plw_stage at = *stage;
    at.supply = plw_supply_at_mains(&stage->supply, mains_percent);
    at.screen_supply_volts *= mains_percent / 100.0; /* NaN stays */
    at.fixed_bias_volts *= mains_percent / 100.0;
    corner.solved = plw_quiescent_solve(&at, &corner.quiescent, NULL) == PLW_OK;
    if (corner.solved) {
        corner.driven = with_signal && plw_signal_solve(&at, &corner.quiescent, &corner.signal, NULL) == PLW_OK;
        corner.within_ratings = plw_limits_check(&at, &corner.quiescent, corner.driven ? &corner.signal : NULL,
                                                 corner.ratings, &corner.ratings_count);
    }
    return corner;
}

static plw_rating_system rating_system(const plw_stage *stage) {
    return plw_tube_ratings(stage->tube, stage->variant, stage->connection)->system;
}

static bool leaves_mains_to_builder(plw_rating_system system) {
    return system == PLW_SYSTEM_DESIGN_MAXIMUM || system == PLW_SYSTEM_ABSOLUTE;
}

plw_status plw_mains_solve(const plw_stage *stage, plw_mains *mains, plw_error *error) {
    const plw_status status = plw_stage_validate(stage, true, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_mains made = {.low = solve_corner(stage, PLW_MAINS_LOW_PERCENT, true),
                      .high = solve_corner(stage, PLW_MAINS_HIGH_PERCENT, true)};
    made.system = rating_system(stage);
    made.counted = leaves_mains_to_builder(made.system);
    const bool broken =
        (made.low.solved && !made.low.within_ratings) || (made.high.solved && !made.high.within_ratings);
    made.within_ratings = !made.counted || !broken;
    *mains = made;
    return PLW_OK;
}

/* By how much the worst rating of heat or current at rest is passed with the mains high, where the maker leaves them to
 * the builder; 1 or less: by nothing. */
static double over_at_high_mains(const plw_stage *stage, double ohms) {
    plw_stage trial = *stage;
    double worst = 0.0;
    trial.cathode_resistor_ohms = ohms;
    if (!leaves_mains_to_builder(rating_system(stage))) {
        return 0.0;
    }
    const plw_mains_corner high = solve_corner(&trial, PLW_MAINS_HIGH_PERCENT, false);
    for (size_t i = 0; i < high.ratings_count; i++) {
        const plw_rating_check *check = &high.ratings[i];
        if (check->unit != PLW_UNIT_VOLT && check->share_percent > 100.0 * worst) {
            worst = check->share_percent / 100.0;
        }
    }
    return worst;
}

/* Is the choice kept at high mains, driven fully? */
static bool kept_driven(const plw_stage *stage, const plw_bias_choice *choice) {
    plw_stage trial = *stage;
    trial.cathode_resistor_ohms = choice->option[choice->chosen].ohms;
    const plw_mains_corner high = solve_corner(&trial, PLW_MAINS_HIGH_PERCENT, true);
    return !high.solved || high.within_ratings;
}

/* Where only full drive at high mains breaks a rating, a little more resistance may cure it: taken when it does, else
 * left.  Ret: a lower aim was taken */
static bool lower_for_drive(const plw_stage *stage, plw_series series, plw_aim aim, plw_bias_choice *choice) {
    const plw_bias_option *first = &choice->option[choice->chosen];
    const double most = PLW_DRIVEN_RAISE_MOST * first->ohms;
    if (!leaves_mains_to_builder(rating_system(stage)) || !first->within_ratings || kept_driven(stage, choice)) {
        return false;
    }
    for (int round = 0; round < DRIVEN_ROUNDS; round++) {
        plw_bias_choice trial;
        aim.value *= DRIVEN_STEP;
        if (plw_bias_choose(stage, aim, series, &trial, NULL) != PLW_OK || trial.option[trial.chosen].ohms > most) {
            return false;
        }
        if (kept_driven(stage, &trial)) {
            *choice = trial;
            return true;
        }
    }
    return false;
}

void plw_mains_judge(const plw_stage *stage, plw_bias_choice *choice) {
    for (size_t index = 0; index < choice->options; index++) {
        plw_stage trial = *stage;
        plw_mains mains;
        trial.cathode_resistor_ohms = choice->option[index].ohms;
        choice->option[index].within_at_mains = !leaves_mains_to_builder(rating_system(stage)) ||
                                                plw_mains_solve(&trial, &mains, NULL) != PLW_OK || mains.within_ratings;
    }
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
    if (lower_for_drive(stage, series, choice->aim, choice)) {
        *before_percent = PLW_AIM_DEFAULT_PERCENT;
    }
    plw_mains_judge(stage, choice);
    return PLW_OK;
}
