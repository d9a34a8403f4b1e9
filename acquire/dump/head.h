/* head.h: what a dump's own head says of the specimen, key by key. */
#ifndef ANELAST_DUMP_HEAD_H
#define ANELAST_DUMP_HEAD_H

#include "acquire/dump/cells.h"
#include "anelast/layout.h"
#include "anelast/specimen.h"

#include <stdbool.h>
#include <stddef.h>

typedef struct an_head {
    const an_layout *layout;
    an_specimen specimen; /* what was said so far */
    int n_unmapped;       /* keys that the layout does not know */
    char unmapped[512];   /* the first of them, for the message */
    long first_line;      /* of the first of them */
} an_head;

void an_head_init(an_head *head, const an_layout *layout);

/* an_head_add: one key with its value.
 *   unit    [in] text "" where the row has none
 *   line    [in] for the list of unmapped keys
 *   comment [in] the row is a comment: a key that is not mapped is no more than that
 * Returns AN_OK; AN_E_VALUE (no number, no word known, no date), AN_E_UNIT or AN_E_LIMIT, naming key and
 * value. */
an_status an_head_add(an_head *head, an_cell key, an_cell value, an_cell unit, long line, bool comment,
                      an_error *err);

/* an_head_split: cut a row of the head, or of a block header, into key, value and unit.
 *   cells [out] [AN_CELLS_MOST + 2] at least three are set, empty where there is nothing
 * Returns how many fields stand in the row; more than AN_CELLS_MOST: too many. */
int an_head_split(const an_layout *layout, const char *text, size_t n, an_cell *cells);

/* an_head_add_line: cut a row of the head into key, value and unit, and add it. A row of one field is a
 * title: it must be mapped or ignored like a key. */
an_status an_head_add_line(an_head *head, const char *text, size_t n, long line, bool comment, an_error *err);

/* an_head_number: a value as a number in SI: "12,4", "12,4 mm", or with the unit beside it.
 *   stated   [in]  the layout's unit, NULL; must agree with one that the dump gives
 *   expected [in]  SI unit; NULL: a plain number
 *   value    [out] [expected]
 * Returns AN_OK, AN_E_VALUE or AN_E_UNIT; messages open with the key. */
an_status an_head_number(const an_layout *layout, an_cell key, an_cell value, an_cell unit,
                         const char *stated, const char *expected, double *si, an_error *err);

/* an_head_finish: refuse keys that nobody mapped. Returns AN_OK or AN_E_FORMAT listing them. */
an_status an_head_finish(const an_head *head, const char *path, an_error *err);

#endif
