/* From a master to a material. Stage: spectrum, at its end. Method: the points on the master curve become
 * observations of one spectrum, which is fitted densely with regularisation and then followed by the fewest
 * modes (spectrum.h); the covariance of these at fixed times comes from the observations. Range: as the
 * window says; nothing is extrapolated here. */
#include "anelast/handover.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "anelast/dense.h"
#include "anelast/spectrum.h"
#include "anelast/superpose.h"

/* Points of the master curve as observations, E' and E'' of a burst correlated as their noise says. */
typedef struct curve {
    an_observation *observation; /* [n] */
    size_t n;
    double omega_range[2]; /* rad/s, reduced, out to the last that know the modulus well */
} curve;

static void add_point(const an_master_point *point, curve *all)
{
    double u_storage = sqrt(point->noise[0]);
    double u_loss = sqrt(point->noise[2]);
    an_observation storage = {
        .kind = AN_RESPONSE_STORAGE, .at = point->reduced_omega, .value = point->storage_Pa, .u = u_storage};
    an_observation loss = {.kind = AN_RESPONSE_LOSS,
                           .at = point->reduced_omega,
                           .value = point->loss_Pa,
                           .u = u_loss,
                           .correlation = point->noise[1] / (u_storage * u_loss)};
    all->observation[all->n++] = storage;
    all->observation[all->n++] = loss;
}

static void widen(double range[2], double omega)
{
    range[0] = fmin(range[0], omega);
    range[1] = fmax(range[1], omega);
}

/* Points of an isotherm whose shift is not determined do not say where on the master curve they stand. */
static int stands_somewhere(const an_master *master, const an_master_point *point)
{
    int k = point->isotherm;
    return !point->outlier && (k < 0 || k >= master->n_shift || master->shift[k].determined);
}

static an_status gather(const an_master *master, curve *all, an_error *err)
{
    *all = (curve){.omega_range = {INFINITY, 0}};
    all->observation = calloc(2 * (size_t)master->n_point + 1, sizeof *all->observation);
    if (!all->observation)
        return an_fail_memory(err, "the observations of a spectrum");
    double widest[2] = {INFINITY, 0};
    for (int i = 0; i < master->n_point; i++) {
        const an_master_point *point = &master->point[i];
        if (!stands_somewhere(master, point))
            continue;
        add_point(point, all);
        widen(widest, point->reduced_omega);
        if (an_modulus_is_sure(point->storage_Pa, point->loss_Pa, point->noise))
            widen(all->omega_range, point->reduced_omega);
    }
    if (!(all->omega_range[0] < all->omega_range[1]))
        memcpy(all->omega_range, widest, sizeof widest);
    if (all->n == 0)
        return an_fail(
            err, AN_E_SCIENCE, "",
            "the master document holds no point that is not an outlier and whose shift is determined");
    return AN_OK;
}

static void copy_string(char *to, size_t size, const char *from)
{
    snprintf(to, size, "%s", from);
}

/* A complex material is refused unless somebody answers for it in writing. */
static an_status judge(const an_master *master, const an_procedure *procedure, const char *reason,
                       an_material *material, an_error *err)
{
    copy_string(material->simplicity, sizeof material->simplicity, an_simplicity_word(master->simplicity));
    if (master->simplicity != AN_COMPLEX)
        return AN_OK;
    if (reason && *reason)
        copy_string(material->override_reason, sizeof material->override_reason, reason);
    else if (an_procedure_is(procedure, "override_complex", "yes"))
        snprintf(material->override_reason, sizeof material->override_reason,
                 "override_complex in procedure %.180s", procedure->file[0] ? procedure->file : "in force");
    else
        return an_fail(
            err, AN_E_SCIENCE, "",
            "superposition does not apply (%s): no spectrum is handed over; whoever answers for one says so "
            "with --override or override_complex in the procedure",
            master->simplicity_reason);
    return an_remark_list_add(&material->remarks, "overridden", 0, err,
                              "the verdict complex was overridden: %s", material->override_reason);
}

/* What the master noticed. Where the procedure says what the data leave open, the remark says that too. */
static an_status copy_remarks(const an_master *master, const an_procedure *procedure, an_material *material,
                              an_error *err)
{
    bool said = !an_procedure_is(procedure, "long_term", "auto");
    for (size_t i = 0; i < master->remarks.n; i++) {
        const an_remark *remark = &master->remarks.rows[i];
        bool answered = said && strcmp(remark->kind->code, "end-undetermined") == 0;
        AN_TRY(an_remark_list_add_as(&material->remarks, remark->kind->code, remark->severity, remark->burst,
                                     err, "%s%s%s", remark->text, answered ? "; the procedure says: " : "",
                                     answered ? an_procedure_word(procedure, "long_term") : ""));
    }
    return AN_OK;
}

static void take_options(const an_master *master, const an_procedure *procedure, an_spectrum_options *options)
{
    an_spectrum_defaults(options);
    options->modes_per_decade = an_procedure_number(procedure, "modes_per_decade");
    options->error = an_procedure_number(procedure, "mode_error");
    options->end_state = master->end_state;
    if (an_procedure_is(procedure, "long_term", "solid"))
        options->end_state = AN_SOLID;
    else if (an_procedure_is(procedure, "long_term", "liquid"))
        options->end_state = AN_LIQUID;
}

/* (A^T A)^-1 of the whitened rows at the times of the modes, the long-term modulus last; NULL where the
 * points do not determine every strength. A liquid's long-term modulus is exact: its row and column stay
 * zero. */
static an_status find_covariance(const curve *all, an_material *material, an_error *err)
{
    size_t n_all = material->modes.n_mode + 1;
    int solid = material->modes.equilibrium_Pa > 0;
    size_t n = material->modes.n_mode + (solid ? 1 : 0);
    size_t n_row = all->n;
    double *pool = calloc(n_row * (n + 1) + 2 * n * n + n * n + 2 * n + n_all * n_all, sizeof *pool);
    an_status status = AN_OK;
    if (!pool)
        return an_fail_memory(err, "the covariance of the modes");
    an_columns rows = {.stride = n_row, .value = pool};
    double *information = pool + n_row * (n + 1);
    double *inverse = information + n * n;
    double *work = inverse + n * n;
    an_observation_set set = {all->observation, all->n, &material->modes, solid};
    AN_CLEAN(an_observation_rows(&set, &rows, err));
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            information[i * n + j] = an_dot(an_column(&rows, i), an_column(&rows, j), n_row);
    if (an_spd_invert(information, n, inverse, work) < 0)
        goto cleanup;
    material->covariance_Pa2 = calloc(n_all * n_all, sizeof *material->covariance_Pa2);
    if (!material->covariance_Pa2) {
        status = an_fail_memory(err, "the covariance of the modes");
        goto cleanup;
    }
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            material->covariance_Pa2[i * n_all + j] = inverse[i * n + j];
cleanup:
    free(pool);
    return status;
}

/* Relative distance of the modes from the points in the complex plane. */
static void find_errors(const an_master *master, an_material *material)
{
    double sum = 0;
    double worst = 0;
    size_t n = 0;
    for (int i = 0; i < master->n_point; i++) {
        const an_master_point *point = &master->point[i];
        if (point->outlier)
            continue;
        double complex fitted = an_maxwell_complex(&material->modes, point->reduced_omega);
        double complex measured = CMPLX(point->storage_Pa, point->loss_Pa);
        double error = cabs(fitted - measured) / cabs(measured);
        sum += error * error;
        worst = fmax(worst, error);
        n++;
    }
    material->fit_error = n > 0 ? sqrt(sum / (double)n) : NAN;
    material->fit_error_worst = n > 0 ? worst : NAN;
}

/* The common part as one relative scale: root mean square over points of what all sources together do to
 * ln|E*|. */
static void find_common(const an_master *master, an_material *material)
{
    double sum = 0;
    size_t n = 0;
    for (int i = 0; i < master->n_point; i++) {
        const an_master_point *point = &master->point[i];
        double square = point->storage_Pa * point->storage_Pa + point->loss_Pa * point->loss_Pa;
        if (point->outlier)
            continue;
        for (int s = 0; s < AN_SOURCE_COUNT; s++) {
            double change =
                (point->storage_Pa * point->common[s][0] + point->loss_Pa * point->common[s][1]) / square;
            sum += change * change;
        }
        n++;
    }
    material->u_common_relative = n > 0 ? sqrt(sum / (double)n) : NAN;
}

static an_status take_modes(const an_prony *prony, const double window_s[2], an_material *material,
                            an_error *err)
{
    size_t n = prony->model.n_mode;
    AN_TRY(an_maxwell_copy(&material->modes, &prony->model, err));
    material->trusted = calloc(n + 1, sizeof *material->trusted);
    material->u_modulus_Pa = calloc(n + 1, sizeof *material->u_modulus_Pa);
    if (!material->trusted || !material->u_modulus_Pa)
        return an_fail_memory(err, "the modes of a material");
    for (size_t i = 0; i < n; i++) {
        double tau = prony->model.time_s[i];
        material->trusted[i] = tau >= window_s[0] && tau <= window_s[1];
        material->u_modulus_Pa[i] = prony->u_modulus_Pa ? prony->u_modulus_Pa[i] : NAN;
    }
    material->u_long_term_Pa =
        prony->u_modulus_Pa && prony->model.equilibrium_Pa > 0 ? prony->u_modulus_Pa[n] : NAN;
    material->instantaneous_Pa = an_maxwell_instantaneous(&material->modes);
    material->long_term_Pa = material->modes.equilibrium_Pa;
    memcpy(material->window_time_s, window_s, sizeof material->window_time_s);
    return AN_OK;
}

/* The modes may have spent the last of a small equilibrium modulus: then nobody can say that it is a solid.
 * */
static void take_end_state(an_end_state end_state, an_material *material)
{
    if (end_state == AN_SOLID && !(material->long_term_Pa > 0))
        end_state = AN_UNDETERMINED;
    copy_string(material->end_state, sizeof material->end_state, an_end_state_word(end_state));
}

static an_status remark_modes(const an_prony *prony, const an_spectrum_options *options,
                              an_material *material, an_error *err)
{
    size_t n_outside = 0;
    for (size_t i = 0; i < material->modes.n_mode; i++)
        n_outside += !material->trusted[i];
    if (n_outside > 0)
        AN_TRY(an_remark_list_add(&material->remarks, "mode-untrusted", 0, err,
                                  "%zu of %zu modes lie outside the trusted window %.4g .. %.4g s", n_outside,
                                  material->modes.n_mode, material->window_time_s[0],
                                  material->window_time_s[1]));
    if (!prony->within)
        AN_TRY(an_remark_list_add(
            &material->remarks, "mode-error", 0, err,
            "%zu modes follow the dense spectrum within %.3g %%, where %.3g %% is asked for",
            material->modes.n_mode, 100 * prony->worst_error, 100 * options->error / 2));
    if (strcmp(material->end_state, "undetermined") == 0 &&
        !an_remark_list_has(&material->remarks, "end-undetermined", -1))
        AN_TRY(an_remark_list_add(&material->remarks, "end-undetermined", 0, err,
                                  "the data do not say whether it is a solid or a liquid"));
    return AN_OK;
}

static an_status fit_modes(const an_master *master, const an_spectrum_options *options, const curve *all,
                           an_material *material, an_error *err)
{
    an_spectrum dense;
    an_prony prony;
    double window_s[2];
    an_status status = AN_OK;
    an_spectrum_init(&dense);
    an_prony_init(&prony);
    AN_CLEAN(an_spectrum_dense(all->observation, all->n, options, &dense, err));
    AN_CLEAN(an_prony_fit(&dense.model, all->omega_range, options, &prony, err));
    AN_CLEAN(an_prony_uncertainty(all->observation, all->n, &prony, err));
    an_spectrum_window(all->omega_range, window_s);
    AN_CLEAN(take_modes(&prony, window_s, material, err));
    take_end_state(dense.end_state, material);
    AN_CLEAN(find_covariance(all, material, err));
    find_errors(master, material);
    find_common(master, material);
    AN_CLEAN(remark_modes(&prony, options, material, err));
    status = prony.within ? AN_OK : AN_DUBIOUS;
cleanup:
    an_spectrum_clear(&dense);
    an_prony_clear(&prony);
    return status;
}

static void take_law(const an_master *master, an_material *material)
{
    for (int i = 0; i < master->n_trial; i++)
        if (master->trial[i].chosen)
            material->law = master->trial[i].law;
}

static an_status take_shifts(const an_master *master, an_material *material, an_error *err)
{
    int n = master->n_shift;
    copy_string(material->vertical, sizeof material->vertical, an_vertical_word(master->vertical));
    material->window_temperature_K[0] = n > 0 ? master->shift[0].temperature_K : NAN;
    material->window_temperature_K[1] = n > 0 ? master->shift[n - 1].temperature_K : NAN;
    if (master->vertical == AN_VERTICAL_NONE)
        return AN_OK;
    material->scaling_temperature_K = calloc((size_t)n + 1, sizeof *material->scaling_temperature_K);
    material->scaling_log10_bT = calloc((size_t)n + 1, sizeof *material->scaling_log10_bT);
    if (!material->scaling_temperature_K || !material->scaling_log10_bT)
        return an_fail_memory(err, "the elastic scaling of a material");
    for (int i = 0; i < n; i++) {
        material->scaling_temperature_K[i] = master->shift[i].temperature_K;
        material->scaling_log10_bT[i] = master->shift[i].log10_bT;
    }
    material->n_scaling = n;
    return AN_OK;
}

an_status an_handover_make(const an_master *master, const an_procedure *procedure,
                           const char *override_reason, an_material *material, an_error *err)
{
    curve all = {0};
    an_spectrum_options options;
    an_status status = AN_OK;
    copy_string(material->id, sizeof material->id, master->id);
    material->specimen = master->specimen;
    material->is_shear = an_geometry_is_shear(master->specimen.geometry.kind);
    material->reference_temperature_K = master->reference_temperature_K;
    material->strain_limit = master->strain_most;
    material->u_temperature_bias_K = master->u_temperature_bias_K;
    AN_CLEAN(copy_remarks(master, procedure, material, err));
    AN_CLEAN(judge(master, procedure, override_reason, material, err));
    AN_CLEAN(gather(master, &all, err));
    take_options(master, procedure, &options);
    take_law(master, material);
    AN_CLEAN(take_shifts(master, material, err));
    AN_CLEAN(fit_modes(master, &options, &all, material, err));
    an_status checked = an_material_check(material, err);
    if (checked < 0)
        status = checked;
cleanup:
    free(all.observation);
    return status;
}
