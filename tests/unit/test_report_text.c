/* The answer in words: what a meter reads to chassis, at rest and driven, and the bias.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>

#include "unit/report_stage.h"

/* Three digits are written: half of the last is at most 0.5 %. */
#define WRITTEN 0.0051

static char *text_of(const plw_answer *answer) {
    plw_error error = {0};
    char *text = NULL;
    if (plw_report_text(answer, &text, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return text;
}

/* The line of an electrode among those of the meter, from behind its name and pins. */
static const char *meter_line(const char *text, const char *electrode, const char *pins) {
    char head[64];
    snprintf(head, sizeof head, "\n  %-9s%-10s", electrode, pins);
    const char *meter = strstr(text, "\nA METER READS, to chassis       at rest   driven fully\n");
    assert_non_null(meter);
    const char *line = strstr(meter, head);
    if (line == NULL || line > strstr(meter, "\nTHE TUBE AT REST")) {
        fail_msg("no line for the %s", electrode);
        return "";
    }
    return line + strlen(head);
}

/* The volts of a line; NaN for a second that is not there. */
static void volts_of(const char *line, double *rest, double *driven) {
    char *end = NULL;
    *rest = strtod(line, &end);
    assert_int_equal(strncmp(end, " V", 2), 0);
    line = end + 2;
    *driven = *line == '\n' ? (double)NAN : strtod(line, &end);
    assert_true(*line == '\n' || strncmp(end, " V\n", 3) == 0);
}

static void assert_meter(const char *text, const char *electrode, const char *pins, double rest, double driven) {
    double read_rest;
    double read_driven;
    volts_of(meter_line(text, electrode, pins), &read_rest, &read_driven);
    assert_near_relative(read_rest, rest, WRITTEN, electrode);
    assert_near_relative(read_driven, driven, WRITTEN, electrode);
}

/* A pentode with copper in the primary and a resistor in the screen lead: each voltage from Ohm's law. */
static void pentode_begin(solved_stage *s, plw_pin pins[4]) {
    static char electrodes[4][16];
    static const char *const names[] = {"screen", "grid 1", "cathode", "plate"};
    stage_begin(s, PLW_LAW_PENTODE);
    s->stage.primary_ohms = 385.0;
    s->stage.screen_resistor_ohms = 2385.0;
    for (int i = 0; i < 4; i++) {
        snprintf(electrodes[i], sizeof electrodes[i], "%s", names[i]);
        pins[i] = (plw_pin){.number = i + 2, .electrode = electrodes[i]};
    }
    s->tube.pins = pins;
    s->tube.pins_count = 4;
}

static void a_meter_reads_to_chassis(void **state) {
    (void)state;
    static solved_stage s;
    plw_pin pins[4];
    pentode_begin(&s, pins);
    stage_solve(&s);
    const plw_quiescent *q = &s.answer.option->quiescent;
    const plw_signal *d = &s.answer.option->signal;
    const double ohms = s.stage.cathode_resistor_ohms;
    /* the figures are far enough apart that none can stand for another */
    assert_true(q->plate_to_ground_volts > 1.02 * q->plate_volts);
    assert_true(q->screen_to_ground_volts > 1.02 * q->screen_volts);
    assert_true(fabs(d->cathode_volts / q->cathode_volts - 1.0) > 0.012);
    char *text = text_of(&s.answer);
    assert_meter(text, "supply", "", 285.0, 285.0);
    assert_meter(text, "plate", "pin 5", 285.0 - 385.0 * q->plate_amps, 285.0 - 385.0 * d->plate_amps);
    assert_meter(text, "screen", "pin 2", 285.0 - 2385.0 * q->screen_amps, 285.0 - 2385.0 * d->screen_amps);
    assert_meter(text, "cathode", "pin 4", ohms * (q->plate_amps + q->screen_amps),
                 ohms * (d->plate_amps + d->screen_amps));
    double rest;
    double driven;
    volts_of(meter_line(text, "grid", "pin 3"), &rest, &driven);
    assert_near(rest, 0.0, 0, "through its leak to chassis");
    assert_true(isnan(driven));
    plw_text_free(text);
}

static void fixed_bias_stands_at_the_grid(void **state) {
    (void)state;
    static solved_stage s;
    static plw_bias_option option;
    plw_pin pins[4];
    pentode_begin(&s, pins);
    stage_solve(&s);
    s.stage.cathode_resistor_ohms = (double)NAN;
    s.stage.fixed_bias_volts = -7.385;
    plw_error error = {0};
    if (plw_bias_option_solve(&s.stage, (double)NAN, &option, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    s.answer.option = &option;
    s.answer.choice = NULL;
    char *text = text_of(&s.answer);
    assert_non_null(strstr(text, "\nFIXED BIAS        -7.3"));
    assert_null(strstr(text, "CATHODE RESISTOR"));
    double rest;
    double driven;
    volts_of(meter_line(text, "grid", "pin 3"), &rest, &driven);
    assert_near_relative(rest, -7.385, WRITTEN, "as given");
    volts_of(meter_line(text, "cathode", "pin 4"), &rest, &driven);
    assert_near(rest, 0.0, 0, "on the chassis");
    assert_near(driven, 0.0, 0, "on the chassis");
    plw_text_free(text);
}

static void a_filament_has_no_cathode(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_TRIODE);
    s.tube.directly_heated = true;
    stage_solve(&s);
    const plw_quiescent *q = &s.answer.option->quiescent;
    const plw_signal *d = &s.answer.option->signal;
    char *text = text_of(&s.answer);
    assert_meter(text, "filament", "", q->plate_amps * s.stage.cathode_resistor_ohms,
                 d->plate_amps * s.stage.cathode_resistor_ohms);
    assert_meter(text, "plate", "", 425.0, 425.0);
    assert_null(strstr(text, "\n  screen  "));
    assert_null(strstr(text, "\n  cathode  "));
    plw_text_free(text);
}

/* A share that is over but rounds to 100 % has a decimal, and its line no more columns. */
static void little_over_is_seen(void **state) {
    (void)state;
    static solved_stage s;
    static plw_bias_option option;
    solve_one(&s, PLW_LAW_PENTODE);
    option = *s.answer.option;
    s.answer.option = &option;
    option.ratings[0].share_percent = 100.37;
    option.ratings[0].ok = false;
    char *text = text_of(&s.answer);
    assert_non_null(strstr(text, "(100.4"));
    const char *cell = strstr(text, " V 100.4 % !!");
    assert_non_null(cell);
    const char *const line = strstr(text, "\n  plate voltage ");
    const char *const below = strchr(line + 1, '\n');
    assert_true(cell + strlen(" V 100.4 %") - line == strchr(below, '%') + 1 - below);
    plw_text_free(text);
    option.ratings[0].ok = true; /* within what three digits tell apart */
    option.ratings[0].share_percent = 100.04;
    text = text_of(&s.answer);
    assert_non_null(strstr(text, " V  100 %   "));
    plw_text_free(text);
    option.ratings[0].ok = false; /* never "100.0 %" */
    option.ratings[0].share_percent = 100.01;
    text = text_of(&s.answer);
    assert_non_null(strstr(text, " V 100.1 % !!"));
    plw_text_free(text);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_meter_reads_to_chassis),
        cmocka_unit_test(fixed_bias_stands_at_the_grid),
        cmocka_unit_test(a_filament_has_no_cathode),
        cmocka_unit_test(little_over_is_seen),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
