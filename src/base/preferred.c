/* Preferred values of resistors and capacitors, and usual power ratings.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/preferred.h"

#include <math.h>
#include <stdbool.h>
#include <stddef.h>

/* The domain, in decades about 1. */
enum { DECADES = 12 };

/* Values within this ratio of a member are taken as that member: they differ by rounding only. */
static const double SAME = 1e-9;

static bool is_series(plw_series series) {
    switch (series) {
    case PLW_E6:
    case PLW_E12:
    case PLW_E24:
    case PLW_E48:
    case PLW_E96:
    case PLW_E192:
        return true;
    }
    return false;
}

static bool in_domain(double value, plw_series series) {
    return value >= 1e-12 && value <= 1e12 && is_series(series);
}

/* Hundredfold member `place` of the decade 1 to 10.
 * Source: IEC 60063:2015.  E24 is a table older than the rule (27, 30, 33, 36, 39, 43, 47 and 82 differ from it), and
 * E12 and E6 are every second and fourth of it; from E48 on the members are 10^(place/steps) to three digits, but
 * for 9.20 in E192 where the rule gives 9.19 (that exception from memory of the standard). */
static int hundredfold(int place, plw_series series) {
    static const int e24[24] = {100, 110, 120, 130, 150, 160, 180, 200, 220, 240, 270, 300,
                                330, 360, 390, 430, 470, 510, 560, 620, 680, 750, 820, 910};
    if (series <= PLW_E24) {
        const int place_of_24 = place * (24 / (int)series);
        return e24[place_of_24];
    }
    const int place_of_192 = place * (192 / (int)series);
    return place_of_192 == 185 ? 920 : (int)lround(100.0 * pow(10.0, place_of_192 / 192.0));
}

/* Member number n, counted from 1 (n = 0).  The power of ten is exact and is used once, so that the result is the
 * double nearest to the printed value. */
static double member(int n, plw_series series) {
    const int steps = (int)series;
    const int decade = n >= 0 ? n / steps : -((steps - 1 - n) / steps);
    const int exponent = decade - 2;
    double power = 1.0;
    for (int i = 0; i < (exponent < 0 ? -exponent : exponent); i++) {
        power *= 10.0;
    }
    const double mantissa = hundredfold(n - decade * steps, series);
    return exponent < 0 ? mantissa / power : mantissa * power;
}

/* Number of the greatest member that is not above the value. */
static int number_at_most(double value, plw_series series) {
    int n = (int)floor((int)series * log10(value));
    while (member(n, series) > value) {
        n--;
    }
    while (member(n + 1, series) <= value) {
        n++;
    }
    return n;
}

static int number_nearest(double value, plw_series series) {
    const int below = number_at_most(value, series);
    /* Nearer by ratio: compared with the geometric mean of the two. */
    return value * value > member(below, series) * member(below + 1, series) ? below + 1 : below;
}

double plw_preferred_nearest(double value, plw_series series) {
    return in_domain(value, series) ? member(number_nearest(value, series), series) : (double)NAN;
}

double plw_preferred_at_most(double value, plw_series series) {
    return in_domain(value, series) ? member(number_at_most(value * (1.0 + SAME), series), series) : (double)NAN;
}

double plw_preferred_at_least(double value, plw_series series) {
    if (!in_domain(value, series)) {
        return (double)NAN;
    }
    const double least = value * (1.0 - SAME);
    const int below = number_at_most(least, series);
    return member(below, series) >= least ? member(below, series) : member(below + 1, series);
}

double plw_preferred_step(double value, int steps, plw_series series) {
    if (!in_domain(value, series)) {
        return (double)NAN;
    }
    const int last = DECADES * (int)series;
    /* More steps than the domain holds lead out of it; refused before the sum, which could overflow. */
    if (steps > 2 * last || steps < -2 * last) {
        return (double)NAN;
    }
    const int n = number_nearest(value, series) + steps;
    return n >= -last && n <= last ? member(n, series) : (double)NAN;
}

plw_status plw_series_parse(const char *text, plw_series *series, plw_error *error) {
    static const struct {
        const char *digits;
        plw_series series;
    } known[] = {{"6", PLW_E6}, {"12", PLW_E12}, {"24", PLW_E24}, {"48", PLW_E48}, {"96", PLW_E96}, {"192", PLW_E192}};
    if (text != NULL && series != NULL && (text[0] == 'E' || text[0] == 'e')) {
        for (size_t i = 0; i < sizeof known / sizeof known[0]; i++) {
            size_t at = 0;
            while (known[i].digits[at] != '\0' && known[i].digits[at] == text[at + 1]) {
                at++;
            }
            if (known[i].digits[at] == '\0' && text[at + 1] == '\0') {
                *series = known[i].series;
                return PLW_OK;
            }
        }
    }
    return plw_fail(error, PLW_E_USAGE,
                    "'%.40s' is not a series of preferred values; E6, E12, E24, E48, E96 and E192 are known",
                    text != NULL ? text : "");
}

double plw_resistor_rating_watts(double watts, double margin) {
    static const double ratings[] = {0.25, 0.5, 1.0, 2.0, 3.0, 5.0, 7.0, 10.0, 15.0, 20.0, 25.0, 50.0, 100.0, 200.0};
    if (!(watts >= 0.0 && margin >= 1.0)) {
        return (double)NAN;
    }
    for (size_t i = 0; i < sizeof ratings / sizeof ratings[0]; i++) {
        if (ratings[i] * (1.0 + SAME) >= watts * margin) {
            return ratings[i];
        }
    }
    return (double)NAN;
}
