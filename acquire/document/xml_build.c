/* The tree that a reading builds: nodes with their attributes and text, and the children of the root that are
 * handed over as soon as they are complete.
 */
#include "xml_reader.h"

#include <libxml/SAX2.h>
#include <stdlib.h>
#include <string.h>

/* Bytes that may be held at one time, in texts and attributes; and in one attribute. */
enum { HELD_MOST = 1 << 30, ATTRIBUTE_BYTES_MOST = 1 << 16 };

void an_reader_drop(an_reader *r, an_xml_node *node)
{
    for (an_xml_node *child = node->child; child;) {
        an_xml_node *next = child->next;
        an_reader_drop(r, child);
        child = next;
    }
    for (size_t i = 0; i < node->n_attributes; i++) {
        if (r)
            r->n_held -= strlen(node->attributes[i].value);
        free(node->attributes[i].name);
        free(node->attributes[i].value);
    }
    if (r) {
        r->n_held -= node->n_text;
        r->n_nodes--;
    }
    free(node->attributes);
    free(node->name);
    free(node->text);
    free(node);
}

void an_reader_deliver(an_reader *r)
{
    an_xml_node *node = r->pending;
    r->pending = NULL;
    if (!node)
        return;
    if (r->status == AN_OK && r->reading->visit) {
        an_status status = r->reading->visit(r->reading->context, r->document, node, r->err);
        if (status < 0) {
            r->status = status;
            xmlStopParser(r->parser);
        }
    }
    an_reader_drop(r, node);
}

static bool is_streamed(const an_reader *r, const char *name)
{
    for (const char *const *s = r->reading->streamed; s && *s; s++)
        if (strcmp(*s, name) == 0)
            return true;
    return false;
}

/* An attribute's value [n]: libxml2 hands every ampersand over as "&#38;", and only those. */
static char *copy_value(const xmlChar *raw, size_t n)
{
    static const char ampersand[] = "&#38;";
    char *value = strndup((const char *)raw, n), *to = value;
    for (const char *from = value; from && *from;) {
        bool escaped = strncmp(from, ampersand, sizeof ampersand - 1) == 0;
        *to++ = *from;
        from += escaped ? sizeof ampersand - 1 : 1;
    }
    if (to)
        *to = '\0';
    return value;
}

/* The attributes as libxml2 hands them over: five pointers each (name, prefix, namespace, value, end of
 * value). */
static bool take_attributes(an_reader *r, an_xml_node *node, int n, const xmlChar **raw)
{
    if (n > AN_XML_ATTRIBUTES_MOST) {
        an_reader_refuse(r, AN_E_LIMIT, "%s: %d attributes; allowed are %d", node->name, n,
                         AN_XML_ATTRIBUTES_MOST);
        return false;
    }
    node->attributes = calloc((size_t)n + 1, sizeof *node->attributes);
    if (!node->attributes) {
        an_reader_refuse_memory(r);
        return false;
    }
    for (int i = 0; i < n; i++, raw += 5) {
        if (raw[2])
            continue;
        size_t n_value = (size_t)(raw[4] - raw[3]);
        if (n_value > ATTRIBUTE_BYTES_MOST) {
            an_reader_refuse(r, AN_E_LIMIT, "%s: attribute '%s' holds %zu bytes; allowed are %d", node->name,
                             raw[0], n_value, ATTRIBUTE_BYTES_MOST);
            return false;
        }
        an_xml_attribute *attribute = &node->attributes[node->n_attributes++];
        attribute->name = strdup((const char *)raw[0]);
        attribute->value = copy_value(raw[3], n_value);
        if (!attribute->name || !attribute->value) {
            node->n_attributes -= !attribute->value;
            if (!attribute->value)
                free(attribute->name);
            an_reader_refuse_memory(r);
            return false;
        }
        r->n_held += strlen(attribute->value);
    }
    return true;
}

/* A new node below the open one. */
static an_xml_node *add_node(an_reader *r, const char *name)
{
    an_xml_node *node = calloc(1, sizeof *node);
    if (node)
        node->name = strdup(name);
    if (!node || !node->name) {
        free(node);
        an_reader_refuse_memory(r);
        return NULL;
    }
    r->n_nodes++;
    node->line = xmlSAX2GetLineNumber(r->parser);
    node->file = r->document->file;
    node->parent = r->open;
    if (!r->open) {
        r->document->root = node;
        return node;
    }
    if (r->open->last)
        r->open->last->next = node;
    else
        r->open->child = node;
    r->open->last = node;
    return node;
}

void an_reader_open(an_reader *r, const char *name, int n_attributes, const xmlChar **attributes)
{
    if (r->depth == AN_XML_DEPTH_MOST) {
        an_reader_refuse(r, AN_E_LIMIT, "%s: elements nest %d deep; allowed are %d", name, r->depth + 1,
                         AN_XML_DEPTH_MOST);
        return;
    }
    if (r->n_nodes >= AN_XML_NODES_MOST || r->n_held > HELD_MOST) {
        an_reader_refuse(r, AN_E_LIMIT, "%s: %zu elements with %zu bytes at one time; allowed are %d and %d",
                         name, r->n_nodes, r->n_held, AN_XML_NODES_MOST, HELD_MOST);
        return;
    }
    an_xml_node *node = add_node(r, name);
    if (!node)
        return;
    r->open = node;
    r->depth++;
    r->n_text = 0;
    take_attributes(r, node, n_attributes, attributes);
}

/* Give a finished element its text. */
static bool take_text(an_reader *r, an_xml_node *node)
{
    size_t n = node->child ? 0 : r->n_text;
    node->text = malloc(n + 1);
    if (!node->text) {
        an_reader_refuse_memory(r);
        return false;
    }
    if (n)
        memcpy(node->text, r->text, n);
    node->text[n] = '\0';
    node->n_text = n;
    r->n_held += n;
    return true;
}

/* Take a finished child of the root out of the tree. */
static void unlink_last(an_xml_node *root)
{
    an_xml_node *last = root->last, *before = NULL;
    for (an_xml_node *child = root->child; child != last; child = child->next)
        before = child;
    if (before)
        before->next = NULL;
    else
        root->child = NULL;
    root->last = before;
}

void an_reader_close(an_reader *r)
{
    an_xml_node *node = r->open;
    if (!take_text(r, node))
        return;
    r->n_text = 0;
    r->open = node->parent;
    r->depth--;
    if (r->depth == 1 && is_streamed(r, node->name)) {
        unlink_last(r->open);
        r->pending = node;
    }
}

void an_reader_text(an_reader *r, const char *text, size_t n)
{
    if (r->n_text + n > AN_XML_TEXT_MOST) {
        an_reader_refuse(r, AN_E_LIMIT, "%s: text of more than %d bytes", r->open->name, AN_XML_TEXT_MOST);
        return;
    }
    if (r->n_text + n > r->room_text) {
        size_t room = 2 * (r->n_text + n) + 256;
        char *grown = realloc(r->text, room);
        if (!grown) {
            an_reader_refuse_memory(r);
            return;
        }
        r->text = grown;
        r->room_text = room;
    }
    memcpy(r->text + r->n_text, text, n);
    r->n_text += n;
}

void an_xml_document_clear(an_xml_document *document)
{
    if (document->root)
        an_reader_drop(NULL, document->root);
    free(document->file);
    *document = (an_xml_document){0};
}
