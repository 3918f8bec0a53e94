/* The state that a cycle brings back to itself.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "supply/steady.h"

#include <math.h>
#include <string.h>

#define PI 3.14159265358979323846

enum {
    NEWTON_MOST = 40,
    HALVINGS_MOST = 6,
    ATTEMPTS_MOST = 5,
    SETTLING_CYCLES = 100,
    GUESS_POINTS = 16,
    GUESS_STEPS = 24
};

/* ---- first guess ------------------------------------------------------------------------------------------------- */

/* Mean current into a first node that stands still at `volts`.  The angle from the crest goes as the square of the
 * abscissa, since at light load all happens near the crest. */
static double mean_into_reservoir(const plw_rectifier_law *law, double volts) {
    double sum = 0, slope;
    for (int i = 0; i < GUESS_POINTS; i++) {
        const double abscissa = (i + 0.5) / GUESS_POINTS;
        const double emf = law->peak_volts * cos(PI / 2 * abscissa * abscissa);
        sum += 2 * abscissa * plw_path_amps(law, emf - volts, &slope);
    }
    return sum / GUESS_POINTS * (law->half_wave ? 0.5 : 1);
}

/* Mean current into a choke whose far end stands still at `volts`: while the current never stops, what the mean voltage
 * drives through the copper; below that, the usual 2/3-power rise of the voltage from its mean to its peak. */
static double mean_into_choke(const plw_network *network, double volts) {
    const plw_rectifier_law *law = &network->law;
    const double top = law->peak_volts - law->drop_volts;
    const double flowing = law->half_wave ? 0.3 * law->peak_volts : 2 / PI * law->peak_volts - law->drop_volts;
    const double critical = 4 / (6 * PI) * law->peak_volts * network->input; /* of the ripple of a full wave */
    if (volts > flowing) {
        const double share = (top - volts) / (top - flowing);
        return critical * share * sqrt(fmax(0, share));
    }
    const double loop_ohms = law->vacuum ? law->path_ohms + 100 : law->total_ohms;
    return critical + (flowing - volts) / loop_ohms;
}

plw_status plw_steady_guess(const plw_engine *engine, const plw_rectifier *supply, double load_amps, plw_steady *steady,
                            plw_error *error) {
    const plw_network *network = &engine->network;
    double low = 0, high = network->law.peak_volts - network->law.drop_volts;
    for (int i = 0; i < GUESS_STEPS; i++) {
        const double volts = i == 0 ? 0 : (low + high) / 2;
        const double given =
            network->choke_input ? mean_into_choke(network, volts) : mean_into_reservoir(&network->law, volts);
        const double wanted = plw_network_demand(network, supply, load_amps, volts, steady->start);
        if (given > wanted) {
            low = volts;
        } else {
            high = volts;
        }
        if (i == 0 && given <= wanted) {
            return plw_fail(
                error, PLW_E_NO_POINT,
                "supply: %.4g mA cannot be had: even into a short circuit the rectifier gives about %.4g mA",
                1e3 * wanted, 1e3 * given);
        }
    }
    plw_network_demand(network, supply, load_amps, (low + high) / 2, steady->start);
    steady->output_volts = steady->start[network->output];
    steady->output_ohms = (double)NAN;
    steady->iterations = 0;
    return PLW_OK;
}

/* ---- Newton ------------------------------------------------------------------------------------------------------ */

/* Solve  a x = b  for two right-hand sides by elimination with row exchange; a and b are used up, x stands in b.
 * Ret:  false when a pivot vanishes */
static bool eliminate(size_t n, double a[PLW_STATES_MOST][PLW_STATES_MOST], double b[PLW_STATES_MOST][2]) {
    for (size_t column = 0; column < n; column++) {
        size_t pivot = column;
        for (size_t i = column + 1; i < n; i++) {
            if (fabs(a[i][column]) > fabs(a[pivot][column])) {
                pivot = i;
            }
        }
        if (!(fabs(a[pivot][column]) > 0)) {
            return false;
        }
        for (size_t j = column; j < n && pivot != column; j++) {
            const double held = a[column][j];
            a[column][j] = a[pivot][j];
            a[pivot][j] = held;
        }
        for (size_t j = 0; j < 2 && pivot != column; j++) {
            const double held = b[column][j];
            b[column][j] = b[pivot][j];
            b[pivot][j] = held;
        }
        for (size_t i = column + 1; i < n; i++) {
            const double factor = a[i][column] / a[column][column];
            for (size_t j = column; j < n && factor != 0; j++) {
                a[i][j] -= factor * a[column][j];
            }
            b[i][0] -= factor * b[column][0];
            b[i][1] -= factor * b[column][1];
        }
    }
    for (size_t i = n; i-- > 0;) {
        for (size_t j = i + 1; j < n; j++) {
            b[i][0] -= a[i][j] * b[j][0];
            b[i][1] -= a[i][j] * b[j][1];
        }
        b[i][0] /= a[i][i];
        b[i][1] /= a[i][i];
    }
    return true;
}

/* Scales by which volts and amps are weighed against each other: a choke's current by its own impedance. */
static void scales(const plw_network *network, double *scale) {
    for (size_t i = 0; i < network->states; i++) {
        scale[i] = network->law.peak_volts;
    }
    for (size_t k = 0; k < network->nodes; k++) {
        const size_t at = network->node_state[k];
        const size_t before = k > 0 ? network->node_state[k - 1] + 1 : 0;
        if (at > before) { /* a choke stands before this node */
            const double siemens = network->choke_input && k == 0 ? network->input : fabs(network->a[at - 1][at]);
            scale[at - 1] = network->law.peak_volts * siemens;
        }
    }
}

static double misfit(size_t n, const double *start, const plw_cycle *cycle, const double *scale) {
    double largest = 0;
    for (size_t i = 0; i < n; i++) {
        largest = fmax(largest, fabs(cycle->end[i] - start[i]) / scale[i]);
    }
    return largest;
}

/* Newton's step; the mean of the output after it, and its derivative by the current drawn there. */
static bool newton_step(const plw_engine *engine, const plw_cycle *cycle, plw_steady *steady, double *move) {
    const size_t n = engine->network.states;
    double matrix[PLW_STATES_MOST][PLW_STATES_MOST], right[PLW_STATES_MOST][2];
    for (size_t i = 0; i < n; i++) {
        for (size_t j = 0; j < n; j++) {
            matrix[i][j] = (i == j) - cycle->by[i][j];
        }
        right[i][0] = cycle->end[i] - steady->start[i];
        right[i][1] = cycle->by[i][n];
    }
    if (!eliminate(n, matrix, right)) {
        return false;
    }
    double integral = cycle->end[n], by_load = cycle->by[n][n];
    for (size_t j = 0; j < n; j++) {
        move[j] = right[j][0];
        integral += cycle->by[n][j] * right[j][0];
        by_load += cycle->by[n][j] * right[j][1];
    }
    steady->output_volts = integral / engine->network.period;
    steady->output_ohms = -by_load / engine->network.period;
    return true;
}

/* Share of a step that keeps the reservoir below the peak: above it nothing conducts, hardly anything moves, and a step
 * from there leads nowhere. */
static double share_below_peak(const plw_network *network, double volts, double move) {
    const double room = network->law.peak_volts - network->law.drop_volts - volts;
    return !network->choke_input && room > 0 && move > 0.9 * room ? 0.9 * room / move : 1;
}

/* Try the whole step, then halves of it, until the misfit falls.  The last trial stands in any case. */
static double damped_move(const plw_engine *engine, double load_amps, const double *scale, const double *move,
                          double before, double *start, plw_cycle *cycle) {
    const size_t n = engine->network.states;
    double from[PLW_STATES_MOST];
    memcpy(from, start, n * sizeof(double));
    double share = share_below_peak(&engine->network, start[0], move[0]), after = before;
    for (int halving = 0; halving <= HALVINGS_MOST; halving++) {
        for (size_t i = 0; i < n; i++) {
            start[i] = from[i] + share * move[i];
        }
        if (engine->network.choke_input && start[0] < 0) {
            start[0] = 0;
        }
        plw_engine_cycle(engine, load_amps, start, cycle, NULL, NULL);
        after = misfit(n, start, cycle, scale);
        if (after < before) {
            break;
        }
        share /= 2;
    }
    return after;
}

/* What steps are measured against: the fall of the first node from the peak, since the current goes as its power 3/2.
 */
static double fall_from_peak(const plw_network *network, const double *start) {
    const double first_node = start[network->choke_input ? 1 : 0];
    return fmin(1, fmax(1e-6, 1 - first_node / (network->law.peak_volts - network->law.drop_volts)));
}

/* Ret: the misfit, or 0 when a step was short enough */
static double newton(const plw_engine *engine, double load_amps, double tolerance, const double *scale,
                     plw_steady *steady) {
    const size_t n = engine->network.states;
    double move[PLW_STATES_MOST] = {0};
    plw_cycle cycle;
    plw_engine_cycle(engine, load_amps, steady->start, &cycle, NULL, NULL);
    double miss = misfit(n, steady->start, &cycle, scale);
    for (int step = 0; step < NEWTON_MOST; step++) {
        steady->iterations++;
        if (!newton_step(engine, &cycle, steady, move)) {
            return miss;
        }
        double longest = 0;
        for (size_t i = 0; i < n; i++) {
            longest = fmax(longest, fabs(move[i]) / scale[i]);
        }
        if (longest <= tolerance * fall_from_peak(&engine->network, steady->start)) {
            for (size_t i = 0; i < n; i++) {
                steady->start[i] += move[i];
            }
            return 0;
        }
        miss = damped_move(engine, load_amps, scale, move, miss, steady->start, &cycle);
    }
    return miss;
}

plw_status plw_steady_solve(const plw_engine *engine, double load_amps, double tolerance, plw_steady *steady,
                            plw_error *error) {
    const size_t n = engine->network.states;
    double scale[PLW_STATES_MOST], miss = 0;
    scales(&engine->network, scale);
    plw_steady trial;
    plw_cycle cycle;
    steady->iterations = 0;
    for (int attempt = 0; attempt < ATTEMPTS_MOST; attempt++) {
        trial = *steady;
        miss = newton(engine, load_amps, tolerance, scale, &trial);
        if (miss <= 0) {
            *steady = trial;
            return PLW_OK;
        }
        /* Let the circuit run for a while from the guess and try again from there. */
        steady->iterations = trial.iterations;
        for (int k = 0; k < SETTLING_CYCLES; k++) {
            plw_engine_cycle(engine, load_amps, steady->start, &cycle, NULL, NULL);
            memcpy(steady->start, cycle.end, n * sizeof(double));
        }
    }
    return plw_fail(error, PLW_E_NO_CONVERGENCE, "supply: no periodic state found at %.4g mA; the misfit is %.2g V",
                    1e3 * load_amps, miss * engine->network.law.peak_volts);
}
