/* supply: what the plate supply delivers under load, and what to do about it on the bench.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <string.h>

#include "cli/commands.h"
#include "cli/folders.h"
#include "cli/work.h"
#include "platewright/dummy_meaning.h"

/* Of a transformer where only the voltage wanted is told: small ones are no better.  Common practice, no source. */
#define USUAL_REGULATION_PERCENT 15.0

/* The line reaches this far beyond the current asked about. */
#define LINE_BEYOND 3.0

enum { PLACE_SIZE = 512 };

/* A quantity of an option, left as it is when the option is not given. */
static plw_status take(const cli_arguments *arguments, const char *name, plw_unit unit, double least, double most,
                       double *value, plw_error *error) {
    const char *text = cli_argument(arguments, name);
    if (text == NULL) {
        return PLW_OK;
    }
    if (plw_quantity_parse(text, unit, value, error) != PLW_OK) {
        return plw_fail_at(error, PLW_E_USAGE, "--%s", name);
    }
    if (!(*value >= least && *value <= most)) {
        char low[32];
        char high[32];
        return plw_fail(error, PLW_E_USAGE, "--%s: %.40s is out of range; give %s to %s", name, text,
                        plw_quantity_format(least, unit, 3, low, sizeof low),
                        plw_quantity_format(most, unit, 3, high, sizeof high));
    }
    return PLW_OK;
}

static plw_status read_question(const cli_arguments *arguments, plw_supply_question *question, plw_error *error) {
    double capacitor_volts = (double)NAN;
    double capacitor_amps = (double)NAN;
    *question = plw_supply_question_usual((double)NAN);
    const struct {
        const char *name;
        plw_unit unit;
        double least, most;
        double *value;
    } quantities[] = {
        {"current", PLW_UNIT_AMPERE, 1e-5, 10.0, &question->amps},
        {"regulation", PLW_UNIT_PERCENT, 0.5, 100.0, &question->regulation_percent},
        {"capacitor-volts", PLW_UNIT_VOLT, 1.0, 10000.0, &capacitor_volts},
        {"capacitor-amps", PLW_UNIT_AMPERE, 1e-4, 100.0, &capacitor_amps},
        {"winding-amps", PLW_UNIT_AMPERE, 1e-3, 10.0, &question->ratings.winding_rms_amps},
        {"heater-winding", PLW_UNIT_AMPERE, 0.01, 100.0, &question->ratings.heater_winding_amps},
    };
    plw_status status = PLW_OK;
    for (size_t i = 0; i < sizeof quantities / sizeof quantities[0] && status == PLW_OK; i++) {
        status = take(arguments, quantities[i].name, quantities[i].unit, quantities[i].least, quantities[i].most,
                      quantities[i].value, error);
    }
    for (size_t k = 0; k < PLW_NODES_MOST; k++) {
        question->ratings.capacitor_volts[k] = capacitor_volts;
        question->ratings.ripple_amps[k] = capacitor_amps;
    }
    return status;
}

/* Everything that the answer points into. */
typedef struct {
    plw_bias_choice choice;
    plw_bias_option option;
    plw_supply_answer supply;
    plw_hum hum;
    plw_supply_finding finding;
} findings;

/* The stage that draws the current, its resistor chosen where none is told. */
static plw_status solve_stage(cli_work *work, findings *f, plw_error *error) {
    plw_status status = cli_work_build(work, error);
    if (status != PLW_OK) {
        return status;
    }
    f->finding.stage = &work->stage;
    f->finding.option = &f->option;
    if (plw_stage_described(work->description, "cathode-resistor", NULL, 0) == NULL &&
        plw_stage_described(work->description, "fixed-bias", NULL, 0) == NULL) {
        status = cli_work_choose(work, &f->choice, error);
        if (status == PLW_OK) {
            f->option = f->choice.option[f->choice.chosen];
            f->finding.choice = &f->choice;
        }
        return status;
    }
    return plw_bias_option_solve(&work->stage, work->stage.cathode_resistor_ohms, &f->option, error);
}

/* Is more described than the supply? */
static bool has_stage(const cli_work *work) {
    static const char *const names[] = {"tube", "load", "ratio", "speaker", "cathode-resistor", "fixed-bias"};
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        if (plw_stage_described(work->description, names[i], NULL, 0) != NULL) {
            return true;
        }
    }
    return false;
}

static plw_status build_alone(cli_work *work, plw_supply_question *question, plw_error *error) {
    if (isnan(question->amps)) {
        return plw_fail(error, PLW_E_USAGE,
                        "--current: is missing; give what is drawn, e.g. 45mA, or describe the stage by --tube, --load "
                        "and the rest");
    }
    char place[PLACE_SIZE];
    const char *other = plw_stage_described(work->description, "other-current", place, sizeof place);
    if (other != NULL) {
        return plw_fail(error, PLW_E_USAGE, "%s: without a stage all that is drawn stands in --current; add it there",
                        place);
    }
    const plw_status status = cli_open_catalogue(cli_argument(work->arguments, "tubes"), &work->catalogue, error);
    return status == PLW_OK ? plw_plate_supply_build(work->description, work->catalogue, LINE_BEYOND * question->amps,
                                                     &work->supply, error)
                            : status;
}

/* Current of the heater winding: of the output tubes, and of a rectifier tube of the same voltage, which mostly hangs
 * on it.  Common practice, no source. */
static double heater_amps(const cli_work *work) {
    const plw_tube *tube = work->stage.tube;
    const plw_tube *rectifier = work->supply.rectifier_tube;
    double amps = tube->heater_amps * (double)work->stage.parallel;
    if (rectifier != NULL && fabs(rectifier->heater_volts - tube->heater_volts) < 0.02 * tube->heater_volts) {
        amps += rectifier->heater_amps;
    }
    return amps;
}

/* What needs the stage: readings across the dummy load, hum. */
static void complete(const cli_work *work, findings *f) {
    const plw_supply_answer *a = &f->supply;
    if (a->has_dummy && !isfinite(work->stage.fixed_bias_volts) && work->supply.line.kind != PLW_SUPPLY_STIFF &&
        plw_dummy_meanings(&work->stage, &a->dummy, work->aim, work->series, f->finding.meaning, NULL) == PLW_OK) {
        f->finding.meanings = PLW_DUMMY_MEANINGS;
    }
    if (a->has_state && !work->supply.reservoir_assumed &&
        plw_hum_of(&work->stage, &f->option.quiescent, &f->option.signal,
                   a->state.node[a->state.nodes - 1].ripple_rms_volts, &f->hum, NULL) == PLW_OK) {
        f->finding.hum = &f->hum;
    }
}

static plw_status put(const cli_work *work, const plw_supply_finding *finding, plw_error *error) {
    const char *format = cli_argument(work->arguments, "format");
    char *text = NULL;
    plw_status status = PLW_OK;
    if (format == NULL || strcmp(format, "text") == 0) {
        status = plw_report_supply_text(finding, &text, error);
    } else if (strcmp(format, "json") == 0) {
        status = plw_report_supply_json(finding, &text, error);
    } else {
        status = plw_report_supply_csv(finding, &text, error);
    }
    return status == PLW_OK ? cli_work_put(work, text, error) : status;
}

static plw_status supply(cli_work *work, findings *f, plw_error *error) {
    plw_supply_question question;
    plw_status status = read_question(work->arguments, &question, error);
    const bool staged = has_stage(work);
    if (status == PLW_OK && staged && !isnan(question.amps)) {
        return plw_fail(error, PLW_E_USAGE,
                        "--current: the stage draws its own current; leave this out, or leave the tube out");
    }
    if (status == PLW_OK) {
        status = staged ? solve_stage(work, f, error) : build_alone(work, &question, error);
    }
    if (status != PLW_OK) {
        return status;
    }
    if (staged) {
        question.amps = f->option.quiescent.supply_amps;
        question.ratings.heater_amps = heater_amps(work);
    }
    question.series = work->series;
    if (isnan(question.regulation_percent) && work->supply.line.kind == PLW_SUPPLY_STIFF) {
        question.regulation_percent = USUAL_REGULATION_PERCENT;
    }
    status = plw_plate_supply_ask(&work->supply, &question, &f->supply, error);
    if (status != PLW_OK) {
        return status;
    }
    f->finding.supply = &f->supply;
    if (staged) {
        complete(work, f);
    }
    status = cli_work_save(work, error);
    return status == PLW_OK ? put(work, &f->finding, error) : status;
}

int cli_run_supply(const cli_arguments *arguments) {
    cli_work work;
    plw_error error = {.status = PLW_OK};
    findings f = {.finding = {.supply = NULL}};
    plw_status status = cli_work_open(arguments, NULL, &work, &error);
    if (status == PLW_OK) {
        status = supply(&work, &f, &error);
    }
    return cli_work_end(&work, status, f.supply.within_ratings, &error);
}
