/* The record of how a document was made. */
#include "anelast/provenance.h"

#include "anelast/number.h"

#include <errno.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

/* Room for one more row in an array. Returns false without memory. */
static bool grow(void *rows, size_t n, size_t size)
{
    void *grown = realloc(*(void **)rows, (n + 1) * size);
    if (!grown)
        return false;
    *(void **)rows = grown;
    memset((char *)grown + n * size, 0, size);
    return true;
}

/* The time that the document says it was made at. */
static an_status now(time_t *seconds, an_error *err)
{
    const char *text = getenv("SOURCE_DATE_EPOCH");
    int64_t fixed = 0;
    if (!text || !*text) {
        *seconds = time(NULL);
        return AN_OK;
    }
    /* Until the end of the year 9999, the last that xs:dateTime writes in four digits. */
    if (!an_number_integer(text, strlen(text), &fixed) || fixed < 0 || fixed > INT64_C(253402300799))
        return an_fail(err, AN_E_VALUE, "SOURCE_DATE_EPOCH", "'%.40s' is not a number of seconds since 1970",
                       text);
    *seconds = (time_t)fixed;
    return AN_OK;
}

an_status an_made_init(an_made *made, const char *by, an_error *err)
{
    time_t seconds;
    struct tm utc;
    char at[40];
    *made = (an_made){0};
    AN_TRY(now(&seconds, err));
    gmtime_r(&seconds, &utc);
    strftime(at, sizeof at, "%Y-%m-%dT%H:%M:%SZ", &utc);
    made->by = strdup(by);
    made->version = strdup(ANELAST_VERSION);
    made->at = strdup(at);
    if (made->by && made->version && made->at)
        return AN_OK;
    an_made_clear(made);
    return an_fail_memory(err, "a record of inputs");
}

void an_made_clear(an_made *made)
{
    for (size_t i = 0; i < made->n_inputs; i++) {
        free(made->inputs[i].role);
        free(made->inputs[i].path);
    }
    for (size_t i = 0; i < made->n_choices; i++) {
        free(made->choices[i].name);
        free(made->choices[i].value);
        free(made->choices[i].unit);
    }
    for (size_t i = 0; i < made->n_chain; i++) {
        free(made->chain[i].by);
        free(made->chain[i].version);
    }
    free(made->inputs);
    free(made->choices);
    free(made->chain);
    free(made->by);
    free(made->version);
    free(made->at);
    *made = (an_made){0};
}

/* The file name at the end of a path. */
static const char *file_name(const char *path)
{
    const char *slash = strrchr(path, '/');
    return slash ? slash + 1 : path;
}

an_status an_made_add_input(an_made *made, const char *role, const char *path, const char *sha256,
                            an_error *err)
{
    if (!grow(&made->inputs, made->n_inputs, sizeof *made->inputs))
        return an_fail_memory(err, "a record of inputs");
    an_made_input *input = &made->inputs[made->n_inputs++];
    bool stream = !path || strcmp(path, "-") == 0 || strcmp(path, "standard input") == 0;
    input->role = strdup(role);
    input->path = strdup(stream ? "-" : file_name(path));
    snprintf(input->sha256, sizeof input->sha256, "%s", sha256);
    return input->role && input->path ? AN_OK : an_fail_memory(err, "a record of inputs");
}

an_status an_made_add_choice(an_made *made, const char *name, const char *value, const char *unit,
                             an_error *err)
{
    if (!grow(&made->choices, made->n_choices, sizeof *made->choices))
        return an_fail_memory(err, "a record of choices");
    an_made_choice *choice = &made->choices[made->n_choices++];
    choice->name = strdup(name);
    choice->value = strdup(value);
    choice->unit = strdup(unit);
    return choice->name && choice->value && choice->unit ? AN_OK : an_fail_memory(err, "a record of choices");
}

an_status an_made_add_number(an_made *made, const char *name, double value, const char *unit, an_error *err)
{
    char text[AN_NUMBER_SIZE];
    an_number_print(value, text);
    return an_made_add_choice(made, name, text, unit, err);
}

an_status an_made_add_word(an_made *made, const char *name, const char *word, an_error *err)
{
    return an_made_add_choice(made, name, word, "", err);
}

/* Add a maker, unless its document stands in the chain already. */
static an_status add_maker(an_made *made, const char *by, const char *version, const char *sha256,
                           an_error *err)
{
    for (size_t i = 0; i < made->n_chain; i++)
        if (strcmp(made->chain[i].sha256, sha256) == 0)
            return AN_OK;
    if (!grow(&made->chain, made->n_chain, sizeof *made->chain))
        return an_fail_memory(err, "a chain of makers");
    an_made_maker *maker = &made->chain[made->n_chain++];
    maker->by = strdup(by);
    maker->version = strdup(version);
    snprintf(maker->sha256, sizeof maker->sha256, "%s", sha256);
    return maker->by && maker->version ? AN_OK : an_fail_memory(err, "a chain of makers");
}

an_status an_made_extend(an_made *made, const an_made *input, const char *sha256, an_error *err)
{
    for (size_t i = 0; i < input->n_chain; i++)
        AN_TRY(add_maker(made, input->chain[i].by, input->chain[i].version, input->chain[i].sha256, err));
    return add_maker(made, input->by, input->version, sha256, err);
}

static an_status read_inputs(const an_xml_node *node, an_made *made, an_error *err)
{
    for (const an_xml_node *n = an_xml_child(node, "input"); n; n = an_xml_next(n, "input")) {
        const char *role, *path, *sha256;
        AN_TRY(an_xml_text(n, "role", &role, err));
        AN_TRY(an_xml_text(n, "path", &path, err));
        AN_TRY(an_xml_text(n, "sha256", &sha256, err));
        AN_TRY(an_made_add_input(made, role, path, sha256, err));
    }
    return AN_OK;
}

static an_status read_choices(const an_xml_node *node, an_made *made, an_error *err)
{
    for (const an_xml_node *n = an_xml_child(node, "choice"); n; n = an_xml_next(n, "choice")) {
        const char *name, *value, *unit = an_xml_attribute_of(n, "unit");
        AN_TRY(an_xml_text(n, "name", &name, err));
        AN_TRY(an_xml_text(n, "value", &value, err));
        AN_TRY(an_made_add_choice(made, name, value, unit ? unit : "", err));
    }
    return AN_OK;
}

static an_status read_chain(const an_xml_node *node, an_made *made, an_error *err)
{
    const an_xml_node *chain = an_xml_child(node, "chain");
    for (const an_xml_node *n = an_xml_child(chain, "maker"); n; n = an_xml_next(n, "maker")) {
        const char *by, *version, *sha256;
        AN_TRY(an_xml_text(n, "by", &by, err));
        AN_TRY(an_xml_text(n, "version", &version, err));
        AN_TRY(an_xml_text(n, "sha256", &sha256, err));
        AN_TRY(add_maker(made, by, version, sha256, err));
    }
    return AN_OK;
}

static an_status read_made(const an_xml_node *node, an_made *made, an_error *err)
{
    const char *by, *version, *at;
    AN_TRY(an_xml_text(node, "by", &by, err));
    AN_TRY(an_xml_text(node, "version", &version, err));
    AN_TRY(an_xml_text(node, "at", &at, err));
    made->by = strdup(by);
    made->version = strdup(version);
    made->at = strdup(at);
    if (!made->by || !made->version || !made->at)
        return an_fail_memory(err, "a record of inputs");
    AN_TRY(read_inputs(node, made, err));
    AN_TRY(read_choices(node, made, err));
    return read_chain(node, made, err);
}

an_status an_made_read(const an_xml_node *root, an_made *made, an_error *err)
{
    const an_xml_node *node;
    *made = (an_made){0};
    AN_TRY(an_xml_need(root, "made", &node, err));
    an_status status = read_made(node, made, err);
    if (status < 0)
        an_made_clear(made);
    return status;
}

an_status an_made_stand_on(an_made *made, const char *role, const char *path, const an_made *input,
                           const char *sha256, an_error *err)
{
    AN_TRY(an_made_add_input(made, role, path, sha256, err));
    return an_made_extend(made, input, sha256, err);
}

static void write_chain(an_xml_writer *writer, const an_made *made)
{
    if (made->n_chain == 0)
        return;
    an_xml_start(writer, "chain");
    for (size_t i = 0; i < made->n_chain; i++) {
        an_xml_start(writer, "maker");
        an_xml_put(writer, "by", made->chain[i].by);
        an_xml_put(writer, "version", made->chain[i].version);
        an_xml_put(writer, "sha256", made->chain[i].sha256);
        an_xml_end(writer);
    }
    an_xml_end(writer);
}

void an_made_write(an_xml_writer *writer, const an_made *made)
{
    an_xml_start(writer, "made");
    an_xml_put(writer, "by", made->by);
    an_xml_put(writer, "version", made->version);
    an_xml_put(writer, "at", made->at);
    for (size_t i = 0; i < made->n_inputs; i++) {
        an_xml_start(writer, "input");
        an_xml_put(writer, "role", made->inputs[i].role);
        an_xml_put(writer, "path", made->inputs[i].path);
        an_xml_put(writer, "sha256", made->inputs[i].sha256);
        an_xml_end(writer);
    }
    for (size_t i = 0; i < made->n_choices; i++) {
        const char *unit = made->choices[i].unit;
        an_xml_start(writer, "choice");
        an_xml_put(writer, "name", made->choices[i].name);
        an_xml_put(writer, "value", made->choices[i].value);
        an_xml_put(writer, "unit", *unit ? unit : NULL);
        an_xml_end(writer);
    }
    write_chain(writer, made);
    an_xml_end(writer);
}
