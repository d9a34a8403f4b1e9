/* A figure: what it holds, and writing it. Stage report. The figure copies everything it is given into blocks
 * that are released together; items keep their order within a panel, drawing is done in passes by kind.
 * Failures of the adding calls are kept and handed back when the figure is written, so that a page is written
 * without a check at every line.
 */
#include "fit/report/figure_parts.h"
#include "fit/report/markup.h"

#include <ctype.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static void keep_fault(an_figure *figure, an_status status, const char *fault)
{
    if (figure->status < 0)
        return;
    figure->status = status;
    snprintf(figure->fault, sizeof figure->fault, "%s", fault);
}

/* Zeroed memory of the figure; NULL is remembered as its failure. */
static void *take(an_figure *figure, size_t size)
{
    block *b = calloc(1, sizeof *b + size);
    if (!b) {
        keep_fault(figure, AN_E_MEMORY, "no memory for a figure");
        return NULL;
    }
    b->next = figure->blocks;
    figure->blocks = b;
    return b->payload;
}

static const char *take_text(an_figure *figure, const char *text)
{
    if (!text)
        return NULL;
    char *copy = take(figure, strlen(text) + 1);
    return copy ? strcpy(copy, text) : NULL;
}

static const double *take_array(an_figure *figure, const double *values, size_t n)
{
    if (!values || n == 0)
        return NULL;
    double *copy = take(figure, n * sizeof *copy);
    return copy ? memcpy(copy, values, n * sizeof *copy) : NULL;
}

static void take_axis(an_figure *figure, an_figure_axis *axis)
{
    axis->label = take_text(figure, axis->label);
    axis->symbol = take_text(figure, axis->symbol);
    axis->unit = take_text(figure, axis->unit);
}

static bool is_id(const char *id)
{
    if (!id || !isalpha((unsigned char)id[0]))
        return false;
    for (const char *c = id; *c; c++)
        if (!isalnum((unsigned char)*c) && *c != '-')
            return false;
    return true;
}

an_status an_figure_new(an_figure **out, const an_figure_spec *spec, an_error *err)
{
    *out = NULL;
    if (!is_id(spec->id))
        return an_fail(err, AN_E_USAGE, NULL,
                       "figure id '%s' is not a letter followed by letters, digits or hyphens",
                       spec->id ? spec->id : "");
    an_figure *figure = calloc(1, sizeof *figure);
    if (!figure)
        return an_fail_memory(err, "a figure");
    figure->id = take_text(figure, spec->id);
    figure->title = take_text(figure, spec->title);
    figure->description = take_text(figure, spec->description);
    figure->x = spec->x;
    take_axis(figure, &figure->x);
    if (figure->status < 0) {
        an_figure_free(&figure);
        return an_fail_memory(err, "a figure");
    }
    *out = figure;
    return AN_OK;
}

void an_figure_free(an_figure **figure)
{
    if (!figure || !*figure)
        return;
    block *b = (*figure)->blocks;
    while (b) {
        block *next = b->next;
        free(b);
        b = next;
    }
    free(*figure);
    *figure = NULL;
}

void an_figure_add_panel(an_figure *figure, const an_figure_axis *y, double height)
{
    if (!(height >= 40 && height <= 600)) {
        keep_fault(figure, AN_E_USAGE, "the height of a panel lies within 40..600");
        return;
    }
    panel *p = take(figure, sizeof *p);
    if (!p)
        return;
    p->y = *y;
    take_axis(figure, &p->y);
    p->height = height;
    if (figure->last)
        figure->last->next = p;
    else
        figure->first = p;
    figure->last = p;
}

/* A new item at the end of the last panel. */
static item *add_item(an_figure *figure, item_kind kind)
{
    panel *p = figure->last;
    if (!p) {
        keep_fault(figure, AN_E_USAGE, "a figure needs a panel before anything is added");
        return NULL;
    }
    item *i = take(figure, sizeof *i);
    if (!i)
        return NULL;
    i->kind = kind;
    if (p->last)
        p->last->next = i;
    else
        p->first = i;
    p->last = i;
    return i;
}

static const char *const *take_hovers(an_figure *figure, const char *const *hovers, size_t n)
{
    if (!hovers || n == 0)
        return NULL;
    const char **copy = take(figure, n * sizeof *copy);
    for (size_t i = 0; copy && i < n; i++)
        copy[i] = take_text(figure, hovers[i]);
    return copy;
}

void an_figure_add_series(an_figure *figure, const an_figure_series *series)
{
    item *i = add_item(figure, ITEM_SERIES);
    if (!i)
        return;
    i->series = *series;
    i->series.x = take_array(figure, series->x, series->n);
    i->series.y = take_array(figure, series->y, series->n);
    i->series.u = take_array(figure, series->u, series->n);
    i->series.hovers = take_hovers(figure, series->hovers, series->n);
    i->series.bars = take_text(figure, series->bars);
    i->series.name = take_text(figure, series->name);
    i->series.legend = take_text(figure, series->legend);
    if (!i->series.x || !i->series.y)
        i->series.n = 0;
    if (!(series->style.radius > 0))
        i->series.style.radius = 3;
    if (!(series->style.width > 0))
        i->series.style.width = 1.5;
}

void an_figure_add_band(an_figure *figure, const an_figure_band *band)
{
    item *i = add_item(figure, ITEM_BAND);
    if (!i)
        return;
    i->band = *band;
    i->band.x = take_array(figure, band->x, band->n);
    i->band.low = take_array(figure, band->low, band->n);
    i->band.high = take_array(figure, band->high, band->n);
    i->band.name = take_text(figure, band->name);
    if (!i->band.x || !i->band.low || !i->band.high)
        i->band.n = 0;
    if (!(band->opacity > 0))
        i->band.opacity = 0.2;
}

void an_figure_add_shade(an_figure *figure, double from, double to, an_shade kind, const char *name)
{
    item *i = add_item(figure, ITEM_SHADE);
    if (!i)
        return;
    i->shade.from = from;
    i->shade.to = to;
    i->shade.kind = kind;
    i->shade.name = take_text(figure, name);
}

void an_figure_add_rule(an_figure *figure, double x, const char *name)
{
    item *i = add_item(figure, ITEM_RULE);
    if (!i)
        return;
    i->rule.at = x;
    i->rule.name = take_text(figure, name);
}

void an_figure_add_level(an_figure *figure, double y)
{
    item *i = add_item(figure, ITEM_LEVEL);
    if (i)
        i->rule.at = y;
}

void an_figure_set_ramp(an_figure *figure, const an_figure_ramp *ramp)
{
    figure->ramp = *ramp;
    figure->ramp.label = take_text(figure, ramp->label);
    if (!ramp->color)
        figure->ramp.color = an_ramp_color;
}

bool an_figure_is_empty(const an_figure *figure)
{
    for (const panel *p = figure->first; p; p = p->next) {
        extent y = extent_of_y(p);
        if (y.low <= y.high)
            return false;
    }
    return true;
}

/* The element's start: how large, what it is called, and the hatching that its ids lead to. */
static void write_head(FILE *out, const an_figure *figure, const frame *f)
{
    fprintf(out, "<svg class=\"figure\" xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 %d ",
            AN_FIGURE_WIDTH);
    markup_coordinate(out, f->height);
    fprintf(out,
            "\" role=\"img\" aria-labelledby=\"%s-title%s%s%s\" font-family=\"system-ui, 'DejaVu Sans', "
            "sans-serif\" ",
            figure->id, figure->description ? " " : "", figure->description ? figure->id : "",
            figure->description ? "-desc" : "");
    fprintf(out, "font-size=\"%g\" fill=\"#%06x\">\n<title id=\"%s-title\">", FIGURE_TICK_SIZE, AN_COLOR_INK,
            figure->id);
    markup_plain(out, figure->title);
    fputs("</title>\n", out);
    if (figure->description) {
        fprintf(out, "<desc id=\"%s-desc\">", figure->id);
        markup_plain(out, figure->description);
        fputs("</desc>\n", out);
    }
    fprintf(out,
            "<defs><pattern id=\"%s-hatch\" width=\"7\" height=\"7\" patternUnits=\"userSpaceOnUse\" "
            "patternTransform=\"rotate(45)\"><path d=\"M0 0V7\" stroke=\"#aeb6bb\" "
            "stroke-width=\"1.6\"/></pattern></defs>\n",
            figure->id);
}

an_status an_figure_write(an_figure *figure, FILE *out, an_error *err)
{
    if (figure->status == AN_OK && !figure->first)
        keep_fault(figure, AN_E_USAGE, "a figure needs a panel");
    if (figure->status < 0)
        return an_fail(err, figure->status, NULL, "%s", figure->fault);
    frame f = frame_make(figure);
    write_head(out, figure, &f);
    draw_ramp(out, figure, &f);
    draw_legend(out, figure, &f);
    canvas c = {.out = out, .figure = figure, .f = &f, .top = f.panel_top};
    for (c.p = figure->first; c.p; c.p = c.p->next) {
        c.y = panel_scale(c.p, c.top);
        c.y_ticks = panel_ticks(c.p, &c.y);
        c.bottom = c.top + c.p->height;
        draw_axes(&c);
        draw_items(&c);
        c.top = c.bottom + panel_gap(c.p);
        c.i_panel++;
    }
    fputs("</svg>\n", out);
    return AN_OK;
}
