/* anelast/number.h: decimal texts to numbers and back, exact and in no locale. Reading rounds correctly (to
 * nearest, ties to even: the same bits as strtod in the C locale); printing gives the shortest text that
 * reads back to the same bits.
 */
#ifndef ANELAST_NUMBER_H
#define ANELAST_NUMBER_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

/* Bytes that every printed number fits in, with its final zero byte. */
enum { AN_NUMBER_SIZE = 32 };

/* an_number_parse: a whole text as a decimal number: sign, digits, one decimal mark, exponent with e or E.
 *   s            [in]  n bytes, need not be terminated; no blanks around it
 *   decimal_mark [in]  '.' or ','; the other one is not accepted
 *   value        [out] untouched where false is returned
 * Returns false where the whole text is not a number; so for "nan", "inf", hexadecimal forms and what
 * overflows. */
bool an_number_parse(const char *s, size_t n, char decimal_mark, double *value);

/* an_number_decimal: a fixed decimal without exponent as mantissa * 10^-decimals, without loss.
 *   mantissa [out] signed digits without the mark
 *   decimals [out] digits that stand behind the mark, 0..18
 * Returns false for anything else, and where the digits do not fit in 18 places. "-0" and "-0.0", whose sign
 * an integer cannot hold, give false too. */
bool an_number_decimal(const char *s, size_t n, char decimal_mark, int64_t *mantissa, int *decimals);

/* an_number_integer: a whole text as a signed decimal integer. Returns false for anything else, or overflow.
 */
bool an_number_integer(const char *s, size_t n, int64_t *value);

/* an_number_print: the shortest of %.15g, %.16g, %.17g that reads back to the same bits, with a decimal point
 * in any locale. value [in]  finite; NAN gives "NaN", infinities "INF" and "-INF" (xs:double) text  [out]
 * AN_NUMBER_SIZE bytes Returns the length of the text. */
size_t an_number_print(double value, char text[AN_NUMBER_SIZE]);

#endif
