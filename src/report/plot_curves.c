/* Curves of a tube inside a frame, each cut where it leaves and marked at that end.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/plot_curves.h"

#include <math.h>

enum { CURVE_POINTS = 160, HYPERBOLA_POINTS = 80, FAMILY_MOST = 24 };

/* Parts of the frame: a curve below the first is the axis; labels nearer than the others would touch. */
#define CLEAR_OF_AXIS 0.006
#define LABEL_HEIGHT 0.037
#define LABEL_WIDTH 0.075

double plw_family_amps(const plw_plate_family *family, double plate_volts, double grid_volts) {
    const double screen_volts = family->screen_volts + family->tap * (plate_volts - family->plate_volts);
    plw_currents currents;
    plw_law_evaluate(family->law, plate_volts, screen_volts, grid_volts, &currents);
    return currents.plate_amps + (family->together ? currents.screen_amps : 0.0);
}

bool plw_curve_points(FILE *file, const plw_frame *frame, plw_curve_function function, const void *context, double from,
                      double to, plw_curve_end *end) {
    const double top = frame->milliamps.most;
    const double axis = CLEAR_OF_AXIS * top;
    double last_volts = from;
    double last = 1e3 * function(context, from);
    bool drawn = false;
    for (int k = 1; k <= CURVE_POINTS; k++) {
        /* Denser at the start, where the knee is. */
        const double volts = from + (to - from) * pow((double)k / CURVE_POINTS, 1.5);
        const double milliamps = 1e3 * function(context, volts);
        if (!drawn && milliamps > axis * 0.2) {
            plw_script_point(file, last_volts, last);
            drawn = true;
        }
        if (milliamps > top) {
            const double leaving = last_volts + (volts - last_volts) * (top - last) / (milliamps - last);
            plw_script_point(file, leaving, top);
            *end = (plw_curve_end){.volts = leaving, .milliamps = top, .through_top = true};
            return true;
        }
        if (drawn) {
            plw_script_point(file, volts, milliamps);
        }
        last_volts = volts;
        last = milliamps;
    }
    *end = (plw_curve_end){.volts = to, .milliamps = last, .through_top = false};
    return drawn;
}

typedef struct {
    const plw_plate_family *family;
    double grid_volts;
} family_curve;

static double family_curve_amps(const void *context, double volts) {
    const family_curve *curve = context;
    return plw_family_amps(curve->family, volts, curve->grid_volts);
}

/* Is there room for a label beside the last one? */
static bool room(const plw_frame *frame, const plw_curve_end *end, const plw_curve_end *last) {
    const double across = fabs(end->volts - last->volts) / (frame->volts.most - frame->volts.least);
    const double up = fabs(end->milliamps - last->milliamps) / frame->milliamps.most;
    return across > LABEL_WIDTH || up > LABEL_HEIGHT;
}

static void end_label(FILE *file, const plw_curve_end *end, double grid_volts) {
    char text[64] = "+"; /* a positive grid is worth its sign */
    const size_t sign = grid_volts > 0.0 ? 1 : 0;
    plw_script_value(grid_volts, PLW_UNIT_VOLT, 4, text + sign, sizeof text - sign);
    plw_script_label(file, text, end->volts, end->milliamps,
                     end->through_top ? "center offset 0,0.55 textcolor rgb '#3d4a57'"
                                      : "left offset 0.6,0 textcolor rgb '#3d4a57'");
}

void plw_family_block(FILE *file, const plw_frame *frame, const plw_plate_family *family, double grid_least,
                      double grid_most) {
    const double step = plw_round_step((grid_most - grid_least) / 9.0);
    const int first = (int)ceil(grid_most / step - 1e-9);
    plw_curve_end ends[FAMILY_MOST];
    double grids[FAMILY_MOST];
    int count = 0;
    fputs("$curves << EOD\n", file);
    for (int k = first; step * k >= grid_least - 1e-9 * step && count < FAMILY_MOST; k--) {
        const family_curve curve = {family, step * k};
        if (!plw_curve_points(file, frame, family_curve_amps, &curve, 0.0, frame->volts.most, &ends[count])) {
            continue;
        }
        fputc('\n', file);
        grids[count++] = curve.grid_volts;
    }
    if (count == 0) {
        fputs("0 0\n", file);
    }
    fputs("EOD\n", file);
    int last = -1;
    for (int i = 0; i < count; i++) {
        const bool clear = ends[i].milliamps > CLEAR_OF_AXIS * frame->milliamps.most;
        if (clear && (last < 0 || room(frame, &ends[i], &ends[last]))) {
            end_label(file, &ends[i], grids[i]);
            last = i;
        }
    }
}

bool plw_dissipation_block(FILE *file, const plw_frame *frame, double watts) {
    const double from = 1e3 * watts / frame->milliamps.most;
    const double to = frame->volts.most;
    if (!(watts > 0.0 && from < to)) {
        return false;
    }
    fputs("$dissipation << EOD\n", file);
    for (int k = 0; k <= HYPERBOLA_POINTS; k++) {
        const double volts = from * pow(to / from, (double)k / HYPERBOLA_POINTS);
        plw_script_point(file, volts, 1e3 * watts / volts);
    }
    fputs("EOD\n", file);
    return true;
}
