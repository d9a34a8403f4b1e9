/* What was noticed, and what to do about it: remarks of all documents, each kind once, the weightiest first.
 * Stage report. Documents carry on the remarks of those they stand on; the same remark about the same burst
 * is counted once.
 */
#include "fit/report/page.h"

#include <stdlib.h>
#include <string.h>

/* Remarks of all documents by reference. */
typedef struct gathered {
    const an_remark **rows; /* [n] owned list of what the documents own */
    size_t n, room;
} gathered;

/* Every list of remarks in a report, one after another, NULL past the end. */
static const an_remark_list *remark_list(const an_report *r, size_t i)
{
    const an_remark_list *heads[] = {
        r->has_run ? &r->run.remarks : NULL,           r->has_points ? &r->points.remarks : NULL,
        r->has_grid ? &r->grid.remarks : NULL,         r->has_master ? &r->master.remarks : NULL,
        r->has_material ? &r->material.remarks : NULL, &r->burst_remarks,
    };
    static const an_remark_list none = {0};
    size_t n_heads = sizeof heads / sizeof heads[0];
    if (i < n_heads)
        return heads[i] ? heads[i] : &none;
    i -= n_heads;
    size_t n_points = r->has_points ? (size_t)r->points.n_point : 0;
    if (i < n_points)
        return &r->points.point[i].remarks;
    i -= n_points;
    size_t n_cells = r->has_grid && !r->has_points ? (size_t)r->grid.n_cell : 0;
    return i < n_cells ? &r->grid.cell[i].remarks : NULL;
}

static int by_weight(const void *a, const void *b)
{
    const an_remark *first = *(const an_remark *const *)a, *second = *(const an_remark *const *)b;
    if (first->severity != second->severity)
        return first->severity < second->severity ? 1 : -1;
    int order = strcmp(first->kind->code, second->kind->code);
    if (order != 0)
        return order;
    if (first->burst != second->burst)
        return first->burst < second->burst ? -1 : 1;
    return strcmp(first->text, second->text);
}

static an_status gather(const an_report *r, gathered *all, an_error *err)
{
    const an_remark_list *list;
    size_t n = 0;
    for (size_t i = 0; (list = remark_list(r, i)); i++)
        n += list->n;
    all->rows = calloc(n + 1, sizeof *all->rows);
    if (!all->rows)
        return an_fail_memory(err, "the remarks");
    for (size_t i = 0; (list = remark_list(r, i)); i++)
        for (size_t k = 0; k < list->n; k++)
            all->rows[all->n++] = &list->rows[k];
    qsort(all->rows, all->n, sizeof *all->rows, by_weight);
    size_t kept = 0;
    for (size_t i = 0; i < all->n; i++)
        if (kept == 0 || by_weight(&all->rows[kept - 1], &all->rows[i]) != 0)
            all->rows[kept++] = all->rows[i];
    all->n = kept;
    return AN_OK;
}

/* Numbers of the bursts of rows first..last, runs of neighbours shortened. */
static void write_bursts(FILE *out, const an_remark *const *rows, size_t n)
{
    fputs("<td class=\"b\">", out);
    long written = 0, start = -1, end = -1;
    for (size_t i = 0; i <= n; i++) {
        long burst = i < n ? rows[i]->burst : -1;
        if (start >= 0 && burst >= 0 && (burst == end || burst == end + 1)) {
            end = burst;
            continue;
        }
        if (start > 0)
            fprintf(out,
                    start == end       ? "%s%ld"
                    : end == start + 1 ? "%s%ld, %ld"
                                       : "%s%ld to %ld",
                    written++ ? ", " : "", start, end);
        else if (start == 0)
            fprintf(out, "%swhole run", written++ ? ", " : "");
        start = end = burst;
    }
    fputs("</td>", out);
}

/* All remarks of one code and severity as one row; the first text stands, the others unfold. */
static void remark_rows(FILE *out, const an_remark *const *rows, size_t n)
{
    fputs("<tr>", out);
    cell_text(out, an_severity_name(rows[0]->severity));
    cell_text(out, rows[0]->kind->code);
    cell_integer(out, (long)n);
    write_bursts(out, rows, n);
    fputs("<td class=\"w\">", out);
    markup_plain(out, rows[0]->text);
    if (n > 1) {
        fprintf(out, "<details><summary>%zu more</summary><ul>", n - 1);
        for (size_t i = 1; i < n; i++) {
            fputs("<li>", out);
            if (rows[i]->burst > 0)
                fprintf(out, "Burst %ld: ", rows[i]->burst);
            markup_plain(out, rows[i]->text);
            fputs("</li>", out);
        }
        fputs("</ul></details>", out);
    }
    fputs("</td>", out);
    cell_words(out, rows[0]->kind->action);
    fputs("</tr>\n", out);
}

void section_remarks(page *p)
{
    static const char *const heads[] = {"Weight",           "Code",       "Times", "Bursts",
                                        "What was noticed", "What to do", NULL};
    gathered all = {0};
    an_status status = gather(p->report, &all, p->err);
    if (status < 0) {
        p->status = status;
        return;
    }
    fputs("<section>\n<h2>Remarks</h2>\n", p->out);
    if (all.n == 0)
        fputs("<p>Nothing was noticed.</p>\n", p->out);
    else
        table_begin(p, "Remarks, the weightiest first", heads);
    for (size_t i = 0; i < all.n;) {
        size_t end = i + 1;
        while (end < all.n && all.rows[end]->kind == all.rows[i]->kind &&
               all.rows[end]->severity == all.rows[i]->severity)
            end++;
        remark_rows(p->out, all.rows + i, end - i);
        i = end;
    }
    if (all.n > 0)
        table_end(p->out);
    fputs("</section>\n", p->out);
    free(all.rows);
}
