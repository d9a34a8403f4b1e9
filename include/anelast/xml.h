/* anelast/xml.h: documents in and out.
 *
 * Reading is a SAX2 pull parse with the schema plugged in, so that a document is validated while it streams;
 * it arrives as a light tree of nodes. Children of the root that the caller names (bursts) are handed over
 * one at a time as soon as they are complete, and freed: memory is bounded by the largest of them. Input is
 * hostile until checked: no DOCTYPE, no entities of one's own, no network, and limits that name themselves.
 * Attributes and elements that this reader does not know are for the caller to ignore: it asks for what it
 * knows.
 */
#ifndef ANELAST_XML_H
#define ANELAST_XML_H

#include "anelast/hash.h"
#include "anelast/quantity.h"
#include "anelast/status.h"

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

/* The namespace of all documents; the number is the major version. */
#define AN_XML_NAMESPACE "urn:x-anelast:documents:1"

/* The version that documents made here carry: major.minor. */
#define AN_XML_VERSION "1.0"

/* Limits of a document. */
enum {
    AN_XML_DEPTH_MOST = 32,             /* elements within elements */
    AN_XML_ATTRIBUTES_MOST = 64,        /* attributes of one element */
    AN_XML_TEXT_MOST = 6 * 1024 * 1024, /* bytes of text in one element: a part of 4 MiB, with room */
    AN_XML_NODES_MOST = 4 * 1024 * 1024 /* nodes held at one time */
};

/* One attribute. */
typedef struct an_xml_attribute {
    char *name;  /* without prefix; attributes in a foreign namespace are not kept */
    char *value; /* UTF-8, normalised by the parser */
} an_xml_attribute;

/* One element; owned by the document, or by the reader while it is handed over. */
typedef struct an_xml_node {
    char *name;                   /* without prefix; elements in a foreign namespace are not kept */
    char *text;                   /* [n_text] UTF-8, terminated; "" where there is none */
    size_t n_text;                /* bytes of text */
    an_xml_attribute *attributes; /* [n_attributes] */
    size_t n_attributes;          /* [1] */
    struct an_xml_node *parent;   /* NULL at the root */
    struct an_xml_node *child;    /* the first child, or NULL */
    struct an_xml_node *last;     /* the last child, or NULL */
    struct an_xml_node *next;     /* the next sibling, or NULL */
    int line;                     /* where its start tag ended, from 1 */
    const char *file;             /* the document's name for messages; owned by the document */
} an_xml_node;

/* A document that was read. */
typedef struct an_xml_document {
    char *file;                  /* name for messages: the path, or "standard input" */
    char sha256[AN_SHA256_SIZE]; /* of the raw bytes; "" until the end was reached */
    an_xml_node *root;           /* all but what was handed over */
    bool newer;                  /* its minor version is above ours: it was not validated */
} an_xml_document;

/* Called for each streamed child of the root when it is complete.
 *   context  [in]  the caller's
 *   document [in]  what was read before it; document->root is not complete
 *   node     [in]  freed after the call
 * A negative status ends the reading and is what the reader returns. */
typedef an_status (*an_xml_visit)(void *context, const an_xml_document *document, const an_xml_node *node,
                                  an_error *err);

/* What to read. */
typedef struct an_xml_reading {
    const char *root;            /* name that the root must have; NULL: any that has a schema */
    const char *const *streamed; /* names, ended by NULL, of children of the root to hand over; NULL: none */
    an_xml_visit visit;          /* NULL where nothing is streamed: then streamed children are dropped */
    void *context;               /* for visit */
} an_xml_reading;

/* an_xml_read: read and validate a document.
 *   path     [in]  a file; "-" or NULL: standard input
 *   reading  [in]  what is wanted
 *   document [out] clear with an_xml_document_clear, also after a refusal
 * Returns AN_OK; AN_E_IO; AN_E_DOCUMENT (not well-formed, not valid, DOCTYPE, another root or major version),
 * AN_E_LIMIT, AN_E_MEMORY, or what visit returned. */
an_status an_xml_read(const char *path, const an_xml_reading *reading, an_xml_document *document,
                      an_error *err);

/* an_xml_read_stream: the same from an open stream (not closed here), called `name` in messages. */
an_status an_xml_read_stream(FILE *stream, const char *name, const an_xml_reading *reading,
                             an_xml_document *document, an_error *err);

/* an_xml_document_clear: release all that it holds. */
void an_xml_document_clear(an_xml_document *document);

/* an_xml_sniff: the name of the first element, without prefix, in the head of a document, behind declaration
 * and comments. head [in] text, terminated; name [out] cut to n_name bytes with its zero byte. Returns false
 * where there is none. */
bool an_xml_sniff(const char *head, char *name, size_t n_name);

/* an_xml_schema_path: the path of the schema of a root element, from ANELAST_SCHEMA_DIR in the environment,
 * the prefix that the running program was installed in, the source, or the place they were configured for. Returns AN_OK or AN_E_IO with the folders that were looked at. */
an_status an_xml_schema_path(const char *root, char *path, size_t n_path, an_error *err);

/* ---- finding things in a node ---- */

/* an_xml_child: the first child of that name (NULL: of any). Returns NULL where there is none; node may be
 * NULL. */
const an_xml_node *an_xml_child(const an_xml_node *node, const char *name);

/* an_xml_next: the next sibling of that name (NULL: of any), or NULL. */
const an_xml_node *an_xml_next(const an_xml_node *node, const char *name);

/* an_xml_count_children: how many children of that name (NULL: of any). */
size_t an_xml_count_children(const an_xml_node *node, const char *name);

/* an_xml_fail: refuse something about a node: "file:line" is the place, "element: " or "element name: " opens
 * the text. */
an_status an_xml_fail(const an_xml_node *node, an_error *err, an_status status, const char *format, ...)
    __attribute__((format(printf, 4, 5)));

/* an_xml_need: the first child of that name, or AN_E_DOCUMENT. */
an_status an_xml_need(const an_xml_node *node, const char *name, const an_xml_node **child, an_error *err);

/* an_xml_attribute_of: an attribute's text, or NULL where it is not there. */
const char *an_xml_attribute_of(const an_xml_node *node, const char *name);

/* an_xml_text: a required attribute's text; it lives as long as the node. Returns AN_OK or AN_E_DOCUMENT. */
an_status an_xml_text(const an_xml_node *node, const char *name, const char **text, an_error *err);

/* an_xml_double: a required attribute as a finite number. Returns AN_OK, AN_E_DOCUMENT (missing) or
 * AN_E_VALUE. */
an_status an_xml_double(const an_xml_node *node, const char *name, double *value, an_error *err);

/* an_xml_double_or: the same, `fallback` where the attribute is not there. */
an_status an_xml_double_or(const an_xml_node *node, const char *name, double fallback, double *value,
                           an_error *err);

/* an_xml_integer: a required attribute as an integer in [least, most]. Returns AN_OK, AN_E_DOCUMENT or
 * AN_E_VALUE. */
an_status an_xml_integer(const an_xml_node *node, const char *name, int64_t least, int64_t most,
                         int64_t *value, an_error *err);

/* an_xml_word: a required attribute as one of some words.
 *   words   [in]  ended by NULL
 *   i_words [out] which
 * Returns AN_OK, AN_E_DOCUMENT (missing) or AN_E_VALUE listing the words. */
an_status an_xml_word(const an_xml_node *node, const char *name, const char *const *words, int *i_words,
                      an_error *err);

/* an_xml_measure: a required child `<name value= unit= u=/>`, converted to SI.
 *   unit    [in]  SI unit wanted, UCUM; a missing unit attribute is refused unless this is "1"
 *   measure [out] [unit]; u NAN where not given
 * Returns AN_OK, AN_E_DOCUMENT (missing), AN_E_UNIT or AN_E_VALUE. */
an_status an_xml_measure(const an_xml_node *node, const char *name, const char *unit, an_measure *measure,
                         an_error *err);

/* an_xml_measure_optional: the same; AN_MEASURE_NONE where the child is not there. */
an_status an_xml_measure_optional(const an_xml_node *node, const char *name, const char *unit,
                                  an_measure *measure, an_error *err);

/* an_xml_measure_here: the node's own value, unit and u. */
an_status an_xml_measure_here(const an_xml_node *node, const char *unit, an_measure *measure, an_error *err);

/* ---- writing ---- */

/* A document being written. Errors stick: the first is returned by an_xml_writer_finish. */
typedef struct an_xml_writer an_xml_writer;

/* an_xml_writer_new: start a document: declaration, root element with namespace and version.
 *   stream [in]  not closed here
 *   root   [in]  name of the root element
 * Returns NULL where there is no memory. Free with an_xml_writer_free. */
an_xml_writer *an_xml_writer_new(FILE *stream, const char *root);

/* an_xml_writer_finish: end what is open, flush. Returns AN_OK, AN_E_IO (writing failed) or AN_E_VALUE (a
 * text that XML cannot hold: not UTF-8, or a control character; a number that is not finite). */
an_status an_xml_writer_finish(an_xml_writer *writer, an_error *err);

/* an_xml_writer_free: release; *writer becomes NULL. */
void an_xml_writer_free(an_xml_writer **writer);

/* Writes what stands within the root element. content [in] what an_xml_save was given */
typedef void an_xml_body(an_xml_writer *writer, const void *content);

/* an_xml_save: write a whole document, which appears at its place whole or not at all.
 *   path    [in] where; "-" or NULL: standard output
 *   root    [in] name of the root element
 *   body    [in] writes the rest from content
 *   content [in] for body alone; may be NULL where body allows it
 * Returns AN_OK; AN_E_MEMORY; AN_E_IO or AN_E_VALUE as an_xml_writer_finish and an_output_commit. */
an_status an_xml_save(const char *path, const char *root, an_xml_body *body, const void *content,
                      an_error *err);

/* an_xml_start, an_xml_end: an element, indented by two blanks a level; one without content becomes
 * `<name/>`. */
void an_xml_start(an_xml_writer *writer, const char *name);
void an_xml_end(an_xml_writer *writer);

/* Attributes of the element just started: text (NULL: not written), a number as by an_number_print (NAN: not
 * written), an integer. */
void an_xml_put(an_xml_writer *writer, const char *name, const char *text);
void an_xml_put_double(an_xml_writer *writer, const char *name, double value);
void an_xml_put_integer(an_xml_writer *writer, const char *name, int64_t value);

/* an_xml_put_text: text content, escaped. */
void an_xml_put_text(an_xml_writer *writer, const char *text);

/* an_xml_put_raw: n bytes of content that are known to need no escaping (base64). */
void an_xml_put_raw(an_xml_writer *writer, const char *text, size_t n);

/* an_xml_put_measure: `<name value= unit= u=/>`; nothing where the value is NAN, no u where that is NAN. */
void an_xml_put_measure(an_xml_writer *writer, const char *name, an_measure measure, const char *unit);

/* an_xml_put_node: a node that was read, again, with all it holds (a specimen carried on into the next
 * document). */
void an_xml_put_node(an_xml_writer *writer, const an_xml_node *node);

#endif
