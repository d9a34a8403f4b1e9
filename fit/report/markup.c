/* Text into HTML and SVG: escaping, raised and lowered parts, and numbers as a reader writes them. Stage
 * report. Everything that a document or a person supplied passes markup_plain before it is shown; what could
 * not stand in XML (control characters, broken UTF-8) is shown as U+FFFD, never passed on. Numbers are built
 * from integers, so that no locale can put a comma into a coordinate.
 */
#include "fit/report/markup.h"

#include <math.h>
#include <stdbool.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#define RAISED_SCALE 0.74 /* size of superscripts and subscripts against the text around them */

/* Length of the well-formed UTF-8 sequence at text [RFC3629, sec. 4], 0 where it is none. */
static size_t utf8_length(const unsigned char *text)
{
    static const struct {
        unsigned char first_low, first_high, second_low, second_high, length;
    } rows[] = {
        {0x00, 0x7f, 0, 0xff, 1},    {0xc2, 0xdf, 0x80, 0xbf, 2}, {0xe0, 0xe0, 0xa0, 0xbf, 3},
        {0xe1, 0xec, 0x80, 0xbf, 3}, {0xed, 0xed, 0x80, 0x9f, 3}, {0xee, 0xef, 0x80, 0xbf, 3},
        {0xf0, 0xf0, 0x90, 0xbf, 4}, {0xf1, 0xf3, 0x80, 0xbf, 4}, {0xf4, 0xf4, 0x80, 0x8f, 4},
    };
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        if (text[0] < rows[i].first_low || text[0] > rows[i].first_high)
            continue;
        size_t length = rows[i].length;
        if (length > 1 && (text[1] < rows[i].second_low || text[1] > rows[i].second_high))
            return 0;
        for (size_t k = 2; k < length; k++)
            if (text[k] < 0x80 || text[k] > 0xbf)
                return 0;
        return length;
    }
    return 0;
}

/* One character, escaped; returns how many bytes it took. */
static size_t put_character(FILE *out, const char *text)
{
    const unsigned char *bytes = (const unsigned char *)text;
    size_t length = utf8_length(bytes);
    bool control = length == 1 && ((bytes[0] < 0x20 && !strchr("\t\n\r", bytes[0])) || bytes[0] == 0x7f);
    bool noncharacter = length == 3 && bytes[0] == 0xef && bytes[1] == 0xbf && bytes[2] >= 0xbe;
    if (length == 0 || control || noncharacter) {
        fputs("\xef\xbf\xbd", out);
        return length ? length : 1;
    }
    switch (bytes[0]) {
    case '&':
        fputs("&amp;", out);
        break;
    case '<':
        fputs("&lt;", out);
        break;
    case '>':
        fputs("&gt;", out);
        break;
    case '"':
        fputs("&quot;", out);
        break;
    case '\'':
        fputs("&#39;", out);
        break;
    default:
        fwrite(text, 1, length, out);
    }
    return length;
}

void markup_plain(FILE *out, const char *text)
{
    while (text && *text)
        text += put_character(out, text);
}

/* Characters up to the closing brace; returns what follows it. */
static const char *put_braced(FILE *out, const char *text)
{
    while (*text && *text != '}')
        text += put_character(out, text);
    return *text ? text + 1 : text;
}

/* One raised (sign '^') or lowered ('_') part that starts behind its brace; returns what follows. */
static const char *put_shifted(FILE *out, const char *text, char sign, markup_kind kind, double size)
{
    if (kind == MARKUP_HTML) {
        fputs(sign == '^' ? "<sup>" : "<sub>", out);
        text = put_braced(out, text);
        fputs(sign == '^' ? "</sup>" : "</sub>", out);
        return text;
    }
    double shift = (sign == '^' ? -0.38 : 0.22) * size;
    fputs("<tspan", out);
    markup_attribute(out, "dy", shift);
    markup_attribute(out, "font-size", RAISED_SCALE * size);
    fputc('>', out);
    text = put_braced(out, text);
    fputs("</tspan>", out);
    if (!*text)
        return text;
    /* Back to the base line: needs a tspan around at least one character, and a plain space would be
     * collapsed. */
    fputs("<tspan", out);
    markup_attribute(out, "dy", -shift);
    fputc('>', out);
    if (*text == ' ') {
        fputs("\xc2\xa0", out);
        text++;
    } else if (strncmp(text + 1, "{", 1) != 0) {
        text += put_character(out, text);
    } else {
        fputs("\xe2\x80\x8b", out); /* zero width space: another shifted part follows at once */
    }
    fputs("</tspan>", out);
    return text;
}

void markup_label(FILE *out, const char *text, markup_kind kind, double size)
{
    while (text && *text) {
        if ((*text == '^' || *text == '_') && text[1] == '{')
            text = put_shifted(out, text + 2, *text, kind, size);
        else
            text += put_character(out, text);
    }
}

double markup_width(const char *text, double size)
{
    double width = 0, scale = 1;
    while (text && *text) {
        if ((*text == '^' || *text == '_') && text[1] == '{') {
            scale = RAISED_SCALE;
            text += 2;
        } else if (*text == '}' && scale < 1) {
            scale = 1;
            text++;
        } else {
            size_t length = utf8_length((const unsigned char *)text);
            width += (strchr("il.,:;'|!()[]", *text) ? 0.36 : 0.59) * scale;
            text += length ? length : 1;
        }
    }
    return width * size;
}

void markup_fixed(FILE *out, double value, int decimals)
{
    int64_t unit = 1;
    for (int i = 0; i < decimals; i++)
        unit *= 10;
    int64_t scaled = llround(fabs(value) * (double)unit);
    if (value < 0 && scaled != 0)
        fputs("\xe2\x88\x92", out);
    fprintf(out, "%lld", (long long)(scaled / unit));
    if (decimals > 0)
        fprintf(out, ".%0*lld", decimals, (long long)(scaled % unit));
}

/* An integer in raised characters of Unicode. */
static void put_raised(FILE *out, int value)
{
    static const char *const digits[] = {"\xe2\x81\xb0", "\xc2\xb9",     "\xc2\xb2",     "\xc2\xb3",
                                         "\xe2\x81\xb4", "\xe2\x81\xb5", "\xe2\x81\xb6", "\xe2\x81\xb7",
                                         "\xe2\x81\xb8", "\xe2\x81\xb9"};
    if (value < 0)
        fputs("\xe2\x81\xbb", out);
    int magnitude = abs(value);
    if (magnitude >= 100)
        fputs(digits[magnitude / 100 % 10], out);
    if (magnitude >= 10)
        fputs(digits[magnitude / 10 % 10], out);
    fputs(digits[magnitude % 10], out);
}

/* Decimal exponent of the leading digit after rounding to `digits` digits. */
static int leading_exponent(double value, int digits)
{
    int exponent = (int)floor(log10(fabs(value)));
    double mantissa = fabs(value) / pow(10, exponent);
    double half = 0.5 * pow(10, 1 - digits);
    return mantissa >= 10 - half ? exponent + 1 : exponent;
}

static int clamp_decimals(int decimals)
{
    return decimals < 0 ? 0 : decimals > 12 ? 12 : decimals;
}

void markup_number(FILE *out, double value, int digits)
{
    if (!isfinite(value)) {
        fputs("\xe2\x80\x93", out);
        return;
    }
    if (value == 0) {
        fputs("0", out);
        return;
    }
    int exponent = leading_exponent(value, digits);
    if (exponent >= -3 && exponent < 5) {
        markup_fixed(out, value, clamp_decimals(digits - 1 - exponent));
        return;
    }
    markup_fixed(out, value / pow(10, exponent), digits - 1);
    fputs("\xc3\x97"
          "10",
          out);
    put_raised(out, exponent);
}

void markup_with_u(FILE *out, double value, double u)
{
    if (!isfinite(value) || !isfinite(u) || u <= 0) {
        markup_number(out, value, 4);
        return;
    }
    int last = leading_exponent(u, 2) - 1;
    double largest = fmax(fabs(value), u);
    int exponent = (int)floor(log10(largest));
    if (exponent >= -3 && exponent < 5) {
        markup_fixed(out, value, clamp_decimals(-last));
        fputs(" \xc2\xb1 ", out);
        markup_fixed(out, u, clamp_decimals(-last));
        return;
    }
    double scale = pow(10, exponent);
    fputs("(", out);
    markup_fixed(out, value / scale, clamp_decimals(exponent - last));
    fputs(" \xc2\xb1 ", out);
    markup_fixed(out, u / scale, clamp_decimals(exponent - last));
    fputs(")\xc3\x97"
          "10",
          out);
    put_raised(out, exponent);
}

void markup_coordinate(FILE *out, double value)
{
    double bounded = fmin(fmax(value, -1e9), 1e9);
    long long tenths = llround(bounded * 10);
    fprintf(out, "%s%lld", tenths < 0 ? "-" : "", llabs(tenths) / 10);
    if (tenths % 10)
        fprintf(out, ".%lld", llabs(tenths) % 10);
}

void markup_attribute(FILE *out, const char *name, double value)
{
    fprintf(out, " %s=\"", name);
    markup_coordinate(out, value);
    fputc('"', out);
}
