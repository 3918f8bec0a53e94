/* Time of rectifier steady states and regulation lines, in units of one plate-law evaluation.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

#include "platewright/law.h"
#include "platewright/rectifier.h"

static double seconds_now(void) {
    struct timespec now;
    clock_gettime(CLOCK_MONOTONIC, &now);
    return (double)now.tv_sec + 1e-9 * (double)now.tv_nsec;
}

/* 6L6GC-like coefficients: any valid pentode law serves. */
static double law_seconds(void) {
    plw_law law = {.kind = PLW_LAW_PENTODE};
    const double coefficients[PLW_LAW_COEFFICIENTS_MOST] = {8.7, 1.35, 1460, 48, 12, 4500, 1e-4, 1, 30};
    for (size_t i = 0; i < PLW_LAW_COEFFICIENTS_MOST; i++) {
        law.coefficient[i] = coefficients[i] > 0 ? coefficients[i] : 1;
    }
    double best = 1, sink = 0;
    for (int round = 0; round < 20; round++) {
        const double start = seconds_now();
        for (int i = 0; i < 20000; i++) {
            plw_currents currents;
            plw_law_evaluate(&law, 250 + 0.001 * i, 250, -14, &currents);
            sink += currents.plate_amps;
        }
        const double each = (seconds_now() - start) / 20000;
        best = each < best ? each : best;
    }
    return sink > -1 ? best : 0;
}

typedef struct {
    const char *name;
    plw_rectifier supply;
    double amps, steady_goal;
} subject;

static int measure(const subject *s, double law) {
    double steady = 1, line = 1;
    for (int round = 0; round < 50; round++) {
        plw_rectifier_state state;
        plw_supply made;
        plw_error error = {0};
        const plw_dc_load load = {.amps = s->amps};
        const double start = seconds_now();
        const plw_status first = plw_rectifier_steady(&s->supply, load, &state, &error);
        const double middle = seconds_now();
        const plw_status second = plw_rectifier_line(&s->supply, 1.5 * s->amps, &made, &error);
        const double end = seconds_now();
        if (first != PLW_OK || second != PLW_OK) {
            fprintf(stderr, "%s: %s\n", s->name, error.text);
            return 1;
        }
        steady = middle - start < steady ? middle - start : steady;
        line = end - middle < line ? end - middle : line;
    }
    printf("%-44s %8.1f us = %6.0f law evaluations (goal %6.0f); line %5.1f of it (goal 20)\n", s->name, 1e6 * steady,
           steady / law, s->steady_goal, line / steady);
    return 0;
}

int main(void) {
    const plw_diode silicon = plw_diode_silicon(), vacuum = plw_diode_vacuum(17, 0.225);
    const plw_filter_section choke = {8, 180, 47e-6}, resistor = {0, 1000, 47e-6};
    const subject subjects[] = {
        {"capacitor input, silicon",
         {.winding_rms_volts = 300, .path_ohms = 50, .mains_hertz = 50, .diode = silicon, .reservoir_farads = 60e-6},
         0.1,
         5000},
        {"capacitor input, vacuum",
         {.winding_rms_volts = 300, .path_ohms = 50, .mains_hertz = 50, .diode = vacuum, .reservoir_farads = 60e-6},
         0.1,
         5000},
        {"three sections, silicon",
         {.winding_rms_volts = 300,
          .path_ohms = 50,
          .mains_hertz = 50,
          .diode = silicon,
          .reservoir_farads = 60e-6,
          .sections = 3,
          .section = {choke, resistor, resistor}},
         0.06,
         20000},
        {"three sections, vacuum",
         {.winding_rms_volts = 300,
          .path_ohms = 50,
          .mains_hertz = 50,
          .diode = vacuum,
          .reservoir_farads = 60e-6,
          .sections = 3,
          .section = {choke, resistor, resistor}},
         0.06,
         20000},
        {"choke input and two sections, vacuum",
         {.winding_rms_volts = 350,
          .path_ohms = 50,
          .mains_hertz = 50,
          .diode = vacuum,
          .sections = 3,
          .section = {choke, resistor, resistor}},
         0.06,
         20000},
    };
    const double law = law_seconds();
    printf("one plate-law evaluation: %.0f ns\n", 1e9 * law);
    int failed = 0;
    for (size_t i = 0; i < sizeof subjects / sizeof subjects[0]; i++) {
        failed += measure(&subjects[i], law);
    }
    return failed == 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
