/* fit/report/markup.h: text into HTML and SVG, escaped; numbers as a reader writes them. Folder report only.
 *
 * All functions write to a stream whose error flag the caller checks at the end. No locale plays a part.
 */
#ifndef ANELAST_REPORT_MARKUP_H
#define ANELAST_REPORT_MARKUP_H

#include <stddef.h>
#include <stdio.h>

/* Where label text goes: its raised and lowered parts are written differently. */
typedef enum markup_kind { MARKUP_HTML, MARKUP_SVG } markup_kind;

/* markup_plain: text with & < > " ' escaped; control characters that XML forbids and broken UTF-8 become U+FFFD.
 *   text [in] NULL: nothing is written */
void markup_plain(FILE *out, const char *text);

/* markup_label: label text, ^{...} raised and _{...} lowered, the rest escaped; a space after either becomes U+00A0.
 *   size [in] font size that stands around it [viewBox unit], for MARKUP_SVG */
void markup_label(FILE *out, const char *text, markup_kind kind, double size);

/* markup_width: estimated width of plain or label text in a sans-serif font [same unit as size], rather too wide. */
double markup_width(const char *text, double size);

/* markup_fixed: value with a number of decimals (0..15), the minus sign as U+2212; |value| < 9e15 after scaling. */
void markup_fixed(FILE *out, double value, int decimals);

/* markup_number: value to significant digits (1..9); outside 1e-3 .. 1e5 as a mantissa and a power of ten in raised
 * characters of Unicode. Not finite: an en dash. */
void markup_number(FILE *out, double value, int digits);

/* markup_with_u: value and its standard uncertainty, both to the place of the uncertainty's second digit, as in
 * 12.34 ± 0.25. Without a positive finite u: markup_number with four digits. */
void markup_with_u(FILE *out, double value, double u);

/* markup_coordinate: a coordinate of a figure, to a tenth of a unit, a trailing .0 left out. */
void markup_coordinate(FILE *out, double value);

/* markup_attribute: one attribute with a coordinate, as in ' x="12.5"'. */
void markup_attribute(FILE *out, const char *name, double value);

#endif
