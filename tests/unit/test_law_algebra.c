/* The algebra of the shift laws: derivatives against differences, change of reference, uncertainty, ranges,
 * faults. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>

#include "anelast/law.h"
#include "check.h"

/* One law of each kind with plausible constants and a full covariance (positive definite: diagonal
 * dominates). */
static an_law sample(an_law_kind kind)
{
    static const double constant[][4] = {
        [AN_LAW_WLF] = {12, 70},
        [AN_LAW_ARRHENIUS] = {250e3},
        [AN_LAW_VFT] = {2000, 230},
        [AN_LAW_CROSSOVER] = {15, 55, 330, 400e3},
        [AN_LAW_POLYNOMIAL] = {-0.15, 1.2e-3, -7e-6},
    };
    an_law law;
    an_law_init(&law, kind, 340, 3);
    size_t n = law.n_constant;
    for (size_t i = 0; i < n; i++)
        law.constant[i] = constant[kind][i];
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            law.covariance[i * n + j] = 1e-4 * law.constant[i] * law.constant[j] * (i == j ? 1 : -0.2);
    return law;
}

static const an_law_kind kinds[] = {AN_LAW_WLF, AN_LAW_ARRHENIUS, AN_LAW_VFT, AN_LAW_CROSSOVER,
                                    AN_LAW_POLYNOMIAL};
enum { N_KINDS = sizeof kinds / sizeof kinds[0] };
static const double temperatures[] = {305, 325, 340, 352, 390};
enum { N_TEMPERATURES = sizeof temperatures / sizeof temperatures[0] };

static double at(const an_law *law, double temperature)
{
    double value = NAN;
    an_error err = {0};
    if (an_law_log10_aT(law, temperature, AN_RANGE_REFUSE, &value, &err) < 0)
        fprintf(stderr, "%s\n", err.text);
    return value;
}

/* Central differences of step h are good to h^2; 1e-7 relative leaves room for rounding. */
static void slope_is_the_difference(void **state)
{
    (void)state;
    for (size_t k = 0; k < N_KINDS; k++) {
        an_law law = sample(kinds[k]);
        for (size_t i = 0; i < N_TEMPERATURES; i++) {
            double t = temperatures[i];
            double h = 1e-3;
            assert_relative(an_law_slope(&law, t), (at(&law, t + h) - at(&law, t - h)) / (2 * h), 1e-7);
        }
    }
}

static void gradient_is_the_difference(void **state)
{
    (void)state;
    for (size_t k = 0; k < N_KINDS; k++) {
        an_law law = sample(kinds[k]);
        for (size_t i = 0; i < N_TEMPERATURES; i++) {
            double gradient[AN_LAW_MAX];
            an_law_gradient(&law, temperatures[i], gradient);
            for (size_t j = 0; j < law.n_constant; j++) {
                an_law more = law, less = law;
                double h = 1e-5 * fabs(law.constant[j]);
                more.constant[j] += h;
                less.constant[j] -= h;
                double expected = (at(&more, temperatures[i]) - at(&less, temperatures[i])) / (2 * h);
                assert_close(gradient[j], expected, 1e-7 / fabs(law.constant[j]) + 1e-6 * fabs(expected));
            }
        }
    }
}

/* log a'(T) = log a(T) - log a(T0'), and its variance from the gradients' difference under the old
 * covariance. */
static void moving_the_reference_changes_nothing_else(void **state)
{
    (void)state;
    const double references[] = {310, 350, 400};
    for (size_t k = 0; k < N_KINDS; k++) {
        an_law law = sample(kinds[k]);
        size_t n = law.n_constant;
        for (size_t r = 0; r < 3; r++) {
            an_law moved;
            assert_int_equal(an_law_change_reference(&law, references[r], &moved, NULL), AN_OK);
            double there[AN_LAW_MAX], here[AN_LAW_MAX];
            an_law_gradient(&law, references[r], there);
            for (size_t i = 0; i < N_TEMPERATURES; i++) {
                double t = temperatures[i];
                assert_close(at(&moved, t), at(&law, t) - at(&law, references[r]), 1e-11);
                an_law_gradient(&law, t, here);
                double variance = 0;
                for (size_t a = 0; a < n; a++)
                    for (size_t b = 0; b < n; b++)
                        variance += (here[a] - there[a]) * law.covariance[a * n + b] * (here[b] - there[b]);
                assert_close(an_law_u_log10_aT(&moved, t), sqrt(variance), 1e-9);
            }
        }
    }
}

static void moving_there_and_back_is_the_identity(void **state)
{
    (void)state;
    for (size_t k = 0; k < N_KINDS; k++) {
        an_law law = sample(kinds[k]);
        an_law back;
        assert_int_equal(an_law_change_reference(&law, 362.5, &back, NULL), AN_OK);
        assert_int_equal(an_law_change_reference(&back, 340, &back, NULL), AN_OK);
        for (size_t i = 0; i < law.n_constant; i++)
            assert_relative(back.constant[i], law.constant[i], 1e-12);
        for (size_t i = 0; i < law.n_constant * law.n_constant; i++)
            assert_relative(back.covariance[i], law.covariance[i], 1e-9);
    }
}

/* The crossover is continuous at T_x, WLF above and Arrhenius below. */
static void crossover_joins(void **state)
{
    (void)state;
    an_law law = sample(AN_LAW_CROSSOVER);
    double c1, c2;
    assert_close(at(&law, 330 + 1e-9), at(&law, 330 - 1e-9), 1e-8);
    assert_relative(an_law_activation_energy(&law, 310), 400e3, 1e-12);
    assert_relative(an_law_activation_energy(&law, 325), 400e3, 1e-12);
    assert_int_equal(an_law_wlf_at(&law, 340, &c1, &c2, NULL), AN_OK);
    assert_relative(c2, 65, 1e-14);
    assert_relative(c1, 15.0 * 55 / 65, 1e-14);
    assert_close(at(&law, 360), -c1 * 20 / (c2 + 20), 1e-12);
    assert_int_equal(an_law_wlf_at(&law, 275, &c1, &c2, NULL), AN_E_SCIENCE);
}

static void a_range_is_kept(void **state)
{
    (void)state;
    an_law law = sample(AN_LAW_WLF);
    law.valid_from_K = 320;
    law.valid_to_K = 380;
    double value = 77;
    an_error err = {0};
    assert_int_equal(an_law_log10_aT(&law, 390, AN_RANGE_REFUSE, &value, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "outside 320 .. 380 K"));
    assert_close(value, 77, 0);
    assert_int_equal(an_law_log10_aT(&law, 390, AN_RANGE_MARK, &value, &err), AN_DUBIOUS);
    assert_close(value, -12.0 * 50 / 120, 1e-12);
    assert_int_equal(an_law_log10_aT(&law, 380, AN_RANGE_REFUSE, &value, &err), AN_OK);
    assert_int_equal(an_law_log10_aT(&law, 265, AN_RANGE_MARK, &value, &err), AN_E_SCIENCE);
    assert_int_equal(an_law_log10_aT(&law, NAN, AN_RANGE_MARK, &value, &err), AN_E_VALUE);
}

static void faults_are_named(void **state)
{
    (void)state;
    an_error err = {0};
    an_law law = sample(AN_LAW_WLF);
    assert_int_equal(an_law_check(&law, &err), AN_OK);
    law.constant[1] = -3;
    assert_int_equal(an_law_check(&law, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "c2 = -3 K"));
    law = sample(AN_LAW_VFT);
    law.constant[1] = 345;
    assert_int_equal(an_law_check(&law, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "T_inf = 345 K"));
    law = sample(AN_LAW_ARRHENIUS);
    law.constant[0] = NAN;
    assert_int_equal(an_law_check(&law, &err), AN_E_VALUE);
    an_law_init(&law, AN_LAW_NONE, 300, 0);
    assert_int_equal(an_law_check(&law, &err), AN_E_VALUE);
}

static void names_go_there_and_back(void **state)
{
    (void)state;
    an_law_kind kind;
    for (size_t k = 0; k < N_KINDS; k++) {
        assert_true(an_law_kind_from_name(an_law_kind_name(kinds[k]), &kind));
        assert_int_equal(kind, kinds[k]);
    }
    assert_false(an_law_kind_from_name("wlf2", &kind));
    assert_string_equal(an_law_constant_unit(AN_LAW_CROSSOVER, 3), "J/mol");
    assert_string_equal(an_law_constant_name(AN_LAW_WLF, 2), "");
    assert_string_equal(an_law_constant_name(AN_LAW_WLF, 99), "");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(slope_is_the_difference),
        cmocka_unit_test(gradient_is_the_difference),
        cmocka_unit_test(moving_the_reference_changes_nothing_else),
        cmocka_unit_test(moving_there_and_back_is_the_identity),
        cmocka_unit_test(crossover_joins),
        cmocka_unit_test(a_range_is_kept),
        cmocka_unit_test(faults_are_named),
        cmocka_unit_test(names_go_there_and_back),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
