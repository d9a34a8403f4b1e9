/* anelast/response.h: rows of the response engine. Storage, loss, relaxation, holds with a finite rise and
 * constant-rate pulls are all linear in the equilibrium modulus and the strengths of the modes once the times
 * and a_T are given, so each kind of observation adds rows to one least-squares problem. Formulas and units
 * as in maxwell.h, where the single modes stand.
 */
#ifndef ANELAST_RESPONSE_H
#define ANELAST_RESPONSE_H

#include <stddef.h>

typedef enum an_response_kind {
    AN_RESPONSE_STORAGE = 0, /* E'(omega) [Pa] */
    AN_RESPONSE_LOSS,        /* E''(omega) [Pa] */
    AN_RESPONSE_RELAXATION,  /* E(t) [Pa] after an ideal step */
    AN_RESPONSE_HOLD, /* stress [Pa] at t since the start of a strain that rises at a rate and is then held */
    AN_RESPONSE_PULL  /* stress [Pa] at t under a strain that grows at a rate */
} an_response_kind;

/* One number measured, and how it was measured. */
typedef struct an_observation {
    an_response_kind kind;
    double at;          /* angular frequency [rad/s] for storage and loss, time [s] for the others */
    double rise_s;      /* [s] of a hold; ignored by the others */
    double rate_per_s;  /* [1/s] strain rate of a hold or pull; ignored by the others */
    double log10_aT;    /* [1] shift to the reference temperature */
    double log10_bT;    /* [1] elastic scaling */
    double value;       /* [Pa] */
    double u;           /* [Pa] standard uncertainty, noise part, > 0 */
    double correlation; /* [1] with the observation before it in the list (E' with E'' of one burst), |r| < 1;
                           else 0 */
} an_observation;

/* an_response_row: the row of one observation, b_T included: value = sum_i row[i] E_i + row[n_mode] E_e.
 *   time_s  [in]  [n_mode] relaxation times at the reference temperature, s
 *   row     [out] [n_mode + 1] dimensionless, modes then equilibrium
 *   slope   [out] [n_mode + 1] d row / d ln a_T; NULL allowed */
void an_response_row(const an_observation *observation, const double *time_s, size_t n_mode, double *row,
                     double *slope);

#endif
