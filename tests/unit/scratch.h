/* tests/unit/scratch.h: a folder of its own for a test that needs files. Include after cmocka.h. */
#ifndef ANELAST_TESTS_SCRATCH_H
#define ANELAST_TESTS_SCRATCH_H

#include <dirent.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

/* scratch_enter, scratch_leave: group setup and teardown: make a folder, work in it, remove it with its
 * files. */
static inline int scratch_enter(void **state)
{
    const char *place = getenv("TMPDIR");
    char *folder = NULL;
    if (asprintf(&folder, "%s/anelast-test-XXXXXX", place ? place : P_tmpdir) < 0)
        return -1;
    *state = folder;
    return mkdtemp(folder) && chdir(folder) == 0 ? 0 : -1;
}

static inline int scratch_count(void)
{
    int n = 0;
    DIR *folder = opendir(".");
    for (struct dirent *entry; folder && (entry = readdir(folder));)
        n += entry->d_name[0] != '.';
    if (folder)
        closedir(folder);
    return n;
}

static inline int scratch_leave(void **state)
{
    DIR *folder = opendir(".");
    for (struct dirent *entry; folder && (entry = readdir(folder));)
        if (entry->d_name[0] != '.')
            unlink(entry->d_name);
    if (folder)
        closedir(folder);
    int failed = chdir("/") || rmdir(*state);
    free(*state);
    return failed;
}

/* scratch_write: a file with a text. */
static inline void scratch_write(const char *path, const char *text)
{
    FILE *stream = fopen(path, "wb");
    assert_non_null(stream);
    assert_true(fputs(text, stream) >= 0);
    assert_int_equal(fclose(stream), 0);
}

/* scratch_read: the text of a file; free it. */
static inline char *scratch_read(const char *path)
{
    FILE *stream = fopen(path, "rb");
    assert_non_null(stream);
    char *text = NULL;
    size_t n = 0;
    FILE *memory = open_memstream(&text, &n);
    for (int c; (c = fgetc(stream)) != EOF;)
        fputc(c, memory);
    fclose(memory);
    fclose(stream);
    return text;
}

/* scratch_enter_schema: group setup: a scratch folder where the named schema lies beside a copy of the common one, and
 * which the environment names as the folder of schemas. */
static inline int scratch_enter_schema(void **state, const char *name, const char *schema)
{
    if (scratch_enter(state) != 0)
        return -1;
    char *common = scratch_read(ANELAST_SOURCE "/include/anelast/schema/common.xsd");
    scratch_write("common.xsd", common);
    scratch_write(name, schema);
    free(common);
    return setenv("ANELAST_SCHEMA_DIR", ".", 1);
}

#endif
