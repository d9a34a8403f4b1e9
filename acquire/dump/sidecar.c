/* The text beside a binary dump. A row is a run of key=value, a value reaching to the blank before the next
 * key, so that "material=hull laminate resin" needs no quotes. Rows that the burst key opens are the burst
 * table; rows whose key has a channel's number in it describe that channel; the rest is the dump's head, or
 * facts about the counts, which must agree with the layout.
 */
#include "acquire/dump/sidecar.h"

#include "anelast/lines.h"
#include "anelast/number.h"

#include <limits.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* One pair of a row. */
typedef struct pair {
    an_cell key, value;
} pair;

enum { PAIRS_MOST = 64 };

/* Cut a row into pairs. Returns how many, or -1 where a word stands before the first key, or there are too
 * many. */
static int split_pairs(const char *text, size_t n, pair *pairs)
{
    an_cell words[AN_CELLS_MOST + 1];
    int n_words = an_cells_split(text, n, ' ', '\0', words), count = 0;
    if (n_words > AN_CELLS_MOST)
        return -1;
    for (int i = 0; i < n_words; i++) {
        const char *equals = memchr(words[i].text, '=', words[i].n);
        if (!equals && count == 0)
            return -1;
        if (!equals) {
            pairs[count - 1].value.n = (size_t)(words[i].text + words[i].n - pairs[count - 1].value.text);
            continue;
        }
        if (count == PAIRS_MOST)
            return -1;
        size_t n_key = (size_t)(equals - words[i].text);
        pairs[count].key = (an_cell){words[i].text, n_key};
        pairs[count++].value = (an_cell){equals + 1, words[i].n - n_key - 1};
    }
    for (int i = 0; i < count; i++)
        pairs[i].value = an_cell_trim(pairs[i].value.text, pairs[i].value.n);
    return count;
}

/* The number in a channel's key, 0 where it is none ("ch{n}" and "ch12": 12). */
static int channel_number(const an_counts_form *form, an_cell key)
{
    const char *hole = form->channel_key ? strstr(form->channel_key, "{n}") : NULL;
    int64_t number;
    if (!hole)
        return 0;
    size_t before = (size_t)(hole - form->channel_key), behind = strlen(hole + 3);
    if (key.n <= before + behind || memcmp(key.text, form->channel_key, before) != 0 ||
        memcmp(key.text + key.n - behind, hole + 3, behind) != 0 ||
        !an_number_integer(key.text + before, key.n - before - behind, &number))
        return 0;
    return number >= 1 && number <= AN_CHANNELS_MOST ? (int)number : 0;
}

/* "force N 2e-05": the last word is the size of a count, the one before the unit, the rest the name. */
static an_status read_channel(an_sidecar *sidecar, int number, an_cell value, char decimal_mark,
                              an_error *err)
{
    an_cell words[AN_CELLS_MOST + 1];
    int n = an_cells_split(value.text, value.n, ' ', '\0', words);
    an_sidecar_channel *channel = &sidecar->channels[number - 1];
    channel->size = NAN;
    if (n > AN_CELLS_MOST || n < 2 ||
        (n >= 3 && !an_number_parse(words[n - 1].text, words[n - 1].n, decimal_mark, &channel->size)))
        return an_fail(err, AN_E_FORMAT, NULL,
                       "channel %d: '%.*s' is not a name, a unit and the size of a count", number,
                       (int)(value.n % 100), value.text);
    int i_unit = n >= 3 ? n - 2 : 1;
    size_t n_name = (size_t)(words[i_unit - 1].text + words[i_unit - 1].n - words[0].text);
    snprintf(channel->name, sizeof channel->name, "%.*s", (int)(n_name % 63), words[0].text);
    snprintf(channel->unit, sizeof channel->unit, "%.*s", (int)(words[i_unit].n % 63), words[i_unit].text);
    sidecar->n_channel = number > sidecar->n_channel ? number : sidecar->n_channel;
    return AN_OK;
}

/* A word about the counts, which must be the layout's. */
static an_status check_word(const an_sidecar *sidecar, an_role role, an_cell value, an_error *err)
{
    static const char *const types[] = {"int16", "int24", "int32", "float32", "float64"};
    const an_counts_form *form = &sidecar->form;
    const char *stated = role == AN_ROLE_TYPE         ? types[form->type]
                         : role == AN_ROLE_BYTE_ORDER ? (form->big_endian ? "big" : "little")
                                                      : (form->planar ? "planar" : "interleaved");
    if (an_cell_is(value, stated))
        return AN_OK;
    return an_fail(err, AN_E_FORMAT, NULL, "%s: the dump says '%.*s', the layout '%s'", an_role_name(role),
                   (int)(value.n % 60), value.text, stated);
}

static an_status read_value(an_sidecar *sidecar, const an_layout *layout, const an_layout_value *role_value,
                            const pair *row, an_burst_facts *facts, an_error *err)
{
    an_role role = role_value->role;
    an_cell none = {"", 0};
    double si;
    if (role == AN_ROLE_TYPE || role == AN_ROLE_BYTE_ORDER || role == AN_ROLE_ARRANGEMENT)
        return check_word(sidecar, role, row->value, err);
    const char *unit = role_value->unit ? role_value->unit : an_role_unit(role);
    AN_TRY(an_head_number(layout, row->key, row->value, none, unit, an_role_unit(role), &si, err));
    if (role == AN_ROLE_CHANNELS)
        sidecar->n_declared = si;
    else
        an_burst_facts_set(facts, role, si);
    return AN_OK;
}

static an_status add_burst(an_sidecar *sidecar, an_burst_facts **facts, an_error *err)
{
    if (sidecar->n_burst == sidecar->room) {
        size_t room = sidecar->room ? 2 * sidecar->room : 128;
        an_burst_facts *bursts = realloc(sidecar->bursts, room * sizeof *bursts);
        if (!bursts)
            return an_fail_memory(err, "the burst table");
        sidecar->bursts = bursts;
        sidecar->room = room;
    }
    *facts = &sidecar->bursts[sidecar->n_burst++];
    **facts = sidecar->common;
    return AN_OK;
}

/* One pair that is no channel: a value with a role, or a key of the head. */
static an_status read_pair(an_sidecar *sidecar, const an_layout *layout, const pair *row,
                           an_burst_facts *facts, long line, an_error *err)
{
    an_cell none = {"", 0};
    const an_layout_value *value = an_layout_value_of(layout, row->key.text, row->key.n);
    if (value)
        return read_value(sidecar, layout, value, row, facts, err);
    return an_head_add(&sidecar->head, row->key, row->value, none, line, false, err);
}

static an_status read_row(an_sidecar *sidecar, const an_layout *layout, const an_line *line, an_error *err)
{
    pair pairs[PAIRS_MOST];
    an_burst_facts *facts = &sidecar->common;
    int n = split_pairs(line->text, line->n, pairs);
    if (n < 0)
        return an_fail(err, AN_E_FORMAT, NULL, "not a row of key=value: '%.*s'",
                       line->n < 60 ? (int)line->n : 60, line->text);
    const char *burst_key = layout->counts.burst_key;
    bool burst = n > 0 && burst_key && an_cell_is(pairs[0].key, burst_key);
    if (burst)
        AN_TRY(add_burst(sidecar, &facts, err));
    for (int i = 0; i < n; i++) {
        int number = channel_number(&layout->counts, pairs[i].key);
        if (number > 0) {
            AN_TRY(read_channel(sidecar, number, pairs[i].value, layout->text.decimal_mark, err));
        } else if (burst && i == 0) {
            int64_t step;
            if (an_number_integer(pairs[0].value.text, pairs[0].value.n, &step))
                facts->step = step > LONG_MAX || step < LONG_MIN ? 0 : (long)step;
        } else {
            AN_TRY(read_pair(sidecar, layout, &pairs[i], facts, line->number, err));
        }
    }
    return AN_OK;
}

static an_status read_all(const char *path, const an_layout *layout, an_lines *lines, an_sidecar *sidecar,
                          an_error *err)
{
    an_line line;
    const char *comment = layout->text.comment;
    for (;;) {
        AN_TRY(an_lines_next(lines, &line, err));
        if (!line.text)
            return an_head_finish(&sidecar->head, path, err);
        if (comment && line.n >= strlen(comment) && memcmp(line.text, comment, strlen(comment)) == 0)
            continue;
        an_status status = read_row(sidecar, layout, &line, err);
        if (status < 0) {
            char place[512];
            snprintf(place, sizeof place, "%.480s:%ld", path, line.number);
            return err ? an_error_at(err, place) : status;
        }
    }
}

an_status an_sidecar_read(const char *path, const an_layout *layout, an_sidecar *sidecar, an_error *err)
{
    an_lines *lines = NULL;
    memset(sidecar, 0, sizeof *sidecar);
    an_head_init(&sidecar->head, layout);
    sidecar->form = layout->counts;
    sidecar->n_declared = NAN;
    an_burst_facts_init(&sidecar->common);
    AN_TRY(an_lines_open(path, layout->text.encoding, &lines, err));
    an_status status = read_all(path, layout, lines, sidecar, err);
    an_lines_free(&lines);
    return status;
}

void an_sidecar_release(an_sidecar *sidecar)
{
    free(sidecar->bursts);
    sidecar->bursts = NULL;
}
