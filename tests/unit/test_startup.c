/* Start-up: a solid started from rest, whose transient is known in closed form; the excitation search that
 * comes before. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/search.h"
#include "anelast/startup.h"
#include "check.h"
#include "waves.h"

static an_status run(const wave *w, double frequency, int n_decay, an_startup *startup, an_sinefit *fit)
{
    static double residual[AN_CHANNELS * WAVE_MOST];
    an_sinefit_choice choice;
    an_startup_choice start;
    an_sinefit_choice_init(&choice);
    an_startup_choice_init(&start);
    choice.frequency_Hz = frequency;
    choice.n_decay = n_decay;
    an_waveform view = wave_view(w);
    return an_startup_fit(&view, &choice, &start, startup, fit, residual, NULL);
}

/* Relaxation times from a third of a cycle to three bursts, noise of 60 and 80 dB: whatever is kept, the
 * errors are as stated. */
static void transient_stays_below_noise(void **state)
{
    (void)state;
    static const double in_cycles[] = {0.3, 0.6, 1, 1.7, 3, 6, 12, 24};
    static const double noise[] = {1e-3, 1e-4};
    static wave w;
    double square = 0;
    int n = 0;
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    for (int k = 0; k < 8; k++)
        for (int j = 0; j < 2; j++)
            for (int again = 0; again < 15; again++) {
                an_sinefit fit;
                an_startup startup;
                double z[2];
                wave_from_rest(&w, 512, 2.0, 8, 1e-5, 1e5, 3e5, in_cycles[k] / 2.0);
                wave_noise(&w, rng, noise[j] * 1e-5, noise[j]);
                assert_int_equal(run(&w, 2.003, 2, &startup, &fit), AN_OK);
                assert_true(startup.n_dropped > 0.99 && startup.n_kept > 2.99);
                wave_errors(&fit, w.stiffness, z);
                assert_true(fabs(z[0]) < 5 && fabs(z[1]) < 5);
                square += z[0] * z[0] + z[1] * z[1];
                n += 2;
            }
    gsl_rng_free(rng);
    double spread = sqrt(square / n);
    assert_true(spread > 0.85 &&
                spread < 1.25); /* 480 errors: 1 +- 0.03, and a quarter for what is left of transients */
}

/* Without decay terms and without noise the cycles themselves must tell: dropped until two agree in 0.5 % and
 * 0.1 degree. */
static void cycles_are_dropped(void **state)
{
    (void)state;
    static wave w;
    an_sinefit fit;
    an_startup startup;
    wave_from_rest(&w, 1024, 1.0, 16, 1e-5, 1e5, 3e5, 1.0);
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    wave_noise(&w, rng, 1e-10, 1e-5);
    gsl_rng_free(rng);
    assert_int_equal(run(&w, 1.0, 0, &startup, &fit), AN_OK);
    assert_true(startup.n_dropped >= 2.9 && startup.n_kept >= 2.99);
    assert_relative(cabs(fit.stiffness), cabs(w.stiffness), 2e-3);
}

static void steady_burst_loses_one_cycle(void **state)
{
    (void)state;
    static wave w;
    an_sinefit fit;
    an_startup startup;
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    wave_steady(&w, 640, 4.0, 10.0, 1e-5, 2e5 + 1e4 * I);
    wave_noise(&w, rng, 1e-9, 1e-3);
    gsl_rng_free(rng);
    assert_int_equal(run(&w, 4.0, 2, &startup, &fit), AN_OK);
    assert_true(startup.settled);
    assert_close(startup.n_dropped, 1, 0.02);
    assert_close(startup.n_kept, 9, 0.02);
}

/* A stiffness that goes on changing never settles, and the burst says so. */
static void drifting_stiffness_is_not_settled(void **state)
{
    (void)state;
    static wave w;
    an_sinefit fit;
    an_startup startup;
    wave_steady(&w, 640, 4.0, 10.0, 1e-5, 2e5 + 1e4 * I);
    for (int i = 0; i < w.n; i++)
        w.f[i] = (w.f[i] - 6) * (1 + 0.04 * 10 * i / w.n);
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    wave_noise(&w, rng, 1e-9, 1e-4);
    gsl_rng_free(rng);
    assert_int_equal(run(&w, 4.0, 2, &startup, &fit), AN_OK);
    assert_false(startup.settled);
}

static void short_burst_is_kept_whole(void **state)
{
    (void)state;
    static wave w;
    an_sinefit fit;
    an_startup startup;
    wave_steady(&w, 256, 4.0, 2.5, 1e-5, 2e5 + 1e4 * I);
    assert_int_equal(run(&w, 4.0, 2, &startup, &fit), AN_OK);
    assert_close(startup.n_kept + startup.n_dropped, 2.5, 0.02);
    assert_relative(creal(fit.stiffness), 2e5, 1e-6);
}

/* The search: a tenth of a bin, whatever the length's factors; the longest length without awkward ones. */
static void search_finds_the_line(void **state)
{
    (void)state;
    static const int lengths[] = {512, 509, 1000, 1021, 97, 2048};
    static wave w;
    an_search *search = an_search_new();
    assert_non_null(search);
    for (size_t k = 0; k < sizeof lengths / sizeof *lengths; k++)
        for (double cycles = 2; cycles < lengths[k] / 4.0; cycles *= 1.37) {
            double found, prominence;
            wave_steady(&w, lengths[k], 7.0, cycles, 1e-5, 1);
            assert_int_equal(an_search_peak(search, w.n, w.t, w.x, &found, &prominence, NULL), AN_OK);
            assert_close(found * cycles / 7.0, cycles, cycles < 4 ? 0.3 : 0.1);
            assert_true(prominence > 10);
        }
    double found, prominence;
    for (int i = 0; i < w.n; i++)
        w.x[i] = 0.25;
    assert_int_equal(an_search_peak(search, w.n, w.t, w.x, &found, &prominence, NULL), AN_E_SCIENCE);
    assert_int_equal(an_search_peak(search, 9, w.t, w.f, &found, &prominence, NULL), AN_E_SCIENCE);
    an_search_free(&search);
    assert_null(search);
    assert_int_equal(an_search_length(1021), 1000);
    assert_int_equal(an_search_length(512), 512);
    assert_int_equal(an_search_length(7), 6);
    assert_int_equal(an_search_length(0), 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(transient_stays_below_noise),  cmocka_unit_test(cycles_are_dropped),
        cmocka_unit_test(steady_burst_loses_one_cycle), cmocka_unit_test(drifting_stiffness_is_not_settled),
        cmocka_unit_test(short_burst_is_kept_whole),    cmocka_unit_test(search_finds_the_line),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
