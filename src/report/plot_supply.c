/* The plate supply: its regulation line with the bench readings, what the stage asks of it, and its waveforms.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "report/fields.h"
#include "report/plot_stage.h"

enum { LINE_SAMPLES = 81, DEMAND_SAMPLES = 41, INSTANTS = 361, ENTRY_SIZE = 160 };

/* The picture reaches this many times the current at rest, and a bit beyond every reading. */
#define AMPS_OF_REST 1.8
#define AMPS_OF_READING 1.15

typedef struct {
    const plw_answer *answer;
    const plw_supply *line;
    const plw_plate_supply *parts; /* NULL: not known */
    double rest_volts, rest_amps;
    double least_amps, most_amps; /* of the line drawn */
    plw_scale volts, milliamps;
    size_t readings;
    plw_reading reading[PLW_READINGS_MOST];
} picture;

static double line_volts(const plw_supply *line, double amps) {
    double volts;
    double ohms;
    plw_supply_at(line, amps, &volts, &ohms);
    return volts;
}

static void gather_readings(picture *p) {
    if (p->parts != NULL) {
        for (size_t i = 0; i < p->parts->readings; i++) {
            const plw_bench_reading *r = &p->parts->reading[i];
            p->reading[p->readings++] = (plw_reading){r->volts, r->ohms > 0 ? r->volts / r->ohms : r->amps};
        }
    } else if (p->line->kind == PLW_SUPPLY_READINGS) {
        for (size_t i = 0; i < p->line->points && i < PLW_READINGS_MOST; i++) {
            p->reading[p->readings++] = p->line->point[i];
        }
    }
}

static picture compose(const plw_answer *answer) {
    const plw_quiescent *rest = &answer->option->quiescent;
    picture p = {.answer = answer,
                 .line = &answer->stage->supply,
                 .parts = answer->supply == NULL ? NULL : answer->supply->supply,
                 .rest_volts = rest->supply_volts,
                 .rest_amps = rest->supply_amps};
    gather_readings(&p);
    double amps = AMPS_OF_REST * p.rest_amps;
    double most = rest->supply_volts;
    double least = most;
    for (size_t i = 0; i < p.readings; i++) {
        amps = fmax(amps, AMPS_OF_READING * p.reading[i].amps);
        most = fmax(most, p.reading[i].volts);
        least = fmin(least, p.reading[i].volts);
    }
    plw_supply_range(p.line, &p.least_amps, &p.most_amps);
    p.milliamps = plw_scale_for(0.0, 1e3 * amps, 6);
    p.most_amps = fmin(p.most_amps, 1e-3 * p.milliamps.most);
    most = fmax(most, line_volts(p.line, p.least_amps));
    if (p.line->kind != PLW_SUPPLY_STIFF) {
        most = fmax(most, PLW_MAINS_HIGH_PERCENT / 100.0 * line_volts(p.line, p.least_amps));
    }
    least = fmin(least, line_volts(p.line, p.most_amps));
    if (p.line->kind != PLW_SUPPLY_STIFF) { /* the line with the mains low, down to its end */
        const plw_supply low = plw_supply_at_mains(p.line, PLW_MAINS_LOW_PERCENT);
        least = fmin(least, line_volts(&low, p.most_amps));
    }
    const double room = fmax(0.03 * (most - least), 0.01 * most);
    const double step = plw_round_step((most - least + 2.0 * room) / 5.0);
    p.volts = (plw_scale){step * floor((least - room) / step), step * ceil((most + room) / step), step};
    return p;
}

/* ---- the regulation line ----------------------------------------------------------------------------------------- */

static void line_block(FILE *file, const picture *p, const char *name, const plw_supply *line) {
    fprintf(file, "$%s << EOD\n", name);
    for (int i = 0; i < LINE_SAMPLES; i++) {
        /* Closer together near no load, where the line is steep. */
        const double share = (double)i / (LINE_SAMPLES - 1);
        const double amps = p->least_amps + (p->most_amps - p->least_amps) * share * share;
        const double volts = line_volts(line, amps);
        if (volts >= p->volts.least && volts <= p->volts.most) {
            plw_script_point(file, 1e3 * amps, volts);
        }
    }
    fputs("EOD\n", file);
}

/* What the stage draws at a supply voltage, whatever gives it. */
static bool demand_block(FILE *file, const picture *p) {
    bool some = false;
    fputs("$demand << EOD\n", file);
    for (int i = 0; i < DEMAND_SAMPLES; i++) {
        const double volts = p->volts.least + (p->volts.most - p->volts.least) * i / (DEMAND_SAMPLES - 1);
        plw_stage trial = *p->answer->stage;
        plw_quiescent q;
        if (plw_supply_stiff(volts, &trial.supply, NULL) == PLW_OK && plw_quiescent_solve(&trial, &q, NULL) == PLW_OK &&
            1e3 * q.supply_amps <= p->milliamps.most) {
            plw_script_point(file, 1e3 * q.supply_amps, volts);
            some = true;
        }
    }
    fputs("EOD\n", file);
    return some;
}

static void point_blocks(FILE *file, const picture *p) {
    if (p->readings > 0) {
        fputs("$readings << EOD\n", file);
        for (size_t i = 0; i < p->readings; i++) {
            plw_script_point(file, 1e3 * p->reading[i].amps, p->reading[i].volts);
        }
        fputs("EOD\n", file);
    }
    fputs("$rest << EOD\n", file);
    plw_script_point(file, 1e3 * p->rest_amps, p->rest_volts);
    fputs("EOD\n", file);
}

static void next(FILE *file) {
    fputs(", \\\n     ", file);
}

static void line_title(const picture *p, char text[ENTRY_SIZE]) {
    char ohms[48];
    if (p->parts != NULL && p->parts->estimated) {
        snprintf(text, ENTRY_SIZE, "supply, by the readings through its rectifier: %s in the path",
                 plw_script_value(p->parts->estimate.path_ohms, PLW_UNIT_OHM, 3, ohms, sizeof ohms));
    } else if (p->parts != NULL && p->parts->has_winding) {
        snprintf(text, ENTRY_SIZE, "supply, by its parts: %s in the path",
                 plw_script_value(p->parts->parts.path_ohms, PLW_UNIT_OHM, 3, ohms, sizeof ohms));
    } else {
        snprintf(text, ENTRY_SIZE, "supply%s", p->line->kind == PLW_SUPPLY_STIFF ? ", taken as stiff" : "");
    }
}

static void upper_panel(FILE *file, const picture *p, bool mains, bool demand) {
    char text[ENTRY_SIZE];
    char volts[48];
    char amps[48];
    plw_script_axis(file, 'x', &p->milliamps, "drawn from the supply, mA");
    plw_script_axis(file, 'y', &p->volts, "supply, V");
    fputs("plot ", file);
    if (mains) {
        plw_plot_line(file, "low", PLW_INK_COPPER, "mains 10 % low and high");
        next(file);
        plw_plot_line(file, "high", PLW_INK_COPPER, "");
        next(file);
    }
    line_title(p, text);
    plw_plot_line(file, "line", PLW_INK_SECOND, text);
    if (demand) {
        next(file);
        plw_plot_line(file, "demand", PLW_INK_LOAD, "what the stage draws");
    }
    if (p->readings > 0) {
        next(file);
        plw_plot_mark(file, "readings", 9, 1.9, "#c2360c",
                      p->readings == 1 ? "reading on the bench" : "readings on the bench");
    }
    next(file);
    snprintf(text, sizeof text, "at rest: %s, %s",
             plw_script_value(p->rest_volts, PLW_UNIT_VOLT, 3, volts, sizeof volts),
             plw_script_value(p->rest_amps, PLW_UNIT_AMPERE, 3, amps, sizeof amps));
    plw_plot_mark(file, "rest", 7, 1.5, "#10171e", text);
    fputc('\n', file);
}

/* ---- the waveforms ----------------------------------------------------------------------------------------------- */

/* Blocks $winding and $ripple0, $ripple1 ...  Out: extremes.  Ret: false without a solution. */
static bool wave_blocks(FILE *file, const plw_plate_supply *supply, double amps, plw_rectifier_state *state,
                        double *milliamps_most, double *ripple_most) {
    static const plw_rectifier_instant none;
    plw_rectifier_instant instants[INSTANTS] = {none};
    const plw_dc_load load = {.amps = amps};
    if (plw_rectifier_waveform(&supply->parts, load, instants, INSTANTS, state, NULL) != PLW_OK) {
        return false;
    }
    *milliamps_most = *ripple_most = 0.0;
    fputs("$winding << EOD\n", file);
    for (size_t i = 0; i < INSTANTS; i++) {
        plw_script_point(file, 1e3 * instants[i].seconds, 1e3 * instants[i].rectified_amps);
        *milliamps_most = fmax(*milliamps_most, 1e3 * instants[i].rectified_amps);
    }
    const double period = 1e3 / supply->parts.mains_hertz;
    plw_script_point(file, period, 1e3 * instants[0].rectified_amps);
    fputs("EOD\n", file);
    for (size_t k = 0; k < state->nodes && !supply->reservoir_assumed; k++) {
        fprintf(file, "$ripple%zu << EOD\n", k);
        for (size_t i = 0; i < INSTANTS; i++) {
            const double ripple = instants[i].node_volts[k] - state->node[k].volts;
            plw_script_point(file, 1e3 * instants[i].seconds, ripple);
            *ripple_most = fmax(*ripple_most, fabs(ripple));
        }
        plw_script_point(file, period, instants[0].node_volts[k] - state->node[k].volts);
        fputs("EOD\n", file);
    }
    return true;
}

static void ripple_entries(FILE *file, const plw_rectifier_state *state) {
    static const plw_ink inks[] = {PLW_INK_SECOND, PLW_INK_LOAD, PLW_INK_COPPER, PLW_INK_THIRD, PLW_INK_RATING};
    for (size_t k = 0; k < state->nodes && k < sizeof inks / sizeof inks[0]; k++) {
        char volts[48];
        char text[ENTRY_SIZE];
        snprintf(text, sizeof text, "capacitor %zu: %s of ripple", k + 1,
                 plw_script_value(state->node[k].ripple_peak_to_peak_volts, PLW_UNIT_VOLT, 2, volts, sizeof volts));
        next(file);
        fprintf(file, "$ripple%zu using 1:2 axes x1y2 with lines", k);
        plw_script_ink(file, inks[k]);
        fputs(" title ", file);
        plw_script_quoted(file, text);
    }
}

static void lower_panel(FILE *file, const picture *p, const plw_rectifier_state *state, double milliamps_most,
                        double ripple_most) {
    const double period = 1e3 / p->parts->parts.mains_hertz;
    const plw_scale time = {0.0, period, plw_round_step(period / 10.0)};
    const plw_scale amps = plw_scale_for(0.0, 1.05 * milliamps_most, 4);
    const bool ripple = !p->parts->reservoir_assumed && ripple_most > 0.0;
    plw_script_axis(file, 'x', &time, "one period of the mains, ms");
    plw_script_axis(file, 'y', &amps, "winding, mA");
    if (ripple) {
        const double step = plw_round_step(1.05 * ripple_most / 2.0);
        fputs("set y2range [", file);
        plw_script_number(file, -2.0 * step);
        fputs(":", file);
        plw_script_number(file, 2.0 * step);
        fputs("]\nset y2tics ", file);
        plw_script_number(file, step);
        fputs("\nset y2label 'ripple, V' textcolor rgb '#2b2b2b'\n", file);
    }
    fputs("plot ", file);
    char value[48];
    char text[ENTRY_SIZE];
    snprintf(text, sizeof text, "winding, rectified: peak %s",
             plw_script_value(state->diode_peak_amps, PLW_UNIT_AMPERE, 3, value, sizeof value));
    plw_plot_line(file, "winding", PLW_INK_SWING, text);
    if (ripple) {
        ripple_entries(file, state);
    }
    fputc('\n', file);
}

/* The upper picture on the whole page, or with room for the lower one. */
static void upper_place(FILE *file, bool waves) {
    fputs("set rmargin 9\nset lmargin 9\n", file);
    if (waves) {
        fputs("set multiplot\nset tmargin at screen 0.87\nset bmargin at screen 0.605\n"
              "set key at graph 0, screen 0.4 left bottom vertical maxrows 3 Left reverse samplen 3.2 spacing 1.2\n",
              file);
    } else {
        plw_plot_key(file);
    }
}

void plw_plot_supply(FILE *file, const plw_answer *answer) {
    picture p = compose(answer);
    plw_rectifier_state state;
    double milliamps_most = 0.0;
    double ripple_most = 0.0;
    const bool waves = p.parts != NULL && p.parts->has_winding &&
                       wave_blocks(file, p.parts, p.rest_amps, &state, &milliamps_most, &ripple_most);
    const bool mains = p.line->kind != PLW_SUPPLY_STIFF;
    plw_plot_title(file, answer);
    upper_place(file, waves);
    line_block(file, &p, "line", p.line);
    if (mains) {
        const plw_supply low = plw_supply_at_mains(p.line, PLW_MAINS_LOW_PERCENT);
        const plw_supply high = plw_supply_at_mains(p.line, PLW_MAINS_HIGH_PERCENT);
        line_block(file, &p, "low", &low);
        line_block(file, &p, "high", &high);
    }
    const bool demand = demand_block(file, &p);
    point_blocks(file, &p);
    upper_panel(file, &p, mains, demand);
    if (waves) {
        fputs("unset label\nset tmargin at screen 0.365\nset bmargin at screen 0.195\n"
              "set key at graph 0, screen 0.015 left bottom vertical maxrows 2 Left reverse samplen 3.2 spacing 1.2 "
              "width -3\n",
              file);
        lower_panel(file, &p, &state, milliamps_most, ripple_most);
        fputs("unset multiplot\n", file);
    }
}
