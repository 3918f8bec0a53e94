/* Writing of quantities: SI prefixes as the trade uses them, and the letter code of resistors.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "platewright/quantity.h"

#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* NO_HOME is a power of ten that no double reaches. */
enum { DIGITS_MOST = 9, NO_HOME = 1000 };

/* How a unit is written.  Prefixes run in steps of a thousand from least to most.  At `home` a leading 0. is more usual
 * than the next prefix down: 0.6 W, 0.47 Ω, 0.22 µF, but 450 mA.  All this is common practice, no source. */
typedef struct {
    const char *symbol;
    int least, most, home;
    /* Values of parts are nominal: 5 kΩ, 22 µF; of what is measured or computed the zeros tell how exact: 12.0 V. */
    bool nominal;
} unit_style;

static const unit_style STYLES[PLW_UNIT_COUNT] = {
    [PLW_UNIT_NONE] = {"", 0, 0, NO_HOME, false},     [PLW_UNIT_VOLT] = {"V", -6, 3, 0, false},
    [PLW_UNIT_AMPERE] = {"A", -9, 0, NO_HOME, false}, [PLW_UNIT_OHM] = {"\xCE\xA9", -3, 9, 0, true},
    [PLW_UNIT_WATT] = {"W", -6, 3, 0, false},         [PLW_UNIT_FARAD] = {"F", -12, -6, -6, true},
    [PLW_UNIT_HENRY] = {"H", -9, 0, NO_HOME, true},   [PLW_UNIT_HERTZ] = {"Hz", -3, 9, 0, false},
    [PLW_UNIT_SECOND] = {"s", -9, 0, NO_HOME, false}, [PLW_UNIT_SIEMENS] = {"S", -9, 0, NO_HOME, false},
    [PLW_UNIT_PERCENT] = {"%", 0, 0, NO_HOME, false},
};

/* A positive number as its significant digits and the power of ten of the first. */
typedef struct {
    int count;
    char digits[DIGITS_MOST + 1];
    int exponent;
} rounded;

/* Round to `count` significant digits.  printf() rounds correctly; the decimal point it writes is the locale's and is
 * passed over. */
static rounded round_to(double value, int count) {
    char text[64];
    snprintf(text, sizeof text, "%.*e", count - 1, value);
    rounded result = {0};
    const char *at = text;
    for (; *at != '\0' && *at != 'e'; at++) {
        if (*at >= '0' && *at <= '9' && result.count < DIGITS_MOST) {
            result.digits[result.count++] = *at;
        }
    }
    if (*at == 'e') {
        result.exponent = (int)strtol(at + 1, NULL, 10);
    }
    return result;
}

static void drop_zeros(rounded *number, int count_least) {
    while (number->count > count_least && number->digits[number->count - 1] == '0') {
        number->digits[--number->count] = '\0';
    }
}

/* The greatest multiple of three that is not above. */
static int thousands(int exponent) {
    return exponent >= 0 ? exponent / 3 * 3 : -((2 - exponent) / 3) * 3;
}

static const char *prefix_symbol(int exponent) {
    static const char *const symbols[] = {"p", "n", "\xC2\xB5", "m", "", "k", "M", "G"};
    return symbols[(exponent + 12) / 3];
}

/* Digits with the decimal point behind the one of 10^0 after taking 10^prefix out. */
static void put_number(const rounded *number, int prefix, char *text, size_t size) {
    const int whole = number->exponent - prefix + 1; /* digits before the point */
    if (whole <= 0) {
        snprintf(text, size, "0.%.*s%s", -whole, "000000000000", number->digits);
    } else if (whole >= number->count) {
        snprintf(text, size, "%s%.*s", number->digits, whole - number->count, "000000000000000000000000");
    } else {
        snprintf(text, size, "%.*s.%s", whole, number->digits, number->digits + whole);
    }
}

/* Copy, cut between characters if need be. */
static char *put_text(const char *text, char *buffer, size_t size) {
    size_t length = strlen(text);
    if (size == 0) {
        return buffer;
    }
    if (length >= size) {
        length = size - 1;
        while (length > 0 && ((unsigned char)text[length] & 0xC0U) == 0x80U) {
            length--;
        }
    }
    memcpy(buffer, text, length);
    buffer[length] = '\0';
    return buffer;
}

static int choose_prefix(const rounded *number, const unit_style *style) {
    if (number->exponent == style->home - 1) {
        return style->home;
    }
    const int prefix = thousands(number->exponent);
    if (prefix < style->least) {
        return style->least;
    }
    return prefix > style->most ? style->most : prefix;
}

char *plw_quantity_format(double value, plw_unit unit, int digits, char *buffer, size_t size) {
    if (!isfinite(value) || (int)unit < 0 || unit >= PLW_UNIT_COUNT) {
        return put_text("-", buffer, size);
    }
    const unit_style *style = &STYLES[unit];
    const char *gap = style->symbol[0] == '\0' ? "" : " ";
    char text[96];
    if (value == 0.0) {
        snprintf(text, sizeof text, "0%s%s", gap, style->symbol);
        return put_text(text, buffer, size);
    }
    const int count = digits < 1 ? 1 : digits > DIGITS_MOST ? DIGITS_MOST : digits;
    rounded number = round_to(fabs(value), count);
    const int prefix = choose_prefix(&number, style);
    const int places = number.exponent - prefix;
    if (style->nominal) {
        drop_zeros(&number, 1);
    }
    char mantissa[48];
    const char *prefix_text = prefix_symbol(prefix);
    if (places < -9 || places > 14) {
        /* Far outside anything that is built: a power of ten rather than a row of zeros. */
        const int exponent = number.exponent;
        number.exponent = 0;
        put_number(&number, 0, mantissa, sizeof mantissa);
        const size_t used = strlen(mantissa);
        snprintf(mantissa + used, sizeof mantissa - used, "e%d", exponent);
        prefix_text = "";
    } else {
        put_number(&number, prefix, mantissa, sizeof mantissa);
    }
    snprintf(text, sizeof text, "%s%s%s%s%s", value < 0.0 ? "-" : "", mantissa, gap, prefix_text, style->symbol);
    return put_text(text, buffer, size);
}

char *plw_resistor_code(double ohms, char *buffer, size_t size) {
    if (!(ohms > 0.0 && isfinite(ohms))) {
        return put_text("-", buffer, size);
    }
    rounded number = round_to(ohms, 4);
    drop_zeros(&number, 2);
    char text[32];
    if (number.exponent >= 12 || number.exponent < -4) {
        return put_text("-", buffer, size);
    }
    if (number.exponent < 0) {
        /* R47, R022: the marking below an ohm keeps to R, though L would be milli. */
        snprintf(text, sizeof text, "R%.*s%s", -number.exponent - 1, "000", number.digits);
        return put_text(text, buffer, size);
    }
    static const char letters[] = {'R', 'K', 'M', 'G'};
    const int whole = number.exponent % 3 + 1;
    const char letter = letters[number.exponent / 3];
    if (whole >= number.count) {
        snprintf(text, sizeof text, "%s%.*s%c", number.digits, whole - number.count, "00", letter);
    } else {
        snprintf(text, sizeof text, "%.*s%c%s", whole, number.digits, letter, number.digits + whole);
    }
    return put_text(text, buffer, size);
}
