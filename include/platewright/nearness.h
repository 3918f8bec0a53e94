/* How near two tube types are electrically: what would change if one were put in the place of the other.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_NEARNESS_H
#define PLATEWRIGHT_NEARNESS_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/tube.h"

#ifdef __cplusplus
extern "C" {
#endif

/* A type, or one of its variants.  The tube is borrowed. */
typedef struct {
    const plw_tube *tube;
    int variant; /* index into tube->variants, or -1 for the type itself */
} plw_tube_entry;

/* What is compared: always the candidate's over the wanted tube's. */
typedef enum {
    PLW_NEAR_PLATE_WATTS,  /* rated plate dissipation */
    PLW_NEAR_PLATE_VOLTS,  /* rated; counts only where the candidate stands less */
    PLW_NEAR_SCREEN_VOLTS, /* the same */
    PLW_NEAR_ZERO_BIAS,    /* cathode current with the grid at the cathode: the perveance at work */
    PLW_NEAR_MU,           /* amplification factor; with a screen that of grid to screen */
    PLW_NEAR_BIAS,         /* grid volts for the same cathode current at the same plate and screen volts */
    PLW_NEAR_DRIVE,        /* grid signal for the same small current in a load of plate volts over cathode current */
    PLW_NEAR_HEATER_VOLTS, /* or filament */
    PLW_NEAR_HEATER_AMPS,  /* compared where the volts are the same; counts only where the candidate takes more */
    PLW_NEAR_OUTPUT_AMPS,  /* of rectifiers, this and the next two */
    PLW_NEAR_INVERSE_VOLTS,
    PLW_NEAR_DROP, /* drop at the same current */
    PLW_NEAR_PARTS
} plw_near_part;

typedef enum {
    PLW_BASE_SAME,         /* and the same pins */
    PLW_BASE_PINS_UNKNOWN, /* the same base; the pins are not known of both */
    PLW_BASE_OTHER_PINS,   /* the same base wired otherwise */
    PLW_BASE_OTHER
} plw_base_match;

typedef struct {
    double ratio[PLW_NEAR_PARTS]; /* NaN where it is not known of both, or does not apply */
    plw_base_match base;
    /* The point at which both are compared, of the wanted tube: V to the cathode, A.  NaN for rectifiers. */
    double plate_volts, screen_volts, cathode_amps;
    double wanted_grid_volts, grid_volts; /* the bias each takes there */
    double distance;                      /* 0: alike in all that is compared; 1: one part off by its usual spread */
} plw_nearness;

/* Each ratio r adds (ln r / scale)^2 to the square of the distance, up to a most; the base adds its own.  The scale is
 * the part by which an amplifier commonly bears a change: plate dissipation and rated volts 1.25, mu, bias and drive
 * 1.4, current at zero bias 1.5, heater current 2; heater volts 1.1.  Common practice, no source.
 * In:   wanted, candidate: types with a law, or rectifiers
 * Out:  *nearness
 * Ret:  false when they cannot stand for each other: one has a screen or is a rectifier and the other not, a law is
 *       missing, or the candidate cannot carry the wanted tube's current at its volts without a positive grid */
PLW_API bool plw_nearness_of(plw_tube_entry wanted, plw_tube_entry candidate, plw_nearness *nearness);

typedef struct {
    plw_tube_entry entry;
    plw_nearness nearness;
} plw_near_tube;

/* The types nearest to one, nearest first; equally near ones by designation.
 * In:   candidates[count], among which `wanted` itself is passed over; most > 0
 * Out:  found[0..n-1], n <= most
 * Ret:  n: how many are less than PLW_NEAR_DISTANCE_MOST away */
PLW_API size_t plw_nearest_tubes(plw_tube_entry wanted, const plw_tube_entry *candidates, size_t count,
                                 plw_near_tube *found, size_t most);

/* Beyond it one type says nothing of the other. */
#define PLW_NEAR_DISTANCE_MOST 5.0

/* Ratings that hold for the entry (those of the main connection).
 * Ret:  NULL when it has none */
PLW_API const plw_ratings *plw_tube_entry_ratings(plw_tube_entry entry);

/* Designation and heater, the variant's own where it has them.
 * Ret:  text; V and A, NaN where not known */
PLW_API const char *plw_tube_entry_type(plw_tube_entry entry);
PLW_API double plw_tube_entry_heater_volts(plw_tube_entry entry);
PLW_API double plw_tube_entry_heater_amps(plw_tube_entry entry);

#ifdef __cplusplus
}
#endif
#endif
