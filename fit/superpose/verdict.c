/* Does the material superpose? Stage: superpose, after the joint fit. Method: two numbers. The reduced
 * chi-square of the fit, with a floor added to the noise that stands for what no test of the trade can tell
 * from an exact model (linearity, evenness of temperature, ripple of discrete modes): where the noise is
 * tiny, chi-square alone would condemn every material. And the rms distance of isotherms in phase angle at
 * equal |E*|, which needs no fit [VP98]. Range: the thresholds are the caller's. */
#include "fit/superpose/verdict.h"

#include <math.h>
#include <stdio.h>

static const double degree = 0.017453292519943295;

/* r^T V^-1 r of a point's residual (Pa) against a covariance. */
static double mahalanobis(const double r[2], double v00, double v01, double v11)
{
    double det = v00 * v11 - v01 * v01;
    return (r[0] * r[0] * v11 - 2 * r[0] * r[1] * v01 + r[1] * r[1] * v00) / det;
}

/* Residuals, chi-square with floor, and the relative misfit beyond the noise. */
static void fill_residuals(const an_joint *joint, double floor, an_superposition *result)
{
    size_t n = joint->n_point;
    double with_floor = 0, beyond = 0;
    for (size_t p = 0; p < n; p++) {
        const an_superpose_point *point = &joint->input->point[p];
        double white[2] = {joint->y[p] - joint->model[p], joint->y[n + p] - joint->model[n + p]};
        double r[2] = {white[0] / joint->w0[p], 0};
        r[1] = (white[1] - joint->w1[p] * r[0]) / joint->w2[p];
        result->residual[2 * p] = r[0] / sqrt(point->noise[0]);
        result->residual[2 * p + 1] = r[1] / sqrt(point->noise[2]);
        double square = point->storage_Pa * point->storage_Pa + point->loss_Pa * point->loss_Pa;
        double extra = floor * floor * square;
        with_floor += mahalanobis(r, point->noise[0] + extra, point->noise[1], point->noise[2] + extra);
        beyond += (r[0] * r[0] + r[1] * r[1] - point->noise[0] - point->noise[2]) / square;
    }
    result->reduced_with_floor = with_floor / result->degrees_of_freedom;
    result->misfit = sqrt(fmax(beyond / (2 * (double)n), 0));
}

static void describe(const an_superpose_options *o, an_superposition *r)
{
    static const char *const lead[] = {"one shift per temperature brings all isotherms together",
                                       "one shift per temperature brings the isotherms together only roughly",
                                       "no single shift per temperature brings the isotherms together"};
    snprintf(r->reason, sizeof r->reason,
             "%s: reduced chi-square %.3g (%.3g with a model floor of %.2g %%; limits %g, %g), isotherms "
             "%.2f degrees apart in phase angle at equal |E*| (limits %g, %g)",
             lead[r->simplicity], r->reduced_chi_square, r->reduced_with_floor, 100 * o->model_floor,
             o->doubtful_chi_square, o->complex_chi_square, r->separation_rad / degree,
             o->doubtful_rad / degree, o->complex_rad / degree);
}

void an_verdict_fill(const an_joint *joint, const an_superpose_options *options, an_superposition *result)
{
    fill_residuals(joint, options->model_floor, result);
    double rms;
    an_separation(joint->input, result->log10_bT, &rms, &result->separation_noise_rad, &result->n_separation);
    result->separation_rad =
        sqrt(fmax(rms * rms - result->separation_noise_rad * result->separation_noise_rad, 0));
    result->simplicity = AN_SIMPLE;
    if (!(result->reduced_with_floor <= options->doubtful_chi_square) ||
        !(result->separation_rad <= options->doubtful_rad))
        result->simplicity = AN_DOUBTFUL;
    if (!(result->reduced_with_floor <= options->complex_chi_square) ||
        !(result->separation_rad <= options->complex_rad))
        result->simplicity = AN_COMPLEX;
    describe(options, result);
}
