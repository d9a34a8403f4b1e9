/* return_check.c: a run that ends with a return to a temperature measured before is checked against itself:
 * what changed between (a slipping clamp, ageing, cure, drying) shows there and nowhere else. A whole cooling
 * sweep is no return: its difference from heating is history of the glass. So only the last plateau counts,
 * reached by one step over temperatures that were passed on the way out in smaller ones.
 *
 * The two temperatures differ a little; the slope of ln|E*| to the neighbouring plateau takes that out, and
 * half of what it takes out is allowed as its error.
 */
#include "reduce/grid/average.h"

#include "anelast/quantity.h"

#include <math.h>

/* A difference beyond this is a clamp that let go rather than a material that changed (common practice). [1]
 */
static const double slip_limit = 0.1;

/* Frequencies of repeats, as for cells. */
static const double same_frequency = 0.005;

/* A burst of a plateau at a frequency; NULL where there is none. */
static const an_member *at_frequency(const an_gathering *gathering, const an_plateau *plateau,
                                     double frequency_Hz)
{
    for (int i = 0; i < plateau->n_member; i++) {
        const an_member *member = &gathering->member[plateau->first + i];
        if (fabs(member->point->frequency_Hz / frequency_Hz - 1) <= same_frequency)
            return member;
    }
    return NULL;
}

/* The first plateau of the run that the last one returns to; NULL where it returns to none. */
static const an_plateau *returns_to(const an_gathering *gathering, int i_first, int i_last, double width_K)
{
    const an_plateau *plateau = gathering->plateau, *last = &plateau[i_last];
    for (int i = i_first; i + 1 < i_last; i++) {
        double out = fabs(plateau[i + 1].temperature_K - plateau[i].temperature_K);
        double back = fabs(last->temperature_K - plateau[i_last - 1].temperature_K);
        if (fabs(plateau[i].temperature_K - last->temperature_K) <= width_K && out > 2 * width_K &&
            back > out + width_K && !plateau[i].ramp && !last->ramp)
            return &plateau[i];
    }
    return NULL;
}

/* The change of ln|E*| at one frequency, with what is allowed for noise and for the difference of
 * temperatures. */
static double change(const an_gathering *gathering, const an_plateau *from, const an_member *first,
                     const an_member *last, double *allowed)
{
    an_logarithm one, two, next;
    const an_member *neighbour = at_frequency(gathering, from + 1, first->point->frequency_Hz);
    double step = last->point->temperature_K - first->point->temperature_K, slope = 0;
    an_logarithm_of(first->point, &one);
    an_logarithm_of(last->point, &two);
    if (neighbour) {
        an_logarithm_of(neighbour->point, &next);
        slope =
            (next.modulus - one.modulus) / (neighbour->point->temperature_K - first->point->temperature_K);
    }
    *allowed = fabs(slope * step) / 2 + 2 * sqrt(one.noise[0] + two.noise[0]);
    return two.modulus - one.modulus - slope * step;
}

/* A return: the plateau that is returned to, and the last one. */
typedef struct returning {
    const an_gathering *gathering;
    const an_plateau *from, *to;
} returning;

/* The greatest change beyond the limit at the frequencies that both plateaus have. */
static double greatest_change(const returning *pair, double limit, const an_member **last,
                              const an_member **first)
{
    double most = 0;
    *last = *first = NULL;
    for (int i = 0; i < pair->to->n_member; i++) {
        const an_member *late = &pair->gathering->member[pair->to->first + i];
        const an_member *early = at_frequency(pair->gathering, pair->from, late->point->frequency_Hz);
        double allowed = 0, one = early ? change(pair->gathering, pair->from, early, late, &allowed) : 0;
        if (fabs(expm1(one)) - allowed > limit && fabs(one) > fabs(most)) {
            most = one;
            *last = late;
            *first = early;
        }
    }
    return most;
}

static an_status compare(const returning *pair, double limit, an_grid *grid, an_error *err)
{
    const an_member *last, *first;
    double most = greatest_change(pair, limit, &last, &first);
    if (!last)
        return AN_OK;
    const an_point *point = last->point;
    return an_remark_list_add(
        &grid->remarks, fabs(expm1(most)) > slip_limit ? "clamp-slip" : "drift-check", point->burst, err,
        "back at %.1f °C and %.4g Hz burst %d reads %+.1f %% against burst %d; up to %.3g %% is allowed",
        point->temperature_K - AN_ZERO_CELSIUS_K, point->frequency_Hz, point->burst, 100 * expm1(most),
        first->point->burst, 100 * limit);
}

an_status an_returns_check(const an_gathering *gathering, const an_cell_rules *rules, an_grid *grid,
                           an_error *err)
{
    for (int first = 0, last; first < gathering->n_plateau; first = last + 1) {
        for (last = first; last + 1 < gathering->n_plateau &&
                           gathering->plateau[last + 1].i_run == gathering->plateau[first].i_run;)
            last++;
        const an_plateau *from = returns_to(gathering, first, last, rules->width_K);
        returning pair = {gathering, from, &gathering->plateau[last]};
        if (from)
            AN_TRY(compare(&pair, rules->drift_limit, grid, err));
    }
    return AN_OK;
}
