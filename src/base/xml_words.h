/* What a schema has against a document, in the words of a workshop.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef BASE_XML_WORDS_H
#define BASE_XML_WORDS_H

#include "base/xml_file.h"

/* Say in plain words what the schema library says, with the nearest name for a misspelt one.
 * In:   message: "Element 'load', attribute 'valu': The attribute 'valu' is not allowed."
 *       schema: root element of the schema
 * Out:  text: "load: the attribute 'valu' is not known; is it value?"; the message itself where it is none that is
 *       known here */
void plw_xml_words(const char *message, const plw_xml_element *schema, char *text, size_t size);

#endif
