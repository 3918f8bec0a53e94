/* The choice of the cathode resistor: aims met exactly, rounded and solved again, neighbours, limits in the way.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/bias.h"

#include <string.h>

#include "near.h"
#include "unit/solved.h"
#include "unit/stages.h"

/* A beam tube of 12 W and 2 W on 285 V.  The stage points to the tube, whose ratings may still be changed. */
static plw_stage rated_stage(test_tube *tube) {
    make_tube(tube, pentode_law(TEST_BEAM_SMALL));
    tube->ratings[0].plate_watts = 12.0;
    tube->ratings[0].screen_watts = 2.0;
    tube->ratings[0].plate_volts = 315.0;
    tube->ratings[0].screen_volts = 285.0;
    plw_stage stage = simple_stage(tube, 285.0, 5000.0, UNKNOWN, UNKNOWN);
    stage.primary_ohms = 280.0;
    return stage;
}

static plw_bias_choice chosen(const plw_stage *stage, plw_aim_kind kind, double value, plw_series series) {
    plw_bias_choice choice;
    plw_error error = {0};
    if (plw_bias_choose(stage, (plw_aim){kind, value}, series, &choice, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return choice;
}

static plw_quiescent rest_at(const plw_stage *stage, double ohms) {
    plw_stage trial = *stage;
    trial.cathode_resistor_ohms = ohms;
    return at_rest(&trial);
}

/* ---- the aim ----------------------------------------------------------------------------------------------------- */

static void the_exact_resistor_meets_the_aim(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = rated_stage(&tube);
    static const double percents[] = {23.85, 60.0, 75.0, 90.0, 100.0};
    for (size_t index = 0; index < sizeof percents / sizeof percents[0]; index++) {
        const plw_bias_choice c = chosen(&stage, PLW_AIM_DISSIPATION, percents[index], PLW_E24);
        assert_near_relative(rest_at(&stage, c.exact_ohms).plate_watts, 0.12 * percents[index], 1e-7, "bias.h");
        assert_int_equal(c.aim.kind, PLW_AIM_DISSIPATION);
    }
    const plw_bias_choice c = chosen(&stage, PLW_AIM_CURRENT, 38.5e-3, PLW_E24);
    assert_near_relative(rest_at(&stage, c.exact_ohms).plate_amps, 38.5e-3, 1e-7, "bias.h: plate current");
    assert_true(c.aim_reached);
    assert_string_equal(c.obstacle, "");
}

/* As a triode, plate and screen together: in current always, in heat where the maker rates the triode connection. */
static void a_triode_connection_counts_both_electrodes(void **state) {
    (void)state;
    test_tube tube;
    plw_stage stage = rated_stage(&tube);
    stage.connection = PLW_CONNECTION_TRIODE;
    plw_bias_choice c = chosen(&stage, PLW_AIM_CURRENT, 35e-3, PLW_E24);
    assert_near_relative(rest_at(&stage, c.exact_ohms).cathode_amps, 35e-3, 1e-7, "bias.h");
    tube.ratings[1].connection = PLW_CONNECTION_TRIODE;
    tube.ratings[1].plate_watts = 10.0;
    tube.tube.ratings_count = 2;
    c = chosen(&stage, PLW_AIM_DISSIPATION, 80.0, PLW_E24);
    const plw_quiescent q = rest_at(&stage, c.exact_ohms);
    assert_near_relative(q.plate_watts + q.screen_watts, 8.0, 1e-7, "tube.h: plate and screen together");
}

static void random_aims_are_met(void **state) {
    (void)state;
    random_source r = {20250218};
    int met = 0;
    for (int trial = 0; trial < 300; trial++) {
        test_tube tube;
        plw_stage stage;
        random_stage(&r, &tube, &stage);
        if (isnan(stage.cathode_resistor_ohms)) {
            continue;
        }
        /* Aim at the current of the resistor that is there: that resistor must come back. */
        const double ohms = stage.cathode_resistor_ohms;
        const plw_quiescent q = rest_at(&stage, ohms);
        stage.cathode_resistor_ohms = UNKNOWN;
        const bool both = tube.tube.kind != PLW_KIND_TRIODE && stage.connection == PLW_CONNECTION_TRIODE;
        plw_bias_choice c;
        if (plw_bias_choose(&stage, (plw_aim){PLW_AIM_CURRENT, both ? q.cathode_amps : q.plate_amps}, PLW_E96, &c,
                            NULL) == PLW_OK) {
            assert_near_relative(c.exact_ohms, ohms, 1e-4, "the resistor the aim was taken from");
            met++;
        }
    }
    assert_true(met > 150);
}

static void more_current_wants_less_resistance(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = rated_stage(&tube);
    double last = HUGE_VAL;
    for (int milliamps = 5; milliamps <= 45; milliamps += 5) {
        const double ohms = chosen(&stage, PLW_AIM_CURRENT, 1e-3 * milliamps, PLW_E24).exact_ohms;
        assert_true(ohms < last);
        last = ohms;
    }
    double amps = HUGE_VAL;
    for (int step = 0; step < 60; step++) {
        const double now = rest_at(&stage, 10.0 * pow(1.2, step)).cathode_amps;
        assert_true(now < amps);
        amps = now;
    }
}

/* ---- rounding ---------------------------------------------------------------------------------------------------- */

static void check_option(const plw_stage *stage, const plw_bias_option *option) {
    plw_stage trial = *stage;
    trial.cathode_resistor_ohms = option->ohms;
    const solved again = solve(&trial);
    assert_near(option->quiescent.plate_amps, again.rest.plate_amps, 0.0, "solved again");
    assert_near(option->signal.power_watts, again.signal.power_watts, 0.0, "solved again");
    assert_near(option->watts, again.rest.cathode_resistor_watts, 0.0, "what it dissipates");
    assert_near(option->rating_watts, plw_resistor_rating_watts(option->watts, PLW_RESISTOR_MARGIN), 0.0, "bias.h");
    assert_true(option->rating_watts >= 2.0 * option->watts);
    bool kept = true;
    for (size_t index = 0; index < option->ratings_count; index++) {
        kept = kept && option->ratings[index].ok;
    }
    assert_true(option->within_ratings == kept);
}

static void the_value_is_rounded_and_solved_again(void **state) {
    (void)state;
    static const plw_series series[] = {PLW_E6, PLW_E12, PLW_E24, PLW_E48, PLW_E96, PLW_E192};
    test_tube tube;
    const plw_stage stage = rated_stage(&tube);
    tube.ratings[0].screen_watts_full_drive = 10.0; /* no rating in the way */
    for (size_t index = 0; index < sizeof series / sizeof series[0]; index++) {
        const plw_bias_choice c = chosen(&stage, PLW_AIM_DISSIPATION, 65.0, series[index]);
        assert_int_equal(c.options, 3);
        assert_int_equal(c.chosen, 1);
        const double ohms = c.option[1].ohms;
        assert_near(ohms, plw_preferred_nearest(c.exact_ohms, series[index]), 0.0, "nearest preferred value");
        assert_near(c.option[0].ohms, plw_preferred_step(ohms, -1, series[index]), 0.0, "neighbour below");
        assert_near(c.option[2].ohms, plw_preferred_step(ohms, 1, series[index]), 0.0, "neighbour above");
        for (size_t option = 0; option < c.options; option++) {
            check_option(&stage, &c.option[option]);
        }
    }
}

static void a_fixed_bias_is_an_option_too(void **state) {
    (void)state;
    test_tube tube;
    plw_stage stage = rated_stage(&tube);
    stage.fixed_bias_volts = -12.5;
    plw_bias_option option;
    assert_int_equal(plw_bias_option_solve(&stage, UNKNOWN, &option, NULL), PLW_OK);
    assert_true(isnan(option.ohms) && isnan(option.watts) && isnan(option.rating_watts));
    assert_near(option.quiescent.grid_volts, -12.5, 1e-12, "fixed bias");
}

/* ---- limits in the way ------------------------------------------------------------------------------------------- */

static void rounding_never_ends_above_the_rating(void **state) {
    (void)state;
    test_tube tube;
    plw_stage stage = rated_stage(&tube);
    int stepped = 0;
    for (int volts = 255; volts <= 285; volts += 3) {
        stage.supply = stiff(volts);
        const plw_bias_choice c = chosen(&stage, PLW_AIM_DISSIPATION, 100.0, PLW_E12);
        const plw_bias_option *option = &c.option[c.chosen];
        assert_true(option->quiescent.plate_watts <= 12.0 * (1.0 + 1e-9));
        assert_near(option->ohms, plw_preferred_at_least(c.exact_ohms, PLW_E12), 0.0, "the next value that keeps it");
        assert_true(c.aim_reached); /* rounding is no obstacle */
        stepped += option->ohms > plw_preferred_nearest(c.exact_ohms, PLW_E12) * 1.001;
    }
    assert_true(stepped > 0); /* and the case did occur */
}

static void a_current_rating_stands_in_the_way(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = rated_stage(&tube);
    tube.ratings[0].cathode_amps = 30e-3;
    const plw_bias_choice c = chosen(&stage, PLW_AIM_DISSIPATION, 90.0, PLW_E24);
    assert_false(c.aim_reached);
    assert_non_null(strstr(c.obstacle, "cathode current"));
    const plw_bias_option *option = &c.option[c.chosen];
    assert_true(option->quiescent.cathode_amps <= 30e-3);
    assert_true(rest_at(&stage, plw_preferred_step(option->ohms, -1, PLW_E24)).cathode_amps > 30e-3);
}

/* Over the screen's rating under drive at the aim, within it one step of E24 up: that step is taken, and told. */
static void a_driven_rating_is_worth_a_step(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = rated_stage(&tube);
    tube.ratings[0].screen_watts_full_drive = 10.0;
    const plw_bias_choice free = chosen(&stage, PLW_AIM_DISSIPATION, 65.0, PLW_E24);
    assert_true(free.aim_reached);
    const double at_aim = free.option[free.chosen].signal.screen_watts;
    const double above = free.option[free.chosen + 1].signal.screen_watts;
    assert_true(above < at_aim);
    tube.ratings[0].screen_watts_full_drive = 0.5 * (at_aim + above);
    const plw_bias_choice raised = chosen(&stage, PLW_AIM_DISSIPATION, 65.0, PLW_E24);
    assert_near(raised.option[raised.chosen].ohms, free.option[free.chosen + 1].ohms, 0.0, "one step up");
    assert_true(raised.option[raised.chosen].within_ratings);
    /* Where even much more resistance would not do, the aim is kept and the rating told. */
    tube.ratings[0].screen_watts_full_drive = 0.3 * above;
    const plw_bias_choice kept = chosen(&stage, PLW_AIM_DISSIPATION, 65.0, PLW_E24);
    assert_near(kept.option[kept.chosen].ohms, free.option[free.chosen].ohms, 0.0, "the aim's own value");
    assert_false(kept.option[kept.chosen].within_ratings);
}

/* The clean power: distortion at its limit, or full drive where that keeps it. */
static void clean_power_keeps_its_distortion(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = rated_stage(&tube);
    for (double ohms = 150.0; ohms < 1200.0; ohms *= 1.3) {
        plw_bias_option o;
        assert_int_equal(plw_bias_option_solve(&stage, ohms, &o, NULL), PLW_OK);
        if (o.signal.thd_percent > PLW_CLEAN_PERCENT_SCREENED) {
            assert_near(o.clean.thd_percent, PLW_CLEAN_PERCENT_SCREENED, 0.01,
                        "halved to a ten-thousandth of the drive");
            assert_true(o.clean.drive_peak_volts < o.signal.drive_peak_volts);
        } else {
            assert_near(o.clean.speaker_watts, o.signal.speaker_watts, 0.0, "full drive keeps the limit");
        }
    }
}

static void a_voltage_rating_stays_broken_whatever_the_resistor(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = rated_stage(&tube);
    tube.ratings[0].plate_volts = 180.0;
    const plw_bias_choice c = chosen(&stage, PLW_AIM_DISSIPATION, 70.0, PLW_E24);
    assert_false(c.aim_reached);
    assert_non_null(strstr(c.obstacle, "plate voltage"));
    assert_non_null(strstr(c.obstacle, "supply"));
    assert_false(c.option[c.chosen].within_ratings);
}

/* A voltage that no resistor cures does not hide heat and current that one does. */
static void a_broken_voltage_does_not_hide_a_broken_current(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = rated_stage(&tube);
    tube.ratings[0].plate_volts = 180.0;
    tube.ratings[0].cathode_amps = 30e-3;
    const plw_bias_choice c = chosen(&stage, PLW_AIM_DISSIPATION, 90.0, PLW_E24);
    assert_false(c.aim_reached);
    assert_true(c.option[c.chosen].quiescent.cathode_amps <= 30e-3);
}

static void refused(const plw_stage *stage, plw_aim_kind kind, double value, plw_status status, const char *text) {
    plw_bias_choice choice = {.exact_ohms = 2.385};
    plw_error error = {0};
    assert_int_equal(plw_bias_choose(stage, (plw_aim){kind, value}, PLW_E24, &choice, &error), status);
    if (strstr(error.text, text) == NULL) {
        fail_msg("want \"%s\" in: %s", text, error.text);
    }
    assert_near(choice.exact_ohms, 2.385, 0.0, "not written unless PLW_OK");
}

static void what_cannot_be_reached_is_said(void **state) {
    (void)state;
    test_tube tube;
    plw_stage stage = rated_stage(&tube);
    refused(&stage, PLW_AIM_CURRENT, 0.9, PLW_E_NO_POINT, "out of reach");
    stage.supply = stiff(40.0);
    refused(&stage, PLW_AIM_DISSIPATION, 90.0, PLW_E_NO_POINT, "out of reach");
    /* A supply whose readings do not reach anything this stage draws. */
    stage = rated_stage(&tube);
    const plw_reading readings[] = {{290.0, 2.0}, {280.0, 2.5}};
    assert_int_equal(plw_supply_readings(readings, 2, &stage.supply, NULL), PLW_OK);
    refused(&stage, PLW_AIM_DISSIPATION, 90.0, PLW_E_NO_POINT, "none serves");
    /* A screen that is too hot at every resistance that passes any current worth the name. */
    stage = rated_stage(&tube);
    tube.ratings[0].screen_watts = 1e-9;
    refused(&stage, PLW_AIM_DISSIPATION, 90.0, PLW_E_NO_POINT, "screen dissipation");
}

static void wrong_aims_are_refused(void **state) {
    (void)state;
    test_tube tube;
    plw_stage stage = rated_stage(&tube);
    static const double percents[] = {0.0, -2.385, 100.5, UNKNOWN, (double)INFINITY};
    static const double amps[] = {0.0, -2.385e-3, 5.01, UNKNOWN, (double)INFINITY};
    for (size_t index = 0; index < 5; index++) {
        refused(&stage, PLW_AIM_DISSIPATION, percents[index], PLW_E_USAGE, "aim");
        refused(&stage, PLW_AIM_CURRENT, amps[index], PLW_E_USAGE, "aim");
    }
    tube.ratings[0].plate_watts = UNKNOWN;
    refused(&stage, PLW_AIM_DISSIPATION, 90.0, PLW_E_USAGE, "plate dissipation");
    stage.fixed_bias_volts = -12.5;
    refused(&stage, PLW_AIM_CURRENT, 30e-3, PLW_E_USAGE, "fixed-bias");
    stage.fixed_bias_volts = UNKNOWN;
    stage.load_ohms = UNKNOWN;
    refused(&stage, PLW_AIM_CURRENT, 30e-3, PLW_E_USAGE, "load");
}

/* ---- most power -------------------------------------------------------------------------------------------------- */

static void check_best(const plw_stage *stage, plw_series series) {
    const plw_bias_choice c = chosen(stage, PLW_AIM_POWER, 0.0, series);
    assert_true(c.aim_reached);
    double best = 0.0, best_ohms = 0.0;
    double ohms = 1.0;
    while (ohms <= 1e6) {
        plw_bias_option option;
        if (plw_bias_option_solve(stage, ohms, &option, NULL) == PLW_OK && option.within_ratings &&
            option.clean.speaker_watts > best) {
            best = option.clean.speaker_watts;
            best_ohms = ohms;
        }
        ohms = plw_preferred_step(ohms, 1, series);
    }
    const plw_bias_option *option = &c.option[c.chosen];
    assert_near(option->ohms, best_ohms, 0.0, "exhaustive scan");
    assert_near(option->clean.speaker_watts, best, 0.0, "exhaustive scan");
    assert_true(option->within_ratings);
    plw_bias_option exact;
    assert_int_equal(plw_bias_option_solve(stage, c.exact_ohms, &exact, NULL), PLW_OK);
    assert_true(exact.within_ratings && exact.clean.speaker_watts >= best);
    /* No resistance between the neighbours gives noticeably more. */
    for (int part = 0; part < 300; part++) {
        plw_bias_option option_between;
        const double low = plw_preferred_step(best_ohms, -1, series), high = plw_preferred_step(best_ohms, 1, series);
        if (plw_bias_option_solve(stage, low * pow(high / low, part / 300.0), &option_between, NULL) == PLW_OK &&
            option_between.within_ratings) {
            assert_true(option_between.clean.speaker_watts <= 1.003 * exact.clean.speaker_watts);
        }
    }
}

static void most_power_is_the_best_of_all_values(void **state) {
    (void)state;
    test_tube tube, triode;
    plw_stage stage = rated_stage(&tube);
    tube.ratings[0].screen_watts_full_drive = 2.5;
    check_best(&stage, PLW_E12);
    check_best(&stage, PLW_E24);
    stage.connection = PLW_CONNECTION_ULTRALINEAR;
    stage.tap = 0.43;
    check_best(&stage, PLW_E12);
    make_tube(&triode, koren_triode(KOREN_2A3));
    triode.ratings[0].plate_watts = 15.0;
    const plw_stage single = simple_stage(&triode, 297.0, 2500.0, UNKNOWN, UNKNOWN);
    check_best(&single, PLW_E24);
}

static void most_power_falls_back_where_no_value_keeps_every_rating(void **state) {
    (void)state;
    test_tube tube;
    const plw_stage stage = rated_stage(&tube);
    tube.ratings[0].screen_watts_full_drive = 1e-6;
    const plw_bias_choice c = chosen(&stage, PLW_AIM_POWER, 0.0, PLW_E24);
    assert_false(c.aim_reached);
    assert_true(strlen(c.obstacle) > 0);
    assert_int_equal(c.aim.kind, PLW_AIM_POWER);
    assert_near_relative(rest_at(&stage, c.exact_ohms).plate_watts, 0.9 * 12.0, 1e-7, "bias.h: the default");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_exact_resistor_meets_the_aim),
        cmocka_unit_test(a_triode_connection_counts_both_electrodes),
        cmocka_unit_test(random_aims_are_met),
        cmocka_unit_test(more_current_wants_less_resistance),
        cmocka_unit_test(the_value_is_rounded_and_solved_again),
        cmocka_unit_test(a_fixed_bias_is_an_option_too),
        cmocka_unit_test(rounding_never_ends_above_the_rating),
        cmocka_unit_test(a_current_rating_stands_in_the_way),
        cmocka_unit_test(a_driven_rating_is_worth_a_step),
        cmocka_unit_test(clean_power_keeps_its_distortion),
        cmocka_unit_test(a_voltage_rating_stays_broken_whatever_the_resistor),
        cmocka_unit_test(a_broken_voltage_does_not_hide_a_broken_current),
        cmocka_unit_test(what_cannot_be_reached_is_said),
        cmocka_unit_test(wrong_aims_are_refused),
        cmocka_unit_test(most_power_is_the_best_of_all_values),
        cmocka_unit_test(most_power_falls_back_where_no_value_keeps_every_rating),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
