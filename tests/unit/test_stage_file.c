/* Tests of a stage in words: entries, stage files, the circuit made from them; and of files written whole.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "folder.h"
#include "platewright/fit.h"
#include "platewright/text_file.h"
#include "unit/descriptions.h"

/* The tubes that the tests of the command line have, with their laws fitted. */
static void fit_test_tube(const test_folder *folder, const char *name) {
    char from[FOLDER_PATH_SIZE];
    char to[FOLDER_PATH_SIZE];
    snprintf(from, sizeof from, "%s/cli/tubes/%s", TESTDATA, name);
    plw_tube *tube = NULL;
    plw_fit *fit = calloc(1, sizeof *fit);
    assert_non_null(fit);
    assert_int_equal(plw_tube_read(from, &tube, NULL), PLW_OK);
    assert_int_equal(plw_fit_tube(tube, false, fit, NULL), PLW_OK);
    tube->has_model = true;
    tube->model = fit->model;
    assert_int_equal(plw_tube_write(folder_path(folder, name, to), tube, NULL), PLW_OK);
    plw_tube_free(tube);
    free(fit);
}

static plw_catalogue *open_test_tubes(test_folder *folder) {
    folder_make(folder);
    fit_test_tube(folder, "MQ3.xml");
    fit_test_tube(folder, "MQ6.xml");
    const char *const folders[] = {folder->path};
    plw_catalogue *catalogue = NULL;
    assert_int_equal(plw_catalogue_open(folders, 1, &catalogue, NULL), PLW_OK);
    return catalogue;
}

#define QUAY                                                                                                           \
    "<stage>\n  <note text='quay &lt;3&gt;'/>\n  <load value='4k7'/>\n  <tube value='MQ6GT'/>\n"                       \
    "  <supply value='271.5V'/>\n  <speaker value='7.5'/>\n</stage>\n"

static void test_every_entry_becomes_a_field(void **state) {
    (void)state;
    plw_stage_description *description = described(QUAY);
    say(description, "parallel", "3");
    say(description, "source-ohms", "1.8k");
    say(description, "other-current", "3.2mA");
    say(description, "primary-ohms", "281");
    say(description, "secondary-ohms", "0R55");
    say(description, "cathode-resistor", "272");
    say(description, "resistor-each", "yes");
    say(description, "unbypassed", "yes");
    say(description, "screen-supply", "243V");
    say(description, "screen-resistor", "1k2");
    say(description, "screen-bypassed", "yes");
    say(description, "drive", "11.3V");
    test_folder folder;
    plw_catalogue *catalogue = open_test_tubes(&folder);
    plw_stage stage;
    plw_error error = {.status = PLW_OK};
    if (plw_stage_build(description, catalogue, &stage, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    assert_string_equal(stage.tube->type, "MQ6GT");
    assert_int_equal(stage.variant, -1);
    assert_int_equal(stage.connection, PLW_CONNECTION_PENTODE);
    assert_int_equal(stage.parallel, 3);
    assert_int_equal(stage.supply.kind, PLW_SUPPLY_SOURCE);
    assert_true(stage.supply.volts == 271.5 && stage.supply.source_ohms == 1800);
    assert_true(stage.other_amps == 3.2e-3 && stage.load_ohms == 4700 && stage.speaker_ohms == 7.5);
    assert_near(stage.ratio, sqrt(4700 / 7.5), 1e-12, "load over speaker");
    assert_true(stage.primary_ohms == 281 && stage.secondary_ohms == 0.55);
    assert_true(stage.cathode_resistor_ohms == 272 && stage.resistor_each && stage.unbypassed);
    assert_true(stage.screen_supply_volts == 243 && stage.screen_resistor_ohms == 1200 && stage.screen_bypassed);
    assert_true(stage.drive_peak_volts == 11.3 && isnan(stage.fixed_bias_volts) && stage.tap == 0);
    plw_catalogue_free(catalogue);
    folder_remove(&folder);
    plw_stage_description_free(description);
}

static void test_readings_become_a_supply(void **state) {
    (void)state;
    plw_stage_description *description = described(QUAY);
    say(description, "reading", "305V");
    say(description, "reading", "258V@10k");
    say(description, "reading", "271V@18mA");
    plw_stage stage;
    assert_int_equal(plw_stage_build(description, NULL, &stage, NULL), PLW_OK);
    assert_int_equal(stage.supply.kind, PLW_SUPPLY_READINGS);
    double volts = 0;
    double ohms = 0;
    plw_supply_at(&stage.supply, 0.018, &volts, &ohms);
    assert_near(volts, 271, 1e-9, "the reading itself");
    plw_supply_at(&stage.supply, 0.0258, &volts, &ohms);
    assert_near(volts, 258, 1e-9, "the reading itself, 258 V into 10 kohm");
    plw_stage_description_free(description);
}

/* What an option says takes the place of what the file says, and of what excludes it. */
static void test_options_override_the_file(void **state) {
    (void)state;
    static const char *const pairs[][4] = {
        {"supply", "280V", "reading", "<reading value='300V'/>"},
        {"reading", "280V@40mA", "supply", "<supply value='300V'/>"},
        {"load", "5k", "ratio", "<ratio value='25'/>"},
        {"ratio", "25", "load", "<load value='5k'/>"},
        {"fixed-bias", "-12V", "cathode-resistor", "<cathode-resistor value='270'/>"},
        {"fixed-bias", "-12V", "unbypassed", "<unbypassed value='yes'/>"},
        {"cathode-resistor", "270", "fixed-bias", "<fixed-bias value='-12V'/>"},
        {"connection", "triode", "tap", "<tap value='43%'/>"},
        {"connection", "triode", "screen-supply", "<screen-supply value='200V'/>"},
        {"load", "7k", "load", "<load value='5k'/>"}};
    for (size_t i = 0; i < sizeof pairs / sizeof pairs[0]; i++) {
        char text[256];
        snprintf(text, sizeof text, "<stage>%s</stage>", pairs[i][3]);
        plw_stage_description *description = described(text);
        assert_true(plw_stage_described_in_file(description, pairs[i][2]));
        say(description, pairs[i][0], pairs[i][1]);
        assert_false(plw_stage_described_in_file(description, pairs[i][2]));
        assert_string_equal(plw_stage_described(description, pairs[i][0], NULL, 0), pairs[i][1]);
        plw_stage_description_free(description);
    }
}

static void test_written_and_read_again(void **state) {
    (void)state;
    plw_stage_description *description = described(QUAY);
    say(description, "reading", "258V@10k");
    say(description, "reading", "305 V");
    char *text = NULL;
    assert_int_equal(plw_stage_file_text(description, &text, NULL), PLW_OK);
    plw_stage_description *copy = read_again(text);
    assert_string_equal(plw_stage_note(copy), "quay <3>");
    assert_string_equal(plw_stage_described(copy, "reading", NULL, 0), "258V@10k");
    assert_null(plw_stage_described(copy, "supply", NULL, 0));
    plw_text_free(text);
    plw_stage_description_free(copy);
    plw_stage_description_free(description);
}

static void test_places(void **state) {
    (void)state;
    plw_stage_description *description = described(QUAY);
    char place[64];
    assert_string_equal(plw_stage_described(description, "load", place, sizeof place), "4k7");
    assert_string_equal(place, "stage.xml:3:3: load");
    say(description, "drive", "8V");
    assert_non_null(plw_stage_described(description, "drive", place, sizeof place));
    assert_string_equal(place, "--drive");
    plw_stage_undescribe(description, "load");
    assert_null(plw_stage_described(description, "load", NULL, 0));
    plw_stage_description_free(description);
}

static void test_refused_entries(void **state) {
    (void)state;
    static const char *const refused[][3] = {
        {"lode", "5k", "--lode: a stage has no such entry"},
        {"load", "", "--load: the value is empty"},
        {"load", "5k\n", "--load: the value holds a character"},
        {"tube", "EL84\xff", "--tube: the value holds a character"},
        {"tube", "EL84\xc2", "--tube: the value holds a character"},
        {"load", "1234567890123456789012345678901234567890123456789012345678901", "--load: the value is longer"}};
    plw_stage_description *description = NULL;
    assert_int_equal(plw_stage_description_new(&description, NULL), PLW_OK);
    for (size_t i = 0; i < sizeof refused / sizeof refused[0]; i++) {
        plw_error error = {.status = PLW_OK};
        assert_int_equal(plw_stage_describe(description, refused[i][0], refused[i][1], &error), PLW_E_USAGE);
        assert_memory_equal(error.text, refused[i][2], strlen(refused[i][2]));
    }
    say(description, "load", "5k\xce\xa9");
    assert_int_equal(plw_stage_describe(description, "load", "5k", NULL), PLW_E_USAGE);
    plw_stage_description_free(description);
}

/* A file at fault is a matter of data, an option at fault one of usage; each names its place. */
static void test_faults_of_the_circuit(void **state) {
    (void)state;
    test_folder folder;
    plw_catalogue *catalogue = open_test_tubes(&folder);
    plw_stage_description *description = described("<stage>\n<tube value='MQ9'/>\n<load value='5kV'/></stage>");
    plw_error error = {.status = PLW_OK};
    plw_stage stage;
    assert_int_equal(plw_stage_build(description, catalogue, &stage, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "stage.xml:2:1: tube: tube 'MQ9' is not in the catalogue"));
    assert_non_null(strstr(error.text, "\nstage.xml:3:1: load: "));
    assert_non_null(strstr(error.text, "\nstage.xml: --supply: is missing"));
    plw_stage_description_free(description);

    assert_int_equal(plw_stage_description_new(&description, NULL), PLW_OK);
    say(description, "tube", "MQ3");
    say(description, "supply", "601V");
    say(description, "load", "2k5");
    assert_int_equal(plw_stage_build(description, catalogue, &stage, &error), PLW_E_USAGE);
    assert_non_null(
        strstr(error.text, "--supply: 601 V is more than twice what the plate of MQ3 is rated for (300 V)"));
    plw_stage_undescribe(description, "supply");
    say(description, "supply", "599V");
    assert_int_equal(plw_stage_build(description, catalogue, &stage, NULL), PLW_OK);
    assert_int_equal(stage.connection, PLW_CONNECTION_TRIODE);
    plw_stage_description_free(description);
    plw_catalogue_free(catalogue);
    folder_remove(&folder);
}

static void test_files_are_whole_or_not_there(void **state) {
    (void)state;
    test_folder folder;
    char path[FOLDER_PATH_SIZE];
    char link[FOLDER_PATH_SIZE];
    folder_make(&folder);
    assert_int_equal(plw_text_write(folder_path(&folder, "answer.txt", path), "first\n", NULL), PLW_OK);
    assert_int_equal(symlink("answer.txt", folder_path(&folder, "link.txt", link)), 0);
    assert_int_equal(plw_text_write(link, "second\n", NULL), PLW_OK);
    struct stat status;
    assert_int_equal(lstat(link, &status), 0);
    assert_true(S_ISLNK(status.st_mode));
    char *text = file_text(path, NULL);
    assert_string_equal(text, "second\n");
    free(text);
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_text_write(folder_path(&folder, "none/answer.txt", path), "third\n", &error), PLW_E_FILE);
    assert_non_null(strstr(error.text, "make the folder first"));
    assert_int_equal(plw_text_write(folder_path(&folder, "answer.txt/answer.txt", path), "x", NULL), PLW_E_FILE);
    assert_int_equal(plw_text_write(folder.path, "fourth\n", &error), PLW_E_FILE);
    assert_non_null(strstr(error.text, "is a folder"));
    assert_int_equal(plw_text_write("/dev/null", "fifth\n", NULL), PLW_OK);
    assert_int_equal(stat("/dev/null", &status), 0);
    assert_false(S_ISREG(status.st_mode));
    assert_int_equal(folder_count(&folder), 2);
    folder_remove(&folder);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_every_entry_becomes_a_field),
        cmocka_unit_test(test_readings_become_a_supply),
        cmocka_unit_test(test_options_override_the_file),
        cmocka_unit_test(test_written_and_read_again),
        cmocka_unit_test(test_places),
        cmocka_unit_test(test_refused_entries),
        cmocka_unit_test(test_faults_of_the_circuit),
        cmocka_unit_test(test_files_are_whole_or_not_there),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
