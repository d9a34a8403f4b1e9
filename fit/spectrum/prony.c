/* The few modes handed over. Stage: spectrum. Method: for each number of modes, times by variable projection
 * [GP73, KA75] and strengths by non-negative least squares, against the dense spectrum's E* over the data's
 * frequencies and its E(t) over the trusted window, all as relative errors; the number grows until the worst
 * error is inside half the stated one. Range: data that span a decade or more. */
#include "anelast/spectrum.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { samples_per_decade = 6, most_iterations = 40, most_trials = 6 };
/* Modes may leave the span of 1/omega by this much, decades. */
static const double beyond = 0.7;

void an_prony_init(an_prony *prony)
{
    *prony = (an_prony){0};
    an_maxwell_init(&prony->model);
}

void an_prony_clear(an_prony *prony)
{
    an_maxwell_clear(&prony->model);
    free(prony->u_modulus_Pa);
    an_prony_init(prony);
}

/* The curve to follow and the workspace for any number of modes up to `most`. */
typedef struct chase {
    size_t n_target, most, n_mode;
    int equilibrium;
    double log_low, log_high; /* allowed ln times */
    an_observation *target;   /* [n_target] value and u = |E*| or E(t): errors are relative */
    double *log_time, *trial; /* [most] ln s */
    double *x;                /* [most + 1] Pa */
    an_columns rows, slope;   /* [n_target x (most + 1)] */
    double *y, *residual;     /* [n_target] */
    double *half;             /* [most][most + 1] */
    double *normal, *damped, *gradient, *step, *times, *row, *row_slope;
    double cost, worst; /* sum of squares and greatest |error|, relative */
    an_nnls nnls;
    double *pool;
} chase;

static double *take(chase *c, size_t *used, size_t n)
{
    double *at = c->pool ? c->pool + *used : NULL;
    *used += n;
    return at;
}

static size_t lay_out(chase *c)
{
    size_t used = 0, m = c->most, n = c->n_target;
    c->log_time = take(c, &used, m);
    c->trial = take(c, &used, m);
    c->x = take(c, &used, m + 1);
    c->rows.value = take(c, &used, n * (m + 1));
    c->slope.value = take(c, &used, n * (m + 1));
    c->y = take(c, &used, n);
    c->residual = take(c, &used, n);
    c->half = take(c, &used, m * (m + 1));
    c->normal = take(c, &used, m * m);
    c->damped = take(c, &used, m * m);
    c->gradient = take(c, &used, m);
    c->step = take(c, &used, m);
    c->times = take(c, &used, m);
    c->row = take(c, &used, m + 1);
    c->row_slope = take(c, &used, m + 1);
    return used;
}

static void chase_clear(chase *c)
{
    an_nnls_clear(&c->nnls);
    free(c->target);
    free(c->pool);
}

static an_observation target_at(const an_maxwell *dense, an_response_kind kind, double at)
{
    an_observation o = {.kind = kind, .at = at};
    o.value = kind == AN_RESPONSE_STORAGE ? an_maxwell_storage(dense, at)
              : kind == AN_RESPONSE_LOSS  ? an_maxwell_loss(dense, at)
                                          : an_maxwell_relaxation(dense, at);
    o.u = kind == AN_RESPONSE_RELAXATION ? o.value : an_maxwell_magnitude(dense, at);
    return o;
}

/* Samples of the dense spectrum's response. */
static an_status sample(chase *c, const an_maxwell *dense, const double omega_range[2], an_error *err)
{
    double window[2], decades = log10(omega_range[1] / omega_range[0]);
    an_spectrum_window(omega_range, window);
    double time_decades = log10(window[1] / window[0]);
    size_t n_omega = (size_t)ceil(decades * samples_per_decade) + 1;
    size_t n_time = time_decades > 0 ? (size_t)ceil(time_decades * samples_per_decade) + 1 : 0;
    c->target = calloc(2 * n_omega + n_time, sizeof *c->target);
    if (!c->target)
        return an_fail_memory(err, "samples of the spectrum");
    for (size_t i = 0; i < n_omega; i++) {
        double omega = omega_range[0] * pow(10, decades * (double)i / (double)(n_omega - 1));
        c->target[c->n_target++] = target_at(dense, AN_RESPONSE_STORAGE, omega);
        c->target[c->n_target++] = target_at(dense, AN_RESPONSE_LOSS, omega);
    }
    for (size_t i = 0; i < n_time; i++)
        c->target[c->n_target++] =
            target_at(dense, AN_RESPONSE_RELAXATION,
                      window[0] * pow(10, time_decades * (double)i / (double)(n_time - 1)));
    c->log_low = -log(omega_range[1]) - beyond * log(10);
    c->log_high = -log(omega_range[0]) + beyond * log(10);
    return AN_OK;
}

static an_status chase_alloc(chase *c, const an_maxwell *dense, const double omega_range[2], size_t most,
                             an_error *err)
{
    AN_TRY(sample(c, dense, omega_range, err));
    c->most = most;
    c->equilibrium = dense->equilibrium_Pa > 0;
    c->pool = calloc(lay_out(c), sizeof *c->pool);
    if (!c->pool)
        return an_fail_memory(err, "the few modes");
    lay_out(c);
    for (size_t i = 0; i < c->n_target; i++)
        c->y[i] = c->target[i].value / c->target[i].u;
    return an_nnls_alloc(&c->nnls, c->n_target, most + 1, err);
}

/* Rows at given ln times, strengths, residual and cost. x [in,out]: warm start. */
static an_status evaluate(chase *c, const double *log_time)
{
    size_t n = c->n_mode;
    c->rows.n_row = c->rows.stride = c->slope.n_row = c->slope.stride = c->n_target;
    c->rows.n_column = c->slope.n_column = n + (c->equilibrium ? 1 : 0);
    for (size_t j = 0; j < n; j++)
        c->times[j] = exp(log_time[j]);
    for (size_t i = 0; i < c->n_target; i++) {
        an_response_row(&c->target[i], c->times, n, c->row, c->row_slope);
        for (size_t j = 0; j < c->rows.n_column; j++) {
            an_column(&c->rows, j)[i] = c->row[j] / c->target[i].u;
            an_column(&c->slope, j)[i] = c->row_slope[j] / c->target[i].u;
        }
    }
    AN_TRY(an_nnls_solve(&c->nnls, &c->rows, c->y, c->x, NULL));
    memcpy(c->residual, c->y, c->n_target * sizeof *c->y);
    for (size_t j = 0; j < c->rows.n_column; j++)
        an_axpy(-c->x[j], an_column(&c->rows, j), c->residual, c->n_target);
    c->cost = an_dot(c->residual, c->residual, c->n_target);
    c->worst = 0;
    for (size_t i = 0; i < c->n_target; i++)
        c->worst = fmax(c->worst, fabs(c->residual[i]));
    return AN_OK;
}

/* Normal matrix and gradient by ln times at the last evaluation. */
static void linearise(chase *c)
{
    size_t n = c->n_mode, stride = c->most + 1;
    for (size_t k = 0; k < n; k++) {
        double *half = c->half + k * stride;
        const double *slope = an_column(&c->slope, k);
        for (size_t j = 0; j < c->rows.n_column; j++)
            half[j] = c->x[k] * an_dot(an_column(&c->rows, j), slope, c->n_target);
        an_nnls_half(&c->nnls, half, c->row);
        c->gradient[k] = c->x[k] * an_dot(slope, c->residual, c->n_target);
    }
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j <= i; j++) {
            double full =
                c->x[i] * c->x[j] * an_dot(an_column(&c->slope, i), an_column(&c->slope, j), c->n_target);
            c->normal[i * n + j] = c->normal[j * n + i] =
                full - an_dot(c->half + i * stride, c->half + j * stride, c->nnls.n_passive);
        }
}

/* Trial times after a damped step: kept inside the span, in order, no step beyond half a decade. */
static an_status step_times(chase *c, double damping)
{
    size_t n = c->n_mode;
    double largest = 0;
    for (size_t i = 0; i < n; i++)
        largest = fmax(largest, c->normal[i * n + i]);
    memcpy(c->damped, c->normal, n * n * sizeof *c->damped);
    for (size_t i = 0; i < n; i++)
        c->damped[i * n + i] += damping * fmax(c->normal[i * n + i], 0) + 1e-10 * largest + 1e-300;
    AN_TRY(an_spd_factor(c->damped, n));
    memcpy(c->step, c->gradient, n * sizeof *c->step);
    an_spd_solve(c->damped, c->step, n);
    for (size_t i = 0; i < n; i++) {
        double step = fmin(fmax(c->step[i], -1.15), 1.15);
        c->trial[i] = fmin(fmax(c->log_time[i] + step, c->log_low), c->log_high);
        if (i > 0 && c->trial[i] <= c->trial[i - 1])
            c->trial[i] = c->trial[i - 1] + 1e-3;
    }
    return AN_OK;
}

/* Times of n_mode modes to the least sum of squares. */
static an_status descend(chase *c)
{
    double damping = 1e-2;
    AN_TRY(evaluate(c, c->log_time));
    for (int i = 0; i < most_iterations; i++) {
        double before = c->cost;
        int lower = 0;
        linearise(c);
        for (int t = 0; t < most_trials && !lower; t++) {
            if (step_times(c, damping) == AN_OK) {
                AN_TRY(evaluate(c, c->trial));
                lower = c->cost < before;
            }
            damping = lower ? fmax(damping / 4, 1e-9) : damping * 8;
        }
        if (!lower)
            return evaluate(c, c->log_time);
        memcpy(c->log_time, c->trial, c->n_mode * sizeof *c->log_time);
        if (before - c->cost < 1e-4 * before)
            break;
    }
    return AN_OK;
}

static void spread_times(chase *c, size_t n_mode)
{
    c->n_mode = n_mode;
    double width = (c->log_high - c->log_low) / (double)n_mode;
    for (size_t i = 0; i < n_mode; i++)
        c->log_time[i] = c->log_low + width * ((double)i + 0.5);
    memset(c->x, 0, (c->most + 1) * sizeof *c->x);
}

/* Modes above zero into the result. */
static an_status hand_out(const chase *c, an_prony *prony, an_error *err)
{
    size_t n = 0;
    for (size_t i = 0; i < c->n_mode; i++)
        n += c->x[i] > 0;
    AN_TRY(an_maxwell_alloc(&prony->model, n, err));
    n = 0;
    for (size_t i = 0; i < c->n_mode; i++) {
        if (!(c->x[i] > 0))
            continue;
        prony->model.time_s[n] = exp(c->log_time[i]);
        prony->model.modulus_Pa[n++] = c->x[i];
    }
    prony->model.equilibrium_Pa = c->equilibrium ? c->x[c->n_mode] : 0;
    prony->rms_error = sqrt(c->cost / (double)c->n_target);
    prony->worst_error = c->worst;
    return AN_OK;
}

an_status an_prony_fit(const an_maxwell *dense, const double omega_range[2],
                       const an_spectrum_options *options, an_prony *prony, an_error *err)
{
    an_spectrum_options standard;
    an_spectrum_defaults(&standard);
    if (!options)
        options = &standard;
    double decades = log10(omega_range[1] / omega_range[0]);
    if (!(omega_range[0] > 0 && decades >= 1 && isfinite(decades)))
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "reduced frequencies %g to %g rad/s span less than the decade that modes need",
                       omega_range[0], omega_range[1]);
    chase c = {0};
    an_nnls_init(&c.nnls);
    an_status status = chase_alloc(&c, dense, omega_range, options->most_modes, err);
    for (size_t n = (size_t)fmax(1, floor(decades / 3)); status >= 0 && n <= options->most_modes; n++) {
        spread_times(&c, n);
        if (descend(&c) < 0)
            status = an_fail(err, AN_E_NUMERIC, NULL, "the times of %zu modes did not settle", n);
        prony->within = c.worst <= options->error / 2;
        if (prony->within)
            break;
    }
    if (status >= 0)
        status = hand_out(&c, prony, err);
    chase_clear(&c);
    if (status >= 0 && !prony->within)
        return AN_DUBIOUS;
    return status;
}

an_status an_prony_uncertainty(const an_observation *observation, size_t n_observation, an_prony *prony,
                               an_error *err)
{
    size_t n_mode = prony->model.n_mode, n = n_mode + (prony->model.equilibrium_Pa > 0 ? 1 : 0);
    an_observation_set set = {observation, n_observation, &prony->model, n > n_mode};
    an_columns rows = {.stride = n_observation};
    rows.value = calloc(n_observation * (n + 1), sizeof *rows.value);
    double *u = calloc(n_mode + 1, sizeof *u), *x = calloc(n, sizeof *x);
    an_status status = rows.value && u && x ? AN_OK : an_fail_memory(err, "the uncertainty of the modes");
    if (status == AN_OK)
        status = an_observation_rows(&set, &rows, err);
    if (status == AN_OK) {
        an_householder_reduce(&rows, n);
        for (size_t j = 0; j < n; j++) { /* var x_j = |R^-T e_j|^2 */
            int determined = n_observation >= n;
            memset(x, 0, n * sizeof *x);
            x[j] = 1;
            an_triangle_solve_transposed(&rows, x, n_observation < n ? n_observation : n);
            for (size_t i = 0; i < n && determined; i++)
                determined = an_column(&rows, i)[i] != 0;
            u[j] = determined ? sqrt(an_dot(x, x, n)) : INFINITY;
        }
        free(prony->u_modulus_Pa);
        prony->u_modulus_Pa = u;
        u = NULL;
    }
    free(rows.value);
    free(u);
    free(x);
    return status;
}
