/* What the pictures of a stage share: title, key, entries, the family that fits the stage; the choice among them.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/plot_stage.h"

#include <math.h>
#include <string.h>

#include "report/fields.h"
#include "report/text_buffer.h"

static void put_title(FILE *file, const plw_answer *answer) {
    const plw_stage *stage = answer->stage;
    char bias[48];
    char bias_text[80];
    char supply[32];
    char load[32];
    char tubes[32] = "";
    if (stage->parallel > 1) {
        snprintf(tubes, sizeof tubes, "%u \xC3\x97 ", stage->parallel);
    }
    if (isfinite(stage->fixed_bias_volts)) {
        snprintf(bias_text, sizeof bias_text, "fixed bias %s",
                 plw_script_value(stage->fixed_bias_volts, PLW_UNIT_VOLT, 4, bias, sizeof bias));
    } else {
        plw_script_value(stage->cathode_resistor_ohms, PLW_UNIT_OHM, 4, bias, sizeof bias);
        snprintf(bias_text, sizeof bias_text, "%s%s", bias, stage->parallel > 1 && stage->resistor_each ? " each" : "");
    }
    plw_script_value(answer->option->quiescent.supply_volts, PLW_UNIT_VOLT, 3, supply, sizeof supply);
    plw_script_value(stage->load_ohms, PLW_UNIT_OHM, 3, load, sizeof load);
    char tap[24] = "";
    if (stage->tube->kind != PLW_KIND_TRIODE && stage->connection == PLW_CONNECTION_ULTRALINEAR) {
        snprintf(tap, sizeof tap, " at %.3g %%", 100.0 * stage->tap);
    }
    char text[512];
    snprintf(text, sizeof text, "%s%.200s, %s%s, %s, %s, %s", tubes, plw_stage_tube_type(stage),
             plw_connection_name(stage->tube->kind == PLW_KIND_TRIODE ? PLW_CONNECTION_TRIODE : stage->connection), tap,
             bias_text, supply, load);
    fputs("set label ", file);
    plw_script_quoted(file, text);
    fputs(" at graph 0, graph 1 left offset 0,3.2 font ',20' front\n", file);
}

void plw_plot_title(FILE *file, const plw_answer *answer) {
    put_title(file, answer);
    const plw_signal *signal = &answer->option->signal;
    char text[256];
    if (plw_has_path(answer)) {
        char power[32];
        char drive[32];
        char thd[32];
        snprintf(text, sizeof text, "%s to the speaker at %s peak drive, %s distortion%s",
                 plw_script_value(signal->speaker_watts, PLW_UNIT_WATT, 2, power, sizeof power),
                 plw_script_value(signal->drive_peak_volts, PLW_UNIT_VOLT, 3, drive, sizeof drive),
                 plw_script_value(signal->thd_percent, PLW_UNIT_PERCENT, 2, thd, sizeof thd),
                 answer->stage->parallel > 1 ? "; drawn for one tube" : "");
    } else {
        snprintf(text, sizeof text, "at rest%s", answer->stage->parallel > 1 ? "; drawn for one tube" : "");
    }
    fputs("set label ", file);
    plw_script_quoted(file, text);
    fputs(" at graph 0, graph 1 left offset 0,1.9 textcolor rgb '#4a4a4a' front\n"
          "set tmargin 5.4\nset rmargin 9\nset lmargin 9\n",
          file);
}

plw_plate_family plw_stage_family(const plw_answer *answer) {
    const plw_stage *stage = answer->stage;
    const plw_quiescent *rest = &answer->option->quiescent;
    plw_plate_family family = {
        .law = &stage->tube->model.law,
        .together = plw_stage_currents_together(stage),
        .plate_volts = rest->plate_volts,
        .screen_volts = rest->screen_volts,
    };
    if (family.law->kind == PLW_LAW_TRIODE || family.together) {
        family.tap = 1.0;
        family.screen_volts = family.plate_volts;
    } else if (stage->connection == PLW_CONNECTION_ULTRALINEAR) {
        family.tap = stage->tap;
    }
    return family;
}

double plw_drawn_amps(const plw_answer *answer, double plate_amps, double screen_amps) {
    return plw_stage_currents_together(answer->stage) ? plate_amps + screen_amps : plate_amps;
}

bool plw_has_path(const plw_answer *answer) {
    const plw_signal *signal = &answer->option->signal;
    for (size_t i = 0; i < PLW_PATH_POINTS; i++) {
        if (!isfinite(signal->path_plate_volts[i]) || !isfinite(signal->path_plate_amps[i]) ||
            !isfinite(signal->path_grid_volts[i])) {
            return false;
        }
    }
    return signal->drive_peak_volts > 0.0 && isfinite(signal->drive_peak_volts);
}

void plw_plot_key(FILE *file) {
    fputs("set bmargin 9.6\n"
          "set key at graph 0, screen 0.025 left bottom vertical maxrows 4 Left reverse samplen 3.2 spacing 1.25 width "
          "-4\n",
          file);
}

void plw_plot_line(FILE *file, const char *block, plw_ink ink, const char *title) {
    fprintf(file, "$%s using 1:2 with lines", block);
    plw_script_ink(file, ink);
    fputs(title[0] == '\0' ? " notitle" : " title ", file);
    if (title[0] != '\0') {
        plw_script_quoted(file, title);
    }
}

void plw_plot_mark(FILE *file, const char *block, int point_type, double size, const char *colour, const char *title) {
    fprintf(file, "$%s using 1:2 with points pointtype %d pointsize mark*", block, point_type);
    plw_script_number(file, size);
    fprintf(file, " linecolor rgb '%s' linewidth 1.6", colour);
    fputs(title[0] == '\0' ? " notitle" : " title ", file);
    if (title[0] != '\0') {
        plw_script_quoted(file, title);
    }
}

const char *plw_plot_name(plw_plot_kind kind) {
    switch (kind) {
    case PLW_PLOT_LOAD_LINE:
        return "load-line";
    case PLW_PLOT_TRANSFER:
        return "transfer";
    case PLW_PLOT_SUPPLY:
        return "supply";
    case PLW_PLOT_COUNT:
        break;
    }
    return NULL;
}

plw_status plw_plot_script(const plw_answer *answer, plw_plot_kind kind, plw_plot_format format, const char *output,
                           char **text, plw_error *error) {
    if (plw_plot_name(kind) == NULL) {
        return plw_fail(error, PLW_E_USAGE,
                        "plot: there is no plot of number %d; load-line, transfer and supply are known", (int)kind);
    }
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_script_begin(buffer.file, format, output, plw_plot_name(kind));
    if (kind == PLW_PLOT_LOAD_LINE) {
        plw_plot_load_line(buffer.file, answer);
    } else if (kind == PLW_PLOT_TRANSFER) {
        plw_plot_transfer(buffer.file, answer);
    } else {
        plw_plot_supply(buffer.file, answer);
    }
    plw_script_finish(buffer.file);
    return plw_text_end(&buffer, PLW_OK, text, error);
}
