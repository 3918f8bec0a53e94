/* The plate supply as JSON, schema "platewright/1", and its line as CSV.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "report/cautions.h"
#include "report/supply_report.h"
#include "report/text_buffer.h"

static const char *kind_name(plw_supply_kind kind) {
    static const char *const names[] = {"stiff", "source", "readings", "rectifier"};
    return names[kind];
}

static double known(bool is_known, double value) {
    return is_known ? value : (double)NAN;
}

static bool knows_ripple(const plw_supply_answer *a) {
    return a->has_state && !a->supply->reservoir_assumed;
}

static void put_line(const plw_json_sink *s, const plw_supply_answer *a) {
    json_t *line = json_array();
    for (size_t i = 0; i < a->line_points; i++) {
        const plw_json_sink point = {json_object(), s->failed};
        plw_json_put_number(&point, "amps", a->line[i].amps);
        plw_json_put_number(&point, "volts", a->line[i].volts);
        plw_json_put_number(&point, "ripple_volts_peak_to_peak", a->line[i].ripple_volts_peak_to_peak);
        plw_json_append(line, point.object, s->failed);
    }
    plw_json_put(s, "line", line);
}

static void put_dummy(const plw_json_sink *s, const plw_supply_answer *a) {
    if (!a->has_dummy) {
        plw_json_put(s, "dummy_load", json_null());
        return;
    }
    const plw_json_sink d = plw_json_object_in(s, "dummy_load");
    plw_json_put_number(&d, "ohms", a->dummy.ohms);
    plw_json_put_number(&d, "watts", a->dummy.watts);
    plw_json_put_number(&d, "rating_watts", a->dummy.rating_watts);
    plw_json_put_number(&d, "expected_volts", a->dummy.expected_volts);
}

static void put_bleeder(const plw_json_sink *s, const plw_supply_answer *a) {
    if (!a->has_bleeder) {
        plw_json_put(s, "bleeder", json_null());
        return;
    }
    const plw_json_sink b = plw_json_object_in(s, "bleeder");
    plw_json_put_number(&b, "ohms", a->bleeder.ohms);
    plw_json_put_number(&b, "watts", a->bleeder.watts);
    plw_json_put_number(&b, "seconds_to_60_volts", a->bleeder.seconds_to_60_volts);
}

static void put_transformer(const plw_json_sink *s, const plw_supply_answer *a) {
    if (!a->has_transformer) {
        return;
    }
    const plw_transformer *t = &a->transformer;
    const plw_json_sink w = plw_json_object_in(s, "transformer_wanted");
    plw_json_put_number(&w, "off_load_rms_volts", t->off_load_rms_volts);
    plw_json_put_number(&w, "rated_rms_volts", t->rated_rms_volts);
    plw_json_put_number(&w, "rms_amps", t->rms_amps);
    plw_json_put_number(&w, "secondary_volt_amperes", t->secondary_va);
    plw_json_put_number(&w, "path_ohms", t->path_ohms);
    plw_json_put_number(&w, "usual_rms_volts", t->usual_rms_volts);
    plw_json_put_number(&w, "usual_volts", t->usual_volts);
}

void plw_json_put_supply(const plw_json_sink *root, const plw_supply_answer *a) {
    const plw_json_sink s = plw_json_object_in(root, "supply");
    const plw_rectifier_node *output = a->has_state ? &a->state.node[a->state.nodes - 1] : NULL;
    plw_json_put(&s, "kind", json_string(kind_name(a->supply->line.kind)));
    plw_json_put(&s, "transformerless", json_boolean(a->supply->transformerless));
    plw_json_put_number(&s, "off_load_volts", a->off_load_volts);
    plw_json_put_number(&s, "off_load_volts_mains_high", a->off_load_high_volts);
    plw_json_put_number(&s, "off_load_volts_bleeder_drawing", a->bled_volts);
    plw_json_put_number(&s, "off_load_volts_bleeder_drawing_mains_high", a->bled_high_volts);
    plw_json_put_number(&s, "loaded_volts", a->volts);
    plw_json_put_number(&s, "amps", a->amps);
    plw_json_put_number(&s, "ripple_volts_peak_to_peak",
                        knows_ripple(a) && output != NULL ? output->ripple_peak_to_peak_volts : (double)NAN);
    plw_json_put_number(&s, "source_ohms", a->source_ohms);
    plw_json_put_number(&s, "winding_rms_amps", known(a->has_state, a->state.winding_rms_amps));
    plw_json_put_number(&s, "diode_peak_amps", known(a->has_state, a->state.diode_peak_amps));
    plw_json_put_number(&s, "uncertainty_volts", a->volts_error);
    if (a->supply->has_winding) {
        plw_json_put_number(&s, "winding_rms_volts", a->supply->parts.winding_rms_volts);
        plw_json_put_number(&s, "path_ohms", a->supply->parts.path_ohms);
        plw_json_put_number(&s, "path_ohms_uncertainty",
                            known(a->supply->estimated, a->supply->estimate.path_ohms_error));
    }
    put_line(&s, a);
    put_dummy(&s, a);
    put_bleeder(&s, a);
    put_transformer(&s, a);
}

void plw_json_append_supply_ratings(json_t *ratings, const plw_supply_answer *a, bool *failed) {
    for (size_t i = 0; i < a->checks_count; i++) {
        const plw_supply_check *check = &a->checks[i];
        char name[64];
        const plw_json_sink s = {json_object(), failed};
        plw_json_put(&s, "name", json_string(plw_supply_check_name(check, name, sizeof name)));
        plw_json_put_number(&s, "value", check->value);
        plw_json_put_number(&s, "limit", check->limit);
        plw_json_put(&s, "unit", json_string(plw_json_unit_name(check->unit)));
        plw_json_put_number(&s, "share_percent", check->share_percent);
        plw_json_put(&s, "ok", json_boolean(check->ok));
        plw_json_put(&s, "counted", json_true());
        plw_json_put(&s, "at", json_string(check->when == PLW_SUPPLY_AT_LOAD ? "idle" : "off load, mains high"));
        plw_json_append(ratings, s.object, failed);
    }
}

static void put_meanings(const plw_json_sink *root, const plw_supply_finding *f) {
    json_t *meanings = json_array();
    for (size_t i = 0; i < f->meanings; i++) {
        const plw_json_sink s = {json_object(), root->failed};
        plw_json_put_number(&s, "read_volts", f->meaning[i].read_volts);
        plw_json_put_number(&s, "loaded_volts", f->meaning[i].loaded_volts);
        plw_json_put_number(&s, "cathode_resistor_ohms", f->meaning[i].ohms);
        plw_json_append(meanings, s.object, root->failed);
    }
    plw_json_put(root, "dummy_load_readings", meanings);
}

static void put_cautions(const plw_json_sink *root, const plw_supply_finding *f) {
    json_t *cautions = json_array();
    char(*lines)[PLW_CAUTION_SIZE] = malloc(PLW_CAUTIONS_MOST * sizeof *lines);
    if (lines == NULL) {
        *root->failed = true;
    } else {
        const size_t count = plw_supply_cautions(f, lines, PLW_CAUTIONS_MOST, NULL);
        for (size_t i = 0; i < count; i++) {
            plw_json_append(cautions, json_string(lines[i]), root->failed);
        }
        free(lines);
    }
    plw_json_put(root, "cautions", cautions);
}

plw_status plw_report_supply_json(const plw_supply_finding *finding, char **text, plw_error *error) {
    bool failed = false;
    const plw_json_sink root = {json_object(), &failed};
    plw_json_put(&root, "schema", json_string("platewright/1"));
    plw_json_put_supply(&root, finding->supply);
    json_t *ratings = json_array();
    plw_json_append_supply_ratings(ratings, finding->supply, &failed);
    plw_json_put(&root, "ratings", ratings);
    put_meanings(&root, finding);
    put_cautions(&root, finding);
    return plw_json_text(root.object, failed, text, error);
}

plw_status plw_report_supply_csv(const plw_supply_finding *finding, char **text, plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    fputs("amps,volts,ripple_volts_peak_to_peak\n", buffer.file);
    for (size_t i = 0; i < finding->supply->line_points; i++) {
        const plw_supply_point *point = &finding->supply->line[i];
        plw_text_number(buffer.file, point->amps, PLW_JSON_DIGITS, "");
        fputc(',', buffer.file);
        plw_text_number(buffer.file, point->volts, PLW_JSON_DIGITS, "");
        fputc(',', buffer.file);
        plw_text_number(buffer.file, point->ripple_volts_peak_to_peak, PLW_JSON_DIGITS, "");
        fputc('\n', buffer.file);
    }
    return plw_text_end(&buffer, PLW_OK, text, error);
}
