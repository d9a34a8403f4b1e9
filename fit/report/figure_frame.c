/* What stands around the data of a figure: layout, colour bar, legend, grid and axes. Stage report. The
 * legend is set in rows above the panels, wrapped by estimated widths, so that it neither lies on data nor on
 * itself.
 */
#include "fit/report/figure_parts.h"
#include "fit/report/markup.h"

#include <math.h>
#include <string.h>

#define EDGE         8.0 /* [viewBox unit] free on the right and on top */
#define LEGEND_ROW   20.0
#define LEGEND_MARK  26.0 /* width of a sample in the legend */
#define LEGEND_SPACE 14.0 /* between entries */
#define RAMP_HEIGHT  38.0 /* of the row of the colour bar */
#define RAMP_LENGTH  190.0
#define RAMP_STOPS   16

enum { LEGEND_ENTRIES = 16 };

typedef struct legend {
    const item *entry[LEGEND_ENTRIES];
    int n;
} legend;

static const char *item_name(const item *i)
{
    switch (i->kind) {
    case ITEM_SERIES:
        return i->series.legend;
    case ITEM_BAND:
        return i->band.name;
    case ITEM_SHADE:
        return i->shade.name;
    case ITEM_RULE:
        return i->rule.name;
    default:
        return NULL;
    }
}

/* One entry for each name, the first that bears it. */
static legend legend_make(const an_figure *figure)
{
    legend l = {.n = 0};
    for (const panel *p = figure->first; p; p = p->next)
        for (const item *i = p->first; i; i = i->next) {
            const char *name = item_name(i);
            bool known = !name || l.n == LEGEND_ENTRIES;
            for (int k = 0; k < l.n && !known; k++)
                known = strcmp(item_name(l.entry[k]), name) == 0;
            if (!known)
                l.entry[l.n++] = i;
        }
    return l;
}

static double entry_width(const item *i)
{
    return LEGEND_MARK + 5 + markup_width(item_name(i), FIGURE_TICK_SIZE);
}

/* Whether an entry that would start at x goes into a new row. */
static bool wraps(const item *i, double x)
{
    return x > EDGE && x + entry_width(i) > AN_FIGURE_WIDTH - EDGE;
}

double legend_height(const an_figure *figure)
{
    legend l = legend_make(figure);
    if (l.n == 0)
        return 0;
    int rows = 1;
    double x = EDGE;
    for (int k = 0; k < l.n; k++) {
        if (wraps(l.entry[k], x)) {
            rows++;
            x = EDGE;
        }
        x += entry_width(l.entry[k]) + LEGEND_SPACE;
    }
    return rows * LEGEND_ROW + 4;
}

/* A line of the legend or of the data: dashes of a stroke as an attribute. */
const char *stroke_dashes(an_stroke stroke)
{
    switch (stroke) {
    case AN_STROKE_DASHED:
        return " stroke-dasharray=\"6 4\"";
    case AN_STROKE_DOTTED:
        return " stroke-dasharray=\"2 3\"";
    default:
        return "";
    }
}

static void series_sample(FILE *out, const an_figure_series *s, double x, double y)
{
    an_figure_style style = s->style;
    style.color = s->neutral ? AN_COLOR_INK : style.color;
    if (style.stroke != AN_STROKE_NONE) {
        fputs("<line", out);
        markup_attribute(out, "x1", x);
        markup_attribute(out, "x2", x + LEGEND_MARK);
        markup_attribute(out, "y1", y);
        markup_attribute(out, "y2", y);
        markup_attribute(out, "stroke-width", style.width);
        fprintf(out, " stroke=\"#%06x\"%s/>", style.color, stroke_dashes(style.stroke));
    }
    if (style.marker == AN_MARKER_NONE)
        return;
    draw_marker_group(out, &style);
    draw_marker(out, style.marker, x + LEGEND_MARK / 2, y, fmin(fmax(style.radius, 2.5), 4), "/>");
    fputs("</g>", out);
}

static void rule_sample(FILE *out, double x, double y)
{
    fprintf(out, "<line stroke=\"#%06x\" stroke-dasharray=\"3 3\"", AN_COLOR_MUTED);
    markup_attribute(out, "x1", x + LEGEND_MARK / 2);
    markup_attribute(out, "x2", x + LEGEND_MARK / 2);
    markup_attribute(out, "y1", y - 8);
    markup_attribute(out, "y2", y + 8);
    fputs("/>", out);
}

static void area_sample(FILE *out, const an_figure *figure, const item *i, double x, double y)
{
    fputs("<rect", out);
    markup_attribute(out, "x", x);
    markup_attribute(out, "y", y - 6);
    markup_attribute(out, "width", LEGEND_MARK);
    fputs(" height=\"12\"", out);
    if (i->kind == ITEM_BAND) {
        fprintf(out, " fill=\"#%06x\" fill-opacity=\"", i->band.neutral ? AN_COLOR_INK : i->band.color);
        markup_fixed(out, i->band.opacity, 2);
        fputs("\"/>", out);
    } else if (i->shade.kind == AN_SHADE_HATCH) {
        fprintf(out, " fill=\"url(#%s-hatch)\" stroke=\"#aeb6bb\"/>", figure->id);
    } else {
        fputs(" fill=\"" SHADE_TINT "\" stroke=\"#aeb6bb\"/>", out);
    }
}

/* The start of a text element; its content and end follow. */
static void text_at(FILE *out, const char *anchor, double x, double y)
{
    fprintf(out, "<text text-anchor=\"%s\"", anchor);
    markup_attribute(out, "x", x);
    markup_attribute(out, "y", y);
    fputc('>', out);
}

void draw_legend(FILE *out, const an_figure *figure, const frame *f)
{
    legend l = legend_make(figure);
    double x = EDGE, y = f->legend_top + LEGEND_ROW / 2;
    for (int k = 0; k < l.n; k++) {
        const item *i = l.entry[k];
        if (wraps(i, x)) {
            x = EDGE;
            y += LEGEND_ROW;
        }
        if (i->kind == ITEM_SERIES)
            series_sample(out, &i->series, x, y);
        else if (i->kind == ITEM_RULE)
            rule_sample(out, x, y);
        else
            area_sample(out, figure, i, x, y);
        text_at(out, "start", x + LEGEND_MARK + 5, y + 4.5);
        markup_plain(out, item_name(i));
        fputs("</text>\n", out);
        x += entry_width(i) + LEGEND_SPACE;
    }
}

static void ramp_gradient(FILE *out, const an_figure *figure)
{
    fprintf(out, "<defs><linearGradient id=\"%s-ramp\">", figure->id);
    for (int k = 0; k <= RAMP_STOPS; k++) {
        fputs("<stop offset=\"", out);
        markup_fixed(out, (double)k / RAMP_STOPS, 4);
        fprintf(out, "\" stop-color=\"#%06x\"/>", figure->ramp.color((double)k / RAMP_STOPS));
    }
    fputs("</linearGradient></defs>\n", out);
}

void draw_ramp(FILE *out, const an_figure *figure, const frame *f)
{
    if (!figure->ramp.label)
        return;
    ramp_gradient(out, figure);
    double x = f->right - RAMP_LENGTH - 12, y = f->ramp_top + 6;
    fputs("<rect height=\"11\"", out);
    markup_attribute(out, "x", x);
    markup_attribute(out, "y", y);
    markup_attribute(out, "width", RAMP_LENGTH);
    fprintf(out, " fill=\"url(#%s-ramp)\"/>\n", figure->id);
    text_at(out, "end", x - 10, y + 10);
    markup_label(out, figure->ramp.label, MARKUP_SVG, FIGURE_TICK_SIZE);
    fputs("</text>\n", out);
    an_figure_axis axis = {.scale = figure->ramp.scale, .from = figure->ramp.from, .to = figure->ramp.to};
    scale s = scale_make(&axis, (extent){axis.from, axis.to}, x, RAMP_LENGTH);
    tick_set ticks = ticks_make(&s, s.kind == AN_AXIS_LOG10 ? 7 : 5);
    for (int k = 0; k < ticks.n_major; k++) {
        text_at(out, "middle", scale_place(&s, ticks.major[k]), y + 25);
        tick_write(out, &ticks, k, FIGURE_TICK_SIZE);
        fputs("</text>", out);
    }
    fputc('\n', out);
}

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
    frame f = {.right = AN_FIGURE_WIDTH - 2 * EDGE, .ramp_top = 2};
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

/* Grid lines of one direction in one path. */
static void grid_lines(FILE *out, const scale *s, const double *at, int n, int vertical, double low,
                       double high)
{
    for (int k = 0; k < n; k++) {
        double place = scale_place(s, at[k]);
        fputc('M', out);
        markup_coordinate(out, vertical ? place : low);
        fputc(' ', out);
        markup_coordinate(out, vertical ? low : place);
        fputc(vertical ? 'V' : 'H', out);
        markup_coordinate(out, high);
    }
}

static void draw_grid(FILE *out, const frame *f, const scale *y, const tick_set *ticks, double top,
                      double bottom)
{
    fputs("<path fill=\"none\" stroke=\"#f0f2f3\" d=\"", out);
    grid_lines(out, &f->x, f->x_ticks.minor, f->x_ticks.n_minor, 1, top, bottom);
    grid_lines(out, y, ticks->minor, ticks->n_minor, 0, f->left, f->right);
    fputs("\"/>\n<path fill=\"none\" stroke=\"#d9dee1\" d=\"", out);
    grid_lines(out, &f->x, f->x_ticks.major, f->x_ticks.n_major, 1, top, bottom);
    grid_lines(out, y, ticks->major, ticks->n_major, 0, f->left, f->right);
    fputs("\"/>\n", out);
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

static void draw_y_labels(FILE *out, const frame *f, const panel *p, const scale *y, const tick_set *ticks)
{
    double top = y->origin + y->length;
    for (int k = 0; k < ticks->n_major; k++) {
        text_at(out, "end", f->left - 6, scale_place(y, ticks->major[k]) + 4.5);
        tick_write(out, ticks, k, FIGURE_TICK_SIZE);
        fputs("</text>", out);
    }
    fputc('\n', out);
    draw_exponent(out, ticks->exponent, "start", f->left, top - 6);
    if (!p->y.label)
        return;
    double size = y_label_size(p);
    fputs("<text text-anchor=\"middle\"", out);
    markup_attribute(out, "font-size", size);
    fputs(" transform=\"translate(15 ", out);
    markup_coordinate(out, top + p->height / 2);
    fputs(") rotate(-90)\">", out);
    markup_label(out, p->y.label, MARKUP_SVG, size);
    fputs("</text>\n", out);
}

static void draw_x_labels(FILE *out, const an_figure *figure, const frame *f, double bottom)
{
    for (int k = 0; k < f->x_ticks.n_major; k++) {
        text_at(out, "middle", scale_place(&f->x, f->x_ticks.major[k]), bottom + 18);
        tick_write(out, &f->x_ticks, k, FIGURE_TICK_SIZE);
        fputs("</text>", out);
    }
    fputc('\n', out);
    draw_exponent(out, f->x_ticks.exponent, "end", f->right, bottom + 38);
    if (!figure->x.label)
        return;
    fprintf(out, "<text text-anchor=\"middle\" font-size=\"%g\"", FIGURE_LABEL_SIZE);
    markup_attribute(out, "x", (f->left + f->right) / 2);
    markup_attribute(out, "y", bottom + 39);
    fputc('>', out);
    markup_label(out, figure->x.label, MARKUP_SVG, FIGURE_LABEL_SIZE);
    fputs("</text>\n", out);
}

void draw_axes(FILE *out, const an_figure *figure, const frame *f, const panel *p, double top, int is_last)
{
    scale y = panel_scale(p, top);
    tick_set ticks = panel_ticks(p, &y);
    double bottom = top + p->height;
    draw_grid(out, f, &y, &ticks, top, bottom);
    draw_y_labels(out, f, p, &y, &ticks);
    if (is_last)
        draw_x_labels(out, figure, f, bottom);
}
