/* A text that grows while it is written, and numbers written alike in every locale.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_TEXT_BUFFER_H
#define REPORT_TEXT_BUFFER_H

#include <stdio.h>

#include "platewright/status.h"

/* Write to `file`; the text is complete after plw_text_end(). */
typedef struct {
    FILE *file;
    char *text;
    size_t size;
} plw_text_buffer;

plw_status plw_text_begin(plw_text_buffer *buffer, plw_error *error) PLW_MUST_USE;

/* Close the buffer, also after a failure.
 * In:   status of what was written so far
 * Out:  *text, to be freed with plw_text_free(); written only when PLW_OK goes in and comes out
 * Ret:  status, or PLW_E_NO_MEMORY when a write failed */
plw_status plw_text_end(plw_text_buffer *buffer, plw_status status, char **text, plw_error *error) PLW_MUST_USE;

/* A finite number with up to `digits` significant digits and a decimal point, whatever the locale; no negative zero.
 * In:   digits 1..17; absent: what stands for NaN and the infinities */
void plw_text_number(FILE *file, double value, int digits, const char *absent);

/* The length of a text in UTF-8 without its last character where that was cut short, as by a buffer too small. */
size_t plw_text_whole_length(const char *text);

#endif
