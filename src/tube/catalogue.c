/* The catalogue: folders of tube files, searched by designation; only the files that may hold it are read.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/catalogue.h"

#include <dirent.h>
#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/schemas.h"
#include "base/xml_file.h"
#include "platewright/quantity.h"
#include "tube/tube_fields.h"

enum { NEAREST_MOST = 3, SHOWN_LENGTH = 40 };

typedef struct {
    char *path;
    char *stem_key; /* the file name without .xml, as a key */
    size_t folder;
    bool indexed;   /* its names stand in the list of names */
    bool foreign;   /* it holds something else than a tube: a stage, say, that lies in the same folder */
    plw_tube *tube; /* NULL until it is asked for */
} tube_file;

/* A designation that a file answers to. */
typedef struct {
    char *shown, *key;
    size_t file;
    int variant; /* -1: the type itself or an equivalent */
    bool hidden; /* an earlier folder has it */
} tube_name;

typedef const plw_tube *tube_pointer;

struct plw_catalogue {
    plw_xml_schema *schema;
    size_t folders_count;
    tube_file *files;
    size_t files_count, files_size;
    tube_name *names;
    size_t names_count, names_size;
    tube_pointer *all; /* sorted; made when first asked for */
    size_t all_count;
    plw_error all_faults; /* of the files that are not among them */
};

/* ---- keys -------------------------------------------------------------------------------------------------------- */

static bool is_key_character(char c) {
    return (c >= '0' && c <= '9') || (c >= 'A' && c <= 'Z');
}

static char upper(char c) {
    return c >= 'a' && c <= 'z' ? (char)(c - 'a' + 'A') : c;
}

/* Letters and digits in capitals: what two spellings of a designation have in common.  Ret: NULL without memory. */
static char *make_key(const char *text, size_t length) {
    char *key = malloc(length + 1);
    size_t used = 0;
    for (size_t i = 0; key != NULL && i < length; i++) {
        const char c = upper(text[i]);
        if (is_key_character(c)) {
            key[used++] = c;
        }
    }
    if (key != NULL) {
        key[used] = '\0';
    }
    return key;
}

/* Suffixes that tell of the envelope or a later edition: W (rugged), G, GT, T (glass), A to C (editions). */
static bool is_edition_suffix(const char *suffix) {
    static const char *const suffixes[] = {"G",   "GT",  "GA",  "GB",  "GC", "GTA", "GTB", "GTC",
                                           "A",   "B",   "C",   "W",   "WA", "WB",  "WC",  "WG",
                                           "WGA", "WGB", "WGC", "WGT", "WT", "GY",  "GTY", "WGTA"};
    for (size_t i = 0; i < sizeof suffixes / sizeof suffixes[0]; i++) {
        if (strcmp(suffix, suffixes[i]) == 0) {
            return true;
        }
    }
    return false;
}

/* ---- opening ----------------------------------------------------------------------------------------------------- */

static plw_status out_of_memory(plw_error *error) {
    return plw_fail(error, PLW_E_NO_MEMORY, "catalogue: out of memory");
}

/* Room for one more in a growing array.  Ret: false without memory, the array as it was. */
static bool grow(void **array, size_t count, size_t *size, size_t item_size) {
    if (count < *size) {
        return true;
    }
    const size_t more = *size == 0 ? 64 : 2 * *size;
    void *grown = realloc(*array, more * item_size);
    if (grown == NULL) {
        return false;
    }
    *array = grown;
    *size = more;
    return true;
}

/* Does a file name end in .xml (and is it not a hidden or temporary one)?  Out: the length of its stem. */
static bool is_tube_file_name(const char *name, size_t *stem_length) {
    const size_t length = strlen(name);
    if (name[0] == '.' || length < 5 || strcmp(name + length - 4, ".xml") != 0) {
        return false;
    }
    *stem_length = length - 4;
    return true;
}

static plw_status add_file(plw_catalogue *catalogue, size_t folder, const char *folder_path, const char *name,
                           size_t stem_length, plw_error *error) {
    void *files = catalogue->files;
    if (!grow(&files, catalogue->files_count, &catalogue->files_size, sizeof *catalogue->files)) {
        return out_of_memory(error);
    }
    catalogue->files = files;
    const size_t room = strlen(folder_path) + strlen(name) + 2;
    tube_file file = {.path = malloc(room), .stem_key = make_key(name, stem_length), .folder = folder};
    if (file.path == NULL || file.stem_key == NULL) {
        free(file.path);
        free(file.stem_key);
        return out_of_memory(error);
    }
    snprintf(file.path, room, "%s/%s", folder_path, name);
    catalogue->files[catalogue->files_count++] = file;
    return PLW_OK;
}

static int compare_files(const void *one, const void *other) {
    return strcmp(((const tube_file *)one)->path, ((const tube_file *)other)->path);
}

static plw_status add_folder(plw_catalogue *catalogue, const char *path, plw_error *error) {
    DIR *folder = opendir(path);
    if (folder == NULL) {
        return plw_fail(error, PLW_E_FILE, "%s: the folder of tube files cannot be read: %s", path, strerror(errno));
    }
    const size_t first = catalogue->files_count;
    plw_status status = PLW_OK;
    /* Each folder has a stream of its own: */
    for (const struct dirent *item = readdir(folder); item != NULL && status == PLW_OK; /* NOLINT(concurrency-*) */
         item = readdir(folder)) {
        size_t stem_length = 0;
        if (is_tube_file_name(item->d_name, &stem_length)) {
            status = add_file(catalogue, catalogue->folders_count, path, item->d_name, stem_length, error);
        }
    }
    (void)closedir(folder);
    catalogue->folders_count++;
    if (catalogue->files_count > first) {
        qsort(catalogue->files + first, catalogue->files_count - first, sizeof *catalogue->files, compare_files);
    }
    return status;
}

plw_status plw_catalogue_open(const char *const *folders, size_t count, plw_catalogue **catalogue, plw_error *error) {
    plw_catalogue *made = calloc(1, sizeof *made);
    if (made == NULL) {
        return out_of_memory(error);
    }
    plw_status status = plw_xml_schema_parse(plw_schema_tube, &made->schema, error);
    for (size_t i = 0; i < count && status == PLW_OK; i++) {
        if (folders[i] != NULL) {
            status = add_folder(made, folders[i], error);
        }
    }
    if (status != PLW_OK) {
        plw_catalogue_free(made);
        return status;
    }
    *catalogue = made;
    return PLW_OK;
}

void plw_catalogue_free(plw_catalogue *catalogue) {
    if (catalogue == NULL) {
        return;
    }
    for (size_t i = 0; i < catalogue->files_count; i++) {
        free(catalogue->files[i].path);
        free(catalogue->files[i].stem_key);
        plw_tube_free(catalogue->files[i].tube);
    }
    for (size_t i = 0; i < catalogue->names_count; i++) {
        free(catalogue->names[i].shown);
        free(catalogue->names[i].key);
    }
    free(catalogue->files);
    free(catalogue->names);
    free((void *)catalogue->all);
    plw_xml_schema_free(catalogue->schema);
    free(catalogue);
}

/* ---- names ------------------------------------------------------------------------------------------------------- */

/* Add one name.  A name that an earlier folder has is hidden; within a folder the first of that name is found. */
static plw_status add_name(plw_catalogue *catalogue, const char *name, size_t length, size_t file, int variant,
                           plw_error *error) {
    void *names = catalogue->names;
    if (!grow(&names, catalogue->names_count, &catalogue->names_size, sizeof *catalogue->names)) {
        return out_of_memory(error);
    }
    catalogue->names = names;
    tube_name added = {.shown = strndup(name, length), .key = make_key(name, length), .file = file, .variant = variant};
    if (added.shown == NULL || added.key == NULL) {
        free(added.shown);
        free(added.key);
        return out_of_memory(error);
    }
    for (size_t i = 0; i < catalogue->names_count && !added.hidden; i++) {
        const tube_name *earlier = &catalogue->names[i];
        added.hidden = catalogue->files[earlier->file].folder < catalogue->files[file].folder &&
                       strcmp(earlier->key, added.key) == 0;
    }
    catalogue->names[catalogue->names_count++] = added;
    return PLW_OK;
}

/* Add the names of a list with spaces between: equivalents, or (numbered) variants. */
static plw_status add_name_list(plw_catalogue *catalogue, const char *list, size_t file, bool variants,
                                plw_error *error) {
    plw_status status = PLW_OK;
    int index = 0;
    const char *at = list == NULL ? "" : list;
    for (at += strspn(at, " "); *at != '\0' && status == PLW_OK; at += strspn(at, " ")) {
        const size_t length = strcspn(at, " ");
        status = add_name(catalogue, at, length, file, variants ? index : -1, error);
        at += length;
        index++;
    }
    return status;
}

/* Put the names of a file, as its beginning gives them, into the list.  A faulty file has none: whoever asks for all
 * tubes is told of it.  A file of something else is passed over. */
static plw_status index_file(plw_catalogue *catalogue, size_t index, plw_error *error) {
    if (catalogue->files[index].indexed) {
        return PLW_OK;
    }
    plw_xml *xml = NULL;
    plw_status status = plw_xml_read_root(catalogue->files[index].path, &xml, NULL);
    if (status == PLW_E_NO_MEMORY) {
        return out_of_memory(error);
    }
    catalogue->files[index].indexed = true;
    if (status != PLW_OK) {
        return PLW_OK;
    }
    const plw_xml_element *root = plw_xml_root(xml);
    catalogue->files[index].foreign = strcmp(plw_xml_name(root), "tube") != 0;
    if (catalogue->files[index].foreign) {
        plw_xml_free(xml);
        return PLW_OK;
    }
    const char *type = plw_xml_attribute(root, "type");
    if (type != NULL) {
        status = add_name(catalogue, type, strlen(type), index, -1, error);
    }
    if (status == PLW_OK) {
        status = add_name_list(catalogue, plw_xml_attribute(root, "equivalents"), index, false, error);
    }
    if (status == PLW_OK) {
        status = add_name_list(catalogue, plw_xml_attribute(root, "variants"), index, true, error);
    }
    plw_xml_free(xml);
    return status;
}

static plw_status index_folder(plw_catalogue *catalogue, size_t folder, plw_error *error) {
    plw_status status = PLW_OK;
    for (size_t i = 0; i < catalogue->files_count && status == PLW_OK; i++) {
        if (catalogue->files[i].folder == folder) {
            status = index_file(catalogue, i, error);
        }
    }
    return status;
}

/* ---- finding ----------------------------------------------------------------------------------------------------- */

static plw_status load(plw_catalogue *catalogue, size_t index, const plw_tube **tube, plw_error *error) {
    tube_file *file = &catalogue->files[index];
    const plw_status status =
        file->tube != NULL ? PLW_OK : plw_tube_read_with(catalogue->schema, file->path, &file->tube, error);
    if (status == PLW_OK) {
        *tube = file->tube;
    }
    return status;
}

/* What is found, or nothing yet. */
typedef struct {
    bool found;
    size_t file;
    int variant;
} finding;

/* Among the names of the file, or (file == files_count) of all files of the folder, one with this very key: the type
 * or an equivalent before a variant. */
static finding find_exact(const plw_catalogue *catalogue, const char *key, size_t folder, size_t file) {
    finding best = {.found = false};
    for (size_t i = 0; i < catalogue->names_count; i++) {
        const tube_name *name = &catalogue->names[i];
        const bool here =
            file < catalogue->files_count ? name->file == file : catalogue->files[name->file].folder == folder;
        if (here && strcmp(name->key, key) == 0 && (!best.found || (best.variant >= 0 && name->variant < 0))) {
            best = (finding){.found = true, .file = name->file, .variant = name->variant};
        }
    }
    return best;
}

/* In one folder: first the file that is called so, then whoever says at its beginning that it answers to the name. */
static plw_status find_in_folder(plw_catalogue *catalogue, const char *key, size_t folder, finding *found,
                                 plw_error *error) {
    for (size_t i = 0; i < catalogue->files_count && !found->found; i++) {
        if (catalogue->files[i].folder == folder && strcmp(catalogue->files[i].stem_key, key) == 0) {
            const plw_status status = index_file(catalogue, i, error);
            if (status != PLW_OK) {
                return status;
            }
            *found = find_exact(catalogue, key, folder, i);
            if (!found->found && !catalogue->files[i].foreign) {
                /* It bears the name but not in it: read it, so that what is wrong with it is said. */
                const plw_tube *tube = NULL;
                plw_error reason = {.status = PLW_OK};
                if (load(catalogue, i, &tube, &reason) != PLW_OK) {
                    return plw_fail(error, reason.status, "%s", reason.text);
                }
            }
        }
    }
    if (found->found) {
        return PLW_OK;
    }
    const plw_status status = index_folder(catalogue, folder, error);
    if (status == PLW_OK) {
        *found = find_exact(catalogue, key, folder, catalogue->files_count);
    }
    return status;
}

/* One name that begins with the key and goes on with a suffix of the envelope or edition, and no second tube.
 * Out: rivals, the names that came into question. */
static finding find_without_suffix(const plw_catalogue *catalogue, const char *key, const char **rivals,
                                   size_t *rivals_count, size_t rivals_most) {
    finding best = {.found = false};
    const size_t length = strlen(key);
    bool several = false;
    *rivals_count = 0;
    for (size_t i = 0; i < catalogue->names_count; i++) {
        const tube_name *name = &catalogue->names[i];
        if (name->hidden || strncmp(name->key, key, length) != 0 || !is_edition_suffix(name->key + length)) {
            continue;
        }
        if (*rivals_count < rivals_most) {
            rivals[(*rivals_count)++] = name->shown;
        }
        if (!best.found) {
            best = (finding){.found = true, .file = name->file, .variant = name->variant};
        } else if (name->file != best.file) {
            several = true;
        } else if (name->variant < 0) {
            best.variant = -1;
        }
    }
    best.found = best.found && !several;
    return best;
}

static void show_designation(const char *designation, char shown[SHOWN_LENGTH + 1]) {
    size_t used = 0;
    for (; used < SHOWN_LENGTH && designation[used] != '\0'; used++) {
        const unsigned char c = (unsigned char)designation[used];
        shown[used] = c < 0x20 || c >= 0x7F ? '?' : designation[used];
    }
    shown[used] = '\0';
}

static void append_names(char *text, size_t size, const char *const *names, size_t count, const char *last_joint) {
    for (size_t i = 0; i < count; i++) {
        const size_t used = strlen(text);
        const char *joint = ", ";
        if (i == 0) {
            joint = "";
        } else if (i + 1 == count) {
            joint = last_joint;
        }
        snprintf(text + used, size - used, "%s%.40s", joint, names[i]);
    }
}

static plw_status say_not_found(const plw_catalogue *catalogue, const char *designation, plw_error *error) {
    char shown[SHOWN_LENGTH + 1];
    show_designation(designation, shown);
    if (catalogue->names_count == 0) {
        return plw_fail(error, PLW_E_NOT_FOUND, "tube '%s' is not found: the catalogue is empty", shown);
    }
    const char **names = calloc(catalogue->names_count, sizeof *names);
    if (names == NULL) {
        return out_of_memory(error);
    }
    size_t count = 0;
    for (size_t i = 0; i < catalogue->names_count; i++) {
        if (!catalogue->names[i].hidden) {
            names[count++] = catalogue->names[i].shown;
        }
    }
    size_t nearest[NEAREST_MOST];
    const size_t found = plw_nearest_names(designation, names, count, nearest, NEAREST_MOST);
    const char *near[NEAREST_MOST] = {NULL};
    for (size_t i = 0; i < found; i++) {
        near[i] = names[nearest[i]];
    }
    char list[160] = "";
    append_names(list, sizeof list, near, found, " or ");
    free((void *)names);
    return found == 0 ? plw_fail(error, PLW_E_NOT_FOUND, "tube '%s' is not in the catalogue", shown)
                      : plw_fail(error, PLW_E_NOT_FOUND, "tube '%s' is not in the catalogue; is it %s?", shown, list);
}

static plw_status find_key(plw_catalogue *catalogue, const char *designation, const char *key, finding *found,
                           plw_error *error) {
    for (size_t folder = 0; folder < catalogue->folders_count && !found->found; folder++) {
        const plw_status status = find_in_folder(catalogue, key, folder, found, error);
        if (status != PLW_OK) {
            return status;
        }
    }
    if (found->found || key[0] == '\0') {
        return found->found ? PLW_OK : say_not_found(catalogue, designation, error);
    }
    const char *rivals[6];
    size_t rivals_count = 0;
    *found = find_without_suffix(catalogue, key, rivals, &rivals_count, sizeof rivals / sizeof rivals[0]);
    if (found->found) {
        return PLW_OK;
    }
    if (rivals_count > 1) {
        char shown[SHOWN_LENGTH + 1];
        char list[280] = "";
        show_designation(designation, shown);
        append_names(list, sizeof list, rivals, rivals_count, " and ");
        return plw_fail(error, PLW_E_NOT_FOUND, "tube '%s' is not one tube: there are %s; say which", shown, list);
    }
    return say_not_found(catalogue, designation, error);
}

plw_status plw_catalogue_find(plw_catalogue *catalogue, const char *designation, const plw_tube **tube, int *variant,
                              plw_error *error) {
    char *key = make_key(designation, strlen(designation));
    if (key == NULL) {
        return out_of_memory(error);
    }
    finding found = {.found = false};
    plw_status status = find_key(catalogue, designation, key, &found, error);
    free(key);
    if (status == PLW_OK) {
        status = load(catalogue, found.file, tube, error);
    }
    if (status == PLW_OK) {
        *variant = found.variant;
    }
    return status;
}

/* ---- all --------------------------------------------------------------------------------------------------------- */

/* By the number a designation begins with (2A3 before 10), then as texts; those with a letter come behind. */
static int compare_tubes(const void *one, const void *other) {
    const char *a = (*(const plw_tube *const *)one)->type;
    const char *b = (*(const plw_tube *const *)other)->type;
    const bool a_number = *a >= '0' && *a <= '9';
    const bool b_number = *b >= '0' && *b <= '9';
    if (a_number != b_number) {
        return a_number ? -1 : 1;
    }
    const long a_value = a_number ? strtol(a, NULL, 10) : 0;
    const long b_value = b_number ? strtol(b, NULL, 10) : 0;
    return a_value != b_value ? (a_value > b_value) - (a_value < b_value) : strcmp(a, b);
}

/* Is a type already among the tubes taken from an earlier folder? */
static bool is_hidden(const plw_tube *const *tubes, size_t count, const plw_tube *tube) {
    char *key = make_key(tube->type, strlen(tube->type));
    bool hidden = false;
    for (size_t i = 0; i < count && !hidden && key != NULL; i++) {
        char *other = make_key(tubes[i]->type, strlen(tubes[i]->type));
        hidden = other != NULL && strcmp(key, other) == 0;
        free(other);
    }
    free(key);
    return hidden;
}

/* Lay what is wrong with a file behind what is wrong with others, as long as it is said whole. */
static void add_faults(plw_error *faults, const plw_error *reason) {
    static const char more[] = "... and further files are faulty";
    const size_t used = strlen(faults->text);
    if (used == 0) {
        *faults = *reason;
    } else if (used + strlen(reason->text) + sizeof more + 2 < sizeof faults->text) {
        plw_error_add(faults, "%s", reason->text);
    } else if (strstr(faults->text, more) == NULL) {
        plw_error_add(faults, "%s", more);
    }
}

/* Load every tube file; what is wrong with one is kept in all_faults, and the next is loaded. */
static plw_status load_all(plw_catalogue *catalogue, tube_pointer *all, size_t *used, plw_error *error) {
    for (size_t i = 0; i < catalogue->files_count; i++) {
        const plw_tube *tube = NULL;
        plw_error reason = {.status = PLW_OK};
        plw_status status = index_file(catalogue, i, error);
        if (status == PLW_OK && !catalogue->files[i].foreign) {
            status = load(catalogue, i, &tube, &reason);
        }
        if (status == PLW_E_NO_MEMORY) {
            return out_of_memory(error);
        }
        if (status != PLW_OK) {
            add_faults(&catalogue->all_faults, &reason);
        } else if (tube != NULL && !is_hidden(all, *used, tube)) {
            all[(*used)++] = tube;
        }
    }
    return PLW_OK;
}

plw_status plw_catalogue_all(plw_catalogue *catalogue, const plw_tube *const **tubes, size_t *count, plw_error *error) {
    if (catalogue->all == NULL) {
        tube_pointer *all = calloc(catalogue->files_count + 1, sizeof(tube_pointer));
        size_t used = 0;
        if (all == NULL) {
            return out_of_memory(error);
        }
        catalogue->all_faults = (plw_error){.status = PLW_OK};
        const plw_status status = load_all(catalogue, all, &used, error);
        if (status != PLW_OK) {
            free((void *)all);
            return status;
        }
        qsort((void *)all, used, sizeof(tube_pointer), compare_tubes);
        catalogue->all = all;
        catalogue->all_count = used;
    }
    *tubes = catalogue->all;
    *count = catalogue->all_count;
    const plw_error *faults = &catalogue->all_faults;
    return faults->status == PLW_OK ? PLW_OK : plw_fail(error, faults->status, "%s", faults->text);
}
