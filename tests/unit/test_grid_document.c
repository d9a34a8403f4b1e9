/* The grid document: what is written reads back to the same bits, valid by its schema; what is broken is
 * refused by name. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "check.h"
#include "made_points.h"
#include "scratch.h"

static const double sweep[] = {0.1, 1, 10};

/* A grid with everything in it: isotherms of both directions, ramp, repeats, an outlier, remarks, refused
 * readings. */
static void make(an_grid *grid)
{
    an_points points;
    an_procedure procedure;
    an_error err = {0};
    made_begin(&points, "RP-0414-1");
    points.specimen.geometry.kind = AN_TENSION;
    made_sweep(&points, 240, 5, 9, sweep, 3, 0.002);
    made_sweep(&points, 275, -10, 3, sweep, 3, 0.002);
    for (int i = 0; i < points.n_point; i++)
        points.point[i].common[AN_SOURCE_THICKNESS][1] = -1.0 / 3 * points.point[i].loss_Pa;
    points.point[4].state = AN_POINT_SKIPPED;
    an_remark_list_add(&points.point[4].remarks, "clipping", 5, &err,
                       "force stays at <25 N & more> for 9 samples");
    double start = points.point[points.n_point - 1].start_s + 1000;
    for (int i = 0; i < 20; i++)
        made_burst(&points, 300 - i, 1, start + 30 * i, 0.002)->temperature_rate_K_s = -1.0 / 30;
    an_procedure_init(&procedure);
    an_grid_init(grid);
    assert_int_equal(an_made_init(&grid->made, "anelast-grid", &err), AN_OK);
    assert_true(an_grid_make(&points, 1, &procedure, grid, &err) >= 0);
    assert_true(grid->n_ramp > 0 && grid->n_isotherm > 9 && grid->n_reading > 0 &&
                grid->assessment.n_reason > 0);
    an_points_clear(&points);
}

static void write_to(const an_grid *grid, const char *path)
{
    an_error err = {0};
    FILE *file = fopen(path, "wb");
    assert_non_null(file);
    an_xml_writer *writer = an_xml_writer_new(file, "grid");
    assert_non_null(writer);
    an_grid_write(writer, grid);
    if (an_xml_writer_finish(writer, &err) < 0)
        fail_msg("writing: %s", err.text);
    an_xml_writer_free(&writer);
    assert_int_equal(fclose(file), 0);
}

static void same_number(double a, double b)
{
    if (!(a == b || (isnan(a) && isnan(b))))
        fail_msg("%.17g is not %.17g", a, b);
}

static void same_cells(const an_cell *a, const an_cell *b, int n)
{
    for (int i = 0; i < n; i++) {
        assert_int_equal(a[i].isotherm, b[i].isotherm);
        assert_int_equal(a[i].burst, b[i].burst);
        assert_int_equal(a[i].n_repeat, b[i].n_repeat);
        assert_int_equal(a[i].outlier, b[i].outlier);
        assert_int_equal(a[i].remarks.n, b[i].remarks.n);
        same_number(a[i].temperature_K, b[i].temperature_K);
        same_number(a[i].frequency_Hz, b[i].frequency_Hz);
        same_number(a[i].storage_Pa, b[i].storage_Pa);
        same_number(a[i].loss_Pa, b[i].loss_Pa);
        for (int k = 0; k < 3; k++)
            same_number(a[i].noise[k], b[i].noise[k]);
        for (int k = 0; k < AN_SOURCE_COUNT; k++)
            for (int m = 0; m < 2; m++)
                same_number(a[i].common[k][m], b[i].common[k][m]);
    }
}

static void what_is_written_reads_back(void **state)
{
    (void)state;
    an_grid grid, again;
    an_error err = {0};
    char sha256[65];
    const char *path = "grid.xml";
    make(&grid);
    write_to(&grid, path);
    an_grid_init(&again);
    if (an_grid_read(path, &again, sha256, &err) < 0)
        fail_msg("reading: %s: %s", err.place, err.text);
    assert_int_equal(strlen(sha256), 64);
    assert_string_equal(again.id, grid.id);
    assert_int_equal(again.n_isotherm, grid.n_isotherm);
    assert_int_equal(again.n_cell, grid.n_cell);
    assert_int_equal(again.n_ramp, grid.n_ramp);
    assert_int_equal(again.n_reading, grid.n_reading);
    assert_int_equal(again.remarks.n, grid.remarks.n);
    same_cells(again.cell, grid.cell, grid.n_cell);
    same_cells(again.ramp, grid.ramp, grid.n_ramp);
    for (int i = 0; i < grid.n_isotherm; i++) {
        const an_isotherm *a = &again.isotherm[i], *b = &grid.isotherm[i];
        same_number(a->temperature_K, b->temperature_K);
        same_number(a->u_temperature_K, b->u_temperature_K);
        same_number(a->set_temperature_K, b->set_temperature_K);
        same_number(a->drift_K, b->drift_K);
        same_number(a->rate_K_s, b->rate_K_s);
        same_number(a->u_rate_K_s, b->u_rate_K_s);
        assert_int_equal(a->steady, b->steady);
        assert_int_equal(a->cooling, b->cooling);
        assert_int_equal(a->first_cell, b->first_cell);
        assert_int_equal(a->n_cell, b->n_cell);
    }
    for (int i = 0; i < grid.n_reading; i++) {
        const an_reading *a = &again.reading[i], *b = &grid.reading[i];
        assert_int_equal(a->kind, b->kind);
        assert_int_equal(a->on_ramp, b->on_ramp);
        assert_string_equal(a->reason, b->reason);
        same_number(a->frequency_Hz, b->frequency_Hz);
        same_number(a->temperature_K, b->temperature_K);
        same_number(a->u_noise_K, b->u_noise_K);
        same_number(a->u_form_K, b->u_form_K);
        same_number(a->u_common_K, b->u_common_K);
    }
    assert_memory_equal(&again.assessment.n_used, &grid.assessment.n_used, 4 * sizeof(int));
    for (int i = 0; i < grid.assessment.n_reason; i++)
        assert_string_equal(again.assessment.reason[i], grid.assessment.reason[i]);
    assert_string_equal(again.assessment.largest_correction, grid.assessment.largest_correction);
    an_grid_clear(&again);
    an_grid_clear(&grid);
}

/* Replace the first occurrence of a text in a file. */
static void spoil(const char *path, const char *good, const char *bad)
{
    FILE *file = fopen(path, "rb");
    assert_non_null(file);
    char *text = calloc(1, 1 << 20), *out = calloc(1, (1 << 20) + 256);
    assert_true(fread(text, 1, (1 << 20) - 1, file) > 0);
    fclose(file);
    char *at = strstr(text, good);
    assert_non_null(at);
    snprintf(out, (1 << 20) + 256, "%.*s%s%s", (int)(at - text), text, bad, at + strlen(good));
    file = fopen(path, "wb");
    assert_non_null(file);
    fputs(out, file);
    fclose(file);
    free(text);
    free(out);
}

static void what_is_broken_is_refused(void **state)
{
    (void)state;
    static const struct {
        const char *good, *bad, *word;
    } cases[] = {
        {"verdict=\"partial\"", "verdict=\"good\"", "verdict"},
        {"source=\"thickness\"", "source=\"thikness\"", "thikness"},
        {"<isotherm n=\"2\"", "<isotherm n=\"1\"", "isotherm"},        /* the key of isotherm numbers */
        {"storage_loss=\"0\"", "storage_loss=\"1e99\"", "covariance"}, /* not positive */
        {"<frequency value=\"0.1\" unit=\"Hz\"/>", "<frequency value=\"0.1\" unit=\"K\"/>", "unit"},
        {"<frequency value=\"0.1\" unit=\"Hz\"/>", "<frequency value=\"-0.1\" unit=\"Hz\"/>", "positive"},
        {"</grid>", "", ""},
    };
    an_grid grid, again;
    const char *path = "broken.xml";
    make(&grid);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        an_error err = {0};
        write_to(&grid, path);
        spoil(path, cases[i].good, cases[i].bad);
        an_grid_init(&again);
        an_status status = an_grid_read(path, &again, NULL, &err);
        if (status >= 0 || !strstr(err.text, cases[i].word))
            fail_msg("%s: status %d, '%s'", cases[i].bad, status, err.text);
        an_grid_clear(&again);
    }
    an_grid_clear(&grid);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(what_is_written_reads_back),
        cmocka_unit_test(what_is_broken_is_refused),
    };
    return cmocka_run_group_tests(tests, scratch_enter, scratch_leave);
}
