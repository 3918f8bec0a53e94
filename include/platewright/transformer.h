/* Which mains transformer a supply needs.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_TRANSFORMER_H
#define PLATEWRIGHT_TRANSFORMER_H

#include "platewright/rectifier.h"
#include "platewright/status.h"

#ifdef __cplusplus
extern "C" {
#endif

/* A transformer is sold by its RMS volts at rated current; off load it gives more, by its regulation. */
typedef struct {
    double off_load_rms_volts;       /* of the winding, of each half when centre-tapped */
    double rated_rms_volts;          /* at the RMS current below: off load / (1 + regulation) */
    double rms_amps;                 /* of the winding, of each half when centre-tapped */
    double secondary_va;             /* rated volts times amps, both halves */
    double path_ohms;                /* copper of the conducting path that goes with the regulation */
    double volts;                    /* DC at the output: as wanted */
    double usual_rms_volts;          /* the nearest usual secondary (rated), by ratio */
    double usual_volts;              /* DC at the output with that, of the same regulation and rated current */
    double usual_below, usual_above; /* usual secondaries on both sides of rated_rms_volts; NaN beyond the list */
    plw_rectifier supply;            /* the description with the exact winding filled in */
} plw_transformer;

/* The transformer that gives wanted DC volts at a current.
 * In:   described: rectifier, reservoir, filter, mains frequency; winding_rms_volts and path_ohms are not looked at;
 *       volts > 0 and amps > 0 at the output; regulation_percent > 0, up to 100: rise of the winding from rated current
 *       to no load, as a share of its rated volts (10 is good, 20 to 40 is common in small ones)
 * Out:  *transformer; not written unless PLW_OK
 * Ret:  PLW_OK, PLW_E_USAGE, and as plw_rectifier_steady()
 * Source: regulation of a winding taken as the drop of its RMS current in its copper, primary reflected; the RMS
 *       current is that of the rectifier's steady state. */
PLW_API plw_status plw_transformer_for(const plw_rectifier *described, double volts, double amps,
                                       double regulation_percent, plw_transformer *transformer,
                                       plw_error *error) PLW_MUST_USE;

/* The usual secondary voltages, ascending (each half when centre-tapped).
 * Out:  *count
 * Ret:  V, [*count]
 * Source: common practice, no source. */
PLW_API const double *plw_usual_secondaries(size_t *count);

#ifdef __cplusplus
}
#endif
#endif
