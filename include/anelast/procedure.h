/* anelast/procedure.h: every threshold and choice that a lab may set, in one table
 * (acquire/document/choices.c) with unit, default, range, help and the source of the default; and the values
 * in force.
 */
#ifndef ANELAST_PROCEDURE_H
#define ANELAST_PROCEDURE_H

#include "anelast/provenance.h"
#include "anelast/xml.h"

#include <stdio.h>

/* Room for rows of the table. */
enum { AN_CHOICES_MOST = 128 };

/* One row: a number in a range, one of some words, or either ("auto" or a temperature). */
typedef struct an_choice {
    const char *name;     /* as in the document: lower case, joined by underscores */
    const char *unit;     /* UCUM, as shown to people ("deg", "K/min"); NULL where only words are allowed */
    const char *words;    /* words allowed, separated by blanks; NULL where only numbers are */
    const char *standard; /* the default, a number [unit] or a word */
    double least, most;   /* [unit] range of the number, both included */
    const char *stage;    /* who uses it: "phase", "correct", "grid", "superpose", "spectrum" */
    const char *help;     /* what it decides, one sentence without full stop */
    const char *source;   /* where the default comes from */
} an_choice;

/* The value of one choice. */
typedef struct an_choice_value {
    double number; /* [SI: rad for a row in deg, K/s for one in K/min]; NAN where a word is in force */
    char word[32]; /* "" where a number is in force */
} an_choice_value;

/* The values in force, in the order of the table. */
typedef struct an_procedure {
    an_choice_value values[AN_CHOICES_MOST];
    char file[256];              /* name of the document they came from; "" for the defaults */
    char sha256[AN_SHA256_SIZE]; /* of that document; "" for the defaults */
    bool newer; /* the document's minor version is above ours: unknown choices were ignored */
} an_procedure;

/* an_choice_row: the i_row-th row of the table, NULL past its end. */
const an_choice *an_choice_row(size_t i_row);

/* an_procedure_init: the defaults. */
void an_procedure_init(an_procedure *procedure);

/* an_procedure_read: defaults, then what the document sets. A choice with another name than those of the
 * table is refused (a mistyped threshold must not pass), a value outside its range too. path [in] a file, "-"
 * for standard input, NULL for the defaults alone Returns AN_OK, AN_E_IO, AN_E_DOCUMENT, AN_E_UNIT or
 * AN_E_VALUE. */
an_status an_procedure_read(const char *path, an_procedure *procedure, an_error *err);

/* an_procedure_set: set one choice from text ("0.004", "0.4 %", "auto"), as a document or an option says it.
 * Returns AN_OK, AN_E_USAGE (no such choice), AN_E_UNIT or AN_E_VALUE saying what is allowed. */
an_status an_procedure_set(an_procedure *procedure, const char *name, const char *text, const char *unit,
                           an_error *err);

/* an_procedure_number: the number in force, in SI as everything inside: rad where the row says deg, K/s where
 * it says K/min, 1 where it says %; NAN where a word is in force, or where the name has no row (which the
 * unit tests of each stage exclude). */
double an_procedure_number(const an_procedure *procedure, const char *name);

/* an_procedure_word: the word in force; "" where a number is in force or the name has no row. */
const char *an_procedure_word(const an_procedure *procedure, const char *name);

/* an_procedure_is: whether a word is the one in force. */
bool an_procedure_is(const an_procedure *procedure, const char *name, const char *word);

/* an_procedure_record: add the choices of a stage to the record of a document, and the procedure document as
 * an input where one was read. Call once for each stage that a program runs. Returns AN_OK or AN_E_MEMORY. */
an_status an_procedure_record(const an_procedure *procedure, const char *stage, an_made *made, an_error *err);

/* an_procedure_write: write the whole procedure document with the values in force, each with help and source
 * as comment-like attributes, so that it can be edited and read again. Returns AN_OK, AN_E_IO or AN_E_MEMORY.
 */
an_status an_procedure_write(const an_procedure *procedure, FILE *stream, an_error *err);

#endif
