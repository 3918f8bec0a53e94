/* Help on the screen, made from the tables of options and commands.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/help.h"

#include <stdbool.h>
#include <string.h>

enum { WIDTH = 80, INDENT = 28, HEAD_SIZE = 64 };

/* Words up to the width of the screen; further lines begin at `indent`. */
static void put_wrapped(FILE *out, const char *text, size_t column, size_t indent) {
    bool first = true;
    while (*text != '\0') {
        const size_t length = strcspn(text, " ");
        if (!first && column + 1 + length > WIDTH) {
            fprintf(out, "\n%*s", (int)indent, "");
            column = indent;
            first = true;
        }
        fprintf(out, "%s%.*s", first ? "" : " ", (int)length, text);
        column += length + (first ? 0 : 1);
        first = false;
        text += length;
        text += strspn(text, " ");
    }
    fputc('\n', out);
}

const char *cli_option_head(const cli_option *option, char *buffer, size_t size) {
    char letter[8] = "";
    if (option->letter != '\0') {
        snprintf(letter, sizeof letter, "-%c, ", option->letter);
    }
    snprintf(buffer, size, "%s--%s%s%s", letter, option->name, option->placeholder == NULL ? "" : " ",
             option->placeholder == NULL ? "" : option->placeholder);
    return buffer;
}

static void put_options(FILE *out, unsigned commands) {
    for (int group = 0; group < CLI_GROUP_COUNT; group++) {
        bool titled = false;
        for (size_t i = 0; cli_option_at(i) != NULL; i++) {
            const cli_option *option = cli_option_at(i);
            if ((int)option->group != group || (option->commands & commands) == 0) {
                continue;
            }
            if (!titled) {
                fprintf(out, "\n%s\n", cli_group_title((cli_group)group));
                titled = true;
            }
            char head[HEAD_SIZE];
            fprintf(out, "  %-*s", INDENT - 2, cli_option_head(option, head, sizeof head));
            put_wrapped(out, option->help, INDENT, INDENT);
        }
    }
}

/* A command as typed; one that is wider than the screen goes on behind a backslash, before an option. */
static void put_command(FILE *out, const char *text) {
    size_t column = (size_t)fprintf(out, "  %.*s", (int)strcspn(text, " "), text);
    text += strcspn(text, " ");
    while (*text != '\0') { /* text begins with a space; up to the next option */
        const char *next = strstr(text + 1, " --");
        const size_t length = next == NULL ? strlen(text) : (size_t)(next - text);
        const size_t mark = next == NULL ? 0 : 2; /* " \" behind it */
        if (column + length + mark > WIDTH && strncmp(text, " --", 3) == 0) {
            fputs(" \\\n     ", out);
            column = 5;
        }
        fprintf(out, "%.*s", (int)length, text);
        column += length;
        text += length;
    }
    fputc('\n', out);
}

static void put_example(FILE *out, const cli_example *example) {
    fputs("  # ", out);
    put_wrapped(out, example->what, 4, 4);
    put_command(out, example->command);
}

static void put_exit_status(FILE *out) {
    fputs("\nExit status: 0 done, and within every rating; 1 done, but a rating is exceeded,\n"
          "the aim cannot be reached, or printed figures contradict each other; 2 a mistake\n"
          "in the options or in a file; 3 a file could not be read or written, or gnuplot\n"
          "failed.\n",
          out);
}

void cli_help_overall(FILE *out) {
    fputs("platewright settles the operating point of a single-ended tube output stage.\n"
          "\nusage: platewright COMMAND [STAGE.xml] [--option value]...\n"
          "\nCommands\n",
          out);
    for (size_t i = 0; cli_command_at(i) != NULL; i++) {
        fprintf(out, "  %-10s", cli_command_at(i)->name);
        put_wrapped(out, cli_command_at(i)->summary, 12, 12);
    }
    put_options(out, CLI_OVERALL);
    fputs("\nTo begin with\n", out);
    put_example(out, &cli_command_at(0)->examples[0]);
    fputs("\n'platewright COMMAND --help' shows the options and examples of a command.\n"
          "Values are written as in the trade: 285V, 4k7, 470R, 45mA, 0.22uF, 90%.\n",
          out);
    put_exit_status(out);
    fputs("\nPlate supplies kill. Switch off, discharge and measure before you touch.\n", out);
}

void cli_help_command(FILE *out, const cli_command *command) {
    fprintf(out, "platewright %s: ", command->name);
    put_wrapped(out, command->summary, strlen(command->name) + 14, 2);
    fprintf(out, "\nusage: platewright %s %s [--option value]...\n\n", command->name, command->positional);
    put_wrapped(out, command->description, 0, 0);
    fputs("\nExamples\n", out);
    for (size_t i = 0; i < CLI_EXAMPLES_MOST && command->examples[i].command != NULL; i++) {
        put_example(out, &command->examples[i]);
    }
    put_options(out, command->bit);
    if ((command->bit & CLI_STAGE) != 0) {
        fputs("\nSTAGE.xml holds the same in a file (- is the standard input); options override\n"
              "it. What is not said is taken as ideal: no copper, a supply that does not sag,\n"
              "the screen on the plate supply, the cathode resistor bypassed.\n",
              out);
    }
    put_exit_status(out);
}
