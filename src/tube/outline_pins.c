/* Pins of a tube in outline.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/outline_pins.h"

#include <stdlib.h>
#include <string.h>

/* By these words, which the tube files use, the reports find what a meter is to be clipped to. */
static const char *const electrodes[] = {"plate",      "grid 1", "screen",
                                         "cathode",    "heater", "heater center tap",
                                         "filament",   "shell",  "cathode and suppressor",
                                         "suppressor", "shield", "heater and cathode",
                                         "internal"};
enum { ELECTRODES = sizeof electrodes / sizeof electrodes[0] };

static const char *find_electrode(const char *word, size_t length) {
    for (size_t i = 0; i < ELECTRODES; i++) {
        if (strlen(electrodes[i]) == length && strncmp(electrodes[i], word, length) == 0) {
            return electrodes[i];
        }
    }
    return NULL;
}

/* One pin from `text` up to `end`, "5=grid 1". */
static plw_status take_pin(const char *text, const char *end, plw_outline_pins *pins, plw_error *error) {
    text += strspn(text, " ");
    while (end > text && end[-1] == ' ') {
        end--;
    }
    const int shown = end - text > 40 ? 40 : (int)(end - text);
    char *word = NULL;
    const long number = strtol(text, &word, 10);
    if (word == text || *word != '=' || number < 1 || number > PLW_OUTLINE_PINS_MOST) {
        return plw_fail(error, PLW_E_USAGE, "pins: '%.*s': give number (1 to %d) and electrode, as in 3=plate", shown,
                        text, (int)PLW_OUTLINE_PINS_MOST);
    }
    word++;
    const char *electrode = find_electrode(word, (size_t)(end - word));
    if (electrode == NULL) {
        return plw_fail(error, PLW_E_USAGE,
                        "pins: '%.*s': the electrode is not known; plate, grid 1, screen, cathode, heater, filament, "
                        "suppressor, cathode and suppressor, heater and cathode, heater center tap, shield, shell or "
                        "internal",
                        shown, text);
    }
    if (pins->electrode[number] != NULL) {
        return plw_fail(error, PLW_E_USAGE, "pins: pin %ld is given twice; keep one", number);
    }
    pins->electrode[number] = electrode;
    pins->count++;
    return PLW_OK;
}

plw_status plw_outline_pins_parse(const char *text, plw_outline_pins *pins, plw_error *error) {
    plw_status status = PLW_OK;
    *pins = (plw_outline_pins){.count = 0};
    while (text != NULL && status == PLW_OK) {
        const char *end = text + strcspn(text, ",");
        status = take_pin(text, end, pins, error);
        text = *end == ',' ? end + 1 : NULL;
    }
    return status;
}
