/* Fuzzing of the quantity reader: any text, every unit; what is read must be finite and survive writing and reading.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "platewright/preferred.h"
#include "platewright/quantity.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static void demand(int holds) {
    if (!holds) {
        abort();
    }
}

static void read_as(const char *text, plw_unit unit) {
    static const double unwritten = -77.25;
    double value = unwritten;
    plw_error error = {PLW_OK, ""};
    const plw_status status = plw_quantity_parse(text, unit, &value, &error);
    if (status != PLW_OK) {
        demand(status == PLW_E_USAGE && error.status == status && error.text[0] != '\0');
        demand(value == unwritten);
        demand(plw_quantity_parse(text, unit, &value, NULL) == status);
        return;
    }
    demand(error.status == PLW_OK && isfinite(value));
    char buffer[64];
    double back = 0.0;
    plw_quantity_format(value, unit, 9, buffer, sizeof buffer);
    /* At the very ends of the range nine digits may round out of it. */
    if (fabs(value) < 1e308 && (value == 0.0 || fabs(value) > 1e-307)) {
        demand(plw_quantity_parse(buffer, unit, &back, &error) == PLW_OK);
        demand(fabs(back - value) <= 6e-9 * fabs(value));
    }
    plw_resistor_code(value, buffer, sizeof buffer);
    if (unit == PLW_UNIT_OHM && buffer[0] != '-') {
        demand(plw_quantity_parse(buffer, unit, &back, &error) == PLW_OK);
        demand(fabs(back - value) <= 6e-4 * value);
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    char *text = malloc(size + 1);
    if (text == NULL) {
        return 0;
    }
    if (size > 0) {
        memcpy(text, data, size);
    }
    text[size] = '\0';
    for (int unit = 0; unit < PLW_UNIT_COUNT; unit++) {
        read_as(text, (plw_unit)unit);
    }
    plw_series series = PLW_E24;
    (void)!plw_series_parse(text, &series, NULL);
    static const char *const names[] = {"EL84", "6V6GT", "300B", "--load", "--cathode-resistor"};
    size_t found[3];
    demand(plw_nearest_names(text, names, sizeof names / sizeof names[0], found, 3) <= 3);
    free(text);
    return 0;
}
