/* anelast-intake: a dump, its layout, specimen and apparatus to a run document. */
#include "acquire/programs/shape.h"
#include "anelast/intake.h"
#include "anelast/self_test.h"

#include <stdio.h>

static const an_option options[] = {
    {"layout", 'l', "FILE", NULL, NULL, NULL, "How the dump is laid out; needed"},
    {"check-layout", 0, "FILE", NULL, NULL, NULL, "Run the self-test of a layout, and end; no dump is read"},
    {"specimen", 's', "FILE", NULL, NULL, "what the dump says", "What was tested, and its geometry"},
    {"apparatus", 'a', "FILE", NULL, NULL, "an ideal bench",
     "What stands between the specimen and the numbers"},
    {"sidecar", 0, "FILE", NULL, NULL, "the dump's name with the layout's extension",
     "The text beside a binary dump"},
    {"run-id", 0, "NAME", NULL, "safe as the name of a file", "specimen and start", "Name of the run"},
};

static const char *const about[] = {
    "Reads a dump as its layout says, finds its bursts, and writes a run document in which units are known "
    "and nothing is "
    "lost: counts stay counts, fixed decimals stay integers with a scale.",
    "What the dump's own head says about the specimen is merged with the specimen document, which stands "
    "above it. Every column "
    "and key must be mapped or listed as ignored. A dump that is cut off gives its complete bursts, and is "
    "held.",
    NULL,
};

static const char *const examples[] = {
    "anelast-intake pad-0412.txt --layout pad-bench.xml --specimen pad-0412.xml --apparatus bench-3.xml -o "
    "run.xml",
    NULL,
};

static const an_program program = {
    .name = "anelast-intake",
    .summary = "a dump, as its layout says, to a run document",
    .operands = "DUMP",
    .about = about,
    .examples = examples,
    .options = options,
    .n_options = sizeof options / sizeof *options,
    .takes = AN_TAKES_OUTPUT | AN_TAKES_PROCEDURE | AN_TAKES_QUIET,
    .files_least = 0,
    .files_most = 1,
};

static an_status check_layout(const char *path, an_error *err)
{
    an_layout layout;
    an_self_test_result result;
    an_status status = an_layout_load(path, &layout, err);
    if (status >= 0)
        status = an_self_test_run(&layout, path, &result, err);
    if (status >= 0)
        printf("%s: %d bursts in the excerpt, %d expectations met\n", path, result.n_burst, result.n_expect);
    an_layout_clear(&layout);
    return status;
}

static an_status work(const an_arguments *arguments, an_intake_result *result, an_error *err)
{
    an_intake intake = {
        .dump = an_argument_file(arguments, 0),
        .layout = an_argument(arguments, "layout"),
        .sidecar = an_argument(arguments, "sidecar"),
        .specimen = an_argument(arguments, "specimen"),
        .apparatus = an_argument(arguments, "apparatus"),
        .run_id = an_argument(arguments, "run-id"),
        .output = arguments->output,
        .procedure = &arguments->procedure,
    };
    if (arguments->n_files == 0)
        return an_fail(err, AN_E_USAGE, NULL, "no dump is named");
    if (!intake.layout)
        return an_fail(err, AN_E_USAGE, NULL,
                       "--layout is needed: without one nobody knows what the columns mean");
    return an_intake_take(&intake, result, err);
}

int main(int argc, char **argv)
{
    an_arguments arguments;
    an_intake_result result;
    if (!an_program_begin(&program, argc, argv, &arguments))
        return arguments.exit_code;
    an_error err = {0};
    const char *checked = an_argument(&arguments, "check-layout");
    if (checked)
        return check_layout(checked, &err) < 0 ? an_program_refuse(&program, &err) : an_program_end(&program);
    if (work(&arguments, &result, &err) < 0)
        return an_program_refuse(&program, &err);
    if (!arguments.quiet && result.is_held)
        an_program_say(&program, an_argument_file(&arguments, 0), "held: %s", result.first_hold);
    return an_program_end(&program);
}
