/* fit/superpose/joint.h: the joint fit's workspace, shared by its files: rows, iteration, covariance. Not
 * installed.
 *
 * Rows: point p has its whitened storage row at p and its loss row at n_point + p, so that inner loops run
 * over points without a stride. Whitening: [w0 0; w1 w2] is the inverse Cholesky factor of the point's noise
 * covariance.
 */
#ifndef ANELAST_FIT_JOINT_H
#define ANELAST_FIT_JOINT_H

#include "anelast/superpose.h"

/* Shifts, and where the fit stood with them. */
typedef struct an_joint_state {
    double *log10_a, *log10_b; /* [n_isotherm] */
    double *x_Pa;              /* [most_modes + 1] */
    double cost;               /* chi-square plus penalty */
} an_joint_state;

typedef struct an_joint {
    const an_superpose_input *input;
    an_vertical vertical;
    size_t i_reference;
    int equilibrium;
    size_t n_point, n_row, n_isotherm;
    size_t n_outer; /* free shifts */
    size_t most_modes;
    size_t n_mode;
    double per_decade, extend_decades;
    double *time_s;          /* [most_modes] s */
    size_t *isotherm_of;     /* [n_point] */
    double *w0, *w1, *w2;    /* [n_point] 1/Pa */
    double *y;               /* [n_row] whitened data */
    double *omega, *b;       /* [n_point] reduced angular frequency [rad/s] and b_T of the rows built last */
    an_columns rows;         /* [n_row x (most_modes + 2)] the rows built last */
    an_columns spent;        /* the same size: spoiled by reduction */
    double *model, *slope;   /* [n_row] whitened model and its derivative by log10 a */
    double *gradient, *step; /* [2 n_isotherm] */
    double *half;            /* [2 n_isotherm][most_modes + 1] */
    double *normal, *damped; /* [2 n_isotherm][2 n_isotherm] */
    double *scratch;         /* [most_modes + 1] */
    double strength;
    an_smooth smooth;
    an_joint_state now, trial;
    double *pool; /* all of the above doubles; owned */
} an_joint;

/* Where the outer unknown of log10 a (of log10 b) of an isotherm stands; n_outer where it is fixed. */
size_t an_joint_slot_a(const an_joint *joint, size_t i_isotherm);
size_t an_joint_slot_b(const an_joint *joint, size_t i_isotherm);

void an_joint_init(an_joint *joint);
void an_joint_clear(an_joint *joint);

/* What a joint fit is to do. */
typedef struct an_joint_plan {
    const an_superpose_options *options;
    an_vertical vertical;
    size_t i_reference;
    double per_decade;
    const double *log10_a, *log10_b; /* [n_isotherm] start */
} an_joint_plan;

an_status an_joint_alloc(an_joint *joint, const an_superpose_input *input, const an_joint_plan *plan,
                         an_error *err);

/* Lay the grid of modes over the reduced frequencies of the present shifts. Returns nonzero where it changed.
 */
int an_joint_grid(an_joint *joint);

/* Build the rows at the shifts of a state, load the spectrum problem. */
void an_joint_load(an_joint *joint, const an_joint_state *state);

/* Whitened model and slope of `now`; call after its rows were built. */
void an_joint_model(an_joint *joint);

/* Iterate to the end at the strengths that `rule` chooses. coarse: a finished fit on a coarser grid to begin
 * with, or NULL. */
an_status an_joint_fit(an_joint *joint, an_strength_rule rule, const an_joint *coarse, an_error *err);

/* Covariances of the shifts of `now` into the result; also determined flags. */
an_status an_joint_covariance(an_joint *joint, const an_superpose_options *options, an_superposition *result,
                              an_error *err);

/* The finished fit into a result: shifts, spectrum, chi-square, verdict, covariance. */
an_status an_joint_hand_out(an_joint *joint, const an_superpose_options *options, an_superposition *result,
                            an_error *err);

#endif
