/* Fuzzing of the reader of observation tables: any bytes, as a table for a triode or a tube with a screen.  What is
 * taken has sense enough to be written as a tube file; what is refused says why and leaves the tube as it was.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "../bare_tube.h"
#include "platewright/observation_file.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static void demand(int holds) {
    if (!holds) {
        abort();
    }
}

static void check_taken(const plw_tube *tube) {
    demand(tube->rows_count + tube->points_count > 0);
    for (size_t i = 0; i < tube->rows_count; i++) {
        const plw_row *r = &tube->rows[i];
        demand(r->plate_volts > 0.0 && r->plate_amps > 0.0 && r->provenance.source != NULL);
        demand(isfinite(r->grid_volts) || r->cathode_resistor_ohms > 0.0);
    }
    for (size_t i = 0; i < tube->points_count; i++) {
        const plw_point *p = &tube->points[i];
        demand(p->plate_volts >= 0.0 && isfinite(p->grid_volts) && p->provenance.source != NULL);
        demand(p->plate_amps >= 0.0 || p->kind == PLW_POINT_INNER_MU);
    }
}

static void read_as(plw_tube_kind kind, const uint8_t *data, size_t size) {
    plw_tube *tube = bare_tube("T1", kind);
    plw_error error = {.status = PLW_OK};
    demand(tube != NULL);
    const plw_status status = plw_observation_file_read_memory("table.csv", (const char *)data, size, tube, &error);
    if (status == PLW_OK) {
        check_taken(tube);
    } else {
        demand(status == PLW_E_DATA && strncmp(error.text, "table.csv:", 10) == 0);
        demand(tube->rows_count == 0 && tube->points_count == 0);
    }
    plw_tube_free(tube);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    read_as(PLW_KIND_TRIODE, data, size);
    read_as(PLW_KIND_BEAM, data, size);
    return 0;
}
