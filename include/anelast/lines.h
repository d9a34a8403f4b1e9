/* anelast/lines.h: a text dump line by line in UTF-8, whatever its encoding, in bounded memory. Undecodable
 * bytes are refused with their line, never replaced.
 */
#ifndef ANELAST_LINES_H
#define ANELAST_LINES_H

#include "anelast/layout.h"
#include "anelast/status.h"

#include <stdbool.h>
#include <stddef.h>

/* The longest line of a dump; a longer one means another encoding, or no text at all. */
enum { AN_LINE_MOST = 1024 * 1024 };

/* One line; text belongs to the reader and lives until the next call. */
typedef struct an_line {
    const char *text; /* [n] UTF-8 without the end of line, not terminated; NULL behind the last line */
    size_t n;         /* bytes */
    long number;      /* from 1 */
    bool ended;       /* false: the dump ends without an end of line here */
} an_line;

typedef struct an_lines an_lines;

/* an_lines_open: start reading a file.
 *   lines [out] free with an_lines_free
 * Returns AN_OK, AN_E_IO naming the file, or AN_E_MEMORY. */
an_status an_lines_open(const char *path, an_encoding encoding, an_lines **lines, an_error *err);

/* an_lines_open_text: the same for a text in memory, in UTF-8.
 *   text [in] [n], lives until the lines are freed
 *   name [in] for messages
 * Returns AN_OK, AN_E_IO or AN_E_MEMORY. */
an_status an_lines_open_text(const char *text, size_t n, const char *name, an_lines **lines, an_error *err);

/* an_lines_next: the next line.
 * Returns AN_OK (line->text NULL behind the last), AN_E_FORMAT (bytes that the encoding does not allow, a
 * zero byte), AN_E_LIMIT (a line longer than AN_LINE_MOST), AN_E_IO or AN_E_MEMORY. */
an_status an_lines_next(an_lines *lines, an_line *line, an_error *err);

/* an_lines_mark: the encoding that a mark at the beginning named ("UTF-16LE"), or NULL where none stood
 * there. */
const char *an_lines_mark(const an_lines *lines);

/* an_lines_free: close and release; *lines becomes NULL. */
void an_lines_free(an_lines **lines);

#endif
