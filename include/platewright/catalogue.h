/* The catalogue: tube files read, checked, found by name, written.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_CATALOGUE_H
#define PLATEWRIGHT_CATALOGUE_H

#include "platewright/status.h"
#include "platewright/tube.h"

#ifdef __cplusplus
extern "C" {
#endif

/* The largest tube or stage file that is read, in bytes. */
#define PLW_FILE_SIZE_MOST 4194304L

/* Read one tube file and check its shape (schema) and meaning (ranges, ratings present, sources given).
 * In:   path
 * Out:  *tube, to be freed with plw_tube_free(); not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_FILE when it cannot be read; PLW_E_DATA with one line `file:line:column: ...` for each fault:
 *       malformed, with a DOCTYPE, compressed, larger than PLW_FILE_SIZE_MOST, not in UTF-8, against the schema,
 *       a quantity in the wrong unit or out of range, a rating missing */
PLW_API plw_status plw_tube_read(const char *path, plw_tube **tube, plw_error *error) PLW_MUST_USE;

/* Write a tube file (to a temporary name beside it, then renamed).  Read again it gives the very same numbers; the same
 * tube always gives the same bytes.
 * Ret:  PLW_OK; PLW_E_FILE; PLW_E_NO_MEMORY; PLW_E_DATA when plw_tube_read() would refuse the result, with its text.
 *       On failure nothing is left behind and an older file of that name is untouched */
PLW_API plw_status plw_tube_write(const char *path, const plw_tube *tube, plw_error *error) PLW_MUST_USE;

/* A catalogue is a list of folders, looked through in order; an earlier folder's tube hides a later one's. */
typedef struct plw_catalogue plw_catalogue;

/* In:   folders[count], NULL entries are skipped
 * Out:  *catalogue, to be freed with plw_catalogue_free()
 * Ret:  PLW_OK; PLW_E_FILE when a folder cannot be read; PLW_E_NO_MEMORY */
PLW_API plw_status plw_catalogue_open(const char *const *folders, size_t count, plw_catalogue **catalogue,
                                      plw_error *error) PLW_MUST_USE;
PLW_API void plw_catalogue_free(plw_catalogue *catalogue);

/* Find a tube by designation.  Case, spaces and punctuation do not count (6v6-gt is 6V6GT); equivalents and variants
 * are found (6BQ5 is EL84, 6V6GTA is a variant in 6V6GT's file); a suffix that denotes only the envelope or a later
 * edition (G, GT, GA, GB, A, B, WA ...) may be missing when that leaves one answer.
 * Only the files that may hold it are read.
 * Out:  *tube is owned by the catalogue; *variant is its index, or -1 for the type itself
 * Ret:  PLW_OK; PLW_E_NOT_FOUND with the nearest names; PLW_E_DATA when its file is not valid */
PLW_API plw_status plw_catalogue_find(plw_catalogue *catalogue, const char *designation, const plw_tube **tube,
                                      int *variant, plw_error *error) PLW_MUST_USE;

/* All tubes, in order of designation; each file is read.  Files of something else than a tube are passed over.
 * Out:  *tubes[*count], owned by the catalogue; written with PLW_E_DATA and PLW_E_FILE too: those that are in order
 * Ret:  PLW_OK; PLW_E_NO_MEMORY; PLW_E_DATA or PLW_E_FILE when some file is faulty or cannot be read, with one line
 *       for each fault */
PLW_API plw_status plw_catalogue_all(plw_catalogue *catalogue, const plw_tube *const **tubes, size_t *count,
                                     plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
