/* Superposition as a whole: checks, reference, start, joint fits with the candidate laws of b_T, refinement
 * of the grid of modes. Stage: superpose. Methods stand in the files that this one calls. */
#include "anelast/superpose.h"
#include "fit/superpose/joint.h"

#include <math.h>
#include <stdlib.h>

static const double degree = 0.017453292519943295;

void an_superpose_defaults(an_superpose_options *options)
{
    *options = (an_superpose_options){
        .reference_temperature_K = NAN,
        .vertical_chosen = 1,
        .rule = AN_STRENGTH_EVIDENCE,
        .equilibrium = 1,
        /* ripple of a smooth spectrum 1e-7: 4 exp(-pi^2/h), h = ln(10)/4 the spacing in ln tau */
        .modes_per_decade = 4,
        .most_modes_per_decade = 16,
        .extend_decades = 1,
        .model_floor = 1e-3,      /* a tenth of the 1 % that the trade asks of the modulus */
        .doubtful_chi_square = 2, /* proposed defaults of the house: 2 and 5, 1 and 3 degrees */
        .complex_chi_square = 5,
        .doubtful_rad = 1 * degree,
        .complex_rad = 3 * degree,
        .determined_u = 0.05,
    };
}

static an_status check_point(const an_superpose_point *p, size_t i, an_error *err)
{
    double det = p->noise[0] * p->noise[2] - p->noise[1] * p->noise[1];
    if (!(p->omega_rad_s > 0 && isfinite(p->omega_rad_s)))
        return an_fail(err, AN_E_VALUE, NULL,
                       "point %zu: angular frequency %g rad/s, where a finite value above 0 is allowed",
                       i + 1, p->omega_rad_s);
    if (!(p->storage_Pa > 0 && isfinite(p->storage_Pa) && isfinite(p->loss_Pa)))
        return an_fail(err, AN_E_VALUE, NULL,
                       "point %zu: modulus %g + i %g Pa, where finite values with a positive storage "
                       "modulus are allowed",
                       i + 1, p->storage_Pa, p->loss_Pa);
    if (!(p->noise[0] > 0 && p->noise[2] > 0 && det > 0 && isfinite(det)))
        return an_fail(err, AN_E_VALUE, NULL, "point %zu: the noise covariance is not positive definite",
                       i + 1);
    return AN_OK;
}

static an_status check_input(const an_superpose_input *input, an_error *err)
{
    if (input->n_isotherm < 2)
        return an_fail(err, AN_E_SCIENCE, NULL, "%zu isotherm: superposition wants two or more",
                       input->n_isotherm);
    for (size_t i = 0; i < input->n_point; i++)
        AN_TRY(check_point(&input->point[i], i, err));
    for (size_t i = 0; i < input->n_isotherm; i++) {
        const an_superpose_isotherm *k = &input->isotherm[i];
        if (!(k->temperature_K > 0) || k->n_point < 1 || k->first_point + k->n_point > input->n_point)
            return an_fail(err, AN_E_VALUE, NULL, "isotherm %zu at %g K has no points of its own", i + 1,
                           k->temperature_K);
        if (i > 0 && !(k->temperature_K > k[-1].temperature_K))
            return an_fail(err, AN_E_VALUE, NULL, "isotherm %zu at %g K is not above %g K", i + 1,
                           k->temperature_K, k[-1].temperature_K);
    }
    return AN_OK;
}

/* Least and greatest ln |E*| of an isotherm. */
static void magnitude_range(const an_superpose_input *input, size_t i, double range[2])
{
    range[0] = INFINITY;
    range[1] = -INFINITY;
    for (size_t p = 0; p < input->isotherm[i].n_point; p++) {
        const an_superpose_point *point = &input->point[input->isotherm[i].first_point + p];
        double x = log(hypot(point->storage_Pa, point->loss_Pa));
        range[0] = fmin(range[0], x);
        range[1] = fmax(range[1], x);
    }
}

/* Common range of ln |E*| of two isotherms over the first one's own. */
static double overlap_with(const an_superpose_input *input, size_t i, size_t other)
{
    double own[2], its[2];
    magnitude_range(input, i, own);
    magnitude_range(input, other, its);
    double width = own[1] - own[0];
    return width > 0 ? (fmin(own[1], its[1]) - fmax(own[0], its[0])) / width : 0;
}

/* Uncertainty of log10 a that an isotherm's own slopes and noise leave, decades; infinite for a single point.
 */
static double own_u(const an_superpose_input *input, size_t i)
{
    static const double log10_e = 0.4342944819032518;
    const an_superpose_point *first = &input->point[input->isotherm[i].first_point];
    size_t n = input->isotherm[i].n_point;
    const an_superpose_point *last = first + n - 1;
    double width = log(last->omega_rad_s / first->omega_rad_s), information = 0;
    double slope[2] = {(last->storage_Pa - first->storage_Pa) / width,
                       (last->loss_Pa - first->loss_Pa) / width};
    for (size_t p = 0; n > 1 && p < n; p++)
        information += slope[0] * slope[0] / first[p].noise[0] + slope[1] * slope[1] / first[p].noise[2];
    return log10_e / sqrt(information);
}

/* How well an isotherm serves as the reference: its common range of ln |E*| with either neighbour, up to half
 * its own, less where its own shift is uncertain, since all other shifts share that. */
static double fitness(const an_superpose_input *input, size_t i)
{
    static const double enough = 0.5;
    static const double sure_u = 0.002; /* decades: 0.2 % of E where it falls with the root of time */
    double overlap = fmin(overlap_with(input, i, i - 1), overlap_with(input, i, i + 1));
    return fmin(overlap, enough) * fmin(1, sure_u / own_u(input, i));
}

/* T0: the isotherm nearest to the one asked for; else the one nearest to the middle that overlaps both
 * neighbours by half its own range in ln |E*| and has a sharp shift of its own, or, where none of the middle
 * half does, the one that comes nearest to that. */
static size_t choose_reference(const an_superpose_input *input, double wanted_K)
{
    static const double nearness = 1e-3; /* a step from the middle weighs a part in 1000 of overlap */
    size_t n = input->n_isotherm, best = n / 2;
    double best_score = -INFINITY;
    for (size_t i = 0; i < n; i++) {
        double score;
        if (isfinite(wanted_K))
            score = -fabs(input->isotherm[i].temperature_K - wanted_K);
        else if (n > 2 && (i == 0 || i + 1 == n || 4 * i < n - 1 || 4 * i > 3 * (n - 1)))
            continue;
        else if (n > 2)
            score = fitness(input, i) - nearness * fabs((double)i - 0.5 * (double)(n - 1));
        else
            score = -(double)i;
        if (score > best_score) {
            best_score = score;
            best = i;
        }
    }
    return best;
}

/* Shift a kelvin of the nearest pair that has an area; NAN where none has. */
static double nearest_rate(const an_superpose_input *input, const an_area_shift *pair, size_t i)
{
    for (size_t far = 1; far < input->n_isotherm; far++)
        for (int side = -1; side <= 1; side += 2) {
            size_t k = side < 0 ? i - far : i + far; /* wraps far beyond the end below 0 */
            if (k + 1 < input->n_isotherm && k < input->n_isotherm && pair[k].lack == AN_LACKS_NOTHING)
                return pair[k].log10_a /
                       (input->isotherm[k + 1].temperature_K - input->isotherm[k].temperature_K);
        }
    return NAN;
}

/* All pairs' areas. A pair on a plateau, which has no slope, starts from the rate of its nearest neighbour:
 * the joint fit says what its shift is worth. pair: [n_isotherm - 1] */
static an_status survey_pairs(const an_superpose_input *input, an_vertical vertical, an_area_shift *pair,
                              an_error *err)
{
    for (size_t i = 0; i + 1 < input->n_isotherm; i++)
        if (an_area_between(input, i, vertical, &pair[i], err) < 0 && pair[i].lack == AN_LACKS_OVERLAP)
            return AN_E_SCIENCE;
    for (size_t i = 0; i + 1 < input->n_isotherm; i++) {
        if (pair[i].lack == AN_LACKS_NOTHING)
            continue;
        double rate = nearest_rate(input, pair, i);
        if (!isfinite(rate))
            return an_area_between(input, i, vertical, &pair[i], err);
        pair[i].log10_a = rate * (input->isotherm[i + 1].temperature_K - input->isotherm[i].temperature_K);
    }
    return AN_OK;
}

/* Chain the pairs' areas. log10_a, log10_b: [n_isotherm], relative to the coldest. */
static an_status start_chain(const an_superpose_input *input, an_vertical vertical, double *log10_a,
                             double *log10_b, an_error *err)
{
    an_area_shift *pair = calloc(input->n_isotherm, sizeof *pair);
    if (!pair)
        return an_fail_memory(err, "the start of the joint fit");
    an_status status = survey_pairs(input, vertical, pair, err);
    for (size_t i = 0; status >= 0 && i + 1 < input->n_isotherm; i++) {
        log10_a[i + 1] = log10_a[i] + pair[i].log10_a;
        log10_b[i + 1] = log10_b[i] + pair[i].log10_b;
    }
    free(pair);
    return status;
}

static double reduced_of(const an_joint *joint)
{
    double freedom = (double)joint->n_row - joint->smooth.used - (double)joint->n_outer;
    return joint->smooth.chi_square / fmax(freedom, 1);
}

/* Schwarz's criterion of a joint fit [SCH78], chi-square over `excess`. */
static double criterion_of(const an_joint *joint, double excess)
{
    return joint->smooth.chi_square / excess +
           log((double)joint->n_row) * ((double)joint->n_outer + joint->smooth.used);
}

/* Whether a law of b_T tried later beats the best before it. As with laws of a_T, chi-squares are divided by
 * what even the better one leaves above its expectation, so that a noise stated too small does not buy
 * freedom; and free shifts, which carry no physics, must be better by 10 ("essentially no support" for the
 * others, Burnham and Anderson 2002, from memory). Beyond `limit` neither describes the data: freedom must
 * not cover up that the material does not superpose, and T/T0 must be much closer than no shift. */
static int is_better(const an_joint *one, const an_joint *best, double limit)
{
    static const double handicap = 10, much = 10;
    double reduced[2] = {reduced_of(one), reduced_of(best)};
    double excess = fmax(1, fmin(reduced[0], reduced[1]));
    double gain = criterion_of(best, excess) - criterion_of(one, excess);
    int is_free = one->vertical == AN_VERTICAL_FREE;
    if (reduced[0] > limit && (is_free || much * reduced[0] > reduced[1]))
        return 0;
    return gain > (is_free ? handicap : 0);
}

/* Fit on ever finer grids while chi-square is above its expectation and each doubling takes off three tenths
 * of it: a spectrum of few sharp modes wants a finer grid than a smooth one. joint [in,out]: init'ed; out:
 * the fit kept. */
static an_status fit_refined(const an_superpose_input *input, an_joint_plan *plan, an_joint *joint,
                             an_error *err)
{
    static const double good = 1.3, worthwhile = 0.7;
    AN_TRY(an_joint_alloc(joint, input, plan, err));
    AN_TRY(an_joint_fit(joint, plan->options->rule, NULL, err));
    while (reduced_of(joint) > good && 2 * joint->per_decade <= plan->options->most_modes_per_decade) {
        an_joint finer;
        an_joint_init(&finer);
        an_joint_plan next = *plan;
        next.per_decade = 2 * joint->per_decade;
        next.log10_a = joint->now.log10_a;
        next.log10_b = joint->now.log10_b;
        an_status status = an_joint_alloc(&finer, input, &next, err);
        if (status >= 0)
            status = an_joint_fit(&finer, plan->options->rule, joint, err);
        int better = status >= 0 && reduced_of(&finer) < worthwhile * reduced_of(joint);
        an_joint *worse = better ? joint : &finer;
        an_joint_clear(worse);
        if (better)
            *joint = finer;
        AN_TRY(status);
        if (!better)
            break;
    }
    return AN_OK;
}

/* Start and fit with one law of b_T. */
static an_status fit_vertical(const an_superpose_input *input, an_joint_plan *plan, an_joint *joint,
                              an_error *err)
{
    double *start = calloc(2 * input->n_isotherm, sizeof *start);
    if (!start)
        return an_fail_memory(err, "the start of the joint fit");
    double *log10_b = start + input->n_isotherm;
    an_status status = start_chain(input, plan->vertical, start, log10_b, err);
    plan->log10_a = start;
    plan->log10_b = log10_b;
    if (status >= 0)
        status = fit_refined(input, plan, joint, err);
    free(start);
    return status;
}

/* Try all three laws of b_T; keep the best. */
static an_status fit_chosen(const an_superpose_input *input, an_joint_plan *plan, an_joint *joint,
                            an_error *err)
{
    static const an_vertical tried[] = {AN_VERTICAL_NONE, AN_VERTICAL_DENSITY_TEMPERATURE, AN_VERTICAL_FREE};
    an_status refused = AN_OK;
    int found = 0;
    an_joint best;
    an_joint_init(&best);
    for (size_t i = 0; i < sizeof tried / sizeof *tried; i++) {
        an_joint one;
        an_joint_init(&one);
        plan->vertical = tried[i];
        an_status status = fit_vertical(input, plan, &one, err);
        if (status < 0) {
            an_joint_clear(&one);
            refused = status;
            if (status == AN_E_SCIENCE) /* this law of b_T tears neighbours apart; another may not */
                continue;
            break;
        }
        int better = !found || is_better(&one, &best, plan->options->complex_chi_square);
        an_joint_clear(better ? &best : &one);
        if (better)
            best = one;
        found = 1;
    }
    if (refused < 0 && (refused != AN_E_SCIENCE || !found)) {
        an_joint_clear(&best);
        return refused;
    }
    *joint = best;
    return AN_OK;
}

an_status an_superpose(const an_superpose_input *input, const an_superpose_options *options,
                       an_superposition *result, an_error *err)
{
    an_superpose_options standard;
    an_superpose_defaults(&standard);
    if (!options)
        options = &standard;
    AN_TRY(check_input(input, err));
    an_joint joint;
    an_joint_init(&joint);
    an_joint_plan plan = {.options = options,
                          .vertical = options->vertical,
                          .i_reference = choose_reference(input, options->reference_temperature_K),
                          .per_decade = options->modes_per_decade};
    an_status status = options->vertical_chosen ? fit_chosen(input, &plan, &joint, err)
                                                : fit_vertical(input, &plan, &joint, err);
    if (status >= 0)
        status = an_joint_hand_out(&joint, options, result, err);
    an_joint_clear(&joint);
    return status;
}
