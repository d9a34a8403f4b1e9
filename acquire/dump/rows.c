/* Rows to bursts, in memory bounded by the largest burst: channels are bound to fields, rows collected, and
 * where the signals tell the bursts, the record is split. What a burst is made of is in burst_make.c.
 */
#include "acquire/dump/rows.h"

#include "acquire/dump/burst_make.h"

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

void an_rows_init(an_rows *rows, const an_dump_source *source, const an_dump_visitor *visitor,
                  an_remark_list *remarks)
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

an_status an_rows_bind(an_rows *rows, const an_layout_channel *channel, int position, const char *unit,
                       size_t n_unit, an_error *err)
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
        return an_fail(err, AN_E_UNIT, NULL,
                       "%s: the dump says unit '%s', which is no unit of %s; the layout says '%s'", role,
                       text, role, channel->unit);
    if (!same_conversion(&dump.conversion, &in->conversion))
        return an_fail(err, AN_E_UNIT, NULL, "%s: the dump says unit '%s', the layout '%s'", role, text,
                       channel->unit);
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

static void reset_burst(an_rows *rows)
{
    for (int role = 0; role < AN_N_COLUMN_ROLES; role++)
        an_column_clear(&rows->in[role].column);
    rows->n = rows->n_missing = 0;
    rows->row_missing = rows->truncated = false;
    an_burst_finder_reset(&rows->finder);
}

an_status an_rows_end_burst(an_rows *rows, an_error *err)
{
    if (rows->n == 0)
        return AN_OK;
    an_burst burst;
    an_burst_init(&burst);
    an_status status = an_burst_make(rows, &burst, err);
    if (status >= 0 && rows->n_missing == rows->n)
        status = an_remark_list_add_as(rows->remarks, "missing-values", AN_SKIP, 0, err,
                                       "burst %d: none of its %zu rows has all its values; it is left out",
                                       burst.n, rows->n);
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
    double resolution = t->channel ? 2 * an_channel_tolerance(t, i, 0) : 0;
    double time = t->channel ? an_channel_si(t, i) : (double)i / rows->layout->rate_Hz;
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
    for (size_t k = 0; k < n_gap; k++)
        rows->missing[k] = rows->missing[gaps_before + k] - first;
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
