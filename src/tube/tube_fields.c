/* The numbers of a tube file: attribute, place in the structure, unit, range, and how they are written.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "tube/tube_fields.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define FIELD(type, member, attribute, ...)                                                                            \
    { attribute, offsetof(type, member), __VA_ARGS__ }
#define END                                                                                                            \
    { NULL, 0, PLW_FIELD_NUMBER, 0, 0 }

/* The ranges hold every receiving and small transmitting tube; what lies outside is a slip of the pen (250k for 250,
 * 48 A for 48 mA). */
#define PLATE_VOLTS PLW_FIELD_VOLTS, 0, 10000
#define GRID_VOLTS PLW_FIELD_VOLTS, -1000, 100
#define LIMIT_VOLTS PLW_FIELD_VOLTS, 1, 10000
#define CURRENT PLW_FIELD_MILLIAMPERES, 0, 5
#define RESISTANCE PLW_FIELD_OHMS, 1, 1e8
#define UNCERTAINTY PLW_FIELD_PERCENT, 0, 100

const plw_tube_field plw_heater_fields[] = {FIELD(plw_tube, heater_volts, "volts", PLW_FIELD_VOLTS, 0.5, 150),
                                            FIELD(plw_tube, heater_amps, "current", PLW_FIELD_AMPERES, 0.01, 50), END};

const plw_tube_field plw_variant_heater_fields[] = {
    FIELD(plw_variant, heater_volts, "volts", PLW_FIELD_VOLTS, 0.5, 150),
    FIELD(plw_variant, heater_amps, "current", PLW_FIELD_AMPERES, 0.01, 50), END};

const plw_tube_field plw_ratings_fields[] = {
    FIELD(plw_ratings, plate_volts, "plate", LIMIT_VOLTS),
    FIELD(plw_ratings, screen_volts, "screen", LIMIT_VOLTS),
    FIELD(plw_ratings, plate_watts, "plate-dissipation", PLW_FIELD_WATTS, 0.05, 5000),
    FIELD(plw_ratings, screen_watts, "screen-dissipation", PLW_FIELD_WATTS, 0.01, 1000),
    FIELD(plw_ratings, screen_watts_full_drive, "screen-dissipation-full-drive", PLW_FIELD_WATTS, 0.01, 1000),
    FIELD(plw_ratings, total_watts, "total-dissipation", PLW_FIELD_WATTS, 0.05, 5000),
    FIELD(plw_ratings, cathode_amps, "cathode-current", PLW_FIELD_MILLIAMPERES, 1e-4, 5),
    FIELD(plw_ratings, grid_ohms_fixed_bias, "grid-resistor-fixed-bias", RESISTANCE),
    FIELD(plw_ratings, grid_ohms_cathode_bias, "grid-resistor-cathode-bias", RESISTANCE),
    FIELD(plw_ratings, heater_cathode_volts, "heater-cathode", LIMIT_VOLTS),
    END};

const plw_tube_field plw_row_fields[] = {FIELD(plw_row, plate_volts, "plate", LIMIT_VOLTS),
                                         FIELD(plw_row, screen_volts, "screen", LIMIT_VOLTS),
                                         FIELD(plw_row, grid_volts, "grid", GRID_VOLTS),
                                         FIELD(plw_row, cathode_resistor_ohms, "cathode-resistor", RESISTANCE),
                                         FIELD(plw_row, drive_peak_volts, "drive-peak", PLW_FIELD_VOLTS, 0, 1000),
                                         FIELD(plw_row, plate_amps, "plate-current", PLW_FIELD_MILLIAMPERES, 1e-6, 5),
                                         FIELD(plw_row, plate_amps_full_drive, "plate-current-full-drive", CURRENT),
                                         FIELD(plw_row, screen_amps, "screen-current", CURRENT),
                                         FIELD(plw_row, screen_amps_full_drive, "screen-current-full-drive", CURRENT),
                                         FIELD(plw_row, plate_resistance_ohms, "plate-resistance", RESISTANCE),
                                         FIELD(plw_row, gm_siemens, "gm", PLW_FIELD_MICROMHOS, 1e-6, 1),
                                         FIELD(plw_row, mu, "mu", PLW_FIELD_NUMBER, 0.5, 1e5),
                                         FIELD(plw_row, load_ohms, "load", RESISTANCE),
                                         FIELD(plw_row, power_watts, "power", PLW_FIELD_WATTS, 0, 5000),
                                         FIELD(plw_row, thd_percent, "thd", PLW_FIELD_PERCENT, 0, 100),
                                         FIELD(plw_row, h2_percent, "h2", PLW_FIELD_PERCENT, 0, 100),
                                         FIELD(plw_row, h3_percent, "h3", PLW_FIELD_PERCENT, 0, 100),
                                         FIELD(plw_row, uncertainty_percent, "uncertainty", UNCERTAINTY),
                                         END};

const plw_tube_field plw_point_fields[] = {FIELD(plw_point, plate_volts, "plate", PLATE_VOLTS),
                                           FIELD(plw_point, screen_volts, "screen", PLATE_VOLTS),
                                           FIELD(plw_point, grid_volts, "grid", GRID_VOLTS),
                                           FIELD(plw_point, plate_amps, "plate-current", CURRENT),
                                           FIELD(plw_point, screen_amps, "screen-current", CURRENT),
                                           FIELD(plw_point, plate_resistance_ohms, "plate-resistance", RESISTANCE),
                                           FIELD(plw_point, gm_siemens, "gm", PLW_FIELD_MICROMHOS, 1e-6, 1),
                                           FIELD(plw_point, mu, "mu", PLW_FIELD_NUMBER, 0.5, 1e5),
                                           FIELD(plw_point, uncertainty_percent, "uncertainty", UNCERTAINTY),
                                           END};

const plw_tube_field plw_model_errors_fields[] = {
    FIELD(plw_model_errors, plate_current_percent, "plate-current", PLW_FIELD_PERCENT, 0, 1e6),
    FIELD(plw_model_errors, screen_current_percent, "screen-current", PLW_FIELD_PERCENT, 0, 1e6),
    FIELD(plw_model_errors, power_percent, "power", PLW_FIELD_PERCENT, 0, 1e6),
    FIELD(plw_model_errors, distortion_points, "distortion-points", PLW_FIELD_NUMBER, 0, 1e6), END};

const plw_tube_field plw_region_fields[] = {FIELD(plw_region, plate_volts_least, "plate-least", PLATE_VOLTS),
                                            FIELD(plw_region, plate_volts_most, "plate-most", PLATE_VOLTS),
                                            FIELD(plw_region, screen_volts_least, "screen-least", PLATE_VOLTS),
                                            FIELD(plw_region, screen_volts_most, "screen-most", PLATE_VOLTS),
                                            FIELD(plw_region, plate_amps_least, "plate-current-least", CURRENT),
                                            FIELD(plw_region, plate_amps_most, "plate-current-most", CURRENT),
                                            END};

const plw_tube_field plw_rectifier_limits_fields[] = {
    FIELD(plw_rectifier_data, peak_inverse_volts, "peak-inverse", PLW_FIELD_VOLTS, 1, 100000),
    FIELD(plw_rectifier_data, peak_plate_amps, "peak-plate-current", PLW_FIELD_MILLIAMPERES, 1e-3, 50),
    FIELD(plw_rectifier_data, output_amps, "output-current", PLW_FIELD_MILLIAMPERES, 1e-3, 20),
    FIELD(plw_rectifier_data, plate_rms_volts, "plate-rms", LIMIT_VOLTS),
    FIELD(plw_rectifier_data, least_supply_ohms, "least-supply-resistance", PLW_FIELD_OHMS, 0, 1e5),
    FIELD(plw_rectifier_data, most_reservoir_farads, "most-reservoir", PLW_FIELD_MICROFARADS, 1e-7, 1),
    END};

const plw_tube_field plw_rectifier_drop_fields[] = {
    FIELD(plw_rectifier_data, drop_volts, "drop", PLW_FIELD_VOLTS, 0.1, 1000),
    FIELD(plw_rectifier_data, drop_amps, "plate-current", PLW_FIELD_MILLIAMPERES, 1e-3, 50), END};

const plw_tube_field plw_rectifier_row_fields[] = {
    FIELD(plw_rectifier_row, plate_rms_volts, "plate-rms", LIMIT_VOLTS),
    FIELD(plw_rectifier_row, supply_ohms, "supply-resistance", PLW_FIELD_OHMS, 0, 1e5),
    FIELD(plw_rectifier_row, reservoir_farads, "reservoir", PLW_FIELD_MICROFARADS, 1e-7, 1),
    FIELD(plw_rectifier_row, full_amps, "full-current", PLW_FIELD_MILLIAMPERES, 1e-3, 20),
    FIELD(plw_rectifier_row, full_volts, "full-output", LIMIT_VOLTS),
    FIELD(plw_rectifier_row, half_amps, "half-current", PLW_FIELD_MILLIAMPERES, 1e-3, 20),
    FIELD(plw_rectifier_row, half_volts, "half-output", LIMIT_VOLTS),
    END};

const plw_tube_field plw_coefficient_field = {"value", 0, PLW_FIELD_NUMBER, -1e12, 1e12};
const plw_tube_field plw_coefficient_error_field = {"relative-error", 0, PLW_FIELD_NUMBER, 0, 1e12};

/* A prefix and unit, and the power of ten it stands for. */
typedef struct {
    const char *suffix;
    plw_unit unit;
    int exponent;
} style_facts;

static const style_facts STYLES[] = {
    [PLW_FIELD_VOLTS] = {"V", PLW_UNIT_VOLT, 0},
    [PLW_FIELD_MILLIAMPERES] = {"mA", PLW_UNIT_AMPERE, -3},
    [PLW_FIELD_AMPERES] = {"A", PLW_UNIT_AMPERE, 0},
    [PLW_FIELD_OHMS] = {"ohm", PLW_UNIT_OHM, 0},
    [PLW_FIELD_WATTS] = {"W", PLW_UNIT_WATT, 0},
    [PLW_FIELD_MICROFARADS] = {"uF", PLW_UNIT_FARAD, -6},
    [PLW_FIELD_MICROMHOS] = {"umho", PLW_UNIT_SIEMENS, -6},
    [PLW_FIELD_PERCENT] = {"%", PLW_UNIT_PERCENT, 0},
    [PLW_FIELD_NUMBER] = {"", PLW_UNIT_NONE, 0},
};

plw_unit plw_field_unit(const plw_tube_field *field) {
    return STYLES[field->style].unit;
}

void plw_fields_clear(const plw_tube_field *fields, void *structure) {
    for (; fields->attribute != NULL; fields++) {
        const double unknown = (double)NAN;
        memcpy((char *)structure + fields->offset, &unknown, sizeof unknown);
    }
}

plw_status plw_field_parse(const plw_tube_field *field, const char *text, double *value, plw_error *error) {
    plw_error reason = {.status = PLW_OK};
    double read = (double)NAN;
    if (plw_quantity_parse(text, STYLES[field->style].unit, &read, &reason) != PLW_OK) {
        return plw_fail(error, PLW_E_DATA, "%s: %.400s", field->attribute, reason.text);
    }
    const plw_status status = plw_field_check_range(field, field->attribute, text, read, error);
    if (status == PLW_OK) {
        *value = read;
    }
    return status;
}

plw_status plw_field_check_range(const plw_tube_field *field, const char *name, const char *text, double value,
                                 plw_error *error) {
    if (value >= field->least && value <= field->most) {
        return PLW_OK;
    }
    char least[PLW_FIELD_TEXT_SIZE];
    char most[PLW_FIELD_TEXT_SIZE];
    plw_field_format(field, field->least, least);
    plw_field_format(field, field->most, most);
    return plw_fail(error, PLW_E_DATA, "%s: %.60s is out of range; it must lie between %s and %s", name, text, least,
                    most);
}

/* Lay out decimal digits that stand for 0.d1d2d3... times ten to `point`, without an exponent unless far too long. */
static void lay_out(bool negative, const char *digits, int point, const char *suffix, char *buffer) {
    const int count = (int)strlen(digits);
    const char *sign = negative ? "-" : "";
    if (point > 18 || point < -6) {
        snprintf(buffer, PLW_FIELD_TEXT_SIZE, "%s%se%d%s", sign, digits, point - count, suffix);
    } else if (point <= 0) {
        snprintf(buffer, PLW_FIELD_TEXT_SIZE, "%s0.%.*s%s%s", sign, -point, "000000", digits, suffix);
    } else if (point >= count) {
        snprintf(buffer, PLW_FIELD_TEXT_SIZE, "%s%s%.*s%s", sign, digits, point - count, "000000000000000000", suffix);
    } else {
        snprintf(buffer, PLW_FIELD_TEXT_SIZE, "%s%.*s.%s%s", sign, point, digits, digits + point, suffix);
    }
}

/* The value to `count` significant digits.  The digits are taken out of "%e" one by one, and the prefix moves the
 * decimal point: so neither the locale nor a rounding can come in. */
static void format_digits(double value, int count, const style_facts *facts, char *buffer) {
    char scientific[40];
    snprintf(scientific, sizeof scientific, "%.*e", count - 1, fabs(value));
    char digits[24];
    size_t used = 0;
    const char *at = scientific;
    for (; *at != '\0' && *at != 'e'; at++) {
        if (*at >= '0' && *at <= '9' && used + 1 < sizeof digits) {
            digits[used++] = *at;
        }
    }
    while (used > 1 && digits[used - 1] == '0') {
        used--;
    }
    digits[used] = '\0';
    const int exponent = *at == 'e' ? (int)strtol(at + 1, NULL, 10) : 0;
    lay_out(value < 0, digits, value == 0 ? 1 : exponent + 1 - facts->exponent, facts->suffix, buffer);
}

void plw_field_format(const plw_tube_field *field, double value, char *buffer) {
    style_facts facts = STYLES[field->style];
    if (field->style == PLW_FIELD_OHMS && fabs(value) >= 1e3) {
        const bool mega = fabs(value) >= 1e6;
        facts.suffix = mega ? "M" : "k";
        facts.exponent = mega ? 6 : 3;
    }
    for (int count = 1; count <= 17; count++) {
        double again = (double)NAN;
        format_digits(value, count, &facts, buffer);
        if (plw_quantity_parse(buffer, facts.unit, &again, NULL) == PLW_OK && again == value) {
            return;
        }
    }
}
