/* The maker of a circuit from its entries at work: what its parts share.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_STAGE_BUILDER_H
#define REPORT_STAGE_BUILDER_H

#include "platewright/plate_supply.h"
#include "report/stage_entries.h"

/* The description at work, and the faults found in it. */
typedef struct {
    const plw_stage_description *description;
    plw_error faults;
} plw_builder;

/* Note a fault of an entry, its place before it; of something that is missing; of two entries that cannot both be (it
 * stands at the first). */
void plw_builder_fault(plw_builder *work, const plw_stage_entry *entry, const char *text);
void plw_builder_missing(plw_builder *work, const char *text);
void plw_builder_exclude(plw_builder *work, const char *name, const char *other, const char *remedy);
void plw_builder_fault_choice(plw_builder *work, const plw_stage_entry *entry);
void plw_builder_fault_range(plw_builder *work, const plw_stage_entry *entry, double least, double most);

/* A fault that a part of the library found: "load: 3 ohm contradicts ..." stands at the entry of that name. */
void plw_builder_fault_named(plw_builder *work, const char *text);

const plw_stage_entry *plw_builder_entry(const plw_builder *work, const char *name);

/* Ret: whether the value is good. */
bool plw_builder_quantity(plw_builder *work, const plw_stage_entry *entry, double *value);

/* The value of an entry, left as it is when the entry is absent or at fault. */
void plw_builder_take(plw_builder *work, const char *name, double *value);

/* Look up the tube that an entry names.
 * Out:  *variant, as of plw_catalogue_find()
 * Ret:  the tube; NULL with the fault noted */
const plw_tube *plw_builder_tube(plw_builder *work, plw_catalogue *catalogue, const plw_stage_entry *entry,
                                 int *variant);

/* The plate supply.
 * In:   catalogue: where a rectifier tube is looked up; NULL: it is taken as silicon
 *       most_amps: how far its line is to reach at least
 * Out:  *supply: settled, unless there are faults */
void plw_builder_take_supply(plw_builder *work, plw_catalogue *catalogue, double most_amps, plw_plate_supply *supply);

#endif
