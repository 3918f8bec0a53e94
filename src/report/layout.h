/* Quantities, columns and paragraphs of the answers in words.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_LAYOUT_H
#define REPORT_LAYOUT_H

#include <stdbool.h>
#include <stdio.h>

#include "platewright/quantity.h"

enum { PLW_CELL_SIZE = 32 };

/* One quantity as text; each use in a call needs a cell of its own. */
typedef struct {
    char text[PLW_CELL_SIZE];
} plw_cell;

plw_cell plw_cell_quantity(double value, plw_unit unit, int digits);

/* With as many digits as the bench wants. */
plw_cell plw_cell_volts(double value);
plw_cell plw_cell_amps(double value);
plw_cell plw_cell_watts(double value);
plw_cell plw_cell_ohms(double value);

/* A share of a limit, "62 %"; with a decimal where it is over and would read 100 %. */
plw_cell plw_cell_share(double percent, bool ok);

/* Print a text into a field of `width` columns, right-aligned; UTF-8 letters count once. */
void plw_put_right(FILE *out, const char *text, int width);

/* Print a value into a field of `width` columns and its share of the limit behind it, in 7; a wider share takes what it
 * wants from the value's field. */
void plw_put_share(FILE *out, const char *value, int width, double percent, bool ok);

/* Print a paragraph broken at spaces, with a mark before its first line; further lines stand under its first word. */
void plw_put_paragraph(FILE *out, const char *mark, const char *text);

/* The same, `width` columns wide, with further lines behind an indent of their own. */
void plw_put_hanging(FILE *out, int width, const char *mark, const char *indent, const char *text);

#endif
