/* A fit in words: coefficients, and every printed figure beside the model's.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "platewright/quantity.h"
#include "platewright/tube_report.h"
#include "report/text_buffer.h"
#include "report/tube_text.h"

enum { CELL = 40 };

/* The unit of a quantity, by the words in its name. */
static plw_unit unit_of(const char *quantity) {
    static const struct {
        const char *word;
        plw_unit unit;
    } words[] = {{"current", PLW_UNIT_AMPERE}, {"gm", PLW_UNIT_SIEMENS},         {"resistance", PLW_UNIT_OHM},
                 {"power", PLW_UNIT_WATT},     {"distortion", PLW_UNIT_PERCENT}, {"harmonic", PLW_UNIT_PERCENT}};
    for (size_t i = 0; i < sizeof words / sizeof words[0]; i++) {
        if (strstr(quantity, words[i].word) != NULL) {
            return words[i].unit;
        }
    }
    return PLW_UNIT_NONE;
}

static void put_residual(FILE *out, const plw_residual *residual) {
    const plw_unit unit = unit_of(residual->quantity);
    const double values[] = {residual->printed, residual->predicted};
    fprintf(out, "  %-5s %3zu  %-30s", residual->is_row ? "row" : "point", residual->index + 1, residual->quantity);
    for (int i = 0; i < 2; i++) {
        char text[CELL];
        int letters = 0;
        plw_quantity_format(values[i], unit, 3, text, sizeof text);
        for (const char *at = text; *at != '\0'; at++) { /* UTF-8 letters count once */
            letters += ((unsigned char)*at & 0xC0U) != 0x80U;
        }
        fprintf(out, "%*s%s", 12 - letters > 0 ? 12 - letters : 0, "", text);
    }
    fputs("      ", out);
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
    fputs("\n                                                printed       model   off by (in its uncertainty)\n",
          buffer.file);
    for (size_t i = 0; i < fit->residuals; i++) {
        put_residual(buffer.file, &fit->residual[i]);
    }
    return plw_text_end(&buffer, PLW_OK, text, error);
}
