/* after_run.h: one dump after a run: through all stages into a folder of documents and a page, and what the
 * technician reads. Starts the stage programs and reads their documents as XML; links nothing above the
 * ground floor.
 */
#ifndef ANELAST_AFTER_RUN_H
#define ANELAST_AFTER_RUN_H

#include "anelast/status.h"

#include <limits.h>
#include <stdio.h>

/* What the command line says for every dump; NULL where it does not. */
typedef struct an_after_options {
    const char *layout, *specimen, *apparatus, *procedure;
    const char *override_reason; /* why a complex material is handed over all the same */
    const char *into;            /* folder of the run folders */
} an_after_options;

/* What came of one dump. */
typedef struct an_after_run {
    char folder[PATH_MAX]; /* where the documents are in the end */
    char layout[PATH_MAX]; /* chosen beside the dump; "" where given or absent; likewise the next two */
    char specimen[PATH_MAX];
    char apparatus[PATH_MAX];
    char id[160];               /* of the run */
    char about[400];            /* specimen, material and lot, as far as known */
    int n_oscillation, n_other; /* bursts; other: holds and pulls */
    int replaced;               /* nonzero: an earlier reduction of the same dump stood in its place */
    char stopped_at[32];        /* the stage that refused while earlier documents stand; "" where none did */
    char reason[1024];          /* what it said */
    char no_page[1024];         /* what anelast-report said where it made no page; "" where it did */
    char no_material[1024];     /* why there is no material; "" where there is one */
} an_after_run;

/* an_after_run_make: reduce one dump.
 *   programs [in] folder of the stage programs; dump [in] path; run [out]
 * Returns AN_OK where at least a grid, or a run of holds and pulls, stands; AN_DUBIOUS where documents
 * stand but no grid, or no page; or a refusal, AN_E_USAGE, AN_E_IO, AN_E_SCIENCE, and nothing is left behind.
 * What a refusing stage said is in err. */
an_status an_after_run_make(const char *programs, const char *dump, const an_after_options *options,
                            an_after_run *run, an_error *err);

/* an_after_run_print: the summary, under 15 lines, from the documents in the run's folder. */
an_status an_after_run_print(const an_after_run *run, FILE *out, an_error *err);

#endif
