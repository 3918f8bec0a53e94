/* The answer as JSON, schema "platewright/1".
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "report/cautions.h"
#include "report/fields.h"
#include "report/json_sink.h"
#include "report/supply_report.h"
#include "report/text_buffer.h"
#include "report/verdict.h"

static void put_fields(const plw_json_sink *s, const plw_field *fields, size_t count, const void *record) {
    for (size_t i = 0; i < count; i++) {
        plw_json_put_number(s, fields[i].name, plw_field_value(&fields[i], record));
    }
}

static void put_tube(const plw_json_sink *root, const plw_stage *stage) {
    const plw_model *model = &stage->tube->model;
    const bool triode = stage->tube->kind == PLW_KIND_TRIODE;
    const plw_json_sink tube = plw_json_object_in(root, "tube");
    plw_json_put(&tube, "type", json_string(plw_stage_tube_type(stage)));
    plw_json_put(&tube, "connection",
                 json_string(plw_connection_name(triode ? PLW_CONNECTION_TRIODE : stage->connection)));
    plw_json_put(&tube, "parallel", json_integer((json_int_t)stage->parallel));
    const plw_json_sink law = plw_json_object_in(&tube, "model");
    plw_json_put(&law, "law", json_string(plw_law_name(model->law.kind)));
    const plw_json_sink coefficients = plw_json_object_in(&law, "coefficients");
    for (size_t i = 0; i < plw_law_coefficient_count(model->law.kind); i++) {
        plw_json_put_number(&coefficients, plw_law_coefficient_name(model->law.kind, i), model->law.coefficient[i]);
    }
    plw_json_put_number(&law, "fit_error_percent", model->fit_error.plate_current_percent);
    plw_json_put_number(&law, "left_out_error_percent", model->left_out_error.plate_current_percent);
}

static void put_resistor(const plw_json_sink *s, const plw_bias_option *option) {
    plw_json_put_number(s, "cathode_resistor_ohms", option->ohms);
    plw_json_put_number(s, "resistor_watts", option->watts);
    plw_json_put_number(s, "rating_watts", option->rating_watts);
}

static void put_bias(const plw_json_sink *root, const plw_answer *answer) {
    const plw_json_sink bias = plw_json_object_in(root, "bias");
    put_resistor(&bias, answer->option);
    plw_json_put_number(&bias, "exact_ohms", answer->choice == NULL ? (double)NAN : answer->choice->exact_ohms);
    plw_json_put_number(&bias, "fixed_bias_volts", answer->stage->fixed_bias_volts);
}

/* before: 0, or the aim in percent before it was lowered for the mains; obstacle: empty: none */
static void put_aim(const plw_json_sink *root, plw_aim aim, double before, bool reached, const char *obstacle) {
    static const char *const kinds[] = {
        [PLW_AIM_DISSIPATION] = "dissipation", [PLW_AIM_CURRENT] = "current", [PLW_AIM_POWER] = "power"};
    const plw_json_sink s = plw_json_object_in(root, "aim");
    const size_t length = plw_text_whole_length(obstacle);
    plw_json_put(&s, "kind", json_string(kinds[aim.kind]));
    plw_json_put_number(&s, "value", aim.kind == PLW_AIM_POWER ? (double)NAN : aim.value);
    plw_json_put_number(&s, "before_percent", before > 0.0 ? before : (double)NAN);
    plw_json_put(&s, "reached", json_boolean(reached));
    plw_json_put(&s, "obstacle", length == 0 ? json_null() : json_stringn(obstacle, length));
}

static void put_quiescent(const plw_json_sink *parent, const plw_quiescent *rest, unsigned tubes) {
    const plw_json_sink s = plw_json_object_in(parent, "quiescent");
    put_fields(&s, plw_quiescent_fields, plw_quiescent_fields_count, rest);
    const plw_json_sink total = plw_json_object_in(&s, "total");
    const double n = (double)tubes;
    plw_json_put_number(&total, "supply_amps", rest->supply_amps);
    plw_json_put_number(&total, "plate_amps", n * rest->plate_amps);
    plw_json_put_number(&total, "screen_amps", isnan(rest->screen_watts) ? (double)NAN : n * rest->screen_amps);
    plw_json_put_number(&total, "cathode_amps", n * rest->cathode_amps);
    plw_json_put_number(&total, "plate_watts", n * rest->plate_watts);
    plw_json_put_number(&total, "screen_watts", n * rest->screen_watts);
}

/* "signal": at full drive.  "clean_signal": at the largest drive up to the distortion for which makers print power. */
static void put_signal(const plw_json_sink *parent, const char *name, const plw_signal *signal) {
    const plw_json_sink s = plw_json_object_in(parent, name);
    put_fields(&s, plw_signal_fields, plw_signal_fields_count, signal);
    json_t *harmonics = json_array();
    for (size_t h = 2; h <= PLW_HARMONICS_MOST; h++) {
        plw_json_append(harmonics, plw_json_number(fabs(signal->harmonic_percent[h])), s.failed);
    }
    plw_json_put(&s, "harmonics_percent", harmonics);
    plw_json_put(&s, "limit", json_string(plw_drive_limit_name(signal->limit)));
}

/* One rating.  counted: it bears on the verdict; a design-center rating leaves room for the mains by itself, and what
 * comes of them is told but not held against the stage. */
static void put_rating(json_t *ratings, const plw_rating_check *check, bool counted, const char *at, bool *failed) {
    const plw_json_sink s = {json_object(), failed};
    plw_json_put(&s, "name", json_string(check->name));
    plw_json_put_number(&s, "value", check->value);
    plw_json_put_number(&s, "limit", check->limit);
    plw_json_put(&s, "unit", json_string(plw_json_unit_name(check->unit)));
    plw_json_put_number(&s, "share_percent", check->share_percent);
    plw_json_put(&s, "ok", json_boolean(check->ok));
    plw_json_put(&s, "counted", json_boolean(counted));
    plw_json_put(&s, "at", json_string(at));
    plw_json_append(ratings, s.object, failed);
}

static void put_mains_ratings(json_t *ratings, const plw_mains *mains, bool *failed) {
    const plw_mains_corner *corners[] = {&mains->low, &mains->high};
    for (size_t k = 0; k < 2; k++) {
        for (size_t i = 0; i < corners[k]->ratings_count; i++) {
            const plw_rating_check *check = &corners[k]->ratings[i];
            char at[48];
            snprintf(at, sizeof at, "%s, mains %+.3g %%", check->when == PLW_AT_IDLE ? "idle" : "full drive",
                     corners[k]->mains_percent - 100.0);
            put_rating(ratings, check, mains->counted, at, failed);
        }
    }
}

static void put_ratings(const plw_json_sink *root, const plw_answer *answer) {
    json_t *ratings = json_array();
    const plw_bias_option *option = answer->option;
    for (size_t i = 0; i < option->ratings_count; i++) {
        const plw_rating_check *check = &option->ratings[i];
        put_rating(ratings, check, true, check->when == PLW_AT_IDLE ? "idle" : "full drive", root->failed);
    }
    if (answer->mains != NULL) {
        put_mains_ratings(ratings, answer->mains, root->failed);
    }
    if (answer->supply != NULL) {
        plw_json_append_supply_ratings(ratings, answer->supply, root->failed);
    }
    plw_json_put(root, "ratings", ratings);
}

static json_t *choices_array(const plw_answer *answer, bool *failed) {
    const plw_bias_choice *choice = answer->choice;
    json_t *choices = json_array();
    for (size_t i = 0; choice != NULL && i < choice->options; i++) {
        const plw_bias_option *option = &choice->option[i];
        const plw_json_sink s = {json_object(), failed};
        put_resistor(&s, option);
        plw_json_put(&s, "chosen", json_boolean(i == choice->chosen));
        plw_json_put(&s, "within_ratings", json_boolean(plw_option_within(answer, option)));
        put_quiescent(&s, &option->quiescent, answer->stage->parallel);
        put_signal(&s, "signal", &option->signal);
        put_signal(&s, "clean_signal", &option->clean);
        plw_json_append(choices, s.object, failed);
    }
    return choices;
}

static void put_supply(const plw_json_sink *root, const plw_answer *answer) {
    if (answer->supply != NULL && answer->stage->supply.kind != PLW_SUPPLY_STIFF) {
        plw_json_put_supply(root, answer->supply);
        return;
    }
    if (answer->stage->supply.kind != PLW_SUPPLY_STIFF) {
        const plw_plate_supply supply = plw_plate_supply_of(&answer->stage->supply);
        const plw_supply_question question = plw_supply_question_usual(answer->option->quiescent.supply_amps);
        plw_supply_answer a;
        if (plw_plate_supply_ask(&supply, &question, &a, NULL) == PLW_OK) {
            plw_json_put_supply(root, &a);
        }
    }
}

static void put_deviation(const plw_json_sink *s, const char *name, const plw_deviation *deviation) {
    const plw_json_sink d = plw_json_object_in(s, name);
    plw_json_put_number(&d, "model", deviation->model);
    plw_json_put_number(&d, "tubes", deviation->tubes);
    plw_json_put_number(&d, "supply", deviation->supply);
    plw_json_put_number(&d, "all", deviation->all);
}

/* One standard deviation of the main figures, in their own units. */
static void put_uncertainty(const plw_json_sink *root, const plw_uncertainty *u) {
    if (u == NULL) {
        return;
    }
    const plw_json_sink s = plw_json_object_in(root, "uncertainty");
    put_deviation(&s, "plate_amps", &u->plate_amps);
    put_deviation(&s, "plate_watts", &u->plate_watts);
    put_deviation(&s, "cathode_volts", &u->cathode_volts);
    put_deviation(&s, "speaker_watts", &u->speaker_watts);
    plw_json_put_number(&s, "model_percent", u->model_percent);
    plw_json_put(&s, "dominated_by", json_string(plw_deviation_cause_name(u->dominant)));
    plw_json_put(&s, "outside_data", u->outside_data ? json_string(u->outside) : json_null());
}

static void put_hum(const plw_json_sink *root, const plw_hum *hum) {
    if (hum != NULL) {
        const plw_json_sink s = plw_json_object_in(root, "hum");
        plw_json_put_number(&s, "ripple_rms_volts", hum->ripple_rms_volts);
        plw_json_put_number(&s, "speaker_rms_volts", hum->speaker_rms_volts);
        plw_json_put_number(&s, "decibels_below_full_power", hum->decibels_below_full_power);
    }
}

static void put_specimen_choice(const plw_json_sink *s, const plw_specimen *specimen) {
    const plw_json_sink resistor = plw_json_object_in(s, "suitable_resistor");
    const plw_bias_choice *choice = &specimen->choice;
    if (specimen->resistor_found) {
        put_resistor(&resistor, &choice->option[choice->chosen]);
        plw_json_put_number(&resistor, "exact_ohms", choice->exact_ohms);
        plw_json_put(&resistor, "obstacle", choice->obstacle[0] == '\0' ? json_null() : json_string(choice->obstacle));
        return;
    }
    static const char *const unknown[] = {"cathode_resistor_ohms", "resistor_watts", "rating_watts", "exact_ohms"};
    for (size_t i = 0; i < sizeof unknown / sizeof unknown[0]; i++) {
        plw_json_put(&resistor, unknown[i], json_null());
    }
    plw_json_put(&resistor, "obstacle", json_string(specimen->resistor_obstacle));
}

/* The tube on the bench; "read" tells the voltages that were measured from those the model lent. */
static void put_specimen(const plw_json_sink *root, const plw_specimen *specimen) {
    if (specimen == NULL) {
        return;
    }
    const plw_json_sink s = plw_json_object_in(root, "specimen");
    const struct {
        const char *name;
        double value;
    } figures[] = {
        {"supply_volts", specimen->supply_volts},
        {"plate_to_ground_volts", specimen->plate_to_ground_volts},
        {"screen_to_ground_volts", specimen->screen_to_ground_volts},
        {"cathode_volts", specimen->cathode_volts},
        {"plate_volts", specimen->plate_volts},
        {"screen_volts", specimen->screen_volts},
        {"grid_volts", specimen->grid_volts},
        {"cathode_amps", specimen->cathode_amps},
        {"plate_amps", specimen->plate_amps},
        {"screen_amps", isnan(specimen->screen_watts) ? (double)NAN : specimen->screen_amps},
        {"plate_watts", specimen->plate_watts},
        {"screen_watts", specimen->screen_watts},
        {"model_cathode_amps", specimen->model_cathode_amps},
        {"off_percent", specimen->off_percent},
        {"primary_ohms", specimen->primary_ohms},
        {"screen_feed_ohms", specimen->screen_feed_ohms},
    };
    for (size_t i = 0; i < sizeof figures / sizeof figures[0]; i++) {
        plw_json_put_number(&s, figures[i].name, figures[i].value);
    }
    const plw_json_sink was_read = plw_json_object_in(&s, "read");
    plw_json_put(&was_read, "supply", json_boolean(specimen->supply_read));
    plw_json_put(&was_read, "plate", json_boolean(specimen->plate_read));
    plw_json_put(&was_read, "screen", json_boolean(specimen->screen_read));
    plw_json_put(&was_read, "cathode", json_true());
    put_specimen_choice(&s, specimen);
}

static void put_cautions(const plw_json_sink *root, const plw_answer *answer) {
    json_t *cautions = json_array();
    char(*lines)[PLW_CAUTION_SIZE] = malloc(PLW_CAUTIONS_MOST * sizeof *lines);
    if (lines == NULL) {
        *root->failed = true;
    } else {
        const size_t count = plw_report_cautions(answer, lines, PLW_CAUTIONS_MOST, NULL);
        for (size_t i = 0; i < count; i++) {
            plw_json_append(cautions, json_string(lines[i]), root->failed);
        }
        free(lines);
    }
    plw_json_put(root, "cautions", cautions);
}

/* The same that the text says first. */
static void put_verdict(const plw_json_sink *root, const plw_answer *answer) {
    const plw_json_sink s = plw_json_object_in(root, "verdict");
    char heading[80];
    char what[120];
    char text[204];
    plw_verdict_words(answer, heading, what);
    snprintf(text, sizeof text, "%s%s%s", heading, what[0] == '\0' ? "" : " ", what);
    const size_t broken = plw_verdict_of(answer).broken;
    plw_json_put(&s, "within_ratings", json_boolean(broken == 0));
    plw_json_put(&s, "broken", json_integer((json_int_t)broken));
    plw_json_put(&s, "text", json_string(text));
}

plw_status plw_report_json(const plw_answer *answer, char **text, plw_error *error) {
    bool failed = false;
    const plw_json_sink root = {json_object(), &failed};
    plw_json_put(&root, "schema", json_string("platewright/1"));
    put_tube(&root, answer->stage);
    put_bias(&root, answer);
    if (answer->choice != NULL) {
        const plw_bias_choice *choice = answer->choice;
        put_aim(&root, choice->aim, answer->aim_before_percent, choice->aim_reached, choice->obstacle);
    }
    put_verdict(&root, answer);
    put_supply(&root, answer);
    put_quiescent(&root, &answer->option->quiescent, answer->stage->parallel);
    put_signal(&root, "signal", &answer->option->signal);
    put_signal(&root, "clean_signal", &answer->option->clean);
    put_ratings(&root, answer);
    plw_json_put(&root, "choices", choices_array(answer, &failed));
    put_specimen(&root, answer->specimen);
    put_uncertainty(&root, answer->uncertainty);
    put_hum(&root, answer->hum);
    put_cautions(&root, answer);
    return plw_json_text(root.object, failed, text, error);
}

plw_status plw_report_json_unreached(plw_aim aim, const char *obstacle, char **text, plw_error *error) {
    bool failed = false;
    const plw_json_sink root = {json_object(), &failed};
    plw_json_put(&root, "schema", json_string("platewright/1"));
    put_aim(&root, aim, 0.0, false, obstacle);
    plw_json_put(&root, "quiescent", json_null());
    return plw_json_text(root.object, failed, text, error);
}
