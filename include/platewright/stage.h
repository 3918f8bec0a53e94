/* One single-ended output stage: the circuit, and what it does at rest and driven.
 * A quantity that is not given, or cannot be known, is NaN.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_STAGE_H
#define PLATEWRIGHT_STAGE_H

#include <stdbool.h>

#include "platewright/status.h"
#include "platewright/supply.h"
#include "platewright/tube.h"

#ifdef __cplusplus
extern "C" {
#endif

enum { PLW_PARALLEL_MOST = 16 };

/* The circuit.  Start from plw_stage_ideal(), then fill in what is known.  Plain data: copy it freely; the tube is
 * borrowed. */
typedef struct {
    const plw_tube *tube; /* with a model */
    int variant;          /* index into tube->variants, or -1: whose ratings hold */
    plw_connection connection;
    double tap;        /* ultralinear: the screen's share of the primary turns, 0..1, from the supply end */
    unsigned parallel; /* equal tubes, 1..PLW_PARALLEL_MOST */

    plw_supply supply;
    bool transformerless; /* fed straight from the mains, the heaters in a string: the chassis may be live, and how far
                           * a heater stands from its cathode is not known */
    double other_amps;    /* drawn from the same supply by the rest of the amplifier */

    double load_ohms;      /* the speaker seen through the transformer's ratio, without copper */
    double ratio;          /* primary to secondary turns; NaN when only load_ohms is known */
    double speaker_ohms;   /* NaN when only load_ohms is known */
    double primary_ohms;   /* copper */
    double secondary_ohms; /* copper; needs ratio */

    double cathode_resistor_ohms; /* NaN with fixed bias, or when it is to be chosen */
    bool resistor_each;           /* in parallel: one resistor a tube, not one for all */
    bool unbypassed;              /* the cathode resistor has no capacitor */
    double fixed_bias_volts;      /* grid to chassis, negative; NaN with cathode bias */

    double screen_supply_volts; /* own, stiff supply of the screens, to chassis; NaN: the plate supply */
    double screen_resistor_ohms;
    bool screen_bypassed; /* the screen side of that resistor is held by a capacitor */

    double drive_peak_volts; /* at the grid; NaN: up to the first of grid current and cut-off */
    double driver_ohms; /* resistance of what drives the grids, common to all tubes; 0: grid current costs it nothing.
                         * The charge that grid current leaves on a coupling capacitor is not reckoned with. */
} plw_stage;

/* A stage in which all that is not filled in is ideal: no copper, nothing in the screen lead, one tube, no other
 * current, cathode bypassed.  Tube, supply, load and bias are still to be given. */
PLW_API plw_stage plw_stage_ideal(void);

/* Give the load as the trade does, by ratio and speaker, or by the reflected load; the missing ones are worked out.
 * In:   stage->load_ohms, ratio, speaker_ohms, as many as are known
 * Out:  all three where they follow
 * Ret:  PLW_OK; PLW_E_USAGE: none or contradicting (more than 2 % apart), secondary copper without a ratio */
PLW_API plw_status plw_stage_settle_load(plw_stage *stage, plw_error *error) PLW_MUST_USE;

/* Is this a stage that can be solved?  Ranges: 50 ohm <= load <= 1 megohm; copper 0..100 kohm; 10..5000 V supply;
 * resistors 0.1 ohm..1 megohm; fixed bias -2000..0 V; 0 < tap < 1 in ultralinear working, and no tap otherwise.
 * In:   bias_wanted: the cathode resistor or fixed bias must be there
 * Ret:  PLW_OK; PLW_E_USAGE naming the quantity, what it is, and what would be right */
PLW_API plw_status plw_stage_validate(const plw_stage *stage, bool bias_wanted, plw_error *error) PLW_MUST_USE;

/* Does the tube work as a triode (by its nature or by its connection)? */
PLW_API bool plw_stage_is_triode(const plw_stage *stage);

/* The point of rest.  Volts and amperes of one tube unless the name says otherwise. */
typedef struct {
    double supply_volts;           /* loaded, to chassis */
    double supply_amps;            /* all tubes and the rest of the amplifier */
    double plate_to_ground_volts;  /* what a meter with its black lead on the chassis reads */
    double screen_to_ground_volts; /* NaN without a screen */
    double cathode_volts;          /* to chassis */
    double plate_volts;            /* to cathode */
    double screen_volts;           /* to cathode; NaN without a screen */
    double grid_volts;             /* to cathode */
    double plate_amps, screen_amps, cathode_amps;
    double plate_watts, screen_watts; /* screen_watts NaN without a screen */
    double cathode_resistor_amps;     /* through the resistor: all tubes that share it; NaN with fixed bias */
    double cathode_resistor_watts;
    double gm_siemens, plate_resistance_ohms, mu; /* of the connection used: plate and screen together as a triode */
    double screen_resistor_watts;
    double residual_amps; /* what Kirchhoff's current law is missed by */
} plw_quiescent;

/* Solve the point of rest.
 * In:   a valid stage with bias
 * Out:  *quiescent; not written unless PLW_OK
 * Ret:  PLW_OK, residual below 1e-9 A; PLW_E_USAGE as plw_stage_validate(); PLW_E_NO_POINT: the point lies where the
 *       supply's readings do not reach, or the tube draws less than 1 microampere: the text names the limit and the
 *       remedy; PLW_E_NO_CONVERGENCE
 * Source: Kirchhoff's laws with the tube's law; checked against a general-purpose root finder in the tests. */
PLW_API plw_status plw_quiescent_solve(const plw_stage *stage, plw_quiescent *quiescent, plw_error *error) PLW_MUST_USE;

enum { PLW_HARMONICS_MOST = 10, PLW_PATH_POINTS = 17 };

/* What ends the drive. */
typedef enum { PLW_DRIVE_GIVEN, PLW_DRIVE_GRID_CURRENT, PLW_DRIVE_CUT_OFF } plw_drive_limit;

/* The stage driven by a sine at mid-band into a resistive load.  Per tube unless the name says otherwise. */
typedef struct {
    double drive_peak_volts; /* at the grid, to chassis */
    plw_drive_limit limit;   /* PLW_DRIVE_GIVEN: as told; else what ended it */
    bool grid_current;       /* the grid goes positive to the cathode */
    bool cut_off;            /* the cathode current falls below 2 % of its value at rest */
    double power_watts;      /* fundamental, all tubes, given to the transformer, its copper included */
    double speaker_watts;    /* fundamental, all tubes, behind the copper */
    double thd_percent;      /* harmonics 2..10 over the fundamental */
    double harmonic_percent[PLW_HARMONICS_MOST + 1]; /* [2..10]; signed: negative is in antiphase at the grid's crest */
    double supply_volts, cathode_volts;              /* averages under drive; supply NaN where it is not known */
    double plate_to_ground_volts, screen_to_ground_volts; /* averages under drive; screen NaN without */
    bool beyond_supply; /* the average current lies where the supply's readings do not reach */
    double plate_amps, screen_amps, cathode_amps; /* averages under drive */
    double plate_watts;                           /* heat of the plate: input less output */
    double screen_watts;                          /* mean of screen volts times screen current; NaN without */
    double plate_volts_least, plate_volts_most;   /* to cathode, over the cycle */
    double plate_amps_least, plate_amps_most;
    double plate_to_ground_volts_most;
    double screen_amps_most;
    double grid_amps;          /* average; what it adds to the cathode resistor's current is neglected */
    double grid_amps_most;     /* at the crest */
    double efficiency_percent; /* power over plate input */
    double voltage_gain;       /* plate swing over grid swing, fundamentals */
    /* The path over half a cycle, from the positive grid peak to the negative, for drawing. */
    double path_plate_volts[PLW_PATH_POINTS], path_plate_amps[PLW_PATH_POINTS];
    double path_grid_volts[PLW_PATH_POINTS], path_screen_amps[PLW_PATH_POINTS];
} plw_signal;

/* Solve the whole cycle at stage->drive_peak_volts, averages and so bias and supply shifting with drive.
 * In:   the point of rest from plw_quiescent_solve() for the same stage
 * Ret:  PLW_OK; PLW_E_USAGE: drive negative or not finite; PLW_E_NO_CONVERGENCE
 * Source: Fourier analysis of the dynamic characteristic (e.g. E. L. Chaffee, Rev. Sci. Instr. 7, 1936). */
PLW_API plw_status plw_signal_solve(const plw_stage *stage, const plw_quiescent *quiescent, plw_signal *signal,
                                    plw_error *error) PLW_MUST_USE;

/* The distortion up to which makers print the power of an output stage: about 5 % for triodes (RCA receiving tube
 * manuals), about 10 % for pentodes and beam tubes (the same, and Philips data sheets).
 * Ret:  percent, of the two the one that goes with the stage's connection */
#define PLW_CLEAN_PERCENT_TRIODE 5.0
#define PLW_CLEAN_PERCENT_SCREENED 10.0
PLW_API double plw_stage_clean_percent(const plw_stage *stage);

/* The cycle at the largest drive that keeps the distortion within a limit.
 * In:   full: the cycle at the stage's own drive or limit; thd_percent > 0
 * Out:  *signal: full itself where it keeps the limit
 * Ret:  as plw_signal_solve() */
PLW_API plw_status plw_signal_within(const plw_stage *stage, const plw_quiescent *quiescent, const plw_signal *full,
                                     double thd_percent, plw_signal *signal, plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
