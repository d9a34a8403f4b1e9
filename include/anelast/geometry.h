/* anelast/geometry.h: from the stiffness of a specimen to the modulus of its material and back, for every row
 * of the geometry table. Stage: correct. Numbers only; what a specimen is stands in anelast/specimen.h.
 *
 * K_s = M form / term for all kinds but the bonded block, where the bulk modulus enters in series. M is E, or
 * G where an_geometry_is_shear says so. Stiffness is N/m, in torsion and between plates N.m/rad.
 */
#ifndef ANELAST_GEOMETRY_H
#define ANELAST_GEOMETRY_H

#include "anelast/specimen.h"

#include <complex.h>

/* What a form factor hangs on. */
typedef enum an_dimension {
    AN_DIMENSION_LENGTH = 0, /* [m] */
    AN_DIMENSION_WIDTH,      /* [m] */
    AN_DIMENSION_THICKNESS,  /* [m] */
    AN_DIMENSION_DIAMETER,   /* [m] */
    AN_DIMENSION_HEIGHT,     /* [m] */
    AN_DIMENSION_AREA,       /* [m2] */
    AN_DIMENSION_ADDED,      /* [m] added length */
    AN_DIMENSION_RATIO,      /* [1] E/G of the shear term */
    AN_DIMENSION_SHAPE,      /* [1] shape factor */
    AN_DIMENSION_COUNT
} an_dimension;

/* Stiffness over modulus, in its parts. */
typedef struct an_form {
    double plain_m;  /* [m] (torsion: m3) form factor without end correction, shear or constraint */
    double factor_m; /* [m] (torsion: m3) form factor with all of them, bulk modulus left out */
    double bulk_m;   /* [m] A / h of a bonded block, in series with bulk modulus; 0 for other kinds */
} an_form;

/* an_geometry_form: the form factor.
 *   geometry [in] as an_specimen_check passes it; form [out]
 * Compression [GL59], shear and bending terms [TG51], torsion [RY89]: within 0.45 % of Saint-Venant's at w/t
 * = 1.15, 0.09 % from 1.5. The bonded block overestimates by up to 18 % above shape factor 5 against the
 * exact pressure solution.
 * Returns AN_OK or AN_E_VALUE (a kind without a row, or no positive form factor). */
an_status an_geometry_form(const an_geometry *geometry, an_form *form, an_error *err);

/* an_geometry_derivative: d factor_m / d dimension, by a complex step (exact to rounding); 0 where the kind
 * does not hang on it or the geometry holds no value for it. */
double an_geometry_derivative(const an_geometry *geometry, an_dimension dimension);

/* an_geometry_stiffness / an_geometry_modulus: K_s [N/m] of a modulus [Pa], and back.
 *   bulk_Pa [in] bulk modulus of a bonded block; NAN or of another kind: incompressible */
double complex an_geometry_stiffness(const an_form *form, double bulk_Pa, double complex modulus);
double complex an_geometry_modulus(const an_form *form, double bulk_Pa, double complex stiffness);

/* an_geometry_at: dimensions at a temperature [K], by the specimen's thermal expansion where both it and the
 * temperature of measurement are given; the span of a bending or cantilever fixture is the fixture's and
 * stays. */
an_geometry an_geometry_at(const an_geometry *geometry, double temperature_K);

/* an_geometry_strain: greatest strain (shear strain for G kinds) in the specimen per unit of displacement or
 * angle [1/m, 1]. */
double an_geometry_strain(const an_geometry *geometry);

/* an_geometry_gauge: the length that the static displacement is set against for a static strain [m]; the
 * inverse of the strain per displacement. */
double an_geometry_gauge(const an_geometry *geometry);

#endif
