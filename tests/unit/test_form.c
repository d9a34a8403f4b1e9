/* Geometry: stiffness and back for every kind, derivatives against differences, expansion, strain, and the
 * handbook forms. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/geometry.h"
#include "check.h"

/* Every dimension that any kind needs, so that one geometry serves all. */
static an_geometry full(an_geometry_kind kind)
{
    an_specimen specimen;
    an_specimen_init(&specimen);
    an_geometry *g = &specimen.geometry;
    g->kind = kind;
    g->length.value = 0.031;
    g->width.value = 0.0098;
    g->thickness.value = 0.0021;
    g->poisson.value = 0.4;
    g->added_length.value = 0.0007;
    if (kind == AN_COMPRESSION_FREE || kind == AN_COMPRESSION_BONDED || kind == AN_SHEAR_DOUBLE_LAP ||
        kind == AN_PARALLEL_PLATES)
        g->height.value = 0.0043;
    if (kind == AN_TORSION_CYLINDER || kind == AN_PARALLEL_PLATES)
        g->diameter.value = 0.012;
    return *g;
}

static void forward_and_back(void **state)
{
    (void)state;
    for (int kind = AN_TENSION; kind < AN_GEOMETRY_COUNT; kind++) {
        an_geometry g = full((an_geometry_kind)kind);
        an_form form;
        double complex modulus = 3.2e6 + 7e5 * I;
        assert_int_equal(an_geometry_form(&g, &form, NULL), AN_OK);
        assert_true(form.factor_m > 0 && form.plain_m > 0);
        for (int bulk = 0; bulk < 2; bulk++) {
            double B = bulk ? 2e9 : NAN;
            double complex back = an_geometry_modulus(&form, B, an_geometry_stiffness(&form, B, modulus));
            assert_close(cabs(back - modulus), 0, 1e-12 * cabs(modulus));
        }
    }
}

/* The table of the trade, each by hand. */
static void forms_by_hand(void **state)
{
    (void)state;
    an_form form;
    an_geometry g = full(AN_TENSION);
    double b = 0.0098, t = 0.0021, L = 0.031 + 0.0007, phi = 1.2 * 2 * 1.4 * pow(t / L, 2);
    assert_int_equal(an_geometry_form(&g, &form, NULL), AN_OK);
    assert_relative(form.factor_m, b * t / L, 1e-12);
    assert_relative(form.plain_m, b * t / 0.031, 1e-12);
    g = full(AN_CANTILEVER_GUIDED);
    an_geometry_form(&g, &form, NULL);
    assert_relative(form.factor_m, b * pow(t / L, 3) / (1 + phi), 1e-12);
    g = full(AN_CANTILEVER_FREE);
    an_geometry_form(&g, &form, NULL);
    assert_relative(form.factor_m, b * pow(t / L, 3) / (4 * (1 + phi / 4)), 1e-12);
    g = full(AN_CANTILEVER_DUAL);
    an_geometry_form(&g, &form, NULL);
    assert_relative(form.factor_m, 2 * b * pow(t / L, 3) / (1 + phi), 1e-12);
    g = full(AN_BENDING_THREE_POINT);
    g.poisson.value = NAN; /* no E/G: no shear term */
    an_geometry_form(&g, &form, NULL);
    assert_relative(form.factor_m, 4 * b * pow(t / L, 3), 1e-12);
    g.modulus_ratio.value = 30; /* a laminate: 14 % at L/t = 16 (common practice) */
    g.thickness.value = L / 16;
    an_geometry_form(&g, &form, NULL);
    assert_close(form.plain_m / form.factor_m * pow(L / 0.031, -3), 1.14, 0.005);
    g = full(AN_SHEAR_DOUBLE_LAP);
    an_geometry_form(&g, &form, NULL);
    assert_relative(form.factor_m, 2 * 0.031 * b / 0.0043 / (1 + pow(0.0043 / 0.031, 2) / 3), 1e-12);
    g.height.value = 0.17 * 0.031; /* bending is 1 % at h/l = 0.17 (common practice) */
    an_geometry_form(&g, &form, NULL);
    assert_close(form.plain_m / form.factor_m, 1.01, 0.001);
    g = full(AN_TORSION_CYLINDER);
    an_geometry_form(&g, &form, NULL);
    assert_relative(form.factor_m, M_PI * pow(0.012, 4) / (32 * L), 1e-12);
    g = full(AN_PARALLEL_PLATES);
    an_geometry_form(&g, &form, NULL);
    assert_relative(form.factor_m, M_PI * pow(0.006, 4) / (2 * 0.0043), 1e-12);
}

static double moved(an_geometry g, an_dimension dimension, double by)
{
    an_measure *const m[] = {&g.length, &g.width, &g.thickness,   &g.diameter,
                             &g.height, &g.area,  &g.added_length};
    an_form form;
    m[dimension]->value += by;
    assert_int_equal(an_geometry_form(&g, &form, NULL), AN_OK);
    return form.factor_m;
}

static void derivatives(void **state)
{
    (void)state;
    for (int kind = AN_TENSION; kind < AN_GEOMETRY_COUNT; kind++)
        for (int d = AN_DIMENSION_LENGTH; d <= AN_DIMENSION_ADDED; d++) {
            an_geometry g = full((an_geometry_kind)kind);
            double exact = an_geometry_derivative(&g, (an_dimension)d);
            if (exact == 0)
                continue;
            double step = 1e-7; /* m; curvature leaves 1e-8, rounding 1e-9 */
            double difference =
                (moved(g, (an_dimension)d, step) - moved(g, (an_dimension)d, -step)) / (2 * step);
            assert_relative(exact, difference, 1e-5);
        }
    an_geometry g = full(AN_BENDING_THREE_POINT); /* bending: 1 % in t is 3 % in E (common practice) */
    an_form form;
    g.poisson.value = NAN;
    an_geometry_form(&g, &form, NULL);
    assert_relative(an_geometry_derivative(&g, AN_DIMENSION_THICKNESS) * 0.0021 / form.factor_m, 3, 1e-12);
    assert_close(an_geometry_derivative(&g, AN_DIMENSION_DIAMETER), 0, 0);
    assert_close(an_geometry_derivative(&g, AN_DIMENSION_RATIO), 0, 0);
}

/* Expansion of 7e-5 /K over 100 K raises b t^3 by 2.8 %, and A/L in tension by 0.7 % (arithmetic; the span
 * stays the fixture's). */
static void expansion(void **state)
{
    (void)state;
    an_form cold, hot;
    for (int k = 0; k < 2; k++) {
        an_geometry g = full(k ? AN_TENSION : AN_BENDING_THREE_POINT);
        g.poisson.value = g.added_length.value = NAN;
        g.expansion.value = 7e-5;
        g.measured_at.value = 296.15;
        an_geometry at = an_geometry_at(&g, 396.15);
        an_geometry_form(&g, &cold, NULL);
        an_geometry_form(&at, &hot, NULL);
        assert_close(hot.factor_m / cold.factor_m, k ? 1.007 : pow(1.007, 4), 1e-9);
        at = an_geometry_at(&g, NAN);
        assert_close(at.width.value, g.width.value, 0);
    }
}

static void strain(void **state)
{
    (void)state;
    an_geometry g = full(AN_TENSION);
    assert_relative(an_geometry_strain(&g), 1 / 0.0317, 1e-12);
    g = full(AN_BENDING_THREE_POINT); /* 6 t d / L^2, as in every flexure standard (common practice) */
    assert_relative(an_geometry_strain(&g), 6 * 0.0021 / (0.0317 * 0.0317), 1e-12);
    g = full(AN_PARALLEL_PLATES); /* rim: R / h */
    assert_relative(an_geometry_strain(&g), 0.006 / 0.0043, 1e-12);
    assert_relative(an_geometry_gauge(&g) * an_geometry_strain(&g), 1, 1e-12);
}

static void refused(void **state)
{
    (void)state;
    an_error err;
    an_form form;
    an_geometry g = full(AN_TENSION);
    g.thickness.value = NAN;
    assert_int_equal(an_geometry_form(&g, &form, &err), AN_E_VALUE);
    g = full(AN_GEOMETRY_NONE);
    assert_int_equal(an_geometry_form(&g, &form, &err), AN_E_VALUE);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(forward_and_back), cmocka_unit_test(forms_by_hand), cmocka_unit_test(derivatives),
        cmocka_unit_test(expansion),        cmocka_unit_test(strain),        cmocka_unit_test(refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
