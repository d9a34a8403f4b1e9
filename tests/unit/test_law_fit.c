/* Laws fitted to made shift factors with known truth: constants, covariance, choice, refusals. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>

#include "anelast/law_fit.h"
#include "check.h"

enum { N = 13 };

/* Shifts every 5 K with correlated noise: each step between neighbours scatters by u, as shifts that were
 * joined pairwise do, counted from the reference. */
typedef struct made {
    double temperature[N], shift[N], covariance[N * N];
    an_law_data data;
} made;

static void make(made *m, const an_law *truth, double from, double u, gsl_rng *random)
{
    double walk[N] = {0};
    size_t reference = 0;
    for (size_t i = 0; i < N; i++) {
        m->temperature[i] = from + 5 * (double)i;
        if (fabs(m->temperature[i] - truth->reference_temperature_K) < 1e-9)
            reference = i;
        if (i > 0)
            walk[i] = walk[i - 1] + (random ? gsl_ran_gaussian(random, u) : 0);
        an_law_log10_aT(truth, m->temperature[i], AN_RANGE_MARK, &m->shift[i], NULL);
    }
    for (size_t i = 0; i < N; i++) {
        m->shift[i] += walk[i] - walk[reference];
        for (size_t j = 0; j < N; j++) {
            double a = (double)i - (double)reference;
            double b = (double)j - (double)reference;
            m->covariance[i * N + j] = a * b > 0 ? u * u * fmin(fabs(a), fabs(b)) : 0;
        }
    }
    m->data = (an_law_data){N, m->temperature, m->shift, m->covariance, 0, truth->reference_temperature_K};
}

static an_law wlf(double reference)
{
    an_law law;
    an_law_init(&law, AN_LAW_WLF, reference, 0);
    law.constant[0] = 16;
    law.constant[1] = 58;
    return law;
}

static an_law crossover(double reference)
{
    an_law law;
    an_law_init(&law, AN_LAW_CROSSOVER, reference, 0);
    law.constant[0] = 15.5;
    law.constant[1] = 52;
    law.constant[2] = 327.5;
    law.constant[3] = 240e3;
    return law;
}

static an_law arrhenius(double reference)
{
    an_law law;
    an_law_init(&law, AN_LAW_ARRHENIUS, reference, 0);
    law.constant[0] = 180e3;
    return law;
}

static void exact_shifts_give_exact_constants(void **state)
{
    (void)state;
    made m;
    an_law_trial trial;
    const an_law truths[] = {wlf(330), arrhenius(330), crossover(350), crossover(310), crossover(325)};
    for (size_t t = 0; t < sizeof truths / sizeof truths[0]; t++) {
        make(&m, &truths[t], 300, 0.002, NULL);
        assert_int_equal(an_law_fit(&m.data, truths[t].kind, 0, &trial, NULL), AN_OK);
        assert_string_equal(trial.reason, "");
        for (size_t i = 0; i < truths[t].n_constant; i++)
            assert_relative(trial.law.constant[i], truths[t].constant[i], 1e-5);
        assert_close(trial.chi_square, 0, 1e-8);
    }
}

/* VFT and WLF are one law: same curve, same uncertainty of it. */
static void vft_is_wlf(void **state)
{
    (void)state;
    made m;
    an_law_trial as_wlf, as_vft;
    an_law truth = wlf(330);
    gsl_rng *random = gsl_rng_alloc(gsl_rng_mt19937);
    make(&m, &truth, 300, 0.01, random);
    assert_int_equal(an_law_fit(&m.data, AN_LAW_WLF, 0, &as_wlf, NULL), AN_OK);
    assert_int_equal(an_law_fit(&m.data, AN_LAW_VFT, 0, &as_vft, NULL), AN_OK);
    for (double t = 302; t < 360; t += 7) {
        double a, b;
        assert_int_equal(an_law_log10_aT(&as_wlf.law, t, AN_RANGE_REFUSE, &a, NULL), AN_OK);
        assert_int_equal(an_law_log10_aT(&as_vft.law, t, AN_RANGE_REFUSE, &b, NULL), AN_OK);
        assert_close(a, b, 1e-9);
        assert_relative(an_law_u_log10_aT(&as_wlf.law, t), an_law_u_log10_aT(&as_vft.law, t), 1e-5);
    }
    gsl_rng_free(random);
}

static const an_law_trial *chosen_of(const an_law_trial *trial, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (trial[i].chosen)
            return &trial[i];
    return NULL;
}

/* (estimate - truth)^T covariance^-1 (estimate - truth) for two constants. */
static double distance2(const an_law *law, const an_law *truth)
{
    const double *c = law->covariance;
    double a = law->constant[0] - truth->constant[0];
    double b = law->constant[1] - truth->constant[1];
    return (c[3] * a * a - (c[1] + c[2]) * a * b + c[0] * b * b) / (c[0] * c[3] - c[1] * c[2]);
}

/* 400 noisy sets: the squared distance has mean 2 with two constants (standard error 0.1), the constants' own
 * inflation by chi-square pulls it down a little: 1.6 to 2.3. chi-square has mean 10 on 12 shifts less 2
 * constants. */
static void covariance_is_honest(void **state)
{
    (void)state;
    made m;
    an_law_trial trial;
    an_law truth = wlf(330);
    double sum_distance = 0;
    double sum_chi = 0;
    gsl_rng *random = gsl_rng_alloc(gsl_rng_mt19937);
    for (int i = 0; i < 400; i++) {
        make(&m, &truth, 300, 0.004, random);
        assert_int_equal(an_law_fit(&m.data, AN_LAW_WLF, 0, &trial, NULL), AN_OK);
        sum_distance += distance2(&trial.law, &truth);
        sum_chi += trial.chi_square;
    }
    gsl_rng_free(random);
    assert_close(sum_distance / 400, 1.95, 0.35);
    assert_close(sum_chi / 400, 10, 0.7);
}

/* Shifts as a joint fit hands them out: 2e-4 decades where the material relaxes, ten times worse every 15 K
 * into the glass, and the reference isotherm's own noise shared by all. */
static void make_glassy(made *m, const an_law *truth, double from, gsl_rng *random)
{
    static const double u_warm = 2e-4, u_reference = 0.01;
    make(m, truth, from, 0, NULL);
    double common = gsl_ran_gaussian(random, u_reference);
    for (size_t i = 0; i < N; i++) {
        double below_K = fmax(0, truth->constant[2] - m->temperature[i]);
        double u = u_warm * pow(10, below_K / 15);
        int reference = fabs(m->temperature[i] - truth->reference_temperature_K) < 1e-9;
        for (size_t j = 0; j < N; j++)
            m->covariance[i * N + j] = i == j ? u * u : 0;
        m->shift[i] += reference ? 0 : common + gsl_ran_gaussian(random, u);
    }
    for (size_t i = 0; i < N; i++)
        for (size_t j = 0; j < N; j++) {
            int at_reference = fabs(m->temperature[i] - truth->reference_temperature_K) < 1e-9 ||
                               fabs(m->temperature[j] - truth->reference_temperature_K) < 1e-9;
            m->covariance[i * N + j] =
                at_reference ? 0 : m->covariance[i * N + j] + u_reference * u_reference;
        }
}

/* Chi-square has a bottom in almost every interval of T_x; the right one is found wherever T_x lies. */
static void crossover_is_found_from_a_noisy_glass(void **state)
{
    (void)state;
    gsl_rng *random = gsl_rng_alloc(gsl_rng_mt19937);
    int right = 0, n = 0;
    for (int at = 0; at < 10; at++) {
        for (int i = 0; i < 4; i++, n++) {
            an_law truth = crossover(at % 2 ? 345 : 325);
            truth.constant[2] = 320 + 1.1 * at;
            truth.constant[3] = 390e3;
            made m;
            an_law_trial trial[AN_LAW_TRIALS];
            size_t n_trial;
            make_glassy(&m, &truth, 300, random);
            assert_true(an_law_fit_choose(&m.data, AN_LAW_NONE, trial, &n_trial, NULL) >= 0);
            for (size_t k = 0; k < n_trial; k++)
                right += trial[k].chosen && trial[k].law.kind == AN_LAW_CROSSOVER &&
                         fabs(trial[k].law.constant[2] - truth.constant[2]) < 3;
        }
    }
    assert_in_range(right, n - 1, n);
    gsl_rng_free(random);
}

/* The true kind wins in at least 9 of 10 noisy sets, and the crossover temperature is found within its
 * uncertainty. */
static void the_true_law_is_chosen(void **state)
{
    (void)state;
    const an_law truths[] = {wlf(330), arrhenius(330), crossover(350)};
    gsl_rng *random = gsl_rng_alloc(gsl_rng_mt19937);
    for (size_t t = 0; t < 3; t++) {
        int n_right = 0;
        for (int i = 0; i < 40; i++) {
            made m;
            an_law_trial trial[AN_LAW_TRIALS];
            size_t n;
            make(&m, &truths[t], 300, 0.004, random);
            assert_true(an_law_fit_choose(&m.data, AN_LAW_NONE, trial, &n, NULL) >= 0);
            const an_law_trial *chosen = chosen_of(trial, n);
            assert_non_null(chosen);
            n_right += chosen->law.kind == truths[t].kind;
            if (chosen->law.kind == AN_LAW_CROSSOVER && t == 2)
                assert_close(chosen->law.constant[2], 327.5, 5 * sqrt(chosen->law.covariance[10]) + 0.1);
        }
        if (n_right < 36)
            fprintf(stderr, "%s: right %d of 40\n", an_law_kind_name(truths[t].kind), n_right);
        assert_true(n_right >= 36);
    }
    gsl_rng_free(random);
}

/* Shifts that bend the wrong way follow no physical law: a polynomial is taken, or the choice says that it is
 * poor. */
static void what_follows_no_law_is_not_forced(void **state)
{
    (void)state;
    made m;
    an_law_trial trial[AN_LAW_TRIALS];
    size_t n;
    an_law truth;
    an_error err = {0};
    an_law_init(&truth, AN_LAW_POLYNOMIAL, 330, 3);
    truth.constant[0] = -0.1;
    truth.constant[1] = -1.5e-3;
    truth.constant[2] = -1e-5;
    make(&m, &truth, 300, 0.002, NULL);
    assert_int_equal(an_law_fit_choose(&m.data, AN_LAW_NONE, trial, &n, &err), AN_OK);
    assert_int_equal(chosen_of(trial, n)->law.kind, AN_LAW_POLYNOMIAL);
    assert_int_equal(an_law_fit_choose(&m.data, AN_LAW_WLF, trial, &n, &err), AN_DUBIOUS);
    assert_true(n == 1);
}

/* Noise of the temperatures widens the constants. */
static void temperature_noise_widens(void **state)
{
    (void)state;
    made m;
    an_law_trial sharp, wide;
    an_law truth = wlf(330);
    make(&m, &truth, 300, 0.001, NULL);
    assert_int_equal(an_law_fit(&m.data, AN_LAW_WLF, 0, &sharp, NULL), AN_OK);
    m.data.u_temperature_K = 0.1;
    assert_int_equal(an_law_fit(&m.data, AN_LAW_WLF, 0, &wide, NULL), AN_OK);
    assert_true(wide.law.covariance[0] > 4 * sharp.law.covariance[0]);
    assert_relative(wide.law.constant[0], 16, 1e-4);
}

static void too_little_is_refused(void **state)
{
    (void)state;
    made m;
    an_law_trial trial;
    an_error err = {0};
    an_law truth = wlf(330);
    make(&m, &truth, 300, 0.002, NULL);
    m.data.n_shift = 4;
    double covariance[16] = {0};
    for (size_t i = 0; i < 4; i++)
        covariance[i * 5] = 1e-4;
    m.data.covariance = covariance;
    assert_int_equal(an_law_fit(&m.data, AN_LAW_CROSSOVER, 0, &trial, &err), AN_OK);
    assert_non_null(strstr(trial.reason, "too few"));
    assert_true(isinf(trial.criterion));
    m.temperature[2] = m.temperature[1];
    assert_int_equal(an_law_fit(&m.data, AN_LAW_WLF, 0, &trial, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "shift 3"));
    m.temperature[2] = 310;
    covariance[1] = covariance[4] = 2e-4;
    assert_int_equal(an_law_fit(&m.data, AN_LAW_WLF, 0, &trial, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "not positive definite"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(exact_shifts_give_exact_constants),
        cmocka_unit_test(vft_is_wlf),
        cmocka_unit_test(covariance_is_honest),
        cmocka_unit_test(the_true_law_is_chosen),
        cmocka_unit_test(crossover_is_found_from_a_noisy_glass),
        cmocka_unit_test(what_follows_no_law_is_not_forced),
        cmocka_unit_test(temperature_noise_widens),
        cmocka_unit_test(too_little_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
