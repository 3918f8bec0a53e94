/* Characteristic laws of triodes, pentodes and beam tubes.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/law.h"

#include <math.h>

/* Triode: N. Koren, "Improved Vacuum Tube Models for SPICE Simulations", Glass Audio 8(5), 1996, p. 18, with an offset
 * of the grid volts for the contact potential, and with a foot that need not widen in proportion to the plate volts: g,
 * foot-growth, is 1 in his law.
 *
 *   k  = kp ((kvb + Vp^2)/V0^2)^((1-g)/2)          V0 = 250 V
 *   E1 = (Vp/k) ln(1 + exp(k (1/mu + (Vg + Vc)/sqrt(kvb + Vp^2))))        Ip = 2 E1^x / kg1
 *
 * Pentode and beam tube: the same form for the space current, in an equivalent voltage u at the screen's place, and a
 * division of that current between plate and screen.
 *
 *   p  = Vp^2/(Vp + 1 V)       the plate volts, but with slope zero at zero
 *   u  = Vs + d p              the plate's field reaches through the screen a little: a finite plate resistance
 *   E1 = (u/kp) ln(1 + exp(kp (1/mu + (Vg + Vc)/sqrt(B + u^2))))            Ik = 2 E1^x / kg1
 *   f  = (2/pi) atan((pi/2) p/(k E1))   Koren's knee, but at k E1: it moves out with the current
 *   s  = w/(1 + delta ((Vp^2 + A)/(Vs^2 + A))^(q/2))   the screen's share above the knee
 *   Ip = Ik (1 - s) f
 *   Is = Ik (s + w kappa (1 - s)(1 - f^2))   of what the plate no longer takes, the screen gets the share kappa
 *
 * w = Vs^2/(Vs^2 + A) lets the screen's current end at zero screen volts.  kappa <= 1/2 keeps plate and screen together
 * below the space current.  Division of the space current as a power of the voltage ratio: K. Spangenberg, Proc. IRE
 * 28, May 1940, p. 226; C. M. Wallis, Proc. IRE 35, April 1947.  The moving knee is this project's own. */
enum { MU, EXPONENT, KG1, KP };
enum { TRIODE_KVB = KP + 1, TRIODE_CONTACT, TRIODE_FOOT_GROWTH, TRIODE_COUNT };
enum { PENTODE_PENETRATION = KP + 1, PENTODE_KNEE, PENTODE_DIVISION, PENTODE_CAPTURE, PENTODE_CONTACT, PENTODE_COUNT };

#define FOOT_REFERENCE_VOLTS 250.0      /* V0 */
#define FOOT_VOLTS 1.0                  /* of p */
#define SCREEN_SOFT_VOLTS_SQUARED 25.0  /* A */
#define CONTROL_SOFT_VOLTS_SQUARED 50.0 /* B */
#define HALF_DIVISION_EXPONENT 0.1      /* q/2: one value serves every tube of the catalogue */
#define CAPTURE_MOST 0.5
#define FOOT_GROWTH_MOST 2.0
#define LEAST_PLATE_VOLTS 1e-100 /* of a triode: below it the current is zero to any accuracy */
#define CONTACT_VOLTS_MOST 20.0
#define VOLTS_MOST 1e6              /* what lies beyond is taken as this, so that squares stay finite */
#define LEAST_EFFECTIVE_VOLTS 1e-30 /* below it every current is zero to any accuracy */
#define HALF_PI 1.57079632679489661923

static const char *const triode_names[TRIODE_COUNT] = {"mu",  "exponent",      "kg1",        "kp",
                                                       "kvb", "contact-volts", "foot-growth"};
static const char *const pentode_names[PENTODE_COUNT] = {"mu",   "exponent", "kg1",     "kp",           "penetration",
                                                         "knee", "division", "capture", "contact-volts"};

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
    return kind == PLW_LAW_TRIODE ? "koren-foot" : "moving-knee";
}

static bool is_contact(plw_law_kind kind, size_t index) {
    return index == (kind == PLW_LAW_TRIODE ? (size_t)TRIODE_CONTACT : (size_t)PENTODE_CONTACT);
}

plw_status plw_law_validate(const plw_law *law, plw_error *error) {
    for (size_t index = 0; index < plw_law_coefficient_count(law->kind); index++) {
        const double value = law->coefficient[index];
        const char *name = plw_law_coefficient_name(law->kind, index);
        if (is_contact(law->kind, index)) {
            if (!(fabs(value) <= CONTACT_VOLTS_MOST)) {
                return plw_fail(error, PLW_E_DATA, "coefficient %s is %g V; a few tenths of a volt are usual", name,
                                value);
            }
            continue;
        }
        const bool may_be_zero = law->kind == PLW_LAW_TRIODE && index == TRIODE_KVB;
        if (!isfinite(value) || value < 0.0 || (value == 0.0 && !may_be_zero)) {
            return plw_fail(error, PLW_E_DATA, "coefficient %s is %g; a positive number is wanted", name, value);
        }
    }
    const double exponent = law->coefficient[EXPONENT];
    if (!(exponent > 1.0 && exponent <= 3.0)) {
        return plw_fail(error, PLW_E_DATA, "coefficient exponent is %g; it lies between 1 and 3", exponent);
    }
    if (law->kind == PLW_LAW_TRIODE && law->coefficient[TRIODE_FOOT_GROWTH] > FOOT_GROWTH_MOST) {
        return plw_fail(error, PLW_E_DATA, "coefficient foot-growth is %g; it lies between 0 and %g, 1 in Koren's law",
                        law->coefficient[TRIODE_FOOT_GROWTH], FOOT_GROWTH_MOST);
    }
    if (law->kind == PLW_LAW_PENTODE && law->coefficient[PENTODE_CAPTURE] > CAPTURE_MOST) {
        return plw_fail(error, PLW_E_DATA,
                        "coefficient capture is %g; above %g plate and screen would take more than the cathode gives",
                        law->coefficient[PENTODE_CAPTURE], CAPTURE_MOST);
    }
    return PLW_OK;
}

/* ln(1 + exp(a)), its slope, and value - a slope without cancellation, from one exponential. */
typedef struct {
    double value, slope, above_chord;
} softplus;

static inline softplus softplus_of(double a) {
    const double small = exp(-fabs(a));
    const double rest = log1p(small);
    return (softplus){
        .value = (a > 0.0 ? a : 0.0) + rest,
        .slope = (a > 0.0 ? 1.0 : small) / (1.0 + small),
        .above_chord = rest + fabs(a) * small / (1.0 + small),
    };
}

/* Effective voltage E1 of an electrode under the grid's control, with its derivatives. */
typedef struct {
    double volts, by_electrode, by_grid;
} effective;

static inline effective effective_volts(double mu, double kp, double soft_squared, double volts, double grid_volts) {
    const double root = sqrt(soft_squared + volts * volts);
    const double drive = grid_volts / root;
    const softplus soft = softplus_of(kp * (1.0 / mu + drive));
    return (effective){
        .volts = volts / kp * soft.value,
        .by_electrode = soft.value / kp - volts * soft.slope * drive * volts / (root * root),
        .by_grid = volts * soft.slope / root,
    };
}

static inline effective triode_effective_volts(const double *c, double plate_volts, double grid_volts) {
    const double root_squared = c[TRIODE_KVB] + plate_volts * plate_volts;
    const double root = sqrt(root_squared);
    const double part = plate_volts * plate_volts / root_squared;
    const double drive = (grid_volts + c[TRIODE_CONTACT]) / root;
    const double narrowing = 1.0 - c[TRIODE_FOOT_GROWTH];
    const double k = c[KP] * pow(root / FOOT_REFERENCE_VOLTS, narrowing);
    const softplus soft = softplus_of(k * (1.0 / c[MU] + drive));
    return (effective){
        .volts = plate_volts / k * soft.value,
        .by_electrode = (soft.value - narrowing * part * soft.above_chord) / k - part * soft.slope * drive,
        .by_grid = plate_volts * soft.slope / root,
    };
}

/* Grid current: a space-charge diode with half the perveance of the tube's space current, which begins softly a little
 * below zero, where the contact potential and the electrons' own speed carry some to the grid.
 * Common practice, no source: the printed rows do not determine it; oxide cathodes show about 10 microampere at half a
 * volt negative and next to nothing at one volt. */
#define GRID_ONSET_VOLTS 0.4
#define GRID_SOFT_VOLTS 0.12
#define GRID_SILENT_VOLTS (-4.0) /* below it the current is less than 1e-20 A */

static void grid_current(const plw_law *law, double grid_volts, plw_currents *currents) {
    if (grid_volts <= GRID_SILENT_VOLTS) {
        return;
    }
    const softplus soft = softplus_of((grid_volts + GRID_ONSET_VOLTS) / GRID_SOFT_VOLTS);
    const double effective_grid_volts = GRID_SOFT_VOLTS * soft.value;
    const double perveance = 1.0 / law->coefficient[KG1];
    const double root = sqrt(effective_grid_volts);
    currents->grid_amps = perveance * effective_grid_volts * root;
    currents->grid_by_grid = 1.5 * perveance * root * soft.slope;
}

static void triode_currents(const plw_law *law, double plate_volts, double grid_volts, plw_currents *currents) {
    if (plate_volts < LEAST_PLATE_VOLTS) {
        return;
    }
    const double *c = law->coefficient;
    const effective e = triode_effective_volts(c, plate_volts, grid_volts);
    if (e.volts < LEAST_EFFECTIVE_VOLTS) {
        return;
    }
    currents->plate_amps = 2.0 * pow(e.volts, c[EXPONENT]) / c[KG1];
    const double by_effective = c[EXPONENT] * currents->plate_amps / e.volts;
    currents->plate_by_plate = by_effective * e.by_electrode;
    currents->plate_by_grid = by_effective * e.by_grid;
}

/* The screen's share above the knee, with its derivatives by plate and screen volts. */
typedef struct {
    double share, by_plate, by_screen;
    double weight, weight_by_screen; /* w */
} division;

static division divide_space_current(const double *c, double plate, double screen) {
    const double plate_square = plate * plate + SCREEN_SOFT_VOLTS_SQUARED;
    const double screen_square = screen * screen + SCREEN_SOFT_VOLTS_SQUARED;
    const double ratio = c[PENTODE_DIVISION] * pow(plate_square / screen_square, HALF_DIVISION_EXPONENT);
    const double below = 1.0 / (1.0 + ratio);
    division d;
    d.weight = screen * screen / screen_square;
    d.weight_by_screen = 2.0 * screen * SCREEN_SOFT_VOLTS_SQUARED / (screen_square * screen_square);
    d.share = d.weight * below;
    const double slope = -2.0 * HALF_DIVISION_EXPONENT * d.share * below * ratio;
    d.by_plate = slope * plate / plate_square;
    d.by_screen = d.weight_by_screen * below - slope * screen / screen_square;
    return d;
}

static void pentode_currents(const plw_law *law, double plate_volts, double screen_volts, double grid_volts,
                             plw_currents *currents) {
    const double *c = law->coefficient;
    const double plate = plate_volts > 0.0 ? plate_volts : 0.0;
    const double screen = screen_volts > 0.0 ? screen_volts : 0.0;
    const double foot = plate + FOOT_VOLTS;
    const double p = plate * plate / foot;
    const double p_by_plate = (plate * plate + 2.0 * FOOT_VOLTS * plate) / (foot * foot);
    const double u = screen_volts + c[PENTODE_PENETRATION] * p;
    if (u <= 0.0) {
        return;
    }
    const effective e = effective_volts(c[MU], c[KP], CONTROL_SOFT_VOLTS_SQUARED, u, grid_volts + c[PENTODE_CONTACT]);
    if (e.volts < LEAST_EFFECTIVE_VOLTS) {
        return;
    }
    const double space_amps = 2.0 * pow(e.volts, c[EXPONENT]) / c[KG1];
    const double space_by_effective = c[EXPONENT] * space_amps / e.volts;
    const double knee_volts = c[PENTODE_KNEE] * e.volts;
    const double f = atan(HALF_PI * p / knee_volts) / HALF_PI;
    const double f_by_p = knee_volts / (knee_volts * knee_volts + HALF_PI * HALF_PI * p * p);
    const double f_by_effective = -f_by_p * p / e.volts;
    const division d = divide_space_current(c, plate, screen);
    const double kappa = c[PENTODE_CAPTURE];
    const double left = d.weight * kappa * (1.0 - f * f); /* of the plate's share, what the screen gets of it */

    currents->plate_amps = space_amps * (1.0 - d.share) * f;
    currents->screen_amps = space_amps * (d.share + left * (1.0 - d.share));
    /* By the effective volts; by f; by the share; and the screen's weight. */
    const double plate_by_f = space_amps * (1.0 - d.share);
    const double screen_by_f = -2.0 * f * d.weight * kappa * plate_by_f;
    const double plate_by_effective = space_by_effective * (1.0 - d.share) * f + plate_by_f * f_by_effective;
    const double screen_by_effective =
        space_by_effective * (d.share + left * (1.0 - d.share)) + screen_by_f * f_by_effective;
    const double plate_by_share = -space_amps * f;
    const double screen_by_share = space_amps * (1.0 - left);
    const double screen_by_weight = kappa * (1.0 - f * f) * plate_by_f;
    const double u_by_plate = c[PENTODE_PENETRATION] * p_by_plate;
    currents->plate_by_grid = plate_by_effective * e.by_grid;
    currents->screen_by_grid = screen_by_effective * e.by_grid;
    currents->plate_by_screen = plate_by_effective * e.by_electrode + plate_by_share * d.by_screen;
    currents->screen_by_screen =
        screen_by_effective * e.by_electrode + screen_by_share * d.by_screen + screen_by_weight * d.weight_by_screen;
    currents->plate_by_plate = plate_by_effective * e.by_electrode * u_by_plate + plate_by_f * f_by_p * p_by_plate +
                               plate_by_share * d.by_plate;
    currents->screen_by_plate = screen_by_effective * e.by_electrode * u_by_plate + screen_by_f * f_by_p * p_by_plate +
                                screen_by_share * d.by_plate;
}

static double limited(double volts) {
    return volts > VOLTS_MOST ? VOLTS_MOST : volts < -VOLTS_MOST ? -VOLTS_MOST : volts;
}

void plw_law_evaluate(const plw_law *law, double plate_volts, double screen_volts, double grid_volts,
                      plw_currents *currents) {
    *currents = (plw_currents){0};
    if (law->kind == PLW_LAW_TRIODE) {
        triode_currents(law, limited(plate_volts), limited(grid_volts), currents);
    } else {
        pentode_currents(law, limited(plate_volts), limited(screen_volts), limited(grid_volts), currents);
    }
    grid_current(law, limited(grid_volts), currents);
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
