/* Superposition and spectra of published materials, responses made from their published Prony series.
 *
 * Polyvinyl butyral interlayer: Prony series and WLF constants read in a public input of a laminated-glass
 * analysis; the series is attributed, from memory, to Van Duser, Jagota & Bennison 1999, J. Eng. Mech. 125,
 * 435. Its times lie two to three decades apart, so that the curve has ripples: shifting must not lock on
 * them. Low-density polyethylene melt: Laun 1978, Rheol. Acta 17, 1 (from memory). PMMA: Park & Schapery
 * 1999, Int. J. Solids Struct. 36, 1653 (from memory). Moduli at given times and frequencies are exact for
 * those series. */
#include "anelast/spectrum.h"
#include "anelast/superpose.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>
#include <cmocka.h>

#include "check.h"
#include "synthetic.h"

static double pvb_weight[] = {.1606,   .07877,   .2912,    .071155,  .2688,   .089568,
                              .030183, .0076056, .0009634, .0004059, .0006143};
static double pvb_time[] = {3.2557e-11, 4.9491e-9, 7.2427e-8, 9.8635e-6, 2.8059e-3, .16441,
                            2.2648,     35.364,    9367.5,    6.4141e5,  4.1347e7};

static double pvb_wlf(double temp_degc)
{
    return -20.7 * (temp_degc - 20) / (91.1 + temp_degc - 20);
}

static void pvb_shifts_under_ripple(void **state)
{
    (void)state;
    enum { modes = sizeof pvb_time / sizeof *pvb_time };
    double moduli[modes], sum = 0;
    for (int i = 0; i < modes; i++) {
        moduli[i] = 471e6 * pvb_weight[i];
        sum += pvb_weight[i];
    }
    an_maxwell model = {modes, pvb_time, moduli, 471e6 * (1 - sum)};
    static synthetic s;
    memset(&s, 0, sizeof s);
    s.seed = 17;
    for (int k = 0; k <= 10; k++) {
        double temp_degc = 5.0 * k;
        synthetic_sweep sweep = {273.15 + temp_degc, pvb_wlf(temp_degc), 1, 0.1, 100, 10, 0.002};
        synthetic_add(&s, &model, &sweep);
    }
    an_superpose_input input = synthetic_input(&s);
    an_superpose_options options;
    an_superpose_defaults(&options);
    options.vertical_chosen = 0;
    options.reference_temperature_K = 293.15;
    an_superposition r;
    an_superposition_init(&r);
    assert_int_equal(an_superpose(&input, &options, &r, NULL), AN_OK);
    double rms, spread;
    synthetic_judge(&s, &r, &rms, &spread);
    assert_true(rms < 0.01); /* decades; 0.2 % noise, ten frequencies over three decades */
    assert_true(spread > 0.3 &&
                spread < 2.0); /* one run, correlated errors: two or three independent values */
    assert_int_equal(r.simplicity, AN_SIMPLE);
    /* Published shift at 0 degC: 5.822785 (exact from the constants). */
    size_t n = 2 * r.n_isotherm;
    assert_close(r.log10_aT[0], 5.822785, 4 * sqrt(r.noise_covariance[0]));
    assert_close(r.log10_aT[10], -5.127993, 4 * sqrt(r.noise_covariance[10 * n + 10]));
    an_superposition_clear(&r);
}

/* Observations of a model at one temperature with relative noise. Caller frees. */
static an_observation *observe(const an_maxwell *model, const double range[2], size_t n, double noise)
{
    an_observation *o = calloc(2 * n, sizeof *o);
    synthetic s = {.seed = 5};
    for (size_t i = 0; i < n; i++) {
        double omega = range[0] * pow(range[1] / range[0], (double)i / (double)(n - 1));
        double storage = an_maxwell_storage(model, omega), loss = an_maxwell_loss(model, omega);
        double u = noise * hypot(storage, loss);
        o[2 * i] = (an_observation){.kind = AN_RESPONSE_STORAGE, .at = omega, .u = u};
        o[2 * i + 1] = (an_observation){.kind = AN_RESPONSE_LOSS, .at = omega, .u = u};
        o[2 * i].value = storage + u * synthetic_normal(&s);
        o[2 * i + 1].value = loss + u * synthetic_normal(&s);
    }
    return o;
}

static void polyethylene_melt_is_a_liquid(void **state)
{
    (void)state;
    double times[] = {1e-4, 1e-3, 1e-2, 1e-1, 1, 10, 100, 1000};
    double moduli[] = {1.29e5, 9.48e4, 5.86e4, 2.67e4, 9.80e3, 1.89e3, 1.80e2, 1.00};
    an_maxwell melt = {8, times, moduli, 0};
    double range[2] = {1e-4, 1e3};
    an_observation *o = observe(&melt, range, 60, 0.005);
    an_spectrum spectrum;
    an_spectrum_init(&spectrum);
    assert_int_equal(an_spectrum_dense(o, 120, NULL, &spectrum, NULL), AN_OK);
    assert_int_equal(spectrum.end_state, AN_LIQUID);
    assert_true(spectrum.model.equilibrium_Pa == 0);
    /* Exact: zero-shear viscosity 51063.7 Pa s; half a per cent noise, some thirty points in the terminal
     * zone. */
    assert_relative(an_maxwell_viscosity(&spectrum.model), 51063.7, 0.02);
    /* Laun's list at 0.1 rad/s: 1223.9767 and 2269.4721 Pa; twice the noise of one point, which is relative
     * to |E*|. */
    assert_close(an_maxwell_storage(&spectrum.model, 0.1), 1223.9767, 0.01 * 2578);
    assert_close(an_maxwell_loss(&spectrum.model, 0.1), 2269.4721, 0.01 * 2578);
    an_spectrum_clear(&spectrum);
    free(o);
}

static void pmma_few_modes(void **state)
{
    (void)state;
    double times[11],
        moduli[] = {194e6, 283e6, 554e6, 602e6, 388e6, 156e6, 41e6, 13.8e6, 3.68e6, 0.79e6, 0.96e6};
    for (int k = -2; k <= 8; k++)
        times[k + 2] = 2 * pow(10, k);
    an_maxwell pmma = {11, times, moduli, 2.24e6};
    double range[2] = {1e-10, 1e3};
    an_observation *o = observe(&pmma, range, 80, 0.002);
    an_spectrum spectrum;
    an_spectrum_init(&spectrum);
    assert_int_equal(an_spectrum_dense(o, 160, NULL, &spectrum, NULL), AN_OK);
    assert_int_equal(spectrum.end_state, AN_SOLID);
    an_prony prony;
    an_prony_init(&prony);
    assert_int_equal(an_prony_fit(&spectrum.model, spectrum.omega_range, NULL, &prony, NULL), AN_OK);
    assert_true(prony.model.n_mode <= 16); /* the series itself has eleven */
    assert_true(prony.worst_error <= 0.005);
    /* Exact from the series: E(t) at 1, 1e2, 1e4, 1e6, 1e8 s, MPa. */
    static const double at[] = {1, 1e2, 1e4, 1e6, 1e8},
                        exact[] = {1515.0197, 450.04036, 46.697046, 6.2716997, 2.8275924};
    for (int i = 0; i < 5; i++)
        assert_relative(an_maxwell_relaxation(&prony.model, at[i]), 1e6 * exact[i], 0.01);
    assert_int_equal(an_prony_uncertainty(o, 160, &prony, NULL), AN_OK);
    for (size_t i = 0; i <= prony.model.n_mode; i++)
        assert_true(prony.u_modulus_Pa[i] > 0);
    an_prony_clear(&prony);
    an_spectrum_clear(&spectrum);
    free(o);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(pvb_shifts_under_ripple),
        cmocka_unit_test(polyethylene_melt_is_a_liquid),
        cmocka_unit_test(pmma_few_modes),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
