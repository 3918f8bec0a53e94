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

/* A text that was cut may end inside a letter of several bytes (UTF-8): drop what is left of it. */
static void drop_part_of_letter(char *text) {
    size_t start = strlen(text);
    while (start > 0 && ((unsigned char)text[start - 1] & 0xC0U) == 0x80U) {
        start--;
    }
    if (start == 0 || (unsigned char)text[start - 1] < 0xC0U) {
        return; /* ends with a letter of one byte, or is no UTF-8 at all */
    }
    const unsigned char first = (unsigned char)text[start - 1];
    const size_t letter = first >= 0xF0U ? 4 : first >= 0xE0U ? 3 : 2;
    if (strlen(text + start - 1) < letter) {
        text[start - 1] = '\0';
    }
}

plw_status plw_fail(plw_error *error, plw_status status, const char *format, ...) {
    if (error != NULL) {
        va_list arguments;
        va_start(arguments, format);
        error->status = status;
        vsnprintf(error->text, sizeof error->text, format, arguments);
        va_end(arguments);
        drop_part_of_letter(error->text);
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
    drop_part_of_letter(error->text);
    size_t used = strlen(error->text);
    error->text[used++] = ':';
    error->text[used++] = ' ';
    const size_t room = sizeof error->text - used - 1;
    const size_t length = strlen(before);
    const size_t kept = length < room ? length : room;
    memcpy(error->text + used, before, kept);
    error->text[used + kept] = '\0';
    drop_part_of_letter(error->text);
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
    drop_part_of_letter(error->text);
}
