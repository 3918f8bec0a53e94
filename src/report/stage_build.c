/* The circuit made from the entries that describe it, each checked, its place named when it is at fault.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "report/stage_entries.h"

enum { PLACE_SIZE = 512, SHOWN_SIZE = 32 };

/* The description at work, and the faults found in it. */
typedef struct {
    const plw_stage_description *description;
    plw_error faults;
} builder;

/* ---- faults ------------------------------------------------------------------------------------------------------ */

/* An option at fault is a matter of usage; a file at fault one of data, and that is the graver. */
static void note_status(builder *work, bool in_file) {
    if (work->faults.status != PLW_E_DATA) {
        work->faults.status = in_file ? PLW_E_DATA : PLW_E_USAGE;
    }
}

static void fault_entry(builder *work, const plw_stage_entry *entry, const char *text) {
    char place[PLACE_SIZE];
    plw_stage_entry_place(work->description, entry, place, sizeof place);
    note_status(work, entry->line > 0);
    plw_error_add(&work->faults, "%s: %s", place, text);
}

static void fault_missing(builder *work, const char *text) {
    note_status(work, false);
    if (work->description->file != NULL) {
        plw_error_add(&work->faults, "%s: %s", work->description->file, text);
    } else {
        plw_error_add(&work->faults, "%s", text);
    }
}

static const plw_stage_entry *entry_of(const builder *work, const char *name) {
    return plw_stage_entry_first(work->description, name);
}

/* A fault that the stage itself found: "load: 3 ohm contradicts ...". */
static void fault_named(builder *work, const char *text) {
    char name[PLACE_SIZE];
    snprintf(name, sizeof name, "%.*s", (int)strcspn(text, ":"), text);
    const plw_stage_entry *entry = entry_of(work, name);
    if (entry != NULL && strncmp(text + strlen(name), ": ", 2) == 0) {
        fault_entry(work, entry, text + strlen(name) + 2);
    } else {
        note_status(work, work->description->file != NULL);
        plw_error_add(&work->faults, "%s%s", plw_entry_type_find(name) == NULL ? "" : "--", text);
    }
}

/* Two entries that cannot both be: the fault stands at the first. */
static void exclude(builder *work, const char *name, const char *other, const char *remedy) {
    const plw_stage_entry *entry = entry_of(work, name);
    const plw_stage_entry *second = entry_of(work, other);
    if (entry != NULL && second != NULL && !(second->type->kind == PLW_ENTRY_SWITCH && second->text[0] == 'n')) {
        char place[PLACE_SIZE];
        char text[2 * PLACE_SIZE];
        plw_stage_entry_place(work->description, second, place, sizeof place);
        snprintf(text, sizeof text, "cannot stand together with %s; %s", place, remedy);
        fault_entry(work, entry, text);
    }
}

/* ---- values ------------------------------------------------------------------------------------------------------ */

/* The limits as they are written, e.g. "1 ohm to 1 Mohm". */
static void fault_range(builder *work, const plw_stage_entry *entry, double least, double most) {
    char low[SHOWN_SIZE];
    char high[SHOWN_SIZE];
    char text[PLACE_SIZE];
    plw_quantity_format(least, entry->type->unit, 3, low, sizeof low);
    plw_quantity_format(most, entry->type->unit, 3, high, sizeof high);
    if (least == 0) {
        snprintf(low, sizeof low, "0");
    }
    if (most == 0) {
        snprintf(high, sizeof high, "0");
    }
    snprintf(text, sizeof text, "%s is out of range; give %s to %s, e.g. %s", entry->text, low, high,
             entry->type->example);
    fault_entry(work, entry, text);
}

/* Ret: whether the value is good. */
static bool read_quantity(builder *work, const plw_stage_entry *entry, double *value) {
    plw_error error = {.status = PLW_OK};
    double read = (double)NAN;
    if (plw_quantity_parse(entry->text, entry->type->unit, &read, &error) != PLW_OK) {
        fault_entry(work, entry, error.text);
        return false;
    }
    if (!(read >= entry->type->least && read <= entry->type->most)) {
        fault_range(work, entry, entry->type->least, entry->type->most);
        return false;
    }
    *value = read;
    return true;
}

/* The value of an entry, left as it is when the entry is absent or at fault. */
static void take_quantity(builder *work, const char *name, double *value) {
    const plw_stage_entry *entry = entry_of(work, name);
    if (entry != NULL) {
        (void)read_quantity(work, entry, value);
    }
}

/* The schema and plw_stage_describe() have seen to it that it is yes or no. */
static void take_switch(builder *work, const char *name, bool *value) {
    const plw_stage_entry *entry = entry_of(work, name);
    if (entry != NULL) {
        *value = entry->text[0] == 'y';
    }
}

static void take_parallel(builder *work, plw_stage *stage) {
    const plw_stage_entry *entry = entry_of(work, "parallel");
    if (entry == NULL) {
        return;
    }
    char *end = NULL;
    const long count = entry->text[0] >= '0' && entry->text[0] <= '9' ? strtol(entry->text, &end, 10) : 0;
    if (end == NULL || *end != '\0' || count < 1 || count > PLW_PARALLEL_MOST) {
        fault_entry(work, entry, "is no whole number from 1 to 16; write for instance 2");
    } else {
        stage->parallel = (unsigned)count;
    }
}

static void fault_choice(builder *work, const plw_stage_entry *entry) {
    size_t count = 0;
    while (entry->type->choices[count] != NULL) {
        count++;
    }
    char text[PLACE_SIZE];
    size_t nearest = 0;
    if (plw_nearest_names(entry->text, entry->type->choices, count, &nearest, 1) == 1) {
        snprintf(text, sizeof text, "'%s' is not known; is it %s?", entry->text, entry->type->choices[nearest]);
    } else {
        snprintf(text, sizeof text, "'%s' is not known; write", entry->text);
        for (size_t i = 0; i < count; i++) {
            const size_t used = strlen(text);
            const char *joint = i + 1 == count ? " or" : ",";
            snprintf(text + used, sizeof text - used, "%s %s", i == 0 ? "" : joint, entry->type->choices[i]);
        }
    }
    fault_entry(work, entry, text);
}

/* ---- tube and its connection ------------------------------------------------------------------------------------- */

static void take_tube(builder *work, plw_catalogue *catalogue, plw_stage *stage) {
    const plw_stage_entry *entry = entry_of(work, "tube");
    if (entry == NULL) {
        fault_missing(work, "--tube: is missing; name the output tube, e.g. --tube 6V6GT");
        return;
    }
    if (catalogue == NULL) {
        return;
    }
    plw_error error = {.status = PLW_OK};
    const plw_tube *tube = NULL;
    int variant = -1;
    const plw_status status = plw_catalogue_find(catalogue, entry->text, &tube, &variant, &error);
    if (status == PLW_E_NOT_FOUND) {
        fault_entry(work, entry, error.text);
    } else if (status != PLW_OK) { /* the tube's own file is at fault: it has its place in it */
        plw_error_add(&work->faults, "%s", error.text);
        work->faults.status = status;
    } else if (tube->kind == PLW_KIND_RECTIFIER) {
        fault_entry(work, entry, "is a rectifier; name an output tube");
    } else if (!tube->has_model) {
        fault_entry(work, entry, "has no coefficients in its tube file yet; fit them first, or choose another type");
    } else {
        stage->tube = tube;
        stage->variant = variant;
    }
}

static bool has_screen(const plw_tube *tube) {
    return tube->kind == PLW_KIND_PENTODE || tube->kind == PLW_KIND_BEAM;
}

static void take_connection(builder *work, plw_stage *stage) {
    const bool screen = stage->tube == NULL || has_screen(stage->tube);
    stage->connection = screen ? PLW_CONNECTION_PENTODE : PLW_CONNECTION_TRIODE;
    const plw_stage_entry *entry = entry_of(work, "connection");
    if (entry == NULL) {
        return;
    }
    for (int i = 0; i <= (int)PLW_CONNECTION_ULTRALINEAR; i++) {
        if (strcmp(entry->text, plw_connection_name((plw_connection)i)) == 0) {
            stage->connection = (plw_connection)i;
            if (!screen && stage->connection != PLW_CONNECTION_TRIODE) {
                fault_entry(work, entry, "the tube has no screen; leave this out");
            }
            return;
        }
    }
    fault_choice(work, entry);
}

static void refuse_all(builder *work, const char *const *names, size_t count, const char *why) {
    for (size_t i = 0; i < count; i++) {
        const plw_stage_entry *entry = entry_of(work, names[i]);
        if (entry != NULL && !(entry->type->kind == PLW_ENTRY_SWITCH && entry->text[0] == 'n')) {
            fault_entry(work, entry, why);
        }
    }
}

static void take_screen(builder *work, plw_stage *stage) {
    static const char *const screen_names[] = {"screen-supply", "screen-resistor", "screen-bypassed"};
    double tap_percent = 0;
    take_quantity(work, "tap", &tap_percent);
    stage->tap = tap_percent / 100.0;
    take_quantity(work, "screen-supply", &stage->screen_supply_volts);
    take_quantity(work, "screen-resistor", &stage->screen_resistor_ohms);
    take_switch(work, "screen-bypassed", &stage->screen_bypassed);
    const plw_stage_entry *tap = entry_of(work, "tap");
    if (tap != NULL && stage->connection != PLW_CONNECTION_ULTRALINEAR) {
        fault_entry(work, tap,
                    "a tap belongs to the ultralinear connection; add --connection ultralinear or leave it "
                    "out");
    }
    if (tap == NULL && stage->connection == PLW_CONNECTION_ULTRALINEAR && entry_of(work, "connection") != NULL) {
        fault_entry(work, entry_of(work, "connection"), "the tap is missing; add it, e.g. --tap 43%");
    }
    if (stage->tube != NULL && !has_screen(stage->tube)) {
        refuse_all(work, screen_names, 3, "the tube has no screen; leave this out");
    } else if (stage->connection != PLW_CONNECTION_PENTODE) {
        refuse_all(work, screen_names, 1, "the screen hangs on the plate winding in this connection; leave this out");
    }
    if (stage->screen_bypassed && entry_of(work, "screen-resistor") == NULL) {
        fault_entry(work, entry_of(work, "screen-bypassed"),
                    "there is no screen resistor; add it, e.g. "
                    "--screen-resistor 1k");
    }
}

/* ---- supply ------------------------------------------------------------------------------------------------------ */

/* 305V, 258V@10k, 271V@18mA.  Ret: whether it is good. */
static bool read_reading(builder *work, const plw_stage_entry *entry, plw_reading *reading) {
    char volts_text[PLACE_SIZE];
    snprintf(volts_text, sizeof volts_text, "%s", entry->text);
    char *at = strchr(volts_text, '@');
    if (at != NULL) {
        *at = '\0';
    }
    plw_error error = {.status = PLW_OK};
    if (plw_quantity_parse(volts_text, PLW_UNIT_VOLT, &reading->volts, &error) != PLW_OK) {
        fault_entry(work, entry, error.text);
        return false;
    }
    if (!(reading->volts >= entry->type->least && reading->volts <= entry->type->most)) {
        fault_range(work, entry, entry->type->least, entry->type->most);
        return false;
    }
    reading->amps = 0;
    if (at == NULL) {
        return true;
    }
    double ohms = (double)NAN;
    if (plw_quantity_parse(at + 1, PLW_UNIT_AMPERE, &reading->amps, NULL) != PLW_OK || strpbrk(at + 1, "aA") == NULL) {
        reading->amps = (double)NAN;
        if (plw_quantity_parse(at + 1, PLW_UNIT_OHM, &ohms, NULL) == PLW_OK && ohms > 0) {
            reading->amps = reading->volts / ohms;
        }
    }
    if (!(reading->amps >= 0 && reading->amps <= 10)) {
        fault_entry(work, entry,
                    "behind the @ stands the resistor or the current of the reading, up to 10 A; write for "
                    "instance 258V@10k or 271V@18mA");
        return false;
    }
    return true;
}

static void take_readings(builder *work, plw_stage *stage) {
    plw_reading readings[PLW_READINGS_MOST];
    size_t count = 0;
    const plw_stage_entry *last = entry_of(work, "reading");
    bool good = last != NULL;
    for (size_t i = 0; i < work->description->count; i++) {
        const plw_stage_entry *entry = &work->description->entry[i];
        if (entry->type->kind != PLW_ENTRY_READING) {
            continue;
        }
        last = entry;
        if (count == PLW_READINGS_MOST) {
            fault_entry(work, entry, "is one reading too many; keep 16");
            return;
        }
        good = read_reading(work, entry, &readings[count]) && good;
        count++;
    }
    plw_error error = {.status = PLW_OK};
    if (good && plw_supply_readings(readings, count, &stage->supply, &error) != PLW_OK) {
        fault_entry(work, last, error.text);
    }
}

static void take_supply(builder *work, plw_stage *stage) {
    exclude(work, "supply", "reading", "give the voltage or the readings");
    exclude(work, "source-ohms", "reading", "the readings tell the resistance of the supply");
    const plw_stage_entry *supply = entry_of(work, "supply");
    const plw_stage_entry *source = entry_of(work, "source-ohms");
    double volts = (double)NAN;
    double ohms = 0;
    take_quantity(work, "source-ohms", &ohms);
    if (supply == NULL) {
        if (entry_of(work, "reading") != NULL) {
            take_readings(work, stage);
        } else if (source != NULL) {
            fault_entry(work, source, "the off-load voltage is missing; add it, e.g. --supply 305V");
        } else {
            fault_missing(work, "--supply: is missing; give the loaded supply voltage, e.g. --supply 285V, or bench "
                                "readings, e.g. --reading 305V --reading 271V@18mA");
        }
        return;
    }
    plw_error error = {.status = PLW_OK};
    if (read_quantity(work, supply, &volts)) {
        const plw_status status = ohms > 0 ? plw_supply_source(volts, ohms, &stage->supply, &error)
                                           : plw_supply_stiff(volts, &stage->supply, &error);
        if (status != PLW_OK) {
            fault_entry(work, supply, error.text);
        }
    }
}

/* A voltage above twice the rating is a slip of the pen: no choice of resistor brings it back. */
static void check_voltage(builder *work, const char *name, const plw_stage *stage, double volts, double rating,
                          const char *electrode) {
    const plw_stage_entry *entry = entry_of(work, name);
    if (entry != NULL && volts > 2.0 * rating) {
        char volts_shown[SHOWN_SIZE];
        char rating_shown[SHOWN_SIZE];
        char text[PLACE_SIZE];
        plw_quantity_format(volts, PLW_UNIT_VOLT, 3, volts_shown, sizeof volts_shown);
        plw_quantity_format(rating, PLW_UNIT_VOLT, 3, rating_shown, sizeof rating_shown);
        snprintf(text, sizeof text,
                 "%s is more than twice what the %s of %s is rated for (%s); lower it or choose another tube",
                 volts_shown, electrode, stage->tube->type, rating_shown);
        fault_entry(work, entry, text);
    }
}

static void check_ratings(builder *work, const plw_stage *stage) {
    const plw_ratings *ratings = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    /* The current that brings the plate to its rated dissipation at its rated voltage. */
    const double amps = isfinite(ratings->plate_watts / ratings->plate_volts)
                            ? ratings->plate_watts / ratings->plate_volts * (double)stage->parallel
                            : 0.0;
    double volts = 0;
    double ohms = 0;
    plw_supply_at(&stage->supply, amps + stage->other_amps, &volts, &ohms);
    check_voltage(work, entry_of(work, "supply") == NULL ? "reading" : "supply", stage, volts, ratings->plate_volts,
                  "plate");
    check_voltage(work, "screen-supply", stage, stage->screen_supply_volts, ratings->screen_volts, "screen");
}

/* ---- load and bias ----------------------------------------------------------------------------------------------- */

static void take_load(builder *work, plw_stage *stage) {
    const size_t faults_before = strlen(work->faults.text);
    take_quantity(work, "load", &stage->load_ohms);
    take_quantity(work, "ratio", &stage->ratio);
    take_quantity(work, "speaker", &stage->speaker_ohms);
    take_quantity(work, "primary-ohms", &stage->primary_ohms);
    take_quantity(work, "secondary-ohms", &stage->secondary_ohms);
    const plw_stage_entry *load = entry_of(work, "load");
    const plw_stage_entry *ratio = entry_of(work, "ratio");
    const plw_stage_entry *speaker = entry_of(work, "speaker");
    if (load == NULL && (ratio == NULL || speaker == NULL)) {
        fault_missing(work, "--load: is missing; give the reflected load, e.g. --load 5k, or ratio and speaker, e.g. "
                            "--ratio 25 --speaker 8");
        return;
    }
    plw_error error = {.status = PLW_OK};
    if (strlen(work->faults.text) == faults_before && plw_stage_settle_load(stage, &error) != PLW_OK) {
        fault_named(work, error.text);
    }
}

static void take_bias(builder *work, plw_stage *stage) {
    exclude(work, "fixed-bias", "cathode-resistor", "give one of them");
    exclude(work, "fixed-bias", "resistor-each", "with fixed bias there is no cathode resistor");
    exclude(work, "fixed-bias", "unbypassed", "with fixed bias there is no cathode resistor");
    take_quantity(work, "cathode-resistor", &stage->cathode_resistor_ohms);
    take_quantity(work, "fixed-bias", &stage->fixed_bias_volts);
    take_switch(work, "resistor-each", &stage->resistor_each);
    take_switch(work, "unbypassed", &stage->unbypassed);
}

plw_status plw_stage_build(const plw_stage_description *description, plw_catalogue *catalogue, plw_stage *stage,
                           plw_error *error) {
    builder work = {.description = description, .faults = {.status = PLW_OK}};
    plw_stage made = plw_stage_ideal();
    take_tube(&work, catalogue, &made);
    take_parallel(&work, &made);
    take_connection(&work, &made);
    take_screen(&work, &made);
    take_supply(&work, &made);
    take_quantity(&work, "other-current", &made.other_amps);
    take_load(&work, &made);
    take_bias(&work, &made);
    take_quantity(&work, "drive", &made.drive_peak_volts);
    if (work.faults.status == PLW_OK && made.tube != NULL) {
        check_ratings(&work, &made);
    }
    plw_error fault = {.status = PLW_OK};
    if (work.faults.status == PLW_OK && made.tube != NULL && plw_stage_validate(&made, false, &fault) != PLW_OK) {
        fault_named(&work, fault.text);
    }
    if (work.faults.status != PLW_OK) {
        return plw_fail(error, work.faults.status, "%s", work.faults.text);
    }
    *stage = made;
    return PLW_OK;
}
