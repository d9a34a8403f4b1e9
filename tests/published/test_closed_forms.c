/* Maxwell modes against materials with a closed form: closed_forms.txt.
 *
 * A continuous spectrum h over ln tau becomes a line of modes h(ln tau) d(ln tau), the trapezoidal rule,
 * whose error on a smooth spectrum over the whole axis falls exponentially with the spacing (L. N. Trefethen,
 * J. A. C. Weideman, SIAM Review 56 (2014) 385). */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <gsl/gsl_errno.h>
#include <gsl/gsl_roots.h>

#include "anelast/interconvert.h"
#include "check_table.h"

static const double pi = 3.14159265358979323846;

/* A spectrum h over ln tau with two shape constants. */
typedef double (*spectrum_function)(double ln_tau, double first, double second);
typedef struct line {
    spectrum_function h;
    double first, second;
    double from, to; /* ln tau */
    size_t n;
} line;

static void make_line(const line *shape, an_maxwell *model)
{
    an_maxwell_init(model);
    assert_int_equal(an_maxwell_alloc(model, shape->n, NULL), AN_OK);
    double step = (shape->to - shape->from) / (double)(shape->n - 1);
    for (size_t i = 0; i < shape->n; i++) {
        double ln_tau = shape->from + step * (double)i;
        model->time_s[i] = exp(ln_tau);
        model->modulus_Pa[i] = step * shape->h(ln_tau, shape->first, shape->second);
    }
}

static void hand_out(an_maxwell *model, double omega, double *actual)
{
    actual[0] = an_maxwell_storage(model, omega);
    actual[1] = an_maxwell_loss(model, omega);
    an_maxwell_clear(model);
}

/* t^-n has h = tau^-n/Gamma(n). Modes slower than the last decade asked for act as a spring: their geometric
 * sum is the equilibrium modulus. */
static double power_spectrum(double ln_tau, double n, double unused)
{
    (void)unused;
    return exp(-n * ln_tau - lgamma(n));
}

static void power_line(const check_row *row, an_maxwell *model)
{
    double n = check_given(row, "n");
    line shape = {power_spectrum, n, 0, log(1e-40), log(1e40), 801};
    make_line(&shape, model);
    double ratio = pow(10, -0.1 * n);
    model->equilibrium_Pa = model->modulus_Pa[shape.n - 1] * ratio / (1 - ratio);
}

static an_status power_law(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    power_line(row, &model);
    hand_out(&model, check_given(row, "omega"), actual);
    return AN_OK;
}

static an_status power_law_creep(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    an_retardation spectrum;
    power_line(row, &model);
    an_retardation_init(&spectrum);
    an_status status = an_maxwell_to_retardation(&model, &spectrum, err);
    *actual = an_retardation_creep(&spectrum, check_given(row, "t"));
    an_retardation_clear(&spectrum);
    an_maxwell_clear(&model);
    return status;
}

enum { N_CHAIN = 20000 };

/* Chain modes, slowest last so that times rise: tau = 1/p^2, strength by the caller. */
static void make_chain(an_maxwell *model, bool reptation)
{
    an_maxwell_init(model);
    assert_int_equal(an_maxwell_alloc(model, N_CHAIN, NULL), AN_OK);
    for (size_t i = 0; i < N_CHAIN; i++) {
        double p = (double)(reptation ? 2 * (N_CHAIN - i) - 1 : N_CHAIN - i);
        model->time_s[i] = 1 / (p * p);
        model->modulus_Pa[i] = reptation ? 8 / (pi * pi * p * p) : 1;
    }
}

static an_status rouse(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    make_chain(&model, false);
    hand_out(&model, check_given(row, "x"), actual);
    return AN_OK;
}

static an_status rouse_sums(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)row;
    (void)err;
    make_chain(&model, false);
    actual[0] = an_maxwell_viscosity(&model);
    actual[1] = an_maxwell_steady_compliance(&model);
    an_maxwell_clear(&model);
    return AN_OK;
}

static an_status reptation(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    make_chain(&model, true);
    hand_out(&model, check_given(row, "x"), actual);
    return AN_OK;
}

static an_status reptation_sums(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)row;
    (void)err;
    make_chain(&model, true);
    *actual = an_maxwell_steady_compliance(&model) * an_maxwell_instantaneous(&model);
    an_maxwell_clear(&model);
    return AN_OK;
}

/* 1 - 1/(1 + (i omega tau)^a): the Cole-Cole spectrum of unit step. */
static double cole_spectrum(double ln_tau, double a, double unused)
{
    (void)unused;
    return sin(pi * a) / (2 * pi * (cosh(a * ln_tau) + cos(pi * a)));
}

/* The loss side of 1/(1 + (i omega tau)^a)^g has the same kernel as Maxwell modes of this spectrum (S.
 * Havriliak, S. Negami, Polymer 8 (1967) 161). */
static double negami_spectrum(double ln_tau, double a, double g)
{
    double z = exp(a * ln_tau);
    double angle = atan2(sin(pi * a), z + cos(pi * a));
    return pow(z, g) * sin(g * angle) / (pi * pow(z * z + 2 * z * cos(pi * a) + 1, g / 2));
}

/* A line in ln tau wide enough that its ends, which fall as exp(-a |ln tau|), are below 1e-17. */
static void make_step(spectrum_function h, double a, double g, an_maxwell *model)
{
    double reach = 40 / (g > 0 ? a * g : a);
    line shape = {h, a, g, -reach, reach, (size_t)(2 * reach / 0.05) + 1};
    make_line(&shape, model);
}

typedef struct peak_search {
    const an_maxwell *model;
    bool of_factor; /* of the loss factor, else of the loss */
} peak_search;

/* Sign of the slope over ln omega at a peak, by closed forms: d(x^2/(1+x^2))/dln x = 2 x^2/(1+x^2)^2 and
 * d(x/(1+x^2))/dln x = x (1-x^2)/(1+x^2)^2. */
static double peak_slope(double ln_omega, void *context)
{
    const peak_search *search = context;
    const an_maxwell *model = search->model;
    double omega = exp(ln_omega);
    double d_storage = 0;
    double d_loss = 0;
    for (size_t i = 0; i < model->n_mode; i++) {
        double x = omega * model->time_s[i];
        double s = an_mode_storage(x);
        d_storage += model->modulus_Pa[i] * 2 * s * (1 - s);
        d_loss += model->modulus_Pa[i] * an_mode_loss(x) * (1 - 2 * s);
    }
    if (!search->of_factor)
        return d_loss;
    return d_loss / an_maxwell_loss(model, omega) - d_storage / an_maxwell_storage(model, omega);
}

static double find_peak(const an_maxwell *model, bool of_factor)
{
    peak_search search = {model, of_factor};
    gsl_function target = {peak_slope, &search};
    gsl_root_fsolver *solver = gsl_root_fsolver_alloc(gsl_root_fsolver_brent);
    double low = -25;
    double high = 25;
    assert_int_equal(gsl_root_fsolver_set(solver, &target, low, high), GSL_SUCCESS);
    for (int i = 0; i < 100 && high - low > 1e-12; i++) {
        assert_int_equal(gsl_root_fsolver_iterate(solver), GSL_SUCCESS);
        low = gsl_root_fsolver_x_lower(solver);
        high = gsl_root_fsolver_x_upper(solver);
    }
    double omega = exp(gsl_root_fsolver_root(solver));
    gsl_root_fsolver_free(solver);
    return omega;
}

static an_status fractional_zener(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    double a = check_given(row, "a");
    (void)err;
    if (a < 1) {
        make_step(cole_spectrum, a, 0, &model);
    } else {
        an_maxwell_init(&model);
        assert_int_equal(an_maxwell_alloc(&model, 1, NULL), AN_OK);
        model.time_s[0] = model.modulus_Pa[0] = 1;
    }
    model.equilibrium_Pa = 1 / (check_given(row, "c") - 1);
    actual[0] = find_peak(&model, true);
    actual[1] = an_maxwell_loss_factor(&model, actual[0]);
    an_maxwell_clear(&model);
    return AN_OK;
}

static an_status cole_cole(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    make_step(cole_spectrum, check_given(row, "a"), 0, &model);
    *actual = an_maxwell_loss(&model, find_peak(&model, false));
    an_maxwell_clear(&model);
    return AN_OK;
}

static an_status havriliak_negami(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    make_step(negami_spectrum, check_given(row, "a"), check_given(row, "g"), &model);
    *actual = find_peak(&model, false);
    an_maxwell_clear(&model);
    return AN_OK;
}

static double two_peak_spectrum(double ln_tau, double unused, double unused_too)
{
    (void)unused;
    (void)unused_too;
    double fast = ln_tau - log(.05);
    double slow = ln_tau - log(5);
    return (exp(-fast * fast / 2) + exp(-slow * slow / 2)) / (2 * sqrt(2 * pi));
}

static void make_two_peaks(an_maxwell *model)
{
    line shape = {two_peak_spectrum, 0, 0, log(.05) - 14, log(5) + 14, 600};
    make_line(&shape, model);
}

static an_status two_peaks(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    make_two_peaks(&model);
    hand_out(&model, check_given(row, "omega"), actual);
    return AN_OK;
}

static an_status two_peaks_sums(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)row;
    (void)err;
    make_two_peaks(&model);
    actual[0] = an_maxwell_instantaneous(&model);
    actual[1] = an_maxwell_viscosity(&model);
    actual[2] = an_maxwell_steady_compliance(&model);
    an_maxwell_clear(&model);
    return AN_OK;
}

static void table(void **state)
{
    (void)state;
    const check_quantity quantity[] = {
        {"power law", power_law},
        {"power law creep", power_law_creep},
        {"rouse", rouse},
        {"rouse sums", rouse_sums},
        {"doi-edwards", reptation},
        {"doi-edwards sums", reptation_sums},
        {"fractional zener", fractional_zener},
        {"cole-cole", cole_cole},
        {"havriliak-negami", havriliak_negami},
        {"two peaks", two_peaks},
        {"two peaks sums", two_peaks_sums},
    };
    check_table_run("closed_forms.txt", quantity, sizeof quantity / sizeof quantity[0]);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(table)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
