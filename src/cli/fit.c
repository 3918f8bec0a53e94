/* fit: a tube's coefficients from its published rows and points.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>

#include "cli/commands.h"
#include "cli/work.h"
#include "platewright/fit.h"
#include "platewright/tube_report.h"

static plw_status fit(const cli_arguments *arguments, plw_tube *tube, plw_fit *result, plw_error *error) {
    if (tube->kind == PLW_KIND_RECTIFIER) {
        return plw_fail(error, PLW_E_DATA,
                        "%s: is a rectifier; its law follows from the published drop, there is "
                        "nothing to fit",
                        arguments->positional);
    }
    plw_status status = plw_fit_tube(tube, true, result, error);
    if (status != PLW_OK) {
        return plw_fail_at(error, status, "%s", arguments->positional);
    }
    tube->model = result->model;
    tube->has_model = true;
    char *text = NULL;
    status = plw_fit_text(tube, result, &text, error);
    const char *output = cli_argument(arguments, "output");
    if (status == PLW_OK && output != NULL) {
        status = plw_tube_write(output, tube, error);
    }
    if (status == PLW_OK) {
        status = cli_put(text, NULL, error);
    }
    plw_text_free(text);
    return status;
}

int cli_run_fit(const cli_arguments *arguments) {
    plw_tube *tube = NULL;
    plw_error error = {.status = PLW_OK};
    plw_fit *result = calloc(1, sizeof *result);
    plw_status status = PLW_E_NO_MEMORY;
    if (result != NULL) {
        status = plw_tube_read(arguments->positional, &tube, &error);
    } else {
        (void)plw_fail(&error, status, "out of memory");
    }
    if (status == PLW_OK && tube != NULL) {
        status = fit(arguments, tube, result, &error);
    }
    free(result);
    plw_tube_free(tube);
    return status == PLW_OK ? CLI_DONE : cli_complain(arguments->command, &error);
}
