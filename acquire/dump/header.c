/* Header rows are found by their content, so that a preamble may be of any length. Every column must be
 * mapped to a role or listed as ignored: a column that nobody knew is a misunderstanding, not a detail.
 */
#include "acquire/dump/header.h"

#include "anelast/number.h"

#include <stdio.h>
#include <string.h>

static const an_layout_channel *channel_named(const an_layout *layout, an_cell cell)
{
    for (int i = 0; i < layout->n_channel; i++)
        if (an_names_has(&layout->channels[i].columns, cell.text, cell.n))
            return &layout->channels[i];
    return NULL;
}

static bool is_ignored(const an_layout *layout, an_cell cell)
{
    for (int i = 0; i < layout->n_ignored_column; i++)
        if (an_names_has(&layout->ignored_columns[i], cell.text, cell.n))
            return true;
    return cell.n == 0;
}

bool an_header_is(const an_header *header, const an_cell *cells, int n_cells)
{
    int n_needed = 0, n_found = 0;
    if (n_cells > AN_CELLS_MOST)
        return false;
    for (int i = 0; i < header->layout->n_channel; i++)
        n_needed += !header->layout->channels[i].optional;
    for (int i = 0; i < n_cells; i++)
        n_found += channel_named(header->layout, cells[i]) != NULL;
    return n_found >= 2 && 2 * n_found >= n_needed;
}

static void add_name(char *list, size_t size, const char *text, size_t n)
{
    size_t used = strlen(list);
    snprintf(list + used, size - used, "%s'%.*s'", used ? ", " : "", n < 60 ? (int)n : 60, text);
}

static bool has_column(const an_header *header, const an_layout_channel *channel)
{
    for (int i = 0; i < header->n; i++)
        if (header->channel[i] == channel)
            return true;
    return false;
}

static an_status check_mapping(const an_header *header, const char *unmapped, an_error *err)
{
    for (int i = 0; i < header->layout->n_channel; i++) {
        const an_layout_channel *channel = &header->layout->channels[i];
        if (channel->optional || has_column(header, channel))
            continue;
        return an_fail(err, AN_E_FORMAT, NULL, "no column for %s ('%s')%s%s%s", an_role_name(channel->role),
                       channel->columns.n ? channel->columns.text[0] : "by position",
                       unmapped[0] ? "; columns that are not mapped: " : "", unmapped,
                       unmapped[0] ? "" : "; check the separator");
    }
    if (unmapped[0])
        return an_fail(
            err, AN_E_FORMAT, NULL,
            "columns that are not mapped: %s; give each a role in the layout, or list it as ignored",
            unmapped);
    return AN_OK;
}

an_status an_header_read(an_header *header, const an_cell *cells, int n_cells, an_error *err)
{
    char unmapped[400] = "";
    size_t used = 0;
    header->n = n_cells;
    for (int i = 0; i < n_cells; i++) {
        if (used + cells[i].n + 1 > sizeof header->names)
            return an_fail(err, AN_E_LIMIT, NULL, "the names of the columns are longer than %zu bytes",
                           sizeof header->names);
        header->name_at[i] = (int)used;
        memcpy(header->names + used, cells[i].text, cells[i].n);
        header->names[used + cells[i].n] = '\0';
        used += cells[i].n + 1;
        header->channel[i] = channel_named(header->layout, cells[i]);
        if (header->channel[i])
            for (int k = 0; k < i; k++)
                if (header->channel[k] == header->channel[i])
                    return an_fail(err, AN_E_FORMAT, NULL, "columns %d and %d both mean %s", k + 1, i + 1,
                                   an_role_name(header->channel[i]->role));
        if (!header->channel[i] && !is_ignored(header->layout, cells[i]))
            add_name(unmapped, sizeof unmapped, cells[i].text, cells[i].n);
    }
    return check_mapping(header, unmapped, err);
}

an_status an_header_without(an_header *header, int n_cells, an_error *err)
{
    header->n = n_cells;
    header->names[0] = '\0';
    for (int i = 0; i < n_cells; i++) {
        header->name_at[i] = 0;
        header->channel[i] = NULL;
    }
    for (int i = 0; i < header->layout->n_channel; i++) {
        const an_layout_channel *channel = &header->layout->channels[i];
        if (channel->position >= 1 && channel->position <= n_cells)
            header->channel[channel->position - 1] = channel;
    }
    return check_mapping(header, "", err);
}

bool an_header_is_units(const an_header *header, const an_cell *cells, int n_cells)
{
    bool has_unit = false;
    double number;
    if (n_cells != header->n)
        return false;
    for (int i = 0; i < n_cells; i++) {
        an_conversion conversion;
        if (!header->channel[i] || cells[i].n == 0)
            continue;
        if (an_number_parse(cells[i].text, cells[i].n, header->layout->text.decimal_mark, &number))
            return false;
        has_unit = has_unit || an_unit_read(cells[i].text, cells[i].n, &conversion, NULL) >= 0;
    }
    return has_unit;
}

an_status an_header_bind(const an_header *header, const an_cell *units, int n_units, an_rows *rows,
                         an_error *err)
{
    for (int i = 0; i < header->n; i++) {
        const char *unit = units && i < n_units ? units[i].text : NULL;
        if (header->channel[i])
            AN_TRY(an_rows_bind(rows, header->channel[i], i, unit, unit ? units[i].n : 0, err));
    }
    return AN_OK;
}

const char *an_header_name(const an_header *header, int i_column)
{
    return header->names + header->name_at[i_column];
}
