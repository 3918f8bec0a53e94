/* What went wrong, said on the standard error, and the exit status that stands for it.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>
#include <string.h>

#include "cli/commands.h"
#include "cli/work.h"

static int exit_status(plw_status status) {
    switch (status) {
    case PLW_OK:
        return CLI_DONE;
    case PLW_E_NO_POINT:
    case PLW_E_NO_CONVERGENCE:
        return CLI_NOT_REACHED;
    case PLW_E_FILE:
    case PLW_E_PROGRAM:
    case PLW_E_NO_MEMORY:
        return CLI_BAD_FILE;
    case PLW_E_USAGE:
    case PLW_E_DATA:
    case PLW_E_NOT_FOUND:
    case PLW_STATUS_COUNT:
        break;
    }
    return CLI_BAD_INPUT;
}

/* One line; control characters, which may stem from a file name, are not sent to the terminal. */
static void put_line(const char *line, size_t length) {
    fputs("platewright: ", stderr);
    for (size_t i = 0; i < length; i++) {
        const unsigned char c = (unsigned char)line[i];
        fputc(c < 0x20 || c == 0x7F ? '?' : c, stderr);
    }
    fputc('\n', stderr);
}

int cli_complain(const cli_command *command, const plw_error *error) {
    const char *line = error->text[0] == '\0' ? plw_status_text(error->status) : error->text;
    while (*line != '\0') {
        const size_t length = strcspn(line, "\n");
        put_line(line, length);
        line += length;
        line += *line == '\n' ? 1 : 0;
    }
    const int status = exit_status(error->status);
    if (status == CLI_BAD_INPUT) {
        fprintf(stderr, "try: platewright %s%s--help\n", command == NULL ? "" : command->name,
                command == NULL ? "" : " ");
    }
    return status;
}
