/* Relaxation <-> retardation, exactly. Ground floor of fit.
 *
 * With s = -1/x both the transformed modulus of a Maxwell model and the transformed compliance of a
 * retardation spectrum take the secular form F(x) = sum_k w_k/(x - p_k) - c, with poles p_k at the given
 * times, weights w_k > 0 and c >= 0. F falls from +inf to -inf between neighbouring poles, so each interval
 * holds exactly one zero, and one more lies beyond the last pole when c > 0 [GR68]. Each zero is sought as
 * its distance from the nearer pole (as in the secular equation of divide-and-conquer eigensolvers), by
 * Brent's method on the logarithm of that distance, so that the residues keep full digits where zeros hug
 * poles. Range: any times and strengths whose products stay finite. */
#include "anelast/interconvert.h"

#include <math.h>
#include <stdbool.h>
#include <stdlib.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_roots.h>

/* sum_k weight/(x - pole) - constant */
typedef struct secular {
    size_t n;
    double *pole;    /* [n] rising, >= 0, s; owned */
    double *weight;  /* [n] > 0; owned */
    double constant; /* >= 0 */
} secular;

/* A zero, kept as pole[origin] + offset so that its distance to that pole has full relative precision. */
typedef struct secular_zero {
    size_t origin;
    double offset; /* s, of either sign */
} secular_zero;

typedef struct secular_search {
    const secular *form;
    size_t origin;
    double side; /* +1: right of the origin, -1: left */
} secular_search;

void an_retardation_init(an_retardation *spectrum)
{
    *spectrum = (an_retardation){0};
}

void an_retardation_clear(an_retardation *spectrum)
{
    free(spectrum->time_s);
    free(spectrum->compliance_per_Pa);
    an_retardation_init(spectrum);
}

an_status an_retardation_alloc(an_retardation *spectrum, size_t n_mode, an_error *err)
{
    an_retardation_clear(spectrum);
    if (n_mode == 0)
        return AN_OK;
    spectrum->time_s = calloc(n_mode, sizeof *spectrum->time_s);
    spectrum->compliance_per_Pa = calloc(n_mode, sizeof *spectrum->compliance_per_Pa);
    if (!spectrum->time_s || !spectrum->compliance_per_Pa) {
        an_retardation_clear(spectrum);
        return an_fail_memory(err, "the modes of a retardation spectrum");
    }
    spectrum->n_mode = n_mode;
    return AN_OK;
}

static void secular_clear(secular *form)
{
    free(form->pole);
    free(form->weight);
    *form = (secular){0};
}

static an_status secular_alloc(secular *form, size_t n_most, an_error *err)
{
    *form = (secular){0};
    form->pole = calloc(n_most + 1, sizeof *form->pole);
    form->weight = calloc(n_most + 1, sizeof *form->weight);
    if (!form->pole || !form->weight) {
        secular_clear(form);
        return an_fail_memory(err, "the poles of an interconversion");
    }
    return AN_OK;
}

/* F at pole[origin] + offset. */
static double secular_value(const secular *form, size_t origin, double offset)
{
    double sum = -form->constant;
    for (size_t k = 0; k < form->n; k++)
        sum += form->weight[k] / ((form->pole[origin] - form->pole[k]) + offset);
    return sum;
}

static double zero_time(const secular *form, const secular_zero *zero)
{
    return form->pole[zero->origin] + zero->offset;
}

/* -x^2 F' at a zero x: positive, and in the range of the weights however long the times are. */
static double secular_descent(const secular *form, const secular_zero *zero)
{
    double x = zero_time(form, zero);
    double sum = 0;
    for (size_t k = 0; k < form->n; k++) {
        double ratio = x / ((form->pole[zero->origin] - form->pole[k]) + zero->offset);
        sum += form->weight[k] * ratio * ratio;
    }
    return sum;
}

/* F times the distance, over the logarithm of the distance: finite at the pole, same zero, same sign. */
static double secular_target(double log_distance, void *context)
{
    const secular_search *search = context;
    double distance = exp(log_distance);
    return distance * secular_value(search->form, search->origin, search->side * distance);
}

static an_status seek(gsl_root_fsolver *solver, const secular_search *search, const double bracket[2],
                      secular_zero *zero, an_error *err)
{
    gsl_function target = {.function = secular_target, .params = (void *)search};
    double low = log(bracket[0]) - 1e-9; /* the brackets are attained when a single pole dominates */
    double high = log(bracket[1]) + 1e-12;
    bool changes = secular_target(low, (void *)search) * search->side >= 0 &&
                   secular_target(high, (void *)search) * search->side <= 0;
    if (!changes || gsl_root_fsolver_set(solver, &target, low, high) != GSL_SUCCESS)
        return an_fail(err, AN_E_NUMERIC, "", "interconversion: no sign change beside the time %g s",
                       search->form->pole[search->origin]);
    for (int i = 0; i < 200; i++) {
        if (gsl_root_fsolver_iterate(solver) != GSL_SUCCESS)
            break;
        low = gsl_root_fsolver_x_lower(solver);
        high = gsl_root_fsolver_x_upper(solver);
        if (gsl_root_test_interval(low, high, 4e-16, 2e-16) == GSL_SUCCESS)
            break;
    }
    zero->origin = search->origin;
    zero->offset = search->side * exp(gsl_root_fsolver_root(solver));
    return AN_OK;
}

/* The zero between pole k and pole k + 1. Bounds on its distance from the nearer pole: there w/distance must
 * balance the rest of the sum, whose terms are no nearer than half the gap. */
static an_status seek_between(gsl_root_fsolver *solver, const secular *form, size_t k, secular_zero *zero,
                              an_error *err)
{
    double half = (form->pole[k + 1] - form->pole[k]) / 2;
    double rest = 0;
    bool left_half = secular_value(form, k, half) < 0;
    secular_search search = {form, left_half ? k : k + 1, left_half ? 1 : -1};
    if (left_half) {
        for (size_t j = k + 1; j < form->n; j++)
            rest += form->weight[j];
        rest = form->constant + rest / half;
    } else {
        for (size_t j = 0; j <= k; j++)
            rest += form->weight[j];
        rest /= half;
    }
    double bracket[2] = {fmin(form->weight[search.origin] / rest, half), half};
    return seek(solver, &search, bracket, zero, err);
}

/* The zero beyond the last pole, where c > 0: sum of weights over distance can't be below c. */
static an_status seek_beyond(gsl_root_fsolver *solver, const secular *form, secular_zero *zero, an_error *err)
{
    double total = 0;
    for (size_t k = 0; k < form->n; k++)
        total += form->weight[k];
    double bracket[2] = {form->weight[form->n - 1] / form->constant, total / form->constant};
    secular_search search = {form, form->n - 1, 1};
    return seek(solver, &search, bracket, zero, err);
}

static size_t secular_count(const secular *form)
{
    return form->n - (form->constant > 0 ? 0 : 1);
}

/* All zeros, rising.  zero [out] [secular_count] */
static an_status secular_solve(const secular *form, secular_zero *zero, an_error *err)
{
    an_status status = AN_OK;
    gsl_root_fsolver *solver = gsl_root_fsolver_alloc(gsl_root_fsolver_brent);
    if (!solver)
        return an_fail_memory(err, "a root finder");
    for (size_t k = 0; k + 1 < form->n; k++)
        AN_CLEAN(seek_between(solver, form, k, &zero[k], err));
    if (form->constant > 0)
        AN_CLEAN(seek_beyond(solver, form, &zero[form->n - 1], err));
cleanup:
    gsl_root_fsolver_free(solver);
    return status;
}

/* E~(-1/x) = E_e - sum E_i tau_i/(x - tau_i): F with weights E_i tau_i and c = E_e, negated. 1/E~ has the
 * residue D_j lambda_j at lambda_j, hence D_j = 1/(lambda_j |F'|). */
static an_status retardation_modes(const secular *form, an_retardation *spectrum, an_error *err)
{
    size_t n = secular_count(form);
    secular_zero *zero = calloc(n + 1, sizeof *zero);
    an_status status = AN_OK;
    if (!zero)
        return an_fail_memory(err, "the retardation times");
    AN_CLEAN(secular_solve(form, zero, err));
    AN_CLEAN(an_retardation_alloc(spectrum, n, err));
    for (size_t j = 0; j < n; j++) {
        spectrum->time_s[j] = zero_time(form, &zero[j]);
        spectrum->compliance_per_Pa[j] = spectrum->time_s[j] / secular_descent(form, &zero[j]);
    }
cleanup:
    free(zero);
    return status;
}

an_status an_maxwell_to_retardation(const an_maxwell *model, an_retardation *spectrum, an_error *err)
{
    secular form;
    an_retardation_clear(spectrum);
    AN_TRY(an_maxwell_check(model, err));
    AN_TRY(secular_alloc(&form, model->n_mode, err));
    for (size_t i = 0; i < model->n_mode; i++) {
        if (model->modulus_Pa[i] > 0) {
            form.pole[form.n] = model->time_s[i];
            form.weight[form.n++] = model->modulus_Pa[i] * model->time_s[i];
        }
    }
    form.constant = model->equilibrium_Pa;
    an_status status = form.n > 0 ? retardation_modes(&form, spectrum, err) : AN_OK;
    if (status >= 0) {
        spectrum->instantaneous_per_Pa = 1 / an_maxwell_instantaneous(model);
        spectrum->fluidity_per_Pa_s = 1 / an_maxwell_viscosity(model);
    }
    secular_clear(&form);
    return status;
}

static an_status check_retardation(const an_retardation *spectrum, an_error *err)
{
    double instantaneous = spectrum->instantaneous_per_Pa;
    if (!(instantaneous > 0 && isfinite(instantaneous)))
        return an_fail(err, AN_E_VALUE, "", "instantaneous compliance %g 1/Pa; above 0 is allowed",
                       instantaneous);
    if (!(spectrum->fluidity_per_Pa_s >= 0 && isfinite(spectrum->fluidity_per_Pa_s)))
        return an_fail(err, AN_E_VALUE, "", "fluidity %g 1/(Pa s); 0 or above is allowed",
                       spectrum->fluidity_per_Pa_s);
    for (size_t j = 0; j < spectrum->n_mode; j++) {
        double before = j > 0 ? spectrum->time_s[j - 1] : 0;
        if (!(spectrum->time_s[j] > before && isfinite(spectrum->time_s[j])))
            return an_fail(err, AN_E_VALUE, "",
                           "mode %zu: retardation time %g s; a finite time above %g s is allowed", j + 1,
                           spectrum->time_s[j], before);
        if (!(spectrum->compliance_per_Pa[j] >= 0 && isfinite(spectrum->compliance_per_Pa[j])))
            return an_fail(err, AN_E_VALUE, "", "mode %zu: compliance %g 1/Pa; 0 or above is allowed", j + 1,
                           spectrum->compliance_per_Pa[j]);
    }
    return AN_OK;
}

/* D~(-1/x)/x = D_g/x + sum D_j/(x - lambda_j) - phi: F with a pole at 0. E~ = 1/D~ has the residue -E_i tau_i
 * at tau_i, hence E_i = 1/(tau_i^2 |F'|). */
static an_status relaxation_modes(const secular *form, an_maxwell *model, an_error *err)
{
    size_t n = secular_count(form);
    secular_zero *zero = calloc(n + 1, sizeof *zero);
    an_status status = AN_OK;
    if (!zero)
        return an_fail_memory(err, "the relaxation times");
    AN_CLEAN(secular_solve(form, zero, err));
    AN_CLEAN(an_maxwell_alloc(model, n, err));
    for (size_t i = 0; i < n; i++) {
        model->time_s[i] = zero_time(form, &zero[i]);
        model->modulus_Pa[i] = 1 / secular_descent(form, &zero[i]);
    }
cleanup:
    free(zero);
    return status;
}

an_status an_retardation_to_maxwell(const an_retardation *spectrum, an_maxwell *model, an_error *err)
{
    secular form;
    an_maxwell_clear(model);
    AN_TRY(check_retardation(spectrum, err));
    AN_TRY(secular_alloc(&form, spectrum->n_mode + 1, err));
    double total = spectrum->instantaneous_per_Pa;
    form.weight[form.n++] = spectrum->instantaneous_per_Pa; /* its pole is 0 */
    for (size_t j = 0; j < spectrum->n_mode; j++) {
        total += spectrum->compliance_per_Pa[j];
        if (spectrum->compliance_per_Pa[j] > 0) {
            form.pole[form.n] = spectrum->time_s[j];
            form.weight[form.n++] = spectrum->compliance_per_Pa[j];
        }
    }
    form.constant = spectrum->fluidity_per_Pa_s;
    an_status status = relaxation_modes(&form, model, err);
    if (status >= 0)
        model->equilibrium_Pa = form.constant > 0 ? 0 : 1 / total;
    secular_clear(&form);
    return status;
}

double an_retardation_creep(const an_retardation *spectrum, double time_s)
{
    double sum = spectrum->instantaneous_per_Pa + spectrum->fluidity_per_Pa_s * time_s;
    for (size_t j = 0; j < spectrum->n_mode; j++)
        sum -= spectrum->compliance_per_Pa[j] * expm1(-time_s / spectrum->time_s[j]);
    return sum;
}

double complex an_retardation_complex(const an_retardation *spectrum, double omega_rad_s)
{
    double storage = spectrum->instantaneous_per_Pa;
    double loss = spectrum->fluidity_per_Pa_s > 0 ? spectrum->fluidity_per_Pa_s / omega_rad_s : 0;
    for (size_t j = 0; j < spectrum->n_mode; j++) {
        double x = omega_rad_s * spectrum->time_s[j];
        storage += spectrum->compliance_per_Pa[j] / (1 + x * x);
        loss += spectrum->compliance_per_Pa[j] * an_mode_loss(x);
    }
    return CMPLX(storage, -loss);
}
