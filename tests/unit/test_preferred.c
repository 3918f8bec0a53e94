/* Preferred values: rounding, order, steps, domain; usual power ratings.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <limits.h>
#include <stdbool.h>
#include <string.h>

#include "near.h"
#include "platewright/preferred.h"

static const plw_series ALL[] = {PLW_E6, PLW_E12, PLW_E24, PLW_E48, PLW_E96, PLW_E192};
enum { SERIES = sizeof ALL / sizeof ALL[0] };

static void values_are_rounded_by_ratio(void **state) {
    (void)state;
    assert_near(plw_preferred_nearest(262.1, PLW_E12), 270.0, 0.0, "by hand");
    assert_near(plw_preferred_nearest(262.1, PLW_E24), 270.0, 0.0, "by hand");
    assert_near(plw_preferred_nearest(262.1, PLW_E96), 261.0, 0.0, "by hand");
    assert_near(plw_preferred_at_least(262.1, PLW_E12), 270.0, 0.0, "by hand");
    assert_near(plw_preferred_at_most(262.1, PLW_E12), 220.0, 0.0, "by hand");
    assert_near(plw_preferred_step(262.1, 1, PLW_E12), 330.0, 0.0, "by hand");
    assert_near(plw_preferred_step(262.1, -1, PLW_E12), 220.0, 0.0, "by hand");
    /* The geometric mean of 220 and 330 is 269.4 (the arithmetic one 275): E6 turns there. */
    assert_near(plw_preferred_nearest(269.0, PLW_E6), 220.0, 0.0, "geometric mean");
    assert_near(plw_preferred_nearest(270.0, PLW_E6), 330.0, 0.0, "geometric mean");
    /* Over the end of a decade: sqrt(820 * 1000) = 905.5 */
    assert_near(plw_preferred_nearest(905.0, PLW_E12), 820.0, 0.0, "geometric mean");
    assert_near(plw_preferred_nearest(906.0, PLW_E12), 1000.0, 0.0, "geometric mean");
    assert_near(plw_preferred_at_least(821.0, PLW_E12), 1000.0, 0.0, "next decade");
    assert_near(plw_preferred_step(820.0, 1, PLW_E12), 1000.0, 0.0, "next decade");
    assert_near(plw_preferred_step(1000.0, -1, PLW_E12), 820.0, 0.0, "decade before");
    assert_near(plw_preferred_step(1000.0, -25, PLW_E12), 8.2, 0.0, "two decades and one step");
}

/* Members are the doubles nearest to the printed numbers in every decade, not products with rounding in them. */
static void members_are_exact(void **state) {
    (void)state;
    assert_near(plw_preferred_nearest(0.21e-6, PLW_E12), 0.22e-6, 0.0, "exact");
    assert_near(plw_preferred_nearest(4.6e-12, PLW_E12), 4.7e-12, 0.0, "exact");
    assert_near(plw_preferred_nearest(0.00468, PLW_E12), 0.0047, 0.0, "exact");
    assert_near(plw_preferred_nearest(4.68e11, PLW_E12), 4.7e11, 0.0, "exact");
    assert_near(plw_preferred_nearest(1.09e-10, PLW_E24), 1.1e-10, 0.0, "exact");
}

static void rounding_keeps_its_order(void **state) {
    (void)state;
    for (size_t s = 0; s < SERIES; s++) {
        double last = 0.0;
        for (int i = -6000; i <= 6000; i++) {
            const double value = pow(10.0, i / 501.7);
            const double at_most = plw_preferred_at_most(value, ALL[s]);
            const double at_least = plw_preferred_at_least(value, ALL[s]);
            const double nearest = plw_preferred_nearest(value, ALL[s]);
            assert_true(at_most <= value * (1.0 + 1e-9) && value * (1.0 - 1e-9) <= at_least);
            assert_true(nearest == at_most || nearest == at_least);
            const double other = nearest == at_most ? at_least : at_most;
            assert_true(fabs(log(nearest / value)) <= fabs(log(other / value)) + 1e-12);
            assert_true(at_least == at_most || at_least == plw_preferred_step(at_most, 1, ALL[s]));
            assert_true(nearest >= last);
            last = nearest;
        }
    }
}

static void a_member_is_itself(void **state) {
    (void)state;
    for (size_t s = 0; s < SERIES; s++) {
        const int steps = (int)ALL[s];
        double last = 0.0;
        for (int i = -12 * steps; i <= 12 * steps; i++) {
            const double member = plw_preferred_step(1.0, i, ALL[s]);
            assert_true(member > last);
            last = member;
            assert_true(plw_preferred_nearest(member, ALL[s]) == member);
            assert_true(plw_preferred_at_least(member, ALL[s]) == member);
            assert_true(plw_preferred_at_most(member, ALL[s]) == member);
            if (i > -12 * steps && i < 12 * steps) { /* out by rounding, still the same member */
                assert_true(plw_preferred_at_least(member * (1.0 + 5e-10), ALL[s]) == member);
                assert_true(plw_preferred_at_most(member * (1.0 - 5e-10), ALL[s]) == member);
                assert_true(plw_preferred_at_least(member * (1.0 + 2e-9), ALL[s]) > member);
                assert_true(plw_preferred_at_most(member * (1.0 - 2e-9), ALL[s]) < member);
            }
        }
        assert_near(plw_preferred_step(1.0, 12 * steps, ALL[s]), 1e12, 0.0, "end of the domain");
        assert_near(plw_preferred_step(1.0, -12 * steps, ALL[s]), 1e-12, 0.0, "end of the domain");
    }
}

static void outside_the_domain_there_is_no_number(void **state) {
    (void)state;
    const double bad[] = {0.0, -4700.0, 0.9e-12, 1.1e12, (double)NAN, (double)INFINITY};
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) {
        assert_true(isnan(plw_preferred_nearest(bad[i], PLW_E24)));
        assert_true(isnan(plw_preferred_at_least(bad[i], PLW_E24)));
        assert_true(isnan(plw_preferred_at_most(bad[i], PLW_E24)));
        assert_true(isnan(plw_preferred_step(bad[i], 2, PLW_E24)));
    }
    const plw_series unknown = (plw_series)25;
    assert_true(isnan(plw_preferred_nearest(4700.0, unknown)));
    assert_true(isnan(plw_preferred_at_least(4700.0, unknown)));
    assert_true(isnan(plw_preferred_at_most(4700.0, unknown)));
    assert_true(isnan(plw_preferred_step(4700.0, 2, unknown)));
    assert_true(isnan(plw_preferred_step(1e12, 1, PLW_E24)));
    assert_true(isnan(plw_preferred_step(1e-12, -1, PLW_E24)));
    assert_true(isnan(plw_preferred_step(4700.0, INT_MAX, PLW_E24)));
    assert_true(isnan(plw_preferred_step(4700.0, INT_MIN, PLW_E24)));
}

static void series_names_are_read(void **state) {
    (void)state;
    static const char *const names[SERIES] = {"E6", "e12", "E24", "e48", "E96", "E192"};
    for (size_t s = 0; s < SERIES; s++) {
        plw_series series = PLW_E6;
        assert_int_equal(plw_series_parse(names[s], &series, NULL), PLW_OK);
        assert_int_equal(series, ALL[s]);
    }
    static const char *const bad[] = {"", "E", "E3", "E240", "E2", "E24 ", "24", "EE24", "F24", "E1922"};
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++) {
        plw_series series = PLW_E48;
        plw_error error = {PLW_OK, ""};
        assert_int_equal(plw_series_parse(bad[i], &series, &error), PLW_E_USAGE);
        assert_int_equal(error.status, PLW_E_USAGE);
        assert_int_equal(series, PLW_E48);
        assert_non_null(strstr(error.text, "E6, E12, E24, E48, E96 and E192 are known"));
    }
    plw_series series = PLW_E48;
    assert_int_equal(plw_series_parse(NULL, &series, NULL), PLW_E_USAGE);
    assert_int_equal(plw_series_parse("E24", NULL, NULL), PLW_E_USAGE);
}

static void ratings_leave_the_margin(void **state) {
    (void)state;
    assert_near(plw_resistor_rating_watts(0.6, 3.0), 2.0, 0.0, "by hand: 1.8 W");
    assert_near(plw_resistor_rating_watts(0.6, 2.0), 2.0, 0.0, "by hand: 1.2 W");
    assert_near(plw_resistor_rating_watts(0.0, 2.0), 0.25, 0.0, "the least there is");
    assert_near(plw_resistor_rating_watts(0.1, 2.5), 0.25, 0.0, "exactly full");
    assert_near(plw_resistor_rating_watts(0.1 + 0.2, 10.0 / 3.0), 1.0, 0.0, "exactly full but for rounding");
    assert_near(plw_resistor_rating_watts(80.0, 2.5), 200.0, 0.0, "the largest");
    assert_true(isnan(plw_resistor_rating_watts(80.1, 2.5)));
    assert_true(isnan(plw_resistor_rating_watts(-0.6, 2.0)));
    assert_true(isnan(plw_resistor_rating_watts(0.6, 0.9)));
    assert_true(isnan(plw_resistor_rating_watts((double)NAN, 2.0)));
    assert_true(isnan(plw_resistor_rating_watts(0.6, (double)NAN)));
    assert_true(isnan(plw_resistor_rating_watts((double)INFINITY, 2.0)));
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(values_are_rounded_by_ratio),
        cmocka_unit_test(members_are_exact),
        cmocka_unit_test(rounding_keeps_its_order),
        cmocka_unit_test(a_member_is_itself),
        cmocka_unit_test(outside_the_domain_there_is_no_number),
        cmocka_unit_test(series_names_are_read),
        cmocka_unit_test(ratings_leave_the_margin),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
