/* The layout document read into its struct. The schema has checked words and structure; what it cannot see is
 * checked here: that each role stands once, that what the bursts need is there, that units have the dimension
 * of their role.
 */
#include "anelast/layout.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* A role's word and unit. */
typedef struct role_row {
    const char *name;
    const char *unit;    /* SI, UCUM; NULL: a word or a plain number */
    const char *torsion; /* the SI unit that stands in its place in torsion; NULL */
} role_row;

static const role_row roles[AN_N_ROLES] = {
    [AN_ROLE_STEP] = {"step", NULL, NULL},
    [AN_ROLE_TIME] = {"time", "s", NULL},
    [AN_ROLE_DISPLACEMENT] = {"displacement", "m", "rad"},
    [AN_ROLE_FORCE] = {"force", "N", "N.m"},
    [AN_ROLE_TEMPERATURE] = {"temperature", "K", NULL},
    [AN_ROLE_SET_FREQUENCY] = {"set_frequency", "Hz", NULL},
    [AN_ROLE_SET_TEMPERATURE] = {"set_temperature", "K", NULL},
    [AN_ROLE_SAMPLES] = {"samples", NULL, NULL},
    [AN_ROLE_FIRST_SAMPLE] = {"first_sample", NULL, NULL},
    [AN_ROLE_RATE] = {"rate", "Hz", NULL},
    [AN_ROLE_INTERVAL] = {"interval", "s", NULL},
    [AN_ROLE_START] = {"start", "s", NULL},
    [AN_ROLE_TYPE] = {"type", NULL, NULL},
    [AN_ROLE_BYTE_ORDER] = {"byte_order", NULL, NULL},
    [AN_ROLE_ARRANGEMENT] = {"arrangement", NULL, NULL},
    [AN_ROLE_CHANNELS] = {"channels", NULL, NULL},
};

const char *an_role_name(an_role role)
{
    return roles[role].name;
}

const char *an_role_unit(an_role role)
{
    return roles[role].unit;
}

bool an_names_has(const an_names *names, const char *text, size_t n)
{
    for (int i = 0; i < names->n; i++)
        if (strlen(names->text[i]) == n && memcmp(names->text[i], text, n) == 0)
            return true;
    return false;
}

const an_layout_value *an_layout_value_of(const an_layout *layout, const char *key, size_t n)
{
    for (int i = 0; i < layout->n_value; i++)
        if (an_names_has(&layout->values[i].keys, key, n))
            return &layout->values[i];
    return NULL;
}

/* Texts of all children of one name. */
static an_status read_names(const an_xml_node *node, const char *child_name, an_names *names, an_error *err)
{
    for (const an_xml_node *child = an_xml_child(node, child_name); child;
         child = an_xml_next(child, child_name)) {
        if (names->n == AN_NAMES_MOST)
            return an_xml_fail(child, err, AN_E_LIMIT, "more than %d alternatives", AN_NAMES_MOST);
        names->text[names->n++] = child->text;
    }
    return AN_OK;
}

static an_status read_yes(const an_xml_node *node, const char *name, bool *yes, an_error *err)
{
    static const char *const words[] = {"no", "yes", NULL};
    int which = *yes;
    if (an_xml_attribute_of(node, name))
        AN_TRY(an_xml_word(node, name, words, &which, err));
    *yes = which == 1;
    return AN_OK;
}

/* A word where it is given; *which keeps its default where it is not. */
static an_status read_word(const an_xml_node *node, const char *name, const char *const *words, int *which,
                           an_error *err)
{
    return an_xml_attribute_of(node, name) ? an_xml_word(node, name, words, which, err) : AN_OK;
}

static char separator_of(int which)
{
    static const char separators[] = {'\t', ';', ',', ' ', '|'};
    return separators[which];
}

static an_status read_marks(const an_xml_node *node, an_text_form *form, an_error *err)
{
    AN_TRY(read_names(node, "missing", &form->missing, err));
    const an_xml_node *overrange = an_xml_child(node, "overrange");
    form->overrange = NAN;
    return overrange ? an_xml_double(overrange, "from", &form->overrange, err) : AN_OK;
}

static an_status read_quote(const an_xml_node *node, an_text_form *form, an_error *err)
{
    const char *quote = an_xml_attribute_of(node, "quote");
    if (quote && strlen(quote) != 1)
        return an_xml_fail(node, err, AN_E_VALUE, "quote '%s' is not one character", quote);
    form->quote = quote ? quote[0] : '\0';
    return AN_OK;
}

static an_status read_text_form(const an_xml_node *node, an_text_form *form, an_error *err)
{
    static const char *const encodings[] = {"UTF-8",      "UTF-16",       "UTF-16LE", "UTF-16BE",
                                            "ISO-8859-1", "Windows-1252", NULL};
    static const char *const separators[] = {"tab", "semicolon", "comma", "blanks", "bar", NULL};
    static const char *const decimal_marks[] = {".", ",", NULL};
    static const char *const unit_rows[] = {"found", "yes", "no", NULL};
    int encoding = 0, separator = 0, decimal = 0, unit_row = 0;
    AN_TRY(read_word(node, "encoding", encodings, &encoding, err));
    AN_TRY(read_word(node, "separator", separators, &separator, err));
    AN_TRY(read_word(node, "decimal_mark", decimal_marks, &decimal, err));
    AN_TRY(read_word(node, "unit_row", unit_rows, &unit_row, err));
    form->encoding = (an_encoding)encoding;
    form->separator = separator_of(separator);
    form->decimal_mark = decimal_marks[decimal][0];
    form->unit_row = (an_unit_row_rule)unit_row;
    form->comment = an_xml_attribute_of(node, "comment");
    form->footer = an_xml_attribute_of(node, "footer");
    form->header = true;
    AN_TRY(read_yes(node, "header", &form->header, err));
    AN_TRY(read_quote(node, form, err));
    if (form->separator == form->decimal_mark)
        return an_xml_fail(node, err, AN_E_VALUE, "separator and decimal mark are both '%c'",
                           form->decimal_mark);
    return read_marks(node, form, err);
}

static an_status read_counts_form(const an_xml_node *node, an_layout *layout, an_error *err)
{
    static const char *const types[] = {"int16", "int24", "int32", "float32", "float64", NULL};
    static const char *const orders[] = {"little", "big", NULL};
    static const char *const arrangements[] = {"interleaved", "planar", NULL};
    an_counts_form *form = &layout->counts;
    int type = 0, order = 0, arrangement = 0;
    int64_t offset = 0;
    AN_TRY(an_xml_word(node, "type", types, &type, err));
    AN_TRY(read_word(node, "byte_order", orders, &order, err));
    AN_TRY(read_word(node, "arrangement", arrangements, &arrangement, err));
    if (an_xml_attribute_of(node, "offset"))
        AN_TRY(an_xml_integer(node, "offset", 0, 1 << 30, &offset, err));
    form->present = true;
    form->type = (an_count_type)type;
    form->big_endian = order == 1;
    form->planar = arrangement == 1;
    form->offset = (long)offset;
    const an_xml_node *sidecar = an_xml_child(node, "sidecar");
    if (!sidecar)
        return AN_OK;
    AN_TRY(an_xml_text(sidecar, "extension", &form->sidecar, err));
    form->channel_key = an_xml_attribute_of(sidecar, "channel_key");
    form->burst_key = an_xml_attribute_of(sidecar, "burst_key");
    return read_text_form(sidecar, &layout->text, err);
}

static an_status read_field(const an_xml_node *node, an_layout_field *field, an_error *err)
{
    an_specimen probe;
    size_t size;
    AN_TRY(an_xml_text(node, "name", &field->name, err));
    field->unit = an_xml_attribute_of(node, "unit");
    field->form = an_xml_attribute_of(node, "form");
    field->zone = an_xml_attribute_of(node, "zone");
    AN_TRY(read_names(node, "key", &field->keys, err));
    an_specimen_init(&probe);
    const char *unit = NULL;
    if (an_geometry_dimension(&probe.geometry, field->name, &unit)) {
        an_conversion conversion;
        if (field->unit && an_unit_convert(field->unit, unit, &conversion, err) < 0)
            return an_xml_fail(node, err, AN_E_UNIT, "unit '%s' of %s is no [%s]", field->unit, field->name,
                               unit);
    } else if (strcmp(field->name, "geometry") != 0 && !an_specimen_label(&probe, field->name, &size)) {
        return an_xml_fail(node, err, AN_E_VALUE, "a specimen has no '%s'", field->name);
    }
    for (const an_xml_node *word = an_xml_child(node, "word"); word; word = an_xml_next(word, "word")) {
        if (field->texts.n == AN_NAMES_MOST)
            return an_xml_fail(word, err, AN_E_LIMIT, "more than %d words", AN_NAMES_MOST);
        AN_TRY(an_xml_text(word, "means", &field->words.text[field->words.n++], err));
        field->texts.text[field->texts.n++] = word->text;
    }
    return AN_OK;
}

static an_status read_head(const an_xml_node *node, an_layout *layout, an_error *err)
{
    layout->key_separator = an_xml_attribute_of(node, "key_separator");
    for (const an_xml_node *child = an_xml_child(node, NULL); child; child = an_xml_next(child, NULL)) {
        bool ignored = strcmp(child->name, "ignored") == 0;
        if (!ignored && strcmp(child->name, "field") != 0)
            continue;
        if ((ignored ? layout->n_ignored_key : layout->n_field) == AN_FIELDS_MOST)
            return an_xml_fail(child, err, AN_E_LIMIT, "more than %d fields", AN_FIELDS_MOST);
        if (ignored)
            AN_TRY(read_names(child, "key", &layout->ignored_keys[layout->n_ignored_key++], err));
        else
            AN_TRY(read_field(child, &layout->fields[layout->n_field++], err));
    }
    return AN_OK;
}

static an_status read_role(const an_xml_node *node, int n_allowed, an_role *role, an_error *err)
{
    const char *words[AN_N_ROLES + 1] = {NULL};
    int which;
    for (int i = 0; i < n_allowed; i++)
        words[i] = roles[i].name;
    AN_TRY(an_xml_word(node, "role", words, &which, err));
    *role = (an_role)which;
    return AN_OK;
}

/* A unit that is stated must have the role's dimension. */
static an_status check_unit(const an_xml_node *node, an_role role, const char *unit, an_error *err)
{
    an_conversion conversion;
    if (!unit || !roles[role].unit || an_unit_convert(unit, roles[role].unit, &conversion, NULL) >= 0)
        return AN_OK;
    if (roles[role].torsion && an_unit_convert(unit, roles[role].torsion, &conversion, NULL) >= 0)
        return AN_OK;
    return an_xml_fail(node, err, AN_E_UNIT, "unit '%s' is no unit of %s [%s]", unit, roles[role].name,
                       roles[role].unit);
}

static an_status read_channel(const an_xml_node *node, an_layout_channel *channel, an_error *err)
{
    int64_t position = 0;
    bool inverted = false;
    AN_TRY(read_role(node, AN_N_COLUMN_ROLES, &channel->role, err));
    channel->unit = an_xml_attribute_of(node, "unit");
    AN_TRY(check_unit(node, channel->role, channel->unit, err));
    AN_TRY(an_xml_double_or(node, "gain", 1, &channel->gain, err));
    AN_TRY(read_yes(node, "inverted", &inverted, err));
    AN_TRY(read_yes(node, "optional", &channel->optional, err));
    if (inverted)
        channel->gain = -channel->gain;
    if (channel->gain == 0)
        return an_xml_fail(node, err, AN_E_VALUE, "gain 0");
    if (an_xml_attribute_of(node, "position"))
        AN_TRY(an_xml_integer(node, "position", 1, 1000, &position, err));
    channel->position = (int)position;
    AN_TRY(read_names(node, "column", &channel->columns, err));
    if (channel->columns.n == 0 && channel->position == 0)
        return an_xml_fail(node, err, AN_E_DOCUMENT, "neither a column's name nor its position");
    return AN_OK;
}

static an_status add_channel(const an_xml_node *node, an_layout *layout, an_error *err)
{
    an_layout_channel *channel = &layout->channels[layout->n_channel];
    AN_TRY(read_channel(node, channel, err));
    for (int i = 0; i < layout->n_channel; i++)
        if (layout->channels[i].role == channel->role)
            return an_xml_fail(node, err, AN_E_DOCUMENT, "a second channel with role %s",
                               an_role_name(channel->role));
    layout->n_channel++;
    return AN_OK;
}

static an_status read_channels(const an_xml_node *node, an_layout *layout, an_error *err)
{
    for (const an_xml_node *child = an_xml_child(node, NULL); child; child = an_xml_next(child, NULL)) {
        bool ignored = strcmp(child->name, "ignored") == 0;
        if (!ignored && strcmp(child->name, "channel") != 0)
            continue;
        if ((ignored ? layout->n_ignored_column : layout->n_channel) == AN_CHANNELS_MOST)
            return an_xml_fail(child, err, AN_E_LIMIT, "more than %d channels", AN_CHANNELS_MOST);
        if (ignored)
            AN_TRY(read_names(child, "column", &layout->ignored_columns[layout->n_ignored_column++], err));
        else
            AN_TRY(add_channel(child, layout, err));
    }
    an_measure rate;
    AN_TRY(an_xml_measure_optional(node, "rate", "Hz", &rate, err));
    layout->rate_Hz = rate.value;
    return AN_OK;
}

static an_status read_bursts(const an_xml_node *node, an_layout *layout, an_error *err)
{
    static const char *const sources[] = {"step", "blocks", "table", "signals", "whole", NULL};
    static const char *const burst_kinds[] = {"oscillation", "hold", "pull", NULL};
    int from, kind = 0;
    AN_TRY(an_xml_word(node, "from", sources, &from, err));
    AN_TRY(read_word(node, "kind", burst_kinds, &kind, err));
    layout->bursts_from = (an_bursts_from)from;
    layout->kind = (an_burst_kind)kind;
    layout->block_mark = an_xml_attribute_of(node, "mark");
    if (layout->bursts_from == AN_BURSTS_BLOCKS && !layout->block_mark)
        return an_xml_fail(node, err, AN_E_DOCUMENT, "bursts from blocks need the mark that opens a block");
    for (const an_xml_node *child = an_xml_child(node, "value"); child; child = an_xml_next(child, "value")) {
        if (layout->n_value == AN_VALUES_MOST)
            return an_xml_fail(child, err, AN_E_LIMIT, "more than %d values", AN_VALUES_MOST);
        an_layout_value *value = &layout->values[layout->n_value++];
        AN_TRY(read_role(child, AN_N_ROLES, &value->role, err));
        value->unit = an_xml_attribute_of(child, "unit");
        AN_TRY(check_unit(child, value->role, value->unit, err));
        AN_TRY(read_names(child, "key", &value->keys, err));
    }
    return AN_OK;
}

static bool has_channel(const an_layout *layout, an_role role)
{
    for (int i = 0; i < layout->n_channel; i++)
        if (layout->channels[i].role == role)
            return true;
    return false;
}

static bool has_value(const an_layout *layout, an_role role)
{
    for (int i = 0; i < layout->n_value; i++)
        if (layout->values[i].role == role)
            return true;
    return false;
}

/* What a burst cannot do without. */
static an_status check_roles(const an_layout *layout, an_error *err)
{
    const an_xml_node *root = layout->document.root;
    if (!has_channel(layout, AN_ROLE_DISPLACEMENT) || !has_channel(layout, AN_ROLE_FORCE))
        return an_xml_fail(root, err, AN_E_DOCUMENT, "no channel of %s",
                           has_channel(layout, AN_ROLE_FORCE) ? "displacement" : "force");
    bool has_time = has_channel(layout, AN_ROLE_TIME) || has_value(layout, AN_ROLE_RATE) ||
                    has_value(layout, AN_ROLE_INTERVAL) || !isnan(layout->rate_Hz);
    if (!has_time)
        return an_xml_fail(root, err, AN_E_DOCUMENT, "nothing gives time: no channel, no rate, no interval");
    if (layout->bursts_from == AN_BURSTS_STEP && !has_channel(layout, AN_ROLE_STEP) &&
        !has_channel(layout, AN_ROLE_SET_FREQUENCY) && !has_channel(layout, AN_ROLE_SET_TEMPERATURE))
        return an_xml_fail(root, err, AN_E_DOCUMENT,
                           "bursts from a step column, but no channel has the role step");
    if (layout->counts.present &&
        (layout->bursts_from == AN_BURSTS_STEP || layout->bursts_from == AN_BURSTS_BLOCKS))
        return an_xml_fail(root, err, AN_E_DOCUMENT,
                           "a binary dump has bursts from a table, from signals, or is one");
    if (layout->bursts_from == AN_BURSTS_TABLE && !layout->counts.burst_key)
        return an_xml_fail(root, err, AN_E_DOCUMENT, "bursts from a table need the sidecar's burst_key");
    return AN_OK;
}

static an_status read_corrections(const an_xml_node *node, an_layout *layout, an_error *err)
{
    AN_TRY(read_yes(node, "compliance", &layout->compliance_corrected, err));
    return read_yes(node, "inertia", &layout->inertia_corrected, err);
}

static an_status read_parts(const an_xml_node *root, an_layout *layout, an_error *err)
{
    const an_xml_node *part = an_xml_child(root, "text");
    const char *id;
    AN_TRY(an_xml_text(root, "id", &id, err));
    snprintf(layout->id, sizeof layout->id, "%s", id);
    if (part) {
        AN_TRY(read_text_form(part, &layout->text, err));
    } else {
        AN_TRY(an_xml_need(root, "counts", &part, err));
        AN_TRY(read_counts_form(part, layout, err));
    }
    part = an_xml_child(root, "head");
    if (part)
        AN_TRY(read_head(part, layout, err));
    AN_TRY(an_xml_need(root, "channels", &part, err));
    AN_TRY(read_channels(part, layout, err));
    AN_TRY(an_xml_need(root, "bursts", &part, err));
    AN_TRY(read_bursts(part, layout, err));
    part = an_xml_child(root, "corrections");
    if (part)
        AN_TRY(read_corrections(part, layout, err));
    return check_roles(layout, err);
}

an_status an_layout_load(const char *path, an_layout *layout, an_error *err)
{
    an_xml_reading reading = {.root = "layout"};
    memset(layout, 0, sizeof *layout);
    layout->text.decimal_mark = '.';
    layout->text.separator = ' ';
    layout->text.overrange = NAN;
    AN_TRY(an_xml_read(path, &reading, &layout->document, err));
    memcpy(layout->sha256, layout->document.sha256, sizeof layout->sha256);
    return read_parts(layout->document.root, layout, err);
}

void an_layout_clear(an_layout *layout)
{
    an_xml_document_clear(&layout->document);
    memset(layout, 0, sizeof *layout);
}
