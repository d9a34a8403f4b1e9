/* sidecar.h: the text beside a binary dump: rows of key=value. */
#ifndef ANELAST_DUMP_SIDECAR_H
#define ANELAST_DUMP_SIDECAR_H

#include "acquire/dump/head.h"
#include "acquire/dump/rows.h"
#include "anelast/dump.h"

/* What it says of one channel. */
typedef struct an_sidecar_channel {
    char name[64];
    char unit[64];
    double size; /* [unit] of one count; NAN: not said */
} an_sidecar_channel;

/* What it says. */
typedef struct an_sidecar {
    an_head head;                                  /* of the specimen */
    an_counts_form form;                           /* the layout's, checked against the text */
    int n_channel;                                 /* rows of channels seen; highest number */
    an_sidecar_channel channels[AN_CHANNELS_MOST]; /* by number, from 1 at index 0 */
    double n_declared;                             /* [1] channels that the text declares; NAN */
    size_t n_burst, room;
    an_burst_facts *bursts; /* [n_burst] */
    an_burst_facts common;  /* values outside the burst table: a rate for all */
} an_sidecar;

/* an_sidecar_read: read the text.
 *   sidecar [out] release with an_sidecar_release, also after a refusal
 * Returns AN_OK, AN_E_IO, AN_E_FORMAT, AN_E_UNIT, AN_E_VALUE, AN_E_LIMIT or AN_E_MEMORY with file and line.
 */
an_status an_sidecar_read(const char *path, const an_layout *layout, an_sidecar *sidecar, an_error *err);

void an_sidecar_release(an_sidecar *sidecar);

#endif
