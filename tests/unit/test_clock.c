/* The clock behind printed times: made by rounding known clocks, found again within half a last digit
 * everywhere; refused where no clock has the times. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <cmocka.h>

#include "acquire/dump/clock.h"
#include "check.h"

enum { N = 2048 };

/* Print start + i interval with a format, as dumps do, and read it back. */
static void print_times(double start, double interval, const char *format, int significant, double *time,
                        double *tolerance)
{
    for (int i = 0; i < N; i++) {
        char text[64];
        snprintf(text, sizeof text, format, start + i * interval);
        time[i] = strtod(text, NULL);
        double place =
            significant ? pow(10, (time[i] > 0 ? floor(log10(time[i])) : 0) + 1 - significant) : 1e-5;
        tolerance[i] = 0.5 * place;
    }
}

static void check_found(double start, double interval, const char *format, int significant)
{
    static double time[N], tolerance[N];
    double found_start, found_interval;
    print_times(start, interval, format, significant, time, tolerance);
    assert_true(an_clock_fit(time, tolerance, NULL, N, &found_start, &found_interval));
    for (int i = 0; i < N; i++) {
        double model = found_start + i * found_interval;
        assert_close(model, time[i], tolerance[i] * 1.001);
    }
    /* half a digit over the whole record bounds the error of the interval; the fit must do far better than
     * that */
    assert_close(found_interval, interval, 2 * tolerance[N - 1] / (N - 1));
}

static void fixed_decimals(void **state)
{
    (void)state;
    check_found(300, 0.078125, "%.5f", 0);
    check_found(4998.2, 0.00078125, "%.5f", 0); /* every fourth time is an exact half of the last digit */
    check_found(12.3, 0.0058244, "%.5f", 0);
    check_found(7, 1.0 / 3, "%.5f", 0);
}

static void significant_digits(void **state)
{
    (void)state;
    check_found(0, 52.0 + 1.0 / 12, "%.6g", 6);
    check_found(0, 0.52083333, "%.6g", 6);
}

static void no_clock(void **state)
{
    (void)state;
    static double time[N], tolerance[N];
    double start, interval;
    print_times(0, 0.01, "%.5f", 0, time, tolerance);
    time[1000] += 2.1e-5; /* one time is off by two last digits */
    assert_false(an_clock_fit(time, tolerance, NULL, N, &start, &interval));
    print_times(0, 0.01, "%.5f", 0, time, tolerance);
    for (int i = 1024; i < N; i++)
        time[i] += 0.01; /* a sample was lost */
    assert_false(an_clock_fit(time, tolerance, NULL, N, &start, &interval));
    assert_false(an_clock_fit(time, tolerance, NULL, 1, &start, &interval));
    for (int i = 0; i < N; i++)
        time[i] = 5; /* standing still */
    assert_false(an_clock_fit(time, tolerance, NULL, N, &start, &interval));
}

static void with_gaps(void **state)
{
    (void)state;
    static double time[N], tolerance[N];
    static size_t index[N];
    double start, interval;
    print_times(20, 0.01, "%.5f", 0, time, tolerance);
    size_t kept = 0;
    for (size_t i = 0; i < N; i++)
        if (i % 7 != 3) {
            time[kept] = time[i];
            index[kept++] = i;
        }
    assert_true(an_clock_fit(time, tolerance, index, kept, &start, &interval));
    assert_close(start, 20, 5e-6);
    assert_close(interval, 0.01, 5e-9);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(fixed_decimals),
        cmocka_unit_test(significant_digits),
        cmocka_unit_test(no_clock),
        cmocka_unit_test(with_gaps),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
