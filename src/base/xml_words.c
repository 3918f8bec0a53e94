/* What a schema has against a document, in the words of a workshop.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/xml_words.h"

#include <stdio.h>
#include <string.h>

#include "platewright/quantity.h"

enum { NAME_SIZE = 64, VALUE_SIZE = 80, LIST_SIZE = 240, NAMES_MOST = 256, DEPTH_MOST = 32, NEAREST_MOST = 3 };

/* ---- the names that the schema knows ----------------------------------------------------------------------------- */

typedef struct {
    const char *name[NAMES_MOST];
    size_t count;
} name_list;

/* All names of the declarations of one kind ("element", "attribute"), each once. */
static void collect(const plw_xml_element *from, const char *kind, int depth, name_list *names) {
    for (const plw_xml_element *at = plw_xml_first(from, NULL); at != NULL; at = plw_xml_next(at, NULL)) {
        const char *name = strcmp(plw_xml_name(at), kind) == 0 ? plw_xml_attribute(at, "name") : NULL;
        bool there = name == NULL || names->count == NAMES_MOST;
        for (size_t i = 0; i < names->count && !there; i++) {
            there = strcmp(names->name[i], name) == 0;
        }
        if (!there) {
            names->name[names->count++] = name;
        }
        if (depth < DEPTH_MOST) {
            collect(at, kind, depth + 1, names);
        }
    }
}

/* The nearest other names, "note, diode or load".
 * Out:  near: empty when none is near, or the name itself is known */
static bool is_known(const plw_xml_element *schema, const char *kind, const char *name, char near[LIST_SIZE]) {
    name_list names = {.count = 0};
    collect(schema, kind, 0, &names);
    near[0] = '\0';
    for (size_t i = 0; i < names.count; i++) {
        if (strcmp(names.name[i], name) == 0) {
            return true;
        }
    }
    size_t found[NEAREST_MOST];
    const size_t count = plw_nearest_names(name, names.name, names.count, found, NEAREST_MOST);
    for (size_t i = 0; i < count; i++) {
        const char *joint = i + 1 == count ? " or " : ", ";
        const size_t used = strlen(near);
        snprintf(near + used, LIST_SIZE - used, "%s%s", i == 0 ? "" : joint, names.name[found[i]]);
    }
    return false;
}

/* ---- the parts of a message -------------------------------------------------------------------------------------- */

/* What stands behind `before` up to `behind`.  Ret: false when it is not there */
static bool between(const char *message, const char *before, const char *behind, char *part, size_t size) {
    const char *start = strstr(message, before);
    if (start == NULL) {
        return false;
    }
    start += strlen(before);
    const char *end = strstr(start, behind);
    if (end == NULL) {
        return false;
    }
    const size_t length = (size_t)(end - start);
    const size_t kept = length < size ? length : size - 1;
    memcpy(part, start, kept);
    part[kept] = '\0';
    return true;
}

/* "{'yes', 'no'}" as "yes, no". */
static void plain_list(const char *quoted, char *list, size_t size) {
    size_t used = 0;
    for (; *quoted != '\0' && used + 1 < size; quoted++) {
        if (*quoted != '\'') {
            list[used++] = *quoted;
        }
    }
    list[used] = '\0';
}

/* Where in the document: the element, and its attribute if it is one. */
typedef struct {
    char element[NAME_SIZE], attribute[NAME_SIZE];
} place;

/* "load: value" or "load" */
static const char *place_words(const place *p, char words[2 * NAME_SIZE + 4]) {
    snprintf(words, 2 * NAME_SIZE + 4, "%s%s%s", p->element, p->attribute[0] == '\0' ? "" : ": ", p->attribute);
    return words;
}

/* ---- the kinds of faults ----------------------------------------------------------------------------------------- */

static void unexpected_element(const char *message, const place *p, const plw_xml_element *schema, char *text,
                               size_t size) {
    char list[LIST_SIZE];
    char near[LIST_SIZE];
    const char *verdict = is_known(schema, "element", p->element, near) ? "does not belong here" : "is not known";
    const bool expected = between(message, "Expected is one of ( ", " )", list, sizeof list) ||
                          between(message, "Expected is ( ", " )", list, sizeof list);
    if (near[0] != '\0') {
        snprintf(text, size, "%s: is not known; is it %s?", p->element, near);
    } else if (expected) {
        snprintf(text, size, "%s: %s; what may stand here: %s", p->element, verdict, list);
    } else {
        snprintf(text, size, "%s: %s", p->element, verdict);
    }
}

static void unknown_attribute(const place *p, const plw_xml_element *schema, char *text, size_t size) {
    char near[LIST_SIZE];
    const bool known = is_known(schema, "attribute", p->attribute, near);
    if (near[0] != '\0') {
        snprintf(text, size, "%s: the attribute '%s' is not known; is it %s?", p->element, p->attribute, near);
    } else {
        snprintf(text, size, "%s: the attribute '%s' %s", p->element, p->attribute,
                 known ? "does not belong to it" : "is not known");
    }
}

/* A value against its type: not one of a list, too long, no number, out of range.  Ret: false when it is none of it */
static bool value_fault(const char *message, const place *p, char *text, size_t size) {
    char value[VALUE_SIZE];
    char limit[LIST_SIZE];
    char list[LIST_SIZE];
    char where[2 * NAME_SIZE + 4];
    (void)place_words(p, where);
    if (strstr(message, "'minLength'") != NULL) {
        snprintf(text, size, "%s: is empty", where);
        return true;
    }
    if (strstr(message, "'maxLength'") != NULL && between(message, "maximum length of '", "'", limit, sizeof limit)) {
        snprintf(text, size, "%s: is longer than %s characters", where, limit);
        return true;
    }
    if (!between(message, "The value '", "'", value, sizeof value) &&
        !between(message, ": '", "'", value, sizeof value)) {
        return false;
    }
    if (between(message, "of the set {", "}", limit, sizeof limit)) {
        plain_list(limit, list, sizeof list);
        snprintf(text, size, "%s: '%s' is not known; write %s%s", where, value,
                 strchr(list, ',') == NULL ? "" : "one of: ", list);
        return true;
    }
    if (between(message, "minimum value allowed ('", "'", limit, sizeof limit)) {
        snprintf(text, size, "%s: %s is less than %s, the least that is allowed", where, value, limit);
        return true;
    }
    if (between(message, "maximum value allowed ('", "'", limit, sizeof limit)) {
        snprintf(text, size, "%s: %s is more than %s, the most that is allowed", where, value, limit);
        return true;
    }
    if (strstr(message, "is not a valid value of") != NULL) {
        snprintf(text, size, "%s: '%s' does not fit here%s", where, value,
                 strstr(message, "'xs:integer'") != NULL ? "; a whole number is wanted" : "");
        return true;
    }
    return false;
}

static bool text_inside(const char *message, const place *p, char *text, size_t size) {
    if (strstr(message, "content type is empty") != NULL) {
        snprintf(text, size,
                 "%s: holds nothing between its tags; what it says stands in its tag, as in <note text=\"...\"/>",
                 p->element);
        return true;
    }
    if (strstr(message, "'element-only'") != NULL) {
        snprintf(text, size, "%s: text stands between its elements; remove it, or make it a comment", p->element);
        return true;
    }
    return false;
}

static void wrong_root(const place *p, const plw_xml_element *schema, char *text, size_t size) {
    const plw_xml_element *wanted = plw_xml_first(schema, "element");
    const char *name = wanted == NULL ? NULL : plw_xml_attribute(wanted, "name");
    snprintf(text, size, "the file holds a <%s>; a <%s> is wanted here", p->element, name == NULL ? "?" : name);
}

void plw_xml_words(const char *message, const plw_xml_element *schema, char *text, size_t size) {
    place p = {"", ""};
    char list[LIST_SIZE];
    snprintf(text, size, "%s", message);
    if (!between(message, "Element '", "'", p.element, sizeof p.element)) {
        return;
    }
    (void)between(message, "attribute '", "'", p.attribute, sizeof p.attribute);
    if (strstr(message, "No matching global declaration") != NULL) {
        wrong_root(&p, schema, text, size);
    } else if (strstr(message, "This element is not expected") != NULL) {
        unexpected_element(message, &p, schema, text, size);
    } else if (strstr(message, "Missing child element") != NULL) {
        (void)(between(message, "one of ( ", " )", list, sizeof list) ||
               between(message, "Expected is ( ", " )", list, sizeof list) ||
               between(message, "Missing child element", "(", list, sizeof list));
        snprintf(text, size, "%s: something is missing inside; what may come next: %s", p.element, list);
    } else if (strstr(message, "is required but missing") != NULL &&
               between(message, "The attribute '", "'", p.attribute, sizeof p.attribute)) {
        snprintf(text, size, "%s: the attribute '%s' is missing", p.element, p.attribute);
    } else if (strstr(message, "' is not allowed.") != NULL && p.attribute[0] != '\0') {
        unknown_attribute(&p, schema, text, size);
    } else if (!text_inside(message, &p, text, size)) {
        (void)value_fault(message, &p, text, size);
    }
}
