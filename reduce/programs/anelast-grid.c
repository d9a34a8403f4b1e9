/* anelast-grid: points documents to a grid. */
#include "acquire/programs/shape.h"
#include "anelast/grid.h"
#include "anelast/xml.h"

#include <gsl/gsl_errno.h>
#include <stdlib.h>

static const char *const about[] = {
    "Sorts the bursts of one or many points documents into isotherms by the temperature that was measured, averages repeats, "
    "marks outliers, reads the glass transition and says whether the run is usable. Several documents are taken as "
    "replicates of one material. Cells that were not measured stay missing.",
    NULL};
static const char *const examples[] = {"anelast-grid points.xml --output grid.xml",
                                       "anelast-grid pad-1.xml pad-2.xml pad-3.xml > grid.xml",
                                       "anelast-phase run.xml | anelast-grid | anelast-shift > master.xml", NULL};
static const an_program program = {
    .name = "anelast-grid",
    .summary = "points documents to isotherms, glass-transition readings and an assessment",
    .operands = "[POINTS]...",
    .about = about,
    .examples = examples,
    .takes = AN_TAKES_OUTPUT | AN_TAKES_PROCEDURE,
    .files_least = 0,
    .files_most = -1,
};

static an_status read_points(const an_arguments *arguments, an_points *points, int n, an_made *made, an_error *err)
{
    for (int i = 0; i < n; i++) {
        char sha256[AN_SHA256_SIZE];
        const char *path = an_argument_file(arguments, i);
        AN_TRY(an_points_read(path, &points[i], sha256, err));
        AN_TRY(an_made_stand_on(made, "points", path, &points[i].made, sha256, err));
    }
    return an_procedure_record(&arguments->procedure, "grid", made, err);
}

static void write_grid(an_xml_writer *writer, const void *grid)
{
    an_grid_write(writer, grid);
}

static an_status make_grid(const an_arguments *arguments, an_points *points, int n, an_error *err)
{
    an_grid grid;
    an_grid_init(&grid);
    an_status status = an_made_init(&grid.made, program.name, err);
    if (status >= 0)
        status = read_points(arguments, points, n, &grid.made, err);
    if (status >= 0)
        status = an_grid_make(points, n, &arguments->procedure, &grid, err);
    if (status >= 0)
        status = an_xml_save(arguments->output, "grid", write_grid, &grid, err);
    an_grid_clear(&grid);
    return status;
}

static an_status work(const an_arguments *arguments, an_error *err)
{
    int n = arguments->n_files > 0 ? arguments->n_files : 1;
    an_points *points = calloc((size_t)n, sizeof *points);
    if (!points)
        return an_fail_memory(err, "points documents");
    for (int i = 0; i < n; i++)
        an_points_init(&points[i]);
    an_status status = make_grid(arguments, points, n, err);
    for (int i = 0; i < n; i++)
        an_points_clear(&points[i]);
    free(points);
    return status;
}

int main(int argc, char **argv)
{
    an_arguments arguments;
    an_error err = {0};
    gsl_set_error_handler_off();
    if (!an_program_begin(&program, argc, argv, &arguments))
        return arguments.exit_code;
    return work(&arguments, &err) < 0 ? an_program_refuse(&program, &err) : an_program_end(&program);
}
