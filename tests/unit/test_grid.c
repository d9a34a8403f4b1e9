/* Points to isotherms, cells, outliers and assessment, on a made material whose truth is a closed form. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "check.h"
#include "made_points.h"

static const double sweep[] = {0.2, 0.5, 1, 2, 5, 10, 20};
enum { N_SWEEP = 7 };

static void grid_of(const an_points *points, int n, an_grid *grid)
{
    an_procedure procedure;
    an_error err = {0};
    an_procedure_init(&procedure);
    an_grid_init(grid);
    an_status status = an_grid_make(points, n, &procedure, grid, &err);
    if (status < 0)
        fail_msg("refused: %s", err.text);
}

static void isotherms_go_by_measured_temperature(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-1");
    made_sweep(&points, 240, 5, 13, sweep, N_SWEEP, 0.001);
    grid_of(&points, 1, &grid);
    assert_int_equal(grid.n_isotherm, 13);
    assert_int_equal(grid.n_cell, 13 * N_SWEEP);
    assert_int_equal(grid.n_ramp, 0);
    assert_int_equal(grid.assessment.verdict, AN_USABLE);
    for (int i = 0; i < grid.n_isotherm; i++) {
        const an_isotherm *isotherm = &grid.isotherm[i];
        /* bursts of 0.4 s cannot tell a rate: their noise must not be taken for one */
        assert_true(isotherm->steady);
        assert_false(isotherm->cooling);
        assert_int_equal(isotherm->n_cell, N_SWEEP);
        assert_close(isotherm->set_temperature_K, 240 + 5 * i, 1e-9);
        assert_close(isotherm->temperature_K, points.point[i * N_SWEEP].temperature_K, 0.006);
        for (int k = 0; k < N_SWEEP; k++) {
            const an_cell *cell = &grid.cell[isotherm->first_cell + k];
            assert_close(cell->frequency_Hz, sweep[k], 0);
            assert_relative(cell->storage_Pa, points.point[i * N_SWEEP + k].storage_Pa, 1e-12);
            assert_relative(cell->noise[0], points.point[i * N_SWEEP + k].noise[0], 1e-9);
            assert_false(cell->outlier);
        }
    }
    an_grid_clear(&grid);
    an_points_clear(&points);
}

/* 0.5 K/min through 50 K, a burst every 30 s: neighbours lie 0.25 K apart, and a chain of them must not
 * become isotherms. */
static void a_ramp_joins_no_isotherm(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-2");
    for (int i = 0; i < 200; i++)
        made_burst(&points, 240 + 0.25 * i, 1, 30.0 * i, 0.001)->temperature_rate_K_s = 0.5 / 60;
    grid_of(&points, 1, &grid);
    assert_int_equal(grid.n_isotherm, 0);
    assert_int_equal(grid.n_ramp, 200);
    assert_true(an_remark_list_has(&grid.remarks, "temperature-ramp", -1));
    an_grid_clear(&grid);
    an_points_clear(&points);
}

/* Without times and without rates a chain of 0.2 K steps is still cut: no burst lies beyond the width of its
 * isotherm. */
static void a_chain_is_cut(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-3");
    for (int i = 0; i < 60; i++)
        made_burst(&points, 240 + 0.2 * i, 1 + i % 5, 0, 0.001)->temperature_rate_K_s = NAN;
    grid_of(&points, 1, &grid);
    assert_true(grid.n_isotherm >= 11);
    for (int i = 0; i < grid.n_isotherm; i++)
        assert_true(grid.isotherm[i].drift_K <= 1.0 + 1e-9);
    an_grid_clear(&grid);
    an_points_clear(&points);
}

/* A made sweep of seven isotherms, one burst of the third (250 K, 2 Hz) with a remark, and its grid. */
static void grid_with_one_remark(an_points *points, an_grid *grid, an_point_state state_of_it, const char *code,
                                 const char *text)
{
    made_begin(points, "RP-0412-4");
    made_sweep(points, 240, 5, 7, sweep, N_SWEEP, 0.001);
    an_point *point = &points->point[2 * N_SWEEP + 3];
    point->state = state_of_it;
    an_remark_list_add(&point->remarks, code, point->burst, NULL, "%s", text);
    grid_of(points, 1, grid);
}

static void a_skipped_burst_leaves_a_hole(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    grid_with_one_remark(&points, &grid, AN_POINT_SKIPPED, "missing-values", "9 of 640 samples are marked");
    assert_int_equal(grid.n_isotherm, 7);
    assert_int_equal(grid.n_cell, 7 * N_SWEEP - 1);
    assert_int_equal(grid.isotherm[2].n_cell, N_SWEEP - 1);
    assert_int_equal(grid.assessment.verdict, AN_PARTIAL);
    assert_int_equal(grid.assessment.n_skipped, 1);
    assert_non_null(strstr(grid.assessment.reason[0], "9 of 640 samples are marked"));
    /* what to redo is said as it is set: 250 K is -23.1 degrees Celsius */
    assert_non_null(strstr(grid.assessment.reason[1], "-23.1 °C: 2 Hz"));
    an_grid_clear(&grid);
    an_points_clear(&points);
}

static void a_cut_burst_is_kept_and_asked_for_again(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    grid_with_one_remark(&points, &grid, AN_POINT_FLAGGED, "clipping", "force stands at the end of its range");
    assert_int_equal(grid.n_cell, 7 * N_SWEEP);
    assert_int_equal(grid.assessment.verdict, AN_USABLE);
    assert_non_null(strstr(grid.assessment.reason[0], "measure again with a wider range: -23.1 °C: 2 Hz"));
    an_grid_clear(&grid);
    an_points_clear(&points);
}

static void repeats_are_averaged_and_compared(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-5");
    made_burst(&points, 260, 1, 300, 0.001);
    made_burst(&points, 260, 10, 320, 0.001);
    an_point *last = made_burst(&points, 260, 1.001, 340, 0.001), *first = &points.point[0];
    last->storage_Pa = first->storage_Pa * 1.03;
    last->loss_Pa = first->loss_Pa * 1.03;
    first->common[AN_SOURCE_THICKNESS][0] = last->common[AN_SOURCE_THICKNESS][0] = 1e6;
    memcpy(last->noise, first->noise, sizeof last->noise);
    grid_of(&points, 1, &grid);
    assert_int_equal(grid.n_cell, 2);
    const an_cell *cell = &grid.cell[0];
    assert_int_equal(cell->n_repeat, 2);
    /* the mean of ln E: the geometric mean of 1 and 1.03 */
    assert_relative(cell->storage_Pa, first->storage_Pa * sqrt(1.03), 1e-12);
    /* independent noise of two is half the variance (to the 3 % by which the two differ), common stays whole
     */
    assert_relative(cell->noise[0], first->noise[0] / 2, 0.05);
    assert_relative(cell->common[AN_SOURCE_THICKNESS][0], 1e6, 0.02);
    assert_true(an_remark_list_has(&cell->remarks, "drift-check", 3));
    assert_close(grid.scatter.within_modulus, log(1.03) / sqrt(2), 1e-12);
    an_grid_clear(&grid);
    last->storage_Pa = first->storage_Pa * 1.01;
    last->loss_Pa = first->loss_Pa * 1.01;
    grid_of(&points, 1, &grid);
    assert_false(an_remark_list_has(&grid.cell[0].remarks, "drift-check", -1));
    an_grid_clear(&grid);
    an_points_clear(&points);
}

/* Median +- 3.5 MAD finds outliers in one variable (common practice); here a cell is held against its
 * isotherm's curve. */
static void outliers_are_marked_and_kept(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-6");
    made_sweep(&points, 240, 5, 13, sweep, N_SWEEP, 0.002);
    an_point *bad = &points.point[4 * N_SWEEP + 3];
    bad->storage_Pa *= 0.8;
    bad->loss_Pa *= 0.8;
    grid_of(&points, 1, &grid);
    assert_int_equal(grid.n_cell, 13 * N_SWEEP);
    for (int i = 0; i < grid.n_cell; i++)
        assert_int_equal(grid.cell[i].outlier, grid.cell[i].burst == bad->burst);
    assert_true(an_remark_list_has(&grid.cell[4 * N_SWEEP + 3].remarks, "outlier", bad->burst));
    an_grid_clear(&grid);
    an_points_clear(&points);
}

static void heating_and_cooling_stay_apart(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-7");
    made_sweep(&points, 240, 5, 5, sweep, N_SWEEP, 0.001);
    made_sweep(&points, 255, -5, 4, sweep, N_SWEEP, 0.001);
    grid_of(&points, 1, &grid);
    assert_int_equal(grid.n_isotherm, 9);
    for (int i = 0; i < 9; i++) {
        assert_int_equal(grid.isotherm[i].cooling, i >= 5);
        assert_true(i == 0 || i == 5 || grid.isotherm[i].temperature_K > grid.isotherm[i - 1].temperature_K);
    }
    an_grid_clear(&grid);
    an_points_clear(&points);
}

/* One frequency after the other over all temperatures: every return to the cold start opens a new heating
 * sweep. */
static void a_return_to_the_start_is_no_cooling(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-8");
    for (int i = 0; i < 3; i++)
        for (int k = 0; k < 6; k++)
            made_burst(&points, 240 + 5 * k, sweep[i], 1000.0 * (6 * i + k + 1), 0.001);
    grid_of(&points, 1, &grid);
    assert_int_equal(grid.n_isotherm, 6);
    for (int i = 0; i < 6; i++) {
        assert_int_equal(grid.isotherm[i].n_cell, 3);
        assert_false(grid.isotherm[i].cooling);
    }
    an_grid_clear(&grid);
    an_points_clear(&points);
}

static void a_moving_isotherm_is_flagged(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-9");
    made_sweep(&points, 240, 5, 3, sweep, N_SWEEP, 0.001);
    for (int k = 0; k < N_SWEEP; k++) { /* 0.3 K/min on the second one */
        an_point *point = &points.point[N_SWEEP + k];
        double since = point->start_s + 4 / point->frequency_Hz - points.point[N_SWEEP].start_s;
        point->temperature_K += 0.3 / 60 * since;
        point->temperature_rate_K_s = 0.3 / 60;
    }
    grid_of(&points, 1, &grid);
    assert_int_equal(grid.n_isotherm, 3);
    assert_true(grid.isotherm[0].steady && !grid.isotherm[1].steady && grid.isotherm[2].steady);
    assert_relative(grid.isotherm[1].rate_K_s, 0.3 / 60, 0.1);
    assert_true(an_remark_list_has(&grid.remarks, "temperature-unsteady", 0));
    an_grid_clear(&grid);
    an_points_clear(&points);
}

/* Three specimens of one lot: thickness is each one's own, the bench's gain is shared by all. */
static void replicates_share_the_bench_only(void **state)
{
    (void)state;
    an_points points[3];
    an_grid grid;
    static const char *const ids[] = {"HL-0031-1", "HL-0031-2", "HL-0031-3"};
    static const double stiffer[] = {0.98, 1.0, 1.02};
    for (int i = 0; i < 3; i++) {
        made_begin(&points[i], ids[i]);
        points[i].specimen.geometry.kind = AN_BENDING_THREE_POINT;
        made_sweep(&points[i], 240, 10, 3, sweep, N_SWEEP, 1e-6);
        for (int k = 0; k < points[i].n_point; k++) {
            an_point *point = &points[i].point[k];
            point->storage_Pa *= stiffer[i];
            point->loss_Pa *= stiffer[i];
            point->common[AN_SOURCE_THICKNESS][0] = 0.03 * point->storage_Pa;
            point->common[AN_SOURCE_FORCE_GAIN][0] = 0.01 * point->storage_Pa;
        }
    }
    grid_of(points, 3, &grid);
    assert_string_equal(grid.id, "HL-0031-1+2");
    assert_int_equal(grid.n_isotherm, 3);
    assert_int_equal(grid.n_cell, 3 * N_SWEEP);
    const an_cell *cell = &grid.cell[0];
    assert_int_equal(cell->n_repeat, 3);
    /* in the glass the loss factor is small, so that shares of E' stay shares of E' */
    assert_relative(cell->common[AN_SOURCE_THICKNESS][0], 0.03 * cell->storage_Pa / sqrt(3), 0.02);
    assert_relative(cell->common[AN_SOURCE_FORCE_GAIN][0], 0.01 * cell->storage_Pa, 0.02);
    /* the standard deviation of ln 0.98, 0, ln 1.02 */
    assert_close(grid.scatter.between_modulus, 0.0200, 0.0003);
    assert_int_equal(grid.scatter.n_run, 3);
    an_grid_clear(&grid);
    for (int i = 0; i < 3; i++)
        an_points_clear(&points[i]);
}

static void the_verdict_follows_its_rule(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-10");
    made_sweep(&points, 240, 5, 4, sweep, N_SWEEP, 0.001);
    an_remark_list_add(&points.remarks, "calibration-expired", 0, NULL,
                       "the calibration ended on 2026-01-01");
    grid_of(&points, 1, &grid);
    assert_int_equal(grid.assessment.verdict, AN_PARTIAL);
    an_grid_clear(&grid);
    for (int i = 0; i < 15; i++)
        points.point[i].state = AN_POINT_SKIPPED;
    grid_of(&points, 1, &grid);
    assert_int_equal(grid.assessment.verdict, AN_REPEAT);
    assert_int_equal(grid.assessment.n_skipped, 15);
    an_grid_clear(&grid);
    for (int i = 0; i < points.n_point; i++)
        points.point[i].state = AN_POINT_SKIPPED;
    an_procedure procedure;
    an_error err = {0};
    an_procedure_init(&procedure);
    an_grid_init(&grid);
    assert_int_equal(an_grid_make(&points, 1, &procedure, &grid, &err), AN_E_SCIENCE);
    an_grid_clear(&grid);
    an_points_clear(&points);
}

static void the_largest_correction_is_named(void **state)
{
    (void)state;
    an_points points;
    an_grid grid;
    made_begin(&points, "RP-0412-11");
    made_sweep(&points, 243.15, 5, 2, sweep, N_SWEEP, 0.001);
    points.point[8].rung[AN_RUNG_SERIES][0] = 0.3;
    points.point[8].rung[AN_RUNG_SERIES][1] = 0.16;
    points.point[8].stiffness_compliance = 0.24;
    grid_of(&points, 1, &grid);
    assert_non_null(strstr(grid.assessment.largest_correction, "frame compliance: "));
    assert_non_null(strstr(grid.assessment.largest_correction, "34 %"));
    assert_non_null(strstr(grid.assessment.largest_correction, "burst 9 (0.5 Hz"));
    assert_non_null(strstr(grid.assessment.largest_correction, "K_s C = 0.24"));
    an_grid_clear(&grid);
    an_points_clear(&points);
}

/* Back to the first temperature at 1 Hz after the sweep: unchanged, 4 % softer (drift), 14 % softer (a clamp
 * that slipped). */
static void a_return_is_compared_with_the_start(void **state)
{
    (void)state;
    static const double softer[] = {1, 0.96, 0.86};
    static const char *const codes[] = {NULL, "drift-check", "clamp-slip"};
    for (int i = 0; i < 3; i++) {
        an_points points;
        an_grid grid;
        made_begin(&points, "RP-0412-12");
        made_sweep(&points, 245, 5, 6, sweep, N_SWEEP, 0.001);
        double start = points.point[points.n_point - 1].start_s + 2000;
        an_point *back = made_burst(&points, points.point[0].temperature_K + 0.2, 1, start, 0.001);
        back->storage_Pa *= softer[i];
        back->loss_Pa *= softer[i];
        grid_of(&points, 1, &grid);
        assert_int_equal(an_remark_list_has(&grid.remarks, "drift-check", back->burst), i == 1);
        assert_int_equal(an_remark_list_has(&grid.remarks, "clamp-slip", back->burst), i == 2);
        assert_int_equal(grid.assessment.verdict, i == 2 ? AN_PARTIAL : AN_USABLE);
        assert_int_equal(grid.remarks.n, codes[i] ? 1 : 0);
        an_grid_clear(&grid);
        an_points_clear(&points);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(isotherms_go_by_measured_temperature),
        cmocka_unit_test(a_ramp_joins_no_isotherm),
        cmocka_unit_test(a_chain_is_cut),
        cmocka_unit_test(a_skipped_burst_leaves_a_hole),
        cmocka_unit_test(a_cut_burst_is_kept_and_asked_for_again),
        cmocka_unit_test(repeats_are_averaged_and_compared),
        cmocka_unit_test(outliers_are_marked_and_kept),
        cmocka_unit_test(heating_and_cooling_stay_apart),
        cmocka_unit_test(a_return_to_the_start_is_no_cooling),
        cmocka_unit_test(a_moving_isotherm_is_flagged),
        cmocka_unit_test(replicates_share_the_bench_only),
        cmocka_unit_test(the_verdict_follows_its_rule),
        cmocka_unit_test(a_return_is_compared_with_the_start),
        cmocka_unit_test(the_largest_correction_is_named),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
