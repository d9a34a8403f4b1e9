/* The head of a run on its way into points, and what only all points together can tell: swapped or inverted
 * channels, a wrong unit, a temperature channel that stands still. Stage: correct. Limits: common practice of
 * the trade.
 */
#include "reducer.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static int is_beam(an_geometry_kind kind)
{
    return kind == AN_CANTILEVER_GUIDED || kind == AN_CANTILEVER_FREE || kind == AN_CANTILEVER_DUAL ||
           kind == AN_BENDING_THREE_POINT;
}

/* The shear term that an isotropic beam of Poisson's ratio 0.35 would need, worth a note from 1 %. */
static an_status note_shear(an_points *points, an_error *err)
{
    const an_geometry *g = &points->specimen.geometry;
    double slender = g->length.value / g->thickness.value, term = 2.4 * 1.35 / (slender * slender);
    if (!is_beam(g->kind) || !isnan(g->poisson.value) || !isnan(g->modulus_ratio.value) || term < 0.01)
        return AN_OK;
    return an_remark_list_add(
        &points->remarks, "geometry-slender", 0, err,
        "length over thickness is %.1f and no E/G or Poisson ratio is given: the result is an apparent "
        "flexural modulus, low by %.1f %% where nu is 0.35",
        slender, 100 * term);
}

/* Dates compare as texts of their first ten characters, YYYY-MM-DD. */
static an_status note_calibration(an_points *points, an_error *err)
{
    const char *until = points->apparatus.valid_until, *at = points->specimen.started;
    if (strlen(until) < 10 || strlen(at) < 10 || strncmp(at, until, 10) <= 0)
        return AN_OK;
    return an_remark_list_add(&points->remarks, "calibration-expired", 0, err,
                              "the apparatus' calibration ended on %.10s, the "
                              "run is of %.10s",
                              until, at);
}

/* Shapes that dimensions typed in the wrong box, or in another unit, would make. */
static an_status note_shape(an_points *points, an_error *err)
{
    const an_geometry *g = &points->specimen.geometry;
    double length = g->length.value, thickness = g->thickness.value, width = g->width.value;
    int bent = is_beam(g->kind);
    if ((bent || g->kind == AN_TENSION) && length < thickness)
        return an_remark_list_add(&points->remarks, "geometry-unusual", 0, err,
                                  "the length, %.4g mm, is less than the thickness, %.4g mm", 1e3 * length,
                                  1e3 * thickness);
    if (g->kind == AN_TENSION && length < width)
        return an_remark_list_add(&points->remarks, "geometry-unusual", 0, err,
                                  "the length, %.4g mm, is less than the width, %.4g mm", 1e3 * length, 1e3 * width);
    if (bent && width < thickness)
        return an_remark_list_add(&points->remarks, "geometry-unusual", 0, err,
                                  "the width, %.4g mm, is less than the thickness, %.4g mm", 1e3 * width,
                                  1e3 * thickness);
    return AN_OK;
}

an_status an_reducer_begin(an_reducer *reducer, const an_run *run, an_points *points, an_error *err)
{
    char names[160];
    snprintf(points->id, sizeof points->id, "%s", run->id);
    points->specimen = run->specimen;
    points->apparatus = run->apparatus;
    for (size_t i = 0; i < run->remarks.n; i++) {
        const an_remark *row = &run->remarks.rows[i];
        AN_TRY(an_remark_list_add_as(&points->remarks, row->kind->code, row->severity, row->burst, err, "%s",
                                     row->text));
    }
    AN_TRY(an_specimen_check(&points->specimen, err));
    if (an_budget_assume(&points->specimen.geometry, reducer->limits.dimension_u, names, sizeof names))
        AN_TRY(an_remark_list_add(&points->remarks, "uncertainty-assumed", 0, err,
                                  "no uncertainty of %s is given; %.2g %% was assumed", names,
                                  100 * reducer->limits.dimension_u));
    if (!points->apparatus.n_compliance)
        AN_TRY(an_remark_list_add(&points->remarks, "apparatus-ideal", 0, err,
                                  "the frame's compliance is not given; the frame was taken as rigid"));
    AN_TRY(note_calibration(points, err));
    AN_TRY(note_shape(points, err));
    return note_shear(points, err);
}

/* Votes of the bursts: on the sign of the phase (K'' after the channel rung below 0 beyond 3 uncertainties,
 * K' after the parallel elements below 0), and on the size of the modulus that the measured stiffness alone
 * would mean. */
typedef struct votes {
    int n, inverted, swapped, implausible, strained;
    double example_Pa;     /* of the first implausible one */
    int example;           /* its burst */
    double example_strain; /* of the first one strained too much */
    int example_strained;  /* its burst */
} votes;

/* Size of the modulus without the apparatus: |K measured| over the form factor, which is |K_s| / |E|. */
static double bare_modulus(const an_point *p)
{
    double form =
        hypot(p->specimen_stiffness[0], p->specimen_stiffness[1]) / hypot(p->storage_Pa, p->loss_Pa);
    return hypot(p->measured_stiffness[0], p->measured_stiffness[1]) / form;
}

static void vote_size(const an_point *p, const an_limits *l, votes *v)
{
    double size = p->state == AN_POINT_SKIPPED ? bare_modulus(p) : p->storage_Pa;
    if (size >= l->modulus_least && size <= l->modulus_most)
        return;
    if (!v->implausible++) {
        v->example_Pa = size;
        v->example = p->burst;
    }
}

static void vote(const an_point *p, const an_limits *l, votes *v)
{
    double common[3];
    if (isnan(p->storage_Pa) || isnan(p->measured_stiffness[0]))
        return;
    double complex measured = p->measured_stiffness[0] + I * p->measured_stiffness[1];
    double complex channel =
        measured + cabs(measured) * (p->rung[AN_RUNG_CHANNEL][0] + I * p->rung[AN_RUNG_CHANNEL][1]);
    double inner =
        creal(channel) + cabs(channel) * p->rung[AN_RUNG_PARALLEL][0]; /* a moving mass may turn K' legally */
    an_point_common(p, common);
    double u = sqrt(p->noise[2] + common[2]) / hypot(p->storage_Pa, p->loss_Pa); /* [rad] of the phase */
    double lag = cimag(channel) / cabs(channel);
    v->n++;
    if (lag < 3 * u && inner < 0)
        v->inverted++;
    else if (lag < -3 * u)
        v->swapped++;
    vote_size(p, l, v);
    if (p->state != AN_POINT_SKIPPED && p->strain > l->strain_most && !v->strained++) {
        v->example_strain = p->strain;
        v->example_strained = p->burst;
    }
}

/* A unit that is none: below absolute zero, or so far from what was set that only another unit explains it. */
static an_status judge_temperature_unit(const an_points *points, an_error *err)
{
    enum { FAR_K = 100 };
    int n_below = 0, n_far = 0;
    const an_point *below = NULL, *far = NULL;
    for (int i = 0; i < points->n_point; i++) {
        const an_point *p = &points->point[i];
        if (p->temperature_K <= 0 && !n_below++)
            below = p;
        if (fabs(p->temperature_K - p->set_temperature_K) > FAR_K && !n_far++)
            far = p;
    }
    if (2 * n_below > points->n_point)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "burst %d: a temperature of %.1f °C is below absolute zero, and so in %d of %d bursts; check "
                       "the unit of temperature in the layout",
                       below->burst, below->temperature_K - AN_ZERO_CELSIUS_K, n_below, points->n_point);
    if (2 * n_far > points->n_point)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "burst %d: %.1f °C was measured where %.1f °C was set, more than %d K apart in %d of %d "
                       "bursts; check the units of temperature in the layout",
                       far->burst, far->temperature_K - AN_ZERO_CELSIUS_K,
                       far->set_temperature_K - AN_ZERO_CELSIUS_K, FAR_K, n_far, points->n_point);
    return AN_OK;
}

/* Skip the points of a stretch in which the temperature did not change by a bit. */
static an_status skip_frozen(an_points *points, int first, int last, double longest_s, int *n_skipped,
                             an_error *err)
{
    double length = points->point[last].start_s - points->point[first].start_s;
    if (last == first || !(length > longest_s))
        return AN_OK;
    for (int i = first; i <= last; i++) {
        an_point *p = &points->point[i];
        AN_TRY(an_remark_list_add(&p->remarks, "temperature-frozen", p->burst, err,
                                  "the temperature stands at %.2f °C for %.0f min without moving",
                                  p->temperature_K - AN_ZERO_CELSIUS_K, length / 60));
        an_point_settle(p);
        ++*n_skipped;
    }
    return AN_OK;
}

static an_status judge_temperature(an_points *points, double longest_s, int *n_skipped, an_error *err)
{
    int first = 0;
    for (int i = 1; i <= points->n_point; i++) {
        const an_point *p = &points->point[first];
        if (i < points->n_point && points->point[i].temperature_K == p->temperature_K &&
            points->point[i].temperature_rate_K_s == 0 && p->temperature_rate_K_s == 0)
            continue;
        AN_TRY(skip_frozen(points, first, i - 1, longest_s, n_skipped, err));
        first = i;
    }
    return AN_OK;
}

/* Why a point is skipped: its first remark of that weight. */
static const char *reason_of(const an_point *point)
{
    for (size_t i = 0; i < point->remarks.n; i++)
        if (point->remarks.rows[i].severity == AN_SKIP)
            return point->remarks.rows[i].text;
    return "no reason stands with it";
}

/* What more than half of the bursts agree on refuses the run. */
static an_status judge_votes(const votes *v, const an_limits *limits, an_error *err)
{
    if (v->n && 2 * v->inverted > v->n)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "the phase is near 180 degrees in %d of %d bursts: one channel is inverted; "
                       "correct its sign in the layout",
                       v->inverted, v->n);
    if (v->n && 2 * v->swapped > v->n)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "the phase is negative in %d of %d bursts: force and displacement are swapped, "
                       "or the channel delay has the wrong sign",
                       v->swapped, v->n);
    if (2 * v->implausible > v->n)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "burst %d: a modulus of %.3g Pa is outside %.0e to %.0e Pa, and so in %d of %d "
                       "bursts; check the units of force, displacement and dimensions",
                       v->example, v->example_Pa, limits->modulus_least, limits->modulus_most, v->implausible,
                       v->n);
    if (2 * v->strained > v->n)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "burst %d: a strain amplitude of %.3g %% is above %.3g %%, and so in %d of %d bursts; "
                       "check the unit of displacement and the dimensions",
                       v->example_strained, 100 * v->example_strain, 100 * limits->strain_most, v->strained, v->n);
    return AN_OK;
}

an_status an_points_judge(an_points *points, const an_procedure *procedure, an_error *err)
{
    an_limits limits;
    votes v = {0};
    int n_skipped = 0, n_left = 0;
    an_limits_read(&limits, procedure);
    for (int i = 0; i < points->n_point; i++)
        vote(&points->point[i], &limits, &v);
    AN_TRY(judge_votes(&v, &limits, err));
    AN_TRY(judge_temperature_unit(points, err));
    AN_TRY(judge_temperature(points, limits.frozen_s, &n_skipped, err));
    for (int i = 0; i < points->n_point; i++)
        n_left += points->point[i].state != AN_POINT_SKIPPED;
    if (!n_left && points->n_point)
        return an_fail(err, AN_E_SCIENCE, NULL, "no burst of %d could be used; burst %d: %s", points->n_point,
                       points->point[0].burst, reason_of(&points->point[0]));
    return n_skipped ? AN_DUBIOUS : AN_OK;
}
