/* tests/check.h: comparison of numbers for every test. A comparison with NaN on either side fails: the
 * difference is tested as !(|a - b| <= tolerance), never as |a - b| > tolerance. Include after cmocka.h. */
#ifndef ANELAST_TESTS_CHECK_H
#define ANELAST_TESTS_CHECK_H

#include <math.h>
#include <stdbool.h>
#include <stdio.h>

/* check_is_close: |actual - expected| <= tolerance, all in one unit; equal infinities are close. */
static inline bool check_is_close(double actual, double expected, double tolerance)
{
    if (isinf(expected) && actual == expected)
        return true;
    if (!(fabs(actual - expected) <= tolerance))
        return false;
    return true;
}

static inline bool check_report(bool close, const char *what, double actual, double expected,
                                double tolerance)
{
    if (!close)
        fprintf(stderr, "%s: got %.12g, expected %.12g +- %.3g\n", what, actual, expected, tolerance);
    return close;
}

/* assert_close: absolute tolerance in the numbers' own unit; assert_relative: tolerance as a fraction of
 * expected. */
#define assert_close(actual, expected, tolerance)                                                            \
    do {                                                                                                     \
        double check_a = (actual), check_e = (expected), check_t = (tolerance);                              \
        if (!check_report(check_is_close(check_a, check_e, check_t), #actual, check_a, check_e, check_t))    \
            fail();                                                                                          \
    } while (0)
#define assert_relative(actual, expected, fraction)                                                          \
    do {                                                                                                     \
        double check_re = (expected);                                                                        \
        assert_close((actual), check_re, (fraction)*fabs(check_re));                                         \
    } while (0)

#endif
