/* Every rating of a plate supply against what its parts have to stand.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_SUPPLY_LIMITS_H
#define PLATEWRIGHT_SUPPLY_LIMITS_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/quantity.h"
#include "platewright/rectifier.h"
#include "platewright/tube.h"

#ifdef __cplusplus
extern "C" {
#endif

/* Ratings of the parts; NaN where not known, and then nothing is compared. */
typedef struct {
    double peak_inverse_volts; /* each diode */
    double diode_peak_amps;    /* repetitive, each diode */
    double output_amps;        /* DC of the rectifier: of both plates of a full-wave tube together */
    double plate_rms_volts;    /* vacuum, capacitor input: limit of the winding, each plate */
    double least_path_ohms;    /* vacuum: least source resistance, each plate, at plate_rms_volts */
    double most_reservoir_farads;
    double surge_amps;                       /* silicon: single surge at switching on */
    double capacitor_volts[PLW_NODES_MOST];  /* of each node's capacitor */
    double ripple_amps[PLW_NODES_MOST];      /* RMS, of each node's capacitor */
    double winding_rms_amps;                 /* of the winding, of each half when centre-tapped */
    double heater_amps, heater_winding_amps; /* drawn from the heater winding; its rating */
    double mains_high_percent;               /* highest mains, of nominal; NaN: 110 */
} plw_supply_ratings;

/* Nothing known.
 * Ret:  all NaN */
PLW_API plw_supply_ratings plw_supply_ratings_unknown(void);

/* The ratings of a vacuum rectifier of the catalogue.
 * Ret:  its limits; the rest, and what its sheet does not give, NaN */
PLW_API plw_supply_ratings plw_supply_ratings_of(const plw_rectifier_data *rectifier);

/* Those of a 1 A silicon diode of 1000 V (1N4007 class): 1000 V, 1 A, 10 A repetitive, 30 A surge.
 * Ret:  these; the rest NaN
 * Source: makers' data sheets of 1N4001-1N4007, from memory, confidence high. */
PLW_API plw_supply_ratings plw_supply_ratings_silicon(void);

typedef enum {
    PLW_SUPPLY_AT_LOAD,      /* at the load given, nominal mains */
    PLW_SUPPLY_OFF_LOAD_HIGH /* nothing drawn, mains high: cold tubes */
} plw_supply_when;

typedef struct {
    const char *name; /* "rectifier peak inverse" ...: a constant */
    int node;         /* of the capacitor; -1: not of a node */
    double value, limit;
    plw_unit unit;
    bool at_least;        /* the limit is a least value */
    double share_percent; /* value over limit; limit over value for a least value */
    bool ok;
    plw_supply_when when;
} plw_supply_check;

enum { PLW_SUPPLY_CHECKS_MOST = 24 };

/* Compare.  A rating that is not known gives no check.
 * With silicon and cold tubes the whole capacitor bank charges to the off-load peak, so capacitors and peak inverse are
 * judged there, at the highest mains.  The least source resistance of a vacuum rectifier is taken in proportion to the
 * winding's voltage below its limit, which keeps the switching-on current the same (common practice, no source).  A
 * choke input is judged by whether its current stops.
 * In:   state: the steady state of the supply at its load
 * Out:  checks[*count]
 * Ret:  whether all are kept */
PLW_API bool plw_supply_limits_check(const plw_rectifier *supply, const plw_rectifier_state *state,
                                     const plw_supply_ratings *ratings, plw_supply_check checks[PLW_SUPPLY_CHECKS_MOST],
                                     size_t *count);

/* Critical inductance of a choke input, full-wave: R / (3 w) for ideal parts, R the DC load: the second harmonic of the
 * rectified sine just brings the current to zero.
 * In:   mains_hertz > 0, volts > 0, amps > 0: of the choke's output
 * Ret:  H; NaN outside the domain
 * Source: Fourier series of the rectified sine, its second harmonic alone (as in F. E. Terman, Radio Engineers'
 * Handbook, 1943; from memory). */
PLW_API double plw_critical_henries(double mains_hertz, double volts, double amps);

#ifdef __cplusplus
}
#endif
#endif
