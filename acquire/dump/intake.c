/* Intake: what the dump's own head says is merged with the written documents, the run gets its name, and
 * bursts are written as they come, so that memory is bounded by the largest. The output appears whole or not
 * at all.
 */
#include "anelast/intake.h"

#include "anelast/dump.h"
#include "anelast/output.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

typedef struct intake_state {
    const an_intake *intake;
    an_layout layout;
    an_specimen specimen; /* the written one */
    an_run run;
    an_output *output;
    an_xml_writer *writer;
    int n_skip;
    char sidecar[4096]; /* path; "" where there is none */
} intake_state;

static int is_safe(char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '.' ||
           c == '_' || c == '-';
}

void an_run_id_make(const char *specimen, const char *started, const char *dump, char *id, size_t n_id)
{
    char start[32] = "";
    size_t n = 0;
    for (const char *at = started; *at && at < started + 19 && n < sizeof start - 1; at++)
        if (*at != ':')
            start[n++] = *at;
    const char *slash = strrchr(dump, '/'), *stem = slash ? slash + 1 : dump, *dot = strrchr(stem, '.');
    int n_stem = dot && dot > stem ? (int)(dot - stem) : (int)strlen(stem);
    if (!specimen[0] || (!start[0] && n_stem == 0))
        snprintf(id, n_id, "%s%.*s", specimen, n_stem, stem);
    else if (start[0])
        snprintf(id, n_id, "%s_%s", specimen, start);
    else
        snprintf(id, n_id, "%s_%.*s", specimen, n_stem, stem);
    for (char *at = id; *at; at++)
        if (!is_safe(*at))
            *at = '-';
    if (id[0] == '.' || id[0] == '-')
        id[0] = '_';
}

static an_status add_file(an_made *made, const char *role, const char *path, an_error *err)
{
    char sha256[AN_SHA256_SIZE];
    AN_TRY(an_sha256_file(path, sha256, err));
    return an_made_add_input(made, role, path, sha256, err);
}

/* A dump is read twice, once for its hash: it has to be a file. */
static an_status check_dump(const char *path, an_error *err)
{
    struct stat about;
    if (strcmp(path, "-") == 0)
        return an_fail(err, AN_E_USAGE, NULL, "a dump cannot come from standard input: name its file");
    if (stat(path, &about) != 0)
        return an_fail(err, AN_E_IO, path, "cannot be opened: %s", strerror(errno));
    if (S_ISDIR(about.st_mode))
        return an_fail(err, AN_E_IO, path, "cannot be read: it is a folder, no dump");
    if (!S_ISREG(about.st_mode))
        return an_fail(err, AN_E_IO, path,
                       "cannot be read: it is a pipe or a device; a dump has to be a file");
    return AN_OK;
}

/* Read the written documents, and name all inputs. */
static an_status read_inputs(intake_state *state, an_error *err)
{
    const an_intake *intake = state->intake;
    an_made *made = &state->run.made;
    char sha256[AN_SHA256_SIZE];
    AN_TRY(an_made_init(made, "anelast-intake", err));
    AN_TRY(check_dump(intake->dump, err));
    AN_TRY(an_layout_load(intake->layout, &state->layout, err));
    AN_TRY(add_file(made, "dump", intake->dump, err));
    if (intake->sidecar)
        snprintf(state->sidecar, sizeof state->sidecar, "%s", intake->sidecar);
    else
        AN_TRY(an_dump_sidecar(intake->dump, &state->layout, state->sidecar, sizeof state->sidecar, err));
    if (state->sidecar[0])
        AN_TRY(add_file(made, "sidecar", state->sidecar, err));
    AN_TRY(an_made_add_input(made, "layout", intake->layout, state->layout.sha256, err));
    if (intake->specimen) {
        AN_TRY(an_specimen_load(intake->specimen, &state->specimen, sha256, err));
        AN_TRY(an_made_add_input(made, "specimen", intake->specimen, sha256, err));
    }
    if (intake->apparatus) {
        AN_TRY(an_apparatus_load(intake->apparatus, &state->run.apparatus, sha256, err));
        AN_TRY(an_made_add_input(made, "apparatus", intake->apparatus, sha256, err));
    }
    AN_TRY(an_procedure_record(intake->procedure, "intake", made, err));
    return an_made_add_number(made, "missing_skip", an_procedure_number(intake->procedure, "missing_skip"),
                              "1", err);
}

/* What the instrument has corrected already is not corrected again. */
static an_status settle_corrections(intake_state *state, an_error *err)
{
    an_apparatus *apparatus = &state->run.apparatus;
    if (!state->intake->apparatus)
        AN_TRY(an_remark_list_add(&state->run.remarks, "apparatus-ideal", 0, err,
                                  "no apparatus document is given; the bench was taken as ideal"));
    if (state->layout.compliance_corrected && apparatus->n_compliance > 0) {
        apparatus->n_compliance = 0;
        AN_TRY(an_remark_list_add_as(
            &state->run.remarks, "corrected-before", AN_NOTE, 0, err,
            "the layout says that the dump is corrected for compliance; it is not corrected again"));
    }
    if (state->layout.inertia_corrected && apparatus->moving_mass.value != 0) {
        apparatus->moving_mass = (an_measure){.value = 0, .u = 0};
        AN_TRY(an_remark_list_add_as(
            &state->run.remarks, "corrected-before", AN_NOTE, 0, err,
            "the layout says that the dump is corrected for inertia; it is not corrected again"));
    }
    return AN_OK;
}

static an_status take_head(const an_specimen *own, void *user, an_error *err)
{
    intake_state *state = user;
    an_run *run = &state->run;
    run->specimen = *own;
    an_specimen_merge(&run->specimen, &state->specimen, &run->remarks);
    AN_TRY(an_specimen_check(&run->specimen, err));
    AN_TRY(settle_corrections(state, err));
    if (state->intake->run_id)
        an_run_id_make(state->intake->run_id, "", "", run->id, sizeof run->id);
    else
        an_run_id_make(run->specimen.id, run->specimen.started, state->intake->dump, run->id, sizeof run->id);
    AN_TRY(an_output_open(state->intake->output, &state->output, err));
    state->writer = an_xml_writer_new(an_output_stream(state->output), "run");
    if (!state->writer)
        return an_fail_memory(err, "the run document");
    an_run_write_head(state->writer, run);
    return AN_OK;
}

static an_status take_burst(const an_burst *burst, void *user, an_error *err)
{
    intake_state *state = user;
    state->run.n_burst++;
    state->n_skip += an_remark_list_count(&burst->remarks, AN_SKIP, -1) > 0;
    return an_run_write_burst(state->writer, burst, err);
}

static void summarise(const intake_state *state, an_intake_result *result)
{
    const an_remark_list *remarks = &state->run.remarks;
    memset(result, 0, sizeof *result);
    memcpy(result->run_id, state->run.id, sizeof result->run_id);
    result->n_burst = state->run.n_burst;
    result->n_skip = state->n_skip;
    for (size_t i = 0; i < remarks->n; i++) {
        if (remarks->rows[i].severity < AN_HOLD)
            continue;
        if (!result->is_held)
            snprintf(result->first_hold, sizeof result->first_hold, "%s", remarks->rows[i].text);
        result->is_held = 1;
    }
}

static an_status take(intake_state *state, an_error *err)
{
    const an_intake *intake = state->intake;
    AN_TRY(read_inputs(state, err));
    an_dump_source source = {.path = intake->dump,
                             .sidecar = state->sidecar[0] ? state->sidecar : NULL,
                             .layout = &state->layout,
                             .missing_most = an_procedure_number(intake->procedure, "missing_skip")};
    an_dump_visitor visitor = {take_head, take_burst, state};
    AN_TRY(an_dump_read(&source, &visitor, &state->run.remarks, err));
    if (state->layout.bursts_from == AN_BURSTS_SIGNALS)
        AN_TRY(an_remark_list_add(&state->run.remarks, "bursts-found", 0, err,
                                  "%d bursts were found in a continuous record", state->run.n_burst));
    an_run_write_end(state->writer, &state->run);
    AN_TRY(an_xml_writer_finish(state->writer, err));
    return an_output_commit(&state->output, err);
}

an_status an_intake_take(const an_intake *intake, an_intake_result *result, an_error *err)
{
    intake_state *state = calloc(1, sizeof *state);
    if (!state)
        return an_fail_memory(err, "the intake");
    state->intake = intake;
    an_specimen_init(&state->specimen);
    an_run_init(&state->run);
    an_status status = take(state, err);
    if (status >= 0)
        summarise(state, result);
    an_xml_writer_free(&state->writer);
    an_output_discard(&state->output);
    an_run_clear(&state->run);
    an_layout_clear(&state->layout);
    free(state);
    return status;
}
