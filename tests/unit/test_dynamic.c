/* The dynamic characteristic by itself: point of rest from any start, cycles on simple feeds, the limit of drive.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/dynamic.h"

#include <string.h>

#include "near.h"
#include "unit/stages.h"

#define REST_AMPS 1e-10 /* dynamic.h */

/* A supply behind a resistance with a self-biased cathode that a capacitor holds, and a load fed through a
 * transformer. */
typedef struct {
    double supply_volts, source_ohms, cathode_ohms, load_ohms;
} simple_feed;

static void feed_volts(const void *context, const double average_amps[PLW_FLOWS], double volts[PLW_ELECTRODES],
                       double by_average[PLW_ELECTRODES][PLW_FLOWS]) {
    const simple_feed *f = context;
    const double amps = average_amps[PLW_OF_PLATE] + average_amps[PLW_OF_SCREEN];
    const double cathode = f->cathode_ohms * amps, supply = f->supply_volts - f->source_ohms * amps;
    volts[PLW_AT_PLATE] = supply - cathode + f->load_ohms * average_amps[PLW_OF_PLATE];
    volts[PLW_AT_SCREEN] = supply - cathode;
    volts[PLW_AT_GRID] = -cathode;
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        by_average[PLW_AT_PLATE][flow] =
            -f->source_ohms - f->cathode_ohms + (flow == PLW_OF_PLATE ? f->load_ohms : 0.0);
        by_average[PLW_AT_SCREEN][flow] = -f->source_ohms - f->cathode_ohms;
        by_average[PLW_AT_GRID][flow] = -f->cathode_ohms;
    }
}

static plw_feed feed_of(const simple_feed *simple) {
    plw_feed feed = {.average_volts = feed_volts, .context = simple};
    feed.ohms[PLW_AT_PLATE][PLW_OF_PLATE] = simple->load_ohms;
    return feed;
}

static const simple_feed usual = {285.0, 600.0, 270.0, 5000.0};

static void rest_is_found_from_any_start(void **state) {
    (void)state;
    static const double starts[][2] = {{0, 0}, {1e-12, 1e-12}, {0.045, 0.0045}, {0.5, 0.0}, {0.0, 0.5}, {12, 12}};
    const plw_feed feed = feed_of(&usual);
    for (int which = 0; which < TEST_PENTODES; which++) {
        const plw_law law = pentode_law(which);
        plw_instant first = {.amps = {0.03, 0.003}};
        assert_int_equal(plw_dynamic_rest(&law, &feed, &first), PLW_OK);
        for (size_t start = 0; start < sizeof starts / sizeof starts[0]; start++) {
            plw_instant point = {.amps = {starts[start][0], starts[start][1]}};
            assert_int_equal(plw_dynamic_rest(&law, &feed, &point), PLW_OK);
            assert_near(point.amps[PLW_OF_PLATE], first.amps[PLW_OF_PLATE], 2.0 * REST_AMPS, "one point of rest");
            assert_near(point.amps[PLW_OF_SCREEN], first.amps[PLW_OF_SCREEN], 2.0 * REST_AMPS, "one point of rest");
            plw_currents c;
            plw_law_evaluate(&law, point.volts[PLW_AT_PLATE], point.volts[PLW_AT_SCREEN], point.volts[PLW_AT_GRID], &c);
            assert_near(point.amps[PLW_OF_PLATE], c.plate_amps, REST_AMPS, "dynamic.h");
            assert_near(point.amps[PLW_OF_SCREEN], c.screen_amps, REST_AMPS, "dynamic.h");
        }
    }
}

static plw_cycle cycle_of(const plw_law *law, const plw_feed *feed, double drive) {
    plw_instant rest = {.amps = {0.03, 0.003}};
    plw_cycle cycle;
    assert_int_equal(plw_dynamic_rest(law, feed, &rest), PLW_OK);
    assert_int_equal(plw_dynamic_cycle(law, feed, &rest, drive, &cycle), PLW_OK);
    return cycle;
}

static void a_given_drive_is_kept_and_each_instant_balanced(void **state) {
    (void)state;
    const plw_feed feed = feed_of(&usual);
    const plw_law law = pentode_law(TEST_PENTODE_STEEP);
    const plw_cycle cycle = cycle_of(&law, &feed, 2.385);
    assert_near(cycle.drive_peak_volts, 2.385, 0.0, "as given");
    assert_int_equal(cycle.limit, PLW_LIMIT_DRIVE);
    double mean = 0.0;
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        const plw_instant *at = &cycle.instant[index];
        plw_currents c;
        plw_law_evaluate(&law, at->volts[PLW_AT_PLATE], at->volts[PLW_AT_SCREEN], at->volts[PLW_AT_GRID], &c);
        assert_near(at->amps[PLW_OF_PLATE], c.plate_amps, 2e-9, "dynamic.h");
        assert_near(at->amps[PLW_OF_SCREEN], c.screen_amps, 2e-9, "dynamic.h");
        mean += (index == 0 || index == PLW_CYCLE_STEPS ? 0.5 : 1.0) / PLW_CYCLE_STEPS * at->amps[PLW_OF_PLATE];
    }
    assert_near(cycle.average_amps[PLW_OF_PLATE], mean, 2e-9, "dynamic.h");
    assert_near(cycle.harmonic_amps[0], mean, 1e-15, "the mean is the series' first term");
}

/* The limit found, taken as a given drive, is the same cycle; a little more oversteps it. */
static void the_limit_found_is_where_the_grid_comes_to_zero(void **state) {
    (void)state;
    const plw_feed feed = feed_of(&usual);
    const plw_law law = pentode_law(TEST_BEAM_SMALL);
    const plw_cycle limit = cycle_of(&law, &feed, UNKNOWN);
    assert_int_equal(limit.limit, PLW_LIMIT_GRID_CURRENT);
    assert_near(limit.instant[0].volts[PLW_AT_GRID], 0.0, 1e-6, "crest at zero");
    const plw_cycle given = cycle_of(&law, &feed, limit.drive_peak_volts);
    for (int order = 0; order <= PLW_HARMONICS; order++) {
        assert_near(given.harmonic_amps[order], limit.harmonic_amps[order], 1e-8, "the same cycle");
    }
    const plw_cycle more = cycle_of(&law, &feed, 1.01 * limit.drive_peak_volts);
    assert_true(more.instant[0].volts[PLW_AT_GRID] > 0.0);
}

/* Biased deep, the trough reaches a fiftieth of the rest current first. */
static void the_limit_found_is_where_the_tube_cuts_off(void **state) {
    (void)state;
    const simple_feed deep = {285.0, 0.0, 3900.0, 5000.0};
    const plw_feed feed = feed_of(&deep);
    const plw_law law = pentode_law(TEST_BEAM_SMALL);
    plw_instant rest = {.amps = {0.01, 0.001}};
    plw_cycle limit;
    assert_int_equal(plw_dynamic_rest(&law, &feed, &rest), PLW_OK);
    assert_int_equal(plw_dynamic_cycle(&law, &feed, &rest, UNKNOWN, &limit), PLW_OK);
    assert_int_equal(limit.limit, PLW_LIMIT_CUT_OFF);
    const plw_instant *trough = &limit.instant[PLW_CYCLE_STEPS];
    const double wanted = PLW_CUT_OFF_FRACTION * (rest.amps[PLW_OF_PLATE] + rest.amps[PLW_OF_SCREEN]);
    assert_near_relative(trough->amps[PLW_OF_PLATE] + trough->amps[PLW_OF_SCREEN], wanted, 1e-5, "dynamic.h");
    assert_true(limit.instant[0].volts[PLW_AT_GRID] < 0.0);
}

/* An unbypassed cathode follows the grid up: the drive that brings the grid to zero is several times the bias.  By
 * bisection on given drives. */
static void the_limit_with_an_unbypassed_cathode(void **state) {
    (void)state;
    const plw_law law = koren_triode(KOREN_2A3);
    const simple_feed simple = {297.0, 0.0, 0.0, 2500.0};
    plw_feed feed = feed_of(&simple);
    feed.ohms[PLW_AT_PLATE][PLW_OF_PLATE] += 750.0;
    feed.ohms[PLW_AT_GRID][PLW_OF_PLATE] = 750.0;
    const plw_cycle limit = cycle_of(&law, &feed, UNKNOWN);
    double within = 0.0, beyond = 400.0;
    for (int step = 0; step < 50; step++) {
        const double middle = 0.5 * (within + beyond);
        const plw_cycle trial = cycle_of(&law, &feed, middle);
        if (trial.instant[0].volts[PLW_AT_GRID] > 0.0) {
            beyond = middle;
        } else {
            within = middle;
        }
    }
    assert_int_equal(limit.limit, PLW_LIMIT_GRID_CURRENT);
    assert_near(limit.drive_peak_volts, within, 1e-6, "bisection on given drives");
}

/* Overdriven far beyond grid current and cut-off, with a large screen dropper that a capacitor holds: the averages
 * settle far from those at rest. */
static void screen_dropper_volts(const void *context, const double average_amps[PLW_FLOWS],
                                 double volts[PLW_ELECTRODES], double by_average[PLW_ELECTRODES][PLW_FLOWS]) {
    feed_volts(context, average_amps, volts, by_average);
    volts[PLW_AT_SCREEN] -= 8200.0 * average_amps[PLW_OF_SCREEN];
    by_average[PLW_AT_SCREEN][PLW_OF_SCREEN] -= 8200.0;
}

static void overdriven_cycles_settle(void **state) {
    (void)state;
    const simple_feed simple = {400.0, 200.0, 120.0, 9000.0};
    plw_feed feed = feed_of(&simple);
    feed.average_volts = screen_dropper_volts;
    for (int which = 0; which < TEST_PENTODES; which++) {
        const plw_law law = pentode_law(which);
        for (int step = 0; step < 17; step++) {
            const double drive = 5.0 * pow(1.21, step);
            const plw_cycle cycle = cycle_of(&law, &feed, drive);
            double mean = 0.0;
            for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
                mean += (index == 0 || index == PLW_CYCLE_STEPS ? 0.5 : 1.0) / PLW_CYCLE_STEPS *
                        cycle.instant[index].amps[PLW_OF_SCREEN];
            }
            assert_near(cycle.average_amps[PLW_OF_SCREEN], mean, 2e-9, "dynamic.h");
        }
    }
}

/* A tap carries its share of the screen's ampere-turns into the load. */
static void the_tap_counts_in_the_harmonics(void **state) {
    (void)state;
    plw_feed feed = feed_of(&usual);
    feed.tap = 0.43;
    const plw_law law = pentode_law(TEST_BEAM_SMALL);
    const plw_cycle cycle = cycle_of(&law, &feed, 6.3);
    double sample[PLW_CYCLE_INSTANTS], harmonic[PLW_HARMONICS + 1];
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        sample[index] = cycle.instant[index].amps[PLW_OF_PLATE] + 0.43 * cycle.instant[index].amps[PLW_OF_SCREEN];
    }
    plw_cosine_series(sample, harmonic);
    for (int order = 0; order <= PLW_HARMONICS; order++) {
        assert_near(cycle.harmonic_amps[order], harmonic[order], 1e-15, "dynamic.h: of the load current");
    }
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(rest_is_found_from_any_start),
        cmocka_unit_test(a_given_drive_is_kept_and_each_instant_balanced),
        cmocka_unit_test(the_limit_found_is_where_the_grid_comes_to_zero),
        cmocka_unit_test(the_limit_found_is_where_the_tube_cuts_off),
        cmocka_unit_test(the_limit_with_an_unbypassed_cathode),
        cmocka_unit_test(overdriven_cycles_settle),
        cmocka_unit_test(the_tap_counts_in_the_harmonics),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
