/* A selection from the catalogue by kind, base, plate dissipation and heater.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/tube_selection.h"

#include <math.h>
#include <strings.h>

/* Heaters are rated for 5 to 10 % about their volts. */
#define HEATER_PART 0.05

plw_tube_filter plw_tube_filter_none(void) {
    const double any = (double)NAN;
    return (plw_tube_filter){.least_watts = any, .most_watts = any, .heater_volts = any};
}

size_t plw_tube_entries_count(const plw_tube *const *tubes, size_t count) {
    size_t entries = count;
    for (size_t i = 0; i < count; i++) {
        entries += tubes[i]->variants_count;
    }
    return entries;
}

static bool passes(const plw_tube_filter *filter, plw_tube_entry entry) {
    const plw_ratings *ratings = plw_tube_entry_ratings(entry);
    const double watts = ratings == NULL ? (double)NAN : ratings->plate_watts;
    if (filter->by_kind && entry.tube->kind != filter->kind) {
        return false;
    }
    if (filter->base != NULL && (entry.tube->base == NULL || strcasecmp(filter->base, entry.tube->base) != 0)) {
        return false;
    }
    if (!isnan(filter->least_watts) && !(watts >= filter->least_watts)) {
        return false;
    }
    if (!isnan(filter->most_watts) && !(watts <= filter->most_watts)) {
        return false;
    }
    return isnan(filter->heater_volts) ||
           fabs(plw_tube_entry_heater_volts(entry) - filter->heater_volts) <= HEATER_PART * filter->heater_volts;
}

size_t plw_tubes_select(const plw_tube *const *tubes, size_t count, const plw_tube_filter *filter,
                        plw_tube_entry *entries) {
    size_t selected = 0;
    for (size_t i = 0; i < count; i++) {
        for (int variant = -1; variant < (int)tubes[i]->variants_count; variant++) {
            const plw_tube_entry entry = {tubes[i], variant};
            if (passes(filter, entry)) {
                entries[selected++] = entry;
            }
        }
    }
    return selected;
}
