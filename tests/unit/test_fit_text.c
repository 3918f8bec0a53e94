/* A fit in words: what is left open, what contradicts, what stands out, each figure beside the model's; no line wider
 * than the screen.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>
#include <string.h>

#include "bare_tube.h"
#include "near.h"
#include "platewright/observation_file.h"
#include "platewright/report.h"
#include "platewright/tube_report.h"

static plw_tube *tube_from(plw_tube_kind kind, const char *table) {
    plw_tube *tube = bare_tube("6X99", kind);
    plw_error error = {.status = PLW_OK};
    assert_non_null(tube);
    if (plw_observation_file_read_memory("sheet.csv", table, strlen(table), tube, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return tube;
}

/* Lines up to the width of the screen; letters of UTF-8 count once. */
static void expect_narrow(const char *text) {
    size_t letters = 0;
    for (; *text != '\0'; text++) {
        letters = *text == '\n' ? 0 : letters + (((unsigned char)*text & 0xC0U) != 0x80U ? 1U : 0U);
        assert_true(letters <= 80);
    }
}

static char *text_of(plw_tube *tube) {
    plw_fit *fit = calloc(1, sizeof *fit);
    char *text = NULL;
    assert_non_null(fit);
    assert_int_equal(plw_fit_tube(tube, true, fit, NULL), PLW_OK);
    tube->model = fit->model;
    tube->has_model = true;
    assert_int_equal(plw_fit_text(tube, fit, &text, NULL), PLW_OK);
    free(fit);
    expect_narrow(text);
    return text;
}

static void expect(const char *text, const char *part, bool there) {
    if ((strstr(text, part) != NULL) != there) {
        fail_msg("%s: %s in:\n%s", there ? "not" : "unduly", part, text);
    }
}

#define TRIODE "plate_volts,grid_volts,plate_ma,uncertainty_percent,confidence\n"
#define CURVES "100,-10,24.3,2,\n150,-10,61,2,\n150,-25,14.8,2,\n200,-25,44,2,\n250,-25,87,2,\n"

static void test_nothing_to_remark(void **state) {
    (void)state;
    plw_tube *tube = tube_from(PLW_KIND_TRIODE, TRIODE CURVES);
    char *text = text_of(tube);
    expect(text, "6X99\n", true);
    expect(text, "Model: koren-foot, fitted to 0 rows and 5 points", true);
    expect(text, "Cannot both be true", false);
    expect(text, "did not settle", false);
    expect(text, "Stands out", false);
    expect(text, "not used", false);
    expect(text, "  kvb: would show in currents at low plate volts and small bias\n", true);
    expect(text, "  mu: would show", false);
    expect(text, "\n  point   5  plate current                      87.0 mA ", true);
    plw_text_free(text);
    plw_tube_free(tube);
}

static void test_contradiction_and_outlier(void **state) {
    (void)state;
    plw_tube *tube = tube_from(PLW_KIND_TRIODE, TRIODE CURVES "200,-25,66,2,\n250,-27,44,2,low\n");
    char *text = text_of(tube);
    expect(text,
           "\nCannot both be true\n  point 4 (200 V, grid -25.0 V) and point 6 (200 V, grid -25.0 V): plate\n"
           "  current 44.0 mA and 66.0 mA under the same conditions\n",
           true);
    expect(text,
           "\nStands out from all the rest: look it up again, or leave it out\n  point 6 (200 V, grid -25.0 V): "
           "plate current 66.0 mA; by the others 4",
           true);
    expect(text, "point   7", false); /* of low confidence: not in the fit, and said so */
    expect(text, "\npoint 7 (250 V, grid -27.0 V): low confidence, not used\n", true);
    expect(text, "point 6 (200 V, grid -25.0 V): low confidence", false);
    plw_text_free(text);
    plw_tube_free(tube);
}

static void test_less_current_at_higher_volts(void **state) {
    (void)state;
    plw_tube *tube =
        tube_from(PLW_KIND_BEAM, "kind,plate_volts,screen_volts,cathode_resistor_ohms,grid_volts,plate_ma,screen_ma,"
                                 "gm_umho,plate_resistance_ohms\n"
                                 "row,250,250,,-12.5,45,4.5,4100,50000\nrow,300,250,,-12,33,4.5,4100,52000\n"
                                 "row,300,250,230,,48,4.5,4100,52000\n");
    char *text = text_of(tube);
    expect(text,
           "row 2 (300 V, grid -12.0 V) and row 1 (250 V, grid -12.5 V): plate current\n"
           "  33.0 mA and 45.0 mA: less current, though no voltage is lower\n",
           true);
    expect(text, "  capture: would show in a screen current at full drive", true);
    expect(text, "\n  row     3  gm                                 4.10 mS ", true);
    plw_text_free(text);
    plw_tube_free(tube);
}

/* Correlations are told with their names; a fit made by hand, as no small table gives one for certain. */
static void test_correlations(void **state) {
    (void)state;
    plw_tube *tube = tube_from(PLW_KIND_TRIODE, TRIODE CURVES);
    plw_fit *fit = calloc(1, sizeof *fit);
    char *text = NULL;
    assert_non_null(fit);
    assert_int_equal(plw_fit_tube(tube, false, fit, NULL), PLW_OK);
    fit->correlations = 1;
    fit->settled = false;
    fit->correlation[0] = (plw_fit_correlation){0, 3, -0.962};
    assert_int_equal(plw_fit_text(tube, fit, &text, NULL), PLW_OK);
    expect(text,
           "\nHardly told apart by these data: one may be off if the other makes up for it\n"
           "  mu and kp (correlation -0.962)\n",
           true);
    expect(text, "Model: none fitted yet", true);
    expect(text, "\nThe search did not settle", true);
    plw_text_free(text);
    free(fit);
    plw_tube_free(tube);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_nothing_to_remark),
        cmocka_unit_test(test_contradiction_and_outlier),
        cmocka_unit_test(test_less_current_at_higher_volts),
        cmocka_unit_test(test_correlations),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
