/* anelast/law_fit.h: laws fitted to shift factors with their full covariance, and the choice among them.
 *
 * Generalised least squares: minimise r^T C^-1 r, r = log10 a_T - law(T), with C the covariance of the
 * shifts; Levenberg and Marquardt's method on the analytic gradients of law.h, from several starts where a
 * crossover is sought. Laws are compared by Akaike's criterion corrected for few data [HT89]. All laws pass
 * through 0 at the reference temperature, as a_T does by definition, so the shift at the reference itself
 * carries no information and is left out.
 */
#ifndef ANELAST_LAW_FIT_H
#define ANELAST_LAW_FIT_H

#include <stddef.h>

#include "anelast/law.h"
#include "anelast/status.h"

/* Shift factors to be described. The covariance holds all that may scatter a shift about a law; shifts of
 * zero variance are left out, as the reference's own. u_temperature_K is the noise part of each isotherm's
 * temperature: it adds (slope u)^2. */
typedef struct an_law_data {
    size_t n_shift;                 /* number of isotherms */
    const double *temperature_K;    /* [n_shift] K, rising */
    const double *log10_aT;         /* [n_shift] dimensionless, relative to the reference temperature */
    const double *covariance;       /* [n_shift x n_shift] of log10 a_T, dimensionless */
    double u_temperature_K;         /* K, >= 0 */
    double reference_temperature_K; /* K */
} an_law_data;

/* A law tried. */
typedef struct an_law_trial {
    an_law law;        /* covariance inflated by chi-square over degrees of freedom where that is above 1 */
    double chi_square; /* r^T C^-1 r */
    int n_constant;    /* number of constants */
    double criterion;  /* corrected Akaike criterion, smaller is better; INFINITY where refused */
    int chosen;        /* nonzero: the one chosen */
    char reason[160];  /* why it was refused; "" where it stands */
} an_law_trial;

enum { AN_LAW_TRIALS = 8 };

/* an_law_fit: one law to the shifts.
 *   kind      [in]  any but AN_LAW_NONE
 *   degree    [in]  of a polynomial; ignored for other kinds
 *   trial     [out] law with covariance and the range of the data as valid range; refused with its reason
 *                   where the shifts do
 *                   not determine it (too few, no minimum inside the allowed constants)
 * Returns AN_OK, also for a refused law; AN_E_VALUE for data out of order or a covariance that is not
 * positive definite; AN_E_MEMORY. */
an_status an_law_fit(const an_law_data *data, an_law_kind kind, size_t degree, an_law_trial *trial,
                     an_error *err);

/* an_law_fit_choose: WLF, Arrhenius, crossover, and polynomials of degree 2 and 3, and the choice among them;
 * or only the kind that is wanted.
 *   wanted    [in]  AN_LAW_NONE: choose; another kind: fit that one (a polynomial: degrees 1 to 3, the best
 *                   of them) trial     [out] [AN_LAW_TRIALS]
 *   n_trial   [out] how many were tried
 * Returns AN_OK; AN_DUBIOUS where the chosen law's chi-square says that it does not follow the shifts
 * (probability below 1e-3) or where none stands; AN_E_VALUE, AN_E_MEMORY. */
an_status an_law_fit_choose(const an_law_data *data, an_law_kind wanted, an_law_trial trial[AN_LAW_TRIALS],
                            size_t *n_trial, an_error *err);

#endif
