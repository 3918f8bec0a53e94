/* The stage with the mains low and high, as a group of lines.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdio.h>

#include "report/layout.h"
#include "report/supply_report.h"

/* The longest name, "plate and screen dissipation", fits below "at full drive" too. */
enum { NAME_WIDTH = 30, VALUE_WIDTH = 9, SHARE_WIDTH = 10 };

static void supply_cell(FILE *out, const plw_mains_corner *corner) {
    plw_put_right(out, plw_cell_volts(corner->solved ? corner->quiescent.supply_volts : (double)NAN).text, VALUE_WIDTH);
}

/* A cell of the mains group.  In: last: nothing stands behind it in its line */
static void mains_cell(FILE *out, const plw_mains_corner *corner, size_t index, bool counted, bool last) {
    if (!corner->solved || index >= corner->ratings_count) {
        plw_put_right(out, "-", VALUE_WIDTH);
        fputs(last ? "" : "          ", out);
        return;
    }
    const plw_rating_check *check = &corner->ratings[index];
    const char *mark = check->ok ? "" : counted ? " !!" : " *";
    const plw_cell value =
        check->unit == PLW_UNIT_WATT ? plw_cell_watts(check->value) : plw_cell_quantity(check->value, check->unit, 3);
    plw_put_share(out, value.text, VALUE_WIDTH, check->share_percent, check->ok);
    fprintf(out, last ? "%s" : "%-3s", mark);
}

/* The supply's volts, then every rating; ret: whether one is passed. */
static bool mains_table(FILE *out, const plw_answer *answer) {
    const plw_mains *mains = answer->mains;
    const plw_mains_corner *names = mains->high.solved ? &mains->high : &mains->low;
    const char *title = answer->stage->parallel > 1 ? "MAINS, at rest, each tube" : "MAINS, at rest";
    fprintf(out, "\n%-29s%19s%19s%12s\n", title, "10 % low", "10 % high", "(now)");
    fprintf(out, "  %-*s", NAME_WIDTH, "supply");
    supply_cell(out, &mains->low);
    fprintf(out, "%*s", SHARE_WIDTH, "");
    supply_cell(out, &mains->high);
    fprintf(out, "%*s", SHARE_WIDTH, "");
    plw_put_right(out, plw_cell_volts(answer->option->quiescent.supply_volts).text, VALUE_WIDTH);
    fputc('\n', out);
    bool starred = false;
    bool driven = false;
    for (size_t i = 0; i < names->ratings_count; i++) {
        if (!driven && names->ratings[i].when == PLW_AT_FULL_DRIVE) {
            fputs("  at full drive\n", out);
            driven = true;
        }
        const int indent = driven ? 4 : 2;
        fprintf(out, "%*s%-*s", indent, "", NAME_WIDTH + 2 - indent, names->ratings[i].name);
        mains_cell(out, &mains->low, i, mains->counted, false);
        mains_cell(out, &mains->high, i, mains->counted, true);
        fputc('\n', out);
        starred = starred || !names->ratings[i].ok;
    }
    return starred;
}

/* What the rating system makes of it. */
static void system_line(FILE *out, const plw_mains *mains, bool starred) {
    char text[256];
    if (mains->counted) {
        snprintf(text, sizeof text, "%s ratings must hold at high mains too", plw_rating_system_name(mains->system));
    } else if (mains->system == PLW_SYSTEM_DESIGN_CENTER) {
        snprintf(text, sizeof text, "%sdesign-center ratings leave room for mains 10 %% off by themselves: not counted",
                 starred ? "* " : "");
    } else {
        snprintf(text, sizeof text, "%sthe maker does not say whether high mains are to be counted: they are not",
                 starred ? "* " : "");
    }
    plw_put_paragraph(out, "  ", text);
}

/* Supplies of their own that may be held: what is asked then is another stage, its plate supply alone moved. */
static void held_line(FILE *out, const plw_stage *stage) {
    const bool bias = isfinite(stage->fixed_bias_volts);
    const bool screen = isfinite(stage->screen_supply_volts);
    if (!bias && !screen) {
        return;
    }
    char with[PLW_CELL_SIZE + 64] = "the plate supply alone 10 % higher";
    if (stage->supply.kind == PLW_SUPPLY_STIFF) {
        snprintf(with, sizeof with, "--supply %.0fV", PLW_MAINS_HIGH_PERCENT / 100.0 * stage->supply.volts);
    }
    char text[256];
    snprintf(text, sizeof text, "the %s%s%s %s taken to follow the mains; where held, check with %s",
             bias ? "fixed bias" : "", bias && screen ? " and the " : "", screen ? "screen supply" : "",
             bias && screen ? "are" : "is", with);
    plw_put_paragraph(out, "  ", text);
}

void plw_put_mains(FILE *out, const plw_answer *answer) {
    const plw_mains *mains = answer->mains;
    if (!mains->low.solved && !mains->high.solved) {
        return;
    }
    system_line(out, mains, mains_table(out, answer));
    held_line(out, answer->stage);
}
