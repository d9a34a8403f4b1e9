/* What the sections of the page share: numbered figures, tables in their own scrolling box, and which
 * document speaks for what. Stage report.
 */
#include "fit/report/page.h"

#include <ctype.h>
#include <math.h>
#include <string.h>

static void keep(page *p, an_status status)
{
    if (status < 0 && p->status >= 0)
        p->status = status;
}

an_figure *page_figure_new(page *p, const an_figure_spec *spec)
{
    an_figure *figure = NULL;
    if (p->status >= 0)
        keep(p, an_figure_new(&figure, spec, p->err));
    return figure;
}

void page_figure_end(page *p, an_figure **figure, const char *caption)
{
    if (!*figure)
        return;
    fputs("<figure>\n", p->out);
    if (an_figure_is_empty(*figure))
        fputs(
            "<p class=\"absent\">Nothing to draw: the documents hold no finite value for this figure.</p>\n",
            p->out);
    else
        keep(p, an_figure_write(*figure, p->out, p->err));
    fprintf(p->out, "<figcaption><b>Figure %d.</b> %s</figcaption>\n</figure>\n", ++p->n_figure, caption);
    an_figure_free(figure);
}

void page_ramp_temperature(const page *p, an_figure *figure)
{
    an_figure_set_ramp(figure, &(an_figure_ramp){.label = "Temperature (°C)",
                                                 .from = p->cells.temperature_C[0],
                                                 .to = p->cells.temperature_C[1]});
}

void page_sentence(FILE *out, const char *text)
{
    size_t n = strlen(text);
    if (n == 0)
        return;
    bool lower = islower((unsigned char)text[0]) && isascii(text[0]);
    const char capital[2] = {(char)toupper((unsigned char)text[0]), '\0'};
    markup_plain(out, lower ? capital : "");
    markup_plain(out, lower ? text + 1 : text);
    if (!strchr(".!?", text[n - 1]))
        fputc('.', out);
}

void page_absent(page *p, const char *what, const char *why)
{
    fputs("<p class=\"absent\"><b>", p->out);
    markup_plain(p->out, what);
    fputs("</b> ", p->out);
    page_sentence(p->out, why);
    fputs("</p>\n", p->out);
}

const char *page_law_name(an_law_kind kind)
{
    switch (kind) {
    case AN_LAW_WLF:
        return "WLF";
    case AN_LAW_ARRHENIUS:
        return "Arrhenius";
    case AN_LAW_VFT:
        return "VFT";
    case AN_LAW_CROSSOVER:
        return "WLF over Arrhenius";
    case AN_LAW_POLYNOMIAL:
        return "polynomial";
    default:
        return "none";
    }
}

const an_specimen *page_specimen(const an_report *report)
{
    if (report->has_run)
        return &report->run.specimen;
    if (report->has_points)
        return &report->points.specimen;
    if (report->has_grid)
        return &report->grid.specimen;
    if (report->has_master)
        return &report->master.specimen;
    return report->has_material ? &report->material.specimen : NULL;
}

const an_assessment *page_assessment(const an_report *report)
{
    if (report->has_grid)
        return &report->grid.assessment;
    return report->has_master ? &report->master.assessment : NULL;
}

const char *page_why(const an_report *report, an_report_role role, const char *otherwise)
{
    for (int earlier = role; earlier >= AN_REPORT_RUN; earlier--)
        if (report->missing[earlier][0])
            return report->missing[earlier];
    return otherwise;
}

const char *page_no_material(const an_report *report)
{
    if (report->has_material)
        return NULL;
    if (report->has_master && report->master.simplicity == AN_COMPLEX)
        return "No spectrum was handed over: the isotherms do not superpose, so that one spectrum with one "
               "shift "
               "would not describe this material outside the measured temperatures and frequencies";
    return page_why(report, AN_REPORT_MATERIAL,
                    report->has_master
                        ? "No material document was given to this page"
                        : "No spectrum was made: the isotherms were not joined to a master curve");
}

const an_reading *page_reading(const an_grid *grid, an_reading_kind kind)
{
    const an_reading *usual = NULL;
    for (int i = 0; i < grid->n_reading; i++) {
        const an_reading *r = &grid->reading[i];
        if (r->kind == kind && isfinite(r->temperature_K) &&
            (!usual || fabs(log(r->frequency_Hz)) < fabs(log(usual->frequency_Hz))))
            usual = r;
    }
    return usual;
}

void cell_text(FILE *out, const char *text)
{
    fputs("<td>", out);
    markup_plain(out, text);
    fputs("</td>", out);
}

void cell_words(FILE *out, const char *text)
{
    fputs("<td class=\"w\">", out);
    markup_plain(out, text);
    fputs("</td>", out);
}

void cell_number(FILE *out, double value, int digits)
{
    fputs("<td class=\"n\">", out);
    markup_number(out, value, digits);
    fputs("</td>", out);
}

void cell_fixed(FILE *out, double value, int decimals)
{
    fputs("<td class=\"n\">", out);
    if (isfinite(value))
        markup_fixed(out, value, decimals);
    else
        fputs("–", out);
    fputs("</td>", out);
}

void cell_with_u(FILE *out, double value, double u)
{
    fputs("<td class=\"n\">", out);
    markup_with_u(out, value, u);
    fputs("</td>", out);
}

void cell_integer(FILE *out, long value)
{
    fprintf(out, "<td class=\"n\">%ld</td>", value);
}

void term_text(FILE *out, const char *name, const char *text)
{
    if (!text || !text[0])
        return;
    fprintf(out, "<dt>%s</dt><dd>", name);
    markup_plain(out, text);
    fputs("</dd>\n", out);
}

/* A head with the modulus's letter put in. */
static void write_head_text(page *p, const char *head)
{
    char text[96];
    size_t n = 0;
    for (; *head && n < sizeof text - 1; head++)
        text[n++] = *head == '@' ? p->letter : *head;
    text[n] = '\0';
    fputs("<th scope=\"col\">", p->out);
    markup_label(p->out, text, MARKUP_HTML, 0);
    fputs("</th>", p->out);
}

void table_begin(page *p, const char *caption, const char *const *heads)
{
    fputs("<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"", p->out);
    markup_plain(p->out, caption);
    fputs("\"><table>\n<caption><span>", p->out);
    markup_plain(p->out, caption);
    fputs("</span></caption>\n<thead><tr>", p->out);
    for (; *heads; heads++)
        write_head_text(p, *heads);
    fputs("</tr></thead>\n<tbody>\n", p->out);
}

void table_end(FILE *out)
{
    fputs("</tbody></table></div>\n", out);
}
