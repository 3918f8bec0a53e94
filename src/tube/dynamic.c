/* The dynamic characteristic: the point of rest of a tube fed through resistances.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/dynamic.h"

#include <math.h>

#include "tube/network.h"

#define REST_TOLERANCE_AMPS 1e-10
enum { HALVINGS_MOST = 10 };

/* ---- fallback: brackets instead of slopes ------------------------------------------------------------------------ */

/* At a plate current assumed, the screen current that balances: the law's screen current falls as the assumed one
 * rises, so there is one root. */
static double screen_amps_for(const plw_network *net, double plate_amps, plw_instant *point, plw_balance *b) {
    double below = 0.0;
    double above = 1e-3;
    point->amps[PLW_OF_PLATE] = plate_amps;
    for (int step = 0; step < PLW_BISECTIONS; step++) {
        point->amps[PLW_OF_SCREEN] = above;
        balance_at(net, point, b);
        if (b->residual[PLW_OF_SCREEN] >= 0.0) {
            break;
        }
        below = above;
        above *= 2.0;
    }
    for (int step = 0; step < PLW_BISECTIONS; step++) {
        point->amps[PLW_OF_SCREEN] = 0.5 * (below + above);
        balance_at(net, point, b);
        if (b->residual[PLW_OF_SCREEN] >= 0.0) {
            above = point->amps[PLW_OF_SCREEN];
        } else {
            below = point->amps[PLW_OF_SCREEN];
        }
    }
    return b->residual[PLW_OF_PLATE];
}

static void bracket_point(const plw_network *net, plw_instant *point, plw_balance *b) {
    double below = 0.0;
    double above = 1e-3;
    for (int step = 0; step < PLW_BISECTIONS && screen_amps_for(net, above, point, b) < 0.0; step++) {
        below = above;
        above *= 2.0;
    }
    for (int step = 0; step < PLW_BISECTIONS; step++) {
        const double middle = 0.5 * (below + above);
        if (screen_amps_for(net, middle, point, b) >= 0.0) {
            above = middle;
        } else {
            below = middle;
        }
    }
}

/* ---- Newton ------------------------------------------------------------------------------------------------------ */

/* One damped step from a balanced-at point: the full Newton step, halved while it makes the balance worse.
 * Ret: false when no step improves it */
static bool newton_step(const plw_network *net, plw_instant *point, plw_balance *b) {
    double step[PLW_FLOWS];
    multiply_pair(b->inverse, b->residual, step);
    const plw_instant before = *point;
    const double size = b->size;
    double part = 1.0;
    for (int halving = 0; halving < HALVINGS_MOST; halving++) {
        for (int flow = 0; flow < PLW_FLOWS; flow++) {
            const double amps = before.amps[flow] - part * step[flow];
            point->amps[flow] = amps > 0.0 ? amps : 0.0;
        }
        balance_at(net, point, b);
        if (b->size < size || b->size == 0.0) {
            return true;
        }
        part *= 0.5;
    }
    return false;
}

plw_status plw_balance_point(const plw_network *net, double tolerance, plw_instant *point, plw_balance *b) {
    balance_at(net, point, b);
    for (int step = 0; step < PLW_NEWTON_STEPS_MOST && !(b->size <= tolerance); step++) {
        if (!newton_step(net, point, b)) {
            break;
        }
    }
    if (b->size <= tolerance) {
        return PLW_OK;
    }
    bracket_point(net, point, b);
    for (int step = 0; step < PLW_NEWTON_STEPS_MOST && !(b->size <= tolerance); step++) {
        if (!newton_step(net, point, b)) {
            break;
        }
    }
    return b->size <= tolerance ? PLW_OK : PLW_E_NO_CONVERGENCE;
}

plw_status plw_dynamic_rest(const plw_law *law, const plw_feed *feed, plw_instant *point) {
    const plw_network net = {.law = law, .feed = feed, .at_rest = true};
    plw_balance b;
    return plw_balance_point(&net, REST_TOLERANCE_AMPS, point, &b);
}

plw_small_signal plw_small_signal_at(const plw_currents *c, double tap) {
    const double conductance =
        c->plate_by_plate + tap * (c->plate_by_screen + c->screen_by_plate) + tap * tap * c->screen_by_screen;
    plw_small_signal s;
    s.gm_siemens = c->plate_by_grid + tap * c->screen_by_grid;
    s.plate_resistance_ohms = conductance > 0.0 ? 1.0 / conductance : (double)NAN;
    s.mu = s.gm_siemens * s.plate_resistance_ohms;
    return s;
}
