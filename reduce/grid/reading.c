/* reading.c: glass-transition readings of a grid: storage onset, loss peak and loss factor peak at every
 * frequency, on heating; on cooling where nothing was heated; and from a ramp where there is one. Marked
 * cells are left out.
 */
#include "reduce/grid/parts.h"

#include <math.h>
#include <stdlib.h>

/* Frequencies of one column of the grid: what is set once is found alike on every isotherm, to 1 % (common
 * practice). */
static const double same_column = 0.01;

static int by_frequency(const void *a, const void *b)
{
    const an_cell *one = *(an_cell *const *)a, *two = *(an_cell *const *)b;
    if (one->frequency_Hz != two->frequency_Hz)
        return one->frequency_Hz < two->frequency_Hz ? -1 : 1;
    return one->temperature_K < two->temperature_K ? -1 : one->temperature_K > two->temperature_K;
}

static int by_temperature(const void *a, const void *b)
{
    const an_cell *one = *(an_cell *const *)a, *two = *(an_cell *const *)b;
    if (one->temperature_K != two->temperature_K)
        return one->temperature_K < two->temperature_K ? -1 : 1;
    return one->burst - two->burst;
}

/* log10 of what a reading is taken from, and its noise. */
static double quantity_of(const an_cell *cell, an_reading_kind kind, double *u)
{
    double storage = cell->storage_Pa, loss = cell->loss_Pa;
    double relative_storage = cell->noise[0] / storage / storage,
           relative_loss = cell->noise[2] / loss / loss;
    double both = cell->noise[1] / storage / loss, variance = relative_storage;
    double value = log10(storage);
    if (kind == AN_READING_LOSS_PEAK) {
        value = log10(loss);
        variance = relative_loss;
    } else if (kind == AN_READING_LOSS_FACTOR_PEAK) {
        value = log10(loss / storage);
        variance = relative_storage + relative_loss - 2 * both;
    }
    *u = sqrt(fmax(variance, 0)) / M_LN10;
    return value;
}

/* One cell a temperature: a second one at the very same temperature would make the slope infinite. */
static void fill_series(an_cell *const *cell, int n, an_reading_kind kind, an_series *series)
{
    series->n = 0;
    for (int i = 0; i < n; i++) {
        if (kind != AN_READING_STORAGE_ONSET && !(cell[i]->loss_Pa > 0))
            continue;
        if (series->n > 0 && !(cell[i]->temperature_K > series->temperature_K[series->n - 1]))
            continue;
        int k = series->n++;
        series->temperature_K[k] = cell[i]->temperature_K;
        series->value[k] = quantity_of(cell[i], kind, &series->u[k]);
    }
}

/* What the readings of one pass share. */
typedef struct pass {
    int on_ramp;      /* nonzero: bursts of the ramp, else cells of isotherms */
    double u_bias_K;  /* [K] common uncertainty of the temperature */
    an_series series; /* room for one quantity of one column */
    an_grid *grid;    /* where readings go */
} pass;

/* The readings of one column. */
static void read_column(pass *through, an_cell *const *cell, int n)
{
    double log_frequency = 0;
    for (int i = 0; i < n; i++)
        log_frequency += log(cell[i]->frequency_Hz) / n;
    for (int kind = AN_READING_STORAGE_ONSET; kind <= AN_READING_LOSS_FACTOR_PEAK; kind++) {
        an_reading *reading = &through->grid->reading[through->grid->n_reading++];
        *reading = (an_reading){
            .kind = (an_reading_kind)kind, .frequency_Hz = exp(log_frequency), .on_ramp = through->on_ramp};
        fill_series(cell, n, reading->kind, &through->series);
        if (reading->kind == AN_READING_STORAGE_ONSET)
            an_glass_onset(&through->series, reading);
        else
            an_glass_peak(&through->series, reading);
        if (reading->reason[0] == 0)
            reading->u_common_K = through->u_bias_K;
    }
}

/* Columns of the cells of one pass. A frequency that stands at one temperature only is no column. */
static void read_pass(pass *through, an_cell **cell, int n)
{
    qsort(cell, (size_t)n, sizeof *cell, by_frequency);
    for (int i = 0, m; i < n; i += m) {
        for (m = 1; i + m < n && cell[i + m]->frequency_Hz <= cell[i]->frequency_Hz * (1 + same_column); m++)
            ;
        qsort(cell + i, (size_t)m, sizeof *cell, by_temperature);
        if (m > 1)
            read_column(through, cell + i, m);
    }
}

static int any_heating(const an_grid *grid)
{
    for (int i = 0; i < grid->n_isotherm; i++)
        if (!grid->isotherm[i].cooling)
            return 1;
    return 0;
}

/* The cells of the isotherms' pass, without the marked ones. */
static int pick_cells(an_grid *grid, an_cell **cell)
{
    int cooling = !any_heating(grid), n = 0;
    for (int i = 0; i < grid->n_cell; i++)
        if (!grid->cell[i].outlier && grid->isotherm[grid->cell[i].isotherm].cooling == cooling)
            cell[n++] = &grid->cell[i];
    return n;
}

an_status an_readings_make(double u_bias_K, an_grid *grid, an_error *err)
{
    size_t n = (size_t)grid->n_cell + (size_t)grid->n_ramp + 1;
    an_cell **cell = malloc(n * sizeof *cell);
    double *room = malloc(3 * n * sizeof *room);
    grid->reading = calloc(3 * n, sizeof *grid->reading);
    if (cell && room && grid->reading) {
        pass through = {0, u_bias_K, {0, room, room + n, room + 2 * n}, grid};
        int m = pick_cells(grid, cell);
        read_pass(&through, cell, m);
        for (int i = 0; i < grid->n_ramp; i++)
            cell[i] = &grid->ramp[i];
        through.on_ramp = 1;
        read_pass(&through, cell, grid->n_ramp);
    }
    int good = cell && room && grid->reading;
    free(cell);
    free(room);
    return good ? AN_OK : an_fail_memory(err, "readings of a grid");
}
