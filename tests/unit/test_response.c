/* Rows of the response engine against the responses of the whole model, and their slopes against central
 * differences (truncation h^2/6 of the third derivative, which is of order one in ln a: 1e-8 at h = 1e-4,
 * with rounding 1e-12). */
#include "anelast/maxwell.h"
#include "anelast/response.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "check.h"

enum { modes = 4 };
static double times[modes] = {1e-3, 0.02, 1.5, 40}, moduli[modes] = {5e8, 2e8, 3e7, 1e6};
static const double equilibrium = 4e6;

static double predict(const an_observation *o)
{
    double row[modes + 1], sum = 0;
    an_response_row(o, times, modes, row, NULL);
    for (size_t i = 0; i < modes; i++)
        sum += row[i] * moduli[i];
    return sum + row[modes] * equilibrium;
}

static void rows_are_the_model(void **state)
{
    (void)state;
    an_maxwell model = {modes, times, moduli, equilibrium};
    double a = pow(10, 0.7), b = pow(10, -0.1);
    an_observation o = {.at = 3, .rise_s = 0.5, .rate_per_s = 0.02, .log10_aT = 0.7, .log10_bT = -0.1};
    o.kind = AN_RESPONSE_STORAGE;
    assert_relative(predict(&o), b * an_maxwell_storage(&model, 3 * a), 1e-13);
    o.kind = AN_RESPONSE_LOSS;
    assert_relative(predict(&o), b * an_maxwell_loss(&model, 3 * a), 1e-13);
    o.kind = AN_RESPONSE_RELAXATION;
    assert_relative(predict(&o), b * an_maxwell_relaxation(&model, 3 / a), 1e-13);
    /* At another temperature all times stretch by a_T and the strain rate is that of the test: stress(t) = b
     * a sigma(t/a). */
    o.kind = AN_RESPONSE_HOLD;
    assert_relative(predict(&o), b * a * an_maxwell_hold(&model, 0.02, 0.5 / a, 3 / a), 1e-12);
    o.kind = AN_RESPONSE_PULL;
    assert_relative(predict(&o), b * a * an_maxwell_pull(&model, 0.02, 3 / a), 1e-12);
}

static void slopes_are_derivatives(void **state)
{
    (void)state;
    const double h = 1e-4;
    for (int kind = AN_RESPONSE_STORAGE; kind <= AN_RESPONSE_PULL; kind++) {
        for (double at = 0.01; at < 100; at *= 3) {
            an_observation o = {
                .kind = (an_response_kind)kind, .at = at, .rise_s = 0.5, .rate_per_s = 1, .log10_aT = 0.3};
            an_observation up = o, down = o;
            up.log10_aT += h / log(10);
            down.log10_aT -= h / log(10);
            double row[modes + 1], slope[modes + 1], high[modes + 1], low[modes + 1];
            an_response_row(&o, times, modes, row, slope);
            an_response_row(&up, times, modes, high, NULL);
            an_response_row(&down, times, modes, low, NULL);
            for (size_t i = 0; i <= modes; i++)
                assert_close(slope[i], (high[i] - low[i]) / (2 * h), 1e-7 * (1 + fabs(row[i])));
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(rows_are_the_model),
                                       cmocka_unit_test(slopes_are_derivatives)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
