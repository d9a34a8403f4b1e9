/* The choices in force: defaults, what a procedure document sets, and the document that says all of it. */
#include "anelast/procedure.h"

#include "anelast/number.h"

#include <math.h>
#include <string.h>

/* Whether a word stands in a list separated by blanks. */
static bool is_among(const char *words, const char *word)
{
    size_t n = strlen(word);
    for (const char *s = words; s && *s;) {
        size_t length = strcspn(s, " ");
        if (length == n && memcmp(s, word, n) == 0)
            return true;
        s += length;
        s += strspn(s, " ");
    }
    return false;
}

/* The index of a choice, AN_CHOICES_MOST where there is none. */
static size_t find(const char *name)
{
    const an_choice *row;
    for (size_t i = 0; (row = an_choice_row(i)); i++)
        if (strcmp(row->name, name) == 0)
            return i;
    return AN_CHOICES_MOST;
}

/* What a row allows, for a message. */
static void describe(const an_choice *row, char *text, size_t n_text)
{
    char least[AN_NUMBER_SIZE], most[AN_NUMBER_SIZE];
    an_number_print(row->least, least);
    an_number_print(row->most, most);
    if (!row->unit)
        snprintf(text, n_text, "one of: %s", row->words);
    else
        snprintf(text, n_text, "%s to %s%s%s%s%s", least, most, strcmp(row->unit, "1") ? " " : "",
                 strcmp(row->unit, "1") ? row->unit : "", row->words ? ", or " : "",
                 row->words ? row->words : "");
}

/* Temperatures are absolute; everything else in K is a difference, in which degC would mislead. */
static bool is_absolute(const an_choice *row)
{
    return strcmp(row->name, "reference_temperature") == 0;
}

/* The coherent SI unit of a row's unit. */
static const char *si_unit(const an_choice *row)
{
    static const struct {
        const char *shown, *si;
    } units[] = {{"deg", "rad"}, {"K/min", "K/s"}, {"%", "1"}, {"mm", "m"}, {"min", "s"}, {"h", "s"}};
    for (size_t i = 0; i < sizeof units / sizeof units[0]; i++)
        if (strcmp(units[i].shown, row->unit) == 0)
            return units[i].si;
    return row->unit;
}

/* A number in a unit as SI, checked against the row's range. */
static an_status set_number(const an_choice *row, const char *text, double number, const char *unit,
                            an_choice_value *value, an_error *err)
{
    an_conversion given, shown;
    char allowed[200];
    AN_TRY(an_unit_convert(unit, si_unit(row), &given, err));
    AN_TRY(an_unit_convert(row->unit, si_unit(row), &shown, err));
    if (given.offset != 0 && !is_absolute(row))
        return an_fail(err, AN_E_UNIT, NULL, "choice '%s' is a difference; its unit is '%s'; allowed is %s",
                       row->name, unit, row->unit);
    double si = an_unit_si(&given, number);
    if (!(si >= an_unit_si(&shown, row->least) && si <= an_unit_si(&shown, row->most))) {
        describe(row, allowed, sizeof allowed);
        return an_fail(err, AN_E_VALUE, NULL, "choice '%s' is '%s'; allowed is %s", row->name, text, allowed);
    }
    *value = (an_choice_value){.number = si};
    return AN_OK;
}

an_status an_procedure_set(an_procedure *procedure, const char *name, const char *text, const char *unit,
                           an_error *err)
{
    size_t i = find(name);
    double number;
    char allowed[200];
    if (i == AN_CHOICES_MOST)
        return an_fail(err, AN_E_USAGE, NULL, "choice '%.60s' is not known; --show-procedure lists them",
                       name);
    const an_choice *row = an_choice_row(i);
    if (is_among(row->words, text)) {
        procedure->values[i] = (an_choice_value){.number = NAN};
        snprintf(procedure->values[i].word, sizeof procedure->values[i].word, "%s", text);
        return AN_OK;
    }
    describe(row, allowed, sizeof allowed);
    if (!row->unit)
        return an_fail(err, AN_E_VALUE, NULL, "choice '%s' is '%.60s'; allowed is %s", name, text, allowed);
    size_t n = strspn(text, "+-.0123456789eE");
    if (!an_number_parse(text, n, '.', &number) || text[n] == ',' || (unit && text[n]))
        return an_fail(err, AN_E_VALUE, NULL, "choice '%s' is '%.60s'; allowed is %s", name, text, allowed);
    if (!unit)
        unit = text[n + strspn(text + n, " ")] ? text + n : row->unit;
    return set_number(row, text, number, unit, &procedure->values[i], err);
}

void an_procedure_init(an_procedure *procedure)
{
    const an_choice *row;
    *procedure = (an_procedure){0};
    for (size_t i = 0; (row = an_choice_row(i)); i++)
        an_procedure_set(procedure, row->name, row->standard, row->unit, NULL);
}

/* One `choice` element. */
static an_status read_choice(const an_xml_node *node, an_procedure *procedure, an_error *err)
{
    const char *name, *value;
    an_error inner = {0};
    AN_TRY(an_xml_text(node, "name", &name, err));
    AN_TRY(an_xml_text(node, "value", &value, err));
    if (find(name) == AN_CHOICES_MOST && procedure->newer)
        return AN_OK;
    an_status status = an_procedure_set(procedure, name, value, an_xml_attribute_of(node, "unit"), &inner);
    if (status < 0)
        return an_xml_fail(node, err, status == AN_E_USAGE ? AN_E_VALUE : status, "%s", inner.text);
    return AN_OK;
}

/* A procedure document's own file name. */
static void remember_file(an_procedure *procedure, const an_xml_document *document)
{
    const char *slash = strrchr(document->file, '/');
    snprintf(procedure->file, sizeof procedure->file, "%s", slash ? slash + 1 : document->file);
    memcpy(procedure->sha256, document->sha256, sizeof procedure->sha256);
}

an_status an_procedure_read(const char *path, an_procedure *procedure, an_error *err)
{
    an_procedure_init(procedure);
    if (!path)
        return AN_OK;
    an_xml_reading reading = {.root = "procedure"};
    an_xml_document document;
    an_status status = an_xml_read(path, &reading, &document, err);
    if (status == AN_OK) {
        procedure->newer = document.newer;
        remember_file(procedure, &document);
        const an_xml_node *node = an_xml_child(document.root, "choice");
        for (; node && status == AN_OK; node = an_xml_next(node, "choice"))
            status = read_choice(node, procedure, err);
    }
    an_xml_document_clear(&document);
    return status;
}

double an_procedure_number(const an_procedure *procedure, const char *name)
{
    size_t i = find(name);
    return i == AN_CHOICES_MOST ? NAN : procedure->values[i].number;
}

const char *an_procedure_word(const an_procedure *procedure, const char *name)
{
    size_t i = find(name);
    return i == AN_CHOICES_MOST ? "" : procedure->values[i].word;
}

bool an_procedure_is(const an_procedure *procedure, const char *name, const char *word)
{
    return strcmp(an_procedure_word(procedure, name), word) == 0;
}

/* A value in the row's own unit, as text. What was read as "0.1" must be shown as 0.1, so the shortest text
 * is taken that means the same SI value. */
static void print_value(const an_choice *row, const an_choice_value *value, char text[AN_NUMBER_SIZE])
{
    an_conversion shown = {.factor = 1, .divisor = 1};
    if (isnan(value->number)) {
        snprintf(text, AN_NUMBER_SIZE, "%s", value->word);
        return;
    }
    an_unit_convert(row->unit, si_unit(row), &shown, NULL);
    double number = (value->number - shown.offset) * shown.divisor / shown.factor;
    for (int digits = 1; digits <= 15; digits++) {
        char tried[AN_NUMBER_SIZE];
        double again = 0;
        snprintf(tried, sizeof tried, "%.*g", digits, number);
        if (an_number_parse(tried, strlen(tried), '.', &again) &&
            an_unit_si(&shown, again) == value->number) {
            an_number_print(again, text);
            return;
        }
    }
    an_number_print(number, text);
}

an_status an_procedure_record(const an_procedure *procedure, const char *stage, an_made *made, an_error *err)
{
    const an_choice *row;
    bool listed = false;
    for (size_t i = 0; i < made->n_inputs; i++)
        listed = listed || strcmp(made->inputs[i].role, "procedure") == 0;
    if (*procedure->sha256 && !listed)
        AN_TRY(an_made_add_input(made, "procedure", procedure->file, procedure->sha256, err));
    for (size_t i = 0; (row = an_choice_row(i)); i++) {
        char text[AN_NUMBER_SIZE];
        const an_choice_value *value = &procedure->values[i];
        if (strcmp(row->stage, stage) != 0)
            continue;
        print_value(row, value, text);
        AN_TRY(an_made_add_choice(made, row->name, text, isnan(value->number) ? "" : row->unit, err));
    }
    return AN_OK;
}

static void write_choice(an_xml_writer *writer, const an_choice *row, const an_choice_value *value)
{
    char text[AN_NUMBER_SIZE], allowed[200];
    print_value(row, value, text);
    describe(row, allowed, sizeof allowed);
    an_xml_start(writer, "choice");
    an_xml_put(writer, "name", row->name);
    an_xml_put(writer, "value", text);
    an_xml_put(writer, "unit", isnan(value->number) ? NULL : row->unit);
    an_xml_put(writer, "stage", row->stage);
    an_xml_put(writer, "allowed", allowed);
    an_xml_put(writer, "source", row->source);
    an_xml_put_text(writer, row->help);
    an_xml_end(writer);
}

an_status an_procedure_write(const an_procedure *procedure, FILE *stream, an_error *err)
{
    const an_choice *row;
    an_xml_writer *writer = an_xml_writer_new(stream, "procedure");
    if (!writer)
        return an_fail_memory(err, "a document");
    for (size_t i = 0; (row = an_choice_row(i)); i++)
        write_choice(writer, row, &procedure->values[i]);
    an_status status = an_xml_writer_finish(writer, err);
    an_xml_writer_free(&writer);
    return status;
}
