/* plot: write a gnuplot script and have it drawn.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "cli/commands.h"
#include "cli/drawing.h"
#include "cli/folders.h"
#include "cli/work.h"

enum { PLACE_SIZE = 512 };

static plw_plot_kind kind_of(const char *name) {
    for (int i = 0; name != NULL && i < (int)PLW_PLOT_COUNT; i++) {
        if (strcmp(name, plw_plot_name((plw_plot_kind)i)) == 0) {
            return (plw_plot_kind)i;
        }
    }
    return PLW_PLOT_LOAD_LINE;
}

static plw_status put_plot(const plw_answer *answer, plw_plot_kind kind, const cli_drawing *drawing, plw_error *error) {
    char *text = NULL;
    plw_status status = cli_drawing_check(drawing, error);
    if (status == PLW_OK) {
        status = plw_plot_script(answer, kind, drawing->format, drawing->inside, &text, error);
    }
    if (status == PLW_OK) {
        status = cli_drawing_put(drawing, text, error);
    }
    plw_text_free(text);
    return status;
}

static bool wants_family(const cli_arguments *arguments) {
    const char *kind = cli_argument(arguments, "kind");
    return kind != NULL && strcmp(kind, "family") == 0;
}

static plw_status find_tube(cli_work *work, const plw_tube **tube, plw_error *error) {
    char place[PLACE_SIZE];
    int variant = -1;
    const char *type = plw_stage_described(work->description, "tube", place, sizeof place);
    if (type == NULL) {
        return plw_fail(error, PLW_E_USAGE, "--tube: is missing; name the tube to be drawn, e.g. --tube EL84");
    }
    plw_status status = cli_open_catalogue(cli_argument(work->arguments, "tubes"), &work->catalogue, error);
    if (status == PLW_OK) {
        status = plw_catalogue_find(work->catalogue, type, tube, &variant, error);
        if (status == PLW_E_NOT_FOUND) {
            status = plw_fail_at(error, status, "%s", place);
        }
    }
    return status;
}

/* The plate family of the tube alone: neither supply nor load is asked for. */
static plw_status plot_family(cli_work *work, const cli_drawing *drawing, plw_error *error) {
    const plw_tube *tube = NULL;
    char *text = NULL;
    char place[PLACE_SIZE];
    const char *how = plw_stage_described(work->description, "connection", place, sizeof place);
    plw_connection connection = PLW_CONNECTION_PENTODE;
    if (how != NULL && strcmp(how, plw_connection_name(PLW_CONNECTION_TRIODE)) == 0) {
        connection = PLW_CONNECTION_TRIODE;
    } else if (how != NULL && strcmp(how, plw_connection_name(PLW_CONNECTION_PENTODE)) != 0) {
        return plw_fail(error, PLW_E_USAGE, "%s: the tube alone is drawn as a pentode or as a triode", place);
    }
    plw_status status = find_tube(work, &tube, error);
    if (status == PLW_OK) {
        status = cli_drawing_check(drawing, error);
    }
    if (status == PLW_OK) {
        status = plw_plot_family(tube, connection, drawing->format, drawing->inside, &text, error);
    }
    if (status == PLW_OK) {
        status = cli_drawing_put(drawing, text, error);
    }
    plw_text_free(text);
    return status == PLW_OK ? cli_drawing_tell(drawing, error) : status;
}

static plw_status plot(cli_work *work, const cli_drawing *drawing, bool *kept, plw_error *error) {
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
        status = put_plot(&answer, kind_of(cli_argument(work->arguments, "kind")), drawing, error);
    }
    return status == PLW_OK ? cli_drawing_tell(drawing, error) : status;
}

int cli_run_plot(const cli_arguments *arguments) {
    cli_work work = {.arguments = arguments};
    cli_drawing drawing;
    plw_error error = {.status = PLW_OK};
    const bool family = wants_family(arguments);
    bool kept = family;
    const char *name = family ? "family" : plw_plot_name(kind_of(cli_argument(arguments, "kind")));
    plw_status status = cli_drawing_find("output", cli_argument(arguments, "output"), name, &drawing, &error);
    if (status == PLW_OK) {
        status = cli_work_open(arguments, &drawing, &work, &error);
    }
    if (status == PLW_OK) {
        status = family ? plot_family(&work, &drawing, &error) : plot(&work, &drawing, &kept, &error);
    }
    cli_drawing_free(&drawing);
    if (status == PLW_OK && !kept) {
        fputs("platewright: a rating is exceeded or the aim is not reached; platewright check tells more\n", stderr);
    }
    return cli_work_end(&work, status, kept, &error);
}
