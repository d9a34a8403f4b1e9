/* The dump's own head becomes specimen fields, by the layout's keys. Nothing is guessed: a key is mapped, or
 * ignored by name, or refused; a unit stands in the layout, beside the value or within it, and where it
 * stands twice both must agree.
 */
#include "acquire/dump/head.h"

#include "anelast/number.h"

#include <math.h>
#include <stdio.h>
#include <string.h>
#include <time.h>

void an_head_init(an_head *head, const an_layout *layout)
{
    memset(head, 0, sizeof *head);
    head->layout = layout;
    an_specimen_init(&head->specimen);
}

static int shown(size_t n)
{
    return n < 60 ? (int)n : 60;
}

/* Where the number in front of a unit ends. */
static size_t number_length(an_cell value)
{
    size_t n = 0;
    while (n < value.n && strchr("0123456789+-.,", value.text[n]))
        n++;
    if (n + 1 < value.n && (value.text[n] == 'e' || value.text[n] == 'E') &&
        strchr("0123456789+-", value.text[n + 1]))
        for (n += 2; n < value.n && strchr("0123456789", value.text[n]);)
            n++;
    return n;
}

static an_status convert(an_cell key, const char *unit, const char *expected, an_conversion *conversion,
                         an_error *err)
{
    an_error why;
    if (an_unit_convert(unit, expected, conversion, &why) >= 0)
        return AN_OK;
    return an_fail(err, AN_E_UNIT, NULL, "'%.*s': %s", shown(key.n), key.text, why.text);
}

/* The unit in force: the layout's, the dump's, or SI where neither says one. Both must agree. */
static an_status choose_unit(an_cell key, const char *dump, const char *stated, const char *expected,
                             an_conversion *conversion, an_error *err)
{
    an_conversion other;
    AN_TRY(convert(key, stated ? stated : dump, expected, conversion, err));
    if (!stated || !dump[0])
        return AN_OK;
    AN_TRY(convert(key, dump, expected, &other, err));
    double ratio = other.factor / other.divisor / (conversion->factor / conversion->divisor);
    if (fabs(ratio - 1) > 1e-12 || fabs(other.offset - conversion->offset) > 1e-9)
        return an_fail(err, AN_E_UNIT, NULL, "'%.*s': the dump says unit '%s', the layout '%s'", shown(key.n),
                       key.text, dump, stated);
    return AN_OK;
}

an_status an_head_number(const an_layout *layout, an_cell key, an_cell value, an_cell unit,
                         const char *stated, const char *expected, double *si, an_error *err)
{
    char dump[64];
    double number;
    size_t n = number_length(value);
    an_cell rest = an_cell_trim(value.text + n, value.n - n);
    if (rest.n > 0 && unit.n == 0)
        unit = rest;
    if (!an_number_parse(value.text, n, layout->text.decimal_mark, &number) || (rest.n > 0 && !expected))
        return an_fail(err, AN_E_VALUE, NULL, "'%.*s': '%.*s' is not a number (decimal mark '%c')",
                       shown(key.n), key.text, shown(value.n), value.text, layout->text.decimal_mark);
    *si = number;
    if (!expected)
        return AN_OK;
    an_conversion conversion;
    snprintf(dump, sizeof dump, "%.*s", shown(unit.n), unit.n ? unit.text : "");
    if (!stated && !dump[0])
        return an_fail(err, AN_E_UNIT, NULL,
                       "'%.*s': neither the dump nor the layout says the unit of '%.*s'", shown(key.n),
                       key.text, shown(value.n), value.text);
    AN_TRY(choose_unit(key, dump, stated, expected, &conversion, err));
    *si = an_unit_si(&conversion, number);
    return AN_OK;
}

/* xs:dateTime without a zone: 2026-03-09T14:20:00, or the same with a blank. Returns bytes used, 0: not that.
 */
static size_t iso_length(const char *text)
{
    int year, month, day, hour, minute, second, used = 0;
    char between;
    if (sscanf(text, "%4d-%2d-%2d%c%2d:%2d:%2d%n", &year, &month, &day, &between, &hour, &minute, &second,
               &used) != 7)
        return 0;
    bool good = used == 19 && (between == 'T' || between == ' ') && month >= 1 && month <= 12 && day >= 1 &&
                day <= 31 && hour <= 24 && minute < 60 && second <= 60;
    return good ? 19 : 0;
}

static bool is_zone(const char *text)
{
    int hours, minutes, used = 0;
    if (strcmp(text, "Z") == 0)
        return true;
    return (text[0] == '+' || text[0] == '-') &&
           sscanf(text + 1, "%2d:%2d%n", &hours, &minutes, &used) == 2 && used == 5 && text[6] == '\0' &&
           hours <= 14 && minutes < 60;
}

/* A date and time to xs:dateTime with a zone, from the dump or from the layout. */
static an_status set_started(an_head *head, const an_layout_field *field, const char *text, an_error *err)
{
    char iso[48];
    const char *rest = text;
    if (field->form) {
        struct tm tm = {0};
        rest = strptime(text, field->form, &tm);
        if (rest)
            strftime(iso, sizeof iso, "%Y-%m-%dT%H:%M:%S", &tm);
    } else {
        size_t n = iso_length(text);
        snprintf(iso, sizeof iso, "%.19s", text);
        iso[n ? 10 : 0] = 'T';
        rest = n ? text + n : NULL;
        if (rest && rest[0] == '.') /* fractions of a second name no run */
            rest += 1 + strspn(rest + 1, "0123456789");
    }
    if (!rest)
        return an_fail(err, AN_E_VALUE, NULL, "started: '%s' is no date and time%s%s", text,
                       field->form ? " of the form " : " as in 2026-03-09T14:20:00+01:00",
                       field->form ? field->form : "");
    const char *zone = rest[0] ? rest : field->zone;
    if (!zone || !is_zone(zone))
        return an_fail(err, AN_E_VALUE, NULL, "started: '%s' has no zone; the layout can state one", text);
    snprintf(head->specimen.started, sizeof head->specimen.started, "%.24s%.8s", iso, zone);
    return AN_OK;
}

static an_status set_geometry(an_head *head, const an_layout_field *field, const char *text, an_error *err)
{
    const char *word = text;
    for (int i = 0; i < field->texts.n; i++)
        if (strcmp(field->texts.text[i], text) == 0)
            word = field->words.text[i];
    head->specimen.geometry.kind = an_geometry_find(word);
    if (head->specimen.geometry.kind != AN_GEOMETRY_NONE)
        return AN_OK;
    return an_fail(err, AN_E_VALUE, NULL,
                   "geometry: '%s' is no kind known here; the layout can say what it means", word);
}

static an_status set_field(an_head *head, const an_layout_field *field, an_cell key, an_cell value,
                           an_cell unit, an_error *err)
{
    const char *expected;
    an_measure *measure = an_geometry_dimension(&head->specimen.geometry, field->name, &expected);
    if (measure)
        return an_head_number(head->layout, key, value, unit, field->unit, expected, &measure->value, err);
    char text[160];
    if (value.n >= sizeof text)
        return an_fail(err, AN_E_LIMIT, NULL, "'%.*s': the value is longer than %zu bytes", shown(key.n),
                       key.text, sizeof text - 1);
    snprintf(text, sizeof text, "%.*s", (int)value.n, value.text);
    for (size_t i = 0; i < value.n; i++)
        if ((unsigned char)text[i] < 0x20 && text[i] != '\t')
            return an_fail(err, AN_E_VALUE, NULL, "'%.*s': a control character stands in the value",
                           shown(key.n), key.text);
    if (strcmp(field->name, "geometry") == 0)
        return set_geometry(head, field, text, err);
    if (strcmp(field->name, "started") == 0)
        return set_started(head, field, text, err);
    size_t size;
    char *label = an_specimen_label(&head->specimen, field->name, &size);
    if (value.n >= size)
        return an_fail(err, AN_E_LIMIT, NULL, "'%.*s': the value is longer than %zu bytes", shown(key.n),
                       key.text, size - 1);
    memcpy(label, text, value.n + 1);
    return AN_OK;
}

enum { UNMAPPED_SHOWN = 5 };

static void note_unmapped(an_head *head, an_cell key, long line)
{
    size_t used = strlen(head->unmapped);
    if (head->n_unmapped++ == 0)
        head->first_line = line;
    if (head->n_unmapped > UNMAPPED_SHOWN)
        return;
    snprintf(head->unmapped + used, sizeof head->unmapped - used, "%s'%.*s' (line %ld)", used ? ", " : "",
             shown(key.n), key.text, line);
}

an_status an_head_add(an_head *head, an_cell key, an_cell value, an_cell unit, long line, bool comment,
                      an_error *err)
{
    const an_layout *layout = head->layout;
    for (int i = 0; i < layout->n_field; i++)
        if (an_names_has(&layout->fields[i].keys, key.text, key.n))
            return value.n ? set_field(head, &layout->fields[i], key, value, unit, err) : AN_OK;
    for (int i = 0; i < layout->n_ignored_key; i++)
        if (an_names_has(&layout->ignored_keys[i], key.text, key.n))
            return AN_OK;
    if (!comment)
        note_unmapped(head, key, line);
    return AN_OK;
}

/* Key, value and unit where another mark than the separator stands behind the key: "Free length: 15.02; mm".
 */
static int split_at_mark(const an_text_form *form, char mark, const char *text, size_t n, an_cell *cells)
{
    const char *at = memchr(text, mark, n);
    cells[0] = an_cell_trim(text, at ? (size_t)(at - text) : n);
    if (!at)
        return 1;
    an_cell rest = an_cell_trim(at + 1, n - (size_t)(at + 1 - text));
    if (form->separator == ' ') {
        cells[1] = rest;
        return 2;
    }
    int n_cells = an_cells_split(rest.text, rest.n, form->separator, form->quote, cells + 1);
    return n_cells > AN_CELLS_MOST ? n_cells : n_cells + 1;
}

int an_head_split(const an_layout *layout, const char *text, size_t n, an_cell *cells)
{
    const an_text_form *form = &layout->text;
    const char *mark = layout->key_separator;
    int n_cells = mark ? split_at_mark(form, mark[0], text, n, cells)
                       : an_cells_split(text, n, form->separator, form->quote, cells);
    for (int i = n_cells; i < 3; i++)
        cells[i] = (an_cell){"", 0};
    return n_cells;
}

an_status an_head_add_line(an_head *head, const char *text, size_t n, long line, bool comment, an_error *err)
{
    an_cell cells[AN_CELLS_MOST + 2];
    if (an_head_split(head->layout, text, n, cells) > AN_CELLS_MOST)
        return an_fail(err, AN_E_LIMIT, NULL, "more than %d fields", AN_CELLS_MOST);
    return cells[0].n ? an_head_add(head, cells[0], cells[1], cells[2], line, comment, err) : AN_OK;
}

an_status an_head_finish(const an_head *head, const char *path, an_error *err)
{
    char place[512];
    if (head->n_unmapped == 0)
        return AN_OK;
    snprintf(place, sizeof place, "%.480s:%ld", path, head->first_line);
    int n_more = head->n_unmapped - UNMAPPED_SHOWN;
    if (n_more <= 0)
        return an_fail(err, AN_E_FORMAT, place,
                       "the layout maps no key %s; map it in <head>, or list it as ignored", head->unmapped);
    return an_fail(err, AN_E_FORMAT, place,
                   "the layout maps no key %s and %d more; is this dump of another layout?", head->unmapped,
                   n_more);
}
