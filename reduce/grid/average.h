/* average.h: private to reduce/grid: means of repeats and replicates, and their scatter.
 */
#ifndef ANELAST_GRID_AVERAGE_H
#define ANELAST_GRID_AVERAGE_H

#include "reduce/grid/parts.h"

/* ln E* of one burst: its real and imaginary part, with their covariances. */
typedef struct an_logarithm {
    double modulus;                    /* [1] ln(|E*| / Pa) */
    double delta;                      /* [rad] */
    double noise[3];                   /* [1, rad, rad2] var ln|E*|, cov, var delta */
    double common[AN_SOURCE_COUNT][2]; /* [1], [rad] for one standard uncertainty of the source */
} an_logarithm;

void an_logarithm_of(const an_point *point, an_logarithm *logarithm);

/* an_average: fill a cell's temperature, frequency, moduli and covariances.
 *   member [in] [n] n >= 1, of one cell, runs together. */
void an_average(const an_member *member, int n, const an_sharing *sharing, an_cell *cell);

/* an_average_runs: from how many runs n members come. */
int an_average_runs(const an_member *member, int n);

/* Sums of squares on the way to a scatter. */
typedef struct an_scatter_sum {
    double within[2], between[2]; /* [1], [rad2] */
    int n_within, n_between;      /* degrees of freedom */
} an_scatter_sum;

void an_scatter_add(const an_member *member, int n, an_scatter_sum *sum);
void an_scatter_close(const an_scatter_sum *sum, int n_run, an_scatter *scatter);

#endif
