/* Form factors: stiffness over modulus. Stage: correct. Method: closed forms of beam, block and plate theory,
 * one small function a kind, written in complex numbers so that the derivative with respect to any dimension
 * is a complex step away. Range: small strain, linear, isotropic or with a given E/G; see each row's source
 * in the header.
 */
#include "anelast/geometry.h"

#include <math.h>

static const double STEP = 1e-30; /* of the complex step, relative; its error is its square */

/* Dimensions as complex numbers, in the order of an_dimension. */
typedef struct sizes {
    double complex v[AN_DIMENSION_COUNT];
    int shear_term; /* nonzero: E/G is known */
    int shape_given;
} sizes;

static double complex face(const an_geometry *g, const sizes *s)
{
    if (!isnan(g->area.value))
        return s->v[AN_DIMENSION_AREA];
    if (!isnan(g->diameter.value))
        return M_PI / 4 * s->v[AN_DIMENSION_DIAMETER] * s->v[AN_DIMENSION_DIAMETER];
    return s->v[AN_DIMENSION_WIDTH] * s->v[AN_DIMENSION_THICKNESS];
}

/* Loaded face of a block, whose thickness is its height: area, diameter, or length by width. */
static double complex block_face(const an_geometry *g, const sizes *s)
{
    if (isnan(g->area.value) && isnan(g->diameter.value) && !isnan(g->length.value))
        return s->v[AN_DIMENSION_LENGTH] * s->v[AN_DIMENSION_WIDTH];
    return face(g, s);
}

/* Height of a block or plate gap: height, else the thickness, else the length. */
static double complex height(const an_geometry *g, const sizes *s)
{
    if (!isnan(g->height.value))
        return s->v[AN_DIMENSION_HEIGHT];
    return !isnan(g->thickness.value) ? s->v[AN_DIMENSION_THICKNESS] : s->v[AN_DIMENSION_LENGTH];
}

/* Loaded over force-free area: given, of a rectangle, or of the disc with that face. */
static double complex shape(const an_geometry *g, const sizes *s)
{
    double complex h = height(g, s);
    if (s->shape_given)
        return s->v[AN_DIMENSION_SHAPE];
    if (isnan(g->area.value) && isnan(g->diameter.value) && !isnan(g->length.value)) {
        double complex a = s->v[AN_DIMENSION_LENGTH], b = s->v[AN_DIMENSION_WIDTH];
        return a * b / (2 * h * (a + b));
    }
    return csqrt(block_face(g, s) / M_PI) / (2 * h); /* d / 4h */
}

static double complex cube(double complex x)
{
    return x * x * x;
}

static double complex length(const sizes *s, int corrected)
{
    return s->v[AN_DIMENSION_LENGTH] + (corrected ? s->v[AN_DIMENSION_ADDED] : 0);
}

static double complex tension(const an_geometry *g, const sizes *s, int full)
{
    return face(g, s) / length(s, full);
}

static double complex compression_free(const an_geometry *g, const sizes *s, int full)
{
    return block_face(g, s) / (height(g, s) + (full ? s->v[AN_DIMENSION_ADDED] : 0));
}

/* E_a A / h with E_a = E (1 + 2 S^2) [GL59]. */
static double complex compression_bonded(const an_geometry *g, const sizes *s, int full)
{
    double complex S = shape(g, s);
    return block_face(g, s) / height(g, s) * (full ? 1 + 2 * S * S : 1);
}

/* 2 (G A / h) / (1 + h^2 / (3 l^2)): two pieces, each bending as a short beam between parallel plates with E
 * = 3 G. */
static double complex shear_double_lap(const an_geometry *g, const sizes *s, int full)
{
    double complex h = height(g, s), l = s->v[AN_DIMENSION_LENGTH];
    return 2 * block_face(g, s) / h / (full ? 1 + h * h / (3 * l * l) : 1);
}

/* b (t / L)^3 over 1 + Phi / soft, Phi = 1.2 (E/G) (t / L)^2, shear coefficient 5/6 [TG51]. */
static double complex beam(const sizes *s, int full, double soft)
{
    double complex slender = s->v[AN_DIMENSION_THICKNESS] / length(s, full);
    double complex phi = full && s->shear_term ? 1.2 * s->v[AN_DIMENSION_RATIO] * slender * slender : 0;
    return s->v[AN_DIMENSION_WIDTH] * cube(slender) / (1 + phi / soft);
}

/* G J / L, J = w t^3 [1/3 - 0.21 (t/w) (1 - t^4 / (12 w^4))], w >= t [RY89, Table 20]. */
static double complex torsion_rectangle(const sizes *s, int full)
{
    double complex w = s->v[AN_DIMENSION_WIDTH], t = s->v[AN_DIMENSION_THICKNESS];
    if (creal(w) < creal(t)) {
        double complex swap = w;
        w = t;
        t = swap;
    }
    double complex part = t / w, J = w * cube(t) * (1.0 / 3 - 0.21 * part * (1 - cube(part) * part / 12));
    return J / length(s, full);
}

static double complex fourth(double complex d)
{
    return d * d * d * d;
}

static double complex form_of(const an_geometry *g, const sizes *s, int full)
{
    switch (g->kind) {
    case AN_TENSION:
        return tension(g, s, full);
    case AN_COMPRESSION_FREE:
        return compression_free(g, s, full);
    case AN_COMPRESSION_BONDED:
        return compression_bonded(g, s, full);
    case AN_SHEAR_DOUBLE_LAP:
        return shear_double_lap(g, s, full);
    case AN_CANTILEVER_GUIDED:
        return beam(s, full, 1);
    case AN_CANTILEVER_FREE:
        return 0.25 * beam(s, full, 4);
    case AN_CANTILEVER_DUAL:
        return 2 * beam(s, full, 1);
    case AN_BENDING_THREE_POINT:
        return 4 * beam(s, full, 1);
    case AN_TORSION_RECTANGLE:
        return torsion_rectangle(s, full);
    case AN_TORSION_CYLINDER:
        return M_PI * fourth(s->v[AN_DIMENSION_DIAMETER]) / (32 * length(s, full));
    case AN_PARALLEL_PLATES: /* pi R^4 / (2 h) */
        return M_PI * fourth(s->v[AN_DIMENSION_DIAMETER] / 2) / (2 * height(g, s));
    default:
        return NAN;
    }
}

static double or_zero(double x)
{
    return isnan(x) ? 0 : x;
}

/* E/G of the shear term: given, or 2 (1 + nu); NAN where no term is applied. */
static double shear_ratio(const an_geometry *g)
{
    return !isnan(g->modulus_ratio.value) ? g->modulus_ratio.value : 2 * (1 + g->poisson.value);
}

static sizes sizes_of(const an_geometry *g)
{
    double ratio = shear_ratio(g);
    return (sizes){.v = {g->length.value, g->width.value, g->thickness.value, g->diameter.value,
                         g->height.value, g->area.value, or_zero(g->added_length.value), or_zero(ratio),
                         g->shape_factor.value},
                   .shear_term = !isnan(ratio),
                   .shape_given = !isnan(g->shape_factor.value)};
}

an_status an_geometry_form(const an_geometry *g, an_form *form, an_error *err)
{
    sizes s = sizes_of(g);
    form->plain_m = creal(form_of(g, &s, 0));
    form->factor_m = creal(form_of(g, &s, 1));
    form->bulk_m = g->kind == AN_COMPRESSION_BONDED ? form->plain_m : 0;
    if (!(form->factor_m > 0) || !(form->plain_m > 0) || !isfinite(form->factor_m))
        return an_fail(err, AN_E_VALUE, NULL, "geometry %s: the dimensions give no form factor",
                       an_geometry_word(g->kind));
    return AN_OK;
}

double an_geometry_derivative(const an_geometry *g, an_dimension dimension)
{
    sizes s = sizes_of(g);
    double value = creal(s.v[dimension]);
    if (isnan(value) || (dimension == AN_DIMENSION_RATIO && !s.shear_term))
        return 0;
    double step = value != 0 ? fabs(value) * STEP : STEP;
    s.v[dimension] += I * step;
    double d = cimag(form_of(g, &s, 1)) / step;
    return isfinite(d) ? d : 0;
}

double complex an_geometry_stiffness(const an_form *form, double bulk_Pa, double complex modulus)
{
    double complex k = modulus * form->factor_m;
    if (form->bulk_m > 0 && bulk_Pa > 0) /* 1/E_a = 1/(E (1 + 2 S^2)) + 1/B [GL59] */
        k = 1 / (1 / k + 1 / (bulk_Pa * form->bulk_m));
    return k;
}

double complex an_geometry_modulus(const an_form *form, double bulk_Pa, double complex stiffness)
{
    if (form->bulk_m > 0 && bulk_Pa > 0)
        stiffness = 1 / (1 / stiffness - 1 / (bulk_Pa * form->bulk_m));
    return stiffness / form->factor_m;
}

static int span_of_fixture(an_geometry_kind kind)
{
    return kind == AN_CANTILEVER_GUIDED || kind == AN_CANTILEVER_FREE || kind == AN_CANTILEVER_DUAL ||
           kind == AN_BENDING_THREE_POINT;
}

an_geometry an_geometry_at(const an_geometry *g, double temperature_K)
{
    an_geometry at = *g;
    if (isnan(g->expansion.value) || isnan(g->measured_at.value) || isnan(temperature_K))
        return at;
    double stretch = 1 + g->expansion.value * (temperature_K - g->measured_at.value);
    an_measure *grows[] = {&at.width, &at.thickness, &at.diameter, &at.height};
    for (size_t i = 0; i < sizeof grows / sizeof *grows; i++)
        grows[i]->value *= stretch;
    at.area.value *= stretch * stretch;
    if (!span_of_fixture(g->kind))
        at.length.value *= stretch;
    return at;
}

/* Surface strain of beams: M c / (E I) at the greatest moment. Torsion: rim or middle of the long side. */
double an_geometry_strain(const an_geometry *g)
{
    double L = g->length.value + or_zero(g->added_length.value), t = g->thickness.value;
    sizes s = sizes_of(g);
    switch (g->kind) {
    case AN_TENSION:
        return 1 / L;
    case AN_COMPRESSION_FREE:
    case AN_COMPRESSION_BONDED:
    case AN_SHEAR_DOUBLE_LAP:
        return 1 / creal(height(g, &s));
    case AN_CANTILEVER_GUIDED:
    case AN_CANTILEVER_DUAL:
        return 3 * t / (L * L);
    case AN_CANTILEVER_FREE:
        return 1.5 * t / (L * L);
    case AN_BENDING_THREE_POINT:
        return 6 * t / (L * L);
    case AN_TORSION_RECTANGLE:
        return fmin(t, g->width.value) / L;
    case AN_TORSION_CYLINDER:
        return g->diameter.value / (2 * L);
    case AN_PARALLEL_PLATES:
        return g->diameter.value / (2 * creal(height(g, &s)));
    default:
        return NAN;
    }
}

double an_geometry_gauge(const an_geometry *g)
{
    return 1 / an_geometry_strain(g);
}
