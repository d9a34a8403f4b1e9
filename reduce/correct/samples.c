/* A burst's samples on their way into the fit: decoded to SI, without those that are not finite, with the
 * converter's step and range where the coding tells them. Stage: correct (it serves phase with plain arrays).
 */
#include "reducer.h"

#include <math.h>
#include <stdlib.h>

enum { ARRAYS = 6 }; /* time, displacement, force, temperature, two residuals */

static an_status make_room(an_reducer *reducer, size_t n, an_error *err)
{
    if (n <= reducer->room)
        return AN_OK;
    double *array = malloc(ARRAYS * n * sizeof *array);
    unsigned char *use = malloc(n);
    if (!array || !use) {
        free(array);
        free(use);
        return an_fail_memory(err, "the samples of a burst");
    }
    free(reducer->array);
    free(reducer->use);
    reducer->array = array;
    reducer->use = use;
    reducer->room = n;
    return AN_OK;
}

/* One step of the raw numbers, where they are whole. */
static double step_of(const an_signal *s)
{
    if (s->coding != AN_CODING_INT16 && s->coding != AN_CODING_INT32)
        return 0;
    return fabs(s->scale) / (s->divisor > 0 ? s->divisor : 1);
}

/* What a 16-bit converter gives at its ends, decoded as the samples are; wider counts are mostly printed
 * decimals. */
static void range_of(const an_signal *s, double range[2])
{
    int16_t ends[2] = {INT16_MIN, INT16_MAX};
    an_signal probe = *s;
    range[0] = range[1] = NAN;
    if (s->coding != AN_CODING_INT16)
        return;
    probe.count = 2;
    probe.data = ends;
    an_signal_decode(&probe, range);
    if (range[0] > range[1]) {
        double swap = range[0];
        range[0] = range[1];
        range[1] = swap;
    }
}

/* Close the ranks over samples that are not finite. */
static void compact(an_samples *s, int n)
{
    s->n = 0;
    for (int i = 0; i < n; i++) {
        if (!isfinite(s->time[i]) || !isfinite(s->y[AN_DISPLACEMENT][i]) || !isfinite(s->y[AN_FORCE][i]))
            continue;
        s->time[s->n] = s->time[i];
        s->y[AN_DISPLACEMENT][s->n] = s->y[AN_DISPLACEMENT][i];
        s->y[AN_FORCE][s->n] = s->y[AN_FORCE][i];
        if (s->temperature)
            s->temperature[s->n] = s->temperature[i];
        s->use[s->n++] = 1;
    }
    s->n_missing = n - s->n;
}

an_status an_samples_take(an_reducer *reducer, const an_burst *burst, an_samples *s, an_error *err)
{
    size_t n = burst->displacement.count;
    *s = (an_samples){0};
    if (n != burst->force.count || n != (size_t)burst->clock.count || n > INT32_MAX / 2)
        return an_fail(err, AN_E_VALUE, NULL, "%zu displacements, %zu forces and %ld times", n,
                       burst->force.count, burst->clock.count);
    AN_TRY(make_room(reducer, n, err));
    s->time = reducer->array;
    s->y[AN_DISPLACEMENT] = s->time + n;
    s->y[AN_FORCE] = s->time + 2 * n;
    s->temperature = burst->temperature.count == n ? s->time + 3 * n : NULL;
    s->residual = s->time + 4 * n;
    s->use = reducer->use;
    an_burst_times(burst, s->time);
    an_signal_decode(&burst->displacement, s->y[AN_DISPLACEMENT]);
    an_signal_decode(&burst->force, s->y[AN_FORCE]);
    if (s->temperature)
        an_signal_decode(&burst->temperature, s->temperature);
    s->resolution[AN_DISPLACEMENT] = step_of(&burst->displacement);
    s->resolution[AN_FORCE] = step_of(&burst->force);
    s->temperature_resolution = step_of(&burst->temperature);
    range_of(&burst->displacement, s->range[AN_DISPLACEMENT]);
    range_of(&burst->force, s->range[AN_FORCE]);
    compact(s, (int)n);
    return AN_OK;
}
