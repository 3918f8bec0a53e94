/* The answer as JSON: fields, null for the unknown, the same bytes each time.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <locale.h>

#include "report/fields.h"
#include "unit/report_json.h"

static void tube_and_bias_are_told(void **state) {
    (void)state;
    static solved_stage s;
    solve_one(&s, PLW_LAW_PENTODE);
    json_t *root = parsed(&s.answer);
    assert_text_at(root, "schema", "platewright/1");
    assert_text_at(root, "tube.type", "PX-84");
    assert_text_at(root, "tube.connection", "pentode");
    assert_near(number_at(root, "tube.parallel"), 1, 0, "one tube");
    assert_text_at(root, "tube.model.law", plw_law_name(PLW_LAW_PENTODE));
    assert_int_equal(json_object_size(at(root, "tube.model.coefficients")), plw_law_coefficient_count(PLW_LAW_PENTODE));
    assert_near(number_at(root, "tube.model.coefficients.mu"), 19.5, 1e-9, "as given");
    assert_near(number_at(root, "tube.model.fit_error_percent"), 1.87, 1e-9, "as given");
    assert_near(number_at(root, "tube.model.left_out_error_percent"), 3.14, 1e-9, "as given");
    assert_near_relative(number_at(root, "bias.cathode_resistor_ohms"), s.stage.cathode_resistor_ohms, WRITTEN,
                         "as chosen");
    assert_near_relative(number_at(root, "bias.exact_ohms"), s.choice.exact_ohms, WRITTEN, "as chosen");
    assert_near_relative(number_at(root, "bias.resistor_watts"), s.answer.option->watts, WRITTEN, "as chosen");
    assert_near_relative(number_at(root, "bias.rating_watts"), s.answer.option->rating_watts, WRITTEN, "as chosen");
    assert_null_at(root, "bias.fixed_bias_volts");
    assert_null(json_object_get(root, "supply"));
    assert_null(json_object_get(root, "specimen"));
    json_decref(root);
}

static void figures_are_those_solved(void **state) {
    (void)state;
    static solved_stage s;
    solve_pentodes(&s, 3, 1700);
    json_t *root = parsed(&s.answer);
    const plw_quiescent *rest = &s.answer.option->quiescent;
    const plw_signal *signal = &s.answer.option->signal;
    const struct {
        const char *path;
        double value;
    } figures[] = {
        {"quiescent.supply_volts", rest->supply_volts},
        {"quiescent.plate_to_ground_volts", rest->plate_to_ground_volts},
        {"quiescent.plate_volts", rest->plate_volts},
        {"quiescent.screen_volts", rest->screen_volts},
        {"quiescent.cathode_volts", rest->cathode_volts},
        {"quiescent.grid_volts", rest->grid_volts},
        {"quiescent.plate_amps", rest->plate_amps},
        {"quiescent.screen_amps", rest->screen_amps},
        {"quiescent.cathode_amps", rest->cathode_amps},
        {"quiescent.plate_watts", rest->plate_watts},
        {"quiescent.screen_watts", rest->screen_watts},
        {"quiescent.gm_siemens", rest->gm_siemens},
        {"quiescent.plate_resistance_ohms", rest->plate_resistance_ohms},
        {"quiescent.mu", rest->mu},
        {"quiescent.total.plate_amps", 3 * rest->plate_amps},
        {"quiescent.total.screen_watts", 3 * rest->screen_watts},
        {"quiescent.total.supply_amps", rest->supply_amps},
        {"signal.drive_peak_volts", signal->drive_peak_volts},
        {"signal.power_watts", signal->power_watts},
        {"signal.speaker_watts", signal->speaker_watts},
        {"signal.thd_percent", signal->thd_percent},
        {"signal.plate_amps", signal->plate_amps},
        {"signal.screen_amps", signal->screen_amps},
        {"signal.plate_watts", signal->plate_watts},
        {"signal.screen_watts", signal->screen_watts},
        {"signal.harmonics_percent.0", fabs(signal->harmonic_percent[2])},
        {"signal.harmonics_percent.8", fabs(signal->harmonic_percent[10])},
    };
    for (size_t i = 0; i < sizeof figures / sizeof figures[0]; i++) {
        assert_near_relative(number_at(root, figures[i].path), figures[i].value, WRITTEN, figures[i].path);
    }
    assert_int_equal(json_array_size(at(root, "signal.harmonics_percent")), 9);
    assert_text_at(root, "signal.limit", plw_drive_limit_name(signal->limit));
    assert_string_equal(plw_drive_limit_name(PLW_DRIVE_GIVEN), "drive");
    assert_string_equal(plw_drive_limit_name(PLW_DRIVE_GRID_CURRENT), "grid current");
    assert_string_equal(plw_drive_limit_name(PLW_DRIVE_CUT_OFF), "cut-off");
    json_decref(root);
}

static void ratings_and_choices_are_listed(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_PENTODE);
    s.ratings.screen_watts = 0.385;
    stage_solve(&s);
    json_t *root = parsed(&s.answer);
    const plw_bias_option *option = s.answer.option;
    assert_int_equal(json_array_size(at(root, "ratings")), option->ratings_count);
    bool exceeded = false;
    for (size_t i = 0; i < option->ratings_count; i++) {
        json_t *entry = json_array_get(at(root, "ratings"), i);
        assert_text_at(entry, "name", option->ratings[i].name);
        assert_near_relative(number_at(entry, "value"), option->ratings[i].value, WRITTEN, "as checked");
        assert_near_relative(number_at(entry, "limit"), option->ratings[i].limit, WRITTEN, "as checked");
        assert_near_relative(number_at(entry, "share_percent"), option->ratings[i].share_percent, WRITTEN,
                             "as checked");
        assert_true(json_is_true(at(entry, "ok")) == option->ratings[i].ok);
        const bool idle = option->ratings[i].when == PLW_AT_IDLE;
        assert_text_at(entry, "at", idle ? "idle" : "full drive");
        const char *unit = json_string_value(at(entry, "unit"));
        assert_true(strcmp(unit, "V") == 0 || strcmp(unit, "A") == 0 || strcmp(unit, "W") == 0);
        exceeded = exceeded || !option->ratings[i].ok;
    }
    assert_true(exceeded);
    assert_int_equal(json_array_size(at(root, "choices")), s.choice.options);
    assert_true(s.choice.options > 1);
    size_t chosen = 0;
    for (size_t i = 0; i < s.choice.options; i++) {
        json_t *entry = json_array_get(at(root, "choices"), i);
        assert_near_relative(number_at(entry, "cathode_resistor_ohms"), s.choice.option[i].ohms, WRITTEN, "ascending");
        assert_near_relative(number_at(entry, "quiescent.plate_watts"), s.choice.option[i].quiescent.plate_watts,
                             WRITTEN, "as solved");
        assert_near_relative(number_at(entry, "signal.speaker_watts"), s.choice.option[i].signal.speaker_watts, WRITTEN,
                             "as solved");
        chosen += json_is_true(at(entry, "chosen")) ? 1 : 0;
    }
    assert_int_equal(chosen, 1);
    json_decref(root);
}

static void the_unknown_is_null(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_TRIODE);
    s.tube.model.left_out_error.plate_current_percent = (double)NAN;
    stage_solve(&s);
    static plw_bias_option option;
    option = *s.answer.option;
    option.rating_watts = (double)NAN;
    option.signal.thd_percent = (double)INFINITY;
    s.answer.option = &option;
    s.answer.choice = NULL;
    json_t *root = parsed(&s.answer);
    const char *const unknown[] = {"tube.model.left_out_error_percent",
                                   "bias.exact_ohms",
                                   "bias.rating_watts",
                                   "quiescent.screen_volts",
                                   "quiescent.screen_watts",
                                   "signal.screen_watts",
                                   "quiescent.total.screen_watts",
                                   "signal.thd_percent"};
    for (size_t i = 0; i < sizeof unknown / sizeof unknown[0]; i++) {
        assert_null_at(root, unknown[i]);
    }
    assert_text_at(root, "tube.connection", "triode");
    assert_int_equal(json_array_size(at(root, "choices")), 0);
    json_decref(root);
}

static void a_soft_supply_is_told(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_PENTODE);
    plw_error error = {0};
    const plw_reading readings[] = {{331.7, 0}, {262.3, 0.0385}};
    assert_int_equal(plw_supply_readings(readings, 2, &s.stage.supply, &error), PLW_OK);
    stage_solve(&s);
    json_t *root = parsed(&s.answer);
    assert_text_at(root, "supply.kind", "readings");
    assert_near(number_at(root, "supply.off_load_volts"), 331.7, 1e-6, "as read");
    assert_near_relative(number_at(root, "supply.source_ohms"), (331.7 - 262.3) / 0.0385, 1e-6, "Ohm's law");
    const plw_quiescent *rest = &s.answer.option->quiescent;
    assert_near_relative(number_at(root, "supply.amps"), rest->supply_amps, WRITTEN, "as solved");
    assert_near_relative(number_at(root, "supply.loaded_volts"), rest->supply_volts, WRITTEN, "as solved");
    assert_near(number_at(root, "supply.off_load_volts_mains_high"), 1.1 * 331.7, 1e-6, "a tenth higher");
    assert_int_equal(json_array_size(at(root, "supply.line")), 2);
    assert_near_relative(number_at(root, "supply.dummy_load.watts"),
                         number_at(root, "supply.dummy_load.expected_volts") *
                             number_at(root, "supply.dummy_load.expected_volts") /
                             number_at(root, "supply.dummy_load.ohms"),
                         1e-6, "V^2 / R");
    const char *const unknown[] = {"ripple_volts_peak_to_peak", "winding_rms_amps", "diode_peak_amps", "bleeder"};
    for (size_t i = 0; i < sizeof unknown / sizeof unknown[0]; i++) {
        assert_null_at(at(root, "supply"), unknown[i]);
    }
    json_decref(root);
}

static void a_tube_on_the_bench_is_told(void **state) {
    (void)state;
    static solved_stage s;
    static plw_specimen specimen;
    solve_one(&s, PLW_LAW_PENTODE);
    const double nan = (double)NAN;
    const plw_quiescent *rest = &s.answer.option->quiescent;
    const plw_meter_readings readings = {nan, nan, nan, 0.93 * rest->cathode_volts};
    const plw_aim aim = {PLW_AIM_DISSIPATION, PLW_AIM_DEFAULT_PERCENT};
    plw_error error = {0};
    if (plw_specimen_measure(&s.stage, &readings, &aim, PLW_E24, &specimen, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    s.answer.specimen = &specimen;
    json_t *root = parsed(&s.answer);
    assert_near_relative(number_at(root, "specimen.cathode_volts"), 0.93 * rest->cathode_volts, WRITTEN, "as read");
    assert_near_relative(number_at(root, "specimen.cathode_amps"), 0.93 * rest->cathode_amps, 1e-7, "Ohm's law");
    assert_near_relative(number_at(root, "specimen.off_percent"), specimen.off_percent, WRITTEN, "as found");
    assert_true(json_is_false(at(root, "specimen.read.plate")));
    assert_true(json_is_true(at(root, "specimen.read.cathode")));
    assert_null_at(root, "specimen.primary_ohms");
    assert_near_relative(number_at(root, "specimen.suitable_resistor.cathode_resistor_ohms"),
                         specimen.choice.option[specimen.choice.chosen].ohms, WRITTEN, "as chosen");
    json_decref(root);
    specimen.resistor_found = false;
    snprintf(specimen.resistor_obstacle, sizeof specimen.resistor_obstacle, "worn out");
    root = parsed(&s.answer);
    assert_null_at(root, "specimen.suitable_resistor.cathode_resistor_ohms");
    assert_text_at(root, "specimen.suitable_resistor.obstacle", "worn out");
    json_decref(root);
}

static void odd_names_survive(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_PENTODE);
    const char *odd = "E\"8,4\\`x`\n\x01\xC2\xB5";
    snprintf(s.type, sizeof s.type, "%s", odd);
    stage_solve(&s);
    json_t *root = parsed(&s.answer);
    assert_text_at(root, "tube.type", odd);
    json_decref(root);
    char *text = NULL;
    plw_error error = {0};
    assert_int_equal(plw_report_csv(&s.answer, &text, &error), PLW_OK);
    assert_non_null(strstr(text, "\n\"E\"\"8,4\\`x`\n\x01\xC2\xB5\",pentode,1,"));
    plw_text_free(text);
    snprintf(s.type, sizeof s.type, "\xC3(");
    text = NULL;
    assert_int_equal(plw_report_json(&s.answer, &text, &error), PLW_E_NO_MEMORY);
    assert_non_null(strstr(error.text, "UTF-8"));
    assert_null(text);
}

static void the_same_answer_gives_the_same_bytes(void **state) {
    (void)state;
    static solved_stage s, again;
    solve_one(&s, PLW_LAW_PENTODE);
    solve_one(&again, PLW_LAW_PENTODE);
    char *one = json_of(&s.answer);
    char *two = json_of(&again.answer);
    assert_string_equal(one, two);
    assert_true(one[strlen(one) - 1] == '\n');
    plw_text_free(two);
    /* Where a locale with a decimal comma is installed, nothing changes either. */
    const char *const locales[] = {"de_DE.UTF-8", "fr_FR.UTF-8", "nl_NL.UTF-8", "ru_RU.UTF-8"};
    for (size_t i = 0; i < 4; i++) {
        if (setlocale(LC_ALL, locales[i]) != NULL) {
            two = json_of(&s.answer);
            setlocale(LC_ALL, "C");
            assert_string_equal(one, two);
            plw_text_free(two);
        }
    }
    plw_text_free(one);
}

/* Memory that ends after so many pieces. */
static long pieces_left;

static void *scarce(size_t size) {
    return pieces_left-- > 0 ? malloc(size) : NULL;
}

static void scarce_memory_is_an_error_not_a_crash(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_PENTODE);
    plw_error error = {0};
    assert_int_equal(plw_supply_source(331.7, 38.5, &s.stage.supply, &error), PLW_OK);
    stage_solve(&s);
    char *wanted = json_of(&s.answer);
    json_set_alloc_funcs(scarce, free);
    plw_status status = PLW_E_NO_MEMORY;
    long pieces = 0;
    for (; status != PLW_OK && pieces < 100000; pieces++) {
        char *text = NULL;
        pieces_left = pieces;
        status = plw_report_json(&s.answer, &text, &error);
        if (status == PLW_OK) {
            assert_string_equal(text, wanted);
            plw_text_free(text);
        } else {
            assert_int_equal(status, PLW_E_NO_MEMORY);
            assert_null(text);
        }
    }
    json_set_alloc_funcs(malloc, free);
    assert_true(pieces > 100 && status == PLW_OK);
    plw_text_free(wanted);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(tube_and_bias_are_told),
        cmocka_unit_test(figures_are_those_solved),
        cmocka_unit_test(ratings_and_choices_are_listed),
        cmocka_unit_test(the_unknown_is_null),
        cmocka_unit_test(a_soft_supply_is_told),
        cmocka_unit_test(a_tube_on_the_bench_is_told),
        cmocka_unit_test(odd_names_survive),
        cmocka_unit_test(the_same_answer_gives_the_same_bytes),
        cmocka_unit_test(scarce_memory_is_an_error_not_a_crash),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
