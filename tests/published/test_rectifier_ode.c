/* Steady states of the rectifier against a general stiff ODE solver that is run until the circuit has settled.
 * The circuit's equations are written anew here, in time and with every diode by itself.
 * Solver: SUNDIALS CVODE, A. C. Hindmarsh et al., "SUNDIALS: Suite of nonlinear and differential/algebraic equation
 * solvers", ACM Trans. Math. Softw. 31, 2005.
 * The solver is asked for in test_rectifier_ode.mk; built without it, the test says so and is skipped.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef WITH_ODE_SOLVER

#include "near.h"

static void built_without_the_solver(void **state) {
    (void)state;
    skip();
}

int main(void) {
    const struct CMUnitTest tests[] = {cmocka_unit_test(built_without_the_solver)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}

#else

#include "platewright/rectifier.h"

#include <stdbool.h>

#include <cvode/cvode.h>
#include <nvector/nvector_serial.h>
#include <stdio.h>
#include <string.h>
#include <sunlinsol/sunlinsol_dense.h>
#include <sunmatrix/sunmatrix_dense.h>

#include "near.h"

#define PI 3.14159265358979323846
#define AGREEMENT 5e-4
#define SOURCE "CVODE, relative tolerance 1e-8; agreement wanted 0.05 %"

/* ---- the circuit ------------------------------------------------------------------------------------------------- */

/* Current of one path of winding and diodes in series: Cardano's formula for 1/x, where the current is K x^3. */
static double path_amps(const plw_rectifier *s, double series, double over_volts) {
    const double ohms = s->path_ohms;
    if (s->diode.kind == PLW_DIODE_SILICON) {
        return fmax(0, over_volts - series * s->diode.drop_volts) / (ohms + series * s->diode.slope_ohms);
    }
    if (over_volts <= 0) {
        return 0;
    }
    const double third = series / (3 * over_volts), half = ohms * s->diode.perveance / (2 * over_volts);
    const double inside = half * half - third * third * third;
    double y;
    if (inside >= 0) {
        y = cbrt(half + sqrt(inside)) + cbrt(half - sqrt(inside));
    } else {
        y = 2 * sqrt(third) * cos(acos(half / (third * sqrt(third))) / 3);
    }
    return s->diode.perveance / (y * y * y);
}

static double rectified_amps(const plw_rectifier *s, double emf, double volts) {
    if (s->connection == PLW_BRIDGE) {
        return path_amps(s, 2, fabs(emf) - volts);
    }
    const double first = path_amps(s, 1, emf - volts);
    return s->connection == PLW_HALF_WAVE ? first : first + path_amps(s, 1, -emf - volts);
}

/* Voltage ahead of a choke that carries `amps`: where the paths together give just that (false position, bisection
 * every third time). */
static double choke_volts(const plw_rectifier *s, double emf, double amps) {
    if (s->connection == PLW_BRIDGE) { /* only ideal slopes are used here: the winding is shorted or it drives */
        return fmax(fabs(emf) - s->path_ohms * amps, 0) - 2 * s->diode.drop_volts;
    }
    double low = -fabs(emf) - 100 - s->path_ohms * amps, high = fabs(emf) + 10;
    double over = rectified_amps(s, emf, low) - amps, under = rectified_amps(s, emf, high) - amps;
    for (int i = 0; i < 150 && high - low > 1e-12; i++) {
        const double middle = i % 3 == 2 ? (low + high) / 2 : (low * under - high * over) / (under - over);
        const double excess = rectified_amps(s, emf, middle) - amps;
        if (excess > 0) {
            low = middle;
            over = excess;
        } else {
            high = middle;
            under = excess;
        }
    }
    return (low + high) / 2;
}

/* Sum of the squares of the currents of both halves of the winding; in a bridge, of the one winding. */
static double path_squares(const plw_rectifier *s, double emf, double volts, double amps) {
    if (s->connection == PLW_BRIDGE) {
        return amps * amps;
    }
    const double first = path_amps(s, 1, emf - volts);
    const double second = s->connection == PLW_HALF_WAVE ? 0 : path_amps(s, 1, -emf - volts);
    return first * first + second * second;
}

typedef struct {
    plw_rectifier supply;
    plw_dc_load load;
    size_t states; /* volts of nodes and amps of chokes, in order from the rectifier */
    bool blocked;  /* choke input: no diode conducts */
} circuit;

static double emf_at(const plw_rectifier *s, double seconds) {
    return sqrt(2.0) * s->winding_rms_volts * sin(2 * PI * s->mains_hertz * seconds);
}

/* Choke input: the choke's current comes to nothing, or the winding rises above what stands beyond the choke. */
static int switching(sunrealtype seconds, N_Vector at, sunrealtype *passes, void *user) {
    const circuit *c = user;
    const plw_rectifier *s = &c->supply;
    const double *x = N_VGetArrayPointer(at), emf = emf_at(s, seconds);
    const double driving = s->connection == PLW_HALF_WAVE ? emf : fabs(emf);
    const double drop = s->diode.kind == PLW_DIODE_SILICON ? s->diode.drop_volts : 0;
    passes[0] = c->blocked ? driving - (s->connection == PLW_BRIDGE ? 2 : 1) * drop - x[1] : x[0];
    return 0;
}

/* Then follow the integrals: of each node's volts, of node 0 squared, of the rectified current and of
 * the squares of the currents of the paths. */
static int rates(sunrealtype seconds, N_Vector at, N_Vector rate, void *user) {
    const circuit *c = user;
    const plw_rectifier *s = &c->supply;
    const double *x = N_VGetArrayPointer(at);
    double *dx = N_VGetArrayPointer(rate);
    const double emf = emf_at(s, seconds);
    double node_volts[PLW_NODES_MOST], into[PLW_NODES_MOST], amps, ahead;
    size_t nodes = 0, state = 0;
    if (s->reservoir_farads > 0) {
        amps = rectified_amps(s, emf, x[0]);
        into[0] = amps;
        ahead = x[0];
        node_volts[nodes++] = x[state++];
    } else {
        amps = fmax(0, x[0]);
        ahead = c->blocked ? x[1] : choke_volts(s, emf, amps);
    }
    for (size_t i = 0; i < s->sections; i++) {
        const plw_filter_section *f = &s->section[i];
        double through;
        if (f->henries > 0) {
            through = x[state];
            const double after = x[state + 1];
            const double before = nodes > 0 ? node_volts[nodes - 1] : ahead;
            dx[state] = (before - after - f->ohms * through) / f->henries;
            state++;
        } else {
            through = (node_volts[nodes - 1] - x[state]) / f->ohms;
        }
        if (nodes > 0) {
            into[nodes - 1] -= through;
        }
        into[nodes] = through;
        node_volts[nodes++] = x[state++];
    }
    into[nodes - 1] -= c->load.amps + (c->load.ohms > 0 ? node_volts[nodes - 1] / c->load.ohms : 0) +
                       (s->bleeder_ohms > 0 ? node_volts[nodes - 1] / s->bleeder_ohms : 0);
    for (size_t k = 0, at_state = 0; k < nodes; k++) {
        const size_t section = s->reservoir_farads > 0 ? k - 1 : k; /* the section that ends at this node */
        const bool reservoir = s->reservoir_farads > 0 && k == 0;
        if (!reservoir && s->section[section].henries > 0) {
            at_state++;
        }
        dx[at_state++] = (into[k] - s->drawn_amps[k]) / (reservoir ? s->reservoir_farads : s->section[section].farads);
    }
    for (size_t k = 0; k < nodes; k++) {
        dx[state++] = node_volts[k];
    }
    dx[state++] = node_volts[0] * node_volts[0];
    dx[state++] = amps;
    dx[state] = path_squares(s, emf, ahead, amps);
    return 0;
}

/* ---- run until settled ------------------------------------------------------------------------------------------- */

typedef struct {
    double node_volts[PLW_NODES_MOST], ripple_rms_volts, rectified_amps, paths_rms_amps;
} settled;

enum { STILL_PERIODS = 12 };
enum { EQUATIONS_MOST = 9 + PLW_NODES_MOST + 3 };

static void start_from(const circuit *c, double *x) {
    const plw_rectifier *s = &c->supply;
    size_t state = 0;
    const double volts = (s->reservoir_farads > 0 ? 1.1 : 0.85) * s->winding_rms_volts;
    if (s->reservoir_farads > 0) {
        x[state++] = volts;
    }
    for (size_t i = 0; i < s->sections; i++) {
        if (s->section[i].henries > 0) {
            x[state++] = c->load.amps;
        }
        x[state++] = volts * (1 - 0.1 * (double)i);
    }
}

/* One mains period from x, by halves, since the EMF's magnitude has a corner between them. */
static void run_period(void *solver, circuit *c, N_Vector x, size_t equations) {
    double *values = N_VGetArrayPointer(x);
    for (size_t i = c->states; i < equations; i++) {
        values[i] = 0;
    }
    for (int half = 0; half < 2; half++) {
        const double from = 0.5 * half / c->supply.mains_hertz;
        const double to = 0.5 * (half + 1) / c->supply.mains_hertz;
        sunrealtype reached;
        assert_int_equal(CVodeReInit(solver, from, x), CV_SUCCESS);
        assert_int_equal(CVodeSetStopTime(solver, to), CV_SUCCESS);
        int how;
        while ((how = CVode(solver, to, x, &reached, CV_NORMAL)) == CV_ROOT_RETURN) {
            c->blocked = !c->blocked;
            values[0] = 0;
            int direction = c->blocked ? 1 : -1;
            assert_int_equal(CVodeSetRootDirection(solver, &direction), CV_SUCCESS);
            assert_int_equal(CVodeReInit(solver, reached, x), CV_SUCCESS);
            assert_int_equal(CVodeSetStopTime(solver, to), CV_SUCCESS);
        }
        assert_true(how >= 0);
    }
}

static void settle(circuit *c, settled *out) {
    const size_t nodes = c->supply.sections + (c->supply.reservoir_farads > 0), equations = c->states + nodes + 3;
    SUNContext context;
    assert_int_equal(SUNContext_Create(NULL, &context), 0);
    N_Vector x = N_VNew_Serial((sunindextype)equations, context);
    double *values = N_VGetArrayPointer(x), before[EQUATIONS_MOST] = {0};
    memset(values, 0, equations * sizeof(double));
    start_from(c, values);
    SUNMatrix matrix = SUNDenseMatrix((sunindextype)equations, (sunindextype)equations, context);
    SUNLinearSolver linear = SUNLinSol_Dense(x, matrix, context);
    void *solver = CVodeCreate(CV_BDF, context);
    assert_int_equal(CVodeInit(solver, rates, 0, x), CV_SUCCESS);
    assert_int_equal(CVodeSStolerances(solver, 1e-8, 1e-9), CV_SUCCESS);
    assert_int_equal(CVodeSetUserData(solver, c), CV_SUCCESS);
    assert_int_equal(CVodeSetLinearSolver(solver, linear, matrix), CV_SUCCESS);
    assert_int_equal(CVodeSetMaxNumSteps(solver, 1000000), CV_SUCCESS);
    /* Long steps of the quiet part of the cycle must not overlook the corner where a diode begins to conduct. */
    assert_int_equal(CVodeSetMaxStep(solver, 1 / (1500 * c->supply.mains_hertz)), CV_SUCCESS);
    if (c->supply.reservoir_farads <= 0) {
        int falling = -1;
        assert_int_equal(CVodeRootInit(solver, 1, switching), CV_SUCCESS);
        assert_int_equal(CVodeSetRootDirection(solver, &falling), CV_SUCCESS);
    }
    /* The solver's own noise at the switchings of a choke input is larger. */
    const double quiet = (c->supply.reservoir_farads > 0 ? 1e-7 : 1e-6) * c->supply.winding_rms_volts;
    int still = 0; /* periods in a row in which hardly anything moved: slow swings of a choke pass through rest */
    for (long period = 0; period < 6000 && still < STILL_PERIODS; period++) {
        run_period(solver, c, x, equations);
        double moved = 0;
        for (size_t i = 0; i < c->states; i++) {
            moved = fmax(moved, fabs(values[i] - before[i]));
        }
        memcpy(before, values, c->states * sizeof(double));
        still = moved < quiet ? still + 1 : 0;
    }
    const double seconds = 1 / c->supply.mains_hertz, *sums = values + c->states;
    for (size_t k = 0; k < nodes; k++) {
        out->node_volts[k] = sums[k] / seconds;
    }
    out->ripple_rms_volts = sqrt(sums[nodes] / seconds - out->node_volts[0] * out->node_volts[0]);
    out->rectified_amps = sums[nodes + 1] / seconds;
    out->paths_rms_amps = sqrt(sums[nodes + 2] / seconds);
    CVodeFree(&solver);
    SUNLinSolFree(linear);
    SUNMatDestroy(matrix);
    N_VDestroy(x);
    SUNContext_Free(&context);
}

/* ---- twenty circuits --------------------------------------------------------------------------------------------- */

#define SILICON                                                                                                        \
    { PLW_DIODE_SILICON, 0.7, 0.23, 0 }
#define FLAT                                                                                                           \
    { PLW_DIODE_SILICON, 0.8, 0, 0 }
#define VACUUM(perveance)                                                                                              \
    { PLW_DIODE_VACUUM, 0, 0, perveance }

static circuit circuits[] = {
    {{PLW_FULL_WAVE, 300, 50, 50, SILICON, 60e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.25, 0}, 1, false},
    {{PLW_FULL_WAVE, 300, 50, 50, VACUUM(3.21e-3), 60e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.25, 0}, 1, false},
    {{PLW_FULL_WAVE, 350, 50, 60, VACUUM(3.54e-4), 20e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.125, 0}, 1, false},
    {{PLW_BRIDGE, 230, 30, 50, SILICON, 100e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.1, 0}, 1, false},
    {{PLW_HALF_WAVE, 240, 60, 50, SILICON, 47e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.05, 0}, 1, false},
    {{PLW_HALF_WAVE, 325, 525, 60, VACUUM(6.78e-4), 10e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.03, 0}, 1, false},
    {{PLW_FULL_WAVE, 320, 110, 50, VACUUM(3.21e-3), 33e-6, 1, {{10, 200, 47e-6}}, 0, {0}}, {0.08, 0}, 3, false},
    {{PLW_FULL_WAVE, 230, 95, 50, SILICON, 47e-6, 1, {{0, 1000, 47e-6}}, 0, {0}}, {0.045, 0}, 2, false},
    {{PLW_FULL_WAVE, 260, 80, 50, SILICON, 47e-6, 3, {{0, 470, 47e-6}, {0, 2200, 22e-6}, {0, 4700, 10e-6}}, 0, {0}},
     {0, 22e3},
     4,
     false},
    {{PLW_BRIDGE, 260, 90, 50, VACUUM(1.40e-3), 40e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.09, 0}, 1, false},
    {{PLW_FULL_WAVE, 300, 120, 50, SILICON, 0, 1, {{10, 180, 47e-6}}, 0, {0}}, {0.09, 0}, 2, false},
    {{PLW_FULL_WAVE, 350, 150, 50, VACUUM(3.21e-3), 0, 1, {{10, 180, 47e-6}}, 0, {0}}, {0.11, 0}, 2, false},
    {{PLW_FULL_WAVE, 300, 120, 50, SILICON, 0, 1, {{5, 90, 33e-6}}, 0, {0}}, {0.012, 0}, 2, false},
    {{PLW_BRIDGE, 300, 70, 60, FLAT, 0, 2, {{8, 110, 33e-6}, {0, 390, 33e-6}}, 0, {0}}, {0.1, 0}, 3, false},
    {{PLW_FULL_WAVE,
      350,
      230,
      50,
      VACUUM(1.68e-3),
      50e-6,
      4,
      {{8, 150, 33e-6}, {0, 820, 22e-6}, {6, 250, 22e-6}, {0, 3300, 10e-6}},
      0,
      {0}},
     {0.022, 0},
     7,
     false},
    {{PLW_FULL_WAVE, 240, 5, 50, SILICON, 220e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.15, 0}, 1, false},
    {{PLW_FULL_WAVE, 250, 200, 50, SILICON, 10e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.4, 0}, 1, false},
    {{PLW_FULL_WAVE, 300, 50, 50, VACUUM(3.21e-3), 60e-6, 0, {{0, 0, 0}}, 0, {0}}, {0.001, 0}, 1, false},
    {{PLW_FULL_WAVE,
      450,
      67,
      60,
      VACUUM(7.78e-4),
      40e-6,
      2,
      {{5, 70, 40e-6}, {0, 1500, 20e-6}},
      47e3,
      {0.01, 0.13, 0.002}},
     {0.006, 0},
     4,
     false},
    {{PLW_HALF_WAVE, 300, 100, 50, SILICON, 0, 1, {{4, 120, 100e-6}}, 0, {0}}, {0.02, 0}, 2, false},
};

static double worst; /* disagreement so far, relative */

static void compare(double got, double want) {
    worst = fmax(worst, fabs(got / want - 1));
    assert_near_relative(got, want, AGREEMENT, SOURCE);
}

static int tell_worst(void **state) {
    (void)state;
    print_message("worst disagreement: %.4f %%\n", 100 * worst);
    return 0;
}

static void agrees_with_the_solver(void **state) {
    circuit *c = *state;
    settled want = {0};
    settle(c, &want);
    plw_rectifier_state got;
    plw_error error = {0};
    assert_int_equal(plw_rectifier_steady(&c->supply, c->load, &got, &error), PLW_OK);
    for (size_t k = 0; k < got.nodes; k++) {
        compare(got.node[k].volts, want.node_volts[k]);
    }
    compare(got.rectified_amps, want.rectified_amps);
    compare(got.node[0].ripple_rms_volts, want.ripple_rms_volts);
    if (c->supply.connection == PLW_BRIDGE && c->supply.reservoir_farads <= 0) {
        return; /* part of the current passes the winding by while both pairs conduct */
    }
    const double share = c->supply.connection == PLW_FULL_WAVE ? sqrt(0.5) : 1;
    compare(got.winding_rms_amps, share * want.paths_rms_amps);
}

int main(void) {
    enum { COUNT = sizeof circuits / sizeof circuits[0] };
    static char names[COUNT][32];
    struct CMUnitTest tests[COUNT];
    for (size_t i = 0; i < COUNT; i++) {
        snprintf(names[i], sizeof names[i], "circuit %zu", i + 1);
        tests[i] = (struct CMUnitTest){names[i], agrees_with_the_solver, NULL, NULL, &circuits[i]};
    }
    return cmocka_run_group_tests(tests, NULL, tell_worst);
}

#endif
