/* The answer as CSV (RFC 4180, lines ended by a line feed): one line for each resistor, for a spreadsheet.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <string.h>

#include "platewright/report.h"
#include "report/fields.h"
#include "report/text_buffer.h"
#include "report/verdict.h"

enum { CSV_DIGITS = 9 };

static void put_text(FILE *file, const char *text) {
    if (strpbrk(text, ",\"\r\n") == NULL) {
        fputs(text, file);
        return;
    }
    fputc('"', file);
    for (const char *at = text; *at != '\0'; at++) {
        if (*at == '"') {
            fputc('"', file);
        }
        fputc(*at, file);
    }
    fputc('"', file);
}

static void put_header(FILE *file) {
    fputs("tube,connection,parallel,cathode_resistor_ohms,resistor_watts,rating_watts,fixed_bias_volts,chosen,"
          "within_ratings",
          file);
    for (size_t i = 0; i < plw_quiescent_fields_count; i++) {
        fprintf(file, ",idle_%s", plw_quiescent_fields[i].name);
    }
    for (size_t i = 0; i < plw_signal_fields_count; i++) {
        /* drive_peak_volts says itself what it is of */
        const char *name = plw_signal_fields[i].name;
        fprintf(file, ",%s%s", strncmp(name, "drive_", 6) == 0 ? "" : "driven_", name);
    }
    for (int h = 2; h <= PLW_HARMONICS_MOST; h++) {
        fprintf(file, ",driven_h%d_percent", h);
    }
    fputs(",drive_limit,uncertainty_idle_plate_amps,uncertainty_idle_plate_watts,uncertainty_idle_cathode_volts,"
          "uncertainty_driven_speaker_watts,uncertainty_dominated_by,outside_data",
          file);
    for (size_t i = 0; i < plw_specimen_fields_count; i++) {
        fprintf(file, ",measured_%s", plw_specimen_fields[i].name);
    }
    fputs(",measured_supply_read,measured_plate_read,measured_screen_read,measured_suitable_resistor_ohms\n", file);
}

static void put_number(FILE *file, double value) {
    fputc(',', file);
    plw_text_number(file, value, CSV_DIGITS, "");
}

static void put_fields(FILE *file, const plw_field *fields, size_t count, const void *record) {
    for (size_t i = 0; i < count; i++) {
        put_number(file, plw_field_value(&fields[i], record));
    }
}

/* One standard deviation of the main figures; only the option chosen has it. */
static void put_uncertainty(FILE *file, const plw_uncertainty *u) {
    if (u == NULL) {
        fputs(",,,,,,", file);
        return;
    }
    put_number(file, u->plate_amps.all);
    put_number(file, u->plate_watts.all);
    put_number(file, u->cathode_volts.all);
    put_number(file, u->speaker_watts.all);
    fprintf(file, ",%s,", plw_deviation_cause_name(u->dominant));
    put_text(file, u->outside);
}

/* The tube on the bench; what was read of it, and what the model lent. */
static void put_specimen(FILE *file, const plw_specimen *specimen) {
    for (size_t i = 0; i < plw_specimen_fields_count; i++) {
        put_number(file, specimen == NULL ? (double)NAN : plw_field_value(&plw_specimen_fields[i], specimen));
    }
    if (specimen == NULL) {
        fputs(",,,,\n", file);
        return;
    }
    fprintf(file, ",%s,%s,%s", specimen->supply_read ? "yes" : "no", specimen->plate_read ? "yes" : "no",
            specimen->screen_read ? "yes" : "no");
    const plw_bias_choice *choice = &specimen->choice;
    put_number(file, specimen->resistor_found ? choice->option[choice->chosen].ohms : (double)NAN);
    fputc('\n', file);
}

static void put_option(FILE *file, const plw_answer *answer, const plw_bias_option *option, bool chosen) {
    const plw_stage *stage = answer->stage;
    const bool triode = stage->tube->kind == PLW_KIND_TRIODE;
    put_text(file, plw_stage_tube_type(stage));
    fprintf(file, ",%s,%u", plw_connection_name(triode ? PLW_CONNECTION_TRIODE : stage->connection), stage->parallel);
    put_number(file, option->ohms);
    put_number(file, option->watts);
    put_number(file, option->rating_watts);
    put_number(file, stage->fixed_bias_volts);
    fprintf(file, ",%s,%s", chosen ? "yes" : "no", plw_option_within(answer, option) ? "yes" : "no");
    put_fields(file, plw_quiescent_fields, plw_quiescent_fields_count, &option->quiescent);
    put_fields(file, plw_signal_fields, plw_signal_fields_count, &option->signal);
    for (int h = 2; h <= PLW_HARMONICS_MOST; h++) {
        put_number(file, fabs(option->signal.harmonic_percent[h]));
    }
    fprintf(file, ",%s", plw_drive_limit_name(option->signal.limit));
    put_uncertainty(file, chosen ? answer->uncertainty : NULL);
    put_specimen(file, chosen ? answer->specimen : NULL);
}

plw_status plw_report_csv(const plw_answer *answer, char **text, plw_error *error) {
    plw_text_buffer buffer;
    const plw_status status = plw_text_begin(&buffer, error);
    if (status != PLW_OK) {
        return status;
    }
    put_header(buffer.file);
    if (answer->choice == NULL) {
        put_option(buffer.file, answer, answer->option, true);
    }
    for (size_t i = 0; answer->choice != NULL && i < answer->choice->options; i++) {
        put_option(buffer.file, answer, &answer->choice->option[i], i == answer->choice->chosen);
    }
    return plw_text_end(&buffer, PLW_OK, text, error);
}
