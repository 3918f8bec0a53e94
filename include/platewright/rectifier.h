/* Plate supply from its parts: transformer, rectifier, reservoir, filter.  Periodic steady state and regulation line.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_RECTIFIER_H
#define PLATEWRIGHT_RECTIFIER_H

#include <stdbool.h>
#include <stddef.h>

#include "platewright/status.h"
#include "platewright/supply.h"

#ifdef __cplusplus
extern "C" {
#endif

typedef enum {
    PLW_FULL_WAVE, /* centre-tapped winding, two diodes */
    PLW_BRIDGE,    /* one winding, four diodes, two of them in series at any time */
    PLW_HALF_WAVE  /* one winding, one diode */
} plw_rectifier_connection;

typedef enum {
    PLW_DIODE_SILICON, /* nothing below drop_volts, a straight line of slope_ohms above */
    PLW_DIODE_VACUUM   /* I = perveance V^1.5 */
} plw_diode_kind;

/* The law of one diode.  For silicon a straight line from a fixed drop is taken rather than the exponential: over the
 * whole decade of currents within a charging pulse the exponential moves by about 0.1 V, which is 0.03 % of a plate
 * supply, and the straight line lets the circuit be solved exactly between one switching and the next. */
typedef struct {
    plw_diode_kind kind;
    double drop_volts, slope_ohms; /* silicon: >= 0; an ideal diode has both 0 */
    double perveance;              /* vacuum: A/V^1.5 > 0, each plate */
} plw_diode;

/* A resistor (henries = 0) or a choke in series, then a capacitor across. */
typedef struct {
    double henries; /* 0: a resistor */
    double ohms;    /* the resistor, > 0; or the copper of the choke, >= 0 */
    double farads;  /* > 0 */
} plw_filter_section;

enum { PLW_SECTIONS_MOST = 4, PLW_NODES_MOST = PLW_SECTIONS_MOST + 1 };

/* The description of a supply.  Plain data: copy it freely.  Zero what is not there.
 * Nodes are the capacitors in order: node 0 is the reservoir (with choke input: the capacitor of the first section),
 * the last node is the output. */
typedef struct {
    plw_rectifier_connection connection;
    double winding_rms_volts; /* off load; each half of a centre-tapped winding; > 0 */
    double path_ohms;         /* copper of one conducting path, primary reflected, >= 0; see plw_path_ohms() */
    double mains_hertz;       /* > 0 */
    plw_diode diode;
    double reservoir_farads; /* 0: choke input, and then the first section must be a choke */
    size_t sections;
    plw_filter_section section[PLW_SECTIONS_MOST];
    double bleeder_ohms;               /* across the output; 0: none */
    double drawn_amps[PLW_NODES_MOST]; /* taken at each node by the rest of the amplifier */
} plw_rectifier;

/* What hangs on the output: a constant current, or a resistor, or both at once.  Zero what is not there. */
typedef struct {
    double amps; /* >= 0 */
    double ohms; /* > 0; 0: no resistor */
} plw_dc_load;

/* One node in the steady state. */
typedef struct {
    double volts; /* mean: what a DC meter reads */
    double ripple_peak_to_peak_volts;
    double ripple_rms_volts;             /* all but the mean */
    double ripple_fundamental_rms_volts; /* at twice the mains frequency; half-wave: at the mains frequency */
    double peak_volts;                   /* the highest instant */
    double capacitor_rms_amps;           /* ripple current of the capacitor of this node */
} plw_rectifier_node;

/* The periodic steady state.  Currents in A. */
typedef struct {
    size_t nodes;
    plw_rectifier_node node[PLW_NODES_MOST];
    double volts;              /* mean at the output, = node[nodes - 1].volts */
    double load_amps;          /* mean current of the load on the output, without bleeder and drawn_amps */
    double source_ohms;        /* -dV/dI at the output, for the mean values */
    double rectified_amps;     /* mean current delivered by the rectifier */
    double winding_rms_amps;   /* of the winding; of each half when centre-tapped */
    double diode_average_amps; /* each diode */
    double diode_rms_amps;
    double diode_peak_amps;    /* = the winding's peak */
    double conduction_degrees; /* of the mains period, each diode */
    double peak_inverse_volts; /* each diode */
    double choke_least_amps; /* choke input: least current of the first choke in the cycle, 0 when it stops; else NaN */
    int iterations;          /* Newton steps taken; 0 when nothing is drawn */
} plw_rectifier_state;

/* One instant of the steady state. */
typedef struct {
    double seconds;
    double emf_volts;      /* open-circuit voltage of the winding (of its first half) */
    double winding_amps;   /* of the winding (of its first half); changes sign in a bridge */
    double rectified_amps; /* out of the rectifier */
    double node_volts[PLW_NODES_MOST];
} plw_rectifier_instant;

/* Copper of a conducting path: half the secondary (all of it when not centre-tapped) plus the reflected primary.
 * In:   secondary_ohms >= 0: of the half or the whole that conducts; primary_ohms >= 0; primary_volts > 0;
 *       secondary_volts > 0: off load, of that half or whole
 * Ret:  ohm; NaN outside the domain
 * Source: transformer theory: impedance goes as the square of the ratio of turns. */
PLW_API double plw_path_ohms(double secondary_ohms, double primary_ohms, double primary_volts, double secondary_volts);

/* A silicon rectifier of the 1 A class: 0.7 V and 0.23 ohm, so 0.93 V at 1 A (1N4007 data sheet, typical; from memory,
 * confidence high).
 * Ret:  it */
PLW_API plw_diode plw_diode_silicon(void);

/* A vacuum rectifier by its published drop.
 * In:   volts > 0, amps > 0: the drop of one plate
 * Ret:  perveance = amps / volts^1.5; NaN outside the domain
 * Source: Child (1911) and Langmuir (1913), three-halves-power law. */
PLW_API plw_diode plw_diode_vacuum(double volts, double amps);

/* Is a description inside its domain?
 * Ret:  PLW_OK, or PLW_E_USAGE naming the first part that is not, and what would be right */
PLW_API plw_status plw_rectifier_validate(const plw_rectifier *supply, plw_error *error) PLW_MUST_USE;

/* The same supply at another mains voltage.
 * In:   mains_percent: of nominal, > 0 (90, 110)
 * Ret:  a copy, its winding higher or lower in proportion */
PLW_API plw_rectifier plw_rectifier_at_mains(const plw_rectifier *supply, double mains_percent);

/* The periodic steady state, found directly: one mains period (half of one, when both halves are alike) is mapped onto
 * the next with its derivative, and Newton's method finds the state that comes back to itself.  With silicon the
 * network is integrated exactly from one switching to the next; with a vacuum rectifier the network is exact and the
 * three-halves-power current is collocated at the nodes of Radau.  A path of less than 1 milliohm is taken as that.
 * Out:  *state; not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE: outside the domain; PLW_E_NO_POINT: the supply cannot deliver that current;
 *       PLW_E_NO_CONVERGENCE; PLW_E_NO_MEMORY
 * Accuracy: of volts, silicon about 1e-9, vacuum 1e-7 (choke input 5e-6); of RMS and peak currents 1e-5; of peak
 *       inverse volts 1e-4.  Ripple and capacitor currents suffer where a section's time constant is below a degree of
 *       the mains.  Checked against closed forms and against a general stiff ODE solver in
 *       tests/published/test_rectifier_*.c.
 * Sources: T. J. Aprille and T. N. Trick, "Steady-state analysis of nonlinear circuits with periodic inputs", Proc.
 *       IEEE 60, 1972 (Newton on the period map); E. Hairer and G. Wanner, "Solving Ordinary Differential Equations
 *       II", 1991 (Radau IIA); both from memory. */
PLW_API plw_status plw_rectifier_steady(const plw_rectifier *supply, plw_dc_load load, plw_rectifier_state *state,
                                        plw_error *error) PLW_MUST_USE;

/* The same with waveforms: count instants at equal distances over one mains period, the first at the zero of the EMF.
 * In:   count >= 2
 * Out:  instants[count], *state; not written unless PLW_OK
 * Ret:  as plw_rectifier_steady() */
PLW_API plw_status plw_rectifier_waveform(const plw_rectifier *supply, plw_dc_load load,
                                          plw_rectifier_instant *instants, size_t count, plw_rectifier_state *state,
                                          plw_error *error) PLW_MUST_USE;

/* Off-load voltage: the peak of the winding, less the drop of silicon.  A bleeder is part of the load: taken as open.
 * Ret:  V */
PLW_API double plw_rectifier_peak_volts(const plw_rectifier *supply);

enum { PLW_LINE_POINTS = 50 };

/* The regulation line of the output from 0 to most_amps as a supply of kind PLW_SUPPLY_RECTIFIER, PLW_LINE_POINTS
 * points closer together near no load, where the voltage falls as the current to the two-thirds power.
 * In:   most_amps > 0
 * Out:  *line; one that falls to nothing before most_amps ends where the output is a quarter of its off-load voltage or
 *       more
 * Ret:  as plw_rectifier_steady(); PLW_E_NO_POINT when not even a hundredth of most_amps can be had */
PLW_API plw_status plw_rectifier_line(const plw_rectifier *supply, double most_amps, plw_supply *line,
                                      plw_error *error) PLW_MUST_USE;

#ifdef __cplusplus
}
#endif
#endif
