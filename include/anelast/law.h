/* anelast/law.h: laws of the shift factor a_T over temperature.
 *
 * a_T = tau(T)/tau(T0), so log10 a_T is 0 at the reference temperature T0 and negative above it. Logarithms
 * are to base 10, temperatures kelvin, R = 8.314462618 J/(mol K) (SI 2019). Evaluation outside the valid
 * range is refused or marked, as the caller says; a temperature at or below the divergence of WLF or VFT is
 * always refused.
 */
#ifndef ANELAST_LAW_H
#define ANELAST_LAW_H

#include <stdbool.h>
#include <stddef.h>

#include "anelast/status.h"

#define AN_GAS_CONSTANT 8.314462618 /* J/(mol K), exact in the SI of 2019 to the digits given */
#define AN_LAW_MAX      6           /* most constants of a law: a polynomial of this degree */

/* The laws and their constants, in the order of an_law.constant:
 *   AN_LAW_WLF         c1 [1], c2 [K] at T0:  log a = -c1 (T - T0)/(c2 + T - T0) [WLF55]
 *   AN_LAW_ARRHENIUS   E_a [J/mol]:           log a = E_a/(R ln 10) (1/T - 1/T0)
 *   AN_LAW_VFT         B [K], T_inf [K]:      log a = B/ln 10 [1/(T - T_inf) - 1/(T0 - T_inf)] [VFT]
 *   AN_LAW_CROSSOVER   c1 [1], c2 [K] at T_x, T_x [K], E_a [J/mol]: log a = h(T) - h(T0), continuous at T_x,
 *                      with h = -c1 (T - T_x)/(c2 + T - T_x) from T_x up, E_a/(R ln 10) (1/T - 1/T_x) below. The
 *                      WLF constants stand at T_x, not T0, so that T0 may lie on either side; an_law_wlf_at
 *                      moves them.
 *   AN_LAW_POLYNOMIAL  p_1 .. p_n [1/K^k]:    log a = sum_k p_k (T - T0)^k */
typedef enum an_law_kind {
    AN_LAW_NONE,
    AN_LAW_WLF,
    AN_LAW_ARRHENIUS,
    AN_LAW_VFT,
    AN_LAW_CROSSOVER,
    AN_LAW_POLYNOMIAL
} an_law_kind;

typedef struct an_law {
    an_law_kind kind;
    double reference_temperature_K; /* T0, K, > 0 */
    size_t n_constant;              /* number of constants: 2, 1, 2, 4, or the degree */
    double constant[AN_LAW_MAX];    /* [n_constant] units by kind, as above */
    /* [n_constant x n_constant] row-major with stride n_constant; product of the constants' units; all zero
     * where unknown */
    double covariance[AN_LAW_MAX * AN_LAW_MAX];
    double valid_from_K, valid_to_K; /* valid range, K; 0 and INFINITY where it is open */
} an_law;

/* What to do with a temperature outside the valid range. */
typedef enum an_range_policy {
    AN_RANGE_REFUSE, /* AN_E_SCIENCE */
    AN_RANGE_MARK    /* compute, return AN_DUBIOUS, say so in err */
} an_range_policy;

/* an_law_init: a law of the kind with zero constants, zero covariance, reference T0 [K] and an open range.
 *   n_constant  [in] the degree of a polynomial (1..AN_LAW_MAX); ignored for other kinds */
void an_law_init(an_law *law, an_law_kind kind, double reference_temperature_K, size_t n_constant);

/* an_law_check: are the constants and the reference allowed (finite; T0 > 0; WLF c1, c2 > 0; E_a > 0; B > 0,
 * T_inf < T0; T_x > 0; range in order)? Returns AN_OK or AN_E_VALUE with the fault named. */
an_status an_law_check(const an_law *law, an_error *err);

/* an_law_kind_name: "wlf", "arrhenius", "vft", "crossover", "polynomial", "none"; static.
 * an_law_kind_from_name: the kind of a name; false where there is none.
 * an_law_constant_name, an_law_constant_unit: "c1", "c2", "E_a", "B", "T_inf", "T_x", "p1".. and the UCUM
 * unit "1", "K", "J/mol", "K-1", "K-2"..; static; "" beyond the kind's constants. */
const char *an_law_kind_name(an_law_kind kind);
bool an_law_kind_from_name(const char *name, an_law_kind *kind);
const char *an_law_constant_name(an_law_kind kind, size_t i_constant);
const char *an_law_constant_unit(an_law_kind kind, size_t i_constant);

/* an_law_divergence: the temperature [K] at which the law diverges: T0 - c2 of WLF, T_inf of VFT; 0 for the
 * others.
 * an_law_diverges: whether a temperature [K] is not above 0 K or not above the divergence, to rounding. */
double an_law_divergence(const an_law *law);
bool an_law_diverges(const an_law *law, double temperature_K);

/* an_law_log10_aT: log10 a_T at a temperature.
 *   policy    [in]  what to do outside the valid range
 *   log10_aT  [out] dimensionless; untouched when refused
 * Returns AN_OK; AN_DUBIOUS outside the range where the policy marks; AN_E_SCIENCE outside the range where it
 * refuses, and always at or below the divergence; AN_E_VALUE for a temperature that is not above 0 K or a law
 * without kind. */
an_status an_law_log10_aT(const an_law *law, double temperature_K, an_range_policy policy, double *log10_aT,
                          an_error *err);

/* an_law_slope: d log10 a_T / dT, 1/K, at a temperature; NaN at or below the divergence. The one-sided value
 * from above at a crossover. Times u(T) it is what a temperature bias adds to u(log10 a_T).
 * an_law_activation_energy: the apparent activation energy R ln10 d(log10 a_T)/d(1/T) = -R ln10 T^2 slope,
 * J/mol; for WLF at T0 it is R ln10 c1 T0^2/c2 [FE80, ch. 11]. */
double an_law_slope(const an_law *law, double temperature_K);
double an_law_activation_energy(const an_law *law, double temperature_K);

/* an_law_gradient: d log10 a_T / d constant_k at a temperature, for fits and for uncertainties.
 *   gradient  [out] [law->n_constant], one over the constants' units; NaN at or below the divergence */
void an_law_gradient(const an_law *law, double temperature_K, double *gradient);

/* an_law_u_log10_aT: standard uncertainty of log10 a_T at a temperature from the covariance of the constants,
 * to first order (JCGM 100, Eq. 13); 0 at T0 by definition of a_T. */
double an_law_u_log10_aT(const an_law *law, double temperature_K);

/* an_law_change_reference: the same law referred to another temperature, by exact algebra, covariance
 * included: log a'(T) = log a(T) - log a(T0'). WLF: c2' = c2 + T0' - T0, c1' = c1 c2/c2'; polynomial:
 * binomial expansion; for the other kinds the constants do not depend on the reference.
 *   moved  [out] may be `law` itself
 * Returns AN_OK; AN_E_SCIENCE where T0' lies at or below the divergence; AN_E_VALUE where it is not above 0
 * K. */
an_status an_law_change_reference(const an_law *law, double reference_temperature_K, an_law *moved,
                                  an_error *err);

/* an_law_wlf_at: c1 [1] and c2 [K] of the WLF branch of a WLF, crossover or VFT law, referred to any
 * temperature above the divergence (VFT: c2 = T - T_inf, c1 = B/(ln10 c2)).
 * Returns AN_OK; AN_E_USAGE for a law of another kind; AN_E_SCIENCE at or below the divergence. */
an_status an_law_wlf_at(const an_law *law, double temperature_K, double *c1, double *c2_K, an_error *err);

#endif
