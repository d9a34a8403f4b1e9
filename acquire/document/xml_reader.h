/* xml_reader.h: a reading in progress, shared by xml_read.c (the parse), xml_build.c (the tree) and
 * xml_validate.c (the schema).
 */
#ifndef ANELAST_XML_READER_H
#define ANELAST_XML_READER_H

#include "anelast/xml.h"

#include <libxml/parser.h>
#include <libxml/xmlschemas.h>

/* A reading in progress. */
typedef struct an_reader {
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
    size_t n_byte;        /* read so far */
    int n_started;        /* open elements of any namespace, as the schema counts them */
    int foreign;          /* open elements of another namespace, and all in them */
    an_xml_node *open;    /* the innermost open element */
    an_xml_node *pending; /* a streamed child, complete, whose schema check ends with the next event */
    char *text;           /* [n_text] of the innermost open element */
    size_t n_text, room_text;
    size_t n_nodes, n_held; /* held now */
    an_error *err;          /* the first refusal */
    an_status status;       /* and its status; AN_OK: none */
} an_reader;

/* an_reader_refuse: keep the first refusal, with the parser's place, and stop the parse. */
void an_reader_refuse(an_reader *r, an_status status, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/* an_reader_refuse_memory: the same where there is no memory. */
void an_reader_refuse_memory(an_reader *r);

/* an_reader_tidy: a message of libxml2 as people say it: "{urn:...}length" becomes "length", no full stop, no
 * line feed. */
void an_reader_tidy(const char *message, char *text, size_t n_text);

/* an_reader_plug: put the schema of a root element between the parser and this reader. Returns false after a
 * refusal. */
bool an_reader_plug(an_reader *r, const char *root);

/* an_reader_unplug: take it out again and release it. */
void an_reader_unplug(an_reader *r);

/* an_reader_open: an element of our namespace begins; attributes [5 n] as libxml2 hands them over. */
void an_reader_open(an_reader *r, const char *name, int n_attributes, const xmlChar **attributes);

/* an_reader_close: the innermost element ends. */
void an_reader_close(an_reader *r);

/* an_reader_text: n bytes of text in the innermost element. */
void an_reader_text(an_reader *r, const char *text, size_t n);

/* an_reader_deliver: hand the pending child of the root over to the caller, if there is one, and free it. */
void an_reader_deliver(an_reader *r);

/* an_reader_drop: free a node and all in it; r NULL where it is not counted. */
void an_reader_drop(an_reader *r, an_xml_node *node);

#endif
