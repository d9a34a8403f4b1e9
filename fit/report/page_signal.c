/* Figures of one burst: the waveforms and the force over displacement, data and fit. Stage report. The fit is
 * the sine fit of the phase stage, done again on this burst at the frequency that the points document found,
 * over the cycles it kept; of a long burst the last whole cycles are drawn.
 */
#include "anelast/sinefit.h"
#include "fit/report/page.h"

#include <math.h>
#include <stdlib.h>

enum { DRAWN = 2000 }; /* samples of a figure */

/* The burst as it is drawn. Arrays [n], borrowed from the wave but for the fit. */
typedef struct drawn {
    const an_report_wave *wave;
    size_t first, n; /* samples drawn */
    bool fitted;
    double frequency_Hz; /* [Hz] NAN: not known */
    double kept_from_s;  /* [s] start of the cycles that the fit keeps */
    double *scratch;     /* owned: everything below */
    double *fit[2];      /* [wave->n] displacement, force; NAN before kept_from_s */
    double *residual[2]; /* [wave->n] in % of the amplitude */
} drawn;

static const an_point *point_of(const an_report *r)
{
    for (int i = 0; r->has_points && i < r->points.n_point; i++)
        if (r->points.point[i].burst == r->wave.burst)
            return &r->points.point[i];
    return NULL;
}

/* The fit over the kept cycles; leaves d->fitted false where it is refused, since the data are shown all the
 * same. */
static void fit_wave(drawn *d)
{
    const an_report_wave *w = d->wave;
    size_t start = 0;
    while (start < w->n && w->time_s[start] < d->kept_from_s)
        start++;
    size_t n = w->n - start;
    double *residual = calloc(2 * n + 1, sizeof *residual);
    if (!residual)
        return;
    an_waveform waveform = {
        .n = (int)n, .time_s = w->time_s + start, .y = {w->displacement + start, w->force + start}};
    an_sinefit_choice choice;
    an_sinefit fit;
    an_sinefit_choice_init(&choice);
    choice.frequency_Hz = d->frequency_Hz;
    d->fitted = an_sinefit_run(&waveform, &choice, &fit, residual, NULL) >= 0;
    for (int k = 0; k < 2; k++) {
        const double *y = k ? w->force : w->displacement;
        for (size_t i = 0; i < w->n; i++) {
            bool kept = d->fitted && i >= start;
            d->fit[k][i] = kept ? y[i] - residual[k * n + i - start] : NAN;
            d->residual[k][i] = kept ? 100 * residual[k * n + i - start] / cabs(fit.amplitude[k][0]) : NAN;
        }
    }
    free(residual);
}

/* Which samples are drawn: all, or the last whole cycles that DRAWN holds. */
static void choose_window(drawn *d)
{
    const an_report_wave *w = d->wave;
    d->first = 0;
    d->n = w->n;
    if (w->n <= DRAWN)
        return;
    d->first = w->n - DRAWN;
    if (!isfinite(d->frequency_Hz))
        return;
    double end = w->time_s[w->n - 1];
    double cycles = floor((end - w->time_s[d->first]) * d->frequency_Hz);
    while (cycles >= 1 && w->time_s[d->first] < end - cycles / d->frequency_Hz)
        d->first++;
    d->n = w->n - d->first;
}

static bool drawn_make(page *p, drawn *d)
{
    const an_report_wave *w = &p->report->wave;
    const an_point *point = point_of(p->report);
    *d = (drawn){.wave = w, .frequency_Hz = point ? point->frequency_Hz : w->set_frequency_Hz};
    d->scratch = calloc(4 * w->n + 1, sizeof *d->scratch);
    if (!d->scratch) {
        p->status = an_fail_memory(p->err, "the waveform of the page");
        return false;
    }
    for (int k = 0; k < 2; k++) {
        d->fit[k] = d->scratch + (size_t)(2 * k) * w->n;
        d->residual[k] = d->scratch + (size_t)(2 * k + 1) * w->n;
    }
    if (point && isfinite(point->n_cycle_dropped) && d->frequency_Hz > 0)
        d->kept_from_s = point->n_cycle_dropped / d->frequency_Hz;
    if (w->kind == AN_BURST_OSCILLATION && d->frequency_Hz > 0)
        fit_wave(d);
    choose_window(d);
    return true;
}

/* Displacement in mm or degrees, force in N or N m: scaled copies would cost more than they tell, so units
 * are chosen once. */
typedef struct channel {
    const char *label, *symbol, *unit;
    double scale; /* [shown unit / SI unit] */
} channel;

static const channel channels[2][2] = {
    {{"Displ. x (mm)", "x", "mm", 1e3}, {"Force F (N)", "F", "N", 1}},
    {{"Angle θ (mrad)", "θ", "mrad", 1e3}, {"Torque M (N m)", "M", "N m", 1}},
};

static const double *values_of(const an_report_wave *w, int k)
{
    return k ? w->force : w->displacement;
}

/* The drawn part without the start-up. */
static drawn without_start(const drawn *d)
{
    drawn kept = *d;
    while (kept.n > 0 && kept.wave->time_s[kept.first] < kept.kept_from_s) {
        kept.first++;
        kept.n--;
    }
    return kept;
}

/* A scaled copy of the drawn part; NULL without memory, which the page remembers. */
static double *scaled(page *p, const drawn *d, const double *values, double scale)
{
    double *copy = calloc(d->n + 1, sizeof *copy);
    if (!copy) {
        p->status = an_fail_memory(p->err, "the waveform of the page");
        return NULL;
    }
    for (size_t i = 0; i < d->n; i++)
        copy[i] = values[d->first + i] * scale;
    return copy;
}

static void add_channel(page *p, an_figure *figure, const drawn *d, int k)
{
    const channel *c = &channels[d->wave->rotary][k];
    double *data = scaled(p, d, values_of(d->wave, k), c->scale), *fit = scaled(p, d, d->fit[k], c->scale);
    const double *t = d->wave->time_s + d->first;
    an_figure_add_panel(figure, &(an_figure_axis){.label = c->label, .symbol = c->symbol, .unit = c->unit},
                        105);
    if (data)
        an_figure_add_series(
            figure,
            &(an_figure_series){.x = t,
                                .y = data,
                                .n = d->n,
                                .legend = "measured",
                                .style = {.color = AN_COLOR_FIRST, .marker = AN_MARKER_DISC, .radius = 1.3}});
    if (fit && d->fitted)
        an_figure_add_series(
            figure,
            &(an_figure_series){.x = t,
                                .y = fit,
                                .n = d->n,
                                .legend = "fitted",
                                .style = {.color = AN_COLOR_SECOND, .stroke = AN_STROKE_SOLID, .width = 1}});
    if (d->kept_from_s > t[0])
        an_figure_add_shade(figure, -INFINITY, d->kept_from_s, AN_SHADE_HATCH, "start-up, dropped");
    free(data);
    free(fit);
}

static void figure_waveform(page *p, const drawn *d)
{
    an_figure_spec spec = {.id = "waveform",
                           .title = "Waveforms of one burst, measured and fitted",
                           .x = {.label = "Time in the burst (s)", .symbol = "t", .unit = "s"}};
    an_figure *figure = page_figure_new(p, &spec);
    if (!figure)
        return;
    add_channel(p, figure, d, 1);
    add_channel(p, figure, d, 0);
    if (d->fitted) {
        static const char *const names[2] = {"displacement, rest", "force, rest"};
        an_figure_add_panel(figure, &(an_figure_axis){.label = "rest (%)"}, 70);
        an_figure_add_level(figure, 0);
        for (int k = 1; k >= 0; k--)
            an_figure_add_series(
                figure, &(an_figure_series){.x = d->wave->time_s + d->first,
                                            .y = d->residual[k] + d->first,
                                            .n = d->n,
                                            .legend = names[k],
                                            .style = {.color = k ? AN_COLOR_FIRST : AN_COLOR_SECOND,
                                                      .stroke = k ? AN_STROKE_SOLID : AN_STROKE_DOTTED,
                                                      .width = 0.8}});
    }
    page_figure_end(
        p, &figure,
        "Waveforms of the burst as measured, with the sine fit (drift and harmonics included) and what it "
        "leaves, in percent of the amplitude.");
}

static void figure_loop(page *p, const drawn *whole)
{
    const drawn kept = without_start(whole), *d = &kept;
    const channel *x = &channels[d->wave->rotary][0], *y = &channels[d->wave->rotary][1];
    an_figure_spec spec = {.id = "loop",
                           .title = "Force over displacement of the same burst",
                           .x = {.label = x->label, .symbol = x->symbol, .unit = x->unit}};
    an_figure *figure = page_figure_new(p, &spec);
    if (!figure)
        return;
    double *data[2], *fit[2];
    for (int k = 0; k < 2; k++) {
        const channel *c = &channels[d->wave->rotary][k];
        data[k] = scaled(p, d, values_of(d->wave, k), c->scale);
        fit[k] = scaled(p, d, d->fit[k], c->scale);
    }
    an_figure_add_panel(figure, &(an_figure_axis){.label = y->label, .symbol = y->symbol, .unit = y->unit},
                        300);
    if (p->status >= 0) {
        an_figure_add_series(
            figure,
            &(an_figure_series){.x = data[0],
                                .y = data[1],
                                .n = d->n,
                                .legend = "measured",
                                .style = {.color = AN_COLOR_FIRST, .marker = AN_MARKER_DISC, .radius = 1.3}});
        if (d->fitted)
            an_figure_add_series(
                figure, &(an_figure_series){
                            .x = fit[0],
                            .y = fit[1],
                            .n = d->n,
                            .legend = "fitted",
                            .style = {.color = AN_COLOR_SECOND, .stroke = AN_STROKE_SOLID, .width = 1}});
    }
    page_figure_end(p, &figure,
                    "Force over displacement of the cycles kept. A healthy burst draws one closed oval; a "
                    "kink, a flat or a wandering loop "
                    "tells of slack, slip or a record that has not settled.");
    for (int k = 0; k < 2; k++) {
        free(data[k]);
        free(fit[k]);
    }
}

static void write_which(page *p)
{
    const an_report_wave *w = &p->report->wave;
    const an_point *point = point_of(p->report);
    fprintf(p->out, "<p>Burst %d%s", w->burst,
            w->worst ? ", the one with the weightiest remarks or, among equals, the most noise" : "");
    if (point) {
        fputs(": ", p->out);
        markup_number(p->out, point->frequency_Hz, 4);
        fputs(" Hz at ", p->out);
        markup_fixed(p->out, point->temperature_K - ZERO_CELSIUS_K, 1);
        fputs(" °C, signal-to-noise ratio ", p->out);
        markup_number(p->out, point->snr_dB, 3);
        fputs(" dB", p->out);
    }
    fputs(".</p>\n", p->out);
    for (size_t i = 0; point && i < point->remarks.n; i++) {
        fputs("<p class=\"absent\"><b>", p->out);
        markup_plain(p->out, an_severity_name(point->remarks.rows[i].severity));
        fputs(":</b> ", p->out);
        markup_plain(p->out, point->remarks.rows[i].text);
        fputs("</p>\n", p->out);
    }
}

void section_signal(page *p)
{
    fputs("<section>\n<h2>Waveform</h2>\n", p->out);
    drawn d;
    if (!p->report->has_run) {
        page_absent(p, "No waveform.",
                    page_why(p->report, AN_REPORT_RUN, "No run document was given to this page"));
    } else if (p->report->wave.burst == 0 || p->report->wave.n == 0) {
        page_absent(p, "No waveform.", "The run document holds no burst with samples.");
    } else if (drawn_make(p, &d)) {
        write_which(p);
        fputs("<div class=\"figures\">\n", p->out);
        figure_waveform(p, &d);
        if (d.wave->kind == AN_BURST_OSCILLATION)
            figure_loop(p, &d);
        fputs("</div>\n", p->out);
        free(d.scratch);
    }
    fputs("</section>\n", p->out);
}
