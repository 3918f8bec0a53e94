/* check: solve a stage as built, compare meter readings, judge every rating.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "cli/commands.h"
#include "cli/work.h"

enum { PART_SIZE = 64 };

static double *reading_of(plw_meter_readings *readings, const char *name) {
    if (strcmp(name, "cathode") == 0) {
        return &readings->cathode_volts;
    }
    if (strcmp(name, "supply") == 0) {
        return &readings->supply_volts;
    }
    if (strcmp(name, "plate") == 0) {
        return &readings->plate_volts;
    }
    return strcmp(name, "screen") == 0 ? &readings->screen_volts : NULL;
}

/* Without the spaces before and behind.  Ret: where the rest begins */
static char *trim(char *text) {
    text += strspn(text, " \t");
    for (size_t length = strlen(text); length > 0 && strchr(" \t", text[length - 1]) != NULL; length--) {
        text[length - 1] = '\0';
    }
    return text;
}

/* cathode=12.9V, with spaces wherever one likes */
static plw_status read_part(char *part, plw_meter_readings *readings, plw_error *error) {
    static const char *const names[] = {"cathode", "supply", "plate", "screen"};
    part = trim(part);
    if (part[0] == '\0') {
        return plw_fail(error, PLW_E_USAGE,
                        "--measured: a reading is missing; write for instance cathode=12.9V,supply=282V");
    }
    char *equals = strchr(part, '=');
    if (equals == NULL) {
        return plw_fail(error, PLW_E_USAGE,
                        "--measured: '%s' does not say where it was measured; write for instance cathode=12.9V", part);
    }
    *equals = '\0';
    part = trim(part);
    const char *value = trim(equals + 1);
    double *reading = reading_of(readings, part);
    if (reading == NULL) {
        size_t nearest = 0;
        return plw_nearest_names(part, names, 4, &nearest, 1) == 1
                   ? plw_fail(error, PLW_E_USAGE, "--measured: '%s' is not known; is it %s?", part, names[nearest])
                   : plw_fail(error, PLW_E_USAGE,
                              "--measured: '%s' is not known; write cathode, supply, plate or screen", part);
    }
    if (!isnan(*reading)) {
        return plw_fail(error, PLW_E_USAGE, "--measured: %s is given twice; keep one", part);
    }
    if (plw_quantity_parse(value, PLW_UNIT_VOLT, reading, error) != PLW_OK) {
        return plw_fail_at(error, PLW_E_USAGE, "--measured: %s", part);
    }
    return PLW_OK;
}

/* One --measured: parts with commas between, and spaces where one likes. */
static plw_status read_measured(const char *text, plw_meter_readings *readings, plw_error *error) {
    plw_status status = PLW_OK;
    while (status == PLW_OK) {
        char part[PART_SIZE];
        const size_t length = strcspn(text, ",");
        if (length >= sizeof part) {
            return plw_fail(error, PLW_E_USAGE,
                            "--measured: a reading is too long; write for instance cathode=12.9V,supply=282V");
        }
        memcpy(part, text, length);
        part[length] = '\0';
        status = read_part(part, readings, error);
        if (text[length] == '\0') {
            break;
        }
        text += length + 1;
    }
    return status;
}

static plw_status read_all_measured(const cli_arguments *arguments, plw_meter_readings *readings, plw_error *error) {
    plw_status status = PLW_OK;
    const double unknown = (double)NAN;
    *readings = (plw_meter_readings){unknown, unknown, unknown, unknown};
    for (size_t i = 0; i < arguments->count && status == PLW_OK; i++) {
        if (strcmp(arguments->given[i].option->name, "measured") == 0) {
            status = read_measured(arguments->given[i].text, readings, error);
        }
    }
    return status;
}

static plw_status check(cli_work *work, const plw_meter_readings *readings, plw_specimen *specimen, bool *kept,
                        plw_error *error) {
    plw_bias_option option;
    plw_status status = cli_work_build(work, error);
    if (status == PLW_OK) {
        status = plw_stage_validate(&work->stage, true, error);
    }
    if (status == PLW_OK) {
        status = plw_bias_option_solve(&work->stage, work->stage.cathode_resistor_ohms, &option, error);
    }
    if (status == PLW_OK && specimen != NULL) {
        status =
            plw_specimen_measure(&work->stage, readings, cli_argument_given(work->arguments, "aim") ? &work->aim : NULL,
                                 work->series, specimen, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    plw_answer answer = {.stage = &work->stage, .option = &option, .specimen = specimen, .series = work->series};
    *kept = specimen == NULL ? option.within_ratings : plw_specimen_keeps_ratings(specimen);
    if (specimen != NULL && specimen->as_built_solved) {
        /* From here on it is this very tube that is judged. */
        answer.stage = &specimen->stage;
        answer.option = &specimen->as_built;
    }
    return cli_work_answer(work, &answer, kept, error);
}

int cli_run_check(const cli_arguments *arguments) {
    cli_work work;
    plw_error error = {.status = PLW_OK};
    plw_meter_readings readings;
    plw_specimen *specimen = NULL;
    bool kept = false;
    plw_status status = cli_work_open(arguments, NULL, &work, &error);
    if (status == PLW_OK) {
        status = read_all_measured(arguments, &readings, &error);
    }
    if (status == PLW_OK && cli_argument_given(arguments, "measured")) {
        specimen = calloc(1, sizeof *specimen);
        status = specimen == NULL ? plw_fail(&error, PLW_E_NO_MEMORY, "out of memory") : PLW_OK;
    }
    if (status == PLW_OK) {
        status = check(&work, &readings, specimen, &kept, &error);
    }
    free(specimen);
    return cli_work_end(&work, status, kept, &error);
}
