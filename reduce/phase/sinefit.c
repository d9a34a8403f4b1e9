/* The sine fit of a burst: Gauss-Newton on the common frequency around the linear model (variable
 * projection), and the covariance of the two complex amplitudes from an honest noise level. Stage: phase.
 * Method: [IEEE1057] four-parameter fit, extended to two channels, drift, harmonics and start-up; bound
 * [RB74]. Range: three or more samples a cycle, one or more cycles; times need not be uniform.
 */
#include "anelast/sinefit.h"
#include "model.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Chance of replacing the residual's deviation by the level near the line although the noise is white: by a
 * greater level, and by a smaller one. A level that chance alone made small would claim too much, twice over
 * where one side of the line has few bins, so that much less of it is allowed. */
static const double COLOUR_RISK = 0.005, CALM_RISK = 1e-5;
/* A level below the white one is believed from this many degrees of freedom on, some six cycles: in fewer it
 * comes about by chance, where the start-up is cut until little is left near the line. */
enum { LEAST_FREEDOM_BELOW = 16 };

void an_sinefit_choice_init(an_sinefit_choice *choice)
{
    *choice = (an_sinefit_choice){.drift_degree = 2, .n_harmonic = 5, .n_decay = 2};
}

double complex an_sinefit_line(int n, const double *time_s, const double *y, const unsigned char *use,
                               double frequency_Hz)
{
    double complex sum = 0;
    int n_used = 0;
    for (int i = 0; i < n; i++) {
        if (use && !use[i])
            continue;
        double phase = 2 * M_PI * frequency_Hz * time_s[i];
        sum += y[i] * (cos(phase) - I * sin(phase));
        n_used++;
    }
    return n_used ? 2 * sum / n_used : 0;
}

static double variance(const an_model *m, const an_solution *s, int c, int fitted)
{
    double freedom =
        m->n_used - m->n_column - (fitted ? 0.5 : 0); /* the frequency is shared by two channels */
    double amplitude = hypot(s->coefficient[c][0], s->coefficient[c][1]);
    return fmax(s->sum_square[c] / freedom, 1e-30 * amplitude * amplitude + 1e-300);
}

/* Newton step in omega, and the information behind it: [shares] by channel, variance [out]. */
static double step(const an_solution *s, const double v[AN_CHANNELS], double share[AN_CHANNELS],
                   double *var_omega)
{
    double information = 0, gradient = 0;
    for (int c = 0; c < AN_CHANNELS; c++) {
        share[c] = s->slope_self[c] / v[c];
        information += share[c];
        gradient += s->slope_residual[c] / v[c];
    }
    for (int c = 0; c < AN_CHANNELS; c++)
        share[c] = information > 0 ? share[c] / information : 0;
    *var_omega = information > 0 ? 1 / information : 0;
    return information > 0 ? gradient / information : 0;
}

/* Solve at the known frequency, or iterate to the best one. */
static an_status converge(an_model *m, const an_waveform *w, const an_sinefit_choice *c, an_solution *s,
                          double *residual, an_error *err)
{
    enum { STEPS = 40 };
    double start = m->omega, bin = M_PI / m->half, share[AN_CHANNELS], unused;
    AN_TRY(an_model_solve(m, w, s, residual, err));
    if (c->frequency_known)
        return AN_OK;
    for (int i = 0; i < STEPS; i++) {
        double v[AN_CHANNELS] = {variance(m, s, 0, 1), variance(m, s, 1, 1)};
        double change = step(s, v, share, &unused);
        m->omega += change;
        if (!(fabs(m->omega - start) <= bin))
            return an_fail(err, AN_E_NUMERIC, NULL, "sine fit: no frequency within one bin of %g Hz",
                           start / (2 * M_PI));
        AN_TRY(an_model_solve(m, w, s, residual, err));
        if (fabs(change) * m->half < 1e-9)
            return AN_OK;
    }
    return an_fail(err, AN_E_NUMERIC, NULL, "sine fit: the frequency near %g Hz does not settle",
                   start / (2 * M_PI));
}

/* The level to use: deviation of all the residual, unless the noise near the line tells otherwise. */
static void choose_level(const an_sinefit_choice *choice, const an_near_line *near, an_sinefit *fit)
{
    for (int c = 0; c < AN_CHANNELS; c++) {
        fit->near_line[c] = near->level[c];
        fit->level[c] = fit->deviation[c];
        fit->excess[c] = 1;
        if (choice->level[c] > 0) {
            fit->level[c] = choice->level[c];
        } else if (near->freedom > 0 && fit->deviation[c] > 0) {
            double ratio = near->level[c] / fit->deviation[c];
            fit->excess[c] = gsl_cdf_chisq_Q(near->freedom * ratio * ratio, near->freedom);
            int calm = near->freedom >= LEAST_FREEDOM_BELOW &&
                       gsl_cdf_chisq_P(near->freedom * ratio * ratio, near->freedom) < CALM_RISK;
            if (fit->excess[c] < COLOUR_RISK)
                fit->level[c] = near->balanced[c];
            else if (calm)
                fit->level[c] = fmax(near->balanced[c], near->level[c]);
        }
    }
}

/* Rounding whose pattern recurs in every cycle adds up instead of averaging out: with m samples a cycle, m
 * whole, only m of the errors are independent, and half of them where the mean stands on a step or between
 * two, so that one half of the cycle mirrors the other. Noise of deviation s before a step q dithers it away
 * by exp(-4 pi^2 s^2 / q^2) [WID61]; that noise shows near the line, where what recurs does not. */
static double recurring_rounding(const an_waveform *w, const an_model *m, int c, const an_sinefit *fit)
{
    double q = w->resolution[c], per_cycle = m->n_used / m->n_cycle, cycles = m->n_cycle;
    if (!(q > 0) || fabs(per_cycle - round(per_cycle)) * cycles > 0.25)
        return 0;
    double dither = isfinite(fit->near_line[c]) ? fmin(fit->level[c], fit->near_line[c]) : fit->level[c];
    double steps = 2 * fit->mean[c] / q, mirrored = fabs(steps - round(steps)) < 0.1 ? 2 : 1;
    return mirrored * 2 * (q * q / 12) * exp(-4 * M_PI * M_PI * dither * dither / (q * q)) / per_cycle;
}

/* Correlation of the two residuals where it is more than chance (4 deviations), else 0. */
static double correlation(const an_model *m, const an_solution *s)
{
    double product = sqrt(s->sum_square[0] * s->sum_square[1]);
    double rho = product > 0 ? s->sum_cross / product : 0;
    return fabs(rho) > 4 / sqrt((double)m->n_used) ? rho : 0;
}

/* Covariance of Re and Im of both amplitudes: linear part, correlation, and the frequency's. */
static void fill_covariance(const an_waveform *w, const an_model *m, const an_solution *s, double var_omega,
                            an_sinefit *fit)
{
    double rho = correlation(m, s), *tie = fit->tie;
    for (int a = 0; a < 4 && var_omega > 0; a++)
        for (int j = 0; j < m->n_column; j++)
            tie[a] -= s->inverse[a % 2][j] * s->slope_column[a / 2][j];
    for (int a = 0; a < 4; a++)
        for (int b = 0; b < 4; b++) {
            double level = fit->level[a / 2] * fit->level[b / 2] * (a / 2 == b / 2 ? 1 : rho);
            fit->covariance[a][b] = level * s->inverse[a % 2][b % 2] + var_omega * tie[a] * tie[b];
        }
    for (int a = 0; a < 4; a++)
        fit->covariance[a][a] += recurring_rounding(w, m, a / 2, fit);
    for (int c = 0; c < AN_CHANNELS; c++)
        fit->u_amplitude[c] =
            sqrt(0.5 * (fit->covariance[2 * c][2 * c] + fit->covariance[2 * c + 1][2 * c + 1]));
}

/* K = F / X and its covariance: dK = (dF - K dX) / X. */
static void fill_stiffness(an_sinefit *fit)
{
    double complex x = fit->amplitude[AN_DISPLACEMENT][0], k = fit->amplitude[AN_FORCE][0] / x;
    double complex part[4] = {-k / x, -I * k / x, 1 / x, I / x}; /* dK per Re X, Im X, Re F, Im F */
    fit->stiffness = k;
    memset(fit->stiffness_noise, 0, sizeof fit->stiffness_noise);
    for (int a = 0; a < 4; a++)
        for (int b = 0; b < 4; b++) {
            double cov = fit->covariance[a][b];
            fit->stiffness_noise[0] += creal(part[a]) * cov * creal(part[b]);
            fit->stiffness_noise[1] += creal(part[a]) * cov * cimag(part[b]);
            fit->stiffness_noise[2] += cimag(part[a]) * cov * cimag(part[b]);
        }
}

static void fill_values(const an_model *m, const an_solution *s, int fitted, an_sinefit *fit)
{
    fit->frequency_Hz = m->omega / (2 * M_PI);
    fit->origin_s = m->origin;
    fit->n_harmonic = m->n_harmonic;
    fit->n_used = m->n_used;
    fit->n_cycle = m->n_cycle;
    double first[AN_COLUMNS], last[AN_COLUMNS], middle[AN_COLUMNS];
    an_model_row(m, m->origin - m->half, first);
    an_model_row(m, m->origin + m->half, last);
    an_model_row(m, m->origin, middle);
    for (int c = 0; c < AN_CHANNELS; c++) {
        for (int h = 0; h < m->n_harmonic; h++)
            fit->amplitude[c][h] = s->coefficient[c][2 * h] + I * s->coefficient[c][2 * h + 1];
        for (int j = 2 * m->n_harmonic; j < m->n_column; j++) {
            fit->mean[c] += s->coefficient[c][j] * middle[j];
            fit->drift[c] += s->coefficient[c][j] * (last[j] - first[j]);
        }
        fit->deviation[c] = sqrt(variance(m, s, c, fitted));
    }
}

an_status an_sinefit_run(const an_waveform *w, const an_sinefit_choice *choice, an_sinefit *fit,
                         double *residual, an_error *err)
{
    an_model model;
    an_solution solution;
    double share[AN_CHANNELS] = {0}, var_omega = 0;
    an_near_line near = {.level = {NAN, NAN}};
    memset(fit, 0, sizeof *fit);
    AN_TRY(an_model_set(&model, w, choice, err));
    double *own = residual ? NULL : malloc(AN_CHANNELS * sizeof *own * (size_t)w->n);
    if (!residual && !own)
        return an_fail_memory(err, "residuals");
    double *r = residual ? residual : own;
    an_status status = AN_OK;
    AN_CLEAN(converge(&model, w, choice, &solution, r, err));
    fill_values(&model, &solution, !choice->frequency_known, fit);
    if (!(cabs(fit->amplitude[AN_DISPLACEMENT][0]) > 0)) {
        status = an_fail(err, AN_E_SCIENCE, NULL, "no displacement at %g Hz", fit->frequency_Hz);
        goto cleanup;
    }
    if (!choice->frequency_known)
        step(&solution, (double[]){pow(fit->deviation[0], 2), pow(fit->deviation[1], 2)}, share, &var_omega);
    if (!(choice->level[0] > 0 && choice->level[1] > 0))
        an_noise_near_line(&model, w, &solution, r, share, &near);
    choose_level(choice, &near, fit);
    if (!choice->frequency_known)
        step(&solution, (double[]){pow(fit->level[0], 2), pow(fit->level[1], 2)}, share, &var_omega);
    fill_covariance(w, &model, &solution, var_omega, fit);
    fit->u_frequency_Hz = sqrt(var_omega) / (2 * M_PI);
    fill_stiffness(fit);
cleanup:
    free(own);
    return status;
}
