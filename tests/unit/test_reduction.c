/* From a burst of a run to a point, and from points to their document and back: made bursts whose modulus is
 * known, sound ones and ones with a fault each. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>
#include <string.h>

#include "anelast/geometry.h"
#include "anelast/ladder.h"
#include "anelast/reduction.h"
#include "check.h"
#include "scratch.h"
#include "waves.h"

static const double complex MODULUS = 2.1e8 + 3e7 * I; /* [Pa] of every made burst */

static an_run make_run(void)
{
    an_run run;
    an_run_init(&run);
    strcpy(run.id, "LQ-RP-0412");
    run.specimen.geometry.kind = AN_TENSION;
    run.specimen.geometry.length = (an_measure){0.0124, 2e-5};
    run.specimen.geometry.width = (an_measure){0.00498, 1e-5};
    run.specimen.geometry.thickness = (an_measure){0.00102, NAN};
    run.apparatus.moving_mass = (an_measure){0.02, 1e-3};
    run.apparatus.force.delay = (an_measure){2e-5, 1e-7};
    run.apparatus.n_compliance = 1;
    run.apparatus.compliance[0] = (an_compliance_row){NAN, NAN, {1.8e-7, 3e-9}, 0};
    assert_int_equal(an_made_init(&run.made, "anelast-intake", NULL), AN_OK);
    return run;
}

/* What the bench would show of the specimen at a frequency. */
static double complex measured_stiffness(const an_run *run, double frequency)
{
    an_form form;
    an_ladder ladder;
    assert_int_equal(an_geometry_form(&run->specimen.geometry, &form, NULL), AN_OK);
    an_ladder_set(&ladder, &run->apparatus, frequency, 300);
    return an_ladder_build(&ladder, an_geometry_stiffness(&form, NAN, MODULUS));
}

static an_signal to_signal(an_signal_quantity quantity, const double *value, int n)
{
    an_signal s = AN_SIGNAL_NONE;
    assert_int_equal(an_signal_allocate(&s, quantity, AN_CODING_FLOAT64, (size_t)n, NULL), AN_OK);
    memcpy(s.data, value, (size_t)n * sizeof *value);
    return s;
}

/* A burst of 8 cycles with noise of 60 dB at 296.5 K, rising slowly. */
static an_burst make_burst(const an_run *run, int number, double frequency, wave *w, unsigned long seed)
{
    an_burst burst;
    double temperature[WAVE_MOST];
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    gsl_rng_set(rng, seed);
    wave_steady(w, 512, frequency, 8, 1e-5, measured_stiffness(run, frequency));
    wave_noise(w, rng, 1e-8, 1e-3 * cabs(w->stiffness) * 1e-5);
    for (int i = 0; i < w->n; i++)
        temperature[i] = 296.5 + 1e-3 * (i - 255.5) / 511 + gsl_ran_gaussian(rng, 0.02);
    gsl_rng_free(rng);
    an_burst_init(&burst);
    burst.n = number;
    burst.set_frequency_Hz = frequency;
    burst.set_temperature_K = 296.15;
    burst.clock = (an_clock){w->t[0] + 100 * number, w->t[1] - w->t[0], w->n};
    burst.displacement = to_signal(AN_SIGNAL_DISPLACEMENT, w->x, w->n);
    burst.force = to_signal(AN_SIGNAL_FORCE, w->f, w->n);
    burst.temperature = to_signal(AN_SIGNAL_TEMPERATURE, temperature, w->n);
    return burst;
}

/* The reduction of one burst after something was done to it. */
typedef struct bench {
    an_procedure procedure;
    an_reducer *reducer;
    an_run run;
    an_points points;
    wave w;
} bench;

static int bench_up(void **state)
{
    bench *b = calloc(1, sizeof *b);
    an_procedure_init(&b->procedure);
    b->reducer = an_reducer_new(&b->procedure);
    b->run = make_run();
    an_points_init(&b->points);
    assert_int_equal(an_reducer_begin(b->reducer, &b->run, &b->points, NULL), AN_OK);
    *state = b;
    return 0;
}

static int bench_down(void **state)
{
    bench *b = *state;
    an_reducer_free(&b->reducer);
    an_run_clear(&b->run);
    an_points_clear(&b->points);
    free(b);
    return 0;
}

static an_point *reduce(bench *b, an_burst *burst)
{
    an_point *point = an_points_add(&b->points);
    assert_non_null(point);
    assert_int_equal(
        an_burst_reduce(b->reducer, &b->points.specimen, &b->points.apparatus, burst, point, NULL), AN_OK);
    an_burst_clear(burst);
    return point;
}

static void modulus_with_its_uncertainty(void **state)
{
    bench *b = *state;
    double square = 0, common[3], ratio, u_noise, u_common;
    enum { BURSTS = 60 };
    for (int k = 1; k <= BURSTS; k++) {
        an_burst burst = make_burst(&b->run, k, 0.3 * pow(1.1, k), &b->w, (unsigned long)k);
        an_point *p = reduce(b, &burst);
        assert_int_equal(p->state, AN_POINT_USED);
        square += pow(p->storage_Pa - creal(MODULUS), 2) / p->noise[0] +
                  pow(p->loss_Pa - cimag(MODULUS), 2) / p->noise[2];
    }
    double spread = sqrt(square / (2 * BURSTS));
    assert_true(spread > 0.75 && spread < 1.25); /* 120 errors: 4 deviations are 0.26 */
    const an_point *p = &b->points.point[0];
    assert_close(p->temperature_K, 296.5, 4 * 0.02 / sqrt(400));
    assert_relative(p->common[AN_SOURCE_THICKNESS][0], -0.005 * creal(MODULUS), 0.02); /* the assumed 0.5 % */
    assert_true(an_remark_list_has(&b->points.remarks, "uncertainty-assumed", -1));
    an_point_common(p, common);
    an_point_loss_factor(p, &ratio, &u_noise, &u_common);
    assert_close(ratio, 3.0 / 21, 5 * u_noise);
    assert_true(u_common < 0.2 * sqrt(common[0]) / p->storage_Pa); /* thickness cancels in the loss factor */
    assert_relative(
        p->strain, p->displacement_m * (1 - p->stiffness_compliance / (1 + p->stiffness_compliance)) / 0.0124,
        0.01);
}

static void expect(const an_point *p, const char *code, an_point_state state)
{
    if (!an_remark_list_has(&p->remarks, code, -1) || p->state != state)
        for (size_t i = 0; i < p->remarks.n; i++)
            fprintf(stderr, "%s: %s\n", p->remarks.rows[i].kind->code, p->remarks.rows[i].text);
    assert_true(an_remark_list_has(&p->remarks, code, -1));
    assert_int_equal(p->state, state);
}

static double *samples(an_signal *signal)
{
    return signal->data;
}

static void faults(void **state)
{
    bench *b = *state;
    an_burst burst = make_burst(&b->run, 1, 2, &b->w, 1);
    double *f = samples(&burst.force), most = 0;
    for (int i = 0; i < 512; i++)
        most = fmax(most, f[i]);
    for (int i = 0; i < 512; i++)
        f[i] = fmin(f[i], 0.93 * most);
    expect(reduce(b, &burst), "clipping", AN_POINT_FLAGGED); /* fitted without the flat tops */

    burst = make_burst(&b->run, 1, 2, &b->w, 1);
    f = samples(&burst.force);
    for (int i = 0; i < 512; i++)
        f[i] = fmax(fmin(f[i], 0.8 * most), 0.7 * most);
    expect(reduce(b, &burst), "clipping", AN_POINT_SKIPPED); /* too little is left of it */

    burst = make_burst(&b->run, 2, 2, &b->w, 2);
    samples(&burst.displacement)[77] = NAN; /* 1 in 512 is above 0.1 % */
    expect(reduce(b, &burst), "missing-values", AN_POINT_SKIPPED);

    burst = make_burst(&b->run, 3, 2, &b->w, 3);
    burst.set_frequency_Hz = 2.04;
    expect(reduce(b, &burst), "frequency-off", AN_POINT_FLAGGED);

    burst = make_burst(&b->run, 4, 2, &b->w, 4);
    burst.set_frequency_Hz = 3;
    expect(reduce(b, &burst), "frequency-wrong", AN_POINT_SKIPPED);

    burst = make_burst(&b->run, 5, 2, &b->w, 5);
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2);
    for (int i = 0; i < 512; i++)
        samples(&burst.displacement)[i] = gsl_ran_gaussian(rng, 1e-8);
    gsl_rng_free(rng);
    burst.set_frequency_Hz = NAN;
    expect(reduce(b, &burst), "no-signal", AN_POINT_SKIPPED);

    burst = make_burst(&b->run, 6, 2, &b->w, 6);
    an_signal_clear(&burst.temperature);
    expect(reduce(b, &burst), "temperature-missing", AN_POINT_SKIPPED);

    burst = make_burst(&b->run, 7, 2, &b->w, 7);
    for (int i = 0; i < 512; i++)
        samples(&burst.force)[i] += 0.04 * cabs(b->w.stiffness) * 1e-5 * cos(4 * 2 * M_PI * b->w.t[i]);
    expect(reduce(b, &burst), "even-harmonics", AN_POINT_FLAGGED);

    burst = make_burst(&b->run, 8, 2, &b->w, 8);
    burst.clock.count = 1;
    expect(reduce(b, &burst), "fit-failed", AN_POINT_SKIPPED);
}

/* A few bursts with one channel turned, or both exchanged. */
static an_status judge_all(bench *b, int swap, double sign, an_error *err)
{
    for (int k = 1; k <= 6; k++) {
        an_burst burst = make_burst(&b->run, k, 0.5 * k, &b->w, (unsigned long)k);
        for (int i = 0; i < 512; i++)
            samples(&burst.force)[i] *= sign;
        if (swap) {
            an_signal other = burst.force;
            burst.force = burst.displacement;
            burst.displacement = other;
        }
        reduce(b, &burst);
    }
    return an_points_judge(&b->points, &b->procedure, err);
}

static void sound_run(void **state)
{
    an_error err = {0};
    assert_int_equal(judge_all(*state, 0, 1, &err), AN_OK);
}

static void inverted_channel(void **state)
{
    an_error err = {0};
    assert_int_equal(judge_all(*state, 0, -1, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "180 degrees in 6 of 6"));
}

static void swapped_columns(void **state)
{
    an_error err = {0};
    assert_int_equal(judge_all(*state, 1, 1, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "swapped"));
}

static void wrong_unit(void **state)
{
    an_error err = {0};
    assert_int_equal(judge_all(*state, 0, 1e6, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "check the units"));
}

/* Millimetres taken for metres: 10 um became 10 mm on a specimen 12.4 mm long, and the modulus a thousandth. */
static void wrong_unit_of_displacement(void **state)
{
    bench *b = *state;
    an_error err = {0};
    for (int k = 1; k <= 6; k++) {
        an_burst burst = make_burst(&b->run, k, 0.5 * k, &b->w, (unsigned long)k);
        for (int i = 0; i < 512; i++)
            samples(&burst.displacement)[i] *= 1e3;
        expect(reduce(b, &burst), "strain-large", AN_POINT_FLAGGED);
    }
    assert_int_equal(an_points_judge(&b->points, &b->procedure, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "check the unit of displacement"));
}

/* A burst written twice is used once, whatever its number; a channel that was not connected is named. */
static void repeated_and_still_bursts(void **state)
{
    bench *b = *state;
    an_burst burst = make_burst(&b->run, 1, 2, &b->w, 1);
    assert_int_equal(reduce(b, &burst)->state, AN_POINT_USED);
    burst = make_burst(&b->run, 2, 2, &b->w, 2);
    assert_int_equal(reduce(b, &burst)->state, AN_POINT_USED);
    burst = make_burst(&b->run, 3, 2, &b->w, 1);
    expect(reduce(b, &burst), "duplicate-burst", AN_POINT_SKIPPED);
    burst = make_burst(&b->run, 4, 2, &b->w, 4);
    for (int i = 0; i < 512; i++)
        samples(&burst.force)[i] = 1.25;
    const an_point *point = reduce(b, &burst);
    expect(point, "no-signal", AN_POINT_SKIPPED);
    assert_string_equal(point->remarks.rows[0].text, "force stands at 1.25 N in all 512 samples");
    assert_true(fabs(point->temperature_K - 296.5) < 0.01); /* the technician is told which burst to measure again */
}

/* Thickness and width of a beam exchanged: the modulus would be off by the square of their ratio. */
static void exchanged_dimensions(void **state)
{
    bench *b = *state;
    an_geometry *g = &b->run.specimen.geometry;
    g->kind = AN_CANTILEVER_GUIDED;
    assert_int_equal(an_reducer_begin(b->reducer, &b->run, &b->points, NULL), AN_OK);
    assert_false(an_remark_list_has(&b->points.remarks, "geometry-unusual", -1));
    double thickness = g->thickness.value;
    g->thickness.value = g->width.value;
    g->width.value = thickness;
    assert_int_equal(an_reducer_begin(b->reducer, &b->run, &b->points, NULL), AN_OK);
    assert_true(an_remark_list_has(&b->points.remarks, "geometry-unusual", -1));
}

/* Kelvin taken for degrees Celsius shows where the set temperature is known; below absolute zero it always does. */
static void wrong_unit_of_temperature(void **state)
{
    bench *b = *state;
    an_error err = {0};
    for (int k = 1; k <= 6; k++) {
        an_burst burst = make_burst(&b->run, k, 1, &b->w, (unsigned long)k);
        for (int i = 0; i < 512; i++)
            samples(&burst.temperature)[i] += 273.15;
        reduce(b, &burst);
    }
    assert_int_equal(an_points_judge(&b->points, &b->procedure, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "296.5 °C was measured where 23.0 °C was set"));
    for (int i = 0; i < b->points.n_point; i++)
        b->points.point[i].temperature_K -= 600;
    assert_int_equal(an_points_judge(&b->points, &b->procedure, &err), AN_E_SCIENCE);
    assert_non_null(strstr(err.text, "below absolute zero"));
}

static void frozen_thermometer(void **state)
{
    bench *b = *state;
    an_error err = {0};
    for (int k = 1; k <= 14; k++) {
        an_burst burst = make_burst(&b->run, k, 1, &b->w, (unsigned long)k);
        for (int i = 0; i < 512 && k > 1; i++)
            samples(&burst.temperature)[i] = 301.25;
        reduce(b, &burst);
    }
    /* 13 bursts 100 s apart: 1200 s, which is the limit, not above it */
    assert_int_equal(an_points_judge(&b->points, &b->procedure, &err), AN_OK);
    assert_int_equal(an_procedure_set(&b->procedure, "temperature_frozen", "1100", "s", &err), AN_OK);
    assert_int_equal(an_points_judge(&b->points, &b->procedure, &err), AN_DUBIOUS);
    assert_int_equal(b->points.point[0].state, AN_POINT_USED);
    expect(&b->points.point[13], "temperature-frozen", AN_POINT_SKIPPED);
}

static void same(const an_points *a, const an_points *b)
{
    assert_int_equal(a->n_point, b->n_point);
    for (int i = 0; i < a->n_point; i++) {
        const an_point *p = &a->point[i], *q = &b->point[i];
        assert_int_equal(p->burst, q->burst);
        assert_int_equal(p->state, q->state);
        assert_int_equal(p->remarks.n, q->remarks.n);
        assert_true(isnan(p->storage_Pa) ? isnan(q->storage_Pa) : p->storage_Pa == q->storage_Pa);
        assert_true(isnan(p->noise[1]) ? isnan(q->noise[1]) : p->noise[1] == q->noise[1]);
        assert_true(isnan(p->u_frequency_Hz) ? isnan(q->u_frequency_Hz)
                                             : p->u_frequency_Hz == q->u_frequency_Hz);
        assert_memory_equal(p->common, q->common, sizeof p->common);
    }
}

/* Written and read again with the schema: nothing is lost, not even a skipped point without a value. */
static void document(void **state)
{
    bench *b = *state;
    an_points again;
    an_error err = {0};
    char sha256[65] = "";
    an_burst burst = make_burst(&b->run, 1, 2, &b->w, 1);
    reduce(b, &burst);
    burst = make_burst(&b->run, 2, 3, &b->w, 2);
    burst.clock.count = 5;
    reduce(b, &burst);
    assert_int_equal(an_made_init(&b->points.made, "anelast-phase", &err), AN_OK);
    FILE *stream = fopen("points.xml", "wb");
    an_xml_writer *writer = an_xml_writer_new(stream, "points");
    an_points_write(writer, &b->points);
    assert_int_equal(an_xml_writer_finish(writer, &err), AN_OK);
    an_xml_writer_free(&writer);
    fclose(stream);
    an_points_init(&again);
    an_status status = an_points_read("points.xml", &again, sha256, &err);
    if (status != AN_OK)
        fprintf(stderr, "%s: %s\n", err.place, err.text);
    assert_int_equal(status, AN_OK);
    assert_int_equal(strlen(sha256), 64);
    same(&b->points, &again);
    an_points_clear(&again);

    static char text[65536]; /* cut short: refused */
    stream = fopen("points.xml", "rb");
    size_t n = fread(text, 1, sizeof text - 32, stream);
    fclose(stream);
    text[n] = 0;
    strcpy(strstr(text, "<end"), "</points>\n");
    scratch_write("short.xml", text);
    an_points_init(&again);
    assert_int_equal(an_points_read("short.xml", &again, sha256, &err), AN_E_DOCUMENT);
    an_points_clear(&again);
}

int main(void)
{
#define TEST(name) cmocka_unit_test_setup_teardown(name, bench_up, bench_down)
    const struct CMUnitTest tests[] = {
        TEST(modulus_with_its_uncertainty),
        TEST(faults),
        TEST(sound_run),
        TEST(inverted_channel),
        TEST(swapped_columns),
        TEST(wrong_unit),
        TEST(wrong_unit_of_displacement),
        TEST(repeated_and_still_bursts),
        TEST(exchanged_dimensions),
        TEST(wrong_unit_of_temperature),
        TEST(frozen_thermometer),
        TEST(document),
    };
    return cmocka_run_group_tests(tests, scratch_enter, scratch_leave);
}
