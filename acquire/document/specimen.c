/* The specimen document: who and what was tested, and its geometry, read from what people write, merged with
 * what the dump says, written into runs. One table says which dimension each element holds and in which unit;
 * another says which dimensions a kind of geometry cannot do without. Range: dimensions from 1 um to 2 m.
 */
#include "anelast/specimen.h"

#include <math.h>
#include <stddef.h>
#include <stdio.h>
#include <string.h>

static const char *const geometry_words[AN_GEOMETRY_COUNT] = {
    [AN_GEOMETRY_NONE] = "",
    [AN_TENSION] = "tension",
    [AN_COMPRESSION_FREE] = "compression, free faces",
    [AN_COMPRESSION_BONDED] = "compression, bonded",
    [AN_SHEAR_DOUBLE_LAP] = "shear, double lap",
    [AN_CANTILEVER_GUIDED] = "cantilever, guided end",
    [AN_CANTILEVER_FREE] = "cantilever, free end",
    [AN_CANTILEVER_DUAL] = "cantilever, dual",
    [AN_BENDING_THREE_POINT] = "bending, three-point",
    [AN_TORSION_RECTANGLE] = "torsion, rectangle",
    [AN_TORSION_CYLINDER] = "torsion, cylinder",
    [AN_PARALLEL_PLATES] = "parallel plates",
};

/* One dimension of a geometry. */
typedef struct dimension {
    const char *name;   /* of the element */
    const char *unit;   /* SI, UCUM */
    size_t offset;      /* of the measure in an_geometry */
    double least, most; /* [unit] plausible range; the checks name it */
} dimension;

#define PLACE(member) offsetof(an_geometry, member)

/* Plausible ranges are common practice: no bench clamps less than 1 um or more than 2 m. */
static const dimension dimensions[] = {
    {"length", "m", PLACE(length), 1e-6, 2},
    {"width", "m", PLACE(width), 1e-6, 2},
    {"thickness", "m", PLACE(thickness), 1e-6, 2},
    {"diameter", "m", PLACE(diameter), 1e-6, 2},
    {"height", "m", PLACE(height), 1e-6, 2},
    {"area", "m2", PLACE(area), 1e-12, 4},
    {"added_length", "m", PLACE(added_length), -0.1, 0.1},
    {"poisson", "1", PLACE(poisson), -1, 0.5},
    {"modulus_ratio", "1", PLACE(modulus_ratio), 0.1, 1000},
    {"shape_factor", "1", PLACE(shape_factor), 1e-3, 1e4},
    {"bulk_modulus", "Pa", PLACE(bulk_modulus), 1e6, 1e12},
    {"expansion", "1/K", PLACE(expansion), -1e-3, 1e-3},
    {"measured_at", "K", PLACE(measured_at), 150, 700},
};

enum { N_DIMENSIONS = sizeof dimensions / sizeof *dimensions };

/* What a kind needs: alternatives separated by '|', all of an alternative's names by blanks. */
static const char *const needed[AN_GEOMETRY_COUNT] = {
    [AN_TENSION] = "length width thickness|length diameter|length area",
    [AN_COMPRESSION_FREE] = "height width length|height diameter|height area",
    [AN_COMPRESSION_BONDED] = "height area shape_factor|height width length|height diameter",
    [AN_SHEAR_DOUBLE_LAP] = "height length area|height length width",
    [AN_CANTILEVER_GUIDED] = "length width thickness",
    [AN_CANTILEVER_FREE] = "length width thickness",
    [AN_CANTILEVER_DUAL] = "length width thickness",
    [AN_BENDING_THREE_POINT] = "length width thickness",
    [AN_TORSION_RECTANGLE] = "length width thickness",
    [AN_TORSION_CYLINDER] = "length diameter",
    [AN_PARALLEL_PLATES] = "height diameter",
};

/* One text of a specimen. */
typedef struct label {
    const char *name; /* of the attribute */
    size_t offset;    /* in an_specimen */
    size_t size;      /* bytes */
} label;

#define LABEL(attribute, member)                                                                             \
    {                                                                                                        \
        attribute, offsetof(an_specimen, member), sizeof((an_specimen *)0)->member                           \
    }

static const label labels[] = {
    LABEL("id", id),           LABEL("material", material),
    LABEL("lot", lot),         LABEL("operator", operator_name),
    LABEL("started", started), LABEL("rig", rig),
};

enum { N_LABELS = sizeof labels / sizeof *labels };

static an_measure *measure_at(an_geometry *geometry, const dimension *row)
{
    return (an_measure *)((char *)geometry + row->offset);
}

static const an_measure *measure_of(const an_geometry *geometry, const dimension *row)
{
    return (const an_measure *)((const char *)geometry + row->offset);
}

const char *an_geometry_word(an_geometry_kind kind)
{
    return kind >= 0 && kind < AN_GEOMETRY_COUNT ? geometry_words[kind] : "";
}

an_geometry_kind an_geometry_find(const char *word)
{
    for (int kind = AN_TENSION; kind < AN_GEOMETRY_COUNT; kind++)
        if (strcmp(word, geometry_words[kind]) == 0)
            return (an_geometry_kind)kind;
    return AN_GEOMETRY_NONE;
}

int an_geometry_is_shear(an_geometry_kind kind)
{
    return kind == AN_SHEAR_DOUBLE_LAP || kind == AN_TORSION_RECTANGLE || kind == AN_TORSION_CYLINDER ||
           kind == AN_PARALLEL_PLATES;
}

void an_specimen_init(an_specimen *specimen)
{
    memset(specimen, 0, sizeof *specimen);
    for (int i = 0; i < N_DIMENSIONS; i++)
        *measure_at(&specimen->geometry, &dimensions[i]) = AN_MEASURE_NONE;
}

an_measure *an_geometry_dimension(an_geometry *geometry, const char *name, const char **unit)
{
    for (int i = 0; i < N_DIMENSIONS; i++) {
        if (strcmp(name, dimensions[i].name) != 0)
            continue;
        if (unit)
            *unit = dimensions[i].unit;
        return measure_at(geometry, &dimensions[i]);
    }
    return NULL;
}

char *an_specimen_label(an_specimen *specimen, const char *name, size_t *size)
{
    for (int i = 0; i < N_LABELS; i++) {
        if (strcmp(name, labels[i].name) != 0)
            continue;
        *size = labels[i].size;
        return (char *)specimen + labels[i].offset;
    }
    return NULL;
}

/* A dimension with an uncertainty alone: the value stands in the dump, the caliper's uncertainty does not. */
static an_status read_uncertainty(const an_xml_node *node, const dimension *row, an_measure *measure,
                                  an_error *err)
{
    const char *unit = an_xml_attribute_of(node, "unit");
    an_conversion conversion;
    double u;
    AN_TRY(an_xml_double(node, "u", &u, err));
    if (an_unit_convert(unit ? unit : "1", row->unit, &conversion, err) < 0)
        return an_xml_fail(node, err, AN_E_UNIT, "unit '%s' where [%s] is wanted", unit ? unit : "",
                           row->unit);
    measure->u = an_unit_si_difference(&conversion, u);
    return AN_OK;
}

static an_status read_dimension(const an_xml_node *geometry, const dimension *row, an_measure *measure,
                                an_error *err)
{
    const an_xml_node *node = an_xml_child(geometry, row->name);
    if (!node)
        return AN_OK;
    if (!an_xml_attribute_of(node, "value"))
        return read_uncertainty(node, row, measure, err);
    AN_TRY(an_xml_measure_here(node, row->unit, measure, err));
    if (!(measure->value >= row->least && measure->value <= row->most))
        return an_xml_fail(node, err, AN_E_VALUE, "%g %s is outside %g .. %g %s; check the unit",
                           measure->value, row->unit, row->least, row->most, row->unit);
    return AN_OK;
}

static an_status read_geometry(const an_xml_node *node, an_geometry *geometry, an_error *err)
{
    const char *kind = an_xml_attribute_of(node, "kind");
    if (kind) {
        geometry->kind = an_geometry_find(kind);
        if (geometry->kind == AN_GEOMETRY_NONE)
            return an_xml_fail(node, err, AN_E_VALUE, "kind '%s' is no geometry known here", kind);
    }
    for (int i = 0; i < N_DIMENSIONS; i++)
        AN_TRY(read_dimension(node, &dimensions[i], measure_at(geometry, &dimensions[i]), err));
    return AN_OK;
}

an_status an_specimen_from_node(const an_xml_node *node, an_specimen *specimen, an_error *err)
{
    an_specimen_init(specimen);
    for (int i = 0; i < N_LABELS; i++) {
        const char *text = an_xml_attribute_of(node, labels[i].name);
        if (!text)
            continue;
        if (strlen(text) >= labels[i].size)
            return an_xml_fail(node, err, AN_E_LIMIT, "%s is longer than %zu bytes", labels[i].name,
                               labels[i].size - 1);
        strcpy((char *)specimen + labels[i].offset, text);
    }
    const an_xml_node *geometry = an_xml_child(node, "geometry");
    return geometry ? read_geometry(geometry, &specimen->geometry, err) : AN_OK;
}

an_status an_specimen_load(const char *path, an_specimen *specimen, char sha256[65], an_error *err)
{
    an_xml_document document;
    an_xml_reading reading = {.root = "specimen"};
    an_status status = an_xml_read(path, &reading, &document, err);
    if (status >= 0)
        status = an_specimen_from_node(document.root, specimen, err);
    if (status >= 0 && sha256)
        memcpy(sha256, document.sha256, AN_SHA256_SIZE);
    an_xml_document_clear(&document);
    return status;
}

static void write_dimension(an_xml_writer *writer, const dimension *row, const an_measure *measure)
{
    if (!isnan(measure->value)) {
        an_xml_put_measure(writer, row->name, *measure, row->unit);
        return;
    }
    if (isnan(measure->u))
        return;
    an_xml_start(writer, row->name);
    an_xml_put(writer, "unit", row->unit);
    an_xml_put_double(writer, "u", measure->u);
    an_xml_end(writer);
}

void an_specimen_write(an_xml_writer *writer, const an_specimen *specimen)
{
    an_xml_start(writer, "specimen");
    for (int i = 0; i < N_LABELS; i++) {
        const char *text = (const char *)specimen + labels[i].offset;
        if (text[0])
            an_xml_put(writer, labels[i].name, text);
    }
    an_xml_start(writer, "geometry");
    if (specimen->geometry.kind != AN_GEOMETRY_NONE)
        an_xml_put(writer, "kind", an_geometry_word(specimen->geometry.kind));
    for (int i = 0; i < N_DIMENSIONS; i++)
        write_dimension(writer, &dimensions[i], measure_of(&specimen->geometry, &dimensions[i]));
    an_xml_end(writer);
    an_xml_end(writer);
}

/* Two statements of one dimension disagree beyond 3 combined standard uncertainties, and beyond 0.1 %, which
 * covers a value written with fewer digits (common practice). */
static int disagree(const an_measure *one, const an_measure *other)
{
    if (isnan(one->value) || isnan(other->value))
        return 0;
    double u_one = isnan(one->u) ? 0 : one->u, u_other = isnan(other->u) ? 0 : other->u;
    double difference = fabs(one->value - other->value);
    return difference > 3 * hypot(u_one, u_other) && difference > 1e-3 * fabs(other->value);
}

static void merge_dimension(const dimension *row, an_measure *base, const an_measure *over,
                            an_remark_list *remarks)
{
    if (disagree(base, over))
        an_remark_list_add(remarks, "geometry-disagrees", 0, NULL,
                           "%s: the dump says %.6g %s, the specimen document %.6g %s; the document is used",
                           row->name, base->value, row->unit, over->value, row->unit);
    if (!isnan(over->value))
        *base = *over;
    else if (!isnan(over->u))
        base->u = over->u;
}

void an_specimen_merge(an_specimen *base, const an_specimen *over, an_remark_list *remarks)
{
    for (int i = 0; i < N_LABELS; i++) {
        const char *text = (const char *)over + labels[i].offset,
                   *own = (const char *)base + labels[i].offset;
        if (text[0] && own[0] && strcmp(text, own) != 0 && strcmp(labels[i].name, "id") == 0)
            an_remark_list_add(
                remarks, "specimen-disagrees", 0, NULL,
                "the dump is of specimen '%s', the specimen document of '%s'; the document is used", own,
                text);
        if (text[0])
            memcpy((char *)base + labels[i].offset, text, labels[i].size);
    }
    an_geometry_kind own = base->geometry.kind, kind = over->geometry.kind;
    if (own != AN_GEOMETRY_NONE && kind != AN_GEOMETRY_NONE && own != kind)
        an_remark_list_add(remarks, "geometry-disagrees", 0, NULL,
                           "the dump says geometry '%s', the specimen document '%s'; the document is used",
                           an_geometry_word(own), an_geometry_word(kind));
    if (kind != AN_GEOMETRY_NONE)
        base->geometry.kind = kind;
    for (int i = 0; i < N_DIMENSIONS; i++)
        merge_dimension(&dimensions[i], measure_at(&base->geometry, &dimensions[i]),
                        measure_of(&over->geometry, &dimensions[i]), remarks);
}

static const an_measure *dimension_named(const an_geometry *geometry, const char *name, size_t n,
                                         const dimension **row)
{
    for (int i = 0; i < N_DIMENSIONS; i++) {
        if (strlen(dimensions[i].name) != n || strncmp(name, dimensions[i].name, n) != 0)
            continue;
        *row = &dimensions[i];
        return measure_of(geometry, &dimensions[i]);
    }
    return NULL;
}

/* How many dimensions of one alternative are not there; the first of them in missing; those that are there in
 * given. */
static int count_missing(const an_geometry *geometry, const char *names, size_t n, const dimension **missing,
                         int *given)
{
    int n_missing = 0;
    *given = 0;
    for (size_t at = 0; at < n;) {
        size_t length = strcspn(names + at, " |");
        const dimension *row = NULL;
        const an_measure *measure = dimension_named(geometry, names + at, length, &row);
        if (measure && isnan(measure->value) && n_missing++ == 0)
            *missing = row;
        *given += measure && !isnan(measure->value);
        at += length + 1;
    }
    return n_missing;
}

/* The words of a rule as a sentence has them: "length width|length area" as "length and width, or length and
 * area". */
static void spell_rule(const char *rule, char *text, size_t n_text)
{
    size_t used = 0;
    text[0] = '\0';
    for (; *rule && used + 8 < n_text; rule++)
        used += (size_t)snprintf(text + used, n_text - used,
                                 *rule == ' '   ? " and "
                                 : *rule == '|' ? ", or "
                                                : "%c",
                                 *rule);
}

static an_status check_needed(const an_specimen *specimen, an_error *err)
{
    const char *rule = needed[specimen->geometry.kind];
    const dimension *missing = NULL;
    int most_given = -1, given;
    for (const char *at = rule; *at;) {
        size_t length = strcspn(at, "|");
        const dimension *first = NULL;
        if (count_missing(&specimen->geometry, at, length, &first, &given) == 0)
            return AN_OK;
        if (given > most_given) { /* what was begun is what was meant */
            most_given = given;
            missing = first;
        }
        at += length + (at[length] == '|');
    }
    char spelt[400];
    spell_rule(rule, spelt, sizeof spelt);
    return an_fail(err, AN_E_VALUE, NULL, "specimen: %s is not given; %s needs %s",
                   missing ? missing->name : "a dimension", an_geometry_word(specimen->geometry.kind), spelt);
}

an_status an_specimen_check(const an_specimen *specimen, an_error *err)
{
    if (specimen->geometry.kind == AN_GEOMETRY_NONE)
        return an_fail(
            err, AN_E_VALUE, NULL,
            "specimen: the kind of geometry is not given, neither by the dump nor by a specimen document");
    for (int i = 0; i < N_DIMENSIONS; i++) {
        const dimension *row = &dimensions[i];
        double value = measure_of(&specimen->geometry, row)->value,
               u = measure_of(&specimen->geometry, row)->u;
        if (!isnan(value) && !(value >= row->least && value <= row->most))
            return an_fail(err, AN_E_VALUE, NULL, "specimen: %s %g %s is outside %g .. %g %s; check the unit",
                           row->name, value, row->unit, row->least, row->most, row->unit);
        if (row->least > 0 && u > 0.5 * value)
            return an_fail(err, AN_E_VALUE, NULL,
                           "specimen: the standard uncertainty of %s, %g %s, is more than half of its %g %s; "
                           "check its unit",
                           row->name, u, row->unit, value, row->unit);
    }
    return check_needed(specimen, err);
}
