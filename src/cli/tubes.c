/* tubes: the catalogue or a part of it, one tube of it, types like one.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <strings.h>

#include "cli/commands.h"
#include "cli/folders.h"
#include "cli/work.h"
#include "platewright/tube_report.h"
#include "platewright/tube_selection.h"

enum { NEAR_MOST = 8 };

static bool in_format(const cli_arguments *arguments, const char *name) {
    const char *format = cli_argument(arguments, "format");
    return format != NULL && strcmp(format, name) == 0;
}

static bool as_json(const cli_arguments *arguments) {
    return in_format(arguments, "json");
}

/* ---- the filter -------------------------------------------------------------------------------------------------- */

static const char *const filter_names[] = {"kind", "base", "least-watts", "most-watts", "heater"};
enum { FILTERS = sizeof filter_names / sizeof filter_names[0] };

static plw_status read_quantity(const cli_arguments *arguments, const char *name, plw_unit unit, double *value,
                                plw_error *error) {
    const char *text = cli_argument(arguments, name);
    if (text == NULL) {
        return PLW_OK;
    }
    if (plw_quantity_parse(text, unit, value, error) != PLW_OK) {
        return plw_fail_at(error, PLW_E_USAGE, "--%s", name);
    }
    return *value > 0.0 ? PLW_OK : plw_fail(error, PLW_E_USAGE, "--%s: %.40s: more than 0 is wanted", name, text);
}

/* A base that no tube has is a slip of the pen. */
static plw_status check_base(const char *base, const plw_tube *const *tubes, size_t count, plw_error *error) {
    const char **names = calloc(count + 1, sizeof *names);
    if (names == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    bool found = false;
    size_t nearest = 0;
    for (size_t i = 0; i < count; i++) {
        names[i] = tubes[i]->base;
        found = found || strcasecmp(base, names[i]) == 0;
    }
    const bool near = !found && plw_nearest_names(base, names, count, &nearest, 1) == 1;
    const char *name = near ? names[nearest] : "octal";
    free((void *)names);
    if (found) {
        return PLW_OK;
    }
    return near ? plw_fail(error, PLW_E_USAGE, "--base: no tube has the base '%.40s'; is it %s?", base, name)
                : plw_fail(error, PLW_E_USAGE, "--base: no tube has the base '%.40s'; write for instance octal", base);
}

static plw_status read_filter(const cli_arguments *arguments, const plw_tube *const *tubes, size_t count,
                              plw_tube_filter *filter, plw_error *error) {
    *filter = plw_tube_filter_none();
    const char *kind = cli_argument(arguments, "kind");
    for (int i = 0; kind != NULL && i <= (int)PLW_KIND_RECTIFIER; i++) {
        if (strcmp(kind, plw_tube_kind_name((plw_tube_kind)i)) == 0) {
            filter->by_kind = true;
            filter->kind = (plw_tube_kind)i;
        }
    }
    filter->base = cli_argument(arguments, "base");
    plw_status status = filter->base == NULL ? PLW_OK : check_base(filter->base, tubes, count, error);
    if (status == PLW_OK) {
        status = read_quantity(arguments, "least-watts", PLW_UNIT_WATT, &filter->least_watts, error);
    }
    if (status == PLW_OK) {
        status = read_quantity(arguments, "most-watts", PLW_UNIT_WATT, &filter->most_watts, error);
    }
    if (status == PLW_OK) {
        status = read_quantity(arguments, "heater", PLW_UNIT_VOLT, &filter->heater_volts, error);
    }
    if (status == PLW_OK && filter->least_watts > filter->most_watts) {
        return plw_fail(error, PLW_E_USAGE, "--least-watts: is more than --most-watts; no tube is between them");
    }
    return status;
}

/* ---- what is shown ----------------------------------------------------------------------------------------------- */

static plw_status show_one(plw_catalogue *catalogue, const cli_arguments *arguments, char **text, plw_error *error) {
    const plw_tube *tube = NULL;
    int variant = -1;
    for (size_t i = 0; i < FILTERS; i++) {
        if (cli_argument_given(arguments, filter_names[i])) {
            return plw_fail(error, PLW_E_USAGE, "--%s: picks from the list; leave %.40s out, or write --like %.40s",
                            filter_names[i], arguments->positional, arguments->positional);
        }
    }
    if (cli_argument_given(arguments, "like")) {
        return plw_fail(error, PLW_E_USAGE, "--like: names the type itself; leave %.40s out", arguments->positional);
    }
    if (in_format(arguments, "names")) {
        return plw_fail(error, PLW_E_USAGE, "--format: names is for the list; leave %.40s out", arguments->positional);
    }
    const plw_status status = plw_catalogue_find(catalogue, arguments->positional, &tube, &variant, error);
    if (status != PLW_OK) {
        return status;
    }
    return as_json(arguments) ? plw_tube_json(tube, text, error) : plw_tube_text(tube, text, error);
}

static plw_status show_like(plw_catalogue *catalogue, const cli_arguments *arguments, const plw_tube_entry *entries,
                            size_t count, char **text, plw_error *error) {
    plw_tube_entry wanted = {NULL, -1};
    plw_near_tube near[NEAR_MOST];
    const char *like = cli_argument(arguments, "like");
    if (in_format(arguments, "names")) {
        return plw_fail(error, PLW_E_USAGE, "--format: names is for the list; leave --like out");
    }
    const plw_status status = plw_catalogue_find(catalogue, like, &wanted.tube, &wanted.variant, error);
    if (status != PLW_OK) {
        return plw_fail_at(error, status, "--like");
    }
    if (wanted.tube->kind != PLW_KIND_RECTIFIER && !wanted.tube->has_model) {
        return plw_fail(error, PLW_E_USAGE,
                        "--like: %s has no coefficients in its tube file yet; fit them first, or choose another type",
                        wanted.tube->type);
    }
    const size_t found = plw_nearest_tubes(wanted, entries, count, near, NEAR_MOST);
    return as_json(arguments) ? plw_tubes_like_json(wanted, near, found, text, error)
                              : plw_tubes_like_text(wanted, near, found, text, error);
}

static plw_status show_list(const cli_arguments *arguments, const plw_tube_entry *entries, size_t count, char **text,
                            plw_error *error) {
    if (in_format(arguments, "names")) {
        return plw_tubes_names(entries, count, text, error);
    }
    return as_json(arguments) ? plw_tubes_json(entries, count, text, error)
                              : plw_tubes_text(entries, count, text, error);
}

/* The list, or what of it is like one type.
 * Out:  *faults of files that are not in it */
static plw_status show_some(plw_catalogue *catalogue, const cli_arguments *arguments, char **text, bool *any,
                            plw_error *faults, plw_error *error) {
    const plw_tube *const *tubes = NULL;
    size_t count = 0;
    plw_tube_filter filter;
    plw_status status = plw_catalogue_all(catalogue, &tubes, &count, faults);
    if (tubes == NULL) {
        return plw_fail(error, status, "%s", faults->text);
    }
    status = read_filter(arguments, tubes, count, &filter, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_tube_entry *entries = calloc(plw_tube_entries_count(tubes, count) + 1, sizeof *entries);
    if (entries == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    const size_t selected = plw_tubes_select(tubes, count, &filter, entries);
    *any = selected > 0;
    if (cli_argument_given(arguments, "like")) {
        status = show_like(catalogue, arguments, entries, selected, text, error);
    } else {
        status = show_list(arguments, entries, selected, text, error);
    }
    free(entries);
    return status;
}

int cli_run_tubes(const cli_arguments *arguments) {
    plw_catalogue *catalogue = NULL;
    plw_error error = {.status = PLW_OK};
    plw_error faults = {.status = PLW_OK};
    char *text = NULL;
    bool any = true;
    plw_status status = cli_open_catalogue(cli_argument(arguments, "tubes"), &catalogue, &error);
    if (status == PLW_OK) {
        status = arguments->positional == NULL ? show_some(catalogue, arguments, &text, &any, &faults, &error)
                                               : show_one(catalogue, arguments, &text, &error);
    }
    if (status == PLW_OK) {
        status = cli_put(text, cli_argument(arguments, "output"), &error);
    }
    plw_text_free(text);
    plw_catalogue_free(catalogue);
    if (status != PLW_OK || faults.status != PLW_OK) {
        return cli_complain(arguments->command, status != PLW_OK ? &error : &faults);
    }
    if (!any) {
        fputs("platewright: no tube of the catalogue is so\n", stderr);
    }
    return any ? CLI_DONE : CLI_NOT_REACHED;
}
