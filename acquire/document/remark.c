/* Lists of remarks: made, counted, read and written. */
#include "anelast/remark.h"

#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

static const char *const severity_words[] = {"note", "flag", "skip", "hold", "halt", NULL};

const char *an_severity_name(an_severity severity)
{
    return severity_words[severity];
}

const an_remark_kind *an_remark_kind_find(const char *code)
{
    const an_remark_kind *kind;
    for (size_t i = 0; (kind = an_remark_kind_row(i)); i++)
        if (strcmp(kind->code, code) == 0)
            return kind;
    return NULL;
}

/* Append a row; takes the text over, and frees it where there is no memory. */
static an_status append(an_remark_list *remarks, an_remark row, an_error *err)
{
    if (row.text && remarks->n == remarks->room) {
        size_t room = 2 * remarks->room + 8;
        an_remark *grown = realloc(remarks->rows, room * sizeof *grown);
        if (grown) {
            remarks->rows = grown;
            remarks->room = room;
        }
    }
    if (!row.text || remarks->n == remarks->room) {
        free(row.text);
        return an_fail_memory(err, "a remark");
    }
    remarks->rows[remarks->n++] = row;
    return AN_OK;
}

static an_status add(an_remark_list *remarks, const an_remark_kind *kind, const an_remark *row, an_error *err,
                     const char *format, va_list args)
{
    an_remark filled = *row;
    filled.kind = kind;
    if (vasprintf(&filled.text, format, args) < 0)
        filled.text = NULL;
    return append(remarks, filled, err);
}

an_status an_remark_list_add(an_remark_list *remarks, const char *code, long burst, an_error *err,
                             const char *format, ...)
{
    const an_remark_kind *kind = an_remark_kind_find(code);
    if (!kind)
        return an_fail(err, AN_E_USAGE, NULL, "remark code '%s' has no row in the table", code);
    an_remark row = {.severity = kind->severity, .burst = burst};
    va_list args;
    va_start(args, format);
    an_status status = add(remarks, kind, &row, err, format, args);
    va_end(args);
    return status;
}

an_status an_remark_list_add_as(an_remark_list *remarks, const char *code, an_severity severity, long burst,
                                an_error *err, const char *format, ...)
{
    const an_remark_kind *kind = an_remark_kind_find(code);
    if (!kind)
        return an_fail(err, AN_E_USAGE, NULL, "remark code '%s' has no row in the table", code);
    an_remark row = {.severity = severity, .burst = burst};
    va_list args;
    va_start(args, format);
    an_status status = add(remarks, kind, &row, err, format, args);
    va_end(args);
    return status;
}

size_t an_remark_list_count(const an_remark_list *remarks, an_severity severity, long burst)
{
    size_t n = 0;
    for (size_t i = 0; i < remarks->n; i++)
        n += remarks->rows[i].severity == severity && (burst < 0 || remarks->rows[i].burst == burst);
    return n;
}

int an_remark_list_worst(const an_remark_list *remarks, long burst)
{
    int worst = -1;
    for (size_t i = 0; i < remarks->n; i++)
        if ((burst < 0 || remarks->rows[i].burst == burst) && (int)remarks->rows[i].severity > worst)
            worst = (int)remarks->rows[i].severity;
    return worst;
}

bool an_remark_list_has(const an_remark_list *remarks, const char *code, long burst)
{
    for (size_t i = 0; i < remarks->n; i++)
        if ((burst < 0 || remarks->rows[i].burst == burst) && strcmp(remarks->rows[i].kind->code, code) == 0)
            return true;
    return false;
}

static an_status read_one(const an_xml_node *node, an_remark_list *remarks, an_error *err)
{
    const char *code;
    int severity = 0;
    int64_t burst = 0;
    AN_TRY(an_xml_text(node, "code", &code, err));
    AN_TRY(an_xml_word(node, "severity", severity_words, &severity, err));
    if (an_xml_attribute_of(node, "burst"))
        AN_TRY(an_xml_integer(node, "burst", 0, INT32_MAX, &burst, err));
    if (an_remark_kind_find(code))
        return an_remark_list_add_as(remarks, code, (an_severity)severity, (long)burst, err, "%s",
                                     node->text);
    return an_remark_list_add_as(remarks, "other-remark", (an_severity)severity, (long)burst, err, "%s: %s",
                                 code, node->text);
}

an_status an_remark_list_read(const an_xml_node *node, an_remark_list *remarks, an_error *err)
{
    for (const an_xml_node *n = an_xml_child(node, "remark"); n; n = an_xml_next(n, "remark"))
        AN_TRY(read_one(n, remarks, err));
    return AN_OK;
}

void an_remark_list_write(an_xml_writer *writer, const an_remark_list *remarks, long burst)
{
    for (size_t i = 0; i < remarks->n; i++) {
        const an_remark *row = &remarks->rows[i];
        if (burst >= 0 && row->burst != burst)
            continue;
        an_xml_start(writer, "remark");
        an_xml_put(writer, "code", row->kind->code);
        an_xml_put(writer, "severity", severity_words[row->severity]);
        if (row->burst > 0)
            an_xml_put_integer(writer, "burst", row->burst);
        an_xml_put(writer, "action", row->kind->action);
        an_xml_put_text(writer, row->text);
        an_xml_end(writer);
    }
}

void an_remark_list_clear(an_remark_list *remarks)
{
    for (size_t i = 0; i < remarks->n; i++)
        free(remarks->rows[i].text);
    free(remarks->rows);
    *remarks = (an_remark_list){0};
}
