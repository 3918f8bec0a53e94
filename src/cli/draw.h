/* A gnuplot script drawn by gnuplot.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CLI_DRAW_H
#define CLI_DRAW_H

#include "platewright/report.h"

/* Have gnuplot draw a script.  It works in a folder of its own beside the drawing, so that a failed run leaves neither
 * half a drawing nor damages an old one.
 * In:   script_path: the script; output: the drawing it makes, in the same folder as the script
 * Ret:  PLW_OK; PLW_E_PROGRAM: gnuplot is not found or failed, what it said went to the standard error;
 *       PLW_E_FILE; PLW_E_NO_MEMORY */
plw_status cli_draw(const char *script_path, const char *output, plw_plot_format format, plw_error *error) PLW_MUST_USE;

#endif
