/* Tube files read into memory: the shape is checked by the schema, the meaning here.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/schemas.h"
#include "platewright/catalogue.h"
#include "tube/tube_fields.h"

/* The file being read; faults gather in xml. */
typedef struct {
    plw_xml *xml;
    bool no_memory;
} tube_reader;

/* ---- pieces ------------------------------------------------------------------------------------------------------ */

static char *copy_text(tube_reader *reader, const char *text) {
    char *copy = text == NULL ? NULL : strdup(text);
    if (text != NULL && copy == NULL) {
        reader->no_memory = true;
    }
    return copy;
}

/* Zeroed room for the children of one name.  Out: *count, 0 when there are none or no memory. */
static void *room_for(tube_reader *reader, const plw_xml_element *parent, const char *name, size_t size,
                      size_t *count) {
    *count = plw_xml_count(parent, name);
    void *room = *count == 0 ? NULL : calloc(*count, size);
    if (*count > 0 && room == NULL) {
        reader->no_memory = true;
        *count = 0;
    }
    return room;
}

static void read_field(tube_reader *reader, const plw_xml_element *element, const plw_tube_field *field,
                       double *value) {
    const char *text = plw_xml_attribute(element, field->attribute);
    plw_error error = {.status = PLW_OK};
    *value = (double)NAN;
    if (text != NULL && plw_field_parse(field, text, value, &error) != PLW_OK) {
        plw_xml_fault(reader->xml, element, "%s", error.text);
    }
}

static void read_fields(tube_reader *reader, const plw_xml_element *element, const plw_tube_field *fields,
                        void *structure) {
    for (; fields->attribute != NULL; fields++) {
        double value = (double)NAN;
        read_field(reader, element, fields, &value);
        memcpy((char *)structure + fields->offset, &value, sizeof value);
    }
}

/* The place of an attribute's text among the names an enumeration has; the schema has seen to it that it is one. */
#define READ_NAME(type, element, attribute, name_of)                                                                   \
    static type read_##type(const plw_xml_element *element_, const char *attribute_) {                                 \
        const char *text = plw_xml_attribute(element_, attribute_);                                                    \
        int value = 0;                                                                                                 \
        while (text != NULL && value < 8 && strcmp(text, name_of((type)value)) != 0) {                                 \
            value++;                                                                                                   \
        }                                                                                                              \
        return (type)(value == 8 ? 0 : value);                                                                         \
    }
READ_NAME(plw_connection, element, attribute, plw_connection_name)
READ_NAME(plw_tube_kind, element, attribute, plw_tube_kind_name)
READ_NAME(plw_rating_system, element, attribute, plw_rating_system_name)
READ_NAME(plw_point_kind, element, attribute, plw_point_kind_name)
READ_NAME(plw_how, element, attribute, plw_how_name)
READ_NAME(plw_confidence, element, attribute, plw_confidence_name)
#undef READ_NAME

static void read_provenance(tube_reader *reader, const plw_xml_element *element, plw_provenance *provenance) {
    provenance->how = read_plw_how(element, "how");
    provenance->confidence = read_plw_confidence(element, "confidence");
    provenance->source = copy_text(reader, plw_xml_attribute(element, "source"));
    provenance->note = copy_text(reader, plw_xml_attribute(element, "note"));
    if (provenance->source != NULL && provenance->source[strspn(provenance->source, " \t\r\n")] == '\0') {
        plw_xml_fault(reader->xml, element, "source: is blank; name title, publisher and year");
    }
}

/* Fault an attribute that must be there.  Ret: true when it is. */
static bool require(tube_reader *reader, const plw_xml_element *element, const char *attribute, const char *why) {
    if (plw_xml_attribute(element, attribute) != NULL) {
        return true;
    }
    plw_xml_fault(reader->xml, element, "%s: the attribute '%s' is missing; %s", plw_xml_name(element), attribute, why);
    return false;
}

/* Fault an attribute that has no place here. */
static void forbid(tube_reader *reader, const plw_xml_element *element, const char *attribute, const char *why) {
    if (plw_xml_attribute(element, attribute) != NULL) {
        plw_xml_fault(reader->xml, element, "%s: the attribute '%s' has no place here; %s", plw_xml_name(element),
                      attribute, why);
    }
}

static bool has_screen(const plw_tube *tube) {
    return tube->kind == PLW_KIND_PENTODE || tube->kind == PLW_KIND_BEAM;
}

/* Voltages of the screen are given where it has a voltage of its own, and only there. */
static void check_connection(tube_reader *reader, const plw_xml_element *element, const plw_tube *tube,
                             plw_connection connection, bool screen_wanted) {
    if (connection != PLW_CONNECTION_TRIODE && !has_screen(tube)) {
        plw_xml_fault(reader->xml, element, "%s: connection: a tube without a screen is in triode connection",
                      plw_xml_name(element));
    } else if (connection == PLW_CONNECTION_TRIODE) {
        forbid(reader, element, "screen", "in triode connection the screen is at the plate");
        forbid(reader, element, "screen-current", "in triode connection the plate current is that of plate and screen");
    } else if (screen_wanted) {
        (void)require(reader, element, "screen", "give the screen voltage");
    }
}

/* ---- the parts of a tube ----------------------------------------------------------------------------------------- */

static void read_pins(tube_reader *reader, const plw_xml_element *root, plw_tube *tube) {
    const plw_xml_element *element = plw_xml_first(root, "pins");
    if (element == NULL) {
        return;
    }
    read_provenance(reader, element, &tube->pins_provenance);
    tube->pins = room_for(reader, element, "pin", sizeof *tube->pins, &tube->pins_count);
    const plw_xml_element *pin = plw_xml_first(element, "pin");
    for (size_t i = 0; i < tube->pins_count; i++, pin = plw_xml_next(pin, "pin")) {
        tube->pins[i].number = (int)strtol(plw_xml_attribute(pin, "number"), NULL, 10);
        tube->pins[i].electrode = copy_text(reader, plw_xml_attribute(pin, "electrode"));
        if (i > 0 && tube->pins[i].number <= tube->pins[i - 1].number) {
            plw_xml_fault(reader->xml, pin, "pin: the numbers must rise; %d follows %d", tube->pins[i].number,
                          tube->pins[i - 1].number);
        }
    }
}

static void read_heater(tube_reader *reader, const plw_xml_element *root, plw_tube *tube) {
    const plw_xml_element *element = plw_xml_first(root, "heater");
    read_fields(reader, element, plw_heater_fields, tube);
    read_provenance(reader, element, &tube->heater_provenance);
    const char *direct = plw_xml_attribute(element, "directly-heated");
    tube->directly_heated = direct != NULL && strcmp(direct, "yes") == 0;
    tube->rectifier.directly_heated = tube->directly_heated;
}

static void read_ratings(tube_reader *reader, const plw_xml_element *element, const plw_tube *tube,
                         plw_ratings *ratings) {
    ratings->service = copy_text(reader, plw_xml_attribute(element, "service"));
    ratings->connection = read_plw_connection(element, "connection");
    ratings->system = read_plw_rating_system(element, "system");
    const char *dissipation = plw_xml_attribute(element, "plate-dissipation");
    ratings->plate_watts_unpublished = dissipation != NULL && strcmp(dissipation, PLW_NOT_PUBLISHED) == 0;
    for (const plw_tube_field *field = plw_ratings_fields; field->attribute != NULL; field++) {
        double value = (double)NAN;
        if (!(ratings->plate_watts_unpublished && field->offset == offsetof(plw_ratings, plate_watts))) {
            read_field(reader, element, field, &value);
        }
        memcpy((char *)ratings + field->offset, &value, sizeof value);
    }
    read_provenance(reader, element, &ratings->provenance);
    check_connection(reader, element, tube, ratings->connection, false);
}

/* The first set of a type or variant is the one a stage is judged by: the main limits must be in it. */
static void check_first_ratings(tube_reader *reader, const plw_xml_element *element, const plw_tube *tube) {
    (void)require(reader, element, "plate", "give the plate voltage limit in the first ratings");
    (void)require(reader, element, "plate-dissipation",
                  "give the plate dissipation in the first ratings, or \"" PLW_NOT_PUBLISHED "\"");
    if (!has_screen(tube)) {
        return;
    }
    if (read_plw_connection(element, "connection") == PLW_CONNECTION_TRIODE) {
        plw_xml_fault(reader->xml, element, "ratings: the first ratings must be those of the pentode connection");
        return;
    }
    (void)require(reader, element, "screen", "give the screen voltage limit in the first ratings");
    (void)require(reader, element, "screen-dissipation", "give the screen dissipation in the first ratings");
}

static plw_ratings *read_all_ratings(tube_reader *reader, const plw_xml_element *parent, const plw_tube *tube,
                                     size_t *count) {
    plw_ratings *ratings = room_for(reader, parent, "ratings", sizeof *ratings, count);
    const plw_xml_element *element = plw_xml_first(parent, "ratings");
    for (size_t i = 0; i < *count; i++, element = plw_xml_next(element, "ratings")) {
        read_ratings(reader, element, tube, &ratings[i]);
        if (i == 0) {
            check_first_ratings(reader, element, tube);
        }
    }
    return ratings;
}

static void read_variants(tube_reader *reader, const plw_xml_element *root, plw_tube *tube) {
    tube->variants = room_for(reader, root, "variant", sizeof *tube->variants, &tube->variants_count);
    const plw_xml_element *element = plw_xml_first(root, "variant");
    for (size_t i = 0; i < tube->variants_count; i++, element = plw_xml_next(element, "variant")) {
        plw_variant *variant = &tube->variants[i];
        variant->type = copy_text(reader, plw_xml_attribute(element, "type"));
        const plw_xml_element *heater = plw_xml_first(element, "heater");
        if (heater == NULL) {
            plw_fields_clear(plw_variant_heater_fields, variant);
        } else {
            read_fields(reader, heater, plw_variant_heater_fields, variant);
        }
        variant->ratings = read_all_ratings(reader, element, tube, &variant->ratings_count);
    }
}

/* The root names the variants for those who read no further: both lists must agree. */
static void check_variant_names(tube_reader *reader, const plw_xml_element *root, const plw_tube *tube) {
    const char *at = plw_xml_attribute(root, "variants");
    at = at == NULL ? "" : at;
    bool agree = true;
    for (size_t i = 0; i < tube->variants_count && tube->variants[i].type != NULL; i++) {
        at += strspn(at, " ");
        const size_t length = strcspn(at, " ");
        agree = agree && length == strlen(tube->variants[i].type) && strncmp(at, tube->variants[i].type, length) == 0;
        at += length;
    }
    if (!agree || at[strspn(at, " ")] != '\0') {
        plw_xml_fault(reader->xml, root,
                      "tube: the attribute 'variants' must list the types of the variant elements, in their order");
    }
}

static void read_row(tube_reader *reader, const plw_xml_element *element, const plw_tube *tube, plw_row *row) {
    row->connection = read_plw_connection(element, "connection");
    read_fields(reader, element, plw_row_fields, row);
    const char *reference = plw_xml_attribute(element, "reference");
    row->filament_midpoint = reference != NULL && strcmp(reference, "filament-midpoint") == 0;
    row->undistorted = plw_xml_attribute(element, "output") != NULL;
    read_provenance(reader, element, &row->provenance);
    check_connection(reader, element, tube, row->connection, true);
    if (plw_xml_attribute(element, "grid") == NULL && plw_xml_attribute(element, "cathode-resistor") == NULL) {
        plw_xml_fault(reader->xml, element, "row: neither 'grid' nor 'cathode-resistor' is given; one is needed");
    }
    if (row->grid_volts > 0.0) {
        plw_xml_fault(reader->xml, element, "row: 'grid' %gV is positive: write %gV", row->grid_volts,
                      -row->grid_volts);
    }
    if (plw_xml_attribute(element, "power") != NULL) {
        (void)require(reader, element, "load", "a power is worth nothing without its load");
    }
}

static void read_rows(tube_reader *reader, const plw_xml_element *root, plw_tube *tube) {
    tube->rows = room_for(reader, root, "row", sizeof *tube->rows, &tube->rows_count);
    const plw_xml_element *element = plw_xml_first(root, "row");
    for (size_t i = 0; i < tube->rows_count; i++, element = plw_xml_next(element, "row")) {
        read_row(reader, element, tube, &tube->rows[i]);
    }
}

static void read_point(tube_reader *reader, const plw_xml_element *element, const plw_tube *tube, plw_point *point) {
    point->kind = read_plw_point_kind(element, "kind");
    point->connection = read_plw_connection(element, "connection");
    read_fields(reader, element, plw_point_fields, point);
    read_provenance(reader, element, &point->provenance);
    const bool plain = point->kind != PLW_POINT_REMARK;
    check_connection(reader, element, tube, point->connection, plain);
    if (!plain) {
        return;
    }
    (void)require(reader, element, "plate", "give the plate voltage, or make it a remark");
    (void)require(reader, element, "grid", "give the grid voltage, or make it a remark");
    if (point->kind == PLW_POINT_INNER_MU) {
        (void)require(reader, element, "mu", "give the mu of screen to grid 1");
    } else {
        (void)require(reader, element, "plate-current", "give the plate current, or make it a remark");
    }
}

static void read_points(tube_reader *reader, const plw_xml_element *root, plw_tube *tube) {
    tube->points = room_for(reader, root, "point", sizeof *tube->points, &tube->points_count);
    const plw_xml_element *element = plw_xml_first(root, "point");
    for (size_t i = 0; i < tube->points_count; i++, element = plw_xml_next(element, "point")) {
        read_point(reader, element, tube, &tube->points[i]);
    }
}

/* ---- the law ----------------------------------------------------------------------------------------------------- */

static void read_coefficients(tube_reader *reader, const plw_xml_element *element, plw_model *model) {
    const size_t count = plw_law_coefficient_count(model->law.kind);
    size_t index = 0;
    for (const plw_xml_element *child = plw_xml_first(element, "coefficient"); child != NULL;
         child = plw_xml_next(child, "coefficient"), index++) {
        const char *name = plw_xml_attribute(child, "name");
        const char *wanted = index < count ? plw_law_coefficient_name(model->law.kind, index) : NULL;
        if (wanted == NULL || strcmp(name, wanted) != 0) {
            plw_xml_fault(reader->xml, child, "coefficient: '%.40s' stands where %s%s is expected", name,
                          wanted == NULL ? "no further one" : "", wanted == NULL ? "" : wanted);
            return;
        }
        read_field(reader, child, &plw_coefficient_field, &model->law.coefficient[index]);
        read_field(reader, child, &plw_coefficient_error_field, &model->relative_error[index]);
    }
    if (index < count) {
        plw_xml_fault(reader->xml, element, "model: the coefficient '%s' is missing",
                      plw_law_coefficient_name(model->law.kind, index));
        return;
    }
    plw_error error = {.status = PLW_OK};
    if (plw_law_validate(&model->law, &error) != PLW_OK) {
        plw_xml_fault(reader->xml, element, "model: %.400s", error.text);
    }
}

static void read_model(tube_reader *reader, const plw_xml_element *root, plw_tube *tube) {
    const plw_xml_element *element = plw_xml_first(root, "model");
    if (element == NULL) {
        return;
    }
    plw_model *model = &tube->model;
    model->law.kind = has_screen(tube) ? PLW_LAW_PENTODE : PLW_LAW_TRIODE;
    const char *law = plw_xml_attribute(element, "law");
    if (strcmp(law, plw_law_name(model->law.kind)) != 0) {
        plw_xml_fault(reader->xml, element, "model: law: '%.40s' is not the law of this kind of tube, '%s'", law,
                      plw_law_name(model->law.kind));
        return;
    }
    for (size_t i = 0; i < PLW_LAW_COEFFICIENTS_MOST; i++) {
        model->relative_error[i] = (double)NAN;
    }
    read_coefficients(reader, element, model);
    read_fields(reader, plw_xml_first(element, "fit-error"), plw_model_errors_fields, &model->fit_error);
    read_fields(reader, plw_xml_first(element, "left-out-error"), plw_model_errors_fields, &model->left_out_error);
    read_fields(reader, plw_xml_first(element, "region"), plw_region_fields, &model->region);
    model->rows_fitted = (size_t)strtoul(plw_xml_attribute(element, "rows"), NULL, 10);
    model->points_fitted = (size_t)strtoul(plw_xml_attribute(element, "points"), NULL, 10);
    tube->has_model = true;
}

/* ---- rectifiers -------------------------------------------------------------------------------------------------- */

static void read_rectifier(tube_reader *reader, const plw_xml_element *root, plw_tube *tube) {
    plw_rectifier_data *data = &tube->rectifier;
    plw_fields_clear(plw_rectifier_limits_fields, data);
    plw_fields_clear(plw_rectifier_drop_fields, data);
    data->perveance = (double)NAN;
    const plw_xml_element *limits = plw_xml_first(root, "rectifier-limits");
    const plw_xml_element *drop = plw_xml_first(root, "rectifier-drop");
    if (limits != NULL) {
        read_fields(reader, limits, plw_rectifier_limits_fields, data);
        read_provenance(reader, limits, &data->provenance);
        (void)require(reader, limits, "peak-inverse", "give the peak inverse voltage");
        (void)require(reader, limits, "peak-plate-current", "give the peak plate current");
        (void)require(reader, limits, "output-current", "give the output current");
    }
    if (drop != NULL) {
        read_fields(reader, drop, plw_rectifier_drop_fields, data);
        read_provenance(reader, drop, &data->drop_provenance);
        data->perveance = data->drop_amps / pow(data->drop_volts, 1.5); /* the three-halves law of Child and Langmuir */
    }
    tube->rectifier_rows =
        room_for(reader, root, "rectifier-row", sizeof *tube->rectifier_rows, &tube->rectifier_rows_count);
    const plw_xml_element *element = plw_xml_first(root, "rectifier-row");
    for (size_t i = 0; i < tube->rectifier_rows_count; i++, element = plw_xml_next(element, "rectifier-row")) {
        read_fields(reader, element, plw_rectifier_row_fields, &tube->rectifier_rows[i]);
        read_provenance(reader, element, &tube->rectifier_rows[i].provenance);
        if (plw_xml_attribute(element, "half-current") != NULL || plw_xml_attribute(element, "half-output") != NULL) {
            (void)require(reader, element, "half-current", "the half-load figures go together");
            (void)require(reader, element, "half-output", "the half-load figures go together");
        }
    }
}

/* Each kind has its elements: ratings, rows, points and law for an amplifier tube, limits and drop for a rectifier. */
static void check_kind(tube_reader *reader, const plw_xml_element *root, const plw_tube *tube) {
    static const char *const amplifier_parts[] = {"ratings", "variant", "row", "point", "model"};
    static const char *const rectifier_parts[] = {"rectifier-limits", "rectifier-drop", "rectifier-row"};
    const bool rectifier = tube->kind == PLW_KIND_RECTIFIER;
    const char *const *strangers = rectifier ? amplifier_parts : rectifier_parts;
    const size_t count =
        rectifier ? sizeof amplifier_parts / sizeof *amplifier_parts : sizeof rectifier_parts / sizeof *rectifier_parts;
    for (size_t i = 0; i < count; i++) {
        const plw_xml_element *stranger = plw_xml_first(root, strangers[i]);
        if (stranger != NULL) {
            plw_xml_fault(reader->xml, stranger, "%s: has no place in a %s", strangers[i],
                          plw_tube_kind_name(tube->kind));
        }
    }
    const char *needed = rectifier ? "rectifier-limits" : "ratings";
    if (plw_xml_first(root, needed) == NULL) {
        plw_xml_fault(reader->xml, root, "tube: the element '%s' is missing; a %s must have it", needed,
                      plw_tube_kind_name(tube->kind));
    }
}

/* ---- the whole --------------------------------------------------------------------------------------------------- */

/* Split names at spaces. */
static void read_equivalents(tube_reader *reader, const char *names, plw_tube *tube) {
    if (names == NULL) {
        return;
    }
    tube->equivalents = calloc(strlen(names) / 2 + 1, sizeof *tube->equivalents);
    if (tube->equivalents == NULL) {
        reader->no_memory = true;
        return;
    }
    for (const char *at = names + strspn(names, " "); *at != '\0'; at += strspn(at, " ")) {
        const size_t length = strcspn(at, " ");
        char *name = strndup(at, length);
        if (name == NULL) {
            reader->no_memory = true;
            return;
        }
        tube->equivalents[tube->equivalents_count++] = name;
        at += length;
    }
}

static void read_root(tube_reader *reader, const plw_xml_element *root, plw_tube *tube) {
    tube->type = copy_text(reader, plw_xml_attribute(root, "type"));
    tube->kind = read_plw_tube_kind(root, "kind");
    tube->family = copy_text(reader, plw_xml_attribute(root, "family"));
    tube->base = copy_text(reader, plw_xml_attribute(root, "base"));
    read_equivalents(reader, plw_xml_attribute(root, "equivalents"), tube);
    check_kind(reader, root, tube);
    read_pins(reader, root, tube);
    read_heater(reader, root, tube);
    tube->ratings = read_all_ratings(reader, root, tube, &tube->ratings_count);
    read_variants(reader, root, tube);
    check_variant_names(reader, root, tube);
    read_rows(reader, root, tube);
    read_points(reader, root, tube);
    read_model(reader, root, tube);
    read_rectifier(reader, root, tube);
}

/* Out: *tube when PLW_OK.  xml is freed. */
static plw_status read_document(plw_xml *xml, const char *name, plw_tube **tube, plw_error *error) {
    tube_reader reader = {.xml = xml};
    plw_tube *made = calloc(1, sizeof *made);
    if (made == NULL) {
        reader.no_memory = true;
    } else {
        made->file = copy_text(&reader, name);
        read_root(&reader, plw_xml_root(xml), made);
    }
    const plw_status status =
        reader.no_memory ? plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", name) : plw_xml_verdict(xml, error);
    plw_xml_free(xml);
    if (status != PLW_OK) {
        plw_tube_free(made);
        return status;
    }
    *tube = made;
    return PLW_OK;
}

plw_status plw_tube_read_memory(const plw_xml_schema *schema, const char *name, const char *text, size_t size,
                                plw_tube **tube, plw_error *error) {
    plw_xml *xml = NULL;
    const plw_status status = plw_xml_read_memory(name, text, size, schema, &xml, error);
    return status == PLW_OK ? read_document(xml, name, tube, error) : status;
}

plw_status plw_tube_read_with(const plw_xml_schema *schema, const char *path, plw_tube **tube, plw_error *error) {
    plw_xml *xml = NULL;
    const plw_status status = plw_xml_read_file(path, PLW_FILE_SIZE_MOST, schema, &xml, error);
    return status == PLW_OK ? read_document(xml, path, tube, error) : status;
}

plw_status plw_tube_read(const char *path, plw_tube **tube, plw_error *error) {
    plw_xml_schema *schema = NULL;
    plw_status status = plw_xml_schema_parse(plw_schema_tube, &schema, error);
    if (status == PLW_OK) {
        status = plw_tube_read_with(schema, path, tube, error);
    }
    plw_xml_schema_free(schema);
    return status;
}
