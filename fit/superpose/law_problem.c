/* The whitened least-squares problem behind every law fit. Stage: superpose. Method: r^T C^-1 r through the
 * Cholesky factor of C, Householder reduction of the whitened Jacobian, Levenberg and Marquardt's damping by
 * column norms [MQ63]. Range: up to a few hundred isotherms; C positive definite. */
#include "fit/superpose/law_problem.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "anelast/dense.h"

enum { MOST_STEPS = 300 };

void an_law_problem_clear(law_problem *problem)
{
    free(problem->temperature_K);
    free(problem->shift);
    free(problem->factor);
    free(problem->work);
    *problem = (law_problem){0};
}

static an_status check_data(const an_law_data *data, an_error *err)
{
    size_t n = data->n_shift;
    for (size_t i = 0; i < n; i++) {
        bool good = data->temperature_K[i] > 0 && isfinite(data->temperature_K[i]) &&
                    isfinite(data->log10_aT[i]) && data->covariance[i * n + i] >= 0 &&
                    isfinite(data->covariance[i * n + i]);
        if (!good || (i > 0 && !(data->temperature_K[i] > data->temperature_K[i - 1])))
            return an_fail(
                err, AN_E_VALUE, "",
                "shift %zu: log10 a_T %g with variance %g at %g K; finite shifts at rising temperatures are "
                "allowed",
                i + 1, data->log10_aT[i], data->covariance[i * n + i], data->temperature_K[i]);
    }
    if (!(data->reference_temperature_K > 0 && isfinite(data->reference_temperature_K)))
        return an_fail(err, AN_E_VALUE, "", "reference temperature %g K; above 0 K is allowed",
                       data->reference_temperature_K);
    return AN_OK;
}

/* d log10 a_T/dT at the i-th isotherm from its neighbours. */
static double slope_at(const an_law_data *data, size_t i)
{
    size_t before = i > 0 ? i - 1 : i;
    size_t after = i + 1 < data->n_shift ? i + 1 : i;
    if (before == after)
        return 0;
    return (data->log10_aT[after] - data->log10_aT[before]) /
           (data->temperature_K[after] - data->temperature_K[before]);
}

/* The slope where log10 a_T is nearest to 0: that of the reference. */
static double slope_at_reference(const an_law_data *data)
{
    size_t nearest = 0;
    for (size_t i = 1; i < data->n_shift; i++)
        if (fabs(data->temperature_K[i] - data->reference_temperature_K) <
            fabs(data->temperature_K[nearest] - data->reference_temperature_K))
            nearest = i;
    return slope_at(data, nearest);
}

/* Copy rows with variance. The temperature of the reference isotherm has its noise too, and all shifts share
 * that. */
static void keep_rows(const an_law_data *data, law_problem *problem)
{
    size_t n_all = data->n_shift;
    double u2 = data->u_temperature_K * data->u_temperature_K;
    double shared = slope_at_reference(data) * slope_at_reference(data) * u2;
    size_t row = 0;
    for (size_t i = 0; i < n_all; i++) {
        if (!(data->covariance[i * n_all + i] > 0))
            continue;
        problem->temperature_K[row] = data->temperature_K[i];
        problem->shift[row] = data->log10_aT[i];
        size_t column = 0;
        for (size_t j = 0; j < n_all; j++) {
            if (!(data->covariance[j * n_all + j] > 0))
                continue;
            double own = i == j ? slope_at(data, i) * slope_at(data, i) * u2 : 0;
            problem->factor[row * problem->n + column++] = data->covariance[i * n_all + j] + shared + own;
        }
        row++;
    }
}

static void find_range(const an_law_data *data, law_problem *problem)
{
    problem->reference_K = data->reference_temperature_K;
    problem->least_K = problem->greatest_K = data->reference_temperature_K;
    for (size_t i = 0; i < data->n_shift; i++) {
        problem->least_K = fmin(problem->least_K, data->temperature_K[i]);
        problem->greatest_K = fmax(problem->greatest_K, data->temperature_K[i]);
    }
}

an_status an_law_problem_make(const an_law_data *data, law_problem *problem, an_error *err)
{
    *problem = (law_problem){0};
    AN_TRY(check_data(data, err));
    for (size_t i = 0; i < data->n_shift; i++)
        problem->n += data->covariance[i * data->n_shift + i] > 0;
    size_t n = problem->n;
    problem->temperature_K = calloc(n + 1, sizeof *problem->temperature_K);
    problem->shift = calloc(n + 1, sizeof *problem->shift);
    problem->factor = calloc(n * n + 1, sizeof *problem->factor);
    problem->work = calloc((n + AN_LAW_MAX) * (AN_LAW_MAX + 1), sizeof *problem->work);
    if (!problem->temperature_K || !problem->shift || !problem->factor || !problem->work)
        return an_fail_memory(err, "a law fit");
    keep_rows(data, problem);
    find_range(data, problem);
    if (n > 0 && an_spd_factor(problem->factor, n) < 0)
        return an_fail(err, AN_E_VALUE, "", "the covariance of the shift factors is not positive definite");
    return AN_OK;
}

/* Over the range of the data the law must hold, and a crossover must lie inside it. */
static bool is_allowed(const law_problem *problem, const an_law *law)
{
    if (an_law_check(law, NULL) < 0 || an_law_diverges(law, problem->least_K))
        return false;
    if (law->kind != AN_LAW_CROSSOVER)
        return true;
    return law->constant[2] > problem->least_K && law->constant[2] < problem->greatest_K;
}

/* Whitened residuals L^-1 (y - law).  r [out] [n] */
static bool whiten_residual(const law_problem *problem, const an_law *law, double *r)
{
    for (size_t i = 0; i < problem->n; i++) {
        double value;
        if (an_law_log10_aT(law, problem->temperature_K[i], AN_RANGE_MARK, &value, NULL) < 0)
            return false;
        r[i] = problem->shift[i] - value;
    }
    an_spd_lower_solve(problem->factor, r, problem->n);
    return true;
}

double an_law_problem_cost(const law_problem *problem, const an_law *law)
{
    double *r = problem->work; /* used by nobody else meanwhile */
    if (!is_allowed(problem, law) || !whiten_residual(problem, law, r))
        return INFINITY;
    return an_dot(r, r, problem->n);
}

/* Whitened gradients of some constants in the first n_which columns of a, residuals behind them; rows below
 * are zero. */
static bool whiten_columns(const law_problem *problem, const an_law *law, const size_t *which, size_t n_which,
                           an_columns *a)
{
    size_t n = problem->n;
    memset(a->value, 0, a->stride * a->n_column * sizeof *a->value);
    for (size_t i = 0; i < n; i++) {
        double gradient[AN_LAW_MAX];
        an_law_gradient(law, problem->temperature_K[i], gradient);
        for (size_t k = 0; k < n_which; k++)
            an_column(a, k)[i] = gradient[which[k]];
    }
    for (size_t k = 0; k < n_which; k++)
        an_spd_lower_solve(problem->factor, an_column(a, k), n);
    return whiten_residual(problem, law, an_column(a, n_which));
}

static an_columns work_columns(const law_problem *problem, size_t n_which)
{
    size_t n_row = problem->n + n_which;
    return (an_columns){n_row, n_which + 1, n_row, problem->work};
}

double an_law_problem_linear(const law_problem *problem, const size_t *which, size_t n_which, an_law *law)
{
    an_columns a = work_columns(problem, n_which);
    double *step = an_column(&a, n_which);
    if (problem->n < n_which || !whiten_columns(problem, law, which, n_which, &a))
        return INFINITY;
    an_householder_reduce(&a, n_which);
    an_triangle_solve(&a, step, n_which);
    for (size_t k = 0; k < n_which; k++)
        law->constant[which[k]] += step[k];
    return an_law_problem_cost(problem, law);
}

/* One damped step from `law`; false where it leads nowhere that is allowed and better. */
static bool try_step(const law_problem *problem, double damping, an_law *law, double *cost)
{
    static const size_t all[AN_LAW_MAX] = {0, 1, 2, 3, 4, 5};
    size_t k_all = law->n_constant;
    an_columns a = work_columns(problem, k_all);
    double *step = an_column(&a, k_all);
    an_law moved = *law;
    if (!whiten_columns(problem, law, all, k_all, &a))
        return false;
    for (size_t k = 0; k < k_all; k++)
        an_column(&a, k)[problem->n + k] =
            sqrt(damping * an_dot(an_column(&a, k), an_column(&a, k), problem->n));
    an_householder_reduce(&a, k_all);
    an_triangle_solve(&a, step, k_all);
    for (size_t k = 0; k < k_all; k++)
        moved.constant[k] += step[k];
    double reached = an_law_problem_cost(problem, &moved);
    if (!(reached < *cost))
        return false;
    *law = moved;
    *cost = reached;
    return true;
}

double an_law_problem_descend(const law_problem *problem, an_law *law)
{
    double cost = an_law_problem_cost(problem, law);
    double damping = 1e-3;
    for (int i = 0; i < MOST_STEPS && isfinite(cost) && damping < 1e12; i++) {
        double before = cost;
        if (!try_step(problem, damping, law, &cost)) {
            damping *= 10;
            continue;
        }
        damping = fmax(damping / 10, 1e-15);
        if (before - cost <= 1e-13 * cost && damping < 1e-6)
            break;
    }
    return cost;
}

an_status an_law_problem_covariance(const law_problem *problem, double inflation, an_law *law)
{
    static const size_t all[AN_LAW_MAX] = {0, 1, 2, 3, 4, 5};
    size_t k = law->n_constant;
    double information[AN_LAW_MAX * AN_LAW_MAX];
    double work[AN_LAW_MAX * AN_LAW_MAX + 2 * AN_LAW_MAX];
    an_columns a = work_columns(problem, k);
    if (!whiten_columns(problem, law, all, k, &a))
        return AN_E_NUMERIC;
    for (size_t i = 0; i < k; i++)
        for (size_t j = 0; j < k; j++)
            information[i * k + j] = an_dot(an_column(&a, i), an_column(&a, j), problem->n);
    AN_TRY(an_spd_invert(information, k, law->covariance, work));
    for (size_t i = 0; i < k * k; i++)
        law->covariance[i] *= inflation;
    return AN_OK;
}
