/* The files that a command reads and writes: none may be another, each must find its folder.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef CLI_FILES_H
#define CLI_FILES_H

#include "cli/arguments.h"
#include "cli/drawing.h"

/* To be asked before anything is solved or written: is one of the files that would be written the stage file that is
 * read, or another one that is written?  Could each be written?  Devices and pipes may be the same.
 * In:   drawing: what --output stands for in plot; NULL: --output is the result itself
 * Ret:  PLW_OK; PLW_E_USAGE naming the option at fault; PLW_E_FILE */
plw_status cli_files_check(const cli_arguments *arguments, const cli_drawing *drawing, plw_error *error) PLW_MUST_USE;

#endif
