/* The dynamic characteristic: point of rest and whole cycle of a tube fed through resistances.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/dynamic.h"

#include <math.h>
#include <string.h>

#include "base/numeric.h"

#define REST_TOLERANCE_AMPS 1e-10
#define CYCLE_TOLERANCE_AMPS 1e-9
#define MARCH_TOLERANCE_AMPS 1e-4 /* of the first, rough walk along the cycle */
#define FAR_PART 1e-3             /* averages further off than this part of the current at rest may need damped steps */
enum { NEWTON_STEPS_MOST = 40, HALVINGS_MOST = 10, SWEEPS_MOST = 60, FREE_SWEEPS = 4, BISECTIONS = 70 };

/* The voltages at given currents, and the resistances with which they fall: at rest the averages are the currents
 * themselves, at an instant the averages stay. */
typedef struct {
    const plw_law *law;
    const plw_feed *feed;
    bool at_rest;
    double steady_volts[PLW_ELECTRODES]; /* at an instant */
} network;

static void network_volts(const network *net, const double amps[PLW_FLOWS], double volts[PLW_ELECTRODES],
                          double ohms[PLW_ELECTRODES][PLW_FLOWS]) {
    double by_average[PLW_ELECTRODES][PLW_FLOWS] = {{0.0}};
    if (net->at_rest) {
        net->feed->average_volts(net->feed->context, amps, volts, by_average);
    } else {
        memcpy(volts, net->steady_volts, sizeof net->steady_volts);
    }
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
    double jacobian[PLW_FLOWS][PLW_FLOWS];
    double size;
} balance;

/* Behind the driver's resistance the grid stays below the open signal by its own current's fall.
 * In:   volts at the grid as if it drew nothing
 * Out:  volts at the grid
 * Ret:  how much of a change in the open volts arrives at the grid, 0..1 */
static double load_driver(const network *net, double *grid_volts) {
    const double ohms = net->feed->driver_ohms;
    const double open = *grid_volts;
    if (!(ohms > 0.0) || open < -2.0) {
        return 1.0;
    }
    /* The current rises convexly with the grid volts: Newton from above comes down without overshoot. */
    plw_currents c = {0};
    double part = 1.0;
    for (int step = 0; step < NEWTON_STEPS_MOST; step++) {
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

static void balance_at(const network *net, plw_instant *point, balance *b) {
    double ohms[PLW_ELECTRODES][PLW_FLOWS];
    network_volts(net, point->amps, point->volts, ohms);
    plw_currents *c = &point->law;
    const double arriving = load_driver(net, &point->volts[PLW_AT_GRID]);
    plw_law_evaluate(net->law, point->volts[PLW_AT_PLATE], point->volts[PLW_AT_SCREEN], point->volts[PLW_AT_GRID], c);
    /* From here on the grid's slopes are those by the open signal. */
    c->plate_by_grid *= arriving;
    c->screen_by_grid *= arriving;
    b->residual[PLW_OF_PLATE] = point->amps[PLW_OF_PLATE] - c->plate_amps;
    b->residual[PLW_OF_SCREEN] = point->amps[PLW_OF_SCREEN] - c->screen_amps;
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        b->jacobian[PLW_OF_PLATE][flow] = c->plate_by_plate * ohms[PLW_AT_PLATE][flow] +
                                          c->plate_by_screen * ohms[PLW_AT_SCREEN][flow] +
                                          c->plate_by_grid * ohms[PLW_AT_GRID][flow];
        b->jacobian[PLW_OF_SCREEN][flow] = c->screen_by_plate * ohms[PLW_AT_PLATE][flow] +
                                           c->screen_by_screen * ohms[PLW_AT_SCREEN][flow] +
                                           c->screen_by_grid * ohms[PLW_AT_GRID][flow];
        b->jacobian[flow][flow] += 1.0;
    }
    b->size = fabs(b->residual[PLW_OF_PLATE]) + fabs(b->residual[PLW_OF_SCREEN]);
}

/* matrix^-1 right, for the well-conditioned matrices of a balance; zero when it is singular. */
static void solve_pair(double matrix[PLW_FLOWS][PLW_FLOWS], const double right[PLW_FLOWS], double solution[PLW_FLOWS]) {
    const double determinant = matrix[0][0] * matrix[1][1] - matrix[0][1] * matrix[1][0];
    const double inverse = determinant != 0.0 && isfinite(determinant) ? 1.0 / determinant : 0.0;
    solution[0] = (right[0] * matrix[1][1] - right[1] * matrix[0][1]) * inverse;
    solution[1] = (right[1] * matrix[0][0] - right[0] * matrix[1][0]) * inverse;
}

/* ---- fallback: brackets instead of slopes ------------------------------------------------------------------------ */

/* At a plate current assumed, the screen current that balances: the law's screen current falls as the assumed one
 * rises, so there is one root. */
static double screen_amps_for(const network *net, double plate_amps, plw_instant *point, balance *b) {
    double below = 0.0;
    double above = 1e-3;
    point->amps[PLW_OF_PLATE] = plate_amps;
    for (int step = 0; step < BISECTIONS; step++) {
        point->amps[PLW_OF_SCREEN] = above;
        balance_at(net, point, b);
        if (b->residual[PLW_OF_SCREEN] >= 0.0) {
            break;
        }
        below = above;
        above *= 2.0;
    }
    for (int step = 0; step < BISECTIONS; step++) {
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

static void bracket_point(const network *net, plw_instant *point, balance *b) {
    double below = 0.0;
    double above = 1e-3;
    for (int step = 0; step < BISECTIONS && screen_amps_for(net, above, point, b) < 0.0; step++) {
        below = above;
        above *= 2.0;
    }
    for (int step = 0; step < BISECTIONS; step++) {
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
static bool newton_step(const network *net, plw_instant *point, balance *b) {
    double step[PLW_FLOWS];
    solve_pair(b->jacobian, b->residual, step);
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

/* Balance a point from the currents it holds. */
static plw_status balance_point(const network *net, double tolerance, plw_instant *point, balance *b) {
    balance_at(net, point, b);
    for (int step = 0; step < NEWTON_STEPS_MOST && !(b->size <= tolerance); step++) {
        if (!newton_step(net, point, b)) {
            break;
        }
    }
    if (b->size <= tolerance) {
        return PLW_OK;
    }
    bracket_point(net, point, b);
    for (int step = 0; step < NEWTON_STEPS_MOST && !(b->size <= tolerance); step++) {
        if (!newton_step(net, point, b)) {
            break;
        }
    }
    return b->size <= tolerance ? PLW_OK : PLW_E_NO_CONVERGENCE;
}

plw_status plw_dynamic_rest(const plw_law *law, const plw_feed *feed, plw_instant *point) {
    const network net = {.law = law, .feed = feed, .at_rest = true};
    balance b;
    return balance_point(&net, REST_TOLERANCE_AMPS, point, &b);
}

/* ---- the cycle --------------------------------------------------------------------------------------------------- */

/* cos(pi j / 20), j = 0 .. 10 */
static const double quarter_cosine[PLW_CYCLE_STEPS / 2 + 1] = {1.0,
                                                               0.9876883405951378,
                                                               0.9510565162951535,
                                                               0.8910065241883679,
                                                               0.8090169943749475,
                                                               0.7071067811865476,
                                                               0.5877852522924731,
                                                               0.4539904997395468,
                                                               0.30901699437494745,
                                                               0.15643446504023092,
                                                               0.0};

static double phase_cosine(int index) {
    const int turn = index % (2 * PLW_CYCLE_STEPS);
    const int half = turn > PLW_CYCLE_STEPS ? 2 * PLW_CYCLE_STEPS - turn : turn;
    return half > PLW_CYCLE_STEPS / 2 ? -quarter_cosine[PLW_CYCLE_STEPS - half] : quarter_cosine[half];
}

void plw_cosine_series(const double sample[PLW_CYCLE_INSTANTS], double harmonic[PLW_HARMONICS + 1]) {
    for (int order = 0; order <= PLW_HARMONICS; order++) {
        double sum = 0.5 * (sample[0] + (order % 2 == 0 ? sample[PLW_CYCLE_STEPS] : -sample[PLW_CYCLE_STEPS]));
        for (int index = 1; index < PLW_CYCLE_STEPS; index++) {
            sum += sample[index] * phase_cosine(order * index);
        }
        harmonic[order] = sum * (order == 0 ? 1.0 : 2.0) / PLW_CYCLE_STEPS;
    }
}

/* The cycle while it is being solved. */
typedef struct {
    network net;
    bool seek_limit;
    double rest_amps; /* cathode current at rest */
    double base_volts[PLW_ELECTRODES];
    double by_average[PLW_ELECTRODES][PLW_FLOWS];
    double drive_by_average[PLW_FLOWS];
    double by_averages[PLW_CYCLE_INSTANTS][PLW_FLOWS][PLW_FLOWS]; /* currents of an instant by the averages */
    double by_grid[PLW_CYCLE_INSTANTS][PLW_FLOWS];                /* currents of an instant by the grid volts */
    double mean_amps[PLW_FLOWS];
    double mean_by_average[PLW_FLOWS][PLW_FLOWS];
    double worst_residual;
} cycle_work;

static double cathode_amps(const plw_instant *point) {
    return point->amps[PLW_OF_PLATE] + point->amps[PLW_OF_SCREEN];
}

/* Volts that fall at the grid through the feed's resistances (an unbypassed cathode). */
static double grid_fall_volts(const plw_feed *feed, const double amps[PLW_FLOWS]) {
    return feed->ohms[PLW_AT_GRID][PLW_OF_PLATE] * amps[PLW_OF_PLATE] +
           feed->ohms[PLW_AT_GRID][PLW_OF_SCREEN] * amps[PLW_OF_SCREEN];
}

/* The drive at which the negative peak just cuts the tube off, or NaN when none does. */
static double cut_off_drive(cycle_work *work, const plw_cycle *cycle, double by_average[PLW_FLOWS]) {
    const plw_instant *trough = &cycle->instant[PLW_CYCLE_STEPS];
    const double wanted = PLW_CUT_OFF_FRACTION * work->rest_amps;
    const double total = cathode_amps(trough);
    plw_instant at = *trough;
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        at.amps[flow] *= total > 0.0 ? wanted / total : 0.0;
    }
    if (!(total > 0.0)) {
        at.amps[PLW_OF_PLATE] = wanted;
    }
    double ohms[PLW_ELECTRODES][PLW_FLOWS];
    memcpy(work->net.steady_volts, work->base_volts, sizeof work->base_volts);
    network_volts(&work->net, at.amps, at.volts, ohms);
    const double grid_volts =
        plw_law_grid_volts_for(work->net.law, at.volts[PLW_AT_PLATE], at.volts[PLW_AT_SCREEN], wanted);
    plw_currents *c = &at.law;
    plw_law_evaluate(work->net.law, at.volts[PLW_AT_PLATE], at.volts[PLW_AT_SCREEN], grid_volts, c);
    const double by_grid = c->plate_by_grid + c->screen_by_grid;
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        by_average[flow] = work->by_average[PLW_AT_GRID][flow] +
                           ((c->plate_by_plate + c->screen_by_plate) * work->by_average[PLW_AT_PLATE][flow] +
                            (c->plate_by_screen + c->screen_by_screen) * work->by_average[PLW_AT_SCREEN][flow]) /
                               by_grid;
    }
    return at.volts[PLW_AT_GRID] - grid_volts;
}

/* The drive at which the grid's crest just comes to zero volts.  With an unbypassed cathode the crest's current lifts
 * the cathode, and itself follows the drive: Newton's step from the crest as it now is. */
static double grid_current_drive(const cycle_work *work, const plw_cycle *cycle, double by_average[PLW_FLOWS]) {
    const plw_feed *feed = work->net.feed;
    const double *by_grid = work->by_grid[0];
    const double grid_volts =
        work->base_volts[PLW_AT_GRID] + cycle->drive_peak_volts - grid_fall_volts(feed, cycle->instant[0].amps);
    const double slope = 1.0 - grid_fall_volts(feed, by_grid);
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        double amps_by[PLW_FLOWS]; /* of the crest, by this average, the drive held */
        for (int of = 0; of < PLW_FLOWS; of++) {
            amps_by[of] = work->by_averages[0][of][flow] - by_grid[of] * work->drive_by_average[flow];
        }
        by_average[flow] = -(work->by_average[PLW_AT_GRID][flow] - grid_fall_volts(feed, amps_by)) / slope;
    }
    return cycle->drive_peak_volts - grid_volts / slope;
}

/* Set the drive to the first of grid current and cut-off, by what the cycle now looks like. */
static void set_limit_drive(cycle_work *work, plw_cycle *cycle) {
    double crest_by_average[PLW_FLOWS];
    double drive = grid_current_drive(work, cycle, crest_by_average);
    cycle->limit = PLW_LIMIT_GRID_CURRENT;
    memcpy(work->drive_by_average, crest_by_average, sizeof crest_by_average);
    const double wanted = PLW_CUT_OFF_FRACTION * work->rest_amps;
    if (cathode_amps(&cycle->instant[PLW_CYCLE_STEPS]) < 1.5 * wanted) {
        double by_average[PLW_FLOWS];
        const double cut_off = cut_off_drive(work, cycle, by_average);
        if (isfinite(cut_off) && cut_off < drive) {
            drive = cut_off;
            cycle->limit = PLW_LIMIT_CUT_OFF;
            memcpy(work->drive_by_average, by_average, sizeof by_average);
        }
    }
    cycle->drive_peak_volts = drive > 0.0 ? drive : 0.0;
}

static void set_averages(cycle_work *work, plw_cycle *cycle) {
    work->net.feed->average_volts(work->net.feed->context, cycle->average_amps, work->base_volts, work->by_average);
}

/* Solve one instant at the present averages and drive; keep what the next steps need of its slopes. */
static plw_status solve_instant(cycle_work *work, plw_cycle *cycle, int index, double tolerance) {
    plw_instant *point = &cycle->instant[index];
    const double cosine = phase_cosine(index);
    memcpy(work->net.steady_volts, work->base_volts, sizeof work->base_volts);
    work->net.steady_volts[PLW_AT_GRID] += cycle->drive_peak_volts * cosine;
    balance b;
    const plw_status status = balance_point(&work->net, tolerance, point, &b);
    if (status != PLW_OK) {
        return status;
    }
    if (b.size > work->worst_residual) {
        work->worst_residual = b.size;
    }
    const plw_currents *c = &point->law;
    const double by_grid[PLW_FLOWS] = {c->plate_by_grid, c->screen_by_grid};
    solve_pair(b.jacobian, by_grid, work->by_grid[index]);
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        const double plate = work->by_average[PLW_AT_PLATE][flow];
        const double screen = work->by_average[PLW_AT_SCREEN][flow];
        const double grid = work->by_average[PLW_AT_GRID][flow] + cosine * work->drive_by_average[flow];
        const double right[PLW_FLOWS] = {
            c->plate_by_plate * plate + c->plate_by_screen * screen + c->plate_by_grid * grid,
            c->screen_by_plate * plate + c->screen_by_screen * screen + c->screen_by_grid * grid};
        double slope[PLW_FLOWS];
        solve_pair(b.jacobian, right, slope);
        work->by_averages[index][PLW_OF_PLATE][flow] = slope[PLW_OF_PLATE];
        work->by_averages[index][PLW_OF_SCREEN][flow] = slope[PLW_OF_SCREEN];
    }
    return PLW_OK;
}

static void move_instant(plw_instant *point, double plate_amps, double screen_amps) {
    const double plate = point->amps[PLW_OF_PLATE] + plate_amps;
    const double screen = point->amps[PLW_OF_SCREEN] + screen_amps;
    point->amps[PLW_OF_PLATE] = plate > 0.0 ? plate : 0.0;
    point->amps[PLW_OF_SCREEN] = screen > 0.0 ? screen : 0.0;
}

/* First walk: from the point of rest outward, each instant starting from its neighbour. */
static plw_status march(cycle_work *work, plw_cycle *cycle, const plw_instant *rest) {
    const int middle = PLW_CYCLE_STEPS / 2;
    cycle->instant[middle] = *rest;
    plw_status status = solve_instant(work, cycle, middle, MARCH_TOLERANCE_AMPS);
    for (int away = 1; away <= middle && status == PLW_OK; away++) {
        for (int side = -1; side <= 1 && status == PLW_OK; side += 2) {
            const int index = middle + side * away;
            const int from = index - side;
            const double grid_volts = cycle->drive_peak_volts * (phase_cosine(index) - phase_cosine(from));
            cycle->instant[index] = cycle->instant[from];
            move_instant(&cycle->instant[index], work->by_grid[from][PLW_OF_PLATE] * grid_volts,
                         work->by_grid[from][PLW_OF_SCREEN] * grid_volts);
            status = solve_instant(work, cycle, index, MARCH_TOLERANCE_AMPS);
        }
    }
    return status;
}

static plw_status sweep(cycle_work *work, plw_cycle *cycle, double tolerance) {
    work->worst_residual = 0.0;
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        const plw_status status = solve_instant(work, cycle, index, tolerance);
        if (status != PLW_OK) {
            return status;
        }
    }
    return PLW_OK;
}

static void take_means(cycle_work *work, const plw_cycle *cycle) {
    memset(work->mean_amps, 0, sizeof work->mean_amps);
    memset(work->mean_by_average, 0, sizeof work->mean_by_average);
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        const double weight = (index == 0 || index == PLW_CYCLE_STEPS ? 0.5 : 1.0) / PLW_CYCLE_STEPS;
        for (int flow = 0; flow < PLW_FLOWS; flow++) {
            work->mean_amps[flow] += weight * cycle->instant[index].amps[flow];
            for (int other = 0; other < PLW_FLOWS; other++) {
                work->mean_by_average[flow][other] += weight * work->by_averages[index][flow][other];
            }
        }
    }
}

/* Move the averages, and carry the step on to every instant through its slopes. */
static void shift_averages(cycle_work *work, plw_cycle *cycle, const double step[PLW_FLOWS]) {
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        cycle->average_amps[flow] += step[flow];
    }
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        double(*slopes)[PLW_FLOWS] = work->by_averages[index];
        move_instant(&cycle->instant[index], slopes[0][0] * step[0] + slopes[0][1] * step[1],
                     slopes[1][0] * step[0] + slopes[1][1] * step[1]);
    }
    set_averages(work, cycle);
}

/* By how much the averages are off the means over the cycle, in A. */
static double averages_off(const cycle_work *work, const plw_cycle *cycle) {
    return fabs(work->mean_amps[0] - cycle->average_amps[0]) + fabs(work->mean_amps[1] - cycle->average_amps[1]);
}

/* Newton's step for the averages. */
static void newton_averages(const cycle_work *work, const plw_cycle *cycle, double step[PLW_FLOWS]) {
    double matrix[PLW_FLOWS][PLW_FLOWS];
    double off[PLW_FLOWS];
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        off[flow] = work->mean_amps[flow] - cycle->average_amps[flow];
        for (int other = 0; other < PLW_FLOWS; other++) {
            matrix[flow][other] = (flow == other ? 1.0 : 0.0) - work->mean_by_average[flow][other];
        }
    }
    solve_pair(matrix, off, step);
    /* A step longer than the average itself comes from far off: go half-way to zero, or double, at the most. */
    double part = 1.0;
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        const double most = 0.5 * cycle->average_amps[flow] + 1e-3;
        if (fabs(step[flow]) * part > most) {
            part = most / fabs(step[flow]);
        }
    }
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        step[flow] = fmax(step[flow] * part, -cycle->average_amps[flow]); /* no average current is negative */
    }
}

/* Follow the limit: the drive that belongs to the averages now, and the instants moved along with the difference from
 * what the averages' slopes have already accounted for.
 * Ret: that difference, in V */
static double follow_limit(cycle_work *work, plw_cycle *cycle, double foreseen_volts) {
    if (!work->seek_limit) {
        return 0.0;
    }
    cycle->drive_peak_volts = foreseen_volts;
    set_limit_drive(work, cycle);
    const double volts = cycle->drive_peak_volts - foreseen_volts;
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        const double grid_volts = volts * phase_cosine(index);
        move_instant(&cycle->instant[index], work->by_grid[index][PLW_OF_PLATE] * grid_volts,
                     work->by_grid[index][PLW_OF_SCREEN] * grid_volts);
    }
    return fabs(volts);
}

static void load_harmonics(const plw_feed *feed, plw_cycle *cycle) {
    double load_amps[PLW_CYCLE_INSTANTS];
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        const double *amps = cycle->instant[index].amps;
        load_amps[index] = amps[PLW_OF_PLATE] + feed->tap * amps[PLW_OF_SCREEN];
    }
    plw_cosine_series(load_amps, cycle->harmonic_amps);
}

/* The voltages that belong to the last step's averages, drive and currents. */
static void refresh_volts(cycle_work *work, plw_cycle *cycle) {
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        double ohms[PLW_ELECTRODES][PLW_FLOWS];
        memcpy(work->net.steady_volts, work->base_volts, sizeof work->base_volts);
        work->net.steady_volts[PLW_AT_GRID] += cycle->drive_peak_volts * phase_cosine(index);
        network_volts(&work->net, cycle->instant[index].amps, cycle->instant[index].volts, ohms);
    }
}

/* Newton's steps for the averages, damped where they are still far off, and with them the limit of drive. */
static plw_status settle_averages(cycle_work *work, plw_cycle *cycle) {
    const double far_amps = FAR_PART * work->rest_amps;
    double last[PLW_FLOWS] = {0.0}; /* averages before the last step, and by how much they were off */
    double last_off = HUGE_VAL;
    double step[PLW_FLOWS];
    plw_status status = PLW_OK;
    for (int round = 0; status == PLW_OK && round < SWEEPS_MOST; round++) {
        take_means(work, cycle);
        const double amps_off = averages_off(work, cycle);
        if (round > FREE_SWEEPS && amps_off >= last_off && amps_off > far_amps) {
            /* Still far off, and the last step made it worse: go half of it back. */
            for (int flow = 0; flow < PLW_FLOWS; flow++) {
                step[flow] = 0.5 * (last[flow] - cycle->average_amps[flow]);
            }
        } else {
            last_off = amps_off;
            memcpy(last, cycle->average_amps, sizeof last);
            newton_averages(work, cycle, step);
        }
        double foreseen = cycle->drive_peak_volts;
        for (int flow = 0; flow < PLW_FLOWS; flow++) {
            foreseen += work->drive_by_average[flow] * step[flow];
        }
        shift_averages(work, cycle, step);
        const double volts_off = follow_limit(work, cycle, foreseen);
        if (round > 0 && amps_off <= CYCLE_TOLERANCE_AMPS && volts_off <= 1e-7 &&
            work->worst_residual <= CYCLE_TOLERANCE_AMPS) {
            refresh_volts(work, cycle);
            return PLW_OK;
        }
        status = sweep(work, cycle, CYCLE_TOLERANCE_AMPS);
    }
    return status == PLW_OK ? PLW_E_NO_CONVERGENCE : status;
}

/* A cycle from the point of rest outward, at a drive or, where that is NaN, at its limit. */
static plw_status cycle_from_rest(const network *net, const plw_instant *rest, double drive_peak_volts,
                                  plw_cycle *cycle) {
    cycle_work work = {.net = *net, .seek_limit = isnan(drive_peak_volts), .rest_amps = cathode_amps(rest)};
    memcpy(cycle->average_amps, rest->amps, sizeof cycle->average_amps);
    cycle->limit = PLW_LIMIT_DRIVE;
    cycle->drive_peak_volts = work.seek_limit ? 0.0 : drive_peak_volts;
    set_averages(&work, cycle);
    if (work.seek_limit) {
        for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
            cycle->instant[index] = *rest;
        }
        set_limit_drive(&work, cycle);
    }
    const plw_status status = march(&work, cycle, rest);
    return status == PLW_OK ? settle_averages(&work, cycle) : status;
}

/* What the drive of a solved cycle oversteps; PLW_LIMIT_DRIVE: nothing. */
static plw_limit overstepped(const plw_cycle *cycle, const plw_instant *rest) {
    if (cycle->instant[0].volts[PLW_AT_GRID] > 0.0) {
        return PLW_LIMIT_GRID_CURRENT;
    }
    const bool cut_off = cathode_amps(&cycle->instant[PLW_CYCLE_STEPS]) < PLW_CUT_OFF_FRACTION * cathode_amps(rest);
    return cut_off ? PLW_LIMIT_CUT_OFF : PLW_LIMIT_DRIVE;
}

/* Where average current and limit of drive chase each other (fixed bias, deep class AB): cycles at given drives,
 * halving between one within the limit and one beyond. */
static plw_status bracket_limit(const network *net, const plw_instant *rest, plw_cycle *cycle) {
    double within = 0.0;
    double beyond = fmax(-rest->volts[PLW_AT_GRID], 1e-3);
    plw_limit limit = PLW_LIMIT_DRIVE;
    plw_status status = PLW_OK;
    for (int step = 0; status == PLW_OK && step < BISECTIONS && limit == PLW_LIMIT_DRIVE; step++) {
        status = cycle_from_rest(net, rest, beyond, cycle);
        limit = status == PLW_OK ? overstepped(cycle, rest) : PLW_LIMIT_DRIVE;
        if (limit == PLW_LIMIT_DRIVE) {
            within = beyond;
            beyond *= 1.5;
        }
    }
    for (int step = 0; status == PLW_OK && step < BISECTIONS && beyond - within > 1e-13 * beyond; step++) {
        const double middle = 0.5 * (within + beyond);
        status = cycle_from_rest(net, rest, middle, cycle);
        const plw_limit at_middle = status == PLW_OK ? overstepped(cycle, rest) : PLW_LIMIT_DRIVE;
        if (at_middle == PLW_LIMIT_DRIVE) {
            within = middle;
        } else {
            beyond = middle;
            limit = at_middle;
        }
    }
    if (status == PLW_OK) {
        status = cycle_from_rest(net, rest, within, cycle);
        cycle->limit = limit;
    }
    return status;
}

plw_status plw_dynamic_cycle(const plw_law *law, const plw_feed *feed, const plw_instant *rest, double drive_peak_volts,
                             plw_cycle *cycle) {
    const network net = {.law = law, .feed = feed};
    plw_status status = cycle_from_rest(&net, rest, drive_peak_volts, cycle);
    if (status == PLW_E_NO_CONVERGENCE && isnan(drive_peak_volts)) {
        status = bracket_limit(&net, rest, cycle);
    }
    if (status == PLW_OK) {
        load_harmonics(feed, cycle);
    }
    return status;
}
