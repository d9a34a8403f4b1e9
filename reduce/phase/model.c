/* The linear model of the sine fit: rows of the design matrix, normal equations, residuals. Stage: phase.
 * Method: linear least squares by Cholesky factorisation of the Gram matrix; its columns are of order one and
 * nearly orthogonal over whole cycles, so that squaring the condition number does no harm (two decays beside
 * a quadratic: below 1e5).
 */
#include "model.h"

#include <gsl/gsl_errno.h>
#include <gsl/gsl_linalg.h>
#include <math.h>
#include <string.h>

static int counts(const an_waveform *w, int i)
{
    return !w->use || w->use[i];
}

/* Span and number of the samples that count. */
static int span(const an_waveform *w, double *first, double *last)
{
    int n = 0;
    for (int i = 0; i < w->n; i++) {
        if (!counts(w, i))
            continue;
        if (n++ == 0)
            *first = w->time_s[i];
        *last = w->time_s[i];
    }
    return n;
}

/* Harmonics that a cycle's samples can tell apart, two samples to spare. */
static int harmonics_allowed(double samples_per_cycle, int wanted)
{
    int most = (int)floor(samples_per_cycle / 2 - 1);
    if (most < 1)
        most = 1;
    return wanted < most ? wanted : most;
}

static int choice_good(const an_sinefit_choice *c)
{
    return c->frequency_Hz > 0 && isfinite(c->frequency_Hz) && c->drift_degree >= 0 &&
           c->drift_degree <= AN_DRIFT_DEGREES && c->n_harmonic >= 1 && c->n_harmonic <= AN_HARMONICS &&
           c->n_decay >= 0 && c->n_decay <= AN_DECAYS;
}

an_status an_model_set(an_model *m, const an_waveform *w, const an_sinefit_choice *c, an_error *err)
{
    if (!choice_good(c))
        return an_fail(err, AN_E_VALUE, NULL, "sine fit: a choice is out of range (frequency %g Hz)",
                       c->frequency_Hz);
    double first = 0, last = 0;
    memset(m, 0, sizeof *m);
    m->n_used = span(w, &first, &last);
    if (m->n_used < 4 || !(last > first))
        return an_fail(err, AN_E_VALUE, NULL, "only %d samples over %g s are left for the sine fit", m->n_used, last - first);
    double length = (last - first) * m->n_used / (m->n_used - 1);
    m->n_cycle = length * c->frequency_Hz;
    m->omega = 2 * M_PI * c->frequency_Hz;
    m->origin = 0.5 * (first + last);
    m->half = 0.5 * (last - first);
    m->start = first;
    m->n_harmonic = harmonics_allowed(m->n_used / m->n_cycle, c->n_harmonic);
    m->n_poly = c->drift_degree + 1;
    /* Below 4 cycles a slow decay can't be told from the drift; the fast one, half a cycle, always can. A record of
     * 4 cycles is one whatever the last digits of its frequency say. */
    m->n_decay = m->n_cycle < 3.95 && c->n_decay > 1 ? 1 : c->n_decay;
    m->rate[0] = 2 * c->frequency_Hz;
    m->rate[1] = 2.5 / length;
    m->n_column = 2 * m->n_harmonic + m->n_poly + m->n_decay;
    if (m->n_used < m->n_column + 2)
        return an_fail(err, AN_E_VALUE, NULL, "%d samples are too few for the %d unknowns of the sine fit", m->n_used,
                       m->n_column + 1);
    return AN_OK;
}

void an_model_row(const an_model *m, double t, double *row)
{
    double phase = m->omega * (t - m->origin);
    double complex turn = cos(phase) + I * sin(phase), power = turn;
    for (int h = 0; h < m->n_harmonic; h++) {
        row[2 * h] = creal(power);
        row[2 * h + 1] = -cimag(power);
        power *= turn;
    }
    double *poly = row + 2 * m->n_harmonic, x = (t - m->origin) / m->half;
    poly[0] = 1;
    if (m->n_poly > 1)
        poly[1] = x;
    for (int k = 2; k < m->n_poly; k++) /* Legendre: k P_k = (2k-1) x P_{k-1} - (k-1) P_{k-2} */
        poly[k] = ((2 * k - 1) * x * poly[k - 1] - (k - 1) * poly[k - 2]) / k;
    for (int k = 0; k < m->n_decay; k++)
        poly[m->n_poly + k] = exp(-m->rate[k] * (t - m->start));
}

double an_model_slope(const an_model *m, double t, const double *row, const double *coefficient)
{
    double sum = 0;
    for (int h = 0; h < m->n_harmonic; h++)
        sum += (h + 1) * (coefficient[2 * h] * row[2 * h + 1] - coefficient[2 * h + 1] * row[2 * h]);
    return (t - m->origin) * sum;
}

/* Lower triangle of the Gram matrix, and right-hand sides. */
static void accumulate(const an_model *m, const an_waveform *w, double gram[AN_COLUMNS][AN_COLUMNS],
                       double rhs[AN_CHANNELS][AN_COLUMNS])
{
    double row[AN_COLUMNS];
    for (int i = 0; i < w->n; i++) {
        if (!counts(w, i))
            continue;
        an_model_row(m, w->time_s[i], row);
        for (int j = 0; j < m->n_column; j++) {
            for (int k = 0; k <= j; k++)
                gram[j][k] += row[j] * row[k];
            rhs[AN_DISPLACEMENT][j] += row[j] * w->y[AN_DISPLACEMENT][i];
            rhs[AN_FORCE][j] += row[j] * w->y[AN_FORCE][i];
        }
    }
}

/* Inverse of a symmetric positive matrix given by its lower triangle. */
static int invert(int n, double gram[AN_COLUMNS][AN_COLUMNS], double inverse[AN_COLUMNS][AN_COLUMNS])
{
    for (int j = 0; j < n; j++)
        for (int k = 0; k < n; k++)
            inverse[j][k] = k <= j ? gram[j][k] : gram[k][j];
    gsl_matrix_view view = gsl_matrix_view_array_with_tda(&inverse[0][0], (size_t)n, (size_t)n, AN_COLUMNS);
    gsl_error_handler_t *before = gsl_set_error_handler_off();
    int bad = gsl_linalg_cholesky_decomp1(&view.matrix) || gsl_linalg_cholesky_invert(&view.matrix);
    gsl_set_error_handler(before);
    return bad;
}

static void multiply(int n, double a[AN_COLUMNS][AN_COLUMNS], const double *x, double *y)
{
    for (int j = 0; j < n; j++) {
        y[j] = 0;
        for (int k = 0; k < n; k++)
            y[j] += a[j][k] * x[k];
    }
}

/* Residuals, and how the model's slope in omega stands to columns and residuals. */
static void second_pass(const an_model *m, const an_waveform *w, an_solution *s, double *residual)
{
    double row[AN_COLUMNS];
    for (int i = 0; i < w->n; i++) {
        double t = w->time_s[i], r[AN_CHANNELS];
        an_model_row(m, t, row);
        for (int c = 0; c < AN_CHANNELS; c++) {
            double y = 0;
            for (int j = 0; j < m->n_column; j++)
                y += s->coefficient[c][j] * row[j];
            residual[(size_t)c * (size_t)w->n + (size_t)i] = r[c] = w->y[c][i] - y;
            if (!counts(w, i))
                continue;
            double g = an_model_slope(m, t, row, s->coefficient[c]);
            for (int j = 0; j < m->n_column; j++)
                s->slope_column[c][j] += g * row[j];
            s->slope_self[c] += g * g;
            s->slope_residual[c] += g * r[c];
            s->sum_square[c] += r[c] * r[c];
        }
        if (counts(w, i))
            s->sum_cross += r[0] * r[1];
    }
}

/* Take off the slope what the columns explain. */
static void project_slope(const an_model *m, an_solution *s)
{
    double back[AN_COLUMNS];
    for (int c = 0; c < AN_CHANNELS; c++) {
        multiply(m->n_column, s->inverse, s->slope_column[c], back);
        for (int j = 0; j < m->n_column; j++)
            s->slope_self[c] -= back[j] * s->slope_column[c][j];
    }
}

/* One step of iterative refinement: what the columns still find in the residual. Squared conditions cost
 * digits; this brings them back. */
static void refine(const an_model *m, const an_waveform *w, an_solution *s)
{
    double row[AN_COLUMNS], rhs[AN_CHANNELS][AN_COLUMNS] = {{0}}, step[AN_COLUMNS];
    for (int i = 0; i < w->n; i++) {
        if (!counts(w, i))
            continue;
        an_model_row(m, w->time_s[i], row);
        for (int c = 0; c < AN_CHANNELS; c++) {
            double r = w->y[c][i];
            for (int j = 0; j < m->n_column; j++)
                r -= s->coefficient[c][j] * row[j];
            for (int j = 0; j < m->n_column; j++)
                rhs[c][j] += row[j] * r;
        }
    }
    for (int c = 0; c < AN_CHANNELS; c++) {
        multiply(m->n_column, s->inverse, rhs[c], step);
        for (int j = 0; j < m->n_column; j++)
            s->coefficient[c][j] += step[j];
    }
}

an_status an_model_solve(const an_model *m, const an_waveform *w, an_solution *s, double *residual,
                         an_error *err)
{
    double gram[AN_COLUMNS][AN_COLUMNS] = {{0}}, rhs[AN_CHANNELS][AN_COLUMNS] = {{0}};
    memset(s, 0, sizeof *s);
    accumulate(m, w, gram, rhs);
    if (invert(m->n_column, gram, s->inverse))
        return an_fail(err, AN_E_NUMERIC, NULL, "sine fit: the samples can't tell the model's %d terms apart",
                       m->n_column);
    for (int c = 0; c < AN_CHANNELS; c++)
        multiply(m->n_column, s->inverse, rhs[c], s->coefficient[c]);
    refine(m, w, s);
    second_pass(m, w, s, residual);
    project_slope(m, s);
    return AN_OK;
}
