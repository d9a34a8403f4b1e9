/* The material document: there and back without loss, faults by name, cautions. Documents are written into
 * the working folder. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>
#include <string.h>

#include "anelast/material.h"
#include "check.h"

static const char place[] = "test_material.xml";

static void fill_modes(an_material *material)
{
    const double time[] = {2e-4, 5e-3, 0.1};
    const double modulus[] = {3e7, 2e7, 1e7};
    assert_int_equal(an_maxwell_alloc(&material->modes, 3, NULL), AN_OK);
    memcpy(material->modes.time_s, time, sizeof time);
    memcpy(material->modes.modulus_Pa, modulus, sizeof modulus);
    material->modes.equilibrium_Pa = material->long_term_Pa = 4e6;
    material->instantaneous_Pa = 6.4e7;
    material->u_modulus_Pa = calloc(3, sizeof(double));
    material->trusted = calloc(3, sizeof(int));
    material->covariance_Pa2 = calloc(16, sizeof(double));
    for (size_t i = 0; i < 3; i++) {
        material->u_modulus_Pa[i] = 1e4 * (double)(i + 1) / 3;
        material->trusted[i] = i > 0;
    }
    for (size_t i = 0; i < 16; i++)
        material->covariance_Pa2[i] = i % 5 == 0 ? 1e8 : -1e6 / 3;
    material->u_long_term_Pa = 3e4;
}

static void fill_rest(an_material *material)
{
    an_law_init(&material->law, AN_LAW_WLF, 263.15, 0);
    material->law.constant[0] = 14.1;
    material->law.constant[1] = 61.5;
    const double covariance[] = {0.04, 0.11, 0.11, 0.36};
    memcpy(material->law.covariance, covariance, sizeof covariance);
    material->law.valid_from_K = 248.2;
    material->law.valid_to_K = 313.2;
    material->reference_temperature_K = 263.15;
    material->window_time_s[0] = 8e-4;
    material->window_time_s[1] = 1.0 / 3;
    material->window_temperature_K[0] = 248.2;
    material->window_temperature_K[1] = 313.2;
    material->fit_error = 0.004;
    material->fit_error_worst = 0.009;
    material->u_common_relative = 0.012;
    material->u_temperature_bias_K = 0.3;
    strcpy(material->end_state, "solid");
    strcpy(material->vertical, "free");
    strcpy(material->simplicity, "simple");
    material->n_scaling = 2;
    material->scaling_temperature_K = calloc(2, sizeof(double));
    material->scaling_log10_bT = calloc(2, sizeof(double));
    material->scaling_temperature_K[0] = 250;
    material->scaling_temperature_K[1] = 300;
    material->scaling_log10_bT[1] = -0.013;
}

/* A rail pad of Lower Quay Works; the caller clears it. */
static void make(an_material *material)
{
    an_material_init(material);
    strcpy(material->id, "LQ-RP-0412");
    strcpy(material->specimen.lot, "0412");
    assert_int_equal(an_made_init(&material->made, "anelast-prony", NULL), AN_OK);
    fill_modes(material);
    fill_rest(material);
}

static void write(const an_material *material)
{
    an_error err = {0};
    FILE *stream = fopen(place, "w");
    assert_non_null(stream);
    an_xml_writer *writer = an_xml_writer_new(stream, "material");
    an_material_write(writer, material);
    if (an_xml_writer_finish(writer, &err) < 0)
        fail_msg("%s", err.text);
    an_xml_writer_free(&writer);
    fclose(stream);
}

static an_status read_again(an_material *material, an_error *err)
{
    char sha256[65];
    an_material_init(material);
    return an_material_read(place, material, sha256, err);
}

static void same_modes(const an_material *a, const an_material *b)
{
    assert_int_equal(a->modes.n_mode, b->modes.n_mode);
    size_t n = a->modes.n_mode;
    assert_memory_equal(a->modes.time_s, b->modes.time_s, n * sizeof(double));
    assert_memory_equal(a->modes.modulus_Pa, b->modes.modulus_Pa, n * sizeof(double));
    assert_memory_equal(a->u_modulus_Pa, b->u_modulus_Pa, n * sizeof(double));
    assert_memory_equal(a->trusted, b->trusted, n * sizeof(int));
    assert_memory_equal(a->covariance_Pa2, b->covariance_Pa2, (n + 1) * (n + 1) * sizeof(double));
    assert_close(a->modes.equilibrium_Pa, b->modes.equilibrium_Pa, 0);
    assert_close(a->instantaneous_Pa, b->instantaneous_Pa, 0);
    assert_close(a->u_long_term_Pa, b->u_long_term_Pa, 0);
}

/* Numbers come back to the same bits. */
static void it_comes_back_without_loss(void **state)
{
    (void)state;
    an_material material, again;
    an_error err = {0};
    make(&material);
    write(&material);
    if (read_again(&again, &err) < 0)
        fail_msg("%s: %s", err.place, err.text);
    same_modes(&material, &again);
    assert_int_equal(again.law.kind, AN_LAW_WLF);
    assert_memory_equal(again.law.constant, material.law.constant, 2 * sizeof(double));
    assert_memory_equal(again.law.covariance, material.law.covariance, 4 * sizeof(double));
    assert_close(again.law.valid_to_K, 313.2, 0);
    assert_close(again.window_time_s[1], 1.0 / 3, 0);
    assert_close(again.u_common_relative, 0.012, 0);
    assert_close(again.u_temperature_bias_K, 0.3, 0);
    assert_true(isnan(again.strain_limit));
    assert_int_equal(again.n_scaling, 2);
    assert_close(again.scaling_log10_bT[1], -0.013, 0);
    assert_string_equal(again.id, "LQ-RP-0412");
    assert_string_equal(again.specimen.lot, "0412");
    assert_string_equal(again.end_state, "solid");
    assert_string_equal(again.vertical, "free");
    an_material_clear(&material);
    an_material_clear(&again);
}

/* What must be refused, each fault with its place and name. */
static void refused(an_material *material, const char *first, const char *second)
{
    an_material again;
    an_error err = {0};
    write(material);
    assert_int_equal(read_again(&again, &err), AN_E_VALUE);
    if (!strstr(err.text, first) || !strstr(err.text, second) || !strstr(err.place, place))
        fail_msg("'%s' '%s' does not hold '%s' and '%s'", err.place, err.text, first, second);
    an_material_clear(&again);
    an_material_clear(material);
}

static void every_fault_is_named(void **state)
{
    (void)state;
    an_material material;
    make(&material);
    material.modes.modulus_Pa[1] = -2e5;
    material.modes.time_s[2] = 1e-5;
    refused(&material, "mode 2: modulus -200000 Pa", "mode 3: relaxation time 1e-05 s");
    make(&material);
    material.modes.equilibrium_Pa = 0;
    refused(&material, "sum of weights 1 of a solid", "long-term modulus 0 Pa of a solid");
    make(&material);
    strcpy(material.end_state, "liquid");
    refused(&material, "long-term modulus 4e+06 Pa of a liquid", "");
    make(&material);
    strcpy(material.simplicity, "complex");
    refused(&material, "nobody has overridden", "");
    make(&material);
    material.law.reference_temperature_K = 270;
    material.window_time_s[1] = 1e-6;
    refused(&material, "270 K is not that of the times, 263.15 K", "trusted times");
}

/* The long-term modulus entered where the instantaneous one is expected: a usual mistake of handing over. */
static void moduli_must_add_up(void **state)
{
    (void)state;
    an_material material;
    an_error err = {0};
    make(&material);
    material.instantaneous_Pa = 4e6;
    assert_int_equal(an_material_check(&material, &err), AN_E_VALUE);
    assert_non_null(
        strstr(err.text, "instantaneous modulus 4e+06 Pa is not long-term modulus plus modes, 6.4e+07 Pa"));
    assert_non_null(strstr(err.text, "sum of weights 15"));
    an_material_clear(&material);
}

/* A covariance that does not hold what its modes need is refused before room for it is claimed. */
static void a_short_covariance_is_refused(void **state)
{
    (void)state;
    an_material material, again;
    an_error err = {0};
    make(&material);
    write(&material);
    an_material_clear(&material);
    assert_int_equal(
        system("sed -i 's|<covariance unit=\"Pa2\">[^<]*|<covariance unit=\"Pa2\">1 2 3|' test_material.xml"),
        0);
    assert_int_equal(read_again(&again, &err), AN_E_VALUE);
    assert_non_null(strstr(err.text, "fewer numbers than the 16 that 3 modes need"));
    an_material_clear(&again);
}

static const char by_hand[] =
    "<?xml version='1.0'?>\n"
    "<material xmlns='urn:x-anelast:documents:1' version='1.0' id='by-hand'>\n"
    "<specimen/>\n"
    "<spectrum basis='G' end_state='solid'><reference_temperature value='20' unit='Cel'/>\n"
    "<instantaneous_modulus value='471' unit='MPa'/><long_term_modulus value='117.75' unit='MPa'/>\n"
    "<mode><relaxation_time value='2' unit='min'/><relative_weight value='75' unit='%'/></mode></spectrum>\n"
    "<elastic_scaling kind='none'/>\n"
    "<valid><time_from value='1' unit='s'/><time_to value='1' unit='h'/>\n"
    "<temperature_from value='0' unit='Cel'/><temperature_to value='50' unit='Cel'/></valid>\n"
    "<superposition verdict='simple'/></material>\n";

/* Somebody types a series from the literature: weights only, units of their own, no maker. */
static void a_series_typed_by_hand_is_read(void **state)
{
    (void)state;
    an_material material;
    an_error err = {0};
    FILE *stream = fopen(place, "w");
    assert_non_null(stream);
    fputs(by_hand, stream);
    fclose(stream);
    if (read_again(&material, &err) < 0)
        fail_msg("%s: %s", err.place, err.text);
    assert_int_equal(material.is_shear, 1);
    assert_relative(material.modes.modulus_Pa[0], 0.75 * 471e6, 1e-12);
    assert_relative(material.modes.time_s[0], 120, 1e-12);
    assert_relative(material.reference_temperature_K, 293.15, 1e-12);
    assert_null(material.u_modulus_Pa);
    assert_int_equal(material.trusted[0], 1);
    assert_int_equal(material.law.kind, AN_LAW_NONE);
    an_material_clear(&material);
}

static bool has_caution(const an_material *material, const char *words)
{
    char text[AN_CAUTION_SIZE];
    for (int i = 0; an_material_caution(material, i, text); i++)
        if (strstr(text, words))
            return true;
    return false;
}

static void cautions_follow_the_material(void **state)
{
    (void)state;
    an_material material;
    make(&material);
    assert_true(has_caution(&material, "instantaneous modulus 6.4e+07 Pa"));
    assert_true(has_caution(&material, "tension moduli E"));
    assert_int_equal(has_caution(&material, "left after the slow end of the trusted window"), material.long_term_Pa > 0);
    assert_true(has_caution(&material, "strain amplitude of the measurement is not known"));
    assert_false(has_caution(&material, "does NOT apply"));
    assert_false(has_caution(&material, "solid or a liquid"));
    strcpy(material.simplicity, "complex");
    strcpy(material.override_reason, "K. Adeyemi: at 20 degC only");
    strcpy(material.end_state, "undetermined");
    material.strain_limit = 0.002;
    assert_true(has_caution(&material, "does NOT apply and was overridden: K. Adeyemi"));
    assert_true(has_caution(&material, "solid or a liquid"));
    assert_true(has_caution(&material, "strain amplitude of 0.002"));
    an_material_clear(&material);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(it_comes_back_without_loss),
        cmocka_unit_test(every_fault_is_named),
        cmocka_unit_test(moduli_must_add_up),
        cmocka_unit_test(a_short_covariance_is_refused),
        cmocka_unit_test(a_series_typed_by_hand_is_read),
        cmocka_unit_test(cautions_follow_the_material),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
