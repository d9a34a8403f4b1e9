/* fit/report/figure_parts.h: what a figure holds, and the axes shared by the files that draw it. Folder report only. */
#ifndef ANELAST_REPORT_FIGURE_PARTS_H
#define ANELAST_REPORT_FIGURE_PARTS_H

#include "anelast/figure.h"

enum { FIGURE_MAJORS = 24, FIGURE_MINORS = 128 };

typedef enum item_kind { ITEM_SHADE, ITEM_BAND, ITEM_LEVEL, ITEM_SERIES, ITEM_RULE } item_kind;

/* One thing in a panel. Arrays and texts live in the figure's blocks. */
typedef struct item {
    item_kind kind;
    struct item *next;
    union {
        an_figure_series series;
        an_figure_band band;
        struct {
            double from, to; /* [unit of x] */
            an_shade kind;
            const char *name;
        } shade;
        struct {
            double at; /* [unit of x for a rule, of y for a level] */
            const char *name;
        } rule;
    };
} item;

typedef struct panel {
    an_figure_axis y;
    double height; /* [viewBox unit] */
    item *first, *last;
    struct panel *next;
} panel;

/* A piece of memory of the figure, released with it. */
typedef struct block {
    struct block *next;
    max_align_t payload[];
} block;

struct an_figure {
    block *blocks;
    an_status status; /* the first failure of an adding call */
    char fault[120];  /* its text */
    const char *id, *title, *description;
    an_figure_axis x;
    panel *first, *last;
    an_figure_ramp ramp; /* label NULL: no bar */
};

/* A range that grows with the data. */
typedef struct extent {
    double low, high; /* low > high: empty */
} extent;

/* An axis laid on the paper. */
typedef struct scale {
    an_axis_scale kind;
    double from, to;       /* [unit of the data] from < to */
    double origin, length; /* [viewBox unit] where `from` stands, and signed length to `to` */
} scale;

/* Ticks: all majors are labelled. */
typedef struct tick_set {
    double major[FIGURE_MAJORS], minor[FIGURE_MINORS]; /* [unit of the data] */
    int n_major, n_minor;
    int powers;   /* nonzero: labels are powers of ten */
    int decimals; /* of linear labels after division by 10^exponent; -1: as many as each value needs */
    int exponent; /* common power of ten taken out of linear labels */
} tick_set;

extent extent_empty(void);
void extent_add(extent *range, double value, an_axis_scale kind);

/* extent_of_x, extent_of_y: the range of all panels along x, and of one panel along y. */
extent extent_of_x(const an_figure *figure);
extent extent_of_y(const panel *p);

/* scale_make: the axis's own range where it has one, else the data's with a margin; never empty. */
scale scale_make(const an_figure_axis *axis, extent data, double origin, double length);

/* scale_place: [viewBox unit]; NAN where the value has no place (not finite, not positive on a log10 axis). */
double scale_place(const scale *s, double value);

/* ticks_make: at most about most_labels majors. */
tick_set ticks_make(const scale *s, int most_labels);

/* tick_write: the label of a major as SVG text content. tick_width: its estimated width [viewBox unit]. */
void tick_write(FILE *out, const tick_set *ticks, int i_major, double size);
double tick_width(const tick_set *ticks, int i_major, double size);

#define FIGURE_TICK_SIZE  14.0 /* font sizes [viewBox unit] */
#define FIGURE_LABEL_SIZE 15.0
#define FIGURE_EDGE       8.0 /* free at the left of the legend and on the right [viewBox unit] */

/* Where everything stands [viewBox unit]. */
typedef struct frame {
    double left, right;   /* of all panels */
    double legend_top;    /* upper edge of the legend */
    double ramp_top;      /* upper edge of the colour bar */
    double panel_top;     /* of the first panel */
    double height;        /* of the whole figure */
    scale x;
    tick_set x_ticks;
} frame;

/* frame_make: lay out the figure. panel_axes: the vertical axis of a panel whose plot area starts at top. */
frame frame_make(const an_figure *figure);
scale panel_scale(const panel *p, double top);
tick_set panel_ticks(const panel *p, const scale *y);
double panel_gap(const panel *p);

/* One panel while it is drawn. */
typedef struct canvas {
    FILE *out;
    const an_figure *figure;
    const frame *f;
    const panel *p;
    int i_panel;        /* from 0 */
    scale y;
    tick_set y_ticks;
    double top, bottom; /* [viewBox unit] */
} canvas;

/* The parts of the drawing, in the order of painting. */
void draw_ramp(FILE *out, const an_figure *figure, const frame *f);
void draw_legend(FILE *out, const an_figure *figure, const frame *f);
void draw_axes(const canvas *c);
void draw_items(const canvas *c);

/* text_at: the start of a text element; its content and end follow. */
void text_at(FILE *out, const char *anchor, double x, double y);

/* legend_height: of all rows [viewBox unit], 0 without entries. */
double legend_height(const an_figure *figure);

/* Where a marker stands. */
typedef struct mark {
    an_marker marker;
    double x, y, radius; /* [viewBox unit] */
} mark;

/* draw_marker_group: the start of a group that fills and strokes the markers in it. draw_marker: one marker.
 *   close [in] what follows its attributes: a slash and a bracket, or a bracket where content follows
 * draw_marker returns the name of the element, for its end. */
void draw_marker_group(FILE *out, const an_figure_style *style);
const char *draw_marker(FILE *out, const mark *at, const char *close);

/* stroke_dashes: the dashes of a stroke as an attribute, "" for a solid one. */
const char *stroke_dashes(an_stroke stroke);

#define SHADE_TINT "#e6efe9" /* fill of a tinted range */

#endif
