/* Laws of the diodes and of the rectifier they form.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef SUPPLY_DIODE_H
#define SUPPLY_DIODE_H

#include "platewright/rectifier.h"

/* A conducting path of less than this is taken as this: it keeps the charging current of ideal parts finite. */
#define PLW_PATH_OHMS_LEAST 1e-3

/* What the engine needs of winding and diodes. */
typedef struct {
    bool vacuum, bridge, half_wave;
    double peak_volts; /* of the EMF */
    double path_ohms;  /* copper */
    double series;     /* diodes in series: 2 in a bridge */
    double drop_volts; /* silicon: of all diodes in series */
    double total_ohms; /* silicon: copper and diodes in series, at least PLW_PATH_OHMS_LEAST */
    double
        overlap_ohms; /* silicon, choke input: both paths conduct while twice the EMF is below this times the current */
    double shared_ohms; /* silicon, choke input: what the current sees while both paths conduct */
    double perveance;
} plw_rectifier_law;

plw_rectifier_law plw_rectifier_law_of(const plw_rectifier *supply);

/* Into a capacitor: current of the conducting path and its derivative by `over_volts`, which is the EMF less the
 * voltage of the capacitor. */
double plw_path_amps(const plw_rectifier_law *law, double over_volts, double *slope);

/* Into a choke: voltage at the choke for the EMF >= 0 (half-wave: any) and a current >= 0, and its derivative by the
 * current (<= 0).  Both paths may conduct; *first_amps is the share of the path whose EMF is positive. */
double plw_choke_volts(const plw_rectifier_law *law, double emf_volts, double amps, double *slope, double *first_amps);

/* The least voltage that drives any current through the diodes: the fixed drop of silicon, 0 of a vacuum diode. */
double plw_threshold_volts(const plw_rectifier_law *law);

#endif
