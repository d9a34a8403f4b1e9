/* Printed times to a clock. A dump prints t0 + i dt rounded to its last digit, so every time allows a band
 * for the line, and a clock exists where one line passes through all bands. For a slope b the intercepts
 * allowed are [max (t_i - tol_i - b i), min (t_i + tol_i - b i)]; the width of that interval is concave in b,
 * so its greatest is found by halving a bracket by the sign of its slope. The clock is the line in the middle
 * of what is allowed there, whose error falls as 1/n. Where times are printed as exact halves of the last
 * digit, that line is the only one.
 */
#include "acquire/dump/clock.h"

#include <math.h>

enum { HALVINGS = 64 };

/* Part of the tightest band that rounding errors of the arithmetic here may take. */
static const double slack = 1e-4;

/* Part of the tightest band by which the line's end may still move when the search ends; below the slack. */
static const double settled = 1e-5;

/* The intercepts that a slope allows. */
typedef struct allowed {
    double least, most; /* [time] */
    double leaning;     /* [samples] derivative of the width to the slope */
} allowed;

static allowed look(const double *time, const double *tolerance, const size_t *index, size_t n, double slope)
{
    allowed result = {-INFINITY, INFINITY, 0};
    double i_least = 0, i_most = 0;
    for (size_t i = 0; i < n; i++) {
        double x = (double)(index ? index[i] : i);
        double along = time[i] - time[0] - slope * x;
        if (along - tolerance[i] > result.least) {
            result.least = along - tolerance[i];
            i_least = x;
        }
        if (along + tolerance[i] < result.most) {
            result.most = along + tolerance[i];
            i_most = x;
        }
    }
    result.leaning = i_least - i_most;
    return result;
}

bool an_clock_fit(const double *time, const double *tolerance, const size_t *index, size_t n, double *start,
                  double *interval)
{
    double tightest = INFINITY;
    if (n < 2)
        return false;
    for (size_t i = 0; i < n; i++)
        tightest = fmin(tightest, tolerance[i]);
    double steps = index ? (double)(index[n - 1] - index[0]) : (double)(n - 1);
    double across = (tolerance[0] + tolerance[n - 1]) / steps, middle = (time[n - 1] - time[0]) / steps;
    double low = middle - across, high = middle + across;
    allowed best = look(time, tolerance, index, n, middle);
    for (int i = 0; i < HALVINGS && best.leaning != 0 && (high - low) * steps > settled * tightest; i++) {
        *(best.leaning > 0 ? &low : &high) = middle;
        middle = 0.5 * (low + high);
        best = look(time, tolerance, index, n, middle);
    }
    *interval = middle;
    *start = time[0] + 0.5 * (best.least + best.most);
    return middle > 0 && best.most - best.least >= -slack * tightest;
}
