/* The points document: written point by point, read while streaming, in the form of schema/points.xsd. Stage:
 * correct. */
#include "anelast/points.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static const char *const STATES[] = {"used", "flagged", "skipped", NULL};

/* ---- writing ---- */

static void put(an_xml_writer *w, const char *name, double value, double u, const char *unit)
{
    an_xml_put_measure(w, name, (an_measure){value, u}, unit);
}

/* A complex quantity: both parts and the unit; nothing where it is not known. */
static void put_pair(an_xml_writer *w, const char *name, const double pair[2], const char *unit)
{
    if (isnan(pair[0]) || isnan(pair[1]))
        return;
    an_xml_start(w, name);
    an_xml_put_double(w, "storage", pair[0]);
    an_xml_put_double(w, "loss", pair[1]);
    an_xml_put(w, "unit", unit);
    an_xml_end(w);
}

static void put_parts(an_xml_writer *w, const char *name, const char *unit, double value, double u_noise,
                      double u_common)
{
    an_xml_start(w, name);
    an_xml_put_double(w, "value", value);
    an_xml_put(w, "unit", unit);
    an_xml_put_double(w, "u_noise", u_noise);
    an_xml_put_double(w, "u_common", u_common);
    an_xml_end(w);
}

static void put_modulus(an_xml_writer *w, const an_point *p)
{
    double common[3], ratio, u_noise, u_common;
    if (isnan(p->storage_Pa) || isnan(p->loss_Pa) || isnan(p->noise[0] + p->noise[1] + p->noise[2]))
        return;
    an_point_common(p, common);
    an_point_loss_factor(p, &ratio, &u_noise, &u_common);
    put_parts(w, "storage", "Pa", p->storage_Pa, sqrt(p->noise[0]), sqrt(common[0]));
    put_parts(w, "loss", "Pa", p->loss_Pa, sqrt(p->noise[2]), sqrt(common[2]));
    if (isfinite(ratio) && isfinite(u_noise) && isfinite(u_common))
        put_parts(w, "loss_factor", "1", ratio, u_noise, u_common);
    an_xml_start(w, "noise");
    an_xml_put_double(w, "storage_storage", p->noise[0]);
    an_xml_put_double(w, "storage_loss", p->noise[1]);
    an_xml_put_double(w, "loss_loss", p->noise[2]);
    an_xml_put(w, "unit", "Pa2");
    an_xml_end(w);
    for (int i = 0; i < AN_SOURCE_COUNT; i++) {
        if (p->common[i][0] == 0 && p->common[i][1] == 0)
            continue;
        an_xml_start(w, "common");
        an_xml_put(w, "source", an_source_word((an_source)i));
        an_xml_put_double(w, "storage", p->common[i][0]);
        an_xml_put_double(w, "loss", p->common[i][1]);
        an_xml_put(w, "unit", "Pa");
        an_xml_end(w);
    }
}

static void put_ladder(an_xml_writer *w, const an_point *p)
{
    put_pair(w, "measured_stiffness", p->measured_stiffness, "N/m");
    for (int i = 0; i < AN_RUNG_COUNT; i++) {
        if (isnan(p->rung[i][0]) || isnan(p->rung[i][1]))
            continue;
        an_xml_start(w, "rung");
        an_xml_put(w, "name", an_rung_word((an_rung)i));
        an_xml_put_double(w, "storage", p->rung[i][0]);
        an_xml_put_double(w, "loss", p->rung[i][1]);
        an_xml_put(w, "unit", "1");
        an_xml_end(w);
    }
    put_pair(w, "specimen_stiffness", p->specimen_stiffness, "N/m");
    put(w, "stiffness_compliance", p->stiffness_compliance, NAN, "1");
}

static void put_quality(an_xml_writer *w, const an_point *p)
{
    if (isnan(p->n_cycle))
        return;
    an_xml_start(w, "record");
    an_xml_put_integer(w, "samples", p->n_sample);
    an_xml_put_double(w, "cycles", p->n_cycle);
    an_xml_put_double(w, "cycles_dropped", p->n_cycle_dropped);
    an_xml_put_double(w, "second_harmonic", p->harmonic[0]);
    an_xml_put_double(w, "third_harmonic", p->harmonic[1]);
    if (isfinite(p->snr_dB))
        an_xml_put_double(w, "snr_dB", p->snr_dB);
    an_xml_end(w);
}

static void put_point(an_xml_writer *w, const an_point *p)
{
    an_xml_start(w, "point");
    an_xml_put_integer(w, "burst", p->burst);
    if (p->step)
        an_xml_put_integer(w, "step", p->step);
    an_xml_put(w, "state", STATES[p->state]);
    put(w, "start", p->start_s, NAN, "s");
    put(w, "temperature", p->temperature_K, p->u_temperature_K, "K");
    put(w, "temperature_rate", p->temperature_rate_K_s, NAN, "K/s");
    put(w, "set_temperature", p->set_temperature_K, NAN, "K");
    put(w, "frequency", p->frequency_Hz, p->u_frequency_Hz, "Hz");
    put(w, "set_frequency", p->set_frequency_Hz, NAN, "Hz");
    put_modulus(w, p);
    put_ladder(w, p);
    put(w, "displacement", p->displacement_m, NAN, "m");
    put(w, "force", p->force_N, NAN, "N");
    put(w, "static_force", p->static_force_N, NAN, "N");
    put(w, "strain", p->strain, NAN, "1");
    put(w, "static_strain", p->static_strain, NAN, "1");
    put_quality(w, p);
    an_remark_list_write(w, &p->remarks, -1);
    an_xml_end(w);
}

void an_points_write(an_xml_writer *w, const an_points *points)
{
    an_xml_put(w, "id", points->id);
    an_made_write(w, &points->made);
    an_specimen_write(w, &points->specimen);
    an_apparatus_write(w, &points->apparatus);
    an_remark_list_write(w, &points->remarks, -1);
    for (int i = 0; i < points->n_point; i++)
        put_point(w, &points->point[i]);
    an_xml_start(w, "end");
    an_xml_put_integer(w, "points", points->n_point);
    an_xml_end(w);
}

/* ---- reading ---- */

static an_status get(const an_xml_node *node, const char *name, const char *unit, double *value, double *u,
                     an_error *err)
{
    an_measure m;
    AN_TRY(an_xml_measure_optional(node, name, unit, &m, err));
    *value = m.value;
    if (u)
        *u = m.u;
    return AN_OK;
}

/* The parts of a complex quantity, NAN where the element is not there. */
static an_status get_pair(const an_xml_node *node, const char *name, double pair[2], an_error *err)
{
    const an_xml_node *child = an_xml_child(node, name);
    pair[0] = pair[1] = NAN;
    if (!child)
        return AN_OK;
    AN_TRY(an_xml_double(child, "storage", &pair[0], err));
    return an_xml_double(child, "loss", &pair[1], err);
}

static an_status get_common(const an_xml_node *node, an_point *p, an_error *err)
{
    const char *word;
    for (const an_xml_node *row = an_xml_child(node, "common"); row; row = an_xml_next(row, "common")) {
        AN_TRY(an_xml_text(row, "source", &word, err));
        an_source source = an_source_find(word);
        if (source == AN_SOURCE_COUNT)
            return an_xml_fail(row, err, AN_E_VALUE, "source of uncertainty '%s' is not known here", word);
        AN_TRY(an_xml_double(row, "storage", &p->common[source][0], err));
        AN_TRY(an_xml_double(row, "loss", &p->common[source][1], err));
    }
    return AN_OK;
}

static an_status get_modulus(const an_xml_node *node, an_point *p, an_error *err)
{
    const an_xml_node *storage = an_xml_child(node, "storage"), *noise;
    if (!storage)
        return AN_OK;
    AN_TRY(an_xml_double(storage, "value", &p->storage_Pa, err));
    const an_xml_node *loss;
    AN_TRY(an_xml_need(node, "loss", &loss, err));
    AN_TRY(an_xml_double(loss, "value", &p->loss_Pa, err));
    AN_TRY(an_xml_need(node, "noise", &noise, err));
    AN_TRY(an_xml_double(noise, "storage_storage", &p->noise[0], err));
    AN_TRY(an_xml_double(noise, "storage_loss", &p->noise[1], err));
    AN_TRY(an_xml_double(noise, "loss_loss", &p->noise[2], err));
    if (p->noise[0] < 0 || p->noise[2] < 0)
        return an_xml_fail(noise, err, AN_E_VALUE, "a variance is negative");
    return get_common(node, p, err);
}

static an_status get_ladder(const an_xml_node *node, an_point *p, an_error *err)
{
    static const char *const words[] = {"channel", "parallel", "series", "end", NULL};
    int i_rung;
    AN_TRY(get_pair(node, "measured_stiffness", p->measured_stiffness, err));
    AN_TRY(get_pair(node, "specimen_stiffness", p->specimen_stiffness, err));
    for (const an_xml_node *row = an_xml_child(node, "rung"); row; row = an_xml_next(row, "rung")) {
        AN_TRY(an_xml_word(row, "name", words, &i_rung, err));
        AN_TRY(an_xml_double(row, "storage", &p->rung[i_rung][0], err));
        AN_TRY(an_xml_double(row, "loss", &p->rung[i_rung][1], err));
    }
    return get(node, "stiffness_compliance", "1", &p->stiffness_compliance, NULL, err);
}

static an_status get_record(const an_xml_node *node, an_point *p, an_error *err)
{
    const an_xml_node *record = an_xml_child(node, "record");
    int64_t samples;
    if (!record)
        return AN_OK;
    AN_TRY(an_xml_integer(record, "samples", 0, INT32_MAX, &samples, err));
    p->n_sample = (int)samples;
    AN_TRY(an_xml_double(record, "cycles", &p->n_cycle, err));
    AN_TRY(an_xml_double(record, "cycles_dropped", &p->n_cycle_dropped, err));
    AN_TRY(an_xml_double_or(record, "second_harmonic", NAN, &p->harmonic[0], err));
    AN_TRY(an_xml_double_or(record, "third_harmonic", NAN, &p->harmonic[1], err));
    return an_xml_double_or(record, "snr_dB", INFINITY, &p->snr_dB, err);
}

static an_status get_head(const an_xml_node *node, an_point *p, an_error *err)
{
    int64_t number = 0;
    int state;
    AN_TRY(an_xml_integer(node, "burst", 1, INT32_MAX, &number, err));
    p->burst = (int)number;
    if (an_xml_attribute_of(node, "step"))
        AN_TRY(an_xml_integer(node, "step", 1, INT32_MAX, &number, err));
    p->step = an_xml_attribute_of(node, "step") ? (int)number : 0;
    AN_TRY(an_xml_word(node, "state", STATES, &state, err));
    p->state = (an_point_state)state;
    AN_TRY(get(node, "start", "s", &p->start_s, NULL, err));
    AN_TRY(get(node, "temperature", "K", &p->temperature_K, &p->u_temperature_K, err));
    AN_TRY(get(node, "temperature_rate", "K/s", &p->temperature_rate_K_s, NULL, err));
    AN_TRY(get(node, "set_temperature", "K", &p->set_temperature_K, NULL, err));
    AN_TRY(get(node, "frequency", "Hz", &p->frequency_Hz, &p->u_frequency_Hz, err));
    return get(node, "set_frequency", "Hz", &p->set_frequency_Hz, NULL, err);
}

static an_status get_point(const an_xml_node *node, an_point *p, an_error *err)
{
    AN_TRY(get_head(node, p, err));
    AN_TRY(get_modulus(node, p, err));
    AN_TRY(get_ladder(node, p, err));
    AN_TRY(get(node, "displacement", "m", &p->displacement_m, NULL, err));
    AN_TRY(get(node, "force", "N", &p->force_N, NULL, err));
    AN_TRY(get(node, "static_force", "N", &p->static_force_N, NULL, err));
    AN_TRY(get(node, "strain", "1", &p->strain, NULL, err));
    AN_TRY(get(node, "static_strain", "1", &p->static_strain, NULL, err));
    AN_TRY(get_record(node, p, err));
    return an_remark_list_read(node, &p->remarks, err);
}

static an_status visit(void *context, const an_xml_document *document, const an_xml_node *node, an_error *err)
{
    (void)document;
    an_point *point = an_points_add(context);
    if (!point)
        return an_fail_memory(err, "points");
    return get_point(node, point, err);
}

static an_status get_root(const an_xml_node *root, an_points *points, an_error *err)
{
    const an_xml_node *node;
    const char *id = an_xml_attribute_of(root, "id");
    int64_t counted;
    snprintf(points->id, sizeof points->id, "%s", id ? id : "");
    AN_TRY(an_made_read(root, &points->made, err));
    AN_TRY(an_xml_need(root, "specimen", &node, err));
    AN_TRY(an_specimen_from_node(node, &points->specimen, err));
    AN_TRY(an_xml_need(root, "apparatus", &node, err));
    AN_TRY(an_apparatus_from_node(node, &points->apparatus, err));
    AN_TRY(an_remark_list_read(root, &points->remarks, err));
    if (!an_xml_child(root, "end"))
        return an_xml_fail(root, err, AN_E_DOCUMENT, "no <end>: the document is truncated");
    AN_TRY(an_xml_integer(an_xml_child(root, "end"), "points", 0, INT32_MAX, &counted, err));
    if (counted != points->n_point)
        return an_xml_fail(an_xml_child(root, "end"), err, AN_E_DOCUMENT,
                           "counts %lld points, %d came before it", (long long)counted, points->n_point);
    return AN_OK;
}

an_status an_points_read(const char *path, an_points *points, char sha256[65], an_error *err)
{
    static const char *const streamed[] = {"point", NULL};
    an_xml_reading reading = {.root = "points", .streamed = streamed, .visit = visit, .context = points};
    an_xml_document document;
    an_status status = an_xml_read(path, &reading, &document, err);
    if (status >= 0)
        status = get_root(document.root, points, err);
    if (status >= 0 && sha256)
        memcpy(sha256, document.sha256, AN_SHA256_SIZE);
    an_xml_document_clear(&document);
    return status;
}
