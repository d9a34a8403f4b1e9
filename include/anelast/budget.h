/* anelast/budget.h: from a measured stiffness to the modulus with its uncertainty: noise carried through as a
 * 2 x 2 matrix, and for every source that all points of a run share the change of (E', E'') for one standard
 * uncertainty. Stage: correct.
 */
#ifndef ANELAST_BUDGET_H
#define ANELAST_BUDGET_H

#include "anelast/apparatus.h"
#include "anelast/geometry.h"
#include "anelast/ladder.h"
#include "anelast/points.h"

/* The way from stiffness to modulus at one frequency and temperature. */
typedef struct an_chain {
    an_geometry geometry;
    an_apparatus apparatus;
    double frequency_Hz;  /* [Hz] */
    double temperature_K; /* [K] NAN: not known; dimensions as measured */
} an_chain;

/* What the way gave. */
typedef struct an_chain_result {
    an_rungs rungs;         /* [N/m] */
    double complex plain;   /* [N/m] stiffness that the modulus has without end, shear or constraint terms */
    double complex modulus; /* [Pa] */
    double ratio;           /* [1] |K_s| |C| */
    an_form form;
} an_chain_result;

/* an_chain_run: measured stiffness [N/m] to modulus. Returns AN_OK, or AN_E_VALUE from the geometry. */
an_status an_chain_run(const an_chain *chain, double complex measured, an_chain_result *result,
                       an_error *err);

/* an_budget_noise: covariance of the stiffness to that of the modulus.
 *   stiffness_noise [in] [3] [N2/m2]; modulus_noise [out] [3] [Pa2]: var E', cov, var E''
 *   monte_carlo [in] nonzero: by 4000 draws of a fixed seed [JCGM101], where the frame takes so much of the
 *     displacement that the way is far from linear; zero: linear */
an_status an_budget_noise(const an_chain *chain, double complex measured, const double stiffness_noise[3],
                          int monte_carlo, double modulus_noise[3], an_error *err);

/* an_budget_common: central differences over one standard uncertainty either side of every source.
 *   common [out] [AN_SOURCE_COUNT][2] [Pa]; 0 for a source without uncertainty
 * A source of two constants (transducer stiffness and fixture mass) counts as their root of squares with the
 * sign of the greater. An uncertainty that is NAN counts as 0; an_budget_assume puts defaults there first. */
an_status an_budget_common(const an_chain *chain, double complex measured, double common[AN_SOURCE_COUNT][2],
                           an_error *err);

/* an_budget_assume: where a dimension that the geometry holds has no uncertainty, put the default.
 *   relative [in] [1] of the dimension
 *   names [out, nullable] [n_names] which, separated by commas; "" for none
 * Returns how many. */
int an_budget_assume(an_geometry *geometry, double relative, char *names, size_t n_names);

#endif
