/* One cycle of the rectifier and its filter, with its derivative by the state at the start.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "supply/engine.h"

#include <math.h>
#include <string.h>

#include "supply/collocation.h"

/* Longest step: a thirty-second of a half cycle. */
#define STEPS_IN_HALF 32
#define PI 3.14159265358979323846

enum { DEEPEST = PLW_FLOW_LEVELS - 1, CURVED_RAMP_STEPS = 2, SEEN_RAMP_STEPS = 8, SEEN_LEVEL = 1, CURVED_DEPTH = 6 };

/* ---- matrices ---------------------------------------------------------------------------------------------------- */

/* Order of the flow's columns: states, integral of the output, load, constant, then the mode's own. */
static size_t base_matrix(const plw_network *network, double matrix[PLW_FLOW_WIDTH][PLW_FLOW_WIDTH]) {
    const size_t n = network->states;
    memset(matrix, 0, sizeof(double[PLW_FLOW_WIDTH][PLW_FLOW_WIDTH]));
    for (size_t i = 0; i < n; i++) {
        memcpy(matrix[i], network->a[i], n * sizeof(double));
        matrix[i][n + 1] = network->load[i];
        matrix[i][n + 2] = network->constant[i];
    }
    matrix[n][network->output] = 1;
    return n + 3;
}

/* The rectifier conducting as silicon: w = by_emf EMF - constant - ohms-or-siemens x[0]. */
static size_t conducting_matrix(const plw_network *network, plw_mode mode,
                                double matrix[PLW_FLOW_WIDTH][PLW_FLOW_WIDTH]) {
    const plw_rectifier_law *law = &network->law;
    const size_t width = base_matrix(network, matrix), sine = width, cosine = width + 1;
    const double per_volt = network->choke_input ? network->input : network->input / law->total_ohms;
    double by_state = network->input / law->total_ohms;
    if (network->choke_input) {
        by_state = network->input * (mode == PLW_MODE_BOTH ? law->shared_ohms : law->total_ohms);
    }
    matrix[0][0] -= by_state;
    matrix[0][network->states + 2] -= per_volt * law->drop_volts;
    matrix[0][sine] = mode == PLW_MODE_BOTH ? 0 : per_volt * law->peak_volts;
    matrix[sine][cosine] = 1;
    matrix[cosine][sine] = -1;
    return width + 2;
}

void plw_engine_make(plw_engine *engine, const plw_rectifier *supply, double load_ohms) {
    plw_network *network = &engine->network;
    plw_network_make(network, supply, load_ohms);
    const double step = PI / STEPS_IN_HALF;
    double matrix[PLW_FLOW_WIDTH][PLW_FLOW_WIDTH];
    size_t width = base_matrix(network, matrix);
    engine->relaxation = (double)INFINITY;
    if (network->choke_input) {
        memset(matrix[0], 0, sizeof matrix[0]); /* the choke carries nothing and goes on doing so */
    }
    plw_flow_make(&engine->flow[PLW_MODE_NONE], matrix, width, step);
    if (network->law.vacuum) {
        base_matrix(network, matrix);
        plw_collocation_make(engine->collocation, &engine->flow[PLW_MODE_CURVED], matrix, network, step);
        return;
    }
    width = conducting_matrix(network, PLW_MODE_ONE, matrix);
    plw_flow_make(&engine->flow[PLW_MODE_ONE], matrix, width, step);
    engine->relaxation = -1 / matrix[0][0];
    if (network->choke_input) {
        width = conducting_matrix(network, PLW_MODE_BOTH, matrix);
        plw_flow_make(&engine->flow[PLW_MODE_BOTH], matrix, width, step);
    }
}

/* ---- a point of the cycle ---------------------------------------------------------------------------------------- */

double plw_engine_emf(const plw_engine *engine, double angle) {
    return engine->network.law.peak_volts * sin(angle);
}

double plw_engine_input(const plw_engine *engine, plw_mode mode, double angle, const double *state) {
    const plw_network *network = &engine->network;
    const plw_rectifier_law *law = &network->law;
    const double emf = plw_engine_emf(engine, angle);
    double slope, first;
    if (!network->choke_input) {
        switch (mode) {
        case PLW_MODE_NONE:
            return 0;
        case PLW_MODE_CURVED:
            return plw_path_amps(law, emf - state[0], &slope);
        default:
            return (emf - law->drop_volts - state[0]) / law->total_ohms;
        }
    }
    switch (mode) {
    case PLW_MODE_NONE:
        return state[1];
    case PLW_MODE_CURVED:
        return plw_choke_volts(law, emf, state[0], &slope, &first);
    case PLW_MODE_BOTH:
        return -law->drop_volts - law->shared_ohms * state[0];
    default:
        return emf - law->drop_volts - law->total_ohms * state[0];
    }
}

static void slopes(const plw_engine *engine, plw_mode mode, double angle, const double *state, double load_amps,
                   double *slope) {
    const plw_network *network = &engine->network;
    for (size_t i = 0; i < network->states; i++) {
        double sum = network->load[i] * load_amps + network->constant[i];
        for (size_t j = 0; j < network->states; j++) {
            sum += network->a[i][j] * state[j];
        }
        slope[i] = sum;
    }
    slope[0] += network->input * plw_engine_input(engine, mode, angle, state);
    if (network->choke_input && mode == PLW_MODE_NONE) {
        slope[0] = 0;
    }
}

/* ---- the run ----------------------------------------------------------------------------------------------------- */

typedef struct {
    const plw_engine *engine;
    double load_amps;
    plw_mode mode;
    double angle;
    plw_cycle *cycle;
    bool with_derivative;
    int base, ramp, ramp_count, ramp_steps; /* steps start short after a switching and lengthen */
    int descent;                            /* within a descent towards a switching: the level to try, else 0 */
    plw_collocated collocated;              /* the last attempt, PLW_MODE_CURVED */
    plw_piece_seen seen;
    void *context;
} run;

/* How far the mode has been left: positive when it no longer holds.  Two ways out at most. */
static void exits(const run *r, double angle, const double *x, double out[2]) {
    const plw_network *network = &r->engine->network;
    const double emf = plw_engine_emf(r->engine, angle);
    out[1] = -1;
    if (r->mode == PLW_MODE_NONE) {
        out[0] = emf - network->law.drop_volts - x[network->choke_input ? 1 : 0];
        return;
    }
    if (!network->choke_input) {
        out[0] = x[0] + network->law.drop_volts - emf;
        return;
    }
    out[0] = -x[0];
    if (network->law.vacuum || network->law.half_wave) {
        return;
    }
    out[1] = network->law.overlap_ohms * x[0] - 2 * emf;
    if (r->mode == PLW_MODE_BOTH) {
        out[1] = -out[1];
    }
}

/* Rate at which the way out of PLW_MODE_NONE is approached. */
static double approach(const run *r, double angle, const double *x) {
    double slope[PLW_STATES_MOST];
    slopes(r->engine, PLW_MODE_NONE, angle, x, r->load_amps, slope);
    const plw_network *network = &r->engine->network;
    return network->law.peak_volts * cos(angle) - slope[network->choke_input ? 1 : 0];
}

static void try_linear(const run *r, int level, double *x) {
    const plw_network *network = &r->engine->network;
    const plw_flow *flow = &r->engine->flow[r->mode];
    const size_t n = network->states, width = flow->width;
    double z[PLW_FLOW_WIDTH];
    memcpy(z, r->cycle->end, (n + 1) * sizeof(double));
    z[n + 1] = r->load_amps;
    z[n + 2] = 1;
    if (width > n + 3) {
        z[n + 3] = sin(r->angle);
        z[n + 4] = cos(r->angle);
    }
    for (size_t i = 0; i <= n; i++) {
        double sum = 0;
        for (size_t j = 0; j < width; j++) {
            sum += flow->change[level][i][j] * z[j];
        }
        x[i] = r->cycle->end[i] + sum;
    }
}

static void try_step(run *r, int level, double *x) {
    if (r->mode == PLW_MODE_CURVED) {
        plw_collocate(r->engine, level, r->angle, r->load_amps, r->cycle->end, &r->collocated, x);
    } else {
        try_linear(r, level, x);
    }
}

/* Carry the derivative over a fraction of the step just tried. */
static void carry_derivative(run *r, int level, double fraction) {
    const size_t n = r->engine->network.states;
    const plw_flow *flow = &r->engine->flow[r->mode];
    double change[PLW_ROWS_MOST][PLW_STATES_MOST + 1] = {{0}};
    for (size_t i = 0; i <= n; i++) {
        change[i][n] = flow->change[level][i][n + 1];
        for (size_t k = 0; k < n; k++) {
            const double weight = flow->change[level][i][k];
            if (weight != 0) {
                for (size_t j = 0; j <= n; j++) {
                    change[i][j] += weight * r->cycle->by[k][j];
                }
            }
        }
    }
    if (r->mode == PLW_MODE_CURVED) {
        plw_collocation_derivative(r->engine, level, &r->collocated, r->cycle->by, change);
    }
    for (size_t i = 0; i <= n; i++) {
        for (size_t j = 0; j <= n; j++) {
            r->cycle->by[i][j] += fraction * change[i][j];
        }
    }
}

/* Take a fraction of the step that was tried; the last bit of a cycle or of a mode is so short that the straight line
 * between its ends is exact enough. */
static void take(run *r, int level, double fraction, const double *tried) {
    const size_t n = r->engine->network.states;
    plw_piece piece;
    if (r->seen != NULL) {
        piece.mode = r->mode;
        piece.angle[0] = r->angle;
        memcpy(piece.state[0], r->cycle->end, n * sizeof(double));
        slopes(r->engine, r->mode, r->angle, r->cycle->end, r->load_amps, piece.slope[0]);
    } else if (r->with_derivative) {
        carry_derivative(r, level, fraction);
    }
    for (size_t i = 0; i <= n; i++) {
        r->cycle->end[i] += fraction * (tried[i] - r->cycle->end[i]);
    }
    r->angle += fraction * r->engine->flow[PLW_MODE_NONE].step[level];
    if (r->seen != NULL) {
        piece.angle[1] = r->angle;
        memcpy(piece.state[1], r->cycle->end, n * sizeof(double));
        slopes(r->engine, r->mode, r->angle, r->cycle->end, r->load_amps, piece.slope[1]);
        r->seen(r->context, r->engine, &piece);
    }
    if (r->ramp > 0 && ++r->ramp_count == r->ramp_steps) {
        r->ramp--;
        r->ramp_count = 0;
    }
}

/* ---- switching --------------------------------------------------------------------------------------------------- */

/* A vacuum rectifier's current starts as the 3/2 power of time: short steps first, and eight or so up to the crest. */
static void set_steps(run *r) {
    r->base = r->seen != NULL ? SEEN_LEVEL : 0;
    r->ramp = 0;
    r->ramp_count = 0;
    const double longest = r->engine->flow[PLW_MODE_NONE].step[0];
    if (r->mode == PLW_MODE_CURVED) {
        const double crest = r->engine->network.choke_input ? PI / 4 : fabs(PI / 2 - r->angle);
        while (r->base < 9 && r->engine->flow[PLW_MODE_NONE].step[r->base] > crest / 8) {
            r->base++;
        }
        r->ramp = 3;
        r->ramp_steps = CURVED_RAMP_STEPS;
    } else if (r->mode == PLW_MODE_ONE && r->seen != NULL) {
        /* A small path resistance lets the current jump up; its rise is seen in steps of an eighth of its time. */
        r->ramp_steps = SEEN_RAMP_STEPS;
        while (r->base + r->ramp < DEEPEST && ldexp(longest, -(r->base + r->ramp)) > r->engine->relaxation / 8) {
            r->ramp++;
        }
    }
}

static void switch_to(run *r, plw_mode mode) {
    r->mode = mode;
    r->descent = 0;
    if (mode == PLW_MODE_NONE && r->engine->network.choke_input) {
        /* Whatever the start, the choke's current has come to nothing here. */
        r->cycle->end[0] = 0;
        memset(r->cycle->by[0], 0, sizeof r->cycle->by[0]);
    }
    set_steps(r);
}

static plw_mode conducting(const run *r) {
    return r->engine->network.law.vacuum ? PLW_MODE_CURVED : PLW_MODE_ONE;
}

static plw_mode mode_after(const run *r, int way_out) {
    if (r->mode == PLW_MODE_NONE) {
        return conducting(r);
    }
    if (way_out == 0) {
        return PLW_MODE_NONE;
    }
    return r->mode == PLW_MODE_ONE ? PLW_MODE_BOTH : PLW_MODE_ONE;
}

static void begin(run *r, const double *start) {
    const plw_network *network = &r->engine->network;
    const size_t n = network->states;
    memset(r->cycle, 0, sizeof *r->cycle);
    memcpy(r->cycle->end, start, n * sizeof(double));
    for (size_t i = 0; i < n; i++) {
        r->cycle->by[i][i] = 1;
    }
    r->angle = 0;
    plw_mode mode = PLW_MODE_NONE;
    if (network->choke_input && start[0] > 0) {
        mode = conducting(r);
        if (mode == PLW_MODE_ONE && !network->law.half_wave && network->law.overlap_ohms > 0) {
            mode = PLW_MODE_BOTH;
        }
    } else if (-network->law.drop_volts - start[network->choke_input ? 1 : 0] > 0) {
        mode = conducting(r);
    }
    switch_to(r, mode);
}

/* Does the step from the present point to x leave the mode, or perhaps leave it and come back? */
static bool leaves(const run *r, double angle_after, const double *x, double before[2], double after[2]) {
    exits(r, angle_after, x, after);
    if (after[0] > 0 || after[1] > 0) {
        exits(r, r->angle, r->cycle->end, before);
        return true;
    }
    if (r->mode != PLW_MODE_NONE || after[0] < -0.1 * r->engine->network.law.peak_volts) {
        return false;
    }
    return approach(r, r->angle, r->cycle->end) > 0 && approach(r, angle_after, x) < 0;
}

static double fraction_to(double before, double after) {
    if (!(after > 0)) {
        return 2;
    }
    return before >= 0 ? 0 : before / (before - after);
}

static int level_for(const run *r, double remaining) {
    int level = r->base + r->ramp;
    if (r->descent > level) {
        level = r->descent;
    }
    while (level < DEEPEST && r->engine->flow[PLW_MODE_NONE].step[level] > remaining * (1 + 1e-12)) {
        level++;
    }
    return level < DEEPEST ? level : DEEPEST;
}

static void one_step(run *r, double end_angle) {
    const double remaining = end_angle - r->angle;
    const int level = level_for(r, remaining);
    const double step = r->engine->flow[PLW_MODE_NONE].step[level];
    double tried[PLW_ROWS_MOST], before[2] = {0, 0}, after[2];
    try_step(r, level, tried);
    const double reach = fmin(1, remaining / step);
    if (!leaves(r, r->angle + step, tried, before, after)) {
        take(r, level, reach, tried);
        r->descent = r->descent > 0 ? level + 1 : 0;
        return;
    }
    const int deepest = r->mode == PLW_MODE_CURVED ? r->base + CURVED_DEPTH : DEEPEST;
    if (level < deepest) {
        r->descent = level + 1;
        return;
    }
    if (!(after[0] > 0 || after[1] > 0)) {
        take(r, level, reach, tried); /* came near, but did not leave */
        r->descent = 0;
        return;
    }
    const double first = fraction_to(before[0], after[0]), second = fraction_to(before[1], after[1]);
    const double fraction = fmin(first, second);
    if (fraction >= reach) {
        take(r, level, reach, tried);
        return;
    }
    take(r, level, fraction, tried);
    switch_to(r, mode_after(r, first <= second ? 0 : 1));
}

void plw_engine_cycle(const plw_engine *engine, double load_amps, const double *start, plw_cycle *cycle,
                      plw_piece_seen seen, void *context) {
    run r = {.engine = engine, .load_amps = load_amps, .cycle = cycle, .seen = seen, .context = context};
    r.with_derivative = seen == NULL;
    begin(&r, start);
    const double end_angle = engine->network.period;
    /* The cap is far above what any circuit needs; it only forbids an endless chatter. */
    for (long steps = 0; steps < 200000 && end_angle - r.angle > 1e-13; steps++) {
        one_step(&r, end_angle);
    }
}
