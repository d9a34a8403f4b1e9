/* anelast/smooth.h: the regularised spectrum problem on a given grid of modes: whitened data rows reduced to
 * a triangle, rows that hold down the second difference of the modes against their local level, non-negative
 * least squares, and the choice of the strength.
 *
 *   minimise |A x - y|^2 + s^2 sum_i ((x_{i-1} - 2 x_i + x_{i+1}) / level_i)^2,  x >= 0.
 *
 * Dividing by the local level (a running mean of the last solution over a decade) makes the penalty one on
 * the curvature of ln x wherever x is smooth, so that modes of 1e4 Pa and of 1e9 Pa are held alike. The
 * equilibrium modulus is free.
 */
#ifndef ANELAST_SMOOTH_H
#define ANELAST_SMOOTH_H

#include "anelast/nnls.h"

/* How the strength s is chosen. */
typedef enum an_strength_rule {
    AN_STRENGTH_EVIDENCE = 0,    /* greatest probability of the data with the spectrum integrated out [MK92];
                                    keeps covariances honest */
    AN_STRENGTH_DISCREPANCY,     /* the strongest whose chi-square is the number of data [MO66] */
    AN_STRENGTH_CROSS_VALIDATION /* least generalised cross-validation [GHW79] */
} an_strength_rule;

typedef struct an_smooth {
    size_t most_modes;
    size_t n_mode, n_column; /* n_column: n_mode, and one more where an equilibrium modulus is fitted */
    size_t n_data;           /* whitened data rows */
    an_columns triangle;     /* [n_column x n_column] of the data rows; unit 1/Pa; owned */
    double *rhs;             /* [n_column] Q^T y, dimensionless; owned */
    double rest_square;      /* part of |y|^2 that no spectrum can explain */
    double *level_Pa;        /* [n_mode] Pa; owned */
    double *x_Pa;            /* [n_column] solution, Pa; also the warm start of the next solve; owned */
    double strength;         /* s of the last solve, dimensionless */
    double chi_square;       /* |A x - y|^2 */
    double penalty;          /* s^2 times the sum over second differences */
    double used;     /* effective number of parameters, trace of the influence matrix of the positive modes */
    an_columns rows; /* triangle and penalty rows stacked; owned */
    double *rows_rhs; /* owned */
    double *scratch;  /* owned */
    an_nnls nnls;     /* of `rows`; its triangle serves projections */
} an_smooth;

/* an_smooth_init: an empty problem that owns nothing; an_smooth_clear releases. */
void an_smooth_init(an_smooth *smooth);
void an_smooth_clear(an_smooth *smooth);

/* an_smooth_alloc: room for up to most_modes modes. Returns AN_OK or AN_E_MEMORY. */
an_status an_smooth_alloc(an_smooth *smooth, size_t most_modes, an_error *err);

/* an_smooth_load: take the data rows.
 *   rows         [in,out] [n_row x (n_column + 1)] whitened rows by columns, the last column the whitened
 * data; spoiled n_mode       [in]     <= most_modes equilibrium  [in]     nonzero: the column before the last
 * belongs to the equilibrium modulus */
void an_smooth_load(an_smooth *smooth, an_columns *rows, size_t n_mode, int equilibrium);

/* an_smooth_flat: forget solution and level; every mode at the same level [Pa].
 * an_smooth_follow: the level from the solution in x_Pa.
 *   per_decade  [in] modes a decade of the grid */
void an_smooth_flat(an_smooth *smooth, double level_Pa);
void an_smooth_follow(an_smooth *smooth, double per_decade);

/* an_smooth_solve: x, chi_square and penalty at a strength. an_smooth_count: also `used`, for the last solve.
 * Returns AN_OK or AN_E_NUMERIC. */
an_status an_smooth_solve(an_smooth *smooth, double strength);
void an_smooth_count(an_smooth *smooth);

/* an_smooth_choose: the strength by a rule, out of half decades 0.01 .. 1000 (quarter decades for the
 * discrepancy), and the solution there. n_outer   [in]  parameters fitted besides the spectrum, taken off the
 * number of data strength  [in,out] dimensionless; in: above 0, look within a decade of it only; 0:
 * everywhere Returns AN_OK or AN_E_NUMERIC. */
an_status an_smooth_choose(an_smooth *smooth, an_strength_rule rule, size_t n_outer, double *strength);

/* an_smooth_penalty_row: the i-th of n_mode - 2 penalty rows at unit strength: places i, i + 1, i + 2. Unit
 * 1/Pa. */
void an_smooth_penalty_row(const an_smooth *smooth, size_t i, double entry[3]);

#endif
