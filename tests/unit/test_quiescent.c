/* Point of rest: Kirchhoff's laws on ten thousand random stages, GSL's root finder on a sample, what is reported.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <gsl/gsl_errno.h>
#include <gsl/gsl_multiroots.h>
#include <string.h>

#include "near.h"
#include "unit/stages.h"

enum { STAGES = 10000, GSL_SAMPLE = 200 };
#define RESIDUAL_AMPS 1e-9 /* stage.h */
#define KIRCHHOFF "Kirchhoff's laws written down apart from the library"

static void fail_stage(int number, const plw_stage *stage, const char *what) {
    char text[600];
    fail_msg("stage %d: %s: %s", number, what, stage_text(stage, text, sizeof text));
}

/* ---- Kirchhoff --------------------------------------------------------------------------------------------------- */

static void check_kirchhoff(int number, const plw_stage *stage, const plw_quiescent *q) {
    const node_volts v = circuit_volts(stage, q->plate_amps, q->screen_amps, q->plate_amps, q->screen_amps, 0.0);
    plw_currents c;
    plw_law_evaluate(&stage->tube->model.law, v.plate - v.cathode, v.screen - v.cathode, v.grid - v.cathode, &c);
    const double missed = fabs(c.plate_amps - q->plate_amps) + fabs(c.screen_amps - q->screen_amps);
    if (!(missed < RESIDUAL_AMPS && q->residual_amps < RESIDUAL_AMPS)) {
        fail_stage(number, stage, "residual");
    }
    /* What is reported is that point: the voltages within the rounding of their sums. */
    assert_near(q->supply_volts, v.supply, 1e-9, KIRCHHOFF);
    assert_near(q->plate_to_ground_volts, v.plate, 1e-9, KIRCHHOFF);
    assert_near(q->cathode_volts, v.cathode, 1e-9, KIRCHHOFF);
    assert_near(q->plate_volts, v.plate - v.cathode, 1e-9, KIRCHHOFF);
    assert_near(q->grid_volts, v.grid - v.cathode, 1e-9, KIRCHHOFF);
    assert_near(q->cathode_amps, q->plate_amps + q->screen_amps, 1e-15, KIRCHHOFF);
    assert_near(q->plate_watts, q->plate_volts * q->plate_amps, 1e-12, "P = V I");
    if (stage->tube->model.law.kind == PLW_LAW_PENTODE) {
        assert_near(q->screen_to_ground_volts, v.screen, 1e-9, KIRCHHOFF);
        assert_near(q->screen_volts, v.screen - v.cathode, 1e-9, KIRCHHOFF);
        assert_near(q->screen_watts, q->screen_volts * q->screen_amps, 1e-12, "P = V I");
        assert_near(q->screen_resistor_watts, stage->screen_resistor_ohms * q->screen_amps * q->screen_amps, 1e-12,
                    "P = I^2 R");
    } else {
        assert_true(isnan(q->screen_volts) && isnan(q->screen_to_ground_volts) && isnan(q->screen_watts));
        assert_near(q->screen_amps, 0.0, 0.0, "a triode has no screen");
    }
    const double tube_amps = q->plate_amps + (isfinite(stage->screen_supply_volts) ? 0.0 : q->screen_amps);
    assert_near(q->supply_amps, stage->parallel * tube_amps + stage->other_amps, 1e-12, KIRCHHOFF);
}

static void check_resistor(const plw_stage *stage, const plw_quiescent *q) {
    if (isnan(stage->cathode_resistor_ohms)) {
        assert_true(isnan(q->cathode_resistor_amps) && isnan(q->cathode_resistor_watts));
        assert_near(q->cathode_volts, 0.0, 0.0, "the cathode is on the chassis");
        return;
    }
    const double amps = q->cathode_amps * (stage->resistor_each ? 1.0 : stage->parallel);
    assert_near(q->cathode_resistor_amps, amps, 1e-12, "all tubes that share it");
    assert_near(q->cathode_resistor_watts, amps * amps * stage->cathode_resistor_ohms,
                1e-9 * (1.0 + q->cathode_resistor_watts), "P = I^2 R");
}

/* What the sources give is what the tubes and resistances take up. */
static void check_energy(const plw_stage *stage, const plw_quiescent *q) {
    const double tubes = stage->parallel, turns = screen_turns(stage);
    const bool own = isfinite(stage->screen_supply_volts);
    const double given = q->supply_volts * tubes * (q->plate_amps + (own ? 0.0 : q->screen_amps)) +
                         (own ? stage->screen_supply_volts * tubes * q->screen_amps : 0.0);
    const double tapped = tubes * (q->plate_amps + (turns > 0.0 ? q->screen_amps : 0.0));
    const double copper =
        stage->primary_ohms * (turns * tapped * tapped + (1.0 - turns) * tubes * q->plate_amps * tubes * q->plate_amps);
    const double resistors = isfinite(stage->cathode_resistor_ohms) ? stage->resistor_each ? tubes : 1.0 : 0.0;
    const double screen = stage->tube->model.law.kind == PLW_LAW_PENTODE ? q->screen_watts : 0.0;
    const double taken = tubes * (q->plate_watts + screen + q->screen_resistor_watts) + copper +
                         (resistors > 0.0 ? resistors * q->cathode_resistor_watts : 0.0);
    assert_near(taken, given, 1e-6 + 1e-8 * given, "energy is kept");
}

/* gm, rp and mu of the connection: central differences of the law with plate and tapped screen moved together. */
static double connected_amps(const plw_stage *stage, const plw_quiescent *q, double plate_by, double grid_by) {
    const double turns = screen_turns(stage);
    plw_currents c;
    plw_law_evaluate(&stage->tube->model.law, q->plate_volts + plate_by, q->screen_volts + turns * plate_by,
                     q->grid_volts + grid_by, &c);
    return c.plate_amps + turns * c.screen_amps;
}

static void check_small_signal(const plw_stage *stage, const plw_quiescent *q) {
    const double step = 1e-3;
    const double gm = (connected_amps(stage, q, 0.0, step) - connected_amps(stage, q, 0.0, -step)) / (2.0 * step);
    const double conductance =
        (connected_amps(stage, q, step, 0.0) - connected_amps(stage, q, -step, 0.0)) / (2.0 * step);
    const double tolerance = 1e-5 * fabs(gm) + 1e-10; /* of the differences: third derivative, rounding over the step */
    assert_near(q->gm_siemens, gm, tolerance, "central difference");
    assert_near(1.0 / q->plate_resistance_ohms, conductance, 1e-4 * conductance + 1e-10, "central difference");
    assert_near_relative(q->mu, q->gm_siemens * q->plate_resistance_ohms, 1e-12, "mu = gm rp (Barkhausen)");
}

static void kirchhoffs_laws_hold_on_ten_thousand_stages(void **state) {
    (void)state;
    random_source r = {20250213};
    for (int number = 0; number < STAGES; number++) {
        test_tube tube;
        plw_stage stage;
        random_stage(&r, &tube, &stage);
        plw_quiescent q;
        plw_error error = {0};
        const plw_status status = plw_quiescent_solve(&stage, &q, &error);
        if (status != PLW_OK) {
            fail_stage(number, &stage, error.text);
        }
        check_kirchhoff(number, &stage, &q);
        check_resistor(&stage, &q);
        check_energy(&stage, &q);
        check_small_signal(&stage, &q);
    }
}

/* ---- GSL's root finder ------------------------------------------------------------------------------------------- */

/* Unknown are node voltages to chassis and the two currents; nothing of the library but its law and its supply. */
enum { AT_SUPPLY, AT_PLATE, AT_SCREEN, AT_CATHODE, PLATE_MILLIAMPS, SCREEN_MILLIAMPS, UNKNOWNS };

static int node_equations(const gsl_vector *x, void *context, gsl_vector *f) {
    const plw_stage *s = context;
    const double *at = x->data;
    const double plate_amps = 1e-3 * at[PLATE_MILLIAMPS], screen_amps = 1e-3 * at[SCREEN_MILLIAMPS];
    const double tubes = s->parallel, turns = screen_turns(s);
    const bool own = isfinite(s->screen_supply_volts);
    double supply, ignored;
    plw_supply_at(&s->supply, s->other_amps + tubes * (plate_amps + (own ? 0.0 : screen_amps)), &supply, &ignored);
    const double sharing = s->resistor_each ? 1.0 : tubes;
    const double cathode =
        isfinite(s->cathode_resistor_ohms) ? s->cathode_resistor_ohms * sharing * (plate_amps + screen_amps) : 0.0;
    const double bias = isfinite(s->fixed_bias_volts) ? s->fixed_bias_volts : 0.0;
    const double on_primary = turns > 0.0 ? screen_amps : 0.0;
    const double tap = at[AT_SUPPLY] - turns * s->primary_ohms * tubes * (plate_amps + on_primary);
    plw_currents c;
    plw_law_evaluate(&s->tube->model.law, at[AT_PLATE] - at[AT_CATHODE], at[AT_SCREEN] - at[AT_CATHODE],
                     bias - at[AT_CATHODE], &c);
    f->data[AT_SUPPLY] = at[AT_SUPPLY] - supply;
    f->data[AT_PLATE] = at[AT_PLATE] - (tap - (1.0 - turns) * s->primary_ohms * tubes * plate_amps);
    f->data[AT_SCREEN] = at[AT_SCREEN] - ((own ? s->screen_supply_volts : tap) - s->screen_resistor_ohms * screen_amps);
    f->data[AT_CATHODE] = at[AT_CATHODE] - cathode;
    f->data[PLATE_MILLIAMPS] = at[PLATE_MILLIAMPS] - 1e3 * c.plate_amps;
    f->data[SCREEN_MILLIAMPS] = at[SCREEN_MILLIAMPS] - 1e3 * c.screen_amps;
    return GSL_SUCCESS;
}

/* From a start that knows nothing of the answer: full supply at plate and screen, a share of it at the cathode. */
static bool gsl_solve(plw_stage *stage, double part, gsl_vector *x) {
    gsl_multiroot_function function = {node_equations, UNKNOWNS, stage};
    gsl_multiroot_fsolver *solver = gsl_multiroot_fsolver_alloc(gsl_multiroot_fsolver_hybrids, UNKNOWNS);
    gsl_vector_set_all(x, stage->supply.volts);
    const bool has_resistor = isfinite(stage->cathode_resistor_ohms);
    x->data[AT_CATHODE] = has_resistor ? part * stage->supply.volts : 0.0;
    x->data[PLATE_MILLIAMPS] = has_resistor ? 1e3 * x->data[AT_CATHODE] / stage->cathode_resistor_ohms : 300.0 * part;
    x->data[SCREEN_MILLIAMPS] = 0.1 * x->data[PLATE_MILLIAMPS];
    gsl_multiroot_fsolver_set(solver, &function, x);
    int status = GSL_CONTINUE;
    for (int step = 0; step < 1000 && status == GSL_CONTINUE; step++) {
        if (gsl_multiroot_fsolver_iterate(solver) != GSL_SUCCESS) {
            break;
        }
        status = gsl_multiroot_test_residual(solver->f, 1e-9);
    }
    gsl_vector_memcpy(x, gsl_multiroot_fsolver_root(solver));
    gsl_multiroot_fsolver_free(solver);
    return status == GSL_SUCCESS;
}

static void gsls_root_finder_comes_to_the_same_point(void **state) {
    (void)state;
    gsl_set_error_handler_off();
    static const double starts[] = {0.05, 0.02, 0.1, 0.01, 0.2, 0.005, 0.3, 0.4};
    random_source r = {20250214};
    gsl_vector *x = gsl_vector_alloc(UNKNOWNS);
    int solved = 0;
    for (int number = 0; number < GSL_SAMPLE; number++) {
        test_tube tube;
        plw_stage stage;
        random_stage(&r, &tube, &stage);
        plw_quiescent q;
        assert_int_equal(plw_quiescent_solve(&stage, &q, NULL), PLW_OK);
        bool found = false;
        for (size_t start = 0; start < sizeof starts / sizeof starts[0] && !found; start++) {
            found = gsl_solve(&stage, starts[start], x);
        }
        if (!found) {
            continue;
        }
        solved++;
        /* The residual asked of GSL is 1e-9 V and 1e-9 mA; through the largest slopes here (1 S) and resistances
         * (kiloohms) that leaves less than a microvolt and a tenth of a microampere. */
        assert_near(q.plate_amps, 1e-3 * x->data[PLATE_MILLIAMPS], 1e-8, "gsl_multiroot_fsolver_hybrids");
        assert_near(q.screen_amps, 1e-3 * x->data[SCREEN_MILLIAMPS], 1e-8, "gsl_multiroot_fsolver_hybrids");
        assert_near(q.supply_volts, x->data[AT_SUPPLY], 1e-6, "gsl_multiroot_fsolver_hybrids");
        assert_near(q.plate_to_ground_volts, x->data[AT_PLATE], 1e-6, "gsl_multiroot_fsolver_hybrids");
        assert_near(q.cathode_volts, x->data[AT_CATHODE], 1e-6, "gsl_multiroot_fsolver_hybrids");
    }
    gsl_vector_free(x);
    print_message("GSL found %d of %d points of rest\n", solved, GSL_SAMPLE);
    /* A general-purpose finder may get stuck; the comparison must not rest on a handful. */
    assert_true(solved >= 190);
}

/* ---- one stage, and what has no point ---------------------------------------------------------------------------- */

static void a_cut_off_tube_has_no_point(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_2A3));
    plw_stage stage = simple_stage(&tube, 250.0, 2500.0, UNKNOWN, -180.0);
    plw_quiescent q = {.plate_amps = 2.385};
    plw_error error = {0};
    assert_int_equal(plw_quiescent_solve(&stage, &q, &error), PLW_E_NO_POINT);
    assert_non_null(strstr(error.text, "cut off"));
    assert_near(q.plate_amps, 2.385, 0.0, "stage.h: not written unless PLW_OK");
}

static void a_supply_drained_by_the_rest_is_named(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage = simple_stage(&tube, 285.0, 5000.0, 270.0, UNKNOWN);
    plw_quiescent q;
    plw_error error = {0};
    assert_int_equal(plw_supply_source(305.0, 1800.0, &stage.supply, &error), PLW_OK);
    stage.other_amps = 0.2;
    assert_int_equal(plw_quiescent_solve(&stage, &q, &error), PLW_E_NO_POINT);
    assert_non_null(strstr(error.text, "other-current"));
}

static void readings_that_do_not_reach_are_named(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, koren_triode(KOREN_2A3));
    plw_stage stage = simple_stage(&tube, 280.0, 2500.0, 750.0, UNKNOWN);
    const plw_reading small[] = {{301.0, 0.0}, {292.0, 0.012}};
    assert_int_equal(plw_supply_readings(small, 2, &stage.supply, NULL), PLW_OK);
    plw_quiescent q;
    plw_error error = {0};
    assert_int_equal(plw_quiescent_solve(&stage, &q, &error), PLW_E_NO_POINT);
    assert_non_null(strstr(error.text, "reading"));
    const plw_reading large[] = {{281.0, 0.150}, {270.0, 0.205}};
    assert_int_equal(plw_supply_readings(large, 2, &stage.supply, NULL), PLW_OK);
    error = (plw_error){0};
    assert_int_equal(plw_quiescent_solve(&stage, &q, &error), PLW_E_NO_POINT);
    assert_non_null(strstr(error.text, "reading"));
}

static void parallel_tubes_are_one_tube_with_shared_resistances_multiplied(void **state) {
    (void)state;
    test_tube tube;
    make_tube(&tube, pentode_law(TEST_BEAM_SMALL));
    plw_stage one = simple_stage(&tube, 285.0, 5000.0, 270.0, UNKNOWN);
    one.primary_ohms = 280.0;
    one.screen_resistor_ohms = 1000.0; /* one a tube */
    plw_stage three = one;
    three.parallel = 3;
    three.load_ohms /= 3.0;
    three.primary_ohms /= 3.0;
    three.cathode_resistor_ohms /= 3.0;
    plw_quiescent single, triple;
    assert_int_equal(plw_quiescent_solve(&one, &single, NULL), PLW_OK);
    assert_int_equal(plw_quiescent_solve(&three, &triple, NULL), PLW_OK);
    assert_near(triple.plate_amps, single.plate_amps, 1e-9, "symmetry");
    assert_near(triple.screen_amps, single.screen_amps, 1e-9, "symmetry");
    assert_near(triple.supply_amps, 3.0 * single.supply_amps, 1e-8, "symmetry");
    assert_near(triple.cathode_resistor_watts, 3.0 * single.cathode_resistor_watts, 1e-7, "symmetry");
    three.resistor_each = true;
    three.cathode_resistor_ohms = one.cathode_resistor_ohms;
    assert_int_equal(plw_quiescent_solve(&three, &triple, NULL), PLW_OK);
    assert_near(triple.plate_amps, single.plate_amps, 1e-9, "symmetry");
    assert_near(triple.cathode_resistor_watts, single.cathode_resistor_watts, 1e-8, "one resistor a tube");
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(kirchhoffs_laws_hold_on_ten_thousand_stages),
        cmocka_unit_test(gsls_root_finder_comes_to_the_same_point),
        cmocka_unit_test(a_cut_off_tube_has_no_point),
        cmocka_unit_test(a_supply_drained_by_the_rest_is_named),
        cmocka_unit_test(readings_that_do_not_reach_are_named),
        cmocka_unit_test(parallel_tubes_are_one_tube_with_shared_resistances_multiplied),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
