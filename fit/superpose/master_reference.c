/* Another reference temperature for a finished superposition. Stage: superpose. Method: exact algebra on
 * shifts and times, with log10 a_T and log10 b_T at the new reference from the law chosen, from T/T0, or from
 * neighbours for free vertical shifts. Range: inside the isotherms. */
#include "fit/superpose/master_make.h"

#include "anelast/quantity.h"

#include <math.h>
#include <stdio.h>

static const an_law_trial *chosen_of(const an_law_trial *trial, size_t n_trial)
{
    for (size_t i = 0; i < n_trial; i++)
        if (trial[i].chosen)
            return &trial[i];
    return NULL;
}

/* log10 b_T at a temperature. *variance [out]. */
static double scale_at(const an_superpose_input *input, const an_superposition *result, double temperature_K,
                       double *variance)
{
    *variance = 0;
    if (result->vertical == AN_VERTICAL_NONE)
        return 0;
    if (result->vertical == AN_VERTICAL_DENSITY_TEMPERATURE)
        return log10(temperature_K / result->reference_temperature_K);
    size_t i = 0, n = result->n_isotherm, stride = 2 * n;
    while (i + 2 < n && temperature_K > input->isotherm[i + 1].temperature_K)
        i++;
    double low_K = input->isotherm[i].temperature_K, high_K = input->isotherm[i + 1].temperature_K;
    double part = (temperature_K - low_K) / (high_K - low_K);
    const double *c = result->noise_covariance + (n + i) * stride + n + i;
    *variance = (1 - part) * (1 - part) * c[0] + 2 * part * (1 - part) * c[1] + part * part * c[stride + 1];
    return (1 - part) * result->log10_bT[i] + part * result->log10_bT[i + 1];
}

/* Take shift and scale off all isotherms, and add their variances. */
static void move_shifts(an_superposition *result, const double by[2], const double variance[2])
{
    size_t n = result->n_isotherm, stride = 2 * n;
    for (size_t i = 0; i < n; i++) {
        result->log10_aT[i] -= by[0];
        result->log10_bT[i] -= by[1];
        for (size_t j = 0; j < n; j++) {
            result->noise_covariance[i * stride + j] += variance[0];
            result->noise_covariance[(n + i) * stride + n + j] += variance[1];
        }
    }
}

static void move_spectrum(an_superposition *result, double log10_a, double log10_b)
{
    double a = pow(10, log10_a), b = pow(10, log10_b);
    for (size_t i = 0; i < result->spectrum.n_mode; i++) {
        result->spectrum.time_s[i] *= a;
        result->spectrum.modulus_Pa[i] *= b;
    }
    result->spectrum.equilibrium_Pa *= b;
    result->omega_range[0] /= a;
    result->omega_range[1] /= a;
}

/* The laws at the new reference; one that diverges there is refused from now on. */
static void move_laws(const an_move *move)
{
    for (size_t i = 0; i < move->n_trial; i++) {
        an_law_trial *trial = &move->trial[i];
        an_law moved;
        if (trial->reason[0])
            continue;
        if (an_law_change_reference(&trial->law, move->temperature_K, &moved, NULL) >= 0)
            trial->law = moved;
        else
            snprintf(trial->reason, sizeof trial->reason, "it diverges at the reference temperature");
    }
}

an_status an_superposition_move(const an_superpose_input *input, const an_move *move,
                                an_superposition *result, an_error *err)
{
    const an_law_trial *chosen = chosen_of(move->trial, move->n_trial);
    double temperature_K = move->temperature_K;
    double low_K = input->isotherm[0].temperature_K,
           high_K = input->isotherm[input->n_isotherm - 1].temperature_K;
    double by[2], variance[2];
    if (temperature_K < low_K || temperature_K > high_K)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "reference temperature %.1f °C (%.2f K), where %.1f to %.1f °C is measured",
                       temperature_K - AN_ZERO_CELSIUS_K, temperature_K, low_K - AN_ZERO_CELSIUS_K,
                       high_K - AN_ZERO_CELSIUS_K);
    if (!chosen)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "reference temperature %.1f °C is no isotherm's, and no law leads there",
                       temperature_K - AN_ZERO_CELSIUS_K);
    AN_TRY(an_law_log10_aT(&chosen->law, temperature_K, AN_RANGE_MARK, &by[0], err));
    double u = an_law_u_log10_aT(&chosen->law, temperature_K);
    variance[0] = isfinite(u) ? u * u : 0;
    by[1] = scale_at(input, result, temperature_K, &variance[1]);
    move_shifts(result, by, variance);
    move_spectrum(result, by[0], by[1]);
    move_laws(move);
    result->reference_temperature_K = temperature_K;
    return AN_OK;
}
