/* Escaping and numbers of the page. The escapes are those that XML 1.0 (W3C, sec. 2.4) and HTML (WHATWG,
 * sec. 13.2) need in text and in quoted attributes; what is broken UTF-8 is from RFC 3629, sec. 4 and 10; the
 * form of an uncertain value (two digits of u, the value to the same place) is JCGM 100:2008, sec. 7.2.6. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "fit/report/markup.h"

#include <locale.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static char shown[4096];

/* What a writer wrote, as text. */
static FILE *open_shown(void)
{
    memset(shown, 0, sizeof shown);
    FILE *out = fmemopen(shown, sizeof shown - 1, "w");
    assert_non_null(out);
    return out;
}

static void check_plain(const char *text, const char *expected)
{
    FILE *out = open_shown();
    markup_plain(out, text);
    fclose(out);
    assert_string_equal(shown, expected);
}

static void test_plain_escapes(void **state)
{
    (void)state;
    check_plain("<script>alert(\"x\" & 'y')</script>",
                "&lt;script&gt;alert(&quot;x&quot; &amp; &#39;y&#39;)&lt;/script&gt;");
    check_plain("a ]]> b", "a ]]&gt; b");
    check_plain("&amp;", "&amp;amp;");
    check_plain("Prüfling Ω 試料", "Prüfling Ω 試料");
    check_plain(NULL, "");
}

static void test_plain_replaces_what_xml_cannot_hold(void **state)
{
    (void)state;
    check_plain("a\x01"
                "b\x1b[31m\x7f",
                "a\xef\xbf\xbd"
                "b\xef\xbf\xbd[31m\xef\xbf\xbd");
    check_plain("\xc0\xbc"
                "script",
                "\xef\xbf\xbd\xef\xbf\xbdscript");                       /* overlong '<' */
    check_plain("\xed\xa0\x80", "\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd"); /* surrogate */
    check_plain("\xf5\x80\x80\x80x",
                "\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbdx"); /* above U+10FFFF */
    check_plain("cut \xe2\x82", "cut \xef\xbf\xbd\xef\xbf\xbd");
    check_plain("\xef\xbf\xbf", "\xef\xbf\xbd"); /* U+FFFF is no XML character */
}

static void test_label(void **state)
{
    (void)state;
    FILE *out = open_shown();
    markup_label(out, "a_{T} < 10^{3} & b", MARKUP_HTML, 10);
    fclose(out);
    assert_string_equal(shown, "a<sub>T</sub> &lt; 10<sup>3</sup> &amp; b");

    out = open_shown();
    markup_label(out, "10^{3} Pa", MARKUP_SVG, 10);
    fclose(out);
    assert_string_equal(
        shown, "10<tspan dy=\"-3.8\" font-size=\"7.4\">3</tspan><tspan dy=\"3.8\">\xc2\xa0</tspan>Pa");

    out = open_shown();
    markup_label(out, "x^{<b>", MARKUP_HTML, 10); /* a brace that is never closed */
    fclose(out);
    assert_string_equal(shown, "x<sup>&lt;b&gt;</sup>");
}

typedef struct number_row {
    double value, u;
    int digits;
    const char *expected;
} number_row;

static void test_numbers(void **state)
{
    (void)state;
    static const number_row rows[] = {
        {0, 0, 3, "0"},
        {1234.4, 0, 4, "1234"},
        {0.012345, 0, 3, "0.0123"},
        {-2.5, 0, 3,
         "\xe2\x88\x92"
         "2.50"},
        {9.9996, 0, 4, "10.00"},
        {99999.6, 0, 4,
         "1.000\xc3\x97"
         "10\xe2\x81\xb5"},
        {1.5e-7, 0, 2,
         "1.5\xc3\x97"
         "10\xe2\x81\xbb\xe2\x81\xb7"},
        {6.02214076e23, 0, 4,
         "6.022\xc3\x97"
         "10\xc2\xb2\xc2\xb3"},
        {1e300, 0, 1,
         "1\xc3\x97"
         "10\xc2\xb3\xe2\x81\xb0\xe2\x81\xb0"},
        {NAN, 0, 4, "\xe2\x80\x93"},
        {INFINITY, 0, 4, "\xe2\x80\x93"},
        {12.3456, 0.25, 0, "12.35 \xc2\xb1 0.25"},
        {100.02147, 0.00035, 0,
         "100.02147 \xc2\xb1 0.00035"}, /* JCGM 100:2008, 7.2.2, the mass of its example */
        {1234.4, 99.7, 0, "1234 \xc2\xb1 100"},
        {2.71e9, 3.1e7, 0,
         "(2.710 \xc2\xb1 0.031)\xc3\x97"
         "10\xe2\x81\xb9"},
        {5.5, NAN, 0, "5.500"},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        FILE *out = open_shown();
        if (rows[i].digits)
            markup_number(out, rows[i].value, rows[i].digits);
        else
            markup_with_u(out, rows[i].value, rows[i].u);
        fclose(out);
        assert_string_equal(shown, rows[i].expected);
    }
}

static void test_coordinates_know_no_locale(void **state)
{
    (void)state;
    setlocale(LC_ALL, "de_DE.UTF-8"); /* where it is installed */
    static const number_row rows[] = {
        {0.04, 0, 0, "0"},     {-0.04, 0, 0, "0"}, {12.34, 0, 0, "12.3"},      {-7.96, 0, 0, "-8"},
        {-0.25, 0, 0, "-0.3"}, {480, 0, 0, "480"}, {1e300, 0, 0, "1000000000"}};
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        FILE *out = open_shown();
        markup_coordinate(out, rows[i].value);
        fclose(out);
        assert_string_equal(shown, rows[i].expected);
    }
    setlocale(LC_ALL, "C");
}

static void test_width_counts_characters_not_bytes(void **state)
{
    (void)state;
    assert_true(fabs(markup_width("試料", 10) - markup_width("ab", 10)) < 1e-9);
    assert_true(markup_width("10^{3}", 10) < markup_width("103", 10));
    assert_true(markup_width("", 10) == 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_plain_escapes),
        cmocka_unit_test(test_plain_replaces_what_xml_cannot_hold),
        cmocka_unit_test(test_label),
        cmocka_unit_test(test_numbers),
        cmocka_unit_test(test_coordinates_know_no_locale),
        cmocka_unit_test(test_width_counts_characters_not_bytes),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
