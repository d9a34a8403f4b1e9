/* The strength of the regularisation, by three rules. Stage: spectrum and superpose. Method: a grid of
 * strengths, each one small non-negative problem. Evidence [MK92]: with the penalty read as a Gaussian prior
 * on second differences, -2 ln p(y|s) = chi^2 + penalty + ln det(A^T A + s^2 L^T L) - 2 n_L ln s + const.
 * Range: 0.01 .. 1000; outside, the end. */
#include "anelast/smooth.h"

#include <math.h>
#include <string.h>

enum { per_decade = 4, decades = 5 };
static const double weakest = 0.01;

static double strength_at(int i)
{
    return weakest * pow(10, (double)i / per_decade);
}

/* ln det of the stacked rows with columns in units of the level; spoils smooth->rows. */
static double log_determinant(an_smooth *smooth)
{
    double highest = 0, sum = 0;
    for (size_t i = 0; i < smooth->n_mode; i++)
        highest = fmax(highest, smooth->level_Pa[i]);
    for (size_t j = 0; j < smooth->n_column; j++) {
        double unit = j < smooth->n_mode ? smooth->level_Pa[j] : highest;
        double *c = an_column(&smooth->rows, j);
        for (size_t i = 0; i < smooth->rows.n_row; i++)
            c[i] *= unit;
    }
    an_householder_reduce(&smooth->rows, smooth->n_column);
    double largest = 0;
    for (size_t j = 0; j < smooth->n_column; j++)
        largest = fmax(largest, fabs(an_column(&smooth->rows, j)[j]));
    for (size_t j = 0; j < smooth->n_column;
         j++) /* a direction that neither data nor penalty see must not decide */
        sum += 2 * log(fmax(fabs(an_column(&smooth->rows, j)[j]), 1e-12 * largest));
    return sum;
}

/* The figure to be made small by the rule, at the last solve. */
static double figure_of(an_smooth *smooth, an_strength_rule rule)
{
    if (rule == AN_STRENGTH_EVIDENCE) {
        double n_penalty = smooth->n_mode > 2 ? (double)(smooth->n_mode - 2) : 0;
        return smooth->chi_square + smooth->penalty + log_determinant(smooth) -
               2 * n_penalty * log(smooth->strength);
    }
    an_smooth_count(smooth);
    double freedom = (double)smooth->n_data - smooth->used;
    return freedom > 0 ? smooth->chi_square / (freedom * freedom) : INFINITY;
}

/* The strongest whose chi-square is the number of data; where no spectrum gets there, 5 % above the least
 * chi-square. */
static an_status choose_discrepancy(an_smooth *smooth, size_t n_outer, double *strength)
{
    AN_TRY(an_smooth_solve(smooth, weakest));
    double target = (double)smooth->n_data - (double)n_outer;
    target = fmax(target, 1.05 * smooth->chi_square);
    int best = 0;
    for (int i = per_decade * decades; i > 0 && best == 0; i--) {
        AN_TRY(an_smooth_solve(smooth, strength_at(i)));
        if (smooth->chi_square <= target)
            best = i;
    }
    *strength = strength_at(best);
    return an_smooth_solve(smooth, *strength);
}

an_status an_smooth_choose(an_smooth *smooth, an_strength_rule rule, size_t n_outer, double *strength)
{
    if (rule == AN_STRENGTH_DISCREPANCY)
        return choose_discrepancy(smooth, n_outer, strength);
    int first = 0, last = per_decade * decades, best = 0;
    if (*strength > 0) {
        int near = (int)lround(log10(*strength / weakest) * per_decade);
        first = near - per_decade > first ? near - per_decade : first;
        last = near + per_decade < last ? near + per_decade : last;
    }
    double least = INFINITY;
    for (int i = last; i >= first; i -= per_decade / 2) {
        AN_TRY(an_smooth_solve(smooth, strength_at(i)));
        double figure = figure_of(smooth, rule);
        if (figure < least) {
            least = figure;
            best = i;
        }
    }
    *strength = strength_at(best);
    return an_smooth_solve(smooth, *strength);
}
