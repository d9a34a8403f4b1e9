/* The joint fit's workspace and rows: whitening, the grid of modes, rows, model and slope. Stage: superpose.
 * Method: every row is linear in the spectrum once the shifts are given (anelast/response.h); written out
 * here because it is the hot loop of the whole line. Range: as anelast/superpose.h. */
#include "fit/superpose/joint.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const double ln10 = 2.302585092994046;

size_t an_joint_slot_a(const an_joint *joint, size_t i_isotherm)
{
    if (i_isotherm == joint->i_reference)
        return joint->n_outer;
    return i_isotherm < joint->i_reference ? i_isotherm : i_isotherm - 1;
}

size_t an_joint_slot_b(const an_joint *joint, size_t i_isotherm)
{
    if (joint->vertical != AN_VERTICAL_FREE || i_isotherm == joint->i_reference)
        return joint->n_outer;
    return joint->n_isotherm - 1 + an_joint_slot_a(joint, i_isotherm);
}

void an_joint_init(an_joint *joint)
{
    *joint = (an_joint){0};
    an_smooth_init(&joint->smooth);
}

void an_joint_clear(an_joint *joint)
{
    an_smooth_clear(&joint->smooth);
    free(joint->pool);
    free(joint->isotherm_of);
    an_joint_init(joint);
}

/* Take n doubles from the pool; in the first pass (no pool yet) only count them. */
static double *take(an_joint *joint, size_t *used, size_t n)
{
    double *at = joint->pool ? joint->pool + *used : NULL;
    *used += n;
    return at;
}

static size_t lay_out(an_joint *joint)
{
    size_t used = 0, n = joint->n_point, m = joint->most_modes + 1, k = joint->n_isotherm;
    joint->time_s = take(joint, &used, m);
    joint->w0 = take(joint, &used, n);
    joint->w1 = take(joint, &used, n);
    joint->w2 = take(joint, &used, n);
    joint->y = take(joint, &used, 2 * n);
    joint->omega = take(joint, &used, n);
    joint->b = take(joint, &used, n);
    joint->rows.value = take(joint, &used, 2 * n * (m + 1));
    joint->spent.value = take(joint, &used, 2 * n * (m + 1));
    joint->model = take(joint, &used, 2 * n);
    joint->slope = take(joint, &used, 2 * n);
    joint->gradient = take(joint, &used, 2 * k);
    joint->step = take(joint, &used, 2 * k);
    joint->half = take(joint, &used, 2 * k * m);
    joint->normal = take(joint, &used, 4 * k * k);
    joint->damped = take(joint, &used, 4 * k * k);
    joint->scratch = take(joint, &used, m);
    joint->now.log10_a = take(joint, &used, k);
    joint->now.log10_b = take(joint, &used, k);
    joint->now.x_Pa = take(joint, &used, m);
    joint->trial.log10_a = take(joint, &used, k);
    joint->trial.log10_b = take(joint, &used, k);
    joint->trial.x_Pa = take(joint, &used, m);
    return used;
}

/* Least and greatest log10 of the reduced frequency. */
static void reduced_range(const an_joint *joint, const double *log10_a, double range[2])
{
    range[0] = INFINITY;
    range[1] = -INFINITY;
    for (size_t p = 0; p < joint->n_point; p++) {
        double x = log10(joint->input->point[p].omega_rad_s) + log10_a[joint->isotherm_of[p]];
        range[0] = fmin(range[0], x);
        range[1] = fmax(range[1], x);
    }
}

static void whiten(an_joint *joint)
{
    for (size_t p = 0; p < joint->n_point; p++) {
        const an_superpose_point *point = &joint->input->point[p];
        double l11 = sqrt(point->noise[0]), l21 = point->noise[1] / l11;
        double l22 = sqrt(point->noise[2] - l21 * l21);
        joint->w0[p] = 1 / l11;
        joint->w1[p] = -l21 / (l11 * l22);
        joint->w2[p] = 1 / l22;
        joint->y[p] = joint->w0[p] * point->storage_Pa;
        joint->y[joint->n_point + p] = joint->w1[p] * point->storage_Pa + joint->w2[p] * point->loss_Pa;
    }
}

static an_status make_pool(an_joint *joint, const double *log10_a, an_error *err)
{
    double range[2];
    reduced_range(joint, log10_a, range);
    /* Room for the shifts to spread by half again, and two decades. */
    double span = 1.5 * (range[1] - range[0]) + 2 + 2 * joint->extend_decades;
    joint->most_modes = (size_t)ceil(span * joint->per_decade) + 2;
    joint->pool = calloc(lay_out(joint), sizeof *joint->pool);
    if (!joint->pool)
        return an_fail_memory(err, "the joint fit");
    lay_out(joint);
    return an_smooth_alloc(&joint->smooth, joint->most_modes, err);
}

an_status an_joint_alloc(an_joint *joint, const an_superpose_input *input, const an_joint_plan *plan,
                         an_error *err)
{
    size_t k = input->n_isotherm;
    joint->input = input;
    joint->vertical = plan->vertical;
    joint->i_reference = plan->i_reference;
    joint->equilibrium = plan->options->equilibrium;
    joint->n_point = input->n_point;
    joint->n_row = 2 * input->n_point;
    joint->n_isotherm = k;
    joint->n_outer = (k - 1) * (plan->vertical == AN_VERTICAL_FREE ? 2 : 1);
    joint->per_decade = plan->per_decade;
    joint->extend_decades = plan->options->extend_decades;
    joint->isotherm_of = calloc(input->n_point, sizeof *joint->isotherm_of);
    if (!joint->isotherm_of)
        return an_fail_memory(err, "the joint fit");
    for (size_t i = 0; i < k; i++)
        for (size_t p = 0; p < input->isotherm[i].n_point; p++)
            joint->isotherm_of[input->isotherm[i].first_point + p] = i;
    AN_TRY(make_pool(joint, plan->log10_a, err));
    whiten(joint);
    double reference_K = input->isotherm[plan->i_reference].temperature_K;
    for (size_t i = 0; i < k; i++) {
        joint->now.log10_a[i] = plan->log10_a[i] - plan->log10_a[plan->i_reference];
        joint->now.log10_b[i] =
            plan->vertical == AN_VERTICAL_FREE   ? plan->log10_b[i] - plan->log10_b[plan->i_reference]
            : plan->vertical == AN_VERTICAL_NONE ? 0
                                                 : log10(input->isotherm[i].temperature_K / reference_K);
    }
    return AN_OK;
}

int an_joint_grid(an_joint *joint)
{
    double range[2];
    reduced_range(joint, joint->now.log10_a, range);
    double low = -range[1] - joint->extend_decades, high = -range[0] + joint->extend_decades;
    size_t n_mode = (size_t)ceil((high - low) * joint->per_decade) + 1;
    if (n_mode > joint->most_modes)
        n_mode = joint->most_modes;
    double first = (low + high) / 2 - 0.5 * (double)(n_mode - 1) / joint->per_decade;
    if (n_mode == joint->n_mode && fabs(first - log10(joint->time_s[0])) < 0.25)
        return 0;
    joint->n_mode = n_mode;
    for (size_t i = 0; i < n_mode; i++)
        joint->time_s[i] = pow(10, first + (double)i / joint->per_decade);
    return 1;
}

/* The column of one mode over all points. */
static void mode_column(const an_joint *joint, double tau, double *column)
{
    size_t n = joint->n_point;
    for (size_t p = 0; p < n; p++) {
        double q = joint->omega[p] * tau;
        double loss = joint->b[p] * q / (1 + q * q), storage = q * loss;
        column[p] = joint->w0[p] * storage;
        column[n + p] = joint->w1[p] * storage + joint->w2[p] * loss;
    }
}

void an_joint_load(an_joint *joint, const an_joint_state *state)
{
    size_t n = joint->n_point, n_column = joint->n_mode + (joint->equilibrium ? 1 : 0);
    for (size_t p = 0; p < n; p++) {
        size_t k = joint->isotherm_of[p];
        joint->omega[p] = joint->input->point[p].omega_rad_s * pow(10, state->log10_a[k]);
        joint->b[p] = pow(10, state->log10_b[k]);
    }
    joint->rows.n_row = joint->rows.stride = joint->n_row;
    joint->rows.n_column = n_column + 1;
    for (size_t i = 0; i < joint->n_mode; i++)
        mode_column(joint, joint->time_s[i], an_column(&joint->rows, i));
    if (joint->equilibrium) {
        double *column = an_column(&joint->rows, joint->n_mode);
        for (size_t p = 0; p < n; p++) {
            column[p] = joint->w0[p] * joint->b[p];
            column[n + p] = joint->w1[p] * joint->b[p];
        }
    }
    memcpy(an_column(&joint->rows, n_column), joint->y, joint->n_row * sizeof *joint->y);
    double *value = joint->spent.value;
    joint->spent = joint->rows;
    joint->spent.value = value;
    memcpy(value, joint->rows.value, joint->n_row * (n_column + 1) * sizeof *value);
    an_smooth_load(&joint->smooth, &joint->spent, joint->n_mode, joint->equilibrium);
}

void an_joint_model(an_joint *joint)
{
    size_t n = joint->n_point;
    const double *x = joint->now.x_Pa;
    for (size_t p = 0; p < n; p++) {
        double storage = joint->equilibrium ? x[joint->n_mode] : 0, loss = 0, d_storage = 0, d_loss = 0;
        for (size_t i = 0; i < joint->n_mode; i++) {
            if (x[i] == 0)
                continue;
            double q = joint->omega[p] * joint->time_s[i], d = 1 / (1 + q * q), l = x[i] * q * d;
            loss += l;
            storage += q * l;
            d_storage += 2 * q * d * l;
            d_loss += (1 - q * q) * d * l;
        }
        double b = joint->b[p], scale = ln10 * b;
        joint->model[p] = joint->w0[p] * b * storage;
        joint->model[n + p] = b * (joint->w1[p] * storage + joint->w2[p] * loss);
        joint->slope[p] = joint->w0[p] * scale * d_storage;
        joint->slope[n + p] = scale * (joint->w1[p] * d_storage + joint->w2[p] * d_loss);
    }
}
