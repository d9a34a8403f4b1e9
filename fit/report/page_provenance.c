/* Where everything came from: the documents shown, how each was made, from what and with which choices. Stage
 * report. Every input is named with its SHA-256, so that the page can be checked against the files.
 */
#include "fit/report/page.h"

#include <string.h>

static const an_made *made_of(const an_report *r, const char *role)
{
    if (strcmp(role, "run") == 0)
        return &r->run.made;
    if (strcmp(role, "points") == 0)
        return &r->points.made;
    if (strcmp(role, "grid") == 0)
        return &r->grid.made;
    return strcmp(role, "master") == 0 ? &r->master.made : &r->material.made;
}

static void cell_hash(FILE *out, const char *hash)
{
    fputs("<td><code>", out);
    markup_plain(out, hash);
    fputs("</code></td>", out);
}

static void table_documents(page *p)
{
    static const char *const heads[] = {"Document", "File", "Made by", "At", "SHA-256", NULL};
    table_begin(p, "Documents on this page", heads);
    for (int i = 0; i < p->report->n_source; i++) {
        const an_report_source *source = &p->report->source[i];
        const an_made *made = made_of(p->report, source->role);
        fputs("<tr>", p->out);
        cell_text(p->out, source->role);
        cell_text(p->out, source->file);
        fputs("<td>", p->out);
        markup_plain(p->out, made->by);
        fputc(' ', p->out);
        markup_plain(p->out, made->version);
        fputs("</td>", p->out);
        cell_text(p->out, made->at);
        cell_hash(p->out, source->sha256);
        fputs("</tr>\n", p->out);
    }
    table_end(p->out);
}

/* Whether an input was already listed by an earlier document. */
static bool is_known(const an_report *r, int i_source, size_t i_input)
{
    const an_made_input *input = &made_of(r, r->source[i_source].role)->inputs[i_input];
    for (int s = 0; s <= i_source; s++) {
        const an_made *made = made_of(r, r->source[s].role);
        size_t end = s == i_source ? i_input : made->n_inputs;
        for (size_t k = 0; k < end; k++)
            if (strcmp(made->inputs[k].sha256, input->sha256) == 0 &&
                strcmp(made->inputs[k].role, input->role) == 0)
                return true;
    }
    return false;
}

static void table_inputs(page *p)
{
    static const char *const heads[] = {"Input", "File", "Read for", "SHA-256", NULL};
    table_begin(p, "Inputs", heads);
    for (int i = 0; i < p->report->n_source; i++) {
        const an_made *made = made_of(p->report, p->report->source[i].role);
        for (size_t k = 0; k < made->n_inputs; k++) {
            if (is_known(p->report, i, k))
                continue;
            fputs("<tr>", p->out);
            cell_text(p->out, made->inputs[k].role);
            cell_text(p->out, made->inputs[k].path);
            cell_text(p->out, p->report->source[i].role);
            cell_hash(p->out, made->inputs[k].sha256);
            fputs("</tr>\n", p->out);
        }
    }
    table_end(p->out);
}

/* The makers before the last document that is shown, oldest first. */
static void write_chain(page *p)
{
    if (p->report->n_source == 0)
        return;
    const an_made *last = made_of(p->report, p->report->source[p->report->n_source - 1].role);
    fputs("<p>Chain, oldest first: ", p->out);
    for (size_t k = 0; k < last->n_chain; k++) {
        markup_plain(p->out, last->chain[k].by);
        fputc(' ', p->out);
        markup_plain(p->out, last->chain[k].version);
        fputs(", ", p->out);
    }
    markup_plain(p->out, last->by);
    fputc(' ', p->out);
    markup_plain(p->out, last->version);
    fputs(".</p>\n", p->out);
}

static void table_choices(page *p)
{
    static const char *const heads[] = {"Choice", "Value", "Unit", "In force for", NULL};
    fputs("<details><summary>Choices in force</summary>\n", p->out);
    table_begin(p, "Choices in force", heads);
    for (int i = 0; i < p->report->n_source; i++) {
        const an_made *made = made_of(p->report, p->report->source[i].role);
        for (size_t k = 0; k < made->n_choices; k++) {
            fputs("<tr>", p->out);
            cell_text(p->out, made->choices[k].name);
            cell_text(p->out, made->choices[k].value);
            cell_text(p->out, strcmp(made->choices[k].unit, "1") == 0 ? "" : made->choices[k].unit);
            cell_text(p->out, p->report->source[i].role);
            fputs("</tr>\n", p->out);
        }
    }
    table_end(p->out);
    fputs("</details>\n", p->out);
}

void section_provenance(page *p)
{
    fputs("<section>\n<h2>Provenance</h2>\n", p->out);
    table_documents(p);
    table_inputs(p);
    write_chain(p);
    table_choices(p);
    fputs("</section>\n", p->out);
}
