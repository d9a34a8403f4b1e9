/* anelast/nnls.h: non-negative least squares, min |A x - b| over x >= 0, with a certificate.
 *
 * The active-set method of Lawson & Hanson [LH74, ch. 23]: columns enter by a Householder reflection and
 * leave by Givens rotations, on one transformed copy of A, so that a step costs a fraction of a fresh
 * factorisation. A warm start takes the positive entries of x for the first set; from a good guess one pass
 * decides. Columns are scaled to unit length inside. Range: any shape; nearly dependent columns are left out
 * (x = 0), not divided by.
 */
#ifndef ANELAST_NNLS_H
#define ANELAST_NNLS_H

#include "anelast/dense.h"

/* Workspace: made once for the largest problem, passed in, no allocation while solving. After a solve it
 * holds the triangle of the positive columns, which an_nnls_half uses. */
typedef struct an_nnls {
    size_t most_rows, most_columns;
    an_columns work;       /* transformed copy of A, unit columns; owned */
    double *rhs;           /* [most_rows] Q^T b, unit of b; owned */
    double *z;             /* [most_columns] candidate, scaled; owned */
    double *x;             /* [most_columns] current, scaled; owned */
    double *norm;          /* [most_columns] length of the columns; owned */
    size_t *order;         /* [most_columns] the passive columns in order of entry, then the others; owned */
    unsigned char *barred; /* [most_columns] entered in vain since the last step; owned */
    size_t n_row, n_column, n_passive; /* of the last problem */
} an_nnls;

/* What was reached. The Karush-Kuhn-Tucker conditions hold where both figures are small: no column at zero
 * would lower the sum of squares, and the residual is orthogonal to every positive column. */
typedef struct an_nnls_certificate {
    double residual_square; /* |A x - b|^2, unit of b squared */
    double
        worst_dual; /* greatest a_j^T (b - A x)/(|a_j| |b|) over the columns at zero; <= 0 up to rounding */
    double worst_slope; /* greatest |a_j^T (b - A x)|/(|a_j| |b|) over the positive columns */
    size_t n_passive;   /* positive columns */
    size_t n_step;      /* columns entered and left */
} an_nnls_certificate;

/* an_nnls_init: an empty workspace that owns nothing; an_nnls_clear releases. */
void an_nnls_init(an_nnls *nnls);
void an_nnls_clear(an_nnls *nnls);

/* an_nnls_alloc: room for problems of up to most_rows x most_columns. Returns AN_OK or AN_E_MEMORY. */
an_status an_nnls_alloc(an_nnls *nnls, size_t most_rows, size_t most_columns, an_error *err);

/* an_nnls_solve: minimise |A x - b| over x >= 0.
 *   a            [in]     kept
 *   b            [in]     [a->n_row]
 *   x            [in,out] [a->n_column] in: warm start, positive entries are the first passive set (all zero:
 * cold); out: solution certificate  [out]    NULL allowed Returns AN_OK; AN_E_USAGE where the problem is
 * larger than the workspace; AN_E_NUMERIC where a value is not finite or the set has not settled after 10
 * n_column steps. */
an_status an_nnls_solve(an_nnls *nnls, const an_columns *a, const double *b, double *x,
                        an_nnls_certificate *certificate);

/* an_nnls_half: R^-T v, R the triangle of the positive columns of the last solve (true lengths), so that with
 * v = B^T f the result has the length of f's projection onto the columns B. v  [in,out] in: [n_column], by
 * column; out: first n_passive entries, in the order of entry */
void an_nnls_half(const an_nnls *nnls, double *v, double *scratch);

#endif
