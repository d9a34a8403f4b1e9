/* The quality of a burst's record, in numbers: signal against noise, converter steps, frozen and repeated
 * samples, mains, harmonics, reversal of the force. Stage: phase. Sources of what is looked for: common
 * practice of dynamic testing.
 */
#include "anelast/quality.h"

#include <math.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

/* Samples in a block whose repetition is no chance. */
enum { BLOCK = 8 };

/* Longest run of one value while the fit, y less residual, moves by more than 6 noise levels and 6 steps. The
 * fault itself raises the level, so a tenth of the amplitude is enough. */
static int frozen(const an_waveform *w, int c, int first, const an_sinefit *fit, const double *residual)
{
    const double *y = w->y[c], *r = residual + (size_t)c * (size_t)w->n;
    double far = fmin(6 * fit->level[c], 0.1 * cabs(fit->amplitude[c][0])) + 6 * w->resolution[c];
    int longest = 0;
    for (int i = first, start = first; i < w->n; i++) {
        if (y[i] != y[start] || (w->use && !w->use[i]))
            start = i;
        /* equal y: the fit moved by as much as the residual did */
        if (i - start >= 3 && fabs(r[i] - r[start]) > far && i - start + 1 > longest)
            longest = i - start + 1;
    }
    return longest;
}

typedef struct block {
    uint64_t hash;
    int at;
} block;

static int by_hash(const void *a, const void *b)
{
    const block *x = a, *y = b;
    if (x->hash != y->hash)
        return x->hash < y->hash ? -1 : 1;
    return (x->at > y->at) - (x->at < y->at);
}

/* FNV-1a over the bits of BLOCK samples of both channels. */
static uint64_t hash_block(const an_waveform *w, int at)
{
    uint64_t hash = 14695981039346656037u;
    for (int i = at; i < at + BLOCK; i++)
        for (int c = 0; c < AN_CHANNELS; c++) {
            uint64_t bits;
            memcpy(&bits, &w->y[c][i], sizeof bits);
            for (int k = 0; k < 64; k += 8)
                hash = (hash ^ (bits >> k & 255)) * 1099511628211u;
        }
    return hash;
}

/* Samples that repeat an earlier block. Only where noise rules repetition out: level above half a step. */
static an_status repeated(const an_waveform *w, const an_sinefit *fit, int *n_repeated, an_error *err)
{
    *n_repeated = 0;
    int noisy = fit->level[AN_DISPLACEMENT] > 0.5 * w->resolution[AN_DISPLACEMENT] ||
                fit->level[AN_FORCE] > 0.5 * w->resolution[AN_FORCE];
    int n = w->n - BLOCK + 1;
    if (n < 2 || !noisy)
        return AN_OK;
    block *blocks = malloc((size_t)n * sizeof *blocks);
    unsigned char *hit = calloc((size_t)w->n, 1);
    if (blocks && hit) {
        for (int i = 0; i < n; i++)
            blocks[i] = (block){hash_block(w, i), i};
        qsort(blocks, (size_t)n, sizeof *blocks, by_hash);
        for (int i = 1; i < n; i++)
            if (blocks[i].hash == blocks[i - 1].hash && blocks[i].at >= blocks[i - 1].at + BLOCK)
                memset(hit + blocks[i].at, 1, BLOCK);
        for (int i = 0; i < w->n; i++)
            *n_repeated += hit[i];
    }
    an_status status = blocks && hit ? AN_OK : an_fail_memory(err, "block hashes");
    free(blocks);
    free(hit);
    return status;
}

/* Mains and its second harmonic in both frequencies of the world, where the window can tell them from the
 * line's. */
static void mains(const an_waveform *w, int first, const an_sinefit *fit, const double *residual,
                  an_quality *q)
{
    static const double LINES_HZ[] = {50, 60, 100, 120};
    int n = w->n - first;
    double span = w->time_s[w->n - 1] - w->time_s[first], nyquist = 0.5 * (n - 1) / span;
    double amplitude = cabs(fit->amplitude[AN_FORCE][0]),
           least = 5 * fit->deviation[AN_FORCE] * sqrt(2.0 / n);
    for (size_t k = 0; k < sizeof LINES_HZ / sizeof *LINES_HZ; k++) {
        double f = LINES_HZ[k], order = f / fit->frequency_Hz;
        double off = fabs(order - fmax(1, round(order))) * fit->frequency_Hz;
        int own = order < 2 * fit->n_harmonic && off * span < 1.5; /* may be a harmonic of ours */
        if (f > 0.9 * nyquist || f * span < 3 || own)
            continue;
        double size = cabs(an_sinefit_line(n, w->time_s + first, residual + (size_t)w->n + (size_t)first,
                                           w->use ? w->use + first : NULL, f));
        if (size > least && size / amplitude > q->mains_ratio) {
            q->mains_ratio = size / amplitude;
            q->mains_Hz = f;
        }
    }
}

static void harmonics(const an_sinefit *fit, const double complex drive_stiffness[2], an_quality *q)
{
    double first = cabs(fit->amplitude[AN_FORCE][0]);
    for (int h = 2; h <= 3 && h <= fit->n_harmonic; h++) {
        double complex own =
            fit->amplitude[AN_FORCE][h - 1] - drive_stiffness[h - 2] * fit->amplitude[AN_DISPLACEMENT][h - 1];
        q->harmonic[h - 2] = cabs(own) / first;
    }
    double moved = cabs(drive_stiffness[1]) * fit->u_amplitude[AN_DISPLACEMENT];
    q->u_harmonic = hypot(fit->u_amplitude[AN_FORCE], isfinite(moved) ? moved : 0) / first;
}

/* Cycles in which the force less its noise passes zero against the sign of its mean. */
static void reversals(const an_waveform *w, int first, const an_sinefit *fit, const double *residual,
                      an_quality *q)
{
    double sign = fit->mean[AN_FORCE] < 0 ? -1 : 1, from = w->time_s[first];
    q->n_cycle = (int)floor(fit->n_cycle + 0.01);
    for (int k = 0, i = first; k < q->n_cycle; k++) {
        int reversed = 0;
        for (; i < w->n && w->time_s[i] < from + (k + 1) / fit->frequency_Hz; i++)
            reversed |= sign * (w->y[AN_FORCE][i] - residual[(size_t)w->n + (size_t)i]) < 0;
        q->n_cycle_reversed += reversed;
    }
}

an_status an_quality_assess(const an_waveform *w, int first, const an_sinefit *fit, const double *residual,
                            const double complex drive_stiffness[2], an_quality *q, an_error *err)
{
    memset(q, 0, sizeof *q);
    for (int c = 0; c < AN_CHANNELS; c++) {
        double amplitude = cabs(fit->amplitude[c][0]);
        q->snr_dB[c] = 20 * log10(amplitude / (sqrt(2) * fit->level[c]));
        q->steps[c] = w->resolution[c] > 0 ? amplitude / w->resolution[c] : INFINITY;
        q->n_frozen[c] = frozen(w, c, first, fit, residual);
    }
    mains(w, first, fit, residual, q);
    harmonics(fit, drive_stiffness, q);
    reversals(w, first, fit, residual, q);
    return repeated(w, fit, &q->n_repeated, err);
}
