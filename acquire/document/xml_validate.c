/* Validation while a document streams: libxml2's schema check is put between the parser and the reader once
 * the root, and so its schema, is known.
 */
#include "xml_reader.h"

static void on_schema_error(void *context, xmlErrorPtr error)
{
    char text[800];
    an_reader_tidy(error->message ? error->message : "", text, sizeof text);
    an_reader *r = context;
    an_reader_refuse(r, error->code == XML_ERR_NO_MEMORY ? AN_E_MEMORY : AN_E_DOCUMENT, "%s", text);
}

/* Gather the first error of a schema that does not load. */
static void on_schema_load_error(void *context, xmlErrorPtr error)
{
    char *text = context;
    if (!*text)
        an_reader_tidy(error->message ? error->message : "", text, 400);
}

static bool load_schema(an_reader *r, const char *root)
{
    char path[512], first[400] = "";
    an_error err = {0};
    an_status status = an_xml_schema_path(root, path, sizeof path, &err);
    if (status < 0) {
        an_reader_refuse(r, status, "%s", err.text);
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
        an_reader_refuse(r, AN_E_IO, "the schema %s does not load: %s", path, first);
    return r->schema != NULL;
}

bool an_reader_plug(an_reader *r, const char *root)
{
    if (!load_schema(r, root))
        return false;
    r->validation = xmlSchemaNewValidCtxt(r->schema);
    if (!r->validation) {
        an_reader_refuse_memory(r);
        return false;
    }
    xmlSchemaSetValidStructuredErrors(r->validation, on_schema_error, r);
    r->plug = xmlSchemaSAXPlug(r->validation, &r->parser->sax, &r->parser->userData);
    if (!r->plug)
        an_reader_refuse_memory(r);
    return r->plug != NULL;
}

/* End what was open when the reading stopped: the validation keeps its tables of keys otherwise. Refused as
 * the reading is, nobody listens to what the schema says of it. */
static void unwind(an_reader *r)
{
    for (; r->n_started > 0; r->n_started--)
        r->parser->sax->endElementNs(r->parser->userData, BAD_CAST "", NULL, BAD_CAST AN_XML_NAMESPACE);
}

void an_reader_unplug(an_reader *r)
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
