/* Text dumps, line by line. Raw bytes come in blocks; UTF-8 is used where it lies and only checked where a
 * byte above 127 stands in it, ISO-8859-1 and Windows-1252 are widened by a table, UTF-16 goes through iconv.
 * Memory: two blocks and the longest line.
 */
#include "anelast/lines.h"

#include <errno.h>
#include <iconv.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { BLOCK = 256 * 1024 };

struct an_lines {
    FILE *stream;
    char *path;
    an_encoding encoding;
    const char *mark;  /* see an_lines_mark */
    iconv_t converter; /* (iconv_t)-1 where none is needed */
    char *raw;         /* [BLOCK] undecoded bytes */
    size_t n_raw;      /* bytes of raw that wait for the next block */
    char *text;        /* [room] decoded */
    size_t begin, end; /* of what is not handed out yet */
    size_t room;
    bool wide;   /* a byte above 127 stands in text: lines are checked */
    bool at_end; /* the file is read to its end */
    long number; /* of the last line handed out */
};

/* Windows-1252 where it differs from ISO-8859-1, bytes 0x80..0x9f; 0: not assigned. From the Unicode
 * consortium's table. */
static const uint16_t cp1252[32] = {
    0x20ac, 0,      0x201a, 0x0192, 0x201e, 0x2026, 0x2020, 0x2021, 0x02c6, 0x2030, 0x0160,
    0x2039, 0x0152, 0,      0x017d, 0,      0,      0x2018, 0x2019, 0x201c, 0x201d, 0x2022,
    0x2013, 0x2014, 0x02dc, 0x2122, 0x0161, 0x203a, 0x0153, 0,      0x017e, 0x0178,
};

static an_status fail_at(const an_lines *lines, long number, an_error *err, an_status status,
                         const char *text)
{
    char place[512];
    snprintf(place, sizeof place, "%.480s:%ld", lines->path, number);
    return an_fail(err, status, place, "%s", text);
}

static an_status make_room(an_lines *lines, size_t wanted, an_error *err)
{
    if (lines->begin > 0) {
        memmove(lines->text, lines->text + lines->begin, lines->end - lines->begin);
        lines->end -= lines->begin;
        lines->begin = 0;
    }
    if (lines->room - lines->end >= wanted)
        return AN_OK;
    size_t room = lines->end + wanted;
    char *text = realloc(lines->text, room);
    if (!text)
        return an_fail_memory(err, "a block of the dump");
    lines->text = text;
    lines->room = room;
    return AN_OK;
}

static bool has_high_byte(const char *bytes, size_t n)
{
    size_t i = 0;
    for (; i + 8 <= n; i += 8) {
        uint64_t word;
        memcpy(&word, bytes + i, 8);
        if (word & UINT64_C(0x8080808080808080))
            return true;
    }
    for (; i < n; i++)
        if (bytes[i] & 0x80)
            return true;
    return false;
}

/* Length of the UTF-8 sequence at s, 0 where it is not one (RFC 3629: no overlong forms, no surrogates). */
static size_t sequence_length(const unsigned char *s, size_t n)
{
    if (s[0] < 0x80)
        return 1;
    size_t length = s[0] >= 0xf0 ? 4 : s[0] >= 0xe0 ? 3 : 2;
    if (s[0] < 0xc2 || s[0] > 0xf4 || n < length)
        return 0;
    for (size_t i = 1; i < length; i++)
        if ((s[i] & 0xc0) != 0x80)
            return 0;
    if ((s[0] == 0xe0 && s[1] < 0xa0) || (s[0] == 0xed && s[1] > 0x9f) || (s[0] == 0xf0 && s[1] < 0x90) ||
        (s[0] == 0xf4 && s[1] > 0x8f))
        return 0;
    return length;
}

static bool is_utf8(const char *text, size_t n)
{
    for (size_t i = 0; i < n;) {
        size_t length = sequence_length((const unsigned char *)text + i, n - i);
        if (length == 0)
            return false;
        i += length;
    }
    return true;
}

/* One character of a single-byte encoding, as UTF-8. Returns bytes written, 0 where the byte is not assigned.
 */
static size_t widen(an_encoding encoding, unsigned char byte, char *out)
{
    unsigned code = byte;
    if (encoding == AN_ENCODING_CP1252 && byte >= 0x80 && byte < 0xa0)
        code = cp1252[byte - 0x80];
    if (code == 0)
        return 0;
    if (code < 0x80) {
        out[0] = (char)code;
        return 1;
    }
    if (code < 0x800) {
        out[0] = (char)(0xc0 | code >> 6);
        out[1] = (char)(0x80 | (code & 0x3f));
        return 2;
    }
    out[0] = (char)(0xe0 | code >> 12);
    out[1] = (char)(0x80 | (code >> 6 & 0x3f));
    out[2] = (char)(0x80 | (code & 0x3f));
    return 3;
}

static long line_at(const an_lines *lines, const char *end)
{
    long number = lines->number + 1;
    for (const char *at = lines->text + lines->begin; at < end; at++)
        number += *at == '\n';
    return number;
}

static an_status decode_single_bytes(an_lines *lines, size_t n, an_error *err)
{
    AN_TRY(make_room(lines, 3 * n, err));
    if (!has_high_byte(lines->raw, n)) {
        memcpy(lines->text + lines->end, lines->raw, n);
        lines->end += n;
        return AN_OK;
    }
    for (size_t i = 0; i < n; i++) {
        unsigned char byte = (unsigned char)lines->raw[i];
        size_t length = widen(lines->encoding, byte, lines->text + lines->end);
        if (length == 0 && byte != 0)
            return fail_at(lines, line_at(lines, lines->text + lines->end), err, AN_E_FORMAT,
                           "a byte that Windows-1252 does not assign; check the encoding");
        if (byte == 0)
            lines->text[lines->end] = '\0';
        lines->end += length + (byte == 0);
    }
    return AN_OK;
}

static an_status decode_utf16(an_lines *lines, size_t n, an_error *err)
{
    AN_TRY(make_room(lines, 2 * n + 4, err));
    char *in = lines->raw, *out = lines->text + lines->end;
    size_t n_in = n, n_out = lines->room - lines->end;
    size_t result = iconv(lines->converter, &in, &n_in, &out, &n_out);
    int why = errno;
    lines->end = (size_t)(out - lines->text);
    lines->wide = false; /* what iconv makes is UTF-8 */
    if (result == (size_t)-1 && why != EINVAL)
        return fail_at(lines, line_at(lines, out), err, AN_E_FORMAT,
                       "bytes that are no UTF-16; check the encoding");
    if (n_in > 0 && lines->at_end)
        return fail_at(lines, line_at(lines, out), err, AN_E_FORMAT,
                       "the file ends within a character of UTF-16");
    memmove(lines->raw, in, n_in);
    lines->n_raw = n_in;
    return AN_OK;
}

/* Read and decode the next block behind what waits in text. */
static an_status fill(an_lines *lines, an_error *err)
{
    bool in_place = lines->encoding == AN_ENCODING_UTF8;
    if (in_place)
        AN_TRY(make_room(lines, BLOCK, err));
    char *to = in_place ? lines->text + lines->end : lines->raw + lines->n_raw;
    size_t n = fread(to, 1, in_place ? BLOCK : BLOCK - lines->n_raw, lines->stream);
    if (ferror(lines->stream))
        return an_fail(err, AN_E_IO, lines->path, "cannot be read: %s", strerror(errno));
    lines->at_end = feof(lines->stream);
    if (!in_place) {
        size_t n_all = lines->n_raw + n;
        lines->n_raw = 0;
        return lines->converter == (iconv_t)-1 ? decode_single_bytes(lines, n_all, err)
                                               : decode_utf16(lines, n_all, err);
    }
    lines->end += n;
    lines->wide = has_high_byte(lines->text + lines->begin, lines->end - lines->begin);
    return AN_OK;
}

static an_status choose_utf16(an_lines *lines, const unsigned char *mark, size_t n, size_t *skip,
                              an_error *err)
{
    bool little = n >= 2 && mark[0] == 0xff && mark[1] == 0xfe,
         big = n >= 2 && mark[0] == 0xfe && mark[1] == 0xff;
    if (little || big) {
        *skip = 2;
        lines->mark = little ? "UTF-16LE" : "UTF-16BE";
    }
    bool is_big = lines->encoding == AN_ENCODING_UTF16BE || (lines->encoding == AN_ENCODING_UTF16 && big);
    if ((lines->encoding == AN_ENCODING_UTF16LE && big) || (lines->encoding == AN_ENCODING_UTF16BE && little))
        return an_fail(err, AN_E_FORMAT, lines->path, "its mark says %s; check the encoding", lines->mark);
    lines->converter = iconv_open("UTF-8", is_big ? "UTF-16BE" : "UTF-16LE");
    if (lines->converter == (iconv_t)-1)
        return an_fail(err, AN_E_IO, lines->path, "this system cannot convert UTF-16: %s", strerror(errno));
    return AN_OK;
}

/* Look at the mark that may stand at the beginning, and step behind it. */
static an_status read_mark(an_lines *lines, an_error *err)
{
    unsigned char mark[3];
    size_t n = fread(mark, 1, sizeof mark, lines->stream), skip = 0;
    if (ferror(lines->stream))
        return an_fail(err, AN_E_IO, lines->path, "cannot be read: %s", strerror(errno));
    bool utf16 = n >= 2 && ((mark[0] == 0xff && mark[1] == 0xfe) || (mark[0] == 0xfe && mark[1] == 0xff));
    if (lines->encoding >= AN_ENCODING_UTF16 && lines->encoding <= AN_ENCODING_UTF16BE)
        AN_TRY(choose_utf16(lines, mark, n, &skip, err));
    else if (utf16)
        return an_fail(
            err, AN_E_FORMAT, lines->path,
            "a mark of UTF-16 stands at its beginning, and the layout names another encoding; it can be "
            "'UTF-16'");
    else if (n == 3 && memcmp(mark, "\xef\xbb\xbf", 3) == 0 && lines->encoding == AN_ENCODING_UTF8) {
        skip = 3;
        lines->mark = "UTF-8";
    }
    if (fseek(lines->stream, (long)skip, SEEK_SET) != 0)
        return an_fail(err, AN_E_IO, lines->path, "cannot be read from its beginning: %s", strerror(errno));
    return AN_OK;
}

/* A reader of a stream, which it closes; a stream that is not there is refused with the reason in errno. */
static an_status open_stream(FILE *stream, const char *name, an_encoding encoding, an_lines **lines,
                             an_error *err)
{
    int why = errno;
    an_lines *made = calloc(1, sizeof *made);
    if (!made) {
        if (stream)
            fclose(stream);
        return an_fail_memory(err, "a reader of lines");
    }
    made->converter = (iconv_t)-1;
    made->encoding = encoding;
    made->path = strdup(name);
    made->raw = malloc(BLOCK);
    made->stream = stream;
    an_status status;
    if (!made->path || !made->raw)
        status = an_fail_memory(err, "a reader of lines");
    else if (!stream)
        status = an_fail(err, AN_E_IO, name, "cannot be opened: %s", strerror(why));
    else
        status = read_mark(made, err);
    if (status < 0) {
        an_lines_free(&made);
        return status;
    }
    *lines = made;
    return AN_OK;
}

an_status an_lines_open(const char *path, an_encoding encoding, an_lines **lines, an_error *err)
{
    return open_stream(fopen(path, "rb"), path, encoding, lines, err);
}

an_status an_lines_open_text(const char *text, size_t n, const char *name, an_lines **lines, an_error *err)
{
    if (n == 0)
        return an_fail(err, AN_E_FORMAT, name, "an empty text");
    return open_stream(fmemopen((void *)(uintptr_t)text, n, "rb"), name, AN_ENCODING_UTF8, lines, err);
}

static an_status check_line(const an_lines *lines, const an_line *line, an_error *err)
{
    if (lines->wide && !is_utf8(line->text, line->n))
        return fail_at(lines, line->number, err, AN_E_FORMAT, "bytes that are no UTF-8; check the encoding");
    if (memchr(line->text, '\0', line->n))
        return fail_at(lines, line->number, err, AN_E_FORMAT, "a zero byte: no text in this encoding");
    return AN_OK;
}

/* Hand out the n bytes at begin as a line, and step behind its end. */
static an_status hand_out(an_lines *lines, size_t n, bool ended, an_line *line, an_error *err)
{
    line->text = lines->text + lines->begin;
    line->n = n;
    line->ended = ended;
    line->number = ++lines->number;
    lines->begin += n + ended;
    if (line->n > 0 && line->text[line->n - 1] == '\r')
        line->n--;
    return check_line(lines, line, err);
}

an_status an_lines_next(an_lines *lines, an_line *line, an_error *err)
{
    size_t scanned = 0;
    for (;;) {
        size_t waiting = lines->end - lines->begin;
        const char *from = waiting ? lines->text + lines->begin + scanned : NULL;
        const char *end = waiting > scanned ? memchr(from, '\n', waiting - scanned) : NULL;
        if (end)
            return hand_out(lines, (size_t)(end - lines->text) - lines->begin, true, line, err);
        if (waiting > AN_LINE_MOST)
            return fail_at(lines, lines->number + 1, err, AN_E_LIMIT,
                           "a line of more than 1 MiB: is this text?");
        if (lines->at_end)
            break;
        scanned = waiting;
        AN_TRY(fill(lines, err));
    }
    if (lines->end > lines->begin)
        return hand_out(lines, lines->end - lines->begin, false, line, err);
    *line = (an_line){.number = lines->number + 1, .ended = true};
    return AN_OK;
}

const char *an_lines_mark(const an_lines *lines)
{
    return lines->mark;
}

void an_lines_free(an_lines **lines)
{
    if (!*lines)
        return;
    if ((*lines)->stream)
        fclose((*lines)->stream);
    if ((*lines)->converter != (iconv_t)-1)
        iconv_close((*lines)->converter);
    free((*lines)->path);
    free((*lines)->raw);
    free((*lines)->text);
    free(*lines);
    *lines = NULL;
}
