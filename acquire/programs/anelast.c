/* anelast: after a run, from dumps to folders of documents and a page each. */
#include "acquire/programs/after_run.h"
#include "acquire/programs/shape.h"
#include "acquire/programs/stage.h"

#include <stdlib.h>
#include <string.h>

static const char *const about[] = {
    "Takes each dump through all stages and leaves run.xml, points.xml, grid.xml, master.xml, material.xml "
    "and report.html in "
    "DIR/<run id>/. What the dump or the layout says need not be given. Without --layout, --specimen or "
    "--apparatus the document "
    "of that kind beside the dump is taken: layout.xml, specimen.xml, apparatus.xml, or the only one there.",
    "A folder appears whole or not at all. One of the same run id is replaced where it came of the same "
    "dump, and what else people "
    "put there is kept; where it came of another dump nothing is touched and this one is refused.",
    "A material that does not superpose is not handed over: then there is no material.xml, and page and "
    "terminal say why. Dumps "
    "of holds and pulls are taken in as run.xml. One bad dump does not stop the others.",
    NULL};
static const char *const examples[] = {"anelast pad.txt --layout lower-quay.xml --into results",
                                       "anelast night/*.csv --procedure lab.xml --into results", NULL};
static const an_option rows[] = {
    {"layout", 'l', "FILE", NULL, NULL, "the one beside the dump", "How the instrument dumps"},
    {"specimen", 's', "FILE", NULL, NULL, "the one beside the dump, if any", "What was tested"},
    {"apparatus", 'a', "FILE", NULL, NULL, "the one beside the dump, if any",
     "The bench and its calibration"},
    {"into", 'd', "DIR", NULL, NULL, ".", "Folder of the run folders; made where it does not exist"},
    {"override", 0, "REASON", NULL, "who and why", NULL,
     "Hand over a material that does not superpose all the same; the reason stands in it"},
};
static const an_program program = {
    .name = "anelast",
    .summary = "after a run: dumps to documents and a page",
    .operands = "DUMP...",
    .about = about,
    .examples = examples,
    .options = rows,
    .n_options = sizeof rows / sizeof rows[0],
    .takes = AN_TAKES_PROCEDURE | AN_TAKES_QUIET,
    .files_least = 1,
    .files_most = -1,
};

/* What a stage said stands as it said it; what was found here gets our name in front. */
static void tell(const an_error *err)
{
    if (!err->place[0] && strncmp(err->text, "anelast-", 8) == 0)
        fprintf(stderr, "%s\n", err->text);
    else
        an_program_say(&program, err->place, "%s", err->text);
}

static int reduce_one(const char *programs, const char *dump, const an_after_options *options, bool quiet)
{
    an_after_run *run = calloc(1, sizeof *run);
    an_error err = {0};
    an_status status =
        run ? an_after_run_make(programs, dump, options, run, &err) : an_fail_memory(&err, "a run");
    int exit_code = status == AN_DUBIOUS ? AN_EXIT_REFUSED : an_exit_code(status);
    if (status >= 0 && !quiet)
        status = an_after_run_print(run, stdout, &err);
    if (status >= 0 && run->no_page[0])
        fprintf(stderr, "%s\n", run->no_page);
    if (status < 0) {
        tell(&err);
        exit_code = an_exit_code(status);
    }
    free(run);
    return exit_code;
}

int main(int argc, char **argv)
{
    an_arguments arguments;
    an_error err = {0};
    char programs[PATH_MAX];
    if (!an_program_begin(&program, argc, argv, &arguments))
        return arguments.exit_code;
    if (an_stage_folder(programs, sizeof programs, &err) < 0)
        return an_program_refuse(&program, &err);
    const char *into = an_argument(&arguments, "into");
    an_after_options options = {an_argument(&arguments, "layout"),    an_argument(&arguments, "specimen"),
                                an_argument(&arguments, "apparatus"), an_argument(&arguments, "procedure"),
                                an_argument(&arguments, "override"),  into ? into : "."};
    if (!options.into[0]) {
        an_fail(&err, AN_E_USAGE, NULL, "--into names no folder");
        return an_program_refuse(&program, &err);
    }
    int worst = 0;
    sigset_t before;
    an_stage_hold_signals(&before);
    for (int i = 0; i < arguments.n_files; i++) {
        int exit_code = reduce_one(programs, arguments.files[i], &options, arguments.quiet);
        worst = exit_code > worst ? exit_code : worst;
        /* a signal that waited ends the program here, with nothing half done */
        sigprocmask(SIG_SETMASK, &before, NULL);
        an_stage_hold_signals(&before);
    }
    int end = an_program_end(&program);
    return end > worst ? end : worst;
}
