/* beside.c: what kind a document is stands in its first element; looking there is enough to choose one, and
 * the program that reads it will judge it.
 */
#include "acquire/programs/beside.h"

#include "anelast/xml.h"

#include <dirent.h>
#include <errno.h>
#include <limits.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

static int is_kind(const char *path, const char *kind)
{
    char text[8192], name[64];
    FILE *file = fopen(path, "rb");
    if (!file)
        return 0;
    size_t n = fread(text, 1, sizeof text - 1, file);
    fclose(file);
    text[n] = '\0';
    return strlen(text) == n && strstr(text, AN_XML_NAMESPACE) && an_xml_sniff(text, name, sizeof name) &&
           strcmp(name, kind) == 0;
}

static int by_name(const struct dirent **a, const struct dirent **b)
{
    return strcmp((*a)->d_name, (*b)->d_name);
}

static int is_xml(const struct dirent *entry)
{
    const char *dot = strrchr(entry->d_name, '.');
    return dot && strcmp(dot, ".xml") == 0;
}

static void folder_of(const char *path, char *folder, size_t n_folder)
{
    const char *slash = strrchr(path, '/');
    if (!slash)
        snprintf(folder, n_folder, ".");
    else
        snprintf(folder, n_folder, "%.*s", slash == path ? 1 : (int)(slash - path), path);
}

/* The only one of its kind in a folder. */
static an_status find_only(const char *folder, const char *kind, char *path, size_t n_path, an_error *err)
{
    struct dirent **entries;
    int n = scandir(folder, &entries, is_xml, by_name), n_found = 0;
    char first[NAME_MAX + 1] = "", second[NAME_MAX + 1] = "";
    for (int i = 0; i < n; i++) {
        char one[PATH_MAX + NAME_MAX + 2];
        snprintf(one, sizeof one, "%s/%s", folder, entries[i]->d_name);
        if (is_kind(one, kind))
            snprintf(n_found++ == 0 ? first : second, sizeof first, "%s", entries[i]->d_name);
        free(entries[i]);
    }
    if (n >= 0)
        free(entries);
    if (n_found > 1)
        return an_fail(err, AN_E_USAGE, folder,
                       "%d %s documents stand beside the dump (%s, %s%s); say which with --%s", n_found, kind,
                       first, n_found > 2 ? "..., " : "", second, kind);
    if (n_found == 1)
        snprintf(path, n_path, "%s/%s", folder, first);
    return AN_OK;
}

an_status an_beside_find(const char *dump, const char *kind, char *path, size_t n_path, an_error *err)
{
    char folder[PATH_MAX];
    folder_of(dump, folder, sizeof folder);
    snprintf(path, n_path, "%s/%s.xml", folder, kind);
    if (access(path, R_OK) == 0)
        return AN_OK;
    path[0] = '\0';
    return find_only(folder, kind, path, n_path, err);
}
