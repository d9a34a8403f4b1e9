/* grid.c: points documents to a grid, in order: isotherms, cells, outliers, readings, assessment. */
#include "reduce/grid/parts.h"

#include "anelast/quantity.h"

#include <math.h>
#include <stdlib.h>
#include <stdio.h>
#include <string.h>

static const char *const reading_words[] = {"storage onset", "loss peak", "loss factor peak"};
static const char *const verdict_words[] = {"usable", "partial", "repeat"};

const char *an_reading_word(an_reading_kind kind)
{
    return reading_words[kind];
}

const char *an_verdict_word(an_verdict verdict)
{
    return verdict_words[verdict];
}

void an_grid_init(an_grid *grid)
{
    *grid = (an_grid){.strain_most = NAN, .scatter = {0, NAN, NAN, NAN, NAN}};
    an_specimen_init(&grid->specimen);
    an_apparatus_init(&grid->apparatus);
}

static void clear_cells(an_cell *cell, int n)
{
    for (int i = 0; i < n; i++)
        an_remark_list_clear(&cell[i].remarks);
    free(cell);
}

void an_grid_clear(an_grid *grid)
{
    an_made_clear(&grid->made);
    an_remark_list_clear(&grid->remarks);
    clear_cells(grid->cell, grid->n_cell);
    clear_cells(grid->ramp, grid->n_ramp);
    free(grid->isotherm);
    free(grid->reading);
    an_grid_init(grid);
}

static an_cell_rules rules_for(const an_points *points, int n_points, const an_procedure *procedure)
{
    an_cell_rules rules = {.width_K = an_procedure_number(procedure, "isotherm_width"),
                           .rate_K_s = an_procedure_number(procedure, "isotherm_drift"),
                           .drift_limit = an_procedure_number(procedure, "repeat_flag"),
                           .n_run = n_points,
                           .sharing = {0, 0, points->specimen.geometry.kind}};
    for (int i = 1; i < n_points; i++) {
        const an_points *run = &points[i];
        rules.sharing.specimens_differ |=
            points->specimen.id[0] == 0 || strcmp(run->specimen.id, points->specimen.id) != 0;
        rules.sharing.benches_differ |= strcmp(run->apparatus.id, points->apparatus.id) != 0;
    }
    return rules;
}

static an_status carry_head(const an_points *points, int n_points, an_grid *grid, an_error *err)
{
    if (n_points == 1)
        snprintf(grid->id, sizeof grid->id, "%s", points->id);
    else
        snprintf(grid->id, sizeof grid->id, "%.140s+%d", points->id, n_points - 1);
    grid->specimen = points->specimen;
    grid->apparatus = points->apparatus;
    for (int i = 0; i < n_points; i++)
        for (size_t k = 0; k < points[i].remarks.n; k++) {
            const an_remark *remark = &points[i].remarks.rows[k];
            AN_TRY(an_remark_list_add_as(&grid->remarks, remark->kind->code, remark->severity, remark->burst,
                                         err, "%s", remark->text));
        }
    return AN_OK;
}

/* Linearity is shown up to the greatest amplitude measured, no further. fmax passes over NAN. */
static double find_strain(const an_points *points, int n_points)
{
    double most = NAN;
    for (int i = 0; i < n_points; i++)
        for (int k = 0; k < points[i].n_point; k++)
            if (points[i].point[k].state != AN_POINT_SKIPPED)
                most = fmax(most, points[i].point[k].strain);
    return most;
}

/* Isotherms that are not steady, and bursts on a ramp, stand as remarks of the grid. */
static an_status remark_motion(double rate_limit_K_s, an_grid *grid, an_error *err)
{
    for (int i = 0; i < grid->n_isotherm; i++) {
        an_isotherm *isotherm = &grid->isotherm[i];
        an_plateau motion = {.rate_K_s = isotherm->rate_K_s, .u_rate_K_s = isotherm->u_rate_K_s};
        isotherm->steady = !an_plateau_moving(&motion, rate_limit_K_s);
        if (!isotherm->steady)
            AN_TRY(
                an_remark_list_add(&grid->remarks, "temperature-unsteady", 0, err,
                                   "the isotherm at %.1f °C moves by %+.2f K/min; up to %.2g K/min is steady",
                                   isotherm->temperature_K - AN_ZERO_CELSIUS_K, 60 * isotherm->rate_K_s, 60 * rate_limit_K_s));
    }
    if (grid->n_ramp > 0)
        AN_TRY(an_remark_list_add(
            &grid->remarks, "temperature-ramp", 0, err,
            "%d bursts from %.1f to %.1f °C were taken while the temperature was passing through",
            grid->n_ramp, grid->ramp[0].temperature_K - AN_ZERO_CELSIUS_K,
            grid->ramp[grid->n_ramp - 1].temperature_K - AN_ZERO_CELSIUS_K));
    return AN_OK;
}

static an_status sort_in(const an_points *points, int n_points, const an_procedure *procedure, an_grid *grid,
                         an_error *err)
{
    an_gathering gathering;
    an_cell_rules rules = rules_for(points, n_points, procedure);
    AN_TRY(an_gathering_make(points, &rules, &gathering, err));
    an_status status = an_cells_make(&gathering, &rules, grid, err);
    if (status >= 0)
        status = an_returns_check(&gathering, &rules, grid, err);
    an_gathering_clear(&gathering);
    AN_TRY(status);
    AN_TRY(remark_motion(rules.rate_K_s, grid, err));
    return an_outliers_mark(grid, err);
}

/* A run counted twice would make scatter and noise look smaller than they are. */
static an_status check_runs(const an_points *points, int n_points, an_error *err)
{
    for (int i = 0; i < n_points; i++)
        for (int k = 0; k < i; k++)
            if (points[i].id[0] && strcmp(points[i].id, points[k].id) == 0)
                return an_fail(err, AN_E_SCIENCE, points[i].id,
                               "two of the points documents are of this run; replicates are different runs");
    return AN_OK;
}

an_status an_grid_make(const an_points *points, int n_points, const an_procedure *procedure, an_grid *grid,
                       an_error *err)
{
    if (n_points < 1)
        return an_fail(err, AN_E_USAGE, NULL, "a grid of no points document");
    AN_TRY(check_runs(points, n_points, err));
    AN_TRY(carry_head(points, n_points, grid, err));
    AN_TRY(sort_in(points, n_points, procedure, grid, err));
    AN_TRY(an_readings_make(fmax(grid->apparatus.temperature_bias.u, 0), grid, err));
    grid->strain_most = find_strain(points, n_points);
    an_assess(points, n_points, grid);
    if (grid->n_isotherm == 0 && grid->n_ramp == 0)
        return an_fail(err, AN_E_SCIENCE, points->id, "%s: no burst with a modulus is left to grid",
                       grid->assessment.n_reason > 0 ? grid->assessment.reason[0] : "nothing measured");
    return grid->assessment.verdict != AN_USABLE || grid->n_isotherm == 0 ? AN_DUBIOUS : AN_OK;
}
