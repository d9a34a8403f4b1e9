/* Maxwell models: holds and pulls against the Boltzmann integral by quadrature, limits, and faults that must
 * be named. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>

#include "anelast/maxwell.h"
#include "check.h"

static an_maxwell sample(double *time, double *modulus)
{
    const double t[] = {0.03, 0.5, 4, 60};
    const double e[] = {8e6, 5e6, 2e6, 1e6};
    memcpy(time, t, sizeof t);
    memcpy(modulus, e, sizeof e);
    return (an_maxwell){4, time, modulus, 3e5};
}

/* Boltzmann: stress = integral of E(t - u) rate du over the rise, by Simpson's rule on n panels. */
static double boltzmann(const an_maxwell *model, double rate, double rise, double t)
{
    const int n = 20000;
    double end = fmin(rise, t);
    double h = end / n;
    double sum = 0;
    for (int i = 0; i <= n; i++) {
        double weight = i == 0 || i == n ? 1 : i % 2 ? 4 : 2;
        sum += weight * an_maxwell_relaxation(model, t - h * i);
    }
    return rate * sum * h / 3;
}

/* Simpson's error (h/tau)^4/180 with h = 1/20000 of the rise is far below 1e-9. */
static void hold_and_pull_are_the_integral(void **state)
{
    (void)state;
    double time[4], modulus[4];
    an_maxwell model = sample(time, modulus);
    const double at[] = {0.01, 0.05, 0.2, 1, 30, 500};
    for (size_t i = 0; i < sizeof at / sizeof at[0]; i++) {
        assert_relative(an_maxwell_hold(&model, 0.2, 0.05, at[i]), boltzmann(&model, 0.2, 0.05, at[i]), 1e-9);
        assert_relative(an_maxwell_pull(&model, 0.2, fmin(at[i], 1)),
                        boltzmann(&model, 0.2, 1, fmin(at[i], 1)), 1e-9);
    }
}

/* A step is a hold without rise: stress over strain tends to E(t); a slow rise must not overflow exp(t1/tau).
 */
static void hold_has_its_limits(void **state)
{
    (void)state;
    double time[4], modulus[4];
    an_maxwell model = sample(time, modulus);
    assert_relative(an_maxwell_hold(&model, 1e9, 1e-9, 2), an_maxwell_relaxation(&model, 2), 1e-7);
    double slow = an_maxwell_hold(&model, 1e-6, 1e6, 2e6);
    assert_relative(slow, 3e5, 1e-12);
    assert_close(an_maxwell_hold(&model, 1, 0, 2), 0, 0);
}

static void kernels_have_their_limits(void **state)
{
    (void)state;
    assert_close(an_mode_storage(0), 0, 0);
    assert_close(an_mode_storage(1e200), 1, 0);
    assert_close(an_mode_storage(INFINITY), 1, 0);
    assert_close(an_mode_loss(INFINITY), 0, 0);
    assert_relative(an_mode_loss(1e200), 1e-200, 1e-15);
    assert_relative(an_mode_storage(1e-150), 1e-300, 1e-12);
    assert_close(an_mode_storage(1), 0.5, 1e-16);
    assert_close(an_mode_loss(1), 0.5, 1e-16);
}

static void solids_and_liquids_differ(void **state)
{
    (void)state;
    double time[4], modulus[4];
    an_maxwell model = sample(time, modulus);
    assert_close(an_maxwell_viscosity(&model), INFINITY, 0);
    assert_relative(an_maxwell_steady_compliance(&model), 1 / 3e5, 1e-15);
    assert_relative(an_maxwell_instantaneous(&model), 16.3e6, 1e-15);
    model.equilibrium_Pa = 0;
    assert_relative(an_maxwell_viscosity(&model), 8e6 * 0.03 + 5e6 * 0.5 + 2e6 * 4 + 1e6 * 60, 1e-14);
    assert_true(isnan(an_maxwell_loss_factor(&model, 0)));
}

static void every_fault_is_named(void **state)
{
    (void)state;
    double time[4], modulus[4];
    an_maxwell model = sample(time, modulus);
    an_error err = {0};
    assert_int_equal(an_maxwell_check(&model, &err), AN_OK);
    time[1] = 0.03;
    modulus[2] = -1;
    model.equilibrium_Pa = NAN;
    assert_int_equal(an_maxwell_check(&model, &err), AN_E_VALUE);
    assert_int_equal(err.status, AN_E_VALUE);
    assert_non_null(strstr(err.text, "equilibrium modulus nan Pa"));
    assert_non_null(strstr(err.text, "mode 2: relaxation time 0.03 s is not above 0.03 s of mode 1"));
    assert_non_null(strstr(err.text, "mode 3: modulus -1 Pa"));
    assert_int_equal(an_maxwell_check(&model, NULL), AN_E_VALUE);
}

/* More faults than the text holds: it is cut, marked as cut, and stays within its bounds. */
static void many_faults_are_cut(void **state)
{
    (void)state;
    double time[100] = {0}, modulus[100] = {0};
    an_maxwell model = {100, time, modulus, 1};
    an_error err = {0};
    assert_int_equal(an_maxwell_check(&model, &err), AN_E_VALUE);
    assert_int_equal(strlen(err.text), sizeof err.text - 1);
    assert_string_equal(err.text + sizeof err.text - 5, " ...");
}

static void copies_are_deep(void **state)
{
    (void)state;
    double time[4], modulus[4];
    an_maxwell model = sample(time, modulus);
    an_maxwell copy;
    an_maxwell_init(&copy);
    assert_int_equal(an_maxwell_copy(&copy, &model, NULL), AN_OK);
    modulus[0] = 1;
    assert_close(copy.modulus_Pa[0], 8e6, 0);
    assert_close(copy.equilibrium_Pa, 3e5, 0);
    an_maxwell_clear(&copy);
    assert_null(copy.time_s);
    assert_int_equal(copy.n_mode, 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(hold_and_pull_are_the_integral),
        cmocka_unit_test(hold_has_its_limits),
        cmocka_unit_test(kernels_have_their_limits),
        cmocka_unit_test(solids_and_liquids_differ),
        cmocka_unit_test(every_fault_is_named),
        cmocka_unit_test(many_faults_are_cut),
        cmocka_unit_test(copies_are_deep),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
