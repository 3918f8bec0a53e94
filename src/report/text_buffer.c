/* A text that grows while it is written, and numbers written alike in every locale.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/text_buffer.h"

#include <math.h>
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>

#include "platewright/report.h"

plw_status plw_text_begin(plw_text_buffer *buffer, plw_error *error) {
    *buffer = (plw_text_buffer){0};
    buffer->file = open_memstream(&buffer->text, &buffer->size);
    return buffer->file != NULL ? PLW_OK : plw_fail(error, PLW_E_NO_MEMORY, "out of memory for a report");
}

plw_status plw_text_end(plw_text_buffer *buffer, plw_status status, char **text, plw_error *error) {
    const bool failed = ferror(buffer->file) != 0;
    if ((fclose(buffer->file) != 0 || failed || buffer->text == NULL) && status == PLW_OK) {
        status = plw_fail(error, PLW_E_NO_MEMORY, "out of memory for a report");
    }
    if (status == PLW_OK) {
        *text = buffer->text;
    } else {
        free(buffer->text);
    }
    *buffer = (plw_text_buffer){0};
    return status;
}

void plw_text_number(FILE *file, double value, int digits, const char *absent) {
    if (!isfinite(value)) {
        fputs(absent, file);
        return;
    }
    if (value == 0.0) {
        fputc('0', file);
        return;
    }
    char written[64];
    snprintf(written, sizeof written, "%.*g", digits, value);
    /* All that is neither digit, sign nor exponent is the locale's decimal point, which may be of several bytes. */
    bool in_point = false;
    for (const char *at = written; *at != '\0'; at++) {
        const bool of_number = strchr("0123456789+-e", *at) != NULL;
        if (of_number) {
            fputc(*at, file);
        } else if (!in_point) {
            fputc('.', file);
        }
        in_point = !of_number;
    }
}

void plw_text_free(char *text) {
    free(text);
}

size_t plw_text_whole_length(const char *text) {
    const size_t length = strlen(text);
    size_t start = length;
    while (start > 0 && ((unsigned char)text[start - 1] & 0xC0U) == 0x80U) {
        start--;
    }
    if (start == 0) {
        return length;
    }
    const unsigned char lead = (unsigned char)text[start - 1];
    const size_t wanted = lead >= 0xF0U ? 4 : lead >= 0xE0U ? 3 : lead >= 0xC0U ? 2 : 1;
    return wanted > 1 && length - (start - 1) < wanted ? start - 1 : length;
}
