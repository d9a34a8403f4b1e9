/* Decimal texts to numbers and back, exact and in no locale. Most numbers of a dump have at most 15 digits
 * and a small exponent: there one multiplication or division of exact doubles rounds correctly [CL90]. Up to
 * 19 digits one product with a power of five of 128 bits does [LE21]. What is longer, or has a huge exponent,
 * goes to the C library in the C locale, whose strtod rounds correctly too.
 */
#include "anelast/number.h"

#include "powers_of_five.h"

#include <limits.h>
#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* The longest text taken as one number: more digits than any double needs (767), with room for leading zeros.
 */
enum { LONGEST = 1024 };

/* A number taken apart: (-1)^negative * mantissa * 10^exponent. */
typedef struct pieces {
    bool negative;
    bool has_exponent;
    uint64_t mantissa; /* the first 19 digits that count */
    int n_digits;      /* digits that count: all after leading zeros */
    int decimals;      /* digits behind the mark */
    int exponent;      /* as written behind e, held within +-99999 */
} pieces;

static bool is_digit(char c)
{
    return c >= '0' && c <= '9';
}

/* Take in digits from s[i] on; returns how many there are. */
static size_t take_digits(const char *s, size_t n, size_t i, pieces *p)
{
    size_t first = i;
    for (; i < n && is_digit(s[i]); i++) {
        if (s[i] == '0' && p->n_digits == 0)
            continue;
        if (p->n_digits < 19)
            p->mantissa = p->mantissa * 10 + (uint64_t)(s[i] - '0');
        p->n_digits++;
    }
    return i - first;
}

/* Take in an exponent from s[i] on, behind the e; returns false where there is none. */
static bool take_exponent(const char *s, size_t n, size_t i, pieces *p)
{
    bool negative = i < n && s[i] == '-';
    if (i < n && (s[i] == '-' || s[i] == '+'))
        i++;
    if (i == n)
        return false;
    for (; i < n && is_digit(s[i]); i++)
        if (p->exponent < 10000)
            p->exponent = p->exponent * 10 + (s[i] - '0');
    if (negative)
        p->exponent = -p->exponent;
    p->has_exponent = true;
    return i == n;
}

/* Take a whole text apart; returns false where it is not a number. */
static bool take_apart(const char *s, size_t n, char mark, pieces *p)
{
    *p = (pieces){0};
    size_t i = 0;
    if (n > LONGEST)
        return false;
    if (i < n && (s[i] == '-' || s[i] == '+'))
        p->negative = s[i++] == '-';
    size_t whole = take_digits(s, n, i, p);
    i += whole;
    if (i < n && s[i] == mark) {
        size_t decimals = take_digits(s, n, ++i, p);
        i += decimals;
        p->decimals = (int)decimals;
    }
    if (whole == 0 && p->decimals == 0)
        return false;
    if (i < n && (s[i] == 'e' || s[i] == 'E'))
        return take_exponent(s, n, i + 1, p);
    return i == n;
}

/* The product of w and 5^q to 128 bits, of which the high word, and what it may still carry, suffice [LE21,
 * Section 5]. */
static uint64_t multiply(uint64_t w, int q, uint64_t *low)
{
    __extension__ typedef unsigned __int128 wide;
    const uint64_t *power = powers_of_five[q - POWER_FIRST];
    wide first = (wide)w * power[0];
    uint64_t high = (uint64_t)(first >> 64);
    *low = (uint64_t)first;
    if ((high & 0x1ff) == 0x1ff) {
        uint64_t second = (uint64_t)((wide)w * power[1] >> 64);
        *low += second;
        high += second > *low;
    }
    return high;
}

/* w * 10^q for w > 0 and q in the table, rounded to nearest, ties to even [LE21, Algorithm 1]. No value is
 * subnormal here. */
static double scale_exactly(uint64_t w, int q)
{
    int shift = __builtin_clzll(w);
    uint64_t low, high = multiply(w << shift, q, &low);
    int top = (int)(high >> 63);
    /* 54 bits: the 53 of a double and one to round by. */
    uint64_t m = high >> (top + 9);
    /* floor(log2 10^q) by a product that is exact for these q, and the place of the highest bit. */
    int exponent = (217706 * q - (q < 0 ? 65535 : 0)) / 65536 + 63 + top - shift;
    /* Just halfway: to even, by taking away the bit that would round up. */
    if (low <= 1 && q >= -4 && q <= 23 && (m & 3) == 1 && m << (top + 9) == high)
        m &= ~UINT64_C(1);
    m = (m + (m & 1)) >> 1;
    /* The bit of 2^52 in m adds the missing one to the exponent, a carry to 2^53 adds two. */
    uint64_t bits = ((uint64_t)(exponent + 1022) << 52) + m;
    double value;
    memcpy(&value, &bits, sizeof value);
    return value;
}

/* The slow way: the same text with a point, by strtod in the C locale. */
static bool read_slowly(const char *s, size_t n, char mark, double *value)
{
    char text[LONGEST + 1];
    memcpy(text, s, n);
    text[n] = '\0';
    char *comma = mark == '.' ? NULL : memchr(text, mark, n);
    if (comma)
        *comma = '.';
    /* glibc hands out its one C locale here: nothing is allocated. */
    locale_t c_locale = newlocale(LC_ALL_MASK, "C", (locale_t)0);
    if (!c_locale)
        return false;
    double read = strtod_l(text, NULL, c_locale);
    freelocale(c_locale);
    if (!isfinite(read))
        return false;
    *value = read;
    return true;
}

bool an_number_parse(const char *s, size_t n, char decimal_mark, double *value)
{
    static const double power[] = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,  1e8,  1e9,  1e10, 1e11,
                                   1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};
    pieces p;
    if (!take_apart(s, n, decimal_mark, &p))
        return false;
    int exponent = p.exponent - p.decimals;
    double m;
    if (p.n_digits <= 19 && p.mantissa <= UINT64_C(1) << 53 && exponent >= -22 && exponent <= 22) {
        m = (double)p.mantissa;
        m = exponent < 0 ? m / power[-exponent] : m * power[exponent];
    } else if (p.n_digits <= 19 && p.mantissa && exponent >= POWER_FIRST && exponent <= POWER_LAST) {
        m = scale_exactly(p.mantissa, exponent);
    } else {
        return read_slowly(s, n, decimal_mark, value);
    }
    *value = p.negative ? -m : m;
    return true;
}

bool an_number_decimal(const char *s, size_t n, char decimal_mark, int64_t *mantissa, int *decimals)
{
    pieces p;
    if (!take_apart(s, n, decimal_mark, &p) || p.has_exponent || p.n_digits > 18 || p.decimals > 18)
        return false;
    if (p.negative && p.mantissa == 0)
        return false;
    *mantissa = p.negative ? -(int64_t)p.mantissa : (int64_t)p.mantissa;
    *decimals = p.decimals;
    return true;
}

bool an_number_integer(const char *s, size_t n, int64_t *value)
{
    pieces p;
    if (!take_apart(s, n, '\0', &p) || p.has_exponent || p.decimals || p.n_digits > 19)
        return false;
    if (p.mantissa > (uint64_t)INT64_MAX + (p.negative ? 1 : 0))
        return false;
    *value = p.negative ? (int64_t)(0 - p.mantissa) : (int64_t)p.mantissa;
    return true;
}

size_t an_number_print(double value, char text[AN_NUMBER_SIZE])
{
    if (isnan(value))
        return (size_t)snprintf(text, AN_NUMBER_SIZE, "NaN");
    if (isinf(value))
        return (size_t)snprintf(text, AN_NUMBER_SIZE, value < 0 ? "-INF" : "INF");
    locale_t c_locale = newlocale(LC_ALL_MASK, "C", (locale_t)0);
    locale_t before = uselocale(c_locale);
    int n = 0;
    for (int digits = 15; digits <= 17; digits++) {
        double again = 0;
        n = snprintf(text, AN_NUMBER_SIZE, "%.*g", digits, value);
        if (an_number_parse(text, (size_t)n, '.', &again) && again == value)
            break;
    }
    uselocale(before);
    freelocale(c_locale);
    return (size_t)n;
}
