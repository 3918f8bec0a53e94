/* The command line: which command, and what stands before any.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <gsl/gsl_errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "cli/commands.h"
#include "cli/folders.h"
#include "cli/help.h"
#include "cli/work.h"

enum { SHOWN_LENGTH = 40 };

static void put_version(FILE *out) {
    fputs("platewright " PLW_VERSION "\n"
          "Licence GPL-3.0-or-later: free software, without any warranty.\n",
          out);
}

/* What was put on the standard output has to be there.  Ret: exit status */
static int finish_output(void) {
    if (fflush(stdout) != 0 || ferror(stdout) != 0) {
        fputs("platewright: standard output: cannot be written\n", stderr);
        return CLI_BAD_FILE;
    }
    return CLI_DONE;
}

/* Is help asked for among the words of a command? */
static bool help_wanted(char *const *words, size_t count) {
    for (size_t i = 0; i < count && strcmp(words[i], "--") != 0; i++) {
        if (strcmp(words[i], "--help") == 0 || strcmp(words[i], "-h") == 0) {
            return true;
        }
    }
    return false;
}

static int run_command(const cli_command *command, char *const *words, size_t count) {
    if (help_wanted(words, count)) {
        cli_help_command(stdout, command);
        return finish_output();
    }
    cli_arguments arguments;
    plw_error error = {.status = PLW_OK};
    plw_status status = cli_arguments_parse(command, words, count, &arguments, &error);
    if (status == PLW_OK && command->positional_required && arguments.positional == NULL) {
        status = plw_fail(&error, PLW_E_USAGE, "%s: is missing", command->positional);
    }
    const int result = status == PLW_OK ? command->run(&arguments) : cli_complain(command, &error);
    cli_arguments_free(&arguments);
    return result;
}

/* An option that stands without a command. */
static int run_option(const char *word, const char *next) {
    static const struct {
        const char *name;
        void (*put)(FILE *out);
    } outputs[] = {
        {"help", cli_help_overall}, {"version", put_version}, {"man", cli_manual}, {"completion", cli_completion}};
    plw_error error = {.status = PLW_OK};
    const char *name = word + strspn(word, "-");
    const cli_option *option = cli_option_find(name, CLI_OVERALL);
    if (option == NULL) {
        const char *nearest = cli_option_nearest(name, CLI_OVERALL);
        (void)plw_fail(&error, PLW_E_USAGE, "%.40s: is no option here%s%s; begin with a command", word,
                       nearest == NULL ? "" : "; did you mean --", nearest == NULL ? "" : nearest);
        return cli_complain(NULL, &error);
    }
    for (size_t i = 0; i < sizeof outputs / sizeof outputs[0]; i++) {
        if (strcmp(outputs[i].name, option->name) == 0 && next == NULL) {
            outputs[i].put(stdout);
            return finish_output();
        }
    }
    (void)plw_fail(&error, PLW_E_USAGE,
                   next != NULL && (option->commands & CLI_OVERALL) != 0
                       ? "%.40s: stands alone"
                       : "%.40s: comes behind a command, e.g. platewright design %.40s ...",
                   word, word);
    return cli_complain(NULL, &error);
}

/* Is this a command that is promised but not written? */
static bool is_planned(const char *name) {
    static const char *const planned[] = {"sweep", "spread", "survey", "sheet"};
    for (size_t i = 0; i < sizeof planned / sizeof planned[0]; i++) {
        if (strcmp(name, planned[i]) == 0) {
            return true;
        }
    }
    return false;
}

static int refuse_command(const char *name) {
    plw_error error = {.status = PLW_OK};
    const char *nearest = cli_command_nearest(name);
    if (is_planned(name)) {
        (void)plw_fail(&error, PLW_E_USAGE, "%s: is not there yet", name);
    } else if (nearest == NULL) {
        (void)plw_fail(&error, PLW_E_USAGE, "%.*s: is no command", SHOWN_LENGTH, name);
    } else {
        (void)plw_fail(&error, PLW_E_USAGE, "%.*s: is no command; is it %s?", SHOWN_LENGTH, name, nearest);
    }
    return cli_complain(NULL, &error);
}

int main(int argc, char **argv) {
    (void)gsl_set_error_handler_off();
    cli_remember_program(argc > 0 ? argv[0] : NULL);
    if (argc < 2) {
        cli_help_overall(stderr);
        return CLI_BAD_INPUT;
    }
    if (argv[1][0] == '-') {
        return run_option(argv[1], argv[2]);
    }
    const cli_command *command = cli_command_find(argv[1]);
    if (command != NULL) {
        return run_command(command, argv + 2, (size_t)argc - 2);
    }
    return refuse_command(argv[1]);
}
