/* The apparatus document: what stands between the specimen and the numbers of the dump. Read from what people
 * write, carried in runs, asked for its compliance at a frequency and temperature. A calibrated table is
 * linear in temperature and in the logarithm of frequency between its rows, and constant outside (common
 * practice: a frame softens slowly).
 */
#include "anelast/apparatus.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static const an_measure ideal = {.value = 0, .u = 0};

void an_apparatus_init(an_apparatus *apparatus)
{
    memset(apparatus, 0, sizeof *apparatus);
    apparatus->force.gain = (an_measure){.value = 1, .u = 0};
    apparatus->displacement.gain = (an_measure){.value = 1, .u = 0};
    apparatus->transducer_stiffness = AN_MEASURE_NONE;
}

static an_status read_text(const an_xml_node *node, const char *name, char *text, size_t size, an_error *err)
{
    const char *given = an_xml_attribute_of(node, name);
    if (!given)
        return AN_OK;
    if (strlen(given) >= size)
        return an_xml_fail(node, err, AN_E_LIMIT, "%s is longer than %zu bytes", name, size - 1);
    strcpy(text, given);
    return AN_OK;
}

/* A constant where it is given, `fallback` where it is not; an uncertainty that is not given counts as 0. */
static an_status read_constant(const an_xml_node *node, const char *name, const char *unit,
                               an_measure fallback, an_measure *measure, an_error *err)
{
    AN_TRY(an_xml_measure_optional(node, name, unit, measure, err));
    if (isnan(measure->value))
        *measure = fallback;
    else if (isnan(measure->u))
        measure->u = 0;
    return AN_OK;
}

/* Channels of one converter stand microseconds apart, those of two instruments milliseconds (common
 * practice). */
static const double delay_most = 0.1; /* [s] */

static an_status read_response(const an_xml_node *node, const char *channel, an_channel_response *response,
                               an_error *err)
{
    const an_xml_node *child = an_xml_child(node, channel);
    if (!child)
        return AN_OK;
    AN_TRY(read_constant(child, "gain", "1", (an_measure){.value = 1, .u = 0}, &response->gain, err));
    if (!(response->gain.value > 0))
        return an_xml_fail(child, err, AN_E_VALUE, "gain %g is not positive; a sign belongs into the layout",
                           response->gain.value);
    AN_TRY(read_constant(child, "delay", "s", ideal, &response->delay, err));
    if (!(fabs(response->delay.value) <= delay_most))
        return an_xml_fail(child, err, AN_E_VALUE, "delay %g s is outside -%g .. %g s; check the unit",
                           response->delay.value, delay_most, delay_most);
    return AN_OK;
}

/* The compliance of a torsional bench has another unit than that of a linear one. */
static an_status read_compliance_value(const an_xml_node *node, an_measure *measure, an_error *err)
{
    const char *unit = an_xml_attribute_of(node, "unit");
    an_conversion conversion;
    an_error ignored;
    int torsion = unit && an_unit_convert(unit, "rad/(N.m)", &conversion, &ignored) >= 0;
    AN_TRY(an_xml_measure_here(node, torsion ? "rad/(N.m)" : "m/N", measure, err));
    if (!(measure->value >= 0))
        return an_xml_fail(node, err, AN_E_VALUE, "compliance %g is negative", measure->value);
    if (isnan(measure->u))
        measure->u = 0;
    return AN_OK;
}

static an_status read_compliance(const an_xml_node *node, an_compliance_row *row, an_error *err)
{
    an_measure frequency, temperature;
    AN_TRY(read_compliance_value(node, &row->compliance, err));
    AN_TRY(an_xml_double_or(node, "loss_factor", 0, &row->loss_factor, err));
    if (row->loss_factor < 0)
        return an_xml_fail(node, err, AN_E_VALUE, "loss_factor %g is negative", row->loss_factor);
    AN_TRY(an_xml_measure_optional(node, "frequency", "Hz", &frequency, err));
    AN_TRY(an_xml_measure_optional(node, "temperature", "K", &temperature, err));
    row->frequency_Hz = frequency.value;
    row->temperature_K = temperature.value;
    if (!isnan(row->frequency_Hz) && !(row->frequency_Hz > 0))
        return an_xml_fail(node, err, AN_E_VALUE, "frequency %g Hz is not positive", row->frequency_Hz);
    return AN_OK;
}

static an_status read_compliances(const an_xml_node *node, an_apparatus *apparatus, an_error *err)
{
    for (const an_xml_node *child = an_xml_child(node, "compliance"); child;
         child = an_xml_next(child, "compliance")) {
        if (apparatus->n_compliance == AN_COMPLIANCE_ROWS)
            return an_xml_fail(child, err, AN_E_LIMIT, "more than %d rows", AN_COMPLIANCE_ROWS);
        AN_TRY(read_compliance(child, &apparatus->compliance[apparatus->n_compliance], err));
        apparatus->n_compliance++;
    }
    return AN_OK;
}

/* What an actuator moves weighs grams to some kilograms (common practice); a grip's mass is never below zero.
 */
static an_status read_mass(const an_xml_node *node, const char *name, an_measure *mass, an_error *err)
{
    static const double mass_most = 20; /* [kg] */
    AN_TRY(read_constant(node, name, "kg", ideal, mass, err));
    if (!(mass->value >= 0 && mass->value <= mass_most))
        return an_xml_fail(an_xml_child(node, name), err, AN_E_VALUE,
                           "%g kg is outside 0 .. %g kg; check the unit", mass->value, mass_most);
    return AN_OK;
}

/* Where the force is sensed, and the constants of the chain of that architecture. */
static an_status read_chain(const an_xml_node *node, an_apparatus *apparatus, an_error *err)
{
    static const char *const places[] = {"drive", "fixed end", NULL};
    int place = 0;
    if (an_xml_attribute_of(node, "force_at"))
        AN_TRY(an_xml_word(node, "force_at", places, &place, err));
    apparatus->force_at = place == 0 ? AN_FORCE_AT_DRIVE : AN_FORCE_AT_FIXED_END;
    AN_TRY(read_mass(node, "moving_mass", &apparatus->moving_mass, err));
    AN_TRY(read_constant(node, "shaft_stiffness", "N/m", ideal, &apparatus->shaft_stiffness, err));
    AN_TRY(read_constant(node, "shaft_damping", "N.s/m", ideal, &apparatus->shaft_damping, err));
    AN_TRY(read_constant(node, "transducer_stiffness", "N/m", AN_MEASURE_NONE,
                         &apparatus->transducer_stiffness, err));
    return read_mass(node, "fixture_mass", &apparatus->fixture_mass, err);
}

/* A bias is a difference of temperatures; degC would bring the zero of a scale in, and is refused. */
static an_status read_bias(const an_xml_node *node, an_measure *bias, an_error *err)
{
    const an_xml_node *child = an_xml_child(node, "temperature_bias");
    const char *unit = child ? an_xml_attribute_of(child, "unit") : NULL;
    if (unit && strcmp(unit, "K") != 0)
        return an_xml_fail(child, err, AN_E_UNIT, "unit '%s': a difference of temperatures is stated in K",
                           unit);
    return read_constant(node, "temperature_bias", "K", ideal, bias, err);
}

an_status an_apparatus_from_node(const an_xml_node *node, an_apparatus *apparatus, an_error *err)
{
    an_apparatus_init(apparatus);
    AN_TRY(read_text(node, "id", apparatus->id, sizeof apparatus->id, err));
    AN_TRY(read_text(node, "calibrated", apparatus->calibrated, sizeof apparatus->calibrated, err));
    AN_TRY(read_text(node, "valid_until", apparatus->valid_until, sizeof apparatus->valid_until, err));
    AN_TRY(read_text(node, "certificate", apparatus->certificate, sizeof apparatus->certificate, err));
    AN_TRY(read_chain(node, apparatus, err));
    AN_TRY(read_response(node, "force", &apparatus->force, err));
    AN_TRY(read_response(node, "displacement", &apparatus->displacement, err));
    AN_TRY(read_bias(node, &apparatus->temperature_bias, err));
    return read_compliances(node, apparatus, err);
}

an_status an_apparatus_load(const char *path, an_apparatus *apparatus, char sha256[65], an_error *err)
{
    an_xml_document document;
    an_xml_reading reading = {.root = "apparatus"};
    an_status status = an_xml_read(path, &reading, &document, err);
    if (status >= 0)
        status = an_apparatus_from_node(document.root, apparatus, err);
    if (status >= 0 && sha256)
        memcpy(sha256, document.sha256, AN_SHA256_SIZE);
    an_xml_document_clear(&document);
    return status;
}

static void put_text(an_xml_writer *writer, const char *name, const char *text)
{
    if (text[0])
        an_xml_put(writer, name, text);
}

/* Constants of an ideal part are not written. */
static void put_constant(an_xml_writer *writer, const char *name, an_measure measure, const char *unit)
{
    if (measure.value != 0 || measure.u != 0)
        an_xml_put_measure(writer, name, measure, unit);
}

static void put_response(an_xml_writer *writer, const char *channel, const an_channel_response *response)
{
    an_xml_start(writer, channel);
    an_xml_put_measure(writer, "gain", response->gain, "1");
    put_constant(writer, "delay", response->delay, "s");
    an_xml_end(writer);
}

static void put_compliance(an_xml_writer *writer, const an_compliance_row *row)
{
    an_xml_start(writer, "compliance");
    an_xml_put_double(writer, "value", row->compliance.value);
    an_xml_put(writer, "unit", "m/N");
    an_xml_put_double(writer, "u", row->compliance.u);
    if (row->loss_factor != 0)
        an_xml_put_double(writer, "loss_factor", row->loss_factor);
    an_xml_put_measure(writer, "frequency", (an_measure){row->frequency_Hz, NAN}, "Hz");
    an_xml_put_measure(writer, "temperature", (an_measure){row->temperature_K, NAN}, "K");
    an_xml_end(writer);
}

void an_apparatus_write(an_xml_writer *writer, const an_apparatus *apparatus)
{
    an_xml_start(writer, "apparatus");
    put_text(writer, "id", apparatus->id);
    an_xml_put(writer, "force_at", apparatus->force_at == AN_FORCE_AT_DRIVE ? "drive" : "fixed end");
    put_text(writer, "calibrated", apparatus->calibrated);
    put_text(writer, "valid_until", apparatus->valid_until);
    put_text(writer, "certificate", apparatus->certificate);
    put_response(writer, "force", &apparatus->force);
    put_response(writer, "displacement", &apparatus->displacement);
    put_constant(writer, "moving_mass", apparatus->moving_mass, "kg");
    put_constant(writer, "shaft_stiffness", apparatus->shaft_stiffness, "N/m");
    put_constant(writer, "shaft_damping", apparatus->shaft_damping, "N.s/m");
    an_xml_put_measure(writer, "transducer_stiffness", apparatus->transducer_stiffness, "N/m");
    put_constant(writer, "fixture_mass", apparatus->fixture_mass, "kg");
    for (int i = 0; i < apparatus->n_compliance; i++)
        put_compliance(writer, &apparatus->compliance[i]);
    put_constant(writer, "temperature_bias", apparatus->temperature_bias, "K");
    an_xml_end(writer);
}

/* A compliance as it is interpolated. */
typedef struct complex_compliance {
    double storage, loss, u; /* [m/N] */
} complex_compliance;

static complex_compliance row_value(const an_compliance_row *row)
{
    double storage = row->compliance.value;
    return (complex_compliance){storage, storage * row->loss_factor, row->compliance.u};
}

static complex_compliance mix(complex_compliance one, complex_compliance other, double share)
{
    return (complex_compliance){one.storage + share * (other.storage - one.storage),
                                one.loss + share * (other.loss - one.loss),
                                one.u + share * (other.u - one.u)};
}

/* Where x stands between one and other, held in 0..1; 0 where either is "all". */
static double share_of(double x, double one, double other)
{
    if (isnan(one) || isnan(other) || isnan(x) || one == other)
        return 0;
    return fmin(1, fmax(0, (x - one) / (other - one)));
}

/* Along frequency at one temperature of the table (NAN: the rows that hold at all temperatures). */
static complex_compliance along_frequency(const an_apparatus *apparatus, double temperature_K,
                                          double frequency_Hz)
{
    const an_compliance_row *below = NULL, *above = NULL;
    for (int i = 0; i < apparatus->n_compliance; i++) {
        const an_compliance_row *row = &apparatus->compliance[i];
        if (row->temperature_K != temperature_K && !(isnan(row->temperature_K) && isnan(temperature_K)))
            continue;
        int is_below = isnan(row->frequency_Hz) || row->frequency_Hz <= frequency_Hz;
        if (is_below && (!below || row->frequency_Hz > below->frequency_Hz))
            below = row;
        if (!is_below && (!above || row->frequency_Hz < above->frequency_Hz))
            above = row;
    }
    if (!below || !above)
        return row_value(below ? below : above);
    double share = share_of(log(frequency_Hz), log(below->frequency_Hz), log(above->frequency_Hz));
    return mix(row_value(below), row_value(above), share);
}

void an_apparatus_compliance(const an_apparatus *apparatus, double frequency_Hz, double temperature_K,
                             double *storage, double *loss, double *u)
{
    double below = NAN, above = NAN;
    *storage = *loss = *u = 0;
    if (apparatus->n_compliance == 0)
        return;
    for (int i = 0; i < apparatus->n_compliance; i++) {
        double at = apparatus->compliance[i].temperature_K;
        if (at <= temperature_K && !(at <= below))
            below = at;
        if (at > temperature_K && !(at >= above))
            above = at;
    }
    double nearest = isnan(below) ? above : below;
    complex_compliance result = along_frequency(apparatus, nearest, frequency_Hz);
    if (!isnan(below) && !isnan(above))
        result = mix(result, along_frequency(apparatus, above, frequency_Hz),
                     share_of(temperature_K, below, above));
    *storage = result.storage;
    *loss = result.loss;
    *u = result.u;
}
