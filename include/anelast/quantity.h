/* anelast/quantity.h: values with units and uncertainties. Inside everything is SI; units are converted once,
 * at the door. Unit texts are UCUM codes ("mm", "Cel", "N.s/m", "kg/m3") or one of the aliases that people
 * type ("degC", "µm"); codes combine with '.', '/' and whole exponents. The table is
 * acquire/document/units.c.
 */
#ifndef ANELAST_QUANTITY_H
#define ANELAST_QUANTITY_H

#include "anelast/status.h"

#include <stdbool.h>
#include <stddef.h>

/* Zero of the Celsius scale [K], exact by definition. Documents hold kelvin; what people read says degrees Celsius. */
#define AN_ZERO_CELSIUS_K 273.15

/* A value and its standard uncertainty, k = 1, both in the SI unit that its holder states. */
typedef struct an_measure {
    double value; /* [SI unit of the quantity]; NAN where not given */
    double u;     /* [the same]; NAN where not given, never negative */
} an_measure;

/* A measure that holds nothing. */
#define AN_MEASURE_NONE ((an_measure){.value = (double)__builtin_nan(""), .u = (double)__builtin_nan("")})

/* Exponents of the base dimensions, in this order: length, mass, time, temperature, plane angle, current,
 * level (dB), amount of substance. */
enum { AN_N_DIMENSIONS = 8 };

/* One row of the unit table. value_SI = value * factor / divisor + offset. Factor and divisor stand apart so
 * that 12.4 mm is 12.4 / 1000 m, rounded once. */
typedef struct an_unit {
    const char *code;                       /* UCUM code */
    const char *aliases;                    /* what people type, separated by blanks; "" where nothing else */
    signed char dimension[AN_N_DIMENSIONS]; /* exponents, see above */
    double factor;                          /* [SI unit / unit] */
    double divisor;                         /* [1] */
    double offset;    /* [SI unit]; only for temperatures on a scale with another zero */
    const char *name; /* in words, for the format pages */
} an_unit;

/* What a unit text means. */
typedef struct an_conversion {
    double factor, divisor,
        offset; /* value_SI = value * factor / divisor + offset; a combination has no offset */
    signed char dimension[AN_N_DIMENSIONS]; /* exponents */
} an_conversion;

/* an_unit_row: the i_row-th row of the table, NULL past its end (for the format pages). */
const an_unit *an_unit_row(size_t i_row);

/* an_unit_read: what a unit text means.
 *   text [in]  UTF-8, n bytes, need not be terminated; blanks around it are ignored; "" means "1"
 * Returns AN_OK, or AN_E_UNIT naming the part that is not known. */
an_status an_unit_read(const char *text, size_t n, an_conversion *conversion, an_error *err);

/* an_unit_convert: how values in `unit` become values in the SI unit `expected`.
 *   unit       [in]  what stands in the input, zero-terminated
 *   expected   [in]  UCUM code of the SI unit wanted ("Pa", "m/N", "K")
 *   conversion [out] factor, divisor and offset
 * Returns AN_OK, AN_E_UNIT naming both units and some units that would do, or AN_E_USAGE where `expected` is
 * no coherent SI unit ("dB" counts as one). */
an_status an_unit_convert(const char *unit, const char *expected, an_conversion *conversion, an_error *err);

/* an_unit_si: one value [by conversion] in SI. */
double an_unit_si(const an_conversion *conversion, double value);

/* an_unit_si_difference: a difference, or an uncertainty, in SI: the offset does not enter. */
double an_unit_si_difference(const an_conversion *conversion, double value);

/* an_quantity_parse: a text such as "12.4 mm", "12.4mm" or "25 degC"; the number with a decimal point in any
 * locale. expected [in]  UCUM code of the SI unit wanted; a bare number is taken only where it is "1" si
 * [out] the value [expected] Returns AN_OK; AN_E_UNIT (no unit, unknown, wrong dimension) or AN_E_VALUE (not
 * a number, or a decimal comma, refused by name). */
an_status an_quantity_parse(const char *text, const char *expected, double *si, an_error *err);

/* an_quantity_parse_difference: the same for a difference of temperatures: "0.5 K" yes; "0.5 degC", which
 * could also be a place on the scale, is refused. */
an_status an_quantity_parse_difference(const char *text, const char *expected, double *si, an_error *err);

#endif
