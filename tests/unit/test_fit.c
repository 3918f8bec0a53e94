/* The fit on data made of known coefficients with noise from a fixed seed: standard errors by their statistics, starts,
 * order, weights, what it finds besides coefficients, and every error.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/fit.h"

#include <stdlib.h>
#include <string.h>

#include "near.h"
#include "platewright/catalogue.h"
#include "tube/fit_core.h"
#include "tube/fit_prior.h"

static char made_type[] = "made";

enum { MU, EXPONENT, KG1, KP, KVB, CONTACT, FOOT_GROWTH, COEFFICIENTS }; /* of a triode */

/* ---- made data --------------------------------------------------------------------------------------------------- */

/* Uniform in 0..1: the multiplier and increment are Knuth's (The Art of Computer Programming, vol. 2, MMIX). */
static double uniform(uint64_t *seed) {
    *seed = *seed * 6364136223846793005ULL + 1442695040888963407ULL;
    return ((double)(*seed >> 11) + 0.5) / 9007199254740992.0;
}

/* Normal with mean 0 and standard deviation 1 (Box and Muller, Ann. Math. Stat. 29, 1958). */
static double normal(uint64_t *seed) {
    const double radius = sqrt(-2.0 * log(uniform(seed)));
    return radius * cos(2.0 * acos(-1.0) * uniform(seed));
}

enum { CURVES = 4, ON_CURVE = 5, CONSTANTS = 3, POINTS = CURVES * ON_CURVE + CONSTANTS };
#define STATED_PERCENT 2.0
/* By how much the fit believes printed figures (fit_data.c). */
#define OF_PLATE_CURRENT 0.013
#define OF_SCREEN_CURRENT 0.06
#define OF_GM 0.052
#define OF_PLATE_RESISTANCE 0.041
#define OF_SCREENED_PLATE_RESISTANCE 0.13
#define OF_MU 0.047
#define OF_POWER 0.028
#define NAN_FIELDS                                                                                                     \
    .screen_volts = (double)NAN, .screen_amps = (double)NAN, .plate_resistance_ohms = (double)NAN,                     \
    .gm_siemens = (double)NAN, .mu = (double)NAN

typedef struct {
    plw_tube tube;
    plw_point point[POINTS];
    plw_law truth;
} made_triode;

/* Curves and constants of a triode: mu about 8, 60 mA at most, each figure off by noise of the size that the fit
 * believes it has (fit_data.c). */
static void make_triode(made_triode *made, const plw_law *truth, double noise, uint64_t *seed) {
    *made = (made_triode){.truth = *truth};
    made->tube = (plw_tube){.type = made_type, .kind = PLW_KIND_TRIODE, .points = made->point, .points_count = POINTS};
    double largest = 0.0;
    for (int i = 0; i < POINTS; i++) {
        plw_point *p = &made->point[i];
        const bool constants = i >= CURVES * ON_CURVE;
        const int at = i - CURVES * ON_CURVE;
        *p = (plw_point){.kind = constants ? PLW_POINT_CHARACTERISTICS : PLW_POINT_CURVE,
                         .connection = PLW_CONNECTION_TRIODE,
                         NAN_FIELDS,
                         .uncertainty_percent = constants ? (double)NAN : STATED_PERCENT};
        p->grid_volts = constants ? -4.0 - 6.0 * at : -6.0 * (i / ON_CURVE);
        p->plate_volts = constants ? 140.0 + 55.0 * at : 60.0 - 7.5 * p->grid_volts + 22.0 * (i % ON_CURVE);
        plw_prediction truth_here;
        assert_int_equal(plw_predict_point(truth, p, &truth_here, NULL), PLW_OK);
        p->plate_amps = truth_here.plate_amps;
        if (constants) {
            p->plate_amps *= exp(noise * OF_PLATE_CURRENT * normal(seed));
            p->gm_siemens = truth_here.gm_siemens * exp(noise * OF_GM * normal(seed));
            p->plate_resistance_ohms =
                truth_here.plate_resistance_ohms * exp(noise * OF_PLATE_RESISTANCE * normal(seed));
            p->mu = truth_here.mu * exp(noise * OF_MU * normal(seed));
        } else {
            largest = fmax(largest, p->plate_amps);
        }
    }
    for (int i = 0; i < CURVES * ON_CURVE; i++) {
        double *amps = &made->point[i].plate_amps;
        *amps += noise * (0.01 * STATED_PERCENT * *amps + 0.002 * largest) * normal(seed);
    }
}

/* What the fit expects of a heated triode beforehand; mu and perveance, which it leaves open, near that. */
static plw_law triode_law(void) {
    const plw_tube heated = {.type = made_type, .kind = PLW_KIND_TRIODE};
    const plw_expectation *expected = plw_law_expectations(&heated);
    plw_law law = {.kind = PLW_LAW_TRIODE};
    for (size_t i = 0; i < plw_law_coefficient_count(law.kind); i++) {
        law.coefficient[i] = expected[i].expected;
    }
    law.coefficient[MU] = 8.3;
    law.coefficient[KG1] = 1450.0;
    law.coefficient[KP] *= law.coefficient[MU];
    return law;
}

/* A law drawn from what the fit expects; mu and perveance as above, for the figures to be of one tube. */
static plw_law drawn_law(uint64_t *seed) {
    const plw_tube heated = {.type = made_type, .kind = PLW_KIND_TRIODE};
    const plw_expectation *expected = plw_law_expectations(&heated);
    plw_law law = triode_law();
    double place[PLW_LAW_COEFFICIENTS_MOST];
    plw_law_coordinates(&law, place);
    for (size_t i = 0; i < plw_law_coefficient_count(law.kind); i++) {
        if (i != MU && i != KG1) {
            place[i] += expected[i].deviation * normal(seed);
        }
    }
    return plw_law_at_coordinates(law.kind, place);
}

/* The usual triode, its noise from a seed.  Ret: where the random numbers go on */
static uint64_t make_usual(made_triode *made, double noise, uint64_t seed) {
    const plw_law law = triode_law();
    make_triode(made, &law, noise, &seed);
    return seed;
}

static void fit_or_fail(const plw_tube *tube, bool leave_out, plw_fit *fit) {
    plw_error error = {.status = PLW_OK};
    if (plw_fit_tube(tube, leave_out, fit, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
}

/* Difference of two laws in standard errors of the coordinates, at the worst. */
static double apart(const plw_law *one, const plw_law *other, const plw_fit *fit) {
    const size_t count = plw_law_coefficient_count(one->kind);
    double first[PLW_LAW_COEFFICIENTS_MOST];
    double second[PLW_LAW_COEFFICIENTS_MOST];
    plw_law_coordinates(one, first);
    plw_law_coordinates(other, second);
    double worst = 0.0;
    for (size_t i = 0; i < count; i++) {
        worst = fmax(worst, fabs(first[i] - second[i]) / sqrt(fit->covariance[i * count + i]));
    }
    return worst;
}

/* ---- coefficients and their errors ------------------------------------------------------------------------------- */

static void test_exact_data_give_the_coefficients_back(void **state) {
    (void)state;
    static plw_fit fit;
    made_triode made;
    make_usual(&made, 0.0, 1);
    fit_or_fail(&made.tube, false, &fit);
    /* What is expected beforehand draws a little: mu at the middle of its wide expectation would be 20. */
    assert_true(apart(&fit.model.law, &made.truth, &fit) < 0.1);
    assert_true(fit.chi_squared < 0.02);
    assert_true(fit.settled);
    assert_int_equal(fit.contradictions, 0);
    assert_int_equal(fit.model.points_fitted, POINTS);
}

/* The truth of each set is drawn from what the fit expects beforehand, so that the estimates must lie about it with
 * just the standard errors stated: mean of the pulls 0, their variance 1. */
static void test_standard_errors_by_their_statistics(void **state) {
    (void)state;
    enum { SETS = 60 };
    static plw_fit fit;
    double sum[COEFFICIENTS] = {0.0};
    double squares[COEFFICIENTS] = {0.0};
    double chi_squared = 0.0;
    uint64_t seed = 20231;
    for (int set = 0; set < SETS; set++) {
        const plw_law truth = drawn_law(&seed);
        made_triode made;
        make_triode(&made, &truth, 1.0, &seed);
        fit_or_fail(&made.tube, false, &fit);
        double here[PLW_LAW_COEFFICIENTS_MOST];
        double there[PLW_LAW_COEFFICIENTS_MOST];
        plw_law_coordinates(&fit.model.law, here);
        plw_law_coordinates(&truth, there);
        for (size_t i = 0; i < COEFFICIENTS; i++) {
            const double pull = (here[i] - there[i]) / sqrt(fit.covariance[i * COEFFICIENTS + i]);
            sum[i] += pull;
            squares[i] += pull * pull;
        }
        chi_squared += fit.chi_squared / SETS;
    }
    for (size_t i = 0; i < COEFFICIENTS; i++) {
        print_message("%-14s mean pull %6.3f, mean square %6.3f\n", plw_law_coefficient_name(PLW_LAW_TRIODE, i),
                      sum[i] / SETS, squares[i] / SETS);
        assert_near(sum[i] / SETS, 0.0, 3.3 / sqrt((double)SETS), "normal: one in a thousand");
        assert_true(squares[i] / SETS > 0.53 && squares[i] / SETS < 1.66); /* chi squared of 60: one in a thousand */
    }
    /* Figures less what the coefficients take up of them, which is between none and all of them. */
    const double figures = POINTS + 3.0 * CONSTANTS;
    const double spread = 3.3 * sqrt(2.0 * figures / SETS);
    print_message("mean chi squared %.2f of %.0f figures\n", chi_squared, figures);
    assert_true(chi_squared > figures - COEFFICIENTS - spread && chi_squared < figures + spread);
}

/* A gross figure is named, and the errors grow by the root of chi squared per degree of freedom; they never shrink. */
static void test_errors_grow_with_the_scatter(void **state) {
    (void)state;
    static plw_fit good;
    static plw_fit bad;
    made_triode made;
    make_usual(&made, 0.0, 11);
    fit_or_fail(&made.tube, false, &good);
    assert_near(good.error_scale, 1.0, 0.0, "nothing is off");
    assert_false(plw_fit_is_gross(&good));
    made.point[CURVES * ON_CURVE].gm_siemens *= 1.6;
    fit_or_fail(&made.tube, false, &bad);
    assert_true(plw_fit_is_gross(&bad));
    const double per_freedom = bad.chi_squared / (double)bad.residuals;
    assert_true(bad.error_scale > 1.2);
    assert_true(bad.error_scale * bad.error_scale > 0.999 * per_freedom); /* with what is expected beforehand */
    assert_true(bad.error_scale * bad.error_scale < 1.3 * per_freedom);
    for (size_t i = 0; i < plw_law_coefficient_count(PLW_LAW_TRIODE); i++) {
        const size_t at = i * (plw_law_coefficient_count(PLW_LAW_TRIODE) + 1);
        const double wider = sqrt(bad.covariance[at] / good.covariance[at]) / bad.error_scale;
        assert_true(wider > 0.5 && wider < 2.0); /* the place is another, so are the slopes there */
    }
    size_t gross = 0;
    for (size_t i = 0; i < bad.residuals; i++) {
        gross += plw_residual_is_gross(&bad.residual[i]) ? 1U : 0U;
    }
    assert_true(gross >= 1);
}

static void test_several_starts_end_alike(void **state) {
    (void)state;
    static plw_fit fit;
    made_triode made;
    uint64_t seed = make_usual(&made, 1.0, 77);
    fit_or_fail(&made.tube, false, &fit);
    for (int start = 0; start < 20; start++) {
        plw_law from = fit.model.law;
        from.coefficient[MU] *= exp(0.5 * normal(&seed));
        from.coefficient[EXPONENT] *= exp(0.05 * normal(&seed));
        from.coefficient[KG1] *= exp(0.8 * normal(&seed));
        from.coefficient[KP] *= exp(0.8 * normal(&seed));
        from.coefficient[KVB] *= exp(0.5 * normal(&seed));
        from.coefficient[CONTACT] += 0.5 * normal(&seed);
        from.coefficient[FOOT_GROWTH] *= exp(0.1 * normal(&seed));
        plw_law end;
        assert_int_equal(plw_fit_without(&made.tube, SIZE_MAX, false, &from, &end, NULL), PLW_OK);
        assert_true(apart(&end, &fit.model.law, &fit) < 0.01);
    }
}

static void test_order_does_not_matter(void **state) {
    (void)state;
    static plw_fit fit;
    static plw_fit again;
    made_triode made;
    uint64_t seed = make_usual(&made, 1.0, 5);
    fit_or_fail(&made.tube, false, &fit);
    for (size_t i = POINTS - 1; i > 0; i--) {
        const size_t other = (size_t)(uniform(&seed) * (double)(i + 1));
        const plw_point kept = made.point[i];
        made.point[i] = made.point[other];
        made.point[other] = kept;
    }
    fit_or_fail(&made.tube, false, &again);
    assert_true(apart(&fit.model.law, &again.model.law, &fit) < 0.01);
    assert_near_relative(again.chi_squared, fit.chi_squared, 1e-4, "the same figures");
}

static void test_stated_uncertainty_weighs(void **state) {
    (void)state;
    static plw_fit fit;
    static plw_fit wide;
    made_triode made;
    uint64_t seed = make_usual(&made, 1.0, 9);
    made.tube.points_count = CURVES * ON_CURVE;
    fit_or_fail(&made.tube, false, &fit);
    for (int i = 0; i < POINTS; i++) {
        made.point[i].uncertainty_percent = 4.0 * STATED_PERCENT;
    }
    fit_or_fail(&made.tube, false, &wide);
    assert_true(wide.chi_squared < 0.3 * fit.chi_squared);
    assert_true(wide.model.relative_error[0] > 1.5 * fit.model.relative_error[0]);
    /* Two lines that differ: the fit goes with the one that is stated to be better. */
    for (int better = 0; better < 2; better++) {
        seed = make_usual(&made, 0.0, seed);
        for (int i = 0; i < POINTS; i++) {
            made.point[i].plate_amps *= i % 2 == 0 ? 1.2 : 1.0;
            made.point[i].uncertainty_percent = i % 2 == better ? 0.5 : 40.0;
        }
        made.tube.points_count = CURVES * ON_CURVE;
        fit_or_fail(&made.tube, false, &fit);
        double sum = 0.0;
        for (size_t i = 0; i < fit.residuals; i++) {
            sum += fit.residual[i].predicted / (made.point[i].plate_amps / (i % 2 == 0 ? 1.2 : 1.0));
        }
        assert_near(sum / (double)fit.residuals, better == 0 ? 1.2 : 1.0, 0.02, "the better half");
    }
}

/* ---- one printed row --------------------------------------------------------------------------------------------- */

static plw_catalogue *open_tubedata(void) {
    const char *const folders[] = {TUBEDATA};
    plw_catalogue *catalogue = NULL;
    assert_int_equal(plw_catalogue_open(folders, 1, &catalogue, NULL), PLW_OK);
    return catalogue;
}

/* The printed figures of a row lie within two standard deviations of what is predicted: those of the coefficients with
 * those of print and law (fit_data.c) on top. */
static void expect_covered(const plw_fit *fit, const plw_row *row) {
    plw_prediction p;
    plw_prediction deviation;
    assert_int_equal(plw_fit_predict_row(fit, row, &p, &deviation, NULL), PLW_OK);
    const struct {
        const char *name;
        double printed, predicted, deviation, of_print;
    } figures[] = {
        {"plate current", row->plate_amps, p.plate_amps, deviation.plate_amps, OF_PLATE_CURRENT},
        {"screen current", row->screen_amps, p.screen_amps, deviation.screen_amps, OF_SCREEN_CURRENT},
        {"gm", row->gm_siemens, p.gm_siemens, deviation.gm_siemens, OF_GM},
        {"plate resistance", row->plate_resistance_ohms, p.plate_resistance_ohms, deviation.plate_resistance_ohms,
         OF_SCREENED_PLATE_RESISTANCE},
        {"power", row->power_watts, p.power_watts, deviation.power_watts, OF_POWER},
    };
    for (size_t i = 0; i < sizeof figures / sizeof figures[0]; i++) {
        const double allowed = 2.0 * hypot(figures[i].deviation, figures[i].of_print * figures[i].printed);
        print_message("%-17s printed %.4g, predicted %.4g +/- %.2g\n", figures[i].name, figures[i].printed,
                      figures[i].predicted, figures[i].deviation);
        assert_near(figures[i].predicted, figures[i].printed, allowed, "RCA Receiving Tube Manual RC-19, 6V6GT, 180 V");
    }
}

static void test_a_single_row(void **state) {
    (void)state;
    static plw_fit whole;
    static plw_fit single;
    plw_catalogue *catalogue = open_tubedata();
    const plw_tube *tube = NULL;
    int variant = 0;
    assert_int_equal(plw_catalogue_find(catalogue, "6V6GT", &tube, &variant, NULL), PLW_OK);
    fit_or_fail(tube, false, &whole);
    plw_tube one = *tube;
    one.points_count = 0;
    one.rows_count = 1;
    one.rows = &tube->rows[1];
    assert_true(one.rows->plate_volts == 250.0 && tube->rows[0].plate_volts == 180.0);
    fit_or_fail(&one, true, &single);
    size_t undetermined = 0;
    const size_t count = plw_law_coefficient_count(single.model.law.kind);
    for (size_t i = 0; i < count; i++) {
        undetermined += isnan(single.model.relative_error[i]) ? 1U : 0U;
        /* By the uncertainties of the figures alone: how much these scatter only more rows can tell. */
        const double of_one = sqrt(single.covariance[i * count + i]) / single.error_scale;
        const double of_all = sqrt(whole.covariance[i * count + i]) / whole.error_scale;
        if (!(of_one > 0.999 * of_all)) {
            fail_msg("%s: %g by one row, %g by all", plw_law_coefficient_name(PLW_LAW_PENTODE, i), of_one, of_all);
        }
    }
    assert_true(undetermined >= 3);
    assert_true(isnan(single.model.left_out_error.plate_current_percent)); /* nothing is left to fit */
    assert_int_equal(single.outliers, 0);
    expect_covered(&single, &tube->rows[0]);
    /* Its own row it must know better than the other. */
    plw_prediction p;
    plw_prediction own;
    plw_prediction other;
    assert_int_equal(plw_fit_predict_row(&single, one.rows, &p, &own, NULL), PLW_OK);
    assert_near_relative(p.plate_amps, 0.045, 0.03, "RCA Receiving Tube Manual RC-19, 6V6GT, 250 V");
    const double own_relative = own.plate_amps / p.plate_amps;
    assert_int_equal(plw_fit_predict_row(&single, &tube->rows[0], &p, &other, NULL), PLW_OK);
    assert_true(other.plate_amps / p.plate_amps > own_relative);
    assert_true(isnan(own.mu) == isnan(p.mu));
    plw_catalogue_free(catalogue);
}

/* ---- what a fit finds -------------------------------------------------------------------------------------------- */

static void test_an_outlier_is_named(void **state) {
    (void)state;
    static plw_fit fit;
    made_triode made;
    make_usual(&made, 1.0, 31);
    fit_or_fail(&made.tube, true, &fit);
    assert_int_equal(fit.outliers, 0);
    made.point[13].plate_amps *= 1.6;
    made.point[21].gm_siemens *= 1.5;
    fit_or_fail(&made.tube, false, &fit);
    assert_int_equal(fit.outliers, 0); /* not looked for */
    fit_or_fail(&made.tube, true, &fit);
    assert_int_equal(fit.outliers, 2);
    assert_int_equal(fit.outlier[0].index + fit.outlier[1].index, 13 + 21);
    for (size_t i = 0; i < 2; i++) {
        const plw_fit_outlier *o = &fit.outlier[i];
        const bool curve = o->index == 13;
        assert_false(o->is_row);
        assert_string_equal(o->quantity, curve ? "plate current" : "gm");
        assert_true(o->printed == (curve ? made.point[13].plate_amps : made.point[21].gm_siemens));
        assert_near_relative(o->predicted, o->printed / (curve ? 1.6 : 1.5), 0.1, "without it");
        assert_true(fabs(o->scaled) > PLW_FIT_OUTLIER_SCALED && o->chi_squared_fall > PLW_FIT_OUTLIER_FALL);
    }
}

static plw_row row_of(double grid_volts, double plate_amps) {
    const double none = (double)NAN;
    plw_row row = {.connection = PLW_CONNECTION_TRIODE,
                   .plate_volts = 250.0,
                   .grid_volts = grid_volts,
                   .plate_amps = plate_amps,
                   .gm_siemens = 5250e-6,
                   .plate_resistance_ohms = 800.0,
                   .mu = 4.2};
    double *const absent[] = {&row.screen_volts,
                              &row.cathode_resistor_ohms,
                              &row.drive_peak_volts,
                              &row.screen_amps,
                              &row.plate_amps_full_drive,
                              &row.load_ohms,
                              &row.power_watts,
                              &row.screen_amps_full_drive,
                              &row.thd_percent,
                              &row.h2_percent,
                              &row.h3_percent,
                              &row.uncertainty_percent};
    for (size_t i = 0; i < sizeof absent / sizeof absent[0]; i++) {
        *absent[i] = none;
    }
    return row;
}

static void expect_contradictions(const plw_tube *tube, size_t wanted, const char *which, plw_fit *fit) {
    fit_or_fail(tube, false, fit);
    if (fit->contradictions != wanted) {
        fail_msg("%s: %zu contradictions, want %zu", which, fit->contradictions, wanted);
    }
}

static void test_contradictions_are_named(void **state) {
    (void)state;
    static plw_fit fit;
    plw_row rows[2] = {row_of(-45.0, 0.060), row_of(-45.0, 0.063)};
    const plw_tube tube = {.type = made_type, .kind = PLW_KIND_TRIODE, .rows = rows, .rows_count = 2};
    expect_contradictions(&tube, 0, "five percent: rounding and editions", &fit);
    rows[1].plate_amps = 0.078;
    expect_contradictions(&tube, 1, "a quarter more at the same conditions", &fit);
    const plw_fit_contradiction *c = &fit.contradiction[0];
    assert_true(c->is_row[0] && c->is_row[1] && c->index[0] == 0 && c->index[1] == 1 && c->same_conditions);
    assert_string_equal(c->quantity, "plate current");
    assert_true(c->printed[0] == 0.060 && c->printed[1] == 0.078);
    assert_near_relative(c->apart, log(0.078 / 0.060) / (OF_PLATE_CURRENT * sqrt(2.0)), 1e-9, "each believed so far");
    rows[0].uncertainty_percent = 15.0;
    expect_contradictions(&tube, 0, "a wider stated uncertainty reconciles them", &fit);
    rows[0] = row_of(-40.0, 0.052);
    rows[1] = row_of(-45.0, 0.060);
    expect_contradictions(&tube, 1, "less current at a grid nearer to zero", &fit);
    assert_false(fit.contradiction[0].same_conditions);
    assert_int_equal(fit.contradiction[0].index[0], 0);
    rows[1].plate_amps = 0.040;
    rows[1].gm_siemens *= 2.0;
    expect_contradictions(&tube, 0, "more current there is as it should be", &fit);
    rows[1].grid_volts = -40.1;
    rows[1].plate_amps = 0.052;
    expect_contradictions(&tube, 1, "other constants at one place are not", &fit);
    assert_string_equal(fit.contradiction[0].quantity, "gm");
}

static void test_correlations_are_those_of_the_coefficients(void **state) {
    (void)state;
    static plw_fit fit;
    memset(&fit, 0, sizeof fit);
    fit.model.law = triode_law();
    const size_t count = plw_law_coefficient_count(PLW_LAW_TRIODE);
    for (size_t i = 0; i < count; i++) {
        fit.covariance[i * count + i] = 0.01;
        fit.model.relative_error[i] = 0.1;
    }
    /* Coordinates: mu and kp/mu independent; then mu and kp themselves are correlated by the root of a half, less than
     * what is worth telling. */
    plw_find_correlations(&fit);
    assert_int_equal(fit.correlations, 0);
    fit.covariance[3 * count + 3] = 0.0005; /* kp follows mu: correlation 1 / sqrt(1.05) */
    fit.covariance[1 * count + 2] = -0.0098;
    fit.covariance[2 * count + 1] = -0.0098;
    plw_find_correlations(&fit);
    assert_int_equal(fit.correlations, 2);
    assert_int_equal(fit.correlation[0].first, 1);
    assert_int_equal(fit.correlation[0].second, 2);
    assert_near(fit.correlation[0].correlation, -0.98, 1e-12, "covariance over deviations");
    assert_int_equal(fit.correlation[1].first, 0);
    assert_int_equal(fit.correlation[1].second, 3);
    assert_near(fit.correlation[1].correlation, 1.0 / sqrt(1.05), 1e-12, "0.01 over sqrt(0.01 * 0.0105)");
    /* Of what the data do not determine nothing is said. */
    fit.model.relative_error[2] = (double)NAN;
    plw_find_correlations(&fit);
    assert_int_equal(fit.correlations, 1);
}

/* ---- errors ------------------------------------------------------------------------------------------------------ */

static void expect_error(const plw_tube *tube, plw_status wanted, const char *word) {
    static plw_fit fit;
    plw_error error = {.status = PLW_OK};
    fit.residuals = 77;
    assert_int_equal(plw_fit_tube(tube, false, &fit, &error), wanted);
    assert_non_null(strstr(error.text, word));
    assert_int_equal(fit.residuals, 77); /* not written */
}

static void test_errors(void **state) {
    (void)state;
    plw_row row = row_of(-45.0, 0.060);
    plw_tube tube = {.type = made_type, .kind = PLW_KIND_RECTIFIER, .rows = &row, .rows_count = 1};
    expect_error(&tube, PLW_E_USAGE, "a rectifier has no grid");
    tube.kind = PLW_KIND_TRIODE;
    tube.rows_count = 0;
    expect_error(&tube, PLW_E_DATA, "0 figures");
    tube.rows_count = 1;
    row.provenance.confidence = PLW_CONFIDENCE_LOW;
    expect_error(&tube, PLW_E_DATA, "0 figures");
    row.provenance.confidence = PLW_CONFIDENCE_HIGH;
    plw_law law = triode_law();
    plw_error error = {.status = PLW_OK};
    assert_int_equal(plw_fit_without(&tube, 0, false, NULL, &law, &error), PLW_E_DATA);
    assert_non_null(strstr(error.text, "nothing is left"));
    plw_law nonsense = law;
    nonsense.coefficient[0] = (double)NAN;
    assert_int_equal(plw_fit_without(&tube, SIZE_MAX, false, &nonsense, &law, &error), PLW_E_NO_CONVERGENCE);
    static plw_fit fit;
    fit_or_fail(&tube, false, &fit);
    row.grid_volts = (double)NAN;
    plw_prediction p = {.plate_amps = 2.385};
    plw_prediction deviation = {.plate_amps = 2.385};
    assert_int_equal(plw_fit_predict_row(&fit, &row, &p, &deviation, &error), PLW_E_USAGE);
    assert_true(p.plate_amps == 2.385 && deviation.plate_amps == 2.385);
}

static void test_too_many_figures(void **state) {
    (void)state;
    enum { MANY = 605 };
    plw_point *points = calloc(MANY, sizeof *points);
    assert_non_null(points);
    for (int i = 0; i < MANY; i++) {
        points[i] = (plw_point){.kind = PLW_POINT_CURVE,
                                .connection = PLW_CONNECTION_TRIODE,
                                NAN_FIELDS,
                                .plate_volts = 50.0 + i,
                                .grid_volts = -3.5,
                                .plate_amps = 1e-3 * i};
    }
    const plw_tube tube = {.type = made_type, .kind = PLW_KIND_TRIODE, .points = points, .points_count = MANY};
    expect_error(&tube, PLW_E_DATA, "600 figures or more");
    free(points);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_exact_data_give_the_coefficients_back),
        cmocka_unit_test(test_standard_errors_by_their_statistics),
        cmocka_unit_test(test_errors_grow_with_the_scatter),
        cmocka_unit_test(test_several_starts_end_alike),
        cmocka_unit_test(test_order_does_not_matter),
        cmocka_unit_test(test_stated_uncertainty_weighs),
        cmocka_unit_test(test_a_single_row),
        cmocka_unit_test(test_an_outlier_is_named),
        cmocka_unit_test(test_contradictions_are_named),
        cmocka_unit_test(test_correlations_are_those_of_the_coefficients),
        cmocka_unit_test(test_errors),
        cmocka_unit_test(test_too_many_figures),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
