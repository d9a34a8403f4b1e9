/* The figure module. Outside sources: the SVG must be well-formed by a general XML parser (libxml2), contrast
 * is the formula of WCAG 2.2 (W3C, 'relative luminance' and success criteria 1.4.3 and 1.4.11), lightness is
 * OKLab's [OKLAB], read back here from the bytes of the colours. The stored figure in tests/unit/expected was
 * looked at in a browser; to renew it set ANELAST_RENEW=1 and look again. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/figure.h"

#include <libxml/parser.h>
#include <libxml/xpath.h>
#include <libxml/xpathInternals.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define STORED ANELAST_SOURCE "/tests/unit/expected/figure.svg"

/* A figure as text; free with free. */
static char *text_of(an_figure *figure)
{
    char *text = NULL;
    size_t size = 0;
    FILE *out = open_memstream(&text, &size);
    an_error err = {0};
    assert_int_equal(an_figure_write(figure, out, &err), AN_OK);
    assert_int_equal(fclose(out), 0);
    return text;
}

static an_figure *new_figure(an_axis_scale x_scale)
{
    an_figure *figure = NULL;
    an_figure_spec spec = {
        .id = "f", .title = "Test", .x = {.label = "x (s)", .symbol = "x", .unit = "s", .scale = x_scale}};
    assert_int_equal(an_figure_new(&figure, &spec, NULL), AN_OK);
    return figure;
}

/* The number of nodes that an XPath finds; fails where the text is not well-formed. */
static int count_nodes(const char *text, const char *path)
{
    xmlDoc *doc = xmlReadMemory(text, (int)strlen(text), "figure", NULL, XML_PARSE_NONET);
    assert_non_null(doc);
    xmlXPathContext *context = xmlXPathNewContext(doc);
    xmlXPathRegisterNs(context, BAD_CAST "s", BAD_CAST "http://www.w3.org/2000/svg");
    xmlXPathObject *found = xmlXPathEvalExpression(BAD_CAST path, context);
    assert_non_null(found);
    int n = found->nodesetval ? found->nodesetval->nodeNr : 0;
    xmlXPathFreeObject(found);
    xmlXPathFreeContext(context);
    xmlFreeDoc(doc);
    return n;
}

static double linear_of(unsigned byte)
{
    double c = byte / 255.0;
    return c <= 0.04045 ? c / 12.92 : pow((c + 0.055) / 1.055, 2.4);
}

static double contrast_on_white(uint32_t rgb)
{
    double luminance =
        0.2126 * linear_of(rgb >> 16) + 0.7152 * linear_of(rgb >> 8 & 255) + 0.0722 * linear_of(rgb & 255);
    return 1.05 / (luminance + 0.05);
}

static double oklab_lightness(uint32_t rgb)
{
    double r = linear_of(rgb >> 16), g = linear_of(rgb >> 8 & 255), b = linear_of(rgb & 255);
    double l = cbrt(0.4122214708 * r + 0.5363325363 * g + 0.0514459929 * b);
    double m = cbrt(0.2119034982 * r + 0.6806995451 * g + 0.1073969566 * b);
    double s = cbrt(0.0883024619 * r + 0.2817188376 * g + 0.6299787005 * b);
    return 0.2104542553 * l + 0.7936177850 * m - 0.0040720468 * s;
}

/* Lightness along a ramp runs evenly from end to end, and no colour is too light to be seen. */
static void check_ramp(uint32_t (*color)(double))
{
    double first = oklab_lightness(color(0)), last = oklab_lightness(color(1));
    assert_true(fabs(last - first) > 0.3);
    for (int k = 0; k <= 64; k++) {
        double even = first + (last - first) * k / 64;
        /* one step of an eight-bit channel moves lightness by up to 0.004 */
        assert_true(fabs(oklab_lightness(color(k / 64.0)) - even) < 0.004);
        assert_true(contrast_on_white(color(k / 64.0)) >= 3); /* WCAG 1.4.11, graphical objects */
    }
}

static void test_ramps_are_ordered_by_lightness_and_dark_enough(void **state)
{
    (void)state;
    check_ramp(an_ramp_color);
    check_ramp(an_tone_color);
    assert_int_equal(an_ramp_color(-1), an_ramp_color(0));
    assert_int_equal(an_ramp_color(7), an_ramp_color(1));
    assert_int_equal(an_ramp_color(NAN), AN_COLOR_MUTED);
    assert_true(an_ramp_fraction(300, 300, 300) == 0.5);
    assert_true(an_ramp_fraction(310, 300, 340) == 0.25);
}

static void test_fixed_colors_are_readable(void **state)
{
    (void)state;
    static const uint32_t colors[] = {AN_COLOR_INK, AN_COLOR_FIRST, AN_COLOR_SECOND, AN_COLOR_MUTED};
    for (size_t i = 0; i < sizeof colors / sizeof colors[0]; i++)
        assert_true(contrast_on_white(colors[i]) >= 4.5); /* WCAG 1.4.3, text */
}

/* A small figure that uses every part once. */
static an_figure *everything(void)
{
    static const double f[] = {0.1, 1, 10, 100}, storage[] = {2e6, 5e6, 2e7, 9e7}, u[] = {1e5, 1e5, 4e6, 5e6},
                        low[] = {1.5e6, 4e6, 1e7, 8e7}, high[] = {3e6, 7e6, 4e7, 1e8},
                        residual[] = {-1, 0.5, NAN, 1.2};
    an_figure *figure = NULL;
    an_figure_spec spec = {
        .id = "all",
        .title = "All parts <once>",
        .description = "Stored & compared",
        .x = {.label = "Frequency f (Hz)", .symbol = "f", .unit = "Hz", .scale = AN_AXIS_LOG10}};
    assert_int_equal(an_figure_new(&figure, &spec, NULL), AN_OK);
    an_figure_set_ramp(figure, &(an_figure_ramp){.label = "Temperature (°C)", .from = -40, .to = 80});
    an_figure_add_panel(
        figure, &(an_figure_axis){.label = "E′ (Pa)", .symbol = "E′", .unit = "Pa", .scale = AN_AXIS_LOG10},
        160);
    an_figure_add_shade(figure, -INFINITY, 0.5, AN_SHADE_HATCH, "not trusted");
    an_figure_add_shade(figure, 0.5, 50, AN_SHADE_TINT, "trusted");
    an_figure_add_band(
        figure,
        &(an_figure_band){.x = f, .low = low, .high = high, .n = 4, .name = "band", .color = AN_COLOR_FIRST});
    an_figure_add_series(figure, &(an_figure_series){.x = f,
                                                     .y = storage,
                                                     .u = u,
                                                     .n = 4,
                                                     .name = "lot <A>",
                                                     .legend = "lot <A>",
                                                     .bars = "k = 2",
                                                     .style = {.color = an_ramp_color(0.3),
                                                               .marker = AN_MARKER_RING,
                                                               .stroke = AN_STROKE_DASHED}});
    an_figure_add_rule(figure, 5, "here");
    an_figure_add_panel(figure, &(an_figure_axis){.label = "residual / u"}, 60);
    an_figure_add_level(figure, 0);
    an_figure_add_series(
        figure, &(an_figure_series){
                    .x = f,
                    .y = residual,
                    .n = 4,
                    .style = {.color = AN_COLOR_SECOND, .marker = AN_MARKER_TRIANGLE, .stems = true}});
    return figure;
}

static void test_stored_figure(void **state)
{
    (void)state;
    an_figure *figure = everything();
    char *text = text_of(figure), *again = text_of(figure);
    assert_string_equal(text, again);
    if (getenv("ANELAST_RENEW")) {
        FILE *out = fopen(STORED, "w");
        assert_non_null(out);
        fputs(text, out);
        fclose(out);
    }
    FILE *in = fopen(STORED, "r");
    assert_non_null(in);
    char *stored = calloc(1, 1 << 16);
    assert_true(fread(stored, 1, (1 << 16) - 1, in) > 0);
    fclose(in);
    assert_string_equal(text, stored);
    free(stored);
    free(text);
    free(again);
    an_figure_free(&figure);
    assert_null(figure);
}

static void test_parts_are_there_once(void **state)
{
    (void)state;
    an_figure *figure = everything();
    char *text = text_of(figure);
    assert_int_equal(count_nodes(text, "/s:svg/s:title[.='All parts <once>']"), 1);
    assert_int_equal(count_nodes(text, "/s:svg/s:desc[.='Stored & compared']"), 1);
    assert_int_equal(count_nodes(text, "//s:circle[s:title]"), 4);
    assert_int_equal(count_nodes(text, "//s:circle/s:title[starts-with(., 'lot <A>: f = 0.1000 Hz, E′ = "
                                       "(2.00 ± 0.10)×10⁶ Pa (k = 2)')]"),
                     1);
    assert_int_equal(count_nodes(text, "//s:text[.='lot <A>']"), 1);
    assert_int_equal(count_nodes(text, "//s:clipPath"), 2);
    assert_int_equal(count_nodes(text, "//s:linearGradient"), 1);
    /* every id is of this figure, none stands twice */
    assert_int_equal(count_nodes(text, "//*[@id and not(starts-with(@id, 'all-'))]"), 0);
    assert_int_equal(count_nodes(text, "//*[@id = following::*/@id]"), 0);
    assert_int_equal(count_nodes(text, "//s:script|//@href|//@style|//s:image"), 0);
    free(text);
    an_figure_free(&figure);
}

static void test_everything_shown_is_escaped(void **state)
{
    (void)state;
    static const char evil[] = "\"><script>alert('&')</script>]]>";
    static const double x[] = {1, 2}, y[] = {1, 2}, low[] = {0, 1};
    const char *hovers[] = {evil, NULL};
    an_figure *figure = NULL;
    an_figure_spec spec = {
        .id = "e", .title = evil, .description = evil, .x = {.label = evil, .symbol = evil, .unit = evil}};
    assert_int_equal(an_figure_new(&figure, &spec, NULL), AN_OK);
    an_figure_set_ramp(figure, &(an_figure_ramp){.label = evil, .from = 0, .to = 1});
    an_figure_add_panel(figure, &(an_figure_axis){.label = evil, .symbol = evil, .unit = evil}, 100);
    an_figure_add_series(figure, &(an_figure_series){.x = x,
                                                     .y = y,
                                                     .n = 2,
                                                     .name = evil,
                                                     .hovers = hovers,
                                                     .legend = evil,
                                                     .style = {.marker = AN_MARKER_DISC}});
    an_figure_add_band(figure, &(an_figure_band){.x = x, .low = low, .high = y, .n = 2, .name = evil});
    an_figure_add_shade(figure, 1, 2, AN_SHADE_TINT, evil);
    an_figure_add_rule(figure, 1.5, evil);
    char *text = text_of(figure);
    assert_int_equal(count_nodes(text, "//s:script"), 0);
    assert_null(strstr(text, "<script"));
    assert_null(strstr(text, "]]>"));
    free(text);
    an_figure_free(&figure);
}

static void test_points_without_a_place_are_left_out(void **state)
{
    (void)state;
    static const double x[] = {1, 0, 10, NAN, 100, 1000}, y[] = {1, 2, NAN, 4, INFINITY, 6};
    an_figure *figure = new_figure(AN_AXIS_LOG10);
    an_figure_add_panel(figure, &(an_figure_axis){0}, 100);
    assert_true(an_figure_is_empty(figure));
    an_figure_add_series(
        figure, &(an_figure_series){
                    .x = x, .y = y, .n = 6, .style = {.marker = AN_MARKER_DISC, .stroke = AN_STROKE_SOLID}});
    assert_false(an_figure_is_empty(figure));
    char *text = text_of(figure);
    assert_int_equal(count_nodes(text, "//s:circle"), 2);
    assert_null(strstr(text, "nan"));
    assert_null(strstr(text, "inf"));
    free(text);
    an_figure_free(&figure);
}

/* The horizontal place of every text of a row, and the width it may take, do not run into the next one. */
static void test_legend_entries_do_not_overlap(void **state)
{
    (void)state;
    static const double x[] = {1, 2}, y[] = {1, 2};
    static const char *const names[] = {"storage modulus",
                                        "loss modulus",
                                        "noise",
                                        "total uncertainty, twice the standard one",
                                        "i",
                                        "outside the window",
                                        "W"};
    an_figure *figure = new_figure(AN_AXIS_LINEAR);
    an_figure_add_panel(figure, &(an_figure_axis){0}, 100);
    for (int k = 0; k < 7; k++)
        an_figure_add_series(
            figure, &(an_figure_series){
                        .x = x, .y = y, .n = 2, .legend = names[k], .style = {.stroke = AN_STROKE_SOLID}});
    char *text = text_of(figure);
    double end_x = -1, row = -1;
    for (int k = 0; k < 7; k++) {
        char wanted[80];
        snprintf(wanted, sizeof wanted, ">%s</text>", names[k]);
        const char *found = strstr(text, wanted);
        assert_non_null(found);
        while (strncmp(found, "<text", 5) != 0)
            found--;
        double at = 0, y_at = 0;
        assert_int_equal(sscanf(found, "<text text-anchor=\"start\" x=\"%lf\" y=\"%lf\"", &at, &y_at), 2);
        assert_true(y_at > row || at - 31 >= end_x); /* 31: sample and gap before the text */
        end_x =
            at + 14 * 0.55 * (double)strlen(names[k]); /* mean advance of sans-serif text, common practice */
        row = y_at;
        assert_true(end_x <= AN_FIGURE_WIDTH);
    }
    free(text);
    an_figure_free(&figure);
}

/* Equal ratios are equal lengths on a log10 axis, equal differences on a linear one. */
static void test_places(void **state)
{
    (void)state;
    static const double x[] = {1, 10, 1000}, y[] = {-2, 0, 6};
    an_figure *figure = NULL;
    an_figure_spec spec = {
        .id = "p", .title = "places", .x = {.scale = AN_AXIS_LOG10, .from = 1, .to = 1000}};
    assert_int_equal(an_figure_new(&figure, &spec, NULL), AN_OK);
    an_figure_add_panel(figure, &(an_figure_axis){.from = -2, .to = 6}, 160);
    an_figure_add_series(figure,
                         &(an_figure_series){.x = x, .y = y, .n = 3, .style = {.marker = AN_MARKER_DISC}});
    char *text = text_of(figure);
    double at[3][2];
    const char *found = text;
    for (int i = 0; i < 3; i++) {
        found = strstr(found, "<circle");
        assert_non_null(found);
        assert_int_equal(sscanf(found, "<circle cx=\"%lf\" cy=\"%lf\"", &at[i][0], &at[i][1]), 2);
        found++;
    }
    /* a tenth of a unit is what coordinates are written to */
    assert_true(fabs((at[1][0] - at[0][0]) - (at[2][0] - at[0][0]) / 3) <= 0.15);
    assert_true(fabs((at[0][1] - at[1][1]) - 160 * 2.0 / 8) <= 0.1);
    assert_true(fabs((at[0][1] - at[2][1]) - 160) <= 0.1);
    free(text);
    an_figure_free(&figure);
}

/* Labels of an axis for a range, joined by blanks. */
static void check_ticks(an_axis_scale kind, double from, double to, const char *expected)
{
    an_figure *figure = NULL;
    an_figure_spec spec = {.id = "t", .title = "ticks", .x = {.scale = kind, .from = from, .to = to}};
    assert_int_equal(an_figure_new(&figure, &spec, NULL), AN_OK);
    an_figure_add_panel(figure, &(an_figure_axis){.from = 0, .to = 1}, 50);
    char *text = text_of(figure);
    char got[400] = "";
    for (const char *at = strstr(text, "text-anchor=\"middle\""); at;
         at = strstr(at, "text-anchor=\"middle\"")) {
        at = strchr(at, '>') + 1;
        bool inside = false;
        for (; strncmp(at, "</text>", 7) != 0; at++) {
            inside = *at == '<' || (inside && at[-1] != '>');
            if (!inside)
                strncat(got, at, 1);
        }
        strcat(got, " ");
    }
    assert_string_equal(got, expected);
    free(text);
    an_figure_free(&figure);
}

static void test_ticks(void **state)
{
    (void)state;
    check_ticks(AN_AXIS_LINEAR, 0, 1, "0.0 0.2 0.4 0.6 0.8 1.0 ");
    check_ticks(AN_AXIS_LINEAR, -61, 99,
                "\xe2\x88\x92"
                "50 \xe2\x88\x92"
                "25 0 25 50 75 ");
    check_ticks(AN_AXIS_LINEAR, 0, 3e-5,
                "0.0 0.5 1.0 1.5 2.0 2.5 3.0 "); /* times 10^-5, said beside the axis */
    check_ticks(AN_AXIS_LOG10, 0.5, 2e3, "100 101 102 103 ");
    check_ticks(AN_AXIS_LOG10, 1e-9, 1e12,
                "10\xe2\x88\x92"
                "9 10\xe2\x88\x92"
                "6 10\xe2\x88\x92"
                "3 100 103 106 109 1012 ");
    check_ticks(AN_AXIS_LOG10, 0.3, 7, "0.5 1 2 5 ");
    check_ticks(AN_AXIS_LOG10, 0.2, 20, "0.2 0.5 1 2 5 10 20 ");
    check_ticks(AN_AXIS_LOG10, 2e6, 3e8, "107 108 ");
    check_ticks(AN_AXIS_LOG10, 4.1, 4.6, "4.1 4.2 4.3 4.4 4.5 4.6 ");
}

static void test_faults_are_kept_until_writing(void **state)
{
    (void)state;
    an_error err = {0};
    an_figure *figure = NULL;
    static const char *const bad_ids[] = {"", "1a", "a b", "a\"", NULL};
    for (int k = 0; k < 5; k++)
        assert_int_equal(an_figure_new(&figure, &(an_figure_spec){.id = bad_ids[k], .title = "t"}, &err),
                         AN_E_USAGE);
    assert_null(figure);
    figure = new_figure(AN_AXIS_LINEAR);
    an_figure_add_level(figure, 0); /* before any panel */
    an_figure_add_panel(figure, &(an_figure_axis){0}, 100);
    FILE *out = fopen("/dev/null", "w");
    assert_int_equal(an_figure_write(figure, out, &err), AN_E_USAGE);
    assert_non_null(strstr(err.text, "panel"));
    fclose(out);
    an_figure_free(&figure);
    an_figure_free(&figure);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_ramps_are_ordered_by_lightness_and_dark_enough),
        cmocka_unit_test(test_fixed_colors_are_readable),
        cmocka_unit_test(test_stored_figure),
        cmocka_unit_test(test_parts_are_there_once),
        cmocka_unit_test(test_everything_shown_is_escaped),
        cmocka_unit_test(test_points_without_a_place_are_left_out),
        cmocka_unit_test(test_legend_entries_do_not_overlap),
        cmocka_unit_test(test_places),
        cmocka_unit_test(test_ticks),
        cmocka_unit_test(test_faults_are_kept_until_writing),
    };
    int failed = cmocka_run_group_tests(tests, NULL, NULL);
    xmlCleanupParser();
    return failed;
}
