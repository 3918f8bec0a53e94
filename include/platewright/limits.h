/* Every rating of the tube against the stage at rest and driven.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_LIMITS_H
#define PLATEWRIGHT_LIMITS_H

#include <stddef.h>

#include "platewright/quantity.h"
#include "platewright/stage.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef enum { PLW_AT_IDLE, PLW_AT_FULL_DRIVE } plw_when;

/* The name of the rating that counts plate and screen together, as makers do in triode connection. */
#define PLW_NAME_PLATE_AND_SCREEN "plate and screen dissipation"

typedef struct {
    const char *name; /* "plate dissipation" ... a constant */
    double value, limit;
    plw_unit unit;
    double share_percent; /* value over limit */
    bool ok;              /* up to a two-thousandth over the limit: three printed digits do not tell it apart */
    plw_when when;
} plw_rating_check;

enum { PLW_RATING_CHECKS_MOST = 16 };

/* Compare.  A rating that the maker does not print gives no check.
 * In:   signal may be NULL: only at rest
 * Out:  checks[*count]
 * Ret:  whether all are kept */
PLW_API bool plw_limits_check(const plw_stage *stage, const plw_quiescent *quiescent, const plw_signal *signal,
                              plw_rating_check checks[PLW_RATING_CHECKS_MOST], size_t *count);

#ifdef __cplusplus
}
#endif
#endif
