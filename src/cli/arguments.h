/* The command line taken apart by the table of options.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CLI_ARGUMENTS_H
#define CLI_ARGUMENTS_H

#include <stdbool.h>
#include <stddef.h>

#include "cli/options.h"
#include "platewright/status.h"

struct cli_command;

typedef struct {
    const cli_option *option;
    const char *text; /* NULL when the option takes none */
} cli_given;

/* Texts belong to argv. */
typedef struct {
    const struct cli_command *command;
    const char *positional; /* NULL when there is none; "-" is the standard input */
    size_t count;
    cli_given *given;
} cli_arguments;

/* Take apart what follows the command.
 * In:   words[count]
 * Out:  *arguments, to be freed with cli_arguments_free(), also after an error
 * Ret:  PLW_OK; PLW_E_USAGE naming the word at fault and what would be right; PLW_E_NO_MEMORY */
plw_status cli_arguments_parse(const struct cli_command *command, char *const *words, size_t count,
                               cli_arguments *arguments, plw_error *error) PLW_MUST_USE;
void cli_arguments_free(cli_arguments *arguments);

/* The text of an option.  Ret: NULL when it is not given */
const char *cli_argument(const cli_arguments *arguments, const char *name);

/* Is this option given? */
bool cli_argument_given(const cli_arguments *arguments, const char *name);

#endif
