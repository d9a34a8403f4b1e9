/* anelast-phase: run document to points document: the complex modulus of every burst, with quality and
 * uncertainty. */
#include "acquire/programs/shape.h"
#include "anelast/reduction.h"
#include "anelast/xml.h"

#include <gsl/gsl_errno.h>

static const char *const about[] = {"Reads a run document burst by burst, fits displacement and force with "
                                    "one sine each of a common frequency together with drift, "
                                    "harmonics and what is left of the start-up, takes the apparatus off "
                                    "from the sensor inwards, and divides by the specimen's form "
                                    "factor.",
                                    "Every point carries the uncertainty from noise, and apart from it the "
                                    "change that one standard uncertainty of every shared "
                                    "source makes: dimensions, gains, delay, mass, compliance. Doubts stand "
                                    "as remarks; a burst that could not be used is kept as "
                                    "skipped, with the reason.",
                                    NULL};
static const char *const examples[] = {
    "anelast-phase run.xml --output points.xml",
    "anelast-intake pad.txt --layout lower-quay.xml | anelast-phase | anelast-grid", NULL};

static const an_program program = {
    .name = "anelast-phase",
    .summary = "run document to the complex modulus of every burst",
    .operands = "[RUN]",
    .about = about,
    .examples = examples,
    .takes = AN_TAKES_OUTPUT | AN_TAKES_PROCEDURE | AN_TAKES_QUIET,
    .files_least = 0,
    .files_most = 1,
};

static void write_points(an_xml_writer *writer, const void *points)
{
    an_points_write(writer, points);
}

static void tell(const an_points *points)
{
    int n[3] = {0};
    for (int i = 0; i < points->n_point; i++)
        n[points->point[i].state]++;
    an_program_say(&program, NULL, "%d bursts used, %d flagged, %d skipped", n[AN_POINT_USED],
                   n[AN_POINT_FLAGGED], n[AN_POINT_SKIPPED]);
}

int main(int argc, char **argv)
{
    an_arguments arguments;
    an_error err = {0};
    an_points points;
    gsl_set_error_handler_off();
    if (!an_program_begin(&program, argc, argv, &arguments))
        return arguments.exit_code;
    an_points_init(&points);
    an_status status =
        an_points_make(an_argument_file(&arguments, 0), &arguments.procedure, program.name, &points, &err);
    if (status >= 0)
        status = an_xml_save(arguments.output, "points", write_points, &points, &err);
    if (status >= 0 && !arguments.quiet)
        tell(&points);
    an_points_clear(&points);
    return status < 0 ? an_program_refuse(&program, &err) : an_program_end(&program);
}
