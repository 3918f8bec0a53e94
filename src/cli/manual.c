/* The manual page, made from the tables of options and commands.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdbool.h>
#include <string.h>

#include "cli/help.h"

enum { HEAD_SIZE = 64 };

/* Text with what the macros would take for their own escaped. */
static void put_text(FILE *out, const char *text) {
    if (*text == '.' || *text == '\'') {
        fputs("\\&", out);
    }
    for (; *text != '\0'; text++) {
        if (*text == '\\') {
            fputs("\\e", out);
        } else if (*text == '-') {
            fputs("\\-", out);
        } else {
            fputc(*text, out);
        }
    }
}

static void put_line(FILE *out, const char *text) {
    put_text(out, text);
    fputc('\n', out);
}

/* The commands an option belongs to, in brackets. */
static void put_commands(FILE *out, const cli_option *option) {
    const char *joint = " (";
    for (size_t i = 0; cli_command_at(i) != NULL; i++) {
        if ((option->commands & cli_command_at(i)->bit) != 0) {
            fprintf(out, "%s%s", joint, cli_command_at(i)->name);
            joint = ", ";
        }
    }
    fputs(joint[0] == ',' ? ")\n" : "\n", out);
}

static void put_options(FILE *out) {
    fputs(".SH OPTIONS\n", out);
    for (int group = 0; group < CLI_GROUP_COUNT; group++) {
        fputs(".SS ", out);
        put_line(out, cli_group_title((cli_group)group));
        for (size_t i = 0; cli_option_at(i) != NULL; i++) {
            const cli_option *option = cli_option_at(i);
            if ((int)option->group != group) {
                continue;
            }
            char head[HEAD_SIZE];
            fputs(".TP\n\\fB", out);
            put_text(out, cli_option_head(option, head, sizeof head));
            fputs("\\fR", out);
            put_commands(out, option);
            put_line(out, option->help);
        }
    }
}

static void put_commands_section(FILE *out) {
    fputs(".SH COMMANDS\n", out);
    for (size_t i = 0; cli_command_at(i) != NULL; i++) {
        const cli_command *command = cli_command_at(i);
        fprintf(out, ".TP\n\\fB%s\\fR ", command->name);
        put_line(out, command->positional);
        put_line(out, command->summary);
        fputs(".sp\n", out);
        put_line(out, command->description);
    }
}

static void put_examples(FILE *out) {
    fputs(".SH EXAMPLES\n", out);
    for (size_t i = 0; cli_command_at(i) != NULL; i++) {
        const cli_command *command = cli_command_at(i);
        for (size_t k = 0; k < CLI_EXAMPLES_MOST && command->examples[k].command != NULL; k++) {
            fputs(i + k == 0 ? "" : ".PP\n", out);
            put_text(out, command->examples[k].what);
            fputs(":\n.PP\n.nf\n.RS 4\n", out);
            put_line(out, command->examples[k].command);
            fputs(".RE\n.fi\n", out);
        }
    }
}

static void put_files(FILE *out) {
    fputs(".SH \"STAGE FILES\"\n"
          "A stage file names what is known of a stage, in any order; each element is called as its option, its value\n"
          "written as on the command line.\n"
          "Options override the file; \\fB\\-\\fR reads it from the standard input.\n"
          ".PP\n.nf\n.RS 4\n"
          "<stage>\n"
          "  <note text=\"Table radio, Morrow Quay\"/>\n"
          "  <tube value=\"6V6GT\"/>\n"
          "  <supply value=\"285V\"/>\n"
          "  <load value=\"5k\"/>\n"
          "  <unbypassed value=\"no\"/>\n"
          "</stage>\n"
          ".RE\n.fi\n"
          ".SH QUANTITIES\n"
          "Values are written as in the trade: 285V, 4k7, 470R, R47, 45mA, 0.22uF, 90%, with or without the unit.\n"
          "A wrong unit is a mistake, not a conversion.\n",
          out);
}

static void put_ending(FILE *out) {
    fputs(".SH \"EXIT STATUS\"\n"
          ".TP\n0\ndone, and within every rating\n"
          ".TP\n1\ndone, but a rating is exceeded, the aim cannot be reached, or printed figures contradict "
          "each other\n"
          ".TP\n2\na mistake in the options or in a file\n"
          ".TP\n3\na file could not be read or written, or gnuplot failed\n"
          ".SH ENVIRONMENT\n"
          ".TP\n\\fBPLATEWRIGHT_TUBES\\fR\nfolder of tube files that is looked through behind that of "
          "\\fB\\-\\-tubes\\fR and before the installed one\n"
          ".SH CAUTION\n"
          "Plate supplies kill.\n"
          "Switch off, discharge and measure before you touch; local codes and licensed practice come first.\n",
          out);
}

void cli_manual(FILE *out) {
    fputs(
        ".\\\" SPDX-License-Identifier: GPL-3.0-or-later\n"
        ".TH PLATEWRIGHT 1 2026-12-01 \"platewright " PLW_VERSION "\" \"User Commands\"\n"
        ".SH NAME\nplatewright \\- operating point of a single\\-ended tube output stage\n"
        ".SH SYNOPSIS\n\\fBplatewright\\fR \\fICOMMAND\\fR [\\fISTAGE.xml\\fR] [\\fB\\-\\-option\\fR "
        "\\fIvalue\\fR]...\n"
        ".SH DESCRIPTION\n"
        "platewright picks the cathode resistor of a tube output stage for the supply that is really there, says how\n"
        "hot plate and screen run and how much power comes out, and draws the load line.\n",
        out);
    put_commands_section(out);
    put_options(out);
    put_files(out);
    put_examples(out);
    put_ending(out);
}
