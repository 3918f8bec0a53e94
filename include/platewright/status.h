/* Status codes and error texts shared by every part of the library.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef PLATEWRIGHT_STATUS_H
#define PLATEWRIGHT_STATUS_H

#ifdef __cplusplus
extern "C" {
#endif

#if defined(__GNUC__)
#define PLW_API __attribute__((visibility("default")))
#define PLW_MUST_USE __attribute__((warn_unused_result))
#define PLW_PRINTF(format_index, first_argument) __attribute__((format(printf, format_index, first_argument)))
#else
#define PLW_API
#define PLW_MUST_USE
#define PLW_PRINTF(format_index, first_argument)
#endif

/* Every status a function may return, with the text that stands for it alone. */
#define PLW_STATUS_LIST(X)                                                                                             \
    X(PLW_OK, "done")                                                                                                  \
    X(PLW_E_USAGE, "an argument is outside its domain")                                                                \
    X(PLW_E_DATA, "a data file is not valid")                                                                          \
    X(PLW_E_FILE, "a file could not be read or written")                                                               \
    X(PLW_E_PROGRAM, "an outside program failed")                                                                      \
    X(PLW_E_NOT_FOUND, "nothing of that name is in the catalogue")                                                     \
    X(PLW_E_NO_POINT, "the stage has no such operating point")                                                         \
    X(PLW_E_NO_CONVERGENCE, "the iteration did not converge")                                                          \
    X(PLW_E_NO_MEMORY, "out of memory")

#define PLW_STATUS_ENUMERATOR(name, text) name,
typedef enum { PLW_STATUS_LIST(PLW_STATUS_ENUMERATOR) PLW_STATUS_COUNT } plw_status;
#undef PLW_STATUS_ENUMERATOR

enum { PLW_ERROR_TEXT_SIZE = 2048 };

/* What went wrong: the status, and one or more lines that name the place and the remedy.
 * Zero-initialise before use; a function that returns PLW_OK leaves it as it was. */
typedef struct {
    plw_status status;
    char text[PLW_ERROR_TEXT_SIZE];
} plw_error;

/* Text for a status alone.
 * In:   any value, also one outside the list
 * Ret:  a constant string, never NULL */
PLW_API const char *plw_status_text(plw_status status);

/* Record an error.  A text longer than the buffer is cut.
 * In:   error may be NULL (then only the status is passed on)
 * Ret:  status, so that `return plw_fail(...)` passes it up */
PLW_API plw_status plw_fail(plw_error *error, plw_status status, const char *format, ...) PLW_PRINTF(3, 4);

/* Put a place before the text already recorded: "place: text".
 * Ret:  the status recorded in error, or fallback when error is NULL */
PLW_API plw_status plw_fail_at(plw_error *error, plw_status fallback, const char *format, ...) PLW_PRINTF(3, 4);

/* Add a further line to the text already recorded. */
PLW_API void plw_error_add(plw_error *error, const char *format, ...) PLW_PRINTF(2, 3);

#ifdef __cplusplus
}
#endif
#endif
