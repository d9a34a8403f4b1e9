/* Non-negative least squares against problems whose optimum is known, and against the Karush-Kuhn-Tucker
 * conditions, which are necessary and sufficient for this convex problem [LH74, ch. 23]. */
#include "anelast/nnls.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>
#include <cmocka.h>

#include "check.h"

static void closed_form_optimum(void **state)
{
    (void)state;
    /* A = I: the optimum is the positive part of b; two columns by hand: the unconstrained solution of
     * [1 1; 1 2; 1 3] x = [3; 2; 1] is (4, -1), so x2 = 0 and x1 = mean(b) = 2. */
    double a[] = {1, 1, 1, 1, 2, 3}, b[] = {3, 2, 1}, x[2] = {0};
    an_columns columns = {3, 2, 3, a};
    an_nnls nnls;
    an_nnls_init(&nnls);
    assert_int_equal(an_nnls_alloc(&nnls, 3, 3, NULL), AN_OK);
    an_nnls_certificate seen;
    assert_int_equal(an_nnls_solve(&nnls, &columns, b, x, &seen), AN_OK);
    assert_close(x[0], 2, 1e-14);
    assert_close(x[1], 0, 0);
    assert_close(seen.residual_square, 2, 1e-13);
    double unit[] = {1, 0, 0, 0, 1, 0, 0, 0, 1}, c[] = {1, -2, 3}, y[3] = {5, 5, 5};
    an_columns identity = {3, 3, 3, unit};
    assert_int_equal(an_nnls_solve(&nnls, &identity, c, y, &seen), AN_OK);
    assert_close(y[0], 1, 1e-15);
    assert_close(y[1], 0, 0);
    assert_close(y[2], 3, 1e-15);
    assert_close(seen.residual_square, 4, 1e-14);
    an_nnls_clear(&nnls);
}

static double next_random(uint64_t *seed)
{
    *seed = *seed * 6364136223846793005u + 1442695040888963407u;
    return (double)(*seed >> 11) / 9007199254740992.0 - 0.5;
}

/* The conditions computed afresh from A, b and x, not from the solver's own certificate. */
static void check_kkt(const an_columns *a, const double *b, const double *x)
{
    double residual[200], length = sqrt(an_dot(b, b, a->n_row));
    memcpy(residual, b, a->n_row * sizeof *b);
    for (size_t j = 0; j < a->n_column; j++)
        an_axpy(-x[j], an_column(a, j), residual, a->n_row);
    for (size_t j = 0; j < a->n_column; j++) {
        const double *c = an_column(a, j);
        double dual = an_dot(c, residual, a->n_row) / (sqrt(an_dot(c, c, a->n_row)) * length);
        assert_true(x[j] >= 0);
        if (x[j] > 0)
            assert_close(dual, 0, 1e-10); /* double rounding over 200 rows */
        else
            assert_true(dual <= 1e-10);
    }
}

static void conditions_hold_on_kernels_and_random(void **state)
{
    (void)state;
    enum { rows = 160, columns = 50 };
    static double a[rows * columns], b[rows];
    an_nnls nnls;
    an_nnls_init(&nnls);
    assert_int_equal(an_nnls_alloc(&nnls, rows, columns, NULL), AN_OK);
    uint64_t seed = 7;
    for (int round = 0; round < 30; round++) {
        for (size_t j = 0; j < columns; j++)
            for (size_t i = 0; i < rows;
                 i++) { /* odd rounds: nearly dependent Maxwell kernels, as in every spectrum */
                double q = pow(10, -4 + 8.0 * (double)i / rows - (4 - 8.0 * (double)j / columns));
                a[i + j * rows] = round % 2 ? q / (1 + q * q) : next_random(&seed);
            }
        for (size_t i = 0; i < rows; i++)
            b[i] = next_random(&seed) + (round % 3);
        an_columns matrix = {rows, columns, rows, a};
        double cold[columns] = {0}, warm[columns];
        an_nnls_certificate first, second;
        assert_int_equal(an_nnls_solve(&nnls, &matrix, b, cold, &first), AN_OK);
        check_kkt(&matrix, b, cold);
        for (size_t j = 0; j < columns; j++)
            warm[j] = j % 3 ? cold[j] : 1;
        assert_int_equal(an_nnls_solve(&nnls, &matrix, b, warm, &second), AN_OK);
        check_kkt(&matrix, b, warm);
        assert_close(second.residual_square, first.residual_square,
                     1e-9 * first.residual_square); /* the optimum is unique in |r| */
    }
    an_nnls_clear(&nnls);
}

static void projection_from_the_triangle(void **state)
{
    (void)state;
    /* f in the span of the positive columns keeps its length: |R^-T B^T f| = |f|. */
    double a[] = {1, 2, 2, 0, 0, 1, 1, 3}, b[] = {2, 5, 6, 3}, x[2] = {0}, scratch[2];
    an_columns matrix = {4, 2, 4, a};
    an_nnls nnls;
    an_nnls_init(&nnls);
    assert_int_equal(an_nnls_alloc(&nnls, 4, 2, NULL), AN_OK);
    assert_int_equal(an_nnls_solve(&nnls, &matrix, b, x, NULL), AN_OK);
    assert_int_equal(nnls.n_passive, 2);
    double f[4];
    for (size_t i = 0; i < 4; i++)
        f[i] = 0.3 * a[i] - 2 * a[4 + i];
    double v[2] = {an_dot(a, f, 4), an_dot(a + 4, f, 4)};
    an_nnls_half(&nnls, v, scratch);
    assert_close(an_dot(v, v, 2), an_dot(f, f, 4), 1e-12);
    an_nnls_clear(&nnls);
}

static void refuses_what_is_not_finite_or_too_large(void **state)
{
    (void)state;
    double a[] = {1, NAN, 1, 2}, b[] = {1, 1}, x[2] = {0};
    an_columns matrix = {2, 2, 2, a};
    an_nnls nnls;
    an_nnls_init(&nnls);
    assert_int_equal(an_nnls_alloc(&nnls, 2, 1, NULL), AN_OK);
    assert_int_equal(an_nnls_solve(&nnls, &matrix, b, x, NULL), AN_E_USAGE);
    assert_int_equal(an_nnls_alloc(&nnls, 2, 2, NULL), AN_OK);
    assert_int_equal(an_nnls_solve(&nnls, &matrix, b, x, NULL), AN_E_NUMERIC);
    an_nnls_clear(&nnls);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(closed_form_optimum),
        cmocka_unit_test(conditions_hold_on_kernels_and_random),
        cmocka_unit_test(projection_from_the_triangle),
        cmocka_unit_test(refuses_what_is_not_finite_or_too_large),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
