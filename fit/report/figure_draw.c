/* The data of a figure: shades, bands, levels, lines, error bars, markers with hover texts, rules. Stage
 * report. Painted in that order, cut off at the frame of the panel; a point without a place (not finite, not
 * positive on a log10 axis) is left out and breaks its line.
 */
#include "fit/report/figure_parts.h"
#include "fit/report/markup.h"

#include <math.h>

static void put_point(FILE *out, char command, double x, double y)
{
    fputc(command, out);
    markup_coordinate(out, x);
    fputc(' ', out);
    markup_coordinate(out, y);
}

void draw_marker_group(FILE *out, const an_figure_style *style)
{
    if (style->marker == AN_MARKER_RING)
        fprintf(out, "<g fill=\"#fff\" stroke=\"#%06x\" stroke-width=\"1.3\">", style->color);
    else if (style->marker == AN_MARKER_CROSS)
        fprintf(out, "<g fill=\"none\" stroke=\"#%06x\" stroke-width=\"1.6\">", style->color);
    else
        fprintf(out, "<g fill=\"#%06x\">", style->color);
}

const char *draw_marker(FILE *out, const mark *at, const char *close)
{
    double x = at->x, y = at->y, r = at->radius;
    if (at->marker == AN_MARKER_DISC || at->marker == AN_MARKER_RING) {
        fputs("<circle", out);
        markup_attribute(out, "cx", x);
        markup_attribute(out, "cy", y);
        markup_attribute(out, "r", r);
        fputs(close, out);
        return "circle";
    }
    fputs("<path d=\"", out);
    put_point(out, 'M', x - r, y + r);
    if (at->marker == AN_MARKER_SQUARE) {
        put_point(out, 'L', x + r, y + r);
        put_point(out, 'L', x + r, y - r);
        put_point(out, 'L', x - r, y - r);
    } else if (at->marker == AN_MARKER_TRIANGLE) {
        put_point(out, 'L', x + r, y + r);
        put_point(out, 'L', x, y - r);
    } else {
        put_point(out, 'L', x + r, y - r);
        put_point(out, 'M', x - r, y - r);
        put_point(out, 'L', x + r, y + r);
    }
    fprintf(out, "%s\"%s", at->marker == AN_MARKER_CROSS ? "" : "z", close);
    return "path";
}

/* Places inside the frame: infinite ends go to its edges. */
static double clamp_x(const canvas *c, double value)
{
    if (isinf(value))
        return value < 0 ? c->f->left : c->f->right;
    double place = scale_place(&c->f->x, value);
    return fmin(fmax(place, c->f->left), c->f->right);
}

static void draw_shade(const canvas *c, const item *i)
{
    double from = clamp_x(c, i->shade.from), to = clamp_x(c, i->shade.to);
    if (!(to > from))
        return;
    fputs("<rect", c->out);
    markup_attribute(c->out, "x", from);
    markup_attribute(c->out, "y", c->top);
    markup_attribute(c->out, "width", to - from);
    markup_attribute(c->out, "height", c->bottom - c->top);
    if (i->shade.kind == AN_SHADE_HATCH)
        fprintf(c->out, " fill=\"url(#%s-hatch)\">", c->figure->id);
    else
        fputs(" fill=\"" SHADE_TINT "\" fill-opacity=\"0.75\">", c->out);
    fputs("<title>", c->out);
    markup_plain(c->out, i->shade.name);
    fputs("</title></rect>\n", c->out);
}

/* A band is one closed outline for every unbroken stretch. */
static void draw_band(const canvas *c, const an_figure_band *band)
{
    fprintf(c->out, "<path fill=\"#%06x\" fill-opacity=\"", band->color);
    markup_fixed(c->out, band->opacity, 2);
    fputs("\" d=\"", c->out);
    size_t start = 0;
    while (start < band->n) {
        size_t end = start;
        while (end < band->n && isfinite(scale_place(&c->f->x, band->x[end])) && isfinite(band->low[end]) &&
               isfinite(scale_place(&c->y, band->high[end])))
            end++;
        for (size_t k = start; k < end; k++)
            put_point(c->out, k == start ? 'M' : 'L', scale_place(&c->f->x, band->x[k]),
                      scale_place(&c->y, band->high[k]));
        for (size_t k = end; k > start; k--) {
            double low = scale_place(&c->y, band->low[k - 1]);
            put_point(c->out, 'L', scale_place(&c->f->x, band->x[k - 1]), isnan(low) ? c->bottom + 9 : low);
        }
        if (end > start)
            fputc('z', c->out);
        start = end + 1;
    }
    fputs("\"/>\n", c->out);
}

static void draw_line(const canvas *c, const an_figure_series *s)
{
    fprintf(c->out, "<path fill=\"none\" stroke-linejoin=\"round\" stroke=\"#%06x\"%s", s->style.color,
            stroke_dashes(s->style.stroke));
    markup_attribute(c->out, "stroke-width", s->style.width);
    fputs(" d=\"", c->out);
    bool pen_down = false;
    for (size_t k = 0; k < s->n; k++) {
        double x = scale_place(&c->f->x, s->x[k]), y = scale_place(&c->y, s->y[k]);
        bool placed = isfinite(x) && isfinite(y);
        if (placed)
            put_point(c->out, pen_down ? 'L' : 'M', x, fmin(fmax(y, c->top - 2000), c->bottom + 2000));
        pen_down = placed;
    }
    fputs("\"/>\n", c->out);
}

/* Vertical lines at the points: error bars where long enough to be seen, and stems. */
static void draw_verticals(const canvas *c, const an_figure_series *s)
{
    fprintf(c->out, "<path fill=\"none\" stroke=\"#%06x\" d=\"", s->style.color);
    for (size_t k = 0; k < s->n; k++) {
        double x = scale_place(&c->f->x, s->x[k]), y = scale_place(&c->y, s->y[k]);
        if (!isfinite(x) || !isfinite(y))
            continue;
        double low = y, high = y;
        if (s->u && isfinite(s->u[k])) {
            low = scale_place(&c->y, s->y[k] - s->u[k]);
            high = scale_place(&c->y, s->y[k] + s->u[k]);
        }
        low = s->style.stems || isnan(low) ? c->bottom : low;
        if (low - high < 1)
            continue;
        put_point(c->out, 'M', x, fmax(high, c->top - 9));
        fputc('V', c->out);
        markup_coordinate(c->out, fmin(low, c->bottom + 9));
    }
    fputs("\"/>\n", c->out);
}

static void put_value(FILE *out, const char *symbol, const char *unit, double value, double u)
{
    markup_plain(out, symbol);
    fputs(" = ", out);
    if (u > 0)
        markup_with_u(out, value, u);
    else
        markup_number(out, value, 4);
    if (unit && unit[0]) {
        fputc(' ', out);
        markup_plain(out, unit);
    }
}

static void put_hover(const canvas *c, const an_figure_series *s, size_t k)
{
    fputs("<title>", c->out);
    if (s->hovers && s->hovers[k]) {
        markup_plain(c->out, s->hovers[k]);
    } else {
        markup_plain(c->out, s->name);
        fputs(": ", c->out);
        const an_figure_axis *x = &c->figure->x, *y = &c->p->y;
        put_value(c->out, x->symbol ? x->symbol : "x", x->unit, s->x[k], 0);
        fputs(", ", c->out);
        put_value(c->out, y->symbol ? y->symbol : "y", y->unit, s->y[k], s->u ? s->u[k] : 0);
        if (s->bars && s->u && s->u[k] > 0) {
            fputs(" (", c->out);
            markup_plain(c->out, s->bars);
            fputc(')', c->out);
        }
    }
    fputs("</title>", c->out);
}

static void draw_markers(const canvas *c, const an_figure_series *s)
{
    draw_marker_group(c->out, &s->style);
    for (size_t k = 0; k < s->n; k++) {
        mark at = {s->style.marker, scale_place(&c->f->x, s->x[k]), scale_place(&c->y, s->y[k]),
                   s->style.radius};
        if (!isfinite(at.x) || !isfinite(at.y))
            continue;
        bool hover = s->name || (s->hovers && s->hovers[k]);
        const char *element = draw_marker(c->out, &at, hover ? ">" : "/>");
        if (hover) {
            put_hover(c, s, k);
            fprintf(c->out, "</%s>", element);
        }
        fputc('\n', c->out);
    }
    fputs("</g>\n", c->out);
}

static void draw_series(const canvas *c, const an_figure_series *s)
{
    if (s->style.stroke != AN_STROKE_NONE)
        draw_line(c, s);
    if (s->u || s->style.stems)
        draw_verticals(c, s);
    if (s->style.marker != AN_MARKER_NONE)
        draw_markers(c, s);
}

static void draw_level(const canvas *c, double at)
{
    double y = scale_place(&c->y, at);
    if (!isfinite(y))
        return;
    fprintf(c->out, "<path stroke=\"#%06x\" fill=\"none\" d=\"", AN_COLOR_MUTED);
    put_point(c->out, 'M', c->f->left, y);
    fputc('H', c->out);
    markup_coordinate(c->out, c->f->right);
    fputs("\"/>\n", c->out);
}

static void draw_rule(const canvas *c, const item *i)
{
    double x = scale_place(&c->f->x, i->rule.at);
    if (!(x >= c->f->left && x <= c->f->right))
        return;
    fprintf(c->out, "<path stroke=\"#%06x\" stroke-dasharray=\"3 3\" fill=\"none\" d=\"", AN_COLOR_MUTED);
    put_point(c->out, 'M', x, c->top);
    fputc('V', c->out);
    markup_coordinate(c->out, c->bottom);
    fputs("\"><title>", c->out);
    markup_plain(c->out, i->rule.name);
    fputs("</title></path>\n", c->out);
}

static void draw_item(const canvas *c, const item *i)
{
    switch (i->kind) {
    case ITEM_SHADE:
        draw_shade(c, i);
        break;
    case ITEM_BAND:
        draw_band(c, &i->band);
        break;
    case ITEM_LEVEL:
        draw_level(c, i->rule.at);
        break;
    case ITEM_SERIES:
        draw_series(c, &i->series);
        break;
    case ITEM_RULE:
        draw_rule(c, i);
        break;
    }
}

/* The frame, and the path that cuts off what lies outside; drawn last so that it stands on its data's edge.
 */
static void draw_border(const canvas *c, const char *start, const char *end)
{
    fputs(start, c->out);
    markup_attribute(c->out, "x", c->f->left);
    markup_attribute(c->out, "y", c->top);
    markup_attribute(c->out, "width", c->f->right - c->f->left);
    markup_attribute(c->out, "height", c->bottom - c->top);
    fputs(end, c->out);
}

void draw_items(const canvas *c)
{
    fprintf(c->out, "<clipPath id=\"%s-clip%d\">", c->figure->id, c->i_panel);
    draw_border(c, "<rect", "/></clipPath>\n");
    fprintf(c->out, "<g clip-path=\"url(#%s-clip%d)\">\n", c->figure->id, c->i_panel);
    static const item_kind passes[] = {ITEM_SHADE, ITEM_BAND, ITEM_LEVEL, ITEM_SERIES, ITEM_RULE};
    for (size_t k = 0; k < sizeof passes / sizeof passes[0]; k++)
        for (const item *i = c->p->first; i; i = i->next)
            if (i->kind == passes[k])
                draw_item(c, i);
    fputs("</g>\n", c->out);
    draw_border(c, "<rect fill=\"none\" stroke=\"#5e6b74\"", "/>\n");
}
