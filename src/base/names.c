/* The nearest names to a misspelt one.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdbool.h>
#include <string.h>

#include "platewright/quantity.h"

/* Longer names are compared by their beginning. */
enum { NAME_LENGTH_MOST = 64 };

/* Letters in lower case, digits and bytes outside ASCII; punctuation and spaces are left out. */
static size_t reduce(const char *name, char reduced[NAME_LENGTH_MOST]) {
    size_t length = 0;
    for (; *name != '\0' && length < NAME_LENGTH_MOST; name++) {
        const char c = *name;
        if (c >= 'A' && c <= 'Z') {
            reduced[length++] = (char)(c - 'A' + 'a');
        } else if ((c >= 'a' && c <= 'z') || (c >= '0' && c <= '9') || (unsigned char)c >= 0x80U) {
            reduced[length++] = c;
        }
    }
    return length;
}

static size_t least_of(size_t one, size_t other) {
    return one < other ? one : other;
}

/* Damerau's four errors: a letter wrong, missing, too many, or two neighbours exchanged (each place edited once). */
static size_t distance(const char *one, size_t one_length, const char *other, size_t other_length) {
    size_t rows[3][NAME_LENGTH_MOST + 1];
    size_t *before = rows[0];
    size_t *last = rows[1];
    size_t *row = rows[2];
    for (size_t j = 0; j <= other_length; j++) {
        before[j] = 0;
        last[j] = j;
    }
    for (size_t i = 1; i <= one_length; i++) {
        row[0] = i;
        for (size_t j = 1; j <= other_length; j++) {
            const size_t wrong = last[j - 1] + (one[i - 1] != other[j - 1] ? 1U : 0U);
            row[j] = least_of(wrong, 1 + least_of(last[j], row[j - 1]));
            const bool exchanged = i > 1 && j > 1 && one[i - 1] == other[j - 2] && one[i - 2] == other[j - 1];
            if (exchanged) {
                row[j] = least_of(row[j], before[j - 2] + 1);
            }
        }
        size_t *spare = before;
        before = last;
        last = row;
        row = spare;
    }
    return last[other_length];
}

size_t plw_nearest_names(const char *wanted, const char *const *names, size_t count, size_t *found, size_t most) {
    char wanted_reduced[NAME_LENGTH_MOST];
    const size_t wanted_length = reduce(wanted, wanted_reduced);
    const size_t farthest = wanted_length / 3 > 2 ? wanted_length / 3 : 2;
    size_t number = 0;
    /* One pass for each distance: the order needs no second array, and names equally near stay in the order given. */
    for (size_t wanted_distance = 0; wanted_distance <= farthest; wanted_distance++) {
        for (size_t i = 0; i < count && number < most; i++) {
            char reduced[NAME_LENGTH_MOST];
            const size_t length = reduce(names[i], reduced);
            /* As many errors as letters: the two have nothing in common. */
            const bool alike = wanted_distance < least_of(length, wanted_length);
            if (alike && distance(wanted_reduced, wanted_length, reduced, length) == wanted_distance) {
                found[number++] = i;
            }
        }
    }
    return number;
}
