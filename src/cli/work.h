/* What the commands on a stage have in common: description, catalogue, circuit, result, complaint.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CLI_WORK_H
#define CLI_WORK_H

#include "cli/arguments.h"
#include "cli/drawing.h"
#include "platewright/bias.h"
#include "platewright/report.h"
#include "platewright/stage_file.h"

/* A stage on its way from options to a circuit. */
typedef struct {
    const cli_arguments *arguments;
    plw_catalogue *catalogue;
    plw_stage_description *description;
    plw_stage stage;
    plw_plate_supply supply; /* whose line is the stage's */
    plw_aim aim;
    plw_series series;
    double aim_before_percent; /* as in plw_answer */
} cli_work;

/* What an answer holds beside the stage itself. */
typedef struct {
    plw_uncertainty uncertainty;
    plw_mains mains;
    plw_supply_answer supply;
    plw_hum hum;
} cli_extras;

/* Read the stage file, if there is one, and lay the options over it; read aim and series; see that what is to be
 * written has its place.
 * In:   drawing: what --output stands for in plot, else NULL
 * Out:  *work, to be closed with cli_work_end(), also after an error */
plw_status cli_work_open(const cli_arguments *arguments, const cli_drawing *drawing, cli_work *work,
                         plw_error *error) PLW_MUST_USE;

/* Make the circuit: work->stage, work->supply. */
plw_status cli_work_build(cli_work *work, plw_error *error) PLW_MUST_USE;

/* Close the work; after an error name the option or the line in the file where the library names a quantity only, and
 * complain.
 * In:   status of all that was done; kept: every rating is kept and the aim reached
 * Ret:  the exit status that stands for it */
int cli_work_end(cli_work *work, plw_status status, bool kept, plw_error *error);

/* Choose the cathode resistor and set it in work->stage and in the description.  Out: *choice */
plw_status cli_work_choose(cli_work *work, plw_bias_choice *choice, plw_error *error) PLW_MUST_USE;

/* Write the stage file that --save asks for; nothing when it does not. */
plw_status cli_work_save(const cli_work *work, plw_error *error) PLW_MUST_USE;

/* Fill in what goes with the stage: how sure the answer is, mains, plate supply, hum.  What can't be had stays out.
 * Out:  *extras, which answer then points into; *kept made false when a rating is broken there */
void cli_work_complete(const cli_work *work, plw_answer *answer, cli_extras *extras, bool *kept);

/* Fill in what goes with the stage, write what --save asks for, render in the format that --format asks for, and put
 * it where --output says.  Out: *kept made false when a rating is broken by what goes with the stage */
plw_status cli_work_answer(const cli_work *work, plw_answer *answer, bool *kept, plw_error *error) PLW_MUST_USE;

/* No resistor serves: where --format asks for JSON, that is the answer; else it stays an error.
 * In:   error: why
 * Ret:  PLW_OK when it was answered; else the status in error */
plw_status cli_work_unreached(const cli_work *work, plw_error *error) PLW_MUST_USE;

/* The same for a text already rendered.  In: text, which is given up */
plw_status cli_work_put(const cli_work *work, char *text, plw_error *error) PLW_MUST_USE;

/* Put a text on the standard output, or in a file when path is neither NULL nor "-". */
plw_status cli_put(const char *text, const char *path, plw_error *error) PLW_MUST_USE;

/* Say what went wrong, line by line, and where help is.
 * In:   command may be NULL
 * Ret:  the exit status that stands for it */
int cli_complain(const struct cli_command *command, const plw_error *error);

#endif
