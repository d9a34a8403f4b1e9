/* The workspace of a reduction and the steps of a burst that share it. Private to correct. */
#ifndef ANELAST_CORRECT_REDUCER_H
#define ANELAST_CORRECT_REDUCER_H

#include "anelast/budget.h"
#include "anelast/quality.h"
#include "anelast/reduction.h"
#include "anelast/search.h"
#include "anelast/startup.h"

/* Thresholds in force, in SI, read once from the procedure. */
typedef struct an_limits {
    an_sinefit_choice fit;
    an_startup_choice startup;
    double missing_most;      /* [1] share of marked or not finite samples above which a burst is dropped */
    double snr_flag;          /* [dB] */
    double snr_skip;          /* [dB] */
    double correction_flag;   /* [1] change of the stiffness by one rung, as a part */
    int clipped_least;        /* equal extreme samples in a row */
    double clipped_most;      /* [1] share of samples at the end of the range above which a burst is dropped */
    double samples_flag;      /* [1] samples in a cycle */
    double steps_flag;        /* [1] amplitude in converter steps */
    double third_note;        /* [1] I3/I1 */
    double third_flag;        /* [1] */
    double second_flag;       /* [1] I2/I1 */
    double mains_flag;        /* [1] mains line over the force's amplitude */
    double frequency_flag;    /* [1] found against set */
    double frequency_skip;    /* [1] */
    double jitter_flag;       /* [1] rms over the interval */
    double compliance_flag;   /* [1] |K_s| C */
    double compliance_refuse; /* [1] */
    double compliance_draws;  /* [1] above: noise by Monte Carlo */
    double dimension_u;       /* [1] relative standard uncertainty of a dimension that came without one */
    double frozen_s;          /* [s] a temperature that does not move by a bit for longer is none */
    double modulus_least;     /* [Pa] plausible moduli */
    double modulus_most;      /* [Pa] */
    double strain_flag;       /* [1] strain amplitude */
    double strain_most;       /* [1] above: a unit is wrong */
} an_limits;

/* A burst's samples in SI; arrays of the reducer. */
typedef struct an_samples {
    int n;                                       /* finite samples */
    int n_missing;                               /* left out: not finite */
    double *time, *y[AN_CHANNELS], *temperature; /* [n] [s], [m] [N], [K]; temperature NULL: no channel */
    unsigned char *use;                          /* [n] */
    double *residual;                            /* [AN_CHANNELS][n] */
    double resolution[AN_CHANNELS], range[AN_CHANNELS][2];
    double temperature_resolution; /* [K] */
} an_samples;

/* Everything about one burst on its way. */
typedef struct an_reduction {
    const an_burst *burst;
    const an_limits *limits;
    an_point *point;
    an_samples samples;
    an_waveform waveform;
    an_timing timing;
    an_clipping clipping;
    double searched_Hz, prominence; /* excitation search */
    an_startup startup;
    an_sinefit fit;
    an_chain chain;
    an_chain_result result;
    an_quality quality;
} an_reduction;

/* Bursts met so far, by the SHA-256 of their samples. */
typedef struct an_twins {
    struct an_twin *row; /* [n], owned */
    int n, room;
} an_twins;

struct an_reducer {
    an_limits limits;
    an_twins twins;
    an_search *search;
    size_t room;        /* samples that the arrays hold */
    double *array;      /* [6 room] */
    unsigned char *use; /* [room] */
};

/* an_limits_read: thresholds from a procedure. */
void an_limits_read(an_limits *limits, const an_procedure *procedure);

/* an_samples_take: decode a burst into the reducer's arrays; samples that are not finite are left out.
 * Returns AN_OK or AN_E_MEMORY. */
an_status an_samples_take(an_reducer *reducer, const an_burst *burst, an_samples *samples, an_error *err);

/* an_twins_judge: skip a burst whose displacement, force and temperature repeat an earlier burst's byte for byte; noise
 * never does. an_twins_clear: release. Returns AN_OK or AN_E_MEMORY. */
an_status an_twins_judge(an_twins *twins, an_reduction *r, an_error *err);
void an_twins_clear(an_twins *twins);

/* an_judge_record: remarks before the fit: missing samples, times; may skip the burst. an_judge_clipping: after the
 * search. an_judge_burst: all others, after the fit. All return AN_OK or AN_E_MEMORY. */
an_status an_judge_record(an_reduction *r, an_error *err);
an_status an_judge_clipping(an_reduction *r, an_error *err);
an_status an_judge_burst(an_reduction *r, an_error *err);

/* an_point_settle: the state that a point's remarks put it in. */
void an_point_settle(an_point *point);

#endif
