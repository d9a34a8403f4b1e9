/* The sine fit on made waveforms: exact without noise, at the bound with white noise, honest with coloured
 * noise and rounding. Random numbers are GSL's with a fixed seed, so the campaigns are the same every time.
 * */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "check.h"
#include "waves.h"

/* Limits of a spread over n draws: 1 +- 4 / sqrt(2 n), the deviation of a standard deviation. */
static void assert_spread(double sum_square, int n, double least, double most)
{
    double spread = sqrt(sum_square / n), chance = 4 / sqrt(2.0 * n);
    assert_true(spread > least - chance && spread < most + chance);
}

/* Drift, harmonics and uneven times belong to the model: nothing may leak into the stiffness. */
static void exact_without_noise(void **state)
{
    (void)state;
    static wave w;
    an_sinefit fit;
    an_sinefit_choice choice;
    wave_steady(&w, 500, 2.0, 7.3, 1e-5, 3e5 + 4e4 * I);
    for (int i = 0; i < w.n; i++) {
        w.t[i] += 0.003 * sin(i * 1.7); /* uneven, known times */
        double s = w.t[i] - 300, bent = 2 * M_PI * 2.0 * w.t[i];
        double complex turn = 1e-5 * cexp(I * (bent + 0.4));
        w.x[i] = creal(turn) + 0.02e-5 * cos(3 * bent) + 1e-6 * s;
        w.f[i] = creal(w.stiffness * turn) + 0.05 * sin(3 * bent) + 0.4 + 0.3 * s - 0.02 * s * s;
    }
    an_sinefit_choice_init(&choice);
    choice.frequency_Hz = 2.006; /* a tenth of a bin off */
    an_waveform view = wave_view(&w);
    assert_int_equal(an_sinefit_run(&view, &choice, &fit, NULL, NULL), AN_OK);
    assert_relative(fit.frequency_Hz, 2.0, 1e-10); /* rounding of times of 300 s, and the model's condition */
    assert_relative(creal(fit.stiffness), 3e5, 1e-9);
    assert_relative(cimag(fit.stiffness), 4e4, 1e-8);
}

/* White noise: unbiased, the spread is the one stated, and the one stated is the bound
 * u^2(delta) = (2/N) (sF^2/AF^2 + sx^2/Ax^2) [RB74] to the few per cent that drift and decays cost over whole
 * cycles. */
static void white_noise_at_the_bound(void **state)
{
    (void)state;
    enum { DRAWS = 400 };
    static wave w;
    double mean[2] = {0}, square = 0, stated = 0;
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    for (int k = 0; k < DRAWS; k++) {
        an_sinefit fit;
        an_sinefit_choice choice;
        double z[2];
        wave_steady(&w, 448, 5.0, 7, 1e-5, 3e5 + 4e4 * I);
        wave_noise(&w, rng, 1e-8, 0.01 * 3.0265);
        an_sinefit_choice_init(&choice);
        choice.frequency_Hz = 5.02;
        an_waveform view = wave_view(&w);
        assert_int_equal(an_sinefit_run(&view, &choice, &fit, NULL, NULL), AN_OK);
        wave_errors(&fit, w.stiffness, z);
        for (int i = 0; i < 2; i++) {
            mean[i] += z[i] / DRAWS;
            square += z[i] * z[i];
        }
        stated += 0.5 * (fit.stiffness_noise[0] + fit.stiffness_noise[2]) / pow(cabs(w.stiffness), 2) / DRAWS;
    }
    gsl_rng_free(rng);
    assert_close(mean[0], 0, 4 / sqrt(DRAWS));
    assert_close(mean[1], 0, 4 / sqrt(DRAWS));
    assert_spread(square, 2 * DRAWS, 1, 1);
    double bound = 2.0 / 448 * (1e-6 + 1e-4);
    assert_true(stated > 0.97 * bound && stated < 1.10 * bound);
}

/* A fit of one coloured channel: first-order noise, ten times stronger near the line than at the end of the
 * band. */
static void coloured_noise_is_stated(void **state)
{
    (void)state;
    enum { DRAWS = 300 };
    static wave w;
    double square = 0, naive = 0;
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    for (int k = 0; k < DRAWS; k++) {
        an_sinefit fit;
        an_sinefit_choice choice;
        double z[2], memory = 0;
        wave_steady(&w, 640, 5.0, 10, 1e-5, 3e5 + 4e4 * I);
        for (int i = 0; i < w.n; i++)
            w.f[i] += memory = 0.9 * memory + gsl_ran_gaussian(rng, 0.01);
        wave_noise(&w, rng, 1e-10, 0);
        an_sinefit_choice_init(&choice);
        choice.frequency_Hz = 5.0;
        an_waveform view = wave_view(&w);
        assert_int_equal(an_sinefit_run(&view, &choice, &fit, NULL, NULL), AN_OK);
        wave_errors(&fit, w.stiffness, z);
        double short_of = fit.level[AN_FORCE] / fit.deviation[AN_FORCE];
        square += z[0] * z[0] + z[1] * z[1];
        naive += (z[0] * z[0] + z[1] * z[1]) * short_of * short_of;
    }
    gsl_rng_free(rng);
    /* The level is known from some 30 degrees of freedom, and the spectrum slopes over the band: 0.8 .. 1.25.
     */
    assert_spread(square, 2 * DRAWS, 0.8, 1.25);
    assert_true(sqrt(naive / (2 * DRAWS)) >
                1.5); /* the overall deviation alone would have stated too little */
}

/* A strong line far from ours belongs to the residual's deviation, not to the noise near the line. */
static void far_line_does_not_count(void **state)
{
    (void)state;
    static wave w;
    an_sinefit fit;
    an_sinefit_choice choice;
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    wave_steady(&w, 640, 1.0, 10, 1e-5, 3e5 + 4e4 * I);
    wave_noise(&w, rng, 1e-9, 1e-3);
    for (int i = 0; i < w.n; i++)
        w.f[i] += 0.1 * sin(2 * M_PI * 23.3 * w.t[i]);
    gsl_rng_free(rng);
    an_sinefit_choice_init(&choice);
    choice.frequency_Hz = 1.0;
    an_waveform view = wave_view(&w);
    assert_int_equal(an_sinefit_run(&view, &choice, &fit, NULL, NULL), AN_OK);
    assert_true(fit.deviation[AN_FORCE] > 0.05);
    assert_true(fit.level[AN_FORCE] < 5e-3);
    assert_true(cabs(fit.stiffness - w.stiffness) <
                5 * sqrt(fit.stiffness_noise[0] + fit.stiffness_noise[2]));
}

/* Rounding of a noise-free force whose samples fall on the same phases in every cycle: errors repeat, so N
 * samples are worth only those of one cycle. Amplitudes from 3 to 40 steps. */
static void recurring_rounding_is_stated(void **state)
{
    (void)state;
    enum { DRAWS = 200 };
    static wave w;
    int beyond = 0;
    double square = 0;
    for (int k = 0; k < DRAWS; k++) {
        an_sinefit fit;
        an_sinefit_choice choice;
        double z[2], q = 3.0265 / (3 + 0.185 * k);
        wave_steady(&w, 640, 5.0, 10, 1e-5, 3e5 + 4e4 * I);
        for (int i = 0; i < w.n; i++)
            w.f[i] = q * round(w.f[i] / q);
        an_sinefit_choice_init(&choice);
        choice.frequency_Hz = 5.0;
        an_waveform view = wave_view(&w);
        view.resolution[AN_FORCE] = q;
        assert_int_equal(an_sinefit_run(&view, &choice, &fit, NULL, NULL), AN_OK);
        wave_errors(&fit, w.stiffness, z);
        square += z[0] * z[0] + z[1] * z[1];
        beyond += fabs(z[0]) > 4 || fabs(z[1]) > 4;
    }
    assert_true(beyond <= 2); /* 99 % within 4 */
    assert_spread(square, 2 * DRAWS, 0.5, 1.4);
}

static void residual_line(void **state)
{
    (void)state;
    static wave w;
    wave_steady(&w, 1000, 3.0, 30, 0.5, 1);
    for (int i = 0; i < w.n; i++)
        w.x[i] -= 1; /* its offset */
    assert_relative(cabs(an_sinefit_line(w.n, w.t, w.x, NULL, 3.0)), 0.5, 1e-9);
}

static void refusals(void **state)
{
    (void)state;
    static wave w;
    an_sinefit fit;
    an_sinefit_choice choice;
    an_error err;
    an_sinefit_choice_init(&choice);
    wave_steady(&w, 200, 1.0, 5, 1, 1);
    an_waveform view = wave_view(&w);
    assert_int_equal(an_sinefit_run(&view, &choice, &fit, NULL, &err), AN_E_VALUE); /* no frequency */
    choice.frequency_Hz = 1;
    view.n = 8;
    assert_int_equal(an_sinefit_run(&view, &choice, &fit, NULL, &err),
                     AN_E_VALUE); /* fewer samples than unknowns */
    view.n = 200;
    for (int i = 0; i < w.n; i++)
        w.x[i] = 0;
    choice.frequency_known = 1;
    assert_int_equal(an_sinefit_run(&view, &choice, &fit, NULL, &err),
                     AN_E_SCIENCE); /* the displacement stands still */
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(exact_without_noise),
        cmocka_unit_test(white_noise_at_the_bound),
        cmocka_unit_test(coloured_noise_is_stated),
        cmocka_unit_test(far_line_does_not_count),
        cmocka_unit_test(recurring_rounding_is_stated),
        cmocka_unit_test(residual_line),
        cmocka_unit_test(refusals),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
