/* A tube of which nothing is known but its type and kind.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_BARE_TUBE_H
#define TESTS_BARE_TUBE_H

#include <math.h>
#include <stddef.h>

#include "platewright/tube_outline.h"

/* Ret: to be freed with plw_tube_free(); NULL when it was refused */
static inline plw_tube *bare_tube(const char *type, plw_tube_kind kind) {
    const double none = (double)NAN;
    const plw_tube_outline outline = {.type = type,
                                      .kind = kind,
                                      .heater_volts = none,
                                      .heater_amps = none,
                                      .plate_volts = none,
                                      .screen_volts = none,
                                      .plate_watts = none,
                                      .screen_watts = none};
    plw_tube *tube = NULL;
    return plw_tube_outline_make(&outline, &tube, NULL) == PLW_OK ? tube : NULL;
}

#endif
