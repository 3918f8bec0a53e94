/* A result written to a file, whole or not at all.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_TEXT_FILE_H
#define PLATEWRIGHT_TEXT_FILE_H

#include "platewright/status.h"

#ifdef __cplusplus
extern "C" {
#endif

/* Write a text to a file: to a temporary name in the same folder, then renamed.  A link is followed; what is no plain
 * file (a device, a pipe) is written to as it stands.
 * Ret:  PLW_OK; PLW_E_FILE with path and reason: no such folder, no leave to write, disk full; PLW_E_NO_MEMORY.  On
 *       failure nothing is left behind and an older file of that name is untouched. */
PLW_API plw_status plw_text_write(const char *path, const char *text, plw_error *error) PLW_MUST_USE;

/* Is there a place to write to, as far as can be told without writing?  To be asked before a first of several files is
 * written.
 * Ret:  PLW_OK; PLW_E_FILE with path and reason: no such folder, a folder itself, no leave to write */
PLW_API plw_status plw_text_may_write(const char *path, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
