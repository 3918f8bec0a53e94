/* What the plate supply delivers at a current: stiff, behind a resistance, by readings, or by a regulation line.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/supply.h"

#include <math.h>
#include <string.h>

#include "base/numeric.h"

/* Two readings at currents nearer than this (relative) are readings at one current: a meter cannot tell them apart. */
#define SAME_CURRENT 1e-6
#define SAME_VOLTS 1e-9

static void clear(plw_supply *supply, plw_supply_kind kind) {
    memset(supply, 0, sizeof *supply);
    supply->kind = kind;
    supply->volts = (double)NAN;
    supply->source_ohms = (double)NAN;
}

plw_status plw_supply_stiff(double volts, plw_supply *supply, plw_error *error) {
    if (!(isfinite(volts) && volts > 0)) {
        return plw_fail(error, PLW_E_USAGE, "supply volts: %g V is not a positive voltage; give the loaded B+, as 285V",
                        volts);
    }
    clear(supply, PLW_SUPPLY_STIFF);
    supply->volts = volts;
    supply->source_ohms = 0;
    return PLW_OK;
}

plw_status plw_supply_source(double off_load_volts, double ohms, plw_supply *supply, plw_error *error) {
    if (!(isfinite(off_load_volts) && off_load_volts > 0)) {
        return plw_fail(error, PLW_E_USAGE,
                        "supply volts: %g V is not a positive voltage; give the off-load B+, as 305V", off_load_volts);
    }
    if (!(isfinite(ohms) && ohms >= 0)) {
        return plw_fail(error, PLW_E_USAGE, "source resistance: %g ohm is negative or not a number; give it as 1.8k",
                        ohms);
    }
    clear(supply, PLW_SUPPLY_SOURCE);
    supply->volts = off_load_volts;
    supply->source_ohms = ohms;
    return PLW_OK;
}

/* ---- readings ---------------------------------------------------------------------------------------------------- */

static plw_status check_reading(const plw_reading *reading, size_t number, plw_error *error) {
    if (!(isfinite(reading->volts) && reading->volts > 0)) {
        return plw_fail(error, PLW_E_USAGE, "reading %zu: %g V is not a positive voltage", number, reading->volts);
    }
    if (!(isfinite(reading->amps) && reading->amps >= 0)) {
        return plw_fail(error, PLW_E_USAGE,
                        "reading %zu: %g A is not a current of zero or more; give the load as a resistor or a current",
                        number, reading->amps);
    }
    return PLW_OK;
}

/* Put a reading in its place by current; one that repeats an earlier reading is dropped. */
static plw_status insert_reading(const plw_reading *reading, plw_supply *supply, plw_error *error) {
    size_t place = supply->points;
    while (place > 0 && supply->point[place - 1].amps > reading->amps) {
        place--;
    }
    for (size_t i = 0; i < supply->points; i++) {
        const plw_reading *other = &supply->point[i];
        if (fabs(other->amps - reading->amps) > SAME_CURRENT * fmax(other->amps, reading->amps)) {
            continue;
        }
        if (fabs(other->volts - reading->volts) > SAME_VOLTS * reading->volts) {
            return plw_fail(
                error, PLW_E_USAGE,
                "readings: %g V and %g V are both given at %g mA; keep one of them (their mean, if the mains "
                "moved between the two)",
                other->volts, reading->volts, 1e3 * reading->amps);
        }
        return PLW_OK;
    }
    memmove(&supply->point[place + 1], &supply->point[place], (supply->points - place) * sizeof supply->point[0]);
    supply->point[place] = *reading;
    supply->points++;
    return PLW_OK;
}

static plw_status check_falling(const plw_supply *supply, plw_error *error) {
    for (size_t i = 1; i < supply->points; i++) {
        const plw_reading *light = &supply->point[i - 1], *heavy = &supply->point[i];
        if (heavy->volts > light->volts) {
            return plw_fail(error, PLW_E_USAGE,
                            "readings: %g V at %g mA is above %g V at %g mA, which makes the source resistance "
                            "negative; check the order of the readings and that the mains held still",
                            heavy->volts, 1e3 * heavy->amps, light->volts, 1e3 * light->amps);
        }
    }
    return PLW_OK;
}

plw_status plw_supply_readings(const plw_reading *readings, size_t count, plw_supply *supply, plw_error *error) {
    if (readings == NULL || count == 0) {
        return plw_fail(error, PLW_E_USAGE, "readings: none given; one loaded reading is the least, as 258V@10k");
    }
    if (count > PLW_READINGS_MOST) {
        return plw_fail(error, PLW_E_USAGE, "readings: %zu are given, %d are the most that are taken", count,
                        PLW_READINGS_MOST);
    }
    plw_supply made;
    clear(&made, PLW_SUPPLY_READINGS);
    for (size_t i = 0; i < count; i++) {
        plw_status status = check_reading(&readings[i], i + 1, error);
        if (status == PLW_OK) {
            status = insert_reading(&readings[i], &made, error);
        }
        if (status != PLW_OK) {
            return status;
        }
    }
    if (made.point[made.points - 1].amps <= 0) {
        return plw_fail(error, PLW_E_USAGE,
                        "readings: %g V off load does not tell what is left under load; add a reading into a known "
                        "resistor, as 258V@10k",
                        made.point[0].volts);
    }
    const plw_status status = check_falling(&made, error);
    if (status != PLW_OK) {
        return status;
    }
    if (made.point[0].amps <= 0) {
        made.volts = made.point[0].volts;
    }
    *supply = made;
    return PLW_OK;
}

/* ---- asked at a current ------------------------------------------------------------------------------------------ */

/* The interval i, i+1 that holds the current; the outermost one beyond the ends.  points >= 2. */
static size_t interval_of(const plw_supply *supply, double amps) {
    size_t low = 0, high = supply->points - 1;
    while (high - low > 1) {
        const size_t middle = (low + high) / 2;
        if (supply->point[middle].amps <= amps) {
            low = middle;
        } else {
            high = middle;
        }
    }
    return low;
}

static void straight_at(const plw_supply *supply, double amps, double *volts, double *ohms) {
    if (supply->points < 2) {
        *volts = supply->points == 1 ? supply->point[0].volts : supply->volts;
        *ohms = 0;
        return;
    }
    const plw_reading *left = &supply->point[interval_of(supply, amps)], *right = left + 1;
    *ohms = (left->volts - right->volts) / (right->amps - left->amps);
    *volts = left->volts - *ohms * (amps - left->amps);
}

/* The cubic of Hermite through two points with the tangents stored there, which were so chosen that it falls
 * throughout.  Beyond the ends the tangent goes on straight. */
static void curve_at(const plw_supply *supply, double amps, double *volts, double *ohms) {
    if (supply->points < 2) {
        straight_at(supply, amps, volts, ohms);
        return;
    }
    const size_t last = supply->points - 1;
    if (amps <= supply->point[0].amps || amps >= supply->point[last].amps) {
        const size_t end = amps <= supply->point[0].amps ? 0 : last;
        *ohms = supply->tangent_ohms[end];
        *volts = supply->point[end].volts - *ohms * (amps - supply->point[end].amps);
        return;
    }
    const size_t i = interval_of(supply, amps);
    const plw_reading *left = &supply->point[i], *right = left + 1;
    double slope;
    plw_cubic_between(left->amps, left->volts, -supply->tangent_ohms[i], right->amps, right->volts,
                      -supply->tangent_ohms[i + 1], amps, volts, &slope);
    *ohms = fmax(0, -slope);
}

void plw_supply_at(const plw_supply *supply, double amps, double *volts, double *ohms) {
    switch (supply->kind) {
    case PLW_SUPPLY_READINGS:
        straight_at(supply, amps, volts, ohms);
        return;
    case PLW_SUPPLY_RECTIFIER:
        curve_at(supply, amps, volts, ohms);
        return;
    case PLW_SUPPLY_SOURCE:
        *volts = supply->volts - supply->source_ohms * amps;
        *ohms = supply->source_ohms;
        return;
    case PLW_SUPPLY_STIFF:
        break;
    }
    *volts = supply->volts;
    *ohms = 0;
}

void plw_supply_range(const plw_supply *supply, double *least_amps, double *most_amps) {
    *least_amps = 0;
    *most_amps = (double)INFINITY;
    if (supply->kind == PLW_SUPPLY_SOURCE && supply->source_ohms > 0) {
        *most_amps = supply->volts / supply->source_ohms;
    } else if (supply->kind == PLW_SUPPLY_READINGS && supply->points > 0) {
        *least_amps = supply->point[0].amps * 2 / 3;
        *most_amps = supply->point[supply->points - 1].amps * 1.5;
    } else if (supply->kind == PLW_SUPPLY_RECTIFIER && supply->points > 0) {
        *least_amps = supply->point[0].amps;
        *most_amps = supply->point[supply->points - 1].amps;
    }
}

plw_supply plw_supply_moved(const plw_supply *supply, double volts) {
    plw_supply moved = *supply;
    moved.volts += volts; /* NaN stays */
    for (size_t index = 0; index < moved.points; index++) {
        moved.point[index].volts += volts;
    }
    return moved;
}
