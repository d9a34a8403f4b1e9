/* anelast/remark.h: what was noticed, and what it means. Nothing is silently repaired: every doubt stands as
 * a remark in the document. Codes, severities and what to do about each stand in one table,
 * acquire/document/remarks.c.
 */
#ifndef ANELAST_REMARK_H
#define ANELAST_REMARK_H

#include "anelast/xml.h"

#include <stddef.h>

/* How much a remark weighs, lightest first. */
typedef enum an_severity {
    AN_NOTE, /* worth knowing */
    AN_FLAG, /* value kept, marked */
    AN_SKIP, /* burst dropped */
    AN_HOLD, /* no lot decision */
    AN_HALT, /* no result */
    AN_N_SEVERITIES
} an_severity;

/* One row of the table. */
typedef struct an_remark_kind {
    const char *code;     /* "not-settled": lower case, joined by hyphens; never changes its meaning */
    an_severity severity; /* the usual one */
    const char *message;  /* what it says, as the format pages show it; <...> stands for a value */
    const char *action;   /* what to do about it, in plain words */
} an_remark_kind;

/* One remark. */
typedef struct an_remark {
    const an_remark_kind *kind; /* the row of the table */
    an_severity severity;       /* its weight here */
    long burst;                 /* number of the burst, from 1; 0: the whole run */
    char *text;                 /* what was noticed, with its numbers */
} an_remark;

/* Remarks in the order in which they were made; zeros are an empty list. */
typedef struct an_remark_list {
    an_remark *rows; /* [n] */
    size_t n;        /* [1] */
    size_t room;     /* rows allocated */
} an_remark_list;

/* an_remark_kind_row: the i_row-th row of the table, NULL past its end. */
const an_remark_kind *an_remark_kind_row(size_t i_row);

/* an_remark_kind_find: the row of a code, NULL where there is none. */
const an_remark_kind *an_remark_kind_find(const char *code);

/* an_severity_name: its word in documents ("flag"). */
const char *an_severity_name(an_severity severity);

/* an_remark_list_add: add a remark with the severity of the table.
 *   code   [in] must stand in the table
 *   burst  [in] number of the burst, 0 for the whole run
 *   format [in] printf format of the text; no full stop at its end
 * Returns AN_OK, AN_E_MEMORY, or AN_E_USAGE for a code that has no row. */
an_status an_remark_list_add(an_remark_list *remarks, const char *code, long burst, an_error *err,
                             const char *format, ...) __attribute__((format(printf, 5, 6)));

/* an_remark_list_add_as: the same with another severity than the table's. */
an_status an_remark_list_add_as(an_remark_list *remarks, const char *code, an_severity severity, long burst,
                                an_error *err, const char *format, ...) __attribute__((format(printf, 6, 7)));

/* an_remark_list_count: how many of a severity; burst < 0: of any burst. */
size_t an_remark_list_count(const an_remark_list *remarks, an_severity severity, long burst);

/* an_remark_list_worst: the heaviest severity about a burst (burst < 0: of all); -1 where there is none. */
int an_remark_list_worst(const an_remark_list *remarks, long burst);

/* an_remark_list_has: whether a remark of that code stands about a burst (burst < 0: any). */
bool an_remark_list_has(const an_remark_list *remarks, const char *code, long burst);

/* an_remark_list_read: add the `remark` children of a node; a code that has no row here (from a newer maker)
 * becomes `other-remark` with its severity and the code in its text. Returns AN_OK, AN_E_DOCUMENT, AN_E_VALUE
 * or AN_E_MEMORY. */
an_status an_remark_list_read(const an_xml_node *node, an_remark_list *remarks, an_error *err);

/* an_remark_list_write: write the remarks about a burst (burst < 0: all) as `<remark code= severity= burst=
 * action=>text</remark>`. */
void an_remark_list_write(an_xml_writer *writer, const an_remark_list *remarks, long burst);

/* an_remark_list_clear: release all. */
void an_remark_list_clear(an_remark_list *remarks);

#endif
