/* Candidate for triodes: the shipped law, whose foot widens more slowly than the plate volts.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "triode_candidate.h"

TRIODE_CANDIDATE("koren-foot", 0.7);
