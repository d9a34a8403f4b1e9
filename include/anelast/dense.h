/* anelast/dense.h: small dense linear algebra of the fits: Householder reduction, triangles, Cholesky.
 *
 * Matrices are stored by columns, because every hot loop runs down a column; symmetric ones are full and
 * row-major, which is the same. Sums are taken in a fixed order, so that results do not change from run to
 * run.
 */
#ifndef ANELAST_DENSE_H
#define ANELAST_DENSE_H

#include <stddef.h>

#include "anelast/status.h"

/* A matrix by columns: element (i, j) is value[i + j stride]. Not owned. */
typedef struct an_columns {
    size_t n_row, n_column;
    size_t stride; /* elements from one column to the next, >= n_row */
    double *value; /* units are the caller's */
} an_columns;

/* an_column: the j-th column. */
static inline double *an_column(const an_columns *a, size_t j)
{
    return a->value + j * a->stride;
}

/* an_dot: sum x_i y_i over n, in a fixed order of eight interleaved partial sums. */
double an_dot(const double *x, const double *y, size_t n);

/* an_axpy: y += factor x over n. */
void an_axpy(double factor, const double *x, double *y, size_t n);

/* an_householder_reduce: reduce the first n_pivot columns of a to an upper triangle by Householder
 * reflections [GV13, Alg. 5.2.1] applied to all columns, so that columns beyond n_pivot (right-hand sides)
 * become Q^T times themselves. Below the triangle the pivot columns hold zeros. a  [in,out] n_row >= 1;
 * n_pivot <= n_column. Where n_pivot > n_row only n_row columns are reduced. */
void an_householder_reduce(an_columns *a, size_t n_pivot);

/* an_triangle_solve: x with R x = x_in, R the leading n x n upper triangle of r; columns whose diagonal is
 * zero get 0. an_triangle_solve_transposed: likewise R^T x = x_in. x  [in,out] [n] */
void an_triangle_solve(const an_columns *r, double *x, size_t n);
void an_triangle_solve_transposed(const an_columns *r, double *x, size_t n);

/* an_spd_factor: Cholesky factor L of a symmetric positive definite matrix, in place (lower triangle).
 *   h  [in,out] [n x n]
 * Returns AN_OK or AN_E_NUMERIC where a pivot is not above zero (then h is spoiled). */
an_status an_spd_factor(double *h, size_t n);

/* an_spd_solve: x with L L^T x = x_in, from the factor. an_spd_lower_solve: x with L x = x_in.
 *   factor  [in] [n x n]; x [in,out] [n] */
void an_spd_solve(const double *factor, double *x, size_t n);
void an_spd_lower_solve(const double *factor, double *x, size_t n);

/* an_spd_invert: the inverse of a symmetric positive definite matrix, scaled by its diagonal on the way.
 *   h        [in]  [n x n], kept
 *   inverse  [out] [n x n], full and exactly symmetric
 *   work     [out] [n x n + 2 n]
 * Returns AN_OK or AN_E_NUMERIC. */
an_status an_spd_invert(const double *h, size_t n, double *inverse, double *work);

#endif
