/* Noise near the line: the level that a coloured noise has where it matters, as the white noise of the same
 * density. Stage: phase. Method: the residual is projected on sines a whole number of bins (1 / window) away
 * from the line, harmonics left out; each projection's expectation under white noise is computed with what
 * the fit has already taken out of the residual, so that the level is unbiased for white noise.
 * Where the noise slopes, the geometric mean of both sides reads it at the line, which is right for a power
 * law.
 */
#include "model.h"

#include <math.h>
#include <stddef.h>
#include <string.h>

/* Bins each side, and the band that counts as near, in times the frequency. Common practice: half an octave
 * below to more than an octave above, wide enough for some 20 degrees of freedom in seven cycles. */
enum { BINS_EACH_SIDE = 10 };
/* A side of fewer bins can come out near zero by chance, and would take the geometric mean with it. */
enum { LEAST_BINS_A_SIDE = 3 };
static const double BAND_LOW = 0.45, BAND_HIGH = 2.3;

/* Sums of one probing sine against model, slope and residuals. Both its phases, cosine and sine. */
typedef struct probe {
    double self[2], column[2][AN_COLUMNS], slope[2][AN_CHANNELS], residual[2][AN_CHANNELS];
} probe;

static void probe_add(probe *p, const an_model *m, const double *row, const double r[AN_CHANNELS],
                      const double slope[AN_CHANNELS], const double v[2])
{
    for (int k = 0; k < 2; k++) {
        p->self[k] += v[k] * v[k];
        for (int j = 0; j < m->n_column; j++)
            p->column[k][j] += v[k] * row[j];
        for (int c = 0; c < AN_CHANNELS; c++) {
            p->residual[k][c] += v[k] * r[c];
            p->slope[k][c] += v[k] * slope[c];
        }
    }
}

/* All probes in one pass over the samples. omega [n_probe] [rad/s]. */
static void probe_all(probe *probes, const double *omega, int n_probe, const an_model *m,
                      const an_waveform *w, const an_solution *s, const double *residual)
{
    double row[AN_COLUMNS];
    for (int i = 0; i < w->n; i++) {
        if (w->use && !w->use[i])
            continue;
        double t = w->time_s[i], slope[AN_CHANNELS];
        double r[AN_CHANNELS] = {residual[i], residual[(size_t)w->n + (size_t)i]};
        an_model_row(m, t, row);
        for (int c = 0; c < AN_CHANNELS; c++)
            slope[c] = an_model_slope(m, t, row, s->coefficient[c]);
        for (int k = 0; k < n_probe; k++) {
            double v[2];
            sincos(omega[k] * (t - m->origin), &v[1], &v[0]);
            probe_add(&probes[k], m, row, r, slope, v);
        }
    }
}

/* Expectation of the squared projection per unit of white variance. */
static double expectation(const probe *p, int k, int c, const an_model *m, const an_solution *s,
                          double weight)
{
    double left = p->self[k], slope = p->slope[k][c];
    for (int i = 0; i < m->n_column; i++) {
        double back = 0;
        for (int j = 0; j < m->n_column; j++)
            back += s->inverse[i][j] * p->column[k][j];
        left -= back * p->column[k][i];
        slope -= back * s->slope_column[c][i];
    }
    if (weight > 0 && s->slope_self[c] > 0)
        left -= weight * slope * slope / s->slope_self[c];
    return left;
}

static int bin_free(const an_model *m, int bin)
{
    double cycles = m->n_cycle + bin; /* of the probing sine in the window */
    if (cycles < BAND_LOW * m->n_cycle || cycles > BAND_HIGH * m->n_cycle)
        return 0;
    double harmonic = cycles / m->n_cycle, nearest = round(harmonic);
    return fabs(harmonic - nearest) * m->n_cycle > 0.5;
}

/* Sums over the bins of one side of the line. */
typedef struct side {
    double power[AN_CHANNELS], expected[AN_CHANNELS]; /* [unit of y squared], [1] */
} side;

static void add_probe(const an_model *m, const an_solution *s, const double weight[AN_CHANNELS],
                      const probe *p, side *sum)
{
    for (int c = 0; c < AN_CHANNELS; c++)
        for (int k = 0; k < 2; k++) {
            sum->power[c] += p->residual[k][c] * p->residual[k][c];
            sum->expected[c] += expectation(p, k, c, m, s, weight[c]);
        }
}

void an_noise_near_line(const an_model *m, const an_waveform *w, const an_solution *s, const double *residual,
                        const double weight[AN_CHANNELS], an_near_line *near)
{
    probe probes[2 * BINS_EACH_SIDE];
    double omega[2 * BINS_EACH_SIDE];
    side below = {0}, above = {0};
    int n = 0, n_below = 0;
    for (int bin = -BINS_EACH_SIDE; bin <= BINS_EACH_SIDE; bin++)
        if (bin_free(m, bin)) {
            omega[n++] = m->omega * (1 + bin / m->n_cycle);
            n_below += bin < 0;
        }
    int both = n_below >= LEAST_BINS_A_SIDE && n - n_below >= LEAST_BINS_A_SIDE;
    memset(probes, 0, sizeof probes);
    probe_all(probes, omega, n, m, w, s, residual);
    for (int k = 0; k < n; k++)
        add_probe(m, s, weight, &probes[k], omega[k] < m->omega ? &below : &above);
    near->freedom = 2 * n;
    for (int c = 0; c < AN_CHANNELS; c++) {
        double low = below.power[c] / below.expected[c], high = above.power[c] / above.expected[c];
        double pooled = (below.power[c] + above.power[c]) / (below.expected[c] + above.expected[c]);
        near->level[c] = n > 0 ? sqrt(pooled) : NAN;
        near->balanced[c] = both ? sqrt(sqrt(low * high)) : near->level[c];
    }
}
