/* A stage in words: entries, and the stage file (XML) that holds them.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/stage_entries.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/schemas.h"
#include "base/xml_file.h"
#include "report/text_buffer.h"

enum { TEXT_LENGTH_MOST = 60 };

static plw_status out_of_memory(plw_error *error) {
    (void)plw_fail(error, PLW_E_NO_MEMORY, "stage: out of memory");
    return PLW_E_NO_MEMORY;
}

plw_status plw_stage_description_new(plw_stage_description **description, plw_error *error) {
    plw_stage_description *made = calloc(1, sizeof *made);
    if (made == NULL) {
        return out_of_memory(error);
    }
    *description = made;
    return PLW_OK;
}

void plw_stage_description_free(plw_stage_description *description) {
    if (description != NULL) {
        for (size_t i = 0; i < description->count; i++) {
            free(description->entry[i].text);
        }
        free(description->entry);
        free(description->file);
        free(description->note);
        free(description);
    }
}

/* ---- entries ----------------------------------------------------------------------------------------------------- */

const plw_stage_entry *plw_stage_entry_first(const plw_stage_description *description, const char *name) {
    for (size_t i = 0; i < description->count; i++) {
        if (strcmp(description->entry[i].type->name, name) == 0) {
            return &description->entry[i];
        }
    }
    return NULL;
}

void plw_stage_entry_place(const plw_stage_description *description, const plw_stage_entry *entry, char *place,
                           size_t size) {
    if (entry->line > 0) {
        snprintf(place, size, "%s:%ld:%ld: %s", description->file, entry->line, entry->column, entry->type->name);
    } else {
        snprintf(place, size, "--%s", entry->type->name);
    }
}

static plw_status add_entry(plw_stage_description *description, const plw_entry_type *type, const char *text, long line,
                            long column, plw_error *error) {
    plw_stage_entry *grown = realloc(description->entry, (description->count + 1) * sizeof *grown);
    if (grown == NULL) {
        return out_of_memory(error);
    }
    description->entry = grown;
    char *copy = strdup(text);
    if (copy == NULL) {
        return out_of_memory(error);
    }
    grown[description->count++] = (plw_stage_entry){.type = type, .text = copy, .line = line, .column = column};
    return PLW_OK;
}

/* Take away the entries of a name; of those from a file only, or all. */
static void remove_entries(plw_stage_description *description, const char *name, bool file_only) {
    size_t kept = 0;
    for (size_t i = 0; i < description->count; i++) {
        plw_stage_entry *entry = &description->entry[i];
        if (strcmp(entry->type->name, name) == 0 && (entry->line > 0 || !file_only)) {
            free(entry->text);
        } else {
            description->entry[kept++] = *entry;
        }
    }
    description->count = kept;
}

/* What an option puts out of force when a file says it. */
static void remove_displaced(plw_stage_description *description, const char *name, const char *text) {
    static const struct {
        const char *name, *displaced;
    } pairs[] = {
        {"reading", "supply"},
        {"reading", "source-ohms"},
        {"reading", "winding-ohms"},
        {"winding", "supply"},
        {"winding", "source-ohms"},
        {"load", "ratio"},
        {"ratio", "load"},
        {"cathode-resistor", "fixed-bias"},
        {"fixed-bias", "cathode-resistor"},
        {"fixed-bias", "resistor-each"},
        {"fixed-bias", "unbypassed"},
    };
    /* All that a loaded voltage makes needless. */
    static const char *const supply_parts[] = {"reading", "source-ohms", "winding", "winding-ohms", "rectifier",
                                               "diode",   "reservoir",   "mains",   "bleeder"};
    const plw_entry_type *type = plw_entry_type_find(name);
    remove_entries(description, name, true);
    for (size_t i = 0; i < sizeof pairs / sizeof pairs[0]; i++) {
        if (strcmp(pairs[i].name, name) == 0) {
            remove_entries(description, pairs[i].displaced, true);
        }
    }
    const bool voltage = strcmp(name, "supply") == 0;
    for (size_t i = 0; voltage && i < sizeof supply_parts / sizeof supply_parts[0]; i++) {
        remove_entries(description, supply_parts[i], true);
    }
    /* A filter is told anew as a whole. */
    for (size_t i = 0; (voltage || type->in_filter) && plw_entry_type_at(i) != NULL; i++) {
        if (plw_entry_type_at(i)->in_filter) {
            remove_entries(description, plw_entry_type_at(i)->name, true);
        }
    }
    if (strcmp(name, "connection") == 0) {
        if (strcmp(text, "ultralinear") != 0) {
            remove_entries(description, "tap", true);
        }
        if (strcmp(text, "pentode") != 0) {
            remove_entries(description, "screen-supply", true);
        }
    }
}

/* Does a text hold only characters that a stage file can hold?  UTF-8 of at most three bytes, no control characters. */
static bool is_clean(const char *text) {
    const unsigned char *at = (const unsigned char *)text;
    while (*at != '\0') {
        size_t more = 0;
        if (*at >= 0xC2 && *at < 0xE0) {
            more = 1;
        } else if (*at >= 0xE1 && *at < 0xED) { /* without the ranges that need a closer look */
            more = 2;
        } else if (*at < 0x20 || *at >= 0x7F) {
            return false;
        }
        if (*at == 0xC2 && at[1] < 0xA0) {
            return false;
        }
        for (at++; more > 0; more--, at++) {
            if ((*at & 0xC0U) != 0x80U) {
                return false;
            }
        }
    }
    return true;
}

plw_status plw_stage_describe(plw_stage_description *description, const char *name, const char *text,
                              plw_error *error) {
    const plw_entry_type *type = plw_entry_type_find(name);
    if (type == NULL) {
        return plw_fail(error, PLW_E_USAGE, "--%.40s: a stage has no such entry", name);
    }
    if (text[0] == '\0' || strlen(text) > TEXT_LENGTH_MOST) {
        return plw_fail(error, PLW_E_USAGE, "--%s: %s; write for instance %s", name,
                        text[0] == '\0' ? "the value is empty" : "the value is longer than 60 characters",
                        type->example);
    }
    if (!is_clean(text)) {
        return plw_fail(error, PLW_E_USAGE,
                        "--%s: the value holds a character that has no place in it; write for "
                        "instance %s",
                        name, type->example);
    }
    if (type->kind == PLW_ENTRY_SWITCH && strcmp(text, "yes") != 0 && strcmp(text, "no") != 0) {
        return plw_fail(error, PLW_E_USAGE, "--%s: write yes or no", name);
    }
    remove_displaced(description, name, text);
    if (!type->repeatable && plw_stage_entry_first(description, name) != NULL) {
        return plw_fail(error, PLW_E_USAGE, "--%s: is given twice; keep one", name);
    }
    return add_entry(description, type, text, 0, 0, error);
}

void plw_stage_undescribe(plw_stage_description *description, const char *name) {
    remove_entries(description, name, false);
}

const char *plw_stage_described(const plw_stage_description *description, const char *name, char *place,
                                size_t place_size) {
    const plw_stage_entry *entry = plw_stage_entry_first(description, name);
    if (entry == NULL) {
        return NULL;
    }
    if (place != NULL) {
        plw_stage_entry_place(description, entry, place, place_size);
    }
    return entry->text;
}

bool plw_stage_described_in_file(const plw_stage_description *description, const char *name) {
    const plw_stage_entry *entry = plw_stage_entry_first(description, name);
    return entry != NULL && entry->line > 0;
}

const char *plw_stage_note(const plw_stage_description *description) {
    return description->note;
}

/* ---- reading ----------------------------------------------------------------------------------------------------- */

static plw_status read_note(plw_stage_description *description, plw_xml *xml, const plw_xml_element *element,
                            plw_error *error) {
    if (description->note != NULL) {
        plw_xml_fault(xml, element, "note: is given twice; keep one");
        return PLW_OK;
    }
    description->note = strdup(plw_xml_attribute(element, "text"));
    return description->note == NULL ? out_of_memory(error) : PLW_OK;
}

static plw_status read_entry(plw_stage_description *description, plw_xml *xml, const plw_xml_element *element,
                             plw_error *error) {
    const char *name = plw_xml_name(element);
    if (strcmp(name, "note") == 0) {
        return read_note(description, xml, element, error);
    }
    const plw_entry_type *type = plw_entry_type_find(name);
    const char *text = plw_xml_attribute(element, "value");
    if (type == NULL || text == NULL) { /* the schema knows no more than the table; if it did, it is said */
        plw_xml_fault(xml, element, "%s: is not known here; remove it", name);
        return PLW_OK;
    }
    if (!type->repeatable && plw_stage_entry_first(description, name) != NULL) {
        plw_xml_fault(xml, element, "%s: is given twice; keep one", name);
        return PLW_OK;
    }
    if (!is_clean(text)) {
        plw_xml_fault(xml, element, "%s: the value holds a character that has no place in it; write for instance %s",
                      name, type->example);
        return PLW_OK;
    }
    long line = 1;
    long column = 1;
    plw_xml_place(xml, element, &line, &column);
    return add_entry(description, type, text, line, column, error);
}

static plw_status read_entries(const char *name, plw_xml *xml, plw_stage_description **description, plw_error *error) {
    plw_stage_description *made = NULL;
    plw_status status = plw_stage_description_new(&made, error);
    if (status != PLW_OK) {
        return status;
    }
    made->file = strdup(name);
    status = made->file == NULL ? out_of_memory(error) : PLW_OK;
    for (const plw_xml_element *element = plw_xml_first(plw_xml_root(xml), NULL); element != NULL && status == PLW_OK;
         element = plw_xml_next(element, NULL)) {
        status = read_entry(made, xml, element, error);
    }
    if (status == PLW_OK) {
        status = plw_xml_verdict(xml, error);
    }
    if (status != PLW_OK) {
        plw_stage_description_free(made);
        return status;
    }
    *description = made;
    return PLW_OK;
}

plw_status plw_stage_file_read(const char *path, plw_stage_description **description, plw_error *error) {
    plw_xml_schema *schema = NULL;
    plw_xml *xml = NULL;
    plw_status status = plw_xml_schema_parse(plw_schema_stage, &schema, error);
    if (status == PLW_OK) {
        status = plw_xml_read_file(path, PLW_FILE_SIZE_MOST, schema, &xml, error);
    }
    if (status == PLW_OK) {
        status = read_entries(path, xml, description, error);
    }
    plw_xml_free(xml);
    plw_xml_schema_free(schema);
    return status;
}

plw_status plw_stage_file_read_memory(const char *name, const char *text, size_t size,
                                      plw_stage_description **description, plw_error *error) {
    plw_xml_schema *schema = NULL;
    plw_xml *xml = NULL;
    plw_status status = PLW_OK;
    if (size > (size_t)PLW_FILE_SIZE_MOST) {
        return plw_fail(error, PLW_E_DATA, "%s:1:1: the file is larger than %ld bytes", name, PLW_FILE_SIZE_MOST);
    }
    status = plw_xml_schema_parse(plw_schema_stage, &schema, error);
    if (status == PLW_OK) {
        status = plw_xml_read_memory(name, text, size, schema, &xml, error);
    }
    if (status == PLW_OK) {
        status = read_entries(name, xml, description, error);
    }
    plw_xml_free(xml);
    plw_xml_schema_free(schema);
    return status;
}

/* ---- writing ----------------------------------------------------------------------------------------------------- */

static void put_attribute(FILE *out, const char *text) {
    for (; *text != '\0'; text++) {
        const unsigned char c = (unsigned char)*text;
        if (c == '&') {
            fputs("&amp;", out);
        } else if (c == '<') {
            fputs("&lt;", out);
        } else if (c == '>') {
            fputs("&gt;", out);
        } else if (c == '"') {
            fputs("&quot;", out);
        } else if (c < 0x20) {
            fprintf(out, "&#%u;", (unsigned)c);
        } else {
            fputc(c, out);
        }
    }
}

static void put_entry(FILE *out, const plw_stage_entry *entry) {
    fprintf(out, "  <%s value=\"", entry->type->name);
    put_attribute(out, entry->text);
    fputs("\"/>\n", out);
}

/* In the order of the table, but for the filter, whose order says how it is wired. */
static void put_entries(FILE *out, const plw_stage_description *description) {
    bool filter_put = false;
    for (size_t index = 0; plw_entry_type_at(index) != NULL; index++) {
        const plw_entry_type *type = plw_entry_type_at(index);
        if (type->in_filter && filter_put) {
            continue;
        }
        for (size_t i = 0; i < description->count; i++) {
            const plw_stage_entry *entry = &description->entry[i];
            if (type->in_filter ? entry->type->in_filter : entry->type == type) {
                put_entry(out, entry);
            }
        }
        filter_put = filter_put || type->in_filter;
    }
}

plw_status plw_stage_file_text(const plw_stage_description *description, char **text, plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    fputs("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n<stage version=\"1\">\n", buffer.file);
    if (description->note != NULL) {
        fputs("  <note text=\"", buffer.file);
        put_attribute(buffer.file, description->note);
        fputs("\"/>\n", buffer.file);
    }
    put_entries(buffer.file, description);
    fputs("</stage>\n", buffer.file);
    return plw_text_end(&buffer, PLW_OK, text, error);
}
