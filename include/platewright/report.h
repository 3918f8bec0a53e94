/* Results rendered: text for the bench, JSON, CSV, gnuplot scripts.  Each function is a pure rendering: the same
 * result gives the same bytes, on every machine.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_REPORT_H
#define PLATEWRIGHT_REPORT_H

#include "platewright/bias.h"
#include "platewright/dummy_meaning.h"
#include "platewright/hum.h"
#include "platewright/mains.h"
#include "platewright/plate_supply.h"
#include "platewright/specimen.h"
#include "platewright/uncertainty.h"

#ifdef __cplusplus
extern "C" {
#endif

/* All that `design` or `check` found out.  Pointers are borrowed; NULL where there is nothing. */
typedef struct {
    const plw_stage *stage;        /* as solved, bias included */
    const plw_bias_choice *choice; /* design; NULL in check */
    const plw_bias_option *option; /* what the stage does: the chosen option, or the stage as built */
    const plw_specimen *specimen;  /* check with meter readings */
    const plw_uncertainty *uncertainty;
    const plw_mains *mains;          /* the mains low and high */
    const plw_supply_answer *supply; /* the plate supply at the current of the stage at rest */
    const plw_hum *hum;              /* its ripple at the speaker */
    plw_series series;
    double aim_before_percent; /* 0, or what the aim was before it was lowered for the mains high */
} plw_answer;

/* The answer for the bench.  UTF-8, lines up to 80 columns.
 * Out:  *text, to be freed with plw_text_free(); not written unless PLW_OK
 * Ret:  PLW_OK or PLW_E_NO_MEMORY */
PLW_API plw_status plw_report_text(const plw_answer *answer, char **text, plw_error *error) PLW_MUST_USE;

/* The same as JSON, schema "platewright/1": units in the names, null for what is not known.
 * Out, Ret: as plw_report_text(); PLW_E_NO_MEMORY also for a name that is not UTF-8 */
PLW_API plw_status plw_report_json(const plw_answer *answer, char **text, plw_error *error) PLW_MUST_USE;

/* What the same schema says when no resistor serves: the aim, and null for the point of rest.
 * In:   obstacle: why none serves, as plw_bias_choose() says it
 * Out, Ret: as plw_report_json() */
PLW_API plw_status plw_report_json_unreached(plw_aim aim, const char *obstacle, char **text,
                                             plw_error *error) PLW_MUST_USE;

/* The same as CSV: one header line with units in the column names, one line for each option.
 * Out, Ret: as plw_report_text() */
PLW_API plw_status plw_report_csv(const plw_answer *answer, char **text, plw_error *error) PLW_MUST_USE;

/* ---- the plate supply -------------------------------------------------------------------------------------------- */

/* All that `supply` found out.  Pointers are borrowed; NULL where there is nothing. */
typedef struct {
    const plw_supply_answer *supply;
    const plw_stage *stage; /* that draws the current, bias included */
    const plw_bias_option *option;
    const plw_bias_choice *choice; /* its resistor was chosen */
    size_t meanings;
    plw_dummy_meaning meaning[PLW_DUMMY_MEANINGS];
    const plw_hum *hum;
} plw_supply_finding;

/* As text for the bench and as JSON.
 * Out, Ret: as plw_report_text() and plw_report_json() */
PLW_API plw_status plw_report_supply_text(const plw_supply_finding *finding, char **text,
                                          plw_error *error) PLW_MUST_USE;
PLW_API plw_status plw_report_supply_json(const plw_supply_finding *finding, char **text,
                                          plw_error *error) PLW_MUST_USE;

/* The regulation line as CSV: one line a point.
 * Out, Ret: as plw_report_text() */
PLW_API plw_status plw_report_supply_csv(const plw_supply_finding *finding, char **text, plw_error *error) PLW_MUST_USE;

/* Free a text that this library gave; NULL is allowed. */
PLW_API void plw_text_free(char *text);

/* Gnuplot scripts: self-contained, no path or machine in them. */
typedef enum { PLW_PLOT_LOAD_LINE, PLW_PLOT_TRANSFER, PLW_PLOT_SUPPLY, PLW_PLOT_COUNT } plw_plot_kind;
typedef enum { PLW_PLOT_SVG, PLW_PLOT_PNG, PLW_PLOT_PDF } plw_plot_format;

/* In:   answer; output: the file name that the script is to draw into (its last part only is kept)
 * Out:  *text, to be freed with plw_text_free(); not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE: no such kind of plot; PLW_E_NO_MEMORY */
PLW_API plw_status plw_plot_script(const plw_answer *answer, plw_plot_kind kind, plw_plot_format format,
                                   const char *output, char **text, plw_error *error) PLW_MUST_USE;

/* The plate family of one tube with its published points and rows, in pentode or triode connection.
 * Out:  *text, to be freed with plw_text_free(); not written unless PLW_OK
 * Ret:  PLW_OK; PLW_E_USAGE: a rectifier, a tube without a law, a connection that it has not; PLW_E_NO_MEMORY */
PLW_API plw_status plw_plot_family(const plw_tube *tube, plw_connection connection, plw_plot_format format,
                                   const char *output, char **text, plw_error *error) PLW_MUST_USE;

/* Ret:  "load-line", "transfer" or "supply"; NULL for any other */
PLW_API const char *plw_plot_name(plw_plot_kind kind);

#ifdef __cplusplus
}
#endif
#endif
