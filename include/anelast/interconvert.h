/* anelast/interconvert.h: exact conversion between relaxation and retardation, and between E and G.
 *
 * The Laplace-transformed modulus of a Maxwell model is a rational function; the retardation times are its
 * zeros, one between each two neighbouring relaxation times and, for a solid, one beyond the last [GR68;
 * PS99]. Each is found in its bracket, measured from the nearer pole so that close pairs keep their digits;
 * no fit, no quadrature.
 */
#ifndef ANELAST_INTERCONVERT_H
#define ANELAST_INTERCONVERT_H

#include <stddef.h>
#include <complex.h>

#include "anelast/maxwell.h"
#include "anelast/status.h"

/* D(t) = D_g + sum_j D_j (1 - exp(-t/lambda_j)) + t phi */
typedef struct an_retardation {
    size_t n_mode;               /* number of retardation modes */
    double *time_s;              /* [n_mode] retardation times, s, positive, increasing; owned */
    double *compliance_per_Pa;   /* [n_mode] strengths, 1/Pa, > 0; owned */
    double instantaneous_per_Pa; /* D_g, 1/Pa, > 0 */
    double fluidity_per_Pa_s;    /* phi = 1/viscosity, 1/(Pa s); 0 for a solid */
} an_retardation;

/* an_retardation_init, _alloc, _clear: as for an_maxwell. */
void an_retardation_init(an_retardation *spectrum);
an_status an_retardation_alloc(an_retardation *spectrum, size_t n_mode, an_error *err);
void an_retardation_clear(an_retardation *spectrum);

/* an_maxwell_to_retardation: the retardation spectrum of a Maxwell model, exactly. Modes of zero strength are
 * left out.
 *   model     [in]  must pass an_maxwell_check
 *   spectrum  [out] initialised; as many modes as the model has non-zero ones, one fewer for a liquid; empty when refused
 * Returns AN_OK, AN_E_VALUE, AN_E_MEMORY, AN_E_NUMERIC. */
an_status an_maxwell_to_retardation(const an_maxwell *model, an_retardation *spectrum, an_error *err);

/* an_retardation_to_maxwell: the way back, by the same method. Needs D_g > 0.
 *   model  [out] initialised; as many modes as the spectrum, one more for a liquid; empty when refused
 * Returns AN_OK, AN_E_VALUE, AN_E_MEMORY, AN_E_NUMERIC. */
an_status an_retardation_to_maxwell(const an_retardation *spectrum, an_maxwell *model, an_error *err);

/* an_retardation_creep: D(t), 1/Pa, at t [s] >= 0 after a step of stress.
 * an_retardation_complex: D*(omega) = 1/E*(omega) = D' - i D'', 1/Pa, at omega > 0 [rad/s]; for a solid omega
 * >= 0. */
double an_retardation_creep(const an_retardation *spectrum, double time_s);
double complex an_retardation_complex(const an_retardation *spectrum, double omega_rad_s);

/* How E and G hang together. One of the two: a constant Poisson ratio, or, closer across a glass transition,
 * a constant bulk modulus. */
typedef enum an_elastic_kind { AN_ELASTIC_POISSON, AN_ELASTIC_BULK } an_elastic_kind;
typedef struct an_elastic_link {
    an_elastic_kind kind;
    double poisson; /* Poisson ratio, 1, -1 < nu <= 0.5; read for AN_ELASTIC_POISSON only */
    double bulk_Pa; /* bulk modulus, Pa, > 0; read for AN_ELASTIC_BULK only */
} an_elastic_link;

/* an_shear_from_tension, an_tension_from_shear: one complex modulus [Pa] from the other.
 * nu: G* = E* / (2(1 + nu)). B: 1/G* = 3/E* - 1/(3 B), so G* = 3 B E* / (9 B - E*) and E* = 9 B G* / (3 B +
 * G*). */
double complex an_shear_from_tension(double complex tension_Pa, const an_elastic_link *link);
double complex an_tension_from_shear(double complex shear_Pa, const an_elastic_link *link);

/* an_maxwell_shear_from_tension, an_maxwell_tension_from_shear: the whole spectrum, exactly. With a constant
 * bulk modulus J(t) = 3 D(t) - 1/(3 B), so only the instantaneous compliance moves and the retardation times
 * stay; the relaxation times follow by interconversion.
 *   converted  [out] initialised; may not be the model itself
 * Returns AN_OK; AN_E_VALUE for a link out of range, or a modulus so high (E_g >= 9 B, so nu <= -1) that no G
 * exists; AN_E_MEMORY, AN_E_NUMERIC. */
an_status an_maxwell_shear_from_tension(const an_maxwell *model, const an_elastic_link *link,
                                        an_maxwell *converted, an_error *err);
an_status an_maxwell_tension_from_shear(const an_maxwell *model, const an_elastic_link *link,
                                        an_maxwell *converted, an_error *err);

#endif
