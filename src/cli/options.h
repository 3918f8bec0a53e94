/* The one table of options: parser, help, manual page and completion are all made from it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CLI_OPTIONS_H
#define CLI_OPTIONS_H

#include <stdbool.h>
#include <stddef.h>

/* The commands an option belongs to, as bits; CLI_OVERALL is the program without a command. */
enum {
    CLI_DESIGN = 1U << 0,
    CLI_CHECK = 1U << 1,
    CLI_PLOT = 1U << 2,
    CLI_TUBES = 1U << 3,
    CLI_FIT = 1U << 4,
    CLI_OVERALL = 1U << 5,
    CLI_SUPPLY = 1U << 6,
    CLI_STAGE = CLI_DESIGN | CLI_CHECK | CLI_PLOT | CLI_SUPPLY,
    CLI_EVERY = CLI_STAGE | CLI_TUBES | CLI_FIT
};

/* Headings of the help, in this order. */
typedef enum {
    CLI_GROUP_TUBE,
    CLI_GROUP_SUPPLY,
    CLI_GROUP_TRANSFORMER,
    CLI_GROUP_BIAS,
    CLI_GROUP_SCREEN,
    CLI_GROUP_SIGNAL,
    CLI_GROUP_QUESTION,
    CLI_GROUP_AIM,
    CLI_GROUP_METER,
    CLI_GROUP_TABLE,
    CLI_GROUP_WHICH,
    CLI_GROUP_RESULT,
    CLI_GROUP_GENERAL,
    CLI_GROUP_COUNT
} cli_group;

/* How a value is taken. */
typedef enum {
    CLI_VALUE_NONE,   /* the option stands alone */
    CLI_VALUE_SWITCH, /* alone, or as --option=yes and --option=no */
    CLI_VALUE_TEXT,
    CLI_VALUE_CHOICE, /* one of choices */
    CLI_VALUE_FILE,
    CLI_VALUE_FOLDER
} cli_value;

typedef struct {
    const char *name;
    const char *placeholder;    /* what stands for the value in the help */
    const char *const *choices; /* NULL-terminated */
    const char *help;
    const char *elsewhere; /* said when another command is given this option; may be NULL */
    cli_value value;
    cli_group group;
    unsigned commands;
    char letter; /* short form, or 0 */
    bool stage;  /* an entry of the stage description of that name */
    bool repeatable;
} cli_option;

/* Ret: NULL beyond the last. */
const cli_option *cli_option_at(size_t index);

/* By name, or by letter when the name is one character long.
 * Ret:  the option as it is for these commands; if they have none, that of another command; NULL when there is none */
const cli_option *cli_option_find(const char *name, unsigned commands);

const char *cli_group_title(cli_group group);

/* The name of the option most like this one among those of the commands.  Ret: NULL when none is near. */
const char *cli_option_nearest(const char *name, unsigned commands);

#endif
