/* Shift laws and Maxwell spectra as elements of a document. Ground floor of fit. Numbers are written so that
 * they read back to the same bits; units in a document may be any of their dimension. */
#include "anelast/fit_parts.h"
#include "anelast/number.h"

#include <math.h>
#include <string.h>

void an_numbers_write(an_xml_writer *writer, const double *value, size_t n)
{
    char text[AN_NUMBER_SIZE];
    for (size_t i = 0; i < n; i++) {
        an_number_print(value[i], text);
        if (i > 0)
            an_xml_put_text(writer, " ");
        an_xml_put_text(writer, text);
    }
}

/* A number and the blank behind it take two bytes at least; the last one needs no blank. */
bool an_numbers_fit(const an_xml_node *node, size_t n)
{
    return n <= (node->n_text + 1) / 2;
}

an_status an_numbers_read(const an_xml_node *node, double *value, size_t n, an_error *err)
{
    static const char blanks[] = " \t\r\n";
    size_t count = 0;
    for (const char *at = node->text + strspn(node->text, blanks); *at; at += strspn(at, blanks)) {
        size_t length = strcspn(at, blanks);
        if (count == n)
            return an_xml_fail(node, err, AN_E_VALUE, "more than %zu numbers", n);
        if (!an_number_parse(at, length, '.', &value[count]))
            return an_xml_fail(node, err, AN_E_VALUE, "'%.*s' is not a number",
                               (int)(length < 40 ? length : 40), at);
        count++;
        at += length;
    }
    return count == n ? AN_OK : an_xml_fail(node, err, AN_E_VALUE, "%zu numbers; %zu are needed", count, n);
}

static void put_temperature(an_xml_writer *writer, const char *name, double temperature_K)
{
    if (isfinite(temperature_K) && temperature_K > 0)
        an_xml_put_measure(writer, name, (an_measure){temperature_K, NAN}, "K");
}

void an_law_write(an_xml_writer *writer, const an_law *law)
{
    size_t n = law->n_constant;
    if (law->kind == AN_LAW_NONE)
        return;
    an_xml_start(writer, "law");
    an_xml_put(writer, "kind", an_law_kind_name(law->kind));
    an_xml_put(writer, "log_base", "10");
    put_temperature(writer, "reference_temperature", law->reference_temperature_K);
    for (size_t i = 0; i < n; i++) {
        double variance = law->covariance[i * n + i];
        an_xml_start(writer, "constant");
        an_xml_put(writer, "name", an_law_constant_name(law->kind, i));
        an_xml_put_double(writer, "value", law->constant[i]);
        an_xml_put(writer, "unit", an_law_constant_unit(law->kind, i));
        if (variance > 0)
            an_xml_put_double(writer, "u", sqrt(variance));
        an_xml_end(writer);
    }
    an_xml_start(writer, "covariance");
    an_numbers_write(writer, law->covariance, n * n);
    an_xml_end(writer);
    put_temperature(writer, "valid_from", law->valid_from_K);
    put_temperature(writer, "valid_to", law->valid_to_K);
    an_xml_end(writer);
}

/* The constant i by its name among the node's constants. */
static an_status read_constant(const an_xml_node *node, an_law *law, size_t i, an_error *err)
{
    const char *wanted = an_law_constant_name(law->kind, i);
    for (const an_xml_node *c = an_xml_child(node, "constant"); c; c = an_xml_next(c, "constant")) {
        const char *name;
        an_measure measure;
        AN_TRY(an_xml_text(c, "name", &name, err));
        if (strcmp(name, wanted) != 0)
            continue;
        AN_TRY(an_xml_measure_here(c, an_law_constant_unit(law->kind, i), &measure, err));
        law->constant[i] = measure.value;
        if (measure.u > 0)
            law->covariance[i * law->n_constant + i] = measure.u * measure.u;
        return AN_OK;
    }
    return an_xml_fail(node, err, AN_E_DOCUMENT, "constant '%s' of the %s law is missing", wanted,
                       an_law_kind_name(law->kind));
}

static an_status read_range(const an_xml_node *node, an_law *law, an_error *err)
{
    an_measure from, to;
    AN_TRY(an_xml_measure_optional(node, "valid_from", "K", &from, err));
    AN_TRY(an_xml_measure_optional(node, "valid_to", "K", &to, err));
    law->valid_from_K = isnan(from.value) ? 0 : from.value;
    law->valid_to_K = isnan(to.value) ? INFINITY : to.value;
    return AN_OK;
}

static an_status read_kind(const an_xml_node *node, an_law *law, an_error *err)
{
    const char *word, *base;
    an_measure reference;
    an_law_kind kind;
    AN_TRY(an_xml_text(node, "kind", &word, err));
    if (!an_law_kind_from_name(word, &kind) || kind == AN_LAW_NONE)
        return an_xml_fail(node, err, AN_E_VALUE,
                           "kind '%.40s'; allowed are wlf, arrhenius, vft, crossover, polynomial", word);
    AN_TRY(an_xml_text(node, "log_base", &base, err));
    if (strcmp(base, "10") != 0)
        return an_xml_fail(node, err, AN_E_VALUE, "log_base '%.10s'; constants of log10 a_T are allowed",
                           base);
    AN_TRY(an_xml_measure(node, "reference_temperature", "K", &reference, err));
    an_law_init(law, kind, reference.value, an_xml_count_children(node, "constant"));
    if (an_xml_count_children(node, "constant") != law->n_constant)
        return an_xml_fail(node, err, AN_E_VALUE, "%zu constants; the %s law has %s",
                           an_xml_count_children(node, "constant"), word,
                           kind == AN_LAW_POLYNOMIAL ? "at most 6" : "its own number");
    return AN_OK;
}

an_status an_law_read(const an_xml_node *node, an_law *law, an_error *err)
{
    an_error inner = {0};
    *law = (an_law){0};
    if (!node)
        return AN_OK;
    AN_TRY(read_kind(node, law, err));
    for (size_t i = 0; i < law->n_constant; i++)
        AN_TRY(read_constant(node, law, i, err));
    const an_xml_node *covariance = an_xml_child(node, "covariance");
    if (covariance)
        AN_TRY(an_numbers_read(covariance, law->covariance, law->n_constant * law->n_constant, err));
    AN_TRY(read_range(node, law, err));
    if (an_law_check(law, &inner) < 0)
        return an_xml_fail(node, err, inner.status, "%s", inner.text);
    return AN_OK;
}

/* An uncertainty without bound is written like one that is not known: it is left out. */
static double known(double u)
{
    return isfinite(u) ? u : NAN;
}

static void write_mode(an_xml_writer *writer, const an_maxwell *model, const an_mode_marks *marks, size_t i)
{
    double u = marks && marks->u_modulus_Pa ? marks->u_modulus_Pa[i] : NAN;
    double weight = model->modulus_Pa[i] / an_maxwell_instantaneous(model);
    an_xml_start(writer, "mode");
    if (marks && marks->trusted)
        an_xml_put(writer, "trusted", marks->trusted[i] ? "true" : "false");
    an_xml_put_measure(writer, "relaxation_time", (an_measure){model->time_s[i], NAN}, "s");
    an_xml_put_measure(writer, "modulus", (an_measure){model->modulus_Pa[i], known(u)}, "Pa");
    an_xml_put_measure(writer, "relative_weight", (an_measure){weight, NAN}, "1");
    an_xml_end(writer);
}

void an_maxwell_write(an_xml_writer *writer, const an_maxwell *model, const an_mode_marks *marks,
                      double u_long_term_Pa)
{
    an_measure instantaneous = {an_maxwell_instantaneous(model), NAN};
    an_measure long_term = {model->equilibrium_Pa, known(u_long_term_Pa)};
    an_xml_put_measure(writer, "instantaneous_modulus", instantaneous, "Pa");
    an_xml_put_measure(writer, "long_term_modulus", long_term, "Pa");
    for (size_t i = 0; i < model->n_mode; i++)
        write_mode(writer, model, marks, i);
}

static an_status read_mode(const an_xml_node *node, double instantaneous_Pa, double *time_s,
                           double *modulus_Pa, an_error *err)
{
    an_measure time, modulus, weight;
    AN_TRY(an_xml_measure(node, "relaxation_time", "s", &time, err));
    AN_TRY(an_xml_measure_optional(node, "modulus", "Pa", &modulus, err));
    AN_TRY(an_xml_measure_optional(node, "relative_weight", "1", &weight, err));
    double weighted = weight.value * instantaneous_Pa;
    if (isnan(modulus.value) && isnan(weight.value))
        return an_xml_fail(node, err, AN_E_DOCUMENT, "neither modulus nor relative_weight is given");
    if (fabs(modulus.value - weighted) > 1e-6 * instantaneous_Pa)
        return an_xml_fail(node, err, AN_E_VALUE,
                           "modulus %g Pa is not relative_weight %g times the instantaneous modulus %g Pa",
                           modulus.value, weight.value, instantaneous_Pa);
    *time_s = time.value;
    *modulus_Pa = isnan(modulus.value) ? weighted : modulus.value;
    return AN_OK;
}

an_status an_maxwell_read(const an_xml_node *node, an_maxwell *model, double *instantaneous_Pa, an_error *err)
{
    an_measure instantaneous, long_term;
    size_t i = 0;
    AN_TRY(an_xml_measure(node, "instantaneous_modulus", "Pa", &instantaneous, err));
    AN_TRY(an_xml_measure(node, "long_term_modulus", "Pa", &long_term, err));
    AN_TRY(an_maxwell_alloc(model, an_xml_count_children(node, "mode"), err));
    for (const an_xml_node *mode = an_xml_child(node, "mode"); mode; mode = an_xml_next(mode, "mode"), i++)
        AN_TRY(read_mode(mode, instantaneous.value, &model->time_s[i], &model->modulus_Pa[i], err));
    model->equilibrium_Pa = long_term.value;
    *instantaneous_Pa = instantaneous.value;
    return AN_OK;
}
