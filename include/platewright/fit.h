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

/* Predict a point in the same way (full-drive figures stay NaN).  For an inner mu, mu holds it.
 * Ret:  as plw_predict_row() */
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

/* Two determined coefficients that the data can hardly tell apart: one may rise if the other makes up for it. */
typedef struct {
    size_t first, second; /* indices of coefficients */
    double correlation;   /* -1..1 */
} plw_fit_correlation;

/* A row or point that the others speak against: without it the sum of squares falls by far, and what the others make of
 * it is far off. */
typedef struct {
    bool is_row;
    size_t index;
    const char *quantity;      /* the figure that is farthest off, a constant */
    double printed, predicted; /* predicted by the fit without it */
    double scaled;             /* difference over its standard deviation */
    double chi_squared_fall;
} plw_fit_outlier;

/* Two figures that cannot both be true. */
typedef struct {
    bool is_row[2];
    size_t index[2];
    const char *quantity; /* a constant */
    double printed[2];
    double apart;         /* difference over the standard deviation of the difference */
    bool same_conditions; /* else the first has nowhere lower voltages and yet less current */
} plw_fit_contradiction;

enum {
    PLW_RESIDUALS_MOST = 600,
    PLW_FIT_CORRELATIONS_MOST = 24,
    PLW_FIT_OUTLIERS_MOST = 8,
    PLW_FIT_CONTRADICTIONS_MOST = 16
};

/* What counts as each of them. */
#define PLW_FIT_CORRELATION_LEAST 0.95
#define PLW_FIT_OUTLIER_FALL 25.0       /* of the sum of squares */
#define PLW_FIT_OUTLIER_SCALED 4.0      /* standard deviations off */
#define PLW_FIT_GROSS_SCALED 5.0        /* standard deviations of a figure from the fit to all */
#define PLW_FIT_CONTRADICTION_LEAST 4.0 /* standard deviations apart */

typedef struct {
    plw_model model;
    bool settled; /* false: the search stopped at its limit; the coefficients are the best seen, their errors a guess */
    size_t residuals;
    plw_residual residual[PLW_RESIDUALS_MOST];
    double chi_squared; /* of the observations, without what is known beforehand of the coefficients */
    /* Covariance of the coordinates the fit works in: of each coefficient the logarithm, but of kp that of kp/mu, and
     * the contact volts themselves; rows of plw_law_coefficient_count() numbers. */
    double covariance[PLW_LAW_COEFFICIENTS_MOST * PLW_LAW_COEFFICIENTS_MOST];
    /* Covariance and relative errors are already widened by it: the root of chi squared per degree of freedom where
     * that is above 1, else 1. */
    double error_scale;
    size_t correlations, outliers, contradictions;
    plw_fit_correlation correlation[PLW_FIT_CORRELATIONS_MOST];
    plw_fit_outlier outlier[PLW_FIT_OUTLIERS_MOST]; /* the grossest first; only looked for with leave_out */
    plw_fit_contradiction contradiction[PLW_FIT_CONTRADICTIONS_MOST];
} plw_fit;

/* Fit the law of a tube to its rows and points of confidence high and medium, weighted by their stated uncertainty.
 * Levenberg-Marquardt on the logarithms of the coefficients (GSL multifit_nlinear), several starts; each coefficient
 * has a weak expectation from tubes of its kind, so that even one row gives an honest answer.
 * In:   a tube with at least three figures that can be fitted: a row with plate current, gm and plate resistance, or
 *       three points
 * Out:  *fit: coefficients, their relative standard errors (NaN: not determined by the rows), errors in the fit and,
 *       with leave_out, with each row left out in turn (of curves alone: each point), region, residuals, what the fit
 *       found.  Without meaning unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE: a rectifier; PLW_E_DATA: nothing to fit, or PLW_RESIDUALS_MOST figures and more;
 *       PLW_E_NO_CONVERGENCE; PLW_E_NO_MEMORY
 * GSL's error handler ends the program when GSL itself finds no memory; gsl_set_error_handler_off() makes that
 * PLW_E_NO_MEMORY.  Nothing else here reaches it. */
PLW_API plw_status plw_fit_tube(const plw_tube *tube, bool leave_out, plw_fit *fit, plw_error *error) PLW_MUST_USE;

/* Is a figure so far from the fit to all that they cannot be right together? */
PLW_API bool plw_residual_is_gross(const plw_residual *residual);

/* Does a fit hold such a figure? */
PLW_API bool plw_fit_is_gross(const plw_fit *fit);

/* Predict a row by a fit, with the standard deviation that each figure has from the coefficients not being known better
 * (the law's own error and the spread of tubes come on top).
 * Out:  *prediction, *deviation: in the units of the figures, NaN where the figure is NaN
 * Ret:  as plw_predict_row() */
PLW_API plw_status plw_fit_predict_row(const plw_fit *fit, const plw_row *row, plw_prediction *prediction,
                                       plw_prediction *deviation, plw_error *error) PLW_MUST_USE;

/* The law fitted with one row left out (SIZE_MAX: none), and, if wanted, without any triode-connected row or point of a
 * screened tube.
 * In:   near: a law to start from (the fit to all rows), or NULL: every start is tried
 * Out:  *law
 * Ret:  as plw_fit_tube() */
PLW_API plw_status plw_fit_without(const plw_tube *tube, size_t row, bool without_triode_connection,
                                   const plw_law *near, plw_law *law, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
