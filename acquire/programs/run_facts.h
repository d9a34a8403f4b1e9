/* run_facts.h: what the after-run program has to know of a run document: whose it is, of which dump, and what
 * bursts it holds.
 */
#ifndef ANELAST_RUN_FACTS_H
#define ANELAST_RUN_FACTS_H

#include "anelast/status.h"

typedef struct an_run_facts {
    char id[160];
    char about[400];   /* specimen, material, lot, rig */
    char dumps[4096];  /* hashes of the inputs that are dumps */
    char others[4096]; /* roles and hashes of the other inputs */
    int n_oscillation; /* bursts */
    int n_other;       /* holds and pulls */
} an_run_facts;

/* an_run_facts_read: from a run document, in the memory of one burst. Returns AN_OK, AN_E_IO, AN_E_DOCUMENT,
 * AN_E_MEMORY. */
an_status an_run_facts_read(const char *path, an_run_facts *facts, an_error *err);

#endif
