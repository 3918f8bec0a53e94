/* Characteristic laws of triodes, pentodes and beam tubes.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/law.h"

#include <math.h>

/* Triode: N. Koren, "Improved Vacuum Tube Models for SPICE Simulations", Glass Audio 8(5), 1996, p. 18, with an offset
 * of the grid volts for the contact potential.
 *
 *   E1 = (Vp/kp) ln(1 + exp(kp (1/mu + (Vg + Vc)/sqrt(kvb + Vp^2))))        Ip = 2 E1^x / kg1
 *
 * Pentode and beam tube: the same form for the space current, in an equivalent voltage u at the screen's place, and a
 * division of that current between plate and screen.
 *
 *   u  = Vs + d p(Vp)          the plate's field reaches through the screen a little: a finite plate resistance
 *   E1 = (u/kp) ln(1 + exp(kp (1/mu + Vg/sqrt(w^2 + u^2))))                 Ik = 2 E1^x / kg1
 *   y  = Vp/(k E1)             the knee moves out with the current, as printed plate families show
 *   f  = g(y)/(1 + g(y)^n)^(1/n)   from 0 at zero plate volts to 1 above the knee
 *   Ip = Ik q f                q = delta/(1 + delta): the plate's share above the knee
 *   Is = Ik (1 - q + kappa q (1 - f))   of what the plate no longer takes, the screen gets the share kappa
 *
 * p and g differ from their argument only close to zero, where they start with slope zero, so that every current is
 * once differentiable at zero plate volts too.  Space-current division: K. Spangenberg, Proc. IRE 28, May 1940,
 * p. 226; C. M. Wallis, Proc. IRE 35, April 1947.  The moving knee is this project's own. */
enum { MU, EXPONENT, KG1, KP };
enum { TRIODE_KVB = KP + 1, TRIODE_CONTACT, TRIODE_COUNT };
enum {
    PENTODE_PENETRATION = KP + 1,
    PENTODE_KNEE,
    PENTODE_SHARPNESS,
    PENTODE_DIVISION,
    PENTODE_CAPTURE,
    PENTODE_COUNT
};

#define PENTODE_SOFT_VOLTS_SQUARED 50.0 /* w^2: keeps Vg/u finite near zero screen volts */
#define KNEE_FOOT 0.02                  /* part of the knee within which g(y) leaves zero with slope zero */
#define PENETRATION_FOOT_VOLTS 1.0      /* the same for p(Vp) */
#define LEAST_EFFECTIVE_VOLTS 1e-30     /* below it every current is zero to any accuracy */

static const char *const triode_names[TRIODE_COUNT] = {"mu", "exponent", "kg1", "kp", "kvb", "contact-volts"};
static const char *const pentode_names[PENTODE_COUNT] = {"mu",   "exponent",       "kg1",      "kp",     "penetration",
                                                         "knee", "knee-sharpness", "division", "capture"};

size_t plw_law_coefficient_count(plw_law_kind kind) {
    return kind == PLW_LAW_TRIODE ? TRIODE_COUNT : PENTODE_COUNT;
}

const char *plw_law_coefficient_name(plw_law_kind kind, size_t index) {
    if (index >= plw_law_coefficient_count(kind)) {
        return NULL;
    }
    return kind == PLW_LAW_TRIODE ? triode_names[index] : pentode_names[index];
}

const char *plw_law_name(plw_law_kind kind) {
    return kind == PLW_LAW_TRIODE ? "koren-contact" : "moving-knee";
}

plw_status plw_law_validate(const plw_law *law, plw_error *error) {
    for (size_t index = 0; index < plw_law_coefficient_count(law->kind); index++) {
        const double value = law->coefficient[index];
        const char *name = plw_law_coefficient_name(law->kind, index);
        const bool may_be_zero = law->kind == PLW_LAW_TRIODE && (index == TRIODE_KVB || index == TRIODE_CONTACT);
        if (!isfinite(value) || value < 0.0 || (value == 0.0 && !may_be_zero)) {
            return plw_fail(error, PLW_E_DATA, "coefficient %s is %g; a positive number is wanted", name, value);
        }
    }
    const double exponent = law->coefficient[EXPONENT];
    if (!(exponent > 1.0 && exponent <= 3.0)) {
        return plw_fail(error, PLW_E_DATA, "coefficient exponent is %g; it lies between 1 and 3", exponent);
    }
    return PLW_OK;
}

/* Effective voltage E1 of an electrode at `volts` under the grid's control, with its derivatives. */
typedef struct {
    double volts, by_electrode, by_grid;
} effective;

static effective effective_volts(double mu, double kp, double soft_squared, double volts, double grid_volts) {
    const double root = sqrt(soft_squared + volts * volts);
    const double drive = grid_volts / root;
    const double argument = kp * (1.0 / mu + drive);
    /* Softplus and its derivative from one exponential. */
    const double small = exp(-fabs(argument));
    const double soft = (argument > 0.0 ? argument : 0.0) + log1p(small);
    const double slope = (argument > 0.0 ? 1.0 : small) / (1.0 + small);
    return (effective){
        .volts = volts / kp * soft,
        .by_electrode = soft / kp - volts * slope * drive * volts / (root * root),
        .by_grid = volts * slope / root,
    };
}

/* Grid current: a space-charge diode at positive grid, with half the perveance of the tube's space current.
 * Common practice, no source: the printed rows do not determine it. */
static void grid_current(const plw_law *law, double grid_volts, plw_currents *currents) {
    if (grid_volts <= 0.0) {
        return;
    }
    const double perveance = 1.0 / law->coefficient[KG1];
    currents->grid_amps = perveance * grid_volts * sqrt(grid_volts);
    currents->grid_by_grid = 1.5 * perveance * sqrt(grid_volts);
}

static void triode_currents(const plw_law *law, double plate_volts, double grid_volts, plw_currents *currents) {
    if (plate_volts <= 0.0) {
        return;
    }
    const double *c = law->coefficient;
    const effective e = effective_volts(c[MU], c[KP], c[TRIODE_KVB], plate_volts, grid_volts + c[TRIODE_CONTACT]);
    if (e.volts < LEAST_EFFECTIVE_VOLTS) {
        return;
    }
    currents->plate_amps = 2.0 * pow(e.volts, c[EXPONENT]) / c[KG1];
    const double by_effective = c[EXPONENT] * currents->plate_amps / e.volts;
    currents->plate_by_plate = by_effective * e.by_electrode;
    currents->plate_by_grid = by_effective * e.by_grid;
}

/* The fraction of its final share that the plate takes at y = plate volts over knee volts, and its derivative. */
static double knee_fraction(double y, double sharpness, double *slope) {
    if (y <= 0.0) {
        *slope = 0.0;
        return 0.0;
    }
    const double foot = y + KNEE_FOOT;
    const double g = y * y / foot;
    const double by_y = (y * y + 2.0 * KNEE_FOOT * y) / (foot * foot);
    double fraction;
    double sum; /* 1 + g^n, or for large g its part 1 + g^-n, so that nothing overflows */
    if (g > 1.0) {
        const double power = pow(g, -sharpness);
        sum = 1.0 + power;
        fraction = pow(sum, -1.0 / sharpness);
        *slope = by_y * fraction / sum * power / g;
    } else {
        sum = 1.0 + pow(g, sharpness);
        const double root = pow(sum, -1.0 / sharpness);
        fraction = g * root;
        *slope = by_y * root / sum;
    }
    return fraction;
}

static void pentode_currents(const plw_law *law, double plate_volts, double screen_volts, double grid_volts,
                             plw_currents *currents) {
    const double *c = law->coefficient;
    const double plate = plate_volts > 0.0 ? plate_volts : 0.0;
    const double foot = plate + PENETRATION_FOOT_VOLTS;
    const double u = screen_volts + c[PENTODE_PENETRATION] * plate * plate / foot;
    if (u <= 0.0) {
        return;
    }
    const double u_by_plate =
        c[PENTODE_PENETRATION] * (plate * plate + 2.0 * PENETRATION_FOOT_VOLTS * plate) / (foot * foot);
    const effective e = effective_volts(c[MU], c[KP], PENTODE_SOFT_VOLTS_SQUARED, u, grid_volts);
    if (e.volts < LEAST_EFFECTIVE_VOLTS) {
        return;
    }
    const double space_amps = 2.0 * pow(e.volts, c[EXPONENT]) / c[KG1];
    const double space_by_effective = c[EXPONENT] * space_amps / e.volts;
    const double knee_volts = c[PENTODE_KNEE] * e.volts;
    const double y = plate / knee_volts;
    double fraction_by_y;
    const double fraction = knee_fraction(y, c[PENTODE_SHARPNESS], &fraction_by_y);
    const double share = c[PENTODE_DIVISION] / (1.0 + c[PENTODE_DIVISION]);
    const double screen_share = 1.0 - share + c[PENTODE_CAPTURE] * share * (1.0 - fraction);

    currents->plate_amps = space_amps * share * fraction;
    currents->screen_amps = space_amps * screen_share;
    /* Both follow the effective volts, and the knee fraction besides. */
    const double moved = space_amps * share * fraction_by_y; /* of the plate current, per unit of y */
    const double plate_by_effective = space_by_effective * share * fraction - moved * y / e.volts;
    const double screen_by_effective = space_by_effective * screen_share + c[PENTODE_CAPTURE] * moved * y / e.volts;
    const double moved_by_plate = moved / knee_volts;
    currents->plate_by_screen = plate_by_effective * e.by_electrode;
    currents->plate_by_grid = plate_by_effective * e.by_grid;
    currents->plate_by_plate = currents->plate_by_screen * u_by_plate + moved_by_plate;
    currents->screen_by_screen = screen_by_effective * e.by_electrode;
    currents->screen_by_grid = screen_by_effective * e.by_grid;
    currents->screen_by_plate = currents->screen_by_screen * u_by_plate - c[PENTODE_CAPTURE] * moved_by_plate;
}

void plw_law_evaluate(const plw_law *law, double plate_volts, double screen_volts, double grid_volts,
                      plw_currents *currents) {
    *currents = (plw_currents){0};
    if (law->kind == PLW_LAW_TRIODE) {
        triode_currents(law, plate_volts, grid_volts, currents);
    } else {
        pentode_currents(law, plate_volts, screen_volts, grid_volts, currents);
    }
    grid_current(law, grid_volts, currents);
}

double plw_law_plate_amps(const plw_law *law, double plate_volts, double screen_volts, double grid_volts) {
    plw_currents currents;
    plw_law_evaluate(law, plate_volts, screen_volts, grid_volts, &currents);
    return currents.plate_amps;
}

double plw_law_grid_volts_for(const plw_law *law, double plate_volts, double screen_volts, double cathode_amps) {
    double below = -1000.0;
    double above = 100.0;
    double grid_volts = -10.0;
    for (int step = 0; step < 200; step++) {
        plw_currents at;
        plw_law_evaluate(law, plate_volts, screen_volts, grid_volts, &at);
        const double amps = at.plate_amps + at.screen_amps;
        if (amps > cathode_amps) {
            above = grid_volts;
        } else {
            below = grid_volts;
        }
        if (fabs(amps - cathode_amps) <= 1e-9 * cathode_amps) {
            return grid_volts;
        }
        /* Newton on the logarithm, which is nearly straight in the foot; halving where that leaves the bracket. */
        const double slope = at.plate_by_grid + at.screen_by_grid;
        double next = slope > 0.0 && amps > 0.0 ? grid_volts - log(amps / cathode_amps) * amps / slope : (double)NAN;
        if (!(next > below && next < above)) {
            next = 0.5 * (below + above);
        }
        if (above - below < 1e-12) {
            break;
        }
        grid_volts = next;
    }
    return (double)NAN;
}

void plw_law_scale(plw_law *law, double factor) {
    law->coefficient[KG1] /= factor;
}
