/* Reading documents: a SAX2 pull parse by libxml2 with the schema of the root plugged in while the root's
 * start tag is being handled. Safe settings: NONET alone, so neither entities are expanded into the tree nor
 * is the guard against expansion off; a DOCTYPE ends the reading at once.
 */
#include "anelast/number.h"
#include "anelast/xml.h"

#include <errno.h>
#include <libxml/SAX2.h>
#include <libxml/parser.h>
#include <libxml/parserInternals.h>
#include <libxml/xmlschemas.h>
#include <stdlib.h>
#include <string.h>

/* Bytes that may be held at one time, in texts and attributes; and in one attribute. */
enum { HELD_MOST = 1 << 30, ATTRIBUTE_BYTES_MOST = 1 << 16 };

#define NAMESPACE_STEM "urn:x-anelast:documents:"

/* A reading in progress. */
typedef struct reader {
    FILE *stream;
    an_sha256 *hash;
    int read_error; /* errno of the stream; 0: none */
    const an_xml_reading *reading;
    an_xml_document *document;
    xmlParserCtxt *parser;
    xmlSchema *schema;
    xmlSchemaValidCtxt *validation;
    xmlSchemaSAXPlugStruct *plug;
    bool begun;           /* the root's start tag was seen */
    int depth;            /* open elements of our namespace */
    int foreign;          /* open elements of another namespace, and all in them */
    an_xml_node *open;    /* the innermost open element */
    an_xml_node *pending; /* a streamed child, complete, whose schema check ends with the next event */
    char *text;           /* [n_text] of the innermost open element */
    size_t n_text, room_text;
    size_t n_nodes, n_held; /* held now */
    an_error *err;          /* the first refusal */
    an_status status;       /* and its status; AN_OK: none */
} reader;

static void free_node(reader *r, an_xml_node *node)
{
    for (an_xml_node *child = node->child; child;) {
        an_xml_node *next = child->next;
        free_node(r, child);
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

/* Refuse at the parser's place and stop. */
static void refuse(reader *r, an_status status, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

static void refuse(reader *r, an_status status, const char *format, ...)
{
    char place[512], text[1000];
    if (r->status < 0)
        return;
    va_list args;
    va_start(args, format);
    vsnprintf(text, sizeof text, format, args);
    va_end(args);
    snprintf(place, sizeof place, "%.480s:%d", r->document->file, xmlSAX2GetLineNumber(r->parser));
    r->status = an_fail(r->err, status, place, "%s", text);
    xmlStopParser(r->parser);
}

static void refuse_memory(reader *r)
{
    if (r->status == AN_OK)
        r->status = an_fail_memory(r->err, "a document");
    xmlStopParser(r->parser);
}

/* libxml2 says "{urn:...}length" and ends with a full stop and a newline; people say "length". */
static void tidy(const char *message, char *text, size_t n_text)
{
    size_t n = 0;
    for (const char *s = message; *s && *s != '\n' && n + 1 < n_text; s++) {
        if (strncmp(s, "{" AN_XML_NAMESPACE "}", strlen(AN_XML_NAMESPACE) + 2) == 0)
            s += strlen(AN_XML_NAMESPACE) + 1;
        else
            text[n++] = *s;
    }
    while (n && (text[n - 1] == '.' || text[n - 1] == ' '))
        n--;
    text[n] = '\0';
}

static void on_schema_error(void *context, xmlErrorPtr error)
{
    char text[800];
    tidy(error->message ? error->message : "", text, sizeof text);
    refuse(context, error->code == XML_ERR_NO_MEMORY ? AN_E_MEMORY : AN_E_DOCUMENT, "%s", text);
}

/* ---- the schema ---- */

/* Gather the first error of a schema that does not load. */
static void on_schema_load_error(void *context, xmlErrorPtr error)
{
    char *text = context;
    if (!*text)
        tidy(error->message ? error->message : "", text, 400);
}

static bool load_schema(reader *r, const char *root)
{
    char path[512], first[400] = "";
    an_error err = {0};
    an_status status = an_xml_schema_path(root, path, sizeof path, &err);
    if (status < 0) {
        refuse(r, status, "%s", err.text);
        return false;
    }
    /* A part that is missing is told to the thread's handler, which would print it. */
    xmlStructuredErrorFunc before = xmlStructuredError;
    void *before_context = xmlStructuredErrorContext;
    xmlSetStructuredErrorFunc(first, on_schema_load_error);
    xmlSchemaParserCtxt *context = xmlSchemaNewParserCtxt(path);
    if (context) {
        xmlSchemaSetParserStructuredErrors(context, on_schema_load_error, first);
        r->schema = xmlSchemaParse(context);
        xmlSchemaFreeParserCtxt(context);
    }
    xmlSetStructuredErrorFunc(before_context, before);
    if (!r->schema)
        refuse(r, AN_E_IO, "the schema %s does not load: %s", path, first);
    return r->schema != NULL;
}

/* Put the schema between the parser and this reader. */
static bool plug_schema(reader *r, const char *root)
{
    if (!load_schema(r, root))
        return false;
    r->validation = xmlSchemaNewValidCtxt(r->schema);
    if (!r->validation) {
        refuse_memory(r);
        return false;
    }
    xmlSchemaSetValidStructuredErrors(r->validation, on_schema_error, r);
    r->plug = xmlSchemaSAXPlug(r->validation, &r->parser->sax, &r->parser->userData);
    if (!r->plug)
        refuse_memory(r);
    return r->plug != NULL;
}

/* ---- elements ---- */

static void deliver(reader *r)
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
    free_node(r, node);
}

static bool is_streamed(const reader *r, const char *name)
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
static bool take_attributes(reader *r, an_xml_node *node, int n, const xmlChar **raw)
{
    if (n > AN_XML_ATTRIBUTES_MOST) {
        refuse(r, AN_E_LIMIT, "%s: %d attributes; allowed are %d", node->name, n, AN_XML_ATTRIBUTES_MOST);
        return false;
    }
    node->attributes = calloc((size_t)n + 1, sizeof *node->attributes);
    if (!node->attributes) {
        refuse_memory(r);
        return false;
    }
    for (int i = 0; i < n; i++, raw += 5) {
        if (raw[2])
            continue;
        size_t n_value = (size_t)(raw[4] - raw[3]);
        if (n_value > ATTRIBUTE_BYTES_MOST) {
            refuse(r, AN_E_LIMIT, "%s: attribute '%s' holds %zu bytes; allowed are %d", node->name, raw[0],
                   n_value, ATTRIBUTE_BYTES_MOST);
            return false;
        }
        an_xml_attribute *attribute = &node->attributes[node->n_attributes++];
        attribute->name = strdup((const char *)raw[0]);
        attribute->value = copy_value(raw[3], n_value);
        if (!attribute->name || !attribute->value) {
            node->n_attributes -= !attribute->value;
            if (!attribute->value)
                free(attribute->name);
            refuse_memory(r);
            return false;
        }
        r->n_held += strlen(attribute->value);
    }
    return true;
}

/* A new node below the open one. */
static an_xml_node *add_node(reader *r, const char *name)
{
    an_xml_node *node = calloc(1, sizeof *node);
    if (node)
        node->name = strdup(name);
    if (!node || !node->name) {
        free(node);
        refuse_memory(r);
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

static void open_element(reader *r, const char *name, int n_attributes, const xmlChar **attributes)
{
    if (r->depth == AN_XML_DEPTH_MOST) {
        refuse(r, AN_E_LIMIT, "%s: elements nest %d deep; allowed are %d", name, r->depth + 1,
               AN_XML_DEPTH_MOST);
        return;
    }
    if (r->n_nodes >= AN_XML_NODES_MOST || r->n_held > HELD_MOST) {
        refuse(r, AN_E_LIMIT, "%s: %zu elements with %zu bytes at one time; allowed are %d and %d", name,
               r->n_nodes, r->n_held, AN_XML_NODES_MOST, HELD_MOST);
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

/* Check namespace, name and version of the root; plug the schema in where it is of our minor version. */
static bool check_root(reader *r, const char *name, const char *uri)
{
    const char *wanted = r->reading->root;
    if (!uri || strcmp(uri, AN_XML_NAMESPACE) != 0) {
        bool other = uri && strncmp(uri, NAMESPACE_STEM, strlen(NAMESPACE_STEM)) == 0;
        refuse(r, AN_E_DOCUMENT,
               other ? "%s: namespace '%s' is another major version of the documents; this program reads %s"
                     : "%s: namespace '%s' is not that of a document known here; allowed is %s",
               name, uri ? uri : "", AN_XML_NAMESPACE);
        return false;
    }
    if (wanted && strcmp(wanted, name) != 0) {
        refuse(r, AN_E_DOCUMENT, "the document is a '%s'; wanted is a '%s'", name, wanted);
        return false;
    }
    return true;
}

/* Read "major.minor" from the root's attributes. */
static bool check_version(reader *r, const char *name, int n_attributes, const xmlChar **attributes)
{
    const xmlChar **raw = attributes;
    while (n_attributes && (raw[2] || strcmp((const char *)raw[0], "version") != 0)) {
        n_attributes--;
        raw += 5;
    }
    if (!n_attributes) {
        refuse(r, AN_E_DOCUMENT, "%s: attribute 'version' is missing; allowed is %s", name, AN_XML_VERSION);
        return false;
    }
    const char *text = (const char *)raw[3];
    size_t n = (size_t)(raw[4] - raw[3]);
    int64_t minor = 0;
    if (n < 3 || memcmp(text, "1.", 2) != 0 || !an_number_integer(text + 2, n - 2, &minor) ||
        text[2] == '-' || text[2] == '+') {
        refuse(r, AN_E_DOCUMENT, "%s: attribute 'version' is '%.*s'; this program reads 1.x", name,
               (int)(n > 40 ? 40 : n), text);
        return false;
    }
    r->document->newer = minor > 0;
    return true;
}

static void on_start(void *context, const xmlChar *name, const xmlChar *prefix, const xmlChar *uri,
                     int n_namespaces, const xmlChar **namespaces, int n_attributes, int n_defaulted,
                     const xmlChar **attributes)
{
    reader *r = context;
    if (r->status < 0)
        return;
    if (!r->begun) {
        r->begun = true;
        if (!check_root(r, (const char *)name, (const char *)uri) ||
            !check_version(r, (const char *)name, n_attributes, attributes))
            return;
        if (!r->document->newer) {
            if (!plug_schema(r, (const char *)name))
                return;
            /* The schema missed this event: hand it round once more, this time through the plug. */
            r->parser->sax->startElementNs(r->parser->userData, name, prefix, uri, n_namespaces, namespaces,
                                           n_attributes, n_defaulted, attributes);
            return;
        }
    }
    if (r->depth == 1 && !r->foreign)
        deliver(r);
    if (r->status < 0)
        return;
    if (r->foreign || !uri || strcmp((const char *)uri, AN_XML_NAMESPACE) != 0)
        r->foreign++;
    else
        open_element(r, (const char *)name, n_attributes, attributes);
}

/* Give a finished element its text. */
static bool take_text(reader *r, an_xml_node *node)
{
    size_t n = node->child ? 0 : r->n_text;
    node->text = malloc(n + 1);
    if (!node->text) {
        refuse_memory(r);
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

static void on_end(void *context, const xmlChar *name, const xmlChar *prefix, const xmlChar *uri)
{
    reader *r = context;
    (void)name, (void)prefix, (void)uri;
    if (r->status < 0)
        return;
    if (r->foreign) {
        r->foreign--;
        return;
    }
    an_xml_node *node = r->open;
    if (r->depth == 1)
        deliver(r);
    if (r->status < 0 || !take_text(r, node))
        return;
    r->n_text = 0;
    r->open = node->parent;
    r->depth--;
    if (r->depth == 1 && is_streamed(r, node->name)) {
        unlink_last(r->open);
        r->pending = node;
    }
}

static void on_text(void *context, const xmlChar *text, int n_raw)
{
    reader *r = context;
    size_t n = (size_t)n_raw;
    if (r->status < 0 || r->foreign || !r->open || r->open->child)
        return;
    if (r->n_text + n > AN_XML_TEXT_MOST) {
        refuse(r, AN_E_LIMIT, "%s: text of more than %d bytes", r->open->name, AN_XML_TEXT_MOST);
        return;
    }
    if (r->n_text + n > r->room_text) {
        size_t room = 2 * (r->n_text + n) + 256;
        char *grown = realloc(r->text, room);
        if (!grown) {
            refuse_memory(r);
            return;
        }
        r->text = grown;
        r->room_text = room;
    }
    memcpy(r->text + r->n_text, text, n);
    r->n_text += n;
}

static void on_doctype(void *context, const xmlChar *name, const xmlChar *public_id, const xmlChar *system_id)
{
    (void)name, (void)public_id, (void)system_id;
    refuse(context, AN_E_DOCUMENT, "a DOCTYPE stands in it; documents have none");
}

/* ---- the parse ---- */

static int on_read(void *context, char *buffer, int n)
{
    reader *r = context;
    size_t got = fread(buffer, 1, (size_t)n, r->stream);
    if (got == 0 && ferror(r->stream)) {
        r->read_error = errno ? errno : EIO;
        return -1;
    }
    if (an_sha256_add(r->hash, buffer, got) < 0)
        return -1;
    return (int)got;
}

static xmlParserCtxt *new_parser(reader *r)
{
    xmlSAXHandler sax = {.initialized = XML_SAX2_MAGIC,
                         .internalSubset = on_doctype,
                         .startElementNs = on_start,
                         .endElementNs = on_end,
                         .characters = on_text,
                         .ignorableWhitespace = on_text,
                         .cdataBlock = on_text};
    xmlParserCtxt *parser = xmlCreateIOParserCtxt(NULL, NULL, on_read, NULL, r, XML_CHAR_ENCODING_NONE);
    if (!parser)
        return NULL;
    /* Options first: they touch the handlers too. */
    xmlCtxtUseOptions(parser, XML_PARSE_NONET);
    /* No handler of errors: the plug would answer one with a notice of its own on standard error; what went
     * wrong is asked for at the end. */
    *parser->sax = sax;
    parser->userData = r;
    return parser;
}

/* What the parser itself found wrong, where nobody refused before. */
static void check_parse(reader *r)
{
    if (r->status < 0)
        return;
    if (r->read_error) {
        r->status =
            an_fail(r->err, AN_E_IO, r->document->file, "cannot be read: %s", strerror(r->read_error));
        return;
    }
    if (r->parser->wellFormed && r->document->root && !r->open)
        return;
    const xmlError *error = xmlCtxtGetLastError(r->parser);
    char place[512], text[600] = "it is not complete";
    if (error && error->message)
        tidy(error->message, text, sizeof text);
    snprintf(place, sizeof place, "%.480s:%d", r->document->file, error && error->line ? error->line : 1);
    bool no_memory = error && error->code == XML_ERR_NO_MEMORY;
    r->status =
        an_fail(r->err, no_memory ? AN_E_MEMORY : AN_E_DOCUMENT, place, "not well-formed XML: %s", text);
}

/* End what was open when the reading stopped: the validation keeps its tables of keys otherwise. */
static void unwind(reader *r)
{
    for (const an_xml_node *node = r->foreign ? NULL : r->open; node; node = node->parent)
        r->parser->sax->endElementNs(r->parser->userData, (const xmlChar *)node->name, NULL,
                                     (const xmlChar *)AN_XML_NAMESPACE);
}

/* Release the schema, from the plug down. */
static void unplug(reader *r)
{
    if (r->plug && r->status < 0)
        unwind(r);
    if (r->plug)
        xmlSchemaSAXUnplug(r->plug);
    if (r->validation)
        xmlSchemaFreeValidCtxt(r->validation);
    if (r->schema)
        xmlSchemaFree(r->schema);
}

static void parse(reader *r)
{
    r->parser = new_parser(r);
    if (!r->parser) {
        r->status = an_fail_memory(r->err, "an XML parser");
        return;
    }
    xmlParseDocument(r->parser);
    check_parse(r);
    unplug(r);
    xmlFreeParserCtxt(r->parser);
}

an_status an_xml_read_stream(FILE *stream, const char *name, const an_xml_reading *reading,
                             an_xml_document *document, an_error *err)
{
    an_error ignored;
    reader r = {.stream = stream, .reading = reading, .document = document, .err = err ? err : &ignored};
    *document = (an_xml_document){.file = strdup(name)};
    r.hash = an_sha256_new();
    if (!document->file || !r.hash) {
        r.status = an_fail_memory(err, "a document");
    } else {
        xmlInitParser();
        parse(&r);
    }
    if (r.pending)
        free_node(&r, r.pending);
    if (r.status == AN_OK && an_sha256_finish(r.hash, document->sha256) < 0)
        r.status = an_fail_memory(err, "a hash");
    an_sha256_free(&r.hash);
    free(r.text);
    return r.status;
}

an_status an_xml_read(const char *path, const an_xml_reading *reading, an_xml_document *document,
                      an_error *err)
{
    *document = (an_xml_document){0};
    if (!path || strcmp(path, "-") == 0)
        return an_xml_read_stream(stdin, "standard input", reading, document, err);
    FILE *stream = fopen(path, "rbe");
    if (!stream)
        return an_fail(err, AN_E_IO, path, "cannot be opened: %s", strerror(errno));
    an_status status = an_xml_read_stream(stream, path, reading, document, err);
    fclose(stream);
    return status;
}

void an_xml_document_clear(an_xml_document *document)
{
    if (document->root)
        free_node(NULL, document->root);
    free(document->file);
    *document = (an_xml_document){0};
}
