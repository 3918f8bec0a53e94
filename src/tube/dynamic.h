/* The dynamic characteristic: a tube whose electrodes are fed through resistances, at rest and over a whole cycle of
 * the grid signal.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TUBE_DYNAMIC_H
#define TUBE_DYNAMIC_H

#include "platewright/law.h"
#include "platewright/status.h"

/* Places in the arrays below: voltages to the cathode at plate, screen and grid; currents of plate and screen. */
enum { PLW_AT_PLATE, PLW_AT_SCREEN, PLW_AT_GRID, PLW_ELECTRODES };
enum { PLW_OF_PLATE, PLW_OF_SCREEN, PLW_FLOWS };

/* Half a cycle is solved at STEPS + 1 instants, equal in phase: the current of a resistive stage is the same on the way
 * up and on the way down.  Harmonics to the 10th come out free of aliasing up to the (2 STEPS - 10)th. */
enum { PLW_CYCLE_STEPS = 16, PLW_CYCLE_INSTANTS = PLW_CYCLE_STEPS + 1, PLW_HARMONICS = 10 };

/* What feeds the tube.  At each instant
 *     electrode volts = average_volts(averages) - ohms * currents          (and the signal at the grid)
 * where average_volts holds all that capacitors and the transformer keep steady over a cycle: supply, bypassed cathode
 * and screen, and the load's mean. */
typedef struct {
    double ohms[PLW_ELECTRODES][PLW_FLOWS];
    /* Out: volts, and their derivatives by the average currents in ohms. */
    void (*average_volts)(const void *context, const double average_amps[PLW_FLOWS], double volts[PLW_ELECTRODES],
                          double by_average[PLW_ELECTRODES][PLW_FLOWS]);
    const void *context;
    double driver_ohms; /* resistance of what drives the grid: grid current makes the crest soft; 0: none */
    double tap;         /* 0: screen not on the primary; 1: triode connection; between: ultralinear */
} plw_feed;

/* A solved instant. */
typedef struct {
    double amps[PLW_FLOWS];
    double volts[PLW_ELECTRODES];
    plw_currents law; /* at those volts */
} plw_instant;

/* The point of rest.
 * In:   *point: starting currents (zeros are allowed)
 * Out:  *point
 * Ret:  PLW_OK: the currents into each node add up within 1e-10 A; PLW_E_NO_CONVERGENCE */
plw_status plw_dynamic_rest(const plw_law *law, const plw_feed *feed, plw_instant *point) PLW_MUST_USE;

/* Small-signal constants at a point, of the current that the load sees: with a tap the screen takes part in proportion.
 * Out:  plate resistance NaN where the current does not rise with the plate volts */
typedef struct {
    double gm_siemens, plate_resistance_ohms, mu;
} plw_small_signal;
plw_small_signal plw_small_signal_at(const plw_currents *currents, double tap);

/* Total harmonic distortion of a cosine series, harmonics 2 to PLW_HARMONICS over the fundamental, in percent; NaN without
 * a fundamental. */
double plw_distortion_percent(const double harmonic[PLW_HARMONICS + 1]);

typedef enum { PLW_LIMIT_DRIVE, PLW_LIMIT_GRID_CURRENT, PLW_LIMIT_CUT_OFF } plw_limit;

/* A whole cycle, with the averages that belong to it. */
typedef struct {
    double drive_peak_volts;
    plw_limit limit; /* what ends the drive that was found; PLW_LIMIT_DRIVE when it was given */
    double average_amps[PLW_FLOWS];
    plw_instant instant[PLW_CYCLE_INSTANTS]; /* from the positive grid peak to the negative */
    /* Of the load current (plate current, and the tap's share of the screen current): peak values, signed as in the
     * Fourier series by cosines; [0] is the mean. */
    double harmonic_amps[PLW_HARMONICS + 1];
} plw_cycle;

/* Solve the cycle at a drive, or at the largest drive before the grid takes current or the tube is cut off.
 * In:   rest: the solved point of rest; drive_peak_volts >= 0, or NaN: find it
 * Out:  *cycle
 * Ret:  PLW_OK: each instant's currents add up within 1e-9 A and the averages within 1e-9 A; PLW_E_NO_CONVERGENCE */
plw_status plw_dynamic_cycle(const plw_law *law, const plw_feed *feed, const plw_instant *rest, double drive_peak_volts,
                             plw_cycle *cycle) PLW_MUST_USE;

/* Cut-off, as an onset: the cathode current falls to this fraction of its value at rest.
 * Common practice, no source: the foot of a characteristic has no sharp end. */
#define PLW_CUT_OFF_FRACTION 0.02

/* Cosine series of samples over half a cycle: peak of harmonic h from f(cos) at PLW_CYCLE_INSTANTS equal phases.
 * Source: E. L. Chaffee, "A simplified harmonic analysis", Rev. Sci. Instr. 7, 1936; here with 2 x 16 ordinates. */
void plw_cosine_series(const double sample[PLW_CYCLE_INSTANTS], double harmonic[PLW_HARMONICS + 1]);

#endif
