/* Axes of a figure: ranges, places and ticks. Stage report. Linear axes step by 1, 2, 2.5 or 5 times a power
 * of ten, with a common power taken out of awkward labels; log10 axes carry powers of ten, or the numbers
 * themselves where they span little. Range: any finite data; a single value and no data at all still give an
 * axis.
 */
#include "fit/report/figure_parts.h"
#include "fit/report/markup.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#define MARGIN 0.04 /* of the axis beyond the data, each side */
#define DECADES_OF_NUMBERS                                                                                   \
    2.3                       /* the longest log10 axis labelled with plain numbers, where they have room    \
                               */
#define DECADES_OF_POWERS 1.3 /* the shortest one labelled with powers of ten */

extent extent_empty(void)
{
    return (extent){INFINITY, -INFINITY};
}

void extent_add(extent *range, double value, an_axis_scale kind)
{
    if (!isfinite(value) || (kind == AN_AXIS_LOG10 && value <= 0))
        return;
    range->low = fmin(range->low, value);
    range->high = fmax(range->high, value);
}

static void add_all(extent *range, const double *values, size_t n, an_axis_scale kind)
{
    for (size_t i = 0; i < n; i++)
        extent_add(range, values[i], kind);
}

extent extent_of_x(const an_figure *figure)
{
    extent range = extent_empty();
    for (const panel *p = figure->first; p; p = p->next)
        for (const item *i = p->first; i; i = i->next) {
            if (i->kind == ITEM_SERIES && !i->series.loose)
                add_all(&range, i->series.x, i->series.n, figure->x.scale);
            if (i->kind == ITEM_BAND && !i->band.loose)
                add_all(&range, i->band.x, i->band.n, figure->x.scale);
        }
    return range;
}

/* Points with their bars; on a log10 axis a bar that reaches far down does not stretch the axis beyond a
 * tenth. */
static void add_series(extent *range, const an_figure_series *s, an_axis_scale kind)
{
    for (size_t k = 0; k < s->n; k++) {
        extent_add(range, s->y[k], kind);
        if (!s->u || !isfinite(s->u[k]) || !isfinite(s->y[k]))
            continue;
        extent_add(range, s->y[k] + s->u[k], kind);
        double low = s->y[k] - s->u[k];
        extent_add(range, kind == AN_AXIS_LOG10 ? fmax(low, s->y[k] / 10) : low, kind);
    }
}

extent extent_of_y(const panel *p)
{
    extent range = extent_empty();
    for (const item *i = p->first; i; i = i->next) {
        if (i->kind == ITEM_SERIES && !i->series.loose)
            add_series(&range, &i->series, p->y.scale);
        if (i->kind == ITEM_BAND && !i->band.loose) {
            add_all(&range, i->band.low, i->band.n, p->y.scale);
            add_all(&range, i->band.high, i->band.n, p->y.scale);
        }
        if (i->kind == ITEM_LEVEL)
            extent_add(&range, i->rule.at, p->y.scale);
    }
    return range;
}

/* A range with something in it, whatever the data were. */
static extent widen(extent data, an_axis_scale kind)
{
    if (data.low > data.high)
        return kind == AN_AXIS_LOG10 ? (extent){0.1, 10} : (extent){0, 1};
    if (kind == AN_AXIS_LOG10) {
        double decades = log10(data.high / data.low);
        double add = decades < 1e-9 ? 0.3 : MARGIN * decades;
        return (extent){data.low * pow(10, -add), data.high * pow(10, add)};
    }
    double span = data.high - data.low;
    double least = 1e-9 * fmax(fabs(data.low), fabs(data.high));
    double add = span > least ? MARGIN * span : fmax(0.05 * fabs(data.low), least);
    add = add > 0 ? add : 1;
    return (extent){data.low - add, data.high + add};
}

scale scale_make(const an_figure_axis *axis, extent data, double origin, double length)
{
    bool own = axis->from < axis->to && (axis->scale == AN_AXIS_LINEAR || axis->from > 0);
    extent range = own ? (extent){axis->from, axis->to} : widen(data, axis->scale);
    return (scale){
        .kind = axis->scale, .from = range.low, .to = range.high, .origin = origin, .length = length};
}

double scale_place(const scale *s, double value)
{
    if (!isfinite(value) || (s->kind == AN_AXIS_LOG10 && value <= 0))
        return NAN;
    double fraction = s->kind == AN_AXIS_LOG10 ? log10(value / s->from) / log10(s->to / s->from)
                                               : (value - s->from) / (s->to - s->from);
    return s->origin + s->length * fraction;
}

static void add_major(tick_set *ticks, double value)
{
    if (ticks->n_major < FIGURE_MAJORS)
        ticks->major[ticks->n_major++] = value;
}

static void add_minor(tick_set *ticks, const scale *s, double value)
{
    if (ticks->n_minor < FIGURE_MINORS && value >= s->from && value <= s->to)
        ticks->minor[ticks->n_minor++] = value;
}

/* The least step of 1, 2, 2.5, 5 times a power of ten that is not below `rough`. */
static double round_step(double rough)
{
    double power = pow(10, floor(log10(rough)));
    static const double steps[] = {1, 2, 2.5, 5, 10};
    for (int i = 0; i < 5; i++)
        if (steps[i] * power >= rough * (1 - 1e-9))
            return steps[i] * power;
    return 10 * power;
}

/* Decimals that tell multiples of `step` apart. */
static int decimals_of(double step)
{
    for (int decimals = 0; decimals < 12; decimals++) {
        double scaled = step * pow(10, decimals);
        if (fabs(scaled - round(scaled)) < 1e-6 * scaled)
            return decimals;
    }
    return 12;
}

static tick_set steps_between(const scale *s, double step)
{
    tick_set ticks = {0};
    double largest = fmax(fabs(s->from), fabs(s->to));
    int magnitude = (int)floor(log10(largest));
    ticks.exponent = magnitude >= 5 || magnitude <= -3 ? magnitude : 0;
    ticks.decimals = decimals_of(step / pow(10, ticks.exponent));
    double first = ceil(s->from / step - 1e-6), last = floor(s->to / step + 1e-6);
    for (double k = first; k <= last && ticks.n_major < FIGURE_MAJORS; k++)
        add_major(&ticks, k * step);
    return ticks;
}

/* A range that happens to hold a single multiple of its step gets a finer one. */
static tick_set linear_ticks(const scale *s, int most_labels)
{
    tick_set ticks = {0};
    for (int most = most_labels; ticks.n_major < 2 && most < most_labels + 4; most++)
        ticks = steps_between(s, round_step((s->to - s->from) / most));
    return ticks;
}

/* Labels at every stride-th power of ten; between neighbours the 2..9, or the powers left out. */
static tick_set power_ticks(const scale *s, int most_labels)
{
    tick_set ticks = {.powers = 1};
    int first = (int)ceil(log10(s->from) - 1e-9), last = (int)floor(log10(s->to) + 1e-9);
    int stride = (last - first) / most_labels + 1;
    for (int k = first - 1; k <= last; k++) {
        bool labelled = k >= first && (k % stride + stride) % stride == 0;
        if (labelled)
            add_major(&ticks, pow(10, k));
        else if (k >= first)
            add_minor(&ticks, s, pow(10, k));
        for (int m = 2; m <= 9 && stride == 1 && last - first <= 8; m++)
            add_minor(&ticks, s, m * pow(10, k));
    }
    return ticks;
}

/* Plain numbers 1, 2, 5 of each decade on a short log10 axis. */
static tick_set short_log_ticks(const scale *s)
{
    tick_set ticks = {.decimals = -1};
    static const int labelled[] = {1, 2, 5};
    int first = (int)floor(log10(s->from)), last = (int)floor(log10(s->to));
    for (int k = first; k <= last; k++) {
        for (int i = 0; i < 3; i++) {
            double value = labelled[i] * pow(10, k);
            if (value >= s->from * (1 - 1e-9) && value <= s->to * (1 + 1e-9))
                add_major(&ticks, value);
        }
        for (int m = 3; m <= 9; m++)
            if (m != 5)
                add_minor(&ticks, s, m * pow(10, k));
    }
    return ticks;
}

tick_set ticks_make(const scale *s, int most_labels)
{
    if (s->kind == AN_AXIS_LINEAR)
        return linear_ticks(s, most_labels);
    double decades = log10(s->to / s->from), largest = fmax(s->to, 1 / s->from);
    tick_set ticks = short_log_ticks(s);
    bool has_room = ticks.n_major >= 3 && ticks.n_major <= most_labels + 1;
    if (decades < DECADES_OF_NUMBERS && has_room && largest < 1e5)
        return ticks;
    return decades >= DECADES_OF_POWERS ? power_ticks(s, most_labels) : linear_ticks(s, most_labels);
}

void tick_write(FILE *out, const tick_set *ticks, int i_major, double size)
{
    double value = ticks->major[i_major];
    if (ticks->powers) {
        char text[32];
        int power = (int)lround(log10(value));
        snprintf(text, sizeof text, "10^{%s%d}", power < 0 ? "\xe2\x88\x92" : "", abs(power));
        markup_label(out, text, MARKUP_SVG, size);
        return;
    }
    int decimals = ticks->decimals >= 0 ? ticks->decimals : decimals_of(value);
    markup_fixed(out, value / pow(10, ticks->exponent), decimals);
}

double tick_width(const tick_set *ticks, int i_major, double size)
{
    double value = ticks->major[i_major];
    double digits = 0.59 * size;
    if (ticks->powers) {
        int power = (int)lround(log10(value));
        int raised = (abs(power) >= 10 ? 2 : 1) + (power < 0);
        return digits * (2 + 0.74 * raised);
    }
    double shown = fabs(value) / pow(10, ticks->exponent);
    int decimals = ticks->decimals >= 0 ? ticks->decimals : decimals_of(value);
    int whole = shown >= 10 ? (int)floor(log10(shown)) + 1 : 1;
    return digits * (whole + decimals + (value < 0)) + (decimals > 0 ? 0.36 * size : 0);
}
