/* anelast/spectrum.h: relaxation spectra: dense and regularised from observations of any kind, and the few
 * modes handed over.
 *
 * Both are generalised Maxwell models with non-negative strengths. All observations stand at their own shift,
 * so that oscillation, holds and pulls at several temperatures give one spectrum.
 */
#ifndef ANELAST_SPECTRUM_H
#define ANELAST_SPECTRUM_H

#include "anelast/maxwell.h"
#include "anelast/response.h"
#include "anelast/smooth.h"

/* What the long end is: decided by the data, or said by the user. */
typedef enum an_end_state { AN_UNDETERMINED = 0, AN_SOLID, AN_LIQUID } an_end_state;

const char *an_end_state_word(an_end_state state); /* "solid", "liquid", "undetermined" */

typedef struct an_spectrum_options {
    double modes_per_decade; /* of the dense grid; doubled while that pays, up to the next */
    double most_modes_per_decade;
    double extend_decades;  /* grid beyond the data on either side */
    an_strength_rule rule;  /* strength of the regularisation */
    an_end_state end_state; /* undetermined: the data decide; else said by the user */
    double error;           /* of the few modes, relative, over the window */
    size_t most_modes;      /* of the few */
} an_spectrum_options;

typedef struct an_spectrum {
    an_maxwell model; /* at T0; Pa, s */
    an_end_state end_state;
    double evidence_against_liquid; /* chi-square lost without an equilibrium modulus, over the reduced
                                       chi-square where that is above 1 */
    double modes_per_decade;        /* of the grid kept */
    double strength;                /* in force */
    double strength_cross;          /* by generalised cross-validation */
    double disagreement_decades;    /* |log10| of their ratio */
    double chi_square, used;        /* against the noise; effective parameters */
    size_t n_data;
    double omega_range[2]; /* rad/s, reduced; times count as 1/t */
    double window_s[2];    /* s, trusted relaxation times */
} an_spectrum;

/* an_spectrum_defaults: 4 modes a decade, up to 16, one decade beyond the data, discrepancy principle, 1 %
 * for the few modes. */
void an_spectrum_defaults(an_spectrum_options *options);

void an_spectrum_init(an_spectrum *spectrum);
void an_spectrum_clear(an_spectrum *spectrum);

/* an_spectrum_window: trusted relaxation times of data between two reduced angular frequencies,
 * exp(pi/2)/omega_max .. exp(-pi/2)/omega_min [DA97]; empty (first above second) where the data span less
 * than exp(pi). omega_range [in] rad/s, least and greatest; window_s [out] s */
void an_spectrum_window(const double omega_range[2], double window_s[2]);

/* an_spectrum_dense: dense regularised spectrum.
 *   observation  [in]  [n_observation]
 *   options      [in]  NULL: the defaults
 *   spectrum     [out] init'ed by the caller, who clears it
 * Returns AN_OK; AN_E_VALUE (an observation out of its range); AN_E_NUMERIC; AN_E_MEMORY. */
an_status an_spectrum_dense(const an_observation *observation, size_t n_observation,
                            const an_spectrum_options *options, an_spectrum *spectrum, an_error *err);

/* The few modes. */
typedef struct an_prony {
    an_maxwell model;     /* times rising, strengths above zero; owned */
    double *u_modulus_Pa; /* [n_mode + 1] noise part at fixed times, the equilibrium modulus last; owned */
    double rms_error;     /* against the dense spectrum over the range, relative */
    double worst_error;
    int within; /* nonzero: worst_error is inside half the stated error */
} an_prony;

void an_prony_init(an_prony *prony);
void an_prony_clear(an_prony *prony);

/* an_prony_fit: the fewest modes, times free, strengths non-negative, that follow the dense spectrum within
 * half the stated error (the other half is left to the dense spectrum's own noise): E' and E'' relative to
 * |E*| over the frequencies of the data, E(t) over the trusted window. Times by variable projection as in
 * superpose.h. dense        [in]  of an_spectrum_dense or of the joint fit omega_range  [in]  rad/s, reduced
 *   options      [in]  NULL: the defaults
 * Returns AN_OK; AN_DUBIOUS where most_modes do not reach the error; AN_E_SCIENCE (empty range);
 * AN_E_NUMERIC; AN_E_MEMORY. */
an_status an_prony_fit(const an_maxwell *dense, const double omega_range[2],
                       const an_spectrum_options *options, an_prony *prony, an_error *err);

/* an_prony_uncertainty: fill u_modulus_Pa: what the noise of the observations means for the strengths at the
 * times given; a strength that the observations do not determine gets INFINITY. Returns AN_OK, AN_E_VALUE or
 * AN_E_MEMORY. */
an_status an_prony_uncertainty(const an_observation *observation, size_t n_observation, an_prony *prony,
                               an_error *err);

/* an_observation_rows: whitened rows of observations: row i divided by its uncertainty, the correlation with
 * the observation before it taken out. set   [in] rows  [out] [set->n x (n_mode + 1 + 1)] modes, equilibrium,
 * data; stride and value set by the caller, n_row and n_column filled; without equilibrium its column is left
 * out Returns AN_OK or AN_E_VALUE naming the observation. */
typedef struct an_observation_set {
    const an_observation *observation; /* [n] */
    size_t n;
    const an_maxwell *times; /* whose times_s are the modes; its strengths are not used */
    int equilibrium;         /* nonzero: a column for the equilibrium modulus */
} an_observation_set;
an_status an_observation_rows(const an_observation_set *set, an_columns *rows, an_error *err);

#endif
