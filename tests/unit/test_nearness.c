/* Electrically near types: identities of the measure, what it refuses, its order; the trade's own substitutes come
 * first; the selection by kind, base, dissipation and heater.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/nearness.h"

#include "near.h"
#include "platewright/catalogue.h"
#include "platewright/tube_selection.h"
#include "unit/stages.h"

typedef struct {
    test_tube made;
    plw_row row;
    plw_pin pins[3];
} near_tube;

static char octal[] = "octal";
static char noval[] = "noval";
static char plate_pin[] = "plate", grid_pin[] = "grid 1", cathode_pin[] = "cathode", idle_pin[] = "internal";

/* A tube of 2.385 W with one printed row, on an octal base with pins 3, 5 and 8. */
static plw_tube_entry tube_with(near_tube *t, plw_law law, double plate_volts, double screen_volts, double grid_volts) {
    memset(t, 0, sizeof *t);
    make_tube(&t->made, law);
    plw_tube *tube = &t->made.tube;
    tube->base = octal;
    tube->heater_volts = 6.3;
    tube->heater_amps = 0.45;
    t->made.ratings[0].plate_watts = 2.385;
    t->made.ratings[0].plate_volts = 311.0;
    t->made.ratings[0].screen_volts = law.kind == PLW_LAW_PENTODE ? 287.0 : UNKNOWN;
    t->pins[0] = (plw_pin){3, plate_pin};
    t->pins[1] = (plw_pin){5, grid_pin};
    t->pins[2] = (plw_pin){8, cathode_pin};
    tube->pins = t->pins;
    tube->pins_count = 3;
    t->row = (plw_row){.connection = law.kind == PLW_LAW_PENTODE ? PLW_CONNECTION_PENTODE : PLW_CONNECTION_TRIODE,
                       .plate_volts = plate_volts,
                       .screen_volts = screen_volts,
                       .grid_volts = grid_volts};
    tube->rows = &t->row;
    tube->rows_count = 1;
    return (plw_tube_entry){tube, -1};
}

static plw_tube_entry beam(near_tube *t) {
    return tube_with(t, pentode_law(TEST_BEAM_SMALL), 251.0, 249.0, -12.3);
}

static plw_nearness nearness(plw_tube_entry wanted, plw_tube_entry candidate) {
    plw_nearness n;
    assert_true(plw_nearness_of(wanted, candidate, &n));
    return n;
}

/* ---- identities -------------------------------------------------------------------------------------------------- */

static void a_tube_is_nearest_to_itself(void **state) {
    (void)state;
    near_tube t, same;
    const plw_tube_entry wanted = beam(&t), twin = beam(&same);
    const plw_nearness n = nearness(wanted, twin);
    for (int part = PLW_NEAR_PLATE_WATTS; part <= PLW_NEAR_HEATER_AMPS; part++) {
        assert_near(n.ratio[part], 1.0, 1e-8, "the same tube");
    }
    assert_true(isnan(n.ratio[PLW_NEAR_OUTPUT_AMPS]) && isnan(n.ratio[PLW_NEAR_DROP]));
    assert_int_equal(n.base, PLW_BASE_SAME);
    assert_near(n.distance, 0.0, 1e-7, "the same tube");
    assert_near(n.plate_volts, 251.0, 0.0, "the printed row");
    assert_near(n.screen_volts, 249.0, 0.0, "the printed row");
    assert_near(n.wanted_grid_volts, -12.3, 0.0, "the printed row");
}

/* I = k (Vg + Vp/mu)^1.5: the same current needs the same sum. */
static void a_triode_of_another_mu_is_biased_by_it(void **state) {
    (void)state;
    near_tube one, other;
    const double plate_volts = 251.0;
    const plw_tube_entry wanted = tube_with(&one, power_law(8.0, 2.385e-3, 1.5), plate_volts, UNKNOWN, -17.3);
    const plw_tube_entry candidate = tube_with(&other, power_law(10.0, 2.385e-3, 1.5), plate_volts, UNKNOWN, -9.0);
    const plw_nearness n = nearness(wanted, candidate);
    assert_near_relative(n.grid_volts, -17.3 + plate_volts / 8.0 - plate_volts / 10.0, 1e-6, "the same sum");
    assert_near_relative(n.ratio[PLW_NEAR_MU], 10.0 / 8.0, 1e-6, "mu");
    assert_near_relative(n.ratio[PLW_NEAR_ZERO_BIAS], pow(8.0 / 10.0, 1.5), 1e-6, "zero grid volts");
    /* The same gm, mu over rp; in a load R the signal current a volt is gm / (1 + gm R / mu). */
    const double gm = 1.5 * n.cathode_amps / (-17.3 + plate_volts / 8.0);
    const double load = plate_volts / n.cathode_amps;
    assert_near_relative(n.ratio[PLW_NEAR_DRIVE], (1.0 + gm * load / 10.0) / (1.0 + gm * load / 8.0), 1e-6,
                         "equivalent circuit");
}

/* Twice the tube: at half the current for each half, so with more bias. */
static void a_larger_tube_is_biased_deeper(void **state) {
    (void)state;
    near_tube one, other;
    const plw_tube_entry wanted = tube_with(&one, power_law(8.0, 2e-3, 1.5), 251.0, UNKNOWN, -17.3);
    const plw_tube_entry candidate = tube_with(&other, power_law(8.0, 4e-3, 1.5), 251.0, UNKNOWN, -17.3);
    const plw_nearness n = nearness(wanted, candidate);
    const double part = pow(2.0, -1.0 / 1.5);
    assert_near_relative(n.grid_volts, part * (-17.3 + 251.0 / 8.0) - 251.0 / 8.0, 1e-6, "the same current");
    assert_near_relative(n.ratio[PLW_NEAR_ZERO_BIAS], 2.0, 1e-9, "perveance");
    assert_near_relative(n.ratio[PLW_NEAR_MU], 1.0, 1e-9, "mu");
    assert_true(n.ratio[PLW_NEAR_DRIVE] < 1.0);
}

/* ---- what counts ------------------------------------------------------------------------------------------------- */

static void each_part_adds_by_its_square(void **state) {
    (void)state;
    near_tube one, other;
    const plw_tube_entry wanted = beam(&one), candidate = beam(&other);
    other.made.ratings[0].plate_watts = 2.385 * 1.25;
    assert_near_relative(nearness(wanted, candidate).distance, 1.0, 1e-6, "dissipation off by its scale");
    other.made.ratings[0].plate_watts = 2.385 / 1.25;
    assert_near_relative(nearness(wanted, candidate).distance, 1.0, 1e-6, "as much the other way");
    other.made.ratings[0].screen_volts = 287.0 / (1.25 * 1.25);
    assert_near_relative(nearness(wanted, candidate).distance, sqrt(5.0), 1e-6, "1 and 2, by squares");
    other.made.ratings[0].screen_volts = UNKNOWN;
    assert_near_relative(nearness(wanted, candidate).distance, sqrt(2.0), 1e-6, "what is not known counts 1");
}

static void a_higher_rating_does_not_count(void **state) {
    (void)state;
    near_tube one, other;
    const plw_tube_entry wanted = beam(&one), candidate = beam(&other);
    other.made.ratings[0].plate_volts = 611.0;
    other.made.ratings[0].screen_volts = 487.0;
    other.made.tube.heater_amps = 0.31;
    assert_near(nearness(wanted, candidate).distance, 0.0, 1e-7, "stands more, heats less");
    assert_true(nearness(candidate, wanted).distance > 1.0);
}

static void another_heater_winding_counts_once(void **state) {
    (void)state;
    near_tube one, other;
    const plw_tube_entry wanted = beam(&one), candidate = beam(&other);
    other.made.tube.heater_volts = 12.6;
    const plw_nearness n = nearness(wanted, candidate);
    assert_true(isnan(n.ratio[PLW_NEAR_HEATER_AMPS])); /* nothing to compare at other volts */
    other.made.tube.heater_volts = 50.0;
    assert_near(nearness(wanted, candidate).distance, n.distance, 0.0, "another winding is another winding");
}

static void bases_are_compared_pin_by_pin(void **state) {
    (void)state;
    near_tube one, other;
    const plw_tube_entry wanted = beam(&one), candidate = beam(&other);
    other.pins[0].number = 4;
    assert_int_equal(nearness(wanted, candidate).base, PLW_BASE_OTHER_PINS);
    other.pins[0] = (plw_pin){1, idle_pin}; /* one tube less wired, the rest alike */
    assert_int_equal(nearness(wanted, candidate).base, PLW_BASE_SAME);
    other.made.tube.pins_count = 0;
    assert_int_equal(nearness(wanted, candidate).base, PLW_BASE_PINS_UNKNOWN);
    other.made.tube.base = noval;
    const plw_nearness n = nearness(wanted, candidate);
    assert_int_equal(n.base, PLW_BASE_OTHER);
    assert_near_relative(n.distance, 0.8, 1e-6, "the base alone");
    other.made.tube.base = NULL;
    assert_int_equal(nearness(wanted, candidate).base, PLW_BASE_OTHER);
}

static void variants_bring_their_own_ratings(void **state) {
    (void)state;
    near_tube t;
    const plw_tube_entry wanted = beam(&t);
    char name[] = "test tube A", service[] = "class A1";
    plw_ratings ratings = no_ratings(service);
    ratings.plate_watts = 2.385 * 1.25;
    ratings.plate_volts = ratings.screen_volts = 350.0;
    plw_variant variant = {
        .type = name, .heater_volts = UNKNOWN, .heater_amps = 0.9, .ratings = &ratings, .ratings_count = 1};
    t.made.tube.variants = &variant;
    t.made.tube.variants_count = 1;
    const plw_tube_entry own = {&t.made.tube, 0};
    assert_string_equal(plw_tube_entry_type(own), "test tube A");
    assert_near(plw_tube_entry_heater_volts(own), 6.3, 0.0, "as the parent");
    const plw_nearness n = nearness(wanted, own);
    assert_near(n.ratio[PLW_NEAR_BIAS], 1.0, 0.0, "the same curves");
    assert_near_relative(n.ratio[PLW_NEAR_HEATER_AMPS], 2.0, 1e-12, "its own heater");
    assert_near_relative(n.distance, sqrt(2.0), 1e-6, "dissipation and heater, each by its scale");
}

/* ---- refusals ---------------------------------------------------------------------------------------------------- */

static void what_cannot_stand_for_it_is_refused(void **state) {
    (void)state;
    near_tube one, other;
    plw_nearness n = {.distance = 2.385};
    const plw_tube_entry wanted = beam(&one);
    plw_tube_entry candidate = tube_with(&other, koren_triode(KOREN_2A3), 251.0, UNKNOWN, -45.0);
    assert_false(plw_nearness_of(wanted, candidate, &n)); /* no screen */
    candidate = beam(&other);
    other.made.tube.has_model = false;
    assert_false(plw_nearness_of(wanted, candidate, &n));
    candidate = beam(&other);
    other.made.tube.kind = PLW_KIND_RECTIFIER;
    assert_false(plw_nearness_of(wanted, candidate, &n));
    candidate = beam(&other); /* a tenth of the tube: only a positive grid would bring the current */
    plw_law_scale(&other.made.tube.model.law, 0.1);
    assert_false(plw_nearness_of(wanted, candidate, &n));
    assert_near(n.distance, 2.385, 0.0, "not written");
}

static void without_a_row_the_ratings_give_the_point(void **state) {
    (void)state;
    near_tube one, other;
    const plw_tube_entry wanted = beam(&one), candidate = beam(&other);
    one.row.provenance.confidence = PLW_CONFIDENCE_LOW;
    one.made.ratings[0].plate_watts = other.made.ratings[0].plate_watts = 11.9;
    const plw_nearness n = nearness(wanted, candidate);
    assert_near_relative(n.plate_volts, 0.8 * 311.0, 1e-12, "a usual part of the rating");
    assert_near_relative(n.screen_volts, 0.8 * 287.0, 1e-12, "a usual part of the rating");
    assert_near_relative(n.cathode_amps * n.plate_volts, 0.7 * 11.9, 1e-6, "a usual part of the rating");
    one.made.ratings[0].plate_watts = UNKNOWN;
    plw_nearness unwritten;
    assert_false(plw_nearness_of(wanted, candidate, &unwritten)); /* neither row nor rating */
}

/* ---- order ------------------------------------------------------------------------------------------------------- */

enum { MANY = 23 };

static void the_nearest_come_first(void **state) {
    (void)state;
    static near_tube many[MANY];
    plw_tube_entry entries[MANY];
    plw_near_tube all[MANY], found[MANY];
    random_source r = {20251204};
    for (int i = 0; i < MANY; i++) {
        entries[i] = beam(&many[i]);
        many[i].made.ratings[0].plate_watts = 2.385 * random_ratio(&r, 0.4, 2.5);
        snprintf(many[i].made.type, sizeof many[i].made.type, "tube %c", 'z' - i);
    }
    many[7].made.ratings[0].plate_watts = many[3].made.ratings[0].plate_watts; /* equally near */
    const size_t count = plw_nearest_tubes(entries[0], entries, MANY, all, MANY);
    assert_true(count > 8 && count < MANY); /* itself is passed over */
    for (size_t i = 0; i < count; i++) {
        assert_ptr_not_equal(all[i].entry.tube, entries[0].tube);
        assert_true(all[i].nearness.distance < PLW_NEAR_DISTANCE_MOST);
        assert_true(i == 0 || all[i - 1].nearness.distance <= all[i].nearness.distance);
        if (all[i].entry.tube == entries[7].tube) {
            assert_ptr_equal(all[i + 1].entry.tube, entries[3].tube); /* by designation */
        }
    }
    for (size_t most = 1; most <= count; most++) {
        assert_int_equal(plw_nearest_tubes(entries[0], entries, MANY, found, most), most);
        for (size_t i = 0; i < most; i++) {
            assert_ptr_equal(found[i].entry.tube, all[i].entry.tube);
        }
    }
}

/* ---- the catalogue ----------------------------------------------------------------------------------------------- */

static const plw_tube *const *all_tubes(plw_catalogue **catalogue, size_t *count) {
    const char *const folders[] = {TUBEDATA};
    const plw_tube *const *tubes = NULL;
    plw_error error = {0};
    if (plw_catalogue_open(folders, 1, catalogue, &error) != PLW_OK ||
        plw_catalogue_all(*catalogue, &tubes, count, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return tubes;
}

/* The nearest of another file than the type's own. */
static const char *nearest_other(plw_catalogue *catalogue, const char *type, const plw_tube_entry *entries,
                                 size_t count) {
    plw_tube_entry wanted;
    plw_near_tube near[16];
    assert_int_equal(plw_catalogue_find(catalogue, type, &wanted.tube, &wanted.variant, NULL), PLW_OK);
    const size_t found = plw_nearest_tubes(wanted, entries, count, near, 16);
    for (size_t i = 0; i < found; i++) {
        if (near[i].entry.tube != wanted.tube) {
            return near[i].entry.tube->type;
        }
    }
    return "none";
}

/* Types that the makers themselves call alike but for base or filament: 6AQ5 and 6V6GT, 6B4G and 2A3, 42 and 6F6G
 * (RCA receiving tube manuals, from memory). */
static void the_trades_substitutes_are_found(void **state) {
    (void)state;
    plw_catalogue *catalogue = NULL;
    size_t count = 0;
    const plw_tube *const *tubes = all_tubes(&catalogue, &count);
    plw_tube_entry *entries = calloc(plw_tube_entries_count(tubes, count), sizeof *entries);
    assert_non_null(entries);
    const plw_tube_filter all = plw_tube_filter_none();
    const size_t selected = plw_tubes_select(tubes, count, &all, entries);
    assert_int_equal(selected, plw_tube_entries_count(tubes, count));
    assert_true(selected > count);
    assert_string_equal(nearest_other(catalogue, "6V6GT", entries, selected), "6AQ5A");
    assert_string_equal(nearest_other(catalogue, "6AQ5A", entries, selected), "6V6GT");
    assert_string_equal(nearest_other(catalogue, "2A3", entries, selected), "6B4G");
    assert_string_equal(nearest_other(catalogue, "42", entries, selected), "6F6G");
    free(entries);
    plw_catalogue_free(catalogue);
}

/* ---- selection --------------------------------------------------------------------------------------------------- */

static void the_selection_keeps_what_is_asked_for(void **state) {
    (void)state;
    plw_catalogue *catalogue = NULL;
    size_t count = 0;
    const plw_tube *const *tubes = all_tubes(&catalogue, &count);
    const size_t room = plw_tube_entries_count(tubes, count);
    plw_tube_entry *entries = calloc(room, sizeof *entries);
    assert_non_null(entries);
    plw_tube_filter filter = plw_tube_filter_none();
    filter.by_kind = true;
    filter.kind = PLW_KIND_BEAM;
    filter.base = "OCTAL";
    filter.least_watts = 14.0;
    filter.most_watts = 23.0;
    filter.heater_volts = 6.3;
    const size_t selected = plw_tubes_select(tubes, count, &filter, entries);
    size_t kept = 0;
    for (size_t i = 0; i < count; i++) {
        for (int variant = -1; variant < (int)tubes[i]->variants_count; variant++) {
            const plw_tube_entry entry = {tubes[i], variant};
            const plw_ratings *ratings = plw_tube_entry_ratings(entry);
            const bool wanted = tubes[i]->kind == PLW_KIND_BEAM && strcmp(tubes[i]->base, "octal") == 0 &&
                                ratings != NULL && ratings->plate_watts >= 14.0 && ratings->plate_watts <= 23.0 &&
                                fabs(plw_tube_entry_heater_volts(entry) - 6.3) <= 0.315;
            if (wanted) {
                assert_true(kept < selected);
                assert_ptr_equal(entries[kept].tube, tubes[i]);
                assert_int_equal(entries[kept].variant, variant);
                kept++;
            }
        }
    }
    assert_int_equal(kept, selected);
    assert_true(kept >= 3); /* the 6L6 at least, the 5881, and the 6V6GTA by its own rating */
    free(entries);
    plw_catalogue_free(catalogue);
}

static void an_unknown_dissipation_is_not_selected_by(void **state) {
    (void)state;
    near_tube t;
    const plw_tube_entry entry = beam(&t);
    const plw_tube *const tubes[] = {entry.tube};
    plw_tube_entry found[1];
    plw_tube_filter filter = plw_tube_filter_none();
    t.made.ratings[0].plate_watts = UNKNOWN;
    assert_int_equal(plw_tubes_select(tubes, 1, &filter, found), 1);
    filter.most_watts = 100.0;
    assert_int_equal(plw_tubes_select(tubes, 1, &filter, found), 0);
    filter = plw_tube_filter_none();
    filter.heater_volts = 6.0; /* within 5 % */
    assert_int_equal(plw_tubes_select(tubes, 1, &filter, found), 1);
    filter.heater_volts = 5.0;
    assert_int_equal(plw_tubes_select(tubes, 1, &filter, found), 0);
    filter = plw_tube_filter_none();
    filter.base = "octal";
    t.made.tube.base = NULL;
    assert_int_equal(plw_tubes_select(tubes, 1, &filter, found), 0);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_tube_is_nearest_to_itself),
        cmocka_unit_test(a_triode_of_another_mu_is_biased_by_it),
        cmocka_unit_test(a_larger_tube_is_biased_deeper),
        cmocka_unit_test(each_part_adds_by_its_square),
        cmocka_unit_test(a_higher_rating_does_not_count),
        cmocka_unit_test(another_heater_winding_counts_once),
        cmocka_unit_test(bases_are_compared_pin_by_pin),
        cmocka_unit_test(variants_bring_their_own_ratings),
        cmocka_unit_test(what_cannot_stand_for_it_is_refused),
        cmocka_unit_test(without_a_row_the_ratings_give_the_point),
        cmocka_unit_test(the_nearest_come_first),
        cmocka_unit_test(the_trades_substitutes_are_found),
        cmocka_unit_test(the_selection_keeps_what_is_asked_for),
        cmocka_unit_test(an_unknown_dissipation_is_not_selected_by),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
