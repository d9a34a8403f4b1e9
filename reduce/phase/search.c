/* Excitation search: where the sine fit starts. Stage: phase. Method: Hann-windowed real transform of the
 * waveform cut to a length without awkward factors; the line's place between bins from the ratio of its
 * greatest neighbours, exact for a pure sine under a Hann window: offset = (2 r - 1) / (1 + r), r = neighbour
 * / peak. Range: two cycles to half the sampling rate.
 */
#include "anelast/search.h"

#include <fftw3.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { PLANS = 12, LEAST = 16 };

typedef struct plan_row {
    int n;
    fftw_plan plan;
    double *in;
    fftw_complex *out;
} plan_row;

struct an_search {
    int n_plan, next;
    plan_row plan[PLANS];
};

an_search *an_search_new(void)
{
    return calloc(1, sizeof(an_search));
}

static void drop(plan_row *p)
{
    if (p->plan)
        fftw_destroy_plan(p->plan);
    fftw_free(p->in);
    fftw_free(p->out);
    memset(p, 0, sizeof *p);
}

void an_search_free(an_search **search)
{
    if (!*search)
        return;
    for (int i = 0; i < (*search)->n_plan; i++)
        drop(&(*search)->plan[i]);
    free(*search);
    *search = NULL;
}

int an_search_length(int n)
{
    for (; n > 0; n--) {
        int rest = n;
        for (int p = 2; p <= 5; p++)
            while (rest % p == 0)
                rest /= p;
        if (rest == 1)
            return n;
    }
    return 0;
}

/* The plan of a length, made once; the oldest gives way when there are too many. */
static plan_row *plan_for(an_search *s, int n)
{
    for (int i = 0; i < s->n_plan; i++)
        if (s->plan[i].n == n)
            return &s->plan[i];
    plan_row *p = &s->plan[s->next];
    if (s->n_plan == PLANS)
        drop(p);
    p->in = fftw_alloc_real((size_t)n);
    p->out = fftw_alloc_complex((size_t)n / 2 + 1);
    p->plan = p->in && p->out ? fftw_plan_dft_r2c_1d(n, p->in, p->out, FFTW_ESTIMATE) : NULL;
    p->n = p->plan ? n : 0;
    if (s->n_plan < PLANS)
        s->n_plan++;
    s->next = (s->next + 1) % PLANS;
    return p->plan ? p : NULL;
}

/* Uniform samples over the whole span, linear between neighbours. */
static void resample(int n, const double *t, const double *y, int m, double *out)
{
    double dt = (t[n - 1] - t[0]) / (n - 1);
    for (int i = 0, j = 0; i < m; i++) {
        double at = t[0] + i * dt;
        while (j < n - 2 && t[j + 1] < at)
            j++;
        double step = t[j + 1] - t[j], part = step > 0 ? (at - t[j]) / step : 0;
        out[i] = y[j] + part * (y[j + 1] - y[j]);
    }
}

/* Take off the straight line of least squares, then weigh by Hann's window. */
static void prepare(int n, double *y)
{
    double mean = 0, slope = 0, norm = 0, middle = 0.5 * (n - 1);
    for (int i = 0; i < n; i++)
        mean += y[i] / n;
    for (int i = 0; i < n; i++) {
        slope += (i - middle) * (y[i] - mean);
        norm += (i - middle) * (i - middle);
    }
    slope /= norm;
    for (int i = 0; i < n; i++)
        y[i] = (y[i] - mean - slope * (i - middle)) * (0.5 - 0.5 * cos(2 * M_PI * (i + 0.5) / n));
}

static int by_size(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

/* Magnitudes into mag[n_bin]; the greatest from bin 1 up. */
static int greatest(const plan_row *p, int n_bin, double *mag)
{
    int peak = 1;
    for (int k = 0; k < n_bin; k++) {
        mag[k] = hypot(p->out[k][0], p->out[k][1]);
        if (k >= 1 && mag[k] > mag[peak])
            peak = k;
    }
    return peak;
}

/* Place of the line in bins. */
static double between_bins(const double *mag, int n_bin, int peak)
{
    double left = mag[peak - 1], right = peak + 1 < n_bin ? mag[peak + 1] : 0;
    double r = fmax(left, right) / mag[peak], offset = (2 * r - 1) / (1 + r);
    if (offset < 0)
        offset = 0;
    return right >= left ? peak + offset : peak - offset;
}

an_status an_search_peak(an_search *search, int n, const double *time_s, const double *y,
                         double *frequency_Hz, double *prominence, an_error *err)
{
    int m = an_search_length(n), n_bin = m / 2 + 1;
    if (n < LEAST || !(time_s[n - 1] > time_s[0]))
        return an_fail(err, AN_E_SCIENCE, NULL, "%d samples are too few to find an excitation, at least %d",
                       n, LEAST);
    plan_row *p = plan_for(search, m);
    double *mag = p ? malloc((size_t)n_bin * sizeof *mag) : NULL;
    if (!mag)
        return an_fail_memory(err, "the excitation search");
    resample(n, time_s, y, m, p->in);
    prepare(m, p->in);
    fftw_execute(p->plan);
    int peak = greatest(p, n_bin, mag);
    double bin_Hz = (n - 1) / (time_s[n - 1] - time_s[0]) / m;
    double top = mag[peak];
    *frequency_Hz = top > 0 ? between_bins(mag, n_bin, peak) * bin_Hz : 0;
    qsort(mag, (size_t)n_bin, sizeof *mag, by_size);
    *prominence = mag[n_bin / 2] > 0 ? top / mag[n_bin / 2] : INFINITY;
    free(mag);
    if (!(top > 0))
        return an_fail(err, AN_E_SCIENCE, NULL, "the displacement does not move: no excitation");
    return AN_OK;
}
