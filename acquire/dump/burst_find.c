/* Finding bursts in a continuous record. Benches pause between bursts, or sample each frequency at its own
 * rate: gaps and changes of the interval tell most of them. Where a bench samples on at one rate, the swings
 * of the displacement tell: two in a row that last, or reach, otherwise than two before. Range: at least 8
 * samples a cycle and three cycles a burst for the latter; drifts and start-up transients of an ordinary test
 * stay within the limits below (common practice).
 */
#include "anelast/burst_find.h"

#include <math.h>
#include <string.h>

static const double gap_least = 5;             /* [intervals] a pause; fewer may be lost samples */
static const double interval_tolerance = 0.05; /* [1] jitter of a clock */
static const double duration_change = 1.25;    /* [1] frequencies of a sweep lie further apart */
static const double height_change = 4;   /* [1] more than a start-up transient or a creeping specimen does */
static const double turn_least = 0.3;    /* [1] part of a swing that must be taken back to make a turn */
static const double samples_a_swing = 4; /* shorter ones are noise */
/* A turn must also exceed 8 standard deviations of the noise. White noise of deviation s has second
 * differences of mean magnitude sqrt(6) sqrt(2 / pi) s = 1.954 s; a sine of 8 samples a cycle raises that
 * estimate, and still passes. */
static const double turn_in_roughness = 8 / 1.954;
static const size_t roughness_least = 8; /* [samples] before the estimate is of use */

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

static bool same_duration(const an_swing *one, const an_swing *other)
{
    return !changed(one->duration, other->duration, duration_change);
}

static bool same_height(const an_swing *one, const an_swing *other, double ratio)
{
    return !changed(one->height, other->height, ratio);
}

/* A swing has ended: are the newest two alike, and other than an earlier two that are alike? The swing
 * between may have been cut by the change. Returns the sample where the new burst began, or 0. */
static size_t judge_swings(const an_burst_finder *finder)
{
    const an_swing *swing = finder->swings;
    double least = samples_a_swing * finder->interval, twice = 0.5 * height_change;
    if (finder->n_swings < AN_SWINGS_KEPT)
        return 0;
    bool regular = fmin(swing[1].duration, swing[4].duration) >= least;
    bool longer = regular && same_duration(&swing[0], &swing[1]) && same_duration(&swing[3], &swing[4]) &&
                  !same_duration(&swing[1], &swing[3]) && !same_duration(&swing[1], &swing[4]);
    bool higher = same_height(&swing[0], &swing[1], twice) && same_height(&swing[3], &swing[4], twice) &&
                  !same_height(&swing[1], &swing[3], height_change);
    if (!longer && !higher)
        return 0;
    bool third_is_old =
        longer ? same_duration(&swing[1], &swing[2]) : same_height(&swing[1], &swing[2], twice);
    return swing[third_is_old ? 3 : 2].begin;
}

/* The swing that goes on ends at its extreme. */
static size_t end_swing(an_burst_finder *finder)
{
    memmove(finder->swings, finder->swings + 1, (AN_SWINGS_KEPT - 1) * sizeof *finder->swings);
    finder->swings[AN_SWINGS_KEPT - 1] =
        (an_swing){finder->to_time - finder->from_time, fabs(finder->to - finder->from), finder->from_i};
    finder->n_swings++;
    return judge_swings(finder);
}

static void extend(an_burst_finder *finder, double time, double value)
{
    finder->to = value;
    finder->to_time = time;
    finder->to_i = finder->n;
}

static void look_at_noise(an_burst_finder *finder, double value)
{
    if (finder->n >= 2) {
        double second = fabs(value - 2 * finder->before[1] + finder->before[0]);
        finder->roughness += (second - finder->roughness) / (double)(finder->n - 1);
    }
    finder->before[0] = finder->before[1];
    finder->before[1] = value;
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
    if (finder->n < roughness_least || back < fmax(turn_least * gone, turn_in_roughness * finder->roughness))
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
    finder->from = finder->to = finder->before[1] = value;
}

size_t an_burst_finder_add(an_burst_finder *finder, double time, double resolution, double displacement)
{
    if (finder->n == 0) {
        begin_burst(finder, time, displacement);
        return 0;
    }
    size_t n_new = look_at_time(finder, time, resolution);
    look_at_noise(finder, displacement);
    size_t begin = n_new ? 0 : look_at_swings(finder, time, displacement);
    finder->n++;
    finder->time = time;
    return begin ? finder->n - begin : n_new;
}
