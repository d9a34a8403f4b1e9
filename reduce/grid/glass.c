/* glass.c: one glass-transition reading from one quantity over temperature, after [E1640] (storage onset)
 * and [ISO6721-11] (peaks). Isotherms stand some kelvin apart, so the curve between them is a local
 * polynomial:
 *
 * - Peak: fourth degree through the five temperatures around the greatest value, by least squares over more
 * of them where a ramp has more. A parabola through the same five reads skewed peaks up to 1.5 K too high,
 * the fourth degree a quarter of that (made materials with 5 K between isotherms).
 * - Storage onset: the line through the glass, a median of slopes well below the transition, meets the
 * tangent at the steepest fall of log10 E', taken from the same kind of local polynomial.
 *
 * The noise part of a reading is what the noise of each value does to it. The part from the curve between the
 * isotherms is the greatest difference to other forms of that curve, taken as the half width of a rectangular
 * distribution.
 */
#include "reduce/grid/parts.h"

#include <gsl/gsl_multifit.h>
#include <math.h>
#include <stdio.h>

enum { WINDOW_LEAST = 5, WINDOW_MOST = 400, DEGREE = 4, GLASS_LEAST = 3 };

/* A window is widened over values above this share of the peak, where temperatures stand close. */
static const double peak_share = 0.8;

/* Slopes below this share of the steepest are glass. */
static const double glass_share = 0.12;

/* The tangent at the steepest fall is taken over at most this on each side. [1] log10 E' */
static const double fall_reach = 0.25;

/* A valley above this share of the lower peak does not part two peaks. */
static const double valley_share = 0.7;

/* A polynomial about `centre`, in units of `scale`. */
typedef struct polynomial {
    double coefficient[DEGREE + 1];
    int degree;
    double centre_K, scale_K; /* [K] */
} polynomial;

static double evaluate(const polynomial *curve, double temperature_K, int derivative)
{
    double x = (temperature_K - curve->centre_K) / curve->scale_K, sum = 0;
    for (int i = curve->degree; i >= derivative; i--) {
        double factor = 1;
        for (int k = 0; k < derivative; k++)
            factor *= (i - k) / curve->scale_K;
        sum = sum * x + factor * curve->coefficient[i];
    }
    return sum;
}

/* Least squares over the window [first, first + n) of a series. Returns nonzero where it worked. */
static int fit(const an_series *series, int first, int n, int degree, polynomial *curve)
{
    const double *t = series->temperature_K + first;
    size_t n_row = (size_t)n, n_column = (size_t)degree + 1;
    gsl_matrix *matrix = gsl_matrix_alloc(n_row, n_column),
               *covariance = gsl_matrix_alloc(n_column, n_column);
    gsl_vector *value = gsl_vector_alloc(n_row), *solution = gsl_vector_alloc(n_column);
    gsl_multifit_linear_workspace *workspace = gsl_multifit_linear_alloc(n_row, n_column);
    int good = 0;
    double chi_square;
    if (!matrix || !covariance || !value || !solution || !workspace)
        goto cleanup;
    *curve =
        (polynomial){.degree = degree, .centre_K = (t[0] + t[n - 1]) / 2, .scale_K = (t[n - 1] - t[0]) / 2};
    for (size_t i = 0; i < n_row; i++) {
        double x = (t[i] - curve->centre_K) / curve->scale_K, power = 1;
        for (size_t k = 0; k < n_column; k++, power *= x)
            gsl_matrix_set(matrix, i, k, power);
        gsl_vector_set(value, i, series->value[first + (int)i]);
    }
    good = gsl_multifit_linear(matrix, value, solution, covariance, &chi_square, workspace) == 0;
    for (int k = 0; k <= degree && good; k++)
        curve->coefficient[k] = gsl_vector_get(solution, (size_t)k);
cleanup:
    gsl_matrix_free(matrix);
    gsl_matrix_free(covariance);
    gsl_vector_free(value);
    gsl_vector_free(solution);
    gsl_multifit_linear_free(workspace);
    return good;
}

/* Where a derivative of the curve is greatest (sign > 0) or least between two temperatures: by steps, then by
 * halving. */
static double extreme(const polynomial *curve, int derivative, double sign, double from_K, double to_K)
{
    enum { STEPS = 200 };
    double best = from_K, step = (to_K - from_K) / STEPS;
    for (int i = 1; i <= STEPS; i++) {
        double at = from_K + i * step;
        if (sign * evaluate(curve, at, derivative) > sign * evaluate(curve, best, derivative))
            best = at;
    }
    double low = fmax(from_K, best - step), high = fmin(to_K, best + step);
    for (int i = 0; i < 60; i++) {
        double middle = (low + high) / 2;
        if (sign * evaluate(curve, middle, derivative + 1) > 0)
            low = middle;
        else
            high = middle;
    }
    return (low + high) / 2;
}

/* What a reading is taken from, found once and kept while values are disturbed. */
typedef struct place {
    int first, n;        /* window of the polynomial */
    int n_glass;         /* the coldest ones, in the glass line; 0: a peak */
    double from_K, to_K; /* [K] where to look */
} place;

/* A window of five about an index, inside the series. */
static void window_about(const an_series *series, int at, place *where)
{
    where->n = WINDOW_LEAST;
    where->first = at - WINDOW_LEAST / 2;
    where->first = where->first < 0 ? 0 : where->first;
    where->first = where->first + where->n > series->n ? series->n - where->n : where->first;
}

static double median(double *value, int n)
{
    for (int i = 1; i < n; i++) {
        double one = value[i];
        int k = i;
        for (; k > 0 && value[k - 1] > one; k--)
            value[k] = value[k - 1];
        value[k] = one;
    }
    return n % 2 ? value[n / 2] : (value[n / 2 - 1] + value[n / 2]) / 2;
}

/* The glass line: the median of the slopes between all pairs of at most 20 values, and the median of what is
 * left. */
static void glass_line(const an_series *series, int n_glass, double *slope, double *level)
{
    enum { MOST = 20 };
    double slopes[MOST * MOST], rest[MOST];
    int step = (n_glass + MOST - 1) / MOST, n = 0, n_rest = 0;
    for (int i = 0; i < n_glass; i += step)
        for (int k = i + step; k < n_glass; k += step)
            slopes[n++] =
                (series->value[k] - series->value[i]) / (series->temperature_K[k] - series->temperature_K[i]);
    *slope = median(slopes, n);
    for (int i = 0; i < n_glass; i += step)
        rest[n_rest++] = series->value[i] - *slope * series->temperature_K[i];
    *level = median(rest, n_rest);
}

static double read_at(const an_series *series, const place *where, int degree)
{
    polynomial curve;
    double slope, level;
    if (!fit(series, where->first, where->n, degree, &curve))
        return NAN;
    if (where->n_glass == 0)
        return extreme(&curve, 0, 1, where->from_K, where->to_K);
    double steepest = extreme(&curve, 1, -1, where->from_K, where->to_K),
           fall = evaluate(&curve, steepest, 1);
    glass_line(series, where->n_glass, &slope, &level);
    return (evaluate(&curve, steepest, 0) - fall * steepest - level) / (slope - fall);
}

static void refuse(an_reading *reading, const char *reason)
{
    reading->temperature_K = reading->u_noise_K = reading->u_common_K = reading->u_form_K = NAN;
    snprintf(reading->reason, sizeof reading->reason, "%s", reason);
}

/* How far the reading moves at most with one degree less, or with the window moved by one temperature to
 * either side. */
static double other_forms(const an_series *series, const place *where, double temperature_K)
{
    double middle =
        (series->temperature_K[where->first] + series->temperature_K[where->first + where->n - 1]) / 2;
    double most = fabs(read_at(series, where, DEGREE - 1) - temperature_K);
    if (middle < where->from_K || middle > where->to_K)
        most = fmax(most, fabs(read_at(series, where, DEGREE - 2) - temperature_K));
    for (int side = -1; side <= 1; side += 2) {
        place moved = *where;
        moved.first += side;
        if (moved.first < 0 || moved.first + moved.n > series->n ||
            series->temperature_K[moved.first] > where->from_K ||
            series->temperature_K[moved.first + moved.n - 1] < where->to_K)
            continue;
        most = fmax(most, fabs(read_at(series, &moved, DEGREE) - temperature_K));
    }
    return most;
}

/* The reading, what the noise of each value does to it, and what another form of the curve does. */
static void read_out(const an_series *series, const place *where, an_reading *reading)
{
    double variance = 0, temperature = read_at(series, where, DEGREE);
    if (!(temperature >= series->temperature_K[0] && temperature <= series->temperature_K[series->n - 1])) {
        refuse(reading, where->n_glass > 0 ? "the two tangents do not meet within the range"
                                           : "no maximum of the curve within the range");
        return;
    }
    for (int i = 0; i < series->n; i++) {
        int used = i < where->n_glass || (i >= where->first && i < where->first + where->n);
        if (!used || !(series->u[i] > 0))
            continue;
        double kept = series->value[i];
        series->value[i] = kept + series->u[i];
        variance += pow(read_at(series, where, DEGREE) - temperature, 2);
        series->value[i] = kept;
    }
    reading->temperature_K = temperature;
    reading->u_noise_K = sqrt(variance);
    reading->u_form_K = other_forms(series, where, temperature) / sqrt(3);
}

static int too_few(const an_series *series, an_reading *reading)
{
    if (series->n >= WINDOW_LEAST)
        return 0;
    refuse(reading, "");
    snprintf(reading->reason, sizeof reading->reason,
             "%d temperatures at this frequency, at least %d are needed", series->n, WINDOW_LEAST);
    return 1;
}

static int greatest(const an_series *series)
{
    int at = 0;
    for (int i = 1; i < series->n; i++)
        if (series->value[i] > series->value[at])
            at = i;
    return at;
}

/* Whether a second maximum stands beside the greatest, with too shallow a valley between the two. A rise has
 * to stand out of the noise and of 2 % to be a peak. */
static int overlaps(const an_series *series, int at)
{
    for (int i = 1; i + 1 < series->n; i++) {
        if (i == at || series->value[i] <= series->value[i - 1] || series->value[i] <= series->value[i + 1])
            continue;
        double valley = series->value[i];
        for (int k = i < at ? i : at; k <= (i < at ? at : i); k++)
            valley = fmin(valley, series->value[k]);
        double rise = series->value[i] - valley;
        if (rise > fmax(5 * series->u[i], log10(1.02)) && rise < -log10(valley_share))
            return 1;
    }
    return 0;
}

/* Widen a window for as long as the values beside it lie within `reach` of a level. */
static void widen(const an_series *series, double level, double reach, place *where)
{
    while (where->n < WINDOW_MOST && where->first > 0 &&
           fabs(series->value[where->first - 1] - level) < reach) {
        where->first--;
        where->n++;
    }
    while (where->n < WINDOW_MOST && where->first + where->n < series->n &&
           fabs(series->value[where->first + where->n] - level) < reach)
        where->n++;
}

/* Look between the neighbours of an index, or over the whole window where that has more temperatures. */
static void look_about(const an_series *series, int before, int after, place *where)
{
    int wide = where->n > WINDOW_LEAST;
    where->from_K = series->temperature_K[wide ? where->first : before];
    where->to_K = series->temperature_K[wide ? where->first + where->n - 1 : after];
}

/* Whether the curve has come down again on one side, by more than noise and 1 %: a peak whose one side is not
 * seen may lie anywhere beyond. */
static int comes_down(const an_series *series, int at, int side)
{
    for (int i = at + side; i >= 0 && i < series->n; i += side)
        if (series->value[at] - series->value[i] > fmax(3 * hypot(series->u[at], series->u[i]), log10(1.01)))
            return 1;
    return 0;
}

void an_glass_peak(const an_series *series, an_reading *reading)
{
    if (too_few(series, reading))
        return;
    int at = greatest(series);
    place where = {0};
    if (!comes_down(series, at, -1))
        refuse(reading, "does not fall at the cold end beyond noise: the peak lies near the edge of the "
                        "range or below it");
    else if (!comes_down(series, at, 1))
        refuse(reading, "does not fall at the hot end beyond noise: the peak lies near the edge of the range "
                        "or above it");
    else if (overlaps(series, at))
        refuse(reading, "two peaks overlap");
    if (reading->reason[0])
        return;
    window_about(series, at, &where);
    widen(series, series->value[at], -log10(peak_share), &where);
    look_about(series, at - 1, at + 1, &where);
    read_out(series, &where, reading);
}

static double slope_at(const an_series *series, int i)
{
    return (series->value[i + 1] - series->value[i]) /
           (series->temperature_K[i + 1] - series->temperature_K[i]);
}

/* How many of the coldest temperatures are glass: slopes well below the steepest, the last one before the
 * fall left out. */
static int count_glass(const an_series *series, double steepest)
{
    int n = 0;
    while (n + 1 < series->n && fabs(slope_at(series, n)) < glass_share * fabs(steepest))
        n++;
    return n;
}

void an_glass_onset(const an_series *series, an_reading *reading)
{
    if (too_few(series, reading))
        return;
    int at = 0;
    double least = series->value[0];
    for (int i = 0; i < series->n; i++) {
        least = fmin(least, series->value[i]);
        if (i + 1 < series->n && slope_at(series, i) < slope_at(series, at))
            at = i;
    }
    place where = {.n_glass = count_glass(series, slope_at(series, at))};
    if (series->value[0] - least < log10(2))
        refuse(reading, "the storage modulus falls by less than half: no transition in the range");
    else if (at + 2 >= series->n)
        refuse(reading, "steepest at the hottest temperatures: the fall is not complete");
    else if (where.n_glass < GLASS_LEAST)
        refuse(reading, "no glass before the fall: start the run at a lower temperature");
    if (reading->reason[0])
        return;
    window_about(series, at, &where);
    widen(series, (series->value[at] + series->value[at + 1]) / 2, fall_reach, &where);
    look_about(series, at > 0 ? at - 1 : 0, at + 2, &where);
    read_out(series, &where, reading);
}
