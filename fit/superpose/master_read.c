/* The master document, read. Stage: superpose. Its form is schema/master.xsd; shifts must stand at rising
 * temperatures and its spectrum must pass an_maxwell_check. */
#include "anelast/fit_parts.h"
#include "anelast/master.h"

#include <limits.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char *const verdicts[] = {"simple", "doubtful", "complex", NULL};
static const char *const verticals[] = {"none", "density-temperature", "free", NULL};

void an_master_init(an_master *master)
{
    memset(master, 0, sizeof *master);
    an_specimen_init(&master->specimen);
    an_maxwell_init(&master->spectrum);
    master->strain_most = NAN;
}

void an_master_clear(an_master *master)
{
    an_made_clear(&master->made);
    an_remark_list_clear(&master->remarks);
    an_maxwell_clear(&master->spectrum);
    free(master->shift);
    free(master->covariance);
    free(master->point);
    an_master_init(master);
}

static an_status read_number(const an_xml_node *node, const char *name, const char *unit, double *value,
                             an_error *err)
{
    an_measure measure;
    AN_TRY(an_xml_measure(node, name, unit, &measure, err));
    *value = measure.value;
    return AN_OK;
}

static an_status read_integer(const an_xml_node *node, const char *name, int *value, an_error *err)
{
    int64_t wide;
    AN_TRY(an_xml_integer(node, name, 0, INT_MAX, &wide, err));
    *value = (int)wide;
    return AN_OK;
}

static int is_true(const an_xml_node *node, const char *name)
{
    const char *word = an_xml_attribute_of(node, name);
    return word && (strcmp(word, "true") == 0 || strcmp(word, "1") == 0);
}

static an_status copy_text(const an_xml_node *node, const char *name, char *text, size_t size, an_error *err)
{
    const char *got = an_xml_attribute_of(node, name);
    size_t length = got ? strlen(got) : 0;
    if (length >= size)
        return an_xml_fail(node, err, AN_E_LIMIT, "attribute '%s' is longer than %zu bytes", name, size - 1);
    memcpy(text, got ? got : "", length + 1);
    return AN_OK;
}

/* value, u, u_noise, u_common of a logarithm. */
static an_status read_log(const an_xml_node *node, const char *name, double *value[4], an_error *err)
{
    const an_xml_node *child;
    an_measure measure;
    AN_TRY(an_xml_need(node, name, &child, err));
    AN_TRY(an_xml_measure_here(child, "1", &measure, err));
    *value[0] = measure.value;
    *value[1] = measure.u;
    AN_TRY(an_xml_double_or(child, "u_noise", NAN, value[2], err));
    return an_xml_double_or(child, "u_common", NAN, value[3], err);
}

static an_status read_shift(const an_xml_node *node, an_shift *s, an_error *err)
{
    double *a[] = {&s->log10_aT, &s->u_log10_aT, &s->u_noise_log10_aT, &s->u_common_log10_aT};
    double *b[] = {&s->log10_bT, &s->u_log10_bT, &s->u_noise_log10_bT, &s->u_common_log10_bT};
    an_measure temperature;
    s->determined = is_true(node, "determined");
    AN_TRY(an_xml_measure(node, "temperature", "K", &temperature, err));
    s->temperature_K = temperature.value;
    s->u_temperature_K = temperature.u;
    AN_TRY(read_log(node, "log10_aT", a, err));
    return read_log(node, "log10_bT", b, err);
}

static an_status read_shifts(const an_xml_node *node, an_master *master, an_error *err)
{
    size_t n = an_xml_count_children(node, "shift");
    const an_xml_node *covariance = an_xml_child(node, "covariance");
    master->shift = calloc(n + 1, sizeof *master->shift);
    if (!master->shift)
        return an_fail_memory(err, "the shifts of a master document");
    for (const an_xml_node *s = an_xml_child(node, "shift"); s; s = an_xml_next(s, "shift")) {
        int i = master->n_shift++;
        AN_TRY(read_shift(s, &master->shift[i], err));
        if (i > 0 && !(master->shift[i].temperature_K > master->shift[i - 1].temperature_K))
            return an_xml_fail(s, err, AN_E_VALUE, "%g K is not above %g K of the shift before it",
                               master->shift[i].temperature_K, master->shift[i - 1].temperature_K);
    }
    if (!covariance)
        return AN_OK;
    if (!an_numbers_fit(covariance, 4 * n * n))
        return an_xml_fail(covariance, err, AN_E_VALUE, "fewer numbers than the %zu that %zu shifts need",
                           4 * n * n, n);
    master->covariance = calloc(4 * n * n + 1, sizeof *master->covariance);
    if (!master->covariance)
        return an_fail_memory(err, "the covariance of the shifts");
    return an_numbers_read(covariance, master->covariance, 4 * n * n, err);
}

static an_status read_trial(const an_xml_node *node, an_law_trial *trial, an_error *err)
{
    const char *word;
    an_measure chi_square, criterion;
    AN_TRY(an_law_read(an_xml_child(node, "law"), &trial->law, err));
    AN_TRY(an_xml_text(node, "kind", &word, err));
    if (!an_law_kind_from_name(word, &trial->law.kind))
        return an_xml_fail(node, err, AN_E_VALUE, "kind '%.40s' is no law known here", word);
    AN_TRY(read_integer(node, "constants", &trial->n_constant, err));
    AN_TRY(copy_text(node, "refused", trial->reason, sizeof trial->reason, err));
    trial->chosen = is_true(node, "chosen");
    AN_TRY(an_xml_measure_optional(node, "chi_square", "1", &chi_square, err));
    AN_TRY(an_xml_measure_optional(node, "criterion", "1", &criterion, err));
    trial->chi_square = isnan(chi_square.value) ? INFINITY : chi_square.value;
    trial->criterion = isnan(criterion.value) ? INFINITY : criterion.value;
    if (trial->chosen && trial->reason[0])
        return an_xml_fail(node, err, AN_E_VALUE, "a law that is refused cannot be chosen");
    return AN_OK;
}

static an_status read_trials(const an_xml_node *root, an_master *master, an_error *err)
{
    for (const an_xml_node *node = an_xml_child(root, "trial"); node; node = an_xml_next(node, "trial")) {
        if (master->n_trial == AN_LAW_TRIALS)
            return an_xml_fail(node, err, AN_E_LIMIT, "more than %d laws were tried", AN_LAW_TRIALS);
        AN_TRY(read_trial(node, &master->trial[master->n_trial++], err));
    }
    return AN_OK;
}

static an_status read_covariances(const an_xml_node *node, an_master_point *point, an_error *err)
{
    const an_xml_node *noise;
    AN_TRY(an_xml_need(node, "noise", &noise, err));
    AN_TRY(an_xml_double(noise, "storage_storage", &point->noise[0], err));
    AN_TRY(an_xml_double(noise, "storage_loss", &point->noise[1], err));
    AN_TRY(an_xml_double(noise, "loss_loss", &point->noise[2], err));
    for (const an_xml_node *c = an_xml_child(node, "common"); c; c = an_xml_next(c, "common")) {
        const char *word;
        AN_TRY(an_xml_text(c, "source", &word, err));
        an_source source = an_source_find(word);
        if (source == AN_SOURCE_COUNT)
            return an_xml_fail(c, err, AN_E_VALUE, "source '%.40s' is not known here", word);
        AN_TRY(an_xml_double(c, "storage", &point->common[source][0], err));
        AN_TRY(an_xml_double(c, "loss", &point->common[source][1], err));
    }
    return AN_OK;
}

static an_status read_moduli(const an_xml_node *node, an_master_point *point, an_error *err)
{
    an_measure storage, loss;
    AN_TRY(an_xml_measure(node, "storage", "Pa", &storage, err));
    AN_TRY(an_xml_measure(node, "loss", "Pa", &loss, err));
    point->storage_Pa = storage.value;
    point->u_storage_Pa = storage.u;
    point->loss_Pa = loss.value;
    point->u_loss_Pa = loss.u;
    return read_covariances(node, point, err);
}

static an_status read_point(const an_xml_node *node, int n_shift, an_master_point *point, an_error *err)
{
    int64_t isotherm;
    const an_xml_node *residual = an_xml_child(node, "residual");
    AN_TRY(an_xml_integer(node, "isotherm", 1, n_shift, &isotherm, err));
    point->isotherm = (int)isotherm - 1;
    AN_TRY(read_integer(node, "burst", &point->burst, err));
    point->outlier = is_true(node, "outlier");
    AN_TRY(read_number(node, "temperature", "K", &point->temperature_K, err));
    AN_TRY(read_number(node, "frequency", "Hz", &point->frequency_Hz, err));
    AN_TRY(read_number(node, "reduced_omega", "rad/s", &point->reduced_omega, err));
    AN_TRY(read_moduli(node, point, err));
    point->residual[0] = point->residual[1] = NAN;
    if (!residual)
        return AN_OK;
    AN_TRY(an_xml_double(residual, "storage", &point->residual[0], err));
    return an_xml_double(residual, "loss", &point->residual[1], err);
}

static an_status read_points(const an_xml_node *root, an_master *master, an_error *err)
{
    master->point = calloc(an_xml_count_children(root, "point") + 1, sizeof *master->point);
    if (!master->point)
        return an_fail_memory(err, "the points of a master document");
    for (const an_xml_node *node = an_xml_child(root, "point"); node; node = an_xml_next(node, "point"))
        AN_TRY(read_point(node, master->n_shift, &master->point[master->n_point++], err));
    return AN_OK;
}

static an_status read_verdict(const an_xml_node *node, an_master *master, an_error *err)
{
    int i_word;
    AN_TRY(an_xml_word(node, "verdict", verdicts, &i_word, err));
    master->simplicity = (an_simplicity)i_word;
    AN_TRY(an_xml_word(node, "vertical", verticals, &i_word, err));
    master->vertical = (an_vertical)i_word;
    AN_TRY(copy_text(node, "reason", master->simplicity_reason, sizeof master->simplicity_reason, err));
    AN_TRY(read_integer(node, "degrees_of_freedom", &master->degrees_of_freedom, err));
    AN_TRY(read_number(node, "reference_temperature", "K", &master->reference_temperature_K, err));
    AN_TRY(read_number(node, "chi_square", "1", &master->chi_square, err));
    AN_TRY(read_number(node, "reduced_chi_square", "1", &master->reduced_chi_square, err));
    return read_number(node, "separation", "rad", &master->separation_rad, err);
}

static an_status read_spectrum(const an_xml_node *node, an_master *master, an_error *err)
{
    static const char *const end_states[] = {"undetermined", "solid", "liquid", NULL};
    double instantaneous;
    int i_word;
    an_error fault = {0};
    AN_TRY(an_xml_word(node, "end_state", end_states, &i_word, err));
    master->end_state = (an_end_state)i_word;
    AN_TRY(an_maxwell_read(node, &master->spectrum, &instantaneous, err));
    if (an_maxwell_check(&master->spectrum, &fault) < 0)
        return an_xml_fail(node, err, fault.status, "%.800s", fault.text);
    AN_TRY(read_number(node, "window_from", "s", &master->window_s[0], err));
    return read_number(node, "window_to", "s", &master->window_s[1], err);
}

static an_status read_root(const an_xml_node *root, an_master *master, an_error *err)
{
    const an_xml_node *child;
    an_measure strain, bias;
    AN_TRY(copy_text(root, "id", master->id, sizeof master->id, err));
    AN_TRY(an_made_read(root, &master->made, err));
    AN_TRY(an_xml_need(root, "specimen", &child, err));
    AN_TRY(an_specimen_from_node(child, &master->specimen, err));
    AN_TRY(an_remark_list_read(root, &master->remarks, err));
    AN_TRY(an_assessment_read(root, &master->assessment, err));
    AN_TRY(an_xml_measure_optional(root, "strain_most", "1", &strain, err));
    master->strain_most = strain.value;
    AN_TRY(an_xml_measure_optional(root, "temperature_uncertainty", "K", &bias, err));
    master->u_temperature_bias_K = isnan(bias.value) ? 0 : bias.value;
    AN_TRY(an_xml_need(root, "superposition", &child, err));
    AN_TRY(read_verdict(child, master, err));
    AN_TRY(an_xml_need(root, "shifts", &child, err));
    AN_TRY(read_shifts(child, master, err));
    AN_TRY(read_trials(root, master, err));
    AN_TRY(read_points(root, master, err));
    AN_TRY(an_xml_need(root, "spectrum", &child, err));
    return read_spectrum(child, master, err);
}

an_status an_master_read(const char *path, an_master *master, char sha256[65], an_error *err)
{
    an_xml_document document;
    an_xml_reading reading = {.root = "master"};
    an_status status = an_xml_read(path, &reading, &document, err);
    an_master_clear(master);
    if (status >= 0)
        status = read_root(document.root, master, err);
    if (status >= 0 && sha256)
        memcpy(sha256, document.sha256, AN_SHA256_SIZE);
    an_xml_document_clear(&document);
    return status;
}
