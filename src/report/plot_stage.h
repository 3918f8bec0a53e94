/* The pictures of a stage, and what they share.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_PLOT_STAGE_H
#define REPORT_PLOT_STAGE_H

#include "report/plot_curves.h"

/* Title and line beneath: the stage, and what it gives at full drive. */
void plw_plot_title(FILE *file, const plw_answer *answer);

/* The plate family on which the stage works at rest. */
plw_plate_family plw_stage_family(const plw_answer *answer);

/* Currents in A as they are drawn: the screen's with the plate's in a pentode connected as a triode. */
double plw_drawn_amps(const plw_answer *answer, double plate_amps, double screen_amps);

/* Is the cycle solved, so that there is a path to draw? */
bool plw_has_path(const plw_answer *answer);

/* Where the key stands: under the picture, where no curve runs. */
void plw_plot_key(FILE *file);

/* One entry of a plot command: `$block with lines` in an ink, with its line in the key ('' for none). */
void plw_plot_line(FILE *file, const char *block, plw_ink ink, const char *title);

/* The same with a filled mark instead of a line. */
void plw_plot_mark(FILE *file, const char *block, int point_type, double size, const char *colour, const char *title);

void plw_plot_load_line(FILE *file, const plw_answer *answer);
void plw_plot_transfer(FILE *file, const plw_answer *answer);

/* Out: nothing but the script; what can't be had (waveforms without parts) is left out. */
void plw_plot_supply(FILE *file, const plw_answer *answer);

#endif
