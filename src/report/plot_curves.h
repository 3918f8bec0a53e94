/* Curves of a tube inside a frame, each cut where it leaves and marked at that end.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef REPORT_PLOT_CURVES_H
#define REPORT_PLOT_CURVES_H

#include <stdbool.h>
#include <stdio.h>

#include "report/script.h"

/* The plate family of a connection: the screen goes with the plate by the tap (0 pentode, 1 triode connection). */
typedef struct {
    const plw_law *law;
    bool together; /* plate and screen current drawn as one: triode connection of a pentode */
    double tap;
    double plate_volts, screen_volts; /* a point on the screen's line; equal in triode connection */
} plw_plate_family;

/* Plate current in A, with the screen's where they are drawn together. */
double plw_family_amps(const plw_plate_family *family, double plate_volts, double grid_volts);

/* The frame of a picture: volts across, milliamperes up. */
typedef struct {
    plw_scale volts, milliamps;
} plw_frame;

/* Where a curve ends: on the right edge, or through the top. */
typedef struct {
    double volts, milliamps;
    bool through_top;
} plw_curve_end;

/* Current in A at a voltage, for a curve to be drawn. */
typedef double (*plw_curve_function)(const void *context, double volts);

/* Sample a curve from volts `from` to `to` into an open data block, until it leaves through the top of the frame.
 * Ret:  false when nothing of it stands clear of the axis: then nothing is written */
bool plw_curve_points(FILE *file, const plw_frame *frame, plw_curve_function function, const void *context, double from,
                      double to, plw_curve_end *end);

/* Write $curves: the family at round grid volts from `grid_most` down to `grid_least`, and a label with the grid volts
 * at the end of each curve where there is room. */
void plw_family_block(FILE *file, const plw_frame *frame, const plw_plate_family *family, double grid_least,
                      double grid_most);

/* Write $dissipation: plate watts constant, inside the frame.  Ret: false when it lies outside. */
bool plw_dissipation_block(FILE *file, const plw_frame *frame, double watts);

#endif
