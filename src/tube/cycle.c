/* The dynamic characteristic: the whole cycle of a tube fed through resistances.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <string.h>

#include "tube/dynamic.h"
#include "tube/network.h"

#define CYCLE_TOLERANCE_AMPS 1e-9
#define NEAR_AMPS 4e-4         /* from here one step of Newton's is trusted to converge */
#define STEPPED_MOST_AMPS 1e-6 /* an instant further off than this before its last step is not trusted */
#define SLOPED_AMPS 1e-8       /* averages further off than this get fresh slopes for their next step */
#define FAR_PART 1e-3          /* averages further off than this part of the current at rest may need damped steps */
enum { SWEEPS_MOST = 60, FREE_SWEEPS = 4 };

/* cos(pi j / 16), j = 0 .. 16: the phase of each instant */
static const double half_turn_cosine[PLW_CYCLE_INSTANTS] = {1.0,
                                                            0.9807852804032304,
                                                            0.9238795325112867,
                                                            0.8314696123025452,
                                                            0.7071067811865476,
                                                            0.5555702330196023,
                                                            0.38268343236508984,
                                                            0.19509032201612833,
                                                            0.0,
                                                            -0.19509032201612833,
                                                            -0.38268343236508984,
                                                            -0.5555702330196023,
                                                            -0.7071067811865476,
                                                            -0.8314696123025452,
                                                            -0.9238795325112867,
                                                            -0.9807852804032304,
                                                            -1.0};

void plw_cosine_series(const double sample[PLW_CYCLE_INSTANTS], double harmonic[PLW_HARMONICS + 1]) {
    /* Even harmonics see the sum of two instants that mirror each other about the middle, odd ones the difference. */
    enum { MIDDLE = PLW_CYCLE_STEPS / 2, TURN = 2 * PLW_CYCLE_STEPS };
    double folded[2][MIDDLE + 1];
    for (int index = 0; index < MIDDLE; index++) {
        const double weight = index == 0 ? 0.5 : 1.0;
        folded[0][index] = weight * (sample[index] + sample[PLW_CYCLE_STEPS - index]);
        folded[1][index] = weight * (sample[index] - sample[PLW_CYCLE_STEPS - index]);
    }
    folded[0][MIDDLE] = sample[MIDDLE];
    folded[1][MIDDLE] = 0.0;
    for (int order = 0; order <= PLW_HARMONICS; order++) {
        double sum = 0.0;
        int phase = 0;
        for (int index = 0; index <= MIDDLE; index++) {
            sum += folded[order % 2][index] * half_turn_cosine[phase > PLW_CYCLE_STEPS ? TURN - phase : phase];
            phase += order;
            phase -= phase >= TURN ? TURN : 0;
        }
        harmonic[order] = sum * (order == 0 ? 1.0 : 2.0) / PLW_CYCLE_STEPS;
    }
}

/* The cycle while it is being solved. */
typedef struct {
    plw_network net;
    bool seek_limit;
    double rest_amps; /* cathode current at rest */
    double base_volts[PLW_ELECTRODES];
    double by_average[PLW_ELECTRODES][PLW_FLOWS];
    double drive_by_average[PLW_FLOWS];
    double by_averages[PLW_CYCLE_INSTANTS][PLW_FLOWS][PLW_FLOWS]; /* currents of an instant by the averages */
    double by_grid[PLW_CYCLE_INSTANTS][PLW_FLOWS];                /* currents of an instant by the grid volts */
    double mean_amps[PLW_FLOWS];
    double mean_by_average[PLW_FLOWS][PLW_FLOWS];
    double worst_residual; /* of the instants, in the last walk or sweep, before their steps; and in the one before */
    double worst_before;
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
    memcpy(work->net.steady_volts, work->base_volts, sizeof work->base_volts);
    instant_volts(&work->net, at.amps, at.volts);
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

/* The drive at which the cathode current of the negative peak has fallen to cut-off: Newton's step, on the logarithm of
 * the current, from the trough as it now is; from afar by the law itself. */
static double trough_drive(cycle_work *work, const plw_cycle *cycle, double by_average[PLW_FLOWS]) {
    const double wanted = PLW_CUT_OFF_FRACTION * work->rest_amps;
    const double total = cathode_amps(&cycle->instant[PLW_CYCLE_STEPS]);
    const double *by_grid = work->by_grid[PLW_CYCLE_STEPS];
    const double slope = by_grid[PLW_OF_PLATE] + by_grid[PLW_OF_SCREEN];
    if (!(total > 0.1 * wanted && slope > 0.0)) {
        return cut_off_drive(work, cycle, by_average);
    }
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        by_average[flow] = work->drive_by_average[flow]; /* what the trough's slopes below already follow */
        for (int of = 0; of < PLW_FLOWS; of++) {
            by_average[flow] += work->by_averages[PLW_CYCLE_STEPS][of][flow] / slope;
        }
    }
    return cycle->drive_peak_volts + log(total / wanted) * total / slope;
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
    double by_average[PLW_FLOWS]; /* both are found from slopes that follow drive_by_average as it still is */
    double trough_by_average[PLW_FLOWS];
    double drive = grid_current_drive(work, cycle, by_average);
    cycle->limit = PLW_LIMIT_GRID_CURRENT;
    const double wanted = PLW_CUT_OFF_FRACTION * work->rest_amps;
    if (cathode_amps(&cycle->instant[PLW_CYCLE_STEPS]) < 1.5 * wanted) {
        const double cut_off = trough_drive(work, cycle, trough_by_average);
        if (isfinite(cut_off) && cut_off < drive) {
            drive = cut_off;
            cycle->limit = PLW_LIMIT_CUT_OFF;
            memcpy(by_average, trough_by_average, sizeof by_average);
        }
    }
    memcpy(work->drive_by_average, by_average, sizeof by_average);
    cycle->drive_peak_volts = drive > 0.0 ? drive : 0.0;
}

static void set_averages(cycle_work *work, plw_cycle *cycle) {
    work->net.feed->average_volts(work->net.feed->context, cycle->average_amps, work->base_volts, work->by_average);
}

/* Steady volts of an instant, the signal included. */
static void at_phase(cycle_work *work, const plw_cycle *cycle, int index) {
    memcpy(work->net.steady_volts, work->base_volts, sizeof work->base_volts);
    work->net.steady_volts[PLW_AT_GRID] += cycle->drive_peak_volts * half_turn_cosine[index];
}

static void move_instant(plw_instant *point, double plate_amps, double screen_amps) {
    const double plate = point->amps[PLW_OF_PLATE] + plate_amps;
    const double screen = point->amps[PLW_OF_SCREEN] + screen_amps;
    point->amps[PLW_OF_PLATE] = plate > 0.0 ? plate : 0.0;
    point->amps[PLW_OF_SCREEN] = screen > 0.0 ? screen : 0.0;
}

/* How an instant's currents follow the averages and the grid volts. */
static inline void keep_slopes(cycle_work *work, int index, const plw_currents *c, plw_balance *b) {
    const double cosine = half_turn_cosine[index];
    const double by_grid[PLW_FLOWS] = {c->plate_by_grid, c->screen_by_grid};
    multiply_pair(b->inverse, by_grid, work->by_grid[index]);
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        const double plate = work->by_average[PLW_AT_PLATE][flow];
        const double screen = work->by_average[PLW_AT_SCREEN][flow];
        const double grid = work->by_average[PLW_AT_GRID][flow] + cosine * work->drive_by_average[flow];
        const double right[PLW_FLOWS] = {
            c->plate_by_plate * plate + c->plate_by_screen * screen + c->plate_by_grid * grid,
            c->screen_by_plate * plate + c->screen_by_screen * screen + c->screen_by_grid * grid};
        double slope[PLW_FLOWS];
        multiply_pair(b->inverse, right, slope);
        work->by_averages[index][PLW_OF_PLATE][flow] = slope[PLW_OF_PLATE];
        work->by_averages[index][PLW_OF_SCREEN][flow] = slope[PLW_OF_SCREEN];
    }
}

/* Bring one instant nearer to its balance at the present averages and drive: with one evaluation of the law and one
 * step of Newton's where it is near already, since the averages move before the next round anyway; else all the way. */
static plw_status solve_instant(cycle_work *work, plw_cycle *cycle, int index, bool slopes) {
    plw_instant *point = &cycle->instant[index];
    at_phase(work, cycle, index);
    plw_balance b;
    balance_at(&work->net, point, &b);
    if (!(b.size <= NEAR_AMPS)) {
        const plw_status status = plw_balance_point(&work->net, NEAR_AMPS, point, &b);
        if (status != PLW_OK) {
            return status;
        }
    }
    if (b.size > work->worst_residual) {
        work->worst_residual = b.size;
    }
    if (slopes) {
        keep_slopes(work, index, &point->law, &b);
    }
    double step[PLW_FLOWS];
    multiply_pair(b.inverse, b.residual, step);
    move_instant(point, -step[PLW_OF_PLATE], -step[PLW_OF_SCREEN]);
    return PLW_OK;
}

/* Start an instant of the first walk from its neighbour, along the neighbour's slope; from the third on, along the
 * slope half-way, as the last two slopes foretell it (Adams and Bashforth's second order). */
static void start_from_neighbour(const cycle_work *work, plw_cycle *cycle, int index, int from, int before) {
    const double grid_volts = cycle->drive_peak_volts * (half_turn_cosine[index] - half_turn_cosine[from]);
    const double last_volts = cycle->drive_peak_volts * (half_turn_cosine[from] - half_turn_cosine[before]);
    const double bend = from == before || last_volts == 0.0 ? 0.0 : 0.5 * grid_volts / last_volts;
    cycle->instant[index] = cycle->instant[from];
    double step[PLW_FLOWS];
    for (int flow = 0; flow < PLW_FLOWS; flow++) {
        const double slope = work->by_grid[from][flow];
        step[flow] = grid_volts * (slope + bend * (slope - work->by_grid[before][flow]));
    }
    move_instant(&cycle->instant[index], step[PLW_OF_PLATE], step[PLW_OF_SCREEN]);
}

/* First walk: from the point of rest outward, each instant starting from its neighbour. */
static plw_status march(cycle_work *work, plw_cycle *cycle, const plw_instant *rest) {
    const int middle = PLW_CYCLE_STEPS / 2;
    cycle->instant[middle] = *rest;
    plw_status status = solve_instant(work, cycle, middle, true);
    for (int away = 1; away <= middle && status == PLW_OK; away++) {
        for (int side = -1; side <= 1 && status == PLW_OK; side += 2) {
            const int index = middle + side * away;
            const int from = index - side;
            start_from_neighbour(work, cycle, index, from, away == 1 ? from : from - side);
            status = solve_instant(work, cycle, index, true);
        }
    }
    return status;
}

static plw_status sweep(cycle_work *work, plw_cycle *cycle, bool slopes) {
    work->worst_before = work->worst_residual;
    work->worst_residual = 0.0;
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        /* The limit of drive is found from the slopes at the crest and the trough: those are kept fresh. */
        const bool peak = index == 0 || index == PLW_CYCLE_STEPS;
        const plw_status status = solve_instant(work, cycle, index, slopes || (peak && work->seek_limit));
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
    double inverse[PLW_FLOWS][PLW_FLOWS];
    invert_pair((const double(*)[PLW_FLOWS])matrix, inverse);
    multiply_pair(inverse, off, step);
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
        const double grid_volts = volts * half_turn_cosine[index];
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
        at_phase(work, cycle, index);
        instant_volts(&work->net, cycle->instant[index].amps, cycle->instant[index].volts);
        (void)load_driver(&work->net, &cycle->instant[index].volts[PLW_AT_GRID]);
    }
}

/* Do the steps just taken, of the averages and of each instant, leave less than the tolerance?  A step of the averages
 * leaves about the part that the step before it left; one of an instant goes by the square: with r0 and then r1 off, it
 * leaves r1 (r1/r0)^2, for which ten times as much is allowed. */
static bool steps_suffice(const cycle_work *work, double amps_off, double amps_off_before) {
    const double amps_left = amps_off * fmin(amps_off / amps_off_before, 1.0);
    const double ratio = fmin(work->worst_residual / work->worst_before, 1.0);
    const double residual_left = 10.0 * work->worst_residual * ratio * ratio;
    return amps_left <= CYCLE_TOLERANCE_AMPS && residual_left <= CYCLE_TOLERANCE_AMPS &&
           work->worst_residual <= STEPPED_MOST_AMPS;
}

/* Newton's steps for the averages, damped where they are still far off, and with them the limit of drive. */
static plw_status settle_averages(cycle_work *work, plw_cycle *cycle) {
    const double far_amps = FAR_PART * work->rest_amps;
    double last[PLW_FLOWS] = {0.0}; /* averages before the last step, and by how much they were off */
    double last_off = HUGE_VAL;
    double off_before = HUGE_VAL; /* in the round before */
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
        if (round > 0 && volts_off <= 1e-7 && steps_suffice(work, amps_off, off_before)) {
            refresh_volts(work, cycle);
            return PLW_OK;
        }
        off_before = amps_off;
        status = sweep(work, cycle, amps_off > SLOPED_AMPS);
    }
    return status == PLW_OK ? PLW_E_NO_CONVERGENCE : status;
}

/* A first limit of drive, as if the tube were as straight as it is at rest. */
static plw_status guess_limit(cycle_work *work, plw_cycle *cycle, const plw_instant *rest) {
    for (int index = 0; index < PLW_CYCLE_INSTANTS; index++) {
        cycle->instant[index] = *rest;
    }
    const plw_status status = solve_instant(work, cycle, 0, true); /* without drive every instant is at rest */
    set_limit_drive(work, cycle);
    return status;
}

/* A cycle from the point of rest outward, at a drive or, where that is NaN, at its limit. */
static plw_status cycle_from_rest(const plw_network *net, const plw_instant *rest, double drive_peak_volts,
                                  plw_cycle *cycle) {
    cycle_work work = {.net = *net, .seek_limit = isnan(drive_peak_volts), .rest_amps = cathode_amps(rest)};
    memcpy(cycle->average_amps, rest->amps, sizeof cycle->average_amps);
    cycle->limit = PLW_LIMIT_DRIVE;
    cycle->drive_peak_volts = work.seek_limit ? 0.0 : drive_peak_volts;
    set_averages(&work, cycle);
    if (work.seek_limit) {
        const plw_status status = guess_limit(&work, cycle, rest);
        if (status != PLW_OK) {
            return status;
        }
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
static plw_status bracket_limit(const plw_network *net, const plw_instant *rest, plw_cycle *cycle) {
    double within = 0.0;
    double beyond = fmax(-rest->volts[PLW_AT_GRID], 1e-3);
    plw_limit limit = PLW_LIMIT_DRIVE;
    plw_status status = PLW_OK;
    for (int step = 0; status == PLW_OK && step < PLW_BISECTIONS && limit == PLW_LIMIT_DRIVE; step++) {
        status = cycle_from_rest(net, rest, beyond, cycle);
        limit = status == PLW_OK ? overstepped(cycle, rest) : PLW_LIMIT_DRIVE;
        if (limit == PLW_LIMIT_DRIVE) {
            within = beyond;
            beyond *= 1.5;
        }
    }
    for (int step = 0; status == PLW_OK && step < PLW_BISECTIONS && beyond - within > 1e-13 * beyond; step++) {
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
    const plw_network net = {.law = law, .feed = feed};
    plw_status status = cycle_from_rest(&net, rest, drive_peak_volts, cycle);
    if (status == PLW_E_NO_CONVERGENCE && isnan(drive_peak_volts)) {
        status = bracket_limit(&net, rest, cycle);
    }
    if (status == PLW_OK) {
        load_harmonics(feed, cycle);
    }
    return status;
}

double plw_distortion_percent(const double harmonic[PLW_HARMONICS + 1]) {
    double squares = 0.0;
    for (int order = 2; order <= PLW_HARMONICS; order++) {
        squares += harmonic[order] * harmonic[order];
    }
    return harmonic[1] > 0.0 ? 100.0 * sqrt(squares) / harmonic[1] : (double)NAN;
}
