/* Reading documents: a SAX2 pull parse by libxml2 with the schema of the root plugged in while the root's
 * start tag is being handled. Safe settings: NONET alone, so neither entities are expanded into the tree nor
 * is the guard against expansion off; a DOCTYPE ends the reading at once.
 */
#include "anelast/number.h"
#include "anelast/xml.h"
#include "xml_reader.h"

#include <errno.h>
#include <libxml/SAX2.h>
#include <libxml/parserInternals.h>
#include <stdlib.h>
#include <string.h>

void an_reader_refuse(an_reader *r, an_status status, const char *format, ...)
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

void an_reader_refuse_memory(an_reader *r)
{
    if (r->status == AN_OK)
        r->status = an_fail_memory(r->err, "a document");
    xmlStopParser(r->parser);
}

void an_reader_tidy(const char *message, char *text, size_t n_text)
{
    size_t n = 0;
    for (const char *s = message; *s && *s != '\n' && n + 1 < n_text; s++) {
        if (strncmp(s, "[facet '", 8) == 0 && strstr(s, "'] ")) /* the library's word for the kind of rule */
            s = strstr(s, "'] ") + 2;
        else if (strncmp(s, "{" AN_XML_NAMESPACE "}", strlen(AN_XML_NAMESPACE) + 2) == 0)
            s += strlen(AN_XML_NAMESPACE) + 1;
        else
            text[n++] = *s;
    }
    while (n && (text[n - 1] == '.' || text[n - 1] == ' '))
        n--;
    text[n] = '\0';
}

#define NAMESPACE_STEM "urn:x-anelast:documents:"

/* Check namespace, name and version of the root; plug the schema in where it is of our minor version. */
static bool check_root(an_reader *r, const char *name, const char *uri)
{
    const char *wanted = r->reading->root;
    if (!uri || strcmp(uri, AN_XML_NAMESPACE) != 0) {
        bool other = uri && strncmp(uri, NAMESPACE_STEM, strlen(NAMESPACE_STEM)) == 0;
        an_reader_refuse(
            r, AN_E_DOCUMENT,
            other ? "%s: namespace '%s' is another major version of the documents; this program reads %s"
                  : "%s: namespace '%s' is not that of a document known here; allowed is %s",
            name, uri ? uri : "", AN_XML_NAMESPACE);
        return false;
    }
    if (wanted && strcmp(wanted, name) != 0) {
        an_reader_refuse(r, AN_E_DOCUMENT, "the document is of the kind '%s'; wanted is '%s'", name, wanted);
        return false;
    }
    return true;
}

/* Read "major.minor" from the root's attributes. */
static bool check_version(an_reader *r, const char *name, int n_attributes, const xmlChar **attributes)
{
    const xmlChar **raw = attributes;
    while (n_attributes && (raw[2] || strcmp((const char *)raw[0], "version") != 0)) {
        n_attributes--;
        raw += 5;
    }
    if (!n_attributes) {
        an_reader_refuse(r, AN_E_DOCUMENT, "%s: attribute 'version' is missing; allowed is %s", name,
                         AN_XML_VERSION);
        return false;
    }
    const char *text = (const char *)raw[3];
    size_t n = (size_t)(raw[4] - raw[3]);
    int64_t minor = 0;
    if (n < 3 || memcmp(text, "1.", 2) != 0 || !an_number_integer(text + 2, n - 2, &minor) ||
        text[2] == '-' || text[2] == '+') {
        an_reader_refuse(r, AN_E_DOCUMENT, "%s: attribute 'version' is '%.*s'; this program reads 1.x", name,
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
    an_reader *r = context;
    if (r->status < 0)
        return;
    if (!r->begun) {
        r->begun = true;
        if (!check_root(r, (const char *)name, (const char *)uri) ||
            !check_version(r, (const char *)name, n_attributes, attributes))
            return;
        if (!r->document->newer) {
            if (!an_reader_plug(r, (const char *)name))
                return;
            /* The schema missed this event: hand it round once more, this time through the plug. */
            r->parser->sax->startElementNs(r->parser->userData, name, prefix, uri, n_namespaces, namespaces,
                                           n_attributes, n_defaulted, attributes);
            return;
        }
    }
    r->n_started++;
    if (r->depth == 1 && !r->foreign)
        an_reader_deliver(r);
    if (r->status < 0)
        return;
    if (r->foreign || !uri || strcmp((const char *)uri, AN_XML_NAMESPACE) != 0)
        r->foreign++;
    else
        an_reader_open(r, (const char *)name, n_attributes, attributes);
}

static void on_end(void *context, const xmlChar *name, const xmlChar *prefix, const xmlChar *uri)
{
    an_reader *r = context;
    (void)name, (void)prefix, (void)uri;
    if (r->status < 0)
        return;
    r->n_started--;
    if (r->foreign) {
        r->foreign--;
        return;
    }
    if (r->depth == 1)
        an_reader_deliver(r);
    if (r->status == AN_OK)
        an_reader_close(r);
}

static void on_text(void *context, const xmlChar *text, int n)
{
    an_reader *r = context;
    if (r->status == AN_OK && !r->foreign && r->open && !r->open->child)
        an_reader_text(r, (const char *)text, (size_t)n);
}

static void on_doctype(void *context, const xmlChar *name, const xmlChar *public_id, const xmlChar *system_id)
{
    (void)name, (void)public_id, (void)system_id;
    an_reader_refuse(context, AN_E_DOCUMENT, "a DOCTYPE stands in it; documents have none");
}

/* ---- the parse ---- */

static int on_read(void *context, char *buffer, int n)
{
    an_reader *r = context;
    size_t got = fread(buffer, 1, (size_t)n, r->stream);
    if (got == 0 && ferror(r->stream)) {
        r->read_error = errno ? errno : EIO;
        return -1;
    }
    if (an_sha256_add(r->hash, buffer, got) < 0)
        return -1;
    r->n_byte += got;
    return (int)got;
}

static xmlParserCtxt *new_parser(an_reader *r)
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
static void check_parse(an_reader *r)
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
    if (error && error->code == XML_ERR_DOCUMENT_EMPTY && r->n_byte == 0) {
        r->status = an_fail(r->err, AN_E_DOCUMENT, r->document->file,
                            r->stream == stdin ? "empty: the program before it in the pipe made no document"
                                               : "empty: no document");
        return;
    }
    char place[512], text[600] = "it is not complete";
    if (error && error->message)
        an_reader_tidy(error->message, text, sizeof text);
    snprintf(place, sizeof place, "%.480s:%d", r->document->file, error && error->line ? error->line : 1);
    bool no_memory = error && error->code == XML_ERR_NO_MEMORY;
    r->status =
        an_fail(r->err, no_memory ? AN_E_MEMORY : AN_E_DOCUMENT, place, "not well-formed XML: %s", text);
}

static void parse(an_reader *r)
{
    r->parser = new_parser(r);
    if (!r->parser) {
        r->status = an_fail_memory(r->err, "an XML parser");
        return;
    }
    xmlParseDocument(r->parser);
    check_parse(r);
    an_reader_unplug(r);
    xmlFreeParserCtxt(r->parser);
}

an_status an_xml_read_stream(FILE *stream, const char *name, const an_xml_reading *reading,
                             an_xml_document *document, an_error *err)
{
    an_error ignored = {0};
    an_reader r = {.stream = stream, .reading = reading, .document = document, .err = err ? err : &ignored};
    *document = (an_xml_document){.file = strdup(name)};
    r.hash = an_sha256_new();
    if (!document->file || !r.hash) {
        r.status = an_fail_memory(err, "a document");
    } else {
        xmlInitParser();
        parse(&r);
    }
    if (r.pending)
        an_reader_drop(&r, r.pending);
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
