/* Harmonics of known characteristics: the cosine series beside the published formulas of selected ordinates.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "near.h"
#include "tube/dynamic.h"

#define PI 3.14159265358979323846
#define EXACT "expansion of the polynomial in cosines, by hand"
#define THREE_POINT "3-point formula, RCA Receiving Tube Manual, Electron Tube Applications; RDH4 ch. 13"
#define FIVE_POINT "5 selected ordinates, RCA Receiving Tube Manual; RDH4 ch. 13"
#define ESPLEY "D. C. Espley, Proc. IRE 21, October 1933, p. 1439"
#define CHAFFEE "E. L. Chaffee, Rev. Sci. Instr. 7, 1936"
#define ROUNDING 1e-11 /* mA of about a hundred: the last digits of sums of some tens of terms */

/* Plate current in mA at a share x of the grid's peak. */
typedef double (*characteristic)(double x);

static double fourth_order(double x) {
    return 60.0 + x * (45.0 + x * (6.0 + x * (-4.0 + x * 2.0)));
}

static double seventh_order(double x) {
    return fourth_order(x) + pow(x, 5.0) * (1.5 + x * (-0.8 + x * 0.6));
}

/* ---- the published formulas -------------------------------------------------------------------------------------- */

static void three_point(characteristic i, double b[3]) {
    b[1] = (i(1) - i(-1)) / 2.0;
    b[2] = (i(1) + i(-1) - 2.0 * i(0)) / 4.0;
    b[0] = i(0) + b[2];
}

static void five_selected(characteristic i, double b[5]) {
    const double root = sqrt(0.5);
    const double s = i(1) - i(-1) + sqrt(2.0) * (i(root) - i(-root));
    b[0] = (i(1) + 2.0 * i(root) + 2.0 * i(0) + 2.0 * i(-root) + i(-1)) / 8.0;
    b[1] = s / 4.0;
    b[2] = (i(1) + i(-1) - 2.0 * i(0)) / s * b[1];
    b[3] = (i(1) - i(-1) - sqrt(2.0) * (i(root) - i(-root))) / s * b[1];
    b[4] = (i(1) - 2.0 * i(root) + 2.0 * i(0) - 2.0 * i(-root) + i(-1)) / 8.0;
}

static void espley(characteristic i, double b[5]) {
    b[0] = (i(1) + 2.0 * i(0.5) + 2.0 * i(-0.5) + i(-1)) / 6.0;
    b[1] = (i(1) + i(0.5) - i(-0.5) - i(-1)) / 3.0;
    b[2] = (i(1) - 2.0 * i(0) + i(-1)) / 4.0;
    b[3] = (i(1) - 2.0 * i(0.5) + 2.0 * i(-0.5) - i(-1)) / 6.0;
    b[4] = (i(1) - 4.0 * i(0.5) + 6.0 * i(0) - 4.0 * i(-0.5) + i(-1)) / 12.0;
}

static void eleven_selected(characteristic i, double b[11]) {
    enum { N = 10 };
    for (int k = 0; k <= N; k++) {
        double sum = 0.0;
        for (int j = 0; j <= N; j++) {
            sum += (j == 0 || j == N ? 0.5 : 1.0) * i(cos(PI * j / N)) * cos(PI * k * j / N);
        }
        b[k] = sum * (k == 0 || k == N ? 1.0 : 2.0) / N;
    }
}

static void by_cosine_series(characteristic i, double b[PLW_HARMONICS + 1]) {
    double sample[PLW_CYCLE_INSTANTS];
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        sample[index] = i(cos(PI * index / PLW_CYCLE_STEPS));
    }
    plw_cosine_series(sample, b);
}

/* A way to the harmonics of a characteristic: b[0] the mean, b[1] the fundamental. */
typedef void (*method)(characteristic i, double *b);

static void expect(method analyse, characteristic i, const double *want, int count, const char *source) {
    double got[PLW_HARMONICS + 1];
    analyse(i, got);
    for (int order = 0; order < count; order++) {
        assert_near(got[order], want[order], ROUNDING, source);
    }
}

/* The cosine series of one harmonic alone. */
static void series_of_pure(double amplitude, int pure, double harmonic[PLW_HARMONICS + 1]) {
    double sample[PLW_CYCLE_INSTANTS];
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        sample[index] = amplitude * cos(pure * PI * index / PLW_CYCLE_STEPS);
    }
    plw_cosine_series(sample, harmonic);
}

/* ---- the vectors ------------------------------------------------------------------------------------------------- */

static void every_method_returns_the_fourth_order_vector(void **state) {
    (void)state;
    static const double want[] = {63.75, 42.0, 4.0, -1.0, 0.25, 0, 0, 0, 0, 0, 0};
    static const double want_three[] = {64.0, 41.0, 4.0};
    double series[PLW_HARMONICS + 1];
    by_cosine_series(fourth_order, series);
    expect(by_cosine_series, fourth_order, want, 11, EXACT);
    expect(three_point, fourth_order, want_three, 3, THREE_POINT);
    expect(five_selected, fourth_order, series, 5, FIVE_POINT);
    expect(espley, fourth_order, series, 5, ESPLEY);
    expect(eleven_selected, fourth_order, series, 11, CHAFFEE);
}

static void few_ordinates_alias_and_the_series_does_not(void **state) {
    (void)state;
    static const double want[] = {63.5, 43.265625, 3.625, -0.334375, 0.1, 0.159375, -0.025, 0.009375, 0, 0, 0};
    static const double want_five[] = {63.5, 43.275, 3.6, -0.175, 0.1};
    static const double want_espley[] = {63.475, 43.434375, 3.6, -0.334375, 0.125};
    double series[PLW_HARMONICS + 1];
    by_cosine_series(seventh_order, series);
    expect(by_cosine_series, seventh_order, want, 11, EXACT);
    expect(five_selected, seventh_order, want_five, 5, FIVE_POINT);
    expect(espley, seventh_order, want_espley, 5, ESPLEY);
    expect(eleven_selected, seventh_order, series, 11, CHAFFEE);
}

/* Up to the (2 STEPS - 10)th harmonic nothing is folded back into the ten; the (2 STEPS - 7)th comes back as the 7th.
 */
static void aliasing_begins_where_the_header_says(void **state) {
    (void)state;
    double harmonic[PLW_HARMONICS + 1];
    for (int pure = PLW_HARMONICS + 1; pure < 2 * PLW_CYCLE_STEPS - PLW_HARMONICS; pure++) {
        series_of_pure(2.385, pure, harmonic);
        for (int order = 0; order <= PLW_HARMONICS; order++) {
            assert_near(harmonic[order], 0.0, ROUNDING, "orthogonality of cosines at 2 STEPS phases");
        }
    }
    series_of_pure(2.385, 2 * PLW_CYCLE_STEPS - 7, harmonic);
    assert_near(harmonic[7], 2.385, ROUNDING, "2 STEPS - (2 STEPS - 7) = 7");
}

static void each_harmonic_comes_back_alone(void **state) {
    (void)state;
    for (int pure = 0; pure <= PLW_HARMONICS; pure++) {
        double harmonic[PLW_HARMONICS + 1];
        series_of_pure(-2.385, pure, harmonic);
        for (int order = 0; order <= PLW_HARMONICS; order++) {
            assert_near(harmonic[order], order == pure ? -2.385 : 0.0, ROUNDING, "orthogonality of cosines");
        }
    }
}

/* With a third harmonic the 3-point power is wrong by (1 + B3/B1)^2: correction for odd harmonics, Proc. IRE 1932. */
static void the_three_point_power_needs_its_correction(void **state) {
    (void)state;
    double three[3], series[PLW_HARMONICS + 1];
    three_point(fourth_order, three);
    by_cosine_series(fourth_order, series);
    const double h3 = series[3] / series[1];
    assert_near_relative(series[1] * series[1], three[1] * three[1] / ((1.0 + h3) * (1.0 + h3)), 1e-13,
                         "Imax - Imin = 2 (B1 + B3)");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_method_returns_the_fourth_order_vector),
        cmocka_unit_test(few_ordinates_alias_and_the_series_does_not),
        cmocka_unit_test(aliasing_begins_where_the_header_says),
        cmocka_unit_test(each_harmonic_comes_back_alone),
        cmocka_unit_test(the_three_point_power_needs_its_correction),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
