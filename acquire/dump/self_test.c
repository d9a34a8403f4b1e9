/* The self-test of a layout: its excerpt is read by the same code as a dump. Numbers are compared to one part
 * in 10^9, which is far below any last digit that a dump prints, and above the rounding of units.
 */
#include "anelast/self_test.h"

#include "anelast/dump.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const double tolerance = 1e-9;

typedef struct test_state {
    const an_xml_node *test;
    an_self_test_result *result;
} test_state;

static an_status compare(const an_xml_node *node, double got, double expected, const char *unit,
                         an_error *err)
{
    if (fabs(got - expected) <= tolerance * fmax(fabs(expected), fabs(got)))
        return AN_OK;
    const char *shown = strcmp(unit, "1") == 0 ? "" : unit, *blank = shown[0] ? " " : "";
    return an_xml_fail(node, err, AN_E_VALUE, "got %.10g%s%s, expected %.10g%s%s", got, blank, shown,
                       expected, blank, shown);
}

/* A text or dimension of the specimen. */
static an_status check_field(const an_xml_node *node, const an_specimen *own, an_error *err)
{
    const char *name, *unit, *text = an_xml_attribute_of(node, "text");
    size_t size;
    an_specimen copy = *own;
    AN_TRY(an_xml_text(node, "field", &name, err));
    const an_measure *dimension = an_geometry_dimension(&copy.geometry, name, &unit);
    if (dimension) {
        an_measure expected;
        AN_TRY(an_xml_measure_here(node, unit, &expected, err));
        return compare(node, dimension->value, expected.value, unit, err);
    }
    const char *got = strcmp(name, "geometry") == 0 ? an_geometry_word(own->geometry.kind)
                                                    : an_specimen_label(&copy, name, &size);
    if (!got || !text)
        return an_xml_fail(node, err, AN_E_VALUE,
                           "field '%s' is none of a specimen, or has no text to compare", name);
    if (strcmp(got, text) == 0)
        return AN_OK;
    return an_xml_fail(node, err, AN_E_VALUE, "got '%s', expected '%s'", got, text);
}

static an_status test_head(const an_specimen *own, void *user, an_error *err)
{
    test_state *state = user;
    for (const an_xml_node *node = an_xml_child(state->test, "expect"); node;
         node = an_xml_next(node, "expect")) {
        if (!an_xml_attribute_of(node, "field"))
            continue;
        AN_TRY(check_field(node, own, err));
        state->result->n_expect++;
    }
    return AN_OK;
}

static an_status burst_value(const an_burst *burst, const char *role, size_t i, double *value, an_error *err)
{
    const an_signal *signal = strcmp(role, "displacement") == 0  ? &burst->displacement
                              : strcmp(role, "force") == 0       ? &burst->force
                              : strcmp(role, "temperature") == 0 ? &burst->temperature
                                                                 : NULL;
    size_t n = signal ? signal->count : (size_t)burst->clock.count;
    *value = strcmp(role, "set_frequency") == 0     ? burst->set_frequency_Hz
             : strcmp(role, "set_temperature") == 0 ? burst->set_temperature_K
             : strcmp(role, "step") == 0            ? burst->step
                                                    : NAN;
    if (!signal && strcmp(role, "time") != 0)
        return AN_OK;
    if (i >= n)
        return an_fail(err, AN_E_VALUE, NULL, "sample %zu of %s is not there: %zu samples", i + 1, role, n);
    double *values = malloc(n * sizeof *values);
    if (!values)
        return an_fail_memory(err, "a burst of the self-test");
    if (signal)
        an_signal_decode(signal, values);
    else
        an_burst_times(burst, values);
    *value = values[i];
    free(values);
    return AN_OK;
}

static an_status check_sample(const an_xml_node *node, const an_burst *burst, an_error *err)
{
    const char *role;
    int64_t sample = 1;
    double got;
    AN_TRY(an_xml_text(node, "role", &role, err));
    if (an_xml_attribute_of(node, "sample"))
        AN_TRY(an_xml_integer(node, "sample", 1, 1 << 30, &sample, err));
    const char *unit = strcmp(role, "step") == 0 ? "1" : NULL;
    for (int i = 0; !unit && i < AN_N_COLUMN_ROLES; i++)
        if (strcmp(an_role_name((an_role)i), role) == 0)
            unit = an_role_unit((an_role)i);
    an_measure expected;
    AN_TRY(an_xml_measure_here(node, unit ? unit : "1", &expected, err));
    AN_TRY(burst_value(burst, role, (size_t)(sample - 1), &got, err));
    return compare(node, got, expected.value, unit ? unit : "1", err);
}

static an_status test_burst(const an_burst *burst, void *user, an_error *err)
{
    test_state *state = user;
    state->result->n_burst++;
    for (const an_xml_node *node = an_xml_child(state->test, "expect"); node;
         node = an_xml_next(node, "expect")) {
        int64_t number;
        if (!an_xml_attribute_of(node, "burst"))
            continue;
        AN_TRY(an_xml_integer(node, "burst", 1, 1 << 30, &number, err));
        if (number != burst->n)
            continue;
        AN_TRY(check_sample(node, burst, err));
        state->result->n_expect++;
    }
    return AN_OK;
}

an_status an_self_test_run(const an_layout *layout, const char *path, an_self_test_result *result,
                           an_error *err)
{
    const an_xml_node *root = layout->document.root, *test = an_xml_child(root, "self_test"), *excerpt;
    int64_t bursts;
    if (!test)
        return an_xml_fail(root, err, AN_E_DOCUMENT, "the layout has no self_test to run");
    AN_TRY(an_xml_need(test, "excerpt", &excerpt, err));
    AN_TRY(an_xml_integer(test, "bursts", 1, 1 << 30, &bursts, err));
    const char *text = excerpt->text + (excerpt->text[0] == '\n'); /* the line end behind the opening tag */
    an_dump_source source = {.path = path, .excerpt = text, .layout = layout, .missing_most = 1};
    test_state state = {.test = test, .result = result};
    an_dump_visitor visitor = {test_head, test_burst, &state};
    an_remark_list remarks = {0};
    *result = (an_self_test_result){0, 0};
    an_status status = an_dump_read(&source, &visitor, &remarks, err);
    an_remark_list_clear(&remarks);
    AN_TRY(status);
    if (result->n_burst != bursts)
        return an_xml_fail(test, err, AN_E_VALUE, "%d bursts found in the excerpt, expected %lld",
                           result->n_burst, (long long)bursts);
    size_t n = an_xml_count_children(test, "expect");
    if ((size_t)result->n_expect != n)
        return an_xml_fail(test, err, AN_E_VALUE, "%zu expectations, of which %d have a burst or a field", n,
                           result->n_expect);
    return AN_OK;
}
