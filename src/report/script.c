/* Gnuplot scripts: text that stays inert, the page, the inks, scales of round numbers.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/script.h"

#include <math.h>
#include <stdbool.h>
#include <string.h>

#include "report/text_buffer.h"

/* No printer or screen shows more; fewer than a double holds, so that the last bit of a library's pow() is not seen. */
enum { SCRIPT_DIGITS = 6 };
#define SCRIPT_ZERO 1e-9 /* V, mA, ms: far below what a drawing shows */

/* Gnuplot reads '' inside single quotes as one quote, but not at the beginning nor twice in a row: such a text would
 * fall into two.  So quotes that are only to be read become typographic ones. */
void plw_script_quoted(FILE *file, const char *text) {
    fputc('\'', file);
    for (const char *at = text == NULL ? "" : text; *at != '\0'; at++) {
        const unsigned char byte = (unsigned char)*at;
        if (byte == '\'') {
            fputs("\xE2\x80\x99", file);
        } else if (byte >= 0x20 && byte != 0x7f) {
            fputc(byte, file);
        }
    }
    fputc('\'', file);
}

/* The three pages look alike: what a point, a mark and the width of a letter are differs from one to the other.  The
 * width of the key's columns is only estimated by gnuplot, for SVG too largely. */
static const struct {
    const char *suffix, *terminal, *mark_size;
    int key_width;
} formats[] = {
    [PLW_PLOT_SVG] = {"svg", "svg size 960,720 noenhanced font 'serif,15' linewidth 1 dashlength 1.2", "0.5", -11},
    [PLW_PLOT_PNG] = {"png", "pngcairo size 1440,1080 noenhanced font 'serif,17' linewidth 1.6 dashlength 1.2", "1",
                      -4},
    [PLW_PLOT_PDF] = {"pdf",
                      "pdfcairo size 24cm,18cm noenhanced font 'serif,15' fontscale 0.53 linewidth 1.3 dashlength 1.2",
                      "0.55", -4},
};

/* Only the last part of a path: the picture falls beside the script.  A leading | would be a command and a leading ~ a
 * home folder to gnuplot.  The quotes of a name must stay what they are: each is a string of its own, joined on. */
static void put_output(FILE *file, plw_plot_format format, const char *output, const char *fallback) {
    const char *name = output == NULL ? "" : output;
    for (const char *at = name; *at != '\0'; at++) {
        if (*at == '/' || *at == '\\') {
            name = at + 1;
        }
    }
    while ((*name > 0 && *name < 0x20) || *name == 0x7f) {
        name++;
    }
    fputs("set output '", file);
    if (*name == '\0') {
        fprintf(file, "%s.%s", fallback, formats[format].suffix);
    } else if (*name == '|' || *name == '~') {
        fputs("./", file);
    }
    for (; *name != '\0'; name++) {
        const unsigned char byte = (unsigned char)*name;
        if (byte == '\'') {
            fputs("'.\"'\".'", file);
        } else if (byte >= 0x20 && byte != 0x7f) {
            fputc(byte, file);
        }
    }
    fputs("'\n", file);
}

void plw_script_begin(FILE *file, plw_plot_format format, const char *output, const char *fallback) {
    const plw_plot_format known = format == PLW_PLOT_PNG || format == PLW_PLOT_PDF ? format : PLW_PLOT_SVG;
    fputs("# Drawn by: gnuplot FILE   (5.2 or later)\n"
          "set encoding utf8\n",
          file);
    fprintf(file, "set terminal %s background '#ffffff'\n", formats[known].terminal);
    fprintf(file, "mark = %s\nset key width %d\n", formats[known].mark_size, formats[known].key_width);
    put_output(file, known, output, fallback);
    fputs("set border 31 linecolor rgb '#2b2b2b' linewidth 0.8\n"
          "set tics scale 0.6 textcolor rgb '#2b2b2b'\n"
          "set grid xtics ytics linecolor rgb '#cfcfcf' dashtype 1 linewidth 0.6\n"
          "set minussign\n",
          file);
}

void plw_script_finish(FILE *file) {
    fputs("set output\n", file);
}

void plw_script_number(FILE *file, double value) {
    /* What is left of a zero after rounding is drawn, and written, as zero: the same digits on every processor. */
    plw_text_number(file, fabs(value) < SCRIPT_ZERO ? 0.0 : value, SCRIPT_DIGITS, "NaN");
}

char *plw_script_value(double value, plw_unit unit, int digits, char *buffer, size_t size) {
    char text[48];
    plw_quantity_format(value, unit, digits, text, sizeof text);
    char *end = strchr(text, '.');
    if (end != NULL) {
        end += strspn(end + 1, "0123456789") + 1; /* behind the last digit */
        char *last = end;
        while (last[-1] == '0') {
            last--;
        }
        last -= last[-1] == '.' ? 1 : 0;
        memmove(last, end, strlen(end) + 1);
    }
    const bool negative = text[0] == '-' && text[1] != '\0';
    snprintf(buffer, size, "%s%s", negative ? "\xE2\x88\x92" : "", text + (negative ? 1 : 0));
    return buffer;
}

void plw_script_point(FILE *file, double x, double y) {
    plw_script_number(file, x);
    fputc(' ', file);
    plw_script_number(file, y);
    fputc('\n', file);
}

void plw_script_line_block(FILE *file, const char *name, double x0, double y0, double x1, double y1) {
    fprintf(file, "$%s << EOD\n", name);
    plw_script_point(file, x0, y0);
    plw_script_point(file, x1, y1);
    fputs("EOD\n", file);
}

void plw_script_label(FILE *file, const char *text, double x, double y, const char *placing) {
    fputs("set label ", file);
    plw_script_quoted(file, text);
    fputs(" at first ", file);
    plw_script_number(file, x);
    fputs(", first ", file);
    plw_script_number(file, y);
    fprintf(file, " %s front\n", placing);
}

void plw_script_ink(FILE *file, plw_ink ink) {
    /* Blue-black, vermilion, blue, ochre: hues that are told apart with any colour vision, and of unequal darkness. */
    static const struct {
        const char *colour, *dash, *width;
    } inks[PLW_INK_COUNT] = {
        [PLW_INK_CURVE] = {"#3d4a57", "1", "1.1"},          [PLW_INK_RATING] = {"#8a5a00", "(8,5)", "1.7"},
        [PLW_INK_RATING_TOO] = {"#b07d2b", "(2,4)", "2.1"}, [PLW_INK_LOAD] = {"#00618f", "(16,5)", "1.4"},
        [PLW_INK_SWING] = {"#c2360c", "1", "4.2"},          [PLW_INK_COPPER] = {"#3f8f5f", "(10,4,2,4)", "1.3"},
        [PLW_INK_SECOND] = {"#10171e", "1", "2.4"},         [PLW_INK_THIRD] = {"#6b4a8a", "(5,3)", "1.9"},
    };
    fprintf(file, " linecolor rgb '%s' dashtype %s linewidth %s", inks[ink].colour, inks[ink].dash, inks[ink].width);
}

double plw_round_step(double value) {
    const double decade = pow(10.0, floor(log10(value)));
    static const double steps[] = {1.0, 2.0, 2.5, 5.0};
    for (size_t i = 0; i < sizeof steps / sizeof steps[0]; i++) {
        if (value <= steps[i] * decade * (1.0 + 1e-9)) {
            return steps[i] * decade;
        }
    }
    return 10.0 * decade;
}

plw_scale plw_scale_for(double least, double most, int divisions) {
    const double step = plw_round_step((most - least) / divisions);
    return (plw_scale){
        .least = step * floor(least / step + 1e-9),
        .most = step * ceil(most / step - 1e-9),
        .step = step,
    };
}

void plw_script_axis(FILE *file, char axis, const plw_scale *scale, const char *label) {
    fprintf(file, "set %crange [", axis);
    plw_script_number(file, scale->least);
    fputs(":", file);
    plw_script_number(file, scale->most);
    fprintf(file, "]\nset %ctics ", axis);
    plw_script_number(file, scale->step);
    fprintf(file, " nomirror\nset m%ctics 2\nset %clabel ", axis, axis);
    plw_script_quoted(file, label);
    fputs(" textcolor rgb '#2b2b2b'\n", file);
}
