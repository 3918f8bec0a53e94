/* A file written whole or not at all.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef BASE_REPLACE_FILE_H
#define BASE_REPLACE_FILE_H

#include <stddef.h>

#include "platewright/status.h"

/* Write `size` bytes to a temporary name beside `path`, then rename it to `path`.
 * Ret:  PLW_OK; PLW_E_FILE with the reason; PLW_E_NO_MEMORY.  On failure nothing is left behind and an older file of
 *       that name is untouched. */
plw_status plw_replace_file(const char *path, const char *text, size_t size, plw_error *error) PLW_MUST_USE;

#endif
