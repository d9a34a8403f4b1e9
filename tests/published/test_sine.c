/* The stated uncertainty of the sine fit against the Cramer-Rao bounds: sine.txt. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/sinefit.h"
#include "check_table.h"

enum { MOST = 1000 };

/* Fit a cosine of amplitude 1, its phase given at the first sample; the displacement is told to be so noisy
 * that it says nothing of the frequency. */
static an_status fit_row(const check_row *row, int known, an_sinefit *fit, an_error *err)
{
    static double t[MOST], x[MOST], f[MOST];
    int n = (int)check_given(row, "N");
    double frequency = check_given(row, "cycles") / n;
    for (int i = 0; i < n; i++) {
        t[i] = i;
        x[i] = f[i] = cos(2 * M_PI * frequency * i + check_given(row, "phase"));
    }
    an_waveform waveform = {.n = n, .time_s = t, .y = {x, f}};
    an_sinefit_choice choice = {.frequency_Hz = frequency,
                                .frequency_known = known,
                                .n_harmonic = 1,
                                .level = {1e6, check_given(row, "s")}};
    return an_sinefit_run(&waveform, &choice, fit, NULL, err);
}

static an_status known_frequency(const check_row *row, double *actual, an_error *err)
{
    an_sinefit fit;
    AN_TRY(fit_row(row, 1, &fit, err));
    actual[0] = actual[1] = fit.u_amplitude[AN_FORCE];
    return AN_OK;
}

/* Phase at the first sample: the phase in the middle less omega times the way there. d A = the linear part +
 * tie d omega. */
static an_status fitted_frequency(const check_row *row, double *actual, an_error *err)
{
    an_sinefit fit;
    AN_TRY(fit_row(row, 0, &fit, err));
    double complex a = fit.amplitude[AN_FORCE][0];
    double d[2] = {-cimag(a) / pow(cabs(a), 2), creal(a) / pow(cabs(a), 2)}; /* d phase / d Re A, d Im A */
    double u_omega = 2 * M_PI * fit.u_frequency_Hz, variance = 0, tied = -fit.origin_s;
    for (int i = 0; i < 2; i++) {
        tied += d[i] * fit.tie[2 + i];
        for (int j = 0; j < 2; j++)
            variance += d[i] * d[j] *
                        (fit.covariance[2 + i][2 + j] - u_omega * u_omega * fit.tie[2 + i] * fit.tie[2 + j]);
    }
    actual[0] = u_omega;
    actual[1] = sqrt(variance + tied * tied * u_omega * u_omega);
    return AN_OK;
}

static void table(void **state)
{
    (void)state;
    static const check_quantity quantities[] = {{"known frequency", known_frequency},
                                                {"fitted frequency", fitted_frequency}};
    check_table_run("sine.txt", quantities, sizeof quantities / sizeof *quantities);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(table)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
