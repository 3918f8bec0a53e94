/* design: choose the cathode resistor.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>

#include "cli/commands.h"
#include "cli/work.h"

enum { PLACE_SIZE = 512 };

/* A bias that a file gives: a resistor is set aside, since it is to be chosen; fixed bias leaves nothing to choose. */
static plw_status set_bias_aside(const cli_work *work, plw_error *error) {
    char place[PLACE_SIZE];
    if (plw_stage_described(work->description, "fixed-bias", place, sizeof place) != NULL) {
        return plw_fail(error, PLW_E_DATA,
                        "%s: with fixed bias there is no cathode resistor to choose; use platewright check, or take it "
                        "out",
                        place);
    }
    const char *ohms = plw_stage_described(work->description, "cathode-resistor", place, sizeof place);
    if (ohms != NULL) {
        fprintf(stderr, "platewright: %s: %s is set aside; design chooses anew\n", place, ohms);
        plw_stage_undescribe(work->description, "cathode-resistor");
    }
    return PLW_OK;
}

static plw_status design(cli_work *work, bool *kept, plw_error *error) {
    plw_bias_choice choice;
    plw_status status = set_bias_aside(work, error);
    if (status == PLW_OK) {
        status = cli_work_build(work, error);
    }
    if (status == PLW_OK) {
        status = cli_work_choose(work, &choice, error);
        if (status != PLW_OK) {
            return cli_work_unreached(work, error);
        }
    }
    if (status != PLW_OK) {
        return status;
    }
    const plw_bias_option *option = &choice.option[choice.chosen];
    plw_answer answer = {.stage = &work->stage, .choice = &choice, .option = option, .series = work->series};
    *kept = choice.aim_reached && option->within_ratings;
    return cli_work_answer(work, &answer, kept, error);
}

int cli_run_design(const cli_arguments *arguments) {
    cli_work work;
    plw_error error = {.status = PLW_OK};
    bool kept = false;
    plw_status status = cli_work_open(arguments, NULL, &work, &error);
    if (status == PLW_OK) {
        status = design(&work, &kept, &error);
    }
    return cli_work_end(&work, status, kept, &error);
}
