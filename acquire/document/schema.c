/* Where the schemas are: the folder named in the environment; the one installed with the running program, wherever that
 * was put; the source while programs are built and tested; or the place they were configured for.
 */
#include "anelast/xml.h"

#include <stdlib.h>
#include <string.h>
#include <unistd.h>

/* A root's name becomes part of a path, so it must be a plain word. */
static bool is_plain(const char *root)
{
    size_t n = strspn(root, "abcdefghijklmnopqrstuvwxyz-");
    return n > 0 && n < 32 && root[n] == '\0';
}

/* The schemas of the prefix that the running program stands in: PREFIX/bin/program, PREFIX/include/anelast/schema. Empty
 * where the program's own place is not known. */
static void beside_program(char *folder, size_t n_folder)
{
    char program[4096];
    ssize_t n = readlink("/proc/self/exe", program, sizeof program - 1);
    *folder = '\0';
    if (n <= 0)
        return;
    program[n] = '\0';
    char *slash = strrchr(program, '/');
    if (slash)
        *slash = '\0';
    if (snprintf(folder, n_folder, "%s/../include/anelast/schema", program) >= (int)n_folder || access(folder, X_OK) != 0)
        *folder = '\0';
}

an_status an_xml_schema_path(const char *root, char *path, size_t n_path, an_error *err)
{
    char installed[4096];
    const char *folders[] = {getenv("ANELAST_SCHEMA_DIR"), installed, ANELAST_SOURCE_SCHEMA, ANELAST_INSTALLED_SCHEMA};
    const char *looked = NULL;
    beside_program(installed, sizeof installed);
    if (!is_plain(root))
        return an_fail(err, AN_E_DOCUMENT, NULL, "element '%.40s' is not the root of a document known here",
                       root);
    for (size_t i = 0; i < sizeof folders / sizeof *folders; i++) {
        if (!folders[i] || !*folders[i])
            continue;
        looked = folders[i];
        int n = snprintf(path, n_path, "%s/%s.xsd", looked, root);
        if (n > 0 && (size_t)n < n_path && access(path, R_OK) == 0)
            return AN_OK;
        n = snprintf(path, n_path, "%s/common.xsd", looked);
        if (i == 0 || (n > 0 && (size_t)n < n_path && access(path, R_OK) == 0))
            break;
    }
    return an_fail(err, AN_E_DOCUMENT, NULL,
                   "element '%s' is not the root of a document known here: no schema %s.xsd in %s", root,
                   root, looked);
}
