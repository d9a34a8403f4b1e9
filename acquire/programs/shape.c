/* The one shape of all programs: options from tables, help, diagnostics, exit codes, standard output checked
 * at its end. Only here and in mains are things printed.
 */
#include "acquire/programs/shape.h"

#include "anelast/output.h"
#include "anelast/quantity.h"

#include <getopt.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdio_ext.h>
#include <string.h>

/* Options that several programs take; a program says which by its AN_TAKES_ bits. */
static const struct {
    unsigned takes; /* 0: every program */
    an_option option;
} shared[] = {
    {AN_TAKES_OUTPUT,
     {"output", 'o', "FILE", NULL, NULL, "standard output",
      "Write there; a file appears whole or not at all"}},
    {AN_TAKES_PROCEDURE,
     {"procedure", 'p', "FILE", NULL, NULL, "the built-in one", "Thresholds and choices in force"}},
    {AN_TAKES_PROCEDURE,
     {"show-procedure", 0, NULL, NULL, NULL, NULL, "Print the whole procedure in force, and end"}},
    {AN_TAKES_QUIET, {"quiet", 'q', NULL, NULL, NULL, NULL, "Print nothing but refusals on standard error"}},
    {0, {"help", 'h', NULL, NULL, NULL, NULL, "Print this help, and end"}},
    {0, {"version", 'V', NULL, NULL, NULL, NULL, "Print the version, and end"}},
};

enum { N_SHARED = sizeof shared / sizeof shared[0] };

/* The i-th option of a program: its own, then the shared ones it takes; NULL past the end. */
static const an_option *option_row(const an_program *program, size_t i)
{
    if (i < program->n_options)
        return &program->options[i];
    i -= program->n_options;
    for (size_t k = 0; k < N_SHARED; k++)
        if ((shared[k].takes == 0 || program->takes & shared[k].takes) && i-- == 0)
            return &shared[k].option;
    return NULL;
}

/* ---- printing ---- */

/* Messages quote dumps, documents and names of files: no control character of theirs reaches the terminal. */
static void put_plain(FILE *out, const char *text)
{
    for (const unsigned char *at = (const unsigned char *)text; *at; at++)
        fputc((*at < 0x20 && *at != '\n') || *at == 0x7f ? '?' : *at, out);
}

void an_program_say(const an_program *program, const char *place, const char *format, ...)
{
    char text[2048];
    va_list args;
    fprintf(stderr, "%s: ", program->name);
    if (place && *place) {
        put_plain(stderr, place);
        fputs(": ", stderr);
    }
    va_start(args, format);
    vsnprintf(text, sizeof text, format, args);
    va_end(args);
    put_plain(stderr, text);
    fputc('\n', stderr);
}

int an_program_refuse(const an_program *program, const an_error *err)
{
    __fpurge(stdout);
    an_program_say(program, err->place, "%s", err->text);
    return an_exit_code(err->status);
}

int an_program_end(const an_program *program)
{
    an_output *output = NULL;
    an_error err = {0};
    an_status status = an_output_open("-", &output, &err);
    if (status == AN_OK)
        status = an_output_commit(&output, &err);
    return status < 0 ? an_program_refuse(program, &err) : AN_EXIT_DONE;
}

/* Where help breaks its lines. */
enum { HELP_WIDTH = 96, HELP_INDENT = 28 };

/* Print words from a column on, lines broken at HELP_WIDTH and indented; a line feed in the text breaks too.
 */
static void print_words(const char *text, int column, int indent)
{
    while (*text) {
        int n = (int)strcspn(text, " \n");
        bool starts = column <= indent;
        if (!starts && column + 1 + n > HELP_WIDTH) {
            printf("\n%*s", indent, "");
            starts = true;
        }
        printf("%s%.*s", starts ? "" : " ", n, text);
        column = starts ? indent + n : column + 1 + n;
        text += n;
        if (*text == '\n') {
            printf("\n%*s", indent, "");
            column = indent;
        }
        text += *text != '\0';
    }
}

/* "help [unit]; range (default: standard)". */
static void describe_option(const an_option *option, char *text, size_t n_text)
{
    snprintf(text, n_text, "%s%s%s%s%s%s%s%s%s", option->help, option->unit ? " [" : "",
             option->unit ? option->unit : "", option->unit ? "]" : "", option->range ? "; " : "",
             option->range ? option->range : "", option->standard ? " (default: " : "",
             option->standard ? option->standard : "", option->standard ? ")" : "");
}

static void print_option(const an_option *option)
{
    char head[80], text[700];
    int n = option->letter ? snprintf(head, sizeof head, "  -%c, --%s", option->letter, option->name)
                           : snprintf(head, sizeof head, "      --%s", option->name);
    if (option->argument)
        snprintf(head + n, sizeof head - (size_t)n, " %s", option->argument);
    printf("%-*s", HELP_INDENT, head);
    if (strlen(head) >= HELP_INDENT)
        printf("\n%*s", HELP_INDENT, "");
    describe_option(option, text, sizeof text);
    print_words(text, HELP_INDENT, HELP_INDENT);
    putchar('\n');
}

#define EXITS                                                                                                \
    "Exit codes: 0 done; 1 refused, or the data do not allow it; 2 wrong usage; 3 cannot read or write"

static void print_help(const an_program *program)
{
    const an_option *option;
    char exits[400];
    printf("%s: %s\n\nUsage: %s [OPTION]... %s\n", program->name, program->summary, program->name,
           program->operands ? program->operands : "");
    for (const char *const *paragraph = program->about; paragraph && *paragraph; paragraph++) {
        putchar('\n');
        print_words(*paragraph, 0, 0);
        putchar('\n');
    }
    printf("\nExample%s:\n", program->examples && program->examples[0] && program->examples[1] ? "s" : "");
    for (const char *const *example = program->examples; example && *example; example++)
        printf("  %s\n", *example);
    printf("\nOptions:\n");
    for (size_t i = 0; (option = option_row(program, i)); i++)
        print_option(option);
    snprintf(exits, sizeof exits, EXITS "%s%s.", program->exits ? "; " : "",
             program->exits ? program->exits : "");
    putchar('\n');
    print_words(exits, 0, 0);
    putchar('\n');
}

/* ---- the command line ---- */

/* Wrong usage: say what, and where help is. Always false, so that a caller returns it. */
static bool refuse_usage(const an_program *program, an_arguments *arguments, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

static bool refuse_usage(const an_program *program, an_arguments *arguments, const char *format, ...)
{
    char text[400];
    va_list args;
    va_start(args, format);
    vsnprintf(text, sizeof text, format, args);
    va_end(args);
    an_program_say(program, NULL, "%s; '%s --help' shows the options", text, program->name);
    arguments->exit_code = AN_EXIT_USAGE;
    return false;
}

/* Tables for getopt_long from the option rows; row i has the value 256 + i. Returns the number of rows. */
static size_t make_tables(const an_program *program, struct option *longs, char *shorts)
{
    const an_option *option;
    size_t n = 0;
    *shorts++ = ':';
    for (; n < AN_OPTIONS_MOST && (option = option_row(program, n)); n++) {
        longs[n] = (struct option){option->name, option->argument ? required_argument : no_argument, NULL,
                                   256 + (int)n};
        if (!option->letter)
            continue;
        *shorts++ = option->letter;
        if (option->argument)
            *shorts++ = ':';
    }
    longs[n] = (struct option){0};
    *shorts = '\0';
    return n;
}

/* The row of what getopt_long returned. */
static const an_option *row_of(const an_program *program, int found)
{
    const an_option *option;
    if (found >= 256)
        return option_row(program, (size_t)found - 256);
    for (size_t i = 0; (option = option_row(program, i)); i++)
        if (option->letter == found)
            return option;
    return NULL;
}

static bool take_options(const an_program *program, int argc, char **argv, an_arguments *arguments)
{
    struct option longs[AN_OPTIONS_MOST + 1];
    char shorts[2 * AN_OPTIONS_MOST + 2];
    int found;
    make_tables(program, longs, shorts);
    optind = 0;
    opterr = 0;
    while ((found = getopt_long(argc, argv, shorts, longs, NULL)) != -1) {
        if (found == ':')
            return refuse_usage(program, arguments, "option '%s' wants an argument", argv[optind - 1]);
        if (found == '?' && optopt && optopt < 256)
            return refuse_usage(program, arguments, "option '-%c' is not known", optopt);
        if (found == '?')
            return refuse_usage(program, arguments, "option '%s' is not known, or takes no argument",
                                argv[optind - 1]);
        if (arguments->n_given == AN_GIVEN_MOST)
            return refuse_usage(program, arguments, "more than %d options", AN_GIVEN_MOST);
        const an_option *option = row_of(program, found);
        arguments->given[arguments->n_given++] = (an_given){option->name, option->argument ? optarg : ""};
    }
    arguments->files = argv + optind;
    arguments->n_files = argc - optind;
    return true;
}

/* Read the procedure, and print it where that was asked for. */
static bool take_procedure(const an_program *program, an_arguments *arguments)
{
    an_error err = {0};
    an_status status = an_procedure_read(an_argument(arguments, "procedure"), &arguments->procedure, &err);
    bool show = an_argument(arguments, "show-procedure") != NULL;
    if (status == AN_OK && show)
        status = an_procedure_write(&arguments->procedure, stdout, &err);
    if (status == AN_E_IO && show && !err.place[0])
        an_error_at(&err, "standard output");
    if (status < 0)
        arguments->exit_code = an_program_refuse(program, &err);
    else if (show)
        arguments->exit_code = an_program_end(program);
    if (status == AN_OK && arguments->procedure.newer && !arguments->quiet)
        an_program_say(program, arguments->procedure.file,
                       "of a newer minor version; what is not known here was ignored");
    return status == AN_OK && !show;
}

bool an_program_begin(const an_program *program, int argc, char **argv, an_arguments *arguments)
{
    *arguments = (an_arguments){.output = "-"};
    if (!take_options(program, argc, argv, arguments))
        return false;
    if (an_argument(arguments, "help")) {
        print_help(program);
        arguments->exit_code = an_program_end(program);
        return false;
    }
    if (an_argument(arguments, "version")) {
        printf("%s (anelast) %s\n", program->name, ANELAST_VERSION);
        arguments->exit_code = an_program_end(program);
        return false;
    }
    if (an_argument(arguments, "output"))
        arguments->output = an_argument(arguments, "output");
    arguments->quiet = an_argument(arguments, "quiet") != NULL;
    if (program->takes & AN_TAKES_PROCEDURE && !take_procedure(program, arguments))
        return false;
    if (arguments->n_files < program->files_least)
        return refuse_usage(program, arguments, "%d file%s named; at least %d wanted: %s", arguments->n_files,
                            arguments->n_files == 1 ? "" : "s", program->files_least, program->operands);
    if (program->files_most >= 0 && arguments->n_files > program->files_most)
        return refuse_usage(program, arguments, "'%s' is one file too many",
                            arguments->files[program->files_most]);
    return true;
}

const char *an_argument(const an_arguments *arguments, const char *name)
{
    for (size_t i = arguments->n_given; i-- > 0;)
        if (strcmp(arguments->given[i].name, name) == 0)
            return arguments->given[i].value;
    return NULL;
}

an_status an_argument_number(const an_arguments *arguments, const char *name, const char *unit,
                             double standard, double *value, an_error *err)
{
    const char *text = an_argument(arguments, name);
    an_error inner = {0};
    *value = standard;
    if (!text || an_quantity_parse(text, unit, value, &inner) == AN_OK)
        return AN_OK;
    return an_fail(err, AN_E_USAGE, NULL, "option '--%s': %s", name, inner.text);
}

const char *an_argument_file(const an_arguments *arguments, int i_file)
{
    return i_file < arguments->n_files ? arguments->files[i_file] : "-";
}
