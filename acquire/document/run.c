/* The run document, written piece by piece and read burst by burst: one dump with its units known, its bursts
 * apart and nothing lost. Memory is bounded by the largest burst on both sides. A document without its <end>
 * is truncated and refused, and so is one whose <end> counts other bursts than came before it.
 */
#include "anelast/run.h"

#include <limits.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char *const kinds[] = {"oscillation", "hold", "pull", NULL};

void an_run_init(an_run *run)
{
    memset(run, 0, sizeof *run);
    an_specimen_init(&run->specimen);
    an_apparatus_init(&run->apparatus);
}

void an_run_clear(an_run *run)
{
    an_made_clear(&run->made);
    an_remark_list_clear(&run->remarks);
    an_run_init(run);
}

void an_burst_init(an_burst *burst)
{
    memset(burst, 0, sizeof *burst);
    burst->set_temperature_K = burst->set_frequency_Hz = NAN;
    burst->clock = (an_clock){.start = 0, .interval = NAN, .count = 0};
    burst->time = burst->displacement = burst->force = burst->temperature = AN_SIGNAL_NONE;
}

void an_burst_clear(an_burst *burst)
{
    an_signal_clear(&burst->time);
    an_signal_clear(&burst->displacement);
    an_signal_clear(&burst->force);
    an_signal_clear(&burst->temperature);
    an_remark_list_clear(&burst->remarks);
    an_burst_init(burst);
}

static void write_remarks(an_xml_writer *writer, const an_remark_list *remarks, size_t first)
{
    an_remark_list rest = {.rows = remarks->rows + first, .n = remarks->n - first};
    if (rest.n)
        an_remark_list_write(writer, &rest, -1);
}

void an_run_write_head(an_xml_writer *writer, an_run *run)
{
    an_xml_put(writer, "id", run->id);
    an_made_write(writer, &run->made);
    an_specimen_write(writer, &run->specimen);
    an_apparatus_write(writer, &run->apparatus);
    write_remarks(writer, &run->remarks, 0);
    run->n_written = run->remarks.n;
}

static void write_clock(an_xml_writer *writer, const an_clock *clock)
{
    an_xml_start(writer, "clock");
    an_xml_put_double(writer, "start", clock->start);
    an_xml_put_double(writer, "interval", clock->interval);
    an_xml_put_integer(writer, "count", clock->count);
    an_xml_put(writer, "unit", "s");
    an_xml_end(writer);
}

an_status an_run_write_burst(an_xml_writer *writer, const an_burst *burst, an_error *err)
{
    an_xml_start(writer, "burst");
    an_xml_put_integer(writer, "n", burst->n);
    if (burst->step != 0)
        an_xml_put_integer(writer, "step", burst->step);
    an_xml_put(writer, "kind", kinds[burst->kind]);
    an_xml_put_measure(writer, "set_temperature", (an_measure){burst->set_temperature_K, NAN}, "K");
    an_xml_put_measure(writer, "set_frequency", (an_measure){burst->set_frequency_Hz, NAN}, "Hz");
    if (burst->has_time)
        AN_TRY(an_signal_write(writer, &burst->time, NULL, err));
    else
        write_clock(writer, &burst->clock);
    AN_TRY(an_signal_write(writer, &burst->displacement, NULL, err));
    AN_TRY(an_signal_write(writer, &burst->force, NULL, err));
    if (burst->temperature.count)
        AN_TRY(an_signal_write(writer, &burst->temperature, NULL, err));
    write_remarks(writer, &burst->remarks, 0);
    an_xml_end(writer);
    return AN_OK;
}

void an_run_write_end(an_xml_writer *writer, const an_run *run)
{
    an_xml_start(writer, "end");
    an_xml_put_integer(writer, "bursts", run->n_burst);
    write_remarks(writer, &run->remarks, run->n_written);
    an_xml_end(writer);
}

/* What a reading carries from burst to burst. */
typedef struct reading_state {
    an_run *run;
    const an_run_visitor *visitor;
    int has_head; /* nonzero once the head was read and handed over */
    int n_burst;  /* bursts read */
} reading_state;

static an_status read_head(reading_state *state, const an_xml_node *root, an_error *err)
{
    const char *id;
    const an_xml_node *child;
    an_run *run = state->run;
    AN_TRY(an_xml_text(root, "id", &id, err));
    if (strlen(id) >= sizeof run->id)
        return an_xml_fail(root, err, AN_E_LIMIT, "the id is longer than %zu bytes", sizeof run->id - 1);
    strcpy(run->id, id);
    AN_TRY(an_made_read(root, &run->made, err));
    AN_TRY(an_xml_need(root, "specimen", &child, err));
    AN_TRY(an_specimen_from_node(child, &run->specimen, err));
    AN_TRY(an_xml_need(root, "apparatus", &child, err));
    AN_TRY(an_apparatus_from_node(child, &run->apparatus, err));
    AN_TRY(an_remark_list_read(root, &run->remarks, err));
    state->has_head = 1;
    if (!state->visitor || !state->visitor->head)
        return AN_OK;
    return state->visitor->head(run, state->visitor->user, err);
}

/* Put a signal in its place in the burst. Quantities of torsion take the places of their linear counterparts.
 */
static an_signal *place_of(an_burst *burst, an_signal_quantity quantity)
{
    switch (quantity) {
    case AN_SIGNAL_TIME:
        return &burst->time;
    case AN_SIGNAL_DISPLACEMENT:
    case AN_SIGNAL_ANGLE:
        return &burst->displacement;
    case AN_SIGNAL_FORCE:
    case AN_SIGNAL_TORQUE:
        return &burst->force;
    case AN_SIGNAL_TEMPERATURE:
        return &burst->temperature;
    default:
        return NULL;
    }
}

static an_status read_signals(const an_xml_node *node, an_burst *burst, an_error *err)
{
    for (const an_xml_node *child = an_xml_child(node, "signal"); child;
         child = an_xml_next(child, "signal")) {
        an_signal signal = AN_SIGNAL_NONE;
        AN_TRY(an_signal_read(child, &signal, err));
        an_signal *place = place_of(burst, signal.quantity);
        if (!place || place->data) {
            const char *name = an_signal_quantity_name(signal.quantity);
            an_signal_clear(&signal);
            return an_xml_fail(child, err, AN_E_DOCUMENT,
                               "a second signal of %s, or one that a burst cannot hold", name);
        }
        *place = signal;
    }
    return AN_OK;
}

static an_status read_clock(const an_xml_node *node, an_burst *burst, an_error *err)
{
    const an_xml_node *clock = an_xml_child(node, "clock");
    int64_t count;
    burst->has_time = clock == NULL;
    if (!clock) {
        burst->clock.count = (long)burst->time.count;
        return burst->time.count
                   ? AN_OK
                   : an_xml_fail(node, err, AN_E_DOCUMENT, "neither a clock nor a signal of time");
    }
    AN_TRY(an_xml_double(clock, "start", &burst->clock.start, err));
    AN_TRY(an_xml_double(clock, "interval", &burst->clock.interval, err));
    AN_TRY(an_xml_integer(clock, "count", 1, LONG_MAX, &count, err));
    if (!(burst->clock.interval > 0))
        return an_xml_fail(clock, err, AN_E_VALUE, "interval %g s is not positive", burst->clock.interval);
    burst->clock.count = (long)count;
    return AN_OK;
}

static an_status check_counts(const an_xml_node *node, const an_burst *burst, an_error *err)
{
    size_t count = (size_t)burst->clock.count;
    if (burst->displacement.count != count || burst->force.count != count ||
        (burst->temperature.count && burst->temperature.count != count))
        return an_xml_fail(
            node, err, AN_E_DOCUMENT,
            "%zu times, %zu samples of displacement, %zu of force, %zu of temperature: all must be alike",
            count, burst->displacement.count, burst->force.count, burst->temperature.count);
    return AN_OK;
}

static an_status read_burst(const an_xml_node *node, an_burst *burst, an_error *err)
{
    int64_t number;
    int kind;
    an_measure set;
    AN_TRY(an_xml_integer(node, "n", 1, INT_MAX, &number, err));
    burst->n = (int)number;
    if (an_xml_attribute_of(node, "step")) {
        AN_TRY(an_xml_integer(node, "step", INT_MIN, INT_MAX, &number, err));
        burst->step = (int)number;
    }
    AN_TRY(an_xml_word(node, "kind", kinds, &kind, err));
    burst->kind = (an_burst_kind)kind;
    AN_TRY(an_xml_measure_optional(node, "set_temperature", "K", &set, err));
    burst->set_temperature_K = set.value;
    AN_TRY(an_xml_measure_optional(node, "set_frequency", "Hz", &set, err));
    burst->set_frequency_Hz = set.value;
    AN_TRY(read_signals(node, burst, err));
    AN_TRY(read_clock(node, burst, err));
    AN_TRY(check_counts(node, burst, err));
    return an_remark_list_read(node, &burst->remarks, err);
}

static an_status visit_burst(void *context, const an_xml_document *document, const an_xml_node *node,
                             an_error *err)
{
    reading_state *state = context;
    an_burst burst;
    if (!state->has_head)
        AN_TRY(read_head(state, document->root, err));
    an_burst_init(&burst);
    an_status status = read_burst(node, &burst, err);
    if (status >= 0) {
        state->n_burst++;
        if (state->visitor && state->visitor->burst)
            status = state->visitor->burst(state->run, &burst, state->visitor->user, err);
    }
    an_burst_clear(&burst);
    return status;
}

static an_status read_end(reading_state *state, const an_xml_node *root, an_error *err)
{
    const an_xml_node *end = an_xml_child(root, "end");
    int64_t bursts;
    if (!state->has_head)
        AN_TRY(read_head(state, root, err));
    if (!end)
        return an_xml_fail(root, err, AN_E_DOCUMENT, "the run has no <end>: it is truncated");
    AN_TRY(an_xml_integer(end, "bursts", 0, INT_MAX, &bursts, err));
    if (bursts != state->n_burst)
        return an_xml_fail(end, err, AN_E_DOCUMENT, "%lld bursts declared, %d found", (long long)bursts,
                           state->n_burst);
    state->run->n_burst = state->n_burst;
    return an_remark_list_read(end, &state->run->remarks, err);
}

an_status an_run_read(const char *path, an_run *run, const an_run_visitor *visitor, char sha256[65],
                      an_error *err)
{
    static const char *const streamed[] = {"burst", NULL};
    reading_state state = {.run = run, .visitor = visitor};
    an_xml_reading reading = {.root = "run", .streamed = streamed, .visit = visit_burst, .context = &state};
    an_xml_document document;
    an_status status = an_xml_read(path, &reading, &document, err);
    if (status >= 0)
        status = read_end(&state, document.root, err);
    if (status >= 0 && sha256)
        memcpy(sha256, document.sha256, AN_SHA256_SIZE);
    an_xml_document_clear(&document);
    return status;
}

void an_burst_times(const an_burst *burst, double *time_s)
{
    if (burst->has_time) {
        an_signal_decode(&burst->time, time_s);
        return;
    }
    for (long i = 0; i < burst->clock.count; i++)
        time_s[i] = burst->clock.start + (double)i * burst->clock.interval;
}
