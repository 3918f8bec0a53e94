/* Where tube files are looked for.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CLI_FOLDERS_H
#define CLI_FOLDERS_H

#include "platewright/catalogue.h"

/* Open the catalogue: the folder named by the option (may be NULL), that of PLATEWRIGHT_TUBES, the installed one.
 * Ret:  as plw_catalogue_open(); PLW_E_FILE when there is none at all */
plw_status cli_open_catalogue(const char *folder, plw_catalogue **catalogue, plw_error *error) PLW_MUST_USE;

/* Keep the first word of the command line, for systems that do not tell where a program lies. */
void cli_remember_program(const char *word);

#endif
