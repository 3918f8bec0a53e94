/* The figures of a stage at rest and driven by their names in JSON and CSV, units in the names.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/fields.h"

#include <math.h>
#include <string.h>

/* The circuit counts a screen current of 0 for a triode, which has no screen and so no heat there either. */
#define FIELD(record, name, known_by)                                                                                  \
    { #name, offsetof(record, name), offsetof(record, known_by) }
#define AT_REST(name) FIELD(plw_quiescent, name, name)
#define DRIVEN(name) FIELD(plw_signal, name, name)
#define MEASURED(name) FIELD(plw_specimen, name, name)

const plw_field plw_quiescent_fields[] = {
    AT_REST(supply_volts),
    AT_REST(plate_to_ground_volts),
    AT_REST(plate_volts),
    AT_REST(screen_volts),
    AT_REST(cathode_volts),
    AT_REST(grid_volts),
    AT_REST(plate_amps),
    FIELD(plw_quiescent, screen_amps, screen_watts),
    AT_REST(cathode_amps),
    AT_REST(plate_watts),
    AT_REST(screen_watts),
    AT_REST(gm_siemens),
    AT_REST(plate_resistance_ohms),
    AT_REST(mu),
};
const size_t plw_quiescent_fields_count = sizeof plw_quiescent_fields / sizeof plw_quiescent_fields[0];

const plw_field plw_signal_fields[] = {
    DRIVEN(drive_peak_volts), DRIVEN(power_watts),  DRIVEN(speaker_watts),
    DRIVEN(thd_percent),      DRIVEN(plate_amps),   FIELD(plw_signal, screen_amps, screen_watts),
    DRIVEN(plate_watts),      DRIVEN(screen_watts), DRIVEN(grid_amps),
    DRIVEN(grid_amps_most),
};
const size_t plw_signal_fields_count = sizeof plw_signal_fields / sizeof plw_signal_fields[0];

const plw_field plw_specimen_fields[] = {
    MEASURED(supply_volts),
    MEASURED(plate_to_ground_volts),
    MEASURED(screen_to_ground_volts),
    MEASURED(cathode_volts),
    MEASURED(plate_volts),
    MEASURED(screen_volts),
    MEASURED(grid_volts),
    MEASURED(cathode_amps),
    MEASURED(plate_amps),
    FIELD(plw_specimen, screen_amps, screen_watts),
    MEASURED(plate_watts),
    MEASURED(screen_watts),
    MEASURED(primary_ohms),
    MEASURED(screen_feed_ohms),
    MEASURED(model_cathode_amps),
    MEASURED(off_percent),
};
const size_t plw_specimen_fields_count = sizeof plw_specimen_fields / sizeof plw_specimen_fields[0];

double plw_field_value(const plw_field *field, const void *record) {
    double value;
    double known;
    memcpy(&value, (const char *)record + field->offset, sizeof value);
    memcpy(&known, (const char *)record + field->known_by, sizeof known);
    return isnan(known) ? known : value;
}

const char *plw_drive_limit_name(plw_drive_limit limit) {
    switch (limit) {
    case PLW_DRIVE_GRID_CURRENT:
        return "grid current";
    case PLW_DRIVE_CUT_OFF:
        return "cut-off";
    case PLW_DRIVE_GIVEN:
        break;
    }
    return "drive";
}

const char *plw_stage_tube_type(const plw_stage *stage) {
    const plw_tube *tube = stage->tube;
    if (stage->variant >= 0 && (size_t)stage->variant < tube->variants_count) {
        return tube->variants[stage->variant].type;
    }
    return tube->type;
}

bool plw_stage_currents_together(const plw_stage *stage) {
    return stage->tube->model.law.kind == PLW_LAW_PENTODE && stage->connection == PLW_CONNECTION_TRIODE;
}
