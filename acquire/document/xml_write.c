/* Writing documents: own escaping and indentation on a stream; errors stick until the end. */
#include "anelast/number.h"
#include "anelast/output.h"
#include "anelast/xml.h"

#include <errno.h>
#include <inttypes.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { NAME_MOST = 64 };

struct an_xml_writer {
    FILE *stream;
    int depth;                                /* open elements */
    bool in_tag;                              /* the start tag is not closed yet */
    bool has_text;                            /* the innermost element holds text: no indentation in it */
    char names[AN_XML_DEPTH_MOST][NAME_MOST]; /* of the open elements */
    an_error first;                           /* the first error; status 0: none */
};

static void remember(an_xml_writer *writer, an_status status, const char *what, const char *text)
{
    if (writer->first.status == AN_OK)
        an_fail(&writer->first, status, NULL, "%s '%.60s' cannot stand in a document", what, text);
}

/* Bytes of the UTF-8 character at s that XML 1.0 may hold (production [2] Char); 0 where it is none. */
static size_t character_length(const unsigned char *s)
{
    if (s[0] < 0x80)
        return s[0] >= 0x20 || s[0] == '\t' || s[0] == '\n' || s[0] == '\r' ? 1 : 0;
    size_t n = s[0] >= 0xf0 ? 4 : s[0] >= 0xe0 ? 3 : 2;
    if (s[0] < 0xc2 || s[0] > 0xf4)
        return 0;
    uint32_t code = s[0] & (0xffu >> (n + 1));
    for (size_t i = 1; i < n; i++) {
        if ((s[i] & 0xc0) != 0x80)
            return 0;
        code = code << 6 | (s[i] & 0x3f);
    }
    bool overlong = (n == 3 && code < 0x800) || (n == 4 && code < 0x10000);
    bool excluded = (code >= 0xd800 && code < 0xe000) || code == 0xfffe || code == 0xffff || code > 0x10ffff;
    return overlong || excluded ? 0 : n;
}

/* The escape of a character, NULL where it stands for itself. Blanks in attributes are escaped so that they
 * survive the parser's normalisation; a carriage return is everywhere, or it would be read as a line feed. */
static const char *escape_of(char c, bool in_attribute)
{
    switch (c) {
    case '&':
        return "&amp;";
    case '<':
        return "&lt;";
    case '>':
        return "&gt;";
    case '\r':
        return "&#13;";
    case '"':
        return in_attribute ? "&quot;" : NULL;
    case '\n':
        return in_attribute ? "&#10;" : NULL;
    case '\t':
        return in_attribute ? "&#9;" : NULL;
    default:
        return NULL;
    }
}

static void put_escaped(an_xml_writer *writer, const char *text, bool in_attribute)
{
    for (const char *s = text; *s;) {
        size_t n = character_length((const unsigned char *)s);
        const char *escape = escape_of(*s, in_attribute);
        if (!n) {
            remember(writer, AN_E_VALUE, "text", text);
            return;
        }
        if (escape)
            fputs(escape, writer->stream);
        else
            fwrite(s, 1, n, writer->stream);
        s += n;
    }
}

/* Close the start tag, if it is open. */
static void close_tag(an_xml_writer *writer)
{
    if (writer->in_tag)
        fputc('>', writer->stream);
    writer->in_tag = false;
}

static void indent(an_xml_writer *writer)
{
    fprintf(writer->stream, "\n%*s", 2 * writer->depth, "");
}

an_xml_writer *an_xml_writer_new(FILE *stream, const char *root)
{
    an_xml_writer *writer = calloc(1, sizeof *writer);
    if (!writer)
        return NULL;
    writer->stream = stream;
    fputs("<?xml version=\"1.0\" encoding=\"UTF-8\"?>", stream);
    an_xml_start(writer, root);
    an_xml_put(writer, "xmlns", AN_XML_NAMESPACE);
    an_xml_put(writer, "version", AN_XML_VERSION);
    return writer;
}

an_status an_xml_writer_finish(an_xml_writer *writer, an_error *err)
{
    while (writer->depth > 0)
        an_xml_end(writer);
    fputc('\n', writer->stream);
    if (writer->first.status < 0) {
        if (err)
            *err = writer->first;
        return writer->first.status;
    }
    if (fflush(writer->stream) != 0 || ferror(writer->stream))
        return an_fail(err, AN_E_IO, NULL, "the document cannot be written: %s", strerror(errno));
    return AN_OK;
}

void an_xml_writer_free(an_xml_writer **writer)
{
    free(*writer);
    *writer = NULL;
}

void an_xml_start(an_xml_writer *writer, const char *name)
{
    if (writer->depth == AN_XML_DEPTH_MOST || strlen(name) >= NAME_MOST) {
        remember(writer, AN_E_LIMIT, "element", name);
        return;
    }
    close_tag(writer);
    indent(writer);
    fprintf(writer->stream, "<%s", name);
    strcpy(writer->names[writer->depth++], name);
    writer->in_tag = true;
    writer->has_text = false;
}

void an_xml_end(an_xml_writer *writer)
{
    if (writer->depth == 0)
        return;
    writer->depth--;
    if (writer->in_tag) {
        fputs("/>", writer->stream);
    } else {
        if (!writer->has_text)
            indent(writer);
        fprintf(writer->stream, "</%s>", writer->names[writer->depth]);
    }
    writer->in_tag = false;
    writer->has_text = false;
}

void an_xml_put(an_xml_writer *writer, const char *name, const char *text)
{
    if (!text)
        return;
    if (!writer->in_tag) {
        remember(writer, AN_E_USAGE, "attribute behind content", name);
        return;
    }
    fprintf(writer->stream, " %s=\"", name);
    put_escaped(writer, text, true);
    fputc('"', writer->stream);
}

void an_xml_put_double(an_xml_writer *writer, const char *name, double value)
{
    char text[AN_NUMBER_SIZE];
    if (isnan(value))
        return;
    an_number_print(value, text);
    if (isinf(value))
        remember(writer, AN_E_VALUE, name, text);
    an_xml_put(writer, name, text);
}

void an_xml_put_integer(an_xml_writer *writer, const char *name, int64_t value)
{
    char text[AN_NUMBER_SIZE];
    snprintf(text, sizeof text, "%" PRId64, value);
    an_xml_put(writer, name, text);
}

void an_xml_put_text(an_xml_writer *writer, const char *text)
{
    close_tag(writer);
    writer->has_text = true;
    put_escaped(writer, text, false);
}

void an_xml_put_raw(an_xml_writer *writer, const char *text, size_t n)
{
    close_tag(writer);
    writer->has_text = true;
    fwrite(text, 1, n, writer->stream);
}

void an_xml_put_measure(an_xml_writer *writer, const char *name, an_measure measure, const char *unit)
{
    if (isnan(measure.value))
        return;
    an_xml_start(writer, name);
    an_xml_put_double(writer, "value", measure.value);
    an_xml_put(writer, "unit", unit);
    an_xml_put_double(writer, "u", measure.u);
    an_xml_end(writer);
}

void an_xml_put_node(an_xml_writer *writer, const an_xml_node *node)
{
    an_xml_start(writer, node->name);
    for (size_t i = 0; i < node->n_attributes; i++)
        an_xml_put(writer, node->attributes[i].name, node->attributes[i].value);
    if (!node->child && node->n_text)
        an_xml_put_text(writer, node->text);
    for (const an_xml_node *child = node->child; child; child = child->next)
        an_xml_put_node(writer, child);
    an_xml_end(writer);
}

an_status an_xml_save(const char *path, const char *root, an_xml_body *body, const void *content,
                      an_error *err)
{
    an_output *output;
    AN_TRY(an_output_open(path, &output, err));
    an_xml_writer *writer = an_xml_writer_new(an_output_stream(output), root);
    an_status status = writer ? AN_OK : an_fail_memory(err, "a document to be written");
    if (writer) {
        body(writer, content);
        status = an_xml_writer_finish(writer, err);
    }
    an_xml_writer_free(&writer);
    if (status >= 0)
        return an_output_commit(&output, err);
    an_output_discard(&output);
    return status;
}
