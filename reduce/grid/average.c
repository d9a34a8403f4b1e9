/* average.c: repeats and replicates of one cell to one value. ln|E*| and delta are averaged, which is ln E*
 * as a complex number, so that a specimen that is 1 % too stiff moves the mean by the same share at every
 * level of modulus; covariances go with it, noise as independent, common as shared wherever the source is the
 * same one.
 *
 * Each run is averaged first, then the runs, so that a specimen with more repeats does not outweigh the
 * others.
 */
#include "reduce/grid/average.h"

#include <complex.h>
#include <math.h>

/* M C M' for M = [[c, -s], [s, c]], C and the result as var, cov, var. */
static void turn(const double in[3], double c, double s, double out[3])
{
    double a = in[0], b = in[1], d = in[2];
    out[0] = c * c * a - 2 * c * s * b + s * s * d;
    out[1] = c * s * (a - d) + (c * c - s * s) * b;
    out[2] = s * s * a + 2 * c * s * b + c * c * d;
}

void an_logarithm_of(const an_point *point, an_logarithm *logarithm)
{
    double square = point->storage_Pa * point->storage_Pa + point->loss_Pa * point->loss_Pa;
    double c = point->storage_Pa / square, s = -point->loss_Pa / square;
    logarithm->modulus = log(square) / 2;
    logarithm->delta = atan2(point->loss_Pa, point->storage_Pa);
    turn(point->noise, c, s, logarithm->noise);
    for (int i = 0; i < AN_SOURCE_COUNT; i++) {
        const double *shift = point->common[i];
        logarithm->common[i][0] = c * shift[0] - s * shift[1];
        logarithm->common[i][1] = s * shift[0] + c * shift[1];
    }
}

/* Back to moduli, into the cell. */
static void to_cell(const an_logarithm *logarithm, an_cell *cell)
{
    double complex modulus = cexp(logarithm->modulus + I * logarithm->delta);
    double c = creal(modulus), s = cimag(modulus);
    cell->storage_Pa = c;
    cell->loss_Pa = s;
    turn(logarithm->noise, c, s, cell->noise);
    for (int i = 0; i < AN_SOURCE_COUNT; i++) {
        const double *shift = logarithm->common[i];
        cell->common[i][0] = c * shift[0] - s * shift[1];
        cell->common[i][1] = s * shift[0] + c * shift[1];
    }
}

/* Dimensions belong to the specimen; everything else to the bench or to the material. In bending the span is
 * the fixture's. */
static int own_to_specimen(an_source source, an_geometry_kind kind)
{
    int bends = kind == AN_CANTILEVER_GUIDED || kind == AN_CANTILEVER_FREE || kind == AN_CANTILEVER_DUAL ||
                kind == AN_BENDING_THREE_POINT;
    if (source == AN_SOURCE_LENGTH)
        return !bends;
    return source == AN_SOURCE_WIDTH || source == AN_SOURCE_THICKNESS || source == AN_SOURCE_DIAMETER ||
           source == AN_SOURCE_HEIGHT || source == AN_SOURCE_AREA;
}

static void add_shared(const double in[2], double weight, double out[2])
{
    out[0] += weight * in[0];
    out[1] += weight * in[1];
}

/* Independent from run to run: squares add. The sign of a sensitivity is that of its first run. */
static void add_independent(const double in[2], double weight, double out[2])
{
    for (int k = 0; k < 2; k++)
        out[k] = copysign(hypot(out[k], weight * in[k]), out[k] != 0 ? out[k] : in[k]);
}

static void average_run(const an_member *member, int n, an_logarithm *mean)
{
    *mean = (an_logarithm){0};
    for (int i = 0; i < n; i++) {
        an_logarithm one;
        an_logarithm_of(member[i].point, &one);
        mean->modulus += one.modulus / n;
        mean->delta += one.delta / n;
        for (int k = 0; k < 3; k++)
            mean->noise[k] += one.noise[k] / n / n;
        for (int k = 0; k < AN_SOURCE_COUNT; k++)
            add_shared(one.common[k], 1.0 / n, mean->common[k]);
    }
}

static int same_run(const an_member *member, int n)
{
    int i = 1;
    while (i < n && member[i].i_run == member[0].i_run)
        i++;
    return i;
}

int an_average_runs(const an_member *member, int n)
{
    int n_run = 0;
    for (int i = 0; i < n; i += same_run(member + i, n - i))
        n_run++;
    return n_run;
}

void an_average(const an_member *member, int n, const an_sharing *sharing, an_cell *cell)
{
    int n_run = an_average_runs(member, n);
    an_logarithm mean = {0};
    double temperature = 0, log_frequency = 0;
    for (int i = 0, m; i < n; i += m) {
        an_logarithm run;
        m = same_run(member + i, n - i);
        average_run(member + i, m, &run);
        mean.modulus += run.modulus / n_run;
        mean.delta += run.delta / n_run;
        for (int k = 0; k < 3; k++)
            mean.noise[k] += run.noise[k] / n_run / n_run;
        for (int k = 0; k < AN_SOURCE_COUNT; k++) {
            int apart = sharing->benches_differ ||
                        (sharing->specimens_differ && own_to_specimen((an_source)k, sharing->kind));
            (apart ? add_independent : add_shared)(run.common[k], 1.0 / n_run, mean.common[k]);
        }
        for (int k = i; k < i + m; k++) {
            temperature += member[k].point->temperature_K / m / n_run;
            log_frequency += log(member[k].point->frequency_Hz) / m / n_run;
        }
    }
    cell->temperature_K = temperature;
    cell->frequency_Hz = n == 1 ? member->point->frequency_Hz : exp(log_frequency);
    to_cell(&mean, cell);
}

void an_scatter_add(const an_member *member, int n, an_scatter_sum *sum)
{
    int n_run = an_average_runs(member, n);
    double modulus = 0, delta = 0; /* means of the runs' means */
    for (int i = 0, m; i < n; i += m) {
        an_logarithm run, one;
        m = same_run(member + i, n - i);
        average_run(member + i, m, &run);
        modulus += run.modulus / n_run;
        delta += run.delta / n_run;
        for (int k = i; k < i + m; k++) {
            an_logarithm_of(member[k].point, &one);
            sum->within[0] += (one.modulus - run.modulus) * (one.modulus - run.modulus);
            sum->within[1] += (one.delta - run.delta) * (one.delta - run.delta);
        }
        sum->n_within += m - 1;
    }
    for (int i = 0; i < n; i += same_run(member + i, n - i)) {
        an_logarithm run;
        average_run(member + i, same_run(member + i, n - i), &run);
        sum->between[0] += pow(run.modulus - modulus, 2);
        sum->between[1] += pow(run.delta - delta, 2);
    }
    sum->n_between += n_run - 1;
}

void an_scatter_close(const an_scatter_sum *sum, int n_run, an_scatter *scatter)
{
    *scatter = (an_scatter){n_run, NAN, NAN, NAN, NAN};
    if (sum->n_between > 0) {
        scatter->between_modulus = sqrt(sum->between[0] / sum->n_between);
        scatter->between_delta_rad = sqrt(sum->between[1] / sum->n_between);
    }
    if (sum->n_within > 0) {
        scatter->within_modulus = sqrt(sum->within[0] / sum->n_within);
        scatter->within_delta_rad = sqrt(sum->within[1] / sum->n_within);
    }
}
