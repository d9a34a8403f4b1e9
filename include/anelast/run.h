/* anelast/run.h: the run document: one dump with its units known, its bursts apart, nothing lost. Written by
 * anelast-intake, read burst by burst by anelast-phase, so that memory is bounded by the largest burst.
 *
 *   <run version="1.0" id="...">
 *     <made .../>                      provenance (anelast/provenance.h)
 *     <specimen .../> <apparatus .../> as merged for this run
 *     <remark .../> ...                of the run as a whole
 *     <burst n="1" step="1" kind="oscillation">
 *       <set_temperature value= unit="K"/> <set_frequency value= unit="Hz"/>   where the dump says so
 *       <clock start= interval= count=/>                                       or a signal of quantity time
 *       <signal quantity="displacement" .../> <signal quantity="force" .../>
 *       <signal quantity="temperature" .../>
 *       <remark .../>
 *     </burst> ...
 *     <end bursts="91"> <remark .../> </end>
 *   </run>
 *
 * A run document without its <end> is truncated. Remarks in <end> are of the run as a whole too: those that
 * only the end of the dump could show (`truncated`).
 */
#ifndef ANELAST_RUN_H
#define ANELAST_RUN_H

#include "anelast/apparatus.h"
#include "anelast/provenance.h"
#include "anelast/remark.h"
#include "anelast/signal.h"
#include "anelast/specimen.h"

typedef enum an_burst_kind { AN_BURST_OSCILLATION = 0, AN_BURST_HOLD, AN_BURST_PULL } an_burst_kind;

/* Uniform time, or none (interval NAN) where a time signal stands instead. */
typedef struct an_clock {
    double start;    /* [s] since the run's start */
    double interval; /* [s] */
    long count;      /* samples */
} an_clock;

typedef struct an_burst {
    int n;    /* number within the run, from 1 */
    int step; /* the dump's own step number; 0: none */
    an_burst_kind kind;
    double set_temperature_K; /* [K] NAN: not said */
    double set_frequency_Hz;  /* [Hz] NAN: not said */
    an_clock clock;
    int has_time;           /* nonzero: `time` holds the times, clock.interval is NAN */
    an_signal time;         /* [s] */
    an_signal displacement; /* [m] or [rad] */
    an_signal force;        /* [N] or [N.m] */
    an_signal temperature;  /* [K]; count 0: no channel */
    an_remark_list remarks;
} an_burst;

typedef struct an_run {
    char id[160];
    an_made made;
    an_specimen specimen;
    an_apparatus apparatus;
    an_remark_list remarks; /* of the run as a whole; those of <end> join them after the last burst */
    size_t n_written;       /* remarks that an_run_write_head wrote; the later ones go into <end> */
    int n_burst;            /* from <end>, known after the last burst */
} an_run;

void an_run_init(an_run *run);
void an_run_clear(an_run *run);
void an_burst_init(an_burst *burst);
void an_burst_clear(an_burst *burst);

/* an_run_write_head / _burst / _end: write the document piece by piece, root element open; errors of the
 * stream show when it is committed. The head sets run->n_written; bursts are numbered by the caller, who sets
 * run->n_burst before the end. an_run_write_burst returns AN_OK or AN_E_MEMORY. */
void an_run_write_head(an_xml_writer *writer, an_run *run);
an_status an_run_write_burst(an_xml_writer *writer, const an_burst *burst, an_error *err);
void an_run_write_end(an_xml_writer *writer, const an_run *run);

/* What an_run_read calls: head once, before the first burst; burst for each one. The burst belongs to the
 * reader and is cleared when the call returns. A negative status stops the reading and is handed back. */
typedef struct an_run_visitor {
    an_status (*head)(const an_run *run, void *user, an_error *err);                         /* nullable */
    an_status (*burst)(const an_run *run, const an_burst *burst, void *user, an_error *err); /* nullable */
    void *user;
} an_run_visitor;

/* an_run_read: read and validate a run document, streaming.
 *   path [in] file, or "-" for standard input; run [out] init'ed by the caller; sha256 [out, nullable] hex of
 * the bytes. Returns AN_OK, or AN_E_IO, AN_E_DOCUMENT (also: truncated, a part's hash is wrong), or the
 * visitor's refusal. */
an_status an_run_read(const char *path, an_run *run, const an_run_visitor *visitor, char sha256[65],
                      an_error *err);

/* an_burst_times: the sample times [s] of a burst, clock.count of them, from the clock or the time signal. */
void an_burst_times(const an_burst *burst, double *time_s);

#endif
