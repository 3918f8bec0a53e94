/* Printed figures that cannot both be true: other figures at the same voltages, or less current at higher ones.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "tube/fit_core.h"

/* Voltages, resistors and drives this near are the same, as rounded in print. */
#define SAME 0.005

/* At what a figure was taken.  NaN: not stated. */
typedef struct {
    bool as_triode;
    double plate_volts, screen_volts, grid_volts, cathode_ohms;
    double drive_volts, load_ohms;
} conditions;

static conditions conditions_of(const plw_observations *all, const plw_observation *o) {
    const double none = (double)NAN;
    conditions c;
    if (o->is_row) {
        const plw_row *r = &all->tube->rows[o->index];
        c = (conditions){r->connection == PLW_CONNECTION_TRIODE,
                         r->plate_volts,
                         r->screen_volts,
                         r->grid_volts,
                         isnan(r->grid_volts) ? r->cathode_resistor_ohms : none,
                         r->drive_peak_volts,
                         r->load_ohms};
    } else {
        const plw_point *p = &all->tube->points[o->index];
        c = (conditions){
            p->connection == PLW_CONNECTION_TRIODE, p->plate_volts, p->screen_volts, p->grid_volts, none, none, none};
    }
    /* The screen is where the plate is when the connection or the table says no more. */
    if (!all->screened || c.as_triode || isnan(c.screen_volts)) {
        c.screen_volts = c.plate_volts;
    }
    return c;
}

static bool same(double one, double other) {
    if (isnan(one) || isnan(other)) {
        return isnan(one) && isnan(other);
    }
    return fabs(one - other) <= SAME * fmax(fabs(one), fabs(other));
}

static bool is_driven(plw_seen what) {
    switch (what) {
    case PLW_SEEN_PLATE_CURRENT_DRIVEN:
    case PLW_SEEN_SCREEN_CURRENT_DRIVEN:
    case PLW_SEEN_POWER:
    case PLW_SEEN_DISTORTION:
    case PLW_SEEN_SECOND:
    case PLW_SEEN_THIRD:
        return true;
    default:
        return false;
    }
}

static bool same_conditions(const conditions *one, const conditions *other, bool driven) {
    const bool at_rest = one->as_triode == other->as_triode && same(one->plate_volts, other->plate_volts) &&
                         same(one->screen_volts, other->screen_volts) && same(one->grid_volts, other->grid_volts) &&
                         same(one->cathode_ohms, other->cathode_ohms);
    return at_rest &&
           (!driven || (same(one->drive_volts, other->drive_volts) && same(one->load_ohms, other->load_ohms)));
}

/* Has the one nowhere less volts than the other?  Only by the grid volts, not by a cathode resistor, can that be said.
 */
static bool nowhere_lower(const conditions *one, const conditions *other) {
    return one->as_triode == other->as_triode && one->plate_volts >= other->plate_volts &&
           one->screen_volts >= other->screen_volts && one->grid_volts >= other->grid_volts;
}

/* How far the printed figure of the one lies above that of the other, in standard deviations of the difference. */
static double above(const plw_observation *one, const plw_observation *other) {
    if (one->by_ratio && other->by_ratio) {
        const double ratio = log((one->printed + one->floor) / (other->printed + other->floor));
        return ratio / hypot(one->deviation, other->deviation);
    }
    const double first = one->by_ratio ? one->deviation * one->printed : one->deviation;
    const double second = other->by_ratio ? other->deviation * other->printed : other->deviation;
    return (one->printed - other->printed) / hypot(first, second);
}

static bool contradict(const plw_observations *all, const plw_observation *one, const plw_observation *other,
                       plw_fit_contradiction *found) {
    if (one->what != other->what || (one->is_row == other->is_row && one->index == other->index)) {
        return false;
    }
    const conditions first = conditions_of(all, one);
    const conditions second = conditions_of(all, other);
    const double apart = above(one, other);
    const bool equal = same_conditions(&first, &second, is_driven(one->what));
    const bool impossible = one->what == PLW_SEEN_PLATE_CURRENT && nowhere_lower(&first, &second) && apart < 0.0;
    *found = (plw_fit_contradiction){.is_row = {one->is_row, other->is_row},
                                     .index = {one->index, other->index},
                                     .quantity = plw_seen_name(one->what),
                                     .printed = {one->printed, other->printed},
                                     .apart = fabs(apart),
                                     .same_conditions = equal};
    return (equal || impossible) && fabs(apart) >= PLW_FIT_CONTRADICTION_LEAST;
}

void plw_find_contradictions(const plw_observations *all, plw_fit *fit) {
    fit->contradictions = 0;
    for (size_t one = 0; one < all->count; one++) {
        for (size_t other = 0; other < all->count; other++) {
            plw_fit_contradiction found;
            if (fit->contradictions >= PLW_FIT_CONTRADICTIONS_MOST) {
                return;
            }
            if (one != other && contradict(all, &all->observation[one], &all->observation[other], &found) &&
                (one < other || !found.same_conditions)) {
                fit->contradiction[fit->contradictions++] = found;
            }
        }
    }
}
