/* A whole process of `platewright design` beside `xmllint --noout` on the same tube files, in turn, in one run.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#include <fcntl.h>
#include <glob.h>
#include <spawn.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/wait.h>
#include <time.h>
#include <unistd.h>

enum { RUNS = 41, WORDS_MOST = 256 };

extern char **environ;

static double seconds_of(char *const words[]) {
    posix_spawn_file_actions_t actions;
    posix_spawn_file_actions_init(&actions);
    posix_spawn_file_actions_addopen(&actions, STDOUT_FILENO, "/dev/null", O_WRONLY, 0);
    posix_spawn_file_actions_addopen(&actions, STDERR_FILENO, "/dev/null", O_WRONLY, 0);
    struct timespec start;
    struct timespec end;
    clock_gettime(CLOCK_MONOTONIC, &start);
    pid_t child;
    const int failed = posix_spawnp(&child, words[0], &actions, NULL, words, environ);
    posix_spawn_file_actions_destroy(&actions);
    if (failed != 0) {
        fprintf(stderr, "%s cannot be started\n", words[0]);
        exit(3);
    }
    int status;
    waitpid(child, &status, 0);
    clock_gettime(CLOCK_MONOTONIC, &end);
    return (double)(end.tv_sec - start.tv_sec) + 1e-9 * (double)(end.tv_nsec - start.tv_nsec);
}

static int ascending(const void *left, const void *right) {
    const double a = *(const double *)left;
    const double b = *(const double *)right;
    return (a > b) - (a < b);
}

static double median(double values[RUNS]) {
    qsort(values, RUNS, sizeof values[0], ascending);
    return values[RUNS / 2];
}

/* In turn, so that a change of the machine's speed meets both. */
static void compare(const char *title, char *const ours[], char *const theirs[]) {
    double own[RUNS];
    double other[RUNS];
    double ratio[RUNS];
    for (int run = 0; run < RUNS; run++) {
        own[run] = seconds_of(ours);
        other[run] = seconds_of(theirs);
        ratio[run] = own[run] / other[run];
    }
    printf("%-46s %6.2f ms, xmllint --noout %6.2f ms, ratio %.2f (goal: at most 3)\n", title, 1e3 * median(own),
           1e3 * median(other), median(ratio));
}

static char program[] = PROGRAM;
static char folder[] = TUBEDATA;
static char own_file[] = TUBEDATA "/6V6GT.xml";
static char schema_file[] = TUBEDATA "/tube.xsd";

int main(void) {
    char *const design[] = {program,
                            (char[]){"design"},
                            (char[]){"--tube"},
                            (char[]){"6V6GT"},
                            (char[]){"--supply"},
                            (char[]){"285V"},
                            (char[]){"--load"},
                            (char[]){"5k"},
                            (char[]){"--tubes"},
                            folder,
                            NULL};
    char *const one[] = {(char[]){"xmllint"}, (char[]){"--noout"}, own_file, NULL};
    char *const checked[] = {
        (char[]){"xmllint"}, (char[]){"--noout"}, (char[]){"--schema"}, schema_file, own_file, NULL};
    compare("design, against the tube's file alone:", design, one);
    compare("design, against it checked by the schema:", design, checked);
    glob_t all;
    if (glob(TUBEDATA "/*.xml", 0, NULL, &all) == 0 && all.gl_pathc + 5 < WORDS_MOST) {
        /* The list reads every file and checks it by the schema, as the second does. */
        char *plain[WORDS_MOST] = {(char[]){"xmllint"}, (char[]){"--noout"}};
        char *by_schema[WORDS_MOST] = {(char[]){"xmllint"}, (char[]){"--noout"}, (char[]){"--schema"}, schema_file};
        for (size_t index = 0; index < all.gl_pathc; index++) {
            plain[index + 2] = by_schema[index + 4] = all.gl_pathv[index];
        }
        compare("design, against every tube file:", design, plain);
        char *const list[] = {program, (char[]){"tubes"}, (char[]){"--tubes"}, folder, NULL};
        compare("list of all tubes, against all by the schema:", list, by_schema);
    }
    globfree(&all);
    return 0;
}
