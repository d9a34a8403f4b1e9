/* The master document, written in the form of schema/master.xsd. Stage: superpose. */
#include "anelast/fit_parts.h"
#include "anelast/master.h"

#include <math.h>

static void put_number(an_xml_writer *writer, const char *name, double value, const char *unit)
{
    an_xml_put_measure(writer, name, (an_measure){value, NAN}, unit);
}

static void put_flag(an_xml_writer *writer, const char *name, int value)
{
    an_xml_put(writer, name, value ? "true" : "false");
}

/* A logarithm with its total uncertainty and the two parts of it. */
static void put_log(an_xml_writer *writer, const char *name, const double value[4])
{
    an_xml_start(writer, name);
    an_xml_put_double(writer, "value", value[0]);
    an_xml_put(writer, "unit", "1");
    an_xml_put_double(writer, "u", value[1]);
    an_xml_put_double(writer, "u_noise", value[2]);
    an_xml_put_double(writer, "u_common", value[3]);
    an_xml_end(writer);
}

static void put_shift(an_xml_writer *writer, const an_shift *s)
{
    const double a[] = {s->log10_aT, s->u_log10_aT, s->u_noise_log10_aT, s->u_common_log10_aT};
    const double b[] = {s->log10_bT, s->u_log10_bT, s->u_noise_log10_bT, s->u_common_log10_bT};
    an_xml_start(writer, "shift");
    put_flag(writer, "determined", s->determined);
    an_xml_put_measure(writer, "temperature", (an_measure){s->temperature_K, s->u_temperature_K}, "K");
    put_log(writer, "log10_aT", a);
    put_log(writer, "log10_bT", b);
    an_xml_end(writer);
}

static void put_shifts(an_xml_writer *writer, const an_master *master)
{
    size_t n = 2 * (size_t)master->n_shift;
    an_xml_start(writer, "shifts");
    for (int i = 0; i < master->n_shift; i++)
        put_shift(writer, &master->shift[i]);
    if (master->covariance) {
        an_xml_start(writer, "covariance");
        an_numbers_write(writer, master->covariance, n * n);
        an_xml_end(writer);
    }
    an_xml_end(writer);
}

static void put_trials(an_xml_writer *writer, const an_master *master)
{
    for (int i = 0; i < master->n_trial; i++) {
        const an_law_trial *trial = &master->trial[i];
        bool stands = !trial->reason[0];
        an_xml_start(writer, "trial");
        an_xml_put(writer, "kind", an_law_kind_name(trial->law.kind));
        an_xml_put_integer(writer, "constants", trial->n_constant);
        put_flag(writer, "chosen", trial->chosen);
        an_xml_put(writer, "refused", stands ? NULL : trial->reason);
        if (isfinite(trial->chi_square))
            put_number(writer, "chi_square", trial->chi_square, "1");
        if (isfinite(trial->criterion))
            put_number(writer, "criterion", trial->criterion, "1");
        if (stands)
            an_law_write(writer, &trial->law);
        an_xml_end(writer);
    }
}

static void put_covariances(an_xml_writer *writer, const an_master_point *point)
{
    an_xml_start(writer, "noise");
    an_xml_put_double(writer, "storage_storage", point->noise[0]);
    an_xml_put_double(writer, "storage_loss", point->noise[1]);
    an_xml_put_double(writer, "loss_loss", point->noise[2]);
    an_xml_put(writer, "unit", "Pa2");
    an_xml_end(writer);
    for (int i = 0; i < AN_SOURCE_COUNT; i++) {
        if (point->common[i][0] == 0 && point->common[i][1] == 0)
            continue;
        an_xml_start(writer, "common");
        an_xml_put(writer, "source", an_source_word((an_source)i));
        an_xml_put_double(writer, "storage", point->common[i][0]);
        an_xml_put_double(writer, "loss", point->common[i][1]);
        an_xml_put(writer, "unit", "Pa");
        an_xml_end(writer);
    }
}

static void put_point(an_xml_writer *writer, const an_master_point *point)
{
    an_xml_start(writer, "point");
    an_xml_put_integer(writer, "isotherm", point->isotherm + 1);
    an_xml_put_integer(writer, "burst", point->burst);
    if (point->outlier)
        put_flag(writer, "outlier", 1);
    put_number(writer, "temperature", point->temperature_K, "K");
    put_number(writer, "frequency", point->frequency_Hz, "Hz");
    put_number(writer, "reduced_omega", point->reduced_omega, "rad/s");
    an_xml_put_measure(writer, "storage", (an_measure){point->storage_Pa, point->u_storage_Pa}, "Pa");
    an_xml_put_measure(writer, "loss", (an_measure){point->loss_Pa, point->u_loss_Pa}, "Pa");
    put_covariances(writer, point);
    if (isfinite(point->residual[0]) && isfinite(point->residual[1])) {
        an_xml_start(writer, "residual");
        an_xml_put_double(writer, "storage", point->residual[0]);
        an_xml_put_double(writer, "loss", point->residual[1]);
        an_xml_end(writer);
    }
    an_xml_end(writer);
}

static void put_verdict(an_xml_writer *writer, const an_master *master)
{
    an_xml_start(writer, "superposition");
    an_xml_put(writer, "verdict", an_simplicity_word(master->simplicity));
    an_xml_put(writer, "vertical", an_vertical_word(master->vertical));
    an_xml_put(writer, "reason", master->simplicity_reason);
    an_xml_put_integer(writer, "degrees_of_freedom", master->degrees_of_freedom);
    put_number(writer, "reference_temperature", master->reference_temperature_K, "K");
    put_number(writer, "chi_square", master->chi_square, "1");
    put_number(writer, "reduced_chi_square", master->reduced_chi_square, "1");
    put_number(writer, "separation", master->separation_rad, "rad");
    an_xml_end(writer);
}

static void put_spectrum(an_xml_writer *writer, const an_master *master)
{
    an_xml_start(writer, "spectrum");
    an_xml_put(writer, "end_state", an_end_state_word(master->end_state));
    an_maxwell_write(writer, &master->spectrum, NULL, NAN);
    put_number(writer, "window_from", master->window_s[0], "s");
    put_number(writer, "window_to", master->window_s[1], "s");
    an_xml_end(writer);
}

void an_master_write(an_xml_writer *writer, const an_master *master)
{
    an_xml_put(writer, "id", master->id);
    an_made_write(writer, &master->made);
    an_specimen_write(writer, &master->specimen);
    an_remark_list_write(writer, &master->remarks, -1);
    an_assessment_write(writer, &master->assessment);
    put_number(writer, "strain_most", master->strain_most, "1");
    if (master->u_temperature_bias_K > 0)
        put_number(writer, "temperature_uncertainty", master->u_temperature_bias_K, "K");
    put_verdict(writer, master);
    put_shifts(writer, master);
    put_trials(writer, master);
    for (int i = 0; i < master->n_point; i++)
        put_point(writer, &master->point[i]);
    put_spectrum(writer, master);
}
