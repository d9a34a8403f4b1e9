/* Figures of the spectrum: the handed-over modes and those of the joint fit, with the window in which they
 * are trusted, and the relaxation modulus that follows. Stage report. Outside the window modes are crosses
 * without stems and the ground is hatched, so that the difference does not hang on colour.
 */
#include "fit/report/page.h"

#include <math.h>
#include <stdlib.h>

enum { STEMS = 30 }; /* most modes drawn with stems */

static void add_window(an_figure *figure, const double window[2])
{
    if (!(window[1] > window[0]))
        return;
    an_figure_add_shade(figure, -INFINITY, window[0], AN_SHADE_HATCH, "outside the trusted window");
    an_figure_add_shade(figure, window[1], INFINITY, AN_SHADE_HATCH, "outside the trusted window");
    const double ends[2] = {window[0] / 3, window[1] * 3}, nothing[2] = {NAN, NAN};
    an_figure_add_series(figure,
                         &(an_figure_series){.x = ends, .y = nothing, .n = 2}); /* room for both ends */
}

/* A spectrum with what is trusted of it. */
typedef struct mode_set {
    const an_maxwell *modes;
    const int *trusted;   /* [n_mode]; NULL: by the window */
    const double *window; /* [2] [s] */
    bool is_refused;      /* the data refuse the fit: nothing of it is trusted */
} mode_set;

/* Modes that are trusted, or those that are not. */
static void add_modes(an_figure *figure, const mode_set *set, bool wanted)
{
    const an_maxwell *modes = set->modes;
    for (size_t i = 0; i < modes->n_mode; i++) {
        double tau = modes->time_s[i], strength = modes->modulus_Pa[i] / 1e6;
        bool inside = tau >= set->window[0] && tau <= set->window[1];
        bool is_trusted = !set->is_refused && (set->trusted ? set->trusted[i] != 0 : inside);
        if (is_trusted != wanted || !(strength > 0))
            continue;
        an_figure_style style = {.color = wanted ? AN_COLOR_FIRST : AN_COLOR_MUTED,
                                 .radius = 3.6,
                                 .stems = wanted && modes->n_mode <= STEMS,
                                 .marker = wanted ? AN_MARKER_DISC : AN_MARKER_CROSS};
        an_figure_add_series(figure,
                             &(an_figure_series){.x = &tau,
                                                 .y = &strength,
                                                 .n = 1,
                                                 .name = wanted ? "trusted mode" : "mode not trusted",
                                                 .legend = wanted ? "trusted mode" : "mode not trusted",
                                                 .style = style});
    }
}

/* Ranges that take in the modes and, with a little room, the window's ends. */
static void figure_modes(page *p, const an_figure_spec *spec, const mode_set *set, const char *caption)
{
    an_figure *figure = page_figure_new(p, spec);
    if (!figure)
        return;
    char label[48];
    snprintf(label, sizeof label, "Strength %c_{i} (MPa)", p->letter);
    an_figure_add_panel(
        figure,
        &(an_figure_axis){.label = label, .symbol = "strength", .unit = "MPa", .scale = AN_AXIS_LOG10}, 200);
    if (!set->is_refused)
        add_window(figure, set->window);
    add_modes(figure, set, true);
    add_modes(figure, set, false);
    page_figure_end(p, &figure, caption);
}

static void time_label(char *label, size_t size, const char *what, double reference_K)
{
    FILE *out = fmemopen(label, size, "w");
    if (!out)
        return;
    fprintf(out, "%s (s) at ", what);
    markup_fixed(out, reference_K - AN_ZERO_CELSIUS_K, 1);
    fputs(" °C", out);
    fclose(out);
}

/* E(t) over the window and a decade on each side. */
static void figure_relaxation(page *p, const an_material *material)
{
    char x_label[80] = "", y_label[48];
    time_label(x_label, sizeof x_label, "Time t", material->reference_temperature_K);
    snprintf(y_label, sizeof y_label, "%c(t) (MPa)", p->letter);
    an_figure_spec spec = {.id = "relaxation",
                           .title = "Relaxation modulus over time",
                           .x = {.label = x_label, .symbol = "t", .unit = "s", .scale = AN_AXIS_LOG10}};
    an_figure *figure = page_figure_new(p, &spec);
    if (!figure)
        return;
    double t[PAGE_CURVE], y[PAGE_CURVE], low[PAGE_CURVE], high[PAGE_CURVE];
    double from = material->window_time_s[0] / 10, to = material->window_time_s[1] * 10;
    double u = hypot(material->u_common_relative, material->fit_error);
    for (int i = 0; i < PAGE_CURVE; i++) {
        t[i] = from * pow(to / from, (double)i / (PAGE_CURVE - 1));
        y[i] = an_maxwell_relaxation(&material->modes, t[i]) / 1e6;
        low[i] = y[i] * (1 - PAGE_COVERAGE * u);
        high[i] = y[i] * (1 + PAGE_COVERAGE * u);
    }
    an_figure_add_panel(
        figure,
        &(an_figure_axis){.label = y_label, .symbol = "modulus", .unit = "MPa", .scale = AN_AXIS_LOG10}, 200);
    add_window(figure, material->window_time_s);
    if (u > 0)
        an_figure_add_band(figure, &(an_figure_band){.x = t,
                                                     .low = low,
                                                     .high = high,
                                                     .n = PAGE_CURVE,
                                                     .color = AN_COLOR_FIRST,
                                                     .name = "common part of u and fit error, k = 2"});
    an_figure_add_series(figure,
                         &(an_figure_series){.x = t,
                                             .y = y,
                                             .n = PAGE_CURVE,
                                             .legend = "from the handed-over spectrum",
                                             .style = {.color = AN_COLOR_FIRST, .stroke = AN_STROKE_SOLID}});
    page_figure_end(
        p, &figure,
        "Relaxation modulus that follows exactly from the handed-over spectrum. Hatched: not supported by "
        "what was measured.");
}

static void number_term(FILE *out, const char *name, double value, const char *unit)
{
    if (!isfinite(value))
        return;
    fprintf(out, "<dt>%s</dt><dd>", name);
    markup_number(out, value, 4);
    fprintf(out, " %s</dd>\n", unit);
}

static void range_term(FILE *out, const char *name, double from, double to, const char *unit)
{
    fprintf(out, "<dt>%s</dt><dd>", name);
    markup_number(out, from, 4);
    fputs(" to ", out);
    markup_number(out, to, 4);
    fprintf(out, " %s</dd>\n", unit);
}

static void write_summary(page *p, const an_material *m)
{
    fputs("<dl>\n", p->out);
    term_text(p->out, "Modulus", m->is_shear ? "shear, G" : "tension, E");
    number_term(p->out, "Instantaneous, inside the window", m->instantaneous_Pa / 1e6, "MPa");
    number_term(p->out, "Long-term", m->long_term_Pa / 1e6, "MPa");
    term_text(p->out, "End state", m->end_state);
    fputs("<dt>Reference temperature</dt><dd>", p->out);
    markup_fixed(p->out, m->reference_temperature_K - AN_ZERO_CELSIUS_K, 2);
    fputs(" °C</dd>\n", p->out);
    number_term(p->out, "Off the data, rms", 100 * m->fit_error, "%");
    number_term(p->out, "Off the data, worst", 100 * m->fit_error_worst, "%");
    number_term(p->out, "Common uncertainty of all moduli", 100 * m->u_common_relative, "%");
    range_term(p->out, "Trusted times", m->window_time_s[0], m->window_time_s[1], "s");
    range_term(p->out, "Measured temperatures", m->window_temperature_K[0] - AN_ZERO_CELSIUS_K,
               m->window_temperature_K[1] - AN_ZERO_CELSIUS_K, "°C");
    number_term(p->out, "Greatest strain amplitude", 100 * m->strain_limit, "%");
    term_text(p->out, "Shift law", page_law_name(m->law.kind));
    term_text(p->out, "Vertical shift", m->vertical);
    term_text(p->out, "Handed over in spite of its verdict", m->override_reason);
    fputs("</dl>\n", p->out);
}

void section_spectrum(page *p)
{
    const an_report *r = p->report;
    char label[80] = "";
    fputs("<section>\n<h2>Spectrum</h2>\n", p->out);
    if (!r->has_material)
        page_absent(p, "No material.", page_why(r, AN_REPORT_MATERIAL, page_no_material(r)));
    else
        write_summary(p, &r->material);
    fputs("<div class=\"figures\">\n", p->out);
    if (r->has_material) {
        const an_material *m = &r->material;
        time_label(label, sizeof label, "Relaxation time τ", m->reference_temperature_K);
        an_figure_spec spec = {.id = "modes",
                               .title = "Handed-over relaxation spectrum with its trusted window",
                               .x = {.label = label, .symbol = "τ", .unit = "s", .scale = AN_AXIS_LOG10}};
        mode_set set = {&m->modes, m->trusted, m->window_time_s, false};
        figure_modes(p, &spec, &set,
                     "The modes that are handed over. Crosses in the hatched range only close the fit at its "
                     "edges and carry no "
                     "meaning of their own.");
        figure_relaxation(p, m);
    }
    if (r->has_master && r->master.spectrum.n_mode > 0) {
        time_label(label, sizeof label, "Relaxation time τ", r->master.reference_temperature_K);
        an_figure_spec spec = {.id = "dense",
                               .title = "Relaxation spectrum of the joint fit",
                               .x = {.label = label, .symbol = "τ", .unit = "s", .scale = AN_AXIS_LOG10}};
        bool is_refused = r->master.simplicity == AN_COMPLEX;
        mode_set set = {&r->master.spectrum, NULL, r->master.window_s, is_refused};
        figure_modes(p, &spec, &set,
                     is_refused
                         ? "The dense spectrum of the joint fit. It belongs to a fit that the data refuse: "
                           "shown to judge by, not "
                           "to be used."
                         : "The dense spectrum of the joint fit, from which shift factors and spectrum were "
                           "found together.");
    }
    fputs("</div>\n</section>\n", p->out);
}
