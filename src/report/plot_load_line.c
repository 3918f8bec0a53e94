/* The load line on the plate family: limits, point of rest, swing at full drive.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "report/fields.h"
#include "report/plot_stage.h"
#include "stage/circuit.h"

/* The line is shown to both axes unless that would leave the tube in a corner of the picture. */
#define VOLTS_MOST_OF_REST 2.5
#define AMPS_MOST_OF_REST 3.2
#define PI 3.14159265358979323846

enum { PARTS_OF_STEP = 4 }; /* points of the swing between two solved instants */

typedef struct {
    plw_frame frame;
    double rest_volts, rest_amps;
    double load_ohms;   /* what one tube sees */
    double copper_ohms; /* in the way of direct current */
    double rated_volts, rated_watts;
    double drawn_watts; /* the same limit in the current that is drawn */
    bool has_dissipation, has_rated_volts, has_path;
} picture;

/* Where no limit is printed for the triode connection, the plate's own holds for its share of the current drawn. */
static double drawn_watts(const plw_answer *answer, const plw_ratings *ratings) {
    const plw_quiescent *rest = &answer->option->quiescent;
    if (ratings == NULL) {
        return (double)NAN;
    }
    if (ratings->connection == PLW_CONNECTION_TRIODE || !plw_stage_currents_together(answer->stage)) {
        return ratings->plate_watts;
    }
    return ratings->plate_watts * (rest->plate_amps + rest->screen_amps) / rest->plate_amps;
}

static picture compose(const plw_answer *answer) {
    const plw_stage *stage = answer->stage;
    const plw_quiescent *rest = &answer->option->quiescent;
    const plw_signal *signal = &answer->option->signal;
    const plw_ratings *ratings = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    plw_circuit circuit;
    plw_circuit_prepare(stage, &circuit);
    picture p = {
        .rest_volts = rest->plate_volts,
        .rest_amps = plw_drawn_amps(answer, rest->plate_amps, rest->screen_amps),
        .load_ohms = circuit.feed.ohms[PLW_AT_PLATE][PLW_OF_PLATE],
        .copper_ohms = circuit.primary_ohms,
        .rated_volts = ratings == NULL ? (double)NAN : ratings->plate_volts,
        .rated_watts = ratings == NULL ? (double)NAN : ratings->plate_watts,
        .drawn_watts = drawn_watts(answer, ratings),
        .has_path = plw_has_path(answer),
    };
    const double volts_at_zero = p.rest_volts + p.rest_amps * p.load_ohms;
    const double amps_at_zero = p.rest_amps + p.rest_volts / p.load_ohms;
    double volts = fmin(volts_at_zero, VOLTS_MOST_OF_REST * p.rest_volts);
    double amps = fmin(1.05 * amps_at_zero, AMPS_MOST_OF_REST * p.rest_amps);
    if (p.rated_volts <= VOLTS_MOST_OF_REST * p.rest_volts) {
        volts = fmax(volts, 1.05 * p.rated_volts);
    }
    for (size_t i = 0; p.has_path && i < PLW_PATH_POINTS; i++) {
        volts = fmax(volts, signal->path_plate_volts[i]);
        amps = fmax(amps, 1.05 * plw_drawn_amps(answer, signal->path_plate_amps[i], signal->path_screen_amps[i]));
    }
    p.frame.volts = plw_scale_for(0.0, 1.02 * volts, 6);
    p.frame.milliamps = plw_scale_for(0.0, 1e3 * amps, 6);
    p.has_rated_volts = p.rated_volts <= p.frame.volts.most;
    return p;
}

/* A straight line through the point of rest that falls 1 V for each ampere times ohms, inside the frame. */
static void falling_line(FILE *file, const picture *p, const char *name, double ohms) {
    const double right = fmin(p->rest_volts + ohms * p->rest_amps, p->frame.volts.most);
    const double top = 1e-3 * p->frame.milliamps.most;
    const double left = fmax(0.0, p->rest_volts - ohms * (top - p->rest_amps));
    plw_script_line_block(file, name, left, 1e3 * (p->rest_amps + (p->rest_volts - left) / ohms), right,
                          1e3 * (p->rest_amps - (right - p->rest_volts) / ohms));
}

/* A quantity between the solved instants, which lie at the cosines of equal phases: the polynomial through all of them,
 * in its barycentric form (J.-P. Berrut, L. N. Trefethen, SIAM Review 46(3), 2004, p. 501), but nowhere beyond the solved
 * ones: where the drive clips it would swing a little past them. */
static double at_phase(const double path[PLW_PATH_POINTS], double phase) {
    double above = 0.0;
    double below = 0.0;
    double least = path[0];
    double most = path[0];
    for (size_t i = 0; i < PLW_PATH_POINTS; i++) {
        const double from = cos(phase) - cos(PI * (double)i / (PLW_PATH_POINTS - 1));
        if (fabs(from) < 1e-12) {
            return path[i];
        }
        const double end = i == 0 || i == PLW_PATH_POINTS - 1 ? 0.5 : 1.0;
        const double weight = (i % 2 == 0 ? end : -end) / from;
        above += weight * path[i];
        below += weight;
        least = fmin(least, path[i]);
        most = fmax(most, path[i]);
    }
    return fmin(fmax(above / below, least), most);
}

static void path_blocks(FILE *file, const plw_answer *answer) {
    const plw_signal *signal = &answer->option->signal;
    enum { STEPS = PARTS_OF_STEP * (PLW_PATH_POINTS - 1) };
    fputs("$swing << EOD\n", file);
    for (int step = 0; step <= STEPS; step++) {
        const double phase = PI * step / STEPS;
        plw_script_point(file, at_phase(signal->path_plate_volts, phase),
                         1e3 * plw_drawn_amps(answer, at_phase(signal->path_plate_amps, phase),
                                              at_phase(signal->path_screen_amps, phase)));
    }
    fputs("EOD\n", file);
    /* From the end of the swing down to the scale, where the peak is read. */
    const size_t last = PLW_PATH_POINTS - 1;
    const double amps = plw_drawn_amps(answer, signal->path_plate_amps[last], signal->path_screen_amps[last]);
    plw_script_line_block(file, "peak", signal->path_plate_volts[last], 1e3 * amps, signal->path_plate_volts[last],
                          0.0);
}

static void blocks(FILE *file, picture *p, const plw_answer *answer) {
    const plw_quiescent *rest = &answer->option->quiescent;
    const plw_plate_family family = plw_stage_family(answer);
    double grid_most = 0.0;
    for (size_t i = 0; p->has_path && i < PLW_PATH_POINTS; i++) {
        grid_most = fmax(grid_most, answer->option->signal.path_grid_volts[i]);
    }
    if (grid_most < 0.05 * fabs(rest->grid_volts)) {
        grid_most = 0.0;
    }
    plw_family_block(file, &p->frame, &family, 2.0 * rest->grid_volts, grid_most);
    p->has_dissipation = plw_dissipation_block(file, &p->frame, p->drawn_watts);
    if (p->has_rated_volts) {
        plw_script_line_block(file, "rated", p->rated_volts, 0.0, p->rated_volts, p->frame.milliamps.most);
    }
    falling_line(file, p, "load", p->load_ohms);
    if (p->copper_ohms > 0.0) {
        falling_line(file, p, "copper", p->copper_ohms);
    }
    if (p->has_path) {
        path_blocks(file, answer);
    }
    fputs("$rest << EOD\n", file);
    plw_script_point(file, p->rest_volts, 1e3 * p->rest_amps);
    fputs("EOD\n", file);
}

/* ---- the key ----------------------------------------------------------------------------------------------------- */

enum { ENTRY_SIZE = 160 };

static void next(FILE *file) {
    fputs(", \\\n     ", file);
}

static void tube_entries(FILE *file, const picture *p, const plw_answer *answer) {
    const plw_plate_family family = plw_stage_family(answer);
    char text[ENTRY_SIZE] = "plate curves by grid volts";
    char value[48];
    if (family.law->kind == PLW_LAW_PENTODE && family.tap == 0.0) {
        snprintf(text, sizeof text, "plate curves by grid volts, screen %s",
                 plw_script_value(family.screen_volts, PLW_UNIT_VOLT, 3, value, sizeof value));
    }
    plw_plot_line(file, "curves", PLW_INK_CURVE, text);
    if (p->has_dissipation) {
        next(file);
        snprintf(text, sizeof text,
                 p->drawn_watts > p->rated_watts ? "rated dissipation, %s on the plate alone" : "rated dissipation, %s",
                 plw_script_value(p->rated_watts, PLW_UNIT_WATT, 3, value, sizeof value));
        plw_plot_line(file, "dissipation", PLW_INK_RATING, text);
    }
    if (p->has_rated_volts) {
        next(file);
        snprintf(text, sizeof text, "rated plate volts, %s",
                 plw_script_value(p->rated_volts, PLW_UNIT_VOLT, 3, value, sizeof value));
        plw_plot_line(file, "rated", PLW_INK_RATING_TOO, text);
    }
}

static void swing_entries(FILE *file, const picture *p, const plw_answer *answer) {
    const plw_signal *signal = &answer->option->signal;
    char text[ENTRY_SIZE];
    char value[48];
    if (p->copper_ohms > 0.0) {
        next(file);
        snprintf(text, sizeof text, "direct current's line, %s of copper",
                 plw_script_value(p->copper_ohms, PLW_UNIT_OHM, 3, value, sizeof value));
        plw_plot_line(file, "copper", PLW_INK_COPPER, text);
    }
    next(file);
    snprintf(text, sizeof text, "load line, %s", plw_script_value(p->load_ohms, PLW_UNIT_OHM, 3, value, sizeof value));
    plw_plot_line(file, "load", PLW_INK_LOAD, text);
    if (p->has_path) {
        next(file);
        fputs("$peak using 1:2 with lines linecolor rgb '#c2360c' dashtype (3,3) linewidth 1 notitle", file);
        next(file);
        const double most = signal->path_plate_volts[PLW_PATH_POINTS - 1];
        snprintf(text, sizeof text, "swing at %s drive, up to %s",
                 signal->limit == PLW_DRIVE_GIVEN ? "the given" : "full",
                 plw_script_value(most, PLW_UNIT_VOLT, 3, value, sizeof value));
        plw_plot_line(file, "swing", PLW_INK_SWING, text);
    }
    next(file);
    char amps[48];
    char grid[48];
    snprintf(text, sizeof text, "at rest: %s, %s, grid %s",
             plw_script_value(p->rest_volts, PLW_UNIT_VOLT, 3, value, sizeof value),
             plw_script_value(p->rest_amps, PLW_UNIT_AMPERE, 3, amps, sizeof amps),
             plw_script_value(answer->option->quiescent.grid_volts, PLW_UNIT_VOLT, 3, grid, sizeof grid));
    plw_plot_mark(file, "rest", 7, 1.5, "#10171e", text);
    fputc('\n', file);
}

void plw_plot_load_line(FILE *file, const plw_answer *answer) {
    picture p = compose(answer);
    plw_plot_title(file, answer);
    plw_plot_key(file);
    plw_script_axis(file, 'x', &p.frame.volts, "plate to cathode, V");
    plw_script_axis(file, 'y', &p.frame.milliamps,
                    plw_stage_currents_together(answer->stage) ? "plate and screen current, mA" : "plate current, mA");
    blocks(file, &p, answer);
    fputs("plot ", file);
    tube_entries(file, &p, answer);
    swing_entries(file, &p, answer);
}
