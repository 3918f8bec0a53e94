/* The catalogue as JSON, schema "platewright/1": the list, one tube, types like one.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <jansson.h>
#include <math.h>
#include <stdlib.h>

#include "platewright/tube_report.h"
#include "report/json_sink.h"

enum { WORDS_SIZE = 1024 };

static void put_text(const plw_json_sink *s, const char *name, const char *text) {
    plw_json_put(s, name, text == NULL ? json_null() : json_string(text));
}

static void put_source(const plw_json_sink *parent, const char *name, const plw_provenance *provenance) {
    if (provenance->source == NULL) {
        plw_json_put(parent, name, json_null());
        return;
    }
    const plw_json_sink s = plw_json_object_in(parent, name);
    put_text(&s, "title", provenance->source);
    put_text(&s, "how", plw_how_name(provenance->how));
    put_text(&s, "confidence", plw_confidence_name(provenance->confidence));
    put_text(&s, "note", provenance->note);
}

/* ---- the list ---------------------------------------------------------------------------------------------------- */

static void put_entry(const plw_json_sink *s, plw_tube_entry entry) {
    const plw_tube *tube = entry.tube;
    const plw_ratings *ratings = plw_tube_entry_ratings(entry);
    const double unknown = (double)NAN;
    const bool rectifier = tube->kind == PLW_KIND_RECTIFIER;
    put_text(s, "type", plw_tube_entry_type(entry));
    put_text(s, "variant_of", entry.variant < 0 ? NULL : tube->type);
    put_text(s, "kind", plw_tube_kind_name(tube->kind));
    put_text(s, "base", tube->base);
    plw_json_put_number(s, "plate_volts", ratings == NULL ? unknown : ratings->plate_volts);
    plw_json_put_number(s, "plate_watts", ratings == NULL ? unknown : ratings->plate_watts);
    plw_json_put_number(s, "screen_volts", ratings == NULL ? unknown : ratings->screen_volts);
    plw_json_put_number(s, "screen_watts", ratings == NULL ? unknown : ratings->screen_watts);
    plw_json_put_number(s, "output_amps", rectifier ? tube->rectifier.output_amps : unknown);
    plw_json_put_number(s, "heater_volts", plw_tube_entry_heater_volts(entry));
    plw_json_put_number(s, "heater_amps", plw_tube_entry_heater_amps(entry));
    plw_json_put_number(s, "fit_error_percent",
                        tube->has_model ? tube->model.fit_error.plate_current_percent : unknown);
    plw_json_put_number(s, "left_out_error_percent",
                        tube->has_model ? tube->model.left_out_error.plate_current_percent : unknown);
    json_t *names = json_array();
    for (size_t i = 0; entry.variant < 0 && i < tube->equivalents_count; i++) {
        plw_json_append(names, json_string(tube->equivalents[i]), s->failed);
    }
    plw_json_put(s, "equivalents", names);
}

plw_status plw_tubes_json(const plw_tube_entry *entries, size_t count, char **text, plw_error *error) {
    bool failed = false;
    const plw_json_sink root = {json_object(), &failed};
    put_text(&root, "schema", "platewright/1");
    json_t *tubes = json_array();
    for (size_t i = 0; i < count; i++) {
        const plw_json_sink s = {json_object(), &failed};
        put_entry(&s, entries[i]);
        plw_json_append(tubes, s.object, &failed);
    }
    plw_json_put(&root, "tubes", tubes);
    return plw_json_text(root.object, failed, text, error);
}

/* ---- types like one ---------------------------------------------------------------------------------------------- */

static void put_ratios(const plw_json_sink *parent, const plw_nearness *n) {
    static const char *const names[PLW_NEAR_PARTS] = {[PLW_NEAR_PLATE_WATTS] = "plate_watts",
                                                      [PLW_NEAR_PLATE_VOLTS] = "plate_volts",
                                                      [PLW_NEAR_SCREEN_VOLTS] = "screen_volts",
                                                      [PLW_NEAR_ZERO_BIAS] = "zero_bias_amps",
                                                      [PLW_NEAR_MU] = "mu",
                                                      [PLW_NEAR_BIAS] = "grid_volts",
                                                      [PLW_NEAR_DRIVE] = "drive_volts",
                                                      [PLW_NEAR_HEATER_VOLTS] = "heater_volts",
                                                      [PLW_NEAR_HEATER_AMPS] = "heater_amps",
                                                      [PLW_NEAR_OUTPUT_AMPS] = "output_amps",
                                                      [PLW_NEAR_INVERSE_VOLTS] = "peak_inverse_volts",
                                                      [PLW_NEAR_DROP] = "drop_volts"};
    const plw_json_sink s = plw_json_object_in(parent, "ratios");
    for (int part = 0; part < PLW_NEAR_PARTS; part++) {
        plw_json_put_number(&s, names[part], n->ratio[part]);
    }
}

static void put_near(const plw_json_sink *s, plw_tube_entry wanted, const plw_near_tube *near) {
    static const char *const bases[] = {[PLW_BASE_SAME] = "same",
                                        [PLW_BASE_PINS_UNKNOWN] = "pins unknown",
                                        [PLW_BASE_OTHER_PINS] = "other pins",
                                        [PLW_BASE_OTHER] = "other"};
    char words[WORDS_SIZE];
    put_entry(s, near->entry);
    plw_json_put_number(s, "distance", near->nearness.distance);
    put_text(s, "base_match", bases[near->nearness.base]);
    plw_json_put_number(s, "grid_volts", near->nearness.grid_volts);
    put_ratios(s, &near->nearness);
    put_text(s, "differences", plw_nearness_words(wanted, near, words, sizeof words));
}

plw_status plw_tubes_like_json(plw_tube_entry wanted, const plw_near_tube *near, size_t count, char **text,
                               plw_error *error) {
    bool failed = false;
    const plw_json_sink root = {json_object(), &failed};
    put_text(&root, "schema", "platewright/1");
    const plw_json_sink like = plw_json_object_in(&root, "like");
    put_entry(&like, wanted);
    if (count > 0) {
        const plw_nearness *n = &near[0].nearness;
        const plw_json_sink point = plw_json_object_in(&like, "compared_at");
        plw_json_put_number(&point, "plate_volts", n->plate_volts);
        plw_json_put_number(&point, "screen_volts", n->screen_volts);
        plw_json_put_number(&point, "cathode_amps", n->cathode_amps);
        plw_json_put_number(&point, "grid_volts", n->wanted_grid_volts);
    }
    json_t *tubes = json_array();
    for (size_t i = 0; i < count; i++) {
        const plw_json_sink s = {json_object(), &failed};
        put_near(&s, wanted, &near[i]);
        plw_json_append(tubes, s.object, &failed);
    }
    plw_json_put(&root, "tubes", tubes);
    return plw_json_text(root.object, failed, text, error);
}

/* ---- one tube ---------------------------------------------------------------------------------------------------- */

static json_t *pins_array(const plw_tube *tube, bool *failed) {
    json_t *pins = json_array();
    for (size_t i = 0; i < tube->pins_count; i++) {
        const plw_json_sink s = {json_object(), failed};
        plw_json_put(&s, "number", json_integer(tube->pins[i].number));
        put_text(&s, "electrode", tube->pins[i].electrode);
        plw_json_append(pins, s.object, failed);
    }
    return pins;
}

static json_t *ratings_array(const plw_ratings *ratings, size_t count, bool *failed) {
    json_t *array = json_array();
    for (size_t i = 0; i < count; i++) {
        const plw_ratings *r = &ratings[i];
        const plw_json_sink s = {json_object(), failed};
        put_text(&s, "service", r->service);
        put_text(&s, "connection", plw_connection_name(r->connection));
        put_text(&s, "system", plw_rating_system_name(r->system));
        plw_json_put_number(&s, "plate_volts", r->plate_volts);
        plw_json_put_number(&s, "screen_volts", r->screen_volts);
        plw_json_put_number(&s, "plate_watts", r->plate_watts);
        plw_json_put_number(&s, "screen_watts", r->screen_watts);
        plw_json_put_number(&s, "screen_watts_full_drive", r->screen_watts_full_drive);
        plw_json_put_number(&s, "total_watts", r->total_watts);
        plw_json_put_number(&s, "cathode_amps", r->cathode_amps);
        plw_json_put_number(&s, "grid_ohms_fixed_bias", r->grid_ohms_fixed_bias);
        plw_json_put_number(&s, "grid_ohms_cathode_bias", r->grid_ohms_cathode_bias);
        plw_json_put_number(&s, "heater_cathode_volts", r->heater_cathode_volts);
        put_source(&s, "source", &r->provenance);
        plw_json_append(array, s.object, failed);
    }
    return array;
}

static json_t *variants_array(const plw_tube *tube, bool *failed) {
    json_t *variants = json_array();
    for (size_t i = 0; i < tube->variants_count; i++) {
        const plw_json_sink s = {json_object(), failed};
        const plw_tube_entry entry = {tube, (int)i};
        put_text(&s, "type", tube->variants[i].type);
        plw_json_put_number(&s, "heater_volts", plw_tube_entry_heater_volts(entry));
        plw_json_put_number(&s, "heater_amps", plw_tube_entry_heater_amps(entry));
        plw_json_put(&s, "ratings", ratings_array(tube->variants[i].ratings, tube->variants[i].ratings_count, failed));
        plw_json_append(variants, s.object, failed);
    }
    return variants;
}

static json_t *rows_array(const plw_tube *tube, bool *failed) {
    json_t *rows = json_array();
    for (size_t i = 0; i < tube->rows_count; i++) {
        const plw_row *row = &tube->rows[i];
        const plw_json_sink s = {json_object(), failed};
        put_text(&s, "connection", plw_connection_name(row->connection));
        plw_json_put_number(&s, "plate_volts", row->plate_volts);
        plw_json_put_number(&s, "screen_volts", row->screen_volts);
        plw_json_put_number(&s, "grid_volts", row->grid_volts);
        plw_json_put_number(&s, "cathode_resistor_ohms", row->cathode_resistor_ohms);
        plw_json_put_number(&s, "drive_peak_volts", row->drive_peak_volts);
        plw_json_put_number(&s, "plate_amps", row->plate_amps);
        plw_json_put_number(&s, "plate_amps_full_drive", row->plate_amps_full_drive);
        plw_json_put_number(&s, "screen_amps", row->screen_amps);
        plw_json_put_number(&s, "screen_amps_full_drive", row->screen_amps_full_drive);
        plw_json_put_number(&s, "plate_resistance_ohms", row->plate_resistance_ohms);
        plw_json_put_number(&s, "gm_siemens", row->gm_siemens);
        plw_json_put_number(&s, "mu", row->mu);
        plw_json_put_number(&s, "load_ohms", row->load_ohms);
        plw_json_put_number(&s, "power_watts", row->power_watts);
        plw_json_put_number(&s, "thd_percent", row->thd_percent);
        put_source(&s, "source", &row->provenance);
        plw_json_append(rows, s.object, failed);
    }
    return rows;
}

static json_t *points_array(const plw_tube *tube, bool *failed) {
    json_t *points = json_array();
    for (size_t i = 0; i < tube->points_count; i++) {
        const plw_point *point = &tube->points[i];
        const plw_json_sink s = {json_object(), failed};
        put_text(&s, "kind", plw_point_kind_name(point->kind));
        put_text(&s, "connection", plw_connection_name(point->connection));
        plw_json_put_number(&s, "plate_volts", point->plate_volts);
        plw_json_put_number(&s, "screen_volts", point->screen_volts);
        plw_json_put_number(&s, "grid_volts", point->grid_volts);
        plw_json_put_number(&s, "plate_amps", point->plate_amps);
        plw_json_put_number(&s, "screen_amps", point->screen_amps);
        plw_json_put_number(&s, "plate_resistance_ohms", point->plate_resistance_ohms);
        plw_json_put_number(&s, "gm_siemens", point->gm_siemens);
        plw_json_put_number(&s, "mu", point->mu);
        put_source(&s, "source", &point->provenance);
        plw_json_append(points, s.object, failed);
    }
    return points;
}

static void put_errors(const plw_json_sink *parent, const char *name, const plw_model_errors *errors) {
    const plw_json_sink s = plw_json_object_in(parent, name);
    plw_json_put_number(&s, "plate_current_percent", errors->plate_current_percent);
    plw_json_put_number(&s, "screen_current_percent", errors->screen_current_percent);
    plw_json_put_number(&s, "power_percent", errors->power_percent);
    plw_json_put_number(&s, "distortion_points", errors->distortion_points);
}

static void put_model(const plw_json_sink *root, const plw_tube *tube) {
    const plw_model *model = &tube->model;
    if (!tube->has_model) {
        plw_json_put(root, "model", json_null());
        return;
    }
    const plw_json_sink s = plw_json_object_in(root, "model");
    put_text(&s, "law", plw_law_name(model->law.kind));
    const plw_json_sink coefficients = plw_json_object_in(&s, "coefficients");
    const plw_json_sink errors = plw_json_object_in(&s, "relative_errors");
    for (size_t i = 0; i < plw_law_coefficient_count(model->law.kind); i++) {
        const char *name = plw_law_coefficient_name(model->law.kind, i);
        plw_json_put_number(&coefficients, name, model->law.coefficient[i]);
        plw_json_put_number(&errors, name, model->relative_error[i]);
    }
    put_errors(&s, "fit_error", &model->fit_error);
    put_errors(&s, "left_out_error", &model->left_out_error);
    const plw_json_sink region = plw_json_object_in(&s, "region");
    plw_json_put_number(&region, "plate_volts_least", model->region.plate_volts_least);
    plw_json_put_number(&region, "plate_volts_most", model->region.plate_volts_most);
    plw_json_put_number(&region, "screen_volts_least", model->region.screen_volts_least);
    plw_json_put_number(&region, "screen_volts_most", model->region.screen_volts_most);
    plw_json_put_number(&region, "plate_amps_least", model->region.plate_amps_least);
    plw_json_put_number(&region, "plate_amps_most", model->region.plate_amps_most);
    plw_json_put_number(&s, "rows_fitted", (double)model->rows_fitted);
    plw_json_put_number(&s, "points_fitted", (double)model->points_fitted);
}

static void put_rectifier(const plw_json_sink *root, const plw_tube *tube) {
    if (tube->kind != PLW_KIND_RECTIFIER) {
        plw_json_put(root, "rectifier", json_null());
        return;
    }
    const plw_rectifier_data *data = &tube->rectifier;
    const plw_json_sink s = plw_json_object_in(root, "rectifier");
    plw_json_put_number(&s, "peak_inverse_volts", data->peak_inverse_volts);
    plw_json_put_number(&s, "peak_plate_amps", data->peak_plate_amps);
    plw_json_put_number(&s, "output_amps", data->output_amps);
    plw_json_put_number(&s, "plate_rms_volts", data->plate_rms_volts);
    plw_json_put_number(&s, "least_supply_ohms", data->least_supply_ohms);
    plw_json_put_number(&s, "most_reservoir_farads", data->most_reservoir_farads);
    plw_json_put_number(&s, "drop_volts", data->drop_volts);
    plw_json_put_number(&s, "drop_amps", data->drop_amps);
    put_source(&s, "source", &data->provenance);
    put_source(&s, "drop_source", &data->drop_provenance);
}

plw_status plw_tube_json(const plw_tube *tube, char **text, plw_error *error) {
    bool failed = false;
    const plw_json_sink root = {json_object(), &failed};
    put_text(&root, "schema", "platewright/1");
    const plw_json_sink s = plw_json_object_in(&root, "tube");
    put_entry(&s, (plw_tube_entry){tube, -1});
    plw_json_put(&s, "directly_heated", json_boolean(tube->directly_heated));
    put_source(&s, "heater_source", &tube->heater_provenance);
    plw_json_put(&s, "pins", pins_array(tube, &failed));
    put_source(&s, "pins_source", &tube->pins_provenance);
    plw_json_put(&s, "ratings", ratings_array(tube->ratings, tube->ratings_count, &failed));
    plw_json_put(&s, "variants", variants_array(tube, &failed));
    put_rectifier(&s, tube);
    plw_json_put(&s, "rows", rows_array(tube, &failed));
    plw_json_put(&s, "points", points_array(tube, &failed));
    put_model(&s, tube);
    return plw_json_text(root.object, failed, text, error);
}
