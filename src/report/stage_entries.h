/* The entries of a stage description as stored: shared by the reader and the maker of the circuit.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_STAGE_ENTRIES_H
#define REPORT_STAGE_ENTRIES_H

#include "platewright/stage_file.h"

typedef struct {
    const plw_entry_type *type;
    char *text;
    long line, column; /* 0: not from a file */
} plw_stage_entry;

struct plw_stage_description {
    char *file; /* NULL: not from a file */
    char *note;
    size_t count;
    plw_stage_entry *entry;
};

/* The first entry of a name, or NULL. */
const plw_stage_entry *plw_stage_entry_first(const plw_stage_description *description, const char *name);

/* "--load", or "stage.xml:4:3: load". */
void plw_stage_entry_place(const plw_stage_description *description, const plw_stage_entry *entry, char *place,
                           size_t size);

#endif
