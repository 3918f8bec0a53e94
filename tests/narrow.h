/* No line wider than the screen.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_NARROW_H
#define TESTS_NARROW_H

#include <string.h>

#include "near.h"

/* 80 columns; UTF-8 letters count once. */
static inline void assert_narrow(const char *text) {
    for (const char *line = text; *line != '\0';) {
        const size_t length = strcspn(line, "\n");
        size_t letters = 0;
        for (size_t i = 0; i < length; i++) {
            letters += ((unsigned char)line[i] & 0xC0U) != 0x80U;
        }
        if (letters > 80) {
            fail_msg("%zu columns: %.*s", letters, (int)length, line);
        }
        line += length + (line[length] == '\n' ? 1 : 0);
    }
}

#endif
