/* How near two tube types are electrically.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/nearness.h"

#include <math.h>
#include <string.h>

/* One part of the distance.  `most` keeps one part from hiding all others: a heater that needs another winding needs
 * another winding, whatever its volts. */
static const struct {
    double factor; /* a change by which counts 1 */
    double most;
    int side; /* 0: either way; -1: counts only below 1; +1: only above 1 */
} parts[PLW_NEAR_PARTS] = {
    [PLW_NEAR_PLATE_WATTS] = {1.25, 10.0, 0},
    [PLW_NEAR_PLATE_VOLTS] = {1.25, 10.0, -1},
    [PLW_NEAR_SCREEN_VOLTS] = {1.25, 10.0, -1},
    [PLW_NEAR_ZERO_BIAS] = {1.5, 10.0, 0},
    [PLW_NEAR_MU] = {1.4, 10.0, 0},
    [PLW_NEAR_BIAS] = {1.4, 10.0, 0},
    [PLW_NEAR_DRIVE] = {1.4, 10.0, 0},
    [PLW_NEAR_HEATER_VOLTS] = {1.1, 1.5, 0},
    [PLW_NEAR_HEATER_AMPS] = {2.0, 10.0, 1},
    [PLW_NEAR_OUTPUT_AMPS] = {1.25, 10.0, 0},
    [PLW_NEAR_INVERSE_VOLTS] = {1.25, 10.0, -1},
    [PLW_NEAR_DROP] = {1.5, 10.0, 0},
};

/* What a figure that only one of both has counts: it may be anything usual. */
#define UNKNOWN_COUNTS 1.0

/* What the base counts. */
static const double base_counts[] = {
    [PLW_BASE_SAME] = 0.0, [PLW_BASE_PINS_UNKNOWN] = 0.3, [PLW_BASE_OTHER_PINS] = 0.5, [PLW_BASE_OTHER] = 0.8};

/* Of a tube without a printed row: a usual point of rest, as parts of the rated volts and dissipation. */
#define REST_VOLTS_PART 0.8
#define REST_WATTS_PART 0.7

/* Below it a grid no longer counts as negative. */
#define LEAST_BIAS_VOLTS 0.05

/* ---- an entry ---------------------------------------------------------------------------------------------------- */

static const plw_variant *variant_of(plw_tube_entry entry) {
    const bool own = entry.variant >= 0 && (size_t)entry.variant < entry.tube->variants_count;
    return own ? &entry.tube->variants[entry.variant] : NULL;
}

const plw_ratings *plw_tube_entry_ratings(plw_tube_entry entry) {
    return plw_tube_ratings(entry.tube, entry.variant, PLW_CONNECTION_PENTODE);
}

const char *plw_tube_entry_type(plw_tube_entry entry) {
    return variant_of(entry) == NULL ? entry.tube->type : variant_of(entry)->type;
}

double plw_tube_entry_heater_volts(plw_tube_entry entry) {
    const plw_variant *variant = variant_of(entry);
    return variant != NULL && isfinite(variant->heater_volts) ? variant->heater_volts : entry.tube->heater_volts;
}

double plw_tube_entry_heater_amps(plw_tube_entry entry) {
    const plw_variant *variant = variant_of(entry);
    return variant != NULL && isfinite(variant->heater_amps) ? variant->heater_amps : entry.tube->heater_amps;
}

/* ---- base and pins ----------------------------------------------------------------------------------------------- */

/* "cathode and suppressor" is where the cathode is; what carries no lead of the circuit is passed over. */
static bool same_electrode(const char *one, const char *other) {
    const char *joint = strstr(one, " and ");
    const size_t length = joint == NULL ? strcspn(one, ",") : (size_t)(joint - one);
    return strncmp(one, other, length) == 0 && (other[length] == '\0' || other[length] == ',' || other[length] == ' ');
}

static bool is_wired(const char *electrode) {
    static const char *const idle[] = {"internal", "suppressor", "shield", "shell", "heater center tap"};
    for (size_t i = 0; i < sizeof idle / sizeof idle[0]; i++) {
        if (strcmp(electrode, idle[i]) == 0) {
            return false;
        }
    }
    return true;
}

/* Does every wired pin of one lead to the same electrode of the other? */
static bool pins_serve(const plw_tube *one, const plw_tube *other) {
    for (size_t i = 0; i < one->pins_count; i++) {
        const plw_pin *pin = &one->pins[i];
        bool found = !is_wired(pin->electrode);
        for (size_t k = 0; k < other->pins_count && !found; k++) {
            found = other->pins[k].number == pin->number && same_electrode(pin->electrode, other->pins[k].electrode);
        }
        if (!found) {
            return false;
        }
    }
    return true;
}

static plw_base_match match_bases(const plw_tube *wanted, const plw_tube *candidate) {
    if (wanted->base == NULL || candidate->base == NULL || strcmp(wanted->base, candidate->base) != 0) {
        return PLW_BASE_OTHER;
    }
    if (wanted->pins_count == 0 || candidate->pins_count == 0) {
        return wanted == candidate ? PLW_BASE_SAME : PLW_BASE_PINS_UNKNOWN;
    }
    return pins_serve(wanted, candidate) || pins_serve(candidate, wanted) ? PLW_BASE_SAME : PLW_BASE_OTHER_PINS;
}

/* ---- the point of comparison ------------------------------------------------------------------------------------- */

/* With cathode bias alone printed, the grid volts follow from the current in the resistor. */
static double row_grid_volts(const plw_row *row, bool screened) {
    return isfinite(row->grid_volts)
               ? row->grid_volts
               : -row->cathode_resistor_ohms * (row->plate_amps + (screened ? row->screen_amps : 0.0));
}

static bool take_point(const plw_law *law, double plate_volts, double screen_volts, double grid_volts,
                       plw_nearness *n) {
    const bool screened = law->kind == PLW_LAW_PENTODE;
    if (!(plate_volts > 0.0) || !(grid_volts < 0.0) || (screened && !(screen_volts > 0.0))) {
        return false;
    }
    plw_currents c;
    plw_law_evaluate(law, plate_volts, screened ? screen_volts : 0.0, grid_volts, &c);
    n->plate_volts = plate_volts;
    n->screen_volts = screened ? screen_volts : (double)NAN;
    n->cathode_amps = c.plate_amps + c.screen_amps;
    n->wanted_grid_volts = grid_volts;
    return n->cathode_amps > 0.0;
}

/* The first printed row of the tube's own connection that is not doubtful; else a usual point by its ratings. */
static bool find_point(plw_tube_entry wanted, plw_nearness *n) {
    const plw_tube *tube = wanted.tube;
    const plw_law *law = &tube->model.law;
    const bool screened = law->kind == PLW_LAW_PENTODE;
    const plw_connection own = screened ? PLW_CONNECTION_PENTODE : PLW_CONNECTION_TRIODE;
    for (size_t i = 0; i < tube->rows_count; i++) {
        const plw_row *row = &tube->rows[i];
        if (row->connection == own && row->provenance.confidence != PLW_CONFIDENCE_LOW &&
            take_point(law, row->plate_volts, row->screen_volts, row_grid_volts(row, screened), n)) {
            return true;
        }
    }
    const plw_ratings *ratings = plw_tube_entry_ratings(wanted);
    if (ratings == NULL) {
        return false;
    }
    const double volts = REST_VOLTS_PART * ratings->plate_volts;
    const double screen_volts = screened ? fmin(volts, REST_VOLTS_PART * ratings->screen_volts) : 0.0;
    const double amps = REST_WATTS_PART * ratings->plate_watts / volts;
    return amps > 0.0 &&
           take_point(law, volts, screen_volts, plw_law_grid_volts_for(law, volts, screen_volts, amps), n);
}

/* What a volt at the grid sends through a load of plate volts over cathode current, a usual size. */
static double loaded_siemens(const plw_law *law, const plw_nearness *n, double grid_volts) {
    plw_currents c;
    plw_law_evaluate(law, n->plate_volts, n->screen_volts, grid_volts, &c);
    return c.plate_by_grid / (1.0 + c.plate_by_plate * n->plate_volts / n->cathode_amps);
}

static double zero_bias_amps(const plw_law *law, const plw_nearness *n) {
    plw_currents c;
    plw_law_evaluate(law, n->plate_volts, n->screen_volts, 0.0, &c);
    return c.plate_amps + c.screen_amps;
}

/* Screen to grid, or plate to grid: how the cathode current follows the one and the other. */
static double amplification(const plw_law *law, const plw_nearness *n, double grid_volts) {
    plw_currents c;
    plw_law_evaluate(law, n->plate_volts, n->screen_volts, grid_volts, &c);
    return law->kind == PLW_LAW_PENTODE
               ? (c.plate_by_grid + c.screen_by_grid) / (c.plate_by_screen + c.screen_by_screen)
               : c.plate_by_grid / c.plate_by_plate;
}

static bool compare_laws(plw_tube_entry wanted, plw_tube_entry candidate, plw_nearness *n) {
    const plw_law *one = &wanted.tube->model.law;
    const plw_law *other = &candidate.tube->model.law;
    if (!wanted.tube->has_model || !candidate.tube->has_model || one->kind != other->kind || !find_point(wanted, n)) {
        return false;
    }
    const double screen_volts = one->kind == PLW_LAW_PENTODE ? n->screen_volts : 0.0;
    n->grid_volts = candidate.tube == wanted.tube
                        ? n->wanted_grid_volts
                        : plw_law_grid_volts_for(other, n->plate_volts, screen_volts, n->cathode_amps);
    if (!(n->grid_volts < -LEAST_BIAS_VOLTS)) {
        return false;
    }
    n->ratio[PLW_NEAR_ZERO_BIAS] = zero_bias_amps(other, n) / zero_bias_amps(one, n);
    n->ratio[PLW_NEAR_MU] = amplification(other, n, n->grid_volts) / amplification(one, n, n->wanted_grid_volts);
    n->ratio[PLW_NEAR_BIAS] = n->grid_volts / n->wanted_grid_volts;
    n->ratio[PLW_NEAR_DRIVE] = loaded_siemens(one, n, n->wanted_grid_volts) / loaded_siemens(other, n, n->grid_volts);
    return true;
}

/* ---- ratings ----------------------------------------------------------------------------------------------------- */

static void compare_ratings(plw_tube_entry wanted, plw_tube_entry candidate, plw_nearness *n) {
    const plw_ratings *one = plw_tube_entry_ratings(wanted);
    const plw_ratings *other = plw_tube_entry_ratings(candidate);
    if (one != NULL && other != NULL) {
        n->ratio[PLW_NEAR_PLATE_WATTS] = other->plate_watts / one->plate_watts;
        n->ratio[PLW_NEAR_PLATE_VOLTS] = other->plate_volts / one->plate_volts;
        n->ratio[PLW_NEAR_SCREEN_VOLTS] = other->screen_volts / one->screen_volts;
    }
}

static void compare_rectifiers(const plw_tube *wanted, const plw_tube *candidate, plw_nearness *n) {
    const plw_rectifier_data *one = &wanted->rectifier;
    const plw_rectifier_data *other = &candidate->rectifier;
    n->ratio[PLW_NEAR_OUTPUT_AMPS] = other->output_amps / one->output_amps;
    n->ratio[PLW_NEAR_INVERSE_VOLTS] = other->peak_inverse_volts / one->peak_inverse_volts;
    n->ratio[PLW_NEAR_DROP] = pow(one->perveance / other->perveance, 2.0 / 3.0);
}

static void compare_heaters(plw_tube_entry wanted, plw_tube_entry candidate, plw_nearness *n) {
    const double volts = plw_tube_entry_heater_volts(candidate) / plw_tube_entry_heater_volts(wanted);
    n->ratio[PLW_NEAR_HEATER_VOLTS] = volts;
    if (volts > 0.95 && volts < 1.05) {
        n->ratio[PLW_NEAR_HEATER_AMPS] = plw_tube_entry_heater_amps(candidate) / plw_tube_entry_heater_amps(wanted);
    }
}

/* ---- distance ---------------------------------------------------------------------------------------------------- */

static double part_counts(plw_near_part part, double ratio) {
    const double logarithm = log(ratio);
    const bool counts = parts[part].side == 0 || (double)parts[part].side * logarithm > 0.0;
    return counts ? fmin(fabs(logarithm) / log(parts[part].factor), parts[part].most) : 0.0;
}

/* Does the part apply to tubes of this kind?  A screen rating is unknown only where there is a screen. */
static bool applies(plw_near_part part, const plw_tube *tube) {
    const bool rectifier = tube->kind == PLW_KIND_RECTIFIER;
    switch (part) {
    case PLW_NEAR_OUTPUT_AMPS:
    case PLW_NEAR_INVERSE_VOLTS:
    case PLW_NEAR_DROP:
        return rectifier;
    case PLW_NEAR_HEATER_VOLTS:
        return true;
    case PLW_NEAR_HEATER_AMPS:
        return false; /* with other volts there is nothing to compare */
    case PLW_NEAR_SCREEN_VOLTS:
        return tube->kind == PLW_KIND_PENTODE || tube->kind == PLW_KIND_BEAM;
    default:
        return !rectifier;
    }
}

static double distance_of(const plw_tube *wanted, const plw_nearness *n) {
    double squares = base_counts[n->base] * base_counts[n->base];
    for (int part = 0; part < PLW_NEAR_PARTS; part++) {
        double counts = 0.0;
        if (isfinite(n->ratio[part]) && n->ratio[part] > 0.0) {
            counts = part_counts((plw_near_part)part, n->ratio[part]);
        } else if (applies((plw_near_part)part, wanted)) {
            counts = UNKNOWN_COUNTS;
        }
        squares += counts * counts;
    }
    return sqrt(squares);
}

bool plw_nearness_of(plw_tube_entry wanted, plw_tube_entry candidate, plw_nearness *nearness) {
    const double unknown = (double)NAN;
    plw_nearness n = {.plate_volts = unknown,
                      .screen_volts = unknown,
                      .cathode_amps = unknown,
                      .wanted_grid_volts = unknown,
                      .grid_volts = unknown};
    for (int part = 0; part < PLW_NEAR_PARTS; part++) {
        n.ratio[part] = unknown;
    }
    const bool rectifier = wanted.tube->kind == PLW_KIND_RECTIFIER;
    if (rectifier != (candidate.tube->kind == PLW_KIND_RECTIFIER)) {
        return false;
    }
    if (rectifier) {
        compare_rectifiers(wanted.tube, candidate.tube, &n);
    } else if (compare_laws(wanted, candidate, &n)) {
        compare_ratings(wanted, candidate, &n);
    } else {
        return false;
    }
    compare_heaters(wanted, candidate, &n);
    n.base = match_bases(wanted.tube, candidate.tube);
    n.distance = distance_of(wanted.tube, &n);
    *nearness = n;
    return true;
}

static bool comes_before(const plw_near_tube *one, const plw_near_tube *other) {
    if (one->nearness.distance != other->nearness.distance) {
        return one->nearness.distance < other->nearness.distance;
    }
    return strcmp(plw_tube_entry_type(one->entry), plw_tube_entry_type(other->entry)) < 0;
}

size_t plw_nearest_tubes(plw_tube_entry wanted, const plw_tube_entry *candidates, size_t count, plw_near_tube *found,
                         size_t most) {
    size_t used = 0;
    for (size_t i = 0; i < count; i++) {
        plw_near_tube near = {.entry = candidates[i]};
        const bool itself = candidates[i].tube == wanted.tube && candidates[i].variant == wanted.variant;
        if (itself || !plw_nearness_of(wanted, candidates[i], &near.nearness) ||
            !(near.nearness.distance < PLW_NEAR_DISTANCE_MOST)) {
            continue;
        }
        if (used == most && !comes_before(&near, &found[most - 1])) {
            continue;
        }
        size_t at = used < most ? used++ : most - 1;
        for (; at > 0 && comes_before(&near, &found[at - 1]); at--) {
            found[at] = found[at - 1];
        }
        found[at] = near;
    }
    return used;
}
