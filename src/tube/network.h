/* A tube in its feed and the balance of its currents: what the point of rest and the cycle have in common.
 * In line, since a stage is solved by some hundred balances and little else.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_NETWORK_H
#define TUBE_NETWORK_H

#include <math.h>

#include "tube/dynamic.h"

enum { PLW_NEWTON_STEPS_MOST = 40, PLW_BISECTIONS = 70 };

/* A tube in its feed, at rest or at an instant of the cycle. */
typedef struct {
    const plw_law *law;
    const plw_feed *feed;
    bool at_rest;
    double steady_volts[PLW_ELECTRODES]; /* at an instant */
} plw_network;

/* At an instant: the averages stay. */
static inline void instant_volts(const plw_network *net, const double amps[PLW_FLOWS], double volts[PLW_ELECTRODES]) {
    for (int electrode = 0; electrode < PLW_ELECTRODES; electrode++) {
        const double *ohms = net->feed->ohms[electrode];
        volts[electrode] = net->steady_volts[electrode] - ohms[PLW_OF_PLATE] * amps[PLW_OF_PLATE] -
                           ohms[PLW_OF_SCREEN] * amps[PLW_OF_SCREEN];
    }
}

/* At rest: the averages are the currents themselves.
 * Out:  ohms: with what the volts fall with the currents, the steady volts' own change included */
static inline void network_volts(const plw_network *net, const double amps[PLW_FLOWS], double volts[PLW_ELECTRODES],
                                 double ohms[PLW_ELECTRODES][PLW_FLOWS]) {
    double by_average[PLW_ELECTRODES][PLW_FLOWS] = {{0.0}};
    net->feed->average_volts(net->feed->context, amps, volts, by_average);
    for (int electrode = 0; electrode < PLW_ELECTRODES; electrode++) {
        for (int flow = 0; flow < PLW_FLOWS; flow++) {
            ohms[electrode][flow] = net->feed->ohms[electrode][flow] - by_average[electrode][flow];
            volts[electrode] -= net->feed->ohms[electrode][flow] * amps[flow];
        }
    }
}

/* What the law asks for beyond the currents assumed, and how that changes with them. */
typedef struct {
    double residual[PLW_FLOWS];
    double inverse[PLW_FLOWS][PLW_FLOWS]; /* of the Jacobian */
    double size;
} plw_balance;

/* Behind the driver's resistance the grid stays below the open signal by its own current's fall.
 * In:   volts at the grid as if it drew nothing
 * Out:  volts at the grid
 * Ret:  how much of a change in the open volts arrives at the grid, 0..1 */
static inline double load_driver(const plw_network *net, double *grid_volts) {
    const double ohms = net->feed->driver_ohms;
    const double open = *grid_volts;
    if (!(ohms > 0.0) || open < -2.0) {
        return 1.0;
    }
    /* The current rises convexly with the grid volts: Newton from above comes down without overshoot. */
    plw_currents c = {0};
    double part = 1.0;
    for (int step = 0; step < PLW_NEWTON_STEPS_MOST; step++) {
        plw_law_evaluate(net->law, 0.0, 0.0, *grid_volts, &c);
        part = 1.0 / (1.0 + ohms * c.grid_by_grid);
        const double off = (*grid_volts + ohms * c.grid_amps - open) * part;
        *grid_volts -= off;
        if (fabs(off) < 1e-12) {
            break;
        }
    }
    return part;
}

/* The inverse of a well-conditioned matrix; zero when it is singular. */
static inline void invert_pair(const double matrix[PLW_FLOWS][PLW_FLOWS], double inverse[PLW_FLOWS][PLW_FLOWS]) {
    const double determinant = matrix[0][0] * matrix[1][1] - matrix[0][1] * matrix[1][0];
    const double scale = determinant != 0.0 && isfinite(determinant) ? 1.0 / determinant : 0.0;
    inverse[0][0] = matrix[1][1] * scale;
    inverse[0][1] = -matrix[0][1] * scale;
    inverse[1][0] = -matrix[1][0] * scale;
    inverse[1][1] = matrix[0][0] * scale;
}

static inline void multiply_pair(double matrix[PLW_FLOWS][PLW_FLOWS], const double right[PLW_FLOWS],
                                 double out[PLW_FLOWS]) {
    out[0] = matrix[0][0] * right[0] + matrix[0][1] * right[1];
    out[1] = matrix[1][0] * right[0] + matrix[1][1] * right[1];
}

/* The balance at volts already worked out, which fall with the currents by `ohms`. */
static inline void balance_in(const plw_network *net, plw_instant *point, const double ohms[PLW_ELECTRODES][PLW_FLOWS],
                              plw_balance *b) {
    plw_currents *c = &point->law;
    const double arriving = load_driver(net, &point->volts[PLW_AT_GRID]);
    plw_law_evaluate(net->law, point->volts[PLW_AT_PLATE], point->volts[PLW_AT_SCREEN], point->volts[PLW_AT_GRID], c);
    /* From here on the grid's slopes are those by the open signal. */
    c->plate_by_grid *= arriving;
    c->screen_by_grid *= arriving;
    b->residual[PLW_OF_PLATE] = point->amps[PLW_OF_PLATE] - c->plate_amps;
    b->residual[PLW_OF_SCREEN] = point->amps[PLW_OF_SCREEN] - c->screen_amps;
    double jacobian[PLW_FLOWS][PLW_FLOWS] = {{1.0, 0.0}, {0.0, 1.0}};
    const bool screened = net->law->kind == PLW_LAW_PENTODE;
    for (int flow = 0; flow < (screened ? PLW_FLOWS : 1); flow++) {
        jacobian[PLW_OF_PLATE][flow] +=
            c->plate_by_plate * ohms[PLW_AT_PLATE][flow] + c->plate_by_grid * ohms[PLW_AT_GRID][flow];
        if (screened) {
            jacobian[PLW_OF_PLATE][flow] += c->plate_by_screen * ohms[PLW_AT_SCREEN][flow];
            jacobian[PLW_OF_SCREEN][flow] += c->screen_by_plate * ohms[PLW_AT_PLATE][flow] +
                                             c->screen_by_screen * ohms[PLW_AT_SCREEN][flow] +
                                             c->screen_by_grid * ohms[PLW_AT_GRID][flow];
        }
    }
    invert_pair((const double(*)[PLW_FLOWS])jacobian, b->inverse);
    b->size = fabs(b->residual[PLW_OF_PLATE]) + fabs(b->residual[PLW_OF_SCREEN]);
}

static inline void balance_at(const plw_network *net, plw_instant *point, plw_balance *b) {
    if (net->at_rest) {
        double ohms[PLW_ELECTRODES][PLW_FLOWS];
        network_volts(net, point->amps, point->volts, ohms);
        balance_in(net, point, (const double(*)[PLW_FLOWS])ohms, b);
    } else {
        instant_volts(net, point->amps, point->volts);
        balance_in(net, point, net->feed->ohms, b);
    }
}

/* Balance a point from the currents it holds: Newton's steps, damped; where they fail, brackets.
 * In:   tolerance: A, of both currents together
 * Out:  *point, *b: as last worked out
 * Ret:  PLW_OK; PLW_E_NO_CONVERGENCE */
plw_status plw_balance_point(const plw_network *net, double tolerance, plw_instant *point, plw_balance *b) PLW_MUST_USE;

#endif
