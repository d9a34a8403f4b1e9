/* Small dense linear algebra of the fits: Householder reduction, triangles, Cholesky. Ground of spectrum and
 * superpose. Methods of [GV13]; written out because they are the hot loops of every fit. Range: well-scaled
 * doubles; a column of zeros is left alone, a matrix that is not positive definite is refused. */
#include "anelast/dense.h"

#include <math.h>
#include <string.h>

/* Four doubles at any address. The compiler maps them on what the machine has; the order of the sums is the
 * same on all. */
typedef double lanes __attribute__((vector_size(32), aligned(8), may_alias));

double an_dot(const double *x, const double *y, size_t n)
{
    lanes even = {0}, odd = {0};
    size_t i = 0;
    for (; i + 8 <= n; i += 8) {
        even += *(const lanes *)(x + i) * *(const lanes *)(y + i);
        odd += *(const lanes *)(x + i + 4) * *(const lanes *)(y + i + 4);
    }
    even += odd;
    double sum = (even[0] + even[1]) + (even[2] + even[3]);
    for (; i < n; i++)
        sum += x[i] * y[i];
    return sum;
}

void an_axpy(double factor, const double *x, double *y, size_t n)
{
    size_t i = 0;
    for (; i + 4 <= n; i += 4)
        *(lanes *)(y + i) += factor * *(const lanes *)(x + i);
    for (; i < n; i++)
        y[i] += factor * x[i];
}

/* Reflect the columns j+1.. of a so that the tail of column j becomes its length. */
static void reflect_column(an_columns *a, size_t j)
{
    size_t n = a->n_row - j;
    double *v = an_column(a, j) + j;
    double length = sqrt(an_dot(v, v, n));
    if (length == 0)
        return;
    double alpha = v[0] > 0 ? -length : length;
    v[0] -= alpha;
    double half = -alpha * v[0]; /* |v|^2 / 2 */
    for (size_t k = j + 1; k < a->n_column; k++) {
        double *c = an_column(a, k) + j;
        an_axpy(-an_dot(v, c, n) / half, v, c, n);
    }
    v[0] = alpha;
    memset(v + 1, 0, (n - 1) * sizeof *v);
}

void an_householder_reduce(an_columns *a, size_t n_pivot)
{
    for (size_t j = 0; j < n_pivot && j < a->n_row; j++)
        reflect_column(a, j);
}

void an_triangle_solve(const an_columns *r, double *x, size_t n)
{
    for (size_t j = n; j-- > 0;) {
        const double *c = an_column(r, j);
        x[j] = c[j] == 0 ? 0 : x[j] / c[j];
        an_axpy(-x[j], c, x, j);
    }
}

void an_triangle_solve_transposed(const an_columns *r, double *x, size_t n)
{
    for (size_t j = 0; j < n; j++) {
        const double *c = an_column(r, j);
        x[j] = c[j] == 0 ? 0 : (x[j] - an_dot(c, x, j)) / c[j];
    }
}

an_status an_spd_factor(double *h, size_t n)
{
    for (size_t i = 0; i < n; i++) {
        double *row = h + i * n;
        for (size_t j = 0; j <= i; j++) {
            double s = row[j] - an_dot(row, h + j * n, j);
            if (j < i)
                row[j] = s / h[j * n + j];
            else if (s > 0)
                row[i] = sqrt(s);
            else
                return AN_E_NUMERIC;
        }
    }
    return AN_OK;
}

void an_spd_lower_solve(const double *factor, double *x, size_t n)
{
    for (size_t i = 0; i < n; i++)
        x[i] = (x[i] - an_dot(factor + i * n, x, i)) / factor[i * n + i];
}

void an_spd_solve(const double *factor, double *x, size_t n)
{
    an_spd_lower_solve(factor, x, n);
    for (size_t i = n; i-- > 0;) {
        x[i] /= factor[i * n + i];
        for (size_t k = 0; k < i; k++)
            x[k] -= x[i] * factor[i * n + k];
    }
}

an_status an_spd_invert(const double *h, size_t n, double *inverse, double *work)
{
    double *factor = work, *scale = work + n * n, *column = scale + n;
    for (size_t i = 0; i < n; i++) {
        if (!(h[i * n + i] > 0))
            return AN_E_NUMERIC;
        scale[i] = 1 / sqrt(h[i * n + i]);
    }
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            factor[i * n + j] = h[i * n + j] * scale[i] * scale[j];
    AN_TRY(an_spd_factor(factor, n));
    for (size_t j = 0; j < n; j++) {
        for (size_t i = 0; i < n; i++)
            column[i] = i == j;
        an_spd_solve(factor, column, n);
        for (size_t i = 0; i <= j; i++)
            inverse[i * n + j] = inverse[j * n + i] = column[i] * scale[i] * scale[j];
    }
    return AN_OK;
}
