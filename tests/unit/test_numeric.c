/* Softplus, monotone cubic and two linear equations: identities and invariants.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/numeric.h"
#include "near.h"

static void softplus_is_accurate_at_both_ends(void **state) {
    (void)state;
    assert_near_relative(plw_softplus(-700.0), exp(-700.0), 1e-15, "ln(1+e) = e where e^2 is lost");
    assert_near_relative(plw_softplus(-40.25), exp(-40.25), 1e-15, "the same");
    assert_near_relative(plw_softplus(2.385), 2.473092357134352956, 4e-16, "definition, worked to 40 digits");
    assert_near_relative(plw_softplus(-2.385), 0.0880923571343531694, 4e-16, "definition, worked to 40 digits");
    assert_near_relative(plw_softplus(40.25), 40.25, 1e-15, "ln(1+e^x) = x");
    assert_near_relative(plw_softplus(1e300), 1e300, 1e-15, "the same");
    assert_true(plw_softplus(-1e300) == 0.0);
    assert_true(isinf(plw_softplus((double)INFINITY)));
    assert_true(isnan(plw_softplus((double)NAN)));
    for (int step = -40; step < 40; step++) {
        const double x = 0.737 * step;
        assert_near(plw_softplus(x) - plw_softplus(-x), x, 8e-15, "s(x) - s(-x) = x");
    }
}

static void logistic_is_the_derivative_of_softplus(void **state) {
    (void)state;
    const double width = 1e-4;
    for (int step = -27; step < 27; step++) {
        const double x = 0.737 * step;
        const double slope = (plw_softplus(x + width) - plw_softplus(x - width)) / (2.0 * width);
        /* Truncation width^2 / 6 times a third derivative of at most 0.0963: 1.6e-10; rounding of numbers up to 20 over
         * twice the width: 0.2e-10. */
        assert_near(plw_logistic(x), slope, 2e-10, "central difference");
        assert_near(plw_logistic(x) + plw_logistic(-x), 1.0, 4e-16, "identity");
    }
    assert_near_relative(plw_logistic(-700.0), exp(-700.0), 1e-15, "foot");
    assert_true(plw_logistic(-1e300) == 0.0);
    assert_true(plw_logistic(1e300) == 1.0);
}

enum { COUNT = 7 };
/* A supply's regulation line with a knee, a flat and uneven steps. */
static const double AMPS[COUNT] = {0.0, 0.005, 0.02, 0.045, 0.05, 0.1, 0.22};
static const double VOLTS[COUNT] = {325.0, 303.0, 291.5, 284.2, 284.2, 262.0, 204.0};

static void cubic_goes_through_its_points_and_is_smooth(void **state) {
    (void)state;
    double tangent[COUNT];
    plw_monotone_cubic_tangents(COUNT, AMPS, VOLTS, tangent);
    for (size_t k = 0; k < COUNT; k++) {
        double value = 0.0;
        double slope = 0.0;
        double before = 0.0;
        double after = 0.0;
        plw_monotone_cubic_at(COUNT, AMPS, VOLTS, tangent, AMPS[k], &value, &slope);
        assert_near(value, VOLTS[k], 1e-10, "interpolation");
        assert_near(slope, tangent[k], 1e-9, "tangent");
        plw_monotone_cubic_at(COUNT, AMPS, VOLTS, tangent, AMPS[k] - 1e-9, NULL, &before);
        plw_monotone_cubic_at(COUNT, AMPS, VOLTS, tangent, AMPS[k] + 1e-9, NULL, &after);
        assert_near(before, after, 0.01, "slope is continuous: 2 nA times a curvature below 3e6 V/A^2");
    }
}

static void cubic_is_monotone(void **state) {
    (void)state;
    double tangent[COUNT];
    plw_monotone_cubic_tangents(COUNT, AMPS, VOLTS, tangent);
    double last = 1e9;
    double value = 0.0;
    for (int step = -1000; step < 25000; step++) {
        const double amps = 1.0037e-5 * step;
        double slope = 0.0;
        double above = 0.0;
        double below = 0.0;
        plw_monotone_cubic_at(COUNT, AMPS, VOLTS, tangent, amps, &value, &slope);
        assert_true(slope <= 1e-9);
        assert_true(value <= last + 1e-10);
        last = value;
        plw_monotone_cubic_at(COUNT, AMPS, VOLTS, tangent, amps + 1e-8, &above, NULL);
        plw_monotone_cubic_at(COUNT, AMPS, VOLTS, tangent, amps - 1e-8, &below, NULL);
        assert_near(slope, (above - below) / 2e-8, 0.1, "slope is that of the value");
    }
    plw_monotone_cubic_at(COUNT, AMPS, VOLTS, tangent, 0.0471, &value, NULL);
    assert_near(value, 284.2, 1e-10, "level between equal points");
}

/* A steep step after a nearly flat stretch: the three-point tangents are too steep there and must be drawn back. */
static void cubic_does_not_overshoot_a_step(void **state) {
    (void)state;
    const double x[4] = {0.0, 1.0, 2.0, 3.0};
    const double y[4] = {0.0, 0.001, 10.0, 10.002};
    double tangent[4];
    plw_monotone_cubic_tangents(4, x, y, tangent);
    /* By hand: three-point 5.0 at x = 1 against a secant of 0.001 to its left; the length is drawn back to 3 secants.
     */
    assert_true(tangent[1] > 0.0 && tangent[1] <= 0.003 * (1.0 + 1e-12));
    double last = -1.0;
    for (int step = 0; step <= 3000; step++) {
        double value = 0.0;
        plw_monotone_cubic_at(4, x, y, tangent, 0.001 * step, &value, NULL);
        assert_true(value >= last - 1e-12);
        last = value;
    }
}

static void cubic_reproduces_a_straight_line_and_a_parabola(void **state) {
    (void)state;
    const double x[5] = {-1.3, 0.4, 1.0, 2.7, 5.1};
    double line[5];
    double parabola[5];
    for (size_t k = 0; k < 5; k++) {
        line[k] = 2.385 - 0.71 * x[k];
        parabola[k] = 0.31 * (x[k] + 3.0) * (x[k] + 3.0);
    }
    double tangent[5];
    double value = 0.0;
    double slope = 0.0;
    plw_monotone_cubic_tangents(5, x, line, tangent);
    for (int step = -10; step < 20; step++) {
        const double at = 0.37 * step;
        plw_monotone_cubic_at(5, x, line, tangent, at, &value, &slope);
        assert_near(value, 2.385 - 0.71 * at, 1e-13, "straight line, also beyond its ends");
        assert_near(slope, -0.71, 1e-13, "straight line, also beyond its ends");
    }
    /* Three-point differences are exact for a parabola, and on this one none is drawn back. */
    plw_monotone_cubic_tangents(5, x, parabola, tangent);
    for (int step = -6; step < 24; step++) {
        const double at = 0.21 * step;
        plw_monotone_cubic_at(5, x, parabola, tangent, at, &value, &slope);
        assert_near(value, 0.31 * (at + 3.0) * (at + 3.0), 1e-12, "parabola");
        assert_near(slope, 0.62 * (at + 3.0), 1e-12, "parabola");
    }
}

static void cubic_of_one_and_two_points_and_a_peak(void **state) {
    (void)state;
    const double x[3] = {0.3, 1.1, 2.0};
    const double y[3] = {4.0, 7.2, 5.0};
    double tangent[3] = {9.0, 9.0, 9.0};
    double value = 0.0;
    double slope = 9.0;
    plw_monotone_cubic_tangents(0, x, y, tangent);
    assert_near(tangent[0], 9.0, 0.0, "untouched");
    plw_monotone_cubic_tangents(1, x, y, tangent);
    plw_monotone_cubic_at(1, x, y, tangent, 17.0, &value, &slope);
    assert_near(value, 4.0, 0.0, "one point is a constant");
    assert_near(slope, 0.0, 0.0, "one point is a constant");
    plw_monotone_cubic_tangents(2, x, y, tangent);
    plw_monotone_cubic_at(2, x, y, tangent, 0.7, &value, &slope);
    assert_near(value, 5.6, 1e-14, "two points are a line");
    assert_near(slope, 4.0, 1e-14, "two points are a line");
    plw_monotone_cubic_at(2, x, y, tangent, 2.1, &value, NULL);
    assert_near(value, 11.2, 1e-13, "and it goes on");
    plw_monotone_cubic_tangents(3, x, y, tangent);
    assert_near(tangent[1], 0.0, 0.0, "level at a peak");
    for (int step = 0; step <= 170; step++) {
        plw_monotone_cubic_at(3, x, y, tangent, 0.3 + 0.01 * step, &value, NULL);
        assert_true(value >= 4.0 - 1e-12 && value <= 7.2 + 1e-12);
    }
}

static void two_equations_are_solved(void **state) {
    (void)state;
    const double matrix[2][2] = {{2.385, -0.71}, {0.43, 5.19}};
    const double right[2] = {2.385 * 3.3 + 0.71 * 1.7, 0.43 * 3.3 - 5.19 * 1.7};
    double solution[2] = {0.0, 0.0};
    assert_true(plw_solve_2x2(matrix, right, solution));
    assert_near(solution[0], 3.3, 1e-14, "made so");
    assert_near(solution[1], -1.7, 1e-14, "made so");
    /* Rows of very different size: products of the bare entries would underflow and overflow. */
    const double uneven[2][2] = {{2.385e-200, -0.71e-200}, {0.43e200, 5.19e200}};
    const double uneven_right[2] = {right[0] * 1e-200, right[1] * 1e200};
    assert_true(plw_solve_2x2(uneven, uneven_right, solution));
    assert_near(solution[0], 3.3, 1e-14, "made so");
    assert_near(solution[1], -1.7, 1e-14, "made so");
    /* A zero on the diagonal is no hindrance. */
    const double crossed[2][2] = {{0.0, 2.0}, {4.0, 0.0}};
    const double crossed_right[2] = {3.0, 5.0};
    assert_true(plw_solve_2x2(crossed, crossed_right, solution));
    assert_near(solution[0], 1.25, 1e-15, "by hand");
    assert_near(solution[1], 1.5, 1e-15, "by hand");
}

static void two_equations_without_an_answer_are_refused(void **state) {
    (void)state;
    const double right[2] = {1.3, 2.6};
    double solution[2] = {7.0, 8.0};
    const double parallel[2][2] = {{0.1, 0.3}, {0.2, 0.6}};
    const double nearly[2][2] = {{1.0 / 3.0, 0.7}, {1.0, 2.1}};
    const double empty[2][2] = {{0.0, 0.0}, {0.2, 0.6}};
    const double not_finite[2][2] = {{(double)INFINITY, 0.3}, {0.2, 0.6}};
    const double not_number[2][2] = {{0.1, 0.3}, {(double)NAN, 0.6}};
    assert_false(plw_solve_2x2(parallel, right, solution));
    assert_false(plw_solve_2x2(nearly, right, solution));
    assert_false(plw_solve_2x2(empty, right, solution));
    assert_false(plw_solve_2x2(not_finite, right, solution));
    assert_false(plw_solve_2x2(not_number, right, solution));
    const double good[2][2] = {{0.1, 0.3}, {-0.2, 0.6}};
    const double bad_right[2] = {(double)NAN, 1.0};
    assert_false(plw_solve_2x2(good, bad_right, solution));
    const double tiny[2][2] = {{1e-300, 0.0}, {0.0, 1e-300}};
    const double huge_right[2] = {1e300, 1.0};
    assert_false(plw_solve_2x2(tiny, huge_right, solution));
    assert_near(solution[0], 7.0, 0.0, "untouched");
    assert_near(solution[1], 8.0, 0.0, "untouched");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(softplus_is_accurate_at_both_ends),
        cmocka_unit_test(logistic_is_the_derivative_of_softplus),
        cmocka_unit_test(cubic_goes_through_its_points_and_is_smooth),
        cmocka_unit_test(cubic_is_monotone),
        cmocka_unit_test(cubic_does_not_overshoot_a_step),
        cmocka_unit_test(cubic_reproduces_a_straight_line_and_a_parabola),
        cmocka_unit_test(cubic_of_one_and_two_points_and_a_peak),
        cmocka_unit_test(two_equations_are_solved),
        cmocka_unit_test(two_equations_without_an_answer_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
