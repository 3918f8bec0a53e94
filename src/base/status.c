/* Status codes and error texts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/status.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

const char *plw_status_text(plw_status status) {
#define STATUS_TEXT(name, text) text,
    static const char *const texts[] = {PLW_STATUS_LIST(STATUS_TEXT)};
#undef STATUS_TEXT
    if ((int)status < 0 || status >= PLW_STATUS_COUNT) {
        return "unknown status";
    }
    return texts[status];
}

plw_status plw_fail(plw_error *error, plw_status status, const char *format, ...) {
    if (error != NULL) {
        va_list arguments;
        va_start(arguments, format);
        error->status = status;
        vsnprintf(error->text, sizeof error->text, format, arguments);
        va_end(arguments);
    }
    return status;
}

plw_status plw_fail_at(plw_error *error, plw_status fallback, const char *format, ...) {
    if (error == NULL) {
        return fallback;
    }
    char before[PLW_ERROR_TEXT_SIZE];
    memcpy(before, error->text, sizeof before);
    /* A place takes half the room at the most: what is wrong matters more. */
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(error->text, sizeof error->text / 2, format, arguments);
    va_end(arguments);
    size_t used = strlen(error->text);
    error->text[used++] = ':';
    error->text[used++] = ' ';
    const size_t room = sizeof error->text - used - 1;
    const size_t length = strlen(before);
    const size_t kept = length < room ? length : room;
    memcpy(error->text + used, before, kept);
    error->text[used + kept] = '\0';
    return error->status;
}

void plw_error_add(plw_error *error, const char *format, ...) {
    if (error == NULL) {
        return;
    }
    size_t used = strlen(error->text);
    if (used > 0 && used + 1 < sizeof error->text) {
        error->text[used++] = '\n';
        error->text[used] = '\0';
    }
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(error->text + used, sizeof error->text - used, format, arguments);
    va_end(arguments);
}
