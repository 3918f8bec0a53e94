/* Tubes in memory: freeing, ratings of a connection, names of the enumerations as tube files write them.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/tube.h"

#include <stdlib.h>

static void free_provenance(const plw_provenance *provenance) {
    free(provenance->source);
    free(provenance->note);
}

static void free_ratings(plw_ratings *ratings, size_t count) {
    for (size_t i = 0; i < count; i++) {
        free(ratings[i].service);
        free_provenance(&ratings[i].provenance);
    }
    free(ratings);
}

static void free_names(plw_tube *tube) {
    free(tube->type);
    for (size_t i = 0; i < tube->equivalents_count; i++) {
        free(tube->equivalents[i]);
    }
    free((void *)tube->equivalents);
    free(tube->family);
    free(tube->base);
    free(tube->file);
}

static void free_rectifier(plw_tube *tube) {
    free_provenance(&tube->rectifier.provenance);
    free_provenance(&tube->rectifier.drop_provenance);
    for (size_t i = 0; i < tube->rectifier_rows_count; i++) {
        free_provenance(&tube->rectifier_rows[i].provenance);
    }
    free(tube->rectifier_rows);
}

void plw_tube_free(plw_tube *tube) {
    if (tube == NULL) {
        return;
    }
    free_names(tube);
    for (size_t i = 0; i < tube->pins_count; i++) {
        free(tube->pins[i].electrode);
    }
    free(tube->pins);
    free_provenance(&tube->pins_provenance);
    free_provenance(&tube->heater_provenance);
    free_ratings(tube->ratings, tube->ratings_count);
    for (size_t i = 0; i < tube->variants_count; i++) {
        free(tube->variants[i].type);
        free_ratings(tube->variants[i].ratings, tube->variants[i].ratings_count);
    }
    free(tube->variants);
    for (size_t i = 0; i < tube->rows_count; i++) {
        free_provenance(&tube->rows[i].provenance);
    }
    free(tube->rows);
    for (size_t i = 0; i < tube->points_count; i++) {
        free_provenance(&tube->points[i].provenance);
    }
    free(tube->points);
    free_rectifier(tube);
    free(tube);
}

const plw_ratings *plw_tube_ratings(const plw_tube *tube, int variant, plw_connection connection) {
    const plw_ratings *ratings = tube->ratings;
    size_t count = tube->ratings_count;
    if (variant >= 0 && (size_t)variant < tube->variants_count) {
        ratings = tube->variants[variant].ratings;
        count = tube->variants[variant].ratings_count;
    }
    for (size_t i = 0; connection == PLW_CONNECTION_TRIODE && i < count; i++) {
        if (ratings[i].connection == PLW_CONNECTION_TRIODE) {
            return &ratings[i];
        }
    }
    return count == 0 ? NULL : ratings;
}

/* A name from a list, or a text that says so when the value is outside it. */
#define NAME_FROM(list, value)                                                                                         \
    ((int)(value) >= 0 && (size_t)(value) < sizeof(list) / sizeof(list)[0] ? (list)[value] : "unknown")

const char *plw_connection_name(plw_connection connection) {
    static const char *const names[] = {"pentode", "triode", "ultralinear"};
    return NAME_FROM(names, connection);
}

const char *plw_tube_kind_name(plw_tube_kind kind) {
    static const char *const names[] = {"triode", "pentode", "beam", "rectifier"};
    return NAME_FROM(names, kind);
}

const char *plw_rating_system_name(plw_rating_system system) {
    static const char *const names[] = {"design-center", "design-maximum", "absolute", "stated"};
    return NAME_FROM(names, system);
}

const char *plw_point_kind_name(plw_point_kind kind) {
    static const char *const names[] = {"curve", "cut-off", "characteristics", "inner-mu", "remark"};
    return NAME_FROM(names, kind);
}

const char *plw_how_name(plw_how how) {
    static const char *const names[] = {"read", "memory", "told"};
    return NAME_FROM(names, how);
}

const char *plw_confidence_name(plw_confidence confidence) {
    static const char *const names[] = {"high", "medium", "low"};
    return NAME_FROM(names, confidence);
}
