/* A tube type of one's own in outline.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/tube_outline.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "tube/outline_pins.h"
#include "tube/tube_fields.h"

#define SOURCE_OTHERWISE "as given on the command line"

/* The numbers of an outline with their names and ranges. */
typedef struct {
    const char *name;
    size_t offset;
    double least, most;
    bool of_screen;
} outline_entry;

static const outline_entry entries[] = {
    {"heater-volts", offsetof(plw_tube_outline, heater_volts), 0.5, 150.0, false},
    {"heater-amps", offsetof(plw_tube_outline, heater_amps), 0.01, 50.0, false},
    {"plate-volts", offsetof(plw_tube_outline, plate_volts), 1.0, 10000.0, false},
    {"screen-volts", offsetof(plw_tube_outline, screen_volts), 1.0, 10000.0, true},
    {"plate-watts", offsetof(plw_tube_outline, plate_watts), 0.05, 5000.0, false},
    {"screen-watts", offsetof(plw_tube_outline, screen_watts), 0.01, 1000.0, true},
};
enum { ENTRIES = sizeof entries / sizeof entries[0] };

static double entry_value(const plw_tube_outline *outline, const outline_entry *entry) {
    double value = (double)NAN;
    memcpy(&value, (const char *)outline + entry->offset, sizeof value);
    return value;
}

static bool has_screen(const plw_tube_outline *outline) {
    return outline->kind == PLW_KIND_PENTODE || outline->kind == PLW_KIND_BEAM;
}

static bool is_blank(const char *text) {
    return text == NULL || text[strspn(text, " \t\r\n")] == '\0';
}

/* Ret: false when no system is called so */
static bool find_system(const char *name, plw_rating_system *system) {
    *system = PLW_SYSTEM_STATED;
    if (name == NULL) {
        return true;
    }
    while ((int)*system > 0 && strcmp(name, plw_rating_system_name(*system)) != 0) {
        *system = (plw_rating_system)((int)*system - 1);
    }
    return strcmp(name, plw_rating_system_name(*system)) == 0;
}

static plw_status check_numbers(const plw_tube_outline *outline, plw_error *error) {
    for (size_t i = 0; i < ENTRIES; i++) {
        const double value = entry_value(outline, &entries[i]);
        if (isnan(value)) {
            continue;
        }
        if (!(value >= entries[i].least && value <= entries[i].most)) {
            return plw_fail(error, PLW_E_USAGE, "%s: %g is out of range; it must lie between %g and %g",
                            entries[i].name, value, entries[i].least, entries[i].most);
        }
        if (entries[i].of_screen && !has_screen(outline)) {
            return plw_fail(error, PLW_E_USAGE, "%s: a triode has no screen", entries[i].name);
        }
    }
    return PLW_OK;
}

static plw_status check(const plw_tube_outline *outline, plw_error *error) {
    if (is_blank(outline->type)) {
        return plw_fail(error, PLW_E_USAGE, "type: give the tube a type designation");
    }
    if (outline->source != NULL && is_blank(outline->source)) {
        return plw_fail(error, PLW_E_USAGE, "source: is blank; name title, publisher and year");
    }
    if (outline->kind == PLW_KIND_RECTIFIER) {
        return plw_fail(error, PLW_E_USAGE, "kind: a rectifier has no grid; triode, pentode or beam");
    }
    plw_rating_system system;
    if (!find_system(outline->rating_system, &system)) {
        return plw_fail(error, PLW_E_USAGE,
                        "rating-system: '%.40s' is not known; design-center, design-maximum, absolute or stated",
                        outline->rating_system);
    }
    plw_outline_pins pins;
    const plw_status status = plw_outline_pins_parse(outline->pins, &pins, error);
    return status == PLW_OK ? check_numbers(outline, error) : status;
}

plw_status plw_tube_outline_complete(const plw_tube_outline *outline, plw_error *error) {
    for (size_t i = 0; i < ENTRIES; i++) {
        if (isnan(entry_value(outline, &entries[i])) && (!entries[i].of_screen || has_screen(outline))) {
            return plw_fail(error, PLW_E_USAGE, "%s: is missing; a tube file states heater and limits",
                            entries[i].name);
        }
    }
    return PLW_OK;
}

/* Without a source nobody can look it up: it is worth what memory is. */
static bool set_provenance(plw_provenance *provenance, const char *source) {
    *provenance = source == NULL ? (plw_provenance){.how = PLW_HOW_TOLD, .confidence = PLW_CONFIDENCE_MEDIUM}
                                 : (plw_provenance){.how = PLW_HOW_READ, .confidence = PLW_CONFIDENCE_HIGH};
    provenance->source = strdup(source == NULL ? SOURCE_OTHERWISE : source);
    return provenance->source != NULL;
}

/* Ret: false without memory */
static bool fill_pins(plw_tube *tube, const plw_tube_outline *outline) {
    plw_outline_pins pins;
    if (plw_outline_pins_parse(outline->pins, &pins, NULL) != PLW_OK || pins.count == 0) {
        return true; /* check() has seen to it that the text can be read */
    }
    tube->pins = calloc(pins.count, sizeof *tube->pins);
    if (tube->pins == NULL || !set_provenance(&tube->pins_provenance, outline->source)) {
        return false;
    }
    for (int number = 1; number <= PLW_OUTLINE_PINS_MOST; number++) {
        if (pins.electrode[number] != NULL) {
            plw_pin *pin = &tube->pins[tube->pins_count++];
            *pin = (plw_pin){number, strdup(pins.electrode[number])};
            if (pin->electrode == NULL) {
                return false;
            }
        }
    }
    return true;
}

/* Ret: false without memory */
static bool fill(plw_tube *tube, const plw_tube_outline *outline) {
    tube->type = strdup(outline->type);
    tube->base = outline->base == NULL ? NULL : strdup(outline->base);
    tube->kind = outline->kind;
    tube->heater_volts = outline->heater_volts;
    tube->heater_amps = outline->heater_amps;
    tube->directly_heated = outline->directly_heated;
    tube->ratings = calloc(1, sizeof *tube->ratings);
    if (tube->type == NULL || tube->ratings == NULL || (outline->base != NULL && tube->base == NULL) ||
        !fill_pins(tube, outline) || !set_provenance(&tube->heater_provenance, outline->source)) {
        return false;
    }
    tube->ratings_count = 1;
    plw_ratings *ratings = tube->ratings;
    plw_fields_clear(plw_ratings_fields, ratings);
    ratings->service = strdup("class A1 amplifier");
    ratings->connection = has_screen(outline) ? PLW_CONNECTION_PENTODE : PLW_CONNECTION_TRIODE;
    (void)find_system(outline->rating_system, &ratings->system); /* check() has seen to it that there is one */
    ratings->plate_volts = outline->plate_volts;
    ratings->screen_volts = outline->screen_volts;
    ratings->plate_watts = outline->plate_watts;
    ratings->screen_watts = outline->screen_watts;
    return ratings->service != NULL && set_provenance(&ratings->provenance, outline->source);
}

plw_status plw_tube_outline_make(const plw_tube_outline *outline, plw_tube **tube, plw_error *error) {
    const plw_status status = check(outline, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_tube *made = calloc(1, sizeof *made);
    if (made == NULL || !fill(made, outline)) {
        plw_tube_free(made);
        return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", outline->type);
    }
    *tube = made;
    return PLW_OK;
}
