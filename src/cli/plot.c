/* plot: write a gnuplot script and have it drawn.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "cli/commands.h"
#include "cli/draw.h"
#include "cli/work.h"
#include "platewright/text_file.h"

/* Where drawing and script go. */
typedef struct {
    plw_plot_kind kind;
    plw_plot_format format;
    char *drawing; /* NULL: the script alone */
    char *script;  /* NULL: to the standard output */
    char *inside;  /* the name the script draws into */
} plot_targets;

static void free_targets(plot_targets *targets) {
    free(targets->drawing);
    free(targets->script);
    free(targets->inside);
}

/* A name with its ending replaced.  Ret: NULL without memory */
static char *with_ending(const char *name, size_t stem, const char *ending) {
    const size_t room = stem + strlen(ending) + 1;
    char *made = malloc(room);
    if (made != NULL) {
        snprintf(made, room, "%.*s%s", (int)stem, name, ending);
    }
    return made;
}

static plw_plot_kind kind_of(const char *name) {
    for (int i = 0; name != NULL && i < (int)PLW_PLOT_COUNT; i++) {
        if (strcmp(name, plw_plot_name((plw_plot_kind)i)) == 0) {
            return (plw_plot_kind)i;
        }
    }
    return PLW_PLOT_LOAD_LINE;
}

static plw_status find_targets(const cli_arguments *arguments, plot_targets *targets, plw_error *error) {
    static const struct {
        const char *ending;
        plw_plot_format format;
    } endings[] = {{".svg", PLW_PLOT_SVG}, {".png", PLW_PLOT_PNG}, {".pdf", PLW_PLOT_PDF}, {".gp", PLW_PLOT_SVG}};
    const char *output = cli_argument(arguments, "output");
    *targets = (plot_targets){.kind = kind_of(cli_argument(arguments, "kind")), .format = PLW_PLOT_SVG};
    if (output == NULL) {
        const char *name = plw_plot_name(targets->kind);
        targets->inside = with_ending(name, strlen(name), ".svg");
        return targets->inside == NULL ? plw_fail(error, PLW_E_NO_MEMORY, "out of memory") : PLW_OK;
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
        targets->format = endings[i].format;
        targets->script = with_ending(output, stem, ".gp");
        targets->inside = with_ending(output, stem, script_only ? ".svg" : endings[i].ending);
        targets->drawing = script_only ? NULL : strdup(output);
        const bool whole =
            targets->script != NULL && targets->inside != NULL && (script_only || targets->drawing != NULL);
        return whole ? PLW_OK : plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    return plw_fail(error, PLW_E_USAGE,
                    "--output: %.200s: the ending says what to draw; write NAME.svg, NAME.png, "
                    "NAME.pdf, or NAME.gp for the script alone",
                    output);
}

/* Refuse a drawing that could not be put in place, before anything is written. */
static plw_status check_drawing(const char *path, plw_error *error) {
    struct stat status;
    if (stat(path, &status) != 0) {
        return PLW_OK;
    }
    if (S_ISDIR(status.st_mode)) {
        return plw_fail(error, PLW_E_FILE, "%s: is a folder; name a file in it", path);
    }
    return access(path, W_OK) == 0 ? PLW_OK
                                   : plw_fail(error, PLW_E_FILE, "%s: cannot be written: it is protected", path);
}

static plw_status put_plot(const plw_answer *answer, const plot_targets *targets, plw_error *error) {
    char *text = NULL;
    plw_status status = targets->drawing == NULL ? PLW_OK : check_drawing(targets->drawing, error);
    if (status == PLW_OK) {
        status = plw_plot_script(answer, targets->kind, targets->format, targets->inside, &text, error);
    }
    if (status == PLW_OK) {
        status = cli_put(text, targets->script, error);
    }
    plw_text_free(text);
    if (status == PLW_OK && targets->drawing != NULL) {
        status = cli_draw(targets->script, targets->drawing, targets->format, error);
    }
    return status;
}

static plw_status say_what_is_done(const plot_targets *targets, plw_error *error) {
    if (targets->script == NULL) {
        return PLW_OK;
    }
    const char *drawing = targets->drawing;
    const size_t room = strlen(targets->script) + (drawing == NULL ? 0 : strlen(drawing)) + 64;
    char *line = malloc(room);
    if (line == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    if (drawing == NULL) {
        snprintf(line, room, "Script written: %s\n", targets->script);
    } else {
        snprintf(line, room, "Drawn: %s (script: %s)\n", drawing, targets->script);
    }
    const plw_status status = cli_put(line, NULL, error);
    free(line);
    return status;
}

static plw_status plot(cli_work *work, const plot_targets *targets, bool *kept, plw_error *error) {
    plw_bias_choice choice;
    plw_bias_option option;
    plw_answer answer = {.stage = &work->stage, .series = work->series};
    plw_status status = cli_work_build(work, error);
    if (status != PLW_OK) {
        return status;
    }
    if (plw_stage_described(work->description, "cathode-resistor", NULL, 0) == NULL &&
        plw_stage_described(work->description, "fixed-bias", NULL, 0) == NULL) {
        status = cli_work_choose(work, &choice, error);
        if (status != PLW_OK) {
            return status;
        }
        answer.choice = &choice;
        answer.option = &choice.option[choice.chosen];
        *kept = choice.aim_reached;
    } else {
        status = plw_bias_option_solve(&work->stage, work->stage.cathode_resistor_ohms, &option, error);
        if (status != PLW_OK) {
            return status;
        }
        answer.option = &option;
        *kept = true;
    }
    *kept = *kept && answer.option->within_ratings;
    cli_extras extras;
    cli_work_complete(work, &answer, &extras, kept);
    status = cli_work_save(work, error);
    if (status == PLW_OK) {
        status = put_plot(&answer, targets, error);
    }
    return status == PLW_OK ? say_what_is_done(targets, error) : status;
}

int cli_run_plot(const cli_arguments *arguments) {
    cli_work work = {.arguments = arguments};
    plot_targets targets;
    plw_error error = {.status = PLW_OK};
    bool kept = false;
    plw_status status = find_targets(arguments, &targets, &error);
    if (status == PLW_OK) {
        status = cli_work_open(arguments, &work, &error);
    }
    if (status == PLW_OK) {
        status = plot(&work, &targets, &kept, &error);
    }
    if (status != PLW_OK) {
        (void)cli_work_place(&work, &error);
    }
    cli_work_close(&work);
    free_targets(&targets);
    if (status != PLW_OK) {
        return cli_complain(arguments->command, &error);
    }
    if (!kept) {
        fputs("platewright: a rating is exceeded or the aim is not reached; platewright check tells more\n", stderr);
    }
    return kept ? CLI_DONE : CLI_NOT_REACHED;
}
