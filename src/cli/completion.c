/* The completion script for bash, made from the tables of options and commands.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "cli/help.h"

static void put_words(FILE *out, unsigned commands) {
    for (size_t i = 0; cli_option_at(i) != NULL; i++) {
        if ((cli_option_at(i)->commands & commands) != 0) {
            fprintf(out, " --%s", cli_option_at(i)->name);
        }
    }
}

/* An option of the same name may mean another thing to another command: "plot:--kind|fit:--kind". */
static void put_pattern(FILE *out, const cli_option *option) {
    const char *joint = "    ";
    for (size_t i = 0; cli_command_at(i) != NULL; i++) {
        if ((option->commands & cli_command_at(i)->bit) != 0) {
            fprintf(out, "%s%s:--%s", joint, cli_command_at(i)->name, option->name);
            joint = "|";
        }
    }
    fputc(')', out);
}

/* What may follow an option. */
static void put_values(FILE *out, const cli_option *option) {
    if (option->value == CLI_VALUE_NONE || option->value == CLI_VALUE_SWITCH) {
        return;
    }
    put_pattern(out, option);
    if (strcmp(option->name, "tube") == 0 || strcmp(option->name, "like") == 0) {
        fputs(" _platewright_types; return ;;\n", out);
    } else if (strcmp(option->name, "diode") == 0) {
        fputs(" _platewright_types silicon --kind rectifier; return ;;\n", out);
    } else if (option->choices != NULL) {
        fputs(" COMPREPLY=($(compgen -W '", out);
        for (size_t i = 0; option->choices[i] != NULL; i++) {
            fprintf(out, "%s%s", i == 0 ? "" : " ", option->choices[i]);
        }
        fputs("' -- \"$word\")); return ;;\n", out);
    } else if (option->value == CLI_VALUE_FILE) {
        fputs(" COMPREPLY=($(compgen -f -- \"$word\")); return ;;\n", out);
    } else if (option->value == CLI_VALUE_FOLDER) {
        fputs(" COMPREPLY=($(compgen -d -- \"$word\")); return ;;\n", out);
    } else {
        fputs(" return ;;\n", out);
    }
}

void cli_completion(FILE *out) {
    fputs("# Completion of platewright for bash; made by 'platewright --completion'.\n"
          "# SPDX-License-Identifier: GPL-3.0-or-later\n"
          "# Types of the catalogue, and a word before them; any case is completed.\n"
          "_platewright_types() {\n"
          "  local more=$1; [ $# -gt 0 ] && shift\n"
          "  more=\"$more $(\"${COMP_WORDS[0]}\" tubes --format names \"$@\" 2>/dev/null)\"\n"
          "  COMPREPLY=($(compgen -W \"$more\" -- \"$word\"))\n"
          "  [ ${#COMPREPLY[@]} -gt 0 ] || COMPREPLY=($(compgen -W \"$more\" -- \"$(echo \"$word\" | tr a-z A-Z)\"))\n"
          "}\n"
          "_platewright() {\n"
          "  local word=${COMP_WORDS[COMP_CWORD]} before=${COMP_WORDS[COMP_CWORD-1]} options=\n"
          "  COMPREPLY=()\n"
          "  # --option=value comes in three words\n"
          "  [ \"$word\" = = ] && word=\n"
          "  [ \"$before\" = = ] && before=${COMP_WORDS[COMP_CWORD-2]}\n"
          "  if [ \"$COMP_CWORD\" -eq 1 ]; then\n"
          "    COMPREPLY=($(compgen -W '",
          out);
    for (size_t i = 0; cli_command_at(i) != NULL; i++) {
        fprintf(out, "%s%s", i == 0 ? "" : " ", cli_command_at(i)->name);
    }
    put_words(out, CLI_OVERALL);
    fputs("' -- \"$word\")); return\n  fi\n  case ${COMP_WORDS[1]}:$before in\n", out);
    for (size_t i = 0; cli_option_at(i) != NULL; i++) {
        put_values(out, cli_option_at(i));
    }
    fputs("  esac\n  case ${COMP_WORDS[1]} in\n", out);
    for (size_t i = 0; cli_command_at(i) != NULL; i++) {
        fprintf(out, "    %s) options='", cli_command_at(i)->name);
        put_words(out, cli_command_at(i)->bit);
        fputs("' ;;\n", out);
    }
    fputs("  esac\n"
          "  case $word in\n"
          "    -*) COMPREPLY=($(compgen -W \"$options\" -- \"$word\")) ;;\n"
          "    *) if [ \"${COMP_WORDS[1]}\" = tubes ]; then _platewright_types; return; fi\n"
          "       COMPREPLY=($(compgen -f -- \"$word\")) ;;\n"
          "  esac\n"
          "}\n"
          "complete -F _platewright platewright\n",
          out);
}
