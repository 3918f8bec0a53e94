/* Where a drawing and its gnuplot script go, and putting them there.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/drawing.h"

#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "cli/draw.h"
#include "cli/work.h"

/* A name with its ending replaced.  Ret: NULL without memory */
static char *with_ending(const char *name, size_t stem, const char *ending) {
    const size_t room = stem + strlen(ending) + 1;
    char *made = malloc(room);
    if (made != NULL) {
        snprintf(made, room, "%.*s%s", (int)stem, name, ending);
    }
    return made;
}

plw_status cli_drawing_find(const char *option, const char *output, const char *otherwise, cli_drawing *drawing,
                            plw_error *error) {
    static const struct {
        const char *ending;
        plw_plot_format format;
    } endings[] = {{".svg", PLW_PLOT_SVG}, {".png", PLW_PLOT_PNG}, {".pdf", PLW_PLOT_PDF}, {".gp", PLW_PLOT_SVG}};
    *drawing = (cli_drawing){.format = PLW_PLOT_SVG};
    if (output == NULL) {
        drawing->inside = with_ending(otherwise, strlen(otherwise), ".svg");
        return drawing->inside == NULL ? plw_fail(error, PLW_E_NO_MEMORY, "out of memory") : PLW_OK;
    }
    const char *slash = strrchr(output, '/');
    const char *last = slash == NULL ? output : slash + 1;
    for (size_t i = 0; i < sizeof endings / sizeof endings[0]; i++) {
        const size_t length = strlen(last);
        const size_t ending = strlen(endings[i].ending);
        if (length <= ending || strcmp(last + length - ending, endings[i].ending) != 0) {
            continue;
        }
        const bool script_only = strcmp(endings[i].ending, ".gp") == 0;
        const size_t stem = strlen(output) - ending;
        drawing->format = endings[i].format;
        drawing->script = with_ending(output, stem, ".gp");
        drawing->inside = with_ending(output, stem, script_only ? ".svg" : endings[i].ending);
        drawing->drawing = script_only ? NULL : strdup(output);
        const bool whole =
            drawing->script != NULL && drawing->inside != NULL && (script_only || drawing->drawing != NULL);
        return whole ? PLW_OK : plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    return plw_fail(error, PLW_E_USAGE,
                    "--%s: %.200s: the ending says what to draw; write NAME.svg, NAME.png, "
                    "NAME.pdf, or NAME.gp for the script alone",
                    option, output);
}

void cli_drawing_free(cli_drawing *drawing) {
    free(drawing->drawing);
    free(drawing->script);
    free(drawing->inside);
}

plw_status cli_drawing_check(const cli_drawing *drawing, plw_error *error) {
    const char *path = drawing->drawing;
    struct stat status;
    if (path == NULL || stat(path, &status) != 0) {
        return PLW_OK;
    }
    if (S_ISDIR(status.st_mode)) {
        return plw_fail(error, PLW_E_FILE, "%s: is a folder; name a file in it", path);
    }
    return access(path, W_OK) == 0 ? PLW_OK
                                   : plw_fail(error, PLW_E_FILE, "%s: cannot be written: it is protected", path);
}

plw_status cli_drawing_put(const cli_drawing *drawing, const char *script, plw_error *error) {
    plw_status status = cli_put(script, drawing->script, error);
    if (status == PLW_OK && drawing->drawing != NULL) {
        status = cli_draw(drawing->script, drawing->drawing, drawing->format, error);
    }
    return status;
}

plw_status cli_drawing_tell(const cli_drawing *drawing, plw_error *error) {
    if (drawing->script == NULL) {
        return PLW_OK;
    }
    const size_t room = strlen(drawing->script) + (drawing->drawing == NULL ? 0 : strlen(drawing->drawing)) + 64;
    char *line = malloc(room);
    if (line == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    if (drawing->drawing == NULL) {
        snprintf(line, room, "Script written: %s\n", drawing->script);
    } else {
        snprintf(line, room, "Drawn: %s (script: %s)\n", drawing->drawing, drawing->script);
    }
    const plw_status status = cli_put(line, NULL, error);
    free(line);
    return status;
}
