/* Inside of the law fit: the whitened least-squares problem that all kinds of law share. Not public. */
#ifndef ANELAST_FIT_LAW_PROBLEM_H
#define ANELAST_FIT_LAW_PROBLEM_H

#include "anelast/law_fit.h"

/* Shifts that carry information, with the Cholesky factor of their covariance. */
typedef struct law_problem {
    size_t n;                   /* shifts kept */
    double *temperature_K;      /* [n] K */
    double *shift;              /* [n] log10 a_T */
    double *factor;             /* [n x n] L of the covariance; unit: decades */
    double *work;               /* [(n + AN_LAW_MAX) x (AN_LAW_MAX + 1)] */
    double reference_K;         /* K */
    double least_K, greatest_K; /* K, range of all temperatures, the reference among them */
} law_problem;

/* an_law_problem_make: check and whiten; clear with an_law_problem_clear, also after a refusal.
 * Returns AN_OK, AN_E_VALUE, AN_E_MEMORY. */
an_status an_law_problem_make(const an_law_data *data, law_problem *problem, an_error *err);
void an_law_problem_clear(law_problem *problem);

/* an_law_problem_cost: chi-square of a law; INFINITY where the law is not allowed over the range of the data.
 * */
double an_law_problem_cost(const law_problem *problem, const an_law *law);

/* an_law_problem_linear: with all other constants held, the best constants among some in which the law is
 * linear.
 *   which   [in]     [n_which] indices of constants, n_which <= AN_LAW_MAX
 *   law     [in,out]
 * Returns chi-square of the law then, INFINITY where it is not allowed or the constants are not determined.
 * */
double an_law_problem_linear(const law_problem *problem, const size_t *which, size_t n_which, an_law *law);

/* an_law_problem_descend: Levenberg and Marquardt from the law's constants [MQ63]. Returns chi-square. */
double an_law_problem_descend(const law_problem *problem, an_law *law);

/* an_law_problem_covariance: (J^T C^-1 J)^-1 times inflation, into the law. Returns AN_OK or AN_E_NUMERIC. */
an_status an_law_problem_covariance(const law_problem *problem, double inflation, an_law *law);

#endif
