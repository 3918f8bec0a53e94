/* Fitting a tube's law to what is printed of it: rows, points, small-signal constants, mixed.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_FIT_H
#define PLATEWRIGHT_FIT_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/status.h"
#include "platewright/tube.h"

#ifdef __cplusplus
extern "C" {
#endif

/* What a law says of a printed row.  Units as in plw_row; NaN where the row does not ask. */
typedef struct {
    double grid_volts;
    double plate_amps, screen_amps; /* triode connection of a screened tube: plate_amps holds both, screen_amps NaN */
    double gm_siemens, plate_resistance_ohms, mu;
    double plate_amps_full_drive, screen_amps_full_drive;
    double power_watts, thd_percent, h2_percent, h3_percent;
} plw_prediction;

/* Predict a row at its printed voltages, bias, drive and load.
 * In:   a valid law; the row's plate volts, and grid volts or cathode resistor
 * Ret:  PLW_OK; PLW_E_USAGE when the row does not give a bias; PLW_E_NO_CONVERGENCE
 * A row that prints a cathode resistor and no grid volts is driven with the bias that its own mean current makes; one
 * that prints both is taken at the grid volts. */
PLW_API plw_status plw_predict_row(const plw_law *law, const plw_row *row, plw_prediction *prediction,
                                   plw_error *error) PLW_MUST_USE;

/* Predict a point in the same way (full-drive figures stay NaN).  For an inner mu, mu holds it. */
PLW_API plw_status plw_predict_point(const plw_law *law, const plw_point *point, plw_prediction *prediction,
                                     plw_error *error) PLW_MUST_USE;

/* Is the row (point) one that a fit uses?  Confidence low is not fitted, nor a remark. */
PLW_API bool plw_row_is_fitted(const plw_row *row);
PLW_API bool plw_point_is_fitted(const plw_point *point);

/* One observation with what the fitted law says of it. */
typedef struct {
    const char *quantity; /* "plate current", "power" ... a constant */
    bool is_row;          /* of tube->rows, else of tube->points */
    size_t index;
    double printed, predicted;
    double scaled; /* difference over its standard deviation */
} plw_residual;

enum { PLW_RESIDUALS_MOST = 600 };

typedef struct {
    plw_model model;
    size_t residuals;
    plw_residual residual[PLW_RESIDUALS_MOST];
    double chi_squared; /* of the observations, without what is known beforehand of the coefficients */
} plw_fit;

/* Fit the law of a tube to its rows and points of confidence high and medium.
 * Levenberg-Marquardt on the logarithms of the coefficients (GSL multifit_nlinear), several starts; each coefficient
 * has a weak expectation from tubes of its kind, so that even one row gives an honest answer. In:   a tube with ratings
 * and at least one row or three points that can be fitted Out:  *fit: coefficients, their relative standard errors
 * (NaN: not determined by the rows), errors in the fit and with each row left out in turn, region; not written unless
 * PLW_OK Ret:  PLW_OK; PLW_E_DATA: nothing to fit; PLW_E_NO_CONVERGENCE; PLW_E_NO_MEMORY */
PLW_API plw_status plw_fit_tube(const plw_tube *tube, bool leave_out, plw_fit *fit, plw_error *error) PLW_MUST_USE;

/* The law fitted with one row left out (SIZE_MAX: none), and, if wanted, without any triode-connected row or point of a
 * screened tube.
 * In:   near: a law to start from (the fit to all rows), or NULL: every start is tried */
PLW_API plw_status plw_fit_without(const plw_tube *tube, size_t row, bool without_triode_connection,
                                   const plw_law *near, plw_law *law, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
