/* A selection from the catalogue by kind, base, plate dissipation and heater.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_TUBE_SELECTION_H
#define PLATEWRIGHT_TUBE_SELECTION_H

#include "platewright/nearness.h"

#ifdef __cplusplus
extern "C" {
#endif

/* What is asked for.  A type whose figure is not known is not among those asked for by that figure. */
typedef struct {
    bool by_kind;
    plw_tube_kind kind;
    const char *base;               /* case does not count; NULL: any */
    double least_watts, most_watts; /* rated plate dissipation, of each section; NaN: any */
    double heater_volts;            /* within 5 %, as heaters are rated for; NaN: any */
} plw_tube_filter;

/* Every tube passes.
 * Ret:  nothing asked for */
PLW_API plw_tube_filter plw_tube_filter_none(void);

/* How many entries the tubes have: each type, and each of its variants. */
PLW_API size_t plw_tube_entries_count(const plw_tube *const *tubes, size_t count);

/* Select, in the order given, each type before its variants.
 * In:   entries: room for plw_tube_entries_count()
 * Ret:  how many were selected */
PLW_API size_t plw_tubes_select(const plw_tube *const *tubes, size_t count, const plw_tube_filter *filter,
                                plw_tube_entry *entries);

#ifdef __cplusplus
}
#endif
#endif
