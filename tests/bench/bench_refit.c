/* Refit of the whole catalogue, leave-one-out errors included, on one core: processor seconds, and the same in
 * evaluations of the plate law.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <time.h>

#include "platewright/catalogue.h"
#include "platewright/fit.h"

static double processor_seconds(void) {
    return (double)clock() / CLOCKS_PER_SEC;
}

/* One evaluation of a pentode's law, in s. */
static double law_seconds(const plw_law *law) {
    enum { CALLS = 2000000 };
    double sum = 0.0;
    const double start = processor_seconds();
    for (int call = 0; call < CALLS; call++) {
        sum += plw_law_plate_amps(law, 200.0 + 1e-5 * call, 250.0, -10.0);
    }
    const double seconds = (processor_seconds() - start) / CALLS;
    return sum > 0.0 ? seconds : -1.0; /* the sum is used, so that nothing is left out */
}

int main(void) {
    const char *const folders[] = {TUBEDATA};
    plw_catalogue *catalogue;
    const plw_tube *const *tubes;
    const plw_tube *pentode;
    size_t count;
    int variant;
    plw_error error = {0};
    if (plw_catalogue_open(folders, 1, &catalogue, &error) != PLW_OK ||
        plw_catalogue_all(catalogue, &tubes, &count, &error) != PLW_OK ||
        plw_catalogue_find(catalogue, "6V6GT", &pentode, &variant, &error) != PLW_OK) {
        fprintf(stderr, "bench_refit: %s\n", error.text);
        return 2;
    }
    static plw_fit fit;
    size_t fitted = 0;
    const double start = processor_seconds();
    for (size_t index = 0; index < count; index++) {
        if (tubes[index]->kind != PLW_KIND_RECTIFIER && plw_fit_tube(tubes[index], true, &fit, &error) == PLW_OK) {
            fitted++;
        }
    }
    const double seconds = processor_seconds() - start;
    const double law = law_seconds(&pentode->model.law);
    printf("refit of %zu types, each row left out in turn: %.2f s of processor time (goal: 10 s on one core)\n", fitted,
           seconds);
    printf("  = %.1f million evaluations of a pentode's law, %.0f ns each\n", seconds / law / 1e6, 1e9 * law);
    plw_catalogue_free(catalogue);
    return 0;
}
