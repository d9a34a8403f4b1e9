/* The schemas: each compiles, documents every element with an example, and its whole example document is
 * valid. What stands in a folder of schemas is looked at file by file, so a new schema is tested as soon as
 * it is there. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/xml.h"

#include <dirent.h>
#include <libxml/parser.h>
#include <libxml/xmlschemas.h>
#include <stdlib.h>
#include <string.h>

#define FOLDER ANELAST_SOURCE "/include/anelast/schema"
#define XS     "http://www.w3.org/2001/XMLSchema"

/* What is wrong with the schemas, one line each; counted rather than failing at the first. */
static int n_wrong;

static void wrong(const char *file, xmlNode *node, const char *what)
{
    char *name = node ? (char *)xmlGetProp(node, BAD_CAST "name") : NULL;
    fprintf(stderr, "%s:%ld: %s: %s\n", file, node ? xmlGetLineNo(node) : 0, name ? name : "", what);
    xmlFree(name);
    n_wrong++;
}

static bool is_xs(const xmlNode *node, const char *name)
{
    return node->type == XML_ELEMENT_NODE && node->ns && strcmp((const char *)node->ns->href, XS) == 0 &&
           strcmp((const char *)node->name, name) == 0;
}

static xmlNode *child(xmlNode *node, const char *name)
{
    xmlNode *c = node ? node->children : NULL;
    while (c && !is_xs(c, name))
        c = c->next;
    return c;
}

/* An example that is no document: well-formed, with the names of the documents' namespace. */
static bool is_well_formed(const char *example)
{
    char *text = NULL;
    if (asprintf(&text, "<example xmlns=\"%s\">%s</example>", AN_XML_NAMESPACE, example) < 0)
        return false;
    xmlDoc *parsed = xmlReadMemory(text, (int)strlen(text), NULL, NULL, XML_PARSE_NONET | XML_PARSE_NOERROR);
    bool fine = parsed && parsed->children->children;
    xmlFreeDoc(parsed);
    free(text);
    return fine;
}

/* A whole document: read as programs read it. */
static bool is_valid_document(const char *example, an_error *err)
{
    an_xml_document document;
    FILE *stream = fmemopen((void *)(uintptr_t)example, strlen(example), "rb");
    an_status status = an_xml_read_stream(stream, "example", &(an_xml_reading){0}, &document, err);
    fclose(stream);
    an_xml_document_clear(&document);
    return status == AN_OK && !document.newer;
}

static void check_example(const char *file, xmlNode *node, bool is_root)
{
    xmlNode *appinfo = child(child(node, "annotation"), "appinfo");
    char *example = appinfo ? (char *)xmlNodeGetContent(appinfo) : NULL;
    an_error err = {0};
    if (!example || !*example)
        wrong(file, node, "no example");
    else if (strncmp(example, "<?xml", 5) != 0 && is_root)
        wrong(file, node, "its example is no whole document");
    else if (strncmp(example, "<?xml", 5) != 0 && !is_well_formed(example))
        wrong(file, node, "its example is not well-formed");
    else if (strncmp(example, "<?xml", 5) == 0 && !is_valid_document(example, &err)) {
        fprintf(stderr, "%s: %s\n", err.place, err.text);
        wrong(file, node, "its example document is not valid");
    }
    xmlFree(example);
}

static void check_documentation(const char *file, xmlNode *node)
{
    xmlNode *documentation = child(child(node, "annotation"), "documentation");
    char *text = documentation ? (char *)xmlNodeGetContent(documentation) : NULL;
    size_t n = text ? strlen(text) : 0;
    while (n && strchr(" \n\t", text[n - 1]))
        n--;
    if (n < 12 || text[n - 1] != '.')
        wrong(file, node, "no documentation in whole sentences");
    xmlFree(text);
}

/* In an XPath of a key a name without prefix means no namespace: such a key checks nothing. */
static void check_path(const char *file, xmlNode *node)
{
    char *path = (char *)xmlGetProp(node, BAD_CAST "xpath");
    for (char *step = path, *end; step && *step; step = *end ? end + 1 : end) {
        end = step + strcspn(step, "/|");
        size_t n = (size_t)(end - step);
        if (n && *step != '@' && *step != '.' && *step != '*' && !memchr(step, ':', n))
            wrong(file, node->parent, "a step of its xpath has no prefix, so that it selects nothing");
    }
    xmlFree(path);
}

/* A root carries the attributes of roots; other global elements are parts that several documents share. */
static bool has_root_attributes(xmlNode *node)
{
    bool found = is_xs(node, "attributeGroup") && xmlHasProp(node, BAD_CAST "ref");
    for (xmlNode *c = node->children; c && !found; c = c->next)
        found = !is_xs(c, "element") && has_root_attributes(c);
    return found;
}

static void check_node(const char *file, const char *root, xmlNode *node)
{
    for (xmlNode *c = node->children; c; c = c->next) {
        char *name = c->type == XML_ELEMENT_NODE ? (char *)xmlGetProp(c, BAD_CAST "name") : NULL;
        bool is_top = node->parent && node->parent->type == XML_DOCUMENT_NODE;
        bool is_type = is_top && (is_xs(c, "complexType") || is_xs(c, "simpleType") || is_xs(c, "group"));
        if (name && (is_xs(c, "element") || is_type)) {
            check_documentation(file, c);
            check_example(file, c,
                          is_xs(c, "element") && is_top && strcmp(name, root) == 0 && has_root_attributes(c));
        }
        if (is_xs(c, "selector") || is_xs(c, "field"))
            check_path(file, c);
        xmlFree(name);
        check_node(file, root, c);
    }
}

static void check_file(const char *file, const char *path)
{
    char root[64];
    xmlDoc *schema = xmlReadFile(path, NULL, XML_PARSE_NONET);
    if (!schema) {
        wrong(file, NULL, "not well-formed");
        return;
    }
    snprintf(root, sizeof root, "%.*s", (int)strcspn(file, "."), file);
    xmlSchemaParserCtxt *context = xmlSchemaNewParserCtxt(path);
    xmlSchema *compiled = xmlSchemaParse(context);
    if (!compiled)
        wrong(file, NULL, "does not compile");
    xmlSchemaFree(compiled);
    xmlSchemaFreeParserCtxt(context);
    check_node(file, root, (xmlNode *)schema);
    xmlFreeDoc(schema);
}

static void every_schema_is_documented_with_valid_examples(void **state)
{
    int n_files = 0;
    (void)state;
    DIR *folder = opendir(FOLDER);
    assert_non_null(folder);
    for (struct dirent *entry; (entry = readdir(folder));) {
        char path[600];
        const char *end = strrchr(entry->d_name, '.');
        if (!end || strcmp(end, ".xsd") != 0)
            continue;
        snprintf(path, sizeof path, "%s/%s", FOLDER, entry->d_name);
        check_file(entry->d_name, path);
        n_files++;
    }
    closedir(folder);
    assert_true(n_files >= 2);
    assert_int_equal(n_wrong, 0);
}

/* The checker itself must see what is wrong. */
static void the_check_can_fail(void **state)
{
    static const char bad[] =
        "<xs:schema xmlns:xs=\"" XS "\"><xs:element name=\"bad\"><xs:annotation><xs:documentation>too short"
        "</xs:documentation><xs:appinfo>&lt;?xml version=\"1.0\"?>&lt;bad/></xs:appinfo></xs:annotation>"
        "<xs:complexType><xs:sequence><xs:element name=\"a\" "
        "type=\"xs:string\"/></xs:sequence></xs:complexType>"
        "<xs:key name=\"k\"><xs:selector xpath=\"a\"/><xs:field "
        "xpath=\"@n\"/></xs:key></xs:element></xs:schema>";
    (void)state;
    int before = n_wrong;
    xmlDoc *schema = xmlReadMemory(bad, sizeof bad - 1, NULL, NULL, 0);
    check_node("bad.xsd", "bad", (xmlNode *)schema);
    xmlFreeDoc(schema);
    assert_int_equal(n_wrong - before, 5);
    n_wrong = before;
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_check_can_fail),
        cmocka_unit_test(every_schema_is_documented_with_valid_examples),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
