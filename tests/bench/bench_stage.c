/* Cost of one complete stage (point of rest, whole cycle to the limit of drive, harmonics) in evaluations of the bare
 * plate law.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

#include "unit/stages.h"

enum { REPETITIONS = 21, LAW_CALLS = 20000, STAGE_RUNS = 200 };

static double now_seconds(void) {
    struct timespec at;
    clock_gettime(CLOCK_MONOTONIC, &at);
    return (double)at.tv_sec + 1e-9 * (double)at.tv_nsec;
}

static int ascending(const void *left, const void *right) {
    const double a = *(const double *)left, b = *(const double *)right;
    return (a > b) - (a < b);
}

static double median(double *values, size_t count) {
    qsort(values, count, sizeof values[0], ascending);
    return values[count / 2];
}

/* One evaluation over the region in which the stage works.  In turn: each call waits for the one before, as in a
 * solver; else the processor may overlap them. */
static double law_seconds(const plw_law *law, double volts, double bias, bool in_turn, double *sink) {
    const double start = now_seconds();
    double amps = 0.0;
    for (int call = 0; call < LAW_CALLS; call++) {
        const double part = (double)(call % 41) / 41.0;
        const double wait = in_turn ? 1e-9 * amps : 0.0;
        amps = plw_law_plate_amps(law, volts * (0.2 + 1.5 * part) + wait, volts, 2.0 * bias * part);
        *sink += amps;
    }
    return (now_seconds() - start) / LAW_CALLS;
}

static double stage_seconds(const plw_stage *stage, double *sink) {
    const double start = now_seconds();
    for (int run = 0; run < STAGE_RUNS; run++) {
        plw_quiescent quiescent;
        plw_signal signal;
        if (plw_quiescent_solve(stage, &quiescent, NULL) != PLW_OK ||
            plw_signal_solve(stage, &quiescent, &signal, NULL) != PLW_OK) {
            fprintf(stderr, "bench: a stage was not solved\n");
            exit(1);
        }
        *sink += signal.power_watts;
    }
    return (now_seconds() - start) / STAGE_RUNS;
}

/* Law and stage are measured side by side and the ratio taken each time, so that a change of the processor's clock or
 * another process meets both. */
static double measure(const char *name, const plw_stage *stage, double *sink) {
    plw_quiescent quiescent;
    if (plw_quiescent_solve(stage, &quiescent, NULL) != PLW_OK) {
        fprintf(stderr, "bench: %s has no point of rest\n", name);
        exit(1);
    }
    const plw_law *law = &stage->tube->model.law;
    double call[REPETITIONS], whole[REPETITIONS], ratio[REPETITIONS], ratio_in_turn[REPETITIONS];
    for (int repetition = 0; repetition < REPETITIONS; repetition++) {
        call[repetition] = law_seconds(law, quiescent.supply_volts, quiescent.grid_volts, false, sink);
        whole[repetition] = stage_seconds(stage, sink);
        const double in_turn = law_seconds(law, quiescent.supply_volts, quiescent.grid_volts, true, sink);
        ratio[repetition] = whole[repetition] / call[repetition];
        ratio_in_turn[repetition] = whole[repetition] / in_turn;
    }
    const double middle = median(ratio, REPETITIONS);
    printf("%-42s %6.1f ns a call %7.2f us a stage   ratio %4.0f   (%4.0f calls in turn)\n", name,
           1e9 * median(call, REPETITIONS), 1e6 * median(whole, REPETITIONS), middle,
           median(ratio_in_turn, REPETITIONS));
    return middle;
}

static plw_stage pentode_stage(const test_tube *tube) {
    plw_stage stage = simple_stage(tube, 285.0, 5000.0, 270.0, UNKNOWN);
    stage.primary_ohms = 280.0;
    return stage;
}

int main(void) {
    enum { STAGES_MOST = 8 };
    test_tube triode, pentode;
    make_tube(&triode, koren_triode(KOREN_2A3));
    make_tube(&pentode, pentode_law(TEST_BEAM_SMALL));
    plw_stage stage[STAGES_MOST];
    const char *name[STAGES_MOST];
    size_t count = 0;
    name[count] = "triode, 750 ohm bypassed, stiff supply";
    stage[count++] = simple_stage(&triode, 295.0, 2500.0, 750.0, UNKNOWN);
    name[count] = "triode, fixed bias";
    stage[count++] = simple_stage(&triode, 250.0, 2500.0, UNKNOWN, -45.0);
    name[count] = "pentode, 270 ohm bypassed, stiff supply";
    stage[count++] = pentode_stage(&pentode);
    name[count] = "pentode, 1k8 source, screen resistor 1k";
    stage[count] = pentode_stage(&pentode);
    stage[count].screen_resistor_ohms = 1000.0;
    if (plw_supply_source(370.0, 1800.0, &stage[count].supply, NULL) != PLW_OK) {
        return 1;
    }
    count++;
    name[count] = "pentode, triode connection";
    stage[count] = pentode_stage(&pentode);
    stage[count++].connection = PLW_CONNECTION_TRIODE;
    name[count] = "pentode, ultralinear 43 %";
    stage[count] = pentode_stage(&pentode);
    stage[count].tap = 0.43;
    stage[count++].connection = PLW_CONNECTION_ULTRALINEAR;
    name[count] = "pentode, unbypassed";
    stage[count] = pentode_stage(&pentode);
    stage[count++].unbypassed = true;
    double sink = 0.0, ratio[STAGES_MOST] = {0};
    printf("One complete stage in evaluations of the bare plate law (goal: at most 150), medians of %d\n", REPETITIONS);
    for (size_t index = 0; index < count; index++) {
        ratio[index] = measure(name[index], &stage[index], &sink);
    }
    printf("median of these stages: %.0f, worst: ", median(ratio, count));
    printf("%.0f\n", ratio[count - 1]);
    return isfinite(sink) ? 0 : 1;
}
