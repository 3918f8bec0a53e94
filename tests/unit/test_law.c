/* Laws: derivatives against differences, finiteness, continuity, shape, inversion, scaling, domain.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/law.h"

#include <float.h>
#include <string.h>

#include "near.h"
#include "unit/stages.h"

enum { LAWS = KOREN_TRIODES + TEST_PENTODES + 3 };

/* Every test law in turn; the last are triodes with contact potential and with feet of their own. */
static plw_law law_number(int index) {
    if (index < KOREN_TRIODES) {
        return koren_triode(index);
    }
    if (index < KOREN_TRIODES + TEST_PENTODES) {
        return pentode_law(index - KOREN_TRIODES);
    }
    static const double feet[] = {1.0, 0.733, 1.217};
    plw_law law = koren_triode(KOREN_12AX7);
    *coefficient_of(&law, "contact-volts") = 0.55;
    *coefficient_of(&law, "foot-growth") = feet[index - KOREN_TRIODES - TEST_PENTODES];
    return law;
}

typedef enum { BY_PLATE, BY_SCREEN, BY_GRID } electrode;

static plw_currents moved(const plw_law *law, const double volts[3], electrode which, double by) {
    double at[3] = {volts[0], volts[1], volts[2]};
    at[which] += by;
    plw_currents c;
    plw_law_evaluate(law, at[0], at[1], at[2], &c);
    return c;
}

/* Central difference of fourth order: (8 (f(h) - f(-h)) - (f(2h) - f(-2h))) / 12h. */
static double difference(double near_up, double near_down, double far_up, double far_down, double step) {
    return (8.0 * (near_up - near_down) - (far_up - far_down)) / (12.0 * step);
}

/* The difference's own error: the currents' rounding over the step (in the foot they are exponentials, whose error is
 * their exponent times a last digit), and the term of fourth order, at these steps below a millionth of the slope; and
 * what the law takes as nothing, an effective voltage below 1e-30 V. */
static void compare(double analytic, double numeric, double amps, double step, const char *which,
                    const double volts[3]) {
    const double exponent = amps > 0.0 ? 1.0 + fabs(log(amps)) : 1.0;
    const double tolerance = 2e-6 * fabs(numeric) + 8.0 * exponent * DBL_EPSILON * fabs(amps) / step + 1e-40;
    if (!(fabs(analytic - numeric) <= tolerance)) {
        fail_msg("%s at %g %g %g: %.12g, by difference %.12g +/- %.3g", which, volts[0], volts[1], volts[2], analytic,
                 numeric, tolerance);
    }
}

static void check_derivatives_at(const plw_law *law, const double volts[3]) {
    plw_currents c;
    plw_law_evaluate(law, volts[0], volts[1], volts[2], &c);
    const double plate[3] = {c.plate_by_plate, c.plate_by_screen, c.plate_by_grid};
    const double screen[3] = {c.screen_by_plate, c.screen_by_screen, c.screen_by_grid};
    const double grid[3] = {0.0, 0.0, c.grid_by_grid};
    for (int which = BY_PLATE; which <= BY_GRID; which++) {
        const double step = 2e-4 * fabs(volts[which]);
        const plw_currents up = moved(law, volts, (electrode)which, step),
                           down = moved(law, volts, (electrode)which, -step);
        const plw_currents far_up = moved(law, volts, (electrode)which, 2 * step),
                           far_down = moved(law, volts, (electrode)which, -2 * step);
        /* The argument itself is rounded: the currents are known to their slope times its last digit. */
        const double plate_amps = fabs(c.plate_amps) + fabs(plate[which] * volts[which]);
        const double screen_amps =
            fabs(c.screen_amps) + fabs(screen[which] * volts[which]) + fabs(plate[which] * volts[which]);
        compare(plate[which], difference(up.plate_amps, down.plate_amps, far_up.plate_amps, far_down.plate_amps, step),
                plate_amps, step, "plate current's slope", volts);
        compare(screen[which],
                difference(up.screen_amps, down.screen_amps, far_up.screen_amps, far_down.screen_amps, step),
                screen_amps, step, "screen current's slope", volts);
        compare(grid[which], difference(up.grid_amps, down.grid_amps, far_up.grid_amps, far_down.grid_amps, step),
                c.grid_amps + fabs(grid[which] * volts[which]), step, "grid current's slope", volts);
    }
}

static void derivatives_agree_with_differences(void **state) {
    (void)state;
    static const double plates[] = {-12.5, 0.0123, 0.11, 0.94, 2.385, 9.7, 31.0, 77.3, 163.0, 251.0, 480.0, 1210.0};
    static const double screens[] = {-7.3, 0.37, 4.9, 52.0, 181.0, 251.0, 433.0};
    static const double grids[] = {-240.0, -77.0, -31.7, -12.385, -4.1, -0.83, -0.017, 0.021, 1.73, 14.9};
    for (int index = 0; index < LAWS; index++) {
        const plw_law law = law_number(index);
        for (size_t p = 0; p < sizeof plates / sizeof plates[0]; p++) {
            for (size_t s = 0; s < sizeof screens / sizeof screens[0]; s++) {
                for (size_t g = 0; g < sizeof grids / sizeof grids[0]; g++) {
                    const double volts[3] = {plates[p], screens[s], grids[g]};
                    check_derivatives_at(&law, volts);
                }
            }
        }
    }
}

static bool all_finite(const plw_currents *c) {
    return isfinite(c->plate_amps) && isfinite(c->screen_amps) && isfinite(c->grid_amps) &&
           isfinite(c->plate_by_plate) && isfinite(c->plate_by_screen) && isfinite(c->plate_by_grid) &&
           isfinite(c->screen_by_plate) && isfinite(c->screen_by_screen) && isfinite(c->screen_by_grid) &&
           isfinite(c->grid_by_grid);
}

static void currents_are_finite_and_not_negative_everywhere(void **state) {
    (void)state;
    static const double sizes[] = {0.0,    DBL_TRUE_MIN, 1e-300, 1e-160, 1e-30, 1e-9,  1e-3,   0.37,
                                   12.385, 251.0,        3300.0, 1e5,    1e6,   1e154, DBL_MAX};
    enum { SIZES = sizeof sizes / sizeof sizes[0] };
    for (int index = 0; index < LAWS; index++) {
        const plw_law law = law_number(index);
        for (int p = -SIZES + 1; p < SIZES; p++) {
            for (int s = -SIZES + 1; s < SIZES; s++) {
                for (int g = -SIZES + 1; g < SIZES; g++) {
                    const double plate = p < 0 ? -sizes[-p] : sizes[p], screen = s < 0 ? -sizes[-s] : sizes[s],
                                 grid = g < 0 ? -sizes[-g] : sizes[g];
                    plw_currents c;
                    plw_law_evaluate(&law, plate, screen, grid, &c);
                    if (!all_finite(&c) || c.plate_amps < 0.0 || c.screen_amps < 0.0 || c.grid_amps < 0.0) {
                        fail_msg("law %d at %g %g %g: Ip %g Is %g Ig %g", index, plate, screen, grid, c.plate_amps,
                                 c.screen_amps, c.grid_amps);
                    }
                }
            }
        }
    }
}

/* May the currents change as they do between two points, by their slopes at both? */
static bool slopes_account_for_step(const plw_law *law, const double from[3], const double to[3]) {
    plw_currents a, b;
    plw_law_evaluate(law, from[0], from[1], from[2], &a);
    plw_law_evaluate(law, to[0], to[1], to[2], &b);
    double plate = 1e-18, screen = 1e-18;
    const double plate_a[3] = {a.plate_by_plate, a.plate_by_screen, a.plate_by_grid};
    const double plate_b[3] = {b.plate_by_plate, b.plate_by_screen, b.plate_by_grid};
    const double screen_a[3] = {a.screen_by_plate, a.screen_by_screen, a.screen_by_grid};
    const double screen_b[3] = {b.screen_by_plate, b.screen_by_screen, b.screen_by_grid};
    for (int which = 0; which < 3; which++) {
        const double step = fabs(to[which] - from[which]);
        plate += 1.5 * step * (fabs(plate_a[which]) + fabs(plate_b[which]));
        screen += 1.5 * step * (fabs(screen_a[which]) + fabs(screen_b[which]));
    }
    return fabs(a.plate_amps - b.plate_amps) <= plate && fabs(a.screen_amps - b.screen_amps) <= screen;
}

/* No value jumps.  Close to cut-off the knee is narrower than the step, so a step that the slopes do not account for is
 * halved: a jump would be left over however often that is done. */
static void check_step(const plw_law *law, const double from[3], const double to[3], int halvings) {
    if (slopes_account_for_step(law, from, to)) {
        return;
    }
    if (halvings == 0) {
        fail_msg("jump at %g %g %g", from[0], from[1], from[2]);
    }
    const double middle[3] = {0.5 * (from[0] + to[0]), 0.5 * (from[1] + to[1]), 0.5 * (from[2] + to[2])};
    check_step(law, from, middle, halvings - 1);
    check_step(law, middle, to, halvings - 1);
}

static void currents_do_not_jump(void **state) {
    (void)state;
    enum { STEPS = 4000 };
    static const double ends[][2][3] = {{{-20, 251, -12.385}, {300, 251, -12.385}},
                                        {{-20, 90, 3.1}, {40, 90, 3.1}},
                                        {{251, -20, -8.3}, {251, 270, -8.3}},
                                        {{251, 251, -150}, {251, 251, 20}},
                                        {{-10, -10, -5}, {200, 260, 9}},
                                        {{0.7, -3, 1.9}, {-0.3, 3, -2.1}}};
    for (int index = 0; index < LAWS; index++) {
        const plw_law law = law_number(index);
        for (size_t line = 0; line < sizeof ends / sizeof ends[0]; line++) {
            double last[3] = {ends[line][0][0], ends[line][0][1], ends[line][0][2]};
            for (int step = 1; step <= STEPS; step++) {
                double next[3];
                for (int which = 0; which < 3; which++) {
                    next[which] =
                        ends[line][0][which] + (ends[line][1][which] - ends[line][0][which]) * step / (double)STEPS;
                }
                check_step(&law, last, next, 40);
                memcpy(last, next, sizeof last);
            }
        }
    }
}

static void no_plate_current_without_plate_volts(void **state) {
    (void)state;
    for (int index = 0; index < LAWS; index++) {
        const plw_law law = law_number(index);
        static const double plates[] = {0.0, -1e-12, -2.385, -250.0};
        for (size_t p = 0; p < sizeof plates / sizeof plates[0]; p++) {
            for (int step = 0; step < 11; step++) {
                const double grid = -20.0 + 3.7 * step;
                plw_currents c;
                plw_law_evaluate(&law, plates[p], 251.0, grid, &c);
                assert_near(c.plate_amps, 0.0, 0.0, "zero plate current at and below zero plate volts");
                assert_near(c.plate_by_grid, 0.0, 0.0, "there is nothing to control");
            }
        }
        /* And it starts without a step: within a microvolt less than a nanoampere flows. */
        assert_near(plw_law_plate_amps(&law, 1e-6, 251.0, -2.385), 0.0, 1e-9, "continuity");
    }
}

static void the_plate_current_rises_with_every_voltage(void **state) {
    (void)state;
    for (int index = 0; index < LAWS; index++) {
        const plw_law law = law_number(index);
        /* Within the knee's foot, about the first volt, the grid pushes the knee out faster than the current up. */
        for (int step = 0; step < 12; step++) {
            const double plate = 2.5 * pow(1.7, step);
            for (int bias = 0; bias < 16; bias++) {
                const double grid = -60.0 + 4.3 * bias;
                plw_currents c;
                plw_law_evaluate(&law, plate, 213.0, grid, &c);
                assert_true(c.plate_by_plate >= 0.0);
                assert_true(c.plate_by_grid >= 0.0);
            }
        }
    }
}

static void the_screen_takes_over_as_the_plate_swings_low(void **state) {
    (void)state;
    for (int which = 0; which < TEST_PENTODES; which++) {
        const plw_law law = pentode_law(which);
        plw_currents high, low = {0};
        plw_law_evaluate(&law, 250.0, 250.0, -1.3, &high);
        /* A little plate field reaches the cathode, so far above the knee the screen follows the plate up by a trace;
         * from the knee down it must rise all the way. */
        double last = high.screen_amps;
        for (int step = 0; step < 42; step++) {
            const double plate = 40.0 * pow(0.9, step);
            plw_law_evaluate(&law, plate, 250.0, -1.3, &low);
            assert_true(low.screen_amps > last || plate > 36.0);
            last = low.screen_amps;
        }
        assert_true(last > 2.0 * high.screen_amps);
        /* The cathode supplies what both take: with less than all of the turned-away current caught, no more in sum. */
        assert_true(low.plate_amps + low.screen_amps < high.plate_amps + high.screen_amps);
        assert_true(high.plate_by_plate > 0.0); /* a finite plate resistance above the knee */
        assert_true(1.0 / high.plate_by_plate < 1e6);
    }
}

static void plate_amps_is_the_number_of_evaluate(void **state) {
    (void)state;
    random_source r = {20250211};
    for (int trial = 0; trial < 2000; trial++) {
        const plw_law law = law_number(random_below(&r, LAWS));
        const double plate = random_between(&r, -50.0, 600.0), screen = random_between(&r, -10.0, 450.0),
                     grid = random_between(&r, -90.0, 15.0);
        plw_currents c;
        plw_law_evaluate(&law, plate, screen, grid, &c);
        assert_near(plw_law_plate_amps(&law, plate, screen, grid), c.plate_amps, 0.0, "law.h: the same number");
        if (law.kind == PLW_LAW_TRIODE) {
            assert_near(plw_law_plate_amps(&law, plate, (double)NAN, grid), c.plate_amps, 0.0,
                        "law.h: a triode ignores the screen");
        }
    }
}

static void grid_volts_for_inverts_the_law(void **state) {
    (void)state;
    random_source r = {20250212};
    for (int trial = 0; trial < 5000; trial++) {
        const plw_law law = law_number(random_below(&r, LAWS));
        const double plate = random_between(&r, 5.0, 600.0), screen = random_between(&r, 20.0, 450.0),
                     amps = random_ratio(&r, 1e-9, 0.05);
        const double grid = plw_law_grid_volts_for(&law, plate, screen, amps);
        if (isnan(grid)) {
            /* Only when +100 V on the grid really is not enough. */
            plw_currents most;
            plw_law_evaluate(&law, plate, screen, 100.0, &most);
            assert_true(most.plate_amps + most.screen_amps < amps);
            continue;
        }
        plw_currents c;
        plw_law_evaluate(&law, plate, screen, grid, &c);
        assert_near_relative(c.plate_amps + c.screen_amps, amps, 1e-8, "law.h");
    }
    const plw_law triode = koren_triode(KOREN_2A3);
    assert_true(isnan(plw_law_grid_volts_for(&triode, -2.385, 0.0, 0.01)));
    assert_true(isnan(plw_law_grid_volts_for(&triode, 250.0, 0.0, 1e4)));
}

static void scaling_multiplies_every_current(void **state) {
    (void)state;
    for (int index = 0; index < LAWS; index++) {
        const plw_law law = law_number(index);
        plw_law scaled = law;
        plw_law_scale(&scaled, 1.2385);
        plw_currents before, after;
        plw_law_evaluate(&law, 137.0, 221.0, 0.85, &before);
        plw_law_evaluate(&scaled, 137.0, 221.0, 0.85, &after);
        const double pairs[][2] = {{before.plate_amps, after.plate_amps},
                                   {before.screen_amps, after.screen_amps},
                                   {before.grid_amps, after.grid_amps},
                                   {before.plate_by_plate, after.plate_by_plate},
                                   {before.plate_by_screen, after.plate_by_screen},
                                   {before.plate_by_grid, after.plate_by_grid},
                                   {before.screen_by_plate, after.screen_by_plate},
                                   {before.screen_by_grid, after.screen_by_grid},
                                   {before.screen_by_screen, after.screen_by_screen},
                                   {before.grid_by_grid, after.grid_by_grid}};
        for (size_t pair = 0; pair < sizeof pairs / sizeof pairs[0]; pair++) {
            assert_near_relative(pairs[pair][1], 1.2385 * pairs[pair][0], 1e-13, "law.h: every current");
        }
    }
}

static void grid_current_begins_about_zero_and_rises(void **state) {
    (void)state;
    const plw_law law = koren_triode(KOREN_300B);
    double last = 0.0;
    for (int step = 0; step < 60; step++) {
        const double grid = -9.3 + 0.35 * step;
        plw_currents c;
        plw_law_evaluate(&law, 180.0, 0.0, grid, &c);
        assert_true(c.grid_amps >= last);
        assert_true(grid > -1.0 || c.grid_amps < 3e-6); /* at a volt negative no more than a leak */
        last = c.grid_amps;
    }
    assert_true(last > 1e-3);
}

static void validation_names_the_coefficient(void **state) {
    (void)state;
    static const double wrong[] = {-2.385, (double)NAN, (double)INFINITY, -(double)INFINITY};
    for (int index = 0; index < LAWS; index++) {
        const plw_law good = law_number(index);
        plw_error error = {0};
        assert_int_equal(plw_law_validate(&good, &error), PLW_OK);
        for (size_t c = 0; c < plw_law_coefficient_count(good.kind); c++) {
            const bool contact = strcmp(plw_law_coefficient_name(good.kind, c), "contact-volts") == 0;
            for (size_t w = contact ? 1 : 0; w < sizeof wrong / sizeof wrong[0]; w++) { /* may be negative */
                plw_law bad = good;
                bad.coefficient[c] = wrong[w];
                plw_error told = {0};
                assert_int_equal(plw_law_validate(&bad, &told), PLW_E_DATA);
                assert_non_null(strstr(told.text, plw_law_coefficient_name(good.kind, c)));
            }
        }
        static const double exponents[] = {1.0, 0.71, 3.01};
        for (size_t e = 0; e < sizeof exponents / sizeof exponents[0]; e++) {
            plw_law bad = good;
            *coefficient_of(&bad, "exponent") = exponents[e];
            assert_int_equal(plw_law_validate(&bad, NULL), PLW_E_DATA);
        }
        plw_law bad = good;
        *coefficient_of(&bad, "mu") = 0.0;
        assert_int_equal(plw_law_validate(&bad, NULL), PLW_E_DATA);
        if (good.kind == PLW_LAW_TRIODE) {
            bad = good;
            *coefficient_of(&bad, "foot-growth") = 2.01;
            plw_error told = {0};
            assert_int_equal(plw_law_validate(&bad, &told), PLW_E_DATA);
            assert_non_null(strstr(told.text, "foot-growth"));
        } else {
            bad = good;
            *coefficient_of(&bad, "capture") = 0.51;
            assert_int_equal(plw_law_validate(&bad, NULL), PLW_E_DATA);
        }
    }
}

static void names_are_distinct_and_end(void **state) {
    (void)state;
    const plw_law_kind kinds[] = {PLW_LAW_TRIODE, PLW_LAW_PENTODE};
    for (int k = 0; k < 2; k++) {
        const size_t count = plw_law_coefficient_count(kinds[k]);
        assert_true(count <= PLW_LAW_COEFFICIENTS_MOST);
        for (size_t i = 0; i < count; i++) {
            for (size_t j = 0; j < i; j++) {
                assert_string_not_equal(plw_law_coefficient_name(kinds[k], i), plw_law_coefficient_name(kinds[k], j));
            }
        }
        assert_null(plw_law_coefficient_name(kinds[k], count));
    }
    assert_string_not_equal(plw_law_name(PLW_LAW_TRIODE), plw_law_name(PLW_LAW_PENTODE));
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(derivatives_agree_with_differences),
        cmocka_unit_test(currents_are_finite_and_not_negative_everywhere),
        cmocka_unit_test(currents_do_not_jump),
        cmocka_unit_test(no_plate_current_without_plate_volts),
        cmocka_unit_test(the_plate_current_rises_with_every_voltage),
        cmocka_unit_test(the_screen_takes_over_as_the_plate_swings_low),
        cmocka_unit_test(plate_amps_is_the_number_of_evaluate),
        cmocka_unit_test(grid_volts_for_inverts_the_law),
        cmocka_unit_test(scaling_multiplies_every_current),
        cmocka_unit_test(grid_current_begins_about_zero_and_rises),
        cmocka_unit_test(validation_names_the_coefficient),
        cmocka_unit_test(names_are_distinct_and_end),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
