/* tests/published/check_table.h: reader of the check tables, plain text that a physicist can extend without
 * C.
 *
 * One check a line, fields parted by '|':   quantity | given | expected | tolerance unit | status | source
 *   given      key=value pairs parted by blanks; which keys a quantity needs stands at the head of its table
 *   expected   one or more numbers, or `refused:` and words, parted by ';', that the refusal must contain
 *   tolerance  absolute in the unit that follows, or a fraction of the expected value with the word
 * `relative`; what the printed digits or the physics allow status     read, memory or exact (see the head of
 * spectra.txt), or practice for a fact of the trade A line that opens with '#' is a comment. A row whose
 * quantity nobody handles is a failure, as is a table without rows. Include after cmocka.h. */
#ifndef ANELAST_CHECK_TABLE_H
#define ANELAST_CHECK_TABLE_H

#include <ctype.h>
#include <locale.h>
#include <stdlib.h>
#include <string.h>

#include "anelast/status.h"
#include "check.h"

enum { CHECK_FIELDS = 6, CHECK_VALUES = 16, CHECK_LINE = 2048 };

typedef struct check_row {
    char text[CHECK_LINE];     /* the line, cut into fields */
    char *field[CHECK_FIELDS]; /* quantity, given, expected, tolerance, status, source */
    int line;                  /* from 1 */
} check_row;

/* What computes a quantity: fills actual[CHECK_VALUES]; a negative status is a refusal that fills err. */
typedef struct check_quantity {
    const char *name;
    an_status (*compute)(const check_row *row, double *actual, an_error *err);
} check_quantity;

static inline char *check_trim(char *text)
{
    while (isspace((unsigned char)*text))
        text++;
    char *end = text + strlen(text);
    while (end > text && isspace((unsigned char)end[-1]))
        *--end = 0;
    return text;
}

/* Cut row->text at '|' into n_field trimmed fields; returns whether there are exactly that many. */
static inline bool check_cut(check_row *row, size_t n_field)
{
    size_t n = 0;
    char *rest = row->text;
    for (char *piece; (piece = strsep(&rest, "|")) != NULL; n++)
        if (n < n_field)
            row->field[n] = check_trim(piece);
    return n == n_field;
}

/* Numbers parted by blanks; returns how many, or -1 where something else stands among them. */
static inline int check_numbers(const char *text, double *value, int n_most)
{
    int n = 0;
    for (;;) {
        while (isspace((unsigned char)*text))
            text++;
        if (!*text)
            return n;
        char *end;
        double number = strtod(text, &end);
        if (end == text || n == n_most)
            return -1;
        value[n++] = number;
        text = end;
    }
}

/* check_given_text: the value of a key; copied into value[64]. Fails the test where the key is missing. */
static inline void check_given_text(const check_row *row, const char *key, char value[64])
{
    size_t n_key = strlen(key);
    for (const char *at = row->field[1]; (at = strstr(at, key)) != NULL; at += n_key) {
        bool starts = at == row->field[1] || isspace((unsigned char)at[-1]);
        if (starts && at[n_key] == '=') {
            snprintf(value, 64, "%.*s", (int)strcspn(at + n_key + 1, " \t"), at + n_key + 1);
            return;
        }
    }
    fprintf(stderr, "line %d: no %s=\n", row->line, key);
    fail();
}

/* check_given: the value of a key as a number. */
static inline double check_given(const check_row *row, const char *key)
{
    char text[64] = "";
    double value = NAN;
    check_given_text(row, key, text);
    if (check_numbers(text, &value, 1) != 1) {
        fprintf(stderr, "line %d: %s=%s is no number\n", row->line, key, text);
        fail();
    }
    return value;
}

static inline bool check_refusal(const check_row *row, an_status status, const an_error *err)
{
    char words[256];
    snprintf(words, sizeof words, "%s", row->field[2] + strlen("refused:"));
    bool good = status < 0;
    char *rest = words;
    for (char *word; (word = strsep(&rest, ";")) != NULL;)
        good = good && strstr(err->text, check_trim(word)) != NULL;
    if (!good)
        fprintf(stderr, "line %d: status %d '%s', expected %s\n", row->line, status, err->text,
                row->field[2]);
    return good;
}

static inline bool check_values(const check_row *row, const double *actual)
{
    double expected[CHECK_VALUES];
    int n = check_numbers(row->field[2], expected, CHECK_VALUES);
    char *unit;
    double tolerance = strtod(row->field[3], &unit);
    bool good = n > 0 && unit != row->field[3] && *check_trim(unit);
    if (!good)
        fprintf(stderr, "line %d: expected value or tolerance with unit is malformed\n", row->line);
    bool relative = strcmp(check_trim(unit), "relative") == 0;
    for (int i = 0; i < n; i++) {
        double allowed = relative ? tolerance * fabs(expected[i]) : tolerance;
        char what[96];
        snprintf(what, sizeof what, "line %d: %.40s, value %d", row->line, row->field[0], i + 1);
        good = check_report(check_is_close(actual[i], expected[i], allowed), what, actual[i], expected[i],
                            allowed) &&
               good;
    }
    return good;
}

static inline bool check_status_word(const check_row *row)
{
    static const char *const allowed[] = {"read", "memory", "exact", "practice"};
    for (size_t i = 0; i < sizeof allowed / sizeof allowed[0]; i++)
        if (strcmp(row->field[4], allowed[i]) == 0 && *row->field[5])
            return true;
    fprintf(stderr, "line %d: no source, or a status that is none\n", row->line);
    return false;
}

static inline bool check_one(const check_row *row, const check_quantity *quantity, size_t n_quantity)
{
    if (!check_status_word(row))
        return false;
    for (size_t i = 0; i < n_quantity; i++) {
        if (strcmp(row->field[0], quantity[i].name) != 0)
            continue;
        double actual[CHECK_VALUES];
        for (int k = 0; k < CHECK_VALUES; k++)
            actual[k] = NAN;
        an_error err = {0};
        an_status status = quantity[i].compute(row, actual, &err);
        if (strncmp(row->field[2], "refused:", 8) == 0)
            return check_refusal(row, status, &err);
        if (status < 0)
            fprintf(stderr, "line %d: refused: %s\n", row->line, err.text);
        return status >= 0 && check_values(row, actual);
    }
    fprintf(stderr, "line %d: nobody handles '%s'\n", row->line, row->field[0]);
    return false;
}

/* check_next: the next line of a table that is no comment, cut into n_field fields. Returns false at the end;
 * fails the test on a line with another number of fields. */
static inline bool check_next(FILE *table, check_row *row, size_t n_field)
{
    while (fgets(row->text, sizeof row->text, table)) {
        row->line++;
        char *start = check_trim(row->text);
        if (!*start || *start == '#')
            continue;
        if (!check_cut(row, n_field)) {
            fprintf(stderr, "line %d: not %zu fields\n", row->line, n_field);
            fail();
        }
        return true;
    }
    return false;
}

/* check_table_run: run every row of a table in tests/published; the test fails if any row does. */
static inline void check_table_run(const char *name, const check_quantity *quantity, size_t n_quantity)
{
    char path[1024];
    snprintf(path, sizeof path, "%s/tests/published/%s", ANELAST_SOURCE, name);
    FILE *table = fopen(path, "r");
    if (!table) {
        fprintf(stderr, "%s cannot be opened\n", path);
        fail();
        return;
    }
    check_row row = {0};
    size_t n_row = 0;
    size_t n_bad = 0;
    for (; check_next(table, &row, CHECK_FIELDS); n_row++)
        n_bad += !check_one(&row, quantity, n_quantity);
    fclose(table);
    fprintf(stderr, "%s: %zu rows, %zu failed\n", name, n_row, n_bad);
    assert_true(n_row > 0);
    assert_int_equal(n_bad, 0);
}

#endif
