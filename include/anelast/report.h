/* anelast/report.h: the page of a run: one HTML file that needs nothing else, from any of the documents.
 * Floor fit.
 *
 * The page shows what the documents say and decides nothing of its own: the verdict is the grid document's
 * assessment. What is not there is said, with the reason where a document has one. It works without a script
 * and a network, prints as vectors, and shows everything that a document or a person supplied escaped.
 */
#ifndef ANELAST_REPORT_H
#define ANELAST_REPORT_H

#include "anelast/material.h"
#include "anelast/master.h"
#include "anelast/run.h"

#include <stdbool.h>
#include <stdio.h>

/* A document that was read for the page. */
typedef struct an_report_source {
    char role[16];  /* "run", "points", "grid", "master", "material" */
    char file[256]; /* file name without folder; "standard input" for a stream */
    char sha256[AN_SHA256_SIZE];
} an_report_source;

/* The documents, in the order of the page. */
typedef enum an_report_role {
    AN_REPORT_RUN,
    AN_REPORT_POINTS,
    AN_REPORT_GRID,
    AN_REPORT_MASTER,
    AN_REPORT_MATERIAL,
    AN_REPORT_SOURCES
} an_report_role;

/* The waveform of the burst that the page shows, decoded. */
typedef struct an_report_wave {
    int burst;  /* its number; 0: none was found */
    bool worst; /* picked as the one with the weightiest remarks, not asked for */
    an_burst_kind kind;
    double set_frequency_Hz; /* [Hz] NAN: not said */
    bool rotary;             /* displacement is an angle [rad], force a torque [N.m] */
    size_t n;                /* samples */
    double *time_s;          /* [n] [s] from the first sample, owned */
    double *displacement;    /* [n] [m] or [rad], owned */
    double *force;           /* [n] [N] or [N.m], owned */
} an_report_wave;

/* Everything the page is made of; what was not given keeps its `has_` false. */
typedef struct an_report {
    int n_source;
    an_report_source
        source[AN_REPORT_SOURCES]; /* [n_source] in the order run, points, grid, master, material */
    bool has_run, has_points, has_grid, has_master, has_material;
    an_run run; /* head and remarks */
    an_points points;
    an_grid grid;
    an_master master;
    an_material material;
    an_report_wave wave;
    an_remark_list burst_remarks; /* of the run's bursts, where no points document carries them on */
    char missing[AN_REPORT_SOURCES]
                [400]; /* by role: why there is no such document, plain; "" where nobody said */
} an_report;

void an_report_init(an_report *report);
void an_report_clear(an_report *report);

/* an_report_read: read and validate documents of any kind and in any order, at most one of each.
 *   paths  [in]     [n_path] files, "-" for standard input (once)
 *   burst  [in]     the burst whose waveform is wanted; 0: the one with the weightiest remarks, of those the
 * one with the lowest signal-to-noise ratio; without a points document the first report [in,out] init'ed by
 * the caller Returns AN_OK; AN_E_USAGE (two documents of one kind, no document of a kind that is shown, a
 * burst that the run does not have), AN_E_IO, AN_E_DOCUMENT, AN_E_MEMORY. */
an_status an_report_read(an_report *report, char *const *paths, int n_path, int burst, an_error *err);

/* an_report_say_missing: keep why a document was not made, to be shown where it would stand.
 *   text [in] its root element, an equals sign and the reason: "material=the isotherms do not superpose"
 * Returns AN_OK, or AN_E_USAGE where the text has another form. */
an_status an_report_say_missing(an_report *report, const char *text, an_error *err);

/* an_report_write: the page.
 *   made [in]     who makes it, and when
 *   out  [in,out] open for writing; its error flag is the caller's to check
 * Returns AN_OK, AN_E_MEMORY. */
an_status an_report_write(const an_report *report, const an_made *made, FILE *out, an_error *err);

#endif
