/* The apparatus ladder: channel response, parallel elements, series elements, in the order from the sensor to
 * the specimen. Stage: correct. Method: complex stiffnesses in parallel add, compliances in series add.
 * Range: below the first resonance of the specimen itself; a clamp mass between compliance and specimen would
 * ask for another order.
 */
#include "anelast/ladder.h"

#include <math.h>

void an_ladder_set(an_ladder *l, const an_apparatus *a, double frequency_Hz, double temperature_K)
{
    double storage = 0, loss = 0, u = 0;
    an_apparatus_compliance(a, frequency_Hz, temperature_K, &storage, &loss, &u);
    double transducer = a->transducer_stiffness.value;
    *l = (an_ladder){
        .omega = 2 * M_PI * frequency_Hz,
        .fixed_end = a->force_at == AN_FORCE_AT_FIXED_END,
        .gain_ratio = a->displacement.gain.value / a->force.gain.value,
        .delay_s = a->force.delay.value - a->displacement.delay.value,
        .shaft_stiffness = a->shaft_stiffness.value,
        .shaft_damping = a->shaft_damping.value,
        .moving_mass = a->moving_mass.value,
        .transducer_stiffness = isnan(transducer) ? INFINITY : transducer,
        .fixture_mass = a->fixture_mass.value,
        .compliance = storage - I * loss,
    };
}

/* The parallel elements at the drive; at a fixed end the factor that the fixture's mass puts on the force. */
static double complex parallel_stiffness(const an_ladder *l)
{
    return l->shaft_stiffness + I * l->omega * l->shaft_damping - l->moving_mass * l->omega * l->omega;
}

static double fixture_factor(const an_ladder *l)
{
    return 1 - l->fixture_mass * l->omega * l->omega / l->transducer_stiffness;
}

double complex an_ladder_peel(const an_ladder *l, double complex measured, an_rungs *rungs)
{
    an_rungs own, *r = rungs ? rungs : &own;
    r->channel = measured * l->gain_ratio * cexp(-I * l->omega * l->delay_s);
    if (l->fixed_end) {
        r->parallel = r->channel * fixture_factor(l);
        r->series = 1 / ((1 - r->channel / l->transducer_stiffness) / r->parallel - l->compliance);
    } else {
        r->parallel = r->channel - parallel_stiffness(l);
        r->series = 1 / (1 / r->parallel - l->compliance);
    }
    return r->series;
}

double complex an_ladder_build(const an_ladder *l, double complex specimen)
{
    double complex behind = 1 / specimen + l->compliance,
                   channel; /* displacement per force through the specimen */
    if (l->fixed_end)
        channel = 1 / (behind * fixture_factor(l) + 1 / l->transducer_stiffness);
    else
        channel = 1 / behind + parallel_stiffness(l);
    return channel / (l->gain_ratio * cexp(-I * l->omega * l->delay_s));
}

double an_ladder_ratio(const an_ladder *l, double complex specimen)
{
    double transducer = l->fixed_end ? 1 / l->transducer_stiffness : 0;
    return cabs(specimen) * (cabs(l->compliance) + transducer);
}
