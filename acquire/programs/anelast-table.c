/* anelast-table: any document's tables as CSV. */
#include "acquire/programs/shape.h"
#include "acquire/programs/table.h"

#include "anelast/output.h"

static const char *const about[] = {
    "Prints one table of a document as CSV: commas, a decimal point, one head a column with the unit in it. "
    "Every document "
    "has a main table; --list names the others. Numbers are those of the document. A text that a spreadsheet "
    "would take for a formula gets an apostrophe in front.",
    NULL};
static const char *const examples[] = {"anelast-table points.xml > points.csv",
                                       "anelast-table --table readings grid.xml",
                                       "anelast-grid points.xml | anelast-table", NULL};
static const an_option options[] = {
    {"table", 't', "NAME", NULL, "a name that --list shows", "the main table", "Print this table"},
    {"list", 'l', NULL, NULL, NULL, NULL, "Name the tables of the document, and what a row of each is"},
};
static const an_program program = {
    .name = "anelast-table",
    .summary = "tables of a document as CSV",
    .operands = "[DOCUMENT]",
    .about = about,
    .examples = examples,
    .options = options,
    .n_options = sizeof options / sizeof options[0],
    .takes = AN_TAKES_OUTPUT,
    .files_least = 0,
    .files_most = 1,
};

static an_status print_table(const an_arguments *arguments, an_error *err)
{
    an_output *output;
    const char *name = an_argument(arguments, "list") ? "list()" : an_argument(arguments, "table");
    AN_TRY(an_output_open(arguments->output, &output, err));
    an_status status = an_table_print(an_argument_file(arguments, 0), name, an_output_stream(output), err);
    if (status < 0) {
        an_output_discard(&output);
        return status;
    }
    return an_output_commit(&output, err);
}

int main(int argc, char **argv)
{
    an_arguments arguments;
    an_error err = {0};
    if (!an_program_begin(&program, argc, argv, &arguments))
        return arguments.exit_code;
    return print_table(&arguments, &err) < 0 ? an_program_refuse(&program, &err) : an_program_end(&program);
}
