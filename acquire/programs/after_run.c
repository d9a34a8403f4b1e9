/* after_run.c: one dump through all stages. Work is done in a folder beside the place of the results, which
 * is put there when all that can be made is made. What a stage refuses decides how far it goes: without a run
 * or points nothing is left; without a grid, a master or a material the documents before it and the page
 * stand, and say what is missing.
 */
#include "acquire/programs/after_run.h"

#include "acquire/programs/beside.h"
#include "acquire/programs/folder.h"
#include "acquire/programs/run_facts.h"
#include "acquire/programs/stage.h"

#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <sys/file.h>
#include <unistd.h>

/* One dump on its way. */
typedef struct job {
    const char *programs, *dump;
    const an_after_options *options;
    an_work work;
    an_run_facts facts;
    an_after_run *run;
} job;

/* Stages behind the run document, in order. */
static const struct {
    const char *program, *reads, *writes;
} stages[] = {
    {"anelast-phase", "run.xml", "points.xml"},
    {"anelast-grid", "points.xml", "grid.xml"},
    {"anelast-shift", "grid.xml", "master.xml"},
    {"anelast-prony", "master.xml", "material.xml"},
};

enum { PHASE, GRID, SHIFT, PRONY, STAGES, ARGUMENTS = 24 };

static void path_in(const job *one, const char *name, char *path, size_t n_path)
{
    snprintf(path, n_path, "%s/%s", one->work.path, name);
}

static int is_there(const job *one, const char *name)
{
    char path[PATH_MAX + 64];
    path_in(one, name, path, sizeof path);
    return access(path, R_OK) == 0;
}

/* Take the work folder out of what a stage said: it will not be there when it is read. */
static void forget_work(const job *one, char *text)
{
    size_t n = strlen(one->work.path);
    for (char *at; (at = strstr(text, one->work.path));)
        memmove(at, at + n + (at[n] == '/'), strlen(at + n + (at[n] == '/')) + 1);
}

static an_status refuse(const an_stage_end *end, an_error *err)
{
    an_status status = end->exit_code == 2 ? AN_E_USAGE : end->exit_code == 1 ? AN_E_SCIENCE : AN_E_IO;
    return an_fail(err, status, NULL, "%s", end->said[0] ? end->said : "a stage ended without a word");
}

static void add(const char **arguments, const char *option, const char *value)
{
    int n = 0;
    while (arguments[n])
        n++;
    if (!value || !*value || n + 3 > ARGUMENTS)
        return;
    arguments[n++] = option;
    arguments[n++] = value;
    arguments[n] = NULL;
}

static an_status run_stage(const job *one, const char *const *arguments, an_stage_end *end, an_error *err)
{
    AN_TRY(an_stage_run(one->programs, arguments, end, err));
    forget_work(one, end->said);
    return AN_OK;
}

/* What was not given is looked for beside the dump. A layout is needed; the rest may stand in dump and
 * layout. */
static an_status choose_documents(job *one, an_error *err)
{
    const an_after_options *options = one->options;
    an_after_run *run = one->run;
    if (!options->layout)
        AN_TRY(an_beside_find(one->dump, "layout", run->layout, sizeof run->layout, err));
    if (!options->layout && !run->layout[0])
        return an_fail(err, AN_E_USAGE, one->dump,
                       "no --layout is given, and no layout document stands beside the dump");
    if (!options->specimen)
        AN_TRY(an_beside_find(one->dump, "specimen", run->specimen, sizeof run->specimen, err));
    if (!options->apparatus)
        AN_TRY(an_beside_find(one->dump, "apparatus", run->apparatus, sizeof run->apparatus, err));
    return AN_OK;
}

static an_status take_in(job *one, an_error *err)
{
    const an_after_options *options = one->options;
    const an_after_run *run = one->run;
    char output[PATH_MAX + 64];
    const char *arguments[ARGUMENTS + 1] = {"anelast-intake"};
    an_stage_end end;
    path_in(one, "run.xml", output, sizeof output);
    add(arguments, "--layout", options->layout ? options->layout : run->layout);
    add(arguments, "--specimen", options->specimen ? options->specimen : run->specimen);
    add(arguments, "--apparatus", options->apparatus ? options->apparatus : run->apparatus);
    add(arguments, "--output", output);
    add(arguments, "--", one->dump); /* its name may begin with a dash */
    AN_TRY(run_stage(one, arguments, &end, err));
    if (end.exit_code != 0)
        return refuse(&end, err);
    return an_run_facts_read(output, &one->facts, err);
}

/* An id that stands for another dump already is refused: nobody could tell the two apart. */
static an_status check_place(job *one, const char *name, an_error *err)
{
    char place[2 * PATH_MAX];
    an_run_facts old;
    an_error inner = {0};
    snprintf(place, sizeof place, "%s/%s", one->options->into, name);
    if (access(place, F_OK) != 0)
        return AN_OK;
    snprintf(place, sizeof place, "%s/%s/run.xml", one->options->into, name);
    if (an_run_facts_read(place, &old, &inner) < 0)
        return an_fail(
            err, AN_E_SCIENCE, one->dump,
            "the folder '%s/%s' is there already and holds no run document that can be read (%s: %s); "
            "move it away or choose another --into",
            one->options->into, name, inner.place, inner.text);
    if (strcmp(old.dumps, one->facts.dumps) != 0)
        return an_fail(
            err, AN_E_SCIENCE, one->dump,
            "run id '%s' stands for another dump already (%s); give one of the two another id, or choose "
            "another --into",
            one->facts.id, place);
    one->run->replaced = strcmp(old.others, one->facts.others) == 0 ? 1 : 2;
    return AN_OK;
}

/* Run the stages one after the other; i_stage is the first one that was not done, STAGES where all were. */
static an_status run_stages(job *one, int *i_stage, an_stage_end *end, an_error *err)
{
    for (*i_stage = 0; *i_stage < STAGES; ++*i_stage) {
        char input[PATH_MAX + 64], output[PATH_MAX + 64];
        const char *arguments[ARGUMENTS + 1] = {stages[*i_stage].program, input};
        path_in(one, stages[*i_stage].reads, input, sizeof input);
        path_in(one, stages[*i_stage].writes, output, sizeof output);
        add(arguments, "--procedure", one->options->procedure);
        if (*i_stage == PRONY)
            add(arguments, "--override", one->options->override_reason);
        add(arguments, "--output", output);
        AN_TRY(run_stage(one, arguments, end, err));
        if (end->exit_code != 0)
            return AN_OK;
    }
    return AN_OK;
}

/* What a stage said of this run, which is named elsewhere. */
static void keep_reason(const job *one, const an_stage_end *end, char *reason, size_t n_reason)
{
    an_stage_reason(end, reason, n_reason);
    size_t n = strlen(one->facts.id);
    if (strncmp(reason, one->facts.id, n) == 0 && reason[n] == ':' && reason[n + 1] == ' ')
        memmove(reason, reason + n + 2, strlen(reason + n + 2) + 1);
}

/* How far it came, and why no further. */
static an_status judge(job *one, int i_stage, const an_stage_end *end, an_error *err)
{
    an_after_run *run = one->run;
    if (i_stage == STAGES)
        return AN_OK;
    if (end->exit_code != 1 || i_stage == PHASE)
        return refuse(end, err);
    if (i_stage == PRONY) {
        keep_reason(one, end, run->no_material, sizeof run->no_material);
        return AN_OK;
    }
    snprintf(run->stopped_at, sizeof run->stopped_at, "%s", stages[i_stage].program);
    keep_reason(one, end, run->reason, sizeof run->reason);
    return i_stage == GRID ? AN_DUBIOUS : AN_OK;
}

/* Which document the line did not come to, and why, for the page: "master=...". */
static void say_missing(const an_after_run *run, char *text, size_t size)
{
    text[0] = '\0';
    if (run->n_oscillation == 0)
        snprintf(text, size,
                 "points=the run holds no oscillation: holds and pulls are kept, and no modulus is made of "
                 "them here");
    if (run->no_material[0])
        snprintf(text, size, "material=%s", run->no_material);
    for (int i = 0; i < STAGES; i++)
        if (strcmp(run->stopped_at, stages[i].program) == 0)
            snprintf(text, size, "%.*s=%s", (int)strcspn(stages[i].writes, "."), stages[i].writes,
                     run->reason);
}

/* A page that its program refuses costs no document: they stand, and the program's word for it is told. */
static an_status make_page(const job *one, an_error *err)
{
    char missing[1100];
    char path[STAGES + 1][PATH_MAX + 64], output[PATH_MAX + 64];
    const char *arguments[ARGUMENTS + 1] = {"anelast-report"};
    an_stage_end end;
    int n = 1;
    for (int i = 0; i <= STAGES; i++)
        if (is_there(one, an_folder_documents[i])) {
            path_in(one, an_folder_documents[i], path[i], sizeof path[i]);
            arguments[n++] = path[i];
        }
    path_in(one, "report.html", output, sizeof output);
    add(arguments, "--output", output);
    say_missing(one->run, missing, sizeof missing);
    add(arguments, "--missing", missing);
    AN_TRY(run_stage(one, arguments, &end, err));
    if (end.exit_code == 1)
        snprintf(one->run->no_page, sizeof one->run->no_page, "%.1000s", end.said);
    return end.exit_code <= 1 ? AN_OK : refuse(&end, err);
}

/* Another run may have taken the name since it was looked at; from here on nobody else puts anything there.
 */
static an_status put_in_place(job *one, const char *name, an_error *err)
{
    int lock = open(one->options->into, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    if (lock >= 0)
        flock(lock, LOCK_EX);
    an_status status = check_place(one, name, err);
    if (status >= 0)
        status = an_folder_publish(&one->work, one->options->into, name, err);
    if (lock >= 0)
        close(lock);
    return status;
}

static an_status make_all(job *one, an_error *err)
{
    an_after_run *run = one->run;
    char name[160];
    AN_TRY(take_in(one, err));
    snprintf(run->id, sizeof run->id, "%s", one->facts.id);
    snprintf(run->about, sizeof run->about, "%s", one->facts.about);
    run->n_oscillation = one->facts.n_oscillation;
    run->n_other = one->facts.n_other;
    an_folder_name(one->facts.id, name, sizeof name);
    snprintf(run->folder, sizeof run->folder, "%.3800s/%s", one->options->into, name);
    AN_TRY(check_place(one, name, err));
    an_status status = AN_OK;
    if (run->n_oscillation > 0) {
        int i_stage;
        an_stage_end end = {0};
        AN_TRY(run_stages(one, &i_stage, &end, err));
        status = judge(one, i_stage, &end, err);
        AN_TRY(status);
    }
    AN_TRY(make_page(one, err));
    AN_TRY(put_in_place(one, name, err));
    return run->no_page[0] ? AN_DUBIOUS : status;
}

an_status an_after_run_make(const char *programs, const char *dump, const an_after_options *options,
                            an_after_run *run, an_error *err)
{
    job *one = calloc(1, sizeof *one);
    if (!one)
        return an_fail_memory(err, "a run");
    memset(run, 0, sizeof *run);
    one->programs = programs;
    one->dump = dump;
    one->options = options;
    one->run = run;
    an_status status = access(dump, R_OK) == 0 ? AN_OK : an_fail(err, AN_E_IO, dump, "cannot be read: %m");
    if (status >= 0)
        status = choose_documents(one, err);
    if (status >= 0)
        status = an_folder_begin(options->into, &one->work, err);
    if (status >= 0) {
        status = make_all(one, err);
        if (status < 0)
            an_folder_drop(&one->work);
    }
    free(one);
    return status;
}
