/* Published load-line examples, and end-to-end vectors from a published triode table, against the dynamic
 * characteristic.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "near.h"
#include "tube/dynamic.h"
#include "unit/stages.h"

#define PI 3.14159265358979323846
#define MANUAL "Receiving Tube Manual, RCA, Electron Tube Applications: triode load line"
#define KOREN "N. Koren, Glass Audio 8(5), 1996, table 1 as corrected; worked apart from this program"
#define WARNER_LOUGHREN "J. C. Warner, A. V. Loughren, Proc. IRE 14, December 1926"

/* ---- examples given by three points of the load line ------------------------------------------------------------- */

/* Harmonics of the parabola through the currents at the grid's positive peak, at rest, at the negative peak. */
static void harmonics_of_three(double most, double rest, double least, double harmonic[PLW_HARMONICS + 1]) {
    double sample[PLW_CYCLE_INSTANTS];
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        const double x = cos(PI * index / PLW_CYCLE_STEPS);
        sample[index] = rest + 0.5 * (most - least) * x + (0.5 * (most + least) - rest) * x * x;
    }
    plw_cosine_series(sample, harmonic);
}

/* 250 V, 60 mA; 120 mA at 105 V, 12 mA at 365 V: 3.52 W into 2410 ohm, 5.5 % second harmonic as printed (3.51, 2407,
 * 5.56 from the readings unrounded). */
static void the_manuals_triode_example(void **state) {
    (void)state;
    double b[PLW_HARMONICS + 1];
    harmonics_of_three(0.120, 0.060, 0.012, b);
    const double load = (365.0 - 105.0) / (0.120 - 0.012);
    assert_near(load, 2410.0, 5.0, MANUAL);
    assert_near(0.5 * b[1] * b[1] * load, 3.52, 0.011, MANUAL);
    assert_near(100.0 * b[2] / b[1], 5.5, 0.06, MANUAL);
    assert_near(b[0] - 0.060, 3.0e-3, 1e-9, "rise of the mean current, (Imax + Imin - 2 Io)/4");
}

static void unequal_half_swings(void **state) {
    (void)state;
    static const struct {
        double up, down, percent, tolerance;
        const char *source;
    } examples[] = {
        {50, 40, 5.56, 0.005, "N. Crowhurst, Basic Audio vol. 2, Rider: 50 V and 40 V"},
        {2, 1, 16.7, 0.04, "audio journal, 2001: a triode of two mus, halves as 2 to 1"},
        {312, 250, 5.54, 0.03, "builder's EL34 load line, 312 V and 250 V; printed 5.54, 5.516 from its own figures"},
        {30, 30, 0, 1e-9, "N. Crowhurst, Basic Audio vol. 2: midpoint at rest"},
    };
    for (size_t index = 0; index < sizeof examples / sizeof examples[0]; index++) {
        double b[PLW_HARMONICS + 1];
        harmonics_of_three(examples[index].up, 0.0, -examples[index].down, b);
        assert_near(100.0 * b[2] / b[1], examples[index].percent, examples[index].tolerance, examples[index].source);
    }
    /* Crowhurst: 150 V and 30 mA peak into 5000 ohm, 2.25 W a tube. */
    double b[PLW_HARMONICS + 1];
    harmonics_of_three(0.060, 0.030, 0.0, b);
    assert_near(0.5 * b[1] * b[1] * 5000.0, 2.25, 1e-9, "N. Crowhurst, Basic Audio vol. 2, Rider");
}

/* ---- points of a law --------------------------------------------------------------------------------------------- */

/* 6F6 as a triode: i = 41 (vp + 7 vg)^1.41 microampere at 250 V, -20 V: 30 mA, 2.53 kohm, 2.77 mA/V, mu 7 (H. C. Verma,
 * Concepts of Physics 2, ch. 41); unrounded 30.98 mA, 2518 ohm, 2.780 mA/V. */
static void the_power_law_problem(void **state) {
    (void)state;
    const plw_law law = power_law(7.0, 41e-6 * pow(7.0, 1.41), 1.41);
    plw_currents c;
    plw_law_evaluate(&law, 250.0, 0.0, -20.0, &c);
    const char *verma = "H. C. Verma, Concepts of Physics 2, ch. 41";
    assert_near(1e3 * c.plate_amps, 30.98, 0.005, verma);
    assert_near(1.0 / c.plate_by_plate, 2518.0, 0.5, verma);
    assert_near(1e3 * c.plate_by_grid, 2.780, 0.0005, verma);
    assert_near(c.plate_by_grid / c.plate_by_plate, 7.0, 1e-9, verma);
    assert_near(1e3 * c.plate_amps, 30.0, 1.0, "printed, two digits");
    assert_near(1.0 / c.plate_by_plate, 2530.0, 15.0, "printed, three digits of rounded inputs");
}

/* Tolerance: half of the last digit given. */
static void korens_triodes(void **state) {
    (void)state;
    static const struct {
        int which;
        double plate_volts, grid_volts, milliamps, half_digit, milliamps_per_volt, ohms;
    } points[] = {
        {KOREN_6DJ8, 90, -1.3, 14.32, 0.005, 9.43, 2957},      {KOREN_12AT7, 250, -2, 12.84, 0.005, UNKNOWN, UNKNOWN},
        {KOREN_12AT7, 100, -1, 2.80, 0.005, UNKNOWN, UNKNOWN}, {KOREN_12AU7, 250, -8.5, 10.39, 0.005, 2.48, 7249},
        {KOREN_12AU7, 100, 0, 12.58, 0.005, UNKNOWN, UNKNOWN}, {KOREN_12AX7, 250, -2, 0.95, 0.005, 1.67, UNKNOWN},
        {KOREN_12AX7, 100, -1, 0.10, 0.005, UNKNOWN, UNKNOWN}, {KOREN_2A3, 250, -45, 57.7, 0.05, 5.31, 785},
        {KOREN_300B, 350, -74, 57.4, 0.05, UNKNOWN, UNKNOWN},  {KOREN_300B, 300, -61, 58.4, 0.05, UNKNOWN, UNKNOWN},
        {KOREN_6C33C, 120, -19, 844, 0.5, UNKNOWN, UNKNOWN},
    };
    for (size_t index = 0; index < sizeof points / sizeof points[0]; index++) {
        const plw_law law = koren_triode(points[index].which);
        plw_currents c;
        plw_law_evaluate(&law, points[index].plate_volts, 0.0, points[index].grid_volts, &c);
        assert_near(1e3 * c.plate_amps, points[index].milliamps, points[index].half_digit, KOREN);
        if (isfinite(points[index].milliamps_per_volt)) {
            assert_near(1e3 * c.plate_by_grid, points[index].milliamps_per_volt, 0.0051, KOREN);
        }
        if (isfinite(points[index].ohms)) {
            assert_near(1.0 / c.plate_by_plate, points[index].ohms, 0.51, KOREN);
        }
    }
}

/* ---- a load line through the point of rest ----------------------------------------------------------------------- */

/* The vectors keep the load line where it was without signal, as drawn on paper: nothing follows the averages. */
typedef struct {
    double steady[PLW_ELECTRODES];
} paper_line;

static void paper_volts(const void *context, const double average_amps[PLW_FLOWS], double volts[PLW_ELECTRODES],
                        double by_average[PLW_ELECTRODES][PLW_FLOWS]) {
    (void)average_amps;
    memcpy(volts, ((const paper_line *)context)->steady, sizeof(double) * PLW_ELECTRODES);
    for (int electrode = 0; electrode < PLW_ELECTRODES; electrode++) {
        by_average[electrode][PLW_OF_PLATE] = by_average[electrode][PLW_OF_SCREEN] = 0.0;
    }
}

/* Cycle of a triode on the line through (plate_volts, its current at bias), the grid driven to 0 V. */
static void cycle_on_paper(const plw_law *law, double plate_volts, double bias, double load, double *rest_amps,
                           plw_cycle *cycle) {
    *rest_amps = plw_law_plate_amps(law, plate_volts, 0.0, bias);
    const paper_line line = {{plate_volts + load * *rest_amps, 0.0, bias}};
    plw_feed feed = {.average_volts = paper_volts, .context = &line};
    feed.ohms[PLW_AT_PLATE][PLW_OF_PLATE] = load;
    plw_instant rest = {.amps = {0.01, 0.0}};
    assert_int_equal(plw_dynamic_rest(law, &feed, &rest), PLW_OK);
    assert_near(rest.amps[PLW_OF_PLATE], *rest_amps, 1e-9, "the line passes through the point of rest");
    assert_int_equal(plw_dynamic_cycle(law, &feed, &rest, -bias, cycle), PLW_OK);
}

typedef struct {
    const char *name;
    double plate_volts, bias, load;
    double rest, most, least, volts_least, volts_most; /* mA, V */
    double watts_3, watts_5, watts_11;
    double h2_3, h2_5, h2_11, h3_5, h3_11;
    double rise;
} vector;

static const vector triode_vectors[] = {
    {"2A3", 250, -45, 2500, 57.73, 116.74, 8.57, 102.5, 372.9, 3.657, 3.771, 3.771, 4.55, 4.48, 4.46, -1.52, -1.43,
     2.27},
    {"300B", 350, -74, 3500, 57.38, 127.38, 3.17, 105.0, 539.7, 6.750, 7.096, 7.097, 6.35, 6.20, 6.14, -2.46, -2.25,
     3.53},
    {"3/2 law", 250, -43.5, 2410, 60.00, 119.52, 6.06, 106.5, 380.0, 3.878, 3.925, 3.925, 2.46, 2.45, 2.42, -0.59,
     -0.53, 1.30},
};

_Static_assert(PLW_CYCLE_STEPS % 4 == 0, "the five selected ordinates are instants of the cycle");

static double milliamps_at(const plw_cycle *cycle, int index) {
    return 1e3 * cycle->instant[index].amps[PLW_OF_PLATE];
}

static void check_vector(const plw_law *law, const vector *v) {
    plw_cycle cycle;
    double rest;
    cycle_on_paper(law, v->plate_volts, v->bias, v->load, &rest, &cycle);
    const double most = milliamps_at(&cycle, 0), least = milliamps_at(&cycle, PLW_CYCLE_STEPS);
    const double high = milliamps_at(&cycle, PLW_CYCLE_STEPS / 4), low = milliamps_at(&cycle, 3 * PLW_CYCLE_STEPS / 4),
                 middle = milliamps_at(&cycle, PLW_CYCLE_STEPS / 2);
    assert_near(1e3 * rest, v->rest, 0.0051, KOREN);
    assert_near(most, v->most, 0.0051, KOREN);
    assert_near(least, v->least, 0.0051, KOREN);
    assert_near(cycle.instant[0].volts[PLW_AT_PLATE], v->volts_least, 0.051, KOREN);
    assert_near(cycle.instant[PLW_CYCLE_STEPS].volts[PLW_AT_PLATE], v->volts_most, 0.051, KOREN);
    const double square = 1e-6 * v->load;
    assert_near((most - least) * (most - least) * square / 8.0, v->watts_3, 0.00051, KOREN);
    assert_near(50.0 * (most + least - 2.0 * middle) / (most - least), v->h2_3, 0.0051, KOREN);
    const double s = most - least + sqrt(2.0) * (high - low);
    assert_near(s * s * square / 32.0, v->watts_5, 0.00051, KOREN);
    assert_near(100.0 * (most + least - 2.0 * middle) / s, v->h2_5, 0.0051, KOREN);
    assert_near(100.0 * (most - least - sqrt(2.0) * (high - low)) / s, v->h3_5, 0.0051, KOREN);
    /* The program's own series has more ordinates; 11 differ from it by what they fold back from harmonics 18 and up,
     * here below a thousandth of the fundamental. */
    const double *b = cycle.harmonic_amps;
    assert_near(0.5 * b[1] * b[1] * v->load, v->watts_11, 0.001, KOREN);
    assert_near(100.0 * b[2] / b[1], v->h2_11, 0.01, KOREN);
    assert_near(100.0 * b[3] / b[1], v->h3_11, 0.01, KOREN);
    assert_near(1e3 * (b[0] - rest), v->rise, 0.0051, KOREN);
}

static void end_to_end_vectors(void **state) {
    (void)state;
    const plw_law laws[] = {koren_triode(KOREN_2A3), koren_triode(KOREN_300B), power_law(4.2, 9.35411e-4, 1.5)};
    for (size_t index = 0; index < sizeof triode_vectors / sizeof triode_vectors[0]; index++) {
        check_vector(&laws[index], &triode_vectors[index]);
    }
}

/* The same stages as the program solves them: the transformer holds the mean plate volts, so the rise in mean current
 * lifts the line on paper by rise times load, until both agree. */
static void the_stage_is_the_line_on_paper_lifted(void **state) {
    (void)state;
    for (size_t index = 0; index < 2; index++) {
        const vector *v = &triode_vectors[index];
        test_tube tube;
        make_tube(&tube, koren_triode(index == 0 ? KOREN_2A3 : KOREN_300B));
        const plw_stage stage = simple_stage(&tube, v->plate_volts, v->load, UNKNOWN, v->bias);
        plw_quiescent q;
        plw_signal s;
        assert_int_equal(plw_quiescent_solve(&stage, &q, NULL), PLW_OK);
        assert_int_equal(plw_signal_solve(&stage, &q, &s, NULL), PLW_OK);
        assert_int_equal(s.limit, PLW_DRIVE_GRID_CURRENT);
        assert_near(s.drive_peak_volts, -v->bias, 1e-9, "fixed bias: the crest comes to zero at the bias");
        plw_instant rest = {.amps = {q.plate_amps, 0.0}};
        plw_cycle cycle;
        double mean = q.plate_amps;
        for (int round = 0; round < 60; round++) {
            const paper_line line = {{v->plate_volts + v->load * mean, 0.0, v->bias}};
            plw_feed feed = {.average_volts = paper_volts, .context = &line};
            feed.ohms[PLW_AT_PLATE][PLW_OF_PLATE] = v->load;
            assert_int_equal(plw_dynamic_cycle(&tube.tube.model.law, &feed, &rest, -v->bias, &cycle), PLW_OK);
            mean = cycle.harmonic_amps[0];
        }
        const double *b = cycle.harmonic_amps;
        assert_near(s.plate_amps, mean, 1e-8, "lifted line on paper");
        assert_near_relative(s.power_watts, 0.5 * b[1] * b[1] * v->load, 1e-6, "lifted line on paper");
        assert_near(s.harmonic_percent[2], 100.0 * b[2] / b[1], 1e-4, "lifted line on paper");
        assert_true(1e3 * (s.plate_amps - q.plate_amps) > v->rise); /* the lifted line draws more yet */
    }
}

/* ---- the linear triode ------------------------------------------------------------------------------------------- */

/* The law wants an exponent above 1: at 1.000001 a current of E^x differs from E by 1e-6 ln E, 4e-6 at 60 V. */
#define LINEAR 1.000001
#define LINEAR_ERROR 2e-5

/* Driven from its bias to zero grid volts one way and just to zero current the other. */
static plw_signal linear_stage(double rp, double load, double volts) {
    const double mu = 4.2, conductance = mu / rp;
    test_tube tube;
    make_tube(&tube, power_law(mu, conductance, LINEAR));
    const double rest = volts / (load + 2.0 * rp);
    const double bias = rest / conductance - volts / mu;
    plw_stage stage = simple_stage(&tube, volts, load, UNKNOWN, bias);
    stage.drive_peak_volts = -bias;
    plw_quiescent q;
    plw_signal s;
    assert_int_equal(plw_quiescent_solve(&stage, &q, NULL), PLW_OK);
    assert_int_equal(plw_signal_solve(&stage, &q, &s, NULL), PLW_OK);
    assert_near_relative(q.plate_amps, rest, LINEAR_ERROR, "Ib = Eb/(RL + 2 rp)");
    assert_near(s.plate_amps_least, 0.0, 1e-6, "just to zero current");
    assert_near(s.thd_percent, 0.0, 0.01, "a straight characteristic");
    return s;
}

static void the_linear_triode(void **state) {
    (void)state;
    static const double want[][3] = {{1600, 78.1, 4.883}, {2500, 60.98, 4.648}, {5000, 37.9, 3.587}};
    for (size_t row = 0; row < sizeof want / sizeof want[0]; row++) {
        const plw_signal s = linear_stage(800.0, want[row][0], 250.0);
        assert_near(1e3 * s.plate_amps, want[row][1], row == 1 ? 0.0051 : 0.051, WARNER_LOUGHREN);
        assert_near(s.power_watts, want[row][2], 0.00061, WARNER_LOUGHREN);
        const double load = want[row][0];
        assert_near(s.efficiency_percent, 50.0 * load / (load + 1600.0), 0.01, "0.5 RL/(RL + 2 rp)");
    }
    const plw_signal best = linear_stage(800.0, 1600.0, 250.0);
    assert_near_relative(best.power_watts, 250.0 * 250.0 / (16.0 * 800.0), LINEAR_ERROR, WARNER_LOUGHREN);
    assert_near(best.plate_volts_least, 125.0, 0.01, WARNER_LOUGHREN);
    assert_near(best.plate_volts_most, 375.0, 0.01, WARNER_LOUGHREN);
    assert_true(linear_stage(800.0, 1400.0, 250.0).power_watts < best.power_watts);
    assert_true(linear_stage(800.0, 1850.0, 250.0).power_watts < best.power_watts);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_manuals_triode_example), cmocka_unit_test(unequal_half_swings),
        cmocka_unit_test(the_power_law_problem),      cmocka_unit_test(korens_triodes),
        cmocka_unit_test(end_to_end_vectors),         cmocka_unit_test(the_stage_is_the_line_on_paper_lifted),
        cmocka_unit_test(the_linear_triode),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
