/* isotherm.c: bursts to isotherms by the temperature that was measured, not by the one that was set.
 *
 * In time, bursts that follow one another within the isotherm width of their common mean make a plateau. A
 * plateau whose temperature moves, and whose neighbours lie where that movement leads, is a piece of a ramp
 * and joins no isotherm. What is left is joined by temperature, closest first, for as long as every burst
 * stays within the width of the joint mean: complete linkage, so that no chain of small differences can join
 * what lies apart. Heating and cooling are kept apart: the glassy state depends on its history.
 *
 * A rate is judged with its uncertainty. A short burst cannot tell 0.1 K/min from nothing; its own slope over
 * N samples of noise s and length t has the standard uncertainty s sqrt(12 / N) / t, which is sqrt(12) / t
 * times that of its mean.
 */
#include "reduce/grid/parts.h"

#include <math.h>
#include <stdlib.h>

/* A rate above the limit is noise until it stands out by this many standard uncertainties. */
static const double rate_significance = 3;

/* Two bursts follow one another on a ramp where the next lies where the rate leads, within this share of the
 * way. */
static const double ramp_share = 0.35;

static double burst_length(const an_point *point)
{
    return point->n_cycle / point->frequency_Hz;
}

static int has_modulus(const an_point *point)
{
    return point->state != AN_POINT_SKIPPED && isfinite(point->storage_Pa) && isfinite(point->loss_Pa) &&
           isfinite(point->temperature_K) && point->frequency_Hz > 0 && point->storage_Pa > 0;
}

/* Times count only where every burst of the run starts after the one before: some dumps begin each burst at
 * zero. */
static int times_follow(const an_points *run)
{
    for (int i = 1; i < run->n_point; i++)
        if (!(run->point[i].start_s > run->point[i - 1].start_s))
            return 0;
    return 1;
}

static void add_members(const an_points *run, int i_run, an_gathering *gathering)
{
    int timed = times_follow(run);
    for (int i = 0; i < run->n_point; i++) {
        const an_point *point = &run->point[i];
        if (!has_modulus(point))
            continue;
        double length = burst_length(point);
        an_member *member = &gathering->member[gathering->n_member++];
        *member = (an_member){point, i_run, timed ? point->start_s + length / 2 : NAN, NAN, -1};
        if (isfinite(point->temperature_rate_K_s) && point->u_temperature_K > 0 && length > 0)
            member->u_rate_K_s = sqrt(12) * point->u_temperature_K / length;
    }
}

/* Whether every one of n members lies within the width of their mean. */
static int within(const an_member *member, int n, double width_K, double *mean_K)
{
    double sum = 0;
    for (int i = 0; i < n; i++)
        sum += member[i].point->temperature_K;
    *mean_K = sum / n;
    for (int i = 0; i < n; i++)
        if (!(fabs(member[i].point->temperature_K - *mean_K) <= width_K))
            return 0;
    return 1;
}

static void cut_plateaus(an_gathering *gathering, double width_K)
{
    for (int first = 0, n = 0; first < gathering->n_member; first += n) {
        an_plateau *plateau = &gathering->plateau[gathering->n_plateau++];
        const an_member *member = &gathering->member[first];
        double mean;
        for (n = 1; first + n < gathering->n_member && member[n].i_run == member->i_run; n++)
            if (!within(member, n + 1, width_K, &mean))
                break;
        within(member, n, width_K, &mean);
        *plateau = (an_plateau){member->i_run, first, n, mean, NAN, NAN, 0, 0, -1};
    }
}

/* The slope of temperature from burst to burst, and its uncertainty: of the noise, or of the scatter where
 * that is more. */
static int slope_between(const an_member *member, int n, double *rate, double *u)
{
    if (n < 2 || !isfinite(member->middle_s))
        return 0;
    double time = 0, temperature = 0, square = 0, product = 0, scatter = 0, noise = 0;
    for (int i = 0; i < n; i++) {
        time += member[i].middle_s / n;
        temperature += member[i].point->temperature_K / n;
    }
    for (int i = 0; i < n; i++) {
        double t = member[i].middle_s - time;
        square += t * t;
        product += t * (member[i].point->temperature_K - temperature);
    }
    *rate = product / square;
    for (int i = 0; i < n; i++) {
        double rest = member[i].point->temperature_K - temperature - *rate * (member[i].middle_s - time);
        scatter += n > 2 ? rest * rest / (n - 2) : 0;
        noise += member[i].point->u_temperature_K * member[i].point->u_temperature_K / n;
    }
    *u = sqrt(fmax(scatter, noise) / square);
    return isfinite(*u) && *u > 0;
}

/* The rate of a plateau: the bursts' own slopes and the slope between them, weighted by their uncertainties.
 */
static void find_rate(const an_gathering *gathering, an_plateau *plateau)
{
    const an_member *member = &gathering->member[plateau->first];
    double weight = 0, sum = 0, rate, u;
    for (int i = 0; i < plateau->n_member; i++) {
        if (!isfinite(member[i].u_rate_K_s))
            continue;
        double w = 1 / (member[i].u_rate_K_s * member[i].u_rate_K_s);
        weight += w;
        sum += w * member[i].point->temperature_rate_K_s;
    }
    if (slope_between(member, plateau->n_member, &rate, &u)) {
        weight += 1 / (u * u);
        sum += rate / (u * u);
    }
    if (weight > 0) {
        plateau->rate_K_s = sum / weight;
        plateau->u_rate_K_s = 1 / sqrt(weight);
    }
}

int an_plateau_moving(const an_plateau *plateau, double rate_K_s)
{
    return fabs(plateau->rate_K_s) - rate_significance * plateau->u_rate_K_s > rate_K_s;
}

/* Whether the neighbour in time lies where the plateau's movement leads (or comes from). */
static int leads_to(const an_gathering *gathering, const an_plateau *from, const an_plateau *to,
                    double width_K)
{
    int forward = to > from;
    const an_plateau *early = forward ? from : to, *late = forward ? to : from;
    const an_member *last = &gathering->member[early->first + early->n_member - 1];
    const an_member *next = &gathering->member[late->first];
    double way = next->point->temperature_K - last->point->temperature_K;
    double expected = from->rate_K_s * (next->middle_s - last->middle_s);
    return fabs(way - expected) <= fmax(width_K, ramp_share * fabs(way));
}

static void find_ramps(an_gathering *gathering, double width_K, double rate_K_s)
{
    for (int i = 0; i < gathering->n_plateau; i++) {
        an_plateau *plateau = &gathering->plateau[i];
        if (!an_plateau_moving(plateau, rate_K_s))
            continue;
        for (int side = -1; side <= 1; side += 2) {
            int k = i + side;
            if (k >= 0 && k < gathering->n_plateau && gathering->plateau[k].i_run == plateau->i_run &&
                leads_to(gathering, plateau, &gathering->plateau[k], width_K))
                plateau->ramp = 1;
        }
        double length = burst_length(gathering->member[plateau->first].point);
        if (plateau->n_member == 1 && fabs(plateau->rate_K_s) * length > width_K)
            plateau->ramp = 1;
    }
}

/* Reached from above is cooling. The first plateau takes the direction of what follows; so does a return to
 * the start, a step down larger than twice the step that follows it, which opens a new sweep and is no slow
 * cooling. */
static void find_directions(an_gathering *gathering)
{
    an_plateau *plateau = gathering->plateau;
    for (int i = gathering->n_plateau - 1; i >= 0; i--) {
        int opens = i == 0 || plateau[i - 1].i_run != plateau[i].i_run;
        int closes = i == gathering->n_plateau - 1 || plateau[i + 1].i_run != plateau[i].i_run;
        double before = opens ? NAN : plateau[i].temperature_K - plateau[i - 1].temperature_K;
        double after = closes ? NAN : plateau[i + 1].temperature_K - plateau[i].temperature_K;
        plateau[i].cooling = opens ? after < 0 : before < 0;
        if (before < 0 && after > 0 && -before > 2 * after)
            plateau[i].cooling = 0;
    }
}

/* A group of plateaus on its way to one isotherm. */
typedef struct group {
    double least_K, most_K, sum_K; /* [K] of its bursts */
    int n_member, cooling;
    int plateau; /* its first one, others are chained by `next` */
    int last;
} group;

static int by_direction_and_temperature(const void *a, const void *b)
{
    const group *one = a, *two = b;
    double mean_one = one->sum_K / one->n_member, mean_two = two->sum_K / two->n_member;
    if (one->cooling != two->cooling)
        return one->cooling - two->cooling;
    if (mean_one != mean_two)
        return mean_one < mean_two ? -1 : 1;
    return one->plateau - two->plateau;
}

static int may_join(const group *cold, const group *warm, double width_K)
{
    double mean = (cold->sum_K + warm->sum_K) / (cold->n_member + warm->n_member);
    return cold->cooling == warm->cooling && mean - fmin(cold->least_K, warm->least_K) <= width_K &&
           fmax(cold->most_K, warm->most_K) - mean <= width_K;
}

/* Join the closest neighbours for as long as a pair may be joined; returns how many groups are left. */
static int join_groups(group *groups, int n, int *next, double width_K)
{
    for (;;) {
        int best = -1;
        double least = INFINITY;
        for (int i = 0; i + 1 < n; i++) {
            double apart =
                groups[i + 1].sum_K / groups[i + 1].n_member - groups[i].sum_K / groups[i].n_member;
            if (apart < least && may_join(&groups[i], &groups[i + 1], width_K)) {
                least = apart;
                best = i;
            }
        }
        if (best < 0)
            return n;
        group *cold = &groups[best], *warm = &groups[best + 1];
        next[cold->last] = warm->plateau;
        *cold = (group){fmin(cold->least_K, warm->least_K),
                        fmax(cold->most_K, warm->most_K),
                        cold->sum_K + warm->sum_K,
                        cold->n_member + warm->n_member,
                        cold->cooling,
                        cold->plateau,
                        warm->last};
        for (int i = best + 1; i + 1 < n; i++)
            groups[i] = groups[i + 1];
        n--;
    }
}

static group group_of(const an_gathering *gathering, int i_plateau)
{
    const an_plateau *plateau = &gathering->plateau[i_plateau];
    group made = {INFINITY, -INFINITY, 0, plateau->n_member, plateau->cooling, i_plateau, i_plateau};
    for (int i = 0; i < plateau->n_member; i++) {
        double temperature = gathering->member[plateau->first + i].point->temperature_K;
        made.least_K = fmin(made.least_K, temperature);
        made.most_K = fmax(made.most_K, temperature);
        made.sum_K += temperature;
    }
    return made;
}

/* By temperature over all; an isotherm of heating stands before one of cooling where directions share the
 * grid. */
static void number_isotherms(an_gathering *gathering, const group *groups, int n, const int *next)
{
    for (int i = 0; i < n; i++)
        for (int k = groups[i].plateau; k >= 0; k = next[k]) {
            an_plateau *plateau = &gathering->plateau[k];
            plateau->isotherm = i;
            for (int m = 0; m < plateau->n_member; m++)
                gathering->member[plateau->first + m].isotherm = i;
        }
    gathering->n_isotherm = n;
}

static an_status join_plateaus(an_gathering *gathering, double width_K, an_error *err)
{
    int n = 0;
    group *groups = calloc((size_t)gathering->n_plateau + 1, sizeof *groups);
    int *next = malloc(((size_t)gathering->n_plateau + 1) * sizeof *next);
    if (!groups || !next) {
        free(groups);
        free(next);
        return an_fail_memory(err, "isotherms");
    }
    for (int i = 0; i < gathering->n_plateau; i++) {
        next[i] = -1;
        if (!gathering->plateau[i].ramp)
            groups[n++] = group_of(gathering, i);
    }
    qsort(groups, (size_t)n, sizeof *groups, by_direction_and_temperature);
    n = join_groups(groups, n, next, width_K);
    number_isotherms(gathering, groups, n, next);
    free(groups);
    free(next);
    return AN_OK;
}

an_status an_gathering_make(const an_points *points, const an_cell_rules *rules, an_gathering *gathering,
                            an_error *err)
{
    size_t n = 1;
    for (int i = 0; i < rules->n_run; i++)
        n += (size_t)points[i].n_point;
    *gathering = (an_gathering){0};
    gathering->member = calloc(n, sizeof *gathering->member);
    gathering->plateau = calloc(n, sizeof *gathering->plateau);
    if (!gathering->member || !gathering->plateau) {
        an_gathering_clear(gathering);
        return an_fail_memory(err, "bursts of a grid");
    }
    for (int i = 0; i < rules->n_run; i++)
        add_members(&points[i], i, gathering);
    cut_plateaus(gathering, rules->width_K);
    for (int i = 0; i < gathering->n_plateau; i++)
        find_rate(gathering, &gathering->plateau[i]);
    find_ramps(gathering, rules->width_K, rules->rate_K_s);
    find_directions(gathering);
    an_status status = join_plateaus(gathering, rules->width_K, err);
    if (status < 0)
        an_gathering_clear(gathering);
    return status;
}

void an_gathering_clear(an_gathering *gathering)
{
    free(gathering->member);
    free(gathering->plateau);
    *gathering = (an_gathering){0};
}
