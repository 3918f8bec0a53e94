/* Steps of the network while a vacuum rectifier conducts: the network exact, the current collocated.
 * The input is taken as the parabola through its values at the nodes of Radau IIA (order five); what the parabola does
 * to the network is exact.  The nodes: E. Hairer and G. Wanner, "Solving Ordinary Differential Equations II", 1991,
 * from memory. SPDX-License-Identifier: GPL-3.0-or-later */
#include "supply/collocation.h"

#include <math.h>
#include <string.h>

/* (4 -+ sqrt 6) / 10 and 1. */
static const double node[PLW_STAGES] = {0.15505102572168219018, 0.64494897427831780982, 1};

enum { NEWTON_MOST = 12 };

/* Coefficients of the parabola that is 1 at node j and 0 at the others: constant, linear, square. */
static void lagrange(int j, double coefficient[3]) {
    const double a = node[(j + 1) % 3], b = node[(j + 2) % 3];
    const double scale = 1 / ((node[j] - a) * (node[j] - b));
    coefficient[0] = a * b * scale;
    coefficient[1] = -(a + b) * scale;
    coefficient[2] = scale;
}

/* What stage j does to row `row` of a flow whose last three columns are value, slope and curvature of the input. */
static double by_stage(const double *row, size_t value_column, int j, double step) {
    double c[3];
    lagrange(j, c);
    return row[value_column] * c[0] + row[value_column + 1] * c[1] / step +
           row[value_column + 2] * 2 * c[2] / (step * step);
}

void plw_collocation_make(plw_collocation *collocation, plw_flow *flow, double matrix[PLW_FLOW_WIDTH][PLW_FLOW_WIDTH],
                          const plw_network *network, double step) {
    const size_t n = network->states, value = n + 3, width = n + 6;
    matrix[0][value] = network->input;
    matrix[value][value + 1] = 1;
    matrix[value + 1][value + 2] = 1;
    for (int i = 0; i < PLW_STAGES; i++) {
        plw_flow_make(flow, matrix, width, node[i] * step); /* the last, node 1, is the one that is kept */
        for (int level = 0; level < PLW_FLOW_LEVELS; level++) {
            plw_collocation *here = &collocation[level];
            const double h = ldexp(step, -level);
            const double *first = flow->change[level][0];
            memcpy(here->row[i], first, n * sizeof(double));
            here->row[i][0] += 1;
            here->row[i][n] = first[n + 1];
            here->row[i][n + 1] = first[n + 2];
            for (int j = 0; j < PLW_STAGES; j++) {
                here->by_input[i][j] = by_stage(first, value, j, h);
            }
            for (size_t row = 0; i == PLW_STAGES - 1 && row <= n; row++) {
                for (int j = 0; j < PLW_STAGES; j++) {
                    here->end_by_input[row][j] = by_stage(flow->change[level][row], value, j, h);
                }
            }
        }
    }
}

static double input_at(const plw_engine *engine, double emf, double first_state, double *slope) {
    const plw_rectifier_law *law = &engine->network.law;
    if (engine->network.choke_input) {
        double first_amps;
        return plw_choke_volts(law, emf, first_state, slope, &first_amps);
    }
    const double amps = plw_path_amps(law, emf - first_state, slope);
    *slope = -*slope;
    return amps;
}

/* Inverse of the 3 by 3 matrix  1 - by_input diag(slope),  by cofactors. */
static void invert(const double by_input[3][3], const double *slope, double inverse[3][3]) {
    double m[3][3];
    for (int i = 0; i < 3; i++) {
        for (int j = 0; j < 3; j++) {
            m[i][j] = (i == j) - by_input[i][j] * slope[j];
        }
    }
    for (int i = 0; i < 3; i++) {
        const int i1 = (i + 1) % 3, i2 = (i + 2) % 3;
        for (int j = 0; j < 3; j++) {
            const int j1 = (j + 1) % 3, j2 = (j + 2) % 3;
            inverse[j][i] = m[i1][j1] * m[i2][j2] - m[i1][j2] * m[i2][j1];
        }
    }
    const double determinant = m[0][0] * inverse[0][0] + m[0][1] * inverse[1][0] + m[0][2] * inverse[2][0];
    for (int i = 0; i < 3; i++) {
        for (int j = 0; j < 3; j++) {
            inverse[i][j] /= determinant;
        }
    }
}

/* Newton on the first state at the three stages. */
static void solve_stages(const plw_engine *engine, const plw_collocation *operators, const double emf[3],
                         const double alone[3], double tolerance, plw_collocated *found) {
    for (int iteration = 0; iteration < NEWTON_MOST; iteration++) {
        for (int i = 0; i < 3; i++) {
            found->input[i] = input_at(engine, emf[i], found->first_state[i], &found->slope[i]);
        }
        invert(operators->by_input, found->slope, found->inverse);
        double miss[3], largest = 0;
        for (int i = 0; i < 3; i++) {
            miss[i] = alone[i] - found->first_state[i];
            for (int j = 0; j < 3; j++) {
                miss[i] += operators->by_input[i][j] * found->input[j];
            }
        }
        double move[3];
        for (int i = 0; i < 3; i++) {
            move[i] = found->inverse[i][0] * miss[0] + found->inverse[i][1] * miss[1] + found->inverse[i][2] * miss[2];
            largest = fmax(largest, fabs(move[i]));
        }
        for (int i = 0; i < 3; i++) {
            found->first_state[i] += move[i];
            found->input[i] += found->slope[i] * move[i];
        }
        if (largest <= tolerance) {
            return; /* what is left is of the order of the square of the last move */
        }
    }
}

void plw_collocate(const plw_engine *engine, int level, double angle, double load_amps, const double *start,
                   plw_collocated *found, double *end) {
    const plw_network *network = &engine->network;
    const plw_collocation *operators = &engine->collocation[level];
    const plw_flow *flow = &engine->flow[PLW_MODE_CURVED];
    const size_t n = network->states;
    double emf[3], alone[3];
    for (int i = 0; i < 3; i++) {
        const double *row = operators->row[i];
        emf[i] = plw_engine_emf(engine, angle + node[i] * flow->step[level]);
        alone[i] = row[n] * load_amps + row[n + 1];
        for (size_t j = 0; j < n; j++) {
            alone[i] += row[j] * start[j];
        }
        found->first_state[i] = start[0];
    }
    const double scale = network->choke_input ? fabs(start[0]) + 1e-3 : network->law.peak_volts;
    solve_stages(engine, operators, emf, alone, 1e-7 * scale, found);
    for (size_t i = 0; i <= n; i++) {
        const double *row = flow->change[level][i];
        double sum = row[n + 1] * load_amps + row[n + 2];
        for (size_t j = 0; j < n; j++) {
            sum += row[j] * start[j];
        }
        for (int j = 0; j < 3; j++) {
            sum += operators->end_by_input[i][j] * found->input[j];
        }
        end[i] = start[i] + sum;
    }
}

void plw_collocation_derivative(const plw_engine *engine, int level, const plw_collocated *found,
                                double by[PLW_ROWS_MOST][PLW_STATES_MOST + 1],
                                double change[PLW_ROWS_MOST][PLW_STATES_MOST + 1]) {
    const plw_collocation *operators = &engine->collocation[level];
    const size_t n = engine->network.states;
    for (size_t column = 0; column <= n; column++) {
        double alone[3], input[3];
        for (int i = 0; i < 3; i++) {
            alone[i] = column == n ? operators->row[i][n] : 0;
            for (size_t j = 0; j < n; j++) {
                alone[i] += operators->row[i][j] * by[j][column];
            }
        }
        for (int i = 0; i < 3; i++) {
            const double *inverse = found->inverse[i];
            input[i] = found->slope[i] * (inverse[0] * alone[0] + inverse[1] * alone[1] + inverse[2] * alone[2]);
        }
        for (size_t i = 0; i <= n; i++) {
            for (int j = 0; j < 3; j++) {
                change[i][column] += operators->end_by_input[i][j] * input[j];
            }
        }
    }
}
