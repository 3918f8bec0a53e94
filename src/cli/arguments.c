/* The command line taken apart by the table of options.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/arguments.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "cli/commands.h"
#include "platewright/quantity.h"

enum { NAME_SIZE = 64, LIST_SIZE = 256 };

/* A word from the command line made fit for a message: short, without control characters. */
static const char *show(const char *word, char shown[NAME_SIZE]) {
    size_t used = 0;
    for (; word[used] != '\0' && used + 1 < NAME_SIZE; used++) {
        const unsigned char c = (unsigned char)word[used];
        shown[used] = c < 0x20 || c == 0x7F ? '?' : word[used];
    }
    shown[used] = '\0';
    return shown;
}

static plw_status refuse_unknown(const cli_command *command, const char *word, plw_error *error) {
    char shown[NAME_SIZE];
    show(word, shown);
    shown[strcspn(shown, "=")] = '\0';
    const char *nearest = cli_option_nearest(shown + strspn(shown, "-"), command->bit);
    return nearest == NULL ? plw_fail(error, PLW_E_USAGE, "%s: is no option of %s", shown, command->name)
                           : plw_fail(error, PLW_E_USAGE, "%s: is no option of %s; did you mean --%s?", shown,
                                      command->name, nearest);
}

static plw_status refuse_elsewhere(const cli_command *command, const cli_option *option, plw_error *error) {
    if (option->elsewhere != NULL) {
        return plw_fail(error, PLW_E_USAGE, "--%s: %s", option->name, option->elsewhere);
    }
    char list[LIST_SIZE] = "";
    for (size_t i = 0; cli_command_at(i) != NULL; i++) {
        if ((option->commands & cli_command_at(i)->bit) != 0) {
            const size_t used = strlen(list);
            snprintf(list + used, sizeof list - used, "%s%s", used == 0 ? "" : ", ", cli_command_at(i)->name);
        }
    }
    return list[0] == '\0' ? plw_fail(error, PLW_E_USAGE, "--%s: stands without a command", option->name)
                           : plw_fail(error, PLW_E_USAGE, "--%s: is no option of %s; it belongs to: %s", option->name,
                                      command->name, list);
}

static plw_status check_choice(const cli_option *option, const char *text, plw_error *error) {
    size_t count = 0;
    char list[LIST_SIZE] = "";
    for (; option->choices[count] != NULL; count++) {
        if (strcmp(option->choices[count], text) == 0) {
            return PLW_OK;
        }
        const size_t used = strlen(list);
        snprintf(list + used, sizeof list - used, "%s%s", count == 0 ? "" : ", ", option->choices[count]);
    }
    char shown[NAME_SIZE];
    size_t nearest = 0;
    show(text, shown);
    if (plw_nearest_names(text, option->choices, count, &nearest, 1) == 1) {
        return plw_fail(error, PLW_E_USAGE, "--%s: '%s' is not known; is it %s? (%s)", option->name, shown,
                        option->choices[nearest], list);
    }
    return plw_fail(error, PLW_E_USAGE, "--%s: '%s' is not known; write one of: %s", option->name, shown, list);
}

static plw_status add_given(cli_arguments *arguments, const cli_option *option, const char *text, plw_error *error) {
    if (!option->repeatable && cli_argument_given(arguments, option->name)) {
        return plw_fail(error, PLW_E_USAGE, "--%s: is given twice; keep one", option->name);
    }
    if (option->value != CLI_VALUE_NONE && (text == NULL || text[0] == '\0')) {
        return plw_fail(error, PLW_E_USAGE, "--%s: the value is missing: --%s %s", option->name, option->name,
                        option->placeholder == NULL ? "yes" : option->placeholder);
    }
    if (option->value == CLI_VALUE_CHOICE && check_choice(option, text, error) != PLW_OK) {
        return PLW_E_USAGE;
    }
    arguments->given[arguments->count++] = (cli_given){.option = option, .text = text};
    return PLW_OK;
}

/* One word that begins with a dash, and the word behind it where it takes one.  Out: *at moves on by as many. */
static plw_status take_option(cli_arguments *arguments, char *const *words, size_t count, size_t *at,
                              plw_error *error) {
    const char *word = words[*at];
    const bool is_long = word[1] == '-';
    const char *name = word + (is_long ? 2 : 1);
    const char *equals = is_long ? strchr(name, '=') : NULL;
    const size_t length = equals == NULL ? strlen(name) : (size_t)(equals - name);
    char plain[NAME_SIZE] = "";
    const cli_option *option = NULL;
    if (length < sizeof plain && (length > 1) == is_long) {
        memcpy(plain, name, length);
        plain[length] = '\0';
        option = cli_option_find(plain, arguments->command->bit);
    }
    if (option == NULL) {
        return refuse_unknown(arguments->command, word, error);
    }
    if ((option->commands & arguments->command->bit) == 0) {
        return refuse_elsewhere(arguments->command, option, error);
    }
    const char *text = equals == NULL ? NULL : equals + 1;
    ++*at;
    if (option->value == CLI_VALUE_NONE) {
        return text == NULL ? add_given(arguments, option, NULL, error)
                            : plw_fail(error, PLW_E_USAGE, "--%s: takes no value", option->name);
    }
    if (option->value == CLI_VALUE_SWITCH) {
        return add_given(arguments, option, text == NULL ? "yes" : text, error);
    }
    if (text == NULL && *at < count && strncmp(words[*at], "--", 2) != 0) { /* -12.5V is a value, --load is not */
        text = words[(*at)++];
    }
    return add_given(arguments, option, text, error);
}

/* A word behind the first that is no value of an option: mostly one whose option was forgotten. */
static plw_status refuse_second(const cli_arguments *arguments, const char *word, plw_error *error) {
    char shown[NAME_SIZE];
    char first[NAME_SIZE];
    const cli_command *command = arguments->command;
    show(word, shown);
    show(arguments->positional, first);
    if ((command->bit & CLI_STAGE) != 0) {
        return plw_fail(error, PLW_E_USAGE,
                        "'%s' stands alone: %s reads one stage file, and that is '%s'; does '%s' belong to an option, "
                        "as in --save %s?",
                        shown, command->name, first, shown, shown);
    }
    return plw_fail(error, PLW_E_USAGE, "'%s' stands alone: %s takes one %s, and that is '%s'", shown, command->name,
                    command->bit == CLI_TUBES ? "tube type" : "file", first);
}

static plw_status take_positional(cli_arguments *arguments, const char *word, plw_error *error) {
    if (arguments->positional != NULL) {
        return refuse_second(arguments, word, error);
    }
    if (word[0] == '\0') {
        return plw_fail(error, PLW_E_USAGE, "%s: the name is empty", arguments->command->positional);
    }
    arguments->positional = word;
    return PLW_OK;
}

plw_status cli_arguments_parse(const cli_command *command, char *const *words, size_t count, cli_arguments *arguments,
                               plw_error *error) {
    *arguments = (cli_arguments){.command = command, .given = calloc(count + 1, sizeof *arguments->given)};
    if (arguments->given == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "out of memory");
    }
    plw_status status = PLW_OK;
    bool only_words = false; /* behind -- */
    for (size_t at = 0; at < count && status == PLW_OK;) {
        if (only_words || words[at][0] != '-' || words[at][1] == '\0') {
            status = take_positional(arguments, words[at++], error);
        } else if (strcmp(words[at], "--") == 0) {
            only_words = true;
            at++;
        } else {
            status = take_option(arguments, words, count, &at, error);
        }
    }
    return status;
}

void cli_arguments_free(cli_arguments *arguments) {
    free(arguments->given);
    arguments->given = NULL;
    arguments->count = 0;
}

const char *cli_argument(const cli_arguments *arguments, const char *name) {
    for (size_t i = 0; i < arguments->count; i++) {
        if (strcmp(arguments->given[i].option->name, name) == 0) {
            return arguments->given[i].text;
        }
    }
    return NULL;
}

bool cli_argument_given(const cli_arguments *arguments, const char *name) {
    for (size_t i = 0; i < arguments->count; i++) {
        if (strcmp(arguments->given[i].option->name, name) == 0) {
            return true;
        }
    }
    return false;
}
