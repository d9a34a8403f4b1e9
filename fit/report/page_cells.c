/* The cells that the page draws: complex moduli with noise and total uncertainty, grouped into isotherms and
 * into lines of one frequency. Stage report. From the grid document where there is one, else from the points
 * that were not skipped; then temperatures and frequencies are grouped by gaps, since found values scatter
 * about what was set. Units of the page: MPa and degrees Celsius.
 */
#include "fit/report/page.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#define PA_PER_MPA 1e6
#define ISOTHERM_GAP                                                                                         \
    1.5 /* [K] between neighbours of different isotherms; twice the steadiness that the grid asks for */
#define LINE_GAP                                                                                             \
    0.03 /* [1] relative, between neighbours of different frequencies; found ones scatter by less */

/* Moduli and uncertainties from a document's [Pa]. */
static void set_moduli(page_cell *cell, double storage, double loss, const double noise[3],
                       const double common[3])
{
    const double modulus[2] = {storage, loss};
    for (int k = 0; k < 2; k++) {
        cell->modulus_MPa[k] = modulus[k] / PA_PER_MPA;
        cell->u_noise_MPa[k] = sqrt(noise[2 * k]) / PA_PER_MPA;
        cell->u_total_MPa[k] = sqrt(noise[2 * k] + common[2 * k]) / PA_PER_MPA;
    }
    double t = loss / storage;
    double variance =
        (noise[2] + common[2]) - 2 * t * (noise[1] + common[1]) + t * t * (noise[0] + common[0]);
    cell->loss_factor = t;
    cell->u_loss_factor = sqrt(fmax(variance, 0)) / fabs(storage);
}

static void sum_common(double covariance[3], const double common[AN_SOURCE_COUNT][2])
{
    memset(covariance, 0, 3 * sizeof *covariance);
    for (int s = 0; s < AN_SOURCE_COUNT; s++) {
        covariance[0] += common[s][0] * common[s][0];
        covariance[1] += common[s][0] * common[s][1];
        covariance[2] += common[s][1] * common[s][1];
    }
}

static void from_grid(page_cells *cells, const an_grid *grid)
{
    for (int i = 0; i < grid->n_cell; i++) {
        const an_cell *c = &grid->cell[i];
        page_cell *cell = &cells->cell[cells->n++];
        *cell = (page_cell){.burst = c->burst,
                            .isotherm = c->isotherm,
                            .doubtful = c->outlier != 0,
                            .temperature_C = c->temperature_K - AN_ZERO_CELSIUS_K,
                            .frequency_Hz = c->frequency_Hz};
        double common[3];
        sum_common(common, c->common);
        set_moduli(cell, c->storage_Pa, c->loss_Pa, c->noise, common);
    }
    cells->n_isotherm = grid->n_isotherm;
}

static void from_points(page_cells *cells, const an_points *points)
{
    for (int i = 0; i < points->n_point; i++) {
        const an_point *point = &points->point[i];
        if (point->state == AN_POINT_SKIPPED || !isfinite(point->storage_Pa) ||
            !isfinite(point->temperature_K))
            continue;
        page_cell *cell = &cells->cell[cells->n++];
        *cell = (page_cell){.burst = point->burst,
                            .doubtful = point->state == AN_POINT_FLAGGED,
                            .temperature_C = point->temperature_K - AN_ZERO_CELSIUS_K,
                            .frequency_Hz = point->frequency_Hz};
        double common[3];
        an_point_common(point, common);
        set_moduli(cell, point->storage_Pa, point->loss_Pa, point->noise, common);
    }
}

static int compare(double a, double b)
{
    return (a > b) - (a < b);
}

static int by_temperature(const void *a, const void *b)
{
    const page_cell *first = a, *second = b;
    int order = compare(first->temperature_C, second->temperature_C);
    return order ? order : compare(first->burst, second->burst);
}

static int by_frequency(const void *a, const void *b)
{
    const page_cell *first = a, *second = b;
    int order = compare(first->frequency_Hz, second->frequency_Hz);
    return order ? order : compare(first->burst, second->burst);
}

static int by_isotherm(const void *a, const void *b)
{
    const page_cell *first = a, *second = b;
    int order = first->isotherm - second->isotherm;
    return order ? order : by_frequency(a, b);
}

static void group_isotherms(page_cells *cells)
{
    if (cells->n == 0)
        return;
    qsort(cells->cell, (size_t)cells->n, sizeof *cells->cell, by_temperature);
    int group = 0;
    for (int i = 0; i < cells->n; i++) {
        if (i > 0 && cells->cell[i].temperature_C - cells->cell[i - 1].temperature_C > ISOTHERM_GAP)
            group++;
        cells->cell[i].isotherm = group;
    }
    cells->n_isotherm = group + 1;
}

static void group_lines(page_cells *cells)
{
    qsort(cells->cell, (size_t)cells->n, sizeof *cells->cell, by_frequency);
    int group = 0;
    for (int i = 0; i < cells->n; i++) {
        if (i > 0 && cells->cell[i].frequency_Hz > cells->cell[i - 1].frequency_Hz * (1 + LINE_GAP))
            group++;
        cells->cell[i].line = group;
    }
    cells->n_line = group + 1;
}

static void find_ranges(page_cells *cells)
{
    cells->temperature_C[0] = cells->frequency_Hz[0] = INFINITY;
    cells->temperature_C[1] = cells->frequency_Hz[1] = -INFINITY;
    for (int i = 0; i < cells->n; i++) {
        const page_cell *cell = &cells->cell[i];
        cells->temperature_C[0] = fmin(cells->temperature_C[0], cell->temperature_C);
        cells->temperature_C[1] = fmax(cells->temperature_C[1], cell->temperature_C);
        cells->frequency_Hz[0] = fmin(cells->frequency_Hz[0], cell->frequency_Hz);
        cells->frequency_Hz[1] = fmax(cells->frequency_Hz[1], cell->frequency_Hz);
    }
}

/* Without cells the colours of temperature still need ends: those of the master curve. */
static void range_from_master(page_cells *cells, const an_master *master)
{
    if (master->n_shift == 0)
        return;
    cells->temperature_C[0] = master->shift[0].temperature_K - AN_ZERO_CELSIUS_K;
    cells->temperature_C[1] = master->shift[master->n_shift - 1].temperature_K - AN_ZERO_CELSIUS_K;
}

an_status page_cells_make(page_cells *cells, const an_report *report, an_error *err)
{
    memset(cells, 0, sizeof *cells);
    if (report->has_master)
        range_from_master(cells, &report->master);
    int most = report->has_grid ? report->grid.n_cell : report->has_points ? report->points.n_point : 0;
    if (most == 0)
        return AN_OK;
    cells->cell = calloc((size_t)most, sizeof *cells->cell);
    if (!cells->cell)
        return an_fail_memory(err, "the cells of the page");
    if (report->has_grid) {
        from_grid(cells, &report->grid);
    } else {
        from_points(cells, &report->points);
        group_isotherms(cells);
    }
    if (cells->n == 0)
        return AN_OK;
    group_lines(cells);
    find_ranges(cells);
    qsort(cells->cell, (size_t)cells->n, sizeof *cells->cell, by_isotherm);
    return AN_OK;
}

void page_cells_clear(page_cells *cells)
{
    free(cells->cell);
    memset(cells, 0, sizeof *cells);
}

uint32_t page_cell_color(const page_cells *cells, double temperature_C)
{
    return an_ramp_color(an_ramp_fraction(temperature_C, cells->temperature_C[0], cells->temperature_C[1]));
}

uint32_t page_line_color(const page_cells *cells, double frequency_Hz)
{
    return an_tone_color(
        an_ramp_fraction(log(frequency_Hz), log(cells->frequency_Hz[0]), log(cells->frequency_Hz[1])));
}
