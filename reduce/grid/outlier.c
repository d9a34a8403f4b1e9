/* outlier.c: cells that do not lie on the smooth curve of their isotherm are marked, and stay in the
 * document.
 *
 * Relaxation is smooth in log frequency: one Maxwell element already spreads its loss over more than a decade
 * [FE80]. So ln|E*| and delta of a cell follow from its neighbours on the isotherm, two on each side, by
 * cubic interpolation (quadratic next to the edges). The miss is held against what can explain it: the noise
 * of the cell and of its neighbours, a floor, and a share of what separates the interpolation from a straight
 * line, since where the curve bends interpolation is less sure. Of the cells that miss, the one is marked
 * without which the others miss least, and the rest is judged again without it: a bad cell makes its
 * neighbours miss too. An isotherm of which more than a quarter would be marked is left alone: that is not an
 * outlier but another material.
 */
#include "reduce/grid/parts.h"

#include "anelast/quantity.h"

#include <math.h>
#include <stdlib.h>

/* Smoothness better than this is not asked for: 0.2 % in |E*| and 2 mrad in delta, near what set-up and
 * control of a bench leave from burst to burst (common practice: isotherms repeat to a few tenths of a
 * percent). */
static const double floor_modulus = 0.002, floor_delta_rad = 0.002;

/* Share of the difference between the interpolation and the straight line that may be wrong in the
 * interpolation. */
static const double bend_share = 0.3;

/* Marked beyond this many of its explained deviations. */
static const double significance = 5;

/* One isotherm while it is judged. */
typedef struct judged {
    int n;
    double *x;           /* [n] ln f */
    double *y[2];        /* [n] ln|E*|, delta [rad] */
    double *variance[2]; /* [n] with the floor */
    an_cell *cell;       /* [n] */
} judged;

/* Cells of an isotherm that another is held against. */
typedef struct neighbours {
    int n;
    int at[4]; /* [n] */
} neighbours;

/* Interpolation at x by Lagrange; the sum of its squared weights times their variances beside it. */
static double interpolate(const judged *curve, int i_quantity, const neighbours *beside, double x,
                          double *variance)
{
    double sum = 0;
    *variance = 0;
    for (int i = 0; i < beside->n; i++) {
        double weight = 1, x_i = curve->x[beside->at[i]];
        for (int k = 0; k < beside->n; k++)
            if (k != i)
                weight *= (x - curve->x[beside->at[k]]) / (x_i - curve->x[beside->at[k]]);
        sum += weight * curve->y[i_quantity][beside->at[i]];
        *variance += weight * weight * curve->variance[i_quantity][beside->at[i]];
    }
    return sum;
}

/* Unmarked neighbours, nearest first on each side; the inner pair first: 4 inside, 3 next to an edge. */
static neighbours find_neighbours(const judged *curve, int at)
{
    int below[3], above[3], n_below = 0, n_above = 0;
    neighbours found = {0};
    for (int i = at - 1; i >= 0 && n_below < 3; i--)
        if (!curve->cell[i].outlier)
            below[n_below++] = i;
    for (int i = at + 1; i < curve->n && n_above < 3; i++)
        if (!curve->cell[i].outlier)
            above[n_above++] = i;
    int most = n_below >= 2 && n_above >= 2 ? 4 : 3;
    for (int i = 0; i < 3; i++) {
        if (i < n_below && found.n < most)
            found.at[found.n++] = below[i];
        if (i < n_above && found.n < most)
            found.at[found.n++] = above[i];
    }
    return found;
}

/* How far a cell misses, as a multiple of what explains a miss. */
static double miss(const judged *curve, int at, int i_quantity, double *by)
{
    neighbours beside = find_neighbours(curve, at), pair = beside;
    *by = 0;
    if (beside.n < 3)
        return 0;
    pair.n = 2;
    double variance, line_variance;
    double value = interpolate(curve, i_quantity, &beside, curve->x[at], &variance);
    double line = interpolate(curve, i_quantity, &pair, curve->x[at], &line_variance);
    double bend = bend_share * (value - line);
    *by = curve->y[i_quantity][at] - value;
    return fabs(*by) / sqrt(variance + curve->variance[i_quantity][at] + bend * bend);
}

/* The larger miss of the two quantities of a cell. */
static double larger_miss(const judged *curve, int at, int *i_quantity, double *by)
{
    double by_modulus, by_delta;
    double modulus = miss(curve, at, 0, &by_modulus), delta = miss(curve, at, 1, &by_delta);
    *i_quantity = delta > modulus;
    *by = delta > modulus ? by_delta : by_modulus;
    return fmax(modulus, delta);
}

/* What is left of the misses of all unmarked cells. */
static double misfit(const judged *curve)
{
    double sum = 0, by;
    int i_quantity;
    for (int i = 0; i < curve->n; i++)
        if (!curve->cell[i].outlier)
            sum += pow(larger_miss(curve, i, &i_quantity, &by), 2);
    return sum;
}

/* Of the cells that miss, the one without which the others miss least: a bad cell makes its neighbours miss
 * as well. -1 where none misses enough. */
static int find_worst(const judged *curve, int *i_quantity, double *by)
{
    int worst = -1;
    double least = INFINITY;
    for (int i = 0; i < curve->n; i++) {
        int quantity;
        double one;
        if (curve->cell[i].outlier || larger_miss(curve, i, &quantity, &one) <= significance)
            continue;
        curve->cell[i].outlier = 1;
        double rest = misfit(curve);
        curve->cell[i].outlier = 0;
        if (rest < least) {
            least = rest;
            worst = i;
            *i_quantity = quantity;
            *by = one;
        }
    }
    return worst;
}

static an_status mark(an_cell *cell, int i_quantity, double by, an_error *err)
{
    cell->outlier = 1;
    if (i_quantity == 0)
        return an_remark_list_add(&cell->remarks, "outlier", cell->burst, err,
                                  "at %.4g Hz and %.1f °C |E*| lies %+.1f %% off the curve of its isotherm",
                                  cell->frequency_Hz, cell->temperature_K - AN_ZERO_CELSIUS_K, 100 * expm1(by));
    return an_remark_list_add(
        &cell->remarks, "outlier", cell->burst, err,
        "at %.4g Hz and %.1f °C the phase lies %+.2f degrees off the curve of its isotherm",
        cell->frequency_Hz, cell->temperature_K - AN_ZERO_CELSIUS_K, by * 180 / M_PI);
}

static void judge_cell(judged *curve, int i, const an_cell *cell)
{
    double square = cell->storage_Pa * cell->storage_Pa + cell->loss_Pa * cell->loss_Pa;
    double c = cell->storage_Pa / square, s = cell->loss_Pa / square;
    double modulus = c * c * cell->noise[0] + 2 * c * s * cell->noise[1] + s * s * cell->noise[2];
    double delta = s * s * cell->noise[0] - 2 * c * s * cell->noise[1] + c * c * cell->noise[2];
    curve->x[i] = log(cell->frequency_Hz);
    curve->y[0][i] = log(square) / 2;
    curve->y[1][i] = atan2(cell->loss_Pa, cell->storage_Pa);
    curve->variance[0][i] = floor_modulus * floor_modulus + (modulus > 0 ? modulus : 0);
    curve->variance[1][i] = floor_delta_rad * floor_delta_rad + (delta > 0 ? delta : 0);
}

static an_status judge_isotherm(judged *curve, an_cell *cell, int n, an_error *err)
{
    int marked[64], i_quantity[64], n_marked = 0;
    double by[64];
    curve->n = n;
    curve->cell = cell;
    for (int i = 0; i < n; i++)
        judge_cell(curve, i, &cell[i]);
    for (int worst;
         n_marked < 64 && (worst = find_worst(curve, &i_quantity[n_marked], &by[n_marked])) >= 0;) {
        marked[n_marked++] = worst;
        cell[worst].outlier = 1;
    }
    int too_many = 4 * n_marked > n;
    for (int i = 0; i < n_marked; i++) {
        cell[marked[i]].outlier = 0;
        if (!too_many)
            AN_TRY(mark(&cell[marked[i]], i_quantity[i], by[i], err));
    }
    return AN_OK;
}

an_status an_outliers_mark(an_grid *grid, an_error *err)
{
    an_status status = AN_OK;
    judged curve = {0};
    double *room = malloc(5 * ((size_t)grid->n_cell + 1) * sizeof *room);
    if (!room)
        return an_fail_memory(err, "outliers of a grid");
    curve.x = room;
    for (int k = 0; k < 2; k++) {
        curve.y[k] = room + (1 + k) * grid->n_cell;
        curve.variance[k] = room + (3 + k) * grid->n_cell;
    }
    for (int i = 0; i < grid->n_isotherm && status >= 0; i++)
        status =
            judge_isotherm(&curve, grid->cell + grid->isotherm[i].first_cell, grid->isotherm[i].n_cell, err);
    free(room);
    return status;
}
