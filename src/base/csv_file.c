/* Tables of comma-separated values read into memory.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/csv_file.h"

#include <errno.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* Where the reading stands. */
typedef struct {
    const char *name;
    char *at; /* in the text, which ends with a zero byte */
    size_t line;
    char separator;
} reader;

/* ---- what kind of bytes ------------------------------------------------------------------------------------------ */

/* Bytes of the character that begins here.  Ret: 0 when it is not UTF-8 */
static size_t character_size(const unsigned char *at, size_t left) {
    const size_t size = at[0] < 0x80U   ? 1
                        : at[0] < 0xC2U ? 0
                        : at[0] < 0xE0U ? 2
                        : at[0] < 0xF0U ? 3
                        : at[0] < 0xF5U ? 4
                                        : 0;
    if (size == 0 || size > left) {
        return 0;
    }
    for (size_t i = 1; i < size; i++) {
        if ((at[i] & 0xC0U) != 0x80U) {
            return 0;
        }
    }
    /* Overlong forms, surrogates, beyond the last character. */
    const bool bad = (at[0] == 0xE0U && at[1] < 0xA0U) || (at[0] == 0xEDU && at[1] > 0x9FU) ||
                     (at[0] == 0xF0U && at[1] < 0x90U) || (at[0] == 0xF4U && at[1] > 0x8FU);
    return bad ? 0 : size;
}

/* Only what can stand in a table: UTF-8 without control characters. */
static plw_status check_bytes(const char *name, const char *text, size_t size, plw_error *error) {
    size_t line = 1;
    for (size_t i = 0; i < size;) {
        const unsigned char c = (unsigned char)text[i];
        const size_t step = character_size((const unsigned char *)text + i, size - i);
        if (step == 0) {
            return plw_fail(error, PLW_E_DATA, "%s:%zu: the text is not in UTF-8; save it as UTF-8", name, line);
        }
        if ((c < 0x20U && c != '\n' && c != '\r' && c != '\t') || c == 0x7FU) {
            return plw_fail(error, PLW_E_DATA, "%s:%zu: a byte of value %u is no part of a text; save the table as CSV",
                            name, line, (unsigned)c);
        }
        line += c == '\n' ? 1U : 0U;
        i += step;
    }
    return PLW_OK;
}

/* ---- lines and cells --------------------------------------------------------------------------------------------- */

/* Outside quotes in the first line: a tab, else a semicolon, else a comma. */
static char find_separator(const char *line) {
    bool quoted = false;
    bool semicolon = false;
    for (; *line != '\0' && *line != '\n'; line++) {
        quoted = quoted != (*line == '"');
        if (!quoted && *line == '\t') {
            return '\t';
        }
        semicolon = semicolon || (!quoted && *line == ';');
    }
    return semicolon ? ';' : ',';
}

static bool is_blank(char c, char separator) {
    return (c == ' ' || c == '\t' || c == '\r') && c != separator;
}

static void skip_blanks(reader *r) {
    while (is_blank(*r->at, r->separator)) {
        r->at++;
    }
}

static bool at_end_of_cell(const reader *r) {
    return *r->at == r->separator || *r->at == '\n' || *r->at == '\0';
}

/* A cell in quotes, from the opening one on.  Out: *cell, without quotes, in place */
static plw_status take_quoted(reader *r, char **cell, char **end, plw_error *error) {
    const size_t line = r->line;
    char *to = ++r->at;
    *cell = to;
    for (;; r->at++) {
        if (*r->at == '\0') {
            return plw_fail(error, PLW_E_DATA, "%s:%zu: a double quote is not closed", r->name, line);
        }
        if (*r->at == '"' && r->at[1] != '"') {
            break;
        }
        r->at += *r->at == '"' ? 1 : 0;
        r->line += *r->at == '\n' ? 1U : 0U;
        *to++ = *r->at;
    }
    r->at++;
    *end = to;
    skip_blanks(r);
    if (!at_end_of_cell(r)) {
        return plw_fail(error, PLW_E_DATA, "%s:%zu: text follows a closing double quote; double the quotes inside",
                        r->name, r->line);
    }
    return PLW_OK;
}

/* One cell.  The separator or line end behind it is left to be looked at; *end is where a zero byte goes then. */
static plw_status take_cell(reader *r, char **cell, char **end, plw_error *error) {
    skip_blanks(r);
    if (*r->at == '"') {
        return take_quoted(r, cell, end, error);
    }
    *cell = r->at;
    while (!at_end_of_cell(r)) {
        r->at++;
    }
    *end = r->at;
    while (*end > *cell && is_blank((*end)[-1], r->separator)) {
        (*end)--;
    }
    return PLW_OK;
}

/* The cells of one line.  Out: cells[PLW_CSV_COLUMNS_MOST], *count; the reader stands at the next line */
static plw_status take_line(reader *r, char **cells, size_t *count, plw_error *error) {
    const size_t line = r->line;
    for (*count = 0;;) {
        char *end = NULL;
        if (*count == PLW_CSV_COLUMNS_MOST) {
            return plw_fail(error, PLW_E_DATA, "%s:%zu: more than %d cells in a line", r->name, line,
                            PLW_CSV_COLUMNS_MOST);
        }
        const plw_status status = take_cell(r, &cells[*count], &end, error);
        if (status != PLW_OK) {
            return status;
        }
        (*count)++;
        const char behind = *r->at;
        r->at += behind == '\0' ? 0 : 1;
        *end = '\0';
        if (behind != r->separator) {
            r->line += behind == '\n' ? 1U : 0U;
            return PLW_OK;
        }
    }
}

static bool is_empty_line(char *const *cells, size_t count) {
    for (size_t i = 0; i < count; i++) {
        if (cells[i][0] != '\0') {
            return false;
        }
    }
    return true;
}

/* The next line that is neither empty nor a comment.  Ret: with *count 0 at the end of the text */
static plw_status next_line(reader *r, char **cells, size_t *count, size_t *number, plw_error *error) {
    while (*r->at != '\0') {
        if (*r->at == '#') {
            r->at += strcspn(r->at, "\n");
            r->line += *r->at == '\n' ? 1U : 0U;
            r->at += *r->at == '\n' ? 1 : 0;
            continue;
        }
        *number = r->line;
        const plw_status status = take_line(r, cells, count, error);
        if (status != PLW_OK || !is_empty_line(cells, *count)) {
            return status;
        }
    }
    *count = 0;
    return PLW_OK;
}

/* ---- the table --------------------------------------------------------------------------------------------------- */

static plw_status add_line(plw_csv *csv, char *const *cells, size_t number, size_t *room) {
    if (csv->lines == *room) {
        const size_t wanted = *room == 0 ? 32 : 2 * *room;
        char **more_cells = realloc((void *)csv->cells, wanted * csv->columns * sizeof *more_cells);
        if (more_cells == NULL) {
            return PLW_E_NO_MEMORY;
        }
        csv->cells = more_cells;
        size_t *more_numbers = realloc(csv->numbers, wanted * sizeof *more_numbers);
        if (more_numbers == NULL) {
            return PLW_E_NO_MEMORY;
        }
        csv->numbers = more_numbers;
        *room = wanted;
    }
    memcpy((void *)(csv->cells + csv->lines * csv->columns), (const void *)cells, csv->columns * sizeof *cells);
    csv->numbers[csv->lines++] = number;
    return PLW_OK;
}

static plw_status take_heads(reader *r, plw_csv *csv, plw_error *error) {
    char *cells[PLW_CSV_COLUMNS_MOST];
    size_t number = 0;
    size_t count = 0;
    const plw_status status = next_line(r, cells, &count, &number, error);
    if (status != PLW_OK) {
        return status;
    }
    if (count == 0) {
        return plw_fail(error, PLW_E_DATA, "%s:1: the table is empty; the first line names the columns", r->name);
    }
    csv->heads = malloc(count * sizeof *csv->heads);
    if (csv->heads == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", r->name);
    }
    memcpy((void *)csv->heads, (const void *)cells, count * sizeof *cells);
    csv->columns = count;
    csv->head_number = number;
    return PLW_OK;
}

static const char *separator_name(char separator) {
    switch (separator) {
    case '\t':
        return "tabs";
    case ';':
        return "semicolons";
    default:
        return "commas";
    }
}

static plw_status take_table(reader *r, size_t lines_most, plw_csv *csv, plw_error *error) {
    plw_status status = take_heads(r, csv, error);
    size_t room = 0;
    while (status == PLW_OK) {
        char *cells[PLW_CSV_COLUMNS_MOST];
        size_t number = 0;
        size_t count = 0;
        status = next_line(r, cells, &count, &number, error);
        if (status != PLW_OK || count == 0) {
            break;
        }
        if (count == 1 && csv->columns > 1) {
            return plw_fail(error, PLW_E_DATA,
                            "%s:%zu: 1 cell where the first line names %zu columns; separate by %s, as "
                            "there",
                            r->name, number, csv->columns, separator_name(r->separator));
        }
        if (count != csv->columns) {
            return plw_fail(error, PLW_E_DATA, "%s:%zu: %zu cells where the first line names %zu columns", r->name,
                            number, count, csv->columns);
        }
        if (csv->lines == lines_most) {
            return plw_fail(error, PLW_E_DATA, "%s:%zu: more than %zu lines", r->name, number, lines_most);
        }
        if (add_line(csv, cells, number, &room) != PLW_OK) {
            return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", r->name);
        }
    }
    return status;
}

plw_status plw_csv_read_memory(const char *name, const char *text, size_t size, size_t lines_most, plw_csv *csv,
                               plw_error *error) {
    static const char mark[] = "\xef\xbb\xbf";
    if (size >= 3 && memcmp(text, mark, 3) == 0) {
        text += 3;
        size -= 3;
    }
    plw_status status = check_bytes(name, text, size, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_csv read = {.text = malloc(size + 1)};
    if (read.text == NULL) {
        return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", name);
    }
    memcpy(read.text, text, size);
    read.text[size] = '\0';
    reader r = {.name = name, .at = read.text, .line = 1, .separator = ','};
    const char *first = read.text;
    while (*first == '#' || *first == '\n' || *first == '\r') {
        first += *first == '#' ? strcspn(first, "\n") : 1;
    }
    r.separator = find_separator(first);
    status = take_table(&r, lines_most, &read, error);
    if (status != PLW_OK) {
        plw_csv_free(&read);
        return status;
    }
    *csv = read;
    return PLW_OK;
}

plw_status plw_csv_read_file(const char *path, size_t size_most, size_t lines_most, plw_csv *csv, plw_error *error) {
    FILE *file = fopen(path, "rb");
    if (file == NULL) {
        return plw_fail(error, errno == ENOMEM ? PLW_E_NO_MEMORY : PLW_E_FILE, "%s: cannot be read: %s", path,
                        strerror(errno));
    }
    plw_status status = PLW_OK;
    char *text = malloc(size_most + 1);
    if (text == NULL) {
        (void)fclose(file);
        return plw_fail(error, PLW_E_NO_MEMORY, "%s: out of memory", path);
    }
    const size_t size = fread(text, 1, size_most + 1, file);
    if (ferror(file) != 0) {
        status = plw_fail(error, PLW_E_FILE, "%s: cannot be read: %s", path, strerror(errno));
    } else if (size > size_most) {
        status = plw_fail(error, PLW_E_DATA, "%s: is larger than %zu bytes", path, size_most);
    }
    (void)fclose(file);
    if (status == PLW_OK) {
        status = plw_csv_read_memory(path, text, size, lines_most, csv, error);
    }
    free(text);
    return status;
}

void plw_csv_free(plw_csv *csv) {
    free((void *)csv->heads);
    free((void *)csv->cells);
    free(csv->numbers);
    free(csv->text);
    *csv = (plw_csv){.columns = 0};
}
