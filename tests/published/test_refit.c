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

typedef struct {
    int fitted, failures;
} tally;

static void fit_again(const plw_tube *tube, void *context) {
    static plw_fit fit;
    tally *count = context;
    plw_error error = {0};
    if (plw_fit_tube(tube, false, &fit, &error) != PLW_OK) {
        fail_msg("%s: %s", tube->type, error.text);
    }
    count->failures += compare_laws(tube, &fit.model);
    count->fitted++;
}

static void test_committed_coefficients(void **state) {
    (void)state;
    tally count = {0, 0};
    visit_tubes(fit_again, &count);
    print_message("%d types fitted again\n", count.fitted);
    assert_true(count.fitted >= 45);
    assert_int_equal(count.failures, 0);
}

int main(void) {
    const struct CMUnitTest tests[] = {cmocka_unit_test(test_committed_coefficients)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
