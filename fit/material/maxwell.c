/* The generalised Maxwell model: ownership, checks, and the responses of it and of its single modes. Ground
 * floor of fit. Method: sums of closed forms, with expm1 where a small argument would lose digits. Range: any
 * times the exponent of a double can hold; omega tau from 0 up without overflow. */
#include "anelast/maxwell.h"
#include "fit/material/fault_list.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

void an_maxwell_init(an_maxwell *model)
{
    *model = (an_maxwell){0};
}

void an_maxwell_clear(an_maxwell *model)
{
    free(model->time_s);
    free(model->modulus_Pa);
    an_maxwell_init(model);
}

an_status an_maxwell_alloc(an_maxwell *model, size_t n_mode, an_error *err)
{
    an_maxwell_clear(model);
    if (n_mode == 0)
        return AN_OK;
    model->time_s = calloc(n_mode, sizeof *model->time_s);
    model->modulus_Pa = calloc(n_mode, sizeof *model->modulus_Pa);
    if (!model->time_s || !model->modulus_Pa) {
        an_maxwell_clear(model);
        return an_fail_memory(err, "the modes of a Maxwell model");
    }
    model->n_mode = n_mode;
    return AN_OK;
}

an_status an_maxwell_copy(an_maxwell *target, const an_maxwell *source, an_error *err)
{
    AN_TRY(an_maxwell_alloc(target, source->n_mode, err));
    if (source->n_mode > 0) {
        memcpy(target->time_s, source->time_s, source->n_mode * sizeof *target->time_s);
        memcpy(target->modulus_Pa, source->modulus_Pa, source->n_mode * sizeof *target->modulus_Pa);
    }
    target->equilibrium_Pa = source->equilibrium_Pa;
    return AN_OK;
}

static void check_mode(const an_maxwell *model, size_t i, an_status *status, an_error *err)
{
    double tau = model->time_s[i];
    double modulus = model->modulus_Pa[i];
    if (!(tau > 0 && isfinite(tau)))
        an_fault_add(err, status, "mode %zu: relaxation time %g s, where a finite time above 0 is allowed",
                     i + 1, tau);
    else if (i > 0 && !(tau > model->time_s[i - 1]))
        an_fault_add(err, status, "mode %zu: relaxation time %g s is not above %g s of mode %zu", i + 1, tau,
                     model->time_s[i - 1], i);
    if (!(modulus >= 0 && isfinite(modulus)))
        an_fault_add(err, status, "mode %zu: modulus %g Pa, where 0 or above is allowed", i + 1, modulus);
}

an_status an_maxwell_check(const an_maxwell *model, an_error *err)
{
    an_status status = AN_OK;
    double instantaneous = an_maxwell_instantaneous(model);
    if (!(model->equilibrium_Pa >= 0 && isfinite(model->equilibrium_Pa)))
        an_fault_add(err, &status, "equilibrium modulus %g Pa, where 0 or above is allowed",
                     model->equilibrium_Pa);
    for (size_t i = 0; i < model->n_mode; i++)
        check_mode(model, i, &status, err);
    if (!(instantaneous > 0 && isfinite(instantaneous)))
        an_fault_add(err, &status, "instantaneous modulus %g Pa, where a finite modulus above 0 is allowed",
                     instantaneous);
    return status;
}

/* Both forms of x^2/(1 + x^2) and x/(1 + x^2) so that neither x^2 nor 1/x^2 overflows. */
double an_mode_storage(double x)
{
    return x > 1 ? 1 / (1 + 1 / (x * x)) : x * x / (1 + x * x);
}

double an_mode_loss(double x)
{
    return x > 1 ? (1 / x) / (1 + 1 / (x * x)) : x / (1 + x * x);
}

double an_mode_relaxation(double t_tau)
{
    return exp(-t_tau);
}

double an_mode_pull(double tau, double t)
{
    return -tau * expm1(-t / tau);
}

/* tau exp(-t/tau)(exp(t1/tau) - 1) written as a decaying pull, which cannot overflow when t1 >> tau. */
double an_mode_hold(double tau, double rise, double t)
{
    if (t <= rise)
        return an_mode_pull(tau, t);
    return exp(-(t - rise) / tau) * an_mode_pull(tau, rise);
}

double an_maxwell_relaxation(const an_maxwell *model, double time_s)
{
    double sum = model->equilibrium_Pa;
    for (size_t i = 0; i < model->n_mode; i++)
        sum += model->modulus_Pa[i] * an_mode_relaxation(time_s / model->time_s[i]);
    return sum;
}

double an_maxwell_storage(const an_maxwell *model, double omega_rad_s)
{
    double sum = model->equilibrium_Pa;
    for (size_t i = 0; i < model->n_mode; i++)
        sum += model->modulus_Pa[i] * an_mode_storage(omega_rad_s * model->time_s[i]);
    return sum;
}

double an_maxwell_loss(const an_maxwell *model, double omega_rad_s)
{
    double sum = 0;
    for (size_t i = 0; i < model->n_mode; i++)
        sum += model->modulus_Pa[i] * an_mode_loss(omega_rad_s * model->time_s[i]);
    return sum;
}

double complex an_maxwell_complex(const an_maxwell *model, double omega_rad_s)
{
    return CMPLX(an_maxwell_storage(model, omega_rad_s), an_maxwell_loss(model, omega_rad_s));
}

double an_maxwell_magnitude(const an_maxwell *model, double omega_rad_s)
{
    return hypot(an_maxwell_storage(model, omega_rad_s), an_maxwell_loss(model, omega_rad_s));
}

double an_maxwell_loss_factor(const an_maxwell *model, double omega_rad_s)
{
    return an_maxwell_loss(model, omega_rad_s) / an_maxwell_storage(model, omega_rad_s);
}

double an_maxwell_instantaneous(const an_maxwell *model)
{
    double sum = model->equilibrium_Pa;
    for (size_t i = 0; i < model->n_mode; i++)
        sum += model->modulus_Pa[i];
    return sum;
}

static double first_moment(const an_maxwell *model)
{
    double sum = 0;
    for (size_t i = 0; i < model->n_mode; i++)
        sum += model->modulus_Pa[i] * model->time_s[i];
    return sum;
}

double an_maxwell_viscosity(const an_maxwell *model)
{
    return model->equilibrium_Pa > 0 ? INFINITY : first_moment(model);
}

double an_maxwell_steady_compliance(const an_maxwell *model)
{
    if (model->equilibrium_Pa > 0)
        return 1 / model->equilibrium_Pa;
    double viscosity = first_moment(model);
    double sum = 0;
    for (size_t i = 0; i < model->n_mode; i++) {
        double share = model->time_s[i] / viscosity;
        sum += model->modulus_Pa[i] * share * share;
    }
    return sum;
}

double an_maxwell_hold(const an_maxwell *model, double rate_per_s, double rise_s, double time_s)
{
    double sum = model->equilibrium_Pa * fmin(time_s, rise_s);
    for (size_t i = 0; i < model->n_mode; i++)
        sum += model->modulus_Pa[i] * an_mode_hold(model->time_s[i], rise_s, time_s);
    return rate_per_s * sum;
}

double an_maxwell_pull(const an_maxwell *model, double rate_per_s, double time_s)
{
    double sum = model->equilibrium_Pa * time_s;
    for (size_t i = 0; i < model->n_mode; i++)
        sum += model->modulus_Pa[i] * an_mode_pull(model->time_s[i], time_s);
    return rate_per_s * sum;
}
