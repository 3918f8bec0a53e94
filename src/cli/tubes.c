/* tubes: the catalogue, or one tube of it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/commands.h"
#include "cli/folders.h"
#include "cli/work.h"
#include "platewright/tube_report.h"

static plw_status show_one(plw_catalogue *catalogue, const char *designation, char **text, plw_error *error) {
    const plw_tube *tube = NULL;
    int variant = -1;
    const plw_status status = plw_catalogue_find(catalogue, designation, &tube, &variant, error);
    return status == PLW_OK ? plw_tube_text(tube, text, error) : status;
}

static plw_status show_all(plw_catalogue *catalogue, char **text, plw_error *error) {
    const plw_tube *const *tubes = NULL;
    size_t count = 0;
    const plw_status status = plw_catalogue_all(catalogue, &tubes, &count, error);
    return status == PLW_OK ? plw_tubes_text(tubes, count, text, error) : status;
}

int cli_run_tubes(const cli_arguments *arguments) {
    plw_catalogue *catalogue = NULL;
    plw_error error = {.status = PLW_OK};
    char *text = NULL;
    plw_status status = cli_open_catalogue(cli_argument(arguments, "tubes"), &catalogue, &error);
    if (status == PLW_OK) {
        status = arguments->positional == NULL ? show_all(catalogue, &text, &error)
                                               : show_one(catalogue, arguments->positional, &text, &error);
    }
    if (status == PLW_OK) {
        status = cli_put(text, NULL, &error);
    }
    plw_text_free(text);
    plw_catalogue_free(catalogue);
    return status == PLW_OK ? CLI_DONE : cli_complain(arguments->command, &error);
}
