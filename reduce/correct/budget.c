/* The uncertainty budget. Stage: correct. Method: [JCGM102] propagation of a 2-vector, linear for noise (the
 * way from K to E is an analytic function, so one complex derivative says all), central differences over one
 * standard uncertainty for the shared sources; [JCGM101] Monte Carlo for the noise where the frame's
 * compliance makes the way far from linear.
 */
#include "anelast/budget.h"

#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

enum { DRAWS = 4000, PARTS = 2 };

an_status an_chain_run(const an_chain *chain, double complex measured, an_chain_result *r, an_error *err)
{
    an_ladder ladder;
    an_geometry at = an_geometry_at(&chain->geometry, chain->temperature_K);
    AN_TRY(an_geometry_form(&at, &r->form, err));
    an_ladder_set(&ladder, &chain->apparatus, chain->frequency_Hz, chain->temperature_K);
    an_ladder_peel(&ladder, measured, &r->rungs);
    r->modulus = an_geometry_modulus(&r->form, at.bulk_modulus.value, r->rungs.series);
    r->plain = r->modulus * r->form.plain_m;
    r->ratio = an_ladder_ratio(&ladder, r->rungs.series);
    return AN_OK;
}

static an_status modulus_of(const an_chain *chain, double complex measured, double complex *modulus,
                            an_error *err)
{
    an_chain_result r;
    AN_TRY(an_chain_run(chain, measured, &r, err));
    *modulus = r.modulus;
    return AN_OK;
}

/* J C J' for the rotation and stretch that a complex factor is. */
static void stretch(double complex d, const double in[3], double out[3])
{
    double a = creal(d), b = cimag(d);
    out[0] = a * a * in[0] - 2 * a * b * in[1] + b * b * in[2];
    out[1] = a * b * in[0] + (a * a - b * b) * in[1] - a * b * in[2];
    out[2] = b * b * in[0] + 2 * a * b * in[1] + a * a * in[2];
}

static an_status noise_linear(const an_chain *chain, double complex measured, const double in[3],
                              double out[3], an_error *err)
{
    const double part = 1e-6; /* of |K|: error 1e-12 from curvature, 1e-10 from rounding */
    double complex low, high;
    AN_TRY(modulus_of(chain, measured * (1 - part), &low, err));
    AN_TRY(modulus_of(chain, measured * (1 + part), &high, err));
    stretch((high - low) / (2 * part * measured), in, out);
    return AN_OK;
}

/* Lower Cholesky factor of a 2 x 2 covariance; zeros where it has none. */
static void factor(const double c[3], double l[3])
{
    l[0] = sqrt(fmax(c[0], 0));
    l[1] = l[0] > 0 ? c[1] / l[0] : 0;
    l[2] = sqrt(fmax(c[2] - l[1] * l[1], 0));
}

static an_status noise_drawn(const an_chain *chain, double complex measured, const double in[3],
                             double out[3], an_error *err)
{
    double l[3], sum[2] = {0}, square[3] = {0};
    double complex centre, e = 0;
    AN_TRY(modulus_of(chain, measured, &centre, err));
    gsl_rng *rng = gsl_rng_alloc(gsl_rng_taus2); /* GSL's default seed: the same draws for every burst */
    if (!rng)
        return an_fail_memory(err, "random numbers");
    factor(in, l);
    an_status status = AN_OK;
    for (int i = 0; i < DRAWS && status >= 0; i++) {
        double a = gsl_ran_gaussian_ziggurat(rng, 1), b = gsl_ran_gaussian_ziggurat(rng, 1);
        status = modulus_of(chain, measured + l[0] * a + I * (l[1] * a + l[2] * b), &e, err);
        double x = creal(e - centre), y = cimag(e - centre);
        sum[0] += x / DRAWS;
        sum[1] += y / DRAWS;
        square[0] += x * x / DRAWS;
        square[1] += x * y / DRAWS;
        square[2] += y * y / DRAWS;
    }
    gsl_rng_free(rng);
    for (int k = 0; k < 3; k++)
        out[k] = square[k] - sum[k > 1] * sum[k > 0];
    return status;
}

an_status an_budget_noise(const an_chain *chain, double complex measured, const double in[3], int monte_carlo,
                          double out[3], an_error *err)
{
    return monte_carlo ? noise_drawn(chain, measured, in, out, err)
                       : noise_linear(chain, measured, in, out, err);
}

/* The constants behind a source; NULL where there is none. */
static void constants(an_chain *c, an_source source, an_measure *m[PARTS])
{
    an_geometry *g = &c->geometry;
    an_apparatus *a = &c->apparatus;
    an_measure *ratio = isnan(g->modulus_ratio.value) ? &g->poisson : &g->modulus_ratio;
    an_measure *table[AN_SOURCE_COUNT][PARTS] = {
        [AN_SOURCE_LENGTH] = {&g->length},
        [AN_SOURCE_WIDTH] = {&g->width},
        [AN_SOURCE_THICKNESS] = {&g->thickness},
        [AN_SOURCE_DIAMETER] = {&g->diameter},
        [AN_SOURCE_HEIGHT] = {&g->height},
        [AN_SOURCE_AREA] = {&g->area},
        [AN_SOURCE_ADDED_LENGTH] = {&g->added_length},
        [AN_SOURCE_SHEAR_TERM] = {ratio},
        [AN_SOURCE_CONSTRAINT] = {&g->shape_factor, &g->bulk_modulus},
        [AN_SOURCE_FORCE_GAIN] = {&a->force.gain},
        [AN_SOURCE_DISPLACEMENT_GAIN] = {&a->displacement.gain},
        [AN_SOURCE_DELAY] = {&a->force.delay, &a->displacement.delay},
        [AN_SOURCE_MOVING_MASS] = {&a->moving_mass},
        [AN_SOURCE_SHAFT] = {&a->shaft_stiffness, &a->shaft_damping},
        [AN_SOURCE_TRANSDUCER] = {&a->transducer_stiffness, &a->fixture_mass},
    };
    for (int k = 0; k < PARTS; k++)
        m[k] = table[source][k];
}

/* One part of a source moved by so many of its uncertainties; nonzero where that moves anything. */
static int move(an_chain *chain, an_source source, int part, double by)
{
    an_measure *m[PARTS];
    if (source == AN_SOURCE_COMPLIANCE) {
        double moved = 0;
        for (int i = 0; i < chain->apparatus.n_compliance && part == 0; i++) {
            an_measure *row = &chain->apparatus.compliance[i].compliance;
            row->value += row->u > 0 ? by * row->u : 0;
            moved += row->u > 0 ? row->u : 0;
        }
        return moved > 0;
    }
    constants(chain, source, m);
    if (!m[part] || isnan(m[part]->value) || !(m[part]->u > 0))
        return 0;
    m[part]->value += by * m[part]->u;
    return 1;
}

static an_status difference(const an_chain *chain, double complex measured, an_source source, int part,
                            double complex *change, an_error *err)
{
    double complex side[2];
    *change = 0;
    for (int k = 0; k < 2; k++) {
        an_chain moved = *chain;
        if (!move(&moved, source, part, k ? 1 : -1))
            return AN_OK;
        AN_TRY(modulus_of(&moved, measured, &side[k], err));
    }
    *change = 0.5 * (side[1] - side[0]);
    return AN_OK;
}

static double together(double a, double b)
{
    return copysign(hypot(a, b), fabs(a) >= fabs(b) ? a : b);
}

an_status an_budget_common(const an_chain *chain, double complex measured, double common[AN_SOURCE_COUNT][2],
                           an_error *err)
{
    double complex part[PARTS];
    for (int source = 0; source < AN_SOURCE_COUNT; source++) {
        for (int k = 0; k < PARTS; k++)
            AN_TRY(difference(chain, measured, (an_source)source, k, &part[k], err));
        common[source][0] = together(creal(part[0]), creal(part[1]));
        common[source][1] = together(cimag(part[0]), cimag(part[1]));
    }
    return AN_OK;
}

int an_budget_assume(an_geometry *g, double relative, char *names, size_t n_names)
{
    struct {
        const char *name;
        an_measure *measure;
    } rows[] = {{"length", &g->length},     {"width", &g->width},   {"thickness", &g->thickness},
                {"diameter", &g->diameter}, {"height", &g->height}, {"area", &g->area}};
    int n = 0;
    size_t used = 0;
    if (names && n_names)
        names[0] = '\0';
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        if (isnan(rows[i].measure->value) || !isnan(rows[i].measure->u))
            continue;
        rows[i].measure->u = relative * rows[i].measure->value;
        if (names && used < n_names)
            used += (size_t)snprintf(names + used, n_names - used, "%s%s", n ? ", " : "", rows[i].name);
        n++;
    }
    return n;
}
