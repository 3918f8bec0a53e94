/* Comparison of a computed number with a wanted one: the tolerance and the source stand at the call.
 * SPDX-License-Identifier: GPL-3.0-or-later */
#ifndef TESTS_NEAR_H
#define TESTS_NEAR_H

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

/* Fails also on NaN and infinities. */
#define assert_near(got, want, tolerance, source)                                                                      \
    do {                                                                                                               \
        const double got_ = (got), want_ = (want), tolerance_ = (tolerance);                                           \
        if (!(isfinite(got_) && fabs(got_ - want_) <= tolerance_)) {                                                   \
            fail_msg("%s = %.12g, want %.12g +/- %.3g [%s]", #got, got_, want_, tolerance_, (source));                 \
        }                                                                                                              \
    } while (0)

/* The same with a tolerance relative to the wanted value. */
#define assert_near_relative(got, want, relative, source)                                                              \
    assert_near(got, want, fabs((double)(want)) * (relative), source)

#endif
