/* cell.c: isotherms and cells from the bursts that isotherm.c sorted. A frequency repeated on an isotherm
 * (within half a percent) is one cell; the first of its bursts against the last is the drift check. What was
 * skipped leaves no cell: a missing cell stays missing and is never interpolated.
 */
#include "reduce/grid/average.h"

#include "anelast/quantity.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Frequencies that differ by less are one: set frequencies are kept to 0.5 % (common practice). */
static const double same_frequency = 0.005;

static int by_cell(const void *a, const void *b)
{
    const an_member *one = a, *two = b;
    if (one->isotherm != two->isotherm)
        return one->isotherm - two->isotherm;
    if (one->point->frequency_Hz != two->point->frequency_Hz)
        return one->point->frequency_Hz < two->point->frequency_Hz ? -1 : 1;
    if (one->i_run != two->i_run)
        return one->i_run - two->i_run;
    return one->point->burst - two->point->burst;
}

static int by_run(const void *a, const void *b)
{
    const an_member *one = a, *two = b;
    if (one->i_run != two->i_run)
        return one->i_run - two->i_run;
    return one->point->burst - two->point->burst;
}

/* How many members from here on are of one isotherm and one frequency. */
static int cell_size(const an_member *member, int n)
{
    int i = 1;
    while (i < n && member[i].isotherm == member->isotherm &&
           member[i].point->frequency_Hz <= member->point->frequency_Hz * (1 + same_frequency))
        i++;
    return i;
}

static an_status carry_remarks(const an_point *point, an_remark_list *remarks, an_error *err)
{
    for (size_t i = 0; i < point->remarks.n; i++) {
        const an_remark *remark = &point->remarks.rows[i];
        AN_TRY(an_remark_list_add_as(remarks, remark->kind->code, remark->severity, point->burst, err, "%s",
                                     remark->text));
    }
    return AN_OK;
}

/* The first and the last burst of a run in one cell: their difference in ln|E*|, and its noise. */
static double drift_of(const an_member *first, const an_member *last, double *u)
{
    an_logarithm one, two;
    an_logarithm_of(first->point, &one);
    an_logarithm_of(last->point, &two);
    *u = sqrt(one.noise[0] + two.noise[0]);
    return two.modulus - one.modulus;
}

static an_status check_drift(const an_member *member, int n, double limit, an_cell *cell, an_error *err)
{
    for (int i = 0, m; i < n; i += m) {
        for (m = 1; i + m < n && member[i + m].i_run == member[i].i_run; m++)
            ;
        double u = 0, drift = m > 1 ? drift_of(&member[i], &member[i + m - 1], &u) : 0;
        if (fabs(expm1(drift)) - 2 * u <= limit)
            continue;
        AN_TRY(an_remark_list_add(
            &cell->remarks, "drift-check", member[i + m - 1].point->burst, err,
            "at %.4g Hz and %.1f °C burst %d reads %+.1f %% against burst %d; up to %.3g %% is allowed",
            cell->frequency_Hz, cell->temperature_K - AN_ZERO_CELSIUS_K, member[i + m - 1].point->burst,
            100 * expm1(drift), member[i].point->burst, 100 * limit));
    }
    return AN_OK;
}

/* How the cells of one grid are made. */
typedef struct making {
    double drift_limit; /* [1] */
    an_sharing sharing;
    an_scatter_sum scatter;
} making;

static an_status fill_cell(an_member *member, int n, making *how, an_cell *cell, an_error *err)
{
    qsort(member, (size_t)n, sizeof *member, by_run);
    cell->isotherm = member->isotherm;
    cell->burst = member->point->burst;
    cell->n_repeat = n;
    an_average(member, n, &how->sharing, cell);
    an_scatter_add(member, n, &how->scatter);
    for (int i = 0; i < n; i++)
        AN_TRY(carry_remarks(member[i].point, &cell->remarks, err));
    return check_drift(member, n, how->drift_limit, cell, err);
}

/* The mean temperature of an isotherm, its uncertainty (of noise, or of the scatter where that is more) and
 * its spread. */
static void fill_isotherm(const an_member *member, int n, an_isotherm *isotherm)
{
    double least = INFINITY, most = -INFINITY, sum = 0, noise = 0, square = 0,
           set = member->point->set_temperature_K;
    for (int i = 0; i < n; i++) {
        const an_point *point = member[i].point;
        least = fmin(least, point->temperature_K);
        most = fmax(most, point->temperature_K);
        sum += point->temperature_K;
        noise += point->u_temperature_K * point->u_temperature_K;
        if (point->set_temperature_K != set)
            set = NAN;
    }
    isotherm->temperature_K = sum / n;
    for (int i = 0; i < n; i++)
        square += pow(member[i].point->temperature_K - isotherm->temperature_K, 2);
    double scatter = n > 1 ? square / (n - 1) : 0;
    isotherm->u_temperature_K = sqrt(fmax(isfinite(noise) ? noise / n : 0, scatter) / n);
    isotherm->set_temperature_K = set;
    isotherm->drift_K = most - least;
}

/* The fastest of the plateaus that make an isotherm speaks for it. */
static void carry_plateaus(const an_gathering *gathering, an_grid *grid)
{
    for (int i = 0; i < gathering->n_plateau; i++) {
        const an_plateau *plateau = &gathering->plateau[i];
        if (plateau->isotherm < 0)
            continue;
        an_isotherm *isotherm = &grid->isotherm[plateau->isotherm];
        isotherm->cooling = plateau->cooling;
        if (isnan(isotherm->rate_K_s) || fabs(plateau->rate_K_s) - 3 * plateau->u_rate_K_s >
                                             fabs(isotherm->rate_K_s) - 3 * isotherm->u_rate_K_s) {
            isotherm->rate_K_s = plateau->rate_K_s;
            isotherm->u_rate_K_s = plateau->u_rate_K_s;
        }
    }
}

static an_status make_cells(an_member *member, int n, making *how, an_grid *grid, an_error *err)
{
    for (int i = 0, m; i < n; i += m) {
        m = cell_size(member + i, n - i);
        int k = member[i].isotherm;
        if (k < 0) {
            for (int r = 0; r < m; r++)
                AN_TRY(fill_cell(member + i + r, 1, how, &grid->ramp[grid->n_ramp++], err));
            continue;
        }
        an_isotherm *isotherm = &grid->isotherm[k];
        if (isotherm->n_cell++ == 0) {
            int size = 1;
            while (i + size < n && member[i + size].isotherm == k)
                size++;
            isotherm->first_cell = grid->n_cell;
            fill_isotherm(member + i, size, isotherm);
        }
        AN_TRY(fill_cell(member + i, m, how, &grid->cell[grid->n_cell++], err));
    }
    return AN_OK;
}

static int by_temperature(const void *a, const void *b)
{
    const an_cell *one = a, *two = b;
    if (one->temperature_K != two->temperature_K)
        return one->temperature_K < two->temperature_K ? -1 : 1;
    return one->burst - two->burst;
}

static an_status allocate(const an_gathering *gathering, an_grid *grid, an_error *err)
{
    size_t n = (size_t)gathering->n_member + 1;
    grid->isotherm = calloc((size_t)gathering->n_isotherm + 1, sizeof *grid->isotherm);
    grid->cell = calloc(n, sizeof *grid->cell);
    grid->ramp = calloc(n, sizeof *grid->ramp);
    if (!grid->isotherm || !grid->cell || !grid->ramp)
        return an_fail_memory(err, "cells of a grid");
    grid->n_isotherm = gathering->n_isotherm;
    for (int i = 0; i < grid->n_isotherm; i++)
        grid->isotherm[i].rate_K_s = grid->isotherm[i].u_rate_K_s = NAN;
    return AN_OK;
}

an_status an_cells_make(const an_gathering *gathering, const an_cell_rules *rules, an_grid *grid,
                        an_error *err)
{
    making how = {.drift_limit = rules->drift_limit, .sharing = rules->sharing};
    AN_TRY(allocate(gathering, grid, err));
    an_member *member = malloc(((size_t)gathering->n_member + 1) * sizeof *member);
    if (!member)
        return an_fail_memory(err, "cells of a grid");
    memcpy(member, gathering->member, (size_t)gathering->n_member * sizeof *member);
    qsort(member, (size_t)gathering->n_member, sizeof *member, by_cell);
    an_status status = make_cells(member, gathering->n_member, &how, grid, err);
    free(member);
    qsort(grid->ramp, (size_t)grid->n_ramp, sizeof *grid->ramp, by_temperature);
    carry_plateaus(gathering, grid);
    an_scatter_close(&how.scatter, rules->n_run, &grid->scatter);
    return status;
}
