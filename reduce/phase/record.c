/* The record before any fit: clipped samples, and how evenly the samples stand in time. Stage: phase. */
#include "anelast/quality.h"

#include <math.h>
#include <string.h>

/* Greatest (sign +1) or least (-1) of a channel, over finite samples that count. */
static double extreme(const an_waveform *w, int c, double sign)
{
    double top = -INFINITY;
    for (int i = 0; i < w->n; i++)
        if ((!w->use || w->use[i]) && sign * w->y[c][i] > top)
            top = sign * w->y[c][i];
    return sign * top;
}

static int longest_equal(const an_waveform *w, int c, double value)
{
    int longest = 0, run = 0;
    for (int i = 0; i < w->n; i++) {
        run = w->y[c][i] == value ? run + 1 : 0;
        longest = run > longest ? run : longest;
    }
    return longest;
}

/* Least step between samples not far apart: the converter's, where nobody said. Neighbours alone would tell of the sine's
 * slope where little of it is left between two flat tops. */
static double least_step(const an_waveform *w, int c)
{
    const int apart = 64;
    double least = INFINITY;
    for (int i = 1; i < w->n; i++)
        for (int j = i > apart ? i - apart : 0; j < i; j++) {
            double d = fabs(w->y[c][i] - w->y[c][j]);
            if (d > 0 && d < least)
                least = d;
        }
    return isfinite(least) ? least : 0;
}

/* Samples that rounding to steps of q makes equal at the top of a sine. */
static double natural_run(const an_waveform *w, double q, double amplitude, double frequency)
{
    double per_cycle = (w->n - 1) / (w->time_s[w->n - 1] - w->time_s[0]) / frequency;
    double part = q < 2 * amplitude ? acos(1 - q / amplitude) / M_PI : 1;
    return per_cycle * part + 1;
}

static void mark(const an_waveform *w, int c, double value, unsigned char *use, an_clipping *clip)
{
    int run = longest_equal(w, c, value);
    clip->n_run[c] = run > clip->n_run[c] ? run : clip->n_run[c];
    for (int i = 0; i < w->n; i++)
        if (w->y[c][i] == value) {
            use[i] = 0;
            clip->n_end[c]++;
        }
}

void an_clip_find(const an_waveform *w, double frequency_Hz, const double (*range)[2], unsigned char *use,
                  an_clipping *clip)
{
    memset(clip, 0, sizeof *clip);
    for (int c = 0; c < AN_CHANNELS; c++)
        clip->end[c][0] = clip->end[c][1] = NAN;
    if (w->n < 3 || !(w->time_s[w->n - 1] > w->time_s[0]))
        return;
    for (int c = 0; c < AN_CHANNELS; c++) {
        double end[2] = {extreme(w, c, -1), extreme(w, c, 1)}, amplitude = 0.5 * (end[1] - end[0]);
        double q = w->resolution[c] > 0 ? w->resolution[c] : least_step(w, c);
        if (!(amplitude > 0))
            continue;
        for (int k = 0; k < 2; k++) {
            int at_end = range && end[k] == range[c][k];
            int run = longest_equal(w, c, end[k]);
            if (at_end || (run >= 3 && run > 2 * natural_run(w, q, amplitude, frequency_Hz))) {
                mark(w, c, end[k], use, clip);
                clip->end[c][k] = end[k];
            }
        }
    }
}

int an_clip_guard(const an_waveform *w, int first, const an_clipping *clip, const double deviation[AN_CHANNELS],
                  const double *residual, unsigned char *use)
{
    const double sure = 4; /* standard deviations: of the samples further off, 1 in 30 000 would have reached the end */
    int n_left_out = 0;
    for (int c = 0; c < AN_CHANNELS; c++)
        for (int i = first; i < w->n && clip->n_end[c]; i++) {
            double fitted = w->y[c][i] - residual[(size_t)c * (size_t)w->n + (size_t)i];
            if (use[i] && (fitted < clip->end[c][0] + sure * deviation[c] ||
                           fitted > clip->end[c][1] - sure * deviation[c])) {
                use[i] = 0;
                n_left_out++;
            }
        }
    return n_left_out;
}

/* Straight line of least squares through the times over their index. */
static void line(int n, const double *t, double *at_middle, double *slope)
{
    double mean = 0, product = 0, norm = 0, middle = 0.5 * (n - 1);
    for (int i = 0; i < n; i++)
        mean += (t[i] - t[0]) / n;
    for (int i = 0; i < n; i++) {
        product += (i - middle) * (t[i] - t[0] - mean);
        norm += (i - middle) * (i - middle);
    }
    *at_middle = t[0] + mean;
    *slope = product / norm;
}

void an_timing_assess(int n, const double *time_s, an_timing *timing)
{
    double middle, square = 0;
    memset(timing, 0, sizeof *timing);
    line(n, time_s, &middle, &timing->interval_s);
    for (int i = 0; i < n; i++) {
        double d = fabs(time_s[i] - middle - timing->interval_s * (i - 0.5 * (n - 1)));
        square += d * d;
        timing->worst = fmax(timing->worst, d);
        if (i && !(time_s[i] > time_s[i - 1]))
            timing->n_backward++;
        if (i && time_s[i] - time_s[i - 1] > 1.5 * timing->interval_s)
            timing->n_gap++;
    }
    timing->jitter = sqrt(square / n) / timing->interval_s;
    timing->worst /= timing->interval_s;
}

int an_time_straighten(int n, double *time_s, double resolution_s)
{
    an_timing timing;
    double middle, slope;
    if (n < 3 || !(resolution_s > 0))
        return 0;
    an_timing_assess(n, time_s, &timing);
    line(n, time_s, &middle, &slope);
    if (!(timing.worst * timing.interval_s <= resolution_s) || !(slope > 0))
        return 0;
    for (int i = 0; i < n; i++)
        time_s[i] = middle + slope * (i - 0.5 * (n - 1));
    return 1;
}
