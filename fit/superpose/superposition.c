/* The result of a superposition: ownership, and what the joint fit hands out. Stage: superpose. Method:
 * copies, with the covariance and the verdict made by the files that this one calls. */
#include "anelast/superpose.h"
#include "fit/superpose/joint.h"
#include "fit/superpose/verdict.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

void an_superposition_init(an_superposition *result)
{
    *result = (an_superposition){0};
    an_maxwell_init(&result->spectrum);
}

void an_superposition_clear(an_superposition *result)
{
    free(result->log10_aT);
    free(result->log10_bT);
    free(result->noise_covariance);
    free(result->common_covariance);
    free(result->determined);
    free(result->residual);
    an_maxwell_clear(&result->spectrum);
    an_superposition_init(result);
}

static an_status result_alloc(an_superposition *result, size_t n_isotherm, size_t n_point, an_error *err)
{
    size_t n = 2 * n_isotherm;
    result->log10_aT = calloc(n_isotherm, sizeof(double));
    result->log10_bT = calloc(n_isotherm, sizeof(double));
    result->noise_covariance = calloc(n * n, sizeof(double));
    result->common_covariance = calloc(n * n, sizeof(double));
    result->determined = calloc(n_isotherm, sizeof(int));
    result->residual = calloc(2 * n_point, sizeof(double));
    if (!result->log10_aT || !result->log10_bT || !result->noise_covariance || !result->common_covariance ||
        !result->determined || !result->residual)
        return an_fail_memory(err, "the result of the joint fit");
    result->n_isotherm = n_isotherm;
    result->n_point = n_point;
    return AN_OK;
}

static an_status hand_out_spectrum(const an_joint *joint, an_superposition *result, an_error *err)
{
    AN_TRY(an_maxwell_alloc(&result->spectrum, joint->n_mode, err));
    memcpy(result->spectrum.time_s, joint->time_s, joint->n_mode * sizeof(double));
    memcpy(result->spectrum.modulus_Pa, joint->now.x_Pa, joint->n_mode * sizeof(double));
    result->spectrum.equilibrium_Pa = joint->equilibrium ? joint->now.x_Pa[joint->n_mode] : 0;
    return AN_OK;
}

int an_modulus_is_sure(double storage_Pa, double loss_Pa, const double noise_Pa2[3])
{
    static const double sure = 0.01; /* the 1 % that the trade asks of the modulus */
    return sqrt(noise_Pa2[0]) <= sure * hypot(storage_Pa, loss_Pa);
}

/* Reduced frequencies that the data cover: those of isotherms whose shift is determined, out to the last
 * points that know the modulus well; where none does, to the last. */
static void hand_out_range(const an_joint *joint, an_superposition *result)
{
    for (int any = 0; any < 2; any++) {
        result->omega_range[0] = INFINITY;
        result->omega_range[1] = 0;
        for (size_t p = 0; p < joint->n_point; p++) {
            const an_superpose_point *point = &joint->input->point[p];
            if (!result->determined[joint->isotherm_of[p]] ||
                !(any || an_modulus_is_sure(point->storage_Pa, point->loss_Pa, point->noise)))
                continue;
            result->omega_range[0] = fmin(result->omega_range[0], joint->omega[p]);
            result->omega_range[1] = fmax(result->omega_range[1], joint->omega[p]);
        }
        if (result->omega_range[0] < result->omega_range[1])
            return;
    }
}

an_status an_joint_hand_out(an_joint *joint, const an_superpose_options *options, an_superposition *result,
                            an_error *err)
{
    AN_TRY(result_alloc(result, joint->n_isotherm, joint->n_point, err));
    AN_TRY(hand_out_spectrum(joint, result, err));
    memcpy(result->log10_aT, joint->now.log10_a, joint->n_isotherm * sizeof(double));
    memcpy(result->log10_bT, joint->now.log10_b, joint->n_isotherm * sizeof(double));
    result->i_reference = joint->i_reference;
    result->reference_temperature_K = joint->input->isotherm[joint->i_reference].temperature_K;
    result->vertical = joint->vertical;
    result->modes_per_decade = joint->per_decade;
    result->strength = joint->strength;
    result->used = joint->smooth.used;
    result->chi_square = joint->smooth.chi_square;
    result->degrees_of_freedom = fmax((double)joint->n_row - joint->smooth.used - (double)joint->n_outer, 1);
    result->reduced_chi_square = result->chi_square / result->degrees_of_freedom;
    result->inflation = fmax(result->reduced_chi_square, 1);
    an_joint_model(joint);
    an_verdict_fill(joint, options, result);
    AN_TRY(an_joint_covariance(joint, options, result, err));
    hand_out_range(joint, result);
    return result->simplicity == AN_SIMPLE ? AN_OK : AN_DUBIOUS;
}

const char *an_simplicity_word(an_simplicity simplicity)
{
    static const char *const words[] = {"simple", "doubtful", "complex"};
    return words[simplicity];
}

const char *an_vertical_word(an_vertical vertical)
{
    static const char *const words[] = {"none", "density-temperature", "free"};
    return words[vertical];
}
