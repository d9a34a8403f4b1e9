/* Figures of the moduli: over temperature along each frequency, over frequency along each isotherm, the loss
 * factor with them, the loss angle over the magnitude, and how large the stated uncertainties are. Stage
 * report. Colour stands for temperature, or, where temperature is the axis, for frequency. Bars are the noise
 * part, bands both parts, each with coverage factor 2.
 */
#include "fit/report/page.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { QUANTITIES = 3 }; /* storage, loss, loss factor */

typedef enum direction { ALONG_TEMPERATURE, ALONG_FREQUENCY } direction;

/* The cells of one line in the order of drawing; arrays [n] within one allocation. */
typedef struct strand {
    double *values; /* owned */
    double *x, *y[QUANTITIES], *bar[QUANTITIES], *low[QUANTITIES], *high[QUANTITIES];
    size_t n;
} strand;

static bool strand_new(page *p, strand *s)
{
    size_t most = (size_t)p->cells.n;
    memset(s, 0, sizeof *s);
    s->values = calloc(most * (1 + 4 * QUANTITIES), sizeof *s->values);
    if (!s->values) {
        p->status = an_fail_memory(p->err, "the lines of a figure");
        return false;
    }
    double *next = s->values;
    s->x = next;
    for (int k = 0; k < QUANTITIES; k++) {
        s->y[k] = next += most;
        s->bar[k] = next += most;
        s->low[k] = next += most;
        s->high[k] = next += most;
    }
    return true;
}

static void strand_add(strand *s, const page_cell *cell, direction way)
{
    size_t i = s->n++;
    s->x[i] = way == ALONG_TEMPERATURE ? cell->temperature_C : cell->frequency_Hz;
    const double value[QUANTITIES] = {cell->modulus_MPa[0], cell->modulus_MPa[1], cell->loss_factor};
    const double total[QUANTITIES] = {cell->u_total_MPa[0], cell->u_total_MPa[1], cell->u_loss_factor};
    const double noise[QUANTITIES] = {cell->u_noise_MPa[0], cell->u_noise_MPa[1], cell->u_loss_factor};
    for (int k = 0; k < QUANTITIES; k++) {
        s->y[k][i] = value[k];
        s->bar[k][i] = PAGE_COVERAGE * noise[k];
        s->low[k][i] = value[k] - PAGE_COVERAGE * total[k];
        s->high[k][i] = value[k] + PAGE_COVERAGE * total[k];
    }
}

static int group_of(const page_cell *cell, direction way)
{
    return way == ALONG_TEMPERATURE ? cell->line : cell->isotherm;
}

static void strand_fill(strand *s, const page_cells *cells, direction way, int group, bool doubtful)
{
    s->n = 0;
    for (int i = 0; i < cells->n; i++)
        if (group_of(&cells->cell[i], way) == group && cells->cell[i].doubtful == doubtful)
            strand_add(s, &cells->cell[i], way);
}

/* The first cell of a group; NULL where it has none. */
static const page_cell *first_of(const page_cells *cells, direction way, int group)
{
    for (int i = 0; i < cells->n; i++)
        if (group_of(&cells->cell[i], way) == group)
            return &cells->cell[i];
    return NULL;
}

enum { NAME = 64 }; /* bytes of a group's name */

/* What a group is called in hover texts, as in "E′ at 10.0 Hz". */
static void name_group(char name[NAME], const page_cells *cells, direction way, int group, const char *symbol)
{
    const page_cell *first = first_of(cells, way, group);
    name[0] = '\0';
    FILE *out = first ? fmemopen(name, NAME, "w") : NULL;
    if (!out)
        return;
    fprintf(out, "%s at ", symbol);
    if (way == ALONG_TEMPERATURE)
        markup_number(out, first->frequency_Hz, 3);
    else
        markup_fixed(out, first->temperature_C, 1);
    fputs(way == ALONG_TEMPERATURE ? " Hz" : " °C", out);
    fclose(out);
}

static uint32_t group_color(const page_cells *cells, direction way, int group)
{
    const page_cell *first = first_of(cells, way, group);
    if (!first)
        return AN_COLOR_MUTED;
    return way == ALONG_TEMPERATURE ? page_line_color(cells, first->frequency_Hz)
                                    : page_cell_color(cells, first->temperature_C);
}

/* E′, E″ or tan δ, with the letter of the modulus. */
static void quantity_symbol(const page *p, int quantity, char symbol[16])
{
    if (quantity == 2)
        snprintf(symbol, 16, "tan δ");
    else
        snprintf(symbol, 16, "%c%s", p->letter, quantity ? "″" : "′");
}

/* One quantity of all groups into the last panel of a figure. */
static void add_quantity(page *p, an_figure *figure, strand *s, direction way, int quantity)
{
    int n_group = way == ALONG_TEMPERATURE ? p->cells.n_line : p->cells.n_isotherm;
    char name[NAME], symbol[16];
    quantity_symbol(p, quantity, symbol);
    for (int g = 0; g < n_group; g++) {
        name_group(name, &p->cells, way, g, symbol);
        an_figure_style style = {.color = group_color(&p->cells, way, g),
                                 .radius = 2.2,
                                 .width = 1,
                                 .marker = quantity == 1 ? AN_MARKER_RING : AN_MARKER_DISC,
                                 .stroke = AN_STROKE_SOLID};
        strand_fill(s, &p->cells, way, g, false);
        an_figure_add_band(figure, &(an_figure_band){.x = s->x,
                                                     .low = s->low[quantity],
                                                     .high = s->high[quantity],
                                                     .n = s->n,
                                                     .color = style.color,
                                                     .loose = true,
                                                     .name = "both parts of u, k = 2",
                                                     .neutral = true});
        an_figure_add_series(figure, &(an_figure_series){.x = s->x,
                                                         .y = s->y[quantity],
                                                         .u = s->bar[quantity],
                                                         .bars = PAGE_BARS,
                                                         .n = s->n,
                                                         .name = name,
                                                         .style = style});
        strand_fill(s, &p->cells, way, g, true);
        style.marker = AN_MARKER_CROSS;
        style.stroke = AN_STROKE_NONE;
        style.radius = 3.2;
        if (s->n > 0)
            an_figure_add_series(figure, &(an_figure_series){.x = s->x,
                                                             .y = s->y[quantity],
                                                             .u = s->bar[quantity],
                                                             .bars = PAGE_BARS,
                                                             .n = s->n,
                                                             .name = name,
                                                             .legend = "flagged or outlier",
                                                             .neutral = true,
                                                             .style = style});
    }
}

/* The loss factor peak whose frequency is nearest to 1 Hz. */
static void add_reading(const page *p, an_figure *figure)
{
    const an_reading *r =
        p->report->has_grid ? page_reading(&p->report->grid, AN_READING_LOSS_FACTOR_PEAK) : NULL;
    if (!r)
        return;
    char name[64] = "";
    FILE *out = fmemopen(name, sizeof name, "w");
    if (!out)
        return;
    fputs("loss factor peak at ", out);
    markup_number(out, r->frequency_Hz, 3);
    fputs(" Hz", out);
    fclose(out);
    an_figure_add_rule(figure, r->temperature_K - AN_ZERO_CELSIUS_K, name);
}

static void figure_along(page *p, strand *s, direction way)
{
    bool over_temperature = way == ALONG_TEMPERATURE;
    char labels[2][32], symbols[2][16];
    for (int k = 0; k < 2; k++) {
        quantity_symbol(p, k, symbols[k]);
        snprintf(labels[k], sizeof labels[k], "%s (MPa)", symbols[k]);
    }
    an_figure_spec spec = {
        .id = over_temperature ? "over-temperature" : "over-frequency",
        .title = over_temperature ? "Moduli and loss factor over temperature"
                                  : "Moduli and loss factor over frequency",
        .description = over_temperature
                           ? "One line for every frequency, bands are twice the total uncertainty"
                           : "One line for every isotherm, bands are twice the total uncertainty",
        .x = over_temperature ? (an_figure_axis){.label = "Temperature (°C)", .symbol = "T", .unit = "°C"}
                              : (an_figure_axis){.label = "Frequency (Hz)",
                                                 .symbol = "f",
                                                 .unit = "Hz",
                                                 .scale = AN_AXIS_LOG10},
    };
    an_figure *figure = page_figure_new(p, &spec);
    if (!figure)
        return;
    if (over_temperature)
        an_figure_set_ramp(figure, &(an_figure_ramp){.label = "Frequency (Hz)",
                                                     .scale = AN_AXIS_LOG10,
                                                     .from = p->cells.frequency_Hz[0],
                                                     .to = p->cells.frequency_Hz[1],
                                                     .color = an_tone_color});
    else
        page_ramp_temperature(p, figure);
    for (int k = 0; k < 2; k++) {
        an_figure_axis axis = {
            .label = labels[k], .symbol = symbols[k], .unit = "MPa", .scale = AN_AXIS_LOG10};
        an_figure_add_panel(figure, &axis, 150);
        add_quantity(p, figure, s, way, k);
    }
    an_figure_add_panel(figure,
                        &(an_figure_axis){.label = "tan δ", .symbol = "tan δ", .scale = AN_AXIS_LOG10}, 130);
    add_quantity(p, figure, s, way, 2);
    if (over_temperature)
        add_reading(p, figure);
    page_figure_end(
        p, &figure,
        over_temperature
            ? "Storage modulus, loss modulus and loss factor over temperature, one line for every frequency. "
              "Bars "
              "are twice the noise part of the standard uncertainty (both parts for the loss factor), bands "
              "twice both parts together."
            : "The same over frequency, one line for every isotherm.");
}

/* The loss angle over the magnitude: the isotherms of a material that superposes fall on one curve. */
static void figure_angle(page *p, strand *s)
{
    char label[32];
    snprintf(label, sizeof label, "|%c*| (MPa)", p->letter);
    an_figure_spec spec = {
        .id = "angle",
        .title = "Loss angle over the magnitude of the complex modulus",
        .description = "Isotherms of a material that superposes fall on one curve",
        .x = {.label = label, .symbol = "magnitude", .unit = "MPa", .scale = AN_AXIS_LOG10}};
    an_figure *figure = page_figure_new(p, &spec);
    if (!figure)
        return;
    page_ramp_temperature(p, figure);
    an_figure_add_panel(figure, &(an_figure_axis){.label = "Loss angle δ (°)", .symbol = "δ", .unit = "°"},
                        260);
    for (int g = 0; g < p->cells.n_isotherm; g++) {
        strand_fill(s, &p->cells, ALONG_FREQUENCY, g, false);
        char name[NAME];
        name_group(name, &p->cells, ALONG_FREQUENCY, g, "δ");
        for (size_t i = 0; i < s->n; i++) {
            s->x[i] = hypot(s->y[0][i], s->y[1][i]);
            double t = s->y[2][i];
            s->y[2][i] = atan(t) * 180 / M_PI;
            s->bar[2][i] /= (1 + t * t) * M_PI / 180;
        }
        an_figure_add_series(
            figure, &(an_figure_series){.x = s->x,
                                        .y = s->y[2],
                                        .u = s->bar[2],
                                        .bars = PAGE_BARS,
                                        .n = s->n,
                                        .name = name,
                                        .style = {.color = group_color(&p->cells, ALONG_FREQUENCY, g),
                                                  .marker = AN_MARKER_DISC,
                                                  .radius = 2.4,
                                                  .stroke = AN_STROKE_SOLID,
                                                  .width = 0.8}});
    }
    page_figure_end(p, &figure,
                    "Loss angle over the magnitude of the modulus (van Gurp and Palmen). Isotherms of a "
                    "material that superposes "
                    "fall on one curve; a fan or a second branch is a reason not to shift.");
}

/* Relative uncertainty of one modulus into the last panel: noise and total over temperature. */
static void add_relative(page *p, an_figure *figure, strand *s, int modulus, bool total)
{
    double *x = s->x, *y = s->y[0];
    size_t n = 0;
    for (int i = 0; i < p->cells.n; i++) {
        const page_cell *c = &p->cells.cell[i];
        x[n] = c->temperature_C;
        y[n++] = 100 * (total ? c->u_total_MPa[modulus] : c->u_noise_MPa[modulus]) / c->modulus_MPa[modulus];
    }
    const char *name = total ? "both parts" : "noise part alone";
    an_figure_add_series(figure,
                         &(an_figure_series){.x = x,
                                             .y = y,
                                             .n = n,
                                             .name = name,
                                             .legend = name,
                                             .style = {.color = total ? AN_COLOR_FIRST : AN_COLOR_SECOND,
                                                       .radius = 2.2,
                                                       .marker = total ? AN_MARKER_DISC : AN_MARKER_RING}});
}

static void figure_uncertainty(page *p, strand *s)
{
    an_figure_spec spec = {.id = "uncertainty",
                           .title = "Relative standard uncertainty of the moduli over temperature",
                           .x = {.label = "Temperature (°C)", .symbol = "T", .unit = "°C"}};
    an_figure *figure = page_figure_new(p, &spec);
    if (!figure)
        return;
    for (int k = 0; k < 2; k++) {
        char label[48];
        snprintf(label, sizeof label, "u(%c%s) / %c%s (%%)", p->letter, k ? "″" : "′", p->letter,
                 k ? "″" : "′");
        an_figure_add_panel(
            figure, &(an_figure_axis){.label = label, .symbol = "u", .unit = "%", .scale = AN_AXIS_LOG10},
            130);
        add_relative(p, figure, s, k, true);
        add_relative(p, figure, s, k, false);
    }
    page_figure_end(p, &figure,
                    "Relative standard uncertainty (k = 1) of every modulus. The noise part differs from "
                    "burst to burst; what is "
                    "above it is shared by the whole run and does not average out.");
}

void section_moduli(page *p)
{
    fputs("<section>\n<h2>Moduli</h2>\n", p->out);
    if (p->cells.n == 0) {
        const char *none = p->report->has_points || p->report->has_grid
                               ? "Every burst was skipped; the remarks say why"
                               : "Neither a points nor a grid document was given to this page";
        page_absent(p, "No moduli.", page_why(p->report, AN_REPORT_POINTS, none));
        fputs("</section>\n", p->out);
        return;
    }
    strand s;
    if (strand_new(p, &s)) {
        fputs("<div class=\"figures\">\n", p->out);
        figure_along(p, &s, ALONG_TEMPERATURE);
        figure_along(p, &s, ALONG_FREQUENCY);
        figure_angle(p, &s);
        figure_uncertainty(p, &s);
        fputs("</div>\n", p->out);
        free(s.values);
    }
    fputs("</section>\n", p->out);
}
