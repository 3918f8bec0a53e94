/* The catalogue: a tube found by any of its names, what hides what, and what is told when none is found.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <pthread.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "folder.h"
#include "near.h"
#include "platewright/catalogue.h"

static plw_catalogue *open_folders(const char *first, const char *second) {
    const char *const folders[] = {first, NULL, second};
    plw_catalogue *catalogue = NULL;
    plw_error error = {.status = PLW_OK};
    if (plw_catalogue_open(folders, 3, &catalogue, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return catalogue;
}

static void expect_found(plw_catalogue *catalogue, const char *designation, const char *type, const char *variant) {
    const plw_tube *tube = NULL;
    int index = 77;
    plw_error error = {.status = PLW_OK};
    if (plw_catalogue_find(catalogue, designation, &tube, &index, &error) != PLW_OK) {
        fail_msg("%s: %s", designation, error.text);
    }
    assert_string_equal(tube->type, type);
    if (variant == NULL) {
        assert_int_equal(index, -1);
    } else {
        assert_in_range(index, 0, tube->variants_count - 1);
        assert_string_equal(tube->variants[index].type, variant);
    }
}

static void expect_not_found(plw_catalogue *catalogue, const char *designation, const char *fragment) {
    const plw_tube *tube = NULL;
    int index = 77;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_catalogue_find(catalogue, designation, &tube, &index, &error), PLW_E_NOT_FOUND);
    assert_int_equal(error.status, PLW_E_NOT_FOUND);
    assert_null(tube);
    assert_int_equal(index, 77);
    if (strstr(error.text, fragment) == NULL) {
        fail_msg("'%s' is not in '%s'", fragment, error.text);
    }
}

static void a_tube_is_found_by_any_of_its_names(void **state) {
    (void)state;
    static const char *const cases[][3] = {
        {"6V6GT", "6V6GT", NULL},
        {"6v6-gt", "6V6GT", NULL},
        {" 6v6 / gt ", "6V6GT", NULL},
        {"6V6", "6V6GT", NULL},
        {"6V6GTA", "6V6GT", "6V6GTA"},
        {"6v6 gta", "6V6GT", "6V6GTA"},
        {"6BQ5", "EL84", NULL},
        {"EL 84", "EL84", NULL},
        {"6CA7", "EL34", NULL},
        {"6l6", "6L6", NULL},
        {"6L6GC", "6L6GC", NULL},
        {"6L6GB", "6L6", NULL},
        {"300-B", "300B", NULL},
        {"VT4C", "211", NULL},
        {"ECC83", "12AX7", "ECC83"},
        {"ecc82", "12AU7", NULL},
        {"6AQ5", "6AQ5A", "6AQ5"},
        {"6550a", "6550", "6550A"},
        {"5AR4", "GZ34", NULL},
        {"ez90", "6X4", NULL},
        {"10", "10", NULL},
        {"50", "50", NULL},
        {"6EM7", "6EM7", NULL},
        {"6EM7-1", "6EM7-1", NULL},
        /* without a suffix that leaves one answer */
        {"6SN7", "6SN7GTB", NULL},
        {"6SL7", "6SL7GT", NULL},
        {"6K6", "6K6GT", NULL},
        {"5Y3", "5Y3GT", NULL},
        {"12B4", "12B4A", NULL},
        {"50L6", "50L6GT", NULL},
    };
    plw_catalogue *catalogue = open_folders(TUBEDATA, NULL);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        expect_found(catalogue, cases[i][0], cases[i][1], cases[i][2]);
    }
    plw_catalogue_free(catalogue);
    /* each on a catalogue that has read nothing yet: the order of asking must not count */
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        catalogue = open_folders(NULL, TUBEDATA);
        expect_found(catalogue, cases[i][0], cases[i][1], cases[i][2]);
        plw_catalogue_free(catalogue);
    }
}

static void a_wrong_name_gets_the_nearest(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_folders(TUBEDATA, NULL);
    expect_not_found(catalogue, "EL43", "EL34");
    expect_not_found(catalogue, "6V6GX", "6V6GT");
    expect_not_found(catalogue, "6BQ6", "6BQ5");
    expect_not_found(catalogue, "5U4", "5U4G and 5U4GB");
    expect_not_found(catalogue, "loudspeaker", "tube 'loudspeaker' is not in the catalogue");
    expect_not_found(catalogue, "", "tube ''");
    expect_not_found(catalogue, "-/.", "tube '-/.'");
    expect_not_found(catalogue, "6V\x1b[31m", "tube '6V?[31m'"); /* nothing that upsets a terminal */
    char long_name[5000];
    memset(long_name, '6', sizeof long_name - 1);
    long_name[sizeof long_name - 1] = '\0';
    expect_not_found(catalogue, long_name, "is not in the catalogue");
    const plw_tube *tube = NULL;
    int variant = 0;
    assert_int_equal(plw_catalogue_find(catalogue, "EL43", &tube, &variant, NULL), PLW_E_NOT_FOUND);
    plw_catalogue_free(catalogue);
}

static void an_empty_catalogue_says_so(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_folders(NULL, NULL);
    expect_not_found(catalogue, "EL84", "the catalogue is empty");
    const plw_tube *const *tubes = NULL;
    size_t count = 77;
    assert_int_equal(plw_catalogue_all(catalogue, &tubes, &count, NULL), PLW_OK);
    assert_int_equal(count, 0);
    plw_catalogue_free(catalogue);
    plw_catalogue_free(NULL);
}

static void a_folder_that_cannot_be_read_is_named(void **state) {
    (void)state;
    const char *const folders[] = {TUBEDATA, "/nowhere/at/all"};
    plw_catalogue *catalogue = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_catalogue_open(folders, 2, &catalogue, &error), PLW_E_FILE);
    assert_null(catalogue);
    assert_non_null(strstr(error.text, "/nowhere/at/all"));
}

/* Copy a tube of the catalogue into a folder, with another plate dissipation, as a sign which of them is found. */
static void copy_tube(const test_folder *folder, const char *from, const char *name, double plate_watts) {
    plw_tube *tube = NULL;
    assert_int_equal(plw_tube_read(from, &tube, NULL), PLW_OK);
    tube->ratings[0].plate_watts = plate_watts;
    char path[FOLDER_PATH_SIZE];
    assert_int_equal(plw_tube_write(folder_path(folder, name, path), tube, NULL), PLW_OK);
    plw_tube_free(tube);
}

static double plate_watts_of(plw_catalogue *catalogue, const char *designation) {
    const plw_tube *tube = NULL;
    int variant = 0;
    assert_int_equal(plw_catalogue_find(catalogue, designation, &tube, &variant, NULL), PLW_OK);
    return plw_tube_ratings(tube, variant, PLW_CONNECTION_PENTODE)->plate_watts;
}

static void an_earlier_folder_hides_a_later_one(void **state) {
    (void)state;
    test_folder own;
    folder_make(&own);
    copy_tube(&own, TUBEDATA "/EL84.xml", "my output tube.xml", 11.25); /* the type counts, not the file name */
    copy_tube(&own, TUBEDATA "/6L6GC.xml", "6L6GC.xml", 27.5);
    folder_write(&own, "notes.txt", "no tube file");
    folder_write(&own, ".hidden.xml", "no tube file");
    plw_catalogue *catalogue = open_folders(own.path, TUBEDATA);
    assert_near(plate_watts_of(catalogue, "EL84"), 11.25, 0, "the user's own");
    assert_near(plate_watts_of(catalogue, "6BQ5"), 11.25, 0, "the user's own");
    assert_near(plate_watts_of(catalogue, "6L6GC"), 27.5, 0, "the user's own");
    assert_near(plate_watts_of(catalogue, "EL34"), 25, 0, "Philips/Mullard data sheet EL34");
    const plw_tube *const *tubes = NULL;
    size_t count = 0;
    assert_int_equal(plw_catalogue_all(catalogue, &tubes, &count, NULL), PLW_OK);
    size_t found = 0;
    for (size_t i = 0; i < count; i++) {
        if (strcmp(tubes[i]->type, "EL84") == 0) {
            found++;
            assert_near(tubes[i]->ratings[0].plate_watts, 11.25, 0, "the user's own");
        }
    }
    assert_int_equal(found, 1);
    plw_catalogue_free(catalogue);
    catalogue = open_folders(TUBEDATA, own.path);
    assert_near(plate_watts_of(catalogue, "EL84"), 12, 0, "the other way round");
    plw_catalogue_free(catalogue);
    folder_remove(&own);
}

static void a_bad_file_hinders_only_who_asks_for_it(void **state) {
    (void)state;
    test_folder own;
    folder_make(&own);
    folder_write(&own, "45.xml", "<tube type=\"45\" kind=\"triode\">\n</tube>\n");
    folder_write(&own, "76.xml", "a note\n");
    folder_write(&own, "6V6GT.xml", "<stage>\n  <tube value=\"6V6GT\"/>\n</stage>\n");
    plw_catalogue *catalogue = open_folders(own.path, TUBEDATA);
    expect_found(catalogue, "6V6GT", "6V6GT", NULL);
    expect_found(catalogue, "6BQ5", "EL84", NULL);
    const plw_tube *tube = NULL;
    int variant = 77;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_catalogue_find(catalogue, "45", &tube, &variant, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "45.xml:1:1: "));
    assert_int_equal(plw_catalogue_find(catalogue, "76", &tube, &variant, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "76.xml:1:1: "));
    assert_null(tube);
    assert_int_equal(variant, 77);
    const plw_tube *const *tubes = NULL;
    size_t count = 77;
    /* A stage that lies there too is passed over; what is faulty is told, every time, and the others are there. */
    for (int time = 0; time < 2; time++) {
        error = (plw_error){.status = PLW_OK};
        assert_int_equal(plw_catalogue_all(catalogue, &tubes, &count, &error), PLW_E_DATA);
        assert_non_null(strstr(error.text, "45.xml:1:1: "));
        assert_non_null(strstr(error.text, "76.xml:1:1: "));
        assert_null(strstr(error.text, "6V6GT.xml"));
        assert_true(count >= 45);
    }
    expect_found(catalogue, "6V6GT", "6V6GT", NULL);
    plw_catalogue_free(catalogue);
    folder_remove(&own);
}

static void all_tubes_come_in_order_and_stay(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_folders(TUBEDATA, NULL);
    const plw_tube *before = NULL;
    int variant = 0;
    assert_int_equal(plw_catalogue_find(catalogue, "EL84", &before, &variant, NULL), PLW_OK);
    const plw_tube *const *tubes = NULL;
    size_t count = 0;
    assert_int_equal(plw_catalogue_all(catalogue, &tubes, &count, NULL), PLW_OK);
    assert_true(count >= 45);
    size_t place_2a3 = count;
    size_t place_10 = count;
    size_t place_el84 = count;
    for (size_t i = 0; i < count; i++) {
        place_2a3 = strcmp(tubes[i]->type, "2A3") == 0 ? i : place_2a3;
        place_10 = strcmp(tubes[i]->type, "10") == 0 ? i : place_10;
        place_el84 = strcmp(tubes[i]->type, "EL84") == 0 ? i : place_el84;
    }
    assert_true(place_2a3 < place_10 && place_10 < place_el84 && place_el84 < count);
    assert_ptr_equal(tubes[place_el84], before); /* read once */
    const plw_tube *const *again = NULL;
    assert_int_equal(plw_catalogue_all(catalogue, &again, &count, NULL), PLW_OK);
    assert_ptr_equal(again, tubes);
    plw_catalogue_free(catalogue);
}

/* Every name of every file leads back to it. */
static void every_name_is_found(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_folders(TUBEDATA, NULL);
    const plw_tube *const *tubes = NULL;
    size_t count = 0;
    assert_int_equal(plw_catalogue_all(catalogue, &tubes, &count, NULL), PLW_OK);
    for (size_t i = 0; i < count; i++) {
        expect_found(catalogue, tubes[i]->type, tubes[i]->type, NULL);
        for (size_t k = 0; k < tubes[i]->equivalents_count; k++) {
            expect_found(catalogue, tubes[i]->equivalents[k], tubes[i]->type, NULL);
        }
        for (size_t k = 0; k < tubes[i]->variants_count; k++) {
            expect_found(catalogue, tubes[i]->variants[k].type, tubes[i]->type, tubes[i]->variants[k].type);
        }
    }
    plw_catalogue_free(catalogue);
}

static void *read_all(void *result) {
    const char *const folders[] = {TUBEDATA};
    plw_catalogue *catalogue = NULL;
    const plw_tube *const *tubes = NULL;
    size_t *count = result;
    if (plw_catalogue_open(folders, 1, &catalogue, NULL) == PLW_OK &&
        plw_catalogue_all(catalogue, &tubes, count, NULL) != PLW_OK) {
        *count = 0;
    }
    plw_catalogue_free(catalogue);
    return NULL;
}

static void several_threads_may_each_read_a_catalogue(void **state) {
    (void)state;
    pthread_t threads[4];
    size_t counts[4] = {0};
    for (size_t i = 0; i < 4; i++) {
        assert_int_equal(pthread_create(&threads[i], NULL, read_all, &counts[i]), 0);
    }
    for (size_t i = 0; i < 4; i++) {
        assert_int_equal(pthread_join(threads[i], NULL), 0);
        assert_true(counts[i] >= 45);
        assert_int_equal(counts[i], counts[0]);
    }
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(several_threads_may_each_read_a_catalogue), /* first: nothing is started yet */
        cmocka_unit_test(a_tube_is_found_by_any_of_its_names),
        cmocka_unit_test(a_wrong_name_gets_the_nearest),
        cmocka_unit_test(an_empty_catalogue_says_so),
        cmocka_unit_test(a_folder_that_cannot_be_read_is_named),
        cmocka_unit_test(an_earlier_folder_hides_a_later_one),
        cmocka_unit_test(a_bad_file_hinders_only_who_asks_for_it),
        cmocka_unit_test(all_tubes_come_in_order_and_stay),
        cmocka_unit_test(every_name_is_found),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
