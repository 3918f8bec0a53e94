/* Least squares: straight lines by hand, what is not determined, places outside the domain, every error.
 * GSL's error handler is left as it is: a call that reached it would end the test.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/least_squares.h"

#include <string.h>

#include "near.h"

enum { POINTS = 5 };
static const double line_x[POINTS] = {1.3, 2.1, 2.9, 4.4, 5.2};
static const double line_y[POINTS] = {2.45, 3.31, 4.62, 6.03, 7.29};

/* y = a + b x */
static void line(const double *place, void *context, double *residual) {
    (void)context;
    for (size_t i = 0; i < POINTS; i++) {
        residual[i] = place[0] + place[1] * line_x[i] - line_y[i];
    }
}

/* Two coordinates that do the same, and a third that does nothing. */
static void twins(const double *place, void *context, double *residual) {
    (void)context;
    for (size_t i = 0; i < POINTS; i++) {
        residual[i] = (place[0] + place[1]) * line_x[i] - line_y[i];
    }
}

static void idle(const double *place, void *context, double *residual) {
    (void)context;
    for (size_t i = 0; i < POINTS; i++) {
        residual[i] = place[0] * line_x[i] - line_y[i];
    }
}

/* Only defined for a positive place: sqrt(a x) */
static void root(const double *place, void *context, double *residual) {
    (void)context;
    for (size_t i = 0; i < POINTS; i++) {
        residual[i] = sqrt(place[0] * line_x[i]) - line_y[i];
    }
}

static void nowhere(const double *place, void *context, double *residual) {
    (void)context;
    for (size_t i = 0; i < POINTS; i++) {
        residual[i] = (double)NAN * place[0];
    }
}

static plw_least_squares core(plw_residual_function function, size_t p) {
    return (plw_least_squares){
        .residuals = function, .n = POINTS, .p = p, .iterations_most = 100, .tol_step = 1e-10, .tol_gradient = 1e-12};
}

/* Where two coordinates come to. */
typedef struct {
    double place[2], covariance[4];
    plw_least_squares_end end;
} solution;

static solution solve(const plw_least_squares *problem, double first, double second) {
    const double start[] = {first, second};
    solution s;
    assert_int_equal(plw_least_squares_solve(problem, start, 1, s.place, s.covariance, &s.end, NULL), PLW_OK);
    return s;
}

static double sum_of_products(const double a[POINTS], const double b[POINTS]) {
    double sum = 0.0;
    for (size_t i = 0; i < POINTS; i++) {
        sum += a[i] * b[i];
    }
    return sum;
}

static void test_line(void **state) {
    (void)state;
    static const double ones[POINTS] = {1.0, 1.0, 1.0, 1.0, 1.0};
    const double sx = sum_of_products(ones, line_x);
    const double sy = sum_of_products(ones, line_y);
    const double sxx = sum_of_products(line_x, line_x);
    const double sxy = sum_of_products(line_x, line_y);
    const double determinant = POINTS * sxx - sx * sx;
    plw_least_squares problem = core(line, 2);
    for (int way = 0; way < 4; way++) {
        problem.careful = (way & 1) != 0;
        problem.central = (way & 2) != 0;
        const solution s = solve(&problem, 7.3, -2.9);
        assert_near(s.place[0], (sxx * sy - sx * sxy) / determinant, 1e-7, "normal equations");
        assert_near(s.place[1], (POINTS * sxy - sx * sy) / determinant, 1e-7, "normal equations");
        assert_near_relative(s.covariance[0], sxx / determinant, 1e-6, "normal equations");
        assert_near_relative(s.covariance[1], -sx / determinant, 1e-6, "normal equations");
        assert_near_relative(s.covariance[2], -sx / determinant, 1e-6, "normal equations");
        assert_near_relative(s.covariance[3], POINTS / determinant, 1e-6, "normal equations");
        assert_near_relative(s.end.own_share_least, sqrt(determinant / (POINTS * sxx)), 1e-6, "1 - R squared");
        assert_false(s.end.singular);
    }
}

static void test_twins_are_singular(void **state) {
    (void)state;
    const plw_least_squares problem = core(twins, 2);
    const solution s = solve(&problem, 0.7, 1.9);
    assert_true(s.end.singular);
    assert_near(s.place[0] + s.place[1], sum_of_products(line_x, line_y) / sum_of_products(line_x, line_x), 1e-7,
                "the sum is determined all the same");
    for (size_t i = 0; i < 4; i++) {
        assert_true(isnan(s.covariance[i]));
    }
}

static void test_no_effect_gives_no_variance(void **state) {
    (void)state;
    const plw_least_squares problem = core(idle, 2);
    const solution s = solve(&problem, 0.7, 1.9);
    assert_true(s.end.singular);
    assert_true(s.end.own_share_least == 0.0);
    assert_true(isfinite(s.covariance[0]) && s.covariance[0] > 0.0);
    assert_true(isnan(s.covariance[1]) && isnan(s.covariance[2]) && isnan(s.covariance[3]));
    assert_near(s.place[1], 1.9, 0.0, "stays where it started");
}

static void test_domain(void **state) {
    (void)state;
    const double starts[] = {-3.0, 60.0};
    double place[1];
    plw_least_squares_end end;
    const plw_least_squares problem = core(root, 1);
    assert_int_equal(plw_least_squares_solve(&problem, starts, 2, place, NULL, &end, NULL), PLW_OK);
    assert_int_equal(end.start, 1); /* the first lies outside */
    double sx = 0.0;
    double sxy = 0.0;
    for (size_t i = 0; i < POINTS; i++) {
        sx += line_x[i];
        sxy += sqrt(line_x[i]) * line_y[i];
    }
    assert_near(place[0], sxy * sxy / (sx * sx), 1e-6, "linear in the root of the place");
}

static void expect_refusal(const plw_least_squares *problem, size_t starts, plw_status status, const char *word) {
    const double start[] = {0.7, 1.9};
    double place[2] = {2.385, 2.385};
    plw_least_squares_end end = {.iterations = 77};
    plw_error error = {0};
    assert_int_equal(plw_least_squares_solve(problem, start, starts, place, NULL, &end, &error), status);
    assert_non_null(strstr(error.text, word));
    assert_true(place[0] == 2.385 && place[1] == 2.385 && end.iterations == 77); /* untouched */
}

static void test_refusals(void **state) {
    (void)state;
    plw_least_squares problem = core(line, 2);
    expect_refusal(&problem, 0, PLW_E_USAGE, "0 starts");
    problem.n = 1;
    expect_refusal(&problem, 1, PLW_E_USAGE, "1 residuals");
    problem = core(line, 0);
    expect_refusal(&problem, 1, PLW_E_USAGE, "0 coordinates");
    problem = core(line, 17);
    problem.n = 20;
    expect_refusal(&problem, 1, PLW_E_USAGE, "17 coordinates");
    problem = core(line, 2);
    problem.tol_step = 0.0;
    expect_refusal(&problem, 1, PLW_E_USAGE, "tolerances");
    problem = core(line, 2);
    problem.tol_gradient = (double)NAN;
    expect_refusal(&problem, 1, PLW_E_USAGE, "tolerances");
    problem = core(line, 2);
    problem.difference_step = -1e-5;
    expect_refusal(&problem, 1, PLW_E_USAGE, "tolerances");
    problem = core(line, 2);
    problem.iterations_most = 0;
    expect_refusal(&problem, 1, PLW_E_USAGE, "iterations");
    problem = core(nowhere, 2);
    expect_refusal(&problem, 1, PLW_E_NO_CONVERGENCE, "no start");
}

static void test_too_few_iterations_are_told(void **state) {
    (void)state;
    const double start[] = {400.0};
    double place[1];
    plw_least_squares_end end;
    plw_least_squares problem = core(root, 1);
    problem.iterations_most = 1;
    assert_int_equal(plw_least_squares_solve(&problem, start, 1, place, NULL, &end, NULL), PLW_OK);
    assert_int_equal(end.settled, PLW_SETTLED_LATE);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_line),
        cmocka_unit_test(test_twins_are_singular),
        cmocka_unit_test(test_no_effect_gives_no_variance),
        cmocka_unit_test(test_domain),
        cmocka_unit_test(test_refusals),
        cmocka_unit_test(test_too_few_iterations_are_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
