/* The joint fit's iteration. Stage: superpose. Method: variable projection [GP73] with the derivative of
 * [KA75], which for the sum of squares is Gauss-Newton on shifts and positive modes together: with J the
 * derivative by the shifts and B the positive columns (data and penalty rows), the normal matrix of the
 * shifts is J^T J - |R^-T B^T J|^2, R the triangle of B. Damped after Levenberg and Marquardt. The strength
 * of the regularisation and the level of the modes are renewed between rounds. */
#include "fit/superpose/joint.h"

#include <math.h>
#include <string.h>

static const double ln10 = 2.302585092994046;

enum { rounds_from_flat = 4, rounds_from_coarse = 2, most_iterations = 60, most_trials = 8 };

static void swap_states(an_joint *joint)
{
    an_joint_state kept = joint->now;
    joint->now = joint->trial;
    joint->trial = kept;
}

/* The spectrum at the shifts of a state, at the present strength, warm from its x. */
static an_status evaluate(an_joint *joint, an_joint_state *state)
{
    size_t bytes = (joint->n_mode + 1) * sizeof *state->x_Pa;
    an_joint_load(joint, state);
    memcpy(joint->smooth.x_Pa, state->x_Pa, bytes);
    AN_TRY(an_smooth_solve(&joint->smooth, joint->strength));
    memcpy(state->x_Pa, joint->smooth.x_Pa, bytes);
    state->cost = joint->smooth.chi_square + joint->smooth.penalty;
    return AN_OK;
}

/* Sum over an isotherm's rows of x y. */
static double block_dot(const an_joint *joint, size_t i_isotherm, const double *x, const double *y)
{
    const an_superpose_isotherm *isotherm = &joint->input->isotherm[i_isotherm];
    size_t first = isotherm->first_point, n = isotherm->n_point, loss = joint->n_point + first;
    return an_dot(x + first, y + first, n) + an_dot(x + loss, y + loss, n);
}

/* One outer unknown: derivative rows `derivative` on its isotherm; its row of `half`. */
static void project_unknown(an_joint *joint, size_t slot, size_t i_isotherm, const double *derivative)
{
    double *half = joint->half + slot * (joint->most_modes + 1);
    for (size_t j = 0; j < joint->smooth.n_column; j++)
        half[j] = block_dot(joint, i_isotherm, an_column(&joint->rows, j), derivative);
    an_nnls_half(&joint->smooth.nnls, half, joint->scratch);
}

/* Normal matrix and gradient of the shifts at `now`. In: model and slope; out: also `model` in units of ln 10
 * for b. */
static void linearise(an_joint *joint)
{
    size_t n = joint->n_outer, stride = joint->most_modes + 1;
    an_joint_model(joint);
    double *residual = joint->spent.value; /* [n_row]; the reduced rows are not needed any more */
    for (size_t i = 0; i < joint->n_row; i++) {
        residual[i] = joint->y[i] - joint->model[i];
        joint->model[i] *= ln10; /* d model / d log10 b */
    }
    memset(joint->normal, 0, n * n * sizeof *joint->normal);
    for (size_t k = 0; k < joint->n_isotherm; k++) {
        size_t a = an_joint_slot_a(joint, k), b = an_joint_slot_b(joint, k);
        if (a == n)
            continue;
        project_unknown(joint, a, k, joint->slope);
        joint->gradient[a] = block_dot(joint, k, joint->slope, residual);
        joint->normal[a * n + a] = block_dot(joint, k, joint->slope, joint->slope);
        if (b == n)
            continue;
        project_unknown(joint, b, k, joint->model);
        joint->gradient[b] = block_dot(joint, k, joint->model, residual);
        joint->normal[b * n + b] = block_dot(joint, k, joint->model, joint->model);
        joint->normal[a * n + b] = joint->normal[b * n + a] = block_dot(joint, k, joint->slope, joint->model);
    }
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j <= i; j++) {
            double h =
                an_dot(joint->half + i * stride, joint->half + j * stride, joint->smooth.nnls.n_passive);
            joint->normal[i * n + j] -= h;
            joint->normal[j * n + i] = joint->normal[i * n + j];
        }
}

/* The damped step, no shift by more than a decade; AN_E_NUMERIC where the matrix is not definite. */
static an_status damped_step(an_joint *joint, double damping)
{
    size_t n = joint->n_outer;
    double largest = 0, greatest = 0;
    for (size_t i = 0; i < n; i++)
        largest = fmax(largest, joint->normal[i * n + i]);
    memcpy(joint->damped, joint->normal, n * n * sizeof *joint->damped);
    for (size_t i = 0; i < n; i++)
        joint->damped[i * n + i] += damping * fmax(joint->normal[i * n + i], 0) + 1e-14 * largest;
    AN_TRY(an_spd_factor(joint->damped, n));
    memcpy(joint->step, joint->gradient, n * sizeof *joint->step);
    an_spd_solve(joint->damped, joint->step, n);
    for (size_t i = 0; i < n; i++)
        greatest = fmax(greatest, fabs(joint->step[i]));
    for (size_t i = 0; greatest > 1 && i < n; i++)
        joint->step[i] /= greatest;
    return isfinite(greatest) ? AN_OK : AN_E_NUMERIC;
}

static void apply_step(an_joint *joint)
{
    for (size_t k = 0; k < joint->n_isotherm; k++) {
        size_t a = an_joint_slot_a(joint, k), b = an_joint_slot_b(joint, k);
        joint->trial.log10_a[k] = joint->now.log10_a[k] + (a < joint->n_outer ? joint->step[a] : 0);
        joint->trial.log10_b[k] = joint->now.log10_b[k] + (b < joint->n_outer ? joint->step[b] : 0);
    }
    memcpy(joint->trial.x_Pa, joint->now.x_Pa, (joint->n_mode + 1) * sizeof *joint->now.x_Pa);
}

/* One accepted step. *gain [out]: what it lowered the cost by; negative where no step lowers it. */
static an_status improve(an_joint *joint, double *damping, double *gain)
{
    linearise(joint);
    *gain = -1;
    for (int i = 0; i < most_trials; i++) {
        if (damped_step(joint, *damping) == AN_OK) {
            apply_step(joint);
            AN_TRY(evaluate(joint, &joint->trial));
            if (joint->trial.cost <= joint->now.cost) {
                *gain = joint->now.cost - joint->trial.cost;
                swap_states(joint);
                *damping = fmax(*damping / 5, 1e-10);
                return AN_OK;
            }
        }
        *damping = fmax(*damping * 8, 1e-6);
    }
    return AN_OK;
}

/* To the bottom at a fixed strength, until a step gains less than `enough`. The rows and the small problem
 * are those of `now` in the end. */
static an_status descend(an_joint *joint, double enough, an_error *err)
{
    double damping = 1e-3, gain = 0;
    if (evaluate(joint, &joint->now) < 0)
        return an_fail(err, AN_E_NUMERIC, NULL, "the spectrum of the joint fit did not settle");
    for (int i = 0; i < most_iterations; i++) {
        if (improve(joint, &damping, &gain) < 0)
            return an_fail(err, AN_E_NUMERIC, NULL, "the spectrum of the joint fit did not settle");
        if (gain < enough)
            break;
    }
    if (evaluate(joint, &joint->now) < 0)
        return an_fail(err, AN_E_NUMERIC, NULL, "the spectrum of the joint fit did not settle");
    return AN_OK;
}

/* Level on a grid of `joint` from another grid's: linear in log time, times the ratio of the spacings. */
static void carry_level(an_joint *joint, const double *level, size_t n, double first, double per_decade)
{
    for (size_t i = 0; i < joint->n_mode; i++) {
        double at = (log10(joint->time_s[i]) - first) * per_decade;
        at = fmin(fmax(at, 0), (double)(n - 1));
        size_t below = (size_t)at < n - 1 ? (size_t)at : n - 2;
        double part = at - (double)below;
        joint->smooth.level_Pa[i] =
            ((1 - part) * level[below] + part * level[below + 1]) * per_decade / joint->per_decade;
    }
    memset(joint->now.x_Pa, 0, (joint->n_mode + 1) * sizeof *joint->now.x_Pa);
    joint->smooth.n_mode = joint->n_mode;
}

/* A new grid under the same curve, where the shifts have moved so far that it is needed. */
static void regrid(an_joint *joint)
{
    size_t n = joint->n_mode;
    double first = log10(joint->time_s[0]);
    memcpy(joint->scratch, joint->smooth.level_Pa, n * sizeof *joint->scratch);
    if (an_joint_grid(joint))
        carry_level(joint, joint->scratch, n, first, joint->per_decade);
}

/* Level to begin with: that of a coarser fit, or the same for all modes. */
static void begin(an_joint *joint, const an_joint *coarse)
{
    double highest = 0;
    an_joint_grid(joint);
    an_joint_load(joint, &joint->now);
    for (size_t p = 0; p < joint->n_point; p++)
        highest = fmax(highest, joint->input->point[p].storage_Pa);
    if (coarse)
        carry_level(joint, coarse->smooth.level_Pa, coarse->n_mode, log10(coarse->time_s[0]),
                    coarse->per_decade);
    else
        an_smooth_flat(&joint->smooth, highest / (double)joint->n_mode);
    memset(joint->now.x_Pa, 0, (joint->n_mode + 1) * sizeof *joint->now.x_Pa);
    joint->strength = 0;
}

static an_status choose_strength(an_joint *joint, an_strength_rule rule, an_error *err)
{
    an_joint_load(joint, &joint->now);
    memcpy(joint->smooth.x_Pa, joint->now.x_Pa, (joint->n_mode + 1) * sizeof *joint->now.x_Pa);
    if (an_smooth_choose(&joint->smooth, rule, joint->n_outer, &joint->strength) < 0)
        return an_fail(err, AN_E_NUMERIC, NULL, "the strength of the regularisation could not be chosen");
    memcpy(joint->now.x_Pa, joint->smooth.x_Pa, (joint->n_mode + 1) * sizeof *joint->now.x_Pa);
    return AN_OK;
}

an_status an_joint_fit(an_joint *joint, an_strength_rule rule, const an_joint *coarse, an_error *err)
{
    int rounds = coarse ? rounds_from_coarse : rounds_from_flat;
    begin(joint, coarse);
    for (int round = 0; round < rounds; round++) {
        AN_TRY(choose_strength(joint, rule, err));
        int last = round + 1 == rounds;
        double enough =
            last ? 1e-4 + 1e-9 * joint->smooth.chi_square : 0.05 + 1e-3 * joint->smooth.chi_square;
        AN_TRY(descend(joint, enough, err));
        if (!last) {
            an_smooth_follow(&joint->smooth, joint->per_decade);
            regrid(joint);
        }
    }
    an_smooth_count(&joint->smooth);
    return AN_OK;
}
