/* Gnuplot scripts: what is drawn is what was solved; text stays inert; gnuplot takes them.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <sys/wait.h>

#include "folder.h"
#include "platewright/fit.h"
#include "report/plot_stage.h"
#include "report/script.h"
#include "report/text_buffer.h"
#include "unit/report_stage.h"

/* ---- reading scripts --------------------------------------------------------------------------------------------- */

/* Six digits are written. */
#define WRITTEN 2e-5

static char *script_of(const plw_answer *answer, plw_plot_kind kind, plw_plot_format format, const char *output) {
    plw_error error = {0};
    char *text = NULL;
    if (plw_plot_script(answer, kind, format, output, &text, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return text;
}

/* What most of the tests look at: the load line, as an SVG picture. */
static char *load_line_of(const solved_stage *s) {
    return script_of(&s->answer, PLW_PLOT_LOAD_LINE, PLW_PLOT_SVG, "x.svg");
}

static char *family_of(const plw_tube *tube, plw_connection connection, plw_plot_format format) {
    plw_error error = {0};
    char *text = NULL;
    if (plw_plot_family(tube, connection, format, "family.out", &text, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    return text;
}

/* The numbers of the first two columns of a data block.  Ret: how many lines with numbers */
static size_t block_points(const char *script, const char *name, double points[][2], size_t most) {
    char head[64];
    snprintf(head, sizeof head, "\n$%s << EOD\n", name);
    const char *at = strstr(script, head);
    if (at == NULL) {
        return 0;
    }
    at += strlen(head);
    size_t count = 0;
    while (strncmp(at, "EOD", 3) != 0 && count < most) {
        char *end;
        const double x = strtod(at, &end);
        if (end != at) {
            points[count][0] = x;
            points[count++][1] = strtod(end, &end);
        }
        at = strchr(at, '\n') + 1;
    }
    return count;
}

static void line_of(const char *script, const char *name, double points[2][2]) {
    if (block_points(script, name, points, 2) != 2) {
        fail_msg("no line $%s", name);
    }
}

static bool gnuplot_is_there(void) {
    const pid_t child = fork();
    assert_true(child >= 0);
    if (child == 0) {
        if (freopen("/dev/null", "w", stdout) != NULL) {
            execlp("gnuplot", "gnuplot", "--version", (char *)NULL);
        }
        _exit(127);
    }
    int status = 0;
    assert_int_equal(waitpid(child, &status, 0), child);
    return WIFEXITED(status) && WEXITSTATUS(status) == 0;
}

/* Run a script by gnuplot in the folder.  A warning is a failure too: whatever it says goes to `complaints`. */
static void draw(const test_folder *folder, const char *script) {
    folder_write(folder, "script", script);
    const pid_t child = fork();
    assert_true(child >= 0);
    if (child == 0) {
        if (chdir(folder->path) == 0 && freopen("complaints", "w", stderr) != NULL) {
            execlp("gnuplot", "gnuplot", "script", (char *)NULL);
        }
        _exit(127);
    }
    int status = 0;
    assert_int_equal(waitpid(child, &status, 0), child);
    char path[FOLDER_PATH_SIZE];
    char *complaints = file_text(folder_path(folder, "complaints", path), NULL);
    if (!WIFEXITED(status) || WEXITSTATUS(status) != 0 || strstr(complaints, "line ") != NULL) {
        fail_msg("gnuplot: %s\n%s", complaints, script);
    }
    free(complaints);
}

/* ---- numbers and text -------------------------------------------------------------------------------------------- */

static void scales_end_on_round_numbers(void **state) {
    (void)state;
    assert_near(plw_round_step(2.385), 2.5, 1e-12, "1, 2, 2.5, 5");
    assert_near(plw_round_step(0.0201), 0.025, 1e-12, "1, 2, 2.5, 5");
    assert_near(plw_round_step(50), 50, 1e-12, "a step itself");
    assert_near(plw_round_step(5.3e-7), 1e-6, 1e-18, "the next decade");
    for (int i = 0; i < 60; i++) {
        const double most = 0.037 * pow(1.37, i);
        const plw_scale scale = plw_scale_for(-0.3 * most, most, 6);
        assert_true(scale.most >= most * (1 - 1e-9) && scale.most < most + scale.step);
        assert_true(scale.least <= -0.3 * most * (1 - 1e-9) && scale.least > -0.3 * most - scale.step);
        assert_near(scale.most / scale.step, round(scale.most / scale.step), 1e-9, "whole steps");
        assert_true((scale.most - scale.least) / scale.step < 9);
    }
}

static void written_as(double value, plw_unit unit, int digits, const char *wanted) {
    char text[64];
    assert_string_equal(plw_script_value(value, unit, digits, text, sizeof text), wanted);
}

static void values_drop_idle_zeros(void **state) {
    (void)state;
    written_as(-7.5, PLW_UNIT_VOLT, 4,
               "\xE2\x88\x92"
               "7.5 V");
    written_as(12, PLW_UNIT_WATT, 3, "12 W");
    written_as(300, PLW_UNIT_VOLT, 3, "300 V");
    written_as(0.04503, PLW_UNIT_AMPERE, 4, "45.03 mA");
    written_as(0, PLW_UNIT_VOLT, 3, "0 V");
    written_as((double)NAN, PLW_UNIT_VOLT, 3, "-");
}

static void text_is_quoted(void **state) {
    (void)state;
    plw_error error = {0};
    plw_text_buffer buffer;
    assert_int_equal(plw_text_begin(&buffer, &error), PLW_OK);
    plw_script_quoted(buffer.file, "it's `one`\n\x01\x7f\xC2\xB5 \"two\"");
    plw_script_quoted(buffer.file, NULL);
    char *text = NULL;
    assert_int_equal(plw_text_end(&buffer, PLW_OK, &text, &error), PLW_OK);
    assert_string_equal(text, "'it\xE2\x80\x99s `one`\xC2\xB5 \"two\"'''");
    plw_text_free(text);
    assert_int_equal(plw_text_begin(&buffer, &error), PLW_OK);
    text = NULL;
    assert_int_equal(plw_text_end(&buffer, PLW_E_DATA, &text, &error), PLW_E_DATA);
    assert_null(text);
}

/* ---- what is drawn ----------------------------------------------------------------------------------------------- */

static void the_family_passes_through_the_point_of_rest(void **state) {
    (void)state;
    static solved_stage s;
    const plw_connection connections[] = {PLW_CONNECTION_PENTODE, PLW_CONNECTION_TRIODE, PLW_CONNECTION_ULTRALINEAR};
    for (size_t i = 0; i < 3; i++) {
        stage_begin(&s, PLW_LAW_PENTODE);
        s.stage.connection = connections[i];
        s.stage.tap = connections[i] == PLW_CONNECTION_ULTRALINEAR ? 0.43 : s.stage.tap;
        stage_solve(&s);
        const plw_quiescent *rest = &s.answer.option->quiescent;
        const plw_plate_family family = plw_stage_family(&s.answer);
        assert_near(plw_family_amps(&family, rest->plate_volts, rest->grid_volts),
                    plw_drawn_amps(&s.answer, rest->plate_amps, rest->screen_amps), 1e-9, "residual of the solution");
        /* Away from rest the screen stays, goes with the plate, or goes a share of the way. */
        const double screen_volts[] = {rest->screen_volts, 153.7,
                                       rest->screen_volts + 0.43 * (153.7 - rest->plate_volts)};
        plw_currents currents;
        plw_law_evaluate(&s.tube.model.law, 153.7, screen_volts[i], -6.385, &currents);
        assert_near(plw_family_amps(&family, 153.7, -6.385),
                    plw_drawn_amps(&s.answer, currents.plate_amps, currents.screen_amps), 1e-12, "the same law");
        if (connections[i] == PLW_CONNECTION_TRIODE) {
            assert_near(plw_drawn_amps(&s.answer, rest->plate_amps, rest->screen_amps), rest->cathode_amps, 1e-12,
                        "both together");
        }
    }
}

static void the_load_line_is_ohms_law(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_PENTODE);
    s.stage.parallel = 2;
    s.stage.load_ohms = 2385;
    s.stage.primary_ohms = 137;
    stage_solve(&s);
    char *script = load_line_of(&s);
    const plw_quiescent *rest = &s.answer.option->quiescent;
    double load[2][2];
    double copper[2][2];
    double dot[1][2];
    line_of(script, "load", load);
    line_of(script, "copper", copper);
    assert_int_equal(block_points(script, "rest", dot, 1), 1);
    assert_near_relative(dot[0][0], rest->plate_volts, WRITTEN, "as solved");
    assert_near_relative(dot[0][1], 1e3 * rest->plate_amps, WRITTEN, "as solved");
    const double load_ohms = 2 * (2385 + 137); /* each of two tubes sees twice the load */
    assert_near_relative(load[0][1], 1e3 * (rest->plate_amps + (rest->plate_volts - load[0][0]) / load_ohms), WRITTEN,
                         "Ohm's law");
    assert_near_relative(load[1][0], rest->plate_volts + load_ohms * rest->plate_amps, WRITTEN, "Ohm's law");
    assert_near(load[1][1], 0, 1e-3, "down to the axis");
    assert_near(load[0][0], 0, 1e-3, "back to the axis");
    assert_near_relative(copper[1][0], rest->plate_volts + 2 * 137 * rest->plate_amps, WRITTEN, "Ohm's law");
    assert_non_null(strstr(script, "2 \xC3\x97 PX-84, pentode, "));
    assert_non_null(strstr(script, "drawn for one tube"));
    plw_text_free(script);
}

static void the_swing_and_the_limits_are_drawn(void **state) {
    (void)state;
    static solved_stage s;
    solve_one(&s, PLW_LAW_PENTODE);
    char *script = load_line_of(&s);
    enum { PARTS = 4, DRAWN = PARTS * (PLW_PATH_POINTS - 1) + 1 };
    double swing[DRAWN + 1][2];
    const plw_signal *signal = &s.answer.option->signal;
    assert_int_equal(block_points(script, "swing", swing, DRAWN + 1), DRAWN);
    for (size_t i = 0; i < PLW_PATH_POINTS; i++) {
        assert_near_relative(swing[PARTS * i][0], signal->path_plate_volts[i], WRITTEN, "as solved");
        assert_near_relative(swing[PARTS * i][1], 1e3 * signal->path_plate_amps[i], WRITTEN, "as solved");
    }
    for (size_t i = 1; i < DRAWN; i++) { /* from the lowest plate volts to the highest without turning back */
        assert_true(swing[i][0] >= swing[i - 1][0] * (1.0 - WRITTEN));
    }
    double hyperbola[200][2];
    const size_t count = block_points(script, "dissipation", hyperbola, 200);
    assert_true(count > 20);
    for (size_t i = 0; i < count; i++) {
        assert_near_relative(hyperbola[i][0] * hyperbola[i][1] * 1e-3, 12, WRITTEN, "12 W everywhere");
    }
    double rated[2][2];
    line_of(script, "rated", rated);
    assert_near(rated[0][0], 300, 1e-3, "made-up rating");
    assert_near(rated[1][0], 300, 1e-3, "made-up rating");
    assert_non_null(strstr(script, "'plate to cathode, V'"));
    assert_non_null(strstr(script, "'plate current, mA'"));
    assert_non_null(strstr(script, "set label '0 V' at "));
    plw_text_free(script);
}

/* Every drawn point lies in the frame, so that nothing is cut by the drawing program. */
static void curves_keep_inside_the_frame(void **state) {
    (void)state;
    static solved_stage s;
    const double loads[] = {700, 2385, 5000, 21000};
    for (size_t i = 0; i < 8; i++) {
        stage_begin(&s, i < 4 ? PLW_LAW_PENTODE : PLW_LAW_TRIODE);
        s.stage.load_ohms = loads[i % 4];
        stage_solve(&s);
        char *script = load_line_of(&s);
        const char *x_range = strstr(script, "set xrange [0:");
        const char *y_range = strstr(script, "set yrange [0:");
        assert_non_null(x_range);
        assert_non_null(y_range);
        const double right = strtod(x_range + 14, NULL);
        const double top = strtod(y_range + 14, NULL);
        static double points[4000][2];
        const char *const names[] = {"curves", "dissipation", "load", "swing", "rest"};
        for (size_t n = 0; n < sizeof names / sizeof names[0]; n++) {
            const size_t count = block_points(script, names[n], points, 4000);
            assert_true(count > 0 && count < 4000);
            for (size_t k = 0; k < count; k++) {
                assert_true(points[k][0] >= -1e-6 && points[k][0] <= right * (1 + WRITTEN));
                assert_true(points[k][1] >= -1e-3 * top && points[k][1] <= top * (1 + WRITTEN));
            }
        }
        plw_text_free(script);
    }
}

static void the_resistor_line_meets_the_cathode_current(void **state) {
    (void)state;
    static solved_stage s;
    solve_pentodes(&s, 2, 2385);
    const plw_quiescent *rest = &s.answer.option->quiescent;
    char *script = script_of(&s.answer, PLW_PLOT_TRANSFER, PLW_PLOT_SVG, "x.svg");
    double bias[2][2];
    line_of(script, "bias", bias);
    assert_near(bias[0][0], 0, 1e-9, "from the origin");
    assert_near(bias[0][1], 0, 1e-9, "from the origin");
    const double ohms = 2 * s.stage.cathode_resistor_ohms; /* shared by two tubes */
    assert_near_relative(-bias[1][0] / bias[1][1] * 1e3, ohms, WRITTEN, "Ohm's law");
    assert_near_relative(-rest->grid_volts / rest->cathode_amps, ohms, 1e-6, "through the point of rest");
    static double curve[400][2];
    const size_t count = block_points(script, "cathode", curve, 400);
    assert_true(count > 20);
    size_t k = 0;
    while (k < count && curve[k][0] < rest->grid_volts) {
        k++;
    }
    assert_true(k > 0 && k < count);
    const double part = (rest->grid_volts - curve[k - 1][0]) / (curve[k][0] - curve[k - 1][0]);
    assert_near_relative(curve[k - 1][1] + part * (curve[k][1] - curve[k - 1][1]), 1e3 * rest->cathode_amps, 2e-3,
                         "straight between two points of the curve");
    assert_non_null(strstr(script, "as one tube sees it"));
    plw_text_free(script);
    /* Fixed bias: upright where the grid is held. */
    s.stage.cathode_resistor_ohms = (double)NAN;
    s.stage.fixed_bias_volts = -9.385;
    plw_error error = {0};
    static plw_bias_option option;
    assert_int_equal(plw_bias_option_solve(&s.stage, (double)NAN, &option, &error), PLW_OK);
    const plw_answer check = {.stage = &s.stage, .option = &option, .series = PLW_E24};
    script = script_of(&check, PLW_PLOT_TRANSFER, PLW_PLOT_SVG, "x.svg");
    line_of(script, "bias", bias);
    assert_near_relative(bias[0][0], -9.385, WRITTEN, "fixed");
    assert_near_relative(bias[1][0], -9.385, WRITTEN, "fixed");
    assert_non_null(strstr(script, "fixed bias \xE2\x88\x92"
                                   "9.385 V"));
    plw_text_free(script);
}

static void without_a_cycle_the_rest_is_still_drawn(void **state) {
    (void)state;
    static solved_stage s;
    solve_one(&s, PLW_LAW_TRIODE);
    static plw_bias_option option;
    option = *s.answer.option;
    for (size_t i = 0; i < PLW_PATH_POINTS; i++) {
        option.signal.path_plate_volts[i] = (double)NAN;
    }
    s.ratings.plate_volts = s.ratings.plate_watts = (double)NAN;
    s.answer.option = &option;
    for (int kind = 0; kind < PLW_PLOT_COUNT; kind++) {
        char *script = script_of(&s.answer, (plw_plot_kind)kind, PLW_PLOT_PDF, NULL);
        assert_null(strstr(script, "$swing"));
        assert_null(strstr(script, "$dissipation"));
        assert_null(strstr(script, "$rated"));
        assert_null(strstr(script, "NaN"));
        assert_non_null(strstr(script, "$rest << EOD"));
        plw_text_free(script);
    }
}

static void printed_rows_are_marked_with_their_misses(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_PENTODE);
    char *script = family_of(&s.tube, PLW_CONNECTION_PENTODE, PLW_PLOT_SVG);
    double marks[4][2] = {{0}};
    assert_int_equal(block_points(script, "printed", marks, 4), 1);
    assert_near_relative(marks[0][0], 247.3, WRITTEN, "as printed");
    assert_near_relative(marks[0][1], 49.1, WRITTEN, "as printed");
    const double by_law = plw_law_plate_amps(&s.tube.model.law, 247.3, 251.2, -7.3);
    const char *miss = strstr(script, "\n247.3 49.1 ");
    assert_non_null(miss);
    assert_near(strtod(miss + 12, NULL), 100 * (by_law / 0.0491 - 1), 1e-3, "law over print");
    assert_int_equal(block_points(script, "others", marks, 4), 1);
    assert_near_relative(marks[0][1], 35.2, WRITTEN, "as printed");
    assert_int_equal(block_points(script, "doubtful", marks, 4), 1);
    assert_near_relative(marks[0][1], 32.7, WRITTEN, "as printed");
    assert_non_null(strstr(script, "'PX-84, pentode, 251.2 V on the screen'"));
    plw_text_free(script);
}

/* A row that prints its cathode resistor alone is missed by as much as a fit's table says: the bias is the one that the
 * law's own current makes in it. */
static void a_row_by_its_resistor_misses_as_in_the_table(void **state) {
    (void)state;
    static solved_stage s;
    stage_begin(&s, PLW_LAW_PENTODE);
    plw_row *row = &s.rows[0];
    row->grid_volts = (double)NAN;
    row->cathode_resistor_ohms = 130.0;
    plw_prediction law;
    assert_int_equal(plw_predict_row(&s.tube.model.law, row, &law, NULL), PLW_OK);
    char *script = family_of(&s.tube, PLW_CONNECTION_PENTODE, PLW_PLOT_SVG);
    const char *miss = strstr(script, "\n247.3 49.1 ");
    assert_non_null(miss);
    assert_near(strtod(miss + 12, NULL), 100 * (law.plate_amps / 0.0491 - 1), 1e-3, "as written in the script");
    plw_text_free(script);
}

static void what_cannot_be_drawn_is_refused(void **state) {
    (void)state;
    static solved_stage s;
    solve_one(&s, PLW_LAW_PENTODE);
    char *text = NULL;
    plw_error error = {0};
    assert_int_equal(plw_plot_script(&s.answer, PLW_PLOT_COUNT, PLW_PLOT_SVG, "x", &text, &error), PLW_E_USAGE);
    assert_null(plw_plot_name(PLW_PLOT_COUNT));
    assert_string_equal(plw_plot_name(PLW_PLOT_LOAD_LINE), "load-line");
    assert_string_equal(plw_plot_name(PLW_PLOT_TRANSFER), "transfer");
    assert_int_equal(plw_plot_family(&s.tube, PLW_CONNECTION_ULTRALINEAR, PLW_PLOT_SVG, "x", &text, &error),
                     PLW_E_USAGE);
    assert_non_null(strstr(error.text, "PX-84"));
    s.tube.has_model = false;
    assert_int_equal(plw_plot_family(&s.tube, PLW_CONNECTION_PENTODE, PLW_PLOT_SVG, "x", &text, &error), PLW_E_USAGE);
    assert_non_null(strstr(error.text, "no law"));
    assert_null(text);
}

/* ---- the file ---------------------------------------------------------------------------------------------------- */

static void output_keeps_its_last_part_only(void **state) {
    (void)state;
    static solved_stage s;
    solve_one(&s, PLW_LAW_PENTODE);
    const char *const cases[][2] = {
        {"/tmp/some where/o'ut.svg", "\nset output 'o'.\"'\".'ut.svg'\n"},
        {"C:\\bench\\out.svg", "\nset output 'out.svg'\n"},
        {"plots/", "\nset output 'load-line.svg'\n"},
        {"", "\nset output 'load-line.svg'\n"},
        {NULL, "\nset output 'load-line.svg'\n"},
        {"|touch evil", "\nset output './|touch evil'\n"},
        {"\n|touch evil", "\nset output './|touch evil'\n"},
        {"'a''", "\nset output ''.\"'\".'a'.\"'\".''.\"'\".''\n"},
        {"~root", "\nset output './~root'\n"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char *script = script_of(&s.answer, PLW_PLOT_LOAD_LINE, PLW_PLOT_SVG, cases[i][0]);
        assert_non_null(strstr(script, cases[i][1]));
        assert_null(strstr(script, "'/"));
        assert_null(strstr(script, "/tmp"));
        plw_text_free(script);
    }
}

static void the_same_answer_gives_the_same_bytes(void **state) {
    (void)state;
    static solved_stage s, again;
    solve_one(&s, PLW_LAW_PENTODE);
    solve_one(&again, PLW_LAW_PENTODE);
    for (int kind = 0; kind < PLW_PLOT_COUNT; kind++) {
        char *one = script_of(&s.answer, (plw_plot_kind)kind, PLW_PLOT_PNG, "x.png");
        char *two = script_of(&again.answer, (plw_plot_kind)kind, PLW_PLOT_PNG, "x.png");
        assert_string_equal(one, two);
        assert_null(strstr(one, "pause"));
        plw_text_free(one);
        plw_text_free(two);
    }
}

static void gnuplot_draws_every_picture(void **state) {
    (void)state;
    if (!gnuplot_is_there()) {
        skip();
    }
    static solved_stage s;
    test_folder folder;
    folder_make(&folder);
    const plw_plot_format formats[] = {PLW_PLOT_SVG, PLW_PLOT_PNG, PLW_PLOT_PDF};
    const char *const starts[] = {"<?xml", "\x89PNG", "%PDF"};
    for (size_t i = 0; i < 6; i++) {
        solve_one(&s, i < 3 ? PLW_LAW_PENTODE : PLW_LAW_TRIODE);
        for (int kind = 0; kind <= PLW_PLOT_COUNT; kind++) {
            char *script = kind < PLW_PLOT_COUNT
                               ? script_of(&s.answer, (plw_plot_kind)kind, formats[i % 3], "family.out")
                               : family_of(&s.tube, s.stage.connection, formats[i % 3]);
            draw(&folder, script);
            char path[FOLDER_PATH_SIZE];
            size_t size = 0;
            char *picture = file_text(folder_path(&folder, "family.out", path), &size);
            assert_true(size > 1000);
            assert_memory_equal(picture, starts[i % 3], strlen(starts[i % 3]));
            free(picture);
            plw_text_free(script);
            assert_int_equal(unlink(path), 0);
        }
    }
    folder_remove(&folder);
}

static void odd_names_stay_inert(void **state) {
    (void)state;
    if (!gnuplot_is_there()) {
        skip();
    }
    static solved_stage s;
    test_folder folder;
    folder_make(&folder);
    stage_begin(&s, PLW_LAW_PENTODE);
    snprintf(
        s.type, sizeof s.type,
        "E'`touch evil`\"`touch evil`\" $(touch evil)\n'; system 'touch evil'\r\x01 @GPVAL_TERM <b>&amp;_{x}^2 \\");
    stage_solve(&s);
    const char *const outputs[] = {"|touch evil", "a`touch evil`'b.svg", "'; system 'touch evil",
                                   "''; system 'touch evil' #'", "a'"};
    for (size_t i = 0; i < sizeof outputs / sizeof outputs[0]; i++) {
        s.type[0] = i % 2 == 0 ? 'E' : '\'';
        char *script = script_of(&s.answer, PLW_PLOT_LOAD_LINE, PLW_PLOT_SVG, outputs[i]);
        draw(&folder, script);
        plw_text_free(script);
        script = family_of(&s.tube, PLW_CONNECTION_PENTODE, PLW_PLOT_SVG);
        draw(&folder, script);
        plw_text_free(script);
    }
    char path[FOLDER_PATH_SIZE];
    assert_int_not_equal(access(folder_path(&folder, "evil", path), F_OK), 0);
    for (size_t i = 0; i < sizeof outputs / sizeof outputs[0]; i++) {
        assert_int_equal(access(folder_path(&folder, outputs[i], path), F_OK), 0);
    }
    folder_path(&folder, outputs[0], path);
    char *picture = file_text(path, NULL);
    assert_non_null(strstr(picture, "&lt;b>&amp;amp;_{x}^2"));
    free(picture);
    folder_remove(&folder);
}

int main(void) {
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(scales_end_on_round_numbers),
        cmocka_unit_test(values_drop_idle_zeros),
        cmocka_unit_test(text_is_quoted),
        cmocka_unit_test(the_family_passes_through_the_point_of_rest),
        cmocka_unit_test(the_load_line_is_ohms_law),
        cmocka_unit_test(the_swing_and_the_limits_are_drawn),
        cmocka_unit_test(curves_keep_inside_the_frame),
        cmocka_unit_test(the_resistor_line_meets_the_cathode_current),
        cmocka_unit_test(without_a_cycle_the_rest_is_still_drawn),
        cmocka_unit_test(printed_rows_are_marked_with_their_misses),
        cmocka_unit_test(a_row_by_its_resistor_misses_as_in_the_table),
        cmocka_unit_test(what_cannot_be_drawn_is_refused),
        cmocka_unit_test(output_keeps_its_last_part_only),
        cmocka_unit_test(the_same_answer_gives_the_same_bytes),
        cmocka_unit_test(gnuplot_draws_every_picture),
        cmocka_unit_test(odd_names_stay_inert),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
