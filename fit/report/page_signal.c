/* Figures of one burst: the waveforms and the force over displacement, data and fit. Stage report. The fit is
 * the sine fit of the phase stage, done again on this burst at the frequency that the points document found,
 * over the cycles it kept. Of a long oscillation the last whole cycles are drawn, of a long hold or pull
 * every few samples.
 */
#include "anelast/quality.h"
#include "fit/report/page.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { DRAWN = 2000, QUANTITIES = 7 }; /* most samples of a figure; arrays of a sketch */

/* How a channel is shown. */
typedef struct channel {
    const char *label, *symbol, *unit;
    double scale; /* [shown unit / SI unit] */
} channel;

static const channel channels[2][2] = {
    {{"Displ. x (mm)", "x", "mm", 1e3}, {"Force F (N)", "F", "N", 1}},
    {{"Angle θ (mrad)", "θ", "mrad", 1e3}, {"Torque M (N m)", "M", "N m", 1}},
};

/* The samples that are drawn, in shown units. */
typedef struct sketch {
    const channel *channel; /* [2] displacement, force */
    bool fitted;
    double kept_from_s; /* [s] start of the cycles that the fit keeps */
    size_t n, n_start;  /* samples, and how many of them lie in the start-up */
    double *values;     /* owned: all that follows */
    double *t;          /* [n] [s] */
    double *data[2];    /* [n] displacement, force */
    double *fit[2];     /* [n] NAN where not fitted */
    double *rest[2];    /* [n] [%] of the amplitude, NAN where not fitted */
} sketch;

static const an_point *point_of(const an_report *r)
{
    for (int i = 0; r->has_points && i < r->points.n_point; i++)
        if (r->points.point[i].burst == r->wave.burst)
            return &r->points.point[i];
    return NULL;
}

static double frequency_of(const an_report *r)
{
    const an_point *point = point_of(r);
    double frequency = point ? point->frequency_Hz : r->wave.set_frequency_Hz;
    return r->wave.kind == AN_BURST_OSCILLATION && frequency > 0 ? frequency : NAN;
}

static size_t first_after(const an_report_wave *w, double time_s)
{
    size_t i = 0;
    while (i < w->n && w->time_s[i] < time_s)
        i++;
    return i;
}

/* Which samples of the burst are drawn. */
typedef struct choice_of_samples {
    size_t first, step;
} choice_of_samples;

static choice_of_samples choose_samples(const an_report_wave *w, double frequency_Hz)
{
    if (w->n <= DRAWN)
        return (choice_of_samples){0, 1};
    if (!isfinite(frequency_Hz))
        return (choice_of_samples){0, (w->n + DRAWN - 1) / DRAWN};
    double end = w->time_s[w->n - 1];
    double cycles = floor((end - w->time_s[w->n - DRAWN]) * frequency_Hz);
    size_t first = first_after(w, end - cycles / frequency_Hz);
    return (choice_of_samples){cycles >= 1 && first > w->n - DRAWN ? first : w->n - DRAWN, 1};
}

/* The fit of the phase stage: without clipped samples, nor those that only their noise kept from the end. */
static an_status fit_unclipped(an_waveform *waveform, unsigned char *use, double frequency_Hz, an_sinefit *fit,
                               double *residual)
{
    an_sinefit_choice choice;
    an_clipping clipping;
    memset(use, 1, (size_t)waveform->n);
    waveform->use = use;
    an_clip_find(waveform, frequency_Hz, NULL, use, &clipping);
    an_sinefit_choice_init(&choice);
    choice.frequency_Hz = frequency_Hz;
    AN_TRY(an_sinefit_run(waveform, &choice, fit, residual, NULL));
    if (!an_clip_guard(waveform, 0, &clipping, fit->deviation, residual, use))
        return AN_OK;
    return an_sinefit_run(waveform, &choice, fit, residual, NULL);
}

/* Residuals of both channels over the kept cycles, [2][n - start]; NULL where the fit is refused or memory is
 * short, since the data are shown all the same. amplitude [out] [2] [SI]. */
static double *fit_residuals(const an_report_wave *w, size_t start, double frequency_Hz, double amplitude[2])
{
    size_t n = w->n - start;
    double *residual = calloc(2 * n + 1, sizeof *residual);
    an_waveform waveform = {
        .n = (int)n, .time_s = w->time_s + start, .y = {w->displacement + start, w->force + start}};
    unsigned char *use = malloc(n + 1);
    an_sinefit fit;
    bool fitted = residual && use && fit_unclipped(&waveform, use, frequency_Hz, &fit, residual) >= 0;
    for (int k = 0; k < 2 && fitted; k++)
        amplitude[k] = cabs(fit.amplitude[k][0]);
    free(use);
    if (!fitted) {
        free(residual);
        return NULL;
    }
    return residual;
}

/* Sample i of the burst into place `to` of the sketch. */
static void take_sample(sketch *s, const an_report_wave *w, size_t i, size_t to)
{
    s->t[to] = w->time_s[i];
    s->data[0][to] = w->displacement[i] * s->channel[0].scale;
    s->data[1][to] = w->force[i] * s->channel[1].scale;
    for (int k = 0; k < 2; k++)
        s->fit[k][to] = s->rest[k][to] = NAN;
}

static bool sketch_make(page *p, sketch *s)
{
    const an_report_wave *w = &p->report->wave;
    const an_point *point = point_of(p->report);
    double frequency = frequency_of(p->report), amplitude[2];
    *s = (sketch){.channel = channels[w->rotary]};
    s->values = calloc(QUANTITIES * (DRAWN + 1), sizeof *s->values);
    if (!s->values) {
        p->status = an_fail_memory(p->err, "the waveform of the page");
        return false;
    }
    double **arrays[QUANTITIES] = {&s->t,      &s->data[0], &s->data[1], &s->fit[0],
                                   &s->fit[1], &s->rest[0], &s->rest[1]};
    for (size_t k = 0; k < QUANTITIES; k++)
        *arrays[k] = s->values + k * (DRAWN + 1);
    if (point && isfinite(frequency) && isfinite(point->n_cycle_dropped))
        s->kept_from_s = point->n_cycle_dropped / frequency;
    size_t start = first_after(w, s->kept_from_s);
    double *residual = isfinite(frequency) ? fit_residuals(w, start, frequency, amplitude) : NULL;
    choice_of_samples chosen = choose_samples(w, frequency);
    s->fitted = residual != NULL;
    for (size_t i = chosen.first; i < w->n; i += chosen.step) {
        take_sample(s, w, i, s->n);
        for (int k = 0; k < 2 && residual && i >= start; k++) {
            double rest = residual[(size_t)k * (w->n - start) + i - start];
            s->fit[k][s->n] = s->data[k][s->n] - rest * s->channel[k].scale;
            s->rest[k][s->n] = 100 * rest / amplitude[k];
        }
        s->n_start += i < start;
        s->n++;
    }
    free(residual);
    return true;
}

static const an_figure_style measured = {.color = AN_COLOR_FIRST, .marker = AN_MARKER_DISC, .radius = 1.3};
static const an_figure_style fitted = {.color = AN_COLOR_SECOND, .stroke = AN_STROKE_SOLID, .width = 1};

static void add_channel(an_figure *figure, const sketch *s, int k)
{
    const channel *c = &s->channel[k];
    an_figure_add_panel(figure, &(an_figure_axis){.label = c->label, .symbol = c->symbol, .unit = c->unit},
                        105);
    if (s->kept_from_s > s->t[0])
        an_figure_add_shade(figure, -INFINITY, s->kept_from_s, AN_SHADE_HATCH, "start-up, dropped");
    an_figure_add_series(
        figure,
        &(an_figure_series){.x = s->t, .y = s->data[k], .n = s->n, .legend = "measured", .style = measured});
    if (s->fitted)
        an_figure_add_series(
            figure,
            &(an_figure_series){.x = s->t, .y = s->fit[k], .n = s->n, .legend = "fitted", .style = fitted});
}

static void add_rest(an_figure *figure, const sketch *s)
{
    static const char *const names[2] = {"displacement, rest", "force, rest"};
    an_figure_add_panel(figure, &(an_figure_axis){.label = "rest (%)"}, 70);
    an_figure_add_level(figure, 0);
    for (int k = 1; k >= 0; k--) {
        an_figure_style style = {.color = k ? AN_COLOR_FIRST : AN_COLOR_SECOND,
                                 .stroke = k ? AN_STROKE_SOLID : AN_STROKE_DOTTED,
                                 .width = 0.8};
        an_figure_add_series(
            figure,
            &(an_figure_series){.x = s->t, .y = s->rest[k], .n = s->n, .legend = names[k], .style = style});
    }
}

static void figure_waveform(page *p, const sketch *s)
{
    an_figure_spec spec = {.id = "waveform",
                           .title = s->fitted ? "Waveforms of one burst, measured and fitted"
                                              : "Waveforms of one burst",
                           .x = {.label = "Time in the burst (s)", .symbol = "t", .unit = "s"}};
    an_figure *figure = page_figure_new(p, &spec);
    if (!figure)
        return;
    add_channel(figure, s, 1);
    add_channel(figure, s, 0);
    if (s->fitted)
        add_rest(figure, s);
    page_figure_end(
        p, &figure,
        s->fitted ? "Waveforms of the burst as measured, with the sine fit (drift and harmonics included) "
                    "and what it leaves, in percent of the amplitude."
                  : "Force and displacement of the burst as measured.");
}

static void figure_loop(page *p, const sketch *s)
{
    const channel *x = &s->channel[0], *y = &s->channel[1];
    an_figure_spec spec = {.id = "loop",
                           .title = "Force over displacement of the same burst",
                           .x = {.label = x->label, .symbol = x->symbol, .unit = x->unit}};
    an_figure *figure = page_figure_new(p, &spec);
    if (!figure)
        return;
    size_t from = s->n_start, n = s->n - s->n_start;
    an_figure_add_panel(figure, &(an_figure_axis){.label = y->label, .symbol = y->symbol, .unit = y->unit},
                        300);
    an_figure_add_series(
        figure,
        &(an_figure_series){
            .x = s->data[0] + from, .y = s->data[1] + from, .n = n, .legend = "measured", .style = measured});
    if (s->fitted)
        an_figure_add_series(
            figure,
            &(an_figure_series){
                .x = s->fit[0] + from, .y = s->fit[1] + from, .n = n, .legend = "fitted", .style = fitted});
    page_figure_end(
        p, &figure,
        "Force over displacement of the cycles kept. A healthy burst draws one closed oval; a kink, a flat "
        "or a wandering loop tells of slack, slip or a record that has not settled.");
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
        markup_fixed(p->out, point->temperature_K - AN_ZERO_CELSIUS_K, 1);
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
    sketch s;
    if (!p->report->has_run) {
        page_absent(p, "No waveform.",
                    page_why(p->report, AN_REPORT_RUN, "No run document was given to this page"));
    } else if (p->report->wave.burst == 0 || p->report->wave.n == 0) {
        page_absent(p, "No waveform.", "The run document holds no burst with samples");
    } else if (sketch_make(p, &s)) {
        write_which(p);
        fputs("<div class=\"figures\">\n", p->out);
        figure_waveform(p, &s);
        if (p->report->wave.kind == AN_BURST_OSCILLATION)
            figure_loop(p, &s);
        fputs("</div>\n", p->out);
        free(s.values);
    }
    fputs("</section>\n", p->out);
}
