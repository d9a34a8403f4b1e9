/* anelast/sinefit.h: the least-squares sine fit of the two waveforms of a burst [IEEE1057], and the complex
 * stiffness with its noise. Numerics on plain arrays; stage: phase.
 *
 * Model, the same columns for displacement and force, one frequency for both:
 *   y(t) = Re sum_h A_h exp(i h omega (t - t0)) + drift polynomial + decaying start-up terms, t0 the middle
 *     of the samples.
 */
#ifndef ANELAST_SINEFIT_H
#define ANELAST_SINEFIT_H

#include "anelast/status.h"

#include <complex.h>

enum { AN_DISPLACEMENT = 0, AN_FORCE = 1, AN_CHANNELS = 2 };
enum { AN_HARMONICS = 20, AN_DRIFT_DEGREES = 4, AN_DECAYS = 2 };

/* Two channels sampled together. Borrowed arrays. */
typedef struct an_waveform {
    int n;                          /* samples */
    const double *time_s;           /* [n] [s] rising */
    const double *y[AN_CHANNELS];   /* [n] [m] displacement, [N] force (or [rad], [N.m]) */
    const unsigned char *use;       /* [n] nonzero: the sample counts; NULL: all do */
    double resolution[AN_CHANNELS]; /* [unit of y] one step of the converter or of the printed decimals; 0:
                                       not known */
} an_waveform;

/* Choices of the fit. */
typedef struct an_sinefit_choice {
    double frequency_Hz;       /* [Hz] where to start, or the known frequency; > 0 */
    int frequency_known;       /* nonzero: the frequency is not fitted */
    int drift_degree;          /* 0..AN_DRIFT_DEGREES */
    int n_harmonic;            /* 1..AN_HARMONICS, lowered where a cycle has too few samples */
    int n_decay;               /* 0..AN_DECAYS exponentials for what is left of the start-up */
    double level[AN_CHANNELS]; /* [unit of y] noise that is known, standard; 0: estimated from the residual */
} an_sinefit_choice;

/* What came out. */
typedef struct an_sinefit {
    double frequency_Hz, u_frequency_Hz;                 /* [Hz] */
    double origin_s;                                     /* [s] t0 of the phases */
    int n_harmonic;                                      /* fitted */
    double complex amplitude[AN_CHANNELS][AN_HARMONICS]; /* [unit of y] A_h, h = 1 first; zero to peak */
    double u_amplitude[AN_CHANNELS];                     /* [unit of y] of Re or Im of any A_h, noise only */
    double mean[AN_CHANNELS];                            /* [unit of y] of the drift at t0 */
    double drift[AN_CHANNELS];     /* [unit of y] the drift's change over the window, last less first */
    double deviation[AN_CHANNELS]; /* [unit of y] residual's standard deviation */
    double near_line[AN_CHANNELS]; /* [unit of y] white level that the residual near the line stands for */
    double level[AN_CHANNELS];     /* [unit of y] the one the covariance was made with */
    double excess[AN_CHANNELS];    /* [1] probability of so high a level near the line from white noise */
    double covariance[4][4];       /* of displacement Re, Im, force Re, Im of A_1: [unit of y squared] */
    double tie[4];                 /* d (the same four) / d omega: [unit of y s/rad]; 0 where it was known */
    double complex stiffness;      /* [N/m] force / displacement */
    double stiffness_noise[3];     /* [N2/m2] var K', cov(K', K''), var K'' */
    double n_cycle;                /* [1] in the window */
    int n_used;                    /* samples */
} an_sinefit;

/* an_sinefit_choice_init: quadratic drift, 5 harmonics, 2 decays, frequency free. */
void an_sinefit_choice_init(an_sinefit_choice *choice);

/* an_sinefit_run: fit both channels.
 *   waveform [in]; choice [in]; fit [out]
 *   residual [out, nullable] [AN_CHANNELS][n] flat, [unit of y]; also where use is 0
 * The covariance is that of white noise at `level`: the residual's standard deviation, or where that differs
 * significantly (0.5 % each side) from what stands near the line (0.45 to 2.3 times the frequency, at most 10
 * bins each side), the level near the line; and the part of the rounding error that recurs in every cycle of
 * coherent sampling is added [WID61]. A noise common to both channels enters by the residuals' correlation.
 * Returns AN_OK; AN_E_VALUE (fewer samples than unknowns, no span, choice out of range); AN_E_NUMERIC
 * (singular, or the frequency ran away by more than one over the span); AN_E_SCIENCE (no displacement at the
 * frequency); AN_E_MEMORY. */
an_status an_sinefit_run(const an_waveform *waveform, const an_sinefit_choice *choice, an_sinefit *fit,
                         double *residual, an_error *err);

/* an_sinefit_line: amplitude of a sine of a given frequency in a residual, by projection.
 *   time_s, y [in] [n]; use [in, nullable] [n]; returns the complex amplitude, phase at time 0. */
double complex an_sinefit_line(int n, const double *time_s, const double *y, const unsigned char *use,
                               double frequency_Hz);

#endif
