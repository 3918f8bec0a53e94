/* Fuzzing of the tube file reader: any bytes; what is read must be whole, what is refused must leave nothing.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "base/schemas.h"
#include "tube/tube_fields.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static void demand(int holds) {
    if (!holds) {
        abort();
    }
}

static void check_tube(const plw_tube *tube) {
    demand(tube->type != NULL && tube->file != NULL && tube->heater_volts > 0);
    demand(tube->kind == PLW_KIND_RECTIFIER || plw_tube_ratings(tube, -1, PLW_CONNECTION_TRIODE) != NULL);
    for (size_t i = 0; i < tube->rows_count; i++) {
        demand(tube->rows[i].plate_volts > 0 && tube->rows[i].plate_amps > 0);
        demand(tube->rows[i].provenance.source != NULL);
    }
    for (size_t i = 0; i < tube->variants_count; i++) {
        demand(plw_tube_ratings(tube, (int)i, PLW_CONNECTION_PENTODE) != NULL);
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    static plw_xml_schema *schema; /* kept for the whole run */
    if (schema == NULL) {
        demand(plw_xml_schema_parse(plw_schema_tube, &schema, NULL) == PLW_OK);
    }
    char *text = malloc(size == 0 ? 1 : size); /* no byte more: reading beyond the end is seen */
    if (text == NULL) {
        return 0;
    }
    if (size > 0) {
        memcpy(text, data, size);
    }
    plw_tube *tube = NULL;
    plw_error error = {.status = PLW_OK};
    const plw_status status = plw_tube_read_memory(schema, "input.xml", text, size, &tube, &error);
    if (status == PLW_OK) {
        check_tube(tube);
        plw_tube_free(tube);
    } else {
        demand(tube == NULL && error.status == status);
        demand(strncmp(error.text, "input.xml:", 10) == 0);
    }
    free(text);
    return 0;
}
