/* Superposition on made data of known truth. Limits: a shift's error against its own stated uncertainty (a
 * campaign of 25 runs has the ratio's rms within 0.8..1.25: errors within a run are correlated, so a run
 * counts as about two or three independent values), 0.02 decades where the noise is 0.3 %. */
#include "anelast/superpose.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <string.h>
#include <cmocka.h>

#include "check.h"
#include "synthetic.h"

enum { modes = 60 };
static double times[modes], moduli[modes];

/* A glass transition as a skew wedge in the logarithm of time: smooth, over ten decades. */
static an_maxwell smooth_material(void)
{
    for (int i = 0; i < modes; i++) {
        double x = -12 + 18.0 * i / (modes - 1);
        times[i] = pow(10, x);
        moduli[i] = 6e8 * pow(10, -0.3 * sqrt(1 + (x + 3) * (x + 3)) - 0.2 * (x + 3)) * 18.0 / modes;
    }
    return (an_maxwell){modes, times, moduli, 3e6};
}

static double wlf(double temperature_K)
{
    return -11.2 * (temperature_K - 273) / (70 + temperature_K - 273);
}

static void make(synthetic *s, const an_maxwell *model, double noise, int scaled, uint64_t seed)
{
    memset(s, 0, sizeof *s);
    s->seed = seed;
    for (int k = 0; k < 12; k++) {
        double t = 248 + 5.2 * k;
        synthetic_sweep sweep = {t, wlf(t), scaled ? t / 273 : 1, 0.1, 30, 7, noise};
        synthetic_add(s, model, &sweep);
    }
}

static void shifts_and_their_uncertainty(void **state)
{
    (void)state;
    an_maxwell model = smooth_material();
    static synthetic s;
    double sum = 0;
    enum { runs = 25 };
    for (int run = 0; run < runs; run++) {
        make(&s, &model, 0.003, 0, (uint64_t)run + 1);
        an_superpose_input input = synthetic_input(&s);
        an_superpose_options options;
        an_superpose_defaults(&options);
        options.vertical_chosen = 0;
        an_superposition r;
        an_superposition_init(&r);
        assert_int_equal(an_superpose(&input, &options, &r, NULL), AN_OK);
        double rms, spread;
        synthetic_judge(&s, &r, &rms, &spread);
        assert_true(rms < 0.02);
        assert_true(r.reduced_chi_square > 0.6 &&
                    r.reduced_chi_square < 1.5); /* 130 degrees of freedom: 1 +- 0.12 */
        sum += spread * spread;
        an_superposition_clear(&r);
    }
    double spread = sqrt(sum / runs);
    assert_true(spread > 0.8 && spread < 1.25);
}

static void vertical_law_is_found(void **state)
{
    (void)state;
    an_maxwell model = smooth_material();
    static synthetic s;
    for (int scaled = 0; scaled < 2; scaled++) {
        make(&s, &model, 0.002, scaled, 11);
        an_superpose_input input = synthetic_input(&s);
        an_superposition r;
        an_superposition_init(&r);
        assert_int_equal(an_superpose(&input, NULL, &r, NULL), AN_OK);
        assert_int_equal(r.vertical, scaled ? AN_VERTICAL_DENSITY_TEMPERATURE : AN_VERTICAL_NONE);
        assert_int_equal(r.simplicity, AN_SIMPLE);
        an_superposition_clear(&r);
    }
}

static void free_vertical_shifts(void **state)
{
    (void)state;
    an_maxwell model = smooth_material();
    static synthetic s;
    make(&s, &model, 0.002, 1, 5);
    an_superpose_input input = synthetic_input(&s);
    an_superpose_options options;
    an_superpose_defaults(&options);
    options.vertical_chosen = 0;
    options.vertical = AN_VERTICAL_FREE;
    options.reference_temperature_K = 275;
    an_superposition r;
    an_superposition_init(&r);
    assert_int_equal(an_superpose(&input, &options, &r, NULL), AN_OK);
    assert_close(r.reference_temperature_K, 248 + 5.2 * 5, 1e-12);
    size_t n = 2 * r.n_isotherm;
    for (size_t i = 0; i < r.n_isotherm; i++) {
        double b = log10(s.isotherm[i].temperature_K / r.reference_temperature_K);
        double u = sqrt(r.noise_covariance[(r.n_isotherm + i) * n + r.n_isotherm + i]);
        assert_close(r.log10_bT[i], b, 4 * u + 1e-12);
        assert_true(i == r.i_reference ? u == 0 : u > 1e-5 && u < 0.1);
    }
    an_superposition_clear(&r);
}

/* Two processes with shift laws of their own: one WLF, one Arrhenius. No single shift serves. */
static void two_processes_are_complex(void **state)
{
    (void)state;
    double early[] = {1e-4, 1e-3, 1e-2, 1e-1}, late[] = {1, 1e1, 1e2, 1e3}, strength[] = {1e8, 3e8, 3e8, 1e8};
    an_maxwell first = {4, early, strength, 0}, second = {4, late, strength, 5e6};
    static synthetic s, other;
    memset(&s, 0, sizeof s);
    memset(&other, 0, sizeof other);
    s.seed = other.seed = 3;
    for (int k = 0; k < 9; k++) {
        double t = 260 + 6.0 * k, fixed = 9000 * (1 / t - 1 / 284.0) / log(10);
        synthetic_sweep sweep = {t, wlf(t) - wlf(284), 1, 0.1, 30, 8, 0.001};
        synthetic_add(&s, &first, &sweep);
        sweep.log10_aT = fixed;
        synthetic_add(&other, &second, &sweep);
    }
    for (size_t i = 0; i < s.n_point; i++) {
        s.point[i].storage_Pa += other.point[i].storage_Pa;
        s.point[i].loss_Pa += other.point[i].loss_Pa;
        for (int k = 0; k < 3; k++)
            s.point[i].noise[k] += other.point[i].noise[k];
    }
    an_superpose_input input = synthetic_input(&s);
    an_superposition r;
    an_superposition_init(&r);
    assert_int_equal(an_superpose(&input, NULL, &r, NULL), AN_DUBIOUS);
    assert_int_equal(r.simplicity, AN_COMPLEX);
    assert_true(r.reduced_chi_square > 20);
    assert_non_null(strstr(r.reason, "no single shift"));
    an_superposition_clear(&r);
}

static void refuses_what_cannot_be_joined(void **state)
{
    (void)state;
    an_maxwell model = smooth_material();
    static synthetic s;
    memset(&s, 0, sizeof s);
    s.seed = 2;
    synthetic_sweep sweep = {250, wlf(250), 1, 1, 3, 4, 0.002};
    synthetic_add(&s, &model, &sweep);
    sweep.temperature_K = 280;
    sweep.log10_aT = wlf(280);
    synthetic_add(&s, &model, &sweep);
    an_superpose_input input = synthetic_input(&s);
    an_superposition r;
    an_superposition_init(&r);
    an_error err = {0};
    assert_int_equal(an_superpose(&input, NULL, &r, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "-23.1 °C and 6.9 °C"));
    assert_non_null(strstr(err.text, "no overlap"));
    s.point[2].loss_Pa = NAN;
    assert_int_equal(an_superpose(&input, NULL, &r, &err), AN_E_VALUE);
    input.n_isotherm = 1;
    s.point[2].loss_Pa = 1e6;
    assert_int_equal(an_superpose(&input, NULL, &r, &err), AN_E_SCIENCE);
    an_superposition_clear(&r);
}

/* A common scale on all moduli moves no shift; a scale that grows with temperature moves free b by just that.
 */
static void common_sources_pass_through(void **state)
{
    (void)state;
    an_maxwell model = smooth_material();
    static synthetic s;
    static double common[synthetic_most_points][2][2];
    make(&s, &model, 0.002, 0, 9);
    for (size_t k = 0; k < s.n_isotherm; k++)
        for (size_t i = 0; i < s.isotherm[k].n_point; i++) {
            size_t p = s.isotherm[k].first_point + i;
            double growth = 0.01 * (s.isotherm[k].temperature_K - 274) / 10;
            for (int c = 0; c < 2; c++) {
                double value = c ? s.point[p].loss_Pa : s.point[p].storage_Pa;
                common[p][0][c] = 0.01 * value;
                common[p][1][c] = growth * value;
            }
        }
    an_superpose_input input = synthetic_input(&s);
    an_superpose_options options;
    an_superpose_defaults(&options);
    options.vertical_chosen = 0;
    options.vertical = AN_VERTICAL_FREE;
    options.reference_temperature_K = 274;
    input.n_source = 2;
    input.common = &common[0][0][0];
    an_superposition r;
    an_superposition_init(&r);
    assert_int_equal(an_superpose(&input, &options, &r, NULL), AN_OK);
    size_t n = 2 * r.n_isotherm;
    for (size_t i = 0; i < r.n_isotherm; i++) {
        double growth = 0.01 * (s.isotherm[i].temperature_K - 274) / 10 / log(10);
        double u = sqrt(r.common_covariance[(r.n_isotherm + i) * n + r.n_isotherm + i]);
        assert_close(u, fabs(growth), 0.15 * fabs(growth) + 2e-4); /* linear propagation through noisy data */
    }
    an_superposition_clear(&r);
}

/* [GE11]: two straight segments of log E' over log omega, displaced by a known shift: the area is exact. */
static void area_is_exact_on_straight_lines(void **state)
{
    (void)state;
    an_superpose_isotherm isotherm[2] = {{300, 0, 5}, {310, 5, 5}};
    an_superpose_point point[10];
    for (int i = 0; i < 10; i++) {
        double x = i % 5 * 0.5, shift = i < 5 ? 0 : -0.8;
        point[i] =
            (an_superpose_point){pow(10, x), pow(10, 7 + 0.4 * (x + shift)), pow(10, 6), {1e8, 0, 1e8}};
    }
    an_superpose_input input = {2, isotherm, 10, point, 0, NULL, 0};
    an_area_shift shift;
    assert_int_equal(an_area_between(&input, 0, AN_VERTICAL_NONE, &shift, NULL), AN_OK);
    assert_string_equal(shift.quantity, "storage modulus");
    assert_close(shift.log10_a, -0.8, 1e-12);
}

/* Isotherms on a rubber plateau, whose modulus rises with T and hardly depends on frequency: they must
 * neither refuse the rest nor pretend to a shift, and the window must not rest on them. */
static void plateau_is_kept_but_not_trusted(void **state)
{
    (void)state;
    double tau[] = {1e-4, 1e-3, 1e-2, 1e-1, 1}, strength[] = {1e8, 3e8, 3e8, 1e8, 1e7};
    an_maxwell model = {5, tau, strength, 5e6};
    static synthetic s;
    memset(&s, 0, sizeof s);
    s.seed = 4;
    for (int k = 0; k < 12; k++) {
        double t = 258 + 6.0 * k;
        synthetic_sweep sweep = {t, wlf(t) - wlf(270), t / 270, 0.1, 30, 8, 0.002};
        synthetic_add(&s, &model, &sweep);
    }
    an_superpose_input input = synthetic_input(&s);
    an_superposition r;
    an_superposition_init(&r);
    assert_int_equal(an_superpose(&input, NULL, &r, NULL), AN_OK);
    assert_int_equal(r.vertical, AN_VERTICAL_DENSITY_TEMPERATURE);
    size_t n = 2 * r.n_isotherm;
    assert_false(r.determined[11]);
    assert_true(sqrt(r.noise_covariance[11 * n + 11]) > 0.05);
    for (size_t i = 0; i < r.n_isotherm; i++) {
        double expected = s.log10_aT[i] - s.log10_aT[r.i_reference];
        assert_close(r.log10_aT[i], expected, 5 * sqrt(r.noise_covariance[i * n + i]) + 1e-12);
    }
    double slowest = INFINITY;
    for (size_t i = 0; i < r.n_isotherm; i++)
        if (r.determined[i])
            slowest = fmin(slowest, s.point[s.isotherm[i].first_point].omega_rad_s * pow(10, r.log10_aT[i]));
    assert_relative(r.omega_range[0], slowest, 1e-12);
    an_superposition_clear(&r);
}

/* Half the isotherms on a rubber plateau: T0 is none of them, since all shifts would share its uncertainty.
 */
static void reference_has_a_sharp_shift(void **state)
{
    (void)state;
    double tau[] = {1e-4, 1e-3, 1e-2, 1e-1, 1}, strength[] = {1e8, 3e8, 3e8, 1e8, 1e7};
    an_maxwell model = {5, tau, strength, 5e6};
    static synthetic s;
    memset(&s, 0, sizeof s);
    s.seed = 4;
    for (int k = 0; k < 14; k++) {
        double t = 258 + 6.0 * k;
        synthetic_sweep sweep = {t, wlf(t) - wlf(270), 1, 0.1, 30, 8, 0.005};
        synthetic_add(&s, &model, &sweep);
    }
    an_superpose_input input = synthetic_input(&s);
    an_superposition r;
    an_superposition_init(&r);
    assert_int_equal(an_superpose(&input, NULL, &r, NULL), AN_OK);
    double least = INFINITY;
    for (size_t i = 0; i < r.n_isotherm; i++)
        if (i != r.i_reference)
            least = fmin(least, r.noise_covariance[i * (2 * r.n_isotherm + 1)]);
    assert_true(sqrt(least) < 0.005); /* decades: 0.5 % of E where it falls with the root of time */
    an_superposition_clear(&r);
}

/* The last isotherm knows the modulus to 3 %: it helps the fit, but the window does not rest on it. */
static void noisy_end_does_not_widen_the_window(void **state)
{
    (void)state;
    double tau[] = {1e-4, 1e-3, 1e-2, 1e-1, 1}, strength[] = {1e8, 3e8, 3e8, 1e8, 1e7};
    an_maxwell model = {5, tau, strength, 5e6};
    static synthetic s;
    memset(&s, 0, sizeof s);
    s.seed = 4;
    for (int k = 0; k < 6; k++) {
        double t = 258 + 5.0 * k;
        synthetic_sweep sweep = {t, wlf(t) - wlf(268), 1, 0.1, 30, 8, k == 5 ? 0.03 : 0.002};
        synthetic_add(&s, &model, &sweep);
    }
    an_superpose_input input = synthetic_input(&s);
    an_superposition r;
    an_superposition_init(&r);
    assert_int_equal(an_superpose(&input, NULL, &r, NULL), AN_OK);
    assert_true(r.determined[5]);
    double slowest = s.point[s.isotherm[4].first_point].omega_rad_s * pow(10, r.log10_aT[4]);
    assert_relative(r.omega_range[0], slowest, 1e-12);
    an_superposition_clear(&r);
}

/* Straight lines that leave 0.3 decades of frequency between them are bridged exactly; 1.2 decades are
 * refused. */
static void gaps_are_bridged_or_refused(void **state)
{
    (void)state;
    an_superpose_isotherm isotherm[2] = {{300, 0, 5}, {310, 5, 5}};
    an_superpose_point point[10];
    for (int wide = 0; wide < 2; wide++) {
        double shift_true = wide ? -3.2 : -2.3;
        for (int i = 0; i < 10; i++) {
            double x = i % 5 * 0.5, shift = i < 5 ? 0 : shift_true;
            point[i] =
                (an_superpose_point){pow(10, x), pow(10, 7 + 0.4 * (x + shift)), pow(10, 6), {1e8, 0, 1e8}};
        }
        an_superpose_input input = {2, isotherm, 10, point, 0, NULL, 0};
        an_area_shift shift;
        an_error err = {0};
        an_status status = an_area_between(&input, 0, AN_VERTICAL_NONE, &shift, &err);
        assert_int_equal(status, wide ? AN_E_SCIENCE : AN_OK);
        if (wide)
            assert_non_null(strstr(err.text, "no overlap"));
        else {
            assert_close(shift.gap_decades, 0.3, 1e-12);
            assert_close(shift.log10_a, shift_true, 1e-12);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(shifts_and_their_uncertainty),
        cmocka_unit_test(vertical_law_is_found),
        cmocka_unit_test(free_vertical_shifts),
        cmocka_unit_test(two_processes_are_complex),
        cmocka_unit_test(refuses_what_cannot_be_joined),
        cmocka_unit_test(common_sources_pass_through),
        cmocka_unit_test(area_is_exact_on_straight_lines),
        cmocka_unit_test(gaps_are_bridged_or_refused),
        cmocka_unit_test(reference_has_a_sharp_shift),
        cmocka_unit_test(noisy_end_does_not_widen_the_window),
        cmocka_unit_test(plateau_is_kept_but_not_trusted),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
