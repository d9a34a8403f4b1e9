/* The dense regularised spectrum from observations of any kind, its window, and whether the long end is solid
 * or liquid. Stage: spectrum. Method: rows of the response engine, whitened, on a logarithmic grid of times;
 * strength by the rule in force with generalised cross-validation beside it. Range: one observation or more
 * of positive uncertainty. */
#include "anelast/spectrum.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* A liquid is ruled out where leaving out the equilibrium modulus costs this much chi-square (five standard
 * deviations). */
static const double against_liquid = 25;
/* A liquid's storage and loss run as omega^2 and omega at the slow end; nine tenths of the way there counts
 * [FE80, ch. 3]. */
static const double liquid_storage_slope = 1.8, liquid_loss_slope = 0.9;

void an_spectrum_defaults(an_spectrum_options *options)
{
    *options = (an_spectrum_options){.modes_per_decade = 4,
                                     .most_modes_per_decade = 16,
                                     .extend_decades = 1,
                                     .rule = AN_STRENGTH_DISCREPANCY,
                                     .end_state = AN_UNDETERMINED,
                                     .error = 0.01,
                                     .most_modes = 40};
}

void an_spectrum_init(an_spectrum *spectrum)
{
    *spectrum = (an_spectrum){0};
    an_maxwell_init(&spectrum->model);
}

void an_spectrum_clear(an_spectrum *spectrum)
{
    an_maxwell_clear(&spectrum->model);
    an_spectrum_init(spectrum);
}

const char *an_end_state_word(an_end_state state)
{
    static const char *const words[] = {"undetermined", "solid", "liquid"};
    return words[state];
}

void an_spectrum_window(const double omega_range[2], double window_s[2])
{
    static const double half_pi = 1.5707963267948966;
    window_s[0] = exp(half_pi) / omega_range[1];
    window_s[1] = exp(-half_pi) / omega_range[0];
}

static an_status check_observation(const an_observation *o, size_t i, an_error *err)
{
    if (!(o->at > 0 && isfinite(o->at) && isfinite(o->value) && isfinite(o->log10_aT) &&
          isfinite(o->log10_bT)))
        return an_fail(err, AN_E_VALUE, NULL,
                       "observation %zu: frequency, time, shift or value is not finite and positive", i + 1);
    if (!(o->u > 0 && isfinite(o->u) && fabs(o->correlation) < 1) || (i == 0 && o->correlation != 0))
        return an_fail(err, AN_E_VALUE, NULL,
                       "observation %zu: uncertainty %g and correlation %g, where above 0 and inside "
                       "-1 .. 1 are allowed",
                       i + 1, o->u, o->correlation);
    return AN_OK;
}

/* Fill the i-th row of all columns from the response row of its observation. */
static void whiten_row(const an_observation *o, size_t i, const double *row, an_columns *rows)
{
    double r = o->correlation, scale = 1 / (o->u * sqrt(1 - r * r));
    /* Pairs: the first of two correlated rows keeps its own scale, the second has the first's share taken
     * out. */
    double before = r / sqrt(1 - r * r);
    size_t n = rows->n_column - 1;
    for (size_t j = 0; j <= n; j++) {
        double *cell = an_column(rows, j) + i;
        *cell = (j < n ? row[j] : o->value) * scale;
        if (i > 0)
            *cell -= before * cell[-1];
    }
}

an_status an_observation_rows(const an_observation_set *set, an_columns *rows, an_error *err)
{
    size_t n_mode = set->times->n_mode;
    double *row = calloc(n_mode + 1, sizeof *row);
    if (!row)
        return an_fail_memory(err, "a row of observations");
    rows->n_row = set->n;
    rows->n_column = n_mode + 1 + (set->equilibrium ? 1 : 0);
    an_status status = AN_OK;
    for (size_t i = 0; i < set->n && status == AN_OK; i++) {
        status = check_observation(&set->observation[i], i, err);
        if (status < 0)
            break;
        an_response_row(&set->observation[i], set->times->time_s, n_mode, row, NULL);
        whiten_row(&set->observation[i], i, row, rows);
    }
    free(row);
    return status;
}

/* Reduced angular frequencies that the observations span; a time t counts as 1/t. */
static void observed_range(const an_observation *observation, size_t n, double range[2])
{
    range[0] = INFINITY;
    range[1] = 0;
    for (size_t i = 0; i < n; i++) {
        const an_observation *o = &observation[i];
        double a = pow(10, o->log10_aT);
        double omega = o->kind <= AN_RESPONSE_LOSS ? o->at * a : a / o->at;
        range[0] = fmin(range[0], omega);
        range[1] = fmax(range[1], omega);
    }
}

static an_status lay_grid(an_spectrum *spectrum, double extend_decades, an_error *err)
{
    double low = -log10(spectrum->omega_range[1]) - extend_decades;
    double high = -log10(spectrum->omega_range[0]) + extend_decades;
    size_t n = (size_t)ceil((high - low) * spectrum->modes_per_decade) + 1;
    AN_TRY(an_maxwell_alloc(&spectrum->model, n, err));
    double first = (low + high) / 2 - 0.5 * (double)(n - 1) / spectrum->modes_per_decade;
    for (size_t i = 0; i < n; i++)
        spectrum->model.time_s[i] = pow(10, first + (double)i / spectrum->modes_per_decade);
    return AN_OK;
}

/* A modulus of the data's size, whatever their kind: the largest datum in terms of the mode that serves it
 * best. */
static double modulus_of(const an_columns *rows, size_t n_mode)
{
    double highest = 0;
    const double *y = an_column(rows, rows->n_column - 1);
    for (size_t i = 0; i < rows->n_row; i++) {
        double best = 0;
        for (size_t j = 0; j < n_mode; j++)
            best = fmax(best, fabs(an_column(rows, j)[i]));
        if (best > 0)
            highest = fmax(highest, fabs(y[i]) / best);
    }
    return highest > 0 ? highest : 1;
}

/* Load the problem with or without equilibrium modulus and solve it: level and strength renewed in turns. */
static an_status solve(an_smooth *smooth, an_strength_rule rule, double per_decade, an_columns *rows,
                       int equilibrium)
{
    enum { turns = 3 };
    size_t n_mode = rows->n_column - 1 - (equilibrium ? 1 : 0);
    double strength = 0, modulus = modulus_of(rows, n_mode);
    an_smooth_load(smooth, rows, n_mode, equilibrium);
    an_smooth_flat(smooth, modulus / (double)n_mode);
    for (int turn = 0; turn < turns; turn++) {
        AN_TRY(an_smooth_choose(smooth, turn + 1 < turns ? AN_STRENGTH_EVIDENCE : rule, 0, &strength));
        if (turn + 1 < turns)
            an_smooth_follow(smooth, per_decade);
    }
    an_smooth_count(smooth);
    return AN_OK;
}

/* d ln / d ln omega of storage and loss at the slow end. */
static int runs_as_liquid(const an_maxwell *model, double omega)
{
    static const double step = 1.1;
    double storage =
        log(an_maxwell_storage(model, omega * step) / an_maxwell_storage(model, omega)) / log(step);
    double loss = log(an_maxwell_loss(model, omega * step) / an_maxwell_loss(model, omega)) / log(step);
    return storage >= liquid_storage_slope && loss >= liquid_loss_slope;
}

static void take_solution(const an_smooth *smooth, int equilibrium, an_spectrum *spectrum)
{
    memcpy(spectrum->model.modulus_Pa, smooth->x_Pa, smooth->n_mode * sizeof *smooth->x_Pa);
    spectrum->model.equilibrium_Pa = equilibrium ? smooth->x_Pa[smooth->n_mode] : 0;
    spectrum->strength = smooth->strength;
    spectrum->chi_square = smooth->chi_square;
    spectrum->used = smooth->used;
    spectrum->n_data = smooth->n_data;
}

typedef struct job {
    const an_observation *observation;
    size_t n_observation;
    const an_spectrum_options *options;
    an_columns rows;
    an_smooth smooth;
} job;

static an_status solve_with(job *j, an_spectrum *spectrum, int equilibrium, an_error *err)
{
    an_observation_set set = {j->observation, j->n_observation, &spectrum->model, equilibrium};
    AN_TRY(an_observation_rows(&set, &j->rows, err));
    an_status status = solve(&j->smooth, j->options->rule, spectrum->modes_per_decade, &j->rows, equilibrium);
    if (status < 0)
        return an_fail(err, status, NULL, "the spectrum did not settle");
    return AN_OK;
}

/* Solid, liquid or undetermined; leaves the solution in the spectrum. */
static an_status decide_end(job *j, an_spectrum *spectrum, an_error *err)
{
    AN_TRY(solve_with(j, spectrum, 0, err));
    double liquid_chi_square = j->smooth.chi_square;
    take_solution(&j->smooth, 0, spectrum);
    int liquid_slopes = runs_as_liquid(&spectrum->model, spectrum->omega_range[0]);
    if (j->options->end_state == AN_LIQUID) {
        spectrum->end_state = AN_LIQUID;
        return AN_OK;
    }
    AN_TRY(solve_with(j, spectrum, 1, err));
    double freedom = fmax((double)j->n_observation - j->smooth.used, 1);
    double reduced = fmax(j->smooth.chi_square / freedom, 1);
    spectrum->evidence_against_liquid = (liquid_chi_square - j->smooth.chi_square) / reduced;
    int against = spectrum->evidence_against_liquid > against_liquid;
    spectrum->end_state = j->options->end_state == AN_SOLID || against ? AN_SOLID
                          : liquid_slopes                              ? AN_LIQUID
                                                                       : AN_UNDETERMINED;
    if (spectrum->end_state == AN_LIQUID)
        AN_TRY(solve_with(j, spectrum, 0, err));
    take_solution(&j->smooth, spectrum->end_state != AN_LIQUID, spectrum);
    return AN_OK;
}

static void cross_check(an_smooth *smooth, an_spectrum *spectrum)
{
    double strength = 0;
    if (an_smooth_choose(smooth, AN_STRENGTH_CROSS_VALIDATION, 0, &strength) < 0)
        strength = NAN;
    spectrum->strength_cross = strength;
    spectrum->disagreement_decades = fabs(log10(strength / spectrum->strength));
}

/* One grid: rows, workspace, solution. */
static an_status solve_on_grid(job *j, an_spectrum *spectrum, an_error *err)
{
    AN_TRY(lay_grid(spectrum, j->options->extend_decades, err));
    j->rows.stride = j->n_observation;
    j->rows.value = calloc(j->n_observation * (spectrum->model.n_mode + 2), sizeof *j->rows.value);
    an_status status = j->rows.value ? an_smooth_alloc(&j->smooth, spectrum->model.n_mode, err)
                                     : an_fail_memory(err, "the rows of observations");
    if (status >= 0)
        status = decide_end(j, spectrum, err);
    if (status >= 0)
        cross_check(&j->smooth, spectrum);
    an_smooth_clear(&j->smooth);
    free(j->rows.value);
    j->rows.value = NULL;
    return status;
}

/* A spectrum of few sharp modes wants a finer grid than a smooth one: double it while chi-square is above its
 * expectation and falls by three tenths. */
static an_status refine(job *j, an_spectrum *spectrum, an_error *err)
{
    static const double good = 1.3, worthwhile = 0.7;
    double n = (double)j->n_observation;
    while (spectrum->chi_square > good * n &&
           2 * spectrum->modes_per_decade <= j->options->most_modes_per_decade) {
        an_spectrum finer = *spectrum;
        an_maxwell_init(&finer.model);
        finer.modes_per_decade *= 2;
        an_status status = solve_on_grid(j, &finer, err);
        int better = status >= 0 && finer.chi_square < worthwhile * spectrum->chi_square;
        an_maxwell_clear(better ? &spectrum->model : &finer.model);
        if (!better)
            return status;
        *spectrum = finer;
    }
    return AN_OK;
}

an_status an_spectrum_dense(const an_observation *observation, size_t n_observation,
                            const an_spectrum_options *options, an_spectrum *spectrum, an_error *err)
{
    an_spectrum_options standard;
    an_spectrum_defaults(&standard);
    job j = {
        .observation = observation, .n_observation = n_observation, .options = options ? options : &standard};
    an_smooth_init(&j.smooth);
    if (n_observation == 0)
        return an_fail(err, AN_E_VALUE, NULL, "no observations");
    for (size_t i = 0; i < n_observation; i++)
        AN_TRY(check_observation(&observation[i], i, err));
    observed_range(observation, n_observation, spectrum->omega_range);
    an_spectrum_window(spectrum->omega_range, spectrum->window_s);
    spectrum->modes_per_decade = j.options->modes_per_decade;
    AN_TRY(solve_on_grid(&j, spectrum, err));
    return refine(&j, spectrum, err);
}
