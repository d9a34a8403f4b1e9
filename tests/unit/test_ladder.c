/* The apparatus ladder: on and off again, magnitudes by arithmetic, and the budget that hangs on it. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>
#include <string.h>

#include "anelast/budget.h"
#include "check.h"

static an_apparatus bench(an_force_at where)
{
    an_apparatus a;
    an_apparatus_init(&a);
    a.force_at = where;
    a.force.gain.value = 1.02;
    a.displacement.gain.value = 0.99;
    a.force.delay.value = 2e-5;
    a.displacement.delay.value = -1e-5;
    a.moving_mass.value = 0.15;
    a.shaft_stiffness.value = 350;
    a.shaft_damping.value = 0.8;
    a.transducer_stiffness.value = 2e7;
    a.fixture_mass.value = 0.04;
    a.n_compliance = 1;
    a.compliance[0] = (an_compliance_row){NAN, NAN, {1.8e-7, 1.8e-8}, 0.03};
    return a;
}

static void on_and_off(void **state)
{
    (void)state;
    for (int where = 0; where < 2; where++) {
        an_apparatus a = bench((an_force_at)where);
        for (double f = 0.01; f < 300; f *= 3.3) {
            an_ladder ladder;
            an_rungs rungs;
            double complex k = 4e5 + 6e4 * I;
            an_ladder_set(&ladder, &a, f, 300);
            double complex back = an_ladder_peel(&ladder, an_ladder_build(&ladder, k), &rungs);
            assert_close(cabs(back - k), 0, 1e-10 * cabs(k));
            assert_close(cabs(rungs.series - back), 0, 0);
        }
    }
}

/* 10 us of skew at 100 Hz are 0.36 degrees; a force sampled late shows a phase too great (common practice,
 * arithmetic). */
static void late_force_adds_phase(void **state)
{
    (void)state;
    an_apparatus a;
    an_ladder ladder;
    an_apparatus_init(&a);
    a.force.delay.value = 1e-5;
    an_ladder_set(&ladder, &a, 100, 300);
    assert_relative(carg(an_ladder_build(&ladder, 1e5)), 0.36 * M_PI / 180, 1e-9);
    assert_close(carg(an_ladder_peel(&ladder, 1e5 * cexp(I * 0.36 * M_PI / 180), NULL)), 0, 1e-12);
}

/* 0.15 kg at 100 Hz is 59 kN/m (arithmetic), which the measured stiffness lacks. */
static void moving_mass(void **state)
{
    (void)state;
    an_apparatus a;
    an_ladder ladder;
    an_apparatus_init(&a);
    a.moving_mass.value = 0.15;
    an_ladder_set(&ladder, &a, 100, 300);
    assert_close(creal(an_ladder_peel(&ladder, 1e5, NULL)) - 1e5, 59218, 1);
}

/* Two equal springs in series: the specimen's stiffness is twice what is measured. */
static void compliance(void **state)
{
    (void)state;
    an_apparatus a;
    an_ladder ladder;
    an_apparatus_init(&a);
    a.n_compliance = 1;
    a.compliance[0] = (an_compliance_row){NAN, NAN, {1e-5, 0}, 0};
    an_ladder_set(&ladder, &a, 1, 300);
    assert_relative(creal(an_ladder_peel(&ladder, 5e4, NULL)), 1e5, 1e-12);
    assert_relative(an_ladder_ratio(&ladder, 1e5), 1, 1e-12);
}

static an_chain chain_of(an_geometry_kind kind)
{
    an_chain c;
    an_specimen specimen;
    an_specimen_init(&specimen);
    an_apparatus_init(&c.apparatus);
    c.geometry = specimen.geometry;
    c.geometry.kind = kind;
    c.geometry.length = (an_measure){0.04, 0};
    c.geometry.width = (an_measure){0.01, 0};
    c.geometry.thickness = (an_measure){0.002, 0};
    c.frequency_Hz = 1;
    c.temperature_K = 300;
    return c;
}

/* Examples of the trade: 1 % of thickness is 3 % of E in bending; 10 % of C where K_s C is 0.1 is 1 %; 0.1 %
 * of gain is 0.1 %. */
static void shares_of_the_budget(void **state)
{
    (void)state;
    double common[AN_SOURCE_COUNT][2];
    an_chain c = chain_of(AN_BENDING_THREE_POINT);
    an_chain_result r;
    c.geometry.thickness.u = 2e-5;
    assert_int_equal(an_chain_run(&c, 1e4 + 1e3 * I, &r, NULL), AN_OK);
    assert_int_equal(an_budget_common(&c, 1e4 + 1e3 * I, common, NULL), AN_OK);
    assert_close(common[AN_SOURCE_THICKNESS][0] / creal(r.modulus), -0.03,
                 2e-5); /* thicker: less E; cubic part 1e-5 */
    assert_close(common[AN_SOURCE_THICKNESS][1] / cimag(r.modulus), -0.03, 2e-5);
    assert_close(common[AN_SOURCE_WIDTH][0], 0, 0);
    c.geometry.thickness.u = 0;
    c.apparatus.force.gain.u = 1e-3;
    c.apparatus.n_compliance = 1;
    c.apparatus.compliance[0] = (an_compliance_row){NAN, NAN, {1e-5, 1e-6}, 0};
    double measured = 1 / (1 / 1e4 + 1e-5); /* K_s = 1e4 N/m, K_s C = 0.1 */
    assert_int_equal(an_chain_run(&c, measured, &r, NULL), AN_OK);
    assert_relative(creal(r.rungs.series), 1e4, 1e-12);
    assert_int_equal(an_budget_common(&c, measured, common, NULL), AN_OK);
    assert_close(common[AN_SOURCE_COMPLIANCE][0] / creal(r.modulus), 0.01, 1e-5);
    assert_close(common[AN_SOURCE_FORCE_GAIN][0] / creal(r.modulus), -0.0011,
                 1e-6); /* amplified by 1 + K_s C */
}

/* A delay turns E': its vector lies along i E*. */
static void delay_is_a_turn(void **state)
{
    (void)state;
    double common[AN_SOURCE_COUNT][2];
    an_chain c = chain_of(AN_TENSION);
    an_chain_result r;
    c.frequency_Hz = 50;
    c.apparatus.force.delay.u = 1e-6;
    assert_int_equal(an_chain_run(&c, 1e5 + 2e4 * I, &r, NULL), AN_OK);
    assert_int_equal(an_budget_common(&c, 1e5 + 2e4 * I, common, NULL), AN_OK);
    double turn = -2 * M_PI * 50 * 1e-6;
    assert_relative(common[AN_SOURCE_DELAY][0], -turn * cimag(r.modulus), 1e-6);
    assert_relative(common[AN_SOURCE_DELAY][1], turn * creal(r.modulus), 1e-6);
}

/* Linear noise and Monte Carlo agree where the way is nearly straight; 4000 draws know a variance to 2.2 %.
 * */
static void noise_two_ways(void **state)
{
    (void)state;
    double in[3] = {4e4, 1e4, 9e4}, linear[3], drawn[3];
    an_chain c = chain_of(AN_TENSION);
    c.apparatus.n_compliance = 1;
    c.apparatus.compliance[0] = (an_compliance_row){NAN, NAN, {1e-6, 0}, 0};
    assert_int_equal(an_budget_noise(&c, 2e5 + 3e4 * I, in, 0, linear, NULL), AN_OK);
    assert_int_equal(an_budget_noise(&c, 2e5 + 3e4 * I, in, 1, drawn, NULL), AN_OK);
    double size = sqrt(linear[0] * linear[2]);
    for (int k = 0; k < 3; k++)
        assert_close(drawn[k], linear[k], 0.1 * size);
    c.apparatus.n_compliance = 0; /* without a frame the factor is real: L / (b t) */
    assert_int_equal(an_budget_noise(&c, 2e5 + 3e4 * I, in, 0, linear, NULL), AN_OK);
    for (int k = 0; k < 3; k++)
        assert_relative(linear[k], in[k] * pow(0.04 / 2e-5, 2), 1e-6);
}

static void assumed_uncertainty(void **state)
{
    (void)state;
    char names[64];
    an_chain c = chain_of(AN_TENSION);
    c.geometry.width.u = c.geometry.thickness.u = NAN;
    assert_int_equal(an_budget_assume(&c.geometry, 0.005, names, sizeof names), 2);
    assert_string_equal(names, "width, thickness");
    assert_relative(c.geometry.width.u, 5e-5, 1e-12);
    assert_close(c.geometry.length.u, 0, 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(on_and_off),           cmocka_unit_test(late_force_adds_phase),
        cmocka_unit_test(moving_mass),          cmocka_unit_test(compliance),
        cmocka_unit_test(shares_of_the_budget), cmocka_unit_test(delay_is_a_turn),
        cmocka_unit_test(noise_two_ways),       cmocka_unit_test(assumed_uncertainty),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
