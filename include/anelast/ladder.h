/* anelast/ladder.h: what stands between the channels and the specimen, peeled off from the sensor inwards,
 * and put on again. Stage: correct. Numbers at one frequency; where they come from is anelast/apparatus.h.
 *
 * Force at the drive:
 *   K1 = Km (g_x / g_F) exp(-i w (d_F - d_x));  K2 = K1 - k - i w c + m w^2;  1/K_s = 1/K2 - C*
 * Force at a fixed end:
 *   K1 as above;  K2 = K1 (1 - m_c w^2 / K_t);  1/K_s = (1 - K1 / K_t) / K2 - C*
 * with g gains, d seconds by which a channel is sampled late, k and c shaft stiffness and damping, m moving
 * mass, C* frame compliance, K_t transducer stiffness, m_c mass between specimen and transducer.
 */
#ifndef ANELAST_LADDER_H
#define ANELAST_LADDER_H

#include "anelast/apparatus.h"
#include "anelast/points.h"

#include <complex.h>

/* The ladder at one frequency and temperature. */
typedef struct an_ladder {
    double omega;                /* [rad/s] */
    int fixed_end;               /* nonzero: force measured at the fixed end */
    double gain_ratio;           /* [1] displacement's gain over force's */
    double delay_s;              /* [s] force sampled after displacement */
    double shaft_stiffness;      /* [N/m] */
    double shaft_damping;        /* [N.s/m] */
    double moving_mass;          /* [kg] */
    double transducer_stiffness; /* [N/m] INFINITY: rigid */
    double fixture_mass;         /* [kg] */
    double complex compliance;   /* [m/N] C* = storage - i loss */
} an_ladder;

/* What the rungs gave. */
typedef struct an_rungs {
    double complex channel, parallel, series; /* [N/m] stiffness after each rung; series is K_s */
} an_rungs;

/* an_ladder_set: the ladder of an apparatus at a frequency [Hz] and temperature [K]. */
void an_ladder_set(an_ladder *ladder, const an_apparatus *apparatus, double frequency_Hz,
                   double temperature_K);

/* an_ladder_peel: measured stiffness [N/m] to the specimen's. rungs [out, nullable]. Returns K_s. */
double complex an_ladder_peel(const an_ladder *ladder, double complex measured, an_rungs *rungs);

/* an_ladder_build: the specimen's stiffness [N/m] to what would be measured; the exact inverse of
 * an_ladder_peel. */
double complex an_ladder_build(const an_ladder *ladder, double complex specimen);

/* an_ladder_ratio: |K_s| |C*|, the transducer's compliance included: how much of the displacement is not the
 * specimen's. */
double an_ladder_ratio(const an_ladder *ladder, double complex specimen);

#endif
