/* What is expected of a candidate's coefficients; of tubes of the other kind as shipped.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "candidate.h"

/* The shipped expectations under other names. */
const plw_expectation *shipped_expectations(const plw_tube *tube);
size_t shipped_signed_coefficient(plw_law_kind kind);
double shipped_coefficient_most(plw_law_kind kind, size_t index);

#define plw_law_expectations shipped_expectations
#define plw_law_signed_coefficient shipped_signed_coefficient
#define plw_law_coefficient_most shipped_coefficient_most
#include "tube/fit_expected.c"
#undef plw_law_expectations
#undef plw_law_signed_coefficient
#undef plw_law_coefficient_most

enum { TYPES_MOST = 64, TYPE_MOST = 24 };

typedef struct {
    char type[TYPE_MOST];
    plw_expectation expectation[PLW_LAW_COEFFICIENTS_MOST];
} expected_of_type;

static expected_of_type expected[TYPES_MOST];

static expected_of_type *place_of(const char *type) {
    size_t at = 0;
    while (at < TYPES_MOST && expected[at].type[0] != '\0' && strcmp(expected[at].type, type) != 0) {
        at++;
    }
    return at < TYPES_MOST ? &expected[at] : NULL;
}

/* Lines of type, coefficient's place, expected value, deviation, as expectations.awk writes them. */
static void read_expectations(const char *name) {
    FILE *file = fopen(name, "r");
    char type[TYPE_MOST];
    size_t index;
    plw_expectation e;
    while (file != NULL && fscanf(file, "%23s %zu %lf %lf", type, &index, &e.expected, &e.deviation) == 4) {
        expected_of_type *at = place_of(type);
        if (at != NULL && index < PLW_LAW_COEFFICIENTS_MOST) {
            snprintf(at->type, sizeof at->type, "%s", type);
            at->expectation[index] = e;
        }
    }
    if (file != NULL) {
        fclose(file);
    }
}

/* Each type's own, from the file that the variable EXPECTATIONS of the environment names; without it the wide ones. */
const plw_expectation *plw_law_expectations(const plw_tube *tube) {
    const bool screened = tube->kind == PLW_KIND_BEAM || tube->kind == PLW_KIND_PENTODE;
    if (screened != (candidate_law.kind == PLW_LAW_PENTODE)) {
        return shipped_expectations(tube);
    }
    const char *name = getenv("EXPECTATIONS");
    if (name == NULL) {
        return candidate_law.weak;
    }
    if (expected[0].type[0] == '\0') {
        read_expectations(name);
    }
    const expected_of_type *at = place_of(tube->type);
    if (at == NULL || at->type[0] == '\0') {
        fprintf(stderr, "%s: nothing is expected of type %s\n", name, tube->type);
        exit(2);
    }
    return at->expectation;
}

size_t plw_law_signed_coefficient(plw_law_kind kind) {
    return kind != candidate_law.kind ? shipped_signed_coefficient(kind) : candidate_law.signed_index;
}

double plw_law_coefficient_most(plw_law_kind kind, size_t index) {
    if (kind != candidate_law.kind) {
        return shipped_coefficient_most(kind, index);
    }
    return candidate_law.most != NULL && candidate_law.most[index] > 0.0 ? candidate_law.most[index] : (double)INFINITY;
}
