/* Gnuplot scripts: text that stays inert, the page, the inks, scales of round numbers.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_SCRIPT_H
#define REPORT_SCRIPT_H

#include <stdio.h>

#include "platewright/report.h"

/* Text to be read, in single quotes, in which gnuplot runs nothing: control characters are dropped, quotes made
 * typographic, a missing text is empty. */
void plw_script_quoted(FILE *file, const char *text);

/* The opening of every script: encoding, page, output, frame.
 * In:   output: a path of which the last part is kept; NULL or no last part: `fallback` with the format's suffix */
void plw_script_begin(FILE *file, plw_plot_format format, const char *output, const char *fallback);
void plw_script_finish(FILE *file);

/* A number for a data block or a coordinate. */
void plw_script_number(FILE *file, double value);

/* A quantity for a title, a key or a mark: no zeros after the last digit that counts, a true minus sign: "−7.5 V",
 * "12 W".  Ret: buffer */
char *plw_script_value(double value, plw_unit unit, int digits, char *buffer, size_t size);

/* One line of a data block: two numbers. */
void plw_script_point(FILE *file, double x, double y);

/* A block of two points: a straight line. */
void plw_script_line_block(FILE *file, const char *name, double x0, double y0, double x1, double y1);

/* A small text beside a place, in the axes' units.
 * In:   placing: "left", "right", "center" and an offset, as gnuplot writes them */
void plw_script_label(FILE *file, const char *text, double x, double y, const char *placing);

/* The inks.  Each differs from every other in colour, in dash and in width, so that any one of the three tells them
 * apart. */
typedef enum {
    PLW_INK_CURVE,      /* the tube's own curves */
    PLW_INK_RATING,     /* the maker's limits */
    PLW_INK_RATING_TOO, /* another limit in the same drawing */
    PLW_INK_LOAD,       /* load line, resistor line */
    PLW_INK_SWING,      /* what is really run through */
    PLW_INK_COPPER,     /* direct current's own line */
    PLW_INK_SECOND,     /* a second and a third kind of curve */
    PLW_INK_THIRD,
    PLW_INK_COUNT
} plw_ink;

/* ` lc rgb '#...' dt ... lw ...` */
void plw_script_ink(FILE *file, plw_ink ink);

/* A scale from zero (or, for `least` below zero, from there) that ends on a round number. */
typedef struct {
    double least, most, step;
} plw_scale;

/* In:   least <= 0 < most; divisions: about how many are wanted */
plw_scale plw_scale_for(double least, double most, int divisions);

/* The least of 1, 2, 2.5 and 5 times a power of ten that is not below `value`. */
double plw_round_step(double value);

/* `set xrange`, `set xtics` and the like. In: axis 'x' or 'y' */
void plw_script_axis(FILE *file, char axis, const plw_scale *scale, const char *label);

#endif
