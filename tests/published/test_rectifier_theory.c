/* Capacitor-input rectifiers with ideal diodes against closed forms and computed tables.
 *
 * Context: O. H. Schade, "Analysis of rectifier operation", Proc. IRE 31, July 1943, p. 341-361, whose sheets show the
 * same quantities.  No reading of the printed sheets is used.  The closed forms are derived from the circuit; the
 * tables were computed as the exact periodic solution of the circuit with ideal diodes, by an independent program, and
 * are rounded to the digits given here.  A printed sheet can be read to about 0.01.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/rectifier.h"

#include "near.h"

#define PI 3.14159265358979323846
#define TABLE "exact periodic solution of the circuit, ideal diodes; rounding of the table"

enum { COLUMNS = 7 };

#define LOAD_OHMS 4321.0

/* A rectifier of 1 V peak with w C R = wcr and Rs / R = share. */
static plw_rectifier_state solve(plw_rectifier_connection connection, double wcr, double share) {
    plw_rectifier supply = {.connection = connection,
                            .winding_rms_volts = sqrt(0.5),
                            .path_ohms = share * LOAD_OHMS,
                            .mains_hertz = 50,
                            .reservoir_farads = wcr / (2 * PI * 50 * LOAD_OHMS)};
    plw_rectifier_state state;
    plw_error error = {0};
    const plw_dc_load load = {.ohms = LOAD_OHMS};
    assert_int_equal(plw_rectifier_steady(&supply, load, &state, &error), PLW_OK);
    return state;
}

/* Half conduction angle: tan th - th = pi k / n, n = 2 full-wave, 1 half-wave. */
static double half_angle(double share, double n) {
    double low = 0, high = PI / 2 - 1e-9;
    for (int i = 0; i < 80; i++) {
        const double middle = (low + high) / 2;
        if (tan(middle) - middle > PI * share / n) {
            high = middle;
        } else {
            low = middle;
        }
    }
    return (low + high) / 2;
}

/* The reservoir is boundless in the closed form.  Here w C R = 1e7: the ripple that is left, pi / (2e7), moves the
 * mean by less than 2e-7 of it. */
static void boundless_reservoir(plw_rectifier_connection connection, double n) {
    const double shares[] = {0.0005, 0.002385, 0.01, 0.04, 0.1, 0.2, 0.5};
    for (size_t i = 0; i < sizeof shares / sizeof shares[0]; i++) {
        const char *source = "tan th - th = pi k / n and the integrals of the current over the pulse";
        const double th = half_angle(shares[i], n), ohms = shares[i] * LOAD_OHMS, c = cos(th), s = sin(th);
        const plw_rectifier_state got = solve(connection, 1e7, shares[i]);
        assert_near(got.volts, c, 1e-6, source);
        const double average = (s - th * c) / (PI * ohms), peak = (1 - c) / ohms;
        const double rms = sqrt((th * (1 + 2 * c * c) - 3 * s * c) / (2 * PI)) / ohms;
        assert_near_relative(got.diode_average_amps, average, 1e-5, source);
        assert_near_relative(got.diode_peak_amps, peak, 1e-5, source);
        assert_near_relative(got.diode_rms_amps, rms, 1e-5, source);
        assert_near(got.conduction_degrees, 2 * th * 180 / PI, 1e-3, source);
        const double inverse = connection == PLW_BRIDGE ? c : c + 1; /* output and opposite crest */
        assert_near(got.peak_inverse_volts, inverse, 1e-4, source);
    }
}

static void boundless_reservoir_full_wave(void **state) {
    (void)state;
    boundless_reservoir(PLW_FULL_WAVE, 2);
}

static void boundless_reservoir_half_wave(void **state) {
    (void)state;
    boundless_reservoir(PLW_HALF_WAVE, 1);
}

static void boundless_reservoir_bridge(void **state) {
    (void)state;
    boundless_reservoir(PLW_BRIDGE, 2);
}

/* Edc/Ep, Irms/Iav, Ipk/Iav for a boundless reservoir, as tabled (closed form, four to five digits). */
static void boundless_reservoir_table(void **state) {
    (void)state;
    const double rows[][7] = {
        {0.05, 0.9912, 5.3294, 35.508, 0.9861, 4.7515, 28.226}, {0.5, 0.9601, 3.6475, 16.640, 0.9376, 3.2606, 13.302},
        {2, 0.9035, 2.9205, 10.676, 0.8529, 2.6237, 8.6232},    {6, 0.8135, 2.4692, 7.6422, 0.7263, 2.2367, 6.2797},
        {15, 0.6927, 2.1702, 5.9152, 0.5724, 1.9895, 4.9809},   {50, 0.4728, 1.8810, 4.4602, 0.3365, 1.7663, 3.9434},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        const double *row = rows[i];
        const plw_rectifier_state full = solve(PLW_FULL_WAVE, 1e7, row[0] / 100);
        const plw_rectifier_state half = solve(PLW_HALF_WAVE, 1e7, row[0] / 100);
        assert_near(full.volts, row[1], 6e-5, TABLE);
        assert_near(full.diode_rms_amps / full.diode_average_amps, row[2], 2e-4, TABLE);
        assert_near(full.diode_peak_amps / full.diode_average_amps, row[3], 2e-3, TABLE);
        assert_near(half.volts, row[4], 6e-5, TABLE);
        assert_near(half.diode_rms_amps / half.diode_average_amps, row[5], 2e-4, TABLE);
        assert_near(half.diode_peak_amps / half.diode_average_amps, row[6], 2e-3, TABLE);
    }
}

/* No resistance anywhere (the engine takes one milliohm, 2e-7 of the load): conduction stops at atan(1/W) after the
 * crest, then exponential decay until it meets the next half wave. */
static void no_source_resistance(void **state) {
    (void)state;
    const double rows[][2] = {{1, 0.6787},  {2, 0.7371},  {3, 0.7806},  {5, 0.8356},  {10, 0.8981},
                              {20, 0.9413}, {30, 0.9584}, {50, 0.9736}, {100, 0.9860}};
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        const double w = rows[i][0], stop = atan(1 / w);
        const plw_rectifier_state got = solve(PLW_FULL_WAVE, w, 0);
        assert_near(got.volts, rows[i][1], 6e-5, TABLE);
        double low = PI / 2, high = PI;
        for (int k = 0; k < 80; k++) {
            const double middle = (low + high) / 2;
            if (cos(stop) * exp(-(middle - stop) / w) > -cos(middle)) {
                low = middle;
            } else {
                high = middle;
            }
        }
        const double mean = (w * cos(stop) * (1 - exp(-(low - stop) / w)) + sin(stop) + sin(low)) / PI;
        assert_near(got.volts, mean, 1e-6, "closed form for Rs = 0");
        const double lag = w * 1e-3 / LOAD_OHMS; /* w C times the milliohm, by which the current ends later */
        assert_near(got.conduction_degrees, 180 - (low - stop - lag) * 180 / PI, 1e-3, "closed form for Rs = 0");
    }
}

static void full_wave_voltage_table(void **state) {
    (void)state;
    const double wcr[COLUMNS] = {1, 2, 5, 10, 20, 50, 100};
    const double rows[][COLUMNS + 1] = {
        {0.1, 0.678, 0.736, 0.835, 0.897, 0.940, 0.972, 0.982}, {0.5, 0.675, 0.733, 0.831, 0.893, 0.933, 0.955, 0.959},
        {1, 0.672, 0.730, 0.827, 0.886, 0.920, 0.935, 0.937},   {2, 0.665, 0.722, 0.817, 0.870, 0.894, 0.902, 0.903},
        {4, 0.652, 0.708, 0.795, 0.834, 0.848, 0.852, 0.853},   {6, 0.640, 0.693, 0.771, 0.801, 0.810, 0.813, 0.813},
        {8, 0.628, 0.679, 0.748, 0.771, 0.778, 0.780, 0.780},   {10, 0.616, 0.665, 0.726, 0.745, 0.750, 0.751, 0.752},
        {15, 0.588, 0.631, 0.677, 0.688, 0.692, 0.693, 0.693},  {20, 0.562, 0.600, 0.635, 0.643, 0.645, 0.645, 0.645},
        {30, 0.517, 0.545, 0.566, 0.571, 0.572, 0.572, 0.572},  {40, 0.478, 0.499, 0.513, 0.516, 0.517, 0.517, 0.517},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        for (size_t j = 0; j < COLUMNS; j++) {
            const plw_rectifier_state got = solve(PLW_FULL_WAVE, wcr[j], rows[i][0] / 100);
            assert_near(got.volts, rows[i][j + 1], 6e-4, TABLE);
        }
    }
}

static void full_wave_current_table(void **state) {
    (void)state;
    const double wcr[4] = {1, 5, 10, 50};
    const double rows[][9] = {
        {0.1, 1.874, 2.746, 3.241, 4.418, 4.169, 10.494, 14.802, 25.396},
        {0.5, 1.873, 2.714, 3.129, 3.611, 4.168, 10.005, 13.080, 16.396},
        {1, 1.871, 2.674, 3.004, 3.247, 4.168, 9.531, 11.714, 13.221},
        {2, 1.868, 2.599, 2.811, 2.916, 4.167, 8.798, 10.055, 10.649},
        {4, 1.863, 2.473, 2.580, 2.622, 4.166, 7.803, 8.391, 8.614},
        {6, 1.857, 2.377, 2.444, 2.468, 4.164, 7.155, 7.511, 7.637},
        {8, 1.852, 2.303, 2.351, 2.367, 4.160, 6.696, 6.943, 7.028},
        {10, 1.846, 2.245, 2.281, 2.294, 4.154, 6.351, 6.537, 6.600},
        {20, 1.819, 2.069, 2.085, 2.090, 4.094, 5.388, 5.466, 5.492},
        {40, 1.776, 1.916, 1.923, 1.926, 3.940, 4.626, 4.660, 4.671},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        for (size_t j = 0; j < 4; j++) {
            const plw_rectifier_state got = solve(PLW_FULL_WAVE, wcr[j], rows[i][0] / 100);
            assert_near(got.diode_rms_amps / got.diode_average_amps, rows[i][1 + j], 6e-4, TABLE);
            /* The peaks of the table were taken from samples: 4.169 stands where the exact value is 4.16771. */
            assert_near(got.diode_peak_amps / got.diode_average_amps, rows[i][5 + j], 1.5e-3, TABLE);
        }
    }
}

static void full_wave_ripple_table(void **state) {
    (void)state;
    const double wcr[COLUMNS] = {1, 2, 5, 10, 20, 50, 100};
    const double rows[][COLUMNS + 1] = {
        {0.1, 0.367, 0.257, 0.131, 0.0728, 0.0389, 0.0164, 0.0083},
        {1, 0.367, 0.257, 0.131, 0.0714, 0.0370, 0.0150, 0.0075},
        {4, 0.366, 0.255, 0.125, 0.0653, 0.0330, 0.0133, 0.0066},
        {10, 0.362, 0.246, 0.114, 0.0584, 0.0294, 0.0118, 0.0059},
        {20, 0.354, 0.231, 0.103, 0.0521, 0.0262, 0.0105, 0.0052},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        for (size_t j = 0; j < COLUMNS; j++) {
            const plw_rectifier_state got = solve(PLW_FULL_WAVE, wcr[j], rows[i][0] / 100);
            const double digit = j < 3 ? 1e-3 : 1e-4;
            assert_near(got.node[0].ripple_rms_volts / got.volts, rows[i][j + 1], 0.6 * digit, TABLE);
        }
    }
}

/* Two peaks of the same circuit worked out apart: the exponential and the sine between the two switching angles. */
static void exact_peaks(void **state) {
    (void)state;
    const double rows[][4] = {
        {1, 0.001, 4.16771157, 1.87365713}, {5, 0.001, 10.49407715, 2.74598044}, {1, 0.005, 4.16768323, 1.87255807}};
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        const plw_rectifier_state got = solve(PLW_FULL_WAVE, rows[i][0], rows[i][1]);
        assert_near_relative(got.diode_peak_amps / got.diode_average_amps, rows[i][2], 3e-6, "closed form, evaluated");
        assert_near_relative(got.diode_rms_amps / got.diode_average_amps, rows[i][3], 1e-6, "closed form, evaluated");
    }
}

static void spot_values(void **state) {
    (void)state;
    const struct {
        plw_rectifier_connection connection;
        double wcr, share, volts, rms, peak, ripple, degrees;
    } spots[] = {
        {PLW_HALF_WAVE, 30, 0.05, 0.7459, 2.290, 6.582, 0.0498, 82.9},
        {PLW_FULL_WAVE, 10, 0.01, 0.88609, 3.0040, 11.7140, 0.07138, 49.97},
        {PLW_FULL_WAVE, 30, 0.05, 0.83034, 2.5333, 8.0457, 0.02152, 67.59},
        {PLW_FULL_WAVE, 2, 0.10, 0.66479, 2.0691, 5.4184, 0.24639, 102.80},
    };
    for (size_t i = 0; i < sizeof spots / sizeof spots[0]; i++) {
        const plw_rectifier_state got = solve(spots[i].connection, spots[i].wcr, spots[i].share);
        const double digit = i == 0 ? 1e-4 : 1e-5;
        assert_near(got.volts, spots[i].volts, 0.6 * digit, TABLE);
        assert_near(got.diode_rms_amps / got.diode_average_amps, spots[i].rms, 10 * digit, TABLE);
        assert_near(got.diode_peak_amps / got.diode_average_amps, spots[i].peak, 10 * digit, TABLE);
        assert_near(got.node[0].ripple_rms_volts / got.volts, spots[i].ripple, digit, TABLE);
        assert_near(got.conduction_degrees, spots[i].degrees, i == 0 ? 0.06 : 0.006, TABLE);
    }
    assert_near(solve(PLW_HALF_WAVE, 10, 0.01).volts, 0.780, 6e-4, TABLE);
    assert_near(solve(PLW_HALF_WAVE, 100, 0.01).volts, 0.901, 6e-4, TABLE);
}

/* Hardly any capacitance: the load sees the half waves through the divider of Rs and R. */
static void without_reservoir(void **state) {
    (void)state;
    const char *source = "mean of a rectified sine";
    assert_near(solve(PLW_FULL_WAVE, 1e-7, 0.1).volts, 2 / PI / 1.1, 1e-5, source);
    assert_near(solve(PLW_HALF_WAVE, 1e-7, 0.1).volts, 1 / PI / 1.1, 1e-5, source);
}

/* Transformer makers' factor for a bridge, winding RMS over DC about 1.8, and 1.2 to 1.3 for each half of a
 * centre-tapped winding, sit at Rs/R of about 0.05; theory there 1.76 to 1.79 and 1.24 to 1.27 (closed form, th = 35
 * deg: 1.76, 1.24). */
static void winding_current_factors(void **state) {
    (void)state;
    const plw_rectifier_state bridge = solve(PLW_BRIDGE, 1e7, 0.0569), halves = solve(PLW_FULL_WAVE, 1e7, 0.0569);
    assert_near(bridge.winding_rms_amps / bridge.load_amps, 1.76, 6e-3, "closed form, th = 35 degrees");
    assert_near(halves.winding_rms_amps / halves.load_amps, 1.24, 6e-3, "closed form, th = 35 degrees");
    assert_near(bridge.winding_rms_amps / halves.winding_rms_amps, sqrt(2.0), 1e-9, "two halves share one pulse train");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(boundless_reservoir_full_wave),
        cmocka_unit_test(boundless_reservoir_half_wave),
        cmocka_unit_test(boundless_reservoir_bridge),
        cmocka_unit_test(boundless_reservoir_table),
        cmocka_unit_test(no_source_resistance),
        cmocka_unit_test(full_wave_voltage_table),
        cmocka_unit_test(full_wave_current_table),
        cmocka_unit_test(full_wave_ripple_table),
        cmocka_unit_test(exact_peaks),
        cmocka_unit_test(spot_values),
        cmocka_unit_test(without_reservoir),
        cmocka_unit_test(winding_current_factors),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
