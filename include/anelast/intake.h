/* anelast/intake.h: the first stage, a dump to a run document: layout, specimen and apparatus joined, the run
 * named, every burst written as soon as it is read.
 */
#ifndef ANELAST_INTAKE_H
#define ANELAST_INTAKE_H

#include "anelast/procedure.h"
#include "anelast/status.h"

/* What to take in. Paths; NULL where not given, unless said. */
typedef struct an_intake {
    const char *dump;              /* not NULL */
    const char *layout;            /* not NULL */
    const char *sidecar;           /* text beside a binary dump; NULL: by the layout's rule */
    const char *specimen;          /* NULL: what the dump says is all */
    const char *apparatus;         /* NULL: ideal, and remarked upon */
    const char *run_id;            /* NULL: specimen and start time */
    const char *output;            /* "-" or NULL: standard output */
    const an_procedure *procedure; /* not NULL */
} an_intake;

/* What came of it. */
typedef struct an_intake_result {
    char run_id[160];
    int n_burst;          /* bursts written */
    int n_skip;           /* of them, with a remark that they are to be skipped */
    int is_held;          /* nonzero: a remark of the run forbids a lot decision */
    char first_hold[256]; /* text of the first such remark */
} an_intake_result;

/* an_intake_take: read the dump, write the run document whole or not at all.
 * Returns AN_OK, or the refusal with its place. */
an_status an_intake_take(const an_intake *intake, an_intake_result *result, an_error *err);

/* an_run_id_make: a name for a run that is safe as the name of a file: specimen and start without colons and
 * zone, "RP-0417-2_2026-03-09T142000"; where the start is not known, specimen and the dump's stem; where the
 * specimen is not, the stem alone, and where there is no dump ("") the specimen alone. Other characters than
 * letters, digits, '.', '_' and '-' become '-'. id [out] [n_id] bytes */
void an_run_id_make(const char *specimen, const char *started, const char *dump, char *id, size_t n_id);

#endif
