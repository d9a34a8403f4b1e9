/* Laws of the shift factor: their table, checks, evaluation, slope and the gradient over their constants.
 * Ground floor of fit. Method: closed forms, each differentiated by hand. Range: above the divergence of WLF
 * and VFT, where the forms lose all meaning at T_inf and a_T changes sign below it. Change of reference is
 * law_reference.c. */
#include "anelast/law.h"

#include <float.h>
#include <math.h>
#include <string.h>

#define LN10 2.302585092994045684

typedef struct law_row {
    const char *name;
    size_t n_constant; /* 0: as many as the caller says */
    const char *constant[AN_LAW_MAX];
    const char *unit[AN_LAW_MAX];
} law_row;

static const law_row law_table[] = {
    [AN_LAW_NONE] = {"none", 0, {NULL}, {NULL}},
    [AN_LAW_WLF] = {"wlf", 2, {"c1", "c2"}, {"1", "K"}},
    [AN_LAW_ARRHENIUS] = {"arrhenius", 1, {"E_a"}, {"J/mol"}},
    [AN_LAW_VFT] = {"vft", 2, {"B", "T_inf"}, {"K", "K"}},
    [AN_LAW_CROSSOVER] = {"crossover", 4, {"c1", "c2", "T_x", "E_a"}, {"1", "K", "K", "J/mol"}},
    [AN_LAW_POLYNOMIAL] = {"polynomial",
                           0,
                           {"p1", "p2", "p3", "p4", "p5", "p6"},
                           {"K-1", "K-2", "K-3", "K-4", "K-5", "K-6"}},
};
enum { N_KIND = sizeof law_table / sizeof law_table[0] };

void an_law_init(an_law *law, an_law_kind kind, double reference_temperature_K, size_t n_constant)
{
    *law = (an_law){.kind = kind, .reference_temperature_K = reference_temperature_K, .valid_to_K = INFINITY};
    law->n_constant = law_table[kind].n_constant;
    if (kind == AN_LAW_POLYNOMIAL)
        law->n_constant = n_constant < AN_LAW_MAX ? n_constant : AN_LAW_MAX;
}

const char *an_law_kind_name(an_law_kind kind)
{
    return law_table[kind].name;
}

bool an_law_kind_from_name(const char *name, an_law_kind *kind)
{
    for (size_t i = 0; i < N_KIND; i++) {
        if (strcmp(name, law_table[i].name) == 0) {
            *kind = (an_law_kind)i;
            return true;
        }
    }
    return false;
}

const char *an_law_constant_name(an_law_kind kind, size_t i_constant)
{
    const char *name = i_constant < AN_LAW_MAX ? law_table[kind].constant[i_constant] : NULL;
    return name ? name : "";
}

const char *an_law_constant_unit(an_law_kind kind, size_t i_constant)
{
    const char *unit = i_constant < AN_LAW_MAX ? law_table[kind].unit[i_constant] : NULL;
    return unit ? unit : "";
}

double an_law_divergence(const an_law *law)
{
    if (law->kind == AN_LAW_WLF)
        return law->reference_temperature_K - law->constant[1];
    return law->kind == AN_LAW_VFT ? law->constant[1] : 0;
}

/* Constants that scale a barrier must be positive, or a_T would rise with temperature. */
static an_status check_positive(const an_law *law, an_error *err)
{
    for (size_t i = 0; i < law->n_constant; i++) {
        double value = law->constant[i];
        const char *name = an_law_constant_name(law->kind, i);
        bool free_sign = law->kind == AN_LAW_POLYNOMIAL || (law->kind == AN_LAW_VFT && i == 1);
        if (!isfinite(value) || (!free_sign && !(value > 0)))
            return an_fail(err, AN_E_VALUE, "", "%s law: %s = %g %s; a finite value%s is allowed",
                           an_law_kind_name(law->kind), name, value, an_law_constant_unit(law->kind, i),
                           free_sign ? "" : " above 0");
    }
    return AN_OK;
}

an_status an_law_check(const an_law *law, an_error *err)
{
    const char *name = an_law_kind_name(law->kind);
    double t0 = law->reference_temperature_K;
    if (law->kind == AN_LAW_NONE || law->n_constant == 0 || law->n_constant > AN_LAW_MAX)
        return an_fail(err, AN_E_VALUE, "",
                       "shift law '%s' with %zu constants; a law with constants is needed", name,
                       law->n_constant);
    if (!(t0 > 0 && isfinite(t0)))
        return an_fail(err, AN_E_VALUE, "", "%s law: reference temperature %g K; above 0 K is allowed", name,
                       t0);
    AN_TRY(check_positive(law, err));
    if (law->kind == AN_LAW_VFT && !(law->constant[1] < t0))
        return an_fail(err, AN_E_VALUE, "",
                       "vft law: T_inf = %g K; below the reference temperature %g K is allowed",
                       law->constant[1], t0);
    if (!(law->valid_from_K >= 0 && law->valid_to_K > law->valid_from_K))
        return an_fail(err, AN_E_VALUE, "",
                       "%s law: valid from %g to %g K; a range in rising order is allowed", name,
                       law->valid_from_K, law->valid_to_K);
    return AN_OK;
}

/* WLF branch over x = T - T(constants). */
static double wlf(const double *c, double x)
{
    return -c[0] * x / (c[1] + x);
}

/* Arrhenius branch, energy in J/mol, from one temperature to another. */
static double arrhenius(double energy, double from_K, double to_K)
{
    return energy / (AN_GAS_CONSTANT * LN10) * (1 / to_K - 1 / from_K);
}

/* log10 tau(T)/tau(T_x) of a crossover law. */
static double crossover_branch(const double *c, double temperature_K)
{
    if (temperature_K >= c[2])
        return wlf(c, temperature_K - c[2]);
    return arrhenius(c[3], c[2], temperature_K);
}

static double polynomial(const an_law *law, double x)
{
    double sum = 0;
    for (size_t k = law->n_constant; k-- > 0;)
        sum = x * (law->constant[k] + sum);
    return sum;
}

static double evaluate(const an_law *law, double temperature_K)
{
    const double *c = law->constant;
    double t0 = law->reference_temperature_K;
    switch (law->kind) {
    case AN_LAW_WLF:
        return wlf(c, temperature_K - t0);
    case AN_LAW_ARRHENIUS:
        return arrhenius(c[0], t0, temperature_K);
    case AN_LAW_VFT:
        return c[0] / LN10 * (1 / (temperature_K - c[1]) - 1 / (t0 - c[1]));
    case AN_LAW_CROSSOVER:
        return crossover_branch(c, temperature_K) - crossover_branch(c, t0);
    case AN_LAW_POLYNOMIAL:
        return polynomial(law, temperature_K - t0);
    case AN_LAW_NONE:
        break;
    }
    return NAN;
}

bool an_law_diverges(const an_law *law, double temperature_K)
{
    bool has_pole = law->kind == AN_LAW_WLF || law->kind == AN_LAW_VFT;
    double rounding = 8 * DBL_EPSILON * fabs(law->reference_temperature_K);
    return !(temperature_K > 0) || (has_pole && !(temperature_K - an_law_divergence(law) > rounding));
}

an_status an_law_log10_aT(const an_law *law, double temperature_K, an_range_policy policy, double *log10_aT,
                          an_error *err)
{
    const char *name = an_law_kind_name(law->kind);
    if (law->kind == AN_LAW_NONE)
        return an_fail(err, AN_E_VALUE, "",
                       "there is no shift law: a_T is known at the reference temperature only");
    if (!(temperature_K > 0 && isfinite(temperature_K)))
        return an_fail(err, AN_E_VALUE, "", "temperature %g K; above 0 K is allowed", temperature_K);
    if (an_law_diverges(law, temperature_K))
        return an_fail(err, AN_E_SCIENCE, "", "%g K lies at or below %g K, where the %s law diverges",
                       temperature_K, an_law_divergence(law), name);
    bool inside = temperature_K >= law->valid_from_K && temperature_K <= law->valid_to_K;
    if (!inside && policy == AN_RANGE_REFUSE)
        return an_fail(err, AN_E_SCIENCE, "",
                       "%g K lies outside %g .. %g K, where the %s law is known to hold", temperature_K,
                       law->valid_from_K, law->valid_to_K, name);
    *log10_aT = evaluate(law, temperature_K);
    if (inside)
        return AN_OK;
    return an_fail(err, AN_DUBIOUS, "", "%g K lies outside %g .. %g K: the %s law is extrapolated",
                   temperature_K, law->valid_from_K, law->valid_to_K, name);
}

static double wlf_slope(const double *c, double x)
{
    return -c[0] * c[1] / ((c[1] + x) * (c[1] + x));
}

static double arrhenius_slope(double energy, double temperature_K)
{
    return -energy / (AN_GAS_CONSTANT * LN10 * temperature_K * temperature_K);
}

double an_law_slope(const an_law *law, double temperature_K)
{
    const double *c = law->constant;
    double x = temperature_K - law->reference_temperature_K;
    if (an_law_diverges(law, temperature_K))
        return NAN;
    switch (law->kind) {
    case AN_LAW_WLF:
        return wlf_slope(c, x);
    case AN_LAW_ARRHENIUS:
        return arrhenius_slope(c[0], temperature_K);
    case AN_LAW_VFT:
        return -c[0] / (LN10 * (temperature_K - c[1]) * (temperature_K - c[1]));
    case AN_LAW_CROSSOVER:
        return temperature_K >= c[2] ? wlf_slope(c, temperature_K - c[2])
                                     : arrhenius_slope(c[3], temperature_K);
    case AN_LAW_POLYNOMIAL: {
        double sum = 0;
        for (size_t k = law->n_constant; k-- > 0;)
            sum = sum * x + (double)(k + 1) * c[k];
        return sum;
    }
    case AN_LAW_NONE:
        break;
    }
    return NAN;
}

double an_law_activation_energy(const an_law *law, double temperature_K)
{
    return -AN_GAS_CONSTANT * LN10 * temperature_K * temperature_K * an_law_slope(law, temperature_K);
}

static void wlf_gradient(const double *c, double x, double *gradient)
{
    gradient[0] = -x / (c[1] + x);
    gradient[1] = c[0] * x / ((c[1] + x) * (c[1] + x));
}

/* Gradient of crossover_branch; the step of the slope at T_x itself is taken from above. */
static void crossover_gradient(const double *c, double temperature_K, double *gradient)
{
    gradient[0] = gradient[1] = gradient[3] = 0;
    if (temperature_K >= c[2]) {
        wlf_gradient(c, temperature_K - c[2], gradient);
        gradient[2] = -wlf_slope(c, temperature_K - c[2]);
    } else {
        gradient[2] = -arrhenius_slope(c[3], c[2]);
        gradient[3] = arrhenius(1, c[2], temperature_K);
    }
}

static void crossover_difference(const an_law *law, double temperature_K, double *gradient)
{
    double at_reference[4];
    crossover_gradient(law->constant, temperature_K, gradient);
    crossover_gradient(law->constant, law->reference_temperature_K, at_reference);
    for (size_t i = 0; i < 4; i++)
        gradient[i] -= at_reference[i];
}

static void vft_gradient(const an_law *law, double temperature_K, double *gradient)
{
    double here = 1 / (temperature_K - law->constant[1]);
    double there = 1 / (law->reference_temperature_K - law->constant[1]);
    gradient[0] = (here - there) / LN10;
    gradient[1] = law->constant[0] / LN10 * (here * here - there * there);
}

void an_law_gradient(const an_law *law, double temperature_K, double *gradient)
{
    double x = temperature_K - law->reference_temperature_K;
    if (an_law_diverges(law, temperature_K)) {
        for (size_t i = 0; i < law->n_constant; i++)
            gradient[i] = NAN;
        return;
    }
    switch (law->kind) {
    case AN_LAW_WLF:
        wlf_gradient(law->constant, x, gradient);
        break;
    case AN_LAW_ARRHENIUS:
        gradient[0] = arrhenius(1, law->reference_temperature_K, temperature_K);
        break;
    case AN_LAW_VFT:
        vft_gradient(law, temperature_K, gradient);
        break;
    case AN_LAW_CROSSOVER:
        crossover_difference(law, temperature_K, gradient);
        break;
    case AN_LAW_POLYNOMIAL:
        for (size_t k = 0; k < law->n_constant; k++)
            gradient[k] = pow(x, (double)(k + 1));
        break;
    case AN_LAW_NONE:
        break;
    }
}

double an_law_u_log10_aT(const an_law *law, double temperature_K)
{
    double gradient[AN_LAW_MAX];
    size_t n = law->n_constant;
    double variance = 0;
    an_law_gradient(law, temperature_K, gradient);
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            variance += gradient[i] * law->covariance[i * n + j] * gradient[j];
    /* Rounding may leave a tiny negative sum where the true variance is zero; NaN must stay NaN. */
    return variance < 0 ? 0 : sqrt(variance);
}
