/* Start-up: cycles in which a viscoelastic specimen, started from rest, is not yet steady. Stage: phase.
 * Method: cycle by cycle fits at a fixed frequency, compared with their own uncertainty; then the residual
 * near the line of the whole fit, which a transient raises above white noise, and whose level enters the
 * stated noise in any case.
 */
#include "anelast/startup.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

void an_startup_choice_init(an_startup_choice *choice)
{
    *choice = (an_startup_choice){.agree_stiffness = 0.005,
                                  .agree_phase = 0.1 * M_PI / 180,
                                  .least_cycles = 3,
                                  .transient_risk = 0.001};
}

/* A burst cut into whole cycles, counted from its end so that what is left over falls to the start-up. */
typedef struct cycles {
    const an_waveform *w;
    double period, step, end; /* [s] cycle, mean sampling interval, end of the last cycle */
    int n;                    /* whole cycles */
} cycles;

static cycles cut(const an_waveform *w, double frequency)
{
    cycles c = {.w = w, .period = 1 / frequency};
    c.step = (w->time_s[w->n - 1] - w->time_s[0]) / (w->n - 1);
    c.end = w->time_s[w->n - 1] + 0.5 * c.step;
    c.n = (int)floor((c.end + 0.5 * c.step - w->time_s[0]) / c.period + 0.01);
    return c;
}

/* Index of the first sample at or after the start of a cycle (0-based). */
static int cycle_start(const cycles *c, int i_cycle)
{
    double from = c->end - (c->n - i_cycle) * c->period;
    int low = 0, high = c->w->n;
    while (low < high) {
        int middle = (low + high) / 2;
        if (c->w->time_s[middle] < from - 1e-6 * c->step)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

static an_waveform part(const an_waveform *w, int from, int to)
{
    an_waveform p = *w;
    p.n = to - from;
    p.time_s = w->time_s + from;
    for (int c = 0; c < AN_CHANNELS; c++)
        p.y[c] = w->y[c] + from;
    p.use = w->use ? w->use + from : NULL;
    return p;
}

/* Fit what stands from a sample on. */
static an_status fit_from(const an_waveform *w, int from, const an_sinefit_choice *choice, an_sinefit *fit,
                          double *residual, an_error *err)
{
    an_waveform kept = part(w, from, w->n);
    double *own = malloc(AN_CHANNELS * sizeof *own * (size_t)kept.n);
    if (!own)
        return an_fail_memory(err, "residuals");
    an_status status = an_sinefit_run(&kept, choice, fit, own, err);
    if (status >= 0) {
        memset(residual, 0, AN_CHANNELS * sizeof *residual * (size_t)w->n);
        for (int c = 0; c < AN_CHANNELS; c++)
            memcpy(residual + c * w->n + from, own + c * kept.n, sizeof *own * (size_t)kept.n);
    }
    free(own);
    return status;
}

/* Stiffness of one cycle with its uncertainty: by the cycle's own residual where it has samples enough to
 * tell, never by more than the settled noise, which a stiffness that goes on changing raises. */
static an_status cycle_fit(const cycles *c, int i_cycle, const an_sinefit *settled, an_sinefit *fit)
{
    enum { ENOUGH = 20 };
    int to = i_cycle + 1 < c->n ? cycle_start(c, i_cycle + 1) : c->w->n;
    an_waveform one = part(c->w, cycle_start(c, i_cycle), to);
    an_sinefit_choice choice = {.frequency_Hz = settled->frequency_Hz,
                                .frequency_known = 1,
                                .drift_degree = 1,
                                .n_harmonic = settled->n_harmonic};
    AN_TRY(an_sinefit_run(&one, &choice, fit, NULL, NULL));
    for (int k = 0; k < AN_CHANNELS; k++) {
        double own = one.n >= ENOUGH ? fmin(fit->deviation[k], settled->level[k]) : settled->level[k];
        choice.level[k] = fmax(own, 1e-12 * cabs(settled->amplitude[k][0]));
    }
    return an_sinefit_run(&one, &choice, fit, NULL, NULL);
}

static int agree(const an_sinefit *a, const an_sinefit *b, const an_startup_choice *choice)
{
    double complex ratio = b->stiffness / a->stiffness;
    double u = sqrt(0.5 * (a->stiffness_noise[0] + a->stiffness_noise[2] + b->stiffness_noise[0] +
                           b->stiffness_noise[2])) /
               cabs(a->stiffness);
    return fabs(cabs(ratio) - 1) < fmax(choice->agree_stiffness, 2.5 * u) &&
           fabs(carg(ratio)) < fmax(choice->agree_phase, 2.5 * u);
}

/* Cycle (0-based) to keep from: the first that the one after it agrees with, but never the very first; -1:
 * none agree. */
static int first_steady(const cycles *c, const an_sinefit *settled, const an_startup_choice *choice)
{
    an_sinefit before, now;
    an_status last = cycle_fit(c, 0, settled, &before);
    for (int k = 1; k <= c->n - choice->least_cycles; k++) {
        an_status status = cycle_fit(c, k, settled, &now);
        if (status >= 0 && last >= 0 && agree(&before, &now, choice))
            return k > 1 ? k - 1 : 1;
        before = now;
        last = status;
    }
    return -1;
}

/* Nonzero where more than noise is left near the line, and more than in the later half of the burst: a
 * transient decays, a coloured noise stays. The levels are known to some 20 % each, so half as much again is
 * the least that tells. */
static int transient_left(const an_sinefit *fit, double later, const an_startup_choice *choice)
{
    return fit->excess[AN_FORCE] < choice->transient_risk && fit->near_line[AN_FORCE] > 1.5 * later;
}

/* Drop further cycles while a transient is left, down to the later half of the burst. */
static an_status drop_transient(const cycles *c, int first, const an_sinefit_choice *choice,
                                const an_startup_choice *start_choice, an_startup *s, an_sinefit *fit,
                                double *residual, an_error *err)
{
    int half = c->n / 2 > start_choice->least_cycles ? c->n / 2 : start_choice->least_cycles,
        late = c->n - half;
    s->first_sample = cycle_start(c, first);
    AN_TRY(fit_from(c->w, s->first_sample, choice, fit, residual, err));
    if (late <= first || !(fit->excess[AN_FORCE] < start_choice->transient_risk))
        return AN_OK;
    AN_TRY(fit_from(c->w, cycle_start(c, late), choice, fit, residual, err));
    double later = fit->near_line[AN_FORCE];
    int still = fit->excess[AN_FORCE] < start_choice->transient_risk;
    for (int k = first; k <= late; k++) {
        s->first_sample = cycle_start(c, k);
        AN_TRY(fit_from(c->w, s->first_sample, choice, fit, residual, err));
        if (!transient_left(fit, later, start_choice)) {
            s->settled = s->settled && !(k == late && still);
            return AN_OK;
        }
    }
    return AN_OK;
}

/* A first, rough fit over the last half of the burst, three cycles at least, gives frequency and noise. */
static an_status rough(const an_waveform *w, const an_sinefit_choice *choice, cycles *c, an_sinefit *settled,
                       double *residual, an_error *err)
{
    *c = cut(w, choice->frequency_Hz);
    int keep = c->n / 2 > 3 ? c->n / 2 : (c->n < 3 ? c->n : 3);
    AN_TRY(fit_from(w, c->n < 1 ? 0 : cycle_start(c, c->n - keep), choice, settled, residual, err));
    *c = cut(w, settled->frequency_Hz);
    return AN_OK;
}

an_status an_startup_fit(const an_waveform *w, const an_sinefit_choice *choice,
                         const an_startup_choice *start_choice, an_startup *s, an_sinefit *fit,
                         double *residual, an_error *err)
{
    cycles c;
    *s = (an_startup){.settled = 1};
    if (w->n < 2 || !(w->time_s[w->n - 1] > w->time_s[0]))
        return an_fail(err, AN_E_VALUE, NULL, "sine fit: %d samples", w->n);
    AN_TRY(rough(w, choice, &c, fit, residual, err));
    an_sinefit_choice found = *choice;
    if (!choice->frequency_known)
        found.frequency_Hz = fit->frequency_Hz;
    int spare = c.n - start_choice->least_cycles, first = 0;
    if (spare > 0) {
        first = first_steady(&c, fit, start_choice);
        s->settled = first >= 0;
        first = first >= 0 ? first : spare;
    }
    AN_TRY(drop_transient(&c, first, &found, start_choice, s, fit, residual, err));
    double step = c.step, kept = w->time_s[w->n - 1] - w->time_s[s->first_sample] + step;
    s->n_kept = kept / c.period;
    s->n_dropped = (w->time_s[s->first_sample] - w->time_s[0]) / c.period;
    return AN_OK;
}
