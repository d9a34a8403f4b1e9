/* anelast/signal.h: a sampled quantity as the dump held it: counts stay counts, fixed decimals stay integers
 * with a scale, and SI comes from them by raw * scale / divisor + offset. In documents it stands as base64
 * parts, each with its hash.
 */
#ifndef ANELAST_SIGNAL_H
#define ANELAST_SIGNAL_H

#include "anelast/xml.h"

#include <stddef.h>
#include <stdint.h>

/* What a signal is of. Words and SI units: an_signal_quantity_row. */
typedef enum an_signal_quantity {
    AN_SIGNAL_TIME,         /* s */
    AN_SIGNAL_DISPLACEMENT, /* m */
    AN_SIGNAL_FORCE,        /* N */
    AN_SIGNAL_TEMPERATURE,  /* K */
    AN_SIGNAL_ANGLE,        /* rad */
    AN_SIGNAL_TORQUE,       /* N.m */
    AN_SIGNAL_STRAIN,       /* 1 */
    AN_SIGNAL_STRESS,       /* Pa */
    AN_N_SIGNAL_QUANTITIES
} an_signal_quantity;

/* How the raw samples are held, in memory in the machine's byte order, in documents little-endian. */
typedef enum an_signal_coding {
    AN_CODING_INT16,
    AN_CODING_INT32,
    AN_CODING_FLOAT32,
    AN_CODING_FLOAT64,
    AN_N_CODINGS
} an_signal_coding;

/* A signal; init with AN_SIGNAL_NONE or zeros, clear with an_signal_clear. */
typedef struct an_signal {
    an_signal_quantity quantity; /* what it is of */
    an_signal_coding coding;     /* type of the raw samples */
    double scale;                /* [SI unit / raw * divisor], not 0 */
    double divisor;              /* [1] > 0, 0 means 1; a power of ten where decimals became integers */
    double offset;               /* [SI unit] */
    size_t count;                /* samples */
    void *data;                  /* [count] raw samples of the coding; owned */
} an_signal;

#define AN_SIGNAL_NONE ((an_signal){.scale = 1, .divisor = 1})

/* an_signal_quantity_name, an_signal_quantity_unit: word in documents ("force") and SI unit ("N"). */
const char *an_signal_quantity_name(an_signal_quantity quantity);
const char *an_signal_quantity_unit(an_signal_quantity quantity);

/* an_signal_quantity_find: the quantity of a word. Returns false where there is none. */
bool an_signal_quantity_find(const char *name, an_signal_quantity *quantity);

/* an_coding_size: bytes of one sample. */
size_t an_coding_size(an_signal_coding coding);

/* an_signal_allocate: room for count samples of a coding, zeros. Returns AN_OK or AN_E_MEMORY. */
an_status an_signal_allocate(an_signal *signal, an_signal_quantity quantity, an_signal_coding coding,
                             size_t count, an_error *err);

/* an_signal_clear: release the samples and zero the struct. */
void an_signal_clear(an_signal *signal);

/* an_signal_decode: the samples in SI.
 *   values [out] [signal->count] [SI unit of the quantity] */
void an_signal_decode(const an_signal *signal, double *values);

/* an_signal_write: `<signal quantity= unit= coding= scale= divisor= offset= count=>` with parts of at most 4
 * MiB of base64, each with the SHA-256 of its raw little-endian bytes. name [in] attribute name of the signal
 * where the document needs one, or NULL Returns AN_OK or AN_E_MEMORY; write errors stick in the writer. */
an_status an_signal_write(an_xml_writer *writer, const an_signal *signal, const char *name, an_error *err);

/* an_signal_read: read a `signal` element, with every check: words, unit, count against the parts' bytes,
 * base64, hashes. signal [out] clear with an_signal_clear Returns AN_OK, AN_E_DOCUMENT naming the part that
 * differs, AN_E_VALUE, AN_E_UNIT or AN_E_MEMORY. */
an_status an_signal_read(const an_xml_node *node, an_signal *signal, an_error *err);

#endif
