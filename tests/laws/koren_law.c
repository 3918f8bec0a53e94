/* Candidate for triodes: Koren's own law, with a contact potential: its foot widens in proportion to the plate volts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "triode_candidate.h"

TRIODE_CANDIDATE("koren", 1.0);
