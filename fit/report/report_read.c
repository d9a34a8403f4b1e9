/* Documents into a report: what kind each is, which burst is worth showing, its waveform. Stage report. The
 * run document may be large: it is streamed, and only the burst that is shown is kept. Standard input is laid
 * into a temporary file first, since its kind has to be known before it is read.
 */
#include "anelast/report.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

enum { SNIFFED = 65536 }; /* bytes within which the root element starts; comments before it count */

static const char *const roles[AN_REPORT_SOURCES] = {"run", "points", "grid", "master", "material"};

void an_report_init(an_report *report)
{
    memset(report, 0, sizeof *report);
    an_run_init(&report->run);
    an_points_init(&report->points);
    an_grid_init(&report->grid);
    an_master_init(&report->master);
    an_material_init(&report->material);
    report->wave.set_frequency_Hz = NAN;
}

void an_report_clear(an_report *report)
{
    an_run_clear(&report->run);
    an_points_clear(&report->points);
    an_grid_clear(&report->grid);
    an_master_clear(&report->master);
    an_material_clear(&report->material);
    an_remark_list_clear(&report->burst_remarks);
    free(report->wave.time_s);
    free(report->wave.displacement);
    free(report->wave.force);
    an_report_init(report);
}

an_status an_report_say_missing(an_report *report, const char *text, an_error *err)
{
    for (int role = 0; role < AN_REPORT_SOURCES; role++) {
        size_t n = strlen(roles[role]);
        if (strncmp(text, roles[role], n) == 0 && text[n] == '=' && text[n + 1]) {
            snprintf(report->missing[role], sizeof report->missing[role], "%s", text + n + 1);
            return AN_OK;
        }
    }
    return an_fail(err, AN_E_USAGE, NULL,
                   "'%s' is not one of run, points, grid, master, material with = and a reason", text);
}

/* The role of an open file by its root element; AN_REPORT_SOURCES where it is none. */
static int find_role(FILE *in)
{
    char *head = calloc(1, SNIFFED + 1), name[64] = "";
    if (!head)
        return AN_REPORT_SOURCES;
    head[fread(head, 1, SNIFFED, in)] = '\0';
    rewind(in);
    int role = 0;
    an_xml_sniff(head, name, sizeof name);
    while (role < AN_REPORT_SOURCES && strcmp(name, roles[role]) != 0)
        role++;
    free(head);
    return role;
}

/* A path as the readers take it: standard input becomes a temporary file, kept open in *spool. */
typedef struct document {
    char path[4096];
    const char *given; /* on the command line */
    FILE *file;        /* kept open while it is read */
    int role;
} document;

static an_status spool_input(FILE *spool, an_error *err)
{
    char bytes[65536];
    size_t n;
    while ((n = fread(bytes, 1, sizeof bytes, stdin)) > 0)
        if (fwrite(bytes, 1, n, spool) != n)
            return an_fail(err, AN_E_IO, NULL, "standard input does not fit into a temporary file");
    if (ferror(stdin) || fflush(spool) != 0)
        return an_fail(err, AN_E_IO, NULL, "standard input cannot be read");
    rewind(spool);
    return AN_OK;
}

static an_status document_open(document *d, const char *path, an_error *err)
{
    bool is_input = strcmp(path, "-") == 0;
    d->given = path;
    d->file = is_input ? tmpfile() : fopen(path, "rb");
    if (!d->file)
        return an_fail(err, AN_E_IO, is_input ? "standard input" : path, "cannot be opened: %m");
    if (is_input)
        AN_TRY(spool_input(d->file, err));
    if (is_input)
        snprintf(d->path, sizeof d->path, "/dev/fd/%d", fileno(d->file));
    else if ((size_t)snprintf(d->path, sizeof d->path, "%s", path) >= sizeof d->path)
        return an_fail(err, AN_E_USAGE, NULL, "a path longer than %zu bytes", sizeof d->path - 1);
    d->role = find_role(d->file);
    if (d->role == AN_REPORT_SOURCES)
        return an_fail(err, AN_E_USAGE, is_input ? "standard input" : path,
                       "is none of the documents that a page shows: run, points, grid, master, material");
    return AN_OK;
}

static int severity_of(const an_point *point)
{
    return an_remark_list_worst(&point->remarks, -1);
}

/* The burst with the weightiest remarks, of those the one with the lowest signal-to-noise ratio. */
static int find_worst(const an_points *points)
{
    const an_point *worst = NULL;
    for (int i = 0; i < points->n_point; i++) {
        const an_point *point = &points->point[i];
        int order = worst ? severity_of(point) - severity_of(worst) : 1;
        if (order > 0 || (order == 0 && point->snr_dB < worst->snr_dB))
            worst = point;
    }
    return worst ? worst->burst : 0;
}

/* What the visitor of the run looks for, and where it puts it. */
typedef struct search {
    an_report *report;
    int wanted; /* 0: the first */
} search;

static an_status take_wave(an_report_wave *wave, const an_burst *burst, an_error *err)
{
    size_t n = burst->displacement.count;
    wave->time_s = calloc(n + 1, sizeof(double));
    wave->displacement = calloc(n + 1, sizeof(double));
    wave->force = calloc(n + 1, sizeof(double));
    if (!wave->time_s || !wave->displacement || !wave->force)
        return an_fail_memory(err, "the waveform of a burst");
    if (burst->force.count != n || (size_t)burst->clock.count != n)
        return an_fail(err, AN_E_DOCUMENT, NULL, "burst %d: %zu samples of force, %zu of displacement",
                       burst->n, burst->force.count, n);
    an_burst_times(burst, wave->time_s);
    an_signal_decode(&burst->displacement, wave->displacement);
    an_signal_decode(&burst->force, wave->force);
    for (size_t i = n; i > 0; i--)
        wave->time_s[i - 1] -= wave->time_s[0];
    wave->burst = burst->n;
    wave->kind = burst->kind;
    wave->n = n;
    wave->set_frequency_Hz = burst->set_frequency_Hz;
    wave->rotary = burst->displacement.quantity == AN_SIGNAL_ANGLE;
    return AN_OK;
}

static an_status take_remarks(an_report *report, const an_burst *burst, an_error *err)
{
    for (size_t i = 0; i < burst->remarks.n; i++) {
        const an_remark *remark = &burst->remarks.rows[i];
        AN_TRY(an_remark_list_add_as(&report->burst_remarks, remark->kind->code, remark->severity, burst->n,
                                     err, "%s", remark->text));
    }
    return AN_OK;
}

static an_status visit_burst(const an_run *run, const an_burst *burst, void *user, an_error *err)
{
    (void)run;
    search *s = user;
    an_report_wave *wave = &s->report->wave;
    if (!s->report->has_points)
        AN_TRY(take_remarks(s->report, burst, err));
    if (wave->burst != 0 || (s->wanted != 0 && burst->n != s->wanted))
        return AN_OK;
    return take_wave(wave, burst, err);
}

static an_status read_run(an_report *report, const char *path, int burst, char sha256[AN_SHA256_SIZE],
                          an_error *err)
{
    search s = {.report = report, .wanted = burst};
    if (burst == 0 && report->has_points) {
        s.wanted = find_worst(&report->points);
        report->wave.worst = s.wanted != 0;
    }
    an_run_visitor visitor = {.burst = visit_burst, .user = &s};
    AN_TRY(an_run_read(path, &report->run, &visitor, sha256, err));
    report->has_run = true;
    if (burst != 0 && report->wave.burst == 0)
        return an_fail(err, AN_E_USAGE, NULL, "burst %d is not in the run document, which holds %d", burst,
                       report->run.n_burst);
    return AN_OK;
}

static an_status read_document(an_report *report, const document *d, int burst, char sha256[AN_SHA256_SIZE],
                               an_error *err)
{
    switch (d->role) {
    case AN_REPORT_RUN:
        return read_run(report, d->path, burst, sha256, err);
    case AN_REPORT_POINTS:
        report->has_points = true;
        return an_points_read(d->path, &report->points, sha256, err);
    case AN_REPORT_GRID:
        report->has_grid = true;
        return an_grid_read(d->path, &report->grid, sha256, err);
    case AN_REPORT_MASTER:
        report->has_master = true;
        return an_master_read(d->path, &report->master, sha256, err);
    default:
        report->has_material = true;
        return an_material_read(d->path, &report->material, sha256, err);
    }
}

static void name_source(an_report_source *source, const char *role, const char *path)
{
    const char *slash = strrchr(path, '/');
    snprintf(source->role, sizeof source->role, "%s", role);
    snprintf(source->file, sizeof source->file, "%s",
             strcmp(path, "-") == 0 ? "standard input"
             : slash                ? slash + 1
                                    : path);
}

/* Points before the run, since they say which burst is worth showing; the order on the page is that of the
 * roles. */
static an_status read_in_order(an_report *report, const document *documents, int n, int burst, an_error *err)
{
    static const int order[AN_REPORT_SOURCES] = {AN_REPORT_POINTS, AN_REPORT_RUN, AN_REPORT_GRID,
                                                 AN_REPORT_MASTER, AN_REPORT_MATERIAL};
    char sha256[AN_REPORT_SOURCES][AN_SHA256_SIZE];
    int from[AN_REPORT_SOURCES] = {-1, -1, -1, -1, -1};
    for (int i = 0; i < n; i++) {
        if (from[documents[i].role] >= 0)
            return an_fail(err, AN_E_USAGE, documents[i].given, "is the second %s document; a page shows one",
                           roles[documents[i].role]);
        from[documents[i].role] = i;
    }
    for (int k = 0; k < AN_REPORT_SOURCES; k++)
        if (from[order[k]] >= 0)
            AN_TRY(read_document(report, &documents[from[order[k]]], burst, sha256[order[k]], err));
    for (int role = 0; role < AN_REPORT_SOURCES; role++) {
        if (from[role] < 0)
            continue;
        an_report_source *source = &report->source[report->n_source++];
        name_source(source, roles[role], documents[from[role]].given);
        memcpy(source->sha256, sha256[role], sizeof source->sha256);
    }
    return AN_OK;
}

an_status an_report_read(an_report *report, char *const *paths, int n_path, int burst, an_error *err)
{
    if (n_path < 1 || n_path > AN_REPORT_SOURCES)
        return an_fail(err, AN_E_USAGE, NULL, "%d documents; a page is made of one to %d", n_path,
                       AN_REPORT_SOURCES);
    document *documents = calloc((size_t)n_path, sizeof *documents);
    if (!documents)
        return an_fail_memory(err, "the documents of a page");
    an_status status = AN_OK;
    for (int i = 0; i < n_path; i++)
        AN_CLEAN(document_open(&documents[i], paths[i], err));
    if (burst != 0) {
        bool has_run = false;
        for (int i = 0; i < n_path; i++)
            has_run = has_run || documents[i].role == AN_REPORT_RUN;
        if (!has_run)
            AN_CLEAN(
                an_fail(err, AN_E_USAGE, NULL, "a burst can only be shown where a run document is given"));
    }
    AN_CLEAN(read_in_order(report, documents, n_path, burst, err));
cleanup:
    for (int i = 0; i < n_path; i++)
        if (documents[i].file)
            fclose(documents[i].file);
    free(documents);
    return status;
}
