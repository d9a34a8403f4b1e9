/* assess.c: what the technician is told while the specimen is still in the clamps: usable, partial or repeat,
 * why in plain words, and what to measure again. The rule stands at an_grid_make in anelast/grid.h.
 */
#include "reduce/grid/parts.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

static double degc(double temperature_K)
{
    return temperature_K - AN_ZERO_CELSIUS_K;
}

__attribute__((format(printf, 2, 3))) static void say(an_assessment *assessment, const char *format, ...)
{
    if (assessment->n_reason >= AN_REASONS)
        return;
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(assessment->reason[assessment->n_reason++], sizeof assessment->reason[0], format, arguments);
    va_end(arguments);
}

/* How often one code stands with one severity, and its first remark. */
typedef struct tally {
    const an_remark *first;
    int n;
} tally;

enum { TALLIES = 64 };

static void count_remark(const an_remark *remark, tally *tallies, int *n)
{
    int i = 0;
    while (i < *n &&
           (tallies[i].first->kind != remark->kind || tallies[i].first->severity != remark->severity))
        i++;
    if (i == TALLIES)
        return;
    if (i == *n)
        tallies[(*n)++] = (tally){remark, 0};
    tallies[i].n++;
}

/* The remarks of bursts and of runs, one tally a code. */
static int count_remarks(const an_points *points, int n_points, const an_grid *grid, tally *tallies)
{
    int n = 0;
    for (int i = 0; i < n_points; i++)
        for (int k = 0; k < points[i].n_point; k++)
            for (size_t r = 0; r < points[i].point[k].remarks.n; r++)
                count_remark(&points[i].point[k].remarks.rows[r], tallies, &n);
    for (size_t r = 0; r < grid->remarks.n; r++)
        count_remark(&grid->remarks.rows[r], tallies, &n);
    for (int i = 0; i < grid->n_cell; i++)
        for (size_t r = 0; r < grid->cell[i].remarks.n; r++) {
            const an_remark *remark = &grid->cell[i].remarks.rows[r];
            if (strcmp(remark->kind->code, "drift-check") == 0 || strcmp(remark->kind->code, "outlier") == 0)
                count_remark(remark, tallies, &n);
        }
    return n;
}

/* One line for every code of one severity, the most frequent first. */
static void say_tallies(tally *tallies, int n, an_severity severity, an_assessment *assessment)
{
    for (;;) {
        tally *most = NULL;
        for (int i = 0; i < n; i++)
            if (tallies[i].n > 0 && tallies[i].first->severity == severity &&
                (!most || tallies[i].n > most->n))
                most = &tallies[i];
        if (!most)
            return;
        const an_remark *remark = most->first;
        if (most->n > 1 && remark->burst > 0)
            say(assessment, "%d bursts, such as burst %ld: %s. %s", most->n, remark->burst, remark->text,
                remark->kind->action);
        else if (remark->burst > 0)
            say(assessment, "burst %ld: %s. %s", remark->burst, remark->text, remark->kind->action);
        else
            say(assessment, "%s. %s", remark->text, remark->kind->action);
        most->n = 0;
    }
}

static int held(const an_point *point)
{
    return an_remark_list_worst(&point->remarks, -1) >= AN_HOLD;
}

static void count_bursts(const an_points *points, int n_points, an_assessment *assessment, int *n_bad)
{
    *n_bad = 0;
    for (int i = 0; i < n_points; i++)
        for (int k = 0; k < points[i].n_point; k++) {
            const an_point *point = &points[i].point[k];
            assessment->n_used += point->state == AN_POINT_USED;
            assessment->n_flagged += point->state == AN_POINT_FLAGGED;
            assessment->n_skipped += point->state == AN_POINT_SKIPPED;
            *n_bad += point->state == AN_POINT_SKIPPED || held(point);
        }
}

/* Dropped, and not only because it stands in the dump a second time. */
static int is_lost(const an_point *point)
{
    return point->state == AN_POINT_SKIPPED && !an_remark_list_has(&point->remarks, "duplicate-burst", -1);
}

/* Kept, but fitted around what the converter cut off. */
static int is_cut(const an_point *point)
{
    for (size_t i = 0; i < point->remarks.n; i++)
        if (point->remarks.rows[i].severity == AN_FLAG &&
            strcmp(point->remarks.rows[i].kind->code, "clipping") == 0)
            return point->state != AN_POINT_SKIPPED;
    return 0;
}

/* The bursts that a test picks, as the technician sets them: temperature and frequencies. */
static void say_what_to_redo(const an_points *points, int n_points, int (*picks)(const an_point *),
                             const char *what, an_assessment *assessment)
{
    char list[160] = "";
    size_t used = 0;
    int n = 0;
    double last = NAN;
    for (int i = 0; i < n_points; i++)
        for (int k = 0; k < points[i].n_point; k++) {
            const an_point *point = &points[i].point[k];
            double set = isnan(point->set_temperature_K) ? point->temperature_K : point->set_temperature_K;
            double frequency = isnan(point->set_frequency_Hz) ? point->frequency_Hz : point->set_frequency_Hz;
            if (!picks(point) || isnan(frequency) || isnan(set))
                continue;
            n++;
            if (used > sizeof list - 40)
                continue;
            if (fabs(set - last) < 0.05)
                used += (size_t)snprintf(list + used, sizeof list - used, ", %.3g", frequency);
            else
                used += (size_t)snprintf(list + used, sizeof list - used, "%s%.1f °C: %.3g",
                                         used ? " Hz; " : "", degc(set), frequency);
            last = set;
        }
    if (n > 0)
        say(assessment, "before unclamping, measure again%s: %s Hz%s", what, list,
            used > sizeof list - 40 ? ", and more" : "");
}

static void find_largest_correction(const an_points *points, int n_points, an_assessment *assessment)
{
    const an_point *most = NULL;
    int i_rung = 0;
    double size = 0;
    for (int i = 0; i < n_points; i++)
        for (int k = 0; k < points[i].n_point; k++)
            for (int r = 0; r < AN_RUNG_COUNT; r++) {
                const an_point *point = &points[i].point[k];
                double one = hypot(point->rung[r][0], point->rung[r][1]);
                if (point->state != AN_POINT_SKIPPED && one > size) {
                    size = one;
                    most = point;
                    i_rung = r;
                }
            }
    if (!most)
        snprintf(assessment->largest_correction, sizeof assessment->largest_correction, "none");
    else
        snprintf(assessment->largest_correction, sizeof assessment->largest_correction,
                 "%s: %.*f %% of stiffness at burst %d (%.3g Hz, %.1f °C); K_s C = %.2g",
                 an_rung_phrase((an_rung)i_rung), size < 0.1 ? 1 : 0, 100 * size, most->burst,
                 most->frequency_Hz, degc(most->temperature_K), most->stiffness_compliance);
}

static void say_missing(const an_grid *grid, an_assessment *assessment)
{
    int most = 0, n_short = 0, first = -1;
    for (int i = 0; i < grid->n_isotherm; i++)
        most = grid->isotherm[i].n_cell > most ? grid->isotherm[i].n_cell : most;
    for (int i = 0; i < grid->n_isotherm; i++)
        if (grid->isotherm[i].n_cell < most) {
            n_short++;
            first = first < 0 ? i : first;
        }
    if (n_short > 0)
        say(assessment, "%d of %d isotherms without all frequencies, the first at %.1f °C with %d of %d",
            n_short, grid->n_isotherm, degc(grid->isotherm[first].temperature_K),
            grid->isotherm[first].n_cell, most);
}

void an_assess(const an_points *points, int n_points, an_grid *grid)
{
    an_assessment *assessment = &grid->assessment;
    tally tallies[TALLIES];
    int n_bad, n = count_remarks(points, n_points, grid, tallies);
    int worst = -1;
    for (int i = 0; i < n; i++)
        worst = (int)tallies[i].first->severity > worst ? (int)tallies[i].first->severity : worst;
    count_bursts(points, n_points, assessment, &n_bad);
    int n_all = assessment->n_used + assessment->n_flagged + assessment->n_skipped;
    if (worst == AN_HALT || 2 * n_bad > n_all || grid->n_isotherm + grid->n_ramp == 0)
        assessment->verdict = AN_REPEAT;
    else if (n_bad > 0 || worst == AN_HOLD)
        assessment->verdict = AN_PARTIAL;
    for (int severity = AN_HALT; severity >= AN_SKIP; severity--)
        say_tallies(tallies, n, (an_severity)severity, assessment);
    say_what_to_redo(points, n_points, is_lost, "", assessment);
    say_what_to_redo(points, n_points, is_cut, " with a wider range", assessment);
    say_missing(grid, assessment);
    say_tallies(tallies, n, AN_FLAG, assessment);
    find_largest_correction(points, n_points, assessment);
}
