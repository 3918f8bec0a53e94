/* Runs each file named on the command line once through a fuzz target: the corpus as an ordinary test.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static int replay(const char *path) {
    FILE *file = fopen(path, "rb");
    if (file == NULL) {
        return 0;
    }
    const size_t most = 1 << 20;
    uint8_t *data = malloc(most);
    if (data == NULL) {
        fclose(file);
        return 0;
    }
    const size_t size = fread(data, 1, most, file);
    fclose(file);
    LLVMFuzzerTestOneInput(data, size);
    free(data);
    return 1;
}

int main(int count, char **paths) {
    int replayed = 0;
    for (int index = 1; index < count; index++) {
        replayed += replay(paths[index]);
    }
    printf("%s: %d files replayed\n", paths[0], replayed);
    return replayed > 0 ? 0 : 1;
}
