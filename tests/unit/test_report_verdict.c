/* What a program reads of the verdict in JSON: the aim, what counts against the stage, what a triode has not.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/fields.h"
#include "unit/report_json.h"

/* ---- the aim ----------------------------------------------------------------------------------------------------- */

static void the_aim_is_told(void **state) {
    (void)state;
    static solved_stage s;
    solve_one(&s, PLW_LAW_PENTODE);
    s.choice.aim.value = 83.7;
    s.answer.aim_before_percent = 90.0;
    json_t *root = parsed(&s.answer);
    assert_text_at(root, "aim.kind", "dissipation");
    assert_near(number_at(root, "aim.value"), 83.7, 1e-9, "as aimed");
    assert_near(number_at(root, "aim.before_percent"), 90.0, 1e-9, "as before it was lowered");
    assert_true(json_is_true(at(root, "aim.reached")));
    assert_null_at(root, "aim.obstacle");
    json_decref(root);
    s.choice.aim = (plw_aim){PLW_AIM_CURRENT, 0.0387};
    s.choice.aim_reached = false;
    snprintf(s.choice.obstacle, sizeof s.choice.obstacle, "at the aim the screen glows");
    s.answer.aim_before_percent = 0.0;
    root = parsed(&s.answer);
    assert_text_at(root, "aim.kind", "current");
    assert_near(number_at(root, "aim.value"), 0.0387, 1e-12, "in ampere");
    assert_null_at(root, "aim.before_percent");
    assert_true(json_is_false(at(root, "aim.reached")));
    assert_text_at(root, "aim.obstacle", "at the aim the screen glows");
    json_decref(root);
    s.choice.aim = (plw_aim){.kind = PLW_AIM_POWER};
    root = parsed(&s.answer);
    assert_text_at(root, "aim.kind", "power");
    assert_null_at(root, "aim.value");
    json_decref(root);
    s.answer.choice = NULL; /* check has no aim */
    root = parsed(&s.answer);
    assert_null(json_object_get(root, "aim"));
    json_decref(root);
}

static void no_resistor_is_an_answer_too(void **state) {
    (void)state;
    static solved_stage s;
    const plw_aim aim = {PLW_AIM_CURRENT, 2.385};
    plw_error why = {0};
    char *text = NULL;
    stage_begin(&s, PLW_LAW_PENTODE);
    assert_int_equal(plw_bias_choose(&s.stage, aim, PLW_E24, &s.choice, &why), PLW_E_NO_POINT);
    assert_int_equal(plw_report_json_unreached(aim, why.text, &text, NULL), PLW_OK);
    json_t *root = json_loads(text, JSON_REJECT_DUPLICATES, NULL);
    plw_text_free(text);
    assert_non_null(root);
    assert_int_equal(json_object_size(root), 3);
    assert_text_at(root, "schema", "platewright/1");
    assert_text_at(root, "aim.kind", "current");
    assert_near(number_at(root, "aim.value"), 2.385, 1e-9, "as aimed");
    assert_true(json_is_false(at(root, "aim.reached")));
    assert_text_at(root, "aim.obstacle", why.text);
    assert_null_at(root, "quiescent");
    json_decref(root);
}

/* ---- ratings ----------------------------------------------------------------------------------------------------- */

/* A value is compared with its limit whatever the rating system; whether that counts is another matter. */
static void ok_is_the_plain_comparison(void **state) {
    (void)state;
    const plw_rating_system systems[] = {PLW_SYSTEM_DESIGN_CENTER, PLW_SYSTEM_DESIGN_MAXIMUM};
    for (size_t k = 0; k < 2; k++) {
        static solved_stage s;
        static plw_mains mains;
        stage_begin(&s, PLW_LAW_PENTODE);
        s.ratings.system = systems[k];
        stage_solve(&s); /* at 90 % of 12 W: over it with the mains high */
        assert_int_equal(plw_mains_solve(&s.stage, &mains, NULL), PLW_OK);
        assert_false(mains.high.within_ratings);
        assert_int_equal(mains.counted, k == 1);
        s.answer.mains = &mains;
        json_t *root = parsed(&s.answer);
        size_t index = 0;
        size_t over = 0;
        json_t *entry;
        json_array_foreach(at(root, "ratings"), index, entry) {
            const double value = number_at(entry, "value");
            const double limit = number_at(entry, "limit");
            const bool at_mains = strstr(json_string_value(at(entry, "at")), "mains") != NULL;
            assert_true(json_is_true(at(entry, "ok")) == (value <= limit));
            assert_true(json_is_true(at(entry, "counted")) == (!at_mains || k == 1));
            over += at_mains && value > limit ? 1 : 0;
        }
        assert_true(over > 0);
        json_decref(root);
    }
}

/* ---- a triode has no screen -------------------------------------------------------------------------------------- */

static void assert_no_screen(json_t *figures) {
    assert_null_at(figures, "screen_amps");
    assert_null_at(figures, "screen_watts");
    assert_true(number_at(figures, "plate_amps") > 1e-3);
}

static void a_triode_has_no_screen_current(void **state) {
    (void)state;
    static solved_stage s;
    static plw_specimen specimen;
    solve_one(&s, PLW_LAW_TRIODE);
    const plw_quiescent *rest = &s.answer.option->quiescent;
    const plw_meter_readings readings = {(double)NAN, (double)NAN, (double)NAN, 1.0238 * rest->cathode_volts};
    const plw_aim aim = {PLW_AIM_DISSIPATION, 87.0};
    assert_int_equal(plw_specimen_measure(&s.stage, &readings, &aim, PLW_E24, &specimen, NULL), PLW_OK);
    s.answer.specimen = &specimen;
    json_t *root = parsed(&s.answer);
    assert_no_screen(at(root, "quiescent"));
    assert_no_screen(at(root, "quiescent.total"));
    assert_no_screen(at(root, "signal"));
    assert_no_screen(at(root, "clean_signal"));
    assert_no_screen(at(root, "specimen"));
    json_decref(root);
    for (size_t i = 0; i < plw_specimen_fields_count; i++) {
        const bool screen = strncmp(plw_specimen_fields[i].name, "screen", 6) == 0;
        assert_true(!screen || isnan(plw_field_value(&plw_specimen_fields[i], &specimen)));
    }
    /* A pentode has one, however it is connected. */
    stage_begin(&s, PLW_LAW_PENTODE);
    s.stage.connection = PLW_CONNECTION_TRIODE;
    stage_solve(&s);
    root = parsed(&s.answer);
    assert_true(number_at(root, "quiescent.screen_amps") > 1e-4);
    assert_true(number_at(root, "signal.screen_amps") > 1e-4);
    json_decref(root);
}

/* ---- the verdict in words ---------------------------------------------------------------------------------------- */

static void assert_verdict(const plw_answer *answer, const char *words) {
    char *text = NULL;
    assert_int_equal(plw_report_text(answer, &text, NULL), PLW_OK);
    const char *line = strstr(text, "VERDICT ");
    assert_non_null(line);
    if (line != NULL && strncmp(line + 18, words, strlen(words)) != 0) {
        fail_msg("'%s' wanted:\n%.200s", words, line);
    }
    plw_text_free(text);
}

/* Break the first check at rest or driven. */
static void break_one(plw_rating_check *checks, size_t count, plw_when when) {
    size_t i = 0;
    while (i < count && checks[i].when != when) {
        i++;
    }
    assert_true(i < count);
    checks[i].ok = false;
}

/* A stage whose ratings are kept at nominal mains and counted at high mains. */
static void solve_design_maximum(solved_stage *s, plw_mains *mains) {
    stage_begin(s, PLW_LAW_PENTODE);
    s->ratings.system = PLW_SYSTEM_DESIGN_MAXIMUM;
    s->ratings.screen_watts = 4.3;
    stage_solve(s);
    assert_int_equal(plw_mains_solve(&s->stage, mains, NULL), PLW_OK);
}

/* What ends with exit status 1 is never called within the ratings: the nearest to the bench comes first. */
static void the_verdict_names_what_is_broken(void **state) {
    (void)state;
    static solved_stage s;
    static plw_mains mains;
    static plw_supply_answer supply;
    static plw_supply line;
    solve_design_maximum(&s, &mains);
    plw_mains kept = mains;
    for (size_t i = 0; i < kept.high.ratings_count; i++) {
        kept.high.ratings[i].ok = kept.low.ratings[i].ok = true;
    }
    s.answer.mains = &kept;
    assert_verdict(&s.answer, "within every rating, at rest and at full drive, mains 10 % up");
    assert_int_equal(plw_supply_source(303.0, 713.0, &line, NULL), PLW_OK);
    const plw_plate_supply source = plw_plate_supply_of(&line);
    const plw_supply_question question = plw_supply_question_usual(0.0311);
    assert_int_equal(plw_plate_supply_ask(&source, &question, &supply, NULL), PLW_OK);
    supply.within_ratings = false;
    supply.checks_count = 1;
    supply.checks[0] =
        (plw_supply_check){.name = "bleeder heat", .value = 1238.5, .limit = 1000.0, .unit = PLW_UNIT_VOLT};
    s.answer.supply = &supply;
    assert_verdict(&s.answer, "OVER A RATING of the supply:\n");
    break_one(kept.low.ratings, kept.low.ratings_count, PLW_AT_IDLE);
    assert_verdict(&s.answer, "OVER A RATING with the mains 10 % down, at rest:\n");
    break_one(kept.high.ratings, kept.high.ratings_count, PLW_AT_FULL_DRIVE);
    assert_verdict(&s.answer, "OVER A RATING with the mains 10 % up, at full drive:\n");
    break_one(kept.high.ratings, kept.high.ratings_count, PLW_AT_IDLE);
    assert_verdict(&s.answer, "OVER A RATING with the mains 10 % up, at rest:\n");
    json_t *root = parsed(&s.answer);
    assert_near(number_at(root, "verdict.broken"), 4.0, 0.0, "three at the mains, one of the supply");
    assert_non_null(strstr(json_string_value(at(root, "verdict.text")), ", and 3 more"));
    json_decref(root);
    kept.counted = false; /* a design-center tube: the maker answers for the mains */
    assert_verdict(&s.answer, "OVER A RATING of the supply:\n");
    s.answer.supply = NULL;
    assert_verdict(&s.answer, "within every rating, at rest and at full drive\n");
    s.choice.aim_reached = false; /* ends with exit status 1 too */
    assert_verdict(&s.answer, "within every rating, at rest and at full drive;\n");
    s.choice.aim_reached = true;
}

/* Text, CSV and JSON have one verdict, on every option; each of the three reasons alone is enough. */
static void one_verdict_in_every_format(void **state) {
    (void)state;
    static solved_stage s;
    static plw_mains mains;
    solve_design_maximum(&s, &mains);
    assert_false(mains.within_ratings); /* at 90 % of 12 W, with the mains high */
    s.answer.mains = &mains;
    plw_mains_judge(&s.stage, &s.choice);
    assert_false(s.choice.option[0].within_at_mains); /* the lower resistor */
    json_t *root = parsed(&s.answer);
    assert_true(json_is_false(at(root, "verdict.within_ratings")));
    assert_true(number_at(root, "verdict.broken") >= 1.0);
    const char *text = json_string_value(at(root, "verdict.text"));
    assert_non_null(strstr(text, "OVER A RATING with the mains 10 % up, at rest: plate dissipation "));
    size_t index;
    json_t *entry;
    json_array_foreach(at(root, "choices"), index, entry) {
        assert_true(json_is_true(at(entry, "within_ratings")) ==
                    (s.choice.option[index].within_ratings && s.choice.option[index].within_at_mains));
    }
    json_decref(root);
    char *csv = NULL;
    assert_int_equal(plw_report_csv(&s.answer, &csv, NULL), PLW_OK);
    assert_null(strstr(csv, ",yes,yes,")); /* chosen, and within ratings */
    assert_non_null(strstr(csv, ",yes,no,"));
    plw_text_free(csv);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_aim_is_told),
        cmocka_unit_test(no_resistor_is_an_answer_too),
        cmocka_unit_test(ok_is_the_plain_comparison),
        cmocka_unit_test(a_triode_has_no_screen_current),
        cmocka_unit_test(the_verdict_names_what_is_broken),
        cmocka_unit_test(one_verdict_in_every_format),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
