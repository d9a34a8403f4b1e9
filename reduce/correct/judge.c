/* What a burst's numbers mean: thresholds of the procedure turned into remarks. Stage: phase and correct.
 * Every row of the thresholds stands with its source in the table of choices; every code with its action in
 * the table of remarks.
 */
#include "reducer.h"

#include <math.h>

/* Add a remark to the reduction's point, with the table's severity; hands back a refusal of memory. */
#define REMARK(r, code, ...)                                                                                 \
    AN_TRY(an_remark_list_add(&(r)->point->remarks, code, (r)->burst->n, err, __VA_ARGS__))
#define REMARK_AS(r, code, severity, ...)                                                                    \
    AN_TRY(an_remark_list_add_as(&(r)->point->remarks, code, severity, (r)->burst->n, err, __VA_ARGS__))

static const char *const CHANNEL[AN_CHANNELS] = {"displacement", "force"};

/* Unit of a channel's amplitude. */
static const char *unit_of(const an_reduction *r, int channel)
{
    an_signal_quantity quantity =
        channel == AN_FORCE ? r->burst->force.quantity : r->burst->displacement.quantity;
    return an_signal_quantity_unit(quantity);
}

void an_limits_read(an_limits *l, const an_procedure *p)
{
    an_sinefit_choice_init(&l->fit);
    l->fit.drift_degree = (int)an_procedure_number(p, "drift_degree");
    l->fit.n_harmonic = (int)an_procedure_number(p, "harmonics");
    l->fit.n_decay = (int)an_procedure_number(p, "decay_terms");
    an_startup_choice_init(&l->startup);
    l->startup.agree_stiffness = an_procedure_number(p, "settled_ratio");
    l->startup.agree_phase = an_procedure_number(p, "settled_angle");
    l->startup.least_cycles = (int)an_procedure_number(p, "cycles_least");
    l->missing_most = an_procedure_number(p, "missing_skip");
    l->snr_flag = an_procedure_number(p, "snr_flag");
    l->snr_skip = an_procedure_number(p, "snr_skip");
    l->correction_flag = an_procedure_number(p, "correction_flag");
    l->clipped_least = (int)an_procedure_number(p, "clipped_least");
    l->clipped_most = an_procedure_number(p, "clipped_skip");
    l->samples_flag = an_procedure_number(p, "samples_least");
    l->steps_flag = an_procedure_number(p, "counts_least");
    l->third_note = an_procedure_number(p, "third_harmonic_note");
    l->third_flag = an_procedure_number(p, "third_harmonic_flag");
    l->second_flag = an_procedure_number(p, "second_harmonic_flag");
    l->mains_flag = pow(10, an_procedure_number(p, "mains_flag") / 20); /* dB of an amplitude */
    l->frequency_flag = an_procedure_number(p, "frequency_flag");
    l->frequency_skip = an_procedure_number(p, "frequency_halt");
    l->jitter_flag = an_procedure_number(p, "jitter_flag");
    l->compliance_flag = an_procedure_number(p, "compliance_flag");
    l->compliance_refuse = an_procedure_number(p, "compliance_refuse");
    l->compliance_draws = an_procedure_number(p, "compliance_sampling");
    l->dimension_u = an_procedure_number(p, "dimension_uncertainty");
    l->frozen_s = an_procedure_number(p, "temperature_frozen");
    l->modulus_least = an_procedure_number(p, "modulus_least");
    l->modulus_most = an_procedure_number(p, "modulus_most");
    l->strain_flag = an_procedure_number(p, "strain_flag");
    l->strain_most = an_procedure_number(p, "strain_most");
}

/* A channel that shows one value throughout was not connected, or not moved. */
static an_status judge_still(an_reduction *r, an_error *err)
{
    for (int c = 0; c < AN_CHANNELS; c++) {
        const double *y = r->samples.y[c];
        int i = 1;
        while (i < r->samples.n && y[i] == y[0])
            i++;
        if (i == r->samples.n)
            REMARK(r, "no-signal", "%s stands at %.4g %s in all %d samples", CHANNEL[c], y[0], unit_of(r, c),
                   i);
    }
    return AN_OK;
}

an_status an_judge_record(an_reduction *r, an_error *err)
{
    const an_samples *s = &r->samples;
    int total = s->n + s->n_missing;
    if (s->n_missing > 0) {
        an_severity weight = s->n_missing > r->limits->missing_most * total ? AN_SKIP : AN_NOTE;
        REMARK_AS(r, "missing-values", weight, "%d of %d samples are marked or not finite", s->n_missing,
                  total);
    }
    if (s->n < 2)
        REMARK(r, "empty-burst", "%d sample%s", s->n, s->n == 1 ? "" : "s");
    else if (r->timing.n_backward)
        REMARK_AS(r, "clock-jump", AN_SKIP, "time steps back or stands still %d times", r->timing.n_backward);
    else if (r->timing.n_gap && !s->n_missing)
        REMARK(r, "clock-jitter", "%d gaps are longer than 1.5 sampling intervals", r->timing.n_gap);
    else if (r->timing.jitter > r->limits->jitter_flag && !s->n_missing)
        REMARK(r, "clock-jitter", "sampling times scatter by %.2g %% of the interval, limit %.2g %%",
               100 * r->timing.jitter, 100 * r->limits->jitter_flag);
    return s->n < 2 ? AN_OK : judge_still(r, err);
}

an_status an_judge_clipping(an_reduction *r, an_error *err)
{
    for (int c = 0; c < AN_CHANNELS; c++) {
        int clipped = r->clipping.n_end[c];
        if (clipped > r->limits->clipped_most * r->samples.n)
            REMARK_AS(r, "clipping", AN_SKIP, "%s stands at the end of its range for %d of %d samples, more than %.0f %%",
                      CHANNEL[c], clipped, r->samples.n, 100 * r->limits->clipped_most);
        else if (r->clipping.n_run[c] >= r->limits->clipped_least)
            REMARK(r, "clipping",
                   "%s stands at the end of its range for %d samples, up to %d in a row; they were left out of the fit",
                   CHANNEL[c], clipped, r->clipping.n_run[c]);
        else if (clipped)
            REMARK_AS(r, "clipping", AN_NOTE,
                      "%s: %d single samples at the converter's end were left out of the fit", CHANNEL[c],
                      clipped);
    }
    return AN_OK;
}

/* Frozen samples, repeated blocks. */
static an_status judge_samples(an_reduction *r, an_error *err)
{
    for (int c = 0; c < AN_CHANNELS; c++) {
        if (r->quality.n_frozen[c])
            REMARK(r, "frozen-samples", "%s stands still for %d samples", CHANNEL[c], r->quality.n_frozen[c]);
    }
    if (r->quality.n_repeated)
        REMARK(r, "repeated-block", "%d samples repeat an earlier block bit for bit", r->quality.n_repeated);
    return AN_OK;
}

static an_status judge_signal(an_reduction *r, an_error *err)
{
    const an_limits *l = r->limits;
    for (int c = 0; c < AN_CHANNELS; c++) {
        double snr = r->quality.snr_dB[c];
        if (snr < l->snr_flag)
            REMARK_AS(r, "low-snr", snr < l->snr_skip ? AN_SKIP : AN_FLAG,
                      "%s stands %.1f dB above its noise, at least %.0f dB wanted", CHANNEL[c], snr,
                      l->snr_flag);
        if (r->quality.steps[c] < l->steps_flag)
            REMARK(r, "coarse-counts",
                   "the amplitude of %s is %.1f steps of its converter, at least %.0f wanted", CHANNEL[c],
                   r->quality.steps[c], l->steps_flag);
    }
    if (r->quality.mains_ratio > l->mains_flag)
        REMARK(r, "mains", "%.0f Hz stands in the force at %.0f dB of its amplitude", r->quality.mains_Hz,
               20 * log10(r->quality.mains_ratio));
    return AN_OK;
}

/* Harmonics beyond their own noise; reversal of the force, which even harmonics tell from a tared sensor. */
static an_status judge_linearity(an_reduction *r, an_error *err)
{
    const an_limits *l = r->limits;
    const an_quality *q = &r->quality;
    double second = q->harmonic[0], third = q->harmonic[1], sure = 3 * q->u_harmonic;
    int slack = second - sure > l->second_flag;
    if (third - sure > l->third_flag)
        REMARK(r, "nonlinear", "the third harmonic of force is %.2f %% of the first, limit %.2f %%",
               100 * third, 100 * l->third_flag);
    else if (third - sure > l->third_note)
        REMARK(r, "third-harmonic", "the third harmonic of force is %.2f %% of the first", 100 * third);
    if (slack)
        REMARK(r, "even-harmonics", "the second harmonic of force is %.2f %% of the first, limit %.2f %%",
               100 * second, 100 * l->second_flag);
    if (!q->n_cycle_reversed || an_geometry_is_shear(r->chain.geometry.kind) ||
        r->chain.geometry.kind == AN_COMPRESSION_BONDED)
        return AN_OK;
    if (slack)
        REMARK(r, "slack",
               "force changes sign in %d of %d cycles, and its second harmonic is %.2f %% of the first",
               q->n_cycle_reversed, q->n_cycle, 100 * second);
    else
        REMARK(r, "preload-sign", "force changes sign in %d of %d cycles (mean %.3g N, amplitude %.3g N)",
               q->n_cycle_reversed, q->n_cycle, r->fit.mean[AN_FORCE], r->point->force_N);
    return AN_OK;
}

static an_status judge_frequency(an_reduction *r, an_error *err)
{
    double set = r->burst->set_frequency_Hz, off = fabs(r->fit.frequency_Hz / set - 1);
    if (!r->startup.settled)
        REMARK(r, "not-settled",
               "no two successive cycles agree, or the start-up still shows beside the sine");
    if (r->startup.n_kept < r->limits->startup.least_cycles - 0.02)
        REMARK(r, "few-cycles", "%.1f cycles, at least %d wanted", r->startup.n_kept,
               r->limits->startup.least_cycles);
    if (r->fit.n_used < r->limits->samples_flag * r->fit.n_cycle)
        REMARK(r, "few-samples", "%.1f samples in a cycle, at least %.0f wanted",
               r->fit.n_used / r->fit.n_cycle, r->limits->samples_flag);
    if (off > r->limits->frequency_skip)
        REMARK(r, "frequency-wrong", "found %.6g Hz, set %.6g Hz, more than %.3g %% apart",
               r->fit.frequency_Hz, set, 100 * r->limits->frequency_skip);
    else if (off > r->limits->frequency_flag)
        REMARK(r, "frequency-off", "found %.6g Hz, set %.6g Hz; the found one was used", r->fit.frequency_Hz,
               set);
    return AN_OK;
}

/* Standard uncertainty of E'', noise and common together. */
static double u_loss(const an_point *p)
{
    double common[3];
    an_point_common(p, common);
    return sqrt(p->noise[2] + common[2]);
}

static an_status judge_modulus(an_reduction *r, an_error *err)
{
    const an_limits *l = r->limits;
    const an_point *p = r->point;
    double frame =
        p->stiffness_compliance * cabs(r->result.rungs.parallel / r->result.rungs.series); /* |K2| |C| */
    if (frame >= 1)
        REMARK(r, "lower-bound",
               "the stiffness measured is %.2f times what the frame alone allows; check units and compliance",
               frame);
    else if (p->stiffness_compliance > l->compliance_refuse)
        REMARK(r, "lower-bound", "K_s C is %.2f, above %.2f: the frame moves more than the specimen",
               p->stiffness_compliance, l->compliance_refuse);
    else if (p->stiffness_compliance > l->compliance_flag)
        REMARK(r, "stiffness-compliance-large", "K_s C is %.2f, above %.2f", p->stiffness_compliance,
               l->compliance_flag);
    if (!(p->storage_Pa > 0) && frame < 1)
        REMARK_AS(r, "channel-inverted", AN_SKIP,
                  "E' is %.3g Pa: an inverted channel, or a moving mass that is not the bench's",
                  p->storage_Pa);
    else if (p->loss_Pa < -3 * u_loss(p))
        REMARK(r, "negative-loss", "E'' is %.3g Pa, %.1f standard uncertainties below zero", p->loss_Pa,
               -p->loss_Pa / u_loss(p));
    else if (p->loss_Pa < 0)
        REMARK_AS(r, "negative-loss", AN_FLAG, "E'' is %.3g Pa, zero within its uncertainty", p->loss_Pa);
    for (int i = 0; i < AN_RUNG_COUNT; i++)
        if (hypot(p->rung[i][0], p->rung[i][1]) > l->correction_flag)
            REMARK(r, "correction-large", "the correction for %s changes the stiffness by %.0f %%",
                   an_rung_phrase((an_rung)i), 100 * hypot(p->rung[i][0], p->rung[i][1]));
    if (p->strain > l->strain_flag)
        REMARK(r, "strain-large", "the strain amplitude is %.3g %%, above %.3g %%", 100 * p->strain,
               100 * l->strain_flag);
    if (isnan(p->temperature_K))
        REMARK(r, "temperature-missing", "no temperature channel; the set temperature is no substitute");
    return AN_OK;
}

an_status an_judge_burst(an_reduction *r, an_error *err)
{
    for (int c = 0; c < AN_CHANNELS; c++) {
        double amplitude = cabs(r->fit.amplitude[c][0]);
        if (amplitude < 6 * r->fit.u_amplitude[c])
            REMARK(r, "no-signal", "the sine in %s, %.3g %s, does not stand above its noise, %.3g %s",
                   CHANNEL[c], amplitude, unit_of(r, c), r->fit.u_amplitude[c], unit_of(r, c));
    }
    AN_TRY(judge_samples(r, err));
    AN_TRY(judge_signal(r, err));
    AN_TRY(judge_linearity(r, err));
    AN_TRY(judge_frequency(r, err));
    return judge_modulus(r, err);
}

void an_point_settle(an_point *point)
{
    int worst = an_remark_list_worst(&point->remarks, -1);
    if (worst == (int)AN_SKIP || worst == (int)AN_HALT)
        point->state = AN_POINT_SKIPPED;
    else if (worst >= (int)AN_FLAG)
        point->state = AN_POINT_FLAGGED;
    else
        point->state = AN_POINT_USED;
    if (an_remark_list_count(&point->remarks, AN_SKIP, -1))
        point->state = AN_POINT_SKIPPED; /* also below a hold */
}
