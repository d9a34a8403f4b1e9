/* Covariance of the shifts with the spectrum integrated out. Stage: superpose. Method: at the optimum the
 * positive columns (data and penalty rows) are reduced by reflections that carry the derivative by the shifts
 * along; what is left below the triangle is that derivative with the spectrum's share taken out. The penalty
 * stands for what is held of a smooth spectrum beforehand, with the strength that the data themselves make
 * most probable, so that its bias is inside the covariance [MK92]. Common sources pass through the same
 * linear map; the temperature's bias adds the slope of log10 a_T. */
#include "fit/superpose/joint.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const double ln10 = 2.302585092994046;
/* Decades; a source that scales all moduli alike moves no shift, and what rounding makes of that stays below. */
static const double LEAST_CHANGE = 1e-8;

typedef struct work {
    size_t n_outer, n_source, n_positive, n_penalty;
    an_columns
        columns; /* [n_row + n_penalty] rows: positive columns, n_outer derivatives, n_source changes */
    double *normal, *inverse, *scratch, *shift; /* scratch: n_outer^2 + 2 n_outer; shift: [n_outer] */
    double *pool;
} work;

static an_status work_alloc(work *w, const an_joint *joint, an_error *err)
{
    size_t n = joint->n_outer;
    w->n_outer = n;
    w->n_source = joint->input->n_source;
    w->n_positive = joint->smooth.nnls.n_passive;
    w->n_penalty = joint->n_mode > 2 ? joint->n_mode - 2 : 0;
    w->columns.n_row = w->columns.stride = joint->n_row + w->n_penalty;
    w->columns.n_column = w->n_positive + n + w->n_source;
    size_t cells = w->columns.stride * w->columns.n_column;
    w->pool = calloc(cells + 3 * n * n + 3 * n, sizeof *w->pool);
    if (!w->pool)
        return an_fail_memory(err, "the covariance of the shifts");
    w->columns.value = w->pool;
    w->normal = w->pool + cells;
    w->inverse = w->normal + n * n;
    w->scratch = w->inverse + n * n;
    w->shift = w->scratch + n * n + 2 * n;
    return AN_OK;
}

static void fill_positive(work *w, const an_joint *joint)
{
    for (size_t c = 0; c < w->n_positive; c++) {
        size_t j = joint->smooth.nnls.order[c];
        double *to = an_column(&w->columns, c);
        memcpy(to, an_column(&joint->rows, j), joint->n_row * sizeof *to);
        for (size_t i = 0; i < w->n_penalty && j < joint->n_mode; i++) {
            double entry[3];
            an_smooth_penalty_row(&joint->smooth, i, entry);
            if (j >= i && j <= i + 2)
                to[joint->n_row + i] = joint->strength * entry[j - i];
        }
    }
}

/* Copy the rows of one isotherm of a derivative into the column of its unknown. */
static void fill_derivative(work *w, const an_joint *joint, size_t i_isotherm, size_t slot,
                            const double *derivative)
{
    if (slot == w->n_outer)
        return;
    const an_superpose_isotherm *isotherm = &joint->input->isotherm[i_isotherm];
    double *to = an_column(&w->columns, w->n_positive + slot);
    for (size_t p = isotherm->first_point; p < isotherm->first_point + isotherm->n_point; p++) {
        to[p] = derivative[p];
        to[joint->n_point + p] = derivative[joint->n_point + p];
    }
}

static void fill_source(work *w, const an_joint *joint, size_t i_source)
{
    double *to = an_column(&w->columns, w->n_positive + w->n_outer + i_source);
    for (size_t p = 0; p < joint->n_point; p++) {
        const double *change = joint->input->common + 2 * (p * w->n_source + i_source);
        to[p] = joint->w0[p] * change[0];
        to[joint->n_point + p] = joint->w1[p] * change[0] + joint->w2[p] * change[1];
    }
}

/* Inverse of the shifts' information matrix. */
static an_status invert_information(work *w, an_error *err)
{
    size_t n = w->n_outer, below = w->columns.n_row - w->n_positive;
    double largest = 0;
    an_householder_reduce(&w->columns, w->n_positive);
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j <= i; j++) {
            const double *x = an_column(&w->columns, w->n_positive + i) + w->n_positive;
            const double *y = an_column(&w->columns, w->n_positive + j) + w->n_positive;
            w->normal[i * n + j] = w->normal[j * n + i] = an_dot(x, y, below);
            largest = fmax(largest, w->normal[i * n + j]);
        }
    for (size_t i = 0; i < n;
         i++) /* a shift that nothing determines: u = 100 decades, not a division by zero */
        w->normal[i * n + i] += fmax(1e-4, 1e-14 * largest);
    if (an_spd_invert(w->normal, n, w->inverse, w->scratch) < 0)
        return an_fail(err, AN_E_NUMERIC, NULL, "the covariance of the shifts is singular");
    return AN_OK;
}

/* Where an isotherm's log10 a (is_b: log10 b) stands among the outer unknowns. */
static size_t slot_of(const an_joint *joint, size_t i, size_t *place)
{
    size_t k = i % joint->n_isotherm;
    *place = i;
    return i < joint->n_isotherm ? an_joint_slot_a(joint, k) : an_joint_slot_b(joint, k);
}

static void hand_out_noise(const work *w, const an_joint *joint, an_superposition *result)
{
    size_t n = 2 * joint->n_isotherm, row, column;
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++) {
            size_t si = slot_of(joint, i, &row), sj = slot_of(joint, j, &column);
            if (si < w->n_outer && sj < w->n_outer)
                result->noise_covariance[row * n + column] =
                    result->inflation * w->inverse[si * w->n_outer + sj];
        }
}

/* Add the outer product of one change of all shifts. change: [2 n_isotherm]. */
static void add_common(const double *change, size_t n, double *covariance)
{
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            covariance[i * n + j] += change[i] * change[j];
}

static void hand_out_sources(work *w, const an_joint *joint, an_superposition *result, double *change)
{
    size_t n = 2 * joint->n_isotherm, below = w->columns.n_row - w->n_positive;
    for (size_t s = 0; s < w->n_source; s++) {
        const double *moved = an_column(&w->columns, w->n_positive + w->n_outer + s) + w->n_positive;
        for (size_t i = 0; i < w->n_outer; i++)
            w->scratch[i] = an_dot(an_column(&w->columns, w->n_positive + i) + w->n_positive, moved, below);
        for (size_t i = 0; i < w->n_outer; i++)
            w->shift[i] = an_dot(w->inverse + i * w->n_outer, w->scratch, w->n_outer);
        for (size_t i = 0; i < n; i++) {
            size_t place, slot = slot_of(joint, i, &place);
            change[place] = slot < w->n_outer && fabs(w->shift[slot]) > LEAST_CHANGE ? w->shift[slot] : 0;
        }
        add_common(change, n, result->common_covariance);
    }
}

/* d log10 a / dT at isotherm i, by differences between neighbours. */
static double shift_slope(const an_joint *joint, size_t i)
{
    size_t low = i > 0 ? i - 1 : 0, high = i + 1 < joint->n_isotherm ? i + 1 : i;
    const an_superpose_isotherm *isotherm = joint->input->isotherm;
    return (joint->now.log10_a[high] - joint->now.log10_a[low]) /
           (isotherm[high].temperature_K - isotherm[low].temperature_K);
}

/* The temperature's common bias: |d log a/dT| u(T) at every isotherm but the reference, fully correlated. */
static void hand_out_bias(const an_joint *joint, an_superposition *result, double *change)
{
    size_t n = 2 * joint->n_isotherm;
    memset(change, 0, n * sizeof *change);
    for (size_t i = 0; i < joint->n_isotherm; i++)
        if (i != joint->i_reference)
            change[i] = shift_slope(joint, i) * joint->input->u_temperature_K;
    if (joint->vertical == AN_VERTICAL_DENSITY_TEMPERATURE)
        for (size_t i = 0; i < joint->n_isotherm; i++) {
            double reference_K = joint->input->isotherm[joint->i_reference].temperature_K;
            double inverse_difference = 1 / joint->input->isotherm[i].temperature_K - 1 / reference_K;
            change[joint->n_isotherm + i] = inverse_difference * joint->input->u_temperature_K / ln10;
        }
    add_common(change, n, result->common_covariance);
}

an_status an_joint_covariance(an_joint *joint, const an_superpose_options *options, an_superposition *result,
                              an_error *err)
{
    work w = {0};
    size_t n = 2 * joint->n_isotherm;
    double *change = calloc(n, sizeof *change);
    an_status status =
        change ? work_alloc(&w, joint, err) : an_fail_memory(err, "the covariance of the shifts");
    if (status < 0)
        goto cleanup;
    fill_positive(&w, joint);
    for (size_t k = 0; k < joint->n_isotherm; k++) {
        fill_derivative(&w, joint, k, an_joint_slot_a(joint, k), joint->slope);
        fill_derivative(&w, joint, k, an_joint_slot_b(joint, k), joint->model);
    }
    for (size_t p = 0; p < joint->n_row; p++) /* the model is its own derivative by ln b */
        for (size_t k = 0; k < w.n_outer && joint->vertical == AN_VERTICAL_FREE; k++)
            if (k >= joint->n_isotherm - 1)
                an_column(&w.columns, w.n_positive + k)[p] *= ln10;
    for (size_t s = 0; s < w.n_source; s++)
        fill_source(&w, joint, s);
    AN_CLEAN(invert_information(&w, err));
    hand_out_noise(&w, joint, result);
    hand_out_sources(&w, joint, result, change);
    hand_out_bias(joint, result, change);
    for (size_t i = 0; i < joint->n_isotherm; i++)
        result->determined[i] = sqrt(result->noise_covariance[i * n + i]) <= options->determined_u;
cleanup:
    free(w.pool);
    free(change);
    return status;
}
