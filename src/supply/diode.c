/* Laws of the diodes and of the rectifier they form.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "supply/diode.h"

#include <math.h>

/* Below this current the drop of a vacuum diode is taken as straight: the two-thirds power has no slope at zero. */
#define STRAIGHT_BELOW_AMPS 1e-7

plw_diode plw_diode_silicon(void) {
    return (plw_diode){PLW_DIODE_SILICON, 0.7, 0.23, (double)NAN};
}

plw_diode plw_diode_vacuum(double volts, double amps) {
    plw_diode diode = {PLW_DIODE_VACUUM, 0, 0, (double)NAN};
    if (volts > 0 && amps > 0 && isfinite(volts) && isfinite(amps)) {
        diode.perveance = amps / (volts * sqrt(volts));
    }
    return diode;
}

double plw_path_ohms(double secondary_ohms, double primary_ohms, double primary_volts, double secondary_volts) {
    if (!(secondary_ohms >= 0 && primary_ohms >= 0 && primary_volts > 0 && secondary_volts > 0)) {
        return (double)NAN;
    }
    const double ratio = secondary_volts / primary_volts;
    return secondary_ohms + primary_ohms * ratio * ratio;
}

plw_rectifier_law plw_rectifier_law_of(const plw_rectifier *supply) {
    plw_rectifier_law law = {0};
    law.vacuum = supply->diode.kind == PLW_DIODE_VACUUM;
    law.bridge = supply->connection == PLW_BRIDGE;
    law.half_wave = supply->connection == PLW_HALF_WAVE;
    law.peak_volts = sqrt(2.0) * supply->winding_rms_volts;
    law.path_ohms = fmax(supply->path_ohms, PLW_PATH_OHMS_LEAST);
    law.series = law.bridge ? 2 : 1;
    if (law.vacuum) {
        law.perveance = supply->diode.perveance;
        return law;
    }
    const double slope_ohms = supply->diode.slope_ohms;
    law.drop_volts = law.series * supply->diode.drop_volts;
    law.total_ohms = law.path_ohms + law.series * slope_ohms;
    /* With both paths on, the loop through winding and diodes carries the difference of the two currents. */
    law.overlap_ohms = law.bridge ? 2 * (law.path_ohms + slope_ohms) : law.total_ohms;
    law.shared_ohms = law.bridge ? slope_ohms : law.total_ohms / 2;
    return law;
}

double plw_threshold_volts(const plw_rectifier_law *law) {
    return law->drop_volts;
}

/* x of  series x^2 + path K x^3 = over_volts,  where the current is K x^3: Newton's method on a convex function. */
static double cube_root_of_current(const plw_rectifier_law *law, double over_volts) {
    const double cube = law->path_ohms * law->perveance, square = law->series;
    double x = sqrt(over_volts / (square + cube * sqrt(over_volts / square)));
    for (int i = 0; i < 20; i++) {
        const double value = x * x * (square + cube * x) - over_volts;
        const double step = value / (x * (2 * square + 3 * cube * x));
        x -= step;
        if (fabs(step) <= 1e-9 * x) {
            break; /* the next step would be of the order of 1e-18 */
        }
    }
    return x;
}

double plw_path_amps(const plw_rectifier_law *law, double over_volts, double *slope) {
    if (law->vacuum) {
        if (over_volts <= 0) {
            *slope = 0;
            return 0;
        }
        const double x = cube_root_of_current(law, over_volts);
        *slope = 3 * law->perveance * x / (2 * law->series + 3 * law->path_ohms * law->perveance * x);
        return law->perveance * x * x * x;
    }
    const double driving = over_volts - law->drop_volts;
    *slope = driving > 0 ? 1 / law->total_ohms : 0;
    return driving > 0 ? driving / law->total_ohms : 0;
}

/* Drop of one vacuum diode at a current. */
static double vacuum_drop(const plw_rectifier_law *law, double amps, double *slope) {
    const double held = fmax(amps, STRAIGHT_BELOW_AMPS);
    const double root = cbrt(held / law->perveance), volts = root * root;
    if (amps < STRAIGHT_BELOW_AMPS) {
        *slope = volts / STRAIGHT_BELOW_AMPS;
        return *slope * amps;
    }
    *slope = 2 * volts / (3 * held);
    return volts;
}

/* Both vacuum paths on: share the current so that the loop through the winding closes.  Bisection kept inside Newton.
 */
static double shared_first_amps(const plw_rectifier_law *law, double emf_volts, double amps, double *slope_by_amps) {
    const double loop_ohms = law->bridge ? 2 * law->path_ohms : law->path_ohms, series = law->series;
    double low = amps / 2, high = amps, first = amps * 0.75, by_amps = 0.5;
    for (int i = 0; i < 60; i++) {
        double slope_first, slope_second;
        const double drop_first = vacuum_drop(law, first, &slope_first);
        const double drop_second = vacuum_drop(law, amps - first, &slope_second);
        const double excess = loop_ohms * (2 * first - amps) + series * (drop_first - drop_second) - 2 * emf_volts;
        const double slope = 2 * loop_ohms + series * (slope_first + slope_second);
        by_amps = (loop_ohms + series * slope_second) / slope;
        if (excess > 0) {
            high = first;
        } else {
            low = first;
        }
        double next = first - excess / slope;
        if (!(next >= low && next <= high)) {
            next = (low + high) / 2;
        }
        const double moved = fabs(next - first);
        first = next;
        if (moved <= 1e-13 * amps) {
            break;
        }
    }
    *slope_by_amps = by_amps;
    return first;
}

static double vacuum_choke_volts(const plw_rectifier_law *law, double emf_volts, double amps, double *slope,
                                 double *first_amps) {
    double drop_slope, zero_slope;
    const double drop = vacuum_drop(law, amps, &drop_slope);
    const double loop_ohms = law->bridge ? 2 * law->path_ohms : law->path_ohms;
    *first_amps = amps;
    *slope = -law->path_ohms - law->series * drop_slope;
    if (law->half_wave || 2 * emf_volts >= loop_ohms * amps + law->series * drop) {
        return emf_volts - law->path_ohms * amps - law->series * drop;
    }
    double by_amps;
    const double first = shared_first_amps(law, emf_volts, amps, &by_amps);
    const double first_drop = vacuum_drop(law, first, &zero_slope);
    *first_amps = first;
    if (law->bridge) {
        *slope = -law->path_ohms * (2 * by_amps - 1) - 2 * zero_slope * by_amps;
        return emf_volts - law->path_ohms * (2 * first - amps) - 2 * first_drop;
    }
    *slope = -(law->path_ohms + zero_slope) * by_amps;
    return emf_volts - law->path_ohms * first - first_drop;
}

double plw_choke_volts(const plw_rectifier_law *law, double emf_volts, double amps, double *slope, double *first_amps) {
    if (law->vacuum) {
        return vacuum_choke_volts(law, emf_volts, amps, slope, first_amps);
    }
    *first_amps = amps;
    if (law->half_wave || 2 * emf_volts >= law->overlap_ohms * amps) {
        *slope = -law->total_ohms;
        return emf_volts - law->drop_volts - law->total_ohms * amps;
    }
    *first_amps = amps / 2 + (law->overlap_ohms > 0 ? emf_volts / law->overlap_ohms : 0);
    *slope = -law->shared_ohms;
    return -law->drop_volts - law->shared_ohms * amps;
}
