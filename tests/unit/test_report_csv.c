/* The answer as CSV, and what JSON and CSV have alike: uncertainty, numbers.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/fields.h"
#include "report/text_buffer.h"
#include "unit/report_json.h"

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
    solve_one(&s, PLW_LAW_TRIODE);
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
    solve_one(&s, PLW_LAW_TRIODE);
    plw_uncertainty u;
    plw_error error = {0};
    const plw_bias_option *option = s.answer.option;
    assert_int_equal(plw_uncertainty_estimate(&s.stage, &option->quiescent, &option->signal, 0.0, &u, &error), PLW_OK);
    snprintf(u.outside, sizeof u.outside, "plate volts 425 V, the data cover 100 to 200 V");
    u.outside_data = true;
    s.answer.uncertainty = &u;
    json_t *root = parsed(&s.answer);
    assert_near_relative(number_at(root, "uncertainty.plate_amps.model"), u.plate_amps.model, WRITTEN, "as found");
    assert_near_relative(number_at(root, "uncertainty.plate_watts.tubes"), u.plate_watts.tubes, WRITTEN, "as found");
    assert_near_relative(number_at(root, "uncertainty.speaker_watts.all"), u.speaker_watts.all, WRITTEN, "as found");
    assert_text_at(root, "uncertainty.dominated_by", plw_deviation_cause_name(u.dominant));
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
        assert_near_relative(strtod(value, NULL), u.plate_amps.all, WRITTEN, "as found");
        column_of(text, "uncertainty_driven_speaker_watts", i, value, sizeof value);
        assert_near_relative(strtod(value, NULL), u.speaker_watts.all, WRITTEN, "as found");
        column_of(text, "uncertainty_dominated_by", i, value, sizeof value);
        assert_string_equal(value, plw_deviation_cause_name(u.dominant));
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

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(csv_has_a_line_for_each_resistor),
        cmocka_unit_test(the_uncertainty_is_told),
        cmocka_unit_test(numbers_are_written_alike),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
