/* Form factors against Saint-Venant's torsion, Gent and Lindley's blocks and Timoshenko's beams:
 * geometry.txt. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/geometry.h"
#include "check_table.h"

static an_geometry bare(an_geometry_kind kind)
{
    an_specimen specimen;
    an_specimen_init(&specimen);
    specimen.geometry.kind = kind;
    return specimen.geometry;
}

static an_status torsion_beta(const check_row *row, double *actual, an_error *err)
{
    an_geometry g = bare(AN_TORSION_RECTANGLE);
    an_form form;
    g.length.value = 0.05;
    g.thickness.value = 0.002;
    g.width.value = 0.002 * check_given(row, "ratio");
    AN_TRY(an_geometry_form(&g, &form, err));
    *actual = form.factor_m * 0.05 / (g.width.value * 0.002 * 0.002 * 0.002);
    return AN_OK;
}

/* A disc of shape factor S: d = 4 h S. Returns apparent modulus over modulus. */
static an_status disc(double S, double modulus, double bulk, double *apparent, an_error *err)
{
    an_geometry g = bare(AN_COMPRESSION_BONDED);
    an_form form;
    g.height.value = 0.01;
    g.diameter.value = 0.04 * S;
    AN_TRY(an_geometry_form(&g, &form, err));
    double area = M_PI / 4 * g.diameter.value * g.diameter.value;
    *apparent = creal(an_geometry_stiffness(&form, bulk, modulus)) * 0.01 / area;
    return AN_OK;
}

static an_status block(const check_row *row, double *actual, an_error *err)
{
    double ratio = check_given(row, "ratio");
    AN_TRY(disc(check_given(row, "S"), 1e6, ratio > 0 ? ratio * 1e6 : NAN, actual, err));
    *actual /= 1e6;
    return AN_OK;
}

static an_status block_of_shear(const check_row *row, double *actual, an_error *err)
{
    AN_TRY(disc(check_given(row, "S"), 3e6, check_given(row, "ratio") * 1e6, actual, err));
    *actual /= 1e6;
    return AN_OK;
}

static an_status beam(const check_row *row, double *actual, an_error *err)
{
    char kind[64];
    an_form form;
    check_given_text(row, "kind", kind);
    an_geometry g = bare(strcmp(kind, "three-point") == 0 ? AN_BENDING_THREE_POINT
                         : strcmp(kind, "guided") == 0    ? AN_CANTILEVER_GUIDED
                         : strcmp(kind, "free") == 0      ? AN_CANTILEVER_FREE
                                                          : AN_CANTILEVER_DUAL);
    g.thickness.value = 0.002;
    g.width.value = 0.01;
    g.length.value = 0.002 * check_given(row, "slender") * (g.kind == AN_CANTILEVER_DUAL ? 0.5 : 1);
    g.poisson.value = check_given(row, "nu");
    AN_TRY(an_geometry_form(&g, &form, err));
    *actual = form.factor_m / form.plain_m;
    return AN_OK;
}

static void table(void **state)
{
    (void)state;
    static const check_quantity quantities[] = {
        {"torsion beta", torsion_beta}, {"block", block}, {"block of G", block_of_shear}, {"beam", beam}};
    check_table_run("geometry.txt", quantities, sizeof quantities / sizeof *quantities);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(table)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
