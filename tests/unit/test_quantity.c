/* Units and quantities, against the conversion factors of NIST SP 811 (2008), appendix B, from memory, and
 * what people type. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/quantity.h"

#include "../check.h"

#include <string.h>

static void in_si(double value, const char *unit, const char *expected_unit, double expected,
                  double tolerance)
{
    an_conversion conversion;
    an_error err = {0};
    if (an_unit_convert(unit, expected_unit, &conversion, &err) != AN_OK)
        fail_msg("%s", err.text);
    assert_relative(an_unit_si(&conversion, value), expected, tolerance);
}

/* NIST SP 811, appendix B.8: seven digits are given, marked exact where they are. */
static void factors_are_those_of_the_handbook(void **state)
{
    (void)state;
    in_si(1, "[in_i]", "m", 0.0254, 0);
    in_si(1, "[mil_i]", "m", 2.54e-5, 1e-15);
    in_si(1, "[lbf_av]", "N", 4.448222, 1e-6);
    in_si(1, "[psi]", "Pa", 6.894757e3, 1e-7);
    in_si(1, "kgf", "N", 9.80665, 0);
    in_si(1, "[lb_av]", "kg", 0.45359237, 0);
    in_si(1, "deg", "rad", 1.745329e-2, 1e-6);
    in_si(32, "[degF]", "K", 273.15, 1e-15);
    in_si(-459.67, "[degF]", "K", 0, 1e-12);
    in_si(212, "degF", "K", 373.15, 1e-15);
    in_si(1, "bar", "Pa", 1e5, 0);
}

static void what_people_type_is_known(void **state)
{
    (void)state;
    in_si(25, "°C", "K", 298.15, 0);
    in_si(25, "degC", "K", 298.15, 0);
    in_si(25, "C", "K", 298.15, 0);
    in_si(3, "µm", "m", 3e-6, 0);
    in_si(3, "\xce\xbcm", "m", 3e-6, 0);
    in_si(3, "um", "m", 3e-6, 0);
    in_si(2, " mm ", "m", 2e-3, 0);
    in_si(4, "%", "1", 0.04, 0);
    in_si(4, "", "1", 4, 0);
    in_si(7, "N/mm2", "Pa", 7e6, 1e-15);
    in_si(7, "N/mm^2", "Pa", 7e6, 1e-15);
    in_si(7, "N/mm²", "Pa", 7e6, 1e-15);
    in_si(7, "kg/m³", "kg/m3", 7, 0);
    in_si(7, "g/cm3", "kg/m3", 7e3, 1e-15);
    in_si(7, "N*s/m", "N.s/m", 7, 0);
    in_si(7, "N·s/m", "N.s/m", 7, 0);
    in_si(214, "kJ/mol", "J/mol", 214e3, 0);
    in_si(7, "mm/N", "m/N", 7e-3, 1e-15);
    in_si(7, "mm.N⁻¹", "m/N", 7e-3, 1e-15);
}

static void combinations_multiply(void **state)
{
    (void)state;
    in_si(6, "K/min", "K/s", 0.1, 1e-15);
    in_si(6, "degC/min", "K/s", 0.1, 1e-15);
    in_si(1, "1/K", "1/K", 1, 0);
    in_si(1, "/K", "1/K", 1, 0);
    in_si(1, "K-1", "1/K", 1, 0);
    in_si(1, "ms-1", "1/s", 1000, 1e-15);
    in_si(1, "kN/mm", "N/m", 1e6, 1e-15);
    in_si(1, "N.m/deg", "N.m/rad", 57.29577951308232, 1e-15);
    in_si(1, "J", "N.m", 1, 0);
    in_si(1, "Pa.s", "kg/m.s-1", 1, 0);
    in_si(1, "um/m", "1", 1e-6, 1e-15);
}

static void wrong(const char *unit, const char *expected, const char *named)
{
    an_conversion conversion;
    an_error err = {0};
    assert_int_equal(an_unit_convert(unit, expected, &conversion, &err), AN_E_UNIT);
    if (!strstr(err.text, named) || !strstr(err.text, "allowed are"))
        fail_msg("the message does not name '%s': %s", named, err.text);
}

static void wrong_units_are_refused_by_name(void **state)
{
    (void)state;
    wrong("furlong", "m", "'furlong'");
    wrong("N.furlong", "N.m", "'furlong'");
    wrong("N", "m", "m, dm, cm, mm, um");
    wrong("Hz", "rad/s", "rad/s");
    wrong("mm/", "m", "mm/");
    wrong("m/(N)", "m/N", "m/(N)");
    wrong("m^", "m", "m^");
    wrong("m0", "m", "m0");
    wrong("1 000", "1", "1 000");
}

static void quantities_are_read_with_their_unit(void **state)
{
    double si = 0;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_quantity_parse("12.4 mm", "m", &si, &err), AN_OK);
    assert_true(si == 0.0124);
    assert_int_equal(an_quantity_parse("12.4mm", "m", &si, &err), AN_OK);
    assert_true(si == 0.0124);
    assert_int_equal(an_quantity_parse("-40 [degF]", "K", &si, &err), AN_OK);
    assert_close(si, 233.15, 1e-10);
    assert_int_equal(an_quantity_parse("1.5e3 um", "m", &si, &err), AN_OK);
    assert_close(si, 1.5e-3, 1e-18);
    assert_int_equal(an_quantity_parse("0.35", "1", &si, &err), AN_OK);
    assert_true(si == 0.35);
}

static void refuse(const char *text, const char *unit, an_status status, const char *named)
{
    double si = 42;
    an_error err = {0};
    assert_int_equal(an_quantity_parse(text, unit, &si, &err), status);
    assert_true(si == 42);
    if (!strstr(err.text, named))
        fail_msg("the message does not name '%s': %s", named, err.text);
}

static void bad_quantities_are_refused_by_name(void **state)
{
    double si = 42;
    an_error err = {0};
    (void)state;
    refuse("12,4 mm", "m", AN_E_VALUE, "comma");
    refuse("12.4", "m", AN_E_UNIT, "no unit");
    refuse("mm", "m", AN_E_VALUE, "number");
    refuse("12.4 N", "m", AN_E_UNIT, "'N'");
    refuse("", "m", AN_E_VALUE, "number");
    assert_int_equal(an_quantity_parse_difference("0.5 degC", "K", &si, &err), AN_E_UNIT);
    assert_int_equal(an_quantity_parse_difference("0.5 K", "K", &si, &err), AN_OK);
    assert_true(si == 0.5);
}

/* A code or alias that stands for two units would be read by the order of the table. */
static void no_code_stands_twice(void **state)
{
    const an_unit *a, *b;
    (void)state;
    for (size_t i = 0; (a = an_unit_row(i)); i++) {
        an_conversion conversion;
        assert_int_equal(an_unit_read(a->code, strlen(a->code), &conversion, NULL), AN_OK);
        assert_true(conversion.factor == a->factor && conversion.divisor == a->divisor);
        for (size_t k = 0; (b = an_unit_row(k)); k++) {
            char words[200], *rest = words;
            snprintf(words, sizeof words, "%s %s", b->code, b->aliases);
            for (char *word; k != i && (word = strsep(&rest, " "));)
                if (*word && strcmp(word, a->code) == 0)
                    fail_msg("'%s' stands for two units", word);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(factors_are_those_of_the_handbook),
        cmocka_unit_test(what_people_type_is_known),
        cmocka_unit_test(combinations_multiply),
        cmocka_unit_test(wrong_units_are_refused_by_name),
        cmocka_unit_test(quantities_are_read_with_their_unit),
        cmocka_unit_test(bad_quantities_are_refused_by_name),
        cmocka_unit_test(no_code_stands_twice),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
