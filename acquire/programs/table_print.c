/* table_print.c: one table of a document as CSV. Bursts and points are handled one at a time while the
 * document streams, so that a run document of any size takes the memory of one burst; the table itself is
 * held until the document proves whole, and only then printed.
 */
#include "acquire/programs/table.h"

#include "anelast/number.h"

#include <stdlib.h>
#include <string.h>

/* A table on its way out. */
typedef struct printing {
    FILE *out;             /* into memory */
    const char *name;      /* asked for; NULL the main one */
    const an_table *table; /* NULL until the root is known */
    int n_row;
} printing;

/* A cell of text that a spreadsheet would take for a formula gets a mark in front; numbers stay numbers. */
static int looks_like_formula(const char *text)
{
    double value;
    return text[0] && strchr("=+-@\t\r", text[0]) && !an_number_parse(text, strlen(text), '.', &value);
}

static void put_text(FILE *out, const char *text)
{
    int guarded = looks_like_formula(text);
    if (!text[strcspn(text, ",\"\r\n")] && !guarded) {
        fputs(text, out);
        return;
    }
    fputs(guarded ? "\"'" : "\"", out);
    for (; *text; text++) {
        if (*text == '"')
            fputc('"', out);
        fputc(*text, out);
    }
    fputc('"', out);
}

static void put_codes(FILE *out, const an_xml_node *row)
{
    const char *between = "";
    for (const an_xml_node *remark = an_xml_child(row, "remark"); remark;
         remark = an_xml_next(remark, "remark")) {
        const char *code = an_xml_attribute_of(remark, "code");
        fprintf(out, "%s%s", between, code ? code : "");
        between = " ";
    }
}

/* A quantity as it stands where its unit is the head's, converted where it is not. */
static an_status put_quantity(FILE *out, const an_xml_node *node, const char *attribute, const char *unit,
                              an_error *err)
{
    const char *given = an_xml_attribute_of(node, "unit");
    if (!given || strcmp(given, unit) == 0) {
        put_text(out, an_xml_attribute_of(node, attribute));
        return AN_OK;
    }
    an_conversion conversion;
    double value;
    char number[AN_NUMBER_SIZE];
    if (an_unit_convert(given, unit, &conversion, err) < 0)
        return an_xml_fail(node, err, AN_E_UNIT, "unit '%s' where %s is wanted", given, unit);
    AN_TRY(an_xml_double(node, attribute, &value, err));
    int is_value = strcmp(attribute, "value") == 0;
    an_number_print(is_value ? an_unit_si(&conversion, value) : an_unit_si_difference(&conversion, value),
                    number);
    fputs(number, out);
    return AN_OK;
}

/* Follow a column's path from a row; what is absent is an empty cell. */
static an_status put_cell(FILE *out, const an_xml_node *row, const an_column *column, an_error *err)
{
    const an_xml_node *node = row;
    const char *path = column->path;
    for (const char *slash; node && (slash = strchr(path, '/')); path = slash + 1) {
        char name[64];
        snprintf(name, sizeof name, "%.*s", (int)(slash - path), path);
        node = strcmp(name, "..") == 0 ? node->parent : an_xml_child(node, name);
    }
    if (!node)
        return AN_OK;
    if (strcmp(path, "codes()") == 0) {
        put_codes(out, node);
        return AN_OK;
    }
    const char *text = path[0] == '@' ? an_xml_attribute_of(node, path + 1) : node->text;
    if (!text)
        return AN_OK;
    if (column->unit)
        return put_quantity(out, node, path + 1, column->unit, err);
    put_text(out, text);
    return AN_OK;
}

static void put_heads(FILE *out, const an_table *table)
{
    for (size_t i = 0; i < table->n_columns; i++)
        fprintf(out, "%s%s", i ? "," : "", table->columns[i].head);
    fputc('\n', out);
}

static an_status put_row(printing *print, const an_xml_node *row, an_error *err)
{
    for (size_t i = 0; i < print->table->n_columns; i++) {
        if (i)
            fputc(',', print->out);
        AN_TRY(put_cell(print->out, row, &print->table->columns[i], err));
    }
    fputc('\n', print->out);
    print->n_row++;
    return AN_OK;
}

/* Rows below a node whose own name is the first word of the path. */
static an_status put_rows(printing *print, const an_xml_node *node, const char *path, size_t n_path,
                          an_error *err)
{
    const char *slash = memchr(path, '/', n_path);
    size_t n = slash ? (size_t)(slash - path) : n_path;
    int fits = (n == 1 && path[0] == '*') || (strlen(node->name) == n && memcmp(node->name, path, n) == 0);
    if (!fits)
        return AN_OK;
    if (!slash)
        return put_row(print, node, err);
    for (const an_xml_node *child = an_xml_child(node, NULL); child; child = an_xml_next(child, NULL))
        AN_TRY(put_rows(print, child, slash + 1, n_path - n - 1, err));
    return AN_OK;
}

/* All alternatives of the table's path from one child of the root. */
static an_status put_child(printing *print, const an_xml_node *child, an_error *err)
{
    const char *path = print->table->rows;
    for (size_t n; *path; path += n + (path[n] == ' ')) {
        n = strcspn(path, " ");
        AN_TRY(put_rows(print, child, path, n, err));
    }
    return AN_OK;
}

static an_status choose(printing *print, const an_xml_node *root, an_error *err)
{
    if (print->table)
        return AN_OK;
    print->table = an_table_find(root->name, print->name);
    if (!print->table)
        return an_xml_fail(root, err, AN_E_USAGE, "no table '%s' in a %s document; --list names them",
                           print->name, root->name);
    put_heads(print->out, print->table);
    return AN_OK;
}

static an_status visit(void *context, const an_xml_document *document, const an_xml_node *node, an_error *err)
{
    printing *print = context;
    if (print->name && strcmp(print->name, "list()") == 0)
        return AN_OK;
    AN_TRY(choose(print, document->root, err));
    return put_child(print, node, err);
}

static an_status print_rest(printing *print, const an_xml_node *root, an_error *err)
{
    if (print->name && strcmp(print->name, "list()") == 0) {
        an_table_list(root->name, print->out);
        return AN_OK;
    }
    AN_TRY(choose(print, root, err));
    for (const an_xml_node *child = an_xml_child(root, NULL); child; child = an_xml_next(child, NULL))
        AN_TRY(put_child(print, child, err));
    return AN_OK;
}

an_status an_table_print(const char *path, const char *name, FILE *out, an_error *err)
{
    static const char *const streamed[] = {"burst", "point", NULL};
    char *text = NULL;
    size_t n_text = 0;
    an_xml_document document = {0};
    printing print = {open_memstream(&text, &n_text), name, NULL, 0};
    if (!print.out)
        return an_fail_memory(err, "a table");
    an_xml_reading reading = {.streamed = streamed, .visit = visit, .context = &print};
    an_status status = an_xml_read(path, &reading, &document, err);
    if (status >= 0)
        status = print_rest(&print, document.root, err);
    if (fclose(print.out) != 0 && status >= 0)
        status = an_fail_memory(err, "a table");
    if (status >= 0 && fwrite(text, 1, n_text, out) != n_text)
        status = an_fail(err, AN_E_IO, NULL, "the table cannot be written");
    free(text);
    an_xml_document_clear(&document);
    return status;
}
