/* Fuzzing of the stage file reader: any bytes; what is read is written and read again as the same; what its values mean
 * is made into a circuit or refused with its place.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "platewright/report.h"
#include "platewright/stage_file.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static void demand(int holds) {
    if (!holds) {
        abort();
    }
}

/* Written and read again the description gives the same bytes. */
static void check_round_trip(const plw_stage_description *description) {
    char *text = NULL;
    char *again = NULL;
    plw_stage_description *copy = NULL;
    demand(plw_stage_file_text(description, &text, NULL) == PLW_OK);
    demand(plw_stage_file_read_memory("again.xml", text, strlen(text), &copy, NULL) == PLW_OK);
    demand(plw_stage_file_text(copy, &again, NULL) == PLW_OK);
    demand(strcmp(text, again) == 0);
    plw_stage_description_free(copy);
    plw_text_free(again);
    plw_text_free(text);
}

static void check_build(const plw_stage_description *description) {
    plw_error error = {.status = PLW_OK};
    plw_stage stage;
    const plw_status status = plw_stage_build(description, NULL, &stage, &error);
    if (status == PLW_OK) {
        demand(stage.tube == NULL && stage.parallel >= 1 && stage.load_ohms > 0);
    } else {
        demand((status == PLW_E_DATA || status == PLW_E_USAGE) && error.text[0] != '\0');
    }
}

/* The bytes behind the first as the value of the entry that the first byte names. */
static void check_describe(const char *text) {
    size_t count = 0;
    while (plw_entry_type_at(count) != NULL) {
        count++;
    }
    const plw_entry_type *type = plw_entry_type_at((unsigned char)text[0] % count);
    plw_stage_description *description = NULL;
    demand(plw_stage_description_new(&description, NULL) == PLW_OK);
    const plw_status status = plw_stage_describe(description, type->name, text + 1, NULL);
    demand(status == PLW_OK || status == PLW_E_USAGE);
    if (status == PLW_OK) {
        check_round_trip(description);
        check_build(description);
    }
    plw_stage_description_free(description);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size) {
    char *text = malloc(size + 1);
    if (text == NULL) {
        return 0;
    }
    memcpy(text, data, size);
    text[size] = '\0';
    if (size > 0 && size <= 64 && text[0] != '<') {
        check_describe(text);
        free(text);
        return 0;
    }
    plw_stage_description *description = NULL;
    plw_error error = {.status = PLW_OK};
    const plw_status status = plw_stage_file_read_memory("input.xml", text, size, &description, &error);
    if (status == PLW_OK) {
        check_round_trip(description);
        check_build(description);
        plw_stage_description_free(description);
    } else {
        demand(description == NULL && error.status == status);
        demand(strncmp(error.text, "input.xml:", 10) == 0);
    }
    free(text);
    return 0;
}
