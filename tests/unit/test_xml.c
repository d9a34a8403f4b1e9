/* Documents in and out: what is read, what is refused, and by which name. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/procedure.h"
#include "anelast/xml.h"

#include "../check.h"
#include "scratch.h"

#define HEAD "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n"
#define NS   " xmlns=\"urn:x-anelast:documents:1\""

/* A small schema of the test's own beside the common one, for what no real document shows. */
static const char test_schema[] =
    HEAD "<xs:schema xmlns:xs=\"http://www.w3.org/2001/XMLSchema\"" NS
         " xmlns:d=\"urn:x-anelast:documents:1\" targetNamespace=\"urn:x-anelast:documents:1\""
         " elementFormDefault=\"qualified\"><xs:include schemaLocation=\"common.xsd\"/>"
         "<xs:element name=\"trial\"><xs:complexType><xs:sequence>"
         "<xs:element name=\"length\" type=\"measure\" minOccurs=\"0\"/>"
         "<xs:element name=\"burst\" minOccurs=\"0\" maxOccurs=\"unbounded\"><xs:complexType><xs:sequence>"
         "<xs:element name=\"note\" type=\"xs:string\"/></xs:sequence>"
         "<xs:attribute name=\"n\" type=\"ordinal\" use=\"required\"/></xs:complexType></xs:element>"
         "<xs:group ref=\"foreign\"/></xs:sequence><xs:attributeGroup ref=\"rootAttributes\"/>"
         "<xs:attribute name=\"id\" type=\"id\"/></xs:complexType>"
         "<xs:key name=\"burstNumber\"><xs:selector xpath=\"d:burst\"/><xs:field xpath=\"@n\"/></xs:key>"
         "</xs:element></xs:schema>";

/* Reading a text as a document. */
static an_status read_text(const char *text, size_t n, const an_xml_reading *reading,
                           an_xml_document *document, an_error *err)
{
    FILE *stream = fmemopen((void *)(uintptr_t)text, n, "rb");
    assert_non_null(stream);
    an_status status = an_xml_read_stream(stream, "trial.xml", reading, document, err);
    fclose(stream);
    return status;
}

static void refused(const char *text, an_status status, const char *named)
{
    an_xml_document document;
    an_xml_reading reading = {.root = "trial"};
    an_error err = {0};
    an_status got = read_text(text, strlen(text), &reading, &document, &err);
    if (got != status || !strstr(err.text, named) || strncmp(err.place, "trial.xml:", 10) != 0)
        fail_msg("status %d, '%s: %s'; '%s' should be named", got, err.place, err.text, named);
    an_xml_document_clear(&document);
}

static void a_document_becomes_a_tree(void **state)
{
    const char *text = HEAD "<trial" NS " version=\"1.0\" id=\"LQ &amp; co\">\n"
                            "<length value=\"12.4\" unit=\"mm\" u=\"0.02\"/>\n"
                            "<burst n=\"1\"><note>&lt;a&gt; <![CDATA[<b>]]></note></burst>\n"
                            "<burst n=\"2\"><note/></burst></trial>\n";
    char hex[AN_SHA256_SIZE];
    an_xml_document document;
    an_error err = {0};
    (void)state;
    assert_int_equal(read_text(text, strlen(text), &(an_xml_reading){0}, &document, &err), AN_OK);
    assert_int_equal(an_sha256_of(text, strlen(text), hex), AN_OK);
    assert_string_equal(document.sha256, hex);
    assert_false(document.newer);
    assert_string_equal(document.root->name, "trial");
    assert_string_equal(an_xml_attribute_of(document.root, "id"), "LQ & co");
    const an_xml_node *burst = an_xml_child(document.root, "burst");
    assert_int_equal(burst->line, 4);
    assert_string_equal(an_xml_child(burst, "note")->text, "<a> <b>");
    assert_int_equal(an_xml_count_children(document.root, "burst"), 2);
    assert_int_equal(an_xml_count_children(document.root, NULL), 3);
    assert_null(an_xml_next(an_xml_next(burst, "burst"), "burst"));
    an_xml_document_clear(&document);
    assert_null(document.root);
}

/* ---- streaming ---- */

typedef struct seen {
    int n;
    int64_t last;
    size_t n_before; /* children of the root at the last visit */
    int stop_at;
} seen;

static an_status visit(void *context, const an_xml_document *document, const an_xml_node *node, an_error *err)
{
    seen *s = context;
    s->n++;
    s->n_before = an_xml_count_children(document->root, NULL);
    AN_TRY(an_xml_integer(node, "n", 1, 1000000, &s->last, err));
    return s->n == s->stop_at ? an_xml_fail(node, err, AN_E_SCIENCE, "enough") : AN_OK;
}

static const char *const streamed[] = {"burst", NULL};

static void bursts_are_handed_over_one_at_a_time(void **state)
{
    char *text = NULL;
    size_t n = 0;
    seen s = {0};
    an_xml_document document;
    an_error err = {0};
    an_xml_reading reading = {.root = "trial", .streamed = streamed, .visit = visit, .context = &s};
    (void)state;
    FILE *stream = open_memstream(&text, &n);
    fprintf(stream, HEAD "<trial" NS " version=\"1.0\"><length value=\"1\" unit=\"m\"/>");
    for (int i = 1; i <= 5000; i++)
        fprintf(stream, "<burst n=\"%d\"><note>%d</note></burst>\n", i, i);
    fprintf(stream, "</trial>");
    fclose(stream);
    assert_int_equal(read_text(text, n, &reading, &document, &err), AN_OK);
    assert_int_equal(s.n, 5000);
    assert_int_equal(s.last, 5000);
    assert_int_equal(s.n_before, 1);
    assert_int_equal(an_xml_count_children(document.root, NULL), 1);
    an_xml_document_clear(&document);

    s = (seen){.stop_at = 7};
    assert_int_equal(read_text(text, n, &reading, &document, &err), AN_E_SCIENCE);
    assert_int_equal(s.n, 7);
    assert_string_equal(err.place, "trial.xml:8");
    an_xml_document_clear(&document);
    free(text);
}

/* The schema finds what a burst lacks only at its end: it must not have been handed over by then. */
static void a_burst_that_is_not_valid_is_never_handed_over(void **state)
{
    const char *text =
        HEAD "<trial" NS " version=\"1.0\"><burst n=\"1\"><note/></burst><burst n=\"2\"></burst></trial>";
    seen s = {0};
    an_xml_document document;
    an_error err = {0};
    an_xml_reading reading = {.root = "trial", .streamed = streamed, .visit = visit, .context = &s};
    (void)state;
    assert_int_equal(read_text(text, strlen(text), &reading, &document, &err), AN_E_DOCUMENT);
    assert_int_equal(s.n, 1);
    an_xml_document_clear(&document);
}

/* ---- refusals ---- */

static void what_is_not_valid_is_refused_by_place(void **state)
{
    (void)state;
    refused(HEAD "<trial" NS " version=\"1.0\"><wide/></trial>", AN_E_DOCUMENT, "'wide'");
    refused(HEAD "<trial" NS " version=\"1.0\" od=\"x\"/>", AN_E_DOCUMENT, "'od'");
    refused(HEAD "<trial" NS " version=\"1.0\"><burst n=\"0\"><note/></burst></trial>", AN_E_DOCUMENT, "'0'");
    refused(HEAD "<trial" NS
                 " version=\"1.0\"><burst n=\"1\"><note/></burst><burst n=\"1\"><note/></burst></trial>",
            AN_E_DOCUMENT, "burstNumber");
    refused(HEAD "<trial" NS " version=\"1.0\"><length value=\"1,5\" unit=\"m\"/></trial>", AN_E_DOCUMENT,
            "'1,5'");
    refused(HEAD "<trial" NS " version=\"1.0\"><length value=\"NaN\" unit=\"m\"/></trial>", AN_E_DOCUMENT,
            "'NaN'");
    refused(HEAD "<trial" NS " version=\"1.0\"><length value=\"1\" unit=\"m\" u=\"-1\"/></trial>",
            AN_E_DOCUMENT, "'-1'");
}

static void what_is_not_whole_is_refused(void **state)
{
    (void)state;
    refused(HEAD "<trial" NS " version=\"1.0\"><burst n=\"1\">", AN_E_DOCUMENT, "not well-formed");
    refused(HEAD "<trial" NS " version=\"1.0\"/><trial/>", AN_E_DOCUMENT, "not well-formed");
    refused("time;force\n0;1\n", AN_E_DOCUMENT, "not well-formed");
    refused(HEAD "<trial" NS " version=\"1.0\" id=\"\xe4\"/>", AN_E_DOCUMENT, "not well-formed");
    refused(HEAD "<trial" NS " version=\"1.0\" id=\"&nothing;\"/>", AN_E_DOCUMENT, "nothing");
}

static void other_versions_are_refused_by_name(void **state)
{
    (void)state;
    refused("<trial xmlns=\"urn:x-anelast:documents:2\" version=\"2.0\"/>", AN_E_DOCUMENT,
            "another major version");
    refused("<trial xmlns=\"urn:x-other\" version=\"1.0\"/>", AN_E_DOCUMENT, "urn:x-other");
    refused("<trial version=\"1.0\"/>", AN_E_DOCUMENT, "namespace ''");
    refused("<trial" NS "/>", AN_E_DOCUMENT, "'version' is missing");
    refused("<trial" NS " version=\"2.0\"/>", AN_E_DOCUMENT, "'2.0'");
    refused("<trial" NS " version=\"1\"/>", AN_E_DOCUMENT, "'1'");
    refused("<trial" NS " version=\"1.-1\"/>", AN_E_DOCUMENT, "'1.-1'");
    refused("<verdict" NS " version=\"1.0\"/>", AN_E_DOCUMENT, "wanted is 'trial'");
}

static void a_root_without_schema_is_refused(void **state)
{
    const char *text = "<nonesuch" NS " version=\"1.0\"/>", *odd = "<\xc3\xa4..x" NS " version=\"1.0\"/>";
    an_xml_document document;
    an_error err = {0};
    (void)state;
    assert_int_equal(read_text(text, strlen(text), &(an_xml_reading){0}, &document, &err), AN_E_DOCUMENT);
    assert_non_null(strstr(err.text, "nonesuch.xsd"));
    an_xml_document_clear(&document);
    assert_int_equal(read_text(odd, strlen(odd), &(an_xml_reading){0}, &document, &err), AN_E_DOCUMENT);
    an_xml_document_clear(&document);
}

/* A newer minor version may hold what is not known here: it is not validated, and the unknown is there to be
 * ignored. */
static void a_newer_minor_version_is_taken(void **state)
{
    const char *text =
        "<trial" NS
        " version=\"1.7\" colour=\"green\"><length value=\"2\" unit=\"m\" by=\"gauge\"/><wide/></trial>";
    an_xml_document document;
    an_measure length;
    an_error err = {0};
    (void)state;
    assert_int_equal(read_text(text, strlen(text), &(an_xml_reading){.root = "trial"}, &document, &err),
                     AN_OK);
    assert_true(document.newer);
    assert_int_equal(an_xml_measure(document.root, "length", "m", &length, &err), AN_OK);
    assert_close(length.value, 2, 0);
    an_xml_document_clear(&document);
}

static void foreign_content_is_ignored(void **state)
{
    const char *text =
        "<trial" NS " xmlns:q=\"urn:x-lower-quay\" version=\"1.0\"><burst n=\"1\"><note>a</note></burst>"
        "<q:shelf q:n=\"2\"><q:burst n=\"3\">text</q:burst><burst" NS
        " n=\"4\"><note/></burst></q:shelf></trial>";
    an_xml_document document;
    an_error err = {0};
    (void)state;
    assert_int_equal(read_text(text, strlen(text), &(an_xml_reading){.root = "trial"}, &document, &err),
                     AN_OK);
    assert_int_equal(an_xml_count_children(document.root, NULL), 1);
    assert_string_equal(document.root->child->child->text, "a");
    an_xml_document_clear(&document);
}

/* ---- hostile input ---- */

static void a_doctype_ends_the_reading(void **state)
{
    (void)state;
    refused(HEAD "<!DOCTYPE trial><trial" NS " version=\"1.0\"/>", AN_E_DOCUMENT, "DOCTYPE");
    refused(HEAD "<!DOCTYPE trial SYSTEM \"file:///etc/passwd\"><trial" NS " version=\"1.0\"/>",
            AN_E_DOCUMENT, "DOCTYPE");
    refused(HEAD "<!DOCTYPE trial [<!ENTITY x SYSTEM \"file:///etc/passwd\">]><trial" NS
                 " version=\"1.0\"><burst n=\"1\"><note>&x;</note></burst></trial>",
            AN_E_DOCUMENT, "DOCTYPE");
}

/* Nested entities that would unfold to 10^9 texts. */
static void an_entity_bomb_does_not_unfold(void **state)
{
    char *text = NULL;
    size_t n = 0;
    (void)state;
    FILE *stream = open_memstream(&text, &n);
    fprintf(stream, HEAD "<!DOCTYPE trial [<!ENTITY a0 \"ha\">");
    for (int i = 1; i < 10; i++) {
        fprintf(stream, "<!ENTITY a%d \"", i);
        for (int k = 0; k < 10; k++)
            fprintf(stream, "&a%d;", i - 1);
        fprintf(stream, "\">");
    }
    fprintf(stream, "]><trial" NS " version=\"1.0\"><burst n=\"1\"><note>&a9;</note></burst></trial>");
    fclose(stream);
    refused(text, AN_E_DOCUMENT, "DOCTYPE");
    free(text);
}

/* n times a piece of text between two others, in a newer version so that the schema is not in the way. */
static char *repeated(const char *before, const char *piece, int n, const char *after)
{
    char *text = NULL;
    size_t n_text = 0;
    FILE *stream = open_memstream(&text, &n_text);
    fputs(before, stream);
    for (int i = 0; i < n; i++)
        fprintf(stream, piece, i);
    fputs(after, stream);
    fclose(stream);
    return text;
}

static void limits_name_themselves(void **state)
{
    char *text = repeated("<trial" NS " version=\"1.9\">", "<d>", 200, "");
    (void)state;
    refused(text, AN_E_LIMIT, "nest");
    free(text);
    text = repeated("<trial" NS " version=\"1.9\"", " a%d=\"\"", 100, "/>");
    refused(text, AN_E_LIMIT, "attributes");
    free(text);
    text = repeated("<trial" NS " version=\"1.9\"><d a=\"", "0123456789", 7000, "\"/></trial>");
    refused(text, AN_E_LIMIT, "attribute 'a'");
    free(text);
    text = repeated("<trial" NS " version=\"1.9\"><d>", "0123456789", 700000, "</d></trial>");
    refused(text, AN_E_LIMIT, "text of more than");
    free(text);
}

static void files_that_cannot_be_read_are_refused(void **state)
{
    an_xml_document document;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_xml_read("nowhere.xml", &(an_xml_reading){0}, &document, &err), AN_E_IO);
    assert_string_equal(err.place, "nowhere.xml");
    an_xml_document_clear(&document);
    assert_int_equal(an_xml_read("/", &(an_xml_reading){0}, &document, &err), AN_E_IO);
    an_xml_document_clear(&document);
}

/* ---- accessors ---- */

static void measures_arrive_in_si(void **state)
{
    const char *text =
        "<trial" NS
        " version=\"1.1\"><length value=\"12.4\" unit=\"mm\" u=\"0.02\"/><temperature value=\"25\" "
        "unit=\"degC\" u=\"0.5\"/><ratio value=\"0.35\"/><bare value=\"1\"/><wrong value=\"1\" unit=\"N\"/>"
        "<negative value=\"1\" unit=\"m\" u=\"-1\"/><text value=\"1,5\" unit=\"m\"/></trial>";
    an_xml_document document;
    an_measure m;
    an_error err = {0};
    (void)state;
    assert_int_equal(read_text(text, strlen(text), &(an_xml_reading){0}, &document, &err), AN_OK);
    const an_xml_node *root = document.root;
    assert_int_equal(an_xml_measure(root, "length", "m", &m, &err), AN_OK);
    assert_true(m.value == 0.0124 && m.u == 2e-5);
    assert_int_equal(an_xml_measure(root, "temperature", "K", &m, &err), AN_OK);
    assert_true(m.value == 298.15 && m.u == 0.5);
    assert_int_equal(an_xml_measure(root, "ratio", "1", &m, &err), AN_OK);
    assert_true(m.value == 0.35 && isnan(m.u));
    assert_int_equal(an_xml_measure_optional(root, "missing", "m", &m, &err), AN_OK);
    assert_true(isnan(m.value) && isnan(m.u));
    assert_int_equal(an_xml_measure(root, "missing", "m", &m, &err), AN_E_DOCUMENT);
    assert_non_null(strstr(err.text, "'missing'"));
    assert_int_equal(an_xml_measure(root, "bare", "m", &m, &err), AN_E_UNIT);
    assert_int_equal(an_xml_measure(root, "wrong", "m", &m, &err), AN_E_UNIT);
    assert_non_null(strstr(err.text, "'N'"));
    assert_int_equal(an_xml_measure(root, "negative", "m", &m, &err), AN_E_VALUE);
    assert_int_equal(an_xml_measure(root, "text", "m", &m, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "1,5"));
    an_xml_document_clear(&document);
}

static void attributes_are_read_or_refused_by_name(void **state)
{
    static const char *const words[] = {"up", "down", NULL};
    const char *text = "<trial" NS " version=\"1.1\" a=\"2.5\" n=\"12\" w=\"down\"/>", *got = NULL;
    an_xml_document document;
    double value = 0;
    int64_t n = 0;
    int word = -1;
    an_error err = {0};
    (void)state;
    assert_int_equal(read_text(text, strlen(text), &(an_xml_reading){0}, &document, &err), AN_OK);
    const an_xml_node *root = document.root;
    assert_int_equal(an_xml_double(root, "a", &value, &err), AN_OK);
    assert_true(value == 2.5);
    assert_int_equal(an_xml_double_or(root, "b", 7, &value, &err), AN_OK);
    assert_true(value == 7);
    assert_int_equal(an_xml_double(root, "w", &value, &err), AN_E_VALUE);
    assert_string_equal(err.place, "trial.xml:1");
    assert_string_equal(err.text, "trial: attribute 'w' is 'down'; allowed is a number with a decimal point");
    assert_int_equal(an_xml_integer(root, "n", 1, 12, &n, &err), AN_OK);
    assert_int_equal(n, 12);
    assert_int_equal(an_xml_integer(root, "n", 1, 11, &n, &err), AN_E_VALUE);
    assert_int_equal(an_xml_integer(root, "a", 1, 11, &n, &err), AN_E_VALUE);
    assert_int_equal(an_xml_word(root, "w", words, &word, &err), AN_OK);
    assert_int_equal(word, 1);
    assert_int_equal(an_xml_word(root, "n", words, &word, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "up, down"));
    assert_int_equal(an_xml_text(root, "zz", &got, &err), AN_E_DOCUMENT);
    an_xml_document_clear(&document);
}

/* ---- writing ---- */

static void what_is_written_reads_back(void **state)
{
    static const char odd[] = "<&>\"' \t\r\n\xc3\xa4\xe2\x84\x83\xf0\x9f\x94\xa9";
    char *text = NULL;
    size_t n = 0;
    an_xml_document document;
    an_error err = {0};
    (void)state;
    FILE *stream = open_memstream(&text, &n);
    an_xml_writer *writer = an_xml_writer_new(stream, "trial");
    an_xml_put(writer, "id", odd);
    an_xml_put(writer, "left-out", NULL);
    an_xml_put_double(writer, "unknown", NAN);
    an_xml_put_measure(writer, "length", (an_measure){0.0124, 2e-5}, "m");
    an_xml_put_measure(writer, "nothing", AN_MEASURE_NONE, "m");
    an_xml_start(writer, "burst");
    an_xml_put_integer(writer, "n", 1);
    an_xml_start(writer, "note");
    an_xml_put_text(writer, odd);
    an_xml_end(writer);
    assert_int_equal(an_xml_writer_finish(writer, &err), AN_OK);
    an_xml_writer_free(&writer);
    fclose(stream);
    assert_non_null(
        strstr(text, "\n  <length value=\"0.0124\" unit=\"m\" u=\"2e-05\"/>\n  <burst n=\"1\">\n    <note>"));
    assert_null(strstr(text, "unknown"));
    assert_null(strstr(text, "nothing"));
    assert_int_equal(read_text(text, n, &(an_xml_reading){.root = "trial"}, &document, &err), AN_OK);
    assert_string_equal(an_xml_attribute_of(document.root, "id"), odd);
    assert_string_equal(an_xml_child(an_xml_child(document.root, "burst"), "note")->text, odd);
    an_xml_document_clear(&document);
    free(text);
}

static void unwritable(const char *text, double value)
{
    char *out = NULL;
    size_t n = 0;
    an_error err = {0};
    FILE *stream = open_memstream(&out, &n);
    an_xml_writer *writer = an_xml_writer_new(stream, "trial");
    an_xml_put_double(writer, "value", value);
    an_xml_put_text(writer, text);
    assert_int_equal(an_xml_writer_finish(writer, &err), AN_E_VALUE);
    assert_true(err.text[0] != '\0');
    an_xml_writer_free(&writer);
    fclose(stream);
    free(out);
}

static void what_xml_cannot_hold_is_refused(void **state)
{
    (void)state;
    unwritable("\x01", 1);
    unwritable("\xff", 1);
    unwritable("\xc0\x80", 1);
    unwritable("\xed\xa0\x80", 1);
    unwritable("\xe2\x84", 1);
    unwritable("", INFINITY);
}

static void a_full_disk_is_found(void **state)
{
    an_error err = {0};
    (void)state;
    FILE *stream = fopen("/dev/full", "wb");
    an_xml_writer *writer = an_xml_writer_new(stream, "trial");
    assert_int_equal(an_xml_writer_finish(writer, &err), AN_E_IO);
    an_xml_writer_free(&writer);
    fclose(stream);
}

/* The test's schema lies beside a copy of the common one, in a folder that the environment names. */
static int enter(void **state)
{
    return scratch_enter_schema(state, "trial.xsd", test_schema);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_document_becomes_a_tree),
        cmocka_unit_test(bursts_are_handed_over_one_at_a_time),
        cmocka_unit_test(a_burst_that_is_not_valid_is_never_handed_over),
        cmocka_unit_test(what_is_not_valid_is_refused_by_place),
        cmocka_unit_test(what_is_not_whole_is_refused),
        cmocka_unit_test(other_versions_are_refused_by_name),
        cmocka_unit_test(a_root_without_schema_is_refused),
        cmocka_unit_test(a_newer_minor_version_is_taken),
        cmocka_unit_test(foreign_content_is_ignored),
        cmocka_unit_test(a_doctype_ends_the_reading),
        cmocka_unit_test(an_entity_bomb_does_not_unfold),
        cmocka_unit_test(limits_name_themselves),
        cmocka_unit_test(files_that_cannot_be_read_are_refused),
        cmocka_unit_test(measures_arrive_in_si),
        cmocka_unit_test(attributes_are_read_or_refused_by_name),
        cmocka_unit_test(what_is_written_reads_back),
        cmocka_unit_test(what_xml_cannot_hold_is_refused),
        cmocka_unit_test(a_full_disk_is_found),
    };
    return cmocka_run_group_tests(tests, enter, scratch_leave);
}
