/* Binary dumps: counts of one type, interleaved or one channel after the other, with a text beside them that
 * names channels, sizes of counts and bursts. Read a few thousand frames at a time; counts stay counts. A
 * dump that is shorter than its burst table says gives the bursts that are complete, and is held.
 */
#include "acquire/dump/counts.h"

#include "acquire/dump/sidecar.h"

#include <errno.h>
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/types.h>

enum { FRAMES_AT_ONCE = 4096 };

static const double overrange_default = 9.9e37; /* as in text.c */

typedef struct counts_reader {
    const an_dump_source *source;
    const an_counts_form *form;
    an_sidecar sidecar;
    an_rows rows;
    FILE *stream;
    int n_channel;                       /* of the dump */
    an_channel_in *in[AN_CHANNELS_MOST]; /* [n_channel] NULL: ignored */
    size_t n_frame;                      /* whole frames of the dump */
    size_t n_rest;                       /* [bytes] behind them */
    unsigned char *raw;                  /* [n_channel * FRAMES_AT_ONCE * bytes of a count] */
} counts_reader;

static size_t size_of(an_count_type type)
{
    static const size_t sizes[] = {2, 3, 4, 4, 8};
    return sizes[type];
}

/* The bytes of a count as an unsigned number, most significant first or last. */
static uint64_t gather(const unsigned char *bytes, size_t n, bool big_endian)
{
    uint64_t bits = 0;
    for (size_t i = 0; i < n; i++)
        bits = bits << 8 | bytes[big_endian ? i : n - 1 - i];
    return bits;
}

static double real_count(const unsigned char *bytes, const an_counts_form *form)
{
    uint64_t bits = gather(bytes, size_of(form->type), form->big_endian);
    double value;
    if (form->type == AN_COUNT_FLOAT64) {
        memcpy(&value, &bits, sizeof value);
        return value;
    }
    uint32_t half = (uint32_t)bits;
    float narrow;
    memcpy(&narrow, &half, sizeof narrow);
    return narrow;
}

static int64_t integer_count(const unsigned char *bytes, const an_counts_form *form)
{
    size_t n = size_of(form->type);
    uint64_t bits = gather(bytes, n, form->big_endian), sign = UINT64_C(1) << (8 * n - 1);
    return (int64_t)(bits ^ sign) - (int64_t)sign;
}

static an_status add_count(counts_reader *reader, an_channel_in *in, const unsigned char *bytes,
                           an_error *err)
{
    const an_counts_form *form = reader->form;
    if (form->type <= AN_COUNT_INT32)
        return an_column_add_integer(&in->column, integer_count(bytes, form), err);
    double value = real_count(bytes, form), most = reader->source->layout->text.overrange;
    if (!(fabs(value) < (isnan(most) ? overrange_default : most)))
        return an_rows_mark_missing(&reader->rows, in, err);
    return an_column_add_real(&in->column, value, err);
}

static const an_layout_channel *layout_channel(const an_layout *layout, const char *name, int position)
{
    for (int i = 0; i < layout->n_channel; i++) {
        const an_layout_channel *channel = &layout->channels[i];
        if (name[0] ? an_names_has(&channel->columns, name, strlen(name)) : channel->position == position)
            return channel;
    }
    return NULL;
}

static bool is_ignored(const an_layout *layout, const char *name)
{
    for (int i = 0; i < layout->n_ignored_column; i++)
        if (an_names_has(&layout->ignored_columns[i], name, strlen(name)))
            return true;
    return false;
}

/* One channel of the dump: which role, which unit, which size of a count. */
static an_status bind_channel(counts_reader *reader, int i, an_error *err)
{
    const an_layout *layout = reader->source->layout;
    const an_sidecar_channel *said = &reader->sidecar.channels[i];
    const an_layout_channel *channel = layout_channel(layout, said->name, i + 1);
    if (!channel) {
        if (!said->name[0] || is_ignored(layout, said->name))
            return AN_OK;
        return an_fail(err, AN_E_FORMAT, reader->source->sidecar,
                       "channel %d '%s' is not mapped; give it a role in the layout, or list it as ignored",
                       i + 1, said->name);
    }
    an_status status = an_rows_bind(&reader->rows, channel, i, said->unit, strlen(said->unit), err);
    if (status < 0)
        return err ? an_error_at(err,
                                 reader->source->sidecar ? reader->source->sidecar : reader->source->path)
                   : status;
    reader->in[i] = &reader->rows.in[channel->role];
    if (!isnan(said->size) && said->size != 0)
        reader->in[i]->size = said->size;
    return AN_OK;
}

static int count_channels(const counts_reader *reader)
{
    const an_layout *layout = reader->source->layout;
    int n = reader->sidecar.n_channel;
    for (int i = 0; i < layout->n_channel; i++)
        n = layout->channels[i].position > n ? layout->channels[i].position : n;
    return n;
}

static an_status bind_channels(counts_reader *reader, an_error *err)
{
    const an_layout *layout = reader->source->layout;
    double declared = reader->sidecar.n_declared;
    reader->n_channel = isnan(declared) ? count_channels(reader) : (int)declared;
    if (reader->n_channel < 1 || reader->n_channel > AN_CHANNELS_MOST ||
        count_channels(reader) > reader->n_channel)
        return an_fail(err, AN_E_FORMAT,
                       reader->source->sidecar ? reader->source->sidecar : reader->source->path,
                       "%d channels declared, %d described", reader->n_channel, count_channels(reader));
    for (int i = 0; i < reader->n_channel; i++)
        AN_TRY(bind_channel(reader, i, err));
    for (int i = 0; i < layout->n_channel; i++)
        if (!layout->channels[i].optional && !reader->rows.in[layout->channels[i].role].channel)
            return an_fail(err, AN_E_FORMAT, reader->source->path, "no channel for %s",
                           an_role_name(layout->channels[i].role));
    return AN_OK;
}

static an_status open_dump(counts_reader *reader, an_error *err)
{
    const char *path = reader->source->path;
    size_t frame = (size_t)reader->n_channel * size_of(reader->form->type);
    reader->stream = fopen(path, "rb");
    if (!reader->stream || fseeko(reader->stream, 0, SEEK_END) != 0)
        return an_fail(err, AN_E_IO, path, "cannot be opened: %s", strerror(errno));
    off_t size = ftello(reader->stream);
    if (size < (off_t)reader->form->offset)
        return an_fail(err, AN_E_FORMAT, path, "%lld bytes, but samples begin at %ld", (long long)size,
                       reader->form->offset);
    size_t bytes = (size_t)size - (size_t)reader->form->offset;
    reader->n_frame = bytes / frame;
    reader->n_rest = bytes % frame;
    reader->raw = malloc(FRAMES_AT_ONCE * frame);
    return reader->raw ? AN_OK : an_fail_memory(err, "a block of the dump");
}

/* n counts from a position [counts] of the dump into raw at `to`. */
static an_status read_counts(counts_reader *reader, size_t position, size_t n, unsigned char *to,
                             an_error *err)
{
    size_t size = size_of(reader->form->type);
    off_t at = (off_t)reader->form->offset + (off_t)(position * size);
    if (fseeko(reader->stream, at, SEEK_SET) == 0 && fread(to, size, n, reader->stream) == n)
        return AN_OK;
    return an_fail(err, AN_E_IO, reader->source->path, "cannot be read at byte %lld: %s", (long long)at,
                   ferror(reader->stream) ? strerror(errno) : "its size has changed");
}

static an_status read_block(counts_reader *reader, size_t first, size_t n, an_error *err)
{
    size_t size = size_of(reader->form->type), n_channel = (size_t)reader->n_channel;
    if (!reader->form->planar)
        return read_counts(reader, first * n_channel, n * n_channel, reader->raw, err);
    for (size_t i = 0; i < n_channel; i++)
        AN_TRY(read_counts(reader, i * reader->n_frame + first, n, reader->raw + i * n * size, err));
    return AN_OK;
}

/* Frames first .. first + n - 1 become rows. */
static an_status read_frames(counts_reader *reader, size_t first, size_t n, an_error *err)
{
    size_t size = size_of(reader->form->type), n_channel = (size_t)reader->n_channel;
    for (size_t done = 0; done < n;) {
        size_t count = n - done < FRAMES_AT_ONCE ? n - done : FRAMES_AT_ONCE;
        AN_TRY(read_block(reader, first + done, count, err));
        for (size_t i = 0; i < count; i++) {
            for (size_t k = 0; k < n_channel; k++) {
                size_t at = reader->form->planar ? k * count + i : i * n_channel + k;
                if (reader->in[k])
                    AN_TRY(add_count(reader, reader->in[k], reader->raw + at * size, err));
            }
            AN_TRY(an_rows_end_row(&reader->rows, err));
        }
        done += count;
    }
    return AN_OK;
}

static an_status read_tabled_burst(counts_reader *reader, const an_burst_facts *facts, an_error *err)
{
    an_rows *rows = &reader->rows;
    if (!(facts->samples >= 1) || !(facts->first_sample >= 0) || !(facts->samples < 1e12) ||
        !(facts->first_sample < 1e12))
        return an_fail(err, AN_E_FORMAT, reader->source->sidecar,
                       "burst %ld of the table has no first sample, or no number of samples", facts->step);
    size_t first = (size_t)facts->first_sample, n = (size_t)facts->samples;
    if (first >= reader->n_frame)
        return AN_OK;
    rows->facts = *facts;
    rows->truncated = first + n > reader->n_frame;
    AN_TRY(read_frames(reader, first, rows->truncated ? reader->n_frame - first : n, err));
    return an_rows_end_burst(rows, err);
}

/* Where one channel stands after the other, a missing byte moves all channels but the first: nothing can be
 * saved. */
static an_status check_planar(const counts_reader *reader, an_error *err)
{
    size_t n_needed = 0;
    for (size_t i = 0; i < reader->sidecar.n_burst; i++) {
        double end = reader->sidecar.bursts[i].first_sample + reader->sidecar.bursts[i].samples;
        if (end < 1e12 && (size_t)end > n_needed)
            n_needed = (size_t)end;
    }
    if (!reader->form->planar || (reader->n_rest == 0 && n_needed <= reader->n_frame))
        return AN_OK;
    return an_fail(err, AN_E_FORMAT, reader->source->path,
                   "the dump ends after %zu samples a channel and %zu bytes, the burst table names %zu; with "
                   "one channel "
                   "after the other nothing of it can be told apart",
                   reader->n_frame, reader->n_rest, n_needed);
}

static an_status read_bursts(counts_reader *reader, an_error *err)
{
    an_rows *rows = &reader->rows;
    bool table = reader->source->layout->bursts_from == AN_BURSTS_TABLE;
    rows->facts = reader->sidecar.common;
    for (size_t i = 0; table && i < reader->sidecar.n_burst; i++)
        AN_TRY(read_tabled_burst(reader, &reader->sidecar.bursts[i], err));
    if (!table) {
        AN_TRY(read_frames(reader, 0, reader->n_frame, err));
        AN_TRY(an_rows_end_burst(rows, err));
    }
    if (rows->n_burst == 0)
        return an_fail(err, AN_E_FORMAT, reader->source->path, "no samples");
    size_t n_bursts = table ? reader->sidecar.n_burst : (size_t)rows->n_burst;
    if (reader->n_rest == 0 && (size_t)rows->n_complete == n_bursts)
        return AN_OK;
    size_t frame = (size_t)reader->n_channel * size_of(reader->form->type);
    return an_remark_list_add(rows->remarks, "truncated", 0, err,
                              "the dump ends at byte %zu%s; %d of %zu bursts are complete",
                              (size_t)reader->form->offset + reader->n_frame * frame + reader->n_rest,
                              reader->n_rest ? ", within a frame" : "", rows->n_complete, n_bursts);
}

static an_status read_all(counts_reader *reader, an_error *err)
{
    const an_dump_source *source = reader->source;
    if (reader->form->sidecar)
        AN_TRY(an_sidecar_read(source->sidecar, source->layout, &reader->sidecar, err));
    AN_TRY(bind_channels(reader, err));
    AN_TRY(open_dump(reader, err));
    AN_TRY(check_planar(reader, err));
    AN_TRY(reader->rows.visitor->head(&reader->sidecar.head.specimen, reader->rows.visitor->user, err));
    return read_bursts(reader, err);
}

an_status an_counts_dump_read(const an_dump_source *source, const an_dump_visitor *visitor,
                              an_remark_list *remarks, an_error *err)
{
    counts_reader *reader = calloc(1, sizeof *reader);
    if (!reader)
        return an_fail_memory(err, "a reader of binary dumps");
    reader->source = source;
    reader->form = &source->layout->counts;
    reader->sidecar.n_declared = NAN;
    an_head_init(&reader->sidecar.head, source->layout);
    an_burst_facts_init(&reader->sidecar.common);
    an_rows_init(&reader->rows, source, visitor, remarks);
    an_status status = read_all(reader, err);
    if (reader->stream)
        fclose(reader->stream);
    free(reader->raw);
    an_sidecar_release(&reader->sidecar);
    an_rows_release(&reader->rows);
    free(reader);
    return status;
}
