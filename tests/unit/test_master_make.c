/* From a grid to a master document on made isotherms of known truth: shifts, law, reference temperature
 * between isotherms, what is left out, remarks. Limits: errors within four stated uncertainties, which one
 * value in 16 000 exceeds. */
#include "anelast/master.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>
#include <cmocka.h>

#include "check.h"
#include "synthetic.h"

enum { modes = 60, isotherms = 12, frequencies = 7 };
static double times[modes], moduli[modes];
static const double c1 = 11.2, c2 = 70, reference_K = 273; /* the made material's own law */

static an_maxwell material(void)
{
    for (int i = 0; i < modes; i++) {
        double x = -12 + 18.0 * i / (modes - 1);
        times[i] = pow(10, x);
        moduli[i] = 6e8 * pow(10, -0.3 * sqrt(1 + (x + 3) * (x + 3)) - 0.2 * (x + 3)) * 18.0 / modes;
    }
    return (an_maxwell){modes, times, moduli, 3e6};
}

static double wlf(double temperature_K)
{
    return -c1 * (temperature_K - reference_K) / (c2 + temperature_K - reference_K);
}

/* A grid of made isotherms with 0.2 % noise. scaled: moduli go with T. */
static void make_grid(an_grid *grid, int scaled)
{
    static synthetic s;
    an_maxwell model = material();
    memset(&s, 0, sizeof s);
    s.seed = 21;
    an_grid_init(grid);
    strcpy(grid->id, "LQ-made-1");
    grid->n_isotherm = isotherms;
    grid->n_cell = isotherms * frequencies;
    grid->isotherm = calloc(isotherms, sizeof *grid->isotherm);
    grid->cell = calloc((size_t)grid->n_cell, sizeof *grid->cell);
    assert_non_null(grid->isotherm);
    assert_non_null(grid->cell);
    for (int k = 0; k < isotherms; k++) {
        double t = 248 + 5.2 * k;
        synthetic_sweep sweep = {t, wlf(t), scaled ? t / reference_K : 1, 0.1, 30, frequencies, 0.002};
        synthetic_add(&s, &model, &sweep);
        grid->isotherm[k] = (an_isotherm){.temperature_K = t,
                                          .u_temperature_K = 0.001,
                                          .set_temperature_K = NAN,
                                          .steady = 1,
                                          .first_cell = k * frequencies,
                                          .n_cell = frequencies};
    }
    for (int i = 0; i < grid->n_cell; i++) {
        an_cell *cell = &grid->cell[i];
        const an_superpose_point *point = &s.point[i];
        *cell = (an_cell){.isotherm = i / frequencies,
                          .burst = i + 1,
                          .n_repeat = 1,
                          .temperature_K = grid->isotherm[i / frequencies].temperature_K,
                          .frequency_Hz = point->omega_rad_s / 6.283185307179586,
                          .storage_Pa = point->storage_Pa,
                          .loss_Pa = point->loss_Pa,
                          .noise = {point->noise[0], point->noise[1], point->noise[2]}};
        cell->common[AN_SOURCE_THICKNESS][0] = 0.01 * point->storage_Pa;
        cell->common[AN_SOURCE_THICKNESS][1] = 0.01 * point->loss_Pa;
    }
}

static an_status make_master(const an_grid *grid, const char *reference, an_master *master, an_error *err)
{
    an_procedure procedure;
    an_procedure_init(&procedure);
    if (reference)
        assert_int_equal(an_procedure_set(&procedure, "reference_temperature", reference, "K", err), AN_OK);
    an_master_init(master);
    return an_master_make(grid, &procedure, master, err);
}

static const an_law *chosen_law(const an_master *master)
{
    for (int i = 0; i < master->n_trial; i++)
        if (master->trial[i].chosen)
            return &master->trial[i].law;
    fail_msg("no law chosen");
    return NULL;
}

static void shifts_law_and_points(void **state)
{
    (void)state;
    an_grid grid;
    an_master master;
    make_grid(&grid, 0);
    assert_int_equal(make_master(&grid, NULL, &master, NULL), AN_OK);
    assert_int_equal(master.simplicity, AN_SIMPLE);
    assert_int_equal(master.vertical, AN_VERTICAL_NONE);
    assert_int_equal(master.end_state, AN_SOLID); /* 3 MPa stay: the hottest isotherms lie on the plateau */
    double t0 = master.reference_temperature_K;
    for (int i = 0; i < master.n_shift; i++) {
        const an_shift *s = &master.shift[i];
        assert_close(s->log10_aT, wlf(s->temperature_K) - wlf(t0), 4 * s->u_noise_log10_aT + 1e-12);
        assert_close(s->u_common_log10_aT, 0, 1e-5); /* a scale on all moduli moves no shift */
    }
    const an_law *law = chosen_law(&master);
    assert_int_equal(law->kind, AN_LAW_WLF);
    double c2_there = c2 + t0 - reference_K, c1_there = c1 * c2 / c2_there; /* change of reference, algebra */
    assert_close(law->constant[0], c1_there, 4 * sqrt(law->covariance[0]));
    assert_close(law->constant[1], c2_there, 4 * sqrt(law->covariance[3]));
    assert_int_equal(master.n_point, isotherms * frequencies);
    double sum = 0;
    for (int i = 0; i < master.n_point; i++)
        for (int c = 0; c < 2; c++)
            sum += master.point[i].residual[c] * master.point[i].residual[c];
    assert_close(sum / (2 * master.n_point), 0.8, 0.35); /* 168 data, some 40 parameters */
    an_master_clear(&master);
    an_grid_clear(&grid);
}

/* The same grid referred to a temperature between isotherms: everything must describe the same material. */
static void reference_between_isotherms(void **state)
{
    (void)state;
    an_grid grid;
    an_master master;
    make_grid(&grid, 1);
    assert_int_equal(make_master(&grid, "281", &master, NULL), AN_OK);
    assert_close(master.reference_temperature_K, 281, 0);
    assert_int_equal(master.vertical, AN_VERTICAL_DENSITY_TEMPERATURE);
    assert_close(chosen_law(&master)->reference_temperature_K, 281, 0);
    an_maxwell model = material();
    for (int i = 0; i < master.n_shift; i++) {
        const an_shift *s = &master.shift[i];
        assert_close(s->log10_aT, wlf(s->temperature_K) - wlf(281), 4 * s->u_noise_log10_aT);
        assert_close(s->log10_bT, log10(s->temperature_K / 281), 1e-12);
        assert_true(s->u_noise_log10_aT > 0);
    }
    /* E'(omega) of the master's spectrum at 281 K against the truth there, 0.5 %: 0.2 % noise, seven points
     * an isotherm */
    for (double omega = 1; omega < 200; omega *= 3)
        assert_relative(an_maxwell_storage(&master.spectrum, omega),
                        281 / reference_K * an_maxwell_storage(&model, omega * pow(10, wlf(281))), 0.005);
    an_master_clear(&master);
    an_error err = {0};
    assert_int_equal(make_master(&grid, "400", &master, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "400"));
    an_master_clear(&master);
    an_grid_clear(&grid);
}

static void what_is_left_out(void **state)
{
    (void)state;
    an_grid grid;
    an_master master;
    make_grid(&grid, 0);
    grid.cell[10].outlier = 1;
    grid.cell[10].storage_Pa *= 3;
    grid.cell[11].storage_Pa = NAN;
    grid.isotherm[11].cooling = 1;
    assert_int_equal(make_master(&grid, NULL, &master, NULL), AN_OK);
    assert_int_equal(master.n_shift, isotherms - 1);
    assert_true(an_remark_list_has(&master.remarks, "isotherm-left-out", -1));
    assert_int_equal(master.n_point, (isotherms - 1) * frequencies - 1);
    int n_outlier = 0;
    for (int i = 0; i < master.n_point; i++)
        n_outlier += master.point[i].outlier;
    assert_int_equal(n_outlier, 1);
    an_master_clear(&master);
    for (int k = 1; k < isotherms; k++)
        for (int i = 0; i < frequencies; i++)
            grid.cell[k * frequencies + i].outlier = 1;
    an_error err = {0};
    assert_int_equal(make_master(&grid, NULL, &master, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "two or more"));
    an_master_clear(&master);
    an_grid_clear(&grid);
}

/* Glassy isotherms of a plateau: the document must say that their shift is barely determined. */
static void undetermined_shifts_are_said(void **state)
{
    (void)state;
    an_grid grid;
    an_master master;
    make_grid(&grid, 0);
    for (int i = 0; i < frequencies; i++) /* forty times the noise on the coldest isotherm */
        for (int k = 0; k < 3; k++)
            grid.cell[i].noise[k] *= 1600;
    assert_int_equal(make_master(&grid, NULL, &master, NULL), AN_OK);
    assert_false(master.shift[0].determined);
    assert_true(master.shift[6].determined);
    assert_true(an_remark_list_has(&master.remarks, "shift-undetermined", -1));
    an_master_clear(&master);
    an_grid_clear(&grid);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(shifts_law_and_points),
        cmocka_unit_test(reference_between_isotherms),
        cmocka_unit_test(what_is_left_out),
        cmocka_unit_test(undetermined_shifts_are_said),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
