/* anelast-prony: a master document to a material. */
#include "acquire/programs/shape.h"
#include "anelast/handover.h"
#include "anelast/xml.h"

#include <gsl/gsl_errno.h>

static const char *const about[] = {"Makes of a master curve what a simulation needs: the fewest Maxwell "
                                    "modes that follow the data within a stated error, with "
                                    "instantaneous and long-term modulus, relative weights, the shift law, "
                                    "the elastic scaling, and the ranges in which all "
                                    "this is known. Of a material to which superposition does not apply "
                                    "nothing is handed over, unless somebody answers for "
                                    "it in writing; that then stands in the document.",
                                    NULL};
static const char *const examples[] = {
    "anelast-prony master.xml --output material.xml",
    "anelast-grid points.xml | anelast-shift | anelast-prony > material.xml",
    "anelast-prony master.xml --override 'K. Adeyemi: at 20 degC only'", NULL};
static const an_option options[] = {
    {"override", 0, "REASON", NULL, "who and why", NULL,
     "Hand over a spectrum of a material called complex; the reason stands in the document"},
};
static const an_program program = {
    .name = "anelast-prony",
    .summary = "master document to a material: spectrum, shift law, elastic scaling, valid ranges",
    .operands = "[MASTER]",
    .about = about,
    .examples = examples,
    .options = options,
    .n_options = sizeof options / sizeof options[0],
    .takes = AN_TAKES_OUTPUT | AN_TAKES_PROCEDURE,
    .files_least = 0,
    .files_most = 1,
};

static an_status record(const an_arguments *arguments, const an_master *master, const char *sha256,
                        an_made *made, an_error *err)
{
    const char *reason = an_argument(arguments, "override");
    AN_TRY(an_made_init(made, program.name, err));
    AN_TRY(an_made_stand_on(made, "master", an_argument_file(arguments, 0), &master->made, sha256, err));
    AN_TRY(an_procedure_record(&arguments->procedure, "spectrum", made, err));
    return reason ? an_made_add_word(made, "override", reason, err) : AN_OK;
}

static void write_material(an_xml_writer *writer, const void *material)
{
    an_material_write(writer, material);
}

static an_status work(const an_arguments *arguments, an_error *err)
{
    char sha256[AN_SHA256_SIZE];
    an_master master;
    an_material material;
    an_status status;
    an_master_init(&master);
    an_material_init(&material);
    AN_CLEAN(an_master_read(an_argument_file(arguments, 0), &master, sha256, err));
    AN_CLEAN(
        an_handover_make(&master, &arguments->procedure, an_argument(arguments, "override"), &material, err));
    AN_CLEAN(record(arguments, &master, sha256, &material.made, err));
    status = an_xml_save(arguments->output, "material", write_material, &material, err);
cleanup:
    an_master_clear(&master);
    an_material_clear(&material);
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
