/* plot: write a gnuplot script and have it drawn.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "cli/commands.h"
#include "cli/drawing.h"
#include "cli/work.h"

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
    bool kept = false;
    plw_status status = cli_drawing_find("output", cli_argument(arguments, "output"),
                                         plw_plot_name(kind_of(cli_argument(arguments, "kind"))), &drawing, &error);
    if (status == PLW_OK) {
        status = cli_work_open(arguments, &work, &error);
    }
    if (status == PLW_OK) {
        status = plot(&work, &drawing, &kept, &error);
    }
    if (status != PLW_OK) {
        (void)cli_work_place(&work, &error);
    }
    cli_work_close(&work);
    cli_drawing_free(&drawing);
    if (status != PLW_OK) {
        return cli_complain(arguments->command, &error);
    }
    if (!kept) {
        fputs("platewright: a rating is exceeded or the aim is not reached; platewright check tells more\n", stderr);
    }
    return kept ? CLI_DONE : CLI_NOT_REACHED;
}
