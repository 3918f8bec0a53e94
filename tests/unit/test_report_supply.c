/* The plate supply in words, JSON, CSV and as a picture.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <jansson.h>
#include <stdlib.h>
#include <string.h>

#include "narrow.h"
#include "near.h"
#include "platewright/dummy_meaning.h"
#include "report/cautions.h"
#include "unit/report_stage.h"
#include "unit/supplies.h"

typedef struct {
    solved_stage s;
    plw_plate_supply plate_supply;
    plw_supply_answer supply;
    plw_hum hum;
    plw_mains mains;
    plw_supply_finding finding;
} found;

/* A made-up pentode on a supply of parts. */
static void find(found *f) {
    memset(f, 0, sizeof *f);
    stage_begin(&f->s, PLW_LAW_PENTODE);
    f->s.stage.speaker_ohms = 7.9;
    f->s.tube.heater_volts = 6.3;
    f->s.tube.heater_amps = 0.76;
    f->plate_supply =
        (plw_plate_supply){.has_parts = true, .has_winding = true, .parts = usual_rectifier(231.4, 173.0)};
    f->plate_supply.parts.sections = 1;
    f->plate_supply.parts.section[0] = (plw_filter_section){.ohms = 217.0, .farads = 33e-6};
    plw_error error = {0};
    if (plw_plate_supply_settle(&f->plate_supply, 0.15, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    f->s.stage.supply = f->plate_supply.line;
    stage_solve(&f->s);
    const plw_bias_option *option = f->s.answer.option;
    plw_supply_question question = plw_supply_question_usual(option->quiescent.supply_amps);
    question.regulation_percent = 14.0;
    assert_int_equal(plw_plate_supply_ask(&f->plate_supply, &question, &f->supply, &error), PLW_OK);
    assert_int_equal(plw_mains_solve(&f->s.stage, &f->mains, &error), PLW_OK);
    assert_int_equal(plw_hum_of(&f->s.stage, &option->quiescent, &option->signal,
                                f->supply.state.node[1].ripple_rms_volts, &f->hum, &error),
                     PLW_OK);
    f->s.answer.supply = &f->supply;
    f->s.answer.mains = &f->mains;
    f->s.answer.hum = &f->hum;
    f->finding = (plw_supply_finding){
        .supply = &f->supply, .stage = &f->s.stage, .option = option, .choice = &f->s.choice, .hum = &f->hum};
    assert_int_equal(
        plw_dummy_meanings(&f->s.stage, &f->supply.dummy, f->s.choice.aim, PLW_E24, f->finding.meaning, &error),
        PLW_OK);
    f->finding.meanings = PLW_DUMMY_MEANINGS;
}

static json_t *parsed(char *text) {
    json_error_t error;
    json_t *root = json_loads(text, JSON_REJECT_DUPLICATES, &error);
    if (root == NULL) {
        fail_msg("%s", error.text);
    }
    plw_text_free(text);
    return root;
}

static double number_of(json_t *object, const char *name) {
    json_t *value = json_object_get(object, name);
    assert_true(json_is_number(value));
    return json_number_value(value);
}

/* Every name that the design page fixes is there, with the figures of the answer. */
static void json_is_as_fixed(void **state) {
    (void)state;
    static found f;
    char *text = NULL;
    find(&f);
    assert_int_equal(plw_report_supply_json(&f.finding, &text, NULL), PLW_OK);
    json_t *root = parsed(text);
    json_t *supply = json_object_get(root, "supply");
    assert_string_equal(json_string_value(json_object_get(root, "schema")), "platewright/1");
    assert_string_equal(json_string_value(json_object_get(supply, "kind")), "rectifier");
    assert_true(json_is_false(json_object_get(supply, "transformerless")));
    const struct {
        const char *name;
        double value;
    } figures[] = {{"off_load_volts", f.supply.off_load_volts},
                   {"off_load_volts_mains_high", f.supply.off_load_high_volts},
                   {"loaded_volts", f.supply.volts},
                   {"amps", f.supply.amps},
                   {"ripple_volts_peak_to_peak", f.supply.state.node[1].ripple_peak_to_peak_volts},
                   {"source_ohms", f.supply.source_ohms},
                   {"winding_rms_amps", f.supply.state.winding_rms_amps},
                   {"diode_peak_amps", f.supply.state.diode_peak_amps}};
    for (size_t i = 0; i < sizeof figures / sizeof figures[0]; i++) {
        assert_near_relative(number_of(supply, figures[i].name), figures[i].value, 1e-8, figures[i].name);
    }
    assert_true(json_is_null(json_object_get(supply, "uncertainty_volts")));
    assert_int_equal(json_array_size(json_object_get(supply, "line")), PLW_ANSWER_LINE_POINTS);
    json_t *dummy = json_object_get(supply, "dummy_load");
    assert_near_relative(number_of(dummy, "ohms"), f.supply.dummy.ohms, 1e-8, "as found");
    assert_near_relative(number_of(dummy, "rating_watts"), f.supply.dummy.rating_watts, 1e-8, "as found");
    assert_near_relative(number_of(json_object_get(supply, "bleeder"), "seconds_to_60_volts"),
                         f.supply.bleeder.seconds_to_60_volts, 1e-8, "as found");
    assert_int_equal(json_array_size(json_object_get(root, "ratings")), f.supply.checks_count);
    assert_true(json_array_size(json_object_get(root, "cautions")) > 4);
    json_decref(root);
}

/* design and check hold the same object, and the ratings of supply and mains among those of the tube. */
static void json_of_the_stage_holds_it(void **state) {
    (void)state;
    static found f;
    char *alone = NULL;
    char *whole = NULL;
    find(&f);
    assert_int_equal(plw_report_supply_json(&f.finding, &alone, NULL), PLW_OK);
    assert_int_equal(plw_report_json(&f.s.answer, &whole, NULL), PLW_OK);
    json_t *one = parsed(alone);
    json_t *other = parsed(whole);
    assert_true(json_equal(json_object_get(one, "supply"), json_object_get(other, "supply")));
    json_t *ratings = json_object_get(other, "ratings");
    assert_int_equal(json_array_size(ratings), f.s.answer.option->ratings_count + f.mains.low.ratings_count +
                                                   f.mains.high.ratings_count + f.supply.checks_count);
    size_t high = 0;
    for (size_t i = 0; i < json_array_size(ratings); i++) {
        const char *at = json_string_value(json_object_get(json_array_get(ratings, i), "at"));
        high += strcmp(at, "idle, mains +10 %") == 0 || strcmp(at, "full drive, mains +10 %") == 0;
        const bool of_mains = strstr(at, "idle, mains") != NULL || strstr(at, "full drive, mains") != NULL;
        const bool counted = json_is_true(json_object_get(json_array_get(ratings, i), "counted"));
        assert_true(counted == (!of_mains || f.mains.counted));
    }
    assert_int_equal(high, f.mains.high.ratings_count);
    assert_near_relative(number_of(json_object_get(other, "hum"), "decibels_below_full_power"),
                         f.hum.decibels_below_full_power, 1e-8, "as found");
    json_decref(one);
    json_decref(other);
}

static void words_for_the_bench(void **state) {
    (void)state;
    static found f;
    char *text = NULL;
    find(&f);
    assert_int_equal(plw_report_supply_text(&f.finding, &text, NULL), PLW_OK);
    static const char *const wanted[] = {"LOADED ",  "OFF LOAD ",    "RIPPLE ",         "WINDING ",
                                         "HUM ",     "DUMMY LOAD ",  "THE METER READS", "RATINGS OF THE SUPPLY",
                                         "BLEEDER ", "TRANSFORMER ", "HEATERS ",        "ON THE BENCH",
                                         "CAUTIONS", "Unplug"};
    const char *at = text;
    for (size_t i = 0; i < sizeof wanted / sizeof wanted[0]; i++) {
        const char *here = strstr(at, wanted[i]);
        if (here == NULL) {
            fail_msg("'%s' is not there, or not in its place:\n%s", wanted[i], text);
        }
        at = here == NULL ? at : here;
    }
    assert_narrow(text);
    plw_text_free(text);
    assert_int_equal(plw_report_text(&f.s.answer, &text, NULL), PLW_OK);
    assert_non_null(strstr(text, "\nMAINS, at rest"));
    assert_non_null(strstr(text, "\nPLATE SUPPLY"));
    plw_text_free(text);
}

/* A current alone, on readings alone: what is not known is not said. */
static void less_is_said_of_less(void **state) {
    (void)state;
    const plw_reading readings[] = {{303.0, 0.0}, {258.0, 0.0258}};
    plw_supply line;
    plw_supply_answer a;
    char *text = NULL;
    assert_int_equal(plw_supply_readings(readings, 2, &line, NULL), PLW_OK);
    const plw_plate_supply supply = plw_plate_supply_of(&line);
    const plw_supply_question question = plw_supply_question_usual(0.0211);
    assert_int_equal(plw_plate_supply_ask(&supply, &question, &a, NULL), PLW_OK);
    const plw_supply_finding finding = {.supply = &a};
    assert_int_equal(plw_report_supply_text(&finding, &text, NULL), PLW_OK);
    assert_null(strstr(text, "RIPPLE"));
    assert_null(strstr(text, "HUM"));
    assert_null(strstr(text, "BLEEDER"));
    assert_non_null(strstr(text, "true line hangs below"));
    plw_text_free(text);
    assert_int_equal(plw_report_supply_csv(&finding, &text, NULL), PLW_OK);
    assert_string_equal(text, "amps,volts,ripple_volts_peak_to_peak\n0,303,\n0.0258,258,\n");
    plw_text_free(text);
}

/* Every rating broken is a line of warning, the choke's in its own words. */
static void what_is_broken_is_said(void **state) {
    (void)state;
    static found f;
    static char lines[PLW_CAUTIONS_MOST][PLW_CAUTION_SIZE];
    find(&f);
    f.supply.checks_count = 3;
    f.supply.checks[0] = (plw_supply_check){
        .name = "choke inductance", .node = -1, .value = 1.1, .limit = 4.3, .unit = PLW_UNIT_HENRY, .at_least = true};
    f.supply.checks[1] = (plw_supply_check){.name = "rectifier source resistance",
                                            .node = -1,
                                            .value = 71.0,
                                            .limit = 125.0,
                                            .unit = PLW_UNIT_OHM,
                                            .at_least = true};
    f.supply.checks[2] = (plw_supply_check){
        .name = "capacitor ripple current", .node = 1, .value = 0.31, .limit = 0.2, .unit = PLW_UNIT_AMPERE};
    size_t own = 0;
    const size_t count = plw_supply_cautions(&f.finding, lines, PLW_CAUTIONS_MOST, &own);
    assert_true(count > own && own >= 3);
    assert_non_null(strstr(lines[0], "The choke is too small"));
    assert_non_null(strstr(lines[1], "is the least"));
    assert_non_null(strstr(lines[2], "capacitor 2 ripple current"));
}

static void the_picture_has_its_parts(void **state) {
    (void)state;
    static found f;
    char *text = NULL;
    find(&f);
    static const char *const wanted[] = {"$line << EOD",    "$low << EOD",     "$high << EOD",    "$demand << EOD",
                                         "$rest << EOD",    "$winding << EOD", "$ripple0 << EOD", "$ripple1 << EOD",
                                         "unset multiplot", "by its parts"};
    assert_int_equal(plw_plot_script(&f.s.answer, PLW_PLOT_SUPPLY, PLW_PLOT_SVG, "a.svg", &text, NULL), PLW_OK);
    for (size_t i = 0; i < sizeof wanted / sizeof wanted[0]; i++) {
        if (strstr(text, wanted[i]) == NULL) {
            fail_msg("'%s' is not there", wanted[i]);
        }
    }
    plw_text_free(text);
    f.s.answer.supply = NULL; /* nothing is known but the line */
    assert_int_equal(plw_plot_script(&f.s.answer, PLW_PLOT_SUPPLY, PLW_PLOT_SVG, "a.svg", &text, NULL), PLW_OK);
    assert_null(strstr(text, "multiplot"));
    assert_non_null(strstr(text, "$demand << EOD"));
    plw_text_free(text);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(json_is_as_fixed),       cmocka_unit_test(json_of_the_stage_holds_it),
        cmocka_unit_test(words_for_the_bench),    cmocka_unit_test(less_is_said_of_less),
        cmocka_unit_test(what_is_broken_is_said), cmocka_unit_test(the_picture_has_its_parts),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
