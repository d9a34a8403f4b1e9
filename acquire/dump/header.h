/* header.h: the row that names the columns, and the row of their units. */
#ifndef ANELAST_DUMP_HEADER_H
#define ANELAST_DUMP_HEADER_H

#include "acquire/dump/cells.h"
#include "acquire/dump/rows.h"
#include "anelast/layout.h"

#include <stdbool.h>

/* The columns of a dump as its header row names them. */
typedef struct an_header {
    const an_layout *layout;
    int n;                                           /* columns; 0: no header row was seen yet */
    const an_layout_channel *channel[AN_CELLS_MOST]; /* of each column; NULL: ignored */
    char names[4096];           /* of the columns, each zero-terminated, for messages and repeated rows */
    int name_at[AN_CELLS_MOST]; /* where each begins */
} an_header;

/* an_header_is: whether a row names the columns: at least two, and half, of the columns that the layout
 * needs. */
bool an_header_is(const an_header *header, const an_cell *cells, int n_cells);

/* an_header_read: take the columns from a header row.
 * Returns AN_OK, or AN_E_FORMAT naming the columns that are not mapped, or the channels that have no column.
 */
an_status an_header_read(an_header *header, const an_cell *cells, int n_cells, an_error *err);

/* an_header_without: the columns of a layout whose channels stand at positions, for a dump without a header
 * row. n_cells [in] fields of the first row Returns AN_OK or AN_E_FORMAT. */
an_status an_header_without(an_header *header, int n_cells, an_error *err);

/* an_header_is_units: whether a row holds the units of the columns: no number in a channel's column, and a
 * unit that is one. */
bool an_header_is_units(const an_header *header, const an_cell *cells, int n_cells);

/* an_header_bind: tell the rows which field each channel has, and in which unit.
 *   units [in] [n_units] fields of the unit row; NULL: none
 * Returns AN_OK or AN_E_UNIT. */
an_status an_header_bind(const an_header *header, const an_cell *units, int n_units, an_rows *rows,
                         an_error *err);

/* an_header_name: the name of the i-th column. */
const char *an_header_name(const an_header *header, int i_column);

#endif
