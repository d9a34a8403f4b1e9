/* Tables of what was measured and how sure it is: points, isotherms, glass-transition readings, the budget by
 * source and the largest corrections. Stage report. Moduli in MPa, temperatures in degrees Celsius;
 * uncertainties are standard ones (k = 1).
 */
#include "fit/report/page.h"

#include <math.h>
#include <stdlib.h>

static const char *state_word(an_point_state state)
{
    return state == AN_POINT_USED ? "used" : state == AN_POINT_FLAGGED ? "flagged" : "skipped";
}

/* Codes of the remarks about a point. */
static void cell_codes(FILE *out, const an_remark_list *remarks)
{
    fputs("<td>", out);
    for (size_t i = 0; i < remarks->n; i++) {
        fputs(i ? ", " : "", out);
        markup_plain(out, remarks->rows[i].kind->code);
    }
    fputs("</td>", out);
}

static double u_noise(const an_point *point, int k)
{
    return sqrt(point->noise[2 * k]);
}

static double u_common(const an_point *point, int k)
{
    double covariance[3];
    an_point_common(point, covariance);
    return sqrt(covariance[2 * k]);
}

static void point_row(FILE *out, const an_point *point)
{
    double loss_factor, noise, common;
    an_point_loss_factor(point, &loss_factor, &noise, &common);
    fprintf(out, "<tr%s>", point->state == AN_POINT_SKIPPED ? " class=\"muted\"" : "");
    cell_integer(out, point->burst);
    cell_text(out, state_word(point->state));
    cell_fixed(out, point->temperature_K - AN_ZERO_CELSIUS_K, 2);
    cell_number(out, point->frequency_Hz, 4);
    cell_number(out, point->storage_Pa / 1e6, 5);
    cell_number(out, u_noise(point, 0) / 1e6, 2);
    cell_number(out, u_common(point, 0) / 1e6, 2);
    cell_number(out, point->loss_Pa / 1e6, 5);
    cell_number(out, u_noise(point, 1) / 1e6, 2);
    cell_number(out, u_common(point, 1) / 1e6, 2);
    cell_with_u(out, loss_factor, hypot(noise, common));
    cell_number(out, 100 * point->strain, 3);
    cell_number(out, point->static_force_N, 3);
    cell_number(out, point->stiffness_compliance, 2);
    cell_number(out, point->snr_dB, 3);
    cell_number(out, 100 * point->harmonic[0], 2);
    cell_number(out, 100 * point->harmonic[1], 2);
    cell_codes(out, &point->remarks);
    fputs("</tr>\n", out);
}

static void table_points(page *p)
{
    static const char *const heads[] = {
        "Burst",           "State",           "T (°C)",           "f (Hz)",  "@′ (MPa)",
        "u noise",         "u common",        "@″ (MPa)",         "u noise", "u common",
        "tan δ",           "Strain (%)",      "Static force (N)", "K_{s} C", "SNR (dB)",
        "I_{2}/I_{1} (%)", "I_{3}/I_{1} (%)", "Remarks",          NULL};
    const an_points *points = &p->report->points;
    fprintf(p->out, "<details%s><summary>Points: all %d bursts</summary>\n",
            points->n_point <= 40 ? " open=\"open\"" : "", points->n_point);
    fputs("<div class=\"tall\">\n", p->out);
    table_begin(p, "Points", heads);
    for (int i = 0; i < points->n_point; i++)
        point_row(p->out, &points->point[i]);
    table_end(p->out);
    fputs("</div></details>\n", p->out);
}

static void table_isotherms(page *p)
{
    static const char *const heads[] = {"T (°C)",       "u noise (K)",  "Set (°C)", "Cells", "Spread (K)",
                                        "Rate (K/min)", "Reached from", "Steady",   NULL};
    const an_grid *grid = &p->report->grid;
    table_begin(p, "Isotherms", heads);
    for (int i = 0; i < grid->n_isotherm; i++) {
        const an_isotherm *isotherm = &grid->isotherm[i];
        fputs("<tr>", p->out);
        cell_fixed(p->out, isotherm->temperature_K - AN_ZERO_CELSIUS_K, 2);
        cell_number(p->out, isotherm->u_temperature_K, 2);
        cell_fixed(p->out, isotherm->set_temperature_K - AN_ZERO_CELSIUS_K, 2);
        cell_integer(p->out, isotherm->n_cell);
        cell_number(p->out, isotherm->drift_K, 2);
        cell_number(p->out, 60 * isotherm->rate_K_s, 2);
        cell_text(p->out, isotherm->cooling ? "above" : "below");
        cell_text(p->out, isotherm->steady ? "yes" : "no");
        fputs("</tr>\n", p->out);
    }
    table_end(p->out);
}

static void table_readings(page *p)
{
    static const char *const heads[] = {"Reading",    "Frequency (Hz)", "T_{g} (°C)", "u noise (K)",
                                        "u form (K)", "u common (K)",   "From",       "Refused because",
                                        NULL};
    const an_grid *grid = &p->report->grid;
    if (grid->n_reading == 0) {
        page_absent(p, "No glass-transition readings.",
                    "The measured temperatures do not span a transition.");
        return;
    }
    table_begin(p, "Glass-transition readings", heads);
    for (int i = 0; i < grid->n_reading; i++) {
        const an_reading *reading = &grid->reading[i];
        fputs("<tr>", p->out);
        cell_text(p->out, an_reading_word(reading->kind));
        cell_number(p->out, reading->frequency_Hz, 4);
        cell_fixed(p->out, reading->temperature_K - AN_ZERO_CELSIUS_K, 2);
        bool stands = isfinite(reading->temperature_K);
        cell_number(p->out, stands ? reading->u_noise_K : NAN, 2);
        cell_number(p->out, stands ? reading->u_form_K : NAN, 2); /* of the curve between isotherms */
        cell_number(p->out, stands ? reading->u_common_K : NAN, 2);
        cell_text(p->out, reading->on_ramp ? "ramp" : "isotherms");
        cell_words(p->out, reading->reason);
        fputs("</tr>\n", p->out);
    }
    table_end(p->out);
}

/* One line of the budget: how far one standard uncertainty of a source moves modulus and loss angle. */
typedef struct budget_line {
    double median;  /* [1] of |dE*| / |E*| over the points */
    double largest; /* [1] */
    int burst;      /* of the largest */
    double angle;   /* [rad] largest change of the loss angle */
} budget_line;

#define ROUNDING 1e-12 /* [rad], [1] what floating point leaves of a change that is none */

static int by_size(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

/* The budget of one source, or of the noise part where source is AN_SOURCE_COUNT. sizes [n_point] is scratch.
 */
static budget_line budget_of(const an_points *points, int source, double *sizes)
{
    budget_line line = {0};
    size_t n = 0;
    for (int i = 0; i < points->n_point; i++) {
        const an_point *point = &points->point[i];
        double magnitude = hypot(point->storage_Pa, point->loss_Pa);
        if (point->state == AN_POINT_SKIPPED || !(magnitude > 0))
            continue;
        double storage = source < AN_SOURCE_COUNT ? point->common[source][0] : sqrt(point->noise[0]);
        double loss = source < AN_SOURCE_COUNT ? point->common[source][1] : sqrt(point->noise[2]);
        double angle = fabs(point->storage_Pa * loss - point->loss_Pa * storage) / (magnitude * magnitude);
        double size = hypot(storage, loss) / magnitude;
        if (source ==
            AN_SOURCE_COUNT) /* noise is alike in both parts: one of them stands for modulus and for angle */
            size = angle = sqrt((point->noise[0] + point->noise[2]) / 2) / magnitude;
        sizes[n++] = size;
        line.angle = fmax(line.angle, angle);
        if (size > line.largest) {
            line.largest = size;
            line.burst = point->burst;
        }
    }
    qsort(sizes, n, sizeof *sizes, by_size);
    if (line.angle < ROUNDING)
        line.angle = 0;
    line.median = n ? sizes[n / 2] : NAN;
    return line;
}

static void budget_row(FILE *out, const char *name, const char *kind, const budget_line *line)
{
    fputs("<tr>", out);
    cell_text(out, name);
    cell_text(out, kind);
    cell_number(out, 100 * line->median, 2);
    cell_number(out, 100 * line->largest, 2);
    cell_integer(out, line->burst);
    cell_number(out, 1000 * line->angle, 2);
    fputs("</tr>\n", out);
}

static void table_budget(page *p)
{
    static const char *const heads[] = {"Source",
                                        "Part",
                                        "Modulus, median (%)",
                                        "Modulus, largest (%)",
                                        "at burst",
                                        "Loss angle, largest (mrad)",
                                        NULL};
    const an_points *points = &p->report->points;
    double *sizes = calloc((size_t)points->n_point + 1, sizeof *sizes);
    if (!sizes) {
        p->status = an_fail_memory(p->err, "the budget");
        return;
    }
    table_begin(p, "Uncertainty by source, one standard uncertainty each", heads);
    budget_line line = budget_of(points, AN_SOURCE_COUNT, sizes);
    budget_row(p->out, "noise", "burst by burst", &line);
    for (int source = 0; source < AN_SOURCE_COUNT; source++) {
        line = budget_of(points, source, sizes);
        if (line.largest > 0)
            budget_row(p->out, an_source_word((an_source)source), "common", &line);
    }
    table_end(p->out);
    free(sizes);
}

static void table_corrections(page *p)
{
    static const char *const heads[] = {
        "Rung", "Largest change of stiffness (%)", "at burst", "f (Hz)", "T (°C)", NULL};
    const an_points *points = &p->report->points;
    table_begin(p, "Largest correction of every rung, from the sensor inwards", heads);
    for (int rung = 0; rung < AN_RUNG_COUNT; rung++) {
        const an_point *worst = NULL;
        double largest = 0;
        for (int i = 0; i < points->n_point; i++) {
            const an_point *point = &points->point[i];
            double size = hypot(point->rung[rung][0], point->rung[rung][1]);
            size = size < ROUNDING ? 0 : size;
            if (point->state != AN_POINT_SKIPPED && size > largest) {
                largest = size;
                worst = point;
            }
        }
        fputs("<tr>", p->out);
        cell_text(p->out, an_rung_word((an_rung)rung));
        cell_number(p->out, 100 * largest, 3);
        if (worst) {
            cell_integer(p->out, worst->burst);
            cell_number(p->out, worst->frequency_Hz, 4);
            cell_fixed(p->out, worst->temperature_K - AN_ZERO_CELSIUS_K, 2);
        } else {
            fputs("<td></td><td></td><td></td>", p->out);
        }
        fputs("</tr>\n", p->out);
    }
    table_end(p->out);
}

void section_tables(page *p)
{
    const an_report *r = p->report;
    if (!r->has_points && !r->has_grid && !r->has_master && !r->has_material)
        return;
    fputs("<section>\n<h2>Tables</h2>\n", p->out);
    if (r->has_grid)
        table_readings(p);
    if (r->has_points) {
        table_corrections(p);
        table_budget(p);
    }
    if (r->has_master)
        tables_superposition(p);
    if (r->has_material)
        table_modes(p);
    if (r->has_grid)
        table_isotherms(p);
    if (r->has_points)
        table_points(p);
    fputs("</section>\n", p->out);
}
