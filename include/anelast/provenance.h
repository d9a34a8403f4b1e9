/* anelast/provenance.h: what a document was made of, by what, with which choices: its `made` element.
 *
 * `<made by= version= at=>` holds one `input` for each thing read, one `choice` for each threshold and word
 * in force, and the `chain`: the makers of the documents that it stands on, oldest first.
 */
#ifndef ANELAST_PROVENANCE_H
#define ANELAST_PROVENANCE_H

#include "anelast/xml.h"

#include <stddef.h>

/* One input. */
typedef struct an_made_input {
    char *role;                  /* "dump", "layout", "run", ... */
    char *path;                  /* file name without folder; "-" for a stream */
    char sha256[AN_SHA256_SIZE]; /* of its raw bytes */
} an_made_input;

/* One choice in force. */
typedef struct an_made_choice {
    char *name;  /* as in the table of choices */
    char *value; /* number or word, as text */
    char *unit;  /* UCUM; "" for a word */
} an_made_choice;

/* One maker of a document further back. */
typedef struct an_made_maker {
    char *by;                    /* program */
    char *version;               /* of the program */
    char sha256[AN_SHA256_SIZE]; /* of the document it made */
} an_made_maker;

/* How a document was made; zeros are an empty one. */
typedef struct an_made {
    char *by;                /* program */
    char *version;           /* of the program */
    char *at;                /* xs:dateTime with Z */
    an_made_input *inputs;   /* [n_inputs] */
    size_t n_inputs;         /* [1] */
    an_made_choice *choices; /* [n_choices] */
    size_t n_choices;        /* [1] */
    an_made_maker *chain;    /* [n_chain] oldest first */
    size_t n_chain;          /* [1] */
} an_made;

/* an_made_init: start the record of a document that `by` makes now. `at` is the present in UTC, or
 * SOURCE_DATE_EPOCH from the environment [s since 1970-01-01T00:00:00Z] where that is set, so that bytes can
 * be reproduced. by [in] name of the program Returns AN_OK, AN_E_MEMORY, or AN_E_VALUE for a
 * SOURCE_DATE_EPOCH that is no whole number. */
an_status an_made_init(an_made *made, const char *by, an_error *err);

/* an_made_clear: release all. */
void an_made_clear(an_made *made);

/* an_made_add_input: add an input.
 *   path   [in] as it was opened; only the file name is kept; NULL or "-" for a stream
 *   sha256 [in] of its bytes
 * Returns AN_OK or AN_E_MEMORY. */
an_status an_made_add_input(an_made *made, const char *role, const char *path, const char *sha256,
                            an_error *err);

/* an_made_add_choice: add a choice in force, its value as text; an_made_add_number and an_made_add_word make
 * that text. unit [in] UCUM; "" for a word Return AN_OK or AN_E_MEMORY. */
an_status an_made_add_choice(an_made *made, const char *name, const char *value, const char *unit,
                             an_error *err);
an_status an_made_add_number(an_made *made, const char *name, double value, const char *unit, an_error *err);
an_status an_made_add_word(an_made *made, const char *name, const char *word, an_error *err);

/* an_made_extend: stand on another document: its chain, then its own maker, join the chain; those already
 * there are not repeated. input  [in] the other document's record sha256 [in] of the other document Returns
 * AN_OK or AN_E_MEMORY. */
an_status an_made_extend(an_made *made, const an_made *input, const char *sha256, an_error *err);

/* an_made_read: the record of a document from its root.
 *   root [in]  with a child `made`
 *   made [out] clear with an_made_clear
 * Returns AN_OK, AN_E_DOCUMENT or AN_E_MEMORY. */
an_status an_made_read(const an_xml_node *root, an_made *made, an_error *err);

/* an_made_stand_on: what a stage records of the document it was made from: it is an input, and the chain goes on
 * from it.
 *   role   [in] its root's name; path, sha256 [in] as an_made_add_input takes them
 *   input  [in] its own record
 * Returns AN_OK or AN_E_MEMORY. */
an_status an_made_stand_on(an_made *made, const char *role, const char *path, const an_made *input,
                           const char *sha256, an_error *err);

/* an_made_write: write the `made` element. */
void an_made_write(an_xml_writer *writer, const an_made *made);

#endif
