/* Tube files: reading, every fault that is told, writing back to the same bytes.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <glob.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <unistd.h>

#include "folder.h"
#include "near.h"
#include "platewright/catalogue.h"
#include "tube/tube_fields.h"

static plw_tube *read_good(const char *path) {
    plw_tube *tube = NULL;
    plw_error error = {.status = PLW_OK};
    if (plw_tube_read(path, &tube, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    assert_string_equal(error.text, "");
    return tube;
}

/* ---- the files of the catalogue ---------------------------------------------------------------------------------- */

static void every_file_of_the_catalogue_is_valid_and_canonical(void **state) {
    (void)state;
    test_folder folder;
    folder_make(&folder);
    char copy[FOLDER_PATH_SIZE];
    folder_path(&folder, "copy.xml", copy);
    glob_t files;
    assert_int_equal(glob(TUBEDATA "/*.xml", 0, NULL, &files), 0);
    assert_true(files.gl_pathc >= 45);
    for (size_t i = 0; i < files.gl_pathc; i++) {
        plw_tube *tube = read_good(files.gl_pathv[i]);
        assert_string_equal(tube->file, files.gl_pathv[i]);
        assert_int_equal(plw_tube_write(copy, tube, NULL), PLW_OK);
        char *original = file_text(files.gl_pathv[i], NULL);
        char *written = file_text(copy, NULL);
        if (strcmp(original, written) != 0) {
            fail_msg("%s is not as plw_tube_write() writes it", files.gl_pathv[i]);
        }
        free(original);
        free(written);
        plw_tube_free(tube);
    }
    globfree(&files);
    folder_remove(&folder);
}

static void check_provenance(const plw_provenance *provenance, const char *file) {
    if (provenance->source == NULL || strlen(provenance->source) < 8) {
        fail_msg("%s: a source is missing", file);
    }
}

static void every_value_has_a_source(void **state) {
    (void)state;
    glob_t files;
    assert_int_equal(glob(TUBEDATA "/*.xml", 0, NULL, &files), 0);
    for (size_t i = 0; i < files.gl_pathc; i++) {
        plw_tube *tube = read_good(files.gl_pathv[i]);
        check_provenance(&tube->heater_provenance, tube->file);
        for (size_t k = 0; k < tube->ratings_count; k++) {
            check_provenance(&tube->ratings[k].provenance, tube->file);
        }
        for (size_t k = 0; k < tube->rows_count; k++) {
            check_provenance(&tube->rows[k].provenance, tube->file);
        }
        for (size_t k = 0; k < tube->points_count; k++) {
            check_provenance(&tube->points[k].provenance, tube->file);
        }
        if (tube->pins_count > 0) {
            check_provenance(&tube->pins_provenance, tube->file);
        }
        plw_tube_free(tube);
    }
    globfree(&files);
}

/* A row beyond the highest ratings is a typing error, or a supply voltage taken for that of the plate.  Allowed: 6 %
 * for characteristics (6BX7GT: 10.5 W in print, rated 10 W), 2 % for operation (35L6GT: 8.6 W, 8.5 W); in triode
 * connection the current is that of plate and screen. */
static void check_row(const plw_tube *tube, size_t index) {
    const plw_row *row = &tube->rows[index];
    double most_volts = 0;
    double most_watts = 0;
    for (size_t i = 0; i < tube->ratings_count; i++) {
        most_volts = fmax(most_volts, tube->ratings[i].plate_volts);
        most_watts = fmax(most_watts, tube->ratings[i].plate_watts);
    }
    const double most_share = isnan(row->load_ohms) ? 1.06 : 1.02;
    const bool screen_too = row->connection == PLW_CONNECTION_TRIODE && tube->kind != PLW_KIND_TRIODE;
    if (row->plate_volts > most_volts ||
        (most_watts > 0 && row->plate_volts * row->plate_amps > most_share * (screen_too ? 1.2 : 1.0) * most_watts)) {
        fail_msg("%s: row %zu lies beyond the ratings", tube->file, index);
    }
}

static void printed_rows_stay_within_the_ratings(void **state) {
    (void)state;
    glob_t files;
    assert_int_equal(glob(TUBEDATA "/*.xml", 0, NULL, &files), 0);
    for (size_t i = 0; i < files.gl_pathc; i++) {
        plw_tube *tube = read_good(files.gl_pathv[i]);
        for (size_t k = 0; k < tube->rows_count; k++) {
            if (tube->rows[k].provenance.confidence != PLW_CONFIDENCE_LOW) {
                check_row(tube, k);
            }
        }
        plw_tube_free(tube);
    }
    globfree(&files);
}

static void el84_is_read_as_printed(void **state) {
    (void)state;
    static const char *const sheet = "Philips data sheet EL84 (c.1955-69)";
    plw_tube *tube = read_good(TUBEDATA "/EL84.xml");
    assert_string_equal(tube->type, "EL84");
    assert_int_equal(tube->kind, PLW_KIND_PENTODE);
    assert_string_equal(tube->equivalents[0], "6BQ5");
    assert_near(tube->heater_volts, 6.3, 0, sheet);
    assert_near(tube->heater_amps, 0.76, 0, sheet);
    assert_false(tube->directly_heated);
    const plw_ratings *ratings = &tube->ratings[0];
    assert_int_equal(ratings->system, PLW_SYSTEM_DESIGN_CENTER);
    assert_near(ratings->plate_volts, 300, 0, sheet);
    assert_near(ratings->plate_watts, 12, 0, sheet);
    assert_near(ratings->screen_watts, 2, 0, sheet);
    assert_near(ratings->screen_watts_full_drive, 4, 0, sheet);
    assert_near(ratings->cathode_amps, 0.065, 0, sheet);
    assert_near(ratings->grid_ohms_fixed_bias, 300e3, 0, sheet);
    assert_true(isnan(ratings->total_watts));
    const plw_row *row = &tube->rows[0];
    assert_near(row->grid_volts, -7.3, 0, sheet);
    assert_near(row->plate_amps, 0.048, 0, sheet);
    assert_near(row->screen_amps_full_drive, 0.0108, 0, sheet);
    assert_near(row->gm_siemens, 0.0113, 0, sheet);
    assert_near(row->load_ohms, 5200, 0, sheet);
    assert_near(row->power_watts, 5.7, 0, sheet);
    assert_near(row->thd_percent, 10, 0, sheet);
    assert_true(isnan(row->mu));
    assert_int_equal(row->provenance.how, PLW_HOW_MEMORY);
    assert_int_equal(row->provenance.confidence, PLW_CONFIDENCE_HIGH);
    /* noval: grid 1 at pin 2, plate at 7, screen at 9 */
    assert_int_equal(tube->pins_count, 9);
    assert_string_equal(tube->pins[1].electrode, "grid 1");
    assert_string_equal(tube->pins[6].electrode, "plate");
    assert_string_equal(tube->pins[8].electrode, "screen");
    plw_tube_free(tube);
}

static void a_dissipation_that_is_not_published_says_so(void **state) {
    (void)state;
    plw_tube *tube = read_good(TUBEDATA "/71A.xml");
    assert_true(tube->ratings[0].plate_watts_unpublished);
    assert_true(isnan(tube->ratings[0].plate_watts));
    assert_near(tube->ratings[0].plate_volts, 180, 0, "RCA RC-13/RC-14");
    assert_true(tube->directly_heated);
    assert_true(tube->rows[0].filament_midpoint);
    plw_tube_free(tube);
}

static void a_rectifier_has_its_perveance_from_the_drop(void **state) {
    (void)state;
    plw_tube *tube = read_good(TUBEDATA "/5U4GB.xml");
    assert_int_equal(tube->kind, PLW_KIND_RECTIFIER);
    assert_near_relative(tube->rectifier.perveance, 0.275 / (50 * sqrt(50.0)), 1e-14, "50 V at 275 mA");
    assert_near(tube->rectifier.peak_inverse_volts, 1550, 0, "RCA manual");
    assert_near(tube->rectifier.most_reservoir_farads, 40e-6, 0, "RCA manual");
    assert_true(tube->rectifier.directly_heated);
    assert_int_equal(tube->rectifier_rows_count, 3);
    assert_near(tube->rectifier_rows[1].half_volts, 520, 0, "RCA manual");
    plw_tube_free(tube);
}

static void all_variants_have_ratings_of_their_own(void **state) {
    (void)state;
    plw_tube *tube = read_good(TUBEDATA "/6V6GT.xml");
    assert_string_equal(tube->variants[0].type, "6V6GTA");
    assert_near(plw_tube_ratings(tube, 0, PLW_CONNECTION_PENTODE)->plate_watts, 14, 0, "RCA RC-30, 6V6GTA");
    assert_near(plw_tube_ratings(tube, -1, PLW_CONNECTION_PENTODE)->plate_watts, 12, 0, "RCA RC-19, 6V6GT");
    assert_near(plw_tube_ratings(tube, 99, PLW_CONNECTION_PENTODE)->plate_watts, 12, 0, "beyond the list: the type");
    assert_true(isnan(tube->variants[0].heater_volts));
    plw_tube_free(tube);
    tube = read_good(TUBEDATA "/6L6GC.xml");
    assert_near(plw_tube_ratings(tube, -1, PLW_CONNECTION_TRIODE)->plate_volts, 450, 0, "GE sheet, triode connection");
    assert_near(plw_tube_ratings(tube, -1, PLW_CONNECTION_ULTRALINEAR)->plate_volts, 500, 0, "GE sheet");
    plw_tube_free(tube);
}

/* ---- bad files --------------------------------------------------------------------------------------------------- */

typedef struct {
    const char *file;
    const char *faults[4]; /* each stands in the text */
} bad_file;

static const bad_file BAD_FILES[] = {
    {"blank_source.xml", {"blank_source.xml:5:3: source: is blank"}},
    {"compressed.xml", {":1:1: the file is compressed (gzip)"}},
    {"doctype.xml", {":3:3: a DOCTYPE is not allowed"}},
    {"empty.xml", {":1:1: the file is empty"}},
    {"latin1.xml", {"another encoding than UTF-8"}},
    {"malformed.xml", {"malformed.xml:6:"}},
    {"many_faults.xml", {":5:3: plate-current", ":6:3: plate-current", "more faults"}},
    {"missing_rating.xml", {":4:3: ratings: the attribute 'plate-dissipation' is missing", "'screen-dissipation'"}},
    {"missing_source.xml", {":5:3: ", "'source' is required"}},
    {"negative_current.xml", {":5:32: plate-current: -41mA is out of range"}},
    {"no_element.xml", {"no_element.xml:1:1: "}},
    {"no_ratings.xml", {":2:1: tube: the element 'ratings' is missing"}},
    {"not_finite.xml", {":5:3: plate: 'NaN' is not a number", ":6:3: plate: 'inf' is not a number"}},
    {"not_utf8.xml", {"not_utf8.xml:3:", "UTF-8"}},
    {"out_of_range.xml", {":4:3: plate: 300kV is out of range", ":5:3: grid: 9500V is out of range"}},
    {"pins_fall.xml", {":5:5: pin: the numbers must rise; 2 follows 3"}},
    {"point_without_current.xml",
     {":5:3: point: the attribute 'grid'", ":5:3: point: the attribute 'plate-current'",
      ":6:3: point: the attribute 'mu'"}},
    {"power_without_load.xml", {":5:3: row: the attribute 'load' is missing", ":6:3: row: neither 'grid' nor"}},
    {"rectifier_with_row.xml", {":4:3: row: has no place in a rectifier"}},
    {"rectifier_without_limits.xml", {":2:1: tube: the element 'rectifier-limits'", ":4:3: rectifier-row: "}},
    {"screen_in_triode.xml",
     {":5:3: row: the attribute 'screen' has no place", ":6:3: row: the attribute 'screen' is"}},
    {"triode_first.xml", {":4:3: ratings: the first ratings must be those of the pentode connection"}},
    {"triode_with_screen.xml", {":4:3: ratings: connection: a tube without a screen"}},
    {"utf16.xml", {"UTF-16"}},
    {"utf16_no_mark.xml", {"UTF-16"}},
    {"variants_differ.xml", {":2:1: tube: the attribute 'variants' must list"}},
    {"wrong_law.xml", {":5:3: model: law: 'parabola' is not the law"}},
    {"wrong_shape.xml", {":2:1: ", "'colour' is not allowed", ":5:3: ", "'ratings'"}},
    {"wrong_unit.xml", {":4:3: plate-dissipation: 11mA is a current", ":5:3: plate-current: 41V is a voltage"}},
    {"zero_byte.xml", {"zero byte"}},
};

static void every_fault_is_told_with_its_place(void **state) {
    (void)state;
    glob_t files;
    assert_int_equal(glob(TESTDATA "/bad_data/*.xml", 0, NULL, &files), 0);
    /* none forgotten */
    assert_int_equal(files.gl_pathc, sizeof BAD_FILES / sizeof BAD_FILES[0]);
    globfree(&files);
    for (size_t i = 0; i < sizeof BAD_FILES / sizeof BAD_FILES[0]; i++) {
        char path[1024];
        snprintf(path, sizeof path, TESTDATA "/bad_data/%s", BAD_FILES[i].file);
        plw_tube *tube = NULL;
        plw_error error = {.status = PLW_OK};
        assert_int_equal(plw_tube_read(path, &tube, &error), PLW_E_DATA);
        assert_int_equal(error.status, PLW_E_DATA);
        assert_null(tube);
        assert_int_equal(strncmp(error.text, path, strlen(path)), 0);
        for (size_t k = 0; k < 4 && BAD_FILES[i].faults[k] != NULL; k++) {
            if (strstr(error.text, BAD_FILES[i].faults[k]) == NULL) {
                fail_msg("%s: '%s' is not in '%s'", BAD_FILES[i].file, BAD_FILES[i].faults[k], error.text);
            }
        }
        assert_int_equal(plw_tube_read(path, &tube, NULL), PLW_E_DATA); /* without a place for the text */
    }
}

/* Faults beyond the room for their text are counted: 40 in all. */
static void faults_that_do_not_fit_are_counted(void **state) {
    (void)state;
    plw_tube *tube = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_tube_read(TESTDATA "/bad_data/many_faults.xml", &tube, &error), PLW_E_DATA);
    unsigned shown = 0;
    for (const char *at = strstr(error.text, "plate-current"); at != NULL; at = strstr(at + 1, "plate-current")) {
        shown++;
    }
    const char *rest = strstr(error.text, "... and ");
    assert_non_null(rest);
    assert_int_equal(shown + strtoul(rest + 8, NULL, 10), 40);
    assert_true(shown >= 5);
}

static void expect_file_error(const char *path, const char *fragment) {
    plw_tube *tube = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_tube_read(path, &tube, &error), PLW_E_FILE);
    assert_null(tube);
    assert_non_null(strstr(error.text, path));
    assert_non_null(strstr(error.text, fragment));
}

static void what_is_no_readable_file_is_said(void **state) {
    (void)state;
    test_folder folder;
    folder_make(&folder);
    char path[FOLDER_PATH_SIZE];
    expect_file_error(folder.path, "is a folder");
    expect_file_error(folder_path(&folder, "none.xml", path), "cannot be opened");
    folder_write(&folder, "locked.xml", "<tube/>");
    folder_path(&folder, "locked.xml", path);
    assert_int_equal(chmod(path, 0), 0);
    if (geteuid() != 0) { /* root reads everything */
        expect_file_error(path, "cannot be opened");
    }
    expect_file_error("/proc/self/mem", "cannot be read");
    folder_remove(&folder);
}

static void too_large_a_file_is_refused(void **state) {
    (void)state;
    test_folder folder;
    folder_make(&folder);
    char path[FOLDER_PATH_SIZE];
    folder_write(&folder, "large.xml", "<tube/>");
    folder_path(&folder, "large.xml", path);
    assert_int_equal(truncate(path, 100L * 1024 * 1024), 0); /* a sparse file: no disk is used */
    plw_tube *tube = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_tube_read(path, &tube, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "larger than 4194304 bytes"));
    assert_int_equal(truncate(path, PLW_FILE_SIZE_MOST), 0); /* just small enough: it is read, and its zeros seen */
    assert_int_equal(plw_tube_read(path, &tube, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "zero byte"));
    assert_null(tube);
    folder_remove(&folder);
}

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
        cmocka_unit_test(every_file_of_the_catalogue_is_valid_and_canonical),
        cmocka_unit_test(every_value_has_a_source),
        cmocka_unit_test(printed_rows_stay_within_the_ratings),
        cmocka_unit_test(el84_is_read_as_printed),
        cmocka_unit_test(a_dissipation_that_is_not_published_says_so),
        cmocka_unit_test(a_rectifier_has_its_perveance_from_the_drop),
        cmocka_unit_test(all_variants_have_ratings_of_their_own),
        cmocka_unit_test(every_fault_is_told_with_its_place),
        cmocka_unit_test(faults_that_do_not_fit_are_counted),
        cmocka_unit_test(what_is_no_readable_file_is_said),
        cmocka_unit_test(too_large_a_file_is_refused),
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
