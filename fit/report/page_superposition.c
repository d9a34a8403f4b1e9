/* Figures of the superposition: shift factors with their law, and the master curve with the joint fit and its
 * residuals. Stage report. What the data barely determine is drawn open, with its bar; the law is drawn over
 * its valid range only, and the fitted curve over the reduced frequencies that were measured.
 */
#include "fit/report/page.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const an_law *chosen_law(const an_master *master)
{
    for (int i = 0; i < master->n_trial; i++)
        if (master->trial[i].chosen)
            return &master->trial[i].law;
    return NULL;
}

/* Shifts as arrays for one figure; [n_shift] each, in one allocation. */
typedef struct shift_arrays {
    double *values;                                             /* owned */
    double *T, *log_a, *bar_a, *noise_a, *log_b, *bar_b, *miss; /* [degC], [1] */
} shift_arrays;

static bool shift_arrays_new(page *p, shift_arrays *s)
{
    const an_master *master = &p->report->master;
    size_t n = (size_t)master->n_shift;
    s->values = calloc(7 * n + 1, sizeof *s->values);
    if (!s->values) {
        p->status = an_fail_memory(p->err, "the shifts of a figure");
        return false;
    }
    double **arrays[] = {&s->T, &s->log_a, &s->bar_a, &s->noise_a, &s->log_b, &s->bar_b, &s->miss};
    for (size_t k = 0; k < 7; k++)
        *arrays[k] = s->values + k * n;
    const an_law *law = chosen_law(master);
    for (size_t i = 0; i < n; i++) {
        const an_shift *shift = &master->shift[i];
        s->T[i] = shift->temperature_K - AN_ZERO_CELSIUS_K;
        s->log_a[i] = shift->log10_aT;
        s->bar_a[i] = PAGE_COVERAGE * shift->u_log10_aT;
        s->noise_a[i] = PAGE_COVERAGE * shift->u_noise_log10_aT;
        s->log_b[i] = shift->log10_bT;
        s->bar_b[i] = PAGE_COVERAGE * shift->u_log10_bT;
        double by_law;
        bool valid =
            law && an_law_log10_aT(law, shift->temperature_K, AN_RANGE_REFUSE, &by_law, NULL) == AN_OK;
        s->miss[i] = valid ? shift->log10_aT - by_law : NAN;
    }
    return true;
}

/* What a panel shows of the shifts: values, half-lengths of the bars [1], and its name. */
typedef struct shift_column {
    const double *y, *bar; /* [n_shift] */
    const char *name;
} shift_column;

/* Each shift in its colour; those barely determined are open. */
static void add_shifts(page *p, an_figure *figure, const double *x, const shift_column *column)
{
    const an_master *master = &p->report->master;
    const double *y = column->y, *bar = column->bar;
    for (int i = 0; i < master->n_shift; i++) {
        bool determined = master->shift[i].determined;
        an_figure_style style = {.color = page_cell_color(&p->cells, x[i]),
                                 .radius = 3.4,
                                 .marker = determined ? AN_MARKER_DISC : AN_MARKER_RING};
        an_figure_add_series(
            figure, &(an_figure_series){.x = x + i,
                                        .y = y + i,
                                        .u = bar + i,
                                        .bars = PAGE_BARS,
                                        .n = 1,
                                        .name = column->name,
                                        .legend = determined ? "isotherm" : "isotherm, barely determined",
                                        .neutral = true,
                                        .loose = !determined,
                                        .style = style});
    }
    /* the ranges still take in the values themselves where the bars would stretch them */
    an_figure_add_series(figure, &(an_figure_series){.x = x, .y = y, .n = (size_t)master->n_shift});
}

static void add_law(page *p, an_figure *figure)
{
    const an_master *master = &p->report->master;
    const an_law *law = chosen_law(master);
    if (!law || master->n_shift < 2)
        return;
    double from = fmax(master->shift[0].temperature_K, law->valid_from_K);
    double to = fmin(master->shift[master->n_shift - 1].temperature_K, law->valid_to_K);
    double T[PAGE_CURVE], y[PAGE_CURVE], low[PAGE_CURVE], high[PAGE_CURVE];
    for (int i = 0; i < PAGE_CURVE; i++) {
        double kelvin = from + (to - from) * i / (PAGE_CURVE - 1);
        double u = PAGE_COVERAGE * an_law_u_log10_aT(law, kelvin);
        T[i] = kelvin - AN_ZERO_CELSIUS_K;
        if (an_law_log10_aT(law, kelvin, AN_RANGE_MARK, &y[i], NULL) < 0)
            y[i] = NAN;
        low[i] = y[i] - u;
        high[i] = y[i] + u;
    }
    an_figure_add_band(figure, &(an_figure_band){.x = T,
                                                 .low = low,
                                                 .high = high,
                                                 .n = PAGE_CURVE,
                                                 .color = AN_COLOR_INK,
                                                 .name = "law, k = 2",
                                                 .loose = true});
    an_figure_add_series(
        figure,
        &(an_figure_series){.x = T,
                            .y = y,
                            .n = PAGE_CURVE,
                            .legend = page_law_name(law->kind),
                            .style = {.color = AN_COLOR_INK, .stroke = AN_STROKE_SOLID, .width = 1.2}});
}

static void figure_shifts(page *p)
{
    const an_master *master = &p->report->master;
    shift_arrays s;
    if (!shift_arrays_new(p, &s))
        return;
    an_figure_spec spec = {
        .id = "shifts",
        .title = "Shift factors over temperature",
        .description =
            "Horizontal shift factors with the fitted law, their distance from it, vertical shifts",
        .x = {.label = "Temperature (°C)", .symbol = "T", .unit = "°C"}};
    an_figure *figure = page_figure_new(p, &spec);
    if (figure) {
        an_figure_add_panel(figure, &(an_figure_axis){.label = "log_{10} a_{T}", .symbol = "log a"}, 190);
        add_law(p, figure);
        add_shifts(p, figure, s.T, &(shift_column){s.log_a, s.bar_a, "log a"});
        an_figure_add_rule(figure, master->reference_temperature_K - AN_ZERO_CELSIUS_K, "reference");
        an_figure_add_panel(figure, &(an_figure_axis){.label = "off law", .symbol = "log a − law"}, 80);
        an_figure_add_level(figure, 0);
        add_shifts(p, figure, s.T, &(shift_column){s.miss, s.noise_a, "log a off law"});
        if (master->vertical != AN_VERTICAL_NONE) {
            an_figure_add_panel(figure, &(an_figure_axis){.label = "log_{10} b_{T}", .symbol = "log b"}, 80);
            an_figure_add_level(figure, 0);
            add_shifts(p, figure, s.T, &(shift_column){s.log_b, s.bar_b, "log b"});
        }
        page_figure_end(p, &figure,
                        "Horizontal shift factors with the law that was chosen, their distance from it in "
                        "decades, and, where "
                        "there are any, vertical shift factors. Bars are twice the standard uncertainty: "
                        "both parts, but the "
                        "noise part alone at the distance from the law, since what all isotherms share moves "
                        "the law with them.");
    }
    free(s.values);
}

/* Residuals and moduli of the master curve's points; [n_point] each, in one allocation. */
typedef struct master_arrays {
    double *values;                                /* owned */
    double *x, *modulus[2], *bar[2], *residual[2]; /* [rad/s], [MPa], [MPa], [1] */
    size_t n;
} master_arrays;

static void master_arrays_fill(master_arrays *m, const an_master *master, int isotherm, bool outlier)
{
    m->n = 0;
    for (int i = 0; i < master->n_point; i++) {
        const an_master_point *point = &master->point[i];
        if (point->isotherm != isotherm || (point->outlier != 0) != outlier)
            continue;
        const double modulus[2] = {point->storage_Pa, point->loss_Pa};
        m->x[m->n] = point->reduced_omega;
        for (int k = 0; k < 2; k++) {
            double variance = point->noise[2 * k];
            for (int s = 0; s < AN_SOURCE_COUNT; s++)
                variance += point->common[s][k] * point->common[s][k];
            m->modulus[k][m->n] = modulus[k] / 1e6;
            m->bar[k][m->n] = PAGE_COVERAGE * sqrt(variance) / 1e6;
            m->residual[k][m->n] = point->residual[k];
        }
        m->n++;
    }
}

static bool master_arrays_new(page *p, master_arrays *m)
{
    size_t most = (size_t)p->report->master.n_point;
    memset(m, 0, sizeof *m);
    m->values = calloc(7 * most + 1, sizeof *m->values);
    if (!m->values) {
        p->status = an_fail_memory(p->err, "the master curve of a figure");
        return false;
    }
    double **arrays[] = {&m->x,      &m->modulus[0],  &m->modulus[1], &m->bar[0],
                         &m->bar[1], &m->residual[0], &m->residual[1]};
    for (size_t k = 0; k < 7; k++)
        *arrays[k] = m->values + k * most;
    return true;
}

static double isotherm_temperature(const an_master *master, int isotherm)
{
    for (int i = 0; i < master->n_point; i++)
        if (master->point[i].isotherm == isotherm)
            return master->point[i].temperature_K - AN_ZERO_CELSIUS_K;
    return NAN;
}

static int count_isotherms(const an_master *master)
{
    int most = 0;
    for (int i = 0; i < master->n_point; i++)
        if (master->point[i].isotherm >= most)
            most = master->point[i].isotherm + 1;
    return most;
}

static void add_points(page *p, an_figure *figure, master_arrays *m, int modulus, bool residual)
{
    const an_master *master = &p->report->master;
    char symbol[16], name[48];
    snprintf(symbol, sizeof symbol, "%c%s", p->letter, modulus ? "″" : "′");
    for (int g = 0; g < count_isotherms(master); g++) {
        double T = isotherm_temperature(master, g);
        snprintf(name, sizeof name, "%s at %ld °C", symbol, lround(T));
        an_figure_style style = {.color = page_cell_color(&p->cells, T), .radius = residual ? 1.8 : 2.2};
        for (int outlier = 0; outlier < 2; outlier++) {
            master_arrays_fill(m, master, g, outlier != 0);
            style.marker = outlier ? AN_MARKER_CROSS : modulus ? AN_MARKER_RING : AN_MARKER_DISC;
            if (m->n == 0)
                continue;
            an_figure_add_series(
                figure, &(an_figure_series){.x = m->x,
                                            .y = residual ? m->residual[modulus] : m->modulus[modulus],
                                            .u = residual ? NULL : m->bar[modulus],
                                            .bars = PAGE_BARS,
                                            .n = m->n,
                                            .name = name,
                                            .legend = outlier ? "left out as outlier" : symbol,
                                            .neutral = true,
                                            .loose = residual && outlier,
                                            .style = style});
        }
    }
}

/* Storage and loss of a spectrum over a range of reduced frequency. */
static void add_curve(an_figure *figure, const an_maxwell *model, const double range[2], uint32_t color,
                      const char *legend)
{
    double x[PAGE_CURVE], y[2][PAGE_CURVE];
    for (int i = 0; i < PAGE_CURVE; i++) {
        x[i] = range[0] * pow(range[1] / range[0], (double)i / (PAGE_CURVE - 1));
        y[0][i] = an_maxwell_storage(model, x[i]) / 1e6;
        y[1][i] = an_maxwell_loss(model, x[i]) / 1e6;
    }
    for (int k = 0; k < 2; k++)
        an_figure_add_series(
            figure, &(an_figure_series){
                        .x = x,
                        .y = y[k],
                        .n = PAGE_CURVE,
                        .legend = k ? NULL : legend,
                        .loose = true,
                        .style = {.color = color,
                                  .width = 1.2,
                                  .stroke = color == AN_COLOR_INK ? AN_STROKE_SOLID : AN_STROKE_DASHED}});
}

static bool reduced_range(const an_master *master, double range[2])
{
    range[0] = INFINITY;
    range[1] = 0;
    for (int i = 0; i < master->n_point; i++) {
        range[0] = fmin(range[0], master->point[i].reduced_omega);
        range[1] = fmax(range[1], master->point[i].reduced_omega);
    }
    return range[0] > 0 && range[1] > range[0];
}

static void figure_master(page *p)
{
    const an_master *master = &p->report->master;
    char x_label[96], y_label[48];
    snprintf(x_label, sizeof x_label, "Reduced angular frequency ω a_{T} (rad/s)");
    snprintf(y_label, sizeof y_label, "%c′, %c″ over b_{T} (MPa)", p->letter, p->letter);
    an_figure_spec spec = {.id = "master",
                           .title = "Master curve with the fitted spectrum's curve and residuals",
                           .x = {.label = x_label, .symbol = "ω a", .unit = "rad/s", .scale = AN_AXIS_LOG10}};
    master_arrays m;
    if (!master_arrays_new(p, &m))
        return;
    an_figure *figure = page_figure_new(p, &spec);
    if (figure) {
        double range[2];
        page_ramp_temperature(p, figure);
        an_figure_add_panel(
            figure,
            &(an_figure_axis){.label = y_label, .symbol = "modulus", .unit = "MPa", .scale = AN_AXIS_LOG10},
            230);
        add_points(p, figure, &m, 0, false);
        add_points(p, figure, &m, 1, false);
        bool has_range = reduced_range(master, range);
        if (has_range)
            add_curve(figure, &master->spectrum, range, AN_COLOR_INK, "joint fit");
        if (has_range && p->report->has_material)
            add_curve(figure, &p->report->material.modes, range, AN_COLOR_SECOND, "handed-over spectrum");
        an_figure_add_panel(figure, &(an_figure_axis){.label = "residual / u", .symbol = "residual / u"}, 90);
        an_figure_add_level(figure, 0);
        add_points(p, figure, &m, 0, true);
        add_points(p, figure, &m, 1, true);
        page_figure_end(
            p, &figure,
            "Master curve at the reference temperature, with the curves of the joint fit and, where there is "
            "one, of "
            "the handed-over spectrum. Below: measured less fitted, in standard uncertainties of the noise.");
    }
    free(m.values);
}

void section_superposition(page *p)
{
    fputs("<section>\n<h2>Superposition</h2>\n", p->out);
    if (!p->report->has_master) {
        page_absent(p, "No master curve.",
                    page_why(p->report, AN_REPORT_MASTER,
                             p->report->has_grid
                                 ? "The isotherms were not joined: no master document was given to this page"
                                 : "Neither a grid nor a master document was given to this page"));
    } else {
        const an_master *master = &p->report->master;
        fprintf(p->out, "<p><b>Verdict: %s.</b> ", an_simplicity_word(master->simplicity));
        page_sentence(p->out, master->simplicity_reason);
        fputs(" Reference temperature ", p->out);
        markup_fixed(p->out, master->reference_temperature_K - AN_ZERO_CELSIUS_K, 2);
        fprintf(p->out, " °C; vertical shift: %s.</p>\n<div class=\"figures\">\n",
                an_vertical_word(master->vertical));
        figure_master(p);
        figure_shifts(p);
        fputs("</div>\n", p->out);
    }
    fputs("</section>\n", p->out);
}
