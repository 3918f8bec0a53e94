/* Cathode resistors that makers print come back within one E24 step when the printed plate current is asked for.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/bias.h"
#include "rows.h"

static const char *const types[] = {"6V6GT", "EL84", "6L6GC", "6L6", "EL34", "6F6G", "6K6GT", "2A3", "300B", "45"};

/* The supply of a self-biased row stands above the printed plate volts by the cathode's. */
static plw_stage self_biased_stage(const plw_tube *tube, const plw_row *row) {
    plw_row self = *row;
    self.grid_volts = (double)NAN;
    plw_stage stage = stage_of_row(tube, &self);
    stage.cathode_resistor_ohms = (double)NAN;
    stage.drive_peak_volts = (double)NAN;
    return stage;
}

static void test_printed_resistors(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_tubedata();
    int resistors = 0;
    int failures = 0;
    for (size_t index = 0; index < sizeof types / sizeof types[0]; index++) {
        const plw_tube *tube;
        int variant;
        plw_error error = {0};
        assert_int_equal(plw_catalogue_find(catalogue, types[index], &tube, &variant, &error), PLW_OK);
        for (size_t row = 0; row < tube->rows_count; row++) {
            const plw_row *r = &tube->rows[row];
            if (!isfinite(r->cathode_resistor_ohms) || r->provenance.confidence == PLW_CONFIDENCE_LOW) {
                continue;
            }
            const plw_stage stage = self_biased_stage(tube, r);
            plw_bias_choice choice;
            const plw_aim aim = {PLW_AIM_CURRENT, r->plate_amps};
            if (plw_bias_choose(&stage, aim, PLW_E24, &choice, &error) != PLW_OK) {
                fail_msg("%s row %zu: %s", tube->type, row, error.text);
            }
            resistors++;
            const double chosen = choice.option[choice.chosen].ohms;
            const double low =
                plw_preferred_step(plw_preferred_at_most(r->cathode_resistor_ohms, PLW_E24), -1, PLW_E24);
            const double high =
                plw_preferred_step(plw_preferred_at_least(r->cathode_resistor_ohms, PLW_E24), 1, PLW_E24);
            /* One step away from the member nearest to the printed value. */
            const double nearest = plw_preferred_nearest(r->cathode_resistor_ohms, PLW_E24);
            const bool within = chosen >= plw_preferred_step(nearest, -1, PLW_E24) * 0.999 &&
                                chosen <= plw_preferred_step(nearest, 1, PLW_E24) * 1.001;
            if (!within) {
                print_error("%s row %zu: %.4g ohm chosen (exact %.5g), printed %.4g [%s] (%.4g..%.4g)\n", tube->type,
                            row, chosen, choice.exact_ohms, r->cathode_resistor_ohms, r->provenance.source, low, high);
                failures++;
            }
        }
    }
    plw_catalogue_free(catalogue);
    print_message("%d printed resistors\n", resistors);
    assert_true(resistors >= 10);
    assert_int_equal(failures, 0);
}

int main(void) {
    const struct CMUnitTest tests[] = {cmocka_unit_test(test_printed_resistors)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
