/* Mean values, ripple, RMS currents and waveforms of a steady state.
 * Each piece of the cycle is read as the cubics of Hermite through its ends; their squares are integrated by Gauss.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "supply/measure.h"

#include <math.h>
#include <string.h>

#define PI 3.14159265358979323846

enum { GAUSS = 4 };

/* Gauss-Legendre on 0..1: exact for the sixth power, which the square of a cubic is. */
static const double gauss_at[GAUSS] = {0.069431844202973712388, 0.33000947820757186760, 0.66999052179242813240,
                                       0.93056815579702628761};
static const double gauss_weight[GAUSS] = {0.17392742256872692869, 0.32607257743127307131, 0.32607257743127307131,
                                           0.17392742256872692869};

typedef struct {
    double mean, square, cosine, sine, highest, lowest, charging_square;
} node_tally;

typedef struct {
    double zero[PLW_NODES_MOST]; /* deviations are counted from here, so that a small ripple keeps its digits */
    node_tally node[PLW_NODES_MOST];
    double first_square, second_square, difference_square;
    double peak, conduction, inverse, choke_least;
    plw_rectifier_instant *instants;
    size_t count, next, next_second;
} tally;

/* ---- a cubic through both ends ----------------------------------------------------------------------------------- */

typedef struct {
    double c[4]; /* in t = 0..1 */
} cubic;

static cubic through(double value0, double slope0, double value1, double slope1, double width) {
    const double a = slope0 * width, b = slope1 * width, rise = value1 - value0;
    return (cubic){{value0, a, 3 * rise - 2 * a - b, a + b - 2 * rise}};
}

static double cubic_at(const cubic *q, double t) {
    return q->c[0] + t * (q->c[1] + t * (q->c[2] + t * q->c[3]));
}

static double cubic_slope(const cubic *q, double t) {
    return q->c[1] + t * (2 * q->c[2] + t * 3 * q->c[3]);
}

/* Widen lowest..highest by the ends of the piece and by the turning points inside. */
static void cubic_extremes(const cubic *q, double *lowest, double *highest) {
    double at[4] = {0, 1, 2, 2};
    const double a = 3 * q->c[3], b = q->c[2], c = q->c[1], root = b * b - a * c;
    if (root >= 0) {
        const double s = -(b + copysign(sqrt(root), b));
        at[2] = a != 0 ? s / a : 2;
        at[3] = s != 0 ? c / s : 2;
    }
    for (int i = 0; i < 4; i++) {
        if (at[i] >= 0 && at[i] <= 1) {
            const double value = cubic_at(q, at[i]);
            *lowest = fmin(*lowest, value);
            *highest = fmax(*highest, value);
        }
    }
}

/* ---- the rectifier's current ------------------------------------------------------------------------------------- */

static cubic piece_state(const plw_piece *piece, size_t state) {
    return through(piece->state[0][state], piece->slope[0][state], piece->state[1][state], piece->slope[1][state],
                   piece->angle[1] - piece->angle[0]);
}

/* Current out of the rectifier at one end, and its slope. */
static double end_amps(const plw_engine *engine, const plw_piece *piece, int end, double *slope) {
    const plw_network *network = &engine->network;
    *slope = 0;
    if (piece->mode == PLW_MODE_NONE) {
        return 0;
    }
    if (network->choke_input) {
        *slope = piece->slope[end][0];
        return piece->state[end][0];
    }
    const plw_rectifier_law *law = &network->law;
    const double angle = piece->angle[end];
    const double over = plw_engine_emf(engine, angle) - piece->state[end][0];
    const double rate = law->peak_volts * cos(angle) - piece->slope[end][0];
    if (law->vacuum) {
        const double amps = plw_path_amps(law, over, slope);
        *slope *= rate;
        return amps;
    }
    *slope = rate / law->total_ohms;
    return (over - law->drop_volts) / law->total_ohms;
}

static cubic piece_amps(const plw_engine *engine, const plw_piece *piece) {
    double slope[2];
    const double first = end_amps(engine, piece, 0, &slope[0]), last = end_amps(engine, piece, 1, &slope[1]);
    return through(first, slope[0], last, slope[1], piece->angle[1] - piece->angle[0]);
}

/* Currents of the two paths, the first being the one whose EMF is positive in this half. */
static void path_amps(const plw_engine *engine, const plw_piece *piece, const cubic *amps, const cubic *first_state,
                      double t, double *first, double *second) {
    const plw_network *network = &engine->network;
    double slope;
    *first = 0;
    *second = 0;
    if (piece->mode == PLW_MODE_NONE) {
        return;
    }
    const double emf = plw_engine_emf(engine, piece->angle[0] + t * (piece->angle[1] - piece->angle[0]));
    if (network->choke_input) {
        const double all = fmax(0, cubic_at(amps, t));
        plw_choke_volts(&network->law, emf, all, &slope, first);
        *second = all - *first;
    } else if (network->law.vacuum) {
        *first = plw_path_amps(&network->law, emf - cubic_at(first_state, t), &slope);
    } else {
        *first = fmax(0, cubic_at(amps, t));
    }
}

/* Reverse voltage on the diode that does not conduct, at a place of the piece. */
static double inverse_volts(const plw_engine *engine, const plw_piece *piece, double t) {
    const plw_rectifier_law *law = &engine->network.law;
    const double angle = piece->angle[0] + t * (piece->angle[1] - piece->angle[0]);
    const double emf = plw_engine_emf(engine, angle);
    const cubic first = piece_state(piece, 0);
    double out = cubic_at(&first, t);
    if (engine->network.choke_input) {
        const cubic beyond = piece_state(piece, 1);
        const double states[2] = {out, cubic_at(&beyond, t)};
        out = plw_engine_input(engine, piece->mode, angle, states);
    }
    if (law->bridge) {
        return out + law->drop_volts / 2;
    }
    return law->half_wave ? out - emf : out + emf;
}

/* ---- tally ------------------------------------------------------------------------------------------------------- */

static void tally_node(const plw_engine *engine, const plw_piece *piece, size_t node, tally *sum) {
    const plw_network *network = &engine->network;
    const double width = piece->angle[1] - piece->angle[0], harmonic = network->law.half_wave ? 1 : 2;
    node_tally *here = &sum->node[node];
    cubic volts = piece_state(piece, network->node_state[node]);
    volts.c[0] -= sum->zero[node];
    cubic_extremes(&volts, &here->lowest, &here->highest);
    for (int g = 0; g < GAUSS; g++) {
        const double weight = gauss_weight[g] * width, value = cubic_at(&volts, gauss_at[g]);
        const double angle = piece->angle[0] + gauss_at[g] * width;
        const double rate = cubic_slope(&volts, gauss_at[g]) / width;
        here->mean += weight * value;
        here->square += weight * value * value;
        here->cosine += weight * value * cos(harmonic * angle);
        here->sine += weight * value * sin(harmonic * angle);
        here->charging_square += weight * rate * rate;
    }
}

static void tally_currents(const plw_engine *engine, const plw_piece *piece, const cubic *amps,
                           const cubic *first_state, tally *sum) {
    const double width = piece->angle[1] - piece->angle[0];
    double lowest = sum->choke_least;
    if (piece->mode != PLW_MODE_NONE) {
        cubic_extremes(amps, &lowest, &sum->peak);
    } else {
        lowest = 0;
    }
    sum->choke_least = fmax(0, lowest);
    for (int g = 0; g < GAUSS; g++) {
        double first, second;
        path_amps(engine, piece, amps, first_state, gauss_at[g], &first, &second);
        const double weight = gauss_weight[g] * width;
        sum->first_square += weight * first * first;
        sum->second_square += weight * second * second;
        sum->difference_square += weight * (first - second) * (first - second);
        sum->conduction += weight * ((piece->mode != PLW_MODE_NONE) + (second > 0));
    }
}

/* ---- waveform ---------------------------------------------------------------------------------------------------- */

static void write_instant(const plw_engine *engine, const plw_piece *piece, const cubic *amps, const cubic *first_state,
                          double angle, bool second_half, plw_rectifier_instant *instant) {
    const plw_network *network = &engine->network;
    const double t = (angle - piece->angle[0]) / (piece->angle[1] - piece->angle[0]);
    double first, second;
    path_amps(engine, piece, amps, first_state, t, &first, &second);
    memset(instant, 0, sizeof *instant);
    instant->seconds = (angle + (second_half ? PI : 0)) / network->omega;
    instant->emf_volts = plw_engine_emf(engine, angle) * (second_half ? -1 : 1);
    instant->rectified_amps = first + second;
    if (network->law.bridge) {
        instant->winding_amps = second_half ? second - first : first - second;
    } else {
        instant->winding_amps = second_half ? second : first;
    }
    for (size_t k = 0; k < network->nodes; k++) {
        const cubic volts = piece_state(piece, network->node_state[k]);
        instant->node_volts[k] = cubic_at(&volts, t);
    }
}

static void write_instants(const plw_engine *engine, const plw_piece *piece, const cubic *amps,
                           const cubic *first_state, tally *sum) {
    const double apart = 2 * PI / (double)sum->count, period = engine->network.period;
    while (sum->next < sum->count && (double)sum->next * apart <= fmin(piece->angle[1], period - 1e-9)) {
        write_instant(engine, piece, amps, first_state, (double)sum->next * apart, false, &sum->instants[sum->next]);
        sum->next++;
    }
    while (!engine->network.law.half_wave && sum->next_second < sum->count &&
           (double)sum->next_second * apart - period <= piece->angle[1]) {
        write_instant(engine, piece, amps, first_state, (double)sum->next_second * apart - period, true,
                      &sum->instants[sum->next_second]);
        sum->next_second++;
    }
}

static void see(void *context, const plw_engine *engine, const plw_piece *piece) {
    tally *sum = context;
    if (!(piece->angle[1] > piece->angle[0])) {
        return;
    }
    const cubic amps = piece_amps(engine, piece), first_state = piece_state(piece, 0);
    for (size_t k = 0; k < engine->network.nodes; k++) {
        tally_node(engine, piece, k, sum);
    }
    tally_currents(engine, piece, &amps, &first_state, sum);
    for (int quarter = 1; quarter <= 4; quarter++) {
        sum->inverse = fmax(sum->inverse, inverse_volts(engine, piece, 0.25 * quarter));
    }
    if (sum->instants != NULL) {
        write_instants(engine, piece, &amps, &first_state, sum);
    }
}

/* ---- result ------------------------------------------------------------------------------------------------------ */

static void finish_node(const plw_network *network, const node_tally *node, double zero, double farads,
                        plw_rectifier_node *out) {
    const double mean = node->mean / network->period;
    out->volts = zero + mean;
    out->ripple_peak_to_peak_volts = node->highest - node->lowest;
    out->ripple_rms_volts = sqrt(fmax(0, node->square / network->period - mean * mean));
    out->ripple_fundamental_rms_volts = sqrt(2.0) * hypot(node->cosine, node->sine) / network->period;
    out->peak_volts = zero + node->highest;
    out->capacitor_rms_amps = network->omega * farads * sqrt(node->charging_square / network->period);
}

void plw_measure(const plw_engine *engine, double load_amps, const double *start, plw_rectifier_instant *instants,
                 size_t count, plw_rectifier_state *state) {
    const plw_network *network = &engine->network;
    tally sum = {.instants = instants, .count = count, .choke_least = (double)INFINITY};
    for (size_t k = 0; k < network->nodes; k++) {
        sum.zero[k] = start[network->node_state[k]];
        sum.node[k].highest = -(double)INFINITY;
        sum.node[k].lowest = (double)INFINITY;
    }
    sum.next_second = (count + 1) / 2; /* the first at half a period or later */
    plw_cycle cycle;
    plw_engine_cycle(engine, load_amps, start, &cycle, see, &sum);
    state->nodes = network->nodes;
    for (size_t k = 0; k < network->nodes; k++) {
        finish_node(network, &sum.node[k], sum.zero[k], network->node_farads[k], &state->node[k]);
    }
    const double full = 2 * PI;
    state->diode_rms_amps = sqrt((sum.first_square + sum.second_square) / full);
    state->winding_rms_amps =
        network->law.bridge ? sqrt(sum.difference_square / network->period) : state->diode_rms_amps;
    state->diode_peak_amps = fmax(0, sum.peak);
    state->conduction_degrees = sum.conduction * 180 / PI;
    state->peak_inverse_volts = sum.inverse;
    state->choke_least_amps = network->choke_input ? sum.choke_least : (double)NAN;
}
