/* Signals: sampled quantities as the dump held them, decoded to SI on demand, and their base64 parts in
 * documents. */
#include "anelast/signal.h"

#include "anelast/base64.h"
#include "anelast/hash.h"

#include <endian.h>
#include <inttypes.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Raw bytes of a part: 3 MiB are 4 MiB of base64, and whole samples of every coding. */
enum { PART_BYTES = 3 * 1024 * 1024, PART_TEXT = PART_BYTES / 3 * 4 };

/* Samples that a signal of a document may claim to have. */
#define COUNT_MOST (INT64_C(1) << 36)

static const struct {
    const char *name, *unit;
} quantities[AN_N_SIGNAL_QUANTITIES] = {
    [AN_SIGNAL_TIME] = {"time", "s"},     [AN_SIGNAL_DISPLACEMENT] = {"displacement", "m"},
    [AN_SIGNAL_FORCE] = {"force", "N"},   [AN_SIGNAL_TEMPERATURE] = {"temperature", "K"},
    [AN_SIGNAL_ANGLE] = {"angle", "rad"}, [AN_SIGNAL_TORQUE] = {"torque", "N.m"},
    [AN_SIGNAL_STRAIN] = {"strain", "1"}, [AN_SIGNAL_STRESS] = {"stress", "Pa"},
};

static const struct {
    const char *name;
    size_t size; /* [byte] */
} codings[AN_N_CODINGS] = {
    [AN_CODING_INT16] = {"int16", 2},
    [AN_CODING_INT32] = {"int32", 4},
    [AN_CODING_FLOAT32] = {"float32", 4},
    [AN_CODING_FLOAT64] = {"float64", 8},
};

const char *an_signal_quantity_name(an_signal_quantity quantity)
{
    return quantities[quantity].name;
}

const char *an_signal_quantity_unit(an_signal_quantity quantity)
{
    return quantities[quantity].unit;
}

bool an_signal_quantity_find(const char *name, an_signal_quantity *quantity)
{
    for (int i = 0; i < AN_N_SIGNAL_QUANTITIES; i++)
        if (strcmp(quantities[i].name, name) == 0) {
            *quantity = (an_signal_quantity)i;
            return true;
        }
    return false;
}

size_t an_coding_size(an_signal_coding coding)
{
    return codings[coding].size;
}

an_status an_signal_allocate(an_signal *signal, an_signal_quantity quantity, an_signal_coding coding,
                             size_t count, an_error *err)
{
    *signal = AN_SIGNAL_NONE;
    signal->data = calloc(count ? count : 1, codings[coding].size);
    if (!signal->data)
        return an_fail_memory(err, "a signal");
    signal->quantity = quantity;
    signal->coding = coding;
    signal->count = count;
    return AN_OK;
}

void an_signal_clear(an_signal *signal)
{
    free(signal->data);
    *signal = (an_signal){0};
}

static double raw_at(const an_signal *signal, size_t i)
{
    switch (signal->coding) {
    case AN_CODING_INT16:
        return ((const int16_t *)signal->data)[i];
    case AN_CODING_INT32:
        return ((const int32_t *)signal->data)[i];
    case AN_CODING_FLOAT32:
        return ((const float *)signal->data)[i];
    default:
        return ((const double *)signal->data)[i];
    }
}

void an_signal_decode(const an_signal *signal, double *values)
{
    double divisor = signal->divisor > 0 ? signal->divisor : 1;
    for (size_t i = 0; i < signal->count; i++)
        values[i] = raw_at(signal, i) * signal->scale / divisor + signal->offset;
}

/* Copy samples between the machine's byte order and the documents' little-endian one; the same both ways. */
static void copy_little_endian(void *to, const void *from, size_t n_bytes, size_t size)
{
    memcpy(to, from, n_bytes);
    if (__BYTE_ORDER__ == __ORDER_LITTLE_ENDIAN__)
        return;
    unsigned char *b = to;
    for (size_t i = 0; i < n_bytes; i += size)
        for (size_t j = 0; j < size / 2; j++) {
            unsigned char swapped = b[i + j];
            b[i + j] = b[i + size - 1 - j];
            b[i + size - 1 - j] = swapped;
        }
}

/* Write one part; raw [n_raw] and text [PART_TEXT] are workspaces, raw filled. */
static an_status write_part(an_xml_writer *writer, const void *raw, size_t n_raw, char *text, an_error *err)
{
    char hex[AN_SHA256_SIZE];
    if (an_sha256_of(raw, n_raw, hex) < 0)
        return an_fail_memory(err, "a hash");
    an_base64_encode(raw, n_raw, text);
    an_xml_start(writer, "part");
    an_xml_put(writer, "sha256", hex);
    an_xml_put_raw(writer, text, an_base64_size(n_raw));
    an_xml_end(writer);
    return AN_OK;
}

static an_status write_parts(an_xml_writer *writer, const an_signal *signal, an_error *err)
{
    an_status status = AN_OK;
    size_t size = codings[signal->coding].size, n_all = signal->count * size;
    size_t n_most = n_all < PART_BYTES ? n_all : PART_BYTES;
    char *raw = malloc(n_most + 1), *text = malloc(an_base64_size(n_most) + 1);
    if (!raw || !text) {
        status = an_fail_memory(err, "a part of a signal");
        goto cleanup;
    }
    for (size_t first = 0; first < n_all; first += PART_BYTES) {
        size_t n = n_all - first < PART_BYTES ? n_all - first : PART_BYTES;
        copy_little_endian(raw, (const char *)signal->data + first, n, size);
        AN_CLEAN(write_part(writer, raw, n, text, err));
    }
cleanup:
    free(raw);
    free(text);
    return status;
}

an_status an_signal_write(an_xml_writer *writer, const an_signal *signal, const char *name, an_error *err)
{
    an_xml_start(writer, "signal");
    an_xml_put(writer, "name", name);
    an_xml_put(writer, "quantity", quantities[signal->quantity].name);
    an_xml_put(writer, "unit", quantities[signal->quantity].unit);
    an_xml_put(writer, "coding", codings[signal->coding].name);
    an_xml_put_double(writer, "scale", signal->scale);
    if (signal->divisor > 0 && signal->divisor != 1)
        an_xml_put_double(writer, "divisor", signal->divisor);
    an_xml_put_double(writer, "offset", signal->offset);
    an_xml_put_integer(writer, "count", (int64_t)signal->count);
    an_status status = write_parts(writer, signal, err);
    an_xml_end(writer);
    return status;
}

/* ---- reading ---- */

/* The attributes, all but the samples. */
static an_status read_head(const an_xml_node *node, an_signal *signal, an_error *err)
{
    static const char *const coding_words[] = {"int16", "int32", "float32", "float64", NULL};
    const char *quantity, *unit;
    int coding = 0;
    int64_t count = 0;
    AN_TRY(an_xml_text(node, "quantity", &quantity, err));
    if (!an_signal_quantity_find(quantity, &signal->quantity))
        return an_xml_fail(node, err, AN_E_VALUE, "quantity '%.40s' is not known", quantity);
    AN_TRY(an_xml_text(node, "unit", &unit, err));
    if (strcmp(unit, quantities[signal->quantity].unit) != 0)
        return an_xml_fail(node, err, AN_E_UNIT, "unit of %s is '%.40s'; allowed is %s", quantity, unit,
                           quantities[signal->quantity].unit);
    AN_TRY(an_xml_word(node, "coding", coding_words, &coding, err));
    AN_TRY(an_xml_double_or(node, "scale", 1, &signal->scale, err));
    AN_TRY(an_xml_double_or(node, "divisor", 1, &signal->divisor, err));
    AN_TRY(an_xml_double_or(node, "offset", 0, &signal->offset, err));
    AN_TRY(an_xml_integer(node, "count", 0, COUNT_MOST, &count, err));
    if (signal->scale == 0 || signal->divisor <= 0)
        return an_xml_fail(node, err, AN_E_VALUE,
                           "scale of %s is %g and divisor %g; allowed are scale != 0, divisor > 0", quantity,
                           signal->scale, signal->divisor);
    signal->coding = (an_signal_coding)coding;
    signal->count = (size_t)count;
    return AN_OK;
}

/* Whether the parts' text can hold just what the count says; looked at before memory is asked for. */
static an_status check_size(const an_xml_node *node, const an_signal *signal, an_error *err)
{
    size_t n_bytes = 0;
    for (const an_xml_node *part = an_xml_child(node, "part"); part; part = an_xml_next(part, "part")) {
        size_t n = part->n_text;
        n_bytes += n / 4 * 3 - (n && part->text[n - 1] == '=') - (n > 1 && part->text[n - 2] == '=');
    }
    if (n_bytes != signal->count * codings[signal->coding].size)
        return an_xml_fail(node, err, AN_E_DOCUMENT,
                           "%s: the parts hold %zu bytes; %zu samples of %s are %zu",
                           quantities[signal->quantity].name, n_bytes, signal->count,
                           codings[signal->coding].name, signal->count * codings[signal->coding].size);
    return AN_OK;
}

/* Decode one part to raw [room] and check its hash. Returns AN_OK or AN_E_DOCUMENT. */
static an_status read_part(const an_xml_node *part, const char *quantity, int i_part, char *raw, size_t *n,
                           an_error *err)
{
    char hex[AN_SHA256_SIZE];
    const char *said;
    AN_TRY(an_xml_text(part, "sha256", &said, err));
    if (!an_base64_decode(part->text, part->n_text, raw, n))
        return an_xml_fail(part, err, AN_E_DOCUMENT, "%s, part %d: the text is not unwrapped base64",
                           quantity, i_part);
    if (an_sha256_of(raw, *n, hex) < 0)
        return an_fail_memory(err, "a hash");
    if (strcmp(hex, said) != 0)
        return an_xml_fail(
            part, err, AN_E_DOCUMENT,
            "%s, part %d: its bytes have SHA-256 %s, not %.64s as it says: it was changed or damaged",
            quantity, i_part, hex, said);
    return AN_OK;
}

static an_status read_parts(const an_xml_node *node, an_signal *signal, an_error *err)
{
    size_t size = codings[signal->coding].size, n_done = 0;
    int i_part = 0;
    /* The last part decodes in groups of three bytes: room for two more. */
    signal->data = malloc(signal->count * size + 3);
    if (!signal->data)
        return an_fail_memory(err, "a signal");
    for (const an_xml_node *part = an_xml_child(node, "part"); part; part = an_xml_next(part, "part")) {
        char *at = (char *)signal->data + n_done;
        size_t n = 0;
        AN_TRY(read_part(part, quantities[signal->quantity].name, ++i_part, at, &n, err));
        n_done += n;
    }
    if (__BYTE_ORDER__ != __ORDER_LITTLE_ENDIAN__) {
        char *copy = malloc(n_done + 1);
        if (!copy)
            return an_fail_memory(err, "a signal");
        copy_little_endian(copy, signal->data, n_done, size);
        free(signal->data);
        signal->data = copy;
    }
    return AN_OK;
}

an_status an_signal_read(const an_xml_node *node, an_signal *signal, an_error *err)
{
    *signal = AN_SIGNAL_NONE;
    an_status status = read_head(node, signal, err);
    if (status == AN_OK)
        status = check_size(node, signal, err);
    if (status == AN_OK)
        status = read_parts(node, signal, err);
    if (status < 0)
        an_signal_clear(signal);
    return status;
}
