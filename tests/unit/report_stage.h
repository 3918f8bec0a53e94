/* A solved stage for the tests of the reports: a made-up tube in a made-up circuit.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_UNIT_REPORT_STAGE_H
#define TESTS_UNIT_REPORT_STAGE_H

#include <stdio.h>
#include <string.h>

#include "near.h"
#include "platewright/report.h"

/* Coefficients near those of a small output pentode and of a power triode, by name; nothing here depends on their
 * values. */
static inline plw_law made_up_law(plw_law_kind kind) {
    static const struct {
        const char *name;
        double pentode, triode;
    } table[] = {{"mu", 19.5, 3.95},   {"exponent", 1.35, 1.4}, {"kg1", 400, 1500},   {"kp", 100, 65},
                 {"kvb", 1, 300},      {"capture", 0.4, 1},     {"knee", 1.9, 1},     {"penetration", 0.004, 1},
                 {"division", 8.5, 1}, {"contact-volts", 0, 0}, {"foot-growth", 1, 1}};
    plw_law law = {.kind = kind};
    for (size_t i = 0; i < plw_law_coefficient_count(kind); i++) {
        law.coefficient[i] = 1.0;
        for (size_t k = 0; k < sizeof table / sizeof table[0]; k++) {
            if (strcmp(table[k].name, plw_law_coefficient_name(kind, i)) == 0) {
                law.coefficient[i] = kind == PLW_LAW_PENTODE ? table[k].pentode : table[k].triode;
            }
        }
    }
    plw_error error = {0};
    if (plw_law_validate(&law, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return law;
}

typedef struct {
    char type[200], source[32];
    plw_ratings ratings;
    plw_row rows[3];
    plw_point point;
    plw_tube tube;
    plw_stage stage;
    plw_bias_choice choice;
    plw_answer answer;
} solved_stage;

static inline void made_up_ratings(solved_stage *s, bool triode) {
    const double nan = (double)NAN;
    s->ratings = (plw_ratings){
        .connection = triode ? PLW_CONNECTION_TRIODE : PLW_CONNECTION_PENTODE,
        .plate_volts = triode ? 450 : 300,
        .screen_volts = triode ? nan : 300,
        .plate_watts = triode ? 40 : 12,
        .screen_watts = triode ? nan : 2,
        .screen_watts_full_drive = nan,
        .total_watts = nan,
        .cathode_amps = triode ? 0.1 : 0.065,
        .grid_ohms_fixed_bias = nan,
        .grid_ohms_cathode_bias = nan,
        .heater_cathode_volts = 100,
        .provenance = {.source = s->source},
    };
}

static inline plw_row made_up_row(double plate, double screen, double grid, double amps, char *source) {
    const double nan = (double)NAN;
    return (plw_row){
        .connection = PLW_CONNECTION_PENTODE,
        .plate_volts = plate,
        .screen_volts = screen,
        .grid_volts = grid,
        .cathode_resistor_ohms = nan,
        .plate_amps = amps,
        .screen_amps = nan,
        .provenance = {.source = source},
    };
}

/* A stage not yet solved: one pentode at 285 V into 5 kohm, or one triode at 425 V into 3 kohm. */
static inline void stage_begin(solved_stage *s, plw_law_kind kind) {
    const bool triode = kind == PLW_LAW_TRIODE;
    memset(s, 0, sizeof *s);
    snprintf(s->type, sizeof s->type, "%s", triode ? "TX-31" : "PX-84");
    snprintf(s->source, sizeof s->source, "made up");
    made_up_ratings(s, triode);
    s->rows[0] = made_up_row(247.3, 251.2, -7.3, 0.0491, s->source);
    s->rows[1] = made_up_row(251.9, 211.4, -6.4, 0.0352, s->source);
    s->rows[2] = made_up_row(183.1, 251.2, -8.9, 0.0327, s->source);
    s->rows[2].provenance.confidence = PLW_CONFIDENCE_LOW;
    s->tube = (plw_tube){.type = s->type,
                         .kind = triode ? PLW_KIND_TRIODE : PLW_KIND_PENTODE,
                         .ratings = &s->ratings,
                         .ratings_count = 1,
                         .rows = s->rows,
                         .rows_count = 3,
                         .has_model = true,
                         .model = {.law = made_up_law(kind),
                                   .fit_error = {1.87, 4.2, 2.3, 0.4},
                                   .left_out_error = {3.14, (double)NAN, 3.9, 0.5},
                                   .region = {100, 400, 100, 300, 0.01, 0.1}}};
    plw_error error = {0};
    s->stage = plw_stage_ideal();
    s->stage.tube = &s->tube;
    s->stage.variant = -1;
    s->stage.connection = triode ? PLW_CONNECTION_TRIODE : PLW_CONNECTION_PENTODE;
    s->stage.load_ohms = triode ? 3000 : 5000;
    assert_int_equal(plw_supply_stiff(triode ? 425 : 285, &s->stage.supply, &error), PLW_OK);
}

/* Choose the resistor and fill in the answer of `design`. */
static inline void stage_solve(solved_stage *s) {
    plw_error error = {0};
    const plw_aim aim = {PLW_AIM_DISSIPATION, PLW_AIM_DEFAULT_PERCENT};
    s->stage.cathode_resistor_ohms = (double)NAN;
    if (plw_stage_settle_load(&s->stage, &error) != PLW_OK ||
        plw_bias_choose(&s->stage, aim, PLW_E24, &s->choice, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    s->stage.cathode_resistor_ohms = s->choice.option[s->choice.chosen].ohms;
    s->answer = (plw_answer){
        .stage = &s->stage, .choice = &s->choice, .option = &s->choice.option[s->choice.chosen], .series = PLW_E24};
}

/* One tube, as stage_begin() has it, solved. */
static inline void solve_one(solved_stage *s, plw_law_kind kind) {
    stage_begin(s, kind);
    stage_solve(s);
}

/* Pentodes in parallel on a load, solved. */
static inline void solve_pentodes(solved_stage *s, unsigned tubes, double load_ohms) {
    stage_begin(s, PLW_LAW_PENTODE);
    s->stage.parallel = tubes;
    s->stage.load_ohms = load_ohms;
    stage_solve(s);
}

#endif
