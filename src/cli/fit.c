/* fit: a tube's coefficients from its published rows and points, or from a table of observations.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "cli/commands.h"
#include "cli/drawing.h"
#include "cli/work.h"
#include "platewright/catalogue.h"
#include "platewright/fit.h"
#include "platewright/observation_file.h"
#include "platewright/quantity.h"
#include "platewright/tube_outline.h"
#include "platewright/tube_report.h"

/* What is at hand while a tube is fitted. */
typedef struct {
    const cli_arguments *arguments;
    plw_tube *tube;
    plw_fit *fit;
    bool draws;
    cli_drawing drawing;
} fit_work;

/* The options that say of a table what a tube file says itself. */
typedef struct {
    const char *option;
    plw_unit unit;
    size_t offset; /* in plw_tube_outline */
} outline_option;

static const outline_option outline_options[] = {
    {"heater-volts", PLW_UNIT_VOLT, offsetof(plw_tube_outline, heater_volts)},
    {"heater-amps", PLW_UNIT_AMPERE, offsetof(plw_tube_outline, heater_amps)},
    {"plate-volts", PLW_UNIT_VOLT, offsetof(plw_tube_outline, plate_volts)},
    {"screen-volts", PLW_UNIT_VOLT, offsetof(plw_tube_outline, screen_volts)},
    {"plate-watts", PLW_UNIT_WATT, offsetof(plw_tube_outline, plate_watts)},
    {"screen-watts", PLW_UNIT_WATT, offsetof(plw_tube_outline, screen_watts)},
};
enum { OUTLINE_OPTIONS = sizeof outline_options / sizeof outline_options[0] };

/* A table by the ending of its name; everything else is a tube file. */
static bool is_table(const char *path) {
    static const char *const endings[] = {".csv", ".CSV", ".tsv", ".txt"};
    const size_t length = strlen(path);
    for (size_t i = 0; i < sizeof endings / sizeof endings[0]; i++) {
        const size_t ending = strlen(endings[i]);
        if (length > ending && strcmp(path + length - ending, endings[i]) == 0) {
            return true;
        }
    }
    return false;
}

/* ---- a table ----------------------------------------------------------------------------------------------------- */

static plw_status outline_of(const cli_arguments *arguments, plw_tube_outline *outline, plw_error *error) {
    const char *kind = cli_argument(arguments, "kind");
    const char *direct = cli_argument(arguments, "directly-heated");
    *outline = (plw_tube_outline){.type = cli_argument(arguments, "type"),
                                  .base = cli_argument(arguments, "base"),
                                  .pins = cli_argument(arguments, "pins"),
                                  .source = cli_argument(arguments, "source"),
                                  .rating_system = cli_argument(arguments, "rating-system"),
                                  .directly_heated = cli_argument_given(arguments, "directly-heated") &&
                                                     (direct == NULL || strcmp(direct, "no") != 0)};
    if (outline->type == NULL || kind == NULL) {
        return plw_fail(error, PLW_E_USAGE, "--%s: is missing; a table does not say %s",
                        outline->type == NULL ? "type" : "kind",
                        outline->type == NULL ? "which tube it is of, e.g. --type 6X99"
                                              : "what the tube is: --kind triode, pentode or beam");
    }
    while (strcmp(kind, plw_tube_kind_name(outline->kind)) != 0 && outline->kind < PLW_KIND_RECTIFIER) {
        outline->kind++;
    }
    for (size_t i = 0; i < OUTLINE_OPTIONS; i++) {
        double value = (double)NAN;
        const char *text = cli_argument(arguments, outline_options[i].option);
        if (text != NULL && plw_quantity_parse(text, outline_options[i].unit, &value, error) != PLW_OK) {
            return plw_fail_at(error, PLW_E_USAGE, "--%s", outline_options[i].option);
        }
        memcpy((char *)outline + outline_options[i].offset, &value, sizeof value);
    }
    return PLW_OK;
}

/* An error of the library that begins with the name of an entry, as the option that it is. */
static plw_status as_option(plw_error *error, plw_status status) {
    char text[sizeof error->text];
    memcpy(text, error->text, sizeof text);
    return plw_fail(error, status, "--%s", text);
}

static plw_status read_table(const cli_arguments *arguments, plw_tube **tube, plw_error *error) {
    plw_tube_outline outline;
    plw_status status = outline_of(arguments, &outline, error);
    if (status != PLW_OK) {
        return status;
    }
    if (cli_argument(arguments, "output") != NULL) {
        status = plw_tube_outline_complete(&outline, error);
    }
    if (status == PLW_OK) {
        status = plw_tube_outline_make(&outline, tube, error);
    }
    if (status == PLW_E_USAGE) {
        return as_option(error, status);
    }
    return status == PLW_OK ? plw_observation_file_read(arguments->positional, *tube, error) : status;
}

/* ---- a tube file ------------------------------------------------------------------------------------------------- */

static plw_status read_tube(const cli_arguments *arguments, plw_tube **tube, plw_error *error) {
    static const char *const others[] = {"type", "kind", "base", "directly-heated", "pins", "rating-system", "source"};
    const char *given = NULL;
    for (size_t i = 0; i < sizeof others / sizeof others[0]; i++) {
        given = cli_argument_given(arguments, others[i]) ? others[i] : given;
    }
    for (size_t i = 0; i < OUTLINE_OPTIONS; i++) {
        given = cli_argument_given(arguments, outline_options[i].option) ? outline_options[i].option : given;
    }
    if (given != NULL) {
        return plw_fail(error, PLW_E_USAGE, "--%s: goes with a table (NAME.csv); a tube file says it itself", given);
    }
    const plw_status status = plw_tube_read(arguments->positional, tube, error);
    if (status == PLW_OK && (*tube)->kind == PLW_KIND_RECTIFIER) {
        return plw_fail(error, PLW_E_DATA,
                        "%s: is a rectifier; its law follows from the published drop, there is nothing to fit",
                        arguments->positional);
    }
    return status;
}

/* ---- the fit ----------------------------------------------------------------------------------------------------- */

/* The connection that most was given for. */
static plw_connection connection_of(const plw_tube *tube) {
    size_t as_triode = 0;
    for (size_t i = 0; i < tube->rows_count; i++) {
        as_triode += tube->rows[i].connection == PLW_CONNECTION_TRIODE ? 1U : 0U;
    }
    for (size_t i = 0; i < tube->points_count; i++) {
        as_triode += tube->points[i].connection == PLW_CONNECTION_TRIODE ? 1U : 0U;
    }
    return 2 * as_triode > tube->rows_count + tube->points_count ? PLW_CONNECTION_TRIODE : PLW_CONNECTION_PENTODE;
}

static plw_status draw(const fit_work *work, plw_error *error) {
    char *script = NULL;
    const plw_connection connection = connection_of(work->tube);
    plw_status status =
        plw_plot_family(work->tube, connection, work->drawing.format, work->drawing.inside, &script, error);
    if (status == PLW_OK) {
        status = cli_drawing_put(&work->drawing, script, error);
    }
    plw_text_free(script);
    return status == PLW_OK ? cli_drawing_tell(&work->drawing, error) : status;
}

/* Out:  *gross: figures cannot be right together */
static plw_status fit(fit_work *work, bool *gross, plw_error *error) {
    const cli_arguments *arguments = work->arguments;
    plw_status status = plw_fit_tube(work->tube, true, work->fit, error);
    if (status != PLW_OK) {
        return plw_fail_at(error, status, "%s", arguments->positional);
    }
    *gross = plw_fit_is_gross(work->fit);
    work->tube->model = work->fit->model;
    work->tube->has_model = true;
    char *text = NULL;
    status = plw_fit_text(work->tube, work->fit, &text, error);
    const char *output = cli_argument(arguments, "output");
    if (status == PLW_OK && output != NULL) {
        status = plw_tube_write(output, work->tube, error);
    }
    if (status == PLW_OK) {
        status = cli_put(text, NULL, error);
    }
    plw_text_free(text);
    return status == PLW_OK && work->draws ? draw(work, error) : status;
}

static plw_status prepare(fit_work *work, plw_error *error) {
    const char *plot = cli_argument(work->arguments, "plot");
    work->draws = plot != NULL;
    work->fit = calloc(1, sizeof *work->fit);
    if (work->fit == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    plw_status status = work->draws ? cli_drawing_find("plot", plot, "family", &work->drawing, error) : PLW_OK;
    if (status == PLW_OK && work->draws) {
        status = cli_drawing_check(&work->drawing, error);
    }
    return status;
}

int cli_run_fit(const cli_arguments *arguments) {
    fit_work work = {.arguments = arguments};
    plw_error error = {.status = PLW_OK};
    bool gross = false;
    plw_status status = prepare(&work, &error);
    if (status == PLW_OK) {
        status = is_table(arguments->positional) ? read_table(arguments, &work.tube, &error)
                                                 : read_tube(arguments, &work.tube, &error);
    }
    if (status == PLW_OK && work.tube != NULL) {
        status = fit(&work, &gross, &error);
    }
    cli_drawing_free(&work.drawing);
    free(work.fit);
    plw_tube_free(work.tube);
    if (status != PLW_OK) {
        return cli_complain(arguments->command, &error);
    }
    return gross ? CLI_NOT_REACHED : CLI_DONE;
}
