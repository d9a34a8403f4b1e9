/* From tension to shear and back: single complex moduli and whole spectra. Ground floor of fit.
 * Method: isotropic elasticity at every frequency (correspondence principle), with a constant Poisson ratio
 * or a constant bulk modulus. A constant bulk modulus is exact on the compliance side, J* = 3 D* - 1/(3 B):
 * only the instantaneous part moves. Range: 1/E > 1/(9 B), which is nu > -1. */
#include "anelast/interconvert.h"

#include <math.h>
#include <stdbool.h>

double complex an_shear_from_tension(double complex tension_Pa, const an_elastic_link *link)
{
    if (link->kind == AN_ELASTIC_POISSON)
        return tension_Pa / (2 * (1 + link->poisson));
    return 3 * link->bulk_Pa * tension_Pa / (9 * link->bulk_Pa - tension_Pa);
}

double complex an_tension_from_shear(double complex shear_Pa, const an_elastic_link *link)
{
    if (link->kind == AN_ELASTIC_POISSON)
        return shear_Pa * 2 * (1 + link->poisson);
    return 9 * link->bulk_Pa * shear_Pa / (3 * link->bulk_Pa + shear_Pa);
}

static an_status check_link(const an_elastic_link *link, an_error *err)
{
    if (link->kind == AN_ELASTIC_POISSON && !(link->poisson > -1 && link->poisson <= 0.5))
        return an_fail(err, AN_E_VALUE, "", "Poisson ratio %g; above -1 and up to 0.5 is allowed",
                       link->poisson);
    if (link->kind == AN_ELASTIC_BULK && !(link->bulk_Pa > 0 && isfinite(link->bulk_Pa)))
        return an_fail(err, AN_E_VALUE, "", "bulk modulus %g Pa; a finite modulus above 0 is allowed",
                       link->bulk_Pa);
    return AN_OK;
}

static an_status scale_model(const an_maxwell *model, double factor, an_maxwell *converted, an_error *err)
{
    AN_TRY(an_maxwell_check(model, err));
    AN_TRY(an_maxwell_copy(converted, model, err));
    for (size_t i = 0; i < converted->n_mode; i++)
        converted->modulus_Pa[i] *= factor;
    converted->equilibrium_Pa *= factor;
    return AN_OK;
}

/* The converted model whose compliance is factor D(t) + shift. */
static an_status move_compliance(const an_maxwell *model, double factor, double shift_per_Pa,
                                 an_maxwell *converted, an_error *err)
{
    an_retardation spectrum;
    an_status status = AN_OK;
    an_retardation_init(&spectrum);
    AN_CLEAN(an_maxwell_to_retardation(model, &spectrum, err));
    spectrum.instantaneous_per_Pa = factor * spectrum.instantaneous_per_Pa + shift_per_Pa;
    if (!(spectrum.instantaneous_per_Pa > 0)) {
        status = an_fail(err, AN_E_VALUE, "",
                         "instantaneous modulus %g Pa is not below nine times the bulk modulus",
                         an_maxwell_instantaneous(model));
        goto cleanup;
    }
    for (size_t j = 0; j < spectrum.n_mode; j++)
        spectrum.compliance_per_Pa[j] *= factor;
    spectrum.fluidity_per_Pa_s *= factor;
    AN_CLEAN(an_retardation_to_maxwell(&spectrum, converted, err));
cleanup:
    an_retardation_clear(&spectrum);
    return status;
}

an_status an_maxwell_shear_from_tension(const an_maxwell *model, const an_elastic_link *link,
                                        an_maxwell *converted, an_error *err)
{
    AN_TRY(check_link(link, err));
    if (link->kind == AN_ELASTIC_POISSON)
        return scale_model(model, 1 / (2 * (1 + link->poisson)), converted, err);
    return move_compliance(model, 3, -1 / (3 * link->bulk_Pa), converted, err);
}

an_status an_maxwell_tension_from_shear(const an_maxwell *model, const an_elastic_link *link,
                                        an_maxwell *converted, an_error *err)
{
    AN_TRY(check_link(link, err));
    if (link->kind == AN_ELASTIC_POISSON)
        return scale_model(model, 2 * (1 + link->poisson), converted, err);
    return move_compliance(model, 1.0 / 3, 1 / (9 * link->bulk_Pa), converted, err);
}
