/* The cautions of an answer: those that always stand, those that have a reason.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/cautions.h"
#include "unit/report_json.h"

static char lines[PLW_CAUTIONS_MOST][PLW_CAUTION_SIZE];

static bool warned(const plw_answer *answer, const char *words) {
    const size_t count = plw_report_cautions(answer, lines, PLW_CAUTIONS_MOST, NULL);
    assert_true(count > 4 && count < PLW_CAUTIONS_MOST);
    for (size_t i = 0; i < count; i++) {
        if (strstr(lines[i], words) != NULL) {
            return true;
        }
    }
    return false;
}

static void standing_cautions_are_always_there(void **state) {
    (void)state;
    static solved_stage s;
    for (int i = 0; i < 2; i++) {
        solve_one(&s, i == 0 ? PLW_LAW_PENTODE : PLW_LAW_TRIODE);
        const char *const words[] = {"discharge",    "verify",      "one hand", "insulated",
                                     "live chassis", "earth",       "Fuse",     "unloaded",
                                     "high mains",   "Local codes", "licensed", "60 V before"};
        for (size_t k = 0; k < sizeof words / sizeof words[0]; k++) {
            if (!warned(&s.answer, words[k])) {
                fail_msg("no caution about '%s'", words[k]);
            }
        }
        assert_true(warned(&s.answer, "without its speaker") == (i == 0));
    }
}

/* Each condition: silent without it, a word with it. */
static void conditions_have_their_cautions(void **state) {
    (void)state;
    static solved_stage s;
    static plw_bias_option option;
    stage_begin(&s, PLW_LAW_PENTODE);
    s.stage.drive_peak_volts = 2.385;
    stage_solve(&s);
    option = *s.answer.option;
    s.answer.option = &option;
    const char *const silent[] = {"aim is not reached", "Rating exceeded", "nothing is left", "beyond it",
                                  "goes positive",      "no longer class", "spares it",       "share one",
                                  "Extrapolated",       "fixed bias",      "misses printed",  "from memory",
                                  "off load",           "No printed row",  "known only",      "prints no"};
    for (size_t i = 0; i < sizeof silent / sizeof silent[0]; i++) {
        if (warned(&s.answer, silent[i])) {
            fail_msg("caution about '%s' without a reason", silent[i]);
        }
    }
    s.choice.aim_reached = false;
    snprintf(s.choice.obstacle, sizeof s.choice.obstacle, "the screen forbids it");
    assert_true(warned(&s.answer, "The aim is not reached: the screen forbids it"));
    option.ratings[0].ok = false;
    assert_true(warned(&s.answer, "Rating exceeded at idle"));
    option.ratings[0].ok = true;
    option.ratings[0].share_percent = 97.3;
    assert_false(warned(&s.answer, "nothing is left")); /* design-center ratings leave room by themselves */
    s.ratings.system = PLW_SYSTEM_DESIGN_MAXIMUM;
    assert_true(warned(&s.answer, "nothing is left for high mains"));
    s.ratings.system = PLW_SYSTEM_DESIGN_CENTER;
    option.signal.grid_current = true;
    assert_true(warned(&s.answer, "goes positive"));
    option.signal.cut_off = true;
    assert_true(warned(&s.answer, "no longer class A"));
    option.signal.limit = PLW_DRIVE_CUT_OFF;
    assert_true(warned(&s.answer, "beyond it the tube is cut off"));
    option.signal.limit = PLW_DRIVE_GRID_CURRENT;
    assert_true(warned(&s.answer, "beyond it the grid draws current"));
    option.signal.screen_watts = 1.87;
    assert_true(warned(&s.answer, ": a resistor in the screen lead spares it"));
    s.stage.screen_resistor_ohms = 1030.0;
    assert_true(warned(&s.answer, ": a larger resistor in the screen lead spares it"));
    s.stage.screen_resistor_ohms = 0.0;
    s.stage.parallel = 2;
    assert_true(warned(&s.answer, "2 tubes share one cathode resistor"));
    s.stage.resistor_each = true;
    assert_false(warned(&s.answer, "share one"));
    option.quiescent.plate_volts = 637;
    assert_true(warned(&s.answer, "at rest: plate volts 637 V (printed: 100 V to 400 V)."));
    s.stage.fixed_bias_volts = -9.7;
    assert_true(warned(&s.answer, "With fixed bias"));
}

static void doubtful_data_have_their_cautions(void **state) {
    (void)state;
    static solved_stage s;
    solve_one(&s, PLW_LAW_PENTODE);
    s.tube.model.left_out_error.plate_current_percent = 8.3;
    assert_true(warned(&s.answer, "misses printed plate currents by 8.3 %"));
    s.tube.model.left_out_error.screen_current_percent = 49.6;
    assert_true(warned(&s.answer, "misses printed screen currents by 50 %"));
    s.tube.model.left_out_error.screen_current_percent = (double)NAN;
    s.tube.model.left_out_error.plate_current_percent = (double)NAN;
    assert_false(warned(&s.answer, "misses printed plate currents"));
    s.tube.model.fit_error.plate_current_percent = (double)NAN;
    assert_true(warned(&s.answer, "No printed row"));
    s.tube.model.fit_error.screen_current_percent = 37.2;
    assert_true(warned(&s.answer, "misses printed screen currents by 37 %"));
    s.tube.model.left_out_error.power_percent = 14.6;
    assert_true(warned(&s.answer, "known only roughly"));
    s.ratings.provenance.how = PLW_HOW_MEMORY;
    assert_true(warned(&s.answer, "from memory"));
    s.ratings.provenance.how = PLW_HOW_TOLD;
    assert_true(warned(&s.answer, "told without a source"));
    assert_false(warned(&s.answer, "from memory"));
    s.ratings.plate_watts_unpublished = true;
    assert_true(warned(&s.answer, "prints no plate dissipation"));
    plw_error error = {0};
    assert_int_equal(plw_supply_source(331.7, 385, &s.stage.supply, &error), PLW_OK);
    assert_true(warned(&s.answer, "332 V off load, 365 V with the mains 10 % up"));
}

/* As printed, apart for either bias; nothing where the sheet is silent. */
static void the_largest_grid_resistor_is_named(void **state) {
    (void)state;
    static solved_stage s;
    solve_one(&s, PLW_LAW_PENTODE);
    assert_false(warned(&s.answer, "Grid resistor"));
    s.ratings.grid_ohms_fixed_bias = 270e3;
    assert_false(warned(&s.answer, "Grid resistor"));
    s.ratings.grid_ohms_cathode_bias = 680e3;
    assert_true(warned(&s.answer, "Grid resistor: up to 680 k\xCE\xA9 with cathode bias (the sheet)."));
    s.stage.parallel = 4;
    assert_true(warned(&s.answer, "with cathode bias for each tube (the sheet); one for all, up to 170 k"));
    s.stage.parallel = 1;
    s.stage.fixed_bias_volts = -9.7;
    assert_true(warned(&s.answer, "Grid resistor: up to 270 k\xCE\xA9 with fixed bias (the sheet)."));
    s.ratings.grid_ohms_fixed_bias = (double)NAN;
    assert_false(warned(&s.answer, "Grid resistor"));
}

static void cautions_are_cut_between_characters(void **state) {
    (void)state;
    static solved_stage s;
    solve_one(&s, PLW_LAW_PENTODE);
    s.choice.aim_reached = false;
    size_t used = 0;
    while (used + 4 < sizeof s.choice.obstacle) {
        used += (size_t)snprintf(s.choice.obstacle + used, sizeof s.choice.obstacle - used, "\xE2\x84\xA6");
    }
    s.choice.obstacle[used - 1] = '\0'; /* a text cut by its writer within a character */
    json_t *root = parsed(&s.answer);
    assert_non_null(strstr(json_string_value(at(root, "cautions.0")), "The aim is not reached: \xE2\x84\xA6"));
    json_decref(root);
    assert_int_equal(plw_report_cautions(&s.answer, lines, 2, NULL), 2);
    assert_int_equal(plw_report_cautions(&s.answer, lines, 0, NULL), 0);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(standing_cautions_are_always_there),  cmocka_unit_test(conditions_have_their_cautions),
        cmocka_unit_test(doubtful_data_have_their_cautions),   cmocka_unit_test(the_largest_grid_resistor_is_named),
        cmocka_unit_test(cautions_are_cut_between_characters),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
