/* Rows to bursts, in memory bounded by the largest burst. A row without a value in one of its channels leaves the burst, and
 * is counted; the burst then carries the times of those that stayed. Uniform times become a clock, which holds all that
 * their texts said (see clock.c); others stay as the dump printed them.
 */
#include "acquire/dump/rows.h"

#include "acquire/dump/clock.h"

#include <limits.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

void an_burst_facts_init(an_burst_facts *facts)
{
    *facts = (an_burst_facts){0, NAN, NAN, NAN, NAN, NAN, NAN};
}

void an_burst_facts_set(an_burst_facts *facts, an_role role, double value)
{
    switch (role) {
    case AN_ROLE_STEP:
        facts->step = fabs(value) < 1e9 ? (long)value : 0;
        break;
    case AN_ROLE_SET_TEMPERATURE:
        facts->set_temperature_K = value;
        break;
    case AN_ROLE_SET_FREQUENCY:
        facts->set_frequency_Hz = value;
        break;
    case AN_ROLE_SAMPLES:
        facts->samples = value;
        break;
    case AN_ROLE_FIRST_SAMPLE:
        facts->first_sample = value;
        break;
    case AN_ROLE_RATE:
        facts->interval_s = 1 / value;
        break;
    case AN_ROLE_INTERVAL:
        facts->interval_s = value;
        break;
    case AN_ROLE_START:
        facts->start_s = value;
        break;
    default:
        break;
    }
}

void an_rows_init(an_rows *rows, const an_dump_source *source, const an_dump_visitor *visitor, an_remark_list *remarks)
{
    memset(rows, 0, sizeof *rows);
    rows->source = source;
    rows->layout = source->layout;
    rows->visitor = visitor;
    rows->remarks = remarks;
    an_burst_facts_init(&rows->facts);
    for (int role = 0; role < AN_N_COLUMN_ROLES; role++) {
        an_column_init(&rows->in[role].column, role == AN_ROLE_TIME);
        an_column_init(&rows->in[role].next, role == AN_ROLE_TIME);
    }
}

void an_rows_release(an_rows *rows)
{
    for (int role = 0; role < AN_N_COLUMN_ROLES; role++) {
        an_column_release(&rows->in[role].column);
        an_column_release(&rows->in[role].next);
    }
    free(rows->missing);
    rows->missing = NULL;
}

/* The unit of a channel to SI, linear or of torsion. */
static an_status convert_unit(an_channel_in *in, an_role role, const char *unit, an_error *err)
{
    const char *torsion = role == AN_ROLE_DISPLACEMENT ? "rad" : role == AN_ROLE_FORCE ? "N.m" : NULL;
    an_error why;
    if (an_unit_convert(unit, an_role_unit(role), &in->conversion, &why) >= 0)
        return AN_OK;
    if (!torsion || an_unit_convert(unit, torsion, &in->conversion, NULL) < 0)
        return an_fail(err, AN_E_UNIT, NULL, "%s: %s", an_role_name(role), why.text);
    in->torsion = true;
    return AN_OK;
}

static bool same_conversion(const an_conversion *one, const an_conversion *other)
{
    double factor = one->factor / one->divisor, other_factor = other->factor / other->divisor;
    return fabs(factor - other_factor) <= 1e-12 * fabs(factor) && fabs(one->offset - other->offset) <= 1e-9;
}

an_status an_rows_bind(an_rows *rows, const an_layout_channel *channel, int position, const char *unit, size_t n_unit,
                       an_error *err)
{
    an_channel_in *in = &rows->in[channel->role], dump;
    const char *role = an_role_name(channel->role);
    char text[64] = "";
    in->channel = channel;
    in->position = position;
    in->conversion = (an_conversion){.factor = 1, .divisor = 1};
    in->torsion = false;
    in->size = 1;
    if (!an_role_unit(channel->role))
        return AN_OK;
    if (unit && n_unit > 0)
        snprintf(text, sizeof text, "%.*s", n_unit < 60 ? (int)n_unit : 60, unit);
    if (!channel->unit && !text[0])
        return an_fail(err, AN_E_UNIT, NULL, "%s: neither the dump nor the layout says the unit", role);
    AN_TRY(convert_unit(in, channel->role, channel->unit ? channel->unit : text, err));
    if (!channel->unit || !text[0])
        return AN_OK;
    dump = *in;
    if (convert_unit(&dump, channel->role, text, err) < 0)
        return an_fail(err, AN_E_UNIT, NULL, "%s: the dump says unit '%s', which is no unit of %s; the layout says '%s'",
                       role, text, role, channel->unit);
    if (!same_conversion(&dump.conversion, &in->conversion))
        return an_fail(err, AN_E_UNIT, NULL, "%s: the dump says unit '%s', the layout '%s'", role, text, channel->unit);
    return AN_OK;
}

an_status an_rows_mark_missing(an_rows *rows, an_channel_in *in, an_error *err)
{
    if (!rows->row_missing) {
        if (rows->n_missing == rows->room_missing) {
            size_t room = rows->room_missing ? 2 * rows->room_missing : 64;
            size_t *missing = realloc(rows->missing, room * sizeof *missing);
            if (!missing)
                return an_fail_memory(err, "the gaps of a burst");
            rows->missing = missing;
            rows->room_missing = room;
        }
        rows->missing[rows->n_missing++] = rows->n;
        rows->row_missing = true;
    }
    return an_column_add_integer(&in->column, 0, err);
}

static double in_si(const an_channel_in *in, size_t i)
{
    return an_unit_si(&in->conversion, an_column_value(&in->column, i) * in->size);
}

static void reset_burst(an_rows *rows)
{
    for (int role = 0; role < AN_N_COLUMN_ROLES; role++)
        an_column_clear(&rows->in[role].column);
    rows->n = rows->n_missing = 0;
    rows->row_missing = rows->truncated = false;
    an_burst_finder_reset(&rows->finder);
}

/* Gaps: counted, remarked upon, dropped. */
static an_status drop_gaps(an_rows *rows, an_burst *burst, an_error *err)
{
    if (rows->n_missing == 0)
        return AN_OK;
    bool too_many = (double)rows->n_missing > rows->source->missing_most * (double)rows->n;
    AN_TRY(an_remark_list_add_as(&burst->remarks, "missing-values", too_many ? AN_SKIP : AN_NOTE, burst->n, err,
                                 "%zu of %zu rows have a mark instead of a value%s", rows->n_missing, rows->n,
                                 too_many ? "" : "; they are left out"));
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
static an_status clock_with_gaps(an_burst *burst, const size_t *index, size_t n, double start, double interval,
                                 an_error *err)
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

/* Half a unit of the last digit that a time was printed with, in SI; a few ulps for times that never were texts. */
static double time_tolerance(const an_channel_in *in, size_t i, double time_s)
{
    double place = pow(10, in->column.places[i]) * in->size * in->conversion.factor / in->conversion.divisor;
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
        time[i] = in_si(in, i);
        tolerance[i] = time_tolerance(in, i, time[i]);
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
                                        "no uniform clock has the times of the dump within their last digit; the times "
                                        "are kept as they are");
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
        double time = in_si(in, i);
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

/* What the step columns and headers say of the burst. */
static void set_facts(an_rows *rows, an_burst *burst)
{
    static const an_role set_roles[] = {AN_ROLE_SET_FREQUENCY, AN_ROLE_SET_TEMPERATURE};
    for (int i = 0; i < 2; i++) {
        const an_channel_in *in = &rows->in[set_roles[i]];
        if (in->channel && in->column.n)
            an_burst_facts_set(&rows->facts, set_roles[i], in_si(in, 0));
    }
    burst->step = rows->facts.step > INT_MAX || rows->facts.step < INT_MIN ? 0 : (int)rows->facts.step;
    burst->set_temperature_K = rows->facts.set_temperature_K;
    burst->set_frequency_Hz = rows->facts.set_frequency_Hz;
    burst->kind = rows->layout->kind;
}

static an_status make_signal(const an_channel_in *in, an_signal_quantity quantity, an_signal *signal, an_error *err)
{
    return an_column_signal(&in->column, quantity, &in->conversion, in->channel->gain * in->size, signal, err);
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
        return an_remark_list_add_as(&burst->remarks, "burst-unclear", AN_SKIP, burst->n, err, "%.0f samples declared, %zu found",
                                  declared, rows->n);
    if (rows->usual_count == 0)
        rows->usual_count = rows->n;
    rows->counts_differ = rows->counts_differ || rows->usual_count != rows->n;
    return AN_OK;
}

static an_status make_burst(an_rows *rows, an_burst *burst, an_error *err)
{
    burst->n = ++rows->n_burst;
    set_facts(rows, burst);
    AN_TRY(note_completeness(rows, burst, err));
    if (rows->n_missing == rows->n)
        return AN_OK;
    AN_TRY(drop_gaps(rows, burst, err));
    AN_TRY(make_time(rows, burst, rows->n - rows->n_missing, err));
    return make_signals(rows, burst, err);
}

an_status an_rows_end_burst(an_rows *rows, an_error *err)
{
    if (rows->n == 0)
        return AN_OK;
    an_burst burst;
    an_burst_init(&burst);
    an_status status = make_burst(rows, &burst, err);
    if (status >= 0 && rows->n_missing == rows->n)
        status = an_remark_list_add_as(rows->remarks, "missing-values", AN_SKIP, 0, err,
                                       "burst %d: none of its %zu rows has all its values; it is left out", burst.n,
                                       rows->n);
    else if (status >= 0)
        status = rows->visitor->burst(&burst, rows->visitor->user, err);
    an_burst_clear(&burst);
    reset_burst(rows);
    return status;
}

bool an_rows_last_is_short(const an_rows *rows)
{
    double declared = rows->facts.samples;
    if (rows->n == 0)
        return false;
    if (!isnan(declared))
        return (double)rows->n < declared;
    return rows->n_burst >= 2 && !rows->counts_differ && rows->n < rows->usual_count;
}

static bool is_missing(const an_rows *rows, size_t i)
{
    for (size_t k = rows->n_missing; k-- > 0 && rows->missing[k] >= i;)
        if (rows->missing[k] == i)
            return true;
    return false;
}

/* Show the i-th row to the finder. Returns how many of the newest rows belong to a new burst. */
static size_t look(an_rows *rows, size_t i)
{
    const an_channel_in *t = &rows->in[AN_ROLE_TIME], *x = &rows->in[AN_ROLE_DISPLACEMENT];
    double resolution = t->channel ? 2 * time_tolerance(t, i, 0) : 0;
    double time = t->channel ? in_si(t, i) : (double)i / rows->layout->rate_Hz;
    return an_burst_finder_add(&rows->finder, time, resolution, an_column_value(&x->column, i));
}

/* The newest n_new rows with values, and the gaps among them, begin a new burst. */
static an_status split_burst(an_rows *rows, size_t n_new, an_error *err)
{
    size_t first = rows->n, n = rows->n, n_gap = 0;
    while (n_new > 0 && first > 0)
        n_new -= !is_missing(rows, --first);
    for (int role = 0; role < AN_N_COLUMN_ROLES; role++)
        if (rows->in[role].channel)
            AN_TRY(an_column_move_tail(&rows->in[role].column, first, &rows->in[role].next, err));
    while (n_gap < rows->n_missing && rows->missing[rows->n_missing - 1 - n_gap] >= first)
        n_gap++;
    size_t gaps_before = rows->n_missing - n_gap;
    rows->n_missing = gaps_before;
    rows->n = first;
    AN_TRY(an_rows_end_burst(rows, err));
    memmove(rows->missing, rows->missing + gaps_before, n_gap * sizeof *rows->missing);
    for (size_t k = 0; k < n_gap; k++)
        rows->missing[k] -= first;
    rows->n_missing = n_gap;
    rows->n = n - first;
    for (int role = 0; role < AN_N_COLUMN_ROLES; role++) {
        an_column swapped = rows->in[role].column;
        rows->in[role].column = rows->in[role].next;
        rows->in[role].next = swapped;
        an_column_clear(&rows->in[role].next);
    }
    for (size_t i = 0; i < rows->n; i++)
        if (!is_missing(rows, i))
            look(rows, i);
    return AN_OK;
}

an_status an_rows_end_row(an_rows *rows, an_error *err)
{
    bool missing = rows->row_missing;
    rows->n++;
    rows->row_missing = false;
    if (rows->layout->bursts_from != AN_BURSTS_SIGNALS || missing)
        return AN_OK;
    size_t n_new = look(rows, rows->n - 1);
    return n_new > 0 ? split_burst(rows, n_new, err) : AN_OK;
}
