/* Writing tube files: numbers and texts come back exactly, a failed write leaves the old file.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <sys/stat.h>

#include "folder.h"
#include "tube/tube_fields.h"
#include "unit/good_tube.h"

/* ---- numbers ----------------------------------------------------------------------------------------------------- */

static void any_number_comes_back_exactly(void **state) {
    (void)state;
    const plw_tube_field *tables[] = {plw_ratings_fields, plw_row_fields, plw_point_fields, plw_rectifier_row_fields};
    unsigned long long seed = 20260917;
    for (size_t table = 0; table < sizeof tables / sizeof tables[0]; table++) {
        for (const plw_tube_field *field = tables[table]; field->attribute != NULL; field++) {
            for (int i = 0; i < 2000; i++) {
                seed = seed * 6364136223846793005ULL + 1442695040888963407ULL;
                const double share = (double)(seed >> 11U) / 9007199254740992.0;
                /* half of them spread over the range, half over its powers of ten */
                const double value = i % 2 == 0 ? field->least + share * (field->most - field->least)
                                                : field->most * pow(10, -12 * share);
                if (value < field->least) {
                    continue;
                }
                char text[PLW_FIELD_TEXT_SIZE];
                double again = 0;
                plw_field_format(field, value, text);
                assert_int_equal(plw_field_parse(field, text, &again, NULL), PLW_OK);
                if (again != value) {
                    fail_msg("%s: %.17g was written as %s and read as %.17g", field->attribute, value, text, again);
                }
            }
        }
    }
}

static void numbers_are_written_as_the_trade_prints_them(void **state) {
    (void)state;
    static const struct {
        plw_field_style style;
        double value;
        const char *text;
    } cases[] = {
        {PLW_FIELD_VOLTS, -7.3, "-7.3V"},
        {PLW_FIELD_VOLTS, 1400, "1400V"},
        {PLW_FIELD_VOLTS, 0, "0V"},
        {PLW_FIELD_MILLIAMPERES, 0.048, "48mA"},
        {PLW_FIELD_AMPERES, 0.76, "0.76A"},
        {PLW_FIELD_MILLIAMPERES, 1e-5, "0.01mA"},
        {PLW_FIELD_OHMS, 5200, "5.2k"},
        {PLW_FIELD_OHMS, 135, "135ohm"},
        {PLW_FIELD_OHMS, 2.2e6, "2.2M"},
        {PLW_FIELD_MICROMHOS, 0.0113, "11300umho"},
        {PLW_FIELD_MICROFARADS, 47e-6, "47uF"},
        {PLW_FIELD_PERCENT, 10, "10%"},
        {PLW_FIELD_WATTS, 4.5, "4.5W"},
        {PLW_FIELD_NUMBER, 1.0 / 3, "0.3333333333333333"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        const plw_tube_field field = {"value", 0, cases[i].style, -1e9, 1e9};
        char text[PLW_FIELD_TEXT_SIZE];
        plw_field_format(&field, cases[i].value, text);
        assert_string_equal(text, cases[i].text);
    }
}

/* ---- writing ----------------------------------------------------------------------------------------------------- */

/* Replace a text of the tube. */
static void set_text(char **text, const char *value) {
    free(*text);
    *text = strdup(value);
    assert_non_null(*text);
}

static void awkward_texts_and_numbers_survive_writing(void **state) {
    (void)state;
    static const char *const awkward = "A & B <c> \"d\" 'e' Röhre\ttab\nline \\ %s ]]> &amp;";
    test_folder folder;
    folder_make(&folder);
    char path[FOLDER_PATH_SIZE];
    folder_path(&folder, "odd.xml", path);
    plw_tube *tube = read_good(TUBEDATA "/6V6GT.xml");
    set_text(&tube->rows[0].provenance.note, awkward);
    set_text(&tube->rows[0].provenance.source, awkward);
    set_text(&tube->ratings[0].service, awkward);
    tube->rows[0].plate_amps = 0.1 * 0.3;
    tube->rows[0].load_ohms = 1e4 / 3;
    tube->variants[0].heater_volts = 6.3;
    tube->variants[0].heater_amps = 0.45 / 7;
    assert_int_equal(plw_tube_write(path, tube, NULL), PLW_OK);
    plw_tube *again = read_good(path);
    assert_string_equal(again->rows[0].provenance.note, awkward);
    assert_string_equal(again->rows[0].provenance.source, awkward);
    assert_string_equal(again->ratings[0].service, awkward);
    assert_true(again->rows[0].plate_amps == tube->rows[0].plate_amps);
    assert_true(again->rows[0].load_ohms == tube->rows[0].load_ohms);
    assert_true(again->variants[0].heater_amps == tube->variants[0].heater_amps);
    assert_int_equal(folder_count(&folder), 1); /* the temporary name is gone */
    plw_tube_free(again);
    plw_tube_free(tube);
    folder_remove(&folder);
}

/* A tube with a law of invented coefficients, all inside the domain. */
static plw_tube *tube_with_model(void) {
    plw_tube *tube = read_good(TUBEDATA "/EL34.xml");
    tube->has_model = true;
    plw_model *model = &tube->model;
    memset(model, 0, sizeof *model);
    model->law.kind = PLW_LAW_PENTODE;
    for (size_t i = 0; i < PLW_LAW_COEFFICIENTS_MOST; i++) {
        model->law.coefficient[i] = 1.1 + (double)i / 7;
        model->relative_error[i] = i % 2 == 0 ? (double)NAN : 0.01 / ((double)i + 3);
        const char *name = plw_law_coefficient_name(PLW_LAW_PENTODE, i);
        if (name != NULL && strcmp(name, "capture") == 0) {
            model->law.coefficient[i] = 1.0 / 7; /* at most a half */
        }
    }
    model->fit_error = (plw_model_errors){1.9, 4.2, 100.0 / 3, 0.4};
    model->left_out_error = (plw_model_errors){2.385, (double)NAN, (double)NAN, (double)NAN};
    model->region = (plw_region){10.5, 375, 250, 265, 1e-5, 0.1};
    model->rows_fitted = 3;
    model->points_fitted = 17;
    return tube;
}

static void a_law_comes_back_exactly(void **state) {
    (void)state;
    test_folder folder;
    folder_make(&folder);
    char path[FOLDER_PATH_SIZE];
    folder_path(&folder, "law.xml", path);
    plw_tube *tube = tube_with_model();
    assert_int_equal(plw_tube_write(path, tube, NULL), PLW_OK);
    plw_tube *again = read_good(path);
    assert_true(again->has_model);
    assert_int_equal(again->model.law.kind, PLW_LAW_PENTODE);
    for (size_t i = 0; i < plw_law_coefficient_count(PLW_LAW_PENTODE); i++) {
        const double error = again->model.relative_error[i];
        assert_true(again->model.law.coefficient[i] == tube->model.law.coefficient[i]);
        assert_true(i % 2 == 0 ? isnan(error) : error == tube->model.relative_error[i]);
    }
    assert_true(again->model.fit_error.power_percent == 100.0 / 3);
    assert_true(again->model.left_out_error.plate_current_percent == 2.385);
    assert_true(isnan(again->model.left_out_error.power_percent));
    assert_true(memcmp(&again->model.region, &tube->model.region, sizeof tube->model.region) == 0);
    assert_int_equal(again->model.rows_fitted, 3);
    assert_int_equal(again->model.points_fitted, 17);
    plw_tube_free(again);
    plw_tube_free(tube);
    folder_remove(&folder);
}

/* Change the first `from` of the file of a law into `to` (NULL: leave its line out) and read it. */
static void expect_bad_law(const char *from, const char *to, const char *fragment) {
    test_folder folder;
    folder_make(&folder);
    char path[FOLDER_PATH_SIZE];
    folder_path(&folder, "law.xml", path);
    plw_tube *tube = tube_with_model();
    assert_int_equal(plw_tube_write(path, tube, NULL), PLW_OK);
    plw_tube_free(tube);
    char *text = file_text(path, NULL);
    char *at = strstr(text, from);
    assert_non_null(at);
    const char *rest = to == NULL ? strchr(at, '\n') : at + strlen(from);
    const char *between = to == NULL ? "" : to;
    const size_t room = strlen(text) + strlen(between) + 1;
    char *changed = malloc(room);
    assert_non_null(changed);
    snprintf(changed, room, "%.*s%s%s", (int)(at - text), text, between, rest);
    folder_write(&folder, "law.xml", changed);
    free(text);
    free(changed);
    plw_error error = {.status = PLW_OK};
    tube = NULL;
    assert_int_equal(plw_tube_read(path, &tube, &error), PLW_E_DATA);
    assert_null(tube);
    if (strstr(error.text, fragment) == NULL) {
        fail_msg("'%s' is not in '%s'", fragment, error.text);
    }
    folder_remove(&folder);
}

static void a_law_that_does_not_fit_is_refused(void **state) {
    (void)state;
    expect_bad_law("name=\"kp\"", "name=\"bend\"", "coefficient: 'bend' stands where kp is expected");
    expect_bad_law("</model>", "<fit-error/></model>", "fit-error");
    expect_bad_law("value=\"1.1\"", "value=\"-1.1\"", "model: coefficient mu is -1.1");
    expect_bad_law("value=\"1.1\"", "value=\"1.1V\"", "value: 1.1V");
    expect_bad_law("<fit-error", "<coefficient name=\"more\" value=\"1.5\"/><fit-error",
                   "'more' stands where no further one");
    expect_bad_law("<coefficient name=\"mu\"", NULL, "'exponent' stands where mu is expected");
    expect_bad_law("<coefficient name=\"contact-volts\"", NULL, "model: the coefficient 'contact-volts' is missing");
    expect_bad_law("rows=\"3\"", "rows=\"-3\"", "rows");
}

static void a_failed_write_leaves_the_old_file(void **state) {
    (void)state;
    test_folder folder;
    folder_make(&folder);
    char path[FOLDER_PATH_SIZE];
    folder_write(&folder, "old.xml", "an older file\n");
    folder_path(&folder, "old.xml", path);
    plw_tube *tube = read_good(TUBEDATA "/EL34.xml");
    /* the disk is full: a limit on the size of files stands for it */
    struct rlimit usual;
    assert_int_equal(getrlimit(RLIMIT_FSIZE, &usual), 0);
    const struct rlimit limit = {.rlim_cur = 1000, .rlim_max = usual.rlim_max};
    void (*handler)(int) = signal(SIGXFSZ, SIG_IGN);
    assert_int_equal(setrlimit(RLIMIT_FSIZE, &limit), 0);
    plw_error error = {.status = PLW_OK};
    const plw_status status = plw_tube_write(path, tube, &error);
    assert_int_equal(setrlimit(RLIMIT_FSIZE, &usual), 0);
    (void)signal(SIGXFSZ, handler);
    assert_int_equal(status, PLW_E_FILE);
    assert_non_null(strstr(error.text, "cannot be written"));
    char *text = file_text(path, NULL);
    assert_string_equal(text, "an older file\n");
    free(text);
    assert_int_equal(folder_count(&folder), 1);
    /* no such folder; a folder of that name */
    char nowhere[FOLDER_PATH_SIZE];
    assert_int_equal(plw_tube_write(folder_path(&folder, "none/x.xml", nowhere), tube, &error), PLW_E_FILE);
    assert_int_equal(mkdir(folder_path(&folder, "x.xml", nowhere), 0777), 0);
    assert_int_equal(plw_tube_write(nowhere, tube, &error), PLW_E_FILE);
    assert_int_equal(folder_count(&folder), 2);
    plw_tube_free(tube);
    folder_remove(&folder);
}

static void what_could_not_be_read_back_is_not_written(void **state) {
    (void)state;
    test_folder folder;
    folder_make(&folder);
    char path[FOLDER_PATH_SIZE];
    folder_path(&folder, "bad.xml", path);
    plw_tube *tube = read_good(TUBEDATA "/2A3.xml");
    plw_error error = {.status = PLW_OK};
    const double plate_amps = tube->rows[0].plate_amps;
    tube->rows[0].plate_amps = -plate_amps;
    assert_int_equal(plw_tube_write(path, tube, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "plate-current"));
    tube->rows[0].plate_amps = (double)INFINITY;
    assert_int_equal(plw_tube_write(path, tube, &error), PLW_E_DATA);
    tube->rows[0].plate_amps = plate_amps;
    set_text(&tube->rows[0].provenance.source, "control \x01 character");
    assert_int_equal(plw_tube_write(path, tube, &error), PLW_E_DATA);
    assert_int_equal(folder_count(&folder), 0);
    plw_tube_free(tube);
    plw_tube_free(NULL);
    folder_remove(&folder);
}

static void names_of_unknown_values_are_texts(void **state) {
    (void)state;
    assert_string_equal(plw_connection_name(PLW_CONNECTION_ULTRALINEAR), "ultralinear");
    assert_string_equal(plw_rating_system_name(PLW_SYSTEM_STATED), "stated");
    assert_string_equal(plw_connection_name((plw_connection)77), "unknown");
    assert_string_equal(plw_tube_kind_name((plw_tube_kind)-3), "unknown");
    assert_string_equal(plw_point_kind_name((plw_point_kind)5), "unknown");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(any_number_comes_back_exactly),
        cmocka_unit_test(numbers_are_written_as_the_trade_prints_them),
        cmocka_unit_test(awkward_texts_and_numbers_survive_writing),
        cmocka_unit_test(a_law_comes_back_exactly),
        cmocka_unit_test(a_law_that_does_not_fit_is_refused),
        cmocka_unit_test(a_failed_write_leaves_the_old_file),
        cmocka_unit_test(what_could_not_be_read_back_is_not_written),
        cmocka_unit_test(names_of_unknown_values_are_texts),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
