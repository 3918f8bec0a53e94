/* The figures of a stage at rest and driven by their names in JSON and CSV, units in the names.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_FIELDS_H
#define REPORT_FIELDS_H

#include <stddef.h>

#include "platewright/bias.h"
#include "platewright/specimen.h"

/* A figure: its name, and where it stands in plw_quiescent, plw_signal or plw_specimen. */
typedef struct {
    const char *name;
    size_t offset;
    size_t known_by; /* where the figure stands without which this one is not known either; mostly itself */
} plw_field;

extern const plw_field plw_quiescent_fields[];
extern const size_t plw_quiescent_fields_count;
extern const plw_field plw_signal_fields[];
extern const size_t plw_signal_fields_count;
extern const plw_field plw_specimen_fields[];
extern const size_t plw_specimen_fields_count;

/* In:   record: the plw_quiescent, plw_signal or plw_specimen that the field belongs to
 * Ret:  NaN: not known, or the tube has no such electrode */
double plw_field_value(const plw_field *field, const void *record);

/* "grid current", "cut-off", "drive" */
const char *plw_drive_limit_name(plw_drive_limit limit);

/* The designation of the tube in the stage: the variant's where one is chosen. */
const char *plw_stage_tube_type(const plw_stage *stage);

/* Does the current that the maker prints and the load carries include the screen's (a pentode connected as a triode)?
 */
bool plw_stage_currents_together(const plw_stage *stage);

#endif
