/* Small currents about the point of rest.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef STAGE_LINEAR_H
#define STAGE_LINEAR_H

#include "stage/circuit.h"

/* Currents of plate and screen of one tube, in A, when the sources behind its electrodes move by small volts, by the
 * derivatives of the law at rest; all capacitors short at that frequency.
 * With sources e, electrode volts v = e - R i and currents i = G v by the law: (1 + G R) i = G e.
 * Ret:  false without a solution */
bool plw_linear_currents(const plw_circuit *circuit, const plw_quiescent *quiescent,
                         const double source_volts[PLW_ELECTRODES], double amps[PLW_FLOWS]);

#endif
