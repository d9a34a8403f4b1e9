/* Signals: decoded to SI, written in parts, read with every check. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/signal.h"

#include "../check.h"
#include "scratch.h"

#define HEAD "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n"

/* A root that holds signals, for this test. */
static const char test_schema[] =
    HEAD "<xs:schema xmlns:xs=\"http://www.w3.org/2001/XMLSchema\" xmlns=\"urn:x-anelast:documents:1\""
         " targetNamespace=\"urn:x-anelast:documents:1\" elementFormDefault=\"qualified\">"
         "<xs:include schemaLocation=\"common.xsd\"/><xs:element name=\"trial\"><xs:complexType><xs:sequence>"
         "<xs:element ref=\"signal\" minOccurs=\"0\" maxOccurs=\"unbounded\"/></xs:sequence>"
         "<xs:attributeGroup ref=\"rootAttributes\"/></xs:complexType></xs:element></xs:schema>";

/* Write a signal as a document; returns its text, to be freed. */
static char *write_text(const an_signal *signal)
{
    char *text = NULL;
    size_t n = 0;
    an_error err = {0};
    FILE *stream = open_memstream(&text, &n);
    an_xml_writer *writer = an_xml_writer_new(stream, "trial");
    assert_int_equal(an_signal_write(writer, signal, NULL, &err), AN_OK);
    assert_int_equal(an_xml_writer_finish(writer, &err), AN_OK);
    an_xml_writer_free(&writer);
    fclose(stream);
    return text;
}

static an_status read_text(const char *text, an_signal *signal, an_error *err)
{
    an_xml_document document;
    FILE *stream = fmemopen((void *)(uintptr_t)text, strlen(text), "rb");
    an_status status =
        an_xml_read_stream(stream, "trial.xml", &(an_xml_reading){.root = "trial"}, &document, err);
    if (status == AN_OK)
        status = an_signal_read(an_xml_child(document.root, "signal"), signal, err);
    an_xml_document_clear(&document);
    fclose(stream);
    return status;
}

static void counts_become_si(void **state)
{
    an_signal s;
    double values[3];
    (void)state;
    assert_int_equal(an_signal_allocate(&s, AN_SIGNAL_FORCE, AN_CODING_INT16, 3, NULL), AN_OK);
    memcpy(s.data, (int16_t[]){-32768, 0, 32767}, 6);
    s.scale = 0.5;
    s.offset = 100;
    an_signal_decode(&s, values);
    assert_true(values[0] == -16284 && values[1] == 100 && values[2] == 16483.5);
    an_signal_clear(&s);
    assert_null(s.data);
}

/* 12.345 mm held as 12345 with six decimals of a metre must be the double nearest to 0.012345: one rounding.
 */
static void fixed_decimals_round_once(void **state)
{
    an_signal s;
    double values[2];
    (void)state;
    assert_int_equal(an_signal_allocate(&s, AN_SIGNAL_DISPLACEMENT, AN_CODING_INT32, 2, NULL), AN_OK);
    memcpy(s.data, (int32_t[]){12345, -7}, 8);
    s.divisor = 1e6;
    an_signal_decode(&s, values);
    assert_true(values[0] == 0.012345 && values[1] == -7e-6);
    an_signal_clear(&s);
}

static void every_coding_comes_back_bit_for_bit(void **state)
{
    (void)state;
    for (int coding = 0; coding < AN_N_CODINGS; coding++) {
        an_signal s, back;
        an_error err = {0};
        assert_int_equal(an_signal_allocate(&s, AN_SIGNAL_TEMPERATURE, (an_signal_coding)coding, 1001, &err),
                         AN_OK);
        size_t n = s.count * an_coding_size(s.coding);
        for (size_t i = 0; i < n; i++)
            ((unsigned char *)s.data)[i] = (unsigned char)(i * 131 + 7);
        s.scale = -0.1;
        s.divisor = 3;
        s.offset = 273.15;
        char *text = write_text(&s);
        if (read_text(text, &back, &err) != AN_OK)
            fail_msg("%s: %s", err.place, err.text);
        assert_true(back.quantity == s.quantity && back.coding == s.coding && back.count == s.count);
        assert_true(back.scale == s.scale && back.divisor == s.divisor && back.offset == s.offset);
        assert_memory_equal(back.data, s.data, n);
        an_signal_clear(&s);
        an_signal_clear(&back);
        free(text);
    }
}

/* The document says little-endian: the bytes of 1, 2, 3 as int16. */
static void bytes_are_little_endian(void **state)
{
    an_signal s;
    (void)state;
    assert_int_equal(an_signal_allocate(&s, AN_SIGNAL_FORCE, AN_CODING_INT16, 3, NULL), AN_OK);
    memcpy(s.data, (int16_t[]){1, 2, 3}, 6);
    char *text = write_text(&s);
    assert_non_null(strstr(text, ">AQACAAMA</part>"));
    an_signal_clear(&s);
    free(text);
}

static void long_signals_stand_in_parts(void **state)
{
    an_signal s, back;
    an_error err = {0};
    size_t longest = 0, n_parts = 0;
    (void)state;
    assert_int_equal(an_signal_allocate(&s, AN_SIGNAL_FORCE, AN_CODING_FLOAT64, 1000000, &err), AN_OK);
    for (size_t i = 0; i < s.count; i++)
        ((double *)s.data)[i] = sin((double)i);
    char *text = write_text(&s);
    for (const char *part = text; (part = strstr(part, "<part ")); n_parts++) {
        size_t n = strcspn(++part, "<");
        longest = n > longest ? n : longest;
    }
    assert_int_equal(n_parts, 3);
    assert_true(longest <= 4 * 1024 * 1024 + 100);
    assert_int_equal(read_text(text, &back, &err), AN_OK);
    assert_memory_equal(back.data, s.data, 8 * s.count);
    an_signal_clear(&s);
    an_signal_clear(&back);
    free(text);
}

static void an_empty_signal_is_a_signal(void **state)
{
    an_signal s, back;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_signal_allocate(&s, AN_SIGNAL_TEMPERATURE, AN_CODING_FLOAT32, 0, &err), AN_OK);
    char *text = write_text(&s);
    assert_int_equal(read_text(text, &back, &err), AN_OK);
    assert_int_equal(back.count, 0);
    an_signal_clear(&s);
    an_signal_clear(&back);
    free(text);
}

/* A signal of 1, 2, 3 with one piece of its text exchanged must be refused, and the message must name
 * something. */
static void refused(const char *piece, const char *other, an_status status, const char *named)
{
    an_signal s, back;
    an_error err = {0};
    assert_int_equal(an_signal_allocate(&s, AN_SIGNAL_FORCE, AN_CODING_INT16, 3, NULL), AN_OK);
    memcpy(s.data, (int16_t[]){1, 2, 3}, 6);
    char *text = write_text(&s), *changed = NULL;
    char *at = strstr(text, piece);
    assert_non_null(at);
    assert_true(asprintf(&changed, "%.*s%s%s", (int)(at - text), text, other, at + strlen(piece)) > 0);
    an_status got = read_text(changed, &back, &err);
    if (got != status || !strstr(err.text, named) || strncmp(err.place, "trial.xml:", 10) != 0)
        fail_msg("status %d, '%s: %s'; '%s' should be named", got, err.place, err.text, named);
    an_signal_clear(&s);
    free(text);
    free(changed);
}

static void what_does_not_fit_is_refused_by_place(void **state)
{
    (void)state;
    refused("AQACAAMA", "AQACAAQA", AN_E_DOCUMENT, "force, part 1: its bytes have SHA-256");
    refused("AQACAAMA", "AQACAA", AN_E_DOCUMENT, "parts hold");
    refused("AQACAAMA", "AQACAAMAAQACAAMA", AN_E_DOCUMENT, "parts hold 12 bytes");
    refused("AQACAAMA", "AQAC\nAAM", AN_E_DOCUMENT, "base64");
    refused("count=\"3\"", "count=\"4\"", AN_E_DOCUMENT, "4 samples of int16 are 8");
    refused("count=\"3\"", "count=\"68719476735\"", AN_E_DOCUMENT, "parts hold 6 bytes");
    refused("count=\"3\"", "count=\"-1\"", AN_E_DOCUMENT, "'-1'");
    refused("unit=\"N\"", "unit=\"mN\"", AN_E_UNIT, "'mN'");
    refused("scale=\"1\"", "scale=\"0\"", AN_E_VALUE, "scale");
    refused("coding=\"int16\"", "coding=\"int24\"", AN_E_DOCUMENT, "int24");
    refused("quantity=\"force\"", "quantity=\"farce\"", AN_E_DOCUMENT, "farce");
    refused("sha256=\"", "sha256=\"0", AN_E_DOCUMENT, "sha256");
}

static int enter(void **state)
{
    return scratch_enter_schema(state, "trial.xsd", test_schema);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(counts_become_si),
        cmocka_unit_test(fixed_decimals_round_once),
        cmocka_unit_test(every_coding_comes_back_bit_for_bit),
        cmocka_unit_test(bytes_are_little_endian),
        cmocka_unit_test(long_signals_stand_in_parts),
        cmocka_unit_test(an_empty_signal_is_a_signal),
        cmocka_unit_test(what_does_not_fit_is_refused_by_place),
    };
    return cmocka_run_group_tests(tests, enter, scratch_leave);
}
