/* grid_read.c: the grid document read and validated. It fits in memory: a grid is a few thousand cells.
 */
#include "anelast/grid.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char *const verdicts[] = {"usable", "partial", "repeat", NULL};
static const char *const kinds[] = {"storage onset", "loss peak", "loss factor peak", NULL};
static const char *const directions[] = {"heating", "cooling", NULL};
static const char *const truths[] = {"false", "true", "0", "1", NULL};
static const char *const passes[] = {"isotherms", "ramp", NULL};

static an_status read_word(const an_xml_node *node, const char *name, const char *const *words, int standard,
                           int *i_word, an_error *err)
{
    *i_word = standard;
    if (!an_xml_attribute_of(node, name))
        return AN_OK;
    return an_xml_word(node, name, words, i_word, err);
}

static an_status read_truth(const an_xml_node *node, const char *name, int standard, int *truth,
                            an_error *err)
{
    AN_TRY(read_word(node, name, truths, standard, truth, err));
    *truth %= 2;
    return AN_OK;
}

static an_status read_count(const an_xml_node *node, const char *name, int *count, an_error *err)
{
    int64_t value;
    AN_TRY(an_xml_integer(node, name, 0, INT32_MAX, &value, err));
    *count = (int)value;
    return AN_OK;
}

static an_status read_value(const an_xml_node *node, const char *name, const char *unit, double *value,
                            an_error *err)
{
    an_measure measure;
    AN_TRY(an_xml_measure(node, name, unit, &measure, err));
    *value = measure.value;
    return AN_OK;
}

/* A value that may be absent: NAN then. */
static an_status read_optional(const an_xml_node *node, const char *name, const char *unit,
                               an_measure *measure, an_error *err)
{
    return an_xml_measure_optional(node, name, unit, measure, err);
}

static an_status read_noise(const an_xml_node *node, double noise[3], an_error *err)
{
    const an_xml_node *child;
    AN_TRY(an_xml_need(node, "noise", &child, err));
    AN_TRY(an_xml_double(child, "storage_storage", &noise[0], err));
    AN_TRY(an_xml_double(child, "storage_loss", &noise[1], err));
    AN_TRY(an_xml_double(child, "loss_loss", &noise[2], err));
    if (!(noise[0] >= 0 && noise[2] >= 0 && noise[1] * noise[1] <= noise[0] * noise[2] * (1 + 1e-9)))
        return an_xml_fail(child, err, AN_E_VALUE, "%g, %g, %g is no covariance", noise[0], noise[1],
                           noise[2]);
    return AN_OK;
}

/* A source that this reader does not know comes from a newer maker; its share cannot be carried on and is
 * refused. */
static an_status read_common(const an_xml_node *node, double common[AN_SOURCE_COUNT][2], an_error *err)
{
    for (const an_xml_node *child = an_xml_child(node, "common"); child;
         child = an_xml_next(child, "common")) {
        const char *word;
        AN_TRY(an_xml_text(child, "source", &word, err));
        an_source source = an_source_find(word);
        if (source == AN_SOURCE_COUNT)
            return an_xml_fail(child, err, AN_E_VALUE, "source '%s' is not known", word);
        AN_TRY(an_xml_double(child, "storage", &common[source][0], err));
        AN_TRY(an_xml_double(child, "loss", &common[source][1], err));
    }
    return AN_OK;
}

static an_status read_cell(const an_xml_node *node, int i_isotherm, an_cell *cell, an_error *err)
{
    *cell = (an_cell){.isotherm = i_isotherm};
    AN_TRY(read_count(node, "burst", &cell->burst, err));
    AN_TRY(read_count(node, "repeats", &cell->n_repeat, err));
    AN_TRY(read_truth(node, "outlier", 0, &cell->outlier, err));
    AN_TRY(read_value(node, "temperature", "K", &cell->temperature_K, err));
    AN_TRY(read_value(node, "frequency", "Hz", &cell->frequency_Hz, err));
    AN_TRY(read_value(node, "storage", "Pa", &cell->storage_Pa, err));
    AN_TRY(read_value(node, "loss", "Pa", &cell->loss_Pa, err));
    AN_TRY(read_noise(node, cell->noise, err));
    AN_TRY(read_common(node, cell->common, err));
    if (!(cell->temperature_K > 0 && cell->frequency_Hz > 0 && cell->storage_Pa > 0))
        return an_xml_fail(node, err, AN_E_VALUE,
                           "burst %d: temperature, frequency and storage modulus must be positive",
                           cell->burst);
    return an_remark_list_read(node, &cell->remarks, err);
}

/* Cells are counted as they arrive, so that what was read is cleared whatever follows. */
static an_status read_cells(const an_xml_node *node, int i_isotherm, an_cell *cell, int *n_cell,
                            an_error *err)
{
    for (const an_xml_node *child = an_xml_child(node, "cell"); child; child = an_xml_next(child, "cell"))
        AN_TRY(read_cell(child, i_isotherm, &cell[(*n_cell)++], err));
    return AN_OK;
}

static an_status read_isotherm(const an_xml_node *node, an_grid *grid, an_error *err)
{
    int i_isotherm = grid->n_isotherm++;
    an_isotherm *isotherm = &grid->isotherm[i_isotherm];
    an_measure temperature, set, spread, rate;
    AN_TRY(read_word(node, "direction", directions, 0, &isotherm->cooling, err));
    AN_TRY(read_truth(node, "steady", 1, &isotherm->steady, err));
    AN_TRY(an_xml_measure(node, "temperature", "K", &temperature, err));
    AN_TRY(read_optional(node, "set_temperature", "K", &set, err));
    AN_TRY(read_optional(node, "spread", "K", &spread, err));
    AN_TRY(read_optional(node, "rate", "K/s", &rate, err));
    isotherm->temperature_K = temperature.value;
    isotherm->u_temperature_K = isnan(temperature.u) ? 0 : temperature.u;
    isotherm->set_temperature_K = set.value;
    isotherm->drift_K = isnan(spread.value) ? 0 : spread.value;
    isotherm->rate_K_s = rate.value;
    isotherm->u_rate_K_s = rate.u;
    isotherm->first_cell = grid->n_cell;
    AN_TRY(read_cells(node, i_isotherm, grid->cell, &grid->n_cell, err));
    isotherm->n_cell = grid->n_cell - isotherm->first_cell;
    return AN_OK;
}

static an_status read_reading(const an_xml_node *node, an_grid *grid, an_error *err)
{
    an_reading *reading = &grid->reading[grid->n_reading++];
    const char *refused = an_xml_attribute_of(node, "refused");
    int kind;
    AN_TRY(an_xml_word(node, "kind", kinds, &kind, err));
    *reading = (an_reading){(an_reading_kind)kind, NAN, NAN, NAN, NAN, NAN, 0, ""};
    AN_TRY(read_word(node, "from", passes, 0, &reading->on_ramp, err));
    AN_TRY(read_value(node, "frequency", "Hz", &reading->frequency_Hz, err));
    if (refused) {
        snprintf(reading->reason, sizeof reading->reason, "%s", refused);
        return AN_OK;
    }
    const an_xml_node *temperature;
    AN_TRY(an_xml_need(node, "temperature", &temperature, err));
    AN_TRY(read_value(node, "temperature", "K", &reading->temperature_K, err));
    AN_TRY(an_xml_double_or(temperature, "u_noise", NAN, &reading->u_noise_K, err));
    AN_TRY(an_xml_double_or(temperature, "u_form", NAN, &reading->u_form_K, err));
    return an_xml_double_or(temperature, "u_common", NAN, &reading->u_common_K, err);
}

an_status an_assessment_read(const an_xml_node *root, an_assessment *assessment, an_error *err)
{
    const an_xml_node *node;
    int verdict;
    *assessment = (an_assessment){0};
    AN_TRY(an_xml_need(root, "assessment", &node, err));
    AN_TRY(an_xml_word(node, "verdict", verdicts, &verdict, err));
    assessment->verdict = (an_verdict)verdict;
    AN_TRY(read_count(node, "used", &assessment->n_used, err));
    AN_TRY(read_count(node, "flagged", &assessment->n_flagged, err));
    AN_TRY(read_count(node, "skipped", &assessment->n_skipped, err));
    for (const an_xml_node *child = an_xml_child(node, "reason"); child; child = an_xml_next(child, "reason"))
        if (assessment->n_reason < AN_REASONS)
            snprintf(assessment->reason[assessment->n_reason++], sizeof assessment->reason[0], "%s",
                     child->text);
    const an_xml_node *largest = an_xml_child(node, "largest_correction");
    if (largest)
        snprintf(assessment->largest_correction, sizeof assessment->largest_correction, "%s", largest->text);
    return AN_OK;
}

static an_status read_scatter(const an_xml_node *root, an_scatter *scatter, an_error *err)
{
    const an_xml_node *node = an_xml_child(root, "scatter");
    an_measure within_modulus, within_delta, between_modulus, between_delta;
    if (!node)
        return AN_OK;
    AN_TRY(read_count(node, "runs", &scatter->n_run, err));
    AN_TRY(read_optional(node, "within_modulus", "1", &within_modulus, err));
    AN_TRY(read_optional(node, "within_delta", "rad", &within_delta, err));
    AN_TRY(read_optional(node, "between_modulus", "1", &between_modulus, err));
    AN_TRY(read_optional(node, "between_delta", "rad", &between_delta, err));
    *scatter = (an_scatter){scatter->n_run, between_modulus.value, between_delta.value, within_modulus.value,
                            within_delta.value};
    return AN_OK;
}

/* Room for all there is in the document: counted, then claimed at once. */
static an_status make_room(const an_xml_node *root, an_grid *grid, an_error *err)
{
    size_t n_cell = 1;
    for (const an_xml_node *node = an_xml_child(root, "isotherm"); node; node = an_xml_next(node, "isotherm"))
        n_cell += an_xml_count_children(node, "cell");
    grid->isotherm = calloc(an_xml_count_children(root, "isotherm") + 1, sizeof *grid->isotherm);
    grid->cell = calloc(n_cell, sizeof *grid->cell);
    grid->ramp = calloc(an_xml_count_children(an_xml_child(root, "ramp"), "cell") + 1, sizeof *grid->ramp);
    grid->reading = calloc(an_xml_count_children(root, "reading") + 1, sizeof *grid->reading);
    return grid->isotherm && grid->cell && grid->ramp && grid->reading ? AN_OK
                                                                       : an_fail_memory(err, "a grid");
}

static an_status read_head(const an_xml_node *root, an_grid *grid, an_error *err)
{
    const char *id;
    const an_xml_node *node;
    an_measure strain;
    AN_TRY(an_xml_text(root, "id", &id, err));
    snprintf(grid->id, sizeof grid->id, "%s", id);
    AN_TRY(an_made_read(root, &grid->made, err));
    AN_TRY(an_xml_need(root, "specimen", &node, err));
    AN_TRY(an_specimen_from_node(node, &grid->specimen, err));
    AN_TRY(an_xml_need(root, "apparatus", &node, err));
    AN_TRY(an_apparatus_from_node(node, &grid->apparatus, err));
    AN_TRY(an_remark_list_read(root, &grid->remarks, err));
    AN_TRY(an_xml_measure_optional(root, "strain_most", "1", &strain, err));
    grid->strain_most = strain.value;
    return an_assessment_read(root, &grid->assessment, err);
}

static an_status read_root(const an_xml_node *root, an_grid *grid, an_error *err)
{
    AN_TRY(read_head(root, grid, err));
    AN_TRY(make_room(root, grid, err));
    for (const an_xml_node *node = an_xml_child(root, "isotherm"); node; node = an_xml_next(node, "isotherm"))
        AN_TRY(read_isotherm(node, grid, err));
    const an_xml_node *ramp = an_xml_child(root, "ramp");
    if (ramp)
        AN_TRY(read_cells(ramp, -1, grid->ramp, &grid->n_ramp, err));
    for (const an_xml_node *node = an_xml_child(root, "reading"); node; node = an_xml_next(node, "reading"))
        AN_TRY(read_reading(node, grid, err));
    return read_scatter(root, &grid->scatter, err);
}

an_status an_grid_read(const char *path, an_grid *grid, char sha256[65], an_error *err)
{
    an_xml_document document;
    an_xml_reading reading = {.root = "grid"};
    an_status status = an_xml_read(path, &reading, &document, err);
    if (status >= 0)
        status = read_root(document.root, grid, err);
    if (status >= 0 && sha256)
        memcpy(sha256, document.sha256, AN_SHA256_SIZE);
    an_xml_document_clear(&document);
    return status;
}
