/* The circuit made from the entries that describe it, each checked, its place named when it is at fault.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "report/stage_builder.h"

enum { PLACE_SIZE = 512, SHOWN_SIZE = 32 };

/* The line of a supply reaches this many times the current of rated dissipation at rated volts; of a tube that is not
 * told, what a usual output tube draws. */
#define BEYOND_RATING 3.0
#define USUAL_AMPS 0.05

/* ---- faults ------------------------------------------------------------------------------------------------------ */

/* An option at fault is a matter of usage; a file at fault one of data, and that is the graver. */
static void note_status(plw_builder *work, bool in_file) {
    if (work->faults.status != PLW_E_DATA) {
        work->faults.status = in_file ? PLW_E_DATA : PLW_E_USAGE;
    }
}

void plw_builder_fault(plw_builder *work, const plw_stage_entry *entry, const char *text) {
    char place[PLACE_SIZE];
    plw_stage_entry_place(work->description, entry, place, sizeof place);
    note_status(work, entry->line > 0);
    plw_error_add(&work->faults, "%s: %s", place, text);
}

void plw_builder_missing(plw_builder *work, const char *text) {
    note_status(work, false);
    if (work->description->file != NULL) {
        plw_error_add(&work->faults, "%s: %s", work->description->file, text);
    } else {
        plw_error_add(&work->faults, "%s", text);
    }
}

const plw_stage_entry *plw_builder_entry(const plw_builder *work, const char *name) {
    return plw_stage_entry_first(work->description, name);
}

/* A fault that the stage itself found: "load: 3 ohm contradicts ...". */
void plw_builder_fault_named(plw_builder *work, const char *text) {
    char name[PLACE_SIZE];
    snprintf(name, sizeof name, "%.*s", (int)strcspn(text, ":"), text);
    const plw_stage_entry *entry = plw_builder_entry(work, name);
    if (entry != NULL && strncmp(text + strlen(name), ": ", 2) == 0) {
        plw_builder_fault(work, entry, text + strlen(name) + 2);
    } else {
        note_status(work, work->description->file != NULL);
        plw_error_add(&work->faults, "%s%s", plw_entry_type_find(name) == NULL ? "" : "--", text);
    }
}

/* Two entries that cannot both be: the fault stands at the first. */
void plw_builder_exclude(plw_builder *work, const char *name, const char *other, const char *remedy) {
    const plw_stage_entry *entry = plw_builder_entry(work, name);
    const plw_stage_entry *second = plw_builder_entry(work, other);
    if (entry != NULL && second != NULL && !(second->type->kind == PLW_ENTRY_SWITCH && second->text[0] == 'n')) {
        char place[PLACE_SIZE];
        char text[2 * PLACE_SIZE];
        plw_stage_entry_place(work->description, second, place, sizeof place);
        snprintf(text, sizeof text, "cannot stand together with %s; %s", place, remedy);
        plw_builder_fault(work, entry, text);
    }
}

/* ---- values ------------------------------------------------------------------------------------------------------ */

/* The limits as they are written, e.g. "1 ohm to 1 Mohm". */
void plw_builder_fault_range(plw_builder *work, const plw_stage_entry *entry, double least, double most) {
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
    plw_builder_fault(work, entry, text);
}

/* Ret: whether the value is good. */
bool plw_builder_quantity(plw_builder *work, const plw_stage_entry *entry, double *value) {
    plw_error error = {.status = PLW_OK};
    double read = (double)NAN;
    if (plw_quantity_parse(entry->text, entry->type->unit, &read, &error) != PLW_OK) {
        plw_builder_fault(work, entry, error.text);
        return false;
    }
    if (!(read >= entry->type->least && read <= entry->type->most)) {
        plw_builder_fault_range(work, entry, entry->type->least, entry->type->most);
        return false;
    }
    *value = read;
    return true;
}

/* The value of an entry, left as it is when the entry is absent or at fault. */
void plw_builder_take(plw_builder *work, const char *name, double *value) {
    const plw_stage_entry *entry = plw_builder_entry(work, name);
    if (entry != NULL) {
        (void)plw_builder_quantity(work, entry, value);
    }
}

/* The schema and plw_stage_describe() have seen to it that it is yes or no. */
static void take_switch(plw_builder *work, const char *name, bool *value) {
    const plw_stage_entry *entry = plw_builder_entry(work, name);
    if (entry != NULL) {
        *value = entry->text[0] == 'y';
    }
}

static void take_parallel(plw_builder *work, plw_stage *stage) {
    const plw_stage_entry *entry = plw_builder_entry(work, "parallel");
    if (entry == NULL) {
        return;
    }
    char *end = NULL;
    const long count = entry->text[0] >= '0' && entry->text[0] <= '9' ? strtol(entry->text, &end, 10) : 0;
    if (end == NULL || *end != '\0' || count < 1 || count > PLW_PARALLEL_MOST) {
        plw_builder_fault(work, entry, "is no whole number from 1 to 16; write for instance 2");
    } else {
        stage->parallel = (unsigned)count;
    }
}

void plw_builder_fault_choice(plw_builder *work, const plw_stage_entry *entry) {
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
    plw_builder_fault(work, entry, text);
}

const plw_tube *plw_builder_tube(plw_builder *work, plw_catalogue *catalogue, const plw_stage_entry *entry,
                                 int *variant) {
    plw_error error = {.status = PLW_OK};
    const plw_tube *tube = NULL;
    const plw_status status = plw_catalogue_find(catalogue, entry->text, &tube, variant, &error);
    if (status == PLW_OK) {
        return tube;
    }
    if (status == PLW_E_NOT_FOUND) {
        plw_builder_fault(work, entry, error.text);
    } else { /* the tube's own file is at fault: it has its place in it */
        plw_error_add(&work->faults, "%s", error.text);
        work->faults.status = status;
    }
    return NULL;
}

/* ---- tube and its connection ------------------------------------------------------------------------------------- */

static void take_tube(plw_builder *work, plw_catalogue *catalogue, plw_stage *stage) {
    const plw_stage_entry *entry = plw_builder_entry(work, "tube");
    if (entry == NULL) {
        plw_builder_missing(work, "--tube: is missing; name the output tube, e.g. --tube 6V6GT");
        return;
    }
    if (catalogue == NULL) {
        return;
    }
    int variant = -1;
    const plw_tube *tube = plw_builder_tube(work, catalogue, entry, &variant);
    if (tube == NULL) {
        return;
    }
    if (tube->kind == PLW_KIND_RECTIFIER) {
        char fault[96];
        snprintf(fault, sizeof fault, "%.40s is a rectifier; name an output tube", tube->type);
        plw_builder_fault(work, entry, fault);
    } else if (!tube->has_model) {
        plw_builder_fault(work, entry,
                          "has no coefficients in its tube file yet; fit them first, or choose another type");
    } else {
        stage->tube = tube;
        stage->variant = variant;
    }
}

static bool has_screen(const plw_tube *tube) {
    return tube->kind == PLW_KIND_PENTODE || tube->kind == PLW_KIND_BEAM;
}

static void take_connection(plw_builder *work, plw_stage *stage) {
    const bool screen = stage->tube == NULL || has_screen(stage->tube);
    stage->connection = screen ? PLW_CONNECTION_PENTODE : PLW_CONNECTION_TRIODE;
    const plw_stage_entry *entry = plw_builder_entry(work, "connection");
    if (entry == NULL) {
        return;
    }
    for (int i = 0; i <= (int)PLW_CONNECTION_ULTRALINEAR; i++) {
        if (strcmp(entry->text, plw_connection_name((plw_connection)i)) == 0) {
            stage->connection = (plw_connection)i;
            if (!screen && stage->connection != PLW_CONNECTION_TRIODE) {
                plw_builder_fault(work, entry, "the tube has no screen; leave this out");
            }
            return;
        }
    }
    plw_builder_fault_choice(work, entry);
}

static void refuse_all(plw_builder *work, const char *const *names, size_t count, const char *why) {
    for (size_t i = 0; i < count; i++) {
        const plw_stage_entry *entry = plw_builder_entry(work, names[i]);
        if (entry != NULL && !(entry->type->kind == PLW_ENTRY_SWITCH && entry->text[0] == 'n')) {
            plw_builder_fault(work, entry, why);
        }
    }
}

static void take_screen(plw_builder *work, plw_stage *stage) {
    static const char *const screen_names[] = {"screen-supply", "screen-resistor", "screen-bypassed"};
    double tap_percent = 0;
    plw_builder_take(work, "tap", &tap_percent);
    stage->tap = tap_percent / 100.0;
    plw_builder_take(work, "screen-supply", &stage->screen_supply_volts);
    plw_builder_take(work, "screen-resistor", &stage->screen_resistor_ohms);
    take_switch(work, "screen-bypassed", &stage->screen_bypassed);
    const plw_stage_entry *tap = plw_builder_entry(work, "tap");
    if (tap != NULL && stage->connection != PLW_CONNECTION_ULTRALINEAR) {
        plw_builder_fault(work, tap,
                          "a tap belongs to the ultralinear connection; add --connection ultralinear or leave it "
                          "out");
    }
    if (tap == NULL && stage->connection == PLW_CONNECTION_ULTRALINEAR &&
        plw_builder_entry(work, "connection") != NULL) {
        plw_builder_fault(work, plw_builder_entry(work, "connection"), "the tap is missing; add it, e.g. --tap 43%");
    }
    if (stage->tube != NULL && !has_screen(stage->tube)) {
        refuse_all(work, screen_names, 3, "the tube has no screen; leave this out");
    } else if (stage->connection != PLW_CONNECTION_PENTODE) {
        refuse_all(work, screen_names, 1, "the screen hangs on the plate winding in this connection; leave this out");
    }
    if (stage->screen_bypassed && plw_builder_entry(work, "screen-resistor") == NULL) {
        plw_builder_fault(work, plw_builder_entry(work, "screen-bypassed"),
                          "there is no screen resistor; add it, e.g. "
                          "--screen-resistor 1k");
    }
}

/* ---- supply ------------------------------------------------------------------------------------------------------ */

/* A voltage above twice the rating is a slip of the pen: no choice of resistor brings it back. */
static void check_voltage(plw_builder *work, const char *name, const plw_stage *stage, double volts, double rating,
                          const char *electrode) {
    const plw_stage_entry *entry = plw_builder_entry(work, name);
    if (entry != NULL && volts > 2.0 * rating) {
        char volts_shown[SHOWN_SIZE];
        char rating_shown[SHOWN_SIZE];
        char text[PLACE_SIZE];
        plw_quantity_format(volts, PLW_UNIT_VOLT, 3, volts_shown, sizeof volts_shown);
        plw_quantity_format(rating, PLW_UNIT_VOLT, 3, rating_shown, sizeof rating_shown);
        snprintf(text, sizeof text,
                 "%s is more than twice what the %s of %s is rated for (%s); lower it or choose another tube",
                 volts_shown, electrode, stage->tube->type, rating_shown);
        plw_builder_fault(work, entry, text);
    }
}

static void check_ratings(plw_builder *work, const plw_stage *stage) {
    const plw_ratings *ratings = plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    /* The current that brings the plate to its rated dissipation at its rated voltage. */
    const double amps = isfinite(ratings->plate_watts / ratings->plate_volts)
                            ? ratings->plate_watts / ratings->plate_volts * (double)stage->parallel
                            : 0.0;
    double volts = 0;
    double ohms = 0;
    plw_supply_at(&stage->supply, amps + stage->other_amps, &volts, &ohms);
    static const char *const names[] = {"supply", "winding", "reading"};
    size_t name = 0;
    while (name < 2 && plw_builder_entry(work, names[name]) == NULL) {
        name++;
    }
    check_voltage(work, names[name], stage, volts, ratings->plate_volts, "plate");
    check_voltage(work, "screen-supply", stage, stage->screen_supply_volts, ratings->screen_volts, "screen");
}

/* ---- load and bias ----------------------------------------------------------------------------------------------- */

static void take_load(plw_builder *work, plw_stage *stage) {
    const size_t faults_before = strlen(work->faults.text);
    plw_builder_take(work, "load", &stage->load_ohms);
    plw_builder_take(work, "ratio", &stage->ratio);
    plw_builder_take(work, "speaker", &stage->speaker_ohms);
    plw_builder_take(work, "primary-ohms", &stage->primary_ohms);
    plw_builder_take(work, "secondary-ohms", &stage->secondary_ohms);
    const plw_stage_entry *load = plw_builder_entry(work, "load");
    const plw_stage_entry *ratio = plw_builder_entry(work, "ratio");
    const plw_stage_entry *speaker = plw_builder_entry(work, "speaker");
    if (load == NULL && (ratio == NULL || speaker == NULL)) {
        plw_builder_missing(work,
                            "--load: is missing; give the reflected load, e.g. --load 5k, or ratio and speaker, e.g. "
                            "--ratio 25 --speaker 8");
        return;
    }
    plw_error error = {.status = PLW_OK};
    if (strlen(work->faults.text) == faults_before && plw_stage_settle_load(stage, &error) != PLW_OK) {
        plw_builder_fault_named(work, error.text);
    }
}

static void take_bias(plw_builder *work, plw_stage *stage) {
    plw_builder_exclude(work, "fixed-bias", "cathode-resistor", "give one of them");
    plw_builder_exclude(work, "fixed-bias", "resistor-each", "with fixed bias there is no cathode resistor");
    plw_builder_exclude(work, "fixed-bias", "unbypassed", "with fixed bias there is no cathode resistor");
    plw_builder_take(work, "cathode-resistor", &stage->cathode_resistor_ohms);
    plw_builder_take(work, "fixed-bias", &stage->fixed_bias_volts);
    take_switch(work, "resistor-each", &stage->resistor_each);
    take_switch(work, "unbypassed", &stage->unbypassed);
}

/* How far the line of a supply is to reach: what the tubes draw when run well beyond their rating. */
static double most_amps(const plw_stage *stage) {
    const plw_ratings *ratings =
        stage->tube == NULL ? NULL : plw_tube_ratings(stage->tube, stage->variant, stage->connection);
    double amps = USUAL_AMPS;
    if (ratings != NULL && isfinite(ratings->plate_watts / ratings->plate_volts)) {
        amps = ratings->plate_watts / ratings->plate_volts;
    }
    return BEYOND_RATING * amps * (double)stage->parallel + stage->other_amps;
}

static plw_status verdict(const plw_builder *work, plw_error *error) {
    return work->faults.status == PLW_OK ? PLW_OK : plw_fail(error, work->faults.status, "%s", work->faults.text);
}

plw_status plw_plate_supply_build(const plw_stage_description *description, plw_catalogue *catalogue,
                                  double most_amps_wanted, plw_plate_supply *supply, plw_error *error) {
    plw_builder work = {.description = description, .faults = {.status = PLW_OK}};
    plw_plate_supply made;
    plw_builder_take_supply(&work, catalogue, most_amps_wanted, &made);
    const plw_status status = verdict(&work, error);
    if (status == PLW_OK) {
        *supply = made;
    }
    return status;
}

plw_status plw_stage_build_supplied(const plw_stage_description *description, plw_catalogue *catalogue,
                                    plw_stage *stage, plw_plate_supply *supply, plw_error *error) {
    plw_builder work = {.description = description, .faults = {.status = PLW_OK}};
    plw_stage made = plw_stage_ideal();
    plw_plate_supply plate_supply;
    take_tube(&work, catalogue, &made);
    take_parallel(&work, &made);
    take_connection(&work, &made);
    take_screen(&work, &made);
    plw_builder_take(&work, "other-current", &made.other_amps);
    plw_builder_take_supply(&work, catalogue, most_amps(&made), &plate_supply);
    made.supply = plate_supply.line;
    made.transformerless = plate_supply.transformerless;
    take_load(&work, &made);
    take_bias(&work, &made);
    plw_builder_take(&work, "drive", &made.drive_peak_volts);
    plw_builder_take(&work, "driver-ohms", &made.driver_ohms);
    if (work.faults.status == PLW_OK && made.tube != NULL) {
        check_ratings(&work, &made);
    }
    plw_error fault = {.status = PLW_OK};
    if (work.faults.status == PLW_OK && made.tube != NULL && plw_stage_validate(&made, false, &fault) != PLW_OK) {
        plw_builder_fault_named(&work, fault.text);
    }
    const plw_status status = verdict(&work, error);
    if (status == PLW_OK) {
        *stage = made;
        if (supply != NULL) {
            *supply = plate_supply;
        }
    }
    return status;
}

plw_status plw_stage_build(const plw_stage_description *description, plw_catalogue *catalogue, plw_stage *stage,
                           plw_error *error) {
    return plw_stage_build_supplied(description, catalogue, stage, NULL, error);
}
