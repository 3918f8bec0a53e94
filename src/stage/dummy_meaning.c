/* What a voltage across the dummy load means for the choice of the cathode resistor.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/dummy_meaning.h"

#include <math.h>
#include <stdlib.h>

#include "platewright/plate_supply.h"

plw_status plw_dummy_meanings(const plw_stage *stage, const plw_dummy_load *dummy, plw_aim aim, plw_series series,
                              plw_dummy_meaning meaning[PLW_DUMMY_MEANINGS], plw_error *error) {
    if (isfinite(stage->fixed_bias_volts)) {
        return plw_fail(error, PLW_E_USAGE, "fixed-bias: there is no cathode resistor to choose");
    }
    plw_bias_choice *choice = malloc(sizeof *choice);
    if (choice == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    plw_status status = PLW_OK;
    for (int i = 0; i < PLW_DUMMY_MEANINGS && status == PLW_OK; i++) {
        const int steps = i - PLW_DUMMY_MEANINGS / 2;
        const double step = PLW_DUMMY_STEP_PERCENT / 100.0 * steps;
        plw_stage trial = *stage;
        trial.cathode_resistor_ohms = (double)NAN;
        meaning[i] = (plw_dummy_meaning){dummy->expected_volts * (1.0 + step), (double)NAN, (double)NAN};
        status = plw_supply_implied(&stage->supply, meaning[i].read_volts, dummy->ohms, &trial.supply, error);
        if (status == PLW_OK && plw_bias_choose(&trial, aim, series, choice, NULL) == PLW_OK) {
            meaning[i].loaded_volts = choice->option[choice->chosen].quiescent.supply_volts;
            meaning[i].ohms = choice->option[choice->chosen].ohms;
        }
    }
    free(choice);
    return status;
}
