/* Help, manual page and completion, each made from the tables of options and commands.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CLI_HELP_H
#define CLI_HELP_H

#include <stdio.h>

#include "cli/commands.h"

#ifndef PLW_VERSION
#define PLW_VERSION "0.1.0"
#endif

void cli_help_overall(FILE *out);
void cli_help_command(FILE *out, const cli_command *command);

/* A page for man(1), in the man macros. */
void cli_manual(FILE *out);

/* A script for bash. */
void cli_completion(FILE *out);

/* "--tube TYPE", "-o, --output FILE"; cut if too small */
const char *cli_option_head(const cli_option *option, char *buffer, size_t size);

#endif
