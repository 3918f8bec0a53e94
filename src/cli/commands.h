/* The table of commands.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CLI_COMMANDS_H
#define CLI_COMMANDS_H

#include <stddef.h>

#include "cli/arguments.h"

enum { CLI_EXAMPLES_MOST = 4 };

/* Exit status. */
enum { CLI_DONE = 0, CLI_NOT_REACHED = 1, CLI_BAD_INPUT = 2, CLI_BAD_FILE = 3 };

typedef struct {
    const char *what;    /* "a radio with readings from the bench" */
    const char *command; /* as typed */
} cli_example;

typedef struct cli_command {
    const char *name;
    const char *positional;  /* "[STAGE.xml]" */
    const char *summary;     /* one line */
    const char *description; /* a few sentences */
    cli_example examples[CLI_EXAMPLES_MOST];
    int (*run)(const cli_arguments *arguments); /* Ret: exit status */
    unsigned bit;
    bool positional_required; /* it must be there */
} cli_command;

/* Ret: NULL beyond the last. */
const cli_command *cli_command_at(size_t index);
const cli_command *cli_command_find(const char *name);

/* The command most like this name.  Ret: NULL when none is near. */
const char *cli_command_nearest(const char *name);

int cli_run_design(const cli_arguments *arguments);
int cli_run_check(const cli_arguments *arguments);
int cli_run_supply(const cli_arguments *arguments);
int cli_run_plot(const cli_arguments *arguments);
int cli_run_tubes(const cli_arguments *arguments);
int cli_run_fit(const cli_arguments *arguments);

#endif
