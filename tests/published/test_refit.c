/* The committed coefficients are what the printed rows in the same file give: every type is fitted again.
 * Tolerance: 0.1 % of each determined coefficient and of the currents; the file holds six digits, and another
 * processor's last bits may end the iteration elsewhere within its own tolerance.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/fit.h"
#include "rows.h"

static int compare_laws(const plw_tube *tube, const plw_model *again) {
    int failures = 0;
    for (size_t index = 0; index < plw_law_coefficient_count(again->law.kind); index++) {
        const double committed = tube->model.law.coefficient[index];
        const double fitted = again->law.coefficient[index];
        if (isfinite(again->relative_error[index]) && !(fabs(fitted - committed) <= 1e-3 * fabs(committed))) {
            print_error("%s: %s is %.6g in the file, %.6g fitted again\n", tube->type,
                        plw_law_coefficient_name(again->law.kind, index), committed, fitted);
            failures++;
        }
    }
    return failures;
}

static void test_committed_coefficients(void **state) {
    (void)state;
    plw_catalogue *catalogue = open_tubedata();
    const plw_tube *const *tubes;
    size_t count;
    plw_error error = {0};
    assert_int_equal(plw_catalogue_all(catalogue, &tubes, &count, &error), PLW_OK);
    int failures = 0;
    int fitted = 0;
    static plw_fit fit;
    for (size_t index = 0; index < count; index++) {
        if (tubes[index]->kind == PLW_KIND_RECTIFIER) {
            continue;
        }
        if (plw_fit_tube(tubes[index], false, &fit, &error) != PLW_OK) {
            fail_msg("%s: %s", tubes[index]->type, error.text);
        }
        failures += compare_laws(tubes[index], &fit.model);
        fitted++;
    }
    plw_catalogue_free(catalogue);
    print_message("%d types fitted again\n", fitted);
    assert_true(fitted >= 45);
    assert_int_equal(failures, 0);
}

int main(void) {
    const struct CMUnitTest tests[] = {cmocka_unit_test(test_committed_coefficients)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
