/* The shape that all programs share: help, usage, exit codes, standard output checked at its end. Each case
 * runs in a child. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "acquire/programs/shape.h"

#include "../check.h"
#include "scratch.h"

#include <fcntl.h>
#include <sys/wait.h>

static const an_option options[] = {
    {"span", 's', "LENGTH", "m", "0.001 to 1 m", "10 mm", "Distance between the supports"},
    {"wet", 0, NULL, NULL, NULL, NULL, "The specimen was wet"},
};
static const char *const examples[] = {"trial --span 12.4mm pad.txt", NULL};
static const an_program program = {.name = "trial",
                                   .summary = "a program of this test",
                                   .operands = "DUMP...",
                                   .examples = examples,
                                   .options = options,
                                   .n_options = 2,
                                   .takes = AN_TAKES_OUTPUT | AN_TAKES_PROCEDURE | AN_TAKES_QUIET,
                                   .files_least = 1,
                                   .files_most = 2};

/* What the child does when the command line lets it go on: print what it was given. */
static int work(const an_arguments *arguments)
{
    an_error err = {0};
    double span = 0;
    if (an_argument_number(arguments, "span", "m", 0.010, &span, &err) < 0)
        return an_program_refuse(&program, &err);
    printf("span %g wet %d output %s quiet %d files %d %s ratio %g\n", span,
           an_argument(arguments, "wet") != NULL, arguments->output, arguments->quiet, arguments->n_files,
           an_argument_file(arguments, 0), an_procedure_number(&arguments->procedure, "settled_ratio"));
    return an_program_end(&program);
}

/* Run a command line in a child with its streams in the files "out" and "err". Returns the exit code. */
static int run(const char *line, const char *out)
{
    char copy[300], *argv[20] = {NULL}, *rest = copy;
    int argc = 0, wait_status = 0;
    snprintf(copy, sizeof copy, "%s", line);
    while (argc < 19 && (argv[argc] = strsep(&rest, " ")))
        argc++;
    fflush(NULL);
    pid_t child = fork();
    if (child == 0) {
        an_arguments arguments;
        int ok = freopen(out, "w", stdout) && freopen("err", "w", stderr);
        int code = !ok                                                  ? 99
                   : an_program_begin(&program, argc, argv, &arguments) ? work(&arguments)
                                                                        : arguments.exit_code;
        fflush(stderr);
        _exit(code);
    }
    assert_true(child > 0 && waitpid(child, &wait_status, 0) == child);
    assert_true(WIFEXITED(wait_status));
    return WEXITSTATUS(wait_status);
}

static void file_says(const char *path, const char *text)
{
    char *got = scratch_read(path);
    if (!strstr(got, text))
        fail_msg("'%s' does not stand in %s: %s", text, path, got);
    free(got);
}

static void file_is_empty(const char *path)
{
    char *got = scratch_read(path);
    if (*got)
        fail_msg("%s should be empty: %s", path, got);
    free(got);
}

static void help_goes_to_standard_output(void **state)
{
    (void)state;
    assert_int_equal(run("trial --help", "out"), 0);
    file_is_empty("err");
    file_says("out", "Usage: trial [OPTION]... DUMP...");
    file_says("out", "trial --span 12.4mm pad.txt");
    file_says("out", "-s, --span LENGTH");
    file_says("out", "[m]; 0.001 to 1 m (default: 10 mm)");
    file_says("out", "--procedure FILE");
    file_says("out", "Exit codes: 0 done; 1 refused");
    assert_int_equal(run("trial --version", "out"), 0);
    file_says("out", "trial (anelast) " ANELAST_VERSION);
}

static void wrong_usage_goes_to_standard_error(void **state)
{
    static const char *const lines[][2] = {{"trial --spin 3 a", "'--spin' is not known"},
                                           {"trial -z a", "'-z' is not known"},
                                           {"trial a --span", "'--span' wants an argument"},
                                           {"trial --wet=yes a", "--wet=yes"},
                                           {"trial", "at least 1 wanted"},
                                           {"trial a b c", "'c' is one file too many"},
                                           {"trial --span 12.4 a", "option '--span'"},
                                           {"trial --span 12,4mm a", "comma"},
                                           {"trial --span 3N a", "'N'"}};
    (void)state;
    for (size_t i = 0; i < sizeof lines / sizeof lines[0]; i++) {
        assert_int_equal(run(lines[i][0], "out"), 2);
        file_is_empty("out");
        file_says("err", "trial: ");
        file_says("err", lines[i][1]);
    }
}

static void options_arrive(void **state)
{
    (void)state;
    scratch_write("lab.xml", "<procedure xmlns=\"urn:x-anelast:documents:1\" version=\"1.0\">"
                             "<choice name=\"settled_ratio\" value=\"0.2\" unit=\"%\"/></procedure>");
    assert_int_equal(run("trial pad.txt", "out"), 0);
    file_says("out", "span 0.01 wet 0 output - quiet 0 files 1 pad.txt ratio 0.005");
    assert_int_equal(run("trial -s 1mm a --span 12.4mm --wet -q -o x.xml -p lab.xml b", "out"), 0);
    file_says("out", "span 0.0124 wet 1 output x.xml quiet 1 files 2 a ratio 0.002");
}

static void the_procedure_is_shown_or_refused(void **state)
{
    (void)state;
    assert_int_equal(run("trial --show-procedure", "out"), 0);
    file_says("out", "<choice name=\"settled_ratio\" value=\"0.005\"");
    assert_int_equal(run("trial -p nowhere.xml a", "out"), 3);
    file_says("err", "trial: nowhere.xml: cannot be opened");
    scratch_write("typo.xml", "<procedure xmlns=\"urn:x-anelast:documents:1\" version=\"1.0\">"
                              "<choice name=\"setled\" value=\"1\"/></procedure>");
    assert_int_equal(run("trial -p typo.xml a", "out"), 1);
    file_says("err", "trial: typo.xml:1: choice: choice 'setled' is not known");
}

static void a_full_standard_output_is_found(void **state)
{
    static const char *const lines[] = {"trial a", "trial --help", "trial --version",
                                        "trial --show-procedure"};
    (void)state;
    for (size_t i = 0; i < 4; i++) {
        assert_int_equal(run(lines[i], "/dev/full"), 3);
        file_says("err", "trial: standard output: ");
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(help_goes_to_standard_output),
        cmocka_unit_test(wrong_usage_goes_to_standard_error),
        cmocka_unit_test(options_arrive),
        cmocka_unit_test(the_procedure_is_shown_or_refused),
        cmocka_unit_test(a_full_standard_output_is_found),
    };
    return cmocka_run_group_tests(tests, scratch_enter, scratch_leave);
}
