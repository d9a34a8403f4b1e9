/* The regularised spectrum problem: loading, levels, solving at one strength. Stage: spectrum and superpose.
 * Method: the data rows are reduced once to a triangle, so that every strength costs a small problem. Range:
 * as nnls.h. */
#include "anelast/smooth.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Levels below this share of the highest are raised to it: modes far down are not held flat against their own
 * size. */
static const double least_level = 1e-6;

void an_smooth_init(an_smooth *smooth)
{
    *smooth = (an_smooth){0};
}

void an_smooth_clear(an_smooth *smooth)
{
    free(smooth->triangle.value);
    free(smooth->rhs);
    free(smooth->level_Pa);
    free(smooth->x_Pa);
    free(smooth->rows.value);
    free(smooth->rows_rhs);
    free(smooth->scratch);
    an_nnls_clear(&smooth->nnls);
    an_smooth_init(smooth);
}

an_status an_smooth_alloc(an_smooth *smooth, size_t most_modes, an_error *err)
{
    an_smooth_clear(smooth);
    size_t n = most_modes + 1;
    smooth->triangle.value = calloc(n * n, sizeof(double));
    smooth->rhs = calloc(n, sizeof(double));
    smooth->level_Pa = calloc(n, sizeof(double));
    smooth->x_Pa = calloc(n, sizeof(double));
    smooth->rows.value = calloc(2 * n * n, sizeof(double));
    smooth->rows_rhs = calloc(2 * n, sizeof(double));
    smooth->scratch = calloc(2 * n, sizeof(double));
    if (!smooth->triangle.value || !smooth->rhs || !smooth->level_Pa || !smooth->x_Pa ||
        !smooth->rows.value || !smooth->rows_rhs || !smooth->scratch ||
        an_nnls_alloc(&smooth->nnls, 2 * n, n, NULL) < 0) {
        an_smooth_clear(smooth);
        return an_fail_memory(err, "a regularised spectrum");
    }
    smooth->most_modes = most_modes;
    return AN_OK;
}

void an_smooth_load(an_smooth *smooth, an_columns *rows, size_t n_mode, int equilibrium)
{
    size_t n = n_mode + (equilibrium ? 1 : 0);
    smooth->n_mode = n_mode;
    smooth->n_column = n;
    smooth->n_data = rows->n_row;
    smooth->triangle.n_row = smooth->triangle.n_column = smooth->triangle.stride = n;
    rows->n_column = n + 1;
    an_householder_reduce(rows, n);
    size_t kept = rows->n_row < n ? rows->n_row : n;
    for (size_t j = 0; j < n; j++) {
        double *to = an_column(&smooth->triangle, j);
        memset(to, 0, n * sizeof *to);
        memcpy(to, an_column(rows, j), (j + 1 < kept ? j + 1 : kept) * sizeof *to);
    }
    const double *y = an_column(rows, n);
    memset(smooth->rhs, 0, n * sizeof *smooth->rhs);
    memcpy(smooth->rhs, y, kept * sizeof *y);
    smooth->rest_square = an_dot(y + kept, y + kept, rows->n_row - kept);
}

void an_smooth_flat(an_smooth *smooth, double level_Pa)
{
    for (size_t i = 0; i < smooth->n_mode; i++)
        smooth->level_Pa[i] = level_Pa;
    memset(smooth->x_Pa, 0, smooth->n_column * sizeof *smooth->x_Pa);
}

void an_smooth_follow(an_smooth *smooth, double per_decade)
{
    long n = (long)smooth->n_mode, half = lround(per_decade / 2);
    if (half < 1)
        half = 1;
    double highest = 0;
    for (long i = 0; i < n; i++) {
        double sum = 0;
        for (long k = i - half; k <= i + half; k++)
            sum += smooth->x_Pa[k < 0 ? 0 : k >= n ? n - 1 : k];
        smooth->level_Pa[i] = sum / (double)(2 * half + 1);
        highest = fmax(highest, smooth->level_Pa[i]);
    }
    for (long i = 0; i < n; i++)
        smooth->level_Pa[i] = highest > 0 ? fmax(smooth->level_Pa[i], least_level * highest) : 1;
}

void an_smooth_penalty_row(const an_smooth *smooth, size_t i, double entry[3])
{
    double scale = 1 / smooth->level_Pa[i + 1];
    entry[0] = entry[2] = scale;
    entry[1] = -2 * scale;
}

/* Stack the triangle over the penalty rows. */
static void stack_rows(an_smooth *smooth, double strength)
{
    size_t n = smooth->n_column, n_penalty = smooth->n_mode > 2 ? smooth->n_mode - 2 : 0;
    smooth->rows.n_row = smooth->rows.stride = n + n_penalty;
    smooth->rows.n_column = n;
    for (size_t j = 0; j < n; j++) {
        double *to = an_column(&smooth->rows, j);
        memcpy(to, an_column(&smooth->triangle, j), n * sizeof *to);
        memset(to + n, 0, n_penalty * sizeof *to);
    }
    for (size_t i = 0; i < n_penalty; i++) {
        double entry[3];
        an_smooth_penalty_row(smooth, i, entry);
        for (size_t k = 0; k < 3; k++)
            an_column(&smooth->rows, i + k)[n + i] = strength * entry[k];
    }
    memcpy(smooth->rows_rhs, smooth->rhs, n * sizeof *smooth->rhs);
    memset(smooth->rows_rhs + n, 0, n_penalty * sizeof *smooth->rows_rhs);
}

an_status an_smooth_solve(an_smooth *smooth, double strength)
{
    stack_rows(smooth, strength);
    an_nnls_certificate seen;
    AN_TRY(an_nnls_solve(&smooth->nnls, &smooth->rows, smooth->rows_rhs, smooth->x_Pa, &seen));
    smooth->strength = strength;
    smooth->penalty = 0;
    for (size_t i = 0; i + 2 < smooth->n_mode; i++) {
        double entry[3];
        an_smooth_penalty_row(smooth, i, entry);
        double d = strength * (entry[0] * smooth->x_Pa[i] + entry[1] * smooth->x_Pa[i + 1] +
                               entry[2] * smooth->x_Pa[i + 2]);
        smooth->penalty += d * d;
    }
    smooth->chi_square = smooth->rest_square + fmax(seen.residual_square - smooth->penalty, 0);
    return AN_OK;
}

void an_smooth_count(an_smooth *smooth)
{
    size_t n = smooth->n_column;
    double *v = smooth->scratch;
    smooth->used = (double)smooth->nnls.n_passive;
    for (size_t i = 0; i + 2 < smooth->n_mode; i++) {
        double entry[3];
        an_smooth_penalty_row(smooth, i, entry);
        memset(v, 0, n * sizeof *v);
        for (size_t k = 0; k < 3; k++)
            v[i + k] = smooth->strength * entry[k];
        an_nnls_half(&smooth->nnls, v, v + n);
        smooth->used -= an_dot(v, v, smooth->nnls.n_passive);
    }
}
