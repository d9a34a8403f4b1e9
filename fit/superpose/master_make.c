/* From a grid to a master document: selection, joint fit, law, reference temperature, the long end, remarks.
 * Stage: superpose. Methods stand in the files that this one calls. */
#include "fit/superpose/master_make.h"

#include "anelast/quantity.h"

#include <math.h>
#include <stdlib.h>
#include <stdio.h>
#include <string.h>

/* What is in hand while a master is made. */
typedef struct making {
    const an_grid *grid;
    const an_procedure *procedure;
    an_selection selection;
    an_superposition result;
    an_spectrum end; /* for the decision on the long end */
} making;

static void options_from(const an_procedure *procedure, an_superpose_options *options)
{
    static const an_vertical verticals[] = {AN_VERTICAL_NONE, AN_VERTICAL_DENSITY_TEMPERATURE,
                                            AN_VERTICAL_FREE};
    an_superpose_defaults(options);
    options->reference_temperature_K = an_procedure_number(procedure, "reference_temperature");
    options->vertical_chosen = 1;
    for (size_t i = 0; i < sizeof verticals / sizeof *verticals; i++)
        if (an_procedure_is(procedure, "vertical", an_vertical_word(verticals[i]))) {
            options->vertical_chosen = 0;
            options->vertical = verticals[i];
        }
    options->model_floor = an_procedure_number(procedure, "model_floor");
    options->doubtful_chi_square = an_procedure_number(procedure, "simple_chi_square");
    options->complex_chi_square = an_procedure_number(procedure, "doubtful_chi_square");
    options->doubtful_rad = an_procedure_number(procedure, "simple_separation");
    options->complex_rad = an_procedure_number(procedure, "doubtful_separation");
    options->determined_u = an_procedure_number(procedure, "shift_determined");
}

/* Root mean square of the noise part of the isotherms' temperatures. */
static double temperature_noise(const making *m)
{
    double sum = 0;
    size_t n = m->selection.input.n_isotherm;
    for (size_t i = 0; i < n; i++) {
        double u = m->grid->isotherm[m->selection.isotherm_of[i]].u_temperature_K;
        sum += isfinite(u) ? u * u : 0;
    }
    return sqrt(sum / (double)n);
}

/* Laws to the shifts. AN_DUBIOUS where none follows them. */
static an_status fit_laws(const making *m, an_master *master, an_error *err)
{
    size_t n = m->result.n_isotherm, n_trial = 0;
    double *buffer = calloc(n * n + n, sizeof *buffer);
    if (!buffer)
        return an_fail_memory(err, "the covariance of the shifts");
    double *temperature_K = buffer + n * n;
    for (size_t i = 0; i < n; i++) {
        temperature_K[i] = m->selection.input.isotherm[i].temperature_K;
        memcpy(buffer + i * n, m->result.noise_covariance + i * 2 * n, n * sizeof *buffer);
    }
    an_law_data data = {n,      temperature_K,        m->result.log10_aT,
                        buffer, temperature_noise(m), m->result.reference_temperature_K};
    an_law_kind wanted = AN_LAW_NONE;
    an_law_kind_from_name(an_procedure_word(m->procedure, "law"), &wanted);
    an_status status = an_law_fit_choose(&data, wanted, master->trial, &n_trial, err);
    free(buffer);
    master->n_trial = (int)n_trial;
    return status;
}

/* Where the procedure names a reference temperature that is no isotherm's, go there. */
static an_status go_to_reference(making *m, an_master *master, an_error *err)
{
    static const double same_K = 1e-6;
    double wanted_K = an_procedure_number(m->procedure, "reference_temperature");
    if (!isfinite(wanted_K) || fabs(wanted_K - m->result.reference_temperature_K) <= same_K)
        return AN_OK;
    an_move move = {wanted_K, master->trial, (size_t)master->n_trial};
    return an_superposition_move(&m->selection.input, &move, &m->result, err);
}

/* Solid, liquid or undetermined, from the points at their shifts. */
static an_status decide_end(making *m, an_error *err)
{
    const an_superpose_input *input = &m->selection.input;
    an_observation *o = calloc(2 * input->n_point, sizeof *o);
    if (!o)
        return an_fail_memory(err, "the points of the master curve");
    for (size_t k = 0; k < input->n_isotherm; k++)
        for (size_t i = 0; i < input->isotherm[k].n_point; i++) {
            size_t p = input->isotherm[k].first_point + i;
            const an_superpose_point *point = &input->point[p];
            o[2 * p] = (an_observation){.kind = AN_RESPONSE_STORAGE,
                                        .at = point->omega_rad_s,
                                        .log10_aT = m->result.log10_aT[k],
                                        .log10_bT = m->result.log10_bT[k],
                                        .value = point->storage_Pa,
                                        .u = sqrt(point->noise[0])};
            o[2 * p + 1] = o[2 * p];
            o[2 * p + 1].kind = AN_RESPONSE_LOSS;
            o[2 * p + 1].value = point->loss_Pa;
            o[2 * p + 1].u = sqrt(point->noise[2]);
            o[2 * p + 1].correlation = point->noise[1] / sqrt(point->noise[0] * point->noise[2]);
        }
    an_spectrum_options options;
    an_spectrum_defaults(&options);
    options.most_modes_per_decade = options.modes_per_decade; /* the decision hangs on the long end only */
    options.end_state = an_procedure_is(m->procedure, "long_term", "solid")    ? AN_SOLID
                        : an_procedure_is(m->procedure, "long_term", "liquid") ? AN_LIQUID
                                                                               : AN_UNDETERMINED;
    an_status status = an_spectrum_dense(o, 2 * input->n_point, &options, &m->end, err);
    free(o);
    return status;
}

static an_status fill_shifts(const making *m, an_master *master, an_error *err)
{
    const an_superposition *r = &m->result;
    size_t n = r->n_isotherm, stride = 2 * n;
    master->shift = calloc(n, sizeof *master->shift);
    master->covariance = calloc(stride * stride, sizeof *master->covariance);
    if (!master->shift || !master->covariance)
        return an_fail_memory(err, "the shifts of a master document");
    master->n_shift = (int)n;
    memcpy(master->covariance, r->noise_covariance, stride * stride * sizeof *master->covariance);
    for (size_t i = 0; i < n; i++) {
        const an_isotherm *isotherm = &m->grid->isotherm[m->selection.isotherm_of[i]];
        an_shift *s = &master->shift[i];
        size_t a = i * stride + i, b = (n + i) * stride + n + i;
        s->temperature_K = isotherm->temperature_K;
        s->u_temperature_K = isotherm->u_temperature_K;
        s->log10_aT = r->log10_aT[i];
        s->log10_bT = r->log10_bT[i];
        s->u_noise_log10_aT = sqrt(r->noise_covariance[a]);
        s->u_noise_log10_bT = sqrt(r->noise_covariance[b]);
        s->u_common_log10_aT = sqrt(r->common_covariance[a]);
        s->u_common_log10_bT = sqrt(r->common_covariance[b]);
        s->u_log10_aT = hypot(s->u_noise_log10_aT, s->u_common_log10_aT);
        s->u_log10_bT = hypot(s->u_noise_log10_bT, s->u_common_log10_bT);
        s->determined = r->determined[i];
    }
    return AN_OK;
}

/* Residual of a cell against the spectrum of the joint fit, over its own noise. */
static void fill_residual(const an_superposition *r, size_t i_shift, const an_cell *cell,
                          an_master_point *point)
{
    double b = pow(10, r->log10_bT[i_shift]);
    double complex fitted = b * an_maxwell_complex(&r->spectrum, point->reduced_omega);
    point->residual[0] = (cell->storage_Pa - creal(fitted)) / sqrt(cell->noise[0]);
    point->residual[1] = (cell->loss_Pa - cimag(fitted)) / sqrt(cell->noise[2]);
}

static void fill_point(const making *m, size_t i_shift, const an_cell *cell, an_master_point *point)
{
    const an_superposition *r = &m->result;
    double a = pow(10, r->log10_aT[i_shift]), b = pow(10, r->log10_bT[i_shift]);
    point->isotherm = (int)i_shift;
    point->burst = cell->burst;
    point->temperature_K = cell->temperature_K;
    point->frequency_Hz = cell->frequency_Hz;
    point->reduced_omega = 6.283185307179586 * cell->frequency_Hz * a;
    point->storage_Pa = cell->storage_Pa / b;
    point->loss_Pa = cell->loss_Pa / b;
    point->u_storage_Pa = sqrt(cell->noise[0]) / b;
    point->u_loss_Pa = sqrt(cell->noise[2]) / b;
    for (int k = 0; k < 3; k++)
        point->noise[k] = cell->noise[k] / (b * b);
    for (int k = 0; k < AN_SOURCE_COUNT; k++)
        for (int c = 0; c < 2; c++)
            point->common[k][c] = cell->common[k][c] / b;
    fill_residual(r, i_shift, cell, point);
}

/* All cells of the isotherms that took part; those left out of the fit are marked as outliers. */
static an_status fill_points(const making *m, an_master *master, an_error *err)
{
    master->point = calloc((size_t)m->grid->n_cell + 1, sizeof *master->point);
    if (!master->point)
        return an_fail_memory(err, "the points of a master document");
    size_t p = 0;
    for (size_t i = 0; i < m->selection.input.n_isotherm; i++) {
        const an_isotherm *isotherm = &m->grid->isotherm[m->selection.isotherm_of[i]];
        for (int k = 0; k < isotherm->n_cell; k++) {
            int i_cell = isotherm->first_cell + k;
            const an_cell *cell = &m->grid->cell[i_cell];
            int fitted = p < m->selection.input.n_point && m->selection.cell_of[p] == i_cell;
            p += (size_t)fitted;
            if (!(isfinite(cell->storage_Pa) && isfinite(cell->loss_Pa) && cell->noise[0] > 0 &&
                  cell->noise[2] > 0))
                continue;
            an_master_point *point = &master->point[master->n_point++];
            fill_point(m, i, cell, point);
            point->outlier = !fitted;
        }
    }
    return AN_OK;
}

static an_status fill_verdict(const making *m, an_master *master, an_error *err)
{
    const an_superposition *r = &m->result;
    master->reference_temperature_K = r->reference_temperature_K;
    master->vertical = r->vertical;
    master->simplicity = r->simplicity;
    snprintf(master->simplicity_reason, sizeof master->simplicity_reason, "%s", r->reason);
    master->chi_square = r->chi_square;
    master->degrees_of_freedom = (int)lround(r->degrees_of_freedom);
    master->reduced_chi_square = r->reduced_chi_square;
    master->separation_rad = r->separation_rad;
    master->end_state = m->end.end_state;
    an_spectrum_window(r->omega_range, master->window_s);
    return an_maxwell_copy(&master->spectrum, &r->spectrum, err);
}

static an_status remark_shifts(const making *m, an_master *master, an_error *err)
{
    double limit = an_procedure_number(m->procedure, "vertical_flag"), most = 0;
    for (int i = 0; i < master->n_shift; i++) {
        const an_shift *s = &master->shift[i];
        if (!s->determined)
            AN_TRY(an_remark_list_add(&master->remarks, "shift-undetermined", 0, err,
                                      "the shift at %.1f °C is uncertain by %.2g decades (noise part)",
                                      s->temperature_K - AN_ZERO_CELSIUS_K, s->u_noise_log10_aT));
        most = fmax(most, fabs(pow(10, s->log10_bT) - 1));
    }
    if (master->vertical == AN_VERTICAL_FREE && most > limit)
        AN_TRY(an_remark_list_add(&master->remarks, "vertical-large", 0, err, "vertical shifts reach %.3g %%",
                                  100 * most));
    return AN_OK;
}

/* Neighbours whose ranges do not meet: the shift between them rests on the smoothness of the spectrum across
 * the gap. */
static an_status remark_gaps(const making *m, an_master *master, an_error *err)
{
    static const double worth_saying = 0.1; /* decades: less is no more than the step between two points */
    const an_superpose_input *input = &m->selection.input;
    for (size_t i = 0; i + 1 < input->n_isotherm; i++) {
        an_area_shift shift;
        an_area_between(input, i, m->result.vertical, &shift, NULL);
        if (shift.lack == AN_LACKS_SLOPE)
            AN_TRY(an_remark_list_add(&master->remarks, "shift-undetermined", 0, err,
                                      "isotherms at %.1f and %.1f °C run flat within their noise; the shift "
                                      "between them rests on the joint fit alone",
                                      input->isotherm[i].temperature_K - AN_ZERO_CELSIUS_K,
                                      input->isotherm[i + 1].temperature_K - AN_ZERO_CELSIUS_K));
        if (shift.lack != AN_LACKS_NOTHING || shift.gap_decades < worth_saying)
            continue;
        AN_TRY(an_remark_list_add(
            &master->remarks, "gap-bridged", 0, err,
            "isotherms at %.1f and %.1f °C do not meet; the spectrum bridges about %.2g decades",
            input->isotherm[i].temperature_K - AN_ZERO_CELSIUS_K,
            input->isotherm[i + 1].temperature_K - AN_ZERO_CELSIUS_K, shift.gap_decades));
    }
    return AN_OK;
}

static an_status remark_law(an_status fitted, an_master *master, an_error *err)
{
    if (fitted == AN_DUBIOUS)
        AN_TRY(an_remark_list_add(&master->remarks, "law-poor", 0, err,
                                  "no law follows the shift factors within their uncertainty"));
    for (int i = 0; i < master->n_trial; i++)
        if (master->trial[i].chosen && master->trial[i].law.kind == AN_LAW_CROSSOVER)
            AN_TRY(an_remark_list_add(&master->remarks, "crossover", 0, err, "the law changes at %.1f °C",
                                      master->trial[i].law.constant[2] - AN_ZERO_CELSIUS_K));
    return AN_OK;
}

static an_status remark_verdict(an_master *master, an_error *err)
{
    if (master->simplicity != AN_SIMPLE)
        AN_TRY(an_remark_list_add(&master->remarks, an_simplicity_word(master->simplicity), 0, err, "%s",
                                  master->simplicity_reason));
    if (master->end_state == AN_UNDETERMINED)
        AN_TRY(an_remark_list_add(&master->remarks, "end-undetermined", 0, err,
                                  "the data do not say whether it is a solid or a liquid"));
    return AN_OK;
}

static an_status carry_head(const an_grid *grid, an_master *master, an_error *err)
{
    snprintf(master->id, sizeof master->id, "%s", grid->id);
    master->specimen = grid->specimen;
    master->assessment = grid->assessment;
    master->strain_most = grid->strain_most;
    master->u_temperature_bias_K = fmax(grid->apparatus.temperature_bias.u, 0); /* NAN: none stated */
    for (size_t i = 0; i < grid->remarks.n; i++) {
        const an_remark *remark = &grid->remarks.rows[i];
        AN_TRY(an_remark_list_add_as(&master->remarks, remark->kind->code, remark->severity, remark->burst,
                                     err, "%s", remark->text));
    }
    return AN_OK;
}

static an_status make(making *m, an_master *master, an_error *err)
{
    an_superpose_options options;
    options_from(m->procedure, &options);
    AN_TRY(carry_head(m->grid, master, err));
    AN_TRY(an_selection_make(m->grid, &m->selection, &master->remarks, err));
    AN_TRY(an_superpose(&m->selection.input, &options, &m->result, err));
    an_status fitted = fit_laws(m, master, err);
    AN_TRY(fitted);
    AN_TRY(go_to_reference(m, master, err));
    AN_TRY(decide_end(m, err));
    AN_TRY(fill_verdict(m, master, err));
    AN_TRY(fill_shifts(m, master, err));
    AN_TRY(fill_points(m, master, err));
    AN_TRY(remark_shifts(m, master, err));
    AN_TRY(remark_gaps(m, master, err));
    AN_TRY(remark_law(fitted, master, err));
    return remark_verdict(master, err);
}

an_status an_master_make(const an_grid *grid, const an_procedure *procedure, an_master *master, an_error *err)
{
    making m = {.grid = grid, .procedure = procedure};
    an_superposition_init(&m.result);
    an_spectrum_init(&m.end);
    an_status status = make(&m, master, err);
    if (status < 0 && err && !err->place[0])
        an_error_at(err, grid->id);
    an_selection_clear(&m.selection);
    an_superposition_clear(&m.result);
    an_spectrum_clear(&m.end);
    if (status < 0)
        return status;
    return master->simplicity == AN_SIMPLE ? AN_OK : AN_DUBIOUS;
}
