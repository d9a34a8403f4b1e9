/* Columns keep what a dump prints, to the last bit: against strtod in the C locale, which IEEE 754 fixes. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <cmocka.h>

#include "acquire/dump/column.h"
#include "check.h"

static const an_conversion micrometre = {.factor = 1, .divisor = 1e6};

static void add(an_column *column, const char *text)
{
    an_error err = {0};
    assert_int_equal(an_column_add_text(column, text, strlen(text), '.', NULL, &err), AN_OK);
}

static void check_values(const an_column *column, const char *const *texts, size_t n)
{
    assert_int_equal(column->n, n);
    for (size_t i = 0; i < n; i++)
        assert_true(an_column_value(column, i) == strtod(texts[i], NULL));
}

static void decimals_stay_integers(void **state)
{
    (void)state;
    static const char *const texts[] = {"81.4056", "117.839", "22.48", "-1.64209", "0", "-200", "7"};
    enum { N = sizeof texts / sizeof *texts };
    an_column column;
    an_error err = {0};
    an_signal signal = AN_SIGNAL_NONE;
    double si[N];
    an_column_init(&column, false);
    for (size_t i = 0; i < N; i++)
        add(&column, texts[i]);
    assert_false(column.real);
    assert_int_equal(column.decimals, 5);
    check_values(&column, texts, N);
    assert_int_equal(an_column_signal(&column, AN_SIGNAL_DISPLACEMENT, &micrometre, 1, &signal, &err), AN_OK);
    assert_int_equal(signal.coding, AN_CODING_INT32);
    assert_int_equal(((int32_t *)signal.data)[3], -164209);
    an_signal_decode(&signal, si);
    for (size_t i = 0; i < N;
         i++) /* two roundings: divisor 1e11 holds exactly, the quotient is rounded once */
        assert_relative(si[i], strtod(texts[i], NULL) / 1e6, 3e-16);
    an_signal_clear(&signal);
    an_column_release(&column);
}

static void small_integers_take_two_bytes(void **state)
{
    (void)state;
    an_column column;
    an_error err = {0};
    an_signal signal = AN_SIGNAL_NONE;
    an_column_init(&column, false);
    add(&column, "-30.13");
    add(&column, "327.67");
    assert_int_equal(an_column_signal(&column, AN_SIGNAL_TEMPERATURE,
                                      &(an_conversion){.factor = 1, .divisor = 1}, 1, &signal, &err),
                     AN_OK);
    assert_int_equal(signal.coding, AN_CODING_INT16);
    an_signal_clear(&signal);
    an_column_release(&column);
}

static void exponents_become_doubles(void **state)
{
    (void)state;
    static const char *const texts[] = {"0.1",  "12.345678", "3.235776273e-05",
                                        "-2.5", "1e300",     "0.30000000000000004"};
    enum { N = sizeof texts / sizeof *texts };
    an_column column;
    an_column_init(&column, false);
    for (size_t i = 0; i < N; i++)
        add(&column, texts[i]);
    assert_true(column.real);
    check_values(&column, texts, N);
    an_column_release(&column);
}

/* Random decimals of many lengths, in both modes. */
static void every_last_bit(void **state)
{
    (void)state;
    enum { N = 20000 };
    static char texts[N][32];
    const char *pointers[N];
    an_column column;
    srand(20260301);
    an_column_init(&column, false);
    for (size_t i = 0; i < N; i++) {
        int decimals = rand() % 9;
        double value = (rand() - RAND_MAX / 2) / (double)(1 + rand() % 100000);
        snprintf(texts[i], sizeof texts[i], i < N / 2 ? "%.*f" : "%.*e", decimals, value);
        if (strncmp(texts[i], "-0", 2) == 0 && strtod(texts[i], NULL) == 0)
            strcpy(texts[i], "0");
        pointers[i] = texts[i];
        add(&column, texts[i]);
        if (i == N / 2 - 1) {
            assert_false(column.real);
            check_values(&column, pointers, N / 2);
        }
    }
    assert_true(column.real);
    check_values(&column, pointers, N);
    an_column_release(&column);
}

static void texts_are_no_numbers(void **state)
{
    (void)state;
    static const char *const texts[] = {"", "1,2", "1 2", "12mm", "--1", "nan", "0x10", "1e", "."};
    an_column column;
    an_error err = {0};
    an_column_init(&column, false);
    for (size_t i = 0; i < sizeof texts / sizeof *texts; i++)
        assert_int_equal(an_column_add_text(&column, texts[i], strlen(texts[i]), '.', NULL, &err),
                         AN_E_VALUE);
    assert_int_equal(column.n, 0);
    an_column_release(&column);
}

static void tails_and_gaps(void **state)
{
    (void)state;
    an_column column, tail;
    an_error err = {0};
    an_column_init(&column, true);
    an_column_init(&tail, true);
    for (int i = 0; i < 3000; i++)
        assert_int_equal(an_column_add_integer(&column, i, &err), AN_OK);
    assert_int_equal(an_column_move_tail(&column, 2990, &tail, &err), AN_OK);
    assert_int_equal(column.n, 2990);
    assert_int_equal(tail.n, 10);
    assert_true(an_column_value(&tail, 0) == 2990);
    size_t rows[] = {0, 5, 2989};
    an_column_drop(&column, rows, 3);
    assert_int_equal(column.n, 2987);
    assert_true(an_column_value(&column, 0) == 1 && an_column_value(&column, 4) == 6);
    an_column_release(&column);
    an_column_release(&tail);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(decimals_stay_integers),   cmocka_unit_test(small_integers_take_two_bytes),
        cmocka_unit_test(exponents_become_doubles), cmocka_unit_test(every_last_bit),
        cmocka_unit_test(texts_are_no_numbers),     cmocka_unit_test(tails_and_gaps),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
