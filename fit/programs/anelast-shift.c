/* anelast-shift: a grid to a master curve. */
#include "acquire/programs/shape.h"
#include "anelast/master.h"
#include "anelast/xml.h"

#include <gsl/gsl_errno.h>

static const char *const about[] = {
    "Shifts all isotherms of a grid together with one non-negative Maxwell spectrum, so that E*(omega, T) = "
    "b_T E*(omega a_T, "
    "T0), and gives every shift factor with its uncertainty, noise and common parts apart.",
    "Says whether one shift per temperature brings the isotherms together at all (simple, doubtful, "
    "complex), "
    "with the numbers "
    "that say so, fits laws to the shift factors and chooses one by an information criterion.",
    NULL};
static const char *const examples[] = {
    "anelast-shift grid.xml --output master.xml",
    "anelast-phase run.xml | anelast-grid | anelast-shift | anelast-prony > material.xml", NULL};
static const an_program program = {
    .name = "anelast-shift",
    .summary = "grid document to shift factors, verdict on superposition, law and master curve",
    .operands = "[GRID]",
    .about = about,
    .examples = examples,
    .takes = AN_TAKES_OUTPUT | AN_TAKES_PROCEDURE | AN_TAKES_QUIET,
    .files_least = 0,
    .files_most = 1,
};

static void write_master(an_xml_writer *writer, const void *master)
{
    an_master_write(writer, master);
}

static an_status make_master(const an_arguments *arguments, an_grid *grid, an_master *master, an_error *err)
{
    char sha256[AN_SHA256_SIZE];
    const char *path = an_argument_file(arguments, 0);
    AN_TRY(an_grid_read(path, grid, sha256, err));
    AN_TRY(an_made_init(&master->made, program.name, err));
    AN_TRY(an_made_stand_on(&master->made, "grid", path, &grid->made, sha256, err));
    AN_TRY(an_procedure_record(&arguments->procedure, "superpose", &master->made, err));
    AN_TRY(an_master_make(grid, &arguments->procedure, master, err));
    return an_xml_save(arguments->output, "master", write_master, master, err);
}

static void tell(const an_master *master)
{
    if (master->simplicity != AN_SIMPLE)
        an_program_say(&program, NULL, "%s: %s", an_simplicity_word(master->simplicity),
                       master->simplicity_reason);
}

int main(int argc, char **argv)
{
    an_arguments arguments;
    an_error err = {0};
    an_grid grid;
    an_master master;
    gsl_set_error_handler_off();
    if (!an_program_begin(&program, argc, argv, &arguments))
        return arguments.exit_code;
    an_grid_init(&grid);
    an_master_init(&master);
    an_status status = make_master(&arguments, &grid, &master, &err);
    if (status >= 0 && !arguments.quiet)
        tell(&master);
    an_grid_clear(&grid);
    an_master_clear(&master);
    return status < 0 ? an_program_refuse(&program, &err) : an_program_end(&program);
}
