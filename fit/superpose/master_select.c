/* Which isotherms and cells of a grid take part in the superposition. Stage: superpose, between the grid
 * document and the numerics. Method: none but choosing; nothing is interpolated into cells that are missing.
 */
#include "fit/superpose/master_make.h"

#include "anelast/quantity.h"

#include <math.h>
#include <stdlib.h>

void an_selection_clear(an_selection *selection)
{
    free(selection->isotherm);
    free(selection->point);
    free(selection->common);
    free(selection->isotherm_of);
    free(selection->cell_of);
    *selection = (an_selection){0};
}

static int takes_part(const an_cell *cell)
{
    double det = cell->noise[0] * cell->noise[2] - cell->noise[1] * cell->noise[1];
    return !cell->outlier && cell->frequency_Hz > 0 && cell->storage_Pa > 0 && isfinite(cell->storage_Pa) &&
           isfinite(cell->loss_Pa) && cell->noise[0] > 0 && cell->noise[2] > 0 && det > 0 && isfinite(det);
}

static int count_cells(const an_grid *grid, const an_isotherm *isotherm)
{
    int n = 0;
    for (int i = 0; i < isotherm->n_cell; i++)
        n += takes_part(&grid->cell[isotherm->first_cell + i]);
    return n;
}

/* Nonzero where cooling isotherms hold more cells than heating ones. */
static int cooling_prevails(const an_grid *grid)
{
    int n[2] = {0, 0};
    for (int i = 0; i < grid->n_isotherm; i++)
        n[grid->isotherm[i].cooling ? 1 : 0] += count_cells(grid, &grid->isotherm[i]);
    return n[1] > n[0];
}

static void add_cell(an_selection *s, const an_cell *cell, int i_cell)
{
    size_t p = s->input.n_point++;
    s->cell_of[p] = i_cell;
    s->point[p] = (an_superpose_point){6.283185307179586 * cell->frequency_Hz,
                                       cell->storage_Pa,
                                       cell->loss_Pa,
                                       {cell->noise[0], cell->noise[1], cell->noise[2]}};
    for (size_t k = 0; k < AN_SOURCE_COUNT; k++)
        for (size_t c = 0; c < 2; c++)
            s->common[2 * (p * AN_SOURCE_COUNT + k) + c] =
                isfinite(cell->common[k][c]) ? cell->common[k][c] : 0;
}

static void add_isotherm(an_selection *s, const an_grid *grid, int i_isotherm)
{
    const an_isotherm *isotherm = &grid->isotherm[i_isotherm];
    size_t k = s->input.n_isotherm++, first = s->input.n_point;
    for (int i = 0; i < isotherm->n_cell; i++)
        if (takes_part(&grid->cell[isotherm->first_cell + i]))
            add_cell(s, &grid->cell[isotherm->first_cell + i], isotherm->first_cell + i);
    s->isotherm_of[k] = i_isotherm;
    s->isotherm[k] = (an_superpose_isotherm){isotherm->temperature_K, first, s->input.n_point - first};
}

static an_status make_room(an_selection *s, const an_grid *grid, an_error *err)
{
    size_t n_isotherm = (size_t)grid->n_isotherm + 1, n_cell = (size_t)grid->n_cell + 1;
    s->isotherm = calloc(n_isotherm, sizeof *s->isotherm);
    s->isotherm_of = calloc(n_isotherm, sizeof *s->isotherm_of);
    s->point = calloc(n_cell, sizeof *s->point);
    s->cell_of = calloc(n_cell, sizeof *s->cell_of);
    s->common = calloc(n_cell * AN_SOURCE_COUNT * 2, sizeof *s->common);
    if (!s->isotherm || !s->isotherm_of || !s->point || !s->cell_of || !s->common)
        return an_fail_memory(err, "the isotherms to be superposed");
    return AN_OK;
}

an_status an_selection_make(const an_grid *grid, an_selection *selection, an_remark_list *remarks,
                            an_error *err)
{
    AN_TRY(make_room(selection, grid, err));
    int cooling = cooling_prevails(grid);
    for (int i = 0; i < grid->n_isotherm; i++) {
        const an_isotherm *isotherm = &grid->isotherm[i];
        int other = (isotherm->cooling != 0) != cooling, empty = count_cells(grid, isotherm) == 0;
        if (!other && !empty)
            add_isotherm(selection, grid, i);
        else
            AN_TRY(an_remark_list_add(remarks, "isotherm-left-out", 0, err,
                                      "the isotherm at %.1f °C is left out: %s",
                                      isotherm->temperature_K - AN_ZERO_CELSIUS_K,
                                      empty     ? "no cell of it can be used"
                                      : cooling ? "it was reached by heating, most others by cooling"
                                                : "it was reached by cooling, most others by heating"));
    }
    selection->input.isotherm = selection->isotherm;
    selection->input.point = selection->point;
    selection->input.n_source = AN_SOURCE_COUNT;
    selection->input.common = selection->common;
    double u = grid->apparatus.temperature_bias.u;
    selection->input.u_temperature_K = u > 0 ? u : 0;
    if (selection->input.n_isotherm < 2)
        return an_fail(err, AN_E_SCIENCE, grid->id,
                       "%zu isotherm with usable cells: superposition wants two or more",
                       selection->input.n_isotherm);
    return AN_OK;
}
