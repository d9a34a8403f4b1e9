/* Columns to a burst. A row without a value in one of its channels leaves the burst, and is counted; the
 * burst then carries the times of those that stayed. Uniform times become a clock, which holds all that their
 * texts said (see clock.c); others stay as the dump printed them.
 */
#include "acquire/dump/burst_make.h"

#include "acquire/dump/clock.h"

#include <limits.h>
#include <math.h>
#include <stdlib.h>

double an_channel_si(const an_channel_in *in, size_t i)
{
    return an_unit_si(&in->conversion, an_column_value(&in->column, i) * in->size);
}

/* Gaps: counted, remarked upon, dropped. */
static an_status drop_gaps(an_rows *rows, an_burst *burst, an_error *err)
{
    if (rows->n_missing == 0)
        return AN_OK;
    bool too_many = (double)rows->n_missing > rows->source->missing_most * (double)rows->n;
    AN_TRY(an_remark_list_add_as(&burst->remarks, "missing-values", too_many ? AN_SKIP : AN_NOTE, burst->n,
                                 err, "%zu of %zu rows have a mark instead of a value%s", rows->n_missing,
                                 rows->n, too_many ? "" : "; they are left out"));
    for (int role = 0; role < AN_N_COLUMN_ROLES; role++)
        if (rows->in[role].channel)
            an_column_drop(&rows->in[role].column, rows->missing, rows->n_missing);
    return AN_OK;
}

/* The numbers that the rows had before gaps were dropped. */
static void kept_indices(const an_rows *rows, size_t *index)
{
    size_t i_missing = 0, kept = 0;
    for (size_t i = 0; i < rows->n; i++) {
        if (i_missing < rows->n_missing && rows->missing[i_missing] == i)
            i_missing++;
        else
            index[kept++] = i;
    }
}

/* A uniform clock with holes: sample numbers as integers, with the interval as their scale. */
static an_status clock_with_gaps(an_burst *burst, const size_t *index, size_t n, double start,
                                 double interval, an_error *err)
{
    AN_TRY(an_signal_allocate(&burst->time, AN_SIGNAL_TIME, AN_CODING_INT32, n, err));
    burst->time.scale = interval;
    burst->time.divisor = 1;
    burst->time.offset = start;
    for (size_t i = 0; i < n; i++)
        ((int32_t *)burst->time.data)[i] = (int32_t)index[i];
    burst->has_time = 1;
    burst->clock.count = (long)n;
    return AN_OK;
}

static an_status set_clock(const an_rows *rows, an_burst *burst, const size_t *index, size_t n, double start,
                           double interval, an_error *err)
{
    if (rows->n_missing > 0)
        return clock_with_gaps(burst, index, n, start, interval, err);
    burst->clock = (an_clock){.start = start, .interval = interval, .count = (long)n};
    return AN_OK;
}

double an_channel_tolerance(const an_channel_in *in, size_t i, double time_s)
{
    double place =
        an_column_place(&in->column, i) * in->size * in->conversion.factor / in->conversion.divisor;
    return fmax(0.5 * place, 4e-16 * (fabs(time_s) + 1e-9));
}

static an_status make_time_from_column(an_rows *rows, an_burst *burst, const size_t *index, an_error *err)
{
    const an_channel_in *in = &rows->in[AN_ROLE_TIME];
    size_t n = in->column.n;
    double *time = malloc(2 * n * sizeof *time), start, interval;
    if (!time)
        return an_fail_memory(err, "the times of a burst");
    double *tolerance = time + n;
    for (size_t i = 0; i < n; i++) {
        time[i] = an_channel_si(in, i);
        tolerance[i] = an_channel_tolerance(in, i, time[i]);
    }
    an_status status;
    if (an_clock_fit(time, tolerance, index, n, &start, &interval)) {
        status = set_clock(rows, burst, index, n, start, interval, err);
    } else {
        status = an_column_signal(&in->column, AN_SIGNAL_TIME, &in->conversion, in->size, &burst->time, err);
        burst->has_time = 1;
        burst->clock.count = (long)n;
        if (status >= 0 && n > 2)
            status = an_remark_list_add(&burst->remarks, "clock-jitter", burst->n, err,
                                        "the sampling times are uneven: no fixed interval fits them to their "
                                        "last digit; they are kept "
                                        "as they are");
    }
    free(time);
    return status;
}

/* Times that run backwards or stand still make a burst useless. */
static an_status check_time(an_rows *rows, an_burst *burst, an_error *err)
{
    const an_channel_in *in = &rows->in[AN_ROLE_TIME];
    if (!burst->has_time || !in->channel)
        return AN_OK;
    double before = -INFINITY;
    for (size_t i = 0; i < in->column.n; i++) {
        double time = an_channel_si(in, i);
        if (time < before)
            return an_remark_list_add_as(&burst->remarks, "clock-jump", AN_SKIP, burst->n, err,
                                         "the time goes back by %.6g s at sample %zu", before - time, i + 1);
        before = time;
    }
    return AN_OK;
}

static an_status make_time(an_rows *rows, an_burst *burst, size_t n, an_error *err)
{
    size_t *index = malloc((n ? n : 1) * sizeof *index);
    if (!index)
        return an_fail_memory(err, "the gaps of a burst");
    an_status status;
    kept_indices(rows, index);
    if (rows->in[AN_ROLE_TIME].channel) {
        status = make_time_from_column(rows, burst, index, err);
        if (status >= 0)
            status = check_time(rows, burst, err);
    } else {
        double interval = isnan(rows->facts.interval_s) ? 1 / rows->layout->rate_Hz : rows->facts.interval_s;
        double start = isnan(rows->facts.start_s) ? 0 : rows->facts.start_s;
        status = interval > 0 ? set_clock(rows, burst, index, n, start, interval, err)
                              : an_fail(err, AN_E_FORMAT, rows->source->path,
                                        "burst %d: neither a rate nor an interval is given", burst->n);
    }
    free(index);
    return status;
}

/* A set value that changes within a burst: what parts the bursts is not what the layout says. */
static an_status check_set(const an_channel_in *in, an_burst *burst, an_error *err)
{
    for (size_t i = 1; in->channel && i < in->column.n; i++)
        if (an_channel_si(in, i) != an_channel_si(in, 0))
            return an_remark_list_add_as(
                &burst->remarks, "burst-unclear", AN_SKIP, burst->n, err,
                "the set frequency changes within the burst, at sample %zu: the layout's step "
                "column does not part the bursts",
                i + 1);
    return AN_OK;
}

/* What the step columns and headers say of the burst. */
static void set_facts(an_rows *rows, an_burst *burst)
{
    static const an_role set_roles[] = {AN_ROLE_SET_FREQUENCY, AN_ROLE_SET_TEMPERATURE};
    for (int i = 0; i < 2; i++) {
        const an_channel_in *in = &rows->in[set_roles[i]];
        if (in->channel && in->column.n)
            an_burst_facts_set(&rows->facts, set_roles[i], an_channel_si(in, 0));
    }
    burst->step = rows->facts.step > INT_MAX || rows->facts.step < INT_MIN ? 0 : (int)rows->facts.step;
    burst->set_temperature_K = rows->facts.set_temperature_K;
    burst->set_frequency_Hz = rows->facts.set_frequency_Hz;
    burst->kind = rows->layout->kind;
}

static an_status make_signal(const an_channel_in *in, an_signal_quantity quantity, an_signal *signal,
                             an_error *err)
{
    return an_column_signal(&in->column, quantity, &in->conversion, in->channel->gain * in->size, signal,
                            err);
}

static an_status make_signals(an_rows *rows, an_burst *burst, an_error *err)
{
    const an_channel_in *x = &rows->in[AN_ROLE_DISPLACEMENT], *f = &rows->in[AN_ROLE_FORCE];
    const an_channel_in *t = &rows->in[AN_ROLE_TEMPERATURE];
    AN_TRY(make_signal(x, x->torsion ? AN_SIGNAL_ANGLE : AN_SIGNAL_DISPLACEMENT, &burst->displacement, err));
    AN_TRY(make_signal(f, f->torsion ? AN_SIGNAL_TORQUE : AN_SIGNAL_FORCE, &burst->force, err));
    return t->channel ? make_signal(t, AN_SIGNAL_TEMPERATURE, &burst->temperature, err) : AN_OK;
}

static an_status note_completeness(an_rows *rows, an_burst *burst, an_error *err)
{
    double declared = rows->facts.samples;
    if (rows->truncated)
        return an_remark_list_add_as(&burst->remarks, "truncated", AN_SKIP, burst->n, err,
                                     "the dump ends within this burst, after %zu samples", rows->n);
    rows->n_complete++;
    if (!isnan(declared) && (double)rows->n != declared)
        return an_remark_list_add_as(&burst->remarks, "burst-unclear", AN_SKIP, burst->n, err,
                                     "%.0f samples declared, %zu found", declared, rows->n);
    if (rows->usual_count == 0)
        rows->usual_count = rows->n;
    rows->counts_differ = rows->counts_differ || rows->usual_count != rows->n;
    return AN_OK;
}

an_status an_burst_make(an_rows *rows, an_burst *burst, an_error *err)
{
    burst->n = ++rows->n_burst;
    AN_TRY(note_completeness(rows, burst, err));
    if (rows->n_missing == rows->n)
        return AN_OK;
    AN_TRY(drop_gaps(rows, burst, err));
    set_facts(rows, burst);
    AN_TRY(check_set(&rows->in[AN_ROLE_SET_FREQUENCY], burst, err));
    AN_TRY(make_time(rows, burst, rows->n - rows->n_missing, err));
    return make_signals(rows, burst, err);
}
