/* The frame of a figure: where everything stands, grid and axes. Stage report. Margins come from the labels,
 * the room above the panels from legend and colour bar.
 */
#include "fit/report/figure_parts.h"
#include "fit/report/markup.h"

#include <math.h>

#define RAMP_HEIGHT 38.0 /* of the row of the colour bar */

scale panel_scale(const panel *p, double top)
{
    return scale_make(&p->y, extent_of_y(p), top + p->height, -p->height);
}

tick_set panel_ticks(const panel *p, const scale *y)
{
    int most = (int)(p->height / 26);
    return ticks_make(y, most > 9 ? 9 : most);
}

/* Room above a panel for the power of ten taken out of its labels. */
static double exponent_room(const panel *p)
{
    scale y = panel_scale(p, 0);
    return panel_ticks(p, &y).exponent ? 16 : 0;
}

double panel_gap(const panel *p)
{
    return p->next ? 14 + exponent_room(p->next) / 2 : 0;
}

frame frame_make(const an_figure *figure)
{
    frame f = {.right = AN_FIGURE_WIDTH - 2 * FIGURE_EDGE, .ramp_top = 2};
    double widest = 0, panels = 0;
    bool labelled = false;
    for (const panel *p = figure->first; p; p = p->next) {
        scale y = panel_scale(p, 0);
        tick_set ticks = panel_ticks(p, &y);
        for (int k = 0; k < ticks.n_major; k++)
            widest = fmax(widest, tick_width(&ticks, k, FIGURE_TICK_SIZE));
        panels += p->height + panel_gap(p);
        labelled = labelled || p->y.label;
    }
    f.left = widest + 9 + (labelled ? 22 : 2);
    f.legend_top = f.ramp_top + (figure->ramp.label ? RAMP_HEIGHT : 0);
    f.panel_top = f.legend_top + legend_height(figure) + 8 + exponent_room(figure->first);
    f.x = scale_make(&figure->x, extent_of_x(figure), f.left, f.right - f.left);
    f.x_ticks = ticks_make(&f.x, f.x.kind == AN_AXIS_LOG10 ? 9 : 7);
    f.height = f.panel_top + panels + 22 + (figure->x.label ? 24 : 0) + (f.x_ticks.exponent ? 6 : 0);
    return f;
}

/* The start of a text element; its content and end follow. */
void text_at(FILE *out, const char *anchor, double x, double y)
{
    fprintf(out, "<text text-anchor=\"%s\"", anchor);
    markup_attribute(out, "x", x);
    markup_attribute(out, "y", y);
    fputc('>', out);
}

/* Grid lines of one direction, from edge to edge of the panel, in one path. */
static void grid_lines(const canvas *c, const scale *s, const double *at, int n)
{
    bool vertical = s == &c->f->x;
    for (int k = 0; k < n; k++) {
        double place = scale_place(s, at[k]);
        fputc('M', c->out);
        markup_coordinate(c->out, vertical ? place : c->f->left);
        fputc(' ', c->out);
        markup_coordinate(c->out, vertical ? c->top : place);
        fputc(vertical ? 'V' : 'H', c->out);
        markup_coordinate(c->out, vertical ? c->bottom : c->f->right);
    }
}

static void draw_grid(const canvas *c)
{
    const scale *x = &c->f->x;
    const tick_set *x_ticks = &c->f->x_ticks, *y_ticks = &c->y_ticks;
    fputs("<path fill=\"none\" stroke=\"#f0f2f3\" d=\"", c->out);
    grid_lines(c, x, x_ticks->minor, x_ticks->n_minor);
    grid_lines(c, &c->y, y_ticks->minor, y_ticks->n_minor);
    fputs("\"/>\n<path fill=\"none\" stroke=\"#d9dee1\" d=\"", c->out);
    grid_lines(c, x, x_ticks->major, x_ticks->n_major);
    grid_lines(c, &c->y, y_ticks->major, y_ticks->n_major);
    fputs("\"/>\n", c->out);
}

/* The power of ten taken out of the labels, beside the axis. */
static void draw_exponent(FILE *out, int exponent, const char *anchor, double x, double y)
{
    if (exponent == 0)
        return;
    char text[32];
    snprintf(text, sizeof text,
             "\xc3\x97\xc2\xa0"
             "10^{%s%d}",
             exponent < 0 ? "\xe2\x88\x92" : "", exponent < 0 ? -exponent : exponent);
    text_at(out, anchor, x, y);
    markup_label(out, text, MARKUP_SVG, FIGURE_TICK_SIZE);
    fputs("</text>\n", out);
}

/* A label longer than its panel is set smaller, so that it stays clear of its neighbours'. */
static double y_label_size(const panel *p)
{
    double width = markup_width(p->y.label, FIGURE_LABEL_SIZE);
    double room = p->height + 8;
    return width <= room ? FIGURE_LABEL_SIZE : fmax(FIGURE_LABEL_SIZE * room / width, 10);
}

static void draw_y_labels(const canvas *c)
{
    for (int k = 0; k < c->y_ticks.n_major; k++) {
        text_at(c->out, "end", c->f->left - 6, scale_place(&c->y, c->y_ticks.major[k]) + 4.5);
        tick_write(c->out, &c->y_ticks, k, FIGURE_TICK_SIZE);
        fputs("</text>", c->out);
    }
    fputc('\n', c->out);
    draw_exponent(c->out, c->y_ticks.exponent, "start", c->f->left, c->top - 6);
    if (!c->p->y.label)
        return;
    double size = y_label_size(c->p);
    fputs("<text text-anchor=\"middle\"", c->out);
    markup_attribute(c->out, "font-size", size);
    fputs(" transform=\"translate(15 ", c->out);
    markup_coordinate(c->out, c->top + c->p->height / 2);
    fputs(") rotate(-90)\">", c->out);
    markup_label(c->out, c->p->y.label, MARKUP_SVG, size);
    fputs("</text>\n", c->out);
}

static void draw_x_labels(const canvas *c)
{
    for (int k = 0; k < c->f->x_ticks.n_major; k++) {
        text_at(c->out, "middle", scale_place(&c->f->x, c->f->x_ticks.major[k]), c->bottom + 18);
        tick_write(c->out, &c->f->x_ticks, k, FIGURE_TICK_SIZE);
        fputs("</text>", c->out);
    }
    fputc('\n', c->out);
    draw_exponent(c->out, c->f->x_ticks.exponent, "end", c->f->right, c->bottom + 38);
    if (!c->figure->x.label)
        return;
    fprintf(c->out, "<text text-anchor=\"middle\" font-size=\"%g\"", FIGURE_LABEL_SIZE);
    markup_attribute(c->out, "x", (c->f->left + c->f->right) / 2);
    markup_attribute(c->out, "y", c->bottom + 39);
    fputc('>', c->out);
    markup_label(c->out, c->figure->x.label, MARKUP_SVG, FIGURE_LABEL_SIZE);
    fputs("</text>\n", c->out);
}

void draw_axes(const canvas *c)
{
    draw_grid(c);
    draw_y_labels(c);
    if (!c->p->next)
        draw_x_labels(c);
}
