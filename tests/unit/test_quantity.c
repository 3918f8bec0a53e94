/* Quantities: what is read, what is refused and how, what is written; nearest names.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <locale.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>

#include "near.h"
#include "platewright/quantity.h"

typedef struct {
    const char *text;
    plw_unit unit;
    double value;
} reading;

/* Every value is compared exactly: the reader promises the nearest double, which is what the compiler makes of it. */
static const reading READINGS[] = {
    {"4k7", PLW_UNIT_OHM, 4700.0},
    {"4K7", PLW_UNIT_OHM, 4700.0},
    {"47k3", PLW_UNIT_OHM, 47300.0},
    {"R47", PLW_UNIT_OHM, 0.47},
    {"r47", PLW_UNIT_OHM, 0.47},
    {"K47", PLW_UNIT_OHM, 470.0},
    {"4R7", PLW_UNIT_OHM, 4.7},
    {"470R", PLW_UNIT_OHM, 470.0},
    {"470r", PLW_UNIT_OHM, 470.0},
    {"4M7", PLW_UNIT_OHM, 4.7e6},
    {"1G5", PLW_UNIT_OHM, 1.5e9},
    {"4L7", PLW_UNIT_OHM, 4.7e-3},
    {"4k7 ohm", PLW_UNIT_OHM, 4700.0},
    {"4k7\xCE\xA9", PLW_UNIT_OHM, 4700.0},
    {"5k", PLW_UNIT_OHM, 5000.0},
    {"5 k", PLW_UNIT_OHM, 5000.0},
    {"1.8 kohms", PLW_UNIT_OHM, 1800.0},
    {"1.8K\xE2\x84\xA6", PLW_UNIT_OHM, 1800.0},
    {"1.8k \xCE\xA9", PLW_UNIT_OHM, 1800.0},
    {"270", PLW_UNIT_OHM, 270.0},
    {"270 Ohm", PLW_UNIT_OHM, 270.0},
    {"470m", PLW_UNIT_OHM, 0.47},
    {"2.2M", PLW_UNIT_OHM, 2.2e6},
    {"2.2meg", PLW_UNIT_OHM, 2.2e6},
    {"1 MEG", PLW_UNIT_OHM, 1e6},
    {"1 Megohm", PLW_UNIT_OHM, 1e6},
    {"1meg ohm", PLW_UNIT_OHM, 1e6},
    {"45mA", PLW_UNIT_AMPERE, 0.045},
    {"45 mA", PLW_UNIT_AMPERE, 0.045},
    {"45m", PLW_UNIT_AMPERE, 0.045},
    {"45ma", PLW_UNIT_AMPERE, 0.045},
    {"0.045", PLW_UNIT_AMPERE, 0.045},
    {"0.6 amp", PLW_UNIT_AMPERE, 0.6},
    {"350\xC2\xB5"
     "A",
     PLW_UNIT_AMPERE, 350e-6},
    {"350\xCE\xBC"
     "A",
     PLW_UNIT_AMPERE, 350e-6},
    {"350uA", PLW_UNIT_AMPERE, 350e-6},
    {"285V", PLW_UNIT_VOLT, 285.0},
    {"285 V", PLW_UNIT_VOLT, 285.0},
    {"285v", PLW_UNIT_VOLT, 285.0},
    {"285 volts", PLW_UNIT_VOLT, 285.0},
    {"  285\tV \n", PLW_UNIT_VOLT, 285.0},
    {"285\xC2\xA0V", PLW_UNIT_VOLT, 285.0},
    {"285\xE2\x80\xAFV", PLW_UNIT_VOLT, 285.0},
    {"-12.5V", PLW_UNIT_VOLT, -12.5},
    {"+12.5V", PLW_UNIT_VOLT, 12.5},
    {"\xE2\x88\x92"
     "12.5V",
     PLW_UNIT_VOLT, -12.5},
    {"1.2kV", PLW_UNIT_VOLT, 1200.0},
    {".5V", PLW_UNIT_VOLT, 0.5},
    {"5.V", PLW_UNIT_VOLT, 5.0},
    {"2.385e2V", PLW_UNIT_VOLT, 238.5},
    {"2385E-1", PLW_UNIT_VOLT, 238.5},
    {"2.385e+2", PLW_UNIT_VOLT, 238.5},
    {"0V", PLW_UNIT_VOLT, 0.0},
    {"000.000e5", PLW_UNIT_VOLT, 0.0},
    {"600mW", PLW_UNIT_WATT, 0.6},
    {"4.5 Watts", PLW_UNIT_WATT, 4.5},
    {"0.22uF", PLW_UNIT_FARAD, 0.22e-6},
    {"47u", PLW_UNIT_FARAD, 47e-6},
    {"4n7", PLW_UNIT_FARAD, 4.7e-9},
    {"p33", PLW_UNIT_FARAD, 0.33e-12},
    {"4\xC2\xB5"
     "7F",
     PLW_UNIT_FARAD, 4.7e-6},
    {"4\xCE\xBC"
     "7",
     PLW_UNIT_FARAD, 4.7e-6},
    {"4u7", PLW_UNIT_FARAD, 4.7e-6},
    {"2m2", PLW_UNIT_FARAD, 2.2e-3},
    {"1F5", PLW_UNIT_FARAD, 1.5},
    {"16 MFD", PLW_UNIT_FARAD, 16e-6},
    {"250mmfd", PLW_UNIT_FARAD, 250e-12},
    {"8H", PLW_UNIT_HENRY, 8.0},
    {"8H2", PLW_UNIT_HENRY, 8.2},
    {"350mH", PLW_UNIT_HENRY, 0.35},
    {"3m3", PLW_UNIT_HENRY, 3.3e-3},
    {"15 henries", PLW_UNIT_HENRY, 15.0},
    {"50Hz", PLW_UNIT_HERTZ, 50.0},
    {"1.5MHz", PLW_UNIT_HERTZ, 1.5e6},
    {"20k", PLW_UNIT_HERTZ, 20000.0},
    {"20ms", PLW_UNIT_SECOND, 0.02},
    {"30 sec", PLW_UNIT_SECOND, 30.0},
    {"4.1mA/V", PLW_UNIT_SIEMENS, 4.1e-3},
    {"4.1 mS", PLW_UNIT_SIEMENS, 4.1e-3},
    {"4100umho", PLW_UNIT_SIEMENS, 4.1e-3},
    {"4100 \xC2\xB5mhos", PLW_UNIT_SIEMENS, 4.1e-3},
    {"4.1mmho", PLW_UNIT_SIEMENS, 4.1e-3},
    {"0.0041 mho", PLW_UNIT_SIEMENS, 4.1e-3},
    {"90%", PLW_UNIT_PERCENT, 90.0},
    {"90 %", PLW_UNIT_PERCENT, 90.0},
    {"90", PLW_UNIT_PERCENT, 90.0},
    {"24.7", PLW_UNIT_NONE, 24.7},
    {"1e308", PLW_UNIT_NONE, 1e308},
    {"3e-308", PLW_UNIT_NONE, 3e-308},
    {"9007199254740993", PLW_UNIT_NONE, 9007199254740992.0}, /* 2^53 + 1: half way, to even */
    {"9007199254740993.0000000000000000000000000001", PLW_UNIT_NONE, 9007199254740994.0},
};

static void quantities_are_read(void **state) {
    (void)state;
    for (size_t i = 0; i < sizeof READINGS / sizeof READINGS[0]; i++) {
        plw_error error = {PLW_OK, ""};
        double value = -77.0;
        const plw_status status = plw_quantity_parse(READINGS[i].text, READINGS[i].unit, &value, &error);
        if (status != PLW_OK || value != READINGS[i].value) {
            fail_msg("'%s': status %d, %.17g, want %.17g: %s", READINGS[i].text, (int)status, value, READINGS[i].value,
                     error.text);
        }
        assert_int_equal(error.status, PLW_OK);
        assert_string_equal(error.text, "");
    }
}

typedef struct {
    const char *text;
    plw_unit unit;
    const char *message;
} refusal;

#define WANT_OHMS "a resistance such as 5k or 4k7 is wanted"
#define WANT_VOLTS "a voltage such as 285V or 12.5 V is wanted"
#define WANT_AMPS "a current such as 45mA or 0.045 is wanted"
#define WANT_NUMBER "a plain number such as 25 is wanted"

static const refusal REFUSALS[] = {
    {"45mA", PLW_UNIT_OHM, "45mA is a current; " WANT_OHMS},
    {"285V", PLW_UNIT_OHM, "285V is a voltage; " WANT_OHMS},
    {"4n7", PLW_UNIT_OHM, "4n7 is a capacitance; " WANT_OHMS},
    {"4k7", PLW_UNIT_FARAD, "4k7 is a resistance; a capacitance such as 47uF or 4n7 is wanted"},
    {"470R", PLW_UNIT_VOLT, "470R is a resistance; " WANT_VOLTS},
    {"5 k\xCE\xA9", PLW_UNIT_VOLT, "5 k\xCE\xA9 is a resistance; " WANT_VOLTS},
    {"4k7", PLW_UNIT_VOLT, "4k7 is in the letter code of resistors and capacitors; " WANT_VOLTS},
    {"4m7", PLW_UNIT_OHM, "4m7 may mean milli or mega; write 4M7 for megohms, 4L7 for milliohms"},
    {"8H", PLW_UNIT_SECOND, "8H is an inductance; a time such as 30s or 20ms is wanted"},
    {"8S", PLW_UNIT_SECOND, "8S is a transconductance; a time such as 30s or 20ms is wanted"},
    {"8s", PLW_UNIT_SIEMENS, "8s is a time; a transconductance such as 4.1mA/V, 4.1mS or 4100umho is wanted"},
    {"47uF", PLW_UNIT_HENRY, "47uF is a capacitance; an inductance such as 8H or 350mH is wanted"},
    {"50Hz", PLW_UNIT_WATT, "50Hz is a frequency; a power such as 4.5W or 600mW is wanted"},
    {"4W", PLW_UNIT_HERTZ, "4W is a power; a frequency such as 50Hz or 1k is wanted"},
    {"43%", PLW_UNIT_NONE, "43% is a percentage; " WANT_NUMBER},
    {"90V", PLW_UNIT_PERCENT, "90V is a voltage; a percentage such as 90% is wanted"},
    {"5k", PLW_UNIT_NONE, "'5k' has 'k' left over after the number; " WANT_NUMBER},
    {"90m", PLW_UNIT_PERCENT, "'90m' has 'm' left over after the number; a percentage such as 90% is wanted"},
    {"45MA", PLW_UNIT_AMPERE, "45MA: M is mega and G giga, milli is a small m; " WANT_AMPS},
    {"22M", PLW_UNIT_FARAD,
     "22M: M is mega and G giga, milli is a small m; a capacitance such as 47uF or 4n7 is wanted"},
    {"", PLW_UNIT_OHM, "nothing is written here; " WANT_OHMS},
    {" \t\xC2\xA0", PLW_UNIT_OHM, "nothing is written here; " WANT_OHMS},
    {"4,7k", PLW_UNIT_OHM, "4,7k has a comma; write a decimal point, and nothing between thousands: " WANT_OHMS},
    {"fifty", PLW_UNIT_OHM, "'fifty' is not a number; " WANT_OHMS},
    {"nan", PLW_UNIT_OHM, "'nan' is not a number; " WANT_OHMS},
    {"inf", PLW_UNIT_OHM, "'inf' is not a number; " WANT_OHMS},
    {"-infinity", PLW_UNIT_OHM, "'-infinity' is not a number; " WANT_OHMS},
    {".", PLW_UNIT_OHM, "'.' is not a number; " WANT_OHMS},
    {"-", PLW_UNIT_OHM, "'-' is not a number; " WANT_OHMS},
    {"k", PLW_UNIT_OHM, "'k' is not a number; " WANT_OHMS},
    {"--5k", PLW_UNIT_OHM, "'--5k' is not a number; " WANT_OHMS},
    {"- 5k", PLW_UNIT_OHM, "'- 5k' is not a number; " WANT_OHMS},
    {"0x1F", PLW_UNIT_OHM, "'0x1F' has 'x1F' left over after the number; " WANT_OHMS},
    {"5kk", PLW_UNIT_OHM, "'5kk' has 'kk' left over after the number; " WANT_OHMS},
    {"5k;", PLW_UNIT_OHM, "'5k;' has 'k;' left over after the number; " WANT_OHMS},
    {"4k7k", PLW_UNIT_OHM, "'4k7k' has 'k' left over after the number; " WANT_OHMS},
    {"4k7.5", PLW_UNIT_OHM, "'4k7.5' has '.5' left over after the number; " WANT_OHMS},
    {"4.7k5", PLW_UNIT_OHM, "'4.7k5' has 'k5' left over after the number; " WANT_OHMS},
    {"4k7V", PLW_UNIT_OHM, "4k7V is a voltage; " WANT_OHMS},
    {"1.2.3", PLW_UNIT_OHM, "'1.2.3' has '.3' left over after the number; " WANT_OHMS},
    {"5e", PLW_UNIT_OHM, "'5e' has 'e' left over after the number; " WANT_OHMS},
    {"5mmfd", PLW_UNIT_OHM, "5mmfd is a capacitance; " WANT_OHMS},
    {"5nmfd", PLW_UNIT_FARAD,
     "'5nmfd' has 'nmfd' left over after the number; a capacitance such as 47uF or 4n7 is wanted"},
    {"5meg", PLW_UNIT_VOLT, "'5meg' has 'meg' left over after the number; " WANT_VOLTS},
    {"1e999", PLW_UNIT_OHM, "1e999 is too large to reckon with; " WANT_OHMS},
    {"-1e99999999999k", PLW_UNIT_OHM, "-1e99999999999k is too large to reckon with; " WANT_OHMS},
    {"1e306k", PLW_UNIT_OHM, "1e306k is too large to reckon with; " WANT_OHMS},
    {"1e-999", PLW_UNIT_OHM, "1e-999 is too small to reckon with; " WANT_OHMS},
    {"1e-320", PLW_UNIT_OHM, "1e-320 is too small to reckon with; " WANT_OHMS},
    {"5\x1B[31m", PLW_UNIT_OHM, "'5?[31m' has '?[31m' left over after the number; " WANT_OHMS},
};

static void other_texts_are_refused_with_a_remedy(void **state) {
    (void)state;
    for (size_t i = 0; i < sizeof REFUSALS / sizeof REFUSALS[0]; i++) {
        plw_error error = {PLW_OK, ""};
        double value = -77.0;
        const plw_status status = plw_quantity_parse(REFUSALS[i].text, REFUSALS[i].unit, &value, &error);
        if (status != PLW_E_USAGE || strcmp(error.text, REFUSALS[i].message) != 0) {
            fail_msg("'%s': status %d, value %g\n got: %s\nwant: %s", REFUSALS[i].text, (int)status, value, error.text,
                     REFUSALS[i].message);
        }
        assert_int_equal(error.status, PLW_E_USAGE);
        assert_true(value == -77.0);
        assert_int_equal(plw_quantity_parse(REFUSALS[i].text, REFUSALS[i].unit, &value, NULL), PLW_E_USAGE);
    }
}

static void long_texts_and_wrong_arguments_are_refused(void **state) {
    (void)state;
    plw_error error = {PLW_OK, ""};
    double value = -77.0;
    char text[300];
    memset(text, '1', sizeof text);
    text[127] = '\0';
    assert_int_equal(plw_quantity_parse(text, PLW_UNIT_OHM, &value, &error), PLW_OK);
    assert_near_relative(value, 1.0e127 / 9.0, 1e-15, "127 ones");
    text[127] = '1';
    text[299] = '\0';
    assert_int_equal(plw_quantity_parse(text, PLW_UNIT_OHM, &value, &error), PLW_E_USAGE);
    assert_string_equal(error.text, "'111111111111111111111111111111111111111111111111...' is too long; " WANT_OHMS);
    /* A text is never shown cut within a character: 47 letters, then one of two bytes. */
    memset(text, 'x', sizeof text);
    memcpy(text + 47, "\xCE\xA9 and so on", sizeof "\xCE\xA9 and so on");
    assert_int_equal(plw_quantity_parse(text, PLW_UNIT_OHM, &value, &error), PLW_E_USAGE);
    assert_string_equal(error.text, "'xxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxx...' is not a number; " WANT_OHMS);
    assert_int_equal(plw_quantity_parse(NULL, PLW_UNIT_OHM, &value, &error), PLW_E_USAGE);
    assert_int_equal(plw_quantity_parse("5k", PLW_UNIT_COUNT, &value, &error), PLW_E_USAGE);
    assert_int_equal(plw_quantity_parse("5k", PLW_UNIT_OHM, NULL, &error), PLW_E_USAGE);
}

typedef struct {
    double value;
    plw_unit unit;
    int digits;
    const char *text;
} writing;

static const writing WRITINGS[] = {
    {258.4, PLW_UNIT_VOLT, 3, "258 V"},
    {12.94, PLW_UNIT_VOLT, 3, "12.9 V"},
    {12.0, PLW_UNIT_VOLT, 3, "12.0 V"},
    {-12.5, PLW_UNIT_VOLT, 3, "-12.5 V"},
    {0.25, PLW_UNIT_VOLT, 2, "0.25 V"},
    {0.0854, PLW_UNIT_VOLT, 2, "85 mV"},
    {999.6, PLW_UNIT_VOLT, 3, "1.00 kV"},
    {999.4, PLW_UNIT_VOLT, 3, "999 V"},
    {0.04512, PLW_UNIT_AMPERE, 3, "45.1 mA"},
    {0.045, PLW_UNIT_AMPERE, 2, "45 mA"},
    {0.6, PLW_UNIT_AMPERE, 2, "600 mA"},
    {1.2, PLW_UNIT_AMPERE, 2, "1.2 A"},
    {12345.0, PLW_UNIT_AMPERE, 3, "12300 A"},
    {35e-6, PLW_UNIT_AMPERE, 2,
     "35 \xC2\xB5"
     "A"},
    {2.5e-14, PLW_UNIT_AMPERE, 2, "0.000025 nA"},
    {270.0, PLW_UNIT_OHM, 3, "270 \xCE\xA9"},
    {4700.0, PLW_UNIT_OHM, 2, "4.7 k\xCE\xA9"},
    {5000.0, PLW_UNIT_OHM, 3, "5 k\xCE\xA9"},
    {100.0, PLW_UNIT_OHM, 3, "100 \xCE\xA9"},
    {0.47, PLW_UNIT_OHM, 3, "0.47 \xCE\xA9"},
    {2.2e6, PLW_UNIT_OHM, 3, "2.2 M\xCE\xA9"},
    {0.6, PLW_UNIT_WATT, 1, "0.6 W"},
    {0.6, PLW_UNIT_WATT, 2, "0.60 W"},
    {11.24, PLW_UNIT_WATT, 3, "11.2 W"},
    {22e-6, PLW_UNIT_FARAD, 3,
     "22 \xC2\xB5"
     "F"},
    {4700e-6, PLW_UNIT_FARAD, 2,
     "4700 \xC2\xB5"
     "F"},
    {0.22e-6, PLW_UNIT_FARAD, 2,
     "0.22 \xC2\xB5"
     "F"},
    {4.7e-9, PLW_UNIT_FARAD, 2, "4.7 nF"},
    {8.0, PLW_UNIT_HENRY, 2, "8 H"},
    {0.35, PLW_UNIT_HENRY, 2, "350 mH"},
    {50.0, PLW_UNIT_HERTZ, 2, "50 Hz"},
    {20000.0, PLW_UNIT_HERTZ, 2, "20 kHz"},
    {0.02, PLW_UNIT_SECOND, 2, "20 ms"},
    {4.1e-3, PLW_UNIT_SIEMENS, 2, "4.1 mS"},
    {90.0, PLW_UNIT_PERCENT, 2, "90 %"},
    {0.123, PLW_UNIT_PERCENT, 2, "0.12 %"},
    {24.7, PLW_UNIT_NONE, 3, "24.7"},
    {0.00385, PLW_UNIT_NONE, 3, "0.00385"},
    {0.0, PLW_UNIT_WATT, 3, "0 W"},
    {-0.0, PLW_UNIT_NONE, 3, "0"},
    {2.386e300, PLW_UNIT_VOLT, 3, "2.39e300 V"},
    {-2.384e-300, PLW_UNIT_VOLT, 3, "-2.38e-300 V"},
    {2.385, PLW_UNIT_VOLT, 0, "2 V"},
    {2.3854321987654, PLW_UNIT_VOLT, 40, "2.38543220 V"},
    {(double)NAN, PLW_UNIT_VOLT, 3, "-"},
    {(double)INFINITY, PLW_UNIT_VOLT, 3, "-"},
    {-(double)INFINITY, PLW_UNIT_VOLT, 3, "-"},
    {2.385, PLW_UNIT_COUNT, 3, "-"},
};

static void quantities_are_written(void **state) {
    (void)state;
    for (size_t i = 0; i < sizeof WRITINGS / sizeof WRITINGS[0]; i++) {
        char buffer[64];
        assert_ptr_equal(
            plw_quantity_format(WRITINGS[i].value, WRITINGS[i].unit, WRITINGS[i].digits, buffer, sizeof buffer),
            buffer);
        assert_string_equal(buffer, WRITINGS[i].text);
    }
}

/* What is written is read back as the same number, to the digits written. */
static void writing_and_reading_are_inverse(void **state) {
    (void)state;
    for (int unit = 0; unit < PLW_UNIT_COUNT; unit++) {
        for (int power = -920; power <= 920; power++) { /* the whole range of a double */
            const double value = 2.385716 * pow(10.0, power / 3.0) * (power % 2 == 0 ? 1.0 : -1.0);
            char buffer[64];
            double back = 0.0;
            plw_error error = {PLW_OK, ""};
            plw_quantity_format(value, (plw_unit)unit, 9, buffer, sizeof buffer);
            if (plw_quantity_parse(buffer, (plw_unit)unit, &back, &error) != PLW_OK) {
                fail_msg("%s: %s", buffer, error.text);
            }
            assert_near_relative(back, value, 5e-9, "half a unit of the ninth digit");
        }
    }
}

static void a_small_buffer_cuts_between_characters(void **state) {
    (void)state;
    char buffer[16] = "unchanged";
    plw_quantity_format(4700.0, PLW_UNIT_OHM, 2, buffer, 0);
    assert_string_equal(buffer, "unchanged");
    plw_quantity_format(4700.0, PLW_UNIT_OHM, 2, buffer, 1);
    assert_string_equal(buffer, "");
    plw_quantity_format(4700.0, PLW_UNIT_OHM, 2, buffer, 7); /* room for half of the omega */
    assert_string_equal(buffer, "4.7 k");
    plw_quantity_format(4700.0, PLW_UNIT_OHM, 2, buffer, 8);
    assert_string_equal(buffer, "4.7 k\xCE\xA9");
    plw_resistor_code(4700.0, buffer, 3);
    assert_string_equal(buffer, "4K");
}

/* In a locale with a decimal comma the same is read and written. */
static void the_locale_does_not_matter(void **state) {
    (void)state;
    static const char *const names[] = {"de_DE.UTF-8", "de_DE.utf8", "fr_FR.UTF-8",
                                        "fr_FR.utf8",  "de_DE",      "nl_NL.UTF-8"};
    bool found = false;
    for (size_t i = 0; i < sizeof names / sizeof names[0] && !found; i++) {
        found = setlocale(LC_ALL, names[i]) != NULL;
    }
    if (!found) {
        skip();
    }
    quantities_are_read(NULL);
    other_texts_are_refused_with_a_remedy(NULL);
    quantities_are_written(NULL);
    char buffer[16];
    assert_string_equal(plw_resistor_code(47300.0, buffer, sizeof buffer), "47K3");
    setlocale(LC_ALL, "C");
}

static void resistor_codes_are_written(void **state) {
    (void)state;
    static const struct {
        double ohms;
        const char *code;
    } codes[] = {
        {270.0, "270R"},
        {4700.0, "4K7"},
        {1e6, "1M0"},
        {0.5, "R50"},
        {0.022, "R022"},
        {10.0, "10R"},
        {8.0, "8R0"},
        {1234.0, "1K234"},
        {12345.0, "12K34"},
        {99999.0, "100K"},
        {1.5e9, "1G5"},
        {0.0001, "R00010"},
        {262.1, "262R1"},
        {1e-5, "-"},
        {1e12, "-"},
        {0.0, "-"},
        {-4700.0, "-"},
        {(double)NAN, "-"},
        {(double)INFINITY, "-"},
    };
    char buffer[16];
    for (size_t i = 0; i < sizeof codes / sizeof codes[0]; i++) {
        assert_string_equal(plw_resistor_code(codes[i].ohms, buffer, sizeof buffer), codes[i].code);
    }
    /* Every code is read back as the resistance it was made from. */
    for (int i = -30; i < 90; i++) {
        const int decade = i / 10;
        const double ohms = round(1000.0 * pow(10.0, (i % 10) / 10.0)) * 1e-3 * pow(10.0, decade);
        double back = 0.0;
        plw_error error = {PLW_OK, ""};
        assert_int_equal(
            plw_quantity_parse(plw_resistor_code(ohms, buffer, sizeof buffer), PLW_UNIT_OHM, &back, &error), PLW_OK);
        assert_near_relative(back, ohms, 5e-4, "rounded to four digits");
    }
}

static void nearest_names_are_found(void **state) {
    (void)state;
    static const char *const tubes[] = {"6V6GT", "EL84", "EL34", "6L6GC", "2A3", "300B", "6AQ5", "6BQ5", "KT66"};
    enum { TUBES = sizeof tubes / sizeof tubes[0] };
    size_t found[4] = {99, 99, 99, 99};
    /* One letter wrong, in another case and with punctuation, comes before two. */
    assert_int_equal(plw_nearest_names("el-83", tubes, TUBES, found, 4), 2);
    assert_string_equal(tubes[found[0]], "EL84");
    assert_string_equal(tubes[found[1]], "EL34");
    /* Two neighbours exchanged count as one error, and one missing as one. */
    assert_true(plw_nearest_names("6VG6T", tubes, TUBES, found, 1) == 1);
    assert_string_equal(tubes[found[0]], "6V6GT");
    assert_true(plw_nearest_names("30B", tubes, TUBES, found, 1) == 1);
    assert_string_equal(tubes[found[0]], "300B");
    /* Only punctuation differs. */
    assert_true(plw_nearest_names("6 v6-gt", tubes, TUBES, found, 1) == 1);
    assert_string_equal(tubes[found[0]], "6V6GT");
    /* Equally near ones in the order given, no more than asked for. */
    assert_int_equal(plw_nearest_names("6CQ5", tubes, TUBES, found, 2), 2);
    assert_string_equal(tubes[found[0]], "6AQ5");
    assert_string_equal(tubes[found[1]], "6BQ5");
    /* Nothing in common, nothing written, nothing to choose from. */
    assert_int_equal(plw_nearest_names("zz", tubes, TUBES, found, 4), 0);
    assert_int_equal(plw_nearest_names("zzzzzzzzz", tubes, TUBES, found, 4), 0);
    assert_int_equal(plw_nearest_names("", tubes, TUBES, found, 4), 0);
    assert_int_equal(plw_nearest_names("--", tubes, TUBES, found, 4), 0);
    assert_int_equal(plw_nearest_names("EL84", tubes, 0, found, 4), 0);
    /* A third of a long name may be wrong. */
    static const char *const options[] = {"--cathode-resistor", "--screen-resistor", "--load"};
    assert_true(plw_nearest_names("--kathod-resister", options, 3, found, 4) >= 1);
    assert_string_equal(options[found[0]], "--cathode-resistor");
    /* Long names are compared by their beginning. */
    char name[400];
    memset(name, 'a', sizeof name);
    name[399] = '\0';
    const char *const itself[] = {name};
    assert_int_equal(plw_nearest_names(name, itself, 1, found, 4), 1);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(quantities_are_read),
        cmocka_unit_test(other_texts_are_refused_with_a_remedy),
        cmocka_unit_test(long_texts_and_wrong_arguments_are_refused),
        cmocka_unit_test(quantities_are_written),
        cmocka_unit_test(writing_and_reading_are_inverse),
        cmocka_unit_test(a_small_buffer_cuts_between_characters),
        cmocka_unit_test(the_locale_does_not_matter),
        cmocka_unit_test(resistor_codes_are_written),
        cmocka_unit_test(nearest_names_are_found),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
