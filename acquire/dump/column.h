/* column.h: the samples of one channel of one burst while it is read, as the dump holds them: fixed decimals
 * as integers with a number of decimals, so long as they fit, else the doubles that the texts mean.
 */
#ifndef ANELAST_DUMP_COLUMN_H
#define ANELAST_DUMP_COLUMN_H

#include "anelast/quantity.h"
#include "anelast/signal.h"
#include "anelast/status.h"

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

/* One sample: which of the two, the column says. */
typedef union an_sample {
    int64_t integer; /* [10^-decimals of the dump's unit] */
    double real;     /* [the dump's unit] */
} an_sample;

typedef struct an_column {
    bool real;         /* samples are doubles */
    int decimals;      /* of the integers */
    bool keeps_places; /* the place of each text's last digit is kept (time) */
    size_t n, room;
    an_sample *samples;  /* [n] */
    signed char *places; /* [n] power of ten of the last digit; NULL unless kept */
} an_column;

/* an_column_init, an_column_release: an empty column, and its memory back. */
void an_column_init(an_column *column, bool keeps_places);
void an_column_release(an_column *column);

/* an_column_add_text: add a number as the dump writes it.
 *   value [out, nullable] what it means [the dump's unit]
 * Returns AN_OK, AN_E_VALUE (not a number; err untouched) or AN_E_MEMORY. */
an_status an_column_add_text(an_column *column, const char *text, size_t n, char decimal_mark, double *value,
                             an_error *err);

/* an_column_add_real, an_column_add_integer: add a value that did not come from a text. Return AN_OK or
 * AN_E_MEMORY. */
an_status an_column_add_real(an_column *column, double value, an_error *err);
an_status an_column_add_integer(an_column *column, int64_t value, an_error *err);

/* an_column_value: the i-th sample [the dump's unit]. */
double an_column_value(const an_column *column, size_t i);

/* an_column_place: a unit of the last digit that the i-th sample's text had [the dump's unit]; about 0 for
 * values that came from no text. The column keeps places. */
double an_column_place(const an_column *column, size_t i);

/* an_column_drop: remove some samples.
 *   rows [in] [n_rows] their indices, rising */
void an_column_drop(an_column *column, const size_t *rows, size_t n_rows);

/* an_column_move_tail: the samples from `first` on become the beginning of another, empty column; this one
 * ends there. Returns AN_OK or AN_E_MEMORY. */
an_status an_column_move_tail(an_column *column, size_t first, an_column *other, an_error *err);

/* an_column_clear: no samples, the room stays. */
void an_column_clear(an_column *column);

/* an_column_signal: the samples as a signal, in the smallest coding that holds them without loss.
 *   conversion [in] the dump's unit to SI; gain [in, 1] true / dump
 *   signal     [out] clear with an_signal_clear
 * Returns AN_OK or AN_E_MEMORY. */
an_status an_column_signal(const an_column *column, an_signal_quantity quantity,
                           const an_conversion *conversion, double gain, an_signal *signal, an_error *err);

#endif
