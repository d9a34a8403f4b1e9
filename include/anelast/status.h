/* anelast/status.h: how errors travel. Ground floor of everything.
 *
 * Every function that can fail returns an an_status and, where the caller gave one, fills an an_error. Positive:
 * computed, with remarks; zero: good; negative: refused, outputs untouched unless a header says otherwise. Numbers
 * are stable: programs outside may store them.
 */
#ifndef ANELAST_STATUS_H
#define ANELAST_STATUS_H

typedef enum an_status {
    AN_DUBIOUS = 1,    /* computed, but remarks tell of doubts */
    AN_OK = 0,         /* good */
    AN_E_USAGE = -1,   /* the call itself is wrong: argument out of its documented range, NULL where not allowed */
    AN_E_IO = -2,      /* a file cannot be opened, read, written, synced or renamed */
    AN_E_MEMORY = -3,  /* no memory */
    AN_E_FORMAT = -4,  /* a dump or a text does not have the form its layout says */
    AN_E_DOCUMENT = -5,/* a document is not well-formed, not valid, or of another major version */
    AN_E_VALUE = -6,   /* a value outside what is allowed */
    AN_E_UNIT = -7,    /* a unit unknown, or of the wrong dimension */
    AN_E_LIMIT = -8,   /* a stated bound on count, depth or size was hit */
    AN_E_SCIENCE = -9, /* the data do not allow the result asked for */
    AN_E_NUMERIC = -10 /* a computation did not converge or is singular */
} an_status;

/* Owned by the caller, filled by the callee, never allocated. */
typedef struct an_error {
    an_status status;
    char place[512]; /* file, file:line, or file:line: step N; "" where there is none */
    char text[1024]; /* what was got, and what is allowed; no trailing full stop or newline */
} an_error;

/* an_fail: fill err (NULL allowed) and return status, so that a refusal is one line.
 *   place  [in] NULL or "" where there is none
 *   format [in] printf format of the text
 * Returns status. */
an_status an_fail(an_error *err, an_status status, const char *place, const char *format, ...)
    __attribute__((format(printf, 4, 5)));

/* an_fail_memory: shorthand for AN_E_MEMORY with what was wanted. Returns AN_E_MEMORY. */
an_status an_fail_memory(an_error *err, const char *wanted);

/* an_error_at: put a place in front of an error that has none yet (or prefix "place: " to a shorter one).
 * Returns err->status. */
an_status an_error_at(an_error *err, const char *place);

/* an_exit_code: the exit code of a program for a status: 0 done, 1 refused or failed scientifically, 2 usage, 3 I/O. */
int an_exit_code(an_status status);

/* AN_TRY: forward a refusal; lets positive statuses pass as good. Only where nothing has to be released. */
#define AN_TRY(call)                 \
    do {                             \
        an_status try_ = (call);     \
        if (try_ < 0)                \
            return try_;             \
    } while (0)

/* AN_CLEAN: the same where the function has a `cleanup:` label and a variable `an_status status`. */
#define AN_CLEAN(call)               \
    do {                             \
        status = (call);             \
        if (status < 0)              \
            goto cleanup;            \
    } while (0)

#endif
