/* Finding bursts in a continuous record. Benches pause between bursts, or sample each frequency at its own rate: gaps and changes
 * of the interval tell most of them. Where a bench samples on at one rate, the swings of the displacement tell: two swings in
 * a row that last, or reach, otherwise than those before. Range: at least 8 samples a cycle and two cycles a burst for the
 * latter; drifts and start-up transients of an ordinary test stay within the limits below (common practice).
 */
#include "anelast/burst_find.h"

#include <math.h>
#include <string.h>

static const double gap_least = 5;           /* [intervals] a pause; fewer may be lost samples */
static const double interval_tolerance = 0.05; /* [1] jitter of a clock */
static const double duration_change = 1.25;  /* [1] frequencies of a sweep lie further apart */
static const double height_change = 4;       /* [1] more than a start-up transient or a creeping specimen does */
static const double turn_least = 0.3;        /* [1] part of a swing that must be taken back to make a turn */
static const double samples_a_swing = 4;     /* shorter ones are noise */

void an_burst_finder_reset(an_burst_finder *finder)
{
    memset(finder, 0, sizeof *finder);
}

static bool alike(double one, double other, double resolution)
{
    return fabs(one - other) <= fmax(interval_tolerance * fmin(one, other), 1.5 * resolution);
}

/* Gaps and changes of the interval. */
static size_t look_at_time(an_burst_finder *finder, double time, double resolution)
{
    double interval = time - finder->time;
    if (interval < -resolution)
        return 1;
    if (finder->interval <= 0) {
        finder->interval = interval;
        return 0;
    }
    if (interval > gap_least * finder->interval + 2 * resolution)
        return 1;
    if (alike(interval, finder->interval, resolution)) {
        finder->n_odd = 0;
        finder->interval += (interval - finder->interval) / fmin((double)finder->n, 64);
        return 0;
    }
    finder->odd[0] = finder->odd[1];
    finder->odd[1] = finder->odd[2];
    finder->odd[2] = interval;
    finder->n_odd++;
    /* a pause, or the first new interval, and two more: the three samples behind them are new */
    return finder->n_odd >= 3 && alike(finder->odd[1], finder->odd[2], resolution) ? 3 : 0;
}

static bool changed(double value, double usual, double ratio)
{
    return value > ratio * usual || value * ratio < usual;
}

/* A swing has ended: is it, with the one before, the beginning of another burst? Returns where that began, or 0. */
static size_t judge_swings(an_burst_finder *finder)
{
    const an_swing *old = &finder->swings[0], *new = &finder->swings[1];
    if (finder->n_swings < 5)
        return 0;
    double least = samples_a_swing * finder->interval;
    bool regular = finder->usual_duration >= least && fmin(old->duration, new->duration) >= least;
    bool longer = regular && changed(old->duration, finder->usual_duration, duration_change) &&
                  changed(new->duration, finder->usual_duration, duration_change) &&
                  !changed(old->duration, new->duration, duration_change);
    bool higher = changed(old->height, finder->usual_height, height_change) &&
                  changed(new->height, finder->usual_height, height_change);
    return longer || higher ? old->begin : 0;
}

/* The swing that goes on ends at its extreme; those before the newest two join the usual ones. */
static size_t end_swing(an_burst_finder *finder)
{
    if (finder->n_swings >= 3) {
        double n = finder->n_swings - 2;
        finder->usual_duration += (finder->swings[0].duration - finder->usual_duration) / n;
        finder->usual_height += (finder->swings[0].height - finder->usual_height) / n;
    }
    finder->swings[0] = finder->swings[1];
    finder->swings[1] = (an_swing){finder->to_time - finder->from_time, fabs(finder->to - finder->from),
                                   finder->from_i};
    finder->n_swings++;
    return judge_swings(finder);
}

static void extend(an_burst_finder *finder, double time, double value)
{
    finder->to = value;
    finder->to_time = time;
    finder->to_i = finder->n;
}

/* Turns of the displacement. Returns the sample where a new burst began, or 0. */
static size_t look_at_swings(an_burst_finder *finder, double time, double value)
{
    if (finder->direction == 0) {
        if (value != finder->from)
            finder->direction = value > finder->from ? 1 : -1;
        extend(finder, time, value);
        return 0;
    }
    double gone = finder->direction * (finder->to - finder->from);
    double back = finder->direction * (finder->to - value);
    if (back <= 0) {
        extend(finder, time, value);
        return 0;
    }
    double usual = finder->n_swings > 2 ? finder->usual_height : 0;
    if (back < turn_least * fmax(gone, 0.25 * usual))
        return 0;
    size_t begin = end_swing(finder);
    finder->direction = -finder->direction;
    finder->from = finder->to;
    finder->from_time = finder->to_time;
    finder->from_i = finder->to_i;
    extend(finder, time, value);
    return begin;
}

static void begin_burst(an_burst_finder *finder, double time, double value)
{
    an_burst_finder_reset(finder);
    finder->n = 1;
    finder->time = finder->from_time = finder->to_time = time;
    finder->from = finder->to = value;
}

size_t an_burst_finder_add(an_burst_finder *finder, double time, double resolution, double displacement)
{
    if (finder->n == 0) {
        begin_burst(finder, time, displacement);
        return 0;
    }
    size_t n_new = look_at_time(finder, time, resolution);
    size_t begin = n_new ? 0 : look_at_swings(finder, time, displacement);
    finder->n++;
    finder->time = time;
    return begin ? finder->n - begin : n_new;
}
