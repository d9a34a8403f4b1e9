/* tests/synthetic.h: made isotherms with known truth for tests of superposition and spectra: a Maxwell model,
 * a law of a_T, and Gaussian noise from a fixed seed. The response is written out here, apart from the
 * product's own. */
#ifndef ANELAST_TESTS_SYNTHETIC_H
#define ANELAST_TESTS_SYNTHETIC_H

#include "anelast/superpose.h"

#include <math.h>
#include <stdint.h>

enum { synthetic_most_isotherms = 40, synthetic_most_points = 800 };

typedef struct synthetic {
    an_superpose_isotherm isotherm[synthetic_most_isotherms];
    an_superpose_point point[synthetic_most_points];
    double log10_aT[synthetic_most_isotherms]; /* truth, relative to the material's own reference */
    size_t n_isotherm, n_point;
    uint64_t seed;
} synthetic;

static inline double synthetic_uniform(synthetic *s)
{
    s->seed = s->seed * 6364136223846793005u + 1442695040888963407u;
    return ((double)(s->seed >> 11) + 0.5) / 9007199254740992.0;
}

static inline double synthetic_normal(synthetic *s) /* Box & Muller 1958 */
{
    double radius = sqrt(-2 * log(synthetic_uniform(s)));
    return radius * cos(6.283185307179586 * synthetic_uniform(s));
}

/* One isotherm: n_frequency from low to high Hz, relative noise with correlation 0.3 between E' and E''. */
typedef struct synthetic_sweep {
    double temperature_K, log10_aT, scale; /* scale: b_T */
    double low_Hz, high_Hz;
    int n_frequency;
    double noise; /* relative to |E*| */
} synthetic_sweep;

static inline void synthetic_point(synthetic *s, const an_maxwell *model, const synthetic_sweep *sweep,
                                   double omega)
{
    double storage = model->equilibrium_Pa, loss = 0;
    for (size_t i = 0; i < model->n_mode; i++) {
        double q = omega * pow(10, sweep->log10_aT) * model->time_s[i];
        storage += model->modulus_Pa[i] * q * q / (1 + q * q);
        loss += model->modulus_Pa[i] * q / (1 + q * q);
    }
    storage *= sweep->scale;
    loss *= sweep->scale;
    double u = sweep->noise * hypot(storage, loss), correlation = 0.3;
    double first = synthetic_normal(s), second = synthetic_normal(s);
    an_superpose_point *p = &s->point[s->n_point++];
    p->omega_rad_s = omega;
    p->storage_Pa = storage + u * first;
    p->loss_Pa = loss + u * (correlation * first + sqrt(1 - correlation * correlation) * second);
    p->noise[0] = p->noise[2] = u * u;
    p->noise[1] = correlation * u * u;
}

static inline void synthetic_add(synthetic *s, const an_maxwell *model, const synthetic_sweep *sweep)
{
    an_superpose_isotherm *isotherm = &s->isotherm[s->n_isotherm];
    *isotherm = (an_superpose_isotherm){sweep->temperature_K, s->n_point, (size_t)sweep->n_frequency};
    s->log10_aT[s->n_isotherm++] = sweep->log10_aT;
    for (int i = 0; i < sweep->n_frequency; i++) {
        double part = sweep->n_frequency > 1 ? (double)i / (sweep->n_frequency - 1) : 0;
        synthetic_point(s, model, sweep,
                        6.283185307179586 * sweep->low_Hz * pow(sweep->high_Hz / sweep->low_Hz, part));
    }
}

static inline an_superpose_input synthetic_input(const synthetic *s)
{
    return (an_superpose_input){
        .n_isotherm = s->n_isotherm, .isotherm = s->isotherm, .n_point = s->n_point, .point = s->point};
}

/* rms of log10 a_T against the truth, and rms of error over stated noise uncertainty. */
static inline void synthetic_judge(const synthetic *s, const an_superposition *r, double *rms, double *spread)
{
    double sum = 0, normal = 0;
    size_t n = 2 * r->n_isotherm;
    for (size_t i = 0; i < r->n_isotherm; i++) {
        if (i == r->i_reference)
            continue;
        double error = r->log10_aT[i] - (s->log10_aT[i] - s->log10_aT[r->i_reference]);
        sum += error * error;
        normal += error * error / r->noise_covariance[i * n + i];
    }
    *rms = sqrt(sum / (double)(r->n_isotherm - 1));
    *spread = sqrt(normal / (double)(r->n_isotherm - 1));
}

#endif
