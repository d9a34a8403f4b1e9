/* Change of reference temperature of a shift law, by exact algebra and with the covariance of the constants.
 * Ground floor of fit. Method: the constants are mapped in closed form and their covariance by the map's
 * Jacobian, C' = J C J^T, which is exact for polynomials and first order for WLF (JCGM 102, 6.2). Range: new
 * references above the divergence. */
#include "anelast/law.h"

#include <math.h>

#define LN10 2.302585092994045684

/* covariance <- J C J^T, all n x n row-major. */
static void map_covariance(an_law *law, const double *jacobian)
{
    size_t n = law->n_constant;
    double half[AN_LAW_MAX * AN_LAW_MAX];
    for (size_t i = 0; i < n; i++) {
        for (size_t j = 0; j < n; j++) {
            half[i * n + j] = 0;
            for (size_t k = 0; k < n; k++)
                half[i * n + j] += jacobian[i * n + k] * law->covariance[k * n + j];
        }
    }
    for (size_t i = 0; i < n; i++) {
        for (size_t j = 0; j < n; j++) {
            law->covariance[i * n + j] = 0;
            for (size_t k = 0; k < n; k++)
                law->covariance[i * n + j] += half[i * n + k] * jacobian[j * n + k];
        }
    }
}

/* c2' = c2 + d, c1' = c1 c2/c2' with d = T0' - T0: c1 c2 and T0 - c2 do not change. */
static void move_wlf(an_law *law, double d)
{
    double c1 = law->constant[0];
    double c2 = law->constant[1];
    double moved_c2 = c2 + d;
    double jacobian[4] = {c2 / moved_c2, c1 * d / (moved_c2 * moved_c2), 0, 1};
    law->constant[0] = c1 * c2 / moved_c2;
    law->constant[1] = moved_c2;
    map_covariance(law, jacobian);
}

static double binomial(size_t n, size_t k)
{
    double value = 1;
    for (size_t i = 1; i <= k; i++)
        value *= (double)(n - k + i) / (double)i;
    return value;
}

/* sum p_k (x' + d)^k less its value at x' = 0: p'_j = sum_{k >= j} binomial(k, j) d^(k-j) p_k. */
static void move_polynomial(an_law *law, double d)
{
    size_t n = law->n_constant;
    double jacobian[AN_LAW_MAX * AN_LAW_MAX] = {0};
    double moved[AN_LAW_MAX] = {0};
    for (size_t j = 0; j < n; j++) {
        for (size_t k = j; k < n; k++) {
            jacobian[j * n + k] = binomial(k + 1, j + 1) * pow(d, (double)(k - j));
            moved[j] += jacobian[j * n + k] * law->constant[k];
        }
    }
    for (size_t j = 0; j < n; j++)
        law->constant[j] = moved[j];
    map_covariance(law, jacobian);
}

an_status an_law_change_reference(const an_law *law, double reference_temperature_K, an_law *moved,
                                  an_error *err)
{
    double d = reference_temperature_K - law->reference_temperature_K;
    if (!(reference_temperature_K > 0 && isfinite(reference_temperature_K)))
        return an_fail(err, AN_E_VALUE, "", "new reference temperature %g K; above 0 K is allowed",
                       reference_temperature_K);
    if (an_law_diverges(law, reference_temperature_K))
        return an_fail(err, AN_E_SCIENCE, "",
                       "new reference temperature %g K lies at or below %g K, where the %s law diverges",
                       reference_temperature_K, an_law_divergence(law), an_law_kind_name(law->kind));
    *moved = *law;
    if (law->kind == AN_LAW_WLF)
        move_wlf(moved, d);
    else if (law->kind == AN_LAW_POLYNOMIAL)
        move_polynomial(moved, d);
    moved->reference_temperature_K = reference_temperature_K;
    return AN_OK;
}

an_status an_law_wlf_at(const an_law *law, double temperature_K, double *c1, double *c2_K, an_error *err)
{
    double product; /* c1 c2 [K], which no change of reference touches */
    double divergence;
    if (law->kind == AN_LAW_WLF || law->kind == AN_LAW_CROSSOVER) {
        double stands_at = law->kind == AN_LAW_WLF ? law->reference_temperature_K : law->constant[2];
        product = law->constant[0] * law->constant[1];
        divergence = stands_at - law->constant[1];
    } else if (law->kind == AN_LAW_VFT) {
        product = law->constant[0] / LN10;
        divergence = law->constant[1];
    } else {
        return an_fail(err, AN_E_USAGE, "", "a %s law has no WLF constants", an_law_kind_name(law->kind));
    }
    if (!(temperature_K > divergence))
        return an_fail(err, AN_E_SCIENCE, "", "%g K lies at or below %g K, where the %s law diverges",
                       temperature_K, divergence, an_law_kind_name(law->kind));
    *c2_K = temperature_K - divergence;
    *c1 = product / *c2_K;
    return AN_OK;
}
