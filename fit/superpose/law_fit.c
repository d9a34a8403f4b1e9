/* Laws of the shift factor fitted to shifts with their covariance, and the choice among them. Stage:
 * superpose.
 *
 * A law is linear in some of its constants once the others are held (WLF: c1 given c2; crossover: c1 and E_a
 * given c2 and T_x), so starts come from a coarse search over the others with the linear ones solved for; the
 * best few are then taken down by Levenberg and Marquardt [MQ63]. The choice is by Akaike's corrected
 * criterion [HT89]; where even the best law leaves chi-square above its degrees of freedom, all chi-squares
 * are divided by that excess, so that an uncertainty stated too small does not buy constants. */
#include "fit/superpose/law_problem.h"

#include <math.h>
#include <stdio.h>
#include <string.h>
#include <gsl/gsl_cdf.h>

/* A polynomial carries no physics beyond the data, so it must be better by 10, "essentially no support" for
 * the others (Burnham and Anderson, Model Selection and Multimodel Inference, 2002, from memory). */
#define POLYNOMIAL_HANDICAP 10.0
/* Beyond this c2 [K] a WLF law is a straight line over any range that can be measured. */
#define STRAIGHT_C2 1e4
/* Probability of a chi-square this large below which a law does not follow the shifts (default). */
#define POOR_PROBABILITY 1e-3

static const double margins_K[] = {3,   8,   20,  40,  70,
                                   120, 250, 600, 2000}; /* of the divergence below the least temperature */
enum { N_MARGINS = sizeof margins_K / sizeof margins_K[0], N_BEST = 24 };

/* The best few starts, best first. */
typedef struct start_list {
    an_law law[N_BEST];
    double cost[N_BEST];
    size_t n;
} start_list;

/* Faults of a law that was fitted: what it says is outside what such a law can mean. */
static const char *find_fault(const an_law *law)
{
    const double *c = law->constant;
    if (law->kind == AN_LAW_WLF && c[1] > STRAIGHT_C2)
        return "log10 a_T runs straight over temperature: c2 grows without bound";
    if (law->kind != AN_LAW_CROSSOVER)
        return NULL;
    double above = an_law_activation_energy(law, c[2]);
    if (c[3] >= above)
        return "the apparent activation energy does not fall below the crossover";
    if (c[1] > STRAIGHT_C2)
        return "log10 a_T runs straight over temperature above the crossover: c2 grows without bound";
    return NULL;
}

static void offer(start_list *list, const an_law *law, double cost)
{
    size_t at = list->n;
    if (!isfinite(cost))
        return;
    while (at > 0 && list->cost[at - 1] > cost)
        at--;
    if (at == N_BEST)
        return;
    size_t last = list->n < N_BEST ? list->n++ : N_BEST - 1;
    for (size_t i = last; i > at; i--) {
        list->law[i] = list->law[i - 1];
        list->cost[i] = list->cost[i - 1];
    }
    list->law[at] = *law;
    list->cost[at] = cost;
}

static void wlf_starts(const law_problem *problem, const an_law *empty, start_list *list)
{
    static const size_t linear[] = {0};
    for (size_t i = 0; i < N_MARGINS; i++) {
        an_law law = *empty;
        law.constant[1] = problem->reference_K - problem->least_K + margins_K[i];
        offer(list, &law, an_law_problem_linear(problem, linear, 1, &law));
    }
}

/* c2 of WLF above T_x in a crossover whose other constants are solved for; keeps the best in `best`. */
static void offer_crossover(const law_problem *problem, const an_law *empty, double crossover_K,
                            start_list *best)
{
    static const size_t linear[] = {0, 3};
    for (size_t m = 0; m < N_MARGINS; m++) {
        an_law law = *empty;
        law.constant[2] = crossover_K;
        law.constant[1] = margins_K[m];
        double cost = an_law_problem_linear(problem, linear, 2, &law);
        if (!find_fault(&law))
            offer(best, &law, cost);
    }
}

/* T_x at three places between neighbouring temperatures, with enough of them on either side to carry both
 * branches; the best of each interval. The law has a kink at T_x, so that chi-square has a bottom of its own
 * in almost every interval, and a descent rarely finds the way to the next. */
static void crossover_starts(const law_problem *problem, const an_law *empty, start_list *list)
{
    for (size_t i = 1; i + 2 < problem->n; i++) {
        start_list best = {.n = 0};
        double step = problem->temperature_K[i + 1] - problem->temperature_K[i];
        for (int part = 1; part < 4; part++)
            offer_crossover(problem, empty, problem->temperature_K[i] + 0.25 * part * step, &best);
        if (best.n)
            offer(list, &best.law[0], best.cost[0]);
    }
}

static void straight_start(const law_problem *problem, const an_law *empty, start_list *list)
{
    static const size_t linear[] = {0, 1, 2, 3, 4, 5};
    an_law law = *empty;
    offer(list, &law, an_law_problem_linear(problem, linear, law.n_constant, &law));
}

static void find_starts(const law_problem *problem, const an_law *empty, start_list *list)
{
    list->n = 0;
    switch (empty->kind) {
    case AN_LAW_WLF:
        wlf_starts(problem, empty, list);
        break;
    case AN_LAW_CROSSOVER:
        crossover_starts(problem, empty, list);
        break;
    default:
        straight_start(problem, empty, list);
    }
}

static void refuse(an_law_trial *trial, const char *reason)
{
    trial->criterion = INFINITY;
    snprintf(trial->reason, sizeof trial->reason, "%s", reason);
}

/* chi-square + 2k + 2k(k+1)/(n-k-1) [HT89]. */
static double corrected_criterion(double chi_square, double k, double n)
{
    return chi_square + 2 * k + 2 * k * (k + 1) / (n - k - 1);
}

static void finish(const law_problem *problem, an_law_trial *trial)
{
    double freedom = (double)problem->n - trial->n_constant;
    const char *fault = find_fault(&trial->law);
    if (fault) {
        refuse(trial, fault);
        return;
    }
    if (an_law_problem_covariance(problem, fmax(1, trial->chi_square / freedom), &trial->law) < 0) {
        refuse(trial, "the shifts do not determine its constants");
        return;
    }
    trial->law.valid_from_K = problem->least_K;
    trial->law.valid_to_K = problem->greatest_K;
    trial->criterion = corrected_criterion(trial->chi_square, trial->n_constant, (double)problem->n);
}

/* VFT is WLF in other constants: B = ln10 c1 c2, T_inf = T0 - c2. */
static void rewrite_as_vft(an_law_trial *trial)
{
    an_law wlf = trial->law;
    an_law_init(&trial->law, AN_LAW_VFT, wlf.reference_temperature_K, 0);
    trial->law.constant[0] = log(10) * wlf.constant[0] * wlf.constant[1];
    trial->law.constant[1] = wlf.reference_temperature_K - wlf.constant[1];
}

static void fit_kind(const law_problem *problem, an_law_kind kind, size_t degree, an_law_trial *trial)
{
    an_law empty;
    start_list list;
    an_law_init(&empty, kind == AN_LAW_VFT ? AN_LAW_WLF : kind, problem->reference_K, degree);
    *trial = (an_law_trial){.law = empty, .n_constant = (int)empty.n_constant, .chi_square = INFINITY};
    if (problem->n < empty.n_constant + 2) {
        trial->law.kind = kind;
        refuse(trial, "too few shift factors for its constants");
        return;
    }
    find_starts(problem, &empty, &list);
    int found = 0; /* a law without fault */
    for (size_t i = 0; i < list.n; i++) {
        double cost = an_law_problem_descend(problem, &list.law[i]);
        int sound = !find_fault(&list.law[i]);
        if (sound > found || (sound == found && cost < trial->chi_square)) {
            trial->chi_square = cost;
            trial->law = list.law[i];
            found = sound;
        }
    }
    if (kind == AN_LAW_VFT && isfinite(trial->chi_square))
        rewrite_as_vft(trial);
    trial->law.kind = kind;
    if (isfinite(trial->chi_square))
        finish(problem, trial);
    else
        refuse(trial, "no allowed constants describe the shifts");
}

an_status an_law_fit(const an_law_data *data, an_law_kind kind, size_t degree, an_law_trial *trial,
                     an_error *err)
{
    law_problem problem;
    an_status status = an_law_problem_make(data, &problem, err);
    if (status >= 0)
        fit_kind(&problem, kind, degree, trial);
    an_law_problem_clear(&problem);
    return status;
}

/* What is tried, in order. */
typedef struct candidate {
    an_law_kind kind;
    size_t degree;
} candidate;

static size_t list_candidates(an_law_kind wanted, candidate list[AN_LAW_TRIALS])
{
    static const candidate every[] = {{AN_LAW_WLF, 0},
                                      {AN_LAW_ARRHENIUS, 0},
                                      {AN_LAW_CROSSOVER, 0},
                                      {AN_LAW_POLYNOMIAL, 2},
                                      {AN_LAW_POLYNOMIAL, 3}};
    static const candidate polynomials[] = {
        {AN_LAW_POLYNOMIAL, 1}, {AN_LAW_POLYNOMIAL, 2}, {AN_LAW_POLYNOMIAL, 3}};
    if (wanted == AN_LAW_NONE) {
        memcpy(list, every, sizeof every);
        return sizeof every / sizeof every[0];
    }
    if (wanted == AN_LAW_POLYNOMIAL) {
        memcpy(list, polynomials, sizeof polynomials);
        return sizeof polynomials / sizeof polynomials[0];
    }
    list[0] = (candidate){wanted, 0};
    return 1;
}

/* The least excess of chi-square over its degrees of freedom among the laws that stand, at least 1. */
static double least_excess(const law_problem *problem, const an_law_trial *trial, size_t n_trial)
{
    double least = INFINITY;
    for (size_t i = 0; i < n_trial; i++)
        if (!trial[i].reason[0])
            least = fmin(least, trial[i].chi_square / ((double)problem->n - trial[i].n_constant));
    return isfinite(least) ? fmax(1, least) : 1;
}

static an_law_trial *choose(const law_problem *problem, an_law_kind wanted, an_law_trial *trial,
                            size_t n_trial)
{
    double excess = least_excess(problem, trial, n_trial);
    double best = INFINITY;
    an_law_trial *chosen = NULL;
    for (size_t i = 0; i < n_trial; i++) {
        if (trial[i].reason[0])
            continue;
        trial[i].criterion =
            corrected_criterion(trial[i].chi_square / excess, trial[i].n_constant, (double)problem->n);
        bool handicapped = trial[i].law.kind == AN_LAW_POLYNOMIAL && wanted == AN_LAW_NONE;
        double value = trial[i].criterion + (handicapped ? POLYNOMIAL_HANDICAP : 0);
        if (value < best) {
            best = value;
            chosen = &trial[i];
        }
    }
    if (chosen)
        chosen->chosen = 1;
    return chosen;
}

an_status an_law_fit_choose(const an_law_data *data, an_law_kind wanted, an_law_trial trial[AN_LAW_TRIALS],
                            size_t *n_trial, an_error *err)
{
    law_problem problem;
    candidate list[AN_LAW_TRIALS];
    an_status status = an_law_problem_make(data, &problem, err);
    *n_trial = 0;
    if (status >= 0) {
        *n_trial = list_candidates(wanted, list);
        for (size_t i = 0; i < *n_trial; i++)
            fit_kind(&problem, list[i].kind, list[i].degree, &trial[i]);
        const an_law_trial *chosen = choose(&problem, wanted, trial, *n_trial);
        double freedom = chosen ? (double)problem.n - chosen->n_constant : 0;
        if (!chosen)
            status = an_fail(err, AN_DUBIOUS, "", "no law stands: %s", trial[0].reason);
        else if (gsl_cdf_chisq_Q(chosen->chi_square, freedom) < POOR_PROBABILITY)
            status =
                an_fail(err, AN_DUBIOUS, "", "the %s law leaves chi-square %.4g on %g degrees of freedom",
                        an_law_kind_name(chosen->law.kind), chosen->chi_square, freedom);
    }
    an_law_problem_clear(&problem);
    return status;
}
