/* anelast/points.h: the points document: the complex modulus of every burst, its quality and its uncertainty,
 * noise and common parts apart. Written by anelast-phase.
 *
 *   <points version="1.0" id="...">  made, specimen, apparatus, remark (of the run), then for every burst
 *     <point burst="1" state="used|flagged|skipped"> ... </point>
 *   and <end points="91"/>.
 */
#ifndef ANELAST_POINTS_H
#define ANELAST_POINTS_H

#include "anelast/apparatus.h"
#include "anelast/provenance.h"
#include "anelast/remark.h"
#include "anelast/specimen.h"

/* Sources of common uncertainty: one unknown each for the whole run, so that each shifts all points of a run
 * together. */
typedef enum an_source {
    AN_SOURCE_LENGTH = 0,
    AN_SOURCE_WIDTH,
    AN_SOURCE_THICKNESS,
    AN_SOURCE_DIAMETER,
    AN_SOURCE_HEIGHT,
    AN_SOURCE_AREA,
    AN_SOURCE_ADDED_LENGTH,
    AN_SOURCE_SHEAR_TERM, /* Poisson ratio or E/G */
    AN_SOURCE_CONSTRAINT, /* shape factor and bulk modulus of a bonded block */
    AN_SOURCE_FORCE_GAIN,
    AN_SOURCE_DISPLACEMENT_GAIN,
    AN_SOURCE_DELAY, /* of one channel against the other */
    AN_SOURCE_MOVING_MASS,
    AN_SOURCE_SHAFT,
    AN_SOURCE_COMPLIANCE,
    AN_SOURCE_TRANSDUCER, /* its stiffness and the fixture's mass, force at the fixed end */
    AN_SOURCE_COUNT
} an_source;

/* an_source_word: the word of a source in documents and on the page, e.g. "thickness". */
const char *an_source_word(an_source source);
an_source an_source_find(const char *word); /* AN_SOURCE_COUNT if unknown */

/* Rungs of the ladder, from the sensor inwards; what each one changed. */
typedef enum an_rung {
    AN_RUNG_CHANNEL = 0, /* gains and delays */
    AN_RUNG_PARALLEL,    /* shaft stiffness, damping, moving mass (drive); fixture mass (fixed end) */
    AN_RUNG_SERIES,      /* frame compliance, transducer stiffness */
    AN_RUNG_END,         /* end correction, shear or constraint term of the geometry */
    AN_RUNG_COUNT
} an_rung;

/* an_rung_word: the word of a rung in documents. an_rung_phrase: what it corrects, in words for people. */
const char *an_rung_word(an_rung rung);
const char *an_rung_phrase(an_rung rung);

typedef enum an_point_state { AN_POINT_USED = 0, AN_POINT_FLAGGED, AN_POINT_SKIPPED } an_point_state;

/* One burst reduced. All NAN where state is skipped and the value could not be had. */
typedef struct an_point {
    int burst, step;
    an_point_state state;
    double start_s;                /* [s] since the run's start */
    double temperature_K;          /* [K] mean over the samples kept, bias taken off */
    double u_temperature_K;        /* [K] noise part, standard */
    double temperature_rate_K_s;   /* [K/s] */
    double set_temperature_K;      /* [K] NAN: not said */
    double frequency_Hz;           /* [Hz] found */
    double u_frequency_Hz;         /* [Hz] */
    double set_frequency_Hz;       /* [Hz] NAN: not said */
    int n_sample;                  /* kept */
    double n_cycle;                /* kept */
    double n_cycle_dropped;        /* of the start-up */
    double displacement_m;         /* [m] amplitude, zero to peak */
    double force_N;                /* [N] amplitude */
    double static_force_N;         /* [N] mean */
    double strain;                 /* [1] amplitude */
    double static_strain;          /* [1] mean displacement over the geometry's length */
    double measured_stiffness[2];  /* [N/m] K', K'' as the channels say */
    double specimen_stiffness[2];  /* [N/m] K_s', K_s'' after the ladder */
    double rung[AN_RUNG_COUNT][2]; /* [1] (change of K', change of K'') / |K| before the rung */
    double stiffness_compliance;   /* [1] |K_s| C */
    double storage_Pa, loss_Pa;    /* [Pa] E', E'' (G', G'' for a shear geometry) */
    double noise[3];               /* [Pa2] var E', cov(E', E''), var E'': independent from burst to burst */
    double common[AN_SOURCE_COUNT][2]; /* [Pa] (dE', dE'') for one standard uncertainty of the source */
    double snr_dB;                     /* [dB] the worse channel */
    double harmonic[2];                /* [1] I2/I1, I3/I1 of force, the drive's own share taken off */
    an_remark_list remarks;
} an_point;

typedef struct an_points {
    char id[160];
    an_made made;
    an_specimen specimen;
    an_apparatus apparatus;
    an_remark_list remarks; /* of the run as a whole, the run document's among them */
    int n_point, capacity;
    an_point *point; /* [n_point], owned */
} an_points;

void an_points_init(an_points *points);
void an_points_clear(an_points *points);

/* an_points_add: a new point at the end, init'ed (NAN, no remarks); NULL without memory. */
an_point *an_points_add(an_points *points);

/* an_point_common: sum over sources of the outer products, [Pa2] var E', cov, var E''. */
void an_point_common(const an_point *point, double covariance[3]);

/* an_point_loss_factor: tan delta and its two standard uncertainties, from the covariances. */
void an_point_loss_factor(const an_point *point, double *loss_factor, double *u_noise, double *u_common);

an_status an_points_read(const char *path, an_points *points, char sha256[65], an_error *err);
void an_points_write(an_xml_writer *writer, const an_points *points);

#endif
