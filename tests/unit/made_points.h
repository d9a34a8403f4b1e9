/* made_points.h: points of a made material for the tests of the grid: a fractional Zener solid whose times
 * follow a WLF law. Its loss peak stands exactly at omega tau = 1 and its loss factor peak at omega tau =
 * (E0/Einf)^(1/(2 a)).
 */
#ifndef ANELAST_TESTS_MADE_POINTS_H
#define ANELAST_TESTS_MADE_POINTS_H

#include "anelast/grid.h"

#include <complex.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const double made_E0 = 5e6, made_Einf = 2e9, made_a = 0.6; /* [Pa], [Pa], [1] */
/* "Universal" constants at Tg [WLF55]; tau is 100 s at Tg (common practice). */
static const double made_c1 = 17.44, made_c2 = 51.6, made_Tg = 250; /* [1], [K], [K] */

static inline double made_time(double temperature_K)
{
    double above = temperature_K - made_Tg;
    return 100 * pow(10, -made_c1 * above / (made_c2 + above));
}

/* The temperature at which the relaxation time is so long: the law, solved for the temperature. */
static inline double made_temperature(double time_s)
{
    double log_a = log10(time_s / 100);
    return made_Tg - made_c2 * log_a / (made_c1 + log_a);
}

static inline double complex made_modulus(double temperature_K, double frequency_Hz)
{
    double complex x = cpow(I * 2 * M_PI * frequency_Hz * made_time(temperature_K), made_a);
    return (made_E0 + made_Einf * x) / (1 + x);
}

/* A number between -1 and 1 that looks like chance and is the same everywhere. */
static inline double made_chance(unsigned *state)
{
    *state = *state * 1664525u + 1013904223u;
    return (*state >> 8) / 8388608.0 - 1;
}

/* One burst of eight cycles, 512 samples; noise is a part of |E*|, and 0.02 K a sample of the temperature. */
static inline an_point *made_burst(an_points *points, double temperature_K, double frequency_Hz,
                                   double start_s, double noise)
{
    unsigned state = 977u * (unsigned)points->n_point + 12345u;
    an_point *point = an_points_add(points);
    double length = 8 / frequency_Hz, u = 0.02 / sqrt(512),
           spread = sqrt(3); /* of chance: its standard deviation is 1 */
    double complex modulus = made_modulus(temperature_K, frequency_Hz);
    for (int i = 0; i < 4; i++)
        made_chance(&state);
    modulus *= cexp(noise * spread * (made_chance(&state) + I * made_chance(&state)));
    point->burst = point->step = points->n_point;
    point->state = AN_POINT_USED;
    point->start_s = start_s;
    point->temperature_K = temperature_K + u * spread * made_chance(&state);
    point->u_temperature_K = u;
    point->temperature_rate_K_s = sqrt(12) * u / length * spread * made_chance(&state);
    point->frequency_Hz = point->set_frequency_Hz = frequency_Hz;
    point->n_cycle = 8;
    point->n_sample = 512;
    point->storage_Pa = creal(modulus);
    point->loss_Pa = cimag(modulus);
    point->noise[0] = point->noise[2] = pow(noise * cabs(modulus), 2);
    point->noise[1] = 0;
    memset(point->common, 0, sizeof point->common);
    memset(point->rung, 0, sizeof point->rung);
    point->stiffness_compliance = 0.01;
    return point;
}

/* A head that a points document may have. */
static inline void made_begin(an_points *points, const char *id)
{
    an_points_init(points);
    snprintf(points->id, sizeof points->id, "%s", id);
    snprintf(points->specimen.id, sizeof points->specimen.id, "%s", id);
    snprintf(points->apparatus.id, sizeof points->apparatus.id, "bench 2");
    points->apparatus.temperature_bias = (an_measure){0, 0.3};
}

/* Isotherms from `from` on, `step` apart, each 0.15 K off its set temperature at most, at n_frequency
 * frequencies. */
static inline void made_sweep(an_points *points, double from_K, double step_K, int n_isotherm,
                              const double *frequency_Hz, int n_frequency, double noise)
{
    unsigned state = 4711;
    double time = points->n_point ? points->point[points->n_point - 1].start_s + 1000 : 300;
    for (int i = 0; i < n_isotherm; i++) {
        double set = from_K + i * step_K, temperature = set + 0.15 * made_chance(&state);
        for (int k = 0; k < n_frequency; k++) {
            made_burst(points, temperature, frequency_Hz[k], time, noise)->set_temperature_K = set;
            time += 8 / frequency_Hz[k] + 2;
        }
        time += 300;
    }
}

#endif
