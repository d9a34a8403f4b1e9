/* Decimal texts to numbers and back: bit for bit what strtod in the C locale gives, in every locale. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/number.h"

#include "scratch.h"

#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static uint64_t bits_of(double value)
{
    uint64_t bits;
    memcpy(&bits, &value, sizeof bits);
    return bits;
}

/* A generator with a fixed start, so that a failure comes back: xorshift64 (Marsaglia 2003). */
static uint64_t next_random(uint64_t *state)
{
    *state ^= *state << 13;
    *state ^= *state >> 7;
    *state ^= *state << 17;
    return *state;
}

static void assert_same_as_strtod(const char *text)
{
    double value = -1, expected = strtod(text, NULL);
    if (!an_number_parse(text, strlen(text), '.', &value) || bits_of(value) != bits_of(expected))
        fail_msg("'%s': got %.17g, strtod gives %.17g", text, value, expected);
}

/* Texts known to be hard: halfway between two doubles, or at the ends of the range; from memory, of the kind
 * that Clinger (1990) and Lemire (2021) discuss. The reference is the C library. */
static void hard_texts_read_as_strtod_reads_them(void **state)
{
    static const char *const texts[] = {"0",
                                        "-0",
                                        "0.0",
                                        "-0.0e9",
                                        "1",
                                        "0.1",
                                        ".5",
                                        "5.",
                                        "+3.25",
                                        "123456789012345678",
                                        "9007199254740993",
                                        "9007199254740992",
                                        "9007199254740994",
                                        "9007199254740991",
                                        "9223372036854775807",
                                        "18446744073709551615",
                                        "18446744073709551616",
                                        "2.2250738585072011e-308",
                                        "2.2250738585072014e-308",
                                        "4.9406564584124654e-324",
                                        "2.4703282292062327208e-324",
                                        "2.4703282292062328e-324",
                                        "1.7976931348623157e308",
                                        "1.7976931348623158e308",
                                        "0.500000000000000166533453693773481063544750213623046875",
                                        "1e22",
                                        "1e23",
                                        "1e-22",
                                        "1e-23",
                                        "9007199254740992e22",
                                        "9007199254740993e-22",
                                        "8.98846567431158e307",
                                        "6.631236846766476e-316",
                                        "3.2378839133029012895883524125015321748630094390569e-319",
                                        "7.2057594037927933e16",
                                        "89255e-22",
                                        "100000000000000016777215",
                                        "100000000000000016777216",
                                        "0.000000000000000000000000000000000000001234567",
                                        "1.00000000000000011102230246251565404236316680908203125",
                                        "1e-400",
                                        "0e99999",
                                        "1.5E+10",
                                        "2e-05"};
    (void)state;
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++)
        assert_same_as_strtod(texts[i]);
}

static void random_texts_read_as_strtod_reads_them(void **state)
{
    static const char *const formats[] = {"%.6f", "%.6e", "%.7g", "%.15g", "%.16g", "%.17g", "%.25e"};
    uint64_t seed = 0x9e3779b97f4a7c15;
    (void)state;
    for (int i = 0; i < 200000; i++) {
        char text[512];
        uint64_t bits = next_random(&seed);
        double value;
        memcpy(&value, &bits, sizeof value);
        if (!isfinite(value))
            continue;
        if (i % 2)
            value = (double)(int64_t)(bits >> 20) * 1e-9;
        snprintf(text, sizeof text, formats[i % 7], value);
        assert_same_as_strtod(text);
    }
}

/* Decimals of up to 22 digits with exponents all over the range, not made from doubles. */
static void random_digits_read_as_strtod_reads_them(void **state)
{
    uint64_t seed = 88172645463325252;
    (void)state;
    for (int i = 0; i < 200000; i++) {
        char text[64];
        uint64_t high = next_random(&seed), low = next_random(&seed);
        int n = snprintf(text, sizeof text, "%llu%llu", (unsigned long long)(high % 1000000),
                         (unsigned long long)low);
        n = 1 + (int)(next_random(&seed) % (uint64_t)n);
        snprintf(text + n, sizeof text - (size_t)n, "e%d", (int)(next_random(&seed) % 660) - 345);
        if (isfinite(strtod(text, NULL)))
            assert_same_as_strtod(text);
    }
}

static void what_is_no_number_is_refused(void **state)
{
    static const char *const texts[] = {
        "",      "-",        "+",    ".",   "e5",    "1e",    "1e+",
        "1,5",   "1.2.3",    "1 ",   " 1",  "0x10",  "nan",   "NaN",
        "inf",   "INF",      "1d5",  "--1", "1e5.0", "1e400", "-1e999999999999",
        "1_000", "\xc2\xb5", "12abc"};
    double value = 42;
    (void)state;
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++)
        if (an_number_parse(texts[i], strlen(texts[i]), '.', &value))
            fail_msg("'%s' was taken as %g", texts[i], value);
    assert_true(value == 42);
}

static void a_decimal_comma_is_taken_only_where_it_is_declared(void **state)
{
    double value = 0;
    (void)state;
    assert_true(an_number_parse("-1,25e2", 7, ',', &value));
    assert_true(value == -125);
    assert_false(an_number_parse("1.25", 4, ',', &value));
    assert_true(an_number_parse("0,12345678901234567", 19, ',', &value));
    assert_true(value == 0.12345678901234567);
}

static void fixed_decimals_become_integers_without_loss(void **state)
{
    int64_t mantissa = 0;
    int decimals = 0;
    (void)state;
    assert_true(an_number_decimal("-12.340", 7, '.', &mantissa, &decimals));
    assert_int_equal(mantissa, -12340);
    assert_int_equal(decimals, 3);
    assert_true(an_number_decimal("0,000500", 8, ',', &mantissa, &decimals));
    assert_int_equal(mantissa, 500);
    assert_int_equal(decimals, 6);
    assert_true(an_number_decimal("007", 3, '.', &mantissa, &decimals));
    assert_int_equal(mantissa, 7);
    assert_int_equal(decimals, 0);
    assert_false(an_number_decimal("1.5e3", 5, '.', &mantissa, &decimals));
    assert_false(an_number_decimal("-0.0", 4, '.', &mantissa, &decimals));
    assert_false(an_number_decimal("1234567890123456789", 19, '.', &mantissa, &decimals));
}

static void integers_stop_at_their_ends(void **state)
{
    int64_t value = 0;
    (void)state;
    assert_true(an_number_integer("-9223372036854775808", 20, &value));
    assert_true(value == INT64_MIN);
    assert_true(an_number_integer("9223372036854775807", 19, &value));
    assert_true(value == INT64_MAX);
    assert_false(an_number_integer("9223372036854775808", 19, &value));
    assert_false(an_number_integer("1.0", 3, &value));
    assert_false(an_number_integer("1e3", 3, &value));
    assert_false(an_number_integer("", 0, &value));
}

static void printed_numbers_read_back_to_the_same_bits(void **state)
{
    uint64_t seed = 362436069;
    (void)state;
    for (int i = 0; i < 100000; i++) {
        char text[AN_NUMBER_SIZE];
        uint64_t bits = next_random(&seed);
        double value;
        memcpy(&value, &bits, sizeof value);
        if (!isfinite(value))
            continue;
        size_t n = an_number_print(value, text);
        assert_int_equal(n, strlen(text));
        assert_true(bits_of(strtod(text, NULL)) == bits);
    }
}

static void print(double value, const char *expected)
{
    char text[AN_NUMBER_SIZE];
    an_number_print(value, text);
    assert_string_equal(text, expected);
}

static void printed_numbers_are_short(void **state)
{
    (void)state;
    print(0.1, "0.1");
    print(0.0124, "0.0124");
    print(298.15, "298.15");
    print(1e9, "1000000000");
    print(-0.0, "-0");
    print(1.0 / 3, "0.3333333333333333");
    print(5e-324, "4.94065645841247e-324");
    print(INFINITY, "INF");
    print(NAN, "NaN");
}

/* Whether a locale whose decimal mark is a comma is in force now; it is made here, from the sources of the C
 * library. */
static bool enter_comma_locale(void)
{
    if (system("localedef -i de_DE -f UTF-8 ./de_DE.UTF-8 >/dev/null 2>&1") != 0)
        return false;
    setenv("LOCPATH", ".", 1);
    return setlocale(LC_ALL, "de_DE.UTF-8") && *localeconv()->decimal_point == ',';
}

static void the_locale_does_not_matter(void **state)
{
    (void)state;
    double value = 0, small = 0;
    char text[AN_NUMBER_SIZE] = "";
    bool comma = enter_comma_locale();
    bool read = an_number_parse("1234567890.12345678901234", 25, '.', &value) &&
                an_number_parse("1e-300", 6, '.', &small);
    bool wrong = an_number_parse("1,5", 3, '.', &value);
    an_number_print(0.0124, text);
    setlocale(LC_ALL, "C");
    int removed = system("rm -rf ./de_DE.UTF-8");
    assert_int_equal(removed, 0);
    assert_true(read && !wrong && small == 1e-300);
    assert_true(value == 1234567890.12345678901234);
    assert_string_equal(text, "0.0124");
    if (!comma)
        skip();
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(hard_texts_read_as_strtod_reads_them),
        cmocka_unit_test(random_texts_read_as_strtod_reads_them),
        cmocka_unit_test(random_digits_read_as_strtod_reads_them),
        cmocka_unit_test(what_is_no_number_is_refused),
        cmocka_unit_test(a_decimal_comma_is_taken_only_where_it_is_declared),
        cmocka_unit_test(fixed_decimals_become_integers_without_loss),
        cmocka_unit_test(integers_stop_at_their_ends),
        cmocka_unit_test(printed_numbers_read_back_to_the_same_bits),
        cmocka_unit_test(printed_numbers_are_short),
        cmocka_unit_test(the_locale_does_not_matter),
    };
    return cmocka_run_group_tests(tests, scratch_enter, scratch_leave);
}
