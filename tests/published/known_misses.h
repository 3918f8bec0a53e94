/* Figures of printed rows that the fitted law misses by more than test_rows.c allows, and why.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_PUBLISHED_KNOWN_MISSES_H
#define TESTS_PUBLISHED_KNOWN_MISSES_H

#include <stddef.h>
#include <string.h>

typedef struct {
    const char *type;
    size_t row; /* of the tube's rows, from 0 */
    const char *figure;
    const char *reason;
} plw_known_miss;

#define SLOW_50 "1.9, 2.0, 2.1 mA/V at 35, 45, 55 mA: gm grows more slowly with the current than the law lets it"
#define TWO_845                                                                                                        \
    "52 to 80 mA over 14 V of bias make 2.0 mA/V; the sheets print 3.1 at both: early and late editions mixed"

static const plw_known_miss plw_known_misses[] = {
    {"45", 1, "power",
     "the sheet's mu 3.5, 1610 and 3900 ohm make 2.0 W of 50 V peak where it prints 1.6, but 0.87 W of 31.5 V where it "
     "prints 0.83"},
    {"50", 0, "gm", SLOW_50},
    {"50", 1, "gm", SLOW_50},
    {"845", 2, "gm", TWO_845},
    {"845", 2, "plate resistance", TWO_845},
    {"845", 3, "plate current", TWO_845},
    {"EL34", 2, "plate current", "15.5 V at 250 V and 25.9 V at 375 V, both 70 mA, make mu 12; the sheet prints 10.5"},
    {"KT66", 0, "gm", "editions print 6300 and 7000 micromhos for one point; both are fitted"},
};

enum { PLW_KNOWN_MISSES = sizeof plw_known_misses / sizeof plw_known_misses[0] };

/* Ret:  the entry, or NULL when the figure of the row is none of these */
static inline const plw_known_miss *plw_known_miss_of(const char *type, size_t row, const char *figure) {
    for (size_t index = 0; index < PLW_KNOWN_MISSES; index++) {
        const plw_known_miss *miss = &plw_known_misses[index];
        if (strcmp(miss->type, type) == 0 && miss->row == row && strcmp(miss->figure, figure) == 0) {
            return miss;
        }
    }
    return NULL;
}

#endif
