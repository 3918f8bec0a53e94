/* XML files: schemas that are none, references in attributes, walking through elements, true places.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "base/xml_file.h"
#include "near.h"

static const char list_schema[] =
    "<xs:schema xmlns:xs=\"http://www.w3.org/2001/XMLSchema\"><xs:element name=\"list\"><xs:complexType><xs:sequence>"
    "<xs:element name=\"a\" minOccurs=\"0\" maxOccurs=\"unbounded\"><xs:complexType>"
    "<xs:attribute name=\"v\"/></xs:complexType></xs:element>"
    "<xs:element name=\"b\" minOccurs=\"0\" maxOccurs=\"unbounded\"/>"
    "</xs:sequence></xs:complexType></xs:element></xs:schema>";

static plw_xml_schema *good_schema(void) {
    plw_xml_schema *schema = NULL;
    assert_int_equal(plw_xml_schema_parse(list_schema, &schema, NULL), PLW_OK);
    return schema;
}

static plw_xml *read_text(const plw_xml_schema *schema, const char *text) {
    plw_xml *xml = NULL;
    plw_error error = {.status = PLW_OK};
    if (plw_xml_read_memory("list", text, strlen(text), schema, &xml, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return xml;
}

static void what_is_no_schema_is_refused(void **state) {
    (void)state;
    plw_xml_schema *schema = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_xml_schema_parse("<list/>", &schema, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "schema"));
    assert_int_equal(plw_xml_schema_parse("no schema", &schema, &error), PLW_E_DATA);
    assert_int_equal(plw_xml_schema_parse("", &schema, NULL), PLW_E_DATA);
    assert_null(schema);
    plw_xml_schema_free(NULL);
    plw_xml_free(NULL);
}

static void references_in_attributes_are_replaced(void **state) {
    (void)state;
    plw_xml_schema *schema = good_schema();
    plw_xml *xml = read_text(schema, "<list><a v='1 &lt; 2 &amp; &#x41;&#66;&quot; &apos;'/><a v=''/><a/></list>");
    const plw_xml_element *element = plw_xml_first(plw_xml_root(xml), "a");
    assert_string_equal(plw_xml_attribute(element, "v"), "1 < 2 & AB\" '");
    element = plw_xml_next(element, "a");
    assert_string_equal(plw_xml_attribute(element, "v"), "");
    assert_null(plw_xml_attribute(plw_xml_next(element, "a"), "v"));
    plw_xml_free(xml);
    plw_xml_schema_free(schema);
}

static void an_unknown_reference_is_a_fault(void **state) {
    (void)state;
    plw_xml_schema *schema = good_schema();
    static const char text[] = "<list><a v='&unknown;'/></list>";
    plw_xml *xml = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_xml_read_memory("list", text, strlen(text), schema, &xml, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "list:1:"));
    assert_non_null(strstr(error.text, "unknown"));
    assert_null(xml);
    plw_xml_schema_free(schema);
}

static void elements_are_walked_by_name_or_all(void **state) {
    (void)state;
    plw_xml_schema *schema = good_schema();
    plw_xml *xml = read_text(schema, "<list><!-- c --><a/>\n<?note x?><a/><b/></list>");
    const plw_xml_element *root = plw_xml_root(xml);
    assert_string_equal(plw_xml_name(root), "list");
    assert_int_equal(plw_xml_count(root, "a"), 2);
    assert_int_equal(plw_xml_count(root, "b"), 1);
    assert_int_equal(plw_xml_count(root, NULL), 3);
    assert_string_equal(plw_xml_name(plw_xml_next(plw_xml_next(plw_xml_first(root, NULL), NULL), NULL)), "b");
    assert_null(plw_xml_first(root, "c"));
    assert_null(plw_xml_next(plw_xml_first(root, "b"), NULL));
    plw_xml_free(xml);
    plw_xml_schema_free(schema);
}

static void places_are_those_of_the_tag(void **state) {
    (void)state;
    plw_xml_schema *schema = good_schema();
    /* a tag over three lines; one behind characters of two and three bytes; one behind a comment with a '<' in it */
    plw_xml *xml = read_text(
        schema, "<list>\n   <a\n     v='1'\n   />\n<!-- \xc3\xb6\xe2\x82\xac --><a v='2'/><!-- < --><b/></list>");
    static const long places[][2] = {{2, 4}, {5, 12}, {5, 32}};
    const plw_xml_element *element = plw_xml_first(plw_xml_root(xml), NULL);
    for (size_t i = 0; i < 3; i++, element = plw_xml_next(element, NULL)) {
        long line = 0;
        long column = 0;
        plw_xml_place(xml, element, &line, &column);
        assert_int_equal(line, places[i][0]);
        assert_int_equal(column, places[i][1]);
    }
    assert_null(element);
    plw_xml_fault(xml, plw_xml_first(plw_xml_root(xml), "b"), "a fault of %d", 7);
    plw_xml_fault(xml, NULL, "a fault of the whole");
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_xml_verdict(xml, &error), PLW_E_DATA);
    assert_string_equal(error.text, "list:5:32: a fault of 7\nlist:1:1: a fault of the whole");
    plw_xml_free(xml);
    plw_xml_schema_free(schema);
}

/* Lines beyond the 65535 that a short number holds. */
static void places_far_down_are_true(void **state) {
    (void)state;
    plw_xml_schema *schema = good_schema();
    static char text[80000];
    memset(text, '\n', sizeof text);
    memcpy(text, "<list>", 6);
    memcpy(text + 70006, "  <b/></list>", 14);
    plw_xml *xml = read_text(schema, text);
    long line = 0;
    long column = 0;
    plw_xml_place(xml, plw_xml_first(plw_xml_root(xml), "b"), &line, &column);
    assert_int_equal(line, 70001);
    assert_int_equal(column, 3);
    plw_xml_free(xml);
    plw_xml_schema_free(schema);
}

static void deep_nesting_is_refused_not_followed(void **state) {
    (void)state;
    plw_xml_schema *schema = good_schema();
    static char text[30001];
    for (size_t i = 0; i + 3 <= 30000; i += 3) {
        memcpy(text + i, "<a>", 3);
    }
    plw_xml *xml = NULL;
    plw_error error = {.status = PLW_OK};
    /* 300 deep is refused for its depth, not only for what the schema allows */
    static const size_t sizes[] = {900, 30000};
    for (size_t i = 0; i < 2; i++) {
        assert_int_equal(plw_xml_read_memory("deep", text, sizes[i], schema, &xml, &error), PLW_E_DATA);
        assert_null(xml);
        assert_non_null(strstr(error.text, "elements stand within elements far too deep"));
        assert_null(strstr(error.text, "XML_PARSE"));
    }
    plw_xml_schema_free(schema);
}

/* Faults of values beyond line 65535, each with its own place; one on a line of its own is no echo of the one above. */
static void faults_far_down_are_all_told(void **state) {
    (void)state;
    static const char values[] =
        "<xs:schema xmlns:xs=\"http://www.w3.org/2001/XMLSchema\"><xs:element "
        "name=\"list\"><xs:complexType><xs:sequence>"
        "<xs:element name=\"a\" maxOccurs=\"unbounded\"><xs:complexType><xs:attribute name=\"v\"><xs:simpleType>"
        "<xs:restriction base=\"xs:string\"><xs:enumeration value=\"yes\"/></xs:restriction></xs:simpleType>"
        "</xs:attribute><xs:attribute name=\"n\" type=\"xs:integer\"/></xs:complexType></xs:element>"
        "</xs:sequence></xs:complexType></xs:element></xs:schema>";
    plw_xml_schema *schema = NULL;
    assert_int_equal(plw_xml_schema_parse(values, &schema, NULL), PLW_OK);
    static char text[80000];
    memset(text, '\n', sizeof text);
    memcpy(text, "<list>", 6);
    static const char end[] = " <a v='no'/>\n  <a n='few'/>\n</list>";
    memcpy(text + 70006, end, sizeof end - 1);
    plw_xml *xml = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_xml_read_memory("list", text, sizeof text, schema, &xml, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "list:70001:2: "));
    assert_non_null(strstr(error.text, "list:70002:3: "));
    assert_null(xml);
    plw_xml_schema_free(schema);
}

/* Entities that would grow a thousandfold, and one that would read a file: refused at the DOCTYPE. */
static void entities_are_refused_before_they_grow(void **state) {
    (void)state;
    static const char *const texts[] = {
        "<!DOCTYPE list [<!ENTITY x 'xxxxxxxxxx'><!ENTITY y '&x;&x;&x;&x;&x;&x;&x;&x;&x;&x;'>"
        "<!ENTITY z '&y;&y;&y;&y;&y;&y;&y;&y;&y;&y;'>]>\n<list><a v='&z;'/></list>",
        "<!DOCTYPE list [<!ENTITY x SYSTEM '" TUBEDATA "/EL84.xml'>]>\n<list>&x;</list>",
        "<!DOCTYPE list SYSTEM '" TUBEDATA "/none.dtd'>\n<list/>"};
    plw_xml_schema *schema = good_schema();
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++) {
        plw_xml *xml = NULL;
        plw_error error = {.status = PLW_OK};
        assert_int_equal(plw_xml_read_memory("list", texts[i], strlen(texts[i]), schema, &xml, &error), PLW_E_DATA);
        assert_null(xml);
        assert_string_equal(strchr(error.text, ' '), " a DOCTYPE is not allowed here; remove it");
    }
    plw_xml_schema_free(schema);
}

static void too_long_a_name_is_said_plainly(void **state) {
    (void)state;
    plw_xml_schema *schema = good_schema();
    enum { LONG = 60000 };
    static char text[LONG + 4];
    memset(text, 'a', sizeof text);
    text[0] = '<';
    memcpy(text + LONG, "/>", 2);
    plw_xml *xml = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_xml_read_memory("list", text, LONG + 2, schema, &xml, &error), PLW_E_DATA);
    assert_string_equal(strchr(error.text, ' '), " a text or a name is far too long; is this the right file?");
    assert_null(xml);
    plw_xml_schema_free(schema);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(what_is_no_schema_is_refused),
        cmocka_unit_test(references_in_attributes_are_replaced),
        cmocka_unit_test(an_unknown_reference_is_a_fault),
        cmocka_unit_test(elements_are_walked_by_name_or_all),
        cmocka_unit_test(places_are_those_of_the_tag),
        cmocka_unit_test(places_far_down_are_true),
        cmocka_unit_test(deep_nesting_is_refused_not_followed),
        cmocka_unit_test(faults_far_down_are_all_told),
        cmocka_unit_test(entities_are_refused_before_they_grow),
        cmocka_unit_test(too_long_a_name_is_said_plainly),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
