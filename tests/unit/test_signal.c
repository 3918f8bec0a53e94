/* The driven stage: every instant on the law and on the load, averages, energy, the end of the drive, on ten thousand
 * random stages.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <float.h>
#include <string.h>

#include "near.h"
#include "unit/solved.h"
#include "unit/stages.h"

enum { STAGES = 10000, STEPS = PLW_PATH_POINTS - 1 };
#define PI 3.14159265358979323846
#define CUT_OFF_PART 0.02 /* stage.h: cut-off is where the cathode current falls to 2 % of that at rest */

static void fail_stage(int number, const plw_stage *stage, const char *what, double got, double want) {
    char text[600];
    fail_msg("stage %d: %s: %.12g, want %.12g: %s", number, what, got, want, stage_text(stage, text, sizeof text));
}

static void check(int number, const plw_stage *stage, const char *what, double got, double want, double tolerance) {
    if (!(isfinite(got) && fabs(got - want) <= tolerance)) {
        fail_stage(number, stage, what, got, want);
    }
}

/* Weight of an instant in a mean over the cycle: trapezoid over half of it. */
static double weight(int index) {
    return (index == 0 || index == STEPS ? 0.5 : 1.0) / STEPS;
}

static node_volts volts_at(const plw_stage *stage, const plw_signal *s, int index) {
    return circuit_volts(stage, s->path_plate_amps[index], s->path_screen_amps[index], s->plate_amps, s->screen_amps,
                         s->drive_peak_volts * cos(PI * index / STEPS));
}

/* ---- instants ---------------------------------------------------------------------------------------------------- */

static void check_instants(int number, const plw_stage *stage, const plw_signal *s) {
    for (int index = 0; index <= STEPS; index++) {
        const node_volts v = volts_at(stage, s, index);
        plw_currents c;
        plw_law_evaluate(&stage->tube->model.law, v.plate - v.cathode, v.screen - v.cathode, v.grid - v.cathode, &c);
        const double missed =
            fabs(c.plate_amps - s->path_plate_amps[index]) + fabs(c.screen_amps - s->path_screen_amps[index]);
        /* 1e-9 A at the instant, and as much of the averages, which move the instant by loop gains below 10. */
        check(number, stage, "an instant misses the law by (A)", missed, 0.0, 2e-8);
        check(number, stage, "plate volts", s->path_plate_volts[index], v.plate - v.cathode, 1e-8);
        check(number, stage, "grid volts", s->path_grid_volts[index], v.grid - v.cathode, 1e-9);
    }
}

static void check_extremes(int number, const plw_stage *stage, const plw_signal *s) {
    double least_volts = HUGE_VAL, most_volts = -HUGE_VAL, least_amps = HUGE_VAL, most_amps = -HUGE_VAL;
    double most_screen = 0.0, most_to_ground = -HUGE_VAL;
    for (int index = 0; index <= STEPS; index++) {
        least_volts = fmin(least_volts, s->path_plate_volts[index]);
        most_volts = fmax(most_volts, s->path_plate_volts[index]);
        least_amps = fmin(least_amps, s->path_plate_amps[index]);
        most_amps = fmax(most_amps, s->path_plate_amps[index]);
        most_screen = fmax(most_screen, s->path_screen_amps[index]);
        most_to_ground = fmax(most_to_ground, volts_at(stage, s, index).plate);
    }
    check(number, stage, "least plate volts", s->plate_volts_least, least_volts, 0.0);
    check(number, stage, "most plate volts", s->plate_volts_most, most_volts, 0.0);
    check(number, stage, "least plate amps", s->plate_amps_least, least_amps, 0.0);
    check(number, stage, "most plate amps", s->plate_amps_most, most_amps, 0.0);
    check(number, stage, "most screen amps", s->screen_amps_most, most_screen, 0.0);
    check(number, stage, "most plate volts to ground", s->plate_to_ground_volts_most, most_to_ground, 1e-8);
}

static void check_averages(int number, const plw_stage *stage, const plw_signal *s) {
    double plate = 0.0, screen = 0.0;
    for (int index = 0; index <= STEPS; index++) {
        plate += weight(index) * s->path_plate_amps[index];
        screen += weight(index) * s->path_screen_amps[index];
    }
    check(number, stage, "average plate current", s->plate_amps, plate, 2e-9);
    check(number, stage, "average screen current", s->screen_amps, screen, 2e-9);
    check(number, stage, "average cathode current", s->cathode_amps, s->plate_amps + s->screen_amps, 1e-15);
    const node_volts mean = circuit_volts(stage, s->plate_amps, s->screen_amps, s->plate_amps, s->screen_amps, 0.0);
    check(number, stage, "supply under drive", s->supply_volts, mean.supply, 1e-9);
    check(number, stage, "cathode under drive", s->cathode_volts, mean.cathode, 1e-9);
}

/* ---- energy ------------------------------------------------------------------------------------------------------ */

/* Everything that turns into heat or sound, averaged over the cycle, all tubes; by I^2 R and V I at each instant. */
static double power_taken(const plw_stage *stage, const plw_signal *s) {
    const double tubes = stage->parallel, turns = screen_turns(stage);
    const bool has_screen = stage->tube->model.law.kind == PLW_LAW_PENTODE;
    const double resistors = isfinite(stage->cathode_resistor_ohms) ? stage->resistor_each ? tubes : 1.0 : 0.0;
    double watts = tubes * (s->plate_watts + (has_screen ? s->screen_watts : 0.0));
    for (int index = 0; index <= STEPS; index++) {
        const double plate = tubes * s->path_plate_amps[index], screen = tubes * s->path_screen_amps[index];
        const double to_tap = turns > 0.0 ? plate + screen : plate;
        const double swing = (plate - tubes * s->plate_amps) + turns * (screen - tubes * s->screen_amps);
        double now = reflected_ohms(stage) * swing * swing; /* speaker and secondary copper, all harmonics */
        now += stage->primary_ohms * (turns * to_tap * to_tap + (1.0 - turns) * plate * plate);
        if (!stage->screen_bypassed) {
            now += stage->screen_resistor_ohms * screen * screen / tubes;
        }
        if (resistors > 0.0 && stage->unbypassed) {
            const double amps = (plate + screen) / resistors;
            now += resistors * amps * amps * stage->cathode_resistor_ohms;
        }
        watts += weight(index) * now;
    }
    if (stage->screen_bypassed) {
        watts += tubes * stage->screen_resistor_ohms * s->screen_amps * s->screen_amps;
    }
    if (resistors > 0.0 && !stage->unbypassed) {
        const double amps = tubes * s->cathode_amps / resistors;
        watts += resistors * amps * amps * stage->cathode_resistor_ohms;
    }
    return watts;
}

static void check_energy(int number, const plw_stage *stage, const plw_signal *s) {
    const bool own = isfinite(stage->screen_supply_volts);
    const double tubes = stage->parallel;
    const double given = s->supply_volts * tubes * (s->plate_amps + (own ? 0.0 : s->screen_amps)) +
                         (own ? stage->screen_supply_volts * tubes * s->screen_amps : 0.0);
    /* Means are met within 1e-9 A, 2e-6 W at half a kilovolt and four tubes.  Deep in class AB with fixed bias a rise
     * of the average current feeds itself through the mean plate volts and leaves a hundred times that. */
    check(number, stage, "energy", power_taken(stage, s), given, 1e-5 + 2e-7 * given);
}

static void check_power(int number, const plw_stage *stage, const plw_signal *s) {
    const double tubes = stage->parallel, turns = screen_turns(stage);
    double peak = 0.0;
    for (int index = 0; index <= STEPS; index++) {
        const double amps = tubes * (s->path_plate_amps[index] + turns * s->path_screen_amps[index]);
        peak += 2.0 * weight(index) * amps * cos(PI * index / STEPS);
    }
    const double square = 0.5 * peak * peak;
    check(number, stage, "speaker's power", s->speaker_watts, square * stage->load_ohms, 1e-9 * (1.0 + square * 1e3));
    check(number, stage, "power given to the transformer", s->power_watts,
          square * (reflected_ohms(stage) + stage->primary_ohms), 1e-9 * (1.0 + square * 1e3));
    assert_true(s->speaker_watts <= s->power_watts * (1.0 + 4.0 * DBL_EPSILON));
    if (s->drive_peak_volts > 0.0) {
        const double swing = peak * (reflected_ohms(stage) + stage->primary_ohms);
        check(number, stage, "voltage gain", s->voltage_gain, swing / s->drive_peak_volts,
              1e-9 * fabs(s->voltage_gain) + 1e-12);
    }
}

/* Harmonics of the load current over the path, their sum, and the efficiency. */
static void check_distortion(int number, const plw_stage *stage, const plw_signal *s) {
    const double turns = screen_turns(stage);
    double peak = 0.0, squares = 0.0;
    for (int order = 1; order <= PLW_HARMONICS_MOST; order++) {
        double sum = 0.0;
        for (int index = 0; index <= STEPS; index++) {
            sum += 2.0 * weight(index) * (s->path_plate_amps[index] + turns * s->path_screen_amps[index]) *
                   cos(PI * order * index / STEPS);
        }
        if (order == 1) {
            peak = sum;
            if (!(peak > 1e-9)) {
                return;
            }
        } else {
            check(number, stage, "a harmonic", s->harmonic_percent[order], 100.0 * sum / peak, 1e-10 / peak);
            squares += sum * sum;
        }
    }
    check(number, stage, "distortion", s->thd_percent, 100.0 * sqrt(squares) / peak, 1e-10 / peak);
    const double input = (s->supply_volts - s->cathode_volts) * s->plate_amps * stage->parallel;
    check(number, stage, "efficiency", s->efficiency_percent, 100.0 * s->power_watts / input, 1e-9);
}

/* ---- the end of the drive ---------------------------------------------------------------------------------------- */

static void check_limit(int number, const plw_stage *stage, const plw_quiescent *q, const plw_signal *s) {
    const double crest = s->path_grid_volts[0];
    const double trough = s->path_plate_amps[STEPS] + s->path_screen_amps[STEPS];
    const double wanted = CUT_OFF_PART * q->cathode_amps;
    if (!isnan(stage->drive_peak_volts)) {
        check(number, stage, "drive as given", s->drive_peak_volts, stage->drive_peak_volts, 0.0);
        assert_int_equal(s->limit, PLW_DRIVE_GIVEN);
        assert_true(s->grid_current == (crest > 1e-6));
        return;
    }
    if (s->limit == PLW_DRIVE_GRID_CURRENT) {
        check(number, stage, "grid at its crest", crest, 0.0, 1e-6);
        if (trough < wanted * (1.0 - 1e-5)) {
            fail_stage(number, stage, "cut off before grid current", trough, wanted);
        }
    } else {
        assert_int_equal(s->limit, PLW_DRIVE_CUT_OFF);
        check(number, stage, "current in the trough", trough, wanted, 1e-5 * wanted + 1e-8);
        if (crest > 1e-6) {
            fail_stage(number, stage, "grid current before cut-off", crest, 0.0);
        }
    }
    assert_false(s->grid_current);
}

static void check_stage(int number, const plw_stage *stage) {
    plw_quiescent q = {0};
    plw_signal s = {0};
    plw_error error = {0};
    if (plw_quiescent_solve(stage, &q, &error) != PLW_OK || plw_signal_solve(stage, &q, &s, &error) != PLW_OK) {
        fail_stage(number, stage, error.text, 0.0, 0.0);
    }
    check_instants(number, stage, &s);
    check_extremes(number, stage, &s);
    check_averages(number, stage, &s);
    check_energy(number, stage, &s);
    check_power(number, stage, &s);
    check_distortion(number, stage, &s);
    check_limit(number, stage, &q, &s);
}

static void ten_thousand_stages_are_solved(void **state) {
    (void)state;
    random_source r = {20250215};
    for (int number = 0; number < STAGES; number++) {
        test_tube tube;
        plw_stage stage;
        random_stage(&r, &tube, &stage);
        check_stage(number, &stage);
    }
}

/* ---- single stages ----------------------------------------------------------------------------------------------- */

static plw_signal driven(const plw_stage *stage) {
    return solve(stage).signal;
}

static void without_drive_the_averages_are_those_at_rest(void **state) {
    (void)state;
    random_source r = {20250216};
    for (int number = 0; number < 200; number++) {
        test_tube tube;
        plw_stage stage;
        random_stage(&r, &tube, &stage);
        stage.drive_peak_volts = 0.0;
        const plw_quiescent q = at_rest(&stage);
        const plw_signal s = driven(&stage);
        check(number, &stage, "plate current", s.plate_amps, q.plate_amps, 3e-9);
        check(number, &stage, "screen current", s.screen_amps, q.screen_amps, 3e-9);
        check(number, &stage, "plate heat", s.plate_watts, q.plate_watts, 1e-5);
        assert_near(s.power_watts, 0.0, 1e-12, "no drive, no power");
    }
}

/* A small signal is amplified by gm, rp and the load as the linear equivalent circuit says, and the second harmonic is
 * in proportion to the drive (T. Pullen, Conductance Curve Design Manual, Rider 1958, example 5: half the drive, half
 * the distortion). */
static void small_signals_follow_the_equivalent_circuit(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_300B));
    plw_stage stage = simple_stage(&tube, 352.0, 3500.0, UNKNOWN, -74.0);
    stage.drive_peak_volts = 0.25;
    const plw_quiescent q = at_rest(&stage);
    const plw_signal whole = driven(&stage);
    const double gain = q.mu * stage.load_ohms / (q.plate_resistance_ohms + stage.load_ohms);
    assert_near_relative(whole.voltage_gain, gain, 1e-5, "mu RL/(rp + RL); the third harmonic's part is 1e-6");
    stage.drive_peak_volts = 0.125;
    const plw_signal half = driven(&stage);
    assert_near_relative(whole.harmonic_percent[2], 2.0 * half.harmonic_percent[2], 1e-3, "second harmonic ~ drive");
}

static void a_drive_beyond_shows_grid_current_and_cut_off(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage = simple_stage(&tube, 252.0, 5000.0, 250.0, UNKNOWN);
    const plw_signal limit = driven(&stage);
    stage.drive_peak_volts = 3.0 * limit.drive_peak_volts;
    const plw_signal beyond = driven(&stage);
    assert_true(beyond.grid_current);
    assert_true(beyond.cut_off);
    assert_true(beyond.thd_percent > limit.thd_percent);
    stage.drive_peak_volts = 0.4 * limit.drive_peak_volts;
    const plw_signal within = driven(&stage);
    assert_false(within.grid_current);
    assert_false(within.cut_off);
    assert_true(within.power_watts < limit.power_watts);
}

/* Fixed bias near cut-off: driven, the mean current rises far past where the supply was read. */
static void currents_beyond_the_readings_are_told(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage = simple_stage(&tube, 285.0, 5000.0, UNKNOWN, -24.0);
    const solved unlimited = solve(&stage);
    assert_false(unlimited.signal.beyond_supply); /* stiff: speaks at every current */
    assert_near(unlimited.signal.plate_to_ground_volts, 285.0, 1e-6, "no copper: the mean stays at the supply");
    const plw_reading readings[] = {{290.0, 0.0}, {285.0, 1.1 * unlimited.rest.supply_amps}};
    assert_true(unlimited.signal.cathode_amps > 1.7 * unlimited.rest.supply_amps);
    assert_int_equal(plw_supply_readings(readings, 2, &stage.supply, NULL), PLW_OK);
    const plw_signal s = driven(&stage);
    assert_true(s.beyond_supply);
    assert_true(isnan(s.supply_volts));
}

static void zero_bias_leaves_no_drive(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_12AU7));
    plw_stage stage = simple_stage(&tube, 101.0, 10e3, UNKNOWN, 0.0);
    const plw_signal s = driven(&stage);
    assert_near(s.drive_peak_volts, 0.0, 1e-12, "the grid may not go positive");
    assert_near(s.power_watts, 0.0, 1e-12, "no drive, no power");
    assert_true(isnan(s.voltage_gain) && isnan(s.thd_percent));
}

/* Behind the driver's resistance each instant's grid stands below the open signal by the fall of its own current. */
static void check_driver(int number, const plw_stage *stage, const plw_signal *s) {
    for (int index = 0; index <= STEPS; index++) {
        const node_volts v = volts_at(stage, s, index);
        const double grid = s->path_grid_volts[index];
        plw_currents c;
        plw_law_evaluate(&stage->tube->model.law, v.plate - v.cathode, v.screen - v.cathode, grid, &c);
        const double fall = stage->driver_ohms * stage->parallel * c.grid_amps;
        if (v.grid - v.cathode > -1.9) { /* from where on the driver's load is counted */
            check(number, stage, "grid behind the driver", grid, v.grid - v.cathode - fall, 1e-6);
        }
        const double missed =
            fabs(c.plate_amps - s->path_plate_amps[index]) + fabs(c.screen_amps - s->path_screen_amps[index]);
        check(number, stage, "an instant misses the law by (A)", missed, 0.0, 2e-8);
    }
}

/* Grid current as reported is the law's; what the driver gives over a cycle, with the bias supply, is the heat of the
 * grid and of the driver's resistance, and each of them is positive. */
static void check_grid_energy(int number, const plw_stage *stage, const plw_signal *s) {
    double average = 0.0, most = 0.0, given = 0.0, taken = 0.0;
    for (int index = 0; index <= STEPS; index++) {
        const node_volts v = volts_at(stage, s, index);
        plw_currents c;
        plw_law_evaluate(&stage->tube->model.law, s->path_plate_volts[index], v.screen - v.cathode,
                         s->path_grid_volts[index], &c);
        const double all_amps = stage->parallel * c.grid_amps;
        average += weight(index) * c.grid_amps;
        most = fmax(most, c.grid_amps);
        given += weight(index) * (v.grid - v.cathode) * all_amps;
        taken += weight(index) * (s->path_grid_volts[index] * all_amps + stage->driver_ohms * all_amps * all_amps);
    }
    check(number, stage, "average grid current", s->grid_amps, average, 1e-12 + 1e-9 * average);
    check(number, stage, "most grid current", s->grid_amps_most, most, 1e-12 + 1e-9 * most);
    check(number, stage, "energy of the driver", given, taken, 1e-10 + 1e-6 * fabs(taken));
}

static void grid_current_loads_the_driver(void **state) {
    (void)state;
    random_source r = {20250220};
    for (int number = 0; number < 2000; number++) {
        test_tube tube;
        plw_stage stage;
        random_stage(&r, &tube, &stage);
        stage.driver_ohms = random_ratio(&r, 100.0, 47e3);
        plw_quiescent q = {0};
        plw_signal s = {0};
        plw_error error = {0};
        if (plw_quiescent_solve(&stage, &q, &error) != PLW_OK || plw_signal_solve(&stage, &q, &s, &error) != PLW_OK) {
            fail_stage(number, &stage, error.text, 0.0, 0.0);
        }
        check_driver(number, &stage, &s);
        check_averages(number, &stage, &s);
        check_energy(number, &stage, &s);
        check_grid_energy(number, &stage, &s);
    }
}

/* A straight triode driven past its grid: what arrives at the grid is the signal with its crest bent. */
static plw_signal crest_clipped(double driver_ohms, double drive_peak_volts) {
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_300B));
    plw_stage stage = simple_stage(&tube, 397.0, 20e3, UNKNOWN, -71.0);
    stage.drive_peak_volts = drive_peak_volts;
    stage.driver_ohms = driver_ohms;
    return driven(&stage);
}

/* Harmonics 2..10 of the grid's volts, over the fundamental. */
static void grid_harmonics(const plw_signal *s, double part[PLW_HARMONICS_MOST + 1]) {
    double fundamental = 1.0;
    for (int order = 1; order <= PLW_HARMONICS_MOST; order++) {
        double peak = 0.0;
        for (int index = 0; index <= STEPS; index++) {
            peak += 2.0 * weight(index) * s->path_grid_volts[index] * cos(PI * order * index / STEPS);
        }
        fundamental = order == 1 ? peak : fundamental;
        part[order] = fabs(peak / fundamental);
    }
}

/* The larger the driver's resistance, the flatter the crest, the less grid current and the more of every harmonic. */
static void a_larger_driver_resistance_bends_the_crest_more(void **state) {
    (void)state;
    static const double ohms[] = {213.0, 2.13e3, 21.3e3, 213e3};
    double part_before[PLW_HARMONICS_MOST + 1] = {0.0};
    plw_signal before = crest_clipped(0.0, 77.0);
    assert_near(before.path_grid_volts[0], 77.0 - 71.0, 1e-9, "without resistance nothing is lost in the driver");
    assert_true(before.grid_current);
    for (size_t at = 0; at < sizeof ohms / sizeof ohms[0]; at++) {
        const plw_signal s = crest_clipped(ohms[at], 77.0);
        double part[PLW_HARMONICS_MOST + 1];
        grid_harmonics(&s, part);
        for (int order = 2; order <= 7; order++) {
            assert_true(part[order] > part_before[order]);
            assert_true(order == 2 || part[order] < part[order - 1]); /* a crest only a little cut: they fall */
        }
        assert_true(s.path_grid_volts[0] < before.path_grid_volts[0]);
        assert_true(s.grid_amps_most < before.grid_amps_most && s.grid_amps < before.grid_amps);
        assert_true(s.grid_amps > 0.0 && s.grid_amps < s.grid_amps_most);
        memcpy(part_before, part, sizeof part_before);
        before = s;
    }
    assert_true(before.path_grid_volts[0] < 0.5); /* cut off flat near zero */
}

/* With as much second harmonic, a crest rounded by a small resistance has less of the high ones than one cut flat. */
static void soft_clipping_has_less_of_the_high_harmonics(void **state) {
    (void)state;
    double hard[PLW_HARMONICS_MOST + 1], soft[PLW_HARMONICS_MOST + 1];
    const plw_signal cut_flat = crest_clipped(213e3, 77.0);
    grid_harmonics(&cut_flat, hard);
    double below = 77.0, above = 154.0;
    for (int step = 0; step < 50; step++) {
        const double middle = 0.5 * (below + above);
        const plw_signal s = crest_clipped(2.13e3, middle);
        grid_harmonics(&s, soft);
        *(soft[2] < hard[2] ? &below : &above) = middle;
    }
    assert_near_relative(soft[2], hard[2], 1e-9, "as much second harmonic");
    for (int order = 3; order <= 8; order++) {
        assert_true(soft[order] / hard[order] < soft[order - 1] / hard[order - 1]);
    }
}

/* Far below zero no grid current flows, and the driver's resistance changes nothing. */
static void a_negative_grid_does_not_feel_the_driver(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_300B));
    plw_stage stage = simple_stage(&tube, 397.0, 3e3, UNKNOWN, -71.0);
    stage.drive_peak_volts = 61.0;
    const plw_signal without = driven(&stage);
    stage.driver_ohms = 213e3;
    const plw_signal with = driven(&stage);
    assert_near_relative(with.power_watts, without.power_watts, 1e-12, "power");
    assert_near(with.grid_amps_most, 0.0, 1e-15, "a grid 10 V negative draws nothing");
}

static void impossible_drives_are_refused(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_2A3));
    plw_stage stage = simple_stage(&tube, 252.0, 2500.0, 750.0, UNKNOWN);
    const plw_quiescent q = at_rest(&stage);
    static const double wrong[] = {-2.385, 2000.5, (double)INFINITY, -(double)INFINITY};
    for (size_t index = 0; index < sizeof wrong / sizeof wrong[0]; index++) {
        stage.drive_peak_volts = wrong[index];
        plw_signal s = {.power_watts = 2.385};
        plw_error error = {0};
        assert_int_equal(plw_signal_solve(&stage, &q, &s, &error), PLW_E_USAGE);
        assert_non_null(strstr(error.text, "drive"));
        assert_near(s.power_watts, 2.385, 0.0, "not written unless PLW_OK");
    }
}

/* An unbypassed resistor feeds back: less gain by 1 + ..., less distortion at the same output. */
static void an_unbypassed_cathode_feeds_back(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_2A3));
    plw_stage stage = simple_stage(&tube, 297.0, 2500.0, 750.0, UNKNOWN);
    stage.drive_peak_volts = 0.2;
    const plw_signal bypassed = driven(&stage);
    stage.unbypassed = true;
    const plw_signal unbypassed = driven(&stage);
    const plw_quiescent q = at_rest(&stage);
    const double rp = q.plate_resistance_ohms, load = stage.load_ohms, rk = stage.cathode_resistor_ohms;
    assert_near_relative(bypassed.voltage_gain, q.mu * load / (rp + load), 1e-5, "linear equivalent circuit");
    assert_near_relative(unbypassed.voltage_gain, q.mu * load / (rp + load + (q.mu + 1.0) * rk), 1e-5,
                         "linear equivalent circuit, (mu + 1) Rk added to rp");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(ten_thousand_stages_are_solved),
        cmocka_unit_test(without_drive_the_averages_are_those_at_rest),
        cmocka_unit_test(small_signals_follow_the_equivalent_circuit),
        cmocka_unit_test(a_drive_beyond_shows_grid_current_and_cut_off),
        cmocka_unit_test(currents_beyond_the_readings_are_told),
        cmocka_unit_test(zero_bias_leaves_no_drive),
        cmocka_unit_test(grid_current_loads_the_driver),
        cmocka_unit_test(a_larger_driver_resistance_bends_the_crest_more),
        cmocka_unit_test(soft_clipping_has_less_of_the_high_harmonics),
        cmocka_unit_test(a_negative_grid_does_not_feel_the_driver),
        cmocka_unit_test(impossible_drives_are_refused),
        cmocka_unit_test(an_unbypassed_cathode_feeds_back),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
