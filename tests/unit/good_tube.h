/* Read a tube's file that has no fault.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef UNIT_GOOD_TUBE_H
#define UNIT_GOOD_TUBE_H

#include "near.h"
#include "platewright/catalogue.h"

static inline plw_tube *read_good(const char *path) {
    plw_tube *tube = NULL;
    plw_error error = {.status = PLW_OK};
    if (plw_tube_read(path, &tube, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    assert_string_equal(error.text, "");
    return tube;
}

#endif
