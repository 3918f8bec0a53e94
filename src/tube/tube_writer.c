/* Tubes written as files: one canonical layout, so that a file changes only where the tube does.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/replace_file.h"
#include "base/schemas.h"
#include "platewright/catalogue.h"
#include "tube/tube_fields.h"

/* An element is indented by two spaces a level; what does not fit in one line goes on two levels further in. */
enum { LINE_MOST = 120 };

/* The text being written and the column reached. */
typedef struct {
    FILE *out;
    int column, indent;
} tube_writer;

/* ---- pieces ------------------------------------------------------------------------------------------------------ */

static void put(tube_writer *writer, const char *text) {
    fputs(text, writer->out);
    writer->column += (int)strlen(text);
}

static void new_line(tube_writer *writer, int indent) {
    fprintf(writer->out, "\n%*s", indent, "");
    writer->column = indent;
}

static const char *escape(char c) {
    switch (c) {
    case '&':
        return "&amp;";
    case '<':
        return "&lt;";
    case '>':
        return "&gt;";
    case '"':
        return "&quot;";
    case '\t':
        return "&#9;";
    case '\n':
        return "&#10;";
    case '\r':
        return "&#13;";
    default:
        return NULL;
    }
}

static void put_escaped(tube_writer *writer, const char *text) {
    for (; *text != '\0'; text++) {
        const char *escaped = escape(*text);
        if (escaped != NULL) {
            put(writer, escaped);
        } else {
            fputc(*text, writer->out);
            writer->column++;
        }
    }
}

static void begin(tube_writer *writer, const char *name) {
    fprintf(writer->out, "%*s<%s", writer->indent, "", name);
    writer->column = writer->indent + (int)strlen(name) + 1;
}

/* Begin a new line of the tag before an attribute that would pass the margin. */
static void make_room(tube_writer *writer, const char *name, const char *value) {
    const bool fresh = writer->column <= writer->indent + 3;
    if (!fresh && writer->column + (int)strlen(name) + (int)strlen(value) + 6 > LINE_MOST) {
        new_line(writer, writer->indent + 3);
    }
}

static void put_attribute(tube_writer *writer, const char *name, const char *value) {
    if (value == NULL) {
        return;
    }
    make_room(writer, name, value);
    put(writer, " ");
    put(writer, name);
    put(writer, "=\"");
    put_escaped(writer, value);
    put(writer, "\"");
}

static void put_number(tube_writer *writer, const plw_tube_field *field, double value) {
    if (!isnan(value)) {
        char text[PLW_FIELD_TEXT_SIZE];
        plw_field_format(field, value, text);
        put_attribute(writer, field->attribute, text);
    }
}

static void put_fields(tube_writer *writer, const plw_tube_field *fields, const void *structure) {
    for (; fields->attribute != NULL; fields++) {
        double value = (double)NAN;
        memcpy(&value, (const char *)structure + fields->offset, sizeof value);
        put_number(writer, fields, value);
    }
}

/* On lines of its own: source and note are long. */
static void put_provenance(tube_writer *writer, const plw_provenance *provenance) {
    new_line(writer, writer->indent + 3);
    put_attribute(writer, "how", plw_how_name(provenance->how));
    put_attribute(writer, "confidence", plw_confidence_name(provenance->confidence));
    put_attribute(writer, "source", provenance->source);
    if (provenance->note != NULL) {
        new_line(writer, writer->indent + 3);
        put_attribute(writer, "note", provenance->note);
    }
}

static void end_empty(tube_writer *writer) {
    fputs("/>\n", writer->out);
}

static void open_children(tube_writer *writer) {
    fputs(">\n", writer->out);
    writer->indent += 2;
}

static void close_children(tube_writer *writer, const char *name) {
    writer->indent -= 2;
    fprintf(writer->out, "%*s</%s>\n", writer->indent, "", name);
}

/* ---- the parts of a tube ----------------------------------------------------------------------------------------- */

static void put_pins(tube_writer *writer, const plw_tube *tube) {
    if (tube->pins_count == 0) {
        return;
    }
    begin(writer, "pins");
    put_provenance(writer, &tube->pins_provenance);
    open_children(writer);
    for (size_t i = 0; i < tube->pins_count; i++) {
        char number[16];
        snprintf(number, sizeof number, "%d", tube->pins[i].number);
        begin(writer, "pin");
        put_attribute(writer, "number", number);
        put_attribute(writer, "electrode", tube->pins[i].electrode);
        end_empty(writer);
    }
    close_children(writer, "pins");
}

static void put_heater(tube_writer *writer, const plw_tube *tube) {
    begin(writer, "heater");
    put_fields(writer, plw_heater_fields, tube);
    put_attribute(writer, "directly-heated", tube->directly_heated ? "yes" : NULL);
    put_provenance(writer, &tube->heater_provenance);
    end_empty(writer);
}

static void put_ratings(tube_writer *writer, const plw_ratings *ratings, size_t count) {
    for (size_t i = 0; i < count; i++) {
        begin(writer, "ratings");
        put_attribute(writer, "service", ratings[i].service);
        put_attribute(writer, "connection", plw_connection_name(ratings[i].connection));
        put_attribute(writer, "system", plw_rating_system_name(ratings[i].system));
        new_line(writer, writer->indent + 3);
        put_fields(writer, plw_ratings_fields, &ratings[i]);
        if (ratings[i].plate_watts_unpublished && isnan(ratings[i].plate_watts)) {
            put_attribute(writer, "plate-dissipation", PLW_NOT_PUBLISHED);
        }
        put_provenance(writer, &ratings[i].provenance);
        end_empty(writer);
    }
}

static void put_variants(tube_writer *writer, const plw_tube *tube) {
    for (size_t i = 0; i < tube->variants_count; i++) {
        const plw_variant *variant = &tube->variants[i];
        begin(writer, "variant");
        put_attribute(writer, "type", variant->type);
        open_children(writer);
        if (!isnan(variant->heater_volts)) {
            begin(writer, "heater");
            put_fields(writer, plw_variant_heater_fields, variant);
            end_empty(writer);
        }
        put_ratings(writer, variant->ratings, variant->ratings_count);
        close_children(writer, "variant");
    }
}

static void put_rows(tube_writer *writer, const plw_tube *tube) {
    for (size_t i = 0; i < tube->rows_count; i++) {
        begin(writer, "row");
        put_attribute(writer, "connection", plw_connection_name(tube->rows[i].connection));
        put_attribute(writer, "reference", tube->rows[i].filament_midpoint ? "filament-midpoint" : NULL);
        put_attribute(writer, "output", tube->rows[i].undistorted ? "undistorted" : NULL);
        put_fields(writer, plw_row_fields, &tube->rows[i]);
        put_provenance(writer, &tube->rows[i].provenance);
        end_empty(writer);
    }
}

static void put_points(tube_writer *writer, const plw_tube *tube) {
    for (size_t i = 0; i < tube->points_count; i++) {
        begin(writer, "point");
        put_attribute(writer, "kind", plw_point_kind_name(tube->points[i].kind));
        put_attribute(writer, "connection", plw_connection_name(tube->points[i].connection));
        put_fields(writer, plw_point_fields, &tube->points[i]);
        put_provenance(writer, &tube->points[i].provenance);
        end_empty(writer);
    }
}

static void put_structure(tube_writer *writer, const char *name, const plw_tube_field *fields, const void *structure) {
    begin(writer, name);
    put_fields(writer, fields, structure);
    end_empty(writer);
}

static void put_count(tube_writer *writer, const char *name, size_t count) {
    char text[24];
    snprintf(text, sizeof text, "%zu", count);
    put_attribute(writer, name, text);
}

static void put_model(tube_writer *writer, const plw_tube *tube) {
    if (!tube->has_model) {
        return;
    }
    const plw_model *model = &tube->model;
    begin(writer, "model");
    put_attribute(writer, "law", plw_law_name(model->law.kind));
    put_count(writer, "rows", model->rows_fitted);
    put_count(writer, "points", model->points_fitted);
    open_children(writer);
    for (size_t i = 0; i < plw_law_coefficient_count(model->law.kind); i++) {
        begin(writer, "coefficient");
        put_attribute(writer, "name", plw_law_coefficient_name(model->law.kind, i));
        put_number(writer, &plw_coefficient_field, model->law.coefficient[i]);
        put_number(writer, &plw_coefficient_error_field, model->relative_error[i]);
        end_empty(writer);
    }
    put_structure(writer, "fit-error", plw_model_errors_fields, &model->fit_error);
    put_structure(writer, "left-out-error", plw_model_errors_fields, &model->left_out_error);
    put_structure(writer, "region", plw_region_fields, &model->region);
    close_children(writer, "model");
}

static void put_rectifier(tube_writer *writer, const plw_tube *tube) {
    if (tube->kind != PLW_KIND_RECTIFIER) {
        return;
    }
    begin(writer, "rectifier-limits");
    put_fields(writer, plw_rectifier_limits_fields, &tube->rectifier);
    put_provenance(writer, &tube->rectifier.provenance);
    end_empty(writer);
    if (!isnan(tube->rectifier.drop_volts)) {
        begin(writer, "rectifier-drop");
        put_fields(writer, plw_rectifier_drop_fields, &tube->rectifier);
        put_provenance(writer, &tube->rectifier.drop_provenance);
        end_empty(writer);
    }
    for (size_t i = 0; i < tube->rectifier_rows_count; i++) {
        begin(writer, "rectifier-row");
        put_fields(writer, plw_rectifier_row_fields, &tube->rectifier_rows[i]);
        put_provenance(writer, &tube->rectifier_rows[i].provenance);
        end_empty(writer);
    }
}

/* ---- the whole --------------------------------------------------------------------------------------------------- */

/* A list of names with a space between, as one attribute. */
static void put_equivalents(tube_writer *writer, const plw_tube *tube) {
    for (size_t i = 0; i < tube->equivalents_count; i++) {
        put(writer, i == 0 ? " equivalents=\"" : " ");
        put_escaped(writer, tube->equivalents[i]);
    }
    put(writer, tube->equivalents_count > 0 ? "\"" : "");
}

static void put_variant_names(tube_writer *writer, const plw_tube *tube) {
    for (size_t i = 0; i < tube->variants_count; i++) {
        put(writer, i == 0 ? " variants=\"" : " ");
        put_escaped(writer, tube->variants[i].type);
    }
    put(writer, tube->variants_count > 0 ? "\"" : "");
}

static void put_tube(tube_writer *writer, const plw_tube *tube) {
    fputs("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n", writer->out);
    begin(writer, "tube");
    put_attribute(writer, "type", tube->type);
    put_equivalents(writer, tube);
    put_variant_names(writer, tube);
    put_attribute(writer, "kind", plw_tube_kind_name(tube->kind));
    put_attribute(writer, "family", tube->family);
    put_attribute(writer, "base", tube->base);
    open_children(writer);
    put_pins(writer, tube);
    put_heater(writer, tube);
    put_ratings(writer, tube->ratings, tube->ratings_count);
    put_variants(writer, tube);
    put_rows(writer, tube);
    put_points(writer, tube);
    put_model(writer, tube);
    put_rectifier(writer, tube);
    close_children(writer, "tube");
}

/* What nobody could read back is not written. */
static plw_status check_readable(const char *path, const char *text, size_t size, plw_error *error) {
    plw_xml_schema *schema = NULL;
    plw_tube *again = NULL;
    plw_status status = plw_xml_schema_parse(plw_schema_tube, &schema, error);
    if (status == PLW_OK) {
        status = plw_tube_read_memory(schema, path, text, size, &again, error);
    }
    plw_tube_free(again);
    plw_xml_schema_free(schema);
    return status;
}

plw_status plw_tube_write(const char *path, const plw_tube *tube, plw_error *error) {
    char *text = NULL;
    size_t size = 0;
    tube_writer writer = {.out = open_memstream(&text, &size)};
    if (writer.out == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", path);
    }
    put_tube(&writer, tube);
    const bool failed = ferror(writer.out) != 0;
    if (fclose(writer.out) != 0 || failed) {
        free(text);
        return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", path);
    }
    plw_status status = check_readable(path, text, size, error);
    if (status == PLW_OK) {
        status = plw_replace_file(path, text, size, error);
    }
    free(text);
    return status;
}
