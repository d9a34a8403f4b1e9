/* A whole run to points, streaming. Stage: phase and correct, as the program anelast-phase does it. */
#include "anelast/reduction.h"

#include <string.h>

/* What the visitor carries from burst to burst. */
typedef struct passage {
    an_reducer *reducer;
    an_points *points;
    int n_other; /* holds and pulls */
} passage;

static an_status on_head(const an_run *run, void *user, an_error *err)
{
    passage *p = user;
    return an_reducer_begin(p->reducer, run, p->points, err);
}

static an_status on_burst(const an_run *run, const an_burst *burst, void *user, an_error *err)
{
    (void)run;
    passage *p = user;
    if (burst->kind != AN_BURST_OSCILLATION) {
        p->n_other++;
        return AN_OK;
    }
    an_point *point = an_points_add(p->points);
    if (!point)
        return an_fail_memory(err, "points");
    return an_burst_reduce(p->reducer, &p->points->specimen, &p->points->apparatus, burst, point, err);
}

static an_status record(const char *path, const char *sha256, const an_run *run,
                        const an_procedure *procedure, const char *by, an_points *points, an_error *err)
{
    AN_TRY(an_made_init(&points->made, by, err));
    AN_TRY(an_made_stand_on(&points->made, "run", path, &run->made, sha256, err));
    AN_TRY(an_procedure_record(procedure, "phase", &points->made, err));
    return an_procedure_record(procedure, "correct", &points->made, err);
}

static an_status pass(const char *path, const an_procedure *procedure, const char *by, passage *p,
                      an_run *run, an_error *err)
{
    char sha256[AN_SHA256_SIZE] = "";
    an_run_visitor visitor = {.head = on_head, .burst = on_burst, .user = p};
    AN_TRY(an_run_read(path, run, &visitor, sha256, err));
    if (p->n_other)
        AN_TRY(an_remark_list_add(&p->points->remarks, "not-oscillation", 0, err,
                                  "%d holds or pulls give no point", p->n_other));
    AN_TRY(record(path, sha256, run, procedure, by, p->points, err));
    if (!p->points->n_point)
        return an_fail(err, AN_E_SCIENCE, path, "no oscillation in this run: nothing to reduce");
    return an_points_judge(p->points, procedure, err);
}

an_status an_points_make(const char *path, const an_procedure *procedure, const char *by, an_points *points,
                         an_error *err)
{
    an_run run;
    passage p = {.points = points, .reducer = an_reducer_new(procedure)};
    if (!p.reducer)
        return an_fail_memory(err, "the reduction");
    an_run_init(&run);
    an_status status = pass(path, procedure, by, &p, &run, err);
    an_run_clear(&run);
    an_reducer_free(&p.reducer);
    return status;
}
