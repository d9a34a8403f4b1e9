/* One burst to one point: the order of the steps. Stage: phase and correct. Samples, search, clipping, fit,
 * ladder, geometry, budget, quality; a step that the data do not allow ends in a skipped point with its
 * reason.
 */
#include "reducer.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* The greatest of some hundred bins of white noise is about 3 times their median (Rayleigh distribution). */
static const double LEAST_PROMINENCE = 5;

an_reducer *an_reducer_new(const an_procedure *procedure)
{
    an_reducer *reducer = calloc(1, sizeof *reducer);
    if (!reducer)
        return NULL;
    reducer->search = an_search_new();
    if (!reducer->search) {
        free(reducer);
        return NULL;
    }
    an_limits_read(&reducer->limits, procedure);
    return reducer;
}

void an_reducer_free(an_reducer **reducer)
{
    if (!*reducer)
        return;
    an_search_free(&(*reducer)->search);
    free((*reducer)->array);
    free((*reducer)->use);
    an_twins_clear(&(*reducer)->twins);
    free(*reducer);
    *reducer = NULL;
}

/* A failure of the data becomes a skipped point, one of the machine goes up. */
static an_status skip(an_point *point, const char *code, const an_error *why, an_error *err)
{
    if (why->status == AN_E_MEMORY) {
        if (err)
            *err = *why;
        return AN_E_MEMORY;
    }
    return an_remark_list_add(&point->remarks, code, point->burst, err, "%s", why->text);
}

/* The burst's own times: rounded readings of a uniform clock become that clock. */
static void take_time(an_reduction *r)
{
    an_samples *s = &r->samples;
    if (r->burst->has_time && !s->n_missing)
        an_time_straighten(s->n, s->time,
                           0.51 * fabs(r->burst->time.scale) /
                               (r->burst->time.divisor > 0 ? r->burst->time.divisor : 1));
    an_timing_assess(s->n, s->time, &r->timing);
    r->waveform = (an_waveform){.n = s->n,
                                .time_s = s->time,
                                .y = {s->y[AN_DISPLACEMENT], s->y[AN_FORCE]},
                                .use = s->use,
                                .resolution = {s->resolution[AN_DISPLACEMENT], s->resolution[AN_FORCE]}};
}

/* Excitation search and clipping. */
static an_status search_burst(an_reducer *reducer, an_reduction *r, an_error *err)
{
    an_samples *s = &r->samples;
    AN_TRY(an_search_peak(reducer->search, s->n, s->time, s->y[AN_DISPLACEMENT], &r->searched_Hz,
                          &r->prominence, err));
    if (r->prominence < LEAST_PROMINENCE)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "no sine stands above the noise in displacement (%.1f times the median of its "
                       "spectrum)",
                       r->prominence);
    an_clip_find(&r->waveform, r->searched_Hz, (const double(*)[2])s->range, s->use, &r->clipping);
    return AN_OK;
}

/* Start-up and fit; once more where the first shows which samples the end of the range may have kept. */
static an_status fit_burst(an_reduction *r, an_error *err)
{
    an_samples *s = &r->samples;
    an_sinefit_choice choice = r->limits->fit;
    choice.frequency_Hz = r->searched_Hz;
    AN_TRY(an_startup_fit(&r->waveform, &choice, &r->limits->startup, &r->startup, &r->fit, s->residual, err));
    if (!an_clip_guard(&r->waveform, r->startup.first_sample, &r->clipping, r->fit.deviation, s->residual, s->use))
        return AN_OK;
    return an_startup_fit(&r->waveform, &choice, &r->limits->startup, &r->startup, &r->fit, s->residual, err);
}

/* Mean, noise and rate of the temperature over the samples kept, its calibrated bias taken off. */
static void take_temperature(an_reduction *r)
{
    const an_samples *s = &r->samples;
    an_point *p = r->point;
    int first = r->startup.first_sample, n = s->n - first;
    double middle = 0, mean = 0, product = 0, norm = 0, square = 0;
    if (!s->temperature)
        return;
    for (int i = first; i < s->n;
         i++) { /* from the first reading on, so that a frozen channel has exactly no slope */
        middle += s->time[i] / n;
        mean += (s->temperature[i] - s->temperature[first]) / n;
    }
    mean += s->temperature[first];
    for (int i = first; i < s->n; i++) {
        product += (s->time[i] - middle) * (s->temperature[i] - mean);
        norm += (s->time[i] - middle) * (s->time[i] - middle);
    }
    p->temperature_rate_K_s = product / norm;
    for (int i = first; i < s->n; i++) {
        double d = s->temperature[i] - mean - p->temperature_rate_K_s * (s->time[i] - middle);
        square += d * d;
    }
    /* One reading's rounding stays where the channel stood still: its errors are then all the same. */
    double q = s->temperature_resolution, scatter = square / (n - 2);
    double still = q > 0 ? q * q / 12 * exp(-4 * M_PI * M_PI * scatter / (q * q)) : 0;
    p->temperature_K = mean - r->chain.apparatus.temperature_bias.value;
    p->u_temperature_K = sqrt(scatter / n + still);
}

static void put_complex(double out[2], double complex value)
{
    out[0] = creal(value);
    out[1] = cimag(value);
}

static void fill_fit(an_reduction *r)
{
    an_point *p = r->point;
    const an_sinefit *f = &r->fit;
    p->frequency_Hz = f->frequency_Hz;
    p->u_frequency_Hz = f->u_frequency_Hz;
    p->n_sample = f->n_used;
    p->n_cycle = r->startup.n_kept;
    p->n_cycle_dropped = r->startup.n_dropped;
    p->displacement_m = cabs(f->amplitude[AN_DISPLACEMENT][0]);
    p->force_N = cabs(f->amplitude[AN_FORCE][0]);
    p->static_force_N = f->mean[AN_FORCE];
    put_complex(p->measured_stiffness, f->stiffness);
    take_temperature(r);
}

/* Ladder and geometry, with the size of every rung. */
static an_status fill_modulus(an_reduction *r, an_error *err)
{
    an_point *p = r->point;
    r->chain.frequency_Hz = r->fit.frequency_Hz;
    r->chain.temperature_K = p->temperature_K;
    AN_TRY(an_chain_run(&r->chain, r->fit.stiffness, &r->result, err));
    const an_rungs *k = &r->result.rungs;
    put_complex(p->rung[AN_RUNG_CHANNEL], (k->channel - r->fit.stiffness) / cabs(r->fit.stiffness));
    put_complex(p->rung[AN_RUNG_PARALLEL], (k->parallel - k->channel) / cabs(k->channel));
    put_complex(p->rung[AN_RUNG_SERIES], (k->series - k->parallel) / cabs(k->parallel));
    put_complex(p->rung[AN_RUNG_END], (r->result.plain - k->series) / cabs(k->series));
    put_complex(p->specimen_stiffness, k->series);
    p->stiffness_compliance = r->result.ratio;
    p->storage_Pa = creal(r->result.modulus);
    p->loss_Pa = cimag(r->result.modulus);
    an_geometry at = an_geometry_at(&r->chain.geometry, p->temperature_K);
    double per_metre = an_geometry_strain(&at);
    p->strain = p->displacement_m * cabs(k->parallel / k->series) * per_metre;
    p->static_strain = r->fit.mean[AN_DISPLACEMENT] * per_metre;
    int draws = r->result.ratio > r->limits->compliance_draws;
    AN_TRY(an_budget_noise(&r->chain, r->fit.stiffness, r->fit.stiffness_noise, draws, p->noise, err));
    return an_budget_common(&r->chain, r->fit.stiffness, p->common, err);
}

/* What the apparatus and specimen would make of a higher harmonic of the drive: the specimen stiffens along
 * the power law that its loss angle tells (local Kramers-Kronig, [BT82]), the ladder is put on again at that
 * frequency. */
static double complex drive_stiffness(const an_reduction *r, int harmonic)
{
    an_ladder ladder;
    double complex k = r->result.rungs.series;
    double slope = carg(k) / (M_PI / 2);
    an_ladder_set(&ladder, &r->chain.apparatus, harmonic * r->fit.frequency_Hz, r->chain.temperature_K);
    return an_ladder_build(&ladder, k * pow(harmonic, fmin(fmax(slope, 0), 1)));
}

static an_status fill_quality(an_reduction *r, an_error *err)
{
    double complex drive[2] = {drive_stiffness(r, 2), drive_stiffness(r, 3)};
    AN_TRY(an_quality_assess(&r->waveform, r->startup.first_sample, &r->fit, r->samples.residual, drive,
                             &r->quality, err));
    r->point->snr_dB = fmin(r->quality.snr_dB[AN_DISPLACEMENT], r->quality.snr_dB[AN_FORCE]);
    r->point->harmonic[0] = r->quality.harmonic[0];
    r->point->harmonic[1] = r->quality.harmonic[1];
    return AN_OK;
}

/* From the samples to the judged point. */
static an_status reduce(an_reducer *reducer, an_reduction *r, an_error *err)
{
    an_error why = {0};
    an_point *p = r->point;
    if (an_samples_take(reducer, r->burst, &r->samples, &why) < 0)
        return skip(p, "fit-failed", &why, err);
    if (r->samples.n >= 2) {
        take_time(r);
        p->start_s = r->samples.time[0];
        take_temperature(r); /* of the whole burst, for one that comes no further */
    }
    AN_TRY(an_twins_judge(&reducer->twins, r, err));
    AN_TRY(an_judge_record(r, err));
    if (an_remark_list_worst(&p->remarks, -1) >= (int)AN_SKIP)
        return AN_OK;
    if (search_burst(reducer, r, &why) < 0)
        return skip(p, why.status == AN_E_SCIENCE ? "no-signal" : "fit-failed", &why, err);
    AN_TRY(an_judge_clipping(r, err));
    if (fit_burst(r, &why) < 0)
        return skip(p, why.status == AN_E_SCIENCE ? "no-signal" : "fit-failed", &why, err);
    fill_fit(r);
    if (fill_modulus(r, &why) < 0 || fill_quality(r, &why) < 0)
        return skip(p, "fit-failed", &why, err);
    return an_judge_burst(r, err);
}

an_status an_burst_reduce(an_reducer *reducer, const an_specimen *specimen, const an_apparatus *apparatus,
                          const an_burst *burst, an_point *point, an_error *err)
{
    an_reduction r = {.burst = burst, .limits = &reducer->limits, .point = point};
    r.chain.geometry = specimen->geometry;
    r.chain.apparatus = *apparatus;
    point->burst = burst->n;
    point->step = burst->step;
    point->set_temperature_K = burst->set_temperature_K;
    point->set_frequency_Hz = burst->set_frequency_Hz;
    for (size_t i = 0; i < burst->remarks.n; i++) {
        const an_remark *row = &burst->remarks.rows[i];
        AN_TRY(an_remark_list_add_as(&point->remarks, row->kind->code, row->severity, burst->n, err, "%s",
                                     row->text));
    }
    if (burst->kind != AN_BURST_OSCILLATION)
        AN_TRY(an_remark_list_add(&point->remarks, "not-oscillation", burst->n, err,
                                  "a %s, not an oscillation",
                                  burst->kind == AN_BURST_HOLD ? "hold" : "pull"));
    else
        AN_TRY(reduce(reducer, &r, err));
    an_point_settle(point);
    return AN_OK;
}
