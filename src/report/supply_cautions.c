/* What a builder must be warned of at the plate supply.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "report/cautions.h"
#include "report/layout.h"
#include "report/supply_report.h"

enum { TEXT_SIZE = 64 };

static const char *written(double value, plw_unit unit, char text[TEXT_SIZE]) {
    return plw_quantity_format(value, unit, 3, text, TEXT_SIZE);
}

const char *plw_supply_check_name(const plw_supply_check *check, char *buffer, size_t size) {
    static const char lead[] = "capacitor";
    if (check->node < 0) {
        snprintf(buffer, size, "%s", check->name);
    } else if (strncmp(check->name, lead, sizeof lead - 1) == 0) {
        snprintf(buffer, size, "%s %d%s", lead, check->node + 1, check->name + sizeof lead - 1);
    } else {
        snprintf(buffer, size, "%s, node %d", check->name, check->node + 1);
    }
    return buffer;
}

static void of_check(plw_caution_list *l, const plw_supply_check *check) {
    char value[TEXT_SIZE];
    char limit[TEXT_SIZE];
    char name[TEXT_SIZE];
    written(check->value, check->unit, value);
    written(check->limit, check->unit, limit);
    if (check->ok) {
        return;
    }
    if (strcmp(check->name, "choke inductance") == 0) {
        plw_caution_say(l,
                        "The choke is too small: %s, where %s is the least at this current. Its current stops in each "
                        "cycle, and the output climbs towards the peak of the winding: a larger choke, or a bleeder "
                        "that draws more, is wanted.",
                        value, limit);
    } else if (check->at_least) {
        plw_caution_say(l, "Rating of the supply not kept: %s is %s, %s is the least.",
                        plw_supply_check_name(check, name, sizeof name), value, limit);
    } else {
        plw_caution_say(l, "Rating of the supply exceeded: %s is %s, the limit %s (%s).",
                        plw_supply_check_name(check, name, sizeof name), value, limit,
                        plw_cell_share(check->share_percent, false).text);
    }
}

void plw_caution_live_chassis(plw_caution_list *list) {
    plw_caution_say(list,
                    "Without a transformer the chassis may be live: work on it from an isolating transformer only, "
                    "and never earth it. A tube that is pulled opens the heater string: lift the plate supply lead "
                    "instead.");
}

/* Half-wave sets are mostly those without a transformer. */
static void of_mains(plw_caution_list *l, const plw_plate_supply *supply) {
    if (supply->transformerless) {
        plw_caution_live_chassis(l);
    } else if (supply->has_parts && supply->parts.connection == PLW_HALF_WAVE) {
        plw_caution_say(l, "Half-wave: if this rectifier hangs straight on the mains, the chassis may be live; tell "
                           "--transformerless, and the steps on the bench are those for such a set.");
    }
}

void plw_cautions_of_supply(plw_caution_list *list, const plw_supply_answer *answer) {
    for (size_t i = 0; i < answer->checks_count; i++) {
        of_check(list, &answer->checks[i]);
    }
    of_mains(list, answer->supply);
    if (answer->supply->copper_assumed) {
        plw_caution_say(list,
                        "The copper of the winding is not told and taken as none: the loaded voltage will be lower. "
                        "Read the output into a known resistor, or measure the winding.");
    }
    if (answer->supply->estimated && answer->supply->estimate.none_found) {
        plw_caution_say(list,
                        "The readings leave no source resistance at all, which no winding has: read again, with one "
                        "meter, at one mains voltage.");
    }
}

static void of_readings(plw_caution_list *l, const plw_supply_answer *a) {
    const plw_supply *line = &a->supply->line;
    if (line->kind == PLW_SUPPLY_READINGS && line->points == 1) {
        plw_caution_say(l,
                        "One reading tells nothing of the source resistance: add a second one at another current, or "
                        "the AC volts of the winding and its rectifier.");
    }
    if (line->kind == PLW_SUPPLY_READINGS && line->points > 1 && line->point[0].amps <= 0 &&
        a->amps < line->point[1].amps) {
        plw_caution_say(l, "Between no load and the first loaded reading the true line hangs below the straight one "
                           "drawn here: tell the rectifier and the reservoir, and it is followed.");
    }
}

static void of_off_load(plw_caution_list *l, const plw_supply_answer *a) {
    char off[TEXT_SIZE];
    char high[TEXT_SIZE];
    if (isfinite(a->bled_volts)) {
        plw_caution_say(l,
                        "Rate every capacitor for %s: with the mains high the supply climbs there, off load or with "
                        "cold tubes, should the bleeder open; %s at nominal mains.",
                        written(a->off_load_high_volts, PLW_UNIT_VOLT, high),
                        written(a->off_load_volts, PLW_UNIT_VOLT, off));
    } else if (isfinite(a->off_load_volts)) {
        plw_caution_say(l,
                        "Rate every capacitor for %s: the supply stands at %s off load, higher still with high mains, "
                        "at every switching on, as long as the tubes are cold.",
                        written(a->off_load_high_volts, PLW_UNIT_VOLT, high),
                        written(a->off_load_volts, PLW_UNIT_VOLT, off));
    } else {
        plw_caution_say(l,
                        "What the supply gives off load is not known here: read it before the capacitors are bought.");
    }
}

static void of_dummy(plw_caution_list *l, const plw_supply_answer *a) {
    char watts[TEXT_SIZE];
    if (a->has_dummy) {
        plw_caution_say(l,
                        "The dummy load gets hot enough to burn skin and bench: %s. Stand it on something that does "
                        "not burn, away from leads.",
                        written(a->dummy.watts, PLW_UNIT_WATT, watts));
    }
}

size_t plw_supply_cautions(const plw_supply_finding *finding, char (*lines)[PLW_CAUTION_SIZE], size_t most,
                           size_t *own) {
    plw_caution_list l = {lines, most, 0};
    plw_cautions_of_supply(&l, finding->supply);
    of_readings(&l, finding->supply);
    of_off_load(&l, finding->supply);
    of_dummy(&l, finding->supply);
    if (own != NULL) {
        *own = l.count;
    }
    plw_cautions_standing(&l, finding->supply->supply->transformerless);
    return l.count;
}
