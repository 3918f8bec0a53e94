/* The plate supply in a stage description: entries, the order of the filter, what takes whose place, faults.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>

#include "unit/descriptions.h"

#define PARTS                                                                                                          \
    "<stage><winding value='231V'/><rectifier value='bridge'/><reservoir value='33uF'/><winding-ohms value='171'/>"    \
    "<mains value='60Hz'/><choke value='7.9H'/><choke-ohms value='183'/><smoothing value='47uF'/>"                     \
    "<dropper value='1k1'/><smoothing value='22uF'/><bleeder value='220k'/></stage>"

static void entries_become_parts(void **state) {
    (void)state;
    plw_stage_description *description = described(PARTS);
    plw_plate_supply supply;
    plw_error error = {.status = PLW_OK};
    if (plw_plate_supply_build(description, NULL, 0.11, &supply, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    const plw_rectifier *parts = &supply.parts;
    assert_true(supply.has_parts && supply.has_winding && !supply.estimated);
    assert_true(!supply.reservoir_assumed && !supply.copper_assumed && supply.rectifier_tube == NULL);
    assert_int_equal(parts->connection, PLW_BRIDGE);
    assert_true(parts->winding_rms_volts == 231 && parts->path_ohms == 171 && parts->mains_hertz == 60);
    assert_near_relative(parts->reservoir_farads, 33e-6, 1e-12, "as told");
    assert_int_equal(parts->sections, 2);
    assert_true(parts->section[0].henries == 7.9 && parts->section[0].ohms == 183);
    assert_true(parts->section[1].henries == 0 && parts->section[1].ohms == 1100);
    assert_near_relative(parts->section[0].farads, 47e-6, 1e-12, "as told");
    assert_near_relative(parts->section[1].farads, 22e-6, 1e-12, "as told");
    assert_true(parts->bleeder_ohms == 220e3);
    assert_int_equal(supply.line.kind, PLW_SUPPLY_RECTIFIER);
    double least;
    double most;
    plw_supply_range(&supply.line, &least, &most);
    assert_true(least <= 0.0 && most >= 0.1099);
    /* A stage made of the same description stands on the same line. */
    plw_stage stage;
    plw_plate_supply whole;
    say(description, "load", "5k1");
    say(description, "tube", "6V6GT");
    assert_int_equal(plw_stage_build_supplied(description, NULL, &stage, &whole, &error), PLW_OK);
    double volts;
    double same;
    double ohms;
    plw_supply_at(&supply.line, 0.037, &volts, &ohms);
    plw_supply_at(&stage.supply, 0.037, &same, &ohms);
    assert_near(same, volts, 0.02, "another reach of the line, the same supply");
    assert_true(whole.has_winding);
    plw_stage_description_free(description);
}

/* The usual: 50 Hz, silicon, a reservoir without end, no copper. */
static void what_is_not_told(void **state) {
    (void)state;
    plw_stage_description *description =
        described("<stage><winding value='231V'/><rectifier value='half-wave'/></stage>");
    plw_plate_supply supply;
    assert_int_equal(plw_plate_supply_build(description, NULL, 0.11, &supply, NULL), PLW_OK);
    assert_true(supply.reservoir_assumed && supply.copper_assumed);
    assert_true(supply.parts.mains_hertz == 50 && supply.parts.diode.kind == PLW_DIODE_SILICON);
    assert_int_equal(supply.parts.connection, PLW_HALF_WAVE);
    plw_stage_description_free(description);
    /* A choke first and no reservoir is choke input. */
    description = described("<stage><winding value='231V'/><rectifier value='full-wave'/><choke value='9H'/>"
                            "<smoothing value='47uF'/></stage>");
    assert_int_equal(plw_plate_supply_build(description, NULL, 0.11, &supply, NULL), PLW_OK);
    assert_true(!supply.reservoir_assumed && supply.parts.reservoir_farads == 0);
    plw_stage_description_free(description);
}

static void rectifier_tubes_are_looked_up(void **state) {
    (void)state;
    const char *const folders[] = {TUBEDATA};
    plw_catalogue *catalogue = NULL;
    plw_plate_supply supply;
    assert_int_equal(plw_catalogue_open(folders, 1, &catalogue, NULL), PLW_OK);
    plw_stage_description *description = described(PARTS);
    plw_error error = {.status = PLW_OK};
    say(description, "diode", "5AR4");
    assert_int_equal(plw_plate_supply_build(description, catalogue, 0.11, &supply, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "its plates share one cathode; a bridge wants separate cathodes or silicon"));
    say(description, "rectifier", "full-wave");
    assert_int_equal(plw_plate_supply_build(description, catalogue, 0.11, &supply, NULL), PLW_OK);
    assert_string_equal(supply.rectifier_tube->type, "GZ34");
    assert_near_relative(supply.parts.diode.perveance, 0.225 / pow(17.0, 1.5), 1e-4, "17 V at 225 mA (RCA)");
    plw_stage_description_free(description);
    plw_catalogue_free(catalogue);
}

/* Written in the order in which the filter is wired, whatever the order of the table. */
static void the_filter_keeps_its_order(void **state) {
    (void)state;
    plw_stage_description *description = described(PARTS);
    char *text = NULL;
    assert_int_equal(plw_stage_file_text(description, &text, NULL), PLW_OK);
    static const char *const order[] = {
        "<choke ", "<choke-ohms ", "<smoothing value=\"47uF\"", "<dropper ", "<smoothing value=\"22uF\"", "<bleeder "};
    const char *at = text;
    for (size_t i = 0; i < sizeof order / sizeof order[0]; i++) {
        const char *here = strstr(at, order[i]);
        if (here == NULL) {
            fail_msg("%s is not in its place", order[i]);
        }
        at = here == NULL ? at : here;
    }
    plw_stage_description_free(read_again(text));
    plw_text_free(text);
    plw_stage_description_free(description);
}

static void options_take_the_place(void **state) {
    (void)state;
    static const char *const gone_by_voltage[] = {"winding", "rectifier",  "reservoir", "winding-ohms", "mains",
                                                  "choke",   "choke-ohms", "smoothing", "dropper",      "bleeder"};
    plw_stage_description *description = described(PARTS);
    say(description, "dropper", "470");
    say(description, "smoothing", "10uF");
    assert_null(plw_stage_described(description, "choke", NULL, 0));
    assert_string_equal(plw_stage_described(description, "smoothing", NULL, 0), "10uF");
    assert_string_equal(plw_stage_described(description, "reservoir", NULL, 0), "33uF");
    plw_stage_description_free(description);
    description = described(PARTS);
    say(description, "supply", "285V");
    for (size_t i = 0; i < sizeof gone_by_voltage / sizeof gone_by_voltage[0]; i++) {
        assert_null(plw_stage_described(description, gone_by_voltage[i], NULL, 0));
    }
    plw_stage_description_free(description);
    description = described(PARTS);
    say(description, "reading", "258V@10k");
    assert_null(plw_stage_described(description, "winding-ohms", NULL, 0));
    assert_non_null(plw_stage_described(description, "winding", NULL, 0));
    plw_stage_description_free(description);
}

/* Parts of a description and a text that the fault must hold. */
static void faults_are_named(void **state) {
    (void)state;
    static const char *const cases[][2] = {
        {"<winding value='231V'/>", "stage.xml:1:8: winding: how the rectifier is wired is missing"},
        {"<rectifier value='bridge'/>", "rectifier: the winding is missing"},
        {"<winding value='231V'/><rectifier value='brigde'/>", "rectifier: 'brigde' is not known; is it bridge?"},
        {"<winding value='231V'/><rectifier value='bridge'/><smoothing value='47uF'/>",
         "smoothing: there is no dropper or choke before it"},
        {"<winding value='231V'/><rectifier value='bridge'/><choke value='8H'/>",
         "choke: is not followed by its capacitor"},
        {"<winding value='231V'/><rectifier value='bridge'/><choke value='8H'/><dropper value='1k'/>"
         "<smoothing value='47uF'/>",
         "choke: is not followed by its capacitor"},
        {"<winding value='231V'/><rectifier value='bridge'/><dropper value='1k'/><choke-ohms value='100'/>"
         "<smoothing value='47uF'/>",
         "choke-ohms: there is no choke before it"},
        {"<winding value='231V'/><rectifier value='bridge'/><choke value='8H'/><choke-ohms value='100'/>"
         "<choke-ohms value='100'/><smoothing value='47uF'/>",
         "choke-ohms: there is no choke before it"},
        {"<winding value='231V'/><rectifier value='bridge'/><reading value='258V@10k'/><reading value='400V@9k'/>",
         "stage.xml:1:85: reading: 400 V under load is above the off-load peak"},
        {"<winding value='231V'/><rectifier value='bridge'/><reading value='258V'/>", "reading: none is loaded"},
        {"<winding value='231V'/><supply value='285V'/>", "supply: cannot stand together with "},
        {"<winding value='231V'/><rectifier value='bridge'/><winding-ohms value='9'/><reading value='258V@10k'/>",
         "winding-ohms: cannot stand together with "},
        {"<winding value='231V'/><rectifier value='bridge'/><source-ohms value='1k'/>",
         "source-ohms: cannot stand together with "},
        {"<supply value='285V'/><source-ohms value='1k'/><rectifier value='bridge'/>",
         "source-ohms: cannot stand together with "},
        {"<supply value='285V'/><winding-ohms value='100'/>", "winding-ohms: cannot stand together with "},
        {"<winding value='231V'/><rectifier value='full-wave'/><transformerless value='yes'/>",
         "transformerless: a full-wave rectifier wants the centre tap of a transformer"},
        {"<winding value='331V'/><rectifier value='half-wave'/><transformerless value='yes'/>",
         "transformerless: the winding is then the mains itself: give 90 V to 260 V"},
        {"<winding value='231V'/><rectifier value='bridge'/><bleeder value='1'/>", "bleeder: 1 is out of range"},
        {"<winding value='231V'/><rectifier value='bridge'/><dropper value='0'/><smoothing value='47uF'/>",
         "dropper: 0 is out of range"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char text[512];
        plw_plate_supply supply;
        plw_error error = {.status = PLW_OK};
        snprintf(text, sizeof text, "<stage>%s</stage>", cases[i][0]);
        plw_stage_description *description = described(text);
        assert_int_equal(plw_plate_supply_build(description, NULL, 0.11, &supply, &error), PLW_E_DATA);
        if (strstr(error.text, cases[i][1]) == NULL) {
            fail_msg("'%s' does not hold '%s'", error.text, cases[i][1]);
        }
        plw_stage_description_free(description);
    }
}

static void faults_that_need_the_catalogue(void **state) {
    (void)state;
    static const char *const cases[][2] = {{"6V6GT", "diode: is no rectifier"}, {"GZ43", "is it GZ34?"}};
    const char *const folders[] = {TUBEDATA};
    plw_catalogue *catalogue = NULL;
    assert_int_equal(plw_catalogue_open(folders, 1, &catalogue, NULL), PLW_OK);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        plw_plate_supply supply;
        plw_error error = {.status = PLW_OK};
        plw_stage_description *description = described(PARTS);
        say(description, "diode", cases[i][0]);
        assert_int_equal(plw_plate_supply_build(description, catalogue, 0.11, &supply, &error), PLW_E_USAGE);
        assert_non_null(strstr(error.text, cases[i][1]));
        plw_stage_description_free(description);
    }
    plw_catalogue_free(catalogue);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(entries_become_parts),           cmocka_unit_test(what_is_not_told),
        cmocka_unit_test(rectifier_tubes_are_looked_up),  cmocka_unit_test(the_filter_keeps_its_order),
        cmocka_unit_test(options_take_the_place),         cmocka_unit_test(faults_are_named),
        cmocka_unit_test(faults_that_need_the_catalogue),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
