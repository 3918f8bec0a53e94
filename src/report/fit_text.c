/* A fit in words: coefficients, and every printed figure beside the model's.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "platewright/tube_report.h"
#include "report/text_buffer.h"
#include "report/tube_text.h"

static void put_residual(FILE *out, const plw_residual *residual) {
    fprintf(out, "  %-5s %3zu  %-24s ", residual->is_row ? "row" : "point", residual->index + 1, residual->quantity);
    plw_text_number(out, residual->printed, 4, "-");
    fputs("  ", out);
    plw_text_number(out, residual->predicted, 4, "-");
    fputs("  ", out);
    plw_text_number(out, residual->scaled, 2, "-");
    fputc('\n', out);
}

plw_status plw_fit_text(const plw_tube *tube, const plw_fit *fit, char **text, plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    fprintf(buffer.file, "%s\n", tube->type);
    plw_put_model(buffer.file, tube);
    fputs("\nPrinted, model, difference over its standard deviation (V, A, W, ohm, S, %)\n", buffer.file);
    for (size_t i = 0; i < fit->residuals; i++) {
        put_residual(buffer.file, &fit->residual[i]);
    }
    return plw_text_end(&buffer, PLW_OK, text, error);
}
