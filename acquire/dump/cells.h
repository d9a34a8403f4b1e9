/* cells.h: one line of a text dump cut into its fields. */
#ifndef ANELAST_DUMP_CELLS_H
#define ANELAST_DUMP_CELLS_H

#include "anelast/layout.h"

#include <stddef.h>

/* Fields of one line at most; a longer line is no row of samples. */
enum { AN_CELLS_MOST = 256 };

/* One field, without the blanks and quotes around it; points into the line. */
typedef struct an_cell {
    const char *text; /* [n] */
    size_t n;         /* bytes */
} an_cell;

/* an_cell_trim: the same bytes without blanks and tabs around them. */
an_cell an_cell_trim(const char *text, size_t n);

/* an_cells_split: cut a line.
 *   separator [in]  ' ': runs of blanks and tabs
 *   quote     [in]  '\0': none
 *   cells     [out] [AN_CELLS_MOST]
 * Returns how many fields; AN_CELLS_MOST + 1 where there are more. */
int an_cells_split(const char *text, size_t n, char separator, char quote, an_cell *cells);

/* an_cell_is: whether a field is a zero-terminated text. */
int an_cell_is(an_cell cell, const char *text);

#endif
