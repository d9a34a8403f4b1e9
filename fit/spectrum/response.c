/* Rows of the response engine: one observation, all modes. Ground of spectrum and superpose. Method: the
 * closed forms of single modes at the times a_T tau_i, and their derivatives by ln a_T, which are those by ln
 * tau_i. Range: as maxwell.h. */
#include "anelast/response.h"
#include "anelast/maxwell.h"

#include <math.h>

/* q = omega a_T tau */
static double storage_slope(double q)
{
    double d = 1 + q * q;
    return q < 1e100 ? 2 * (q / d) * (q / d) : 0;
}

static double loss_slope(double q)
{
    double d = 1 + q * q;
    return q < 1e100 ? q / d * (1 - q * q) / d : 0;
}

/* tau d/dtau of tau (exp(-(t - rise)/tau) - exp(-t/tau)), t >= rise */
static double hold_slope(double tau, double rise, double t)
{
    double since = t - rise;
    return an_mode_hold(tau, rise, t) + since * exp(-since / tau) - t * exp(-t / tau);
}

static double pull_slope(double tau, double t)
{
    return an_mode_pull(tau, t) - t * exp(-t / tau);
}

static double mode_row(const an_observation *o, double tau)
{
    switch (o->kind) {
    case AN_RESPONSE_STORAGE:
        return an_mode_storage(o->at * tau);
    case AN_RESPONSE_LOSS:
        return an_mode_loss(o->at * tau);
    case AN_RESPONSE_RELAXATION:
        return an_mode_relaxation(o->at / tau);
    case AN_RESPONSE_HOLD:
        return o->rate_per_s * an_mode_hold(tau, o->rise_s, o->at);
    case AN_RESPONSE_PULL:
        return o->rate_per_s * an_mode_pull(tau, o->at);
    }
    return NAN;
}

static double mode_slope(const an_observation *o, double tau)
{
    switch (o->kind) {
    case AN_RESPONSE_STORAGE:
        return storage_slope(o->at * tau);
    case AN_RESPONSE_LOSS:
        return loss_slope(o->at * tau);
    case AN_RESPONSE_RELAXATION:
        return o->at / tau * an_mode_relaxation(o->at / tau);
    case AN_RESPONSE_HOLD:
        return o->rate_per_s *
               (o->at < o->rise_s ? pull_slope(tau, o->at) : hold_slope(tau, o->rise_s, o->at));
    case AN_RESPONSE_PULL:
        return o->rate_per_s * pull_slope(tau, o->at);
    }
    return NAN;
}

static double equilibrium_row(const an_observation *o)
{
    switch (o->kind) {
    case AN_RESPONSE_STORAGE:
    case AN_RESPONSE_RELAXATION:
        return 1;
    case AN_RESPONSE_LOSS:
        return 0;
    case AN_RESPONSE_HOLD:
        return o->rate_per_s * fmin(o->at, o->rise_s);
    case AN_RESPONSE_PULL:
        return o->rate_per_s * o->at;
    }
    return NAN;
}

void an_response_row(const an_observation *observation, const double *time_s, size_t n_mode, double *row,
                     double *slope)
{
    double a = pow(10, observation->log10_aT), b = pow(10, observation->log10_bT);
    for (size_t i = 0; i < n_mode; i++) {
        row[i] = b * mode_row(observation, a * time_s[i]);
        if (slope)
            slope[i] = b * mode_slope(observation, a * time_s[i]);
    }
    row[n_mode] = b * equilibrium_row(observation);
    if (slope)
        slope[n_mode] = 0;
}
