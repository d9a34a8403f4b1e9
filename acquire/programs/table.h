/* table.h: documents as tables, for spreadsheets and scripts. What is in which column is data (tables.c); the
 * rest knows only XML nodes, so that it stands on the ground floor and takes any document.
 */
#ifndef ANELAST_TABLE_H
#define ANELAST_TABLE_H

#include "anelast/xml.h"

#include <stdio.h>

/* One column. */
typedef struct an_column {
    const char *head; /* quantity and unit; these stay */
    const char *path; /* from the row's element: "../" the one above, "name/" a child, then "@attribute", or
                         "text()" for the content; "codes()" for the codes of its remarks */
    const char *unit; /* SI unit that the head promises, UCUM; a value in another unit is converted. NULL: no
                         quantity */
} an_column;

/* One table of one kind of document. */
typedef struct an_table {
    const char *root; /* name of the root element; "" for tables of every document */
    const char *name; /* the first of a root is its main table */
    const char
        *rows; /* elements that are rows: paths from the root, "*" any name, alternatives parted by blanks */
    const char *help; /* what a row is */
    const an_column *columns;
    size_t n_columns;
} an_table;

/* an_table_find: a table of a kind of document by name; NULL: its main table. NULL where there is none. */
const an_table *an_table_find(const char *root, const char *name);

/* an_table_list: one line a table: name and what a row is.
 *   root [in] kind of document; out [in, out]. */
void an_table_list(const char *root, FILE *out);

/* an_table_print: read and validate a document, and print one of its tables as CSV (RFC 4180, lines ended by
 * LF). path [in] file, "-" for standard input; name [in, nullable] which table, NULL the main one, "list()"
 * for the names of all; out [in, out] nothing is written where the document is refused. Returns AN_OK,
 * AN_E_USAGE (no such table), AN_E_IO, AN_E_DOCUMENT, AN_E_UNIT, AN_E_MEMORY. */
an_status an_table_print(const char *path, const char *name, FILE *out, an_error *err);

#endif
