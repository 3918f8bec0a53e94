/* Observations of a tube from a CSV file: printed rows, points of curves, constants, readings of one's own.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_OBSERVATION_FILE_H
#define PLATEWRIGHT_OBSERVATION_FILE_H

#include <stddef.h>

#include "platewright/status.h"
#include "platewright/tube.h"

#ifdef __cplusplus
extern "C" {
#endif

/* Read a table of observations and add its lines to a tube.
 * The first line names the columns, in any order; a cell without a number is empty.  Voltages are to the cathode, the
 * grid negative.
 *
 *   plate_volts  screen_volts  grid_volts  cathode_resistor_ohms  drive_peak_volts
 *   plate_ma  plate_ma_full_drive  screen_ma  screen_ma_full_drive        (or _amps for _ma)
 *   gm_umho (or gm_ma_per_volt)  plate_resistance_ohms (or _kohms)  mu
 *   load_ohms (or load_kohms)  power_watts (or power_mw)  thd_percent  second_percent  third_percent
 *   uncertainty_percent  standard deviation of the plate current; the line's other figures are believed in proportion;
 *                        empty: as printed tables have it
 *   kind         row, curve, cut-off, characteristics or inner-mu; empty: a row when a load, drive, power, distortion
 * or cathode resistor is given, characteristics when gm, rp or mu is, else a point of a curve connection   pentode or
 * triode; empty: pentode for a tube with a screen confidence   high, medium or low (not fitted); empty: high how read
 * or memory; empty: read source, note texts; source empty: the name of the file
 *
 * In:   path; tube: type and kind set
 * Out:  rows and points added to *tube; on failure it is as it was
 * Ret:  PLW_OK; PLW_E_FILE; PLW_E_NO_MEMORY; PLW_E_DATA with one line `file:line: ...` for each fault (up to ten):
 *       no table, a column unknown, in another unit or named twice, a cell that is no number, out of range or in the
 *       wrong unit, a negative current, voltages or currents missing, a line that repeats another, too few figures for
 *       a fit or too many, currents alone that all lie on one line of voltages */
PLW_API plw_status plw_observation_file_read(const char *path, plw_tube *tube, plw_error *error) PLW_MUST_USE;

/* The same from memory; `name` stands for the file in messages.
 * Out, Ret: as plw_observation_file_read(); never PLW_E_FILE */
PLW_API plw_status plw_observation_file_read_memory(const char *name, const char *text, size_t size, plw_tube *tube,
                                                    plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
