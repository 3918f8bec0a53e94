/* XML files read safely and checked against a schema; the only part that knows the XML library.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef BASE_XML_FILE_H
#define BASE_XML_FILE_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/status.h"

/* A schema ready for use, a document read, and one of its elements. */
typedef struct plw_xml_schema plw_xml_schema;
typedef struct plw_xml plw_xml;
typedef struct _xmlNode plw_xml_element;

/* Parse a schema that is built into the library (base/schemas.h).
 * Out:  *schema, to be freed with plw_xml_schema_free()
 * Ret:  PLW_OK; PLW_E_DATA when it is no schema; PLW_E_NO_MEMORY */
plw_status plw_xml_schema_parse(const char *text, plw_xml_schema **schema, plw_error *error) PLW_MUST_USE;
void plw_xml_schema_free(plw_xml_schema *schema);

/* Read a file of at most `size_most` bytes and check it against a schema.
 * In:   path; schema
 * Out:  *xml, to be freed with plw_xml_free(); not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_FILE: it cannot be read; PLW_E_NO_MEMORY; PLW_E_DATA with one line `file:line:column: ...` for
 *       each fault: empty, too large, compressed, not UTF-8, with a DOCTYPE, malformed, against the schema.
 * No entity is ever expanded from a file, nothing is loaded from anywhere else. */
plw_status plw_xml_read_file(const char *path, size_t size_most, const plw_xml_schema *schema, plw_xml **xml,
                             plw_error *error) PLW_MUST_USE;

/* The same from memory; `name` stands for the file in messages. */
plw_status plw_xml_read_memory(const char *name, const char *text, size_t size, const plw_xml_schema *schema,
                               plw_xml **xml, plw_error *error) PLW_MUST_USE;

/* Read only the root element's start tag, from the first bytes of a file; no schema is applied.
 * Ret:  PLW_OK with *xml holding the root without children; else as plw_xml_read_file() */
plw_status plw_xml_read_root(const char *path, plw_xml **xml, plw_error *error) PLW_MUST_USE;

void plw_xml_free(plw_xml *xml);

/* Elements.  `name` NULL: any element.  Ret: NULL when there is none (further). */
const plw_xml_element *plw_xml_root(const plw_xml *xml);
const plw_xml_element *plw_xml_first(const plw_xml_element *parent, const char *name);
const plw_xml_element *plw_xml_next(const plw_xml_element *element, const char *name);
size_t plw_xml_count(const plw_xml_element *parent, const char *name);
const char *plw_xml_name(const plw_xml_element *element);

/* The value of an attribute, owned by the document; NULL when it is absent. */
const char *plw_xml_attribute(const plw_xml_element *element, const char *name);

/* Where an element's start tag begins; both count from 1, the column in characters. */
void plw_xml_place(const plw_xml *xml, const plw_xml_element *element, long *line, long *column);

/* Note a fault in the meaning of an element. */
void plw_xml_fault(plw_xml *xml, const plw_xml_element *element, const char *format, ...) PLW_PRINTF(3, 4);

/* Ret:  PLW_OK when no fault was noted; else PLW_E_DATA with one line for each in error */
plw_status plw_xml_verdict(const plw_xml *xml, plw_error *error) PLW_MUST_USE;

#endif
