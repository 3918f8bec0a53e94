/* A tube type: ratings, published rows and points, characteristic law and how far it may be trusted.
 * A number that is not known is NaN, a text that is not known is NULL.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_TUBE_H
#define PLATEWRIGHT_TUBE_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/law.h"
#include "platewright/status.h"

#ifdef __cplusplus
extern "C" {
#endif

/* How the screen is wired.  A tube without a screen is always in PLW_CONNECTION_TRIODE. */
typedef enum { PLW_CONNECTION_PENTODE, PLW_CONNECTION_TRIODE, PLW_CONNECTION_ULTRALINEAR } plw_connection;

typedef enum { PLW_KIND_TRIODE, PLW_KIND_PENTODE, PLW_KIND_BEAM, PLW_KIND_RECTIFIER } plw_tube_kind;

/* Rating systems: RS-239-A (EIA, 1963) for design-center and absolute, JEDEC publication 37 (1962) for design-maximum;
 * PLW_SYSTEM_STATED where the maker names limits without a system. */
typedef enum {
    PLW_SYSTEM_DESIGN_CENTER,
    PLW_SYSTEM_DESIGN_MAXIMUM,
    PLW_SYSTEM_ABSOLUTE,
    PLW_SYSTEM_STATED
} plw_rating_system;

/* How a value was obtained (told: given to the program without a source), and the compiler's confidence in it. */
typedef enum { PLW_HOW_READ, PLW_HOW_MEMORY, PLW_HOW_TOLD } plw_how;
typedef enum { PLW_CONFIDENCE_HIGH, PLW_CONFIDENCE_MEDIUM, PLW_CONFIDENCE_LOW } plw_confidence;

typedef struct {
    plw_how how;
    plw_confidence confidence;
    char *source; /* title, publisher, year; never NULL */
    char *note;   /* NULL when there is none */
} plw_provenance;

/* Limiting values for one service.  V to the cathode, W and A per tube (per section of a multiple tube). */
typedef struct {
    char *service;             /* "class A1 amplifier", "triode connection" */
    plw_connection connection; /* PLW_CONNECTION_TRIODE for limits of the triode connection, else _PENTODE */
    plw_rating_system system;
    double plate_volts, screen_volts;
    double plate_watts;             /* in triode connection of a pentode: plate and screen together */
    bool plate_watts_unpublished;   /* the maker says nothing of it: plate_watts is NaN on purpose */
    double screen_watts;            /* without signal, and with signal unless the next is known */
    double screen_watts_full_drive; /* with full signal */
    double total_watts;             /* plate and screen together */
    double cathode_amps;            /* average */
    double grid_ohms_fixed_bias, grid_ohms_cathode_bias;
    double heater_cathode_volts;
    plw_provenance provenance;
} plw_ratings;

/* One printed typical-operation row or set of characteristics. */
typedef struct {
    plw_connection connection;
    double plate_volts, screen_volts; /* to the cathode, or to the midpoint of a filament heated with AC */
    double grid_volts;                /* as printed, or NaN when only a cathode resistor is printed */
    double cathode_resistor_ohms;
    bool filament_midpoint; /* the reference is the midpoint of a filament heated with AC */
    double drive_peak_volts;
    double plate_amps, plate_amps_full_drive; /* in triode connection of a pentode: plate plus screen */
    double screen_amps, screen_amps_full_drive;
    double plate_resistance_ohms, gm_siemens, mu;
    double load_ohms, power_watts;
    bool undistorted; /* the power is printed for less than full drive ("undistorted output"): an upper bound only */
    double thd_percent, h2_percent, h3_percent;
    double
        uncertainty_percent; /* stated: standard deviation of the plate current; NaN or 0: as printed tables have it */
    plw_provenance provenance;
} plw_row;

/* One printed point: of a plate curve, a cut-off, small-signal constants, an inner mu (screen to grid 1). */
typedef enum {
    PLW_POINT_CURVE,           /* plate (and perhaps screen) current at the voltages given */
    PLW_POINT_CUT_OFF,         /* the same, in the foot of the curve, printed as approximate */
    PLW_POINT_CHARACTERISTICS, /* current with gm, rp, mu */
    PLW_POINT_INNER_MU,        /* mu is that of screen to grid 1 */
    PLW_POINT_REMARK           /* kept for the record, not a plain number: never fitted */
} plw_point_kind;

typedef struct {
    plw_point_kind kind;
    plw_connection connection;
    double plate_volts, screen_volts, grid_volts;
    double plate_amps, screen_amps;
    double plate_resistance_ohms, gm_siemens, mu;
    double uncertainty_percent; /* as in plw_row */
    plw_provenance provenance;
} plw_point;

/* Median errors of the law against the printed rows, in percent (distortion: in percentage points), as the fit met
 * them and with each row left out of the fit in turn.  NaN where no row tells. */
typedef struct {
    double plate_current_percent, screen_current_percent, power_percent, distortion_points;
} plw_model_errors;

/* The region that the fitted data cover, in V to the cathode and A. */
typedef struct {
    double plate_volts_least, plate_volts_most;
    double screen_volts_least, screen_volts_most;
    double plate_amps_least, plate_amps_most;
} plw_region;

/* The law of a tube with what the fit knows of it. */
typedef struct {
    plw_law law;
    double relative_error[PLW_LAW_COEFFICIENTS_MOST]; /* standard error over value; NaN: not determined by the rows */
    plw_model_errors fit_error, left_out_error;
    plw_region region;
    size_t rows_fitted, points_fitted;
} plw_model;

/* A type that shares the curves and the base but has ratings of its own. */
typedef struct {
    char *type;
    double heater_volts, heater_amps; /* NaN: as the parent */
    plw_ratings *ratings;
    size_t ratings_count;
} plw_variant;

typedef struct {
    int number;
    char *electrode; /* "plate", "grid 1", "screen", "cathode", "heater", "suppressor", "internal" ... */
} plw_pin;

/* Ratings and law of a vacuum rectifier; in the tube file kind="rectifier". */
typedef struct {
    double peak_inverse_volts, peak_plate_amps, output_amps;
    double plate_rms_volts;   /* limit with capacitor input, each plate */
    double least_supply_ohms; /* total effective plate-supply resistance, each plate, at that voltage */
    double most_reservoir_farads;
    double perveance;             /* K of I = K V^1.5, A/V^1.5, each plate; NaN when no drop is known */
    double drop_volts, drop_amps; /* the published drop K is computed from */
    bool directly_heated;
    plw_provenance provenance;      /* of the limits */
    plw_provenance drop_provenance; /* of the drop; source NULL when there is none */
} plw_rectifier_data;

/* One published capacitor-input condition of a rectifier. */
typedef struct {
    double plate_rms_volts, supply_ohms, reservoir_farads;
    double full_amps, full_volts, half_amps, half_volts;
    plw_provenance provenance;
} plw_rectifier_row;

typedef struct plw_tube {
    char *type;
    char **equivalents; /* other names for the very same tube */
    size_t equivalents_count;
    plw_tube_kind kind;
    char *family; /* tubes of one family share starting values in the fit; NULL: none */
    char *base;   /* "octal", "noval", "UX4" ... */
    plw_pin *pins;
    size_t pins_count;
    plw_provenance pins_provenance; /* source NULL when the pins are not given */
    double heater_volts, heater_amps;
    bool directly_heated;
    plw_provenance heater_provenance;
    plw_ratings *ratings;
    size_t ratings_count;
    plw_variant *variants;
    size_t variants_count;
    plw_row *rows;
    size_t rows_count;
    plw_point *points;
    size_t points_count;
    bool has_model;
    plw_model model;
    plw_rectifier_data rectifier; /* only for PLW_KIND_RECTIFIER */
    plw_rectifier_row *rectifier_rows;
    size_t rectifier_rows_count;
    char *file; /* where it was read from */
} plw_tube;

/* Free a tube and all it holds.  NULL is allowed. */
PLW_API void plw_tube_free(plw_tube *tube);

/* The ratings that hold for a connection: those of the triode connection if the tube has such a set, else the first.
 * In:   variant: index into tube->variants, or a negative number for the type itself
 * Ret:  never NULL for a tube from the catalogue */
PLW_API const plw_ratings *plw_tube_ratings(const plw_tube *tube, int variant, plw_connection connection);

/* What each is called in tube files and reports.
 * Ret:  a constant; "unknown" for a number that is none of them */
PLW_API const char *plw_connection_name(plw_connection connection);
PLW_API const char *plw_tube_kind_name(plw_tube_kind kind);
PLW_API const char *plw_rating_system_name(plw_rating_system system);
PLW_API const char *plw_point_kind_name(plw_point_kind kind);
PLW_API const char *plw_how_name(plw_how how);
PLW_API const char *plw_confidence_name(plw_confidence confidence);

#ifdef __cplusplus
}
#endif
#endif
