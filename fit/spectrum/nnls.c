/* Non-negative least squares by an active set. Stage: the inner problem of every spectrum. Method: Lawson &
 * Hanson [LH74, ch. 23] on one transformed copy of the matrix: a column enters by a Householder reflection,
 * leaves by Givens rotations. Range: up to some hundred columns; no allocation while solving. */
#include "anelast/nnls.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* A column whose part outside the passive span is below this share of its length counts as dependent on it.
 */
static const double dependent_below = 1e-13;
/* A dual below this share of |b| is rounding: it could lower the sum of squares by its 1e-22nd part. */
static const double dual_above = 1e-11;

void an_nnls_init(an_nnls *nnls)
{
    *nnls = (an_nnls){0};
}

void an_nnls_clear(an_nnls *nnls)
{
    free(nnls->work.value);
    free(nnls->rhs);
    free(nnls->z);
    free(nnls->x);
    free(nnls->norm);
    free(nnls->order);
    free(nnls->barred);
    an_nnls_init(nnls);
}

an_status an_nnls_alloc(an_nnls *nnls, size_t most_rows, size_t most_columns, an_error *err)
{
    an_nnls_clear(nnls);
    size_t rows = most_rows ? most_rows : 1, columns = most_columns ? most_columns : 1;
    nnls->work.value = calloc(rows * columns, sizeof *nnls->work.value);
    nnls->rhs = calloc(rows, sizeof *nnls->rhs);
    nnls->z = calloc(columns, sizeof *nnls->z);
    nnls->x = calloc(columns, sizeof *nnls->x);
    nnls->norm = calloc(columns, sizeof *nnls->norm);
    nnls->order = calloc(columns, sizeof *nnls->order);
    nnls->barred = calloc(columns, sizeof *nnls->barred);
    if (!nnls->work.value || !nnls->rhs || !nnls->z || !nnls->x || !nnls->norm || !nnls->order ||
        !nnls->barred) {
        an_nnls_clear(nnls);
        return an_fail_memory(err, "a non-negative least-squares problem");
    }
    nnls->most_rows = most_rows;
    nnls->most_columns = most_columns;
    return AN_OK;
}

/* Copy the problem, columns to unit length, the passive set empty. Returns 0 where a value is not finite. */
static int load_problem(an_nnls *nnls, const an_columns *a, const double *b, const double *x)
{
    nnls->n_row = a->n_row;
    nnls->n_column = a->n_column;
    nnls->n_passive = 0;
    nnls->work.n_row = nnls->work.stride = a->n_row;
    nnls->work.n_column = a->n_column;
    double sum = 0;
    for (size_t j = 0; j < a->n_column; j++) {
        const double *from = an_column(a, j);
        double *to = an_column(&nnls->work, j);
        nnls->norm[j] = sqrt(an_dot(from, from, a->n_row));
        double scale = nnls->norm[j] > 0 ? 1 / nnls->norm[j] : 0;
        for (size_t i = 0; i < a->n_row; i++)
            to[i] = from[i] * scale;
        nnls->x[j] = x[j] > 0 ? x[j] * nnls->norm[j] : 0;
        nnls->order[j] = j;
        nnls->barred[j] = 0;
        sum += nnls->norm[j] + nnls->x[j];
    }
    memcpy(nnls->rhs, b, a->n_row * sizeof *b);
    return isfinite(sum) && isfinite(an_dot(b, b, a->n_row));
}

/* Take the column at position p >= n_passive of the order into the passive set. Returns 0 where it depends on
 * the set. */
static int enter(an_nnls *nnls, size_t p)
{
    size_t k = nnls->n_passive, j = nnls->order[p];
    if (k >= nnls->n_row)
        return 0;
    size_t n = nnls->n_row - k;
    double *v = an_column(&nnls->work, j) + k;
    double length = sqrt(an_dot(v, v, n));
    if (!(length > dependent_below))
        return 0;
    double alpha = v[0] > 0 ? -length : length;
    v[0] -= alpha;
    double half = -alpha * v[0];
    for (size_t q = k; q < nnls->n_column; q++) {
        if (q == p)
            continue;
        double *c = an_column(&nnls->work, nnls->order[q]) + k;
        an_axpy(-an_dot(v, c, n) / half, v, c, n);
    }
    an_axpy(-an_dot(v, nnls->rhs + k, n) / half, v, nnls->rhs + k, n);
    v[0] = alpha;
    memset(v + 1, 0, (n - 1) * sizeof *v);
    nnls->order[p] = nnls->order[k];
    nnls->order[k] = j;
    nnls->n_passive++;
    return 1;
}

static inline void rotate(double *pair, double c, double s)
{
    double upper = c * pair[0] + s * pair[1];
    pair[1] = c * pair[1] - s * pair[0];
    pair[0] = upper;
}

/* Put the column at position p < n_passive out of the passive set, and restore the triangle. */
static void leave(an_nnls *nnls, size_t p)
{
    size_t j = nnls->order[p];
    for (size_t q = p + 1; q < nnls->n_passive; q++)
        nnls->order[q - 1] = nnls->order[q];
    nnls->order[--nnls->n_passive] = j;
    for (size_t k = p; k < nnls->n_passive; k++) {
        double *pivot = an_column(&nnls->work, nnls->order[k]) + k;
        double length = hypot(pivot[0], pivot[1]);
        if (length == 0)
            continue;
        double c = pivot[0] / length, s = pivot[1] / length;
        for (size_t q = k; q < nnls->n_column; q++)
            rotate(an_column(&nnls->work, nnls->order[q]) + k, c, s);
        rotate(nnls->rhs + k, c, s);
        pivot[1] = 0;
    }
}

/* z: the least-squares solution on the passive set, in order of entry. */
static void solve_passive(an_nnls *nnls)
{
    memcpy(nnls->z, nnls->rhs, nnls->n_passive * sizeof *nnls->z);
    for (size_t p = nnls->n_passive; p-- > 0;) {
        const double *c = an_column(&nnls->work, nnls->order[p]);
        nnls->z[p] /= c[p];
        an_axpy(-nnls->z[p], c, nnls->z, p);
    }
}

/* The passive position that meets zero first on the way from x to z, and the share of the way; n_passive, 1
 * where none. */
static size_t first_to_leave(const an_nnls *nnls, double *share)
{
    size_t first = nnls->n_passive;
    *share = 1;
    for (size_t p = 0; p < nnls->n_passive; p++) {
        if (nnls->z[p] > 0)
            continue;
        double x = nnls->x[nnls->order[p]];
        double way = x > 0 ? x / (x - nnls->z[p]) : 0;
        if (first == nnls->n_passive || way < *share) {
            *share = way;
            first = p;
        }
    }
    return first;
}

/* Walk from x towards z until an entry meets zero; put out those that do. Returns their number, 0 where z was
 * reached. */
static size_t step_back(an_nnls *nnls)
{
    double share;
    size_t first = first_to_leave(nnls, &share);
    if (first == nnls->n_passive) {
        for (size_t p = 0; p < nnls->n_passive; p++)
            nnls->x[nnls->order[p]] = nnls->z[p];
        return 0;
    }
    for (size_t p = 0; p < nnls->n_passive; p++) {
        double *x = &nnls->x[nnls->order[p]];
        *x += share * (nnls->z[p] - *x);
    }
    nnls->x[nnls->order[first]] = 0;
    size_t n_left = 0;
    for (size_t p = nnls->n_passive; p-- > 0;) {
        size_t j = nnls->order[p];
        if (nnls->x[j] > 0)
            continue;
        nnls->x[j] = 0;
        leave(nnls, p);
        n_left++;
    }
    return n_left;
}

/* The position of the column at zero that lowers the sum of squares fastest; n_column where there is none. */
static size_t best_entrant(const an_nnls *nnls, double least)
{
    size_t k = nnls->n_passive, best = nnls->n_column;
    for (size_t p = k; p < nnls->n_column; p++) {
        size_t j = nnls->order[p];
        if (nnls->barred[j] || nnls->norm[j] == 0)
            continue;
        double dual = an_dot(an_column(&nnls->work, j) + k, nnls->rhs + k, nnls->n_row - k);
        if (dual > least) {
            least = dual;
            best = p;
        }
    }
    return best;
}

/* Bring in the warm start's columns, in their order. */
static void enter_warm(an_nnls *nnls, size_t *n_step)
{
    for (size_t j = 0; j < nnls->n_column; j++) {
        if (!(nnls->x[j] > 0))
            continue;
        size_t p = nnls->n_passive;
        while (nnls->order[p] != j)
            p++;
        if (!enter(nnls, p))
            nnls->x[j] = 0;
        ++*n_step;
    }
}

/* Solve on the passive set and walk there, until no entry has to leave. */
static void settle(an_nnls *nnls, size_t *n_step)
{
    size_t n_left;
    do {
        solve_passive(nnls);
        n_left = step_back(nnls);
        *n_step += n_left;
    } while (n_left > 0 && nnls->n_passive > 0);
}

/* One entrant: nonzero where it moved the solution, so that barred columns may try again. */
static int try_entrant(an_nnls *nnls, size_t p, size_t *n_step)
{
    size_t j = nnls->order[p];
    ++*n_step;
    if (!enter(nnls, p)) {
        nnls->barred[j] = 1;
        return 0;
    }
    solve_passive(nnls);
    if (!(nnls->z[nnls->n_passive - 1] > 0)) { /* the dual was rounding only */
        leave(nnls, nnls->n_passive - 1);
        nnls->barred[j] = 1;
        return 0;
    }
    settle(nnls, n_step);
    return 1;
}

static void certify(const an_nnls *nnls, const double *b, an_nnls_certificate *certificate)
{
    size_t k = nnls->n_passive, n = nnls->n_row - k;
    double length = sqrt(an_dot(b, b, nnls->n_row));
    certificate->n_passive = k;
    certificate->residual_square = an_dot(nnls->rhs + k, nnls->rhs + k, n);
    certificate->worst_dual = certificate->worst_slope = 0;
    for (size_t p = 0; length > 0 && p < nnls->n_column; p++) {
        const double *column = an_column(&nnls->work, nnls->order[p]);
        double dual = an_dot(column + k, nnls->rhs + k, n) / length;
        if (p >= k && dual > certificate->worst_dual)
            certificate->worst_dual = dual;
        if (p < k && fabs(dual) > certificate->worst_slope)
            certificate->worst_slope = fabs(dual);
    }
}

an_status an_nnls_solve(an_nnls *nnls, const an_columns *a, const double *b, double *x,
                        an_nnls_certificate *certificate)
{
    if (a->n_row > nnls->most_rows || a->n_column > nnls->most_columns)
        return AN_E_USAGE;
    if (!load_problem(nnls, a, b, x))
        return AN_E_NUMERIC;
    size_t n_step = 0, most = 10 * a->n_column + 10;
    double least = dual_above * sqrt(an_dot(b, b, a->n_row));
    enter_warm(nnls, &n_step);
    if (nnls->n_passive > 0)
        settle(nnls, &n_step);
    for (;;) {
        size_t p = best_entrant(nnls, least);
        if (p == nnls->n_column)
            break;
        if (n_step > most)
            return AN_E_NUMERIC;
        if (try_entrant(nnls, p, &n_step))
            memset(nnls->barred, 0, nnls->n_column);
    }
    for (size_t j = 0; j < a->n_column; j++)
        x[j] = nnls->norm[j] > 0 ? nnls->x[j] / nnls->norm[j] : 0;
    if (certificate) {
        certify(nnls, b, certificate);
        certificate->n_step = n_step;
    }
    return AN_OK;
}

void an_nnls_half(const an_nnls *nnls, double *v, double *scratch)
{
    for (size_t p = 0; p < nnls->n_passive; p++) {
        size_t j = nnls->order[p];
        const double *c = an_column(&nnls->work, j);
        scratch[p] = (v[j] / nnls->norm[j] - an_dot(c, scratch, p)) / c[p];
    }
    memcpy(v, scratch, nnls->n_passive * sizeof *v);
}
