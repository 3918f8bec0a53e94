/* Each allocation fails in turn: the answer is "out of memory" or the right one, never a crash, nothing is left
 * unfreed, and the file that was there before is as it was.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <errno.h>
#include <gsl/gsl_errno.h>
#include <libxml/xmlmemory.h>

#include "folder.h"
#include "platewright/fit.h"
#include "platewright/report.h"
#include "platewright/stage_file.h"
#include "platewright/text_file.h"
#include "platewright/tube_report.h"

/* The allocator is replaced where the C library offers its own under other names, and nothing else has replaced it. */
#if defined(__SANITIZE_ADDRESS__) || !defined(__GLIBC__)
#define CAN_REPLACE 0
#elif defined(__has_feature)
#if __has_feature(address_sanitizer)
#define CAN_REPLACE 0
#endif
#endif
#ifndef CAN_REPLACE
#define CAN_REPLACE 1
#endif

static volatile long until_failure = -1; /* allocations that still succeed; -1: all */
static volatile long blocks;             /* in use */

#if CAN_REPLACE
void *__libc_malloc(size_t size);
void *__libc_calloc(size_t count, size_t size);
void *__libc_realloc(void *old, size_t size);
void __libc_free(void *block);
__attribute__((visibility("default"))) void free(void *block);
__attribute__((visibility("default"))) void *malloc(size_t size);
__attribute__((visibility("default"))) void *calloc(size_t count, size_t size);
__attribute__((visibility("default"))) void *realloc(void *old, size_t size);

/* Once it has failed it fails on: memory does not come back while one is looking for it. */
static int fails(void) {
    if (until_failure > 0) {
        until_failure--;
    }
    if (until_failure == 0) {
        errno = ENOMEM;
    }
    return until_failure == 0;
}

static void *counted(void *block) {
    blocks += block != NULL;
    return block;
}

void *malloc(size_t size) {
    return fails() ? NULL : counted(__libc_malloc(size));
}

void *calloc(size_t count, size_t size) {
    return fails() ? NULL : counted(__libc_calloc(count, size));
}

void *realloc(void *old, size_t size) {
    if (fails()) {
        return NULL;
    }
    void *block = __libc_realloc(old, size);
    return old == NULL ? counted(block) : block;
}

void free(void *block) {
    blocks -= block != NULL;
    __libc_free(block);
}

static char *copy_for_xml(const char *text) {
    char *copy = __libc_malloc(strlen(text) + 1);
    return copy == NULL ? NULL : strcpy(copy, text);
}

/* libxml2 2.9 does not itself survive a lack of memory in its schemas: it is left with the real allocator. */
static void spare_the_xml_library(void) {
    assert_int_equal(xmlMemSetup(__libc_free, __libc_malloc, __libc_realloc, copy_for_xml), 0);
}
#else
static void spare_the_xml_library(void) {
}
#endif

static const char stage_text[] = "<stage>\n  <note text=\"quay\"/>\n  <tube value=\"MQ6GT\"/>\n"
                                 "  <winding value=\"235V\"/>\n  <rectifier value=\"full-wave\"/>\n"
                                 "  <winding-ohms value=\"190\"/>\n  <reservoir value=\"47uF\"/>\n"
                                 "  <load value=\"5k\"/>\n</stage>\n";

typedef struct {
    const char *folder;
    plw_catalogue *catalogue;
    plw_stage_description *description;
    plw_plate_supply supply;
    char *text;
    const char *path;
} job;

static plw_status read_and_build(job *work, plw_stage *stage, plw_error *error) {
    plw_status status =
        plw_stage_file_read_memory("stage.xml", stage_text, strlen(stage_text), &work->description, error);
    if (status == PLW_OK) {
        status = plw_stage_describe(work->description, "other-current", "3mA", error);
    }
    if (status == PLW_OK) {
        status = plw_catalogue_open(&work->folder, 1, &work->catalogue, error);
    }
    return status == PLW_OK ? plw_stage_build_supplied(work->description, work->catalogue, stage, &work->supply, error)
                            : status;
}

static plw_status choose_and_report(job *work, const plw_stage *stage, plw_error *error) {
    plw_bias_choice choice;
    const plw_aim aim = {.kind = PLW_AIM_DISSIPATION, .value = 85};
    plw_status status = plw_bias_choose(stage, aim, PLW_E24, &choice, error);
    if (status != PLW_OK) {
        return status;
    }
    plw_stage solved = *stage;
    const plw_bias_option *option = &choice.option[choice.chosen];
    solved.cathode_resistor_ohms = option->ohms;
    plw_supply_answer supply;
    const plw_supply_question question = plw_supply_question_usual(option->quiescent.supply_amps);
    status = plw_plate_supply_ask(&work->supply, &question, &supply, error);
    const plw_answer answer = {
        .stage = &solved, .choice = &choice, .option = option, .supply = &supply, .series = PLW_E24};
    const plw_supply_finding finding = {.supply = &supply, .stage = &solved, .option = option, .choice = &choice};
    for (int kind = 0; kind < 7 && status == PLW_OK; kind++) {
        plw_text_free(work->text);
        work->text = NULL;
        switch (kind) {
        case 0:
            status = plw_report_text(&answer, &work->text, error);
            break;
        case 1:
            status = plw_report_json(&answer, &work->text, error);
            break;
        case 2:
            status = plw_report_csv(&answer, &work->text, error);
            break;
        case 3:
            status = plw_plot_script(&answer, PLW_PLOT_LOAD_LINE, PLW_PLOT_SVG, "a.svg", &work->text, error);
            break;
        case 4:
            status = plw_report_supply_text(&finding, &work->text, error);
            break;
        case 5:
            status = plw_report_supply_json(&finding, &work->text, error);
            break;
        default:
            status = plw_stage_file_text(work->description, &work->text, error);
        }
    }
    return status == PLW_OK ? plw_text_write(work->path, work->text, error) : status;
}

/* From the stage file to the answer in a file.  Ret: the status; all is freed. */
static plw_status whole_job(const char *folder, const char *path, plw_error *error) {
    job work = {.folder = folder, .path = path};
    plw_stage stage;
    plw_status status = read_and_build(&work, &stage, error);
    if (status == PLW_OK) {
        status = choose_and_report(&work, &stage, error);
    }
    plw_text_free(work.text);
    plw_stage_description_free(work.description);
    plw_catalogue_free(work.catalogue);
    return status;
}

static void fit_test_tube(const test_folder *folder) {
    char to[FOLDER_PATH_SIZE];
    plw_tube *tube = NULL;
    plw_fit *fit = calloc(1, sizeof *fit);
    assert_non_null(fit);
    assert_int_equal(plw_tube_read(TESTDATA "/cli/tubes/MQ6.xml", &tube, NULL), PLW_OK);
    assert_int_equal(plw_fit_tube(tube, false, fit, NULL), PLW_OK);
    tube->has_model = true;
    tube->model = fit->model;
    assert_int_equal(plw_tube_write(folder_path(folder, "MQ6GT.xml", to), tube, NULL), PLW_OK);
    plw_tube_free(tube);
    free(fit);
}

/* A memory checker may have put its own allocator before that of the test. */
static bool is_replaced(void) {
    const long before = blocks;
    char *volatile probe = strdup("probe");
    const bool counts = blocks != before;
    free(probe);
    return counts;
}

static void test_every_allocation_may_fail(void **state) {
    (void)state;
    if (!is_replaced()) {
        skip();
    }
    spare_the_xml_library();
    (void)gsl_set_error_handler_off();
    test_folder folder;
    char path[FOLDER_PATH_SIZE];
    folder_make(&folder);
    fit_test_tube(&folder);
    folder_path(&folder, "answer.xml", path);
    plw_error error = {.status = PLW_OK};
    if (whole_job(folder.path, path, &error) != PLW_OK) {
        fail_msg("%s", error.text);
    }
    char *right = file_text(path, NULL);
    long failed = 0;
    plw_status status = PLW_E_NO_MEMORY;
    for (long count = 1; status != PLW_OK; count++) {
        folder_write(&folder, "answer.xml", "old");
        error = (plw_error){.status = PLW_OK};
        const long blocks_before = blocks;
        until_failure = count;
        status = whole_job(folder.path, path, &error);
        until_failure = -1;
        if (blocks != blocks_before) {
            fail_msg("allocation %ld fails: %ld blocks are never freed", count, blocks - blocks_before);
        }
        char *text = file_text(path, NULL);
        if (status != PLW_OK) {
            failed++;
            /* A folder or file that the system cannot open for want of memory is a file that cannot be read. */
            const bool by_system = status == PLW_E_FILE && strstr(error.text, strerror(ENOMEM)) != NULL;
            if (status != PLW_E_NO_MEMORY && !by_system) {
                fail_msg("allocation %ld fails: status %d: %s", count, (int)status, error.text);
            }
            assert_int_equal(error.status, status);
            assert_string_equal(text, "old");
        } else {
            assert_string_equal(text, right);
        }
        free(text);
        assert_int_equal(folder_count(&folder), 2);
    }
    assert_true(failed > 100);
    free(right);
    folder_remove(&folder);
}

int main(void) {
    const struct CMUnitTest tests[] = {cmocka_unit_test(test_every_allocation_may_fail)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
