/* Unit texts and quantities. A unit text is a row of the table, or rows joined by '.', '/' and whole
 * exponents as UCUM writes them ("N.s/m", "m/s2", "1/K"); people's '*', '·', '^', '²' and '³' are taken as
 * well.
 */
#include "anelast/quantity.h"

#include "anelast/number.h"
#include "units.h"

#include <stdio.h>
#include <string.h>

/* The text of a unit being read. */
typedef struct unit_text {
    const char *s;
    size_t n;
    size_t i; /* next byte */
} unit_text;

/* Take a fixed piece of text where it comes next. */
static bool take(unit_text *t, const char *piece)
{
    size_t n = strlen(piece);
    if (t->n - t->i < n || memcmp(t->s + t->i, piece, n) != 0)
        return false;
    t->i += n;
    return true;
}

static void skip_blanks(unit_text *t)
{
    while (t->i < t->n && (t->s[t->i] == ' ' || t->s[t->i] == '\t'))
        t->i++;
}

/* Bytes of a unit's code from here on: until an operator, an exponent or a blank; what stands in brackets
 * counts as one. */
static size_t code_length(const unit_text *t)
{
    size_t i = t->i;
    if (i < t->n && t->s[i] == '1' && (i + 1 == t->n || strchr("./* ", t->s[i + 1])))
        return 1;
    for (; i < t->n; i++) {
        const char *s = t->s + i;
        size_t left = t->n - i;
        if (*s == '[') {
            const char *closing = memchr(s, ']', left);
            return closing ? (size_t)(closing - t->s) + 1 - t->i : left;
        }
        bool two_bytes = left >= 2 && *s == '\xc2' && strchr("\xb7\xb2\xb3\xb9", s[1]);
        if (strchr("./*^+-() \t0123456789", *s) || two_bytes || (left >= 3 && memcmp(s, "\u207b", 3) == 0))
            break;
    }
    return i - t->i;
}

/* Take an exponent, 1 where there is none. Returns false where it is not a whole number below 10. */
static bool take_exponent(unit_text *t, int *exponent)
{
    *exponent = 1;
    if (take(t, "²") || take(t, "³")) {
        *exponent = t->s[t->i - 1] == '\xb2' ? 2 : 3;
        return true;
    }
    if (take(t, "⁻")) {
        *exponent = take(t, "¹") ? -1 : take(t, "²") ? -2 : take(t, "³") ? -3 : 0;
        return *exponent != 0;
    }
    bool marked = take(t, "^");
    int sign = 1;
    if (take(t, "-")) {
        sign = -1;
        marked = true;
    } else if (take(t, "+")) {
        marked = true;
    }
    if (t->i == t->n || t->s[t->i] < '1' || t->s[t->i] > '9')
        return !marked;
    *exponent = sign * (t->s[t->i++] - '0');
    return true;
}

/* Multiply a row, to a power, into a conversion. */
static void combine(an_conversion *c, const an_unit *unit, int exponent)
{
    for (int i = 0; i < AN_N_DIMENSIONS; i++)
        c->dimension[i] = (signed char)(c->dimension[i] + exponent * unit->dimension[i]);
    for (int i = 0; i < (exponent < 0 ? -exponent : exponent); i++) {
        c->factor *= exponent < 0 ? unit->divisor : unit->factor;
        c->divisor *= exponent < 0 ? unit->factor : unit->divisor;
    }
}

static an_status fail_part(const unit_text *t, size_t first, an_error *err)
{
    bool whole = first == 0;
    return an_fail(err, AN_E_UNIT, NULL,
                   "unit '%.*s' is not known%s%.*s%s; allowed are UCUM codes such as mm, N, MPa, Cel, N.s/m",
                   (int)t->n, t->s, whole ? "" : " (at '", whole ? 0 : (int)(t->n - first), t->s + first,
                   whole ? "" : "')");
}

/* Read rows joined by operators. */
static an_status read_combination(unit_text *t, an_conversion *conversion, an_error *err)
{
    *conversion = (an_conversion){.factor = 1, .divisor = 1};
    int sign = take(t, "/") ? -1 : 1;
    int n_terms = 0;
    double offset = 0;
    for (;; n_terms++) {
        skip_blanks(t);
        size_t first = t->i, n = code_length(t);
        const an_unit *unit = n ? an_unit_find(t->s + first, n) : NULL;
        int exponent = 1;
        t->i += n;
        if (!unit || !take_exponent(t, &exponent) || n_terms > 8)
            return fail_part(t, first, err);
        combine(conversion, unit, sign * exponent);
        offset = sign * exponent == 1 ? unit->offset : 0;
        skip_blanks(t);
        if (t->i == t->n)
            break;
        bool product = take(t, ".") || take(t, "*") || take(t, "·");
        if (!product && !take(t, "/"))
            return fail_part(t, t->i, err);
        sign = product ? 1 : -1;
    }
    if (n_terms == 0)
        conversion->offset = offset;
    return AN_OK;
}

an_status an_unit_read(const char *text, size_t n, an_conversion *conversion, an_error *err)
{
    while (n && (text[0] == ' ' || text[0] == '\t')) {
        text++;
        n--;
    }
    while (n && (text[n - 1] == ' ' || text[n - 1] == '\t'))
        n--;
    if (n > 64)
        return an_fail(err, AN_E_UNIT, NULL, "unit '%.64s...' is not known", text);
    const an_unit *unit = an_unit_find(n ? text : "1", n ? n : 1);
    if (!unit) {
        unit_text t = {text, n, 0};
        return read_combination(&t, conversion, err);
    }
    *conversion = (an_conversion){unit->factor, unit->divisor, unit->offset, {0}};
    memcpy(conversion->dimension, unit->dimension, sizeof conversion->dimension);
    return AN_OK;
}

/* Some units of a dimension, for a message: "m, mm, um". */
static void list_units(const signed char *dimension, const char *expected, char *list, size_t n_list)
{
    size_t n = 0, n_rows = 0;
    list[0] = '\0';
    for (const an_unit *unit; (unit = an_unit_row(n_rows)); n_rows++)
        if (memcmp(unit->dimension, dimension, AN_N_DIMENSIONS) == 0 && n + 16 < n_list)
            n += (size_t)snprintf(list + n, n_list - n, "%s%s", n ? ", " : "", unit->code);
    if (!n)
        snprintf(list, n_list, "%s or a multiple of it", expected);
}

an_status an_unit_convert(const char *unit, const char *expected, an_conversion *conversion, an_error *err)
{
    an_conversion got, wanted;
    AN_TRY(an_unit_read(unit, strlen(unit), &got, err));
    AN_TRY(an_unit_read(expected, strlen(expected), &wanted, err));
    if (wanted.factor != wanted.divisor || wanted.offset != 0)
        return an_fail(err, AN_E_USAGE, NULL, "'%s' is no SI unit to convert to", expected);
    if (memcmp(got.dimension, wanted.dimension, sizeof got.dimension) != 0) {
        char list[128];
        list_units(wanted.dimension, expected, list, sizeof list);
        return an_fail(err, AN_E_UNIT, NULL, "unit '%s' does not convert to %s; allowed are %s", unit,
                       expected, list);
    }
    *conversion = got;
    return AN_OK;
}

double an_unit_si(const an_conversion *conversion, double value)
{
    return value * conversion->factor / conversion->divisor + conversion->offset;
}

double an_unit_si_difference(const an_conversion *conversion, double value)
{
    return value * conversion->factor / conversion->divisor;
}

/* Bytes of the number that opens a text. */
static size_t number_length(const char *text)
{
    size_t i = strspn(text, "+-");
    i += strspn(text + i, "0123456789.");
    if (i && (text[i] == 'e' || text[i] == 'E')) {
        size_t digits = i + 1 + strspn(text + i + 1, "+-");
        if (text[digits] >= '0' && text[digits] <= '9')
            i = digits + strspn(text + digits, "0123456789");
    }
    return i;
}

/* Take "12.4 mm" apart into its number and the conversion of its unit. */
static an_status parse(const char *text, const char *expected, double *number, an_conversion *conversion,
                       an_error *err)
{
    text += strspn(text, " \t");
    size_t n = number_length(text);
    if (text[n] == ',')
        return an_fail(err, AN_E_VALUE, NULL,
                       "'%.80s' has a comma in its number; the decimal mark is a point", text);
    if (!an_number_parse(text, n, '.', number))
        return an_fail(err, AN_E_VALUE, NULL, "'%.80s' does not begin with a number", text);
    const char *unit = text + n + strspn(text + n, " \t");
    if (!*unit && strcmp(expected, "1") != 0)
        return an_fail(err, AN_E_UNIT, NULL,
                       "'%.80s' has no unit; write it behind the number, as in '%.40s %s'", text, text,
                       expected);
    return an_unit_convert(unit, expected, conversion, err);
}

an_status an_quantity_parse(const char *text, const char *expected, double *si, an_error *err)
{
    double number;
    an_conversion conversion;
    AN_TRY(parse(text, expected, &number, &conversion, err));
    *si = an_unit_si(&conversion, number);
    return AN_OK;
}

an_status an_quantity_parse_difference(const char *text, const char *expected, double *si, an_error *err)
{
    double number;
    an_conversion conversion;
    AN_TRY(parse(text, expected, &number, &conversion, err));
    if (conversion.offset != 0)
        return an_fail(err, AN_E_UNIT, NULL, "'%.80s' is a place on a scale; write a difference in %s", text,
                       expected);
    *si = an_unit_si_difference(&conversion, number);
    return AN_OK;
}
