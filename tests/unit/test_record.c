/* Provenance, remarks and choices: what a document says about how it was made. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/procedure.h"
#include "anelast/provenance.h"
#include "anelast/remark.h"

#include "../check.h"
#include "scratch.h"

#define HEAD  "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n"
#define ZEROS "0000000000000000000000000000000000000000000000000000000000000000"
#define ONES  "1111111111111111111111111111111111111111111111111111111111111111"

static const char test_schema[] =
    HEAD "<xs:schema xmlns:xs=\"http://www.w3.org/2001/XMLSchema\" xmlns=\"urn:x-anelast:documents:1\""
         " targetNamespace=\"urn:x-anelast:documents:1\" elementFormDefault=\"qualified\">"
         "<xs:include schemaLocation=\"common.xsd\"/><xs:element name=\"trial\"><xs:complexType><xs:sequence>"
         "<xs:element ref=\"made\" minOccurs=\"0\"/>"
         "<xs:element ref=\"remark\" minOccurs=\"0\" maxOccurs=\"unbounded\"/></xs:sequence>"
         "<xs:attributeGroup ref=\"rootAttributes\"/></xs:complexType></xs:element></xs:schema>";

/* ---- provenance ---- */

static void the_date_can_be_fixed(void **state)
{
    an_made made;
    an_error err = {0};
    (void)state;
    /* 2^30 s after 1970 began: 2004-01-10T13:37:04Z, as `date -u -d @1073741824` prints. */
    setenv("SOURCE_DATE_EPOCH", "1073741824", 1);
    assert_int_equal(an_made_init(&made, "anelast-phase", &err), AN_OK);
    assert_string_equal(made.at, "2004-01-10T13:37:04Z");
    assert_string_equal(made.version, ANELAST_VERSION);
    an_made_clear(&made);
    setenv("SOURCE_DATE_EPOCH", "yesterday", 1);
    assert_int_equal(an_made_init(&made, "anelast-phase", &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "yesterday"));
    an_made_clear(&made);
    setenv("SOURCE_DATE_EPOCH", "-5", 1);
    assert_int_equal(an_made_init(&made, "anelast-phase", &err), AN_E_VALUE);
    an_made_clear(&made);
    setenv("SOURCE_DATE_EPOCH", "1073741824", 1);
}

/* Write a document that holds a record and remarks. */
static void write_document(const char *path, const an_made *made, const an_remark_list *remarks)
{
    FILE *stream = fopen(path, "wb");
    an_xml_writer *writer = an_xml_writer_new(stream, "trial");
    an_error err = {0};
    if (made)
        an_made_write(writer, made);
    if (remarks)
        an_remark_list_write(writer, remarks, -1);
    assert_int_equal(an_xml_writer_finish(writer, &err), AN_OK);
    an_xml_writer_free(&writer);
    fclose(stream);
}

static void read_document(const char *path, an_xml_document *document)
{
    an_error err = {0};
    if (an_xml_read(path, &(an_xml_reading){.root = "trial"}, document, &err) != AN_OK)
        fail_msg("%s: %s", err.place, err.text);
}

static void a_record_comes_back(void **state)
{
    an_made made, back;
    an_xml_document document;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_made_init(&made, "anelast-phase", &err), AN_OK);
    assert_int_equal(an_made_add_input(&made, "dump", "/home/quay/pads/pad-0412.txt", ZEROS, &err), AN_OK);
    assert_int_equal(an_made_add_input(&made, "run", NULL, ONES, &err), AN_OK);
    assert_int_equal(an_made_add_number(&made, "settled_ratio", 0.005, "1", &err), AN_OK);
    assert_int_equal(an_made_add_word(&made, "law", "wlf", &err), AN_OK);
    write_document("made.xml", &made, NULL);
    read_document("made.xml", &document);
    assert_int_equal(an_made_read(document.root, &back, &err), AN_OK);
    assert_string_equal(back.by, "anelast-phase");
    assert_string_equal(back.at, made.at);
    assert_int_equal(back.n_inputs, 2);
    assert_string_equal(back.inputs[0].path, "pad-0412.txt");
    assert_string_equal(back.inputs[1].path, "-");
    assert_string_equal(back.inputs[1].sha256, ONES);
    assert_int_equal(back.n_choices, 2);
    assert_string_equal(back.choices[0].value, "0.005");
    assert_string_equal(back.choices[1].value, "wlf");
    assert_string_equal(back.choices[1].unit, "");
    an_made_clear(&made);
    an_made_clear(&back);
    an_xml_document_clear(&document);
}

/* run <- points <- grid: the grid's chain names the run's maker, then the points' maker, each once. */
static void the_chain_grows_by_one_maker_a_stage(void **state)
{
    an_made run, points, read, grid;
    an_xml_document document;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_made_init(&run, "anelast-intake", &err), AN_OK);
    assert_int_equal(an_made_init(&points, "anelast-phase", &err), AN_OK);
    assert_int_equal(an_made_extend(&points, &run, ZEROS, &err), AN_OK);
    write_document("points.xml", &points, NULL);
    read_document("points.xml", &document);
    assert_int_equal(an_made_init(&grid, "anelast-grid", &err), AN_OK);
    assert_int_equal(an_made_read(document.root, &read, &err), AN_OK);
    for (int i = 0; i < 2; i++)
        assert_int_equal(an_made_stand_on(&grid, document.root->name, document.file, &read, document.sha256, &err),
                         AN_OK);
    assert_int_equal(grid.n_inputs, 2);
    assert_string_equal(grid.inputs[0].role, "trial");
    assert_string_equal(grid.inputs[0].path, "points.xml");
    assert_string_equal(grid.inputs[0].sha256, document.sha256);
    assert_int_equal(grid.n_chain, 2);
    assert_string_equal(grid.chain[0].by, "anelast-intake");
    assert_string_equal(grid.chain[0].sha256, ZEROS);
    assert_string_equal(grid.chain[1].by, "anelast-phase");
    an_made_clear(&run);
    an_made_clear(&points);
    an_made_clear(&read);
    an_made_clear(&grid);
    an_xml_document_clear(&document);
}

/* A text as a document must be refused by its schema, and the message must name something. */
static void not_valid(const char *root, const char *text, const char *named)
{
    an_xml_document document;
    an_error err = {0};
    scratch_write("bad.xml", text);
    an_status status = an_xml_read("bad.xml", &(an_xml_reading){.root = root}, &document, &err);
    if (status != AN_E_DOCUMENT || !strstr(err.text, named))
        fail_msg("status %d, '%s'; '%s' should be named", status, err.text, named);
    an_xml_document_clear(&document);
}

static void the_schema_refuses_what_is_ambiguous(void **state)
{
#define TRIAL(content) "<trial xmlns=\"urn:x-anelast:documents:1\" version=\"1.0\">" content "</trial>"
#define PROCEDURE(content)                                                                                   \
    "<procedure xmlns=\"urn:x-anelast:documents:1\" version=\"1.0\">" content "</procedure>"
    (void)state;
    not_valid("trial", TRIAL("<made by=\"a\" version=\"1\" at=\"2026-03-02T21:40:00\"/>"),
              "2026-03-02T21:40:00");
    not_valid("trial", TRIAL("<made by=\"a\" version=\"1\" at=\"02.03.2026\"/>"), "02.03.2026");
    not_valid("trial",
              TRIAL("<made by=\"a\" version=\"1\" at=\"2026-03-02T21:40:00Z\"><input role=\"run\" "
                    "path=\"../x\" sha256=\"" ZEROS "\"/></made>"),
              "../x");
    not_valid("trial", TRIAL("<remark code=\"gap\" severity=\"grave\">x</remark>"), "grave");
    not_valid("trial", TRIAL("<remark code=\"gap\" severity=\"flag\" burst=\"0\">x</remark>"), "'0'");
    not_valid("procedure",
              PROCEDURE("<choice name=\"law\" value=\"wlf\"/><choice name=\"law\" value=\"vft\"/>"),
              "choiceName");
    not_valid("procedure", PROCEDURE("<choise name=\"law\" value=\"wlf\"/>"), "choise");
}

static void a_document_without_record_says_so(void **state)
{
    an_made made;
    an_xml_document document;
    an_error err = {0};
    (void)state;
    write_document("bare.xml", NULL, NULL);
    read_document("bare.xml", &document);
    assert_int_equal(an_made_read(document.root, &made, &err), AN_E_DOCUMENT);
    assert_non_null(strstr(err.text, "'made'"));
    an_xml_document_clear(&document);
}

/* ---- remarks ---- */

static void every_remark_says_what_to_do(void **state)
{
    const an_remark_kind *a;
    (void)state;
    for (size_t i = 0; (a = an_remark_kind_row(i)); i++) {
        size_t n = strspn(a->code, "abcdefghijklmnopqrstuvwxyz0123456789-");
        assert_int_equal(a->code[n], '\0');
        assert_true(strlen(a->message) > 5 && a->message[strlen(a->message) - 1] != '.');
        assert_true(a->action[strlen(a->action) - 1] == '.');
        assert_ptr_equal(an_remark_kind_find(a->code), a);
    }
    assert_null(an_remark_kind_find("no-such-code"));
}

static void remarks_are_counted_by_burst_and_weight(void **state)
{
    an_remark_list list = {0};
    an_error err = {0};
    (void)state;
    assert_int_equal(an_remark_list_worst(&list, -1), -1);
    assert_int_equal(
        an_remark_list_add(&list, "low-snr", 3, &err, "force stands %.1f dB above its noise", 34.1), AN_OK);
    assert_int_equal(an_remark_list_add(&list, "missing-values", 3, &err, "%d samples are marked", 12), AN_OK);
    assert_int_equal(an_remark_list_add(&list, "truncated", 0, &err, "it ends at byte 812"), AN_OK);
    assert_int_equal(an_remark_list_add_as(&list, "low-snr", AN_NOTE, 4, &err, "as weak as this"), AN_OK);
    assert_int_equal(an_remark_list_add(&list, "no-such-code", 1, &err, "x"), AN_E_USAGE);
    assert_int_equal(list.n, 4);
    assert_string_equal(list.rows[0].text, "force stands 34.1 dB above its noise");
    assert_int_equal(an_remark_list_count(&list, AN_FLAG, -1), 1);
    assert_int_equal(an_remark_list_count(&list, AN_SKIP, 3), 1);
    assert_int_equal(an_remark_list_count(&list, AN_SKIP, 4), 0);
    assert_int_equal(an_remark_list_worst(&list, 3), AN_SKIP);
    assert_int_equal(an_remark_list_worst(&list, 4), AN_NOTE);
    assert_int_equal(an_remark_list_worst(&list, -1), AN_HOLD);
    assert_true(an_remark_list_has(&list, "truncated", 0));
    assert_false(an_remark_list_has(&list, "truncated", 3));
    an_remark_list_clear(&list);
    assert_int_equal(list.n, 0);
}

static void remarks_come_back(void **state)
{
    an_remark_list list = {0}, back = {0};
    an_xml_document document;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_remark_list_add(&list, "slack", 7, &err, "the least force is -0.02 N, <1 & bad>"),
                     AN_OK);
    assert_int_equal(an_remark_list_add(&list, "gap", 0, &err, "nothing for 41 min"), AN_OK);
    write_document("remarks.xml", NULL, &list);
    read_document("remarks.xml", &document);
    assert_int_equal(an_remark_list_read(document.root, &back, &err), AN_OK);
    assert_int_equal(back.n, 2);
    for (size_t i = 0; i < 2; i++) {
        assert_ptr_equal(back.rows[i].kind, list.rows[i].kind);
        assert_int_equal(back.rows[i].severity, list.rows[i].severity);
        assert_int_equal(back.rows[i].burst, list.rows[i].burst);
        assert_string_equal(back.rows[i].text, list.rows[i].text);
    }
    an_xml_document_clear(&document);
    an_remark_list_clear(&list);
    an_remark_list_clear(&back);
}

static void a_code_from_a_newer_maker_is_kept(void **state)
{
    an_remark_list list = {0};
    an_xml_document document;
    an_error err = {0};
    (void)state;
    scratch_write("newer.xml",
                  "<trial xmlns=\"urn:x-anelast:documents:1\" version=\"1.0\">"
                  "<remark code=\"moon-phase\" severity=\"hold\" burst=\"5\">full</remark></trial>");
    read_document("newer.xml", &document);
    assert_int_equal(an_remark_list_read(document.root, &list, &err), AN_OK);
    assert_string_equal(list.rows[0].kind->code, "other-remark");
    assert_string_equal(list.rows[0].text, "moon-phase: full");
    assert_int_equal(list.rows[0].severity, AN_HOLD);
    an_xml_document_clear(&document);
    an_remark_list_clear(&list);
}

/* ---- choices ---- */

static void every_choice_is_within_its_own_range(void **state)
{
    const an_choice *row;
    an_procedure procedure;
    an_error err = {0};
    (void)state;
    an_procedure_init(&procedure);
    for (size_t i = 0; (row = an_choice_row(i)); i++) {
        if (an_procedure_set(&procedure, row->name, row->standard, row->unit, &err) != AN_OK)
            fail_msg("%s", err.text);
        bool number = !isnan(an_procedure_number(&procedure, row->name));
        bool word = *an_procedure_word(&procedure, row->name) != '\0';
        assert_true(number != word);
        assert_true(row->unit || row->words);
        assert_true(strlen(row->help) > 10 && strlen(row->source) > 3 && strlen(row->stage) > 3);
        assert_true(row->help[strlen(row->help) - 1] != '.');
    }
}

/* The defaults that the science fixes, in SI. */
static void defaults_are_in_si(void **state)
{
    an_procedure p;
    (void)state;
    an_procedure_init(&p);
    assert_close(an_procedure_number(&p, "settled_ratio"), 0.005, 0);
    assert_close(an_procedure_number(&p, "settled_angle"), 0.1 * M_PI / 180, 1e-18);
    assert_close(an_procedure_number(&p, "isotherm_drift"), 0.1 / 60, 1e-18);
    assert_close(an_procedure_number(&p, "isotherm_width"), 0.5, 0);
    assert_close(an_procedure_number(&p, "snr_flag"), 40, 0);
    assert_true(isnan(an_procedure_number(&p, "reference_temperature")));
    assert_true(an_procedure_is(&p, "reference_temperature", "auto"));
    assert_true(an_procedure_is(&p, "override_complex", "no"));
    assert_true(isnan(an_procedure_number(&p, "no_such_choice")));
    assert_string_equal(an_procedure_word(&p, "no_such_choice"), "");
}

static void refused(const char *name, const char *text, const char *unit, an_status status, const char *named)
{
    an_procedure p;
    an_error err = {0};
    an_procedure_init(&p);
    an_status got = an_procedure_set(&p, name, text, unit, &err);
    if (got != status || !strstr(err.text, named))
        fail_msg("%s = %s: status %d, '%s'; '%s' should be named", name, text, got, err.text, named);
}

static void choices_are_set_in_any_unit_or_refused(void **state)
{
    an_procedure p;
    (void)state;
    an_procedure_init(&p);
    assert_int_equal(an_procedure_set(&p, "settled_ratio", "0.4 %", NULL, NULL), AN_OK);
    assert_close(an_procedure_number(&p, "settled_ratio"), 0.004, 1e-18);
    assert_int_equal(an_procedure_set(&p, "reference_temperature", "20", "Cel", NULL), AN_OK);
    assert_close(an_procedure_number(&p, "reference_temperature"), 293.15, 1e-12);
    assert_int_equal(an_procedure_set(&p, "isotherm_width", "0.8", NULL, NULL), AN_OK);
    assert_close(an_procedure_number(&p, "isotherm_width"), 0.8, 0);
    assert_int_equal(an_procedure_set(&p, "law", "wlf", NULL, NULL), AN_OK);
    assert_true(an_procedure_is(&p, "law", "wlf"));
    refused("settled_ration", "1", NULL, AN_E_USAGE, "settled_ration");
    refused("settled_ratio", "2", NULL, AN_E_VALUE, "0 to 1");
    refused("settled_ratio", "0,4", NULL, AN_E_VALUE, "0,4");
    refused("settled_ratio", "1", "mm", AN_E_UNIT, "'mm'");
    refused("isotherm_width", "0.5", "Cel", AN_E_UNIT, "difference");
    refused("law", "wlff", NULL, AN_E_VALUE, "auto wlf arrhenius");
    refused("law", "1", NULL, AN_E_VALUE, "one of");
    refused("reference_temperature", "-300", "Cel", AN_E_VALUE, "1 to 2000 K");
}

static void the_written_procedure_reads_back_the_same(void **state)
{
    an_procedure p, back;
    an_error err = {0};
    (void)state;
    an_procedure_init(&p);
    assert_int_equal(an_procedure_set(&p, "settled_angle", "0.07", "deg", &err), AN_OK);
    assert_int_equal(an_procedure_set(&p, "reference_temperature", "20", "degC", &err), AN_OK);
    FILE *stream = fopen("procedure.xml", "wb");
    assert_int_equal(an_procedure_write(&p, stream, &err), AN_OK);
    fclose(stream);
    if (an_procedure_read("procedure.xml", &back, &err) != AN_OK)
        fail_msg("%s: %s", err.place, err.text);
    for (size_t i = 0; an_choice_row(i); i++) {
        assert_string_equal(back.values[i].word, p.values[i].word);
        assert_memory_equal(&back.values[i].number, &p.values[i].number, sizeof(double));
    }
    char *text = scratch_read("procedure.xml");
    assert_non_null(strstr(text, "name=\"settled_angle\" value=\"0.07\" unit=\"deg\""));
    assert_non_null(strstr(text, "name=\"isotherm_drift\" value=\"0.1\" unit=\"K/min\""));
    assert_non_null(strstr(text, "name=\"reference_temperature\" value=\"293.15\" unit=\"K\""));
    free(text);
}

static void a_mistyped_choice_in_a_document_is_refused(void **state)
{
    an_procedure p;
    an_error err = {0};
    (void)state;
    scratch_write("typo.xml", "<procedure xmlns=\"urn:x-anelast:documents:1\" version=\"1.0\">\n"
                              "<choice name=\"settled_ration\" value=\"0.1\"/></procedure>");
    assert_int_equal(an_procedure_read("typo.xml", &p, &err), AN_E_VALUE);
    assert_string_equal(err.place, "typo.xml:2");
    assert_non_null(strstr(err.text, "settled_ration"));
    scratch_write(
        "newer.xml",
        "<procedure xmlns=\"urn:x-anelast:documents:1\" version=\"1.1\">"
        "<choice name=\"settled_ration\" value=\"0.1\"/><choice name=\"law\" value=\"vft\"/></procedure>");
    assert_int_equal(an_procedure_read("newer.xml", &p, &err), AN_OK);
    assert_true(p.newer && an_procedure_is(&p, "law", "vft"));
}

static void what_was_in_force_is_recorded_by_stage(void **state)
{
    an_procedure p;
    an_made made;
    an_error err = {0};
    (void)state;
    scratch_write("procedure.xml", "<procedure xmlns=\"urn:x-anelast:documents:1\" version=\"1.0\">"
                                   "<choice name=\"isotherm_width\" value=\"0.8\" unit=\"K\"/></procedure>");
    assert_int_equal(an_procedure_read("procedure.xml", &p, &err), AN_OK);
    assert_int_equal(an_made_init(&made, "anelast-grid", &err), AN_OK);
    assert_int_equal(an_procedure_record(&p, "grid", &made, &err), AN_OK);
    assert_int_equal(an_procedure_record(&p, "superpose", &made, &err), AN_OK);
    assert_int_equal(made.n_inputs, 1);
    assert_string_equal(made.inputs[0].role, "procedure");
    assert_string_equal(made.inputs[0].path, "procedure.xml");
    bool width = false, law = false;
    for (size_t i = 0; i < made.n_choices; i++) {
        width |= strcmp(made.choices[i].name, "isotherm_width") == 0 &&
                 strcmp(made.choices[i].value, "0.8") == 0 && strcmp(made.choices[i].unit, "K") == 0;
        law |= strcmp(made.choices[i].name, "law") == 0 && strcmp(made.choices[i].value, "auto") == 0;
        assert_string_not_equal(made.choices[i].name, "settled_ratio");
    }
    assert_true(width && law);
    an_made_clear(&made);
}

static int enter(void **state)
{
    if (scratch_enter(state) != 0)
        return -1;
    static const char *const names[] = {"common.xsd", "procedure.xsd"};
    for (int i = 0; i < 2; i++) {
        char path[400];
        snprintf(path, sizeof path, ANELAST_SOURCE "/include/anelast/schema/%s", names[i]);
        char *text = scratch_read(path);
        scratch_write(names[i], text);
        free(text);
    }
    scratch_write("trial.xsd", test_schema);
    return setenv("ANELAST_SCHEMA_DIR", ".", 1);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_date_can_be_fixed),
        cmocka_unit_test(a_record_comes_back),
        cmocka_unit_test(the_chain_grows_by_one_maker_a_stage),
        cmocka_unit_test(the_schema_refuses_what_is_ambiguous),
        cmocka_unit_test(a_document_without_record_says_so),
        cmocka_unit_test(every_remark_says_what_to_do),
        cmocka_unit_test(remarks_are_counted_by_burst_and_weight),
        cmocka_unit_test(remarks_come_back),
        cmocka_unit_test(a_code_from_a_newer_maker_is_kept),
        cmocka_unit_test(every_choice_is_within_its_own_range),
        cmocka_unit_test(defaults_are_in_si),
        cmocka_unit_test(choices_are_set_in_any_unit_or_refused),
        cmocka_unit_test(the_written_procedure_reads_back_the_same),
        cmocka_unit_test(a_mistyped_choice_in_a_document_is_refused),
        cmocka_unit_test(what_was_in_force_is_recorded_by_stage),
    };
    return cmocka_run_group_tests(tests, enter, scratch_leave);
}
