/* Interconversion beyond the published series: liquids, crowded and weak modes, E <-> G, refusals. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>

#include "anelast/interconvert.h"
#include "check.h"

/* A reproducible spread in [0, 1): multiplicative congruence of Park and Miller (Comm. ACM 31 (1988) 1192).
 */
static double spread(uint64_t *seed)
{
    *seed = *seed * 48271 % 2147483647;
    return (double)*seed / 2147483647;
}

static void fill(an_maxwell *model, size_t n, double per_decade, uint64_t seed)
{
    an_maxwell_init(model);
    assert_int_equal(an_maxwell_alloc(model, n, NULL), AN_OK);
    for (size_t i = 0; i < n; i++) {
        model->time_s[i] = 1e-12 * pow(10, ((double)i + 0.5 * spread(&seed)) / per_decade);
        model->modulus_Pa[i] = 1e6 * pow(10, 2 * spread(&seed));
    }
}

static void there_and_back(an_maxwell *model)
{
    an_retardation spectrum;
    an_maxwell back;
    an_retardation_init(&spectrum);
    an_maxwell_init(&back);
    assert_int_equal(an_maxwell_to_retardation(model, &spectrum, NULL), AN_OK);
    assert_int_equal(spectrum.n_mode, model->n_mode - (model->equilibrium_Pa > 0 ? 0 : 1));
    for (size_t j = 0; j < spectrum.n_mode; j++) {
        assert_true(spectrum.time_s[j] > model->time_s[j]);
        assert_true(j + 1 >= model->n_mode || spectrum.time_s[j] < model->time_s[j + 1]);
        assert_true(spectrum.compliance_per_Pa[j] > 0);
    }
    assert_int_equal(an_retardation_to_maxwell(&spectrum, &back, NULL), AN_OK);
    assert_int_equal(back.n_mode, model->n_mode);
    for (size_t i = 0; i < back.n_mode; i++) {
        assert_relative(back.time_s[i], model->time_s[i], 1e-8);
        assert_relative(back.modulus_Pa[i], model->modulus_Pa[i], 1e-8);
    }
    assert_relative(back.equilibrium_Pa, model->equilibrium_Pa, 1e-8);
    an_retardation_clear(&spectrum);
    an_maxwell_clear(&back);
}

/* Times interlace and the way back is the identity, for solids and liquids, sparse to 5 modes a decade
 * [GR68]. */
static void spectra_survive_the_round_trip(void **state)
{
    (void)state;
    for (uint64_t seed = 1; seed <= 20; seed++) {
        an_maxwell model;
        fill(&model, 20 + 4 * seed, 0.5 + 0.25 * (double)(seed % 19), seed);
        there_and_back(&model);
        model.equilibrium_Pa = 1e5;
        there_and_back(&model);
        an_maxwell_clear(&model);
    }
}

/* One Maxwell element: no retardation at all, D(t) = 1/E + t/eta. A standard linear solid: lambda = tau (E_e
 * + E_1)/E_e, D_1 = E_1/(E_e (E_e + E_1)). Both in any textbook, [FE80, ch. 3]. */
static void the_simplest_models_are_exact(void **state)
{
    (void)state;
    double time = 2, modulus = 3e6;
    an_maxwell model = {1, &time, &modulus, 0};
    an_retardation spectrum;
    an_retardation_init(&spectrum);
    assert_int_equal(an_maxwell_to_retardation(&model, &spectrum, NULL), AN_OK);
    assert_int_equal(spectrum.n_mode, 0);
    assert_relative(an_retardation_creep(&spectrum, 5), 1 / 3e6 + 5 / 6e6, 1e-14);
    model.equilibrium_Pa = 1e6;
    assert_int_equal(an_maxwell_to_retardation(&model, &spectrum, NULL), AN_OK);
    assert_int_equal(spectrum.n_mode, 1);
    assert_relative(spectrum.time_s[0], 8, 1e-14);
    assert_relative(spectrum.compliance_per_Pa[0], 3.0 / 4 * 1e-6, 1e-14);
    an_retardation_clear(&spectrum);
}

static void a_spring_alone_stays_one(void **state)
{
    (void)state;
    an_maxwell model, back;
    an_retardation spectrum;
    an_maxwell_init(&model);
    an_maxwell_init(&back);
    an_retardation_init(&spectrum);
    model.equilibrium_Pa = 4e9;
    assert_int_equal(an_maxwell_to_retardation(&model, &spectrum, NULL), AN_OK);
    assert_relative(an_retardation_creep(&spectrum, 1e3), 1 / 4e9, 1e-15);
    assert_int_equal(an_retardation_to_maxwell(&spectrum, &back, NULL), AN_OK);
    assert_int_equal(back.n_mode, 0);
    assert_relative(back.equilibrium_Pa, 4e9, 1e-15);
}

/* Modes without strength carry no retardation time. */
static void empty_modes_are_left_out(void **state)
{
    (void)state;
    double time[] = {1, 10, 100};
    double modulus[] = {1e6, 0, 2e6};
    an_maxwell model = {3, time, modulus, 5e5};
    an_retardation spectrum;
    an_retardation_init(&spectrum);
    assert_int_equal(an_maxwell_to_retardation(&model, &spectrum, NULL), AN_OK);
    assert_int_equal(spectrum.n_mode, 2);
    double complex product = an_maxwell_complex(&model, 0.03) * an_retardation_complex(&spectrum, 0.03);
    assert_close(creal(product), 1, 1e-13);
    assert_close(cimag(product), 0, 1e-13);
    an_retardation_clear(&spectrum);
}

/* A glass of 3 GPa that softens to 3 MPa, under a constant bulk modulus: at every frequency the whole
 * spectrum must be what the closed form makes of the complex modulus, and the Poisson ratio must run from
 * that of the glass to nearly 1/2. */
static void shear_and_tension_agree(void **state)
{
    (void)state;
    an_maxwell model, shear, back;
    fill(&model, 30, 2, 5);
    an_maxwell_init(&shear);
    an_maxwell_init(&back);
    model.equilibrium_Pa = 3e6;
    an_elastic_link link = {AN_ELASTIC_BULK, 0, 2 * an_maxwell_instantaneous(&model)};
    assert_int_equal(an_maxwell_shear_from_tension(&model, &link, &shear, NULL), AN_OK);
    assert_int_equal(an_maxwell_tension_from_shear(&shear, &link, &back, NULL), AN_OK);
    for (double omega = 1e-6; omega < 1e14; omega *= 7) {
        double complex tension = an_maxwell_complex(&model, omega);
        double complex expected = an_shear_from_tension(tension, &link);
        double complex got = an_maxwell_complex(&shear, omega);
        assert_close(cabs(got - expected), 0, 1e-11 * cabs(expected));
        assert_close(cabs(an_tension_from_shear(expected, &link) - tension), 0, 1e-13 * cabs(tension));
        assert_close(cabs(an_maxwell_complex(&back, omega) - tension), 0, 1e-11 * cabs(tension));
    }
    double glassy = an_maxwell_instantaneous(&model) / (2 * an_maxwell_instantaneous(&shear)) - 1;
    assert_relative(glassy, 0.5 - 1.0 / 12, 1e-10); /* nu = 1/2 - E/(6 B) */
    an_maxwell_clear(&model);
    an_maxwell_clear(&shear);
    an_maxwell_clear(&back);
}

static void a_poisson_ratio_scales(void **state)
{
    (void)state;
    double time = 1, modulus = 2.8e6;
    an_maxwell model = {1, &time, &modulus, 1.4e6};
    an_maxwell shear;
    an_maxwell_init(&shear);
    an_elastic_link link = {AN_ELASTIC_POISSON, 0.4, 0};
    assert_int_equal(an_maxwell_shear_from_tension(&model, &link, &shear, NULL), AN_OK);
    assert_relative(shear.modulus_Pa[0], 1e6, 1e-15);
    assert_relative(shear.equilibrium_Pa, 5e5, 1e-15);
    an_maxwell_clear(&shear);
}

static void what_cannot_be_is_refused(void **state)
{
    (void)state;
    double time = 1, modulus = 9e9;
    an_maxwell model = {1, &time, &modulus, 0};
    an_maxwell shear;
    an_error err = {0};
    an_maxwell_init(&shear);
    an_elastic_link link = {AN_ELASTIC_BULK, 0, 1e9};
    assert_int_equal(an_maxwell_shear_from_tension(&model, &link, &shear, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "nine times the bulk modulus"));
    link = (an_elastic_link){AN_ELASTIC_POISSON, 0.51, 0};
    assert_int_equal(an_maxwell_shear_from_tension(&model, &link, &shear, &err), AN_E_VALUE);
    modulus = -1;
    an_retardation spectrum;
    an_retardation_init(&spectrum);
    assert_int_equal(an_maxwell_to_retardation(&model, &spectrum, &err), AN_E_VALUE);
    assert_int_equal(spectrum.n_mode, 0);
    assert_int_equal(an_retardation_to_maxwell(&spectrum, &shear, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "instantaneous compliance 0"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(spectra_survive_the_round_trip), cmocka_unit_test(the_simplest_models_are_exact),
        cmocka_unit_test(a_spring_alone_stays_one),       cmocka_unit_test(empty_modes_are_left_out),
        cmocka_unit_test(shear_and_tension_agree),        cmocka_unit_test(a_poisson_ratio_scales),
        cmocka_unit_test(what_cannot_be_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
