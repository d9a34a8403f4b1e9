/* anelast/figure.h: one figure as inline SVG, and the colour ramp of temperature. Floor fit, folder report.
 *
 * A figure has one horizontal axis shared by one or more panels that stand under one another, a legend and, where it
 * is asked for, a colour bar, both above the panels so that they never lie on data. Ranges, ticks and margins are found
 * from what was added. The same calls give the same bytes: no time, no locale, no pointer order. The SVG stands alone:
 * no script, no style sheet, no file from outside; sizes are in units of its viewBox, which is AN_FIGURE_WIDTH wide.
 *
 * Text comes in two kinds. `plain` text is shown as it is, escaped. `label` text is written by the program: in it
 * ^{...} is a superscript and _{...} a subscript, the rest is escaped too.
 *
 * Adding never fails in the caller's face: the first failure is kept and returned by an_figure_write.
 */
#ifndef ANELAST_FIGURE_H
#define ANELAST_FIGURE_H

#include "anelast/status.h"

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

#define AN_FIGURE_WIDTH 480 /* [viewBox unit]; text of 14 units stays above 10 px on a screen of 400 px */

/* Fixed colours, 0xRRGGBB, each with a contrast of at least 4.5 on white. */
#define AN_COLOR_INK    0x1b2a33u /* text, fitted curves */
#define AN_COLOR_FIRST  0x0f5f73u /* the first series where colour does not stand for temperature */
#define AN_COLOR_SECOND 0xa1480du /* the second */
#define AN_COLOR_MUTED  0x5e6b74u /* what is not trusted, guides */

typedef enum an_axis_scale { AN_AXIS_LINEAR, AN_AXIS_LOG10 } an_axis_scale;

typedef struct an_figure_axis {
    const char *label;  /* label text along the axis, unit included; NULL: none */
    const char *symbol; /* plain short name for hover texts; NULL: "x" or "y" */
    const char *unit;   /* plain unit for hover texts; NULL: none */
    an_axis_scale scale;
    double from, to; /* range [unit of the data]; from >= to (as when both are 0): found from the data */
} an_figure_axis;

typedef struct an_figure_spec {
    const char *id;          /* prefix of the ids inside, unique on the page: a letter, then letters, digits, '-' */
    const char *title;       /* plain; read out by screen readers */
    const char *description; /* plain; what there is to see, read out by screen readers; NULL: none */
    an_figure_axis x;        /* shared by all panels */
} an_figure_spec;

typedef enum an_marker {
    AN_MARKER_NONE,
    AN_MARKER_DISC,     /* filled circle */
    AN_MARKER_RING,     /* open circle: the secondary quantity */
    AN_MARKER_SQUARE,   /* filled square */
    AN_MARKER_TRIANGLE, /* filled triangle */
    AN_MARKER_CROSS     /* two thin bars: not trusted, not used */
} an_marker;

typedef enum an_stroke { AN_STROKE_NONE, AN_STROKE_SOLID, AN_STROKE_DASHED, AN_STROKE_DOTTED } an_stroke;

typedef struct an_figure_style {
    uint32_t color;   /* 0xRRGGBB */
    an_marker marker; /* at every point */
    an_stroke stroke; /* between points */
    double radius;    /* half-width of a marker [viewBox unit]; 0: 3 */
    double width;     /* of the line [viewBox unit]; 0: 1.5 */
    bool stems;       /* a thin line from each point down to the lower edge of the panel */
} an_figure_style;

typedef struct an_figure_series {
    const double *x; /* [n], unit of the axis; not finite, or not positive on a log10 axis: left out, a line breaks */
    const double *y; /* [n], unit of the axis */
    const double *u; /* [n] half-length of the error bars, unit of y; NULL: none */
    size_t n;
    const char *bars;          /* plain; what the bars are, for hover texts: "k = 2"; NULL: nothing is said */
    const char *name;          /* plain; opens the made hover texts; NULL: no hover texts are made */
    const char *const *hovers; /* [n] plain hover texts in place of the made ones; NULL, or an item NULL: made */
    const char *legend;        /* plain; what the legend calls it; NULL or known there already: no entry */
    bool neutral;               /* the legend shows the style in ink, since colour stands for another quantity */
    bool loose;                 /* does not widen the ranges of the axes */
    an_figure_style style;
} an_figure_series;

typedef struct an_figure_band {
    const double *x;           /* [n], unit of the axis */
    const double *low, *high;  /* [n], unit of the axis */
    size_t n;
    const char *name; /* plain; in the legend; NULL: not there */
    uint32_t color;   /* 0xRRGGBB, shown light */
    double opacity;   /* 0..1; 0: 0.2 */
    bool neutral;     /* as in an_figure_series */
    bool loose;       /* does not widen the ranges of the axes */
} an_figure_band;

typedef enum an_shade { AN_SHADE_TINT, AN_SHADE_HATCH } an_shade;

typedef struct an_figure an_figure;

/* an_figure_new: an empty figure without panels.
 *   figure [out] owned by the caller, an_figure_free
 *   spec   [in]  its texts are copied
 * Returns AN_OK, AN_E_USAGE for an id of another form, AN_E_MEMORY. */
an_status an_figure_new(an_figure **figure, const an_figure_spec *spec, an_error *err);

/* an_figure_free: release; *figure becomes NULL. NULL is allowed on both levels. */
void an_figure_free(an_figure **figure);

/* an_figure_add_panel: one more panel under the others; what is added next goes into it.
 *   y      [in] its vertical axis, texts copied
 *   height [in] of its plot area [viewBox unit], 40..600 */
void an_figure_add_panel(an_figure *figure, const an_figure_axis *y, double height);

/* an_figure_add_series: points, a line, or both, into the last panel. Everything is copied. */
void an_figure_add_series(an_figure *figure, const an_figure_series *series);

/* an_figure_add_band: the area between two curves, under all series of the last panel. Everything is copied. */
void an_figure_add_band(an_figure *figure, const an_figure_band *band);

/* an_figure_add_shade: a vertical range over the whole height of the last panel, under everything else.
 *   from, to [in] [unit of x]; -INFINITY and INFINITY reach to the edge
 *   name     [in] plain; in the legend and as hover; NULL: none */
void an_figure_add_shade(an_figure *figure, double from, double to, an_shade kind, const char *name);

/* an_figure_add_rule: a thin vertical line over the last panel.
 *   x    [in] [unit of x]
 *   name [in] plain; in the legend and as hover; NULL: none */
void an_figure_add_rule(an_figure *figure, double x, const char *name);

/* an_figure_add_level: a thin horizontal line at y [unit of y] over the last panel; y widens the range. */
void an_figure_add_level(an_figure *figure, double y);

/* A bar that shows what the colours stand for. */
typedef struct an_figure_ramp {
    const char *label;             /* label text, unit included */
    an_axis_scale scale;           /* of the values along the bar */
    double from, to;               /* values at the ends [unit of label], from <= to, positive on a log10 scale */
    uint32_t (*color)(double fraction); /* an_ramp_color or an_tone_color; NULL: an_ramp_color */
} an_figure_ramp;

/* an_figure_set_ramp: show a colour bar above the panels; its label is copied. */
void an_figure_set_ramp(an_figure *figure, const an_figure_ramp *ramp);

/* an_figure_is_empty: whether nothing finite was added to any panel, so that there is nothing to draw. */
bool an_figure_is_empty(const an_figure *figure);

/* an_figure_write: the figure as one <svg> element.
 *   out [in,out] open for writing; its error flag is the caller's to check
 * Returns AN_OK, AN_E_USAGE where a call broke what is documented above, AN_E_MEMORY. */
an_status an_figure_write(an_figure *figure, FILE *out, an_error *err);

/* an_ramp_color: the colour ramp of temperature: lightness in OKLab [OKLAB] rises in equal steps from cold to hot while
 * hue turns from blue over violet and red to orange; each colour has a contrast of at least 3 on white.
 *   fraction [in] 0 cold .. 1 hot; clamped; NaN: AN_COLOR_MUTED
 * Returns 0xRRGGBB. */
uint32_t an_ramp_color(double fraction);

/* an_tone_color: a ramp of one hue for frequencies, light to dark; contrast as above. */
uint32_t an_tone_color(double fraction);

/* an_ramp_fraction: place of a value between from and to, 0.5 where they coincide. */
double an_ramp_fraction(double value, double from, double to);

#endif
