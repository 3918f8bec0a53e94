/* Where a drawing and its gnuplot script go, and putting them there.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CLI_DRAWING_H
#define CLI_DRAWING_H

#include "platewright/report.h"

typedef struct {
    plw_plot_format format;
    char *drawing; /* NULL: the script alone */
    char *script;  /* NULL: to the standard output */
    char *inside;  /* the name the script draws into */
} cli_drawing;

/* Find out what to draw and where from the name of a file: NAME.svg, NAME.png, NAME.pdf, or NAME.gp for the script
 * alone.
 * In:   option: named in messages; output: NULL: the script goes to the standard output and draws into NAME.svg, where
 *       NAME is `otherwise`
 * Out:  *drawing, to be freed with cli_drawing_free(), also after an error
 * Ret:  PLW_OK; PLW_E_USAGE when the ending is another; PLW_E_NO_MEMORY */
plw_status cli_drawing_find(const char *option, const char *output, const char *otherwise, cli_drawing *drawing,
                            plw_error *error) PLW_MUST_USE;
void cli_drawing_free(cli_drawing *drawing);

/* Could the drawing be put in place?  To be asked before anything is written.  Ret: PLW_OK; PLW_E_FILE */
plw_status cli_drawing_check(const cli_drawing *drawing, plw_error *error) PLW_MUST_USE;

/* Write the script and have it drawn. */
plw_status cli_drawing_put(const cli_drawing *drawing, const char *script, plw_error *error) PLW_MUST_USE;

/* Say on the standard output what was written; nothing when the script went there. */
plw_status cli_drawing_tell(const cli_drawing *drawing, plw_error *error) PLW_MUST_USE;

#endif
