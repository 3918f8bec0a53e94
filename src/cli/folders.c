/* Where tube files are looked for: what the user names, then what lies beside the program.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/folders.h"

#include <stdbool.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#ifdef __APPLE__
#include <mach-o/dyld.h>
#endif

enum { PATH_SIZE = 4096 };

static const char *program_word = "";

void cli_remember_program(const char *word) {
    program_word = word == NULL ? "" : word;
}

/* The path of the running program.  Ret: false when it cannot be known. */
static bool program_path(char path[PATH_SIZE]) {
#ifdef __APPLE__
    uint32_t size = PATH_SIZE;
    if (_NSGetExecutablePath(path, &size) == 0) {
        return true;
    }
#else
    const ssize_t length = readlink("/proc/self/exe", path, PATH_SIZE - 1);
    if (length > 0) {
        path[length] = '\0';
        return true;
    }
#endif
    const int needed = snprintf(path, PATH_SIZE, "%s", program_word);
    return needed > 0 && needed < PATH_SIZE && strchr(path, '/') != NULL;
}

static bool is_folder(const char *path) {
    struct stat status;
    return stat(path, &status) == 0 && S_ISDIR(status.st_mode);
}

/* The installed folder: beside the program when it is installed, above it in the folder it was built in. */
static bool installed_folder(char folder[PATH_SIZE]) {
    static const char *const beside[] = {"../share/platewright/tubedata", "../tubedata", "../../tubedata"};
    char program[PATH_SIZE];
    if (program_path(program)) {
        *strrchr(program, '/') = '\0';
        for (size_t i = 0; i < sizeof beside / sizeof beside[0]; i++) {
            const int needed = snprintf(folder, PATH_SIZE, "%s/%s", program, beside[i]);
            if (needed > 0 && needed < PATH_SIZE && is_folder(folder)) {
                return true;
            }
        }
    }
#ifdef PLW_DATA_DIR
    snprintf(folder, PATH_SIZE, "%s", PLW_DATA_DIR);
    return is_folder(folder);
#else
    return false;
#endif
}

plw_status cli_open_catalogue(const char *folder, plw_catalogue **catalogue, plw_error *error) {
    char installed[PATH_SIZE];
    const char *from_environment = getenv("PLATEWRIGHT_TUBES");
    if (from_environment != NULL && from_environment[0] == '\0') {
        from_environment = NULL;
    }
    const bool is_installed = installed_folder(installed);
    const char *folders[] = {folder, from_environment, is_installed ? installed : NULL};
    if (folder == NULL && from_environment == NULL && !is_installed) {
        return plw_fail(error, PLW_E_FILE,
                        "the folder of tube files is not found beside the program; name it with --tubes FOLDER or in "
                        "PLATEWRIGHT_TUBES");
    }
    return plw_catalogue_open(folders, sizeof folders / sizeof folders[0], catalogue, error);
}
