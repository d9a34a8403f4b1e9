/* Cutting lines into fields: the inner loop of reading text, so it copies nothing. A quote character doubled
 * within a quoted field stays doubled: such fields are names, never numbers.
 */
#include "acquire/dump/cells.h"

#include <string.h>

static int is_blank(char c)
{
    return c == ' ' || c == '\t';
}

an_cell an_cell_trim(const char *text, size_t n)
{
    while (n > 0 && is_blank(text[0])) {
        text++;
        n--;
    }
    while (n > 0 && is_blank(text[n - 1]))
        n--;
    return (an_cell){text, n};
}

static int split_blanks(const char *text, size_t n, an_cell *cells)
{
    int count = 0;
    for (size_t at = 0;;) {
        while (at < n && is_blank(text[at]))
            at++;
        if (at == n)
            return count;
        size_t begin = at;
        while (at < n && !is_blank(text[at]))
            at++;
        if (count == AN_CELLS_MOST)
            return AN_CELLS_MOST + 1;
        cells[count++] = (an_cell){text + begin, at - begin};
    }
}

/* Where the field that begins at `at` ends, and its content. */
static size_t next_field(const char *text, size_t n, size_t at, char separator, char quote, an_cell *cell)
{
    size_t begin = at;
    while (quote && begin < n && is_blank(text[begin]))
        begin++;
    if (quote && begin < n && text[begin] == quote) {
        size_t close = ++begin;
        while (close < n && !(text[close] == quote && (close + 1 == n || text[close + 1] != quote)))
            close += text[close] == quote ? 2 : 1;
        if (close > n)
            close = n;
        *cell = (an_cell){text + begin, close - begin};
        const char *end = close < n ? memchr(text + close, separator, n - close) : NULL;
        return end ? (size_t)(end - text) : n;
    }
    const char *end = memchr(text + at, separator, n - at);
    size_t stop = end ? (size_t)(end - text) : n;
    *cell = an_cell_trim(text + at, stop - at);
    return stop;
}

int an_cells_split(const char *text, size_t n, char separator, char quote, an_cell *cells)
{
    if (separator == ' ')
        return split_blanks(text, n, cells);
    int count = 0;
    for (size_t at = 0; at <= n; at++) {
        if (count == AN_CELLS_MOST)
            return AN_CELLS_MOST + 1;
        at = next_field(text, n, at, separator, quote, &cells[count++]);
    }
    return count;
}

int an_cell_is(an_cell cell, const char *text)
{
    return strlen(text) == cell.n && memcmp(text, cell.text, cell.n) == 0;
}
