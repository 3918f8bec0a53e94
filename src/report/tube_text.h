/* Parts of the text on a tube that a fit shows too.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_TUBE_TEXT_H
#define REPORT_TUBE_TEXT_H

#include <stdio.h>

#include "platewright/tube.h"

/* Law, coefficients with their errors, errors in the fit and left out. */
void plw_put_model(FILE *out, const plw_tube *tube);

#endif
