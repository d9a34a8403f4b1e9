/* Printed times to a clock. A dump prints t0 + i dt to so many digits; a line through the points, weighted by the square of
 * each one's last digit, nearly always passes within half a digit of all. Where it does not, the weights are moved towards the
 * worst points until it does (Lawson's algorithm, which tends to the line with the least greatest deviation), so that a
 * clock is missed only where there is none. Range: times up to 2^53 of their last digits.
 */
#include "acquire/dump/clock.h"

#include <math.h>
#include <stdlib.h>

enum { ROUNDS = 40 };

/* A few rounding errors of double on top of half a digit. */
static const double slack = 1 + 1e-6;

/* A line through (i, time) in coordinates about the middle, which keeps the sums well conditioned. */
typedef struct line_fit {
    double i_middle, t_middle; /* [1], [time] */
    double slope;              /* [time] a sample */
} line_fit;

static double index_of(const size_t *index, size_t i)
{
    return (double)(index ? index[i] : i);
}

static line_fit fit_line(const double *time, const double *weight, const size_t *index, size_t n)
{
    double sum = 0, sum_i = 0, sum_t = 0, sum_ii = 0, sum_it = 0;
    for (size_t i = 0; i < n; i++) {
        sum += weight[i];
        sum_i += weight[i] * index_of(index, i);
        sum_t += weight[i] * (time[i] - time[0]);
    }
    line_fit fit = {sum_i / sum, sum_t / sum, 0};
    for (size_t i = 0; i < n; i++) {
        double x = index_of(index, i) - fit.i_middle;
        sum_ii += weight[i] * x * x;
        sum_it += weight[i] * x * (time[i] - time[0] - fit.t_middle);
    }
    fit.slope = sum_ii > 0 ? sum_it / sum_ii : 0;
    return fit;
}

/* The greatest deviation in tolerances; moves the weights for another round. */
static double judge(const line_fit *fit, const double *time, const double *tolerance, double *weight,
                    const size_t *index, size_t n)
{
    double worst = 0, sum = 0;
    for (size_t i = 0; i < n; i++) {
        double along = fit->t_middle + fit->slope * (index_of(index, i) - fit->i_middle);
        double deviation = fabs(time[i] - time[0] - along) / tolerance[i];
        worst = fmax(worst, deviation);
        weight[i] *= deviation + 1e-3;
        sum += weight[i];
    }
    for (size_t i = 0; i < n; i++)
        weight[i] /= sum;
    return worst;
}

bool an_clock_fit(const double *time, const double *tolerance, const size_t *index, size_t n, double *start,
                  double *interval)
{
    if (n < 2)
        return false;
    double *weight = malloc(n * sizeof *weight);
    bool found = false;
    if (!weight)
        return false;
    for (size_t i = 0; i < n; i++)
        weight[i] = tolerance[0] * tolerance[0] / (tolerance[i] * tolerance[i]);
    for (int i_round = 0; i_round < ROUNDS && !found; i_round++) {
        line_fit fit = fit_line(time, weight, index, n);
        double worst = judge(&fit, time, tolerance, weight, index, n);
        found = fit.slope > 0 && worst <= slack;
        *interval = fit.slope;
        *start = time[0] + fit.t_middle - fit.slope * fit.i_middle;
        if (worst > 50) /* no rounding: far from any uniform clock */
            break;
    }
    free(weight);
    return found;
}
