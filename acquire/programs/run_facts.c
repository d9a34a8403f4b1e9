/* run_facts.c: a run document skimmed: its head, and the kinds of its bursts.
 */
#include "acquire/programs/run_facts.h"

#include "anelast/xml.h"

#include <stdio.h>
#include <string.h>

static void append(char *text, size_t n_text, const char *one, const char *two)
{
    size_t n = strlen(text);
    snprintf(text + n, n_text - n, "%s%s%s%s", one, *one ? " " : "", two, "\n");
}

/* A dump may have come in several files: "dump", "dump-text", "sidecar". */
static int is_dump(const char *role)
{
    return strncmp(role, "dump", 4) == 0 || strcmp(role, "sidecar") == 0;
}

static void read_inputs(const an_xml_node *root, an_run_facts *facts)
{
    const an_xml_node *made = an_xml_child(root, "made");
    for (const an_xml_node *input = an_xml_child(made, "input"); input; input = an_xml_next(input, "input")) {
        const char *role = an_xml_attribute_of(input, "role"), *sha256 = an_xml_attribute_of(input, "sha256");
        if (!role || !sha256)
            continue;
        if (is_dump(role))
            append(facts->dumps, sizeof facts->dumps, "", sha256);
        else
            append(facts->others, sizeof facts->others, role, sha256);
    }
}

static void read_about(const an_xml_node *root, an_run_facts *facts)
{
    static const struct {
        const char *attribute, *before;
    } parts[] = {{"id", "specimen "}, {"material", ""}, {"lot", "lot "}, {"rig", ""}};
    const an_xml_node *specimen = an_xml_child(root, "specimen");
    for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) {
        const char *text = specimen ? an_xml_attribute_of(specimen, parts[i].attribute) : NULL;
        size_t n = strlen(facts->about);
        if (text && *text)
            snprintf(facts->about + n, sizeof facts->about - n, "%s%s%s", n ? ", " : "", parts[i].before,
                     text);
    }
}

static an_status count(void *context, const an_xml_document *document, const an_xml_node *node, an_error *err)
{
    an_run_facts *facts = context;
    const char *kind = an_xml_attribute_of(node, "kind");
    (void)document;
    (void)err;
    if (!kind || strcmp(kind, "oscillation") == 0)
        facts->n_oscillation++;
    else
        facts->n_other++;
    return AN_OK;
}

an_status an_run_facts_read(const char *path, an_run_facts *facts, an_error *err)
{
    static const char *const streamed[] = {"burst", NULL};
    an_xml_document document = {0};
    an_xml_reading reading = {.root = "run", .streamed = streamed, .visit = count, .context = facts};
    memset(facts, 0, sizeof *facts);
    an_status status = an_xml_read(path, &reading, &document, err);
    if (status >= 0) {
        const char *id = an_xml_attribute_of(document.root, "id");
        snprintf(facts->id, sizeof facts->id, "%s", id ? id : "");
        read_inputs(document.root, facts);
        read_about(document.root, facts);
    }
    an_xml_document_clear(&document);
    return status;
}
