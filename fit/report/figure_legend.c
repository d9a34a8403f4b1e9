/* What stands above the panels of a figure: the colour bar and the legend. Stage report. The legend is set in
 * rows wrapped by estimated widths, so that it neither lies on data nor on itself.
 */
#include "fit/report/figure_parts.h"
#include "fit/report/markup.h"

#include <math.h>
#include <string.h>

#define LEGEND_ROW   20.0
#define LEGEND_MARK  26.0 /* width of a sample in the legend */
#define LEGEND_SPACE 14.0 /* between entries */
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
    return x > FIGURE_EDGE && x + entry_width(i) > AN_FIGURE_WIDTH - FIGURE_EDGE;
}

double legend_height(const an_figure *figure)
{
    legend l = legend_make(figure);
    if (l.n == 0)
        return 0;
    int rows = 1;
    double x = FIGURE_EDGE;
    for (int k = 0; k < l.n; k++) {
        if (wraps(l.entry[k], x)) {
            rows++;
            x = FIGURE_EDGE;
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
    mark at = {style.marker, x + LEGEND_MARK / 2, y, fmin(fmax(style.radius, 2.5), 4)};
    draw_marker(out, &at, "/>");
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

void draw_legend(FILE *out, const an_figure *figure, const frame *f)
{
    legend l = legend_make(figure);
    double x = FIGURE_EDGE, y = f->legend_top + LEGEND_ROW / 2;
    for (int k = 0; k < l.n; k++) {
        const item *i = l.entry[k];
        if (wraps(i, x)) {
            x = FIGURE_EDGE;
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
