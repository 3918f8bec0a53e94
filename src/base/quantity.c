/* Reading of quantities: number, SI prefix, unit, and the letter code of resistors and capacitors.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/quantity.h"

#include <float.h>
#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* No quantity that a person writes is longer; what is longer is refused, so that nothing needs to be allocated. */
enum { QUANTITY_LENGTH_MOST = 127 };

enum { SPELLINGS_MOST = 5, LETTERS_MOST = 7 };

/* One way to write a unit.  Case is ignored unless it tells two units apart (s and S). */
typedef struct {
    const char *text;
    bool exact_case;
    int exponent; /* of ten, for a spelling that holds a prefix of its own; such a one takes no other */
} spelling;

/* A multiplier, as a prefix or in the place of the decimal point. */
typedef struct {
    const char *text;
    int exponent;
} multiplier;

typedef struct {
    const char *noun;   /* "a current" */
    const char *wanted; /* what to write instead */
    bool takes_prefix;
    bool takes_mega; /* M and G; for the others they would be a slip for milli, as in 45MA */
    spelling spellings[SPELLINGS_MOST];
    multiplier letters[LETTERS_MOST]; /* letter code; none for units without one */
} unit_facts;

#define MICRO_SIGN "\xC2\xB5"          /* U+00B5 */
#define GREEK_MU "\xCE\xBC"            /* U+03BC */
#define GREEK_OMEGA "\xCE\xA9"         /* U+03A9 */
#define OHM_SIGN "\xE2\x84\xA6"        /* U+2126 */
#define MINUS_SIGN "\xE2\x88\x92"      /* U+2212 */
#define NO_BREAK_SPACE "\xC2\xA0"      /* U+00A0 */
#define NARROW_NO_BREAK "\xE2\x80\xAF" /* U+202F */

/* Letters for resistors and capacitors: IEC 60062:2016, from its published table of examples (R, K, M) and, for G, L,
 * p, n, m and F, from memory of it.  Inductors follow the capacitors: common practice, no source. mfd and mmfd on old
 * capacitors and drawings are micro- and micromicrofarad: common practice, no source. */
static const unit_facts FACTS[PLW_UNIT_COUNT] = {
    [PLW_UNIT_NONE] = {.noun = "a plain number", .wanted = "a plain number such as 25"},
    [PLW_UNIT_VOLT] = {.noun = "a voltage",
                       .wanted = "a voltage such as 285V or 12.5 V",
                       .takes_prefix = true,
                       .spellings = {{"V", false, 0}, {"volt", false, 0}, {"volts", false, 0}}},
    [PLW_UNIT_AMPERE] = {.noun = "a current",
                         .wanted = "a current such as 45mA or 0.045",
                         .takes_prefix = true,
                         .spellings = {{"A", false, 0},
                                       {"amp", false, 0},
                                       {"amps", false, 0},
                                       {"ampere", false, 0},
                                       {"amperes", false, 0}}},
    [PLW_UNIT_OHM] = {.noun = "a resistance",
                      .wanted = "a resistance such as 5k or 4k7",
                      .takes_prefix = true,
                      .takes_mega = true,
                      .spellings = {{"R", false, 0},
                                    {"ohm", false, 0},
                                    {"ohms", false, 0},
                                    {GREEK_OMEGA, true, 0},
                                    {OHM_SIGN, true, 0}},
                      .letters = {{"R", 0}, {"r", 0}, {"K", 3}, {"k", 3}, {"M", 6}, {"G", 9}, {"L", -3}}},
    [PLW_UNIT_WATT] = {.noun = "a power",
                       .wanted = "a power such as 4.5W or 600mW",
                       .takes_prefix = true,
                       .spellings = {{"W", false, 0}, {"watt", false, 0}, {"watts", false, 0}}},
    [PLW_UNIT_FARAD] =
        {.noun = "a capacitance",
         .wanted = "a capacitance such as 47uF or 4n7",
         .takes_prefix = true,
         .spellings =
             {{"F", false, 0}, {"farad", false, 0}, {"farads", false, 0}, {"mfd", false, -6}, {"mmfd", false, -12}},
         .letters = {{"p", -12}, {"n", -9}, {"u", -6}, {MICRO_SIGN, -6}, {GREEK_MU, -6}, {"m", -3}, {"F", 0}}},
    [PLW_UNIT_HENRY] =
        {.noun = "an inductance",
         .wanted = "an inductance such as 8H or 350mH",
         .takes_prefix = true,
         .spellings = {{"H", false, 0}, {"henry", false, 0}, {"henrys", false, 0}, {"henries", false, 0}},
         .letters = {{"n", -9}, {"u", -6}, {MICRO_SIGN, -6}, {GREEK_MU, -6}, {"m", -3}, {"H", 0}}},
    [PLW_UNIT_HERTZ] = {.noun = "a frequency",
                        .wanted = "a frequency such as 50Hz or 1k",
                        .takes_prefix = true,
                        .takes_mega = true,
                        .spellings = {{"Hz", false, 0}, {"hertz", false, 0}}},
    [PLW_UNIT_SECOND] = {.noun = "a time",
                         .wanted = "a time such as 30s or 20ms",
                         .takes_prefix = true,
                         .spellings = {{"s", true, 0}, {"sec", false, 0}, {"second", false, 0}, {"seconds", false, 0}}},
    [PLW_UNIT_SIEMENS] = {.noun = "a transconductance",
                          .wanted = "a transconductance such as 4.1mA/V, 4.1mS or 4100umho",
                          .takes_prefix = true,
                          .spellings = {{"S", true, 0},
                                        {"siemens", false, 0},
                                        {"A/V", false, 0},
                                        {"mho", false, 0},
                                        {"mhos", false, 0}}},
    [PLW_UNIT_PERCENT] = {.noun = "a percentage",
                          .wanted = "a percentage such as 90%",
                          .spellings = {{"%", false, 0}, {"percent", false, 0}}},
};

static const multiplier PREFIXES[] = {{"p", -12}, {"n", -9}, {"u", -6}, {MICRO_SIGN, -6}, {GREEK_MU, -6},
                                      {"m", -3},  {"k", 3},  {"K", 3},  {"M", 6},         {"G", 9}};

/* A decimal number as its digits (no leading zeros, no point) and a power of ten. */
typedef struct {
    bool negative;
    int count;
    char digits[QUANTITY_LENGTH_MOST + 1];
    int exponent;
} decimal;

/* ---- characters; <ctype.h> would ask the locale ------------------------------------------------------------- */

static bool is_digit(char c) {
    return c >= '0' && c <= '9';
}

static char lower(char c) {
    return c >= 'A' && c <= 'Z' ? (char)(c - 'A' + 'a') : c;
}

static bool same_ignoring_case(const char *one, const char *other) {
    while (*one != '\0' && lower(*one) == lower(*other)) {
        one++;
        other++;
    }
    return *one == *other;
}

/* What follows `start` in text, or NULL when text does not begin with it. */
static const char *after(const char *text, const char *start) {
    const size_t length = strlen(start);
    return strncmp(text, start, length) == 0 ? text + length : NULL;
}

/* What follows one space of any kind, or NULL. */
static const char *after_space(const char *text) {
    static const char *const spaces[] = {" ", "\t", "\n", "\r", NO_BREAK_SPACE, NARROW_NO_BREAK};
    for (size_t i = 0; i < sizeof spaces / sizeof spaces[0]; i++) {
        const char *rest = after(text, spaces[i]);
        if (rest != NULL) {
            return rest;
        }
    }
    return NULL;
}

static const char *skip_spaces(const char *text) {
    for (const char *rest = after_space(text); rest != NULL; rest = after_space(text)) {
        text = rest;
    }
    return text;
}

/* The text without spaces around it.  Ret: false when it is longer than a quantity can be. */
static bool trim(const char *text, char trimmed[QUANTITY_LENGTH_MOST + 1]) {
    text = skip_spaces(text);
    const char *end = text;
    for (const char *at = text; *at != '\0';) {
        const char *rest = after_space(at);
        if (rest == NULL) {
            end = at + 1;
            rest = at + 1;
        }
        at = rest;
    }
    const size_t length = (size_t)(end - text);
    if (length > QUANTITY_LENGTH_MOST) {
        return false;
    }
    memcpy(trimmed, text, length);
    trimmed[length] = '\0';
    return true;
}

/* The text as an error may show it: control characters would upset a terminal, and a long text the reader. */
static const char *shown(const char *text, char buffer[64]) {
    size_t used = 0;
    while (used < 48 && text[used] != '\0') {
        const unsigned char c = (unsigned char)text[used];
        buffer[used] = c < 0x20 || c == 0x7F ? '?' : text[used];
        used++;
    }
    if (text[used] != '\0') {
        while (used > 0 && ((unsigned char)text[used] & 0xC0U) == 0x80U) {
            used--; /* not within a character of several bytes */
        }
        memcpy(buffer + used, "...", 3);
        used += 3;
    }
    buffer[used] = '\0';
    return buffer;
}

/* ---- numbers --------------------------------------------------------------------------------------------------- */

static const char *read_sign(const char *at, decimal *number) {
    const char *rest = after(at, MINUS_SIGN);
    if (rest == NULL) {
        rest = after(at, "-");
    }
    number->negative = rest != NULL;
    if (rest == NULL) {
        rest = after(at, "+");
    }
    return rest != NULL ? rest : at;
}

/* Append the digits at `at`, each moving the power of ten by `step` (0 before the decimal point, -1 behind it). */
static const char *read_digits(const char *at, int step, decimal *number) {
    for (; is_digit(*at); at++) {
        if (number->count > 0 || *at != '0') {
            number->digits[number->count++] = *at;
        }
        number->exponent += step;
    }
    return at;
}

/* An exponent such as e-3, or nothing. */
static const char *read_exponent(const char *at, decimal *number) {
    if (lower(*at) != 'e') {
        return at;
    }
    const char *digit = at + 1;
    const bool negative = *digit == '-';
    if (*digit == '-' || *digit == '+') {
        digit++;
    }
    if (!is_digit(*digit)) {
        return at;
    }
    int exponent = 0;
    for (; is_digit(*digit); digit++) {
        /* Beyond this any number is out of range, whatever its digits. */
        exponent = exponent > 9999 ? exponent : 10 * exponent + (*digit - '0');
    }
    number->exponent += negative ? -exponent : exponent;
    return digit;
}

/* A number with a decimal point: digits on at least one side of it.  Ret: what follows, or NULL. */
static const char *read_number(const char *at, decimal *number) {
    const char *end = read_digits(at, 0, number);
    const bool whole = end != at;
    if (*end == '.') {
        const char *fraction = end + 1;
        end = read_digits(fraction, -1, number);
        if (!whole && end == fraction) {
            return NULL;
        }
    } else if (!whole) {
        return NULL;
    }
    return read_exponent(end, number);
}

/* A number in letter code, such as 4k7 or R47: a letter of the unit with a digit right behind it.
 * Ret: what follows, or NULL (then *number is as it was). */
static const char *read_letter_code(const char *at, plw_unit unit, decimal *number) {
    decimal trial = *number;
    const char *letter = read_digits(at, 0, &trial);
    const multiplier *letters = FACTS[unit].letters;
    for (size_t i = 0; i < LETTERS_MOST && letters[i].text != NULL; i++) {
        const char *fraction = after(letter, letters[i].text);
        if (fraction != NULL && is_digit(*fraction)) {
            const char *end = read_digits(fraction, -1, &trial);
            trial.exponent += letters[i].exponent;
            *number = trial;
            return end;
        }
    }
    return NULL;
}

/* The nearest double.  strtod() rounds correctly but takes the decimal point of the locale, so it is given a number
 * without one: digits, e, power of ten.  The prefix is in that power, so that 0.22uF is exactly the double 2.2e-7. */
static double to_double(const decimal *number) {
    if (number->count == 0) {
        return 0.0;
    }
    char text[QUANTITY_LENGTH_MOST + 32];
    snprintf(text, sizeof text, "%s%.*se%d", number->negative ? "-" : "", number->count, number->digits,
             number->exponent);
    return strtod(text, NULL);
}

/* ---- units ----------------------------------------------------------------------------------------------------- */

static const spelling *find_spelling(const char *text, plw_unit unit) {
    const spelling *spellings = FACTS[unit].spellings;
    for (size_t i = 0; i < SPELLINGS_MOST && spellings[i].text != NULL; i++) {
        if (spellings[i].exact_case ? strcmp(text, spellings[i].text) == 0
                                    : same_ignoring_case(text, spellings[i].text)) {
            return &spellings[i];
        }
    }
    return NULL;
}

/* What a suffix is to a unit. */
typedef enum {
    SUFFIX_FOREIGN, /* not of this unit */
    SUFFIX_UNIT,    /* the unit, with or without a prefix */
    SUFFIX_BARE,    /* nothing, or a prefix alone */
    SUFFIX_MEGA     /* M or G where milli must have been meant */
} suffix_kind;

static suffix_kind classify_rest(const char *rest, plw_unit unit) {
    if (*rest == '\0') {
        return SUFFIX_BARE;
    }
    const spelling *found = find_spelling(rest, unit);
    return found != NULL && found->exponent == 0 ? SUFFIX_UNIT : SUFFIX_FOREIGN;
}

static suffix_kind classify_suffix(const char *suffix, plw_unit unit, int *exponent) {
    const spelling *whole = find_spelling(suffix, unit);
    *exponent = whole != NULL ? whole->exponent : 0;
    if (whole != NULL) {
        return SUFFIX_UNIT;
    }
    if (*suffix == '\0') {
        return SUFFIX_BARE;
    }
    if (!FACTS[unit].takes_prefix) {
        return SUFFIX_FOREIGN;
    }
    for (size_t i = 0; i < sizeof PREFIXES / sizeof PREFIXES[0]; i++) {
        const char *rest = after(suffix, PREFIXES[i].text);
        const suffix_kind kind = rest == NULL ? SUFFIX_FOREIGN : classify_rest(skip_spaces(rest), unit);
        if (kind != SUFFIX_FOREIGN) {
            *exponent = PREFIXES[i].exponent;
            return *exponent >= 6 && !FACTS[unit].takes_mega ? SUFFIX_MEGA : kind;
        }
    }
    /* "meg" is said of resistors in any case. */
    if (unit == PLW_UNIT_OHM && lower(suffix[0]) == 'm' && lower(suffix[1]) == 'e' && lower(suffix[2]) == 'g') {
        *exponent = 6;
        return classify_rest(skip_spaces(suffix + 3), unit);
    }
    return SUFFIX_FOREIGN;
}

/* ---- errors ---------------------------------------------------------------------------------------------------- */

static plw_status refuse_suffix(const char *text, const char *suffix, plw_unit unit, plw_error *error) {
    char text_shown[64];
    char suffix_shown[64];
    for (int other = 0; other < PLW_UNIT_COUNT; other++) {
        int exponent = 0;
        const suffix_kind kind = classify_suffix(suffix, (plw_unit)other, &exponent);
        if ((plw_unit)other != unit && kind == SUFFIX_UNIT) {
            return plw_fail(error, PLW_E_USAGE, "%s is %s; %s is wanted", shown(text, text_shown), FACTS[other].noun,
                            FACTS[unit].wanted);
        }
    }
    return plw_fail(error, PLW_E_USAGE, "'%s' has '%s' left over after the number; %s is wanted",
                    shown(text, text_shown), shown(suffix, suffix_shown), FACTS[unit].wanted);
}

/* A number in a letter code that is not the unit's.  Ret: PLW_OK when it is in no letter code at all. */
static plw_status refuse_letter_code(const char *text, const char *at, plw_unit unit, plw_error *error) {
    char text_shown[64];
    for (int other = 0; other < PLW_UNIT_COUNT; other++) {
        decimal number = {0};
        if ((plw_unit)other == unit || read_letter_code(at, (plw_unit)other, &number) == NULL) {
            continue;
        }
        shown(text, text_shown);
        if (FACTS[unit].letters[0].text == NULL) {
            return plw_fail(error, PLW_E_USAGE, "%s is in the letter code of resistors and capacitors; %s is wanted",
                            text_shown, FACTS[unit].wanted);
        }
        decimal milli = {0};
        const char *letter = read_digits(at, 0, &milli);
        if (unit == PLW_UNIT_OHM && *letter == 'm') {
            return plw_fail(error, PLW_E_USAGE, "%s may mean milli or mega; write 4M7 for megohms, 4L7 for milliohms",
                            text_shown);
        }
        return plw_fail(error, PLW_E_USAGE, "%s is %s; %s is wanted", text_shown, FACTS[other].noun,
                        FACTS[unit].wanted);
    }
    return PLW_OK;
}

/* ---- the whole ------------------------------------------------------------------------------------------------- */

static plw_status read_decimal(const char *text, plw_unit unit, decimal *number, plw_error *error) {
    char text_shown[64];
    const char *at = read_sign(text, number);
    const char *end = read_letter_code(at, unit, number);
    if (end != NULL) {
        const char *suffix = skip_spaces(end);
        return classify_rest(suffix, unit) != SUFFIX_FOREIGN ? PLW_OK : refuse_suffix(text, suffix, unit, error);
    }
    const plw_status status = refuse_letter_code(text, at, unit, error);
    if (status != PLW_OK) {
        return status;
    }
    end = read_number(at, number);
    if (end == NULL) {
        return plw_fail(error, PLW_E_USAGE, "'%s' is not a number; %s is wanted", shown(text, text_shown),
                        FACTS[unit].wanted);
    }
    const char *suffix = skip_spaces(end);
    int exponent = 0;
    switch (classify_suffix(suffix, unit, &exponent)) {
    case SUFFIX_UNIT:
    case SUFFIX_BARE:
        number->exponent += exponent;
        return PLW_OK;
    case SUFFIX_MEGA:
        return plw_fail(error, PLW_E_USAGE, "%s: M is mega and G giga, milli is a small m; %s is wanted",
                        shown(text, text_shown), FACTS[unit].wanted);
    case SUFFIX_FOREIGN:
        break;
    }
    return refuse_suffix(text, suffix, unit, error);
}

plw_status plw_quantity_parse(const char *text, plw_unit unit, double *value, plw_error *error) {
    if (text == NULL || value == NULL || (int)unit < 0 || unit >= PLW_UNIT_COUNT) {
        return plw_fail(error, PLW_E_USAGE, "a text and a known unit are needed to read a quantity");
    }
    char text_shown[64];
    char trimmed[QUANTITY_LENGTH_MOST + 1];
    if (!trim(text, trimmed)) {
        return plw_fail(error, PLW_E_USAGE, "'%s' is too long; %s is wanted", shown(text, text_shown),
                        FACTS[unit].wanted);
    }
    if (trimmed[0] == '\0') {
        return plw_fail(error, PLW_E_USAGE, "nothing is written here; %s is wanted", FACTS[unit].wanted);
    }
    if (strchr(trimmed, ',') != NULL) {
        return plw_fail(error, PLW_E_USAGE,
                        "%s has a comma; write a decimal point, and nothing between thousands: %s is wanted",
                        shown(trimmed, text_shown), FACTS[unit].wanted);
    }
    decimal number = {0};
    const plw_status status = read_decimal(trimmed, unit, &number, error);
    if (status != PLW_OK) {
        return status;
    }
    const double read = to_double(&number);
    if (!isfinite(read) || (number.count > 0 && fabs(read) < DBL_MIN)) {
        return plw_fail(error, PLW_E_USAGE, "%s is too %s to reckon with; %s is wanted", shown(trimmed, text_shown),
                        isfinite(read) ? "small" : "large", FACTS[unit].wanted);
    }
    *value = read;
    return PLW_OK;
}
