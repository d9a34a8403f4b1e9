/* report_scene.h: documents for the page's tests, built in memory: a rubber of the Lower Quay Works' rail
 * pads with a WLF shift and nine Maxwell modes, with a flagged and a skipped burst. Include after cmocka.h.
 */
#ifndef ANELAST_TESTS_REPORT_SCENE_H
#define ANELAST_TESTS_REPORT_SCENE_H

#include "anelast/report.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char evil[] = "\"><script>alert('pad & rail')</script>";

enum { TEMPERATURES = 7, FREQUENCIES = 6, SAMPLES = 600 };

static double temperature_of(int i)
{
    return 253.15 + 15 * i;
}

static double shift_of(double kelvin)
{
    return -8.86 * (kelvin - 293.15) / (101.6 + kelvin - 293.15);
}

static void set_specimen(an_specimen *specimen, const char *material)
{
    snprintf(specimen->id, sizeof specimen->id, "LQ-0417");
    snprintf(specimen->material, sizeof specimen->material, "%s", material);
    snprintf(specimen->lot, sizeof specimen->lot, "P-26-11");
    specimen->geometry.kind = AN_TENSION;
    specimen->geometry.length = (an_measure){0.0124, 2e-5};
    specimen->geometry.width = (an_measure){0.006, 1e-5};
    specimen->geometry.thickness = (an_measure){0.002, 1e-5};
}

static void set_model(an_maxwell *model)
{
    an_maxwell_clear(model);
    assert_int_equal(an_maxwell_alloc(model, 9, NULL), AN_OK);
    model->equilibrium_Pa = 3e6;
    for (int i = 0; i < 9; i++) {
        model->time_s[i] = pow(10, i - 6);
        model->modulus_Pa[i] = 3e8 * exp(-0.5 * i);
    }
}

static void set_point(an_point *point, const an_maxwell *model, int burst)
{
    point->burst = burst;
    point->temperature_K = temperature_of((burst - 1) / FREQUENCIES) + 0.02 * sin(burst);
    point->u_temperature_K = 0.02;
    point->frequency_Hz = pow(10, -1 + 0.5 * ((burst - 1) % FREQUENCIES));
    double omega = 2 * M_PI * point->frequency_Hz * pow(10, shift_of(point->temperature_K));
    point->storage_Pa = an_maxwell_storage(model, omega);
    point->loss_Pa = an_maxwell_loss(model, omega);
    point->noise[0] = pow(0.003 * point->storage_Pa, 2);
    point->noise[2] = pow(0.005 * point->loss_Pa, 2);
    point->noise[1] = 0;
    memset(point->common, 0, sizeof point->common);
    memset(point->rung, 0, sizeof point->rung);
    point->common[AN_SOURCE_THICKNESS][0] = 0.01 * point->storage_Pa;
    point->common[AN_SOURCE_THICKNESS][1] = 0.01 * point->loss_Pa;
    point->common[AN_SOURCE_DELAY][0] = -0.002 * point->loss_Pa;
    point->common[AN_SOURCE_DELAY][1] = 0.002 * point->storage_Pa;
    point->rung[AN_RUNG_SERIES][0] = 0.04 * burst / 42;
    point->snr_dB = 60;
    point->strain = 1e-3;
    point->n_cycle_dropped = 1;
}

static void add_points(an_report *report, const an_maxwell *model)
{
    snprintf(report->points.id, sizeof report->points.id, "pad-17");
    set_specimen(&report->points.specimen, report->run.specimen.material);
    for (int burst = 1; burst <= TEMPERATURES * FREQUENCIES; burst++)
        set_point(an_points_add(&report->points), model, burst);
    an_point *doubtful = &report->points.point[3];
    doubtful->state = AN_POINT_FLAGGED;
    const char *code = an_remark_kind_row(0)->code;
    assert_int_equal(an_remark_list_add_as(&doubtful->remarks, code, AN_FLAG, 4, NULL, "%s", evil), AN_OK);
    an_point *dropped = &report->points.point[10];
    dropped->state = AN_POINT_SKIPPED;
    assert_int_equal(
        an_remark_list_add_as(&dropped->remarks, code, AN_SKIP, 11, NULL, "clipped for 9 samples"), AN_OK);
    report->has_points = true;
}

static void add_run(an_report *report, const char *material)
{
    snprintf(report->run.id, sizeof report->run.id, "pad-17");
    set_specimen(&report->run.specimen, material);
    assert_int_equal(an_made_init(&report->run.made, "anelast-intake", NULL), AN_OK);
    assert_int_equal(an_made_add_input(&report->run.made, "dump", "pad.txt", "ab12", NULL), AN_OK);
    assert_int_equal(an_made_add_word(&report->run.made, "vertical", evil, NULL), AN_OK);
    report->has_run = true;
    report->n_source = 1;
    snprintf(report->source[0].role, sizeof report->source[0].role, "run");
    snprintf(report->source[0].file, sizeof report->source[0].file, "run.xml");
    an_report_wave *w = &report->wave;
    w->burst = 4;
    w->n = SAMPLES;
    w->set_frequency_Hz = 3;
    w->time_s = calloc(SAMPLES, sizeof(double));
    w->displacement = calloc(SAMPLES, sizeof(double));
    w->force = calloc(SAMPLES, sizeof(double));
    for (int i = 0; i < SAMPLES; i++) {
        double t = w->time_s[i] = i / 600.0 * 1.6;
        double scatter = sin(1e4 * i * i);
        w->displacement[i] = 1e-3 + 2e-5 * sin(2 * M_PI * 3.1623 * t) + 1e-7 * scatter;
        w->force[i] = 5 + 0.8 * sin(2 * M_PI * 3.1623 * t + 0.4) + 0.2 * exp(-8 * t) + 0.01 * scatter;
    }
}

static void add_grid(an_report *report)
{
    an_grid *grid = &report->grid;
    grid->cell = calloc(TEMPERATURES * FREQUENCIES, sizeof *grid->cell);
    grid->isotherm = calloc(TEMPERATURES, sizeof *grid->isotherm);
    grid->reading = calloc(2, sizeof *grid->reading);
    grid->n_cell = TEMPERATURES * FREQUENCIES;
    grid->n_isotherm = TEMPERATURES;
    grid->n_reading = 2;
    for (int i = 0; i < grid->n_cell; i++) {
        const an_point *point = &report->points.point[i];
        an_cell *cell = &grid->cell[i];
        *cell = (an_cell){.isotherm = i / FREQUENCIES,
                          .burst = point->burst,
                          .n_repeat = 1,
                          .outlier = i == 20,
                          .temperature_K = point->temperature_K,
                          .frequency_Hz = point->frequency_Hz,
                          .storage_Pa = point->storage_Pa,
                          .loss_Pa = point->loss_Pa};
        memcpy(cell->noise, point->noise, sizeof cell->noise);
        memcpy(cell->common, point->common, sizeof cell->common);
    }
    for (int i = 0; i < TEMPERATURES; i++)
        grid->isotherm[i] = (an_isotherm){.temperature_K = temperature_of(i),
                                          .u_temperature_K = 0.02,
                                          .set_temperature_K = NAN,
                                          .steady = 1,
                                          .first_cell = i * FREQUENCIES,
                                          .n_cell = FREQUENCIES};
    grid->reading[0] = (an_reading){.kind = AN_READING_LOSS_FACTOR_PEAK,
                                    .frequency_Hz = 1,
                                    .temperature_K = 281.3,
                                    .u_noise_K = 0.1,
                                    .u_form_K = 0.2,
                                    .u_common_K = 0.3};
    grid->reading[1] = (an_reading){.kind = AN_READING_STORAGE_ONSET,
                                    .frequency_Hz = 1,
                                    .temperature_K = NAN,
                                    .reason = "the glassy side was not measured"};
    grid->assessment =
        (an_assessment){.verdict = AN_PARTIAL, .n_used = 40, .n_flagged = 1, .n_skipped = 1, .n_reason = 2};
    snprintf(grid->assessment.reason[0], sizeof grid->assessment.reason[0], "burst 11: %s", evil);
    snprintf(grid->assessment.reason[1], sizeof grid->assessment.reason[1],
             "before unclamping, measure again: 1 Hz at 10 °C");
    snprintf(grid->assessment.largest_correction, sizeof grid->assessment.largest_correction,
             "compliance, 4.0 %% at burst 42");
    report->has_grid = true;
}

static void add_shifts(an_master *master)
{
    master->shift = calloc(TEMPERATURES, sizeof *master->shift);
    master->n_shift = TEMPERATURES;
    for (int i = 0; i < TEMPERATURES; i++)
        master->shift[i] = (an_shift){.temperature_K = temperature_of(i),
                                      .u_temperature_K = 0.02,
                                      .log10_aT = shift_of(temperature_of(i)) + 0.003 * sin(i),
                                      .log10_bT = 0.004 * (i - 3),
                                      .u_log10_aT = i == 0 ? 0.8 : 0.004,
                                      .u_log10_bT = 0.002,
                                      .determined = i != 0};
    an_law_trial *trial = &master->trial[0];
    an_law_init(&trial->law, AN_LAW_WLF, 293.15, 0);
    trial->law.constant[0] = 8.86;
    trial->law.constant[1] = 101.6;
    trial->law.covariance[0] = 0.01;
    trial->law.covariance[3] = 1;
    trial->law.valid_from_K = 253.15;
    trial->law.valid_to_K = 343.15;
    trial->chosen = 1;
    an_law_init(&master->trial[1].law, AN_LAW_ARRHENIUS, 293.15, 0);
    snprintf(master->trial[1].reason, sizeof master->trial[1].reason, "its criterion is larger by 812");
    master->n_trial = 2;
}

static void add_master(an_report *report, const an_maxwell *model, an_simplicity simplicity)
{
    an_master *master = &report->master;
    master->reference_temperature_K = 293.15;
    master->simplicity = simplicity;
    master->reduced_chi_square = simplicity == AN_COMPLEX ? 470 : 0.98;
    snprintf(master->simplicity_reason, sizeof master->simplicity_reason, "reduced chi-square %.3g",
             master->reduced_chi_square);
    add_shifts(master);
    master->point = calloc(TEMPERATURES * FREQUENCIES, sizeof *master->point);
    master->n_point = TEMPERATURES * FREQUENCIES;
    for (int i = 0; i < master->n_point; i++) {
        const an_point *point = &report->points.point[i];
        an_master_point *on = &master->point[i];
        *on = (an_master_point){.isotherm = i / FREQUENCIES,
                                .burst = point->burst,
                                .temperature_K = point->temperature_K,
                                .frequency_Hz = point->frequency_Hz,
                                .reduced_omega =
                                    2 * M_PI * point->frequency_Hz * pow(10, shift_of(point->temperature_K)),
                                .storage_Pa = point->storage_Pa,
                                .loss_Pa = point->loss_Pa,
                                .residual = {sin(7.0 * i), cos(5.0 * i)},
                                .outlier = i == 20};
        memcpy(on->noise, point->noise, sizeof on->noise);
    }
    assert_int_equal(an_maxwell_copy(&master->spectrum, model, NULL), AN_OK);
    master->window_s[0] = 1e-5;
    master->window_s[1] = 10;
    report->has_master = true;
}

static void add_material(an_report *report, const an_maxwell *model)
{
    an_material *m = &report->material;
    m->reference_temperature_K = 293.15;
    assert_int_equal(an_maxwell_copy(&m->modes, model, NULL), AN_OK);
    m->trusted = calloc(model->n_mode, sizeof *m->trusted);
    for (size_t i = 0; i < model->n_mode; i++)
        m->trusted[i] = model->time_s[i] > 1e-5 && model->time_s[i] < 20;
    m->instantaneous_Pa = an_maxwell_instantaneous(model);
    m->long_term_Pa = model->equilibrium_Pa;
    m->fit_error = 0.004;
    m->u_common_relative = 0.012;
    m->window_time_s[0] = 1e-5;
    m->window_time_s[1] = 10;
    m->window_temperature_K[0] = 253.15;
    m->window_temperature_K[1] = 343.15;
    m->strain_limit = 1e-3;
    snprintf(m->end_state, sizeof m->end_state, "solid");
    report->has_material = true;
}

/* How much of a report is built. */
typedef struct scene {
    bool run, grid, master, material;
    an_simplicity simplicity;
    const char *name;
    int hold;            /* the burst is a relaxation hold of so many samples; 0: an oscillation */
    const char *missing; /* as an_report_say_missing takes it; NULL: nothing is said */
} scene;

/* A step held for 300 s, decaying over 40 s, in place of the oscillation. */
static void make_hold(an_report_wave *w, int n)
{
    w->kind = AN_BURST_HOLD;
    w->set_frequency_Hz = NAN;
    w->n = (size_t)n;
    w->time_s = realloc(w->time_s, w->n * sizeof(double));
    w->displacement = realloc(w->displacement, w->n * sizeof(double));
    w->force = realloc(w->force, w->n * sizeof(double));
    for (int i = 0; i < n; i++) {
        w->time_s[i] = 300.0 * i / n;
        w->displacement[i] = 1e-4;
        w->force[i] = 2 + exp(-w->time_s[i] / 40);
    }
}

static void build(an_report *report, const scene *s)
{
    an_maxwell model;
    an_maxwell_init(&model);
    set_model(&model);
    an_report_init(report);
    if (s->run)
        add_run(report, s->name);
    add_points(report, &model);
    if (s->hold)
        make_hold(&report->wave, s->hold);
    if (s->missing)
        assert_int_equal(an_report_say_missing(report, s->missing, NULL), AN_OK);
    if (s->grid)
        add_grid(report);
    if (s->master)
        add_master(report, &model, s->simplicity);
    if (s->material)
        add_material(report, &model);
    an_maxwell_clear(&model);
}

#endif
