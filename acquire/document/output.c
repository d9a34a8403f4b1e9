/* Files that appear whole or not at all. A file is written without a name in the folder of its place, synced,
 * given a name beside the place and renamed: who is killed before leaves nothing behind. Where the file
 * system has no nameless files it is written under the name beside the place.
 */
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
    char *temporary; /* name beside path; NULL: the place is written directly (a device, a pipe) */
    bool nameless;   /* the temporary has no name yet */
};

static void release(an_output **output)
{
    free((*output)->path);
    free((*output)->temporary);
    free(*output);
    *output = NULL;
}

/* The folder of a path, to be freed; NULL without memory. */
static char *folder_of(const char *path)
{
    char *copy = strdup(path);
    char *folder = copy ? strdup(dirname(copy)) : NULL;
    free(copy);
    return folder;
}

/* Open the temporary, without a name where that is possible. Returns a descriptor, or -1 with errno. */
static int open_temporary(an_output *output)
{
    char *folder = folder_of(output->path);
    if (!folder)
        return -1;
    int fd = access("/proc/self/fd", X_OK) == 0 ? open(folder, O_TMPFILE | O_WRONLY | O_CLOEXEC, 0666) : -1;
    free(folder);
    output->nameless = fd >= 0;
    return fd >= 0 ? fd : open(output->temporary, O_CREAT | O_EXCL | O_WRONLY | O_CLOEXEC, 0666);
}

/* Open the temporary of a place, with the mode of the file that it will replace. */
static an_status open_beside(an_output *output, an_error *err)
{
    struct stat before;
    if (asprintf(&output->temporary, "%s.part-%ld", output->path, (long)getpid()) < 0) {
        output->temporary = NULL;
        return an_fail_memory(err, "an output");
    }
    int fd = open_temporary(output);
    if (fd < 0)
        return an_fail(err, AN_E_IO, output->path, "cannot be written: %s", strerror(errno));
    if (stat(output->path, &before) == 0)
        fchmod(fd, before.st_mode & 0777);
    output->stream = fdopen(fd, "wb");
    if (output->stream)
        return AN_OK;
    close(fd);
    if (!output->nameless)
        unlink(output->temporary);
    return an_fail_memory(err, "an output");
}

/* Give the temporary its name, while its stream is open. Returns 0 or errno. */
static int name_temporary(an_output *output)
{
    char descriptor[40];
    if (!output->nameless)
        return 0;
    snprintf(descriptor, sizeof descriptor, "/proc/self/fd/%d", fileno(output->stream));
    /* A process of this number that died between naming and renaming may have left one. */
    unlink(output->temporary);
    if (linkat(AT_FDCWD, descriptor, AT_FDCWD, output->temporary, AT_SYMLINK_FOLLOW) != 0)
        return errno;
    output->nameless = false;
    return 0;
}

/* Open a place that can be no target of a rename: a device, a pipe. */
static an_status open_in_place(an_output *output, an_error *err)
{
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
    if (!error && output->temporary)
        error = name_temporary(output);
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
    char *folder = folder_of(path);
    int fd = folder ? open(folder, O_RDONLY | O_DIRECTORY | O_CLOEXEC) : -1;
    if (fd >= 0) {
        fsync(fd);
        close(fd);
    }
    free(folder);
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
        if (o->temporary && !o->nameless)
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
    if (o->temporary && !o->nameless)
        unlink(o->temporary);
    release(output);
}
