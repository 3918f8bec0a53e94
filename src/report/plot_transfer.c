/* Currents against grid volts, and the line of the cathode resistor that meets them at the point of rest.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "report/fields.h"
#include "report/plot_stage.h"
#include "stage/circuit.h"

#define AMPS_MOST_OF_REST 3.2

typedef enum { OF_CATHODE, OF_PLATE, OF_SCREEN } which_current;

/* A current against grid volts, plate and screen held as at rest. */
typedef struct {
    const plw_answer *answer;
    which_current which;
} static_curve;

static double static_amps(const void *context, double grid_volts) {
    const static_curve *curve = context;
    const plw_quiescent *rest = &curve->answer->option->quiescent;
    const double screen_volts = isfinite(rest->screen_volts) ? rest->screen_volts : rest->plate_volts;
    plw_currents currents;
    plw_law_evaluate(&curve->answer->stage->tube->model.law, rest->plate_volts, screen_volts, grid_volts, &currents);
    switch (curve->which) {
    case OF_PLATE:
        return currents.plate_amps;
    case OF_SCREEN:
        return currents.screen_amps;
    case OF_CATHODE:
        break;
    }
    return currents.plate_amps + currents.screen_amps;
}

typedef struct {
    plw_frame frame; /* across: grid volts */
    double rest_grid_volts, rest_amps;
    double cathode_ohms; /* as one tube's current sees it; 0 with fixed bias */
    bool has_screen, has_path;
} picture;

static picture compose(const plw_answer *answer) {
    const plw_quiescent *rest = &answer->option->quiescent;
    const plw_signal *signal = &answer->option->signal;
    plw_circuit circuit;
    plw_circuit_prepare(answer->stage, &circuit);
    picture p = {
        .rest_grid_volts = rest->grid_volts,
        .rest_amps = rest->cathode_amps,
        .cathode_ohms = circuit.cathode_ohms,
        .has_screen = circuit.has_screen,
        .has_path = plw_has_path(answer),
    };
    double least = 2.0 * rest->grid_volts;
    double most = 0.0;
    double amps = 2.0 * rest->cathode_amps;
    for (size_t i = 0; p.has_path && i < PLW_PATH_POINTS; i++) {
        least = fmin(least, signal->path_grid_volts[i]);
        most = fmax(most, signal->path_grid_volts[i]);
        amps = fmax(amps, 1.1 * plw_drawn_amps(answer, signal->path_plate_amps[i], signal->path_screen_amps[i]));
    }
    if (most < 0.02 * fabs(rest->grid_volts)) {
        most = 0.0;
    }
    const static_curve cathode = {answer, OF_CATHODE};
    amps = fmax(amps, fmin(1.02 * static_amps(&cathode, most), AMPS_MOST_OF_REST * rest->cathode_amps));
    p.frame.volts = plw_scale_for(fmin(least, -1e-3), most, 8);
    p.frame.milliamps = plw_scale_for(0.0, 1e3 * amps, 6);
    return p;
}

static void curve_block(FILE *file, const picture *p, const plw_answer *answer, const char *name, which_current which) {
    const static_curve curve = {answer, which};
    plw_curve_end end = {0};
    fprintf(file, "$%s << EOD\n", name);
    if (!plw_curve_points(file, &p->frame, static_amps, &curve, p->frame.volts.least, p->frame.volts.most, &end)) {
        plw_script_point(file, p->frame.volts.least, 0.0);
        plw_script_point(file, p->frame.volts.most, 0.0);
    }
    fputs("EOD\n", file);
}

/* The resistor makes the grid as negative as the cathode current times its ohms; fixed bias holds it anywhere. */
static void bias_block(FILE *file, const picture *p) {
    const double top = p->frame.milliamps.most;
    if (p->cathode_ohms <= 0.0) {
        plw_script_line_block(file, "bias", p->rest_grid_volts, 0.0, p->rest_grid_volts, top);
        return;
    }
    const double volts = fmax(p->frame.volts.least, -1e-3 * top * p->cathode_ohms);
    plw_script_line_block(file, "bias", 0.0, 0.0, volts, -1e3 * volts / p->cathode_ohms);
}

static void blocks(FILE *file, const picture *p, const plw_answer *answer) {
    curve_block(file, p, answer, "cathode", OF_CATHODE);
    if (p->has_screen) {
        curve_block(file, p, answer, "plate", OF_PLATE);
        curve_block(file, p, answer, "screen", OF_SCREEN);
    }
    bias_block(file, p);
    if (p->has_path) {
        const plw_signal *signal = &answer->option->signal;
        fputs("$swing << EOD\n", file);
        for (size_t i = 0; i < PLW_PATH_POINTS; i++) {
            plw_script_point(file, signal->path_grid_volts[i],
                             1e3 * plw_drawn_amps(answer, signal->path_plate_amps[i], signal->path_screen_amps[i]));
        }
        fputs("EOD\n", file);
    }
    fputs("$rest << EOD\n", file);
    plw_script_point(file, p->rest_grid_volts, 1e3 * p->rest_amps);
    fputs("EOD\n", file);
}

static void next(FILE *file) {
    fputs(", \\\n     ", file);
}

static void curve_entries(FILE *file, const picture *p, const plw_answer *answer) {
    const plw_quiescent *rest = &answer->option->quiescent;
    char plate[48];
    char screen[48];
    char text[192];
    plw_script_value(rest->plate_volts, PLW_UNIT_VOLT, 3, plate, sizeof plate);
    if (!p->has_screen) {
        snprintf(text, sizeof text, "plate current with %s on the plate", plate);
        plw_plot_line(file, "cathode", PLW_INK_SECOND, text);
        return;
    }
    plw_script_value(rest->screen_volts, PLW_UNIT_VOLT, 3, screen, sizeof screen);
    snprintf(text, sizeof text, "cathode current, plate %s, screen %s", plate, screen);
    plw_plot_line(file, "cathode", PLW_INK_SECOND, text);
    next(file);
    plw_plot_line(file, "plate", PLW_INK_CURVE, "plate current at these volts");
    next(file);
    plw_plot_line(file, "screen", PLW_INK_THIRD, "screen current at these volts");
}

static void bias_entries(FILE *file, const picture *p, const plw_answer *answer) {
    char value[48];
    char amps[48];
    char text[192];
    next(file);
    if (p->cathode_ohms > 0.0) {
        snprintf(text, sizeof text, "cathode resistor, %s%s",
                 plw_script_value(p->cathode_ohms, PLW_UNIT_OHM, 4, value, sizeof value),
                 answer->stage->parallel > 1 && !answer->stage->resistor_each ? " as one tube sees it" : "");
    } else {
        snprintf(text, sizeof text, "fixed bias, %s",
                 plw_script_value(p->rest_grid_volts, PLW_UNIT_VOLT, 4, value, sizeof value));
    }
    plw_plot_line(file, "bias", PLW_INK_LOAD, text);
    if (p->has_path) {
        next(file);
        fputs("$swing using 1:2 smooth mcsplines with lines", file);
        plw_script_ink(file, PLW_INK_SWING);
        fputs(" title ", file);
        plw_script_quoted(file, plw_stage_currents_together(answer->stage) ? "plate and screen current under drive"
                                                                           : "plate current under drive");
    }
    next(file);
    snprintf(text, sizeof text, "at rest: grid %s, cathode %s",
             plw_script_value(p->rest_grid_volts, PLW_UNIT_VOLT, 3, value, sizeof value),
             plw_script_value(p->rest_amps, PLW_UNIT_AMPERE, 3, amps, sizeof amps));
    plw_plot_mark(file, "rest", 7, 1.5, "#10171e", text);
    fputc('\n', file);
}

void plw_plot_transfer(FILE *file, const plw_answer *answer) {
    const picture p = compose(answer);
    plw_plot_title(file, answer);
    plw_plot_key(file);
    plw_script_axis(file, 'x', &p.frame.volts, "grid to cathode, V");
    plw_script_axis(file, 'y', &p.frame.milliamps, "current, mA");
    blocks(file, &p, answer);
    fputs("plot ", file);
    curve_entries(file, &p, answer);
    bias_entries(file, &p, answer);
}
