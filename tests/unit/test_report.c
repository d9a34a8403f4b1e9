/* The page, from documents built here: a rubber of the Lower Quay Works' rail pads with a WLF shift and three
 * Maxwell modes, or a material whose isotherms do not superpose. Outside sources: well-formed by a general
 * XML parser (libxml2); contents asked for by XPath; that a page must not load anything is the rule of this
 * project, checked over every attribute that HTML lets load something (WHATWG HTML, sec. 4). Set
 * ANELAST_KEEP=FILE to keep the page for looking at. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "report_scene.h"

#include <libxml/parser.h>
#include <libxml/xpath.h>
#include <libxml/xpathInternals.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

/* The page of a scene; free with free. */
static char *page_of(const scene *s)
{
    setenv("SOURCE_DATE_EPOCH", "1795000000", 1);
    an_report report;
    an_made made = {0};
    an_error err = {0};
    char *text = NULL;
    size_t size = 0;
    build(&report, s);
    assert_int_equal(an_made_init(&made, "anelast-report", &err), AN_OK);
    FILE *out = open_memstream(&text, &size);
    an_status status = an_report_write(&report, &made, out, &err);
    fclose(out);
    if (status != AN_OK)
        fail_msg("%s", err.text);
    an_made_clear(&made);
    an_report_clear(&report);
    return text;
}

static const scene whole = {true, true, true, true, AN_SIMPLE, "Rail pad rubber & <cord>", 0, NULL};

/* The page taken apart by a general XML parser. */
typedef struct parsed {
    char *text;
    xmlDoc *doc;
    xmlXPathContext *context;
} parsed;

static parsed parse_scene(const scene *s)
{
    parsed page = {.text = page_of(s)};
    page.doc = xmlReadMemory(page.text, (int)strlen(page.text), "page", NULL, XML_PARSE_NONET);
    assert_non_null(page.doc);
    page.context = xmlXPathNewContext(page.doc);
    xmlXPathRegisterNs(page.context, BAD_CAST "h", BAD_CAST "http://www.w3.org/1999/xhtml");
    xmlXPathRegisterNs(page.context, BAD_CAST "s", BAD_CAST "http://www.w3.org/2000/svg");
    return page;
}

static void parsed_clear(parsed *page)
{
    xmlXPathFreeContext(page->context);
    xmlFreeDoc(page->doc);
    free(page->text);
}

static int count_nodes(const parsed *page, const char *path)
{
    xmlXPathObject *found = xmlXPathEvalExpression(BAD_CAST path, page->context);
    assert_non_null(found);
    int n = found->nodesetval ? found->nodesetval->nodeNr : 0;
    xmlXPathFreeObject(found);
    return n;
}

static void check_ids_are_unique(const parsed *page)
{
    xmlXPathObject *found = xmlXPathEvalExpression(BAD_CAST "//@id", page->context);
    const xmlNodeSet *ids = found->nodesetval;
    assert_true(ids->nodeNr > 20);
    for (int i = 0; i < ids->nodeNr; i++)
        for (int k = 0; k < i; k++)
            assert_string_not_equal((const char *)ids->nodeTab[i]->children->content,
                                    (const char *)ids->nodeTab[k]->children->content);
    xmlXPathFreeObject(found);
}

static void keep(const char *text)
{
    const char *path = getenv("ANELAST_KEEP");
    FILE *out = path ? fopen(path, "w") : NULL;
    if (out) {
        fputs(text, out);
        fclose(out);
    }
}

static void test_whole_page(void **state)
{
    (void)state;
    parsed page = parse_scene(&whole);
    char *again = page_of(&whole);
    keep(page.text);
    assert_string_equal(page.text, again);
    free(again);
    assert_int_equal(count_nodes(&page, "//h:header/h:section[contains(@class, 'partial')]"), 1);
    assert_int_equal(count_nodes(&page, "//h:header//h:li[.='Measure again: 1 Hz at 10 °C.']"), 1);
    assert_int_equal(count_nodes(&page, "//h:figure"), 11);
    assert_int_equal(count_nodes(&page, "//h:figure/s:svg[s:title]"), 11);
    assert_int_equal(count_nodes(&page, "//h:figure[not(h:figcaption)]"), 0);
    assert_int_equal(count_nodes(&page, "//h:section[h:h2='Waveform']//h:figure"), 2);
    /* eight that hold for any material, and what this material says of itself */
    assert_int_equal(
        count_nodes(&page, "//h:section[h:h2='Cautions']//h:li[contains(., 'tension moduli E')]"), 1);
    assert_true(count_nodes(&page, "//h:section[h:h2='Cautions']//h:li") > 8);
    assert_int_equal(count_nodes(&page, "//h:table[h:caption='Points']/h:tbody/h:tr"),
                     TEMPERATURES * FREQUENCIES);
    assert_int_equal(count_nodes(&page, "//h:table[h:caption='Shift factors']/h:tbody/h:tr"), TEMPERATURES);
    assert_int_equal(count_nodes(&page, "//h:tr[h:td='thickness' and h:td='common']"), 1);
    assert_int_equal(count_nodes(&page, "//h:td[.='the glassy side was not measured']"), 1);
    check_ids_are_unique(&page);
    parsed_clear(&page);
}

static void test_rows_have_as_many_cells_as_heads(void **state)
{
    (void)state;
    parsed page = parse_scene(&whole);
    assert_int_equal(
        count_nodes(&page, "//h:table[h:tbody/h:tr[count(h:td) != count(../../h:thead/h:tr/h:th)]]"), 0);
    assert_true(count_nodes(&page, "//h:table/h:tbody/h:tr") > 60);
    parsed_clear(&page);
}

static void test_untrusted_modes_differ_by_shape(void **state)
{
    (void)state;
    parsed page = parse_scene(&whole);
    /* trusted modes are circles; the others paths (crosses), in the same figure, on a hatched ground */
    assert_int_equal(count_nodes(&page, "//s:svg[s:title[starts-with(., 'Handed-over')]]//s:circle[s:title]"),
                     6);
    assert_int_equal(count_nodes(&page, "//s:svg[s:title[starts-with(., 'Handed-over')]]//s:path[s:title]"),
                     3);
    assert_int_equal(
        count_nodes(
            &page,
            "//s:svg[s:title[starts-with(., 'Handed-over')]]//s:rect[contains(@fill, 'hatch')]/s:title"),
        2);
    parsed_clear(&page);
}

static void test_nothing_is_loaded_or_run(void **state)
{
    (void)state;
    parsed page = parse_scene(&whole);
    assert_int_equal(
        count_nodes(&page,
                    "//h:script|//s:script|//h:link|//h:img|//s:image|//h:iframe|//h:object|//h:embed"),
        0);
    assert_int_equal(count_nodes(&page, "//@src|//@href|//@srcset|//@action|//@onload|//@onclick|//@style"),
                     0);
    assert_null(strstr(page.text, "@import"));
    for (const char *at = strstr(page.text, "url("); at; at = strstr(at + 1, "url("))
        assert_int_equal(at[4], '#');
    parsed_clear(&page);
}

static void test_everything_is_escaped(void **state)
{
    (void)state;
    scene s = whole;
    s.name = evil;
    parsed page = parse_scene(&s);
    assert_null(strstr(page.text, "<script"));
    assert_int_equal(count_nodes(&page, "//h:h1[contains(., '<script>')]"), 1);
    assert_int_equal(count_nodes(&page, "//h:title[contains(., '<script>')]"), 1);
    assert_int_equal(count_nodes(&page, "//h:td[contains(., '<script>')]"), 2); /* a remark and a choice */
    assert_int_equal(count_nodes(&page, "//h:li[contains(., '<script>')]"), 1); /* a reason */
    parsed_clear(&page);
}

static void test_a_complex_material_has_no_spectrum_and_says_why(void **state)
{
    (void)state;
    const scene s = {true, true, true, false, AN_COMPLEX, "Hull core", 0, NULL};
    parsed page = parse_scene(&s);
    assert_int_equal(
        count_nodes(&page, "//h:header//h:p[@class='absent' and contains(., 'do not superpose')]"), 1);
    assert_int_equal(count_nodes(&page, "//h:section[h:h2='Spectrum']//h:p[@class='absent']"), 1);
    assert_int_equal(count_nodes(&page, "//h:p[contains(., 'complex') and contains(., '470')]"), 2);
    assert_int_equal(count_nodes(&page, "//h:figcaption[contains(., 'not to be used')]"), 1);
    parsed_clear(&page);
}

static void test_points_alone(void **state)
{
    (void)state;
    const scene s = {false, false, false, false, AN_SIMPLE, "", 0, NULL};
    parsed page = parse_scene(&s);
    assert_int_equal(count_nodes(&page, "//h:header//h:p[@class='word' and .='No verdict']"), 1);
    assert_int_equal(count_nodes(&page, "//h:section[h:h2='Waveform']/h:p[@class='absent']"), 1);
    assert_int_equal(count_nodes(&page, "//h:section[h:h2='Superposition']/h:p[@class='absent']"), 1);
    assert_int_equal(count_nodes(&page, "//h:figure"), 4);
    /* 41 bursts that were not skipped; each is drawn as a circle or, flagged, as a cross */
    assert_int_equal(
        count_nodes(&page, "//s:svg[contains(s:title, 'over the magnitude')]//s:circle[s:title]"), 40);
    parsed_clear(&page);
}

static void test_a_long_hold_is_thinned_out_and_not_fitted(void **state)
{
    (void)state;
    enum { LONG = 5000 };
    const scene s = {.run = true, .name = "Pad", .hold = LONG};
    parsed page = parse_scene(&s);
    /* every third sample: the least step that leaves at most 2000 */
    assert_int_equal(count_nodes(&page, "//s:svg[starts-with(s:title, 'Waveforms')]//s:circle"),
                     2 * ((LONG + 2) / 3) + 1); /* and one in the legend */
    assert_int_equal(count_nodes(&page, "//s:svg[starts-with(s:title, 'Force over')]"), 0);
    assert_null(strstr(page.text, "fitted"));
    parsed_clear(&page);
}

static void test_what_is_missing_is_said_with_its_reason(void **state)
{
    (void)state;
    const scene s = {
        .run = true, .grid = true, .name = "Pad", .missing = "master=isotherms 3 and 4 <do not overlap>"};
    parsed page = parse_scene(&s);
    /* at the verdict, where the master curve would stand, and where the spectrum that needs it would */
    assert_int_equal(
        count_nodes(&page, "//h:p[@class='absent' and contains(., 'Isotherms 3 and 4 <do not overlap>.')]"),
        3);
    parsed_clear(&page);

    an_report report;
    an_error err = {0};
    an_report_init(&report);
    static const char *const wrong[] = {"", "master", "master=", "masters=x", "specimen=x"};
    for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++)
        assert_int_equal(an_report_say_missing(&report, wrong[i], &err), AN_E_USAGE);
    an_report_clear(&report);
}

static void test_no_document_is_refused(void **state)
{
    (void)state;
    an_report report;
    an_made made = {0};
    an_error err = {0};
    an_report_init(&report);
    assert_int_equal(an_report_write(&report, &made, stderr, &err), AN_E_USAGE);
    an_report_clear(&report);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_whole_page),
        cmocka_unit_test(test_rows_have_as_many_cells_as_heads),
        cmocka_unit_test(test_untrusted_modes_differ_by_shape),
        cmocka_unit_test(test_nothing_is_loaded_or_run),
        cmocka_unit_test(test_everything_is_escaped),
        cmocka_unit_test(test_a_complex_material_has_no_spectrum_and_says_why),
        cmocka_unit_test(test_points_alone),
        cmocka_unit_test(test_a_long_hold_is_thinned_out_and_not_fitted),
        cmocka_unit_test(test_what_is_missing_is_said_with_its_reason),
        cmocka_unit_test(test_no_document_is_refused),
    };
    int failed = cmocka_run_group_tests(tests, NULL, NULL);
    xmlCleanupParser();
    return failed;
}
