/* XML files read safely and checked against a schema; the only part that knows the XML library.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/xml_file.h"

#include <errno.h>
#include <fcntl.h>
#include <libxml/parser.h>
#include <libxml/parserInternals.h>
#include <libxml/xmlschemas.h>
#include <libxml/xmlschemastypes.h>
#include <pthread.h>
#include <stdarg.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/xml_words.h"

#if LIBXML_VERSION >= 21200
typedef const xmlError *library_error;
#else
typedef xmlError *library_error;
#endif

/* The start tag of a tube lies well within this many bytes. */
enum { ROOT_BYTES = 16384, FAULT_TEXT_SIZE = 512 };

typedef struct {
    long line, column;
} place;

struct plw_xml_schema {
    plw_xml *text; /* the schema refers to it */
    xmlSchemaPtr schema;
};

struct plw_xml {
    char *name;
    xmlDocPtr document;
    place *places; /* of each element in the order of the document; node->_private is its index plus one */
    size_t places_count, places_size;
    plw_error faults;
    size_t faults_left_out;
    bool no_memory;
    /* while parsing */
    const char *text;
    size_t size;
    size_t place_offset; /* up to where lines have been counted ... */
    place place_there;   /* ... and the place there */
    bool has_doctype, root_only;
    startElementNsSAX2Func start_element;
    const plw_xml *schema_text; /* while it is checked against one */
    int facet_line;             /* line of the last fault of a facet: the library repeats it in other words */
};

/* ---- faults ------------------------------------------------------------------------------------------------------ */

static void add_fault(plw_xml *xml, long line, long column, const char *text) {
    char fault[FAULT_TEXT_SIZE];
    const int length = snprintf(fault, sizeof fault, "%s:%ld:%ld: %s", xml->name, line, column, text);
    const size_t used = strlen(xml->faults.text);
    const size_t reserve = 40; /* for "... and n more faults" */
    if (length < 0 || used + (size_t)length + reserve > sizeof xml->faults.text) {
        xml->faults_left_out++;
        return;
    }
    xml->faults.status = PLW_E_DATA;
    plw_error_add(&xml->faults, "%s", fault);
}

void plw_xml_fault(plw_xml *xml, const plw_xml_element *element, const char *format, ...) {
    char text[FAULT_TEXT_SIZE];
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(text, sizeof text, format, arguments);
    va_end(arguments);
    long line = 1;
    long column = 1;
    plw_xml_place(xml, element, &line, &column);
    add_fault(xml, line, column, text);
}

plw_status plw_xml_verdict(const plw_xml *xml, plw_error *error) {
    if (xml->no_memory) {
        return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", xml->name);
    }
    if (xml->faults.text[0] == '\0' && xml->faults_left_out == 0) {
        return PLW_OK;
    }
    (void)plw_fail(error, PLW_E_DATA, "%s", xml->faults.text);
    if (xml->faults_left_out > 0) {
        plw_error_add(error, "... and %zu more faults", xml->faults_left_out);
    }
    return PLW_E_DATA;
}

/* ---- places ------------------------------------------------------------------------------------------------------ */

/* Line and column of a byte of the text.  Asked for rising offsets, so that the text is counted through once. */
static place place_of(plw_xml *xml, size_t offset) {
    for (size_t i = xml->place_offset; i < offset && i < xml->size; i++) {
        const unsigned char c = (unsigned char)xml->text[i];
        if (c == '\n') {
            xml->place_there.line++;
            xml->place_there.column = 1;
        } else if ((c & 0xC0U) != 0x80U) { /* bytes that continue a character are not counted */
            xml->place_there.column++;
        }
    }
    xml->place_offset = offset > xml->place_offset ? offset : xml->place_offset;
    return xml->place_there;
}

/* The parser stands behind the tag: back to the '<' it began with (an attribute value cannot hold one). */
static size_t tag_offset(const plw_xml *xml, xmlParserCtxtPtr parser) {
    const long consumed = xmlByteConsumed(parser);
    size_t offset = consumed > 0 ? (size_t)consumed : 0;
    if (offset > xml->size) {
        offset = xml->size;
    }
    while (offset > 0 && (offset == xml->size || xml->text[offset] != '<')) {
        offset--;
    }
    return offset;
}

static void keep_place(plw_xml *xml, xmlParserCtxtPtr parser, xmlNodePtr node) {
    if (xml->places_count == xml->places_size) {
        const size_t size = xml->places_size == 0 ? 64 : 2 * xml->places_size;
        place *places = realloc(xml->places, size * sizeof *places);
        if (places == NULL) {
            xml->no_memory = true;
            xmlStopParser(parser);
            return;
        }
        xml->places = places;
        xml->places_size = size;
    }
    xml->places[xml->places_count++] = place_of(xml, tag_offset(xml, parser));
    /* an index, not used as a pointer */
    node->_private = (void *)(uintptr_t)xml->places_count; /* NOLINT(performance-no-int-to-ptr) */
}

void plw_xml_place(const plw_xml *xml, const plw_xml_element *element, long *line, long *column) {
    const size_t number = element == NULL ? 0 : (size_t)(uintptr_t)element->_private;
    if (number >= 1 && number <= xml->places_count) {
        *line = xml->places[number - 1].line;
        *column = xml->places[number - 1].column;
    } else {
        *line = 1;
        *column = 1;
    }
}

/* ---- parsing ----------------------------------------------------------------------------------------------------- */

static void on_start_element(void *context, const xmlChar *name, const xmlChar *prefix, const xmlChar *uri,
                             int namespace_count, const xmlChar **namespaces, int attribute_count, int defaulted,
                             const xmlChar **attributes) {
    xmlParserCtxtPtr parser = context;
    plw_xml *xml = parser->_private;
    xml->start_element(context, name, prefix, uri, namespace_count, namespaces, attribute_count, defaulted, attributes);
    if (parser->node != NULL) {
        keep_place(xml, parser, parser->node);
    }
    if (xml->root_only) {
        xmlStopParser(parser);
    }
}

static void on_doctype(void *context, const xmlChar *name, const xmlChar *external, const xmlChar *system) {
    (void)name;
    (void)external;
    (void)system;
    xmlParserCtxtPtr parser = context;
    plw_xml *xml = parser->_private;
    xml->has_doctype = true;
    const place there = place_of(xml, tag_offset(xml, parser));
    add_fault(xml, there.line, there.column, "a DOCTYPE is not allowed here; remove it");
    xmlStopParser(parser);
}

/* The library's message without its line end. */
static void copy_message(char *text, size_t size, library_error fault) {
    snprintf(text, size, "%s", fault->message == NULL ? "not well-formed" : fault->message);
    for (size_t length = strlen(text); length > 0 && (text[length - 1] == '\n' || text[length - 1] == ' '); length--) {
        text[length - 1] = '\0';
    }
    for (char *c = text; *c != '\0'; c++) {
        if (*c == '\n') {
            *c = ' ';
        }
    }
}

/* What stops the parser for size alone is told in the library's own terms: say what it means for the file. */
static const char *said_plainly(const char *message) {
    if (strstr(message, "depth") != NULL) {
        return "elements stand within elements far too deep; is this the right file?";
    }
    if (strstr(message, "XML_PARSE_HUGE") != NULL || strstr(message, "too long") != NULL) {
        return "a text or a name is far too long; is this the right file?";
    }
    return message;
}

static void on_parser_error(void *context, library_error fault) {
    xmlParserCtxtPtr parser = context;
    plw_xml *xml = parser->_private;
    if (xml->has_doctype || xml->root_only) {
        return;
    }
    if (fault->code == XML_ERR_NO_MEMORY) {
        xml->no_memory = true;
        return;
    }
    char text[FAULT_TEXT_SIZE];
    copy_message(text, sizeof text, fault);
    const char *said = said_plainly(text);
    add_fault(xml, fault->line, fault->int2 > 0 ? fault->int2 : 1, said);
    if (said != text) {
        xmlStopParser(parser); /* what would follow is only of this making */
    }
}

static void on_schema_error(void *context, library_error fault) {
    plw_xml *xml = context;
    if (fault->code == XML_ERR_NO_MEMORY) {
        xml->no_memory = true;
        return;
    }
    const bool echo = fault->code == XML_SCHEMAV_CVC_DATATYPE_VALID_1_2_1 ||
                      fault->code == XML_SCHEMAV_CVC_DATATYPE_VALID_1_2_2 ||
                      fault->code == XML_SCHEMAV_CVC_DATATYPE_VALID_1_2_3;
    if (echo && xml->facet_line == fault->line) {
        return;
    }
    char message[FAULT_TEXT_SIZE];
    char text[FAULT_TEXT_SIZE];
    copy_message(message, sizeof message, fault);
    xml->facet_line = strstr(message, "[facet") != NULL ? fault->line : 0;
    plw_xml_words(message, plw_xml_root(xml->schema_text), text, sizeof text);
    xmlNodePtr node = fault->node;
    while (node != NULL && node->type != XML_ELEMENT_NODE) {
        node = node->parent;
    }
    plw_xml_fault(xml, node, "%s", text);
}

static pthread_once_t library_started = PTHREAD_ONCE_INIT;

static void start_library(void) {
    xmlInitParser();
    xmlSchemaInitTypes();
}

/* Set up a parser that reports to xml and loads nothing from outside. */
static xmlParserCtxtPtr new_parser(plw_xml *xml) {
    (void)pthread_once(&library_started, start_library);
    xmlParserCtxtPtr parser = xmlNewParserCtxt();
    if (parser == NULL || parser->sax == NULL) {
        xmlFreeParserCtxt(parser);
        return NULL;
    }
    parser->_private = xml;
    xml->start_element = parser->sax->startElementNs;
    parser->sax->startElementNs = on_start_element;
    parser->sax->internalSubset = on_doctype;
    parser->sax->serror = on_parser_error;
    return parser;
}

static void parse(plw_xml *xml, const char *text, size_t size) {
    xmlParserCtxtPtr parser = new_parser(xml);
    if (parser == NULL) {
        xml->no_memory = true;
        return;
    }
    xml->text = text;
    xml->size = size;
    xml->place_there = (place){1, 1};
    /* No URL is given: file names never pass through the library's own opening of files. */
    xml->document = xmlCtxtReadMemory(parser, text, (int)size, NULL, NULL,
                                      XML_PARSE_NONET | XML_PARSE_BIG_LINES | (xml->root_only ? XML_PARSE_RECOVER : 0));
    if (xml->document == NULL) {
        xml->document = parser->myDoc; /* what was read before the parser was stopped */
    }
    parser->myDoc = NULL;
    xmlFreeParserCtxt(parser);
    xml->text = NULL;
    const bool empty = xml->document == NULL || xmlDocGetRootElement(xml->document) == NULL;
    if (empty && xml->faults.text[0] == '\0' && !xml->no_memory) {
        add_fault(xml, 1, 1, "no XML element is found; is this the right file?");
    }
}

static bool is_utf8_name(const xmlChar *encoding) {
    return encoding == NULL || xmlStrcasecmp(encoding, (const xmlChar *)"UTF-8") == 0 ||
           xmlStrcasecmp(encoding, (const xmlChar *)"US-ASCII") == 0;
}

static void validate(plw_xml *xml, const plw_xml_schema *schema) {
    xmlSchemaValidCtxtPtr validator = xmlSchemaNewValidCtxt(schema->schema);
    if (validator == NULL) {
        xml->no_memory = true;
        return;
    }
    xml->schema_text = schema->text;
    xmlSchemaSetValidStructuredErrors(validator, on_schema_error, xml);
    const int result = xmlSchemaValidateDoc(validator, xml->document);
    if (result != 0 && xml->faults.text[0] == '\0' && !xml->no_memory) {
        add_fault(xml, 1, 1, "the schema could not be applied");
    }
    xmlSchemaFreeValidCtxt(validator);
    xml->schema_text = NULL;
}

/* ---- bytes ------------------------------------------------------------------------------------------------------- */

/* Say what a file is when its first bytes show that it is not plain UTF-8 text.  Ret: NULL when it may be. */
static const char *unfit_text(const char *text, size_t size) {
    static const struct {
        const char *bytes;
        size_t count;
        const char *fault;
    } signs[] = {
        {"\x1f\x8b", 2, "the file is compressed (gzip); unpack it first"},
        {"BZh", 3, "the file is compressed (bzip2); unpack it first"},
        {"\xfd\x37zXZ", 5, "the file is compressed (xz); unpack it first"},
        {"\x28\xb5\x2f\xfd", 4, "the file is compressed (zstd); unpack it first"},
        {"PK\x03\x04", 4, "the file is compressed (zip); unpack it first"},
        {"\xff\xfe", 2, "the file is in UTF-16; save it as UTF-8"},
        {"\xfe\xff", 2, "the file is in UTF-16; save it as UTF-8"},
    };
    if (size == 0) {
        return "the file is empty";
    }
    for (size_t i = 0; i < sizeof signs / sizeof signs[0]; i++) {
        if (size >= signs[i].count && memcmp(text, signs[i].bytes, signs[i].count) == 0) {
            return signs[i].fault;
        }
    }
    if (size >= 2 && ((text[0] == '<' && text[1] == '\0') || (text[0] == '\0' && text[1] == '<'))) {
        return "the file is in UTF-16; save it as UTF-8";
    }
    return memchr(text, '\0', size) != NULL ? "the file is no text: it holds a zero byte" : NULL;
}

/* Read at most size_most + 1 bytes of a file, so that a longer one is known as such. */
static plw_status read_bytes(const char *path, size_t size_most, char **text, size_t *size, plw_error *error) {
    const int file = open(path, O_RDONLY | O_CLOEXEC | O_NOCTTY);
    if (file < 0) {
        return plw_fail(error, PLW_E_FILE, "%s: cannot be opened: %s", path, strerror(errno));
    }
    struct stat status = {0};
    if (fstat(file, &status) == 0 && S_ISDIR(status.st_mode)) {
        (void)close(file);
        return plw_fail(error, PLW_E_FILE, "%s: is a folder; name a file in it", path);
    }
    size_t room = S_ISREG(status.st_mode) && (uintmax_t)status.st_size < size_most ? (size_t)status.st_size + 1 : 65536;
    char *bytes = malloc(room);
    size_t used = 0;
    ssize_t got = bytes == NULL ? -1 : 1;
    while (got > 0 && used <= size_most) {
        if (used == room) {
            room = 2 * room > size_most ? size_most + 1 : 2 * room;
            char *more = realloc(bytes, room);
            if (more == NULL) {
                break;
            }
            bytes = more;
        }
        do {
            got = read(file, bytes + used, room - used);
        } while (got < 0 && errno == EINTR);
        used += got > 0 ? (size_t)got : 0;
    }
    const int reason = errno;
    (void)close(file);
    if (bytes != NULL && (got == 0 || used > size_most)) {
        *text = bytes;
        *size = used;
        return PLW_OK;
    }
    const bool no_memory = bytes == NULL || got > 0;
    free(bytes);
    return no_memory ? plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", path)
                     : plw_fail(error, PLW_E_FILE, "%s: cannot be read: %s", path, strerror(reason));
}

/* ---- what is offered --------------------------------------------------------------------------------------------- */

static plw_xml *new_xml(const char *name) {
    plw_xml *xml = calloc(1, sizeof *xml);
    if (xml != NULL) {
        xml->name = strdup(name);
    }
    if (xml != NULL && xml->name == NULL) {
        free(xml);
        return NULL;
    }
    return xml;
}

static void read_text(plw_xml *xml, const char *text, size_t size) {
    const char *unfit = size > INT32_MAX ? "the file is too large" : unfit_text(text, size);
    if (unfit != NULL) {
        add_fault(xml, 1, 1, unfit);
        return;
    }
    parse(xml, text, size);
    if (xml->document != NULL && !is_utf8_name(xml->document->encoding)) {
        add_fault(xml, 1, 1, "the file declares another encoding than UTF-8; save it as UTF-8");
    }
}

/* Hand the document out when it has no fault, else free it. */
static plw_status hand_out(plw_xml *made, plw_xml **xml, plw_error *error) {
    const plw_status status = plw_xml_verdict(made, error);
    if (status != PLW_OK) {
        plw_xml_free(made);
        return status;
    }
    *xml = made;
    return PLW_OK;
}

plw_status plw_xml_read_memory(const char *name, const char *text, size_t size, const plw_xml_schema *schema,
                               plw_xml **xml, plw_error *error) {
    plw_xml *made = new_xml(name);
    if (made == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", name);
    }
    read_text(made, text, size);
    if (made->faults.text[0] == '\0' && !made->no_memory) {
        validate(made, schema);
    }
    return hand_out(made, xml, error);
}

plw_status plw_xml_read_file(const char *path, size_t size_most, const plw_xml_schema *schema, plw_xml **xml,
                             plw_error *error) {
    char *text = NULL;
    size_t size = 0;
    plw_status status = read_bytes(path, size_most, &text, &size, error);
    if (status != PLW_OK) {
        return status;
    }
    if (size > size_most) {
        status = plw_fail(error, PLW_E_DATA, "%s:1:1: the file is larger than %zu bytes", path, size_most);
    } else {
        status = plw_xml_read_memory(path, text, size, schema, xml, error);
    }
    free(text);
    return status;
}

plw_status plw_xml_read_root(const char *path, plw_xml **xml, plw_error *error) {
    char *text = NULL;
    size_t size = 0;
    plw_status status = read_bytes(path, ROOT_BYTES, &text, &size, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_xml *made = new_xml(path);
    if (made == NULL) {
        status = plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", path);
    } else {
        made->root_only = true;
        read_text(made, text, size);
        status = hand_out(made, xml, error);
    }
    free(text);
    return status;
}

void plw_xml_free(plw_xml *xml) {
    if (xml != NULL) {
        xmlFreeDoc(xml->document);
        free(xml->places);
        free(xml->name);
        free(xml);
    }
}

static void on_schema_text_error(void *context, library_error fault) {
    char text[FAULT_TEXT_SIZE];
    copy_message(text, sizeof text, fault);
    add_fault(context, fault->line, 1, text);
}

/* Make the schema of its text.  Faults stand in the text's list of faults. */
static void build_schema(plw_xml_schema *schema) {
    xmlSchemaParserCtxtPtr parser = xmlSchemaNewDocParserCtxt(schema->text->document);
    if (parser == NULL) {
        schema->text->no_memory = true;
        return;
    }
    xmlSchemaSetParserStructuredErrors(parser, on_schema_text_error, schema->text);
    schema->schema = xmlSchemaParse(parser);
    xmlSchemaFreeParserCtxt(parser);
    if (schema->schema == NULL && schema->text->faults.text[0] == '\0') {
        add_fault(schema->text, 1, 1, "the schema cannot be used");
    }
}

plw_status plw_xml_schema_parse(const char *text, plw_xml_schema **schema, plw_error *error) {
    plw_xml_schema *made = calloc(1, sizeof *made);
    plw_xml *read = made == NULL ? NULL : new_xml("schema");
    if (read == NULL) {
        free(made);
        return plw_fail(error, PLW_E_NO_MEMORY, "schema: out of memory");
    }
    made->text = read;
    read_text(read, text, strlen(text));
    if (read->faults.text[0] == '\0' && !read->no_memory) {
        build_schema(made);
    }
    const plw_status status = plw_xml_verdict(read, error);
    if (status != PLW_OK) {
        plw_xml_schema_free(made);
        return status;
    }
    *schema = made;
    return PLW_OK;
}

void plw_xml_schema_free(plw_xml_schema *schema) {
    if (schema != NULL) {
        xmlSchemaFree(schema->schema);
        plw_xml_free(schema->text);
        free(schema);
    }
}

/* ---- elements ---------------------------------------------------------------------------------------------------- */

static const plw_xml_element *element_from(const xmlNode *node, const char *name) {
    while (node != NULL &&
           (node->type != XML_ELEMENT_NODE || (name != NULL && strcmp((const char *)node->name, name) != 0))) {
        node = node->next;
    }
    return node;
}

const plw_xml_element *plw_xml_root(const plw_xml *xml) {
    return xmlDocGetRootElement(xml->document);
}

const plw_xml_element *plw_xml_first(const plw_xml_element *parent, const char *name) {
    return element_from(parent->children, name);
}

const plw_xml_element *plw_xml_next(const plw_xml_element *element, const char *name) {
    return element_from(element->next, name);
}

size_t plw_xml_count(const plw_xml_element *parent, const char *name) {
    size_t count = 0;
    for (const plw_xml_element *element = plw_xml_first(parent, name); element != NULL;
         element = plw_xml_next(element, name)) {
        count++;
    }
    return count;
}

const char *plw_xml_name(const plw_xml_element *element) {
    return (const char *)element->name;
}

const char *plw_xml_attribute(const plw_xml_element *element, const char *name) {
    for (const xmlAttr *attribute = element->properties; attribute != NULL; attribute = attribute->next) {
        if (strcmp((const char *)attribute->name, name) == 0) {
            /* One text: without a DOCTYPE there are no entities but the five that the parser replaces. */
            const xmlNode *value = attribute->children;
            return value == NULL || value->content == NULL ? "" : (const char *)value->content;
        }
    }
    return NULL;
}
