/* The plate supply made from the entries that describe it: a voltage, bench readings, or its parts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "report/stage_builder.h"

enum { TEXT_SIZE = 512 };

#define MAINS_HERTZ 50.0

/* Mains voltages of the world, at their widest. */
#define MAINS_LEAST_VOLTS 90.0
#define MAINS_MOST_VOLTS 260.0

/* What only a supply of parts has. */
static const char *const part_names[] = {"winding", "rectifier", "diode",      "reservoir", "winding-ohms", "mains",
                                         "dropper", "choke",     "choke-ohms", "smoothing", "bleeder"};
enum { PARTS = sizeof part_names / sizeof part_names[0] };

static const plw_stage_entry *first_part(const plw_builder *work) {
    for (size_t i = 0; i < PARTS; i++) {
        if (plw_builder_entry(work, part_names[i]) != NULL) {
            return plw_builder_entry(work, part_names[i]);
        }
    }
    return NULL;
}

/* ---- readings ---------------------------------------------------------------------------------------------------- */

/* 305V, 258V@10k, 271V@18mA.  Ret: whether it is good. */
static bool read_reading(plw_builder *work, const plw_stage_entry *entry, plw_bench_reading *reading) {
    char volts_text[TEXT_SIZE];
    snprintf(volts_text, sizeof volts_text, "%s", entry->text);
    char *at = strchr(volts_text, '@');
    if (at != NULL) {
        *at = '\0';
    }
    plw_error error = {.status = PLW_OK};
    *reading = (plw_bench_reading){0};
    if (plw_quantity_parse(volts_text, PLW_UNIT_VOLT, &reading->volts, &error) != PLW_OK) {
        plw_builder_fault(work, entry, error.text);
        return false;
    }
    if (!(reading->volts >= entry->type->least && reading->volts <= entry->type->most)) {
        plw_builder_fault_range(work, entry, entry->type->least, entry->type->most);
        return false;
    }
    if (at == NULL) {
        return true;
    }
    double amps = (double)NAN;
    if (plw_quantity_parse(at + 1, PLW_UNIT_AMPERE, &amps, NULL) == PLW_OK && strpbrk(at + 1, "aA") != NULL) {
        reading->amps = amps;
    } else if (plw_quantity_parse(at + 1, PLW_UNIT_OHM, &reading->ohms, NULL) == PLW_OK && reading->ohms > 0) {
        amps = reading->volts / reading->ohms;
    } else {
        amps = (double)NAN;
    }
    if (!(amps >= 0 && amps <= 10)) {
        plw_builder_fault(work, entry,
                          "behind the @ stands the resistor or the current of the reading, up to 10 A; write for "
                          "instance 258V@10k or 271V@18mA");
        return false;
    }
    return true;
}

/* Ret: whether all are good. */
static bool read_readings(plw_builder *work, plw_plate_supply *supply) {
    bool good = true;
    for (size_t i = 0; i < work->description->count; i++) {
        const plw_stage_entry *entry = &work->description->entry[i];
        if (entry->type->kind != PLW_ENTRY_READING) {
            continue;
        }
        if (supply->readings == PLW_READINGS_MOST) {
            plw_builder_fault(work, entry, "is one reading too many; keep 16");
            return false;
        }
        good = read_reading(work, entry, &supply->reading[supply->readings]) && good;
        supply->readings++;
    }
    return good;
}

/* The entry of the reading with a number, from 1; the last for any other. */
static const plw_stage_entry *reading_entry(const plw_builder *work, unsigned long number) {
    const plw_stage_entry *found = NULL;
    for (size_t i = 0; i < work->description->count && number > 0; i++) {
        if (work->description->entry[i].type->kind == PLW_ENTRY_READING) {
            found = &work->description->entry[i];
            number--;
        }
    }
    return found;
}

/* "reading 2: 258 V under load ..." stands at the second reading. */
static void fault_reading(plw_builder *work, const char *text) {
    static const char lead[] = "reading ";
    char *end = NULL;
    if (strncmp(text, lead, sizeof lead - 1) == 0) {
        const unsigned long number = strtoul(text + sizeof lead - 1, &end, 10);
        const plw_stage_entry *entry = reading_entry(work, number);
        if (entry != NULL && end[0] == ':' && end[1] == ' ') {
            plw_builder_fault(work, entry, end + 2);
            return;
        }
    }
    if (strncmp(text, "readings: ", 10) == 0) {
        plw_builder_fault(work, reading_entry(work, PLW_READINGS_MOST), text + 10);
    } else {
        plw_builder_fault_named(work, text);
    }
}

static void take_readings_alone(plw_builder *work, plw_plate_supply *supply) {
    plw_reading readings[PLW_READINGS_MOST];
    for (size_t i = 0; i < supply->readings; i++) {
        const plw_bench_reading *reading = &supply->reading[i];
        readings[i] = (plw_reading){reading->volts, reading->ohms > 0 ? reading->volts / reading->ohms : reading->amps};
    }
    plw_error error = {.status = PLW_OK};
    if (plw_supply_readings(readings, supply->readings, &supply->line, &error) != PLW_OK) {
        fault_reading(work, error.text);
    }
}

/* ---- parts ------------------------------------------------------------------------------------------------------- */

static void take_rectifier(plw_builder *work, plw_plate_supply *supply) {
    const plw_stage_entry *entry = plw_builder_entry(work, "rectifier");
    const bool makes_volts = plw_builder_entry(work, "winding") != NULL || supply->readings > 0;
    if (entry == NULL && !makes_volts) {
        return; /* of the transformer wanted: full-wave */
    }
    static const plw_rectifier_connection connections[] = {PLW_FULL_WAVE, PLW_BRIDGE, PLW_HALF_WAVE};
    if (entry == NULL) {
        plw_builder_fault(work, first_part(work),
                          "how the rectifier is wired is missing; add --rectifier full-wave (two diodes on a "
                          "centre-tapped winding), bridge or half-wave");
        return;
    }
    for (size_t i = 0; i < sizeof connections / sizeof connections[0]; i++) {
        if (strcmp(entry->text, entry->type->choices[i]) == 0) {
            supply->parts.connection = connections[i];
            return;
        }
    }
    plw_builder_fault_choice(work, entry);
}

/* Cathodes (or filaments) that a rectifier tube brings out apart from each other. */
static size_t cathodes(const plw_tube *tube) {
    size_t count = 0;
    for (size_t i = 0; i < tube->pins_count; i++) {
        count += strncmp(tube->pins[i].electrode, "cathode", 7) == 0 ? 1U : 0U;
    }
    return count;
}

static void take_diode(plw_builder *work, plw_catalogue *catalogue, plw_plate_supply *supply) {
    const plw_stage_entry *entry = plw_builder_entry(work, "diode");
    supply->parts.diode = plw_diode_silicon();
    if (entry == NULL || strcmp(entry->text, "silicon") == 0 || catalogue == NULL) {
        return;
    }
    int variant = -1;
    const plw_tube *tube = plw_builder_tube(work, catalogue, entry, &variant);
    if (tube == NULL) {
        return;
    }
    if (tube->kind != PLW_KIND_RECTIFIER) {
        plw_builder_fault(work, entry, "is no rectifier; write silicon or a rectifier tube, e.g. GZ34");
    } else if (!(tube->rectifier.perveance > 0)) {
        plw_builder_fault(work, entry, "has no voltage drop in its tube file; add it there, or choose another type");
    } else if (supply->parts.connection == PLW_BRIDGE && cathodes(tube) < 2) {
        plw_builder_fault(work, entry,
                          "its plates share one cathode; a bridge wants separate cathodes or silicon: write --diode "
                          "silicon, or --rectifier full-wave on a centre-tapped winding");
    } else {
        supply->rectifier_tube = tube;
        supply->parts.diode = (plw_diode){.kind = PLW_DIODE_VACUUM, .perveance = tube->rectifier.perveance};
    }
}

/* The filter, section by section, in the order told. */
typedef struct {
    const plw_stage_entry *series; /* the dropper or choke that still wants its capacitor */
    bool copper_told;
    plw_filter_section section;
} filter;

static void filter_series(plw_builder *work, const plw_stage_entry *entry, filter *f) {
    if (f->series != NULL) {
        plw_builder_fault(work, f->series, "is not followed by its capacitor; add --smoothing behind it, e.g. 47uF");
    }
    const bool choke = entry->type->unit == PLW_UNIT_HENRY;
    *f = (filter){.series = entry};
    (void)plw_builder_quantity(work, entry, choke ? &f->section.henries : &f->section.ohms);
}

static void filter_copper(plw_builder *work, const plw_stage_entry *entry, filter *f) {
    if (f->series == NULL || f->series->type->unit != PLW_UNIT_HENRY || f->copper_told) {
        plw_builder_fault(work, entry, "there is no choke before it; give --choke first, e.g. 8H");
        return;
    }
    f->copper_told = true;
    (void)plw_builder_quantity(work, entry, &f->section.ohms);
}

static void filter_capacitor(plw_builder *work, const plw_stage_entry *entry, filter *f, plw_rectifier *parts) {
    if (f->series == NULL) {
        plw_builder_fault(work, entry,
                          "there is no dropper or choke before it; give --dropper, e.g. 470, or --choke, e.g. 8H, "
                          "first; the first capacitor behind the rectifier is --reservoir");
    } else if (parts->sections == PLW_SECTIONS_MOST) {
        plw_builder_fault(work, entry, "is one filter section too many; keep 4");
    } else if (plw_builder_quantity(work, entry, &f->section.farads)) {
        parts->section[parts->sections++] = f->section;
    }
    f->series = NULL;
}

static void take_filter(plw_builder *work, plw_plate_supply *supply) {
    filter f = {.series = NULL};
    for (size_t i = 0; i < work->description->count; i++) {
        const plw_stage_entry *entry = &work->description->entry[i];
        const char *name = entry->type->name;
        if (strcmp(name, "dropper") == 0 || strcmp(name, "choke") == 0) {
            filter_series(work, entry, &f);
        } else if (strcmp(name, "choke-ohms") == 0) {
            filter_copper(work, entry, &f);
        } else if (strcmp(name, "smoothing") == 0) {
            filter_capacitor(work, entry, &f, &supply->parts);
        }
    }
    if (f.series != NULL) {
        plw_builder_fault(work, f.series, "is not followed by its capacitor; add --smoothing behind it, e.g. 47uF");
    }
}

/* A filter that begins with a choke needs no reservoir; any other supply has one, and if its size is not told it is
 * taken as boundless. */
static void take_reservoir(plw_builder *work, plw_plate_supply *supply) {
    plw_rectifier *parts = &supply->parts;
    if (plw_builder_entry(work, "reservoir") != NULL) {
        plw_builder_take(work, "reservoir", &parts->reservoir_farads);
    } else if (parts->sections == 0 || !(parts->section[0].henries > 0)) {
        parts->reservoir_farads = PLW_RESERVOIR_BOUNDLESS_FARADS;
        supply->reservoir_assumed = true;
    }
}

static void take_parts(plw_builder *work, plw_catalogue *catalogue, plw_plate_supply *supply) {
    plw_rectifier *parts = &supply->parts;
    supply->has_parts = true;
    parts->mains_hertz = MAINS_HERTZ;
    take_rectifier(work, supply);
    take_diode(work, catalogue, supply);
    take_filter(work, supply);
    take_reservoir(work, supply);
    plw_builder_take(work, "winding", &parts->winding_rms_volts);
    plw_builder_take(work, "winding-ohms", &parts->path_ohms);
    plw_builder_take(work, "mains", &parts->mains_hertz);
    plw_builder_take(work, "bleeder", &parts->bleeder_ohms);
}

/* Fed from the mains without a transformer: half-wave, or a bridge; a centre tap there is none. */
static void take_transformerless(plw_builder *work, plw_plate_supply *supply) {
    const plw_stage_entry *entry = plw_builder_entry(work, "transformerless");
    const plw_stage_entry *winding = plw_builder_entry(work, "winding");
    const plw_stage_entry *rectifier = plw_builder_entry(work, "rectifier");
    double volts = (double)NAN;
    if (entry == NULL || entry->text[0] == 'n') {
        return;
    }
    supply->transformerless = true;
    if (rectifier != NULL && supply->parts.connection == PLW_FULL_WAVE) {
        plw_builder_fault(work, entry,
                          "a full-wave rectifier wants the centre tap of a transformer; write --rectifier half-wave");
    }
    if (winding != NULL && plw_quantity_parse(winding->text, PLW_UNIT_VOLT, &volts, NULL) == PLW_OK &&
        !(volts >= MAINS_LEAST_VOLTS && volts <= MAINS_MOST_VOLTS)) {
        plw_builder_fault(work, entry, "the winding is then the mains itself: give 90 V to 260 V");
    }
}

/* ---- the supply -------------------------------------------------------------------------------------------------- */

static void exclusions(plw_builder *work) {
    plw_builder_exclude(work, "supply", "reading", "give the voltage or the readings");
    plw_builder_exclude(work, "supply", "winding", "give the loaded voltage or the parts that make it");
    plw_builder_exclude(work, "source-ohms", "reading", "the readings tell the resistance of the supply");
    plw_builder_exclude(work, "winding-ohms", "reading", "the readings tell the resistance of the winding");
    plw_builder_exclude(work, "source-ohms", "winding", "give the copper as --winding-ohms");
    if (plw_builder_entry(work, "winding") == NULL) {
        plw_builder_exclude(work, "source-ohms", "rectifier", "give the winding, or leave its rectifier out");
        plw_builder_exclude(work, "winding-ohms", "supply", "give the winding instead of the loaded voltage");
    }
}

static void take_voltage(plw_builder *work, plw_plate_supply *supply) {
    const plw_stage_entry *entry = plw_builder_entry(work, "supply");
    plw_error error = {.status = PLW_OK};
    double volts = (double)NAN;
    double ohms = 0;
    plw_builder_take(work, "source-ohms", &ohms);
    if (plw_builder_quantity(work, entry, &volts)) {
        const plw_status status = ohms > 0 ? plw_supply_source(volts, ohms, &supply->line, &error)
                                           : plw_supply_stiff(volts, &supply->line, &error);
        if (status != PLW_OK) {
            plw_builder_fault(work, entry, error.text);
        }
    }
}

/* Winding and readings, or readings with one off load that stands for the winding. */
static void settle_parts(plw_builder *work, double most_amps, plw_plate_supply *supply) {
    plw_error error = {.status = PLW_OK};
    if (supply->readings == 0) {
        supply->copper_assumed = plw_builder_entry(work, "winding-ohms") == NULL;
        supply->has_winding = true;
    }
    const plw_status status = plw_plate_supply_settle(supply, most_amps, &error);
    if (status == PLW_E_USAGE) {
        fault_reading(work, error.text);
    } else if (status != PLW_OK) {
        /* Not a slip of the pen: this supply cannot do it, or memory is short. */
        const plw_stage_entry *winding = plw_builder_entry(work, "winding");
        const char *text = strncmp(error.text, "supply: ", 8) == 0 ? error.text + 8 : error.text;
        plw_builder_fault(work, winding != NULL ? winding : reading_entry(work, PLW_READINGS_MOST), text);
        work->faults.status = status;
    }
}

static void fault_no_supply(plw_builder *work) {
    if (plw_builder_entry(work, "source-ohms") != NULL) {
        plw_builder_fault(work, plw_builder_entry(work, "source-ohms"),
                          "the off-load voltage is missing; add it, e.g. --supply 305V");
    } else if (first_part(work) != NULL) {
        plw_builder_fault(work, first_part(work),
                          "the winding is missing; add its RMS volts off load, e.g. --winding 230V, or readings of "
                          "the output, one of them off load");
    } else {
        plw_builder_missing(work, "--supply: is missing; give the loaded supply voltage, e.g. --supply 285V, or bench "
                                  "readings, e.g. --reading 305V --reading 271V@18mA, or its parts, e.g. --winding "
                                  "230V --rectifier full-wave");
    }
}

void plw_builder_take_supply(plw_builder *work, plw_catalogue *catalogue, double most_amps, plw_plate_supply *supply) {
    const size_t faults_before = strlen(work->faults.text);
    const bool parts = first_part(work) != NULL;
    *supply = (plw_plate_supply){0};
    exclusions(work);
    const bool readings_good = read_readings(work, supply);
    if (parts) {
        take_parts(work, catalogue, supply);
    }
    take_transformerless(work, supply);
    if (plw_builder_entry(work, "supply") != NULL) {
        take_voltage(work, supply);
    } else if (plw_builder_entry(work, "winding") == NULL && supply->readings == 0) {
        fault_no_supply(work);
    } else if (!readings_good || strlen(work->faults.text) > faults_before) {
        return;
    } else if (parts) {
        settle_parts(work, most_amps, supply);
    } else {
        take_readings_alone(work, supply);
    }
}
