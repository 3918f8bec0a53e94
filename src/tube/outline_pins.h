/* Pins of a tube in outline, as a builder writes them: "2=heater, 3=plate, 4=screen, 5=grid 1, 7=heater, 8=cathode".
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_OUTLINE_PINS_H
#define TUBE_OUTLINE_PINS_H

#include <stddef.h>

#include "platewright/status.h"

enum { PLW_OUTLINE_PINS_MOST = 16 }; /* as tube.xsd has it */

/* Constants by the number of the pin; NULL where nothing is said of it. */
typedef struct {
    const char *electrode[PLW_OUTLINE_PINS_MOST + 1];
    size_t count;
} plw_outline_pins;

/* In:   text: NULL for none
 * Ret:  PLW_OK; PLW_E_USAGE: no number from 1 to 16 with one of the electrodes that the reports look for, or a pin
 *       given twice */
plw_status plw_outline_pins_parse(const char *text, plw_outline_pins *pins, plw_error *error);

#endif
