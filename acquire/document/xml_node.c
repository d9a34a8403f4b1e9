/* Finding things in the tree of a document that was read, with messages that say where, what was got and what
 * is allowed. */
#include "anelast/number.h"
#include "anelast/xml.h"

#include <inttypes.h>
#include <math.h>
#include <stdarg.h>
#include <string.h>

const an_xml_node *an_xml_child(const an_xml_node *node, const char *name)
{
    const an_xml_node *child = node ? node->child : NULL;
    return !child || !name || strcmp(child->name, name) == 0 ? child : an_xml_next(child, name);
}

const an_xml_node *an_xml_next(const an_xml_node *node, const char *name)
{
    const an_xml_node *next = node ? node->next : NULL;
    while (next && name && strcmp(next->name, name) != 0)
        next = next->next;
    return next;
}

size_t an_xml_count_children(const an_xml_node *node, const char *name)
{
    size_t n = 0;
    for (const an_xml_node *child = an_xml_child(node, name); child; child = an_xml_next(child, name))
        n++;
    return n;
}

an_status an_xml_fail(const an_xml_node *node, an_error *err, an_status status, const char *format, ...)
{
    char place[512], text[900];
    va_list args;
    va_start(args, format);
    vsnprintf(text, sizeof text, format, args);
    va_end(args);
    snprintf(place, sizeof place, "%.480s:%d", node->file ? node->file : "document", node->line);
    return an_fail(err, status, place, "%s: %s", node->name, text);
}

an_status an_xml_need(const an_xml_node *node, const char *name, const an_xml_node **child, an_error *err)
{
    *child = an_xml_child(node, name);
    if (*child)
        return AN_OK;
    return an_xml_fail(node, err, AN_E_DOCUMENT, "element '%s' is missing in it", name);
}

const char *an_xml_attribute_of(const an_xml_node *node, const char *name)
{
    for (size_t i = 0; i < node->n_attributes; i++)
        if (strcmp(node->attributes[i].name, name) == 0)
            return node->attributes[i].value;
    return NULL;
}

an_status an_xml_text(const an_xml_node *node, const char *name, const char **text, an_error *err)
{
    *text = an_xml_attribute_of(node, name);
    if (*text)
        return AN_OK;
    return an_xml_fail(node, err, AN_E_DOCUMENT, "attribute '%s' is missing", name);
}

/* A number in an attribute whose text is at hand. */
static an_status read_double(const an_xml_node *node, const char *name, const char *text, double *value,
                             an_error *err)
{
    if (an_number_parse(text, strlen(text), '.', value))
        return AN_OK;
    return an_xml_fail(node, err, AN_E_VALUE,
                       "attribute '%s' is '%.80s'; allowed is a number with a decimal point", name, text);
}

an_status an_xml_double(const an_xml_node *node, const char *name, double *value, an_error *err)
{
    const char *text;
    AN_TRY(an_xml_text(node, name, &text, err));
    return read_double(node, name, text, value, err);
}

an_status an_xml_double_or(const an_xml_node *node, const char *name, double fallback, double *value,
                           an_error *err)
{
    const char *text = an_xml_attribute_of(node, name);
    if (text)
        return read_double(node, name, text, value, err);
    *value = fallback;
    return AN_OK;
}

an_status an_xml_integer(const an_xml_node *node, const char *name, int64_t least, int64_t most,
                         int64_t *value, an_error *err)
{
    const char *text;
    int64_t read = 0;
    AN_TRY(an_xml_text(node, name, &text, err));
    if (!an_number_integer(text, strlen(text), &read) || read < least || read > most)
        return an_xml_fail(node, err, AN_E_VALUE,
                           "attribute '%s' is '%.80s'; allowed is a whole number from %" PRId64
                           " to %" PRId64,
                           name, text, least, most);
    *value = read;
    return AN_OK;
}

an_status an_xml_word(const an_xml_node *node, const char *name, const char *const *words, int *i_word,
                      an_error *err)
{
    const char *text;
    char list[400] = "";
    size_t n = 0;
    AN_TRY(an_xml_text(node, name, &text, err));
    for (int i = 0; words[i]; i++) {
        if (strcmp(words[i], text) == 0) {
            *i_word = i;
            return AN_OK;
        }
        if (n + strlen(words[i]) + 3 < sizeof list)
            n += (size_t)snprintf(list + n, sizeof list - n, "%s%s", i ? ", " : "", words[i]);
    }
    return an_xml_fail(node, err, AN_E_VALUE, "attribute '%s' is '%.80s'; allowed are %s", name, text, list);
}

/* The conversion of the node's unit. */
static an_status read_unit(const an_xml_node *node, const char *unit, an_conversion *conversion,
                           an_error *err)
{
    an_error inner = {0};
    const char *got = an_xml_attribute_of(node, "unit");
    if (!got && strcmp(unit, "1") != 0)
        return an_xml_fail(node, err, AN_E_UNIT, "attribute 'unit' is missing; %s is expected", unit);
    an_status status = an_unit_convert(got ? got : "1", unit, conversion, &inner);
    return status < 0 ? an_xml_fail(node, err, status, "%s", inner.text) : AN_OK;
}

an_status an_xml_measure_here(const an_xml_node *node, const char *unit, an_measure *measure, an_error *err)
{
    double value, u;
    an_conversion conversion;
    AN_TRY(an_xml_double(node, "value", &value, err));
    AN_TRY(an_xml_double_or(node, "u", NAN, &u, err));
    AN_TRY(read_unit(node, unit, &conversion, err));
    if (u < 0)
        return an_xml_fail(node, err, AN_E_VALUE,
                           "attribute 'u' is '%s'; a standard uncertainty is not negative",
                           an_xml_attribute_of(node, "u"));
    measure->value = an_unit_si(&conversion, value);
    measure->u = an_unit_si_difference(&conversion, u);
    return AN_OK;
}

an_status an_xml_measure(const an_xml_node *node, const char *name, const char *unit, an_measure *measure,
                         an_error *err)
{
    const an_xml_node *child;
    AN_TRY(an_xml_need(node, name, &child, err));
    return an_xml_measure_here(child, unit, measure, err);
}

an_status an_xml_measure_optional(const an_xml_node *node, const char *name, const char *unit,
                                  an_measure *measure, an_error *err)
{
    const an_xml_node *child = an_xml_child(node, name);
    *measure = AN_MEASURE_NONE;
    return child ? an_xml_measure_here(child, unit, measure, err) : AN_OK;
}
