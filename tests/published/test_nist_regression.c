/* The least-squares core on certified problems of average and higher difficulty, from both published starts.
 * Source: NIST Statistical Reference Datasets, nonlinear regression (see nist_regression.h).
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/least_squares.h"

#include <string.h>

#include "near.h"
#include "nist_regression.h"

enum { PROBLEMS = sizeof nist_problems / sizeof nist_problems[0] };
#define SOURCE "NIST Statistical Reference Datasets, nonlinear regression"

static void residuals(const double *place, void *context, double *residual) {
    const nist_problem *problem = context;
    for (size_t i = 0; i < problem->n; i++) {
        residual[i] = problem->model(place, problem->x[i]) - problem->y[i];
    }
}

/* The certified sum of squares follows from the certified parameters: data and parameters are the published ones.
 * Tolerance: the sum is at its least there, so eleven digits of the parameters give at least ten of it. */
static void test_data_are_the_published_ones(void **state) {
    (void)state;
    for (size_t i = 0; i < PROBLEMS; i++) {
        const nist_problem *problem = &nist_problems[i];
        nist_problem copy = *problem;
        double residual[64];
        residuals(problem->certified, &copy, residual);
        double sum = 0.0;
        for (size_t j = 0; j < problem->n; j++) {
            sum += residual[j] * residual[j];
        }
        assert_near_relative(sum, problem->sum_of_squares, 1e-9, SOURCE);
    }
}

/* Where the plain way, from the first of the published starts, does not reach the certified place: it slides to a
 * plateau (BoxBOD) or creeps along a valley (MGH10).  It must then say so. */
static bool plain_way_fails(const nist_problem *problem, size_t start) {
    return start == 0 && (strcmp(problem->name, "BoxBOD") == 0 || strcmp(problem->name, "MGH10") == 0);
}

/* Tolerance: derivatives by differences to one side are good to about 1e-8, which a place where others imitate a
 * coordinate but for its own share (1e-3 in the worst of these) shows as 1e-5. */
#define TOLERANCE 1e-5

static void solve(const nist_problem *problem, size_t start, bool careful) {
    nist_problem copy = *problem;
    const plw_least_squares core = {.residuals = residuals,
                                    .context = &copy,
                                    .n = problem->n,
                                    .p = problem->p,
                                    .careful = careful,
                                    .iterations_most = 3000,
                                    .tol_step = 1e-12,
                                    .tol_gradient = 1e-14};
    double place[NIST_PARAMETERS_MOST];
    double covariance[NIST_PARAMETERS_MOST * NIST_PARAMETERS_MOST];
    plw_least_squares_end end;
    plw_error error = {0};
    if (plw_least_squares_solve(&core, problem->start[start], 1, place, covariance, &end, &error) != PLW_OK) {
        fail_msg("%s from start %zu: %s", problem->name, start + 1, error.text);
    }
    print_message("%-9s start %zu, %-7s way: %4zu iterations, least own share %.1g, sum %.11g\n", problem->name,
                  start + 1, careful ? "careful" : "plain", end.iterations, end.own_share_least, end.sum_of_squares);
    if (!careful && plain_way_fails(problem, start)) {
        assert_true(end.singular || end.settled == PLW_SETTLED_LATE);
        return;
    }
    assert_false(end.singular);
    assert_int_not_equal(end.settled, PLW_SETTLED_LATE);
    assert_near_relative(end.sum_of_squares, problem->sum_of_squares, 1e-9, SOURCE);
    const double variance = end.sum_of_squares / (double)(problem->n - problem->p);
    for (size_t i = 0; i < problem->p; i++) {
        assert_near_relative(place[i], problem->certified[i], TOLERANCE, SOURCE);
        assert_near_relative(sqrt(variance * covariance[i * problem->p + i]), problem->deviation[i], TOLERANCE, SOURCE);
    }
}

static void test_plain_way(void **state) {
    (void)state;
    for (size_t i = 0; i < PROBLEMS; i++) {
        solve(&nist_problems[i], 0, false);
        solve(&nist_problems[i], 1, false);
    }
}

static void test_careful_way(void **state) {
    (void)state;
    for (size_t i = 0; i < PROBLEMS; i++) {
        solve(&nist_problems[i], 0, true);
        solve(&nist_problems[i], 1, true);
    }
}

/* Both starts given together: the better end counts, and it is said which start led there. */
static void test_several_starts(void **state) {
    (void)state;
    for (size_t i = 0; i < PROBLEMS; i++) {
        nist_problem copy = nist_problems[i];
        const plw_least_squares core = {.residuals = residuals,
                                        .context = &copy,
                                        .n = copy.n,
                                        .p = copy.p,
                                        .central = true,
                                        .iterations_most = 1000,
                                        .tol_step = 1e-10,
                                        .tol_gradient = 1e-12};
        double starts[2 * NIST_PARAMETERS_MOST];
        for (size_t index = 0; index < 2 * copy.p; index++) {
            starts[index] = copy.start[index / copy.p][index % copy.p];
        }
        double place[NIST_PARAMETERS_MOST];
        plw_least_squares_end end;
        assert_int_equal(plw_least_squares_solve(&core, starts, 2, place, NULL, &end, NULL), PLW_OK);
        assert_near_relative(end.sum_of_squares, copy.sum_of_squares, 1e-9, SOURCE);
        for (size_t index = 0; index < copy.p; index++) {
            assert_near_relative(place[index], copy.certified[index], TOLERANCE, SOURCE);
        }
        if (plain_way_fails(&copy, 0)) {
            assert_int_equal(end.start, 1);
        }
    }
}

int main(void) {
    const struct CMUnitTest tests[] = {cmocka_unit_test(test_data_are_the_published_ones),
                                       cmocka_unit_test(test_plain_way), cmocka_unit_test(test_careful_way),
                                       cmocka_unit_test(test_several_starts)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
