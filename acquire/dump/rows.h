/* rows.h: rows of samples, text or counts, become bursts. Columns collect what the dump holds until a burst
 * ends; then gaps are dropped and remarked upon, times become a clock where they are one, and the burst is
 * handed on.
 */
#ifndef ANELAST_DUMP_ROWS_H
#define ANELAST_DUMP_ROWS_H

#include "acquire/dump/column.h"
#include "anelast/burst_find.h"
#include "anelast/dump.h"
#include "anelast/layout.h"

/* What a block header, a burst table or the step columns say about the burst that is being read. */
typedef struct an_burst_facts {
    long step;                                  /* 0: none */
    double set_temperature_K, set_frequency_Hz; /* NAN: not said */
    double samples;                             /* [1] declared; NAN */
    double first_sample;                        /* [1] NAN */
    double interval_s;                          /* [s] NAN */
    double start_s;                             /* [s] NAN */
} an_burst_facts;

/* One channel that is read. */
typedef struct an_channel_in {
    const an_layout_channel *channel; /* NULL: the role is not read */
    int position;                     /* of the field, from 0 */
    an_conversion conversion;         /* the dump's unit to SI */
    double size;                      /* [the dump's unit] of one count; 1 in texts */
    bool torsion;                     /* the unit is one of torsion */
    an_column column;
    an_column next; /* samples that already belong to the next burst */
} an_channel_in;

typedef struct an_rows {
    const an_layout *layout;
    const an_dump_source *source;
    const an_dump_visitor *visitor;
    an_channel_in in[AN_N_COLUMN_ROLES];
    an_burst_facts facts;
    an_burst_finder finder;
    size_t n;        /* rows of the burst so far */
    size_t *missing; /* [n_missing] rows with a mark instead of a value, rising */
    size_t n_missing, room_missing;
    bool row_missing;        /* in the row that is being added */
    bool truncated;          /* the burst that ends now is not complete */
    int n_burst;             /* numbered so far */
    int n_complete;          /* of them, not truncated */
    size_t usual_count;      /* samples of the first burst */
    bool counts_differ;      /* once another burst had another number of samples */
    an_remark_list *remarks; /* of the dump as a whole */
} an_rows;

void an_burst_facts_init(an_burst_facts *facts);

/* an_burst_facts_set: store one value.
 *   value [in] SI for roles with a unit */
void an_burst_facts_set(an_burst_facts *facts, an_role role, double value);

/* an_rows_init, an_rows_release. */
void an_rows_init(an_rows *rows, const an_dump_source *source, const an_dump_visitor *visitor,
                  an_remark_list *remarks);
void an_rows_release(an_rows *rows);

/* an_rows_bind: a layout's channel is read from a field.
 *   unit [in] [n_unit] of the dump's unit row; NULL: none; must agree with the layout's
 * Returns AN_OK, or AN_E_UNIT. */
an_status an_rows_bind(an_rows *rows, const an_layout_channel *channel, int position, const char *unit,
                       size_t n_unit, an_error *err);

/* an_rows_mark_missing: the row that is being added has no value in this channel (which holds 0 then). */
an_status an_rows_mark_missing(an_rows *rows, an_channel_in *in, an_error *err);

/* an_rows_end_row: all channels of a row are added; finds bursts where the layout says so. */
an_status an_rows_end_row(an_rows *rows, an_error *err);

/* an_rows_end_burst: hand on what was collected; nothing where no row was. */
an_status an_rows_end_burst(an_rows *rows, an_error *err);

/* an_rows_last_is_short: whether the burst that is being read has fewer rows than declared, or than all
 * before it had. */
bool an_rows_last_is_short(const an_rows *rows);

#endif
