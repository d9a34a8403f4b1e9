/* anelast-report: any of the documents of a run to one self-contained page. */
#include "acquire/programs/shape.h"
#include "anelast/number.h"
#include "anelast/output.h"
#include "anelast/report.h"

#include <limits.h>
#include <string.h>

#include <gsl/gsl_errno.h>

static const char *const about[] = {
    "Reads any of the documents run, points, grid, master and material, in any order and at most one of "
    "each, and writes one "
    "HTML page with figures, tables, remarks and provenance. The page needs no script and no network.",
    "The verdict on the page is the grid document's. What was not given or not made is said on the page, "
    "with the reason.",
    NULL,
};

static const char *const examples[] = {
    "anelast-report run.xml points.xml grid.xml master.xml material.xml --output report.html",
    "anelast-report run.xml points.xml --burst 17 --output burst-17.html",
    "anelast-report points.xml grid.xml --missing 'master=the isotherms do not overlap' --output report.html",
    NULL,
};

static const an_option options[] = {
    {"burst", 'b', "N", NULL, "1 to the number of bursts", "the one with the weightiest remarks",
     "Burst whose waveform and loop are shown; needs the run document"},
    {"missing", 'm', "DOCUMENT=REASON", NULL, NULL, NULL,
     "Why a document was not made, shown where it would stand; may be given for each"},
};

static const an_program program = {
    .name = "anelast-report",
    .summary = "documents of a run to one page",
    .operands = "[DOCUMENT]...",
    .about = about,
    .examples = examples,
    .options = options,
    .n_options = sizeof options / sizeof options[0],
    .takes = AN_TAKES_OUTPUT,
    .files_least = 0,
    .files_most = AN_REPORT_SOURCES,
};

static an_status read_burst(const an_arguments *arguments, int *burst, an_error *err)
{
    const char *text = an_argument(arguments, "burst");
    int64_t number = 0;
    *burst = 0;
    if (!text)
        return AN_OK;
    if (!an_number_integer(text, strlen(text), &number) || number < 1 || number > INT_MAX)
        return an_fail(err, AN_E_USAGE, NULL, "--burst '%s' is not the number of a burst, from 1", text);
    *burst = (int)number;
    return AN_OK;
}

static an_status say_missing(const an_arguments *arguments, an_report *report, an_error *err)
{
    for (size_t i = 0; i < arguments->n_given; i++)
        if (strcmp(arguments->given[i].name, "missing") == 0)
            AN_TRY(an_report_say_missing(report, arguments->given[i].value, err));
    return AN_OK;
}

static an_status write_page(const an_report *report, const char *path, an_error *err)
{
    an_made made = {0};
    an_output *output = NULL;
    an_status status;
    AN_CLEAN(an_made_init(&made, program.name, err));
    AN_CLEAN(an_output_open(path, &output, err));
    AN_CLEAN(an_report_write(report, &made, an_output_stream(output), err));
    AN_CLEAN(an_output_commit(&output, err));
cleanup:
    an_output_discard(&output);
    an_made_clear(&made);
    return status;
}

static an_status work(const an_arguments *arguments, an_error *err)
{
    static char *const standard_input[] = {"-"};
    int burst;
    an_report report;
    AN_TRY(read_burst(arguments, &burst, err));
    an_report_init(&report);
    bool is_named = arguments->n_files > 0;
    an_status status = say_missing(arguments, &report, err);
    if (status >= 0)
        status = an_report_read(&report, is_named ? arguments->files : standard_input,
                                is_named ? arguments->n_files : 1, burst, err);
    if (status >= 0)
        status = write_page(&report, arguments->output, err);
    an_report_clear(&report);
    return status;
}

int main(int argc, char **argv)
{
    an_arguments arguments;
    gsl_set_error_handler_off();
    if (!an_program_begin(&program, argc, argv, &arguments))
        return arguments.exit_code;
    an_error err = {0};
    an_status status = work(&arguments, &err);
    return status < 0 ? an_program_refuse(&program, &err) : an_program_end(&program);
}
