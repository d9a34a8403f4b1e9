/* Judging a material: faults that forbid its use, each by name, and cautions for whoever uses it. Ground
 * floor of fit. Method: what a mechanical model must obey (positive dissipation, finite moduli) and the usual
 * mistakes of handing over relaxation data to a simulation (common practice). */
#include "anelast/material.h"
#include "fit/material/fault_list.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* A whole and its parts as printed agree to 1e-6: documents carry at least seven digits. */
#define SUM_TOLERANCE 1e-6

static double mode_sum(const an_maxwell *modes)
{
    double sum = 0;
    for (size_t i = 0; i < modes->n_mode; i++)
        sum += modes->modulus_Pa[i];
    return sum;
}

static void check_sums(const an_material *material, an_status *status, an_error *err)
{
    double whole = material->instantaneous_Pa;
    double modes = mode_sum(&material->modes);
    bool solid = strcmp(material->end_state, "solid") == 0;
    if (solid && !(modes < whole))
        an_fault_add(err, status, "sum of weights %.7g of a solid, where less than 1 is allowed",
                     modes / whole);
    if (solid && !(material->modes.equilibrium_Pa > 0))
        an_fault_add(err, status, "long-term modulus %g Pa of a solid, where more than 0 is needed",
                     material->modes.equilibrium_Pa);
    if (strcmp(material->end_state, "liquid") == 0 && material->modes.equilibrium_Pa != 0)
        an_fault_add(err, status, "long-term modulus %g Pa of a liquid, where 0 is needed",
                     material->modes.equilibrium_Pa);
    double parts = modes + material->modes.equilibrium_Pa;
    if (!(fabs(parts - whole) <= SUM_TOLERANCE * whole))
        an_fault_add(err, status, "instantaneous modulus %g Pa is not long-term modulus plus modes, %g Pa",
                     whole, parts);
}

static void check_words(const an_material *material, an_status *status, an_error *err)
{
    const char *end = material->end_state;
    if (strcmp(end, "solid") != 0 && strcmp(end, "liquid") != 0 && strcmp(end, "undetermined") != 0)
        an_fault_add(err, status, "end state '%s', where solid, liquid and undetermined are allowed", end);
    if (strcmp(material->simplicity, "complex") == 0 && !material->override_reason[0])
        an_fault_add(err, status, "the material is complex and nobody has overridden that in writing");
}

static void check_ranges(const an_material *material, an_status *status, an_error *err)
{
    const double *time = material->window_time_s;
    const double *temperature = material->window_temperature_K;
    if (!(material->reference_temperature_K > 0 && isfinite(material->reference_temperature_K)))
        an_fault_add(err, status, "reference temperature %g K, where above 0 K is allowed",
                     material->reference_temperature_K);
    if (!(time[0] > 0 && time[1] >= time[0]))
        an_fault_add(err, status,
                     "trusted times %g .. %g s, where a positive range in rising order is allowed", time[0],
                     time[1]);
    if (!(temperature[0] > 0 && temperature[1] >= temperature[0]))
        an_fault_add(err, status,
                     "temperatures %g .. %g K, where a positive range in rising order is allowed",
                     temperature[0], temperature[1]);
}

static void check_law(const an_material *material, an_status *status, an_error *err)
{
    an_error fault = {0};
    const an_law *law = &material->law;
    if (law->kind == AN_LAW_NONE)
        return;
    if (an_law_check(law, &fault) < 0)
        an_fault_add(err, status, "%s", fault.text);
    if (law->reference_temperature_K != material->reference_temperature_K)
        an_fault_add(err, status, "the law's reference temperature %g K is not that of the times, %g K",
                     law->reference_temperature_K, material->reference_temperature_K);
}

an_status an_material_check(const an_material *material, an_error *err)
{
    an_status status = AN_OK;
    an_error fault = {0};
    if (an_maxwell_check(&material->modes, &fault) < 0)
        an_fault_add(err, &status, "%s", fault.text);
    check_sums(material, &status, err);
    check_words(material, &status, err);
    check_ranges(material, &status, err);
    check_law(material, &status, err);
    return status;
}

/* A caution: whether it applies, and its text. Returns 0 where it does not apply. */
typedef int (*caution)(const an_material *material, char *text, size_t size);

static int caution_weights(const an_material *material, char *text, size_t size)
{
    return snprintf(
        text, size,
        "Relative weights refer to the instantaneous modulus %.6g Pa, which is the stiffness at the fast end "
        "of the trusted window, not that of the glass; do not enter the long-term modulus in its place",
        material->instantaneous_Pa);
}

static int caution_basis(const an_material *material, char *text, size_t size)
{
    return snprintf(text, size,
                    "Moduli are %s; weights of E are weights of G only where the Poisson ratio is constant",
                    material->is_shear ? "shear moduli G" : "tension moduli E");
}

static int caution_window(const an_material *material, char *text, size_t size)
{
    return snprintf(
        text, size,
        "Predictions hold for reduced times %.4g .. %.4g s at %.6g K and temperatures %.6g .. %.6g K; modes "
        "that are not trusted only close the spectrum at its ends",
        material->window_time_s[0], material->window_time_s[1], material->reference_temperature_K,
        material->window_temperature_K[0], material->window_temperature_K[1]);
}

static int caution_long_term(const an_material *material, char *text, size_t size)
{
    if (!(material->long_term_Pa > 0))
        return 0;
    return snprintf(text, size,
                    "The long-term modulus %.6g Pa is what is left after the slow end of the trusted window; "
                    "its uncertainty is that of the noise, and relaxation slower than %.4g s would lower it",
                    material->long_term_Pa, material->window_time_s[1]);
}

static int caution_strain(const an_material *material, char *text, size_t size)
{
    if (!isfinite(material->strain_limit))
        return snprintf(text, size,
                        "The strain amplitude of the measurement is not known: linearity is unproven");
    return snprintf(text, size, "Linear behaviour was measured up to a strain amplitude of %.3g only",
                    material->strain_limit);
}

static int caution_law(const an_material *material, char *text, size_t size)
{
    if (material->law.kind == AN_LAW_NONE)
        return snprintf(text, size, "There is no shift law: use the material at %.6g K only",
                        material->reference_temperature_K);
    return snprintf(text, size,
                    "The shift law gives log10 of a_T with a_T < 1 above %.6g K; times are multiplied by a_T",
                    material->reference_temperature_K);
}

static int caution_scaling(const an_material *material, char *text, size_t size)
{
    if (strcmp(material->vertical, "none") == 0)
        return snprintf(text, size, "Moduli were not scaled with temperature: b_T = 1 at all temperatures");
    return snprintf(text, size,
                    "Moduli scale with b_T over temperature, all modes and the long-term modulus alike; the "
                    "weights and the shift law alone do not carry this");
}

static int caution_end(const an_material *material, char *text, size_t size)
{
    if (strcmp(material->end_state, "undetermined") != 0)
        return 0;
    return snprintf(text, size,
                    "The data do not say whether this is a solid or a liquid: do not predict beyond %.4g s",
                    material->window_time_s[1]);
}

static int caution_simplicity(const an_material *material, char *text, size_t size)
{
    if (strcmp(material->simplicity, "complex") == 0)
        return snprintf(text, size, "Superposition does NOT apply and was overridden: %s",
                        material->override_reason);
    if (strcmp(material->simplicity, "doubtful") == 0)
        return snprintf(text, size, "Superposition is doubtful: do not extrapolate");
    return 0;
}

int an_material_caution(const an_material *material, int i_caution, char text[AN_CAUTION_SIZE])
{
    static const caution cautions[] = {caution_simplicity, caution_weights,   caution_basis,
                                       caution_window,     caution_long_term, caution_strain,
                                       caution_law,        caution_scaling,   caution_end};
    int n_found = 0;
    for (size_t i = 0; i < sizeof cautions / sizeof cautions[0]; i++)
        if (cautions[i](material, text, AN_CAUTION_SIZE) > 0 && n_found++ == i_caution)
            return 1;
    text[0] = '\0';
    return 0;
}
