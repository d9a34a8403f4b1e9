/* tests/unit/waves.h: made waveforms whose truth is known in closed form, for the tests of the fit. Include
 * after cmocka.h. */
#ifndef ANELAST_TESTS_WAVES_H
#define ANELAST_TESTS_WAVES_H

#include <complex.h>
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>

#include "anelast/sinefit.h"

enum { WAVE_MOST = 4096 };

typedef struct wave {
    int n;
    double t[WAVE_MOST], x[WAVE_MOST], f[WAVE_MOST];
    double complex stiffness; /* [N/m] true, steady */
} wave;

/* wave_steady: x = X cos(w t + 0.4) + offset, f = |K| X cos(w t + 0.4 + arg K) + offset, n samples over so
 * many cycles. */
static inline void wave_steady(wave *w, int n, double frequency, double cycles, double amplitude,
                               double complex stiffness)
{
    w->n = n;
    w->stiffness = stiffness;
    for (int i = 0; i < n; i++) {
        double t = w->t[i] = 300 + i * cycles / frequency / n;
        double complex turn = amplitude * cexp(I * (2 * M_PI * frequency * t + 0.4));
        w->x[i] = creal(turn) + 2 * amplitude;
        w->f[i] = creal(stiffness * turn) + 3 * cabs(stiffness) * amplitude;
    }
}

/* wave_from_rest: a standard linear solid, k + k1 in a Maxwell arm of time tau, whose displacement starts as
 * a sine at t = 0. Force in closed form: the steady part and -k1 X w tau / (1 + w^2 tau^2) exp(-t / tau). */
static inline void wave_from_rest(wave *w, int n, double frequency, double cycles, double amplitude, double k,
                                  double k1, double tau)
{
    double omega = 2 * M_PI * frequency, a = omega * tau;
    w->n = n;
    w->stiffness = k + k1 * I * a / (1 + I * a);
    for (int i = 0; i < n; i++) {
        double t = w->t[i] = i * cycles / frequency / n;
        double steady = cimag(w->stiffness * cexp(I * omega * t));
        w->x[i] = amplitude * sin(omega * t);
        w->f[i] = amplitude * (steady - k1 * a / (1 + a * a) * exp(-t / tau));
    }
}

static inline void wave_noise(wave *w, gsl_rng *rng, double s_x, double s_f)
{
    for (int i = 0; i < w->n; i++) {
        w->x[i] += gsl_ran_gaussian(rng, s_x);
        w->f[i] += gsl_ran_gaussian(rng, s_f);
    }
}

static inline an_waveform wave_view(const wave *w)
{
    return (an_waveform){.n = w->n, .time_s = w->t, .y = {w->x, w->f}};
}

/* wave_errors: the two errors of a stiffness over their stated standard uncertainties, along and across the
 * true one. */
static inline void wave_errors(const an_sinefit *fit, double complex truth, double z[2])
{
    double complex e = (fit->stiffness - truth) / truth * cabs(truth);
    double u = sqrt(0.5 * (fit->stiffness_noise[0] + fit->stiffness_noise[2]));
    z[0] = creal(e) / u;
    z[1] = cimag(e) / u;
}

#endif
