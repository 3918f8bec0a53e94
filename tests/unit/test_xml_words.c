/* Faults of the shape of a file, said in plain words: each kind that the schemas can find.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "base/schemas.h"
#include "base/xml_file.h"
#include "base/xml_words.h"
#include "near.h"

typedef struct {
    const char *document, *fault;
} wording;

static void expect_faults(const char *schema_text, const wording *wordings, size_t count) {
    plw_xml_schema *schema = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_xml_schema_parse(schema_text, &schema, &error), PLW_OK);
    for (size_t i = 0; i < count; i++) {
        plw_xml *xml = NULL;
        const char *document = wordings[i].document;
        assert_int_equal(plw_xml_read_memory("f.xml", document, strlen(document), schema, &xml, &error), PLW_E_DATA);
        if (strstr(error.text, wordings[i].fault) == NULL || strstr(error.text, "facet") != NULL ||
            strstr(error.text, "Element") != NULL) {
            fail_msg("%s:\n%s\nwanted: %s", document, error.text, wordings[i].fault);
        }
    }
    plw_xml_schema_free(schema);
}

static void faults_of_a_stage_are_said_plainly(void **state) {
    (void)state;
    static const wording wordings[] = {
        {"<stage><suply value='285V'/></stage>", "f.xml:1:8: suply: is not known; is it supply?"},
        {"<stage><gramophone value='78'/></stage>", "gramophone: is not known"},
        {"<stage><load value='5k'><tube value='45'/></load></stage>", "load: holds nothing between its tags; "},
        {"<stage><load valu='5k'/></stage>", "load: the attribute 'valu' is not known; is it value?"},
        {"<stage><load valu='5k'/></stage>", "load: the attribute 'value' is missing"},
        {"<stage><load value='5k' text='a'/></stage>", "load: the attribute 'text' does not belong to it"},
        {"<stage><load value='5k' gramophone='a'/></stage>", "load: the attribute 'gramophone' is not known"},
        {"<stage><load value=''/></stage>", "load: value: is empty"},
        {"<stage><tube value='6V6GT6V6GT6V6GT6V6GT6V6GT6V6GT6V6GT6V6GT6V6GT6V6GT6V6GT6V6GT6V6GT'/></stage>",
         "tube: value: is longer than 60 characters"},
        {"<stage><unbypassed value='maybe'/></stage>",
         "unbypassed: value: 'maybe' is not known; write one of: yes, no"},
        {"<stage version='7'/>", "stage: version: '7' is not known; write 1"},
        {"<stage><tube>45</tube></stage>", "tube: holds nothing between its tags; "},
        {"<stage>on the bench</stage>", "stage: text stands between its elements; "},
        {"<stages/>", "the file holds a <stages>; a <stage> is wanted here"},
    };
    expect_faults(plw_schema_stage, wordings, sizeof wordings / sizeof wordings[0]);
}

#define PIN(number) "<tube type='X1' kind='triode'><pins><pin number='" number "' electrode='plate'/></pins></tube>"

static void faults_of_a_tube_are_said_plainly(void **state) {
    (void)state;
    static const wording wordings[] = {
        {"<tube type='X1' kind='triode'/>", "tube: something is missing inside; what may come next: pins, heater"},
        {"<tube type='X1' kind='triode'><row/></tube>", "row: does not belong here; what may stand here: "},
        {"<tube type='X1' kind='triod'/>", "tube: kind: 'triod' is not known; write one of: triode, "},
        {PIN("77"), "pin: number: 77 is more than 16, the most that is allowed"},
        {PIN("0"), "pin: number: 0 is less than 1, the least that is allowed"},
        {PIN("three"), "pin: number: 'three' does not fit here"},
    };
    expect_faults(plw_schema_tube, wordings, sizeof wordings / sizeof wordings[0]);
}

/* What is not understood is passed on as it is. */
static void other_messages_stay(void **state) {
    (void)state;
    static const char *const messages[] = {"", "a message of another kind", "Element 'tube': something new",
                                           "Element 'tube', attribute 'type': something 'new'", "Element 'open"};
    plw_xml_schema *schema = NULL;
    plw_xml *xml = NULL;
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_xml_schema_parse(plw_schema_stage, &schema, &error), PLW_OK);
    assert_int_equal(plw_xml_read_memory("f.xml", "<stage/>", 8, schema, &xml, &error), PLW_OK);
    for (size_t i = 0; i < sizeof messages / sizeof messages[0]; i++) {
        char text[64];
        plw_xml_words(messages[i], plw_xml_root(xml), text, sizeof text);
        assert_string_equal(text, messages[i]);
    }
    plw_xml_free(xml);
    plw_xml_schema_free(schema);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(faults_of_a_stage_are_said_plainly),
        cmocka_unit_test(faults_of_a_tube_are_said_plainly),
        cmocka_unit_test(other_messages_stay),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
