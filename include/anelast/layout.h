/* anelast/layout.h: what a lab says once about the dumps of an instrument, so that nobody edits a dump by
 * hand. A written document of the acquire floor (schema/layout.xsd says each element, with an example).
 * Everything in it is by name or by content, never by the numbers of one dump.
 *
 * Texts in these structs belong to the layout's document and live until an_layout_clear.
 */
#ifndef ANELAST_LAYOUT_H
#define ANELAST_LAYOUT_H

#include "anelast/run.h"
#include "anelast/status.h"
#include "anelast/xml.h"

#include <stdbool.h>

/* How the bytes of a text become characters. */
typedef enum an_encoding {
    AN_ENCODING_UTF8 = 0, /* with or without a mark; a mark of UTF-16 is refused by name */
    AN_ENCODING_UTF16,    /* either way, as its mark says; little-endian without one */
    AN_ENCODING_UTF16LE,
    AN_ENCODING_UTF16BE,
    AN_ENCODING_LATIN1, /* ISO-8859-1 */
    AN_ENCODING_CP1252  /* Windows-1252 */
} an_encoding;

/* What a column, or a value of a block header or a burst table, means. */
typedef enum an_role {
    AN_ROLE_STEP = 0,                    /* number of the step, any text that changes from burst to burst */
    AN_ROLE_TIME,                        /* [s] */
    AN_ROLE_DISPLACEMENT,                /* [m], or [rad] in torsion */
    AN_ROLE_FORCE,                       /* [N], or [N.m] in torsion */
    AN_ROLE_TEMPERATURE,                 /* [K] */
    AN_ROLE_SET_FREQUENCY,               /* [Hz] */
    AN_ROLE_SET_TEMPERATURE,             /* [K] */
    AN_N_COLUMN_ROLES,                   /* the roles above can be columns */
    AN_ROLE_SAMPLES = AN_N_COLUMN_ROLES, /* samples of the burst */
    AN_ROLE_FIRST_SAMPLE,                /* where the burst begins in a binary dump, samples from 0 */
    AN_ROLE_RATE,                        /* [Hz] samples a second */
    AN_ROLE_INTERVAL,                    /* [s] between samples */
    AN_ROLE_START,                       /* [s] time of the first sample */
    AN_ROLE_TYPE,                        /* of the counts, in words */
    AN_ROLE_BYTE_ORDER,                  /* of the counts, in words */
    AN_ROLE_ARRANGEMENT,                 /* of the counts, in words */
    AN_ROLE_CHANNELS,                    /* how many a binary dump holds */
    AN_N_ROLES
} an_role;

enum { AN_NAMES_MOST = 16, AN_FIELDS_MOST = 48, AN_CHANNELS_MOST = 48, AN_VALUES_MOST = 24 };

/* Alternatives of a name: what instruments and languages call one thing. */
typedef struct an_names {
    const char *text[AN_NAMES_MOST]; /* UTF-8 */
    int n;
} an_names;

/* Where a unit row is expected below the column heads. */
typedef enum an_unit_row_rule { AN_UNIT_ROW_FOUND = 0, AN_UNIT_ROW_YES, AN_UNIT_ROW_NO } an_unit_row_rule;

/* The form of a text, dump or sidecar. */
typedef struct an_text_form {
    an_encoding encoding;
    char separator;      /* between fields; ' ': runs of blanks and tabs */
    char quote;          /* around fields that hold a separator; '\0': none */
    char decimal_mark;   /* '.' or ',' */
    const char *comment; /* what opens a comment line; NULL: none */
    bool header;         /* false: columns are known by position, no row names them */
    an_unit_row_rule unit_row;
    an_names missing;   /* marks that stand for no value; an empty field always does */
    double overrange;   /* [as in the dump] magnitudes from here on are no values; NAN: none */
    const char *footer; /* what opens the row behind the data; NULL: none */
} an_text_form;

/* One thing that the dump's own head says about the specimen. */
typedef struct an_layout_field {
    const char *name; /* id, material, lot, operator, started, rig, geometry, or a dimension */
    an_names keys;
    const char *unit;      /* of a dimension; NULL: stands in the dump */
    const char *form;      /* of `started`: strptime's directives; NULL: ISO 8601 */
    const char *zone;      /* of `started` where the dump has none: "Z" or "+01:00"; NULL */
    an_names texts, words; /* the dump's words for the geometry, and what they mean */
} an_layout_field;

/* One channel. */
typedef struct an_layout_channel {
    an_role role;
    an_names columns;
    int position;     /* of the column, from 1; 0: by name */
    const char *unit; /* NULL: as the dump's unit row says */
    double gain;      /* [1] true / dump, negative where the sign is to be turned */
    bool optional;
} an_layout_channel;

/* One value of a block header or of a burst table, or a fact about a binary dump. */
typedef struct an_layout_value {
    an_role role;
    an_names keys;
    const char *unit; /* NULL: as the dump says, else SI */
} an_layout_value;

/* Where bursts begin and end. */
typedef enum an_bursts_from {
    AN_BURSTS_STEP = 0, /* a column changes */
    AN_BURSTS_BLOCKS,   /* a small header stands before each */
    AN_BURSTS_TABLE,    /* a table beside the samples says so */
    AN_BURSTS_SIGNALS,  /* to be found from time and displacement */
    AN_BURSTS_WHOLE     /* the dump is one burst */
} an_bursts_from;

/* Type of binary counts. */
typedef enum an_count_type {
    AN_COUNT_INT16 = 0,
    AN_COUNT_INT24,
    AN_COUNT_INT32,
    AN_COUNT_FLOAT32,
    AN_COUNT_FLOAT64
} an_count_type;

/* The form of a binary dump and of the text beside it. */
typedef struct an_counts_form {
    bool present; /* false: the dump is text */
    an_count_type type;
    bool big_endian;
    bool planar;             /* one channel after the other; false: interleaved */
    long offset;             /* [bytes] before the first sample */
    const char *sidecar;     /* what replaces the dump's extension, ".txt"; NULL: no text beside it */
    const char *channel_key; /* "ch{n}" of rows "ch1=force N 2e-05": name, unit, size of a count; NULL */
    const char *burst_key;   /* key that opens a row of the burst table; NULL: none */
} an_counts_form;

typedef struct an_layout {
    char id[96];
    an_text_form text; /* of the dump, or of the sidecar of a binary dump */
    an_counts_form counts;
    const char *key_separator; /* between key and value in the head, one character; NULL: as between fields */
    int n_field;
    an_layout_field fields[AN_FIELDS_MOST];
    int n_ignored_key;
    an_names ignored_keys[AN_FIELDS_MOST];
    int n_channel;
    an_layout_channel channels[AN_CHANNELS_MOST];
    int n_ignored_column;
    an_names ignored_columns[AN_CHANNELS_MOST];
    double rate_Hz; /* [Hz] where no column and no table gives time; NAN */
    an_bursts_from bursts_from;
    an_burst_kind kind;
    const char *block_mark; /* "[step {n}]" opens a block; {n} is the step's number */
    int n_value;
    an_layout_value values[AN_VALUES_MOST];
    bool compliance_corrected; /* the dump's displacement is already free of the frame's part */
    bool inertia_corrected;    /* the dump's force is already free of the moving mass */
    char sha256[AN_SHA256_SIZE];
    an_xml_document document; /* holds the texts */
} an_layout;

/* an_layout_load: read a layout and check what the schema cannot.
 *   layout [out] clear with an_layout_clear, also after a refusal
 * Returns AN_OK, AN_E_IO, AN_E_DOCUMENT, AN_E_UNIT, AN_E_VALUE or AN_E_LIMIT with the place. */
an_status an_layout_load(const char *path, an_layout *layout, an_error *err);

/* an_layout_clear: release the document that holds the texts. */
void an_layout_clear(an_layout *layout);

/* an_role_name: the role's word in documents and messages ("set_frequency"). */
const char *an_role_name(an_role role);

/* an_role_unit: the SI unit of the role, UCUM; NULL for roles that are words or plain numbers. */
const char *an_role_unit(an_role role);

/* an_names_has: whether a text of n bytes is one of the alternatives. */
bool an_names_has(const an_names *names, const char *text, size_t n);

/* an_layout_value_of: the layout's value with that key, or NULL. */
const an_layout_value *an_layout_value_of(const an_layout *layout, const char *key, size_t n);

#endif
