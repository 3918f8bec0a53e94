/* A tube type of one's own in outline: made whole or refused with the entry named; written and read again.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/tube_outline.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "near.h"
#include "platewright/catalogue.h"
#include "platewright/observation_file.h"

static const plw_tube_outline whole = {.type = "6X99",
                                       .kind = PLW_KIND_BEAM,
                                       .base = "octal",
                                       .heater_volts = 6.3,
                                       .heater_amps = 0.45,
                                       .plate_volts = 315.0,
                                       .screen_volts = 285.0,
                                       .plate_watts = 12.0,
                                       .screen_watts = 2.0};

static void test_made_whole(void **state) {
    (void)state;
    plw_tube *tube = NULL;
    assert_int_equal(plw_tube_outline_complete(&whole, NULL), PLW_OK);
    assert_int_equal(plw_tube_outline_make(&whole, &tube, NULL), PLW_OK);
    assert_string_equal(tube->type, "6X99");
    assert_string_equal(tube->base, "octal");
    assert_int_equal(tube->kind, PLW_KIND_BEAM);
    assert_true(tube->heater_volts == 6.3 && tube->heater_amps == 0.45 && !tube->directly_heated);
    assert_int_equal(tube->ratings_count, 1);
    const plw_ratings *ratings = plw_tube_ratings(tube, -1, PLW_CONNECTION_PENTODE);
    assert_int_equal(ratings->system, PLW_SYSTEM_STATED);
    assert_true(ratings->plate_volts == 315.0 && ratings->screen_volts == 285.0);
    assert_true(ratings->plate_watts == 12.0 && ratings->screen_watts == 2.0);
    assert_true(isnan(ratings->cathode_amps));
    /* Nothing says where they are from. */
    assert_int_equal(ratings->provenance.how, PLW_HOW_TOLD);
    assert_int_equal(tube->heater_provenance.how, PLW_HOW_TOLD);
    assert_string_equal(ratings->provenance.source, "as given on the command line");
    assert_false(tube->has_model);
    plw_tube_free(tube);
}

static void test_with_a_source(void **state) {
    (void)state;
    plw_tube_outline outline = whole;
    plw_tube *tube = NULL;
    outline.source = "A sheet, a maker, 1938";
    assert_int_equal(plw_tube_outline_make(&outline, &tube, NULL), PLW_OK);
    const plw_provenance *of[] = {&tube->heater_provenance, &tube->ratings[0].provenance};
    for (int i = 0; i < 2; i++) {
        assert_int_equal(of[i]->how, PLW_HOW_READ);
        assert_int_equal(of[i]->confidence, PLW_CONFIDENCE_HIGH);
        assert_string_equal(of[i]->source, outline.source);
    }
    plw_tube_free(tube);
}

static void test_pins(void **state) {
    (void)state;
    plw_tube_outline outline = whole;
    plw_tube *tube = NULL;
    assert_int_equal(plw_tube_outline_make(&outline, &tube, NULL), PLW_OK);
    assert_true(tube->pins_count == 0 && tube->pins_provenance.source == NULL);
    plw_tube_free(tube);
    outline.pins = "8=cathode, 5=grid 1 ,3=plate,4=screen";
    assert_int_equal(plw_tube_outline_make(&outline, &tube, NULL), PLW_OK);
    static const struct {
        int number;
        const char *electrode;
    } wanted[] = {{3, "plate"}, {4, "screen"}, {5, "grid 1"}, {8, "cathode"}};
    assert_int_equal(tube->pins_count, 4);
    for (size_t i = 0; i < 4; i++) {
        assert_int_equal(tube->pins[i].number, wanted[i].number);
        assert_string_equal(tube->pins[i].electrode, wanted[i].electrode);
    }
    assert_int_equal(tube->pins_provenance.how, PLW_HOW_TOLD);
    plw_tube_free(tube);
}

static void test_rating_systems(void **state) {
    (void)state;
    for (int system = PLW_SYSTEM_DESIGN_CENTER; system <= PLW_SYSTEM_STATED; system++) {
        plw_tube_outline outline = whole;
        plw_tube *tube = NULL;
        outline.rating_system = plw_rating_system_name((plw_rating_system)system);
        assert_int_equal(plw_tube_outline_make(&outline, &tube, NULL), PLW_OK);
        assert_int_equal(tube->ratings[0].system, system);
        plw_tube_free(tube);
    }
}

static void test_written_and_read_again(void **state) {
    (void)state;
    static const char text[] = "plate_volts,screen_volts,grid_volts,plate_ma,screen_ma,gm_umho,plate_resistance_ohms,"
                               "uncertainty_percent\n250,250,-12.5,45,4.5,4100,50000,1.5\n";
    plw_tube *tube = NULL;
    plw_tube *again = NULL;
    char path[] = "/tmp/plw-outline-XXXXXX";
    const int file = mkstemp(path);
    assert_true(file >= 0);
    (void)close(file);
    assert_int_equal(plw_tube_outline_make(&whole, &tube, NULL), PLW_OK);
    assert_int_equal(plw_observation_file_read_memory("bench.csv", text, sizeof text - 1, tube, NULL), PLW_OK);
    assert_int_equal(plw_tube_write(path, tube, NULL), PLW_OK);
    assert_int_equal(plw_tube_read(path, &again, NULL), PLW_OK);
    assert_int_equal(again->points_count, 1);
    assert_true(again->points[0].uncertainty_percent == 1.5 && again->points[0].plate_amps == 0.045);
    assert_string_equal(again->points[0].provenance.source, "bench.csv");
    assert_true(again->ratings[0].plate_watts == 12.0);
    assert_int_equal(again->ratings[0].provenance.how, PLW_HOW_TOLD);
    assert_int_equal(again->ratings[0].provenance.confidence, PLW_CONFIDENCE_MEDIUM);
    plw_tube_free(again);
    plw_tube_free(tube);
    assert_int_equal(remove(path), 0);
}

static void expect_refusal(plw_tube_outline outline, const char *wanted) {
    plw_tube *tube = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_tube_outline_make(&outline, &tube, &error), PLW_E_USAGE);
    assert_null(tube);
    if (strstr(error.text, wanted) == NULL) {
        fail_msg("%s; wanted: %s", error.text, wanted);
    }
}

static void test_refusals(void **state) {
    (void)state;
    plw_tube_outline outline = whole;
    outline.type = NULL;
    expect_refusal(outline, "type: give");
    outline.type = "  ";
    expect_refusal(outline, "type: give");
    outline = whole;
    outline.source = " ";
    expect_refusal(outline, "source: is blank");
    outline = whole;
    outline.rating_system = "maximum";
    expect_refusal(outline, "rating-system: 'maximum' is not known; design-center, ");
    static const char *const pins[][2] = {
        {"", "pins: '': give number"},
        {"plate", "pins: 'plate': give number"},
        {"3", "pins: '3': give number"},
        {"0=plate", "pins: '0=plate': give number (1 to 16)"},
        {"17=plate", "pins: '17=plate': give number (1 to 16)"},
        {"3=plate,", "pins: '': give number"},
        {"3=", "pins: '3=': the electrode is not known"},
        {"3=plate,4=g2", "pins: '4=g2': the electrode is not known; plate, grid 1, "},
        {"3=plate,3=screen", "pins: pin 3 is given twice"},
    };
    for (size_t i = 0; i < sizeof pins / sizeof pins[0]; i++) {
        outline = whole;
        outline.pins = pins[i][0];
        expect_refusal(outline, pins[i][1]);
    }
    outline = whole;
    outline.kind = PLW_KIND_RECTIFIER;
    expect_refusal(outline, "kind: a rectifier");
    outline.kind = PLW_KIND_TRIODE;
    expect_refusal(outline, "screen-volts: a triode has no screen");
    outline = whole;
    outline.plate_watts = -12.0;
    expect_refusal(outline, "plate-watts: -12 is out of range; it must lie between 0.05 and 5000");
    outline = whole;
    outline.heater_volts = 630.0;
    expect_refusal(outline, "heater-volts");
    outline = whole;
    outline.heater_amps = (double)INFINITY;
    expect_refusal(outline, "heater-amps");
}

static void test_what_a_file_needs(void **state) {
    (void)state;
    static const char *const wanted[] = {"heater-volts", "heater-amps", "plate-volts",
                                         "screen-volts", "plate-watts", "screen-watts"};
    for (int missing = 0; missing < 6; missing++) {
        plw_tube_outline outline = whole;
        double *const members[] = {&outline.heater_volts, &outline.heater_amps, &outline.plate_volts,
                                   &outline.screen_volts, &outline.plate_watts, &outline.screen_watts};
        *members[missing] = (double)NAN;
        plw_error error = {.status = PLW_OK};
        assert_int_equal(plw_tube_outline_complete(&outline, &error), PLW_E_USAGE);
        assert_int_equal(strncmp(error.text, wanted[missing], strlen(wanted[missing])), 0);
        plw_tube *tube = NULL; /* a fit needs none of them */
        assert_int_equal(plw_tube_outline_make(&outline, &tube, NULL), PLW_OK);
        plw_tube_free(tube);
    }
    plw_tube_outline triode = whole;
    triode.kind = PLW_KIND_TRIODE;
    triode.screen_volts = (double)NAN;
    triode.screen_watts = (double)NAN;
    assert_int_equal(plw_tube_outline_complete(&triode, NULL), PLW_OK);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_made_whole),
        cmocka_unit_test(test_with_a_source),
        cmocka_unit_test(test_pins),
        cmocka_unit_test(test_rating_systems),
        cmocka_unit_test(test_written_and_read_again),
        cmocka_unit_test(test_refusals),
        cmocka_unit_test(test_what_a_file_needs),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
