/* The entries a stage may have: names, units, ranges.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/stage_entries.h"

#include <string.h>

static const char *const connections[] = {"pentode", "triode", "ultralinear", NULL};
static const char *const rectifiers[] = {"full-wave", "bridge", "half-wave", NULL};

#define QUANTITY(entry_name, entry_unit, entry_least, entry_most, entry_example)                                       \
    {                                                                                                                  \
        .name = (entry_name), .kind = PLW_ENTRY_QUANTITY, .unit = (entry_unit), .least = (entry_least),                \
        .most = (entry_most), .example = (entry_example)                                                               \
    }
#define PART(entry_name, entry_unit, entry_least, entry_most, entry_example)                                           \
    {                                                                                                                  \
        .name = (entry_name), .kind = PLW_ENTRY_QUANTITY, .unit = (entry_unit), .least = (entry_least),                \
        .most = (entry_most), .example = (entry_example), .repeatable = true, .in_filter = true                        \
    }
#define SWITCH(entry_name)                                                                                             \
    { .name = (entry_name), .kind = PLW_ENTRY_SWITCH, .example = "yes" }

/* The ranges are those of plw_stage_validate(), or what no output stage ever goes beyond. */
static const plw_entry_type types[] = {
    {.name = "tube", .kind = PLW_ENTRY_TUBE, .example = "6V6GT"},
    {.name = "parallel", .kind = PLW_ENTRY_COUNT, .least = 1, .most = PLW_PARALLEL_MOST, .example = "2"},
    {.name = "connection", .kind = PLW_ENTRY_CHOICE, .choices = connections, .example = "triode"},
    QUANTITY("tap", PLW_UNIT_PERCENT, 1, 99, "43%"),
    QUANTITY("supply", PLW_UNIT_VOLT, 10, 5000, "285V"),
    QUANTITY("source-ohms", PLW_UNIT_OHM, 0, 1e5, "1.8k"),
    {.name = "reading",
     .kind = PLW_ENTRY_READING,
     .unit = PLW_UNIT_VOLT,
     .least = 10,
     .most = 5000,
     .repeatable = true,
     .example = "258V@10k"},
    QUANTITY("winding", PLW_UNIT_VOLT, 5, 5000, "230V"),
    {.name = "rectifier", .kind = PLW_ENTRY_CHOICE, .choices = rectifiers, .example = "full-wave"},
    {.name = "diode", .kind = PLW_ENTRY_TUBE, .example = "GZ34"},
    QUANTITY("reservoir", PLW_UNIT_FARAD, 1e-7, 0.1, "47uF"),
    SWITCH("transformerless"),
    QUANTITY("winding-ohms", PLW_UNIT_OHM, 0, 1e5, "95"),
    QUANTITY("mains", PLW_UNIT_HERTZ, 10, 1000, "50Hz"),
    PART("dropper", PLW_UNIT_OHM, 0.1, 1e6, "470"),
    PART("choke", PLW_UNIT_HENRY, 0.01, 1000, "8H"),
    PART("choke-ohms", PLW_UNIT_OHM, 0, 1e5, "180"),
    PART("smoothing", PLW_UNIT_FARAD, 1e-7, 0.1, "47uF"),
    QUANTITY("bleeder", PLW_UNIT_OHM, 100, 1e8, "220k"),
    QUANTITY("other-current", PLW_UNIT_AMPERE, 0, 10, "3mA"),
    QUANTITY("load", PLW_UNIT_OHM, 1, 1e6, "5k"),
    QUANTITY("ratio", PLW_UNIT_NONE, 0.1, 1000, "25"),
    QUANTITY("speaker", PLW_UNIT_OHM, 0.1, 1e5, "8"),
    QUANTITY("primary-ohms", PLW_UNIT_OHM, 0, 1e5, "280"),
    QUANTITY("secondary-ohms", PLW_UNIT_OHM, 0, 1e5, "0.5"),
    QUANTITY("cathode-resistor", PLW_UNIT_OHM, 0.1, 1e6, "270"),
    SWITCH("resistor-each"),
    SWITCH("unbypassed"),
    QUANTITY("fixed-bias", PLW_UNIT_VOLT, -2000, 0, "-12.5V"),
    QUANTITY("screen-supply", PLW_UNIT_VOLT, 10, 5000, "250V"),
    QUANTITY("screen-resistor", PLW_UNIT_OHM, 0.1, 1e6, "1k"),
    SWITCH("screen-bypassed"),
    QUANTITY("drive", PLW_UNIT_VOLT, 0, 2000, "12.5V"),
    QUANTITY("driver-ohms", PLW_UNIT_OHM, 0, 1e6, "47k"),
};

const plw_entry_type *plw_entry_type_at(size_t index) {
    return index < sizeof types / sizeof types[0] ? &types[index] : NULL;
}

const plw_entry_type *plw_entry_type_find(const char *name) {
    for (size_t i = 0; i < sizeof types / sizeof types[0]; i++) {
        if (strcmp(types[i].name, name) == 0) {
            return &types[i];
        }
    }
    return NULL;
}
