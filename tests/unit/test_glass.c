/* Glass-transition readings against closed forms. Loss peak of a fractional Zener (Cole-Cole) solid: omega
 * tau = 1; loss factor peak: omega tau = (E0/Einf)^(1/(2 a)), exact. With the WLF law solved for the
 * temperature both are exact temperatures.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "check.h"
#include "made_points.h"

static const double sweep[] = {0.1, 1, 10};

static void grid_of(const an_points *points, an_grid *grid)
{
    an_procedure procedure;
    an_error err = {0};
    an_procedure_init(&procedure);
    an_grid_init(grid);
    an_status status = an_grid_make(points, 1, &procedure, grid, &err);
    if (status < 0)
        fail_msg("refused: %s", err.text);
}

static const an_reading *reading_of(const an_grid *grid, an_reading_kind kind, double frequency_Hz,
                                    int on_ramp)
{
    for (int i = 0; i < grid->n_reading; i++)
        if (grid->reading[i].kind == kind && fabs(grid->reading[i].frequency_Hz / frequency_Hz - 1) < 0.01 &&
            grid->reading[i].on_ramp == on_ramp)
            return &grid->reading[i];
    fail_msg("no reading of kind %d at %g Hz", kind, frequency_Hz);
    return NULL;
}

/* The tangents of ASTM E1640 on log E' of the closed form itself, 0.01 K apart: glass line through the range
 * given. */
static double exact_onset(double frequency_Hz, double glass_from_K, double glass_to_K)
{
    double best = 0, at = 0;
    for (double t = 235; t < 300; t += 0.01) {
        double slope = (log10(creal(made_modulus(t + 0.01, frequency_Hz))) -
                        log10(creal(made_modulus(t - 0.01, frequency_Hz)))) /
                       0.02;
        if (slope < best) {
            best = slope;
            at = t;
        }
    }
    double low = log10(creal(made_modulus(glass_from_K, frequency_Hz)));
    double high = log10(creal(made_modulus(glass_to_K, frequency_Hz)));
    double glass = (high - low) / (glass_to_K - glass_from_K);
    return (log10(creal(made_modulus(at, frequency_Hz))) - best * at - low + glass * glass_from_K) /
           (glass - best);
}

/* Isotherms 5 K apart: what is allowed is three times the uncertainty that the reading itself states, and
 * that below 1 K. */
static void peaks_stand_where_the_closed_form_says(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0413-1");
    made_sweep(&points, 235, 5, 16, sweep, 3, 0.002);
    grid_of(&points, &grid);
    for (int i = 0; i < 3; i++) {
        double tau = 1 / (2 * M_PI * sweep[i]);
        double exact[] = {made_temperature(tau),
                          made_temperature(tau * pow(made_E0 / made_Einf, 1 / (2 * made_a)))};
        for (int k = 0; k < 2; k++) {
            const an_reading *reading =
                reading_of(&grid, k ? AN_READING_LOSS_FACTOR_PEAK : AN_READING_LOSS_PEAK, sweep[i], 0);
            double u = hypot(reading->u_noise_K, reading->u_form_K);
            assert_string_equal(reading->reason, "");
            assert_true(u < 1);
            assert_close(reading->temperature_K, exact[k], 3 * u + 0.05);
            assert_close(reading->u_common_K, 0.3, 1e-12); /* the temperature's own, from the apparatus */
        }
    }
    an_grid_clear(&grid);
    an_points_clear(&points);
}

static void the_onset_is_where_the_tangents_meet(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0413-2");
    made_sweep(&points, 225, 5, 16, sweep, 3, 0.002);
    grid_of(&points, &grid);
    for (int i = 0; i < 3; i++) {
        const an_reading *reading = reading_of(&grid, AN_READING_STORAGE_ONSET, sweep[i], 0);
        assert_string_equal(reading->reason, "");
        /* 1 K: ASTM E1640 asks for temperatures to 0.5 K, and isotherms 5 K apart leave the steepest fall
         * between two */
        assert_close(reading->temperature_K, exact_onset(sweep[i], 225, 240), 1);
    }
    an_grid_clear(&grid);
    an_points_clear(&points);
}

/* A ramp of 2 K/min with a burst every 20 s at 1 Hz and 10 Hz: dense data, read to a tenth of a kelvin or so.
 */
static void a_ramp_is_read_too(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0413-3");
    for (int i = 0; i < 250; i++)
        made_burst(&points, 230 + i * 2.0 / 3 / 2, i % 2 ? 10 : 1, 10.0 * i, 0.002)->temperature_rate_K_s =
            2.0 / 60;
    grid_of(&points, &grid);
    assert_int_equal(grid.n_isotherm, 0);
    for (int i = 1; i < 3; i++) {
        const an_reading *reading = reading_of(&grid, AN_READING_LOSS_PEAK, sweep[i], 1);
        assert_close(reading->temperature_K, made_temperature(1 / (2 * M_PI * sweep[i])), 0.25);
        reading = reading_of(&grid, AN_READING_STORAGE_ONSET, sweep[i], 1);
        assert_close(reading->temperature_K, exact_onset(sweep[i], 230, 240), 0.7);
    }
    an_grid_clear(&grid);
    an_points_clear(&points);
}

static void expect_refusal(double from_K, double step_K, int n, an_reading_kind kind, const char *word)
{
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0413-4");
    made_sweep(&points, from_K, step_K, n, sweep, 3, 1e-9);
    grid_of(&points, &grid);
    const an_reading *reading = reading_of(&grid, kind, 1, 0);
    assert_true(isnan(reading->temperature_K));
    if (!strstr(reading->reason, word))
        fail_msg("from %g K: '%s' does not say '%s'", from_K, reading->reason, word);
    an_grid_clear(&grid);
    an_points_clear(&points);
}

static void what_cannot_be_read_is_refused_with_the_reason(void **state)
{
    (void)state;
    expect_refusal(235, 3, 6, AN_READING_LOSS_PEAK,
                   "hot end"); /* ends at 250 K, before the peak near 256 K */
    expect_refusal(260, 5, 11, AN_READING_LOSS_PEAK, "cold end");
    expect_refusal(245, 5, 4, AN_READING_LOSS_PEAK, "4 temperatures");
    expect_refusal(252, 5, 11, AN_READING_STORAGE_ONSET, "no glass");
    expect_refusal(225, 3, 6, AN_READING_STORAGE_ONSET, "no transition");
}

/* Two Gaussian loss peaks written over the loss modulus: 13 K apart their valley is shallow and nobody can
 * read a peak off it; 30 K apart they are two peaks, and the higher one is read. */
static void overlapping_peaks_are_refused(void **state)
{
    (void)state;
    for (int apart = 13; apart <= 30; apart += 17) {
        an_points points;
        an_grid grid;
        made_begin(&points, "RP-0413-5");
        made_sweep(&points, 235, 3, 25, sweep, 3, 0.0001);
        for (int i = 0; i < points.n_point; i++) {
            double t = points.point[i].temperature_K;
            points.point[i].loss_Pa =
                1e8 * (exp(-pow((t - 258) / 7, 2)) + 0.9 * exp(-pow((t - 258 - apart) / 7, 2))) + 1e6;
        }
        grid_of(&points, &grid);
        const an_reading *reading = reading_of(&grid, AN_READING_LOSS_PEAK, 1, 0);
        if (apart == 13)
            assert_string_equal(reading->reason, "two peaks overlap");
        else
            assert_close(reading->temperature_K, 258, 0.1);
        an_grid_clear(&grid);
        an_points_clear(&points);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(peaks_stand_where_the_closed_form_says),
        cmocka_unit_test(the_onset_is_where_the_tangents_meet),
        cmocka_unit_test(a_ramp_is_read_too),
        cmocka_unit_test(what_cannot_be_read_is_refused_with_the_reason),
        cmocka_unit_test(overlapping_peaks_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
