/* The plate family of one tube, what is printed of it, and by how much the law misses each printed current.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "platewright/fit.h"
#include "report/plot_curves.h"
#include "report/text_buffer.h"

/* Rows printed for a screen voltage this near to that of the curves lie on them as far as the eye can tell. */
#define SAME_SCREEN 0.02

/* How a mark is drawn. */
typedef enum {
    MARK_PRINTED,      /* for the screen volts of the curves: it should lie between them as its grid volts say */
    MARK_OTHER_SCREEN, /* for other screen volts: only its miss can be read */
    MARK_DOUBTFUL,     /* of low confidence: the fit leaves it out */
    MARK_KINDS
} mark_kind;

typedef struct {
    double plate_volts, screen_volts, grid_volts;
    double amps; /* printed, as drawn */
    double miss_percent;
    mark_kind kind;
} mark;

typedef struct {
    const plw_tube *tube;
    plw_connection connection;
    plw_plate_family family;
    plw_scale volts, milliamps, percent;
    plw_frame frame;
    mark *marks;
    size_t count;
    double grid_least;
    bool has_dissipation;
    const plw_ratings *ratings;
} sheet;

/* What a row or point says of the current at rest beside what the law says: the same miss as in the table of a fit.  A
 * row that prints no grid volts finds its bias by its cathode resistor, which makes up for part of the miss.
 * In:   amps: printed */
static void add(sheet *s, const plw_prediction *law, double plate_volts, double screen_volts, double amps,
                const plw_provenance *provenance) {
    const double screen = s->family.tap > 0.0 ? plate_volts : screen_volts;
    if (isfinite(plate_volts) && isfinite(screen) && isfinite(law->plate_amps) && amps > 0.0) {
        s->marks[s->count++] = (mark){plate_volts,
                                      screen,
                                      law->grid_volts,
                                      amps,
                                      100.0 * (law->plate_amps / amps - 1.0),
                                      provenance->confidence == PLW_CONFIDENCE_LOW ? MARK_DOUBTFUL : MARK_PRINTED};
    }
}

static void collect(sheet *s) {
    plw_prediction law;
    for (size_t i = 0; i < s->tube->rows_count; i++) {
        const plw_row *row = &s->tube->rows[i];
        plw_row at_rest = *row;
        at_rest.drive_peak_volts = (double)NAN; /* a cycle would be solved for nothing */
        if (row->connection == s->connection && plw_predict_row(s->family.law, &at_rest, &law, NULL) == PLW_OK) {
            add(s, &law, row->plate_volts, row->screen_volts, row->plate_amps, &row->provenance);
        }
    }
    for (size_t i = 0; i < s->tube->points_count; i++) {
        const plw_point *point = &s->tube->points[i];
        if (point->connection == s->connection && point->kind != PLW_POINT_REMARK &&
            point->kind != PLW_POINT_INNER_MU && plw_predict_point(s->family.law, point, &law, NULL) == PLW_OK) {
            add(s, &law, point->plate_volts, point->screen_volts, point->plate_amps, &point->provenance);
        }
    }
}

static bool same_screen(const mark *one, double screen_volts) {
    return fabs(one->screen_volts - screen_volts) <= SAME_SCREEN * screen_volts;
}

/* Draw the family at the screen volts that most marks share; of equals, the first. */
static void choose_screen(sheet *s) {
    if (s->family.tap > 0.0) {
        return;
    }
    size_t most = 0;
    s->family.screen_volts =
        isfinite(s->tube->model.region.screen_volts_most) ? s->tube->model.region.screen_volts_most : 250.0;
    for (size_t i = 0; i < s->count; i++) {
        size_t sharing = 0;
        for (size_t j = 0; j < s->count; j++) {
            sharing += same_screen(&s->marks[j], s->marks[i].screen_volts) ? 1 : 0;
        }
        if (sharing > most) {
            most = sharing;
            s->family.screen_volts = s->marks[i].screen_volts;
        }
    }
    for (size_t i = 0; i < s->count; i++) {
        if (s->marks[i].kind == MARK_PRINTED && !same_screen(&s->marks[i], s->family.screen_volts)) {
            s->marks[i].kind = MARK_OTHER_SCREEN;
        }
    }
}

/* Grid volts at which the plate takes so little that a curve further down would lie on the axis. */
static double grid_volts_for_foot(const sheet *s, double amps) {
    const double volts = s->volts.most;
    const double screen = s->family.tap > 0.0 ? volts : s->family.screen_volts;
    const double grid = plw_law_grid_volts_for(s->family.law, volts, screen, 0.02 * amps);
    return isfinite(grid) && grid < 0.0 ? grid : -1.0;
}

static void compose(sheet *s) {
    double volts = 0.0;
    double amps = 0.0;
    double miss = 2.0;
    double grid = 0.0;
    for (size_t i = 0; i < s->count; i++) {
        volts = fmax(volts, s->marks[i].plate_volts);
        amps = fmax(amps, s->marks[i].amps);
        grid = fmin(grid, s->marks[i].grid_volts);
        miss = fmax(miss, fabs(s->marks[i].miss_percent));
    }
    if (s->ratings != NULL && isfinite(s->ratings->plate_volts)) {
        volts = fmax(volts, s->ratings->plate_volts);
    }
    volts = volts > 0.0 ? 1.25 * volts : 400.0;
    s->volts = plw_scale_for(0.0, volts, 6);
    if (!(amps > 0.0)) {
        const double screen = s->family.tap > 0.0 ? 0.4 * volts : s->family.screen_volts;
        amps = 0.5 * plw_family_amps(&(plw_plate_family){s->family.law, s->family.together, 0.0, 0.0, screen},
                                     0.4 * volts, 0.0);
    }
    s->milliamps = plw_scale_for(0.0, 2.2e3 * amps, 6);
    s->percent = plw_scale_for(-1.15 * miss, 1.15 * miss, 5);
    s->frame = (plw_frame){s->volts, s->milliamps};
    s->grid_least = fmax(grid_volts_for_foot(s, 1e-3 * s->milliamps.most), fmin(1.5 * grid, -1.0) * 2.0);
}

/* ---- the script -------------------------------------------------------------------------------------------------- */

static const struct {
    const char *block, *style, *title;
} kinds[MARK_KINDS] = {
    [MARK_PRINTED] = {"printed", "pointtype 7 pointsize mark*1.2 linecolor rgb '#c2360c'", "printed"},
    [MARK_OTHER_SCREEN] = {"others", "pointtype 4 pointsize mark*1.3 linecolor rgb '#00618f' linewidth 1.6",
                           "printed for other screen volts"},
    [MARK_DOUBTFUL] = {"doubtful", "pointtype 2 pointsize mark*1.1 linecolor rgb '#6b6b6b' linewidth 1.4",
                       "printed, of low confidence"},
};

static bool has_kind(const sheet *s, mark_kind kind) {
    for (size_t i = 0; i < s->count; i++) {
        if (s->marks[i].kind == kind) {
            return true;
        }
    }
    return false;
}

static void mark_block(FILE *file, const sheet *s, mark_kind kind) {
    fprintf(file, "$%s << EOD\n", kinds[kind].block);
    for (size_t i = 0; i < s->count; i++) {
        if (s->marks[i].kind == kind) {
            plw_script_number(file, s->marks[i].plate_volts);
            fputc(' ', file);
            plw_script_point(file, 1e3 * s->marks[i].amps, s->marks[i].miss_percent);
        }
    }
    fputs("EOD\n", file);
}

/* In:   column of the blocks: 2 current, 3 miss */
static void put_marks(FILE *file, const sheet *s, int column, bool in_key) {
    for (mark_kind kind = MARK_PRINTED; kind < MARK_KINDS; kind++) {
        if (!has_kind(s, kind)) {
            continue;
        }
        fprintf(file, ", \\\n     $%s using 1:%d with points %s", kinds[kind].block, column, kinds[kind].style);
        if (in_key) {
            fprintf(file, " title '%s'", kinds[kind].title);
        } else {
            fputs(" notitle", file);
        }
    }
}

static void put_title(FILE *file, const sheet *s) {
    char text[320];
    if (s->family.tap > 0.0) {
        snprintf(text, sizeof text, "%.200s, %s", s->tube->type, plw_connection_name(s->connection));
    } else {
        char screen[48];
        snprintf(text, sizeof text, "%.200s, %s, %s on the screen", s->tube->type, plw_connection_name(s->connection),
                 plw_script_value(s->family.screen_volts, PLW_UNIT_VOLT, 4, screen, sizeof screen));
    }
    fputs("set label 1 ", file);
    plw_script_quoted(file, text);
    fputs(" at graph 0, graph 1 left offset 0,2 font ',20' front\n", file);
}

static void put_family(FILE *file, sheet *s) {
    fputs("set multiplot\n"
          "set lmargin at screen 0.1\nset rmargin at screen 0.88\n"
          "set tmargin at screen 0.89\nset bmargin at screen 0.43\n",
          file);
    put_title(file, s);
    plw_family_block(file, &s->frame, &s->family, s->grid_least, 0.0);
    const double watts = s->ratings == NULL ? (double)NAN : s->ratings->plate_watts;
    const bool of_drawn = !s->family.together || (s->ratings != NULL && s->ratings->connection == s->connection);
    s->has_dissipation = of_drawn && plw_dissipation_block(file, &s->frame, watts);
    for (mark_kind kind = MARK_PRINTED; kind < MARK_KINDS; kind++) {
        if (has_kind(s, kind)) {
            mark_block(file, s, kind);
        }
    }
    plw_script_axis(file, 'x', &s->volts, "");
    plw_script_axis(file, 'y', &s->milliamps,
                    s->family.together ? "plate and screen current, mA" : "plate current, mA");
    fputs("set key at screen 0.1, screen 0.02 left bottom vertical maxrows 3 Left reverse samplen 3.2 spacing 1.25\n"
          "set format x ''\n"
          "plot $curves using 1:2 with lines",
          file);
    plw_script_ink(file, PLW_INK_CURVE);
    fputs(" title 'by the law, grid volts marked'", file);
    if (s->has_dissipation) {
        char value[48];
        char text[96];
        fputs(", \\\n     $dissipation using 1:2 with lines", file);
        plw_script_ink(file, PLW_INK_RATING);
        snprintf(text, sizeof text, "rated dissipation, %s",
                 plw_script_value(watts, PLW_UNIT_WATT, 3, value, sizeof value));
        fputs(" title ", file);
        plw_script_quoted(file, text);
    }
    put_marks(file, s, 2, true);
    fputc('\n', file);
}

static void put_misses(FILE *file, const sheet *s) {
    fputs("unset label\n"
          "set tmargin at screen 0.39\nset bmargin at screen 0.2\n"
          "set format x '%g'\n"
          "unset key\n"
          "$zero << EOD\n",
          file);
    plw_script_point(file, 0.0, 0.0);
    plw_script_point(file, s->volts.most, 0.0);
    fputs("EOD\n", file);
    plw_script_axis(file, 'x', &s->volts, "plate to cathode, V");
    plw_script_axis(file, 'y', &s->percent, "law over print, %");
    fputs("plot $zero using 1:2 with lines linecolor rgb '#2b2b2b' dashtype 1 linewidth 1 notitle", file);
    put_marks(file, s, 3, false);
    fputs("\nunset multiplot\n", file);
}

static plw_status check_family(const plw_tube *tube, plw_connection connection, plw_error *error) {
    if (tube->kind == PLW_KIND_RECTIFIER || !tube->has_model) {
        return plw_fail(error, PLW_E_USAGE, "%s: has no law to draw curves from; fit one from its printed rows first",
                        tube->type);
    }
    if (connection != PLW_CONNECTION_PENTODE && connection != PLW_CONNECTION_TRIODE) {
        return plw_fail(error, PLW_E_USAGE,
                        "%s: the %s family depends on the stage; the tube alone is drawn as a pentode or as a triode",
                        tube->type, plw_connection_name(connection));
    }
    return PLW_OK;
}

plw_status plw_plot_family(const plw_tube *tube, plw_connection connection, plw_plot_format format, const char *output,
                           char **text, plw_error *error) {
    plw_status status = check_family(tube, connection, error);
    if (status != PLW_OK) {
        return status;
    }
    const bool screened = tube->model.law.kind == PLW_LAW_PENTODE;
    sheet s = {.tube = tube, .connection = screened ? connection : PLW_CONNECTION_TRIODE};
    const bool as_triode = s.connection == PLW_CONNECTION_TRIODE;
    s.family =
        (plw_plate_family){.law = &tube->model.law, .together = screened && as_triode, .tap = as_triode ? 1.0 : 0.0};
    s.ratings = plw_tube_ratings(tube, -1, s.connection);
    s.marks = malloc((tube->rows_count + tube->points_count + 1) * sizeof *s.marks);
    if (s.marks == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory for a picture");
    }
    collect(&s);
    choose_screen(&s);
    compose(&s);
    plw_text_buffer buffer;
    status = plw_text_begin(&buffer, error);
    if (status == PLW_OK) {
        plw_script_begin(buffer.file, format, output, "family");
        put_family(buffer.file, &s);
        put_misses(buffer.file, &s);
        plw_script_finish(buffer.file);
        status = plw_text_end(&buffer, PLW_OK, text, error);
    }
    free(s.marks);
    return status;
}
