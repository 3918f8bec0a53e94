/* A printed row as a stage: the catalogue's row, its conditions turned into a circuit.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_PUBLISHED_ROWS_H
#define TESTS_PUBLISHED_ROWS_H

#include "near.h"
#include "platewright/catalogue.h"
#include "platewright/stage.h"

/* Plate and screen at their printed volts to the cathode, the load without copper, the bias fixed as printed; where
 * only a cathode resistor is printed, the resistor, and supplies higher by its fall at the printed current. */
static inline plw_stage stage_of_row(const plw_tube *tube, const plw_row *row) {
    plw_stage stage = plw_stage_ideal();
    plw_error error = {0};
    const bool screened = tube->kind != PLW_KIND_TRIODE;
    const bool self_bias = isnan(row->grid_volts);
    const double screen_amps = isfinite(row->screen_amps) ? row->screen_amps : 0.0;
    const double above = self_bias ? row->cathode_resistor_ohms * (row->plate_amps + screen_amps) : 0.0;
    stage.tube = tube;
    stage.connection = screened ? row->connection : PLW_CONNECTION_TRIODE;
    assert_int_equal(plw_supply_stiff(row->plate_volts + above, &stage.supply, &error), PLW_OK);
    stage.load_ohms = isfinite(row->load_ohms) ? row->load_ohms : 5000.0;
    if (self_bias) {
        stage.cathode_resistor_ohms = row->cathode_resistor_ohms;
    } else {
        stage.fixed_bias_volts = row->grid_volts;
    }
    if (screened && row->connection == PLW_CONNECTION_PENTODE && row->screen_volts != row->plate_volts) {
        stage.screen_supply_volts = row->screen_volts + above;
    }
    stage.drive_peak_volts = row->drive_peak_volts;
    return stage;
}

static inline plw_catalogue *open_tubedata(void) {
    static const char *const folders[] = {TUBEDATA};
    plw_catalogue *catalogue = NULL;
    plw_error error = {0};
    if (plw_catalogue_open(folders, 1, &catalogue, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return catalogue;
}

/* Visit every type that has a grid. */
static inline void visit_tubes(void (*visit)(const plw_tube *tube, void *context), void *context) {
    plw_catalogue *catalogue = open_tubedata();
    const plw_tube *const *tubes;
    size_t count;
    plw_error error = {0};
    assert_int_equal(plw_catalogue_all(catalogue, &tubes, &count, &error), PLW_OK);
    for (size_t index = 0; index < count; index++) {
        if (tubes[index]->kind != PLW_KIND_RECTIFIER) {
            visit(tubes[index], context);
        }
    }
    plw_catalogue_free(catalogue);
}

#endif
