/* The material document, read and written. Ground floor of fit: what a simulation may use, and where it may.
 * Its form is schema/material.xsd; what stands in it must also pass an_material_check. */
#include "anelast/fit_parts.h"
#include "anelast/material.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char *const bases[] = {"E", "G", NULL};
static const char *const end_states[] = {"solid", "liquid", "undetermined", NULL};
static const char *const verticals[] = {"none", "density-temperature", "free", NULL};
static const char *const verdicts[] = {"simple", "doubtful", "complex", NULL};

void an_material_init(an_material *material)
{
    memset(material, 0, sizeof *material);
    an_specimen_init(&material->specimen);
    an_maxwell_init(&material->modes);
    material->u_long_term_Pa = material->strain_limit = NAN;
    material->fit_error = material->fit_error_worst = material->u_common_relative = NAN;
}

void an_material_clear(an_material *material)
{
    an_made_clear(&material->made);
    an_remark_list_clear(&material->remarks);
    an_maxwell_clear(&material->modes);
    free(material->u_modulus_Pa);
    free(material->trusted);
    free(material->covariance_Pa2);
    free(material->scaling_temperature_K);
    free(material->scaling_log10_bT);
    an_material_init(material);
}

static void put_number(an_xml_writer *writer, const char *name, double value, const char *unit)
{
    an_xml_put_measure(writer, name, (an_measure){value, NAN}, unit);
}

static void write_spectrum(an_xml_writer *writer, const an_material *material)
{
    an_mode_marks marks = {material->u_modulus_Pa, material->trusted};
    size_t n = material->modes.n_mode + 1;
    an_xml_start(writer, "spectrum");
    an_xml_put(writer, "basis", bases[material->is_shear ? 1 : 0]);
    an_xml_put(writer, "end_state", material->end_state);
    put_number(writer, "reference_temperature", material->reference_temperature_K, "K");
    an_maxwell_write(writer, &material->modes, &marks, material->u_long_term_Pa);
    if (material->covariance_Pa2) {
        an_xml_start(writer, "covariance");
        an_xml_put(writer, "unit", "Pa2");
        an_numbers_write(writer, material->covariance_Pa2, n * n);
        an_xml_end(writer);
    }
    put_number(writer, "common_uncertainty", material->u_common_relative, "1");
    put_number(writer, "fit_error_rms", material->fit_error, "1");
    put_number(writer, "fit_error_worst", material->fit_error_worst, "1");
    an_xml_end(writer);
}

static void write_scaling(an_xml_writer *writer, const an_material *material)
{
    an_xml_start(writer, "elastic_scaling");
    an_xml_put(writer, "kind", material->vertical);
    for (int i = 0; i < material->n_scaling; i++) {
        an_xml_start(writer, "scale");
        put_number(writer, "temperature", material->scaling_temperature_K[i], "K");
        put_number(writer, "log10_bT", material->scaling_log10_bT[i], "1");
        an_xml_end(writer);
    }
    an_xml_end(writer);
}

static void write_valid(an_xml_writer *writer, const an_material *material)
{
    an_xml_start(writer, "valid");
    put_number(writer, "time_from", material->window_time_s[0], "s");
    put_number(writer, "time_to", material->window_time_s[1], "s");
    put_number(writer, "temperature_from", material->window_temperature_K[0], "K");
    put_number(writer, "temperature_to", material->window_temperature_K[1], "K");
    put_number(writer, "strain_to", material->strain_limit, "1");
    an_xml_end(writer);
}

static void write_cautions(an_xml_writer *writer, const an_material *material)
{
    char text[AN_CAUTION_SIZE];
    for (int i = 0; an_material_caution(material, i, text); i++) {
        an_xml_start(writer, "caution");
        an_xml_put_text(writer, text);
        an_xml_end(writer);
    }
}

void an_material_write(an_xml_writer *writer, const an_material *material)
{
    an_xml_put(writer, "id", material->id);
    an_made_write(writer, &material->made);
    an_specimen_write(writer, &material->specimen);
    an_remark_list_write(writer, &material->remarks, -1);
    write_spectrum(writer, material);
    an_law_write(writer, &material->law);
    if (material->u_temperature_bias_K > 0)
        put_number(writer, "temperature_uncertainty", material->u_temperature_bias_K, "K");
    write_scaling(writer, material);
    write_valid(writer, material);
    an_xml_start(writer, "superposition");
    an_xml_put(writer, "verdict", material->simplicity);
    if (material->override_reason[0])
        an_xml_put(writer, "override", material->override_reason);
    an_xml_end(writer);
    write_cautions(writer, material);
}

/* A measure that may be missing: NAN then. */
static an_status read_optional(const an_xml_node *node, const char *name, const char *unit, double *value,
                               an_error *err)
{
    an_measure measure;
    AN_TRY(an_xml_measure_optional(node, name, unit, &measure, err));
    *value = measure.value;
    return AN_OK;
}

static an_status read_number(const an_xml_node *node, const char *name, const char *unit, double *value,
                             an_error *err)
{
    an_measure measure;
    AN_TRY(an_xml_measure(node, name, unit, &measure, err));
    *value = measure.value;
    return AN_OK;
}

static an_status read_text(const an_xml_node *node, const char *name, char *text, size_t size, an_error *err)
{
    const char *got = an_xml_attribute_of(node, name);
    if (got && strlen(got) >= size)
        return an_xml_fail(node, err, AN_E_LIMIT, "attribute '%s' is longer than %zu bytes", name, size - 1);
    memcpy(text, got ? got : "", got ? strlen(got) + 1 : 1);
    return AN_OK;
}

/* Uncertainty and trust of every mode. Nothing said means: not known, and trusted. */
static an_status read_marks(const an_xml_node *node, an_material *material, an_error *err)
{
    size_t n = material->modes.n_mode;
    size_t i = 0;
    bool all_known = true;
    material->u_modulus_Pa = calloc(n + 1, sizeof *material->u_modulus_Pa);
    material->trusted = calloc(n + 1, sizeof *material->trusted);
    if (!material->u_modulus_Pa || !material->trusted)
        return an_fail_memory(err, "the modes of a material");
    for (const an_xml_node *mode = an_xml_child(node, "mode"); mode; mode = an_xml_next(mode, "mode"), i++) {
        an_measure modulus;
        const char *trusted = an_xml_attribute_of(mode, "trusted");
        AN_TRY(an_xml_measure_optional(mode, "modulus", "Pa", &modulus, err));
        material->u_modulus_Pa[i] = modulus.u;
        all_known = all_known && !isnan(modulus.u);
        material->trusted[i] = !trusted || strcmp(trusted, "true") == 0 || strcmp(trusted, "1") == 0;
    }
    if (!all_known) {
        free(material->u_modulus_Pa);
        material->u_modulus_Pa = NULL;
    }
    return AN_OK;
}

static an_status read_covariance(const an_xml_node *node, an_material *material, an_error *err)
{
    const an_xml_node *covariance = an_xml_child(node, "covariance");
    size_t n = material->modes.n_mode + 1;
    const char *unit;
    if (!covariance)
        return AN_OK;
    AN_TRY(an_xml_text(covariance, "unit", &unit, err));
    if (strcmp(unit, "Pa2") != 0)
        return an_xml_fail(covariance, err, AN_E_UNIT, "unit '%.20s'; Pa2 is allowed", unit);
    if (!an_numbers_fit(covariance, n * n))
        return an_xml_fail(covariance, err, AN_E_VALUE, "fewer numbers than the %zu that %zu modes need",
                           n * n, n - 1);
    material->covariance_Pa2 = calloc(n * n, sizeof *material->covariance_Pa2);
    if (!material->covariance_Pa2)
        return an_fail_memory(err, "the covariance of a material");
    return an_numbers_read(covariance, material->covariance_Pa2, n * n, err);
}

static an_status read_spectrum(const an_xml_node *node, an_material *material, an_error *err)
{
    int i_word;
    an_measure long_term;
    AN_TRY(an_xml_word(node, "basis", bases, &i_word, err));
    material->is_shear = i_word == 1;
    AN_TRY(an_xml_word(node, "end_state", end_states, &i_word, err));
    strcpy(material->end_state, end_states[i_word]);
    AN_TRY(read_number(node, "reference_temperature", "K", &material->reference_temperature_K, err));
    AN_TRY(an_maxwell_read(node, &material->modes, &material->instantaneous_Pa, err));
    AN_TRY(an_xml_measure(node, "long_term_modulus", "Pa", &long_term, err));
    material->long_term_Pa = long_term.value;
    material->u_long_term_Pa = long_term.u;
    AN_TRY(read_marks(node, material, err));
    AN_TRY(read_covariance(node, material, err));
    AN_TRY(read_optional(node, "common_uncertainty", "1", &material->u_common_relative, err));
    AN_TRY(read_optional(node, "fit_error_rms", "1", &material->fit_error, err));
    return read_optional(node, "fit_error_worst", "1", &material->fit_error_worst, err);
}

static an_status read_scaling(const an_xml_node *node, an_material *material, an_error *err)
{
    int i_word;
    size_t n = an_xml_count_children(node, "scale");
    AN_TRY(an_xml_word(node, "kind", verticals, &i_word, err));
    strcpy(material->vertical, verticals[i_word]);
    material->scaling_temperature_K = calloc(n + 1, sizeof *material->scaling_temperature_K);
    material->scaling_log10_bT = calloc(n + 1, sizeof *material->scaling_log10_bT);
    if (!material->scaling_temperature_K || !material->scaling_log10_bT)
        return an_fail_memory(err, "the elastic scaling of a material");
    for (const an_xml_node *scale = an_xml_child(node, "scale"); scale; scale = an_xml_next(scale, "scale")) {
        int i = material->n_scaling++;
        AN_TRY(read_number(scale, "temperature", "K", &material->scaling_temperature_K[i], err));
        AN_TRY(read_number(scale, "log10_bT", "1", &material->scaling_log10_bT[i], err));
    }
    return AN_OK;
}

static an_status read_valid(const an_xml_node *node, an_material *material, an_error *err)
{
    AN_TRY(read_number(node, "time_from", "s", &material->window_time_s[0], err));
    AN_TRY(read_number(node, "time_to", "s", &material->window_time_s[1], err));
    AN_TRY(read_number(node, "temperature_from", "K", &material->window_temperature_K[0], err));
    AN_TRY(read_number(node, "temperature_to", "K", &material->window_temperature_K[1], err));
    return read_optional(node, "strain_to", "1", &material->strain_limit, err);
}

static an_status read_root(const an_xml_node *root, an_material *material, an_error *err)
{
    const an_xml_node *child;
    an_measure bias;
    int i_word;
    AN_TRY(read_text(root, "id", material->id, sizeof material->id, err));
    if (an_xml_child(root, "made"))
        AN_TRY(an_made_read(root, &material->made, err));
    AN_TRY(an_xml_need(root, "specimen", &child, err));
    AN_TRY(an_specimen_from_node(child, &material->specimen, err));
    AN_TRY(an_remark_list_read(root, &material->remarks, err));
    AN_TRY(an_xml_need(root, "spectrum", &child, err));
    AN_TRY(read_spectrum(child, material, err));
    AN_TRY(an_law_read(an_xml_child(root, "law"), &material->law, err));
    AN_TRY(an_xml_measure_optional(root, "temperature_uncertainty", "K", &bias, err));
    material->u_temperature_bias_K = isnan(bias.value) ? 0 : bias.value;
    AN_TRY(an_xml_need(root, "elastic_scaling", &child, err));
    AN_TRY(read_scaling(child, material, err));
    AN_TRY(an_xml_need(root, "valid", &child, err));
    AN_TRY(read_valid(child, material, err));
    AN_TRY(an_xml_need(root, "superposition", &child, err));
    AN_TRY(an_xml_word(child, "verdict", verdicts, &i_word, err));
    strcpy(material->simplicity, verdicts[i_word]);
    return read_text(child, "override", material->override_reason, sizeof material->override_reason, err);
}

an_status an_material_read(const char *path, an_material *material, char sha256[65], an_error *err)
{
    an_xml_document document;
    an_xml_reading reading = {.root = "material"};
    an_status status = an_xml_read(path, &reading, &document, err);
    an_material_clear(material);
    if (status >= 0)
        status = read_root(document.root, material, err);
    if (status >= 0) {
        status = an_material_check(material, err);
        if (status < 0 && err)
            an_error_at(err, document.file);
    }
    if (status >= 0 && sha256)
        memcpy(sha256, document.sha256, AN_SHA256_SIZE);
    an_xml_document_clear(&document);
    return status;
}
