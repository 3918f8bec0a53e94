/* Quantities, columns and paragraphs of the answers in words.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/layout.h"

#include <math.h>
#include <string.h>

enum { WIDTH = 78, SHARE_WIDTH = 6 };

plw_cell plw_cell_quantity(double value, plw_unit unit, int digits) {
    plw_cell c = {""};
    plw_quantity_format(value, unit, digits, c.text, sizeof c.text);
    return c;
}

plw_cell plw_cell_volts(double value) {
    return plw_cell_quantity(value, PLW_UNIT_VOLT, 3);
}

plw_cell plw_cell_amps(double value) {
    return plw_cell_quantity(value, PLW_UNIT_AMPERE, 3);
}

plw_cell plw_cell_watts(double value) {
    return plw_cell_quantity(value, PLW_UNIT_WATT, value >= 9.95 ? 3 : 2);
}

plw_cell plw_cell_ohms(double value) {
    return plw_cell_quantity(value, PLW_UNIT_OHM, 3);
}

plw_cell plw_cell_share(double percent, bool ok) {
    plw_cell c = {""};
    if (!ok && percent >= 99.5 && percent < 100.5) {
        const int tenths = (int)lround(10.0 * fmax(percent, 100.1)); /* over, however little */
        snprintf(c.text, sizeof c.text, "%d.%d %%", tenths / 10, tenths % 10);
    } else {
        snprintf(c.text, sizeof c.text, "%.0f %%", percent);
    }
    return c;
}

/* Print a text into a field of `width` columns, right-aligned; UTF-8 letters count once. */
void plw_put_right(FILE *out, const char *text, int width) {
    int letters = 0;
    for (const char *at = text; *at != '\0'; at++) {
        letters += ((unsigned char)*at & 0xC0U) != 0x80U;
    }
    fprintf(out, "%*s%s", width > letters ? width - letters : 0, "", text);
}

void plw_put_share(FILE *out, const char *value, int width, double percent, bool ok) {
    const plw_cell share = plw_cell_share(percent, ok);
    const int wider = (int)strlen(share.text) - SHARE_WIDTH;
    plw_put_right(out, value, wider > 0 ? width - wider : width);
    fprintf(out, " %*s", SHARE_WIDTH, share.text);
}

void plw_put_paragraph(FILE *out, const char *mark, const char *text) {
    char indent[WIDTH + 1];
    snprintf(indent, sizeof indent, "%*s", (int)strlen(mark), "");
    plw_put_hanging(out, WIDTH, mark, indent, text);
}

void plw_put_hanging(FILE *out, int width, const char *mark, const char *indent, const char *text) {
    int column = fprintf(out, "%s", mark);
    bool first = true;
    while (*text != '\0') {
        const size_t length = strcspn(text, " ");
        int letters = 0;
        for (size_t index = 0; index < length; index++) {
            letters += ((unsigned char)text[index] & 0xC0U) != 0x80U;
        }
        if (!first && column + 1 + letters > width) {
            column = fprintf(out, "\n%s", indent) - 1;
            first = true;
        }
        column += fprintf(out, "%s%.*s", first ? "" : " ", (int)length, text) - ((int)length - letters);
        first = false;
        text += length;
        text += strspn(text, " ");
    }
    fputc('\n', out);
}
