/* The catalogue in words and as JSON: a list of tubes, all that is known of one, types like one.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_TUBE_REPORT_H
#define PLATEWRIGHT_TUBE_REPORT_H

#include <stddef.h>

#include "platewright/fit.h"
#include "platewright/nearness.h"
#include "platewright/status.h"
#include "platewright/tube.h"

#ifdef __cplusplus
extern "C" {
#endif

/* One line for each type and variant: kind, base, plate and screen dissipation, heater, how far the model may be
 * trusted, other names.
 * Out:  *text, to be freed with plw_text_free() (platewright/report.h); not written unless PLW_OK
 * Ret:  PLW_OK or PLW_E_NO_MEMORY */
PLW_API plw_status plw_tubes_text(const plw_tube_entry *entries, size_t count, char **text,
                                  plw_error *error) PLW_MUST_USE;

/* The designations alone, equivalents with them, one a line.
 * Out, Ret: as plw_tubes_text() */
PLW_API plw_status plw_tubes_names(const plw_tube_entry *entries, size_t count, char **text,
                                   plw_error *error) PLW_MUST_USE;

/* The same as JSON, schema "platewright/1": units in the names, null for what is not known.
 * Out, Ret: as plw_tubes_text() */
PLW_API plw_status plw_tubes_json(const plw_tube_entry *entries, size_t count, char **text,
                                  plw_error *error) PLW_MUST_USE;

/* One tube: pins, heater, ratings with their system, published rows, coefficients with their errors, and the sources.
 * Out, Ret: as plw_tubes_text() */
PLW_API plw_status plw_tube_text(const plw_tube *tube, char **text, plw_error *error) PLW_MUST_USE;
PLW_API plw_status plw_tube_json(const plw_tube *tube, char **text, plw_error *error) PLW_MUST_USE;

/* Types near to one, and what would change with each.
 * In:   near[count], from plw_nearest_tubes()
 * Out, Ret: as plw_tubes_text() */
PLW_API plw_status plw_tubes_like_text(plw_tube_entry wanted, const plw_near_tube *near, size_t count, char **text,
                                       plw_error *error) PLW_MUST_USE;
PLW_API plw_status plw_tubes_like_json(plw_tube_entry wanted, const plw_near_tube *near, size_t count, char **text,
                                       plw_error *error) PLW_MUST_USE;

/* What would change, in words: "needs 1.3 times the drive; another base (octal)".  Empty when nothing would.
 * Ret:  text */
PLW_API const char *plw_nearness_words(plw_tube_entry wanted, const plw_near_tube *near, char *text, size_t size);

/* A fit: coefficients with their errors, then every printed figure beside the model's.
 * In:   tube, whose model is that of the fit
 * Out, Ret: as plw_tubes_text() */
PLW_API plw_status plw_fit_text(const plw_tube *tube, const plw_fit *fit, char **text, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
