/* anelast/maxwell.h: the generalised Maxwell model, and every response that is linear in it.
 *
 * E(t) = E_e + sum_i E_i exp(-t/tau_i), an equilibrium modulus and modes in parallel [FE80, ch. 3]. The same
 * struct serves tension (E) and shear (G): the basis is kept by the document that holds it. Times are those
 * at the reference temperature; at another temperature give the functions reduced times t/a_T and reduced
 * angular frequencies omega a_T. Signs: exp(+i omega t), E* = E' + i E''.
 */
#ifndef ANELAST_MAXWELL_H
#define ANELAST_MAXWELL_H

#include <stddef.h>
#include <complex.h>

#include "anelast/status.h"

typedef struct an_maxwell {
    size_t n_mode;         /* number of modes; 0 is a spring alone */
    double *time_s;        /* [n_mode] relaxation times, s, positive, increasing; owned */
    double *modulus_Pa;    /* [n_mode] strengths, Pa, >= 0; owned */
    double equilibrium_Pa; /* long-term modulus, Pa, >= 0; 0 for a liquid */
} an_maxwell;

/* an_maxwell_init: an empty model that owns nothing. */
void an_maxwell_init(an_maxwell *model);

/* an_maxwell_alloc: give an initialised model n_mode modes, all zero; what it held is released.
 * Returns AN_OK, AN_E_MEMORY (model then empty). */
an_status an_maxwell_alloc(an_maxwell *model, size_t n_mode, an_error *err);

/* an_maxwell_copy: deep copy into an initialised target; what it held is released.
 * Returns AN_OK, AN_E_MEMORY (target then empty). */
an_status an_maxwell_copy(an_maxwell *target, const an_maxwell *source, an_error *err);

/* an_maxwell_clear: release what the model owns; it may be used again as after init. */
void an_maxwell_clear(an_maxwell *model);

/* an_maxwell_check: positive increasing finite times, non-negative finite strengths and equilibrium modulus,
 * and an instantaneous modulus above zero. Every fault is named, with its mode counted from 1.
 * Returns AN_OK or AN_E_VALUE. */
an_status an_maxwell_check(const an_maxwell *model, an_error *err);

/* One mode of unit strength; the rows of a linear fit are made of these.
 *   omega_tau, t_tau  [in] omega tau_i and t/tau_i, dimensionless, >= 0
 *   tau, rise, t      [in] s, tau > 0, rise >= 0, t >= 0
 * an_mode_hold returns s: stress over (rate of the rise times strength) at t since the start of a rise that
 * takes `rise` and then holds the strain; an_mode_pull returns s likewise while the strain grows from t = 0.
 * Both are measurement formulas of a Boltzmann integral over a ramp [FE80, ch. 3]; during the rise a hold is
 * a pull. For the equilibrium spring the hold is min(t, rise), the pull t. */
double an_mode_storage(double omega_tau);
double an_mode_loss(double omega_tau);
double an_mode_relaxation(double t_tau);
double an_mode_hold(double tau, double rise, double t);
double an_mode_pull(double tau, double t);

/* an_maxwell_relaxation: E(t), Pa, at t [s] >= 0 after a step. */
double an_maxwell_relaxation(const an_maxwell *model, double time_s);

/* an_maxwell_complex: E*(omega) = E' + iE'', Pa, at angular frequency [rad/s] >= 0. */
double complex an_maxwell_complex(const an_maxwell *model, double omega_rad_s);

/* an_maxwell_storage, _loss, _magnitude: E', E'', |E*|, Pa; an_maxwell_loss_factor: tan delta = E''/E' (NaN
 * for a liquid at omega = 0). */
double an_maxwell_storage(const an_maxwell *model, double omega_rad_s);
double an_maxwell_loss(const an_maxwell *model, double omega_rad_s);
double an_maxwell_magnitude(const an_maxwell *model, double omega_rad_s);
double an_maxwell_loss_factor(const an_maxwell *model, double omega_rad_s);

/* an_maxwell_instantaneous: E(0) = E_e + sum E_i, Pa. The long-term modulus is model->equilibrium_Pa. */
double an_maxwell_instantaneous(const an_maxwell *model);

/* an_maxwell_viscosity: zero-rate viscosity sum E_i tau_i, Pa s, of a liquid; INFINITY for a solid [FE80, ch.
 * 3]. */
double an_maxwell_viscosity(const an_maxwell *model);

/* an_maxwell_steady_compliance: 1/Pa; of a liquid the recoverable one, sum E_i tau_i^2 / (sum E_i tau_i)^2;
 * of a solid 1/E_e [FE80, ch. 3]. */
double an_maxwell_steady_compliance(const an_maxwell *model);

/* an_maxwell_hold: stress, Pa, at time_s since the start of a strain that rises at `rate` [1/s] for rise_s >=
 * 0 and is then held: rate [E_e min(t, t1) + sum E_i tau_i exp(-t/tau_i)(exp(t1/tau_i) - 1)] once t >= t1.
 * an_maxwell_pull: stress, Pa, under a strain that grows at `rate` from t = 0:
 * rate [E_e t + sum E_i tau_i (1 - exp(-t/tau_i))]. */
double an_maxwell_hold(const an_maxwell *model, double rate_per_s, double rise_s, double time_s);
double an_maxwell_pull(const an_maxwell *model, double rate_per_s, double time_s);

#endif
