/* Text dumps: preamble, header row, unit row, rows of samples, small headers between bursts, comments, a
 * footer, each known by its content. One pass, line by line; memory is bounded by the largest burst. A row
 * that the end of the file cuts is left out and said; anything else that is not as the layout says is refused
 * with line, step and column.
 */
#include "acquire/dump/text.h"

#include "acquire/dump/header.h"
#include "acquire/dump/head.h"
#include "anelast/lines.h"
#include "anelast/number.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* What a line means depends on where it stands. */
typedef enum place_in_dump { IN_HEAD, IN_BLOCK, BELOW_HEADER, IN_ROWS, BEHIND_FOOTER } place_in_dump;

/* Numbers from here on are no measurement: what instruments print for infinity and for "not a number"
 * (SCPI-1999, volume 1, 7.2.1.4 and 7.2.1.5; from memory). */
static const double overrange_default = 9.9e37;

typedef struct text_reader {
    const an_dump_source *source;
    const an_layout *layout;
    an_lines *lines;
    an_header header;
    an_head head;
    an_rows rows;
    place_in_dump where;
    bool head_handed;   /* the visitor has had the head */
    long line;          /* number of the present line */
    double overrange;   /* [as in the dump] */
    char step[96];      /* text of the step of the burst that is being read */
    char last_cell[48]; /* last field of the row before, to know a number that was cut */
    bool cut;           /* the file ends within a row */
    long uneven_line;   /* of the first row with another number of fields than the header; 0: none */
    int n_uneven;       /* fields of that row */
} text_reader;

static an_status place_error(const text_reader *reader, an_error *err)
{
    char place[512];
    snprintf(place, sizeof place, "%.480s:%ld", reader->source->path, reader->line);
    return err ? an_error_at(err, place) : AN_E_FORMAT;
}

/* Put the place of the present line on a refusal that has none. */
static an_status at_line(const text_reader *reader, an_status status, an_error *err)
{
    return status < 0 && err && !err->place[0] ? place_error(reader, err) : status;
}

static bool starts_with(const an_line *line, const char *mark)
{
    size_t n = mark ? strlen(mark) : 0;
    return n > 0 && line->n >= n && memcmp(line->text, mark, n) == 0;
}

/* Does a line open a block ("[step {n}]")? The number in place of {n} becomes the step. */
static bool is_block_mark(const text_reader *reader, const an_line *line, long *step)
{
    const char *mark = reader->layout->block_mark;
    if (reader->layout->bursts_from != AN_BURSTS_BLOCKS)
        return false;
    const char *hole = strstr(mark, "{n}");
    size_t before = hole ? (size_t)(hole - mark) : strlen(mark), behind = hole ? strlen(hole + 3) : 0;
    an_cell whole = an_cell_trim(line->text, line->n);
    if (whole.n < before + behind || memcmp(whole.text, mark, before) != 0)
        return false;
    if (!hole)
        return whole.n == before;
    int64_t number;
    if (memcmp(whole.text + whole.n - behind, hole + 3, behind) != 0 ||
        !an_number_integer(whole.text + before, whole.n - before - behind, &number))
        return false;
    *step = (long)number;
    return true;
}

static an_status hand_head(text_reader *reader, an_error *err)
{
    if (reader->head_handed)
        return AN_OK;
    reader->head_handed = true;
    AN_TRY(an_head_finish(&reader->head, reader->source->path, err));
    an_status status = reader->rows.visitor->head(&reader->head.specimen, reader->rows.visitor->user, err);
    return status < 0 && err && !err->place[0] ? an_error_at(err, reader->source->path) : status;
}

static an_status open_block(text_reader *reader, long step, an_error *err)
{
    AN_TRY(an_rows_end_burst(&reader->rows, err));
    an_burst_facts_init(&reader->rows.facts);
    reader->rows.facts.step = step;
    reader->where = IN_BLOCK;
    return AN_OK;
}

/* One row of a block header: key, value, unit. */
static an_status read_block_row(text_reader *reader, const an_line *line, an_error *err)
{
    an_cell cells[AN_CELLS_MOST + 2];
    int known = reader->head.n_unmapped;
    an_head_split(reader->layout, line->text, line->n, cells);
    const an_layout_value *value = an_layout_value_of(reader->layout, cells[0].text, cells[0].n);
    double si;
    if (!value) {
        AN_TRY(an_head_add(&reader->head, cells[0], cells[1], cells[2], line->number, false, err));
        return reader->head.n_unmapped > known ? an_head_finish(&reader->head, reader->source->path, err)
                                               : AN_OK;
    }
    AN_TRY(an_head_number(reader->layout, cells[0], cells[1], cells[2], value->unit,
                          an_role_unit(value->role), &si, err));
    an_burst_facts_set(&reader->rows.facts, value->role, si);
    return AN_OK;
}

static bool is_mark_of_nothing(const text_reader *reader, an_cell cell)
{
    static const char *const always[] = {"nan",  "-nan",     "+nan",    "inf",   "-inf",
                                         "+inf", "infinity", "1.#qnan", "1.#inf"};
    if (cell.n == 0 || an_names_has(&reader->layout->text.missing, cell.text, cell.n))
        return true;
    for (size_t i = 0; i < sizeof always / sizeof *always; i++)
        if (strlen(always[i]) == cell.n && strncasecmp(always[i], cell.text, cell.n) == 0)
            return true;
    return false;
}

static an_status refuse_number(const text_reader *reader, const an_channel_in *in, an_cell cell,
                               an_error *err)
{
    const char *hint = "";
    char other = reader->layout->text.decimal_mark == '.' ? ',' : '.', place[512], step[128] = "";
    double ignored;
    if (an_number_parse(cell.text, cell.n, other, &ignored))
        hint = other == ',' ? "; the layout's decimal mark is '.'" : "; the layout's decimal mark is ','";
    snprintf(place, sizeof place, "%.480s:%ld", reader->source->path, reader->line);
    if (reader->step[0])
        snprintf(step, sizeof step, "step %s: ", reader->step);
    else if (reader->rows.facts.step)
        snprintf(step, sizeof step, "step %ld: ", reader->rows.facts.step);
    return an_fail(err, AN_E_VALUE, place, "%s%s '%.*s' is not a number (column %d '%s')%s", step,
                   an_role_name(in->channel->role), cell.n < 60 ? (int)cell.n : 60, cell.text,
                   in->position + 1, an_header_name(&reader->header, in->position), hint);
}

static an_status add_cell(text_reader *reader, an_channel_in *in, an_cell cell, an_error *err)
{
    an_column *column = &in->column;
    double value, *wanted = reader->overrange < 1e18 ? &value : NULL;
    an_status status =
        an_column_add_text(column, cell.text, cell.n, reader->layout->text.decimal_mark, wanted, err);
    if (status == AN_E_VALUE)
        return is_mark_of_nothing(reader, cell) ? an_rows_mark_missing(&reader->rows, in, err)
                                                : refuse_number(reader, in, cell, err);
    AN_TRY(status);
    if (!column->real && !wanted)
        return AN_OK;
    if (fabs(an_column_value(column, column->n - 1)) < reader->overrange)
        return AN_OK;
    column->n--;
    return an_rows_mark_missing(&reader->rows, in, err);
}

/* Another text in the step column, or in the set columns where there is none, begins a burst. */
static an_status look_for_step(text_reader *reader, const an_cell *cells, an_error *err)
{
    const an_channel_in *in = reader->rows.in;
    char step[sizeof reader->step];
    int used = 0;
    if (in[AN_ROLE_STEP].channel) {
        an_cell cell = cells[in[AN_ROLE_STEP].position];
        if (cell.n == strlen(reader->step) && memcmp(cell.text, reader->step, cell.n) == 0)
            return AN_OK;
        snprintf(step, sizeof step, "%.*s", cell.n < 90 ? (int)cell.n : 90, cell.text);
    } else {
        step[0] = '\0';
        for (int role = AN_ROLE_SET_FREQUENCY; role <= AN_ROLE_SET_TEMPERATURE; role++)
            if (in[role].channel)
                used += snprintf(step + used, sizeof step - (size_t)used, "%s%.*s", used ? " " : "",
                                 (int)(cells[in[role].position].n % 40), cells[in[role].position].text);
        if (strcmp(step, reader->step) == 0)
            return AN_OK;
    }
    AN_TRY(an_rows_end_burst(&reader->rows, err));
    an_burst_facts_init(&reader->rows.facts);
    int64_t number;
    if (in[AN_ROLE_STEP].channel && an_number_integer(step, strlen(step), &number))
        an_burst_facts_set(&reader->rows.facts, AN_ROLE_STEP, (double)number);
    memcpy(reader->step, step, sizeof step);
    return AN_OK;
}

static an_status refuse_uneven_row(const text_reader *reader, const char *hint, an_error *err)
{
    char place[512];
    snprintf(place, sizeof place, "%.480s:%ld", reader->source->path, reader->uneven_line);
    return an_fail(err, AN_E_FORMAT, place, "%d field%s where the header row names %d columns%s",
                   reader->n_uneven, reader->n_uneven == 1 ? "" : "s", reader->header.n, hint);
}

/* Is a row that nothing ends, at the end of the file, whole? Its last number has as many digits behind the
 * mark, or, where there is none, as many in all, as the one above it. */
static bool is_cut(const text_reader *reader, an_cell last)
{
    char mark = reader->layout->text.decimal_mark;
    size_t n_before = strlen(reader->last_cell);
    const char *before = memchr(reader->last_cell, mark, n_before), *here = memchr(last.text, mark, last.n);
    if (!before)
        return last.n < n_before;
    size_t decimals_before = n_before - (size_t)(before - reader->last_cell);
    return !here || last.n - (size_t)(here - last.text) < decimals_before;
}

/* A short row that begins like a sample may be where the dump was cut off, which shows only when nothing
 * follows. */
static an_status note_uneven_row(text_reader *reader, const an_cell *cells, int n_cells, an_error *err)
{
    double number;
    bool sample = an_number_parse(cells[0].text, cells[0].n, reader->layout->text.decimal_mark, &number);
    reader->uneven_line = reader->line;
    reader->n_uneven = n_cells;
    if (sample && n_cells < reader->header.n)
        return AN_OK;
    return refuse_uneven_row(reader, sample ? "" : "; where a footer begins, the layout's 'footer' can say",
                             err);
}

static an_status read_row(text_reader *reader, const an_line *line, const an_cell *cells, int n_cells,
                          an_error *err)
{
    const an_header *header = &reader->header;
    bool spare = n_cells == header->n + 1 && cells[header->n].n == 0; /* a separator behind the last field */
    if (!line->ended && (n_cells < header->n || is_cut(reader, cells[header->n - 1]))) {
        reader->cut = true;
        return AN_OK;
    }
    if (n_cells != header->n && !spare)
        return note_uneven_row(reader, cells, n_cells, err);
    AN_TRY(hand_head(reader, err));
    if (reader->layout->bursts_from == AN_BURSTS_STEP)
        AN_TRY(look_for_step(reader, cells, err));
    for (int role = AN_ROLE_TIME; role < AN_N_COLUMN_ROLES; role++) {
        an_channel_in *in = &reader->rows.in[role];
        if (in->channel)
            AN_TRY(add_cell(reader, in, cells[in->position], err));
    }
    an_cell last = cells[header->n - 1];
    size_t n = last.n < sizeof reader->last_cell ? last.n : sizeof reader->last_cell - 1;
    memcpy(reader->last_cell, last.text, n);
    reader->last_cell[n] = '\0';
    return an_rows_end_row(&reader->rows, err);
}

static an_status read_header(text_reader *reader, const an_cell *cells, int n_cells, an_error *err)
{
    reader->where = BELOW_HEADER;
    return an_header_read(&reader->header, cells, n_cells, err);
}

/* The row below the header: units, or already samples. */
static an_status read_below_header(text_reader *reader, const an_line *line, const an_cell *cells,
                                   int n_cells, an_error *err)
{
    an_unit_row_rule rule = reader->layout->text.unit_row;
    bool units = rule == AN_UNIT_ROW_YES ||
                 (rule == AN_UNIT_ROW_FOUND && an_header_is_units(&reader->header, cells, n_cells));
    reader->where = IN_ROWS;
    AN_TRY(an_header_bind(&reader->header, units ? cells : NULL, n_cells, &reader->rows, err));
    return units ? AN_OK : read_row(reader, line, cells, n_cells, err);
}

static an_status read_in_head(text_reader *reader, const an_line *line, const an_cell *cells, int n_cells,
                              an_error *err)
{
    if (!reader->layout->text.header) {
        double number;
        const an_layout_channel *first = &reader->layout->channels[0];
        if (n_cells < first->position ||
            !an_number_parse(cells[first->position - 1].text, cells[first->position - 1].n,
                             reader->layout->text.decimal_mark, &number))
            return an_head_add_line(&reader->head, line->text, line->n, line->number, false, err);
        AN_TRY(an_header_without(&reader->header, n_cells, err));
        AN_TRY(an_header_bind(&reader->header, NULL, 0, &reader->rows, err));
        reader->where = IN_ROWS;
        return read_row(reader, line, cells, n_cells, err);
    }
    if (an_header_is(&reader->header, cells, n_cells))
        return read_header(reader, cells, n_cells, err);
    return an_head_add_line(&reader->head, line->text, line->n, line->number, false, err);
}

static an_status read_comment(text_reader *reader, const an_line *line, an_error *err)
{
    if (reader->where != IN_HEAD)
        return AN_OK;
    size_t n_mark = strlen(reader->layout->text.comment);
    an_cell rest = an_cell_trim(line->text + n_mark, line->n - n_mark);
    return an_head_add_line(&reader->head, rest.text, rest.n, line->number, true, err);
}

static an_status read_content(text_reader *reader, const an_line *line, an_error *err)
{
    an_cell cells[AN_CELLS_MOST + 1];
    const an_text_form *form = &reader->layout->text;
    int n_cells = an_cells_split(line->text, line->n, form->separator, form->quote, cells);
    if (n_cells > AN_CELLS_MOST)
        return an_fail(err, AN_E_LIMIT, NULL, "more than %d fields", AN_CELLS_MOST);
    switch (reader->where) {
    case IN_HEAD:
        return read_in_head(reader, line, cells, n_cells, err);
    case IN_BLOCK:
        if (an_header_is(&reader->header, cells, n_cells))
            return read_header(reader, cells, n_cells, err);
        return read_block_row(reader, line, err);
    case BELOW_HEADER:
        return read_below_header(reader, line, cells, n_cells, err);
    default:
        break;
    }
    bool repeated = cells[0].n &&
                    (cells[0].text[0] & 0x80 || strchr("+-.,0123456789", cells[0].text[0]) == NULL) &&
                    form->header && an_header_is(&reader->header, cells, n_cells);
    return repeated ? read_header(reader, cells, n_cells, err) : read_row(reader, line, cells, n_cells, err);
}

static an_status read_line(text_reader *reader, const an_line *line, an_error *err)
{
    long step = 0;
    reader->line = line->number;
    if (reader->where == BEHIND_FOOTER || an_cell_trim(line->text, line->n).n == 0)
        return AN_OK;
    if (reader->uneven_line)
        return refuse_uneven_row(reader, "", err);
    if (starts_with(line, reader->layout->text.comment))
        return read_comment(reader, line, err);
    if (is_block_mark(reader, line, &step))
        return open_block(reader, step, err);
    if (reader->where == IN_ROWS && starts_with(line, reader->layout->text.footer)) {
        reader->where = BEHIND_FOOTER;
        return AN_OK;
    }
    return read_content(reader, line, err);
}

/* Nothing that looks like a header row: say what was looked for. */
static an_status refuse_headless(const text_reader *reader, an_error *err)
{
    char names[400] = "";
    if (reader->line == 0)
        return an_fail(err, AN_E_FORMAT, reader->source->path, "the dump is empty");
    for (int i = 0; i < reader->layout->n_channel; i++) {
        const an_layout_channel *channel = &reader->layout->channels[i];
        size_t used = strlen(names);
        if (channel->columns.n)
            snprintf(names + used, sizeof names - used, "%s'%s'", used ? ", " : "", channel->columns.text[0]);
    }
    return an_fail(
        err, AN_E_FORMAT, reader->source->path,
        "no row names the columns %s; check the layout's encoding, separator and columns, and whether "
        "the dump is whole",
        names);
}

/* The end of the file: is the last burst whole? */
static an_status end_dump(text_reader *reader, an_error *err)
{
    an_rows *rows = &reader->rows;
    if (reader->header.n == 0)
        return refuse_headless(reader, err);
    reader->cut = reader->cut || reader->uneven_line;
    bool block_cut = reader->where == IN_BLOCK || reader->where == BELOW_HEADER;
    bool cut = reader->cut || block_cut || an_rows_last_is_short(rows);
    rows->truncated = cut;
    size_t n = rows->n;
    AN_TRY(an_rows_end_burst(rows, err));
    if (rows->n_burst == 0)
        return an_fail(err, AN_E_FORMAT, reader->source->path, "no row of samples");
    if (!cut)
        return AN_OK;
    return an_remark_list_add(
        rows->remarks, "truncated", 0, err,
        "the dump ends %s at line %ld, %zu samples into burst %d; %d bursts are complete",
        reader->cut ? "within a row" : "too early", reader->line, n, n ? rows->n_burst : rows->n_burst + 1,
        rows->n_complete);
}

static an_status read_all(text_reader *reader, an_error *err)
{
    an_line line;
    for (;;) {
        AN_TRY(an_lines_next(reader->lines, &line, err));
        if (!line.text)
            return end_dump(reader, err);
        AN_TRY(at_line(reader, read_line(reader, &line, err), err));
    }
}

an_status an_text_dump_read(const an_dump_source *source, const an_dump_visitor *visitor,
                            an_remark_list *remarks, an_error *err)
{
    text_reader *reader = calloc(1, sizeof *reader);
    if (!reader)
        return an_fail_memory(err, "a reader of text dumps");
    reader->source = source;
    reader->layout = source->layout;
    reader->header.layout = source->layout;
    reader->overrange =
        isnan(source->layout->text.overrange) ? overrange_default : source->layout->text.overrange;
    an_head_init(&reader->head, source->layout);
    an_rows_init(&reader->rows, source, visitor, remarks);
    an_status status =
        source->excerpt
            ? an_lines_open_text(source->excerpt, strlen(source->excerpt), source->path, &reader->lines, err)
            : an_lines_open(source->path, source->layout->text.encoding, &reader->lines, err);
    if (status >= 0)
        status = read_all(reader, err);
    if (status >= 0 && an_lines_mark(reader->lines))
        status = an_remark_list_add(remarks, "encoding-decoded", 0, err,
                                    "decoded as %s, as the mark at its beginning says",
                                    an_lines_mark(reader->lines));
    an_lines_free(&reader->lines);
    an_rows_release(&reader->rows);
    free(reader);
    return status;
}
