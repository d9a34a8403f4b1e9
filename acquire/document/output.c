/* Files that appear whole or not at all: written beside their place, synced, renamed. */
#include "anelast/output.h"

#include <errno.h>
#include <fcntl.h>
#include <libgen.h>
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

struct an_output {
    FILE *stream;    /* NULL once closed */
    char *path;      /* NULL: standard output */
    char *temporary; /* beside path */
    bool in_place;   /* the place is no regular file (/dev/full, a pipe): written directly */
};

static void release(an_output **output)
{
    free((*output)->path);
    free((*output)->temporary);
    free(*output);
    *output = NULL;
}

/* The mode that a new file gets: what the umask leaves, or that of the file it replaces. */
static mode_t mode_for(const char *path)
{
    struct stat before;
    if (stat(path, &before) == 0)
        return before.st_mode & 0777;
    mode_t mask = umask(0);
    umask(mask);
    return 0666 & ~mask;
}

/* Open the temporary beside the place. */
static an_status open_beside(an_output *output, an_error *err)
{
    if (asprintf(&output->temporary, "%s.part-XXXXXX", output->path) < 0) {
        output->temporary = NULL;
        return an_fail_memory(err, "an output");
    }
    int fd = mkostemp(output->temporary, O_CLOEXEC);
    if (fd < 0)
        return an_fail(err, AN_E_IO, output->path, "cannot be written: %s", strerror(errno));
    fchmod(fd, mode_for(output->path));
    output->stream = fdopen(fd, "wb");
    if (output->stream)
        return AN_OK;
    close(fd);
    unlink(output->temporary);
    return an_fail_memory(err, "an output");
}

/* Open a place that can be no target of a rename: a device, a pipe. */
static an_status open_in_place(an_output *output, an_error *err)
{
    output->in_place = true;
    output->stream = fopen(output->path, "wbe");
    if (!output->stream)
        return an_fail(err, AN_E_IO, output->path, "cannot be written: %s", strerror(errno));
    return AN_OK;
}

an_status an_output_open(const char *path, an_output **output, an_error *err)
{
    *output = calloc(1, sizeof **output);
    if (!*output)
        return an_fail_memory(err, "an output");
    if (!path || strcmp(path, "-") == 0) {
        (*output)->stream = stdout;
        return AN_OK;
    }
    (*output)->path = strdup(path);
    struct stat before;
    bool exists = stat(path, &before) == 0;
    an_status status;
    if (!(*output)->path)
        status = an_fail_memory(err, "an output");
    else if (exists && S_ISDIR(before.st_mode))
        status = an_fail(err, AN_E_IO, path, "is a folder");
    else if (exists && !S_ISREG(before.st_mode))
        status = open_in_place(*output, err);
    else
        status = open_beside(*output, err);
    if (status < 0)
        release(output);
    return status;
}

FILE *an_output_stream(an_output *output)
{
    return output->stream;
}

/* Flush to the disk and close; the first error counts. Standard output stays open for others: what a close
 * would tell is asked of a duplicate.
 */
static int finish_stream(an_output *output)
{
    FILE *stream = output->stream;
    bool failed = ferror(stream) != 0;
    int error = fflush(stream) != 0 ? errno : failed ? EIO : 0;
    if (!error && output->temporary && fsync(fileno(stream)) != 0)
        error = errno;
    int duplicate = output->path ? -1 : dup(fileno(stream));
    if (duplicate >= 0 && close(duplicate) != 0 && !error)
        error = errno;
    if (output->path && fclose(stream) != 0 && !error)
        error = errno;
    output->stream = NULL;
    return error;
}

/* Make the rename itself last: sync the folder. A file system that cannot sync a folder is no reason to
 * refuse. */
static void sync_folder(const char *path)
{
    char *copy = strdup(path);
    if (!copy)
        return;
    int fd = open(dirname(copy), O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    if (fd >= 0) {
        fsync(fd);
        close(fd);
    }
    free(copy);
}

an_status an_output_commit(an_output **output, an_error *err)
{
    an_output *o = *output;
    const char *place = o->path ? o->path : "standard output";
    int error = finish_stream(o);
    if (!error && o->temporary && rename(o->temporary, o->path) != 0)
        error = errno;
    an_status status = AN_OK;
    if (error) {
        status = an_fail(err, AN_E_IO, place, "cannot be written: %s", strerror(error));
        if (o->temporary)
            unlink(o->temporary);
    } else if (o->temporary) {
        sync_folder(o->path);
    }
    release(output);
    return status;
}

void an_output_discard(an_output **output)
{
    an_output *o = *output;
    if (!o)
        return;
    if (o->path && o->stream)
        fclose(o->stream);
    if (o->temporary)
        unlink(o->temporary);
    release(output);
}
