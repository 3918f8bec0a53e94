/* Test tubes and random, physically sensible stages with a fixed seed; the circuit's equations written down a second
 * time, apart from the library's.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_STAGES_H
#define TESTS_STAGES_H

#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "platewright/stage.h"

#define UNKNOWN ((double)NAN)

/* ---- laws by coefficient name ------------------------------------------------------------------------------------ */

typedef struct {
    const char *name;
    double value;
} named_value;

/* Every coefficient must be given, and no other. */
static inline plw_law law_of(plw_law_kind kind, const named_value *values, size_t count) {
    plw_law law = {.kind = kind};
    size_t used = 0;
    for (size_t index = 0; index < plw_law_coefficient_count(kind); index++) {
        bool found = false;
        for (size_t given = 0; given < count; given++) {
            if (strcmp(values[given].name, plw_law_coefficient_name(kind, index)) == 0) {
                law.coefficient[index] = values[given].value;
                found = true;
                used++;
            }
        }
        if (!found) {
            fprintf(stderr, "test law lacks coefficient %s\n", plw_law_coefficient_name(kind, index));
            abort();
        }
    }
    if (used != count) {
        fprintf(stderr, "test law has a coefficient that the law does not know\n");
        abort();
    }
    return law;
}

static inline double *coefficient_of(plw_law *law, const char *name) {
    for (size_t index = 0; index < plw_law_coefficient_count(law->kind); index++) {
        if (strcmp(plw_law_coefficient_name(law->kind, index), name) == 0) {
            return &law->coefficient[index];
        }
    }
    fprintf(stderr, "no coefficient %s\n", name);
    abort();
}

static inline plw_law triode_law(double mu, double exponent, double kg1, double kp, double kvb) {
    const named_value values[] = {{"mu", mu},   {"exponent", exponent}, {"kg1", kg1},        {"kp", kp},
                                  {"kvb", kvb}, {"contact-volts", 0.0}, {"foot-growth", 1.0}};
    return law_of(PLW_LAW_TRIODE, values, sizeof values / sizeof values[0]);
}

/* Ip = perveance (Vg + Vp/mu)^exponent: kp so large that no foot is left, no kvb. */
static inline plw_law power_law(double mu, double perveance, double exponent) {
    return triode_law(mu, exponent, 2.0 / perveance, 1e8, 0.0);
}

/* Triodes of the table in N. Koren, "Improved Vacuum Tube Models for SPICE Simulations", Glass Audio 8(5), 1996, p. 18,
 * as corrected by its author; for a current of 2 E1^x / kg1, and no contact potential. */
enum { KOREN_6DJ8, KOREN_12AT7, KOREN_12AU7, KOREN_12AX7, KOREN_2A3, KOREN_300B, KOREN_6C33C, KOREN_TRIODES };

static inline plw_law koren_triode(int which) {
    static const double table[KOREN_TRIODES][5] = {
        {28, 1.3, 330, 320, 300},  {60, 1.35, 460, 300, 300},  {21.5, 1.3, 1180, 84, 300}, {100, 1.4, 1060, 600, 300},
        {4.2, 1.4, 1500, 60, 300}, {3.95, 1.4, 1550, 65, 300}, {3.1, 1.4, 163, 15, 300}};
    const double *row = table[which];
    return triode_law(row[0], row[1], row[2], row[3], row[4]);
}

/* Pentodes and beam tubes of invented, usual shape: small, steep, large. */
enum { TEST_BEAM_SMALL, TEST_PENTODE_STEEP, TEST_BEAM_LARGE, TEST_PENTODE_LARGE, TEST_PENTODES };

static inline plw_law pentode_law(int which) {
    static const double table[TEST_PENTODES][9] = {
        /* mu, exponent, kg1, kp, penetration, knee, division, capture, contact-volts */
        {9.5, 1.4, 1620, 42, 0.010, 0.9, 10, 0.30, 0.0},
        {18.7, 1.35, 690, 95, 0.006, 1.2, 8.7, 0.38, 0.3},
        {8.7, 1.38, 1130, 45, 0.012, 0.7, 14.4, 0.25, 0.0},
        {10.9, 1.42, 1010, 55, 0.008, 1.0, 6.7, 0.35, -0.2},
    };
    const double *c = table[which];
    const named_value values[] = {{"mu", c[0]},       {"exponent", c[1]},    {"kg1", c[2]},
                                  {"kp", c[3]},       {"penetration", c[4]}, {"knee", c[5]},
                                  {"division", c[6]}, {"capture", c[7]},     {"contact-volts", c[8]}};
    return law_of(PLW_LAW_PENTODE, values, sizeof values / sizeof values[0]);
}

/* ---- tubes ------------------------------------------------------------------------------------------------------- */

/* Points into itself: do not copy. */
typedef struct {
    plw_tube tube;
    plw_ratings ratings[2];
    char type[24];
    char service[24];
} test_tube;

static inline plw_ratings no_ratings(char *service) {
    return (plw_ratings){
        .service = service,
        .plate_volts = UNKNOWN,
        .screen_volts = UNKNOWN,
        .plate_watts = UNKNOWN,
        .screen_watts = UNKNOWN,
        .screen_watts_full_drive = UNKNOWN,
        .total_watts = UNKNOWN,
        .cathode_amps = UNKNOWN,
        .grid_ohms_fixed_bias = UNKNOWN,
        .grid_ohms_cathode_bias = UNKNOWN,
        .heater_cathode_volts = UNKNOWN,
    };
}

static inline void make_tube(test_tube *made, plw_law law) {
    memset(made, 0, sizeof *made);
    snprintf(made->type, sizeof made->type, "test tube");
    snprintf(made->service, sizeof made->service, "class A1");
    made->ratings[0] = no_ratings(made->service);
    made->ratings[1] = no_ratings(made->service);
    made->tube.type = made->type;
    made->tube.kind = law.kind == PLW_LAW_TRIODE ? PLW_KIND_TRIODE : PLW_KIND_PENTODE;
    made->tube.ratings = made->ratings;
    made->tube.ratings_count = 1;
    made->tube.has_model = true;
    made->tube.model.law = law;
}

static inline plw_supply stiff(double volts) {
    plw_supply supply;
    if (plw_supply_stiff(volts, &supply, NULL) != PLW_OK) {
        abort();
    }
    return supply;
}

/* One tube on a stiff supply, with the load and bias given; the other of resistor and fixed bias NaN. */
static inline plw_stage simple_stage(const test_tube *tube, double supply_volts, double load_ohms,
                                     double cathode_resistor_ohms, double fixed_bias_volts) {
    plw_stage stage = plw_stage_ideal();
    stage.tube = &tube->tube;
    stage.supply = stiff(supply_volts);
    stage.load_ohms = load_ohms;
    stage.cathode_resistor_ohms = cathode_resistor_ohms;
    stage.fixed_bias_volts = fixed_bias_volts;
    return stage;
}

/* ---- random numbers (splitmix64: S. Vigna, 2015, public domain) -------------------------------------------------- */

typedef struct {
    uint64_t state;
} random_source;

static inline double random_part(random_source *source) {
    uint64_t z = (source->state += 0x9e3779b97f4a7c15u);
    z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
    z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
    return (double)((z ^ (z >> 31)) >> 11) * 0x1p-53;
}

static inline double random_between(random_source *source, double least, double most) {
    return least + (most - least) * random_part(source);
}

static inline double random_ratio(random_source *source, double least, double most) {
    return least * pow(most / least, random_part(source));
}

static inline bool random_chance(random_source *source, double chance) {
    return random_part(source) < chance;
}

static inline int random_below(random_source *source, int count) {
    return (int)(random_part(source) * count);
}

/* ---- random stages ----------------------------------------------------------------------------------------------- */

static inline plw_law random_law(random_source *r) {
    plw_law law = random_chance(r, 0.4) ? koren_triode(random_below(r, KOREN_TRIODES))
                                        : pentode_law(random_below(r, TEST_PENTODES));
    for (size_t index = 0; index < plw_law_coefficient_count(law.kind); index++) {
        const bool exponent = strcmp(plw_law_coefficient_name(law.kind, index), "exponent") == 0;
        law.coefficient[index] *= exponent ? random_between(r, 0.95, 1.1) : random_ratio(r, 0.8, 1.25);
    }
    *coefficient_of(&law, "contact-volts") = random_chance(r, 0.5) ? random_between(r, -0.3, 0.8) : 0.0;
    return law;
}

static inline plw_supply random_supply(random_source *r, unsigned tubes) {
    const double volts = random_ratio(r, 90.0, 500.0);
    plw_supply supply = stiff(volts);
    const int kind = random_below(r, 3);
    plw_status status = PLW_OK;
    if (kind == 1) {
        status = plw_supply_source(volts, random_ratio(r, 20.0, 3000.0) / tubes, &supply, NULL);
    } else if (kind == 2) {
        /* The source resistance falls as the current rises, as behind a reservoir; the last reading lies beyond what
         * any of these stages can draw. */
        plw_reading reading[4] = {{volts, 0.0}};
        static const double amps[3] = {0.015, 0.05, 4.0}, ohms[3] = {900.0, 500.0, 25.0};
        for (int index = 0; index < 3; index++) {
            reading[index + 1].amps = amps[index] * tubes * random_between(r, 0.8, 1.2);
            const double step_amps = reading[index + 1].amps - reading[index].amps;
            reading[index + 1].volts =
                reading[index].volts - step_amps * ohms[index] / tubes * volts / 500.0 * random_between(r, 0.2, 1.0);
        }
        status = plw_supply_readings(reading, 4, &supply, NULL);
    }
    if (status != PLW_OK) {
        abort();
    }
    return supply;
}

static inline void random_screen(random_source *r, plw_stage *stage, double volts) {
    const int connection = random_below(r, 4);
    if (connection == 0) {
        stage->connection = PLW_CONNECTION_TRIODE;
    } else if (connection == 1) {
        stage->connection = PLW_CONNECTION_ULTRALINEAR;
        stage->tap = random_between(r, 0.1, 0.6);
    } else if (random_chance(r, 0.35)) {
        stage->screen_supply_volts = fmax(volts * random_between(r, 0.5, 1.05), 15.0);
    }
    if (random_chance(r, 0.4)) {
        stage->screen_resistor_ohms = random_ratio(r, 47.0, 10e3);
        stage->screen_bypassed = random_chance(r, 0.5);
    }
}

/* Bias at a share of what would cut the tube off; as a resistor, the one that gives it at the supply's voltage. */
static inline void random_bias(random_source *r, plw_stage *stage, plw_law *law, double volts) {
    const bool own = isfinite(stage->screen_supply_volts);
    const double control_volts = own ? stage->screen_supply_volts : volts;
    double bias = -random_between(r, 0.1, 0.8) * control_volts / *coefficient_of(law, "mu");
    plw_currents c;
    plw_law_evaluate(law, volts, control_volts, bias, &c);
    while (volts * (c.plate_amps + c.screen_amps) > 150.0) { /* no tube of these sizes is run hotter */
        bias *= 1.1;
        plw_law_evaluate(law, volts, control_volts, bias, &c);
    }
    if (random_chance(r, 0.25)) {
        stage->fixed_bias_volts = bias;
        return;
    }
    stage->resistor_each = stage->parallel > 1 && random_chance(r, 0.3);
    const double amps = (c.plate_amps + c.screen_amps) * (stage->resistor_each ? 1.0 : stage->parallel);
    stage->cathode_resistor_ohms = fmin(fmax(-bias / fmax(amps, 1e-5), 1.0), 1e5);
    stage->unbypassed = random_chance(r, 0.25);
}

static inline void random_stage(random_source *r, test_tube *tube, plw_stage *stage) {
    make_tube(tube, random_law(r));
    plw_law *law = &tube->tube.model.law;
    *stage = plw_stage_ideal();
    stage->tube = &tube->tube;
    stage->parallel = random_chance(r, 0.3) ? 2 + (unsigned)random_below(r, 3) : 1;
    stage->supply = random_supply(r, stage->parallel);
    const double volts = stage->supply.volts;
    stage->load_ohms = random_ratio(r, 600.0, 20e3) / stage->parallel;
    if (random_chance(r, 0.6)) {
        stage->speaker_ohms = random_chance(r, 0.5) ? 8.0 : 15.0;
        stage->ratio = sqrt(stage->load_ohms / stage->speaker_ohms);
        stage->secondary_ohms = random_chance(r, 0.7) ? random_between(r, 0.05, 1.0) : 0.0;
    }
    stage->primary_ohms = random_chance(r, 0.7) ? stage->load_ohms * random_between(r, 0.01, 0.12) : 0.0;
    stage->other_amps = random_chance(r, 0.3) ? random_between(r, 0.5e-3, 15e-3) : 0.0;
    if (law->kind == PLW_LAW_PENTODE) {
        random_screen(r, stage, volts);
    }
    random_bias(r, stage, law, volts);
    if (random_chance(r, 0.4)) {
        const double cut_off_volts = volts / *coefficient_of(law, "mu");
        stage->drive_peak_volts = cut_off_volts * random_between(r, 0.02, 1.3);
    }
}

static inline const char *stage_text(const plw_stage *s, char *text, size_t size) {
    snprintf(text, size,
             "law %d conn %d tap %.3g N %u supply kind %d %.4g V other %.3g load %.4g r1 %.3g r2 %.3g Rk %.4g each %d "
             "unbyp %d fixed %.4g Vscr %.4g Rscr %.4g byp %d drive %.4g",
             (int)s->tube->model.law.kind, (int)s->connection, s->tap, s->parallel, (int)s->supply.kind,
             s->supply.volts, s->other_amps, s->load_ohms, s->primary_ohms, s->secondary_ohms, s->cathode_resistor_ohms,
             s->resistor_each, s->unbypassed, s->fixed_bias_volts, s->screen_supply_volts, s->screen_resistor_ohms,
             s->screen_bypassed, s->drive_peak_volts);
    return text;
}

/* ---- the circuit's equations ------------------------------------------------------------------------------------- */

/* Voltages to chassis in a circuit of N equal tubes, each of which carries plate_amps and screen_amps now, and
 * mean_plate and mean_screen on the average.  At rest both are the same. */
typedef struct {
    double supply, plate, screen, cathode, grid;
} node_volts;

static inline double screen_turns(const plw_stage *s) {
    if (s->tube->model.law.kind == PLW_LAW_TRIODE || s->connection == PLW_CONNECTION_PENTODE) {
        return 0.0;
    }
    return s->connection == PLW_CONNECTION_TRIODE ? 1.0 : s->tap;
}

/* The load behind the transformer's turns: speaker and secondary copper. */
static inline double reflected_ohms(const plw_stage *s) {
    return s->load_ohms + (s->secondary_ohms > 0.0 ? s->secondary_ohms * s->ratio * s->ratio : 0.0);
}

static inline node_volts circuit_volts(const plw_stage *s, double plate_amps, double screen_amps, double mean_plate,
                                       double mean_screen, double signal_volts) {
    const double tubes = s->parallel;
    const double turns = screen_turns(s);
    const bool own = isfinite(s->screen_supply_volts);
    node_volts v;
    double ignored;
    plw_supply_at(&s->supply, s->other_amps + tubes * mean_plate + (own ? 0.0 : tubes * mean_screen), &v.supply,
                  &ignored);
    /* What the transformer induces across its whole primary follows the change of ampere-turns. */
    const double induced =
        reflected_ohms(s) * tubes * ((plate_amps - mean_plate) + turns * (screen_amps - mean_screen));
    /* Copper of the turns between supply and tap carries both currents, that beyond the plate's alone. */
    const double tap_copper = turns * s->primary_ohms * tubes * (plate_amps + screen_amps);
    const double plate_copper = (1.0 - turns) * s->primary_ohms * tubes * plate_amps;
    if (turns > 0.0) {
        v.plate = v.supply - induced - tap_copper - plate_copper;
        v.screen = v.supply - turns * induced - tap_copper;
    } else {
        v.plate = v.supply - induced - s->primary_ohms * tubes * plate_amps;
        v.screen = own ? s->screen_supply_volts : v.supply;
    }
    v.screen -= s->screen_resistor_ohms * (s->screen_bypassed ? mean_screen : screen_amps);
    v.cathode = 0.0;
    if (isfinite(s->cathode_resistor_ohms)) {
        const double sharing = s->resistor_each ? 1.0 : tubes;
        const double amps = s->unbypassed ? plate_amps + screen_amps : mean_plate + mean_screen;
        v.cathode = s->cathode_resistor_ohms * sharing * amps;
    }
    v.grid = (isfinite(s->fixed_bias_volts) ? s->fixed_bias_volts : 0.0) + signal_volts;
    return v;
}

#endif
