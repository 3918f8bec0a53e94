/* The answer as JSON and CSV, and the cautions: fields, null for the unknown, the same bytes each time.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <jansson.h>
#include <locale.h>

#include "report/cautions.h"
#include "report/fields.h"
#include "report/text_buffer.h"
#include "unit/report_stage.h"

/* Nine digits are written. */
#define WRITTEN 1e-8

static char *json_of(const plw_answer *answer) {
    plw_error error = {0};
    char *text = NULL;
    if (plw_report_json(answer, &text, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return text;
}

static json_t *parsed(const plw_answer *answer) {
    char *text = json_of(answer);
    json_error_t fault;
    json_t *root = json_loads(text, JSON_REJECT_DUPLICATES, &fault);
    if (root == NULL) {
        fail_msg("%d: %s", fault.line, fault.text);
    }
    plw_text_free(text);
    return root;
}

/* A value by its path, "quiescent.total.plate_amps"; a name of digits is an index.  It must be there. */
static json_t *at(json_t *root, const char *path) {
    json_t *value = root;
    const char *from = path;
    while (*from != '\0') {
        char name[64];
        const size_t length = strcspn(from, ".");
        assert_true(length < sizeof name);
        memcpy(name, from, length);
        name[length] = '\0';
        value = json_is_array(value) ? json_array_get(value, (size_t)strtoul(name, NULL, 10))
                                     : json_object_get(value, name);
        if (value == NULL) {
            fail_msg("%s is missing (at %s)", path, name);
        }
        from += length + (from[length] == '.' ? 1 : 0);
    }
    return value;
}

static double number_at(json_t *root, const char *path) {
    json_t *value = at(root, path);
    if (!json_is_number(value)) {
        fail_msg("%s is not a number", path);
    }
    return json_number_value(value);
}

static void assert_null_at(json_t *root, const char *path) {
    if (!json_is_null(at(root, path))) {
        fail_msg("%s is not null", path);
    }
}

static void assert_text_at(json_t *root, const char *path, const char *wanted) {
    assert_true(json_is_string(at(root, path)));
    assert_string_equal(json_string_value(at(root, path)), wanted);
}

/* ---- JSON -------------------------------------------------------------------------------------------------------- */

static void tube_and_bias_are_told(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_PENTODE);
    stage_solve(&s);
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
    stage_begin(&s, PLW_LAW_PENTODE);
    s.stage.parallel = 3;
    s.stage.load_ohms = 1700;
    stage_solve(&s);
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
    stage_begin(&s, PLW_LAW_PENTODE);
    stage_solve(&s);
    const double nan = (double)NAN;
    const plw_quiescent *rest = &s.answer.option->quiescent;
    const plw_meter_readings readings = {nan, nan, nan, 0.93 * rest->cathode_volts};
    const plw_aim aim = {PLW_AIM_DISSIPATION, PLW_AIM_DEFAULT_PERCENT};
    plw_error error = {0};
    if (plw_specimen_measure(&s.stage, &readings, aim, PLW_E24, &specimen, &error) != PLW_OK) {
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
    stage_begin(&s, PLW_LAW_PENTODE);
    stage_solve(&s);
    stage_begin(&again, PLW_LAW_PENTODE);
    stage_solve(&again);
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

/* ---- CSV --------------------------------------------------------------------------------------------------------- */

static size_t columns(const char *line, size_t length) {
    size_t count = 1;
    for (size_t i = 0; i < length; i++) {
        count += line[i] == ',' ? 1 : 0;
    }
    return count;
}

/* The text of a named column in a row, 0 being the first below the header. */
static void column_of(const char *csv, const char *name, size_t row, char *value, size_t size) {
    const char *head = csv;
    size_t index = 0;
    while (strncmp(head, name, strlen(name)) != 0 || strchr(",\n", head[strlen(name)]) == NULL) {
        head = strpbrk(head, ",\n");
        assert_non_null(head);
        if (*head == '\n') {
            fail_msg("no column %s", name);
        }
        head++;
        index++;
    }
    const char *cell = csv;
    for (size_t i = 0; i <= row; i++) {
        cell = strchr(cell, '\n') + 1;
    }
    while (index-- > 0) {
        cell += strcspn(cell, ",\n");
        assert_true(*cell == ',');
        cell++;
    }
    snprintf(value, size, "%.*s", (int)strcspn(cell, ",\n"), cell);
}

static void csv_has_a_line_for_each_resistor(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_TRIODE);
    stage_solve(&s);
    char *text = NULL;
    plw_error error = {0};
    assert_int_equal(plw_report_csv(&s.answer, &text, &error), PLW_OK);
    size_t lines = 0;
    size_t wide = 0;
    for (const char *line = text; *line != '\0'; lines++) {
        const size_t length = strcspn(line, "\n");
        assert_true(line[length] == '\n');
        wide = lines == 0 ? columns(line, length) : wide;
        assert_int_equal(columns(line, length), wide);
        line += length + 1;
    }
    assert_int_equal(lines, 1 + s.choice.options);
    char value[64];
    for (size_t i = 0; i < s.choice.options; i++) {
        const plw_bias_option *option = &s.choice.option[i];
        column_of(text, "cathode_resistor_ohms", i, value, sizeof value);
        assert_near_relative(strtod(value, NULL), option->ohms, WRITTEN, "as chosen");
        column_of(text, "idle_plate_volts", i, value, sizeof value);
        assert_near_relative(strtod(value, NULL), option->quiescent.plate_volts, WRITTEN, "as solved");
        column_of(text, "driven_speaker_watts", i, value, sizeof value);
        assert_near_relative(strtod(value, NULL), option->signal.speaker_watts, WRITTEN, "as solved");
        column_of(text, "drive_peak_volts", i, value, sizeof value);
        assert_near_relative(strtod(value, NULL), option->signal.drive_peak_volts, WRITTEN, "as solved");
        column_of(text, "driven_h3_percent", i, value, sizeof value);
        assert_near_relative(strtod(value, NULL), fabs(option->signal.harmonic_percent[3]), WRITTEN, "as solved");
        column_of(text, "idle_screen_volts", i, value, sizeof value);
        assert_string_equal(value, "");
        column_of(text, "chosen", i, value, sizeof value);
        assert_string_equal(value, i == s.choice.chosen ? "yes" : "no");
        column_of(text, "drive_limit", i, value, sizeof value);
        assert_string_equal(value, plw_drive_limit_name(option->signal.limit));
    }
    plw_text_free(text);
    s.answer.choice = NULL;
    assert_int_equal(plw_report_csv(&s.answer, &text, &error), PLW_OK);
    column_of(text, "chosen", 0, value, sizeof value);
    assert_string_equal(value, "yes");
    plw_text_free(text);
}

/* JSON tells both parts of the uncertainty, CSV the whole, and that of the chosen resistor only. */
static void the_uncertainty_is_told(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_TRIODE);
    stage_solve(&s);
    plw_uncertainty u;
    plw_error error = {0};
    const plw_bias_option *option = s.answer.option;
    assert_int_equal(plw_uncertainty_estimate(&s.stage, &option->quiescent, &option->signal, &u, &error), PLW_OK);
    snprintf(u.outside, sizeof u.outside, "plate volts 425 V, the data cover 100 to 200 V");
    u.outside_data = true;
    s.answer.uncertainty = &u;
    json_t *root = parsed(&s.answer);
    assert_near_relative(number_at(root, "uncertainty.plate_amps.model"), u.plate_amps.model, WRITTEN, "as found");
    assert_near_relative(number_at(root, "uncertainty.plate_watts.tubes"), u.plate_watts.tubes, WRITTEN, "as found");
    assert_near_relative(number_at(root, "uncertainty.speaker_watts.both"), u.speaker_watts.both, WRITTEN, "as found");
    assert_text_at(root, "uncertainty.dominated_by", u.model_dominates ? "model" : "tubes");
    assert_text_at(root, "uncertainty.outside_data", u.outside);
    json_decref(root);
    char *text = NULL;
    assert_int_equal(plw_report_csv(&s.answer, &text, &error), PLW_OK);
    assert_non_null(strstr(text, ",\"plate volts 425 V, the data cover 100 to 200 V\","));
    char value[64];
    for (size_t i = 0; i < s.choice.options; i++) {
        column_of(text, "uncertainty_idle_plate_amps", i, value, sizeof value);
        if (i != s.choice.chosen) {
            assert_string_equal(value, "");
            continue;
        }
        assert_near_relative(strtod(value, NULL), u.plate_amps.both, WRITTEN, "as found");
        column_of(text, "uncertainty_driven_speaker_watts", i, value, sizeof value);
        assert_near_relative(strtod(value, NULL), u.speaker_watts.both, WRITTEN, "as found");
        column_of(text, "uncertainty_dominated_by", i, value, sizeof value);
        assert_string_equal(value, u.model_dominates ? "model" : "tubes");
    }
    plw_text_free(text);
}

static void numbers_are_written_alike(void **state) {
    (void)state;
    const struct {
        double value;
        int digits;
        const char *wanted;
    } cases[] = {{2.385, 9, "2.385"}, {-0.0, 9, "0"},           {1e-12 / 3, 3, "3.33e-13"},
                 {-47.5, 2, "-48"},   {(double)NAN, 9, "none"}, {-(double)INFINITY, 9, "none"}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        plw_text_buffer buffer;
        plw_error error = {0};
        char *text = NULL;
        assert_int_equal(plw_text_begin(&buffer, &error), PLW_OK);
        plw_text_number(buffer.file, cases[i].value, cases[i].digits, "none");
        assert_int_equal(plw_text_end(&buffer, PLW_OK, &text, &error), PLW_OK);
        assert_string_equal(text, cases[i].wanted);
        plw_text_free(text);
    }
}

/* ---- cautions ---------------------------------------------------------------------------------------------------- */

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
        stage_begin(&s, i == 0 ? PLW_LAW_PENTODE : PLW_LAW_TRIODE);
        stage_solve(&s);
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
    assert_true(warned(&s.answer, "spares it"));
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
    stage_begin(&s, PLW_LAW_PENTODE);
    stage_solve(&s);
    s.tube.model.left_out_error.plate_current_percent = 8.3;
    assert_true(warned(&s.answer, "misses printed plate currents by 8.3 %"));
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
    s.ratings.plate_watts_unpublished = true;
    assert_true(warned(&s.answer, "prints no plate dissipation"));
    plw_error error = {0};
    assert_int_equal(plw_supply_source(331.7, 385, &s.stage.supply, &error), PLW_OK);
    assert_true(warned(&s.answer, "332 V off load, 365 V with the mains 10 % up"));
}

static void cautions_are_cut_between_characters(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_PENTODE);
    stage_solve(&s);
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
        cmocka_unit_test(tube_and_bias_are_told),
        cmocka_unit_test(figures_are_those_solved),
        cmocka_unit_test(ratings_and_choices_are_listed),
        cmocka_unit_test(the_unknown_is_null),
        cmocka_unit_test(a_soft_supply_is_told),
        cmocka_unit_test(a_tube_on_the_bench_is_told),
        cmocka_unit_test(odd_names_survive),
        cmocka_unit_test(the_same_answer_gives_the_same_bytes),
        cmocka_unit_test(scarce_memory_is_an_error_not_a_crash),
        cmocka_unit_test(csv_has_a_line_for_each_resistor),
        cmocka_unit_test(the_uncertainty_is_told),
        cmocka_unit_test(numbers_are_written_alike),
        cmocka_unit_test(standing_cautions_are_always_there),
        cmocka_unit_test(conditions_have_their_cautions),
        cmocka_unit_test(doubtful_data_have_their_cautions),
        cmocka_unit_test(cautions_are_cut_between_characters),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
