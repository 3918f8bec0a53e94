/* The stage with the mains low and high.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_MAINS_H
#define PLATEWRIGHT_MAINS_H

#include "platewright/bias.h"

#ifdef __cplusplus
extern "C" {
#endif

/* How far mains voltage strays, in percent of nominal (EN 50160: +-10 %; RS-239-A, EIA, 1963, says the same of the
 * lines that design-center ratings allow for; both from memory). */
#define PLW_MAINS_LOW_PERCENT 90.0
#define PLW_MAINS_HIGH_PERCENT 110.0

/* The stage at one mains voltage, at rest and driven: as far as the drive told, or fully. */
typedef struct {
    double mains_percent;
    bool solved; /* else the supply's readings do not reach there, or the tube is cut off: nothing below holds */
    plw_quiescent quiescent;
    bool driven; /* else no signal was found there: signal does not hold, and the ratings are those at rest alone */
    plw_signal signal;
    plw_rating_check ratings[PLW_RATING_CHECKS_MOST];
    size_t ratings_count;
    bool within_ratings;
} plw_mains_corner;

typedef struct {
    plw_mains_corner low, high;
    plw_rating_system system;
    bool counted;        /* the rating system leaves mains to the builder: design-maximum and absolute */
    bool within_ratings; /* kept at both corners, or not counted */
} plw_mains;

/* Solve the stage with every supply taken from the mains low and high: plate, screen and fixed bias together.  The
 * heaters are left aside: the emission of a sound cathode hardly limits the current.
 * In:   a valid stage with bias
 * Out:  *mains; not written unless PLW_OK
 * Ret:  PLW_OK, also when a corner has no point (see solved); as plw_stage_validate()
 * Source of `counted`: RS-239-A (EIA, 1963) and JEDEC publication 37 (1962), definitions of the rating systems, from
 * memory: the maker of the tube answers for supply variation in design-center ratings, the maker of the equipment in
 * the others. */
PLW_API plw_status plw_mains_solve(const plw_stage *stage, plw_mains *mains, plw_error *error) PLW_MUST_USE;

/* Judge every option of a choice with the mains low and high: within_at_mains.  What no corner can be solved for counts
 * as kept.  plw_bias_choose_for_mains() has done it.
 * In:   the stage the choice was made for; *choice, changed in place */
PLW_API void plw_mains_judge(const plw_stage *stage, plw_bias_choice *choice);

/* Choose the cathode resistor when no aim is told: as plw_bias_choose() for PLW_AIM_DEFAULT_PERCENT of the rated
 * dissipation, lowered as far as the ratings of heat and current need that must hold with the mains high.  (Ratings of
 * voltage no resistor cures.)  A rating that only full drive at high mains breaks is worth up to PLW_DRIVEN_RAISE_MOST
 * times the resistance, where that cures it.
 * Out:  *choice, whose aim is the one taken; *before_percent: 0, or what the aim was before it was lowered
 * Ret:  as plw_bias_choose() */
PLW_API plw_status plw_bias_choose_for_mains(const plw_stage *stage, plw_series series, plw_bias_choice *choice,
                                             double *before_percent, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
