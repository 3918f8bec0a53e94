/* Characteristic laws: the currents of a tube from the voltages at its electrodes, with all partial derivatives.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_LAW_H
#define PLATEWRIGHT_LAW_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/status.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef enum {
    PLW_LAW_TRIODE, /* plate and grid */
    PLW_LAW_PENTODE /* plate, screen and grid: pentodes and beam tubes */
} plw_law_kind;

enum { PLW_LAW_COEFFICIENTS_MOST = 12 };

/* A law and its coefficients, in the order of plw_law_coefficient_name().  Plain data: copy it freely. */
typedef struct {
    plw_law_kind kind;
    double coefficient[PLW_LAW_COEFFICIENTS_MOST];
} plw_law;

/* Currents in ampere (into the electrode) and their partial derivatives in siemens.  Voltages are to the cathode. */
typedef struct {
    double plate_amps, screen_amps, grid_amps;
    double plate_by_plate, plate_by_screen, plate_by_grid;
    double screen_by_plate, screen_by_screen, screen_by_grid;
    double grid_by_grid;
} plw_currents;

/* How many coefficients a kind of law has, and what each and the law are called in tube files and reports.
 * Ret:  the number; constants, NULL beyond the last */
PLW_API size_t plw_law_coefficient_count(plw_law_kind kind);
PLW_API const char *plw_law_coefficient_name(plw_law_kind kind, size_t index);
PLW_API const char *plw_law_name(plw_law_kind kind);

/* Are all coefficients finite and inside the domain of the law?
 * Ret:  PLW_OK, or PLW_E_DATA naming the first coefficient that is not */
PLW_API plw_status plw_law_validate(const plw_law *law, plw_error *error) PLW_MUST_USE;

/* Currents and derivatives at a point.
 * In:   plate_volts, screen_volts, grid_volts: any finite value, to the cathode; screen_volts is ignored by a triode
 * Out:  *currents, all finite
 * The functions are continuous and once differentiable in every argument, except that the plate current starts from
 * zero at zero plate volts with a finite slope. */
PLW_API void plw_law_evaluate(const plw_law *law, double plate_volts, double screen_volts, double grid_volts,
                              plw_currents *currents);

/* The plate current alone: the same number as plw_law_evaluate() gives, without the derivatives.
 * Ret:  A */
PLW_API double plw_law_plate_amps(const plw_law *law, double plate_volts, double screen_volts, double grid_volts);

/* The grid voltage at which the cathode current is `cathode_amps`, plate and screen volts held.
 * In:   cathode_amps > 0
 * Ret:  V; NaN when no grid voltage between -1000 and +100 V does it */
PLW_API double plw_law_grid_volts_for(const plw_law *law, double plate_volts, double screen_volts, double cathode_amps);

/* Multiply every current of the law by a factor: a tube stronger or weaker than the bogey.
 * In:   factor > 0 */
PLW_API void plw_law_scale(plw_law *law, double factor);

#ifdef __cplusplus
}
#endif
#endif
