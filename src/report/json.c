/* The answer as JSON, schema "platewright/1".
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <jansson.h>
#include <math.h>
#include <stdlib.h>

#include "report/cautions.h"
#include "report/fields.h"
#include "report/text_buffer.h"

/* More digits than any part or meter has, fewer than a double: the last bits of a solution are not part of it. */
enum { JSON_DIGITS = 9 };

/* An object being filled; jansson says "no memory" by NULL, which is noted once for all. */
typedef struct {
    json_t *object;
    bool *failed;
} sink;

static void put(const sink *s, const char *name, json_t *value) {
    if (json_object_set_new(s->object, name, value) != 0) {
        *s->failed = true;
    }
}

static void append(json_t *array, json_t *value, bool *failed) {
    if (json_array_append_new(array, value) != 0) {
        *failed = true;
    }
}

/* Null for what is not known; whole numbers without a decimal point. */
static json_t *number(double value) {
    if (!isfinite(value)) {
        return json_null();
    }
    char text[64];
    snprintf(text, sizeof text, "%.*g", JSON_DIGITS, value);
    const double rounded = strtod(text, NULL);
    if (rounded == floor(rounded) && fabs(rounded) < 1e9) {
        return json_integer((json_int_t)rounded);
    }
    return json_real(rounded);
}

static void put_number(const sink *s, const char *name, double value) {
    put(s, name, number(value));
}

/* An object within an object; when it can't be put there it is gone already, and what goes into it is lost too. */
static sink object_in(const sink *parent, const char *name) {
    json_t *object = json_object();
    if (json_object_set_new(parent->object, name, object) != 0) {
        *parent->failed = true;
        object = NULL;
    }
    return (sink){object, parent->failed};
}

static void put_fields(const sink *s, const plw_field *fields, size_t count, const void *record) {
    for (size_t i = 0; i < count; i++) {
        put_number(s, fields[i].name, plw_field_value(&fields[i], record));
    }
}

static void put_tube(const sink *root, const plw_stage *stage) {
    const plw_model *model = &stage->tube->model;
    const bool triode = stage->tube->kind == PLW_KIND_TRIODE;
    const sink tube = object_in(root, "tube");
    put(&tube, "type", json_string(plw_stage_tube_type(stage)));
    put(&tube, "connection", json_string(plw_connection_name(triode ? PLW_CONNECTION_TRIODE : stage->connection)));
    put(&tube, "parallel", json_integer((json_int_t)stage->parallel));
    const sink law = object_in(&tube, "model");
    put(&law, "law", json_string(plw_law_name(model->law.kind)));
    const sink coefficients = object_in(&law, "coefficients");
    for (size_t i = 0; i < plw_law_coefficient_count(model->law.kind); i++) {
        put_number(&coefficients, plw_law_coefficient_name(model->law.kind, i), model->law.coefficient[i]);
    }
    put_number(&law, "fit_error_percent", model->fit_error.plate_current_percent);
    put_number(&law, "left_out_error_percent", model->left_out_error.plate_current_percent);
}

static void put_resistor(const sink *s, const plw_bias_option *option) {
    put_number(s, "cathode_resistor_ohms", option->ohms);
    put_number(s, "resistor_watts", option->watts);
    put_number(s, "rating_watts", option->rating_watts);
}

static void put_bias(const sink *root, const plw_answer *answer) {
    const sink bias = object_in(root, "bias");
    put_resistor(&bias, answer->option);
    put_number(&bias, "exact_ohms", answer->choice == NULL ? (double)NAN : answer->choice->exact_ohms);
    put_number(&bias, "fixed_bias_volts", answer->stage->fixed_bias_volts);
}

static void put_quiescent(const sink *parent, const plw_quiescent *rest, unsigned tubes) {
    const sink s = object_in(parent, "quiescent");
    put_fields(&s, plw_quiescent_fields, plw_quiescent_fields_count, rest);
    const sink total = object_in(&s, "total");
    const double n = (double)tubes;
    put_number(&total, "supply_amps", rest->supply_amps);
    put_number(&total, "plate_amps", n * rest->plate_amps);
    put_number(&total, "screen_amps", n * rest->screen_amps);
    put_number(&total, "cathode_amps", n * rest->cathode_amps);
    put_number(&total, "plate_watts", n * rest->plate_watts);
    put_number(&total, "screen_watts", n * rest->screen_watts);
}

static void put_signal(const sink *parent, const plw_signal *signal) {
    const sink s = object_in(parent, "signal");
    put_fields(&s, plw_signal_fields, plw_signal_fields_count, signal);
    json_t *harmonics = json_array();
    for (size_t h = 2; h <= PLW_HARMONICS_MOST; h++) {
        append(harmonics, number(fabs(signal->harmonic_percent[h])), s.failed);
    }
    put(&s, "harmonics_percent", harmonics);
    put(&s, "limit", json_string(plw_drive_limit_name(signal->limit)));
}

static const char *unit_name(plw_unit unit) {
    static const char *const names[PLW_UNIT_COUNT] = {"", "V", "A", "ohm", "W", "F", "H", "Hz", "s", "S", "%"};
    return unit < PLW_UNIT_COUNT ? names[unit] : "";
}

static void put_ratings(const sink *root, const plw_bias_option *option) {
    json_t *ratings = json_array();
    for (size_t i = 0; i < option->ratings_count; i++) {
        const plw_rating_check *check = &option->ratings[i];
        const sink s = {json_object(), root->failed};
        put(&s, "name", json_string(check->name));
        put_number(&s, "value", check->value);
        put_number(&s, "limit", check->limit);
        put(&s, "unit", json_string(unit_name(check->unit)));
        put_number(&s, "share_percent", check->share_percent);
        put(&s, "ok", json_boolean(check->ok));
        put(&s, "at", json_string(check->when == PLW_AT_IDLE ? "idle" : "full drive"));
        append(ratings, s.object, root->failed);
    }
    put(root, "ratings", ratings);
}

static json_t *choices_array(const plw_bias_choice *choice, unsigned tubes, bool *failed) {
    json_t *choices = json_array();
    for (size_t i = 0; choice != NULL && i < choice->options; i++) {
        const plw_bias_option *option = &choice->option[i];
        const sink s = {json_object(), failed};
        put_resistor(&s, option);
        put(&s, "chosen", json_boolean(i == choice->chosen));
        put(&s, "within_ratings", json_boolean(option->within_ratings));
        put_quiescent(&s, &option->quiescent, tubes);
        put_signal(&s, &option->signal);
        append(choices, s.object, failed);
    }
    return choices;
}

static const char *supply_kind_name(plw_supply_kind kind) {
    static const char *const names[] = {"stiff", "source", "readings", "rectifier"};
    return names[kind];
}

static void put_supply(const sink *root, const plw_answer *answer) {
    const plw_supply *supply = &answer->stage->supply;
    const plw_quiescent *rest = &answer->option->quiescent;
    if (supply->kind == PLW_SUPPLY_STIFF) {
        return;
    }
    const sink s = object_in(root, "supply");
    double volts;
    double ohms;
    plw_supply_at(supply, rest->supply_amps, &volts, &ohms);
    put(&s, "kind", json_string(supply_kind_name(supply->kind)));
    put_number(&s, "off_load_volts", supply->volts);
    put(&s, "off_load_volts_mains_high", json_null());
    put_number(&s, "loaded_volts", rest->supply_volts);
    put_number(&s, "amps", rest->supply_amps);
    put(&s, "ripple_volts_peak_to_peak", json_null());
    put_number(&s, "source_ohms", ohms);
    static const char *const unknown[] = {"winding_rms_amps", "diode_peak_amps", "uncertainty_volts", "line",
                                          "dummy_load",       "bleeder"};
    for (size_t i = 0; i < sizeof unknown / sizeof unknown[0]; i++) {
        put(&s, unknown[i], json_null());
    }
}

static void put_deviation(const sink *s, const char *name, const plw_deviation *deviation) {
    const sink d = object_in(s, name);
    put_number(&d, "model", deviation->model);
    put_number(&d, "tubes", deviation->tubes);
    put_number(&d, "both", deviation->both);
}

/* One standard deviation of the main figures, in their own units. */
static void put_uncertainty(const sink *root, const plw_uncertainty *u) {
    if (u == NULL) {
        return;
    }
    const sink s = object_in(root, "uncertainty");
    put_deviation(&s, "plate_amps", &u->plate_amps);
    put_deviation(&s, "plate_watts", &u->plate_watts);
    put_deviation(&s, "cathode_volts", &u->cathode_volts);
    put_deviation(&s, "speaker_watts", &u->speaker_watts);
    put_number(&s, "model_percent", u->model_percent);
    put(&s, "dominated_by", json_string(u->model_dominates ? "model" : "tubes"));
    put(&s, "outside_data", u->outside_data ? json_string(u->outside) : json_null());
}

static void put_specimen_choice(const sink *s, const plw_specimen *specimen) {
    const sink resistor = object_in(s, "suitable_resistor");
    const plw_bias_choice *choice = &specimen->choice;
    if (specimen->resistor_found) {
        put_resistor(&resistor, &choice->option[choice->chosen]);
        put_number(&resistor, "exact_ohms", choice->exact_ohms);
        put(&resistor, "obstacle", choice->obstacle[0] == '\0' ? json_null() : json_string(choice->obstacle));
        return;
    }
    static const char *const unknown[] = {"cathode_resistor_ohms", "resistor_watts", "rating_watts", "exact_ohms"};
    for (size_t i = 0; i < sizeof unknown / sizeof unknown[0]; i++) {
        put(&resistor, unknown[i], json_null());
    }
    put(&resistor, "obstacle", json_string(specimen->resistor_obstacle));
}

/* The tube on the bench; "read" tells the voltages that were measured from those the model lent. */
static void put_specimen(const sink *root, const plw_specimen *specimen) {
    if (specimen == NULL) {
        return;
    }
    const sink s = object_in(root, "specimen");
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
        {"screen_amps", specimen->screen_amps},
        {"plate_watts", specimen->plate_watts},
        {"screen_watts", specimen->screen_watts},
        {"model_cathode_amps", specimen->model_cathode_amps},
        {"off_percent", specimen->off_percent},
        {"primary_ohms", specimen->primary_ohms},
    };
    for (size_t i = 0; i < sizeof figures / sizeof figures[0]; i++) {
        put_number(&s, figures[i].name, figures[i].value);
    }
    const sink was_read = object_in(&s, "read");
    put(&was_read, "supply", json_boolean(specimen->supply_read));
    put(&was_read, "plate", json_boolean(specimen->plate_read));
    put(&was_read, "screen", json_boolean(specimen->screen_read));
    put(&was_read, "cathode", json_true());
    put_specimen_choice(&s, specimen);
}

static void put_cautions(const sink *root, const plw_answer *answer) {
    json_t *cautions = json_array();
    char(*lines)[PLW_CAUTION_SIZE] = malloc(PLW_CAUTIONS_MOST * sizeof *lines);
    if (lines == NULL) {
        *root->failed = true;
    } else {
        const size_t count = plw_report_cautions(answer, lines, PLW_CAUTIONS_MOST, NULL);
        for (size_t i = 0; i < count; i++) {
            append(cautions, json_string(lines[i]), root->failed);
        }
        free(lines);
    }
    put(root, "cautions", cautions);
}

static json_t *answer_object(const plw_answer *answer) {
    bool failed = false;
    const sink root = {json_object(), &failed};
    put(&root, "schema", json_string("platewright/1"));
    put_tube(&root, answer->stage);
    put_bias(&root, answer);
    put_supply(&root, answer);
    put_quiescent(&root, &answer->option->quiescent, answer->stage->parallel);
    put_signal(&root, &answer->option->signal);
    put_ratings(&root, answer->option);
    put(&root, "choices", choices_array(answer->choice, answer->stage->parallel, &failed));
    put_specimen(&root, answer->specimen);
    put_uncertainty(&root, answer->uncertainty);
    put_cautions(&root, answer);
    if (failed) {
        json_decref(root.object);
        return NULL;
    }
    return root.object;
}

plw_status plw_report_json(const plw_answer *answer, char **text, plw_error *error) {
    json_t *object = answer_object(answer);
    if (object == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory for a report, or a name in it is not UTF-8");
    }
    plw_text_buffer buffer;
    plw_status status = plw_text_begin(&buffer, error);
    if (status == PLW_OK) {
        if (json_dumpf(object, buffer.file, JSON_INDENT(2) | JSON_REAL_PRECISION(JSON_DIGITS)) != 0) {
            status = plw_fail(error, PLW_E_NO_MEMORY, "out of memory for a report");
        }
        fputc('\n', buffer.file);
        status = plw_text_end(&buffer, status, text, error);
    }
    json_decref(object);
    return status;
}
