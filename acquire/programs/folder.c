/* folder.c: results are made in a folder of their own beside their place and put there by one rename, so that
 * a reader sees an old folder, a whole new one, or none.
 */
#include "acquire/programs/folder.h"

#include <dirent.h>
#include <errno.h>
#include <fcntl.h>
#include <ftw.h>
#include <limits.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

const char *const an_folder_documents[] = {"run.xml",      "points.xml",  "grid.xml", "master.xml",
                                           "material.xml", "report.html", NULL};

/* Like mkdir -p. */
static int make_way(const char *path)
{
    char part[PATH_MAX];
    struct stat about;
    if ((size_t)snprintf(part, sizeof part, "%s", path) >= sizeof part) {
        errno = ENAMETOOLONG;
        return -1;
    }
    for (char *at = part + 1; *at; at++)
        if (*at == '/') {
            *at = '\0';
            if (mkdir(part, 0777) != 0 && errno != EEXIST)
                return -1;
            *at = '/';
        }
    if (mkdir(part, 0777) != 0 && errno != EEXIST)
        return -1;
    if (stat(part, &about) != 0 || S_ISDIR(about.st_mode))
        return 0;
    errno = ENOTDIR;
    return -1;
}

an_status an_folder_begin(const char *into, char *work, size_t n_work, an_error *err)
{
    if (make_way(into) != 0)
        return an_fail(err, AN_E_IO, into, "the folder cannot be made: %s", strerror(errno));
    if ((size_t)snprintf(work, n_work, "%s/.anelast-XXXXXX", into) >= n_work)
        return an_fail(err, AN_E_IO, into, "the path is too long");
    if (!mkdtemp(work))
        return an_fail(err, AN_E_IO, into, "no folder can be made in it: %s", strerror(errno));
    /* mkdtemp keeps it private; results are as open as any folder of the user */
    mode_t mask = umask(0);
    umask(mask);
    chmod(work, 0777 & ~mask);
    return AN_OK;
}

void an_folder_name(const char *id, char *name, size_t n_name)
{
    size_t n = 0;
    while (*id == ' ')
        id++;
    for (; *id && n + 1 < n_name; id++) {
        unsigned char c = (unsigned char)*id;
        name[n] = c < 0x20 || c == '/' || c == '\\' || c == 0x7f || (c == '.' && n == 0) ? '_' : (char)c;
        n++;
    }
    while (n > 0 && name[n - 1] == ' ')
        n--;
    name[n] = '\0';
    if (n == 0)
        snprintf(name, n_name, "run");
}

static int is_document(const char *name)
{
    for (const char *const *document = an_folder_documents; *document; document++)
        if (strcmp(name, *document) == 0)
            return 1;
    return 0;
}

/* Move what people put into the old folder over to the new one. */
static int keep_others(const char *old, const char *place)
{
    DIR *folder = opendir(old);
    if (!folder)
        return -1;
    int failed = 0;
    for (struct dirent *entry; !failed && (entry = readdir(folder));) {
        char from[2 * PATH_MAX], to[2 * PATH_MAX];
        if (strcmp(entry->d_name, ".") == 0 || strcmp(entry->d_name, "..") == 0 || is_document(entry->d_name))
            continue;
        snprintf(from, sizeof from, "%s/%s", old, entry->d_name);
        snprintf(to, sizeof to, "%s/%s", place, entry->d_name);
        failed = rename(from, to) != 0;
    }
    closedir(folder);
    return failed ? -1 : 0;
}

static void sync_folder(const char *path)
{
    int folder = open(path, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    if (folder < 0)
        return;
    fsync(folder);
    close(folder);
}

/* Exchange two folders in one step; two renames where the file system cannot. */
static int exchange(const char *work, const char *place)
{
    char aside[PATH_MAX + 8];
    if (renameat2(AT_FDCWD, work, AT_FDCWD, place, RENAME_EXCHANGE) == 0)
        return 0;
    if (errno != EINVAL && errno != ENOSYS)
        return -1;
    snprintf(aside, sizeof aside, "%s.old", work);
    if (rename(place, aside) != 0)
        return -1;
    if (rename(work, place) != 0) {
        int failed = errno;
        rename(aside, place);
        errno = failed;
        return -1;
    }
    return rename(aside, work);
}

an_status an_folder_publish(char *work, const char *into, const char *name, an_error *err)
{
    char place[PATH_MAX];
    struct stat about;
    if ((size_t)snprintf(place, sizeof place, "%s/%s", into, name) >= sizeof place)
        return an_fail(err, AN_E_IO, into, "the path is too long");
    sync_folder(work);
    if (lstat(place, &about) != 0) {
        if (rename(work, place) != 0)
            return an_fail(err, AN_E_IO, place, "cannot be put in place: %s", strerror(errno));
        sync_folder(into);
        work[0] = '\0';
        return AN_OK;
    }
    if (!S_ISDIR(about.st_mode))
        return an_fail(err, AN_E_IO, place, "is there already, and is no folder");
    if (exchange(work, place) != 0)
        return an_fail(err, AN_E_IO, place, "cannot be replaced: %s", strerror(errno));
    if (keep_others(work, place) != 0) {
        an_fail(err, AN_E_IO, work, "other files of the old folder are left here: %s", strerror(errno));
        work[0] = '\0';
        return AN_E_IO;
    }
    an_folder_drop(work);
    work[0] = '\0';
    sync_folder(into);
    return AN_OK;
}

static int remove_one(const char *path, const struct stat *about, int kind, struct FTW *where)
{
    (void)about;
    (void)kind;
    (void)where;
    return remove(path);
}

void an_folder_drop(const char *work)
{
    if (work[0])
        nftw(work, remove_one, 16, FTW_DEPTH | FTW_PHYS);
}
