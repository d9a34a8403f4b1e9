/* Maxwell responses and interconversion against published Prony series: prony.txt, spectra.txt. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/interconvert.h"
#include "anelast/law.h"
#include "anelast/material.h"
#include "check_spectra.h"

static void load(const check_row *row, an_maxwell *model)
{
    check_spectrum(row, check_given(row, "scale"), model);
}

static an_status valid(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    check_spectrum(row, 1, &model);
    an_status status = an_maxwell_check(&model, err);
    *actual = (double)model.n_mode;
    an_maxwell_clear(&model);
    return status;
}

static an_status modulus(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    load(row, &model);
    *actual = an_maxwell_relaxation(&model, check_given(row, "t"));
    an_maxwell_clear(&model);
    return AN_OK;
}

static an_status long_term(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    load(row, &model);
    *actual = model.equilibrium_Pa;
    an_maxwell_clear(&model);
    return AN_OK;
}

static an_status instantaneous(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    load(row, &model);
    *actual = an_maxwell_instantaneous(&model);
    an_maxwell_clear(&model);
    return AN_OK;
}

static an_status viscosity(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    load(row, &model);
    *actual = an_maxwell_viscosity(&model);
    an_maxwell_clear(&model);
    return AN_OK;
}

static an_status steady(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    (void)err;
    load(row, &model);
    *actual = an_maxwell_steady_compliance(&model);
    an_maxwell_clear(&model);
    return AN_OK;
}

/* E', E'' three ways: directly, as |E*| and tan delta, and as 1/D* of the exact retardation spectrum; a
 * disagreement beyond rounding becomes NaN, which no tolerance forgives. */
static an_status complex_modulus(const an_maxwell *model, double omega, double *actual, an_error *err)
{
    an_retardation spectrum;
    an_retardation_init(&spectrum);
    an_status status = an_maxwell_to_retardation(model, &spectrum, err);
    if (status < 0)
        return status;
    double complex inverse = 1 / an_retardation_complex(&spectrum, omega);
    an_retardation_clear(&spectrum);
    double complex direct = an_maxwell_complex(model, omega);
    double magnitude = an_maxwell_magnitude(model, omega);
    double angle = atan(an_maxwell_loss_factor(model, omega));
    bool agree = cabs(inverse - direct) <= 1e-9 * magnitude &&
                 cabs(magnitude * cexp(I * angle) - direct) <= 1e-12 * magnitude;
    actual[0] = agree ? creal(direct) : NAN;
    actual[1] = agree ? cimag(direct) : NAN;
    return AN_OK;
}

static an_status complex_row(const check_row *row, double *actual, an_error *err)
{
    an_maxwell model;
    load(row, &model);
    an_status status = complex_modulus(&model, check_given(row, "omega"), actual, err);
    an_maxwell_clear(&model);
    return status;
}

static an_status complex_at(const check_row *row, double *actual, an_error *err)
{
    an_law law;
    double log10_aT;
    an_law_init(&law, AN_LAW_WLF, 273.15 + check_given(row, "T0"), 0);
    law.constant[0] = check_given(row, "c1");
    law.constant[1] = check_given(row, "c2");
    AN_TRY(an_law_log10_aT(&law, 273.15 + check_given(row, "T"), AN_RANGE_REFUSE, &log10_aT, err));
    double omega = 2 * acos(-1) * check_given(row, "f") * pow(10, log10_aT);
    an_maxwell model;
    load(row, &model);
    an_status status = complex_modulus(&model, omega, actual, err);
    an_maxwell_clear(&model);
    return status;
}

/* The retardation spectrum of the row's series; the caller clears it. */
static an_status retard(const check_row *row, an_retardation *spectrum, an_error *err)
{
    an_maxwell model;
    load(row, &model);
    an_retardation_init(spectrum);
    an_status status = an_maxwell_to_retardation(&model, spectrum, err);
    an_maxwell_clear(&model);
    return status;
}

static an_status retardation(const check_row *row, double *actual, an_error *err)
{
    an_retardation spectrum;
    AN_TRY(retard(row, &spectrum, err));
    size_t j = (size_t)check_given(row, "mode") - 1;
    assert_true(j < spectrum.n_mode);
    actual[0] = spectrum.time_s[j];
    actual[1] = spectrum.compliance_per_Pa[j];
    an_retardation_clear(&spectrum);
    return AN_OK;
}

static an_status glass(const check_row *row, double *actual, an_error *err)
{
    an_retardation spectrum;
    AN_TRY(retard(row, &spectrum, err));
    actual[0] = spectrum.instantaneous_per_Pa;
    actual[1] = an_retardation_creep(&spectrum, 1e30);
    an_retardation_clear(&spectrum);
    return AN_OK;
}

static an_status creep(const check_row *row, double *actual, an_error *err)
{
    an_retardation spectrum;
    AN_TRY(retard(row, &spectrum, err));
    *actual = an_retardation_creep(&spectrum, check_given(row, "t"));
    an_retardation_clear(&spectrum);
    return AN_OK;
}

static double worst_difference(const an_maxwell *model, const an_maxwell *back)
{
    if (model->n_mode != back->n_mode)
        return NAN;
    double most = model->equilibrium_Pa > 0 ? fabs(back->equilibrium_Pa / model->equilibrium_Pa - 1)
                                            : back->equilibrium_Pa;
    for (size_t i = 0; i < model->n_mode; i++) {
        most = fmax(most, fabs(back->time_s[i] / model->time_s[i] - 1));
        most = fmax(most, fabs(back->modulus_Pa[i] / model->modulus_Pa[i] - 1));
    }
    return most;
}

static an_status there_and_back(const check_row *row, double *actual, an_error *err)
{
    an_retardation spectrum;
    an_maxwell model, back;
    AN_TRY(retard(row, &spectrum, err));
    load(row, &model);
    an_maxwell_init(&back);
    an_status status = an_retardation_to_maxwell(&spectrum, &back, err);
    *actual = worst_difference(&model, &back);
    an_retardation_clear(&spectrum);
    an_maxwell_clear(&model);
    an_maxwell_clear(&back);
    return status;
}

static void write_document(const char *path, const an_material *material)
{
    FILE *stream = fopen(path, "w");
    assert_non_null(stream);
    an_xml_writer *writer = an_xml_writer_new(stream, "material");
    an_material_write(writer, material);
    assert_true(an_xml_writer_finish(writer, NULL) >= 0);
    an_xml_writer_free(&writer);
    fclose(stream);
}

/* The series as a material document, written here whatever it holds, and read by the reader that judges. */
static an_status document(const check_row *row, double *actual, an_error *err)
{
    static const char path[] = "published_material.xml";
    an_material material;
    an_material_init(&material);
    check_spectrum(row, 1e6, &material.modes);
    material.reference_temperature_K = 293.15;
    material.window_time_s[0] = material.modes.time_s[0];
    material.window_time_s[1] = 1e12;
    material.window_temperature_K[0] = material.window_temperature_K[1] = 293.15;
    strcpy(material.id, "published");
    strcpy(material.end_state, "solid");
    strcpy(material.vertical, "none");
    strcpy(material.simplicity, "simple");
    assert_int_equal(an_made_init(&material.made, "test_prony", NULL), AN_OK);
    write_document(path, &material);
    an_material_clear(&material);
    an_status status = an_material_read(path, &material, NULL, err);
    *actual = (double)material.modes.n_mode;
    an_material_clear(&material);
    remove(path);
    return status;
}

static void table(void **state)
{
    (void)state;
    const check_quantity quantity[] = {
        {"check", valid},         {"modulus", modulus},       {"long term", long_term},
        {"complex", complex_row}, {"complex at", complex_at}, {"instantaneous", instantaneous},
        {"viscosity", viscosity}, {"steady", steady},         {"retardation", retardation},
        {"glass", glass},         {"creep", creep},           {"back", there_and_back},
        {"document", document},
    };
    check_table_run("prony.txt", quantity, sizeof quantity / sizeof quantity[0]);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(table)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
