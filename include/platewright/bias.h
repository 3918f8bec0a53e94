/* The choice of the cathode resistor.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_BIAS_H
#define PLATEWRIGHT_BIAS_H

#include "platewright/limits.h"
#include "platewright/preferred.h"
#include "platewright/stage.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef enum {
    PLW_AIM_DISSIPATION, /* a share of the rated plate dissipation, in percent */
    PLW_AIM_CURRENT,     /* plate current (as a triode: plate and screen together) of one tube, in A */
    PLW_AIM_POWER        /* the most power within plw_stage_clean_percent(), every rating kept at rest and driven */
} plw_aim_kind;

typedef struct {
    plw_aim_kind kind;
    double value;
} plw_aim;

/* Aimed at when nothing else is said: class A with cathode bias may run near its full rating, the rest is left for
 * mains and tube spread.  Common practice, no source. */
#define PLW_AIM_DEFAULT_PERCENT 90.0

/* A resistor of the wattage wanted is this many times what it dissipates.  Common practice: at least twice. */
#define PLW_RESISTOR_MARGIN 2.0

/* A rating broken only under drive is worth this much more resistance, where that cures it.  Common practice, no
 * source. */
#define PLW_DRIVEN_RAISE_MOST 1.15

/* One value, solved again after rounding. */
typedef struct {
    double ohms;
    double watts;        /* dissipated */
    double rating_watts; /* usual size with the margin; NaN: no usual size */
    plw_quiescent quiescent;
    plw_signal signal; /* at full drive */
    plw_signal clean;  /* at the largest drive within plw_stage_clean_percent() */
    plw_rating_check ratings[PLW_RATING_CHECKS_MOST];
    size_t ratings_count;
    bool within_ratings;
    bool within_at_mains; /* the ratings that count there are kept with the mains low and high: plw_mains_judge(), else
                             true */
} plw_bias_option;

enum { PLW_NEIGHBOURS = 1, PLW_BIAS_OPTIONS = 2 * PLW_NEIGHBOURS + 1 };

typedef struct {
    plw_aim aim;
    double exact_ohms;  /* before rounding */
    bool aim_reached;   /* false: a limit stands in the way, the nearest that keeps it was taken */
    char obstacle[256]; /* which limit, and what change would help; empty when the aim is reached */
    size_t chosen;      /* index into option[] */
    size_t options;     /* ascending in ohms: the neighbour below, the choice, the neighbour above */
    plw_bias_option option[PLW_BIAS_OPTIONS];
} plw_bias_choice;

/* Choose the cathode resistor.
 * In:   a stage without bias; the series to choose from
 * Out:  *choice; not written unless PLW_OK
 * Ret:  PLW_OK, also when the aim is not reached (see aim_reached); PLW_E_USAGE; PLW_E_NO_POINT when no resistor
 *       between 1 ohm and 1 megohm serves: the text says which limit forbids it and what change would help */
PLW_API plw_status plw_bias_choose(const plw_stage *stage, plw_aim aim, plw_series series, plw_bias_choice *choice,
                                   plw_error *error) PLW_MUST_USE;

/* Solve one option: rest, signal and ratings.
 * In:   ohms > 0: the cathode resistor, whatever the stage's own; NaN: the stage's bias as it is, resistor or fixed
 * Out:  *option; not written unless PLW_OK
 * Ret:  PLW_OK; as plw_quiescent_solve() and plw_signal_solve() */
PLW_API plw_status plw_bias_option_solve(const plw_stage *stage, double ohms, plw_bias_option *option,
                                         plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
