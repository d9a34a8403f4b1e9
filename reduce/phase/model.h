/* The linear model of the sine fit: columns of its design matrix, normal equations and their solution.
 * Private to phase.
 *
 * Columns: cos and -sin of every harmonic (so that the coefficients are Re and Im of A_h), Legendre
 * polynomials over the window, decays. Rows are made when needed, so that memory does not grow with columns
 * times samples.
 */
#ifndef ANELAST_PHASE_MODEL_H
#define ANELAST_PHASE_MODEL_H

#include "anelast/sinefit.h"

enum { AN_COLUMNS = 2 * AN_HARMONICS + AN_DRIFT_DEGREES + 1 + AN_DECAYS };

typedef struct an_model {
    double omega;        /* [rad/s] */
    double origin, half; /* [s] middle and half length of the window */
    double start;        /* [s] first sample, where the decays are 1 */
    int n_harmonic, n_poly, n_decay, n_column;
    double rate[AN_DECAYS]; /* [1/s] */
    int n_used;             /* samples that count */
    double n_cycle;         /* in the window */
} an_model;

/* Solution of the normal equations at one omega. */
typedef struct an_solution {
    double inverse[AN_COLUMNS][AN_COLUMNS];      /* of the Gram matrix */
    double coefficient[AN_CHANNELS][AN_COLUMNS]; /* [unit of y] */
    double sum_square[AN_CHANNELS];              /* [unit of y squared] of the residual, samples that count */
    double sum_cross;                            /* [m.N] residual times residual */
    double slope_column[AN_CHANNELS][AN_COLUMNS]; /* model columns times d y / d omega */
    double slope_self[AN_CHANNELS];     /* d y / d omega squared, what the columns explain taken off */
    double slope_residual[AN_CHANNELS]; /* d y / d omega times residual */
} an_solution;

/* an_model_set: the model for a waveform and choice. Returns AN_OK or AN_E_VALUE. */
an_status an_model_set(an_model *model, const an_waveform *waveform, const an_sinefit_choice *choice,
                       an_error *err);

/* an_model_row: the columns at time t; row [n_column]. */
void an_model_row(const an_model *model, double t, double *row);

/* an_model_slope: d y / d omega at time t for a channel's coefficients, from the row there. */
double an_model_slope(const an_model *model, double t, const double *row, const double *coefficient);

/* an_model_solve: normal equations, coefficients and residual at the model's omega. residual [out]
 * [AN_CHANNELS][n].
 * Returns AN_OK or AN_E_NUMERIC. */
an_status an_model_solve(const an_model *model, const an_waveform *waveform, an_solution *solution,
                         double *residual, an_error *err);

/* Noise near the line. */
typedef struct an_near_line {
    double level[AN_CHANNELS];    /* [unit of y] white level of all bins together; NAN where none is free */
    double balanced[AN_CHANNELS]; /* [unit of y] geometric mean of both sides: for noise that slopes over the
                                     band */
    double freedom;               /* [1] degrees of freedom behind level */
} an_near_line;

/* an_noise_near_line: the white level that the residual has near the line, unbiased for what the fit took out
 * of it.
 *   weight [in] [AN_CHANNELS] share of the frequency's information that each channel gave (0 where it was
 *     known)
 *   near [out] */
void an_noise_near_line(const an_model *model, const an_waveform *waveform, const an_solution *solution,
                        const double *residual, const double weight[AN_CHANNELS], an_near_line *near);

#endif
