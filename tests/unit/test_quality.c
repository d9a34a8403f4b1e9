/* What a record tells of its worth: each fault is made on purpose and must be found, and a sound record must
 * be left alone. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>
#include <string.h>

#include "anelast/quality.h"
#include "check.h"
#include "waves.h"

static wave w;
static double residual[AN_CHANNELS * WAVE_MOST];
static unsigned char use[WAVE_MOST];

/* A sound burst: 10 cycles of 64 samples, both channels read in steps, 60 dB. */
static an_waveform sound(double step_x, double step_f)
{
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    wave_steady(&w, 640, 2.0, 10, 1e-5, 3e5 + 4e4 * I);
    wave_noise(&w, rng, 1e-8, 3e-3);
    gsl_rng_free(rng);
    for (int i = 0; i < w.n; i++) {
        if (step_x > 0)
            w.x[i] = step_x * round(w.x[i] / step_x);
        if (step_f > 0)
            w.f[i] = step_f * round(w.f[i] / step_f);
    }
    memset(use, 1, sizeof use);
    an_waveform view = wave_view(&w);
    view.resolution[0] = step_x;
    view.resolution[1] = step_f;
    view.use = use;
    return view;
}

static an_quality assess(const an_waveform *view, const double complex drive[2], an_sinefit *fit)
{
    an_quality q;
    an_sinefit_choice choice;
    an_sinefit_choice_init(&choice);
    choice.frequency_Hz = 2.0;
    assert_int_equal(an_sinefit_run(view, &choice, fit, residual, NULL), AN_OK);
    assert_int_equal(an_quality_assess(view, 0, fit, residual, drive, &q, NULL), AN_OK);
    return q;
}

static const double complex RIGHT_DRIVE[2] = {3e5 + 4e4 * I, 3e5 + 4e4 * I};

static void sound_record(void **state)
{
    (void)state;
    an_sinefit fit;
    an_clipping clip;
    an_waveform view = sound(1e-9, 1e-3);
    an_clip_find(&view, 2.0, NULL, use, &clip);
    assert_int_equal(clip.n_end[0] + clip.n_end[1], 0);
    an_quality q = assess(&view, RIGHT_DRIVE, &fit);
    assert_close(q.snr_dB[AN_DISPLACEMENT], 20 * log10(1e-5 / (sqrt(2) * 1e-8)), 0.7);
    assert_close(q.steps[AN_FORCE], 3026.5, 5);
    assert_int_equal(q.n_frozen[0] + q.n_frozen[1] + q.n_repeated, 0);
    assert_close(q.mains_ratio, 0, 0);
    assert_true(q.harmonic[0] < 5 * q.u_harmonic && q.harmonic[1] < 5 * q.u_harmonic);
    assert_int_equal(q.n_cycle, 10);
    assert_int_equal(q.n_cycle_reversed, 0);
}

/* A coarse sine has flat tops of its own; they are no clipping. A channel held at a limit is. */
static void clipping(void **state)
{
    (void)state;
    an_clipping clip;
    an_waveform view = sound(0, 0.1); /* 30 steps of amplitude: some 6 equal samples at the top */
    an_clip_find(&view, 2.0, NULL, use, &clip);
    assert_int_equal(clip.n_end[0] + clip.n_end[1], 0);
    view = sound(0, 1e-3);
    double limit = 0.8 * 3.0265 + 9.0795;
    int held = 0;
    for (int i = 0; i < w.n; i++)
        if (w.f[i] > limit) {
            w.f[i] = limit;
            held++;
        }
    an_clip_find(&view, 2.0, NULL, use, &clip);
    assert_int_equal(clip.n_end[AN_FORCE], held);
    assert_true(clip.n_run[AN_FORCE] >= 10);
    an_sinefit fit;
    assess(&view, RIGHT_DRIVE, &fit); /* what was held stays out: no bias, 5 standard uncertainties */
    assert_true(cabs(fit.stiffness - w.stiffness) <
                5 * sqrt(fit.stiffness_noise[0] + fit.stiffness_noise[2]));
}

/* A noisy sine cut at 0.8 of its amplitude: with the samples that only their noise kept from the end taken out too, the
 * stiffness has no bias beyond a quarter of its uncertainty, and the uncertainty is the one stated. 300 made bursts: the
 * mean is known to 0.06, the spread to 4 %; limits at 4 of these. */
static void clipped_without_bias(void **state)
{
    (void)state;
    enum { BURSTS = 300 };
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    double sum = 0, square = 0, limit = 3 * 3.0265 + 0.8 * 3.0265;
    const double range[2][2] = {{NAN, NAN}, {NAN, limit}};
    for (int b = 0; b < BURSTS; b++) {
        an_sinefit fit;
        an_clipping clip;
        wave_steady(&w, 640, 2.0, 10, 1e-5, 3e5 + 4e4 * I);
        wave_noise(&w, rng, 1e-8, 0.1);
        for (int i = 0; i < w.n; i++)
            w.f[i] = fmin(w.f[i], limit);
        memset(use, 1, sizeof use);
        an_waveform view = wave_view(&w);
        view.use = use;
        an_clip_find(&view, 2.0, range, use, &clip);
        assess(&view, RIGHT_DRIVE, &fit);
        assert_true(an_clip_guard(&view, 0, &clip, fit.deviation, residual, use) > 10);
        assess(&view, RIGHT_DRIVE, &fit);
        double off = creal(fit.stiffness - w.stiffness) / sqrt(fit.stiffness_noise[0]);
        sum += off;
        square += off * off;
    }
    gsl_rng_free(rng);
    assert_close(sum / BURSTS, 0, 0.25);
    assert_close(sqrt(square / BURSTS), 1, 0.16);
}

static void range_ends(void **state)
{
    (void)state;
    an_clipping clip;
    an_waveform view = sound(0, 1e-3);
    double most = 0, range[2][2] = {{NAN, NAN}, {NAN, 0}};
    for (int i = 0; i < w.n; i++)
        most = fmax(most, w.f[i]);
    range[1][1] = most; /* a single sample at the converter's end */
    an_clip_find(&view, 2.0, (const double(*)[2])range, use, &clip);
    assert_true(clip.n_end[AN_FORCE] >= 1 && clip.n_run[AN_FORCE] < 3);
}

static void frozen_and_repeated(void **state)
{
    (void)state;
    an_sinefit fit;
    an_waveform view = sound(1e-9, 1e-3);
    for (int i = 301; i < 312; i++)
        w.f[i] = w.f[300];
    an_quality q = assess(&view, RIGHT_DRIVE, &fit);
    assert_int_equal(q.n_frozen[AN_FORCE], 12);
    assert_int_equal(q.n_frozen[AN_DISPLACEMENT], 0);
    view = sound(1e-9, 1e-3);
    memcpy(w.x + 420, w.x + 356, 32 * sizeof *w.x);
    memcpy(w.f + 420, w.f + 356, 32 * sizeof *w.f);
    q = assess(&view, RIGHT_DRIVE, &fit);
    assert_int_equal(q.n_repeated, 32);
}

static void mains(void **state)
{
    (void)state;
    an_sinefit fit;
    an_waveform view = sound(0, 0);
    for (int i = 0; i < w.n; i++)
        w.f[i] += 0.03 * 3.0265 * sin(2 * M_PI * 50 * w.t[i] + 1);
    an_quality q = assess(&view, RIGHT_DRIVE, &fit);
    assert_close(q.mains_Hz, 50, 0);
    assert_relative(q.mains_ratio, 0.03, 0.02);
}

/* A third harmonic that the drive makes is not the specimen's. */
static void harmonics(void **state)
{
    (void)state;
    an_sinefit fit;
    double complex drive[2] = {0, 4e5};
    an_waveform view = sound(0, 0);
    for (int i = 0; i < w.n; i++) {
        double turn = 2 * M_PI * 2.0 * w.t[i];
        w.x[i] += 0.02e-5 * cos(3 * turn);
        w.f[i] += 4e5 * 0.02e-5 * cos(3 * turn) + 0.03 * 3.0265 * sin(2 * turn);
    }
    an_quality q = assess(&view, drive, &fit);
    assert_close(q.harmonic[0], 0.03, 4 * q.u_harmonic);
    assert_close(q.harmonic[1], 0, 5 * q.u_harmonic);
    q = assess(&view, (double complex[2]){0, 0}, &fit);
    assert_close(q.harmonic[1], 0.08 / 3.0265, 4 * q.u_harmonic);
}

static void reversal(void **state)
{
    (void)state;
    an_sinefit fit;
    an_waveform view = sound(0, 0);
    for (int i = 0; i < w.n; i++)
        w.f[i] -= 9.0795 - 1; /* mean 1 N, amplitude 3 N */
    an_quality q = assess(&view, RIGHT_DRIVE, &fit);
    assert_int_equal(q.n_cycle_reversed, 10);
}

static void timing(void **state)
{
    (void)state;
    an_timing timing;
    double t[1000];
    for (int i = 0; i < 1000; i++)
        t[i] = 100 + i / 6.4; /* 0.15625 s, printed with one decimal too few */
    for (int i = 0; i < 1000; i++)
        t[i] = round(t[i] * 1e4) / 1e4;
    an_timing_assess(1000, t, &timing);
    assert_relative(timing.interval_s, 0.15625, 1e-7);
    assert_true(timing.jitter < 1e-3 && timing.n_gap == 0 && timing.n_backward == 0);
    assert_false(an_time_straighten(1000, t, 1e-6)); /* deviations of 5e-5 s are no rounding to 1e-6 s */
    assert_true(an_time_straighten(1000, t, 0.51e-4));
    for (int i = 0; i < 1000; i++)
        assert_close(t[i] - t[0], i / 6.4, 1e-6); /* halves were all rounded one way: an offset, no matter */
    t[500] += 0.2;
    an_timing_assess(1000, t, &timing);
    assert_int_equal(timing.n_gap, 1);
    assert_int_equal(timing.n_backward, 1);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(sound_record), cmocka_unit_test(clipping), cmocka_unit_test(clipped_without_bias),  cmocka_unit_test(range_ends),
        cmocka_unit_test(mains),        cmocka_unit_test(harmonics), cmocka_unit_test(frozen_and_repeated),
        cmocka_unit_test(reversal),     cmocka_unit_test(timing),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
