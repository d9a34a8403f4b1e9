/* anelast/dump.h: a dump, as its layout says, becomes bursts, streaming: text or binary, whatever the
 * dialect. Everything that the dump holds is kept without loss; what is broken is refused with file, line,
 * step and column, or remarked upon.
 */
#ifndef ANELAST_DUMP_H
#define ANELAST_DUMP_H

#include "anelast/layout.h"
#include "anelast/remark.h"
#include "anelast/run.h"
#include "anelast/status.h"

/* What to read. */
typedef struct an_dump_source {
    const char *path;    /* of the dump */
    const char *sidecar; /* of the text beside a binary dump; NULL: none, or not needed */
    const char *excerpt; /* a text that stands in the place of the file, in UTF-8; NULL: the file is read */
    const an_layout *layout;
    double missing_most; /* [1] greatest part of a burst's rows that may lack a value; above it the burst is
                            skipped */
} an_dump_source;

/* Who wants the bursts. A negative status stops the reading and is handed back. */
typedef struct an_dump_visitor {
    /* once, before the first burst: what the dump's own head says of the specimen */
    an_status (*head)(const an_specimen *own, void *user, an_error *err);
    /* each burst, numbered from 1; its remarks may say that it is to be skipped; cleared when the call
     * returns */
    an_status (*burst)(const an_burst *burst, void *user, an_error *err);
    void *user;
} an_dump_visitor;

/* an_dump_read: read a dump.
 *   remarks [in, out] of the dump as a whole, complete only at the end
 * Returns AN_OK, AN_E_IO, AN_E_FORMAT (not as the layout says), AN_E_UNIT, AN_E_VALUE, AN_E_LIMIT,
 * AN_E_MEMORY, or the visitor's refusal. */
an_status an_dump_read(const an_dump_source *source, const an_dump_visitor *visitor, an_remark_list *remarks,
                       an_error *err);

/* an_dump_sidecar: the path of the text beside a binary dump, by the layout's rule: the dump's path with
 * another extension. path [out] [n_path] bytes; "" where the layout knows no sidecar Returns AN_OK or
 * AN_E_LIMIT. */
an_status an_dump_sidecar(const char *dump, const an_layout *layout, char *path, size_t n_path,
                          an_error *err);

#endif
