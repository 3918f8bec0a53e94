/* Tube files: those of the catalogue, and every fault that is told.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <glob.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "folder.h"
#include "unit/good_tube.h"

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
    {"missing_source.xml", {":5:3: ", "'source' is missing"}},
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
    {"wrong_shape.xml", {":2:1: ", "'colour' is not known", ":5:3: ", "ratings: does not belong here"}},
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
    if (access("/proc/self/mem", F_OK) == 0) { /* not every system has it */
        expect_file_error("/proc/self/mem", "cannot be read");
    }
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
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
