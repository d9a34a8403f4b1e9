/* Bursts found in continuous records whose bursts are known: pauses, other intervals, times that begin anew,
 * other frequencies and amplitudes at one interval; and none found where there is only one burst: noise,
 * drift, lost samples, jitter. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <cmocka.h>

#include "anelast/burst_find.h"
#include "check.h"

enum { ROWS = 40000, BOUNDARIES = 64 };

/* A record, and what the finder makes of it. */
typedef struct record {
    double time[ROWS], value[ROWS];
    size_t n;
    double t;                  /* of the next sample */
    size_t begins[BOUNDARIES]; /* where bursts were found to begin, but the first */
    int n_begin;
} record;

static double noise(void)
{
    double sum = 0;
    for (int i = 0; i < 12; i++)
        sum += rand() / (double)RAND_MAX;
    return sum - 6;
}

static size_t add_burst(record *made, double frequency, double interval, int n, double amplitude,
                        double sigma)
{
    size_t first = made->n;
    for (int i = 0; i < n; i++, made->n++) {
        made->time[made->n] = made->t;
        made->value[made->n] =
            40 + 1e-3 * i + amplitude * sin(2 * M_PI * frequency * interval * i + 1) + sigma * noise();
        made->t += interval;
    }
    return first;
}

/* As intake does: at a boundary the finder begins anew with the samples of the new burst. */
static void find(record *made, double resolution)
{
    an_burst_finder finder;
    an_burst_finder_reset(&finder);
    made->n_begin = 0;
    for (size_t i = 0; i < made->n; i++) {
        size_t n_new = an_burst_finder_add(&finder, made->time[i], resolution, made->value[i]);
        if (n_new == 0)
            continue;
        assert_true(made->n_begin < BOUNDARIES);
        made->begins[made->n_begin++] = i + 1 - n_new;
        an_burst_finder_reset(&finder);
        for (size_t k = i + 1 - n_new; k <= i; k++)
            assert_int_equal(an_burst_finder_add(&finder, made->time[k], resolution, made->value[k]), 0);
    }
}

static record *new_record(void)
{
    record *made = calloc(1, sizeof *made);
    assert_non_null(made);
    srand(7);
    return made;
}

static void pauses_and_rates(void **state)
{
    (void)state;
    static const double frequencies[] = {0.1, 0.3, 1, 3, 10, 0.1, 0.3};
    record *made = new_record();
    size_t begins[7];
    for (int k = 0; k < 7; k++) {
        begins[k] = add_burst(made, frequencies[k], 1 / (64 * frequencies[k]), 512, 10, 0.01);
        made->t += k == 4 ? 300 : k % 2 ? 2 : 0; /* some with a pause, some without */
    }
    find(made, 1e-6);
    assert_int_equal(made->n_begin, 6);
    for (int k = 0; k < 6; k++) { /* without a pause the sample between two bursts may belong to either */
        assert_true(made->begins[k] >= begins[k + 1] && made->begins[k] <= begins[k + 1] + 1);
    }
    free(made);
}

static void times_begin_anew(void **state)
{
    (void)state;
    record *made = new_record();
    add_burst(made, 1, 0.01, 500, 10, 0.01);
    made->t = 0;
    size_t second = add_burst(made, 1, 0.01, 500, 10, 0.01);
    find(made, 1e-6);
    assert_int_equal(made->n_begin, 1);
    assert_int_equal(made->begins[0], second);
    free(made);
}

static void frequencies_at_one_rate(void **state)
{
    (void)state;
    static const double frequencies[] = {1, 2, 5, 10, 20, 1};
    record *made = new_record();
    size_t begins[6];
    for (int k = 0; k < 6; k++)
        begins[k] = add_burst(made, frequencies[k], 0.001, (int)(8000 / frequencies[k]), 10, 0.02);
    find(made, 1e-6);
    assert_int_equal(made->n_begin, 5);
    for (int k = 0; k < 5; k++) { /* to within one cycle of the slower one */
        double cycle = 1000 / fmin(frequencies[k], frequencies[k + 1]);
        assert_close((double)made->begins[k], (double)begins[k + 1], cycle);
    }
    free(made);
}

static void amplitudes_at_one_rate(void **state)
{
    (void)state;
    record *made = new_record();
    add_burst(made, 2, 0.005, 1000, 1, 0.002);
    size_t second = add_burst(made, 2, 0.005, 1000, 8, 0.002);
    find(made, 1e-6);
    assert_int_equal(made->n_begin, 1);
    assert_close((double)made->begins[0], (double)second, 100);
    free(made);
}

static void one_burst_stays_one(void **state)
{
    (void)state;
    record *made = new_record();
    add_burst(made, 1, 0.01, 4000, 10, 0.5); /* much noise, and drift */
    for (size_t i = 0; i < made->n; i++)
        made->time[i] += 2e-4 * noise(); /* jitter of the clock */
    for (size_t i = 2000; i < made->n; i++)
        made->time[i] += 0.03; /* three samples lost */
    for (size_t i = 0; i < 300; i++)
        made->value[i] = 40 + (made->value[i] - 40) * (1 - exp(-(double)i / 80)); /* start from rest */
    find(made, 1e-6);
    assert_int_equal(made->n_begin, 0);
    free(made);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(pauses_and_rates),        cmocka_unit_test(times_begin_anew),
        cmocka_unit_test(frequencies_at_one_rate), cmocka_unit_test(amplitudes_at_one_rate),
        cmocka_unit_test(one_burst_stays_one),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
