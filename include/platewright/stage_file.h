/* A stage in words: the entries that describe it, read from and written to a stage file (XML), and made into a circuit.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_STAGE_FILE_H
#define PLATEWRIGHT_STAGE_FILE_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/catalogue.h"
#include "platewright/plate_supply.h"
#include "platewright/quantity.h"
#include "platewright/stage.h"

#ifdef __cplusplus
extern "C" {
#endif

/* How the value of an entry is written. */
typedef enum {
    PLW_ENTRY_TUBE,     /* a designation */
    PLW_ENTRY_COUNT,    /* a whole number */
    PLW_ENTRY_CHOICE,   /* one of several words */
    PLW_ENTRY_QUANTITY, /* 4k7, 285V */
    PLW_ENTRY_READING,  /* of the supply: 305V off load, 258V@10k into a resistor, 271V@18mA at a current */
    PLW_ENTRY_SWITCH    /* yes or no */
} plw_entry_kind;

/* What may be said of a stage.  The name is that of the element in the file and of the option on the command line. */
typedef struct {
    const char *name;
    plw_entry_kind kind;
    plw_unit unit;
    double least, most; /* in the base unit, both allowed */
    bool repeatable;
    bool in_filter; /* of the filter of the supply, whose parts follow each other in the order told */
    const char *example;
    const char *const *choices; /* NULL-terminated; PLW_ENTRY_CHOICE */
} plw_entry_type;

/* All of them, in the order in which they are written to a file, and one by its name.
 * Ret:  NULL beyond the last, and for a name that is none */
PLW_API const plw_entry_type *plw_entry_type_at(size_t index);
PLW_API const plw_entry_type *plw_entry_type_find(const char *name);

/* Entries with where they came from: a place in a file, or by plw_stage_describe(), which stands for an option of the
 * command line. */
typedef struct plw_stage_description plw_stage_description;

/* An empty description.  Ret: PLW_OK or PLW_E_NO_MEMORY */
PLW_API plw_status plw_stage_description_new(plw_stage_description **description, plw_error *error) PLW_MUST_USE;
PLW_API void plw_stage_description_free(plw_stage_description *description);

/* Read a stage file.  Its shape is checked here; its values by plw_stage_build(), after they may have been overridden.
 * Out:  *description, to be freed with plw_stage_description_free(); not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_FILE; PLW_E_NO_MEMORY; PLW_E_DATA with one line `file:line:column: ...` for each fault, as
 *       plw_tube_read(); also an entry given twice */
PLW_API plw_status plw_stage_file_read(const char *path, plw_stage_description **description,
                                       plw_error *error) PLW_MUST_USE;

/* The same from memory; `name` stands for the file in messages.
 * Out, Ret: as plw_stage_file_read(); never PLW_E_FILE */
PLW_API plw_status plw_stage_file_read_memory(const char *name, const char *text, size_t size,
                                              plw_stage_description **description, plw_error *error) PLW_MUST_USE;

/* Say one thing of the stage.  It takes the place of what a file says of the same thing and of what excludes it: fixed
 * bias that of a cathode resistor, a supply that of readings, a load that of a ratio, and the reverse.
 * In:   name of an entry; text as it would stand in a file
 * Ret:  PLW_OK; PLW_E_USAGE: no such entry, said twice already, a text that is empty, longer than 60 characters or
 *       holds control characters, a switch that is neither yes nor no; PLW_E_NO_MEMORY */
PLW_API plw_status plw_stage_describe(plw_stage_description *description, const char *name, const char *text,
                                      plw_error *error) PLW_MUST_USE;

/* Take an entry away again, whether from a file or not. */
PLW_API void plw_stage_undescribe(plw_stage_description *description, const char *name);

/* The text of an entry (of the first, when it is repeatable).
 * Out:  place, when not NULL: "--load", or "stage.xml:4:3: load"; cut if too small
 * Ret:  NULL when it is not there */
PLW_API const char *plw_stage_described(const plw_stage_description *description, const char *name, char *place,
                                        size_t place_size);

/* Does an entry stem from a file?
 * Ret:  false also when there is no such entry */
PLW_API bool plw_stage_described_in_file(const plw_stage_description *description, const char *name);

/* The remark of a stage file.  Ret: NULL when there is none */
PLW_API const char *plw_stage_note(const plw_stage_description *description);

/* Make the circuit.  Every entry is checked; a stage without bias is allowed, its resistor may still be chosen.
 * In:   catalogue: where the tube is looked up, and lives; NULL: no tube, *stage has none
 * Out:  *stage; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE when an option is at fault and PLW_E_DATA when a file is, with one line for each fault,
 *       its place before it: not a quantity, wrong unit, out of range; tube, supply or load missing; entries that
 * exclude each other; a tube that is not known, is a rectifier or has no law; a supply that no rating allows: above
 * twice what the tube may have at the plate even with its rated current drawn */
PLW_API plw_status plw_stage_build(const plw_stage_description *description, plw_catalogue *catalogue, plw_stage *stage,
                                   plw_error *error) PLW_MUST_USE;

/* The same, and the plate supply whose line is the stage's.
 * Out:  *stage; *supply, when not NULL
 * Ret:  as plw_stage_build() */
PLW_API plw_status plw_stage_build_supplied(const plw_stage_description *description, plw_catalogue *catalogue,
                                            plw_stage *stage, plw_plate_supply *supply, plw_error *error) PLW_MUST_USE;

/* Make the plate supply alone; entries of the stage are not looked at.
 * In:   most_amps > 0: how far its line is to reach at least
 * Ret:  as plw_stage_build() */
PLW_API plw_status plw_plate_supply_build(const plw_stage_description *description, plw_catalogue *catalogue,
                                          double most_amps, plw_plate_supply *supply, plw_error *error) PLW_MUST_USE;

/* The description as the text of a stage file: the same entries always give the same bytes, and read again the same
 * entries.
 * Out:  *text, to be freed with plw_text_free() (platewright/report.h); not written unless PLW_OK
 * Ret:  PLW_OK or PLW_E_NO_MEMORY */
PLW_API plw_status plw_stage_file_text(const plw_stage_description *description, char **text,
                                       plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
