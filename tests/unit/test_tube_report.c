/* The catalogue in words and as JSON: the list with its variants, one tube, types like one and what would change.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <jansson.h>

#include "narrow.h"
#include "near.h"
#include "platewright/catalogue.h"
#include "platewright/report.h"
#include "platewright/tube_report.h"
#include "unit/stages.h"

static plw_tube_entry entry_of(plw_catalogue *catalogue, const char *type) {
    plw_tube_entry entry;
    plw_error error = {0};
    if (plw_catalogue_find(catalogue, type, &entry.tube, &entry.variant, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return entry;
}

static plw_catalogue *open_catalogue(void) {
    const char *const folders[] = {TUBEDATA};
    plw_catalogue *catalogue = NULL;
    assert_int_equal(plw_catalogue_open(folders, 1, &catalogue, NULL), PLW_OK);
    return catalogue;
}

static json_t *parsed(char *text) {
    json_error_t where;
    json_t *root = json_loads(text, 0, &where);
    if (root == NULL) {
        fail_msg("line %d: %s", where.line, where.text);
    }
    plw_text_free(text);
    assert_string_equal(json_string_value(json_object_get(root, "schema")), "platewright/1");
    return root;
}

static double number_of(const json_t *object, const char *name) {
    const json_t *value = json_object_get(object, name);
    if (!json_is_number(value)) {
        fail_msg("%s is no number", name);
    }
    return json_number_value(value);
}

static void the_list_has_a_line_for_each_variant(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_catalogue();
    const plw_tube_entry entries[] = {entry_of(catalogue, "6V6GT"), entry_of(catalogue, "6V6GTA"),
                                      entry_of(catalogue, "GZ34")};
    char *text = NULL;
    plw_error error = {0};
    assert_int_equal(plw_tubes_text(entries, 3, &text, &error), PLW_OK);
    assert_non_null(strstr(text, "\n6V6GT    beam      octal                  12      2  6.3  0.45"));
    assert_non_null(strstr(text, "\n6V6GTA   beam      octal                  14 "));
    assert_non_null(strstr(text, "\n         as 6V6GT\n"));
    assert_non_null(strstr(text, "\nGZ34     rectifier octal                   -      -    5   1.9"));
    plw_text_free(text);
    assert_int_equal(plw_tubes_names(entries, 3, &text, &error), PLW_OK);
    assert_string_equal(text, "6V6GT\n6V6\n6V6G\n6V6GTA\nGZ34\n5AR4\n");
    plw_text_free(text);
    assert_int_equal(plw_tubes_json(entries, 3, &text, &error), PLW_OK);
    json_t *root = parsed(text);
    const json_t *tubes = json_object_get(root, "tubes");
    assert_int_equal(json_array_size(tubes), 3);
    assert_near(number_of(json_array_get(tubes, 1), "plate_watts"), 14.0, 0.0, "tube file");
    assert_string_equal(json_string_value(json_object_get(json_array_get(tubes, 1), "variant_of")), "6V6GT");
    assert_true(json_is_null(json_object_get(json_array_get(tubes, 0), "variant_of")));
    assert_true(json_is_null(json_object_get(json_array_get(tubes, 2), "plate_watts")));
    json_decref(root);
    plw_catalogue_free(catalogue);
}

static void one_tube_is_told_whole(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_catalogue();
    const plw_tube *tube = entry_of(catalogue, "6V6GT").tube;
    char *text = NULL;
    plw_error error = {0};
    assert_int_equal(plw_tube_json(tube, &text, &error), PLW_OK);
    json_t *root = parsed(text);
    const json_t *told = json_object_get(root, "tube");
    assert_int_equal(json_array_size(json_object_get(told, "rows")), tube->rows_count);
    assert_int_equal(json_array_size(json_object_get(told, "points")), tube->points_count);
    assert_int_equal(json_array_size(json_object_get(told, "ratings")), tube->ratings_count);
    assert_int_equal(json_array_size(json_object_get(told, "pins")), tube->pins_count);
    assert_int_equal(json_array_size(json_object_get(told, "variants")), tube->variants_count);
    for (size_t i = 0; i < tube->rows_count; i++) {
        const json_t *row = json_array_get(json_object_get(told, "rows"), i);
        assert_near_relative(number_of(row, "plate_volts"), tube->rows[i].plate_volts, 1e-8, "tube file");
        assert_string_equal(json_string_value(json_object_get(json_object_get(row, "source"), "title")),
                            tube->rows[i].provenance.source);
    }
    const json_t *model = json_object_get(told, "model");
    assert_near_relative(number_of(json_object_get(model, "left_out_error"), "plate_current_percent"),
                         tube->model.left_out_error.plate_current_percent, 1e-8, "tube file");
    assert_near_relative(number_of(json_object_get(model, "region"), "plate_volts_most"),
                         tube->model.region.plate_volts_most, 1e-8, "tube file");
    json_decref(root);
    assert_int_equal(plw_tube_text(tube, &text, &error), PLW_OK);
    assert_non_null(strstr(text, "Ratings of the variant 6V6GTA"));
    assert_non_null(strstr(text, "left out"));
    assert_narrow(text);
    plw_text_free(text);
    assert_int_equal(plw_tube_text(entry_of(catalogue, "300B").tube, &text, &error), PLW_OK); /* its loads are wide */
    assert_narrow(text);
    plw_text_free(text);
    plw_catalogue_free(catalogue);
}

static void differences_are_in_plain_words(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_catalogue();
    const plw_tube_entry wanted = entry_of(catalogue, "EL84");
    plw_near_tube near[2] = {{.entry = entry_of(catalogue, "6V6GT")}, {.entry = entry_of(catalogue, "EL86")}};
    for (size_t i = 0; i < 2; i++) {
        assert_true(plw_nearness_of(wanted, near[i].entry, &near[i].nearness));
    }
    char words[1024];
    char wanted_words[64];
    plw_nearness_words(wanted, &near[0], words, sizeof words);
    snprintf(wanted_words, sizeof wanted_words, "needs %.2g times the drive", near[0].nearness.ratio[PLW_NEAR_DRIVE]);
    assert_true(near[0].nearness.ratio[PLW_NEAR_DRIVE] > 2.0); /* printed: gm 4.1 mA/V after 11.3 */
    assert_non_null(strstr(words, wanted_words));
    assert_non_null(strstr(words, "heater takes 450 mA instead of 760 mA"));
    assert_non_null(strstr(words, "another base (octal)"));
    assert_non_null(strstr(words, "its screen stands only 285 V"));
    char little[12];
    plw_nearness_words(wanted, &near[0], little, sizeof little);
    assert_int_equal(strlen(little), sizeof little - 1); /* cut, not overrun */
    char *text = NULL;
    plw_error error = {0};
    assert_int_equal(plw_tubes_like_text(wanted, near, 2, &text, &error), PLW_OK);
    assert_non_null(strstr(text, "250 V on the plate, 250 V on the screen"));
    assert_narrow(text);
    plw_text_free(text);
    assert_int_equal(plw_tubes_like_json(wanted, near, 2, &text, &error), PLW_OK);
    json_t *root = parsed(text);
    const json_t *first = json_array_get(json_object_get(root, "tubes"), 0);
    assert_near_relative(number_of(first, "distance"), near[0].nearness.distance, 1e-8, "as measured");
    assert_near_relative(number_of(json_object_get(first, "ratios"), "drive_volts"),
                         near[0].nearness.ratio[PLW_NEAR_DRIVE], 1e-8, "as measured");
    assert_string_equal(json_string_value(json_object_get(first, "differences")), words);
    json_decref(root);
    plw_catalogue_free(catalogue);
}

static void none_near_is_said(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_catalogue();
    const plw_tube_entry wanted = entry_of(catalogue, "300B");
    char *text = NULL;
    plw_error error = {0};
    assert_int_equal(plw_tubes_like_text(wanted, NULL, 0, &text, &error), PLW_OK);
    assert_non_null(strstr(text, "No type of the catalogue is near 300B."));
    plw_text_free(text);
    assert_int_equal(plw_tubes_like_json(wanted, NULL, 0, &text, &error), PLW_OK);
    json_t *root = parsed(text);
    assert_int_equal(json_array_size(json_object_get(root, "tubes")), 0);
    json_decref(root);
    plw_catalogue_free(catalogue);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_list_has_a_line_for_each_variant),
        cmocka_unit_test(one_tube_is_told_whole),
        cmocka_unit_test(differences_are_in_plain_words),
        cmocka_unit_test(none_near_is_said),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
