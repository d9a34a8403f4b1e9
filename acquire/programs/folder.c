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
#include <sys/file.h>
#include <sys/stat.h>
#include <time.h>
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

static int remove_one(const char *path, const struct stat *about, int kind, struct FTW *where)
{
    (void)about;
    (void)kind;
    (void)where;
    return remove(path);
}

static void remove_all(const char *path)
{
    nftw(path, remove_one, 16, FTW_DEPTH | FTW_PHYS);
}

static int is_document(const char *name)
{
    for (const char *const *document = an_folder_documents; *document; document++)
        if (strcmp(name, *document) == 0)
            return 1;
    return 0;
}

/* A document, or one that was being written (anelast/output.h puts a mark around its name). */
static int belongs_to_document(const char *name)
{
    for (const char *const *document = an_folder_documents; *document; document++)
        if (strstr(name, *document))
            return 1;
    return strcmp(name, ".") == 0 || strcmp(name, "..") == 0;
}

/* Nothing in it but what a run makes: what people put somewhere is never removed. */
static int holds_documents_only(const char *path)
{
    int only = 1;
    DIR *folder = opendir(path);
    if (!folder)
        return 0;
    for (struct dirent *entry; only && (entry = readdir(folder));)
        only = belongs_to_document(entry->d_name);
    closedir(folder);
    return only;
}

static const char work_prefix[] = ".anelast-";

static int is_work(const struct dirent *entry)
{
    return strncmp(entry->d_name, work_prefix, sizeof work_prefix - 1) == 0;
}

/* Old, and locked by nobody. The age keeps a folder safe that another program has made and not yet locked. */
static int is_abandoned(const char *path)
{
    enum { OLD_S = 600 };
    struct stat about;
    int folder = open(path, O_RDONLY | O_DIRECTORY | O_CLOEXEC | O_NOFOLLOW);
    if (folder < 0)
        return 0;
    int abandoned = fstat(folder, &about) == 0 && time(NULL) - about.st_mtime > OLD_S &&
                    flock(folder, LOCK_EX | LOCK_NB) == 0 && holds_documents_only(path);
    close(folder);
    return abandoned;
}

static void remove_abandoned(const char *into)
{
    struct dirent **entries;
    int n = scandir(into, &entries, is_work, NULL);
    for (int i = 0; i < n; i++) {
        char path[PATH_MAX + NAME_MAX + 2];
        snprintf(path, sizeof path, "%s/%s", into, entries[i]->d_name);
        if (is_abandoned(path))
            remove_all(path);
        free(entries[i]);
    }
    if (n >= 0)
        free(entries);
}

an_status an_folder_begin(const char *into, an_work *work, an_error *err)
{
    *work = (an_work){"", -1};
    if (make_way(into) != 0)
        return an_fail(err, AN_E_IO, into, "the folder cannot be made: %s", strerror(errno));
    remove_abandoned(into);
    if ((size_t)snprintf(work->path, sizeof work->path, "%s/%sXXXXXX", into, work_prefix) >=
            sizeof work->path ||
        !mkdtemp(work->path)) {
        work->path[0] = '\0';
        return an_fail(err, AN_E_IO, into, "no folder can be made in it: %s", strerror(errno));
    }
    work->lock = open(work->path, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    if (work->lock >= 0)
        flock(work->lock, LOCK_EX | LOCK_NB);
    /* mkdtemp keeps it private; results are as open as any folder of the user */
    mode_t mask = umask(0);
    umask(mask);
    chmod(work->path, 0777 & ~mask);
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

/* Nobody works there any more. */
static void end_work(an_work *work)
{
    work->path[0] = '\0';
    if (work->lock >= 0)
        close(work->lock);
    work->lock = -1;
}

void an_folder_drop(an_work *work)
{
    if (work->path[0])
        remove_all(work->path);
    end_work(work);
}

/* Where something stands already. */
static an_status replace(an_work *work, const char *place, an_error *err)
{
    struct stat about;
    if (lstat(place, &about) == 0 && !S_ISDIR(about.st_mode))
        return an_fail(err, AN_E_IO, place, "is there already, and is no folder");
    if (exchange(work->path, place) != 0)
        return an_fail(err, AN_E_IO, place, "cannot be replaced: %s", strerror(errno));
    if (keep_others(work->path, place) != 0) {
        an_fail(err, AN_E_IO, work->path, "other files of the old folder are left here: %s", strerror(errno));
        end_work(work);
        return AN_E_IO;
    }
    an_folder_drop(work);
    return AN_OK;
}

an_status an_folder_publish(an_work *work, const char *into, const char *name, an_error *err)
{
    char place[PATH_MAX];
    struct stat about;
    if ((size_t)snprintf(place, sizeof place, "%s/%s", into, name) >= sizeof place)
        return an_fail(err, AN_E_IO, into, "the path is too long");
    sync_folder(work->path);
    if (lstat(place, &about) == 0)
        AN_TRY(replace(work, place, err));
    else if (rename(work->path, place) != 0)
        return an_fail(err, AN_E_IO, place, "cannot be put in place: %s", strerror(errno));
    end_work(work);
    sync_folder(into);
    return AN_OK;
}
