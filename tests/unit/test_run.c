/* Runs, specimens and apparatus: written, read again, merged, and refused where they are not whole. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/run.h"

#include "../check.h"
#include "scratch.h"

#define HEAD       "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n"
#define OPEN(root) HEAD "<" root " xmlns=\"urn:x-anelast:documents:1\" version=\"1.0\""

static void fill_signal(an_signal *signal, an_signal_quantity quantity, size_t n)
{
    an_error err = {0};
    assert_int_equal(an_signal_allocate(signal, quantity, AN_CODING_INT16, n, &err), AN_OK);
    signal->scale = 1;
    signal->divisor = 1000;
    signal->offset = quantity == AN_SIGNAL_TEMPERATURE ? 273.15 : 0;
    for (size_t i = 0; i < n; i++)
        ((int16_t *)signal->data)[i] = (int16_t)(10 * i);
}

static void write_bursts(an_xml_writer *writer, an_run *run)
{
    an_error err = {0};
    for (int i = 1; i <= 3; i++) {
        an_burst burst;
        an_burst_init(&burst);
        burst.n = i;
        burst.step = 10 * i;
        burst.kind = AN_BURST_HOLD;
        burst.set_temperature_K = 263.15;
        burst.clock = (an_clock){.start = 5, .interval = 0.25, .count = 4};
        fill_signal(&burst.displacement, AN_SIGNAL_DISPLACEMENT, 4);
        fill_signal(&burst.force, AN_SIGNAL_FORCE, 4);
        if (i == 2)
            fill_signal(&burst.temperature, AN_SIGNAL_TEMPERATURE, 4);
        an_remark_list_add(&burst.remarks, "clipping", i, &err, "force stays at 1 N");
        assert_int_equal(an_run_write_burst(writer, &burst, &err), AN_OK);
        run->n_burst++;
        an_burst_clear(&burst);
    }
}

/* A run of three bursts, with a remark that comes only at its end. */
static void write_run(const char *path)
{
    an_error err = {0};
    an_run run;
    FILE *stream = fopen(path, "wb");
    assert_non_null(stream);
    an_xml_writer *writer = an_xml_writer_new(stream, "run");
    an_run_init(&run);
    strcpy(run.id, "LQ-RP-1");
    strcpy(run.specimen.id, "RP <&> 1");
    run.specimen.geometry.kind = AN_TENSION;
    run.specimen.geometry.length = (an_measure){0.0124, 2e-5};
    assert_int_equal(an_made_init(&run.made, "anelast-intake", &err), AN_OK);
    an_remark_list_add(&run.remarks, "encoding-decoded", 0, &err, "decoded as UTF-8");
    an_run_write_head(writer, &run);
    write_bursts(writer, &run);
    an_remark_list_add(&run.remarks, "truncated", 0, &err, "the dump ends early");
    an_run_write_end(writer, &run);
    assert_int_equal(an_xml_writer_finish(writer, &err), AN_OK);
    an_xml_writer_free(&writer);
    an_run_clear(&run);
    assert_int_equal(fclose(stream), 0);
}

/* What the visitor saw. */
typedef struct seen {
    int n_head, n_burst;
    size_t n_remark_at_head;
} seen;

static an_status see_head(const an_run *run, void *user, an_error *err)
{
    seen *what = user;
    (void)err;
    what->n_head++;
    what->n_remark_at_head = run->remarks.n;
    return AN_OK;
}

static an_status see_burst(const an_run *run, const an_burst *burst, void *user, an_error *err)
{
    seen *what = user;
    double time[4], kelvin[4];
    (void)err;
    what->n_burst++;
    assert_string_equal(run->id, "LQ-RP-1");
    assert_string_equal(run->specimen.id, "RP <&> 1");
    assert_int_equal(burst->n, what->n_burst);
    assert_int_equal(burst->step, 10 * what->n_burst);
    assert_int_equal(burst->kind, AN_BURST_HOLD);
    assert_true(burst->set_temperature_K == 263.15 && isnan(burst->set_frequency_Hz));
    assert_int_equal(burst->temperature.count, what->n_burst == 2 ? 4 : 0);
    assert_true(an_remark_list_has(&burst->remarks, "clipping", -1));
    an_burst_times(burst, time);
    assert_true(time[3] == 5.75);
    if (what->n_burst == 2) {
        an_signal_decode(&burst->temperature, kelvin);
        assert_close(kelvin[3], 273.18, 1e-12);
    }
    return AN_OK;
}

static void run_there_and_back(void **state)
{
    (void)state;
    an_error err = {0};
    an_run run;
    seen what = {0};
    an_run_visitor visitor = {see_head, see_burst, &what};
    write_run("run.xml");
    an_run_init(&run);
    assert_int_equal(an_run_read("run.xml", &run, &visitor, NULL, &err), AN_OK);
    assert_int_equal(what.n_head, 1);
    assert_int_equal(what.n_burst, 3);
    assert_int_equal(run.n_burst, 3);
    assert_int_equal(what.n_remark_at_head, 1);
    assert_int_equal(run.remarks.n, 2);
    assert_true(an_remark_list_has(&run.remarks, "truncated", -1));
    assert_close(run.specimen.geometry.length.u, 2e-5, 1e-20);
    an_run_clear(&run);
}

static void refuse_run(const char *text, an_status expected, const char *words)
{
    an_error err = {0};
    an_run run;
    scratch_write("broken.xml", text);
    an_run_init(&run);
    assert_int_equal(an_run_read("broken.xml", &run, NULL, NULL, &err), expected);
    if (!strstr(err.text, words))
        fail_msg("'%s' is not in '%s'", words, err.text);
    an_run_clear(&run);
}

/* Replace the first `from` of a text by `to`; free the result. */
static char *change(const char *text, const char *from, const char *to)
{
    size_t before = 0, n = strlen(from);
    while (text[before] && strncmp(text + before, from, n) != 0)
        before++;
    if (!text[before])
        fail_msg("'%s' is not there", from);
    char *changed = malloc(strlen(text) + strlen(to) + 1);
    assert_non_null(changed);
    sprintf(changed, "%.*s%s%s", (int)before, text, to, text + before + n);
    return changed;
}

static void run_that_is_not_whole(void **state)
{
    (void)state;
    static const struct {
        const char *from, *to;
        an_status expected;
        const char *words;
    } rows[] = {
        {"bursts=\"3\"", "bursts=\"4\"", AN_E_DOCUMENT, "4 bursts declared, 3 found"},
        {"count=\"4\" unit=\"s\"", "count=\"5\" unit=\"s\"", AN_E_DOCUMENT, "all must be alike"},
        {"n=\"2\"", "n=\"1\"", AN_E_DOCUMENT, ""},
        {"kind=\"hold\"", "kind=\"drop\"", AN_E_DOCUMENT, ""},
        {"AAAKABQAHgA", "AAAKABQAHwA", AN_E_DOCUMENT, ""},
        {"interval=\"0.25\"", "interval=\"-1\"", AN_E_DOCUMENT, ""},
        {"</run>", "", AN_E_DOCUMENT, ""},
        {"quantity=\"force\" unit=\"N\"", "quantity=\"displacement\" unit=\"m\"", AN_E_DOCUMENT,
         "a second signal"},
    };
    write_run("run.xml");
    char *text = scratch_read("run.xml");
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        char *broken = change(text, rows[i].from, rows[i].to);
        refuse_run(broken, rows[i].expected, rows[i].words);
        free(broken);
    }
    free(text);
}

static void specimen_with_uncertainty_alone(void **state)
{
    (void)state;
    an_error err = {0};
    an_specimen own, written;
    an_remark_list remarks = {0};
    scratch_write("specimen.xml",
                  OPEN("specimen") " lot=\"L2\"><geometry kind=\"tension\"><length unit=\"mm\" u=\"0.05\"/>"
                                   "<width value=\"5.1\" unit=\"mm\" u=\"0.02\"/></geometry></specimen>");
    assert_int_equal(an_specimen_load("specimen.xml", &written, NULL, &err), AN_OK);
    an_specimen_init(&own);
    strcpy(own.id, "RP-1");
    strcpy(own.lot, "L1");
    own.geometry.length.value = 0.0124;
    own.geometry.width.value = 0.00498;
    assert_int_equal(an_specimen_check(&own, &err), AN_E_VALUE);
    an_specimen_merge(&own, &written, &remarks);
    assert_string_equal(own.id, "RP-1");
    assert_string_equal(own.lot, "L2");
    assert_true(own.geometry.length.value == 0.0124);
    assert_close(own.geometry.length.u, 5e-5, 1e-18);
    assert_close(own.geometry.width.value, 0.0051, 1e-18);
    assert_int_equal(remarks.n, 1); /* 4.98 and 5.10 mm differ by 6 standard uncertainties */
    assert_true(an_remark_list_has(&remarks, "geometry-disagrees", -1));
    assert_int_equal(an_specimen_check(&own, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "thickness is not given"));
    own.geometry.thickness.value = 0.00102;
    assert_int_equal(an_specimen_check(&own, &err), AN_OK);
    an_remark_list_clear(&remarks);
}

static void compliance_between_rows(void **state)
{
    (void)state;
    an_error err = {0};
    an_apparatus apparatus;
    double storage, loss, u;
    scratch_write("apparatus.xml",
                  OPEN("apparatus") "><compliance value=\"1e-7\" unit=\"m/N\" u=\"1e-9\" loss_factor=\"0.1\">"
                                    "<frequency value=\"1\" unit=\"Hz\"/><temperature value=\"300\" "
                                    "unit=\"K\"/></compliance>"
                                    "<compliance value=\"3e-7\" unit=\"m/N\" u=\"3e-9\">"
                                    "<frequency value=\"100\" unit=\"Hz\"/><temperature value=\"300\" "
                                    "unit=\"K\"/></compliance>"
                                    "<compliance value=\"5e-7\" unit=\"m/N\" u=\"5e-9\">"
                                    "<frequency value=\"1\" unit=\"Hz\"/><temperature value=\"400\" "
                                    "unit=\"K\"/></compliance>"
                                    "</apparatus>");
    assert_int_equal(an_apparatus_load("apparatus.xml", &apparatus, NULL, &err), AN_OK);
    an_apparatus_compliance(&apparatus, 10, 300, &storage, &loss, &u); /* halfway in log f */
    assert_relative(storage, 2e-7, 1e-12);
    assert_relative(loss, 0.5e-8, 1e-12);
    assert_relative(u, 2e-9, 1e-12);
    an_apparatus_compliance(&apparatus, 0.01, 300, &storage, &loss, &u); /* outside: the nearest row */
    assert_relative(storage, 1e-7, 1e-12);
    an_apparatus_compliance(&apparatus, 1, 350, &storage, &loss, &u); /* halfway in T */
    assert_relative(storage, 3e-7, 1e-12);
    an_apparatus_compliance(&apparatus, 10, 450, &storage, &loss, &u);
    assert_relative(storage, 5e-7, 1e-12);
    an_apparatus_compliance(&apparatus, 10, 200, &storage, &loss, &u);
    assert_relative(storage, 2e-7, 1e-12);
    an_apparatus_init(&apparatus);
    an_apparatus_compliance(&apparatus, 10, 300, &storage, &loss, &u);
    assert_true(storage == 0 && loss == 0 && u == 0);
}

static void apparatus_refused(void **state)
{
    (void)state;
    static const char *const parts[] = {
        "<compliance value=\"-1e-7\" unit=\"m/N\"/>", "<compliance value=\"1e-7\" unit=\"N/m\"/>",
        "<force><gain value=\"0\"/></force>",         "<temperature_bias value=\"0\" unit=\"degC\"/>",
        "<moving_mass value=\"20\" unit=\"mm\"/>",
    };
    for (size_t i = 0; i < sizeof parts / sizeof *parts; i++) {
        an_error err = {0};
        an_apparatus apparatus;
        char text[512];
        snprintf(text, sizeof text, OPEN("apparatus") ">%s</apparatus>", parts[i]);
        scratch_write("apparatus.xml", text);
        if (an_apparatus_load("apparatus.xml", &apparatus, NULL, &err) >= 0)
            fail_msg("taken: %s", parts[i]);
        assert_non_null(strstr(err.place, "apparatus.xml"));
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(run_there_and_back),      cmocka_unit_test(run_that_is_not_whole),
        cmocka_unit_test(compliance_between_rows), cmocka_unit_test(specimen_with_uncertainty_alone),
        cmocka_unit_test(apparatus_refused),
    };
    return cmocka_run_group_tests(tests, scratch_enter, scratch_leave);
}
