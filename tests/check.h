/** check.h - what every test program shares: cmocka and assertions on real numbers. */
#ifndef TESTS_CHECK_H
#define TESTS_CHECK_H

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "mirrorband/core.h"

/** |value - expected| <= tolerance, with the three numbers in the message. */
#define assert_near(value, expected, tolerance)                                                              \
    do {                                                                                                     \
        const double near_value = (double)(value), near_expected = (double)(expected);                       \
        if (!(fabs(near_value - near_expected) <= (double)(tolerance))) {                                    \
            fail_msg("%s is %.9g, expected %.9g +- %.3g", #value, near_value, near_expected,                 \
                     (double)(tolerance));                                                                   \
        }                                                                                                    \
    } while (0)

/** value <= limit (use for levels in dB that must stay below a bound). */
#define assert_at_most(value, limit)                                                                         \
    do {                                                                                                     \
        const double most_value = (double)(value);                                                           \
        if (!(most_value <= (double)(limit))) {                                                              \
            fail_msg("%s is %.9g, must be at most %.9g", #value, most_value, (double)(limit));               \
        }                                                                                                    \
    } while (0)

/** value >= limit. */
#define assert_at_least(value, limit)                                                                        \
    do {                                                                                                     \
        const double least_value = (double)(value);                                                          \
        if (!(least_value >= (double)(limit))) {                                                             \
            fail_msg("%s is %.9g, must be at least %.9g", #value, least_value, (double)(limit));             \
        }                                                                                                    \
    } while (0)

/** The call returns MB_OK; else the sentence of the fault is shown. */
#define assert_ok(call)                                                                                      \
    do {                                                                                                     \
        mb_status ok_status = (call);                                                                        \
        if (ok_status != MB_OK) {                                                                            \
            fail_msg("%s: %s", #call, mb_last_fault()->text);                                                \
        }                                                                                                    \
    } while (0)

/** The call fails with the given status, names the given field and says something. */
#define assert_fault(call, expected_status, expected_field)                                                  \
    do {                                                                                                     \
        assert_int_equal((call), (expected_status));                                                         \
        assert_string_equal(mb_last_fault()->field, (expected_field));                                       \
        assert_true(strlen(mb_last_fault()->text) > 10);                                                     \
    } while (0)

#endif
