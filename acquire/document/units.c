/* The unit table: UCUM codes, what people type for them, and how they become SI. Factors are exact by
 * definition: the inch and pound by the international agreement of 1959, standard gravity 9.80665 m/s2
 * [BIPM-SI]; the aliases are common practice.
 */
#include "units.h"

#include <string.h>

/* clang-format off */
#define PI 3.14159265358979323846

/*                         m kg  s  K rad A dB mol; a last 0 may be left out */
#define NUMBER       {0, 0, 0, 0, 0, 0, 0}
#define LENGTH       {1, 0, 0, 0, 0, 0, 0}
#define MASS         {0, 1, 0, 0, 0, 0, 0}
#define TIME         {0, 0, 1, 0, 0, 0, 0}
#define TEMPERATURE  {0, 0, 0, 1, 0, 0, 0}
#define ANGLE        {0, 0, 0, 0, 1, 0, 0}
#define CURRENT      {0, 0, 0, 0, 0, 1, 0}
#define LEVEL        {0, 0, 0, 0, 0, 0, 1}
#define AMOUNT       {0, 0, 0, 0, 0, 0, 0, 1}
#define FREQUENCY    {0, 0, -1, 0, 0, 0, 0}
#define FORCE        {1, 1, -2, 0, 0, 0, 0}
#define PRESSURE     {-1, 1, -2, 0, 0, 0, 0}
#define ENERGY       {2, 1, -2, 0, 0, 0, 0}
#define POWER        {2, 1, -3, 0, 0, 0, 0}
#define VOLTAGE      {2, 1, -3, 0, 0, -1, 0}

/* clang-format on */

/* code, aliases, dimension, factor, divisor, offset, name */
static const an_unit table[] = {
    {"1", "- count counts ratio", NUMBER, 1, 1, 0, "number"},
    {"%", "percent pct", NUMBER, 1, 100, 0, "percent"},
    {"[ppm]", "ppm", NUMBER, 1, 1e6, 0, "part in a million"},
    {"m", "", LENGTH, 1, 1, 0, "metre"},
    {"dm", "", LENGTH, 1, 10, 0, "decimetre"},
    {"cm", "", LENGTH, 1, 100, 0, "centimetre"},
    {"mm", "", LENGTH, 1, 1e3, 0, "millimetre"},
    {"um", "µm μm micron microns", LENGTH, 1, 1e6, 0, "micrometre"},
    {"nm", "", LENGTH, 1, 1e9, 0, "nanometre"},
    {"[in_i]", "in inch", LENGTH, 254, 1e4, 0, "inch"},
    {"[mil_i]", "mil", LENGTH, 254, 1e7, 0, "thousandth of an inch"},
    {"kg", "Kg", MASS, 1, 1, 0, "kilogram"},
    {"g", "", MASS, 1, 1e3, 0, "gram"},
    {"mg", "", MASS, 1, 1e6, 0, "milligram"},
    {"t", "", MASS, 1e3, 1, 0, "tonne"},
    {"[lb_av]", "lb", MASS, 45359237, 1e8, 0, "pound"},
    {"s", "sec", TIME, 1, 1, 0, "second"},
    {"ms", "msec", TIME, 1, 1e3, 0, "millisecond"},
    {"us", "µs μs usec", TIME, 1, 1e6, 0, "microsecond"},
    {"ns", "", TIME, 1, 1e9, 0, "nanosecond"},
    {"min", "", TIME, 60, 1, 0, "minute"},
    {"h", "hr", TIME, 3600, 1, 0, "hour"},
    {"d", "", TIME, 86400, 1, 0, "day"},
    {"K", "", TEMPERATURE, 1, 1, 0, "kelvin"},
    {"mK", "", TEMPERATURE, 1, 1e3, 0, "millikelvin"},
    {"Cel", "degC °C C ℃ deg.C", TEMPERATURE, 1, 1, 273.15, "degree Celsius"},
    {"[degF]", "degF °F F", TEMPERATURE, 5, 9, 459.67 * 5 / 9, "degree Fahrenheit"},
    {"rad", "", ANGLE, 1, 1, 0, "radian"},
    {"mrad", "", ANGLE, 1, 1e3, 0, "milliradian"},
    {"urad", "µrad μrad", ANGLE, 1, 1e6, 0, "microradian"},
    {"deg", "° degree degrees", ANGLE, PI, 180, 0, "degree of arc"},
    {"circ", "rev turn", ANGLE, 2 * PI, 1, 0, "turn"},
    {"mol", "mole", AMOUNT, 1, 1, 0, "mole"},
    {"Hz", "", FREQUENCY, 1, 1, 0, "hertz"},
    {"mHz", "", FREQUENCY, 1, 1e3, 0, "millihertz"},
    {"kHz", "KHz", FREQUENCY, 1e3, 1, 0, "kilohertz"},
    {"MHz", "", FREQUENCY, 1e6, 1, 0, "megahertz"},
    {"N", "", FORCE, 1, 1, 0, "newton"},
    {"cN", "", FORCE, 1, 100, 0, "centinewton"},
    {"mN", "", FORCE, 1, 1e3, 0, "millinewton"},
    {"uN", "µN μN", FORCE, 1, 1e6, 0, "micronewton"},
    {"kN", "KN", FORCE, 1e3, 1, 0, "kilonewton"},
    {"MN", "", FORCE, 1e6, 1, 0, "meganewton"},
    {"gf", "", FORCE, 980665, 1e8, 0, "gram-force"},
    {"kgf", "kp", FORCE, 980665, 1e5, 0, "kilogram-force"},
    {"[lbf_av]", "lbf", FORCE, 44482216152605, 1e13, 0, "pound-force"},
    {"Pa", "", PRESSURE, 1, 1, 0, "pascal"},
    {"mPa", "", PRESSURE, 1, 1e3, 0, "millipascal"},
    {"hPa", "", PRESSURE, 100, 1, 0, "hectopascal"},
    {"kPa", "KPa", PRESSURE, 1e3, 1, 0, "kilopascal"},
    {"MPa", "Mpa", PRESSURE, 1e6, 1, 0, "megapascal"},
    {"GPa", "Gpa", PRESSURE, 1e9, 1, 0, "gigapascal"},
    {"bar", "", PRESSURE, 1e5, 1, 0, "bar"},
    {"mbar", "", PRESSURE, 100, 1, 0, "millibar"},
    {"[psi]", "psi", PRESSURE, 44482216152605, 6451600000, 0, "pound-force per square inch"},
    {"J", "", ENERGY, 1, 1, 0, "joule"},
    {"mJ", "", ENERGY, 1, 1e3, 0, "millijoule"},
    {"kJ", "KJ", ENERGY, 1e3, 1, 0, "kilojoule"},
    {"W", "", POWER, 1, 1, 0, "watt"},
    {"mW", "", POWER, 1, 1e3, 0, "milliwatt"},
    {"V", "Volt", VOLTAGE, 1, 1, 0, "volt"},
    {"mV", "", VOLTAGE, 1, 1e3, 0, "millivolt"},
    {"uV", "µV μV", VOLTAGE, 1, 1e6, 0, "microvolt"},
    {"A", "", CURRENT, 1, 1, 0, "ampere"},
    {"mA", "", CURRENT, 1, 1e3, 0, "milliampere"},
    {"dB", "", LEVEL, 1, 1, 0, "decibel"},
};

const an_unit *an_unit_row(size_t i_row)
{
    return i_row < sizeof table / sizeof table[0] ? &table[i_row] : NULL;
}

/* Whether s [n] is one of the words in a list separated by blanks. */
static bool is_among(const char *words, const char *s, size_t n)
{
    for (const char *word = words; *word;) {
        size_t length = strcspn(word, " ");
        if (length == n && memcmp(word, s, n) == 0)
            return true;
        word += length;
        word += strspn(word, " ");
    }
    return false;
}

const an_unit *an_unit_find(const char *s, size_t n)
{
    for (size_t i = 0; i < sizeof table / sizeof table[0]; i++)
        if (is_among(table[i].code, s, n) || is_among(table[i].aliases, s, n))
            return &table[i];
    return NULL;
}
