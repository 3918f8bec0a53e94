/* What the commands on a stage have in common: description, catalogue, circuit, result.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/work.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "cli/commands.h"
#include "cli/files.h"
#include "cli/folders.h"
#include "platewright/text_file.h"

enum { PLACE_SIZE = 512, NAME_SIZE = 64, VALUE_SIZE = 32 };

/* ---- options ----------------------------------------------------------------------------------------------------- */

static plw_status read_standard_input(plw_stage_description **description, plw_error *error) {
    const size_t room = (size_t)PLW_FILE_SIZE_MOST + 1;
    char *text = malloc(room);
    if (text == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "standard input: out of memory");
    }
    const size_t size = fread(text, 1, room, stdin);
    const plw_status status = ferror(stdin) != 0
                                  ? plw_fail(error, PLW_E_FILE, "standard input: cannot be read: %s", strerror(errno))
                                  : plw_stage_file_read_memory("standard input", text, size, description, error);
    free(text);
    return status;
}

static plw_status read_description(const cli_arguments *arguments, plw_stage_description **description,
                                   plw_error *error) {
    if (arguments->positional == NULL) {
        return plw_stage_description_new(description, error);
    }
    if (strcmp(arguments->positional, "-") == 0) {
        return read_standard_input(description, error);
    }
    return plw_stage_file_read(arguments->positional, description, error);
}

static plw_status lay_options(const cli_arguments *arguments, plw_stage_description *description, plw_error *error) {
    plw_status status = PLW_OK;
    for (size_t i = 0; i < arguments->count && status == PLW_OK; i++) {
        if (arguments->given[i].option->stage) {
            status = plw_stage_describe(description, arguments->given[i].option->name, arguments->given[i].text, error);
        }
    }
    return status;
}

/* dissipation=90%, current=40mA, power */
static plw_status read_aim(const char *text, plw_aim *aim, plw_error *error) {
    *aim = (plw_aim){.kind = PLW_AIM_DISSIPATION, .value = PLW_AIM_DEFAULT_PERCENT};
    if (text == NULL) {
        return PLW_OK;
    }
    if (strcmp(text, "power") == 0) {
        *aim = (plw_aim){.kind = PLW_AIM_POWER};
        return PLW_OK;
    }
    const bool current = strncmp(text, "current=", 8) == 0;
    if (!current && strncmp(text, "dissipation=", 12) != 0) {
        return plw_fail(error, PLW_E_USAGE,
                        "--aim: '%.40s' is not known; write dissipation=90%%, current=40mA or power", text);
    }
    aim->kind = current ? PLW_AIM_CURRENT : PLW_AIM_DISSIPATION;
    const plw_unit unit = current ? PLW_UNIT_AMPERE : PLW_UNIT_PERCENT;
    if (plw_quantity_parse(strchr(text, '=') + 1, unit, &aim->value, error) != PLW_OK) {
        return plw_fail_at(error, PLW_E_USAGE, "--aim");
    }
    return PLW_OK;
}

plw_status cli_work_open(const cli_arguments *arguments, const cli_drawing *drawing, cli_work *work, plw_error *error) {
    *work = (cli_work){.arguments = arguments, .series = PLW_E24};
    plw_status status = read_aim(cli_argument(arguments, "aim"), &work->aim, error);
    const char *series = cli_argument(arguments, "series");
    if (status == PLW_OK && series != NULL) {
        status = plw_series_parse(series, &work->series, error);
    }
    if (status == PLW_OK) {
        status = read_description(arguments, &work->description, error);
    }
    if (status == PLW_OK) {
        status = lay_options(arguments, work->description, error);
    }
    return status == PLW_OK ? cli_files_check(arguments, drawing, error) : status;
}

plw_status cli_work_build(cli_work *work, plw_error *error) {
    const plw_status status = cli_open_catalogue(cli_argument(work->arguments, "tubes"), &work->catalogue, error);
    return status == PLW_OK
               ? plw_stage_build_supplied(work->description, work->catalogue, &work->stage, &work->supply, error)
               : status;
}

/* "load: ..." becomes "--load: ..." or "stage.xml:4:3: load: ...".  What has no point is placed only where it is the
 * option itself that asks too much, as --aim and --current do: of a stage no single quantity is at fault. */
static void place_error(const cli_work *work, plw_error *error) {
    char place[PLACE_SIZE];
    char text[PLW_ERROR_TEXT_SIZE];
    snprintf(text, sizeof text, "%s", error->text);
    const size_t length = strcspn(text, ":");
    const bool no_point = error->status == PLW_E_NO_POINT;
    if ((error->status != PLW_E_USAGE && !no_point) || text[length] == '\0' || length >= NAME_SIZE) {
        return;
    }
    text[length] = '\0';
    const cli_option *option = text[0] == '-' || length < 2 ? NULL : cli_option_find(text, CLI_EVERY);
    if (no_point && (option == NULL || option->stage)) {
        return;
    }
    if (work->description == NULL || plw_stage_described(work->description, text, place, sizeof place) == NULL) {
        snprintf(place, sizeof place, "%s%.*s", option == NULL ? "" : "--", NAME_SIZE, text);
    }
    (void)plw_fail(error, error->status, "%s:%s", place, text + length + 1);
}

int cli_work_end(cli_work *work, plw_status status, bool kept, plw_error *error) {
    if (status != PLW_OK) {
        place_error(work, error);
    }
    plw_stage_description_free(work->description);
    plw_catalogue_free(work->catalogue);
    if (status != PLW_OK) {
        return cli_complain(work->arguments->command, error);
    }
    return kept ? CLI_DONE : CLI_NOT_REACHED;
}

/* ---- result ------------------------------------------------------------------------------------------------------ */

/* An aim that is told is taken as it is. */
static plw_status choose(cli_work *work, plw_bias_choice *choice, plw_error *error) {
    if (cli_argument_given(work->arguments, "aim")) {
        const plw_status status = plw_bias_choose(&work->stage, work->aim, work->series, choice, error);
        if (status == PLW_OK) {
            plw_mains_judge(&work->stage, choice);
        }
        return status;
    }
    const plw_status status =
        plw_bias_choose_for_mains(&work->stage, work->series, choice, &work->aim_before_percent, error);
    if (status == PLW_OK) {
        work->aim = choice->aim;
    }
    return status;
}

plw_status cli_work_choose(cli_work *work, plw_bias_choice *choice, plw_error *error) {
    plw_status status = choose(work, choice, error);
    if (status == PLW_OK) {
        char value[VALUE_SIZE];
        work->stage.cathode_resistor_ohms = choice->option[choice->chosen].ohms;
        plw_resistor_code(work->stage.cathode_resistor_ohms, value, sizeof value);
        status = plw_stage_describe(work->description, "cathode-resistor", value, error);
    }
    return status;
}

plw_status cli_work_save(const cli_work *work, plw_error *error) {
    const char *path = cli_argument(work->arguments, "save");
    char *text = NULL;
    if (path == NULL) {
        return PLW_OK;
    }
    plw_status status = plw_stage_file_text(work->description, &text, error);
    if (status == PLW_OK) {
        status = plw_text_write(path, text, error);
    }
    plw_text_free(text);
    return status;
}

/* The plate supply at the current of the stage, and what its ripple does. */
static void complete_supply(const cli_work *work, plw_answer *answer, cli_extras *extras, bool *kept) {
    const plw_bias_option *option = answer->option;
    const plw_supply_question question = plw_supply_question_usual(option->quiescent.supply_amps);
    if (work->supply.line.kind == PLW_SUPPLY_STIFF ||
        plw_plate_supply_ask(&work->supply, &question, &extras->supply, NULL) != PLW_OK) {
        return;
    }
    const plw_supply_answer *supply = &extras->supply;
    answer->supply = supply;
    *kept = *kept && supply->within_ratings;
    if (supply->has_state && !work->supply.reservoir_assumed &&
        plw_hum_of(answer->stage, &option->quiescent, &option->signal,
                   supply->state.node[supply->state.nodes - 1].ripple_rms_volts, &extras->hum, NULL) == PLW_OK) {
        answer->hum = &extras->hum;
    }
}

void cli_work_complete(const cli_work *work, plw_answer *answer, cli_extras *extras, bool *kept) {
    const plw_bias_option *option = answer->option;
    answer->aim_before_percent = work->aim_before_percent;
    if (plw_mains_solve(answer->stage, &extras->mains, NULL) == PLW_OK) {
        answer->mains = &extras->mains;
        *kept = *kept && extras->mains.within_ratings;
    }
    complete_supply(work, answer, extras, kept);
    /* A meter at the supply leaves its readings off load and under other loads nothing to say. */
    const bool read = answer->specimen != NULL && answer->specimen->supply_read;
    const double volts_error = answer->supply != NULL && !read ? answer->supply->volts_error : 0.0;
    /* Without it the answer still stands: a stage at the edge of its supply's readings may not bear a stronger tube. */
    if (plw_uncertainty_estimate(answer->stage, &option->quiescent, &option->signal, volts_error, &extras->uncertainty,
                                 NULL) == PLW_OK) {
        answer->uncertainty = &extras->uncertainty;
    }
}

static plw_status put_answer(const cli_work *work, const plw_answer *answer, plw_error *error) {
    const char *format = cli_argument(work->arguments, "format");
    char *text = NULL;
    plw_status status = PLW_OK;
    if (format == NULL || strcmp(format, "text") == 0) {
        status = plw_report_text(answer, &text, error);
    } else if (strcmp(format, "json") == 0) {
        status = plw_report_json(answer, &text, error);
    } else {
        status = plw_report_csv(answer, &text, error);
    }
    return status == PLW_OK ? cli_work_put(work, text, error) : status;
}

plw_status cli_work_answer(const cli_work *work, plw_answer *answer, bool *kept, plw_error *error) {
    cli_extras extras;
    cli_work_complete(work, answer, &extras, kept);
    const plw_status status = cli_work_save(work, error);
    return status == PLW_OK ? put_answer(work, answer, error) : status;
}

plw_status cli_work_unreached(const cli_work *work, plw_error *error) {
    const char *format = cli_argument(work->arguments, "format");
    char *text = NULL;
    if (error->status != PLW_E_NO_POINT || format == NULL || strcmp(format, "json") != 0) {
        return error->status;
    }
    const plw_status status = plw_report_json_unreached(work->aim, error->text, &text, error);
    return status == PLW_OK ? cli_work_put(work, text, error) : status;
}

plw_status cli_work_put(const cli_work *work, char *text, plw_error *error) {
    const plw_status status = cli_put(text, cli_argument(work->arguments, "output"), error);
    plw_text_free(text);
    return status;
}

plw_status cli_put(const char *text, const char *path, plw_error *error) {
    if (path != NULL && strcmp(path, "-") != 0) {
        return plw_text_write(path, text, error);
    }
    if (fputs(text, stdout) == EOF || fflush(stdout) != 0) {
        return plw_fail(error, PLW_E_FILE, "standard output: cannot be written: %s", strerror(errno));
    }
    return PLW_OK;
}
