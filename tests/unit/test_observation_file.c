/* Observations from CSV files: every column and unit, rows and points mixed, and each kind of bad input refused with
 * file, line and remedy.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/observation_file.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "bare_tube.h"
#include "near.h"

static plw_tube *tube_of(plw_tube_kind kind) {
    plw_tube *tube = bare_tube("6X99", kind);
    assert_non_null(tube);
    return tube;
}

static plw_status read_text(plw_tube *tube, const char *text, plw_error *error) {
    return plw_observation_file_read_memory("bench.csv", text, strlen(text), tube, error);
}

/* Refused with this text (a part of it), the tube as it was. */
static void expect_refusal_of(plw_tube_kind kind, const char *text, const char *wanted) {
    plw_tube *tube = tube_of(kind);
    plw_error error = {.status = PLW_OK};
    const plw_status status = read_text(tube, text, &error);
    if (status != PLW_E_DATA || strstr(error.text, wanted) == NULL) {
        fail_msg("status %d, text:\n%s\nwanted: %s", (int)status, error.text, wanted);
    }
    assert_int_equal(error.status, PLW_E_DATA);
    assert_int_equal(strncmp(error.text, "bench.csv:", 10), 0);
    assert_int_equal(tube->rows_count, 0);
    assert_int_equal(tube->points_count, 0);
    plw_tube_free(tube);
}

static void expect_refusal(const char *text, const char *wanted) {
    expect_refusal_of(PLW_KIND_TRIODE, text, wanted);
}

#define HEAD "plate_volts,grid_volts,plate_ma\n"
#define GOOD HEAD "100,-3.5,11.2\n150,-3.5,24.1\n150,-6.1,12.9\n"

static void test_points(void **state) {
    (void)state;
    plw_tube *tube = tube_of(PLW_KIND_TRIODE);
    assert_int_equal(read_text(tube, GOOD, NULL), PLW_OK);
    assert_int_equal(tube->rows_count, 0);
    assert_int_equal(tube->points_count, 3);
    const plw_point *p = &tube->points[2];
    assert_int_equal(p->kind, PLW_POINT_CURVE);
    assert_int_equal(p->connection, PLW_CONNECTION_TRIODE);
    assert_true(p->plate_volts == 150.0 && p->grid_volts == -6.1 && p->plate_amps == 0.0129);
    assert_true(isnan(p->screen_volts) && isnan(p->gm_siemens) && isnan(p->uncertainty_percent));
    assert_string_equal(p->provenance.source, "bench.csv");
    assert_int_equal(p->provenance.how, PLW_HOW_READ);
    assert_int_equal(p->provenance.confidence, PLW_CONFIDENCE_HIGH);
    assert_null(p->provenance.note);
    /* A second table goes behind the first. */
    assert_int_equal(read_text(tube, HEAD "90,-2.5,10.2\n130,-2.5,21.1\n140,-6.3,9.9\n", NULL), PLW_OK);
    assert_int_equal(tube->points_count, 6);
    assert_true(tube->points[0].plate_volts == 100.0 && tube->points[3].plate_volts == 90.0);
    plw_tube_free(tube);
}

static const char mixed[] =
    "\xef\xbb\xbf# readings and the maker's table\r\n"
    "Source;kind;connection;Plate Volts;screen-volts;grid_volts;cathode_resistor_ohms;drive_peak_volts;plate_amps;"
    "plate_ma_full_drive;screen_ma;screen_amps_full_drive;gm_ma_per_volt;plate_resistance_kohms;mu;load_kohms;power_mw;"
    "thd_percent;second_percent;third_percent;uncertainty_percent;how;confidence;note\r\n"
    "\"Sheet \"\"A\"\"; 1951\";;;250;250;;230;12.5;45mA;47;4.5;0.007;4.1;50;;4k7;4500;8;4.5;6;1.5;memory;medium;\"two\n"
    "lines\"\r\n"
    ";;;;;;;;;;;;;;;;;;;;;;;\r\n"
    "\r\n"
    ";characteristics;triode;250;250;-12.5;;;0.0495;;;;5;1.96;9.8;;;;;;;;;\r\n"
    ";inner-mu;;250;250;-12.5;;;;;;;;;8.8;;;;;;;;low;\r\n"
    ";cut-off;triode;250;;-36;;;0.0005;;;;;;;;;;;;40%;;;\r\n";

static void test_rows_and_points_mixed(void **state) {
    (void)state;
    plw_tube *tube = tube_of(PLW_KIND_BEAM);
    plw_error error = {.status = PLW_OK};
    if (read_text(tube, mixed, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    assert_int_equal(tube->rows_count, 1);
    assert_int_equal(tube->points_count, 3);
    const plw_row *r = &tube->rows[0];
    assert_int_equal(r->connection, PLW_CONNECTION_PENTODE);
    assert_true(r->plate_volts == 250.0 && r->screen_volts == 250.0 && isnan(r->grid_volts));
    assert_true(r->cathode_resistor_ohms == 230.0 && r->drive_peak_volts == 12.5);
    assert_true(r->plate_amps == 0.045 && r->plate_amps_full_drive == 0.047);
    assert_true(r->screen_amps == 0.0045 && r->screen_amps_full_drive == 0.007);
    assert_true(r->gm_siemens == 0.0041 && r->plate_resistance_ohms == 50e3 && isnan(r->mu));
    assert_true(r->load_ohms == 4700.0 && r->power_watts == 4.5);
    assert_true(r->thd_percent == 8.0 && r->h2_percent == 4.5 && r->h3_percent == 6.0);
    assert_true(r->uncertainty_percent == 1.5);
    assert_int_equal(r->provenance.how, PLW_HOW_MEMORY);
    assert_int_equal(r->provenance.confidence, PLW_CONFIDENCE_MEDIUM);
    assert_string_equal(r->provenance.source, "Sheet \"A\"; 1951");
    assert_string_equal(r->provenance.note, "two\nlines");
    assert_int_equal(tube->points[0].kind, PLW_POINT_CHARACTERISTICS);
    assert_int_equal(tube->points[0].connection, PLW_CONNECTION_TRIODE);
    assert_true(isnan(tube->points[0].screen_volts)); /* given at the plate's volts: nothing new */
    assert_true(tube->points[0].mu == 9.8 && tube->points[0].plate_resistance_ohms == 1960.0);
    assert_int_equal(tube->points[1].kind, PLW_POINT_INNER_MU);
    assert_int_equal(tube->points[1].provenance.confidence, PLW_CONFIDENCE_LOW);
    assert_int_equal(tube->points[2].kind, PLW_POINT_CUT_OFF);
    assert_true(tube->points[2].uncertainty_percent == 40.0);
    plw_tube_free(tube);
}

static void test_order_of_columns_does_not_matter(void **state) {
    (void)state;
    plw_tube *one = tube_of(PLW_KIND_TRIODE);
    plw_tube *other = tube_of(PLW_KIND_TRIODE);
    assert_int_equal(read_text(one, GOOD, NULL), PLW_OK);
    assert_int_equal(
        read_text(other, "plate_ma\tplate_volts\tgrid_volts\n11.2\t100\t-3.5\n24.1\t150\t-3.5\n12.9\t150\t-6.1", NULL),
        PLW_OK);
    for (size_t i = 0; i < 3; i++) {
        assert_true(one->points[i].plate_volts == other->points[i].plate_volts);
        assert_true(one->points[i].grid_volts == other->points[i].grid_volts);
        assert_true(one->points[i].plate_amps == other->points[i].plate_amps);
    }
    plw_tube_free(one);
    plw_tube_free(other);
}

static void test_no_table(void **state) {
    (void)state;
    expect_refusal("", "bench.csv:1: the table is empty");
    expect_refusal("\n# nothing\n\n", "the table is empty");
    expect_refusal(HEAD, "0 figures");
    expect_refusal("plate_volts,grid_volts,plate_ma\n100,-3.5,\xb5\n", "bench.csv:2: the text is not in UTF-8");
    expect_refusal(HEAD "100,-3.5,1\x01\n", "bench.csv:2: a byte of value 1");
    expect_refusal(HEAD "100,-3.5,11.2\n\"150,-3.5,24\n", "bench.csv:3: a double quote is not closed");
    expect_refusal(HEAD "100,\"-3.5\"x,11.2\n", "bench.csv:2: text follows a closing double quote");
    plw_tube *tube = tube_of(PLW_KIND_TRIODE);
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_observation_file_read_memory("bench.csv", "plate_volts\0", 12, tube, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "bench.csv:1: a byte of value 0"));
    assert_int_equal(plw_observation_file_read("/nonexistent/bench.csv", tube, &error), PLW_E_FILE);
    assert_non_null(strstr(error.text, "/nonexistent/bench.csv: cannot be read"));
    assert_int_equal(plw_observation_file_read("/", tube, &error), PLW_E_FILE);
    plw_tube_free(tube);
}

static void test_wrong_columns(void **state) {
    (void)state;
    expect_refusal("plate_volts,grid_volts,plate_mW\n", "bench.csv:1: column 'plate_mW': is not known; the unit stands "
                                                        "in the name: plate_volts, plate_ma");
    expect_refusal("plate_volts,grid,plate_ma\n",
                   "column 'grid': is not known; the unit stands in the name: grid_volts");
    expect_refusal("plate_volts,gird_volts,plate_ma\n", "column 'gird_volts': is not known; grid_volts is");
    expect_refusal("plate_volts,grid_volts,plate_ma,serial number of the meter\n", "the columns are plate_volts,");
    expect_refusal("plate_volts,grid_volts,plate_ma,plate_ma\n", "column 'plate_ma': column 3 says the same");
    expect_refusal("plate_volts,grid_volts,plate_ma,plate_amps\n", "column 'plate_amps': column 3 says the same");
    expect_refusal("plate_volts,,plate_ma\n", "bench.csv:1: column ''");
    expect_refusal(HEAD "100,-3.5\n", "bench.csv:2: 2 cells where the first line names 3 columns");
    expect_refusal(HEAD "100,-3.5,11.2\n100,-3.5,11.2,7\n", "bench.csv:3: 4 cells");
    /* A decimal comma makes a cell too many. */
    expect_refusal(HEAD "100,-3,5,11.2\n", "bench.csv:2: 4 cells");
}

static void test_cells_that_are_no_numbers(void **state) {
    (void)state;
    expect_refusal(HEAD "100,-3.5,eleven\n", "bench.csv:2: plate_ma:");
    expect_refusal(HEAD "100,-3.5,45V\n", "bench.csv:2: plate_ma:");
    expect_refusal(HEAD "100mA,-3.5,45\n", "bench.csv:2: plate_volts:");
    expect_refusal(HEAD "100,-3.5,nan\n", "bench.csv:2: plate_ma:");
    expect_refusal(HEAD "100,inf,45\n", "bench.csv:2: grid_volts:");
    expect_refusal(HEAD "100,-3.5,1e999\n", "bench.csv:2: plate_ma:");
    expect_refusal(HEAD "1e12,-3.5,45\n", "bench.csv:2: plate_volts: 1e12 is out of range; it must lie between 0V and");
    expect_refusal(HEAD "100,-3.5,45000\n", "bench.csv:2: plate_ma: 45000 is out of range; it must lie between 0mA and "
                                            "5000mA");
    expect_refusal(HEAD "100,-3.5,-45\n",
                   "bench.csv:2: plate_ma: -45: a current into plate or screen is never negative");
    expect_refusal("plate_volts;grid_volts;plate_ma\n100;-3,5;11,2\n", "bench.csv:2: grid_volts:");
}

static void test_words(void **state) {
    (void)state;
    expect_refusal("kind," HEAD "bend,100,-3.5,11.2\n", "bench.csv:2: kind: 'bend' is not known; row, curve,");
    expect_refusal("kind," HEAD "remark,100,-3.5,11.2\n", "kind: 'remark' is not known");
    expect_refusal("connection," HEAD "ultralinear,100,-3.5,11.2\n", "connection: 'ultralinear' is not known");
    expect_refusal("connection," HEAD "pentode,100,-3.5,11.2\n", "connection: a triode has no screen");
    expect_refusal("how," HEAD "guessed,100,-3.5,11.2\n", "how: 'guessed' is not known");
    expect_refusal("confidence," HEAD "some,100,-3.5,11.2\n", "confidence: 'some' is not known");
}

static void test_what_is_missing(void **state) {
    (void)state;
    expect_refusal(HEAD ",-3.5,11.2\n", "bench.csv:2: plate_volts: is missing");
    expect_refusal(HEAD "100,,11.2\n", "bench.csv:2: grid_volts: is missing");
    expect_refusal(HEAD "100,-3.5,\n", "bench.csv:2: plate_ma: is missing");
    expect_refusal("kind," HEAD "row,,-3.5,11.2\n", "bench.csv:2: plate_volts: is missing");
    expect_refusal("kind," HEAD "row,100,,11.2\n", "neither grid_volts nor cathode_resistor_ohms");
    expect_refusal("kind," HEAD "row,100,-3.5,\n", "plate_ma: is missing; a row");
    expect_refusal("power_watts," HEAD "2.1,100,-3.5,11.2\n", "need load_ohms and drive_peak_volts");
    expect_refusal("kind,power_watts," HEAD "curve,2.1,100,-3.5,11.2\n",
                   "bench.csv:2: power_watts: belongs to a row; leave it empty, or make the kind 'row'");
    expect_refusal("kind,mu," HEAD "curve,8,100,-3.5,11.2\n", "belong to the kind characteristics, not to curve");
    expect_refusal("kind,mu," HEAD "inner-mu,8,100,-3.5,\n", "a triode has no screen");
    expect_refusal("screen_volts," HEAD "200,100,-3.5,11.2\n", "screen_volts: a triode has no screen");
    expect_refusal("screen_ma," HEAD "2,100,-3.5,11.2\n", "screen_ma: a triode has no screen");
    expect_refusal_of(PLW_KIND_PENTODE, HEAD "100,-3.5,11.2\n", "screen_volts: is missing; needed in pentode");
    expect_refusal_of(PLW_KIND_PENTODE, "connection,screen_volts," HEAD "triode,80,100,-3.5,11.2\n",
                      "in triode connection the screen is at the plate");
    expect_refusal_of(PLW_KIND_PENTODE, "connection,screen_ma," HEAD "triode,8,100,-3.5,11.2\n",
                      "plate_ma is plate and screen together");
    expect_refusal_of(PLW_KIND_PENTODE, "kind,mu,screen_volts," HEAD "inner-mu,,90,100,-3.5,\n", "mu is missing");
}

static void test_repeated_lines(void **state) {
    (void)state;
    expect_refusal(GOOD "150,-3.5,24.1\n", "bench.csv:5: repeats line 3 in every number");
    expect_refusal("kind," HEAD "row,100,-3.5,11.2\nrow,100,-3.5,11.2\n", "bench.csv:3: repeats line 2");
    /* The same place measured again is no repetition: it weighs more, and the fit compares the two. */
    plw_tube *tube = tube_of(PLW_KIND_TRIODE);
    assert_int_equal(read_text(tube, GOOD "150,-3.5,24.3\n", NULL), PLW_OK);
    plw_tube_free(tube);
}

static void test_too_little_for_a_fit(void **state) {
    (void)state;
    expect_refusal(HEAD "100,-3.5,11.2\n150,-3.5,24.1\n", "bench.csv:3: 2 figures that can be fitted");
    expect_refusal("confidence," HEAD "low,100,-3.5,11.2\nlow,150,-3.5,24.1\nlow,150,-6.1,12.9\n", "0 figures");
    expect_refusal(HEAD "150,-2,35\n150,-3.5,24.1\n150,-6.1,12.9\n150,-7,8\n",
                   "bench.csv:5: all points lie on one line of voltages");
    expect_refusal(HEAD "100,-4,9\n150,-4,21.1\n200,-4,42.9\n", "add points at other plate volts and other grid volts");
    expect_refusal(HEAD "100,-4,9\n150,-6,14.1\n200,-8,21.9\n", "all points lie on one line");
    expect_refusal(HEAD "100,-4,9\n100,-4,9.1\n100,-4,9.2\n", "all points lie on one line");
    /* One row with gm and plate resistance is enough. */
    plw_tube *tube = tube_of(PLW_KIND_TRIODE);
    assert_int_equal(read_text(tube, "kind,gm_umho,plate_resistance_ohms," HEAD "row,5250,800,250,-45,60\n", NULL),
                     PLW_OK);
    assert_int_equal(tube->rows_count, 1);
    plw_tube_free(tube);
}

static void test_too_much(void **state) {
    (void)state;
    enum { LINES = 1200, ROOM = 40 * LINES };
    char *text = malloc(ROOM);
    assert_non_null(text);
    const int lines[] = {650, LINES};
    const char *const wanted[] = {"600 figures or more", "more than 1000 lines"};
    for (int round = 0; round < 2; round++) {
        size_t length = (size_t)snprintf(text, ROOM, HEAD);
        for (int i = 0; i < lines[round]; i++) {
            length += (size_t)snprintf(text + length, ROOM - length, "%d,-3.5,%d.5\n", 50 + i, 5 + i);
        }
        expect_refusal(text, wanted[round]);
    }
    free(text);
}

/* Ten are told one by one, the rest counted. */
static void test_many_faults(void **state) {
    (void)state;
    char text[600] = HEAD;
    for (int i = 0; i < 14; i++) {
        strcat(text, "100,-3.5,bad\n");
    }
    plw_tube *tube = tube_of(PLW_KIND_TRIODE);
    plw_error error = {.status = PLW_OK};
    assert_int_equal(read_text(tube, text, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "bench.csv:11: plate_ma"));
    assert_null(strstr(error.text, "bench.csv:12:"));
    assert_non_null(strstr(error.text, "14 faults in all"));
    plw_tube_free(tube);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_points),
        cmocka_unit_test(test_rows_and_points_mixed),
        cmocka_unit_test(test_order_of_columns_does_not_matter),
        cmocka_unit_test(test_no_table),
        cmocka_unit_test(test_wrong_columns),
        cmocka_unit_test(test_cells_that_are_no_numbers),
        cmocka_unit_test(test_words),
        cmocka_unit_test(test_what_is_missing),
        cmocka_unit_test(test_repeated_lines),
        cmocka_unit_test(test_too_little_for_a_fit),
        cmocka_unit_test(test_too_much),
        cmocka_unit_test(test_many_faults),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
